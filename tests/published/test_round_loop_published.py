"""The Fourier-series loop against closed forms, common practice, check values, energy, and its kernel by quadrature."""

import tomllib
from collections.abc import Callable
from itertools import pairwise
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.constants import c, mu_0
from scipy.integrate import quad
from scipy.optimize import brentq
from scipy.special import ellipkm1

from magsafe.physics.far_field import FarField
from magsafe.physics.near_field import SegmentCurrents
from magsafe.physics.round_loop import RoundLoop, kernel_harmonics, solve

Array = NDArray[np.float64]
Row = dict[str, Any]

SPACE = mu_0 * c
ROUNDED_SPACE = SPACE / (120.0 * np.pi)  # the handbooks print with 120 pi
RADIUS = 1.0  # m
ROWS: list[Row] = [
    row
    for row in tomllib.loads(Path(__file__).with_name("check_values.toml").read_text(encoding="utf-8"))["value"]
    if row["id"].startswith("gapfree_")
]


def at(sizes: Array | list[float], thickness: float, gap: float = 0.1, radius: float = RADIUS) -> RoundLoop:
    """The loop at perimeters in wavelengths."""
    frequencies = np.asarray(sizes) * c / (2.0 * np.pi * radius)
    return solve(radius, thickness * radius, frequencies, gap)


def small_loop_resistance(size: Array | float) -> Array:
    """Foster, Proceedings of the IRE 32, 603 (1944); Balanis, Antenna Theory, eq. (5-24) (both memory)."""
    return np.asarray(20.0 * np.pi**2 * np.asarray(size) ** 4 * ROUNDED_SPACE)


def small_loop_reactance(size: Array | float, thickness: float) -> Array:
    """Rosa & Grover, NBS Scientific Paper 169 (memory): L = mu0 R (ln(8R/a) - 2), current on the surface."""
    return np.asarray(SPACE * np.asarray(size) * (np.log(8.0 / thickness) - 2.0))


@pytest.mark.parametrize("thickness", [1e-4, 5e-3, 0.02])
@pytest.mark.parametrize("radius", [0.03, 1.0])
def test_a_tiny_loop_has_the_resistance_and_inductance_of_the_closed_forms(thickness: float, radius: float) -> None:
    """Their own next terms are the squares of thickness and of the size."""
    sizes = np.array([0.0005, 0.005])
    found = at(sizes, thickness, 0.1, radius)
    # the capacitance across the port raises R by twice what it raises X; both by less than 15 size^2
    assert found.radiation_resistance == pytest.approx(small_loop_resistance(sizes), rel=4e-4, abs=0.0)
    assert found.radiation_resistance[0] == pytest.approx(float(small_loop_resistance(0.0005)), rel=4e-6, abs=0.0)
    assert found.impedance.imag == pytest.approx(small_loop_reactance(sizes, thickness), rel=4e-4, abs=0.0)
    inductance = mu_0 * radius * (np.log(8.0 / thickness) - 2.0)
    assert found.reactance_slope == pytest.approx(np.full(2, inductance), rel=1e-3, abs=0.0)
    assert found.mean_square == pytest.approx(np.ones(2), rel=5e-4)


def test_what_a_tiny_loop_misses_of_the_inductance_is_the_square_of_its_thickness() -> None:
    """The same formula with the next term would remove it: NBS Scientific Paper 169 (memory), (a/R)^2 ln(8R/a)."""
    for thickness in (0.01, 0.03, 0.06):
        excess = at([1e-3], thickness).impedance.imag[0] / small_loop_reactance(1e-3, thickness) - 1.0
        assert abs(excess) < 0.15 * thickness**2 * np.log(8.0 / thickness)


RING = 0.5e-3  # 1 mm conductor diameter on a ring of 2 m diameter
NARROW = 0.012  # rad, the gap: 12 mm, well above the conductor


def crossing(value: Callable[[complex], float], near: float) -> float:
    return float(brentq(lambda size: value(complex(at([size], RING, NARROW).impedance[0])), 0.95 * near, 1.04 * near))


@pytest.mark.parametrize(("size", "wanted"), [(1, 1.037), (2, 2.051), (3, 3.06)])
def test_a_free_ring_is_resonant_a_little_above_whole_wavelengths(size: int, wanted: float) -> None:
    """Computed independently for this project; above a whole number of wavelengths is common practice."""
    assert crossing(lambda z: z.imag, size + 0.04) == pytest.approx(wanted, rel=0.005)


@pytest.mark.parametrize("wanted", [0.481, 1.485, 2.48])
def test_a_free_ring_is_anti_resonant_a_little_below_halves(wanted: float) -> None:
    """Computed independently for this project; depends on the gap, here 12 mm."""
    assert crossing(lambda z: (1.0 / z).imag, wanted) == pytest.approx(wanted, rel=0.005)


def test_a_ring_of_one_wavelength_has_about_120_ohm() -> None:
    """Common practice: 100 to 140 ohm at the first resonance."""
    size = crossing(lambda z: z.imag, 1.04)
    assert at([size], RING, NARROW).impedance[0].real == pytest.approx(120.0, rel=0.2)


@pytest.mark.parametrize("gap", [0.02, 0.1, 0.2])
@pytest.mark.parametrize("row", ROWS, ids=lambda row: row["id"])
def test_what_does_not_depend_on_the_gap(row: Row, gap: float) -> None:
    """Two further solutions, each with its own kernel (computed); the table's own tolerances."""
    size, thickness = row["inputs"]["C_over_lambda"], row["inputs"]["a_over_R"]
    found = at([size], thickness, gap)
    resistance = found.radiation_resistance[0] / small_loop_resistance(size)
    if row["id"].startswith("gapfree_RoverX2"):
        value = resistance / (found.impedance.imag[0] / small_loop_reactance(size, thickness)) ** 2
    else:
        value = resistance / found.mean_square[0]
    assert float(value) == pytest.approx(row["value"], rel=row["rtol"])


def test_there_are_ten_gap_free_values() -> None:
    assert len(ROWS) == 10


def sphere(count: int) -> tuple[Array, Array]:
    """Directions (direction, 3) and their solid angles."""
    height, weight = np.polynomial.legendre.leggauss(count)
    around = np.arange(2 * count) * np.pi / count
    flat = np.sqrt(1.0 - height**2)[:, None]
    up = np.broadcast_to(height[:, None], (count, 2 * count))
    out = np.stack([flat * np.cos(around), flat * np.sin(around), up], axis=2).reshape(-1, 3)
    return out, np.repeat(weight, 2 * count) * np.pi / count


@pytest.mark.parametrize("gap", [0.05, 0.3])
@pytest.mark.parametrize("thickness", [1e-3, 0.06])
def test_the_resistance_is_the_power_in_the_far_field_of_the_current(thickness: float, gap: float) -> None:
    """Conservation of energy, by quadrature of the radiation integral over the ring and of its square over a sphere."""
    sizes = [0.005, 0.25, 0.5, 1.0, 2.0, 3.1]
    found = at(sizes, thickness, gap)
    count = 4096
    angles = np.arange(count) * 2.0 * np.pi / count
    along = np.stack([-np.sin(angles), np.cos(angles), np.zeros(count)], axis=1)
    place = np.stack([np.cos(angles), np.sin(angles), np.zeros(count)], axis=1)
    currents = found.current(angles)
    out, solid = sphere(14)
    for size, current, resistance in zip(sizes, currents, found.radiation_resistance, strict=True):
        phase = size * (out @ place.T)
        flow = (np.exp(1j * phase) @ (current[:, None] * along)) * size * 2.0 * np.pi / count
        across = flow - (flow * out).sum(axis=1)[:, None] * out
        power = SPACE / (4.0 * np.pi) ** 2 * float(solid @ (np.abs(across) ** 2).sum(axis=1))
        assert resistance == pytest.approx(power, rel=1e-9, abs=0.0), size


@pytest.mark.parametrize("size", [0.005, 0.25, 1.0, 2.5])
def test_the_resistance_is_the_power_of_straight_segments_with_that_current(size: float) -> None:
    """The same through the far field of a polygon of equal area, as fields are computed elsewhere."""
    found = at([size], 0.01)
    count = 360
    step = 2.0 * np.pi / count
    angles = np.asarray(step * np.arange(count + 1), dtype=np.float64)
    corner = np.sqrt(step / np.sin(step))
    places = corner * np.column_stack([np.cos(angles), np.sin(angles), np.zeros(count + 1)])
    current = found.current(angles)[0]
    currents = SegmentCurrents(places[:-1], places[1:], current[:-1], current[1:], 0.01)
    power = FarField.of(currents, float(found.frequencies[0])).power
    assert found.radiation_resistance[0] == pytest.approx(power, rel=5e-4, abs=0.0)


def surface_averaged(angle: float, thickness: float) -> float:
    """Mean of b/R over the turn of one of two surfaces, R^2 = 4b^2 sin^2(angle/2) + 4a^2 sin^2(turn/2)."""
    apart = 4.0 * np.sin(0.5 * angle) ** 2
    across = 4.0 * thickness**2
    return float(2.0 / np.pi * ellipkm1(apart / (apart + across)) / np.sqrt(apart + across))


def harmonic_by_quadrature(order: int, size: float, thickness: float) -> complex:
    """Mean of kernel times cos(order angle) round the turn: static part surface-averaged, the rest reduced."""

    def integral(value: Callable[[float], float]) -> float:
        edges = [0.0, 1e-3 * thickness, 0.1 * thickness, thickness, 10.0 * thickness, np.pi]
        pieces = [
            quad(lambda t: value(t) * np.cos(order * t), low, high, epsabs=1e-12, epsrel=1e-11, limit=400)[0]
            for low, high in pairwise(edges)
        ]
        return float(sum(pieces)) / np.pi

    def distance(angle: float) -> float:
        return float(np.sqrt(4.0 * np.sin(0.5 * angle) ** 2 + thickness**2))

    static = integral(lambda t: surface_averaged(t, thickness))
    real = integral(lambda t: float(-2.0 * np.sin(0.5 * size * distance(t)) ** 2 / distance(t)))
    imaginary = integral(lambda t: -float(np.sin(size * distance(t)) / distance(t)))
    return complex(static + real, imaginary)


@pytest.mark.parametrize("order", [0, 1, 2, 5, 12])
@pytest.mark.parametrize("size", [0.005, 0.25, 1.0, 3.1])
def test_the_kernel_agrees_with_its_integral_to_the_square_of_the_thickness(order: int, size: float) -> None:
    """Direct quadrature of b exp(-jkR)/R round the turn, as the loop's integral equation defines it."""
    for thickness in (0.02, 0.005):
        kernel, _ = kernel_harmonics(np.array([size]), thickness, 12)
        wanted = harmonic_by_quadrature(order, size, thickness)
        # within a conductor radius or so, the turn's curvature and the wave are left out
        allowed = 0.25 * (1.0 + size**2) * thickness**2 * np.log(8.0 / thickness) / np.pi
        assert kernel[0, order].real == pytest.approx(wanted.real, abs=allowed)
        assert kernel[0, order].imag == pytest.approx(wanted.imag, abs=0.5 * size**3 * thickness**2 + 1e-11)


def test_the_imaginary_part_is_a_sum_of_bessel_functions() -> None:
    """Abramowitz & Stegun, eq. 11.1.2 (memory): integral_0^X J_2n = 2 sum J_{2n+2m+1}(X), to the last digits."""
    from scipy.special import jv

    sizes = np.array([0.0025, 0.1, 1.0, 3.2])
    kernel, _ = kernel_harmonics(sizes, 0.01, 8)
    odd = 2.0 * np.arange(40) + 1.0
    for order in range(9):
        wanted = -jv(2.0 * order + odd[None, :], 2.0 * sizes[:, None]).sum(axis=1)
        assert kernel[:, order].imag == pytest.approx(wanted, rel=1e-9, abs=0.0), order


def test_the_real_part_is_an_integral_of_lommel_weber_functions() -> None:
    """Their definition, (1/pi) integral_0^pi sin(x sin t - m t) dt: Jahnke & Emde (memory)."""
    for size in (0.3, 3.2):
        kernel, _ = kernel_harmonics(np.array([size, 1e-4]), 0.01, 6)
        for order in (0, 1, 6):
            nodes, weights = np.polynomial.legendre.leggauss(48)
            x = size * (nodes + 1.0)
            t = np.pi * (nodes + 1.0) / 2.0
            values = np.sin(x[:, None] * np.sin(t) - 2.0 * order * t) @ weights / 2.0
            wanted = -0.5 * size * float(weights @ values)
            change = kernel[0, order].real - kernel[1, order].real
            assert change == pytest.approx(wanted, abs=2e-8), (size, order)


@pytest.mark.parametrize("gap", [0.02, 0.3])
def test_the_slope_is_the_derivative_of_the_reactance(gap: float) -> None:
    sizes = np.array([0.01, 0.25, 0.47, 1.0, 1.5, 2.9])
    step = 1e-5
    above, below = (at(sizes * (1.0 + sign * step), 0.03, gap) for sign in (1.0, -1.0))
    found = at(sizes, 0.03, gap)
    wanted = (above.impedance.imag - below.impedance.imag) / (4.0 * np.pi * found.frequencies * step)
    assert found.reactance_slope == pytest.approx(wanted, rel=1e-6, abs=0.0)


@pytest.mark.parametrize("gap", [0.03, 0.4])
def test_the_current_its_mean_square_and_its_mean_over_the_gap(gap: float) -> None:
    """The port's current is 1 by definition; the mean square by quadrature round the turn."""
    found = at([0.01, 0.3, 1.1], 0.02, gap)
    nodes, weights = np.polynomial.legendre.leggauss(64)
    over_gap = found.current(0.5 * gap * nodes) @ weights / 2.0
    # what is missing are the harmonics that count as a capacitance only
    assert np.abs(over_gap - 1.0).max() < 3e-5
    count = 8192
    turn = found.current(np.arange(count) * 2.0 * np.pi / count)
    assert found.mean_square == pytest.approx((np.abs(turn) ** 2).mean(axis=1), rel=1e-12)
    assert found.current(np.array([1.0])) == pytest.approx(found.current(np.array([-1.0])), rel=1e-12)


def test_a_small_loop_has_the_current_of_a_short_circuited_line() -> None:
    """Common practice: largest opposite the port, by 1/cos(pi C/lambda); a share of the gap's capacitance apart."""
    found = at([0.1], 1e-5, 0.3)
    opposite = complex(found.current(np.array([np.pi]))[0, 0])
    assert abs(opposite) == pytest.approx(1.0 / np.cos(0.1 * np.pi), rel=0.01)
    assert abs(opposite) > 1.02


def test_a_finer_gap_only_adds_a_capacitance_across_the_port() -> None:
    """Conductance of a small loop stays, susceptance moves in proportion to frequency."""
    sizes = np.array([0.01, 0.1, 0.2])
    wide, narrow = (1.0 / at(sizes, 0.01, gap).impedance for gap in (0.2, 0.02))
    added = (narrow.imag - wide.imag) / sizes
    assert (added > 0.0).all()
    assert added == pytest.approx(np.full(3, added[0]), rel=1e-3)
    assert narrow.real == pytest.approx(wide.real, rel=1e-3, abs=0.0)


def test_more_harmonics_change_nothing(monkeypatch: pytest.MonkeyPatch) -> None:
    from magsafe.physics import round_loop

    for thickness, gap in ((0.06, 0.06), (0.06, 0.6), (1e-4, 0.01)):
        usual = at([0.005, 0.25, 0.9, 3.1], thickness, gap)
        with monkeypatch.context() as patch:
            patch.setattr(round_loop, "_PER_GAP", 240.0)
            patch.setattr(round_loop, "_PER_GAP_STATIC", 10_000.0)
            more = at([0.005, 0.25, 0.9, 3.1], thickness, gap)
        assert np.abs(usual.impedance / more.impedance - 1.0).max() < 2e-6
        assert usual.radiation_resistance == pytest.approx(more.radiation_resistance, rel=4e-6, abs=0.0)
        assert usual.mean_square == pytest.approx(more.mean_square, rel=4e-6, abs=0.0)


def test_what_is_out_of_range_is_refused() -> None:
    one = np.array([c / (2.0 * np.pi)])  # one wavelength round a radius of 1 m
    assert solve(1.0, 0.06, 3.2 * one * (1.0 - 1e-12), 0.6).impedance.shape == (1,)
    assert solve(1.0, 0.06, one[:0], 0.6).impedance.shape == (0,)
    for radius, conductor, frequencies, gap, words in (
        (1.0, 0.061, one, 0.1, "conductor radius over loop radius is 0.061, expected 1e-06 to 0.06"),
        (1.0, 0.01, 3.3 * one, 0.1, "perimeter in wavelengths is 3.3, expected 0.0001 to 3.2"),
        (1.0, 0.01, np.nan * one, 0.1, "perimeter in wavelengths is nan"),
        (1.0, 0.01, -one, 0.1, "perimeter in wavelengths is -1"),
        (1.0, 0.01, one, 0.005, "angle of the gap in rad is 0.005"),
        (0.0, 0.01, one, 0.1, "loop radius is 0.0 m"),
        (1.0, float("nan"), one, 0.1, "conductor radius is nan m"),
        (1.0, 0.01, one.reshape(1, 1), 0.1, "frequencies have shape"),
    ):
        with pytest.raises(ValueError, match=words):
            solve(radius, conductor, frequencies, gap)
