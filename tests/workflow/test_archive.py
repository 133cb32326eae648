"""A copy for somebody else is complete, is certified only where everything verifies, and leaves a record."""

import json
import shutil
import subprocess
import sys
import zipfile

import pytest

from assayfolio.evidence import program_store
from assayfolio.workflow import archived_environment, own_wheel
from support.resealed import contents, edit_json, rebuild_manifests, replace_in, writable_copy
from support.workspaces import Bench, command


@pytest.fixture(scope="module")
def bench(tmp_path_factory):
    """A workspace with two runs; a program was kept with them, as an installed one is."""
    patch = pytest.MonkeyPatch()
    wheel = own_wheel.OwnWheel("assayfolio-9.9-py3-none-any.whl", b"an invented program")
    patch.setattr("assayfolio.workflow.environments.own_wheel", lambda: wheel)
    bench = Bench(tmp_path_factory.mktemp("bench") / "w")
    bench.run()
    bench.run()
    patch.undo()
    return bench


@pytest.fixture
def folio(bench):
    return bench.runs / "TST-1/run-0001"


@pytest.mark.requirement("RECORD-9")
def test_a_copy_holds_the_folios_byte_for_byte_and_every_line_since(bench, folio, tmp_path):
    answer = bench("archive", folio, bench.runs / "TST-1/run-0002", "--to", tmp_path / "copy", "--json")
    assert answer.code == 0, answer.err
    for name in ("run-0001", "run-0002"):
        assert contents(tmp_path / "copy/folios/TST-1" / name) == contents(bench.runs / "TST-1" / name)
    lines = (tmp_path / "copy/trail/lines.jsonl").read_bytes()
    trail = (bench.runs / "audit-trail.jsonl").read_bytes()
    assert lines in trail
    head = json.loads((tmp_path / "copy/true-copy.json").read_bytes())["trail_head"]
    assert json.loads(lines.splitlines()[-1])["seq"] == head["seq"]


def test_the_folio_explains_itself_with_the_lines_of_the_copy(bench, folio, tmp_path):
    assert bench("archive", folio, "--to", tmp_path / "copy").code == 0
    script = tmp_path / "copy/folios/TST-1/run-0001/data/check_folio.py"
    outcome = subprocess.run(
        [sys.executable, "-I", "-S", script, tmp_path / "copy/trail/lines.jsonl"],
        capture_output=True,
        text=True,
        check=False,
    )
    assert outcome.returncode == 0, outcome.stdout


@pytest.mark.needs("sha256sum")
def test_stock_tools_check_the_whole_copy(bench, folio, tmp_path):
    assert bench("archive", folio, "--to", tmp_path / "copy").code == 0
    outcome = subprocess.run(
        ["sha256sum", "-c", "sha256sums.txt"],
        cwd=tmp_path / "copy",
        capture_output=True,
        text=True,
        check=False,
    )
    assert outcome.returncode == 0
    listed = {line.rpartition(": ")[0] for line in outcome.stdout.splitlines()}
    there = {path for path in contents(tmp_path / "copy") if path != "sha256sums.txt"}
    assert listed == there


@pytest.mark.requirement("RECORD-9")
def test_the_certificate_is_sealed_in_the_workspace_too(bench, folio, tmp_path):
    answer = bench("archive", folio, "--to", tmp_path / "copy", "--json")
    record = bench.root / answer.document["record"]
    for name in ("true-copy.json", "true-copy.pdf"):
        assert (record / "data" / name).read_bytes() == (tmp_path / "copy" / name).read_bytes()
    entry = bench.entries()[-1]
    assert entry["details"]["folios"] == {"TST-1/run-0001": answer.document["folios"][0]["seal"]}
    assert bench("verify").code == 0


def test_what_does_not_verify_gets_no_certificate(bench, tmp_path):
    copy = Bench.__new__(Bench)
    object.__setattr__(copy, "root", writable_copy(bench.root, tmp_path / "w"))
    replace_in(copy.root / "runs/TST-1/run-0001/data/inputs/values.csv", "48.2", "48.3")
    answer = copy("archive", copy.root / "runs/TST-1/run-0001", "--to", tmp_path / "copy")
    assert answer.code == 1
    assert "data/inputs/values.csv" in answer.err
    assert not (tmp_path / "copy").exists()
    assert list(tmp_path.glob("*.unfinished")) == []


def test_a_copy_is_made_in_a_new_folder_outside_the_runs(bench, folio, tmp_path):
    (tmp_path / "there").mkdir()
    assert bench("archive", folio, "--to", tmp_path / "there").code == 2
    assert bench("archive", folio, "--to", bench.runs / "copy").code == 2
    stray = tmp_path / "stray"
    shutil.copytree(folio, stray)
    assert bench("archive", stray, "--to", tmp_path / "copy").code == 2
    assert not (tmp_path / "copy").exists()


def test_a_run_names_the_program_that_made_it_and_the_workspace_keeps_it_once(bench, folio):
    program = json.loads((folio / "data/run.json").read_bytes())["program"]
    kept = program_store.kept_program(bench.runs, program["sha256"])
    assert kept.name == program["wheel"] == "assayfolio-9.9-py3-none-any.whl"
    assert len(list((bench.runs / "_programs").iterdir())) == 1
    assert bench("verify").code == 0


def test_a_changed_program_shows(bench, tmp_path):
    copy = Bench.__new__(Bench)
    object.__setattr__(copy, "root", writable_copy(bench.root, tmp_path / "w"))
    (wheel,) = (copy.root / "runs/_programs").rglob("*.whl")
    wheel.write_bytes(b"another program")
    answer = copy("verify")
    assert answer.code == 1
    assert "_programs/" in answer.out


def test_a_program_that_is_not_kept_makes_no_self_contained_copy(bench, tmp_path):
    copy = Bench.__new__(Bench)
    object.__setattr__(copy, "root", writable_copy(bench.root, tmp_path / "w"))
    shutil.rmtree(copy.root / "runs/_programs")
    answer = copy(
        "archive",
        copy.root / "runs/TST-1/run-0001",
        "--to",
        tmp_path / "copy",
        "--with-wheels",
        "--wheels",
        tmp_path,
    )
    assert answer.code == 2
    assert "_programs" in answer.err


def test_archived_code_that_nothing_vouches_for_is_not_started(folio, tmp_path, monkeypatch):
    monkeypatch.setattr(archived_environment, "_build", _must_not_be_reached)
    copy = writable_copy(folio, tmp_path / "copy")
    arguments = ("rerun", copy, "--output", tmp_path / "audit", "--environment", "archived")
    digest = json.loads((copy / "data/run.json").read_bytes())["program"]["sha256"]
    unnamed = command(*arguments)
    assert unnamed.code == 2
    assert digest in unnamed.err
    assert command(*arguments, "--trust-code", "0" * 64).code == 2


def test_a_changed_record_cannot_smuggle_another_program_past_the_trail(bench, folio, tmp_path, monkeypatch):
    monkeypatch.setattr(archived_environment, "_build", _must_not_be_reached)
    copy = writable_copy(folio, tmp_path / "copy")
    edit_json(copy / "data/run.json", lambda record: record["program"].update(sha256="1" * 64))
    rebuild_manifests(copy)
    answer = bench("rerun", copy, "--environment", "archived")
    assert answer.code == 2
    assert "Nothing vouches" in answer.err


def _must_not_be_reached(*_):
    raise AssertionError("an environment was built")


def test_a_program_that_is_not_at_hand_is_asked_for_in_words(folio, tmp_path):
    digest = json.loads((folio / "data/run.json").read_bytes())["program"]["sha256"]
    copy = writable_copy(folio, tmp_path / "copy")
    answer = command(
        "rerun", copy, "--output", tmp_path / "audit", "--environment", "archived", "--trust-code", digest
    )
    assert answer.code == 2
    assert "--wheels" in answer.err


def test_both_results_are_reported_side_by_side(bench, folio, monkeypatch):
    there = {
        "outcome": "different",
        "parts": [{"part": "figures", "outcome": "different", "notes": ["dots.svg"]}],
    }
    monkeypatch.setattr(archived_environment, "_build", lambda *_: None)
    monkeypatch.setattr(archived_environment, "_started", lambda *_: there)
    monkeypatch.setattr(archived_environment, "_python_words", lambda *_: "CPython 3.11.7")
    answer = bench("rerun", folio, "--environment", "archived", "--json")
    assert answer.code == 1
    assert answer.document["outcome"] == "identical"
    assert answer.document["archived_environment"]["outcome"] == "different"
    assert answer.document["archived_environment"]["vouched_for_by"].endswith("audit trail")


class _Distribution:
    """An installed package as the standard library shows it."""

    version = "9.9"

    def __init__(self, folder):
        self.folder = folder
        self.files = [own_wheel.importlib.metadata.PackagePath(name) for name in _INSTALLED]

    def locate_file(self, path):
        return self.folder / path


_INSTALLED = {
    "assayfolio/__init__.py": b"",
    "assayfolio/__pycache__/__init__.cpython-311.pyc": b"x",
    "assayfolio-9.9.dist-info/METADATA": b"Name: assayfolio\nVersion: 9.9\n",
    "assayfolio-9.9.dist-info/WHEEL": b"Wheel-Version: 1.0\nTag: py3-none-any\n",
    "assayfolio-9.9.dist-info/RECORD": b"made by the installer",
    "assayfolio-9.9.dist-info/INSTALLER": b"pip",
    "assayfolio-9.9.dist-info/direct_url.json": b'{"url": "file:///home/somebody"}',
    "../../../bin/assayfolio": b"#!/home/somebody/python",
}


@pytest.fixture
def installed(tmp_path, monkeypatch):
    for name, content in _INSTALLED.items():
        path = tmp_path / "site-packages" / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_bytes(content)
    found = _Distribution(tmp_path / "site-packages")
    monkeypatch.setattr(own_wheel.importlib.metadata, "distribution", lambda _: found)
    monkeypatch.setattr(own_wheel, "_PACKAGE", tmp_path / "site-packages/assayfolio")
    own_wheel.own_wheel.cache_clear()
    yield
    own_wheel.own_wheel.cache_clear()


@pytest.mark.usefixtures("installed")
def test_the_kept_wheel_holds_what_is_installed_and_nothing_of_this_machine(tmp_path):
    wheel = own_wheel.own_wheel()
    assert wheel.name == "assayfolio-9.9-py3-none-any.whl"
    path = tmp_path / wheel.name
    path.write_bytes(wheel.content)
    with zipfile.ZipFile(path) as packed:
        assert set(packed.namelist()) == {
            "assayfolio/__init__.py",
            "assayfolio-9.9.dist-info/METADATA",
            "assayfolio-9.9.dist-info/WHEEL",
            "assayfolio-9.9.dist-info/RECORD",
        }
        assert b"assayfolio/__init__.py,sha256=47DEQpj8HBSa-_TImW-5JCeuQeRkm5NMpJWZG3hSuFU,0" in packed.read(
            "assayfolio-9.9.dist-info/RECORD"
        )
    assert b"somebody" not in wheel.content


@pytest.mark.usefixtures("installed")
def test_the_same_installation_gives_the_same_wheel():
    first = own_wheel.own_wheel()
    own_wheel.own_wheel.cache_clear()
    assert own_wheel.own_wheel() == first


def test_another_installed_copy_is_not_taken_for_the_one_that_runs(installed, monkeypatch, tmp_path):
    monkeypatch.setattr(own_wheel, "_PACKAGE", tmp_path / "elsewhere/assayfolio")
    assert own_wheel.own_wheel() is None
