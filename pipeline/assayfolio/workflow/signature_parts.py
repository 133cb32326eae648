"""What a signature is made of beside the key: certificates, revocation list, time stamps, files, entry."""

from collections.abc import Mapping, Sequence

from assayfolio.canonical import Json, sha256_hex
from assayfolio.errors import InputError
from assayfolio.evidence.keyring import SIGNERS_FOLDER, Keyring, pem_text
from assayfolio.evidence.sign_offs import REPORT
from assayfolio.evidence.signing.identities import certificate_facts, fingerprint
from assayfolio.evidence.signing.pades import LongTerm, SignedReport
from assayfolio.evidence.signing.records import file_facts, record_bytes
from assayfolio.evidence.signing.stamping import TimeStampAuthority, ValidationMaterial
from assayfolio.evidence.signing.statement import rfc3339
from assayfolio.workflow.signing_case import SigningCase


def chain_of(case: SigningCase, keyring: Keyring) -> tuple[bytes, ...]:
    """The enrolled certificate and those above it, as far as the signers' folder has them."""
    missing = [
        each for each in (case.enrolled.certificate, case.enrolled.anchor) if each not in keyring.certificates
    ]
    if missing:
        raise InputError(
            f"{', '.join(missing)} is not in {SIGNERS_FOLDER}, or was changed; verify says more."
        )
    found, top = [keyring.certificates[case.enrolled.certificate]], case.enrolled.anchor
    by_name = {certificate_facts(der).person: der for der in keyring.certificates.values()}
    while fingerprint(found[-1]) != top and len(found) < len(keyring.certificates):
        above = by_name.get(certificate_facts(found[-1]).issuer)
        if above is None or above in found:
            break
        found.append(above)
    anchor = keyring.certificates[top]
    return tuple(found) if anchor in found else (*found, anchor)


def _newest_list(case: SigningCase, keyring: Keyring) -> bytes | None:
    """The newest list of revoked certificates of the authority that issued this person's certificate."""
    if case.enrolled.anchor != case.signers.authority or not case.signers.lists:
        return None
    pinned = case.signers.lists[-1]
    found = keyring.lists.get(pinned.sha256)
    if found is None:
        raise InputError(f"Revocation list {pinned.number} is not in {SIGNERS_FOLDER}; verify says more.")
    return found


def long_term(case: SigningCase, keyring: Keyring, chain: Sequence[bytes]) -> LongTerm | None:
    """The time-stamp authority and what goes into the PDF with its stamp, as the settings say."""
    settings = case.laboratory.signatures
    if settings.time_stamp is None:
        return None
    stamps = TimeStampAuthority(settings.time_stamp)
    if not settings.long_term:
        return LongTerm(stamps)
    newest = _newest_list(case, keyring)
    anchor = keyring.certificates.get(settings.time_stamp_certificate or "")
    own = {pinned.sha256 for pinned in case.signers.lists}
    foreign = [der for digest, der in sorted(keyring.lists.items()) if digest not in own]
    material = ValidationMaterial(
        certificates=(*chain, *(() if anchor is None else (anchor,))),
        revocation_lists=(*(() if newest is None else (newest,)), *foreign),
    )
    return LongTerm(stamps, material)


def files_of(
    case: SigningCase, signed: SignedReport, chain: Sequence[bytes], keyring: Keyring
) -> dict[str, bytes]:
    """What goes into `sign-off/` with this signature, by name."""
    record, newest = signed.record, _newest_list(case, keyring)
    stem = record.name.removesuffix(".json")
    files = {
        REPORT: signed.pdf,
        record.name: record_bytes(record),
        f"{stem}.pem": pem_text("certificate", *chain),
    }
    if newest is not None:
        files[f"{stem}.crl"] = pem_text("revocation list", newest)
    return files


def entry_details(
    case: SigningCase, signed: SignedReport, files: Mapping[str, bytes], shown: Sequence[str]
) -> dict[str, Json]:
    """What the entry says: the signature's statement, the digest of every file, and what was shown before."""
    record = signed.record
    stated, head = record.statement, case.entries[-1]
    report = file_facts(signed.pdf)
    return {
        "number": record.number,
        "field": stated.field,
        "role": stated.role,
        "person": stated.person,
        "meaning": stated.meaning,
        "certificate": record.certificate,
        "level": record.level,
        "time": rfc3339(stated.time),
        "seal": stated.seal,
        "report": {"bytes": report.length, "sha256": report.sha256},
        "files": {name: sha256_hex(content) for name, content in files.items() if name != REPORT},
        "policy": case.laboratory.signatures.policy,
        "shown": {
            "text": sha256_hex("\n".join(shown).encode("utf-8")),
            "lines": len(shown),
            "trail_seq": head.seq,
            "trail_sha256": sha256_hex(head.line),
        },
    }
