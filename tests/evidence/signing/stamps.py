"""A time-stamp authority on this computer: `openssl ts` behind a small server on the loopback address."""

import subprocess
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from datetime import UTC, datetime, timedelta
from http.server import BaseHTTPRequestHandler, HTTPServer
from pathlib import Path

from cryptography import x509
from cryptography.hazmat.primitives import hashes
from cryptography.hazmat.primitives.asymmetric import ec
from cryptography.hazmat.primitives.serialization import Encoding, NoEncryption, PrivateFormat
from cryptography.x509.oid import ExtendedKeyUsageOID, NameOID

from assayfolio.evidence.signing.authority import revocation_list
from assayfolio.evidence.signing.identities import KeyIdentity

NAME = "Invented time stamps"
CONFIGURATION = """[tsa]
default_tsa = stamps
[stamps]
serial = {folder}/serial
crypto_device = builtin
signer_cert = {folder}/stamps.pem
certs = {folder}/root.pem
signer_key = {folder}/stamps.key
signer_digest = sha256
default_policy = 1.2.3.4.1
digests = sha256, sha384, sha512
accuracy = secs:1
ordering = yes
tsa_name = no
ess_cert_id_chain = no
ess_cert_id_alg = sha256
"""


class StampHouse:
    """The authority's certificates, in a folder that `openssl ts` works from."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder
        now = datetime.now(UTC).replace(microsecond=0)
        span = (now - timedelta(days=1), now + timedelta(days=3650))
        root_key, key = ec.generate_private_key(ec.SECP256R1()), ec.generate_private_key(ec.SECP256R1())
        root = certificate("Invented time stamps: root", None, root_key, root_key, span)
        own = certificate(NAME, root, key, root_key, span)
        self.root, self.own = root.public_bytes(Encoding.DER), own.public_bytes(Encoding.DER)
        self.revocation_list = revocation_list(KeyIdentity(self.root, (), root_key), 1, (), span[0], 3000)
        (folder / "root.pem").write_bytes(root.public_bytes(Encoding.PEM))
        (folder / "stamps.pem").write_bytes(own.public_bytes(Encoding.PEM))
        plain = key.private_bytes(Encoding.PEM, PrivateFormat.PKCS8, NoEncryption())
        (folder / "stamps.key").write_bytes(plain)
        (folder / "serial").write_text("01\n", encoding="ascii")
        (folder / "stamps.cnf").write_text(CONFIGURATION.format(folder=folder), encoding="ascii")

    def answer(self, query: bytes) -> bytes:
        """What `openssl ts` answers."""
        asked, answered = self.folder / "query", self.folder / "answer"
        asked.write_bytes(query)
        subprocess.run(
            [
                "openssl",
                "ts",
                "-reply",
                "-config",
                self.folder / "stamps.cnf",
                "-queryfile",
                asked,
                "-out",
                answered,
            ],
            capture_output=True,
            check=True,
        )
        return answered.read_bytes()


def certificate(name, issuer, key, issuer_key, span) -> x509.Certificate:
    """A root where there is no issuer, else the certificate of a time-stamp authority."""
    subject = x509.Name([x509.NameAttribute(NameOID.COMMON_NAME, name)])
    builder = (
        x509.CertificateBuilder()
        .subject_name(subject)
        .issuer_name(subject if issuer is None else issuer.subject)
        .public_key(key.public_key())
        .serial_number(x509.random_serial_number())
        .not_valid_before(span[0])
        .not_valid_after(span[1])
        .add_extension(x509.SubjectKeyIdentifier.from_public_key(key.public_key()), critical=False)
    )
    if issuer is None:
        builder = builder.add_extension(x509.BasicConstraints(ca=True, path_length=0), critical=True)
    else:
        usage = x509.ExtendedKeyUsage([ExtendedKeyUsageOID.TIME_STAMPING])
        builder = builder.add_extension(usage, critical=True)
        builder = builder.add_extension(
            x509.AuthorityKeyIdentifier.from_issuer_public_key(issuer_key.public_key()), critical=False
        )
    return builder.sign(issuer_key, hashes.SHA256())


@contextmanager
def serving(answer) -> Iterator[str]:
    """The address of a server on loopback that answers every request with `answer(query)`."""

    class Handler(BaseHTTPRequestHandler):
        def do_POST(self) -> None:
            content = answer(self.rfile.read(int(self.headers["Content-Length"])))
            self.send_response(200)
            self.send_header("Content-Type", "application/timestamp-reply")
            self.send_header("Content-Length", str(len(content)))
            self.end_headers()
            self.wfile.write(content)

        def log_message(self, *details) -> None:
            return

    server = HTTPServer(("127.0.0.1", 0), Handler)
    thread = threading.Thread(target=server.serve_forever, daemon=True)
    thread.start()
    try:
        yield f"http://127.0.0.1:{server.server_port}/"
    finally:
        server.shutdown()
        server.server_close()
        thread.join()
