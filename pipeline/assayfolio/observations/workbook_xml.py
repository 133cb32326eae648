"""The XML of a workbook's parts, gone through event by event.

A document type declaration is refused, and with it every entity and every reference to something outside; so
is a number of elements that takes long.
"""

from collections.abc import Callable, Mapping
from typing import Generic, TypeVar
from xml.parsers import expat

from assayfolio.observations.workbook_package import Package
from assayfolio.study.faults import shown

MOST_TAGS = 4_000_000
"""Tags of all kinds. A cell has four and a row two: 400,000 rows with two columns take a few seconds."""

Start = Callable[[dict[str, str]], None]
End = Callable[[], None]
Handler = TypeVar("Handler")


class _ByLocalName(dict[str, Handler], Generic[Handler]):
    """Handlers by the full name of an element, looked up by its name without namespace the first time."""

    def __init__(self, known: Mapping[str, Handler], otherwise: Handler) -> None:
        super().__init__()
        self._known = known
        self._otherwise = otherwise

    def __missing__(self, name: str) -> Handler:
        handler = self[name] = self._known.get(name.rpartition(" ")[2], self._otherwise)
        return handler


def walk(
    package: Package,
    part: str,
    starts: Mapping[str, Start],
    ends: Mapping[str, End] | None = None,
    text: Callable[[str], None] | None = None,
) -> None:
    """Go through `part`: call what stands under the name of each element that begins or ends, and `text`.

    The names are without namespace. Raises DataError where the part is missing, or its XML is not
    well-formed, declares a document type or has too many elements; whatever is called may raise too.
    """

    def declared(*_: object) -> None:
        raise package.damaged(f"part {shown(part)} has a document type declaration")

    content = package.read(part)
    if content.count(b"<") > MOST_TAGS:
        raise package.too_long(f"part {shown(part)} has more than {MOST_TAGS:,} tags")
    beginning = _ByLocalName(starts, _ignore_start)
    parser = expat.ParserCreate(namespace_separator=" ")
    parser.buffer_text = True
    parser.StartElementHandler = lambda name, given: beginning[name](given)
    if ends is not None:
        ending = _ByLocalName(ends, _ignore_end)
        parser.EndElementHandler = lambda name: ending[name]()
    parser.CharacterDataHandler = text
    parser.StartDoctypeDeclHandler = declared
    try:
        parser.Parse(content, True)
    except expat.ExpatError as error:
        raise package.damaged(f"part {shown(part)} is no well-formed XML: {error}") from None
    except (ValueError, LookupError) as error:  # an encoding that the parser does not know
        raise package.damaged(f"part {shown(part)} cannot be decoded: {error}") from None


def _ignore_start(_: dict[str, str]) -> None:
    """For elements that do not matter."""


def _ignore_end() -> None:
    """For elements that do not matter."""
