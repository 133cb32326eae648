"""People of an invented laboratory, and acting under the account of one of them."""

import contextlib
from collections.abc import Iterator
from unittest import mock

from assayfolio.workflow import surroundings
from support.workspaces import Answer, Bench

PEOPLE = """\
people:
  - {person: A. Analyst, account: ann, roles: [author, runner], qualification: TR-014}
  - {person: B. Berg, account: ben, roles: [reviewer]}
  - {person: C. Cole, account: cem, roles: [approver, quality-assurance], qualification: TR-003}
  - {person: D. Dorn, account: dot, roles: [administrator]}
"""
ACCOUNTS = ("ann", "ben", "cem", "dot")
NOBODY = "eve"


@contextlib.contextmanager
def acting(account: str) -> Iterator[None]:
    """Work under `account`, whatever account the test runs under."""
    with mock.patch.object(surroundings, "account_name", return_value=account):
        yield


def as_account(bench: Bench, account: str, *arguments: object) -> Answer:
    """Give a command under `account`."""
    with acting(account):
        return bench(*arguments)


def staffed(bench: Bench, laboratory: str = "") -> Bench:
    """The bench with people, and with further lines in `lab.yaml`, before its first command."""
    (bench.root / "configs/people.yaml").write_text(PEOPLE)
    lab = bench.root / "configs/lab.yaml"
    lab.write_text(lab.read_text() + laboratory)
    return bench


def actions(bench: Bench) -> list[str]:
    """The actions of the trail, in order."""
    return [entry["action"] for entry in bench.entries()]
