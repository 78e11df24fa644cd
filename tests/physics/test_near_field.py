"""Near field: quadrature, Maxwell's equations, image, symmetries, reciprocity, power, errors."""

from collections.abc import Callable
from dataclasses import replace
from math import pi

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy.constants import epsilon_0, mu_0, speed_of_light
from scipy.integrate import quad
from scipy.spatial.transform import Rotation

from magsafe.physics import near_field
from magsafe.physics.near_field import (
    SegmentCurrents,
    distance_to_axis,
    fields,
    magnitude,
    unclosed_current,
    with_image,
)

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

IMPEDANCE = mu_0 * speed_of_light
FREQUENCY = 14.2e6
WAVENUMBER = 2 * pi * FREQUENCY / speed_of_light
RADIUS = 0.5  # m, of the ring; its perimeter is 0.15 wavelength
WIRE = 0.005  # m


def ring(count: int = 48, radius: float = RADIUS) -> Array:
    """Corners of a regular polygon about z, closed (count + 1, 3)."""
    angle = np.arange(count + 1) * 2.0 * pi / count
    corners = radius * np.column_stack([np.cos(angle), np.sin(angle), np.zeros(count + 1)])
    corners[-1] = corners[0]
    return corners


def chain(corners: Array, current: ComplexArray, wire: float = WIRE) -> SegmentCurrents:
    return SegmentCurrents(corners[:-1], corners[1:], current[:-1], current[1:], wire)


def tapered(count: int = 48) -> SegmentCurrents:
    """A ring whose current falls as a cosine towards its port at angle zero, with charge."""
    along = RADIUS * (np.arange(count + 1) * 2.0 * pi / count - pi)
    return chain(ring(count), (2.0 + 1.0j) * np.cos(3.0 * WAVENUMBER * along))


def lifted(currents: SegmentCurrents, height: float) -> SegmentCurrents:
    up = np.array([0.0, 0.0, height])
    return replace(currents, start=currents.start + up, end=currents.end + up)


def single(current_start: complex, current_end: complex, length: float = 1.0) -> SegmentCurrents:
    return SegmentCurrents(
        np.zeros((1, 3)),
        np.array([[0.0, 0.0, length]]),
        np.array([complex(current_start)]),
        np.array([complex(current_end)]),
        1e-3,
    )


def halved(currents: SegmentCurrents) -> SegmentCurrents:
    """Every segment cut in two, current interpolated: the same source."""
    middle = 0.5 * (currents.start + currents.end)
    current = 0.5 * (currents.current_start + currents.current_end)
    return SegmentCurrents(
        np.concatenate([currents.start, middle]),
        np.concatenate([middle, currents.end]),
        np.concatenate([currents.current_start, current]),
        np.concatenate([current, currents.current_end]),
        currents.radius,
    )


def assert_same_field(found: ComplexArray, expected: ComplexArray, share: float) -> None:
    error = np.linalg.norm(found - expected, axis=1)
    assert (error <= share * np.linalg.norm(expected, axis=1)).all(), error.max()


def around(distance: float, count: int = 30) -> Array:
    """Points about the origin, at random angles."""
    unit = np.random.default_rng(3).normal(size=(count, 3))
    return np.asarray(distance * unit / np.linalg.norm(unit, axis=1)[:, None])


# --- the integrals themselves -----------------------------------------------------------------


def brute_force(point: Array, currents: SegmentCurrents, frequency: float) -> tuple[ComplexArray, ComplexArray]:
    """The field of one segment along z by adaptive quadrature of the potentials' integrands."""
    omega = 2 * pi * frequency
    wavenumber = omega / speed_of_light
    length = currents.length[0]
    first, last = currents.current_start[0], currents.current_end[0]
    slope = (last - first) / length

    foot = float(np.clip(point[2], 0.0, length))
    nearest = float(np.hypot(np.hypot(point[0], point[1]), point[2] - foot))
    size = length / (nearest * (nearest + length))  # of the integral of 1 / r^2

    def integral(integrand: Callable[[float, float], complex], scale: float) -> complex:
        def at(s: float) -> complex:
            return integrand(s, float(np.hypot(np.hypot(point[0], point[1]), point[2] - s)))

        found = quad(
            at,
            0.0,
            length,
            points=[foot],
            complex_func=True,
            epsabs=1e-9 * scale,
            epsrel=1e-8,
            limit=2000,
        )
        return complex(found[0])

    def g(r: float) -> complex:
        return complex(np.exp(-1j * wavenumber * r) / r)

    def h(r: float) -> complex:
        return complex((1 + 1j * wavenumber * r) * np.exp(-1j * wavenumber * r) / r**3)

    potential = integral(lambda s, r: (first + slope * s) * g(r), size * nearest)
    curl = integral(lambda s, r: (first + slope * s) * h(r), size / nearest)
    push = integral(lambda _, r: h(r), size / nearest)
    lift = integral(lambda s, r: (point[2] - s) * h(r), size)
    along = np.array([0.0, 0.0, 1.0])
    aside = np.array([point[0], point[1], 0.0])
    electric = -1j * omega * mu_0 * potential * along
    electric = electric + 1j * slope / (omega * epsilon_0) * (push * aside + lift * along)
    return electric / (4 * pi), curl * np.cross(along, aside) / (4 * pi)


@pytest.mark.parametrize("electrical_length", [0.01, 0.1, 0.249])
@pytest.mark.parametrize("surface_distance", [0.0, 0.001, 0.01, 0.1, 0.5, 1.0, 2.9, 3.1, 10.0])
def test_quadrature_from_the_surface_outwards(surface_distance: float, electrical_length: float) -> None:
    """Against scipy.integrate.quad; 1e-4 is what the module promises, from the surface on.

    Beside the middle, beside an end, beyond an end in prolongation and askew; the distances
    of 2.9 and 3.1 lie on both sides of the change from closed form to plain quadrature.
    """
    out = 1e-3 + surface_distance
    frequency = electrical_length * speed_of_light
    points = np.array(
        [
            [out, 0, 0.5],
            [0, -out, 0.13],
            [out, 0, 1.0],
            [0, 0, 1.0 + out],
            [0.6 * out, 0, -0.8 * out],
        ]
    )
    currents = single(1.0, 0.3 - 0.8j)
    electric, magnetic = fields(points, currents, frequency)
    for point, found_electric, found_magnetic in zip(points, electric, magnetic, strict=True):
        expected_electric, expected_magnetic = brute_force(point, currents, frequency)
        difference = np.linalg.norm(found_electric - expected_electric)
        assert difference <= 1e-4 * np.linalg.norm(expected_electric)
        difference = np.linalg.norm(found_magnetic - expected_magnetic)
        assert difference <= 1e-4 * np.linalg.norm(expected_magnetic)


@pytest.mark.parametrize("distance", [0.03, 0.1, 0.3, 1.0, 4.0, 100.0])
def test_cutting_segments_changes_nothing(distance: float) -> None:
    """A segment cut in two is the same source, but a pair changes from close to apart.

    Twice 1e-6 per pair for segments of 1/300 wavelength, and the sum of 48 of them is at
    least a tenth of the parts (E inside the ring): 1e-5.
    """
    points = around(distance) + np.array([RADIUS if distance < 1.0 else 0.0, 0.0, 0.0])
    points = points[distance_to_axis(points, tapered()) > 2 * WIRE]
    assert len(points) > 10
    for cut, whole in zip(
        fields(points, halved(tapered()), FREQUENCY),
        fields(points, tapered(), FREQUENCY),
        strict=True,
    ):
        assert_same_field(cut, whole, 1e-5)


def test_points_do_not_mind_their_company(monkeypatch: pytest.MonkeyPatch) -> None:
    """One by one, all together and in chunks: the same, but for the order of summation."""
    points = around(0.55, 25)
    together = fields(points, tapered(), FREQUENCY)
    for index in range(0, 25, 6):
        alone = fields(points[index : index + 1], tapered(), FREQUENCY)
        for one, all_of_them in zip(alone, together, strict=True):
            assert_same_field(one, all_of_them[index : index + 1], 1e-11)
    monkeypatch.setattr(near_field, "CHUNK", 1000)
    for chunked, whole in zip(fields(points, tapered(), FREQUENCY), together, strict=True):
        assert_same_field(chunked, whole, 1e-11)


def test_no_points_no_field() -> None:
    electric, magnetic = fields(np.empty((0, 3)), tapered(), FREQUENCY)
    assert electric.shape == magnetic.shape == (0, 3)


# --- Maxwell's equations ----------------------------------------------------------------------


def gradients(points: Array, currents: SegmentCurrents, step: float) -> list[ComplexArray]:
    """d F_i / d x_j for E and H, shape (point, i, j), by five-point differences."""
    jacobians = [np.zeros((len(points), 3, 3), dtype=np.complex128) for _ in range(2)]
    for axis in range(3):
        for shift, weight in [(-2, 1 / 12), (-1, -8 / 12), (1, 8 / 12), (2, -1 / 12)]:
            moved = points + shift * step * np.eye(3)[axis]
            for jacobian, field in zip(jacobians, fields(moved, currents, FREQUENCY), strict=True):
                jacobian[:, :, axis] += weight / step * field
    return jacobians


def curl(jacobian: ComplexArray) -> ComplexArray:
    return np.stack(
        [
            jacobian[:, 2, 1] - jacobian[:, 1, 2],
            jacobian[:, 0, 2] - jacobian[:, 2, 0],
            jacobian[:, 1, 0] - jacobian[:, 0, 1],
        ],
        axis=1,
    )


@pytest.mark.parametrize("distance", [0.04, 0.2, 1.0, 10.0, 100.0])
def test_maxwell_equations(distance: float) -> None:
    """div E = div H = 0, curl E = -j omega mu0 H, curl H = j omega epsilon0 E.

    Five-point differences with a step of 2 % of the distance (or 0.1 rad): truncation
    h^4 F'''''/ 30 is about 1e-5 of the gradient, a pair changing method 1e-7 / 0.02. So
    the residual is held to 3e-5 of the gradient; each right side must stand well above
    that, else the test would prove nothing.
    """
    currents = tapered()
    points = around(distance, 40)
    if distance < RADIUS:  # near the conductor, opposite the port and beside it
        points = points + np.array([[-RADIUS, 0.0, 0.0], [0.0, RADIUS, 0.0]])[np.arange(40) % 2]
    points = points[distance_to_axis(points, currents) > 0.6 * distance]
    assert len(points) > 10
    scale = min(distance, 0.5 * RADIUS if distance > RADIUS else distance)
    step = 0.02 * (scale if distance < 2.0 else min(distance, 1 / WAVENUMBER))
    electric, magnetic = fields(points, currents, FREQUENCY)
    of_electric, of_magnetic = gradients(points, currents, step)
    allowed_electric = 3e-5 * np.linalg.norm(of_electric, axis=(1, 2))
    allowed_magnetic = 3e-5 * np.linalg.norm(of_magnetic, axis=(1, 2))
    omega = 2 * pi * FREQUENCY
    assert (abs(np.trace(of_electric, axis1=1, axis2=2)) < allowed_electric).all()
    assert (abs(np.trace(of_magnetic, axis1=1, axis2=2)) < allowed_magnetic).all()
    faraday, ampere = -1j * omega * mu_0 * magnetic, 1j * omega * epsilon_0 * electric
    assert (np.linalg.norm(curl(of_electric) - faraday, axis=1) < allowed_electric).all()
    assert (np.linalg.norm(curl(of_magnetic) - ampere, axis=1) < allowed_magnetic).all()
    assert np.median(magnitude(faraday) / allowed_electric) > 10
    assert np.median(magnitude(ampere) / allowed_magnetic) > 10


# --- the image --------------------------------------------------------------------------------


def test_image_plane_is_a_conductor() -> None:
    """On z = 0 tangential E and normal H vanish: definition of the plane. Rounding only."""
    loop = lifted(tapered(), 0.7)
    tilt = Rotation.from_euler("y", 50, degrees=True)
    tilted = replace(loop, start=tilt.apply(loop.start), end=tilt.apply(loop.end))
    tilted = lifted(tilted, 0.2)
    points = around(1.0, 200) * np.array([1.0, 1.0, 0.0]) * np.linspace(0.1, 50, 200)[:, None]
    electric, magnetic = fields(points, with_image(tilted), FREQUENCY)
    assert (abs(electric[:, :2]).max(axis=1) < 1e-9 * magnitude(electric)).all()
    assert (abs(magnetic[:, 2]) < 1e-9 * magnitude(magnetic)).all()


def test_image_mirrors_the_field() -> None:
    """E(x, y, -z) = (-Ex, -Ey, Ez), H(x, y, -z) = (Hx, Hy, -Hz): an exact symmetry."""
    both = with_image(lifted(tapered(), 1.0))
    points = around(3.0)
    electric, magnetic = fields(points, both, FREQUENCY)
    below = fields(points * np.array([1, 1, -1]), both, FREQUENCY)
    assert_same_field(below[0], electric * np.array([-1, -1, 1]), 1e-10)
    assert_same_field(below[1], magnetic * np.array([1, 1, -1]), 1e-10)


def test_image_of_a_grounded_wire_continues_it() -> None:
    """A wire standing on the plane is half of the wire twice as long: its current goes on."""
    height = np.linspace(0.0, 2.0, 9)
    mast = np.column_stack([np.zeros((9, 2)), height])
    quarter = chain(mast, np.cos(pi * height / 4).astype(np.complex128))
    whole_height = np.linspace(-2.0, 2.0, 17)
    whole = np.column_stack([np.zeros((17, 2)), whole_height])
    dipole = chain(whole, np.cos(pi * whole_height / 4).astype(np.complex128))
    points = around(1.5)
    assert unclosed_current(with_image(quarter)) < 1e-12
    for found, expected in zip(
        fields(points, with_image(quarter), FREQUENCY),
        fields(points, dipole, FREQUENCY),
        strict=True,
    ):
        assert_same_field(found, expected, 1e-10)


def test_image_keeps_what_is_above() -> None:
    loop = lifted(tapered(), 1.0)
    both = with_image(loop)
    assert len(both.start) == 2 * len(loop.start)
    np.testing.assert_array_equal(both.start[:48], loop.start)
    np.testing.assert_array_equal(both.current_end[:48], loop.current_end)
    assert both.radius == loop.radius


# --- symmetries -------------------------------------------------------------------------------

numbers = st.floats(-1.0, 1.0)
places = st.tuples(numbers, numbers, numbers).map(np.array)
common = settings(max_examples=25, deadline=None)


@common
@given(numbers, numbers)
def test_linear_in_the_current(real: float, imaginary: float) -> None:
    """The field of a x + y is a times that of x and that of y; rounding only."""
    factor = complex(real, imaginary)
    points = around(0.6, 10)
    taper, uniform = tapered(), chain(ring(), np.full(49, 1j))
    combined = replace(
        taper,
        current_start=factor * taper.current_start + uniform.current_start,
        current_end=factor * taper.current_end + uniform.current_end,
    )
    for found, one, other in zip(
        fields(points, combined, FREQUENCY),
        fields(points, taper, FREQUENCY),
        fields(points, uniform, FREQUENCY),
        strict=True,
    ):
        np.testing.assert_allclose(found, factor * one + other, rtol=0, atol=1e-11 * (abs(one) + abs(other)).max())


@common
@given(places, places)
def test_moves_with_its_source(turn: Array, shift: Array) -> None:
    """Turned and moved by up to 10 m: the same field, turned. 1e-10: digits of a sum of squares,
    and 1e-7 where rounding sends a pair to the other method."""
    rotation, shift = Rotation.from_rotvec(3 * turn), 10 * shift
    loop, points = tapered(), around(0.62, 12)
    moved = replace(loop, start=rotation.apply(loop.start) + shift, end=rotation.apply(loop.end) + shift)
    for found, expected in zip(
        fields(rotation.apply(points) + shift, moved, FREQUENCY),
        fields(points, loop, FREQUENCY),
        strict=True,
    ):
        turned = rotation.apply(expected.real) + 1j * rotation.apply(expected.imag)
        assert_same_field(found, turned, 1e-7)


@common
@given(st.floats(1e-3, 1e3))
def test_scales_with_the_wavelength(scale: float) -> None:
    """Lengths times s, frequency over s, same current: E and H over s, exactly."""
    loop, points = tapered(), around(0.62, 12)
    larger = SegmentCurrents(
        scale * loop.start,
        scale * loop.end,
        loop.current_start,
        loop.current_end,
        scale * loop.radius,
    )
    for found, expected in zip(
        fields(scale * points, larger, FREQUENCY / scale),
        fields(points, loop, FREQUENCY),
        strict=True,
    ):
        assert_same_field(found, expected / scale, 1e-7)


def test_reversing_a_segment_changes_nothing() -> None:
    """Start and end exchanged and both currents turned round: the same source."""
    loop, points = tapered(), around(0.62)
    turned = SegmentCurrents(loop.end, loop.start, -loop.current_end, -loop.current_start, WIRE)
    for found, expected in zip(fields(points, turned, FREQUENCY), fields(points, loop, FREQUENCY), strict=True):
        assert_same_field(found, expected, 1e-10)


# --- reciprocity and power --------------------------------------------------------------------


def reaction(source: SegmentCurrents, receiver: SegmentCurrents, frequency: float) -> complex:
    """Integral of E of the source along the receiver, weighted by the receiver's current."""
    node, weight = np.polynomial.legendre.leggauss(6)
    fraction = 0.5 + 0.5 * node
    chord = receiver.end - receiver.start
    points = receiver.start[:, None] + fraction[:, None] * chord[:, None]
    change = receiver.current_end - receiver.current_start
    current = receiver.current_start[:, None] + fraction * change[:, None]
    electric, _ = fields(points.reshape(-1, 3), source, frequency)
    along = np.einsum("sni,si->sn", electric.reshape(points.shape), chord)
    return complex((0.5 * weight * current * along).sum())


@pytest.mark.parametrize("frequency", [1.8e6, FREQUENCY, 50e6])
def test_two_loops_are_reciprocal(frequency: float) -> None:
    """Integral of E1 . J2 equals that of E2 . J1 (Lorentz, Carson), tapered and uniform.

    Both are the same double integral, once with 4 and once with 6 nodes: 1e-6.
    """
    turn = Rotation.from_euler("xz", [70, 25], degrees=True)
    small = ring(20, 0.15)
    taper = np.cos(np.linspace(-0.8, 0.8, 21)) * (1 - 0.4j)
    other = chain(turn.apply(small) + np.array([0.3, 0.2, 0.4]), taper)
    there, back = (
        reaction(tapered(), other, frequency),
        reaction(other, tapered(), frequency),
    )
    assert there == pytest.approx(back, rel=1e-6)
    assert abs(there) > 1e-3


def flux(currents: SegmentCurrents, distance: float) -> float:
    """Power through a sphere: Gauss-Legendre in cos theta, even steps in phi."""
    up, weight = np.polynomial.legendre.leggauss(40)
    angle = np.arange(80) * 2 * pi / 80
    height, azimuth = (grid.ravel() for grid in np.meshgrid(up, angle, indexing="ij"))
    flat = np.sqrt(1 - height**2)
    unit = np.column_stack([flat * np.cos(azimuth), flat * np.sin(azimuth), height])
    electric, magnetic = fields(distance * unit, currents, FREQUENCY)
    outward = (np.cross(electric, magnetic.conj()) * unit).sum(axis=1).real
    return float((outward * np.repeat(weight, 80)).sum() * 2 * pi / 80 * distance**2)


def test_power_goes_through_every_sphere() -> None:
    """No power is lost in free space, and all of it comes from the work of the current.

    The work -Re of the integral of E I* dl is taken on the rim of a wire one millimetre
    thick beside the axis: (k a)^2 < 1e-7 for the wire, 1e-4 for the sphere close to the ring,
    where the active flux is a small part of the reactive one.
    """
    loop = replace(tapered(96), radius=1e-3)
    far = flux(loop, 1000.0)
    assert flux(loop, 2.0) == pytest.approx(far, rel=1e-6)
    assert flux(loop, 0.8) == pytest.approx(far, rel=1e-4)
    up = np.array([0.0, 0.0, 1e-3])
    conjugate = SegmentCurrents(
        loop.start + up, loop.end + up, loop.current_start.conj(), loop.current_end.conj(), 1e-3
    )
    assert -reaction(loop, conjugate, FREQUENCY).real == pytest.approx(far, rel=1e-4)


# --- the small functions and the words --------------------------------------------------------


def test_magnitude_counts_every_component() -> None:
    """By hand: |3| and |4j| in quadrature make 5, whatever their phase."""
    field = np.array([[3.0, 4.0j, 0.0], [1.0 + 1.0j, 0.0, 1.0 - 1.0j], [0.0, 0.0, 0.0]])
    np.testing.assert_allclose(magnitude(field), [5.0, 2.0, 0.0])


def test_distance_to_axis_by_hand() -> None:
    """Beside, beyond an end, on the axis, and nearest to the second of two segments."""
    corners = np.array([[0.0, 0.0, 0.0], [0.0, 0.0, 1.0], [1.0, 0.0, 1.0]])
    bent = chain(corners, np.ones(3, dtype=np.complex128))
    points = np.array([[-0.3, 0, 0.5], [3, 4, 1], [0, 0, -2], [0, 0, 0.25], [0.5, 0.1, 1]])
    expected = [0.3, np.hypot(2, 4), 2.0, 0.0, 0.1]
    np.testing.assert_allclose(distance_to_axis(points, bent), expected, atol=1e-15)


@common
@given(places)
def test_distance_to_axis_against_samples(point: Array) -> None:
    """Never above the distance to 2000 samples of the chain, less than a spacing below it."""
    loop = tapered(12)
    share = np.linspace(0, 1, 2001)[:, None, None]
    samples = (loop.start + share * (loop.end - loop.start)).reshape(-1, 3)
    sampled = float(np.linalg.norm(samples - point, axis=1).min())
    found = float(distance_to_axis(point[None], loop)[0])
    assert sampled - loop.length.max() / 2000 <= found <= sampled + 1e-12


def test_unclosed_current() -> None:
    """Kirchhoff: a closed ring has none, an open one what flows at the opening."""
    assert unclosed_current(tapered()) < 1e-12
    loop = tapered()
    opened = SegmentCurrents(loop.start[1:], loop.end[1:], loop.current_start[1:], loop.current_end[1:], WIRE)
    assert unclosed_current(opened) == pytest.approx(abs(loop.current_start[1]))
    uneven = replace(loop, current_end=loop.current_end + np.eye(48)[5] * 0.25)
    assert unclosed_current(uneven) == pytest.approx(0.25)


def test_point_inside_the_conductor_is_refused() -> None:
    """The count is of points, though two segments meet at the corner."""
    corner = ring()[1]
    points = np.stack([corner, corner * 1.002, np.zeros(3)])
    with pytest.raises(ValueError) as refused:
        fields(points, tapered(), FREQUENCY)
    assert str(refused.value) == (
        "2 of 3 points lie inside the conductor, nearer to its axis than its radius of 0.005 m"
    )


def test_point_on_the_surface_is_accepted() -> None:
    """Computed to lie on the surface, it may fall short by rounding; field I / 2 pi a there.

    Source: Ampere's law. At 1 kHz, 1 m from either end: (a / L)^2 / 2 < 1e-4 too low.
    """
    wire = single(1.0, 1.0, 2.0)
    angle = np.linspace(0, 2 * pi, 50)
    points = np.column_stack([1e-3 * np.cos(angle), 1e-3 * np.sin(angle), np.ones(50)])
    _, magnetic = fields(points, wire, 1e3)
    np.testing.assert_allclose(magnitude(magnetic), 1 / (2 * pi * 1e-3), rtol=1e-4)


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"end": np.zeros((2, 3))}, "end has shape (2, 3), expected (1, 3)"),
        (
            {"current_end": np.array([1j, 1j])},
            "current_end has shape (2,), expected (1,)",
        ),
        ({"start": np.full((1, 3), np.nan)}, "start holds a value that is not finite"),
        ({"end": np.zeros((1, 3))}, "1 of 1 segments have no length"),
        ({"radius": 0.0}, "radius is 0.0 m, expected a positive length"),
        ({"radius": float("inf")}, "radius is inf m, expected a positive length"),
    ],
)
def test_impossible_segments_are_refused(change: dict[str, object], message: str) -> None:
    with pytest.raises(ValueError) as refused:
        replace(single(1.0, 1.0), **change)  # type: ignore[arg-type]
    assert str(refused.value) == message


def test_no_segment_is_refused() -> None:
    none = np.empty((0, 3))
    with pytest.raises(ValueError) as refused:
        SegmentCurrents(none, none, np.empty(0, complex), np.empty(0, complex), 0.01)
    assert str(refused.value) == "no segment given, expected at least one"


@pytest.mark.parametrize("frequency", [0.0, -1.0, float("nan"), float("inf")])
def test_impossible_frequency_is_refused(frequency: float) -> None:
    with pytest.raises(ValueError) as refused:
        fields(np.ones((1, 3)), tapered(), frequency)
    assert str(refused.value) == f"frequency is {frequency} Hz, expected more than zero"


def test_long_segment_is_refused() -> None:
    fields(np.ones((1, 3)), single(1.0, 0.0), 0.2499 * speed_of_light)
    with pytest.raises(ValueError) as refused:
        fields(np.ones((1, 3)), single(1.0, 0.0), 0.3 * speed_of_light)
    assert str(refused.value) == ("the longest segment is 0.3 wavelengths, expected at most 0.25")


@pytest.mark.parametrize(
    ("points", "message"),
    [
        (np.zeros(3), "points have shape (3,), expected (point, 3)"),
        (np.zeros((4, 2)), "points have shape (4, 2), expected (point, 3)"),
        (np.array([[0.0, np.inf, 0.0]]), "points hold a value that is not finite"),
    ],
)
def test_impossible_points_are_refused(points: Array, message: str) -> None:
    for ask in (
        lambda: fields(points, tapered(), FREQUENCY),
        lambda: distance_to_axis(points, tapered()),
    ):
        with pytest.raises(ValueError) as refused:
            ask()
        assert str(refused.value) == message


def test_segments_below_or_in_the_plane_are_refused() -> None:
    with pytest.raises(ValueError) as refused:
        with_image(lifted(single(1.0, 0.0), -0.5))
    assert str(refused.value) == "1 of 1 segments reach below the plane z = 0"
    with pytest.raises(ValueError) as refused:
        with_image(tapered())
    assert str(refused.value) == "48 of 48 segments lie in the plane z = 0"
