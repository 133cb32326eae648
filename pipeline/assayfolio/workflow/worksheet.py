"""Writing the worksheet of a study before the work: workbook, text, paper, and a record of the order.

A file that is there already is never replaced: it may be filled in. What was written is entered in the audit
trail with its digests.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from assayfolio.canonical import Json, sha256_hex
from assayfolio.errors import Fault, InputError, MachineError, Place
from assayfolio.evidence.files import read_regular, replace_file
from assayfolio.report.worksheet_page import WorksheetPage, worksheet_pdf
from assayfolio.study.plan import Laboratory, StudyDefinition
from assayfolio.version import VERSION
from assayfolio.workflow.authority import require
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.intake import SeenFiles, read_plan
from assayfolio.workflow.recovery import found_trail
from assayfolio.workflow.worksheet_files import csv_bytes, record_bytes, xlsx_bytes
from assayfolio.workflow.workspace import Workspace, shown_path
from assayfolio.worksheet.columns import Sheet, worksheet_of
from assayfolio.worksheet.order import ALGORITHM
from assayfolio.worksheet.rows import WorksheetRow, check_worksheet, order_digest, planned_rows


@dataclass(frozen=True, slots=True)
class WrittenWorksheet:
    """A worksheet: its study and order, the files by path with their digests, and which of them are new."""

    study: StudyDefinition
    rows: tuple[WorksheetRow, ...]
    order_sha256: str
    files: tuple[tuple[Path, str], ...]
    new: frozenset[Path]

    def lines(self) -> list[str]:
        """What was written, for people."""
        study = self.study
        return [
            f"{study.study}  {study.title}",
            f"  order  {_size_words(study, self.rows)}",
            f"  order  {_order_words(study)}",
            f"  order  SHA-256 {self.order_sha256}",
            *(f"  {'wrote' if path in self.new else 'there'}  {shown_path(path)}" for path, _ in self.files),
            *self._notes(),
        ]

    def _notes(self) -> list[str]:
        data = self.study.data
        if data.header_row == 1:
            return []
        note = (
            "  note   the sheet has its column names in row 1, where the study says "
            f"`header-row: {data.header_row}`; put that right before the filled-in sheet is its data file"
        )
        return [note]

    def document(self) -> Mapping[str, Json]:
        """What was written, for programs."""
        return {
            "study": self.study.study,
            "rows": len(self.rows),
            "algorithm": ALGORITHM,
            "seed": None if self.study.worksheet is None else self.study.worksheet.seed,
            "order_sha256": self.order_sha256,
            "files": [
                {"file": shown_path(path), "sha256": digest, "new": path in self.new}
                for path, digest in self.files
            ],
        }


def write_worksheet(workspace: Workspace, study_path: Path, folder: Path | None) -> WrittenWorksheet:
    """Write the worksheet of the plan in `study_path` into `folder`, by default beside the plan.

    Raises InputError with all faults of the plan, where no order follows from it, and where a file that would
    be written is there and differs: then nothing is written. Raises BusyError where another writer holds the
    workspace, MachineError where the machine refuses.
    """
    require(workspace, "worksheet")
    seen = SeenFiles()
    study, laboratory = read_plan(workspace, study_path, seen)
    check_worksheet(study)
    plan_sha256 = next(file.sha256 for file in seen.files if file.role == "study definition")
    rows = planned_rows(study)
    digest = order_digest(study, rows)
    contents = worksheet_contents(study, laboratory, plan_sha256, rows, digest)
    target = study_path.resolve().parent if folder is None else folder.resolve()
    if not target.is_dir():
        fault = Fault(Place(shown_path(target)), "there is no such folder", "make it, or name another")
        raise InputError("The worksheet cannot be written.", (fault,))
    files = {target / f"{study_path.stem}-worksheet{suffix}": content for suffix, content in contents.items()}
    with trail_book(workspace, laboratory.wait_seconds) as trail:
        new = _absent(files)
        found_trail(workspace, trail)
        for path in new:
            replace_file(path, files[path])
        written = WrittenWorksheet(
            study, rows, digest, tuple((path, sha256_hex(content)) for path, content in files.items()), new
        )
        trail.append("worksheet", study.study, None, _details(workspace, written, plan_sha256))
    return written


def worksheet_contents(
    study: StudyDefinition,
    laboratory: Laboratory,
    plan_sha256: str,
    rows: tuple[WorksheetRow, ...],
    digest: str,
) -> dict[str, bytes]:
    """The worksheet's files by the end of their names: workbook, text, paper, and the record of the order."""
    sheet = worksheet_of(study, rows)
    place = study.place_of("data.encoding") or study.places[0][1]
    facts = (
        ("study", study.study),
        ("title", study.title),
        ("study definition, SHA-256", plan_sha256),
        ("measurements", _size_words(study, rows)),
        ("measuring order", _order_words(study)),
        ("measuring order, SHA-256", digest),
    )
    contents = {
        ".xlsx": xlsx_bytes(sheet, study, facts),
        ".csv": csv_bytes(sheet, study.data, place),
        ".pdf": worksheet_pdf(_page(study, laboratory, sheet, rows, digest)),
    }
    digests = {suffix.removeprefix("."): sha256_hex(content) for suffix, content in contents.items()}
    contents[".json"] = record_bytes(study, plan_sha256, rows, digest, digests)
    return contents


def _page(
    study: StudyDefinition, laboratory: Laboratory, sheet: Sheet, rows: tuple[WorksheetRow, ...], digest: str
) -> WorksheetPage:
    starts = frozenset(at for at in range(1, len(rows)) if rows[at].block != rows[at - 1].block)
    facts = (
        f"{_size_words(study, rows)}.",
        f"The order was {_order_words(study)}.",
        "Work from top to bottom, and note what was found; where the order was not kept, say so at the end.",
    )
    generator = f"Assayfolio {VERSION}"
    return WorksheetPage(study.study, study.title, laboratory, facts, sheet, starts, digest, generator)


def _size_words(study: StudyDefinition, rows: tuple[WorksheetRow, ...]) -> str:
    return f"{len(rows)} measurements at {len({row.level for row in rows})} levels of {study.data.factor}"


def _order_words(study: StudyDefinition) -> str:
    """How the order was drawn, and from what it can be drawn again."""
    plan = study.worksheet
    if plan is None:
        raise AssertionError("a worksheet is written from its plan")
    how = f"at random within each {plan.block} ({', '.join(plan.blocks)})" if plan.blocks else "at random"
    return f"drawn {how}, by {ALGORITHM} from the seed {plan.seed}"


def _absent(files: Mapping[Path, bytes]) -> frozenset[Path]:
    """The files that are not there yet. Raises InputError where one is there with other content."""
    absent, faults = [], []
    for path, content in files.items():
        try:
            if read_regular(path) != content:
                faults.append(
                    Fault(Place(shown_path(path)), "is there already, and may be filled in", _ADVICE)
                )
        except FileNotFoundError:
            absent.append(path)
        except OSError as error:
            raise MachineError(f"{shown_path(path)}: could not read the file: {error.strerror}") from error
    if faults:
        raise InputError("A worksheet is never replaced by another one; nothing was written.", tuple(faults))
    return frozenset(absent)


_ADVICE = "move it elsewhere, or have the worksheet written into another folder with --output"


def _details(workspace: Workspace, written: WrittenWorksheet, plan_sha256: str) -> dict[str, Json]:
    plan = written.study.worksheet
    return {
        "study_definition": plan_sha256,
        "algorithm": ALGORITHM,
        "seed": None if plan is None else plan.seed,
        "order": written.order_sha256,
        "files": {
            workspace.name_of(path) if path.is_relative_to(workspace.root) else shown_path(path): digest
            for path, digest in written.files
        },
    }
