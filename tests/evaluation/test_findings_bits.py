"""Same findings, same bytes, whatever vector instructions, kernels, threads or locale compute them.

Studies are evaluated in processes of their own: those of the demonstration laboratory, three data sets of
NIST, and five that together ask for every option. The raw results of the mathematical libraries do change
with some of the settings below, which a probe shows; the findings may not.
"""

import json
import os
import platform
import subprocess
import sys
from functools import lru_cache
from pathlib import Path
from typing import Any

import pytest

from support.every_option import PLANS
from support.findings_digests import vector_instructions
from support.studies import DEMO_STUDIES

SCRIPT = Path(__file__).resolve().parents[1] / "support" / "findings_digests.py"
INTEL_LIKE = platform.machine().lower() in {"x86_64", "amd64"}
KERNELS = ("Prescott", "Sandybridge", "Haswell") if INTEL_LIKE else ("ARMV8", "CORTEXA57", "NEOVERSEN1")
# The C library ignores names that it does not know; older releases knew these under the longer ones.
C_LIBRARY = ("AVX2", "FMA", "FMA4", "AVX512F", "AVX2_Usable", "FMA_Usable", "AVX512F_Usable")

SETTINGS: dict[str, dict[str, str]] = {
    **{
        f"numpy without {' '.join(vector_instructions()[at:])}": {
            "NPY_DISABLE_CPU_FEATURES": ",".join(vector_instructions()[at:])
        }
        for at in range(len(vector_instructions()))
    },
    "C library without fused multiply-add": {
        "GLIBC_TUNABLES": "glibc.cpu.hwcaps=" + ",".join(f"-{name}" for name in C_LIBRARY)
    },
    **{f"{kernel} kernels": {"OPENBLAS_CORETYPE": kernel} for kernel in KERNELS},
    "one thread": {"OMP_NUM_THREADS": "1", "OPENBLAS_NUM_THREADS": "1"},
    "two threads": {"OMP_NUM_THREADS": "2", "OPENBLAS_NUM_THREADS": "2"},
    "hash seed 1": {"PYTHONHASHSEED": "1"},
    "hash seed 4242": {"PYTHONHASHSEED": "4242"},
    "plain locale": {"LC_ALL": "C", "LANG": "C", "PYTHONUTF8": "0"},
    "another time zone": {"TZ": "Pacific/Kiritimati"},
    "everything switched off at once": {
        "NPY_DISABLE_CPU_FEATURES": ",".join(vector_instructions()),
        "GLIBC_TUNABLES": "glibc.cpu.hwcaps=" + ",".join(f"-{name}" for name in C_LIBRARY),
        "OPENBLAS_CORETYPE": KERNELS[0],
        "OMP_NUM_THREADS": "1",
        "LC_ALL": "C",
    },
}

pytestmark = pytest.mark.slow


def computed(setting: dict[str, str]) -> dict[str, Any]:
    """What the script reports in a process with `setting` added to the environment."""
    environment = {key: value for key, value in os.environ.items() if key not in _all_names()}
    done = subprocess.run(
        [sys.executable, str(SCRIPT)],
        env={**environment, **setting},
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    return dict(json.loads(done.stdout))


def _all_names() -> set[str]:
    return {name for setting in SETTINGS.values() for name in setting}


@lru_cache
def plain() -> dict[str, Any]:
    """The report without any setting."""
    return computed({})


@pytest.mark.requirement("NUMBERS-4")
@pytest.mark.parametrize("setting", SETTINGS)
def test_the_findings_are_the_same_bytes(setting):
    report = computed(SETTINGS[setting])
    assert report["findings"] == plain()["findings"]
    assert set(report["findings"]) == {*DEMO_STUDIES, *PLANS, "SiRstv", "AtmWtAg", "SmLs07"}
    switched_off = SETTINGS[setting].get("NPY_DISABLE_CPU_FEATURES", "").split(",")
    assert not set(report["vector_instructions"]) & set(switched_off)


def test_the_settings_reach_the_libraries():
    kernels = {computed({"OPENBLAS_CORETYPE": kernel})["blas_kernel"] for kernel in KERNELS}
    if plain()["blas_kernel"] is not None:
        assert len({plain()["blas_kernel"], *kernels}) > 1
    if vector_instructions():
        without = computed({"NPY_DISABLE_CPU_FEATURES": ",".join(vector_instructions())})
        assert without["vector_instructions"] == []
        assert without["probe"] != plain()["probe"]
