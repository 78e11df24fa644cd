"""Any currents over soil as plane waves: what they draw, what of it reaches the sky, what the soil takes.

Above and below themselves currents send plane waves of the lateral wavenumber s and the vertical one q, in units of the
free-space wavenumber k; with s beyond 1 the waves decay. One polarisation has a level electric field, unit vector t,
the other a level magnetic one, unit vector p. With N the transform of the currents at the wave vector, upwards and
downwards, the soil's reflection coefficients of `half_space` and means over the bearing,

    P = P0 + k^2 Z0/(4 pi) Re [ integral (rs conj(Nt up) Nt down + rp conj(Np up) Np down) dq ]

q runs from 1 to 0 and on to -j infinity. There the two transforms are one another's conjugate, so that only the soil's
phase tells what it takes. The means know nothing of the soil, and lifting the currents multiplies them by
exp(-2jkq height): they are taken once, for any soil and any height above the one they were taken at.

Charge counts with the current that leaves it; what sits between the plates of a capacitor is no part of the currents.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise
from math import asinh, cbrt, ceil, pi, sin
from typing import Self

import numpy as np
from scipy.constants import c, mu_0

from magsafe.physics.arrays import Array, ComplexArray
from magsafe.physics.half_space import reflection
from magsafe.physics.near_field import SegmentCurrents
from magsafe.physics.rooftops import gauss
from magsafe.physics.soil_spectrum import PHASE, SMALLEST, rule, squared

IMPEDANCE = mu_0 * c  # of free space
EDGES = (0.0, pi / 9.0, pi / 3.0, 0.5 * pi)  # elevations between which the sky's share is told: 20 and 60 degrees
DECAY = 25.0  # exp(-25) of what the soil takes is left out
MOST_ACROSS = 600.0  # lateral wavenumber times reach: bearings in proportion
PANEL = 2.4  # width of a panel in the stretched sine or decay
POINTS = 3  # Gauss-Legendre, on a segment


@dataclass(frozen=True, slots=True)
class WaveSpectrum:
    """The plane waves of currents, in means over the bearing.

    Attributes
    ----------
    wavenumber : of free space [rad/m]
    sine, step : sines of the elevation of travelling waves and their steps [1], shape (wave,)
    band : which of the bands between `EDGES` a wave belongs to [1], shape (wave,)
    up, down : mean squares of the transforms [A2 m2], shape (wave, 2): level electric field, level magnetic field
    crossed : mean of the conjugate of the one sent up times the one sent down [A2 m2], shape (wave, 2)
    decay, decay_step : of waves that decay, over the wavenumber [1], shape (decaying,)
    held : their mean squares [A2 m2], shape (decaying, 2)
    """

    wavenumber: float
    sine: Array
    step: Array
    band: Array
    up: Array
    down: Array
    crossed: ComplexArray
    decay: Array
    decay_step: Array
    held: Array

    @classmethod
    def of(cls, currents: SegmentCurrents, frequency: float, permittivity: ComplexArray, lifted: float = 0.0) -> Self:
        """Take the plane waves of currents.

        Parameters
        ----------
        currents : the segments and what flows in them, without an image, all above the ground z = 0
        frequency : of the currents [Hz]
        permittivity : complex relative permittivities of the soils that will be asked [1], shape (soil,)
        lifted : most that the currents will be lifted [m]

        Raises
        ------
        ValueError : a segment that reaches down to the ground, a negative lift

        Valid     any currents; a current that ends has its charge there. Of flat ones that lie nearer to soil than a
                  fiftieth of their reach what it takes reads low.
        Source    Weyl's plane waves: Stratton, Electromagnetic Theory, ch. 9; Sommerfeld (both memory).
        """
        lowest = float(np.minimum(currents.start[:, 2], currents.end[:, 2]).min())
        if not lowest > 0.0:
            raise ValueError(f"the lowest segment is {lowest} m above the ground, expected more than zero")
        if not lifted >= 0.0:
            raise ValueError(f"the lift is {lifted} m, expected not below zero")
        wavenumber = 2.0 * pi * frequency / c
        nearest = float(1.0 / np.sqrt(np.abs(permittivity + 1.0).max()))
        wires = _Points.on(currents, wavenumber)
        top = wavenumber * (float(np.maximum(currents.start[:, 2], currents.end[:, 2]).max()) + lifted)
        sine, step, band = _travelling(nearest, 2.0 * (top + wires.reach))
        up, down, crossed = wires.travelling(sine)
        kinks = np.unique(np.sqrt(np.maximum(permittivity.real - 1.0, 0.0)).round(2))
        end = min(DECAY / (2.0 * wavenumber * lowest), MOST_ACROSS / max(wires.reach, SMALLEST))
        nodes = list(_decaying(nearest, end, kinks))
        held = np.concatenate([wires.decaying(decay) for decay, _ in nodes])
        decay, decay_step = (np.concatenate(each) for each in zip(*nodes, strict=True))
        return cls(wavenumber, sine, step, band, up, down, crossed, decay, decay_step, held)

    @property
    def free_power(self) -> float:
        """What the currents radiate in free space [W]."""
        return self._factor * 0.5 * float(self.step @ (self.up + self.down).sum(axis=1))

    def power(self, permittivity: ComplexArray, lift: Array) -> Array:
        """Return what the currents draw over soil, radiation and loss together.

        Parameters
        ----------
        permittivity : complex relative permittivity of the soil [1], shape (soil,)
        lift : how much higher than they stand the currents are [m], shape (height,), not below 0

        Returns
        -------
        power [W], shape (soil, height)

        Valid     the currents are given: that soil changes them is the caller's to know. To 6e-4 of it over soil that
                  hardly conducts, to 1e-5 where it does, by trial against the ring of `half_space_ring`.
        Source    Sommerfeld's half-space in Weyl's form (memory); Poynting's theorem.
        """
        return self.free_power + self._turned_back(permittivity, lift).real

    def reactive_power(self, permittivity: ComplexArray, lift: Array) -> Array:
        """Return the reactive power that soil adds: for 1 A, what it adds to the reactance.

        Parameters
        ----------
        permittivity : complex relative permittivity of the soil [1], shape (soil,)
        lift : how much higher than they stand the currents are [m], shape (height,), not below 0

        Returns
        -------
        reactive power [W], inductive above 0, shape (soil, height)

        Valid     as `power`, to a tenth for currents nearly in phase all along; a full-wave loop's may be 20 ohm off.
        Source    as `power`.
        """
        return self._turned_back(permittivity, lift).imag

    def _turned_back(self, permittivity: ComplexArray, lift: Array) -> ComplexArray:
        """Complex power that the currents draw from what the soil turns back [W], shape (soil, height)."""
        waves = np.exp(-2j * self.wavenumber * self.sine[:, None] * lift)
        level, along = reflection(permittivity[:, None], self.sine)
        weight = self.step[:, None] * self.crossed
        returned = (level * weight[:, 0] + along * weight[:, 1]) @ waves
        faded = np.exp(-2.0 * self.wavenumber * self.decay[:, None] * lift)
        level, along = reflection(permittivity[:, None], np.asarray(-1j * self.decay))
        kept = self.decay_step[:, None] * self.held
        held = (level * kept[:, 0] + along * kept[:, 1]) @ faded
        return np.asarray(self._factor * (returned + 1j * held))

    def sky_power(self, permittivity: ComplexArray, lift: Array) -> Array:
        """Return what of it leaves into the sky, in the bands of elevation between `EDGES`.

        Parameters
        ----------
        permittivity : complex relative permittivity of the soil [1], shape (soil,)
        lift : how much higher than they stand the currents are [m], shape (height,), not below 0

        Returns
        -------
        power [W], shape (soil, height, 3)

        Valid     as `power`; the wave along the surface counts as lost in the soil, where it ends.
        Source    direct and reflected wave: Balanis, Antenna Theory, section 4.8 (memory).
        """
        waves = np.exp(-2j * self.wavenumber * self.sine[:, None] * lift)
        sent = np.zeros((len(permittivity), len(lift), len(EDGES) - 1))
        for which, turned in enumerate(reflection(permittivity[:, None], self.sine)):
            even = self.step * (self.up[:, which] + squared(turned) * self.down[:, which])
            mixed = 2.0 * self.step * self.crossed[:, which] * turned
            for band in range(len(EDGES) - 1):
                inside = self.band == band
                crossed = (mixed[:, inside] @ waves[inside]).real
                sent[:, :, band] += even[:, inside].sum(axis=1)[:, None] + crossed
        return 0.5 * self._factor * sent

    @property
    def _factor(self) -> float:
        return self.wavenumber**2 * IMPEDANCE / (4.0 * pi)


@dataclass(frozen=True, slots=True)
class _Points:
    """Points on the wires in units of the wavenumber's inverse, from the middle aside, and their moments [A m]."""

    place: Array
    moment: ComplexArray

    @classmethod
    def on(cls, currents: SegmentCurrents, wavenumber: float) -> Self:
        ends = np.concatenate([currents.start, currents.end])
        origin = np.append(0.5 * (ends[:, :2].min(axis=0) + ends[:, :2].max(axis=0)), 0.0)
        node, weight = gauss(POINTS)
        share = node[:, None]
        along = currents.end - currents.start
        flow = currents.current_start + share * (currents.current_end - currents.current_start)
        place = currents.start + share[..., None] * along - origin
        moment = (weight[:, None] * flow)[..., None] * along
        return cls(wavenumber * place.reshape(-1, 3), moment.reshape(-1, 3))

    @property
    def reach(self) -> float:
        """Farthest of them from the middle, aside."""
        return float(np.hypot(self.place[:, 0], self.place[:, 1]).max())

    def travelling(self, sine: Array) -> tuple[Array, Array, ComplexArray]:
        """Mean squares of what is sent up and down, and their mean product, shape (wave, 2) each."""
        lateral, bearing = np.sqrt(1.0 - sine**2), _bearings(self.reach)
        aside = self._aside(lateral, bearing)
        risen = np.exp(1j * sine[:, None] * self.place[:, 2])
        up = _polarised((aside * risen[:, None]) @ self.moment, lateral, sine, bearing)
        down = _polarised((aside * risen.conj()[:, None]) @ self.moment, lateral, -sine, bearing)
        return squared(up).mean(axis=1), squared(down).mean(axis=1), (up.conj() * down).mean(axis=1)

    def decaying(self, decay: Array) -> Array:
        """Mean squares of waves that decay, shape (decaying, 2)."""
        lateral = np.sqrt(1.0 + decay**2)
        near = self._near(DECAY / float(decay.min()))
        bearing = _bearings(float(lateral.max()) * near.reach)
        faded = np.exp(-decay[:, None] * near.place[:, 2])
        flow = (near._aside(lateral, bearing) * faded[:, None]) @ near.moment
        return np.asarray(squared(_polarised(flow, lateral, np.asarray(1j * decay), bearing)).mean(axis=1))

    def _near(self, above: float) -> Self:
        """Return the points up to so high above the lowest, aside from their own middle."""
        kept = self.place[:, 2] <= self.place[:, 2].min() + above
        place = self.place[kept]
        middle = 0.5 * (place[:, :2].min(axis=0) + place[:, :2].max(axis=0))
        return type(self)(place - np.append(middle, 0.0), self.moment[kept])

    def _aside(self, lateral: Array, bearing: Array) -> ComplexArray:
        """Phase of each point by where it lies aside, shape (wave, bearing, point)."""
        towards = np.stack([np.cos(bearing), np.sin(bearing)], axis=1)
        return np.asarray(np.exp(1j * lateral[:, None, None] * (towards @ self.place[:, :2].T)))


def _polarised(flow: ComplexArray, lateral: Array, upward: Array | ComplexArray, bearing: Array) -> ComplexArray:
    """Parts of a transform, shape (wave, bearing, 3), along t and along p, shape (wave, bearing, 2)."""
    cosine, sine = np.cos(bearing), np.sin(bearing)
    level = cosine * flow[..., 1] - sine * flow[..., 0]
    outward = cosine * flow[..., 0] + sine * flow[..., 1]
    return np.stack([level, lateral[:, None] * flow[..., 2] - upward[:, None] * outward], axis=-1)


def _bearings(reach: float) -> Array:
    """Even bearings that sum what a squared pattern of that reach holds."""
    count = 2 * ceil(reach + 3.0 * cbrt(reach) + 2.0) + 1
    return 2.0 * pi * np.arange(count) / count


def _travelling(nearest: float, phase: float) -> tuple[Array, Array, Array]:
    """Sines of elevations, their steps, and the band of each: panels from edge to edge, finer near the horizon."""
    sines, steps, bands = [], [], []
    edges = [asinh(sin(edge) / nearest) for edge in EDGES]
    for band, (low, high) in enumerate(pairwise(edges)):
        rises = sin(EDGES[band + 1]) - sin(EDGES[band])
        node, weight = rule(ceil((high - low) / PANEL + phase * rises / PHASE))
        stretched = low + (high - low) * node
        sines.append(np.minimum(nearest * np.sinh(stretched), 1.0))
        steps.append(nearest * np.cosh(stretched) * (high - low) * weight)
        bands.append(np.full(len(node), float(band)))
    return np.concatenate(sines), np.concatenate(steps), np.concatenate(bands)


def _decaying(nearest: float, end: float, kinks: Array) -> Iterator[tuple[Array, Array]]:
    """Decays and their steps, panel by panel.

    Where the wave in the soil begins to decay there is a kink if nothing is lost, and nearly one in dry soil: panels
    end there.
    """
    edges = np.arcsinh(np.concatenate([[0.0], kinks[(kinks > 0.0) & (kinks < end)], [end]]) / nearest)
    node, weight = rule(1)
    for low, high in pairwise(edges):
        panels = ceil((high - low) / PANEL)
        for panel in range(panels):
            stretched = low + (high - low) * (panel + node) / panels
            yield nearest * np.sinh(stretched), nearest * np.cosh(stretched) * (high - low) / panels * weight
