"""Open data sets through every kind of file: certified values come out, and other readers agree.

Sources: NIST/ITL Statistical Reference Datasets, as scipy ships them; grunfeld, fair, modechoice and randhie,
as statsmodels ships them.
"""

import csv
import gzip
import io
from fractions import Fraction

import pandas as pd
import pytest
from scipy import stats

from assayfolio.exact import ExactSums, to_double
from assayfolio.observations.reading import read_all_observations
from assayfolio.observations.values import Observations
from assayfolio.statistics.oneway import OneWay, one_way
from assayfolio.study.plan import DataPlan
from sources.nist import NAMES, Dataset, as_csv, read_dataset
from sources.statsmodels_files import SHIPPED, Shipped
from support.workbooks import by_hand

NIST_PLAN = DataPlan("d.csv", ("response",), "treatment")


def analysis_of(observations: Observations) -> OneWay:
    """The one-way analysis of what was read."""
    return one_way([(level, ExactSums.of(observations.values_of(level))) for level in observations.levels])


def as_workbook(rows: list[tuple[str, str]], head: tuple[str, str]) -> bytes:
    """A workbook of (level, number) rows as programs store doubles, with up to 17 digits."""
    texts = list(dict.fromkeys([*head, *(level for level, _ in rows)]))
    at = {text: number for number, text in enumerate(texts)}
    cells = [f"<c t='s'><v>{at[level]}</v></c><c><v>{float(value):.17g}</v></c>" for level, value in rows]
    names = "".join(f"<c t='s'><v>{at[name]}</v></c>" for name in head)
    return by_hand("".join(f"<row>{row}</row>" for row in (names, *cells)), shared=texts)


def as_wide(dataset: Dataset) -> bytes:
    """A column a level."""
    columns = list(dataset.groups.values())
    rows = [",".join(dataset.groups), *(",".join(row) for row in zip(*columns, strict=True))]
    return "".join(f"{row}\n" for row in rows).encode()


def halves(dataset: Dataset) -> list[tuple[str, bytes]]:
    """The rows in two files."""
    head, *rows = as_csv(dataset).splitlines(keepends=True)
    middle = len(rows) // 2
    return [("a.csv", head + b"".join(rows[:middle])), ("b.csv", head + b"".join(rows[middle:]))]


@pytest.mark.parametrize("name", NAMES)
def test_nist_data_sets_give_their_certified_f_from_every_form(name: str) -> None:
    dataset = read_dataset(name)
    levels = tuple(dataset.groups)
    wide = DataPlan("d.csv", ("response",), "treatment", layout="wide", levels=levels)
    rows = list(dataset.rows)
    forms = [
        ([("d.csv", as_csv(dataset))], NIST_PLAN),
        ([("d.csv.gz", gzip.compress(as_csv(dataset)))], NIST_PLAN),
        ([("d.xlsx", as_workbook(rows, ("treatment", "response")))], NIST_PLAN),
        ([("d.csv", as_wide(dataset))], wide),
        (halves(dataset), NIST_PLAN),
    ]
    analyses = []
    for files, plan in forms:
        (observations,) = read_all_observations(files, plan)
        assert len(observations.rows) == dataset.stated_observations
        analyses.append(analysis_of(observations))
    assert {f"{to_double(analysis.f or Fraction(0)):.14E}" for analysis in analyses} == {
        dataset.certified["f"]
    }
    assert len({(analysis.ss_between, analysis.ss_within) for analysis in analyses}) == 1


@pytest.mark.parametrize("shipped", SHIPPED, ids=lambda shipped: f"{shipped.folder} {shipped.response}")
def test_files_of_statsmodels_are_read_as_shipped_and_agree_with_other_readers(shipped: Shipped) -> None:
    content = shipped.content()
    plan = DataPlan("d.csv", (shipped.response,), shipped.factor)
    (observations,) = read_all_observations([("d.csv", content)], plan)
    separator = ";" if observations.files[0].separator == "semicolon" else ","
    rows = [
        (row[shipped.factor], row[shipped.response])
        for row in csv.DictReader(io.StringIO(content.decode(), newline=""), delimiter=separator)
    ]
    assert len(observations.rows) == shipped.n
    assert len(observations.levels) == shipped.levels
    assert [(row.level, row.text) for row in observations.rows] == rows
    for level in observations.levels:
        meant = sum((Fraction(text) for at, text in rows if at == level), Fraction(0))
        assert ExactSums.of(observations.values_of(level)).sum == meant
    frame = pd.read_csv(io.BytesIO(content), sep=separator)
    groups = [group[shipped.response].to_numpy() for _, group in frame.groupby(shipped.factor)]
    assert float(analysis_of(observations).f or 0) == pytest.approx(
        stats.f_oneway(*groups).statistic, rel=1e-9
    )


@pytest.mark.parametrize("shipped", SHIPPED, ids=lambda shipped: f"{shipped.folder} {shipped.response}")
def test_files_of_statsmodels_give_the_same_values_through_a_workbook(shipped: Shipped) -> None:
    plan = DataPlan("d.csv", (shipped.response,), shipped.factor)
    (observed,) = read_all_observations([("d.csv", shipped.content())], plan)
    rows = [(row.level, row.text) for row in observed.rows]
    content = as_workbook(rows, (shipped.factor, shipped.response))
    (through,) = read_all_observations([("d.xlsx", content)], plan)
    assert [(row.level, row.value.fraction) for row in through.rows] == [
        (row.level, row.value.fraction) for row in observed.rows
    ]
