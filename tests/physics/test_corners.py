"""The corner of every figure, found again by trying all of them on the circuit itself.

The circuit is solved in complex numbers: the loop's line, a capacitance across the port, the capacitor in series. What
the closed forms make of it (powers of one plus the excess, which end of which loss) is thereby held against the
circuit, and each end of a figure against the extreme over every combination of ends.
"""

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from functools import cache
from itertools import product
from math import cos, pi, sin, sqrt, tan
from typing import Any

import pytest
from designs import plain_design
from scipy.constants import c, mu_0

from magsafe.analysis.chain import (
    QUALITY_ERROR,
    REACTANCE_ERROR,
    RESISTANCE_ERROR,
    VOLTAGE_ERROR,
)
from magsafe.analysis.operating_point import OperatingPoint, operating_point
from magsafe.physics import conductor, ground, inductance, small_loop
from magsafe.spread import Spread

# The closed forms take Q much larger than 1: the circuit differs from them by (R/X)^2, below 1e-5 here.
CIRCUIT = 2e-5

LOW, LIKELY, HIGH = range(3)
RADIUS, CONDUCTOR = 0.5, 0.011
SERIES = (5e-3, 20e-3, 60e-3)
QUALITY = (3000.0, 1000.0, 400.0)  # the least loss first
ROUGH = (1.0, 1.0, 1.1)  # roughness and oxide add up to a tenth (common practice)
AT_PORT, OPPOSITE, ALONG = (1e-3, 2e-3, 9e-3), (2e-3, 3e-3, 7e-3), (3e-3, 5e-3, 8e-3)
LINE_LOSS = (0.2, 0.5, 1.0)


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
    ratio: tuple[float, float, float | None]
    plane: str = "vertical"
    height: float | None = None
    ground: str = "none"

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
        if self.by_quality:
            return {**made, "capacitor__series_resistance": None, "capacitor__quality_factor": ends}
        return {**made, "capacitor__series_resistance": stated(SERIES)}

    @property
    def x(self) -> float:
        return pi * 2.0 * pi * RADIUS * self.megahertz * 1e6 / c

    @property
    def growth(self) -> float:
        """The square of the size over a quarter wavelength: how every error of the closed forms grows."""
        return (2.0 * RADIUS * pi * self.megahertz * 1e6 / c / 0.25) ** 2


@dataclass(frozen=True)
class Circuit:
    """One state of everything that is uncertain: losses [ohm] as they sit, `rough` on the conductor's."""

    case: Case
    rough: float
    lugs: float
    opposite: float
    along: float
    own: float
    ratio: float
    shunt: float
    power: float
    taken: float

    def line(self, frequency: float) -> float:
        """Reactance of the loop's line [ohm], less the image's part."""
        x = pi * 2.0 * pi * RADIUS * frequency / c
        lumped = 2.0 * pi * frequency * inductance_of(self.case.megahertz)
        return lumped * tan(x) / x * (1.0 - self.taken)

    def at_port(self, frequency: float, resistance: float) -> complex:
        """Impedance of line and capacitance across the port, `shunt` given at the case's frequency."""
        here = self.case.megahertz * 1e6
        susceptance = self.shunt * self.case.x * tan(self.case.x) / self.line(here) * frequency / here
        loop = resistance + 1j * self.line(frequency)
        return loop / (1.0 + 1j * susceptance * loop)

    def answers(self) -> dict[str, float]:
        x, frequency = self.case.x, self.case.megahertz * 1e6
        # Any area radiates alike (reference notes, section 3): 8 pi^3/3 times the impedance of space.
        uniform = 8.0 * pi**3 / 3.0 * mu_0 * c * (pi * RADIUS**2 * (frequency / c) ** 2) ** 2
        radiation = uniform / cos(x) ** 2
        mean_square = (1.0 + sin(2.0 * x) / (2.0 * x)) / 2.0 / cos(x) ** 2
        conducting = rod(self.case.megahertz).real * self.rough * 2.0 * pi * RADIUS * mean_square
        joints = self.opposite / cos(x) ** 2 + self.along * mean_square
        line = self.ratio * radiation + conducting + joints
        seen = self.at_port(frequency, line)
        step = 1e-6
        above, below = (self.at_port(frequency * (1.0 + s), line).imag for s in (step, -step))
        slope = (above - below) / (2.0 * step)
        own = seen.imag / self.own if self.case.by_quality else self.own
        total = seen.real + self.lugs + own
        current = sqrt(self.power / total)
        into_line = abs(seen / (line + 1j * self.line(frequency)))
        free = self.at_port(frequency, radiation + conducting + joints).real + self.lugs + own
        sent = self.at_port(frequency, radiation).real
        return {
            "capacitor_peak_voltage": sqrt(2.0) * current * seen.imag * 10.0 ** (2.0 / 20.0),
            "capacitor_rms_current": current,
            "largest_current": current * into_line / cos(x),
            "unloaded_q": (slope + seen.imag) / 2.0 / total,
            "capacitor_dissipation": current**2 * own,
            "conductor_efficiency": sent / free,
            "total_resistance": total,
            "radiation_resistance": sent,
            "ground_resistance": sent * (image_of(self.case) - 1.0),
            "conductor_resistance": self.at_port(frequency, conducting).real,
            "joint_resistance": self.at_port(frequency, joints).real + self.lugs,
            "capacitor_resistance": own,
            "port_reactance": seen.imag,
        }


@cache
def rod(megahertz: float) -> complex:
    return complex(conductor.rod_impedance(megahertz * 1e6, 58e6, CONDUCTOR))


def inductance_of(megahertz: float) -> float:
    """Outside and inside of the conductor [H]."""
    inside = rod(megahertz).imag / (2.0 * pi * megahertz * 1e6) * 2.0 * pi * RADIUS
    return float(inductance.circle_inductance(RADIUS, CONDUCTOR)) + inside


@cache
def image_share(case: Case) -> float:
    """Largest share of the inductance that the image takes away: that of a perfect plane."""
    if case.height is None:
        return 0.0
    if case.plane == "vertical":
        mutual = -inductance.coplanar_mutual_inductance(RADIUS, RADIUS, 2.0 * case.height)
    else:
        mutual = float(inductance.coaxial_mutual_inductance(RADIUS, RADIUS, 2.0 * case.height))
    return mutual / inductance_of(case.megahertz)


def image_of(case: Case) -> float:
    return case.ratio[LIKELY] or 0.0


def perfect(form: Callable[[float], Any], megahertz: float, height: float) -> tuple[float, float, float]:
    """The ratio over a perfect plane: free space and the image are both possible, the image is likely."""
    image = float(form(4.0 * pi * megahertz * 1e6 / c * height))
    return min(1.0, image), image, max(1.0, image)


def soil(form: Callable[[float], Any], megahertz: float, height: float, short: float) -> tuple[float, float, None]:
    return max(0.0, min(1.0, float(form(4.0 * pi * megahertz * 1e6 / c * height))) - short), 1.0, None


UP, FLAT = ground.image_ratio_vertical, ground.image_ratio_horizontal
CASES = {
    "free space, series resistance": Case(14.2, False, (1.0, 1.0, 1.0)),
    "free space, quality factor": Case(22.0, True, (1.0, 1.0, 1.0)),
    "vertical over a plane, image below 1": Case(14.2, False, perfect(UP, 14.2, 6.3), height=6.3, ground="perfect"),
    "vertical over a plane, image above 1": Case(14.2, True, perfect(UP, 14.2, 2.0), height=2.0, ground="perfect"),
    "flat over a plane": Case(14.2, False, perfect(FLAT, 14.2, 3.0), "horizontal", 3.0, "perfect"),
    "vertical over soil": Case(
        14.2, True, soil(UP, 14.2, 6.3, ground.soil_shortfall(True, 13.0)), height=6.3, ground="average"
    ),
    "flat over soil": Case(
        14.2, False, soil(FLAT, 14.2, 3.0, ground.soil_shortfall(False, 13.0)), "horizontal", 3.0, "average"
    ),
}


def shunts() -> tuple[float, float, float]:
    return small_loop.closed_form_error(None).least_shunt, 0.0, small_loop.largest_shunt(CONDUCTOR / RADIUS)


def arriving() -> tuple[float, float, float]:
    least, likely, most = (100.0 * 10.0 ** (-loss / 10.0) for loss in sorted(LINE_LOSS, reverse=True))
    return least, likely, most


def losses(case: Case) -> tuple[tuple[float, float, float], ...]:
    both = (2.0 * AT_PORT[LOW], 2.0 * AT_PORT[LIKELY], 2.0 * AT_PORT[HIGH])
    return ROUGH, both, OPPOSITE, ALONG, QUALITY if case.by_quality else SERIES


def corners(case: Case) -> Iterator[Circuit]:
    ratios = [r for r in (case.ratio[LOW], case.ratio[HIGH]) if r is not None]
    ends = [(each[LOW], each[HIGH]) for each in losses(case)]
    for rough, lugs, opposite, along, own in product(*ends):
        powers = (arriving()[LOW], arriving()[HIGH])
        for ratio, shunt, power, taken in product(ratios, shunts(), powers, (0.0, image_share(case))):
            yield Circuit(case, rough, lugs, opposite, along, own, ratio, shunt, power, taken)


def middle(case: Case) -> Circuit:
    rough, lugs, opposite, along, own = (each[LIKELY] for each in losses(case))
    taken = image_share(case) if case.ground == "perfect" else 0.0  # of soil nobody knows: it is left out
    ratio = case.ratio[LIKELY] or 0.0
    return Circuit(case, rough, lugs, opposite, along, own, ratio, 0.0, arriving()[LIKELY], taken)


def stated_errors(case: Case) -> dict[str, tuple[float, float]]:
    """How far each figure may lie below and above the closed form, as the methods state it; a circle has no corners."""
    error, grown = small_loop.closed_form_error(None), case.growth
    volts = VOLTAGE_ERROR + error.voltage_below * grown, VOLTAGE_ERROR + error.voltage_above * grown
    along = RESISTANCE_ERROR, RESISTANCE_ERROR + error.efficiency_above * grown
    return {
        "capacitor_peak_voltage": volts,
        "capacitor_rms_current": volts,
        "largest_current": (VOLTAGE_ERROR + error.largest_current_below * grown, VOLTAGE_ERROR),
        "unloaded_q": (QUALITY_ERROR + error.quality_below * grown, QUALITY_ERROR + error.quality_above * grown),
        # Heat goes with the square of the current.
        "capacitor_dissipation": (2.0 * volts[0], 2.0 * volts[1]),
        "conductor_efficiency": along,
        "total_resistance": along,
        "radiation_resistance": along,
        "ground_resistance": along,
        "conductor_resistance": along,
        "capacitor_resistance": (0.0, 0.0),
        "port_reactance": (REACTANCE_ERROR, REACTANCE_ERROR),
    }


# More resistance from the soil lowers these and raises that one: their other ends stay open.
OPEN_BELOW = (
    "capacitor_peak_voltage",
    "capacitor_rms_current",
    "largest_current",
    "unloaded_q",
    "capacitor_dissipation",
)
OPEN_ABOVE = ("total_resistance",)


def found(case: Case) -> OperatingPoint:
    made = plain_design(**case.changes())
    return operating_point(made, made.transmission[0])


def spread_of(point: OperatingPoint, name: str) -> Spread:
    made: Spread = getattr(point.figures, name).spread
    return made


@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_the_likely_values_are_those_of_the_circuit(case: Case) -> None:
    point = found(case)
    for name, value in middle(case).answers().items():
        if name == "ground_resistance" and case.ground == "average":
            assert not spread_of(point, name).known
            continue
        assert spread_of(point, name).likely == pytest.approx(value, rel=CIRCUIT), name


@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_the_ends_are_the_extremes_over_every_corner(case: Case) -> None:
    """Neither beyond them, nor short of them: an end that is too far out condemns, one too near kills."""
    point, every = found(case), [circuit.answers() for circuit in corners(case)]
    for name, (below, above) in stated_errors(case).items():
        least, most = min(a[name] for a in every), max(a[name] for a in every)
        made = spread_of(point, name)
        if name == "ground_resistance" and case.ground == "average":
            continue
        if case.ratio[HIGH] is None and name in OPEN_BELOW:
            assert made.low is None, name
        else:
            assert made.low == pytest.approx(least - abs(least) * below, rel=CIRCUIT), name
        if case.ratio[HIGH] is None and name in OPEN_ABOVE:
            assert made.high is None, name
        else:
            assert made.high == pytest.approx(most + abs(most) * above, rel=CIRCUIT), name


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


@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_joints_at_most_are_those_of_the_circuit(case: Case) -> None:
    most = max(circuit.answers()["joint_resistance"] for circuit in corners(case))
    assert spread_of(found(case), "joint_resistance").high == pytest.approx(most, rel=CIRCUIT)


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
    case = CASES["vertical over a plane, image below 1"]
    made = plain_design(**{**case.changes(), **changes})
    point = operating_point(made, made.transmission[0])
    base = replace(middle(case), opposite=0.0, ratio=case.ratio[LOW] or 0.0, power=arriving()[HIGH])
    left = replace(base, lugs=proven["lugs"], along=proven["along"], own=proven.get("own", SERIES[LOW]))
    worst = [replace(left, shunt=shunt, taken=0.0).answers() for shunt in shunts()]
    error = 1.0 + stated_errors(case)["capacitor_peak_voltage"][1]
    volts = max(each["capacitor_peak_voltage"] for each in worst)
    amps = max(each["capacitor_rms_current"] for each in worst)
    assert point.bare_voltage == pytest.approx(volts * error, rel=CIRCUIT)
    assert point.bare_current == pytest.approx(amps * error, rel=CIRCUIT)
    credited = spread_of(point, "capacitor_peak_voltage").high or 0.0
    assert credited <= (point.bare_voltage or 0.0) * (1.0 + 1e-12)
