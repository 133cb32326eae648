"""Reading `comparisons:` - which levels are compared, and what each comparison is made of."""

from fractions import Fraction

from assayfolio.exact import to_double
from assayfolio.study.adjustments import FAMILIES, read_adjustment
from assayfolio.study.faults import listed
from assayfolio.study.fields import (
    Fields,
    Reader,
    UnreadableError,
    Value,
    choice,
    label,
    list_of,
    report_repeats,
)
from assayfolio.study.names import Surroundings, by_name, level_in
from assayfolio.study.nodes import MappingNode
from assayfolio.study.numbers import any_number, whole_number
from assayfolio.study.plan import (
    AgainstReference,
    AllPairs,
    Alternative,
    Comparison,
    Contrast,
    ContrastFamily,
    Trend,
    WeightedSum,
)
from assayfolio.study.scores import trend_misfits
from assayfolio.study.vocabulary import (
    ALTERNATIVES,
    COMPARISON_KEYS,
    CONTRAST_KEYS,
    PAIRS,
    TRENDS,
    Pairs,
    TrendKind,
)

HIGHEST_DEGREE = 199
_LONGEST_BITS = 128
_alternative: Reader[Alternative] = choice(ALTERNATIVES)
_pairs: Reader[Pairs] = choice(PAIRS)
_trend_kind: Reader[TrendKind] = choice(TRENDS)
_degree = whole_number(2, HIGHEST_DEGREE)


def comparison_in(surroundings: Surroundings) -> Reader[Comparison]:
    """A reader for one entry of `comparisons`."""

    def read(value: Value) -> Comparison:
        fields = Fields.of(value, COMPARISON_KEYS)
        name = fields.required("name", label)
        alternative = fields.optional("alternative", _alternative) or "two-sided"
        adjust = read_adjustment(fields, surroundings)
        pairs = fields.optional("pairs", _pairs)
        against = fields.optional("against", level_in(surroundings))
        weights = fields.optional("weights", _weights_in(surroundings))
        contrasts = fields.optional("contrasts", _contrasts_in(surroundings))
        kind, degree, scores = _trend_parts(fields, surroundings)
        if "pairs" in fields and "alternative" in fields:
            found = "`comparisons.alternative` stands beside `pairs`, where neither level comes first"
            fields.faults.add(fields.place_of("alternative"), found, "use it with `against` or `weights`")
        place = value.node.place
        if has_one_of(fields, FAMILIES) and name is not None:
            if pairs is not None:
                return AllPairs(name, adjust, place)
            if against is not None:
                return AgainstReference(name, against, adjust, alternative, place)
            if weights is not None:
                return Contrast(name, weights, adjust, alternative, place)
            if contrasts is not None:
                return ContrastFamily(name, contrasts, adjust, alternative, place)
            if kind is not None and degree is not None and scores is not None:
                trend = Trend(name, degree, scores, adjust, alternative, place)
                _report_misfits(fields, trend, surroundings)
                return trend
        raise UnreadableError

    return read


def has_one_of(fields: Fields, keys: tuple[str, ...]) -> bool:
    """Whether exactly one of `keys` is there; anything else is reported, unless one of them is misspelt."""
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


def _weights_in(surroundings: Surroundings) -> Reader[tuple[tuple[str, Fraction], ...]]:
    def read(value: Value) -> tuple[tuple[str, Fraction], ...]:
        node = value.node
        if not isinstance(node, MappingNode):
            raise value.wrong_kind("weights by level, such as {lot-a: 1, lot-b: -1}")
        weights = by_name(value, node, level_in(surroundings), any_number)
        total = sum((weight for _, weight in weights), Fraction(0))
        if total:
            raise value.unreadable(f"add up to {_in_words(total)}", "weights that add up to exactly 0")
        if not any(weight for _, weight in weights):
            raise value.unreadable("hold no weight but 0", "weights above and below 0 that add up to 0")
        return weights

    return read


def _in_words(total: Fraction) -> str:
    """The number as a fraction, or rounded where the fraction would be very long."""
    long = max(total.numerator.bit_length(), total.denominator.bit_length()) > _LONGEST_BITS
    return f"about {to_double(total):.6g}" if long else str(total)


def _contrasts_in(surroundings: Surroundings) -> Reader[tuple[WeightedSum, ...]]:
    weights_in = _weights_in(surroundings)

    def read_one(value: Value) -> WeightedSum:
        fields = Fields.of(value, CONTRAST_KEYS)
        name = fields.required("name", label)
        weights = fields.required("weights", weights_in)
        if name is None or weights is None:
            raise UnreadableError
        return WeightedSum(name, weights)

    read_all = list_of(read_one, "a list of contrasts, each with `name` and `weights`")

    def read(value: Value) -> tuple[WeightedSum, ...]:
        report_repeats(value.under("name"))
        return read_all(value)

    return read


def _trend_parts(
    fields: Fields, surroundings: Surroundings
) -> tuple[TrendKind | None, int | None, tuple[tuple[str, Fraction], ...] | None]:
    """Kind, degree and scores of a trend, each None where it cannot be read; scores are empty if absent."""
    kind = fields.optional("trend", _trend_kind)
    scores = fields.optional("scores", _scores_in(surroundings))
    degree = fields.required("degree", _degree) if kind == "polynomial" else None
    for key in ("degree", "scores"):
        if key in fields and "trend" not in fields and not fields.unreadable("trend"):
            found = f"`{fields.named(key)}` stands without `trend`"
            fields.faults.add(fields.place_of(key), found, "add `trend: ...`, or leave it out")
    if kind == "linear":
        degree = 1
        if "degree" in fields:
            found = "`comparisons.degree` stands beside `trend: linear`, which has degree 1"
            fields.faults.add(fields.place_of("degree"), found, "use `trend: polynomial`, or leave it out")
    if scores is None and not fields.unreadable("scores"):
        scores = ()
    return kind, degree, scores


def _scores_in(surroundings: Surroundings) -> Reader[tuple[tuple[str, Fraction], ...]]:
    def read(value: Value) -> tuple[tuple[str, Fraction], ...]:
        node = value.node
        if not isinstance(node, MappingNode):
            raise value.wrong_kind("numbers by level, such as {low: 20, high: 40}")
        if not node.entries:
            raise value.unreadable("is an empty mapping", "a number for each level, or leave the key out")
        return by_name(value, node, level_in(surroundings), any_number)

    return read


def _report_misfits(fields: Fields, trend: Trend, surroundings: Surroundings) -> None:
    """Report what does not fit the levels, as far as those are known before the data."""
    if surroundings.levels is None:
        return
    levels = surroundings.levels or tuple(level for level, _ in trend.scores)
    for misfit in trend_misfits(trend, levels) if levels else ():
        value = fields.value(misfit.key)
        assert value is not None, "a trend whose degree does not fit states it, and scores if it has them"
        value.report(misfit.found, misfit.expected)
