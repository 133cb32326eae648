"""Reading `equivalence:` and `spread:` - margins set in advance, and variances against a reference."""

from dataclasses import dataclass
from fractions import Fraction

from assayfolio.study.adjustments import method, require_adjustment
from assayfolio.study.comparison_section import has_one_of
from assayfolio.study.fields import Fields, Reader, UnreadableError, Value, choice, label, line_of_text
from assayfolio.study.names import Surroundings, level_in, response_in
from assayfolio.study.numbers import any_number, number, positive
from assayfolio.study.plan import EquivalencePlan, SpreadPlan
from assayfolio.study.vocabulary import (
    EQUIVALENCE_ADJUSTMENTS,
    EQUIVALENCE_KEYS,
    LONGEST_SENTENCE,
    NON_INFERIORITY,
    PAIRS,
    SPREAD_KEYS,
    EquivalenceAdjustment,
    NonInferiority,
    Pairs,
)

_KINDS = (("margin",), ("lower", "upper"), ("margin-percent",), ("lower-percent", "upper-percent"))
_PERCENT = ("margin-percent", "lower-percent", "upper-percent")
_WRITE_ONE_SIDED = "write `margin` or `margin-percent`"
_WRITE_ONE = (
    "write `margin`, or `lower` and `upper`, or `margin-percent`, or `lower-percent` and `upper-percent`"
)
_pairs: Reader[Pairs] = choice(PAIRS)
_method: Reader[EquivalenceAdjustment] = method(EQUIVALENCE_ADJUSTMENTS)
_side: Reader[NonInferiority] = choice(NON_INFERIORITY)
_lower_percent = number(
    "a number above -100, since a mean of 0 or below would otherwise do", lambda x: x > -100
)
_alpha = number("a number above 0 and below 0.5, such as 0.05", lambda x: 0 < x < Fraction(1, 2))


@dataclass(frozen=True, slots=True)
class _Limits:
    """Lower and upper limit, of the difference or in percent of the reference mean."""

    lower: Fraction | None = None
    upper: Fraction | None = None
    lower_percent: Fraction | None = None
    upper_percent: Fraction | None = None


def equivalence_in(surroundings: Surroundings) -> Reader[EquivalencePlan]:
    """A reader for one entry of `equivalence`.

    `margin: m` is read as `lower: -m, upper: m`, and so in percent; `non-inferiority` leaves one of the two
    sides open.
    """

    def read(value: Value) -> EquivalencePlan:
        fields = Fields.of(value, EQUIVALENCE_KEYS)
        name = fields.required("name", label)
        against = fields.optional("against", level_in(surroundings))
        pairs = fields.optional("pairs", _pairs)
        limits = _limits(fields)
        source = fields.optional("margin-source", line_of_text(LONGEST_SENTENCE))
        adjust = _adjustment(fields, surroundings)
        alpha = fields.optional("alpha", _alpha)
        response = fields.optional("response", response_in(surroundings))
        if not has_one_of(fields, ("against", "pairs")) or name is None:
            raise UnreadableError
        return EquivalencePlan(
            name,
            against,
            pairs,
            limits.lower,
            limits.upper,
            limits.lower_percent,
            limits.upper_percent,
            source,
            adjust,
            alpha,
            response,
            value.node.place,
        )

    return read


def _adjustment(fields: Fields, surroundings: Surroundings) -> EquivalenceAdjustment:
    if "adjust" not in fields and ("against" in fields or "pairs" in fields):
        require_adjustment(fields, None, surroundings)
    return fields.optional("adjust", _method) or "none"


def _limits(fields: Fields) -> _Limits:
    """The limits of an entry, of which one kind must be there."""
    margin = fields.optional("margin", positive)
    lower = fields.optional("lower", any_number)
    upper = fields.optional("upper", any_number)
    percent = fields.optional("margin-percent", positive)
    lower_percent = fields.optional("lower-percent", _lower_percent)
    upper_percent = fields.optional("upper-percent", any_number)
    side = fields.optional("non-inferiority", _side)
    _report_kinds(fields)
    _report_side(fields)
    _report_range(fields, ("lower", lower), ("upper", upper))
    _report_range(fields, ("lower-percent", lower_percent), ("upper-percent", upper_percent))
    if percent is not None and percent >= 100 and side != "not-higher":
        stated = fields.value("margin-percent")
        assert stated is not None, "it has just been read"
        stated.report("reaches down to a mean of 0 or below", "a number above 0 and below 100")
    if margin is not None:
        return _Limits(*_around_zero(margin, side))
    if percent is not None:
        return _Limits(None, None, *_around_zero(percent, side))
    return _Limits(lower, upper, lower_percent, upper_percent)


def _around_zero(margin: Fraction, side: NonInferiority | None) -> tuple[Fraction | None, Fraction | None]:
    return (None if side == "not-higher" else -margin), (None if side == "not-lower" else margin)


def _report_kinds(fields: Fields) -> None:
    """Report an entry without a margin, with two kinds of margin, or with half a range."""
    kinds = [kind for kind in _KINDS if any(key in fields for key in kind)]
    if any(fields.unreadable(key) and key not in fields for kind in _KINDS for key in kind):
        return  # a misspelt margin is reported already, and which kind it is cannot be told
    if len(kinds) != 1:
        found = "an entry of `equivalence` has " + ("more than one margin" if kinds else "no margin")
        sided = "non-inferiority" in fields
        fields.faults.add(fields.place, found, _WRITE_ONE_SIDED if sided else _WRITE_ONE)
        return
    absent = [key for key in kinds[0] if key not in fields]
    if absent:
        there = next(key for key in kinds[0] if key in fields)
        found = f"`equivalence.{there}` stands without `{absent[0]}`"
        fields.faults.add(fields.place_of(there), found, f"add `{absent[0]}: ...`")
    percent = next((key for key in _PERCENT if key in fields), None)
    if percent is not None and "pairs" in fields:
        found = f"`equivalence.{percent}` is of the reference's mean, and `pairs` has no reference"
        fields.faults.add(fields.place_of(percent), found, "use it with `against`")


def _report_side(fields: Fields) -> None:
    if "non-inferiority" not in fields:
        return
    ranged = next((key for kind in (_KINDS[1], _KINDS[3]) for key in kind if key in fields), None)
    place = fields.place_of("non-inferiority")
    if ranged is not None:
        found = f"`equivalence.non-inferiority` has one limit, and `{ranged}` is one of two"
        fields.faults.add(place, found, "use it with `margin` or `margin-percent`")
    if "pairs" in fields:
        found = "`equivalence.non-inferiority` stands beside `pairs`, where neither level comes first"
        fields.faults.add(place, found, "use it with `against`")


def _report_range(
    fields: Fields, lower: tuple[str, Fraction | None], upper: tuple[str, Fraction | None]
) -> None:
    if lower[1] is None or upper[1] is None or lower[1] < 0 < upper[1]:
        return
    found = f"the range from `equivalence.{lower[0]}` to `equivalence.{upper[0]}` does not hold 0 inside"
    expected = f"expected `{lower[0]}` below 0 and `{upper[0]}` above 0"
    fields.faults.add(fields.place_of(lower[0]), found, expected)


def spread_in(surroundings: Surroundings) -> Reader[SpreadPlan]:
    """A reader for `spread`."""

    def read(value: Value) -> SpreadPlan:
        fields = Fields.of(value, SPREAD_KEYS)
        against = fields.required("against", level_in(surroundings))
        adjust = _adjustment(fields, surroundings)
        if against is None:
            raise UnreadableError
        return SpreadPlan(against, adjust, value.node.place)

    return read
