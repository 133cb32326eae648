"""One study in seven forms of file through the command line: all folios hold the same findings bytes."""

from pathlib import Path

import pytest

from observations.test_forms_agree import FORMS, STUDY
from support.workspaces import Bench

SEVEN = (
    "comma",
    "semicolon with decimal comma",
    "tab",
    "gzip",
    "workbook",
    "wide",
    "two files",
)


def findings_of(form: str, root: Path) -> bytes:
    """The findings of the run of the study on its data in a form."""
    make, changes = FORMS[form]
    files = make()
    names = ", ".join(f"data/{name}" for name, _ in files)
    keys = "".join(f", {key.replace('_', '-')}: {value}" for key, value in changes.items())
    study = STUDY.replace("file: data/d.csv", f"file: [{names}]{keys}")
    signed = "sign-off:\n  - {role: author, meaning: I performed this analysis}\n"
    bench = Bench(root, study + signed, None)
    for name, content in files:
        bench.write(bench.data.with_name(name), content)
    folio = bench.run()
    assert {path.name for path in (folio / "data" / "inputs").iterdir()} == {name for name, _ in files}
    return (folio / "data" / "findings.json").read_bytes()


@pytest.fixture(scope="module")
def by_comma(tmp_path_factory: pytest.TempPathFactory) -> bytes:
    """The findings from text separated by commas."""
    return findings_of("comma", tmp_path_factory.mktemp("comma") / "w")


@pytest.mark.parametrize("form", SEVEN[1:])
def test_the_folios_of_all_forms_hold_the_same_findings(form: str, by_comma: bytes, tmp_path: Path) -> None:
    assert findings_of(form, tmp_path / "w") == by_comma
