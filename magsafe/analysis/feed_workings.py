"""The numbers that went into the figures of the match."""

from collections.abc import Callable

import numpy as np
from scipy.constants import c

from magsafe.analysis import terms
from magsafe.analysis.capacitor_feed import SeriesPart, series_part
from magsafe.analysis.chain import Chain
from magsafe.analysis.feeding import impedances, stated_coefficient
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.small_loop_feed import ratio_of, sized
from magsafe.analysis.terms import Column, Columns, Term
from magsafe.design.model import Design
from magsafe.physics.tuned_circuit import standing_wave_ratio
from magsafe.spread import Spread

Working = Callable[[Chain, Design, OperatingPoint], tuple[Term, ...]]


def _small_loop(chain: Chain, design: Design, point: OperatingPoint) -> tuple[Term, ...]:
    spread = point.figures.coupling_loop_diameter.spread
    known = (spread.low, spread.likely, spread.high)
    found = sized(design, chain)

    def term(letter: str, unit: str, values: tuple[float | None, ...]) -> Term:
        low, likely, high = values
        return Term(letter, terms.where((low, likely, high), known), unit)

    loops = [None if each is None else each.sizing.matched for each in found]
    return (
        term("D1", "m", tuple(None if each is None else each.diameter for each in loops)),
        term("M", "H", tuple(None if each is None else abs(each.mutual_inductance) for each in loops)),
        term("X", "ohm", tuple(None if each is None else each.reactance for each in loops)),
        term("R", "ohm", tuple(None if each is None else each.resistance for each in found)),
        term("a", "1", tuple(None if each is None else each.charge for each in found)),
        terms.same("Z", design.feed.line_impedance, "ohm"),
        terms.same("f", chain.frequency, "Hz"),
    )


def _series_volts(chain: Chain, design: Design, _: OperatingPoint) -> tuple[Term, ...]:
    part = series_part(design, chain)
    columns = terms.rising(chain, part.volts)
    return *_across(chain, part, columns), terms.same("s", part.share, "1")


def _series_amps(chain: Chain, design: Design, _: OperatingPoint) -> tuple[Term, ...]:
    part = series_part(design, chain)
    columns = terms.rising(chain, part.amps)
    reactance = terms.term("Xs", "ohm", columns, lambda each: part.reactance(each.losses, each.corner))
    return *_across(chain, part, columns), reactance


def _across(chain: Chain, part: SeriesPart, columns: Columns) -> tuple[Term, ...]:
    """Return what the volts across the series capacitor come from."""
    return (
        terms.power(columns),
        terms.total(chain, columns),
        terms.term("X", "ohm", columns, lambda each: each.corner.reactance),
        terms.same("k", chain.overshoot, "1"),
        terms.same("m", 1.0 if part.stated is None else 0.0, "1"),
        terms.same("Z", part.line, "ohm"),
        terms.stated_error(chain.voltage_error, ends=columns),
    )


def _capacitance(parallel: bool) -> Working:
    def work(chain: Chain, design: Design, _: OperatingPoint) -> tuple[Term, ...]:
        part = series_part(design, chain)

        def ask(each: Column) -> float:
            found = part.match(each.losses, each.corner)
            return found.parallel if parallel else found.series

        every = [Column(end, corner) for end, corner in part.corners]
        low, high = min(every, key=ask), max(every, key=ask)
        # Where no height bounds the resistance, nothing bounds the end that the most of it makes.
        columns: Columns = (
            low if chain.most or not parallel else None,
            every[0],
            high if chain.most or parallel else None,
        )
        return (
            terms.total(chain, columns),
            terms.term("X", "ohm", columns, lambda each: each.corner.reactance),
            terms.same("Z", part.line, "ohm"),
            terms.same("f", chain.frequency, "Hz"),
            terms.same("n", 1.0 / part.share, "1"),
        )[: 4 if parallel else 5]

    return work


def _section(chain: Chain, design: Design, point: OperatingPoint) -> tuple[Term, ...]:
    likely, every = chain.resistance("likely", chain.likely), [each.real for each in chain.terminals()]
    ends = terms.where(
        (min(likely, *every), likely, max(likely, *every)), _ends(point.figures.quarter_wave_impedance.spread)
    )
    return Term("R", ends, "ohm"), terms.same("Z", design.feed.line_impedance, "ohm")


def _section_length(_: Chain, design: Design, __: OperatingPoint) -> tuple[Term, ...]:
    return (
        terms.same("c", c, "m/s"),
        terms.same("v", design.feed.velocity_factor or 1.0, "1"),
        terms.same("f", design.transmission[0].frequency, "Hz"),
    )


def _ratio(name: str, match: str) -> Working:
    """Return what the SWR through a section or a transformer comes from: the impedance that the line sees."""

    def work(chain: Chain, design: Design, point: OperatingPoint) -> tuple[Term, ...]:
        spread: Spread = getattr(point.figures, name).spread
        seen = impedances(design, chain)[match]
        ratios = standing_wave_ratio(seen, design.feed.line_impedance)
        made = seen[int(np.argmin(ratios))], seen[0], seen[int(np.argmax(ratios))]
        known = (spread.low, spread.likely, spread.high)
        return (
            Term("r", terms.where((made[0].real, made[1].real, made[2].real), known), "ohm"),
            Term("x", terms.where((made[0].imag, made[1].imag, made[2].imag), known), "ohm"),
            terms.same("Z", design.feed.line_impedance, "ohm"),
        )

    return work


def _at_feed(chain: Chain, design: Design, point: OperatingPoint) -> tuple[Term, ...]:
    found, ratio = stated_coefficient(design, chain), point.figures.swr_at_feed.spread
    if found.low is None or found.high is None:
        return (Term("k", (None, found.likely, None), "1"),)
    # Where its ends lie on both sides of a match, somewhere between them it is one.
    inside = found.low <= 1.0 <= found.high
    nearer, further = sorted((found.low, found.high), key=lambda each: ratio_of(Spread.exact(each)).likely or 0.0)
    return (Term("k", terms.where((1.0 if inside else nearer, found.likely, further), _ends(ratio)), "1"),)


def _ends(spread: Spread) -> tuple[float | None, float | None, float | None]:
    return spread.low, spread.likely, spread.high


FEED_WORKINGS: dict[str, Working] = {
    "coupling_loop_diameter": _small_loop,
    "match_parallel_capacitance": _capacitance(parallel=True),
    "series_capacitance": _capacitance(parallel=False),
    "series_capacitor_peak_voltage": _series_volts,
    "series_capacitor_rms_current": _series_amps,
    "quarter_wave_impedance": _section,
    "quarter_wave_length": _section_length,
    "swr_through_quarter_wave": _ratio("swr_through_quarter_wave", "through_section"),
    "swr_through_2_to_1": _ratio("swr_through_2_to_1", "two_to_one"),
    "swr_through_4_to_1": _ratio("swr_through_4_to_1", "four_to_one"),
    "swr_at_feed": _at_feed,
}
