"""Everybody who signs or signed here: certificate, state, and what waits to be confirmed."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta

from assayfolio.canonical import Json
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.signers import (
    SIGNER_TESTED,
    Enrolled,
    Signers,
    locked_until,
    signers_of,
    wrong_in_row,
)
from assayfolio.evidence.trail import read_trail
from assayfolio.workflow.signer_keys import moment_now
from assayfolio.workflow.workspace import Workspace

SOON = timedelta(days=60)


@dataclass(frozen=True, slots=True)
class SignerRow:
    """One certificate: whose, which, until when, in which state, and when its key was tested last."""

    person: str
    account: str
    certificate: str
    not_after: str
    state: str
    tested: str | None
    wrong: int


@dataclass(frozen=True, slots=True)
class SignerList:
    """Every certificate, the authority's fingerprint, the newest revocation list, open proposals."""

    authority: str | None
    list_number: int | None
    rows: tuple[SignerRow, ...]
    proposals: tuple[tuple[str, str, str, int], ...]

    def lines(self) -> list[str]:
        """For people."""
        if self.authority is None and not self.rows and not self.proposals:
            return ["Nobody is enrolled to sign. Each person begins with: assayfolio signer enrol"]
        lines = [f"Authority        {self.authority or 'none'}"]
        if self.list_number is not None:
            lines.append(f"Revocation list  number {self.list_number}")
        for row in self.rows:
            lines.append(f"{row.person} ({row.account}): {row.state}, until {row.not_after[:10]}")
            lines.append(f"  certificate  {row.certificate}")
            lines.append(f"  key tested   {row.tested or 'never by itself'}")
            if row.wrong:
                lines.append(f"  wrong passphrases in a row: {row.wrong}")
        for deed, person, account, seq in self.proposals:
            lines.append(
                f"Proposed: {deed} {person} ({account}), entry {seq}; to be confirmed by another person"
            )
        return lines

    def document(self) -> Mapping[str, Json]:
        """For programs."""
        return {
            "authority": self.authority,
            "revocation_list": self.list_number,
            "signers": [
                {
                    "person": row.person,
                    "account": row.account,
                    "certificate": row.certificate,
                    "not_after": row.not_after,
                    "state": row.state,
                    "tested": row.tested,
                    "wrong_in_row": row.wrong,
                }
                for row in self.rows
            ],
            "proposals": [
                {"deed": deed, "person": person, "account": account, "seq": seq}
                for deed, person, account, seq in self.proposals
            ],
        }


def signer_list(workspace: Workspace) -> SignerList:
    """Everybody who was ever enrolled, by the audit trail. Raises MachineError where it cannot be read."""
    entries = read_trail(workspace.runs).entries
    signers, now = signers_of(entries), moment_now()
    return SignerList(
        authority=signers.authority,
        list_number=signers.lists[-1].number if signers.lists else None,
        rows=tuple(_row(each, entries, now) for each in signers.enrolled),
        proposals=_proposals(signers),
    )


def _proposals(signers: Signers) -> tuple[tuple[str, str, str, int], ...]:
    return tuple((one.deed, one.person, one.account, one.entry.seq) for one in signers.proposals.values())


def _row(each: Enrolled, entries: Sequence[TrailEntry], now: datetime) -> SignerRow:
    tested = [
        entry.time[:10]
        for entry in entries
        if entry.action == SIGNER_TESTED and entry.details.get("certificate") == each.certificate
    ]
    wrong = wrong_in_row(entries, each.account) if each.ended is None else 0
    return SignerRow(
        each.person,
        each.account,
        each.certificate,
        each.not_after,
        _state(each, entries, now),
        tested[-1] if tested else None,
        wrong,
    )


def _state(each: Enrolled, entries: Sequence[TrailEntry], now: datetime) -> str:
    if each.revoked is not None:
        return f"withdrawn by entry {each.revoked}"
    if each.ended is not None:
        return f"signs nothing since entry {each.ended}"
    end = datetime.fromisoformat(each.not_after)
    if end <= now:
        return "ended: to be renewed"
    until = locked_until(entries, each.account)
    if until is not None and until > now:
        return f"locked until {until:%Y-%m-%d %H:%M} UTC"
    return "in force, to be renewed soon" if end - now < SOON else "in force"
