"""What a folio says to somebody who has nothing but the folder: a short text, and a script to check with.

The script needs Python 3.8 or later and nothing else. Both travel in the payload, so that they are sealed
with what they explain.
"""

from collections.abc import Mapping

READ_ME_FILE = "data/READ-ME-FIRST.txt"
SCRIPT_FILE = "data/check_folio.py"


def read_me_first(subject: str, title: str, version: str) -> Mapping[str, bytes]:
    """The two files by their paths in the folio of the run `subject` ("STUDY/run-0001")."""
    heading = f"{subject}: {title}"
    text = f"{heading}\n{'=' * min(len(heading), 78)}\n\n{_TEXT}".replace("@VERSION@", version)
    return {
        READ_ME_FILE: text.encode("utf-8"),
        SCRIPT_FILE: _SCRIPT.encode("utf-8"),
    }


_TEXT = """\
This folder is the sealed record of one run of a planned comparison. It can be checked with ordinary
tools, years later, without the program that made it. Open a terminal in the folder that holds bagit.txt.


1. Is every file as it was sealed?

    sha256sum -c manifest-sha256.txt         every file of the record
    sha256sum -c tagmanifest-sha256.txt      the list of files itself
    sha256sum tagmanifest-sha256.txt         the seal of this folder

The folder is a BagIt 1.0 folder (RFC 8493); any program for these validates it too. The seal was entered in
the laboratory's audit trail, in the entry "sealed" of this run. Compare the two: whoever rewrites the files
and both lists gets another seal.


2. How did it come about?

data/trail.jsonl holds this run's entries of the audit trail, one line an entry. Each carries, as "previous",
the SHA-256 of the line before it in the laboratory's trail (without its line end).

    python3 data/check_folio.py                           what this folder shows by itself
    python3 data/check_folio.py AUDIT-TRAIL.JSONL         the same against the laboratory's trail, or against
                                                          the later lines that came with a copy

It prints the head of the trail that it was given. Compare it with what was written down elsewhere: the head
file beside the trail, a witness that the laboratory keeps, or a later report, which prints the head it was
made under.


3. Who signed?

The report in data/ is the unsigned one. A signed one lies in sign-off/report.pdf, with one record a signature
beside it; it begins with the very bytes of data/report.pdf.

    pdfsig sign-off/report.pdf               signatures, and whether the file changed after them
    openssl x509 -text -noout -in CERT       a signer's certificate, where one is kept in sign-off/


4. Where do the numbers come from?

    data/study.yaml          the plan: factor, levels, alpha, comparisons
    data/inputs/             the raw data, byte for byte as received
    data/context/            settings, exclusions, people, registered plans, earlier executions on these data
    data/findings.json       every number of the report, and the verdicts
    data/run.json            who, when, on which computer, the digests of all inputs
    data/report.pdf          the report; plan, data and findings are attached inside it as well
    data/environment.json, data/requirements.lock    with what it was computed

By hand: "sums" in data/findings.json has n, the sum S and the sum of squares Q of each level as exact
decimals. With k levels, N values in all and T the sum of all values:

    between levels   SSB = sum(S*S/n) - T*T/N      k - 1 degrees of freedom
    within levels    SSW = sum(Q - S*S/n)          N - k degrees of freedom
    F = (SSB/(k - 1)) / (SSW/(N - k))

data/check_folio.py does this in exact fractions and compares. The intervals and p-values follow from F, t and
the other distributions named in the report's section on methods.


5. With the program (Assayfolio @VERSION@)

    assayfolio verify FOLDER
    assayfolio rerun FOLDER --output DIR     computes everything again from this folder alone, and compares
"""

_SCRIPT = '''\
"""Checks a sealed folder with nothing but Python 3.8 or later: python3 data/check_folio.py [TRAIL.JSONL]

Files against both manifests, the run's lines of the audit trail, the analysis of variance from the exact
sums; with a trail (all of it, or the lines that came with a copy) also its chain, the run's lines in it, and
the seal.
Exit code 0: all of it agrees; 1: something does not.
"""

import hashlib
import json
import sys
from fractions import Fraction
from pathlib import Path

FOLDER = Path(__file__).resolve().parent.parent
wrong = []


def sha256(content):
    return hashlib.sha256(content).hexdigest()


def lines_of(path):
    return [line for line in path.read_bytes().split(b"\\n") if line]


def check(holds, words):
    print(("agrees   " if holds else "DIFFERS  ") + words)
    if not holds:
        wrong.append(words)


def check_manifest(name):
    for line in (FOLDER / name).read_text("utf-8").splitlines():
        digest, _, path = line.partition("  ")
        file = FOLDER / path
        if not file.is_file() or sha256(file.read_bytes()) != digest:
            check(False, path + " against " + name)


def check_chain(lines, name):
    """Each entry carries the digest of the line before, wherever that line is there."""
    entries = [json.loads(line) for line in lines]
    digests = {entry["seq"]: sha256(line) for entry, line in zip(entries, lines)}
    broken = [e["seq"] for e in entries if digests.get(e["seq"] - 1, e["previous"]) != e["previous"]]
    rising = all(a["seq"] < b["seq"] for a, b in zip(entries, entries[1:]))
    words = " entries, each carries the digest before it"
    check(rising and not broken, name + ": " + str(len(lines)) + words)
    return entries


def check_trail(trail, own, seal):
    lines = lines_of(trail)
    entries = check_chain(lines, trail.name)
    gapless = [e["seq"] for e in entries] == list(range(entries[0]["seq"], entries[0]["seq"] + len(lines)))
    check(gapless, trail.name + ": numbered without a gap")
    check(set(own) <= set(lines), "the lines of data/trail.jsonl stand in " + trail.name)
    subject = json.loads(own[0])["subject"]
    sealed = [e for e in entries if e["action"] == "sealed" and e["subject"] == subject]
    stated = [e["details"]["seal"] for e in sealed]
    check(stated == [seal], "the seal of " + subject + " stands in " + trail.name)
    print("         head of " + trail.name + ": entry " + str(entries[-1]["seq"]) + ", " + sha256(lines[-1]))


def check_analysis(name, response):
    """The analysis of variance from n, sum and sum of squares, in exact fractions."""
    keys = ("n", "sum", "sum_of_squares")
    sums = [[Fraction(level["sums"][key]) for key in keys] for level in response["levels"]]
    k, n, total = len(sums), sum(s[0] for s in sums), sum(s[1] for s in sums)
    between = sum(s * s / m for m, s, _ in sums) - total * total / n
    within = sum(q - s * s / m for m, s, q in sums)
    stated = response["anova"]
    check(float(between) == stated["between"]["ss"], name + ": between levels, SSB = " + repr(float(between)))
    check(float(within) == stated["within"]["ss"], name + ": within levels, SSW = " + repr(float(within)))
    if stated["f"] is not None:
        f = float((between / (k - 1)) / (within / (n - k)))
        check(f == stated["f"], name + ": F = " + repr(f))


check_manifest("manifest-sha256.txt")
check_manifest("tagmanifest-sha256.txt")
check(not wrong, "every file against its manifest")
seal = sha256((FOLDER / "tagmanifest-sha256.txt").read_bytes())
print("         seal of this folder: " + seal)
own = lines_of(FOLDER / "data" / "trail.jsonl")
check_chain(own, "data/trail.jsonl")
for trail in sys.argv[1:]:
    check_trail(Path(trail), own, seal)
findings = FOLDER / "data" / "findings.json"
if findings.is_file():
    for name, response in sorted(json.loads(findings.read_text("utf-8"))["responses"].items()):
        check_analysis(name, response)
sys.exit(1 if wrong else 0)
'''
