"""Who signs with which certificate: two persons make it so, one alone can do nothing."""

from datetime import timedelta
from pathlib import Path
from unittest import mock

import pytest
from cryptography.hazmat.primitives.serialization import Encoding, NoEncryption, PrivateFormat

from assayfolio.evidence.keyring import pem_text, read_keyring
from assayfolio.evidence.signers import signers_of
from assayfolio.evidence.signing.authority import certificate_request, certified_identity, certify
from assayfolio.evidence.signing.identities import certificate_facts, new_key, open_identity, sealed_identity
from assayfolio.evidence.trail import read_trail
from assayfolio.workflow import signer_keys, signing_case
from evidence.signing.office import certified, office
from support import schemas
from support.signers import (
    AUTHORITY,
    PASSPHRASES,
    SIGNED_OFF,
    bytes_of,
    checks,
    confirm,
    copied,
    enrol,
    laboratory_that_signs,
    sign,
    type_as,
)
from support.staff import as_account, staffed
from support.workspaces import Bench

RUN = "TST-1/run-0001"
LOST = ("--cause", "key-lost", "--reason", "The notebook computer was stolen on 4 March")
FOLDER = "configs/signers"


@pytest.fixture(scope="module")
def signing_lab(tmp_path_factory: pytest.TempPathFactory) -> Bench:
    """A laboratory whose people can sign, with a run that its author has signed."""
    bench = laboratory_that_signs(tmp_path_factory.mktemp("signing") / "w")
    assert as_account(bench, "ann", "run", bench.study).code == 0
    assert sign(bench, "ann", RUN).code == 0
    return bench


@pytest.fixture
def bench(signing_lab: Bench, tmp_path: Path) -> Bench:
    return copied(signing_lab, tmp_path / "w")


@pytest.fixture
def empty(tmp_path: Path) -> Bench:
    """A laboratory in which nobody can sign."""
    return staffed(Bench(tmp_path / "w", SIGNED_OFF))


def signers(bench: Bench):
    return signers_of(read_trail(bench.runs).entries)


def refused(bench: Bench, answer, words: str) -> None:
    """It was refused in these words, and the attempt is the newest entry."""
    assert answer.code == 2
    assert words in answer.err
    assert bench.entries()[-1]["action"] == "attempt-refused"


class TestEnrolment:
    @pytest.mark.requirement("SIGN-10")
    def test_is_proposed_by_the_person_and_made_by_another(self, empty: Bench) -> None:
        own = PASSPHRASES["ann"]
        answer, typist = type_as(empty, "ann", "signer", "enrol", secrets=[own, own])
        assert answer.code == 0, answer.err
        assert typist.asked == ["New passphrase for the key of A. Analyst", "The same again"]
        assert signers(empty).of("ann") is None
        confirm(empty, "ann")
        enrolled = signers(empty).of("ann")
        assert enrolled is not None
        assert enrolled.person == "A. Analyst"
        actions = [(entry["action"], entry["actor"]) for entry in empty.entries()][-3:]
        assert actions == [
            ("signer-proposed", "ann"),
            ("authority-founded", "dot"),
            ("signer-enrolled", "dot"),
        ]

    def test_records_how_the_identity_was_checked(self, bench: Bench) -> None:
        [entry] = [
            e
            for e in bench.entries()
            if e["action"] == "signer-enrolled" and e["details"]["account"] == "ann"
        ]
        assert entry["details"]["identity_check"] == "HR-7"

    def test_has_entries_that_are_as_described(self, bench: Bench) -> None:
        schema = schemas.load(schemas.TRAIL_ENTRY)
        for entry in bench.entries():
            assert schemas.faults(schema, entry) == [], entry["action"]

    @pytest.mark.requirement("SIGN-10")
    def test_is_not_confirmed_by_the_one_who_proposed_it(self, tmp_path: Path) -> None:
        bench = Bench(tmp_path / "w", SIGNED_OFF)
        own = PASSPHRASES["ann"]
        person = ("--person", "A. Analyst")
        assert type_as(bench, "ann", "signer", "enrol", *person, secrets=[own, own])[0].code == 0
        answer, _ = type_as(bench, "ann", "signer", "enrol", "--confirm", "ann")
        refused(bench, answer, "it needs a second person")
        confirm(bench, "ann", by="zoe")
        assert signers(bench).of("ann") is not None

    @pytest.mark.requirement("SIGN-10")
    @pytest.mark.parametrize("account", ["ben", "eve"])
    def test_is_not_confirmed_by_one_without_the_role(self, empty: Bench, account: str) -> None:
        own = PASSPHRASES["ann"]
        assert type_as(empty, "ann", "signer", "enrol", secrets=[own, own])[0].code == 0
        answer, _ = type_as(empty, account, "signer", "enrol", "--confirm", "ann")
        refused(empty, answer, "")
        assert signers(empty).of("ann") is None

    @pytest.mark.requirement("SIGN-10")
    def test_is_not_for_the_administrator(self, empty: Bench) -> None:
        answer, _ = type_as(empty, "dot", "signer", "enrol")
        refused(empty, answer, "D. Dorn has not the role")

    def test_is_stopped_by_weak_passphrases(self, empty: Bench) -> None:
        before = bytes_of(empty)
        weak = ["password", "aaaaaaaaaaaa", "analyst analyst"]
        answer, typist = type_as(empty, "ann", "signer", "enrol", secrets=weak)
        assert answer.code == 2
        assert len([line for line in typist.told if "will not do" in line]) == 3
        assert bytes_of(empty) == before

    @pytest.mark.requirement("SIGN-5")
    def test_gives_a_person_one_certificate(self, bench: Bench) -> None:
        answer, _ = type_as(bench, "ann", "signer", "enrol")
        assert answer.code == 2
        assert "has a certificate until" in answer.err

    @pytest.mark.requirement("SIGN-5")
    def test_gives_a_name_to_one_account(self, tmp_path: Path) -> None:
        bench = Bench(tmp_path / "w", SIGNED_OFF)
        own = PASSPHRASES["ann"]
        person = ("--person", "A. Analyst")
        assert type_as(bench, "ann", "signer", "enrol", *person, secrets=[own, own])[0].code == 0
        confirm(bench, "ann", by="zoe")
        answer, _ = type_as(bench, "ben", "signer", "enrol", *person)
        assert answer.code == 2
        assert "already has a certificate" in answer.err

    def test_needs_a_name_where_no_list_has_it(self, tmp_path: Path) -> None:
        bench = Bench(tmp_path / "w", SIGNED_OFF)
        answer, _ = type_as(bench, "ann", "signer", "enrol")
        assert answer.code == 2
        assert "give it with --person" in answer.err

    def test_of_a_request_that_was_replaced_is_refused(self, empty: Bench) -> None:
        own = PASSPHRASES["ann"]
        assert type_as(empty, "ann", "signer", "enrol", secrets=[own, own])[0].code == 0
        [request] = (empty.root / FOLDER).glob("*.csr")
        request.write_bytes(certificate_request("A. Analyst", "ann", new_key()))
        answer, _ = type_as(empty, "dot", "signer", "enrol", "--confirm", "ann", secrets=[AUTHORITY] * 2)
        assert answer.code == 2
        assert "is not the request that was proposed" in answer.err

    def test_with_a_wrong_passphrase_of_the_authority_is_counted(self, bench: Bench) -> None:
        assert as_account(bench, "ann", "signer", "revoke", "ann", *LOST).code == 0
        answer, _ = type_as(bench, "dot", "signer", "revoke", "ann", "--confirm", secrets=["wrong"] * 3)
        assert answer.code == 2
        assert [e["action"] for e in bench.entries()[-2:]] == ["passphrase-wrong", "signing-locked"]


class TestALaboratoryOfOnePerson:
    def test_enrols_by_one_person_and_says_so(self, tmp_path: Path) -> None:
        bench = Bench(tmp_path / "w", SIGNED_OFF)
        (bench.root / "configs/lab.yaml").write_text(
            "laboratory: Invented laboratory\none-person: true\nreview-before-approval: false\n"
        )
        own = PASSPHRASES["ann"]
        secrets = [own, own, AUTHORITY, AUTHORITY]
        answer, _ = type_as(bench, "ann", "signer", "enrol", "--person", "A. Analyst", secrets=secrets)
        assert answer.code == 0, answer.err
        assert as_account(bench, "ann", "run", bench.study).code == 0
        for role in ("author", "reviewer", "approver"):
            answer = sign(bench, "ann", RUN, role=role)
            assert answer.code == 0, answer.err
        assert bench("verify").code == 0
        assert checks(bench, "5.4")[0]["notes"] == ["approved"]


class TestTheAdministrator:
    """He may write every file and has the authority's passphrase; he still cannot sign for another."""

    @pytest.mark.requirement("SIGN-10")
    def test_cannot_put_a_key_of_his_own_in_the_place_of_another_s(self, bench: Bench) -> None:
        ben = signers(bench).of("ben")
        place = bench.root / FOLDER / ben.key.file
        place.write_bytes(
            sealed_identity(certified(office().authority, "B. Berg", "ben"), "known to dot alone")
        )
        answer = sign(bench, "ben", RUN, secrets=["known to dot alone"])
        assert answer.code == 2
        assert "the file was replaced" in answer.err

    @pytest.mark.requirement("SIGN-10", "SIGN-12")
    def test_cannot_mint_a_certificate_that_anybody_believes(self, bench: Bench) -> None:
        [sealed] = (bench.root / FOLDER).glob("authority-*.p12")
        authority = open_identity(sealed.read_bytes(), AUTHORITY)
        key = new_key()
        request = certificate_request("B. Berg", "ben", key)
        start = certificate_facts(authority.certificate).not_before
        certificate = certify(authority, request, ("B. Berg", "ben"), (start, 700))
        forged = certified_identity(authority, certificate, key)
        with mock.patch("assayfolio.workflow.signing.person_identity", return_value=forged):
            assert sign(bench, "ben", RUN).code == 0
        [found] = [each for each in checks(bench, "5.3") if each["title"].startswith("signature 2")]
        assert found["outcome"] == "failed"
        assert any("was never enrolled" in note for note in found["notes"])
        assert checks(bench, "5.4")[0]["outcome"] == "failed"


class TestWithdrawal:
    @pytest.mark.requirement("SIGN-12")
    def test_stops_signing_at_once_and_lists_the_certificate_when_confirmed(self, bench: Bench) -> None:
        assert as_account(bench, "ben", "signer", "revoke", "ben", *LOST).code == 0
        refused(bench, sign(bench, "ben", RUN, secrets=[]), "no certificate is in force for ben")
        confirm(bench, "ben", deed="revoke")
        assert "withdrawn by entry" in bench("signer", "list").out
        assert len(signers(bench).lists) == 2
        assert bench("verify").code == 0

    @pytest.mark.requirement("SIGN-12")
    def test_of_another_s_certificate_needs_a_role_and_two_persons(self, bench: Bench) -> None:
        refused(bench, as_account(bench, "ben", "signer", "revoke", "ann", *LOST), "has not the role")
        assert as_account(bench, "cem", "signer", "revoke", "ann", *LOST).code == 0
        answer, _ = type_as(bench, "cem", "signer", "revoke", "ann", "--confirm")
        refused(bench, answer, "it needs a second person")
        confirm(bench, "ann", by="dot", deed="revoke")

    @pytest.mark.requirement("SIGN-12")
    def test_leaves_earlier_signatures_unproven_by_the_signers_clock(self, bench: Bench) -> None:
        assert as_account(bench, "ann", "signer", "revoke", "ann", *LOST).code == 0
        confirm(bench, "ann", deed="revoke")
        answer = bench("verify")
        assert answer.code == 5
        assert "by the signer's clock before the revocation" in answer.out

    @pytest.mark.requirement("SIGN-12")
    def test_leaves_earlier_signatures_valid_where_a_witness_proves_the_order(self, tmp_path: Path) -> None:
        witness = tmp_path / "witness"
        witness.mkdir()
        bench = laboratory_that_signs(tmp_path / "w", f"witnesses: [{{folder: {witness}}}]\n")
        assert as_account(bench, "ann", "run", bench.study).code == 0
        assert sign(bench, "ann", RUN).code == 0
        assert as_account(bench, "ann", "signer", "revoke", "ann", *LOST).code == 0
        confirm(bench, "ann", deed="revoke")
        answer = bench("verify")
        assert "signed before the revocation" in answer.out
        assert answer.code == 0, answer.out

    @pytest.mark.requirement("SIGN-12")
    def test_a_signature_by_a_withdrawn_certificate_is_found(self, bench: Bench) -> None:
        assert as_account(bench, "ben", "signer", "revoke", "ben", *LOST).code == 0
        confirm(bench, "ben", deed="revoke")
        enrolled = signers(bench).last_of("ben")
        with (
            mock.patch.object(signing_case, "_why_no_key", return_value=None),
            mock.patch("assayfolio.evidence.signers.Signers.of", return_value=enrolled),
        ):
            assert sign(bench, "ben", RUN).code == 0
        assert any("was not in force for ben then" in note for note in checks(bench, "5.1")[0]["notes"])

    def test_lets_the_person_be_enrolled_again(self, bench: Bench) -> None:
        assert as_account(bench, "ben", "signer", "revoke", "ben", *LOST).code == 0
        answer, _ = type_as(bench, "ben", "signer", "enrol")
        assert answer.code == 2
        confirm(bench, "ben", deed="revoke")
        enrol(bench, "ben")
        assert sign(bench, "ben", RUN).code == 0
        assert bench("verify").code == 0


class TestRenewal:
    @pytest.mark.requirement("SIGN-11")
    def test_gives_a_new_key_and_leaves_what_was_signed_valid(self, bench: Bench) -> None:
        old = signers(bench).of("ann")
        later = signer_keys.moment_now() + timedelta(days=700)
        with mock.patch("assayfolio.workflow.signer_confirmation.moment_now", return_value=later):
            enrol(bench, "ann", deed="renew")
        new = signers(bench).of("ann")
        assert new.certificate != old.certificate
        assert new.not_after > old.not_after
        assert bench("verify").code == 0

    @pytest.mark.requirement("SIGN-11")
    def test_is_needed_once_the_certificate_has_ended(self, bench: Bench) -> None:
        later = signing_case.time_of_signing() + timedelta(days=731)
        with mock.patch.object(signing_case, "time_of_signing", return_value=later):
            answer = sign(bench, "ben", RUN, secrets=[])
        refused(bench, answer, "renew it")

    @pytest.mark.requirement("SIGN-11")
    def test_what_an_ended_certificate_signed_in_its_time_stays_valid(self, bench: Bench) -> None:
        later = signer_keys.moment_now() + timedelta(days=731)
        with mock.patch("assayfolio.evidence.sign_off_checks._now", return_value=later):
            assert bench("verify").code == 0


class TestAKeyFromElsewhere:
    def test_in_a_file_is_taken_with_its_certificate_and_signs(self, empty: Bench, tmp_path: Path) -> None:
        identity = certified(office().authority, "A. Analyst", "ann")
        plain = identity.key.private_bytes(Encoding.PEM, PrivateFormat.PKCS8, NoEncryption())
        file, anchor = tmp_path / "ann.pem", tmp_path / "anchor.pem"
        file.write_bytes(plain + pem_text("certificate", identity.certificate))
        anchor.write_bytes(pem_text("certificate", office().authority.certificate))
        own = PASSPHRASES["ann"]
        arguments = ("--key", file, "--anchor", anchor)
        answer, _ = type_as(empty, "ann", "signer", "enrol", *arguments, secrets=[own, own])
        assert answer.code == 0, answer.err
        answer, _ = type_as(empty, "dot", "signer", "enrol", "--confirm", "ann")
        assert answer.code == 0, answer.err
        assert as_account(empty, "ann", "run", empty.study).code == 0
        answer = sign(empty, "ann", RUN)
        assert answer.code == 0, answer.err
        verified = empty("verify")
        assert verified.code == 5
        assert "there is no revocation list of" in verified.out

    @pytest.mark.requirement("SIGN-5")
    def test_of_another_person_is_refused(self, empty: Bench, tmp_path: Path) -> None:
        identity = certified(office().authority, "B. Berg", "ben")
        file = tmp_path / "ben.p12"
        file.write_bytes(sealed_identity(identity, PASSPHRASES["ben"]))
        secrets = [PASSPHRASES["ben"], PASSPHRASES["ann"], PASSPHRASES["ann"]]
        answer, _ = type_as(empty, "ann", "signer", "enrol", "--key", file, secrets=secrets)
        assert answer.code == 2
        assert "it names 'B. Berg', not 'A. Analyst'" in answer.err

    def test_without_its_issuer_is_refused(self, empty: Bench, tmp_path: Path) -> None:
        identity = certified(office().authority, "A. Analyst", "ann")
        alone = type(identity)(identity.certificate, (), identity.key)
        file = tmp_path / "ann.p12"
        file.write_bytes(sealed_identity(alone, PASSPHRASES["ann"]))
        answer, _ = type_as(empty, "ann", "signer", "enrol", "--key", file, secrets=[PASSPHRASES["ann"]])
        assert answer.code == 2
        assert "--anchor" in answer.err


def test_the_signers_folder_holds_what_the_trail_pins(bench: Bench) -> None:
    known, keyring = signers(bench), read_keyring(bench.root)
    assert known.authority in keyring.certificates
    for each in known.enrolled:
        assert certificate_facts(keyring.certificates[each.certificate]).person == each.person
    assert [(bench.root / FOLDER / each.key.file).stat().st_mode & 0o777 for each in known.enrolled] == [
        0o600
    ] * 3


MISUSES = {
    "a certificate is gone": (
        lambda folder: next(folder.glob("ann-*.pem")).unlink(),
        "missing: the certificate",
    ),
    "the revocation list is gone": (
        lambda folder: (folder / "revocations-0001.crl").unlink(),
        "missing: revocation list 1",
    ),
    "the revocation list is another": (
        lambda folder: (folder / "revocations-0001.crl").write_bytes(
            pem_text("revocation list", office().list_of(1))
        ),
        "missing: revocation list 1",
    ),
}


@pytest.mark.parametrize("misuse", MISUSES.values(), ids=MISUSES.keys())
def test_a_change_among_the_signers_files_is_found(bench: Bench, misuse) -> None:
    change, words = misuse
    change(bench.root / FOLDER)
    [found] = checks(bench, "2.10")
    assert found["outcome"] == "failed"
    assert any(words in note for note in found["notes"])
