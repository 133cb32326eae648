"""The protocol on paper, and what a report says of registration, amendments and earlier plans."""

import subprocess
from dataclasses import replace

import pytest

from assayfolio.evaluation.apply import evaluate
from assayfolio.evaluation.registered import with_registration
from assayfolio.planning.plan_power import plan_power
from assayfolio.report.facts import EarlierResult, ProtocolVersion, RegistrationFacts
from assayfolio.report.protocol import render_protocol
from assayfolio.report.protocol_facts import ProtocolFacts, ProtocolInput
from assayfolio.report.render import render_report
from assayfolio.study.canonical_plan import plan_digest
from assayfolio.study.reading import read_study
from assayfolio.worksheet.rows import order_digest, planned_rows
from pdfa.verapdf import validate
from report.samples import LABORATORY, balanced

pytestmark = pytest.mark.needs("pdftotext")

PLAN = """\
study: WTR-017
title: Nitrate in drinking water by four methods
purpose: To find out whether two kits give the same mean as ion chromatography.
data:
  file: data/nitrate.csv
  response: nitrate
  factor: method
  unit: mg/L
  levels: [ion-chromatography, kit-a, kit-b]
  replicates: 4
  missing: omit
  below-limit: half-limit
alpha: 0.05
comparisons:
  - {name: each kit against ion chromatography, against: ion-chromatography, adjust: dunnett}
  - name: kits
    contrasts:
      - {name: both, weights: {kit-a: 1/2, kit-b: 1/2, ion-chromatography: -1}}
      - {name: one another, weights: {kit-a: 1, kit-b: -1}}
    adjust: holm
equivalence:
  - name: kits as good
    against: ion-chromatography
    margin: 0.5
    margin-source: method specification 4.2
    adjust: holm
outliers: {test: grubbs}
power: {difference: 0.5, sigma: 0.3, target: 0.9}
criteria:
  - {quantity: largest-difference, at-most: 0.6, unit: mg/L}
worksheet: {seed: 11, item: W}
sign-off:
  - {role: author, meaning: I performed this analysis as planned}
  - {role: approver, meaning: I approve this report}
"""


def pages(pdf: bytes) -> list[str]:
    ended = subprocess.run(
        ["pdftotext", "-enc", "UTF-8", "-", "-"], input=pdf, capture_output=True, check=True
    )
    texts = [" ".join(page.split()) for page in ended.stdout.decode().split("\f")]
    spaced = [text.replace("\u202f", " ").replace("\u00a0", " ").replace("\u2212", "-") for text in texts]
    return [text for text in spaced if text]


def protocol(**changes) -> ProtocolInput:
    study = read_study(PLAN.encode(), "configs/nitrate.yaml")
    rows = planned_rows(study)
    power, gaps = plan_power(study)
    facts = ProtocolFacts(
        number=1,
        started_utc="2031-03-04T09:58:31Z",
        started_local="2031-03-04T10:58:31+01:00",
        actor="j.meadow",
        host="bench-4",
        definition_path="configs/nitrate.yaml",
        definition_sha256="3c" * 32,
        plan_sha256=plan_digest(study),
        order_sha256=order_digest(study, rows),
        trail_seq=7,
        trail_sha256="a7" * 32,
        amends=None,
        amends_time=None,
        reason=None,
        differences=(),
        data_first_seen=None,
        data_present=(),
    )
    return ProtocolInput(study, LABORATORY, power, gaps, PLAN.encode(), rows, replace(facts, **changes))


@pytest.fixture(scope="module")
def first():
    """The pages of a first protocol."""
    return pages(render_protocol(protocol()))


WHAT_A_PROTOCOL_HOLDS = [
    "Pre-registration before any data of this study were seen.",
    "To find out whether two kits give the same mean as ion chromatography.",
    "method, 3 levels: ion-chromatography, kit-a, kit-b",
    "4 at each level",
    "each kit against ion chromatography (each level against ion-chromatography) Dunnett",
    "kit-a 0.5; kit-b 0.5; ion-chromatography -1",
    "kits as good -0.5 to 0.5 mg/L 0.05 method specification 4.2",
    "largest difference of two level means at most 0.6 mg/L",
    "Missing values left out and counted",
    "Below a limit half the limit in its place",
    "a test proposes what to look into and removes nothing",
    "a value is left out only by a person, with a reason and a date",
    "Power of the planned tests of nitrate, from the plan alone.",
    "assayfolio-order/1, seed 11",
    "A deviation is something that was not done as planned",
    "SHA-256 " + "a7" * 32,
    "I wrote this plan",
    "I approve this plan",
    "not signed",
]


@pytest.mark.parametrize("words", WHAT_A_PROTOCOL_HOLDS)
def test_a_protocol_holds_the_whole_plan(first, words):
    assert words in " ".join(first)


def test_every_measurement_stands_in_the_protocol_in_its_order(first):
    text = " ".join(first)
    for row in protocol().rows:
        assert f"{row.level} ({row.replicate}, {row.item})" in text


def test_every_page_of_a_protocol_is_recognisable(first):
    digest = protocol().facts.plan_sha256[:8]
    for number, page in enumerate(first, start=1):
        assert "WTR-017 · protocol-0001" in page
        assert f"plan {digest}" in page
        assert f"page {number} of {len(first)}" in page
    assert "End of the protocol of WTR-017, protocol-0001" in first[-1]


def test_the_same_protocol_is_the_same_bytes():
    assert render_protocol(protocol()) == render_protocol(protocol())


def test_an_amended_protocol_says_what_changed_why_and_when():
    text = " ".join(
        pages(
            render_protocol(
                protocol(
                    number=2,
                    amends="protocol-0001",
                    amends_time="2031-03-01T08:00:00.000000Z",
                    reason="kit B is no longer sold, see letter of 4 March",
                    differences=(("alpha", "0.01", "0.05"), ("spread", None, "against: kit-a")),
                    data_first_seen="2031-03-03T07:30:00.000000Z",
                )
            )
        )
    )
    assert (
        "Amendment of protocol-0001 after data of this study were first seen, 2031-03-03 07:30 UTC." in text
    )
    assert "registered 2031-03-01 08:00 UTC, which is kept. Reason: kit B is no longer sold" in text
    assert "alpha 0.01 0.05" in text
    assert "spread none against: kit-a" in text


def test_data_that_lay_there_already_are_named_on_the_first_page():
    text = pages(render_protocol(protocol(data_present=("configs/data/nitrate.csv",))))
    assert "while a raw data file lay in its place already" in text[0]
    assert "configs/data/nitrate.csv" in " ".join(text)


def version(number, time, *, after_data, amends=True, **more):
    reason = "kit B is no longer sold, see letter of 4 March" if amends else None
    changed = (("comparisons.all pairs.adjust", "holm", "tukey-kramer"),) if amends else ()
    made = ProtocolVersion(
        f"protocol-{number:04d}", time, "j.meadow", "1b" * 32, "2c" * 32, amends, after_data, reason, changed
    )
    return replace(made, **more)


FIRST = version(1, "2031-03-01T08:00:00.000000Z", after_data=False, amends=False)
LATE_FIRST = replace(FIRST, after_data=True)
EARLY = version(2, "2031-03-02T08:00:00.000000Z", after_data=False)
LATE = version(3, "2031-03-05T08:00:00.000000Z", after_data=True)
SEEN = "2031-03-04T07:30:00.000000Z"
SEEN_EARLIER = "2031-02-20T07:30:00.000000Z"


def report(protocols, registered, earlier=(), seen=SEEN):
    """The pages of a report under these protocols; the named families stand as they were registered."""
    content = balanced()
    marked = with_registration(content.findings, registered, (), ())
    facts = RegistrationFacts(protocols[-1].name, SEEN, seen, tuple(protocols), tuple(earlier))
    run = replace(content.run, registration=facts)
    return pages(render_report(replace(content, findings=marked, run=run)).pdf)


FAMILIES = tuple(family.name for family in balanced().findings.responses[0].comparisons)


@pytest.mark.requirement("PLAN-1")
def test_every_page_of_a_registered_report_says_when():
    text = report([FIRST], FAMILIES)
    assert all("pre-registered 2031-03-01 · definition" in page for page in text)
    assert "Pre-registered 2031-03-01 08:00 UTC, data first seen 2031-03-04 07:30 UTC." in text[0]
    assert "exploratory" not in " ".join(text)
    assert " ".join(text).count("registered before the data were seen") == len(FAMILIES)


def test_registration_after_the_data_is_said_on_every_page_with_both_times():
    text = report([LATE_FIRST], (), seen=SEEN_EARLIER)
    assert all("registered after the data were seen" in page for page in text)
    said = "after data of this study were first seen, 2031-02-20 07:30 UTC: every result is exploratory."
    assert f"Registered 2031-03-01 08:00 UTC, {said}" in text[0]
    words = "exploratory, as the plan was registered after the data were seen"
    assert " ".join(text).count(words) == len(FAMILIES)


def test_an_amendment_before_the_data_leaves_everything_registered():
    text = report([FIRST, EARLY], FAMILIES)
    assert "data first seen 2031-03-04 07:30 UTC; 1 amendment before the data." in text[0]
    assert "Amended before the data were first seen, 2031-03-02 08:00 UTC, by j.meadow." in " ".join(text)
    assert "exploratory" not in " ".join(text)


@pytest.mark.requirement("PLAN-10", "REPORT-21")
def test_an_amendment_after_the_data_is_listed_with_the_result_under_the_earlier_plan_beside():
    content = balanced()
    before = replace(
        content.study,
        alpha=content.study.alpha / 50,
        comparisons=tuple(replace(one, adjust="none") for one in content.study.comparisons[:1]),
    )
    beside = EarlierResult("protocol-0002", before, evaluate(before, content.observations), "")
    text = report([FIRST, EARLY, LATE], FAMILIES[:1], [beside])
    whole = " ".join(text)
    assert all("pre-registered 2031-03-01, amended after the data" in page for page in text)
    assert "1 of 3 planned questions stand as they were registered, the others are exploratory." in text[0]
    assert whole.count("exploratory, as it was not registered in this form before the data were seen") == 2
    assert "Amended after the data were first seen, 2031-03-05 08:00 UTC, by j.meadow. Reason: kit B" in whole
    assert "comparisons.all pairs.adjust holm tukey-kramer" in whole
    assert "The result under the plan of protocol-0002" in whole
    assert "kits against instruments not asked" in whole
    assert "The levels α of the two plans differ" in whole
    assert "data/context/protocols/protocol-0002/findings.json" in whole


def test_an_earlier_plan_without_a_result_is_told_with_its_reason():
    none = EarlierResult(
        "protocol-0001", balanced().study, None, "The data hold a level that is not declared."
    )
    whole = " ".join(report([FIRST, LATE], (), [none]))
    assert "gives no result on these data: The data hold a level that is not declared." in whole


@pytest.mark.needs("verapdf")
@pytest.mark.slow
def test_a_protocol_can_be_archived_and_read_by_everyone(tmp_path):
    path = tmp_path / "protocol.pdf"
    path.write_bytes(render_protocol(protocol()))
    assert validate(path, profiles=("3a", "3b", "ua1")) == []
