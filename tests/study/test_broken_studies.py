"""What is refused in a study definition: in which words, and at which place."""

import pytest

from study.examples import SMALLEST, edited, faults_of

PATH = "expected a path below this file's folder, such as data/values.csv"
ALPHA = "expected a number above 0 and below 1, such as 0.05"
CONFIDENCE = "expected a number above 0 and below 1, such as 0.95"
LABEL = "expected one line of text of at most 80 characters"
TITLE = "expected one line of text of at most 200 characters"
IDENTIFIER = "expected 1 to 40 capital letters, digits and hyphens, such as LOT-2024-07"
QUANTITIES = (
    "repeatability-sd, repeatability-rsd, repeatability-limit, between-sd, between-rsd, total-sd, total-rsd, "
    "largest-difference, largest-difference-percent, level-mean, level-sd or level-rsd"
)
COUNT = "expected a whole number from 1 to 1000000"
TOP_KEYS = (
    "study, title, purpose, data, measurement, worksheet, design, alpha, comparisons, equivalence, spread, "
    "outliers, checks, precision, power, criteria, trend, sign-off"
)
TITLE_LINE = "Two balances and a reference"

# What is changed in the smallest definition (an empty text: what is put behind it), and the one fault.
ONE_FAULT = {
    # keys
    "a misspelt key": ("alpha:", "aplha:", "7:1: the key `aplha` is not known here - did you mean `alpha`?"),
    "an abbreviated key": (
        "",
        "compar: []\n",
        "8:1: the key `compar` is not known here - did you mean `comparisons`?",
    ),
    "an underscore for a hyphen": (
        "  factor",
        "  below_limit: refuse\n  factor",
        "6:3: the key `below_limit` is not known in `data` - did you mean `below-limit`?",
    ),
    "a key of another program": (
        "",
        "seed: 7\n",
        f"8:1: the key `seed` is not known here - known here: {TOP_KEYS}",
    ),
    "no identifier": ("study: LOT-7\n", "", "1:1: the key `study` is missing - add `study: ...`"),
    "no alpha": ("alpha: 0.05\n", "", "1:1: the key `alpha` is missing - add `alpha: ...`"),
    "no factor": ("  factor: balance\n", "", "4:3: the key `data.factor` is missing - add `factor: ...`"),
    "no file": ("  file: values.csv\n", "", "4:3: the key `data.file` is missing - add `file: ...`"),
    # identifier and texts
    "a small letter in the identifier": (
        "LOT-7",
        "Lot-7",
        f"1:8: `study` is `Lot-7` - {IDENTIFIER}",
    ),
    "a folder in the identifier": ("LOT-7", "../X", f"1:8: `study` is `../X` - {IDENTIFIER}"),
    "a full-width digit in the identifier": ("LOT-7", "LOT-７", f"1:8: `study` is `LOT-７` - {IDENTIFIER}"),
    "an identifier of 41 characters": (
        "LOT-7",
        "A" * 41,
        f"1:8: `study` is `{'A' * 41}` - {IDENTIFIER}",
    ),
    "an empty title": (TITLE_LINE, "", f"2:7: `title` is empty - {TITLE}"),
    "null as title": (TITLE_LINE, "null", f"2:8: `title` is empty - {TITLE}"),
    "a tilde as title": (TITLE_LINE, "~", f"2:8: `title` is empty - {TITLE}"),
    "a list as title": (TITLE_LINE, "[a, b]", f"2:8: `title` is a list - {TITLE}"),
    "a mapping as title": (TITLE_LINE, "{a: b}", f"2:8: `title` is a mapping - {TITLE}"),
    "a title of 201 characters": (TITLE_LINE, "t" * 201, f"2:8: `title` has 201 characters - {TITLE}"),
    "a title of two lines": (TITLE_LINE, '"a\\nb"', f"2:8: `title` has more than one line - {TITLE}"),
    "a title with an outer blank": (
        TITLE_LINE,
        '" Two"',
        "2:8: `title` is ` Two`, with a blank at an end - expected text without outer blanks",
    ),
    "a title that the font cannot set": (
        TITLE_LINE,
        "Water 水",
        (
            "2:14: `title` holds U+6C34 CJK UNIFIED IDEOGRAPH-6C34, which the report's font cannot set - "
            "write it with other characters"
        ),
    ),
    "a quoted title that the font cannot set": (
        TITLE_LINE,
        "'Water 水'",
        (
            "2:15: `title` holds U+6C34 CJK UNIFIED IDEOGRAPH-6C34, which the report's font cannot set - "
            "write it with other characters"
        ),
    ),
    "an escaped invisible character": (
        TITLE_LINE,
        '"Water\\u202e"',
        (
            "2:8: `title` holds U+202E RIGHT-TO-LEFT OVERRIDE, which the report's font cannot set - "
            "write it with other characters"
        ),
    ),
    "a blank purpose": (
        "",
        'purpose: " "\n',
        "8:10: `purpose` is blank - expected text of at most 4000 characters",
    ),
    # data
    "data that are no mapping": (
        "data:\n  file: values.csv\n  response: mass\n  factor: balance\n",
        "data: values.csv\n",
        (
            "3:7: `data` is `values.csv` - "
            "expected a mapping with the keys file, encoding, sheet, header-row, layout, response, factor, "
            "unit, unit-column, convert, order, levels, replicates, replicate-unit, missing, missing-codes, "
            "below-limit, limit-codes, above-limit, decimal-mark and exclusions"
        ),
    ),
    "a file above the folder": (
        "values.csv",
        "../values.csv",
        f"4:9: `data.file` is `../values.csv`, which leaves the folder - {PATH}",
    ),
    "a file that climbs out by the way": (
        "values.csv",
        "a/../../b.csv",
        f"4:9: `data.file` is `a/../../b.csv`, which leaves the folder - {PATH}",
    ),
    "an absolute path": (
        "values.csv",
        "/srv/values.csv",
        f"4:9: `data.file` is `/srv/values.csv`, an absolute path - {PATH}",
    ),
    "a drive": ("values.csv", "C:v.csv", f"4:9: `data.file` is `C:v.csv`, an absolute path - {PATH}"),
    "a backslash": (
        "values.csv",
        "a\\v.csv",
        f"4:9: `data.file` is `a\\v.csv`, with a backslash - {PATH}; write / between folders",
    ),
    "an address on the net": (
        "values.csv",
        "file://v.csv",
        f"4:9: `data.file` is `file://v.csv`, with an empty part or a single point - {PATH}",
    ),
    "a folder for a file": (
        "values.csv",
        "data/",
        f"4:9: `data.file` is `data/`, with an empty part or a single point - {PATH}",
    ),
    "one column for two things": (
        "factor: balance",
        "factor: mass",
        (
            "6:3: the column `mass` is both `data.factor` and `data.response` - "
            "name the column that holds the levels"
        ),
    ),
    "a response twice": (
        "response: mass",
        "response: [mass, mass]",
        "5:20: `data.response` holds `mass` twice - expected each once; it stands on line 5",
    ),
    "no response in the list": (
        "response: mass",
        "response: []",
        (
            "5:13: `data.response` is an empty list - "
            "expected a column, or a list of columns, or leave the key out"
        ),
    ),
    "levels that are no list": (
        "alpha",
        "  levels: north\nalpha",
        "7:11: `data.levels` is `north` - expected a list of levels, such as [lot-a, lot-b]",
    ),
    "one level": (
        "alpha",
        "  levels: [north]\nalpha",
        (
            "7:11: `data.levels` declares only `north`, which leaves nothing to compare - "
            "expected two levels or more, or leave the key out"
        ),
    ),
    "a level twice": (
        "alpha",
        "  levels:\n    - north\n    - south\n    - north\nalpha",
        "10:7: `data.levels` holds `north` twice - expected each once; it stands on line 8",
    ),
    "a unit without text": ("alpha", "  unit:\nalpha", f"7:8: `data.unit` is empty - {LABEL}"),
    "an empty level": ("alpha", "  levels:\n    - a\n    -\nalpha", f"9:6: `data.levels` is empty - {LABEL}"),
    "a level of 81 characters": (
        "alpha",
        f"  levels: [a, {'b' * 81}]\nalpha",
        f"7:15: `data.levels` has 81 characters - {LABEL}",
    ),
    "no replicates": ("alpha", "  replicates: 0\nalpha", f"7:15: `data.replicates` is `0` - {COUNT}"),
    "half a replicate": ("alpha", "  replicates: 2.5\nalpha", f"7:15: `data.replicates` is `2.5` - {COUNT}"),
    "a negative number of replicates": (
        "alpha",
        "  replicates: -3\nalpha",
        f"7:15: `data.replicates` is `-3` - {COUNT}",
    ),
    "replicates as a list": (
        "alpha",
        "  replicates: [3, 3]\nalpha",
        (
            "7:15: `data.replicates` is a list - "
            "expected a whole number, or a mapping of levels to whole numbers"
        ),
    ),
    "replicates of an unknown level": (
        "alpha",
        "  levels: [north, south]\n  replicates: {north: 3, south: 3, sout: 3}\nalpha",
        (
            "8:36: `data.replicates` names the level `sout`, which is not declared - "
            "expected one of `data.levels`; did you mean `south`?"
        ),
    ),
    "replicates of too few levels": (
        "alpha",
        "  levels: [north, south]\n  replicates: {north: 3}\nalpha",
        "8:15: `data.replicates` gives no number for `south` - expected one for each declared level",
    ),
    "an unknown way with missing values": (
        "alpha",
        "  missing: skip\nalpha",
        "7:12: `data.missing` is `skip` - expected refuse or omit",
    ),
    "a decimal mark as a sign": (
        "alpha",
        '  decimal-mark: ","\nalpha',
        "7:17: `data.decimal-mark` is `,` - expected point or comma",
    ),
    # numbers
    "alpha with a decimal comma": (
        "0.05",
        "0,05",
        f"7:8: `alpha` is `0,05`, not a number: it holds a comma - {ALPHA}",
    ),
    "alpha in percent": ("0.05", "5%", f"7:8: `alpha` is `5%`, not a number - {ALPHA}"),
    "alpha of nought": ("0.05", "0", f"7:8: `alpha` is `0` - {ALPHA}"),
    "alpha of one": ("0.05", "1.0", f"7:8: `alpha` is `1.0` - {ALPHA}"),
    "alpha that is not a number": ("0.05", ".nan", f"7:8: `alpha` is `.nan`, not a number - {ALPHA}"),
    "alpha divided by nought": ("0.05", "1/0", f"7:8: `alpha` is `1/0`, a division by zero - {ALPHA}"),
    "alpha of 39 digits": (
        "0.05",
        f"0.{'1' * 39}",
        f"7:8: `alpha` is `0.{'1' * 39}`, more than 38 digits (39) - {ALPHA}",
    ),
    "alpha with a far exponent": (
        "0.05",
        "1e-99999999999",
        f"7:8: `alpha` is `1e-99999999999`, the power of ten is beyond +-60 - {ALPHA}",
    ),
    "alpha in other digits": ("0.05", "٠.٠٥", f"7:8: `alpha` is `٠.٠٥`, not a number - {ALPHA}"),
    # design and checks
    "unknown variances": (
        "",
        "design: {variances: equal}\n",
        "8:21: `design.variances` is `equal` - expected pooled or separate",
    ),
    "misspelt effects": (
        "",
        "design: {effects: fixd}\n",
        "8:19: `design.effects` is `fixd` - expected fixed or random; did you mean `fixed`?",
    ),
    "an unknown omnibus test": (
        "",
        "design: {omnibus: anova}\n",
        "8:19: `design.omnibus` is `anova` - expected f, welch or brown-forsythe",
    ),
    "a method for false discoveries across responses": (
        "",
        "design: {across-responses: bh}\n",
        (
            "8:28: `design.across-responses` is `bh` - expected none, bonferroni or holm; methods that "
            "control the rate of false discoveries are not offered, because planned comparisons and tests "
            "are confirmatory"
        ),
    ),
    "an unknown check": (
        "",
        "checks: {equal-variances: levine}\n",
        (
            "8:27: `checks.equal-variances` is `levine` - "
            "expected brown-forsythe, levene, bartlett or cochran; "
            "did you mean `levene`?"
        ),
    ),
    "a check twice": (
        "",
        "checks: {normality: [shapiro-wilk, shapiro-wilk]}\n",
        ("8:36: `checks.normality` holds `shapiro-wilk` twice - expected each once; it stands on line 8"),
    ),
    "an unknown check in a list": (
        "",
        "checks: {normality: [shapiro-wilk, shapiro-wilks]}\n",
        (
            "8:36: `checks.normality` is `shapiro-wilks` - expected shapiro-wilk or anderson-darling; "
            "did you mean `shapiro-wilk`?"
        ),
    ),
    "no check in the list": (
        "",
        "checks: {normality: []}\n",
        (
            "8:21: `checks.normality` is an empty list - expected a check, or a list of checks, "
            "or leave the key out"
        ),
    ),
    "a misspelt outlier test": (
        "",
        "outliers: {test: [grubbs, grubbs-duble]}\n",
        (
            "8:27: `outliers.test` is `grubbs-duble` - expected grubbs, grubbs-double or cochran; "
            "did you mean `grubbs-double`?"
        ),
    ),
    "an outlier test as a word": (
        "",
        "outliers: grubbs\n",
        "8:11: `outliers` is `grubbs` - expected a mapping with the keys test",
    ),
    "an order that is the response": (
        "alpha",
        "  order: mass\nalpha",
        (
            "7:3: the column `mass` is both `data.order` and `data.response` - "
            "name the column that holds the measuring order"
        ),
    ),
    "an order that is the factor": (
        "alpha",
        "  order: balance\nalpha",
        (
            "7:3: the column `balance` is both `data.order` and `data.factor` - "
            "name the column that holds the measuring order"
        ),
    ),
    "the unit of another response": (
        "alpha",
        "  unit: {mass: g, mas: mg}\nalpha",
        (
            "7:19: `data.unit` names `mas`, which is no response of the study - "
            "expected one of `data.response`; did you mean `mass`?"
        ),
    ),
    "a response without its unit": (
        "response: mass\n  factor: balance",
        "response: [mass, density]\n  factor: balance\n  unit: {mass: g}",
        (
            "7:9: `data.unit` gives no unit for `density` - "
            'expected one for each response, "1" for a pure number'
        ),
    ),
    "units as a list": (
        "alpha",
        "  unit: [g]\nalpha",
        f"7:9: `data.unit` is a list - {LABEL}",
    ),
    "no unit within the braces": (
        "alpha",
        "  unit: {}\nalpha",
        ("7:9: `data.unit` is an empty mapping - expected a unit for each response, or leave the key out"),
    ),
    # precision, power, criteria, sign-off
    "conditions of another name": (
        "",
        "design: {effects: random}\nprecision: {estimate: true, conditions: intermediate}\n",
        (
            "9:41: `precision.conditions` is `intermediate` - expected intermediate-precision or "
            "reproducibility; did you mean `intermediate-precision`?"
        ),
    ),
    "an unknown allocation": (
        "",
        "power: {difference: 1, sigma: 1, target: 0.9, allocation: even}\n",
        "8:59: `power.allocation` is `even` - expected equal or control",
    ),
    "power for one of two responses that is not named": (
        "response: mass\n  factor: balance\nalpha: 0.05\n",
        (
            "response: [mass, density]\n  factor: balance\nalpha: 0.05\n"
            "power: {difference: 1, sigma: 1, target: 0.9}\n"
        ),
        (
            "8:8: the key `power.response` is missing; the study has several responses - "
            "add the one that `difference` and `sigma` are about"
        ),
    ),
    "power for a response that is none": (
        "",
        "power: {difference: 1, sigma: 1, target: 0.9, response: masse}\n",
        (
            "8:57: `power.response` names `masse`, which is no response of the study - "
            "expected one of `data.response`; did you mean `mass`?"
        ),
    ),
    "yes for true": (
        "",
        "precision: {estimate: yes}\n",
        "8:23: `precision.estimate` is `yes` - expected true or false",
    ),
    "a confidence in percent": (
        "",
        "precision: {estimate: true, confidence: 95}\n",
        f"8:41: `precision.confidence` is `95` - {CONFIDENCE}",
    ),
    "a spread below nought": (
        "",
        "power: {difference: 1, sigma: -1, target: 0.9}\n",
        "8:31: `power.sigma` is `-1` - expected a number above 0",
    ),
    "no target of power": (
        "",
        "power: {difference: 1, sigma: 1}\n",
        "8:8: the key `power.target` is missing - add `target: ...`",
    ),
    "a criterion without a limit": (
        "",
        "criteria: [{quantity: largest-difference}]\n",
        "8:12: an entry of `criteria` has no limit - write `at-most`, `at-least` or both",
    ),
    "a criterion that nothing can meet": (
        "",
        "criteria: [{quantity: largest-difference, at-most: 1, at-least: 2}]\n",
        (
            "8:55: `criteria.at-least` is above `criteria.at-most`, so that nothing can meet both - "
            "exchange or correct them"
        ),
    ),
    "a quantity in words": (
        "",
        "criteria: [{quantity: Relative SD, at-most: 1}]\n",
        f"8:23: `criteria.quantity` is `Relative SD` - expected {QUANTITIES}",
    ),
    "a misspelt quantity": (
        "",
        "criteria: [{quantity: level_rsd, at-most: 1, level: north}]\n",
        f"8:23: `criteria.quantity` is `level_rsd` - expected {QUANTITIES}; did you mean `level-rsd`?",
    ),
    "a criterion on a level without its name": (
        "",
        "criteria: [{quantity: level-sd, at-most: 1}]\n",
        "8:12: the key `criteria.level` is missing; `level-sd` is about one level - add `level: ...`",
    ),
    "a criterion on all levels with the name of one": (
        "",
        "criteria: [{quantity: largest-difference, at-most: 1, level: north}]\n",
        (
            "8:55: `criteria.level` stands beside `largest-difference`, which is about all levels - "
            "leave it out, or use a quantity such as `level-sd`"
        ),
    ),
    "a relative criterion in a unit of mass": (
        "",
        "criteria: [{quantity: largest-difference-percent, at-most: 1, unit: g}]\n",
        (
            "8:69: `criteria.unit` is `g`, and `largest-difference-percent` is in percent - "
            'expected "%", or leave the key out'
        ),
    ),
    "a criterion in a unit that the data do not state": (
        "",
        "criteria: [{quantity: largest-difference, at-most: 1, unit: g}]\n",
        (
            "8:61: `criteria.unit` is `g`, and `data.unit` gives no unit for `mass` - "
            "expected the unit under `data.unit`, or leave the key out"
        ),
    ),
    "a criterion in another unit than the data": (
        "  factor: balance\nalpha: 0.05\n",
        (
            "  factor: balance\n  unit: mg\nalpha: 0.05\n"
            "criteria: [{quantity: largest-difference, at-most: 1, unit: g}]\n"
        ),
        (
            "9:61: `criteria.unit` is `g`, and the unit of `mass` is `mg` - "
            "expected `mg`, or leave the key out"
        ),
    ),
    "a criterion in the unit of one of two responses": (
        "response: mass\n  factor: balance\nalpha: 0.05\n",
        (
            "response: [mass, density]\n  factor: balance\n  unit: {mass: g, density: g/mL}\n"
            "alpha: 0.05\ncriteria: [{quantity: largest-difference, at-most: 1, unit: g}]\n"
        ),
        (
            "9:61: `criteria.unit` is `g`, and the unit of `density` is `g/mL` - "
            "expected `g/mL`, or leave the key out; `response` limits a criterion to one response"
        ),
    ),
    "a criterion on a response that is none": (
        "",
        "criteria: [{quantity: largest-difference, at-most: 1, response: density}]\n",
        (
            "8:65: `criteria.response` names `density`, which is no response of the study - "
            "expected one of `data.response`"
        ),
    ),
    "a role twice": (
        "",
        "sign-off:\n  - {role: author, meaning: a}\n  - {role: author, meaning: b}\n",
        "10:12: `sign-off.role` holds `author` twice - expected each once; it stands on line 9",
    ),
    "an unknown role": (
        "",
        "sign-off: [{role: witness, meaning: a}]\n",
        "8:19: `sign-off.role` is `witness` - expected author, reviewer or approver",
    ),
    "a signature that means nothing": (
        "",
        'sign-off: [{role: author, meaning: ""}]\n',
        f"8:36: `sign-off.meaning` is empty - {TITLE}",
    ),
    "sign-off as an empty list": (
        "",
        "sign-off: []\n",
        (
            "8:11: `sign-off` is an empty list - expected a list of entries, each beginning with a hyphen, "
            "or leave the key out"
        ),
    ),
    "a comparison that is a word": (
        "",
        "comparisons: [all]\n",
        (
            "8:15: `comparisons` is `all` - "
            "expected a mapping with the keys name, against, pairs, weights, contrasts, trend, degree, "
            "scores, adjust and alternative"
        ),
    ),
}


@pytest.mark.parametrize(("old", "new", "fault"), ONE_FAULT.values(), ids=ONE_FAULT.keys())
def test_it_is_refused_with_its_place_and_what_was_expected(old: str, new: str, fault: str) -> None:
    assert faults_of(edited(SMALLEST, old, new)) == [fault]


def test_five_different_faults_show_in_one_pass_and_in_the_order_of_the_file() -> None:
    text = """\
study: lot 7
title: Two balances
data:
  file: /values.csv
  response: mass
  faktor: balance
alpha: 5
outliers: {test: dixon}
"""
    assert faults_of(text) == [
        f"1:8: `study` is `lot 7` - {IDENTIFIER}",
        f"4:9: `data.file` is `/values.csv`, an absolute path - {PATH}",
        "6:3: the key `faktor` is not known in `data` - did you mean `factor`?",
        f"7:8: `alpha` is `5` - {ALPHA}",
        "8:18: `outliers.test` is `dixon` - expected grubbs, grubbs-double or cochran",
    ]


@pytest.mark.requirement("PLAN-3", "RECORD-13")
def test_an_empty_mapping_lacks_all_that_is_compulsory() -> None:
    assert faults_of("{}") == [
        "1:1: the key `study` is missing - add `study: ...`",
        "1:1: the key `title` is missing - add `title: ...`",
        "1:1: the key `alpha` is missing - add `alpha: ...`",
        "1:1: the key `data` is missing - add `data: ...`",
    ]


def test_a_misspelt_key_is_not_reported_as_missing_too() -> None:
    text = edited(SMALLEST, "study:", "stady:")
    assert faults_of(text) == ["1:1: the key `stady` is not known here - did you mean `study`?"]


def test_more_than_a_hundred_faults_are_counted_rather_than_listed() -> None:
    from assayfolio.errors import StudyError
    from assayfolio.study.reading import read_study

    text = SMALLEST + "".join(f"unheard-of-{number}: 1\n" for number in range(130))
    with pytest.raises(StudyError, match=r"\(130 faults\)") as refusal:
        read_study(text.encode(), "plan.yaml")
    assert (len(refusal.value.faults), refusal.value.hidden) == (100, 30)


def test_the_headline_names_the_file_and_says_that_nothing_was_done() -> None:
    from assayfolio.errors import StudyError
    from assayfolio.study.reading import read_study

    with pytest.raises(StudyError) as refusal:
        read_study(b"{}", "configs/lot.yaml")
    assert refusal.value.headline == (
        "configs/lot.yaml: the study definition cannot be used (4 faults); nothing was analysed"
    )
