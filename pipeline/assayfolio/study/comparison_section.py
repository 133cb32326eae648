"""Reading `comparisons:` and `equivalence:` - which levels are compared, and how families are adjusted."""

from dataclasses import dataclass
from fractions import Fraction
from typing import Literal

from assayfolio.exact import to_double
from assayfolio.study.data_section import by_level, level_of
from assayfolio.study.faults import listed
from assayfolio.study.fields import (
    Fields,
    Reader,
    UnreadableError,
    Value,
    choice,
    label,
    line_of_text,
)
from assayfolio.study.nodes import MappingNode
from assayfolio.study.numbers import any_number, positive, probability
from assayfolio.study.plan import (
    Adjustment,
    AgainstReference,
    AllPairs,
    Alternative,
    Comparison,
    Contrast,
    EquivalencePlan,
)
from assayfolio.study.vocabulary import (
    ADJUSTMENTS,
    ALTERNATIVES,
    COMPARISON_KEYS,
    EQUIVALENCE_ADJUSTMENTS,
    EQUIVALENCE_KEYS,
    LONGEST_SENTENCE,
    PAIRS,
    EquivalenceAdjustment,
    Pairs,
    Variances,
)

_FAMILIES: tuple[Literal["against", "pairs", "weights"], ...] = ("against", "pairs", "weights")
_MARGINS = ("margin", "lower", "upper", "margin-percent")
_ONLY_FOR: dict[Adjustment, Literal["against", "pairs"]] = {
    "tukey-kramer": "pairs",
    "games-howell": "pairs",
    "dunnett": "against",
    "dunnett-step-down": "against",
}
_LONGEST_BITS = 128
_FOR_ONE_ROW: tuple[Adjustment, ...] = ("none", "scheffe")
_alternative: Reader[Alternative] = choice(ALTERNATIVES)
_method: Reader[Adjustment] = choice(ADJUSTMENTS)
_pairs: Reader[Pairs] = choice(PAIRS)
_equivalence_method: Reader[EquivalenceAdjustment] = choice(EQUIVALENCE_ADJUSTMENTS)


@dataclass(frozen=True, slots=True)
class Surroundings:
    """What the rest of the definition says that comparisons depend on; None where it could not be read.

    `levels` is empty where none are declared.
    """

    levels: tuple[str, ...] | None
    variances: Variances | None

    @property
    def declared(self) -> tuple[str, ...] | None:
        """The declared levels, or None where any level may be named."""
        return self.levels or None


def comparison_in(surroundings: Surroundings) -> Reader[Comparison]:
    """A reader for one entry of `comparisons`."""

    def read(value: Value) -> Comparison:
        fields = Fields.of(value, COMPARISON_KEYS)
        name = fields.required("name", label)
        alternative = fields.optional("alternative", _alternative) or "two-sided"
        adjust = _adjustment(fields, surroundings)
        pairs = fields.optional("pairs", _pairs)
        against = fields.optional("against", lambda inner: level_of(inner, surroundings.declared))
        weights = fields.optional("weights", lambda inner: _weights(inner, surroundings))
        if "pairs" in fields and "alternative" in fields:
            found = "`comparisons.alternative` stands beside `pairs`, where neither level comes first"
            fields.faults.add(fields.place_of("alternative"), found, "use it with `against` or `weights`")
        if _has_one_of(fields, _FAMILIES) and name is not None:
            if pairs is not None:
                return AllPairs(name, adjust, value.node.place)
            if against is not None:
                return AgainstReference(name, against, adjust, alternative, value.node.place)
            if weights is not None:
                return Contrast(name, weights, adjust, alternative, value.node.place)
        raise UnreadableError

    return read


def _has_one_of(fields: Fields, keys: tuple[str, ...]) -> bool:
    present = tuple(key for key in keys if key in fields)
    if len(present) == 1:
        return True
    if not present and any(fields.unreadable(key) for key in keys):
        return False
    choices = listed(tuple(f"`{key}`" for key in keys))
    subject = fields.named("").rstrip(".")
    found = f"an entry of `{subject}` has none of {choices}"
    if present:
        found = f"an entry of `{subject}` has {listed(tuple(f'`{key}`' for key in present), 'and')} together"
    fields.faults.add(fields.place, found, "write exactly one of them")
    return False


def _adjustment(fields: Fields, surroundings: Surroundings) -> Adjustment:
    value = fields.value("adjust")
    family = next((key for key in _FAMILIES if key in fields), None)
    if value is None:
        _refuse_absent_adjustment(fields, surroundings)
        return "none"
    adjust = fields.optional("adjust", _method)
    if adjust is None or family is None:
        return "none"
    wanted = _ONLY_FOR.get(adjust)
    if wanted is not None and wanted != family:
        value.report(f"is `{adjust}`, which fits only `{wanted}`", f"another method beside `{family}`")
    elif family == "weights" and adjust not in _FOR_ONE_ROW:
        value.report(f"is `{adjust}`, but a contrast is one comparison", listed(_FOR_ONE_ROW))
    elif adjust == "games-howell" and surroundings.variances == "pooled":
        expected = "`design.variances: separate` with it, or another method"
        value.report("is `games-howell`, which needs separate variances", expected)
    return adjust


def _refuse_absent_adjustment(fields: Fields, surroundings: Surroundings) -> None:
    """Say so where a family of more than one row leaves out how it is adjusted."""
    if fields.unreadable("adjust") or ("against" not in fields and "pairs" not in fields):
        return
    if surroundings.levels is None or 0 < len(surroundings.levels) <= 2:
        return
    why = "the family has more than one row" if surroundings.levels else "`data.levels` are not declared"
    found = f"the key `comparisons.adjust` is missing; {why}"
    advice = "add how p-values are adjusted, such as `adjust: holm`, or `adjust: none`"
    fields.faults.add(fields.place, found, advice)


def _weights(value: Value, surroundings: Surroundings) -> tuple[tuple[str, Fraction], ...]:
    node = value.node
    if not isinstance(node, MappingNode):
        raise value.wrong_kind("weights by level, such as {lot-a: 1, lot-b: -1}")
    weights = by_level(value, node, surroundings.declared, any_number)
    total = sum((weight for _, weight in weights), Fraction(0))
    if total:
        raise value.unreadable(f"add up to {_in_words(total)}", "weights that add up to exactly 0")
    if not any(weight for _, weight in weights):
        raise value.unreadable("hold no weight but 0", "weights above and below 0 that add up to 0")
    return weights


def _in_words(total: Fraction) -> str:
    """The number as a fraction, or rounded where the fraction would be very long."""
    long = max(total.numerator.bit_length(), total.denominator.bit_length()) > _LONGEST_BITS
    return f"about {to_double(total):.6g}" if long else str(total)


def equivalence_in(surroundings: Surroundings) -> Reader[EquivalencePlan]:
    """A reader for one entry of `equivalence`; `margin: m` is read as `lower: -m, upper: m`."""

    def read(value: Value) -> EquivalencePlan:
        fields = Fields.of(value, EQUIVALENCE_KEYS)
        name = fields.required("name", label)
        against = fields.optional("against", lambda inner: level_of(inner, surroundings.declared))
        pairs = fields.optional("pairs", _pairs)
        lower, upper, percent = _margins(fields)
        source = fields.optional("margin-source", line_of_text(LONGEST_SENTENCE))
        adjust = fields.optional("adjust", _equivalence_method) or "none"
        alpha = fields.optional("alpha", probability)
        if not _has_one_of(fields, ("against", "pairs")) or name is None:
            raise UnreadableError
        place = value.node.place
        return EquivalencePlan(name, against, pairs, lower, upper, percent, source, adjust, alpha, place)

    return read


def _margins(fields: Fields) -> tuple[Fraction | None, Fraction | None, Fraction | None]:
    """Lower, upper and percentage margin of an entry, of which one kind must be there."""
    margin = fields.optional("margin", positive)
    lower = fields.optional("lower", any_number)
    upper = fields.optional("upper", any_number)
    percent = fields.optional("margin-percent", positive)
    kinds = ("margin" in fields, "lower" in fields or "upper" in fields, "margin-percent" in fields)
    misspelt = any(fields.unreadable(key) and key not in fields for key in _MARGINS)
    if sum(kinds) != 1 and not misspelt:
        found = "an entry of `equivalence` has " + ("more than one margin" if any(kinds) else "no margin")
        fields.faults.add(fields.place, found, "write `margin`, or `lower` and `upper`, or `margin-percent`")
    elif kinds[1] and not misspelt and ("lower" not in fields or "upper" not in fields):
        there, absent = ("lower", "upper") if "lower" in fields else ("upper", "lower")
        found = f"`equivalence.{there}` stands without `{absent}`"
        fields.faults.add(fields.place_of(there), found, f"add `{absent}: ...`")
    elif lower is not None and upper is not None and not lower < 0 < upper:
        found = "the range from `equivalence.lower` to `equivalence.upper` does not hold 0 inside"
        fields.faults.add(fields.place_of("lower"), found, "expected `lower` below 0 and `upper` above 0")
    elif kinds[2] and "pairs" in fields:
        found = "`equivalence.margin-percent` is of the reference's mean, and `pairs` has no reference"
        fields.faults.add(fields.place_of("margin-percent"), found, "use it with `against`")
    if margin is not None:
        return -margin, margin, None
    return lower, upper, percent
