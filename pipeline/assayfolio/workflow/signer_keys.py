"""Opening the key of a person or of the authority: wrong passphrases are entered, the third locks.

Nothing that was opened is kept: each signature asks for the passphrase anew.
"""

from collections.abc import Callable, Sequence
from contextlib import ExitStack
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import TypeVar

from assayfolio.canonical import Json
from assayfolio.errors import InputError
from assayfolio.evidence.entries import TrailEntry
from assayfolio.evidence.files import explained, make_folder, read_regular, sync_folder, write_new
from assayfolio.evidence.keyring import SIGNERS_FOLDER
from assayfolio.evidence.signers import (
    PASSPHRASE_WRONG,
    SIGNING_LOCKED,
    WRONG_IN_ROW,
    Enrolled,
    KeyPlace,
    locked_until,
    signer_subject,
    wrong_in_row,
)
from assayfolio.evidence.signing.identities import (
    KeyIdentity,
    SigningIdentity,
    fingerprint,
    open_identity,
)
from assayfolio.evidence.signing.refusals import SigningRefusedError, WrongPassphraseError
from assayfolio.evidence.signing.token import TokenPlace, open_token
from assayfolio.workflow import surroundings
from assayfolio.workflow.book import trail_book
from assayfolio.workflow.dialogue import Dialogue
from assayfolio.workflow.settings_files import standing_settings
from assayfolio.workflow.workspace import Workspace

Opened = TypeVar("Opened")
PRIVATE, SHARED = 0o600, 0o640


class SigningLockedError(InputError):
    """Too many wrong passphrases in a row: nobody signs under this account for a while."""


def moment_now() -> datetime:
    """The present time by this computer's clock, in UTC."""
    return datetime.fromisoformat(surroundings.utc_now())


def why_locked(entries: Sequence[TrailEntry], account: str) -> str | None:
    """Why nobody signs under `account` now; None where he may."""
    until = locked_until(entries, account)
    if until is None or moment_now() >= until:
        return None
    return (
        f"{WRONG_IN_ROW} wrong passphrases in a row were given under {account}; it signs again from "
        f"{until:%Y-%m-%d %H:%M:%S} UTC on"
    )


def opened(
    workspace: Workspace, dialogue: Dialogue, what: str, command: str, open_with: Callable[[str], Opened]
) -> Opened:
    """What `open_with` opens with the passphrase that is asked for.

    Every wrong one is entered as `passphrase-wrong`; the third in a row as `signing-locked` too, and then
    SigningLockedError is raised.
    """
    while True:
        secret = dialogue.secret(f"Passphrase of {what}")
        try:
            return open_with(secret)
        except WrongPassphraseError as error:
            dialogue.tell(_count_wrong(workspace, what, command, str(error)))


def _count_wrong(workspace: Workspace, what: str, command: str, why: str) -> str:
    """Enter a wrong passphrase; return what to say of it. Raises SigningLockedError for the third."""
    laboratory = standing_settings(workspace).laboratory
    account = surroundings.account_name()
    with trail_book(workspace, laboratory.wait_seconds) as trail:
        count = wrong_in_row(trail.entries, account) + 1
        details: dict[str, Json] = {"command": command, "key": what, "in_row": count, "urgent": True}
        trail.append(PASSPHRASE_WRONG, signer_subject(account), why, details)
        if count < WRONG_IN_ROW:
            return f"The passphrase is wrong ({count} of {WRONG_IN_ROW} in a row); that was entered."
        minutes = laboratory.signatures.lock_minutes
        until = moment_now() + timedelta(minutes=minutes)
        stated = until.astimezone(UTC).strftime("%Y-%m-%dT%H:%M:%SZ")
        reason = f"{count} wrong passphrases in a row"
        lock: dict[str, Json] = {"until": stated, "minutes": minutes, "command": command, "urgent": True}
        trail.append(SIGNING_LOCKED, signer_subject(account), reason, lock)
    raise SigningLockedError(
        f"The passphrase was wrong {count} times in a row. Nobody signs under {account} before "
        f"{until:%Y-%m-%d %H:%M:%S} UTC; that was entered in the audit trail as urgent. If it was not you, "
        "tell your administrator now, and have the certificate withdrawn: "
        f"assayfolio signer revoke {account}."
    )


def person_identity(
    place: Path, enrolled: Enrolled, chain: tuple[bytes, ...], held: ExitStack, secret: str
) -> SigningIdentity:
    """The identity of an enrolled person, opened with `secret`; `place` is the signers' folder.

    `chain` is the enrolled certificate with those above it. Raises WrongPassphraseError for a wrong secret,
    SigningRefusedError where the key does not belong to the enrolled certificate.
    """
    certificate, above = chain[0], chain[1:]
    if enrolled.key.file is not None:
        own = open_identity(read_signer_file(place, enrolled.key.file), secret)
        _require_same_key(own.certificate, certificate, enrolled)
        return KeyIdentity(certificate, above, own.key)
    token = held.enter_context(open_token(token_place(enrolled.key), secret, above))
    if fingerprint(token.certificate) != enrolled.certificate:
        raise SigningRefusedError(f"the token does not hold the certificate enrolled for {enrolled.person}")
    return token


def token_place(key: KeyPlace) -> TokenPlace:
    """Where a key on a token lies."""
    assert key.module is not None, "a token has a module"
    assert key.token is not None, "a token has a label"
    assert key.label is not None, "a key on a token has a label"
    return TokenPlace(Path(key.module), key.token, key.label)


def _require_same_key(own: bytes, enrolled_certificate: bytes, enrolled: Enrolled) -> None:
    from cryptography import x509

    keys = [x509.load_der_x509_certificate(der).public_key() for der in (own, enrolled_certificate)]
    if keys[0] != keys[1]:
        raise SigningRefusedError(
            f"the key in {SIGNERS_FOLDER}/{enrolled.key.file} is not the one that was enrolled for "
            f"{enrolled.person}: the file was replaced"
        )


def read_signer_file(folder: Path, name: str) -> bytes:
    """A file of the signers' folder. Raises InputError where it is not there or no plain file."""
    try:
        return read_regular(folder / name)
    except OSError as error:
        raise InputError(f"{SIGNERS_FOLDER}/{name} cannot be read: {error.strerror}.") from error


def write_signer_file(workspace: Workspace, name: str, content: bytes, mode: int = SHARED) -> None:
    """A new file in the signers' folder; the same bytes under the same name are left as they are."""
    folder = workspace.root / SIGNERS_FOLDER
    make_folder(folder)
    path = folder / name
    with explained("look at the file", path):
        there = path.read_bytes() if path.is_file() and not path.is_symlink() else None
    if there != content:
        write_new(path, content, mode)
        sync_folder(folder)
