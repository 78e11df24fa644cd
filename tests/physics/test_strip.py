"""Flat strips: the map against its own integrals, the section against other solutions, limits and range."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.optimize import brentq

from magsafe.physics.conductor import plated_surface_impedance, skin_depth
from magsafe.physics.strip import crowding_factor, equivalent_radius, strip_impedance

COPPER, FREQUENCY = 58e6, 7.1e6
DEPTH = float(skin_depth(FREQUENCY, COPPER))
SURFACE = 1.0 / (COPPER * DEPTH)

# Numeric Schwarz-Christoffel of the second checker (reference notes, section 1).
TABLE = {
    1: 1.273, 2: 1.305, 3: 1.349, 5: 1.428, 8: 1.516, 10: 1.561, 20: 1.709, 30: 1.798, 50: 1.910, 100: 2.061,
    200: 2.209, 500: 2.401, 1000: 2.545,
}  # fmt: skip


def strip(aspect: float, depths: float) -> complex:
    """Impedance per metre of a strip so many skin depths thick."""
    return strip_impedance(FREQUENCY, COPPER, aspect * depths * DEPTH, depths * DEPTH).impedance


def spread_evenly(aspect: float, depths: float) -> float:
    """Resistance with the current spread evenly over the faces of a slab."""
    x = depths / 2.0
    even = (np.sinh(2.0 * x) + np.sin(2.0 * x)) / (np.cosh(2.0 * x) - np.cos(2.0 * x))
    return float(SURFACE * even / (2.0 * (aspect + 1.0) * depths * DEPTH))


@pytest.mark.parametrize("aspect", list(TABLE))
def test_the_table_of_crowding(aspect: int) -> None:
    assert crowding_factor(aspect * 1e-3, 1e-3) == pytest.approx(TABLE[aspect], abs=6e-4)


@pytest.mark.parametrize("aspect", [1.0, 1.7, 12.0, 400.0])
def test_the_map_by_its_own_integrals(aspect: float) -> None:
    """The corners' angles fix |f'| on the unit circle (Schwarz-Christoffel, any textbook); no elliptic integrals."""

    def face(low: float, high: float, corner: float, power: float) -> float:
        def slope(angle: float) -> float:
            return float(abs(2.0 * (np.cos(2.0 * angle) - np.cos(2.0 * corner))) ** power)

        return float(quad(slope, low, high, epsabs=0.0, epsrel=1e-10, limit=400)[0])

    def miss(logarithm: float) -> float:
        corner = float(np.exp(logarithm))
        return face(corner, np.pi / 2.0, corner, 0.5) / face(0.0, corner, corner, 0.5) - aspect

    corner = float(np.exp(brentq(miss, np.log(1e-2), np.log(1.0), xtol=1e-12)))
    # One quarter of the circle has half the width and half the thickness; the current density is 1/|f'|.
    wide, narrow = face(corner, np.pi / 2.0, corner, 0.5), face(0.0, corner, corner, 0.5)
    lost = face(corner, np.pi / 2.0, corner, -0.5) + face(0.0, corner, corner, -0.5)
    assert crowding_factor(aspect, 1.0) == pytest.approx(
        4.0 * (wide + narrow) * 4.0 * lost / (2.0 * np.pi) ** 2, rel=1e-6
    )
    # The circle of radius 1 is mapped without stretching far away.
    assert equivalent_radius(aspect, 1.0) == pytest.approx(aspect / (2.0 * wide), rel=1e-6)


def test_a_square_bar_is_exact() -> None:
    assert crowding_factor(5e-3, 5e-3) == pytest.approx(4.0 / np.pi, rel=1e-12)
    # Gamma(1/4)^2 / (4 pi^(3/2)), equal radius of a square of side 1 (Polya & Szego, memory).
    assert equivalent_radius(1.0, 1.0) == pytest.approx(0.5901702995, rel=1e-9)


def test_a_thin_strip_is_a_quarter_of_its_width_and_crowds_with_the_logarithm() -> None:
    """(4/pi^2)[pi/2 + ln 4 + ln(pi w/4t)/2], reference notes, section 1: 1 % high at 100, less beyond."""
    assert equivalent_radius(0.02, 1e-6) / 0.02 == pytest.approx(0.25, rel=3e-4)
    for aspect, within in ((100.0, 0.012), (1e4, 3e-4), (2e4, 2e-4)):
        series = 4.0 / np.pi**2 * (np.pi / 2.0 + np.log(4.0) + np.log(np.pi * aspect / 4.0) / 2.0)
        assert 0.0 < series / crowding_factor(aspect, 1.0) - 1.0 < within


@given(first=st.floats(1.0, 1.9e4), more=st.floats(1.001, 1.05))
def test_crowding_grows_and_the_equal_radius_falls_with_the_aspect(first: float, more: float) -> None:
    assert crowding_factor(first * more, 1.0) > crowding_factor(first, 1.0)
    assert equivalent_radius(1.0, 1.0 / first) > equivalent_radius(1.0, 1.0 / (first * more)) > 0.25


def test_a_thick_strip_is_its_surface_times_the_crowding() -> None:
    width, thickness = 0.02, 0.002
    found = strip_impedance(FREQUENCY, COPPER, width, thickness)
    plain = plated_surface_impedance(FREQUENCY, COPPER, 0.0, COPPER)
    wanted = complex(plain) * crowding_factor(width, thickness) / (2.0 * (width + thickness))
    assert found.impedance == pytest.approx(wanted, rel=1e-9)
    assert found.impedance.imag == pytest.approx(found.impedance.real, rel=1e-9)
    assert (found.below, found.above) == (0.04, 0.04)


@pytest.mark.parametrize("aspect", [1.0, 3.0, 10.0, 100.0, 1000.0])
def test_a_strip_far_thinner_than_its_skin_is_its_cross_section(aspect: float) -> None:
    found = strip(aspect, 0.01)
    assert found.real == pytest.approx(1.0 / (COPPER * aspect * (0.01 * DEPTH) ** 2), rel=1e-4)


def test_direct_current_in_a_square_bar_is_seen_from_its_geometric_mean_distance() -> None:
    """0.44705 of the side for even current (Grover 1946, memory) against 0.59017 for current on the surface."""
    per_square = 2.0 / DEPTH**2 / COPPER / (2.0 * np.pi)  # omega mu0 / 2 pi
    assert strip(1.0, 0.05).imag / per_square == pytest.approx(np.log(0.590170 / 0.447049), rel=1e-2)


def test_direct_current_in_a_thin_strip_is_seen_from_its_geometric_mean_distance() -> None:
    """0.2235 times width and thickness (Grover 1946, memory); 1/4 exp(3/2) of the width without thickness."""
    per_square = 2.0 / DEPTH**2 / COPPER / (2.0 * np.pi)
    wanted = np.log(equivalent_radius(300.0, 1.0) / (0.2235 * 301.0))
    assert wanted == pytest.approx(np.log(0.25 * np.exp(1.5)), abs=0.01)
    assert strip(300.0, 1e-3).imag / per_square == pytest.approx(wanted, rel=0.05)


def thin_sheet(aspect: float, depths: float) -> float:
    """Resistance of a sheet of no thickness with the sheet impedance of a slab, pieces narrow towards the edges."""
    edges = aspect * depths / 2.0 * np.sin(np.linspace(0.0, np.pi / 2.0, 301))  # in skin depths
    middle, widths = (edges[1:] + edges[:-1]) / 2.0, np.diff(edges)
    logarithms = np.zeros((300, 300))
    for side in (1.0, -1.0):
        for sign, bound in ((-1.0, side * middle[:, None] - edges[1:]), (1.0, side * middle[:, None] - edges[:-1])):
            logarithms += sign * bound * (np.log(np.abs(bound)) - 1.0)
    sheet = (1.0 + 1.0j) / np.tanh((1.0 + 1.0j) * depths / 2.0) / 2.0
    density = np.linalg.solve(sheet * np.eye(300) - 1.0j / np.pi * logarithms, np.ones(300))
    return float((1.0 / (2.0 * widths @ density)).real * SURFACE / DEPTH)


@pytest.mark.parametrize(("aspect", "depths", "within"), [(200.0, 0.1, 0.01), (1000.0, 0.1, 0.01), (50.0, 0.25, 0.01)])
def test_a_thin_wide_strip_is_a_sheet(aspect: float, depths: float, within: float) -> None:
    assert strip(aspect, depths).real == pytest.approx(thin_sheet(aspect, depths), rel=within)


def section_in_squares(aspect: int, depths: float, across: int) -> float:
    """Resistance from equal squares by their geometric mean distances: another mesh and another kernel."""
    x, y = np.meshgrid((np.arange(across * aspect) + 0.5) / across, (np.arange(across) + 0.5) / across, indexing="ij")
    place = (x + 1.0j * y).ravel()
    apart = np.abs(place[:, None] - place[None, :])
    np.fill_diagonal(apart, 0.447049 / across)
    system = np.eye(len(place)) - 1.0j * depths**2 / np.pi / across**2 * np.log(apart)
    density = np.linalg.solve(system, np.ones(len(place)))
    return float((1.0 / np.sum(density)).real * across**2 / (COPPER * (depths * DEPTH) ** 2))


@pytest.mark.parametrize(
    ("aspect", "depths", "across"), [(1, 1.0, 12), (1, 3.0, 24), (3, 1.5, 12), (3, 3.0, 18), (10, 1.0, 10)]
)
def test_the_section_against_equal_squares(aspect: int, depths: float, across: int) -> None:
    assert strip(aspect, depths).real == pytest.approx(section_in_squares(aspect, depths, across), rel=0.01)


@pytest.mark.parametrize("aspect", [30.0, 100.0, 300.0])
def test_wide_strips_against_the_filaments_of_the_reference(aspect: float) -> None:
    """2 to 2.5 % below the product for 6 to 16 skin depths, 4 % above at 3 (reference notes, section 1)."""
    thick = crowding_factor(aspect, 1.0)
    assert strip(aspect, 6.0).real / (thick * spread_evenly(aspect, 6.0)) == pytest.approx(0.9775, abs=0.005)
    assert strip(aspect, 3.0).real / (thick * spread_evenly(aspect, 3.0)) == pytest.approx(1.035, abs=0.02)


@pytest.mark.parametrize("aspect", [1.0, 2.0, 10.0, 100.0])
def test_solution_and_thin_skin_form_meet_within_their_errors(aspect: float) -> None:
    """Where one goes over into the other, and no step anywhere."""
    depths = np.linspace(5.0, 12.0, 141)
    found = [strip_impedance(FREQUENCY, COPPER, aspect * d * DEPTH, d * DEPTH) for d in depths]
    scaled = np.array([f.impedance for f in found]) * (depths * DEPTH) * COPPER * DEPTH
    assert np.max(np.abs(np.diff(scaled) / scaled[:-1])) < 0.02
    for f, d in zip(found, depths, strict=True):
        product = crowding_factor(aspect, 1.0) * spread_evenly(aspect, d)
        if d >= 8.0:
            assert product * (1.0 - f.below) < f.impedance.real < product * (1.0 + f.above)
    errors = [f.above for f in found]
    assert errors == sorted(errors)
    assert (errors[0], errors[-1]) == (0.02, 0.04)


@given(aspect=st.sampled_from([1.0, 4.0, 60.0]), depths=st.floats(1e-3, 1e5))
def test_no_strip_beats_its_cross_section_or_a_thick_surface_by_much(aspect: float, depths: float) -> None:
    found = strip(aspect, depths)
    assert found.real >= (1.0 - 1e-6) / (COPPER * aspect * (depths * DEPTH) ** 2)
    # The least of a slab's two faces is 0.917 of a thick one; only the evenest spread comes to that.
    assert found.real >= 0.917 * SURFACE / (2.0 * (aspect + 1.0) * depths * DEPTH)
    assert found.imag > 0.0


@pytest.mark.parametrize(
    ("width", "thickness"), [(1e-3, 2e-3), (1.0, 1e-5), (1e-3, 0.0), (-1e-3, -1e-3), (float("nan"), 1e-3)]
)
def test_outside_the_range_there_is_no_answer(width: float, thickness: float) -> None:
    for call in (crowding_factor, equivalent_radius):
        with pytest.raises(ValueError, match="between 1 and 20000"):
            call(width, thickness)
    with pytest.raises(ValueError, match="between 1 and 20000"):
        strip_impedance(FREQUENCY, COPPER, width, thickness)
