"""The laws that a solved current keeps: energy and losses, boundary conditions, reciprocity, symmetry."""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.constants import c, mu_0
from scipy.spatial.transform import Rotation
from thin_wires import (
    COPPER,
    SHAPES,
    STAINLESS,
    Array,
    ComplexArray,
    assert_same,
    at_sizes,
    flat_ring,
    helix,
    impedance_matrix,
    parts_of,
    ring,
    solved,
    source,
    spiral,
)
from windings import cut

from magsafe.physics import geometry, thin_wire
from magsafe.physics.conductor import rod_impedance
from magsafe.physics.far_field import FarField
from magsafe.physics.geometry import Wire
from magsafe.physics.near_field import SegmentCurrents, fields, magnitude, with_image
from magsafe.physics.thin_wire import LoopCurrents


def load_matrix(wire: Wire, line: Array | ComplexArray) -> ComplexArray:
    """Integrals of an impedance per length [ohm/m], (segment,), between rooftops, by Gauss points on every segment."""
    place, weight = np.polynomial.legendre.leggauss(4)
    place, weight = 0.5 + 0.5 * place, 0.5 * weight
    count = len(wire.nodes)
    found = np.zeros((count, count), dtype=np.complex128)
    for m in range(count):
        ends = np.array([m, (m + 1) % count])
        shares = np.stack([1.0 - place, place])
        found[np.ix_(ends, ends)] += line[m] * wire.length[m] * (shares * weight) @ shares.T
    return found


def port_impedance(currents: LoopCurrents, index: int = 0) -> complex:
    return complex(currents.resistance[index], currents.reactance[index])


# --- energy -----------------------------------------------------------------------------------


def flow_through_sphere(currents: SegmentCurrents, frequency: float, half: bool) -> float:
    """Real power through a sphere about the origin, or through its half above the plane, by quadrature [W]."""
    order, reach = 20, float(np.abs(np.concatenate([currents.start, currents.end])).max())
    distance = 2.0 * reach + 0.5 * c / frequency
    height, weight = np.polynomial.legendre.leggauss(order)
    if half:
        height, weight = 0.5 + 0.5 * height, 0.5 * weight
    around = np.pi / order * np.arange(2 * order)
    flat = np.sqrt(1.0 - height**2)[:, None]
    up = np.broadcast_to(height[:, None], (order, 2 * order))
    out = np.stack([flat * np.cos(around), flat * np.sin(around), up], axis=2).reshape(-1, 3)
    electric, magnetic = fields(distance * out, currents, frequency)
    density = (np.cross(electric, magnetic.conj()).real * out).sum(axis=1)
    return float(density @ np.repeat(weight * np.pi / order, 2 * order) * distance**2)


@pytest.mark.parametrize("size", [0.005, 0.02, 0.1, 0.35, 0.5, 1.04, 2.0, 3.0])
@pytest.mark.parametrize("image", [False, True], ids=["free space", "plane"])
def test_radiated_power_three_ways(size: float, image: bool) -> None:
    """Conservation of energy: the matrix, the far-field integral, the Poynting flux near by agree to 1e-8."""
    wire = ring(0.7, 48 if size < 1.5 else 80)
    frequency = at_sizes(wire, size)
    found = solved(wire, frequency, image)
    currents = source(found)
    far = FarField.of(currents, float(frequency[0]), over_plane=image).power
    near = flow_through_sphere(with_image(currents) if image else currents, float(frequency[0]), image)
    assert far == pytest.approx(found.resistance[0], rel=1e-8)
    assert near == pytest.approx(found.resistance[0], rel=1e-8)


@pytest.mark.parametrize("wire", [helix(1.0), spiral(0.05)], ids=["helix", "low spiral"])
def test_radiated_power_of_windings(wire: Wire) -> None:
    """As above; a helix of three turns, and a spiral that the plane nearly silences."""
    frequency = at_sizes(wire, 0.02, 0.3)
    found = solved(wire, frequency, image=True)
    for i, f in enumerate(frequency):
        far = FarField.of(source(found, i), float(f), over_plane=True).power
        assert far == pytest.approx(found.resistance[i], rel=1e-6)


@pytest.mark.parametrize("image", [False, True], ids=["free space", "plane"])
@pytest.mark.parametrize("conductivity", [COPPER, STAINLESS, None])
def test_power_in_is_power_radiated_and_lost(conductivity: float | None, image: bool) -> None:
    """Conservation of energy: Re V of the loaded loop = radiated + integral R' |I|^2, to 1e-9.

    The port's volts are not returned; they are I.(Z + load).I at 1 A, with the load integrated here by quadrature.
    """
    wire = ring(1.0, radius=0.5e-3)
    frequency = at_sizes(wire, 0.1, 0.25, 0.7)
    parts = parts_of(wire, float(frequency.max()), image)
    none = np.zeros(len(frequency), dtype=np.complex128)
    line = none if conductivity is None else rod_impedance(frequency, conductivity, wire.radius)
    line = line[:, None] * np.linspace(0.5, 1.5, len(wire.nodes))  # a conductor that differs from place to place
    found = thin_wire.solve(wire, frequency, parts, internal=None if conductivity is None else line)
    matrices = impedance_matrix(frequency, parts)
    for i in range(len(frequency)):
        volts = found.current[i] @ (matrices[i] + load_matrix(wire, line[i])) @ found.current[i]
        lost = float(line[i].real @ found.square[i])
        assert volts.real == pytest.approx(found.resistance[i] + lost, rel=1e-9)
        assert volts.imag == pytest.approx(found.reactance[i], rel=1e-9)


@st.composite
def outlines(draw: st.DrawFn) -> Array:
    """Corners of a convex outline of up to seven sides, about 1 m wide."""
    count = draw(st.integers(3, 7))
    steps = np.array(draw(st.lists(st.floats(0.6, 1.4), min_size=count, max_size=count)))
    angle = 2.0 * np.pi * np.cumsum(steps) / steps.sum()
    squeeze = draw(st.floats(0.3, 1.0))
    return np.stack([0.5 * np.cos(angle), 0.5 * squeeze * np.sin(angle)], axis=1)


@settings(max_examples=20, deadline=None)
@given(outlines(), st.floats(-4.0, -2.3), st.floats(0.02, 2.0), st.floats(0.6, 3.0))
def test_any_outline_radiates_what_its_far_field_holds(
    corners: Array, fineness: float, size: float, height: float
) -> None:
    wire = geometry.upright(cut(geometry.cornered_turn(corners, 0), 10.0**fineness, 40), height)
    assume(float(wire.nodes[:, 2].min()) > 0.0)
    frequency = at_sizes(wire, size)
    found = solved(wire, frequency, image=True)
    assert found.resistance[0] > 0.0
    far = FarField.of(source(found), float(frequency[0]), over_plane=True).power
    assert far == pytest.approx(found.resistance[0], rel=1e-6)


# --- losses -----------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("conductivity", "radius", "resistance_share", "efficiency_share"),
    [
        (COPPER, 11e-3, 5e-4, 2e-5),
        (COPPER, 0.5e-3, 5e-3, 6e-4),
        (STAINLESS, 3e-3, 8e-3, 1e-3),
        (STAINLESS, 0.5e-3, 0.03, 7e-3),
        (STAINLESS, 0.25e-3, 0.05, 0.015),
    ],
)
def test_losses_are_integrals_over_the_current_of_a_perfect_conductor(
    conductivity: float, radius: float, resistance_share: float, efficiency_share: float
) -> None:
    """How well they are: against the internal impedance loaded in the matrix, 1 m ring, up to 0.35 wavelengths.

    The resistance at the port is worst at 0.35 wavelengths, at 0.1 it is a tenth of that.
    """
    wire = ring(radius=radius)
    frequency = at_sizes(wire, 0.01, 0.1, 0.25, 0.35)
    line = rod_impedance(frequency, conductivity, radius)[:, None] * np.ones(len(wire.nodes))
    parts = parts_of(wire, float(frequency.max()))
    perfect, loaded = thin_wire.solve(wire, frequency, parts), thin_wire.solve(wire, frequency, parts, line)
    total = [each.resistance + (line.real * each.square).sum(axis=1) for each in (perfect, loaded)]
    change = total[1] / total[0] - 1.0
    assert (np.abs(change) < resistance_share).all()
    assert (np.abs(change[:2]) < 0.12 * resistance_share).all()
    assert np.abs(change[3]) > 0.3 * resistance_share  # the bound is not idle
    efficiency = [each.resistance / whole for each, whole in zip((perfect, loaded), total, strict=True)]
    np.testing.assert_allclose(efficiency[1], efficiency[0], rtol=efficiency_share)


def test_internal_impedance_adds_what_it_holds_of_the_current() -> None:
    """At low frequency the current is even, and R' and L' of the whole length stand at the port."""
    wire = ring()
    frequency = at_sizes(wire, 0.002)
    parts = parts_of(wire, float(frequency[0]))
    line = np.full((1, len(wire.nodes)), 0.3 + 0.5j)
    bare, loaded = thin_wire.solve(wire, frequency, parts), thin_wire.solve(wire, frequency, parts, line)
    assert loaded.reactance[0] - bare.reactance[0] == pytest.approx(0.5 * wire.length.sum(), rel=1e-3)
    assert loaded.resistance[0] == pytest.approx(bare.resistance[0], rel=1e-3)


# --- boundary conditions ----------------------------------------------------------------------


def test_no_tangential_field_on_the_plane() -> None:
    """E along a perfect conductor is zero: wire and image together, below 1e-9 of the field."""
    found = solved(helix(0.8), at_sizes(helix(), 0.3), image=True)
    spot = np.random.default_rng(4).uniform(-3.0, 3.0, (60, 3)) * np.array([1.0, 1.0, 0.0])
    electric, magnetic = fields(spot, with_image(source(found)), float(found.frequency[0]))
    assert (np.abs(electric[:, :2]).max(axis=1) < 1e-9 * magnitude(electric)).all()
    assert (np.abs(magnetic[:, 2]) < 1e-9 * magnitude(magnetic)).all()


@pytest.mark.parametrize("image", [False, True], ids=["free space", "plane"])
@pytest.mark.parametrize("wire", [ring(0.52, 32, 2e-3), flat_ring(0.1, 32, 2e-3)], ids=["ring", "flat"])
def test_no_tangential_field_along_the_conductor(wire: Wire, image: bool) -> None:
    """The field by `near_field`, averaged round the surface and over each rooftop, is zero but at the port.

    There it is half of the port's volts, on either rooftop, against the current. To 0.5 % of the volts.
    """
    frequency = at_sizes(wire, 0.3)
    found = solved(wire, frequency, image)
    currents = with_image(source(found)) if image else source(found)
    node, weight = np.polynomial.legendre.leggauss(24)
    place = 0.25 * (2.0 + 3.0 * node - node**3)  # clustered at the ends, where charge steps
    weight = weight * 0.75 * (1.0 - node**2)
    first = np.cross(wire.direction, [0.3, 0.5, 0.81])
    first /= np.linalg.norm(first, axis=1)[:, None]
    second = np.cross(wire.direction, first)
    along = wire.nodes[:, None] + (wire.length[:, None] * place)[:, :, None] * wire.direction[:, None]
    total = np.zeros((len(wire.nodes), len(place)), dtype=np.complex128)
    for angle in 0.25 * np.pi * np.arange(8):
        outward = wire.radius * (1.0 + 1e-9) * (np.cos(angle) * first + np.sin(angle) * second)
        spots = along + outward[:, None]
        inside_neighbour = 1e-6  # at a joint the inner side dips into the neighbour by its bend
        spots = spots + inside_neighbour * outward[:, None]
        electric, _ = fields_outside(spots.reshape(-1, 3), currents, float(frequency[0]))
        total += (electric.reshape(*spots.shape) * wire.direction[:, None]).sum(axis=2) / 8.0
    falling = (total * weight * (1.0 - place)).sum(axis=1) * wire.length
    rising = (total * weight * place).sum(axis=1) * wire.length
    over_rooftops = falling + np.roll(rising, 1)
    volts = port_impedance(found)
    expected = np.zeros(len(wire.nodes), dtype=np.complex128)
    expected[:2] = -0.5 * volts
    assert np.abs(over_rooftops - expected).max() < 5e-3 * abs(volts)


def fields_outside(spots: Array, currents: SegmentCurrents, frequency: float) -> tuple[ComplexArray, ComplexArray]:
    """The field as of a thinner conductor with the same axis: a spot in a neighbour's bend is no error."""
    return fields(spots, replace(currents, radius=0.5 * currents.radius), frequency)


# --- reciprocity ------------------------------------------------------------------------------


@pytest.mark.parametrize("image", [False, True], ids=["free space", "plane"])
@pytest.mark.parametrize("wire", [ring(1.0), helix(1.0), spiral(0.1)], ids=["ring", "helix", "spiral"])
def test_matrix_is_symmetric(wire: Wire, image: bool) -> None:
    """Reciprocity; the real part by itself, which is a millionth of the other."""
    frequency = at_sizes(wire, 0.02, 0.4)
    matrix = impedance_matrix(frequency, parts_of(wire, float(frequency.max()), image))
    for part in (matrix.real, matrix.imag):
        asymmetry = np.abs(part - part.transpose(0, 2, 1)).max(axis=(1, 2))
        assert (asymmetry < 1e-10 * np.abs(part).max(axis=(1, 2))).all()


@pytest.mark.parametrize("image", [False, True], ids=["free space", "plane"])
@pytest.mark.parametrize("wire", [ring(1.0), helix(1.0), spiral(0.1)], ids=["ring", "helix", "spiral"])
def test_transfer_between_two_ports(wire: Wire, image: bool) -> None:
    """Reciprocity: amperes at port 2 per volt at port 1 are those at 1 per volt at 2, the chain begun at either.

    Which segment of a pair is integrated in closed form depends on where the chain begins: 1e-8 of quadrature for
    the ring; for the windings, whose own resonance is near, 1e-5.
    """
    frequency, count = at_sizes(wire, 0.1, 0.4), len(wire.nodes)
    first = solved(wire, frequency, image)
    for other in (1, 7, count // 2):
        moved = replace(wire, nodes=np.roll(wire.nodes, -other, axis=0), turn=np.roll(wire.turn, -other))
        second = solved(moved, frequency, image)
        there = 0.5 * (first.current[:, other] + first.current[:, (other + 1) % count])
        here = 0.5 * (second.current[:, count - other] + second.current[:, (count - other + 1) % count])
        forth = there / (first.resistance + 1j * first.reactance)
        back = here / (second.resistance + 1j * second.reactance)
        np.testing.assert_allclose(forth, back, rtol=1e-8 if len(set(wire.turn)) == 1 else 1e-5)


# --- symmetry ---------------------------------------------------------------------------------


@pytest.mark.parametrize("image", [False, True], ids=["free space", "plane"])
@pytest.mark.parametrize("shape", ["circle", "triangle", "square", "octagon", "24 sides", "rectangle"])
def test_current_of_a_symmetric_loop(shape: str, image: bool) -> None:
    """Equal at the same distance on both sides of the port, whose plane is the loop's mirror."""
    wire = geometry.flat(cut(SHAPES[shape], 3e-3), 1.0)
    found = solved(wire, at_sizes(wire, 0.05, 0.6), image)
    current = found.current
    mirrored = np.roll(current[:, ::-1], 2, axis=1)
    assert np.abs(mirrored - current).max() < 1e-6 * found.largest.max()


@pytest.mark.parametrize("image", [False, True], ids=["free space", "plane"])
def test_scale(image: bool) -> None:
    """All lengths times 3.7, frequencies divided by it: the same loop; only the slope counts seconds."""
    for wire in (ring(1.0), helix(1.0)):
        larger = Wire(3.7 * wire.nodes, wire.turn, 3.7 * wire.radius)
        frequency = at_sizes(wire, 0.05, 0.2, 0.8)
        assert_same(solved(larger, frequency / 3.7, image), solved(wire, frequency, image), 1e-8, 3.7)


@settings(max_examples=10, deadline=None)
@given(st.tuples(*[st.floats(-3.0, 3.0)] * 3), st.tuples(*[st.floats(-20.0, 20.0)] * 3))
def test_turned_and_moved(turn: tuple[float, ...], shift: tuple[float, ...]) -> None:
    """Free space has no direction and no place."""
    wire = ring()
    moved = replace(wire, nodes=Rotation.from_rotvec(turn).apply(wire.nodes) + np.array(shift))
    frequency = at_sizes(wire, 0.05, 0.3, 1.2)
    assert_same(solved(moved, frequency), solved(wire, frequency), 1e-8)


def test_turned_about_the_vertical_over_the_plane() -> None:
    wire = helix(0.9)
    about = Rotation.from_euler("z", 1.1).apply(wire.nodes) + np.array([5.0, -3.0, 0.0])
    frequency = at_sizes(wire, 0.05, 0.3)
    assert_same(solved(replace(wire, nodes=about), frequency, True), solved(wire, frequency, True), 1e-8)


@pytest.mark.parametrize("image", [False, True], ids=["free space", "plane"])
def test_the_other_way_round(image: bool) -> None:
    """The chain counted backwards from its port: the same loop, the current counted against the chain."""
    wire = spiral(0.3)
    nodes = np.roll(wire.nodes[::-1], 2, axis=0)
    frequency = at_sizes(wire, 0.05, 0.2)
    wanted = solved(wire, frequency, image)
    found = solved(replace(wire, nodes=nodes), frequency, image)
    backwards = replace(found, current=np.roll(found.current[:, ::-1], 2, axis=1))
    assert_same(backwards, wanted, 1e-5)


def test_a_plane_far_away_is_not_there() -> None:
    """The image's field falls as the distance: 5000 m away it moves nothing by more than 1e-3, but for the slope.

    That one counts how the echo turns with frequency, and does not fall.
    """
    frequency = at_sizes(ring(), 0.3)
    high, free = solved(ring(5000.0), frequency, image=True), solved(ring(), frequency)
    assert_same(replace(high, slope=free.slope), free, 1e-3)


def test_image_is_the_other_half_of_a_symmetric_pair() -> None:
    """Image theory: a plane between a loop and its mirror image with opposed current along it changes nothing.

    Both loops as one matrix of twice the size, built here from the distances of their Gauss points (1/R included,
    far enough apart for it), against the matrix of the image.
    """
    wire = ring(1.5, 24, 1e-4)
    frequency = at_sizes(wire, 0.3)
    k = 2.0 * np.pi * float(frequency[0]) / c
    found = impedance_matrix(frequency, (thin_wire.potentials(wire, float(frequency[0]), image=True),))[0]
    below = replace(wire, nodes=wire.nodes * np.array([1.0, 1.0, -1.0]))
    count = len(wire.nodes)
    place, weight = np.polynomial.legendre.leggauss(5)
    place, weight = 0.5 + 0.5 * place, 0.5 * weight
    spots = [(w.nodes[:, None] + place[:, None] * (w.ends - w.nodes)[:, None]).reshape(-1, 3) for w in (wire, below)]
    apart = np.linalg.norm(spots[0][:, None] - spots[1], axis=2)
    green = np.exp(-1j * k * apart) / apart
    # Every rooftop at the Gauss points: its value as a vector, its derivative as a number, times the weights.
    shapes = []
    for w in (wire, below):
        vector = np.zeros((count, count, 5, 3))
        change = np.zeros((count, count, 5))
        for m in range(count):
            vector[m, m] = (weight * (1.0 - place) * w.length[m])[:, None] * w.direction[m]
            vector[(m + 1) % count, m] = (weight * place * w.length[m])[:, None] * w.direction[m]
            change[m, m], change[(m + 1) % count, m] = -weight, weight
        shapes.append((vector.reshape(count, -1, 3), change.reshape(count, -1)))
    flow = np.einsum("map,ab,nbp->mn", shapes[0][0], green, shapes[1][0], optimize=True)
    charge = shapes[0][1] @ green @ shapes[1][1].T
    # In the image the current runs along the mirrored chain, against it: both current and charge change sign.
    wanted = -1j * mu_0 * c / (4.0 * np.pi) * (k * flow - charge / k)
    assert np.abs(found - wanted).max() < 1e-6 * np.abs(wanted).max()
