"""What stands on the pages, read back from the finished PDF."""

import re

import pytest

from report.cases import CASES

pytestmark = pytest.mark.needs("pdftotext")

DRAFT = "draft unless every sign-off field on page 1 carries a valid signature"


def flat(text: str) -> str:
    return text.replace("\u202f", " ").replace("\u00a0", " ").replace("\u2212", "-")


@pytest.mark.requirement("PLAN-2", "REPORT-12")
@pytest.mark.parametrize("case", CASES)
def test_every_page_is_recognisable_as_part_of_this_report(case, pages_of):
    content = CASES[case]()
    pages = pages_of(case)
    digest = content.run.study_sha256[:8]
    for number, page in enumerate(pages, start=1):
        assert f"{content.study.study} · run-0001" in page
        assert content.laboratory.name in page
        assert f"page {number} of {len(pages)}" in page
        assert f"study definition {digest}" in page
        assert "not pre-registered" in page


@pytest.mark.requirement("REPORT-13")
@pytest.mark.parametrize("case", CASES)
def test_every_page_says_draft_or_that_no_sign_off_is_planned(case, pages_of):
    planned = bool(CASES[case]().study.sign_off)
    for page in pages_of(case):
        assert (DRAFT in page) is planned
        assert ("the study plans no sign-off" in page) is not planned


@pytest.mark.requirement("REPORT-12")
@pytest.mark.parametrize("case", CASES)
def test_the_last_page_ends_with_an_end_mark(case, pages_of):
    content = CASES[case]()
    pages = pages_of(case)
    mark = f"End of the report on {content.study.study}, run-0001"
    assert [mark in page for page in pages] == [False] * (len(pages) - 1) + [True]


REQUIRED_ON_THE_FIRST_PAGE = [
    "Report on a comparison",
    "Not pre-registered: every result is exploratory.",
    "Tarn Valley Water Laboratory",
    "3 Weir Lane, Tarn Valley",
    "Invented laboratory",
    "Nitrate in drinking water by four methods",
    "WTR-017 · run-0001",
    "2026-11-30",
    "Does the mean nitrate differ between the 4 levels of method?",
    "Which levels of method differ from ion chromatography?",
    "Which levels of method differ from one another?",
    "Does the contrast “kits against instruments” differ from zero?",
    "Difference shown in 4 of 6 comparisons",
    "mg/L",
    "simultaneous 95 %",
    "Equivalence was not tested.",
    "24 received, 0 excluded, 24 analysed; n = 6 at each of 4 levels",
    "Deviations",
    "Deviations",
    "the plan fixes no numbers of values and no worksheet",
    "level means, mg/L",
    "difference, mg/L; in the order of Table 6",
    "difference, mg/L; in the order of Table 7",
    "Author",
    "Reviewer",
    "Approver",
    "I approve this report",
    "not a release decision",
    "relate only to the items tested",
    "shall not be reproduced except in full",
    "regulations that apply",
]


@pytest.mark.requirement("PLAN-3", "REPORT-14", "REPORT-16", "WORDS-9")
@pytest.mark.parametrize("words", REQUIRED_ON_THE_FIRST_PAGE)
def test_the_first_page_holds(words, pages_of):
    assert words in flat(pages_of("balanced")[0])


REQUIRED_IN_THE_REPORT = [
    # the plan
    "Find out whether the methods in use give the same mean result",
    "4 levels declared in the plan",
    "one factor; levels are fixed",
    "Planned analyses and where they are reported",
    "weights ion chromatography -0.5; electrode -0.5; kit A 0.5; kit B 0.5",
    # the analysis
    "Null hypothesis. The 4 levels of method (ion chromatography, kit A, kit B, electrode) have",
    "Alternative. At least one of the 4 means differs from another",
    "Source of variation",
    "Variance ratio F",
    "Within levels (residual)",
    "Everything that the plan asks for is reported.",
    "The plan fixes neither numbers of values nor a worksheet",
    "Every value is analysed as it was received.",
    "each family keeps its own error rate",
    "A mean that lies exactly between two printed figures is rounded to the even digit.",
    "exploratory, as the plan was not pre-registered",
    "Estimated difference (dot) with 95 % interval, kits against instruments.",
    # the method
    "Tukey–Kramer: adjusted p",
    "Holm: with the p values",
    "C. Y. Kramer",
    "S. S. Shapiro and M. B. Wilk",
    # the provenance
    "configs/nitrate.yaml",
    "a7" * 32,
    "entry 41 of the audit trail",
    "2026-11-30 09:58:31 UTC, 2026-11-30 10:58:31 +01:00 local time",
    "j.meadow on bench-4",
    "Python 3.11.7",
    "weasyprint 70.0",
    "harfbuzz 6.0.0",
    "5 certified references were recomputed",
    "assayfolio verify runs/WTR-017/run-0001",
    "sha256sum -c manifest-sha256.txt",
    "follow from the listing in section 9",
    "Signed it lies beside, as sign-off/report.pdf",
    "assayfolio run configs/nitrate.yaml",
    "findings.json (Findings",
]


@pytest.mark.requirement("REPORT-8", "REPORT-24")
@pytest.mark.parametrize("words", REQUIRED_IN_THE_REPORT)
def test_the_report_holds(words, pages_of):
    assert words in flat(" ".join(pages_of("balanced")))


@pytest.mark.requirement("RECORD-12")
def test_every_input_stands_with_its_digest(pages_of):
    text = " ".join(pages_of("balanced"))
    run = CASES["balanced"]().run
    assert all(f"SHA-256 {item.sha256}" in text for item in run.inputs)
    assert f"SHA-256 {run.findings_sha256}" in text


@pytest.mark.requirement("REPORT-15")
def test_every_value_is_listed_beside_its_line(pages_of):
    text = " ".join(pages_of("balanced"))
    listing = text[text.index("Data listing") :]
    for row in CASES["balanced"]().observations[0].rows:
        assert re.search(rf"\b{row.line} {re.escape(row.text)}\b", listing), row


def test_a_long_file_is_not_listed_but_named(pages_of):
    text = " ".join(pages_of("large file"))
    assert "The file has 6000 values; a listing stops at 600 and is left to the file itself" in text
    assert "follow from the exact sums of each level (“sums” in findings.json)" in text
    assert "follow from the listing" not in text


def test_missing_inference_is_said_and_reasoned(pages_of):
    text = " ".join(pages_of("without scatter"))
    assert "Not assessable" in text
    assert "The values do not vary within any level" in text
    assert "Intervals for the means are not reported" in text
    assert "5.020" in text


def test_names_that_look_like_code_are_shown_as_they_are(pages_of):
    text = " ".join(pages_of("long names"))
    assert "<script>alert('x')</script> & {{ 7 * 7 }} {% raw %}" in text
    assert "<b>markup</b>" in text


def test_a_probability_below_any_floor_is_bounded(pages_of):
    assert "10⁻³⁰" in flat(" ".join(pages_of("tiny values")))


def test_the_sections_come_in_their_order(pages_of):
    text = " ".join(pages_of("balanced"))
    titles = [
        "1 Plan",
        "2 Data",
        "3 Checks of the assumptions",
        "4 Analysis of variance",
        "5 Comparisons",
        "6 Asked for and not reported",
        "7 Method",
        "8 Provenance",
        "9 Data listing",
    ]
    places = [text.index(title) for title in titles]
    assert places == sorted(places)


def test_heads_of_tables_are_repeated_on_every_page_they_reach(pages_of):
    pages = [page for page in pages_of("many levels") if page.count("not shown") > 3]
    assert len(pages) >= 4
    assert all("Adjusted p" in page and "Standard error" in page for page in pages)


def test_further_answers_are_announced_on_the_first_page(pages_of):
    pages = pages_of("unequal")
    announced = re.search(r"Answers to further questions \((\d+)\): page (\d+)", pages[0])
    assert announced is not None
    assert "Answers, continued" in pages[int(announced[2]) - 1]


@pytest.mark.requirement("PLAN-2")
@pytest.mark.parametrize("case", CASES)
def test_every_first_page_says_that_results_are_exploratory(case, pages_of):
    assert "Not pre-registered: every result is exploratory." in pages_of(case)[0]
