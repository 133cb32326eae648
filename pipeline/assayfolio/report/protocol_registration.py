"""What was registered, when, and how it stands to the data; and how a reader can check that."""

from assayfolio.report.content import Block, Entry, Facts, Heading, Items, Paragraph, Section, TableBlock
from assayfolio.report.numbering import Numbering
from assayfolio.report.prose import Prose, Words, prose, verbatim
from assayfolio.report.protocol_facts import ProtocolFacts, ProtocolInput
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.study.differences import shortened


def minute(time: str) -> str:
    """A time to the minute: "2026-01-31 09:15 UTC"."""
    return f"{time[:10]} {time[11:16]} UTC"


def standing(facts: ProtocolFacts) -> tuple[str, bool]:
    """How the plan stands to the data, for page 1; and whether that asks for attention."""
    what = "Pre-registration" if facts.amends is None else f"Amendment of {facts.amends}"
    if facts.data_first_seen is not None:
        seen = minute(facts.data_first_seen)
        return f"{what} after data of this study were first seen, {seen}.", True
    if facts.data_present:
        return f"{what} while a raw data file lay in its place already, not seen by any run.", True
    return f"{what} before any data of this study were seen.", False


def registration_section(content: ProtocolInput, numbering: Numbering, number: int) -> Section:
    """The registration, and for an amendment what it changes and why."""
    facts = content.facts
    blocks: list[Block] = [
        Facts(
            (
                Entry(
                    prose("Protocol"), prose("{study}, {label}", study=content.study.study, label=facts.label)
                ),
                Entry(prose("Prepared"), _times(facts)),
                Entry(prose("Prepared by"), prose("{actor} on {host}", actor=facts.actor, host=facts.host)),
                Entry(
                    prose("Study definition"),
                    verbatim(facts.definition_path),
                    facts.definition_sha256,
                ),
                Entry(
                    prose("Plan"),
                    prose("what the definition means, whatever its layout: plan.json"),
                    facts.plan_sha256,
                ),
                Entry(prose("Data"), prose(_data_words(facts))),
                Entry(
                    prose("Trail head"),
                    prose("entry {seq} of the audit trail", seq=str(facts.trail_seq)),
                    facts.trail_sha256,
                ),
            )
        ),
        Paragraph(
            prose(
                "The plan counts as registered from the entry “registered” of the audit trail that holds the "
                "seal of this protocol’s folio, made just after this document. Times are by the computer’s "
                "clock; their order is that of the numbers of the entries."
            ),
            "note",
        ),
    ]
    if facts.amends is not None:
        blocks += _amendment(facts, numbering)
    return Section("registration", number, "Registration", tuple(blocks))


def _times(facts: ProtocolFacts) -> Prose:
    local = facts.started_local
    return prose(
        "{utc}, {local} local time",
        utc=minute(facts.started_utc),
        local=f"{local[:10]} {local[11:16]} {local[-6:]}",
    )


def _data_words(facts: ProtocolFacts) -> str:
    if facts.data_first_seen is not None:
        words = f"first seen {minute(facts.data_first_seen)}, before this plan was registered"
    else:
        words = "none of this study were seen before, as far as the audit trail goes"
    if facts.data_present:
        there = ", ".join(facts.data_present)
        words += f"; in their place when the plan was registered: {there}"
    return words


def _amendment(facts: ProtocolFacts, numbering: Numbering) -> list[Block]:
    assert facts.amends is not None, "asked for amendments only"
    when = "" if facts.amends_time is None else f", registered {minute(facts.amends_time)}"
    words = "This protocol takes the place of {amends}{when}, which is kept. #Reason:# {reason}"
    return [
        Heading(prose("What is amended")),
        Paragraph(prose(words, amends=facts.amends, when=when, reason=facts.reason or "")),
        TableBlock(difference_table(numbering.table(), facts.differences, "Every field that differs.")),
    ]


def difference_table(
    label: str, differences: tuple[tuple[str, str | None, str | None], ...], caption: str
) -> Table:
    """The fields that differ between two plans, with the earlier and the later value."""
    columns = [
        Column("Field", kind="text"),
        Column("Earlier plan", kind="text"),
        Column("This plan", kind="text"),
    ]
    rows: list[list[Words]] = [
        [verbatim(key), shortened(old), shortened(new)] for key, old, new in differences
    ]
    return lay_out(label, prose(caption), columns, rows)


def later_section(_content: ProtocolInput, _numbering: Numbering, number: int) -> Section:
    """What happens where things do not go as planned."""
    return Section(
        "departures",
        number,
        "Amendments and deviations",
        (
            Items(
                (
                    prose(
                        "An amendment changes the plan: it says field by field what changes and why, gets "
                        "the next protocol number, and every later report lists it with its time. Where it "
                        "came after data had been seen, the result under the earlier plan stands beside the "
                        "other."
                    ),
                    prose(
                        "A deviation is something that was not done as planned: what, its effect, and what "
                        "was decided, with person and time. Those of numbers of values, measuring order, "
                        "dates, late data and the clock are found by the program; all of them stand in the "
                        "report."
                    ),
                    prose(
                        "Nothing runs under this study but the plan that was registered last; a run with "
                        "another one is refused."
                    ),
                )
            ),
        ),
    )


def checking_section(content: ProtocolInput, _numbering: Numbering, number: int) -> Section:
    """How to check the protocol, and what is attached."""
    facts = content.facts
    folio = f"runs/{content.study.study}/{facts.label}"
    return Section(
        "checking",
        number,
        "How to check this protocol",
        (
            Items(
                (
                    prose(
                        "With the software: #assayfolio verify {folio}# checks every file of the folio, its "
                        "seal and the audit trail.",
                        folio=verbatim(folio),
                    ),
                    prose(
                        "Without it: in the folder {folio}, #sha256sum -c manifest-sha256.txt# compares "
                        "every file with its digest; the SHA-256 of tagmanifest-sha256.txt is the seal in "
                        "the audit trail, and the trail head printed above must be the SHA-256 of line "
                        "{line}.",
                        folio=verbatim(folio),
                        line=str(facts.trail_seq),
                    ),
                    prose(
                        "Attached to this document: study.yaml ~(study definition, {size} bytes)~. Beside it "
                        "in the folio: plan.json{power}{sheet}, the laboratory’s settings and the "
                        "environment.",
                        size=str(len(content.definition)),
                        power=", power.json" if content.power or content.power_gaps else "",
                        sheet=", the worksheet" if content.rows else "",
                    ),
                )
            ),
        ),
    )
