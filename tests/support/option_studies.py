"""The studies that together use every option: their files, for runs as a laboratory makes them."""

import re
from typing import Any

import yaml

from support.every_option import PLANS, files_with_every
from support.studies import CONFIGS
from support.workspaces import DATA, STUDY

DEMONSTRATIONS = ("beet-syrup", "brine-chloride", "cider-vinegar", "oat-drying")
COARSE = "coarse steps"
COARSE_STUDY = STUDY.replace("alpha:", "  replicates: 3\nalpha:") + (
    "power: {difference: 1, sigma: 0.5, target: 0.9, allocation: equal}\n"
)
STUDIES = (*PLANS, *DEMONSTRATIONS, COARSE)


def files_of(name: str) -> tuple[str, str, str]:
    """The text of a study, the name of its data file below configs/data, and what stands in that."""
    if name in PLANS:
        study, values = files_with_every(name)
        return study, "values.csv", values
    if name == COARSE:
        return COARSE_STUDY, "values.csv", re.sub(r"\.\d", "", DATA)
    data = f"{name}.csv"
    return (CONFIGS / f"{name}.yaml").read_text("utf-8"), data, (CONFIGS / "data" / data).read_text("utf-8")


# Each definition as it was typed: every word a text.
DEFINITIONS: dict[str, dict[str, Any]] = {
    name: yaml.load(files_of(name)[0], Loader=yaml.BaseLoader) for name in STUDIES
}
