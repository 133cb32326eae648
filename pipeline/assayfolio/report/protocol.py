"""The protocol of a study: the plan as it is registered, set for reading and signing."""

from dataclasses import dataclass

from assayfolio.errors import RenderingError
from assayfolio.report.compose import meaning_height
from assayfolio.report.content import Section, SignatureBox
from assayfolio.report.facts import AttachedFile
from assayfolio.report.notation import decimal, kept_together
from assayfolio.report.numbering import Numbering
from assayfolio.report.pages import FIGURE_SCHEME, html_from
from assayfolio.report.pdf import Look, lay_out, write
from assayfolio.report.prose import Prose, prose
from assayfolio.report.protocol_contents import ContentsLine, contents_of
from assayfolio.report.protocol_facts import ProtocolInput
from assayfolio.report.protocol_plan import data_section, plan_section, questions_section
from assayfolio.report.protocol_registration import (
    checking_section,
    later_section,
    minute,
    registration_section,
    standing,
)
from assayfolio.report.protocol_sizes import power_section, worksheet_section
from assayfolio.report.wording import counted
from assayfolio.version import VERSION

_TEMPLATE = "protocol.html.j2"
_MEANINGS = {
    "author": "I wrote this plan",
    "reviewer": "I checked this plan",
    "approver": "I approve this plan",
}
_DRAFT = "draft unless every sign-off field on page 1 carries a valid signature"
_NO_SIGN_OFF = "the study plans no sign-off: this protocol carries no signatures"
_CAUTIONS = (
    "What this document is not: it holds no result and no decision on any lot, method or instrument. It "
    "states what was fixed, and the audit trail when; whether the plan is fit for its purpose is for those "
    "who sign it to say. Where the plan changes, an amendment with its own number and reason takes its "
    "place, and this protocol is kept."
)
_FIRST_PAGE_FULL = (
    "the first page of the protocol cannot hold title, purpose and sign-off; shorten the title, the purpose "
    "or the laboratory's address"
)


@dataclass(frozen=True, slots=True)
class ProtocolContent:
    """A whole protocol, all words final."""

    title: str
    document_title: str
    kind: str
    laboratory: str
    address: str
    laboratory_note: str
    number: str
    created: str
    generator: str
    standing: str
    attention: bool
    facts: tuple[Prose, ...]
    contents: tuple[ContentsLine, ...]
    sign_off: tuple[SignatureBox, ...]
    meaning_height: str
    cautions: str
    foot_left: str
    digest: str
    sections: tuple[Section, ...]
    end_mark: str


def render_protocol(content: ProtocolInput) -> bytes:
    """The protocol as a PDF file: the same bytes for the same input, everywhere.

    Raises RenderingError where it cannot be set exactly as written.
    """
    laboratory, facts = content.laboratory, content.facts
    html = html_from(_TEMPLATE, content=compose_protocol(content), figure_scheme=FIGURE_SCHEME)
    laid_out = lay_out(html, {}, Look(laboratory.paper, laboratory.accent))
    if not laid_out.first_page_fits:
        raise RenderingError(_FIRST_PAGE_FULL)
    definition = AttachedFile(
        "study.yaml", "application/yaml", "Study definition", "Source", content.definition
    )
    return write(laid_out, (definition,), facts.started_utc)


def compose_protocol(content: ProtocolInput) -> ProtocolContent:
    """The content of the protocol."""
    study, laboratory, facts = content.study, content.laboratory, content.facts
    words, attention = standing(facts)
    sections = _sections(content)
    boxes = _signature_boxes(content)
    number = f"{study.study} · {facts.label}"
    return ProtocolContent(
        title=kept_together(study.title),
        document_title=f"{study.title} ({study.study}, {facts.label})",
        kind="Protocol of a comparison" if facts.amends is None else "Amended protocol of a comparison",
        laboratory=laboratory.name,
        address=", ".join(laboratory.address),
        laboratory_note=laboratory.note or "",
        number=number,
        created=f"{facts.started_utc[:19]}Z",
        generator=f"Assayfolio {VERSION}",
        standing=words,
        attention=attention,
        facts=_facts(content),
        contents=contents_of(content, sections),
        sign_off=boxes,
        meaning_height=meaning_height(boxes),
        cautions=_CAUTIONS,
        foot_left=_DRAFT if boxes else _NO_SIGN_OFF,
        digest=f"plan {facts.plan_sha256[:8]}",
        sections=sections,
        end_mark=f"End of the protocol of {study.study}, {facts.label}",
    )


def _sections(content: ProtocolInput) -> tuple[Section, ...]:
    numbering = Numbering()
    makers = (
        registration_section,
        plan_section,
        questions_section,
        data_section,
        power_section,
        worksheet_section,
        later_section,
        checking_section,
    )
    sections: list[Section] = []
    for make in makers:
        made = make(content, numbering, len(sections) + 1)
        sections += [] if made is None else [made]
    return tuple(sections)


def _facts(content: ProtocolInput) -> tuple[Prose, ...]:
    study, facts = content.study, content.facts
    levels = counted(len(study.data.levels), "level") if study.data.levels else "levels as measured"
    units = [
        name + (f" in {unit}" if (unit := study.data.unit_of(name)) else "") for name in study.data.response
    ]
    return (
        prose(
            "{responses} by {factor} ({levels}) · {effects}, {variances} · *α* = {alpha}",
            responses=", ".join(units),
            factor=study.data.factor,
            levels=levels,
            effects={"fixed": "fixed levels", "random": "random levels"}[study.design.effects],
            variances={"pooled": "one error variance", "separate": "separate variances"}[
                study.design.variances
            ],
            alpha=decimal(study.alpha),
        ),
        prose("prepared {time} by {actor}", time=minute(facts.started_utc), actor=facts.actor),
    )


def _signature_boxes(content: ProtocolInput) -> tuple[SignatureBox, ...]:
    """A field for each role that the study plans, with what signing the plan means."""
    roles = [item.role for item in content.study.sign_off]
    return tuple(SignatureBox(role, role.capitalize(), _MEANINGS[role]) for role in roles)
