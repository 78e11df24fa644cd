"""What is under the loop, and what it may do to its current and its radiation, before real soil is computed."""

from dataclasses import dataclass
from math import hypot

import numpy as np
from scipy.constants import c

from magsafe.analysis.flow import Flow, flow
from magsafe.analysis.wires import electrical_radius, positions
from magsafe.design import tables
from magsafe.design.model import Design, SoilConstants
from magsafe.design.shape import drop, outline
from magsafe.physics import ground
from magsafe.physics.arrays import Array

DIPOLE_SIZE = 0.38  # perimeter in wavelengths up to which a whole loop loses no more to soil than a dipole (computed)
ANY_PHASE = 1.05  # on what a full-wave loop's image adds: waves of many phases may add up to a little more
BETWEEN = 0.03  # of the radiation resistance in free space, for the heights between those that are tried


@dataclass(frozen=True, slots=True)
class State:
    """One way the loop may be: its current, and the resistance of radiation and ground together [ohm]."""

    flow: Flow
    radiated: float


@dataclass(frozen=True, slots=True)
class Surroundings:
    """Every way the loop may be at one frequency.

    `free` are the currents in free space, one for each place where the capacitor may be; `likely` is the state that
    likely values are told for. `least` are the states with the least resistance that free space, a perfect image or any
    soil can give; `most` those with the most, empty where soil adds an amount that is not computed. `fields` are the
    states whose fields are compared; `stated` those over the ground stated, one for each of `free`, empty where it is
    not computed. `ground_known` tells whether the likely state is that of the ground stated,
    `height_known` whether the image's part in the reactance is.
    """

    free: tuple[Flow, ...]
    likely: State
    least: tuple[State, ...]
    most: tuple[State, ...]
    fields: tuple[State, ...]
    stated: tuple[State, ...]
    ground_known: bool
    height_known: bool


def surroundings(design: Design, frequency: float) -> Surroundings:
    """Return every way a loop may be at one frequency [Hz]."""
    where = positions(design)
    free = tuple(flow(design, frequency, position, image=False) for position in where)
    alone = tuple(State(each, each.radiation) for each in free)
    if design.ground_name == "none":
        return Surroundings(free, alone[0], alone, alone, alone, alone, ground_known=True, height_known=True)
    vertical = design.loop.plane == "vertical"
    shortfall = ground.soil_shortfall(vertical, _least_permittivity(design))
    dipole = outline(design.loop).perimeter * frequency / c <= DIPOLE_SIZE
    if design.loop.centre_height is None:
        least = tuple(
            State(each, max(0.0, _least_over_soil(one, each, shortfall if dipole else None) - BETWEEN * one.radiation))
            for one, position in zip(free, where, strict=True)
            for height in _heights(design, frequency)
            for each in (flow(design, frequency, position, image=True, height=height),)
        )
        lowest = min(state.radiated for state in least)
        both = (*(State(each, lowest) for each in free), *least)
        return Surroundings(free, alone[0], both, (), both[: len(free)], (), ground_known=False, height_known=False)
    over = tuple(flow(design, frequency, position, image=True) for position in where)
    imaged = tuple(State(each, each.radiation) for each in over)
    if design.ground_name == "perfect":
        both = (*alone, *imaged)
        return Surroundings(free, imaged[0], both, both, both, imaged, ground_known=True, height_known=True)
    lower = tuple(
        _least_over_soil(one, other, shortfall if dipole else None) for one, other in zip(free, over, strict=True)
    )
    least_alone = tuple(State(each, radiated) for each, radiated in zip(free, lower, strict=True))
    least_imaged = tuple(State(each, radiated) for each, radiated in zip(over, lower, strict=True))
    return Surroundings(
        free,
        alone[0],
        (*least_alone, *least_imaged),
        (),
        (*least_alone, *imaged),
        (),
        ground_known=False,
        height_known=True,
    )


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
    stated = design.site.ground
    if isinstance(stated, SoilConstants):
        return stated.permittivity.low
    return tables.soils()[stated].permittivity if stated in tables.soils() else 1.0
