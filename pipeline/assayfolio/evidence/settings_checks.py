"""Check 2.6: the laboratory's settings are those that the audit trail holds, and every run used those."""

from collections.abc import Sequence
from pathlib import Path

from assayfolio.canonical import sha256_hex
from assayfolio.errors import StudyError
from assayfolio.evidence.entries import TrailEntry, TrailReading
from assayfolio.evidence.files import plain_reason, read_regular
from assayfolio.evidence.history import ALLOTTED
from assayfolio.evidence.inventory import shown
from assayfolio.evidence.outcomes import CheckOutcome, Tally
from assayfolio.evidence.settings import (
    PROPOSED,
    SETTINGS,
    EnteredSettings,
    entered_settings,
    open_proposal,
    settings_digests,
    settings_in_force,
)
from assayfolio.study.differences import shortened
from assayfolio.study.settings_document import (
    LABORATORY_FILE,
    SETTINGS_FILES,
    needs_second_person,
    settings_differences,
    settings_of,
)

_MOST_NAMED = 10


def check_settings(runs: Path, reading: TrailReading) -> CheckOutcome:
    """Compare the settings files beside `runs` with the newest `settings` entry, and the entries themselves.

    Failed: a file whose bytes differ (each setting that does is named), an entry that does not agree with
    itself or with the one before, a change of roles by one person, a run under other settings than were in
    force. A trail without such an entry, of an earlier version, is only remarked on.
    """
    tally = Tally()
    _check_entries(reading.entries, tally)
    known = settings_in_force(reading.entries)
    if known is None:
        tally.remarks.append("the settings were not entered yet; the next command that writes enters them")
    else:
        _compare(runs.parent, known, open_proposal(reading.entries), tally)
    return tally.outcome("2.6", "settings as entered in the audit trail", "laboratory settings")


def _check_entries(entries: Sequence[TrailEntry], tally: Tally) -> None:
    before: EnteredSettings | None = None
    for entry in entries:
        if entry.action == ALLOTTED and before is not None and not before.provisional:
            _check_run(entry, before, tally)
        if entry.action not in (SETTINGS, PROPOSED):
            continue
        settings = entered_settings(entry)
        if settings is None:
            tally.failed.append(f"entry {entry.seq} ({entry.action}) does not hold the settings")
            continue
        if settings_digests(settings.texts) != dict(settings.digests):
            tally.failed.append(f"entry {entry.seq} holds settings that have not the digests it names")
        expected = None if before is None else dict(before.digests)
        if (None if settings.was is None else dict(settings.was)) != expected:
            tally.failed.append(
                f"entry {entry.seq} does not change the settings that were in force before it"
            )
        if entry.action == SETTINGS:
            if before is not None and not before.provisional:
                _check_second(entry, before, settings, tally)
            before = settings


def _check_second(
    entry: TrailEntry, before: EnteredSettings, settings: EnteredSettings, tally: Tally
) -> None:
    """Whether a change that needs two persons was entered by two."""
    try:
        laboratory, _ = settings_of(before.texts)
    except StudyError:
        return
    changes = settings_differences(before.texts, settings.texts)
    if laboratory.one_person or not needs_second_person(changes):
        return
    proposed = entry.details.get("proposed")
    proposer = proposed.get("actor") if isinstance(proposed, dict) else None
    if proposer is None or proposer == entry.actor:
        tally.failed.append(
            f"entry {entry.seq} changes {', '.join(change.key for change in changes[:_MOST_NAMED])} on the "
            f"word of {shown(entry.actor)} alone; it needs a second person"
        )


def _check_run(entry: TrailEntry, settings: EnteredSettings, tally: Tally) -> None:
    inputs = entry.details.get("inputs")
    digest = inputs.get(LABORATORY_FILE) if isinstance(inputs, dict) else None
    if digest is not None and digest != settings.digests[LABORATORY_FILE]:
        tally.failed.append(
            f"{shown(entry.subject)} (entry {entry.seq}) was made under another {LABORATORY_FILE} than entry "
            f"{settings.entry.seq} has in force"
        )


def _compare(root: Path, known: EnteredSettings, proposal: EnteredSettings | None, tally: Tally) -> None:
    texts: dict[str, str | None] = {}
    changed = []
    for file in SETTINGS_FILES:
        try:
            content: bytes | None = read_regular(root / file)
        except FileNotFoundError:
            content = None
        except OSError as error:
            tally.unchecked.append(f"{file} could not be read: {plain_reason(error)}")
            return
        texts[file] = None if content is None else content.decode("utf-8", "backslashreplace")
        if (None if content is None else sha256_hex(content)) != known.digests[file]:
            changed.append(file)
    if not changed:
        tally.remarks.append(f"as entry {known.entry.seq} has them, by {shown(known.entry.actor)}")
    elif known.provisional:
        tally.remarks.append("filled in since the workspace was founded; the next command enters them")
    elif proposal is not None and settings_digests(texts) == dict(proposal.digests):
        tally.failed.append(
            f"{' and '.join(changed)}: as entry {proposal.entry.seq} proposes, which nobody has confirmed yet"
        )
    else:
        tally.failed.extend(_change_words(file, texts[file], known) for file in changed)
        tally.failed.extend(_difference_words(known, texts))


def _change_words(file: str, text: str | None, known: EnteredSettings) -> str:
    seq = known.entry.seq
    if text is None:
        return f"missing: {file}, which entry {seq} has in force"
    if known.digests[file] is None:
        return f"extra file: {file}: by entry {seq} there is none"
    return (
        f"changed: {file} is not as entry {seq} has it in force; it was edited outside `assayfolio settings`"
    )


def _difference_words(known: EnteredSettings, texts: dict[str, str | None]) -> list[str]:
    changes = settings_differences(known.texts, texts)
    named = [
        f"{change.key}: {shortened(change.old)} in force, {shortened(change.new)} in the file"
        for change in changes[:_MOST_NAMED]
    ]
    return [
        *named,
        *([f"and {len(changes) - _MOST_NAMED} more settings"] if len(changes) > _MOST_NAMED else []),
    ]
