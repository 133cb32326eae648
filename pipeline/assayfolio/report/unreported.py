"""What was asked for and cannot be given."""

import re

from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Paragraph, Section
from assayfolio.report.numbering import Part
from assayfolio.report.prose import prose
from assayfolio.report.wording import capitalised

_QUOTED = re.compile(r"`([^`]+)`")


def not_reported_section(basis: Basis) -> Section:
    """Each result that was asked for and is not reported, with the reason."""
    place = basis.place(Part.NOT_REPORTED)
    missing = basis.content.findings.not_reported
    blocks: list[Block] = []
    if not missing:
        blocks.append(Paragraph(prose("Everything that the plan asks for is reported.")))
    blocks += [
        Paragraph(
            prose(
                "#{what}.# {reason}.",
                what=f"{item.response}, {item.what}"
                if basis.several and item.response is not None
                else capitalised(item.what),
                reason=capitalised(_QUOTED.sub("“\\1”", item.reason.rstrip("."))),
            )
        )
        for item in missing
    ]
    return Section(place.anchor, place.number, "Asked for and not reported", tuple(blocks))
