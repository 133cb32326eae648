"""What one section of a definition rules out in another: a table of refusals, each with what to use instead.

The rules speak of words as they were typed, so that they hold in an entry of which other parts cannot be
read. A word that is misspelt breaks no rule: it is reported where it stands.
"""

from fractions import Fraction

from assayfolio.study.adjustments import several_rows
from assayfolio.study.data_rules import DATA_RULES
from assayfolio.study.faults import Faults
from assayfolio.study.nodes import MappingNode, ScalarNode
from assayfolio.study.rule import Outline, Rule, mappings, places, word_of
from assayfolio.study.vocabulary import ACROSS_RESPONSES, ADJUSTMENTS, EQUIVALENCE_ADJUSTMENTS, QUANTITIES


def report_breaches(outline: Outline, faults: Faults) -> None:
    """Report every rule that the definition breaks, each at the word or key that breaks it."""
    for rule in RULES:
        for mapping, entry in places(outline.root, rule.key):
            word = entry.value.text if isinstance(entry.value, ScalarNode) else None
            if rule.words and word in rule.words and rule.broken(outline, mapping):
                faults.add(entry.value.place, f"`{rule.key}` is `{word}`{rule.why}", rule.instead)
            elif not rule.words and rule.broken(outline, mapping):
                faults.add(entry.key.place, f"`{rule.key}`{rule.why}", rule.instead)


def _several_rows(outline: Outline, mapping: MappingNode) -> bool:
    """Whether the family has, or could have, more than one row."""
    keys = {entry.key.text for entry in mapping.entries}
    return several_rows(keys, word_of(mapping, "trend"), outline.levels or ()) is not False


def _separate_and_one_row(outline: Outline, mapping: MappingNode) -> bool:
    return outline.separate and not _several_rows(outline, mapping)


def _separate_and_several_rows(outline: Outline, mapping: MappingNode) -> bool:
    return outline.separate and _several_rows(outline, mapping)


def _sidak_of_contrasts(_: Outline, mapping: MappingNode) -> bool:
    of_contrasts = mapping.entry("contrasts") is not None or mapping.entry("trend") is not None
    return of_contrasts and word_of(mapping, "adjust") == "sidak"


def _beyond_holm(outline: Outline, mapping: MappingNode) -> bool:
    """Whether the family cannot be adjusted together with the same family of the other responses."""
    if outline.across_responses != "holm" or outline.levels is None or len(outline.responses or ()) < 2:
        return False
    return word_of(mapping, "adjust") != "none" or _several_rows(outline, mapping)


def _without_reference(outline: Outline, _: MappingNode) -> bool:
    keys = [f"{section}.against" for section in ("comparisons", "equivalence", "spread")]
    return not outline.random and not any(list(places(outline.root, key)) for key in keys)


def _too_large_for_equivalence(outline: Outline, _: MappingNode) -> bool:
    return (
        outline.alpha is not None
        and outline.alpha >= Fraction(1, 2)
        and any(entry.entry("alpha") is None for entry in mappings(outline.root, "equivalence"))
    )


def _without_estimates(outline: Outline, mapping: MappingNode) -> bool:
    if outline.estimates is not False or outline.separate:
        return False
    return outline.random or (outline.fixed and word_of(mapping, "quantity") in _WITHIN)


def _one_value_at_a_level(outline: Outline, mapping: MappingNode) -> bool:
    """Whether the levels have a variance each, and one of them is to have one value."""
    entry = mapping.entry("replicates")
    planned = None if entry is None else entry.value
    numbers = [one.value for one in planned.entries] if isinstance(planned, MappingNode) else [planned]
    texts = [number.text for number in numbers if isinstance(number, ScalarNode)]
    return outline.separate and any(text.isascii() and text.isdigit() and int(text) == 1 for text in texts)


_WITHIN = tuple(quantity for quantity in QUANTITIES if quantity.startswith("repeatability-"))
_BETWEEN = tuple(quantity for quantity in QUANTITIES if quantity.startswith(("between-", "total-")))
_OF_LEVELS = tuple(quantity for quantity in QUANTITIES if quantity.startswith("largest-difference"))
_ONE_VARIANCE = ", which needs one variance for all levels, and `design.variances` is separate"
_NOT_FOR_A_SAMPLE = "use `precision` for the spread between levels, or `effects: fixed`"
_TOGETHER = (
    ", and `design.across-responses: holm` adjusts the rows of a family of all responses together, by Holm"
)
_HOLM = "use `adjust: holm` (`none` for a single row), or `across-responses: bonferroni`"

RULES = (
    *DATA_RULES,
    # methods against variances
    Rule(
        "comparisons.adjust",
        ("tukey-kramer",),
        lambda outline, _: outline.separate,
        _ONE_VARIANCE,
        "use `games-howell`, or `variances: pooled`",
    ),
    Rule(
        "comparisons.adjust",
        ("scheffe", "dunnett", "dunnett-step-down"),
        _separate_and_several_rows,
        _ONE_VARIANCE,
        "use `holm`, `bonferroni` or `sidak`, or `variances: pooled`",
    ),
    Rule(
        "comparisons.adjust",
        ("scheffe",),
        _separate_and_one_row,
        _ONE_VARIANCE,
        "use `none` for a single comparison, or `variances: pooled`",
    ),
    Rule(
        "comparisons.adjust",
        ("games-howell",),
        lambda outline, _: outline.pooled,
        ", which needs separate variances",
        "use `design.variances: separate` with it, or another method such as `tukey-kramer`",
    ),
    Rule(
        "design.omnibus",
        ("f",),
        lambda outline, _: outline.separate,
        _ONE_VARIANCE,
        "use `welch` or `brown-forsythe`, or `variances: pooled`",
    ),
    Rule(
        "design.omnibus",
        ("welch", "brown-forsythe"),
        lambda outline, _: outline.pooled,
        ", which is for separate variances",
        "use `f`, or `variances: separate`",
    ),
    # methods against alternatives
    Rule(
        "comparisons.alternative",
        ("greater", "less"),
        lambda _, mapping: word_of(mapping, "adjust") == "scheffe",
        ", and scheffe is two-sided by construction",
        "use `two-sided`, or another method such as `holm` (`none` for a single comparison)",
    ),
    Rule(
        "comparisons.alternative",
        ("greater", "less"),
        _sidak_of_contrasts,
        ", and the inequality behind sidak is for two-sided contrasts",
        "use `bonferroni` or `holm`, or `two-sided`",
    ),
    Rule(
        "data.replicates",
        (),
        _one_value_at_a_level,
        (
            " plans one value at a level, from which no variance can be estimated, and with "
            "`design.variances: separate` each level has its own"
        ),
        "plan two values or more at every level, or use `variances: pooled`",
    ),
    Rule(
        "alpha",
        (),
        _too_large_for_equivalence,
        " is 0.5 or more, with which no equivalence test can be made",
        "write a smaller one, such as `alpha: 0.05`",
    ),
    # random levels
    *(
        Rule(
            key,
            (),
            lambda outline, _: outline.random,
            f" {does}, but with `design.effects: random` they are a mere sample",
            _NOT_FOR_A_SAMPLE,
        )
        for key, does in (
            ("comparisons", "compares levels"),
            ("equivalence", "compares levels"),
            ("spread", "compares the variances of levels"),
            ("power", "is about comparing levels"),
            ("design.omnibus", "compares levels"),
        )
    ),
    Rule(
        "criteria.quantity",
        _OF_LEVELS,
        lambda outline, _: outline.random,
        ", which compares levels, but with `design.effects: random` they are a mere sample",
        "use `between-sd`, or `effects: fixed`",
    ),
    Rule(
        "design.variances",
        ("separate",),
        lambda outline, _: outline.random,
        ", for which there is no method here with `design.effects: random`",
        "use `variances: pooled`",
    ),
    # precision and criteria on it
    Rule(
        "precision.estimate",
        ("true", "True", "TRUE"),
        lambda outline, _: outline.separate,
        ", and with `design.variances: separate` the levels share no repeatability",
        "use `spread` or criteria on `level-sd`, or `variances: pooled`",
    ),
    Rule(
        "precision.conditions",
        (),
        lambda outline, _: outline.fixed,
        " names the total of a sample of levels, and `design.effects` is fixed",
        "leave it out, or use `effects: random` if the levels are a sample",
    ),
    Rule(
        "criteria.quantity",
        _BETWEEN,
        lambda outline, _: outline.fixed,
        ", which only a sample of levels has, and `design.effects` is fixed",
        "use a `repeatability-` quantity or `largest-difference`, or `effects: random`",
    ),
    Rule(
        "criteria.quantity",
        _WITHIN,
        lambda outline, _: outline.separate,
        ", and with `design.variances: separate` the levels share no repeatability",
        "use `level-sd` or `level-rsd`, or `variances: pooled`",
    ),
    Rule(
        "criteria.quantity",
        (*_WITHIN, *_BETWEEN),
        _without_estimates,
        ", which `precision` has to estimate",
        "add `precision: {estimate: true}`",
    ),
    # several responses
    Rule(
        "design.across-responses",
        tuple(word for word in ACROSS_RESPONSES if word != "none"),
        lambda outline, _: len(outline.responses or ()) == 1,
        ", and the study has one response",
        "leave it out, or use `none`",
    ),
    Rule(
        "comparisons.adjust",
        tuple(word for word in ADJUSTMENTS if word != "holm"),
        _beyond_holm,
        _TOGETHER,
        _HOLM,
    ),
    Rule(
        "equivalence.adjust",
        tuple(word for word in EQUIVALENCE_ADJUSTMENTS if word != "holm"),
        _beyond_holm,
        _TOGETHER,
        _HOLM,
    ),
    # planning
    Rule(
        "power",
        (),
        lambda outline, _: outline.separate,
        " needs one standard deviation, and `design.variances` is separate",
        "leave it out: power is computed for a common standard deviation only",
    ),
    Rule(
        "power.allocation",
        ("control",),
        _without_reference,
        ", and nothing is compared with a reference",
        "use `equal`, or plan comparisons with `against`",
    ),
)
