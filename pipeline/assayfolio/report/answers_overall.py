"""The answer to the overall question: whether the level means differ at all."""

from collections.abc import Mapping

from assayfolio.findings import DIFFERENCE_SHOWN, AnovaFindings, BrownForsytheMeansFindings, WelchFindings
from assayfolio.report.analysis import BROWN_FORSYTHE_MEANS, WELCH, overall_verdict, planned_test
from assayfolio.report.answers_shared import SAYS_NOTHING, card_head
from assayfolio.report.basis import Basis
from assayfolio.report.content import Card
from assayfolio.report.miniatures import Sketch, means_picture
from assayfolio.report.notation import degrees_of_freedom, equals, probability, statistic
from assayfolio.report.numbering import Part
from assayfolio.report.prose import Prose, prose
from assayfolio.report.wording import about_equivalence, capitalised, p_words

_SHOWN = "This says that some mean differs from another, not which, nor that it matters."
_NOT_SHOWN = "Not shown is not absent: means may differ by less than these data can show."
_RANDOM_SHOWN = "This says that levels add to the spread, not by how much; the precision says that."
_RANDOM_NOT_SHOWN = "Not shown is not absent: levels may add less than these data can show."


def overall_card(basis: Basis, accent: str, tables: Mapping[str, str]) -> Card:
    """The card of the overall question, with the level means as its picture."""
    place = basis.place(Part.ANOVA)
    lines: list[Prose] = []
    test = planned_test(basis)
    if test is not None:
        lines.append(_test_words(basis, test))
    lines.append(_range_of_means(basis))
    sketch = Sketch(accent, basis.file("answer-means.svg"), tables[basis.place(Part.DATA).anchor])
    return Card(
        family=card_head(basis, *_head(basis)),
        question=_question(basis),
        verdict=capitalised(overall_verdict(basis)),
        lines=tuple(lines),
        caution=prose(_caution(basis)),
        picture=means_picture(basis, sketch),
        section=place.number,
        anchor=place.anchor,
    )


def _head(basis: Basis) -> list[str]:
    omnibus = {"welch": WELCH, "brown-forsythe": BROWN_FORSYTHE_MEANS}.get(basis.response.omnibus)
    return ["analysis of variance", omnibus] if omnibus else ["analysis of variance"]


def _question(basis: Basis) -> Prose:
    if basis.is_random:
        return prose(
            "Do levels of {factor} add to the spread of {response}?",
            response=basis.response.response,
            factor=basis.factor,
        )
    return prose(
        "Does the mean {response} differ between the {count} levels of {factor}?",
        response=basis.response.response,
        count=str(len(basis.levels)),
        factor=basis.factor,
    )


def _caution(basis: Basis) -> str:
    test = planned_test(basis)
    if test is None:
        return f"The reason stands in section {basis.place(Part.NOT_REPORTED).number}. {SAYS_NOTHING}"
    shown = test.verdict == DIFFERENCE_SHOWN
    if basis.is_random:
        return _RANDOM_SHOWN if shown else _RANDOM_NOT_SHOWN
    return f"{_SHOWN if shown else _NOT_SHOWN} {about_equivalence(basis)}"


def _test_words(basis: Basis, test: AnovaFindings | WelchFindings | BrownForsytheMeansFindings) -> Prose:
    if isinstance(test, AnovaFindings):
        df = (str(test.between.df), str(test.within.df))
    else:
        df = (str(test.df1), degrees_of_freedom(test.df2))
    star = "{star}" if isinstance(test, BrownForsytheMeansFindings) else ""
    words = prose(
        "*F*" + star + " with {between} and {within} degrees of freedom {f}, {p}",
        star="*",
        between=df[0],
        within=df[1],
        f=equals(statistic(test.f or 0)),
        p=p_words(basis, test.p if test.p is not None else 1.0, test.log10_p),
    )
    if basis.several and basis.study.design.across_responses != "none" and test.p_adjusted is not None:
        adjusted = equals(probability(test.p_adjusted, basis.response.alpha))
        return (*words, *prose("; adjusted *p*\u202f{p}", p=adjusted))
    return words


def _range_of_means(basis: Basis) -> Prose:
    lowest = min(basis.levels, key=lambda level: level.mean)
    highest = max(basis.levels, key=lambda level: level.mean)
    scale = basis.scale
    if lowest.mean == highest.mean:
        return prose("all level means {mean}", mean=scale.with_unit(scale.mean(lowest.mean)))
    return prose(
        "level means from {low} ({lowest}) to {high} ({highest})",
        low=scale.mean(lowest.mean) if not scale.power else scale.with_unit(scale.mean(lowest.mean)),
        lowest=lowest.level,
        high=scale.with_unit(scale.mean(highest.mean)),
        highest=highest.level,
    )
