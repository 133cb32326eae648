"""The one-way analyses of variance of NIST's Statistical Reference Datasets, read from the published files.

scipy ships the eleven files as it received them. They are read as text: each value is the decimal that NIST
printed, for a float of it is another number already.
"""

import re
from collections.abc import Mapping
from dataclasses import dataclass
from importlib.util import find_spec
from pathlib import Path

NAMES = ("AtmWtAg", "SiRstv", *(f"SmLs{number:02d}" for number in range(1, 10)))

_FLOAT = r"(\d\.\d{14}E[+-]\d{2})"


@dataclass(frozen=True)
class Dataset:
    """One file: the certified values by name, as printed, and (level, value) rows, as printed."""

    name: str
    stated_observations: int
    degrees_of_freedom: Mapping[str, int]
    certified: Mapping[str, str]
    rows: tuple[tuple[str, str], ...]

    @property
    def groups(self) -> dict[str, tuple[str, ...]]:
        """The values of each level, in the order of the file."""
        levels = dict.fromkeys(level for level, _ in self.rows)
        return {level: tuple(value for at, value in self.rows if at == level) for level in levels}


def read_dataset(name: str) -> Dataset:
    """The dataset `name`, read from where scipy ships it."""
    text = (_folder() / f"{name}.dat").read_text("ascii")
    between_df, between_ss, between_ms, f = _found(rf"Between \w+\s+(\d+) {_FLOAT} {_FLOAT} {_FLOAT}", text)
    within_df, within_ss, within_ms = _found(rf"Within \w+\s+(\d+) {_FLOAT} {_FLOAT}", text)
    (r_squared,) = _found(rf"Certified R-Squared {_FLOAT}", text)
    (residual_sd,) = _found(rf"Standard Deviation\s+{_FLOAT}", text)
    (stated,) = _found(r"(\d+) Observations", text)
    first, last = _found(r"Data\s+\(lines\s+(\d+)\s+to\s+(\d+)\)", text)
    rows = [line.split() for line in text.splitlines()[int(first) - 1 : int(last)]]
    return Dataset(
        name=name,
        stated_observations=int(stated),
        degrees_of_freedom={"between": int(between_df), "within": int(within_df)},
        certified={
            "between.ss": between_ss,
            "between.ms": between_ms,
            "within.ss": within_ss,
            "within.ms": within_ms,
            "f": f,
            "r_squared": r_squared,
            "residual_sd": residual_sd,
        },
        rows=tuple((level, value) for level, value in rows),
    )


def all_datasets() -> tuple[Dataset, ...]:
    """All eleven datasets."""
    return tuple(read_dataset(name) for name in NAMES)


def as_csv(dataset: Dataset) -> bytes:
    """The rows of `dataset` as a CSV file with the columns `treatment` and `response`."""
    lines = ("treatment,response", *(f"{level},{value}" for level, value in dataset.rows))
    return "".join(f"{line}\n" for line in lines).encode("ascii")


def _folder() -> Path:
    spec = find_spec("scipy")
    if spec is None or spec.origin is None:
        raise FileNotFoundError("scipy, which ships the reference files, is not installed")
    return Path(spec.origin).parent / "stats" / "tests" / "data" / "nist_anova"


def _found(pattern: str, text: str) -> tuple[str, ...]:
    match = re.search(pattern, text)
    if match is None:
        raise ValueError(f"nothing in the file reads {pattern}")
    return match.groups()
