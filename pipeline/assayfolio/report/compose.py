"""From the input of a report to its content: every sentence and every digit final."""

import re

from assayfolio.errors import RenderingError
from assayfolio.report.analysis import anova_section, checks_section, not_reported_section
from assayfolio.report.answers import cards, summary
from assayfolio.report.basis import Basis
from assayfolio.report.content import Heading, ReportContent, Section, SignatureBox, TableBlock
from assayfolio.report.facts import ReportInput
from assayfolio.report.families import comparisons_section
from assayfolio.report.notation import kept_together
from assayfolio.report.numbering import Numbering
from assayfolio.report.plan_and_data import data_section, plan_section
from assayfolio.report.prose import Prose, prose, verbatim
from assayfolio.report.provenance import listing_section, provenance_section
from assayfolio.report.statement import method_section
from assayfolio.report.typeface import wrapped
from assayfolio.report.wording import (
    CAUTIONS,
    DRAFT_SENTENCE,
    EXPLORATORY,
    NO_SIGN_OFF,
    NOT_REGISTERED,
    alpha_words,
    counted,
)
from assayfolio.version import VERSION

_MEANING_SIZE, _MEANING_LINE = 7.6, 9.8
_BOX_WIDTH = 143.0  # a little less than 51.3 mm
_COLOUR = re.compile(r"#[0-9a-fA-F]{6}\Z")


def compose(content: ReportInput) -> ReportContent:
    """The content of the report on `content`.

    Raises RenderingError where the parts of the input do not belong together.
    """
    accent = content.laboratory.accent
    if not _COLOUR.match(accent):
        raise RenderingError(f"the laboratory's accent {accent!r} is not a colour such as #0f5b66")
    basis = Basis(content)
    numbering = Numbering()
    study, run, laboratory = content.study, content.run, content.laboratory
    boxes = _signature_boxes(content)
    sections = (
        plan_section(basis, numbering),
        data_section(basis, numbering, accent),
        checks_section(basis, numbering, accent),
        anova_section(basis, numbering),
        comparisons_section(basis, numbering, accent),
        not_reported_section(basis),
        method_section(basis),
        provenance_section(basis),
        listing_section(basis, numbering),
    )
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
        standing=EXPLORATORY,
        facts=_facts(basis),
        cards=cards(basis, accent, _table_labels(sections)),
        summary=summary(basis),
        sign_off=boxes,
        sign_off_words="" if boxes else "No signatures are planned for this report.",
        meaning_height=_meaning_height(boxes),
        cautions=prose(CAUTIONS),
        head_left=number,
        head_right=laboratory.name,
        foot_left=DRAFT_SENTENCE if boxes else NO_SIGN_OFF,
        registration=NOT_REGISTERED,
        digest=f"study definition {run.study_sha256[:8]}",
        sections=sections,
        end_mark=f"End of the report on {study.study}, {run.label}",
    )


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


def _meaning_height(boxes: tuple[SignatureBox, ...]) -> str:
    """Room for the longest meaning, so that the fields of a row stand level."""
    lines = max((len(wrapped(box.meaning, _MEANING_SIZE, _BOX_WIDTH)) for box in boxes), default=0)
    return f"{lines * _MEANING_LINE:.1f}pt"


def _facts(basis: Basis) -> tuple[Prose, ...]:
    study, run = basis.content.study, basis.content.run
    effects = {"fixed": "fixed levels", "random": "random levels"}[study.design.effects]
    variances = {"pooled": "one error variance", "separate": "separate variances"}[study.design.variances]
    unit = f" in {basis.response.unit}" if basis.response.unit else ""
    return (
        prose(
            "{response}{unit} by {factor} ({levels}) · {effects}, {variances} · *α* = {alpha}",
            response=basis.response.response,
            unit=unit,
            factor=basis.factor,
            levels=counted(len(basis.levels), "level"),
            effects=effects,
            variances=variances,
            alpha=alpha_words(basis),
        ),
        prose(
            "{total} from {file} · run on {date} at {time} UTC by {actor}{earlier}",
            total=counted(basis.total, "value"),
            file=verbatim(basis.content.observations.file),
            date=run.started_utc[:10],
            time=run.started_utc[11:16],
            actor=run.actor,
            earlier=f" · earlier runs of this study: {run.number - 1}" if run.number > 1 else "",
        ),
    )
