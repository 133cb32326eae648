"""What page 1 of a protocol says of each section: its title, and what is fixed there in a few words."""

from collections.abc import Callable
from dataclasses import dataclass

from assayfolio.report.content import Section
from assayfolio.report.methods import ADJUSTMENTS
from assayfolio.report.notation import percent
from assayfolio.report.outliers import TEST_NAMES
from assayfolio.report.prose import Prose, prose
from assayfolio.report.protocol_facts import ProtocolInput
from assayfolio.report.wording import counted, first_of

_MOST_NAMED = 4


@dataclass(frozen=True, slots=True)
class ContentsLine:
    """One section on page 1."""

    number: int
    anchor: str
    words: Prose


def contents_of(content: ProtocolInput, sections: tuple[Section, ...]) -> tuple[ContentsLine, ...]:
    """A line for each section."""
    return tuple(ContentsLine(one.number, one.anchor, _words(content, one)) for one in sections)


def _words(content: ProtocolInput, section: Section) -> Prose:
    said = _SAID.get(section.anchor)
    if said is None:
        return prose("{title}", title=section.title)
    return prose("{title}: {words}", title=section.title, words=said(content))


def _registration(content: ProtocolInput) -> str:
    facts = content.facts
    if facts.amends is None:
        return f"the first plan of this study, SHA-256 {facts.plan_sha256[:16]}"
    changed = counted(len(facts.differences), "field")
    return f"{changed} of {facts.amends} amended, plan now SHA-256 {facts.plan_sha256[:16]}"


def _plan(content: ProtocolInput) -> str:
    data = content.study.data
    levels = counted(len(data.levels), "level") if data.levels else "levels as the data have them"
    if data.replicates is None:
        return f"{levels} of {data.factor}, numbers of values not fixed"
    if isinstance(data.replicates, int):
        return f"{levels} of {data.factor}, {counted(data.replicates, 'value')} at each"
    counts = [count for _, count in data.replicates]
    return f"{levels} of {data.factor}, {min(counts)} to {max(counts)} values at each"


def _questions(content: ProtocolInput) -> str:
    study = content.study
    parts = []
    if study.comparisons:
        names = list(dict.fromkeys(ADJUSTMENTS[one.adjust].name for one in study.comparisons))
        families = counted(len(study.comparisons), "family", "families")
        parts.append(f"{families} of comparisons ({first_of(names, _MOST_NAMED, ', ')})")
    if study.equivalence:
        parts.append(counted(len(study.equivalence), "question of equivalence", "questions of equivalence"))
    if study.criteria:
        parts.append(counted(len(study.criteria), "acceptance criterion", "acceptance criteria"))
    return ", ".join(parts) or "the overall question alone"


def _data(content: ProtocolInput) -> str:
    data, outliers = content.study.data, content.study.outliers
    tests = "; ".join(TEST_NAMES[test] for test in outliers.tests) if outliers else "none"
    return f"missing values {_POLICIES[data.missing]}; outlier tests: {tests}"


_POLICIES = {"refuse": "refused", "omit": "left out"}


def _power(content: ProtocolInput) -> str:
    power = content.power
    if power is None:
        return "no power was computed"
    reached = sum(row.power >= power.target for row in power.rows)
    return f"{reached} of {len(power.rows)} chances reach the target of {percent(power.target)}"


def _worksheet(content: ProtocolInput) -> str:
    if content.study.worksheet is None:
        return "not fixed"
    return f"{counted(len(content.rows), 'measurement')} in a random order, drawn from the plan"


_SAID: dict[str, Callable[[ProtocolInput], str]] = {
    "registration": _registration,
    "plan": _plan,
    "questions": _questions,
    "data": _data,
    "power": _power,
    "worksheet": _worksheet,
}
