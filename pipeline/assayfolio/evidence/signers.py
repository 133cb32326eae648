"""Who may sign with which certificate, as the audit trail has it; nothing else says so.

Two persons enrol a certificate, renew it or withdraw it: `signer-proposed` by one (with the `deed`), then
`signer-enrolled`, `signer-renewed` or `signer-revoked` by another, unless the laboratory has one person. A
certificate that was proposed to be withdrawn signs nothing from that entry on. `authority-founded` pins the
laboratory's own certificate authority. Whoever holds the authority's key alone can certify a key, but nobody
believes a certificate that no entry enrols.
"""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from datetime import datetime
from typing import Literal, get_args

from assayfolio.canonical import Json
from assayfolio.evidence.entries import TrailEntry, is_digest

AUTHORITY_FOUNDED = "authority-founded"
SIGNER_PROPOSED = "signer-proposed"
SIGNER_ENROLLED = "signer-enrolled"
SIGNER_RENEWED = "signer-renewed"
SIGNER_REVOKED = "signer-revoked"
SIGNER_TESTED = "signer-tested"
PASSPHRASE_WRONG = "passphrase-wrong"  # noqa: S105 - the name of an entry
SIGNING_LOCKED = "signing-locked"
SIGNED_ENTRY = "signed"
AUTHORITY = "certificate authority"
ABOUT_SIGNERS = frozenset(
    {AUTHORITY_FOUNDED, SIGNER_PROPOSED, SIGNER_ENROLLED, SIGNER_RENEWED, SIGNER_REVOKED}
)
WRONG_IN_ROW = 3

Deed = Literal["enrol", "renew", "revoke"]
DEEDS: Mapping[str, str] = {
    SIGNER_ENROLLED: "enrol",
    SIGNER_RENEWED: "renew",
    SIGNER_REVOKED: "revoke",
}


def signer_subject(account: str) -> str:
    """What the entries about a signer are about: "signer ann"."""
    return f"signer {account}"


@dataclass(frozen=True, slots=True)
class KeyPlace:
    """Where a key lies: a PKCS#12 file by its name in `configs/signers/`, or a token.

    `module` is the path of the token's PKCS#11 library, `token` its label, `label` that of the key on it.
    """

    file: str | None = None
    module: str | None = None
    token: str | None = None
    label: str | None = None

    def value(self) -> Json:
        """As an entry has it."""
        if self.file is not None:
            return {"file": self.file}
        return {"module": self.module, "token": self.token, "label": self.label}


def key_place(value: Json) -> KeyPlace | None:
    """The place that an entry names; None where it names none."""
    if not isinstance(value, Mapping) or not all(isinstance(part, str) for part in value.values()):
        return None
    texts = {key: str(part) for key, part in value.items()}
    if set(texts) == {"file"}:
        return KeyPlace(file=texts["file"])
    if set(texts) == {"module", "token", "label"}:
        return KeyPlace(module=texts["module"], token=texts["token"], label=texts["label"])
    return None


@dataclass(frozen=True, slots=True)
class Enrolled:
    """A certificate that stands for one person: by its fingerprint, with the entry that pins it.

    `ended` is the number of the entry from which on it signs nothing: it was proposed to be withdrawn, or
    replaced by a renewed one. `revoked` is that of the entry that withdrew it.
    """

    person: str
    account: str
    certificate: str
    anchor: str
    not_after: str
    key: KeyPlace
    seq: int
    time: str
    ended: int | None = None
    revoked: int | None = None

    def stood_at(self, seq: int) -> bool:
        """Whether it was in force when entry `seq` was made."""
        return self.seq < seq and (self.ended is None or seq < self.ended)


@dataclass(frozen=True, slots=True)
class Proposal:
    """A change of a signer's certificate that waits for its confirmation."""

    entry: TrailEntry
    deed: Deed
    person: str
    account: str

    def text(self, key: str) -> str | None:
        """A text among its details."""
        value = self.entry.details.get(key)
        return value if isinstance(value, str) else None


@dataclass(frozen=True, slots=True)
class PinnedList:
    """A revocation list of the laboratory's authority: its number and the SHA-256 of its DER form."""

    number: int
    sha256: str
    seq: int


@dataclass(frozen=True, slots=True)
class Signers:
    """Every certificate that was ever enrolled, in that order, and what waits to be confirmed."""

    authority: str | None
    enrolled: tuple[Enrolled, ...]
    proposals: Mapping[str, Proposal]
    lists: tuple[PinnedList, ...]

    def of(self, account: str) -> Enrolled | None:
        """The certificate that `account` signs with now, if there is one."""
        return next((each for each in self.enrolled if each.account == account and each.ended is None), None)

    def last_of(self, account: str) -> Enrolled | None:
        """The newest certificate that was enrolled for `account`, in force or not."""
        return next((each for each in reversed(self.enrolled) if each.account == account), None)

    @property
    def persons(self) -> Mapping[str, str]:
        """The person for each certificate, by its fingerprint."""
        return {each.certificate: each.person for each in self.enrolled}

    @property
    def anchors(self) -> frozenset[str]:
        """The fingerprints of the certificates that signers' certificates are believed by."""
        own = () if self.authority is None else (self.authority,)
        return frozenset((*own, *(each.anchor for each in self.enrolled)))


def signers_of(entries: Iterable[TrailEntry]) -> Signers:
    """What the entries amount to; malformed ones are left out (`verify` names them)."""
    authority: str | None = None
    enrolled: list[Enrolled] = []
    proposals: dict[str, Proposal] = {}
    lists: list[PinnedList] = []
    for entry in entries:
        if entry.action not in ABOUT_SIGNERS:
            continue
        pinned = pinned_list(entry)
        lists.extend([] if pinned is None else [pinned])
        if entry.action == AUTHORITY_FOUNDED and is_digest(entry.details.get("certificate")):
            authority = str(entry.details["certificate"])
        elif entry.action == SIGNER_PROPOSED:
            proposal = read_proposal(entry)
            if proposal is not None:
                proposals[proposal.account] = proposal
                _end(enrolled, proposal)
        elif entry.action == SIGNER_REVOKED:
            _revoke(enrolled, entry, proposals)
        else:
            _enrol(enrolled, entry, proposals)
    return Signers(authority, tuple(enrolled), proposals, tuple(lists))


def read_proposal(entry: TrailEntry) -> Proposal | None:
    """What a `signer-proposed` entry proposes; None for any other, and where it is malformed."""
    deed, person, account = (entry.details.get(key) for key in ("deed", "person", "account"))
    if entry.action != SIGNER_PROPOSED or not isinstance(person, str) or not isinstance(account, str):
        return None
    kind = next((each for each in get_args(Deed) if each == deed), None)
    return None if kind is None else Proposal(entry, kind, person, account)


def pinned_list(entry: TrailEntry) -> PinnedList | None:
    """The revocation list that an entry was made with, if there is one."""
    value = entry.details.get("revocation_list")
    if not isinstance(value, Mapping):
        return None
    number, digest = value.get("number"), value.get("sha256")
    if not isinstance(number, int) or isinstance(number, bool) or not is_digest(digest):
        return None
    return PinnedList(number, str(digest), entry.seq)


def read_enrolled(entry: TrailEntry) -> Enrolled | None:
    """What a `signer-enrolled` or `signer-renewed` entry pins; None where it is malformed."""
    names = ("person", "account", "certificate", "anchor", "not_after")
    texts = {key: value for key in names if isinstance(value := entry.details.get(key), str)}
    place = key_place(entry.details.get("key"))
    if set(texts) != set(names) or place is None:
        return None
    if not is_digest(texts["certificate"]) or not is_digest(texts["anchor"]):
        return None
    return Enrolled(
        person=texts["person"],
        account=texts["account"],
        certificate=texts["certificate"],
        anchor=texts["anchor"],
        not_after=texts["not_after"],
        key=place,
        seq=entry.seq,
        time=entry.time,
    )


def _end(enrolled: list[Enrolled], proposal: Proposal) -> None:
    """A certificate that is to be withdrawn signs nothing from the proposal on."""
    if proposal.deed != "revoke":
        return
    for place, each in enumerate(enrolled):
        if each.account == proposal.account and each.ended is None:
            enrolled[place] = replace(each, ended=proposal.entry.seq)


def _revoke(enrolled: list[Enrolled], entry: TrailEntry, proposals: dict[str, Proposal]) -> None:
    certificate = entry.details.get("certificate")
    for place, each in enumerate(enrolled):
        if each.certificate == certificate:
            ended = entry.seq if each.ended is None else each.ended
            enrolled[place] = replace(each, ended=ended, revoked=entry.seq)
            proposals.pop(each.account, None)


def _enrol(enrolled: list[Enrolled], entry: TrailEntry, proposals: dict[str, Proposal]) -> None:
    new = read_enrolled(entry)
    if new is None:
        return
    proposals.pop(new.account, None)
    for place, each in enumerate(enrolled):
        if each.account == new.account and each.ended is None:
            enrolled[place] = replace(each, ended=entry.seq)
    enrolled.append(new)


def wrong_in_row(entries: Iterable[TrailEntry], account: str) -> int:
    """How many wrong passphrases `account` has given since it last gave a right one or was locked."""
    count = 0
    for entry in entries:
        if entry.actor != account:
            continue
        if entry.action == PASSPHRASE_WRONG:
            count += 1
        elif entry.action in _PASSPHRASE_RIGHT or entry.action == SIGNING_LOCKED:
            count = 0
    return count


# Entries that are made after the passphrase of the account's own key, or of the authority's, was right.
_PASSPHRASE_RIGHT = frozenset({SIGNED_ENTRY, SIGNER_TESTED, SIGNER_ENROLLED, SIGNER_RENEWED, SIGNER_REVOKED})


def locked_until(entries: Iterable[TrailEntry], account: str) -> datetime | None:
    """Until when nobody signs under `account` after wrong passphrases; None where it was never locked."""
    until: datetime | None = None
    for entry in entries:
        stated = entry.details.get("until")
        if entry.action == SIGNING_LOCKED and entry.actor == account and isinstance(stated, str):
            until = datetime.fromisoformat(stated)
    return until
