"""The ends of each part's loss: what is stated, what is typical of its kind, and which end each question gets."""

from typing import Any

import numpy as np
import pytest
from designs import plain_design

from magsafe.analysis import losses
from magsafe.analysis.chain import GAP_CAPACITANCE, RESISTANCE_ERROR
from magsafe.analysis.flow import Flow, flow
from magsafe.analysis.losses import Corner, Loss
from magsafe.analysis.operating_point import OperatingPoint, operating_point
from magsafe.analysis.surroundings import State
from magsafe.design import tables
from magsafe.design.model import Capacitor, Conductor, Joint
from magsafe.design.quantities import Uncertain
from magsafe.physics import conductor, strip
from magsafe.physics.proximity import row_proximity

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
    return losses.capacitor_loss(made.capacitor, FREQUENCY, REACTANCE)


def of_joint(kind: str | None, resistance: Uncertain | None, count: int = 3) -> Loss:
    joint = Joint.model_construct(name="lugs", count=count, kind=kind, resistance=resistance, at="capacitor")
    return losses.joint_loss(joint)


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
    assert ends_of(found) == pytest.approx((1.0 / 10000.0, 0.0, 1.0 / 4500.0, 1.0 / 2000.0))
    assert found.typical == ("capacitor, vacuum variable",)


def test_a_wiper_lowers_the_typical_q_of_an_air_variable_only() -> None:
    """Q 300, 700, 1500 with a wiper against 300, 1000, 4000 (common practice, as in the table of kinds)."""
    assert ends_of(of_capacitor("air variable", wiper=True)) == pytest.approx((1 / 1500, 0.0, 1 / 700, 1 / 300))
    assert ends_of(of_capacitor("air variable")) == pytest.approx((1 / 4000, 0.0, 1 / 1000, 1 / 300))


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
    assert ends_of(found) == pytest.approx((1 / 2000, 1 / 2000, 1 / 1000, 1 / 500))
    assert found.typical == ()


def test_one_q_is_the_high_end_of_the_loss_and_no_low_end() -> None:
    found = of_capacitor(quality_factor=1000)
    assert ends_of(found) == pytest.approx((1 / 10000, 0.0, 1 / 1000, 1 / 1000))
    assert found.typical == ("capacitor, vacuum variable",)


@pytest.mark.parametrize("stated_at", ["3.55 MHz", "56.8 MHz"])
def test_a_q_stated_elsewhere_is_wider_to_both_sides_and_proves_no_low_end(stated_at: str) -> None:
    """Four times away, below or above: the ratio to the power of 1.5, a factor of 8 either way (common practice)."""
    found = of_capacitor(quality_factor={"low": 500, "likely": 1000, "high": 2000}, quality_factor_at=stated_at)
    assert ends_of(found) == pytest.approx((1 / 2000 / 8.0, 0.0, 1 / 1000, 1 / 500 * 8.0))
    assert found.typical == ("capacitor, Q at another frequency",)


def per_metre(made_of: Conductor, frequency: float = FREQUENCY, coldest: float = 293.15) -> Loss:
    return losses.conductor_loss(made_of, frequency, coldest)[0]


def conductor_of(**keys: Any) -> Conductor:
    return plain_design(loop__conductor=keys).loop.conductor


def test_the_scatter_of_a_material_moves_both_ends_of_its_resistance() -> None:
    """Water pipe scatters by 6 % in conductivity; resistance by half of it where the skin is thin, and roughness."""
    row = tables.materials()["copper tube"]
    likely, better, worse = (
        complex(conductor.tube_impedance(FREQUENCY, row.conductivity * share, 0.011, 0.001))
        for share in (1.0, 1.0 + row.scatter, 1.0 - row.scatter)
    )
    found, internal = losses.conductor_loss(pipe(), FREQUENCY, 293.15)
    assert found.likely == pytest.approx(likely.real)
    assert found.low == found.bare == pytest.approx(better.real)
    assert found.high == pytest.approx(1.1 * worse.real)  # roughness and oxide add up to a tenth (common practice)
    assert better.real / likely.real == pytest.approx(1.06**-0.5, rel=0.002)
    assert internal == pytest.approx(likely.imag)
    assert (found.where, found.typical) == ("conductor", ())


def test_a_cold_conductor_loses_less_at_its_low_end_only() -> None:
    """Copper follows 0.39 % per kelvin (common practice): 40 K colder is 15.6 % less resistivity, 8 % less loss."""
    rod = conductor_of(form="rod", outer_diameter="22 mm", conductivity="58 MS/m")
    warm, cold = per_metre(rod), per_metre(rod, coldest=253.15)
    assert cold.low / warm.low == pytest.approx((1.0 - 0.0039 * 40.0) ** 0.5, rel=1e-3)
    assert (cold.likely, cold.high) == (warm.likely, warm.high)
    assert per_metre(rod, coldest=313.15) == warm  # the conductor is not warmer than it is said to be


def test_the_scatter_of_a_material_reaches_the_figures_of_both_ends() -> None:
    """The conductor's own figure, and through it volts (least loss) and efficiency (most loss)."""
    pipe_loop = {
        "loop__conductor": {"form": "tube", "outer_diameter": "22 mm", "wall": "1 mm", "material": "copper tube"}
    }
    made = plain_design(**pipe_loop, transmission__0__frequency="3.6 MHz")
    point = operating_point(made, made.transmission[0])
    along = per_metre(pipe(), 3.6e6)
    spread = point.figures.conductor_resistance.spread
    assert spread.low is not None
    assert spread.likely is not None
    assert spread.high is not None
    # The port's gap moves it by less than a thousandth at 0.038 wavelengths; at least, there is no conductor in it.
    port = 1.0 - 0.044 / np.pi
    least = along.low / along.likely * port * (1.0 - RESISTANCE_ERROR)
    assert spread.low / spread.likely == pytest.approx(least, rel=0.002)
    assert spread.high / spread.likely == pytest.approx(along.high / along.likely * (1.0 + RESISTANCE_ERROR), rel=0.002)
    assert spread.low < 0.98 * spread.likely


def test_a_thin_wall_keeps_its_resistance_between_its_ends() -> None:
    """Whatever the conductivity within the scatter: the wall is 1.6 skin depths, where thin walls dip."""
    row = tables.materials()["copper tube"]
    wall = 1.6 * float(conductor.skin_depth(FREQUENCY, row.conductivity))
    tried = row.conductivity * np.linspace(1.0 - row.scatter, 1.0 + row.scatter, 301)
    resistance = conductor.tube_impedance(FREQUENCY, tried, 0.011, wall).real
    found = per_metre(pipe(wall))
    assert found.low == pytest.approx(float(resistance.min()), rel=1e-4)
    assert found.high == pytest.approx(1.1 * float(resistance.max()), rel=1e-4)


@pytest.mark.parametrize(("form", "factors"), [("braid", (1.5, 2.0, 3.0)), ("corrugated", (1.1, 1.25, 1.4))])
def test_a_rough_form_is_a_smooth_one_times_its_factor_and_the_factor_proves_nothing(
    form: str, factors: tuple[float, float, float]
) -> None:
    """Against a rod of the same diameter; the factors are common practice, and 1.1 is for roughness and oxide."""
    keys = {"outer_diameter": "22 mm", "conductivity": "58 MS/m"}
    rough, smooth = per_metre(conductor_of(form=form, **keys)), per_metre(conductor_of(form="rod", **keys))
    alone = complex(conductor.rod_impedance(FREQUENCY, 58e6, 0.011)).real
    low, likely, high = factors
    assert ends_of(rough) == pytest.approx((low * alone, alone, likely * alone, 1.1 * high * alone))
    assert ends_of(smooth) == pytest.approx((alone, alone, alone, 1.1 * alone))
    assert rough.typical == (f"conductor, {form}",)
    assert smooth.typical == ()
    made = plain_design(loop__conductor={"form": form, **keys})
    point = operating_point(made, made.transmission[0])
    assert f"conductor, {form}" in point.typical
    plain = operating_point(plain_design(), made.transmission[0])
    assert point.bare_voltage == pytest.approx(plain.bare_voltage, rel=1e-9)
    assert (point.figures.capacitor_peak_voltage.spread.high or 0.0) < 0.97 * (point.bare_voltage or 0.0)


def test_a_strip_has_its_own_resistance_with_the_error_of_its_method() -> None:
    """A rod of the same perimeter loses less: the current of a strip crowds at its edges."""
    keys = {"form": "strip", "width": "40 mm", "thickness": "1 mm", "conductivity": "58 MS/m"}
    found, internal = losses.conductor_loss(conductor_of(**keys), FREQUENCY, 293.15)
    alone = strip.strip_impedance(FREQUENCY, 58e6, 0.040, 0.001)
    error = max(alone.below, alone.above)
    assert found.likely == pytest.approx(alone.impedance.real)
    assert found.low == found.bare == pytest.approx(alone.impedance.real * (1.0 - error))
    assert found.high == pytest.approx(1.1 * alone.impedance.real * (1.0 + error))
    assert internal == pytest.approx(alone.impedance.imag)
    even = complex(conductor.rod_impedance(FREQUENCY, 58e6, 0.082 / (2.0 * np.pi))).real
    assert even < found.likely < 2.5 * even


def test_thick_plating_carries_all_the_current_and_thin_plating_none() -> None:
    """Skin depth of copper and silver is 17 um at 14.2 MHz; silver at 20 degC has 61-63 MS/m (handbooks, memory)."""
    keys: dict[str, Any] = {"form": "rod", "outer_diameter": "22 mm", "conductivity": "15 MS/m"}

    def plated(thickness: str) -> Loss:
        return per_metre(conductor_of(**keys, plating={"material": "silver", "thickness": thickness}))

    bare, row = per_metre(conductor_of(**keys)), tables.materials()["silver"]
    massive = complex(conductor.rod_impedance(FREQUENCY, row.conductivity, 0.011)).real
    assert plated("200 um").likely == pytest.approx(massive, rel=0.002)
    assert plated("0.01 um").likely == pytest.approx(bare.likely, rel=0.005)
    between = plated("5 um")
    assert massive < between.likely < bare.likely
    assert between.low <= between.likely <= between.high / 1.1


def test_plating_that_is_poorer_than_its_base_is_held_at_every_pair_of_ends() -> None:
    """Tin on copper: what the base or the layer may scatter, nothing falls out of the ends."""
    keys: dict[str, Any] = {"form": "rod", "outer_diameter": "22 mm", "material": "copper tube"}
    made_of = conductor_of(**keys, plating={"material": "tin", "thickness": "5 um"})
    found = per_metre(made_of)
    layer, base = (tables.materials()[name] for name in ("tin", "copper tube"))
    tried = []
    for own in np.linspace(-layer.scatter, layer.scatter, 5):
        for below in np.linspace(-base.scatter, base.scatter, 5):
            sigma = base.conductivity * (1.0 + below)
            surface = complex(
                np.ravel(conductor.plated_surface_impedance(FREQUENCY, layer.conductivity * (1.0 + own), 5e-6, sigma))[
                    0
                ]
            )
            smooth = complex(conductor.rod_impedance(FREQUENCY, sigma, 0.011)).real
            tried.append(smooth * surface.real * sigma * float(conductor.skin_depth(FREQUENCY, sigma)))
    assert found.low == pytest.approx(min(tried), rel=1e-6)
    assert found.high == pytest.approx(1.1 * max(tried), rel=1e-6)


@pytest.mark.parametrize("name", ["brass", "aluminium 6061-T6"])
def test_each_material_warms_and_cools_by_its_own_coefficient(name: str) -> None:
    """The skin's resistance goes as the root of the resistivity, which is linear (Dellinger 1911, memory)."""
    row = tables.materials()[name]
    assert row.coefficient != pytest.approx(losses.COPPER_COEFFICIENT, rel=0.02)
    keys = {"form": "rod", "outer_diameter": "22 mm", "material": name}
    cool, hot = (conductor_of(**keys, temperature=each) for each in ("20 degC", "80 degC"))
    assert per_metre(hot).likely / per_metre(cool).likely == pytest.approx((1.0 + 60.0 * row.coefficient) ** 0.5, 1e-3)
    cold = per_metre(cool, coldest=253.15)
    assert cold.low / per_metre(cool).low == pytest.approx((1.0 - 40.0 * row.coefficient) ** 0.5, 1e-3)


def test_a_thick_layer_warms_cools_and_scatters_as_its_own_metal() -> None:
    """Twelve skin depths of silver on copper are silver: every end is that of a silver rod."""
    silver = {"form": "rod", "outer_diameter": "22 mm", "material": "silver"}
    plated = {"form": "rod", "outer_diameter": "22 mm", "conductivity": "58 MS/m"}
    layer = {"material": "silver", "thickness": "200 um"}
    for temperature, coldest in (("20 degC", 293.15), ("80 degC", 353.15), ("20 degC", 253.15), ("20 degC", 333.15)):
        found = per_metre(conductor_of(**plated, plating=layer, temperature=temperature), coldest=coldest)
        wanted = per_metre(conductor_of(**silver, temperature=temperature), coldest=coldest)
        assert ends_of(found) == pytest.approx(ends_of(wanted), rel=2e-3), (temperature, coldest)


def test_between_thin_and_thick_the_larger_error_of_a_strip_counts() -> None:
    """At eight skin depths the stated error grows with conductivity, and the material scatters: all three are held."""
    row = tables.materials()["copper tube"]
    thickness = 8.0 * float(conductor.skin_depth(FREQUENCY, row.conductivity))
    made_of = conductor_of(form="strip", width="20 mm", thickness=f"{1e3 * thickness:.9f} mm", material="copper tube")
    better, likely, worse = (
        strip.strip_impedance(FREQUENCY, row.conductivity * (1.0 + share * row.scatter), 0.020, thickness)
        for share in (1.0, 0.0, -1.0)
    )
    error = max(each.above for each in (better, likely, worse))
    assert error > 1.03 * min(each.above for each in (better, likely, worse))
    found = per_metre(made_of)
    assert found.bare == pytest.approx(better.impedance.real * (1.0 - error), rel=1e-9)
    assert found.high == pytest.approx(1.1 * worse.impedance.real * (1.0 + error), rel=1e-9)


def solved(megahertz: float, **changes: Any) -> OperatingPoint:
    made = plain_design(transmission__0__frequency=f"{megahertz} MHz", **changes)
    return operating_point(made, made.transmission[0])


def likely_of(point: OperatingPoint, name: str) -> float:
    return float(getattr(point.figures, name).spread.likely)


def of_pair(closeness: float) -> float:
    """Loss of each of two equal currents side by side over that of a lone one (reference notes, section 1)."""
    tau = float(np.arccosh(closeness))
    k = np.arange(1, int(40.0 / tau) + 2)
    series = 1.0 + 2.0 * np.sum(1.0 / np.cosh(k * tau) ** 2)
    return float(series / np.tanh(tau) - 2.0 / np.sinh(tau) ** 2)


@pytest.mark.parametrize("arrangement", ["side by side", "nested"])
@pytest.mark.parametrize("closeness", [1.25, 2.0])
def test_turns_lose_what_their_crowded_current_loses(closeness: float, arrangement: str) -> None:
    """At a thousandth of a wavelength the current is the same everywhere: length times resistance times the factors.

    The link that closes the winding, two spacings across (one, where nested) and one out and back each, loses as a lone
    conductor does; nested turns of a spiral are shorter inwards: in the middle by half of two spacings.
    """
    spacing, nested = closeness * 10e-3, arrangement == "nested"
    changes: dict[str, Any] = {
        "loop__turns": 2,
        "loop__turn_spacing": f"{1e3 * spacing} mm",
        "loop__turn_arrangement": arrangement,
        "loop__conductor": {"form": "rod", "outer_diameter": "10 mm", "conductivity": "58 MS/m"},
    }
    alone = complex(conductor.rod_impedance(0.1e6, 58e6, 5e-3)).real
    turns = 2.0 * np.pi - (2.0 * np.pi * spacing if nested else 0.0)
    wanted = alone * (turns * of_pair(closeness) + 4.0 * spacing)
    found = likely_of(solved(0.1, **changes), "conductor_resistance")
    assert found == pytest.approx(wanted, rel=0.004)


def test_of_three_turns_the_current_in_each_counts_with_its_own_factor() -> None:
    """The middle one of three loses less than the outer two; the square of the current is summed here by Simpson."""
    changes: dict[str, Any] = {
        "loop__turns": 3,
        "loop__turn_spacing": "13 mm",
        "loop__conductor": {"form": "rod", "outer_diameter": "10 mm", "conductivity": "58 MS/m"},
        "transmission__0__frequency": "4 MHz",
    }
    made = plain_design(**changes)
    factors = row_proximity(3, 0.013, 0.010).loss_factor
    assert factors[0] > 1.3 * factors[1]
    here = flow(made, 4e6, "top", image=False)
    wire, start = here.currents.wire, here.currents.current[0]
    end = np.roll(start, -1)
    mid = 0.5 * (start + end)
    square = (np.abs(start) ** 2 + 4.0 * np.abs(mid) ** 2 + np.abs(end) ** 2) / 6.0 * wire.length
    assert square[wire.turn == 1].sum() > 1.1 * square[wire.turn == 0].sum()
    wanted = sum(factors[i] * square[wire.turn == i].sum() for i in range(3)) + square[wire.turn == -1].sum()
    alone = complex(conductor.rod_impedance(4e6, 58e6, 0.005)).real
    found = likely_of(operating_point(made, made.transmission[0]), "conductor_resistance")
    assert found == pytest.approx(wanted * alone, rel=1e-6)
    assert here.mean_square == pytest.approx(square.sum() / wire.length.sum(), rel=1e-6)


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
    gap = GAP_CAPACITANCE[0] + GAP_CAPACITANCE[1] * 0.022
    least = 1.0 - 2.0 * np.pi * 7.1e6 * gap * reactance  # of the loss that a given Q has, with the gap's capacitance
    assert figures.joint_resistance.spread.low == pytest.approx(0.2e-3)
    capacitor = figures.capacitor_resistance.spread.low or 0.0
    assert capacitor == pytest.approx(reactance / 10000.0 * least, rel=1e-4)
    parts = (figures.radiation_resistance, figures.conductor_resistance)
    total = sum(part.spread.low or 0.0 for part in parts) + 0.2e-3 + capacitor
    assert figures.total_resistance.spread.low == pytest.approx(total, rel=0.004)  # the stated error, taken once
    assert set(point.typical) == {"joint, bolted lug", "capacitor, vacuum variable"}


def corner(excess: float, internal: float = 0.0) -> tuple[Corner, Flow]:
    """The plain loop at 14.2 MHz with an excess of its reactance, and its current."""
    here = flow(plain_design(transmission__0__frequency="14.2 MHz"), 14.2e6, "top", image=False)
    return Corner(State(here, 0.07), excess, internal), here


def test_a_loss_is_seen_at_the_port_by_where_it_sits() -> None:
    """Along the loop by its square, of a given Q by itself, at the port not at all: parallel connection."""
    at, here = corner(0.1)
    for where, weight in (
        ("conductor", 1.21 * here.conductor_length),
        ("spread", 1.21 * here.mean_square),
        ("opposite", 1.21 * here.opposite_square),
        ("port", 1.0),
        ("capacitor", 1.1 * here.reactance),
    ):
        loss = Loss(1.0, 0.5, 2.0, 3.0, where=where)  # type: ignore[arg-type]
        for end, value in (("low", 1.0), ("bare", 0.5), ("likely", 2.0), ("high", 3.0)):
            assert loss.at(end, at) == pytest.approx(value * weight, rel=1e-12), where
    assert at.radiated == pytest.approx(0.07 * 1.21)


@pytest.mark.parametrize("megahertz", [7.1, 14.2, 21.0])
def test_where_a_loss_sits_along_the_loop_is_the_cosine_of_the_short_circuited_line(megahertz: float) -> None:
    """The current of a line of half the perimeter, short-circuited opposite the port (Storer 1956, memory).

    What the current gains on its way is that of the line, and up to a quarter more: charge beside the port's gap.
    """
    here = flow(plain_design(transmission__0__frequency=f"{megahertz} MHz"), megahertz * 1e6, "top", image=False)
    x = np.pi * np.pi * megahertz * 1e6 / 299_792_458.0
    mean = (1.0 + np.sin(2.0 * x) / (2.0 * x)) / (2.0 * np.cos(x) ** 2)
    opposite = 1.0 / np.cos(x) ** 2
    assert 1.0 < (here.mean_square - 1.0) / (mean - 1.0) < 1.25
    assert 1.0 < (here.opposite_square - 1.0) / (opposite - 1.0) < 1.25
    assert here.largest**2 == pytest.approx(here.opposite_square, rel=1e-3)
    assert here.conductor_length == pytest.approx(np.pi * here.mean_square, rel=0.002)
    assert here.internal_length == pytest.approx(here.conductor_length, rel=1e-3)


def test_the_inside_of_the_conductor_adds_to_reactance_and_slope() -> None:
    """Internal reactance goes as the root of the frequency where the skin is thin: half of it counts in the slope."""
    (with_it, here), (without, _) = corner(0.1, 0.02), corner(0.1)
    inside = 0.02 * here.internal_length
    assert without.reactance == pytest.approx(1.1 * here.reactance)
    assert with_it.reactance - without.reactance == pytest.approx(1.1 * inside, rel=1e-6)
    assert with_it.slope - without.slope == pytest.approx(1.21 * 1.5 * inside, rel=1e-6)
    assert without.slope == pytest.approx(1.21 * (here.slope + here.reactance))


def test_the_slope_is_that_of_the_reactance_at_neighbouring_frequencies() -> None:
    made = plain_design(transmission__0__frequency="21 MHz")
    below, here, above = (flow(made, share * 21e6, "side", image=False) for share in (0.9999, 1.0, 1.0001))
    assert here.slope == pytest.approx((above.reactance - below.reactance) / 2e-4, rel=1e-6)
    assert here.slope > 1.1 * here.reactance


def test_where_each_part_sits_is_what_the_file_says() -> None:
    def where(at: str) -> str:
        joint = Joint.model_construct(name="j", count=1, kind=None, resistance=single(1e-3), at=at)
        return str(losses.joint_loss(joint).where)

    assert (where("capacitor"), where("spread"), where("opposite")) == ("port", "spread", "opposite")
    assert of_capacitor(series_resistance="5 mohm").where == "port"
    assert of_capacitor(quality_factor=1000).where == "capacitor"
    assert ends_of(losses.capacitor_loss(Capacitor(kind="none"), FREQUENCY, REACTANCE)) == (0.0, 0.0, 0.0, 0.0)


def test_capacitors_without_a_kind_of_wiper_ignore_it() -> None:
    part = Capacitor.model_construct(kind="vacuum variable", wiper=True)
    assert losses.capacitor_typical(part) == tables.capacitor_quality_factor("vacuum variable")
