"""Matching networks held against nodal analysis, energy, brute force and waves counted one by one."""

import numpy as np
import pytest
from scipy.constants import speed_of_light
from scipy.optimize import minimize_scalar

from magsafe.physics import matching
from magsafe.physics.tuned_circuit import standing_wave_ratio

LOOPS = (
    (0.0504 + 109.24j, 7.1e6, 50.0),
    (0.155 + 218.46j, 14.2e6, 50.0),
    (0.098 + 193.2j, 3.6e6, 50.0),
    (5.6 + 900.0j, 28.5e6, 75.0),
    (0.9 + 40.0j, 10.1e6, 600.0),
)


def seen(match: matching.CapacitorMatch, parallel: float, quality: float = np.inf) -> complex:
    """Impedance at the feed: the capacitors as impedances."""
    omega = 2.0 * np.pi * match.frequency
    across = 1.0 / (1.0 / match.loop + 1j * omega * parallel)
    return complex(across - 1j / (omega * match.series) + 1.0 / (omega * match.series * quality))


@pytest.mark.parametrize(("loop", "frequency", "line"), LOOPS)
def test_both_capacitors_make_the_lines_impedance(loop: complex, frequency: float, line: float) -> None:
    match = matching.capacitor_match(loop, frequency, line)
    assert match.parallel > 0.0
    assert match.series > 0.0
    assert abs(seen(match, match.parallel) / line - 1.0) < 1e-9


@pytest.mark.parametrize(("loop", "frequency", "line"), LOOPS)
def test_all_the_power_goes_into_the_loop(loop: complex, frequency: float, line: float) -> None:
    """Kirchhoff: the series capacitor's current divides between loop and parallel capacitor."""
    match, power = matching.capacitor_match(loop, frequency, line), 100.0
    omega = 2.0 * np.pi * frequency
    current = float(match.series_current(power))
    voltage = current / (1.0 / loop + 1j * omega * match.parallel)
    assert abs(voltage / loop) ** 2 * loop.real == pytest.approx(power, rel=1e-9)
    assert np.sqrt(2.0) * abs(voltage) == pytest.approx(float(match.parallel_voltage(power)), rel=1e-9)
    assert np.sqrt(2.0) * current / (omega * match.series) == pytest.approx(
        float(match.series_voltage(power)), rel=1e-9
    )
    # The feed's own volts close the triangle of the two, at right angles to the capacitor's.
    feed = np.sqrt(2.0 * power * line)
    assert np.hypot(feed, float(match.series_voltage(power))) == pytest.approx(
        float(match.parallel_voltage(power)), rel=1e-9
    )


def test_the_series_capacitor_sees_nearly_all_of_the_loops_voltage() -> None:
    """Reference loop A, 22 mm copper, 1 m, R = 0.05 ohm at 7.1 MHz, 100 W: 6.9 kV peak and 1.4 A (computed)."""
    match = matching.capacitor_match(0.0504 + 109.24j, 7.1e6, 50.0)
    assert float(match.series_voltage(100.0)) == pytest.approx(6.9e3, rel=0.01)
    assert float(match.series_current(100.0)) == pytest.approx(1.414, rel=1e-3)
    assert 0.999 < float(match.series_voltage(100.0) / match.parallel_voltage(100.0)) < 1.0


def test_a_balanced_feed_has_twice_the_capacitance_and_half_the_volts() -> None:
    match = matching.capacitor_match(0.0504 + 109.24j, 7.1e6, 50.0)
    omega = 2.0 * np.pi * match.frequency
    each = 1.0 / (omega * match.balanced_series)
    assert 2.0 * each == pytest.approx(match.series_reactance, rel=1e-12)
    assert float(match.balanced_voltage(100.0)) == pytest.approx(np.sqrt(2.0) * np.sqrt(2.0) * each, rel=1e-9)


@pytest.mark.parametrize("quality", [200.0, 2000.0])
def test_a_lossy_series_capacitor_takes_its_share(quality: float) -> None:
    match = matching.capacitor_match(0.155 + 218.46j, 14.2e6, 50.0)
    whole = seen(match, match.parallel, quality)
    share = float(match.series_loss(quality))
    assert share == pytest.approx(1.0 - 50.0 / whole.real, rel=1e-6)
    assert whole.real == pytest.approx(50.0 / (1.0 - share), rel=1e-9)
    assert share == pytest.approx(match.series_reactance / quality / 50.0, rel=1.1 * share)


@pytest.mark.parametrize("factor", [0.2, 0.6, 1.0, 1.5, 4.0])
def test_a_fixed_series_capacitor_reaches_what_brute_force_finds(factor: float) -> None:
    """The lowest SWR over the parallel capacitor, as the loop's resistance moves."""
    match = matching.capacitor_match(0.155 + 218.46j, 14.2e6, 50.0)
    changed = matching.CapacitorMatch(14.2e6, factor * 0.155 + 218.46j, 50.0, match.parallel, match.series)
    around = match.parallel + np.linspace(-2e-12, 2e-12, 40_001)
    ratios = standing_wave_ratio(np.array([seen(changed, each) for each in around]), 50.0)
    found = float(matching.retuned_standing_wave_ratio(changed.loop, match.series_reactance, 50.0))
    assert found == pytest.approx(float(ratios.min()), rel=1e-5)
    at = float(matching.retuned_parallel(changed.loop, match.series_reactance, 50.0, 14.2e6))
    assert at == pytest.approx(float(around[ratios.argmin()]), abs=2e-16)
    assert found == pytest.approx(max(factor, 1.0 / factor), rel=1e-5)


def test_what_two_capacitors_do_not_match_is_refused() -> None:
    for loop, words in (
        (0.1 - 20.0j, "expected an inductive one"),
        (0.0 + 20.0j, "expected an inductive one"),
        (complex(np.nan, 20.0), "expected an inductive one"),
        (20.0 + 5.0j, "no more than the line's 50 ohm"),
        (60.0 + 90.0j, "it takes an inductor across it"),
    ):
        with pytest.raises(ValueError, match=words):
            matching.capacitor_match(loop, 14.2e6, 50.0)
    for frequency, line in ((0.0, 50.0), (14.2e6, -50.0), (np.inf, 50.0)):
        with pytest.raises(ValueError, match="expected numbers above zero"):
            matching.capacitor_match(0.155 + 218.46j, frequency, line)


@pytest.mark.parametrize(
    ("loop", "words"),
    [
        (20.0 + 24.0j, "across its port"),
        (20.0 + 25.0j, None),
        (49.0 + 90.0j, None),
        (51.0 + 90.0j, "takes an inductor"),
    ],
)
def test_where_a_match_ends_brute_force_finds_none_either(loop: complex, words: str | None) -> None:
    """The series resistance passes the line's with reactance left for a series capacitor, or it does not."""
    loaded = 1.0 / (1.0 / loop + 1j * np.linspace(0.0, 0.05, 200_001))
    crossing = (np.diff(np.sign(loaded.real - 50.0)) != 0) & (loaded.imag[1:] > 0.0)
    assert bool(crossing.any()) == (words is None)
    if words is None:
        assert matching.capacitor_match(loop, 14.2e6, 50.0).parallel > 0.0
    else:
        with pytest.raises(ValueError, match=words):
            matching.capacitor_match(loop, 14.2e6, 50.0)


def test_a_quarter_wave_of_75_ohm_line_brings_112_ohm_to_50() -> None:
    """By hand: 75^2/112 = 50.223 ohm, SWR 1.0045 instead of 2.24."""
    assert float(standing_wave_ratio(112.0 + 0j, 50.0)) == pytest.approx(2.24, rel=1e-12)
    assert float(matching.quarter_wave_impedance(112.0, 50.0)) == pytest.approx(74.833, rel=1e-5)
    through = complex(matching.impedance_through_line(112.0 + 0j, 75.0, 1.0))
    assert through == pytest.approx(75.0**2 / 112.0, rel=1e-12)
    assert float(standing_wave_ratio(through, 50.0)) == pytest.approx(75.0**2 / 112.0 / 50.0, rel=1e-9)


def test_a_quarter_wave_inverts_any_impedance() -> None:
    load = 80.0 - 45.0j
    assert complex(matching.impedance_through_line(load, 75.0, 1.0)) == pytest.approx(75.0**2 / load, rel=1e-12)
    assert complex(matching.impedance_through_line(load, 75.0, 3.0)) == pytest.approx(75.0**2 / load, rel=1e-12)
    assert complex(matching.impedance_through_line(load, 75.0, 2.0)) == pytest.approx(load, rel=1e-12)
    assert complex(matching.impedance_through_line(load, 75.0, 0.0)) == load


def test_a_line_turns_the_reflection_and_keeps_its_magnitude() -> None:
    """Lossless line: reflection factor times exp(-2j beta l); short and open ends by their tangents."""
    load, line, quarters = 112.0 + 30.0j, 75.0, np.array([0.3, 0.9, 1.0, 1.1, 1.7])
    through = matching.impedance_through_line(load, line, quarters)
    reflection = (load - line) / (load + line) * np.exp(-1j * np.pi * quarters)
    np.testing.assert_allclose((through - line) / (through + line), reflection, rtol=1e-12)
    shorted = matching.impedance_through_line(0j, line, 0.5)
    assert complex(shorted) == pytest.approx(75.0j, rel=1e-12)


def test_a_quarter_wave_is_as_long_as_the_line_is_slow() -> None:
    """14.2 MHz, velocity factor 0.66: 3.483 m by hand."""
    assert float(matching.quarter_wave_length(14.2e6, 0.66)) == pytest.approx(3.4835, rel=1e-4)
    assert float(matching.quarter_wave_length(14.2e6, 1.0)) == pytest.approx(speed_of_light / 14.2e6 / 4.0)


def test_a_transformer_divides_the_impedance() -> None:
    """Turns 3:2, 112 ohm: 49.8 ohm; its SWR on 50 ohm 1.004."""
    assert complex(matching.impedance_through_transformer(112.0 + 9.0j, 2.25)) == pytest.approx((112.0 + 9.0j) / 2.25)
    ratio = standing_wave_ratio(complex(matching.impedance_through_transformer(112.0 + 0j, 2.0)), 50.0)
    assert float(ratio) == pytest.approx(1.12, rel=1e-9)


def test_mismatch_costs_what_the_tables_say() -> None:
    """Handbook tables (common practice): 0.18 dB at SWR 1.5, 0.51 dB at 2, 1.25 dB at 3, 4.81 dB at 10."""
    lost = -10.0 * np.log10(matching.mismatch_share(np.array([1.0, 1.5, 2.0, 3.0, 10.0])))
    np.testing.assert_allclose(lost, [0.0, 0.18, 0.51, 1.25, 4.81], atol=0.005)
    reflection = standing_wave_ratio(20.0 + 70.0j, 50.0)
    magnitude = abs((20.0 + 70.0j - 50.0) / (20.0 + 70.0j + 50.0))
    assert float(matching.mismatch_share(reflection)) == pytest.approx(1.0 - magnitude**2, rel=1e-9)


@pytest.mark.parametrize("decibels", [0.05, 0.5, 3.0])
@pytest.mark.parametrize("load", [20.0 + 0j, 112.0 + 40.0j, 5.0 - 80.0j])
def test_a_lossy_line_gives_what_its_equations_give(decibels: float, load: complex) -> None:
    """Telegraph equations of a line with loss: voltage and current along it, power from their product."""
    matched = 10.0 ** (-decibels / 10.0)
    gamma = 0.5 * np.log(1.0 / matched) + 2.3j  # over the whole line
    near_volts = np.cosh(gamma) + 50.0 / load * np.sinh(gamma)
    near_amps = np.sinh(gamma) / 50.0 + np.cosh(gamma) / load
    taken = (1.0 / load).real
    entering = (near_volts * np.conj(near_amps)).real
    reflection = abs((load - 50.0) / (load + 50.0))
    tuned = float(matching.share_through_line(matched, reflection, tuned=True))
    assert tuned == pytest.approx(float(taken / entering), rel=1e-9)
    # A source of 50 ohm: its available power is |E|^2 / (4 * 50).
    available = abs(near_volts + 50.0 * near_amps) ** 2 / 200.0
    plain = float(matching.share_through_line(matched, reflection, tuned=False))
    assert plain == pytest.approx(float(taken / available), rel=1e-9)
    assert plain < tuned < matched


def test_waves_that_go_back_and_forth_sum_to_the_tuned_share() -> None:
    """Each wave counted: what comes back to the tuner is what a tuner without loss sends out again, in phase."""
    matched, back = 0.7, 0.6
    # A tuner that takes in all the power has, for waves from the line, the reflection that they meet there.
    again = back * matched
    forward = sum(again ** (2 * trip) for trip in range(200))  # amplitudes, over the first wave's
    first = 1.0 - again**2  # power of the first wave: what such a tuner lets through
    taken = first * forward**2 * matched * (1.0 - back**2)
    assert float(matching.share_through_line(matched, back, tuned=True)) == pytest.approx(taken, rel=1e-12)


def test_the_ends_of_a_lines_shares() -> None:
    assert float(matching.share_through_line(0.8, 0.0, tuned=True)) == 0.8
    assert float(matching.share_through_line(0.8, 0.0, tuned=False)) == 0.8
    assert float(matching.share_through_line(1.0, 0.6, tuned=True)) == pytest.approx(1.0)
    assert float(matching.share_through_line(1.0, 0.6, tuned=False)) == pytest.approx(0.64)
    assert float(matching.share_through_line(1.0, 1.0, tuned=True)) == 0.0
    for share, back, words in (
        (1.1, 0.0, "matched share is 1.1"),
        (0.5, -0.1, "reflection is -0.1"),
        (np.nan, 0, "nan"),
    ):
        with pytest.raises(ValueError, match=words):
            matching.share_through_line(share, back, tuned=True)


def test_a_tuner_at_the_transmitter_brings_the_most_power() -> None:
    """Brute force: whatever reactance and transformer stand at the near end, no more arrives."""
    matched, load = 0.6, 20.0 + 30.0j
    gamma = 0.5 * np.log(1.0 / matched) + 1.1j
    near = 50.0 * (load + 50.0 * np.tanh(gamma)) / (50.0 + load * np.tanh(gamma))
    ratio = (1.0 / load).real / (
        (np.cosh(gamma) + 50.0 / load * np.sinh(gamma)) * np.conj(np.sinh(gamma) / 50.0 + np.cosh(gamma) / load)
    ).real

    def arrives(logarithm: float) -> float:
        turned = near.real * np.exp(logarithm)
        return -float(4.0 * 50.0 * turned / (50.0 + turned) ** 2 * ratio)

    best = -float(minimize_scalar(arrives, bounds=(-3.0, 3.0), method="bounded", options={"xatol": 1e-9}).fun)
    reflection = abs((load - 50.0) / (load + 50.0))
    assert float(matching.share_through_line(matched, reflection, tuned=True)) == pytest.approx(best, rel=1e-9)
