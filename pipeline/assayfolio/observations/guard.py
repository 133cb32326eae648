"""Labels in text files that people open in a spreadsheet program, which would run some of them as formulas.

A label that begins with `=`, `+`, `-`, `@`, a tab or a carriage return is written with an apostrophe before
it, which a spreadsheet program takes for text; reading takes that apostrophe away again. A label that has
apostrophes of its own before such a character gets one more, so that every label comes back as it was.
Numbers are not labels and stay as they are.
"""

import re

_RUN_AS_FORMULA = re.compile(r"'*[=+\-@\t\r]")


def guarded(label: str) -> str:
    """`label` as it is written into a text file; `unguarded` gives it back."""
    return f"'{label}" if _RUN_AS_FORMULA.match(label) else label


def unguarded(label: str) -> str:
    """The label that was written as `label`: without the guard where there is one."""
    return label[1:] if label.startswith("'") and _RUN_AS_FORMULA.match(label) else label
