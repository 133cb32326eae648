"""Two findings documents field by field: exact equality first, a stated bound where a number is approximate.

What is rational, or the square root of a rational, is the correctly rounded double on every machine and is
compared by equality, as is every text. What went through a distribution function is stated to 12 digits and
compared within 1e-11:

* a number relative to itself;
* the ends of an interval relative to half its width, since they are an exact centre minus and plus a half
  width of 12 digits; an end may also differ by one unit in the last place, where it is rounded;
* a base-10 logarithm of p relative to itself, and near zero through p, whose own relative error of 1e-11 is
  an absolute 1e-11 / ln 10 of the logarithm.

The Shapiro-Wilk test alone has a wider bound, 1e-8: its statistic and p are an approximation (Royston's) from
a library, and two versions of that library were seen to differ by 9e-10 in p (scipy 1.17.1 and 1.18.1).
"""

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Literal

from assayfolio.canonical import Json

BOUND = 1e-11
SHAPIRO_WILK_BOUND = 1e-8
EXACT_DIGITS = 15.95  # -log10(2**-53): what a double holds
STATED_DIGITS = 12.0

Kind = Literal["exact", "approximate", "only archived", "only now"]

APPROXIMATE = frozenset(
    {
        "p",
        "p_adjusted",
        "p_lower",
        "p_upper",
        "p_mehrotra",
        "f_critical",
        "critical",
        "straggler_limit",
        "outlier_limit",
        "power",
        "detectable_difference",
        "half_width",
    }
)
LOGARITHMS = frozenset({"log10_p", "log10_p_adjusted"})
CENTRED = {"ci": ("mean", "estimate"), "mean_ci": ("mean",)}
"""Intervals about a value that stands beside them: its key."""
# These checks have a statistic that is no rational: logarithms, or an approximation of its own.
_APPROXIMATE_STATISTICS = ("Bartlett", "Shapiro", "Anderson")


@dataclass(frozen=True, slots=True)
class Difference:
    """One field that is not the same: its place (RFC 6901), what it belongs to, the old and the new value.

    `bound` is the stated one, None for what is compared by equality. `digits_lost` counts decimal digits: for
    an exact number of the 15.95 that a double holds, for an approximate one of the 12 that are stated; None
    where the values are no two numbers. `within` says that an approximate number keeps the bound.
    """

    place: str
    about: str
    old: Json
    new: Json
    kind: Kind
    within: bool
    digits_lost: float | None
    bound: float | None = None

    @property
    def document(self) -> Mapping[str, Json]:
        """The difference as the record holds it."""
        return {
            "place": self.place,
            "about": self.about,
            "old": self.old,
            "new": self.new,
            "kind": self.kind,
            "bound": self.bound,
            "within_bound": self.within,
            "digits_lost": self.digits_lost,
        }


def differences(old: Json, new: Json, lenient: bool = False) -> tuple[Difference, ...]:
    """Every field in which the findings `new` differ from the archived `old`, in the order of their places.

    `lenient` says that another version of this program computed `new`: fields that only it knows are then
    named without counting as different.
    """
    return tuple(_Walk(lenient).compare("", "", old, new))


@dataclass(frozen=True, slots=True)
class _Walk:
    """Goes through two documents side by side."""

    lenient: bool

    def compare(self, place: str, about: str, old: Any, new: Any) -> Iterator[Difference]:
        if isinstance(old, Mapping) and isinstance(new, Mapping):
            yield from self._objects(place, about, old, new)
        elif _is_list(old) and _is_list(new):
            yield from self._lists(place, about, old, new)
        elif not _same(old, new):
            yield Difference(place, about, old, new, "exact", False, _lost(old, new, EXACT_DIGITS))

    def _objects(
        self, place: str, about: str, old: Mapping[str, Any], new: Mapping[str, Any]
    ) -> Iterator[Difference]:
        about = _name_of(old) or about
        for key in sorted({*old, *new}):
            inside = f"{place}/{key.replace('~', '~0').replace('/', '~1')}"
            if key not in new:
                yield Difference(inside, about, old[key], None, "only archived", False, None)
            elif key not in old:
                yield Difference(inside, about, None, new[key], "only now", self.lenient, None)
            elif key.endswith("_ci") or "_ci_" in key or key == "ci":
                yield from _interval(inside, about, old[key], new[key], _centre(key, old))
            elif key in LOGARITHMS:
                yield from _number(inside, about, old[key], new[key], BOUND, BOUND / math.log(10))
            elif key == "statistic" and _has_approximate_statistic(old):
                # A joined statistic may be near zero, where only its absolute error says something.
                yield from _number(inside, about, old[key], new[key], _bound(old), _bound(old))
            elif key in APPROXIMATE:
                yield from _number(inside, about, old[key], new[key], _bound(old), 0.0)
            else:
                yield from self.compare(inside, about, old[key], new[key])

    def _lists(self, place: str, about: str, old: Sequence[Any], new: Sequence[Any]) -> Iterator[Difference]:
        for index, (one, other) in enumerate(zip(old, new, strict=False)):
            yield from self.compare(f"{place}/{index}", about, one, other)
        for index in range(len(new), len(old)):
            yield Difference(f"{place}/{index}", about, old[index], None, "only archived", False, None)
        for index in range(len(old), len(new)):
            yield Difference(f"{place}/{index}", about, None, new[index], "only now", False, None)


def _is_list(value: Any) -> bool:
    return isinstance(value, Sequence) and not isinstance(value, str)


def _is_number(value: Any) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)


def _same(old: Any, new: Any) -> bool:
    if _is_number(old) and _is_number(new):
        return bool(old == new)
    return type(old) is type(new) and bool(old == new)


def _name_of(fields: Mapping[str, Any]) -> str:
    """What an object calls itself."""
    for key in ("label", "name", "level", "test", "quantity", "question", "way", "policy"):
        if isinstance(fields.get(key), str):
            return str(fields[key])
    return ""


def _has_approximate_statistic(fields: Mapping[str, Any]) -> bool:
    return str(fields.get("name", "")).startswith(_APPROXIMATE_STATISTICS)


def _bound(fields: Mapping[str, Any]) -> float:
    """The relative bound of an approximate number among `fields`."""
    return SHAPIRO_WILK_BOUND if str(fields.get("name", "")).startswith("Shapiro-Wilk") else BOUND


def _centre(key: str, fields: Mapping[str, Any]) -> float | None:
    for beside in CENTRED.get(key, ()):
        if _is_number(fields.get(beside)):
            return float(fields[beside])
    return None


def _number(place: str, about: str, old: Any, new: Any, bound: float, least: float) -> Iterator[Difference]:
    """An approximate number with its relative `bound`, or the absolute `least` where that is more."""
    if _same(old, new):
        return
    within = False
    if _is_number(old) and _is_number(new):
        within = abs(new - old) <= max(bound * abs(old), least)
    yield Difference(place, about, old, new, "approximate", within, _lost(old, new, STATED_DIGITS), bound)


def _interval(place: str, about: str, old: Any, new: Any, centre: float | None) -> Iterator[Difference]:
    if not (_is_list(old) and _is_list(new) and len(old) == len(new) == 2):
        if old != new:
            yield Difference(place, about, old, new, "exact", False, None)
        return
    for index, (one, other) in enumerate(zip(old, new, strict=True)):
        if _same(one, other):
            continue
        within, lost = False, None
        if _is_number(one) and _is_number(other):
            half = _half_width(old, one, centre)
            within = abs(other - one) <= max(BOUND * half, math.ulp(one))
            lost = _lost_of(abs(other - one), half, STATED_DIGITS)
        yield Difference(f"{place}/{index}", about, one, other, "approximate", within, lost, BOUND)


def _half_width(ends: Sequence[Any], end: float, centre: float | None) -> float:
    """Half the width; of an interval that is open on one side the distance of its end from the centre."""
    if all(_is_number(each) for each in ends):
        return float(abs(ends[1] - ends[0])) / 2
    return abs(end - centre) if centre is not None else abs(end)


def _lost(old: Any, new: Any, held: float) -> float | None:
    """How many of `held` digits two numbers do not share."""
    if not (_is_number(old) and _is_number(new)):
        return None
    return _lost_of(abs(new - old), abs(old), held)


def _lost_of(distance: float, scale: float, held: float) -> float:
    if distance == 0:
        return 0.0
    if scale == 0 or not math.isfinite(distance):
        return held
    return round(min(held, max(0.0, held + math.log10(distance / scale))), 1)
