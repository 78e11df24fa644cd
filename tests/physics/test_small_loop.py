"""Scaling, limits and facts of the trade of the small loop's closed forms."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.constants import c

from magsafe.physics import small_loop, tuned_circuit

FORMS = (
    small_loop.radiation_taper,
    small_loop.loss_taper,
    small_loop.opposite_taper,
    small_loop.reactance_taper,
    small_loop.slope_taper,
)


@pytest.mark.parametrize("form", FORMS, ids=lambda f: f.__name__)
def test_a_vanishing_loop_has_no_taper(form: object) -> None:
    assert callable(form)
    assert float(form(1e-6)) == pytest.approx(1.0, abs=1e-9)


def test_balanis_example_5_1_single_turn() -> None:
    """Balanis, Antenna Theory, 4th ed., ex. 5.1 (memory). The algebra only: its perimeter is 0.25 wavelengths."""
    printed = 0.788  # ohm, three digits printed
    tolerance = 0.0005 / 0.788 + 0.0007  # its rounding, and its 120 pi for the impedance of space
    area = np.pi * (1.0 / 25.0) ** 2  # radius = wavelength / 25
    found = float(small_loop.radiation_resistance(area, 1, 1.0))
    assert found == pytest.approx(printed, rel=tolerance)


def test_balanis_example_5_1_eight_turns() -> None:
    """The same example with 8 turns prints 50.43 ohm (memory): the square of the turns."""
    area = np.pi * (1.0 / 25.0) ** 2
    found = float(small_loop.radiation_resistance(area, 8, 1.0))
    assert found == pytest.approx(50.43, rel=0.0014)


def test_radiation_goes_with_the_fourth_power_of_frequency() -> None:
    one = float(small_loop.radiation_resistance(0.785, 1, c / 7.1e6))
    assert float(small_loop.radiation_resistance(0.785, 1, c / 14.2e6)) == pytest.approx(16.0 * one)


def test_the_mean_square_of_a_cosine_by_quadrature() -> None:
    """The loss taper is the integral of cos^2 along the line over its value at the port."""
    for size in (0.05, 0.1, 0.25):
        x = np.pi * size
        nodes, weights = np.polynomial.legendre.leggauss(40)
        along = x * (nodes + 1.0) / 2.0
        mean = float(np.sum(weights / 2.0 * np.cos(along) ** 2))
        assert float(small_loop.loss_taper(x)) == pytest.approx(mean / np.cos(x) ** 2, rel=1e-12)


def test_the_slope_is_the_derivative_of_the_reactance() -> None:
    """(omega dX/domega + |X|) / 2|X| with X proportional to tan: by finite differences."""
    for size in (0.05, 0.15, 0.25):
        x, h = np.pi * size, 1e-6
        slope = x * (np.tan(x + h) - np.tan(x - h)) / (2.0 * h)
        wanted = (slope + np.tan(x)) / (2.0 * np.tan(x))
        assert float(small_loop.slope_taper(x)) == pytest.approx(wanted, rel=1e-8)


def test_a_perimeter_of_6_28_m_is_half_a_wavelength_at_23_9_mhz() -> None:
    """Common practice."""
    assert 6.28 * 23.9e6 / c == pytest.approx(0.5, abs=0.001)
    assert not small_loop.TAPERED_CURRENT.holds(6.28 * 23.9e6 / c)


def test_a_two_metre_ring_of_one_millimetre_wire_has_a_thickness_parameter_of_18_to_19() -> None:
    """Common practice."""
    found = float(small_loop.thickness_parameter(2.0 * np.pi * 1.0, 0.5e-3))
    assert 18.0 < found < 19.0


def test_small_loop_figures_hold_to_about_a_tenth_of_a_wavelength() -> None:
    """Common practice; the reference notes (section 3) tell volts within 0.3 % there and up to 10 % at 0.25."""

    def volts(size: float) -> float:
        """Peak volts without the taper over those with it, radiation alone."""
        x = np.pi * size
        tapered = small_loop.reactance_taper(x) / np.sqrt(small_loop.radiation_taper(x))
        return float(1.0 / tapered)

    assert volts(0.1) == pytest.approx(1.0, abs=0.02)
    assert volts(0.25) == pytest.approx(1.11, abs=0.01)
    assert small_loop.UNIFORM_CURRENT.holds(0.1)
    assert not small_loop.UNIFORM_CURRENT.holds(0.1001)


@given(size=st.floats(0.001, 0.25), thickness=st.floats(1e-4, 0.054))
def test_a_capacitance_across_the_port_leaves_q_of_a_loop_alone(size: float, thickness: float) -> None:
    """A small capacitance across a lossless port raises X by 1 + d and R by (1 + d)^2; volts at a power stay."""
    x = np.pi * size
    excess = small_loop.shunt_excess(x, small_loop.largest_shunt(thickness))
    loss, reactance, shunt = 1e-6, float(np.tan(x)), excess / (1.0 + excess) / float(np.tan(x))
    seen = 1.0 / (1.0 / (loss + 1j * reactance) + 1j * shunt)
    assert seen.imag == pytest.approx(reactance * (1.0 + excess), rel=1e-6)
    assert seen.real == pytest.approx(loss * (1.0 + excess) ** 2, rel=1e-6)


def test_the_published_full_wave_excess_lies_within_the_stated_one() -> None:
    """Reference notes, section 3: R at the port exceeds the closed form by these, X by half of it."""
    stated = {
        (0.1, 0.001): 0.011,
        (0.1, 0.022): 0.024,
        (0.1, 0.054): 0.039,
        (0.2, 0.001): 0.05,
        (0.2, 0.022): 0.10,
        (0.2, 0.054): 0.17,
        (0.25, 0.001): 0.08,
        (0.25, 0.022): 0.17,
        (0.25, 0.054): 0.28,
    }
    for (size, thickness), excess in stated.items():
        x = np.pi * size
        most = small_loop.shunt_excess(x, small_loop.largest_shunt(thickness))
        assert (1.0 + most) ** 2 >= 1.0 + excess, (size, thickness)


def test_half_power_points_lie_where_half_is_reflected() -> None:
    """The bandwidth between SWR 3 + 2 sqrt 2, where |reflection|^2 is a half, is 2 f/Q."""
    swr = 3.0 + 2.0 * np.sqrt(2.0)
    reflection = (swr - 1.0) / (swr + 1.0)
    assert reflection**2 == pytest.approx(0.5)
    assert float(tuned_circuit.swr_bandwidth_factor(swr)) == pytest.approx(2.0)


@given(power=st.floats(1e-3, 1e4), resistance=st.floats(1e-4, 10.0), reactance=st.floats(1.0, 1e3))
def test_the_power_goes_into_the_resistance(power: float, resistance: float, reactance: float) -> None:
    current = float(tuned_circuit.port_current(power, resistance))
    assert current**2 * resistance == pytest.approx(power, rel=1e-12)
    crest = float(tuned_circuit.peak_voltage(power, resistance, reactance))
    assert crest == pytest.approx(2.0**0.5 * current * reactance, rel=1e-12)


@given(size=st.floats(0.001, 0.25), shunt=st.floats(-0.07, 0.21))
def test_the_excess_is_that_of_the_capacitance_named(size: float, shunt: float) -> None:
    """A susceptance of `shunt` times x beside a reactance of tan x, in units of the line's impedance."""
    x = np.pi * size
    seen = 1.0 / (1.0 / (1j * np.tan(x)) + 1j * shunt * x)
    excess = small_loop.shunt_excess(x, shunt)
    assert seen.imag == pytest.approx(float(np.tan(x)) * (1.0 + excess), rel=1e-9)


def test_the_errors_stated_for_a_circle_cover_the_full_wave_comparison() -> None:
    """Reference notes, section 3, to 0.25 wavelengths: volts within 0.4 %, Q 0.7 %, efficiency up to 2 % too low."""
    circle = small_loop.closed_form_error(None)
    assert min(circle.voltage_below, circle.voltage_above) >= 0.004
    assert min(circle.quality_below, circle.quality_above) >= 0.007
    assert circle.efficiency_above >= 0.02
    assert circle.least_shunt < 0.0
    assert circle.corner == 0.0  # it has none


def test_sharper_corners_leave_more_open() -> None:
    """Fewer sides gather more charge at each corner: every error grows from the circle to the triangle."""
    shapes = [small_loop.closed_form_error(sides) for sides in (None, 12, 4, 3)]
    assert small_loop.closed_form_error(5) == small_loop.closed_form_error(24)
    for name in ("voltage_below", "quality_below", "efficiency_above", "corner"):
        values = [getattr(shape, name) for shape in shapes]
        assert values == sorted(values), name
        assert len(set(values)) == len(values), name
    shunts = [shape.least_shunt for shape in shapes]
    assert shunts == sorted(shunts, reverse=True)
    assert len(set(shunts)) == len(shunts)


def test_the_corner_of_a_square_covers_the_next_published_term() -> None:
    """Rosa & Grover, NBS Scientific Paper 169 (memory): L = 8 s (ln(s/a) + a/s - 0.524) in their units.

    The term in a/s, which the thin-wire form leaves out, is 2/pi in units of mu0 times the conductor radius.
    """
    assert small_loop.closed_form_error(4).corner >= 2.0 / np.pi


def test_a_capacitive_reactance_has_volts_and_q_like_an_inductive_one() -> None:
    assert float(tuned_circuit.peak_voltage(100.0, 0.04, -110.0)) == float(
        tuned_circuit.peak_voltage(100.0, 0.04, 110.0)
    )
    assert float(tuned_circuit.unloaded_q(0.04, -110.0, 1.0)) == pytest.approx(2750.0)


def test_a_range_has_two_ends_and_holds_no_missing_number() -> None:
    held = small_loop.TAPERED_CURRENT.holds
    assert held(0.0)
    assert held(0.25)
    assert not held(-1e-9)
    assert not held(0.2500001)
    assert not held(float("nan"))
