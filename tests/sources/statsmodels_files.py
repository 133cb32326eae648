"""Data sets that statsmodels ships as CSV files, taken as the bytes they are."""

from dataclasses import dataclass
from importlib.util import find_spec
from pathlib import Path


@dataclass(frozen=True)
class Shipped:
    """A file of statsmodels with a column of values and one of levels."""

    folder: str
    file: str
    response: str
    factor: str
    levels: int
    n: int

    def content(self) -> bytes:
        """The bytes as shipped."""
        spec = find_spec("statsmodels")
        if spec is None or spec.origin is None:
            raise FileNotFoundError("statsmodels, which ships the data sets, is not installed")
        return (Path(spec.origin).parent / "datasets" / self.folder / self.file).read_bytes()


SHIPPED = (
    Shipped("grunfeld", "grunfeld.csv", "invest", "firm", 11, 220),
    Shipped("fair", "fair.csv", "affairs", "rate_marriage", 5, 6366),
    Shipped("modechoice", "modechoice.csv", "ttme", "mode", 4, 840),
    Shipped("randhie", "randhie.csv", "mdvis", "lncoins", 5, 20190),
)
