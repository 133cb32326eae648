"""Studies for tests: read from text as a run reads them, without a workspace around them."""

from collections.abc import Mapping, Sequence
from pathlib import Path

from assayfolio.evaluation.apply import evaluate
from assayfolio.findings import Findings
from assayfolio.observations.reading import read_all_observations
from assayfolio.observations.values import Observations
from assayfolio.study.exclusions import read_exclusions
from assayfolio.study.plan import StudyDefinition
from assayfolio.study.reading import read_study

CONFIGS = Path(__file__).resolve().parents[2] / "configs"
DEMO_STUDIES = (
    "beet-syrup",
    "brine-chloride",
    "cider-vinegar",
    "oat-drying",
    "rye-flour",
    "well-nitrite",
    "whey-moisture",
)

HEAD = """\
study: TST-1
title: A test of the evaluation
data: {file: data/values.csv, response: content, factor: lot, unit: mg/kg}
alpha: 0.05
"""


def study_of(parts: str = "", head: str = HEAD) -> StudyDefinition:
    """A study definition: `head`, then `parts` in YAML."""
    return read_study((head + parts).encode(), "configs/study.yaml")


def observations_of(
    study: StudyDefinition, data: Mapping[str, Sequence[str]], order: Sequence[int] = ()
) -> tuple[Observations, ...]:
    """The values of `data`, level by level, as a file of the study with one response would give them.

    `order` is the measuring order of these rows, for a study that names a column with it.
    """
    return observations_of_each(study, {study.data.response[0]: data}, order)


def observations_of_each(
    study: StudyDefinition, data: Mapping[str, Mapping[str, Sequence[str]]], order: Sequence[int] = ()
) -> tuple[Observations, ...]:
    """The values of several responses, each level by level, as one file of the study would give them."""
    levels = [level for level, texts in data[study.data.response[0]].items() for _ in texts]
    columns = {study.data.factor: levels}
    for response, by_level in data.items():
        columns[response] = [text for texts in by_level.values() for text in texts]
    if study.data.order is not None:
        columns[study.data.order] = [str(position) for position in order]
    rows = [columns, *zip(*columns.values(), strict=True)]
    content = "".join(",".join(row) + "\n" for row in rows)
    return read_all_observations([(study.data.file, content.encode())], study.data, study.measurement)


def findings_of(data: Mapping[str, Sequence[str]], parts: str = "", head: str = HEAD) -> Findings:
    """The findings of a study with `parts` on `data`."""
    study = study_of(parts, head)
    return evaluate(study, observations_of(study, data))


def findings_of_each(data: Mapping[str, Mapping[str, Sequence[str]]], parts: str = "") -> Findings:
    """The findings of a study of several responses with `parts` on `data`."""
    head = HEAD.replace("content", f"[{', '.join(data)}]")
    study = study_of(parts, head)
    return evaluate(study, observations_of_each(study, data))


def demo_study(name: str) -> tuple[StudyDefinition, tuple[Observations, ...]]:
    """A study of the demonstration laboratory, with its data."""
    study = read_study((CONFIGS / f"{name}.yaml").read_bytes(), f"configs/{name}.yaml")
    content = (CONFIGS / study.data.file).read_bytes()
    left_out = study.data.exclusions
    exclusions = () if left_out is None else read_exclusions((CONFIGS / left_out).read_bytes(), left_out)
    files = [(study.data.file, content)]
    return study, read_all_observations(files, study.data, study.measurement, exclusions)
