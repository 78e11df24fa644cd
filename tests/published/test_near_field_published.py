"""Fields of given currents against closed forms printed in textbooks."""

from math import cos, pi, sin, sqrt

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.constants import epsilon_0, mu_0, speed_of_light
from scipy.integrate import quad
from scipy.special import ellipe, ellipk, jv

from magsafe.physics.near_field import SegmentCurrents, fields, magnitude, with_image

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

IMPEDANCE = mu_0 * speed_of_light  # of free space, ohm
WIRE = 1e-4  # m, conductor radius of the sources below; the field does not depend on it


def ring(count: int, radius: float, centre: tuple[float, float, float] = (0, 0, 0)) -> Array:
    """Corners of a regular polygon about z with the area of a circle, closed (count + 1, 3).

    Equal area makes the far field and, to second order in 1/count, the field at the centre
    that of the circle.
    """
    angle = np.arange(count + 1) * 2.0 * pi / count
    corner = radius * sqrt(2.0 * pi / (count * sin(2.0 * pi / count)))
    around = corner * np.column_stack([np.cos(angle), np.sin(angle), np.zeros(count + 1)])
    around[-1] = around[0]
    return np.asarray(around + np.array(centre))


def chain(corners: Array, current: ComplexArray | complex) -> SegmentCurrents:
    """Segments from corner to corner, with the current given at the corners or uniform."""
    at_corners = np.broadcast_to(np.asarray(current, dtype=np.complex128), (len(corners),))
    return SegmentCurrents(corners[:-1], corners[1:], at_corners[:-1], at_corners[1:], WIRE)


def upright(half: float, count: int) -> Array:
    return np.column_stack([np.zeros((count + 1, 2)), np.linspace(-half, half, count + 1)])


def spherical(points: Array, field: ComplexArray) -> tuple[ComplexArray, ...]:
    """Components along r, theta and phi."""
    radial = points / np.linalg.norm(points, axis=1)[:, None]
    azimuth = np.cross([0.0, 0.0, 1.0], points)
    azimuth /= np.linalg.norm(azimuth, axis=1)[:, None]
    polar = np.cross(azimuth, radial)
    return tuple((field * unit).sum(axis=1) for unit in (radial, polar, azimuth))


def sphere(distance: float) -> tuple[Array, Array]:
    """Points on a sphere and their areas: Gauss-Legendre in cos theta, even steps in phi."""
    up, weight = np.polynomial.legendre.leggauss(12)
    angle = np.arange(24) * 2.0 * pi / 24
    height, around = (grid.ravel() for grid in np.meshgrid(up, angle, indexing="ij"))
    flat = np.sqrt(1.0 - height**2)
    unit = np.column_stack([flat * np.cos(around), flat * np.sin(around), height])
    return distance * unit, np.repeat(weight, 24) * (2.0 * pi / 24) * distance**2


def radiated_power(currents: SegmentCurrents, frequency: float, distance: float) -> float:
    points, area = sphere(distance)
    electric, magnetic = fields(points, currents, frequency)
    outward = points / distance
    flux = (np.cross(electric, magnetic.conj()) * outward).sum(axis=1).real
    return float((flux * area).sum())


def directions(count: int) -> Array:
    """Unit vectors that avoid the z axis, where phi is not defined."""
    generator = np.random.default_rng(7)
    unit = generator.normal(size=(count, 3))
    return np.asarray(unit / np.linalg.norm(unit, axis=1)[:, None])


@pytest.mark.parametrize("height", [0.0, 0.1, 0.5, 1.0, 3.0])
def test_jackson_ring_on_axis(height: float) -> None:
    """H = I a^2 / 2 (a^2 + z^2)^1.5: Jackson, Classical Electrodynamics, 5.5 (memory).

    Static; at ka = 0.01 retardation adds (kR)^2 / 2 <= 5e-4 for R <= 3.2 a. The 120-gon of
    equal area adds less than 1e-5.
    """
    radius, frequency = 0.5, 0.01 * speed_of_light / (2 * pi * 0.5)
    _, magnetic = fields(np.array([[0.0, 0.0, height * radius]]), chain(ring(120, radius), 3.0), frequency)
    expected = 3.0 * radius**2 / (2 * (radius**2 + (height * radius) ** 2) ** 1.5)
    assert magnetic[0, 2].real == pytest.approx(expected, rel=1e-3)
    assert abs(magnetic[0, :2]).max() < 1e-12 * expected


@pytest.mark.parametrize("electrical_radius", [0.01, 0.3, 2.0])
def test_retarded_ring_on_axis(electrical_radius: float) -> None:
    """H = I a^2 (1 + jkR) exp(-jkR) / 2 R^3: every part of the ring is R away.

    Elementary integral of the retarded potential; holds for a uniform current at any ka.
    Tolerance: the polygon's corners and middles differ in R by a (pi/n)^2 / 2, n = 360,
    which at ka = 2 turns the phase by less than 1e-4.
    """
    radius = 0.5
    wavenumber = electrical_radius / radius
    height = np.array([0.2, 1.0, 5.0]) * radius
    points = np.column_stack([np.zeros((3, 2)), height])
    frequency = wavenumber * speed_of_light / (2 * pi)
    _, magnetic = fields(points, chain(ring(360, radius), 1.0), frequency)
    apart = np.sqrt(radius**2 + height**2)
    phase = wavenumber * apart
    expected = radius**2 * (1 + 1j * phase) * np.exp(-1j * phase) / (2 * apart**3)
    np.testing.assert_allclose(magnetic[:, 2], expected, rtol=1e-4)


@pytest.mark.parametrize(
    ("across", "height"),
    [(0.5, 0.0), (0.9, 0.0), (1.1, 0.0), (1.0, 0.1), (0.3, 0.4), (2.0, 1.0), (0.95, 0.05)],
)
def test_smythe_ring_off_axis(across: float, height: float) -> None:
    """Smythe, Static and Dynamic Electricity, 7.10, and Jackson 5.5 (memory): K and E integrals.

    Tolerance 0.1 %: retardation (kR)^2 / 2 < 4.5e-4 at ka = 0.01; the 720-gon lies within
    a (pi/n)^2 / 2 = 1e-5 a of the circle, 2e-4 of the least distance of 0.07 a.
    """
    radius, frequency = 0.5, 0.01 * speed_of_light / (2 * pi * 0.5)
    rho, z, angle = across * radius, height * radius, 0.4
    points = np.array([[rho * cos(angle), rho * sin(angle), z]])
    _, magnetic = fields(points, chain(ring(720, radius), 2.0), frequency)
    far_squared, near_squared = (radius + rho) ** 2 + z**2, (radius - rho) ** 2 + z**2
    modulus = 4 * radius * rho / far_squared
    first, second = ellipk(modulus), ellipe(modulus)
    scale = 2.0 / (2 * pi * sqrt(far_squared))
    axial = scale * (first + (radius**2 - rho**2 - z**2) / near_squared * second)
    radial = scale * z / rho * (-first + (radius**2 + rho**2 + z**2) / near_squared * second)
    expected = np.array([radial * cos(angle), radial * sin(angle), axial])
    assert np.linalg.norm(magnetic[0].real - expected) < 1e-3 * np.linalg.norm(expected)


def test_square_loop_centre() -> None:
    """H = 2 sqrt(2) I / (pi side): Biot-Savart on four sides, any textbook (memory).

    One segment per side: checks the static closed form. At 1 kHz kR is 1e-5, so 1e-9.
    """
    half = 0.5
    corners = np.array([[1, 1, 0], [-1, 1, 0], [-1, -1, 0], [1, -1, 0], [1, 1, 0]]) * half
    _, magnetic = fields(np.zeros((1, 3)), chain(corners, 1.0), 1e3)
    assert magnetic[0, 2].real == pytest.approx(2 * sqrt(2) / pi, rel=1e-9)


@pytest.mark.parametrize("kr", [0.2, 1.0, 3.0, 30.0])
def test_balanis_magnetic_dipole(kr: float) -> None:
    """H_r, H_theta, E_phi of the small loop: Balanis, Antenna Theory, 5.2 (memory).

    Loop of r/20 at most: the ring itself departs by at most (15/8) (a/r)^2 = 0.5 %, and by
    (ka)^2 / 2 in its own phase; 1 % of the total field.
    """
    distance, current = 2.0, 1.5 - 0.5j
    wavenumber = kr / distance
    radius = min(0.05 * distance, 0.05 / wavenumber)
    points = distance * directions(40)
    frequency = wavenumber * speed_of_light / (2 * pi)
    electric, magnetic = fields(points, chain(ring(36, radius), current), frequency)
    up = points[:, 2] / distance
    flat = np.sqrt(1 - up**2)
    wave = current * np.exp(-1j * kr)
    first, second = 1 + 1 / (1j * kr), 1 + 1 / (1j * kr) - 1 / kr**2
    radial = 1j * wavenumber * radius**2 * up / (2 * distance**2) * first * wave
    polar = -((wavenumber * radius) ** 2) * flat / (4 * distance) * second * wave
    azimuth = IMPEDANCE * (wavenumber * radius) ** 2 * flat / (4 * distance) * first * wave
    none = np.zeros(len(points))
    for found, expected in [
        (np.stack(spherical(points, magnetic)), np.stack([radial, polar, none])),
        (np.stack(spherical(points, electric)), np.stack([none, none, azimuth])),
    ]:
        error = np.linalg.norm(found - expected, axis=0)
        assert (error < 0.01 * np.linalg.norm(expected, axis=0)).all()


@pytest.mark.parametrize("kr", [0.1, 1.0, 3.0, 30.0])
def test_balanis_hertzian_dipole(kr: float) -> None:
    """E_r, E_theta, H_phi of the infinitesimal dipole: Balanis, Antenna Theory, 4.2 (memory).

    A short wire with triangular current I (1 - |z|/h) has the moment I h. Its size adds
    terms of (h/r)^2 and (kh)^2, h at most r/20 and 0.05/k: 1 % of the total field.
    """
    distance, current = 2.0, 0.7 + 0.2j
    wavenumber = kr / distance
    half = min(0.05 * distance, 0.05 / wavenumber)
    points = distance * directions(40)
    triangle = current * np.array([0.0, 1.0, 0.0])
    frequency = wavenumber * speed_of_light / (2 * pi)
    electric, magnetic = fields(points, chain(upright(half, 2), triangle), frequency)
    up = points[:, 2] / distance
    flat = np.sqrt(1 - up**2)
    wave = current * half * np.exp(-1j * kr)
    first, second = 1 + 1 / (1j * kr), 1 + 1 / (1j * kr) - 1 / kr**2
    radial = IMPEDANCE * up / (2 * pi * distance**2) * first * wave
    polar = 1j * IMPEDANCE * wavenumber * flat / (4 * pi * distance) * second * wave
    azimuth = 1j * wavenumber * flat / (4 * pi * distance) * first * wave
    none = np.zeros(len(points))
    for found, expected in [
        (np.stack(spherical(points, electric)), np.stack([radial, polar, none])),
        (np.stack(spherical(points, magnetic)), np.stack([none, none, azimuth])),
    ]:
        error = np.linalg.norm(found - expected, axis=0)
        assert (error < 0.01 * np.linalg.norm(expected, axis=0)).all()


@pytest.mark.parametrize("across", [0.001, 0.02, 0.3, 1.7])
def test_electrostatic_charged_rods(across: float) -> None:
    """Two uniformly charged rods, +q and -q per length: E of a finite line charge (memory).

    A triangular current leaves just these rods behind. At kR < 1e-4 the field is static to
    1e-8; the rods' potential q ln((s + R1 + R2) / (R1 + R2 - s)) / (4 pi epsilon0) is
    differentiated by hand: along q (1/R2 - 1/R1), across q (sin b - sin a) / rho.
    """
    half, frequency, current = 1.0, 1e3, 0.3
    charge = current / half / (2j * pi * frequency)  # on the upper half: I flows towards it
    points = np.array([[across, 0.0, z] for z in (-1.3, -0.4, 0.0, 0.2, 0.9, 2.5)])
    electric, _ = fields(points, chain(upright(half, 2), np.array([0.0, current, 0.0])), frequency)
    expected = np.zeros((len(points), 3), dtype=np.complex128)
    for low, high, line in [(-half, 0.0, -charge), (0.0, half, charge)]:
        below, above = points[:, 2] - low, points[:, 2] - high
        far, near = np.hypot(below, across), np.hypot(above, across)
        expected[:, 0] += line / (4 * pi * epsilon_0) * (below / far - above / near) / across
        expected[:, 2] += line / (4 * pi * epsilon_0) * (1 / near - 1 / far)
    error = np.linalg.norm(electric - expected, axis=1)
    assert (error < 1e-7 * np.linalg.norm(expected, axis=1)).all()


@pytest.mark.parametrize("half", [0.1, 0.25, 0.4], ids=lambda half: f"{2 * half} wavelengths")
def test_balanis_sinusoidal_dipole_near_field(half: float) -> None:
    """E_z, E_rho, H_phi of I sin k(h - |z|), exact at any distance (memory).

    Balanis, Antenna Theory, chapter on the induced EMF method; also Kraus and King.

    Tolerance 0.1 %: the chords of 240 segments miss the sine by (k step)^2 / 12 < 1e-4, at
    three segments' distance the steps of charge are no longer seen.
    """
    frequency, count, current = speed_of_light, 240, 1.2 + 0.3j  # wavelength 1 m
    wavenumber = 2 * pi
    corners = upright(half, count)
    taper = current * np.sin(wavenumber * (half - np.abs(corners[:, 2])))
    taper[[0, -1]] = 0.0
    grid = np.meshgrid([0.02, 0.05, 0.2, 1.0, 8.0], [-1.5, -0.33, 0.0, 0.07, 0.21, 0.6, 4.0])
    rho, z = (axis.ravel() for axis in grid)
    points = np.column_stack([rho, np.zeros_like(rho), z])
    electric, magnetic = fields(points, chain(corners, taper), frequency)
    top, bottom, middle = np.hypot(rho, z - half), np.hypot(rho, z + half), np.hypot(rho, z)
    ends, feed = (np.exp(-1j * wavenumber * np.stack([top, bottom])), 2 * cos(wavenumber * half))
    centre = feed * np.exp(-1j * wavenumber * middle)
    scale = 1j * current / (4 * pi)
    along = -IMPEDANCE * scale * (ends[0] / top + ends[1] / bottom - centre / middle)
    across = (z - half) * ends[0] / top + (z + half) * ends[1] / bottom - z * centre / middle
    across = IMPEDANCE * scale / rho * across
    around = scale / rho * (ends[0] + ends[1] - centre)
    none = np.zeros_like(rho)
    for found, expected in [
        (electric, np.column_stack([across, none, along])),
        (magnetic, np.column_stack([none, around, none])),
    ]:
        error = np.linalg.norm(found - expected, axis=1)
        assert (error < 1e-3 * np.linalg.norm(expected, axis=1)).all()


def test_half_wave_dipole_radiation_resistance() -> None:
    """73.1 ohm for a sinusoidal current: Balanis, Antenna Theory, 4.6 (memory).

    Printed to 73 or 73.13 ohm; 60 segments and a 12 x 24 sphere leave less than 0.1 ohm.
    """
    corners = upright(0.25, 60)
    taper = np.cos(2 * pi * corners[:, 2])
    power = radiated_power(chain(corners, taper.astype(np.complex128)), speed_of_light, 5.0)
    assert power == pytest.approx(73.13, abs=0.1)


def test_kraus_small_loop_radiation_resistance() -> None:
    """eta (8 pi^3 / 3) (A / wavelength^2)^2: Kraus, Antennas; Balanis 5.2 (memory).

    At ka = 0.02 the next order is (ka)^2 / 5 = 8e-5; the polygon has the circle's area.
    """
    radius = 0.5
    frequency = 0.02 / radius * speed_of_light / (2 * pi)
    power = radiated_power(chain(ring(48, radius), 2.0), frequency, 500.0)
    share = pi * radius**2 / (speed_of_light / frequency) ** 2
    assert power / 2.0**2 == pytest.approx(IMPEDANCE * 8 * pi**3 / 3 * share**2, rel=1e-3)


@pytest.mark.parametrize("electrical_radius", [0.3, 1.0, 2.0])
def test_foster_uniform_loop_radiation_resistance(electrical_radius: float) -> None:
    """eta (pi / 2) ka int_0^2ka J2(x) dx for a uniform current: Foster 1944 (memory).

    A uniform current of any size has no charge. 0.2 %: the 180-gon of equal area.
    """
    frequency = electrical_radius / 0.5 * speed_of_light / (2 * pi)
    power = radiated_power(chain(ring(180, 0.5), 1.0), frequency, 40.0)
    series = quad(lambda x: jv(2, x), 0.0, 2 * electrical_radius)[0]
    expected = IMPEDANCE * pi / 2 * electrical_radius * series
    assert power == pytest.approx(expected, rel=2e-3)


@pytest.mark.parametrize(("other", "distance"), [(0.2, 0.0), (0.5, 0.1), (0.8, 1.0)])
def test_maxwell_mutual_inductance(other: float, distance: float) -> None:
    """Voltage -j omega M I around a coaxial circle: Maxwell's formula with K and E (memory).

    0.1 %: ka = 0.005 (retardation changes M by (kR)^2 / 2) and a 720-gon.
    """
    radius, frequency = 0.5, 0.005 / 0.5 * speed_of_light / (2 * pi)
    angle = np.arange(7) * 2 * pi / 7 + 0.1
    circle = np.column_stack([np.cos(angle), np.sin(angle), np.zeros(7)])
    points = other * circle + np.array([0.0, 0.0, distance])
    electric, _ = fields(points, chain(ring(720, radius), 1.0), frequency)
    tangent = np.cross([0.0, 0.0, 1.0], circle)
    voltage = (electric * tangent).sum(axis=1).mean() * 2 * pi * other
    modulus = 4 * radius * other / ((radius + other) ** 2 + distance**2)
    root = sqrt(modulus)
    mutual = mu_0 * sqrt(radius * other)
    mutual *= (2 / root - root) * ellipk(modulus) - 2 / root * ellipe(modulus)
    assert -voltage.imag / (2 * pi * frequency) == pytest.approx(mutual, rel=1e-3)


def test_image_doubles_the_upright_loop() -> None:
    """A horizontal magnetic dipole on a conducting plane and its image add: Balanis 4.7 (memory).

    Along the plane, at 200 times the height, the two paths are equal and the field doubles;
    path difference 2 h^2 / r and the amplitudes differ by (h/r)^2 = 2.5e-5.
    """
    corners = ring(48, 0.2)[:, [2, 0, 1]] + np.array([0.0, 0.0, 1.0])  # axis along x
    loop = chain(corners, 1.0)
    points = 200.0 * np.array([[0.8, 0.6, 0.0], [0.0, 1.0, 0.0], [0.6, 0.8, 0.0]])
    for alone, doubled in zip(fields(points, loop, 7e6), fields(points, with_image(loop), 7e6), strict=True):
        np.testing.assert_allclose(magnitude(doubled) / magnitude(2 * alone), 1.0, rtol=0.01)


def test_image_cancels_the_lying_loop() -> None:
    """A lying loop's image is opposed: pattern 2 sin(kh cos theta), Balanis 4.7 (memory).

    For the vertical magnetic dipole over a plane the pair's far field is the single field times
    2j sin(kh cos theta) about the plane's origin; 0.5 % at 300 times the height.
    """
    height, frequency = 1.5, 14e6
    loop = chain(ring(48, 0.2, (0.0, 0.0, height)), 1.0)
    centred = chain(ring(48, 0.2), 1.0)
    slope = np.array([0.4, 0.9, 1.3])
    points = 450.0 * np.column_stack([np.sin(slope), np.zeros(3), np.cos(slope)])
    _, pair = fields(points, with_image(loop), frequency)
    _, single = fields(points, centred, frequency)
    factor = 2 * np.sin(2 * pi * frequency / speed_of_light * height * np.cos(slope))
    np.testing.assert_allclose(magnitude(pair), factor * magnitude(single), rtol=5e-3)
