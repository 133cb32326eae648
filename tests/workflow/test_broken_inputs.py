"""Broken study and data files: exit code 2, the place named, and nothing left but a `refused` entry."""

import hashlib

import pytest

from support.workspaces import DATA, STUDY, Bench

BROKEN_STUDIES = {
    "an unknown key": (STUDY.replace("title:", "titel:"), "configs/study.yaml:2:1", "title"),
    "a missing key": (STUDY.replace("alpha: 0.05\n", ""), "configs/study.yaml", "alpha"),
    "alpha beyond one": (STUDY.replace("0.05", "5"), "configs/study.yaml:9:8", "alpha"),
    "alpha in words": (STUDY.replace("0.05", "five percent"), "configs/study.yaml:9:8", "five percent"),
    "a study identifier in small letters": (
        STUDY.replace("TST-1", "tst 1"),
        "configs/study.yaml:1:8",
        "tst 1",
    ),
    "a duplicate key": (STUDY + "alpha: 0.01\n", "configs/study.yaml:17:1", "alpha"),
    "an anchor": (STUDY.replace("title: ", "title: &a "), "configs/study.yaml:2:8", "anchor"),
    "a tag": (STUDY.replace("title: ", "title: !!str "), "configs/study.yaml:2:8", "tag"),
    "a tab as indentation": (STUDY.replace("  file:", "\tfile:"), "configs/study.yaml:4:1", "tab"),
    "an unclosed bracket": (STUDY.replace("chromatographic]", "chromatographic"), "configs/study.yaml", ""),
    "an empty file": ("", "configs/study.yaml", "empty"),
    "a list instead of a mapping": ("- study\n", "configs/study.yaml:1:1", ""),
    "bytes that are not UTF-8": (
        STUDY.encode().replace(b"Sulfate", b"\xe9"),
        "configs/study.yaml:2",
        "UTF-8",
    ),
    "a NUL character": (STUDY.replace("Sulfate", "Sul\0fate"), "configs/study.yaml:2", ""),
    "two documents": (STUDY + "---\nstudy: X\n", "configs/study.yaml:17", "document"),
    "a data file outside": (
        STUDY.replace("data/values.csv", "../../x.csv"),
        "configs/study.yaml:4:9",
        "x.csv",
    ),
    "an absolute data file": (
        STUDY.replace("data/values.csv", "/etc/hostname"),
        "configs/study.yaml:4:9",
        "",
    ),
    "no adjustment for a family": (
        STUDY.replace("    adjust: tukey-kramer\n", ""),
        "configs/study.yaml",
        "adjust",
    ),
    "an unknown adjustment": (
        STUDY.replace("tukey-kramer", "tuckey"),
        "configs/study.yaml:13:13",
        "tukey-kramer",
    ),
    "weights that do not sum to zero": (
        STUDY.replace(
            "pairs: all\n    adjust: tukey-kramer", "weights: {gravimetric: 1, turbidimetric: -1/2}"
        ),
        "configs/study.yaml:12:14",
        "1/2",
    ),
    "a reference that is no level": (
        STUDY.replace("pairs: all\n    adjust: tukey-kramer", "against: gravimetry\n    adjust: holm"),
        "configs/study.yaml:12:14",
        "gravimetric",
    ),
    "one level": (
        STUDY.replace("[gravimetric, turbidimetric, chromatographic]", "[a]"),
        "configs/study.yaml:8",
        "",
    ),
    "a method that needs one variance": (
        STUDY.replace("alpha:", "design: {variances: separate}\nalpha:"),
        "configs/study.yaml:14:13",
        "games-howell",
    ),
    "equivalence without a margin": (
        STUDY + "equivalence:\n  - {name: e, pairs: all, adjust: none}\n",
        "configs/study.yaml:18:5",
        "margin-percent",
    ),
    "random levels that are compared": (
        STUDY + "design: {effects: random}\n",
        "configs/study.yaml:10:1",
        "precision",
    ),
    "a title the font cannot set": (STUDY.replace("Sulfate", "硫酸盐"), "configs/study.yaml:2", "U+786B"),
    "a title that turns the text round": (
        STUDY.replace("Sulfate", "a\u202eb"),
        "configs/study.yaml:2",
        "U+202E",
    ),
    "a document of more than a megabyte": (STUDY + "#" * 1_100_000, "configs/study.yaml", "1000000"),
    "nesting without end": (STUDY + "x: " + "[" * 5000 + "]" * 5000 + "\n", "configs/study.yaml:17", ""),
}

BROKEN_DATA = {
    "an unreadable number": (DATA.replace("47.1", "47,1"), "values.csv:3", ""),
    "a word for a number": (DATA.replace("47.1", "n/a"), "values.csv:3", "n/a"),
    "a blank cell": (DATA.replace("47.1", ""), "values.csv:3", "blank"),
    "not a number": (DATA.replace("47.1", "NaN"), "values.csv:3", "NaN"),
    "infinity": (DATA.replace("47.1", "inf"), "values.csv:3", "inf"),
    "below a limit": (DATA.replace("47.1", "<0.05"), "values.csv:3", "<0.05"),
    "more than 38 digits": (DATA.replace("47.1", "1" * 39), "values.csv:3", "38"),
    "an exponent bomb": (DATA.replace("47.1", "1e999999999"), "values.csv:3", "60"),
    "an undeclared level": (
        DATA.replace("turbidimetric,47.1", "turbidymetric,47.1"),
        "values.csv:3",
        "turbidimetric",
    ),
    "a duplicate header": (
        DATA.replace("method,sulfate", "method,sulfate,sulfate", 1),
        "values.csv:1",
        "sulfate",
    ),
    "a ragged row": (DATA.replace("47.1", "47.1,x"), "values.csv:3", ""),
    "a short row": (DATA.replace("turbidimetric,47.1", "turbidimetric"), "values.csv:3", ""),
    "a NUL byte": (DATA.replace("47.1", "47\0.1"), "values.csv:3", "NUL"),
    "Latin-1 text": (
        DATA.encode().replace(b"gravimetric,48.2", b"gravim\xe9tric,48.2"),
        "values.csv:2",
        "UTF-8",
    ),
    "UTF-16": (DATA.encode("utf-16"), "values.csv", "UTF-16"),
    "an empty file": ("", "values.csv", "empty"),
    "a header and nothing else": ("method,sulfate\n", "values.csv", ""),
    "a column that is not there": (DATA.replace("sulfate", "sulphate"), "values.csv:1", "sulphate"),
    "an unclosed quote": (DATA.replace("48.9", '"48.9'), "values.csv:8", "quot"),
    "a spreadsheet file": (b"PK\x03\x04" + b"\0" * 200, "values.csv", "spreadsheet"),
    "a level that is declared but absent": (
        DATA.replace("turbidimetric", "gravimetric"),
        "values.csv",
        "turbidimetric",
    ),
    "one value at every level": (
        "method,sulfate\ngravimetric,1\nturbidimetric,2\nchromatographic,3\n",
        "values.csv",
        "one value at every level",
    ),
}


def assert_refused(bench, place, words):
    answer = bench("run", bench.study)
    assert answer.code == 2
    assert place in answer.err
    assert words in answer.err
    assert "Traceback" not in answer.err + answer.out
    assert bench.files_in_runs() == {"audit-trail.jsonl", "audit-trail.head"}
    *before, refused = entries = bench.entries()
    data = refused["details"]["data"]
    assert refused["action"] == "refused"
    received = [entry for entry in before if entry["action"] == "received"]
    assert {entry["action"] for entry in before} <= {"founded", "settings", "received"}
    assert [entry["details"]["path"] for entry in received] == data
    seen = {bench.study: "configs/study.yaml", bench.data: "configs/data/values.csv"}
    for path, name in seen.items():
        if name in refused["details"]["inputs"]:
            assert refused["details"]["inputs"][name] == hashlib.sha256(path.read_bytes()).hexdigest()
    assert "configs/study.yaml" in refused["details"]["inputs"]
    assert bench("check", bench.study).code == 2
    assert bench.entries() == entries, "a check writes nothing"


@pytest.mark.parametrize("name", BROKEN_STUDIES)
def test_a_broken_study_is_refused_with_its_place(name, tmp_path):
    content, place, words = BROKEN_STUDIES[name]
    assert_refused(Bench(tmp_path / "w", content), place, words)


@pytest.mark.parametrize("name", BROKEN_DATA)
def test_broken_data_are_refused_with_their_place(name, tmp_path):
    content, place, words = BROKEN_DATA[name]
    assert_refused(Bench(tmp_path / "w", STUDY, content), place, words)


@pytest.mark.requirement("SOURCE-3")
def test_a_wrong_replicate_count_is_refused(tmp_path):
    study = STUDY.replace("alpha", "alpha", 1).replace("levels:", "replicates: 4\n  levels:")
    assert_refused(Bench(tmp_path / "w", study), "values.csv", "4")


def test_every_fault_is_told_in_one_pass(tmp_path):
    data = DATA.replace("47.1", "x").replace("48.6", "").replace("46.8", "NaN")
    answer = Bench(tmp_path / "w", STUDY, data)("run", tmp_path / "w/configs/study.yaml")
    assert [f"values.csv:{line}" in answer.err for line in (3, 4, 10)] == [True, True, True]


def test_a_fault_of_every_row_is_told_in_one_line_and_more_than_fifty_kinds_are_counted(tmp_path):
    bench = Bench(tmp_path / "w", STUDY, "method,sulfate\n" + "gravimetric,x\n" * 80)
    answer = bench("run", bench.study)
    assert answer.err.count("values.csv:") == 3  # of the values, and of two levels that are absent
    assert "the same 79 times more, at 3:13, 4:13" in answer.err
    bench.write(bench.data, "method,sulfate\n" + "".join(f"lot {n},1\n" for n in range(80)))
    answer = bench("run", bench.study)
    assert answer.err.count("values.csv:") == 50
    assert "and 33 more" in answer.err  # 30 levels that are not declared, and three that are absent


def test_a_missing_data_file_refuses_the_run_but_not_the_check(tmp_path):
    bench = Bench(tmp_path / "w", STUDY, None)
    assert bench("check", bench.study).code == 0
    answer = bench("run", bench.study)
    assert answer.code == 2
    assert "values.csv" in answer.err


@pytest.mark.requirement("SOURCE-1")
def test_a_data_file_reached_through_a_link_that_leaves_the_workspace_is_refused(tmp_path):
    bench = Bench(tmp_path / "w", STUDY, None)
    outside = tmp_path / "outside.csv"
    outside.write_text(DATA)
    bench.data.symlink_to(outside)
    answer = bench("run", bench.study)
    assert answer.code == 2
    assert "outside the workspace" in answer.err
