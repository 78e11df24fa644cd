"""The dipole over soil: its integrals by another path and another rule, limits, and where its power goes."""

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy.constants import c, epsilon_0, mu_0
from scipy.integrate import quad

from magsafe.physics import ground, half_space, small_loop, soil_spectrum

Array = NDArray[np.float64]
FREQUENCY = 7.1e6

# er and S/m: sea, wet soil, pasture, sand; two that conduct hardly or not at all, fresh water, and an ice-like one
SOILS = [(80.0, 5.0), (20.0, 0.03), (13.0, 5e-3), (5.0, 1e-3), (5.0, 0.0), (30.0, 1e-6), (80.0, 3e-3), (3.2, 1e-5)]
HEIGHTS = [0.005, 0.02, 0.15, 1.3]  # wavelengths


def soil(er: float, conductivity: float, frequency: float = FREQUENCY) -> complex:
    return complex(half_space.relative_permittivity(er, conductivity, frequency))


def image(vertical: bool, height: float) -> float:
    return float((ground.image_ratio_vertical if vertical else ground.image_ratio_horizontal)(height))


def below(permittivity: complex, lateral: float) -> complex:
    """The vertical wavenumber in the soil, chosen by its sign rather than by a branch."""
    root = np.sqrt(complex(permittivity - lateral))
    return complex(-root if root.imag > 0.0 else root)


def spectrum(vertical: bool, permittivity: complex, upward: complex) -> complex:
    """Weight w of the integral with the coefficients as printed: plain quotients."""
    lateral = 1.0 - upward**2
    g = below(permittivity, lateral.real)
    level = (upward - g) / (upward + g)
    along = (permittivity * upward - g) / (permittivity * upward + g)
    return 0.75 * (along - upward**2 * level) if vertical else 1.5 * lateral * level


def along_the_axes(vertical: bool, permittivity: complex, height: float) -> float:
    """1 + Re{integral of w exp(-jxu) over u from 0 to 1 + j integral of w exp(-xv) over v from 0 up}, by quad."""
    corner = float(np.sqrt(permittivity - 1.0).real)
    scale = 1.0 / abs(permittivity + 1.0) ** 0.5
    end = 45.0 / height

    def travelling(u: float) -> float:
        return float((spectrum(vertical, permittivity, complex(u)) * np.exp(-1j * height * u)).real)

    def decaying(v: float) -> float:
        return float(-spectrum(vertical, permittivity, -1j * v).imag * np.exp(-height * v))

    def piecewise(function: object, places: list[float]) -> float:
        assert callable(function)
        return sum(float(quad(function, a, b, epsabs=1e-12, epsrel=1e-12, limit=500)[0]) for a, b in pairwise(places))

    inner = [0.0, *sorted({scale, min(5.0 * scale, 0.9)}), 1.0]
    outer = [0.0, *sorted({v for v in (scale, 5.0 * scale, 1.0, corner, 3.0 * corner, 3.0 / height) if v < end}), end]
    return 1.0 + piecewise(travelling, inner) + piecewise(decaying, outer)


@pytest.mark.filterwarnings("ignore::scipy.integrate.IntegrationWarning")
@pytest.mark.parametrize("vertical", [True, False], ids=["upright", "flat"])
@pytest.mark.parametrize("constants", SOILS)
def test_the_integral_is_that_along_the_real_axes(vertical: bool, constants: tuple[float, float]) -> None:
    """Another path, plain reflection coefficients, and scipy's adaptive rule."""
    medium = soil(*constants)
    for height in HEIGHTS:
        found = float(half_space.resistance_ratio(vertical, np.asarray(medium), 4.0 * np.pi * height))
        assert found == pytest.approx(along_the_axes(vertical, medium, 4.0 * np.pi * height), rel=1e-8, abs=0.0)


@pytest.mark.parametrize("vertical", [True, False], ids=["upright", "flat"])
def test_soil_that_conducts_without_end_is_the_perfect_plane(vertical: bool) -> None:
    """Closed forms of the image: Wait (memory), by `ground`."""
    for height in (0.1, 0.5, 2.0, 9.0, 40.0):
        for form in (half_space.resistance_ratio, half_space.sky_ratio):
            found = float(form(vertical, np.asarray(1.0 - 1e30j), height))
            assert found == pytest.approx(image(vertical, height), rel=1e-6, abs=0.0), (form, height)


@pytest.mark.parametrize("vertical", [True, False], ids=["upright", "flat"])
def test_no_soil_is_free_space(vertical: bool) -> None:
    """Half goes up and half goes down through a surface that is not there."""
    nothing, heights = np.asarray(1.0 + 0j), np.array([0.06, 1.0, 30.0])
    assert half_space.resistance_ratio(vertical, nothing, heights) == pytest.approx(1.0, abs=1e-12)
    assert half_space.sky_ratio(vertical, nothing, heights) == pytest.approx(0.5, abs=1e-12)
    assert half_space.soil_ratio(vertical, nothing, heights) == pytest.approx(0.5, abs=1e-12)


@pytest.mark.parametrize("vertical", [True, False], ids=["upright", "flat"])
@pytest.mark.parametrize("constants", SOILS)
def test_far_above_soil_free_space_returns(vertical: bool, constants: tuple[float, float]) -> None:
    """What the soil sends back falls off as 1/height: 3/2 over it is what a perfect conductor leaves."""
    for height in (100.0, 1000.0):
        found = float(half_space.resistance_ratio(vertical, np.asarray(soil(*constants)), height))
        assert found == pytest.approx(1.0, abs=1.5 / height + 3.0 / height**2)


@settings(max_examples=150, deadline=None)
@given(
    vertical=st.booleans(),
    er=st.floats(1.0, 100.0),
    conductivity=st.one_of(st.just(0.0), st.floats(-6.0, 1.0).map(lambda e: 10.0**e)),
    frequency=st.floats(1.8e6, 54e6),
    height=st.floats(np.log10(0.005), 0.5).map(lambda e: 10.0**e),
)
def test_power_adds_up_and_none_is_negative(
    vertical: bool, er: float, conductivity: float, frequency: float, height: float
) -> None:
    """Three integrals, each by its own formula: Poynting's theorem."""
    medium, x = np.asarray(soil(er, conductivity, frequency)), 4.0 * np.pi * height
    total = float(half_space.resistance_ratio(vertical, medium, x))
    sky, taken = float(half_space.sky_ratio(vertical, medium, x)), float(half_space.soil_ratio(vertical, medium, x))
    assert sky > 0.0
    assert taken > 0.0
    assert total == pytest.approx(sky + taken, rel=1e-8, abs=0.0)


@pytest.mark.parametrize("constants", [(80.0, 5.0), (20.0, 0.03), (13.0, 5e-3), (5.0, 1e-3)])
def test_close_to_soil_the_loss_is_that_of_eddies(constants: tuple[float, float]) -> None:
    """The quasi-static limit, at a thousandth of the skin depth; sand has 19 % more from the electric field."""
    medium, area = np.asarray(soil(*constants)), 1e-8
    depth = (2.0 / (2.0 * np.pi * FREQUENCY * mu_0 * constants[1])) ** 0.5
    height = 1e-3 * depth
    free = float(small_loop.radiation_resistance(area, 2, c / FREQUENCY))
    for vertical in (True, False):
        ratio = float(half_space.resistance_ratio(vertical, medium, 4.0 * np.pi * height * FREQUENCY / c))
        close = float(half_space.low_height_resistance(vertical, medium, FREQUENCY, area, 2, height))
        found = ratio * free / close
        assert found == pytest.approx(1.0, abs=0.012), vertical
    flat, upright = (
        float(half_space.low_height_resistance(v, medium, FREQUENCY, area, 2, height)) for v in (False, True)
    )
    omega = 2.0 * np.pi * FREQUENCY
    assert flat == pytest.approx(constants[1] * (omega * mu_0 * 2 * area) ** 2 / (32.0 * np.pi * height), rel=1e-12)
    more = {80.0: 0.0, 20.0: 2e-3, 13.0: 0.02, 5.0: 0.19}[constants[0]]
    assert upright / flat == pytest.approx(0.5 * (1.0 + more), abs=3e-3)


def test_the_electric_part_of_the_close_loss() -> None:
    """Where the permittivity does not hide the soil, the electric field takes nearly as much as the eddies."""
    frequency, height = 14.2e6, 1e-4
    medium = np.asarray(soil(3.0, 1e-3, frequency))
    x = 4.0 * np.pi * height * frequency / c
    free = float(small_loop.radiation_resistance(1e-10, 1, c / frequency))
    whole = float(half_space.resistance_ratio(True, medium, x)) * free
    close = float(half_space.low_height_resistance(True, medium, frequency, 1e-10, 1, height))
    assert whole == pytest.approx(close, rel=2e-3)
    assert close > 0.5 * 1.4 * float(half_space.low_height_resistance(False, medium, frequency, 1e-10, 1, height))


def test_complex_permittivity() -> None:
    """Average soil at 7.1 MHz: sigma/(omega epsilon0) = 17.975 sigma[mS/m] / f[MHz]."""
    found = complex(half_space.relative_permittivity(13.0, 5e-3, 7.1e6))
    assert found == pytest.approx(13.0 - 17.975j * 5.0 / 7.1, rel=1e-4)
    assert found.imag * 2.0 * np.pi * 7.1e6 * epsilon_0 == pytest.approx(-5e-3, rel=1e-12)


def test_reflection_straight_down_and_at_brewsters_angle() -> None:
    """Index 1.5: 0.2 straight down, nothing of the upright polarisation at atan 1.5: Hecht, Optics, 4.6 (memory)."""
    glass = np.asarray(2.25 + 0j)
    level, along = half_space.reflection(glass, np.asarray(1.0))
    assert complex(level) == pytest.approx(-0.2, abs=1e-12)
    assert complex(along) == pytest.approx(0.2, abs=1e-12)
    _, none = half_space.reflection(glass, np.asarray(np.cos(np.arctan(1.5))))
    assert abs(complex(none)) < 1e-15
    level, along = half_space.reflection(glass, np.asarray(0.0))
    assert complex(level) == pytest.approx(-1.0)
    assert complex(along) == pytest.approx(-1.0)


def test_a_grid_of_soils_and_heights_is_the_same_one_by_one() -> None:
    media = np.array([soil(*constants) for constants in SOILS])
    heights = 4.0 * np.pi * np.array(HEIGHTS)
    for form in (half_space.resistance_ratio, half_space.sky_ratio, half_space.soil_ratio):
        for vertical in (True, False):
            grid = form(vertical, media[:, None], heights)
            assert grid.shape == (len(SOILS), len(HEIGHTS))
            for i, j in ((0, 0), (3, 1), (5, 0), (7, 3)):
                one = form(vertical, media[i], float(heights[j]))
                assert one.shape == ()
                assert float(grid[i, j]) == pytest.approx(float(one), rel=1e-9)


def test_what_cannot_be_is_refused() -> None:
    medium = np.asarray(13.0 - 12j)
    for form in (half_space.resistance_ratio, half_space.sky_ratio, half_space.soil_ratio):
        for height in (0.0, -1.0, float("nan"), float("inf")):
            with pytest.raises(ValueError, match="height is not positive"):
                form(True, medium, height)
        for wrong in (0.9 - 1j, 13.0 + 1e-9j, complex(float("nan"), 0.0), complex(13.0, -float("inf"))):
            with pytest.raises(ValueError, match="relative permittivity"):
                form(True, np.asarray(wrong), 1.0)


def test_an_integral_that_does_not_settle_is_no_figure() -> None:
    def jagged(node: Array, weight: Array) -> Array:
        return np.asarray(weight @ np.sin(1e5 * node) ** 2)

    with pytest.raises(ArithmeticError, match="has not settled with 160 panels"):
        soil_spectrum.refined(jagged)
