"""Running numbers of tables and figures, and the sections of a report."""

PLAN, DATA, CHECKS, ANOVA, COMPARISONS, NOT_REPORTED, METHOD, PROVENANCE, LISTING = range(1, 10)

ANCHORS = {
    PLAN: "plan",
    DATA: "data",
    CHECKS: "checks",
    ANOVA: "analysis",
    COMPARISONS: "comparisons",
    NOT_REPORTED: "not-reported",
    METHOD: "method",
    PROVENANCE: "provenance",
    LISTING: "listing",
}


class Numbering:
    """Hands out "Table 1", "Table 2" ... and "Figure 1" ... in the order in which they are asked for."""

    def __init__(self) -> None:
        self._tables = 0
        self._figures = 0

    def table(self) -> str:
        """The label of the next table."""
        self._tables += 1
        return f"Table {self._tables}"

    def figure(self) -> str:
        """The label of the next figure."""
        self._figures += 1
        return f"Figure {self._figures}"
