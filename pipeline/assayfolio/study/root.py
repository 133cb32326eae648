"""The outermost mapping of a settings file."""

from assayfolio.study.faults import Faults
from assayfolio.study.fields import Fields
from assayfolio.study.nodes import MappingNode, RefusedNode


def root_fields(content: bytes, known: tuple[str, ...], faults: Faults) -> Fields | None:
    """The keys of the file in `content`, or None where it holds no mapping; `faults` says why."""
    from assayfolio.study.document import compose  # loads the YAML parser, when there is something to parse

    node = compose(content, faults)
    if node is None or isinstance(node, RefusedNode):
        return None
    if isinstance(node, MappingNode):
        return Fields(node, "", known, faults)
    found = "the file is no mapping of keys to values"
    faults.add(node.place, found, f"write lines such as `{known[0]}: ...`, with a blank behind the colon")
    return None
