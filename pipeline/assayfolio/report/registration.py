"""Whether the plan was registered before the data: the words for every page, for page 1, for the tables."""

from assayfolio.report.basis import Basis
from assayfolio.report.facts import RunFacts
from assayfolio.report.numbering import Part
from assayfolio.report.prose import Prose, prose
from assayfolio.report.wording import EXPLORATORY, NOT_REGISTERED, STANDING, counted

_CLOCK = "Times are by the computer’s clock; their order is that of the numbers of the trail’s entries."
REGISTERED_FAMILY = "registered before the data were seen"
_LATE_FAMILY = "exploratory, as the plan was registered after the data were seen"
_CHANGED_FAMILY = "exploratory, as it was not registered in this form before the data were seen"


def minute(time: str | None) -> str:
    """A time to the minute: "2026-01-31 09:15 UTC"."""
    return "not recorded" if time is None else f"{time[:10]} {time[11:16]} UTC"


def is_calm(run: RunFacts) -> bool:
    """Whether all was fixed before the data, so that nothing of it asks for attention."""
    facts = run.registration
    return facts.before_data and not facts.amended_after_data


def page_words(run: RunFacts) -> str:
    """What every page says."""
    facts = run.registration
    if not facts.is_registered:
        return NOT_REGISTERED
    first = facts.protocols[0]
    if first.after_data:
        return "registered after the data were seen"
    if facts.amended_after_data:
        return f"pre-registered {first.time[:10]}, amended after the data"
    return f"pre-registered {first.time[:10]}"


def digest_words(run: RunFacts) -> str:
    """The digest that every page names: that of the study definition."""
    what = "definition" if run.registration.is_registered else "study definition"
    return f"{what} {run.study_sha256[:8]}"


def standing_words(basis: Basis) -> str:
    """What page 1 says under the title."""
    facts = basis.content.run.registration
    if not facts.is_registered:
        return EXPLORATORY
    first = minute(facts.protocols[0].time)
    if not facts.before_data:
        seen = minute(facts.study_data_first_seen)
        return (
            f"Registered {first}, after data of this study were first seen, {seen}: every result is "
            "exploratory."
        )
    words = f"Pre-registered {first}, data first seen {minute(facts.data_first_seen)}"
    early = sum(one.amends and not one.after_data for one in facts.protocols)
    late = sum(one.amends and one.after_data for one in facts.protocols)
    if early:
        words += f"; {counted(early, 'amendment')} before the data"
    if not late:
        return f"{words}."
    return f"{words}; {counted(late, 'amendment')} after the data: {_families_words(basis)}."


def _families_words(basis: Basis) -> str:
    """How many of the families still stand as they were registered."""
    found = basis.content.findings.responses[0]
    marks = [one.registered for one in found.comparisons] + [one.registered for one in found.equivalence]
    kept = sum(marks)
    if marks and kept == len(marks):
        return "the comparisons stand as they were registered"
    if kept:
        rest = "the others are exploratory"
        return f"{kept} of {len(marks)} planned questions stand as they were registered, {rest}"
    return "every result is exploratory"


def family_standing(basis: Basis, *, registered: bool) -> str:
    """What the section of a family says of its standing, for a family that was `registered` or not."""
    facts = basis.content.run.registration
    if registered:
        return REGISTERED_FAMILY
    if not facts.is_registered:
        return STANDING
    return _CHANGED_FAMILY if facts.before_data else _LATE_FAMILY


def plan_words(basis: Basis) -> Prose:
    """The first paragraph on the plan."""
    start = "The plan is the study definition attached to this document, as it stood when the run began. "
    facts = basis.content.run.registration
    if not facts.is_registered:
        return prose(
            start
            + "It was #not pre-registered#: nothing shows that it was fixed before the data were seen, so "
            "every result here is exploratory; “planned” says that it stands in the study definition, no "
            "more."
        )
    number = str(basis.place(Part.REGISTRATION).number)
    if not facts.before_data:
        return prose(
            start
            + "It was #registered after data of this study had been seen#: first seen {seen}, registered "
            "{time}. What the data showed can have shaped it, so every result here is exploratory; section "
            "{number} gives the protocols.",
            seen=minute(facts.study_data_first_seen),
            time=minute(facts.protocols[0].time),
            number=number,
        )
    amended = (
        " It was #amended after the data were seen#; where a comparison is not the one registered before, "
        "its section says that it is exploratory."
        if facts.amended_after_data
        else ""
    )
    return prose(
        start
        + "It equals {protocol}: #pre-registered# {time}, data first seen {seen}."
        + amended
        + " Section "
        "{number} gives the protocols.",
        protocol=facts.in_use or "",
        time=minute(facts.protocols[0].time),
        seen=minute(facts.data_first_seen),
        number=number,
    )


def clock_words() -> str:
    """How far the times can be believed."""
    return _CLOCK
