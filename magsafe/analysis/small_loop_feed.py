"""A coupling loop: the size that matches, what one of a given size does, and the one that serves several bands."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from scipy.constants import c

from magsafe.analysis.chain import Chain
from magsafe.analysis.figures import NO_HEIGHT
from magsafe.design.model import Design, SmallLoop
from magsafe.physics import coupling
from magsafe.physics.arrays import Array
from magsafe.physics.coupling_loop import Circuit, Coupled, Place, Sizing, beside, candidates, centred, coupled
from magsafe.spread import ROUNDING, UNKNOWN, Spread

WIRE = 4e-3  # m, the diameter of a coupling loop's conductor where none is stated
TRIED = 96  # coupling loops among which one is chosen that serves several transmissions
SAME = 1e-6  # of the loop's size, within which two places are one


@dataclass(frozen=True, slots=True)
class Fed:
    """One coupling loop at one transmission.

    `coefficient` is kappa [1]: 1 matches, more is overcoupled; `ratio` the lowest SWR that retuning reaches [1];
    `offset` how far the match lies above the loop's own resonance [Hz].
    """

    coefficient: Spread
    ratio: Spread
    offset: float


def small_loop(design: Design) -> SmallLoop:
    """Return the coupling loop as stated, or one of usual wire in the middle of the loop."""
    return design.feed.small_loop or SmallLoop()


def wire_radius(small: SmallLoop) -> float:
    """Return the radius of a coupling loop's conductor [m]."""
    return (small.wire or WIRE) / 2.0


def not_coupled(design: Design, chain: Chain) -> str:
    """Return why no coupling loop is computed; empty where one is."""
    if design.feed.coupling not in ("small loop", "none stated"):
        return f'the design states coupling = "{design.feed.coupling}"'
    size = _size(design, chain)
    if not coupling.TUNED_LOOP.holds(size):
        return (
            f"the conductor is {size:.3g} wavelengths long; coupling loops are computed to {coupling.TUNED_LOOP.high:g}"
        )
    return ""


def place_of(design: Design, chain: Chain) -> Place:
    """Return where coupling loops lie: in the middle of the loop, or inside it opposite the capacitor.

    Opposite is where the line from the capacitor through the middle meets the conductor: of nested turns the innermost,
    of turns side by side the middle one.

    Raises
    ------
    ValueError : the middle of an outline lies outside it
    """
    small, flow = small_loop(design), chain.likely.state.flow
    shape, currents = flow.shape, flow.segments()
    if not _surrounds_its_middle(shape.turn.points):
        raise ValueError("the middle of the outline lies outside it, where no coupling loop is computed")
    centre = np.array([0.0, 0.0, shape.height])
    normal = np.array([1.0, 0.0, 0.0]) if shape.upright else np.array([0.0, 0.0, 1.0])
    if small.clearance is None:
        return centred(centre, normal)
    # The port is the first segment.
    port = 0.5 * (currents.start[0] + currents.end[0]) - centre
    away = normal * (port @ normal) - port
    away /= np.linalg.norm(away)
    point = _meeting(currents.start - centre, currents.end - centre, away, np.cross(normal, away))
    return beside(centre + point, -away, normal, small.clearance)


def _surrounds_its_middle(turn: Array) -> bool:
    """Return whether a closed line in its plane, shape (point, 2), runs round its origin."""
    angle = np.unwrap(np.arctan2(*np.append(turn, turn[:1], axis=0).T))
    return bool(abs(angle[-1] - angle[0]) > np.pi)


def _meeting(start: Array, end: Array, away: Array, across: Array) -> Array:
    """Return where the half-plane towards `away` first meets segments [m]; of equally near ones, nearest the middle."""
    first, last = start @ across, end @ across
    apart = first - last
    share = np.where(apart == 0.0, 0.0, first / np.where(apart == 0.0, 1.0, apart))
    points = start + np.clip(share, 0.0, 1.0)[:, None] * (end - start)
    reach, same = points @ away, SAME * float(np.abs(start).max())
    # A corner that lies opposite may miss the line by rounding.
    meets = (np.abs(points @ across) <= same) & (reach > 0.0)
    nearest = meets & (reach <= reach[meets].min() + same)
    aside = np.linalg.norm(points - np.outer(reach, away), axis=1)
    return np.asarray(points[int(np.argmin(np.where(nearest, aside, np.inf)))])


@dataclass(frozen=True, slots=True)
class Sized:
    """The coupling loop that matches at one end of the resistance.

    `resistance` is that of the loop at its port [ohm], `charge` the factor by which charge changes the coupling [1].
    """

    sizing: Sizing
    resistance: float
    charge: float


def sized(design: Design, chain: Chain) -> tuple[Sized | None, Sized | None, Sized | None]:
    """Return the coupling loops that match with the least resistance, the likely one and the most.

    None where the likely one is not known, or where no height bounds the most.
    """
    place, radius = place_of(design, chain), wire_radius(small_loop(design))
    least, middle, most = _circuits(design, chain)
    fitting = candidates(middle, place, radius)
    likely = Sized(fitting.matching(middle.resistance), middle.resistance, 1.0)
    if likely.sizing.matched is None or _within(likely) is None:
        return None, likely, None
    below, above = coupling.coefficient_ends(_size(design, chain), likely.sizing.matched.size)

    def moved(circuit: Circuit, charge: float) -> Sized:
        return Sized(fitting.matching(circuit.resistance / charge), circuit.resistance, charge)

    return moved(least, float(above)), likely, moved(most, float(below)) if chain.most else None


def sizing(design: Design, chain: Chain) -> tuple[Spread, str]:
    """Return the diameter of the coupling loop that matches [m], and why an end of it is not known.

    Its ends are those of the resistance, for the better the loop, the smaller it is, and of the charge that couples.
    """
    if why := not_coupled(design, chain):
        return UNKNOWN, why
    try:
        low, likely, high = sized(design, chain)
    except ValueError as error:
        return UNKNOWN, str(error)
    failed = [each for each in (likely, low, high) if each is not None and _within(each) is None]
    why = _no_match(failed[0].sizing) if failed else "" if chain.most else NO_HEIGHT
    return Spread(*(None if each is None else _within(each) for each in (low, likely, high))), why


def _within(found: Sized) -> float | None:
    """Return the diameter that matches [m], of a coupling loop that is small enough to be computed."""
    matched = found.sizing.matched
    return matched.diameter if matched is not None and coupling.SIZE.holds(matched.size) else None


def _size(design: Design, chain: Chain) -> float:
    """Return the length of the conductor in wavelengths [1]."""
    return chain.line.perimeter * design.loop.turns * chain.frequency / c


def _too_large(found: Coupled, verb: str) -> str:
    return (
        f"its circumference {verb} {found.size:.3g} wavelengths; coupling loops are computed to {coupling.SIZE.high:g}"
    )


def _no_match(found: Sizing) -> str:
    if found.matched is not None:
        return _too_large(found.matched, "would be")
    if found.largest is None:
        return "there is no room for a coupling loop there"
    if found.smallest_overcouples:
        return "the smallest loop of this wire couples too much: use thinner wire, or lay it further off"
    return (
        f"nothing that fits in there matches: the largest, {1e3 * found.largest.diameter:.3g} mm, reaches "
        f"{found.largest.coefficient:.2g} of the coupling needed"
    )


def _circuits(design: Design, chain: Chain) -> tuple[Circuit, Circuit, Circuit]:
    """Return what the coupling loop works into with the least resistance, the likely one and the most."""
    flow = chain.likely.state.flow
    resistances = (
        min(chain.resistance("low", each) for each in chain.least),
        chain.resistance("likely", chain.likely),
        max(chain.resistance("high", each) for each in (chain.most or chain.least)),
    )
    made = [Circuit(flow.segments(), chain.frequency, each, design.feed.line_impedance) for each in resistances]
    return made[0], made[1], made[2]


def fed(design: Design, chain: Chain, diameter: float) -> Fed:
    """Return what a coupling loop of a diameter [m] does at one transmission.

    Where no height bounds the resistance, nothing bounds how weakly it couples.

    Raises
    ------
    ValueError : there is no room for it, its wire is too thick for it, or it is too large to be computed
    """
    (found,) = _coupled(design, chain, np.array([diameter]))
    if not coupling.SIZE.holds(found.size):
        raise ValueError(_too_large(found, "is"))
    low, likely, high = _circuits(design, chain)
    below, above = coupling.coefficient_ends(_size(design, chain), found.size)
    middle = found.coefficient
    coefficient = Spread(
        middle * likely.resistance / high.resistance * float(below) if chain.most else None,
        middle,
        middle * likely.resistance / low.resistance * float(above),
    )
    offset = coupling.best_offset(
        chain.frequency,
        middle,
        found.reactance,
        design.feed.line_impedance,
        chain.quality("likely", chain.likely),
    )
    return Fed(coefficient, ratio_of(coefficient), float(offset))


def ratio_of(coefficient: Spread) -> Spread:
    """Return the lowest SWR that retuning reaches, of what the feed shows over the loop's own resistance."""
    ends = [None if each is None else _ratio(each) for each in (coefficient.low, coefficient.high)]
    if coefficient.likely is None or None in ends:
        return Spread(None, None if coefficient.likely is None else _ratio(coefficient.likely), None)
    inside = (coefficient.low or 0.0) <= 1.0 <= (coefficient.high or 0.0)
    low, high = (each or 1.0 for each in ends)
    return Spread(1.0 if inside else min(low, high), _ratio(coefficient.likely), max(low, high))


def _ratio(coefficient: float) -> float:
    return float(coupling.best_standing_wave_ratio(coefficient))


def _coupled(design: Design, chain: Chain, diameters: Array) -> list[Coupled]:
    _, likely, _ = _circuits(design, chain)
    return coupled(likely, place_of(design, chain), wire_radius(small_loop(design)), diameters)


def one_for_all(design: Design, chains: Sequence[Chain], matched: Sequence[float]) -> float | None:
    """Return the diameter of the coupling loop whose worst SWR over some transmissions is least [m]; None for none.

    One of those that match a transmission, or between them, since SWR grows with the distance from each; where nothing
    matches one of them, any that has room, and is small enough for the highest frequency.

    Parameters
    ----------
    design, chains : the design, and its transmissions
    matched : the diameters that match one of them [m], at most one for each
    """
    if not matched:
        return None
    least, most = min(matched), max(matched)
    if len(matched) < len(chains):
        radius, currents = wire_radius(small_loop(design)), chains[0].likely.state.flow.segments()
        room = 2.0 * place_of(design, chains[0]).largest(currents, radius)
        short = c / max(chain.frequency for chain in chains)
        least = min(least, 2.0 * radius / coupling.THICKNESS.high * (1.0 + ROUNDING))
        most = max(most, min(room, coupling.SIZE.high * short / np.pi) * (1.0 - ROUNDING))
    if least == most:
        return least
    tried = np.geomspace(least, most, TRIED)
    worst = np.max([[each.standing_wave_ratio for each in _coupled(design, chain, tried)] for chain in chains], axis=0)
    return float(tried[int(np.argmin(worst))])
