"""Whatever is done to a signed report or its records is found, and named."""

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from evidence.signing.attacks import ATTACKS
from evidence.signing.office import signed_report

IDS = [attack.name for attack in ATTACKS]


def test_there_are_many_attacks_and_each_has_its_own_name():
    assert len(ATTACKS) >= 25
    assert len(set(IDS)) == len(IDS)


def test_the_report_that_is_attacked_is_without_fault():
    assert signed_report().findings().outcome == "passed"


@pytest.mark.parametrize("attack", ATTACKS, ids=IDS)
@pytest.mark.requirement("SIGN-3")
def test_an_attack_is_found_and_named(attack):
    attacked = attack.make()
    findings = attacked.findings()
    assert findings.outcome == "failed"
    named = [line for line in findings.failures if f"{attack.check}:" in line]
    assert any(attack.words in line for line in named), findings.failures


@settings(max_examples=40)
@given(st.data())
@pytest.mark.requirement("SIGN-3")
def test_any_single_byte_changed_after_the_sealed_report_is_found(data):
    pdf, start = signed_report().report.pdf, len(signed_report().report.unsigned)
    place = data.draw(st.integers(start, len(pdf) - 1))
    byte = data.draw(st.integers(0, 255).filter(lambda value: value != pdf[place]))
    attacked = signed_report().with_pdf(pdf[:place] + bytes([byte]) + pdf[place + 1 :])
    assert attacked.findings().outcome == "failed"


@settings(max_examples=40)
@given(st.data())
def test_a_report_cut_anywhere_is_found(data):
    pdf = signed_report().report.pdf
    length = data.draw(st.integers(0, len(pdf) - 1))
    assert signed_report().with_pdf(pdf[:length]).findings().outcome == "failed"
