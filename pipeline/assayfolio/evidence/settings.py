"""The laboratory's settings as the audit trail holds them: which are in force, which were proposed.

An entry `settings` carries the text and the SHA-256 of each settings file, what it replaces, and the fields
that changed; it is in force until the next one. A change that needs a second person is first entered as
`settings-proposed`, and then as `settings` by the one who confirms it. The settings that a workspace is
founded with are `provisional`: they name no laboratory yet.
"""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import PurePosixPath

from assayfolio.canonical import Json, sha256_hex
from assayfolio.errors import StudyError
from assayfolio.evidence.entries import TrailEntry, is_digest
from assayfolio.study.differences import Difference
from assayfolio.study.settings_document import SETTINGS_FILES, Texts, settings_of

SETTINGS = "settings"
PROPOSED = "settings-proposed"
SUBJECT = "laboratory settings"


@dataclass(frozen=True, slots=True)
class EnteredSettings:
    """The settings as one entry has them; digests and texts by path, None for a file that was not there."""

    entry: TrailEntry
    digests: Mapping[str, str | None]
    texts: Mapping[str, str | None]
    was: Mapping[str, str | None] | None
    provisional: bool
    second: str | None


def settings_digests(texts: Texts) -> dict[str, str | None]:
    """The SHA-256 of each settings file, None where there is none."""
    return {file: _digest(texts.get(file)) for file in SETTINGS_FILES}


def _digest(text: str | None) -> str | None:
    return None if text is None else sha256_hex(text.encode("utf-8"))


def settings_details(
    texts: Texts, was: Mapping[str, str | None] | None, changes: Sequence[Difference]
) -> dict[str, Json]:
    """What an entry says of settings: their digests and texts, the digests before, and what changed."""
    return {
        "files": settings_digests(texts),
        "texts": {file: texts.get(file) for file in SETTINGS_FILES},
        "was": None if was is None else dict(was),
        "differences": [{"key": change.key, "old": change.old, "new": change.new} for change in changes],
    }


def entered_settings(entry: TrailEntry) -> EnteredSettings | None:
    """What a `settings` or `settings-proposed` entry says; None for any other, and where it is malformed."""
    if entry.action not in (SETTINGS, PROPOSED):
        return None
    files, texts, was = (entry.details.get(key) for key in ("files", "texts", "was"))
    digests, kept = _by_file(files), _by_file(texts)
    if digests is None or kept is None or not all(is_digest(value) for value in digests.values() if value):
        return None
    provisional, second = entry.details.get("provisional"), entry.details.get("second")
    named = second if isinstance(second, str) else None
    return EnteredSettings(entry, digests, kept, _by_file(was), provisional is True, named)


def _by_file(value: Json) -> dict[str, str | None] | None:
    if not isinstance(value, Mapping):
        return None
    found: dict[str, str | None] = {}
    for file in SETTINGS_FILES:
        text = value.get(file)
        if not (text is None or isinstance(text, str)):
            return None
        found[file] = text
    return found


def settings_in_force(entries: Sequence[TrailEntry]) -> EnteredSettings | None:
    """The newest settings that were entered; None where the trail has none yet."""
    return _newest(entries, (SETTINGS,))


def open_proposal(entries: Sequence[TrailEntry]) -> EnteredSettings | None:
    """The newest change that was proposed and has not been confirmed, or None."""
    newest = _newest(entries, (SETTINGS, PROPOSED))
    return newest if newest is not None and newest.entry.action == PROPOSED else None


def witness_in_force_since(entries: Iterable[TrailEntry], name: str) -> int | None:
    """The entry of settings since which the witness `name` has been in force; None where it is not.

    `name` is kind and place, as in "file: /mnt/witness/heads.jsonl".
    """
    since: int | None = None
    for entry in entries:
        settings = entered_settings(entry) if entry.action == SETTINGS else None
        if settings is not None:
            named = name in _witness_names(settings.texts)
            since = (since or entry.seq) if named else None
    return since


def _witness_names(texts: Mapping[str, str | None]) -> frozenset[str]:
    try:
        laboratory, _ = settings_of(texts)
    except StudyError:
        return frozenset()
    return frozenset(
        f"{each.kind}: {each.target if each.kind == 'time-stamp' else PurePosixPath(each.target)}"
        for each in laboratory.witnesses
    )


def _newest(entries: Sequence[TrailEntry], actions: Iterable[str]) -> EnteredSettings | None:
    wanted = frozenset(actions)
    found = (entered_settings(entry) for entry in reversed(entries) if entry.action in wanted)
    return next((settings for settings in found if settings is not None), None)
