"""The power of a plan, for people and programs, and its figure. No data are read."""

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from pathlib import Path
from tempfile import NamedTemporaryFile
from textwrap import wrap

from assayfolio.canonical import Json
from assayfolio.errors import MachineError
from assayfolio.exact import to_double
from assayfolio.findings import NotReported, PowerFindings, PowerRow
from assayfolio.findings_parts import power_part
from assayfolio.planning.plan_power import plan_power, power_curves
from assayfolio.report.power_figure import PowerPanel, power_figure
from assayfolio.study.availability import check_plannable
from assayfolio.study.plan import Laboratory, StudyDefinition
from assayfolio.workflow.intake import SeenFiles, read_plan
from assayfolio.workflow.workspace import Workspace

_NARROWEST = 44


@dataclass(frozen=True, slots=True)
class StudyPower:
    """The power of a study's plan, and the figure that shows it."""

    study: StudyDefinition
    power: PowerFindings
    not_reported: tuple[NotReported, ...]
    figure: bytes

    def lines(self, width: int) -> list[str]:
        """The table for a terminal of `width` characters, with what it rests on."""
        return [*self._assumed(), "", *self._table(width), "", *self._remarks()]

    def _assumed(self) -> list[str]:
        power, unit = self.power, f" {self.power.unit}" if self.power.unit else ""
        sizes = ", ".join(f"{level} {n}" for level, n in zip(power.levels, power.replicates, strict=True))
        level = f"level alpha {_short(power.alpha)}"
        if power.alpha != self.study.alpha:
            level += f" ({_short(self.study.alpha)} over {len(self.study.data.response)} responses)"
        return [
            f"{self.study.study}  {self.study.title}",
            "  Power of the plan, from the plan alone; no data are looked at.",
            f"  response    {power.response}",
            f"  levels      {sizes}",
            f"  assumed     standard deviation within levels {_short(power.sigma)}{unit}",
            f"  to be seen  a difference of {_short(power.difference)}{unit}",
            f"  wanted      a power of {_short(power.target)} at {level}",
        ]

    def _table(self, width: int) -> list[str]:
        head = ("power", "n for target", "detectable", "half-width")
        cells = [_cells(row) for row in self.power.rows]
        widths = [max(len(head[at]), *(len(row[at]) for row in cells)) for at in range(len(head))]
        room = max(_NARROWEST, width - sum(widths) - 2 * len(widths) - 2)
        lines = [_laid("the chance of", head, room, widths)]
        question = ""
        for row, texts in zip(self.power.rows, cells, strict=True):
            if row.question != question:
                question = row.question
                lines.append(f"  {question} ({row.method})")
            first, *rest = _folded(row.meaning, room - 2)
            lines.append(_laid(f"  {first}", texts, room, widths))
            lines += [f"    {line}" for line in rest]
        return lines

    def _remarks(self) -> list[str]:
        true = f"{_short(self.power.true_difference)}{f' {self.power.unit}' if self.power.unit else ''}"
        remarks = [
            "  n for target: values at each level that reach the target; detectable: the smallest difference",
            "  with the target power at the planned numbers; half-width: of the interval where the standard",
            "  deviation found equals the one assumed. A hyphen: not defined, or beyond what was searched.",
        ]
        if self.study.equivalence:
            remarks.append(f"  Equivalence is computed at a true difference of {true}.")
        return remarks + [f"  Not given: {gap.what}: {gap.reason}." for gap in self.not_reported]

    def document(self, figure: str) -> Mapping[str, Json]:
        """The power for programs; `figure` is the name of the file that was written."""
        return {
            "study": self.study.study,
            "planned_power": power_part(self.power),
            "not_reported": [{"what": gap.what, "reason": gap.reason} for gap in self.not_reported],
            "figure": figure,
        }


def _short(value: Fraction) -> str:
    return f"{to_double(value):g}"


def _cells(row: PowerRow) -> tuple[str, str, str, str]:
    n = row.n_for_target
    sizes = "-" if n is None else "/".join(str(size) for size in (n if len(set(n)) > 1 else n[:1]))
    return (f"{row.power:.4f}", sizes, _figure_text(row.detectable_difference), _figure_text(row.half_width))


def _figure_text(value: float | None) -> str:
    return "-" if value is None else f"{value:.4g}"


def _laid(first: str, cells: tuple[str, ...], room: int, widths: list[int]) -> str:
    columns = "".join(f"  {cell:>{width}}" for cell, width in zip(cells, widths, strict=True))
    return f"  {first:<{room}}{columns}"


def _folded(text: str, width: int) -> list[str]:
    return wrap(text, width) or [""]


def study_power(workspace: Workspace, study_path: Path) -> StudyPower:
    """The power of the plan in `study_path`.

    Raises InputError with all faults of the plan, and where it lacks what power is computed from.
    """
    study, laboratory = read_plan(workspace, study_path, SeenFiles())
    check_plannable(study)
    power, gaps = plan_power(study)
    if power is None:  # check_plannable has made sure of what it takes
        raise AssertionError("a plan that can be planned with has a power")
    return StudyPower(study, power, gaps, _figure(study, power, laboratory))


def _figure(study: StudyDefinition, power: PowerFindings, laboratory: Laboratory) -> bytes:
    panels = [
        PowerPanel(curve.question, curve.meaning, curve.n, curve.power)
        for curve in power_curves(study, power)
    ]
    return power_figure(power, panels, "power.svg", laboratory.accent).svg


def write_figure(path: Path, figure: bytes) -> None:
    """Write the figure to `path`, whole or not at all.

    Raises MachineError where the file cannot be written.
    """
    try:
        with NamedTemporaryFile(dir=path.parent, prefix=f".{path.name}.", delete=False) as partial:
            partial.write(figure)
        Path(partial.name).chmod(0o644)
        Path(partial.name).replace(path)
    except OSError as error:
        raise MachineError(f"The figure cannot be written to {path}: {error.strerror}.") from None
