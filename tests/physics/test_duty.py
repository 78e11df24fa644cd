"""Averaging over the worst window, held against counting it out second by second."""

from itertools import accumulate
from math import ceil, inf, nan

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from magsafe.rules import (
    OnAirShare,
    Over,
    Pattern,
    TuneUp,
    Who,
    averaged_power,
    judged_power,
    load_rule,
    mode_duty,
    mode_names,
    window_share,
    worst_window_share,
    worst_window_share_of_shorter_overs,
)

short = st.integers(1, 25)
shares = st.floats(0.001, 1.0)


def counted_share(keyed: list[bool], window: int) -> float:
    """Largest share of any window of so many steps: keying changes at whole steps, so does it."""
    total = [0, *accumulate(int(each) for each in keyed)]
    return max(b - a for a, b in zip(total, total[window:], strict=False)) / window


def strung(runs: list[tuple[int, int]]) -> list[bool]:
    """Overs and pauses, each in steps, one after the other."""
    return [state for on, off in runs for state in [True] * on + [False] * off]


@given(short, st.integers(0, 25), st.integers(1, 120))
@settings(max_examples=400)
def test_worst_window_share_is_what_counting_finds(transmit: int, listen: int, window: int) -> None:
    """Equal, not just a bound: every start of the window is tried over enough periods."""
    periods = 2 + ceil(window / (transmit + listen))
    counted = counted_share(strung([(transmit, listen)] * periods), window)
    assert worst_window_share(transmit, listen, window) == pytest.approx(counted, rel=1e-12)


@given(short, st.integers(0, 12), st.integers(1, 60), st.data())
@settings(max_examples=300)
def test_no_shorter_over_or_longer_pause_is_worse(transmit: int, listen: int, window: int, data: st.DataObject) -> None:
    """Any overs up to the longest, any pauses from the shortest up: periodic is the worst."""
    run = st.tuples(st.integers(1, transmit), st.integers(listen, listen + 10))
    runs = data.draw(st.lists(run, min_size=1, max_size=12))
    counted = counted_share(strung(runs) + [False] * window, window)
    assert counted <= worst_window_share(transmit, listen, window) + 1e-12


@given(st.integers(1, 12), st.integers(0, 3), st.integers(1, 60), st.data())
@settings(max_examples=300)
def test_no_shorter_over_with_its_shorter_pause_exceeds_the_wider_bound(
    transmit: int, ratio: int, window: int, data: st.DataObject
) -> None:
    """Pauses that shrink with their overs can beat the periodic pattern, never this bound."""
    overs = data.draw(st.lists(st.integers(1, transmit), min_size=1, max_size=20))
    counted = counted_share(strung([(on, ratio * on) for on in overs]) + [False] * window, window)
    bound = worst_window_share_of_shorter_overs(transmit, ratio * transmit, window)
    assert counted <= bound + 1e-12
    assert worst_window_share(transmit, ratio * transmit, window) <= bound + 1e-12


def test_shorter_overs_with_shorter_pauses_reach_the_wider_bound() -> None:
    """By hand: 1.5 min on, 1.5 off, 3 on fill 4.5 of 6 minutes, where 3 and 3 in turn fill 3."""
    counted = counted_share(strung([(3, 3), (6, 6)]) + [False] * 12, 12)
    assert counted == 0.75
    assert worst_window_share_of_shorter_overs(180, 180, 360) == pytest.approx(0.75)
    assert worst_window_share(180, 180, 360) == pytest.approx(0.5)


@pytest.mark.parametrize(
    ("transmit", "listen", "window", "share"),
    [
        (3, 3, 6, 0.5),
        (3, 3, 30, 0.5),
        (4, 3, 6, 4 / 6),
        (10, 10, 6, 1.0),
        (10, 10, 30, 20 / 30),  # on, listen, on
        (5, 1, 6, 5 / 6),
        (1, 0, 30, 1.0),
        (45, 600, 30, 1.0),
        (2, 100, 30, 2 / 30),
    ],
)
def test_worst_window_share_by_hand(transmit: float, listen: float, window: float, share: float) -> None:
    """Minutes, counted on fingers."""
    assert worst_window_share(60 * transmit, 60 * listen, 60 * window) == pytest.approx(share)


SLOT = 30  # [s] twelve slots are six minutes
slots = st.lists(st.booleans(), min_size=1, max_size=80)


@given(slots, st.integers(1, 70))
@settings(max_examples=400)
def test_on_air_share_bounds_every_window(keyed: list[bool], window: int) -> None:
    """Any keying whose largest share of six minutes is known, in any window."""
    assume(any(keyed))
    padded = [False] * 80 + keyed + [False] * 80
    share = counted_share(padded, 12)
    bound = window_share(OnAirShare(share), float(window * SLOT))
    assert counted_share(padded, window) <= bound + 1e-12


@given(shares, st.floats(1.0, 7200.0))
def test_on_air_share_never_exceeds_covering_by_whole_sixes(share: float, window: float) -> None:
    """The cruder bound: so many six minutes as cover the window, each with its share."""
    found = window_share(OnAirShare(share), window)
    assert found <= min(1.0, share * ceil(window / 360) * 360 / window) + 1e-12
    assert found >= share - 1e-12


@pytest.mark.parametrize(
    ("share", "window", "expected"),
    [(0.5, 360, 0.5), (0.5, 1800, 0.5), (0.5, 180, 1.0), (0.25, 180, 0.5), (0.5, 420, 4 / 7)],
)
def test_on_air_share_by_hand(share: float, window: float, expected: float) -> None:
    """420 s at a half: 180 s of the first six minutes, and the seventh whole."""
    assert window_share(OnAirShare(share), window) == pytest.approx(expected)


def test_tune_up_by_hand() -> None:
    """20 s of 6 and of 30 minutes; a carrier longer than the window fills it."""
    assert window_share(TuneUp(20), 360) == pytest.approx(20 / 360)
    assert window_share(TuneUp(20), 1800) == pytest.approx(20 / 1800)
    assert window_share(TuneUp(400), 360) == 1.0


patterns = st.one_of(
    st.none(),
    st.builds(Over, st.floats(0.1, 1e4), st.floats(0.0, 1e4)),
    st.builds(OnAirShare, shares),
    st.builds(TuneUp, st.floats(0.1, 1e4)),
)


@given(st.floats(0.0, 5000.0), st.floats(0.0, 1.0), patterns, st.sampled_from([0.0, 1.0, 360.0, 1800]))
def test_averaging_never_raises_power_above_the_envelope(
    power: float, duty: float, pattern: Pattern | None, averaging_time: float
) -> None:
    """A mean never exceeds the crest."""
    assert 0.0 <= judged_power(power, duty, pattern, averaging_time) <= power


@given(st.floats(1.0, 5000.0), st.floats(0.0, 1.0), patterns)
def test_without_averaging_the_full_envelope_counts(power: float, duty: float, pattern: Pattern | None) -> None:
    """ICNIRP 2010: instantaneous levels, not to be averaged; duty and pauses do not help."""
    assert judged_power(power, duty, pattern, 0.0) == power


def test_always_on_the_air_when_nothing_is_told() -> None:
    """No pattern, whole window; duty alone is left."""
    assert judged_power(100.0, 0.4, None, 1800.0) == pytest.approx(40.0)


@given(patterns, st.floats(1.0, 400.0), st.integers(1, 10))
def test_a_window_many_times_as_long_averages_no_worse(pattern: Pattern | None, window: float, times: int) -> None:
    """A long window is a row of short ones: its mean is at most the worst of theirs."""
    assert window_share(pattern, times * window) <= window_share(pattern, window) + 1e-9


@given(patterns, st.sampled_from(["trained", "public"]), st.floats(0.1, 300.0))
def test_the_local_levels_of_icnirp_2020_ask_no_more_than_those_for_the_whole_body(
    pattern: Pattern | None, who: Who, megahertz: float
) -> None:
    """Where one largest field is held against both, heat is at its limit for the whole body first, to 1.5 % of
    field strength (three-figure rounding of the tables): the local levels bind beside a mean over the body.
    """
    rows = [each for each in load_rule("icnirp-2020").rows if each.who == who]
    for field in ("electric", "magnetic"):
        ratio = {}
        for each in rows:
            if each.field == field and each.averaged:
                limit = each.at(megahertz * 1e6)
                assert limit is not None
                power = judged_power(100.0, 0.5, pattern, each.averaging_time)
                ratio[each.basis] = power**0.5 / limit
        assert ratio["thermal local"] <= 1.015 * ratio["thermal whole-body"]


def test_duty_is_a_share() -> None:
    """Morse: an unbroken text of the standard word PARIS is keyed 22 of its 50 units."""
    assert all(0 < mode_duty(mode) <= 1 for mode in mode_names())
    assert mode_duty("CW") < 22 / 50 < mode_duty("SSB")


@pytest.mark.parametrize("bad", [0.0, -1.0, nan, inf])
def test_times_must_be_positive_and_finite(bad: float) -> None:
    """Nothing is clipped or repaired."""
    with pytest.raises(ValueError, match="transmit must be above zero"):
        Over(bad, 1.0)
    with pytest.raises(ValueError, match="window must be above zero"):
        worst_window_share(1.0, 1.0, bad)
    with pytest.raises(ValueError, match="window must be above zero"):
        worst_window_share_of_shorter_overs(1.0, 1.0, bad)
    with pytest.raises(ValueError, match="time must be above zero"):
        TuneUp(bad)
    if bad != 0.0:
        with pytest.raises(ValueError, match="listen must be zero or more"):
            Over(1.0, bad)
        with pytest.raises(ValueError, match="averaging_time must be above zero"):
            window_share(None, bad)


@pytest.mark.parametrize("bad", [-0.1, 1.1, nan, 50.0])
def test_shares_must_be_shares(bad: float) -> None:
    """50 is not 50 %."""
    with pytest.raises(ValueError, match="share must be above 0 and up to 1"):
        OnAirShare(bad)
    with pytest.raises(ValueError, match="duty must lie in"):
        averaged_power(100.0, bad, 1.0)
    with pytest.raises(ValueError, match="share must lie in"):
        averaged_power(100.0, 1.0, bad)


@pytest.mark.parametrize("bad", [-1.0, nan, inf])
def test_power_must_be_zero_or_more(bad: float) -> None:
    """Also where nothing is averaged."""
    with pytest.raises(ValueError, match="envelope_power must be zero or more"):
        judged_power(bad, 1.0, None, 0.0)
