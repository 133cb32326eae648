"""Studies for tests of what a received value becomes: data as lines of a file, exclusions as entries."""

from collections.abc import Mapping, Sequence

from assayfolio.observations.reading import read_all_observations
from assayfolio.observations.values import Observations
from assayfolio.study.exclusions import Exclusion, read_exclusions
from assayfolio.study.plan import StudyDefinition
from assayfolio.study.reading import read_study

HEAD = """\
study: TST-2
title: A test of the intake
alpha: 0.05
data: {{file: values.csv, response: content, factor: lot{more}}}
"""
WHO = "decided-by: A. Analyst, decided-at: 2031-03-04"
REASON = "cell leaked during filling - see logbook 12"


def study_with(more: str = "", parts: str = "") -> StudyDefinition:
    """A study whose `data` has the further keys in `more`, such as `missing: omit`; then `parts`."""
    head = HEAD.format(more=f", {more}" if more else "")
    return read_study((head + parts).encode(), "configs/study.yaml")


def excluded(*rows: tuple[int, str] | tuple[int, str, str]) -> tuple[Exclusion, ...]:
    """An exclusion for each (line, text) or (line, text, file)."""
    entries = [
        f"  - {{row: {row[0]}, value: '{row[1]}', {f'file: {row[2]}, ' if len(row) > 2 else ''}"
        f"reason: {REASON}, {WHO}}}\n"
        for row in rows
    ]
    text = "exclusions:\n" + "".join(entries) if entries else "exclusions: []\n"
    return read_exclusions(text.encode(), "left-out.yaml")


def read_each(
    study: StudyDefinition, files: Mapping[str, Sequence[str]], exclusions: Sequence[Exclusion] = ()
) -> tuple[Observations, ...]:
    """The observations of `files`: for each name its lines."""
    contents = [(name, ("\n".join(lines) + "\n").encode()) for name, lines in files.items()]
    return read_all_observations(contents, study.data, study.measurement, exclusions)


def read(
    study: StudyDefinition, lines: Sequence[str], exclusions: Sequence[Exclusion] = ()
) -> tuple[Observations, ...]:
    """The observations of one file of these lines."""
    return read_each(study, {"values.csv": lines}, exclusions)


def read_one(
    more: str, lines: Sequence[str], exclusions: Sequence[Exclusion] = (), parts: str = ""
) -> Observations:
    """The observations of the one response of a study with the further keys `more`."""
    (only,) = read(study_with(more, parts), lines, exclusions)
    return only


def long_lines(data: dict[str, Sequence[str]]) -> list[str]:
    """The lines of a file in the long layout with these values, level by level."""
    return ["lot,content", *(f"{level},{text}" for level, texts in data.items() for text in texts)]
