"""Signing with a key that lies on a token, with SoftHSM as the token."""

import os
import subprocess
from pathlib import Path

import pytest
from cryptography.hazmat.primitives.serialization import Encoding, NoEncryption, PrivateFormat

from assayfolio.evidence.signing.pades import sign
from assayfolio.evidence.signing.records import record_bytes
from assayfolio.evidence.signing.refusals import (
    SigningRefusedError,
    TokenUnavailableError,
    WrongPassphraseError,
)
from assayfolio.evidence.signing.token import TokenPlace, open_token
from assayfolio.evidence.signing.validation import ReportOnFile
from evidence.signing.office import SEAL, OnFile, office, statement, unsigned_report

pytestmark = pytest.mark.needs("softhsm2-util")

MODULES = (
    "/usr/lib/softhsm/libsofthsm2.so",
    "/usr/lib/x86_64-linux-gnu/softhsm/libsofthsm2.so",
    "/usr/lib/aarch64-linux-gnu/softhsm/libsofthsm2.so",
)
PIN, LABEL = "825371", "Ada Meadow"


@pytest.fixture(scope="module")
def place(tmp_path_factory):
    """A token with the author's key and certificate. The module reads its configuration once in a process."""
    folder = tmp_path_factory.mktemp("token")
    (folder / "tokens").mkdir()
    configuration = folder / "softhsm2.conf"
    configuration.write_text(f"directories.tokendir = {folder}/tokens\nobjectstore.backend = file\n", "ascii")
    os.environ["SOFTHSM2_CONF"] = str(configuration)
    run("--init-token", "--free", "--label", "sign-off", "--so-pin", "10203040", "--pin", PIN)
    key = office().people["author"].key
    plain = key.private_bytes(Encoding.PEM, PrivateFormat.PKCS8, NoEncryption())
    (folder / "key.pem").write_bytes(plain)
    run("--import", folder / "key.pem", "--token", "sign-off", "--label", LABEL, "--id", "01", "--pin", PIN)
    found = TokenPlace(Path(next(path for path in MODULES if Path(path).exists())), "sign-off", LABEL)
    store_certificate(found, LABEL)
    yield found
    del os.environ["SOFTHSM2_CONF"]


def run(*arguments) -> None:
    subprocess.run(["softhsm2-util", *arguments], check=True, capture_output=True)


def store_certificate(place: TokenPlace, label: str) -> None:
    import pkcs11
    from pkcs11.util.x509 import decode_x509_certificate

    token = pkcs11.lib(str(place.module)).get_token(token_label=place.token)
    with token.open(rw=True, user_pin=PIN) as session:
        described = decode_x509_certificate(office().people["author"].certificate)
        session.create_object(
            described
            | {pkcs11.Attribute.LABEL: label, pkcs11.Attribute.ID: b"\x01", pkcs11.Attribute.TOKEN: True}
        )


def test_a_token_signs_and_the_whole_check_passes(place):
    pdf = unsigned_report()
    with open_token(place, PIN, (office().authority.certificate,)) as identity:
        assert identity.certificate == office().people["author"].certificate
        made = sign(pdf, pdf, statement("author"), identity)
    report = ReportOnFile(made.pdf, pdf, SEAL, {made.record.name: record_bytes(made.record)})
    findings = OnFile(report, office().trust).findings()
    assert findings.outcome == "passed", findings.failures


@pytest.mark.parametrize("pin", ["", "111111", "825372"])
@pytest.mark.requirement("SIGN-9")
def test_a_token_without_its_pin_does_not_sign(place, pin):
    with pytest.raises(WrongPassphraseError), open_token(place, pin):
        pytest.fail("the token opened")


def test_a_key_that_is_not_on_the_token_is_named(place):
    other = TokenPlace(place.module, place.token, "Dora Hill")
    words = "0 certificates and 0 keys labelled Dora Hill"
    with pytest.raises(SigningRefusedError, match=words), open_token(other, PIN):
        pytest.fail("something was found")


@pytest.mark.parametrize(
    "wrong",
    [
        lambda place: TokenPlace(place.module, "no such token", LABEL),
        lambda place: TokenPlace(Path("/nowhere/module.so"), place.token, LABEL),
    ],
)
def test_a_token_that_cannot_be_reached_is_told_from_a_wrong_pin(place, wrong):
    with pytest.raises(TokenUnavailableError), open_token(wrong(place), PIN):
        pytest.fail("something opened")
