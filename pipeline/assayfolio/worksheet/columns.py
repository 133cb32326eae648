"""The columns of a worksheet, named as the study wants them in its raw data, and what stands in them."""

from dataclasses import dataclass
from typing import Literal

from assayfolio.errors import Fault, StudyError
from assayfolio.study.faults import shown
from assayfolio.study.plan import StudyDefinition
from assayfolio.worksheet.rows import WorksheetRow

Role = Literal["position", "block", "item", "level", "replicate", "result", "unit", "fact"]
Cell = str | int | None

DEFAULT_ORDER = "position"
DEFAULT_ITEM = "item"
DEFAULT_REPLICATE = "replicate"


@dataclass(frozen=True, slots=True)
class SheetColumn:
    """One column: its name, and what it holds; results and facts are left blank, to be filled in.

    `unit` is that of a result, None where the plan does not say.
    """

    name: str
    role: Role
    unit: str | None = None

    @property
    def to_fill_in(self) -> bool:
        """Whether the cells are blank on the sheet."""
        return self.role in ("result", "fact")


@dataclass(frozen=True, slots=True)
class Sheet:
    """A worksheet: its columns, and the cells of each row; a cell to be filled in is None."""

    columns: tuple[SheetColumn, ...]
    cells: tuple[tuple[Cell, ...], ...]


def order_column(study: StudyDefinition) -> str:
    """The name of the column with the measuring order."""
    return study.data.order or DEFAULT_ORDER


def item_column(study: StudyDefinition) -> str:
    """The name of the column with the labels of the items."""
    named = [fact.column for fact in study.measurement if fact.key == "item" and fact.column is not None]
    return named[0] if named else DEFAULT_ITEM


def worksheet_of(study: StudyDefinition, rows: tuple[WorksheetRow, ...]) -> Sheet:
    """The worksheet of `study` with `rows`; named as the file of raw data, it can be read once filled in.

    Raises StudyError where two columns would bear one name.
    """
    columns = _columns(study)
    return Sheet(columns, tuple(tuple(_cell(study, column, row) for column in columns) for row in rows))


def _columns(study: StudyDefinition) -> tuple[SheetColumn, ...]:
    plan, data = study.worksheet, study.data
    columns = [SheetColumn(order_column(study), "position")]
    if plan is not None and plan.block is not None and plan.blocks:
        columns.append(SheetColumn(plan.block, "block"))
    if plan is not None and plan.item is not None:
        columns.append(SheetColumn(item_column(study), "item"))
    columns.append(SheetColumn(data.factor, "level"))
    if data.replicate_unit is None or not _has(columns, data.replicate_unit):
        columns.append(SheetColumn(data.replicate_unit or DEFAULT_REPLICATE, "replicate"))
    columns += [SheetColumn(response, "result", data.unit_of(response)) for response in data.response]
    if data.unit_column is not None:
        columns.append(SheetColumn(data.unit_column, "unit"))
    _refuse_shared_names(study, columns)
    for fact in study.measurement:
        if fact.column is not None and not _has(columns, fact.column):
            columns.append(SheetColumn(fact.column, "fact"))
    return tuple(columns)


def _has(columns: list[SheetColumn], name: str) -> bool:
    return any(column.name == name for column in columns)


def _refuse_shared_names(study: StudyDefinition, columns: list[SheetColumn]) -> None:
    first: dict[str, Role] = {}
    for column in columns:
        if column.name in first:
            place = study.worksheet.place if study.worksheet is not None else study.places[0][1]
            found = (
                f"two columns would be called {shown(column.name)}: {first[column.name]} and {column.role}"
            )
            advice = "name another column for one of them in the study"
            raise StudyError(f"{place.file}: no worksheet can be written", (Fault(place, found, advice),))
        first[column.name] = column.role


def _cell(study: StudyDefinition, column: SheetColumn, row: WorksheetRow) -> Cell:
    match column.role:
        case "position":
            return row.position
        case "block":
            return row.block
        case "item":
            return row.item
        case "level":
            return row.level
        case "replicate":
            return _replicate(study, row)
        case "unit":
            return _shared_unit(study)
        case "result" | "fact":
            return None


def _replicate(study: StudyDefinition, row: WorksheetRow) -> Cell:
    """The replicate's number; in the column that tells repeats from replicates the item's label, if any."""
    if study.data.replicate_unit is None:
        return row.replicate
    return str(row.replicate) if row.item is None else row.item


def _shared_unit(study: StudyDefinition) -> str | None:
    """The unit of all responses; None where they differ, to be filled in."""
    units = {study.data.unit_of(response) for response in study.data.response}
    return units.pop() if len(units) == 1 else None
