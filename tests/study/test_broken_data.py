"""What is refused of files, codes, units, facts and worksheet: in which words, and at which place."""

import pytest

from study.examples import SMALLEST, edited, faults_of, with_data

PATH = "expected a path below this file's folder, such as data/values.csv"
ONE_FILE = "only a `data.file` that stands alone may be a pattern"
LABEL = "expected one line of text of at most 80 characters"
ENDS = "one that ends as a decimal"
FACTOR = f"expected a number above 0, such as 1/1000, and {ENDS}"
HALVED = f"expected a number above 0, for `half-limit` halves it, and {ENDS}"
CODES = "expected codes alone; `below-limit` and `above-limit` are for such values"
SIGN = "which begins with the sign of a limit"

FILES = {
    "a pattern in a folder": (
        '"run-*/values.csv"',
        (
            "4:9: `data.file` is `run-*/values.csv`, with a * or ? in the name of a folder - "
            "expected a pattern in the last part only, such as data/run-*.csv"
        ),
    ),
    "a pattern that leaves the folder": (
        '"../*.csv"',
        f"4:9: `data.file` is `../*.csv`, which leaves the folder - {PATH}",
    ),
    "a pattern within a list": (
        '[a.csv, "b*.csv"]',
        f"4:17: `data.file` is `b*.csv`, with a * or ? - {PATH}; {ONE_FILE}",
    ),
    "a file twice": (
        "[a.csv, b.csv, a.csv]",
        "4:24: `data.file` holds `a.csv` twice - expected each once; it stands on line 4",
    ),
    "a list of no file": (
        "[]",
        (
            "4:9: `data.file` is an empty list - expected a file, a list of files, or a pattern for several, "
            "or leave the key out"
        ),
    ),
    "a file in a list that leaves the folder": (
        "[a.csv, ../b.csv]",
        f"4:17: `data.file` is `../b.csv`, which leaves the folder - {PATH}",
    ),
    "files as a mapping": (
        "{a: b.csv}",
        "4:9: `data.file` is a mapping - expected a file, a list of files, or a pattern for several",
    ),
}


@pytest.mark.requirement("SOURCE-1")
@pytest.mark.parametrize(("typed", "fault"), FILES.values(), ids=FILES.keys())
def test_a_file_is_refused_with_its_place_and_what_was_expected(typed: str, fault: str) -> None:
    assert faults_of(edited(SMALLEST, "values.csv", typed)) == [fault]


# Lines in `data` (from line 7 on), and the one fault.
DATA = {
    "an unknown encoding": (
        ["encoding: latin-1"],
        (
            "7:13: `data.encoding` is `latin-1` - "
            "expected utf-8, utf-16, windows-1252, iso-8859-1 or iso-8859-15"
        ),
    ),
    "a header row of nought": (
        ["header-row: 0"],
        "7:15: `data.header-row` is `0` - expected a whole number from 1 to 10000",
    ),
    "a layout of another name": (
        ["layout: width"],
        "7:11: `data.layout` is `width` - expected long or wide",
    ),
    "a policy that only values below a limit have": (
        ["above-limit: half-limit"],
        "7:16: `data.above-limit` is `half-limit` - expected refuse, omit or limit",
    ),
    "one column for units and values": (
        ["unit: g", "unit-column: mass"],
        (
            "8:3: the column `mass` is both `data.unit-column` and `data.response` - "
            "name the column that holds the units"
        ),
    ),
    "repeats told by the response": (
        ["replicate-unit: mass"],
        (
            "7:3: the column `mass` is both `data.replicate-unit` and `data.response` - "
            "name the column that holds what was measured repeatedly"
        ),
    ),
    "repeats told by the factor": (
        ["replicate-unit: balance"],
        (
            "7:3: the column `balance` is both `data.replicate-unit` and `data.factor` - "
            "name the column that holds what was measured repeatedly"
        ),
    ),
    "repeats told by the order": (
        ["order: position", "replicate-unit: position"],
        (
            "8:3: the column `position` is both `data.replicate-unit` and `data.order` - "
            "name the column that holds what was measured repeatedly"
        ),
    ),
    "a code twice": (
        ["missing: omit", "missing-codes: [n.d., nil, n.d.]"],
        "8:30: `data.missing-codes` holds `n.d.` twice - expected each once; it stands on line 8",
    ),
    "a blank code": (
        ["missing: omit", 'missing-codes: [""]'],
        f"8:19: `data.missing-codes` is empty - {LABEL}",
    ),
    "a limit as code of a missing value": (
        ["missing: omit", 'missing-codes: ["<0.05"]'],
        f"8:19: `data.missing-codes` is `<0.05`, {SIGN} - {CODES}",
    ),
    "a limit as code of a limit": (
        ["below-limit: limit", 'limit-codes: {"≤ 5": 5}'],
        f"8:17: `data.limit-codes` is `≤ 5`, {SIGN} - {CODES}",
    ),
    "codes without their limits": (
        ["below-limit: limit", "limit-codes: [ND]"],
        "8:16: `data.limit-codes` is a list - expected codes with their limits, such as {ND: 0.05}",
    ),
    "no code within the braces": (
        ["below-limit: limit", "limit-codes: {}"],
        (
            "8:16: `data.limit-codes` is an empty mapping - "
            "expected codes with their limits, such as {ND: 0.05}, or leave the key out"
        ),
    ),
    "a limit that never ends": (
        ["below-limit: limit", "limit-codes: {ND: 1/3}"],
        f"8:21: `data.limit-codes` is `1/3` - expected a number, such as 0.05, and {ENDS}",
    ),
    "a limit of nought to halve": (
        ["below-limit: half-limit", "limit-codes: {ND: 0.0}"],
        f"8:21: `data.limit-codes` is `0.0` - {HALVED}",
    ),
    "a code for two things": (
        ["missing: omit", "missing-codes: [ND, nil]", "below-limit: omit", "limit-codes: {low: 1, ND: 2}"],
        ("10:25: the code `ND` is also one of `data.missing-codes` - keep it under one of the two keys"),
    ),
    "a factor that never ends": (
        ["unit: g", "unit-column: u", "convert: {grain: 1/3}"],
        f"9:20: `data.convert` is `1/3` - {FACTOR}",
    ),
    "a factor of nought": (
        ["unit: g", "unit-column: u", "convert: {mg: 0}"],
        f"9:17: `data.convert` is `0` - {FACTOR}",
    ),
    "a factor below nought": (
        ["unit: g", "unit-column: u", "convert: {mg: -1/1000}"],
        f"9:17: `data.convert` is `-1/1000` - {FACTOR}",
    ),
    "a factor in words": (
        ["unit: g", "unit-column: u", "convert: {mg: thousandth}"],
        f"9:17: `data.convert` is `thousandth`, not a number - {FACTOR}",
    ),
    "a factor for the unit of the plan": (
        ["unit: g", "unit-column: u", "convert: {g: 1}"],
        "9:13: `data.convert` converts `g`, the unit of the plan itself - expected other units",
    ),
    "a conversion as a word": (
        ["unit: g", "unit-column: u", "convert: mg"],
        "9:12: `data.convert` is `mg` - expected units with their factors, such as {ug/L: 1/1000}",
    ),
    "exclusions outside the folder": (
        ["exclusions: ../out.yaml"],
        (
            "7:15: `data.exclusions` is `../out.yaml`, which leaves the folder - "
            "expected a path below this file's folder, such as data/exclusions.yaml"
        ),
    ),
    "exclusions by a pattern": (
        ['exclusions: "*.yaml"'],
        (
            "7:15: `data.exclusions` is `*.yaml`, with a * or ? - "
            f"expected a path below this file's folder, such as data/exclusions.yaml; {ONE_FILE}"
        ),
    ),
    "the data file as exclusions": (
        ["exclusions: values.csv"],
        (
            "7:15: `data.exclusions` is a data file, too - "
            "expected a file of its own that names rows with reasons"
        ),
    ),
}


@pytest.mark.parametrize(("lines", "fault"), DATA.values(), ids=DATA.keys())
def test_a_key_of_data_is_refused_with_its_place_and_what_was_expected(lines: list[str], fault: str) -> None:
    assert faults_of(with_data(*lines)) == [fault]


FACTS = {
    "facts as a word": (
        "measurement: nitrate",
        (
            "8:14: `measurement` is `nitrate` - expected a mapping with the keys measurand, method, "
            "method-version, item, lot, instrument, operator, measured-at and supplied-by"
        ),
    ),
    "a misspelt fact": (
        "measurement: {mesurand: nitrate}",
        "8:15: the key `mesurand` is not known in `measurement` - did you mean `measurand`?",
    ),
    "a fact that is a list": (
        "measurement: {operator: [a, b]}",
        (
            "8:25: `measurement.operator` is a list - "
            "expected a text, or a column of the data file such as {column: sample}"
        ),
    ),
    "an empty fact": (
        "measurement: {item: }",
        "8:21: `measurement.item` is empty - expected one line of text of at most 200 characters",
    ),
    "a column without its name": (
        "measurement: {item: {}}",
        "8:21: the key `measurement.item.column` is missing - add `column: ...`",
    ),
    "a misspelt column": (
        "measurement: {item: {colum: sample}}",
        "8:22: the key `colum` is not known in `measurement.item` - did you mean `column`?",
    ),
    "the column of the response": (
        "measurement: {item: {column: mass}}",
        (
            "8:22: `measurement.item` is the column `mass`, which holds the values of a response - "
            "name another column"
        ),
    ),
}


@pytest.mark.parametrize(("line", "fault"), FACTS.values(), ids=FACTS.keys())
def test_a_fact_is_refused_with_its_place_and_what_was_expected(line: str, fault: str) -> None:
    assert faults_of(f"{SMALLEST}{line}\n") == [fault]


SEED = "expected a whole number from 0 to 9007199254740991"
SHARE = "expected a number of blocks that divides the number of values of every level"
# `worksheet` on line 10, beside three values of `a` and four of `b`, `c`, `d` and `e`.
WORKSHEETS = {
    "no seed": ("{item: WP}", "10:12: the key `worksheet.seed` is missing - add `seed: ...`"),
    "a seed in words": ("{seed: chance}", f"10:19: `worksheet.seed` is `chance` - {SEED}"),
    "a seed below nought": ("{seed: -1}", f"10:19: `worksheet.seed` is `-1` - {SEED}"),
    "a seed that not every program can hold": (
        "{seed: 9007199254740992}",
        f"10:19: `worksheet.seed` is `9007199254740992` - {SEED}",
    ),
    "what it is blocked by without blocks": (
        "{seed: 1, block: day}",
        (
            "10:22: `worksheet.block` stands without `worksheet.blocks` - "
            "list the blocks, such as `blocks: [monday, tuesday]`"
        ),
    ),
    "a block twice": (
        "{seed: 1, block: day, blocks: [one, one]}",
        "10:48: `worksheet.blocks` holds `one` twice - expected each once; it stands on line 10",
    ),
    "one block": (
        "{seed: 1, block: day, blocks: [one]}",
        ("10:42: `worksheet.blocks` is only `one` - expected two blocks or more, or leave both keys out"),
    ),
    "blocks that divide only some levels": (
        "{seed: 1, block: day, blocks: [one, two]}",
        f"10:42: `worksheet.blocks` are 2, which cannot share equally the values of `a` (3) - {SHARE}",
    ),
    "blocks that divide few levels": (
        "{seed: 1, block: day, blocks: [one, two, three]}",
        (
            "10:42: `worksheet.blocks` are 3, which cannot share equally the values of "
            f"`b` (4), `c` (4), `d` (4) and 1 more - {SHARE}"
        ),
    ),
}


@pytest.mark.parametrize(("typed", "fault"), WORKSHEETS.values(), ids=WORKSHEETS.keys())
def test_a_worksheet_is_refused_with_its_place_and_what_was_expected(typed: str, fault: str) -> None:
    text = with_data("levels: [a, b, c, d, e]", "replicates: {a: 3, b: 4, c: 4, d: 4, e: 4}")
    assert faults_of(f"{text}worksheet: {typed}\n") == [fault]


@pytest.mark.parametrize(
    ("column", "key"),
    [
        ("mass", "response"),
        ("balance", "factor"),
        ("position", "order"),
        ("u", "unit-column"),
        ("vial", "replicate-unit"),
    ],
)
def test_blocks_are_none_of_the_columns_with_a_purpose_of_their_own(column: str, key: str) -> None:
    named = ["unit: g", "unit-column: u", "order: position", "replicate-unit: vial"]
    text = with_data("levels: [a, b]", "replicates: 2", *named)
    assert faults_of(f"{text}worksheet: {{seed: 1, block: {column}, blocks: [one, two]}}\n") == [
        (
            f"14:22: `worksheet.block` is `{column}`, which is `data.{key}` - "
            "name what the order is blocked by, such as day"
        )
    ]


def test_blocks_without_what_they_are_have_no_heading() -> None:
    text = with_data("levels: [a, b]", "replicates: 6") + "worksheet: {seed: 1, blocks: [one, two]}\n"
    assert faults_of(text) == [
        "10:22: `worksheet.blocks` stands without `worksheet.block` - say what they are, such as `block: day`"
    ]


def test_one_number_for_every_level_is_divided_too() -> None:
    text = with_data("levels: [a, b]", "replicates: 5")
    assert faults_of(f"{text}worksheet: {{seed: 1, block: day, blocks: [one, two]}}\n") == [
        (
            "10:42: `worksheet.blocks` are 2, which cannot share equally the values of `a` (5), `b` (5) - "
            f"{SHARE}"
        )
    ]


def test_faults_of_every_new_part_show_in_one_pass_and_in_the_order_of_the_file() -> None:
    text = """\
study: WTR-12
title: Nitrate
data:
  file: ["a.csv", "/b.csv"]
  encodings: utf-8
  header-row: four
  response: nitrate
  factor: kit
  convert: {mg: 0}
  missing-codes: nil
measurement: {item: {column: nitrate}}
worksheet: {seed: x}
alpha: 0.05
"""
    assert [fault.partition(": ")[0] for fault in faults_of(text)] == [
        "4:19",
        "5:3",
        "6:15",
        "9:3",
        "9:3",
        "9:17",
        "10:3",
        "11:22",
        "12:1",
        "12:1",
        "12:19",
    ]
