"""Repeatability, the spread between levels and their total, with what follows from them."""

from assayfolio.exact import Root
from assayfolio.findings import Interval, MeanUncertaintyFindings, PrecisionFindings
from assayfolio.report.basis import Basis
from assayfolio.report.content import Block, Entry, Facts, Heading, Paragraph, Section, TableBlock
from assayfolio.report.notation import (
    Scale,
    degrees_of_freedom,
    percent,
    squared_unit,
    three_digits,
)
from assayfolio.report.numbering import Numbering, Part
from assayfolio.report.prose import Prose, Words, prose
from assayfolio.report.tables import Column, Table, lay_out
from assayfolio.report.wording import (
    BLANK,
    capitalised,
    significant_interval,
    spread_of,
    with_unit,
)

_TOTAL_NAMED = {
    "intermediate precision": "within one laboratory the total is the intermediate precision",
    "reproducibility": "between laboratories the total is the reproducibility",
}
_TOTAL_WITHOUT_NAME = "it is called no more than that, as the plan states no conditions to name it by"


def precision_section(basis: Basis, numbering: Numbering) -> Section:
    """The components of the spread, their limits, and the grand mean with its uncertainty."""
    place = basis.place(Part.PRECISION)
    found = basis.response.precision
    if found is None:
        why = "The precision cannot be given; section {number} gives the reason."
        blocks: list[Block] = [Paragraph(prose(why, number=str(basis.place(Part.NOT_REPORTED).number)))]
    else:
        blocks = [Paragraph(_what_varied(basis, found)), TableBlock(_table(basis, found, numbering))]
        entries = _entries(basis, found)
        if entries:
            blocks.append(Facts(tuple(entries)))
        if found.mean_ways:
            blocks.append(Heading(prose("Grand mean and its standard uncertainty")))
            blocks.append(TableBlock(_means_table(basis, found, numbering)))
    return Section(place.anchor, place.number, basis.title("Precision"), tuple(blocks))


def total_words(found: PrecisionFindings) -> str:
    """What the total is called: intermediate precision, reproducibility, or total."""
    return found.total_name or "total"


def _what_varied(basis: Basis, found: PrecisionFindings) -> Prose:
    if found.total_sd is None:
        return prose(
            "The levels are fixed, so the precision here is the repeatability alone: the spread of values "
            "within a level, pooled over the levels. Nothing is said about the spread between levels not in "
            "this study."
        )
    varied = ""
    if found.varied and found.varied.casefold() != basis.factor.casefold():
        varied = f" What varied from level to level, by the plan: {found.varied}."
    return prose(
        "Values at one level of {factor} repeat the measurement.{varied} The spread within levels and that "
        "between them together make up the total; {named}. The levels count as a sample of those that could "
        "have been chosen, and values and levels as normally distributed.",
        factor=basis.factor,
        varied=varied,
        named=_TOTAL_NAMED.get(total_words(found), _TOTAL_WITHOUT_NAME),
    )


def _table(basis: Basis, found: PrecisionFindings, numbering: Numbering) -> Table:
    scale = basis.difference_scale
    columns = [
        Column("Source of spread", kind="text"),
        Column("Standard deviation", scale.heading),
        Column("Interval, from", scale.heading),
        Column("to", scale.heading),
        Column("Relative", "%"),
        Column("Limit for two values", scale.heading),
    ]
    sds = [sd for sd in (found.repeatability_sd, found.between_sd, found.total_sd) if sd is not None]
    largest = max(sds, key=lambda sd: sd.square)

    def row(
        name: str, sd: Root, ci: Interval | None, relative: Root | None, limit: Root | None
    ) -> list[Words]:
        return [
            name,
            scale.spread(sd, largest),
            *_spread_ends(scale, ci, largest),
            BLANK if relative is None else three_digits(relative),
            BLANK if limit is None else scale.spread(limit, limit),
        ]

    rows = [
        row(
            "Repeatability, within a level",
            found.repeatability_sd,
            found.repeatability_sd_ci,
            found.repeatability_rsd,
            found.repeatability_limit,
        )
    ]
    if found.between_sd is not None:
        rows.append(row("Between levels", found.between_sd, found.between_sd_ci, found.between_rsd, None))
    if found.total_sd is not None:
        rows.append(
            row(
                capitalised(total_words(found)),
                found.total_sd,
                found.total_sd_ci,
                found.total_rsd,
                found.total_limit,
            )
        )
    caption = prose(
        "Precision of {response}, with {confidence} intervals.",
        response=basis.response.response,
        confidence=percent(found.confidence),
    )
    return lay_out(numbering.table(), caption, columns, rows, [_table_note(basis, found)])


def _spread_ends(scale: Scale, ci: Interval | None, largest: Root) -> list[str]:
    if ci is None or ci[0] is None or ci[1] is None:
        return [BLANK, BLANK]
    return [scale.spread(ci[0], largest), scale.spread(ci[1], largest)]


def _table_note(basis: Basis, found: PrecisionFindings) -> Prose:
    note = (
        "Relative: in percent of {base}. Limit: 2.8 times the standard deviation (1.96 √2, rounded as is "
        "common), which two values "
    )
    base = _base_words(basis, found)
    if found.total_sd is None:
        return prose(note + "from one level are expected not to exceed in 95 % of cases.", base=base)
    return prose(
        note
        + "from one level (first row), or from two levels (last row), are expected not to exceed in 95 % "
        "of cases.",
        base=base,
    )


def _base_words(basis: Basis, found: PrecisionFindings) -> str:
    """What relative standard deviations are in percent of, with its value."""
    name = [found.relative_to or "grand mean"]
    if found.relative_mean is not None:
        name.append(basis.scale.with_unit(basis.scale.mean(found.relative_mean)))
    listed = ", ".join(name)
    return f"the {listed}" if found.mean is None else f"the stated grand mean ({listed})"


def _entries(basis: Basis, found: PrecisionFindings) -> list[Entry]:
    entries = []
    unit = squared_unit(basis.response.unit)
    if found.between_variance_raw is not None:
        raw = with_unit(three_digits(found.between_variance_raw), unit)
        kept = "; negative, so kept here and reported as 0 above" if found.between_variance_raw < 0 else ""
        entries.append(Entry(prose("Between-level variance"), prose("{raw}, as estimated" + kept, raw=raw)))
    if found.between_sd is not None:
        entries.append(Entry(prose("Interval between levels"), _between_interval(found)))
    if found.interval_method is not None:
        how = found.interval_method.replace("Graybill-Wang", "Graybill and Wang")
        how = how.replace("n0 in the place of n", "*n*_0_ in the place of *n*")
        entries.append(Entry(prose("Interval of the total"), prose(how + "; this is the one reported")))
    if found.total_sd_ci_satterthwaite is not None and found.total_df is not None:
        entries.append(
            Entry(
                prose("Second interval"),
                prose(
                    "{interval}, by Satterthwaite with {df} degrees of freedom, for comparison",
                    interval=significant_interval(found.total_sd_ci_satterthwaite, basis.response.unit),
                    df=degrees_of_freedom(found.total_df),
                ),
            )
        )
    if found.n0 is not None:
        n0 = degrees_of_freedom(found.n0)
        entries.append(Entry(prose("*n*_0_"), prose("{n0} values a level, as the components count", n0=n0)))
    if found.icc is not None:
        entries.append(Entry(prose("Intraclass correlation"), _icc(found)))
    return entries


def _between_interval(found: PrecisionFindings) -> Prose:
    if found.between_interval_method is None:
        return prose("none, as all values are equal")
    how = found.between_interval_method.replace("Williams-Tukey", "Williams and Tukey")
    how = how.replace("Thomas-Hultquist", "Thomas and Hultquist").replace("mean of n", "mean of the *n*_*i*_")
    return prose(how + "; an end below zero is given as 0")


def _icc(found: PrecisionFindings) -> Prose:
    words = prose("{icc}, the share of the total variance between levels", icc=three_digits(found.icc or 0))
    if found.icc_ci is None:
        return words
    interval = prose(
        "; {confidence} interval {interval} ({method})",
        confidence=percent(found.confidence),
        interval=significant_interval(found.icc_ci),
        method="Wald’s for unequal n" if found.icc_method == "Wald" else "from F",
    )
    return (*words, *interval)


def _means_table(basis: Basis, found: PrecisionFindings, numbering: Numbering) -> Table:
    scale, spread = basis.scale, basis.difference_scale
    columns = [
        Column("Way", kind="text"),
        Column("Grand mean", scale.heading),
        Column(prose("Standard uncertainty *u*"), spread.heading),
        Column("Degrees of freedom"),
        Column("Interval, from", scale.heading),
        Column("to", scale.heading),
    ]
    largest = max((way.u for way in found.mean_ways), key=lambda u: u.square)
    rows: list[list[Words]] = [
        [
            f"{capitalised(way.way)}{' (to state)' if way.way == found.mean_method else ''}",
            scale.mean(way.mean),
            spread.spread(way.u, largest),
            str(way.df),
            *_mean_ends(scale, way),
        ]
        for way in found.mean_ways
    ]
    caption = prose(
        "Grand mean of {response} in the two ways of GUM H.5, with {confidence} intervals.",
        response=basis.response.response,
        confidence=percent(found.confidence),
    )
    note = prose(
        "Between levels: from the scatter of the level means. Pooled: all values as one sample, sound only "
        "where the levels add nothing. This is the statistical part of the uncertainty alone."
    )
    return lay_out(numbering.table(), caption, columns, rows, [note])


def _mean_ends(scale: Scale, way: MeanUncertaintyFindings) -> list[str]:
    if way.ci is None or way.ci[0] is None or way.ci[1] is None:
        return [BLANK, BLANK]
    return [scale.mean(way.ci[0]), scale.mean(way.ci[1])]


def precision_lines(basis: Basis, found: PrecisionFindings) -> list[Prose]:
    """The precision in a few lines, for an answer."""
    scale, unit = basis.difference_scale, basis.response.unit
    lines = [_line("repeatability SD", spread_of(scale, found.repeatability_sd), found.repeatability_rsd)]
    if found.repeatability_sd_ci is not None:
        interval = significant_interval(found.repeatability_sd_ci, unit)
        lines[0] += prose(
            ", {confidence} interval {interval}", confidence=percent(found.confidence), interval=interval
        )
    limit = spread_of(scale, found.repeatability_limit)
    lines.append(prose("repeatability limit for two values {limit}", limit=limit))
    if found.total_sd is not None:
        name = f"{total_words(found)} SD"
        line = _line(name, spread_of(scale, found.total_sd), found.total_rsd)
        if found.total_sd_ci is not None:
            line += prose(
                ", {confidence} interval {interval}",
                confidence=percent(found.confidence),
                interval=significant_interval(found.total_sd_ci, unit),
            )
        lines.append(line)
    if found.mean is not None and found.mean_u is not None:
        mean = basis.scale.with_unit(basis.scale.mean(found.mean))
        u = spread_of(scale, found.mean_u)
        lines.append(prose("grand mean {mean}, standard uncertainty {u}", mean=mean, u=u))
    return lines


def _line(name: str, sd: str, relative: Root | None) -> Prose:
    rsd = f" ({three_digits(relative)}\u202f%)" if relative is not None else ""
    return prose("{name} {sd}{rsd}", name=name, sd=sd, rsd=rsd)


def precision_headline(found: PrecisionFindings) -> str:
    """What an answer on precision says first."""
    if found.total_sd is None:
        return "Repeatability estimated"
    return capitalised(f"repeatability and {total_words(found)} estimated")
