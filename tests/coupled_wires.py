"""Two closed wires with a port each, solved together by the method of moments: a reference for coupling loops.

Each wire has its own rooftops and its own matrix, `thin_wire.potentials`; between the wires 1/R is that of their axes,
by more Gauss points. Rooftops, Galerkin and sign of the port are those of `thin_wire` (Harrington 1968; memory).
"""

from dataclasses import dataclass
from math import pi

import numpy as np
from scipy.constants import c, mu_0

from magsafe.physics import thin_wire
from magsafe.physics.arrays import Array, ComplexArray
from magsafe.physics.geometry import Wire
from magsafe.physics.rooftops import gauss
from magsafe.physics.thin_wire import Potentials

SCALE = mu_0 * c / (4.0 * pi)
ORDER = 24  # Gauss points of a segment, as the other wire sees it


@dataclass(frozen=True, slots=True)
class TwoPort:
    """Impedances of the tuned loop's port (first), the coupling loop's (second), and between them."""

    first: complex
    mutual: complex
    second: complex

    def impedance(self, series: float) -> complex:
        """Return what the coupling loop's port shows with a reactance in the tuned loop's port [ohm]."""
        return self.second - self.mutual**2 / (self.first + 1j * series)

    def coefficient(self, line: float) -> float:
        """Return how strongly they couple: 1 where some reactance matches, above it overcoupled.

        Over all reactances the reflection factor runs round a circle; what it leaves at best is the distance of the
        origin from it, and the origin lies inside of an overcoupled one.
        """
        at = self.first - 1j * self.first.imag
        three = np.array(
            [self.second - self.mutual**2 / (at + 1j * x * at.real) for x in (-1.7, 0.0, 1.3)], dtype=complex
        )
        reflected = np.asarray((three - line) / (three + line), dtype=np.complex128)
        middle, radius = circle_through(reflected)
        inside = radius - abs(middle)
        return (1.0 + inside) / (1.0 - inside)


def circle_through(places: ComplexArray) -> tuple[complex, float]:
    """Return centre and radius of the circle through three places of the complex plane."""
    rows = np.array([[2.0 * z.real, 2.0 * z.imag, 1.0] for z in places])
    x, y, rest = np.linalg.solve(rows, np.abs(places) ** 2)
    return complex(x, y), float(np.sqrt(rest + x**2 + y**2))


def two_port(
    tuned: Wire,
    coupling: Wire,
    frequency: float,
    internal: tuple[complex, complex] = (0.0, 0.0),
    known: Potentials | None = None,
) -> TwoPort:
    """Solve both wires together.

    `internal` is the impedance per metre of each conductor [ohm/m]; `known` are the tuned loop's own matrices, if they
    were made before.
    """
    k = 2.0 * pi * frequency / c
    own = (known or thin_wire.potentials(tuned, frequency), thin_wire.potentials(coupling, frequency))
    size = len(tuned.nodes)
    matrix = np.zeros((size + len(coupling.nodes),) * 2, dtype=np.complex128)
    places = (slice(0, size), slice(size, None))
    for place, wire, parts, line in zip(places, (tuned, coupling), own, internal, strict=True):
        value, _ = parts.at(np.array([k]))
        matrix[place, place] = 1j * SCALE * (k * value[0, 0] - value[0, 1] / k) + line * _lengths(wire)
    between = _between(tuned, coupling, k)
    matrix[:size, size:], matrix[size:, :size] = between, between.T
    ports = np.zeros((len(matrix), 2))
    ports[:2, 0] = ports[size : size + 2, 1] = 0.5
    response = np.linalg.solve(matrix, ports)
    impedance = np.linalg.inv(ports.T @ response)
    return TwoPort(complex(impedance[0, 0]), complex(impedance[0, 1]), complex(impedance[1, 1]))


def _lengths(wire: Wire) -> Array:
    """Return the integrals of rooftop times rooftop along a wire [m], shape (node, node)."""
    third = wire.length / 3.0
    here, following = np.arange(len(third)), np.roll(np.arange(len(third)), -1)
    found = np.zeros((len(third), len(third)))
    found[here, here] = third + np.roll(third, 1)
    found[here, following] = found[following, here] = 0.5 * third
    return found


def _between(one: Wire, other: Wire, k: float) -> ComplexArray:
    """Return the impedances between the rooftops of two wires [ohm], shape (node, node)."""
    place, weight = gauss(ORDER)
    halves = np.stack([weight * (1.0 - place), weight * place])
    points = [w.nodes[:, None] + (w.length[:, None] * place)[..., None] * w.direction[:, None] for w in (one, other)]
    apart = np.linalg.norm(points[0][:, :, None, None] - points[1], axis=-1)
    pairs = np.einsum("im,amcn,jn->ijac", halves, np.exp(-1j * k * apart) / apart, halves, optimize=True)
    flow = pairs * (one.length[:, None] * other.length * (one.direction @ other.direction.T))
    rows = flow[0] + np.roll(flow[1], 1, axis=1)
    vector = rows[0] + np.roll(rows[1], 1, axis=1)
    charge = pairs.sum(axis=(0, 1))
    charge = charge - np.roll(charge, 1, axis=0)
    charge = charge - np.roll(charge, 1, axis=1)
    return np.asarray(1j * SCALE * (k * vector - charge / k))
