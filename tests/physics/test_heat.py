"""Conservation, limits and order of convection, balance and warming."""

from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.constants import Stefan_Boltzmann, atm

from magsafe.physics.arrays import Array
from magsafe.physics.conductor import conductivity_at, tube_impedance
from magsafe.physics.convection import convected_heat, dry_air, equal_perimeter_diameter, rayleigh_number
from magsafe.physics.heat import (
    CEILING,
    ElectricHeat,
    Surface,
    Surroundings,
    absorbed_sunshine,
    frequency_drift,
    heat_for_temperature,
    lost_heat,
    radiated_heat,
    steady_temperature,
)
from magsafe.physics.warming import (
    heat_capacity_per_metre,
    repeated_over_temperature,
    temperature_after,
    temperature_history,
    time_to_cool,
)

COPPER = 0.0033  # 1/K
AIR = Surroundings(303.15, atm)
BRIGHT = Surface(0.022, 0.022, 0.05, 0.3)
HEAT = ElectricHeat(25.0, COPPER)
CAPACITY = 227.0  # J/(m K)

heats = st.floats(0.0, 150.0)
diameters = st.floats(0.002, 0.1)
shares = st.floats(0.0, 1.0)
airs = st.floats(233.15, 323.15)
pressures = st.floats(5e4, 1.1e5)
suns = st.floats(0.0, 1200.0)


@given(heat=heats, diameter=diameters, emissivity=shares, absorptivity=shares, air=airs, pressure=pressures, sun=suns)
def test_what_is_taken_up_is_lost(
    heat: float, diameter: float, emissivity: float, absorptivity: float, air: float, pressure: float, sun: float
) -> None:
    """Electric heat and sun are what air and surroundings get."""
    surface, around = Surface(diameter, diameter, emissivity, absorptivity), Surroundings(air, pressure, sun)
    current = ElectricHeat(heat, COPPER)
    found = float(steady_temperature(current, surface, around))
    if not np.isfinite(found):
        assert float(current.at(CEILING) + absorbed_sunshine(surface, around)) > lost_heat(CEILING, surface, around)
        return
    gained = float(current.at_20) * (1.0 + COPPER * (found - 293.15)) ** 0.5 + sun * absorptivity * diameter
    lost = float(convected_heat(diameter, found, air, pressure) + radiated_heat(found, surface, around))
    assert lost == pytest.approx(gained, rel=1e-6, abs=1e-6)
    assert found >= air


@pytest.mark.parametrize("exponent", [0.0, 0.5, 1.0])
def test_the_heat_for_a_temperature_is_the_inverse(exponent: float) -> None:
    wanted = np.array([310.0, 356.0, 420.0, 900.0])
    allowed = heat_for_temperature(wanted, COPPER, exponent, BRIGHT, AIR)
    np.testing.assert_allclose(
        steady_temperature(ElectricHeat(allowed, COPPER, exponent), BRIGHT, AIR), wanted, rtol=1e-9
    )
    # In the sun, an idle oxidised tube is warmer than 310 K: no current at all keeps it there.
    sunny = Surroundings(303.15, atm, 1000.0)
    assert float(heat_for_temperature(310.0, COPPER, exponent, Surface(0.022, 0.022, 0.7, 0.7), sunny)) < 0.0


NEVER_COOLER: dict[str, Callable[[Array], tuple[ElectricHeat, Surface, Surroundings]]] = {
    "more current": lambda s: (ElectricHeat(10.0 + 40.0 * s, COPPER), BRIGHT, AIR),
    "steeper resistivity": lambda s: (ElectricHeat(25.0, 0.004 * s), BRIGHT, AIR),
    "fuller section": lambda s: (ElectricHeat(25.0, COPPER, s), BRIGHT, AIR),
    "hotter air": lambda s: (HEAT, BRIGHT, Surroundings(253.15 + 70.0 * s, atm)),
    "thinner air": lambda s: (HEAT, BRIGHT, Surroundings(303.15, atm * (1.0 - 0.5 * s))),
    "more sun": lambda s: (HEAT, BRIGHT, Surroundings(303.15, atm, 1200.0 * s)),
    "poorer radiator": lambda s: (HEAT, Surface(0.022, 0.022, 1.0 - s, 0.3), AIR),
    "darker in the sun": lambda s: (HEAT, Surface(0.022, 0.022, 0.5, s), Surroundings(303.15, atm, 1000.0)),
    "wider to the sun": lambda s: (HEAT, Surface(0.022, 0.001 + 0.03 * s, 0.5, 0.5), Surroundings(303.15, atm, 1e3)),
    "thinner conductor": lambda s: (HEAT, Surface(0.05 - 0.045 * s, 0.05, 0.1, 0.3), AIR),
    "upright": lambda s: (HEAT, Surface(0.022, 0.022, 0.05, 0.3, 1.0 - 0.4 * s), AIR),
}


@pytest.mark.parametrize("case", NEVER_COOLER)
@given(steps=st.lists(shares, min_size=2, max_size=30))
@settings(max_examples=15, deadline=None)
def test_it_is_never_cooler_with(case: str, steps: list[float]) -> None:
    found = steady_temperature(*NEVER_COOLER[case](np.sort(steps)))
    assert np.all(np.diff(found) >= -1e-9)
    # And it is warmer by something, from end to end.
    ends = steady_temperature(*NEVER_COOLER[case](np.array([0.0, 1.0])))
    assert ends[1] > ends[0] + 0.5


@given(temperature=st.floats(220.0, 1200.0), step=st.floats(0.01, 100.0), diameter=diameters, air=airs, thin=pressures)
def test_a_hotter_conductor_loses_more(
    temperature: float, step: float, diameter: float, air: float, thin: float
) -> None:
    """So there is one balance only, and the search finds it."""
    surface, around = Surface(diameter, diameter, 0.0, 0.0), Surroundings(air, thin)
    assert float(lost_heat(temperature + step, surface, around)) > float(lost_heat(temperature, surface, around))


def test_at_the_airs_temperature_nothing_is_lost_and_below_it_heat_comes_in() -> None:
    assert float(lost_heat(303.15, BRIGHT, AIR)) == 0.0
    warm, cold = lost_heat(np.array([313.15, 293.15]), BRIGHT, AIR)
    # Not quite the same: the air between them is cooler once.
    assert float(cold) == pytest.approx(-float(warm), rel=0.05)
    assert float(cold) < 0.0


def test_convection_of_thick_cylinders_goes_with_the_cube_root_and_of_thin_wires_hardly_with_size() -> None:
    """Nu = 0.1 Ra^(1/3) high up in Churchill and Chu's form: heat per area without size; at the foot Nu = 0.36."""
    one, other = (float(convected_heat(d, 320.0, 300.0, atm)) / d for d in (20.0, 40.0))
    assert other == pytest.approx(one, rel=0.03)
    thin = float(convected_heat(1e-9, 301.0, 300.0, atm))
    assert thin == pytest.approx(np.pi * 0.36 * float(dry_air(300.5, atm).conductivity), rel=0.01)


def test_thinner_air_has_a_rayleigh_number_down_with_its_square() -> None:
    assert float(rayleigh_number(0.022, 333.15, 303.15, atm / 2.0)) == pytest.approx(
        float(rayleigh_number(0.022, 333.15, 303.15, atm)) / 4.0, rel=1e-12
    )


def test_a_strip_has_the_area_of_its_perimeter() -> None:
    strip = Surface(equal_perimeter_diameter(0.03, 0.002), np.hypot(0.03, 0.002), 0.9, 0.5)
    black = float(radiated_heat(350.0, strip, AIR))
    assert black == pytest.approx(0.9 * 5.670374e-8 * 0.064 * (350.0**4 - 303.15**4), rel=1e-6)


def test_the_root_of_resistivity_is_what_a_tube_does() -> None:
    """R'(T) from the Bessel functions with the resistivity at T, against the power of one half."""
    for kelvin in (253.15, 350.0, 520.0):
        hot, cold = (
            float(tube_impedance(7.1e6, conductivity_at(49.3e6, COPPER, t), 0.011, 1e-3).real) for t in (kelvin, 293.15)
        )
        assert float(ElectricHeat(25.0, COPPER).at(kelvin)) == pytest.approx(25.0 * hot / cold, rel=1e-3)


def test_a_heat_that_nothing_takes_away_has_no_temperature() -> None:
    found = steady_temperature(ElectricHeat(np.array([0.0, 25.0, 1e5]), COPPER, 1.0), BRIGHT, AIR)
    assert float(found[0]) == pytest.approx(303.15, abs=1e-9)
    assert np.isfinite(found).tolist() == [True, True, False]
    assert np.isinf(repeated_over_temperature(60.0, 60.0, ElectricHeat(1e5, COPPER), BRIGHT, AIR, CAPACITY))
    # A row of short overs may hold where a carrier does not.
    mild = ElectricHeat(1e4, COPPER)
    assert np.isinf(steady_temperature(mild, BRIGHT, AIR))
    assert float(repeated_over_temperature(0.1, 100.0, mild, BRIGHT, AIR, CAPACITY)) < 400.0


def test_arrays_give_what_their_elements_give() -> None:
    heats_, finishes = np.array([[5.0], [25.0], [60.0]]), np.array([0.05, 0.7])
    surface = Surface(0.022, 0.022, finishes, 0.3)
    together = steady_temperature(ElectricHeat(heats_, COPPER), surface, AIR)
    later = temperature_after(300.0, 303.15, ElectricHeat(heats_, COPPER), surface, AIR, CAPACITY)
    ever = repeated_over_temperature(180.0, 60.0, ElectricHeat(heats_, COPPER), surface, AIR, CAPACITY)
    assert together.shape == later.shape == ever.shape == (3, 2)
    for i, heat in enumerate(heats_.ravel()):
        for j, emissivity in enumerate(finishes):
            one = (ElectricHeat(heat, COPPER), Surface(0.022, 0.022, emissivity, 0.3), AIR)
            assert float(together[i, j]) == pytest.approx(float(steady_temperature(*one)), rel=1e-12)
            assert float(later[i, j]) == pytest.approx(
                float(temperature_after(300.0, 303.15, *one, CAPACITY)), abs=1e-5
            )
            alone = float(repeated_over_temperature(180.0, 60.0, *one, CAPACITY))
            assert float(ever[i, j]) == pytest.approx(alone, abs=1e-4)


def test_heat_in_is_heat_stored_and_heat_lost() -> None:
    """Over a history with a pause: the integrals by Simpson's rule on the solved temperatures."""
    sunny = Surroundings(303.15, atm, 500.0)
    stored = 0.0
    for first, last, heat in ((0.0, 240.0, HEAT), (240.0, 300.0, ElectricHeat(0.0, COPPER))):
        times = np.linspace(first, last, 401)
        temperatures = temperature_history(times, 240.0, 60.0, 290.0, HEAT, BRIGHT, sunny, CAPACITY)
        gain = heat.at(temperatures) + absorbed_sunshine(BRIGHT, sunny) - lost_heat(temperatures, BRIGHT, sunny)
        weights = np.full(401, 2.0)
        weights[1::2], weights[0], weights[-1] = 4.0, 1.0, 1.0
        stored += float(np.sum(weights * gain)) * (last - first) / 400.0 / 3.0
    end = float(temperature_history(np.array([300.0]), 240.0, 60.0, 290.0, HEAT, BRIGHT, sunny, CAPACITY)[0])
    assert CAPACITY * (end - 290.0) == pytest.approx(stored, rel=1e-6)


def test_at_first_all_heat_is_stored_and_at_last_none() -> None:
    soon = float(temperature_after(0.1, 303.15, HEAT, BRIGHT, AIR, CAPACITY)) - 303.15
    assert soon == pytest.approx(float(HEAT.at(303.15)) * 0.1 / CAPACITY, rel=1e-3)
    steady = float(steady_temperature(HEAT, BRIGHT, AIR))
    assert float(temperature_after(1e5, 303.15, HEAT, BRIGHT, AIR, CAPACITY)) == pytest.approx(steady, abs=1e-4)
    assert float(temperature_after(0.0, 321.0, HEAT, BRIGHT, AIR, CAPACITY)) == 321.0
    # What is hotter than its steady state comes down to it.
    assert float(temperature_after(1e5, 500.0, HEAT, BRIGHT, AIR, CAPACITY)) == pytest.approx(steady, abs=1e-4)


@given(over=st.floats(1.0, 3600.0), longer=st.floats(1.0, 10.0), heat=st.floats(0.1, 60.0))
@settings(max_examples=25, deadline=None)
def test_a_longer_over_is_never_cooler_and_never_above_key_down(over: float, longer: float, heat: float) -> None:
    current = ElectricHeat(heat, COPPER)
    ends = temperature_after(np.array([over, over * longer]), 303.15, current, BRIGHT, AIR, CAPACITY)
    assert ends[1] >= ends[0] - 1e-4
    assert ends[1] <= float(steady_temperature(current, BRIGHT, AIR)) + 1e-5


@given(over=st.floats(5.0, 1800.0), pause=st.floats(0.0, 1800.0), heat=st.floats(0.1, 60.0))
@settings(max_examples=15, deadline=None)
def test_repeated_overs_come_back_to_where_they_were(over: float, pause: float, heat: float) -> None:
    current = ElectricHeat(heat, COPPER)
    end = repeated_over_temperature(over, pause, current, BRIGHT, AIR, CAPACITY)
    cooled = temperature_after(pause, end, ElectricHeat(0.0, COPPER), BRIGHT, AIR, CAPACITY)
    assert float(temperature_after(over, cooled, current, BRIGHT, AIR, CAPACITY)) == pytest.approx(float(end), abs=1e-4)
    assert float(end) <= float(steady_temperature(current, BRIGHT, AIR)) + 1e-5
    assert float(end) >= float(temperature_after(over, 303.15, current, BRIGHT, AIR, CAPACITY)) - 1e-4


def test_a_row_of_overs_climbs_to_the_repeated_one() -> None:
    ends = np.linspace(180.0, 180.0 + 300.0 * 39.0, 40)
    row = temperature_history(ends, 180.0, 120.0, 303.15, HEAT, BRIGHT, AIR, CAPACITY)
    assert np.all(np.diff(row) > -1e-5)
    ever = float(repeated_over_temperature(180.0, 120.0, HEAT, BRIGHT, AIR, CAPACITY))
    assert row[0] == pytest.approx(float(temperature_after(180.0, 303.15, HEAT, BRIGHT, AIR, CAPACITY)), abs=1e-4)
    assert row[-1] == pytest.approx(ever, abs=1e-4)
    assert row[0] < ever - 5.0
    # Within the pauses it cools.
    inside = temperature_history(np.array([0.0, 180.0, 200.0, 299.0, 310.0]), 180.0, 120.0, 303.15, *CONDUCTOR)
    assert inside[0] == 303.15
    assert inside[1] > inside[2] > inside[3] < inside[4]


CONDUCTOR = (HEAT, BRIGHT, AIR, CAPACITY)


def test_quick_overs_are_as_warm_as_their_mean() -> None:
    """Pulses of a second against a time constant of minutes: half the time, half the heat."""
    quick = float(repeated_over_temperature(1.0, 1.0, *CONDUCTOR))
    mean = float(steady_temperature(ElectricHeat(12.5, COPPER), BRIGHT, AIR))
    assert quick == pytest.approx(mean, abs=0.1)
    assert quick > mean
    assert float(repeated_over_temperature(600.0, 0.0, *CONDUCTOR)) == float(steady_temperature(HEAT, BRIGHT, AIR))


def test_a_history_that_leaves_the_range_says_so() -> None:
    found = temperature_history(
        np.array([0.0, 1.0, 50.0, 70.0]), 60.0, 60.0, 303.15, *(ElectricHeat(1e4, 0.004), *CONDUCTOR[1:])
    )
    assert np.isinf(found).tolist() == [False, False, True, True]
    assert np.isinf(temperature_after(60.0, 303.15, ElectricHeat(1e4, 0.004), BRIGHT, AIR, CAPACITY))


SPENT = ElectricHeat(0.0, COPPER)
NO_DRAUGHT = Surface(0.022, 0.022, 0.8, 0.3, 1e-9)  # it radiates alone


def test_a_small_rise_that_is_radiated_goes_by_newtons_law() -> None:
    """Time constants of C / (4 pi d epsilon sigma T^3), and the logarithm of the rises: Newton's law of cooling."""
    constant = CAPACITY / (4.0 * np.pi * 0.022 * 0.8 * Stefan_Boltzmann * 303.15**3)
    found = time_to_cool(np.array([303.25, 303.20]), 303.16, NO_DRAUGHT, AIR, CAPACITY)
    assert found == pytest.approx(constant * np.log([10.0, 5.0]), rel=2e-3)


def test_a_radiated_heat_takes_the_time_of_the_closed_form() -> None:
    """Cooling by radiation alone from 700 to 350 K: Incropera & DeWitt, transient conduction, lumped (memory)."""

    def indefinite(kelvin: float) -> float:
        return float(0.5 * np.log((kelvin + 303.15) / (kelvin - 303.15)) + np.arctan(kelvin / 303.15))

    per_second = 2.0 * np.pi * 0.022 * 0.8 * Stefan_Boltzmann * 303.15**3 / CAPACITY
    expected = (indefinite(350.0) - indefinite(700.0)) / per_second
    assert float(time_to_cool(700.0, 350.0, NO_DRAUGHT, AIR, CAPACITY)) == pytest.approx(expected, rel=1e-4)


@given(start=st.floats(330.0, 1300.0), share=st.floats(0.01, 0.99), emissivity=shares, sun=suns)
@settings(max_examples=20, deadline=None)
def test_the_time_to_cool_is_the_inverse_of_the_cooling(
    start: float, share: float, emissivity: float, sun: float
) -> None:
    surface, around = Surface(0.022, 0.022, emissivity, 0.3), Surroundings(303.15, atm, sun)
    idle = float(steady_temperature(SPENT, surface, around))
    if start <= idle + 1.0:
        return
    end = idle + share * (start - idle)
    taken = float(time_to_cool(start, end, surface, around, CAPACITY))
    assert float(temperature_after(taken, start, SPENT, surface, around, CAPACITY)) == pytest.approx(end, abs=1e-2)


def test_what_is_no_warmer_needs_no_time_and_what_the_sun_keeps_warm_never_cools() -> None:
    sunny = Surroundings(303.15, atm, 1000.0)
    idle = float(steady_temperature(SPENT, BRIGHT, sunny))
    assert idle > 310.0
    ends = np.array([310.0, idle, idle + 5.0, 400.0, 420.0])
    found = time_to_cool(400.0, ends, BRIGHT, sunny, CAPACITY)
    assert np.isinf(found).tolist() == [True, True, False, False, False]
    assert found[2] > 0.0
    assert found[3:].tolist() == [0.0, 0.0]
    assert float(time_to_cool(305.0, 309.0, BRIGHT, sunny, CAPACITY)) == 0.0
    assert time_to_cool(400.0, 330.0, BRIGHT, AIR, np.array([[1.0], [2.0]])).shape == (2, 1)


def test_a_loop_that_grows_drifts_down_by_its_growth() -> None:
    """f goes with size^-1/2 for L alone and with 1/size for both: finite growth against the linear form."""
    inductance_only, both = frequency_drift(7.1e6, 17e-6, 40.0)
    grown = 1.0 + 17e-6 * 40.0
    assert float(inductance_only) == pytest.approx(7.1e6 * (grown**-0.5 - 1.0), rel=1e-3)
    assert float(both) == pytest.approx(7.1e6 * (1.0 / grown - 1.0), rel=1e-3)


def test_heat_capacity_is_that_of_the_metal() -> None:
    assert float(heat_capacity_per_metre(1e-4, 8940.0, 385.0)) == pytest.approx(344.19, rel=1e-6)


@pytest.mark.parametrize(
    "wrong",
    [
        lambda: ElectricHeat(-1.0, COPPER),
        lambda: ElectricHeat(np.array([1.0, np.inf]), COPPER),
        lambda: ElectricHeat(1.0, -0.1),
        lambda: ElectricHeat(1.0, COPPER, 1.5),
        lambda: Surface(0.0, 0.022, 0.5, 0.5),
        lambda: Surface(0.022, -0.022, 0.5, 0.5),
        lambda: Surface(0.022, 0.022, 1.1, 0.5),
        lambda: Surface(0.022, 0.022, 0.5, -0.1),
        lambda: Surface(0.022, 0.022, 0.5, 0.5, 0.0),
        lambda: Surroundings(100.0, atm),
        lambda: Surroundings(1400.0, atm),
        lambda: Surroundings(300.0, 0.0),
        lambda: Surroundings(300.0, atm, -1.0),
        lambda: temperature_after(-1.0, 300.0, *CONDUCTOR),
        lambda: temperature_after(1.0, 1400.0, *CONDUCTOR),
        lambda: temperature_after(1.0, 300.0, HEAT, BRIGHT, AIR, 0.0),
        lambda: temperature_after(np.inf, 300.0, *CONDUCTOR),
        lambda: time_to_cool(1400.0, 300.0, BRIGHT, AIR, CAPACITY),
        lambda: time_to_cool(0.0, 300.0, BRIGHT, AIR, CAPACITY),
        lambda: time_to_cool(400.0, 300.0, BRIGHT, AIR, 0.0),
        lambda: temperature_history(np.array([2.0, 1.0]), 1.0, 1.0, 300.0, *CONDUCTOR),
        lambda: temperature_history(np.array([-1.0, 1.0]), 1.0, 1.0, 300.0, *CONDUCTOR),
        lambda: temperature_history(np.array([1.0]), 0.0, 1.0, 300.0, *CONDUCTOR),
        lambda: temperature_history(np.array([1.0]), 1.0, -1.0, 300.0, *CONDUCTOR),
        lambda: repeated_over_temperature(0.0, 1.0, *CONDUCTOR),
        lambda: repeated_over_temperature(1.0, -1.0, *CONDUCTOR),
    ],
)
def test_what_cannot_be_is_refused(wrong: Callable[[], object]) -> None:
    with pytest.raises(ValueError, match=r"must|are 0 to 1"):
        wrong()
