"""What is reported agrees with a second computation by other algorithms; where it does not, that is told."""

from dataclasses import replace

import pytest

from assayfolio.evaluation.apply import evaluate
from assayfolio.evaluation.reported import second_routes
from support.every_option import PLANS, findings_with_every, study_with_every
from support.studies import DEMO_STUDIES, demo_study

COMPARED = {
    "pooled": {"F", "tails of the overall tests", "adjusted tails: tukey", "adjusted tails: dunnett less"},
    "bonferroni over the responses": {"adjusted tails: dunnett", "t tails: slope"},
    "holm over the responses": {"t tails: pairs", "t tails: near"},
    "separate variances": {"adjusted tails: games-howell", "t tails: pairs holm", "t tails: units"},
    "random levels": {"means", "SS between", "SS within", "F"},
}


@pytest.mark.parametrize("option", PLANS)
def test_both_routes_agree_on_everything_that_is_reported(option):
    study, observations = study_with_every(option)
    for _, route in second_routes(evaluate(study, observations), observations):
        assert route.holds, route.failures
        found = {agreement.quantity: agreement for agreement in route.agreements}
        assert COMPARED[option] <= set(found)
        assert all(agreement.digits >= 10 for agreement in found.values())
        assert all(agreement.compared == agreement.of for agreement in found.values())


@pytest.mark.parametrize("name", DEMO_STUDIES)
def test_both_routes_agree_on_the_demonstration_studies(name):
    study, observations = demo_study(name)
    assert all(route.holds for _, route in second_routes(evaluate(study, observations), observations))


def altered(findings, change):
    first, *others = findings.responses
    return replace(findings, responses=(change(first), *others))


def with_family(response, name, **changes):
    families = tuple(
        replace(family, rows=(replace(family.rows[0], **changes), *family.rows[1:]))
        if family.name == name
        else family
        for family in response.comparisons
    )
    return replace(response, comparisons=families)


@pytest.mark.parametrize(
    ("change", "quantity"),
    [
        (
            lambda r: replace(r, anova=replace(r.anova, p=r.anova.p * (1 + 1e-9))),
            "tails of the overall tests",
        ),
        (lambda r: replace(r, anova=replace(r.anova, f=r.anova.f * (1 + 10**-9))), "F"),
        (lambda r: with_family(r, "pairs holm", p=0.123), "t tails: pairs holm"),
        (lambda r: with_family(r, "tukey", p_adjusted=0.123), "adjusted tails: tukey"),
        (lambda r: with_family(r, "dunnett greater", p_adjusted=0.123), "adjusted tails: dunnett greater"),
    ],
)
def test_a_wrong_number_is_found_and_named(change, quantity):
    _, observations = study_with_every("pooled")
    wrong = altered(findings_with_every("pooled"), change)
    (_, ash), (_, protein) = second_routes(wrong, observations)
    assert not ash.holds
    assert quantity in {failure.quantity for failure in ash.failures}
    assert protein.holds


def test_what_has_no_second_route_is_named_with_the_reason():
    study, observations = study_with_every("pooled")
    (_, route), _ = second_routes(evaluate(study, observations), observations)
    assert {item.quantity for item in route.not_compared} == {
        "adjusted tails: step-down",
        "t tails: percent",
        "t tails: not higher",
    }
    assert all(item.reason for item in route.not_compared)
