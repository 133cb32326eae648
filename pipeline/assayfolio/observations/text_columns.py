"""Some columns of rows that stand on one line each, as wholes."""

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from assayfolio.observations.long_text import line_count

if TYPE_CHECKING:
    import pyarrow as pa


class TextColumns:
    """Takes the columns at given positions out of stretches of text.

    `labels` are those with few entries: they come dictionary-encoded, entries in order of first appearance.
    """

    def __init__(self, width: int, separator: str, texts: Sequence[int], labels: Sequence[int]) -> None:
        import pyarrow as pa
        import pyarrow.csv as csv

        names = [str(at) for at in range(width)]
        types: dict[str, Any] = {str(at): pa.string() for at in (*texts, *labels)}
        self._names = names
        self._labels = frozenset(labels)
        self._separator = separator
        self._convert = csv.ConvertOptions(
            check_utf8=False,
            column_types=types,
            include_columns=[name for name in names if name in types],
            null_values=[],
            strings_can_be_null=False,
            quoted_strings_can_be_null=False,
        )

    def read(self, rows: bytes) -> "dict[int, pa.Array[Any]] | None":
        """The columns by their positions; None where some row has more or fewer cells than the others.

        Every line of `rows` is one row.
        """
        import pyarrow as pa
        import pyarrow.csv as csv

        try:
            table = csv.read_csv(
                pa.BufferReader(rows),
                read_options=csv.ReadOptions(
                    use_threads=False, block_size=len(rows) + 1, column_names=self._names
                ),
                parse_options=csv.ParseOptions(
                    delimiter=self._separator,
                    quote_char='"' if b'"' in rows else False,
                    ignore_empty_lines=True,  # which the number of rows shows
                ),
                convert_options=self._convert,
            )
        except pa.ArrowInvalid:
            return None
        if table.num_rows != line_count(rows):
            return None
        columns = {int(name): table.column(name).chunk(0) for name in table.column_names}
        # Encoding afterwards is quicker than letting the reader do it.
        return {
            at: column.dictionary_encode() if at in self._labels else column for at, column in columns.items()
        }
