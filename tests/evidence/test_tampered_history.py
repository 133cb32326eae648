"""Alterations of what came before and around the runs: protocols, settings, clock, and the whole of it.

The last table holds forgeries in which trail and archive agree in everything; only a witness shows them.
"""

# The tables keep one alteration a line.
# ruff: noqa: E501

import json
import re
import shutil

import pytest

from assayfolio.canonical import canonical_bytes, sha256_hex
from assayfolio.errors import ExitCode
from assayfolio.evidence.settings import SETTINGS, SUBJECT, settings_details
from assayfolio.evidence.verification import verify_workspace
from assayfolio.evidence.witnesses import FileWitness
from evidence.forger import Workspace
from evidence.laboratory import Laboratory

LAB = "laboratory: Invented laboratory\n"
PEOPLE = """\
people:
  - {person: M. Berg, account: m.berg, roles: [author, runner]}
  - {person: K. Lind, account: k.lind, roles: [reviewer]}
"""
TEXTS = {"configs/lab.yaml": LAB, "configs/people.yaml": PEOPLE}


def stamp_of(clock):
    """Person and clock as every entry of a real workspace carries them, for a clock that goes rightly."""
    local = clock.last.replace("Z", "+00:00")
    seconds = int(clock.last[11:13]) * 3600 + int(clock.last[14:16]) * 60 + int(clock.last[17:19])
    at = {"boot": "first", "local": local, "monotonic_us": 10**9 + seconds * 10**6, "synchronised": True}
    return {"by": {"person": "M. Berg", "roles": ["author", "runner"]}, "at": at}


class RememberingClock:
    def __init__(self, clock):
        self.clock, self.last = clock, ""

    def __call__(self):
        self.last = self.clock()
        return self.last


@pytest.fixture(scope="module")
def sealed(tmp_path_factory):
    root = tmp_path_factory.mktemp("sealed")
    laboratory = Laboratory(root / "runs")
    laboratory.clock = clock = RememberingClock(laboratory.clock)
    laboratory.stamp = lambda _last: stamp_of(clock)
    laboratory.witnesses = (FileWitness(root / "witness.jsonl"),)
    for path, text in TEXTS.items():
        (root / path).parent.mkdir(exist_ok=True)
        (root / path).write_text(text)
    laboratory.found()
    with laboratory.trail() as writer:
        writer.append(SETTINGS, SUBJECT, "first seen", settings_details(TEXTS, None, ()))
    laboratory.register()
    laboratory.register(2, reason="the customer wants a smaller margin")
    laboratory.run()
    laboratory.run()
    with laboratory.trail() as writer:
        details = {
            "run": "IRON-7/run-0002",
            "through_seq": writer.head.seq,
            "outcome": "two runs on the same data",
        }
        writer.append("trail-reviewed", "IRON-7/run-0002", None, details)
    return root


class Place(Workspace):
    """A workspace with settings, protocols and a witness beside it."""

    def __init__(self, root):
        super().__init__(root / "runs")
        self.root = root
        self.configs = root / "configs"
        self.witness = root / "witness.jsonl"
        self.protocol = self.runs / "IRON-7" / "protocol-0001"

    def on_protocol(self, deed):
        """Do it to the first protocol's folio."""
        self.folio = self.protocol
        deed(self)

    def told(self, change):
        """Change the lines of the witness."""
        self.witness.write_bytes(b"".join(change(self.witness.read_bytes().splitlines(keepends=True))))

    def verify(self, *, with_witness):
        witnesses = (FileWitness(self.witness),) if with_witness else ()
        return verify_workspace(self.runs, None, lambda _entries: witnesses)


@pytest.fixture
def place(sealed, tmp_path):
    shutil.copytree(sealed, tmp_path / "w")
    return Place(tmp_path / "w")


def assert_found(verification, number, words):
    assert verification.exit_code == ExitCode.FINDING == 1
    notes = [note for each in verification.outcomes if each.number == number for note in each.notes]
    assert [each for each in verification.with_outcome("failed") if each.number == number], (number, notes)
    assert any(re.search(words, note) for note in notes), notes


def test_the_workspace_as_it_was_left_passes_every_check(place):
    verification = place.verify(with_witness=True)
    assert {each.outcome for each in verification.outcomes} == {"passed"}, verification.with_outcome("failed")


def edit_record(place, **changes):
    record = json.loads((place.folio / "data/protocol.json").read_bytes())
    place.write("data/protocol.json", canonical_bytes(record | changes))


def replace_plan(place):
    """Another plan in the place of the registered one, the folio in itself as it should be."""
    plan = canonical_bytes({"alpha": "1/10", "protocol": 1})
    place.write("data/plan.json", plan)
    edit_record(place, plan=sha256_hex(plan))
    place.rewrite_manifests()


def exchange(one, other):
    aside = one.with_name("aside")
    one.rename(aside)
    other.rename(one)
    aside.rename(other)


def changed(entries, chosen, **changes):
    """The entries with the chosen ones changed."""
    return [entry | changes if chosen(entry) else entry for entry in entries]


def with_details(entries, chosen, **details):
    return [entry | {"details": entry["details"] | details} if chosen(entry) else entry for entry in entries]


def at(entries, seq, **told):
    """The entries with another account of the clock in one of them."""
    entry = entries[seq - 1]
    moved = entry | {"details": entry["details"] | {"at": entry["details"]["at"] | told}}
    return [*entries[: seq - 1], moved, *entries[seq:]]


def is_action(action, subject=None):
    return lambda entry: entry["action"] == action and subject in (None, entry["subject"])


# Name, alteration, the check that finds it, the words in which it says so.
PROTOCOLS = [
    ("a protocol's plan changed", lambda w: w.on_protocol(lambda f: f.edit("data/plan.json", b"1/20", b"1/10")), "4.4", r"changed: data/plan\.json"),
    ("the same in its record's eyes", lambda w: w.on_protocol(lambda f: f.edit("data/plan.json", b"1/20", b"1/10")), "4.8", r"changed: data/plan\.json has SHA-256 .*protocol\.json says"),
    ("a protocol's definition changed", lambda w: w.on_protocol(lambda f: f.edit("data/study.yaml", b"Iron", b"Lead")), "4.8", r"changed: data/study\.yaml"),
    ("a protocol's paper changed", lambda w: w.on_protocol(lambda f: f.edit("data/protocol.pdf", b"1.7", b"1.6")), "4.4", r"changed: data/protocol\.pdf"),
    ("a protocol's paper removed", lambda w: (w.protocol / "data/protocol.pdf").unlink(), "4.8", r"missing: data/protocol\.pdf"),
    ("a protocol's record removed", lambda w: (w.protocol / "data/protocol.json").unlink(), "4.7", r"missing: data/protocol\.json"),
    ("a file added to a protocol", lambda w: w.on_protocol(lambda f: f.write("data/second.pdf", b"x")), "4.5", r"extra file: data/second\.pdf"),
    ("a protocol's bag declaration changed", lambda w: w.on_protocol(lambda f: f.edit("bagit.txt", b"1.0", b"0.97")), "4.1", r"changed: bagit\.txt"),
    ("a protocol's manifest changed", lambda w: w.on_protocol(lambda f: f.edit_lines("manifest-sha256.txt", lambda lines: lines[1:])), "4.2", r"changed: manifest-sha256\.txt"),
    ("lines of a protocol's manifest exchanged", lambda w: w.on_protocol(lambda f: f.edit_lines("manifest-sha256.txt", lambda lines: lines[::-1])), "4.3", r"out of order"),
    ("bytes added to a protocol", lambda w: w.on_protocol(lambda f: f.write("data/plan.json", b"{}")), "4.6", r"bag-info\.txt states"),
    ("an entry in a protocol's trail changed", lambda w: w.on_protocol(lambda f: f.edit("data/trail.jsonl", b"m.berg", b"k.lind")), "4.9", r"line 1 does not stand in the audit trail"),
    ("a plan replaced by another, manifests right", lambda w: w.on_protocol(replace_plan), "4.10", r"rewritten or replaced after sealing"),
    ("the same against the entry of the registration", lambda w: w.on_protocol(replace_plan), "4.11", r'"plan" in data/protocol\.json is not that of entry'),
    ("another reason for the amendment", lambda w: (setattr(w, "folio", w.protocol.with_name("protocol-0002")), edit_record(w, reason="tidying up"), w.rewrite_manifests()), "4.11", r"the reason in data/protocol\.json is not that of entry"),
    ("two protocols exchanged", lambda w: exchange(w.protocol, w.protocol.with_name("protocol-0002")), "4.7", r"the folder is called protocol-0001, data/protocol\.json says protocol-0002"),
    ("a protocol deleted", lambda w: shutil.rmtree(w.protocol), "2.9", r"protocol-0001.*gone"),
    ("a protocol renumbered", lambda w: w.protocol.rename(w.protocol.with_name("protocol-0003")), "2.3", r"extra folder: IRON-7/protocol-0003"),
    ("a protocol put in afterwards", lambda w: shutil.copytree(w.protocol, w.protocol.with_name("protocol-0003")), "2.3", r"extra folder: IRON-7/protocol-0003"),
    ("a protocol under a run's name", lambda w: w.protocol.rename(w.protocol.with_name("run-0003")), "2.3", r"extra folder: IRON-7/run-0003"),
]  # fmt: skip

RUNS = [
    ("two runs renumbered", lambda w: exchange(w.folio, w.folio.with_name("run-0002")), "3.7", r"the folder is called run-0001, data/run\.json says run-0002"),
    ("a run renumbered, its record too", lambda w: (shutil.rmtree(w.folio.with_name("run-0002")), w.folio.rename(w.folio.with_name("run-0002")), setattr(w, "folio", w.folio.with_name("run-0002")), w.edit_run(number=2, run="run-0002"), w.rewrite_manifests()), "3.10", r"rewritten after sealing"),
    ("the first run erased from trail and archive", lambda w: (shutil.rmtree(w.folio), w.rebuild([e for e in w.entries() if e["subject"] != "IRON-7/run-0001"])), "2.1", r"allots IRON-7/run-0002 where 1 comes next"),
]  # fmt: skip

SETTINGS_TABLE = [
    ("a role given in people.yaml", lambda w: (w.configs / "people.yaml").write_text(PEOPLE.replace("[reviewer]", "[reviewer, approver]")), "2.6", r"changed: configs/people\.yaml is not as entry 2 has it"),
    ("the same, field by field", lambda w: (w.configs / "people.yaml").write_text(PEOPLE.replace("[reviewer]", "[reviewer, approver]")), "2.6", r"people.*in force, .*in the file"),
    ("a person added to people.yaml", lambda w: (w.configs / "people.yaml").write_text(PEOPLE + "  - {person: X. New, account: xnew, roles: [approver]}\n"), "2.6", r"changed: configs/people\.yaml"),
    ("an account put under another person", lambda w: (w.configs / "people.yaml").write_text(PEOPLE.replace("account: k.lind", "account: m.burg")), "2.6", r"changed: configs/people\.yaml"),
    ("a comment in people.yaml", lambda w: (w.configs / "people.yaml").write_text(PEOPLE + "# nothing\n"), "2.6", r"changed: configs/people\.yaml"),
    ("people.yaml removed", lambda w: (w.configs / "people.yaml").unlink(), "2.6", r"missing: configs/people\.yaml"),
    ("lab.yaml edited", lambda w: (w.configs / "lab.yaml").write_text(LAB + "review-before-approval: false\n"), "2.6", r"changed: configs/lab\.yaml"),
    ("a witness taken out of lab.yaml", lambda w: (w.configs / "lab.yaml").write_text("laboratory: Invented\n"), "2.6", r"changed: configs/lab\.yaml"),
    ("lab.yaml removed", lambda w: (w.configs / "lab.yaml").unlink(), "2.6", r"missing: configs/lab\.yaml"),
    ("the text in the entry changed", lambda w: w.rebuild(with_details(w.entries(), is_action("settings"), texts={**TEXTS, "configs/lab.yaml": "laboratory: Other\n"})), "2.6", r"entry 2 holds settings that have not the digests it names"),
    ("an entry of settings emptied", lambda w: w.rebuild(with_details(w.entries(), is_action("settings"), files=None)), "2.6", r"entry 2 \(settings\) does not hold the settings"),
]  # fmt: skip

CLOCKS = [
    ("an entry dated back", lambda w: w.rebuild(changed(w.entries(), lambda e: e["seq"] == 9, time="2026-03-01T00:00:00.000000Z")), "1.6", r"entry 9 gives two different times"),
    ("an entry dated back in both its times", lambda w: w.rebuild(at(changed(w.entries(), lambda e: e["seq"] == 9, time="2026-03-01T00:00:00.000000Z"), 9, local="2026-03-01T00:00:00.000000+00:00")), "1.6", r"entry 9 \(2026-03-01T00:00:00\.000000Z\) is dated before entry 8 .* and does not say so"),
    ("a counter that runs back", lambda w: w.rebuild(at(w.entries(), 9, monotonic_us=5)), "1.6", r"the counter of entry 9 runs behind that of entry 8"),
    ("two entries exchanged, chain right", lambda w: w.rebuild([*w.entries()[:3], w.entries()[4], w.entries()[3], *w.entries()[5:]]), "1.6", r"is dated before entry"),
]  # fmt: skip

WITNESS_ALONE = [
    ("an actor changed throughout", lambda w: w.rebuild(changed(w.entries(), lambda e: True, actor="k.lind")), r"entry 1|entry 2"),
    ("an event taken out of the middle", lambda w: w.rebuild([e for e in w.entries() if e["action"] != "self-checked" or e["subject"] != "IRON-7/run-0001"]), r"and \d+ of the later ones is not the one"),
    ("the last run erased from trail and archive", lambda w: (shutil.rmtree(w.runs / "IRON-7/run-0002"), w.rebuild([e for e in w.entries() if e["subject"] != "IRON-7/run-0002"])), r"it was told of entry \d+, the audit trail has \d+: it was cut back"),
    ("the review erased from the end", lambda w: w.rebuild(w.entries()[:-1]), r"it was told of entry \d+, the audit trail has \d+: it was cut back"),
    ("the outcome of the review changed", lambda w: w.rebuild(with_details(w.entries(), is_action("trail-reviewed"), outcome="nothing to be said")), r"is not the one that the witness was told of"),
    ("a review made up, with another after it", lambda w: w.rebuild([*w.entries(), *[later(w, n) for n in (1, 2)]]), r"it lacks the heads of entries \d+, \d+, and the audit trail does not say why"),
    ("the reason of the amendment changed everywhere", lambda w: (setattr(w, "folio", w.protocol.with_name("protocol-0002")), edit_record(w, reason="the margin was mistyped"), w.rebuild(changed(w.entries(), lambda e: e["subject"].endswith("protocol-0002") and e["reason"], reason="the margin was mistyped"))), r"changed or built anew from there on"),
    ("the registered plan replaced everywhere", lambda w: everywhere(w), r"changed or built anew from there on"),
    ("a figure changed in findings, seals and chain", lambda w: new_findings(w), r"changed or built anew from there on"),
    ("raw data changed in folio, seals and chain", lambda w: w.rebuild(changed(w.entries(), is_action("received"), reason="re-sent by the instrument")), r"changed or built anew from there on"),
    ("settings changed in file and entry alike", lambda w: new_settings(w), r"entry 2 and \d+ of the later ones is not the one"),
    ("every time moved by a day", lambda w: w.rebuild([next_day(e) for e in w.entries()]), r"entry 1|entry 2"),
    ("trail and archive begun anew", lambda w: begin_anew(w), r"is not the one that the witness was told of"),
]  # fmt: skip

WITNESS = [
    ("heads taken out of the witness", lambda w: w.told(lambda lines: lines[:3] + lines[5:]), "failed", r"it lacks the heads of entries \d+, \d+, and the audit trail does not say why"),
    ("the end taken off the witness", lambda w: w.told(lambda lines: lines[:-2]), "failed", r"it lacks the heads of entries \d+, \d+"),
    ("a digest in the witness changed", lambda w: w.told(lambda lines: [*lines[:4], re.sub(rb'"sha256":"..', b'"sha256":"00', lines[4]), *lines[5:]]), "failed", r"entry \d+ is not the one that the witness was told of"),
    ("a line of the witness torn", lambda w: w.told(lambda lines: [*lines, b"{"]), "not checkable", r"is no head: torn or altered"),
    ("the witness emptied", lambda w: w.witness.write_bytes(b""), "not checkable", r"it keeps no head yet"),
    ("the witness removed", lambda w: w.witness.unlink(), "not checkable", r"not reached, so not compared: .*it is not there"),
]  # fmt: skip


def later(place, seconds):
    """A review that never was, some seconds after the last entry."""
    last = place.entries()[-1]
    time = re.sub(r"\d\d\.000000Z", f"{int(last['time'][17:19]) + seconds:02d}.000000Z", last["time"])
    told = last["details"]["at"] | {"local": time.replace("Z", "+00:00")}
    told["monotonic_us"] += seconds * 10**6
    return last | {"time": time, "details": last["details"] | {"at": told}}


def next_day(entry):
    moved = dict(entry)
    told = entry["details"]["at"]
    moved["time"] = entry["time"].replace("2026-03-02", "2026-03-03")
    moved["details"] = entry["details"] | {
        "at": told | {"local": told["local"].replace("2026-03-02", "2026-03-03")}
    }
    return moved


def everywhere(place):
    place.on_protocol(replace_plan)
    plan = sha256_hex((place.protocol / "data/plan.json").read_bytes())
    own = [e for e in place.entries() if e["subject"].endswith("protocol-0001") and "plan" in e["details"]]
    place.rebuild(with_details(place.entries(), lambda e: e in own, plan=plan))


def new_findings(place):
    place.edit("data/findings.json", b"9.25", b"9.75")
    digest = sha256_hex((place.folio / "data/findings.json").read_bytes())
    place.edit_run(findings_sha256=digest)
    place.rebuild(with_details(place.entries(), is_action("computed", "IRON-7/run-0001"), findings=digest))


def new_settings(place):
    texts = {**TEXTS, "configs/people.yaml": PEOPLE.replace("[reviewer]", "[reviewer, approver]")}
    (place.configs / "people.yaml").write_text(texts["configs/people.yaml"])
    details = settings_details(texts, None, ())
    place.rebuild(with_details(place.entries(), is_action("settings"), **details))


def begin_anew(place):
    shutil.rmtree(place.runs)
    laboratory = Laboratory(place.runs)
    laboratory.found()
    with laboratory.trail() as writer:
        writer.append(SETTINGS, SUBJECT, "first seen", settings_details(TEXTS, None, ()))
    for _ in range(4):
        laboratory.run()


def cases(table):
    return [pytest.param(*case, id=name) for name, *case in table]


@pytest.mark.parametrize(("alter", "number", "words"), cases([*PROTOCOLS, *RUNS, *SETTINGS_TABLE, *CLOCKS]))
def test_an_alteration_is_found_and_named_without_a_witness(place, alter, number, words):
    alter(place)
    assert_found(place.verify(with_witness=False), number, words)


@pytest.mark.requirement("TRAIL-11")
@pytest.mark.parametrize(("alter", "words"), cases(WITNESS_ALONE))
def test_a_forgery_that_agrees_in_everything_is_found_by_the_witness(place, alter, words):
    alter(place)
    assert_found(place.verify(with_witness=True), "1.7", words)


@pytest.mark.parametrize(("alter", "words"), cases(WITNESS_ALONE))
def test_and_where_there_is_no_witness_verification_says_what_it_cannot_show(place, alter, words):
    alter(place)
    verification = place.verify(with_witness=False)
    assert {each.outcome for each in verification.outcomes} == {"passed"}, verification.with_outcome("failed")
    [check] = [each for each in verification.outcomes if each.number == "1.7"]
    assert "compared with no head kept elsewhere (witness or archived report)" in check.notes[0]
    assert "one built anew together with them not at all" in check.notes[0]


@pytest.mark.parametrize(("alter", "outcome", "words"), cases(WITNESS))
def test_an_altered_witness_is_found_and_named(place, alter, outcome, words):
    alter(place)
    [check] = [each for each in place.verify(with_witness=True).outcomes if each.number == "1.7"]
    assert check.outcome == outcome
    assert any(re.search(words, note) for note in check.notes), check.notes


def test_every_check_of_a_protocol_is_shown_to_fail_by_the_table():
    shown = {number for _, _, number, _ in PROTOCOLS}
    assert {f"4.{number}" for number in range(1, 12)} <= shown


def test_each_flipped_byte_of_protocols_and_settings_is_found(place):
    files = [
        path
        for path in sorted((place.runs / "IRON-7").rglob("*"))
        if "protocol-" in str(path) and path.is_file()
    ]
    files += sorted(place.configs.iterdir())
    assert len(files) > 15
    for path in files:
        content = path.read_bytes()
        path.chmod(0o644)
        for at_byte in {0, len(content) - 1, len(content) // 2}:
            spoilt = bytearray(content)
            spoilt[at_byte] ^= 1
            path.write_bytes(spoilt)
            failed = place.verify(with_witness=False).with_outcome("failed")
            assert any(path.name in note for each in failed for note in each.notes), (path, at_byte)
        path.write_bytes(content)
    assert place.verify(with_witness=False).exit_code == ExitCode.DONE
