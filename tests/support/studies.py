"""Studies for tests: read from text as a run reads them, without a workspace around them."""

from collections.abc import Mapping, Sequence
from pathlib import Path

from assayfolio.evaluation import evaluate
from assayfolio.findings import Findings
from assayfolio.observations.reading import read_observations
from assayfolio.observations.values import Observations
from assayfolio.study.plan import StudyDefinition
from assayfolio.study.reading import read_study

CONFIGS = Path(__file__).resolve().parents[2] / "configs"
DEMO_STUDIES = ("brine-chloride", "whey-moisture")

HEAD = """\
study: TST-1
title: A test of the evaluation
data: {file: data/values.csv, response: content, factor: lot, unit: mg/kg}
alpha: 0.05
"""


def study_of(parts: str = "", head: str = HEAD) -> StudyDefinition:
    """A study definition: `head`, then `parts` in YAML."""
    return read_study((head + parts).encode(), "configs/study.yaml")


def observations_of(study: StudyDefinition, data: Mapping[str, Sequence[str]]) -> Observations:
    """The values of `data`, level by level, as a file of the study would give them."""
    rows = [f"{level},{text}\n" for level, texts in data.items() for text in texts]
    content = "".join([f"{study.data.factor},{study.data.response[0]}\n", *rows])
    return read_observations(content.encode(), study.data, study.data.file)


def findings_of(data: Mapping[str, Sequence[str]], parts: str = "") -> Findings:
    """The findings of a study with `parts` on `data`."""
    study = study_of(parts)
    return evaluate(study, observations_of(study, data))


def demo_study(name: str) -> tuple[StudyDefinition, Observations]:
    """A study of the demonstration laboratory, with its data."""
    study = read_study((CONFIGS / f"{name}.yaml").read_bytes(), f"configs/{name}.yaml")
    content = (CONFIGS / study.data.file).read_bytes()
    return study, read_observations(content, study.data, study.data.file)
