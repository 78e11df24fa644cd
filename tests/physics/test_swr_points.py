"""Q by two points of one standing-wave ratio: against the circuit through a line, closed forms, and worst cases."""

from itertools import product

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq
from synthetic_sweeps import KnownLoop

from magsafe.physics.swr_points import (
    Branch,
    PointsQ,
    at_the_loop,
    couplings,
    half_power_swr,
    q_of_swr_points,
    reflection_of,
    tuning_times_q,
)
from magsafe.physics.tuned_circuit import detuned_impedance, standing_wave_ratio
from magsafe.spread import Spread


def ratio_at(known: KnownLoop, frequency: float) -> float:
    """Return the standing-wave ratio that the analyser reads, by the circuit and the line."""
    at = np.array([frequency])
    size = float(np.abs(known.through_line(at, known.at_terminals(at)))[0])
    return (1.0 + size) / (1.0 - size)


def points_of(known: KnownLoop, swr: float) -> tuple[float, float]:
    """Return the frequencies of one ratio about the resonance, searched for on the circuit."""
    reach = 0.2 * known.resonance
    ends = (known.resonance - reach, known.resonance, known.resonance + reach)
    lower, upper = (brentq(lambda f: ratio_at(known, f) - swr, *pair, xtol=1e-6) for pair in (ends[:2], ends[1:]))
    return float(lower), float(upper)


def branch(found: PointsQ, known: KnownLoop) -> Branch:
    return found.overcoupled if known.coupling > 1.0 else found.undercoupled


@pytest.mark.parametrize("swr", [1.5, 2.0, 3.0])
@pytest.mark.parametrize("loss", [0.0, 1.0])
@pytest.mark.parametrize("coupling", [0.75, 0.9, 1.0, 1.1, 1.3])
@pytest.mark.parametrize("unloaded_q", [500.0, 4000.0])
def test_the_circuit_through_a_line(unloaded_q: float, coupling: float, loss: float, swr: float) -> None:
    known = KnownLoop(unloaded_q=unloaded_q, coupling=coupling, line_loss=loss, line_length=12.0)
    lowest = ratio_at(known, known.resonance)
    found = q_of_swr_points(*points_of(known, swr), swr, lowest, line_loss=Spread.exact(loss))
    right = branch(found, known)
    assert right.unloaded_q.likely == pytest.approx(unloaded_q, rel=2e-3)
    assert right.coupling.likely == pytest.approx(coupling, rel=1e-6)
    assert found.resonance.likely == pytest.approx(known.resonance, rel=0.05 / unloaded_q)
    other = found.undercoupled if right is found.overcoupled else found.overcoupled
    assert other.coupling.likely == pytest.approx(1.0 / coupling, rel=1e-6)


def test_one_decibel_of_line_makes_q_read_low_by_a_third() -> None:
    """SWR 2 is a reflection of 1/3 as read and of 0.4196 at the loop: x Q is 0.7071 and 0.9246 there, 1.308 apart."""
    known = KnownLoop(line_loss=1.0)
    lower, upper = points_of(known, 2.0)
    folded = q_of_swr_points(lower, upper, 2.0, 1.0).overcoupled.unloaded_q.likely
    unfolded = q_of_swr_points(lower, upper, 2.0, 1.0, line_loss=Spread.exact(1.0)).overcoupled.unloaded_q.likely
    assert folded == pytest.approx(1000.0 / 1.308, rel=1e-3)
    assert unfolded == pytest.approx(1000.0, rel=1e-3)


@pytest.mark.parametrize(("swr", "factor"), [(1.5, 0.408), (2.0, 0.7071), (3.0, 1.155), (3.0 + np.sqrt(8.0), 2.0)])
def test_a_matched_loop_has_the_published_widths(swr: float, factor: float) -> None:
    """(S - 1)/sqrt(S) f/Q: Yaghjian & Best, IEEE Transactions AP-53, 1298 (2005) (memory); 5.83 at half power."""
    found = q_of_swr_points(7.1e6 - 1e3, 7.1e6 + 1e3, swr, 1.0)
    assert found.overcoupled == found.undercoupled
    assert found.unloaded_q.likely is not None
    assert found.unloaded_q.likely * 2e3 / 7.1e6 == pytest.approx(factor, abs=5e-4)


def test_the_widest_band_is_three_quarters() -> None:
    """Feed level (S + 1/S)/2 gives (S^2 - 1)/2S = 0.75 for S = 2: Yaghjian & Best (memory)."""
    levels = np.linspace(1.01, 1.9, 2000)
    widths = tuning_times_q(1.0 / 3.0, levels)
    assert widths.max() == pytest.approx(0.75, abs=1e-6)
    assert levels[np.argmax(widths)] == pytest.approx(1.25, abs=1e-3)


@given(q=st.floats(100.0, 5000.0), level=st.floats(0.1, 10.0), offset=st.floats(0.002, 0.01), below=st.booleans())
def test_the_formula_is_that_of_a_series_circuit(q: float, level: float, offset: float, below: bool) -> None:
    frequency = 7.1e6
    away = -offset if below else offset
    swr = standing_wave_ratio(detuned_impedance(away * frequency, frequency, q), level)
    tuned = 1.0 + away
    assert float(tuning_times_q(reflection_of(swr), level)) == pytest.approx(q * abs(tuned - 1.0 / tuned), rel=1e-6)


def test_the_branches_differ_by_the_ratio_at_resonance() -> None:
    found = q_of_swr_points(7.09e6, 7.1e6, 3.0, 1.6)
    assert found.overcoupled.coupling.likely == pytest.approx(1.6)
    assert found.undercoupled.coupling.likely == pytest.approx(1.0 / 1.6)
    over, under = found.overcoupled.unloaded_q.likely, found.undercoupled.unloaded_q.likely
    assert over is not None
    assert under is not None
    assert over / under == pytest.approx(1.6)
    assert found.unloaded_q == Spread(under, None, over)


@pytest.mark.parametrize("coupling", [0.3, 0.8, 1.0, 1.5, 4.0])
@pytest.mark.parametrize("loss", [0.0, 0.4])
def test_half_power_points_of_the_circuit(coupling: float, loss: float) -> None:
    """Searched on what the loop takes, at its own terminals."""
    known = KnownLoop(coupling=coupling, line_loss=loss)

    def taken(frequency: float) -> float:
        return 1.0 - float(np.abs(known.at_terminals(np.array([frequency])))[0]) ** 2

    most = taken(known.resonance)
    lower, upper = (
        brentq(lambda f: taken(f) - 0.5 * most, known.resonance, known.resonance + end, xtol=1e-6)
        for end in (-1e5, 1e5)
    )
    lowest = ratio_at(known, known.resonance)
    assert ratio_at(known, lower) == pytest.approx(half_power_swr(lowest, loss), rel=5e-3)
    by_ratio = q_of_swr_points(lower, upper, half_power_swr(lowest, loss), lowest, line_loss=Spread.exact(loss))
    assert branch(by_ratio, known).unloaded_q.likely == pytest.approx(1000.0, rel=5e-3)


def test_matched_half_power_is_read_at_5_83() -> None:
    """3 + sqrt(8): reflection 1/sqrt(2), textbook."""
    assert half_power_swr(1.0) == pytest.approx(3.0 + np.sqrt(8.0))
    assert half_power_swr(1.0, 1.0) == pytest.approx((1.0 + 0.561675) / (1.0 - 0.561675), rel=1e-5)


# The ends --------------------------------------------------------------------------------------------------


@settings(max_examples=40, deadline=None)
@given(
    lowest=st.floats(1.0, 1.7),
    resolution=st.floats(0.0, 200.0),
    error=st.floats(0.0, 0.03),
    losses=st.tuples(st.floats(0.0, 1.0), st.floats(0.0, 1.0), st.floats(0.0, 1.0)).map(sorted),
    seed=st.integers(0, 1000),
)
def test_no_input_within_its_ends_leaves_the_ends_of_q(
    lowest: float, resolution: float, error: float, losses: list[float], seed: int
) -> None:
    lower, upper, swr = 7.095e6, 7.105e6, 2.5
    loss = Spread(*losses)
    found = q_of_swr_points(
        lower, upper, swr, lowest, line_loss=loss, frequency_resolution=resolution, reflection_error=error
    )
    draws = np.random.default_rng(seed).uniform(-1.0, 1.0, (4, 300))
    low, high = lower + resolution * draws[0], upper + resolution * draws[1]
    decibels = losses[0] + (losses[2] - losses[0]) * np.random.default_rng(seed + 1).uniform(0.0, 1.0, 300)
    away = (reflection_of(swr) + error * draws[2]) * 10.0 ** (decibels / 10.0)
    there = np.maximum(reflection_of(lowest) + error * draws[3], 0.0) * 10.0 ** (decibels / 10.0)
    for kappa, each in zip(couplings(there), (found.overcoupled, found.undercoupled), strict=True):
        q = tuning_times_q(away, kappa) / ((high - low) / np.sqrt(high * low))
        ends = each.unloaded_q
        assert ends.low is not None
        assert ends.high is not None
        assert ends.low * (1.0 - 1e-3) <= q.min()
        assert q.max() <= ends.high * (1.0 + 1e-3)
        assert each.coupling.low is not None
        assert each.coupling.low * (1.0 - 1e-9) <= kappa.min()
    middle = found.resonance
    assert middle.low is not None
    assert middle.high is not None
    assert (middle.low <= np.sqrt(low * high)).all()
    assert (np.sqrt(low * high) <= middle.high).all()


def test_the_ends_are_reached_and_no_wider() -> None:
    """Corners of all inputs, by hand."""
    found = q_of_swr_points(
        7.095e6,
        7.105e6,
        2.0,
        1.1,
        line_loss=Spread(0.2, 0.4, 0.6),
        frequency_resolution=50.0,
        reflection_error=0.01,
    )
    corners = []
    for a, b, c, d in product((-1.0, 1.0), (0.2, 0.6), (-1.0, 1.0), (-1.0, 1.0)):
        away = (1.0 / 3.0 + 0.01 * a) * 10.0 ** (b / 10.0)
        there = (0.1 / 2.1 + 0.01 * c) * 10.0 ** (b / 10.0)
        kappa = (1.0 + there) / (1.0 - there)
        width = 1e4 + 100.0 * d
        corners.append(float(tuning_times_q(away, kappa)) * np.sqrt(7.095e6 * 7.105e6) / width)
    assert found.overcoupled.unloaded_q.low == pytest.approx(min(corners), rel=1e-4)
    assert found.overcoupled.unloaded_q.high == pytest.approx(max(corners), rel=1e-4)
    assert found.resonance.low == pytest.approx(7.1e6 - 50.0, abs=2.0)


# What is refused -------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        ({"swr_at_resonance": 0.9}, "1 or more"),
        ({"swr_at_resonance": np.nan}, "1 or more"),
        ({"swr_at_resonance": 2.0}, "take points of a higher ratio"),
        ({"swr_at_resonance": 3.0}, "take points of a higher ratio"),
        ({"swr": np.inf}, "take points of a higher ratio"),
        ({"lower": 7.2e6}, "in order"),
        ({"lower": 0.0}, "above 0"),
        ({"upper": np.inf}, "in order"),
        ({"line_loss": Spread(-0.1, 0.0, 0.1)}, "0 dB or more"),
        ({"line_loss": Spread(0.0, None, 0.1)}, "all needed"),
        ({"line_loss": Spread(0.0, 1.0, 5.0)}, r"would be 1\.05 at the loop"),
        ({"line_loss": Spread.exact(6.0)}, "gives back less than 1"),
        ({"frequency_resolution": -1.0}, "resolution"),
        ({"frequency_resolution": 5e3}, "more finely"),
        ({"reflection_error": -0.1}, "0 or more and below 1"),
        ({"reflection_error": 0.2}, "ratio of the resonance"),
    ],
)
def test_readings_that_do_not_tell(changes: dict[str, object], said: str) -> None:
    readings: dict[str, object] = {"lower": 7.095e6, "upper": 7.105e6, "swr": 2.0, "swr_at_resonance": 1.2}
    with pytest.raises(ValueError, match=said):
        q_of_swr_points(**(readings | changes))  # type: ignore[arg-type]


def test_a_half_power_ratio_of_nonsense_is_refused() -> None:
    with pytest.raises(ValueError, match="1 or more"):
        half_power_swr(0.5)
    with pytest.raises(ValueError, match="0 dB or more"):
        half_power_swr(1.5, -1.0)
    with pytest.raises(ValueError, match="gives back less than 1"):
        half_power_swr(3.0, 4.0)


def test_three_decibels_double_the_reflection() -> None:
    np.testing.assert_allclose(at_the_loop(np.array([0.1, 0.2]), 10.0 * np.log10(2.0)), [0.2, 0.4])
