"""The method of moments with the soil's own field in its matrix: slower than what the sheet does, and exact.

Sommerfeld's half-space in Weyl's plane waves (memory): rooftop to rooftop, each wave turned back by Fresnel's
coefficients, added to the matrix of the loop alone.
"""

from math import pi

import numpy as np
from scipy.constants import c, mu_0

from magsafe.analysis.flow import highest
from magsafe.analysis.wires import potentials, shape_of, wire_of
from magsafe.design.model import Design
from magsafe.physics.arrays import Array, ComplexArray
from magsafe.physics.geometry import Wire

IMPEDANCE = mu_0 * c
NODE, WEIGHT = np.polynomial.legendre.leggauss(16)


def solved_over_soil(design: Design, frequency: float, position: str | None, permittivity: complex) -> complex:
    """Return the impedance at the port of a perfectly conducting loop over soil of a complex permittivity [ohm]."""
    shape = shape_of(design.loop, frequency, position)
    wire, k = wire_of(shape), 2.0 * pi * frequency / c
    value, _ = potentials(shape, highest(design), image=False).at(np.array([k]))
    alone = 1j * IMPEDANCE / (4.0 * pi) * (k * value[0, 0] - value[0, 1] / k)
    drive = np.zeros(len(wire.nodes), dtype=np.complex128)
    drive[:2] = 0.5
    current = np.linalg.solve(alone + _soil_matrix(wire, k, permittivity), drive)
    return complex(1.0 / (current * drive).sum())


def _soil_matrix(wire: Wire, k: float, permittivity: complex) -> ComplexArray:
    share = 0.5 + 0.5 * np.polynomial.legendre.leggauss(3)[0]
    weight = 0.5 * np.polynomial.legendre.leggauss(3)[1]
    along = wire.ends - wire.nodes
    place = k * (wire.nodes + share[:, None, None] * along)
    reach = float(np.hypot(place[..., 0], place[..., 1]).max())
    falling, rising = weight * (1.0 - share), weight * share
    total = np.zeros((len(along), len(along)), dtype=np.complex128)
    for upward, step in _waves(permittivity, float(place[..., 2].min()), 2.0 * float(place.max())):
        lateral = float(np.sqrt(1.0 - upward**2).real)
        count = 2 * int(lateral * reach + 4.0 * (lateral * reach) ** (1.0 / 3.0) + 6.0) + 1
        bearing = 2.0 * pi * np.arange(count) / count
        cosine, sine = np.cos(bearing)[:, None], np.sin(bearing)[:, None]
        phase = np.exp(1j * lateral * (cosine[..., None] * place[..., 0] + sine[..., None] * place[..., 1]))
        height = np.exp(-1j * upward * place[..., 2])
        into = np.sqrt(permittivity - lateral**2 + 0j)
        level = (upward - into) / (upward + into)
        magnetic = (permittivity * upward - into) / (permittivity * upward + into)
        sides = []
        for sent, sign in ((phase * height, -1.0), (phase.conj() * height, 1.0)):
            first, second = (np.einsum("bgs,g->bs", sent, each)[..., None] * along for each in (falling, rising))
            rooftop = first + np.roll(second, 1, axis=1)
            outward = cosine * rooftop[..., 0] + sine * rooftop[..., 1]
            across = cosine * rooftop[..., 1] - sine * rooftop[..., 0]
            sides.append((across, lateral * rooftop[..., 2] - sign * upward * outward))
        down, up = sides
        total += step * 2.0 * pi / count * (level * up[0].T @ down[0] + magnetic * up[1].T @ down[1])
    return np.asarray(total * k**2 * IMPEDANCE / (8.0 * pi**2))


def _waves(permittivity: complex, lowest: float, phase: float) -> list[tuple[complex, complex]]:
    """Vertical wavenumbers and their steps: 1 to 0, then decaying ones."""
    nearest = 1.0 / abs(permittivity + 1.0) ** 0.5
    travelling = _panels(0.0, float(np.arcsinh(1.0 / nearest)), 6 + int(phase / 4.0))
    decaying = _panels(0.0, float(np.arcsinh(15.0 / lowest / nearest)), 12)
    waves = [(nearest * np.sinh(t) + 0j, nearest * np.cosh(t) * w + 0j) for t, w in zip(*travelling, strict=True)]
    waves += [(-1j * nearest * np.sinh(t), 1j * nearest * np.cosh(t) * w) for t, w in zip(*decaying, strict=True)]
    return waves


def _panels(low: float, high: float, count: int) -> tuple[Array, Array]:
    width = (high - low) / count
    places = low + width * (np.arange(count)[:, None] + 0.5 + 0.5 * NODE)
    return places.ravel(), np.tile(0.5 * width * WEIGHT, count)
