"""What a laboratory wants of every study, and what a study must say before its power can be computed."""

from collections.abc import Callable, Iterable
from dataclasses import dataclass

from assayfolio.errors import Fault, Place, StudyError
from assayfolio.study.plan import Laboratory, MeasurementKey, StudyDefinition
from assayfolio.study.vocabulary import MEASUREMENT_KEYS, Requirement


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


def _inside_measurement(study: StudyDefinition) -> tuple[Place, ...]:
    return (study.place_of("measurement") or _start(study),)


@dataclass(frozen=True, slots=True)
class _Wanted:
    """What a laboratory can require: the key, whether a study has it, and where it would belong."""

    key: str
    holds: Callable[[StudyDefinition], bool]
    places: Callable[[StudyDefinition], tuple[Place, ...]]


def _measurement(key: MeasurementKey) -> _Wanted:
    return _Wanted(
        f"measurement.{key}",
        lambda study: any(fact.key == key for fact in study.measurement),
        _inside_measurement,
    )


_WANTED: dict[Requirement, _Wanted] = {
    "unit": _Wanted(
        "data.unit",
        lambda study: all(study.data.unit_of(response) is not None for response in study.data.response),
        _inside_data,
    ),
    "order": _Wanted("data.order", lambda study: study.data.order is not None, _inside_data),
    "levels": _Wanted("data.levels", lambda study: study.data.levels is not None, _inside_data),
    "replicates": _Wanted("data.replicates", lambda study: study.data.replicates is not None, _inside_data),
    **{key: _measurement(key) for key in MEASUREMENT_KEYS},
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
