"""Whether two analyses of the same plan come to the same verdicts, and where not."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from assayfolio.findings import NOT_ASSESSABLE, ResponseFindings
from assayfolio.findings_intake import PolicyFindings
from assayfolio.report.basis import Basis
from assayfolio.report.criteria import limit_words, quantity_name
from assayfolio.report.prose import Prose, joined, prose
from assayfolio.report.wording import counted, listed

OVERALL = "overall test"
_MOST_NAMED = 12
_KINDS = {
    "comparison": "comparison",
    "equivalence": "test of equivalence",
    "spread": "comparison of variances",
    "criterion": "criterion",
}
_PLURALS = {
    "comparison": "comparisons",
    "equivalence": "tests of equivalence",
    "spread": "comparisons of variances",
    "criterion": "criteria",
}


@dataclass(frozen=True, slots=True)
class Question:
    """One planned question: its kind, the family it belongs to (empty: none), what it is about."""

    kind: str
    family: str
    about: str


Verdicts = dict[Question, str]


def verdicts_of(basis: Basis, found: ResponseFindings) -> Verdicts:
    """The verdict on every planned question of a response, under one analysis."""
    verdicts = {Question(OVERALL, "", OVERALL): found.overall_verdict}
    for family in found.comparisons:
        for row in family.rows:
            verdicts[Question("comparison", family.name, basis.label(row))] = row.verdict
    for claim in found.equivalence:
        for tested in claim.rows:
            about = f"{claim.claim} of {basis.label(tested)}"
            verdicts[Question("equivalence", claim.name, about)] = tested.verdict
    for ratio in found.spread.rows if found.spread is not None else ():
        verdicts[Question("spread", "", f"variances {ratio.label}")] = ratio.verdict
    for one in found.criteria:
        about = f"{quantity_name(basis, one.quantity, one.level)} ({limit_words(one)})"
        verdicts[Question("criterion", "", about)] = one.verdict
    return verdicts


def policy_verdicts(basis: Basis, found: PolicyFindings) -> Verdicts:
    """The verdict on every planned question, under one policy."""
    verdicts = {Question(OVERALL, "", OVERALL): found.verdict}
    for family in found.comparisons:
        for row in family.rows:
            verdicts[Question("comparison", family.name, basis.label(row))] = row.verdict
    claims = {claim.name: claim.claim for claim in basis.response.equivalence}
    for family in found.equivalence:
        for row in family.rows:
            about = f"{claims.get(family.name, 'equivalence')} of {basis.label(row)}"
            verdicts[Question("equivalence", family.name, about)] = row.verdict
    for row in found.spread.rows if found.spread is not None else ():
        verdicts[Question("spread", "", f"variances {row.label}")] = row.verdict
    for one, verdict in zip(basis.response.criteria, found.criteria, strict=True):
        about = f"{quantity_name(basis, one.quantity, one.level)} ({limit_words(one)})"
        verdicts[Question("criterion", "", about)] = verdict
    return verdicts


def differing(verdicts: Sequence[Verdicts]) -> list[Question]:
    """The questions that do not have the same verdict under all analyses; one not answered has none."""
    questions = dict.fromkeys(question for one in verdicts for question in one)
    return [
        question for question in questions if len({one.get(question, NOT_ASSESSABLE) for one in verdicts}) > 1
    ]


def agreed_words(verdicts: Sequence[Verdicts]) -> str:
    """Which verdicts agree: "the verdict of the overall test and those of all 6 comparisons"."""
    questions = dict.fromkeys(question for one in verdicts for question in one)
    counts = {kind: sum(question.kind == kind for question in questions) for kind in _KINDS}
    parts = ["the verdict of the overall test"]
    for kind, count in counts.items():
        if count == 1:
            parts.append(f"that of the one {_KINDS[kind]}")
        elif count:
            how_many = "both" if count == 2 else f"all {count}"
            parts.append(f"those of {how_many} {_PLURALS[kind]}")
    return listed(parts)


def _named(question: Question, families: int) -> Prose:
    if question.family and families > 1:
        return prose("{about} (“{family}”)", about=question.about, family=question.family)
    return prose("{about}", about=question.about)


def _names(questions: Sequence[Question], most: int) -> list[Prose]:
    """The first of the questions by name; with several families each says which it belongs to."""
    families = len({question.family for question in questions} - {""})
    return [_named(question, families) for question in questions[:most]]


def agreement_words(verdicts: Mapping[str, Verdicts], agree: str, differ: str) -> Prose:
    """One sentence: `agree` where all verdicts agree; else `differ`, and each question with its verdicts.

    `verdicts` are those of each analysis by its name.
    """
    questions = differing(list(verdicts.values()))
    if not questions:
        return prose(f"{agree}: {{agreed}}.", agreed=agreed_words(list(verdicts.values())))
    told = [
        prose(
            "{name} ({each})",
            name=name,
            each="; ".join(f"{side}: {own.get(question, NOT_ASSESSABLE)}" for side, own in verdicts.items()),
        )
        for name, question in zip(_names(questions, _MOST_NAMED), questions, strict=False)
    ]
    rest = len(questions) - len(told)
    return prose(
        f"#{differ} on {{count}}#: {{told}}{{more}}.",
        count=counted(len(questions), "question"),
        told=joined(told, ", "),
        more=f" and {rest} more" if rest else "",
    )


def short_agreement(verdicts: Sequence[Verdicts], most: int) -> Prose:
    """The same in a few words, for the first page."""
    questions = differing(verdicts)
    if not questions:
        questions = list(dict.fromkeys(question for one in verdicts for question in one))
        verb = "agrees" if len(questions) == 1 else "agree"
        return prose(f"{{agreed}} {verb}", agreed=agreed_words(verdicts))
    rest = len(questions) - most
    return prose(
        "#verdicts differ on# {named}{more}",
        named=joined(_names(questions, most), ", "),
        more=f" and {rest} more" if rest > 0 else "",
    )
