"""No byte of the evidence is without meaning: whichever is changed, in whichever way, verification fails."""

import re

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from assayfolio.errors import ExitCode
from assayfolio.evidence.verification import verify_workspace
from evidence.laboratory import Laboratory


@pytest.fixture(scope="module")
def runs(tmp_path_factory):
    laboratory = Laboratory(tmp_path_factory.mktemp("single") / "runs")
    laboratory.found()
    laboratory.run()
    return laboratory.runs


@pytest.mark.requirement("RECORD-1")
@settings(max_examples=250)
@given(data=st.data())
def test_any_other_byte_anywhere_is_found_and_its_file_named(runs, data):
    files = [path for path in sorted(runs.rglob("*")) if path.is_file() and not path.name.startswith(".")]
    path = data.draw(st.sampled_from(files), label="file")
    content = path.read_bytes()
    place = data.draw(st.integers(0, len(content) - 1), label="place")
    flip = data.draw(st.integers(1, 255), label="flip")
    path.chmod(0o644)
    try:
        path.write_bytes(content[:place] + bytes([content[place] ^ flip]) + content[place + 1 :])
        verification = verify_workspace(runs, None)
    finally:
        path.write_bytes(content)
    assert verification.exit_code == ExitCode.FINDING
    named = re.sub(r"^IRON-7/run-0001/", "", path.relative_to(runs).as_posix())
    assert any(named in note for each in verification.with_outcome("failed") for note in each.notes)
