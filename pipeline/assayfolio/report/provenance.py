"""Where everything comes from, and how to check it."""

from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Entry, Facts, Heading, Items, Section
from assayfolio.report.executions import elsewhere_words, execution_words
from assayfolio.report.facts import InputFacts, RunFacts
from assayfolio.report.listing import is_listed
from assayfolio.report.numbering import Part
from assayfolio.report.people import replaced_words, roles_words, started_by
from assayfolio.report.prose import Prose, prose, verbatim
from assayfolio.report.times import times_words
from assayfolio.report.wording import counted, first_of

_MOST_PATHS = 8
_SIGNING = (
    "~Signatures: the file in data/ stays as it was sealed. Signed it lies beside, as sign-off/report.pdf, "
    "with a record of each signature; #assayfolio verify# says which of them hold, and what they were made "
    "for.~"
)


def provenance_section(basis: Basis) -> Section:
    """Inputs with their digests, the run, the software, and how to verify and repeat it."""
    run = basis.content.run
    blocks: list[Block] = [
        Heading(prose("Inputs")),
        Facts(tuple(_input(item) for item in run.inputs)),
        Heading(prose("Run")),
        Facts(
            (
                _entry("Run", f"{run.study}, {run.label}"),
                _entry("Earlier runs", _earlier_runs(run)),
                _entry("Executions", execution_words(run.executions)),
                _entry("Data also used", elsewhere_words(run.executions)),
                _entry("Started", f"{_time(run.started_utc)} UTC, {_time(run.started_local)} local time"),
                *([] if run.clock is None else [_entry("Times", times_words(run.clock))]),
                _entry("Started by", started_by(run.actor, run.host, run.person)),
                *([] if run.person is None else [_entry("Roles", roles_words(run.person))]),
                *([] if run.replaces is None else [_entry("Replaces", replaced_words(run.replaces))]),
                _entry("Self-check", run.self_check),
                _entry("Findings", "findings.json", run.findings_sha256),
                _entry("Trail head", f"entry {run.trail_seq} of the audit trail", run.trail_sha256),
            )
        ),
        Heading(prose("Software")),
        Facts(
            (
                _entry("Interpreter", f"{_interpreter(run.python)} on {run.platform}"),
                _entry("Packages", _versions(run.software)),
                _entry("Native libraries", _versions(run.native_libraries)),
            )
        ),
        Heading(prose("How to check this report")),
        Items(_how_to_check(basis)),
        Heading(prose("Attached to this document")),
        Items(tuple(_attached(basis)) or (prose("Nothing is attached."),)),
    ]
    place = basis.place(Part.PROVENANCE)
    return Section(place.anchor, place.number, "Provenance", tuple(blocks))


def _entry(what: str, value: str, digest: str = "") -> Entry:
    return Entry(prose(what), prose("{value}", value=value), digest)


def _input(item: InputFacts) -> Entry:
    return Entry(
        prose("{role}", role=item.role[:1].upper() + item.role[1:]),
        prose(
            "{path} ~({size} bytes; in the folio {folio})~",
            path=verbatim(item.path),
            size=str(item.size),
            folio=verbatim(item.folio_path),
        ),
        item.sha256,
    )


def _time(rfc3339: str) -> str:
    """A time to the second: date, time of day, and the offset where there is one."""
    offset = rfc3339[-6:] if rfc3339[-6] in "+-" else ""
    return f"{rfc3339[:10]} {rfc3339[11:19]} {offset}".rstrip()


def _earlier_runs(run: RunFacts) -> str:
    """Numbers are gapless, so a run's own number says how many came before; their fate is in the trail."""
    if run.number == 1:
        return "none of this study"
    count = counted(run.number - 1, "run")
    return f"{count} of this study; the audit trail holds what each one read and what became of it"


def _interpreter(python: str) -> str:
    return f"Python {python}" if python[:1].isdigit() else python


def _versions(listed: tuple[tuple[str, str], ...]) -> str:
    return ", ".join(f"{name}\u00a0{version}" for name, version in listed) or "none recorded"


def _how_to_check(basis: Basis) -> tuple[Prose, ...]:
    run = basis.content.run
    folio = f"runs/{run.study}/{run.label}"
    study = next(
        (item.path for item in run.inputs if item.role == "study definition"), "the study definition"
    )
    return (
        prose(
            "With the software: #assayfolio verify {folio}# checks every file of the folio, its seal and "
            "the audit trail.",
            folio=verbatim(folio),
        ),
        prose(
            "Without it: in the folder {folio}, #sha256sum -c manifest-sha256.txt# compares every file with "
            "its digest. The audit trail is one entry a line, each holding the SHA-256 of the line before; "
            "the head printed above must be the SHA-256 of line {line}.",
            folio=verbatim(folio),
            line=str(run.trail_seq),
        ),
        prose(
            "To repeat the analysis: #assayfolio run {study}# with the same inputs gives a new run number "
            "and the same findings.json, byte for byte on the same versions of the software.",
            study=verbatim(study),
        ),
        prose(
            "By hand: means, sums of squares and *F* follow from {source} with the formulas of section "
            "{number}.",
            number=str(basis.place(Part.METHOD).number),
            source=f"the listing in section {basis.place(Part.LISTING).number}"
            if is_listed(basis)
            else "the exact sums of each level (“sums” in findings.json)",
        ),
        *([prose(_SIGNING)] if basis.content.study.sign_off else []),
    )


def _attached(basis: Basis) -> list[Prose]:
    files = sorted(basis.content.attachments, key=lambda file: file.name)
    listed = [
        prose(
            "{name} ~({description}, {size} bytes)~",
            name=verbatim(file.name),
            description=file.description,
            size=str(len(file.content)),
        )
        for file in files
    ]
    attached = {file.name for file in files}
    raw = [item.folio_path for item in basis.content.run.inputs if item.role == "raw data"]
    apart = [path for path in raw if path.rpartition("/")[2] not in attached]
    if apart:
        words = "Not attached, and in the folio as {paths}: {what}."
        what = "the raw data" if len(apart) == len(raw) else "the other raw data"
        named = first_of(apart, _MOST_PATHS, ", ")
        listed.append(prose(words, what=what, paths=verbatim(named)))
    return listed
