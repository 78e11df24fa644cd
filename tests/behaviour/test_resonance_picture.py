"""The measured resonance beside the computed one: drawn where the circuit has it, in words too, alike on every run."""

import re
from collections.abc import Sequence
from dataclasses import dataclass
from math import log10
from xml.etree import ElementTree

import numpy as np
import pytest
from designs import measured_changes, plain_design
from numpy.typing import NDArray

from magsafe.checks.measured_sheet import BesideRecord, CeilingsRecord, MeasuredSheet, ReadingRecord
from magsafe.checks.resonance_curves import ResonanceCurves, of_reading, of_record
from magsafe.checks.run import check
from magsafe.checks.sheet import DesignRecord, FigureRecord, MeasurementRecord, PowerCeiling, Value
from magsafe.reports.resonance import NO_POINTS, WIDTH, record_picture, resonance_picture

SVG = "{http://www.w3.org/2000/svg}"
LINE = 50.0
RESONANCE, INDUCTANCE = 7.1e6, 2.5e-6
Points = Sequence[tuple[float, float, float]]


@dataclass(frozen=True)
class Circuit:
    """A series circuit of coil, capacitor and resistance [ohm], and a coupling loop beside it, all of it by hand."""

    resistance: float
    mutual: float = 50e-9

    @property
    def quality(self) -> float:
        return 2.0 * np.pi * RESONANCE * INDUCTANCE / self.resistance

    @property
    def coupling(self) -> float:
        return (2.0 * np.pi * RESONANCE * self.mutual) ** 2 / (self.resistance * LINE)

    def reflection(self, frequency: NDArray[np.float64]) -> NDArray[np.complex128]:
        """Return that at the coupling loop, turned so that it is 1 far off, where the coupling loop is a short."""
        omega, tuned = 2.0 * np.pi * frequency, 2.0 * np.pi * RESONANCE
        loop = self.resistance + 1j * omega * INDUCTANCE + tuned**2 * INDUCTANCE / (1j * omega)
        seen = (tuned * self.mutual) ** 2 / loop
        return np.asarray(-(seen - LINE) / (seen + LINE))

    def points(self, count: int = 41, widths: float = 3.0) -> Points:
        half = RESONANCE / (2.0 * self.quality) * (1.0 + self.coupling)
        frequency = RESONANCE + widths * half * np.linspace(-1.0, 1.0, count)
        return [
            (float(f), float(r.real), float(r.imag)) for f, r in zip(frequency, self.reflection(frequency), strict=True)
        ]


BUILT, PARTS, BEST, WORST = Circuit(0.12), Circuit(0.09), Circuit(0.07), Circuit(0.1)


def value(circuit: Circuit, off: float = 0.0) -> Value:
    low, high = circuit.quality * (1.0 - off), circuit.quality * (1.0 + off)
    return Value(low=low, likely=circuit.quality, high=high, unit="1")


def figure(low: float | None, likely: float | None, high: float | None) -> FigureRecord:
    return FigureRecord(low=low, likely=likely, high=high, unit="1", method="by hand", source="by hand")


COMPUTED = figure(WORST.quality, PARTS.quality, BEST.quality)


def sheet_of(
    built: Circuit = BUILT,
    points: Points | None = None,
    *,
    name: str = "40 m voice",
    computed: FigureRecord = COMPUTED,
    coupled: bool = True,
    carried: float = 1.0,
) -> MeasuredSheet:
    kappa, ceiling = (
        built.coupling,
        PowerCeiling(value=1.0, at_limit=1.0, transmission=0, held_by=None, complete=True, left_out=()),
    )
    exact = Value(low=RESONANCE, likely=RESONANCE, high=RESONANCE, unit="Hz")
    return MeasuredSheet(
        magsafe="0",
        date="2026-05-04",
        design=DesignRecord(name="hand.toml", sha256="0" * 64, text=""),
        transmission=name,
        frequency=RESONANCE,
        power=100.0,
        reading=ReadingRecord(
            by="sweep",
            file=None,
            resonance=exact,
            unloaded_q=value(built, 0.02),
            loaded_q=None,
            coupling=Value(low=0.9 * kappa, likely=kappa, high=1.1 * kappa, unit="1") if coupled else None,
            line_loss=Value(low=0.0, likely=0.0, high=0.0, unit="dB"),
            branches=(),
            points_in_band=None,
            residual=None,
            noise=None,
            systematic=None,
            points=tuple(built.points() if points is None else points),
        ),
        figures={"unloaded_q": BesideRecord(computed=computed, measured=figure(None, carried * built.quality, None))},
        power_ceiling=CeilingsRecord(computed=ceiling, measured=ceiling),
        findings=(),
        verdict="clear",
        notes=(),
        cautions=(),
    )


def curves_of(sheet: MeasuredSheet) -> ResonanceCurves:
    found = of_reading(sheet)
    assert found is not None
    return found


class Drawn:
    """A picture, with its scales read from the marks at its edges."""

    def __init__(self, sheet: MeasuredSheet) -> None:
        self.svg = resonance_picture(sheet, as_dots=False).decode("utf-8")
        self.root = ElementTree.fromstring(self.svg)

    def names(self, start: str) -> list[str]:
        found = (each.get("id") or "" for each in self.root.iter())
        return [name for name in found if name.startswith(start)]

    def one(self, name: str) -> ElementTree.Element:
        return next(each for each in self.root.iter() if each.get("id") == name)

    def path(self, name: str) -> NDArray[np.float64]:
        data = next(self.one(name).iter(f"{SVG}path")).get("d") or ""
        return np.array(re.findall(r"[ML] ([-.\d]+) ([-.\d]+)", data), dtype=float)

    def dots(self, name: str) -> NDArray[np.float64]:
        found = [(float(u.get("x") or "nan"), float(u.get("y") or "nan")) for u in self.one(name).iter(f"{SVG}use")]
        return np.array(found).reshape(-1, 2)

    def scale(self, start: str, axis: int) -> tuple[float, float]:
        """Return offset and slope of one axis: what is marked against where it is."""
        names = self.names(start)
        marked = [float(name.removeprefix(start)) for name in names]
        at = [self.path(name)[0, axis] for name in names]
        slope, offset = np.polyfit(at, marked, 1)
        assert np.polyval((slope, offset), at) == pytest.approx(marked, abs=1e-3 * np.ptp(marked))
        return float(offset), float(slope)

    def plane(self, at: NDArray[np.float64]) -> NDArray[np.complex128]:
        """Return the reflections at some places of the left panel."""
        (a, b), (c, d) = self.scale("real-", 0), self.scale("imaginary-", 1)
        return np.asarray(a + b * at[:, 0] + 1j * (c + d * at[:, 1]))

    def ratio(self, at: NDArray[np.float64]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
        """Return offsets [Hz] and ratios at some places of the right panel."""
        a, b = self.scale("hertz-", 0)
        names = self.names("ratio-")
        down = [self.path(name)[0, 1] for name in names]
        slope, offset = np.polyfit(down, [log10(float(name.removeprefix("ratio-"))) for name in names], 1)
        return np.asarray(a + b * at[:, 0]), np.asarray(10.0 ** (offset + slope * at[:, 1]))

    def words(self) -> str:
        return " ".join("".join(each.itertext()) for each in self.root.iter(f"{SVG}text"))


@pytest.fixture(scope="module")
def drawn() -> Drawn:
    return Drawn(sheet_of())


# Against the circuit ---------------------------------------------------------------------------------------


@pytest.mark.parametrize("built", [BUILT, Circuit(0.12, 12e-9), Circuit(0.12, 140e-9)])
def test_the_curves_are_those_of_a_circuit_worked_out_by_hand(built: Circuit) -> None:
    """Both: coil, capacitor and a mutual inductance in series and in parallel, not the form that is drawn."""
    found = curves_of(sheet_of(built))
    parts = Circuit(PARTS.resistance, built.mutual)
    offset = np.linspace(-2e4, 2e4, 81)
    computed = found.computed
    assert computed is not None
    for tuned, circuit in ((found.measured, built), (computed, parts)):
        assert tuned.reflection(offset, RESONANCE) == pytest.approx(circuit.reflection(RESONANCE + offset), abs=1e-9)
        assert tuned.loaded_q == pytest.approx(circuit.quality / (1.0 + circuit.coupling))
        seen = abs(circuit.reflection(np.array([RESONANCE]))[0])
        assert tuned.lowest_ratio == pytest.approx((1.0 + seen) / (1.0 - seen))


def test_the_load_of_the_line_stays_where_the_resistance_differs() -> None:
    """The parts have 0.09 ohm for the 0.12 measured: the same mutual inductance, so a third more coupling."""
    found = curves_of(sheet_of())
    assert found.computed is not None
    assert found.computed.coupling / found.measured.coupling == pytest.approx(0.12 / 0.09)
    assert found.least is not None
    assert found.most is not None
    assert found.least.coupling == pytest.approx(WORST.coupling)
    assert found.most.coupling == pytest.approx(BEST.coupling)


def test_a_q_computed_for_another_frequency_is_carried_to_the_resonance() -> None:
    """Where the measured Q grew by a tenth on the way to the transmission, the computed one is a tenth less here."""
    found = curves_of(sheet_of(carried=1.1))
    assert found.computed is not None
    assert found.computed.unloaded_q == pytest.approx(PARTS.quality / 1.1)
    assert found.measured.unloaded_q == pytest.approx(BUILT.quality)


def test_an_offset_has_the_ratio_that_is_asked_for() -> None:
    found = curves_of(sheet_of())
    off = RESONANCE * found.measured.detuning(10.0)
    for side in (-1.0, 1.0):
        seen = abs(BUILT.reflection(np.array([RESONANCE + side * off]))[0])
        assert (1.0 + seen) / (1.0 - seen) == pytest.approx(10.0, rel=1e-2)


# Drawn -----------------------------------------------------------------------------------------------------


def test_the_circles_are_drawn_to_scale_within_the_rim(drawn: Drawn) -> None:
    (_, across), (_, down) = drawn.scale("real-", 0), drawn.scale("imaginary-", 1)
    assert across == pytest.approx(-down, rel=1e-3)
    assert abs(drawn.plane(drawn.path("rim"))) == pytest.approx(1.0, abs=5e-3)
    for name, circuit in (("measured", BUILT), ("computed", PARTS), ("most", BEST), ("least", WORST)):
        diameter = 2.0 * circuit.coupling / (1.0 + circuit.coupling)
        seen = drawn.plane(drawn.path(f"circle-{name}"))
        assert abs(seen - (1.0 - 0.5 * diameter)) == pytest.approx(0.5 * diameter, abs=3e-3)
        assert seen.real.min() == pytest.approx(1.0 - diameter, abs=3e-3)


def test_the_points_and_the_resonances_are_where_they_were_read(drawn: Drawn) -> None:
    read = np.array([complex(real, imaginary) for _, real, imaginary in BUILT.points()])
    assert drawn.plane(drawn.dots("read-circle")) == pytest.approx(read, abs=3e-3)
    for name, circuit in (("measured", BUILT), ("computed", PARTS)):
        at = drawn.plane(drawn.dots(f"resonance-{name}"))[0]
        assert at == pytest.approx(circuit.reflection(np.array([RESONANCE]))[0], abs=3e-3)


def test_the_ratios_are_those_of_the_circuits(drawn: Drawn) -> None:
    for name, circuit in (("measured", BUILT), ("computed", PARTS), ("most", BEST), ("least", WORST)):
        offset, ratio = drawn.ratio(drawn.path(f"swr-{name}"))
        size = abs(circuit.reflection(RESONANCE + offset))
        assert ratio == pytest.approx((1.0 + size) / (1.0 - size), rel=0.03)
        assert ratio.max() > 8.0 or name == "least"
    offset, ratio = drawn.ratio(drawn.dots("read-swr"))
    size = abs(BUILT.reflection(RESONANCE + offset))
    assert len(offset) > 5
    assert ratio == pytest.approx((1.0 + size) / (1.0 - size), rel=0.03)


@pytest.mark.parametrize(("built", "top"), [(BUILT, "10"), (Circuit(0.8, 50e-9), "30"), (Circuit(3.0, 50e-9), "100")])
def test_a_loop_far_from_the_computed_one_stays_on_the_picture(built: Circuit, top: str) -> None:
    """Of a Q thirty times less: both circles, and both lowest ratios, lie within their panels."""
    made = Drawn(sheet_of(built))
    assert made.names("ratio-")[-1] == f"ratio-{top}"
    frame_left, frame_right = made.path("ratio-1")[:, 0]
    for name in ("measured", "computed"):
        offset, ratio = made.ratio(made.path(f"swr-{name}"))
        coupling = curves_of(sheet_of(built)).measured.coupling if name == "measured" else PARTS.coupling
        assert ratio.min() == pytest.approx(max(coupling, 1.0 / coupling), rel=0.03)
        across = made.path(f"swr-{name}")[:, 0]
        assert frame_left - 0.1 <= across.min() < across.max() <= frame_right + 0.1
        assert offset.min() < 0.0 < offset.max()
        circle = made.path(f"circle-{name}")
        assert circle.min() > 0.0


def test_lines_are_told_apart_without_colour(drawn: Drawn) -> None:
    dashes = {
        name: re.search(r"stroke-dasharray: ([^;\"]+)", ElementTree.tostring(drawn.one(f"circle-{name}"), "unicode"))
        for name in ("measured", "computed", "most", "least")
    }
    assert dashes["computed"] is None
    assert dashes["measured"] is None  # its dots tell it
    most, least = dashes["most"], dashes["least"]
    assert most is not None
    assert least is not None
    assert most[1] != least[1]


# Words -----------------------------------------------------------------------------------------------------


def test_it_says_what_is_measured_and_what_is_computed(drawn: Drawn) -> None:
    told = " ".join(drawn.words().split())
    for each in (
        "Measured on 2026-05-04 at 7.1 MHz: Q 929 (911 … 948), undercoupled, SWR 1.21 at resonance.",
        "Computed from the parts, behind the same feed: Q 1240 (1120 … 1590), overcoupled, SWR 1.11 at resonance.",
        "reflection, real part",
        "kHz from 7.1 MHz",
    ):
        assert each in told
    about = drawn.root.findtext(f"{SVG}desc") or ""
    assert "Q 929" in about
    assert drawn.root.get("aria-label") == "Reflection about resonance, measured and computed: 40 m voice, 7.1 MHz"
    assert drawn.root.get("width") == f"{WIDTH:.2f}mm"


@pytest.mark.parametrize("name", ["<script>alert(1)</script>", "$x$ & ]]> \"quoted\" 'too'", "a\tb\x07" + "w" * 300])
def test_names_stay_names(name: str) -> None:
    made = Drawn(sheet_of(name=name))
    assert "<script" not in made.svg
    assert len(made.root.get("aria-label") or "") < 130
    assert name.split(maxsplit=1)[0][:20] in (made.root.get("aria-label") or "")


def test_it_is_the_same_to_the_byte_and_dots_are_dots() -> None:
    for as_dots in (False, True):
        first, second = (resonance_picture(sheet_of(), as_dots=as_dots) for _ in range(2))
        assert first == second
    assert first.startswith(b"\x89PNG\r\n")


def test_one_point_is_enough_and_noise_beyond_the_rim_is_no_ratio() -> None:
    one = Drawn(sheet_of(points=BUILT.points(1)))
    assert len(one.dots("read-circle")) == 1
    wild = Drawn(sheet_of(points=[(RESONANCE, 1.2, 0.0), (RESONANCE + 500.0, 0.2, 0.3)]))
    assert len(wild.dots("read-circle")) == 2
    assert len(wild.dots("read-swr")) == 1
    assert wild.plane(wild.dots("read-circle"))[0] == pytest.approx(1.2, abs=3e-3)


@pytest.mark.parametrize(("points", "coupled"), [([], True), (None, False)])
def test_without_points_or_coupling_there_is_no_picture(points: Points | None, coupled: bool) -> None:
    with pytest.raises(ValueError, match=NO_POINTS):
        resonance_picture(sheet_of(points=points, coupled=coupled), as_dots=False)


def test_what_is_not_computed_is_not_drawn() -> None:
    alone = Drawn(sheet_of(computed=figure(None, None, None)))
    assert alone.names("circle-") == ["circle-measured"]
    assert "From the parts nothing is computed here." in " ".join(alone.words().split())
    open_end = Drawn(sheet_of(computed=figure(None, PARTS.quality, BEST.quality)))
    assert "circle-least" not in open_end.names("circle-")
    assert "The lowest Q of the parts is not known." in " ".join(open_end.words().split())


# On the sheet ----------------------------------------------------------------------------------------------


def test_a_sheet_holds_what_its_picture_needs() -> None:
    changes = measured_changes(2500.0)
    points = [["7.0990 MHz", 0.4, -0.5], ["7.1 MHz", 0.05, 0.0], ["7.1010 MHz", 0.4, 0.5]]
    changes["measured"][0] |= {"coupling": {"low": 0.8, "likely": 0.9, "high": 1.0}, "points": points}
    point = check(plain_design(**changes)).operating_points[0]
    record = point.measurement
    assert record is not None
    assert record.points == ((7.099e6, 0.4, -0.5), (7.1e6, 0.05, 0.0), (7.101e6, 0.4, 0.5))
    assert record.coupling is not None
    assert (record.date, record.unloaded_q.likely, record.coupling.likely) == ("2026-05-04", 2500.0, 0.9)
    curves = of_record(record)
    assert curves is not None
    assert curves.computed is not None
    bare = check(plain_design()).operating_points[0]
    assert bare.measurement is None
    assert curves.computed.unloaded_q == pytest.approx(bare.figures["unloaded_q"].likely, rel=1e-6)
    picture = record_picture(point)
    assert picture is not None
    assert "Q 2500" in picture.alt
    assert record_picture(bare) is None


def test_a_record_without_points_has_no_picture() -> None:
    point = check(plain_design(**measured_changes(2500.0))).operating_points[0]
    assert isinstance(point.measurement, MeasurementRecord)
    assert of_record(point.measurement) is None
    assert record_picture(point) is None
