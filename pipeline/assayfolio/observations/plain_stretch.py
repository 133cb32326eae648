"""Stretches of plain rows, column by column: labels, numbers, and which rows need a closer look."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Final

import numpy as np

from assayfolio.observations.header import CHARACTERS, Header
from assayfolio.observations.number_columns import Integers, Mask, Piece, pieces_of
from assayfolio.observations.text_columns import TextColumns
from assayfolio.study.plan import DataPlan, MeasurementFact

if TYPE_CHECKING:
    import pyarrow as pa

# Every entry that Python calls blank consists of these, and a few that it does not.
_BLANK: Final = r"^[\pZ\pC]*$"


@dataclass(frozen=True, slots=True)
class Stretch:
    """Rows of which each stands on a line of its own.

    `labels` are the different levels in order of first appearance, `codes` the position in them of each row's
    level. `values` are the numbers of each response. Rows that are `odd` hold something else in one of their
    columns, or what might be; what `values` has of them does not count.
    """

    labels: Sequence[str]
    codes: Integers
    values: Sequence[Sequence[Piece]]
    odd: Mask


class PlainStretches:
    """Reads stretches of one file by the columns that its plan names."""

    def __init__(self, header: Header, plan: DataPlan, measurement: Sequence[MeasurementFact]) -> None:
        at = {name: index for index, name in enumerate(header.names)}
        self.level_at = at[plan.factor]
        self._separator = CHARACTERS[header.separator]
        self._responses = [at[response] for response in plan.response]
        self._facts = [at[fact.column] for fact in measurement if fact.column is not None]
        self._mark = "," if plan.decimal_mark == "comma" else "."
        self._codes = (*plan.missing_codes, *(code for code, _ in plan.limit_codes))
        self._both_commas = self._mark == self._separator
        texts = sorted({*self._responses, *self._facts} - {self.level_at})
        self._columns = TextColumns(len(header.names), self._separator, texts, [self.level_at])

    def read(self, body: bytes) -> Stretch | None:
        """The stretch in `body`; None where some row has another number of cells than the header."""
        columns = self._columns.read(body)
        if columns is None:
            return None
        levels: Any = columns[self.level_at]
        codes = np.asarray(levels.indices.to_numpy(zero_copy_only=False), dtype=np.int64)
        labels = levels.dictionary.to_pylist()
        blank = [code for code, label in enumerate(labels) if not label.strip()]
        odd = np.isin(codes, blank) if blank else np.zeros(len(codes), dtype=np.bool_)
        for fact in self._facts:
            texts = levels.dictionary_decode() if fact == self.level_at else columns[fact]
            odd |= _matching(texts, _BLANK)
        values = []
        for response in self._responses:
            pieces, unread = pieces_of(columns[response], self._mark)
            odd |= unread | self._special(columns[response])
            values.append(pieces)
        return Stretch(labels, codes, values, odd)

    def _special(self, column: "pa.Array[Any]") -> Mask:
        """Entries that look like numbers and may be none: declared codes, and commas that may separate."""
        import pyarrow as pa
        import pyarrow.compute as pc

        special = np.zeros(len(column), dtype=np.bool_)
        if self._codes:
            special |= _mask(pc.is_in(pc.ascii_trim(column, " \t"), value_set=pa.array(self._codes)))
        if self._both_commas:
            special |= ~_mask(pc.match_substring(column, self._mark))
        return special


def _matching(column: Any, pattern: str) -> Mask:
    import pyarrow.compute as pc

    return _mask(pc.match_substring_regex(column, pattern))


def _mask(values: Any) -> Mask:
    return np.asarray(values.to_numpy(zero_copy_only=False), dtype=np.bool_)
