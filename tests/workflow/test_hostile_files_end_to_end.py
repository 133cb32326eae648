"""Broken and hostile files through the command line: refused with exit code 2 and a place, nothing altered.

How long each takes and how much memory is measured by `benchmarks/hostile_times.py`.
"""

import gzip
import hashlib
import os
import socket
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from pathlib import Path

import pytest

from observations.test_hostile_files import ALL, Hostile
from support.workspaces import Bench

STUDY = """\
study: HST-1
title: A study of files that are not what they should be
data:
  file: data/d.csv
  response: y
  factor: g
alpha: 0.05
sign-off:
  - {role: author, meaning: I performed this analysis}
"""
GOOD = "g,y\na,1.10\na,1.20\nb,1.30\nb,1.40\n"
EXCLUDING = STUDY.replace("  factor: g\n", "  factor: g\n  exclusions: data/x.yaml\n")

# What is said of files that are so large that they are not read whole.
TOO_LONG_A_LINE = "a line, or blank lines, of more than 8,000,000 bytes"
STREAMED = {
    "NUL bytes alone": (":1:1", TOO_LONG_A_LINE),
    "a quoted cell of 60 MB": (":3:1", TOO_LONG_A_LINE),
    "a cell of 60 MB": (":3:1", TOO_LONG_A_LINE),
    "marks without end": (":2:1", TOO_LONG_A_LINE),
    "two million rows": ("", "level `b` has no row"),
    "65 MB": (":2:1", TOO_LONG_A_LINE),
    "a bomb": (":1:1", TOO_LONG_A_LINE),
}


@dataclass(frozen=True)
class Kind:
    """A kind of hostile input: how a workspace comes by it, and place and words of the first fault.

    The place begins with the name of the file. Inside a file it has line and column, which `where` tells.
    """

    name: str
    make: Callable[[Path], Bench]
    place: str
    words: str


def data_kind(hostile: Hostile) -> Kind:
    """A data file as `test_hostile_files` has it."""
    name = Path(hostile.file).name

    def make(root: Path) -> Bench:
        study = STUDY.replace("d.csv", name)
        if hostile.plan.levels is not None:
            study = study.replace("  factor: g\n", "  factor: g\n  levels: [a, b]\n")
        if hostile.plan.sheet is not None:
            study = study.replace("  factor: g\n", f"  factor: g\n  sheet: {hostile.plan.sheet}\n")
        bench = Bench(root, study, None)
        bench.write(bench.data.with_name(name), hostile.make())
        return bench

    place, words = STREAMED.get(hostile.name, (hostile.place, hostile.found))
    return Kind(f"{name}: {hostile.name}", make, f"configs/data/{name}{place}", words)


def files(name: str, contents: Mapping[str, str | bytes], place: str, words: str, study: str = STUDY) -> Kind:
    """Files in configs/ beside a study."""

    def make(root: Path) -> Bench:
        bench = Bench(root, study, None)
        for path, content in contents.items():
            target = bench.study.parent / path
            target.parent.mkdir(exist_ok=True)
            bench.write(target, content)
        return bench

    return Kind(name, make, place, words)


def odd(name: str, arrange: Callable[[Bench], object], place: str, words: str, study: str = STUDY) -> Kind:
    """Something else than a file where the data are expected."""

    def make(root: Path) -> Bench:
        bench = Bench(root, study, None)
        arrange(bench)
        return bench

    return Kind(name, make, place, words)


def plan(name: str, study: str | bytes, place: str, words: str) -> Kind:
    """A study definition beside good data."""

    def make(root: Path) -> Bench:
        bench = Bench(root, study, None)
        bench.write(bench.data.with_name("d.csv"), GOOD)
        return bench

    return Kind(name, make, f"configs/study.yaml{place}", words)


def d_csv(bench: Bench) -> Path:
    return bench.data.with_name("d.csv")


def linked_out(bench: Bench) -> None:
    outside = bench.root.parent / "outside.csv"
    outside.write_text(GOOD)
    d_csv(bench).symlink_to(outside)


def folder_linked_out(bench: Bench) -> None:
    outside = bench.root.parent / "outside"
    outside.mkdir()
    (outside / "d.csv").write_text(GOOD)
    (bench.data.parent / "more").symlink_to(outside)


def loop(bench: Bench) -> None:
    d_csv(bench).symlink_to("e.csv")
    d_csv(bench).with_name("e.csv").symlink_to("d.csv")


def listening(bench: Bench) -> None:
    here = Path.cwd()
    os.chdir(bench.data.parent)  # the path of a socket may have 108 characters
    try:
        with socket.socket(socket.AF_UNIX) as made:
            made.bind("d.csv")
    finally:
        os.chdir(here)


def two_of_one_name(bench: Bench) -> None:
    for folder in ("data", "more"):
        (bench.study.parent / folder).mkdir(exist_ok=True)
        (bench.study.parent / folder / "d.csv").write_text(GOOD + f"b,{len(folder)}\n")


def of_files(*names: str) -> str:
    """The study with a list of data files."""
    return STUDY.replace("data/d.csv", f"[{', '.join(names)}]")


def exclusions(entry: str) -> dict[str, str | bytes]:
    """Good data and an exclusions file."""
    return {"data/d.csv": GOOD, "data/x.yaml": f"exclusions:\n  - {entry}\n"}


SOUND = "row: 2, value: '1.10', reason: leaked in filling, decided-by: A. Analyst, decided-at: 2026-03-04"

PLACES = [
    odd("no file", lambda bench: None, "configs/data/d.csv", "there is no such file"),
    odd("a link out of the workspace", linked_out, "configs/data/d.csv", "leads outside the workspace"),
    odd("a loop of links", loop, "configs/data/d.csv", "Symlink loop"),
    odd(
        "a link to nowhere",
        lambda bench: d_csv(bench).symlink_to("gone.csv"),
        "configs/data/d.csv",
        "no such file",
    ),
    odd(
        "a folder for a file", lambda bench: d_csv(bench).mkdir(), "configs/data/d.csv", "not a regular file"
    ),
    odd(
        "a pipe that nobody fills",
        lambda bench: os.mkfifo(d_csv(bench)),
        "configs/data/d.csv",
        "not a regular file",
    ),
    odd("a socket", listening, "configs/data/d.csv", "not a regular file"),
    odd(
        "a device without end",
        lambda bench: d_csv(bench).symlink_to("/dev/zero"),
        "configs/data/d.csv",
        "outside the workspace",
    ),
    odd(
        "a pattern in a folder that is elsewhere",
        folder_linked_out,
        "configs/data/more",
        "leads outside the workspace",
        STUDY.replace("data/d.csv", "data/more/*.csv"),
    ),
    files(
        "a pattern that fits nothing",
        {"data/e.csv": GOOD},
        "configs/data/d-*.csv",
        "no file has a name that fits",
        STUDY.replace("d.csv", "d-*.csv"),
    ),
    odd(
        "two files of one name",
        two_of_one_name,
        "configs/more/d.csv",
        "has the same file name as",
        of_files("data/d.csv", "more/d.csv"),
    ),
    files(
        "the same bytes twice",
        {"data/d.csv": GOOD, "data/e.csv": GOOD},
        "configs/data/e.csv",
        "holds the same bytes as",
        of_files("data/d.csv", "data/e.csv"),
    ),
    files(
        "a name that no folio can keep",
        {"data/d%0a.csv": GOOD},
        "configs/data/d%0a.csv",
        'it holds "%"',
        STUDY.replace("d.csv", "d?0a.csv"),
    ),
    files(
        "a second file with another header",
        {"data/d.csv": GOOD, "data/e.csv": "g,z\na,1\n"},
        "configs/data/e.csv:1:1",
        "no column `y`",
        of_files("data/d.csv", "data/e.csv"),
    ),
    files(
        "a bomb of lines",
        {"data/d.csv.gz": gzip.compress(b"g,y\n" + b"a,1                    \n" * 3_000_000, 9, mtime=0)},
        "configs/data/d.csv.gz",
        "inflates to more than 200 times its size",
        STUDY.replace("d.csv", "d.csv.gz"),
    ),
    files(
        "a fault behind 200,000 rows",
        {"data/d.csv": "g,y\n" + "a,1\nb,2\n" * 100_000 + "b,1.2.3\n"},
        "configs/data/d.csv:200002:3",
        "column `y` holds `1.2.3`: not a number",
    ),
    files(
        "a mark that opens behind 200,000 rows",
        {"data/d.csv": "g,y\n" + "a,1\nb,2\n" * 100_000 + 'b,"1\n'},
        "configs/data/d.csv:200002:3",
        "is not closed",
    ),
    files(
        "a stray mark after every 10,000 rows",
        {"data/d.csv": "g,y\n" + ("a,1\n" * 9_999 + 'a,1"\n') * 60},
        "configs/data/d.csv:10001:4",
        "a quotation mark inside a cell",
    ),
    files(
        "a NUL byte behind 200,000 rows",
        {"data/d.csv": "g,y\n" + "a,1\nb,2\n" * 100_000 + "b,1\0\n"},
        "configs/data/d.csv:200002:4",
        "a NUL byte",
    ),
]

EXCLUSIONS = [
    files(
        "no exclusions file",
        {"data/d.csv": GOOD},
        "configs/data/x.yaml",
        "there is no such file",
        EXCLUDING,
    ),
    files(
        "an exclusion without a reason",
        exclusions(f"{{{SOUND.replace('leaked in filling', 'outlier')}}}"),
        "configs/data/x.yaml:2:",
        "outlier",
        EXCLUDING,
    ),
    files(
        "an exclusion of a row that is not there",
        exclusions(f"{{{SOUND.replace('row: 2', 'row: 99')}}}"),
        "configs/data/x.yaml:2:",
        "99",
        EXCLUDING,
    ),
    files(
        "an exclusion of another value",
        exclusions(f"{{{SOUND.replace('1.10', '1.11')}}}"),
        "configs/data/x.yaml:2:",
        "1.11",
        EXCLUDING,
    ),
    files(
        "a million exclusions",
        {"data/d.csv": GOOD, "data/x.yaml": "exclusions:\n" + "  - {row: 2}\n" * 1_000_000},
        "configs/data/x.yaml",
        "",
        EXCLUDING,
    ),
]


def aliases() -> str:
    """Lists of lists of lists, each nine times the one before."""
    lines = ["a0: &a0 [x, x, x, x, x, x, x, x, x]"]
    lines += [f"a{n}: &a{n} [{', '.join([f'*a{n - 1}'] * 9)}]" for n in range(1, 12)]
    return "\n".join(lines) + "\n"


PLANS = [
    plan("aliases that multiply", STUDY.replace("A study", "&a A study") + aliases(), ":2:8", "anchor"),
    plan("lists in lists", STUDY + "x: " + "[" * 100_000 + "\n", ":10:", "nest"),
    plan("mappings in mappings", STUDY + "x: " + "{a: " * 100_000 + "\n", ":10:", "nest"),
    plan("steps without end", STUDY + "x:\n" + "".join(" " * n + "-\n" for n in range(1, 1000)), ":", ""),
    plan("20 MB", STUDY + "# padding\n" * 2_000_000, "", "bytes"),
    plan("a key twice", STUDY + "alpha: 0.01\n", ":10:1", "alpha"),
    plan(
        "an object to be made",
        STUDY.replace("A study", "!!python/object/apply:os.system [id]"),
        ":2:8",
        "tag",
    ),
    plan("a merge", STUDY + "x: {<<: {a: 1}}\n", ":10:", ""),
    plan("a NUL character", STUDY.replace("A study", "A\0study"), ":2:", ""),
    plan("UTF-16", STUDY.encode("utf-16"), ":1:1", "save the file as UTF-8"),
    plan("Latin-1", STUDY.encode().replace(b"A study", b"A st\xfcdy"), ":2:", "UTF-8"),
    plan("an override in the title", STUDY.replace("A study", "A \u202estudy"), ":2:", "U+202E"),
    plan("an escape sequence in the title", STUDY.replace("A study", '"\\e[2J"'), ":2:", ""),
    plan("alpha beyond all numbers", STUDY.replace("0.05", "1e999999999"), ":7:8", "1e999999999"),
    plan("a name that leaves its folder", STUDY.replace("HST-1", "../../x"), ":1:8", "../../x"),
    plan("a data file outside", STUDY.replace("data/d.csv", "../../../etc/passwd"), ":4:9", "passwd"),
    plan("an absolute data file", STUDY.replace("data/d.csv", "/etc/passwd"), ":4:9", "passwd"),
    plan("a data file by address", STUDY.replace("data/d.csv", "http://x.example/d.csv"), ":4:9", ""),
    plan("a data file of another drive", STUDY.replace("data/d.csv", "'C:\\\\x.csv'"), ":4:9", "x.csv"),
    plan("a pattern for a folder", STUDY.replace("data/d.csv", "'*/d.csv'"), ":4:9", ""),
    plan(
        "all digits of a number",
        STUDY.replace("factor: g", f"factor: g\n  replicates: {'9' * 5000}"),
        ":7:15",
        "",
    ),
    plan("no YAML at all", b"\x89PNG\r\n\x1a\n" + bytes(1000), ":1:1", ""),
    plan("nothing", "", "", "empty"),
]

NOT_THERE_YET = ("no file", "a pattern that fits nothing")
"""A plan can be checked before its data are there."""

KINDS = [*(data_kind(hostile) for hostile in ALL), *PLACES, *EXCLUSIONS, *PLANS]


def everything(root: Path) -> dict[str, str]:
    """What every entry below `root` is and holds; the trail and locks left out, nothing followed."""
    found: dict[str, str] = {}
    for folder, folders, names in os.walk(root):
        for name in [*folders, *names]:
            path = Path(folder, name)
            inside = path.relative_to(root).as_posix()
            if inside.startswith("runs/audit-trail") or name.endswith(".lock"):
                continue
            if path.is_symlink():
                found[inside] = f"link to {path.readlink()}"
            elif path.is_file():
                found[inside] = hashlib.sha256(path.read_bytes()).hexdigest()
            else:
                found[inside] = f"kind {path.lstat().st_mode:o}"
    return found


def test_at_least_forty_kinds_are_tried() -> None:
    assert len({kind.name for kind in KINDS}) == len(KINDS) >= 40


@pytest.mark.parametrize("kind", KINDS, ids=lambda kind: kind.name)
def test_a_hostile_input_is_refused_with_its_place_and_nothing_is_altered(kind: Kind, tmp_path: Path) -> None:
    bench = kind.make(tmp_path / "w")
    bench.runs.mkdir()
    before = everything(bench.root)
    answer = bench("run", bench.study)
    assert answer.code == 2, answer.err
    _, first, *_ = answer.err.splitlines()
    assert kind.place in first
    assert kind.words in first
    assert "Traceback" not in answer.out + answer.err
    assert all(line.isprintable() and len(line) < 1000 for line in answer.err.splitlines())
    assert everything(bench.root) == before
    *earlier, refused = entries = bench.entries()
    assert refused["action"] == "refused"
    assert {entry["action"] for entry in earlier} <= {"founded", "settings", "received"}
    checked = bench("check", bench.study)
    assert checked.code == (0 if kind.name in NOT_THERE_YET else 2)
    assert "Traceback" not in checked.out + checked.err
    assert bench.entries() == entries
    assert everything(bench.root) == before
