"""The distributions of simultaneous comparisons: the studentized range, and the many-to-one statistics."""

from assayfolio.statistics.many_to_one import (
    MOST_OTHERS,
    many_to_one_isf,
    many_to_one_log10_sf,
    many_to_one_sf,
)
from assayfolio.statistics.studentized_range import (
    MOST_MEANS,
    studentized_range_isf,
    studentized_range_log10_sf,
    studentized_range_sf,
)

__all__ = [
    "MOST_MEANS",
    "MOST_OTHERS",
    "many_to_one_isf",
    "many_to_one_log10_sf",
    "many_to_one_sf",
    "studentized_range_isf",
    "studentized_range_log10_sf",
    "studentized_range_sf",
]
