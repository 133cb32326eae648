"""The laboratory as typed, frozen values: what `lab.yaml` and `people.yaml` say, no more."""

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal, get_args

PersonRole = Literal["author", "runner", "reviewer", "approver", "quality-assurance", "administrator"]
Profile = Literal["regulated"]
WitnessKind = Literal["file", "folder", "time-stamp"]
LaboratoryRequirement = Literal["pre-registration", "approved-protocol", "people", "witness"]

PERSON_ROLES: tuple[PersonRole, ...] = get_args(PersonRole)
PROFILES: tuple[Profile, ...] = get_args(Profile)
RETENTION_KEYS = ("class", "years")
WITNESS_KINDS: tuple[WitnessKind, ...] = get_args(WitnessKind)
LABORATORY_REQUIREMENTS: tuple[LaboratoryRequirement, ...] = get_args(LaboratoryRequirement)
SEPARATION_KEYS = ("reviewer-is-not-runner", "approver-is-not-author")
SIGNATURE_KEYS = ("time-stamp", "time-stamp-certificate", "long-term", "lock-minutes", "policy")
PEOPLE_FILE_KEYS = ("people",)
PERSON_KEYS = ("person", "account", "roles", "qualification")


@dataclass(frozen=True, slots=True)
class Person:
    """One entry of `people:` - a person, the one account he works under, and what he may do.

    `qualification` is a reference to the record of his training; None where the file has none.
    """

    person: str
    account: str
    roles: tuple[PersonRole, ...]
    qualification: str | None = None


@dataclass(frozen=True, slots=True)
class People:
    """`people.yaml` - everybody who works here; no account and no person twice."""

    people: tuple[Person, ...]

    def of(self, account: str) -> Person | None:
        """The person who works under `account`, or None where nobody does."""
        return next((person for person in self.people if person.account == account), None)

    def having(self, roles: Iterable[str]) -> tuple[Person, ...]:
        """Everybody who has one of `roles`, in the order of the file."""
        wanted = frozenset(roles)
        return tuple(person for person in self.people if wanted.intersection(person.roles))


@dataclass(frozen=True, slots=True)
class Separation:
    """`separation:` - which two acts on one record need two persons."""

    reviewer_is_not_runner: bool = True
    approver_is_not_author: bool = True


@dataclass(frozen=True, slots=True)
class Witness:
    """One entry of `witnesses:` - a place outside the workspace that is told of every trail head.

    `target` is the absolute path of a file or a folder, or the address of a time-stamp authority.
    """

    kind: WitnessKind
    target: str


@dataclass(frozen=True, slots=True)
class SignatureSettings:
    """`signatures:` - how reports are signed electronically.

    `time_stamp` is the address of a time-stamp authority, None for the signer's clock alone;
    `time_stamp_certificate` the SHA-256 of the certificate by which its stamps are believed; `long_term` puts
    certificates and revocation lists into the PDF; `lock_minutes` is how long nobody signs under an account
    after three wrong passphrases in a row; `policy` the reference of the laboratory's policy on signatures.
    """

    time_stamp: str | None = None
    time_stamp_certificate: str | None = None
    long_term: bool = False
    lock_minutes: int = 15
    policy: str | None = None


@dataclass(frozen=True, slots=True)
class Retention:
    """`retention:` - how long folios are kept: the class under which the laboratory lists them, and years."""

    name: str
    years: int


@dataclass(frozen=True, slots=True)
class Laboratory:
    """`lab.yaml` - who issues the reports, how they look, what every study has to contain, and who checks.

    With a `profile`, `require` and the other settings hold its values already. `one_person`: the laboratory
    has one person, so nothing needs a second one. `log_reading`: commands that only show leave an entry too.
    `review_before_approval`: a run's trail is reviewed before the run is approved.
    """

    name: str
    address: tuple[str, ...] = ()
    note: str | None = None
    accent: str = "#0f5b66"
    paper: Literal["A4", "Letter"] = "A4"
    require: tuple[str, ...] = ()
    wait_seconds: int = 10
    profile: Profile | None = None
    one_person: bool = False
    log_reading: bool = False
    review_before_approval: bool = True
    separation: Separation = Separation()
    witnesses: tuple[Witness, ...] = ()
    retention: Retention | None = None
    signatures: SignatureSettings = SignatureSettings()
