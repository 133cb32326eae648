"""Sections 8 and 9: where everything comes from, how to check it, and the raw data themselves."""

from assayfolio.observations.values import Observation
from assayfolio.report.basis import Basis
from assayfolio.report.content import (
    Block,
    Entry,
    Facts,
    Heading,
    Items,
    Listing,
    ListingRow,
    Paragraph,
    Section,
)
from assayfolio.report.facts import InputFacts, RunFacts
from assayfolio.report.notation import kept_together, split_at_point
from assayfolio.report.numbering import ANCHORS, LISTING, PROVENANCE, Numbering
from assayfolio.report.prose import Prose, prose, verbatim
from assayfolio.report.tables import TEXT_WIDTH_MM, UNBROKEN_TO
from assayfolio.report.typeface import POINTS_PER_MM, figures_width, text_width
from assayfolio.report.wording import counted

MOST_LISTED = 600
_SIZE = 8.0
_LINE_SIZE = 6.4


_SIGNING = (
    "~Signatures: this version does not sign. Until signing is part of this program, the sign-off fields on "
    "page 1 are signed on a copy outside the folio; signing the file inside the folio would break its seal.~"
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
                _entry("Started", f"{_time(run.started_utc)} UTC, {_time(run.started_local)} local time"),
                _entry("Started by", f"{run.actor} on {run.host}"),
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
    return Section(ANCHORS[PROVENANCE], PROVENANCE, "Provenance", tuple(blocks))


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
            "By hand: means, sums of squares and *F* follow from {source} with the formulas of section 7.",
            source="the listing in section 9"
            if basis.total <= MOST_LISTED
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
    raw = next(item.folio_path for item in basis.content.run.inputs if item.role == "raw data")
    if raw.rpartition("/")[2] not in {file.name for file in files}:
        words = "The raw data are too large to attach; they stand in the folio as {path}."
        listed.append(prose(words, path=verbatim(raw)))
    return listed


def listing_section(basis: Basis, numbering: Numbering) -> Section:
    """The raw data as typed, with line numbers; long files are left to the attachment."""
    observations = basis.content.observations
    extra = ""
    if observations.extra_columns:
        extra = " Further columns of the file are carried along and not analysed: {columns}."
    if basis.total > MOST_LISTED:
        words = (
            "The file has {total}; a listing stops at {most} and is left to the file itself, {file}, whose "
            "SHA-256 stands in section 8." + extra
        )
        blocks: tuple[Block, ...] = (
            Paragraph(
                prose(
                    words,
                    total=counted(basis.total, "value"),
                    most=str(MOST_LISTED),
                    file=verbatim(observations.file),
                    columns=", ".join(observations.extra_columns),
                )
            ),
        )
    else:
        words = "Values as typed, each beside the number of its line in {file}." + extra
        caption = prose(
            words, file=verbatim(observations.file), columns=", ".join(observations.extra_columns)
        )
        blocks = (_listing(basis, numbering.table(), caption),)
    return Section(ANCHORS[LISTING], LISTING, "Data listing", blocks)


def _listing(basis: Basis, label: str, caption: Prose) -> Listing:
    rows = basis.content.observations.rows
    texts = [row.text.strip() for row in rows]
    rests = [figures_width(split_at_point(text)[1], _SIZE) for text in texts]
    whole = max(figures_width(split_at_point(text)[0], _SIZE) for text in texts)
    value_mm = (whole + max(rests)) / POINTS_PER_MM + 0.8
    line_mm = figures_width(str(max(row.line for row in rows)), _LINE_SIZE) / POINTS_PER_MM + 3.0
    names = max(text_width(f"{level.level} {_count(level.n)}", _SIZE) for level in basis.levels)
    level_mm = min(max(names / POINTS_PER_MM + 1.0, 14.0), 50.0)
    most = max(1, int((TEXT_WIDTH_MM - level_mm) / (value_mm + line_mm + 1.2)))
    per_row = max(1, min(most, max(level.n for level in basis.levels)))
    shifts = {id(row): max(rests) - rest for row, rest in zip(rows, rests, strict=True)}
    by_level: dict[str, list[Observation]] = {level.level: [] for level in basis.levels}
    for row in rows:
        by_level[row.level].append(row)
    listed: list[ListingRow] = []
    for level in basis.levels:
        own = by_level[level.level]
        for start in range(0, len(own), per_row):
            part = own[start : start + per_row]
            listed.append(
                ListingRow(
                    level=kept_together(level.level) if start == 0 else "",
                    count=_count(level.n) if start == 0 else "",
                    values=tuple((str(row.line), _as_typed(row), f"{shifts[id(row)]:.2f}pt") for row in part),
                    gaps=per_row - len(part),
                )
            )
    return Listing(
        label=label,
        caption=caption,
        rows=tuple(listed),
        level_width=f"{level_mm:.2f}mm",
        value_width=f"{value_mm + line_mm + 1.2:.2f}mm",
        line_width=f"{line_mm:.2f}mm",
        per_row=per_row,
        unbroken=len(listed) <= UNBROKEN_TO,
    )


def _count(n: int) -> str:
    return f"n\u00a0=\u00a0{n}"


def _as_typed(row: Observation) -> str:
    return row.text.strip()
