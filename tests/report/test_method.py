"""The method statement names what a report uses, with formula and source, and nothing else."""

from typing import get_args

import pytest

from assayfolio.report.basis import Basis
from assayfolio.report.compose import compose
from assayfolio.report.methods import ADJUSTMENTS
from assayfolio.report.prose import plain
from assayfolio.report.references import REFERENCES
from assayfolio.report.statement import methods_of
from assayfolio.study.plan import Adjustment
from report.cases import CASES


def statement(case: str) -> str:
    """The words of the method section, formulas and references included."""
    (section,) = [one for one in compose(CASES[case]()).sections if one.title == "Method"]
    parts: list[str] = []
    for block in section.blocks:
        if block.kind in ("paragraph", "heading"):
            parts.append(plain(block.words))
        elif block.kind == "items":
            parts += [plain(item) for item in block.items]
        elif block.kind == "formula":
            parts.append(plain(block.what))
            for text, quotient in block.parts:
                parts.append(plain(text))
                if quotient is not None:
                    parts += [plain(quotient.above), plain(quotient.below)]
    return " ".join(parts).replace("\u00a0", " ")


def test_every_adjustment_that_a_plan_can_ask_for_has_name_rule_and_source():
    assert set(ADJUSTMENTS) == set(get_args(Adjustment))
    for adjust, words in ADJUSTMENTS.items():
        assert words.name
        assert words.rule
        assert words.references or adjust == "none"


@pytest.mark.requirement("REPORT-15")
@pytest.mark.parametrize("case", CASES)
def test_every_source_that_a_method_names_is_in_the_list(case):
    keys = [key for method in methods_of(Basis.of_each(CASES[case]())) for key in method.references]
    assert set(keys) <= set(REFERENCES)


def test_every_source_in_the_list_is_used_by_some_report():
    used = {"scheffe", "iso3534", "blom", "chambers", "heckbert"}
    for case in CASES:
        used |= {key for method in methods_of(Basis.of_each(CASES[case]())) for key in method.references}
    assert set(REFERENCES) == used


@pytest.mark.parametrize("case", CASES)
def test_no_mark_of_emphasis_is_left_over(case):
    text = statement(case)
    for name in ("(F*)", "F* = "):
        text = text.replace(name, "")
    assert not set("*_^#~{}") & set(text)


@pytest.mark.parametrize(
    ("case", "words"),
    [
        ("trend", "Dunnett–Tamhane step-down"),
        ("trend", "Hochberg: with the p values"),
        ("trend", "independent or positively dependent"),
        ("trend", "Scheffé: adjusted p"),
        ("trend", "leading coefficient 1 are made orthogonal"),
        ("trend", "Anderson–Darling: A²"),
        ("trend", "Y. Hochberg, A sharper Bonferroni procedure"),
        ("trend", "J. H. Steiger"),
        ("two responses", "Dunnett, single-step"),
        ("two responses", "D. J. Schuirmann"),
        ("two responses", "E. C. Fieller"),
        ("two responses", "Bonferroni over the r responses"),
        ("two responses", "Grubbs, two values"),
        ("two responses", "Levene: the F ratio"),
        ("two responses", "Bartlett: χ²"),
        ("two responses", "Measuring order: the t test"),
        ("two responses", "a power from the data would only restate p"),
        ("two responses", "Each family keeps its own error rate"),
        ("two responses by holm", "Holm over the r responses"),
        ("separate variances", "Games–Howell: adjusted p"),
        ("separate variances", "Welch’s F"),
        ("separate variances", "D. V. Mehrotra"),
        ("separate variances", "F. E. Satterthwaite"),
        ("random days", "modified large sample method of Graybill and Wang"),
        ("random days", "JCGM 100:2008"),
        ("random days", "ISO 5725-2:2019"),
        ("no spread between days", "A. Wald"),
    ],
)
def test_a_procedure_in_use_is_stated(case, words):
    assert words in statement(case)


@pytest.mark.parametrize(
    "words", ["Equivalence", "Games–Howell", "Graybill", "Grubbs", "Hochberg", "Dunnett", "noncentral F with"]
)
def test_what_was_not_used_is_not_stated(words):
    assert words not in statement("balanced")
