"""Why a signature was not made. Nothing has been changed when one of these is raised."""

from assayfolio.errors import InputError, MachineError


class SigningRefusedError(InputError):
    """The signature may not or cannot be made as asked."""


class WrongPassphraseError(SigningRefusedError):
    """The passphrase or PIN does not open the key."""


class StampUnavailableError(MachineError):
    """The time-stamp authority gave no usable answer; the document is as it was and can be signed again."""


class TokenUnavailableError(MachineError):
    """The token, or the library that talks to it, cannot be used."""
