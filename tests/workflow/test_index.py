"""The register of runs: derived from trail and folios, and the same whether carried on or built anew."""

import json
import os
import re
import shutil
from hashlib import sha256
from pathlib import Path
from unittest import mock

import pytest

from assayfolio.evidence.locks import lock_path, take_lock
from assayfolio.evidence.register import read_register
from assayfolio.evidence.states import run_standings, study_standing
from assayfolio.evidence.trail import read_trail
from assayfolio.evidence.verification import verify_workspace
from assayfolio.workflow import index_pages
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.index_assets import made_by
from assayfolio.workflow.workspace import Workspace
from support.staff import as_account, staffed
from support.unrendered import unrendered
from support.workspaces import DATA, STUDY, Bench

NOT_PAGES = {"memory.sqlite", ".pages.lock"}
WHY = ("--reason", "The balance was out of tolerance", "--investigation", "INV-7")


@pytest.fixture(autouse=True)
def _without_rendering():
    with unrendered():
        yield


@pytest.fixture
def bench(tmp_path) -> Bench:
    """A workspace with one run."""
    made = Bench(tmp_path / "w")
    made.run()
    return made


def pages(runs: Path) -> dict[str, bytes]:
    """Every file of the register that a browser may load, by its path."""
    found = {"index.html": (runs / "index.html").read_bytes()}
    for path in sorted((runs / "_register").rglob("*")):
        if path.is_file() and path.name not in NOT_PAGES:
            found[path.relative_to(runs).as_posix()] = path.read_bytes()
    return found


def built_anew(bench: Bench, place: Path) -> dict[str, bytes]:
    """The pages that a copy of the workspace without its register gets."""
    shutil.rmtree(place, ignore_errors=True)
    shutil.copytree(bench.root, place, symlinks=True)
    shutil.rmtree(place / "runs/_register", ignore_errors=True)
    (place / "runs/index.html").unlink(missing_ok=True)
    copied = Bench.__new__(Bench)
    copied.root, copied.runs = place, place / "runs"
    assert copied("index", "--rebuild").code in (0, 1)
    return pages(copied.runs)


def rows(bench: Bench, path: str = "_register/data/runs-0001.js") -> list[list]:
    """The rows of a data file."""
    text = (bench.runs / path).read_text("ascii")
    return json.loads(text[text.index(",") + 1 : text.rindex(")")])


def page(bench: Bench, path: str) -> str:
    return (bench.runs / path).read_text("utf-8")


def register_notes(bench: Bench) -> tuple[str, tuple[str, ...]]:
    [outcome] = [one for one in verify_workspace(bench.runs, None).outcomes if one.number == "2.3"]
    return outcome.outcome, outcome.notes


class TestUpToDate:
    def test_is_the_same_bytes_as_built_anew_after_every_event(self, tmp_path):
        bench = staffed(Bench(tmp_path / "w"))
        run = ("run", bench.study)
        replacing = (*run, "--replaces", "run-0002", "--reason", "A value was mistyped")
        review = ("trail", "--review", "TST-1/run-0003", "--outcome", "All entries read, in order")
        bench("index")
        for account, *command in (
            ("ann", "preregister", bench.study),
            ("ann", *run),
            ("ann", *run),
            ("cem", "void", bench.runs / "TST-1/run-0001", *WHY),
            ("ann", *replacing),
            ("ben", *review),
        ):
            if "--replaces" in command:
                bench.data.write_text(DATA.replace("48.2", "48.4"))
            answer = as_account(bench, account, *command)
            assert answer.code == 0, answer.err
            answer = bench("index", "--json")
            assert (answer.code, answer.document["rebuilt"]) == (0, False), command
            found, wanted = pages(bench.runs), built_anew(bench, tmp_path / "copy")
            assert found.keys() == wanted.keys(), command
            assert [path for path in found if found[path] != wanted[path]] == [], command
        assert [row[4] for row in rows(bench)] == ["void", "superseded", "draft"]

    def test_a_second_call_writes_nothing(self, bench):
        first = bench("index", "--json").document
        again = bench("index", "--json").document
        assert (first["rebuilt"], first["runs"], first["looked_at"]) == (True, 1, 1)
        assert (again["rebuilt"], again["looked_at"], again["written"]) == (False, 0, 0)

    def test_one_new_run_has_only_its_own_folio_looked_at(self, bench):
        bench("index")
        bench.data.write_text(DATA.replace("48.2", "48.4"))
        bench.run()
        answer = bench("index", "--json").document
        assert (answer["rebuilt"], answer["runs"], answer["looked_at"]) == (False, 2, 1)

    def test_another_execution_on_the_same_data_shows_at_the_earlier_ones(self, bench):
        bench("index")
        bench.run()
        bench("index")
        assert [row[8:10] for row in rows(bench)] == [[1, 2], [2, 2]]

    def test_nothing_is_entered_in_the_trail_and_no_folio_is_touched(self, bench):
        def evidence() -> dict[str, bytes]:
            found = (path for path in bench.runs.rglob("*") if path.is_file())
            return {
                path.as_posix(): path.read_bytes()
                for path in found
                if "_register" not in path.parts and path.name != "index.html"
            }

        before = evidence()
        bench("index")
        bench("index", "--rebuild")
        assert evidence() == before

    def test_an_interrupted_call_is_made_good_by_the_next(self, bench, tmp_path):
        bench("index")
        bench.run()
        put, count = index_pages.PageFolder.put, [0]

        def stopping(self, path, content):
            count[0] += 1
            if count[0] == 2:
                raise KeyboardInterrupt
            put(self, path, content)

        with mock.patch.object(index_pages.PageFolder, "put", stopping):
            assert bench("index").code == 3
        assert bench("index").code == 0
        assert pages(bench.runs) == built_anew(bench, tmp_path / "copy")

    @pytest.mark.parametrize("damage", ["memory gone", "memory no database", "pages gone", "other version"])
    def test_what_cannot_be_carried_on_is_built_anew(self, bench, damage):
        bench("index")
        before = pages(bench.runs)
        memory = bench.runs / "_register/memory.sqlite"
        if damage == "memory gone":
            memory.unlink()
        elif damage == "memory no database":
            memory.write_bytes(b"not a database" * 100)
        elif damage == "pages gone":
            (bench.runs / "index.html").unlink()
        with mock.patch(
            "assayfolio.workflow.index.made_by",
            return_value="x" if damage == "other version" else _made_by(bench),
        ):
            assert bench("index", "--json").document["rebuilt"] is True
        assert pages(bench.runs) == before

    def test_another_trail_in_its_place_is_read_from_the_start(self, bench, tmp_path):
        bench("index")
        other = Bench(tmp_path / "other", STUDY.replace("Sulfate", "Other sulfate"))
        other.run()
        shutil.copytree(bench.runs / "_register", other.runs / "_register")
        shutil.copy(bench.runs / "index.html", other.runs / "index.html")
        assert other("index", "--json").document["rebuilt"] is True
        assert "Other sulfate" in page(other, "index.html")

    def test_pages_of_runs_that_are_no_more_in_the_trail_are_removed(self, bench):
        strange = bench.runs / "_register/studies/OLD-1/run-0001.html"
        strange.parent.mkdir(parents=True)
        strange.write_text("an old page")
        note = bench.runs / "_register/note.txt"
        note.write_text("somebody's note")
        bench("index", "--rebuild")
        assert not strange.exists()
        assert note.exists()


def _made_by(bench: Bench) -> str:
    return made_by("Invented laboratory")


class TestWhatItSays:
    def test_agrees_with_the_states_that_the_trail_gives(self, tmp_path):
        bench = staffed(Bench(tmp_path / "w"))
        for command in (
            ("run",),
            ("run",),
            ("run", "--replaces", "run-0002", "--reason", "A value was mistyped"),
        ):
            assert as_account(bench, "ann", command[0], bench.study, *command[1:]).code == 0
        as_account(bench, "cem", "void", bench.runs / "TST-1/run-0001", *WHY)
        assert as_account(bench, "ann", "run", bench.study).code == 0
        bench("index")
        for role in ("author", "approver"):
            with trail_book(Workspace(bench.root), 1) as trail:
                trail.append("signed", "TST-1/run-0004", None, {"role": role, "person": "C. Cole"})
            assert bench("index", "--json").document["looked_at"] == 1
        assert [row[4] for row in rows(bench)] == ["void", "superseded", "draft", "approved"]
        entries = read_trail(bench.runs).entries
        register, standings = read_register(entries), run_standings(entries)
        for row in rows(bench):
            subject = f"{row[0]}/run-{row[1]:04d}"
            found = register.executions(subject)
            assert row[4] == standings[subject].state
            assert row[8:10] == [found.number, len(found.same)]
        assert study_standing(entries, "TST-1").state in page(bench, "index.html")

    def test_verdicts_and_criteria_are_in_words(self, tmp_path):
        criterion = "criteria:\n  - {quantity: repeatability-rsd, at-most: 0.001, unit: '%'}\n"
        bench = Bench(tmp_path / "w", STUDY + criterion + "precision: {estimate: true}\n")
        bench("run", bench.study)
        bench("index")
        [row] = rows(bench)
        assert row[6:8] == ["difference shown", "not met (1 of 1)"]
        shown = page(bench, "_register/studies/TST-1/run-0001.html")
        assert "criterion not met" in shown
        assert "at most 0.001 %" in shown

    def test_every_link_of_the_pages_leads_to_a_file(self, bench):
        bench("preregister", bench.study)
        bench("index")
        targets = {
            (bench.runs / path).parent / target
            for path, content in pages(bench.runs).items()
            if path.endswith(".html")
            for target in re.findall(r'(?:href|src)="([^"#]+)"', content.decode())
        }
        assert len(targets) > 10
        assert [target for target in targets if not target.exists()] == []

    def test_a_registered_plan_without_a_run_is_listed_with_its_title(self, tmp_path):
        bench = Bench(tmp_path / "w", data=None)
        assert bench("preregister", bench.study).code == 0
        bench("index")
        assert "Sulfate by three methods" in page(bench, "index.html")
        shown = page(bench, "_register/studies/TST-1/index.html")
        assert "protocol-0001" in shown
        assert "TST-1/protocol-0001/data/protocol.pdf" in shown

    def test_a_workspace_where_nothing_was_run_gets_its_page(self, tmp_path):
        bench = Bench(tmp_path / "w")
        assert bench("index").code == 0
        assert "There is no run yet." in page(bench, "index.html")

    def test_the_course_over_runs_is_drawn_and_told(self, bench):
        bench.data.write_text(DATA.replace("48.2", "48.4"))
        bench.run()
        bench("index")
        shown = page(bench, "_register/studies/TST-1/index.html")
        assert "Mean of gravimetric over 2 runs, run-0001 to run-0002: smallest" in shown
        assert shown.count('<svg class="spark" role="img"') == 4

    def test_void_runs_do_not_enter_the_course(self, bench):
        bench.data.write_text(DATA.replace("48.2", "48.4"))
        second = bench.run()
        bench("void", second, *WHY)
        bench("index")
        assert "<svg" not in page(bench, "_register/studies/TST-1/index.html")

    def test_the_head_of_the_trail_is_printed(self, bench):
        bench("index")
        head = read_trail(bench.runs).last
        assert head.sha256 in page(bench, "index.html")
        assert f'data-seq="{head.seq}"' in page(bench, "index.html")

    def test_the_laboratorys_own_records_are_listed(self, bench):
        bench("void", bench.runs / "TST-1/run-0001", *WHY)
        bench("index")
        assert "void-0001" in page(bench, "index.html")

    def test_labels_stay_text(self, tmp_path):
        label = "<script>alert(1)</script>"
        bench = Bench(
            tmp_path / "w",
            STUDY.replace("gravimetric", f"'{label}'").replace("Sulfate by", "Sulfate <i>by</i> &"),
            DATA.replace("gravimetric", label),
        )
        bench.run()
        bench("index")
        for path, content in pages(bench.runs).items():
            assert b"<script>alert" not in content, path
            assert b"<i>by" not in content, path
        assert "&lt;script&gt;alert(1)" in page(bench, "_register/studies/TST-1/run-0001.html")


class TestAFolioThatIsNotAsSealed:
    def test_is_named_and_nothing_is_quoted_from_it(self, bench):
        findings = bench.runs / "TST-1/run-0001/data/findings.json"
        findings.chmod(0o644)
        findings.write_text(findings.read_text().replace("difference shown", "difference  shown"))
        answer = bench("index")
        assert answer.code == 1
        assert "TST-1/run-0001: the folio is changed" in answer.out
        [row] = rows(bench)
        assert (row[6], row[7], row[10]) == ("not quoted", "not quoted", "changed")
        shown = page(bench, "_register/studies/TST-1/run-0001.html")
        assert "changed: data/findings.json" in shown
        assert "difference" not in shown.split("<main")[1].split("Evidence")[0]

    def test_a_whole_folio_rewritten_consistently_does_not_carry_the_seal(self, bench):
        folio = bench.runs / "TST-1/run-0001"
        info = folio / "bag-info.txt"
        info.chmod(0o644)
        info.write_text(info.read_text().replace("Sulfate", "Sulfite"))
        tags = folio / "tagmanifest-sha256.txt"
        tags.chmod(0o644)
        lines = [line for line in tags.read_text().splitlines() if not line.endswith("bag-info.txt")]
        lines.append(f"{sha256(info.read_bytes()).hexdigest()}  bag-info.txt")
        tags.write_text("\n".join(sorted(lines, key=lambda line: line.split("  ")[1])) + "\n")
        assert bench("index").code == 1
        assert rows(bench)[0][10] == "changed"

    def test_one_that_is_gone_is_missing_until_it_is_back(self, bench, tmp_path):
        folio = bench.runs / "TST-1/run-0001"
        folio.rename(tmp_path / "away")
        assert bench("index").code == 1
        assert rows(bench)[0][10] == "missing"
        (tmp_path / "away").rename(folio)
        assert bench("index").code == 0
        assert rows(bench)[0][10] == "unchanged"


class TestATrailThatIsNotWhole:
    def test_is_told_on_the_first_page(self, bench):
        trail = bench.runs / "audit-trail.jsonl"
        lines = trail.read_bytes().splitlines(keepends=True)
        trail.write_bytes(b"".join([*lines[:2], b"not an entry\n", *lines[2:]]))
        answer = bench("index")
        assert answer.code == 1
        assert "The audit trail is not whole" in page(bench, "index.html")

    def test_a_line_that_is_being_written_is_left_for_later(self, bench, tmp_path):
        trail = bench.runs / "audit-trail.jsonl"
        whole = trail.read_bytes()
        trail.write_bytes(whole[:-20])
        assert bench("index").code == 0
        trail.write_bytes(whole)
        assert bench("index").code == 0
        assert pages(bench.runs) == built_anew(bench, tmp_path / "copy")


class TestVerification:
    def test_knows_the_register(self, bench):
        bench("index")
        assert register_notes(bench) == ("passed", ())

    def test_says_when_the_register_is_older_than_the_trail(self, bench):
        bench("index")
        bench.run()
        outcome, [note] = register_notes(bench)
        assert outcome == "passed"
        assert "`assayfolio index` brings them up to date" in note

    def test_says_when_the_register_was_made_from_another_trail(self, bench, tmp_path):
        other = Bench(tmp_path / "other", STUDY.replace("Sulfate", "Other"))
        other.run()
        other("index")
        shutil.copytree(other.runs / "_register", bench.runs / "_register")
        outcome, [note] = register_notes(bench)
        assert (outcome, "from another audit trail" in note) == ("passed", True)

    def test_mentions_what_else_lies_there(self, bench):
        bench("index")
        (bench.runs / "_register/studies/TST-1/notes.txt").write_text("x")
        (bench.runs / "_register/link").symlink_to(bench.root)
        assert register_notes(bench) == (
            "passed",
            (
                "_register/link is a symbolic link; it is no evidence",
                "_register/studies/TST-1/notes.txt lies there too; it is no evidence",
            ),
        )

    def test_still_finds_a_folder_that_the_trail_does_not_explain(self, bench):
        bench("index")
        (bench.runs / "register").mkdir()
        (bench.runs / "register/index.html").write_text("x")
        assert register_notes(bench)[0] == "failed"


def test_no_page_is_written_through_a_symbolic_link(bench, tmp_path):
    (tmp_path / "elsewhere").mkdir()
    (bench.runs / "_register").symlink_to(tmp_path / "elsewhere")
    answer = bench("index")
    assert answer.code == 3
    assert "is a symbolic link" in answer.err
    assert list((tmp_path / "elsewhere").iterdir()) == []


def test_a_second_process_waits_its_turn(bench):
    bench("index")
    held = take_lock(lock_path(bench.runs / "_register", "pages"), 1)
    try:
        with mock.patch("assayfolio.workflow.index._WAIT_SECONDS", 0.1):
            assert bench("index").code == 4
    finally:
        os.close(held)


def test_a_disk_that_refuses_is_told_in_words(bench):
    with mock.patch("os.replace", side_effect=OSError(28, "No space left on device")):
        answer = bench("index")
    assert answer.code == 3
    assert "the disk is full" in answer.err
