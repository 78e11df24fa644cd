"""The ring over soil: its dipole, its image, its far field, its own loss; and the loss by another way altogether."""

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.constants import c, mu_0
from scipy.integrate import quad
from scipy.special import iv, jv

from magsafe.physics import half_space, half_space_ring, small_loop
from magsafe.physics.far_field import FarField
from magsafe.physics.ground_pattern import GroundPattern
from magsafe.physics.near_field import SegmentCurrents, fields, with_image

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

FREQUENCY = 7.1e6
WAVELENGTH = c / FREQUENCY
SEA, WET, PASTURE, SAND = (80.0, 5.0), (20.0, 0.03), (13.0, 5e-3), (5.0, 1e-3)


def soil(constants: tuple[float, float]) -> complex:
    return complex(half_space.relative_permittivity(*constants, FREQUENCY))


def uniform(size: float, height: float, vertical: bool, count: int = 256) -> SegmentCurrents:
    """A polygon of the circle's area, wavenumber times radius and times twice the centre's height given; 1 A."""
    step = 2.0 * np.pi / count
    angle = step * np.arange(count + 1)
    radius = size * WAVELENGTH / (2.0 * np.pi) * np.sqrt(step / np.sin(step))
    first, second, rest = radius * np.cos(angle), radius * np.sin(angle), np.zeros(count + 1)
    first[-1], second[-1] = first[0], second[0]
    up = height * WAVELENGTH / (4.0 * np.pi)
    corners = np.column_stack([rest, first, second + up] if vertical else [first, second, rest + up])
    flow = np.ones(count, dtype=np.complex128)
    return SegmentCurrents(corners[:-1], corners[1:], flow, flow, 1e-4)


@pytest.mark.parametrize("size", [0.01, 0.1, 0.3, 1.0])
def test_in_free_space_it_is_fosters_ring(size: float) -> None:
    """3/(ka)^3 times the integral of J2 from 0 to 2ka: Foster (1944); Balanis, section 5.3 (memory)."""
    wanted = 3.0 / size**3 * quad(lambda x: jv(2, x), 0.0, 2.0 * size, epsabs=0.0, epsrel=1e-11)[0]
    assert float(half_space_ring.ring_free_ratio(size)) == pytest.approx(wanted, rel=1e-9)


@pytest.mark.parametrize("vertical", [True, False], ids=["upright", "flat"])
def test_a_tiny_ring_is_its_dipole(vertical: bool) -> None:
    media, heights = np.array([soil(s) for s in (SEA, WET, PASTURE, SAND)])[:, None], np.array([0.4, 3.0])
    for ring, dipole in (
        (half_space_ring.ring_resistance_ratio, half_space.resistance_ratio),
        (half_space_ring.ring_sky_ratio, half_space.sky_ratio),
    ):
        found, wanted = ring(vertical, media, heights, 1e-4), dipole(vertical, media, heights)
        assert found == pytest.approx(wanted, rel=1e-6)


@pytest.mark.parametrize("vertical", [True, False], ids=["upright", "flat"])
@pytest.mark.parametrize(("size", "height"), [(0.1, 0.25), (0.25, 0.6), (0.4, 3.0)])
def test_over_a_perfect_plane_it_radiates_as_with_its_image(vertical: bool, size: float, height: float) -> None:
    """The far field of the ring and its image, integrated over the sky: no spectrum in it."""
    currents = uniform(size, height, vertical)
    free, over = (FarField.of(currents, FREQUENCY, over_plane=plane).power for plane in (False, True))
    perfect = np.asarray(1.0 - 1e24j)
    assert float(half_space_ring.ring_resistance_ratio(vertical, perfect, height, size)) == pytest.approx(
        over / free, rel=3e-6
    )
    assert float(half_space_ring.ring_sky_ratio(vertical, perfect, height, size)) == pytest.approx(
        over / free, rel=3e-6
    )


@pytest.mark.parametrize("vertical", [True, False], ids=["upright", "flat"])
@pytest.mark.parametrize("constants", [SEA, PASTURE, SAND])
def test_what_goes_up_is_what_its_far_field_carries(vertical: bool, constants: tuple[float, float]) -> None:
    size, height, medium = 0.2, 0.6, soil(constants)
    pattern = GroundPattern.of(uniform(size, height, vertical), FREQUENCY, medium)
    found = float(half_space_ring.ring_sky_ratio(vertical, np.asarray(medium), height, size))
    assert found == pytest.approx(pattern.sky_power / pattern.free.power, rel=1e-6)


def taken(vertical: bool, medium: complex, height: float, size: float) -> float:
    """What flows down through the surface, over the free-space power of the dipole: plain sums over a fine grid.

    Midpoints in the logarithm of what follows v or u; the disc's transform by the plain Bessel functions.
    """
    angle = (np.arange(48) + 0.5) * 0.5 * np.pi / 48
    square = np.cos(angle) ** 2
    end = 50.0 / (height - 2.0 * size) if vertical else 50.0 / height
    total = 0.0
    for waves, last in ((True, 1.0), (False, end)):
        least, count = 1e-7, 5000
        edges = np.geomspace(least, last, count + 1)
        node = np.sqrt(edges[1:] * edges[:-1])
        step = node * np.log(edges[1] / edges[0])
        upward = node + 0j if waves else -1j * node
        lateral = (1.0 - upward**2).real
        g = np.sqrt(medium - lateral + 0j)
        g = np.where(g.imag > 0.0, -g, g)
        passed = 4.0 * node * g.real / np.abs(upward + g) ** 2
        along = 4.0 * node * (g * np.conj(medium)).real / np.abs(medium * upward + g) ** 2
        fall = np.ones_like(node) if waves else np.exp(-height * node)
        if not vertical:
            z = size * np.sqrt(lateral)
            total += float(np.sum(0.75 * step * lateral * passed * (2.0 * jv(1, z) / z) ** 2 * fall))
            continue
        argument = size**2 * (1.0 - lateral[:, None] * square)
        z = np.sqrt(np.abs(argument))
        disc = np.where(argument > 0.0, 2.0 * jv(1, z) / z, 2.0 * iv(1, np.minimum(z, 300.0)) / z) ** 2
        parts = 0.75 * (along[:, None] * (1.0 - square) + (node**2 * passed)[:, None] * square)
        total += float(np.sum(step * fall * (parts * disc).mean(axis=1)))
    return total


@pytest.mark.parametrize(
    ("vertical", "size", "height"),
    [(True, 0.0744, 0.0744 * 2.4), (True, 0.25, 0.25 * 3.0), (False, 0.0744, 0.0744), (False, 0.25, 1.0)],
    ids=["upright, 1.2 radii up", "larger, 1.5 radii up", "flat, half a radius up", "larger, two radii up"],
)
@pytest.mark.parametrize("constants", [SEA, WET, PASTURE, SAND])
def test_power_adds_up(vertical: bool, size: float, height: float, constants: tuple[float, float]) -> None:
    medium = soil(constants)
    total = float(half_space_ring.ring_resistance_ratio(vertical, np.asarray(medium), height, size))
    sky = float(half_space_ring.ring_sky_ratio(vertical, np.asarray(medium), height, size))
    lost = taken(vertical, medium, height, size) / float(half_space_ring.ring_free_ratio(size))
    assert total == pytest.approx(sky + lost, rel=2e-6)


@pytest.mark.parametrize("vertical", [True, False], ids=["upright", "flat"])
def test_over_a_good_conductor_the_loss_is_that_of_the_surface_current(vertical: bool) -> None:
    """Surface resistance times the square of the field of ring and image on the plane: Biot-Savart, no spectrum.

    Skin depth 0.19 mm under a ring of 0.5 m with its centre at 1.2 radii (flat: half a radius).
    """
    frequency, radius, conductivity = 7.1e6, 0.5, 1e6
    up = radius * (1.2 if vertical else 0.5)
    wavenumber = 2.0 * np.pi * frequency / c
    size, height = wavenumber * radius, 2.0 * wavenumber * up
    medium = np.asarray(half_space.relative_permittivity(1.0, conductivity, frequency))
    perfect = np.asarray(1.0 - 1e26j)
    real, ideal = (float(half_space_ring.ring_resistance_ratio(vertical, m, height, size)) for m in (medium, perfect))
    free = float(small_loop.radiation_resistance(np.pi * radius**2, 1, c / frequency))
    found = (real - ideal) * free * float(half_space_ring.ring_free_ratio(size))
    currents = with_image(uniform(size, height, vertical, 128))
    edge = np.sinh(np.linspace(0.0, np.arcsinh(400.0), 121))  # radii: finer below the ring
    away, ring = 0.5 * (edge[1:] + edge[:-1]) * radius, np.diff(edge**2) * 0.5 * radius**2
    around = (np.arange(24) + 0.5) * 2.0 * np.pi / 24
    places = np.stack(
        [np.outer(away, np.cos(around)), np.outer(away, np.sin(around)), np.zeros((len(away), 24))], axis=2
    )
    _, magnetic = fields(places.reshape(-1, 3), currents, frequency)
    level = (np.abs(magnetic[:, :2]) ** 2).sum(axis=1).reshape(len(away), 24).mean(axis=1)
    resistance = (np.pi * frequency * mu_0 / conductivity) ** 0.5
    wanted = resistance * 2.0 * np.pi * float(ring @ level)
    assert found == pytest.approx(wanted, rel=1e-2)
    dipole = float(half_space.resistance_ratio(vertical, medium, height)) - float(
        half_space.resistance_ratio(vertical, perfect, height)
    )
    # ... and not that of the dipole, by far
    assert (found / (dipole * free) > 2.0) if vertical else (found / (dipole * free) < 0.4)


@pytest.mark.parametrize("vertical", [True, False], ids=["upright", "flat"])
@pytest.mark.parametrize("over_radius", [1.1, 1.5, 4.0])
def test_close_to_soil_the_factors_are_what_the_full_integral_comes_to(vertical: bool, over_radius: float) -> None:
    """A ring of a thousandth of the skin depth, over soil whose electric part counts."""
    frequency, medium = 7.1e6, np.asarray(half_space.relative_permittivity(3.0, 1e-3, 7.1e6))
    wavenumber = 2.0 * np.pi * frequency / c
    radius = 5e-3
    size, height = wavenumber * radius, 2.0 * wavenumber * radius * over_radius
    ring, dipole = (
        float(half_space_ring.ring_resistance_ratio(vertical, medium, height, size)) - 1.0,
        float(half_space.resistance_ratio(vertical, medium, height)) - 1.0,
    )
    eddies = float(half_space_ring.ring_eddy_factor(vertical, over_radius))
    share = 8.0 / abs(complex(medium) + 1.0) ** 2 if vertical else 0.0
    electric = float(half_space_ring.ring_electric_factor(over_radius)) if vertical else 0.0
    assert share > 0.1 or not vertical
    assert ring / dipole == pytest.approx((eddies + share * electric) / (1.0 + share), abs=1e-3)


def test_the_factors_of_the_ring_rise_and_fall_towards_the_soil() -> None:
    high = np.array([20.0, 5.0, 2.0, 1.5, 1.2, 1.05, 1.001])
    upright, flat = (half_space_ring.ring_eddy_factor(v, high) for v in (True, False))
    assert (np.diff(upright) > 0.0).all()
    assert (np.diff(flat) < 0.0).all()
    assert upright[0] == pytest.approx(1.0, abs=3e-4)
    assert flat[0] == pytest.approx(1.0, abs=5e-4)
    assert 1.1386 < upright[-1] < 1.139
    electric = half_space_ring.ring_electric_factor(high)
    assert 1.0383 < electric[-1] < 1.039


def test_what_cannot_be_is_refused() -> None:
    medium = np.asarray(13.0 - 12j)
    for form in (half_space_ring.ring_resistance_ratio, half_space_ring.ring_sky_ratio):
        with pytest.raises(ValueError, match="upright ring reaches the soil"):
            form(True, medium, 0.2, 0.1)
        assert float(form(False, medium, 0.2, 0.1)) > 0.0
        with pytest.raises(ValueError, match="height is not positive"):
            form(False, medium, 0.0, 0.1)
        for size in (0.0, -1.0, float("nan"), float("inf")):
            with pytest.raises(ValueError, match="size is not positive"):
                form(False, medium, 1.0, size)
    with pytest.raises(ValueError, match="size is not positive"):
        half_space_ring.ring_free_ratio(-1.0)
    for vertical, height in ((True, 1.0), (True, float("nan")), (False, 0.0), (False, float("inf"))):
        with pytest.raises(ValueError, match="a height is not finite"):
            half_space_ring.ring_eddy_factor(vertical, height)
    with pytest.raises(ValueError, match="the ring reaches the soil"):
        half_space_ring.ring_electric_factor(0.9)
