"""What a workbook says beside its cells: its sheets, its shared texts, its number formats."""

import posixpath
from dataclasses import dataclass, field
from typing import Literal

from assayfolio.observations.workbook_package import Package
from assayfolio.observations.workbook_xml import walk
from assayfolio.study.faults import shown

MOST_FORMAT = 1_000

Shown = Literal["number", "percent", "date", "datetime", "time", "duration"]

_BASES = ("/officeDocument", "/worksheet", "/sharedStrings", "/styles")


@dataclass(frozen=True, slots=True)
class SheetEntry:
    """A sheet of a workbook: its name, the part with its cells (None for a chart), whether it is hidden."""

    name: str
    part: str | None
    hidden: bool


@dataclass(frozen=True, slots=True)
class Book:
    """A workbook's sheets in order, the parts that all share, and whether its dates count from 1904."""

    sheets: tuple[SheetEntry, ...]
    shared_strings: str | None
    styles: str | None
    from_1904: bool


@dataclass(slots=True)
class _Relations:
    """The targets of one part's relationships, by identifier and by kind."""

    base: str
    by_id: dict[str, tuple[str, str]] = field(default_factory=dict)

    def take(self, given: dict[str, str]) -> None:
        if given.get("TargetMode") == "External":
            return
        kind, target = given.get("Type", ""), given.get("Target", "")
        if kind.endswith(_BASES):
            path = posixpath.normpath(posixpath.join("/", self.base, target)).lstrip("/")
            self.by_id[given.get("Id", "")] = (kind.rpartition("/")[2], path)

    def of_kind(self, kind: str) -> str | None:
        return next((target for found, target in self.by_id.values() if found == kind), None)


@dataclass(slots=True)
class _BookPart:
    """The entries of the part `workbook.xml`."""

    sheets: list[tuple[str, str, bool]] = field(default_factory=list)
    from_1904: bool = False

    def take_sheet(self, given: dict[str, str]) -> None:
        reference = next((value for key, value in given.items() if key.endswith(" id")), "")
        hidden = given.get("state", "visible") != "visible"
        self.sheets.append((given.get("name", ""), reference, hidden))

    def take_properties(self, given: dict[str, str]) -> None:
        self.from_1904 = is_true(given.get("date1904"))


def is_true(value: str | None) -> bool:
    """Whether an attribute says yes."""
    return value in ("1", "true", "on")


def read_book(package: Package) -> Book:
    """The sheets of the workbook. Raises DataError where the archive holds no workbook."""
    top = _relations(package, "", "_rels/.rels")
    book_name = top.of_kind("officeDocument")
    if book_name is None or book_name not in package:
        raise package.damaged("the archive holds no workbook")
    if not book_name.endswith(".xml"):
        raise package.damaged("it is a workbook of another kind")
    folder, name = posixpath.split(book_name)
    relations = _relations(package, folder, posixpath.join(folder, "_rels", f"{name}.rels"))
    part = _BookPart()
    walk(package, book_name, {"sheet": part.take_sheet, "workbookPr": part.take_properties})
    sheets = tuple(
        SheetEntry(name, target if kind == "worksheet" else None, hidden)
        for name, reference, hidden in part.sheets
        for kind, target in [relations.by_id.get(reference, ("", ""))]
    )
    shared, styles = relations.of_kind("sharedStrings"), relations.of_kind("styles")
    return Book(sheets, shared, styles, part.from_1904)


def _relations(package: Package, base: str, name: str) -> _Relations:
    if name not in package:
        raise package.damaged("the archive holds no workbook")
    relations = _Relations(base)
    walk(package, name, {"Relationship": relations.take})
    return relations


@dataclass(slots=True)
class _Strings:
    """Shared texts; a text of several formats is put together, phonetic hints are left out."""

    texts: list[str] = field(default_factory=list)
    parts: list[str] = field(default_factory=list)
    inside: bool = False
    phonetic: bool = False

    def start_item(self, _: dict[str, str]) -> None:
        self.parts = []

    def end_item(self) -> None:
        self.texts.append("".join(self.parts))

    def start_hint(self, _: dict[str, str]) -> None:
        self.phonetic = True

    def end_hint(self) -> None:
        self.phonetic = False

    def start_text(self, _: dict[str, str]) -> None:
        self.inside = not self.phonetic

    def end_text(self) -> None:
        self.inside = False

    def text(self, text: str) -> None:
        if self.inside:
            self.parts.append(text)


def read_shared_strings(package: Package, book: Book) -> list[str]:
    """The texts that cells refer to by number."""
    strings = _Strings()
    if book.shared_strings is not None:
        starts = {"t": strings.start_text, "si": strings.start_item, "rPh": strings.start_hint}
        ends = {"t": strings.end_text, "si": strings.end_item, "rPh": strings.end_hint}
        walk(package, book.shared_strings, starts, ends, strings.text)
    return strings.texts


@dataclass(slots=True)
class _Styles:
    """The number format of each cell style."""

    codes: dict[str, str] = field(default_factory=dict)
    formats: list[str] = field(default_factory=list)
    in_cells: bool = False

    def take_code(self, given: dict[str, str]) -> None:
        self.codes[given.get("numFmtId", "")] = given.get("formatCode", "")

    def start_cells(self, _: dict[str, str]) -> None:
        self.in_cells = True

    def end_cells(self) -> None:
        self.in_cells = False

    def take_style(self, given: dict[str, str]) -> None:
        if self.in_cells:
            self.formats.append(given.get("numFmtId", "0"))


def read_formats(package: Package, book: Book) -> list[Shown]:
    """How the cells of each style are shown."""
    if book.styles is None:
        return []
    from openpyxl.styles.numbers import BUILTIN_FORMATS

    styles = _Styles()
    starts = {"numFmt": styles.take_code, "cellXfs": styles.start_cells, "xf": styles.take_style}
    walk(package, book.styles, starts, {"cellXfs": styles.end_cells})
    if any(len(code) > MOST_FORMAT for code in styles.codes.values()):
        raise package.damaged(f"a number format has more than {MOST_FORMAT:,} characters")
    builtin = {str(number): code for number, code in BUILTIN_FORMATS.items()}
    known: dict[str, Shown] = {}
    for number in styles.formats:
        if number not in known:
            known[number] = _shown_as(styles.codes.get(number, builtin.get(number, "General")))
    return [known[number] for number in styles.formats]


def _shown_as(code: str) -> Shown:
    from openpyxl.styles.numbers import is_date_format, is_datetime, is_timedelta_format

    if is_timedelta_format(code):
        return "duration"
    if is_date_format(code):
        kind = is_datetime(code.lower())
        return "time" if kind == "time" else "date" if kind == "date" else "datetime"
    return "percent" if "%" in code else "number"


def named_sheet(book: Book, wanted: str | None) -> SheetEntry | str:
    """The sheet that the plan names, or the only one that is not hidden; else the words of what is wrong."""
    visible = [sheet for sheet in book.sheets if not sheet.hidden]
    if wanted is None:
        if len(visible) != 1:
            return "the workbook has " + ("no sheet that is not hidden" if not visible else "several sheets")
        return visible[0]
    sheet = next((sheet for sheet in book.sheets if sheet.name == wanted), None)
    if sheet is None:
        return f"the workbook has no sheet {shown(wanted)}"
    if sheet.hidden:
        return f"sheet {shown(wanted)} is hidden"
    return sheet
