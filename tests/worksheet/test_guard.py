"""No label of a text file is run as a formula, and every label comes back as it was."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from assayfolio.observations.guard import guarded, unguarded

ODD = st.text(st.sampled_from("'=+-@\t\r\na1 "))


@pytest.mark.parametrize("sign", "=+-@\t\r")
def test_a_label_that_would_be_run_gets_an_apostrophe(sign):
    assert guarded(f"{sign}1+2") == f"'{sign}1+2"


@pytest.mark.parametrize("label", ["", "20", "kit-a", "a=b", "'quoted'", " =1", "µg", "°"])
def test_another_label_stays_as_it_is(label):
    assert guarded(label) == label
    assert unguarded(label) == label


@given(st.text() | ODD)
def test_every_label_comes_back(label):
    assert unguarded(guarded(label)) == label


@given(st.text() | ODD)
def test_nothing_guarded_begins_as_a_formula(label):
    assert guarded(label)[:1] not in tuple("=+-@\t\r")


@given(ODD, ODD)
def test_two_labels_never_become_one(first, second):
    assert (guarded(first) == guarded(second)) == (first == second)
