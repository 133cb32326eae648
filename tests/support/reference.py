"""Reading of the reference vectors, and the measures by which a computed number is held against them."""

import json
from collections.abc import Mapping, Sequence
from decimal import Context, Decimal
from fractions import Fraction
from pathlib import Path
from typing import Any

from assayfolio.exact import Decimal10, ExactSums, parse_decimal
from assayfolio.statistics.oneway import OneWay, one_way

VECTORS = Path(__file__).resolve().parents[1] / "vectors"

Texts = Mapping[str, Sequence[str]]
Groups = list[tuple[str, list[Decimal10]]]


def cases_of(name: str) -> dict[str, dict[str, Any]]:
    """The cases of `vectors/<name>.json` by name."""
    document = json.loads((VECTORS / f"{name}.json").read_text("utf-8"))
    return {case["name"]: case for case in document["cases"]}


def examples() -> dict[str, dict[str, Any]]:
    """The worked examples by identifier; the expected values of each by quantity."""
    document = json.loads((VECTORS / "worked_examples.json").read_text("utf-8"))
    return {
        example["id"]: {**example, "expected": {one["quantity"]: one for one in example["expected"]}}
        for example in document["examples"]
    }


def decimals(data: Texts) -> Groups:
    """The values of each level as exact decimals."""
    return [(level, [parse_decimal(text) for text in texts]) for level, texts in data.items()]


def analysed(data: Texts) -> OneWay:
    """The one-way analysis of values given as text."""
    return one_way([(level, ExactSums.of(values)) for level, values in decimals(data)])


def relative_error(computed: float, expected: str) -> float:
    """The relative difference from `expected`; the absolute one where zero is expected."""
    truth = Fraction(expected)
    return float(abs(Fraction(computed) - truth) / (abs(truth) or 1))


def error_in_widths(computed: Sequence[float | None], expected: Sequence[str]) -> float:
    """How far the ends of an interval are off, as a share of its half width.

    An end cannot be nearer to the truth than the double beside it; half a unit of its last place is allowed.
    """
    lower, upper = Fraction(expected[0]), Fraction(expected[1])
    worst = Fraction(0)
    for end, truth in zip(computed, (lower, upper), strict=True):
        assert end is not None
        rounding = abs(truth) / 2**53
        worst = max(worst, abs(Fraction(end) - truth) - rounding)
    return float(worst / ((upper - lower) / 2))


def square_root(value: Fraction) -> float:
    """The square root to 60 digits, then the nearest double: another way than the package goes."""
    context = Context(prec=80, Emin=-9999, Emax=9999)
    return float(context.sqrt(context.divide(Decimal(value.numerator), Decimal(value.denominator))))


def agrees_as_printed(computed: float | Fraction, expected: Mapping[str, Any]) -> bool:
    """Whether `computed` rounds to the printed value, or lies within the tolerance that is stated with it."""
    half_a_unit = Fraction(1, 2 * 10 ** expected["printed_decimals"])
    allowed = Fraction(expected["tolerance"]) if "tolerance" in expected else half_a_unit
    return abs(Fraction(computed) - Fraction(expected["printed"])) <= allowed
