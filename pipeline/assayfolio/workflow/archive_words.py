"""What a copy says to whoever opens it."""

READ_ME = """\
True copy of sealed folders
===========================

    sha256sum -c sha256sums.txt              every file of this copy

true-copy.pdf     the certificate: which folders, their seals, when, by whom (true-copy.json: for programs)
folios/           the folders themselves; each explains itself in data/READ-ME-FIRST.txt
trail/lines.jsonl the laboratory's audit trail, from the first entry about one of the folders to its
                  newest line on the day of the copy
wheels/           where it is there: the program that made each run, in a folder named by its SHA-256,
                  and every package it needs, for machines of the same kind

One folder against the trail, with Python alone:

    cd folios/STUDY/run-0001
    python3 data/check_folio.py ../../../trail/lines.jsonl

It prints the head of these lines. Compare it with what the laboratory or a witness has written down.

Computing a run again, without a network:

    python3 -m venv again
    again/bin/pip install --no-index --find-links wheels --require-hashes --only-binary :all: \\
        -r folios/STUDY/run-0001/data/requirements.lock
    again/bin/pip install --no-index --no-deps wheels/SHA256/assayfolio-*.whl
    again/bin/assayfolio rerun folios/STUDY/run-0001 --output records

The system needs Python 3.11 or later and the libraries Pango, HarfBuzz (with its subsetter) and
fontconfig. The same versions of these give the same bytes; otherwise the re-run names them and compares
text and figures.
"""
