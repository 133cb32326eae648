"""What a study asks for that this version does not compute yet, and what a laboratory wants of every study.

A definition may be right and still ask for more than there is. It is then refused as a whole: nothing that
was planned is left out in silence.
"""

from collections.abc import Callable, Iterable
from dataclasses import dataclass

from assayfolio.errors import Fault, NotAvailableError, Place, StudyError
from assayfolio.study.plan import Laboratory, StudyDefinition
from assayfolio.study.vocabulary import Requirement
from assayfolio.version import VERSION


@dataclass(frozen=True, slots=True)
class _Missing:
    """A part that is not computed yet: the key it stands under, whether a study asks for it, what to do."""

    key: str
    what: str
    asked: Callable[[StudyDefinition], bool]
    advice: str


_NOT_YET = (
    _Missing(
        "data.missing",
        "an analysis that passes over missing values (`missing: omit`)",
        lambda study: study.data.missing != "refuse",
        "use `missing: refuse` and a data file without gaps",
    ),
    _Missing(
        "data.below-limit",
        "an analysis of values below a limit (`below-limit` other than `refuse`)",
        lambda study: study.data.below_limit != "refuse",
        "use `below-limit: refuse`",
    ),
)


def check_available(study: StudyDefinition) -> None:
    """Refuse a study that asks for what this version does not compute.

    Raises NotAvailableError that lists every such part with its place, in the order of the file.
    """
    faults = _in_order(
        Fault(
            study.place_of(part.key) or _start(study),
            f"{part.what}: not computed by this version",
            part.advice,
        )
        for part in _NOT_YET
        if part.asked(study)
    )
    if not faults:
        return
    parts = "1 part" if len(faults) == 1 else f"{len(faults)} parts"
    headline = (
        f"{faults[0].place.file}: the study definition is well formed, but this version ({VERSION}) does not "
        f"compute {parts} of it yet; nothing was analysed"
    )
    raise NotAvailableError(headline, faults)


def _start(study: StudyDefinition) -> Place:
    return study.places[0][1]


def _in_order(faults: Iterable[Fault]) -> tuple[Fault, ...]:
    return tuple(sorted(faults, key=lambda fault: (fault.place.line or 0, fault.place.column or 0)))


def _of_study(key: str) -> Callable[[StudyDefinition], tuple[Place, ...]]:
    return lambda study: (study.place_of(key) or _start(study),)


def _inside_data(study: StudyDefinition) -> tuple[Place, ...]:
    return (study.place_of("data") or _start(study),)


def _without_source(study: StudyDefinition) -> tuple[Place, ...]:
    return tuple(plan.place for plan in study.equivalence if plan.margin_source is None)


@dataclass(frozen=True, slots=True)
class _Wanted:
    """What a laboratory can require: the key, whether a study has it, and where it would belong."""

    key: str
    holds: Callable[[StudyDefinition], bool]
    places: Callable[[StudyDefinition], tuple[Place, ...]]


_WANTED: dict[Requirement, _Wanted] = {
    "unit": _Wanted(
        "data.unit",
        lambda study: all(study.data.unit_of(response) is not None for response in study.data.response),
        _inside_data,
    ),
    "order": _Wanted("data.order", lambda study: study.data.order is not None, _inside_data),
    "levels": _Wanted("data.levels", lambda study: study.data.levels is not None, _inside_data),
    "replicates": _Wanted("data.replicates", lambda study: study.data.replicates is not None, _inside_data),
    "purpose": _Wanted("purpose", lambda study: study.purpose is not None, _of_study("purpose")),
    "comparisons": _Wanted("comparisons", lambda study: bool(study.comparisons), _of_study("comparisons")),
    "equivalence": _Wanted("equivalence", lambda study: bool(study.equivalence), _of_study("equivalence")),
    "margin-source": _Wanted(
        "equivalence.margin-source", lambda study: not _without_source(study), _without_source
    ),
    "checks": _Wanted(
        "checks",
        lambda study: bool(study.checks.equal_variances or study.checks.normality),
        _of_study("checks"),
    ),
    "precision": _Wanted(
        "precision",
        lambda study: study.precision is not None and study.precision.estimate,
        _of_study("precision"),
    ),
    "power": _Wanted("power", lambda study: study.power is not None, _of_study("power")),
    "sign-off": _Wanted("sign-off", lambda study: bool(study.sign_off), _of_study("sign-off")),
}


def check_required(study: StudyDefinition, laboratory: Laboratory) -> None:
    """Refuse a study that leaves out what the laboratory's `require` wants of every study.

    `margin-source` wants a source for each margin that a study has. Raises StudyError that names everything
    that is missing, each at the mapping that should hold it.
    """
    missing = [
        (requirement, wanted)
        for requirement, wanted in _WANTED.items()
        if requirement in laboratory.require and not wanted.holds(study)
    ]
    faults = _in_order(
        Fault(
            place,
            f"`{wanted.key}` is missing, which {laboratory.name} requires of every study",
            f"add `{requirement}: ...`",
        )
        for requirement, wanted in missing
        for place in wanted.places(study)
    )
    if faults:
        file = _start(study).file
        headline = f"{file}: the study definition lacks what the laboratory requires; nothing was analysed"
        raise StudyError(headline, faults)


def check_plannable(study: StudyDefinition) -> None:
    """Refuse to compute the power of a study that does not say what for, or at which numbers of values.

    Raises StudyError that names each of `power`, `data.levels` and `data.replicates` that is missing.
    """
    needed: tuple[Requirement, ...] = ("power", "levels", "replicates")
    faults = _in_order(
        Fault(place, f"`{_WANTED[key].key}` is missing, without which no power can be computed", _ADD[key])
        for key in needed
        if not _WANTED[key].holds(study)
        for place in _WANTED[key].places(study)
    )
    if faults:
        raise StudyError(f"{_start(study).file}: the power of this study cannot be computed", faults)


_ADD: dict[Requirement, str] = {
    "power": "add it, such as `power: {difference: 0.5, sigma: 0.3, target: 0.9}`",
    "levels": "list the levels that will be compared",
    "replicates": "say how many values each level will have",
}
