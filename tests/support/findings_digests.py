"""Print, as JSON, the SHA-256 of the findings of several studies, and what this process computes with.

    python findings_digests.py

`probe` is a digest of raw results of the mathematical library and of numpy. It may differ between
processors; the findings may not.
"""

import ctypes
import hashlib
import json
import math
import sys
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from assayfolio.evaluation.apply import evaluate
from assayfolio.findings import Findings
from assayfolio.findings_document import findings_bytes
from assayfolio.observations.reading import read_all_observations
from sources.nist import as_csv, read_dataset
from support.every_option import PLANS, findings_with_every
from support.studies import DEMO_STUDIES, demo_study, study_of

NIST_HEAD = """\
study: NIST-1
title: Reference data
data: {file: data/nist.csv, response: response, factor: treatment}
alpha: 0.05
"""
NIST_PARTS = """\
comparisons:
  - {name: t, pairs: all, adjust: tukey-kramer}
  - {name: s, pairs: all, adjust: sidak}
  - {name: h, pairs: all, adjust: holm}
  - {name: b, against: "1", adjust: bonferroni, alternative: less}
checks: {equal-variances: brown-forsythe, normality: shapiro-wilk}
"""


def nist_findings(name: str) -> Findings:
    """The findings of a study with several kinds of comparison on one of NIST's data sets."""
    study = study_of(NIST_PARTS, NIST_HEAD)
    files = [(study.data.file, as_csv(read_dataset(name)))]
    return evaluate(study, read_all_observations(files, study.data))


def digests() -> dict[str, str]:
    """The SHA-256 of each study's findings."""
    found = {name: evaluate(*demo_study(name)) for name in DEMO_STUDIES}
    found |= {name: nist_findings(name) for name in ("SiRstv", "AtmWtAg", "SmLs07")}
    found |= {option: findings_with_every(option) for option in PLANS}
    return {name: hashlib.sha256(findings_bytes(findings)).hexdigest() for name, findings in found.items()}


def probe() -> str:
    """A digest of raw bits of elementary functions and of a matrix product."""
    x = np.linspace(0.001, 40.0, 20_001)
    arrays = [np.exp(-x), np.log(x), np.log1p(x), np.expm1(x), np.power(x, 1.7), np.sin(x), np.tanh(x)]
    scalars = [function(value) for value in x.tolist() for function in (math.exp, math.log, math.sin)]
    square = x[:10_000].reshape(100, 100)
    results = [*arrays, np.array(scalars), square @ square.T]
    return hashlib.sha256(b"".join(result.tobytes() for result in results)).hexdigest()


def blas_kernel() -> str | None:
    """The kernel that the linear-algebra library of numpy chose, where it is the one numpy's wheels carry."""
    for library in (Path(np.__file__).parents[1] / "numpy.libs").glob("libscipy_openblas64_*"):
        corename = ctypes.CDLL(str(library)).scipy_openblas_get_corename64_
        corename.restype = ctypes.c_char_p
        return str(corename().decode("ascii"))
    return None


def vector_instructions() -> list[str]:
    """The vector instructions that numpy uses beyond its baseline."""
    from numpy._core._multiarray_umath import __cpu_dispatch__, __cpu_features__

    return [name for name in __cpu_dispatch__ if __cpu_features__[name]]


if __name__ == "__main__":
    report = {
        "findings": digests(),
        "probe": probe(),
        "vector_instructions": vector_instructions(),
        "blas_kernel": blas_kernel(),
    }
    print(json.dumps(report))  # noqa: T201
