"""The corner of every figure, found again by trying all of them on the circuit itself.

The circuit is solved in complex numbers: the loop's line as its current was solved, a capacitance across the port, the
capacitor in series. What the analysis makes of it (powers of one plus the excess, which end of which loss) is thereby
held against the circuit, and each end of a figure against the extreme over every combination of ends.
"""

from collections.abc import Iterator
from dataclasses import dataclass, replace
from functools import cache
from itertools import product
from math import pi, sqrt
from typing import Any

import numpy as np
import pytest
from designs import plain_design

from magsafe.analysis.chain import GAP_CAPACITANCE, QUALITY_ERROR, REACTANCE_ERROR, RESISTANCE_ERROR, VOLTAGE_ERROR
from magsafe.analysis.flow import Flow, flow
from magsafe.analysis.operating_point import OperatingPoint, operating_point
from magsafe.analysis.soil import permittivities
from magsafe.analysis.surroundings import Surroundings, surroundings
from magsafe.design.model import Design
from magsafe.physics import conductor, thin_wire
from magsafe.physics.geometry import cut, round_turn, upright, wind
from magsafe.physics.thin_wire import LoopCurrents
from magsafe.physics.wave_spectrum import WaveSpectrum
from magsafe.spread import Spread

LOW, LIKELY, HIGH = range(3)
RADIUS, CONDUCTOR = 0.5, 0.011
GAP = GAP_CAPACITANCE[0] + GAP_CAPACITANCE[1] * 0.022  # F, of the conductor's 22 mm
SERIES = (5e-3, 20e-3, 60e-3)
QUALITY = (3000.0, 1000.0, 400.0)  # the least loss first
# Roughness and oxide add up to a tenth (common practice); where the capacitor sits there may be no conductor.
ROUGH = (1.0 - 4.0 * CONDUCTOR / (2.0 * pi * RADIUS), 1.0, 1.1)
AT_PORT, OPPOSITE, ALONG = (1e-3, 2e-3, 9e-3), (2e-3, 3e-3, 7e-3), (3e-3, 5e-3, 8e-3)
LINE_LOSS = (0.2, 0.5, 1.0)
STEP = 1e-4  # of the frequency, to both sides


def stated(ends: tuple[float, float, float]) -> dict[str, str]:
    names = ("low", "likely", "high")
    return {name: f"{1e3 * end:.6f} mohm" for name, end in zip(names, ends, strict=True)}


JOINTS = [
    {"name": "lugs", "at": "capacitor", "count": 2, "resistance": stated(AT_PORT)},
    {"name": "seam", "at": "opposite", "resistance": stated(OPPOSITE)},
    {"name": "sleeves", "at": "spread", "resistance": stated(ALONG)},
]


@dataclass(frozen=True)
class Case:
    """A loop of a metre with every kind of loss, as a file states it and as the circuit has it."""

    megahertz: float
    by_quality: bool
    plane: str = "vertical"
    height: float | None = None
    ground: str = "none"
    position: str | None = None

    def changes(self) -> dict[str, Any]:
        ends = dict(zip(("low", "likely", "high"), sorted(QUALITY), strict=True))
        made: dict[str, Any] = {
            "loop__joint": JOINTS,
            "loop__plane": self.plane,
            "site__ground": self.ground,
            "transmission__0__frequency": f"{self.megahertz} MHz",
            "feed": {
                "line_loss": {
                    name: f"{loss} dB" for name, loss in zip(("low", "likely", "high"), LINE_LOSS, strict=True)
                }
            },
            "margins": {"overshoot": "2 dB"},
        }
        if self.height is not None:
            made["loop__centre_height"] = f"{self.height} m"
        if self.position is not None:
            made["capacitor__position"] = self.position
        if self.by_quality:
            return {**made, "capacitor__series_resistance": None, "capacitor__quality_factor": ends}
        return {**made, "capacitor__series_resistance": stated(SERIES)}

    @property
    def places(self) -> tuple[str | None, ...]:
        """Where the capacitor may be; the likely place first."""
        if self.plane == "horizontal":
            return (None,)
        return (self.position,) if self.position else ("top", "bottom", "side", "other side")

    @property
    def soil(self) -> bool:
        return self.ground not in ("none", "perfect")


@cache
def design_of(case: Case) -> Design:
    return plain_design(**case.changes())


@cache
def solved(case: Case, place: str | None, image: bool, share: float = 1.0) -> Flow:
    """The solved current at a share of the case's frequency."""
    return flow(design_of(case), share * case.megahertz * 1e6, place, image)


@dataclass(frozen=True)
class State:
    """Where the capacitor is, whether the image counts, and what of radiation and ground is in the line [ohm].

    `shift` is the reactance that soil adds to the line [ohm], as much at neighbouring frequencies.
    """

    place: str | None
    image: bool
    radiated: float
    shift: float = 0.0


@dataclass(frozen=True)
class Over:
    """A current over the ground stated: what its radiation and each soil together draw [ohm]."""

    place: str | None
    image: bool
    alone: float
    radiated: tuple[float, ...]
    shift: tuple[float, ...]


@cache
def over(case: Case) -> tuple[Over, ...]:
    """Over soil either current's plane waves, for the likely soil and then the span's; over a plane the image's."""
    found, frequency = [], case.megahertz * 1e6
    for image, place in product((False, True), case.places):
        here, alone = solved(case, place, image), solved(case, place, image=False).radiation
        if not case.soil:
            found += [Over(place, image, alone, (here.radiation,), (0.0,))] if image else []
            continue
        soils = permittivities(design_of(case), frequency)
        waves = WaveSpectrum.of(here.segments(), frequency, soils)
        drawn = waves.power(soils, np.zeros(1))[:, 0]
        drawn = drawn if image else drawn - waves.free_power + alone
        moved = 0.0 * drawn if image else waves.reactive_power(soils, np.zeros(1))[:, 0]
        found.append(Over(place, image, alone, tuple(drawn), tuple(moved)))
    return tuple(found)


@cache
def ways(case: Case) -> Surroundings:
    """Every way the loop may be, held against the half-space integral in `test_surroundings`."""
    return surroundings(design_of(case), case.megahertz * 1e6)


def placed(case: Case, made: tuple[Any, ...]) -> tuple[State, ...]:
    """States by the place of the capacitor."""
    places = {(solved(case, place, image).shape, image): place for image, place in product((False, True), case.places)}
    assert len(places) == 2 * len(case.places)
    return tuple(
        State(places[each.flow.shape, each.flow.image], each.flow.image, each.radiated, each.shift) for each in made
    )


def states(case: Case) -> tuple[State, ...]:
    """Every way the loop may be; over soil with the least and with the most resistance that it may have."""
    if case.soil:
        return *placed(case, ways(case).least), *placed(case, ways(case).most)
    images = (False, True) if case.ground == "perfect" else (False,)
    return tuple(
        State(place, image, solved(case, place, image).radiation) for place, image in product(case.places, images)
    )


def likely_state(case: Case) -> State:
    """The ground stated: the image's current over a plane, and that of free space over soil."""
    image = case.ground == "perfect"
    if case.soil:
        return State(case.places[0], False, over(case)[0].radiated[0], over(case)[0].shift[0])
    return State(case.places[0], image, solved(case, case.places[0], image).radiation)


@dataclass(frozen=True)
class Circuit:
    """One state of everything that is uncertain: losses [ohm] as they sit, `rough` on the conductor's."""

    case: Case
    state: State
    rough: float
    lugs: float
    opposite: float
    along: float
    own: float
    shunt: float
    power: float

    def line(self, share: float, image: bool) -> float:
        """Reactance of the loop's line with the conductor's inside [ohm], at a share of the frequency.

        The inside, a few thousandths of all, is taken over the same length at neighbouring frequencies.
        """
        length = solved(self.case, self.state.place, image).internal_length
        outside = solved(self.case, self.state.place, image, share).reactance
        return outside + self.state.shift + rod(share * self.case.megahertz).imag * length

    def at_port(self, share: float, resistance: float, image: bool) -> complex:
        """Impedance of line and capacitance across the port [ohm]."""
        omega = 2.0 * pi * share * self.case.megahertz * 1e6
        loop = resistance + 1j * self.line(share, image)
        return loop / (1.0 + 1j * omega * self.shunt * loop)

    def answers(self) -> dict[str, float]:
        return {**self._in_place(), **replace(self, state=replace(self.state, shift=0.0))._alone()}

    def lossy(self, image: bool) -> tuple[float, float]:
        """Resistance of the conductor and of the joints along it, at 1 A into the line [ohm]."""
        here = solved(self.case, self.state.place, image)
        conducting = rod(self.case.megahertz).real * self.rough * here.conductor_length
        return conducting, self.opposite * here.opposite_square + self.along * here.mean_square

    def _in_place(self) -> dict[str, float]:
        image = self.state.image
        conducting, joints = self.lossy(image)
        line = self.state.radiated + conducting + joints
        seen = self.at_port(1.0, line, image)
        above, below = (self.at_port(1.0 + step, line, image).imag for step in (STEP, -STEP))
        slope = (above - below) / (2.0 * STEP)
        own = seen.imag / self.own if self.case.by_quality else self.own
        total = seen.real + self.lugs + own
        current = sqrt(self.power / total)
        into_line = abs(seen / (line + 1j * self.line(1.0, image)))
        return {
            "capacitor_peak_voltage": sqrt(2.0) * current * seen.imag * 10.0 ** (2.0 / 20.0),
            "capacitor_rms_current": current,
            "largest_current": current * into_line * solved(self.case, self.state.place, image).largest,
            "unloaded_q": (slope + seen.imag) / 2.0 / total,
            "capacitor_dissipation": current**2 * own,
            "total_resistance": total,
            "conductor_resistance": self.at_port(1.0, conducting, image).real,
            "joint_resistance": self.at_port(1.0, joints, image).real + self.lugs,
            "capacitor_resistance": own,
            "port_reactance": seen.imag,
        }

    def _alone(self) -> dict[str, float]:
        """Figures that leave the ground out."""
        conducting, joints = self.lossy(image=False)
        radiation = solved(self.case, self.state.place, image=False).radiation
        seen = self.at_port(1.0, radiation + conducting + joints, image=False)
        own = seen.imag / self.own if self.case.by_quality else self.own
        sent = self.at_port(1.0, radiation, image=False).real
        return {"conductor_efficiency": sent / (seen.real + self.lugs + own), "radiation_resistance": sent}


@cache
def rod(megahertz: float) -> complex:
    return complex(conductor.rod_impedance(megahertz * 1e6, 58e6, CONDUCTOR))


CASES = {
    "free space, series resistance": Case(14.2, False),
    "free space, quality factor": Case(22.0, True),
    "0.3 wavelengths": Case(28.6, True),
    "upright over a plane, image below 1": Case(14.2, False, height=6.3, ground="perfect"),
    "upright over a plane, image above 1": Case(14.2, True, height=2.0, ground="perfect"),
    "upright and low over a plane": Case(21.0, True, height=0.55, ground="perfect"),
    "flat over a plane": Case(14.2, False, "horizontal", 3.0, "perfect"),
    "upright over soil": Case(14.2, True, height=6.3, ground="average"),
    "upright over soil, capacitor at the bottom": Case(21.0, False, height=0.7, ground="average", position="bottom"),
    "flat over soil": Case(14.2, False, "horizontal", 3.0, "average"),
}


def tolerance(case: Case) -> float:
    """The analysis takes Q much larger than 1: the circuit differs from it by the square of R/X."""
    first = middle(case).answers()
    return 2e-5 + 3.0 * (first["total_resistance"] / first["port_reactance"]) ** 2


def arriving() -> tuple[float, float, float]:
    least, likely, most = (100.0 * 10.0 ** (-loss / 10.0) for loss in sorted(LINE_LOSS, reverse=True))
    return least, likely, most


def losses(case: Case) -> tuple[tuple[float, float, float], ...]:
    both = (2.0 * AT_PORT[LOW], 2.0 * AT_PORT[LIKELY], 2.0 * AT_PORT[HIGH])
    return ROUGH, both, OPPOSITE, ALONG, QUALITY if case.by_quality else SERIES


SHUNTS = (-GAP, 0.0, GAP)


def corners(case: Case) -> Iterator[Circuit]:
    ends = [(each[LOW], each[HIGH]) for each in losses(case)]
    powers = (arriving()[LOW], arriving()[HIGH])
    for state, shunt, power in product(states(case), SHUNTS, powers):
        for rough, lugs, opposite, along, own in product(*ends):
            yield Circuit(case, state, rough, lugs, opposite, along, own, shunt, power)


def middle(case: Case) -> Circuit:
    rough, lugs, opposite, along, own = (each[LIKELY] for each in losses(case))
    return Circuit(case, likely_state(case), rough, lugs, opposite, along, own, 0.0, arriving()[LIKELY])


@cache
def extremes(case: Case) -> dict[str, tuple[float, float]]:
    every = [circuit.answers() for circuit in corners(case)]
    return {name: (min(a[name] for a in every), max(a[name] for a in every)) for name in every[0]}


# How far each figure may lie off the solved one, as the methods state it; a circle has no corners. Heat goes with the
# square of the current.
STATED_ERRORS = {
    "capacitor_peak_voltage": VOLTAGE_ERROR,
    "capacitor_rms_current": VOLTAGE_ERROR,
    "largest_current": VOLTAGE_ERROR,
    "unloaded_q": QUALITY_ERROR,
    "capacitor_dissipation": 2.0 * VOLTAGE_ERROR,
    "conductor_efficiency": RESISTANCE_ERROR,
    "total_resistance": RESISTANCE_ERROR,
    "radiation_resistance": RESISTANCE_ERROR,
    "conductor_resistance": RESISTANCE_ERROR,
    "joint_resistance": 0.0,
    "capacitor_resistance": 0.0,
    "port_reactance": REACTANCE_ERROR,
}


def stated_error(case: Case, name: str) -> float:
    """Of the reactance it is one of the inductance, and steeper curves move by more."""
    if name != "port_reactance":
        return STATED_ERRORS[name]
    likely = replace(middle(case), state=State(case.places[0], False, 0.0))
    above, below = (likely.line(1.0 + step, image=False) for step in (STEP, -STEP))
    return REACTANCE_ERROR * max(1.0, (above - below) / (2.0 * STEP) / likely.line(1.0, image=False))


@cache
def found(case: Case) -> OperatingPoint:
    made = design_of(case)
    return operating_point(made, made.transmission[0])


def spread_of(point: OperatingPoint, name: str) -> Spread:
    made: Spread = getattr(point.figures, name).spread
    return made


@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_the_likely_values_are_those_of_the_circuit(case: Case) -> None:
    point = found(case)
    for name, value in middle(case).answers().items():
        assert spread_of(point, name).likely == pytest.approx(value, rel=tolerance(case)), name


@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_the_ends_are_the_extremes_over_every_corner(case: Case) -> None:
    """Neither beyond them, nor short of them: an end that is too far out condemns, one too near kills.

    The gap's excess may be taken of the line without what soil adds to its reactance: a product of two small shares.
    """
    point, omega = found(case), 2.0 * pi * case.megahertz * 1e6
    near = tolerance(case) + 3.0 * omega * GAP * max(abs(state.shift) for state in states(case))
    for name in STATED_ERRORS:
        error, (least, most) = stated_error(case, name), extremes(case)[name]
        made = spread_of(point, name)
        assert made.low == pytest.approx(least * (1.0 - error), rel=near), name
        assert made.high == pytest.approx(most * (1.0 + error), rel=near), name


@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_the_ground_adds_what_image_or_soil_do(case: Case) -> None:
    """Over soil its ends are those of the span, with either current; nothing is added in free space."""
    made = spread_of(found(case), "ground_resistance")
    if case.ground == "none":
        assert (made.low, made.likely, made.high) == (0.0, 0.0, 0.0)
        return
    low: list[float] = []
    high: list[float] = []
    for each, shunt in product(over(case), SHUNTS):
        here = replace(middle(case), state=State(each.place, each.image, 0.0), shunt=shunt)
        # Some for soils between those that are sampled, and over each what the current itself changes.
        pair = [np.array(other.radiated) for other in over(case) if other.place == each.place]
        apart = np.abs(pair[0] - pair[-1])
        least, most = (
            float((np.minimum(pair[0], pair[-1]) - apart).min()),
            float((np.maximum(pair[0], pair[-1]) + apart).max()),
        )
        if len(pair[0]) > 1:
            least, most = least - 0.01 * each.alone - 0.04 * max(0.0, least - each.alone), most * 1.01
        ends = (max(0.0, least), most)
        for found_ends, end, error in ((low, ends[0], -RESISTANCE_ERROR), (high, ends[1], RESISTANCE_ERROR)):
            found_ends.append(here.at_port(1.0, end * (1.0 + error) - each.alone, each.image).real)
    first, near = over(case)[0], tolerance(case)
    assert made.likely == pytest.approx(first.radiated[0] - first.alone, rel=near)
    assert made.low == pytest.approx(min(low), rel=near, abs=near * first.alone)
    assert made.high == pytest.approx(max(high), rel=near, abs=near * first.alone)


@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_figures_that_follow_from_others_turn_their_ends(case: Case) -> None:
    """A bandwidth is widest at the least Q, a tuning capacitance largest at the least reactance."""
    point, omega = found(case), 2.0 * pi * case.megahertz * 1e6
    quality, reactance = spread_of(point, "unloaded_q"), spread_of(point, "port_reactance")
    width, capacitance = spread_of(point, "half_power_bandwidth"), spread_of(point, "tuning_capacitance")
    swr2 = spread_of(point, "swr2_bandwidth")
    for end, turned in (("low", "high"), ("likely", "likely"), ("high", "low")):
        q = getattr(quality, turned)
        wanted = None if q is None else pytest.approx(2.0 * case.megahertz * 1e6 / q)
        assert getattr(width, end) == wanted
        wanted = None if q is None else pytest.approx(case.megahertz * 1e6 / q / 2.0**0.5)
        assert getattr(swr2, end) == wanted
        cancelled = 1.0 / (omega * getattr(reactance, turned))
        assert getattr(capacitance, end) == pytest.approx(cancelled, rel=1e-9, abs=0.0)
        loaded = getattr(spread_of(point, "loaded_q"), end)
        assert loaded == (None if getattr(quality, end) is None else pytest.approx(getattr(quality, end) / 2.0))


def drawn(circuit: Circuit) -> float:
    """Square of the current into the line for each watt [A2/W]: what the fields are those of."""
    image = circuit.state.image
    answers = circuit.answers()
    line = circuit.state.radiated + sum(circuit.lossy(image))
    seen = circuit.at_port(1.0, line, image)
    into_line = abs(seen / (line + 1j * circuit.line(1.0, image)))
    return into_line**2 / answers["total_resistance"]


@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_fields_are_those_of_the_current_that_each_state_would_draw(case: Case) -> None:
    """At the least losses; over soil in free space with the least resistance, over the image with its own or less."""
    cases, near = found(case).ground_cases, tolerance(case)
    wanted = placed(case, ways(case).fields) if case.soil else states(case)
    rough, lugs, opposite, along, own_loss = (each[LOW] for each in losses(case))
    least = Circuit(case, wanted[0], rough, lugs, opposite, along, own_loss, 0.0, 100.0)
    squares = {
        (state.place, state.image): max(drawn(replace(least, state=state, shunt=shunt)) for shunt in SHUNTS)
        for state in wanted
    }
    assert len(cases) == len(squares)
    for made, place in zip(cases, [*(s for s in squares if not s[1]), *(s for s in squares if s[1])], strict=True):
        assert made.flow.image == place[1]
        own = solved(case, place[0], place[1])
        assert made.flow.shape == own.shape
        assert made.square == pytest.approx(squares[place], rel=near)
        assert made.bare_square == pytest.approx(squares[place], rel=near)  # every low end is stated
        assert made.likely_square == pytest.approx(drawn(middle(case)), rel=near)


def test_fields_without_credit_count_no_loss_that_is_not_stated() -> None:
    case = CASES["free space, series resistance"]
    made = plain_design(**{**case.changes(), "loop__joint": [], "capacitor__series_resistance": "20 mohm"})
    point = operating_point(made, made.transmission[0])
    nothing = Circuit(case, states(case)[0], ROUGH[LOW], 0.0, 0.0, 0.0, 0.0, 0.0, 100.0)
    bare = max(drawn(replace(nothing, shunt=shunt)) for shunt in SHUNTS)
    for each in point.ground_cases:
        assert each.bare_square == pytest.approx(bare, rel=tolerance(case))
        assert each.square < 0.99 * bare


def test_where_the_capacitor_sits_is_tried_where_it_matters() -> None:
    """Low over a plane its place moves the volts: what is stated is one place, what is not stated holds all three."""
    case = CASES["upright and low over a plane"]
    anywhere = spread_of(found(case), "capacitor_peak_voltage")
    there = [
        spread_of(found(replace(case, position=place)), "capacitor_peak_voltage") for place in ("top", "bottom", "side")
    ]
    assert anywhere.high == pytest.approx(max(each.high or 0.0 for each in there), rel=1e-9)
    assert anywhere.low == pytest.approx(min(each.low or 0.0 for each in there), rel=1e-9)
    lows = [each.low or 0.0 for each in there]
    assert max(lows) > 1.005 * min(lows)


@pytest.mark.parametrize("thickness", [0.002, 0.01, 0.022])
@pytest.mark.parametrize("share", [0.05, 0.25])
def test_the_gap_capacitance_covers_ports_of_other_widths(thickness: float, share: float) -> None:
    """Ports from half the width that is computed to twice it: Foster's B = -1/X moves by less than what is tried."""
    frequency = share * 299_792_458.0 / (2.0 * pi * RADIUS)
    radius = thickness * RADIUS
    own = max(4.0 * radius, 0.01 * 2.0 * pi * RADIUS)
    longest = max(2.0 * pi * RADIUS / 48, 3.0 * radius)

    def susceptance(gap: float) -> float:
        made = upright(cut(wind(round_turn(RADIUS)), radius, longest, gap), 0.0)
        part = thin_wire.potentials(made, frequency)
        current: LoopCurrents = thin_wire.solve(made, np.array([frequency]), (part,))
        return -1.0 / float(current.reactance[0])

    computed = susceptance(own)
    moved = [(susceptance(width * own) - computed) / (2.0 * pi * frequency) for width in (0.5, 2.0)]
    allowed = GAP_CAPACITANCE[0] + GAP_CAPACITANCE[1] * 2.0 * radius
    assert moved[0] > 0.0 > moved[1]  # a narrower port has more capacitance across it
    assert max(abs(each) for each in moved) < allowed
    assert max(abs(each) for each in moved) > 0.05 * allowed  # and no more is tried than may be


UNSTATED = [
    # joints and capacitor as the file has them, then what of lugs, joint along the loop, and capacitor is proven
    (
        {"loop__joint": [{"name": "lugs", "at": "capacitor", "kind": "bolted lug"}]},
        {"lugs": 0.0, "along": 0.0},
    ),
    (
        {"loop__joint": [{"name": "lugs", "at": "capacitor", "resistance": "2 mohm"}]},
        {"lugs": 0.0, "along": 0.0},
    ),
    (
        {"loop__joint": [{"name": "sleeves", "at": "spread", "resistance": stated(ALONG)}]},
        {"lugs": 0.0, "along": ALONG[LOW]},
    ),
    (
        {"loop__joint": [], "capacitor__series_resistance": "20 mohm"},
        {"lugs": 0.0, "along": 0.0, "own": 0.0},
    ),
    (
        {"loop__joint": [], "capacitor__series_resistance": None},
        {"lugs": 0.0, "along": 0.0, "own": 0.0},
    ),
]


@pytest.mark.parametrize(("changes", "proven"), UNSTATED)
def test_volts_and_amps_without_credit_count_only_what_is_stated_as_a_low_end(
    changes: dict[str, Any], proven: dict[str, float]
) -> None:
    """A kind, or one value, lowers no volts by proof: that loss may be nothing; the conductor's is always there."""
    case = CASES["upright over a plane, image below 1"]
    made = plain_design(**{**case.changes(), **changes})
    point = operating_point(made, made.transmission[0])
    base = replace(middle(case), rough=ROUGH[LOW], opposite=0.0, power=arriving()[HIGH])
    left = replace(base, lugs=proven["lugs"], along=proven["along"], own=proven.get("own", SERIES[LOW]))
    worst = [replace(left, state=state, shunt=shunt).answers() for state in states(case) for shunt in SHUNTS]
    error = 1.0 + VOLTAGE_ERROR
    volts = max(each["capacitor_peak_voltage"] for each in worst)
    amps = max(each["capacitor_rms_current"] for each in worst)
    assert point.bare_voltage == pytest.approx(volts * error, rel=tolerance(case))
    assert point.bare_current == pytest.approx(amps * error, rel=tolerance(case))
    credited = spread_of(point, "capacitor_peak_voltage").high or 0.0
    assert credited <= (point.bare_voltage or 0.0) * (1.0 + 1e-12)
