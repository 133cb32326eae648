"""A small SVG writer: lines, boxes, dots and text at exact places, in points, always the same bytes.

Coordinates are rounded to hundredths of a point. Text is live and set in the report's own typeface.
"""

from collections.abc import Iterable
from xml.sax.saxutils import escape, quoteattr

from assayfolio.report.typeface import FAMILY, FIGURES_FAMILY, text_width

INK = "#1d2429"
SECOND_INK = "#5b666d"
DOT_INK = "#616669"  # ink at 70 % on white
HAIRLINE = "#c9d0d4"

HAIR = 0.45
THIN_LINE = 0.7
STRONG_LINE = 1.3


def coordinate(value: float) -> str:
    """A coordinate in hundredths, without needless zeros and without a negative zero."""
    text = f"{value:.2f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text


class Drawing:
    """A drawing of `width` by `height` points that collects its elements in the order they are drawn."""

    def __init__(self, width: float, height: float) -> None:
        self.width = width
        self.height = height
        self._elements: list[str] = []

    def line(
        self, x1: float, y1: float, x2: float, y2: float, *, stroke: str = INK, width: float = THIN_LINE
    ) -> None:
        """A straight line."""
        self.polyline([(x1, y1), (x2, y2)], stroke=stroke, width=width)

    def polyline(
        self, points: Iterable[tuple[float, float]], *, stroke: str = INK, width: float = THIN_LINE
    ) -> None:
        """A line through `points`."""
        path = "L".join(f"{coordinate(x)} {coordinate(y)}" for x, y in points)
        self._elements.append(
            f'<path d="M{path}" fill="none" stroke="{stroke}" stroke-width="{coordinate(width)}"/>'
        )

    def area(self, points: Iterable[tuple[float, float]], *, fill: str) -> None:
        """A filled shape with `points` as its corners."""
        path = "L".join(f"{coordinate(x)} {coordinate(y)}" for x, y in points)
        self._elements.append(f'<path d="M{path}Z" fill="{fill}" stroke="none"/>')

    def box(self, x: float, y: float, width: float, height: float, *, fill: str) -> None:
        """A filled rectangle."""
        self._elements.append(
            f'<rect x="{coordinate(x)}" y="{coordinate(y)}" width="{coordinate(width)}"'
            f' height="{coordinate(height)}" fill="{fill}"/>'
        )

    def ring(self, x: float, y: float, radius: float, *, stroke: str = DOT_INK, width: float = 0.6) -> None:
        """An open circle: one observation."""
        self._elements.append(
            f'<circle cx="{coordinate(x)}" cy="{coordinate(y)}" r="{coordinate(radius)}" fill="none"'
            f' stroke="{stroke}" stroke-width="{coordinate(width)}"/>'
        )

    def dot(self, x: float, y: float, radius: float, *, fill: str = INK) -> None:
        """A filled circle: an estimate."""
        self._elements.append(
            f'<circle cx="{coordinate(x)}" cy="{coordinate(y)}" r="{coordinate(radius)}" fill="{fill}"/>'
        )

    def text(
        self,
        x: float,
        y: float,
        words: str,
        *,
        size: float = 7.2,
        fill: str = INK,
        anchor: str = "start",
        weight: int = 400,
        upright: bool = True,
        family: str = FAMILY,
    ) -> None:
        """Live text with its baseline at `y`; turned a quarter to the left where it is not upright."""
        turn = "" if upright else f' transform="rotate(-90 {coordinate(x)} {coordinate(y)})"'
        self._elements.append(
            f'<text x="{coordinate(x)}" y="{coordinate(y)}" font-family="{family}"'
            f' font-size="{coordinate(size)}" font-weight="{weight}" fill="{fill}"'
            f" text-anchor={quoteattr(anchor)}{turn}>"
            f"{escape(words)}</text>"
        )

    def figures(
        self, x: float, y: float, words: str, *, size: float = 7.2, fill: str = INK, anchor: str = "end"
    ) -> None:
        """A number, its figures of equal width so that columns align."""
        self.text(x, y, words, size=size, fill=fill, anchor=anchor, family=f"{FIGURES_FAMILY}, {FAMILY}")

    def count(self, x: float, y: float, n: int, *, size: float = 6.8, fill: str = SECOND_INK) -> None:
        """The number of values: `n = 6` with the symbol in italics."""
        self._elements.append(
            f'<text x="{coordinate(x)}" y="{coordinate(y)}" font-family="{FAMILY}"'
            f' font-size="{coordinate(size)}" font-style="italic" fill="{fill}">n</text>'
        )
        self.text(x + text_width("n ", size, "italic"), y, f"= {n}", size=size, fill=fill)

    def svg(self, title: str) -> bytes:
        """The drawing as an SVG file; `title` says in words what it shows."""
        width, height = coordinate(self.width), coordinate(self.height)
        head = (
            f'<svg xmlns="http://www.w3.org/2000/svg" width="{width}pt" height="{height}pt"'
            f' viewBox="0 0 {width} {height}" role="img">\n<title>{escape(title)}</title>\n'
        )
        return (head + "\n".join(self._elements) + "\n</svg>\n").encode()
