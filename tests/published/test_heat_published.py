"""Air, convection and the warmth of conductors against the standard atmosphere, a textbook, and worked values.

"Reference notes" are the project's own, computed by independent scripts of two checkers. Numbers of textbooks are from
memory.
"""

import numpy as np
import pytest
from fluids.atmosphere import ATMOSPHERE_1976
from ht.conv_free_immersed import (
    Nu_horizontal_cylinder_Churchill_Chu,
    Nu_horizontal_plate_McAdams,
    Nu_vertical_cylinder_Popiel_Churchill,
    Nu_vertical_plate_Churchill,
)
from scipy.constants import Stefan_Boltzmann, atm, g, gas_constant, zero_Celsius
from scipy.interpolate import CubicSpline
from scipy.optimize import brentq

from magsafe.design import tables, warmth_tables
from magsafe.physics.conductor import tube_impedance
from magsafe.physics.convection import (
    UPRIGHT_SHARE,
    convected_heat,
    dry_air,
    equal_perimeter_diameter,
    rayleigh_number,
)
from magsafe.physics.heat import (
    ElectricHeat,
    Surface,
    Surroundings,
    absorbed_sunshine,
    frequency_drift,
    radiated_heat,
    steady_temperature,
)
from magsafe.physics.warming import heat_capacity_per_metre, temperature_history

# Incropera & DeWitt, Fundamentals of Heat and Mass Transfer, table A.4, air at 1 atm: T, density, heat capacity,
# viscosity, conductivity, Prandtl number (memory).
INCROPERA = np.array(
    [
        [250.0, 1.3947, 1006.0, 159.6e-7, 22.3e-3, 0.720],
        [300.0, 1.1614, 1007.0, 184.6e-7, 26.3e-3, 0.707],
        [350.0, 0.9950, 1009.0, 208.2e-7, 30.0e-3, 0.700],
        [400.0, 0.8711, 1014.0, 230.1e-7, 33.8e-3, 0.690],
        [450.0, 0.7740, 1021.0, 250.7e-7, 37.3e-3, 0.686],
        [500.0, 0.6964, 1030.0, 270.1e-7, 40.7e-3, 0.684],
    ]
)


def test_air_is_that_of_the_standard_atmosphere() -> None:
    """U.S. Standard Atmosphere 1976, as the fluids library has it."""
    for kelvin, pressure in ((230.0, 3e4), (288.15, atm), (330.0, 8e4)):
        found = dry_air(kelvin, pressure)
        assert float(found.viscosity) == pytest.approx(ATMOSPHERE_1976.viscosity(kelvin), rel=1e-9)
        assert float(found.conductivity) == pytest.approx(ATMOSPHERE_1976.thermal_conductivity(kelvin), rel=1e-9)
        assert float(found.density) == pytest.approx(ATMOSPHERE_1976.density(kelvin, pressure), rel=2e-4)


def test_air_is_that_of_a_textbook() -> None:
    kelvin, density, capacity, viscosity, conductivity, prandtl = INCROPERA.T
    found = dry_air(kelvin, atm)
    # The table's densities belong to a pressure of 1 bar, 1.3 % below.
    np.testing.assert_allclose(found.density * 1e5 / atm, density, rtol=2e-3)
    np.testing.assert_allclose(found.heat_capacity, capacity, rtol=3e-3)
    np.testing.assert_allclose(found.viscosity, viscosity, rtol=0.012)
    np.testing.assert_allclose(found.conductivity, conductivity, rtol=0.008)
    np.testing.assert_allclose(found.prandtl, prandtl, rtol=5e-3)


def test_the_steam_pipe_of_a_textbook() -> None:
    """0.1 m, 165 degC in 23 degC, emissivity 0.85: Ra 5.07e6, Nu 23.3, 325 + 441 = 766 W/m (Incropera & DeWitt, an
    example of their chapter on free convection; memory)."""
    surface, air = 438.0, 296.0
    assert float(rayleigh_number(0.1, surface, air, 1e5)) == pytest.approx(5.07e6, rel=0.02)
    taken = float(convected_heat(0.1, surface, air, 1e5))
    assert taken == pytest.approx(325.0, rel=0.01)
    nusselt = taken / (np.pi * float(dry_air(367.0, 1e5).conductivity) * (surface - air))
    assert nusselt == pytest.approx(23.3, rel=0.01)
    radiated = float(radiated_heat(surface, Surface(0.1, 0.1, 0.85, 0.0), Surroundings(air, 1e5)))
    assert radiated == pytest.approx(441.0, abs=0.5)


def test_the_tube_of_the_reference_notes() -> None:
    """22 mm at 60 in 30 degC: Ra 2.28e4, Nu 5.34, h 6.7 W/m2K, 13.9 W/m taken, 12.1 and 0.8 W/m radiated."""
    air = Surroundings(303.15, atm)
    assert float(rayleigh_number(0.022, 333.15, 303.15, atm)) == pytest.approx(2.28e4, rel=5e-3)
    taken = float(convected_heat(0.022, 333.15, 303.15, atm))
    assert taken == pytest.approx(13.9, rel=2e-3)
    assert taken / (np.pi * 0.022 * 30.0) == pytest.approx(6.7, abs=0.05)
    nusselt = taken / (np.pi * 30.0 * float(dry_air(318.15, atm).conductivity))
    assert nusselt == pytest.approx(5.34, abs=0.01)
    for emissivity, wanted in ((0.8, 12.14), (0.05, 0.76)):
        radiated = float(radiated_heat(333.15, Surface(0.022, 0.022, emissivity, 0.0), air))
        assert radiated == pytest.approx(wanted, abs=0.01)


def test_convection_is_the_librarys_with_the_grashof_number() -> None:
    """Churchill & Chu, Int. J. Heat Mass Transfer 18, 1049 (1975), worked out anew from the properties of air."""
    film, difference, diameter = 350.0, 100.0, 0.035
    made_of = dry_air(film, 9e4)
    grashof = g / film * difference * diameter**3 * float(made_of.density) ** 2 / float(made_of.viscosity) ** 2
    nusselt = Nu_horizontal_cylinder_Churchill_Chu(float(made_of.prandtl), grashof)
    wanted = np.pi * float(made_of.conductivity) * nusselt * difference
    assert float(convected_heat(diameter, 400.0, 300.0, 9e4)) == pytest.approx(wanted, rel=1e-12)
    # The library's own example, from Incropera & DeWitt.
    assert pytest.approx(139.13, abs=0.01) == Nu_horizontal_cylinder_Churchill_Chu(0.69, 2.63e9)


def test_upright_tubes_keep_more_than_the_share_of_common_practice() -> None:
    """Slender upright cylinders: Popiel, Heat Transfer Engineering 29, 521 (2008), by the ht library."""
    for diameter in (0.003, 0.006, 0.012, 0.022, 0.035, 0.05):
        for height in (0.5, 1.0, 2.0, 3.0):
            for rise in (10.0, 30.0, 60.0, 150.0, 250.0):
                film = 303.15 + 0.5 * rise
                made_of = dry_air(film, atm)
                grashof = g / film * rise * height**3 / float(made_of.kinematic_viscosity) ** 2
                nusselt = Nu_vertical_cylinder_Popiel_Churchill(float(made_of.prandtl), grashof, height, diameter)
                upright = np.pi * diameter * nusselt * float(made_of.conductivity) / height * rise
                assert upright > UPRIGHT_SHARE * float(convected_heat(diameter, 303.15 + rise, 303.15, atm))


@pytest.mark.parametrize("width", [0.01, 0.03, 0.06])
@pytest.mark.parametrize("rise", [20.0, 60.0, 150.0])
def test_a_strip_loses_no_less_than_the_cylinder_of_its_perimeter(width: float, rise: float) -> None:
    """On edge: the upright plate of Churchill & Chu. Flat: McAdams, hot face up and down, length = area/perimeter."""
    film = 303.15 + 0.5 * rise
    made_of = dry_air(film, atm)
    prandtl, conductivity = float(made_of.prandtl), float(made_of.conductivity)

    def grashof(length: float) -> float:
        return g / film * rise * length**3 / float(made_of.kinematic_viscosity) ** 2

    cylinder = float(convected_heat(equal_perimeter_diameter(width, 0.0), 303.15 + rise, 303.15, atm))
    on_edge = 2.0 * width * rise * conductivity / width * Nu_vertical_plate_Churchill(prandtl, grashof(width))
    faces = sum(Nu_horizontal_plate_McAdams(prandtl, grashof(width / 2.0), buoyancy=up) for up in (True, False))
    flat = width * rise * conductivity / (width / 2.0) * faces
    assert on_edge > cylinder
    # Below 30 mm the plates of McAdams are out of their range.
    assert width < 0.03 or flat > 0.93 * cylinder


def tube(current: float, frequency: float, diameter: float, wall: float) -> ElectricHeat:
    """The tube of phosphorus-deoxidised copper of the reference notes."""
    row = tables.materials()["copper tube"]
    resistance = tube_impedance(frequency, row.conductivity, diameter / 2.0, wall).real
    return ElectricHeat(current**2 * resistance, row.coefficient)


@pytest.mark.parametrize(
    ("heat", "diameter", "emissivity", "sun", "celsius"),
    [
        (tube(50.0, 7.1e6, 0.022, 1e-3), 0.022, 0.05, 0.0, 84.0),
        (tube(50.0, 7.1e6, 0.022, 1e-3), 0.022, 0.7, 0.0, 65.0),
        (tube(50.0, 7.1e6, 0.022, 1e-3), 0.022, 0.7, 1000.0, 80.0),
        (tube(30.0, 14.2e6, 0.006, 0.8e-3), 0.006, 0.1, 0.0, 245.0),
        (tube(125.0, 3.6e6, 0.035, 1.2e-3), 0.035, 0.1, 0.0, 122.0),
    ],
)
def test_the_worked_temperatures_of_the_reference_notes(
    heat: ElectricHeat, diameter: float, emissivity: float, sun: float, celsius: float
) -> None:
    found = steady_temperature(heat, Surface(diameter, diameter, emissivity, 0.7), Surroundings(303.15, atm, sun))
    # The notes' own fits of air leave the hottest one 1 K above a textbook's air (the last test here).
    assert float(found) - zero_Celsius == pytest.approx(celsius, abs=1.5)


def test_sunshine_and_radiation_alone_make_the_temperature_of_a_closed_form() -> None:
    """Where convection is a millionth: T^4 = Ta^4 + G alpha / (pi epsilon sigma)."""
    surface = Surface(0.022, 0.022, 0.9, 0.9, 1e-6)
    air = Surroundings(300.0, atm, 1000.0)
    wanted = (300.0**4 + 1000.0 / (np.pi * Stefan_Boltzmann)) ** 0.25
    assert float(steady_temperature(ElectricHeat(0.0, 0.004), surface, air)) == pytest.approx(wanted, abs=1e-3)
    assert float(absorbed_sunshine(surface, air)) == pytest.approx(1000.0 * 0.9 * 0.022, rel=1e-12)


def test_a_water_pipe_holds_227_joules_per_kelvin_and_metre_and_warms_in_minutes() -> None:
    """Reference notes: C' = 227 J/mK; 6 to 8 minutes to 63 % for a bright tube. An oxidised one is quicker."""
    metal = warmth_tables.metals()["copper tube"]
    capacity = heat_capacity_per_metre(np.pi * (0.011**2 - 0.010**2), metal.density, metal.specific_heat)
    assert float(capacity) == pytest.approx(227.0, abs=0.5)
    surface = Surface(0.022, 0.022, np.array([0.05, 0.7]), 0.3)
    air, heat = Surroundings(303.15, atm), tube(50.0, 7.1e6, 0.022, 1e-3)
    times = np.arange(1.0, 900.0)
    rises = temperature_history(times, 900.0, 0.0, 303.15, heat, surface, air, capacity) - 303.15
    reached = rises >= (1.0 - np.exp(-1.0)) * (steady_temperature(heat, surface, air) - 303.15)
    minutes = times[np.argmax(reached, axis=0)] / 60.0
    assert 6.0 < minutes[0] < 8.0
    assert 4.0 < minutes[1] < 5.0


def test_thirty_kelvin_move_forty_metres_by_one_to_two_bandwidths() -> None:
    """Reference notes: -1.8 to -3.5 kHz at 7.1 MHz, copper."""
    inductance_only, both = frequency_drift(7.1e6, warmth_tables.metals()["copper"].expansion, 30.0)
    assert float(inductance_only) == pytest.approx(-1.8e3, abs=50.0)
    assert float(both) == pytest.approx(-3.5e3, abs=50.0)


def test_every_material_has_its_density_and_expansion() -> None:
    assert set(warmth_tables.metals()) == set(tables.materials())


# Handbooks of physics (memory): Dulong and Petit, molar heat near 3 R = 24.9 J/(mol K) for metals at room temperature.
MOLAR_MASS = {"copper": 63.5e-3, "aluminium": 27.0e-3, "silver": 107.9e-3, "zinc": 65.4e-3, "tin": 118.7e-3}


@pytest.mark.parametrize("name", MOLAR_MASS)
def test_specific_heats_follow_dulong_and_petit(name: str) -> None:
    metal = next(m for m in warmth_tables.metals().values() if m.name == name)
    assert metal.specific_heat * MOLAR_MASS[name] == pytest.approx(24.9, rel=0.09)


def test_finishes_and_thresholds_are_those_of_the_reference_notes() -> None:
    finishes = warmth_tables.finishes()
    for name, low, high in (("bright", 0.02, 0.10), ("oxidised copper", 0.6, 0.8), ("painted", 0.85, 0.95)):
        assert (finishes[name].emissivity.low, finishes[name].emissivity.high) == (low, high)
    assert finishes["bright"].absorptivity.likely == 0.3
    assert finishes["oxidised copper"].absorptivity.likely == 0.7
    assert finishes["painted white"].absorptivity.likely == 0.2
    assert finishes["painted"].absorptivity.high == 0.95
    touch = {row.contact: row.temperature - zero_Celsius for row in warmth_tables.touch_thresholds()}
    assert touch == pytest.approx({1.0: 65.0, 5.0: 60.0, 10.0: 55.0, 60.0: 51.0, 600.0: 48.0, 28800.0: 43.0})
    assert warmth_tables.solders()["tin-lead"].temperature == pytest.approx(183.0 + zero_Celsius)
    soft = {name: row.temperature - zero_Celsius for name, row in warmth_tables.plastics().items()}
    assert soft == pytest.approx(
        {"PVC": 70.0, "polyethylene": 80.0, "polystyrene": 80.0, "acrylic": 90.0, "PTFE": 260.0}
    )


def test_a_thin_tube_melts_its_solder() -> None:
    """Reference notes: 30 A at 14.2 MHz in 6 mm, 245 degC: solder melts at 183 degC, copper does not care."""
    found = steady_temperature(
        tube(30.0, 14.2e6, 0.006, 0.8e-3), Surface(0.006, 0.006, 0.1, 0.3), Surroundings(303.15, atm)
    )
    assert all(float(found) > row.temperature for row in warmth_tables.solders().values())


@pytest.mark.parametrize("current", [10.0, 30.0])
@pytest.mark.parametrize("diameter", [0.006, 0.022, 0.05])
def test_temperatures_with_the_textbooks_own_air_are_the_same(current: float, diameter: float) -> None:
    """The table above by a spline, scalar arithmetic, another solver: 0.5 % of the rise."""
    properties = CubicSpline(INCROPERA[:, 0], INCROPERA[:, 2:5])
    heat = tube(current, 14.2e6, diameter, 0.8e-3)

    def excess(kelvin: float) -> float:
        film = 0.5 * (kelvin + 303.15)
        capacity, viscosity, conductivity = (float(v) for v in properties(film))
        density = atm * 0.02896 / (gas_constant * film)
        grashof = g / film * (kelvin - 303.15) * diameter**3 * (density / viscosity) ** 2
        nusselt = float(Nu_horizontal_cylinder_Churchill_Chu(viscosity * capacity / conductivity, grashof))
        taken = np.pi * nusselt * conductivity * (kelvin - 303.15)
        grown = float(heat.at_20) * (1.0 + float(heat.coefficient) * (kelvin - 293.15)) ** 0.5
        return float(grown - taken - 0.1 * Stefan_Boltzmann * np.pi * diameter * (kelvin**4 - 303.15**4))

    wanted = float(brentq(excess, 303.2, 640.0))
    found = float(steady_temperature(heat, Surface(diameter, diameter, 0.1, 0.0), Surroundings(303.15, atm)))
    assert found - 303.15 == pytest.approx(wanted - 303.15, rel=5e-3)
