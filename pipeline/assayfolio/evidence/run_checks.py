"""Checks 3.7 to 3.12: the folio as the record of one run, against its own files and the audit trail."""

from collections.abc import Iterator, Mapping
from typing import Any

from assayfolio.canonical import sha256_hex
from assayfolio.evidence.data_checks import check_account
from assayfolio.evidence.entries import NO_LINE, is_digest, parse_entry
from assayfolio.evidence.folio_reading import RUN_FILE, RUN_TRAIL_FILE, FolioReading, content_of
from assayfolio.evidence.history import COMPUTED, RENDERED, RunHistory, run_name, split_subject
from assayfolio.evidence.inventory import shown
from assayfolio.evidence.manifest import TAG_MANIFEST_FILE
from assayfolio.evidence.outcomes import Tally
from assayfolio.evidence.protocol_states import check_claim
from assayfolio.evidence.strict_json import NotCanonicalError

STUDY_FILE = "data/study.yaml"
INPUTS_FOLDER = "data/inputs/"
RUN_FAMILY, RUN_NUMBER = "assayfolio-run/", 1
COMPLETED = "completed"
OUTCOMES = (COMPLETED, "failed")
# Key in run.json, file of the folio, trail action and key of its details.
_RESULTS = (
    ("findings_sha256", "data/findings.json", COMPUTED, "findings"),
    ("report_sha256", "data/report.pdf", RENDERED, "report"),
)


def newer_format(run: Mapping[str, Any]) -> str | None:
    """The format of a record that a later version of this program made; None for one that is known."""
    written = str(run.get("format", ""))
    number = written.removeprefix(RUN_FAMILY)
    is_number = written.startswith(RUN_FAMILY) and number.isascii() and number.isdigit()
    return written if is_number and int(number) > RUN_NUMBER else None


def _record(folio: FolioReading, tally: Tally) -> Mapping[str, Any] | None:
    """The run record; where there is none, or it is of a later version, the tally says why."""
    newer = None if folio.run is None else newer_format(folio.run)
    if newer is not None:
        tally.unchecked.append(
            f"{RUN_FILE} has the format {newer}, made by a newer version of this program; this one reads up "
            f"to {RUN_FAMILY}{RUN_NUMBER}"
        )
        return None
    if content_of(folio, RUN_FILE, tally) is not None and folio.run is None:
        tally.failed.append(f"{RUN_FILE} cannot be understood: {folio.run_trouble}")
    return folio.run


def check_place(folio: FolioReading, tally: Tally) -> None:
    """Check 3.7: study, number and name in run.json, against the folder and its parent."""
    run = _record(folio, tally)
    if run is None:
        return
    study, number, name = run.get("study"), run.get("number"), run.get("run")
    if not isinstance(study, str) or not isinstance(number, int) or isinstance(number, bool):
        tally.failed.append(f'{RUN_FILE}: "study" is not a text or "number" not a whole number')
        return
    if name != run_name(number):
        tally.failed.append(
            f'{RUN_FILE}: "run" is {name!r} where the number {number} makes {run_name(number)}'
        )
    if run.get("outcome") not in OUTCOMES:
        tally.failed.append(
            f'{RUN_FILE}: "outcome" is {run.get("outcome")!r}, neither {" nor ".join(OUTCOMES)}'
        )
    named = split_subject(f"{study}/{folio.name}")
    if folio.trail is None and named is None:
        tally.unchecked.append(f"the folder is called {shown(folio.name)}, which is not the name of a run")
    elif folio.name != run_name(number):
        tally.failed.append(f"the folder is called {shown(folio.name)}, {RUN_FILE} says {run_name(number)}")
    if folio.trail is not None and folio.study_folder != study:
        tally.failed.append(
            f"the folder lies in {shown(folio.study_folder)}, {RUN_FILE} says study {shown(study)}"
        )


def _inputs(run: Mapping[str, Any], tally: Tally) -> Iterator[tuple[str, int, str]]:
    """Place in the folio, size and digest of each well-formed input of run.json."""
    inputs = run.get("inputs")
    if not isinstance(inputs, list):
        tally.failed.append(f'{RUN_FILE}: "inputs" is not a list')
        return
    for position, each in enumerate(inputs, start=1):
        place, size, digest = (each.get(k) if isinstance(each, dict) else None for k in _INPUT_KEYS)
        if isinstance(place, str) and isinstance(size, int) and is_digest(digest):
            yield place, size, str(digest)
        else:
            tally.failed.append(f'{RUN_FILE}: input {position} lacks "folio_path", "size" or "sha256"')


_INPUT_KEYS = ("folio_path", "size", "sha256")


def check_digests(folio: FolioReading, tally: Tally) -> None:
    """Check 3.8: what run.json says of inputs, findings and report, against the files."""
    run = _record(folio, tally)
    if run is None:
        return
    listed = set()
    for place, size, digest in _inputs(run, tally):
        listed.add(place)
        _compare_with_record(folio, place, digest, tally)
        file = folio.file(place)
        if file is not None and not file.trouble and file.size != size:
            tally.failed.append(f"{place} has {file.size} bytes, {RUN_FILE} says {size}")
    for path in folio.inventory.files:
        if (path == STUDY_FILE or path.startswith(INPUTS_FOLDER)) and path not in listed:
            tally.failed.append(f"{shown(path)} is not among the inputs in {RUN_FILE}")
    for key, path, _action, _detail in _RESULTS:
        stated = run.get(key)
        if is_digest(stated):
            _compare_with_record(folio, path, stated, tally)
        elif stated is not None:
            tally.failed.append(f'{RUN_FILE}: "{key}" is not a SHA-256')
        elif folio.file(path) is not None:
            tally.failed.append(f"{path} is there, but {RUN_FILE} has no digest of it")
        elif run.get("outcome") == COMPLETED:
            tally.failed.append(f"missing: {path}, and {RUN_FILE} has no digest of it")


def _compare_with_record(folio: FolioReading, path: str, digest: Any, tally: Tally) -> None:
    file = folio.file(path)
    if file is None:
        tally.failed.append(f"missing: {shown(path)}, which {RUN_FILE} names")
    elif file.sha256 is None:
        tally.unchecked.append(f"{shown(path)} could not be read: {file.trouble}")
    elif file.sha256 != digest:
        tally.failed.append(f"changed: {shown(path)} has SHA-256 {file.sha256}, {RUN_FILE} says {digest}")


def check_entries(folio: FolioReading, tally: Tally) -> None:
    """Check 3.9: data/trail.jsonl against the lines of the audit trail."""
    content = content_of(folio, RUN_TRAIL_FILE, tally)
    if content is None:
        return
    *lines, rest = content.split(b"\n")
    if rest:
        tally.failed.append(f"{RUN_TRAIL_FILE}: the last line has no line end")
        lines.append(rest)
    for number, line in enumerate(lines, start=1):
        try:
            parse_entry(line)
        except NotCanonicalError as error:
            tally.failed.append(f"{RUN_TRAIL_FILE} line {number} is not an entry: {error}")
    if folio.trail is None:
        tally.unchecked.append(folio.no_trail)
        return
    expected = folio.trail.lines_to_staged(folio.subject)
    if lines == [line for _, line in expected]:
        return
    for number, line in enumerate(lines, start=1):
        if line not in folio.trail.known_lines:
            tally.failed.append(
                f"{RUN_TRAIL_FILE} line {number} does not stand in the audit trail: "
                "it was changed here, or changed or cut off there"
            )
    kept = set(lines)
    for entry, line in expected:
        if line not in kept:
            tally.failed.append(
                f"{RUN_TRAIL_FILE} lacks entry {entry.seq} ({shown(entry.action)}) of the audit trail"
            )
    if not tally.failed:
        tally.failed.append(
            f"{RUN_TRAIL_FILE} does not hold just the entries of {shown(folio.subject)} in their order"
        )


def _history(folio: FolioReading, tally: Tally) -> RunHistory | None:
    """What the trail says of the run; where it says nothing the tally tells why."""
    if folio.trail is None:
        tally.unchecked.append(folio.no_trail)
    elif folio.history is None:
        tally.failed.append(f"the audit trail knows no run {shown(folio.subject)}")
    return folio.history


def check_seal(folio: FolioReading, tally: Tally) -> None:
    """Check 3.10: the SHA-256 of the tag manifest, against the "sealed" entry."""
    history = _history(folio, tally)
    if history is None:
        return
    if history.sealed is None:
        tally.failed.append(f"the audit trail has no seal of {history.subject}, yet the folio is there")
        return
    content = content_of(folio, TAG_MANIFEST_FILE, tally)
    if content is None:
        return
    seal, entered = sha256_hex(content), history.sealed.details.get("seal")
    if seal != entered:
        tally.failed.append(
            f"changed: {TAG_MANIFEST_FILE} has SHA-256 {seal}, the seal in entry "
            f"{history.sealed.seq} is {entered}: this file, or the folio with its manifests, "
            "was rewritten after sealing"
        )


def check_head_at_start(folio: FolioReading, tally: Tally) -> None:
    """Check 3.11: the trail head that the run began under, against the trail's lines."""
    run = _record(folio, tally)
    if run is None:
        return
    head = run.get("trail_head_at_start")
    seq, digest = (head.get("seq"), head.get("sha256")) if isinstance(head, dict) else (None, None)
    if not isinstance(seq, int) or isinstance(seq, bool) or seq < 0 or not is_digest(digest):
        tally.failed.append(f'{RUN_FILE}: "trail_head_at_start" is not a number and a SHA-256')
        return
    if folio.trail is None:
        tally.unchecked.append(folio.no_trail)
        return
    digests = folio.trail.reading.digests
    if seq > len(digests):
        tally.failed.append(
            f"{RUN_FILE} was made under entry {seq}, but the audit trail has {len(digests)}: "
            "lines were cut off"
        )
    elif digest != (digests[seq - 1] if seq else NO_LINE):
        tally.failed.append(
            f"{RUN_FILE} was made under another entry {seq} than the audit trail has: one of them was changed"
        )


def check_against_trail(folio: FolioReading, tally: Tally) -> None:
    """Check 3.12: run.json's outcome and digests, against the details of the run's entries."""
    run = _record(folio, tally)
    history = _history(folio, tally)
    if run is None or history is None or folio.trail is None:
        return
    sealed = history.sealed
    if sealed is not None and sealed.details.get("outcome") != run.get("outcome"):
        tally.failed.append(
            f"{RUN_FILE} has the outcome {run.get('outcome')!r}, entry {sealed.seq} of the audit trail "
            f"{sealed.details.get('outcome')!r}"
        )
    entered = history.allotted.details.get("inputs")
    kept = sorted({digest for _, _, digest in _inputs(run, Tally())})
    if not isinstance(entered, dict):
        tally.failed.append(f"entry {history.allotted.seq} of the audit trail names no inputs")
    elif sorted({str(digest) for digest in entered.values()}) != kept:
        tally.failed.append(
            f"the inputs in {RUN_FILE} are not those of entry {history.allotted.seq} of the audit trail"
        )
    check_account(run, history, folio.trail.register, tally)
    if run.get("outcome") == COMPLETED:
        check_claim(run, history.allotted, folio.trail.registered.get(history.study, ()), tally)
    for key, path, action, detail in _RESULTS:
        entry = history.entry(action)
        stated = entry.details.get(detail) if entry else None
        if run.get(key) is not None and run.get(key) != stated:
            tally.failed.append(
                f"{RUN_FILE} and the audit trail differ on {path}: {run.get(key)}, {stated or 'no entry'}"
            )
