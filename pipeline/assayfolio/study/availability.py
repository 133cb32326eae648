"""What a study asks for that this version does not compute yet, and what a laboratory wants of every study.

A definition may be right and still ask for more than there is. It is then refused as a whole: nothing that
was planned is left out in silence.
"""

from collections.abc import Callable, Iterator
from dataclasses import dataclass

from assayfolio.errors import Fault, NotAvailableError, Place, StudyError
from assayfolio.study.plan import Adjustment, AgainstReference, AllPairs, Laboratory, StudyDefinition
from assayfolio.study.vocabulary import Requirement
from assayfolio.version import VERSION

AVAILABLE_FOR_PAIRS: tuple[Adjustment, ...] = ("none", "bonferroni", "sidak", "holm", "tukey-kramer")
AVAILABLE_AGAINST: tuple[Adjustment, ...] = ("none", "bonferroni", "sidak", "holm")
AVAILABLE_FOR_CONTRASTS: tuple[Adjustment, ...] = ("none",)
AVAILABLE_CHECKS = ("brown-forsythe", "shapiro-wilk")


@dataclass(frozen=True, slots=True)
class _Missing:
    """A part that is not computed yet: the key it stands under, whether a study asks for it, what to do."""

    key: str
    what: str
    asked: Callable[[StudyDefinition], bool]
    advice: str


_NOT_YET = (
    _Missing(
        "data.response",
        "more than one response in a study",
        lambda study: len(study.data.response) > 1,
        "write one study for each response",
    ),
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
    _Missing(
        "design.effects",
        "an analysis of randomly chosen levels (`effects: random`)",
        lambda study: study.design.effects == "random",
        "use `effects: fixed` if the levels themselves are of interest",
    ),
    _Missing(
        "design.variances",
        "an analysis with a variance for each level (`variances: separate`)",
        lambda study: study.design.variances == "separate",
        "use `variances: pooled` if one variance for all levels can be defended",
    ),
    _Missing(
        "equivalence",
        "equivalence tests",
        lambda study: bool(study.equivalence),
        "leave `equivalence` out",
    ),
    _Missing(
        "outliers",
        "outlier tests",
        lambda study: study.outliers is not None,
        "leave `outliers` out",
    ),
    _Missing(
        "checks.equal-variances",
        "a check of equal variances other than brown-forsythe",
        lambda study: study.checks.equal_variances not in {None, *AVAILABLE_CHECKS},
        "use `equal-variances: brown-forsythe`",
    ),
    _Missing(
        "checks.normality",
        "a check of normality other than shapiro-wilk",
        lambda study: study.checks.normality not in {None, *AVAILABLE_CHECKS},
        "use `normality: shapiro-wilk`",
    ),
    _Missing(
        "precision",
        "estimates of precision",
        lambda study: study.precision is not None and study.precision.estimate,
        "leave `precision` out, or write `estimate: false`",
    ),
    _Missing("power", "power", lambda study: study.power is not None, "leave `power` out"),
    _Missing(
        "criteria",
        "acceptance criteria",
        lambda study: bool(study.criteria),
        "leave `criteria` out",
    ),
)


def check_available(study: StudyDefinition) -> None:
    """Refuse a study that asks for what this version does not compute.

    Raises NotAvailableError that lists every such part with its place, in the order of the file.
    """
    faults = [*_missing_parts(study), *_missing_adjustments(study)]
    if not faults:
        return
    faults.sort(key=lambda fault: (fault.place.line or 0, fault.place.column or 0))
    parts = "1 part" if len(faults) == 1 else f"{len(faults)} parts"
    headline = (
        f"{faults[0].place.file}: the study definition is well formed, but this version ({VERSION}) does not "
        f"compute {parts} of it yet; nothing was analysed"
    )
    raise NotAvailableError(headline, tuple(faults))


def _missing_parts(study: StudyDefinition) -> Iterator[Fault]:
    for part in _NOT_YET:
        if part.asked(study):
            yield _fault(study.place_of(part.key) or _start(study), part.what, part.advice)


def _missing_adjustments(study: StudyDefinition) -> Iterator[Fault]:
    for comparison in study.comparisons:
        if isinstance(comparison, AllPairs):
            family, available = "all pairs", AVAILABLE_FOR_PAIRS
        elif isinstance(comparison, AgainstReference):
            family, available = "comparisons against a reference", AVAILABLE_AGAINST
        else:
            family, available = "a contrast", AVAILABLE_FOR_CONTRASTS
        if comparison.adjust not in available:
            what = f"`adjust: {comparison.adjust}` for {family} (comparison `{comparison.name}`)"
            yield _fault(comparison.place, what, f"available here: {', '.join(available)}")


def _fault(place: Place, what: str, advice: str) -> Fault:
    return Fault(place, f"{what}: not computed by this version", advice)


def _start(study: StudyDefinition) -> Place:
    return study.places[0][1]


_HOLDS: dict[Requirement, Callable[[StudyDefinition], bool]] = {
    "unit": lambda study: study.data.unit is not None,
    "purpose": lambda study: study.purpose is not None,
    "levels": lambda study: study.data.levels is not None,
    "replicates": lambda study: study.data.replicates is not None,
    "comparisons": lambda study: bool(study.comparisons),
    "checks": lambda study: study.checks.equal_variances is not None or study.checks.normality is not None,
    "sign-off": lambda study: bool(study.sign_off),
}
_INSIDE_DATA = ("unit", "levels", "replicates")


def check_required(study: StudyDefinition, laboratory: Laboratory) -> None:
    """Refuse a study that leaves out what the laboratory's `require` wants of every study.

    Raises StudyError that names everything that is missing, each at the mapping that should hold it.
    """
    faults: list[Fault] = []
    for requirement, holds in _HOLDS.items():
        if requirement not in laboratory.require or holds(study):
            continue
        inside = requirement in _INSIDE_DATA
        place = study.place_of("data") if inside else study.place_of(requirement)
        key = f"data.{requirement}" if inside else requirement
        found = f"`{key}` is missing, which {laboratory.name} requires of every study"
        faults.append(Fault(place or _start(study), found, f"add `{requirement}: ...`"))
    if not faults:
        return
    faults.sort(key=lambda fault: (fault.place.line or 0, fault.place.column or 0))
    headline = (
        f"{_start(study).file}: the study definition lacks what the laboratory requires; nothing was analysed"
    )
    raise StudyError(headline, tuple(faults))
