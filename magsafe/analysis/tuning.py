"""What a capacitor tunes a loop to: the range of frequencies, the bands in it, and how sharply it tunes."""

from dataclasses import dataclass
from math import pi
from typing import Literal

import numpy as np
from scipy.constants import c, mu_0

from magsafe.analysis.chain import (
    GAP_CAPACITANCE,
    LARGEST_SHARE,
    REACTANCE_ERROR,
    Chain,
    corner_constant,
    crowded_inductance,
)
from magsafe.analysis.flow import TUNING_SCAN, flow, inductance, reactances, tuning_limit
from magsafe.analysis.losses import Corner, conductor_loss
from magsafe.analysis.soil import permittivities
from magsafe.analysis.surroundings import soil_shift
from magsafe.analysis.wires import electrical_radius, positions
from magsafe.design import tables
from magsafe.design.model import Capacitor, Design
from magsafe.design.shape import outline
from magsafe.physics import tuned_circuit
from magsafe.physics.arrays import Array
from magsafe.physics.thin_wire import FULL_WAVE
from magsafe.spread import Spread

# Frequencies at which the current is solved: at low ones the inductance hardly changes; towards the anti-resonance they
# lie evenly. Half as many again move no end by a hundred-thousandth (a test).
SOLVED = (12, 40)
ASKED_OF_SOIL = (0.05, 16)  # the first of the highest, and how many: for what soil adds
FINE = 4000  # between them, on a spline
STEP_SWR = 1.5  # a drive shall be able to come nearer to the match than this

Covered = Literal["wholly", "partly", "perhaps"]


@dataclass(frozen=True, slots=True)
class Needed:
    """The capacitance that tunes a loop [F] over frequency [Hz], arrays of one shape, frequency rising.

    `least` and `most` are the ends of it; `most` is empty where the loop's height is not known. `limit` is the port's
    anti-resonance [Hz], None where none was found.
    """

    frequency: Array
    least: Array
    likely: Array
    most: Array
    limit: float | None


@dataclass(frozen=True, slots=True)
class TuningRange:
    """The lowest and highest frequency that a capacitor tunes a loop to [Hz].

    The high end of `lowest` and the low end of `highest` bound what it tunes for certain, the other two what it may. A
    value is None that lies beyond the frequencies solved, or that nothing bounds.
    """

    lowest: Spread
    highest: Spread


@dataclass(frozen=True, slots=True)
class Cover:
    """What of a band is tuned in one ITU region; `low` and `high` are the band's ends there [Hz].

    `wholly` and `partly` tell of what is tuned for certain; `perhaps`, that some of it may be.
    """

    band: str
    region: int
    low: float
    high: float
    covered: Covered


def capacitance_ends(part: Capacitor) -> tuple[float, float] | None:
    """Return the least and the most that a capacitor has, its stray with it [F]; None where that is not stated.

    Of a fixed one these are the ends of its tolerance.
    """
    if part.capacitance is not None:
        return part.capacitance.min + part.stray, part.capacitance.max + part.stray
    if part.fixed is not None and part.tolerance is not None:
        return part.fixed * (1.0 - part.tolerance) + part.stray, part.fixed * (1.0 + part.tolerance) + part.stray
    return None


def needed_capacitance(design: Design) -> Needed:
    """Return what tunes a loop at every frequency from the lowest that is solved to near its anti-resonance.

    The ends are those of `tuning_capacitance`: free space and the image, a port of any usual width, the stated error.
    """
    length = outline(design.loop).perimeter * design.loop.turns
    limit = tuning_limit(design)
    highest = limit or float(TUNING_SCAN[-1]) * c / length
    lowest, parting = 1.001 * FULL_WAVE.low * c / length, 0.2 * highest
    low, high = np.geomspace(lowest, parting, SOLVED[0]), np.linspace(parting, 0.999 * highest, SOLVED[1])
    solved = np.concatenate([low[:-1], high])
    omega = 2.0 * pi * np.geomspace(solved[0], solved[-1], FINE)
    coldest = design.site.air_temperature or design.loop.conductor.temperature
    internal = np.array([conductor_loss(design.loop.conductor, float(each), coldest)[1] for each in solved])
    free = _followed(design, solved, omega, internal, image=False)
    imaged = _followed(design, solved, omega, internal, image=True) if _has_image(design) else []
    shifted = _over_soil(design, highest, omega, free) if _has_image(design) else []
    likely = imaged[0][0] if design.ground_name == "perfect" and imaged else free[0][0]
    if shifted and design.ground_name is not None:
        likely = shifted[0][0]
    # The stated error is one of the inductance: near the anti-resonance the reactance moves by more.
    # A loop without an anti-resonance in reach may be capacitive at its port before the last frequency.
    inductive = np.cumprod(free[0][0] > 0.0).astype(bool)
    steepness = np.gradient(np.log(np.where(inductive, free[0][0], 1.0)), np.log(omega))
    error = _inductance_error(design) * np.maximum(1.0, steepness)
    ends = [end for bare, perfect in (*free, *imaged, *shifted) for end in _with_any_gap(design, omega, bare, perfect)]
    over, under = np.max(ends, axis=0) * (1.0 + error), np.min(ends, axis=0) * (1.0 - error)
    gap = GAP_CAPACITANCE[0] + GAP_CAPACITANCE[1] * 2.0 * electrical_radius(design.loop.conductor)
    fit = np.cumprod((omega * gap * over < LARGEST_SHARE) & (under > 0.0) & inductive).astype(bool)
    known = _has_image(design) or design.ground_name == "none"
    return Needed(
        frequency=omega[fit] / (2.0 * pi),
        least=1.0 / (omega * over)[fit],
        likely=1.0 / (omega * likely)[fit],
        most=1.0 / (omega * under)[fit] if known else np.empty(0),
        limit=limit,
    )


def _has_image(design: Design) -> bool:
    return design.ground_name != "none" and design.loop.centre_height is not None


def _inductance_error(design: Design) -> float:
    radius = electrical_radius(design.loop.conductor)
    own = corner_constant(design) * mu_0 * radius + crowded_inductance(design)
    return REACTANCE_ERROR + own / inductance(design, design.transmission[0].frequency)


def _followed(
    design: Design, solved: Array, omega: Array, internal: Array, *, image: bool
) -> list[tuple[Array, Array]]:
    """Return the reactance with and without its internal part [ohm] of each place where the capacitor may be."""
    found = []
    for position in positions(design):
        perfect, along = reactances(design, solved, position, image=image)
        found.append(
            (_between(solved, perfect + internal * along, omega), _between(solved, perfect, omega)),
        )
    return found


def _over_soil(
    design: Design, highest: float, omega: Array, free: list[tuple[Array, Array]]
) -> list[tuple[Array, Array]]:
    """Return the reactance over the likely, the least and the most that soil adds, each place of the capacitor in turn.

    What soil adds over what there is changes slowly with frequency; below the first that is asked it is taken as there.
    """
    asked = np.linspace(ASKED_OF_SOIL[0] * highest, 0.999 * highest, int(ASKED_OF_SOIL[1]))
    if not len(permittivities(design, highest)):
        return []
    from scipy.interpolate import CubicSpline  # noqa: PLC0415  (slow to import)

    found, place = [], np.maximum(omega, 2.0 * pi * asked[0])
    for position, (bare, perfect) in zip(positions(design), free, strict=True):
        shares = []
        for frequency in asked:
            alone = flow(design, float(frequency), position, image=False)
            soils = permittivities(design, float(frequency))
            shift = soil_shift(alone, float(frequency), soils)
            shares.append([shift[0] / alone.reactance, shift.min() / alone.reactance, shift.max() / alone.reactance])
        share = CubicSpline(2.0 * pi * asked, np.array(shares))(place)
        found += [(bare + each * perfect, perfect + each * perfect) for each in share.T]
    return found


def _between(solved: Array, reactance: Array, omega: Array) -> Array:
    """Return the reactance between the frequencies that are solved.

    Its inverse over frequency, 1 / (L w^2) of a lumped loop, times w^2 is followed: it is 1 / L below and falls to
    nothing at the anti-resonance, with no pole on the way.
    """
    own = 2.0 * pi * solved
    from scipy.interpolate import CubicSpline  # noqa: PLC0415  (slow to import)

    return np.asarray(omega / CubicSpline(np.log(own), own / reactance)(np.log(omega)))


def _with_any_gap(design: Design, omega: Array, reactance: Array, perfect: Array) -> list[Array]:
    """Return the reactance with a capacitance of the port's gap less or more than the one computed, and as it is."""
    radius = electrical_radius(design.loop.conductor)
    gap = GAP_CAPACITANCE[0] + GAP_CAPACITANCE[1] * 2.0 * radius
    across = omega * gap * perfect
    return [reactance / (1.0 - np.minimum(sign * across, 0.99)) for sign in (-1.0, 0.0, 1.0)]


def tuning_range(needed: Needed, ends: tuple[float, float]) -> TuningRange:
    """Return what a capacitor of so many farads at its ends tunes a loop to."""
    least, most = ends
    lowest = Spread(
        _first_within(needed, needed.least, most, certain=False),
        _first_within(needed, needed.likely, most, certain=False),
        _first_within(needed, needed.most, most, certain=True),
    )
    highest = Spread(
        _last_above(needed, needed.least, least, certain=True),
        _last_above(needed, needed.likely, least, certain=False),
        _last_above(needed, needed.most, least, certain=False),
    )
    return TuningRange(lowest, highest)


def _first_within(needed: Needed, curve: Array, most: float, *, certain: bool) -> float | None:
    """Return the lowest frequency from which on no more is needed than there is [Hz].

    Where the scan begins within, that is its own lowest if this is to be certain, and else not known.
    """
    if not len(curve):
        return None
    if curve[0] <= most:
        return float(needed.frequency[0]) if certain else None
    within = np.flatnonzero(curve <= most)
    return _crossing(needed, curve, int(within[0]), most) if len(within) else float(needed.frequency[-1])


def _last_above(needed: Needed, curve: Array, least: float, *, certain: bool) -> float | None:
    """Return the highest frequency up to which no less is needed than the least there is [Hz]; else as the lowest."""
    if not len(curve):
        return None
    if curve[-1] >= least:
        return float(needed.frequency[-1]) if certain else None
    above = np.flatnonzero(curve >= least)
    return _crossing(needed, curve, int(above[-1]) + 1, least) if len(above) else float(needed.frequency[0])


def _crossing(needed: Needed, curve: Array, after: int, wanted: float) -> float:
    """Return where a curve passes a capacitance between a frequency and the one before, in logarithms [Hz]."""
    low, high = np.log(curve[after - 1]), np.log(curve[after])
    share = (np.log(wanted) - low) / (high - low)
    first, second = np.log(needed.frequency[after - 1 : after + 1])
    return float(np.exp(first + share * (second - first)))


def bands_covered(found: TuningRange, limit: float | None = None) -> tuple[Cover, ...]:
    """Return every band of which something is tuned, or may be, in each ITU region, below an anti-resonance [Hz]."""
    certain = (found.lowest.high, found.highest.low)
    may = (found.lowest.low, limit if found.highest.high is None else found.highest.high)
    covers = []
    for band in tables.bands():
        for region, (low, high) in zip(tables.REGIONS, band.regions, strict=True):
            covered = _covered(low, high, certain, may)
            if covered is not None:
                covers.append(Cover(band.name, region, low, high, covered))
    return tuple(covers)


_Ends = tuple[float | None, float | None]


def _covered(low: float, high: float, certain: _Ends, may: _Ends) -> Covered | None:
    first, last = certain
    if first is not None and last is not None and first <= last:
        if first <= low and high <= last:
            return "wholly"
        if low <= last and first <= high:
            return "partly"
    first, last = may
    # An end that nothing bounds leaves the band possible, never certain.
    beyond = (first is not None and high < first) or (last is not None and low > last)
    return None if beyond else "perhaps"


def tuning_rate(chain: Chain) -> Spread:
    """Return by how much the resonance falls for each farad more of the main capacitor, at resonance [Hz/F].

    With X the reactance of the loop and C = 1 / (w X), df/f = -(dC/C) / (1 + w X'/X): half of it for a lumped loop,
    less where the current tapers or the capacitor is a line. Parallel padding changes nothing; in series the square of
    the main part's share of the volts counts.
    """
    omega = 2.0 * pi * chain.frequency

    def rate(corner: Corner, sign: float) -> float:
        slope = corner.slope + (chain.capacitor_steepness - 1.0) * corner.reactance
        of_all = chain.frequency * omega * corner.reactance**2 / slope
        # Of the volts on all parts in series, what is on the main one.
        share = 1.0 - sum(chain.network.own_reactance(part, sign) for part in chain.network.series) / corner.reactance
        return of_all * max(0.0, share) ** 2

    likely = rate(chain.likely, 0.0)
    every = [likely, *(rate(corner, sign) for corner in chain.every for sign in (-1.0, 0.0, 1.0))]
    error = REACTANCE_ERROR + chain.corner_error
    found = Spread(min(every), likely, max(every)).widened(error, error)
    return found if chain.around.height_known else Spread(None, found.likely, found.high)


def step_width(chain: Chain, end: str = "low") -> float:
    """Return the narrowest width between the points of `STEP_SWR` [Hz], with every loss at an end."""
    quality = chain.dangerous(chain.quality, end) * (1.0 + chain.quality_error)
    return float(tuned_circuit.swr_bandwidth_factor(STEP_SWR)) * chain.frequency / quality


def steps_needed(chain: Chain, part: Capacitor) -> int | None:
    """Return into how many equal steps of capacitance a drive must divide a variable capacitor's range.

    One step is then at most half of the narrowest width, without credit for typical losses. None: it is not variable.
    """
    rate = tuning_rate(chain).high
    if part.capacitance is None or rate is None:
        return None
    whole = (part.capacitance.max - part.capacitance.min) * rate
    return int(np.ceil(whole / (0.5 * step_width(chain, "bare"))))
