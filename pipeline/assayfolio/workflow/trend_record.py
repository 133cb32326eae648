"""What a command `trend` leaves: values as CSV, everything as JSON, pages as PDF, a record in the trail."""

import csv
import io
from collections.abc import Iterator, Mapping, Sequence
from pathlib import Path
from tempfile import NamedTemporaryFile

from assayfolio.canonical import Json, canonical_bytes, sha256_hex
from assayfolio.errors import MachineError
from assayfolio.evidence.environment import environment_record
from assayfolio.exact import decimal_of, exact_text, to_double
from assayfolio.report.trend_page import render_trend
from assayfolio.report.trend_sources import LeftOutRun, TrendInput
from assayfolio.trending.charts import Chart, CriterionLine, Month, Signal
from assayfolio.version import VERSION
from assayfolio.workflow.laboratory_folio import Record, SealedRecord, seal_in_folder, seal_in_workspace
from assayfolio.workflow.trend import StudyTrend

TREND_FORMAT = "assayfolio-trend/1"
KIND = "trend"
CSV_HEAD = (
    "chart",
    "response",
    "unit",
    "quantity",
    "difference",
    "lot",
    "run",
    "started",
    "value",
    "value exactly",
    "interval from",
    "interval to",
    "moving range",
    "in the baseline",
    "centre",
    "lower limit",
    "upper limit",
    "limit of the moving range",
    "signals by rule",
    "criteria not met",
)


def trend_document(trend: StudyTrend) -> Mapping[str, Json]:
    """The charts for programs. Numbers that are exact stand as doubles, and as text beside them."""
    found, seen = trend.findings, trend.surroundings
    return {
        "format": TREND_FORMAT,
        "study": found.study.study,
        "made": seen.started_utc,
        "actor": seen.actor,
        "host": seen.host,
        "program": f"assayfolio {VERSION}",
        "trail_head": {"seq": trend.head.seq, "sha256": trend.head.sha256},
        "plan_sha256": sha256_hex(trend.plan_content),
        "rules": list(found.plan.rules),
        "baseline": {"first": found.plan.first, "lots": list(found.plan.lots)},
        "lots": [
            {
                "lot": one.lot,
                "run": one.run,
                "started": one.started,
                "seal": one.seal,
                "study_sha256": one.study_sha256,
            }
            for one in found.results
        ],
        "charts": [_chart_document(chart) for chart in found.charts],
        "false_signals": {
            "rate": found.rate,
            "range_rate": found.range_rate,
            "month": None if found.month is None else _month_document(found.month),
        },
        "left_out": [
            {"run": one.run, "lot": one.lot or None, "reason": one.reason, "changed": one.changed}
            for one in trend.left_out
        ],
    }


def _chart_document(chart: Chart) -> Mapping[str, Json]:
    series, limits = chart.series, chart.limits
    return {
        "response": series.response,
        "unit": series.unit,
        "quantity": series.quantity,
        "difference": series.of or None,
        "points": [
            {
                "lot": point.lot,
                "run": point.run,
                "value": to_double(point.value),
                "exact": exact_text(decimal_of(point.value)),
                "interval": None if point.interval is None else list(point.interval),
            }
            for point in series.points
        ],
        "moving_ranges": [to_double(one) for one in chart.ranges],
        "absent": [{"lot": lot, "reason": reason} for lot, reason in series.absent],
        "baseline": [series.points[place].lot for place in chart.baseline],
        "limits": None
        if limits is None
        else {
            "n": limits.n,
            "centre": to_double(limits.centre),
            "mean_range": to_double(limits.mean_range),
            "sigma": limits.sigma,
            "lower": limits.line(-3),
            "upper": limits.line(3),
            "range_upper": limits.range_limit,
        },
        "why_no_limits": chart.why_no_limits or None,
        "signals": [_signal_document(one) for one in chart.signals],
        "criteria": [_line_document(chart, one) for one in chart.lines],
        "expected_signals": chart.expected,
    }


def _signal_document(signal: Signal) -> Mapping[str, Json]:
    return {"panel": signal.panel, "lot": signal.lot, "run": signal.run, "rule": signal.rule}


def _line_document(chart: Chart, line: CriterionLine) -> Mapping[str, Json]:
    return {
        "relation": line.relation,
        "limit": to_double(line.limit),
        "not_met_at": [chart.series.points[place].lot for place in line.unmet],
    }


def _month_document(month: Month) -> Mapping[str, Json]:
    return {"from": month.begins, "to": month.ends, "lots": month.lots, "signals": month.signals}


def trend_csv(trend: StudyTrend) -> bytes:
    """A row for each point of each chart. Values are the doubles that the findings have, in full."""
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(CSV_HEAD)
    for number, chart in enumerate(trend.findings.charts, start=1):
        for place in range(len(chart.series.points)):
            writer.writerow(_row(number, chart, place))
    return text.getvalue().encode("utf-8")


def _row(number: int, chart: Chart, place: int) -> Sequence[object]:
    series, limits, point = chart.series, chart.limits, chart.series.points[place]
    ends = point.interval or (None, None)
    told = [one.rule for one in chart.signals if one.place == place]
    unmet = [f"{line.relation} {to_double(line.limit)!r}" for line in chart.lines if place in line.unmet]
    drawn: tuple[object, ...] = ("", "", "", "")
    if limits is not None:
        drawn = (to_double(limits.centre), limits.line(-3), limits.line(3), limits.range_limit)
    return (
        number,
        _as_text(series.response),
        _as_text(series.unit or ""),
        series.quantity,
        _as_text(series.of),
        _as_text(point.lot),
        point.run,
        point.started,
        to_double(point.value),
        exact_text(decimal_of(point.value)),
        *("" if end is None else end for end in ends),
        to_double(chart.ranges[place - 1]) if place else "",
        "yes" if place in chart.baseline else "no",
        *drawn,
        "; ".join(told),
        "; ".join(unmet),
    )


def _as_text(cell: str) -> str:
    """A text that no spreadsheet program takes for a formula: such a one gets a leading apostrophe."""
    return f"'{cell}" if cell.startswith(("=", "+", "-", "@", "\t", "\r")) else cell


def as_record(trend: StudyTrend) -> Record:
    """What is sealed: pages, figures, CSV, JSON, the plan, and the environment."""
    document = canonical_bytes(trend_document(trend))
    pdf, pictures = render_trend(_pages(trend, sha256_hex(document)))
    found = trend.findings
    payload = {
        "data/trend.pdf": pdf,
        "data/trend.json": document,
        "data/trend.csv": trend_csv(trend),
        "data/study.yaml": trend.plan_content,
        "data/environment.json": canonical_bytes(environment_record()),
        **{f"data/figures/{picture.name}": picture.svg for picture in pictures},
    }
    details: dict[str, Json] = {
        "study": found.study.study,
        "lots": len(found.results),
        "charts": len(found.charts),
        "signals": found.signals,
        "changed": [one.run for one in trend.left_out if one.changed],
    }
    about = f"control charts of {found.study.study} over {len(found.results)} lots"
    return Record(KIND, about, trend.surroundings.started_utc, payload, details)


def _pages(trend: StudyTrend, digest: str) -> TrendInput:
    seen = trend.surroundings
    left = [(one.changed, LeftOutRun(one.run, one.lot, one.reason)) for one in trend.left_out]
    return TrendInput(
        findings=trend.findings,
        laboratory=trend.laboratory,
        left_out=tuple(one for changed, one in left if not changed),
        changed=tuple(one for changed, one in left if changed),
        created=f"{seen.started_utc[:19]}Z",
        made=f"{seen.started_local[:16].replace('T', ' ')} {seen.started_local[-6:]}",
        by=f"account {seen.actor} on {seen.host}",
        generator=f"Assayfolio {VERSION}",
        trail=(trend.head.seq, trend.head.sha256),
        plan_sha256=sha256_hex(trend.plan_content),
        data_sha256=digest,
    )


def seal_trend(trend: StudyTrend, output: Path | None) -> SealedRecord:
    """Seal the charts in the workspace, or in `output` where that is given.

    Raises BusyError where another writer holds the workspace, RenderingError and MachineError.
    """
    record = as_record(trend)
    if output is None:
        return seal_in_workspace(trend.workspace, record)
    return seal_in_folder(output.resolve(), record)


def trend_lines(trend: StudyTrend) -> Iterator[str]:
    """What was found, for a terminal: a line for each chart, then its signals."""
    found = trend.findings
    yield f"{found.study.study}  {found.study.title}"
    yield f"  lots     {len(found.results)}, from {found.results[0].lot} to {found.results[-1].lot}"
    for chart in found.charts:
        name = _chart_name(chart)
        if chart.limits is None:
            yield f"  chart    {name}: no limits, {chart.why_no_limits}"
            continue
        told = f"{len(chart.signals)} signal{'' if len(chart.signals) == 1 else 's'}"
        yield f"  chart    {name}: {told}, {chart.expected:.2g} expected by chance"
        for one in chart.signals:
            panel = "" if one.panel == "individuals" else " of the moving range"
            yield f"    signal{panel} by rule {one.rule} at lot {one.lot} ({one.run})"
        for line in chart.lines:
            for place in line.unmet:
                lot = chart.series.points[place].lot
                yield f"    criterion {line.relation} {to_double(line.limit):g} not met at lot {lot}"
    month = found.month
    if month is not None and month.signals:
        yield f"  month    {month.lots} lots in 30 days: {month.signals:.2g} false signals expected"
    for left in trend.left_out:
        yield f"  left out {left.run}: {left.reason}"


def _chart_name(chart: Chart) -> str:
    series = chart.series
    return f"{series.response} {series.quantity}{f' {series.of}' if series.of else ''}"


def write_trend_csv(path: Path, content: bytes) -> None:
    """Write the table to `path`, whole or not at all.

    Raises MachineError where the file cannot be written.
    """
    try:
        with NamedTemporaryFile(dir=path.parent, prefix=f".{path.name}.", delete=False) as partial:
            partial.write(content)
        Path(partial.name).chmod(0o644)
        Path(partial.name).replace(path)
    except OSError as error:
        raise MachineError(f"The table cannot be written to {path}: {error.strerror}.") from None
