"""Reading the short sections: design, checks, outliers, precision, power, criteria and sign-off."""

import re
from fractions import Fraction

from assayfolio.study.fields import (
    Fields,
    Reader,
    UnreadableError,
    Value,
    choice,
    label,
    line_of_text,
    matching,
    truth,
)
from assayfolio.study.numbers import any_number, positive, probability
from assayfolio.study.plan import (
    ChecksPlan,
    Criterion,
    DesignPlan,
    OutlierPlan,
    PowerPlan,
    PrecisionPlan,
    SignOff,
)
from assayfolio.study.vocabulary import (
    CRITERION_KEYS,
    EFFECTS,
    LONGEST_SENTENCE,
    NORMALITY_CHECKS,
    OUTLIER_KEYS,
    OUTLIER_TESTS,
    POWER_KEYS,
    PRECISION_KEYS,
    ROLES,
    SIGN_OFF_KEYS,
    VARIANCE_CHECKS,
    VARIANCES,
    Effects,
    NormalityCheck,
    OutlierTest,
    Role,
    VarianceCheck,
    Variances,
)

DEFAULT_CONFIDENCE = Fraction(95, 100)

_quantity = matching(
    re.compile(r"[a-z][a-z0-9-]{0,39}", re.ASCII),
    "a quantity in small letters, digits and hyphens, such as repeatability-rsd",
)
_effects: Reader[Effects] = choice(EFFECTS)
_variances: Reader[Variances] = choice(VARIANCES)
_variance_check: Reader[VarianceCheck] = choice(VARIANCE_CHECKS)
_normality_check: Reader[NormalityCheck] = choice(NORMALITY_CHECKS)
_outlier_test: Reader[OutlierTest] = choice(OUTLIER_TESTS)
_role: Reader[Role] = choice(ROLES)
_sentence = line_of_text(LONGEST_SENTENCE)


def read_design(fields: Fields) -> DesignPlan:
    """`design:` as a plan."""
    return DesignPlan(
        effects=fields.optional("effects", _effects) or "fixed",
        variances=fields.optional("variances", _variances) or "pooled",
    )


def read_checks(fields: Fields) -> ChecksPlan:
    """`checks:` as a plan."""
    return ChecksPlan(
        equal_variances=fields.optional("equal-variances", _variance_check),
        normality=fields.optional("normality", _normality_check),
    )


def read_outliers(value: Value) -> OutlierPlan:
    """`outliers:` as a plan."""
    test = Fields.of(value, OUTLIER_KEYS).required("test", _outlier_test)
    if test is None:
        raise UnreadableError
    return OutlierPlan(test, value.node.place)


def read_precision(value: Value) -> PrecisionPlan:
    """`precision:` as a plan; the confidence is 0.95 where it is left out."""
    fields = Fields.of(value, PRECISION_KEYS)
    estimate = fields.required("estimate", truth)
    confidence = fields.optional("confidence", probability) or DEFAULT_CONFIDENCE
    varied = fields.optional("varied", _sentence)
    if estimate is None:
        raise UnreadableError
    return PrecisionPlan(estimate, confidence, varied, value.node.place)


def read_power(value: Value) -> PowerPlan:
    """`power:` as a plan."""
    fields = Fields.of(value, POWER_KEYS)
    difference = fields.required("difference", positive)
    sigma = fields.required("sigma", positive)
    target = fields.required("target", probability)
    if difference is None or sigma is None or target is None:
        raise UnreadableError
    return PowerPlan(difference, sigma, target, value.node.place)


def read_criterion(value: Value) -> Criterion:
    """One entry of `criteria:`."""
    fields = Fields.of(value, CRITERION_KEYS)
    quantity = fields.required("quantity", _quantity)
    at_most = fields.optional("at-most", any_number)
    at_least = fields.optional("at-least", any_number)
    unit = fields.optional("unit", label)
    if not any(key in fields or fields.unreadable(key) for key in ("at-most", "at-least")):
        found = "an entry of `criteria` has no limit"
        fields.faults.add(fields.place, found, "write `at-most`, `at-least` or both")
    if at_most is not None and at_least is not None and at_least > at_most:
        found = "`criteria.at-least` is above `criteria.at-most`, so that nothing can meet both"
        fields.faults.add(fields.place_of("at-least"), found, "exchange or correct them")
    if quantity is None:
        raise UnreadableError
    return Criterion(quantity, at_most, at_least, unit, value.node.place)


def read_sign_off(value: Value) -> SignOff:
    """One entry of `sign-off:`."""
    fields = Fields.of(value, SIGN_OFF_KEYS)
    role = fields.required("role", _role)
    meaning = fields.required("meaning", _sentence)
    if role is None or meaning is None:
        raise UnreadableError
    return SignOff(role, meaning)
