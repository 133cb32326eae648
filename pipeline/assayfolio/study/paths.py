"""Paths of the files that a study names: below its own folder, and in the last part perhaps a pattern."""

import re

from assayfolio.study.faults import shown
from assayfolio.study.fields import Reader, Value, distinct, line_of_text, list_of
from assayfolio.study.nodes import ScalarNode
from assayfolio.study.vocabulary import LONGEST_PATH

_DRIVE = re.compile(r"[A-Za-z]:")
_text = line_of_text(LONGEST_PATH)


def is_pattern(path: str) -> bool:
    """Whether `path` names any number of files: it holds a `*` (any characters) or a `?` (any one)."""
    return "*" in path or "?" in path


def path_such_as(example: str) -> Reader[str]:
    """A reader for the path of one file, such as `example`."""
    expected = f"a path below this file's folder, such as {example}"

    def read(value: Value) -> str:
        path = _below_the_folder(value, expected)
        if is_pattern(path):
            advice = f"{expected}; only a `data.file` that stands alone may be a pattern"
            raise value.unreadable(f"is {shown(path)}, with a * or ?", advice)
        return path

    return read


_DATA_FILE = "data/values.csv"
_several = distinct(list_of(path_such_as(_DATA_FILE), "a file, a list of files, or a pattern for several"))


def sources(value: Value) -> tuple[str, ...]:
    """The path of one file, a list of different ones, or one pattern, which stands alone."""
    if not isinstance(value.node, ScalarNode):
        return _several(value)
    path = _below_the_folder(value, f"a path below this file's folder, such as {_DATA_FILE}")
    if is_pattern(path.rpartition("/")[0]):
        found = f"is {shown(path)}, with a * or ? in the name of a folder"
        raise value.unreadable(found, "a pattern in the last part only, such as data/run-*.csv")
    return (path,)


def _below_the_folder(value: Value, expected: str) -> str:
    path = _text(value)
    parts = path.split("/")
    if "\\" in path:
        raise value.unreadable(f"is {shown(path)}, with a backslash", f"{expected}; write / between folders")
    if path.startswith("/") or _DRIVE.match(path):
        raise value.unreadable(f"is {shown(path)}, an absolute path", expected)
    if ".." in parts:
        raise value.unreadable(f"is {shown(path)}, which leaves the folder", expected)
    if "" in parts or "." in parts:
        raise value.unreadable(f"is {shown(path)}, with an empty part or a single point", expected)
    if any(part != part.strip() for part in parts):
        raise value.unreadable(f"is {shown(path)}, with a blank beside a /", expected)
    return path
