"""The examples of data and exclusions in the README are what the readers accept, and name every key."""

import re
from pathlib import Path

from assayfolio.study import vocabulary
from assayfolio.study.exclusions import read_exclusions
from assayfolio.study.reading import read_study

README = (Path(__file__).resolve().parents[2] / "README.md").read_text("utf-8")
SECTION = README.partition("## Study definition")[2].partition("\n## ")[0]


def example_behind(words: str) -> str:
    block = re.search(r"```yaml\n(.*?)```", SECTION.partition(words)[2], re.DOTALL)
    assert block is not None
    return block[1]


DATA = example_behind("Data as laboratories have them")


def test_data_as_laboratories_have_them_are_a_study_definition() -> None:
    study = read_study(f"study: A\ntitle: t\nalpha: 0.05\n{DATA}".encode(), "README.md")
    assert len(study.data.sources) == 3
    assert [fact.key for fact in study.measurement] == list(vocabulary.MEASUREMENT_KEYS)
    assert study.worksheet is not None


def test_every_key_of_data_facts_and_worksheet_is_in_one_of_the_examples() -> None:
    written = set(re.findall(r"^ +([a-z-]+):", SECTION, re.MULTILINE))
    wanted = {*vocabulary.DATA_KEYS, *vocabulary.MEASUREMENT_KEYS, *vocabulary.WORKSHEET_KEYS}
    assert wanted <= written


def test_the_exclusions_in_the_readme_are_read_and_have_every_key() -> None:
    text = example_behind("The file of exclusions")
    (one,) = read_exclusions(text.encode(), "README.md")
    assert one.row == 14
    assert set(re.findall(r"([a-z-]+):", text)) >= {*vocabulary.EXCLUSION_KEYS}
