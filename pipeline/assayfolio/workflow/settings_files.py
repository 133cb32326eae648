"""The laboratory's settings as they lie in the workspace now, held against those in the audit trail."""

from dataclasses import dataclass

from assayfolio.errors import AssayfolioError, InputError
from assayfolio.evidence.settings import (
    SETTINGS,
    SUBJECT,
    EnteredSettings,
    settings_details,
    settings_digests,
    settings_in_force,
)
from assayfolio.evidence.trail import TrailEntry, TrailWriter
from assayfolio.study.laboratory import Laboratory, People
from assayfolio.study.settings_document import (
    LABORATORY_FILE,
    PEOPLE_FILE,
    Texts,
    settings_differences,
    settings_of,
)
from assayfolio.workflow.intake import PLACEHOLDER
from assayfolio.workflow.workspace import Workspace, read_input

FIRST_SEEN = "first seen"
FILLED_IN = "first use: the settings that the workspace was founded with were filled in"
FOUNDED_WITH = "the settings that the workspace was founded with, to be filled in"
CHANGED = "settings changed outside `assayfolio settings`: run it"
DEFAULT_WAIT_SECONDS = 10.0


@dataclass(frozen=True, slots=True)
class StandingSettings:
    """The settings files as they lie there: their texts, and what they say."""

    texts: Texts
    laboratory: Laboratory
    people: People | None

    @property
    def named(self) -> bool:
        """Whether they name a laboratory yet."""
        return self.laboratory.name != PLACEHOLDER


def standing_settings(workspace: Workspace) -> StandingSettings:
    """The settings files of the workspace. Raises InputError where one cannot be read or is faulty."""
    texts = settings_texts(workspace)
    return StandingSettings(texts, *settings_of(texts))


def settings_texts(workspace: Workspace) -> Texts:
    """The texts of the settings files. Raises InputError where one is no readable UTF-8 text."""
    texts: dict[str, str | None] = {
        LABORATORY_FILE: _text(
            read_input(workspace, workspace.settings, "laboratory's settings file"), LABORATORY_FILE
        )
    }
    there = workspace.people.exists() or workspace.people.is_symlink()
    texts[PEOPLE_FILE] = (
        _text(read_input(workspace, workspace.people, "list of people"), PEOPLE_FILE) if there else None
    )
    return texts


def _text(content: bytes, file: str) -> str:
    try:
        return content.decode("utf-8")
    except UnicodeDecodeError as error:
        raise InputError(
            f"{file}: it is not UTF-8 text (byte {error.start + 1}); save it as UTF-8."
        ) from error


def waiting_seconds(workspace: Workspace) -> float:
    """How long to wait for the trail: as the laboratory has it, or 10 s where its settings cannot be read."""
    try:
        return float(standing_settings(workspace).laboratory.wait_seconds)
    except AssayfolioError:
        return DEFAULT_WAIT_SECONDS


def enter_provisional_settings(trail: TrailWriter, texts: Texts) -> TrailEntry:
    """Enter the settings that a workspace is founded with; they are to be filled in before the first use."""
    details = settings_details(texts, None, ())
    return trail.append(SETTINGS, SUBJECT, FOUNDED_WITH, {**details, "provisional": True})


def enter_first_settings(
    trail: TrailWriter, standing: StandingSettings, reason: str | None = None
) -> TrailEntry | None:
    """Enter the settings of a workspace that has none in its trail yet, or only those it was founded with.

    Without a `reason` the entry says which of the two it was. Settings that name no laboratory are left for
    the command to refuse; later changes are not entered here.
    """
    known = settings_in_force(trail.entries)
    if not standing.named or (known is not None and not known.provisional):
        return None
    if known is None:
        return trail.append(
            SETTINGS, SUBJECT, reason or FIRST_SEEN, settings_details(standing.texts, None, ())
        )
    changes = settings_differences(known.texts, standing.texts)
    details = settings_details(standing.texts, known.digests, changes)
    return trail.append(SETTINGS, SUBJECT, reason or FILLED_IN, details)


def changed_files(known: EnteredSettings, texts: Texts) -> tuple[str, ...]:
    """The settings files whose bytes are not those in force."""
    now = settings_digests(texts)
    return tuple(file for file, digest in now.items() if known.digests[file] != digest)
