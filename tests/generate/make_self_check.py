"""Write `workflow/references.json`: the references that every run recomputes before it computes anything.

Certified values and data are read from the NIST StRD files that scipy ships; function values come from the
vectors of this test suite, and one far tail from mpmath. With --check the file is only compared with what
would be written.
"""

import json
import re
import sys
from importlib.resources import files
from pathlib import Path

import mpmath

ROOT = Path(__file__).resolve().parents[2]
TARGET = ROOT / "pipeline" / "assayfolio" / "workflow" / "references.json"
DATA_SETS = ("SiRstv", "AtmWtAg")
FUNCTION_VALUES = (
    ("bal_k3_n5", "f_sf", ("F", "df_between", "df_within"), "p"),
    ("bal_k3_n5", "f_isf", ("alpha", "df_between", "df_within"), "F_crit"),
    ("bal_k3_n5", "t_isf", ("half_alpha", "df_within"), "t_crit"),
)
RANGE_CASES = ("cdf_q3.5_k3_df10",)
MANY_TO_ONE_CASES = ("crit_two_a0.05_n0=6_m=4_df25",)


def nist_case(name: str) -> dict[str, object]:
    """Data and certified values of one NIST StRD one-way file, as text."""
    text = (files("scipy.stats") / "tests" / "data" / "nist_anova" / f"{name}.dat").read_text("ascii")
    lines = text.splitlines()
    data: dict[str, list[str]] = {}
    for line in lines[60:]:
        level, value = line.split()
        data.setdefault(level, []).append(value)
    certified_lines = [line for line in lines[40:52] if line.strip()]
    between = next(line.split() for line in certified_lines if line.startswith("Between"))
    within = next(line.split() for line in certified_lines if line.startswith("Within"))
    tail = "\n".join(certified_lines)
    r_squared = re.search(r"Certified R-Squared\s+(\S+)", tail)
    residual_sd = re.search(r"Standard Deviation\s+(\S+)", tail)
    assert r_squared is not None
    assert residual_sd is not None
    certified = {
        "ss_between": between[-3],
        "ms_between": between[-2],
        "f": between[-1],
        "ss_within": within[-2],
        "ms_within": within[-1],
        "r_squared": r_squared[1],
        "residual_sd": residual_sd[1],
    }
    return {
        "name": f"NIST StRD {name}",
        "data": data,
        "certified": {k: v.lower() for k, v in certified.items()},
    }


def function_cases() -> list[dict[str, object]]:
    """Reference values of the distribution functions, from the vectors."""
    vectors = ROOT / "tests" / "vectors"
    one_way = {
        case["name"]: case for case in json.loads((vectors / "one_way.json").read_text("utf-8"))["cases"]
    }
    cases = []
    for name, function, arguments, key in FUNCTION_VALUES:
        inputs, expected = one_way[name]["inputs"], one_way[name]["expected"]
        known = {**expected, "alpha": inputs["alpha"], "half_alpha": str(float(inputs["alpha"]) / 2)}
        cases.append(
            {"function": function, "arguments": [str(known[a]) for a in arguments], "value": known[key]}
        )
    ranges = json.loads((vectors / "studentized_range.json").read_text("utf-8"))["cases"]
    for case in ranges:
        if case["name"] in RANGE_CASES:
            arguments = [str(case["inputs"][key]) for key in ("q", "k", "df")]
            value = case["expected"]["sf"]
            cases.append({"function": "studentized_range_sf", "arguments": arguments, "value": value})
            turned = [value, *arguments[1:]]
            cases.append({"function": "studentized_range_isf", "arguments": turned, "value": arguments[0]})
    return [*cases, *many_to_one_cases(vectors), far_tail()]


def many_to_one_cases(vectors: Path) -> list[dict[str, object]]:
    """A tail of the largest difference from one reference, and the point that belongs to it."""
    cases: list[dict[str, object]] = []
    for case in json.loads((vectors / "dunnett.json").read_text("utf-8"))["cases"]:
        if case["name"] in MANY_TO_ONE_CASES:
            inputs, point = case["inputs"], case["expected"]["d"]
            sizes = " ".join(map(str, inputs["n_treatments"]))
            rest = [str(inputs["n_control"]), sizes, str(inputs["df"])]
            alpha = inputs["alpha"]
            cases.append({"function": "many_to_one_sf", "arguments": [point, *rest], "value": alpha})
            cases.append({"function": "many_to_one_isf", "arguments": [alpha, *rest], "value": point})
    return cases


def far_tail() -> dict[str, object]:
    """The logarithm of an F tail that is far below the range of doubles, by mpmath with 40 digits."""
    with mpmath.workdps(40):
        f, df1, df2 = 14, 200, 18000
        beyond = mpmath.mpf(df2) / (df2 + df1 * f)
        tail = mpmath.betainc(mpmath.mpf(df2) / 2, mpmath.mpf(df1) / 2, 0, beyond, regularized=True)
        value = mpmath.nstr(mpmath.log10(tail), 20)
    return {"function": "f_log10_sf", "arguments": [str(f), str(df1), str(df2)], "value": value}


def main() -> None:
    """Write the file, or compare it."""
    references = {"one_way": [nist_case(name) for name in DATA_SETS], "functions": function_cases()}
    text = json.dumps(references, indent=1) + "\n"
    if "--check" in sys.argv:
        if TARGET.read_text("utf-8") != text:
            sys.exit("references.json differs from what this script writes; run it without --check")
        return
    TARGET.write_text(text, "utf-8")


if __name__ == "__main__":
    main()
