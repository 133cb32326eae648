"""What may not change a result: order of rows and levels, zero point, unit, the way of forming sums."""

from fractions import Fraction

from hypothesis import given
from hypothesis import strategies as st

from assayfolio.exact import Decimal10, ExactSums
from assayfolio.statistics.comparisons import TWO_SIDED, compare
from assayfolio.statistics.equal_variances import brown_forsythe_variances
from assayfolio.statistics.estimates import pair_estimates, reference_estimates
from assayfolio.statistics.inference import omnibus_test
from assayfolio.statistics.oneway import NotComputableError, OneWay, one_way
from assayfolio.statistics.simultaneous import compare_tukey_kramer

Data = dict[str, list[Decimal10]]

values = st.builds(Decimal10, st.integers(-(10**6), 10**6), st.integers(-4, 2))


@st.composite
def measured(draw: st.DrawFn) -> Data:
    """Two to five levels of one to seven values, with something varying within a level."""
    levels = draw(st.lists(st.lists(values, min_size=1, max_size=7), min_size=2, max_size=5))
    spread = draw(st.integers(1, 9))
    levels[0] = [*levels[0], Decimal10(levels[0][0].mantissa + spread, levels[0][0].exponent)]
    return {f"L{at}": listed for at, listed in enumerate(levels)}


def analysed(data: Data) -> OneWay:
    return one_way([(level, ExactSums.of(listed)) for level, listed in data.items()])


def plus(value: Decimal10, constant: Decimal10) -> Decimal10:
    exponent = min(value.exponent, constant.exponent)
    return Decimal10(
        value.mantissa * 10 ** (value.exponent - exponent)
        + constant.mantissa * 10 ** (constant.exponent - exponent),
        exponent,
    )


def table(analysis: OneWay) -> tuple[object, ...]:
    return (analysis.ss_between, analysis.ss_within, analysis.f, omnibus_test(analysis, 0.05))


def variances(data: Data) -> object:
    try:
        return brown_forsythe_variances(list(data.items()))
    except NotComputableError as error:
        return str(error)


@given(measured(), st.randoms(use_true_random=False))
def test_the_order_of_rows_does_not_matter(data, random):
    shuffled = {level: random.sample(listed, len(listed)) for level, listed in data.items()}
    assert table(analysed(shuffled)) == table(analysed(data))
    assert variances(shuffled) == variances(data)


@given(measured(), st.randoms(use_true_random=False))
def test_the_order_of_levels_does_not_matter(data, random):
    shuffled = dict(random.sample(list(data.items()), len(data)))
    assert table(analysed(shuffled)) == table(analysed(data))
    assert variances(shuffled) == variances(data)
    by_pair = {}
    for analysis in (analysed(data), analysed(shuffled)):
        for row in compare(analysis, pair_estimates(analysis), "bonferroni", TWO_SIDED, 0.05):
            both = by_pair.setdefault(frozenset(row.label.split(" - ")), [])
            both.append((abs(row.estimate), row.se, row.tail, row.adjusted))
    assert all(one == other for one, other in by_pair.values())


@given(measured(), st.builds(Decimal10, st.integers(-(10**15), 10**15), st.integers(-12, 12)))
def test_a_constant_added_to_every_value_changes_no_bit_of_the_table(data, constant):
    shifted = {level: [plus(value, constant) for value in listed] for level, listed in data.items()}
    assert table(analysed(shifted)) == table(analysed(data))
    assert variances(shifted) == variances(data)
    before, after = analysed(data), analysed(shifted)
    assert compare(before, pair_estimates(before), "holm", TWO_SIDED, 0.05) == compare(
        after, pair_estimates(after), "holm", TWO_SIDED, 0.05
    )


@given(measured(), st.integers(-20, 20))
def test_another_power_of_ten_as_the_unit_scales_exactly_and_leaves_f_and_p(data, power):
    scaled = {
        level: [Decimal10(value.mantissa, value.exponent + power) for value in listed]
        for level, listed in data.items()
    }
    before, after = analysed(data), analysed(scaled)
    square = Fraction(100) ** power
    assert after.ss_between == before.ss_between * square
    assert after.ss_within == before.ss_within * square
    assert (after.f, omnibus_test(after, 0.05)) == (before.f, omnibus_test(before, 0.05))
    assert variances(scaled) == variances(data)
    for one, other in zip(
        compare_tukey_kramer(before, pair_estimates(before), 0.05),
        compare_tukey_kramer(after, pair_estimates(after), 0.05),
        strict=True,
    ):
        assert other.estimate == one.estimate * Fraction(10) ** power
        assert (other.statistic, other.tail, other.adjusted) == (one.statistic, one.tail, one.adjusted)


@given(measured(), st.randoms(use_true_random=False))
def test_sums_formed_in_parts_and_merged_in_any_order_give_the_same_table(data, random):
    merged = []
    for level, listed in data.items():
        parts = [ExactSums.of([value]) for value in listed]
        while len(parts) > 1:
            one = parts.pop(random.randrange(len(parts)))
            other = parts.pop(random.randrange(len(parts)))
            parts.append(one.merged(other))
        merged.append((level, parts[0]))
    assert table(one_way(merged)) == table(analysed(data))


@given(measured())
def test_differences_from_a_reference_turn_their_sign_with_the_reference(data):
    analysis = analysed(data)
    first, second = list(data)[:2]
    to_first = {one.label: one for one in reference_estimates(analysis, first)}
    to_second = {one.label: one for one in reference_estimates(analysis, second)}
    there, back = to_first[f"{second} - {first}"], to_second[f"{first} - {second}"]
    assert there.value == -back.value
    assert there.variance_factor == back.variance_factor


@given(measured())
def test_the_table_adds_up(data):
    analysis = analysed(data)
    everything = ExactSums.of(value for listed in data.values() for value in listed)
    about_the_mean = everything.sum_of_squares - everything.sum**2 / everything.n
    assert analysis.ss_between + analysis.ss_within == analysis.ss_total == about_the_mean
    assert analysis.df_between + analysis.df_within == everything.n - 1
    assert analysis.ss_between >= 0
    assert analysis.ss_within > 0
