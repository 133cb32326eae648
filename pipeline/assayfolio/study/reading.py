"""Reading a study definition and a laboratory's settings from bytes: all faults of a file in one pass."""

import re
from fractions import Fraction

from assayfolio.errors import Place
from assayfolio.study.comparison_section import Surroundings, comparison_in, equivalence_in
from assayfolio.study.data_section import read_data
from assayfolio.study.document import compose
from assayfolio.study.faults import Faults, shown
from assayfolio.study.fields import (
    Fields,
    Reader,
    T,
    Value,
    choice,
    distinct,
    label,
    line_of_text,
    list_of,
    paragraphs,
    probability,
    refuse_repeats_of,
    scalar,
    whole_number,
)
from assayfolio.study.nodes import MappingNode
from assayfolio.study.plan import DataPlan, DesignPlan, Laboratory, StudyDefinition
from assayfolio.study.small_sections import (
    read_checks,
    read_criterion,
    read_design,
    read_outliers,
    read_power,
    read_precision,
    read_sign_off,
)
from assayfolio.study.vocabulary import (
    LABORATORY_KEYS,
    LONGEST_NOTE,
    LONGEST_PARAGRAPHS,
    LONGEST_TITLE,
    PAPERS,
    REQUIREMENTS,
    STUDY_KEYS,
)

MOST_WAIT_SECONDS = 600
_IDENTIFIER = re.compile(r"[A-Z0-9][A-Z0-9-]{0,39}", re.ASCII)
_COLOUR = re.compile(r"#[0-9A-Fa-f]{6}", re.ASCII)


def read_study(content: bytes, file: str) -> StudyDefinition:
    """The study definition in `content`; `file` is its name in messages.

    Raises StudyError with every fault of the file, each with line and column.
    """
    faults = Faults(file)
    study = _study(_root(content, STUDY_KEYS, faults), faults)
    faults.raise_if_any("the study definition")
    assert study is not None, "a definition without faults is complete"
    return study


def read_laboratory(content: bytes, file: str) -> Laboratory:
    """The laboratory's settings in `content`; `file` is its name in messages.

    Raises StudyError with every fault of the file, each with line and column.
    """
    faults = Faults(file)
    laboratory = _laboratory(_root(content, LABORATORY_KEYS, faults))
    faults.raise_if_any("the laboratory's settings")
    assert laboratory is not None, "settings without faults are complete"
    return laboratory
