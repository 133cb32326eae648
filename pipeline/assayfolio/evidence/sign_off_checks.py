"""Checks of what lies in `sign-off/`: signatures, their records, and the state that they give a folio.

5.1  The files are those that the audit trail's entries name, and each entry was made with a certificate that
     was in force, by a person who had the role.
5.2  The signed report as a whole: it begins with the sealed one, nothing stands after the last signature.
5.3  Each signature by itself.
5.4  The state that follows: approved only where every signature that is asked for is there and holds.

Trust never comes from the folio: it comes from the certificates that are handed in (`--trust`), or else from
those that the workspace's trail pins; without either it is "not checkable". A folio that nobody signed has
none of these checks.
"""

import os
from collections.abc import Callable, Iterator, Mapping, Sequence
from datetime import UTC, datetime
from functools import cached_property
from pathlib import Path

from assayfolio.canonical import sha256_hex
from assayfolio.errors import MachineError
from assayfolio.evidence.entries import TrailReading
from assayfolio.evidence.files import plain_reason, read_regular
from assayfolio.evidence.folio_reading import TrailIndex
from assayfolio.evidence.inventory import shown
from assayfolio.evidence.keyring import Keyring, pem_parts, read_keyring
from assayfolio.evidence.laboratory_folios import FOLDER as LABORATORY_FOLDER
from assayfolio.evidence.locks import is_locked
from assayfolio.evidence.manifest import TAG_MANIFEST_FILE
from assayfolio.evidence.outcomes import CheckOutcome, Tally
from assayfolio.evidence.sign_moves import protocol_standing
from assayfolio.evidence.sign_offs import (
    FOLDER,
    REPORT,
    REPORTS,
    STAGING,
    EnteredSignature,
    entered_signature,
    expected_files,
)
from assayfolio.evidence.signer_checks import SettingsOverTime, check_signers
from assayfolio.evidence.signers import Signers, signers_of
from assayfolio.evidence.signing.records import read_record
from assayfolio.evidence.signing.results import Finding, SignatureFindings
from assayfolio.evidence.signing.trust import Trust
from assayfolio.evidence.signing.validation import ReportOnFile, validate
from assayfolio.evidence.strict_json import NotCanonicalError, parse_json
from assayfolio.evidence.witnesses import Witness

Heads = Mapping[int, datetime]
"""By entry: a time at which a witness was told of that very entry."""


def vouched_heads(reading: TrailReading, witnesses: Sequence[Witness]) -> Heads:
    """The entries that a witness outside the workspace vouches for, with the time of each."""
    found: dict[int, datetime] = {}
    for witness in witnesses:
        try:
            kept = witness.kept()
        except MachineError:
            continue  # check 1.7 speaks of it
        for seq, digest in kept.digests.items():
            entry = reading.parsed[seq - 1] if 0 < seq <= len(reading.parsed) else None
            if entry is not None and reading.digests[seq - 1] == digest:
                time = kept.times.get(seq) or datetime.fromisoformat(entry.time)
                found[seq] = min(time, found.get(seq, time))
    return found


class SignOffJudge:
    """Judges signatures by one trail, one keyring and one set of trusted certificates.

    `index` is None where there is no trail, with the reason in `no_trail`; `given` are the certificates (DER)
    that were handed in, and then nothing else is trusted.
    """

    def __init__(
        self,
        index: TrailIndex | None,
        no_trail: str,
        workspace: Path | None,
        given: Sequence[bytes] = (),
        witnesses: Callable[[], Sequence[Witness]] = tuple,
    ) -> None:
        self._index, self._no_trail = index, no_trail
        self._workspace, self._given, self._witnesses = workspace, tuple(given), witnesses

    @cached_property
    def _keyring(self) -> Keyring:
        return Keyring({}, {}) if self._workspace is None else read_keyring(self._workspace)

    @cached_property
    def _signers(self) -> Signers:
        return signers_of(() if self._index is None else self._index.reading.entries)

    @cached_property
    def _settings(self) -> SettingsOverTime:
        return SettingsOverTime(() if self._index is None else self._index.reading.entries)

    @cached_property
    def _heads(self) -> Heads:
        if self._index is None:
            return {}
        return vouched_heads(self._index.reading, self._witnesses())

    def check_signers(self) -> Iterator[CheckOutcome]:
        """Check 2.10, where the trail knows signers."""
        if self._index is not None and (self._signers.enrolled or self._signers.authority):
            entries = self._index.reading.entries
            yield check_signers(entries, self._signers, self._keyring, self._settings)

    def check_all(self, runs: Path) -> Iterator[CheckOutcome]:
        """Checks 2.10 and 5.1 to 5.4 of every run and protocol that the trail knows."""
        assert self._index is not None, "all folios are those that the trail knows"
        yield from self.check_signers()
        for subject, kind in (
            *((subject, "run") for subject in self._index.histories),
            *((subject, "protocol") for subject in self._index.protocols),
        ):
            yield from self.check(runs / subject, subject, kind)

    def check(self, folio: Path, subject: str, kind: str) -> Iterator[CheckOutcome]:
        """Checks 5.1 to 5.4 of one folio, by the entries about `subject`. Nothing where nobody signed it."""
        signatures = self._entered(subject)
        there = os.path.lexists(folio / FOLDER)
        if (not signatures and not there) or not folio.is_dir():
            return
        label = subject if self._index is not None else shown(str(folio))
        outcomes = [self._check_files(folio, signatures).outcome("5.1", "signatures as entered", label)]
        report = _report_on_file(folio, kind)
        if report is not None:
            findings = validate(report, self._trust(folio, signatures), _now())
            outcomes.append(_tally(findings.findings).outcome("5.2", "the signed report as a whole", label))
            outcomes.extend(_of_signature(found, label) for found in findings.signatures)
        elif signatures:
            tally = Tally(failed=["it cannot be read, so no signature can be checked"])
            outcomes.append(tally.outcome("5.2", "the signed report as a whole", label))
        yield from outcomes
        if self._index is not None:
            yield self._state(subject, kind, outcomes)

    def _entered(self, subject: str) -> tuple[EnteredSignature, ...]:
        if self._index is None:
            return ()
        history = self._index.histories.get(subject) or self._index.protocols.get(subject)
        found = (entered_signature(entry) for entry in (history.entries if history else ()))
        return tuple(each for each in found if each is not None)

    def _trust(self, folio: Path, signatures: Sequence[EnteredSignature]) -> Trust:
        certificates, signers = self._keyring.certificates, self._signers
        pinned = [certificates[one] for one in sorted(signers.anchors) if one in certificates]
        stamps = [each.signatures.time_stamp_certificate or "" for each in self._settings.ever()]
        own_stamps = [certificates[one] for one in dict.fromkeys(stamps) if one in certificates]
        return Trust(
            anchors=self._given or tuple(pinned),
            stamp_anchors=self._given or tuple(own_stamps),
            revocation_lists=(*self._keyring.lists.values(), *_lists_in(folio)),
            enrolled=None if self._index is None else signers.persons,
            proven_by=self._proven(signatures),
        )

    def _proven(self, signatures: Sequence[EnteredSignature]) -> Mapping[int, datetime]:
        """By a witness: a time at which each signature was there; asked only where a certificate ended."""
        if all(each.ended is None for each in self._signers.enrolled):
            return {}
        found = {}
        for each in signatures:
            later = [time for seq, time in self._heads.items() if seq >= each.entry.seq]
            if later:
                found[each.number] = min(later)
        return found

    def _check_files(self, folio: Path, signatures: tuple[EnteredSignature, ...]) -> Tally:
        tally = Tally()
        if self._index is None:
            tally.unchecked.append(self._no_trail)
            return tally
        expected = expected_files(signatures)
        found = _files_in(folio / FOLDER, tally)
        for name, digest in expected.items():
            if name not in found:
                tally.failed.append(f"missing: {FOLDER}/{name}")
            elif found[name] != digest:
                tally.failed.append(f"changed: {FOLDER}/{name} is not as the audit trail has it")
        tally.failed.extend(
            f"extra file: {FOLDER}/{shown(name)}: no entry of the audit trail names it"
            for name in found
            if name not in expected
        )
        self._note_leftover(folio, tally)
        for place, each in enumerate(signatures, start=1):
            if each.number != place:
                tally.failed.append(
                    f"entry {each.entry.seq} is signature {each.number} where {place} is next"
                )
            self._check_entry(folio, each, tally)
        return tally

    def _note_leftover(self, folio: Path, tally: Tally) -> None:
        if not os.path.lexists(folio / FOLDER / STAGING):
            return
        if is_locked(folio.parent, folio.name):
            tally.unchecked.append("it is being signed now")
            return
        tally.remarks.append(
            f"{FOLDER}/{STAGING} is what an interrupted signing left; the next command that writes completes "
            "it, or throws it away where it was never entered"
        )

    def _check_entry(self, folio: Path, signature: EnteredSignature, tally: Tally) -> None:
        """Whether the entry was made by the person, in his role, with a certificate that was in force."""
        entry = signature.entry
        where = f"entry {entry.seq} ({signature.field})"
        mine = [each for each in self._signers.enrolled if each.certificate == signature.certificate]
        if not any(each.account == entry.actor and each.stood_at(entry.seq) for each in mine):
            tally.failed.append(
                f"{where}: the certificate {signature.certificate} was not in force for {entry.actor} then"
            )
        in_force = self._settings.at(entry.seq)
        people = None if in_force is None else in_force[1]
        if people is not None:
            person = people.of(entry.actor)
            if person is None or person.person != signature.person or signature.role not in person.roles:
                tally.failed.append(
                    f"{where}: by the settings in force {entry.actor} was not {signature.person} as "
                    f"{signature.role}"
                )
        name = f"{signature.number}-{signature.field}.json"
        try:
            record = read_record(name, read_regular(folio / FOLDER / name))
        except (OSError, ValueError):
            return  # missing, or refused by check 5.2
        said = (record.statement.person, record.statement.role, record.certificate, record.statement.seal)
        if said != (signature.person, signature.role, signature.certificate, signature.seal):
            tally.failed.append(f"{where} and the record {name} differ")

    def _state(self, subject: str, kind: str, outcomes: Sequence[CheckOutcome]) -> CheckOutcome:
        assert self._index is not None, "a state is derived from a trail"
        tally = Tally()
        if kind == "run":
            run = self._index.standings.get(subject)
            state = "unknown" if run is None else str(run.state)
        else:
            protocol = protocol_standing(self._index.reading.entries, subject)
            state = "unknown" if protocol is None else protocol.state
        worst = {each.outcome for each in outcomes}
        if "failed" in worst:
            tally.failed.append(f"by the audit trail it is {state}; its signatures do not hold, so it is not")
        elif "not checkable" in worst:
            tally.unchecked.append(f"{state}, as far as its signatures could be checked")
        else:
            tally.remarks.append(state)
        return tally.outcome("5.4", "state by valid signatures", subject)


def _now() -> datetime:
    return datetime.now(UTC)


def _tally(findings: Sequence[Finding]) -> Tally:
    tally = Tally()
    lists = {"failed": tally.failed, "not checkable": tally.unchecked, "passed": tally.remarks}
    for each in findings:
        lists[each.outcome].append(f"{each.check}: {each.words}")
    return tally


def _of_signature(found: SignatureFindings, label: str) -> CheckOutcome:
    stated = found.statement
    who = "unreadable" if stated is None else f"{stated.person}, {stated.role}: {stated.meaning}"
    return _tally(found.findings).outcome("5.3", f"signature {found.number}, {who}", label)


def _report_on_file(folio: Path, kind: str) -> ReportOnFile | None:
    """The signed report with what belongs to it; None where there is none that can be read."""
    try:
        pdf = read_regular(folio / FOLDER / REPORT)
        unsigned = read_regular(folio / REPORTS[kind])
        seal = sha256_hex(read_regular(folio / TAG_MANIFEST_FILE))
        names = [path.name for path in sorted((folio / FOLDER).iterdir()) if path.suffix == ".json"]
        records = {name: read_regular(folio / FOLDER / name) for name in names}
    except OSError:
        return None
    return ReportOnFile(pdf, unsigned, seal, records)


def _lists_in(folio: Path) -> tuple[bytes, ...]:
    """The revocation lists that travel with a folio; each counts only where its authority signed it."""
    found: list[bytes] = []
    for path in sorted((folio / FOLDER).glob("*.crl")):
        try:
            found.extend(pem_parts(read_regular(path), "revocation list"))
        except OSError:
            continue
    return tuple(found)


def _files_in(folder: Path, tally: Tally) -> dict[str, str]:
    """The digest of each file in the folder, without what is being put together there."""
    found: dict[str, str] = {}
    if not folder.is_dir() or folder.is_symlink():
        return found
    for path in sorted(folder.iterdir()):
        if path.name == STAGING:
            continue
        if path.is_dir() or path.is_symlink():
            tally.failed.append(f"{FOLDER}/{shown(path.name)} is no file")
            continue
        try:
            found[path.name] = sha256_hex(read_regular(path))
        except OSError as error:
            tally.unchecked.append(f"{FOLDER}/{shown(path.name)} could not be read: {plain_reason(error)}")
            found[path.name] = ""
    return found


def check_sign_off_of(judge: SignOffJudge, folio: Path, *, is_protocol: bool) -> Iterator[CheckOutcome]:
    """Checks 5.1 to 5.4 of one named folio, in its place or a copy elsewhere, by what it says it is."""
    if folio.parent.name != LABORATORY_FOLDER and folio.is_dir():
        yield from judge.check(
            folio, _claimed(folio, is_protocol=is_protocol), "protocol" if is_protocol else "run"
        )


def _claimed(folio: Path, *, is_protocol: bool) -> str:
    """The subject that a folio's record names, or that of its place where there is no record."""
    path, key = ("data/protocol.json", "protocol") if is_protocol else ("data/run.json", "run")
    try:
        record = parse_json(read_regular(folio / path))
    except (OSError, NotCanonicalError):
        record = None
    study, name = (record.get(one) if isinstance(record, Mapping) else None for one in ("study", key))
    if isinstance(study, str) and isinstance(name, str):
        return f"{study}/{name}"
    return f"{folio.parent.name}/{folio.name}"
