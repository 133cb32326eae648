"""Signing in tests: what a person types is prepared, everything else is the program itself."""

import atexit
import contextlib
import shutil
import tempfile
from collections.abc import Iterator, Sequence
from functools import cache
from pathlib import Path
from unittest import mock

from assayfolio.cli import signing
from assayfolio.workflow.dialogue import Dialogue
from support.staff import acting, staffed
from support.workspaces import STUDY, Answer, Bench

SIGNED_OFF = (
    STUDY + "  - {role: reviewer, meaning: I checked it}\n" + "  - {role: approver, meaning: I approve it}\n"
)
PASSPHRASES = {
    "ann": "nine wet herons walk by",
    "ben": "copper kettles in May sun",
    "cem": "three owls under one roof",
    "dot": "a slow train to the coast",
}
AUTHORITY = "the vault has two brass doors"
SIGNERS = {"ann": "author", "ben": "reviewer", "cem": "approver"}
OUTCOME = "Entries read up to the end; no exception that was not explained"


class Typist:
    """Gives what was prepared, in its order, and keeps what was shown and asked."""

    def __init__(self, secrets: Sequence[str], meaning: int | None = 0) -> None:
        self.secrets, self.meaning = list(secrets), meaning
        self.told: list[str] = []
        self.asked: list[str] = []
        self.offered: list[str] = []

    def dialogue(self) -> Dialogue:
        """What the commands talk to."""
        return Dialogue(self.told.append, self._secret, self._choose)

    def _secret(self, what: str) -> str:
        self.asked.append(what)
        assert self.secrets, f"asked for more than was prepared: {what}"
        return self.secrets.pop(0)

    def _choose(self, question: str, answers: Sequence[str]) -> int | None:
        self.offered = list(answers)
        return self.meaning


@contextlib.contextmanager
def typing(account: str, typist: Typist) -> Iterator[None]:
    """Sit at the terminal under `account`."""
    with acting(account), mock.patch.object(signing, "_terminal_dialogue", typist.dialogue):
        yield


def type_as(
    bench: Bench, account: str, *arguments: object, secrets: Sequence[str] = (), meaning: int | None = 0
) -> tuple[Answer, Typist]:
    """Give a command under `account`, typing `secrets` when asked."""
    typist = Typist(secrets, meaning)
    with typing(account, typist):
        return bench(*arguments), typist


def enrol(bench: Bench, account: str, by: str = "dot", deed: str = "enrol") -> None:
    """Have `account` enrolled: it proposes, `by` confirms."""
    own = PASSPHRASES[account]
    answer, _ = type_as(bench, account, "signer", deed, "--identity-check", "HR-7", secrets=[own, own])
    assert answer.code == 0, answer.err
    confirm(bench, account, by, deed)


def confirm(bench: Bench, account: str, by: str = "dot", deed: str = "enrol") -> None:
    """Confirm what was proposed for `account`; the first time, the authority is founded."""
    founded = any(entry["action"] == "authority-founded" for entry in bench.entries())
    secrets = [AUTHORITY] if founded else [AUTHORITY, AUTHORITY]
    arguments = (account, "--confirm") if deed == "revoke" else ("--confirm", account)
    answer, typist = type_as(bench, by, "signer", deed, *arguments, secrets=secrets)
    assert answer.code == 0, answer.err
    assert typist.secrets == []


def laboratory_that_signs(root, laboratory: str = "", study: str = SIGNED_OFF) -> Bench:
    """A workspace with people, each of whom can sign in his role; `dot` cannot.

    Enrolling takes seconds, so it is done once for all tests of a process, and the result copied.
    """
    return copied(_enrolled_once(laboratory, study), root)


@cache
def _enrolled_once(laboratory: str, study: str) -> Bench:
    folder = tempfile.mkdtemp()
    atexit.register(shutil.rmtree, folder, ignore_errors=True)
    return new_laboratory(Path(folder).resolve() / "w", laboratory, study)


def new_laboratory(root, laboratory: str = "", study: str = SIGNED_OFF) -> Bench:
    """The same with an authority of its own."""
    bench = staffed(Bench(root, study), laboratory)
    for account in SIGNERS:
        enrol(bench, account)
    return bench


def sign(
    bench: Bench, account: str, *folios: object, role: str | None = None, secrets: Sequence[str] | None = None
) -> Answer:
    """Have `account` sign in its role."""
    given = [PASSPHRASES[account]] * len(folios) if secrets is None else secrets
    answer, _ = type_as(bench, account, "sign", *folios, "--as", role or SIGNERS[account], secrets=given)
    return answer


def review(bench: Bench, folio: object, account: str = "ben") -> None:
    """Have the trail of a run reviewed."""
    with acting(account):
        answer = bench("trail", "--review", folio, "--outcome", OUTCOME)
    assert answer.code == 0, answer.err


def sign_by_all(bench: Bench, folio: object) -> None:
    """Have a run reviewed and signed by everybody."""
    review(bench, folio)
    for account in SIGNERS:
        answer = sign(bench, account, folio)
        assert answer.code == 0, answer.err


def copied(bench: Bench, root) -> Bench:
    """The whole workspace at another place, to go on with."""
    shutil.copytree(bench.root, root)
    return bench_at(root)


def bench_at(root) -> Bench:
    """A bench on a workspace that is there already."""
    bench = object.__new__(Bench)
    bench.root, bench.runs = root, root / "runs"
    bench.study, bench.data = root / "configs/study.yaml", root / "configs/data/values.csv"
    return bench


def bytes_of(bench: Bench) -> dict[str, bytes]:
    """Every file of the workspace but the trail and what belongs to it."""
    return {
        path.relative_to(bench.root).as_posix(): path.read_bytes()
        for path in sorted(bench.root.rglob("*"))
        if path.is_file() and not path.name.startswith("audit-trail") and not path.name.endswith(".lock")
    }


def checks(bench: Bench, number: str, *arguments: object) -> list[dict]:
    """The outcomes of the checks with this number, as `verify` gives them."""
    found = bench("verify", *arguments, "--json").document["checks"]
    return [each for each in found if each["number"] == number]
