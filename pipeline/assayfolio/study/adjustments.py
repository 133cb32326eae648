"""How the p-values of a family may be adjusted, and when a definition has to say how."""

from collections.abc import Container
from typing import Literal, TypeVar

from assayfolio.study.faults import listed, shown
from assayfolio.study.fields import Fields, Reader, Value, choice, scalar
from assayfolio.study.names import Surroundings
from assayfolio.study.plan import Adjustment
from assayfolio.study.vocabulary import ADJUSTMENTS, FALSE_DISCOVERY_WORDS

W = TypeVar("W", bound=str)
Family = Literal["against", "pairs", "weights", "contrasts", "trend"]

FAMILIES: tuple[Family, ...] = ("against", "pairs", "weights", "contrasts", "trend")
_ONLY_FOR: dict[Adjustment, Family] = {
    "tukey-kramer": "pairs",
    "games-howell": "pairs",
    "dunnett": "against",
    "dunnett-step-down": "against",
}
_FOR_ONE_ROW: tuple[Adjustment, ...] = ("none", "scheffe")


def method(options: tuple[W, ...]) -> Reader[W]:
    """One of some methods; methods that control the rate of false discoveries are refused with the reason."""
    known = choice(options)

    def read(value: Value) -> W:
        text = scalar(value, listed(options)).text
        if text.lower().replace("_", "-").replace(" ", "-") not in FALSE_DISCOVERY_WORDS:
            return known(value)
        expected = (
            f"{listed(options)}; methods that control the rate of false discoveries are not offered, because "
            "planned comparisons and tests are confirmatory"
        )
        raise value.unreadable(f"is {shown(text)}", expected)

    return read


_method: Reader[Adjustment] = method(ADJUSTMENTS)


def several_rows(keys: Container[str], trend: str | None, levels: tuple[str, ...]) -> bool | None:
    """Whether the family with these keys has more than one row; None where that cannot be told yet.

    `trend` is what stands under the key of that name; `levels` are the declared ones, empty where none are.
    """
    if "contrasts" in keys:
        return True
    if "trend" in keys:
        return {"linear": False, "polynomial": True}.get(trend or "")
    if "weights" in keys:
        return False
    return len(levels) > 2 if levels else None


def read_adjustment(fields: Fields, surroundings: Surroundings) -> Adjustment:
    """`adjust` of one entry of `comparisons`; `none` where it may be left out, or cannot be read."""
    present: list[Family] = [family for family in FAMILIES if family in fields]
    value = fields.value("adjust")
    if value is None:
        if present:
            require_adjustment(fields, fields.text("trend"), surroundings)
        return "none"
    adjust = fields.optional("adjust", _method)
    if adjust is None or len(present) != 1:
        return adjust or "none"
    family = present[0]
    wanted = _ONLY_FOR.get(adjust)
    if wanted is not None and wanted != family:
        value.report(f"is `{adjust}`, which fits only `{wanted}`", f"another method beside `{family}`")
    elif adjust not in _FOR_ONE_ROW and several_rows(fields.keys, fields.text("trend"), ()) is False:
        one = "a contrast" if family == "weights" else "a linear trend"
        value.report(f"is `{adjust}`, but {one} is one comparison", listed(_FOR_ONE_ROW))
    return adjust


def require_adjustment(fields: Fields, trend: str | None, surroundings: Surroundings) -> None:
    """Report that `adjust` is missing, unless it is misspelt or the family has no more than one row."""
    if fields.unreadable("adjust") or surroundings.levels is None:
        return
    several = several_rows(fields.keys, trend, surroundings.levels)
    if several is False or (several is None and "trend" in fields):
        return
    why = "the family has more than one row" if several else "`data.levels` are not declared"
    found = f"the key `{fields.named('adjust')}` is missing; {why}"
    advice = "add how p-values are adjusted, such as `adjust: holm`, or `adjust: none`"
    fields.faults.add(fields.place, found, advice)
