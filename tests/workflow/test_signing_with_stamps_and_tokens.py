"""Signing with a time-stamp authority, without one that can be reached, and with a key on a token."""

import os
import subprocess
from pathlib import Path

import pytest
from cryptography.hazmat.primitives.serialization import Encoding, NoEncryption, PrivateFormat

from assayfolio.evidence.keyring import pem_text
from assayfolio.evidence.signing.identities import fingerprint
from evidence.signing.office import certified, office
from evidence.signing.stamps import StampHouse, serving
from support.signers import (
    SIGNED_OFF,
    bytes_of,
    checks,
    copied,
    laboratory_that_signs,
    sign,
    type_as,
)
from support.staff import as_account, staffed
from support.workspaces import Bench

RUN = "TST-1/run-0001"
MODULES = (
    "/usr/lib/softhsm/libsofthsm2.so",
    "/usr/lib/x86_64-linux-gnu/softhsm/libsofthsm2.so",
    "/usr/lib/aarch64-linux-gnu/softhsm/libsofthsm2.so",
)
PIN = "825371"


@pytest.fixture(scope="module")
def house(tmp_path_factory: pytest.TempPathFactory) -> StampHouse:
    return StampHouse(tmp_path_factory.mktemp("stamps"))


@pytest.fixture(scope="module")
def drafted(tmp_path_factory: pytest.TempPathFactory) -> Bench:
    bench = laboratory_that_signs(tmp_path_factory.mktemp("drafted") / "w")
    assert as_account(bench, "ann", "run", bench.study).code == 0
    return bench


def with_stamps(bench: Bench, house: StampHouse, address: str, more: str = "") -> None:
    """Name the time-stamp authority in the settings, by two persons, with its certificate."""
    (bench.root / "configs/signers/time-stamps.pem").write_bytes(pem_text("certificate", house.root))
    (bench.root / "configs/signers/time-stamps.crl").write_bytes(
        pem_text("revocation list", house.revocation_list)
    )
    lab = bench.root / "configs/lab.yaml"
    lines = (
        f"signatures:\n  time-stamp: {address}\n  time-stamp-certificate: {fingerprint(house.root)}\n{more}"
    )
    lab.write_text(f"{lab.read_text()}{lines}")
    why = ("--reason", "time stamps of the new authority, contract 14")
    assert as_account(bench, "dot", "settings", *why).code == 0
    assert as_account(bench, "cem", "settings", "--confirm").code == 0


@pytest.mark.needs("openssl")
@pytest.mark.requirement("SIGN-4")
@pytest.mark.parametrize(("level", "more"), [("B-T", ""), ("B-LT", "  long-term: true\n")])
def test_a_stamped_signature_verifies_with_the_network_off(
    drafted: Bench, house: StampHouse, tmp_path: Path, level: str, more: str
) -> None:
    bench = copied(drafted, tmp_path / "w")
    with serving(house.answer) as address:
        with_stamps(bench, house, address, more)
        for account in ("ann", "ben"):
            answer = sign(bench, account, RUN)
            assert answer.code == 0, answer.err
    signed = [entry for entry in bench.entries() if entry["action"] == "signed"]
    assert [entry["details"]["level"] for entry in signed] == [level, level]
    answer = bench("verify")
    assert answer.code == 0, answer.out
    assert answer.out.count("time stamp of Invented time stamps") == 2


@pytest.mark.requirement("SIGN-4")
def test_network_trouble_leaves_everything_as_it_was_and_the_signature_can_be_repeated(
    drafted: Bench, house: StampHouse, tmp_path: Path
) -> None:
    bench = copied(drafted, tmp_path / "w")
    with serving(house.answer) as address:
        pass  # the server has gone by now
    with_stamps(bench, house, address)
    before, entries = bytes_of(bench), bench.entries()
    answer = sign(bench, "ann", RUN)
    assert answer.code == 3
    assert "no time stamp from" in answer.err
    assert bytes_of(bench) == before
    assert bench.entries() == entries


def test_settings_of_stamps_need_their_certificate(tmp_path: Path) -> None:
    bench = Bench(tmp_path / "w", SIGNED_OFF)
    lab = bench.root / "configs/lab.yaml"
    lab.write_text(f"{lab.read_text()}signatures: {{time-stamp: 'http://127.0.0.1/'}}\n")
    answer = bench("check", bench.study)
    assert answer.code == 2
    assert "time-stamp-certificate" in answer.err


@pytest.fixture
def token(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A token with ann's key and certificate; the path of its module."""
    import pkcs11
    from pkcs11.util.x509 import decode_x509_certificate

    (tmp_path / "tokens").mkdir()
    configuration = tmp_path / "softhsm2.conf"
    configuration.write_text(
        f"directories.tokendir = {tmp_path}/tokens\nobjectstore.backend = file\n", "ascii"
    )
    monkeypatch.setenv("SOFTHSM2_CONF", str(configuration))
    identity = certified(office().authority, "A. Analyst", "ann")
    key = tmp_path / "key.pem"
    key.write_bytes(identity.key.private_bytes(Encoding.PEM, PrivateFormat.PKCS8, NoEncryption()))
    label = ("--token", "ann", "--label", "ann's key", "--id", "01", "--pin", PIN)
    for arguments in (
        ("--init-token", "--free", "--label", "ann", "--so-pin", "10203040", "--pin", PIN),
        ("--import", key, *label),
    ):
        subprocess.run(["softhsm2-util", *arguments], check=True, capture_output=True)
    module = Path(next(path for path in MODULES if Path(path).exists()))
    library = pkcs11.lib(str(module))
    library.reinitialize()
    with library.get_token(token_label="ann").open(rw=True, user_pin=PIN) as session:
        described = decode_x509_certificate(identity.certificate)
        where = {pkcs11.Attribute.LABEL: "ann's key", pkcs11.Attribute.ID: b"\x01"}
        session.create_object(described | where | {pkcs11.Attribute.TOKEN: True})
    return module


@pytest.mark.needs("softhsm2-util")
@pytest.mark.requirement("SIGN-9", "SIGN-13")
def test_a_token_is_enrolled_signs_and_counts_wrong_pins(token: Path, tmp_path: Path) -> None:
    bench = staffed(Bench(tmp_path / "w", SIGNED_OFF))
    anchor = tmp_path / "anchor.pem"
    anchor.write_bytes(pem_text("certificate", office().authority.certificate))
    labels = ("--token-label", "ann", "--key-label", "ann's key", "--anchor", anchor)
    answer, _ = type_as(bench, "ann", "signer", "enrol", "--token", token, *labels, secrets=[PIN])
    assert answer.code == 0, answer.err
    answer, _ = type_as(bench, "dot", "signer", "enrol", "--confirm", "ann")
    assert answer.code == 0, answer.err
    assert as_account(bench, "ann", "run", bench.study).code == 0
    answer = sign(bench, "ann", RUN, secrets=["111111", PIN])
    assert answer.code == 0, answer.err
    actions = [entry["action"] for entry in bench.entries()]
    assert actions[-2:] == ["passphrase-wrong", "signed"]
    assert not list((bench.root / "configs/signers").glob("*.p12"))
    outcomes = {each["outcome"] for each in checks(bench, "5.1") + checks(bench, "5.2")}
    assert outcomes == {"passed"}
    assert os.environ["SOFTHSM2_CONF"]
