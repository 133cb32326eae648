"""Runs without their pages set in type: everything else is the program itself, on real folders."""

import contextlib
from collections.abc import Iterator
from unittest import mock

from assayfolio.report.render import RenderedReport

PDF = b"%PDF-1.7 a page that was not set\n"


@contextlib.contextmanager
def unrendered() -> Iterator[None]:
    """Within, a report or protocol is a few bytes."""
    with (
        mock.patch("assayfolio.workflow.run.load_renderer"),
        mock.patch("assayfolio.workflow.run.render_report", return_value=RenderedReport(PDF, ())),
        mock.patch("assayfolio.workflow.protocol_folio.load_renderer"),
        mock.patch("assayfolio.workflow.protocol_folio.render_protocol", return_value=PDF),
    ):
        yield
