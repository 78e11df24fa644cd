"""Wires for tests of the method of moments, solved, and what is held against the solution."""

import numpy as np
from numpy.typing import NDArray
from scipy.constants import c, mu_0
from windings import cut

from magsafe.physics import geometry, thin_wire
from magsafe.physics.geometry import Turn, Wire
from magsafe.physics.near_field import SegmentCurrents
from magsafe.physics.thin_wire import LoopCurrents, Potentials

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

COPPER, STAINLESS = 58e6, 1.39e6  # S/m


def rectangle(wide: float, high: float) -> Array:
    return 0.5 * np.array([[wide, high], [-wide, high], [-wide, -high], [wide, -high]])


OUTLINE = np.array([[0.0, 0.0], [1.2, 0.1], [1.3, 0.8], [0.9, 0.75], [0.5, 1.2], [-0.2, 0.9]])
SHAPES: dict[str, Turn] = {
    "circle": geometry.round_turn(0.5),
    "triangle": geometry.cornered_turn(geometry.regular_corners(3, 0.6), 0),
    "square": geometry.cornered_turn(rectangle(0.9, 0.9), 0),
    "octagon": geometry.cornered_turn(geometry.regular_corners(8, 0.5), 0),
    "24 sides": geometry.cornered_turn(geometry.regular_corners(24, 0.5), 0),
    "rectangle": geometry.cornered_turn(rectangle(1.5, 0.5), 1),
    "outline": geometry.cornered_turn(OUTLINE, 0),
    "acute corner": geometry.cornered_turn(np.array([[0.0, 0.0], [1.2, 0.0], [1.0, 0.35]]), 0),
    "short side": geometry.cornered_turn(
        np.array([[-0.5, -0.5], [0.45, -0.5], [0.5, -0.45], [0.5, 0.5], [-0.5, 0.5]]), 0
    ),
}


def parts_of(wire: Wire, highest: float, image: bool = False) -> tuple[Potentials, ...]:
    parts: tuple[Potentials, ...] = (thin_wire.potentials(wire, highest),)
    return (*parts, thin_wire.potentials(wire, highest, image=True)) if image else parts


def solved(wire: Wire, frequency: Array, image: bool = False) -> LoopCurrents:
    return thin_wire.solve(wire, frequency, parts_of(wire, float(frequency.max()), image))


def at_sizes(wire: Wire, *sizes: float) -> Array:
    """Frequencies at which the whole chain is so many wavelengths long."""
    return np.array(sizes) * c / float(wire.length.sum())


def ring(height: float = 0.0, per_turn: int = 48, radius: float = 5.5e-3) -> Wire:
    return geometry.upright(cut(SHAPES["circle"], radius, per_turn), height)


def flat_ring(height: float, per_turn: int = 48, radius: float = 5.5e-3) -> Wire:
    return geometry.flat(cut(SHAPES["circle"], radius, per_turn), height)


def helix(height: float = 0.0) -> Wire:
    return geometry.upright(cut(SHAPES["circle"], 5.5e-3, 24, 3, 0.04), height)


def spiral(height: float = 0.0) -> Wire:
    return geometry.flat(cut(SHAPES["square"], 3e-3, 24, 3, 0.04, nested=True), height)


def source(currents: LoopCurrents, index: int = 0) -> SegmentCurrents:
    """The solver's current as the source of a field, 1 A at the port."""
    wire, current = currents.wire, currents.current[index]
    return SegmentCurrents(wire.nodes, wire.ends, current, np.roll(current, -1), wire.radius)


def impedance_matrix(frequency: Array, parts: tuple[Potentials, ...]) -> ComplexArray:
    """Z = j eta0/(4 pi) (k A - B/k), the formula of the module; the sign of the image is in its potentials."""
    k = 2.0 * np.pi * frequency / c
    both = np.sum([part.at(k)[0] for part in parts], axis=0)
    wave = k[:, None, None]
    return np.asarray(1j * mu_0 * c / (4.0 * np.pi) * (wave * both[:, 0] - both[:, 1] / wave))


def assert_same(found: LoopCurrents, wanted: LoopCurrents, share: float, scale: float = 1.0) -> None:
    np.testing.assert_allclose(found.resistance, wanted.resistance, rtol=share)
    np.testing.assert_allclose(found.reactance, wanted.reactance, rtol=share)
    np.testing.assert_allclose(found.slope, scale * wanted.slope, rtol=share)
    assert np.abs(found.current - wanted.current).max() < share * wanted.largest.max()
