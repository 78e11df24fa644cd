"""The ends of each part's loss: what is stated, what is typical of its kind, and which end each question gets."""

from typing import Any

import numpy as np
import pytest
from designs import plain_design

from magsafe.analysis import losses
from magsafe.analysis.losses import Bend, Loss
from magsafe.analysis.operating_point import operating_point
from magsafe.design import tables
from magsafe.design.model import Capacitor, Conductor, Joint
from magsafe.design.quantities import Uncertain
from magsafe.physics import conductor

REACTANCE, FREQUENCY = 100.0, 14.2e6


def pipe(wall: float = 1e-3) -> Conductor:
    millimetres = f"{1e3 * wall:.9f} mm"
    made = plain_design(
        loop__conductor={"form": "tube", "outer_diameter": "22 mm", "wall": millimetres, "material": "copper tube"}
    )
    return made.loop.conductor


def ends_of(loss: Loss) -> tuple[float, float, float, float]:
    return loss.low, loss.bare, loss.likely, loss.high


def of_capacitor(kind: str = "vacuum variable", **keys: Any) -> Loss:
    made = plain_design(capacitor={"kind": kind, **keys})
    return losses.capacitor_loss(made.capacitor, REACTANCE, FREQUENCY)


def of_joint(kind: str | None, resistance: Uncertain | None, count: int = 3) -> Loss:
    joint = Joint.model_construct(name="lugs", count=count, kind=kind, resistance=resistance, at="capacitor")
    return losses.joint_loss(joint, 0.3)


def single(value: float) -> Uncertain:
    return Uncertain(value, value, value, single=True)


def test_a_joint_of_a_kind_has_the_typical_ends_and_proves_none() -> None:
    typical = tables.joint_resistance("bolted lug")
    assert typical.low is not None
    assert typical.likely is not None
    assert typical.high is not None
    found = of_joint("bolted lug", None)
    wanted = (3.0 * typical.low, 0.0, 3.0 * typical.likely, 3.0 * typical.high)
    assert ends_of(found) == pytest.approx(wanted)
    assert found.typical == ("joint, bolted lug",)


@pytest.mark.parametrize(
    ("kind", "stated", "low"),
    [("bolted lug", 0.4e-3, 0.1e-3), ("bolted lug", 0.05e-3, 0.05e-3), (None, 0.4e-3, 0.0)],
)
def test_one_value_of_a_joint_is_its_high_end_and_no_low_end(kind: str | None, stated: float, low: float) -> None:
    """0.1 mohm is the least that is typical of a bolted lug (common practice); less than that was stated once."""
    found = of_joint(kind, single(stated), count=1)
    assert ends_of(found) == pytest.approx((low, 0.0, stated, stated))
    assert found.typical == (() if kind is None else ("joint, bolted lug",))


def test_stated_ends_of_a_joint_rest_on_nothing_typical() -> None:
    found = of_joint("bolted lug", Uncertain(1e-3, 2e-3, 4e-3), count=1)
    assert ends_of(found) == pytest.approx((1e-3, 1e-3, 2e-3, 4e-3))
    assert found.typical == ()


def test_a_capacitor_of_a_kind_has_the_typical_ends_and_proves_none() -> None:
    """Typical Q of a vacuum variable: 2000, 4500, 10000 (common practice, as in the table of kinds)."""
    found = of_capacitor()
    assert ends_of(found) == pytest.approx((100.0 / 10000.0, 0.0, 100.0 / 4500.0, 100.0 / 2000.0))
    assert found.typical == ("capacitor, vacuum variable",)


def test_a_wiper_lowers_the_typical_q_of_an_air_variable_only() -> None:
    """Q 300, 700, 1500 with a wiper against 300, 1000, 4000 (common practice, as in the table of kinds)."""
    assert ends_of(of_capacitor("air variable", wiper=True)) == pytest.approx((1.0 / 15.0, 0.0, 1.0 / 7.0, 1.0 / 3.0))
    assert ends_of(of_capacitor("air variable")) == pytest.approx((1.0 / 40.0, 0.0, 0.1, 1.0 / 3.0))


@pytest.mark.parametrize(("stated", "low"), [("50 mohm", 0.010), ("4 mohm", 0.004)])
def test_one_series_resistance_is_its_high_end_and_no_low_end(stated: str, low: float) -> None:
    """A Q of 10000 is the most that is typical of a vacuum variable (common practice): 10 mohm of 100 ohm."""
    value = float(stated.split(maxsplit=1)[0]) * 1e-3
    found = of_capacitor(series_resistance=stated)
    assert ends_of(found) == pytest.approx((low, 0.0, value, value))
    assert found.typical == ("capacitor, vacuum variable",)


def test_stated_ends_of_a_capacitor_rest_on_nothing_typical() -> None:
    ends = {"low": "5 mohm", "likely": "20 mohm", "high": "60 mohm"}
    found = of_capacitor(series_resistance=ends)
    assert ends_of(found) == pytest.approx((5e-3, 5e-3, 20e-3, 60e-3))
    assert found.typical == ()
    found = of_capacitor(quality_factor={"low": 500, "likely": 1000, "high": 2000})
    assert ends_of(found) == pytest.approx((0.05, 0.05, 0.1, 0.2))
    assert found.typical == ()


def test_one_q_is_the_high_end_of_the_loss_and_no_low_end() -> None:
    found = of_capacitor(quality_factor=1000)
    assert ends_of(found) == pytest.approx((0.010, 0.0, 0.1, 0.1))
    assert found.typical == ("capacitor, vacuum variable",)


@pytest.mark.parametrize("stated_at", ["3.55 MHz", "56.8 MHz"])
def test_a_q_stated_elsewhere_is_wider_to_both_sides_and_proves_no_low_end(stated_at: str) -> None:
    """Four times away, below or above: the ratio to the power of 1.5, a factor of 8 either way (common practice)."""
    found = of_capacitor(quality_factor={"low": 500, "likely": 1000, "high": 2000}, quality_factor_at=stated_at)
    assert ends_of(found) == pytest.approx((0.05 / 8.0, 0.0, 0.1, 0.2 * 8.0))


def test_the_scatter_of_a_material_moves_both_ends_of_its_resistance() -> None:
    """Water pipe scatters by 6 % in conductivity; resistance by half of it where the skin is thin, and roughness."""
    row = tables.materials()["copper tube"]
    likely, better, worse = (
        float(conductor.tube_impedance(FREQUENCY, row.conductivity * share, 0.011, 0.001).real)
        for share in (1.0, 1.0 + row.scatter, 1.0 - row.scatter)
    )
    found, _ = losses.impedance_per_metre(pipe(), FREQUENCY, 293.15)
    assert found.likely == pytest.approx(likely)
    assert found.low == pytest.approx(better)
    assert found.high == pytest.approx(1.1 * worse)  # roughness and oxide add up to a tenth (common practice)
    assert better / likely == pytest.approx(1.06**-0.5, rel=0.002)


def test_the_scatter_of_a_material_reaches_the_figures_of_both_ends() -> None:
    """The conductor's own figure, and through it volts (least loss) and efficiency (most loss)."""
    pipe_loop = {
        "loop__conductor": {"form": "tube", "outer_diameter": "22 mm", "wall": "1 mm", "material": "copper tube"}
    }
    made = plain_design(**pipe_loop, transmission__0__frequency="3.6 MHz")
    point = operating_point(made, made.transmission[0])
    per_metre, _ = losses.impedance_per_metre(pipe(), 3.6e6, 293.15)
    spread = point.figures.conductor_resistance.spread
    assert per_metre.low is not None
    assert per_metre.likely is not None
    assert per_metre.high is not None
    assert spread.low is not None
    assert spread.likely is not None
    assert spread.high is not None
    # Beside the stated error of half a percent, what grows with the size is below half a percent at 0.038 wavelengths.
    assert spread.low / spread.likely == pytest.approx(per_metre.low / per_metre.likely * 0.995, rel=0.001)
    assert spread.high / spread.likely == pytest.approx(per_metre.high / per_metre.likely * 1.005, rel=0.006)
    assert spread.low < 0.98 * spread.likely


def test_a_thin_wall_keeps_its_resistance_between_its_ends() -> None:
    """Whatever the conductivity within the scatter: the wall is 1.6 skin depths, where thin walls dip."""
    row = tables.materials()["copper tube"]
    wall = 1.6 * float(conductor.skin_depth(FREQUENCY, row.conductivity))
    tried = row.conductivity * np.linspace(1.0 - row.scatter, 1.0 + row.scatter, 301)
    resistance = conductor.tube_impedance(FREQUENCY, tried, 0.011, wall).real
    found, _ = losses.impedance_per_metre(pipe(wall), FREQUENCY, 293.15)
    assert found.low is not None
    assert found.high is not None
    assert found.low == pytest.approx(float(resistance.min()), rel=1e-4)
    assert found.high == pytest.approx(1.1 * float(resistance.max()), rel=1e-4)


def test_figures_take_the_typical_low_ends_and_the_proof_does_not() -> None:
    """The typical lows are the figures' low ends; that they are nobody's proof is kept apart, in `bare`."""
    changes = {
        "loop__joint": [{"name": "lugs", "at": "capacitor", "kind": "bolted lug", "count": 2}],
        "capacitor__series_resistance": None,
    }
    made = plain_design(**changes)
    point = operating_point(made, made.transmission[0])
    figures = point.figures
    reactance = figures.port_reactance.spread.likely or 0.0
    least = 1.0 - 0.005 * 0.25**2  # at most so much is taken off by the charge nearer to the middle, at this size
    assert figures.joint_resistance.spread.low == pytest.approx(0.2e-3)
    capacitor = figures.capacitor_resistance.spread.low or 0.0
    assert reactance / 10000.0 * least <= capacitor <= reactance / 10000.0
    parts = (figures.radiation_resistance, figures.conductor_resistance)
    total = sum(part.spread.low or 0.0 for part in parts) + 0.2e-3 + capacitor
    assert figures.total_resistance.spread.low == pytest.approx(total, rel=0.004)  # the stated error, taken once
    assert set(point.typical) == {"joint, bolted lug", "capacitor, vacuum variable"}


def test_a_loss_grows_with_the_excess_by_where_it_sits() -> None:
    """Along the loop by its square, of a given Q by itself, at the port not at all: parallel connection."""
    bend = Bend(0.1, 0.02)
    assert Loss(1.0, 1.0, 2.0, 3.0, grows=2).at("high", bend) == pytest.approx(3.0 * 1.21)
    assert Loss(1.0, 1.0, 2.0, 3.0, grows=1).at("likely", bend) == pytest.approx(2.0 * 1.1 * 0.98)
    assert Loss(1.0, 0.5, 2.0, 3.0, grows=0).at("bare", bend) == 0.5


def test_where_each_part_sits_is_how_its_loss_grows() -> None:
    def grows(at: str) -> int:
        joint = Joint.model_construct(name="j", count=1, kind=None, resistance=single(1e-3), at=at)
        return losses.joint_loss(joint, 0.3).grows

    assert (grows("capacitor"), grows("spread"), grows("opposite")) == (0, 2, 2)
    assert of_capacitor(series_resistance="5 mohm").grows == 0
    assert of_capacitor(quality_factor=1000).grows == 1
    per_metre, _ = losses.impedance_per_metre(pipe(), FREQUENCY, 293.15)
    along = losses.conductor_loss(per_metre, 3.0, 0.3)
    assert along.grows == 2
    assert along.bare == along.low > 0.0


def test_capacitors_without_a_kind_of_wiper_ignore_it() -> None:
    part = Capacitor(kind="vacuum variable")
    assert losses.capacitor_typical(part) == tables.capacitor_quality_factor("vacuum variable")
