"""What a command about signatures asks of the person before it; the command line says how."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from assayfolio.errors import InputError
from assayfolio.evidence.signing.identities import passphrase_faults

_TRIES = 3


@dataclass(frozen=True, slots=True)
class Dialogue:
    """`tell` shows a line, `secret` asks for a passphrase that is not shown.

    `choose` shows numbered answers to a question and gives the place of the one that was chosen, None where
    the person chooses none.
    """

    tell: Callable[[str], None]
    secret: Callable[[str], str]
    choose: Callable[[str, Sequence[str]], int | None]


def new_passphrase(dialogue: Dialogue, what: str, names: Sequence[str]) -> str:
    """A passphrase that was typed twice alike and is strong enough for `names`.

    Raises InputError after three that will not do.
    """
    for _ in range(_TRIES):
        first = dialogue.secret(f"New passphrase for {what}")
        faults = passphrase_faults(first, names)
        if faults:
            dialogue.tell(f"This passphrase will not do: {'; '.join(faults)}.")
        elif dialogue.secret("The same again") != first:
            dialogue.tell("The two are not the same.")
        else:
            return first
    raise InputError("No passphrase was chosen; nothing was entered.")
