"""Three people enrol and sign the demonstration report at a real terminal, typing their passphrases."""

import os
import shutil
import subprocess
import sys
from pathlib import Path

import pexpect
import pytest

from support.signers import AUTHORITY, OUTCOME, PASSPHRASES, SIGNERS
from support.staff import PEOPLE

CHECKOUT = Path(__file__).resolve().parents[2]
PROGRAM = CHECKOUT / "tests/support/at_terminal.py"
RUN = "runs/WHP-101/run-0001"


class Terminal:
    """A person at a terminal of his own, in the folder of the workspace."""

    def __init__(self, root: Path) -> None:
        self.root = root

    def start(self, account: str, *arguments: str) -> pexpect.spawn:
        """Give a command under `account`."""
        known = {**os.environ, "PYTHONPATH": os.pathsep.join(sys.path), "PYTHONWARNINGS": "ignore"}
        command = [str(PROGRAM), account, *arguments]
        return pexpect.spawn(sys.executable, command, cwd=self.root, env=known, encoding="utf-8", timeout=120)

    def give(self, account: str, *arguments: str) -> str:
        """Give a command that asks nothing; return what it printed."""
        return ended(self.start(account, *arguments))


def ended(child: pexpect.spawn, code: int = 0) -> str:
    """What was printed up to the end of the command, which answers `code`."""
    child.expect(pexpect.EOF)
    child.close()
    assert child.exitstatus == code, child.before
    return str(child.before)


def answer(child: pexpect.spawn, question: str, text: str) -> None:
    child.expect_exact(question)
    child.waitnoecho(5) if "assphrase" in question or "again" in question else None
    child.sendline(text)


def enrol(terminal: Terminal, account: str, first: bool) -> None:
    child = terminal.start(account, "signer", "enrol", "--identity-check", "HR file 7")
    answer(child, "New passphrase", PASSPHRASES[account])
    answer(child, "The same again", PASSPHRASES[account])
    assert "to be confirmed by another person" in ended(child)
    child = terminal.start("dot", "signer", "enrol", "--confirm", account)
    child.expect_exact("HR file 7")
    answer(child, "New passphrase" if first else "Passphrase of the certificate authority", AUTHORITY)
    if first:
        answer(child, "The same again", AUTHORITY)
    ended(child)


@pytest.fixture(scope="module")
def terminal(tmp_path_factory: pytest.TempPathFactory) -> Terminal:
    """The demonstration study in a laboratory of four, three of them enrolled, run and reviewed."""
    root = tmp_path_factory.mktemp("terminal").resolve() / "w"
    (root / "configs").mkdir(parents=True)
    shutil.copy(CHECKOUT / "configs/whey-moisture.yaml", root / "configs")
    shutil.copytree(CHECKOUT / "configs/data", root / "configs/data")
    shutil.copy(CHECKOUT / "configs/lab.yaml", root / "configs")
    (root / "configs/people.yaml").write_text(PEOPLE)
    found = Terminal(root)
    for place, account in enumerate(SIGNERS):
        enrol(found, account, first=place == 0)
    found.give("ann", "run", "configs/whey-moisture.yaml")
    found.give("ben", "trail", "--review", RUN, "--outcome", OUTCOME)
    return found


def sign_at(terminal: Terminal, account: str) -> str:
    child = terminal.start(account, "sign", RUN, "--as", SIGNERS[account])
    child.expect_exact("seal")
    child.expect_exact("What your signature means")
    answer(child, "Its number, or nothing to stop", "1")
    answer(child, "Passphrase of", PASSPHRASES[account])
    told = ended(child)
    assert PASSPHRASES[account] not in told
    return told


@pytest.mark.slow
@pytest.mark.needs("pdfsig")
@pytest.mark.requirement("SIGN-1", "SIGN-9")
def test_three_people_sign_at_a_real_terminal_and_no_passphrase_is_shown(terminal: Terminal) -> None:
    for account, role in SIGNERS.items():
        assert f"is signed: {role}" in sign_at(terminal, account)
    assert "approved" in terminal.give("dot", "verify", RUN)
    report = terminal.root / RUN / "sign-off/report.pdf"
    told = subprocess.run(["pdfsig", "-nocert", report], capture_output=True, text=True, check=True).stdout
    assert told.count("Signature is Valid.") == 3


@pytest.mark.slow
@pytest.mark.requirement("SIGN-9", "SIGN-13")
def test_wrong_passphrases_typed_at_a_terminal_lock_the_account(terminal: Terminal, tmp_path: Path) -> None:
    shutil.copytree(terminal.root, tmp_path / "w")
    child = Terminal(tmp_path / "w").start("ben", "signer", "test")
    for _ in range(3):
        answer(child, "Passphrase of", "not the right one")
    assert "wrong 3 times in a row" in ended(child, 2)
