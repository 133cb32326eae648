"""Reading the short sections: design, checks, outliers, precision, power and sign-off."""

from fractions import Fraction

from assayfolio.study.adjustments import method
from assayfolio.study.fields import (
    Fields,
    Reader,
    UnreadableError,
    Value,
    choice,
    line_of_text,
    one_or_more,
    truth,
)
from assayfolio.study.names import Surroundings, response_in
from assayfolio.study.numbers import any_number, high_probability, positive
from assayfolio.study.plan import (
    AcrossResponses,
    ChecksPlan,
    DesignPlan,
    Omnibus,
    OutlierPlan,
    PowerPlan,
    PrecisionConditions,
    PrecisionPlan,
    SignOff,
)
from assayfolio.study.vocabulary import (
    ACROSS_RESPONSES,
    ALLOCATIONS,
    EFFECTS,
    LONGEST_SENTENCE,
    NORMALITY_CHECKS,
    OMNIBUS_TESTS,
    OUTLIER_KEYS,
    OUTLIER_TESTS,
    POWER_KEYS,
    PRECISION_CONDITIONS,
    PRECISION_KEYS,
    ROLES,
    SIGN_OFF_KEYS,
    VARIANCE_CHECKS,
    VARIANCES,
    Allocation,
    Effects,
    Role,
    Variances,
)

DEFAULT_CONFIDENCE = Fraction(95, 100)

_effects: Reader[Effects] = choice(EFFECTS)
_variances: Reader[Variances] = choice(VARIANCES)
_omnibus: Reader[Omnibus] = choice(OMNIBUS_TESTS)
_across_responses: Reader[AcrossResponses] = method(ACROSS_RESPONSES)
_variance_checks = one_or_more(choice(VARIANCE_CHECKS), "a check, or a list of checks")
_normality_checks = one_or_more(choice(NORMALITY_CHECKS), "a check, or a list of checks")
_outlier_tests = one_or_more(choice(OUTLIER_TESTS), "a test, or a list of tests")
_conditions: Reader[PrecisionConditions] = choice(PRECISION_CONDITIONS)
_allocation: Reader[Allocation] = choice(ALLOCATIONS)
_role: Reader[Role] = choice(ROLES)
_sentence = line_of_text(LONGEST_SENTENCE)


def read_design(fields: Fields) -> DesignPlan:
    """`design:` as a plan; the omnibus test is F with a pooled variance, Welch's with separate ones."""
    variances = fields.optional("variances", _variances) or "pooled"
    return DesignPlan(
        effects=fields.optional("effects", _effects) or "fixed",
        variances=variances,
        omnibus=fields.optional("omnibus", _omnibus) or ("f" if variances == "pooled" else "welch"),
        across_responses=fields.optional("across-responses", _across_responses) or "none",
    )


def read_checks(fields: Fields) -> ChecksPlan:
    """`checks:` as a plan."""
    return ChecksPlan(
        equal_variances=fields.optional("equal-variances", _variance_checks) or (),
        normality=fields.optional("normality", _normality_checks) or (),
    )


def read_outliers(value: Value) -> OutlierPlan:
    """`outliers:` as a plan."""
    tests = Fields.of(value, OUTLIER_KEYS).required("test", _outlier_tests)
    if tests is None:
        raise UnreadableError
    return OutlierPlan(tests, value.node.place)


def read_precision(value: Value) -> PrecisionPlan:
    """`precision:` as a plan; the confidence is 0.95 where it is left out."""
    fields = Fields.of(value, PRECISION_KEYS)
    estimate = fields.required("estimate", truth)
    confidence = fields.optional("confidence", high_probability) or DEFAULT_CONFIDENCE
    varied = fields.optional("varied", _sentence)
    conditions = fields.optional("conditions", _conditions)
    if estimate is None:
        raise UnreadableError
    return PrecisionPlan(estimate, confidence, varied, conditions, value.node.place)


def power_in(surroundings: Surroundings) -> Reader[PowerPlan]:
    """A reader for `power`; the response is compulsory where the study has several."""

    def read(value: Value) -> PowerPlan:
        fields = Fields.of(value, POWER_KEYS)
        difference = fields.required("difference", positive)
        sigma = fields.required("sigma", positive)
        target = fields.required("target", high_probability)
        true_difference = fields.optional("true-difference", any_number) or Fraction(0)
        allocation = fields.optional("allocation", _allocation) or "equal"
        response = fields.optional("response", response_in(surroundings))
        if surroundings.several_responses and not ("response" in fields or fields.unreadable("response")):
            found = "the key `power.response` is missing; the study has several responses"
            fields.faults.add(fields.place, found, "add the one that `difference` and `sigma` are about")
        if difference is None or sigma is None or target is None:
            raise UnreadableError
        return PowerPlan(difference, sigma, target, true_difference, allocation, response, value.node.place)

    return read


def read_sign_off(value: Value) -> SignOff:
    """One entry of `sign-off:`."""
    fields = Fields.of(value, SIGN_OFF_KEYS)
    role = fields.required("role", _role)
    meaning = fields.required("meaning", _sentence)
    if role is None or meaning is None:
        raise UnreadableError
    return SignOff(role, meaning)
