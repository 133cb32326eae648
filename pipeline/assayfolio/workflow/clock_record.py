"""What a run's record says of the clock that its times are by."""

from collections.abc import Mapping
from typing import Any

from assayfolio.canonical import Json
from assayfolio.report.times import ClockFacts
from assayfolio.study.laboratory import Laboratory
from assayfolio.workflow.clock import clock_is_synchronised


def clock_record(laboratory: Laboratory) -> dict[str, Json]:
    """Whether a time source keeps the clock, and of which kinds the witnesses of the trail are."""
    return {
        "synchronised": clock_is_synchronised(),
        "witnesses": [witness.kind for witness in laboratory.witnesses],
    }


def clock_facts(record: Mapping[str, Any]) -> ClockFacts | None:
    """What a report prints of it, from the run's record; None where that does not say it."""
    kept = record.get("clock")
    return None if kept is None else ClockFacts(kept["synchronised"], tuple(kept["witnesses"]))
