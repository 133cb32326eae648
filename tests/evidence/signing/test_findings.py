"""What a check says where nothing is wrong but not everything can be known."""

from dataclasses import replace
from datetime import timedelta

import pytest

from assayfolio.evidence.signing.authority import Revocation
from assayfolio.evidence.signing.identities import certificate_facts
from assayfolio.evidence.signing.trust import Trust
from evidence.signing.attacks import revoked
from evidence.signing.office import CHECKED, office, signed_in_turn, signed_report, statement


def found(findings, number: int, check: str):
    return next(each for each in findings.signatures[number - 1].findings if each.check == check)


def believing(**trust):
    held = signed_report()
    return replace(held, trust=replace(held.trust, **trust)).findings()


def test_a_check_without_anchors_trail_and_lists_says_so_and_fails_nothing():
    findings = replace(signed_report(), trust=Trust()).findings()
    assert findings.outcome == "not checkable"
    assert findings.failures == ()
    unknown = {each.check for each in findings.signatures[0].findings if each.outcome == "not checkable"}
    assert unknown == {"certificate trusted", "certificate enrolled", "not revoked when signed"}


def test_the_certificates_that_travel_with_the_report_are_not_believed_for_that():
    assert found(believing(anchors=()), 1, "certificate trusted").outcome == "not checkable"


def test_without_a_stamp_the_time_is_called_the_signers_clock():
    assert found(signed_report().findings(), 2, "time").words.endswith("by the signer's clock; no time stamp")


def test_without_any_list_revocation_is_not_checkable():
    assert found(believing(revocation_lists=()), 1, "not revoked when signed").outcome == "not checkable"


def test_a_list_that_had_run_out_when_it_was_signed_says_nothing():
    from assayfolio.evidence.signing.authority import revocation_list
    from evidence.signing.office import FOUNDED

    old = revocation_list(office().authority, 1, (), FOUNDED, 30)
    outcome = found(believing(revocation_lists=(old,)), 1, "not revoked when signed")
    assert outcome.outcome == "not checkable"
    assert "had run out" in outcome.words


def test_a_later_revocation_leaves_the_order_unproven_by_the_signers_clock():
    outcome = found(revoked(24).findings(), 3, "not revoked when signed")
    assert outcome.outcome == "not checkable"
    assert "not proven" in outcome.words


@pytest.mark.requirement("SIGN-12")
def test_a_witnessed_trail_proves_that_a_signature_came_before_the_revocation():
    seen = statement("approver").time + timedelta(minutes=5)
    findings = revoked(24, proven_by={3: seen}).findings()
    assert findings.outcome == "passed"
    assert "which is proven" in found(findings, 3, "not revoked when signed").words


def test_the_revocation_of_one_person_leaves_the_others_alone():
    findings = revoked(-48).findings()
    assert found(findings, 1, "not revoked when signed").outcome == "passed"
    assert found(findings, 3, "not revoked when signed").outcome == "failed"


def test_the_newest_of_several_lists_counts_in_any_order():
    serial = certificate_facts(office().people["author"].certificate).serial
    newer = office().list_of(
        2, Revocation(serial, statement("author").time - timedelta(days=2), "superseded")
    )
    for lists in ((office().list_of(1), newer), (newer, office().list_of(1))):
        assert found(believing(revocation_lists=lists), 1, "not revoked when signed").outcome == "failed"


@pytest.mark.requirement("SIGN-11")
def test_a_certificate_that_runs_out_later_does_not_matter():
    late = replace(signed_report(), when=CHECKED.replace(year=2044))
    assert late.findings().outcome == "passed"


@pytest.mark.parametrize("count", [0, 1, 2])
def test_a_report_that_not_everybody_has_signed_yet_passes(count):
    roles = ("author", "reviewer", "approver")[:count]
    findings = signed_in_turn(*roles).findings()
    assert findings.outcome == "passed"
    assert [each.field for each in findings.signatures] == list(roles)
