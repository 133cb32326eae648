"""Time stamps by RFC 3161 as witnesses of the audit trail: an authority signs that a head was there.

What is stamped is the SHA-256 of the trail's newest line, so that any program for time stamps can check it
against that line. The answers are kept beside the trail, a line each in canonical JSON. Stamped is the head
with which the trail is closed, not every entry: the chain brings the ones before under the same stamp. They
show that entries are not younger than they say; since they lie beside the trail, they show nothing where
both were cut back together.
"""

import base64
import hashlib
import os
from collections.abc import Iterator
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path
from typing import Any

from assayfolio.canonical import canonical_bytes, sha256_hex
from assayfolio.errors import MachineError
from assayfolio.evidence.entries import TrailHead, is_digest
from assayfolio.evidence.files import append_line, explained, read_regular
from assayfolio.evidence.strict_json import NotCanonicalError, parse_canonical
from assayfolio.evidence.witnesses import KeptHeads

STAMPS_FILE = "audit-trail.stamps.jsonl"
_LARGEST_ANSWER = 1 << 20
_WAIT_SECONDS = 5.0
_KEYS = ("answer", "seq", "sha256", "url")


class StampError(ValueError):
    """The bytes are no valid time stamp of this head; the message says why."""


@dataclass(frozen=True, slots=True)
class Stamp:
    """What a valid time stamp says: when, by whom (name and SHA-256 of the certificate)."""

    time: datetime
    authority: str
    certificate: str


@dataclass(frozen=True, slots=True)
class KeptStamp:
    """One line of the file: the head, where it was stamped, and the stamp or what is wrong with it."""

    head: TrailHead
    url: str
    stamp: Stamp | None
    trouble: str


@dataclass(frozen=True, slots=True)
class StampWitness:
    """A time-stamp authority at `url`; its answers are kept in the folder `runs`."""

    url: str
    runs: Path
    each_entry: bool = False

    @property
    def name(self) -> str:
        """`time-stamp: URL`."""
        return f"time-stamp: {self.url}"

    def tell(self, head: TrailHead, time: str) -> None:  # noqa: ARG002 - the authority has its own clock
        """Have the head stamped, check the answer, keep it. Raises MachineError without a good one."""
        nonce = int.from_bytes(os.urandom(8), "big") >> 1
        answer = self._ask(_query(head, nonce))
        try:
            read_stamp(answer, head, nonce)
        except StampError as error:
            raise MachineError(
                f"{self.url}: its answer is no time stamp of entry {head.seq}: {error}"
            ) from error
        line = canonical_bytes(
            {
                "answer": base64.b64encode(answer).decode("ascii"),
                "seq": head.seq,
                "sha256": head.sha256,
                "url": self.url,
            }
        )
        append_line(self.runs / STAMPS_FILE, line)

    def kept(self) -> KeptHeads:
        """The heads with a valid stamp of this authority."""
        digests: dict[int, str] = {}
        times: dict[int, datetime] = {}
        signers: set[str] = set()
        troubles = []
        try:
            stamps = [stamp for stamp in kept_stamps(self.runs) if stamp.url == self.url]
        except NotCanonicalError as error:
            raise MachineError(f"{self.runs / STAMPS_FILE}: {error}") from error
        for kept in stamps:
            seq = kept.head.seq
            if kept.stamp is None:
                troubles.append(f"the time stamp of entry {seq} is not valid: {kept.trouble}")
                continue
            if digests.setdefault(seq, kept.head.sha256) != kept.head.sha256:
                troubles.append(f"entry {seq} was stamped with two digests")
            times.setdefault(seq, kept.stamp.time)
            signers.add(f"{kept.stamp.authority} (certificate SHA-256 {kept.stamp.certificate})")
        guard = (
            f"signed by {' and by '.join(sorted(signers)) or 'nobody'}, to be compared with what the "
            "authority publishes; kept beside the trail, so the newest could be cut off together with theirs"
        )
        return KeptHeads(digests, tuple(troubles), times, guard)

    def _ask(self, query: bytes) -> bytes:
        import urllib.error
        import urllib.request

        request = urllib.request.Request(  # noqa: S310 - the settings take web addresses only
            self.url,
            data=query,
            headers={"Content-Type": "application/timestamp-query", "Accept": "application/timestamp-reply"},
        )
        try:
            with urllib.request.urlopen(request, timeout=_WAIT_SECONDS) as answer:  # noqa: S310
                content: bytes = answer.read(_LARGEST_ANSWER)
        except (OSError, ValueError) as error:
            reason = error.reason if isinstance(error, urllib.error.URLError) else error
            raise MachineError(f"{self.url}: no time stamp: {reason}") from error
        return content


def kept_stamps(runs: Path) -> Iterator[KeptStamp]:
    """Every stamp that is kept in `runs`, checked; none where there is no file.

    Raises NotCanonicalError for a line of another form, MachineError where the file cannot be read.
    """
    path = runs / STAMPS_FILE
    with explained("read the time stamps", path):
        try:
            content = read_regular(path)
        except FileNotFoundError:
            return
    for number, line in enumerate(content.split(b"\n"), start=1):
        if not line:
            continue
        value = parse_canonical(line)
        if not isinstance(value, dict) or tuple(value) != _KEYS:
            raise NotCanonicalError(f"line {number} is no kept time stamp")
        answer, seq, digest, url = value.values()
        if not isinstance(answer, str) or not isinstance(seq, int) or not is_digest(digest):
            raise NotCanonicalError(f"line {number} is no kept time stamp")
        head = TrailHead(seq, str(digest))
        try:
            stamp, trouble = read_stamp(base64.b64decode(answer, validate=True), head, None), ""
        except ValueError as error:
            stamp, trouble = None, str(error)
        yield KeptStamp(head, str(url), stamp, trouble)


def _query(head: TrailHead, nonce: int) -> bytes:
    from asn1crypto import tsp

    query = tsp.TimeStampReq(
        {
            "version": "v1",
            "message_imprint": {
                "hash_algorithm": {"algorithm": "sha256"},
                "hashed_message": bytes.fromhex(head.sha256),
            },
            "nonce": nonce,
            "cert_req": True,
        }
    )
    content: bytes = query.dump()
    return content


def read_stamp(answer: bytes, head: TrailHead, nonce: int | None) -> Stamp:
    """What an authority's answer says of `head`.

    Checked are the status, the digest, the nonce where one is given, the signature, and that the certificate
    in the answer is for time stamps and was valid then. Whose certificate that is stays to be judged. Raises
    StampError.
    """
    from asn1crypto import core, tsp

    try:
        # A refusal has no token, which the library's type of the whole answer insists on.
        status = tsp.PKIStatusInfo.load(core.Sequence.load(answer, strict=True)[0].dump())["status"].native
        if status not in ("granted", "granted_with_mods"):
            raise StampError(f"the authority answered {status}")
        response = tsp.TimeStampResp.load(answer, strict=True)
        signed = response["time_stamp_token"]["content"]
        facts = signed["encap_content_info"]["content"].parsed
        imprint = facts["message_imprint"]
        stamped = imprint["hashed_message"].native, imprint["hash_algorithm"]["algorithm"].native
        if stamped != (bytes.fromhex(head.sha256), "sha256"):
            raise StampError("it is for something else")
        if nonce is not None and facts["nonce"].native != nonce:
            raise StampError("it answers another question")
        certificate = _signer(signed, facts.dump())
        time: datetime = facts["gen_time"].native
        _require_for_stamps(certificate, time)
        name: str = certificate.subject.human_friendly
        return Stamp(time, name, sha256_hex(certificate.dump()))
    except StampError:
        raise
    except (ValueError, TypeError, KeyError, AttributeError, IndexError) as error:
        raise StampError(f"it cannot be understood ({' '.join(str(error).split())})") from error


def _signer(signed: Any, content: bytes) -> Any:
    """The certificate in the answer by which it is signed. Raises StampError."""
    from pyhanko.sign.validation.errors import SignatureValidationError
    from pyhanko.sign.validation.generic_cms import validate_sig_integrity

    if len(signed["signer_infos"]) != 1:
        raise StampError("it has not one signature")
    info = signed["signer_infos"][0]
    actual = hashlib.new(info["digest_algorithm"]["algorithm"].native, content).digest()
    for choice in signed["certificates"]:
        certificate = choice.chosen
        sid = info["sid"]
        if sid.name == "issuer_and_serial_number":
            named = sid.chosen
            ours = (named["issuer"], named["serial_number"].native)
            if (certificate.issuer, certificate.serial_number) != ours:
                continue
        elif certificate.key_identifier != sid.chosen.native:
            continue
        try:
            intact, valid = validate_sig_integrity(info, certificate, "tst_info", actual)
        except SignatureValidationError as error:
            raise StampError(f"its signature cannot be checked ({error})") from error
        if not intact or not valid:
            raise StampError("its signature is not valid")
        return certificate
    raise StampError("it holds no certificate of its signer")


def _require_for_stamps(certificate: Any, time: datetime) -> None:
    usage = certificate.extended_key_usage_value
    if usage is None or "time_stamping" not in usage.native:
        raise StampError("its certificate is not for time stamps")
    validity = certificate["tbs_certificate"]["validity"]
    if not validity["not_before"].native <= time <= validity["not_after"].native:
        raise StampError("its certificate was not valid at that time")
