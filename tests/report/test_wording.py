"""What a report may never say, and what it always says."""

import re
from pathlib import Path

import pytest

from assayfolio.report.assets import template_folder
from assayfolio.report.compose import compose
from assayfolio.report.content import ReportContent
from assayfolio.report.pages import html_of
from report.samples import CASES

FORBIDDEN = {
    "a decision on a lot": r"\b(accepted|released|passed|approved for use|rejected)\b",
    "significance without a size": r"\bsignificant(ly)?\b(?! digits?\b)",
    "proof": r"\b(proves?|proven|proof that|confirms?|guarantees?|validated)\b",
    "conformity that is not ours to state": r"\bcompliant\b|\bcompliance\b",
    "half a verdict": r"\b(borderline|marginal|nearly significant|trend)\b",
    "an outlier as a fact": r"\boutliers?\b",
    "sameness after a test that showed nothing": (
        r"\bno difference\b|\b(means|levels|methods) are (equal|the same)\b|\bidentical\b"
    ),
    "one method as better": r"\bbetter\b|\bsuperior\b",
    "a p value of zero": r"[=<]\s*0\.0+(?![0-9])\b.*\bp\b|\bp\s*=\s*0\.000\b",
    "stars": r"\*\*",
}


def words_of(content: ReportContent) -> str:
    """All text of a report as a reader sees it, without the titles of references."""
    html = html_of(content, len(content.cards))
    body = html.split("<body>", 1)[1]
    body = re.sub(r"<h3>References</h3>\s*<ul>.*?</ul>", "", body, flags=re.DOTALL)
    text = re.sub(r"\s+", " ", re.sub(r"<[^>]*>", "", body))
    alternatives = " ".join(re.findall(r'alt="([^"]*)"', body))
    return f"{text} {alternatives}"


@pytest.mark.parametrize("case", CASES)
@pytest.mark.parametrize("what", FORBIDDEN)
def test_a_report_never_states(case, what):
    text = words_of(compose(CASES[case]()))
    found = re.search(FORBIDDEN[what], text, flags=re.IGNORECASE)
    assert found is None, text[max(0, found.start() - 60) : found.end() + 60]


@pytest.mark.parametrize("what", FORBIDDEN)
def test_no_sentence_of_the_package_or_the_templates_states(what):
    package = Path(compose.__code__.co_filename).parent
    for path in [*sorted(package.glob("*.py")), *sorted(template_folder().glob("*.j2"))]:
        code = path.read_text(encoding="utf-8")
        sentences = re.findall(r'"([^"\n]* [^"\n]* [^"\n]*)"', code) if path.suffix == ".py" else [code]
        for sentence in sentences:
            found = re.search(FORBIDDEN[what], sentence, flags=re.IGNORECASE)
            assert found is None or what == "stars", f"{path.name}: {sentence}"


@pytest.mark.parametrize("case", CASES)
def test_every_answer_says_what_it_does_not_mean(case):
    for card in compose(CASES[case]()).cards:
        caution = "".join(span.text for span in card.caution)
        if card.verdict == "Not assessable":
            assert "Nothing is said about a difference either way." in caution
        else:
            assert "Equivalence was not tested." in caution


@pytest.mark.parametrize("case", CASES)
def test_every_planned_question_has_an_answer(case):
    content = CASES[case]()
    cards = compose(content).cards
    assert len(cards) == 1 + len(content.study.comparisons)
    families = " | ".join("".join(span.text for span in card.family) for card in cards)
    assert all(plan.name in families for plan in content.study.comparisons)


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
