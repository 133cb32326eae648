"""Signing a sealed report: look at it, agree to the meaning, prove who it is, add the signature.

Nothing sealed is touched: the signed report lies beside, in `sign-off/`. The signature is made and put
together first, then entered in the audit trail, then moved into place; stopped before the entry it never was,
stopped after it the next command that writes moves it. Nobody signs without a terminal, and nobody's key
stays open: the passphrase is asked for at each signature.
"""

from collections.abc import Mapping, Sequence
from contextlib import ExitStack
from dataclasses import dataclass
from pathlib import Path

from assayfolio.canonical import Json
from assayfolio.errors import BusyError, InputError, MachineError
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.keyring import SIGNERS_FOLDER, read_keyring
from assayfolio.evidence.locks import folio_lock
from assayfolio.evidence.moves import rules_of
from assayfolio.evidence.outcomes import Verification
from assayfolio.evidence.sign_offs import FOLDER as SIGN_OFF_FOLDER
from assayfolio.evidence.sign_offs import (
    REPORT,
    discard_staged,
    publish_signature,
    signatures_of,
    stage_signature,
)
from assayfolio.evidence.signers import SIGNED_ENTRY
from assayfolio.evidence.signing.pades import SignedReport
from assayfolio.evidence.signing.pades import sign as sign_pdf
from assayfolio.evidence.signing.records import record_bytes
from assayfolio.evidence.signing.statement import Statement, rfc3339
from assayfolio.evidence.signing.trust import Trust
from assayfolio.evidence.signing.validation import ReportOnFile, validate
from assayfolio.evidence.trail import read_trail
from assayfolio.evidence.verification import verify_workspace
from assayfolio.workflow.audit import named_witnesses
from assayfolio.workflow.authority import refused
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.dialogue import Dialogue
from assayfolio.workflow.signable import Field, Signable, fields_of, signable
from assayfolio.workflow.signature_parts import chain_of, entry_details, files_of, long_term
from assayfolio.workflow.signer_keys import moment_now, opened, person_identity
from assayfolio.workflow.signing_case import COMMAND, SigningCase, admitted, case_of, time_of_signing
from assayfolio.workflow.signing_summary import summary_lines
from assayfolio.workflow.workspace import Workspace


@dataclass(frozen=True, slots=True)
class SignedFolio:
    """A signature as it was made: of what, by whom, in which field, and where the signed report lies."""

    subject: str
    field: str
    person: str
    meaning: str
    time: str
    level: str
    entry: TrailEntry
    report: Path
    sha256: str

    def lines(self) -> list[str]:
        """For people."""
        return [
            f"{self.subject} is signed: {self.field}, {self.person}, {self.time}, {self.level}",
            f"  meaning  {self.meaning}",
            f"  entry    {self.entry.seq}",
            f"  report   {self.report}",
            f"  SHA-256  {self.sha256}",
        ]

    def document(self) -> Mapping[str, Json]:
        """For programs."""
        return {
            "subject": self.subject,
            "field": self.field,
            "person": self.person,
            "meaning": self.meaning,
            "time": self.time,
            "level": self.level,
            "seq": self.entry.seq,
            "report": str(self.report),
            "sha256": self.sha256,
        }


def sign_folio(workspace: Workspace, named: Path, role: str, dialogue: Dialogue) -> SignedFolio:
    """Have the person behind this account sign the folio `named` in `role`.

    Raises NotAllowedError, after an entry of the attempt, where he may not, it is not his turn, or folio,
    trail or earlier signatures do not verify; InputError where he does not agree to a meaning;
    SigningLockedError after three wrong passphrases; StampUnavailableError and TokenUnavailableError where a
    time stamp or the token is out of reach. Nothing has been changed then, entries apart.
    """
    case = case_of(workspace, signable(workspace, named), role)
    verification = _require_verified(case)
    lines = summary_lines(case.target, case.entries, verification, rules_of(case.laboratory))
    for line in lines:
        dialogue.tell(line)
    field = _chosen_field(case, dialogue)
    keyring = read_keyring(workspace.root)
    with ExitStack() as held:
        chain = chain_of(case, keyring)
        place = workspace.root / SIGNERS_FOLDER
        identity = opened(
            workspace,
            dialogue,
            f"{case.enrolled.person}, to sign {case.target.subject} as {role}",
            COMMAND,
            lambda secret: person_identity(place, case.enrolled, chain, held, secret),
        )
        held.enter_context(folio_lock(case.target.folio.parent, case.target.folio.name))
        statement = Statement(
            field=field.name,
            role=field.role,
            person=case.enrolled.person,
            meaning=field.meaning,
            time=time_of_signing(),
            seal=case.target.seal,
        )
        above = long_term(case, keyring, chain)
        signed = sign_pdf(case.target.newest, case.target.unsigned, statement, identity, above)
        _require_sound(case.target, signed)
        return _entered(case, signed, files_of(case, signed, chain, keyring), lines)


def _require_sound(target: Signable, signed: SignedReport) -> None:
    """Raise MachineError unless the report that was just signed passes its check, whoever is trusted."""
    folder = target.folio / SIGN_OFF_FOLDER
    records = {path.name: path.read_bytes() for path in folder.glob("*.json")}
    records[signed.record.name] = record_bytes(signed.record)
    on_file = ReportOnFile(signed.pdf, target.unsigned, target.seal, records)
    found = validate(on_file, Trust(), moment_now())
    if found.outcome == "failed":
        raise MachineError(f"The signature that was made does not verify: {'; '.join(found.failures)}")


def _require_verified(case: SigningCase) -> Verification:
    """What verification says. Raises NotAllowedError, after an entry, where something does not verify."""
    witnesses = named_witnesses(case.workspace)
    verification = verify_workspace(case.workspace.runs, [case.target.folio], witnesses)
    failed = verification.with_outcome("failed")
    if not failed:
        return verification
    words = "; ".join(f"check {each.number}, {each.subject}: {each.notes[0]}" for each in failed[:3])
    more = f" and {len(failed) - 3} more" if len(failed) > 3 else ""
    with trail_book(case.workspace, case.laboratory.wait_seconds) as trail:
        why = f"{case.target.subject} does not verify: {words}{more}"
        details: dict[str, Json] = {"subject": case.target.subject, "role": case.role}
        raise refused(trail, COMMAND, why, "a folio and a trail that verify", details)


def _chosen_field(case: SigningCase, dialogue: Dialogue) -> Field:
    """The field that the person agrees to sign, by its meaning."""
    filled = {each.field for each in signatures_of(case.entries, case.target.subject)}
    fields = [
        each
        for each in fields_of(case.target.definition)
        if each.role == case.role and each.name not in filled
    ]
    if not fields:
        raise InputError(f"The plan of {case.target.subject} has no field left for {case.role}.")
    place = dialogue.choose("What your signature means", [each.meaning for each in fields])
    if place is None:
        raise InputError("No meaning was chosen; nothing was signed.")
    return fields[place]


def _entered(
    case: SigningCase, signed: SignedReport, files: Mapping[str, bytes], shown: Sequence[str]
) -> SignedFolio:
    """Enter the signature and move it into place, where it is still in order."""
    target, record = case.target, signed.record
    stated = record.statement
    try:
        stage_signature(target.folio, files)
        with trail_book(case.workspace, case.laboratory.wait_seconds) as trail:
            _, enrolled = admitted(case.workspace, trail, target, case.role, case.laboratory)
            now = len(signatures_of(trail.entries, target.subject))
            if now != case.before or enrolled != case.enrolled:
                raise BusyError(f"{target.subject} was signed by somebody else meanwhile; look at it again.")
            entry = trail.append(
                SIGNED_ENTRY, target.subject, None, entry_details(case, signed, files, shown)
            )
            try:
                publish_signature(target.folio)
            except MachineError as error:
                raise MachineError(
                    f"{error}\nThe signature is entered (entry {entry.seq}) and complete, but not in its "
                    "place; the next command that writes puts it there."
                ) from error
    except BaseException:
        if not _is_entered(case):
            discard_staged(target.folio)
        raise
    return SignedFolio(
        subject=target.subject,
        field=stated.field,
        person=stated.person,
        meaning=stated.meaning,
        time=rfc3339(stated.time),
        level=record.level,
        entry=entry,
        report=target.folio / SIGN_OFF_FOLDER / REPORT,
        sha256=record.pdf.sha256,
    )


def _is_entered(case: SigningCase) -> bool:
    """Whether the signature of this case is in the trail; what was staged for it has to stay then."""
    try:
        return len(signatures_of(read_trail(case.workspace.runs).entries, case.target.subject)) > case.before
    except MachineError:
        return True
