"""Who may sign: keys under a passphrase, certificates of the laboratory or from elsewhere, enrolment."""

from datetime import timedelta

import pytest
from cryptography import x509
from cryptography.hazmat.primitives import hashes
from cryptography.hazmat.primitives.asymmetric import ec, ed25519, rsa
from cryptography.hazmat.primitives.serialization import (
    BestAvailableEncryption,
    Encoding,
    NoEncryption,
    PrivateFormat,
    pkcs12,
)
from cryptography.x509.oid import NameOID

from assayfolio.evidence.signing.authority import (
    Enrolment,
    Revocation,
    certificate_request,
    certified_identity,
    certify,
    enrolment_clashes,
    read_revocation_list,
    renewal_faults,
    revocation_list,
    succession_faults,
)
from assayfolio.evidence.signing.identities import (
    certificate_facts,
    certificate_pem,
    fingerprint,
    fitness_faults,
    identity_from_pem,
    new_key,
    open_identity,
    passphrase_faults,
    sealed_identity,
)
from assayfolio.evidence.signing.refusals import SigningRefusedError, WrongPassphraseError
from evidence.signing.office import FOUNDED, PEOPLE, certified, office, open_office

PASSPHRASE = "grüne Wolke neben Nr. 7"


@pytest.fixture(scope="module")
def ada():
    return office().people["author"]


@pytest.fixture(scope="module")
def sealed(ada):
    return sealed_identity(ada, PASSPHRASE)


def test_a_sealed_identity_opens_with_its_passphrase_and_is_the_same(ada, sealed):
    opened = open_identity(sealed, PASSPHRASE)
    assert opened.certificate == ada.certificate
    assert opened.chain == (office().authority.certificate,)
    assert opened.key.private_numbers() == ada.key.private_numbers()


@pytest.mark.parametrize("wrong", ["", "grüne Wolke neben Nr. 8", PASSPHRASE + " ", PASSPHRASE.upper()])
def test_a_wrong_passphrase_is_told_apart(sealed, wrong):
    with pytest.raises(WrongPassphraseError):
        open_identity(sealed, wrong)


def test_guessing_is_slow_by_the_check_value_as_well_as_by_the_key(sealed):
    from asn1crypto.pkcs12 import Pfx

    file = Pfx.load(sealed)
    assert file["mac_data"]["iterations"].native >= 300_000
    assert file["mac_data"]["mac"]["digest_algorithm"]["algorithm"].native == "sha256"


@pytest.mark.needs("openssl")
def test_another_program_opens_the_sealed_identity(ada, sealed, tmp_path):
    import subprocess

    (tmp_path / "ada.p12").write_bytes(sealed)
    (tmp_path / "word").write_text(PASSPHRASE, encoding="utf-8")
    ended = subprocess.run(
        [
            "openssl",
            "pkcs12",
            "-in",
            tmp_path / "ada.p12",
            "-clcerts",
            "-nokeys",
            "-passin",
            f"file:{tmp_path}/word",
        ],
        capture_output=True,
        text=True,
        check=False,
    )
    assert ended.returncode == 0, ended.stderr
    assert certificate_pem(ada.certificate).decode().strip() in ended.stdout


def test_an_identity_does_not_show_its_key(ada):
    assert "key" not in repr(ada)
    assert fingerprint(ada.certificate) in repr(ada)


@pytest.mark.parametrize("content", [b"", b"no file", b"\x30\x03\x02\x01\x03"])
def test_what_is_no_identity_is_refused(content):
    with pytest.raises(SigningRefusedError):
        open_identity(content, PASSPHRASE)


def test_a_file_without_key_is_refused():
    certificate = x509.load_der_x509_certificate(office().authority.certificate)
    content = pkcs12.serialize_key_and_certificates(
        b"x", None, certificate, None, BestAvailableEncryption(b"secret")
    )
    with pytest.raises(SigningRefusedError, match="no private key"):
        open_identity(content, "secret")


def pem(key, *certificates, secret: bytes | None = None) -> bytes:
    way = NoEncryption() if secret is None else BestAvailableEncryption(secret)
    text = key.private_bytes(Encoding.PEM, PrivateFormat.PKCS8, way)
    return b"".join(certificate_pem(der) for der in certificates) + text


def test_an_identity_in_pem_is_taken(ada):
    taken = identity_from_pem(pem(ada.key, ada.certificate, *ada.chain, secret=b"word"), "word")
    assert (taken.certificate, taken.chain) == (ada.certificate, ada.chain)


def test_a_wrong_passphrase_for_pem_is_told_apart(ada):
    text = pem(ada.key, ada.certificate, secret=b"word")
    for wrong in ("other", None):
        with pytest.raises(WrongPassphraseError):
            identity_from_pem(text, wrong)


def test_a_certificate_of_another_key_is_refused(ada):
    with pytest.raises(SigningRefusedError, match="does not belong to the key"):
        identity_from_pem(pem(new_key(), ada.certificate), None)
    with pytest.raises(SigningRefusedError, match="another key"):
        certified_identity(office().authority, ada.certificate, new_key())


@pytest.mark.parametrize("missing", ["certificate", "key"])
def test_a_text_without_all_its_parts_is_refused(ada, missing):
    text = certificate_pem(ada.certificate) if missing == "key" else pem(ada.key)
    with pytest.raises(SigningRefusedError, match=f"no (private )?{missing}"):
        identity_from_pem(text, None)


def test_a_kind_of_key_that_no_reader_expects_is_refused(ada):
    with pytest.raises(SigningRefusedError, match="neither an elliptic-curve nor an RSA key"):
        identity_from_pem(pem(ed25519.Ed25519PrivateKey.generate(), ada.certificate), None)


# --- passphrases


@pytest.mark.parametrize(
    "good", [PASSPHRASE, "correct horse battery", "Tp9!vq2#Lz0mRw", "fünf Äpfel im Keller"]
)
def test_a_long_varied_passphrase_will_do(good):
    assert passphrase_faults(good, ("Ada Meadow", "ameadow")) == ()


@pytest.mark.parametrize(
    ("weak", "words"),
    [
        ("", "characters"),
        ("short one", "9 characters"),
        ("aaaaaaaaaaaaaaaa", "different characters"),
        ("abcdefghijklmnop", "run of neighbouring"),
        ("qwertyuiopasdfgh", "run of neighbouring"),
        ("1234567890123456", "run of neighbouring"),
        ("moonlightmoonlight", "repetition"),
        ("my name is Meadow ok", "the name 'meadow'"),
        ("the ameadow account", "the name 'ameadow'"),
    ],
)
def test_a_weak_passphrase_is_refused_with_the_reason(weak, words):
    faults = passphrase_faults(weak, ("Ada Meadow", "ameadow"))
    assert any(words in fault for fault in faults), faults


# --- the laboratory's authority


def test_a_certificate_says_whom_it_is_for_and_by_whom(ada):
    facts = certificate_facts(ada.certificate)
    assert facts.person == PEOPLE["author"][0]
    assert facts.issuer.endswith("certificate authority")
    assert facts.valid_at(FOUNDED)
    assert not facts.valid_at(FOUNDED - timedelta(seconds=1))


@pytest.mark.requirement("SIGN-10")
def test_the_person_keeps_the_key_the_authority_sees_the_request_alone():
    key = new_key()
    request = certificate_request("Ada Meadow", "ameadow", key)
    certificate = certify(office().authority, request, ("Ada Meadow", "ameadow"), (FOUNDED, 30))
    assert x509.load_der_x509_certificate(certificate).public_key() == key.public_key()
    secret = key.private_numbers().private_value.to_bytes(32, "big")
    assert secret not in request + certificate


def test_a_request_for_somebody_else_is_refused():
    request = certificate_request("Ada Meadow", "ameadow", new_key())
    for enrolment in (("Dora Hill", "ameadow"), ("Ada Meadow", "dhill")):
        with pytest.raises(SigningRefusedError, match="does not name"):
            certify(office().authority, request, enrolment, (FOUNDED, 30))


def test_an_altered_request_is_refused():
    request = certificate_request("Ada Meadow", "ameadow", new_key())
    altered = request.replace(b"Ada Meadow", b"Eda Meadow")
    with pytest.raises(SigningRefusedError, match="not signed with the key"):
        certify(office().authority, altered, ("Eda Meadow", "ameadow"), (FOUNDED, 30))


@pytest.mark.parametrize("span", [(FOUNDED - timedelta(days=1), 30), (FOUNDED, 30 * 365)])
def test_a_certificate_does_not_outlive_its_authority(span):
    request = certificate_request("Ada Meadow", "ameadow", new_key())
    with pytest.raises(SigningRefusedError, match="authority's own time"):
        certify(office().authority, request, ("Ada Meadow", "ameadow"), span)


def test_a_renewal_is_for_the_same_person_with_a_fresh_key_and_for_longer(ada):
    name, account, _ = PEOPLE["author"]
    longer = certified(office().authority, name, account, FOUNDED, 16 * 365)
    assert renewal_faults(ada.certificate, longer.certificate) == ()
    assert renewal_faults(longer.certificate, ada.certificate) == ("it does not last longer",)
    assert "it keeps the old key" in renewal_faults(ada.certificate, ada.certificate)
    other = certified(office().authority, "Dora Hill", "dhill", FOUNDED, 16 * 365)
    assert renewal_faults(ada.certificate, other.certificate) == ("it names another person",)


@pytest.mark.parametrize(
    ("new", "clash"),
    [
        (Enrolment("Ada Meadow", "ada2", "22" * 32), "Ada Meadow already has a certificate"),
        (Enrolment("Dora Hill", "ameadow", "22" * 32), "the account ameadow already stands for Ada Meadow"),
        (Enrolment("Dora Hill", "dhill", "11" * 32), "already enrolled for Ada Meadow"),
        (Enrolment("Bert Lane", "blane", "33" * 32), "already enrolled for Bert Lane"),
    ],
)
@pytest.mark.requirement("SIGN-5")
def test_one_certificate_a_person_one_person_a_certificate(new, clash):
    enrolled = (
        Enrolment("Ada Meadow", "ameadow", "11" * 32),
        Enrolment("Bert Lane", "blane", "33" * 32, withdrawn=True),
    )
    assert any(clash in each for each in enrolment_clashes(new, enrolled))


def test_who_was_withdrawn_can_be_enrolled_again_with_another_certificate():
    old = Enrolment("Bert Lane", "blane", "33" * 32, withdrawn=True)
    assert enrolment_clashes(Enrolment("Bert Lane", "blane", "44" * 32), (old,)) == ()


# --- certificates from elsewhere


def foreign(key, common="Ada Meadow", **usage) -> bytes:
    name = x509.Name([x509.NameAttribute(NameOID.COMMON_NAME, common)])
    uses = dict.fromkeys(
        (
            "digital_signature",
            "content_commitment",
            "key_encipherment",
            "data_encipherment",
            "key_agreement",
            "key_cert_sign",
            "crl_sign",
            "encipher_only",
            "decipher_only",
        ),
        False,
    )
    builder = (
        x509.CertificateBuilder()
        .subject_name(name)
        .issuer_name(name)
        .public_key(key.public_key())
        .serial_number(7)
        .not_valid_before(FOUNDED)
        .not_valid_after(FOUNDED + timedelta(days=400))
    )
    if usage:
        builder = builder.add_extension(x509.KeyUsage(**(uses | usage)), critical=True)
    return builder.sign(key, hashes.SHA256()).public_bytes(Encoding.DER)


@pytest.mark.parametrize(
    ("certificate", "words"),
    [
        (
            lambda: foreign(ec.generate_private_key(ec.SECP256R1()), "Dora Hill", digital_signature=True),
            "it names",
        ),
        (lambda: foreign(rsa.generate_private_key(65537, 2048), digital_signature=True), "2048 bits"),
        (lambda: foreign(ec.generate_private_key(ec.SECP256K1()), digital_signature=True), "P-256"),
        (lambda: foreign(new_key(), key_agreement=True), "not meant for signatures"),
        (lambda: foreign(new_key()), "does not say what"),
        (lambda: office().authority.certificate, "of an authority"),
    ],
)
def test_an_unfit_certificate_is_refused_with_the_reason(certificate, words):
    faults = fitness_faults(certificate(), "Ada Meadow", FOUNDED + timedelta(days=2))
    assert any(words in fault for fault in faults), faults


def test_a_fit_certificate_from_elsewhere_is_taken_while_it_is_valid():
    certificate = foreign(new_key(), digital_signature=True)
    assert fitness_faults(certificate, "Ada Meadow", FOUNDED + timedelta(days=2)) == ()
    (fault,) = fitness_faults(certificate, "Ada Meadow", FOUNDED + timedelta(days=500))
    assert "not now" in fault


@pytest.mark.parametrize("content", [b"", b"\x30\x00", b"no certificate"])
def test_what_is_no_certificate_is_refused(content):
    with pytest.raises(SigningRefusedError):
        certificate_facts(content)


# --- revocation lists

FIRST = Revocation(41, FOUNDED + timedelta(days=3), "keyCompromise")
SECOND = Revocation(17, FOUNDED + timedelta(days=9), "cessationOfOperation")


def read(number, *revoked, by=None, days=30):
    maker = by or office()
    der = revocation_list(maker.authority, number, revoked, FOUNDED + timedelta(days=number), days)
    return read_revocation_list(der, maker.authority.certificate)


def test_a_revocation_list_is_read_as_it_was_made():
    found = read(4, FIRST, SECOND)
    assert found.number == 4
    assert found.revoked == (SECOND, FIRST)
    assert found.next_update - found.this_update == timedelta(days=30)


def test_a_list_rightly_follows_another():
    assert succession_faults(read(1, FIRST), read(2, FIRST, SECOND)) == ()


@pytest.mark.parametrize(
    ("newer", "words"),
    [
        (lambda: read(2, SECOND), "certificate 29"),
        (lambda: read(2, Revocation(41, FOUNDED, "keyCompromise")), "another date"),
        (lambda: read(3, FIRST), "number 3 follows number 1"),
        (lambda: read(1, FIRST), "number 1 follows number 1"),
    ],
)
def test_a_list_that_forgets_or_skips_is_found(newer, words):
    faults = succession_faults(read(1, FIRST), newer())
    assert any(words in fault for fault in faults), faults


def test_a_list_of_another_authority_says_nothing_here():
    other = open_office()
    der = revocation_list(other.authority, 1, (FIRST,), FOUNDED, 30)
    with pytest.raises(SigningRefusedError, match="not one of this authority"):
        read_revocation_list(der, office().authority.certificate)


@pytest.mark.needs("openssl")
def test_another_program_reads_and_checks_the_list(tmp_path):
    import subprocess

    (tmp_path / "list.crl").write_bytes(office().list_of(5, FIRST))
    (tmp_path / "ca.pem").write_bytes(certificate_pem(office().authority.certificate))
    ended = subprocess.run(
        [
            "openssl",
            "crl",
            "-inform",
            "DER",
            "-in",
            tmp_path / "list.crl",
            "-CAfile",
            tmp_path / "ca.pem",
            "-noout",
            "-text",
        ],
        capture_output=True,
        text=True,
        check=True,
    )
    assert "verify OK" in ended.stderr
    assert "Key Compromise" in ended.stdout
