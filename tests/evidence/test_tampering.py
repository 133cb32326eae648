"""Alterations of a sealed workspace, one at a time: each is found, and named for what it is."""

# The tables keep one alteration a line.
# ruff: noqa: E501

import json
import os
import re
import shutil

import pytest

from assayfolio.canonical import canonical_bytes, sha256_hex
from assayfolio.errors import ExitCode
from assayfolio.evidence.verification import verify_workspace
from evidence.forger import Workspace
from evidence.laboratory import Laboratory


@pytest.fixture(scope="module")
def sealed_workspace(tmp_path_factory):
    laboratory = Laboratory(tmp_path_factory.mktemp("sealed") / "runs")
    laboratory.found()
    laboratory.run()
    laboratory.run(failing=True)
    laboratory.run("ZINC-1")
    return laboratory.runs


@pytest.fixture
def workspace(sealed_workspace, tmp_path):
    shutil.copytree(sealed_workspace, tmp_path / "runs")
    return Workspace(tmp_path / "runs")


def assert_found(workspace, number, words):
    verification = verify_workspace(workspace.runs, None)
    assert verification.exit_code == ExitCode.FINDING == 1
    notes = [note for each in verification.outcomes if each.number == number for note in each.notes]
    failed = [each for each in verification.with_outcome("failed") if each.number == number]
    assert failed, f"check {number} failed nowhere"
    assert any(re.search(words, note) for note in notes), notes


@pytest.mark.requirement("RECORD-4")
def test_the_workspace_as_it_was_sealed_passes_every_check(workspace):
    verification = verify_workspace(workspace.runs, None)
    assert {each.outcome for each in verification.outcomes} == {"passed"}
    assert verification.exit_code == ExitCode.DONE == 0


# Name, alteration, the check that finds it, the words in which it says so.
PAYLOAD = [
    ("a figure changed", lambda w: w.edit("data/findings.json", b"9.25", b"9.75"), "3.4", r"changed: data/findings\.json"),
    ("a byte of the report", lambda w: w.edit("data/report.pdf", b"1.7", b"1.6"), "3.4", r"changed: data/report\.pdf"),
    ("raw data changed", lambda w: w.edit("data/inputs/iron data.csv", b"1.25", b"1.26"), "3.4", r"changed: data/inputs/iron data\.csv"),
    ("the same in the run record's eyes", lambda w: w.edit("data/inputs/iron data.csv", b"1.25", b"1.26"), "3.8", r"changed: data/inputs/iron data\.csv has SHA-256 .*run\.json says"),
    ("a blank added to the definition", lambda w: w.edit("data/study.yaml", b"\n", b" \n"), "3.4", r"changed: data/study\.yaml"),
    ("a file emptied", lambda w: w.write("data/figures/dots.svg", b""), "3.4", r"changed: data/figures/dots\.svg"),
    ("a file of no digest elsewhere", lambda w: w.edit("data/context/lab.yaml", b"I", b"J"), "3.4", r"changed: data/context/lab\.yaml"),
    ("a file removed", lambda w: (w.folio / "data/report.pdf").unlink(), "3.4", r"missing: data/report\.pdf"),
    ("the raw data removed", lambda w: (w.folio / "data/inputs/iron data.csv").unlink(), "3.8", r"missing: data/inputs/iron data\.csv, which data/run\.json names"),
    ("the run record removed", lambda w: (w.folio / "data/run.json").unlink(), "3.7", r"missing: data/run\.json"),
    ("the run's trail removed", lambda w: (w.folio / "data/trail.jsonl").unlink(), "3.9", r"missing: data/trail\.jsonl"),
    ("the whole payload removed", lambda w: shutil.rmtree(w.folio / "data"), "3.4", r"missing: data/study\.yaml"),
    ("two files exchanged", lambda w: swap(w, "data/findings.json", "data/report.pdf"), "3.4", r"changed: data/findings\.json"),
    ("a file renamed", lambda w: (w.folio / "data/report.pdf").rename(w.folio / "data/Report.pdf"), "3.5", r"extra file: data/Report\.pdf: manifest-sha256\.txt does not list it"),
    ("a file added to the payload", lambda w: w.write("data/second.pdf", b"x"), "3.5", r"extra file: data/second\.pdf: manifest-sha256\.txt does not list it"),
    ("an input added", lambda w: w.write("data/inputs/more.csv", b"x"), "3.8", r"data/inputs/more\.csv is not among the inputs"),
    ("a file added beside the payload", lambda w: w.write("note.txt", b"x"), "3.5", r"extra file: note\.txt"),
    ("a folder with a file added beside", lambda w: w.write("scan/page.pdf", b"x"), "3.5", r"extra file: scan/page\.pdf"),
    ("a hidden file added", lambda w: w.write("data/.x", b""), "3.5", r"extra file: data/\.x"),
    ("a name that is no UTF-8 added", lambda w: (w.folio / "data" / os.fsdecode(b"\xff")).write_bytes(b""), "3.5", r"extra file: data/\\udcff"),
    ("an empty folder added", lambda w: (w.folio / "data/empty").mkdir(), "3.5", r"empty folder: data/empty"),
    ("an empty folder added beside", lambda w: (w.folio / "sign-off").mkdir(), "3.5", r"empty folder: sign-off"),
    ("a link added", lambda w: (w.folio / "data/link").symlink_to("study.yaml"), "3.5", r"symbolic link: data/link"),
    ("a link in the place of a file", lambda w: replace_by_link(w, "data/report.pdf"), "3.4", r"data/report\.pdf is not a file: symbolic link"),
    ("a link in the place of a folder", lambda w: replace_by_link(w, "data/inputs"), "3.5", r"symbolic link: data/inputs"),
    ("a pipe added", lambda w: os.mkfifo(w.folio / "data/pipe"), "3.5", r"special file: data/pipe"),
    ("a pipe in the place of a file", lambda w: ((w.folio / "data/run.json").unlink(), os.mkfifo(w.folio / "data/run.json")), "3.7", r"data/run\.json is not a file: special file"),
    ("a folder in the place of a file", lambda w: ((w.folio / "data/run.json").unlink(), (w.folio / "data/run.json").mkdir()), "3.7", r"data/run\.json is not a file: empty folder"),
    ("bytes moved, their sum kept", lambda w: (w.edit("data/context/lab.yaml", b"I", b""), w.edit("data/study.yaml", b"s", b"ss")), "3.4", r"changed: data/context/lab\.yaml"),
    ("payload size", lambda w: w.write("data/x", b"abc"), "3.6", r"bag-info\.txt states \d+ bytes in 8 files, data/ has \d+ bytes in 9 files"),
]  # fmt: skip

TAG_FILES = [
    ("bagit.txt says another version", lambda w: w.edit("bagit.txt", b"1.0", b"0.97"), "3.1", r"changed: bagit\.txt"),
    ("the same in the tag manifest's eyes", lambda w: w.edit("bagit.txt", b"1.0", b"0.97"), "3.2", r"changed: bagit\.txt has SHA-256"),
    ("bagit.txt removed", lambda w: (w.folio / "bagit.txt").unlink(), "3.1", r"missing: bagit\.txt"),
    ("bag-info.txt changed", lambda w: w.edit("bag-info.txt", b"Invented", b"Accredited"), "3.2", r"changed: bag-info\.txt"),
    ("bag-info.txt removed", lambda w: (w.folio / "bag-info.txt").unlink(), "3.6", r"missing: bag-info\.txt"),
    ("a digest in the manifest changed", lambda w: w.edit_lines("manifest-sha256.txt", flip_first_digit), "3.2", r"changed: manifest-sha256\.txt"),
    ("the manifest removed", lambda w: (w.folio / "manifest-sha256.txt").unlink(), "3.3", r"missing: manifest-sha256\.txt"),
    ("a line of the manifest removed", lambda w: w.edit_lines("manifest-sha256.txt", lambda lines: lines[1:]), "3.5", r"extra file: data/context/lab\.yaml: manifest-sha256\.txt does not list it"),
    ("a line of the manifest doubled", lambda w: w.edit_lines("manifest-sha256.txt", lambda lines: [lines[0], *lines]), "3.3", r"manifest-sha256\.txt: line 2 lists data/context/lab\.yaml a second time"),
    ("lines of the manifest exchanged", lambda w: w.edit_lines("manifest-sha256.txt", lambda lines: lines[::-1]), "3.3", r"manifest-sha256\.txt: line 2 is out of order"),
    ("carriage returns in the manifest", lambda w: w.edit_lines("manifest-sha256.txt", lambda lines: [x.replace(b"\n", b"\r\n") for x in lines]), "3.3", r"line 1 ends with a carriage return"),
    ("the manifest's last line end removed", lambda w: w.edit_lines("manifest-sha256.txt", lambda lines: [*lines[:-1], lines[-1][:-1]]), "3.3", r"line 8 has no line end"),
    ("the manifest lists a tag file", lambda w: w.edit_lines("manifest-sha256.txt", lambda lines: [b"0" * 64 + b"  bagit.txt\n", *lines]), "3.3", r"manifest-sha256\.txt lists bagit\.txt, which is outside data/"),
    ("the manifest lists a file above the folio", lambda w: w.edit_lines("manifest-sha256.txt", lambda lines: [b"0" * 64 + b"  data/../../x\n", *lines]), "3.3", r"line 1 names an unsafe path"),
    ("the manifest lists a file that never was", lambda w: w.edit_lines("manifest-sha256.txt", lambda lines: [*lines, b"0" * 64 + b"  data/zzz\n"]), "3.4", r"missing: data/zzz"),
    ("a malformed line in the manifest", lambda w: w.edit_lines("manifest-sha256.txt", lambda lines: [*lines, b"nonsense\n"]), "3.3", r"line 9 is not a SHA-256"),
    ("the manifest emptied", lambda w: w.write("manifest-sha256.txt", b""), "3.3", r"manifest-sha256\.txt: it is empty"),
    ("a weaker manifest added", lambda w: w.write("manifest-md5.txt", b""), "3.5", r"extra file: manifest-md5\.txt: a manifest of an algorithm that folios do not use"),
    ("a list of files to fetch added", lambda w: w.write("fetch.txt", b""), "3.5", r"extra file: fetch\.txt: a folio holds all its files"),
    ("the tag manifest removed", lambda w: (w.folio / "tagmanifest-sha256.txt").unlink(), "3.10", r"missing: tagmanifest-sha256\.txt"),
    ("the tag manifest lists too much", lambda w: w.edit_lines("tagmanifest-sha256.txt", lambda lines: [*lines, b"0" * 64 + b"  note.txt\n"]), "3.2", r"lists note\.txt, which is no tag file"),
    ("the tag manifest lists too little", lambda w: w.edit_lines("tagmanifest-sha256.txt", lambda lines: lines[1:]), "3.2", r"does not list bag-info\.txt"),
    ("a line end of the tag manifest changed", lambda w: w.edit_lines("tagmanifest-sha256.txt", lambda lines: [lines[0].replace(b"\n", b"\r\n"), *lines[1:]]), "3.10", r"changed: tagmanifest-sha256\.txt"),
    ("payload size stated twice", lambda w: w.edit_lines("bag-info.txt", lambda lines: [*lines, lines[-1]]), "3.6", r"Payload-Oxum stands there 2 times"),
]  # fmt: skip

CONSISTENT_REWRITES = [
    ("a figure, the manifests rewritten", lambda w: (w.edit("data/findings.json", b"9.25", b"9.75"), w.rewrite_manifests()), "3.10", r"the seal in entry \d+ is .* was rewritten after sealing"),
    ("the same in the run record's eyes", lambda w: (w.edit("data/findings.json", b"9.25", b"9.75"), w.rewrite_manifests()), "3.8", r"changed: data/findings\.json"),
    ("a context file, the manifests rewritten", lambda w: (w.edit("data/context/lab.yaml", b"I", b"J"), w.rewrite_manifests()), "3.10", r"rewritten after sealing"),
    ("a file taken out, the manifests rewritten", lambda w: ((w.folio / "data/figures/dots.svg").unlink(), (w.folio / "data/figures").rmdir(), w.rewrite_manifests()), "3.10", r"rewritten after sealing"),
    ("another label, the tag manifest rewritten", lambda w: (w.edit("bag-info.txt", b"Invented", b"Accredited"), w.rewrite_tag_manifest()), "3.10", r"rewritten after sealing"),
    ("figure, run record and manifests rewritten", lambda w: (w.edit("data/findings.json", b"9.25", b"9.75"), w.edit_run(findings_sha256=sha256_hex((w.folio / "data/findings.json").read_bytes())), w.rewrite_manifests()), "3.12", r"differ on data/findings\.json"),
    ("all that and the trail forged to the last byte", lambda w: (w.edit("data/findings.json", b"9.25", b"9.75"), w.reseal()), "3.8", r"changed: data/findings\.json"),
    ("input and its digest, the trail forged", lambda w: (w.edit("data/study.yaml", b"Iron", b"Lead"), w.edit_run(inputs=[]), w.reseal()), "3.12", r"the inputs in data/run\.json are not those of entry 3"),
    ("the allotment forged, the folio left alone", lambda w: w.forge([e | {"actor": "k.lind"} if e["action"] == "allotted" else e for e in w.entries()]), "3.9", r"data/trail\.jsonl line 1 does not stand in the audit trail"),
    ("the founding forged, so that every digest moves", lambda w: w.forge([w.entries()[0] | {"actor": "k.lind"}, *w.entries()[1:]]), "3.11", r"made under another entry 1 than the audit trail has"),
]  # fmt: skip

RUN_RECORD = [
    ("another study", lambda w: w.edit_run(study="ZINC-1"), "3.7", r"the folder lies in IRON-7, data/run\.json says study ZINC-1"),
    ("another number", lambda w: w.edit_run(number=2, run="run-0002"), "3.7", r"the folder is called run-0001, data/run\.json says run-0002"),
    ("a name that is not its number's", lambda w: w.edit_run(run="run-0009"), "3.7", r"\"run\" is 'run-0009' where the number 1 makes run-0001"),
    ("another outcome", lambda w: w.edit_run(outcome="failed"), "3.12", r"has the outcome 'failed', entry \d+ of the audit trail 'completed'"),
    ("an outcome that is none", lambda w: w.edit_run(outcome="excellent"), "3.7", r"\"outcome\" is 'excellent'"),
    ("a digest dropped", lambda w: w.edit_run(report_sha256=None), "3.8", r"data/report\.pdf is there, but data/run\.json has no digest of it"),
    ("a digest that is none", lambda w: w.edit_run(report_sha256="abc"), "3.8", r"\"report_sha256\" is not a SHA-256"),
    ("inputs that are none", lambda w: w.edit_run(inputs="all"), "3.8", r"\"inputs\" is not a list"),
    ("an input without its digest", lambda w: w.edit_run(inputs=[{"folio_path": "data/study.yaml"}]), "3.8", r"input 1 lacks"),
    ("another head at start", lambda w: w.edit_run(trail_head_at_start={"seq": 1, "sha256": "0" * 64}), "3.11", r"made under another entry 1"),
    ("a head from the future", lambda w: w.edit_run(trail_head_at_start={"seq": 999, "sha256": "0" * 64}), "3.11", r"made under entry 999, but the audit trail has \d+: lines were cut off"),
    ("no head", lambda w: w.edit_run(trail_head_at_start=None), "3.11", r"\"trail_head_at_start\" is not a number and a SHA-256"),
    ("a key that stands twice", lambda w: w.edit("data/run.json", b'"number":1', b'"number":1,"number":1'), "3.7", r'cannot be understood: the key "number" stands twice'),
    ("no JSON", lambda w: w.write("data/run.json", b"{"), "3.7", r"data/run\.json cannot be understood"),
    ("a list", lambda w: w.write("data/run.json", b"[]"), "3.7", r"it is not an object"),
]  # fmt: skip

RUN_TRAIL = [
    ("an entry changed", lambda w: w.edit("data/trail.jsonl", b"m.berg", b"k.lind"), "3.9", r"data/trail\.jsonl line 1 does not stand in the audit trail"),
    ("an entry taken out", lambda w: w.edit_lines("data/trail.jsonl", lambda lines: lines[:1] + lines[2:]), "3.9", r"data/trail\.jsonl lacks entry \d+ \(self-checked\)"),
    ("entries exchanged", lambda w: w.edit_lines("data/trail.jsonl", lambda lines: lines[::-1]), "3.9", r"does not hold just the entries of IRON-7/run-0001 in their order"),
    ("an entry doubled", lambda w: w.edit_lines("data/trail.jsonl", lambda lines: [*lines, lines[-1]]), "3.9", r"does not hold just the entries"),
    ("an entry of another run added", lambda w: w.edit_lines("data/trail.jsonl", lambda lines: [*lines, w.trail.read_bytes().splitlines(keepends=True)[-1]]), "3.9", r"does not hold just the entries"),
    ("the last line end removed", lambda w: w.write("data/trail.jsonl", (w.folio / "data/trail.jsonl").read_bytes()[:-1]), "3.9", r"the last line has no line end"),
    ("carriage returns", lambda w: w.edit_lines("data/trail.jsonl", lambda lines: [x.replace(b"\n", b"\r\n") for x in lines]), "3.9", r"line 1 is not an entry: it ends with a carriage return"),
    ("a blank added", lambda w: w.edit("data/trail.jsonl", b'"actor":', b'"actor": '), "3.9", r"line 1 is not an entry: it is not in canonical form"),
    ("emptied", lambda w: w.write("data/trail.jsonl", b""), "3.9", r"lacks entry \d+ \(allotted\)"),
]  # fmt: skip

TRAIL = [
    ("a text in a middle line", lambda w: w.edit_trail(b"invented laboratory", b"invented Laboratory"), "1.4", r"line 2: it does not carry the SHA-256 of line 1"),
    ("a text in the last line", lambda w: w.trail.write_bytes(flip_in_last_line(w.trail.read_bytes())), "1.5", r"audit-trail\.head: it does not carry the SHA-256 of line"),
    ("a blank between key and value", lambda w: w.edit_trail(b'"actor":', b'"actor": '), "1.2", r"line 1: it is not in canonical form"),
    ("keys exchanged", lambda w: w.edit_trail(b'{"action":"founded","actor":"m.berg",', b'{"actor":"m.berg","action":"founded",'), "1.2", r"line 1: it is not in canonical form"),
    ("a letter spelt as an escape", lambda w: w.edit_trail(b'"founded"', b'"f\\u006funded"'), "1.2", r"line 1: it is not in canonical form"),
    ("a key doubled", lambda w: w.edit_trail(b'"actor":"m.berg"', b'"actor":"k.lind","actor":"m.berg"'), "1.2", r'line 1: the key "actor" stands twice'),
    ("a key added", lambda w: w.edit_trail(b'"actor":', b'"aaa":1,"actor":'), "1.2", r"line 1: "),
    ("a byte that is no UTF-8", lambda w: w.edit_trail(b"m.berg", b"m.b\xffrg"), "1.2", r"line 1: byte \d+ is not UTF-8"),
    ("carriage returns", lambda w: w.trail.write_bytes(w.trail.read_bytes().replace(b"\n", b"\r\n")), "1.2", r"line 1: it ends with a carriage return"),
    ("an empty line", lambda w: w.trail.write_bytes(w.trail.read_bytes() + b"\n"), "1.2", r"the line is empty"),
    ("the last line end removed", lambda w: w.trail.write_bytes(w.trail.read_bytes()[:-1]), "1.1", r"have no line end"),
    ("the same in the head's eyes", lambda w: w.trail.write_bytes(w.trail.read_bytes()[:-1]), "1.5", r"the last line has no line end: lines were lost"),
    ("the last line removed", lambda w: w.trail.write_bytes(b"".join(w.trail.read_bytes().splitlines(keepends=True)[:-1])), "1.5", r"audit-trail\.head: it stands at entry \d+, but .* whole lines: lines were lost"),
    ("a middle line removed", lambda w: drop_line(w, 3), "1.3", r"line 4: it has the number 5 where 4 should stand"),
    ("the same in the chain", lambda w: drop_line(w, 3), "1.4", r"line 4: it does not carry the SHA-256 of line 3"),
    ("the first line removed", lambda w: drop_line(w, 0), "1.4", r"lines before it are missing"),
    ("lines exchanged", lambda w: w.trail.write_bytes(b"".join(w.trail.read_bytes().splitlines(keepends=True)[::-1])), "1.3", r"line 1: it has the number"),
    ("a line added by hand", lambda w: add_line(w), "1.5", r"or the line was added by hand"),
    ("bytes added at the end", lambda w: w.trail.write_bytes(w.trail.read_bytes() + b"\0\0"), "1.1", r"2 bytes after the last whole line"),
    ("the trail removed", lambda w: w.trail.unlink(), "1.1", r"missing: audit-trail\.jsonl"),
    ("the trail emptied", lambda w: w.trail.write_bytes(b""), "1.1", r"missing: audit-trail\.jsonl is gone or empty"),
    ("trail and head removed", lambda w: (w.trail.unlink(), w.head.unlink()), "1.1", r"missing: audit-trail\.jsonl is gone or empty"),
    ("the head removed", lambda w: w.head.unlink(), "1.5", r"audit-trail\.head: it is missing"),
    ("the head's digest changed", lambda w: w.head.write_bytes(w.head.read_bytes().replace(b'"sha256":"', b'"sha256":"0', 1)), "1.5", r"audit-trail\.head"),
    ("the head's line end removed", lambda w: w.head.write_bytes(w.head.read_bytes()[:-1]), "1.5", r"audit-trail\.head: it is not a head as written here: the line end is missing"),
    ("a blank in the head", lambda w: w.head.write_bytes(w.head.read_bytes().replace(b":", b": ", 1)), "1.5", r"audit-trail\.head: it is not a head"),
    ("the head of an earlier day", lambda w: w.head.write_bytes(head_at(w, 4)), "1.5", r"lines were added without it, or it was put back"),
    ("trail and head cut back together", lambda w: w.forge(w.entries()[:6]), "3.10", r"no seal of IRON-7/run-0001|knows no run ZINC-1/run-0001"),
    ("the same, seen among the folios", lambda w: w.forge(w.entries()[:6]), "2.3", r"extra folder: ZINC-1/run-0001: the audit trail knows nothing of it"),
    ("a run erased from trail and head", lambda w: w.forge([e for e in w.entries() if e["subject"] != "IRON-7/run-0001"]), "2.1", r"allots IRON-7/run-0002 where 1 comes next"),
    ("an allotment erased", lambda w: w.forge([e for e in w.entries() if (e["action"], e["subject"]) != ("allotted", "ZINC-1/run-0001")]), "2.1", r"is about ZINC-1/run-0001, which was never allotted"),
    ("a run sealed twice", lambda w: w.forge([*w.entries(), w.entries()[-1]]), "2.1", r"ZINC-1/run-0001 is sealed more than once"),
    ("a number that is not the subject's", lambda w: w.forge([e | {"details": e["details"] | {"number": 5}} if e["action"] == "allotted" else e for e in w.entries()]), "2.1", r"details name another number"),
]  # fmt: skip

WORKSPACE = [
    ("a folio deleted", lambda w: shutil.rmtree(w.folio), "2.2", r"missing: IRON-7/run-0001 was sealed, and its folio is gone"),
    ("a study's folder deleted", lambda w: shutil.rmtree(w.runs / "IRON-7"), "2.2", r"missing: IRON-7/run-0001"),
    ("a folio renamed", lambda w: w.folio.rename(w.folio.with_name("run-0009")), "2.3", r"extra folder: IRON-7/run-0009"),
    ("a folio copied", lambda w: shutil.copytree(w.folio, w.folio.with_name("run-0003")), "2.3", r"extra folder: IRON-7/run-0003: the audit trail knows nothing of it"),
    ("the copy claims another number", lambda w: shutil.copytree(w.folio, w.folio.with_name("run-0003")), "3.10", r"the audit trail knows no run IRON-7/run-0003"),
    ("two folios exchanged", lambda w: swap_folios(w), "3.10", r"rewritten after sealing"),
    ("the same in the run record", lambda w: swap_folios(w), "3.7", r"the folder is called run-0001, data/run\.json says run-0002"),
    ("a folio put under another study", lambda w: (shutil.rmtree(w.runs / "ZINC-1" / "run-0001"), shutil.copytree(w.folio, w.runs / "ZINC-1" / "run-0001")), "3.7", r"the folder lies in ZINC-1, data/run\.json says study IRON-7"),
    ("a folder of another kind", lambda w: (w.runs / "IRON-7" / "drafts").mkdir(), "2.3", r"extra folder: IRON-7/drafts"),
    ("a study the trail does not know", lambda w: shutil.copytree(w.runs / "ZINC-1", w.runs / "LEAD-1"), "2.3", r"extra folder: LEAD-1: the audit trail knows no study"),
    ("a staging folder nobody explains", lambda w: shutil.copytree(w.folio, w.folio.with_name("run-0001.unsealed")), "2.3", r"extra folder: IRON-7/run-0001\.unsealed: the audit trail does not explain it"),
    ("a link in the place of a folio", lambda w: (w.folio.rename(w.runs.parent / "moved"), w.folio.symlink_to(w.runs.parent / "moved")), "2.2", r"something else stands in its place"),
    ("a link in the place of a study", lambda w: ((w.runs / "IRON-7").rename(w.runs.parent / "moved"), (w.runs / "IRON-7").symlink_to(w.runs.parent / "moved")), "2.3", r"symbolic link: IRON-7"),
    ("a file in the place of a folio", lambda w: (shutil.rmtree(w.folio), w.folio.write_bytes(b"")), "2.2", r"something else stands in its place"),
    ("a torn line nobody entered", lambda w: (w.runs / "audit-trail.torn-9").write_bytes(b"x"), "2.3", r"extra file: audit-trail\.torn-9"),
]  # fmt: skip

REGISTER = [
    ("a file's receipt erased", lambda w: w.forge([e for e in w.entries() if e["action"] != "received"]), "2.5", r"entry 2 \(IRON-7/run-0001\) used iron data\.csv before it was received"),
    ("a file's receipt entered late", lambda w: w.forge(receipt_last(w.entries())), "2.5", r"used iron data\.csv before it was received"),
    ("a file received twice", lambda w: w.forge([*w.entries(), w.entries()[1]]), "2.5", r"enters iron data\.csv again: entry 2 has these bytes"),
    ("a receipt without a digest", lambda w: w.forge(edited(w.entries(), "received", sha256="ab")), "2.5", r"entry 2 tells of no file"),
    ("a receipt of a negative size", lambda w: w.forge(edited(w.entries(), "received", size=-1)), "2.5", r"entry 2 tells of no file"),
    ("another file's digest received", lambda w: w.forge(edited(w.entries(), "received", sha256="ab" * 32)), "2.5", r"used iron data\.csv before it was received"),
    ("the raw data of a run kept quiet", lambda w: w.forge(edited(w.entries(), "allotted", data=None)), "2.5", r"entry 3 does not say which of its inputs are raw data"),
    ("raw data that are no input", lambda w: w.forge(edited(w.entries(), "allotted", data=["other.csv"])), "2.5", r"names other\.csv as raw data, but not among its inputs"),
    ("a run said to have had no raw data", lambda w: w.forge(edited(w.entries(), "allotted", data=[])), "3.12", r"the raw data in data/run\.json are not those of entry 3"),
    ("an execution counted too low", lambda w: (second(w).edit_run(executions={"number": 1})), "3.12", r"calls this execution 1 on these data, by the audit trail it is 2"),
    ("an execution not counted", lambda w: (w.edit_run(executions=None)), "3.12", r"calls this execution None on these data"),
]  # fmt: skip

TABLE = [*PAYLOAD, *TAG_FILES, *CONSISTENT_REWRITES, *RUN_RECORD, *RUN_TRAIL, *TRAIL, *WORKSPACE, *REGISTER]


def swap(workspace, one, other):
    first, second = (workspace.folio / one).read_bytes(), (workspace.folio / other).read_bytes()
    workspace.write(one, second)
    workspace.write(other, first)


def replace_by_link(workspace, path):
    target = workspace.folio / path
    target.rename(workspace.runs.parent / "moved")
    target.symlink_to(workspace.runs.parent / "moved")


def flip_first_digit(lines):
    other = b"1" if lines[0][:1] == b"0" else b"0"
    return [other + lines[0][1:], *lines[1:]]


def flip_in_last_line(content):
    start = content.rindex(b"\n", 0, -1) + 1
    return content[:start] + content[start:].replace(b"m.berg", b"m.borg")


def drop_line(workspace, place):
    lines = workspace.trail.read_bytes().splitlines(keepends=True)
    workspace.trail.write_bytes(b"".join(lines[:place] + lines[place + 1 :]))


def add_line(workspace):
    lines = workspace.trail.read_bytes().splitlines()
    entry = json.loads(lines[-1]) | {"seq": len(lines) + 1, "previous": sha256_hex(lines[-1])}
    with workspace.trail.open("ab") as trail:
        trail.write(canonical_bytes(entry) + b"\n")


def head_at(workspace, seq):
    line = workspace.trail.read_bytes().splitlines()[seq - 1]
    return canonical_bytes({"seq": seq, "sha256": sha256_hex(line)}) + b"\n"


def receipt_last(entries):
    return sorted(entries, key=lambda entry: entry["action"] == "received")


def edited(entries, action, **changes):
    """Every entry of this action with other details."""
    return [e | {"details": e["details"] | changes} if e["action"] == action else e for e in entries]


def second(workspace):
    other = Workspace(workspace.runs)
    other.folio = workspace.folio.with_name("run-0002")
    return other


def swap_folios(workspace):
    other = workspace.folio.with_name("run-0002")
    workspace.folio.rename(workspace.folio.with_name("aside"))
    other.rename(workspace.folio)
    workspace.folio.with_name("aside").rename(other)


@pytest.mark.requirement("RECORD-1")
@pytest.mark.parametrize(
    ("alter", "number", "words"), [pytest.param(*case, id=name) for name, *case in TABLE]
)
def test_an_alteration_is_found_and_named(workspace, alter, number, words):
    alter(workspace)
    assert_found(workspace, number, words)


@pytest.mark.parametrize(
    ("alter", "number", "words"),
    [pytest.param(*case, id=name) for name, *case in [*PAYLOAD, *TAG_FILES, *RUN_RECORD]],
)
def test_an_altered_folio_leaves_the_other_checks_of_the_workspace_alone(workspace, alter, number, words):
    alter(workspace)
    failed = verify_workspace(workspace.runs, None).with_outcome("failed")
    assert {each.subject for each in failed} == {"IRON-7/run-0001"}


def test_every_check_but_the_note_on_times_is_shown_to_fail_by_the_table():
    shown = {number for _, _, number, _ in TABLE}
    checks = {f"1.{n}" for n in range(1, 6)} | {"2.1", "2.2", "2.3", "2.5"} | {f"3.{n}" for n in range(1, 13)}
    assert shown == checks


def evidence_files(runs):
    return [path for path in sorted(runs.rglob("*")) if path.is_file() and not path.name.startswith(".")]


@pytest.mark.requirement("RECORD-1")
def test_each_flipped_byte_in_each_file_is_found_and_the_file_named(workspace):
    """Every file of the workspace; a byte at its start, its end and at steps between."""
    files = evidence_files(workspace.runs)
    assert len(files) > 30
    for path in files:
        content = path.read_bytes()
        path.chmod(0o644)
        for place in {0, len(content) - 1, *range(0, len(content), max(1, len(content) // 4))}:
            spoilt = bytearray(content)
            spoilt[place] ^= 1
            path.write_bytes(spoilt)
            failed = verify_workspace(workspace.runs, None).with_outcome("failed")
            name = (
                path.name if path.parent == workspace.runs else path.relative_to(path.parents[-1]).as_posix()
            )
            inside = re.sub(r".*/run-\d+/", "", name)
            assert any(inside in note for each in failed for note in each.notes), (path, place)
        path.write_bytes(content)
    assert verify_workspace(workspace.runs, None).exit_code == ExitCode.DONE
