"""From content to HTML, by templates that run in a sandbox and only loop."""

from functools import cache

from jinja2 import Environment, FileSystemLoader, StrictUndefined
from jinja2.exceptions import TemplateError
from jinja2.sandbox import ImmutableSandboxedEnvironment

from assayfolio.errors import RenderingError
from assayfolio.report.assets import template_folder
from assayfolio.report.content import ReportContent, Section

FIGURE_SCHEME = "figure:"


@cache
def _environment() -> Environment:
    return ImmutableSandboxedEnvironment(
        loader=FileSystemLoader(template_folder()),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )


def html_of(content: ReportContent, cards_on_first_page: int) -> str:
    """The report as one HTML document; cards beyond those of the first page continue on the second.

    Raises RenderingError where a template is faulty.
    """
    return _html(content, cards_on_first_page, content.sections)


def first_pages_of(content: ReportContent, cards_on_first_page: int) -> str:
    """The pages of answers alone, for finding out how many cards the first page holds."""
    return _html(content, cards_on_first_page, ())


def _html(content: ReportContent, cards_on_first_page: int, sections: tuple[Section, ...]) -> str:
    return html_from(
        "report.html.j2",
        content=content,
        sections=sections,
        first_cards=content.cards[:cards_on_first_page],
        more_cards=content.cards[cards_on_first_page:],
        figure_scheme=FIGURE_SCHEME,
    )


def html_from(name: str, **values: object) -> str:
    """The template `name`, filled with `values`.

    Raises RenderingError where the template is faulty.
    """
    try:
        return _environment().get_template(name).render(**values)
    except TemplateError as error:
        raise RenderingError(f"the {name} template is faulty: {error}") from error
