"""Every sample report by its name."""

from collections.abc import Callable
from functools import cache

from assayfolio.report.facts import ReportInput
from report.samples import CASES_OF_DIFFERENCES
from report.samples_beyond import CASES_BEYOND
from report.samples_large import CASES_LARGE
from report.samples_received import CASES_RECEIVED

CASES: dict[str, Callable[[], ReportInput]] = {
    name: cache(make)
    for name, make in (CASES_OF_DIFFERENCES | CASES_BEYOND | CASES_LARGE | CASES_RECEIVED).items()
}
