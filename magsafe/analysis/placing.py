"""The same loop at other heights and in the other plane: what reaches the sky, and the volts."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np

from magsafe.analysis.chain import Chain
from magsafe.analysis.flow import flow
from magsafe.analysis.losses import Corner
from magsafe.analysis.soil import least_height
from magsafe.analysis.surroundings import State, over_plane
from magsafe.analysis.wires import positions
from magsafe.design.model import Design
from magsafe.physics import tuned_circuit
from magsafe.physics.arrays import Array
from magsafe.physics.wave_spectrum import WaveSpectrum

Plane = Literal["vertical", "horizontal"]

HEIGHTS = (0.5, 1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0, 10.0, 12.0, 15.0, 20.0, 25.0, 30.0, 40.0)  # m, tried in turn
STEPS = (1.3, 2.0)  # times the height, and down by the first: what is worth a row


@dataclass(frozen=True, slots=True)
class Placing:
    """A loop at a height [m] in a plane, likely values.

    `sky` is what leaves into the sky over the power into the loop [1], in the bands of elevation of
    `wave_spectrum.EDGES`; `voltage` the crest at the capacitor for the power as planned [V], None without one.
    """

    plane: Plane
    height: float
    as_designed: bool
    sky: Array
    voltage: float | None

    @property
    def efficiency(self) -> float:
        """Power that leaves into the sky over the power into the loop [1]."""
        return float(self.sky.sum())


def placings(design: Design, chain: Chain) -> tuple[Placing, ...]:
    """Return the loop as designed, then at other heights and in the other plane.

    Empty in free space, and where ground or height is not stated.
    """
    over, height = chain.around.over, design.loop.centre_height
    if height is None or not over or not chain.around.ground_known:
        return ()
    own = design.loop.plane
    first = over[0]
    designed = State(first.flow, float(first.radiated[0]), float(first.shift[0]))
    made = [_placing(chain, designed, own, height, True, first.sky[0])]
    other: Plane = "horizontal" if own == "vertical" else "vertical"
    tried: dict[Plane, list[float]] = {own: _heights(design, own, height), other: []}
    tried[other] = sorted({each for each in (height, *tried[own][-1:]) if each >= _lowest(design, other)})
    for plane, heights in tried.items():
        made += _at(design, chain, plane, heights)
    return tuple(made)


def _heights(design: Design, plane: Plane, height: float) -> list[float]:
    """Return other heights of the centre that are worth a row [m], in rising order."""
    lowest = _lowest(design, plane)
    lower = [each for each in HEIGHTS if lowest <= each <= height / STEPS[0]][-1:]
    higher = [next((each for each in HEIGHTS if each >= max(lowest, step * height)), None) for step in STEPS]
    return [*lower, *dict.fromkeys(each for each in higher if each is not None)]


def _lowest(design: Design, plane: Plane) -> float:
    """Return the least height of the centre at which another row is told [m]."""
    return least_height(design.loop.model_copy(update={"plane": plane}))


def _at(design: Design, chain: Chain, plane: Plane, heights: Sequence[float]) -> Iterator[Placing]:
    if not heights:
        return
    turned = design.model_copy(update={"loop": design.loop.model_copy(update={"plane": plane})})
    position = positions(turned)[0]
    if design.ground_name == "perfect":
        for height in heights:
            imaged = flow(turned, chain.frequency, position, image=True, height=height)
            over = over_plane(imaged, imaged.radiation, chain.frequency)
            yield _placing(chain, State(imaged, imaged.radiation), plane, height, False, over.sky[0])
        return
    soil = chain.around.over[0].permittivity[:1]
    alone = flow(turned, chain.frequency, position, image=False, height=heights[0])
    lifts = np.array(heights) - heights[0]
    spectrum = WaveSpectrum.of(alone.segments(), chain.frequency, soil, float(lifts[-1]))
    added = spectrum.power(soil, lifts)[0] - spectrum.free_power
    shifts, skies = spectrum.reactive_power(soil, lifts)[0], spectrum.sky_power(soil, lifts)[0]
    for height, more, shift, sky in zip(heights, added, shifts, skies, strict=True):
        state = State(alone, alone.radiation + float(more), float(shift))
        yield _placing(chain, state, plane, height, False, sky)


def _placing(chain: Chain, state: State, plane: Plane, height: float, as_designed: bool, sky: Array) -> Placing:
    corner = Corner(state, 0.0, chain.internal, in_place=as_designed)
    total, power = chain.taken(corner), chain.power.likely or 0.0
    voltage = float(tuned_circuit.peak_voltage(power, total, corner.reactance)) * chain.overshoot
    return Placing(plane, height, as_designed, sky / total, voltage if chain.tuned else None)
