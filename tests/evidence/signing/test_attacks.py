"""Whatever is done to a signed report or its records is found, and named."""

import pytest

from evidence.signing.attacks import ATTACKS
from evidence.signing.office import signed_report

IDS = [attack.name for attack in ATTACKS]


def test_there_are_many_attacks_and_each_has_its_own_name():
    assert len(ATTACKS) >= 25
    assert len(set(IDS)) == len(IDS)


def test_the_report_that_is_attacked_is_without_fault():
    assert signed_report().findings().outcome == "passed"


@pytest.mark.parametrize("attack", ATTACKS, ids=IDS)
def test_an_attack_is_found_and_named(attack):
    attacked = attack.make()
    findings = attacked.findings()
    assert findings.outcome == "failed"
    named = [line for line in findings.failures if f"{attack.check}:" in line]
    assert any(attack.words in line for line in named), findings.failures
