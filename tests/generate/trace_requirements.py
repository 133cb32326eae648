"""Write the trace of requirements: each with its source, its status, where it is met, and its tests.

    python tests/generate/trace_requirements.py            print the table (Markdown)
    python tests/generate/trace_requirements.py FILE       write it to FILE

Ends with 1 where list and tests disagree, after saying how.
"""

import sys
from collections import Counter
from collections.abc import Mapping
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from support.requirements import Requirement, faults, marked_tests, requirements

HEAD = ("ID", "Demands", "Source", "Checked against", "Status", "Where, or why not", "Tests")


def cell(text: str) -> str:
    """A text that keeps within its cell of a Markdown table."""
    return text.replace("|", "\\|").replace("\n", " ")


def row(each: Requirement, tests: list[str]) -> str:
    """One line of the table."""
    why = each.reason or (each.part and f"waits for: {each.part}") or ", ".join(each.where)
    cells = (
        each.id,
        each.demands,
        "; ".join(each.source),
        each.checked,
        each.status,
        why,
        "<br>".join(tests),
    )
    return f"| {' | '.join(cell(text) for text in cells)} |"


def table(listed: list[Requirement], marked: Mapping[str, list[str]]) -> str:
    """The whole table, with a count of each status above it."""
    counts = Counter(each.status for each in listed)
    lines = [
        "# Trace of requirements",
        "",
        f"{len(listed)} requirements: {', '.join(f'{count} {status}' for status, count in counts.items())}.",
        "",
        f"| {' | '.join(HEAD)} |",
        f"|{'---|' * len(HEAD)}",
        *(row(each, marked.get(each.id, [])) for each in listed),
    ]
    return "\n".join(lines) + "\n"


def main() -> int:
    """Write the table, then say what disagrees."""
    listed, marked = requirements(), marked_tests()
    text = table(listed, marked)
    if len(sys.argv) > 1:
        Path(sys.argv[1]).write_text(text, "utf-8")
    else:
        sys.stdout.write(text)
    wrong = faults(listed, marked)
    sys.stderr.writelines(f"{line}\n" for line in wrong)
    return 1 if wrong else 0


if __name__ == "__main__":
    sys.exit(main())
