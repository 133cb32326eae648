"""Whose account is recorded: that of the process, or of the person whom a service's account works for."""

import os
import pwd

import pytest

from assayfolio.workflow import surroundings


@pytest.fixture
def process(monkeypatch, tmp_path):
    """Set the user number of the process and what the kernel keeps of the login."""

    def setting(uid, login):
        kept = tmp_path / "loginuid"
        if login is not None:
            kept.write_text(str(login))
        monkeypatch.setattr(surroundings, "_LOGIN_UID", kept)
        monkeypatch.setattr(os, "geteuid", lambda: uid)
        monkeypatch.setattr(
            pwd, "getpwuid", lambda number: pwd.struct_passwd((f"user{number}", "x", number, 0, "", "/", ""))
        )

    return setting


@pytest.mark.parametrize(
    ("uid", "login", "account"),
    [
        (1000, 1000, "user1000"),
        (1001, 1000, "user1001"),  # a person's own account, whoever changed to it
        (0, 1000, "user0"),
        (110, 1000, "user1000"),  # a service's account works for the person who logged in
        (110, 2**32 - 1, "user110"),  # a scheduled job: nobody logged in
        (110, None, "user110"),  # the kernel keeps no login
        (110, "", "user110"),
    ],
)
def test_the_account_is_the_persons(process, uid, login, account):
    process(uid, login)
    assert surroundings.account_name() == account


def test_an_account_without_a_name_is_called_by_its_number(process, monkeypatch):
    process(1234, None)
    monkeypatch.setattr(pwd, "getpwuid", lambda number: {}[number])
    assert surroundings.account_name() == "uid-1234"
