"""How the parts of a tuning capacitor share volts, amps and watts: Kirchhoff, energy, limits, the worst end of each."""

from dataclasses import replace
from functools import cache
from math import pi, sqrt
from typing import Any

import numpy as np
import pytest
from designs import plain_design
from hypothesis import given
from hypothesis import strategies as st

from magsafe.analysis.capacitor_heat import heat_of
from magsafe.analysis.capacitor_network import UNSTATED_TOLERANCE, Network
from magsafe.analysis.capacitor_parts import main_capacitance, main_part, padding_parts
from magsafe.analysis.chain import VOLTAGE_ERROR, Chain
from magsafe.analysis.losses import Loss, among, padding_loss
from magsafe.analysis.operating_point import OperatingPoint, operating_point
from magsafe.design import tables
from magsafe.design.model import Padding
from magsafe.design.quantities import Uncertain
from magsafe.spread import Spread

FREQUENCY = 7.1e6
OMEGA = 2.0 * pi * FREQUENCY
LOSSLESS = {"quality_factor": {"low": 1e5, "likely": 1e5, "high": 1e5}}
EXACT = {"tolerance": "0 %", "quality_factor": {"low": 1000, "likely": 1000, "high": 1000}}


def padding(connection: str, capacitance: str, **keys: Any) -> dict[str, Any]:
    return {"connection": connection, "capacitance": capacitance, **keys}


def point_of(*parts: dict[str, Any], **changes: Any) -> OperatingPoint:
    made = plain_design(capacitor__with=list(parts), **changes)
    return operating_point(made, made.transmission[0])


def chain_of(point: OperatingPoint) -> Chain:
    assert point.chain is not None
    return point.chain


@cache
def bare_chain() -> Chain:
    return chain_of(point_of())


@pytest.fixture(scope="module", autouse=True)
def _solved_once() -> None:
    """Solve the loop before any property is timed."""
    bare_chain()


def with_parts(*parts: Padding, main: Loss | None = None) -> Chain:
    """Return the chain of the plain loop with padding put in, without solving it again."""
    made = bare_chain()
    net = Network(
        made.network.omega,
        tuple(part for part in parts if part.connection == "parallel"),
        tuple(part for part in parts if part.connection == "series"),
    )
    own = among(main or Loss(1e-3, 1e-3, 1e-3, 1e-3, "capacitor"), net)
    return replace(made, network=net, capacitor=own, padding=tuple(padding_loss(part, net) for part in net.padding))


def part_of(connection: str, picofarads: float, q: tuple[float, float, float] = (500.0, 1000.0, 2000.0)) -> Padding:
    return Padding.model_construct(
        connection=connection, capacitance=picofarads * 1e-12, tolerance=0.0, quality_factor=Uncertain(*q), on=None
    )


def likely(spread: Spread) -> float:
    assert spread.likely is not None
    return spread.likely


def high(spread: Spread) -> float:
    assert spread.high is not None
    return spread.high


def test_without_padding_the_capacitor_has_all_that_the_port_has() -> None:
    point = point_of()
    use, figures = main_part(point), point.figures
    assert use.voltage == figures.capacitor_peak_voltage.spread
    assert use.current == figures.capacitor_rms_current.spread
    assert (use.bare_voltage, use.bare_current) == (point.bare_voltage, point.bare_current)
    assert (use.thin_voltage, use.thin_current, use.missing) == ("", "", "")
    assert padding_parts(point) == ()


def test_padding_on_another_frequency_changes_no_digit() -> None:
    lossy = {"capacitor__series_resistance": None, "capacitor__quality_factor": 800}
    free, elsewhere = point_of(**lossy), point_of(padding("parallel", "100 pF", on=["3.6 MHz"]), **lossy)
    assert free.figures == elsewhere.figures
    assert chain_of(free).capacitor == chain_of(elsewhere).capacitor
    assert main_part(free) == main_part(elsewhere)


def test_parallel_parts_share_the_current_by_their_capacitance() -> None:
    """100 pF of the 200.6 pF that tune the loop: half of the amps, all of the volts."""
    point = point_of(padding("parallel", "100 pF", **EXACT))
    whole = likely(point.figures.tuning_capacitance.spread)
    port = likely(point.figures.capacitor_rms_current.spread)
    (found,) = padding_parts(point)
    assert likely(found.use.current) == pytest.approx(port * 100e-12 / whole, rel=1e-9)
    assert found.use.voltage == point.figures.capacitor_peak_voltage.spread
    main = main_part(point)
    assert likely(main.current) == pytest.approx(port * (1.0 - 100e-12 / whole), rel=1e-9)
    assert main.voltage == point.figures.capacitor_peak_voltage.spread


def test_series_parts_share_the_volts_by_the_inverse_of_their_capacitance() -> None:
    point = point_of(padding("series", "1 nF", **EXACT))
    whole = likely(point.figures.tuning_capacitance.spread)
    port = likely(point.figures.capacitor_peak_voltage.spread)
    (found,) = padding_parts(point)
    assert likely(found.use.voltage) == pytest.approx(port * whole / 1e-9, rel=1e-9)
    assert found.use.current == point.figures.capacitor_rms_current.spread
    main = main_part(point)
    assert likely(main.voltage) == pytest.approx(port * (1.0 - whole / 1e-9), rel=1e-9)
    assert main.current == point.figures.capacitor_rms_current.spread
    assert likely(main_capacitance(point)[0]) == pytest.approx(1.0 / (1.0 / whole - 1.0 / 1e-9), rel=1e-9)


def test_several_of_each_are_what_kirchhoff_has() -> None:
    """Nodes 1 (top), 2, 3 and ground, solved for one ampere; the main part's capacitance closes the resonance."""
    point = point_of(
        padding("parallel", "40 pF", **EXACT),
        padding("series", "800 pF", **EXACT),
        padding("parallel", "60 pF", **EXACT),
        padding("series", "1.5 nF", **EXACT),
    )
    main = likely(main_capacitance(point)[0])

    def branch(first: int, second: int | None, farads: float) -> np.ndarray[Any, Any]:
        made = np.zeros((3, 3), dtype=complex)
        for one, other in ((first, second), (second, first)):
            if one is not None:
                made[one, one] += 1j * OMEGA * farads
                if other is not None:
                    made[one, other] -= 1j * OMEGA * farads
        return made

    nodes = branch(0, 1, 800e-12) + branch(1, 2, 1.5e-9) + branch(2, None, main + 100e-12)
    volts = np.linalg.solve(nodes, np.array([1.0, 0.0, 0.0]))
    assert abs(volts[0]) == pytest.approx(chain_of(point).likely.reactance, rel=1e-9)
    amps = likely(point.figures.capacitor_rms_current.spread)
    crest = sqrt(2.0) * amps
    by_name = {round(each.part.capacitance * 1e12): each.use for each in padding_parts(point)}
    assert likely(by_name[800].voltage) == pytest.approx(crest * abs(volts[0] - volts[1]), rel=1e-9)
    assert likely(by_name[1500].voltage) == pytest.approx(crest * abs(volts[1] - volts[2]), rel=1e-9)
    for across in (40, 60):
        assert likely(by_name[across].voltage) == pytest.approx(crest * abs(volts[2]), rel=1e-9)
        share = abs(volts[2]) * OMEGA * across * 1e-12
        assert likely(by_name[across].current) == pytest.approx(amps * share, rel=1e-9)
    assert likely(main_part(point).current) == pytest.approx(amps * abs(volts[2]) * OMEGA * main, rel=1e-9)


def test_the_resistance_is_that_of_the_network_of_lossy_parts() -> None:
    """Each part as C (1 - j/Q); what the sum of the powers misses is of the square of 1/Q."""
    keys = {"tolerance": "0 %", "quality_factor": {"low": 900, "likely": 900, "high": 900}}
    point = point_of(
        padding("parallel", "50 pF", **keys),
        padding("series", "700 pF", **keys),
        capacitor__series_resistance=None,
        capacitor__quality_factor={"low": 400, "likely": 400, "high": 400},
    )
    main = likely(main_capacitance(point)[0])
    across = 1j * OMEGA * (main * (1.0 - 1j / 400.0) + 50e-12 * (1.0 - 1j / 900.0))
    impedance = 1.0 / across + 1.0 / (1j * OMEGA * 700e-12 * (1.0 - 1j / 900.0))
    assert likely(point.figures.capacitor_resistance.spread) == pytest.approx(impedance.real, rel=2e-5)


def test_a_main_part_of_stated_ohms_is_seen_by_the_square_of_its_share() -> None:
    stated = {"low": "0.1 ohm", "likely": "0.1 ohm", "high": "0.1 ohm"}
    point = point_of(padding("parallel", "100 pF", **EXACT), capacitor__series_resistance=stated)
    made = chain_of(point)
    share = 1.0 - 100e-12 / likely(point.figures.tuning_capacitance.spread)
    assert made.capacitor.at("likely", made.likely) == pytest.approx(0.1 * share**2, rel=1e-9)


def test_the_power_in_is_the_heat_of_all_parts_and_what_is_radiated() -> None:
    point = point_of(
        padding("parallel", "60 pF"),
        padding("series", "900 pF"),
        capacitor__series_resistance=None,
        loop__joint=[{"name": "lugs", "kind": "bolted lug", "count": 2, "at": "capacitor"}],
    )
    made = chain_of(point)
    amps = likely(point.figures.capacitor_rms_current.spread)
    heats = [made.heat_in(part, "likely", "likely", made.likely, 100.0) for part in made.losses]
    assert len(heats) == 5
    assert min(heats) > 0.01
    assert sum(heats) + amps**2 * made.likely.radiated == pytest.approx(100.0, rel=1e-12)
    assert likely(point.figures.capacitor_dissipation.spread) == pytest.approx(
        heats[2] + heats[3] + heats[4], rel=1e-12
    )
    assert [likely(each.heat) for each in padding_parts(point)] == pytest.approx(heats[3:], rel=1e-12)


def test_padding_of_unknown_kind_has_the_typical_ends_and_proves_none() -> None:
    """Q 200, 1000, 10000 (common practice, as in the table of kinds)."""
    made = chain_of(point_of(padding("parallel", "100 pF")))
    (loss,) = made.padding
    assert (loss.low, loss.bare, loss.likely, loss.high) == pytest.approx((1e-4, 0.0, 1e-3, 5e-3))
    assert loss.typical == ("capacitor, fixed part of unknown kind",)
    assert tables.capacitor_quality_factor("fixed part of unknown kind") == Spread(200, 1000, 10000)


def test_stated_ends_of_padding_rest_on_nothing_typical_and_one_value_is_no_low_end() -> None:
    ends = {"low": 500, "likely": 1000, "high": 2000}
    stated = chain_of(point_of(padding("series", "1 nF", quality_factor=ends))).padding[0]
    assert (stated.low, stated.bare, stated.likely, stated.high) == pytest.approx((5e-4, 5e-4, 1e-3, 2e-3))
    assert stated.typical == ()
    single = chain_of(point_of(padding("series", "1 nF", quality_factor=1000))).padding[0]
    assert (single.low, single.bare, single.likely, single.high) == pytest.approx((1e-4, 0.0, 1e-3, 1e-3))


def test_the_dangerous_end_counts_the_tolerance_and_the_reactance() -> None:
    """A padding part that is larger than marked takes more amps, and leaves a series part of it fewer volts."""
    made = point_of(padding("parallel", "100 pF", tolerance="10 %", **LOSSLESS))
    exact = point_of(padding("parallel", "100 pF", tolerance="0 %", **LOSSLESS))
    (wide,), (narrow,) = padding_parts(made), padding_parts(exact)
    assert high(wide.use.current) == pytest.approx(1.1 * high(narrow.use.current), rel=0.002)
    main_wide, main_narrow = main_part(made), main_part(exact)
    off = 0.1 * 100e-12 * OMEGA * chain_of(made).likely.reactance
    assert high(main_wide.current) / high(made.figures.capacitor_rms_current.spread) == pytest.approx(
        high(main_narrow.current) / high(exact.figures.capacitor_rms_current.spread) + off, rel=0.01
    )
    amps = high(exact.figures.capacitor_rms_current.spread)
    share = 100e-12 * OMEGA * chain_of(exact).likely.reactance
    beyond = high(narrow.use.current) / amps / share - 1.0
    assert beyond == pytest.approx(chain_of(exact).reactance_error, abs=0.004)


def test_a_series_part_may_be_smaller_than_marked() -> None:
    points = [point_of(padding("series", "1 nF", tolerance=each, **LOSSLESS)) for each in ("0 %", "10 %")]
    narrow, wide = (high(padding_parts(each)[0].use.voltage) for each in points)
    assert wide == pytest.approx(narrow / 0.9, rel=1e-3)
    fewer, more = (high(main_part(each).voltage) for each in points)
    # Larger than marked it takes 0.2 / 1.1 of the volts instead of 0.2, and leaves the rest.
    assert more / fewer == pytest.approx((1.0 - 0.2006 / 1.1) / (1.0 - 0.2006), rel=3e-3)


def test_ten_percent_is_taken_where_no_tolerance_is_stated_and_said() -> None:
    assert UNSTATED_TOLERANCE == 0.10
    stated, taken = (
        padding_parts(point_of(padding("parallel", "100 pF", **keys)))[0].use for keys in ({"tolerance": "10 %"}, {})
    )
    assert taken.current == stated.current
    assert stated.thin_current == ""
    assert "10 %" in taken.thin_current
    assert taken.thin_voltage == ""


def test_what_is_left_for_the_main_part_has_the_ends_of_all_tolerances() -> None:
    point = point_of(padding("parallel", "100 pF", tolerance="5 %"))
    whole = point.figures.tuning_capacitance.spread
    as_marked, with_tolerance = main_capacitance(point)
    assert whole.low is not None
    assert whole.high is not None
    assert (as_marked.low, as_marked.high) == pytest.approx((whole.low - 100e-12, whole.high - 100e-12), abs=1e-18)
    assert (with_tolerance.low, with_tolerance.high) == pytest.approx(
        (whole.low - 105e-12, whole.high - 95e-12), abs=1e-18
    )
    series = point_of(padding("series", "1 nF", tolerance="5 %"))
    ends = main_capacitance(series)[1]
    assert ends.low == pytest.approx(1.0 / (1.0 / whole.low - 1.0 / 1.05e-9), abs=1e-18)
    assert ends.high == pytest.approx(1.0 / (1.0 / whole.high - 1.0 / 0.95e-9), abs=1e-18)


@pytest.mark.parametrize(
    ("part", "word"),
    [(padding("parallel", "330 pF"), "more than the loop needs"), (padding("series", "150 pF"), "less than the loop")],
)
def test_padding_that_leaves_nothing_is_told(part: dict[str, Any], word: str) -> None:
    point = point_of(part)
    assert word in main_part(point).missing
    assert word in padding_parts(point)[0].use.missing
    for spread in (main_part(point).voltage, main_part(point).current):
        assert min(spread.low or 0.0, likely(spread)) >= 0.0


def test_an_open_height_leaves_the_main_part_all_of_the_current_at_worst() -> None:
    around = {"site__ground": "average", "loop__centre_height": None}
    point = point_of(padding("parallel", "100 pF", tolerance="1 %"), **around)
    use = main_part(point)
    assert use.current.high == point.figures.capacitor_rms_current.spread.high
    assert use.bare_current == point.bare_current
    assert likely(use.current) < 0.6 * likely(point.figures.capacitor_rms_current.spread)


CONNECTED = st.sampled_from(["parallel", "series"])
# Series parts are large and parallel ones small, so that something is left for the main part.
FARADS = {"parallel": st.floats(1.0, 150.0), "series": st.floats(300.0, 5000.0)}


@given(st.data(), CONNECTED, st.floats(30.0, 3000.0), st.floats(1.0, 20.0))
def test_a_better_part_never_lowers_the_volts(data: st.DataObject, connection: str, q: float, better: float) -> None:
    farads = data.draw(FARADS[connection])
    poor, good = (
        with_parts(part_of(connection, farads, (value, value, value)), part_of("series", 2000.0))
        for value in (q, q * better)
    )
    for end in ("low", "bare", "likely", "high"):
        assert good.voltage(end, good.likely, 100.0) >= poor.voltage(end, poor.likely, 100.0) * (1.0 - 1e-12)
    assert good.quality("likely", good.likely) >= poor.quality("likely", poor.likely) * (1.0 - 1e-12)


@given(st.data(), CONNECTED, st.floats(30.0, 3000.0), st.floats(1.0, 10.0))
def test_the_heat_of_a_part_never_falls_when_its_own_spread_grows(
    data: st.DataObject, connection: str, q: float, wider: float
) -> None:
    farads = data.draw(FARADS[connection])
    narrow, wide = (
        with_parts(part_of(connection, farads, (q / factor, q, q)), part_of("parallel", 20.0))
        for factor in (1.0, wider)
    )
    index = 0 if connection == "parallel" else 1
    before, after = (each.heat_spread(each.padding[index]) for each in (narrow, wide))
    assert high(after) >= high(before) * (1.0 - 1e-12)
    main = Loss(1e-4, 1e-4, 1e-3, 1e-3, "capacitor")
    same, worse = (with_parts(part_of("parallel", 20.0), main=replace(main, high=1e-3 * f)) for f in (1.0, wider))
    assert high(heat_of(worse, (worse.capacitor,))) >= high(heat_of(same, (same.capacitor,))) * (1.0 - 1e-12)


@given(st.data(), CONNECTED)
def test_every_share_lies_between_nothing_and_all(data: st.DataObject, connection: str) -> None:
    made = with_parts(part_of(connection, data.draw(st.floats(1.0, 5000.0))))
    net = made.network
    for sign in (-1.0, 0.0, 1.0):
        assert 0.0 <= net.main_share(made.likely.reactance, sign) <= 1.0
        assert 0.0 <= net.section_reactance(made.likely.reactance, sign) <= made.likely.reactance


def test_the_heat_of_one_loss_alone_is_that_of_the_chain() -> None:
    made = with_parts(part_of("parallel", 50.0))
    for part in made.losses:
        assert heat_of(made, (part,)) == made.heat_spread(part)
    together = heat_of(made, (made.capacitor, *made.padding))
    assert likely(together) == pytest.approx(sum(likely(made.heat_spread(p)) for p in (made.capacitor, *made.padding)))
    assert high(together) < sum(high(made.heat_spread(p)) for p in (made.capacitor, *made.padding))


def test_each_end_of_a_share_takes_every_tolerance_its_own_way() -> None:
    """The main part has most where what is across it is small, and what is in series leaves it few volts."""
    across, beyond = (
        Padding.model_construct(connection=each, capacitance=farads, tolerance=0.1, quality_factor=None, on=None)
        for each, farads in (("parallel", 50e-12), ("series", 1e-9))
    )
    net = Network(OMEGA, (across,), (beyond,))
    few, many = 110.0 - 1.0 / (OMEGA * 0.9e-9), 110.0 - 1.0 / (OMEGA * 1.1e-9)
    assert net.section_reactance(110.0, -1.0) == pytest.approx(few)
    assert net.section_reactance(110.0, 1.0) == pytest.approx(many)
    assert net.main_share(110.0, 1.0) == pytest.approx(1.0 - OMEGA * 45e-12 * few)
    assert net.main_share(110.0, -1.0) == pytest.approx(1.0 - OMEGA * 55e-12 * many)


def test_the_main_part_has_most_current_where_the_reactance_is_least() -> None:
    made = chain_of(point_of(padding("parallel", "100 pF", tolerance="0 %", **LOSSLESS)))
    use = main_part(point_of(padding("parallel", "100 pF", tolerance="0 %", **LOSSLESS)))
    least = 1.0 - made.reactance_error
    ends = [
        made.current("low", corner, 100.0) * (1.0 - OMEGA * 100e-12 * corner.reactance * least) for corner in made.least
    ]
    assert high(use.current) == pytest.approx(max(ends) * (1.0 + VOLTAGE_ERROR), rel=1e-9)


@pytest.mark.parametrize("connection", ["parallel", "series"])
def test_the_bare_end_takes_no_credit_but_for_what_is_stated(connection: str) -> None:
    """Where all losses are stated it is the high end; a typical Q lowers that and not the bare one."""
    size = "100 pF" if connection == "parallel" else "1 nF"
    keys = {"tolerance": "5 %"}
    stated, typical = (
        point_of(padding(connection, size, **keys, **LOSSLESS)),
        point_of(padding(connection, size, **keys)),
    )
    for known, guess in (
        (main_part(stated), main_part(typical)),
        (padding_parts(stated)[0].use, padding_parts(typical)[0].use),
    ):
        for name in ("voltage", "current"):
            bare = getattr(known, f"bare_{name}")
            assert bare == pytest.approx(high(getattr(known, name)), rel=1e-9)
            assert high(getattr(guess, name)) < 0.995 * getattr(guess, f"bare_{name}")
            assert getattr(guess, f"bare_{name}") == pytest.approx(bare, rel=1e-2)


def test_an_unstated_tolerance_is_told_of_every_part_whose_share_it_moves() -> None:
    point = point_of(padding("parallel", "50 pF", tolerance="2 %"), padding("series", "1 nF"))
    across, beyond = (each.use for each in padding_parts(point))
    assert "10 %" in across.thin_voltage
    assert "10 %" in across.thin_current
    assert "10 %" in beyond.thin_voltage
    assert beyond.thin_current == ""
    assert "10 %" in main_part(point).thin_voltage
    alone = main_part(point_of(padding("series", "1 nF")))
    assert (alone.thin_current, "10 %" in alone.thin_voltage) == ("", True)
