"""Make `tests/archives/<version>/`: a small workspace with a sealed run, for every later version to read.

    python tests/generate/make_archive.py

Run it once for each release, from the released source; an archive of an earlier release is never made
again. While a version is still in the making its archive may be remade (delete the folder first). Account and
host are invented, everything else is as the program leaves it.
"""

import sys
from pathlib import Path

from assayfolio.version import VERSION
from assayfolio.workflow import surroundings

surroundings.account_name = lambda: "archivist"
surroundings.socket.gethostname = lambda: "archive"

from assayfolio.cli.root import main  # noqa: E402 - after the invented account

ARCHIVES = Path(__file__).resolve().parents[1] / "archives"

LAB = """\
laboratory: Invented archive laboratory
address: [1 Shelf Street, Papermoor]
note: Invented laboratory and invented data, for tests only.
"""

STUDY = """\
study: ARC-1
title: Chloride in brine by three methods
purpose: To be read by every later version
data:
  file: data/chloride.csv
  response: chloride
  factor: method
  unit: mg/L
  levels: [titration, electrode, chromatography]
  replicates: {titration: 6, electrode: 4, chromatography: 5}
  order: position
  exclusions: data/left-out.yaml
  below-limit: half-limit
alpha: 0.05
comparisons:
  - {name: all pairs, pairs: all, adjust: tukey-kramer}
  - {name: against titration, against: titration, adjust: dunnett}
  - {name: instruments against titration, weights: {titration: -1, electrode: 1/2, chromatography: 1/2}}
equivalence:
  - {name: within 4, against: titration, margin: 4, margin-source: invented, adjust: holm}
spread: {against: titration, adjust: holm}
outliers: {test: [grubbs, cochran]}
checks: {equal-variances: [brown-forsythe, bartlett], normality: [shapiro-wilk, anderson-darling]}
precision: {estimate: true}
power: {difference: 4, sigma: 1.5, target: 0.9}
criteria:
  - {quantity: repeatability-rsd, at-most: 5, unit: "%"}
sign-off:
  - {role: author, meaning: I performed this analysis as planned}
"""

DATA = """\
position,method,chloride
1,titration,48.2
2,electrode,47.1
3,chromatography,48.6
4,electrode,47.9
5,titration,48.7
6,chromatography,48.1
7,chromatography,48.9
8,titration,47.8
9,electrode,46.8
10,titration,48.4
11,chromatography,48.3
12,electrode,47.5
13,titration,61.0
14,chromatography,48.8
15,titration,48.1
"""

LEFT_OUT = """\
exclusions:
  - row: 14
    value: "61.0"
    reason: burette leaked during this titration - see logbook 12
    decided-by: A. Analyst
    decided-at: 2031-03-04
    approved-by: R. Reviewer
"""


def make(folder: Path) -> None:
    """The workspace, run once."""
    files = {
        "configs/lab.yaml": LAB,
        "configs/study.yaml": STUDY,
        "configs/data/chloride.csv": DATA,
        "configs/data/left-out.yaml": LEFT_OUT,
    }
    for name, text in files.items():
        path = folder / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(text, encoding="utf-8")
    main(["run", str(folder / "configs/study.yaml"), "--workspace", str(folder)])


if __name__ == "__main__":
    target = ARCHIVES / VERSION
    if target.exists():
        sys.exit(f"{target} exists already; an archive is never made again.")
    make(target)
