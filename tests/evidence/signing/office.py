"""An invented laboratory that signs: authority, three people with certificates, one real report."""

from dataclasses import dataclass, field, replace
from datetime import UTC, datetime, timedelta, timezone
from functools import cache

from assayfolio.evidence.signing.authority import (
    certificate_request,
    certified_identity,
    certify,
    found_authority,
    revocation_list,
)
from assayfolio.evidence.signing.identities import KeyIdentity, fingerprint, new_key
from assayfolio.evidence.signing.pades import LongTerm, SignedReport, sign
from assayfolio.evidence.signing.records import record_bytes
from assayfolio.evidence.signing.statement import Statement
from assayfolio.evidence.signing.trust import Trust
from assayfolio.evidence.signing.validation import ReportFindings, ReportOnFile, validate
from assayfolio.report.render import render_report
from report.cases import CASES

LABORATORY = "Tarn Valley Water Laboratory"
SEAL = "5e" * 32
FOUNDED = datetime(2026, 1, 5, 8, 0, tzinfo=UTC)
SIGNED = datetime(2026, 12, 1, 10, 5, 7, tzinfo=timezone(timedelta(hours=1)))
CHECKED = datetime(2026, 12, 24, 9, 0, tzinfo=UTC)
PEOPLE = {
    "author": ("Ada Meadow", "ameadow", "I performed this analysis as planned"),
    "reviewer": ("Björn Łęcki", "blecki", "I checked data, plan and result"),
    "approver": ("Chiara Fell", "cfell", "I approve this report"),
}


@dataclass(frozen=True)
class Office:
    """The authority, and a certificate with its key for each role."""

    authority: KeyIdentity
    people: dict[str, KeyIdentity]

    @property
    def enrolled(self) -> dict[str, str]:
        """Whom each enrolled certificate stands for."""
        return {fingerprint(self.people[role].certificate): PEOPLE[role][0] for role in self.people}

    def list_of(self, number: int, *revoked) -> bytes:
        """A revocation list, current for the whole time in which the tests play."""
        return revocation_list(self.authority, number, revoked, FOUNDED, 365 * 18)

    @property
    def trust(self) -> Trust:
        """What the laboratory itself goes by."""
        return Trust(
            anchors=(self.authority.certificate,),
            revocation_lists=(self.list_of(1),),
            enrolled=self.enrolled,
        )


@dataclass(frozen=True)
class OnFile:
    """A report on file, what is believed, and when it is looked at."""

    report: ReportOnFile
    trust: Trust
    when: datetime = CHECKED
    kept: tuple[bytes, ...] = field(default=())

    def findings(self) -> ReportFindings:
        """What the check says."""
        return validate(self.report, self.trust, self.when)

    def with_pdf(self, pdf: bytes) -> "OnFile":
        """The same with another PDF."""
        return replace(self, report=replace(self.report, pdf=pdf))

    def with_records(self, records: dict[str, bytes]) -> "OnFile":
        """The same with other records."""
        return replace(self, report=replace(self.report, records=records))


def certified(authority: KeyIdentity, person: str, account: str, start=FOUNDED, days=15 * 365) -> KeyIdentity:
    """A person's fresh key with a certificate of `authority`."""
    key = new_key()
    request = certificate_request(person, account, key)
    return certified_identity(authority, certify(authority, request, (person, account), (start, days)), key)


def open_office() -> Office:
    """A laboratory with its people."""
    authority = found_authority(LABORATORY, FOUNDED, 20)
    people = {role: certified(authority, name, account) for role, (name, account, _) in PEOPLE.items()}
    return Office(authority, people)


@cache
def office() -> Office:
    """The one laboratory that all tests share."""
    return open_office()


@cache
def unsigned_report(case: str = "balanced") -> bytes:
    """A report as the renderer makes it."""
    return render_report(CASES[case]()).pdf


def statement(role: str, time: datetime | None = None, **changes) -> Statement:
    """What the person with this role states; an hour after the one before."""
    name, _, meaning = PEOPLE[role]
    moment = SIGNED + timedelta(hours=list(PEOPLE).index(role)) if time is None else time
    return replace(Statement(role, role, name, meaning, moment, SEAL), **changes)


def signed_by(
    pdf: bytes,
    role: str,
    time: datetime | None = None,
    above: LongTerm | None = None,
    by: Office | None = None,
) -> SignedReport:
    """The report with the signature of the person with this role."""
    people = (by or office()).people
    return sign(pdf, unsigned_report(), statement(role, time), people[role], above)


def signed_in_turn(*roles: str, above: LongTerm | None = None, start: datetime | None = None) -> OnFile:
    """The report signed by these roles one after the other, with its records."""
    pdf, records, kept = unsigned_report(), {}, []
    for place, role in enumerate(roles):
        made = signed_by(pdf, role, None if start is None else start + timedelta(seconds=place), above)
        pdf, records = made.pdf, records | {made.record.name: record_bytes(made.record)}
        kept.append(pdf)
    report = ReportOnFile(pdf, unsigned_report(), SEAL, records)
    return OnFile(report, office().trust, kept=tuple(kept))


@cache
def signed_report() -> OnFile:
    """The report with all three signatures."""
    return signed_in_turn("author", "reviewer", "approver")
