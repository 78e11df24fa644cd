"""Plane waves of currents over soil: rings and dipoles by other code, the perfect plane, laws that hold anywhere."""

import tomllib
from collections.abc import Callable
from functools import cache
from itertools import pairwise
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from designs import plain_design
from hypothesis import given, settings
from hypothesis import strategies as st
from points import rectangle
from scipy.constants import c, mu_0
from scipy.integrate import quad

from magsafe.analysis.flow import flow
from magsafe.physics import half_space, half_space_ring, inductance
from magsafe.physics.arrays import Array, ComplexArray
from magsafe.physics.near_field import SegmentCurrents
from magsafe.physics.wave_spectrum import EDGES, WaveSpectrum

FREQUENCY = 7.1e6
WAVENUMBER = 2.0 * np.pi * FREQUENCY / c
WAVELENGTH = c / FREQUENCY
HERE = np.zeros(1)
PERFECT = np.array([1.0 - 1e12j])
METAL = np.array([1.0 - 1e18j])  # over the other an upright electric dipole still loses 6e-5
SEA, WET, PASTURE, SAND, ICE = (80.0, 5.0), (20.0, 0.03), (13.0, 5e-3), (5.0, 1e-3), (3.0, 1e-5)
SOILS = [SEA, WET, PASTURE, SAND, ICE]
UPRIGHT = pytest.mark.parametrize("vertical", [True, False], ids=["upright", "flat"])


def medium(constants: tuple[float, float], frequency: float = FREQUENCY) -> ComplexArray:
    return np.asarray(half_space.relative_permittivity(*constants, frequency))[None]


def ring(size: float, height: float, vertical: bool, frequency: float = FREQUENCY, count: int = 128) -> SegmentCurrents:
    """A polygon of a circle's area with 1 A all round; wavenumber times radius and times twice the height given."""
    wavelength, step = c / frequency, 2.0 * np.pi / count
    angle = step * np.arange(count + 1)
    radius = size * wavelength / (2.0 * np.pi) * np.sqrt(step / np.sin(step))
    first, second, rest = radius * np.cos(angle), radius * np.sin(angle), np.zeros(count + 1)
    first[-1], second[-1] = first[0], second[0]
    up = height * wavelength / (4.0 * np.pi)
    corners = np.column_stack([rest, first, second + up] if vertical else [first, second, rest + up])
    even = np.ones(count, dtype=np.complex128)
    return SegmentCurrents(corners[:-1], corners[1:], even, even, 1e-4)


def moved(currents: SegmentCurrents, by: tuple[float, float, float], turned: float = 0.0) -> SegmentCurrents:
    """The currents turned about the upright axis and then shifted [m]."""
    cosine, sine = np.cos(turned), np.sin(turned)
    about = np.array([[cosine, sine, 0.0], [-sine, cosine, 0.0], [0.0, 0.0, 1.0]])
    start, end = (each @ about + np.array(by) for each in (currents.start, currents.end))
    return SegmentCurrents(start, end, currents.current_start, currents.current_end, currents.radius)


def power(currents: SegmentCurrents, soil: ComplexArray, frequency: float = FREQUENCY) -> Array:
    """What is drawn over soils, over what is radiated in free space."""
    made = WaveSpectrum.of(currents, frequency, soil)
    return made.power(soil, HERE)[:, 0] / made.free_power


def sky(currents: SegmentCurrents, soil: ComplexArray, frequency: float = FREQUENCY) -> Array:
    """What leaves into the sky, over what is radiated in free space."""
    made = WaveSpectrum.of(currents, frequency, soil)
    return np.asarray(made.sky_power(soil, HERE)[:, 0].sum(axis=-1) / made.free_power)


@pytest.mark.parametrize("constants", SOILS)
@pytest.mark.parametrize("up", [1.2, 1.5, 4.0, 25.0], ids=lambda up: f"{up} radii up")
@pytest.mark.parametrize("size", [0.075, 0.25])
@UPRIGHT
def test_a_ring_is_that_of_the_disc_of_dipoles(
    vertical: bool, size: float, up: float, constants: tuple[float, float]
) -> None:
    """`half_space_ring`: Bessel's transform of a disc, other nodes, refined to 1e-9; a wavelength up at the most.

    Soil that loses next to nothing has a kink where the wave in it begins to decay: there the nodes are good for 1e-3.
    """
    near = 1e-3 if constants == ICE else 3e-4
    soil, height = medium(constants), 2.0 * up * size
    currents = ring(size, height, vertical)
    drawn = float(half_space_ring.ring_resistance_ratio(vertical, soil, height, size)[0])
    sent = float(half_space_ring.ring_sky_ratio(vertical, soil, height, size)[0])
    assert power(currents, soil)[0] == pytest.approx(drawn, rel=near, abs=1e-4)
    assert sky(currents, soil)[0] == pytest.approx(sent, rel=3e-5)


@pytest.mark.parametrize("size", [0.02, 0.25, 1.0])
def test_in_free_space_it_radiates_what_fosters_ring_does(size: float) -> None:
    """Its dipole's 10 k^4 A^2 Z0/(60 pi), times Foster's factor (1944; Balanis, section 5.3, memory)."""
    found = WaveSpectrum.of(ring(size, 3.0, False), FREQUENCY, medium(PASTURE)).free_power
    area = np.pi * (size / WAVENUMBER) ** 2
    dipole = mu_0 * c * WAVENUMBER**4 * area**2 / (6.0 * np.pi)
    assert found == pytest.approx(dipole * float(half_space_ring.ring_free_ratio(size)), rel=2e-4)


TABLES: list[dict[str, Any]] = [
    row
    for row in tomllib.loads((Path(__file__).parents[1] / "published" / "ground_values.toml").read_text("utf-8"))[
        "value"
    ]
    if row["id"].startswith(("ground_Rtot", "ground_sky"))
]


@pytest.mark.parametrize("row", TABLES, ids=[row["id"] for row in TABLES])
def test_a_tiny_ring_has_the_values_of_the_table(row: dict[str, Any]) -> None:
    """Sommerfeld's and Wait's formulation; Vogler & Noble, NBS Monograph 72 (1964); the table tells its provenance."""
    i = row["inputs"]
    frequency, vertical = float(i["f_Hz"]), bool(i["loop"].startswith("vertical"))
    soil = medium((i["eps_r"], i["sigma_S_per_m"]), frequency)
    heights = 4.0 * np.pi * np.array(i["h_over_lambda"])
    currents = ring(0.01, heights[0], vertical, frequency, 48)
    lifts = (heights - heights[0]) * c / frequency / (4.0 * np.pi)
    made = WaveSpectrum.of(currents, frequency, soil, lifts[-1])
    found = made.sky_power(soil, lifts)[0].sum(axis=-1) if "_sky_" in row["id"] else made.power(soil, lifts)[0]
    np.testing.assert_allclose(found / made.free_power, np.array(row["value"]), rtol=0.01)


def element(along: tuple[float, float, float], height: float) -> SegmentCurrents:
    """A short piece of wire with 1 A all along, charge at its ends: an electric dipole; twice the height times k."""
    half = 0.5e-5 * WAVELENGTH * np.array(along)
    middle = np.array([0.0, 0.0, height * WAVELENGTH / (4.0 * np.pi)])
    even = np.ones(1, dtype=np.complex128)
    return SegmentCurrents((middle - half)[None], (middle + half)[None], even, even, 1e-4)


ELEMENTS = {"upright": (0.0, 0.0, 1.0), "along x": (1.0, 0.0, 0.0), "along y": (0.0, 1.0, 0.0)}


@pytest.mark.parametrize("height", [0.3, 1.0, 3.0, 9.0])
@pytest.mark.parametrize("name", ELEMENTS)
def test_an_electric_dipole_over_a_perfect_plane(name: str, height: float) -> None:
    """Its charge's image counts too: Balanis, Antenna Theory, sections 4.7 and 4.8 (memory)."""
    sine, cosine = np.sin(height), np.cos(height)
    if name == "upright":
        wanted = 1.0 + 3.0 * (sine / height**3 - cosine / height**2)
    else:
        wanted = 1.0 - 1.5 * (sine / height + cosine / height**2 - sine / height**3)
    currents = element(ELEMENTS[name], height)
    assert sky(currents, METAL)[0] == pytest.approx(wanted, rel=2e-6)
    assert power(currents, METAL)[0] == pytest.approx(wanted, rel=2e-6)


def turned_back(soil: complex, height: float, weight: Callable[[complex, complex, complex], complex]) -> complex:
    """Sommerfeld's integral straight down from grazing incidence, q = 1 - j tau (Wait; memory), by scipy.

    `weight` is that of q, of the level electric field's coefficient and of the level magnetic field's.
    """

    def along_the_path(tau: float) -> complex:
        q = 1.0 - 1j * tau
        below = np.sqrt(soil - 1.0 + q * q)
        below = -below if below.imag > 0.0 else below
        level, along = (q - below) / (q + below), (soil * q - below) / (soil * q + below)
        return complex(1j * weight(q, level, along) * np.exp(-1j * height * q))

    edges = [0.0, *np.unique([0.1, 1.0, *(np.array([0.3, 1.0, 3.0, 10.0, 45.0]) / height)])]
    parts = [quad(along_the_path, low, high, limit=400, complex_func=True)[0] for low, high in pairwise(edges)]
    return complex(sum(parts))


@pytest.mark.parametrize("constants", SOILS)
@pytest.mark.parametrize("height", [0.15, 0.6, 3.0])
@pytest.mark.parametrize("name", ELEMENTS)
def test_an_electric_dipole_over_soil(name: str, height: float, constants: tuple[float, float]) -> None:
    """The loop's integral with electric for magnetic; its imaginary part is what soil adds to the reactance."""
    soil = medium(constants)

    def weight(q: complex, level: complex, along: complex) -> complex:
        return 1.5 * (1.0 - q * q) * along if name == "upright" else 0.75 * (level - q * q * along)

    wanted, near = turned_back(complex(soil[0]), height, weight), 1e-3 if constants == ICE else 3e-4
    made = WaveSpectrum.of(element(ELEMENTS[name], height), FREQUENCY, soil)
    drawn, held = made.power(soil, HERE)[0, 0], made.reactive_power(soil, HERE)[0, 0]
    assert drawn / made.free_power == pytest.approx(1.0 + wanted.real, rel=near, abs=1e-4)
    assert held / made.free_power == pytest.approx(wanted.imag, rel=1e-3, abs=1e-3)


@pytest.mark.parametrize("constants", SOILS)
@pytest.mark.parametrize("height", [0.3, 1.0, 5.0])
@UPRIGHT
def test_what_soil_adds_to_the_reactance_of_a_small_ring(
    vertical: bool, height: float, constants: tuple[float, float]
) -> None:
    soil = medium(constants)

    def weight(q: complex, level: complex, along: complex) -> complex:
        return 0.75 * (along - q * q * level) if vertical else 1.5 * (1.0 - q * q) * level

    wanted = turned_back(complex(soil[0]), height, weight)
    made = WaveSpectrum.of(ring(0.005, height, vertical), FREQUENCY, soil)
    found = made.reactive_power(soil, HERE)[0, 0] / made.free_power
    assert found == pytest.approx(wanted.imag, rel=5e-3, abs=2e-3)


@pytest.mark.parametrize("up", [1.2, 2.0, 6.0])
@UPRIGHT
def test_over_a_perfect_plane_a_ring_loses_its_image_s_mutual_inductance(vertical: bool, up: float) -> None:
    """Maxwell's and Neumann's filaments of even current, twice the height apart: on one axis, or in one plane."""
    radius = 0.002 / WAVENUMBER
    if vertical:
        mutual = -inductance.coplanar_mutual_inductance(radius, radius, 2.0 * up * radius)
    else:
        mutual = float(inductance.coaxial_mutual_inductance(radius, radius, 2.0 * up * radius))
    made = WaveSpectrum.of(ring(0.002, 0.004 * up, vertical), FREQUENCY, METAL)
    assert made.reactive_power(METAL, HERE)[0, 0] == pytest.approx(-2.0 * np.pi * FREQUENCY * mutual, rel=2e-3)


# Loops whose solved current is far from even: megahertz, changes to the plain loop of a metre.
CURRENTS: dict[str, tuple[float, dict[str, Any]]] = {
    "circle, top": (21.0, {"loop__centre_height": "1.1 m", "capacitor__position": "top"}),
    "circle, bottom": (21.0, {"loop__centre_height": "0.7 m", "capacitor__position": "bottom"}),
    "circle, side": (40.0, {"loop__centre_height": "3 m", "capacitor__position": "side"}),
    "full wave": (100.0, {"loop__centre_height": "2 m", "capacitor__position": "side"}),
    "flat": (30.0, {"loop__centre_height": "1 m", "loop__plane": "horizontal"}),
    "two turns": (
        10.0,
        {
            "loop__centre_height": "0.8 m",
            "loop__turns": 2,
            "loop__turn_spacing": "200 mm",
            "capacitor__position": "bottom",
        },
    ),
    "nested turns": (
        10.0,
        {
            "loop__centre_height": "2 m",
            "loop__turns": 2,
            "loop__turn_spacing": "100 mm",
            "loop__turn_arrangement": "nested",
            "loop__plane": "horizontal",
        },
    ),
    "rectangle": (25.0, {"loop": {**rectangle(1.5, 0.6), "centre_height": "1 m"}, "capacitor__position": "side"}),
}


@cache
def solved(name: str, image: bool, other: str | None = None) -> tuple[SegmentCurrents, float, float]:
    """The current of a loop, what it radiates by the solver [W for 1 A] and its frequency [Hz]."""
    megahertz, changes = CURRENTS[name]
    design = plain_design(site__ground="perfect", transmission__0__frequency=f"{megahertz} MHz", **changes)
    position = None if design.loop.plane == "horizontal" else other or design.capacitor.position
    made = flow(design, megahertz * 1e6, position, image)
    return made.segments(), made.radiation, megahertz * 1e6


@pytest.mark.parametrize("name", CURRENTS)
def test_over_a_perfect_plane_a_loop_draws_what_its_solved_image_lets_it(name: str) -> None:
    """The method of moments with the image's own matrix (Harrington 1968; memory): no plane wave in it."""
    currents, radiated, frequency = solved(name, image=True)
    made = WaveSpectrum.of(currents, frequency, PERFECT)
    assert float(made.sky_power(PERFECT, HERE).sum()) == pytest.approx(radiated, rel=1e-3)


@pytest.mark.parametrize("name", CURRENTS)
def test_in_free_space_a_loop_radiates_what_the_solver_says(name: str) -> None:
    currents, radiated, frequency = solved(name, image=False)
    assert WaveSpectrum.of(currents, frequency, PERFECT).free_power == pytest.approx(radiated, rel=1e-3)


@pytest.mark.parametrize("name", CURRENTS)
def test_a_lift_is_a_loop_built_higher(name: str) -> None:
    currents, _, frequency = solved(name, image=False)
    soils = np.concatenate([medium(each, frequency) for each in SOILS])
    lifts = np.array([0.3, 2.0, 11.0])
    low = WaveSpectrum.of(currents, frequency, soils, 11.0)
    drawn, held, sent = low.power(soils, lifts), low.reactive_power(soils, lifts), low.sky_power(soils, lifts)
    for row, lift in enumerate(lifts):
        high = WaveSpectrum.of(moved(currents, (0.0, 0.0, lift)), frequency, soils)
        assert held[:, row] == pytest.approx(high.reactive_power(soils, HERE)[:, 0], rel=1e-3, abs=1e-3)
        assert drawn[:, row] == pytest.approx(high.power(soils, HERE)[:, 0], rel=1e-4)
        assert sent[:, row] == pytest.approx(high.sky_power(soils, HERE)[:, 0], rel=1e-6)


@pytest.mark.parametrize("name", CURRENTS)
def test_where_a_loop_stands_and_which_way_it_faces_is_nothing_to_even_soil(name: str) -> None:
    currents, _, frequency = solved(name, image=False)
    soils = np.concatenate([medium(each, frequency) for each in SOILS])
    here = WaveSpectrum.of(currents, frequency, soils)
    there = WaveSpectrum.of(moved(currents, (37.0, -21.0, 0.0), 0.61), frequency, soils)
    assert there.power(soils, HERE) == pytest.approx(here.power(soils, HERE), rel=1e-6)
    assert there.sky_power(soils, HERE) == pytest.approx(here.sky_power(soils, HERE), rel=1e-6)


@pytest.mark.parametrize("name", ["circle, side", "full wave", "rectangle"])
def test_the_port_on_the_other_side_draws_the_same(name: str) -> None:
    (one, _, frequency), (other, _, _) = solved(name, False), solved(name, False, "other side")
    soils = np.concatenate([medium(each, frequency) for each in SOILS])
    assert np.abs(one.current_start - other.current_start).max() > 0.01 or np.abs(one.start - other.start).max() > 0.01
    assert power(one, soils, frequency) == pytest.approx(power(other, soils, frequency), rel=1e-6)
    assert sky(one, soils, frequency) == pytest.approx(sky(other, soils, frequency), rel=1e-6)


@pytest.mark.parametrize("name", CURRENTS)
@pytest.mark.parametrize("longer", [0.1, 30.0])
def test_all_lengths_longer_and_frequency_and_conductivity_lower_change_no_ratio(name: str, longer: float) -> None:
    """Maxwell's equations have no length of their own: omega epsilon0/sigma and lengths over wavelengths stay."""
    currents, _, frequency = solved(name, image=False)
    soils = np.concatenate([medium(each, frequency) for each in SOILS])
    scaled = np.concatenate([medium((each, flow / longer), frequency / longer) for each, flow in SOILS])
    grown = SegmentCurrents(
        longer * currents.start,
        longer * currents.end,
        currents.current_start,
        currents.current_end,
        longer * currents.radius,
    )
    assert scaled == pytest.approx(soils, rel=1e-12)
    assert power(grown, scaled, frequency / longer) == pytest.approx(power(currents, soils, frequency), rel=1e-6)
    assert sky(grown, scaled, frequency / longer) == pytest.approx(sky(currents, soils, frequency), rel=1e-6)


@pytest.mark.parametrize("name", CURRENTS)
def test_twice_the_current_is_four_times_the_power(name: str) -> None:
    currents, _, frequency = solved(name, image=False)
    soil, more = medium(PASTURE, frequency), 2.0 * np.exp(0.7j)
    double = SegmentCurrents(
        currents.start, currents.end, more * currents.current_start, more * currents.current_end, currents.radius
    )
    one, four = (WaveSpectrum.of(each, frequency, soil) for each in (currents, double))
    assert four.free_power == pytest.approx(4.0 * one.free_power, rel=1e-9)
    assert four.power(soil, HERE) == pytest.approx(4.0 * one.power(soil, HERE), rel=1e-9)
    assert four.sky_power(soil, HERE) == pytest.approx(4.0 * one.sky_power(soil, HERE), rel=1e-9)


@UPRIGHT
def test_far_above_the_ground_free_space_returns(vertical: bool) -> None:
    """What comes back falls with the height, of a flat loop with its square: an image adds 1.5/x, flat 3/x^2."""
    soils = np.concatenate([medium(each) for each in SOILS])
    up = np.array([30.0, 100.0, 300.0])
    made = WaveSpectrum.of(ring(0.1, 3.0, vertical), FREQUENCY, soils, float(up[-1]) / (2.0 * WAVENUMBER))
    added = np.abs(made.power(soils, (up - 3.0) / (2.0 * WAVENUMBER)) / made.free_power - 1.0)
    assert (added < (1.6 / up if vertical else 3.2 / up**2)).all()
    assert added.max() > (0.3 / up[0] if vertical else 0.1 / up[0] ** 2)


@pytest.mark.parametrize("height", [0.3, 2.0])
@UPRIGHT
def test_where_there_is_no_soil_nothing_comes_back_and_half_goes_up(vertical: bool, height: float) -> None:
    """A small loop's pattern in bands: 1 - u^2 flat, 1 - (1 - u^2)/2 upright on average (Balanis, ch. 5; memory)."""
    nothing = np.ones(1, dtype=np.complex128)
    made = WaveSpectrum.of(ring(0.01, height, vertical), FREQUENCY, nothing)
    assert made.power(nothing, HERE)[0, 0] == pytest.approx(made.free_power, rel=1e-9)
    u = np.sin(np.radians([0.0, 20.0, 60.0, 90.0]))  # the bands that are told
    risen = 0.5 * (u + u**3 / 3.0) if vertical else u - u**3 / 3.0
    wanted = np.diff(risen) * made.free_power * 0.75
    assert made.sky_power(nothing, HERE)[0, 0] == pytest.approx(wanted, rel=3e-4)
    assert wanted.sum() == pytest.approx(0.5 * made.free_power)


@pytest.mark.parametrize("constants", SOILS)
@pytest.mark.parametrize("height", [0.5, 4.0, 40.0])
@UPRIGHT
def test_each_band_holds_its_directions(vertical: bool, height: float, constants: tuple[float, float]) -> None:
    """Direct and reflected wave of a dipole, squared, by another quadrature (Balanis, section 4.8; memory)."""
    soils = medium(constants)
    soil = complex(soils[0])

    def sent(u: float) -> float:
        below = np.sqrt(soil - 1.0 + u * u)
        late = np.exp(-1j * height * u)
        level = 1.0 + (u - below) / (u + below) * late
        if not vertical:
            return float(0.75 * (1.0 - u * u) * abs(level) ** 2)
        along = 1.0 + (soil * u - below) / (soil * u + below) * late
        # of an upright loop the level field's two waves leave with opposite signs
        return float(0.375 * (abs(along) ** 2 + u * u * abs(2.0 - level) ** 2))

    made = WaveSpectrum.of(ring(0.01, height, vertical), FREQUENCY, soils)
    found = made.sky_power(soils, HERE)[0, 0] / made.free_power
    for band, (low, high) in enumerate(pairwise(EDGES)):
        edges = np.sin(low) + (np.sin(high) - np.sin(low)) * np.array([0.0, 0.01, 0.1, 0.5, 1.0])
        wanted = sum(quad(sent, one, other, limit=400)[0] for one, other in pairwise(edges))
        assert found[band] == pytest.approx(wanted, rel=1e-3), band


@pytest.mark.parametrize("constants", SOILS)
@pytest.mark.parametrize("height", [0.3, 1.0, 5.0])
@UPRIGHT
def test_what_is_drawn_goes_up_or_down(vertical: bool, height: float, constants: tuple[float, float]) -> None:
    """What flows down through the surface by its own integral (Poynting; Jackson, ch. 6, memory)."""
    soil, currents = medium(constants), ring(0.01, height, vertical)
    down = half_space.soil_ratio(vertical, soil, height)[0]
    assert sky(currents, soil)[0] + down == pytest.approx(power(currents, soil)[0], rel=0.01)


@pytest.mark.parametrize("name", CURRENTS)
def test_a_soil_is_told_alike_among_many(name: str) -> None:
    """The nodes are laid for all soils that will be asked; the answer is each soil's own."""
    currents, _, frequency = solved(name, image=False)
    soils = np.concatenate([medium(each, frequency) for each in SOILS])
    together = power(currents, soils, frequency), sky(currents, soils, frequency)
    alone = [(power(currents, one[None], frequency)[0], sky(currents, one[None], frequency)[0]) for one in soils]
    assert together[0] == pytest.approx(np.array([drawn for drawn, _ in alone]), rel=3e-4)
    assert together[1] == pytest.approx(np.array([sent for _, sent in alone]), rel=1e-6)


@settings(max_examples=40, deadline=None)
@given(
    conductivity=st.floats(-5.0, 1.0),
    permittivity=st.floats(1.0, 90.0),
    megahertz=st.floats(0.2, 150.0),
    up=st.floats(1.2, 30.0),
    size=st.floats(0.02, 1.0),
    vertical=st.booleans(),
    taper=st.floats(0.0, 0.9),
)
def test_nothing_is_gained_from_any_soil(
    conductivity: float,
    permittivity: float,
    megahertz: float,
    up: float,
    size: float,
    vertical: bool,
    taper: float,
) -> None:
    """Neither the sky nor the soil gives power, whatever the current: 1e-4 of free space is the quadrature's."""
    frequency = megahertz * 1e6
    even = ring(size, 2.0 * up * size, vertical, frequency, 32)
    angle = 2.0 * np.pi * np.arange(33) / 32.0
    bent = (1.0 + taper * np.cos(angle) - 0.3j * taper * np.sin(angle)).astype(np.complex128)
    currents = SegmentCurrents(even.start, even.end, bent[:-1], bent[1:], even.radius)
    soil = medium((permittivity, 10.0**conductivity), frequency)
    made = WaveSpectrum.of(currents, frequency, soil)
    sent, drawn = made.sky_power(soil, HERE)[0, 0], float(made.power(soil, HERE)[0, 0])
    assert (sent >= 0.0).all()
    assert drawn >= 0.0
    assert sent.sum() <= drawn * (1.0 + 1e-4) + 2e-4 * made.free_power


def low(currents: SegmentCurrents) -> SegmentCurrents:
    return moved(currents, (0.0, 0.0, -float(currents.end[:, 2].min())))


WRONG: list[tuple[Callable[[SegmentCurrents], SegmentCurrents], float, str]] = [
    (low, 0.0, "above the ground"),
    (lambda currents: moved(currents, (0.0, 0.0, -50.0)), 0.0, "above the ground"),
    (lambda currents: currents, -0.1, "not below zero"),
    (lambda currents: currents, float("nan"), "not below zero"),
]


@pytest.mark.parametrize(("change", "lifted", "word"), WRONG)
def test_what_has_no_meaning_is_refused(
    change: Callable[[SegmentCurrents], SegmentCurrents], lifted: float, word: str
) -> None:
    with pytest.raises(ValueError, match=word):
        WaveSpectrum.of(change(ring(0.1, 1.0, True)), FREQUENCY, medium(PASTURE), lifted)
