"""Signing with a key on a token, through its PKCS#11 module (PKCS #11 v2.40; from memory).

The key never leaves the token; the PIN is asked for at each signing and kept nowhere.
"""

from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from assayfolio.evidence.signing.refusals import (
    SigningRefusedError,
    TokenUnavailableError,
    WrongPassphraseError,
)


@dataclass(frozen=True, slots=True)
class TokenPlace:
    """Where a key lies: the module's file, the token's label, and the label of key and certificate on it."""

    module: Path
    token: str
    label: str


@dataclass(frozen=True, slots=True)
class TokenIdentity:
    """An identity on an open token; usable inside `open_token` only."""

    certificate: bytes
    chain: tuple[bytes, ...]
    session: Any
    label: str

    def signer(self) -> Any:
        """The signing library's object that has the token sign."""
        from asn1crypto.x509 import Certificate
        from pyhanko.sign.pkcs11 import PKCS11Signer

        make: Any = PKCS11Signer
        return make(
            self.session,
            signing_cert=Certificate.load(self.certificate),
            key_label=self.label,
            use_raw_mechanism=True,  # every token signs a digest; not every one makes it
            ca_chain=[Certificate.load(der) for der in self.chain],
        )


@contextmanager
def open_token(place: TokenPlace, pin: str, chain: tuple[bytes, ...] = ()) -> Iterator[TokenIdentity]:
    """The identity at `place`, for as long as the block lasts.

    Raises WrongPassphraseError for a wrong or locked PIN, SigningRefusedError where the token does not hold
    one certificate and one key of that label, TokenUnavailableError where module or token cannot be reached.
    """
    try:
        import pkcs11
        from pkcs11 import exceptions
    except ImportError as error:
        raise TokenUnavailableError("the package python-pkcs11, which talks to tokens, is missing") from error
    refused = (exceptions.PinIncorrect, exceptions.PinLocked, exceptions.PinLenRange, exceptions.PinInvalid)
    try:
        library = pkcs11.lib(str(place.module))
        session = library.get_token(token_label=place.token).open(user_pin=pin)
    except refused as error:
        raise WrongPassphraseError(f"the token {place.token} does not take this PIN") from error
    except (exceptions.PKCS11Error, RuntimeError, OSError) as error:
        reason = str(error) or type(error).__name__
        raise TokenUnavailableError(f"the token {place.token} cannot be used: {reason}") from error
    try:
        with session:
            yield TokenIdentity(_certificate(session, place), chain, session, place.label)
    except exceptions.PKCS11Error as error:
        reason = str(error) or type(error).__name__
        raise TokenUnavailableError(f"the token {place.token} failed while signing: {reason}") from error


def _certificate(session: Any, place: TokenPlace) -> bytes:
    from pkcs11 import Attribute, ObjectClass

    wanted = {Attribute.LABEL: place.label}
    found = list(session.get_objects({Attribute.CLASS: ObjectClass.CERTIFICATE, **wanted}))
    keys = list(session.get_objects({Attribute.CLASS: ObjectClass.PRIVATE_KEY, **wanted}))
    if len(found) != 1 or len(keys) != 1:
        raise SigningRefusedError(
            f"the token {place.token} holds {len(found)} certificates and {len(keys)} keys labelled "
            f"{place.label}; one of each is needed"
        )
    return bytes(found[0][Attribute.VALUE])
