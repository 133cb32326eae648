"""The check that a run makes of itself before it computes: certified references through the installed code.

References that together pass through every part that a result depends on: exact sums and rounding (NIST StRD
AtmWtAg, certified to 15 digits; data and values from NIST/ITL), the F and t tails, the studentised range and
the largest difference from a reference (values computed independently with 113-bit and 50-digit arithmetic).
"""

import json
from collections.abc import Callable
from fractions import Fraction
from importlib.resources import files
from math import log10
from typing import Any

from assayfolio.errors import MachineError
from assayfolio.exact import ExactSums, Root, parse_decimal, to_double
from assayfolio.statistics.adjustment import Tail, holm
from assayfolio.statistics.distributions import (
    many_to_one_isf,
    many_to_one_sf,
    studentized_range_isf,
    studentized_range_sf,
)
from assayfolio.statistics.estimates import pair_estimates
from assayfolio.statistics.oneway import OneWay, one_way
from assayfolio.statistics.tails import f_isf, f_log10_sf, f_sf, t_isf, t_two_sided

FUNCTIONS: dict[str, Callable[..., Any]] = {
    "f_sf": f_sf,
    "f_isf": f_isf,
    "f_log10_sf": f_log10_sf,
    "t_two_sided": t_two_sided,
    "t_isf": t_isf,
    "studentized_range_sf": studentized_range_sf,
    "studentized_range_isf": studentized_range_isf,
    "many_to_one_sf": many_to_one_sf,
    "many_to_one_isf": many_to_one_isf,
}


class SelfCheckError(MachineError):
    """The installed code does not reproduce a certified reference; nothing it computes may be reported."""


def self_check() -> str:
    """Recompute the references; return one sentence on what was checked.

    Raises SelfCheckError naming the first reference that is not reproduced.
    """
    references = json.loads((files("assayfolio.workflow") / "references.json").read_text("utf-8"))
    for case in references["one_way"]:
        _check_one_way(case)
    for case in references["functions"]:
        _check_function(case)
    _check_holm()
    values = sum(len(case["certified"]) for case in references["one_way"])
    return (
        f"{values} certified values of {len(references['one_way'])} NIST StRD data sets reproduced to every "
        f"printed digit, {len(references['functions'])} reference values of distribution functions to 1 part "
        "in 10¹⁰"
    )


def _check_one_way(case: dict[str, Any]) -> None:
    groups = [(level, ExactSums.of(map(parse_decimal, values))) for level, values in case["data"].items()]
    analysis = one_way(groups)
    computed = _quantities(analysis)
    for name, certified in case["certified"].items():
        places = len(certified.partition("e")[0].partition(".")[2])
        if f"{computed[name]:.{places}e}" != _normalised(certified):
            raise SelfCheckError(_words(f"{case['name']}, {name}", certified, computed[name]))
    if len(pair_estimates(analysis)) != analysis.k * (analysis.k - 1) // 2:
        raise SelfCheckError(f"The check before the run failed: {case['name']}, number of pairs.")


def _quantities(analysis: OneWay) -> dict[str, float]:
    exact: dict[str, Fraction | Root | None] = {
        "ss_between": analysis.ss_between,
        "ss_within": analysis.ss_within,
        "ms_between": analysis.ms_between,
        "ms_within": analysis.ms_within,
        "f": analysis.f,
        "r_squared": analysis.r_squared,
        "residual_sd": Root.of(analysis.ms_within),
    }
    return {name: to_double(value) for name, value in exact.items() if value is not None}


def _normalised(certified: str) -> str:
    mantissa, _, power = certified.partition("e")
    return f"{mantissa}e{int(power):+03d}"


def _check_function(case: dict[str, Any]) -> None:
    arguments = [_argument(text) for text in case["arguments"]]
    computed = float(FUNCTIONS[case["function"]](*arguments))
    expected = float(case["value"])
    if not abs(computed - expected) <= 1e-10 * abs(expected):
        what = f"{case['function']}({', '.join(case['arguments'])})"
        raise SelfCheckError(_words(what, case["value"], computed))


def _argument(text: str) -> int | float | list[int]:
    """A count, a list of counts with blanks between them, or a number."""
    if " " in text:
        return [int(part) for part in text.split()]
    return int(text) if text.isdigit() else float(text)


def _check_holm() -> None:
    # Four tails whose adjustment can be done in the head: times 4, 3, 2, 1, never falling.
    adjusted = holm([Tail(p, log10(p)) for p in (0.01, 0.04, 0.03, 0.005)])
    if [round(tail.p, 12) for tail in adjusted] != [0.03, 0.06, 0.06, 0.02]:
        raise SelfCheckError("The check before the run failed: Holm's adjustment.")


def _words(what: str, expected: str, computed: float) -> str:
    return (
        f"The check before the run failed: {what} should be {expected} and came out as {computed!r}. "
        "The installation is damaged or altered; install it anew before computing anything."
    )
