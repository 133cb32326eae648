"""Whom a signature can be believed to be from: chain to an anchor, enrolment, validity, revocation, time.

Trust never comes from the document or its folder: anchors and enrolled certificates are handed in.
"""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from datetime import datetime, timedelta
from typing import Any

from assayfolio.evidence.signing.authority import RevocationList, read_revocation_list
from assayfolio.evidence.signing.identities import CertificateFacts, certificate_facts, fingerprint
from assayfolio.evidence.signing.refusals import SigningRefusedError
from assayfolio.evidence.signing.results import Gathered
from assayfolio.evidence.signing.statement import printed_time

CLOCK_TOLERANCE = timedelta(minutes=5)  # between the signer's clock and a time stamp's


@dataclass(frozen=True, slots=True)
class Trust:
    """What is believed beforehand. All certificates and lists in DER.

    `anchors` are for signers, `stamp_anchors` for time stamps. `enrolled` gives the person for each enrolled
    certificate's fingerprint, None where no audit trail is at hand. `proven_by` gives, for the number of a
    signature, a time by which it is known to have been there, from a witnessed audit trail.
    """

    anchors: tuple[bytes, ...] = ()
    stamp_anchors: tuple[bytes, ...] = ()
    revocation_lists: tuple[bytes, ...] = ()
    enrolled: Mapping[str, str] | None = None
    proven_by: Mapping[int, datetime] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Chain:
    """A signer's certificates from himself to the anchor (DER); `problem` says why there is none."""

    certificates: tuple[bytes, ...]
    problem: str = ""


def chain_of(certificate: Any, others: Iterable[Any], anchors: Sequence[bytes], purpose: str) -> Chain:
    """The chain from `certificate` (asn1crypto) to one of `anchors`, whatever the time.

    Every certificate is judged at a time at which the signer's own is valid; whether that is the time of
    signing is another check. `purpose` is `signing` or `time_stamping`.
    """
    import asyncio

    from asn1crypto.x509 import Certificate
    from pyhanko_certvalidator import CertificateValidator, ValidationContext
    from pyhanko_certvalidator.errors import PathBuildingError, PathValidationError, ValidationError

    context = ValidationContext(
        trust_roots=[Certificate.load(der) for der in anchors],
        moment=certificate.not_valid_before + timedelta(seconds=1),
        allow_fetching=False,
        revocation_mode="soft-fail",
    )
    validator: Any = CertificateValidator(
        certificate, intermediate_certs=list(others), validation_context=context
    )
    extended = {"time_stamping"} if purpose == "time_stamping" else set()
    try:
        path = asyncio.run(validator.async_validate_usage(set(), extended))
    except PathBuildingError:
        return Chain((), "no chain leads from it to a certificate that is trusted")
    except (PathValidationError, ValidationError) as error:
        return Chain((), f"its chain does not hold: {error}")
    return Chain(tuple(each.dump() for each in reversed(list(path))))


def judge_trust(gathered: Gathered, chain: Chain, trust: Trust) -> None:
    """Enter whether the certificate is one of a trusted authority and meant for signatures."""
    if not trust.anchors:
        gathered.unknown("certificate trusted", "no trusted certificate was given to check it against")
    elif chain.problem:
        gathered.fails("certificate trusted", chain.problem)
    elif not _for_signatures(chain.certificates[0]):
        gathered.fails("certificate trusted", "its key is not meant for signatures")
    else:
        anchor = chain.certificates[-1]
        words = f"leads to {certificate_facts(anchor).person}, {fingerprint(anchor)}"
        gathered.holds("certificate trusted", words)


def _for_signatures(der: bytes) -> bool:
    from cryptography import x509

    try:
        usage = x509.load_der_x509_certificate(der).extensions.get_extension_for_class(x509.KeyUsage).value
    except x509.ExtensionNotFound:
        return False
    return usage.digital_signature or usage.content_commitment


def judge_enrolment(gathered: Gathered, facts: CertificateFacts, person: str, trust: Trust) -> None:
    """Enter whether this very certificate was enrolled for the person whom the signature names."""
    if trust.enrolled is None:
        gathered.unknown(
            "certificate enrolled", "no audit trail is at hand that says whom it was enrolled for"
        )
        return
    owner = trust.enrolled.get(facts.fingerprint)
    if owner is None:
        gathered.fails("certificate enrolled", f"the certificate {facts.fingerprint} was never enrolled")
    elif owner != person:
        gathered.fails("certificate enrolled", f"it was enrolled for {owner}, not for {person}")
    else:
        gathered.holds("certificate enrolled", f"enrolled for {owner}")


def judge_validity(gathered: Gathered, facts: CertificateFacts, person: str, time: datetime) -> None:
    """Enter whether the certificate names the signer and was valid at the time of signing."""
    span = f"{facts.not_before:%Y-%m-%d} to {facts.not_after:%Y-%m-%d}"
    if facts.person != person:
        gathered.fails("certificate valid when signed", f"it names {facts.person}, the signature {person}")
    elif not facts.valid_at(time):
        gathered.fails(
            "certificate valid when signed", f"it is valid from {span}, not at the time of signing"
        )
    else:
        gathered.holds("certificate valid when signed", f"valid from {span}")


def read_lists(lists: Iterable[bytes], issuer: bytes) -> list[RevocationList]:
    """Those of `lists` that `issuer` signed, the newest last."""
    found = []
    for der in lists:
        try:
            found.append(read_revocation_list(der, issuer))
        except SigningRefusedError:
            continue  # another authority's, or nobody's: it says nothing about this one's certificates
    return sorted(found, key=lambda each: (each.number, each.this_update))


def judge_revocation(
    gathered: Gathered, chain: Chain, lists: Sequence[bytes], times: tuple[datetime, datetime | None]
) -> None:
    """Enter whether a certificate of the chain was revoked. `times`: signing as claimed, and proven by."""
    if not chain.certificates:
        gathered.unknown("not revoked when signed", "without a chain nobody's revocation list is to be asked")
        return
    problems: list[str] = []
    unproven: list[str] = []
    words: list[str] = []
    for der, issuer in zip(chain.certificates, chain.certificates[1:], strict=False):
        facts, own = certificate_facts(der), read_lists(lists, issuer)
        if not own:
            unproven.append(f"there is no revocation list of {certificate_facts(issuer).person}")
            continue
        verdict, text = _revocation(facts, own[-1], times)
        {"failed": problems, "not checkable": unproven, "passed": words}[verdict].append(text)
    if problems:
        gathered.fails("not revoked when signed", "; ".join(problems))
    elif unproven:
        gathered.unknown("not revoked when signed", "; ".join(unproven))
    else:
        gathered.holds("not revoked when signed", "; ".join(words) or "the anchor's own certificate")


def _revocation(
    facts: CertificateFacts, newest: RevocationList, times: tuple[datetime, datetime | None]
) -> tuple[str, str]:
    claimed, proven = times
    source = f"revocation list {newest.number} of {newest.this_update:%Y-%m-%d}"
    entry = next((each for each in newest.revoked if each.serial == facts.serial), None)
    if entry is None:
        if newest.next_update < claimed:
            return "not checkable", f"{source} had run out when it was signed"
        return "passed", f"not in {source}"
    when = f"{entry.when:%Y-%m-%d %H:%M:%S} UTC ({entry.reason}; {source})"
    if proven is not None and proven < entry.when:
        return "passed", f"signed before the revocation of {when}, which is proven"
    if claimed >= entry.when:
        return "failed", f"signed after the revocation of {when}"
    if proven is not None:
        return (
            "failed",
            f"first proven for {printed_time(proven)}, later than the revocation of {when}",
        )
    return "not checkable", f"by the signer's clock before the revocation of {when}; not proven"


@dataclass(frozen=True, slots=True)
class Stamp:
    """A time stamp on a signature: its time, whether it is unaltered and for this one, and its chain."""

    time: datetime
    genuine: bool
    chain: Chain


def stamp_token(embedded: Any) -> Any:
    """The time-stamp token (RFC 3161) that a signature carries, None without one; more than one is refused.

    Raises ValueError for more than one.
    """
    from pyhanko.sign.validation.generic_cms import extract_tst_data_iter

    tokens = list(extract_tst_data_iter(embedded.signer_info, signed=False))
    if len(tokens) > 1:
        raise ValueError("it carries more than one time stamp")
    return tokens[0] if tokens else None


def read_stamp(embedded: Any, trust: Trust) -> Stamp | None:
    """The time stamp in a signature, if there is one. Raises whatever the libraries do for a broken one."""
    import asyncio

    from asn1crypto.x509 import Certificate
    from cryptography.hazmat.primitives import hashes
    from pyhanko.sign.validation.generic_cms import validate_tst_signed_data
    from pyhanko_certvalidator import ValidationContext
    from pyhanko_certvalidator.util import get_pyca_cryptography_hash

    token = stamp_token(embedded)
    if token is None:
        return None

    def imprint(algorithm: str) -> bytes:
        digest = hashes.Hash(get_pyca_cryptography_hash(algorithm))
        digest.update(embedded.signer_info["signature"].native)
        return digest.finalize()

    stated = token["encap_content_info"]["content"].parsed["gen_time"].native
    roots = [Certificate.load(der) for der in trust.stamp_anchors]
    context = ValidationContext(trust_roots=roots, moment=stated, allow_fetching=False)
    found = asyncio.run(validate_tst_signed_data(token, context, imprint))
    own = found["signing_cert"]
    others = [each.chosen for each in token["certificates"] if each.name == "certificate"]
    chain = chain_of(own, others, trust.stamp_anchors, "time_stamping")
    return Stamp(stated, bool(found["intact"] and found["valid"]), chain)


def judge_time(
    gathered: Gathered, claimed: datetime, stamp: Stamp | None, limits: tuple[datetime | None, datetime]
) -> None:
    """Enter what the time of signing rests on. `limits`: the signature before, and the moment of checking."""
    earliest, latest = limits
    problems = []
    if earliest is not None and claimed < earliest:
        problems.append(f"it claims {printed_time(claimed)}, earlier than the signature before it")
    if claimed > latest + CLOCK_TOLERANCE:
        problems.append(f"it claims {printed_time(claimed)}, which is still to come")
    if stamp is not None and not stamp.genuine:
        problems.append("the time stamp is altered or belongs to another signature")
    elif stamp is not None and abs(stamp.time - claimed) > CLOCK_TOLERANCE:
        problems.append(
            f"the signer's clock said {printed_time(claimed)}, the time stamp {printed_time(stamp.time)}"
        )
    if problems:
        gathered.fails("time", "; ".join(problems))
    elif stamp is None:
        gathered.holds("time", f"{printed_time(claimed)} by the signer's clock; no time stamp")
    elif not stamp.chain.certificates:
        gathered.unknown(
            "time", f"the time stamp of {printed_time(stamp.time)} leads to no authority that is trusted"
        )
    else:
        source = certificate_facts(stamp.chain.certificates[0]).person
        gathered.holds("time", f"{printed_time(claimed)}, time stamp of {source} {printed_time(stamp.time)}")


def proven_time(stamp: Stamp | None, witnessed: datetime | None) -> datetime | None:
    """The earliest time by which the signature is known to have been there; None if nothing proves any."""
    known = [witnessed] if witnessed is not None else []
    if stamp is not None and stamp.genuine and stamp.chain.certificates:
        known.append(stamp.time)
    return min(known) if known else None
