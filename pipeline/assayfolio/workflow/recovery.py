"""What the next writer does about runs that were killed: it says so; nothing is repaired silently."""

from assayfolio.evidence.folio import is_locked, leftover_record, reopen_staged
from assayfolio.evidence.history import run_histories
from assayfolio.evidence.laboratory_folios import FOLDER, laboratory_folios
from assayfolio.evidence.protocols import PROTOCOL_INTERRUPTED, protocol_histories
from assayfolio.evidence.sign_offs import FOLDER as SIGN_OFF_FOLDER
from assayfolio.evidence.sign_offs import (
    STAGING,
    discard_staged,
    publish_signature,
    signatures_of,
    staged_as_entered,
)
from assayfolio.evidence.signers import SIGNED_ENTRY
from assayfolio.evidence.trail import TrailWriter
from assayfolio.workflow.workspace import Workspace


def found_trail(workspace: Workspace, trail: TrailWriter) -> None:
    """Begin the audit trail of a workspace that has none yet.

    `open_trail` has refused already where folios are there without a trail.
    """
    if not trail.entries:
        trail.append("founded", "workspace", f"first use of the workspace {workspace.root.name!r}")


def acknowledge_interruptions(workspace: Workspace, trail: TrailWriter) -> None:
    """Enter every run that was killed, and complete a rename that was interrupted.

    A run that was allotted, has not ended and whose lock nobody holds was killed: it gets an `interrupted`
    entry that says what was found, and what it left stays where it is. A run whose seal is in the trail while
    its folio still has its staging name gets a `rename-completed` entry, then its name.
    """
    _acknowledge_protocols(workspace, trail)
    _acknowledge_laboratory_folios(workspace, trail)
    _complete_signatures(workspace, trail)
    for run in run_histories(trail.entries):
        folder = workspace.runs / run.study
        if is_locked(folder, run.name):
            continue  # at work
        if run.sealed is not None:
            if not (folder / run.name).exists():
                staged = reopen_staged(folder, run.name)
                if staged is not None and staged.seal == run.sealed.details.get("seal"):
                    reason = "the run was interrupted before its sealed folio was renamed into place"
                    trail.append("rename-completed", run.subject, reason, {"seal": staged.seal})
                    staged.publish()
        elif run.interrupted is None:
            last = run.entries[-1]
            trail.append(
                "interrupted",
                run.subject,
                f"the run ended without a word after its entry {last.action!r}; it has no folio",
                {"last_seq": last.seq, **leftover_record(folder, run.name)},
            )


def _acknowledge_protocols(workspace: Workspace, trail: TrailWriter) -> None:
    """The same for protocols whose registration was killed."""
    for protocol in protocol_histories(trail.entries):
        folder = workspace.runs / protocol.study
        if is_locked(folder, protocol.name):
            continue  # at work
        if protocol.registered is not None:
            if not (folder / protocol.name).exists():
                staged = reopen_staged(folder, protocol.name)
                if staged is not None and staged.seal == protocol.registered.details.get("seal"):
                    reason = "the registration was interrupted before its folio was renamed into place"
                    trail.append("rename-completed", protocol.subject, reason, {"seal": staged.seal})
                    staged.publish()
        elif protocol.stopped is None:
            last = protocol.entries[-1]
            trail.append(
                PROTOCOL_INTERRUPTED,
                protocol.subject,
                f"it ended without a word after its entry {last.action!r}; no plan was registered",
                {"last_seq": last.seq, **leftover_record(folder, protocol.name)},
            )


def _acknowledge_laboratory_folios(workspace: Workspace, trail: TrailWriter) -> None:
    """The same for the laboratory's own folios, which are made while the trail is held."""
    folder = workspace.runs / FOLDER
    for folio in laboratory_folios(trail.entries):
        if folio.sealed is not None:
            staged = None if (folder / folio.name).exists() else reopen_staged(folder, folio.name)
            if staged is not None and staged.seal == folio.sealed.details.get("seal"):
                reason = "the command was interrupted before the sealed folio was renamed into place"
                trail.append("rename-completed", folio.subject, reason, {"seal": staged.seal})
                staged.publish()
        elif folio.interrupted is None:
            trail.append(
                "interrupted",
                folio.subject,
                "the command ended without a word before the folio was sealed; nothing came of it",
                {"last_seq": folio.allotted.seq, **leftover_record(folder, folio.name)},
            )


def _complete_signatures(workspace: Workspace, trail: TrailWriter) -> None:
    """Move a signature into place that was entered and then interrupted; throw away one that never was."""
    for subject in dict.fromkeys(entry.subject for entry in trail.entries if entry.action == SIGNED_ENTRY):
        folio = workspace.runs / subject
        if not (folio / SIGN_OFF_FOLDER / STAGING).is_dir() or is_locked(folio.parent, folio.name):
            continue
        signatures = signatures_of(trail.entries, subject)
        if not staged_as_entered(folio, signatures):
            discard_staged(folio)
            continue
        reason = "the signing was interrupted before the signed report was moved into place"
        trail.append("rename-completed", subject, reason, {"seal": signatures[-1].seal})
        publish_signature(folio)
