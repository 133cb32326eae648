"""The one door through which the renderer gets files: a list of things by exact name, and nothing else."""

from collections.abc import Mapping
from typing import Any

from assayfolio.report.pages import FIGURE_SCHEME
from assayfolio.report.typeface import FACES, FAMILY, FIGURES_FAMILY, FONT_FOLDER, Face

FONT_SCHEME = "font:"
_STYLES: dict[Face, str] = {
    "regular": "font-weight: 400; font-style: normal",
    "semibold": "font-weight: 600; font-style: normal",
    "italic": "font-weight: 400; font-style: italic",
}


def font_faces() -> str:
    """The rules that make the shipped fonts known, and the regular face once more with tabular figures."""
    rules = [f"font-family: {FAMILY}; {_STYLES[face]}; {_source(name)}" for face, name in FACES.items()]
    tabular = f'font-family: "{FIGURES_FAMILY}"; font-feature-settings: "tnum" 1; {_source(FACES["regular"])}'
    return "\n".join(f"@font-face {{ {rule} }}" for rule in [*rules, tabular])


def _source(name: str) -> str:
    return f'src: url("{FONT_SCHEME}{name}")'


def make_fetcher(pictures: Mapping[str, bytes], others: Mapping[str, tuple[str, bytes]] | None = None) -> Any:
    """A fetcher of the shipped fonts, of `pictures` by name, and of `others` by address; it refuses the rest.

    A refusal ends the rendering with RenderingError. No file but the fonts is opened, nothing is fetched.
    """
    from weasyprint.urls import URLFetcher, URLFetcherResponse

    from assayfolio.errors import RenderingError

    served = {f"{FIGURE_SCHEME}{name}": ("image/svg+xml", svg) for name, svg in pictures.items()}
    served.update(others or {})

    class ListedOnly(URLFetcher):  # type: ignore[misc]
        """Serves what is listed."""

        def fetch(self, url: str, headers: Mapping[str, str] | None = None) -> Any:  # noqa: ARG002
            """The listed content at `url`."""
            if url in served:
                media_type, content = served[url]
                return URLFetcherResponse(url, content, {"Content-Type": media_type})
            name = url.removeprefix(FONT_SCHEME)
            if url.startswith(FONT_SCHEME) and name in FACES.values():
                return URLFetcherResponse(
                    url, (FONT_FOLDER / name).read_bytes(), {"Content-Type": "font/ttf"}
                )
            raise RenderingError(f"the report asks for {url}, which is not part of it")

    return ListedOnly()
