"""The pages themselves: HTML from the values, by templates that are handed in as texts.

A page is the same bytes for the same values. Every text that comes from a study, its data or the audit trail
goes through the templates' escaping.
"""

from collections.abc import Mapping

from jinja2 import DictLoader, Environment, StrictUndefined

from assayfolio.pages.sparklines import sparks_of
from assayfolio.pages.values import FrontPage, RunPage, StudyPage
from assayfolio.pages.wording import answer_rows, criterion_rows, level_rows, plan_lines

NEWEST_SHOWN = 100
"""Runs in the table of a page as it is without scripts."""

SIGNS = {
    "draft": "draft",
    "in review": "review",
    "approved": "approved",
    "superseded": "superseded",
    "void": "void",
    "failed": "failed",
}
_ROOT_FROM_FRONT = ""
_ROOT_FROM_STUDY = "../../../"


class Site:
    """Makes pages by the templates of the register, given by name."""

    def __init__(self, templates: Mapping[str, str]) -> None:
        self._environment = Environment(
            loader=DictLoader(dict(templates)),
            autoescape=True,
            undefined=StrictUndefined,
            trim_blocks=True,
            lstrip_blocks=True,
            keep_trailing_newline=True,
        )
        self._environment.globals.update(
            signs=SIGNS, attention=needs_attention, minute=minute, thousands=thousands
        )

    def front_page(self, front: FrontPage) -> bytes:
        """`index.html`: all runs, the studies, the laboratory's own records."""
        return self._page("front.html.j2", root=_ROOT_FROM_FRONT, front=front)

    def study_page(self, page: StudyPage) -> bytes:
        """The page of one study."""
        return self._page(
            "study.html.j2",
            root=_ROOT_FROM_STUDY,
            page=page,
            plan=tuple(plan_lines(page.findings)),
            sparks=sparks_of(page.series),
        )

    def run_page(self, page: RunPage) -> bytes:
        """The page of one run."""
        responses = {} if page.findings is None else page.findings.get("responses", {})
        answers = [
            (
                name,
                response.get("unit") or "",
                tuple(answer_rows(response)),
                tuple(criterion_rows(response)),
                level_rows(response),
            )
            for name, response in responses.items()
        ]
        return self._page("run.html.j2", root=_ROOT_FROM_STUDY, page=page, answers=answers)

    def _page(self, template: str, **values: object) -> bytes:
        return self._environment.get_template(template).render(**values).encode("utf-8")


def needs_attention(words: str) -> bool:
    """Whether a word of a row asks to be looked at."""
    return words.startswith(("not met", "changed", "missing", "not readable", "failed", "no result"))


def minute(time: str) -> str:
    """A time of the audit trail to the minute: "2031-03-02 09:15"."""
    return f"{time[:10]} {time[11:16]}" if time else ""


def thousands(count: int) -> str:
    """A count with a thin space between the thousands."""
    return f"{count:,}".replace(",", "\u202f")
