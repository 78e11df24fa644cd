"""Limits, conservation and order of open lines, sleeves and plates."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from magsafe.design import warmth_tables
from magsafe.physics.open_line import (
    Line,
    coaxial_capacitance,
    coaxial_field,
    coaxial_line,
    current_along,
    effective_capacitance,
    largest_voltage_ratio,
    open_impedance,
    plate_capacitance,
    trombone_impedance,
    voltage_along,
)

FREQUENCY = 7.1e6
OMEGA = 2.0 * np.pi * FREQUENCY
INNER, OUTER = 1.12e-3, 3.62e-3


def cable(tangent: float = 2e-4, inner: float = 58e6, outer: float = 14.5e6, frequency: float = FREQUENCY) -> Line:
    return coaxial_line(frequency, INNER, OUTER, 2.26, tangent, inner, outer)


def quarter(line: Line) -> float:
    return float(np.pi / 2.0 / line.propagation.imag)


@pytest.mark.parametrize("length", [0.02, 0.1, 0.3])
def test_a_short_line_has_a_third_of_its_resistance_and_the_loss_of_its_dielectric(length: float) -> None:
    """R'l/3 + tan delta/(omega C'l): the current falls evenly to the open end."""
    line = cable()
    found = float(open_impedance(line, length).real)
    capacitance = float(coaxial_capacitance(INNER, OUTER, 2.26)) * length
    wanted = float(line.series_impedance.real) * length / 3.0 + 2e-4 / (OMEGA * capacitance)
    angle = float(line.propagation.imag) * length
    assert found == pytest.approx(wanted, rel=angle**2)
    assert float(effective_capacitance(FREQUENCY, open_impedance(line, length))) == pytest.approx(
        capacitance, rel=0.4 * angle**2
    )


@given(share=st.floats(0.02, 1.9), tangent=st.floats(0.0, 0.05), conductivity=st.floats(1e5, 6e7))
def test_what_goes_in_is_lost_along_the_line(share: float, tangent: float, conductivity: float) -> None:
    """Re Z |I|^2 against the integral of R'|I|^2 + G'|V|^2, by Gauss and Legendre."""
    line = cable(tangent, conductivity)
    length = share * quarter(line)
    impedance = complex(open_impedance(line, length))
    points, weights = np.polynomial.legendre.leggauss(60)
    along = 0.5 * length * (points + 1.0)
    current = np.abs(current_along(line, length, along)) ** 2
    voltage = np.abs(impedance * voltage_along(line, length, along)) ** 2
    lost = line.series_impedance.real * current + line.shunt_admittance.real * voltage
    assert 0.5 * length * float(np.sum(weights * lost)) == pytest.approx(impedance.real, rel=1e-8)


def test_volts_and_amperes_obey_the_line() -> None:
    """Their slopes: dV/dx = -z I and dI/dx = -y V; nothing flows at the open end."""
    line, length, step = cable(), 5.0, 1e-4
    impedance = complex(open_impedance(line, length))
    for at in (0.5, 2.0, 4.5):
        ends = np.array([at - step, at + step])
        fall = np.diff(impedance * voltage_along(line, length, ends))[0] / (2.0 * step)
        assert complex(fall) == pytest.approx(
            complex(-line.series_impedance * current_along(line, length, at)), rel=1e-6
        )
        leak = np.diff(current_along(line, length, ends))[0] / (2.0 * step)
        volts = impedance * voltage_along(line, length, at)
        assert complex(leak) == pytest.approx(complex(-line.shunt_admittance * volts), rel=1e-6)
    assert complex(current_along(line, length, length)) == 0.0
    assert complex(current_along(line, length, 0.0)) == pytest.approx(1.0, rel=1e-12)
    assert complex(voltage_along(line, length, 0.0)) == pytest.approx(1.0, rel=1e-12)


@given(share=st.floats(0.01, 1.95), tangent=st.floats(0.0, 0.1), conductivity=st.floats(1e3, 6e7))
def test_no_point_has_more_volts_than_the_highest(share: float, tangent: float, conductivity: float) -> None:
    line = cable(tangent, conductivity)
    length = share * quarter(line)
    highest = float(largest_voltage_ratio(line, length))
    along = np.abs(voltage_along(line, length, np.linspace(0.0, length, 301)))
    assert np.all(along <= highest * (1.0 + 1e-12))
    assert highest == pytest.approx(float(np.max(along)), rel=1e-12)
    assert highest >= 1.0


def test_the_open_end_of_a_lossless_line_has_its_volts_over_a_cosine() -> None:
    line = cable(0.0, 1e16, 1e16)
    for share in (0.1, 0.5, 0.9, 1.5):
        length = share * quarter(line)
        wanted = max(1.0, 1.0 / abs(np.cos(share * np.pi / 2.0)))
        assert float(largest_voltage_ratio(line, length)) == pytest.approx(wanted, rel=1e-4)


tangents = st.floats(0.0, 0.1)
lengths = st.floats(0.01, 6.5)  # to a quarter of the wavelength on it
conductivities = st.floats(1e6, 6e7)


@given(one=tangents, other=tangents, length=lengths)
def test_a_better_dielectric_never_loses_more(one: float, other: float, length: float) -> None:
    better, worse = (float(open_impedance(cable(t), length).real) for t in sorted((one, other)))
    assert better <= worse * (1.0 + 1e-9)


@given(one=conductivities, other=conductivities, length=lengths)
def test_a_better_conductor_never_loses_more(one: float, other: float, length: float) -> None:
    worse, better = (float(open_impedance(cable(2e-4, s, s), length).real) for s in sorted((one, other)))
    assert better <= worse * (1.0 + 1e-9)


@given(one=st.floats(0.05, 6.5), other=st.floats(0.05, 6.5))
def test_a_longer_stub_has_more_capacitance(one: float, other: float) -> None:
    short, long = (
        float(effective_capacitance(FREQUENCY, open_impedance(cable(), length))) for length in sorted((one, other))
    )
    assert long >= short * (1.0 - 1e-12)


def test_beyond_a_quarter_wave_it_is_no_capacitor_and_beyond_a_half_wave_its_crest_is_unknown() -> None:
    line = cable()
    with pytest.raises(ValueError, match="quarter"):
        effective_capacitance(FREQUENCY, open_impedance(line, 1.1 * quarter(line)))
    with pytest.raises(ValueError, match="half"):
        largest_voltage_ratio(line, 2.1 * quarter(line))


def test_a_trombone_is_two_sleeves_in_series() -> None:
    line = cable()
    one, both = open_impedance(line, 0.4), trombone_impedance(line, 0.4)
    assert complex(both) == pytest.approx(complex(one + one), rel=1e-15)


def test_a_narrow_sleeve_is_plates_rolled_up() -> None:
    """ln(b/a) to (b - a)/radius; field V/(b - a)."""
    inner, outer = 0.0500, 0.0501
    area = 2.0 * np.pi * 0.05005
    assert float(coaxial_capacitance(inner, outer, 2.1)) == pytest.approx(
        float(plate_capacitance(area, outer - inner, 2.1)), rel=1e-5
    )
    assert float(coaxial_field(1e3, inner, outer)) == pytest.approx(1e3 / (outer - inner), rel=2e-3)


def test_arrays_give_what_their_elements_give() -> None:
    frequencies, lengths_ = np.array([3.6e6, 7.1e6]), np.array([[0.5], [1.0], [2.0]])
    line = coaxial_line(frequencies, INNER, OUTER, 2.26, 2e-4, 58e6, 14.5e6)
    together = open_impedance(line, lengths_)
    ends = largest_voltage_ratio(line, lengths_)
    assert together.shape == ends.shape == (3, 2)
    for i, length in enumerate(lengths_.ravel()):
        for j, frequency in enumerate(frequencies):
            alone = cable(frequency=float(frequency))
            assert complex(together[i, j]) == pytest.approx(complex(open_impedance(alone, length)), rel=1e-12)
            assert float(ends[i, j]) == pytest.approx(float(largest_voltage_ratio(alone, length)), rel=1e-12)


@pytest.mark.parametrize(("inner", "outer"), [(0.0, 1e-3), (2e-3, 1e-3), (1e-3, 1e-3), (np.nan, 1e-3)])
def test_a_cable_without_room_is_refused(inner: float, outer: float) -> None:
    for formula in (
        lambda: coaxial_capacitance(inner, outer, 2.26),
        lambda: coaxial_field(1.0, inner, outer),
        lambda: coaxial_line(FREQUENCY, inner, outer, 2.26, 2e-4, 58e6, 58e6),
    ):
        with pytest.raises(ValueError, match="smaller than the outer"):
            formula()


def test_the_table_of_dielectrics_is_of_this_world() -> None:
    for name, row in warmth_tables.dielectrics().items():
        for spread, low, high in (
            (row.permittivity, 1.0, 12.0),
            (row.loss_tangent, 5e-5, 0.1),
            (row.strength, 5e6, 3e8),
        ):
            assert spread.low is not None, name
            assert spread.high is not None, name
            assert low < spread.low < spread.high < high, name
        assert row.provenance in ("seen", "memory"), name
