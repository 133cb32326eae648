"""Verdicts on differences: p <= alpha, on the p that is published, and nothing else."""

from fractions import Fraction

from assayfolio.findings import DIFFERENCE_NOT_SHOWN, DIFFERENCE_SHOWN


def shows(p: float, alpha: Fraction) -> bool:
    """Whether a published p-value reaches the level; alpha counts as the double nearest to it."""
    return p <= float(alpha)


def difference_verdict(p: float, alpha: Fraction) -> str:
    """Whether a difference is shown at level alpha."""
    return DIFFERENCE_SHOWN if shows(p, alpha) else DIFFERENCE_NOT_SHOWN
