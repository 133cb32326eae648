"""A self-contained copy of folios for somebody else: folios, the trail's lines, the programs, a certificate.

Nothing in the workspace changes but for one record of the copy, `runs/_laboratory/archive-NNNN`, with the
same certificate.
"""

import os
import shutil
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from assayfolio.canonical import Json, canonical_bytes, sha256_hex
from assayfolio.errors import ChangedError, Fault, InputError, Place
from assayfolio.evidence.entries import TrailReading
from assayfolio.evidence.files import digest_regular, explained, plain_reason, write_new
from assayfolio.evidence.folio import read_seal
from assayfolio.evidence.inventory import take_inventory
from assayfolio.evidence.program_store import kept_program
from assayfolio.evidence.trail import read_trail
from assayfolio.evidence.verification import verify_lone_folios, verify_workspace
from assayfolio.report.record_page import RecordFact, RecordPage, RecordSection, RecordTable, record_pdf
from assayfolio.version import VERSION
from assayfolio.workflow.archive_words import READ_ME
from assayfolio.workflow.archived import archived_run
from assayfolio.workflow.archived_environment import LOCK_FILE
from assayfolio.workflow.laboratory_folio import Record, SealedRecord, laboratory_name, seal_in_workspace
from assayfolio.workflow.surroundings import Surroundings, look_around
from assayfolio.workflow.wheels import WheelSource, gather_wheels
from assayfolio.workflow.workspace import Workspace, shown_path

COPY_FORMAT = "assayfolio-true-copy/1"
LINES_FILE = "trail/lines.jsonl"
SUMS_FILE = "sha256sums.txt"
_HOW = (
    "Before copying, each folio agreed with its manifests and its seal with the audit trail; afterwards each "
    "copy was read back, agreed with the same manifests and had the same seal."
)


@dataclass(frozen=True, slots=True)
class CopiedFolio:
    """One folio of the copy: its seal, the number of its files and of their bytes, what program made it."""

    subject: str
    seal: str
    files: int
    size: int
    program: str | None


@dataclass(frozen=True, slots=True)
class Copy:
    """A finished copy: where it lies, what is in it, and the record of it in the workspace."""

    place: Path
    folios: tuple[CopiedFolio, ...]
    wheels: tuple[str, ...]
    document: Mapping[str, Json]
    record: SealedRecord


def export(workspace: Workspace, folios: Sequence[Path], place: Path, wheels: WheelSource | None) -> Copy:
    """Copy `folios` of `workspace` to the new folder `place`; with `wheels` also all they were made with.

    Raises InputError where `place` is taken or a folio is not one of the workspace, ChangedError where one
    does not verify (no certificate is made then), and what gathering wheels and sealing raise.
    """
    subjects = {_subject(workspace, folio): folio.resolve() for folio in folios}
    _require_free(workspace, place)
    _require_whole(workspace, subjects)
    around = look_around()
    reading = read_trail(workspace.runs)
    unfinished = place.with_name(f"{place.name}.unfinished")
    _require_free(workspace, unfinished)
    try:
        unfinished.mkdir(parents=True)
        copied = tuple(_copied(unfinished, subject, folder) for subject, folder in subjects.items())
        _write(unfinished / LINES_FILE, _lines(reading, subjects))
        names = () if wheels is None else tuple(sorted(_wheels(workspace, subjects, wheels, unfinished)))
        document = _document(copied, names, reading, around)
        pdf = record_pdf(_page(copied, names, document, around, laboratory_name(workspace)))
        certificate = {"true-copy.json": canonical_bytes(document), "true-copy.pdf": pdf}
        for name, content in {**certificate, "READ-ME-FIRST.txt": READ_ME.encode("utf-8")}.items():
            _write(unfinished / name, content)
        _write(unfinished / SUMS_FILE, _sums(unfinished))
        with explained("give the copy its name", place):
            os.rename(unfinished, place)  # noqa: PTH104 - one plain system call
    except BaseException:
        shutil.rmtree(unfinished, ignore_errors=True)
        raise
    payload = {f"data/{name}": content for name, content in certificate.items()}
    details: dict[str, Json] = {"folios": {one.subject: one.seal for one in copied}, "wheels": len(names)}
    about = f"true copy of {', '.join(one.subject for one in copied)}"
    record = seal_in_workspace(workspace, Record("archive", about, around.started_utc, payload, details))
    return Copy(place, copied, names, document, record)


def _subject(workspace: Workspace, folio: Path) -> str:
    resolved = folio.resolve()
    if resolved.parent.parent != workspace.runs.resolve() or not resolved.is_dir():
        fault = Fault(Place(shown_path(folio)), f"is not a folio in {shown_path(workspace.runs)}")
        raise InputError("Only folios of the workspace can be copied with a certificate.", (fault,))
    return f"{resolved.parent.name}/{resolved.name}"


def _require_free(workspace: Workspace, place: Path) -> None:
    resolved = place.resolve()
    if os.path.lexists(place):
        raise InputError(f"{shown_path(place)} exists already; a copy is made in a new folder.")
    if resolved.is_relative_to(workspace.runs.resolve()):
        raise InputError(f"{shown_path(place)} lies among the folios; a copy is made elsewhere.")


def _require_whole(workspace: Workspace, subjects: Mapping[str, Path]) -> None:
    failed = verify_workspace(workspace.runs, tuple(subjects.values())).with_outcome("failed")
    if failed:
        lines = [f"  {one.number} {one.subject}: {'; '.join(one.notes)}" for one in failed]
        raise ChangedError("\n".join(["Not everything verifies, so no true copy can be certified.", *lines]))


def _copied(target: Path, subject: str, folder: Path) -> CopiedFolio:
    """Copy one folio, and verify the copy by itself; its seal is that of the original."""
    place = target / "folios" / subject
    with explained("copy the folio", folder):
        shutil.copytree(folder, place, symlinks=True)
    failed = verify_lone_folios([place]).with_outcome("failed")
    seal = read_seal(place)
    if failed or seal != read_seal(folder):
        raise ChangedError(f"{subject}: the copy does not read back as the original. The disk is at fault.")
    files = take_inventory(place).files
    return CopiedFolio(subject, seal, len(files), sum(file.size for file in files.values()), _program(place))


def _program(folder: Path) -> str | None:
    try:
        program = archived_run(folder).record.get("program")
    except InputError:
        return None  # a protocol, a record, or a run that failed
    digest = program.get("sha256") if isinstance(program, Mapping) else None
    return digest if isinstance(digest, str) else None


def _lines(reading: TrailReading, subjects: Mapping[str, Path]) -> bytes:
    """The trail's lines from the first entry about one of the folios to the newest."""
    first = next((at for at, entry in enumerate(reading.entries) if entry.subject in subjects), 0)
    return b"".join(line + b"\n" for line in reading.lines[first:])


def _wheels(
    workspace: Workspace, subjects: Mapping[str, Path], source: WheelSource, target: Path
) -> Iterator[str]:
    """Gather what the runs were made with: the packages of each lock, and each program."""
    seen: set[str] = set()
    for subject, folder in subjects.items():
        try:
            run = archived_run(folder)
        except InputError:
            continue
        digest = _program(folder)
        wheel = None if digest is None else kept_program(workspace.runs, digest)
        if wheel is None:
            raise InputError(
                f"{subject}: the program that made it is not in runs/_programs/, so the copy could not be "
                "self-contained. Copy it without --with-wheels."
            )
        lock = run.read(LOCK_FILE)
        if sha256_hex(lock) not in seen:
            seen.add(sha256_hex(lock))
            yield from gather_wheels(lock, source, target / "wheels")
        if digest is not None and digest not in seen:
            seen.add(digest)
            folder_of_program = target / "wheels" / digest
            folder_of_program.mkdir(parents=True)
            shutil.copyfile(wheel, folder_of_program / wheel.name)
            yield f"{digest}/{wheel.name}"


def _document(
    copied: Sequence[CopiedFolio], wheels: Sequence[str], reading: TrailReading, around: Surroundings
) -> Mapping[str, Json]:
    return {
        "format": COPY_FORMAT,
        "made": around.started_utc,
        "made_local": around.started_local,
        "actor": around.actor,
        "host": around.host,
        "program": f"assayfolio {VERSION}",
        "trail_head": {"seq": reading.last.seq, "sha256": reading.last.sha256},
        "folios": [
            {
                "folio": one.subject,
                "seal": one.seal,
                "files": one.files,
                "bytes": one.size,
                "program_sha256": one.program,
            }
            for one in copied
        ],
        "wheels": list(wheels),
    }


def _write(path: Path, content: bytes) -> None:
    path.parent.mkdir(parents=True, exist_ok=True)
    write_new(path, content, 0o444)


def _sums(folder: Path) -> bytes:
    lines = []
    for path in sorted(path for path in folder.rglob("*") if path.is_file()):
        try:
            lines.append(f"{digest_regular(path)}  {path.relative_to(folder).as_posix()}\n")
        except OSError as error:
            raise ChangedError(f"{path} cannot be read back: {plain_reason(error)}.") from error
    return "".join(lines).encode("utf-8")


def _page(
    copied: Sequence[CopiedFolio],
    wheels: Sequence[str],
    document: Mapping[str, Json],
    around: Surroundings,
    laboratory: str,
) -> RecordPage:
    local = f"{around.started_local[:19].replace('T', ' ')} {around.started_local[-6:]}"
    head = document["trail_head"]
    assert isinstance(head, Mapping)
    digest = sha256_hex(canonical_bytes(document))
    facts = (
        RecordFact("Copied", local),
        RecordFact("By", f"account {around.actor} on {around.host}, by this computer's clock"),
        RecordFact("With", f"Assayfolio {VERSION}"),
        RecordFact("Trail head", f"entry {head['seq']}", str(head["sha256"])),
        RecordFact("true-copy.json", "the same for programs", digest),
    )
    return RecordPage(
        kind="True copy",
        title=f"True copy of {len(copied)} {'folio' if len(copied) == 1 else 'folios'}",
        number=local[:10],
        laboratory=laboratory,
        created=f"{around.started_utc[:19]}Z",
        generator=f"Assayfolio {VERSION}",
        box="Each copy is the original, byte for byte.",
        box_notes=(_HOW,),
        sections=(
            RecordSection(
                "Folios",
                table=RecordTable(
                    (("folio", 21), ("seal, SHA-256", 60), ("files", 7), ("bytes", 12)),
                    tuple((one.subject, one.seal, str(one.files), f"{one.size:,}") for one in copied),
                ),
            ),
            RecordSection("Who, when, with what", facts=facts),
            _wheel_section(wheels),
        ),
        foot=f"true copy of {local} · true-copy.json {digest[:16]}",
    )


def _wheel_section(wheels: Sequence[str]) -> RecordSection:
    if not wheels:
        return RecordSection("Programs", ("None were copied; each folio names its own by digest.",))
    words = (
        "With these packages each run can be computed again without a network, on a machine of the same kind."
    )
    rows = tuple((name.rpartition("/")[2], name.rpartition("/")[0]) for name in wheels)
    columns = (("wheel", 48), ("SHA-256, where a run names it", 52))
    return RecordSection("Programs", (words,), table=RecordTable(columns, rows))
