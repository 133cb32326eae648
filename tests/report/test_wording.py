"""What a report may never say, and what it always says."""

import re
from functools import cache
from pathlib import Path

import pytest

from assayfolio.report.assets import template_folder
from assayfolio.report.compose import compose
from assayfolio.report.content import ReportContent
from assayfolio.report.pages import html_of
from assayfolio.report.prose import plain
from report.cases import CASES

WHAT_AN_ANSWER_DOES_NOT_MEAN = (
    "Equivalence was not tested.",
    "Equivalence is a question of its own.",
    "This says that levels add to the spread, not by how much",
    "Not shown is not absent: levels may add less",
    "a smaller difference may exist, and other quantities, such as the scatter, are not covered",
    "these data do not rule out a difference beyond the margin",
    "Not shown is not the same spread.",
    "it says nothing about trueness",
    "Meeting a criterion is not a release decision.",
)
FORBIDDEN = {
    "a decision on a lot": r"\b(accepted|released|passed|approved for use|rejected)\b",
    "significance without a size": r"\bsignificant(ly)?\b(?! digits?\b)",
    "proof": r"\b(proves?|proven|proof that|confirms?|guarantees?|validated)\b",
    "conformity that is not ours to state": r"\bcompliant\b|\bcompliance\b",
    "half a verdict": r"\b(borderline|marginal|nearly significant|trend towards)\b",
    "an outlier as a fact": (
        r"\b(is|are|was|were|as) (an )?outliers?\b|\boutliers? (was|were) (removed|excluded)\b"
    ),
    "a value taken out": r"\b(was|were) (discarded|eliminated)\b|(?<!nothing )\bwas removed\b",
    "a power from the data": r"\b(observed|achieved|post.hoc) power\b",
    "sameness after a test that showed nothing": (
        r"\bno difference\b|\b(means|levels|methods) are (equal|the same)\b|\bidentical\b"
    ),
    "one method as better": r"\bbetter\b|\bsuperior\b",
    "a p value of zero": r"[=<]\s*0\.0+(?![0-9])\b.*\bp\b|\bp\s*=\s*0\.000\b",
    "stars": r"\*\*",
}


@cache
def composed(case: str) -> ReportContent:
    """The content of a sample report."""
    return compose(CASES[case]())


@cache
def words_of(content: ReportContent) -> str:
    """All text of a report as a reader sees it, without the titles of references."""
    html = html_of(content, len(content.cards))
    body = html.split("<body>", 1)[1]
    body = re.sub(r"<h3>References</h3>\s*<ul>.*?</ul>", "", body, flags=re.DOTALL)
    text = re.sub(r"\s+", " ", re.sub(r"<[^>]*>", "", body))
    alternatives = " ".join(re.findall(r'alt="([^"]*)"', body))
    return f"{text} {alternatives}"


@pytest.mark.requirement("WORDS-1", "WORDS-3", "WORDS-4")
@pytest.mark.parametrize("case", CASES)
@pytest.mark.parametrize("what", FORBIDDEN)
def test_a_report_never_states(case, what):
    text = words_of(composed(case))
    found = re.search(FORBIDDEN[what], text, flags=re.IGNORECASE)
    assert found is None, text[max(0, found.start() - 60) : found.end() + 60]


@pytest.mark.requirement("WORDS-1")
@pytest.mark.parametrize("what", FORBIDDEN)
def test_no_sentence_of_the_package_or_the_templates_states(what):
    package = Path(compose.__code__.co_filename).parent
    for path in [*sorted(package.glob("*.py")), *sorted(template_folder().glob("*.j2"))]:
        code = path.read_text(encoding="utf-8")
        sentences = re.findall(r'"([^"\n]* [^"\n]* [^"\n]*)"', code) if path.suffix == ".py" else [code]
        for sentence in sentences:
            found = re.search(FORBIDDEN[what], sentence, flags=re.IGNORECASE)
            assert found is None or what == "stars", f"{path.name}: {sentence}"


@pytest.mark.requirement("WORDS-2")
@pytest.mark.parametrize("case", CASES)
def test_every_answer_says_what_it_does_not_mean(case):
    for card in compose(CASES[case]()).cards:
        caution = plain(card.caution)
        if card.verdict == "Not assessable":
            assert re.search(r"Nothing is said about (a difference|equivalence) either way\.", caution)
        else:
            assert any(words in caution for words in WHAT_AN_ANSWER_DOES_NOT_MEAN), caution


@pytest.mark.requirement("WORDS-2")
@pytest.mark.parametrize("case", CASES)
def test_a_difference_is_never_taken_for_a_word_on_equivalence(case):
    content = CASES[case]()
    cautions = [
        plain(card.caution)
        for card in composed(case).cards
        if card.verdict.startswith("Difference") and "variance" not in card.verdict
    ]
    if content.study.design.effects == "fixed":
        planned = bool(content.study.equivalence)
        words = "Equivalence is a question of its own." if planned else "Equivalence was not tested."
        assert all(words in caution for caution in cautions)


@pytest.mark.requirement("WORDS-8")
@pytest.mark.parametrize("case", CASES)
def test_every_planned_question_has_an_answer(case):
    content = CASES[case]()
    study = content.study
    cards = composed(case).cards
    families = " | ".join(plain(card.family).replace("\u00a0", " ") for card in cards)
    for response in study.data.response:
        equivalence = [plan for plan in study.equivalence if plan.response in (None, response)]
        single = [study.spread, study.precision]
        criteria = any(plan.response in (None, response) for plan in study.criteria)
        planned = 1 + len(study.comparisons) + len(equivalence) + sum(map(bool, single)) + criteria
        own = [
            card for card in cards if len(study.data.response) == 1 or plain(card.family).startswith(response)
        ]
        assert len(own) == planned
        assert all(plan.name in families for plan in (*study.comparisons, *equivalence))


def test_the_overall_question_comes_first():
    first = compose(CASES["balanced"]()).cards[0]
    assert "".join(span.text for span in first.question) == (
        "Does the mean nitrate differ between the 4 levels of method?"
    )


def test_a_verdict_counts_the_comparisons_behind_it():
    verdicts = [card.verdict for card in compose(CASES["unequal"]()).cards]
    assert verdicts[0] == "Difference shown"
    assert verdicts[1] == "Difference shown in 4 of 15 comparisons"
    assert verdicts[2] == "Difference not shown in any of 5 comparisons"
    assert verdicts[4] == "Difference shown in all 5 comparisons"
    assert verdicts[5] == "Difference not shown"


def test_an_unadjusted_family_does_not_call_its_p_adjusted():
    card = compose(CASES["unequal"]()).cards[-1]
    assert "adjusted p" not in "".join(span.text for line in card.lines for span in line)


def test_a_one_sided_question_names_the_estimate_on_the_side_it_asks_about():
    cards = compose(CASES["unequal"]()).cards
    above, below = ("".join(span.text for span in cards[place].lines[0]) for place in (2, 3))
    assert above.startswith("highest: ")
    assert "at least" in above
    assert below.startswith("lowest: ")
    assert "at most" in below


def test_a_study_without_sign_off_says_so_instead_of_draft():
    content = compose(CASES["single values"]())
    assert content.sign_off == ()
    assert content.foot_left == "the study plans no sign-off: this report carries no signatures"
    assert content.sign_off_words == "No signatures are planned for this report."


def words_of_section(case: str, number: int) -> str:
    section = compose(CASES[case]()).sections[number - 1]
    return " ".join(plain(block.words) for block in section.blocks if block.kind == "paragraph")


def test_a_later_family_names_the_pairs_it_judges_otherwise():
    words = words_of_section("unequal", 5)
    assert words.count("here the verdict differs") == 4
    assert (
        "here the verdict differs from that in “all pairs” for "
        "analyst 4 \u2212 analyst 5 (shown here), analyst 5 \u2212 analyst 6 (shown here)"
    ) in words


def test_families_that_agree_on_every_shared_pair_have_nothing_to_explain():
    assert "the verdict differs" not in words_of_section("balanced", 5)


def test_differences_of_percentages_are_in_percentage_points():
    assert words_of_section("unequal", 5).count("in percentage points") == 6
    assert "percentage points" not in words_of_section("balanced", 5)


def test_only_comparisons_that_are_reported_are_referred_to():
    captions = [
        plain(block.caption)
        for block in compose(CASES["without scatter"]()).sections[1].blocks
        if block.kind == "figure"
    ]
    assert captions
    assert not any("section 5" in caption for caption in captions)


def test_a_card_names_up_to_four_pairs_and_counts_the_others():
    lines = [plain(line) for card in compose(CASES["many levels"]()).cards for line in card.lines]
    (shown,) = [line for line in lines if line.startswith("shown: ") and " more" in line]
    assert re.fullmatch(
        r"shown: (lot \d{3} \u2212 lot \d{3}; ){3}lot \d{3} \u2212 lot \d{3} and \d+ more", shown
    )


def test_a_card_names_fewer_pairs_where_the_names_are_long():
    lines = [plain(line) for card in compose(CASES["long names"]()).cards for line in card.lines]
    assert any(re.search(r"^shown: [^;]* and \d more$", line) for line in lines)


def test_no_line_ends_between_a_number_and_its_unit():
    html = html_of(compose(CASES["long names"]()), 1)
    assert "at 254\u00a0nm, column kept at 40\u00a0°C" in html
    seen = re.sub(r'alt="[^"]*"', "", html.split("<body>")[1])
    assert "40 °C" not in seen


def test_without_planned_signatures_nothing_is_said_about_signing():
    signing = "Signed it lies beside, as sign-off/report.pdf"
    assert signing in words_of(compose(CASES["balanced"]()))
    assert signing not in words_of(compose(CASES["single values"]()))
