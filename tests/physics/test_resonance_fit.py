"""A resonance fitted to a sweep: against known circuits, another library's fit, symmetries, and when there is none."""

import time
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from synthetic_sweeps import KnownLoop

from magsafe.physics.arrays import Array, ComplexArray
from magsafe.physics.resonance_fit import LONGEST_DELAY, ResonanceFit, fit_resonance

QS = (500.0, 1000.0, 4000.0)
COUPLINGS = (0.5, 1.0, 2.0)
LINES = ((0.0, 0.0), (10.0, 1.0), (30.0, 3.0))


def fit(known: KnownLoop, seed: int = 0, **options: Any) -> ResonanceFit:
    return fit_resonance(*known.sweep(seed), **options)


# Known circuits --------------------------------------------------------------------------------------------


@pytest.mark.parametrize("line", LINES)
@pytest.mark.parametrize("coupling", COUPLINGS)
@pytest.mark.parametrize("unloaded_q", QS)
def test_a_clean_sweep_tells_the_circuit(unloaded_q: float, coupling: float, line: tuple[float, float]) -> None:
    known = KnownLoop(unloaded_q=unloaded_q, coupling=coupling, line_length=line[0], line_loss=line[1])
    found = fit(known)
    assert found.unloaded_q.value == pytest.approx(unloaded_q, rel=1e-4)
    assert found.loaded_q.value == pytest.approx(known.loaded_q, rel=1e-4)
    assert found.coupling.value == pytest.approx(coupling, rel=1e-4)
    assert found.loss.value == pytest.approx(line[1], abs=1e-4)
    assert found.delay == pytest.approx(2.0 * line[0] / 299_792_458.0, abs=1e-9)
    assert found.resonance.value == pytest.approx(known.resonance, rel=0.02 / unloaded_q)
    assert found.bandwidth == pytest.approx(known.resonance / known.loaded_q, rel=1e-4)
    assert abs(found.lean) < 1e-2
    assert found.residual < 1e-4
    assert found.points_in_band == pytest.approx(known.points / known.span, abs=1.0)
    assert found.points == known.points
    assert not found.delay_held
    assert not found.notes


@pytest.mark.parametrize("reactance", [-50.0, -20.0, 20.0, 50.0, 100.0])
@pytest.mark.parametrize("coupling", COUPLINGS)
@pytest.mark.parametrize("unloaded_q", QS)
def test_a_coupling_loops_reactance_stays_within_the_stated_ends(
    unloaded_q: float, coupling: float, reactance: float
) -> None:
    known = KnownLoop(unloaded_q=unloaded_q, coupling=coupling, coupling_reactance=reactance, line_length=10.0)
    found = fit(known)
    assert found.unloaded_q.value == pytest.approx(unloaded_q, rel=0.02)
    assert found.unloaded_q.low < unloaded_q < found.unloaded_q.high
    assert found.coupling.low < coupling < found.coupling.high
    assert found.resonance.value == pytest.approx(known.loaded_resonance, rel=0.02 / unloaded_q)
    assert found.unloaded_q.above < 0.015 * unloaded_q


def test_the_curve_is_the_sweep_and_the_circle_at_the_terminals() -> None:
    known = KnownLoop(coupling=1.7, line_length=15.0, line_loss=1.3)
    frequency, reflection = known.sweep()
    found = fit_resonance(frequency, reflection)
    np.testing.assert_allclose(found.curve(frequency), reflection, atol=2e-5)
    # Ideal coupling: far off, the circuit gives back -1, which the fit turns to 1.
    np.testing.assert_allclose(found.at_terminals(frequency), -known.at_terminals(frequency), atol=5e-3)
    assert abs(found.at_terminals(found.resonance.value)) == pytest.approx(0.7 / 2.7, abs=1e-4)
    assert found.curve(frequency[:3].reshape(3, 1)).shape == (3, 1)


@pytest.mark.parametrize("span", [1.2, 3.0, 8.0, 60.0, 150.0])
def test_the_span_does_not_matter(span: float) -> None:
    assert fit(KnownLoop(span=span, line_length=5.0)).unloaded_q.value == pytest.approx(1000.0, rel=1e-3)


def test_a_sweep_by_equal_ratios_is_as_good() -> None:
    known = KnownLoop()
    even = known.frequencies()
    frequency = np.geomspace(even[0], even[-1], 300)
    reflection = known.through_line(frequency, known.at_terminals(frequency))
    assert fit_resonance(frequency, reflection).unloaded_q.value == pytest.approx(1000.0, rel=1e-4)


@pytest.mark.parametrize("unloaded_q", [200.0, 500.0, 1000.0])
def test_a_ripple_across_a_wide_sweep_does_not_hide_the_dip(unloaded_q: float) -> None:
    """From 1 to 30 MHz, 5 % of ripple by a mismatch at the far end of 30 m, and a stray point."""
    known = KnownLoop(unloaded_q=unloaded_q, coupling=1.3, coupling_reactance=30.0, line_length=20.0, line_loss=1.0)
    frequency = np.linspace(1e6, 30e6, 20_001)
    clean = known.through_line(frequency, known.at_terminals(frequency))
    scatter = 0.005 * np.random.default_rng(0).standard_normal((2, frequency.size))
    reflection = clean * (1.0 + 0.05 * np.cos(2.0 * np.pi * frequency * 2e-7)) + scatter[0] + 1j * scatter[1]
    reflection[1234] = 0.1
    found = fit_resonance(frequency, reflection, 0.02)
    assert found.resonance.value == pytest.approx(known.loaded_resonance, rel=0.1 / unloaded_q)
    assert found.unloaded_q.low < unloaded_q < found.unloaded_q.high
    assert found.unloaded_q.high < 1.15 * unloaded_q


# Noise -----------------------------------------------------------------------------------------------------


def standardised(known: KnownLoop, cases: int) -> tuple[Array, float]:
    """Return the errors of Q over their standard uncertainties, and the share within the 95 % interval by noise."""
    found = [fit(known, seed).unloaded_q for seed in range(cases)]
    errors = np.array([(each.value - known.unloaded_q) / each.uncertainty for each in found])
    within = [abs(each.value - known.unloaded_q) <= each.noise for each in found]
    return errors, float(np.mean(within))


@pytest.mark.parametrize(
    "known",
    [
        KnownLoop(noise=0.02),
        KnownLoop(noise=0.01, coupling=2.0, line_length=10.0, line_loss=1.0),
        KnownLoop(noise=0.005, coupling=0.5, span=3.0, unloaded_q=4000.0),
        KnownLoop(noise=0.02, unloaded_q=500.0, span=40.0, line_length=30.0),
    ],
    ids=["matched", "overcoupled", "undercoupled", "wide"],
)
def test_the_interval_by_noise_holds_the_true_q(known: KnownLoop) -> None:
    """200 sweeps: at least 90 % hold it, and not all of them by far; the errors scatter by one uncertainty."""
    errors, within = standardised(known, 200)
    assert 0.90 <= within <= 0.999
    assert np.sqrt(np.mean(errors**2)) == pytest.approx(1.0, abs=0.17)
    assert abs(np.mean(errors)) < 0.25


@settings(max_examples=25, deadline=None)
@given(
    unloaded_q=st.floats(500.0, 4000.0),
    coupling=st.floats(0.5, 2.0),
    noise=st.floats(0.0, 0.02),
    length=st.floats(0.0, 30.0),
    loss=st.floats(0.0, 3.0),
    seed=st.integers(0, 10_000),
)
def test_any_usual_loop_is_found(
    unloaded_q: float, coupling: float, noise: float, length: float, loss: float, seed: int
) -> None:
    known = KnownLoop(unloaded_q=unloaded_q, coupling=coupling, line_length=length, line_loss=loss, noise=noise)
    found = fit(known, seed)
    assert abs(found.unloaded_q.value - unloaded_q) <= 5.0 * found.unloaded_q.uncertainty + 1e-3 * unloaded_q
    assert found.unloaded_q.uncertainty < 0.04 * unloaded_q


@pytest.mark.parametrize("span", [1.3, 8.0])
def test_every_figure_scatters_by_its_uncertainty(span: float) -> None:
    """Of a narrow sweep, a and b are known together much better than each."""
    known = KnownLoop(noise=0.01, coupling=1.5, line_loss=1.0, line_length=8.0, span=span)
    fits = [fit(known, seed) for seed in range(120)]
    for name in ("resonance", "loaded_q", "unloaded_q", "coupling", "loss"):
        found = [getattr(each, name) for each in fits]
        scatter = np.std([each.value for each in found])
        assert scatter == pytest.approx(np.mean([each.uncertainty for each in found]), rel=0.2), name
    scatter = np.std([each.delay for each in fits])
    assert scatter == pytest.approx(np.mean([each.delay_uncertainty for each in fits]), rel=0.2)


def test_the_uncertainty_goes_as_noise_over_root_of_points() -> None:
    base = fit(KnownLoop(noise=0.01, points=400)).unloaded_q.uncertainty
    assert fit(KnownLoop(noise=0.001, points=400)).unloaded_q.uncertainty == pytest.approx(0.1 * base, rel=0.15)
    assert fit(KnownLoop(noise=0.01, points=40_000)).unloaded_q.uncertainty == pytest.approx(0.1 * base, rel=0.15)


def test_the_residual_is_the_noise_of_a_point() -> None:
    found = fit(KnownLoop(noise=0.013, points=100_000))
    assert found.residual == pytest.approx(0.013, rel=0.02)
    assert abs(found.correlation) < 0.05


def test_points_that_are_alike_tell_less() -> None:
    """Each scatter kept for five points: the interval of 401 points is that of about 80."""
    known = KnownLoop(points=400)
    frequency, reflection = known.sweep()
    errors = []
    for seed in range(60):
        draws = np.random.default_rng(seed).standard_normal((2, 80)) * 0.01
        found = fit_resonance(frequency, reflection + np.repeat(draws[0] + 1j * draws[1], 5)).unloaded_q
        errors.append((found.value - 1000.0) / found.uncertainty)
    assert 0.5 < np.sqrt(np.mean(np.square(errors))) < 1.15


@pytest.mark.parametrize("phase", [0.0, 1.0, 2.0, 3.0, 4.0, 5.0])
@pytest.mark.parametrize("unloaded_q", [100.0, 300.0])
def test_a_ripple_that_the_curve_does_not_follow_is_in_the_ends(unloaded_q: float, phase: float) -> None:
    """5 % by a mismatch, no noise: neighbours are alike in what is left, so the ends widen twice."""
    known = KnownLoop(unloaded_q=unloaded_q, coupling=1.3, line_length=20.0, line_loss=1.0, span=14.0, points=801)
    frequency, reflection = known.sweep()
    found = fit_resonance(frequency, reflection * (1.0 + 0.05 * np.cos(2.0 * np.pi * frequency * 2e-7 + phase)))
    assert found.unloaded_q.low < unloaded_q < found.unloaded_q.high
    assert found.correlation > 0.9
    left = found.residual * np.sqrt(found.correlation)
    assert found.loss.above == pytest.approx(-10.0 * np.log10(1.0 - left / abs(found.far_off)), rel=1e-6)


# What the analyser does ------------------------------------------------------------------------------------


@pytest.mark.parametrize("coupling", COUPLINGS)
def test_an_offset_at_any_phase_moves_the_figures_to_the_stated_ends(coupling: float) -> None:
    """All phases tried by fits of their own; the circuit's small part taken out of the ends."""
    error = 0.02
    known = KnownLoop(coupling=coupling, unloaded_q=4000.0, line_loss=1.0)
    frequency, reflection = known.sweep()
    clean, stated = fit_resonance(frequency, reflection), fit_resonance(frequency, reflection, error)
    turns = np.exp(1j * np.linspace(0.0, 2.0 * np.pi, 24, endpoint=False) + 1j * np.angle(clean.far_off))
    moved = [fit_resonance(frequency, reflection + error * turn) for turn in turns]
    for name in ("unloaded_q", "coupling", "loss"):
        ends, model = getattr(stated, name), getattr(clean, name)
        found = [getattr(each, name).value for each in moved]
        assert ends.value - min(found) == pytest.approx(np.sqrt(ends.below**2 - model.below**2), rel=0.02)
        assert max(found) - ends.value == pytest.approx(np.sqrt(ends.above**2 - model.above**2), rel=0.02)
    assert stated.loaded_q == clean.loaded_q
    assert stated.unloaded_q.noise == clean.unloaded_q.noise
    assert stated.unloaded_q.low < clean.unloaded_q.low


def test_both_parts_join_in_quadrature() -> None:
    q = fit(KnownLoop(noise=0.01), reflection_error=0.01).unloaded_q
    assert q.high - q.value == pytest.approx(np.hypot(q.noise, q.above))
    assert q.value - q.low == pytest.approx(np.hypot(q.noise, q.below))
    assert q.noise == pytest.approx(1.963 * q.uncertainty, rel=1e-3)  # Student's t of 795 degrees of freedom: tables


def test_a_strongly_overcoupled_loop_has_an_open_end() -> None:
    assert fit(KnownLoop(coupling=60.0, noise=1e-4), reflection_error=0.05).unloaded_q.high == np.inf


@pytest.mark.parametrize("error", [-0.01, 1.0, np.nan])
def test_an_error_that_is_none_is_refused(error: float) -> None:
    with pytest.raises(ValueError, match="0 or more and below 1"):
        fit(KnownLoop(), reflection_error=error)


# A delay that the sweep does not tell ----------------------------------------------------------------------


def test_a_delay_that_cannot_be_told_is_held_and_said() -> None:
    known = KnownLoop(unloaded_q=4000.0, resonance=1.8e6, noise=0.02, span=1.5, points=51)
    found = fit(known, 1)
    assert found.delay_held
    assert found.delay == 0.0
    assert found.delay_uncertainty == 0.0
    assert any("too narrow to tell the delay" in note for note in found.notes)
    # The ends hold what the longest delay would do.
    frequency, reflection = known.sweep(1)
    turned = reflection * np.exp(2j * np.pi * (frequency - known.resonance) * LONGEST_DELAY)
    shift = fit_resonance(frequency, turned).unloaded_q.value - found.unloaded_q.value
    q = found.unloaded_q
    assert -1.1 * q.below < shift < 1.1 * q.above
    assert abs(shift) > 0.5 * min(q.below, q.above)


# Another library's fit -------------------------------------------------------------------------------------


@pytest.mark.parametrize("noise", [0.0, 0.002])
@pytest.mark.parametrize(("unloaded_q", "coupling"), [(500.0, 0.5), (1000.0, 1.0), (3000.0, 2.0)])
def test_scikit_rf_agrees(unloaded_q: float, coupling: float, noise: float) -> None:
    """`skrf.qfactor.Qfactor`: Gregory, NPL Report MAT 58 (2021), by its seven coefficients with a line."""
    skrf = pytest.importorskip("skrf")
    known = KnownLoop(unloaded_q=unloaded_q, coupling=coupling, noise=noise, line_length=4.0, line_loss=0.5)
    frequency, reflection = known.sweep(3)
    network = skrf.Network(frequency=skrf.Frequency.from_f(frequency, unit="hz"), s=reflection.reshape(-1, 1, 1))
    other = skrf.qfactor.Qfactor(network, res_type="reflection")
    fitted = other.fit(method="NLQFIT7")
    found = fit_resonance(frequency, reflection)
    rel = 2e-4 if noise == 0.0 else 2e-3
    assert found.loaded_q.value == pytest.approx(fitted.Q_L, rel=rel)
    assert found.unloaded_q.value == pytest.approx(other.Q_unloaded(), rel=rel)
    assert found.resonance.value == pytest.approx(fitted.f_L, rel=0.01 / unloaded_q)


# Laws ------------------------------------------------------------------------------------------------------


def noisy() -> tuple[Array, ComplexArray, ResonanceFit]:
    frequency, reflection = KnownLoop(noise=0.01, coupling=0.8, line_length=6.0, line_loss=0.4).sweep(5)
    return frequency, reflection, fit_resonance(frequency, reflection)


def same(found: ResonanceFit, other: ResonanceFit, rel: float = 1e-7) -> None:
    for name in ("loaded_q", "unloaded_q", "coupling"):
        a, b = getattr(found, name), getattr(other, name)
        assert a.value == pytest.approx(b.value, rel=rel), name
        assert a.uncertainty == pytest.approx(b.uncertainty, rel=max(rel, 1e-3)), name


def test_a_sweep_downwards_is_the_same() -> None:
    frequency, reflection, found = noisy()
    assert fit_resonance(frequency[::-1], reflection[::-1]) == found


@pytest.mark.parametrize("turn", [1.0, 2.5, np.pi])
def test_a_turned_phase_leaves_q(turn: float) -> None:
    frequency, reflection, found = noisy()
    turned = fit_resonance(frequency, reflection * np.exp(1j * turn))
    same(turned, found)
    assert turned.lean == pytest.approx(found.lean, abs=1e-6)
    assert turned.far_off == pytest.approx(found.far_off * np.exp(1j * turn))


@pytest.mark.parametrize("factor", [0.3, 0.9, 1.1])
def test_a_scaled_amplitude_leaves_q_and_is_seen_as_loss(factor: float) -> None:
    frequency, reflection, found = noisy()
    scaled = fit_resonance(frequency, reflection * factor)
    same(scaled, found)
    assert scaled.loss.value - found.loss.value == pytest.approx(-10.0 * np.log10(factor))


def test_a_scaled_frequency_leaves_q() -> None:
    frequency, reflection, found = noisy()
    scaled = fit_resonance(2.0 * frequency, reflection)
    same(scaled, found)
    assert scaled.resonance.value == pytest.approx(2.0 * found.resonance.value)
    assert scaled.delay == pytest.approx(0.5 * found.delay)


def test_a_mirrored_and_conjugated_sweep_leaves_q() -> None:
    """1/f in place of f mirrors the tuning exactly; without a line the conjugate is then the same circle."""
    known = KnownLoop(coupling=1.4, noise=0.001)
    frequency, reflection = known.sweep()
    mirrored = fit_resonance(known.resonance**2 / frequency, reflection.conj())
    same(mirrored, fit_resonance(frequency, reflection), rel=2e-3)


def test_a_longer_line_leaves_q() -> None:
    frequency, reflection, found = noisy()
    longer = fit_resonance(frequency, reflection * np.exp(-2j * np.pi * frequency * 2e-7))
    same(longer, found, rel=1e-6)
    assert longer.delay - found.delay == pytest.approx(2e-7, rel=1e-4)


# No answer -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("known", "said"),
    [
        (KnownLoop(points=7), "7 points is too short"),
        (KnownLoop(points=8, noise=0.002), "no resonance stands out|points lie within"),
        (KnownLoop(span=400.0, noise=0.002), "points lie within the half-power width"),
        (KnownLoop(centre=-4.1, noise=0.001), "at the edge of the sweep"),
        (KnownLoop(centre=3.9, noise=0.001), "at the edge of the sweep"),
        (KnownLoop(centre=30.0, noise=0.005), "no resonance stands out"),
        (KnownLoop(span=0.5, noise=0.001), "less than the resonance's half-power width"),
        (KnownLoop(coupling=0.005, noise=0.02), "no resonance stands out"),
    ],
)
def test_a_sweep_that_does_not_tell(known: KnownLoop, said: str) -> None:
    with pytest.raises(ValueError, match=said):
        fit(known)


@pytest.mark.parametrize("points", [20, 401, 20_000])
@pytest.mark.parametrize("level", [0.0, 0.5, 0.95])
def test_a_line_without_a_loop_has_no_resonance(level: float, points: int) -> None:
    frequency = np.linspace(7.0e6, 7.2e6, points)
    for delay in (0.0, 3e-7):
        turned = level * np.exp(-2j * np.pi * frequency * delay) * np.exp(-frequency / 1e8)
        for seed in range(3):
            noise = 0.01 * np.random.default_rng(seed).standard_normal((2, points))
            for reflection in (turned, turned + noise[0] + 1j * noise[1], np.round(turned, 3)):
                with pytest.raises(ValueError, match=r"stands out|half-power|one circle"):
                    fit_resonance(frequency, reflection)


def test_what_no_passive_loop_gives_back() -> None:
    frequency, reflection = KnownLoop().sweep()
    with pytest.raises(ValueError, match=r"a reflection of 1\.29 at 7\.0432 MHz.*calibrate"):
        fit_resonance(frequency, 1.3 * reflection)
    with pytest.raises(ValueError, match="backwards"):
        fit_resonance(frequency, reflection.conj())
    larger = 0.4 * np.exp(0.3j) * (1.0 + 2.5 * (reflection / reflection[0] - 1.0))
    with pytest.raises(ValueError, match="larger than a passive loop"):
        fit_resonance(frequency, larger)


def test_two_resonances_are_told() -> None:
    first = KnownLoop()
    frequency, reflection = first.sweep()
    for other, away in ((0.7, 20e3), (0.7, 10e3), (0.5, 5e3)):
        second = replace(first, resonance=first.resonance + away, coupling=other, unloaded_q=1500.0)
        both = -reflection * second.at_terminals(frequency)
        try:
            notes = fit_resonance(frequency, both).notes
        except ValueError as error:
            notes = (str(error),)
        assert any("more than one resonance" in note for note in notes), away


def test_a_lossy_coupling_leans() -> None:
    frequency, reflection = KnownLoop().sweep()
    found = fit_resonance(frequency, 0.8 * reflection - 0.3j)
    assert abs(np.degrees(found.lean)) > 10.0
    assert any("leans by" in note for note in found.notes)


@pytest.mark.parametrize(
    ("frequency", "reflection", "said"),
    [
        (np.linspace(1.0, 2.0, 20), np.zeros(19), "shapes"),
        (np.zeros((4, 5)) + 1.0, np.zeros((4, 5)), "shapes"),
        (np.r_[1.0:2.0:19j, 1.5], np.zeros(20), "strict order"),
        (np.r_[1.0, 1.0:2.0:19j], np.zeros(20), "strict order"),
        (np.linspace(0.0, 2.0, 20), np.zeros(20), "above 0"),
        (np.linspace(1.0, 2.0, 20), np.full(20, np.nan), "finite"),
        (np.r_[np.inf, 1.0:2.0:19j], np.zeros(20), "finite"),
    ],
)
def test_arrays_that_are_no_sweep(frequency: Array, reflection: Array, said: str) -> None:
    with pytest.raises(ValueError, match=said):
        fit_resonance(frequency, reflection.astype(complex))


@pytest.mark.parametrize("span", [8.0, 1500.0])
def test_a_million_points_take_seconds(span: float) -> None:
    known = KnownLoop(points=1_000_000, span=span, unloaded_q=2000.0, noise=0.01, line_length=10.0)
    frequency, reflection = known.sweep()
    started = time.perf_counter()
    found = fit_resonance(frequency, reflection)
    assert time.perf_counter() - started < 10.0  # 1 s where this was written
    assert abs(found.unloaded_q.value - 2000.0) < 4.0 * found.unloaded_q.uncertainty
