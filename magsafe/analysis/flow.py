"""The loop's solved current at one frequency, as the sums over it that every figure needs."""

from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np
from scipy.constants import c, mu_0

from magsafe.analysis.wires import Shape, positions, potentials, shape_of, wire_of
from magsafe.design import tables
from magsafe.design.model import Conductor, Design
from magsafe.design.shape import outline
from magsafe.physics import thin_wire
from magsafe.physics.arrays import Array
from magsafe.physics.conductor import skin_depth
from magsafe.physics.near_field import SegmentCurrents
from magsafe.physics.thin_wire import LoopCurrents

TUNING_SCAN = np.linspace(0.04, 0.62, 21)  # lengths of the conductor in wavelengths: one turn's limit is near 0.45
# What a row of straight conductors says of crowding, to be multiplied: least, likely, most (coaxial and nested rings,
# thin skin, computed: 0.87 for eight tight coaxial turns; 1.7 to 2.4 for four to eight nested ones).
HELIX = (0.8, 1.0, 1.1)
SPIRAL_GROWTH = (0.0, 0.117, 0.233)  # of these for each nested turn beyond the second
THIN_SKIN, THICK_SKIN = 2.0, 1.2  # radius over skin depth below which nothing is credited; what is lost above it
RESONANCE_SCAN = np.linspace(0.5, 1.5, 41)  # times the frequency, about the nearest resonance


@dataclass(frozen=True, slots=True)
class Flow:
    """The loop's current in one surrounding: free space, or over a perfect plane, for 1 A at its port.

    `radiation` is the resistance that stands for what leaves [ohm], over a plane with the image's part; `reactance`
    that of the perfect conductor [ohm], and `slope` its derivative by the angular frequency times that frequency [ohm].
    `conductor_length` is the length that a conductor carrying 1 A throughout would need for the same loss [m], each
    turn with its proximity factor, `least_length` and `most_length` the ends of it; `internal_length` the same for the
    internal reactance [m]. `mean_square` and
    `opposite_square` are squares of the current, on average and opposite the port; `largest` is the largest current.
    """

    shape: Shape
    image: bool
    currents: LoopCurrents
    radiation: float
    reactance: float
    slope: float
    conductor_length: float
    least_length: float
    most_length: float
    internal_length: float
    mean_square: float
    opposite_square: float
    largest: float

    def segments(self) -> SegmentCurrents:
        """Return the current on the wires where they stand."""
        wire, current = wire_of(self.shape), self.currents.current[0]
        return SegmentCurrents(wire.nodes, wire.ends, current, np.roll(current, -1), wire.radius)


def flow(design: Design, frequency: float, position: str | None, image: bool, height: float | None = None) -> Flow:
    """Return the solved current at a frequency [Hz], with the port at a position, alone or with the image.

    `height` is that of the loop's centre [m], where the design gives none.
    """
    shape = shape_of(design.loop, frequency, position)
    if height is not None:
        shape = replace(shape, height=height)
    currents = _solved(shape, highest(design), np.array([frequency]), image)
    square = currents.square[0]
    low, factors, high = (each[currents.wire.turn] for each in turn_factors(design, frequency))
    omega = 2.0 * np.pi * frequency
    return Flow(
        shape=shape,
        image=image,
        currents=currents,
        radiation=max(0.0, float(currents.resistance[0])),
        reactance=float(currents.reactance[0]),
        slope=omega * float(currents.slope[0]),
        conductor_length=float((factors * square).sum()),
        least_length=float((low * square).sum()),
        most_length=float((high * square).sum()),
        internal_length=float((factors * currents.complex_square[0]).sum().real),
        mean_square=float(square.sum() / currents.wire.length.sum()),
        opposite_square=float(np.abs(currents.opposite()[0]) ** 2),
        largest=float(currents.largest[0]),
    )


def turn_factors(design: Design, frequency: float) -> tuple[Array, Array, Array]:
    """Return the loss of each turn over that of a lone conductor [1] at a frequency [Hz]: least, likely, most.

    Shape (turns + 1,) each, the last, at index `LINK`, that of the closing link. The row of straight conductors stands
    for a helix; in a spiral the inner turns lie in the field of all others. Where the skin is not thin the current
    crowds less.
    """
    loop = design.loop
    if loop.turns == 1:
        return np.ones(2), np.ones(2), np.ones(2)
    from magsafe.physics.proximity import row_proximity  # noqa: PLC0415  (only for turns: slow to import)

    across = loop.conductor.outer_diameter or 0.0
    crowded = np.append(row_proximity(loop.turns, loop.turn_spacing or 0.0, across).loss_factor - 1.0, 0.0)
    depth = float(skin_depth(frequency, poorest_conductivity(loop.conductor)))
    thick = across / 2.0 / depth
    thin = 0.0 if thick < THIN_SKIN else 1.0 / (1.0 + THICK_SKIN / thick)
    more = loop.turns - 2 if loop.turn_arrangement == "nested" else 0
    low, likely, high = (
        1.0 + (share + growth * more) * crowded for share, growth in zip(HELIX, SPIRAL_GROWTH, strict=True)
    )
    return 1.0 + (low - 1.0) * thin, likely, high


def poorest_conductivity(made_of: Conductor) -> float:
    """Return the least conductivity that the conductor may have [S/m], for the depth of its skin."""
    if made_of.conductivity is not None:
        return made_of.conductivity
    row = tables.materials()[made_of.material or ""]
    return row.conductivity * (1.0 - row.scatter)


def inductance(design: Design, frequency: float) -> float:
    """Return the inductance at low frequency without its internal part [H], fine enough for a frequency [Hz]."""
    shape = _canonical(shape_of(design.loop, frequency, positions(design)[0]))
    static = potentials(shape, highest(design), image=False).static
    return float(static[0].sum()) * mu_0 / (4.0 * np.pi)


def reactances(design: Design, frequencies: Array, position: str | None, *, image: bool) -> tuple[Array, Array]:
    """Return the port's reactance [ohm] and the length that an internal reactance counts on [m] over frequency [Hz].

    Of the perfect conductor, with the port at a position, alone or with the image. Shapes are those of `frequencies`.
    """
    shape = shape_of(design.loop, float(frequencies.max()), position)
    currents = _solved(shape, highest(design), frequencies, image)
    factors = np.array([turn_factors(design, float(each))[1][currents.wire.turn] for each in frequencies])
    return currents.reactance, np.asarray((factors * currents.complex_square).sum(axis=1).real)


def tuning_limit(design: Design) -> float | None:
    """Return the frequency of the port's first anti-resonance [Hz]: no series capacitor tunes the loop above it."""
    frequencies = TUNING_SCAN * c / (outline(design.loop).perimeter * design.loop.turns)
    shape = _canonical(shape_of(design.loop, float(frequencies[-1]), positions(design)[0]))
    return _crossing(shape, highest(design), tuple(frequencies), float(frequencies[0]), falling=True)


def nearest_resonance(design: Design, frequency: float) -> float | None:
    """Return the frequency nearest to the given one [Hz] at which the port's reactance rises through zero."""
    frequencies = RESONANCE_SCAN * frequency
    shape = _canonical(shape_of(design.loop, float(frequencies[-1]), positions(design)[0]))
    return _crossing(shape, highest(design), tuple(frequencies), frequency, falling=False)


@lru_cache(maxsize=32)
def _crossing(shape: Shape, top: float, scan: tuple[float, ...], near: float, *, falling: bool) -> float | None:
    """Return the passage of the reactance from one sign to the other that is nearest to a frequency [Hz].

    Rising, it passes through zero. Falling, it passes through infinity, and the susceptance is followed instead.
    """
    frequencies, found = np.array(scan), 0.0
    for again in (True, False):
        currents = _solved(shape, top, frequencies, image=False)
        reactance = currents.reactance
        followed = -reactance / (reactance**2 + currents.resistance**2) if falling else reactance
        passing = np.flatnonzero((followed[:-1] < 0.0) & (followed[1:] >= 0.0))
        if not len(passing):
            return None
        low, high = frequencies[:-1][passing], frequencies[1:][passing]
        share = -followed[:-1][passing] / (followed[1:][passing] - followed[:-1][passing])
        places = low + share * (high - low)
        best = int(np.argmin(np.abs(places - near)))
        found = float(places[best])
        if again:
            frequencies = np.linspace(low[best], high[best], 8)
    return found


def highest(design: Design) -> float:
    """Return the highest frequency at which anything of a design is solved [Hz]."""
    used = max(transmission.frequency for transmission in design.transmission)
    if design.capacitor.kind == "none":
        used *= float(RESONANCE_SCAN[-1])
    length = outline(design.loop).perimeter * design.loop.turns
    return max(used, float(TUNING_SCAN[-1]) * c / length)


def _canonical(shape: Shape) -> Shape:
    """Return the shape as it is solved in free space, where neither its height nor a turn in its plane matters."""
    return replace(shape, port_angle=0.0, height=0.0, upright=True)


def _solved(shape: Shape, top: float, frequencies: Array, image: bool) -> LoopCurrents:
    alone = _canonical(shape)
    parts = [potentials(alone, top, image=False)]
    if image:
        parts.append(potentials(shape, top, image=True))
    return thin_wire.solve(wire_of(alone), frequencies, tuple(parts))
