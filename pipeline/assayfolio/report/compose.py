"""From the input of a report to its content: every sentence and every digit final."""

import re
from collections.abc import Callable

from assayfolio.errors import RenderingError
from assayfolio.report.amendments import registration_section
from assayfolio.report.analysis import anova_section
from assayfolio.report.answers import cards
from assayfolio.report.assumptions import checks_section
from assayfolio.report.basis import Basis
from assayfolio.report.content import Heading, ReportContent, Section, SignatureBox, TableBlock
from assayfolio.report.criteria import criteria_section
from assayfolio.report.data import data_section
from assayfolio.report.deviations import deviations_section
from assayfolio.report.equivalence import equivalence_section
from assayfolio.report.exclusions import exclusions_section
from assayfolio.report.executions import further_words
from assayfolio.report.facts import ReportInput
from assayfolio.report.families import comparisons_section
from assayfolio.report.limits import limits_section
from assayfolio.report.listing import listing_section
from assayfolio.report.notation import kept_together
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.outliers import outliers_section
from assayfolio.report.people import replaced_words
from assayfolio.report.planned import plan_section
from assayfolio.report.precision import precision_section
from assayfolio.report.prose import Prose, prose
from assayfolio.report.provenance import provenance_section
from assayfolio.report.received import files_words
from assayfolio.report.registration import digest_words, is_calm, page_words, standing_words
from assayfolio.report.spread import spread_section
from assayfolio.report.statement import method_section
from assayfolio.report.summary import summary
from assayfolio.report.typeface import wrapped
from assayfolio.report.unreported import not_reported_section
from assayfolio.report.wording import (
    CAUTIONS,
    DRAFT_SENTENCE,
    NO_SIGN_OFF,
    alpha_words,
    counted,
)
from assayfolio.version import VERSION

_MEANING_SIZE, _MEANING_LINE = 7.6, 9.8
_BOX_WIDTH = 143.0  # a little less than 51.3 mm
_COLOUR = re.compile(r"#[0-9a-fA-F]{6}\Z")
_MOST_RESPONSES_NAMED = 4


def compose(content: ReportInput) -> ReportContent:
    """The content of the report on `content`.

    Raises RenderingError where the parts of the input do not belong together.
    """
    accent = content.laboratory.accent
    if not _COLOUR.match(accent):
        raise RenderingError(f"the laboratory's accent {accent!r} is not a colour such as #0f5b66")
    bases = Basis.of_each(content)
    study, run, laboratory = content.study, content.run, content.laboratory
    boxes = _signature_boxes(content)
    sections = _sections(bases, accent)
    number = f"{study.study} · {run.label}"
    return ReportContent(
        title=kept_together(study.title),
        document_title=f"{study.title} ({study.study}, {run.label})",
        laboratory=laboratory.name,
        address=", ".join(laboratory.address),
        laboratory_note=laboratory.note or "",
        number=number,
        created=f"{run.started_utc[:19]}Z",
        generator=f"Assayfolio {VERSION}",
        standing=standing_words(bases[0]),
        facts=_facts(bases),
        cards=cards(bases, accent, _table_labels(sections)),
        summary=summary(bases),
        sign_off=boxes,
        sign_off_words="" if boxes else "No signatures are planned for this report.",
        meaning_height=meaning_height(boxes),
        cautions=prose(CAUTIONS),
        head_left=number,
        head_right=laboratory.name,
        foot_left=DRAFT_SENTENCE if boxes else NO_SIGN_OFF,
        registration=page_words(run),
        is_calm=is_calm(run),
        digest=digest_words(run),
        sections=sections,
        end_mark=f"End of the report on {study.study}, {run.label}",
    )


def _sections(bases: tuple[Basis, ...], accent: str) -> tuple[Section, ...]:
    """All sections in the order of the report; tables and figures are numbered through."""
    numbering = Numbering()
    sections = [plan_section(bases, numbering)]
    if bases[0].outline.has(Part.REGISTRATION):
        sections.append(registration_section(bases, numbering))
    if bases[0].outline.has(Part.DEVIATIONS):
        sections.append(deviations_section(bases[0], numbering))
    for basis in bases:
        sections += _sections_of(basis, numbering, accent)
    sections.append(not_reported_section(bases[0]))
    sections.append(method_section(bases))
    sections.append(provenance_section(bases[0]))
    sections.append(listing_section(bases, numbering))
    return tuple(sections)


def _sections_of(basis: Basis, numbering: Numbering, accent: str) -> list[Section]:
    makers: dict[Part, Callable[[], Section]] = {
        Part.DATA: lambda: data_section(basis, numbering, accent),
        Part.EXCLUSIONS: lambda: exclusions_section(basis, numbering),
        Part.LIMITS: lambda: limits_section(basis, numbering),
        Part.CHECKS: lambda: checks_section(basis, numbering, accent),
        Part.OUTLIERS: lambda: outliers_section(basis, numbering),
        Part.ANOVA: lambda: anova_section(basis, numbering),
        Part.COMPARISONS: lambda: comparisons_section(basis, numbering, accent),
        Part.EQUIVALENCE: lambda: equivalence_section(basis, numbering, accent),
        Part.SPREAD: lambda: spread_section(basis, numbering),
        Part.PRECISION: lambda: precision_section(basis, numbering),
        Part.CRITERIA: lambda: criteria_section(basis, numbering),
    }
    return [make() for part, make in makers.items() if basis.outline.has(part, basis.index)]


def _table_labels(sections: tuple[Section, ...]) -> dict[str, str]:
    """The label of the first table behind each anchor, be it that of a section or of a heading in it."""
    labels: dict[str, str] = {}
    for section in sections:
        anchor = section.anchor
        for block in section.blocks:
            if isinstance(block, Heading) and block.anchor:
                anchor = block.anchor
            elif isinstance(block, TableBlock):
                labels.setdefault(anchor, block.table.label)
    return labels


def _signature_boxes(content: ReportInput) -> tuple[SignatureBox, ...]:
    planned = content.study.sign_off
    seen: dict[str, int] = {}
    boxes = []
    for item in planned:
        seen[item.role] = seen.get(item.role, 0) + 1
        field = item.role if seen[item.role] == 1 else f"{item.role}-{seen[item.role]}"
        boxes.append(SignatureBox(field, item.role.capitalize(), item.meaning))
    return tuple(boxes)


def meaning_height(boxes: tuple[SignatureBox, ...]) -> str:
    """Room for the longest meaning, so that the fields of a row stand level."""
    lines = max((len(wrapped(box.meaning, _MEANING_SIZE, _BOX_WIDTH)) for box in boxes), default=0)
    return f"{lines * _MEANING_LINE:.1f}pt"


def _facts(bases: tuple[Basis, ...]) -> tuple[Prose, ...]:
    basis = bases[0]
    study, run = basis.study, basis.content.run
    effects = {"fixed": "fixed levels", "random": "random levels"}[study.design.effects]
    variances = {"pooled": "one error variance", "separate": "separate variances"}[study.design.variances]
    further = further_words(run.executions)
    return (
        prose(
            "{responses} by {factor} ({levels}) · {effects}, {variances} · *α* = {alpha}",
            responses=_responses(bases),
            factor=basis.factor,
            levels=counted(len(basis.levels), "level"),
            effects=effects,
            variances=variances,
            alpha=alpha_words(basis),
        ),
        prose(
            "{total} from {file} · run on {date} at {time} UTC by {actor}{earlier}{execution}",
            total=counted(sum(one.total for one in bases), "value"),
            file=files_words(basis),
            date=run.started_utc[:10],
            time=run.started_utc[11:16],
            actor=run.actor,
            earlier=f" · earlier runs of this study: {run.number - 1}" if run.number > 1 else "",
            execution="" if further else f" · execution {run.executions.number} on these data",
        ),
        *([prose("{words}", words=further)] if further else []),
        *([] if run.replaces is None else [prose("{words}", words=replaced_words(run.replaces))]),
    )


def _responses(bases: tuple[Basis, ...]) -> str:
    named = [
        one.response.response + (f" in {one.response.unit}" if one.response.unit else "")
        for one in bases[:_MOST_RESPONSES_NAMED]
    ]
    rest = len(bases) - len(named)
    return ", ".join(named) + (f" and {rest} more responses" if rest else "")
