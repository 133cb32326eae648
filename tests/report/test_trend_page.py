"""The pages of control charts: words, figures, and a file that holds together."""

import re
import subprocess
from dataclasses import replace
from datetime import UTC, datetime, timedelta
from fractions import Fraction

import pytest

from assayfolio.report.pages import FIGURE_SCHEME, html_from
from assayfolio.report.trend_page import compose_trend, render_trend
from assayfolio.report.trend_sources import LeftOutRun, TrendInput
from assayfolio.study.laboratory import Laboratory
from assayfolio.study.reading import read_study
from assayfolio.trending.charts import chart_lots
from assayfolio.trending.series import LotResult
from pdfa.verapdf import validate
from report.test_wording import FORBIDDEN

STUDY = """\
study: BRN-7
title: Sulfate in lots of brine, three places of a drum
data: {file: v.csv, response: sulfate, factor: place, unit: mg/L, levels: [top, middle, bottom]}
alpha: 0.05
comparisons: [{name: to the top, against: top, adjust: dunnett}]
trend:
  baseline: {first: 10}
  rules: [beyond-limits, two-of-three, six-rising, range-beyond-limit]
  criteria: [{quantity: lot-mean, at-least: 9, at-most: 11.5}]
"""
STEPS = (0.3, -0.4, 0.1, 0.5, -0.2, -0.5, 0.2, 0.4, -0.1, -0.3)


def result(number: int, mean: Fraction) -> LotResult:
    levels = [
        {"level": place, "sums": {"n": "1", "sum": str(mean + step), "sum_of_squares": "0"}}
        for place, step in (("top", -1), ("middle", 0), ("bottom", 1))
    ]
    step = STEPS[number % len(STEPS)]
    rows = [{"label": "middle - top", "estimate": step, "ci": [step - 0.8, step + 0.8]}]
    comparisons = [{"kind": "against", "against": "top", "rows": rows}]
    part = {
        "unit": "mg/L",
        "levels": levels,
        "anova": {"residual_sd": 0.5 + step / 4},
        "comparisons": comparisons,
    }
    started = f"{(datetime(2031, 5, 1, tzinfo=UTC) + timedelta(days=number)).date()}T02:00:00.000000Z"
    run = f"BRN-7/run-{number + 1:04d}"
    return LotResult(f"BR-{100 + number}", run, started, "a" * 64, "b" * 64, {"responses": {"sulfate": part}})


def pages(count: int = 24, jump: float = 1.4) -> TrendInput:
    """Charts of lots that shift up by `jump` from the nineteenth on."""
    study = read_study(STUDY.encode(), "study.yaml")
    means = [10 + Fraction(STEPS[(3 * at) % 10]) + (Fraction(jump) if at >= 18 else 0) for at in range(count)]
    return TrendInput(
        findings=chart_lots(study, [result(at, mean) for at, mean in enumerate(means)]),
        laboratory=Laboratory("Invented laboratory", ("1 Nowhere Street", "Sampleton")),
        left_out=(LeftOutRun("BRN-7/run-0031", "", "void since 2031-05-09: balance out of tolerance"),),
        changed=(),
        created="2031-06-11T05:00:00Z",
        made="2031-06-11 07:00 +02:00",
        by="account nightly on host bench",
        generator="Assayfolio 0",
        trail=(123, "c" * 64),
        plan_sha256="d" * 64,
        data_sha256="e" * 64,
    )


def words_of(content: TrendInput) -> str:
    html = html_from("trend.html.j2", page=compose_trend(content), figure_scheme=FIGURE_SCHEME)
    body = html.split("<body>", 1)[1]
    alternatives = " ".join(re.findall(r'alt="([^"]*)"', body))
    return " ".join((re.sub(r"<[^>]*>", " ", body) + alternatives).split())


@pytest.mark.requirement("WORDS-1")
@pytest.mark.parametrize("what", FORBIDDEN)
@pytest.mark.parametrize("jump", [0.0, 1.4])
def test_the_pages_never_state(what, jump):
    text = words_of(pages(jump=jump))
    found = re.search(FORBIDDEN[what], text, flags=re.IGNORECASE)
    assert found is None, text[max(0, found.start() - 60) : found.end() + 60]


def test_a_signal_is_named_by_rule_and_lot():
    text = words_of(pages())
    assert "Signal by rule" in text
    assert re.search(r"BR-118 run-0019 sulfate, lot mean beyond-limits", text)
    assert "range-beyond-limit" in text


def test_what_a_rule_says_and_where_it_was_published_stands_there():
    text = words_of(pages())
    assert "six points in a row, each above the one before, or each below" in text
    assert "Nelson 1984, test 3" in text
    assert "Champ" in text


def test_no_signal_is_not_taken_for_nothing_has_changed():
    text = words_of(pages(count=18))
    assert "No signal by the planned rules on 3 charts." in text
    assert "That does not show that nothing has changed." in text


@pytest.mark.requirement("NIGHT-2")
def test_a_chart_decides_nothing():
    text = words_of(pages())
    assert "What follows from it is for a person to decide and to record." in text
    assert "they decide nothing about a lot" in text


def test_false_signals_are_told_for_these_charts_and_for_a_month():
    content = pages()
    text = words_of(content)
    assert "A month of as many lots as the last 30 days had (24) is expected to show" in text
    assert "A standard deviation is not normally distributed" in text
    assert "The baseline has 10 lots, fewer than 20: the limits are uncertain." in text


def test_a_criterion_that_is_not_met_names_its_lots():
    text = words_of(pages())
    assert re.search(r"Criterion at most 11\.5.mg/L: not met at BR-\d+", text)
    assert re.search(r"Criterion at least 9.mg/L: met at every lot", text)


def test_a_baseline_that_is_not_complete_is_said_so_and_nothing_signals():
    text = words_of(pages(count=6))
    assert "No limits yet on 3 charts, so no rule is applied." in text
    assert "No limits: the planned baseline is 10 lots, and 6 of them are there." in text


def test_a_folio_that_was_changed_stands_on_the_first_page():
    changed = (LeftOutRun("BRN-7/run-0004", "", "changed: data/findings.json is not as it was sealed"),)
    text = words_of(replace(pages(), changed=changed))
    assert text.index("Left out, as its folio is not as it was sealed: BRN-7/run-0004") < text.index(
        "1 Signals"
    )


def test_markup_in_the_name_of_a_lot_is_text():
    content = pages()
    points = [replace(one, lot="<b>L</b>") for one in content.findings.results]
    html = html_from(
        "trend.html.j2",
        page=compose_trend(replace(content, findings=replace(content.findings, results=tuple(points)))),
        figure_scheme=FIGURE_SCHEME,
    )
    assert "<b>L</b>" not in html
    assert "&lt;b&gt;L&lt;/b&gt;" in html


@pytest.mark.parametrize("count", [1, 2, 24, 300])
def test_few_and_many_lots_are_set_without_a_complaint(count):
    pdf, pictures = render_trend(pages(count=count))
    assert pdf.startswith(b"%PDF")
    assert len(pictures) == 3
    for picture in pictures:
        places = [float(number) for number in re.findall(rb'\bc?[xy]="(-?[0-9.]+)"', picture.svg)]
        assert min(places) >= -1
        assert max(places) <= 466
    if count == 300:
        assert b"120 lots from BR-280 to BR-399" in pictures[0].svg


def test_the_same_input_gives_the_same_bytes():
    assert render_trend(pages())[0] == render_trend(pages())[0]


@pytest.mark.needs("pdftotext", "qpdf")
def test_the_file_is_whole_tagged_and_legible(tmp_path):
    path = tmp_path / "trend.pdf"
    path.write_bytes(render_trend(pages())[0])
    checked = subprocess.run(["qpdf", "--check", path], capture_output=True, text=True, check=False)
    assert checked.returncode == 0, checked.stdout + checked.stderr
    text = subprocess.run(
        ["pdftotext", "-layout", path, "-"], capture_output=True, text=True, check=True
    ).stdout
    assert "end of the charts" in text
    assert "\ufffd" not in text
    assert "BR-118" in text


@pytest.mark.slow
@pytest.mark.needs("verapdf")
def test_the_file_is_what_it_says_it_is(tmp_path):
    path = tmp_path / "trend.pdf"
    path.write_bytes(render_trend(pages())[0])
    assert list(validate(path, profiles=("3a", "ua1"))) == []
