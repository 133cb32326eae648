"""Where the templates and styles of the report are, and how they are read."""

from functools import cache
from pathlib import Path

from assayfolio.errors import RenderingError

_PACKAGE = Path(__file__).resolve().parent.parent


def template_folder() -> Path:
    """The folder of templates: beside the installed package, else that of the checkout.

    Raises RenderingError where there is neither.
    """
    for folder in (_PACKAGE / "templates", _PACKAGE.parent.parent / "templates"):
        if (folder / "report.html.j2").is_file():
            return folder
    raise RenderingError(
        f"the report templates are missing: looked in {_PACKAGE / 'templates'}; install the package again"
    )


@cache
def stylesheet_text() -> str:
    """The style sheet of the report."""
    return (template_folder() / "report.css").read_text(encoding="utf-8")
