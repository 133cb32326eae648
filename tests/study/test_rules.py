"""What one section of a study definition rules out in another, and what is to be used instead."""

import pytest

from assayfolio.study.rules import RULES
from assayfolio.study.vocabulary import MEASUREMENT_KEYS
from study.examples import RECEIVED, SAMPLE, SEPARATE, SMALLEST, edited, faults_of, planned, with_data

ONE_VARIANCE = "which needs one variance for all levels, and `design.variances` is separate"
SAMPLE_ONLY = "with `design.effects: random` they are a mere sample"
NOT_FOR_A_SAMPLE = "use `precision` for the spread between levels, or `effects: fixed`"
NOT_SHARED = "and with `design.variances: separate` the levels share no repeatability"
TOGETHER = (
    "and `design.across-responses: holm` adjusts the rows of a family of all responses together, by Holm"
)
HOLM = "use `adjust: holm` (`none` for a single row), or `across-responses: bonferroni`"
OWN_COLUMN = "and with `data.layout: wide` every level has a column of its own"
ONE_ROW = "use `layout: long`, with one row a value, or leave it out"
SCORES = "scores: {reference: 0, north: 1, south: 2}"


def separate(section: str) -> str:
    """Three levels with a variance for each, `section` from line 10 on."""
    return planned("design: {variances: separate}\n" + section)


def sample(section: str) -> str:
    """Levels that are a sample, `section` from line 9 on."""
    return SMALLEST + "design: {effects: random}\n" + section


def responses(design: str, section: str) -> str:
    """Three levels and two responses, `section` from line 10 on."""
    two = edited(planned(f"design: {design}\n"), "response: mass", "response: [mass, density]")
    return two + section


def wide(*lines: str) -> str:
    """Two levels with a column each, `lines` in `data` from line 9 on."""
    return with_data("layout: wide", "levels: [a, b]", *lines)


REFUSED = {
    "units in a column beside wide columns": (
        wide("unit: g", "unit-column: u"),
        f"10:3: `data.unit-column` names a column beside the values, {OWN_COLUMN} - {ONE_ROW}",
    ),
    "an order in a column beside wide columns": (
        wide("order: position"),
        f"9:3: `data.order` names a column beside the values, {OWN_COLUMN} - {ONE_ROW}",
    ),
    "repeats in a column beside wide columns": (
        wide("replicate-unit: vial"),
        f"9:3: `data.replicate-unit` names a column beside the values, {OWN_COLUMN} - {ONE_ROW}",
    ),
    **{
        f"{key} in a column beside wide columns": (
            f"{wide()}measurement: {{{key}: {{column: sample}}}}\n",
            (
                f"10:15: `measurement.{key}` names a column beside the values, {OWN_COLUMN} - "
                "use `layout: long`, with one row a value, or write one text for all values"
            ),
        )
        for key in MEASUREMENT_KEYS
    },
    "two responses in wide columns": (
        edited(wide(), "mass\n", "[mass, ash]\n"),
        (
            f"5:3: `data.response` names several, {OWN_COLUMN}, for one response - "
            "use `layout: long`, with a column a response"
        ),
    ),
    "wide columns of levels that are not declared": (
        with_data("layout: wide"),
        (
            "7:11: `data.layout` is `wide`, and `data.levels` does not say which columns are those of levels "
            "- list the levels under `data.levels`"
        ),
    ),
    "a sheet of a text file": (
        with_data("sheet: Results"),
        "7:3: `data.sheet` is for spreadsheets, and `data.file` names no .xlsx file - leave it out",
    ),
    "an encoding of a spreadsheet": (
        edited(with_data("encoding: utf-16"), "values.csv", "values.xlsx"),
        (
            "7:13: `data.encoding` is `utf-16`, and a .xlsx file states its own encoding - "
            "leave it out; it is for text files"
        ),
    ),
    "units in a column without a unit to agree with": (
        with_data("unit-column: u"),
        (
            "7:3: `data.unit-column` has nothing to agree with, for `data.unit` is missing - "
            "add the unit of the values, such as `unit: mg/L`"
        ),
    ),
    "one column of units for responses with different ones": (
        edited(with_data("unit: {mass: g, ash: mg}", "unit-column: u"), "mass\n", "[mass, ash]\n"),
        (
            "8:3: `data.unit-column` is one for all responses, and `data.unit` gives them different units - "
            "leave it out, or use one unit for all responses"
        ),
    ),
    "a conversion of values without units of their own": (
        with_data("unit: g", "convert: {mg: 0.001}"),
        (
            "8:3: `data.convert` has nothing to convert, for no column gives the unit of each value - "
            "name that column, such as `unit-column: unit`, or leave it out"
        ),
    ),
    "codes for missing values, which are refused": (
        with_data("missing: refuse", "missing-codes: nil"),
        (
            "8:3: `data.missing-codes` is for missing values, and `data.missing` is refuse, as it is when "
            "left out - use `missing: omit`, or leave the codes out: an entry that is no number is refused "
            "anyway"
        ),
    ),
    "codes for values below a limit, which are refused": (
        with_data("limit-codes: {ND: 1}"),
        (
            "7:3: `data.limit-codes` is for values below a limit, and `data.below-limit` is refuse, as it is "
            "when left out - use `below-limit: omit`, `half-limit` or `limit`, or leave the codes out: they "
            "are refused anyway"
        ),
    ),
    "a worksheet of unknown levels": (
        with_data("replicates: 3") + "worksheet: {seed: 1}\n",
        (
            "9:1: `worksheet` is drawn from the levels, and `data.levels` is missing - "
            "list what will be measured under `data.levels`"
        ),
    ),
    "a worksheet of unknown length": (
        with_data("levels: [a, b]") + "worksheet: {seed: 1}\n",
        (
            "9:1: `worksheet` needs to know how often each level is measured, and `data.replicates` is "
            "missing - say how many values each level will have, such as `replicates: 6`"
        ),
    ),
    "a worksheet for wide columns": (
        wide("replicates: 3") + "worksheet: {seed: 1}\n",
        (
            "11:1: `worksheet` has one row a measurement, and `data.layout` is wide - "
            "use `layout: long`, with one row a value"
        ),
    ),
    "Tukey and Kramer with separate variances": (
        separate("comparisons: [{name: x, pairs: all, adjust: tukey-kramer}]\n"),
        (
            f"10:45: `comparisons.adjust` is `tukey-kramer`, {ONE_VARIANCE} - "
            "use `games-howell`, or `variances: pooled`"
        ),
    ),
    "Scheffe with separate variances": (
        separate("comparisons: [{name: x, pairs: all, adjust: scheffe}]\n"),
        (
            f"10:45: `comparisons.adjust` is `scheffe`, {ONE_VARIANCE} - "
            "use `holm`, `bonferroni` or `sidak`, or `variances: pooled`"
        ),
    ),
    "Scheffe for one contrast with separate variances": (
        separate("comparisons: [{name: x, weights: {north: 1, south: -1}, adjust: scheffe}]\n"),
        (
            f"10:65: `comparisons.adjust` is `scheffe`, {ONE_VARIANCE} - "
            "use `none` for a single comparison, or `variances: pooled`"
        ),
    ),
    "Scheffe for a linear trend with separate variances": (
        separate(f"comparisons: [{{name: x, trend: linear, adjust: scheffe, {SCORES}}}]\n"),
        (
            f"10:48: `comparisons.adjust` is `scheffe`, {ONE_VARIANCE} - "
            "use `none` for a single comparison, or `variances: pooled`"
        ),
    ),
    "Dunnett with separate variances": (
        separate("comparisons: [{name: x, against: north, adjust: dunnett}]\n"),
        (
            f"10:49: `comparisons.adjust` is `dunnett`, {ONE_VARIANCE} - "
            "use `holm`, `bonferroni` or `sidak`, or `variances: pooled`"
        ),
    ),
    "Dunnett in steps with separate variances": (
        separate("comparisons: [{name: x, against: north, adjust: dunnett-step-down}]\n"),
        (
            f"10:49: `comparisons.adjust` is `dunnett-step-down`, {ONE_VARIANCE} - "
            "use `holm`, `bonferroni` or `sidak`, or `variances: pooled`"
        ),
    ),
    "Games and Howell with a pooled variance": (
        planned("comparisons: [{name: x, pairs: all, adjust: games-howell}]\n"),
        (
            "9:45: `comparisons.adjust` is `games-howell`, which needs separate variances - "
            "use `design.variances: separate` with it, or another method such as `tukey-kramer`"
        ),
    ),
    "F with separate variances": (
        planned("design: {variances: separate, omnibus: f}\n"),
        (
            f"9:40: `design.omnibus` is `f`, {ONE_VARIANCE} - "
            "use `welch` or `brown-forsythe`, or `variances: pooled`"
        ),
    ),
    "Welch's test with a pooled variance": (
        planned("design: {omnibus: welch}\n"),
        (
            "9:19: `design.omnibus` is `welch`, which is for separate variances - "
            "use `f`, or `variances: separate`"
        ),
    ),
    "the test of Brown and Forsythe with a pooled variance": (
        planned("design: {variances: pooled, omnibus: brown-forsythe}\n"),
        (
            "9:38: `design.omnibus` is `brown-forsythe`, which is for separate variances - "
            "use `f`, or `variances: separate`"
        ),
    ),
    "Scheffe in one direction": (
        planned("comparisons: [{name: x, against: north, adjust: scheffe, alternative: less}]\n"),
        (
            "9:71: `comparisons.alternative` is `less`, and scheffe is two-sided by construction - "
            "use `two-sided`, or another method such as `holm` (`none` for a single comparison)"
        ),
    ),
    "Sidak for contrasts in one direction": (
        planned(
            "comparisons: [{name: x, contrasts: [{name: y, weights: {north: 1, south: -1}}], adjust: sidak, "
            "alternative: greater}]\n"
        ),
        (
            "9:109: `comparisons.alternative` is `greater`, and the inequality behind sidak is for two-sided "
            "contrasts - use `bonferroni` or `holm`, or `two-sided`"
        ),
    ),
    "Sidak for a trend in one direction": (
        planned(
            "comparisons: [{name: x, trend: polynomial, degree: 2, adjust: sidak, alternative: less, "
            f"{SCORES}}}]\n"
        ),
        (
            "9:83: `comparisons.alternative` is `less`, and the inequality behind sidak is for two-sided "
            "contrasts - use `bonferroni` or `holm`, or `two-sided`"
        ),
    ),
    "equivalence at an alpha of a half": (
        edited(
            planned("equivalence: [{name: x, pairs: all, margin: 1, adjust: holm}]\n"),
            "alpha: 0.05",
            "alpha: 0.5",
        ),
        (
            "8:1: `alpha` is 0.5 or more, with which no equivalence test can be made - "
            "write a smaller one, such as `alpha: 0.05`"
        ),
    ),
    "comparisons of random levels": (
        sample("comparisons: [{name: x, pairs: all, adjust: holm}]\n"),
        f"9:1: `comparisons` compares levels, but {SAMPLE_ONLY} - {NOT_FOR_A_SAMPLE}",
    ),
    "equivalence of random levels": (
        sample("equivalence: [{name: x, pairs: all, margin: 1, adjust: holm}]\n"),
        f"9:1: `equivalence` compares levels, but {SAMPLE_ONLY} - {NOT_FOR_A_SAMPLE}",
    ),
    "spread of random levels": (
        sample("spread: {against: a, adjust: holm}\n"),
        f"9:1: `spread` compares the variances of levels, but {SAMPLE_ONLY} - {NOT_FOR_A_SAMPLE}",
    ),
    "power for random levels": (
        sample("power: {difference: 1, sigma: 1, target: 0.9}\n"),
        f"9:1: `power` is about comparing levels, but {SAMPLE_ONLY} - {NOT_FOR_A_SAMPLE}",
    ),
    "an omnibus test of random levels": (
        SMALLEST + "design: {effects: random, omnibus: f}\n",
        f"8:27: `design.omnibus` compares levels, but {SAMPLE_ONLY} - {NOT_FOR_A_SAMPLE}",
    ),
    "separate variances of random levels": (
        SMALLEST + "design: {effects: random, variances: separate}\nprecision: {estimate: true}\n",
        (
            "8:38: `design.variances` is `separate`, for which there is no method here with "
            "`design.effects: random` - use `variances: pooled`"
        ),
    ),
    "precision with separate variances": (
        separate("precision: {estimate: true}\n"),
        (
            f"10:23: `precision.estimate` is `true`, {NOT_SHARED} - "
            "use `spread` or criteria on `level-sd`, or `variances: pooled`"
        ),
    ),
    "the conditions of fixed levels": (
        planned("precision: {estimate: true, conditions: reproducibility}\n"),
        (
            "9:29: `precision.conditions` names the total of a sample of levels, and `design.effects` is "
            "fixed - leave it out, or use `effects: random` if the levels are a sample"
        ),
    ),
    "a criterion on the spread between fixed levels": (
        planned("criteria: [{quantity: between-sd, at-most: 1}]\n"),
        (
            "9:23: `criteria.quantity` is `between-sd`, which only a sample of levels has, and "
            "`design.effects` is fixed - use a `repeatability-` quantity or `largest-difference`, or "
            "`effects: random`"
        ),
    ),
    "a criterion on the total of fixed levels": (
        planned("precision: {estimate: true}\ncriteria: [{quantity: total-rsd, at-most: 1}]\n"),
        (
            "10:23: `criteria.quantity` is `total-rsd`, which only a sample of levels has, and "
            "`design.effects` is fixed - use a `repeatability-` quantity or `largest-difference`, or "
            "`effects: random`"
        ),
    ),
    "a criterion on repeatability with separate variances": (
        separate("criteria: [{quantity: repeatability-limit, at-most: 1}]\n"),
        (
            f"10:23: `criteria.quantity` is `repeatability-limit`, {NOT_SHARED} - "
            "use `level-sd` or `level-rsd`, or `variances: pooled`"
        ),
    ),
    "a criterion on repeatability that nothing estimates": (
        planned("criteria: [{quantity: repeatability-sd, at-most: 1}]\n"),
        (
            "9:23: `criteria.quantity` is `repeatability-sd`, which `precision` has to estimate - "
            "add `precision: {estimate: true}`"
        ),
    ),
    "a criterion on a total that is not to be estimated": (
        sample("precision: {estimate: false}\ncriteria: [{quantity: total-sd, at-most: 1}]\n"),
        (
            "10:23: `criteria.quantity` is `total-sd`, which `precision` has to estimate - "
            "add `precision: {estimate: true}`"
        ),
    ),
    "an adjustment across one response": (
        planned("design: {across-responses: bonferroni}\n"),
        (
            "9:28: `design.across-responses` is `bonferroni`, and the study has one response - "
            "leave it out, or use `none`"
        ),
    ),
    "Tukey and Kramer under Holm across responses": (
        responses("{across-responses: holm}", "comparisons: [{name: x, pairs: all, adjust: tukey-kramer}]\n"),
        f"10:45: `comparisons.adjust` is `tukey-kramer`, {TOGETHER} - {HOLM}",
    ),
    "several rows without adjustment under Holm across responses": (
        responses("{across-responses: holm}", "comparisons: [{name: x, against: north, adjust: none}]\n"),
        f"10:49: `comparisons.adjust` is `none`, {TOGETHER} - {HOLM}",
    ),
    "Scheffe for one row under Holm across responses": (
        responses(
            "{across-responses: holm}",
            "comparisons: [{name: x, weights: {north: 1, south: -1}, adjust: scheffe}]\n",
        ),
        f"10:65: `comparisons.adjust` is `scheffe`, {TOGETHER} - {HOLM}",
    ),
    "equivalence by Bonferroni under Holm across responses": (
        responses(
            "{across-responses: holm}",
            "equivalence: [{name: x, against: north, margin: 1, adjust: bonferroni}]\n",
        ),
        f"10:60: `equivalence.adjust` is `bonferroni`, {TOGETHER} - {HOLM}",
    ),
    "one value at every level with separate variances": (
        edited(separate(""), "  levels:", "  replicates: 1\n  levels:"),
        (
            "7:3: `data.replicates` plans one value at a level, from which no variance can be estimated, and "
            "with `design.variances: separate` each level has its own - plan two values or more at every "
            "level, or use `variances: pooled`"
        ),
    ),
    "one value at one level with separate variances": (
        edited(separate(""), "  levels:", "  replicates: {reference: 4, north: 1, south: 3}\n  levels:"),
        (
            "7:3: `data.replicates` plans one value at a level, from which no variance can be estimated, and "
            "with `design.variances: separate` each level has its own - plan two values or more at every "
            "level, or use `variances: pooled`"
        ),
    ),
    "a criterion on the largest difference of random levels": (
        sample("criteria: [{quantity: largest-difference, at-most: 1}]\n"),
        (
            "9:23: `criteria.quantity` is `largest-difference`, which compares levels, but with "
            "`design.effects: random` they are a mere sample - use `between-sd`, or `effects: fixed`"
        ),
    ),
    "a criterion on the relative difference of random levels": (
        sample("criteria: [{quantity: largest-difference-percent, at-most: 1}]\n"),
        (
            "9:23: `criteria.quantity` is `largest-difference-percent`, which compares levels, but with "
            "`design.effects: random` they are a mere sample - use `between-sd`, or `effects: fixed`"
        ),
    ),
    "power with separate variances": (
        separate("power: {difference: 1, sigma: 1, target: 0.9}\n"),
        (
            "10:1: `power` needs one standard deviation, and `design.variances` is separate - "
            "leave it out: power is computed for a common standard deviation only"
        ),
    ),
    "an allocation to a control that is none": (
        planned("power: {difference: 1, sigma: 1, target: 0.9, allocation: control}\n"),
        (
            "9:59: `power.allocation` is `control`, and nothing is compared with a reference - "
            "use `equal`, or plan comparisons with `against`"
        ),
    ),
}


# A conversion without any unit breaks two rules at once, each at the key that it is about.
NO_UNIT_TO_CONVERT_TO = with_data("unit-column: u", "convert: {mg: 0.001}")


def test_a_conversion_needs_a_unit_to_convert_to() -> None:
    assert faults_of(NO_UNIT_TO_CONVERT_TO) == [
        REFUSED["units in a column without a unit to agree with"][1],
        (
            "8:3: `data.convert` has no unit to convert to, for `data.unit` is missing - "
            "add the unit to convert to, such as `unit: mg/L`"
        ),
    ]


@pytest.mark.parametrize(("text", "fault"), REFUSED.values(), ids=REFUSED.keys())
def test_it_is_refused_with_its_place_and_what_to_use_instead(text: str, fault: str) -> None:
    assert faults_of(text) == [fault]


@pytest.mark.parametrize("rule", RULES, ids=lambda rule: f"{rule.key} {' '.join(rule.words)}")
def test_every_rule_of_the_table_is_broken_by_one_of_these_studies(rule: object) -> None:
    faults = [*(fault for _, fault in REFUSED.values()), *faults_of(NO_UNIT_TO_CONVERT_TO)]
    key, why, instead = (getattr(rule, name) for name in ("key", "why", "instead"))
    assert any(f"`{key}`" in fault and fault.endswith(f"{why} - {instead}") for fault in faults)


LET_THROUGH = {
    "data as received": RECEIVED,
    "wide columns with facts that hold for all values": (
        wide("unit: g", "replicates: 2", "missing: omit", "missing-codes: nil", "header-row: 3")
        + "measurement: {operator: Somebody, lot: 7}\n"
    ),
    "a spreadsheet with a sheet and a text file with an encoding": edited(
        with_data("sheet: Results", "encoding: windows-1252"), "values.csv", "[a.xlsx, b.csv]"
    ),
    "a sheet in each of some spreadsheets": edited(
        with_data("sheet: Results", "encoding: utf-8"), "values.csv", '"run-*.xlsx"'
    ),
    "every method with one variance": planned(
        "comparisons:\n"
        "  - {name: a, pairs: all, adjust: scheffe}\n"
        "  - {name: b, against: north, adjust: dunnett-step-down, alternative: greater}\n"
        "  - {name: c, weights: {north: 1, south: -1}, adjust: scheffe}\n"
        f"  - {{name: d, trend: polynomial, degree: 2, {SCORES}, adjust: hochberg, alternative: less}}\n"
        "  - {name: e, against: north, adjust: sidak, alternative: less}\n"
    ),
    "separate variances": SEPARATE,
    "two values at every level with separate variances": edited(
        separate(""), "  levels:", "  replicates: {reference: 10, north: 2, south: 11}\n  levels:"
    ),
    "one value at one level with one variance": edited(
        planned(""), "  levels:", "  replicates: {reference: 1, north: 2, south: 1}\n  levels:"
    ),
    "a sample of levels": SAMPLE,
    "Welch's test with separate variances": separate("").replace("separate", "separate, omnibus: welch"),
    "repeatability within fixed levels": planned(
        "precision: {estimate: true}\ncriteria: [{quantity: repeatability-sd, at-most: 1}]\n"
    ),
    "Holm across responses": responses(
        "{across-responses: holm}",
        "comparisons:\n"
        "  - {name: a, pairs: all, adjust: holm}\n"
        "  - {name: b, weights: {north: 1, south: -1}, adjust: none}\n"
        f"  - {{name: c, trend: linear, {SCORES}}}\n"
        "equivalence: [{name: d, against: north, margin: 1, adjust: holm}]\n",
    ),
    "Bonferroni across responses beside any method": responses(
        "{across-responses: bonferroni}", "comparisons: [{name: a, pairs: all, adjust: tukey-kramer}]\n"
    ),
    "no adjustment across one response": planned("design: {across-responses: none}\n"),
    "an alpha of its own beside a large one": edited(
        planned("equivalence: [{name: x, pairs: all, margin: 1, adjust: holm, alpha: 0.05}]\n"),
        "alpha: 0.05\n",
        "alpha: 0.6\n",
    ),
    "an allocation to a control": planned(
        "spread: {against: north, adjust: holm}\n"
        "power: {difference: 1, sigma: 1, target: 0.9, allocation: control}\n"
    ),
}


@pytest.mark.parametrize("text", LET_THROUGH.values(), ids=LET_THROUGH.keys())
def test_what_no_rule_forbids_is_read(text: str) -> None:
    assert faults_of(text) == []


@pytest.mark.parametrize(
    "lines",
    [
        ["unti: g", "unit-column: u", "convert: {mg: 0.001}"],
        ["unit: [g]", "unit-column: u", "convert: {mg: 0.001}"],
        ["unit: g", "unit-colum: u", "convert: {mg: 0.001}"],
        ["missin: omit", "missing-codes: nil"],
        ["missing: skip", "missing-codes: nil"],
        ["layout: wide", "level: [a, b]"],
        ["layout: [wide]", "order: position"],
    ],
)
def test_data_that_cannot_be_read_are_not_held_against_the_rest(lines: list[str]) -> None:
    assert len(faults_of(with_data(*lines))) == 1


def test_levels_that_cannot_be_read_are_not_held_against_the_worksheet() -> None:
    for levels in ("levels: one", "level: [a, b]"):
        text = with_data(levels, "replicates: 4") + "worksheet: {seed: 1, block: day, blocks: [x, y, z]}\n"
        assert [fault.partition(":")[0] for fault in faults_of(text)] == ["7"]


def test_a_design_that_cannot_be_read_is_not_held_against_the_rest() -> None:
    for design in ("{variances: seperate}", "{varainces: separate}", "separate"):
        text = planned(f"design: {design}\ncomparisons: [{{name: x, pairs: all, adjust: games-howell}}]\n")
        assert [fault.partition(":")[0] for fault in faults_of(text)] == ["9"]


def test_a_precision_that_cannot_be_read_is_not_held_against_the_criteria() -> None:
    text = planned("precision: {estimate: yes}\ncriteria: [{quantity: repeatability-sd, at-most: 1}]\n")
    assert [fault.partition(":")[0] for fault in faults_of(text)] == ["9"]


def test_a_rule_holds_in_an_entry_of_which_other_parts_cannot_be_read() -> None:
    text = separate("comparisons: [{pairs: all, adjust: tukey-kramer, alternative: up}]\n")
    assert [fault.partition(": ")[0] for fault in faults_of(text)] == ["10:15", "10:36", "10:50", "10:63"]
