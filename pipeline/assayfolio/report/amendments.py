"""The protocols of a study with their timing, what amendments changed, and the result under earlier plans."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from assayfolio.findings import (
    ComparisonFamily,
    ComparisonRow,
    EquivalenceFamily,
    EquivalenceRow,
    Findings,
    ResponseFindings,
)
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Heading, Paragraph, Section, TableBlock
from assayfolio.report.facts import EarlierResult, ProtocolVersion
from assayfolio.report.notation import MINUS, decimal, probability
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, Words, prose, verbatim
from assayfolio.report.registration import clock_words, minute
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.study.differences import shortened


def registration_section(bases: tuple[Basis, ...], numbering: Numbering) -> Section:
    """Every protocol with its timing; each amendment field by field; the result under earlier plans."""
    basis = bases[0]
    facts = basis.content.run.registration
    place = basis.place(Part.REGISTRATION)
    seen = prose(
        "The data of this run were first seen {seen}{of_study}. ",
        seen=minute(facts.data_first_seen),
        of_study=""
        if facts.study_data_first_seen == facts.data_first_seen
        else _other_data(facts.study_data_first_seen),
    )
    blocks: list[Block] = [
        Paragraph((*seen, *prose(clock_words()))),
        TableBlock(_protocols(facts.protocols, numbering)),
    ]
    for protocol in facts.protocols:
        if protocol.amends:
            blocks += _amendment(protocol, numbering)
    for earlier in facts.earlier:
        blocks += _earlier(basis, earlier, numbering)
    return Section(place.anchor, place.number, "Registration and amendments", tuple(blocks))


def _other_data(time: str | None) -> str:
    return f", other data of this study {minute(time)}"


def _protocols(protocols: tuple[ProtocolVersion, ...], numbering: Numbering) -> Table:
    columns = [
        Column("Protocol", kind="words"),
        Column("Registered", kind="words"),
        Column("By", kind="text"),
        Column("Timing", kind="text"),
        Column("Plan, SHA-256", kind="words"),
    ]
    rows: list[list[Words]] = [
        [
            one.name,
            minute(one.time),
            one.actor,
            "after the data were first seen" if one.after_data else "before the data were first seen",
            one.plan_sha256[:16],
        ]
        for one in protocols
    ]
    caption = prose("The protocols of this study; the last is the plan of this report.")
    return lay_out(numbering.table(), caption, columns, rows)


def _amendment(protocol: ProtocolVersion, numbering: Numbering) -> list[Block]:
    when = "after" if protocol.after_data else "before"
    words = "#Amended " + when + " the data were first seen#, {time}, by {actor}. #Reason:# {reason}"
    columns = [
        Column("Field", kind="text"),
        Column("Earlier plan", kind="text"),
        Column("Amended plan", kind="text"),
    ]
    rows: list[list[Words]] = [
        [verbatim(key), shortened(old), shortened(new)] for key, old, new in protocol.differences
    ]
    blocks: list[Block] = [
        Heading(prose("Amendment by {name}", name=protocol.name)),
        Paragraph(
            prose(
                words,
                time=minute(protocol.time),
                actor=protocol.actor,
                reason=protocol.reason or "none given",
            )
        ),
    ]
    if rows:
        caption = prose("What {name} changed, field by field.", name=protocol.name)
        blocks.append(TableBlock(lay_out(numbering.table(), caption, columns, rows)))
    return blocks


def _earlier(basis: Basis, earlier: EarlierResult, numbering: Numbering) -> list[Block]:
    heading = Heading(prose("The result under the plan of {name}", name=earlier.protocol))
    if earlier.findings is None:
        words = (
            "The plan of {name}, amended after the data were seen, gives no result on these data: {reason}"
        )
        return [heading, Paragraph(prose(words, name=earlier.protocol, reason=earlier.reason))]
    rows = list(_compared(earlier, basis.content.findings))
    words = (
        "{name} was amended after the data were seen; on the same data its plan and that of this report give "
        "these answers: #{count}#{numbers}. The whole result under the earlier plan is in the folio, {file}."
    )
    changed = sum(row.differs for row in rows)
    count = f"{changed} of {len(rows)} answers differ" if changed else "no answer differs"
    moved = sum(row.p_before != row.p_here for row in rows if not row.differs)
    numbers = f"; in {moved} more *p* is another one" if moved else ""
    file = f"data/context/protocols/{earlier.protocol}/findings.json"
    columns = [
        Column("Question", kind="text"),
        Column(f"Under {earlier.protocol}", kind="text"),
        Column("In this report", kind="text"),
    ]
    caption = prose(
        "Answers under the plan of {name} and under the plan of this report.", name=earlier.protocol
    )
    cells: list[list[Words]] = [
        [row.question, row.said(row.before, row.p_before), row.said(row.here, row.p_here)] for row in rows
    ]
    return [
        heading,
        Paragraph(
            prose(words, name=earlier.protocol, count=count, numbers=prose(numbers), file=verbatim(file))
        ),
        TableBlock(
            lay_out(
                numbering.table(),
                caption,
                columns,
                cells,
                [_LEVELS] if _levels_differ(earlier, basis) else [],
            )
        ),
    ]


_LEVELS = "The levels α of the two plans differ; each answer holds at the level of its own plan."


def _levels_differ(earlier: EarlierResult, basis: Basis) -> bool:
    return earlier.study.alpha != basis.study.alpha


_Answer = tuple[str, str]  # the verdict, and p as printed (empty where there is none)
_NOT_ASKED: _Answer = ("not asked", "")


@dataclass(frozen=True, slots=True)
class _Compared:
    """One question, and the verdicts and p under both plans."""

    question: Prose
    before: str
    p_before: str
    here: str
    p_here: str

    @property
    def differs(self) -> bool:
        """Whether the verdicts differ."""
        return self.before != self.here

    def said(self, verdict: str, p: str) -> Prose:
        """An answer for its cell, set strong where the verdicts differ."""
        words = prose("#{verdict}#" if self.differs else "{verdict}", verdict=verdict)
        return (*words, *prose(" ~*p* {p}~", p=p)) if p else words


def _compared(earlier: EarlierResult, now: Findings) -> Iterator[_Compared]:
    assert earlier.findings is not None, "asked for by its caller"
    before = {one.response: _answers(one) for one in earlier.findings.responses}
    after = {one.response: _answers(one) for one in now.responses}
    several = len({*before, *after}) > 1
    for response in dict.fromkeys((*after, *before)):
        old, new = before.get(response, {}), after.get(response, {})
        for question in dict.fromkeys((*new, *old)):
            of = f"{response}: " if several else ""
            words = prose("{of}{question}", of=of, question=question)
            yield _Compared(words, *old.get(question, _NOT_ASKED), *new.get(question, _NOT_ASKED))


def _answers(found: ResponseFindings) -> dict[str, _Answer]:
    """The answer to each question of a response."""
    overall = found.overall_test
    answers = {"overall": (found.overall_verdict, _p(overall.p if overall else None, found))}
    families: list[ComparisonFamily | EquivalenceFamily] = [*found.comparisons, *found.equivalence]
    for family in families:
        rows: Sequence[ComparisonRow | EquivalenceRow] = family.rows
        for row in rows:
            label = row.label.replace(" - ", f" {MINUS} ")
            name = family.name if row.label == family.name else f"{family.name}: {label}"
            answers[name] = (row.verdict, _p(row.p_adjusted, found))
    for criterion in found.criteria:
        of = f" of {criterion.level}" if criterion.level else ""
        limit = f"{criterion.relation} {decimal(criterion.limit)}"
        answers[f"{criterion.quantity}{of}, {limit}"] = (criterion.verdict, "")
    return answers


def _p(p: float | None, found: ResponseFindings) -> str:
    return "" if p is None else probability(p, found.alpha)
