"""Labels are names and nothing else: shown as they stand in report, findings and terminal, never obeyed."""

import csv
import io
import json
import socket
import subprocess
from pathlib import Path

import pytest

from support.workspaces import Answer, Bench

LABELS = (
    "<script>alert(1)</script>",
    "<img src=http://127.0.0.1:9/x.png>",
    "<link rel=stylesheet href=file:///etc/passwd>",
    "</td></table><h1>loud",
    "{{ 7*7 }}",
    "{% include '/etc/passwd' %}",
    "{# nothing #}",
    "&lt;b&gt; &amp; &#65;",
    "url(http://127.0.0.1:9/y)",
    "${HOME} $(id) `id`",
    "%s %n %(x)s {0} {x.__class__}",
    "../../etc/passwd",
    '=HYPERLINK("http://127.0.0.1:9")',
    "@import 'http://127.0.0.1:9'",
    "'; DROP TABLE runs; --",
    "\\\\server\\share",
    "#bold# *italic* ~small~ {response}",
)
HEAD = ("label", "content")


def study() -> str:
    """A study whose title, purpose and family are labels too, and that declares every level."""
    return "\n".join(
        [
            "study: HRM-1",
            f"title: {json.dumps(LABELS[0] + ' ' + LABELS[4])}",
            f"purpose: {json.dumps(LABELS[2] + ' ' + LABELS[16])}",
            "data:",
            "  file: data/values.csv",
            "  response: content",
            "  factor: label",
            f"  unit: {json.dumps('<i>mg</i>')}",
            f"  levels: {json.dumps(LABELS)}",
            "alpha: 0.05",
            "comparisons:",
            f"  - {{name: {json.dumps(LABELS[1])}, pairs: all, adjust: tukey-kramer}}",
            "checks: {equal-variances: brown-forsythe, normality: shapiro-wilk}",
            "sign-off:",
            f"  - {{role: author, meaning: {json.dumps('<u>checked</u> ' + LABELS[5])}}}",
            "",
        ]
    )


def data() -> str:
    """Three values at every level."""
    sink = io.StringIO(newline="")
    writer = csv.writer(sink, lineterminator="\n")
    writer.writerow(HEAD)
    writer.writerows(
        (label, f"{at % 5 + replicate / 10:.1f}") for at, label in enumerate(LABELS) for replicate in range(3)
    )
    return sink.getvalue()


@pytest.fixture(scope="module")
def ran(tmp_path_factory: pytest.TempPathFactory) -> tuple[Bench, Answer, Path]:
    """A run with all of the labels, in which no socket can be opened."""
    bench = Bench(tmp_path_factory.mktemp("labels") / "w", study(), data())

    def refused(*_: object, **__: object) -> None:
        raise AssertionError("a connection was tried")

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(socket.socket, "connect", refused)
        patch.setattr(socket, "getaddrinfo", refused)
        answer = bench("run", bench.study, "--json")
    assert answer.code == 0, answer.err
    return bench, answer, bench.root / answer.document["folio"]


def closed(text: str) -> str:
    """`text` without blanks: the pages may break it anywhere."""
    return "".join(text.split())


@pytest.mark.needs("pdftotext")
def test_every_label_stands_in_the_report_as_it_was_written(ran: tuple[Bench, Answer, Path]) -> None:
    report = ran[2] / "data" / "report.pdf"
    done = subprocess.run(["pdftotext", "-enc", "UTF-8", report, "-"], capture_output=True, check=True)
    text = closed(done.stdout.decode())
    assert [label for label in LABELS if closed(label) not in text] == []
    assert "<i>mg</i>" in text
    assert "<u>checked</u>" in text
    assert "root:x:" not in text
    assert "loud" in text


def test_every_label_stands_in_the_findings_as_it_was_written(ran: tuple[Bench, Answer, Path]) -> None:
    found = json.loads((ran[2] / "data" / "findings.json").read_text("utf-8"))
    levels = found["responses"]["content"]["levels"]
    assert [level["level"] for level in levels] == list(LABELS)


def test_the_report_links_to_no_address_and_holds_nothing_that_runs(ran: tuple[Bench, Answer, Path]) -> None:
    import pikepdf

    with pikepdf.open(ran[2] / "data" / "report.pdf") as pdf:
        for item in pdf.objects:
            if isinstance(item, pikepdf.Dictionary):
                assert item.get("/S") not in ("/URI", "/JavaScript", "/Launch", "/GoToR", "/SubmitForm")
                assert "/JS" not in item
                assert "/OpenAction" not in item


def test_every_picture_is_a_picture_and_refers_to_nothing(ran: tuple[Bench, Answer, Path]) -> None:
    import xml.etree.ElementTree as ET

    pictures = sorted((ran[2] / "data" / "figures").glob("*.svg"))
    assert pictures
    for picture in pictures:
        for element in ET.parse(picture).iter():
            name = element.tag.rpartition("}")[2]
            assert name not in ("script", "image", "use", "a", "foreignObject", "style", "h1"), picture.name
            assert not any(key.endswith("href") or key.startswith("on") for key in element.attrib)


def test_folder_and_file_names_come_of_the_study_alone(ran: tuple[Bench, Answer, Path]) -> None:
    bench = ran[0]
    assert not (bench.root.parent / "etc").exists()
    assert all("passwd" not in name and "script" not in name for name in bench.files_in_runs())


def test_the_terminal_shows_labels_as_they_stand(ran: tuple[Bench, Answer, Path]) -> None:
    bench = ran[0]
    answer = bench("check", bench.study)
    assert answer.code == 0
    assert [label for label in LABELS if label not in answer.out] == []


@pytest.mark.parametrize(
    ("hidden", "shown"),
    [
        ("\x1b[2J", "U+001B"),
        ("\u202e", "U+202E"),
        ("\x07", "U+0007"),
        ("\x9b31m", "U+009B"),
        ("\u200b", "U+200B"),
    ],
    ids=["escape", "override", "bell", "control sequence", "zero width"],
)
def test_what_could_command_a_terminal_is_refused_and_told_by_its_number(
    tmp_path: Path, hidden: str, shown: str
) -> None:
    bench = Bench(tmp_path / "w", study().replace(f"  levels: {json.dumps(LABELS)}\n", ""), data())
    bench.write(bench.data, f"label,content\na{hidden}b,1\na{hidden}b,2\nc,1\n")
    answer = bench("run", bench.study)
    assert answer.code == 2
    assert shown in answer.err
    assert hidden not in answer.err + answer.out
    assert all(line.isprintable() for line in answer.err.splitlines())
