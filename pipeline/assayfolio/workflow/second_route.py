"""How the two routes of computation agree, for the record of a run; a disagreement fails the run."""

from collections.abc import Mapping, Sequence
from math import isfinite

from assayfolio.canonical import Json
from assayfolio.errors import MachineError
from assayfolio.statistics.second_route import Agreement, SecondRoute

Routes = Sequence[tuple[str, SecondRoute]]


class SecondRouteError(MachineError):
    """Two independent computations of the same quantity differ by more than rounding explains."""


def second_route_record(routes: Routes) -> Mapping[str, Json]:
    """For each response: every quantity with its agreement in digits, its bound, and what has none.

    A bound is null where the conditioning of the data leaves no digit to compare.
    """
    return {
        response: {
            "agreements": [_agreement(agreement) for agreement in route.agreements],
            "not_compared": [
                {"quantity": item.quantity, "reason": item.reason} for item in route.not_compared
            ],
        }
        for response, route in routes
    }


def _agreement(found: Agreement) -> Mapping[str, Json]:
    return {
        "quantity": found.quantity,
        "digits": round(found.digits, 1),
        "bound": float(f"{found.bound:.1e}") if isfinite(found.bound) else None,
        "holds": found.holds,
        "compared": found.compared,
        "of": found.of,
        "at": found.at,
    }


def require_agreement(routes: Routes) -> None:
    """Raise SecondRouteError naming every quantity on which the two routes do not agree."""
    failures = [
        f"{response}, {failure.quantity} ({failure.at}): {failure.digits:.1f} digits, "
        f"where {failure.bound:.1e} is the largest relative difference that rounding explains"
        for response, route in routes
        for failure in route.failures
    ]
    if failures:
        raise SecondRouteError(
            "The second route of computation does not agree with the first, so nothing is reported: "
            f"{'; '.join(failures)}. The installation is damaged or altered, or the program has a fault; "
            "keep the folio and report it."
        )
