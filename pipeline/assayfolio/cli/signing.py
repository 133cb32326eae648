"""Commands about signatures: sign reports, and who signs with which certificate."""

import json
import sys
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeVar

import click

from assayfolio.canonical import Json
from assayfolio.cli.options import json_option, workspace_option
from assayfolio.cli.outcome import complain, say
from assayfolio.errors import AssayfolioError, ExitCode, InputError

if TYPE_CHECKING:
    from assayfolio.evidence.signers import Deed
    from assayfolio.workflow.dialogue import Dialogue
    from assayfolio.workflow.enrolment import SignerOutcome
    from assayfolio.workflow.sign_refusal import RefusedSignature
    from assayfolio.workflow.signing import SignedFolio
    from assayfolio.workflow.workspace import Workspace

Command = TypeVar("Command", bound=Callable[..., Any])
ROLES = ("author", "reviewer", "approver")
_FILE = click.Path(path_type=Path, dir_okay=False)


def _terminal_dialogue() -> "Dialogue":
    """Ask the person at the terminal. Raises InputError where there is none: nothing signs unattended."""
    from assayfolio.workflow.dialogue import Dialogue

    if not sys.stdin.isatty():
        raise InputError(
            "This needs a person at a terminal: a passphrase is typed, never given as an argument, in a "
            "variable or in a file."
        )

    def secret(what: str) -> str:
        return str(click.prompt(what, hide_input=True, default="", show_default=False, err=True))

    def choose(question: str, answers: Sequence[str]) -> int | None:
        complain(f"{question}:")
        for place, answer in enumerate(answers, start=1):
            complain(f"  {place}  {answer}")
        given = str(click.prompt("Its number, or nothing to stop", default="", show_default=False, err=True))
        return int(given) - 1 if given in {str(place + 1) for place in range(len(answers))} else None

    return Dialogue(complain, secret, choose)


@click.command(
    epilog="\b\nExamples:\n  assayfolio sign runs/WHP-101/run-0001 --as author\n"
    "  assayfolio sign runs/WHP-101/protocol-0001 --as approver\n"
    "  assayfolio sign runs/WHP-101/run-0001 --as reviewer --refuse \\\n"
    '    --reason "Level B has two values from the day before the balance was serviced"\n\n'
    "Exit code 2: refused; nothing was signed, and the attempt is in the audit trail."
)
@click.argument("folios", metavar="RUN...", nargs=-1, required=True, type=click.Path(path_type=Path))
@workspace_option
@click.option("--as", "role", required=True, type=click.Choice(ROLES), help="The role in which you sign.")
@click.option("--refuse", is_flag=True, help="Record that you do not sign, with the reason.")
@click.option("--reason", metavar="TEXT", help="Why you do not sign; goes with --refuse.")
@json_option
def sign(
    folios: tuple[Path, ...],
    named_workspace: Path | None,
    role: str,
    refuse: bool,
    reason: str | None,
    as_json: bool,
) -> int:
    """Sign the report of a run, or a protocol.

    RUN is a folio. Shows what is being signed (verdicts, exclusions, deviations, exceptions of the audit
    trail, digests) after folio, trail, role and turn have been checked; asks what the signature means, from
    the plan's own words, and for the passphrase; then adds the signature to the report in sign-off/. Nothing
    sealed is touched. Several folios are listed first, and each is shown and signed by itself.
    """
    from assayfolio.workflow.workspace import find_workspace

    if refuse != (reason is not None):
        raise InputError("A refusal is recorded with both --refuse and --reason TEXT.")
    workspace = find_workspace(named_workspace, folios[0])
    done: list[SignedFolio | RefusedSignature] = []
    if len(folios) > 1:
        for place, folio in enumerate(folios, start=1):
            complain(f"{place:>3} of {len(folios)}  {folio}")
    worst = ExitCode.DONE
    for folio in folios:
        try:
            done.append(_sign_one(workspace, folio, role, reason))
        except AssayfolioError as error:
            if len(folios) == 1:
                raise
            complain(f"{folio}: {error}")
            worst = max(worst, error.exit_code)
    if as_json:
        document: list[Mapping[str, Json]] = [one.document() for one in done]
        say(json.dumps(document if len(folios) > 1 else document[0], ensure_ascii=False, indent=1))
    else:
        for one in done:
            _say_lines(one.lines())
        if len(folios) > 1:
            complain(f"{len(done)} of {len(folios)} done")
    return int(worst)


def _sign_one(
    workspace: "Workspace", folio: Path, role: str, reason: str | None
) -> "SignedFolio | RefusedSignature":
    from assayfolio.workflow.sign_refusal import refuse_to_sign
    from assayfolio.workflow.signing import sign_folio

    if reason is not None:
        return refuse_to_sign(workspace, folio, role, reason)
    return sign_folio(workspace, folio, role, _terminal_dialogue())


@click.group(epilog="\b\nExamples:\n  assayfolio signer enrol\n  assayfolio signer list")
def signer() -> None:
    """Who signs here, with which certificate.

    A person proposes his own certificate under his own account and chooses his own passphrase; an
    administrator or quality assurance confirms it, with the passphrase of the laboratory's certificate
    authority. Neither can do the other's part. A laboratory of one person does both at once.
    """


def _identity_options(command: Command) -> Command:
    """Who enrols, and the key that he has already."""
    for option in (
        click.option("--anchor", type=_FILE, metavar="FILE", help="Certificates above the person's (PEM)."),
        click.option("--key-label", metavar="TEXT", help="The label of key and certificate on the token."),
        click.option("--token-label", metavar="TEXT", help="The token's label."),
        click.option(
            "--token", type=_FILE, metavar="MODULE", help="The PKCS#11 library of a token with the key."
        ),
        click.option("--key", type=_FILE, metavar="FILE", help="A key that you have (PKCS#12 or PEM)."),
        click.option("--identity-check", metavar="REF", help="How your identity was checked: a reference."),
        click.option("--person", metavar="NAME", help="Your name, where the laboratory lists no people."),
        click.option("--confirm", metavar="ACCOUNT", help="Confirm what this account has proposed."),
    ):
        command = option(command)
    return command


@signer.command(epilog="\b\nExamples:\n  assayfolio signer enrol\n  assayfolio signer enrol --confirm ann")
@_identity_options
@workspace_option
@json_option
def enrol(named_workspace: Path | None, confirm: str | None, as_json: bool, **options: Any) -> None:
    """Propose a certificate of your own; or confirm one that somebody has proposed.

    Makes a key under a passphrase that only you know, and a request for a certificate of the laboratory's
    authority; or takes a key with its certificate that you have in a file or on a token.
    """
    _enrol_or_confirm("enrol", named_workspace, confirm, as_json, options)


@signer.command(epilog="\b\nExamples:\n  assayfolio signer renew\n  assayfolio signer renew --confirm ann")
@_identity_options
@workspace_option
@json_option
def renew(named_workspace: Path | None, confirm: str | None, as_json: bool, **options: Any) -> None:
    """Propose a new certificate in the place of your old one; or confirm one.

    What the old one signed stays valid.
    """
    _enrol_or_confirm("renew", named_workspace, confirm, as_json, options)


def _enrol_or_confirm(
    deed: "Deed", named_workspace: Path | None, confirm: str | None, as_json: bool, options: Mapping[str, Any]
) -> None:
    from assayfolio.workflow.workspace import find_workspace

    workspace = find_workspace(named_workspace, Path())
    if confirm is not None and any(option is not None for option in options.values()):
        raise InputError("--confirm takes everything from the proposal; leave the other options out.")
    dialogue = _terminal_dialogue()
    if confirm is None:
        outcomes = _propose(workspace, deed, options, dialogue)
    else:
        outcomes = [_confirm(workspace, confirm, deed, dialogue)]
    _tell(outcomes, as_json)


def _propose(
    workspace: "Workspace", deed: "Deed", options: Mapping[str, Any], dialogue: "Dialogue"
) -> "list[SignerOutcome]":
    from assayfolio.evidence.signers import KeyPlace
    from assayfolio.workflow.enrolment import Asked, propose_enrolment
    from assayfolio.workflow.key_sources import KeySource

    token, labels = options["token"], (options["token_label"], options["key_label"])
    both = options["key"] is not None and token is not None
    if both or any((label is None) != (token is None) for label in labels):
        raise InputError("Give --key FILE, or --token MODULE with --token-label and --key-label, or neither.")
    place = None if token is None else KeyPlace(None, str(token), *labels)
    source = KeySource(options["key"], place, options["anchor"])
    asked = Asked(options["person"], options["identity_check"])
    outcome = propose_enrolment(workspace, deed, asked, source, dialogue)
    return [outcome, *_at_once(workspace, outcome, deed, dialogue)]


def _at_once(
    workspace: "Workspace", outcome: "SignerOutcome", deed: "Deed", dialogue: "Dialogue"
) -> "list[SignerOutcome]":
    """The confirmation too, where the laboratory has one person."""
    from assayfolio.workflow.settings_files import standing_settings

    if not standing_settings(workspace).laboratory.one_person:
        return []
    return [_confirm(workspace, outcome.account, deed, dialogue)]


def _confirm(workspace: "Workspace", account: str, deed: "Deed", dialogue: "Dialogue") -> "SignerOutcome":
    from assayfolio.workflow.signer_confirmation import confirm_proposal

    return confirm_proposal(workspace, account, deed, dialogue)


@signer.command(
    epilog="\b\nExamples:\n"
    '  assayfolio signer revoke ann --cause key-lost --reason "Notebook computer stolen on 4 March"\n'
    "  assayfolio signer revoke ann --confirm"
)
@click.argument("account")
@workspace_option
@click.option(
    "--cause",
    type=click.Choice(("key-lost", "left", "superseded", "no-longer-signs")),
    help="What the revocation list says.",
)
@click.option("--reason", metavar="TEXT", help="What happened.")
@click.option("--confirm", is_flag=True, help="Confirm what another person has proposed.")
@json_option
def revoke(
    account: str,
    named_workspace: Path | None,
    cause: str | None,
    reason: str | None,
    confirm: bool,
    as_json: bool,
) -> None:
    """Withdraw the certificate of ACCOUNT.

    It signs nothing from the proposal on; the revocation list is made when a second person confirms. Your
    own certificate you may always propose to withdraw.
    """
    from assayfolio.workflow.revocation import propose_revocation
    from assayfolio.workflow.workspace import find_workspace

    workspace = find_workspace(named_workspace, Path())
    if confirm == (cause is not None or reason is not None):
        raise InputError("Propose with both --cause and --reason, or confirm with --confirm alone.")
    if confirm:
        outcomes = [_confirm(workspace, account, "revoke", _terminal_dialogue())]
    elif cause is None or reason is None:
        raise InputError("Withdrawing a certificate needs both --cause and --reason.")
    else:
        outcome = propose_revocation(workspace, account, cause, reason)
        outcomes = [outcome]
        if sys.stdin.isatty():
            outcomes += _at_once(workspace, outcome, "revoke", _terminal_dialogue())
    _tell(outcomes, as_json)


@signer.command(name="list")
@workspace_option
@json_option
def list_signers(named_workspace: Path | None, as_json: bool) -> None:
    """Show everybody who signs or signed, and what waits to be confirmed."""
    from assayfolio.cli.note import note_reading
    from assayfolio.workflow.signer_list import signer_list
    from assayfolio.workflow.workspace import find_workspace

    note_reading(named_workspace, "signer list", [])
    found = signer_list(find_workspace(named_workspace, Path()))
    if as_json:
        say(json.dumps(found.document(), ensure_ascii=False, indent=1))
    else:
        _say_lines(found.lines())


@signer.command(name="test")
@workspace_option
@json_option
def test_key(named_workspace: Path | None, as_json: bool) -> None:
    """Test your key: it signs a probe, and that is entered in the audit trail."""
    from assayfolio.workflow.key_probe import check_key
    from assayfolio.workflow.workspace import find_workspace

    _tell([check_key(find_workspace(named_workspace, Path()), _terminal_dialogue())], as_json)


def _tell(outcomes: "Sequence[SignerOutcome]", as_json: bool) -> None:
    if as_json:
        say(json.dumps(outcomes[-1].document(), ensure_ascii=False, indent=1))
        return
    for outcome in outcomes:
        _say_lines(outcome.lines())


def _say_lines(lines: Sequence[str]) -> None:
    for line in lines:
        say(line)
