"""No worked example is left lying: each is named by a test file of its source."""

from pathlib import Path

import pytest

from support.reference import examples


@pytest.mark.requirement("TRACE-2")
def test_every_worked_example_is_named_by_a_test_of_its_source():
    tests = [path.read_text("utf-8") for path in Path(__file__).parent.glob("test_*.py")]
    assert [name for name in examples() if not any(f'"{name}"' in text for text in tests)] == []
