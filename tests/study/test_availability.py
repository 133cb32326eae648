"""A right plan that asks for more than this version computes, or that lacks what the laboratory wants."""

import pytest

from assayfolio.errors import NotAvailableError, StudyError
from assayfolio.study.availability import check_available, check_required
from assayfolio.study.plan import Laboratory
from assayfolio.study.vocabulary import ADJUSTMENTS, REQUIREMENTS
from study.examples import FULL, LEVELS, SMALLEST, edited, study_of


def unavailable(text: str) -> list[str]:
    try:
        check_available(study_of(text))
    except NotAvailableError as error:
        return [str(fault).removeprefix("plan.yaml:") for fault in error.faults]
    return []


def planned(section: str) -> str:
    return edited(SMALLEST, "alpha", f"{LEVELS}alpha") + section


NOT_YET = "not computed by this version"
REFUSED = {
    "more than one response": (
        edited(SMALLEST, "response: mass", "response: [mass, density]"),
        f"5:3: more than one response in a study: {NOT_YET} - write one study for each response",
    ),
    "missing values passed over": (
        edited(SMALLEST, "alpha", "  missing: omit\nalpha"),
        (
            f"7:3: an analysis that passes over missing values (`missing: omit`): {NOT_YET} - "
            "use `missing: refuse` and a data file without gaps"
        ),
    ),
    "values below a limit": (
        edited(SMALLEST, "alpha", "  below-limit: half-limit\nalpha"),
        (
            f"7:3: an analysis of values below a limit (`below-limit` other than `refuse`): {NOT_YET} - "
            "use `below-limit: refuse`"
        ),
    ),
    "random levels": (
        planned("design: {effects: random}\n"),
        (
            f"9:10: an analysis of randomly chosen levels (`effects: random`): {NOT_YET} - "
            "use `effects: fixed` if the levels themselves are of interest"
        ),
    ),
    "separate variances": (
        planned("design: {variances: separate}\n"),
        (
            f"9:10: an analysis with a variance for each level (`variances: separate`): {NOT_YET} - "
            "use `variances: pooled` if one variance for all levels can be defended"
        ),
    ),
    "equivalence": (
        planned("equivalence: [{name: x, pairs: all, margin: 1}]\n"),
        f"9:1: equivalence tests: {NOT_YET} - leave `equivalence` out",
    ),
    "outliers": (
        planned("outliers: {test: cochran}\n"),
        f"9:1: outlier tests: {NOT_YET} - leave `outliers` out",
    ),
    "another check of variances": (
        planned("checks: {equal-variances: bartlett}\n"),
        (
            f"9:10: a check of equal variances other than brown-forsythe: {NOT_YET} - "
            "use `equal-variances: brown-forsythe`"
        ),
    ),
    "another check of normality": (
        planned("checks: {normality: anderson-darling}\n"),
        f"9:10: a check of normality other than shapiro-wilk: {NOT_YET} - use `normality: shapiro-wilk`",
    ),
    "precision": (
        planned("precision: {estimate: true}\n"),
        f"9:1: estimates of precision: {NOT_YET} - leave `precision` out, or write `estimate: false`",
    ),
    "power": (
        planned("power: {difference: 1, sigma: 1, target: 0.8}\n"),
        f"9:1: power: {NOT_YET} - leave `power` out",
    ),
    "criteria": (
        planned("criteria: [{quantity: repeatability-rsd, at-most: 2}]\n"),
        f"9:1: acceptance criteria: {NOT_YET} - leave `criteria` out",
    ),
    "Dunnett": (
        planned("comparisons: [{name: x, against: north, adjust: dunnett}]\n"),
        (
            f"9:15: `adjust: dunnett` for comparisons against a reference (comparison `x`): {NOT_YET} - "
            "available here: none, bonferroni, sidak, holm"
        ),
    ),
    "Hochberg": (
        planned("comparisons: [{name: x, pairs: all, adjust: hochberg}]\n"),
        (
            f"9:15: `adjust: hochberg` for all pairs (comparison `x`): {NOT_YET} - "
            "available here: none, bonferroni, sidak, holm, tukey-kramer"
        ),
    ),
    "Scheffe": (
        planned("comparisons: [{name: x, weights: {north: 1, south: -1}, adjust: scheffe}]\n"),
        f"9:15: `adjust: scheffe` for a contrast (comparison `x`): {NOT_YET} - available here: none",
    ),
}


@pytest.mark.parametrize(("text", "fault"), REFUSED.values(), ids=REFUSED.keys())
def test_a_part_that_is_not_computed_yet_is_refused_with_its_place(text: str, fault: str) -> None:
    assert unavailable(text) == [fault]


def test_all_that_is_not_computed_shows_in_one_pass_and_in_the_order_of_the_file() -> None:
    places = [fault.partition(": ")[0] for fault in unavailable(FULL)]
    assert places == ["23:5", "32:1", "36:1", "38:1", "39:1", "40:1"]


def test_the_headline_says_that_nothing_was_analysed() -> None:
    with pytest.raises(NotAvailableError, match=r"does not compute 6 parts of it yet; nothing was analysed"):
        check_available(study_of(FULL))


@pytest.mark.parametrize(
    "section",
    [
        "",
        "checks: {equal-variances: brown-forsythe, normality: shapiro-wilk}\n",
        "design: {effects: fixed, variances: pooled}\n",
        "precision: {estimate: false}\n",
        "sign-off: [{role: author, meaning: I did it}]\n",
        "comparisons: [{name: x, weights: {north: 1, south: -1}, alternative: less}]\n",
    ],
)
def test_what_is_computed_is_let_through(section: str) -> None:
    check_available(study_of(planned(section)))


FAMILIES = {
    "pairs: all": ("none", "bonferroni", "sidak", "holm", "tukey-kramer"),
    "against: north": ("none", "bonferroni", "sidak", "holm"),
}


@pytest.mark.parametrize("family", FAMILIES)
def test_exactly_these_adjustments_are_computed(family: str) -> None:
    computed = []
    for adjust in ADJUSTMENTS:
        text = planned(f"comparisons: [{{name: x, {family}, adjust: {adjust}}}]\n")
        try:
            check_available(study_of(text))
        except (NotAvailableError, StudyError):
            continue
        computed.append(adjust)
    assert tuple(computed) == FAMILIES[family]


def required(text: str, *require: str) -> list[str]:
    try:
        check_required(study_of(text), Laboratory("Invented Waters", require=require))
    except StudyError as error:
        return [str(fault).removeprefix("plan.yaml:") for fault in error.faults]
    return []


WANTED = "which Invented Waters requires of every study"


def test_the_smallest_study_lacks_all_that_a_laboratory_can_require() -> None:
    assert required(SMALLEST, *REQUIREMENTS) == [
        f"1:1: `purpose` is missing, {WANTED} - add `purpose: ...`",
        f"1:1: `comparisons` is missing, {WANTED} - add `comparisons: ...`",
        f"1:1: `checks` is missing, {WANTED} - add `checks: ...`",
        f"1:1: `sign-off` is missing, {WANTED} - add `sign-off: ...`",
        f"3:1: `data.unit` is missing, {WANTED} - add `unit: ...`",
        f"3:1: `data.levels` is missing, {WANTED} - add `levels: ...`",
        f"3:1: `data.replicates` is missing, {WANTED} - add `replicates: ...`",
    ]


@pytest.mark.parametrize("requirement", REQUIREMENTS)
def test_each_requirement_is_met_by_the_full_study_and_not_by_the_smallest(requirement: str) -> None:
    assert required(FULL, requirement) == []
    assert len(required(SMALLEST, requirement)) == 1


def test_empty_checks_do_not_meet_a_requirement_of_checks() -> None:
    assert required(SMALLEST + "checks: {}\n", "checks") == [
        f"8:1: `checks` is missing, {WANTED} - add `checks: ...`"
    ]


def test_what_is_not_required_may_be_left_out() -> None:
    assert required(SMALLEST) == []
