"""Reading `measurement:` - facts about the measurements, each as one text or as a column of the data file."""

from assayfolio.study.faults import shown
from assayfolio.study.fields import Fields, Reader, UnreadableError, Value, label, line_of_text
from assayfolio.study.names import Surroundings
from assayfolio.study.nodes import MappingNode, SequenceNode
from assayfolio.study.plan import MeasurementFact, MeasurementKey
from assayfolio.study.vocabulary import FACT_KEYS, LONGEST_SENTENCE, MEASUREMENT_KEYS

_sentence = line_of_text(LONGEST_SENTENCE)


def read_measurement(fields: Fields, surroundings: Surroundings) -> tuple[MeasurementFact, ...]:
    """`measurement:` as facts, in the order of the table of keys; what cannot be read is left out."""
    facts = (fields.optional(key, _fact_of(key, surroundings)) for key in MEASUREMENT_KEYS)
    return tuple(fact for fact in facts if fact is not None)


def _fact_of(key: MeasurementKey, surroundings: Surroundings) -> Reader[MeasurementFact]:
    def read(value: Value) -> MeasurementFact:
        if isinstance(value.node, MappingNode):
            return MeasurementFact(key, None, _column(value, surroundings))
        if isinstance(value.node, SequenceNode):
            raise value.wrong_kind("a text, or a column of the data file such as {column: sample}")
        return MeasurementFact(key, _sentence(value), None)

    return read


def _column(value: Value, surroundings: Surroundings) -> str:
    fields = Fields.of(value, FACT_KEYS)
    column = fields.required("column", label)
    if column is None:
        raise UnreadableError
    if column in (surroundings.responses or ()):
        found = f"`{value.name}` is the column {shown(column)}, which holds the values of a response"
        fields.faults.add(fields.place_of("column"), found, "name another column")
    return column
