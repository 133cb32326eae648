"""Loading the renderer ahead of its use, so that a record of the environment sees its libraries."""

from assayfolio.report.pdf import Look, load
from assayfolio.study.plan import Laboratory


def load_renderer(laboratory: Laboratory) -> None:
    """Load the libraries and the fonts that set this laboratory's reports.

    Raises RenderingError where the machine lacks one.
    """
    load(Look(laboratory.paper, laboratory.accent))
