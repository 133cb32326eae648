"""Three people sign a report: what is checked before, what is shown, and what lies there afterwards."""

import json
import subprocess
from datetime import timedelta
from pathlib import Path
from unittest import mock

import pytest

from assayfolio.canonical import sha256_hex
from assayfolio.errors import MachineError
from assayfolio.evidence.states import run_standings
from assayfolio.evidence.trail import read_trail
from assayfolio.workflow import signer_keys, signing
from support import schemas
from support.signers import (
    PASSPHRASES,
    SIGNED_OFF,
    SIGNERS,
    bytes_of,
    checks,
    copied,
    laboratory_that_signs,
    review,
    sign,
    sign_by_all,
    type_as,
)
from support.staff import as_account
from support.workspaces import Bench

RUN = "TST-1/run-0001"
REASON = "Level B has two values from the day before the balance was serviced"


@pytest.fixture(scope="module")
def drafted(tmp_path_factory: pytest.TempPathFactory) -> Bench:
    """A laboratory whose people can sign, with one run that nobody has signed."""
    bench = laboratory_that_signs(tmp_path_factory.mktemp("drafted") / "w")
    assert as_account(bench, "ann", "run", bench.study).code == 0
    return bench


@pytest.fixture(scope="module")
def approved(drafted: Bench, tmp_path_factory: pytest.TempPathFactory) -> Bench:
    """The same with the run reviewed and signed by all three."""
    bench = copied(drafted, tmp_path_factory.mktemp("approved") / "w")
    sign_by_all(bench, RUN)
    return bench


@pytest.fixture
def bench(drafted: Bench, tmp_path: Path) -> Bench:
    return copied(drafted, tmp_path / "w")


def state(bench: Bench) -> str:
    return run_standings(read_trail(bench.runs).entries)[RUN].state


def sign_off(bench: Bench) -> Path:
    return bench.runs / RUN / "sign-off"


class TestAnApprovedReport:
    @pytest.mark.requirement("SIGN-1")
    def test_is_approved_by_trail_and_by_verification(self, approved: Bench) -> None:
        assert state(approved) == "approved"
        [found] = checks(approved, "5.4")
        assert (found["outcome"], found["notes"]) == ("passed", ["approved"])
        assert approved("verify").code == 0

    def test_keeps_what_was_sealed_byte_for_byte(self, approved: Bench, drafted: Bench) -> None:
        before, after = bytes_of(drafted), bytes_of(approved)
        assert {name: after.get(name) for name in before} == before
        added = {name for name in set(after) - set(before) if "/sign-off/" not in name}
        assert added == set()

    @pytest.mark.requirement("SIGN-3")
    def test_begins_with_the_sealed_report(self, approved: Bench) -> None:
        sealed = (approved.runs / RUN / "data/report.pdf").read_bytes()
        signed = (sign_off(approved) / "report.pdf").read_bytes()
        assert signed.startswith(sealed)
        assert len(signed) > len(sealed)

    def test_begins_with_the_report_as_it_is_rendered_again(self, approved: Bench) -> None:
        answer = approved("rerun", approved.runs / RUN, "--json")
        assert answer.code == 0, answer.err
        parts = {part["part"]: part["outcome"] for part in answer.document["parts"]}
        assert parts["report bytes"] == "identical", parts

    @pytest.mark.requirement("SIGN-2", "SIGN-4")
    def test_has_a_record_certificates_and_list_for_each_signature(self, approved: Bench) -> None:
        stems = ["1-author", "2-reviewer", "3-approver"]
        names = {f"{stem}{end}" for stem in stems for end in (".json", ".pem", ".crl")}
        assert {path.name for path in sign_off(approved).iterdir()} == {"report.pdf", *names}
        entries = [entry for entry in approved.entries() if entry["action"] == "signed"]
        for entry, stem in zip(entries, stems, strict=True):
            record = json.loads((sign_off(approved) / f"{stem}.json").read_bytes())
            for key in (
                "number",
                "field",
                "role",
                "person",
                "meaning",
                "time",
                "seal",
                "certificate",
                "level",
            ):
                assert record[key] == entry["details"][key], key

    @pytest.mark.requirement("SIGN-15")
    def test_tells_in_its_entries_what_was_shown_to_whom(self, approved: Bench) -> None:
        lines = (approved.runs / "audit-trail.jsonl").read_bytes().splitlines()
        for entry in approved.entries():
            if entry["action"] == "signed":
                shown = entry["details"]["shown"]
                assert sha256_hex(lines[shown["trail_seq"] - 1]) == shown["trail_sha256"]
                assert shown["lines"] > 5

    def test_has_entries_that_are_as_described(self, approved: Bench) -> None:
        schema = schemas.load(schemas.TRAIL_ENTRY)
        for entry in approved.entries():
            assert schemas.faults(schema, entry) == [], entry["action"]

    @pytest.mark.needs("pdfsig")
    @pytest.mark.requirement("SIGN-4")
    def test_has_three_valid_signatures_for_another_program(self, approved: Bench) -> None:
        told = subprocess.run(
            ["pdfsig", "-nocert", sign_off(approved) / "report.pdf"],
            capture_output=True,
            text=True,
            check=True,
        ).stdout
        assert told.count("Signature is Valid.") == 3
        assert told.count("Total document signed") == 1
        assert told.rindex("Total document signed") > told.rindex("Signature #3")

    @pytest.mark.needs("openssl")
    @pytest.mark.requirement("SIGN-4")
    def test_carries_certificates_that_another_program_checks(self, approved: Bench, tmp_path: Path) -> None:
        folder = sign_off(approved)
        whole = (folder / "2-reviewer.pem").read_text()
        end = "-----END CERTIFICATE-----\n"
        own, above = [f"{part}{end}" for part in whole.split(end) if part]
        (tmp_path / "own.pem").write_text(own)
        (tmp_path / "above.pem").write_text(above)
        arguments = ["-crl_check", "-CRLfile", folder / "2-reviewer.crl", "-CAfile", tmp_path / "above.pem"]
        done = subprocess.run(
            ["openssl", "verify", *arguments, tmp_path / "own.pem"],
            capture_output=True,
            text=True,
            check=False,
        )
        assert done.returncode == 0, done.stderr

    def test_needs_no_further_signature(self, approved: Bench, tmp_path: Path) -> None:
        bench = copied(approved, tmp_path / "w")
        answer = sign(bench, "cem", RUN)
        assert answer.code == 2
        assert f"{RUN} is approved" in answer.err


class TestWhatIsShown:
    @pytest.mark.requirement("SIGN-15")
    def test_are_verdicts_exclusions_deviations_exceptions_and_digests(self, bench: Bench) -> None:
        review(bench, RUN)
        _, typist = type_as(bench, "ann", "sign", RUN, "--as", "author", secrets=[PASSPHRASES["ann"]])
        shown = "\n".join(typist.told)
        for words in (
            "Sulfate by three methods",
            "difference shown",
            "exclusions",
            "deviations",
            "exceptions",
        ):
            assert words in shown
        assert sha256_hex((bench.runs / RUN / "data/report.pdf").read_bytes()) in shown
        assert sha256_hex((bench.runs / RUN / "tagmanifest-sha256.txt").read_bytes()) in shown

    @pytest.mark.requirement("SIGN-1")
    def test_is_the_meaning_from_the_plan_and_no_other(self, bench: Bench) -> None:
        _, typist = type_as(bench, "ann", "sign", RUN, "--as", "author", secrets=[PASSPHRASES["ann"]])
        assert typist.offered == ["I performed this analysis as planned"]

    @pytest.mark.requirement("SIGN-1")
    def test_nothing_is_signed_where_no_meaning_is_chosen(self, bench: Bench) -> None:
        before = bytes_of(bench)
        answer, typist = type_as(bench, "ann", "sign", RUN, "--as", "author", meaning=None)
        assert answer.code == 2
        assert typist.asked == []
        assert bytes_of(bench) == before

    def test_is_who_refused_and_why(self, bench: Bench) -> None:
        answer = as_account(bench, "ben", "sign", RUN, "--as", "reviewer", "--refuse", "--reason", REASON)
        assert answer.code == 0, answer.err
        entry = bench.entries()[-1]
        assert (entry["action"], entry["reason"]) == ("sign-refused", REASON)
        assert state(bench) == "draft"
        _, typist = type_as(bench, "ann", "sign", RUN, "--as", "author", secrets=[PASSPHRASES["ann"]])
        assert any("refused" in line and REASON in line for line in typist.told)


ATTEMPTS = {
    "one who has not the role": ("ann", "approver", [], "A. Analyst has not the role approver"),
    "the administrator": ("dot", "author", [], "D. Dorn has not the role that `sign` needs"),
    "somebody unknown": ("eve", "author", [], "is not in the laboratory's list of people"),
    "the reviewer before the author": ("ben", "reviewer", [], "is not signed yet as author"),
    "the approver before the reviewer": ("cem", "approver", ["ann"], "is not signed yet as reviewer"),
    "the approver before the review of the trail": (
        "cem",
        "approver",
        ["ann", "ben"],
        "was not reviewed yet",
    ),
    "one who has signed": ("ann", "author", ["ann"], "is signed as author already"),
}


@pytest.mark.requirement("SIGN-9", "SIGN-13", "ROLE-2")
@pytest.mark.parametrize("attempt", ATTEMPTS.values(), ids=ATTEMPTS.keys())
def test_an_attempt_out_of_order_is_refused_entered_and_changes_no_byte(bench: Bench, attempt) -> None:
    account, role, signed_before, words = attempt
    for one in signed_before:
        assert sign(bench, one, RUN).code == 0
    before, count = bytes_of(bench), len(bench.entries())
    answer = sign(bench, account, RUN, role=role, secrets=[])
    assert answer.code == 2
    assert words in answer.err
    assert bytes_of(bench) == before
    [entry] = bench.entries()[count:]
    assert (entry["action"], entry["actor"]) == ("attempt-refused", account)
    assert words in entry["reason"]


@pytest.mark.requirement("SIGN-9")
def test_nobody_signs_without_a_terminal(bench: Bench) -> None:
    before = bytes_of(bench)
    answer = as_account(bench, "ann", "sign", RUN, "--as", "author")
    assert answer.code == 2
    assert "a person at a terminal" in answer.err
    assert bytes_of(bench) == before


def test_who_both_reviews_and_ran_is_refused_by_the_rules(tmp_path: Path) -> None:
    bench = laboratory_that_signs(tmp_path / "w")
    people = bench.root / "configs/people.yaml"
    people.write_text(people.read_text().replace("[author, runner]", "[author, runner, reviewer]"))
    why = ("--reason", "A. Analyst reviews other people's work")
    assert as_account(bench, "dot", "settings", *why).code == 0
    assert as_account(bench, "cem", "settings", "--confirm").code == 0
    assert as_account(bench, "ann", "run", bench.study).code == 0
    assert sign(bench, "ann", RUN).code == 0
    answer = sign(bench, "ann", RUN, role="reviewer", secrets=[])
    assert answer.code == 2
    assert "the reviewer has to be another person" in answer.err


@pytest.mark.parametrize(
    "path", ["data/report.pdf", "data/findings.json", "data/run.json", "tagmanifest-sha256.txt"]
)
def test_a_folio_that_does_not_verify_is_not_signed(bench: Bench, path: str) -> None:
    file = bench.runs / RUN / path
    file.chmod(0o644)
    file.write_bytes(file.read_bytes()[:-1] + b"?")
    before = bytes_of(bench)
    answer = sign(bench, "ann", RUN, secrets=[])
    assert answer.code == 2
    assert "does not verify" in answer.err
    assert bench.entries()[-1]["action"] == "attempt-refused"
    assert bytes_of(bench) == before


def test_a_report_whose_signatures_do_not_verify_is_not_signed_further(bench: Bench) -> None:
    assert sign(bench, "ann", RUN).code == 0
    report = sign_off(bench) / "report.pdf"
    report.chmod(0o644)
    report.write_bytes(report.read_bytes() + b"\n")
    answer = sign(bench, "ben", RUN, secrets=[])
    assert answer.code == 2
    assert "5.1" in answer.err


class TestAWrongPassphrase:
    @pytest.mark.requirement("SIGN-9", "SIGN-13")
    def test_is_entered_as_urgent_and_the_third_in_a_row_locks(self, bench: Bench) -> None:
        before = bytes_of(bench)
        answer, _ = type_as(bench, "ann", "sign", RUN, "--as", "author", secrets=["wrong"] * 3)
        assert answer.code == 2
        assert "wrong 3 times in a row" in answer.err
        entered = bench.entries()[-4:]
        assert [entry["action"] for entry in entered] == [*["passphrase-wrong"] * 3, "signing-locked"]
        assert [entry["details"].get("in_row") for entry in entered[:3]] == [1, 2, 3]
        assert all(entry["details"]["urgent"] for entry in entered)
        assert bytes_of(bench) == before
        told = as_account(bench, "dot", "trail", "--exceptions").out
        assert told.startswith("Wrong passphrases: 4")

    @pytest.mark.requirement("SIGN-13")
    def test_locks_the_account_for_the_stated_time_and_no_longer(self, bench: Bench) -> None:
        type_as(bench, "ann", "sign", RUN, "--as", "author", secrets=["wrong"] * 3)
        answer = sign(bench, "ann", RUN, secrets=[])
        assert answer.code == 2
        assert "3 wrong passphrases in a row were given under ann" in answer.err
        assert "locked until" in as_account(bench, "dot", "signer", "list").out
        later = signer_keys.moment_now() + timedelta(minutes=15, seconds=1)
        with mock.patch.object(signer_keys, "moment_now", return_value=later):
            assert sign(bench, "ann", RUN).code == 0

    def test_is_forgotten_once_the_right_one_was_given(self, bench: Bench) -> None:
        right = PASSPHRASES["ann"]
        answer, _ = type_as(bench, "ann", "signer", "test", secrets=["wrong", "wrong", right])
        assert answer.code == 0, answer.err
        answer, _ = type_as(bench, "ann", "sign", RUN, "--as", "author", secrets=["wrong", "wrong", right])
        assert answer.code == 0, answer.err

    def test_of_one_person_leaves_the_others_alone(self, bench: Bench) -> None:
        type_as(bench, "ann", "signer", "test", secrets=["wrong"] * 3)
        answer, _ = type_as(bench, "ben", "signer", "test", secrets=[PASSPHRASES["ben"]])
        assert answer.code == 0, answer.err

    @pytest.mark.requirement("SIGN-10")
    def test_is_that_of_another_person(self, bench: Bench) -> None:
        answer, _ = type_as(
            bench, "ann", "sign", RUN, "--as", "author", secrets=[PASSPHRASES["cem"], "wrong", "wrong"]
        )
        assert answer.code == 2


@pytest.mark.requirement("SIGN-14")
def test_a_key_is_tested_with_a_dated_entry(bench: Bench) -> None:
    answer, _ = type_as(bench, "ben", "signer", "test", secrets=[PASSPHRASES["ben"]])
    assert answer.code == 0, answer.err
    entry = bench.entries()[-1]
    assert (entry["action"], entry["details"]["outcome"]) == ("signer-tested", "passed")
    assert entry["time"][:10] in bench("signer", "list").out


class TestManyAtOnce:
    def test_are_listed_and_each_is_shown_and_signed_by_itself(self, bench: Bench) -> None:
        assert as_account(bench, "ann", "run", bench.study).code == 0
        runs = [RUN, "TST-1/run-0002"]
        secrets = [PASSPHRASES["ann"]] * 2
        answer, typist = type_as(bench, "ann", "sign", *runs, "--as", "author", secrets=secrets)
        assert answer.code == 0, answer.err
        assert len(typist.asked) == 2
        assert "1 of 2" in answer.err
        signed = [entry["subject"] for entry in bench.entries() if entry["action"] == "signed"]
        assert signed == runs

    def test_one_that_is_refused_stops_no_other(self, bench: Bench) -> None:
        assert as_account(bench, "ann", "run", bench.study).code == 0
        assert sign(bench, "ann", RUN).code == 0
        answer = sign(bench, "ann", RUN, "TST-1/run-0002")
        assert answer.code == 2
        assert "is signed as author already" in answer.err
        assert bench.entries()[-1]["subject"] == "TST-1/run-0002"


class TestASigningThatIsStopped:
    def test_before_its_entry_never_was(self, bench: Bench) -> None:
        before = bytes_of(bench)
        with mock.patch.object(signing, "entry_details", side_effect=MachineError("the disk is full")):
            answer = sign(bench, "ann", RUN)
        assert answer.code == 3
        assert bytes_of(bench) == before
        assert state(bench) == "draft"
        assert sign(bench, "ann", RUN).code == 0

    def test_by_a_kill_before_its_entry_is_thrown_away_by_the_next(self, bench: Bench) -> None:
        with (
            mock.patch.object(signing, "entry_details", side_effect=KeyboardInterrupt),
            mock.patch.object(signing, "discard_staged"),
        ):
            assert sign(bench, "ann", RUN).code == 3
        assert (sign_off(bench) / ".new").is_dir()
        assert bench("verify").code == 0
        assert sign(bench, "ann", RUN).code == 0
        assert bench("verify").code == 0

    def test_after_its_entry_is_completed_by_the_next_command(self, bench: Bench) -> None:
        with mock.patch.object(signing, "publish_signature", side_effect=MachineError("the disk is full")):
            answer = sign(bench, "ann", RUN)
        assert answer.code == 3
        assert "the next command that writes puts it there" in answer.err
        [found] = checks(bench, "5.1")
        assert found["outcome"] == "failed"
        assert sign(bench, "ben", RUN).code == 0
        assert [entry["action"] for entry in bench.entries()[-2:]] == ["rename-completed", "signed"]
        assert bench("verify").code == 0


@pytest.fixture(scope="module")
def lab(tmp_path_factory: pytest.TempPathFactory) -> Bench:
    bench = laboratory_that_signs(tmp_path_factory.mktemp("protocol") / "w", "require: [approved-protocol]\n")
    assert as_account(bench, "ann", "preregister", bench.study).code == 0
    return bench


class TestAProtocol:
    def test_is_signed_as_a_report_is_and_lets_the_run_begin(self, lab: Bench) -> None:
        protocol = "TST-1/protocol-0001"
        assert as_account(lab, "ann", "run", lab.study).code == 2
        for account in SIGNERS:
            answer = sign(lab, account, lab.runs / protocol)
            assert answer.code == 0, answer.err
        [found] = checks(lab, "5.4")
        assert (found["subject"], found["notes"]) == (protocol, ["approved"])
        assert as_account(lab, "ann", "run", lab.study).code == 0
        assert lab("verify").code == 0

    def test_is_not_signed_once_it_is_amended(self, lab: Bench, tmp_path: Path) -> None:
        bench = copied(lab, tmp_path / "w")
        bench.study.write_text(SIGNED_OFF.replace("alpha: 0.05", "alpha: 0.01"))
        why = ("--reason", "the client asked for the stricter level, letter 14")
        assert as_account(bench, "ann", "amend", bench.study, *why).code == 0
        answer = sign(bench, "ann", "TST-1/protocol-0001", secrets=[])
        assert answer.code == 2
        assert sign(bench, "ann", "TST-1/protocol-0002").code == 0


def test_a_void_run_is_not_signed(bench: Bench) -> None:
    why = ("--reason", "balance out of tolerance on that day", "--investigation", "INV-14")
    assert as_account(bench, "cem", "void", RUN, *why).code == 0
    answer = sign(bench, "ann", RUN, secrets=[])
    assert answer.code == 2
    assert "is void" in answer.err
