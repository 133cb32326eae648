"""Checking a study before it is run: the plan, and whether the data fit it. Nothing is written."""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from assayfolio.canonical import Json
from assayfolio.observations.values import Observations
from assayfolio.study.plan import StudyDefinition
from assayfolio.study.suggestions import nearest
from assayfolio.workflow.flow_words import files_words, flow_words
from assayfolio.workflow.intake import SeenFiles, data_file_exists, read_intake, read_plan
from assayfolio.workflow.plan_words import plan_words
from assayfolio.workflow.workspace import Workspace


@dataclass(frozen=True, slots=True)
class CheckedStudy:
    """A study that can be run; `observations` is None while its data file does not exist.

    Otherwise it holds the observations of each response, all of them in the same rows.
    """

    study: StudyDefinition
    observations: tuple[Observations, ...] | None
    files_there: tuple[str, ...] = ()

    def lines(self) -> list[str]:
        """What was found, for people."""
        study, data = self.study, self.study.data
        lines = [
            f"{study.study}  {study.title}",
            f"  plan   valid: {', '.join(data.response)} by {data.factor}, alpha {float(study.alpha):g}",
            *(f"  plan   {words}" for words in plan_words(study)),
        ]
        if self.observations is None:
            return [
                *lines,
                f"  data   {data.file} does not exist yet; the plan itself is in order",
                *self._hint(),
            ]
        observed, counts = self.observations[0], self.counts()
        raw = observed.files[0]
        columns = f"sheet {raw.sheet}" if raw.separator is None else f"separator {raw.separator}"
        layout = f"{columns}, decimal {data.decimal_mark}"
        each = f" of each of {len(self.observations)} responses" if len(self.observations) > 1 else ""
        listed = ", ".join(f"{level} {n}" for level, n in counts.items())
        return [
            *lines,
            f"  data   {files_words(observed)}: {flow_words(observed)}{each}, {layout}",
            f"  data   fits the plan: {listed}",
        ]

    def _hint(self) -> list[str]:
        near = nearest(Path(self.study.data.file).name, self.files_there)
        return [] if near is None else [f"  data   there is a file {near} in that folder; is it the one?"]

    def document(self) -> Mapping[str, Json]:
        """What was found, for programs."""
        counts = self.counts() if self.observations is not None else None
        return {
            "study": self.study.study,
            "plan": "valid",
            "data": "absent" if counts is None else "fits the plan",
            "data_flow": None if self.observations is None else flow_words(self.observations[0]),
            "values_per_level": counts,
        }

    def counts(self) -> dict[str, int]:
        """The number of values of each level, in the order of the levels."""
        if self.observations is None:
            return {}
        observed = self.observations[0]
        return {counts.level: counts.analysed for counts in observed.flow}


def check_study(workspace: Workspace, study_path: Path) -> CheckedStudy:
    """Read and validate the plan, and its data where the file exists.

    Raises InputError with all faults of the first file that has any.
    """
    study, _ = read_plan(workspace, study_path, SeenFiles())
    if not data_file_exists(workspace, study_path, study):
        folder = (study_path.resolve().parent / study.data.file).parent
        there = tuple(sorted(path.name for path in folder.iterdir())) if folder.is_dir() else ()
        return CheckedStudy(study, None, there)
    return CheckedStudy(study, read_intake(workspace, study_path, SeenFiles()).observations)
