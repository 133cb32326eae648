"""The text of a report's PDF file, page by page: for comparing two reports whose bytes differ.

Reads the files that this program writes: one classic cross-reference table, streams that are plain or
deflated, text in fonts with two-byte codes and a map to Unicode (ISO 32000-1, 7.5.4, 9.7 and 9.10.3). Files
with anything else, such as signed ones, are refused.
"""

import re
import zlib
from bisect import bisect_right
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

MOST_BYTES = 64 * 1024 * 1024
_DEEPEST = 8
_SPECIAL = re.compile(rb"[\s()<>\[\]{}/%]")
_BLANK = re.compile(rb"(?:[\s\0]|%[^\r\n]*)*")
_ESCAPE = re.compile(rb"\\(?:[0-7]{1,3}|\r\n|.)", re.DOTALL)
_CODE = rb"<([0-9A-Fa-f]+)>\s*"
_CHARACTERS = re.compile(_CODE + _CODE)
_RANGES = re.compile(_CODE + _CODE + _CODE)


class UnreadablePdfError(ValueError):
    """The file is not a PDF of the kind that this program writes."""


class Name(str):
    """A PDF name, without its slash."""

    __slots__ = ()


class Operator(bytes):
    """A word that is no value: an operator of a content stream, or a keyword."""

    __slots__ = ()


@dataclass(frozen=True, slots=True)
class Reference:
    """A reference to an object of the file."""

    number: int


class _Values:
    """Reads one value after the other from bytes."""

    def __init__(self, content: bytes, at: int = 0) -> None:
        self.content = content
        self.at = at

    def next(self) -> Any:
        """The next value or word; None at the end."""
        blank = _BLANK.match(self.content, self.at)
        self.at = blank.end() if blank else self.at
        first = self.content[self.at : self.at + 1]
        two = self.content[self.at : self.at + 2]
        if not first:
            return None
        if two in (b"<<", b">>"):
            self.at += 2
            return self._dictionary() if two == b"<<" else Operator(two)
        if first == b"<":
            return self._hexadecimal()
        if first == b"(":
            return self._text()
        if first == b"/":
            self.at += 1
            return Name(self._word().decode("latin-1"))
        if first in b"[]{}":
            self.at += 1
            return self._list() if first == b"[" else Operator(first)
        return self._number_or_word()

    def _word(self) -> bytes:
        end = _SPECIAL.search(self.content, self.at)
        start, self.at = self.at, end.start() if end else len(self.content)
        return self.content[start : self.at]

    def _number_or_word(self) -> Any:
        word = self._word()
        if not word:
            raise UnreadablePdfError("a character stands where none may")
        if not re.fullmatch(rb"[+-]?(\d+\.?\d*|\.\d+)", word):
            return Operator(word)
        reference = (
            re.compile(rb"\s+(\d+)\s+R(?![\w])").match(self.content, self.at) if word.isdigit() else None
        )
        if reference:
            self.at = reference.end()
            return Reference(int(word))
        return float(word) if b"." in word else int(word)

    def _until(self, end: bytes) -> Iterator[Any]:
        while (value := self.next()) is not None:
            if isinstance(value, Operator) and value == end:
                return
            yield value
        raise UnreadablePdfError(f"{end.decode()} is missing")

    def _list(self) -> list[Any]:
        return list(self._until(b"]"))

    def _dictionary(self) -> dict[str, Any]:
        values = list(self._until(b">>"))
        return dict(zip(values[::2], values[1::2], strict=False))

    def _hexadecimal(self) -> bytes:
        end = self.content.find(b">", self.at)
        digits = re.sub(rb"\s", b"", self.content[self.at + 1 : end])
        self.at = end + 1
        try:
            return bytes.fromhex((digits + b"0" * (len(digits) % 2)).decode("ascii"))
        except ValueError as error:
            raise UnreadablePdfError("a string of hexadecimal digits is malformed") from error

    def _text(self) -> bytes:
        depth, start = 0, self.at
        while self.at < len(self.content):
            byte = self.content[self.at : self.at + 1]
            self.at += 2 if byte == b"\\" else 1
            depth += (byte == b"(") - (byte == b")")
            if depth == 0:
                return _ESCAPE.sub(_unescaped, self.content[start + 1 : self.at - 1])
        raise UnreadablePdfError("a string has no end")


def _unescaped(found: re.Match[bytes]) -> bytes:
    after = found[0][1:]
    if after[:1].isdigit():
        return bytes([int(after, 8) & 255])
    return {b"n": b"\n", b"r": b"\r", b"t": b"\t", b"b": b"\b", b"f": b"\f", b"\n": b"", b"\r\n": b""}.get(
        after, after
    )


class _File:
    """A PDF file by its cross-reference table."""

    def __init__(self, content: bytes) -> None:
        self.content = content
        start = content.rfind(b"startxref")
        found = re.match(rb"startxref\s+(\d+)\s+%%EOF\s*$", content[start:])
        table = re.compile(rb"xref\s+0 (\d+)\s+").match(content, int(found[1])) if found else None
        if table is None:
            raise UnreadablePdfError("it has no plain cross-reference table")
        entries = content[table.end() : table.end() + 20 * int(table[1])]
        lines = [entries[at : at + 20] for at in range(0, len(entries), 20)]
        self.offsets = {n: int(line[:10]) for n, line in enumerate(lines) if line[17:18] == b"n"}
        self._starts = sorted({*self.offsets.values(), table.start()})
        self.trailer = _Values(content, content.find(b"trailer", table.end()) + len(b"trailer")).next()

    def get(self, value: Any) -> Any:
        """`value`, or what it refers to."""
        return self._object(value.number)[0] if isinstance(value, Reference) else value

    def stream(self, value: Any) -> bytes:
        """The content of a stream, inflated."""
        if not isinstance(value, Reference):
            raise UnreadablePdfError("a stream is not an object of its own")
        described, at = self._object(value.number)
        length = self.get(described.get("Length")) if isinstance(described, dict) else None
        opening = re.compile(rb"\s*stream\r?\n").match(self.content, at)
        if opening is None or not isinstance(length, int):
            raise UnreadablePdfError(f"object {value.number} is no stream")
        raw = self.content[opening.end() : opening.end() + length]
        kind = self.get(described.get("Filter"))
        if kind is None:
            return raw
        if kind not in ("FlateDecode", ["FlateDecode"]):
            raise UnreadablePdfError(f"object {value.number} is packed in an unknown way")
        inflater = zlib.decompressobj()
        try:
            plain = inflater.decompress(raw, MOST_BYTES)
        except zlib.error as error:
            raise UnreadablePdfError(f"object {value.number}: {error}") from error
        if inflater.unconsumed_tail:
            raise UnreadablePdfError(f"object {value.number} is too large")
        return plain

    def _object(self, number: int) -> tuple[Any, int]:
        start = self.offsets.get(number)
        heading = None if start is None else re.compile(rb"\s*\d+\s+\d+\s+obj").match(self.content, start)
        if heading is None or start is None:
            raise UnreadablePdfError(f"object {number} is missing")
        following = bisect_right(self._starts, start)
        end = self._starts[following] if following < len(self._starts) else len(self.content)
        values = _Values(self.content[:end], heading.end())
        return values.next(), values.at


def page_texts(pdf: bytes) -> tuple[str, ...]:
    """The text of each page, in the order in which it is drawn, without any white space.

    Where lines and pages break is thereby left out; what is written is not. Raises UnreadablePdfError.
    """
    try:
        file = _File(pdf)
        pages = file.get(file.get(file.trailer["Root"])["Pages"])
        return tuple(_page_text(file, file.get(page)) for page in pages["Kids"])
    except (KeyError, TypeError, AttributeError, IndexError, RecursionError) as error:
        raise UnreadablePdfError(f"its structure is another: {error!r}") from error


def _page_text(file: _File, page: Mapping[str, Any]) -> str:
    contents = page["Contents"]
    streams = contents if isinstance(contents, list) else [contents]
    drawn = b"\n".join(file.stream(one) for one in streams)
    return "".join("".join(_drawn_text(file, drawn, file.get(page["Resources"]), 0)).split())


def _drawn_text(file: _File, content: bytes, resources: Mapping[str, Any], depth: int) -> Iterator[str]:
    """The text that a content stream draws, that of the forms it draws included."""
    if depth > _DEEPEST:
        raise UnreadablePdfError("drawings are nested too deep")
    fonts, forms = (file.get(resources.get(key, {})) for key in ("Font", "XObject"))
    glyphs: Mapping[int, str] = {}
    operands: list[Any] = []
    values = _Values(content)
    while (value := values.next()) is not None:
        if not isinstance(value, Operator):
            operands.append(value)
            continue
        if value == b"Tf":
            glyphs = _glyphs(file, file.get(fonts[operands[0]]))
        elif value in (b"Tj", b"TJ"):
            shown = operands[-1] if isinstance(operands[-1], list) else [operands[-1]]
            yield from (_decoded(part, glyphs) for part in shown if isinstance(part, bytes))
        elif value == b"Do":
            form = file.get(forms[operands[0]])
            if form.get("Subtype") == "Form":
                inside = file.get(form.get("Resources", {}))
                yield from _drawn_text(file, file.stream(forms[operands[0]]), inside, depth + 1)
        operands.clear()


def _decoded(codes: bytes, glyphs: Mapping[int, str]) -> str:
    pairs = (int.from_bytes(codes[at : at + 2], "big") for at in range(0, len(codes), 2))
    return "".join(glyphs.get(code, f"[glyph {code}]") for code in pairs)


def _glyphs(file: _File, font: Mapping[str, Any]) -> Mapping[int, str]:
    """Code -> text, from the font's map to Unicode."""
    if "ToUnicode" not in font:
        raise UnreadablePdfError("a font has no map to Unicode")
    table = file.stream(font["ToUnicode"])
    glyphs: dict[int, str] = {}
    for kind, block in re.findall(rb"begin(bfchar|bfrange)(.*?)end\1", table, re.DOTALL):
        if kind == b"bfchar":
            for code, text in _CHARACTERS.findall(block):
                glyphs[int(code, 16)] = bytes.fromhex(text.decode()).decode("utf-16-be", "replace")
        else:
            for first, last, text in _RANGES.findall(block):
                code, start = int(first, 16), int(text, 16)
                glyphs |= {code + step: chr(start + step) for step in range(int(last, 16) - code + 1)}
    return glyphs
