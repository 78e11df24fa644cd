"""What is under the loop, and what it does to its current, its radiation and its loss.

Over soil the current is solved alone and with its image in a perfect plane. What either current draws over the soil is
integrated, so the two tell how far the current's own change matters: from 1.2 radii up what the current that flows over
the soil draws lies between them, each moved outwards by how far they are apart (computed, with the soil's own field in
the matrix).
"""

from dataclasses import dataclass, replace
from math import hypot

import numpy as np
from scipy.constants import c

from magsafe.analysis.flow import Flow, flow
from magsafe.analysis.soil import BETWEEN_LOSSES, BETWEEN_SOILS, NEARLY_PERFECT, PERFECT, permittivities
from magsafe.analysis.wires import electrical_radius, positions
from magsafe.design.model import Design
from magsafe.design.shape import drop, outline
from magsafe.physics import ground
from magsafe.physics.arrays import Array, ComplexArray
from magsafe.physics.wave_spectrum import WaveSpectrum

DIPOLE_SIZE = 0.38  # perimeter in wavelengths up to which a whole loop loses no more to soil than a dipole (computed)
ANY_PHASE = 1.05  # on what a full-wave loop's image adds: waves of many phases may add up to a little more
BETWEEN = 0.03  # of the radiation resistance in free space, for the heights between those that are tried
HERE = np.zeros(1)  # no lift


@dataclass(frozen=True, slots=True)
class State:
    """One way the loop may be: its current, and the resistance of radiation and ground together [ohm].

    `shift` is what soil adds to the reactance of the current that is solved without it [ohm].
    """

    flow: Flow
    radiated: float
    shift: float = 0.0


@dataclass(frozen=True, slots=True)
class OverGround:
    """A current over the ground that may be, one value for each soil, for 1 A at the port.

    `alone` is the radiation resistance in free space of the loop with its port there [ohm], `radiated` that of its
    radiation and the ground together [ohm], shape (soil,), `shift` what soil adds to the reactance of a current solved
    in free space [ohm], shape (soil,), and `sky` what leaves into the sky, in the bands of elevation of
    `wave_spectrum.EDGES` [ohm], shape (soil, 3). `permittivity` is the soil's [1], shape (soil,), the likely
    one first where a ground is stated. `least` and `most` are the ends of `radiated`, with what lies between the
    samples and with the current's own change.
    """

    flow: Flow
    alone: float
    permittivity: ComplexArray
    radiated: Array
    shift: Array
    sky: Array
    least: float
    most: float


@dataclass(frozen=True, slots=True)
class Surroundings:
    """Every way the loop may be at one frequency.

    `free` are the currents in free space, one for each place where the capacitor may be; `likely` is the state that
    likely values are told for. `least` are the states with the least resistance that free space, a perfect image or any
    soil of the span can give; `most` those with the most that the ground stated gives, or any where none is,
    empty where no height bounds it.
    `fields` are the states whose fields are compared; `over` the currents over the ground that may be, those of `free`
    and those with their image, empty in free space and without a height. `ground_known` tells whether the likely state
    is that of the ground stated, `height_known` whether the image's part in the reactance is.
    """

    free: tuple[Flow, ...]
    likely: State
    least: tuple[State, ...]
    most: tuple[State, ...]
    fields: tuple[State, ...]
    over: tuple[OverGround, ...]
    ground_known: bool
    height_known: bool


def surroundings(design: Design, frequency: float) -> Surroundings:
    """Return every way a loop may be at one frequency [Hz]."""
    where = positions(design)
    free = tuple(flow(design, frequency, position, image=False) for position in where)
    alone = tuple(State(each, each.radiation) for each in free)
    if design.ground_name == "none":
        return Surroundings(free, alone[0], alone, alone, alone, (), ground_known=True, height_known=True)
    if design.loop.centre_height is None:
        return _at_any_height(design, frequency, free)
    imaged = tuple(flow(design, frequency, position, image=True) for position in where)
    own = tuple(State(each, each.radiation) for each in imaged)
    if design.ground_name == "perfect":
        both = (*alone, *own)
        over = tuple(over_plane(each, one.radiation, frequency) for each, one in zip(imaged, free, strict=True))
        return Surroundings(free, own[0], both, both, both, over, ground_known=True, height_known=True)
    soils, known = permittivities(design, frequency), design.ground_name is not None
    pairs = tuple(
        _with_change(*(over_soil(each, one.radiation, frequency, soils) for each in (one, other)))
        for one, other in zip(free, imaged, strict=True)
    )
    # Soil that reflects as the plane does may leave less resistance than the plane.
    with_image = [min(other.flow.radiation, other.least) for _, other in pairs]
    lower = [min(one.alone, least) for (one, _), least in zip(pairs, with_image, strict=True)]
    least_alone = tuple(State(each, radiated) for each, radiated in zip(free, lower, strict=True))
    least_imaged = tuple(State(each, radiated) for each, radiated in zip(imaged, lower, strict=True))
    most = tuple(
        State(each.flow, each.most, shift)
        for pair in pairs
        for each in pair
        for shift in sorted({float(each.shift.min()), float(each.shift.max())})
    )
    first = pairs[0][0]
    likely = State(first.flow, float(first.radiated[0]), float(first.shift[0])) if known else alone[0]
    over = tuple(each for currents in zip(*pairs, strict=True) for each in currents)
    if not known:
        most += (*alone, *own)
        over += tuple(over_plane(each, one.radiation, frequency) for each, one in zip(imaged, free, strict=True))
    fields = (*least_alone, *(State(each, least) for each, least in zip(imaged, with_image, strict=True)))
    return Surroundings(
        free, likely, (*least_alone, *least_imaged), most, fields, over, ground_known=known, height_known=True
    )


def over_soil(current: Flow, alone: float, frequency: float, soils: ComplexArray) -> OverGround:
    """Return what a current draws over soils at a frequency [Hz]; `alone` as in `OverGround`."""
    spectrum = WaveSpectrum.of(current.segments(), frequency, soils)
    # What the current radiates alone is told by the solver; the spectrum tells what the soil adds.
    own = alone if not current.image else spectrum.free_power
    radiated = own + spectrum.power(soils, HERE)[:, 0] - spectrum.free_power
    shift = np.zeros(len(soils)) if current.image else spectrum.reactive_power(soils, HERE)[:, 0]
    sky = spectrum.sky_power(soils, HERE)[:, 0]
    return OverGround(current, alone, soils, radiated, shift, sky, *_ends(radiated, radiated, alone))


def soil_shift(current: Flow, frequency: float, soils: ComplexArray) -> Array:
    """Return what soils add to the reactance of a current solved in free space [ohm], shape (soil,)."""
    return WaveSpectrum.of(current.segments(), frequency, soils).reactive_power(soils, HERE)[:, 0]


def _with_change(free: OverGround, imaged: OverGround) -> tuple[OverGround, OverGround]:
    """Return both with the same ends: what they draw over one soil tells how far the current's own change matters."""
    apart = np.abs(free.radiated - imaged.radiated)
    lower = np.minimum(free.radiated, imaged.radiated) - apart
    upper = np.maximum(free.radiated, imaged.radiated) + apart
    least, most = _ends(lower, upper, free.alone)
    return replace(free, least=least, most=most), replace(imaged, least=least, most=most)


def _ends(lower: Array, upper: Array, alone: float) -> tuple[float, float]:
    """Return the least and the most over soils [ohm], with what lies between samples of them."""
    least, most = float(lower.min()), float(upper.max())
    if len(lower) > 1:
        least -= BETWEEN_SOILS * alone + BETWEEN_LOSSES * max(0.0, least - alone)
        most *= 1.0 + BETWEEN_SOILS
    return max(0.0, least), most


def over_plane(current: Flow, alone: float, frequency: float) -> OverGround:
    """Return what a current with its image radiates over a perfect plane at a frequency [Hz]."""
    plane, radiation = np.array([NEARLY_PERFECT]), current.radiation
    sky = WaveSpectrum.of(current.segments(), frequency, plane).sky_power(plane, HERE)[:, 0]
    return OverGround(
        flow=current,
        alone=alone,
        permittivity=np.array([PERFECT]),
        radiated=np.array([radiation]),
        shift=np.zeros(1),
        sky=sky,
        least=radiation,
        most=radiation,
    )


def _at_any_height(design: Design, frequency: float, free: tuple[Flow, ...]) -> Surroundings:
    """Return every way a loop may be whose height is not stated, over a plane or any soil, by what bounds all soils."""
    shortfall = ground.soil_shortfall(design.loop.plane == "vertical", _least_permittivity(design))
    dipole = outline(design.loop).perimeter * frequency / c <= DIPOLE_SIZE
    least = tuple(
        State(each, max(0.0, _least_over_soil(one, each, shortfall if dipole else None) - BETWEEN * one.radiation))
        for one, position in zip(free, positions(design), strict=True)
        for height in _heights(design, frequency)
        for each in (flow(design, frequency, position, image=True, height=height),)
    )
    lowest = min(state.radiated for state in least)
    both = (*(State(each, lowest) for each in free), *least)
    likely = State(free[0], free[0].radiation)
    return Surroundings(free, likely, both, (), both[: len(free)], (), ground_known=False, height_known=False)


def _least_over_soil(free: Flow, over: Flow, shortfall: float | None) -> float:
    """Return the least resistance that soil may leave [ohm], by the dipole's shortfall, or by the image without one.

    Soil reflects less than a perfect plane but in any phase, so at most the whole of what the image adds is lost.
    """
    if shortfall is not None:
        return max(0.0, min(free.radiation, over.radiation) - shortfall * free.radiation)
    added = hypot(over.radiation - free.radiation, over.reactance - free.reactance)
    return max(0.0, free.radiation - ANY_PHASE * added)


def _heights(design: Design, frequency: float) -> Array:
    """Return heights of the centre [m] that stand for any: from just above the ground to half a wavelength and on."""
    loop = design.loop
    lowest = drop(loop) + 2.0 * electrical_radius(loop.conductor) + 0.02 * outline(loop).reach
    above = np.arange(0.08, 0.55, 0.03) * c / frequency
    below = np.geomspace(lowest, max(float(above[0]), 1.5 * lowest), 5)
    return np.concatenate([below, above[above > below[-1]]])


def _least_permittivity(design: Design) -> float:
    """Return the least permittivity that the ground may have; 1 where nothing is stated."""
    soils = permittivities(design, 1.0)
    return float(soils.real.min()) if len(soils) else 1.0
