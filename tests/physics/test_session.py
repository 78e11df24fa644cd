"""Transmissions worked in turn: the worst division of a window, the rules' ways of adding, distances of the sum."""

from itertools import product
from typing import Any

import numpy as np
import pytest
from designs import plain_design
from hypothesis import given
from hypothesis import strategies as st

import magsafe
from magsafe.analysis.exposure import Basis, Use, bases, use_of
from magsafe.analysis.field_source import FAR, field_source
from magsafe.analysis.operating_point import operating_point
from magsafe.analysis.session import Part, parts_of, scale_to_limit, worst_sum
from magsafe.checks.sheet import DistancesRecord, SessionPlace, Sheet
from magsafe.rules.duty import Over
from magsafe.rules.limit import load_rule, rule_names
from magsafe.rules.summation import Summation

APART, LARGER, TOGETHER = (
    Summation(fields, None, "a test", "verified", "none") for fields in ("apart", "larger", "together")
)
BELOW_30 = Summation("together", 30e6, "a test", "verified", "none")


def part(transmission: int, electric: float, magnetic: float, time: float, frequency: float = 7.1e6) -> Part:
    return Part(transmission, frequency, np.array(electric), np.array(magnetic), time, scales=True)


def total(parts: list[Part], summation: Summation) -> float:
    return float(worst_sum(parts, summation).share)


# Dividing the window ---------------------------------------------------------------------------------------


def test_a_window_divided_by_hand() -> None:
    """Two voices of 3 min in 6 fill the window between them; a third that may fill it all takes what is left."""
    a, b, c = part(0, 0.5, 0.2, 0.5), part(1, 0.9, 0.1, 0.5), part(2, 0.7, 0.6, 1.0)
    assert total([a, b], LARGER) == pytest.approx(0.5 * 0.5 + 0.5 * 0.9)
    assert total([a, b, c], LARGER) == pytest.approx(0.5 * 0.9 + 0.5 * 0.7)
    found = worst_sum([a, b, c], LARGER)
    np.testing.assert_allclose(found.times, [0.0, 0.5, 0.5])
    np.testing.assert_allclose(found.shares, [0.0, 0.45, 0.35])


@pytest.mark.parametrize(
    ("summation", "wanted"),
    [
        # E: 0.5 * 0.4 + 0.5 * 0.3 = 0.35; H: 0.5 * 0.1 + 0.5 * 0.6 = 0.35 (1999/519/EC, annex IV: E and H apart)
        (APART, 0.35),
        # 0.5 * 0.4 + 0.5 * 0.6 (47 CFR 1.1310: fractions of E2 or H2 add)
        (LARGER, 0.5),
        # 0.5 * 0.5 + 0.5 * 0.9 (ICNIRP 2020, eq. 2, from memory: both together below 30 MHz)
        (TOGETHER, 0.7),
        # the second lies above 30 MHz, where the larger counts: 0.5 * 0.5 + 0.5 * 0.6
        (BELOW_30, 0.55),
    ],
)
def test_ways_of_adding_by_hand(summation: Summation, wanted: float) -> None:
    assert total([part(0, 0.4, 0.1, 0.5), part(1, 0.3, 0.6, 0.5, 50.1e6)], summation) == pytest.approx(wanted)


shares = st.floats(0.0, 3.0)
some_parts = st.lists(st.tuples(shares, shares, st.floats(0.01, 1.0)), min_size=1, max_size=4)
ways = st.sampled_from([APART, LARGER, TOGETHER])


@given(some_parts, ways, st.data())
def test_no_division_of_the_window_exceeds_the_sum(
    made: list[tuple[float, float, float]], way: Summation, data: st.DataObject
) -> None:
    """Whatever time each takes, within its own share and the window, the sums stay below, and one comes to it."""
    parts = [part(i, *each) for i, each in enumerate(made)]
    worst = total(parts, way)
    times = np.array([data.draw(st.floats(0.0, each.time)) for each in parts])
    times /= max(1.0, times.sum())
    added = [way.contribution(each.electric, each.magnetic, each.frequency) for each in parts]
    for kind in (0, 1):
        assert sum(time * float(each[kind]) for time, each in zip(times, added, strict=True)) <= worst + 1e-12
    found = worst_sum(parts, way)
    assert found.times.sum() <= 1.0 + 1e-12
    assert np.all(found.times <= np.array([each.time for each in parts]) + 1e-12)
    assert found.shares.sum() == pytest.approx(worst)


@given(some_parts, ways)
def test_a_session_is_never_less_than_one_of_its_transmissions(
    made: list[tuple[float, float, float]], way: Summation
) -> None:
    parts = [part(i, *each) for i, each in enumerate(made)]
    for each in parts:
        assert (
            total(parts, way) >= each.time * float(max(way.contribution(each.electric, each.magnetic, 7.1e6))) - 1e-12
        )


@given(some_parts, ways)
def test_scaled_to_the_limit_the_sum_is_one(made: list[tuple[float, float, float]], way: Summation) -> None:
    parts = [part(i, *each) for i, each in enumerate(made)]
    factor = scale_to_limit(parts, way)
    if factor is None:
        assert total(parts, way) < 1e-29
        return
    scaled = [part(i, e * factor, h * factor, time) for i, (e, h, time) in enumerate(made)]
    assert total(scaled, way) == pytest.approx(1.0, abs=1e-9)
    assert total(scaled, way) <= 1.0


def test_a_tune_up_does_not_scale_with_the_power() -> None:
    """0.2 of the limit come of tune-ups: the overs have 0.8 left, in the time that is left."""
    overs, tune = part(0, 0.5, 0.0, 0.5), Part(0, 7.1e6, np.array(2.0), np.array(0.0), 0.1, scales=False)
    assert scale_to_limit([overs, tune], LARGER) == pytest.approx(0.8 / 0.25, rel=1e-9)
    strong = Part(0, 7.1e6, np.array(20.0), np.array(0.0), 0.1, scales=False)
    assert scale_to_limit([overs, strong], LARGER) == 0.0
    assert scale_to_limit([tune], LARGER) is None


def test_what_fills_a_window_by_hand() -> None:
    """100 W of 40 % for 3 min in 6, and 5 W of tune-up for 18 s: of a 6 min window half, and a twentieth."""
    use = Use(100.0, 0.4, Over(180.0, 180.0), 5.0, 18.0)
    (basis,) = bases(load_rule("us-fcc"), "public", 7.1e6)
    made = parts_of(3, Basis("thermal", 360.0, basis.electric, basis.magnetic, 7.1e6), use, "always",
                    (np.array(2.0), np.array(3e-5)), 0.9)  # fmt: skip
    assert [(each.transmission, each.time, each.scales) for each in made] == [(3, 0.5, True), (3, 0.05, False)]
    assert float(made[0].electric) == pytest.approx(2.0 * 0.9 * 40.0 / (824.0 / 7.1) ** 2)
    assert float(made[1].magnetic) == pytest.approx(3e-5 * 0.9 * 5.0 / (2.19 / 7.1) ** 2)


# Whole designs ---------------------------------------------------------------------------------------------

VOICE: dict[str, Any] = {"name": "voice", "frequency": "7.1 MHz", "power": "100 W", "mode": "SSB",
                         "over": {"transmit": "3 min", "listen": "3 min"}}  # fmt: skip
DATA: dict[str, Any] = {"name": "data", "frequency": "14.1 MHz", "power": "60 W", "mode": "data",
                        "over": {"transmit": "2 min", "listen": "4 min"}}  # fmt: skip
DESK = {"name": "desk", "who": "trained", "along_axis": "3.5 m", "posture": "sitting"}
WALK = {"name": "walk", "who": "public", "along_axis": "7 m"}
FENCE = {"name": "fence", "who": "public", "fence": "9 m"}


def sheet_of(*rules: str, sessions: list[list[str]] | None = None, **changes: Any) -> Sheet:
    site: dict[str, Any] = {"ground": "average", "rules": list(rules)}
    if sessions is not None:
        site["sessions"] = sessions
    changes = {"transmission": [VOICE, DATA], "place": [DESK, WALK, FENCE], **changes}
    return magsafe.check(plain_design(site=site, loop__centre_height="2 m", capacitor__position="top", **changes))


BOTH = [["voice", "data"]]


@pytest.mark.parametrize("rule", rule_names())
def test_a_session_adds_what_its_transmissions_give(rule: str) -> None:
    """By hand: unbroken shares of each transmission at its own worst point, the larger served first."""
    sheet = sheet_of(rule, sessions=BOTH)
    for exposure in sheet.sessions[0].exposure:
        for place in exposure.places:
            own = []
            for point, keyed in zip(sheet.operating_points, (0.5, 1.0 / 3.0), strict=True):
                record = next(e for e in point.exposure if (e.rule, e.who) == (rule, exposure.who))
                found = next(p for p in record.places if p.name == place.name)
                basis = next(
                    b for b in found.bases if (b.basis, b.averaging_time) == (place.basis, place.averaging_time)
                )
                fields = [
                    0.0 if field is None or limit is None else (field / limit) ** 2 / keyed
                    for field, limit in ((basis.electric, basis.electric_limit), (basis.magnetic, basis.magnetic_limit))
                ]
                own.append((point.frequency, *fields, keyed))
            way = load_rule(rule).summation
            wanted = 0.0
            for kind in (0, 1):
                rates = [(float(way.contribution(e, h, f)[kind]), time) for f, e, h, time in own]
                left, made = 1.0, 0.0
                for rate, time in sorted(rates, reverse=True):
                    made += rate * min(left, time)
                    left -= min(left, time)
                wanted = max(wanted, made)
            assert place.share_of_limit == pytest.approx(wanted, rel=1e-9)


def place_of(sheet: Sheet, name: str, who: str, session: int = 0) -> SessionPlace:
    exposure = next(e for e in sheet.sessions[session].exposure if e.who == who)
    return next(p for p in exposure.places if p.name == name)


def test_what_is_clear_alone_may_be_too_much_in_turn() -> None:
    """Each fills half of the window with just less than the limit: together they come to nearly twice a half."""
    one, other = ({**VOICE, "name": name, "frequency": f"{f} MHz"} for name, f in (("a", 7.1), ("b", 7.15)))
    near = {**WALK, "along_axis": "3.6 m"}
    alone = sheet_of("us-fcc", transmission=[one, other], place=[DESK, near])
    shares = [
        next(p for e in point.exposure if e.who == "public" for p in e.places).share_of_limit or 0.0
        for point in alone.operating_points
    ]
    watts = 100.0 * 0.6 / max(shares)
    one, other = ({**each, "power": f"{watts:.4f} W"} for each in (one, other))
    sheet = sheet_of("us-fcc", transmission=[one, other], place=[DESK, near], sessions=[["a", "b"]])
    for point in sheet.operating_points:
        found = {f.id: f for f in point.findings}
        assert found["exposure.us-fcc.public.walk"].verdict == "clear"
        assert found["exposure.us-fcc.public.session-1.walk"].verdict == "stop"
        assert found["exposure.us-fcc.public.session-1.walk"].session == 1
        alone_at, in_turn_at = (found[f"exposure.us-fcc.public.{n}walk"].power_at_margin for n in ("", "session-1."))
        assert in_turn_at == pytest.approx((alone_at or 0.0) / 2.0, rel=0.02)
        assert (point.power_ceiling.value or 0.0) <= (in_turn_at or 0.0)
    assert sheet.verdict == "stop"
    assert place_of(sheet, "walk", "public").share_of_limit == pytest.approx(1.2, rel=0.02)


@pytest.mark.parametrize("rule", ["us-fcc", "icnirp-2020", "eu-1999-519"])
@pytest.mark.parametrize("losses", [{}, {"capacitor__series_resistance": None}])
def test_at_its_ceiling_a_session_keeps_the_margin_and_above_it_does_not(rule: str, losses: dict[str, Any]) -> None:
    sheet = sheet_of(rule, sessions=BOTH, **losses)
    place = place_of(sheet, "walk", "public")
    assert place.power_factor is not None
    for factor, clear in ((0.9999, True), (1.0001, False)):
        scaled = [
            {**each, "power": f"{float(each['power'].split()[0]) * place.power_factor * factor:.9f} W"}
            for each in (VOICE, DATA)
        ]
        again = sheet_of(rule, sessions=BOTH, transmission=scaled, **losses)
        found = next(f for f in again.operating_points[0].findings if f.id == f"exposure.{rule}.public.session-1.walk")
        kept = (found.power_at_margin or 0.0) >= float(scaled[0]["power"].split()[0])
        assert kept == clear
        if not losses and rule != "icnirp-2020" and load_rule(rule).summation.provenance == "verified":
            assert (found.verdict == "clear") == clear


DIRECTIONS = ("any_direction", "along_axis", "in_plane", "above", "below")


def metres(found: DistancesRecord, name: str) -> float:
    return getattr(found, name).distance or float("inf")


@pytest.mark.parametrize("rule", ["us-fcc", "icnirp-2020", "eu-1999-519"])
def test_a_session_reaches_at_least_as_far_as_its_transmissions(rule: str) -> None:
    sheet = sheet_of(rule, sessions=BOTH)
    for index, exposure in enumerate(sheet.sessions[0].exposure):
        assert exposure.keepout is not None
        for point in sheet.operating_points:
            own = next(e for e in point.exposure if (e.rule, e.who) == (exposure.rule, exposure.who)).keepout
            assert own is not None
            for name in DIRECTIONS:
                assert metres(exposure.keepout, name) >= metres(own, name), (index, name)
    assert any(
        metres(s.keepout, "any_direction")
        > max(
            metres(e.keepout, "any_direction")
            for point in sheet.operating_points
            for e in point.exposure
            if e.who == s.who and e.keepout is not None
        )
        for s in sheet.sessions[0].exposure
        if s.keepout is not None
    )


@pytest.mark.parametrize("rule", ["us-fcc", "icnirp-2020", "eu-1999-519", "jp"])
def test_outside_a_session_s_keep_out_the_sum_keeps_the_margin(rule: str) -> None:
    """Points anywhere outside, the fields of both transmissions at the same point, added as the rule adds them."""
    sheet = sheet_of(rule, sessions=BOTH)
    design = plain_design(
        site={"ground": "average", "rules": [rule], "sessions": BOTH}, loop__centre_height="2 m",
        capacitor__position="top", transmission=[VOICE, DATA],
    )  # fmt: skip
    random = np.random.default_rng(5)
    way = random.normal(size=(400, 3))
    way /= np.linalg.norm(way, axis=1)[:, None]
    points = [operating_point(design, each) for each in design.transmission]
    for exposure in sheet.sessions[0].exposure:
        assert exposure.keepout is not None
        reach = metres(exposure.keepout, "any_direction")
        where = way * (reach * np.exp(random.uniform(0.0, 1.0, 400)))[:, None] + [0.0, 0.0, 2.0]
        where = where[where[:, 2] > 0.0]
        parts = []
        for index, point in enumerate(points):
            source = field_source(design, point, FAR)
            squares = source.strongest(where)
            strict = (point.power_at_loop.high or 0.0) / point.power * design.margins.exposure_ratio**2
            for basis in bases(load_rule(rule), "public" if exposure.who == "public" else "trained",
                               point.transmission.frequency):  # fmt: skip
                if basis.averaging_time:
                    parts += [
                        (basis.name, each)
                        for each in parts_of(index, basis, use_of(point.transmission), "always",
                                             (squares.electric, squares.magnetic), strict * source.bare_factor)
                    ]  # fmt: skip
        for name in dict.fromkeys(name for name, _ in parts):
            own = [each for named, each in parts if named == name]
            assert float(worst_sum(own, load_rule(rule).summation).share.max()) <= 1.0


def test_what_is_never_averaged_is_not_added() -> None:
    """Two transmissions are never on the air at once: nerve levels see the crest of each, not of both."""
    sheet = sheet_of("icnirp-2020", sessions=BOTH)
    for exposure, place in product(sheet.sessions[0].exposure, ("desk", "walk")):
        for each in exposure.places:
            if each.name == place:
                assert (each.averaging_time or 0.0) > 0.0


def test_while_tuning_only_tune_ups_add_up() -> None:
    tune = {"power": "5 W", "time": "20 s"}
    at_it = {"name": "at the mast", "who": "trained", "along_axis": "1.5 m", "when": "tuning"}
    transmissions = [{**VOICE, "tune_up": tune}, {**DATA, "tune_up": tune}]
    sheet = sheet_of("us-fcc", sessions=BOTH, transmission=transmissions, place=[DESK, WALK, at_it])
    place = place_of(sheet, "at the mast", "trained")
    alone = [
        p.share_of_limit or 0.0
        for point in sheet.operating_points
        for e in point.exposure
        for p in e.places
        if p.name == "at the mast"
    ]
    assert place.share_of_limit == pytest.approx(sum(alone), rel=1e-9)
    assert place.power_factor is None
    one_only = sheet_of("us-fcc", sessions=BOTH, transmission=[transmissions[0], DATA], place=[DESK, WALK, at_it])
    assert place_of(one_only, "at the mast", "trained").share_of_limit is None


def test_nothing_is_added_that_no_session_lists() -> None:
    assert sheet_of("us-fcc").sessions == ()
    assert not any(f.session for f in sheet_of("us-fcc").all_findings())
