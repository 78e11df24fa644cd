"""The method of moments against the Fourier series, closed forms of inductance and radiation, and known resonances."""

import tomllib
from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.constants import c, mu_0
from scipy.optimize import brentq
from scipy.special import ellipe, ellipk

from magsafe.physics import geometry, ground, inductance, round_loop, thin_wire
from magsafe.physics.conductor import rod_impedance
from magsafe.physics.geometry import Turn, Wire
from magsafe.physics.rooftops import ORDER, gauss, quadrature_points
from magsafe.physics.thin_wire import LoopCurrents, Potentials

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
Row = dict[str, Any]

SPACE = mu_0 * c
COPPER = 58e6  # S/m, the definition of annealed copper, IEC 60028 (memory)
POWER = 100.0  # W
ROWS: list[Row] = [
    row
    for row in tomllib.loads(Path(__file__).with_name("check_values.toml").read_text(encoding="utf-8"))["value"]
    if row["id"].startswith("gapfree_")
]


def cut(turn: Turn, conductor_radius: float, segments: int = 48, gap: float | None = None) -> Wire:
    """One turn in its plane, cut as the rest of the program cuts it."""
    perimeter = float(np.linalg.norm(np.roll(turn.points, -1, axis=0) - turn.points, axis=1).sum())
    width = max(4.0 * conductor_radius, 0.01 * perimeter) if gap is None else gap
    return geometry.cut(geometry.wind(turn), conductor_radius, perimeter / segments, width)


def circle(radius: float, conductor_radius: float, segments: int = 48, gap: float | None = None) -> Wire:
    return cut(geometry.round_turn(radius), conductor_radius, segments, gap)


def solved(wire: Wire, frequency: Array, image: bool = False) -> LoopCurrents:
    highest = float(frequency.max())
    parts: tuple[Potentials, ...] = (thin_wire.potentials(wire, highest),)
    if image:
        parts = (*parts, thin_wire.potentials(wire, highest, image=True))
    return thin_wire.solve(wire, frequency, parts)


def self_inductance(wire: Wire) -> float:
    """Inductance with the same current everywhere: the double integral of t.t'/R, times mu0/(4 pi)."""
    return float(mu_0 / (4.0 * np.pi) * thin_wire.potentials(wire, 1e3).static[0].sum())


# --- the circle: Fourier series ---------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Port:
    """What a loop of copper shows at its port."""

    frequency: Array
    radiation: Array
    loss: Array
    reactance: Array
    slope: Array

    @property
    def figures(self) -> dict[str, Array]:
        """What no capacitance across the port changes, or nearly."""
        total, omega = self.radiation + self.loss, 2.0 * np.pi * self.frequency
        return {
            "efficiency": self.radiation / total,
            "unloaded Q": (self.reactance + omega * self.slope) / (2.0 * total),
            "volts": self.reactance * np.sqrt(2.0 * POWER / total),
            "R/X2": self.radiation / self.reactance**2,
        }


CIRCLES = [
    (diameter, thickness)
    for diameter in (0.8, 1.0, 1.7, 3.4)
    for thickness in (0.001, 0.006, 0.022, 0.054)
    if thickness / diameter < 0.06
]
BANDS = np.array([1.8e6, 3.6e6, 7.1e6, 10.1e6, 14.2e6, 21.2e6, 30e6])


@cache
def both_ways(diameter: float, thickness: float) -> tuple[LoopCurrents, Port, Port]:
    """The solver and the series on the same copper ring, up to 30 MHz or a perimeter of 0.35 wavelengths."""
    radius, wire_radius, perimeter = 0.5 * diameter, 0.5 * thickness, np.pi * diameter
    top = min(30e6, 0.35 * c / perimeter)
    frequency = np.append(BANDS[top > BANDS], top)
    gap = max(4.0 * wire_radius, 0.01 * perimeter)
    line = rod_impedance(frequency, COPPER, wire_radius).real
    currents = solved(circle(radius, wire_radius, gap=gap), frequency)
    found = Port(
        frequency,
        currents.resistance,
        line * currents.square.sum(axis=1),
        currents.reactance,
        currents.slope,
    )
    series = round_loop.solve(radius, wire_radius, frequency, gap / radius)
    wanted = Port(
        frequency,
        series.radiation_resistance,
        line * perimeter * series.mean_square,
        series.impedance.imag,
        series.reactance_slope,
    )
    return currents, found, wanted


@pytest.mark.parametrize(("diameter", "thickness"), CIRCLES)
def test_fourier_series_of_the_copper_ring(diameter: float, thickness: float) -> None:
    """Hallén 1938, Storer 1956, Wu 1962 (memory), as in `round_loop`: 0.12 % at 48 segments.

    0.07 % of it is the perimeter of the polygon with the circle's area; the fattest ring is held to the same.
    """
    _, found, wanted = both_ways(diameter, thickness)
    for name, value in found.figures.items():
        np.testing.assert_allclose(value, wanted.figures[name], rtol=1.2e-3, err_msg=name)


@pytest.mark.parametrize(("diameter", "thickness"), CIRCLES)
def test_fourier_series_of_the_port_reactance(diameter: float, thickness: float) -> None:
    """As above: within 0.1 % and 0.1 pF + 10 pF per metre of conductor diameter across the port.

    What a gap of the same width holds is a matter of how finely the charge beside it is resolved.
    """
    _, found, wanted = both_ways(diameter, thickness)
    susceptance = -1.0 / wanted.reactance
    allowed = 1e-3 * np.abs(susceptance) + 2.0 * np.pi * wanted.frequency * (0.1e-12 + 10e-12 * thickness)
    assert (np.abs(-1.0 / found.reactance - susceptance) < allowed).all()
    _, thicker, _ = both_ways(diameter, 0.006 if thickness < 0.006 else 0.001)
    assert (np.abs(-1.0 / thicker.reactance - susceptance) > allowed).any()  # the bound tells loops apart


@pytest.mark.parametrize(("diameter", "thickness"), [(0.8, 0.022), (1.0, 0.001), (1.0, 0.054), (3.4, 0.006)])
def test_fourier_series_of_the_current_round_the_ring(diameter: float, thickness: float) -> None:
    """As above: over the current opposite the port, 0.1 % of it three segments or more from the port.

    Magnitude and phase at every node, and the integral of the square over the whole turn (0.1 %).
    """
    currents, _, wanted = both_ways(diameter, thickness)
    wire = currents.wire
    gap = float(wire.length[0])
    series = round_loop.solve(0.5 * diameter, 0.5 * thickness, wanted.frequency, gap / (0.5 * diameter))
    angle = np.arctan2(wire.nodes[:, 1], wire.nodes[:, 0])
    opposite = series.current(np.array([np.pi]))
    expected = series.current(angle) / opposite
    shape = currents.current / currents.opposite()[:, None]
    assert np.abs(shape - expected)[:, 3:-2].max() < 1e-3
    assert np.abs(shape - expected).max() < 2e-2
    square = currents.square.sum(axis=1) / np.abs(currents.opposite()) ** 2
    mean = series.mean_square / np.abs(opposite[:, 0]) ** 2
    np.testing.assert_allclose(square, np.pi * diameter * mean, rtol=1e-3)


@pytest.mark.parametrize(("conductor_radius", "allowed"), [(0.5e-3, 0.015), (11e-3, 0.005)])
def test_fourier_series_up_to_three_wavelengths(conductor_radius: float, allowed: float) -> None:
    """As above, 32 segments per wavelength: conductance, and radiation over the integral of the current's square.

    The conductance changes fastest at the resonances that a thin ring has near whole wavelengths.
    """
    size = np.array([0.4, 0.5, 0.7, 1.0, 1.5, 2.0, 2.5, 3.0])
    frequency = size * c / np.pi
    gap = max(4.0 * conductor_radius, 0.01 * np.pi)
    found = solved(circle(0.5, conductor_radius, 96, gap), frequency)
    series = round_loop.solve(0.5, conductor_radius, frequency, gap / 0.5)
    shape, wanted = found.square.sum(axis=1), np.pi * series.mean_square
    np.testing.assert_allclose(found.resistance / shape, series.radiation_resistance / wanted, rtol=2e-3)
    conductance = (1.0 / (found.resistance + 1j * found.reactance)).real
    np.testing.assert_allclose(conductance, (1.0 / series.impedance).real, rtol=allowed)
    np.testing.assert_allclose(conductance[:5], (1.0 / series.impedance).real[:5], rtol=1e-3)


@pytest.mark.parametrize("row", ROWS, ids=lambda row: row["id"])
def test_gap_free_check_values(row: Row) -> None:
    """The project's check values, computed by two solutions with their own kernels; the table's own tolerances."""
    size, thickness, radius = row["inputs"]["C_over_lambda"], row["inputs"]["a_over_R"], 1.0
    frequency = np.array([size * c / (2.0 * np.pi * radius)])
    found = solved(circle(radius, thickness * radius, 96), frequency)
    resistance = found.resistance / (SPACE / 6.0 * np.pi * size**4)
    if row["id"].startswith("gapfree_RoverX2"):
        value = resistance / (found.reactance / (SPACE * size * (np.log(8.0 / thickness) - 2.0))) ** 2
    else:
        value = resistance / (found.square.sum(axis=1) / (2.0 * np.pi * radius))
    assert float(value[0]) == pytest.approx(row["value"], rel=row["rtol"])


# --- resonances of a free ring ----------------------------------------------------------------

RING = 0.5e-3  # m, conductor radius of a ring of 1 m radius


@cache
def ring_port(gap: float) -> Callable[[float], complex]:
    """Impedance of the ring against its perimeter in wavelengths."""
    wire = circle(1.0, RING, 96, gap)
    part = thin_wire.potentials(wire, 3.3 * c / (2.0 * np.pi))

    def impedance(size: float) -> complex:
        found = thin_wire.solve(wire, np.array([size * c / (2.0 * np.pi)]), (part,))
        return complex(found.resistance[0], found.reactance[0])

    return impedance


def crossing(value: Callable[[float], float], near: float) -> float:
    return float(brentq(value, 0.96 * near, 1.04 * near, xtol=1e-6))


@pytest.mark.parametrize("wanted", [1.037, 2.051, 3.06])
def test_a_free_ring_is_resonant_a_little_above_whole_wavelengths(wanted: float) -> None:
    """Computed independently for this project; above a whole number of wavelengths is common practice."""
    port = ring_port(0.012)
    found = crossing(lambda size: port(size).imag, wanted)
    assert found == pytest.approx(wanted, rel=0.005)
    series = crossing(
        lambda size: float(round_loop.solve(1.0, RING, np.array([size * c / (2 * np.pi)]), 0.012).impedance[0].imag),
        wanted,
    )
    assert found == pytest.approx(series, rel=0.001)


@pytest.mark.parametrize("wanted", [0.481, 1.485, 2.48])
def test_a_free_ring_is_anti_resonant_a_little_below_halves(wanted: float) -> None:
    """Computed independently for this project; depends on the gap, here 12 mm."""
    port = ring_port(0.012)
    found = crossing(lambda size: (1.0 / port(size)).imag, wanted)
    assert found == pytest.approx(wanted, rel=0.005)
    series = crossing(
        lambda size: float(
            (1.0 / round_loop.solve(1.0, RING, np.array([size * c / (2 * np.pi)]), 0.012).impedance[0]).imag
        ),
        wanted,
    )
    assert found == pytest.approx(series, rel=0.002)


def test_a_ring_of_one_wavelength_has_about_120_ohm() -> None:
    """Common practice: 100 to 140 ohm at the first resonance."""
    port = ring_port(0.012)
    size = crossing(lambda size: port(size).imag, 1.037)
    assert port(size).real == pytest.approx(120.0, rel=0.2)


# --- radiation of small loops -----------------------------------------------------------------


@pytest.mark.parametrize("size", [0.005, 0.01, 0.02])
@pytest.mark.parametrize(
    "turn", [geometry.round_turn(0.5), geometry.cornered_turn(geometry.regular_corners(4, 0.5), 0)]
)
def test_kraus_radiation_resistance_of_a_small_loop(turn: Turn, size: float) -> None:
    """eta (8 pi^3/3) (A/wavelength^2)^2, 20 pi^2 (C/wavelength)^4 for a circle: Kraus; Balanis 5.2 (both memory).

    The next term of a loop with one port is (pi size)^2 for the circle; the capacitance of the port adds to it.
    """
    x, y = turn.points.T
    area = abs(0.5 * float((x * np.roll(y, -1) - y * np.roll(x, -1)).sum()))
    wire = cut(turn, 0.001)
    frequency = np.array([size * c / float(wire.length.sum())])
    found = float(solved(wire, frequency).resistance[0])
    expected = SPACE * 8.0 * np.pi**3 / 3.0 * (area * (frequency[0] / c) ** 2) ** 2
    assert 0.5 * (np.pi * size) ** 2 < found / expected - 1.0 < 1.5 * (np.pi * size) ** 2


@pytest.mark.parametrize("over_wavelength", [0.05, 0.2, 0.37, 0.8, 3.0])
@pytest.mark.parametrize("upright", [True, False])
def test_wait_small_loop_over_a_perfect_plane(upright: bool, over_wavelength: float) -> None:
    """Ratio to free space of a magnetic dipole and its image: Wait, as in `ground` (memory).

    1e-4: the loop is 1/500 of a wavelength, and 1/25 of the height or less; its taper is the same in both.
    """
    frequency = 3e6
    wavelength = c / frequency
    wire = circle(0.005 / (2.0 * np.pi) * wavelength, 0.005)
    place = geometry.upright if upright else geometry.flat
    high = place(wire, over_wavelength * wavelength)
    found = solved(high, np.array([frequency]), image=True).resistance / solved(wire, np.array([frequency])).resistance
    ratio = ground.image_ratio_vertical if upright else ground.image_ratio_horizontal
    expected = ratio(4.0 * np.pi * over_wavelength)
    size = 0.005 / (2.0 * np.pi) / over_wavelength
    np.testing.assert_allclose(found, expected, rtol=2e-4 + size**2)


# --- inductance -------------------------------------------------------------------------------


@pytest.mark.parametrize("conductor_radius", [0.05e-3, 0.5e-3, 5.5e-3, 11e-3, 27e-3])
def test_nbs_inductance_of_a_ring(conductor_radius: float) -> None:
    """mu0 R [(1 + a2/4R2) ln(8R/a) - 2], current on the surface: Rosa & Grover, NBS Scientific Paper 169 (memory)."""
    radius, thickness = 0.5, conductor_radius / 0.5
    expected = mu_0 * radius * ((1.0 + 0.25 * thickness**2) * np.log(8.0 / thickness) - 2.0)
    assert self_inductance(circle(radius, conductor_radius)) == pytest.approx(expected, rel=5e-4)


def test_nbs_example_of_a_ring() -> None:
    """654.40537 pi cm for R = 25 cm, a = 0.05 cm: Rosa & Grover, NBS Scientific Paper 169, ring example (memory).

    With its current in the section; that on the surface has mu0 R/4 less, a quarter being -7/4 + 2 of the formula.
    """
    printed = 654.40537 * np.pi * 1e-9  # 1 cm of inductance is 1 nH
    expected = printed - mu_0 * 0.25 / 4.0
    assert self_inductance(circle(0.25, 0.0005)) == pytest.approx(expected, rel=3e-4)
    assert self_inductance(circle(0.25, 0.0005, 96)) == pytest.approx(expected, rel=5e-5)


@pytest.mark.parametrize("sides", [3, 4, 5, 6, 8, 12])
@pytest.mark.parametrize("thickness", [2e-5, 2e-4, 1e-3])
def test_grover_inductance_of_a_polygon(sides: int, thickness: float) -> None:
    """Grover, Inductance Calculations (1946), ch. 8 (memory); at corners it leaves out a conductor's diameter."""
    perimeter, conductor_radius = 3.0, 3.0 * thickness / sides
    corners = geometry.regular_corners(sides, perimeter / (2.0 * sides * np.sin(np.pi / sides)))
    expected = float(inductance.polygon_inductance(perimeter, sides, conductor_radius))
    found = self_inductance(cut(geometry.cornered_turn(corners, 0), conductor_radius))
    assert found == pytest.approx(expected, rel=1e-5 + 0.6 * thickness)


@pytest.mark.parametrize(("wide", "high"), [(1.5, 0.5), (2.0, 0.2), (1.0, 1.0)])
@pytest.mark.parametrize("conductor_radius", [0.05e-3, 0.5e-3, 5e-3])
def test_grover_inductance_of_a_rectangle(wide: float, high: float, conductor_radius: float) -> None:
    """Grover, Inductance Calculations (1946), current on the surface (memory), with the term of its ends.

    mu0/pi [(b+c) ln(2bc/a) - b ln(b+g) - c ln(c+g) - 2(b+c) + 2g + 8a/pi], g the diagonal: each side's mean distance of
    itself is that of points on a circle, 4a/pi, where current in the section would give Grover's +2a.
    """
    corners = 0.5 * np.array([[wide, high], [-wide, high], [-wide, -high], [wide, -high]])
    g = float(np.hypot(wide, high))
    bracket = (wide + high) * np.log(2.0 * wide * high / conductor_radius) - wide * np.log(wide + g)
    bracket += -high * np.log(high + g) - 2.0 * (wide + high) + 2.0 * g
    expected = mu_0 / np.pi * (bracket + 8.0 * conductor_radius / np.pi)
    found = self_inductance(cut(geometry.cornered_turn(corners, 0), conductor_radius))
    assert found == pytest.approx(expected, rel=1e-4)
    if conductor_radius < 1e-4:
        assert found == pytest.approx(mu_0 / np.pi * bracket, rel=1e-4)


def maxwell(first: float, second: float, distance: float) -> float:
    """Maxwell, Treatise on Electricity and Magnetism, vol. II, art. 701 (memory)."""
    parameter = 4.0 * first * second / ((first + second) ** 2 + distance**2)
    modulus = np.sqrt(parameter)
    bracket = (2.0 / modulus - modulus) * ellipk(parameter) - 2.0 / modulus * ellipe(parameter)
    return float(mu_0 * np.sqrt(first * second) * bracket)


@pytest.mark.parametrize(("second", "distance"), [(0.3, 0.0), (0.3, 0.1), (0.5, 0.2), (0.2, 1.0)])
def test_maxwell_mutual_inductance_of_two_chains(second: float, distance: float) -> None:
    """Neumann's integral over the Gauss points of two coaxial rings of 48 segments, against the elliptic form."""
    chains = circle(0.5, 1e-4), geometry.flat(circle(second, 1e-4), distance)
    _, weight = gauss(ORDER)
    steps = [(w.length[:, None, None] * weight[:, None] * w.direction[:, None]).reshape(-1, 3) for w in chains]
    apart = np.linalg.norm(quadrature_points(chains[0])[:, None] - quadrature_points(chains[1]), axis=2)
    found = mu_0 / (4.0 * np.pi) * float(((steps[0] @ steps[1].T) / apart).sum())
    assert found == pytest.approx(maxwell(0.5, second, distance), rel=1e-5)


@pytest.mark.parametrize("height", [1.0, 0.3, 0.1, 0.03, 0.01, 0.003, 0.001])
def test_maxwell_mutual_inductance_of_a_flat_ring_and_its_image(height: float) -> None:
    """Minus that of two rings at twice the height (image theory: Balanis, Antenna Theory, 4.7, memory)."""
    wire = geometry.flat(circle(0.5, 1e-4), height)
    found = mu_0 / (4.0 * np.pi) * float(thin_wire.potentials(wire, 1e3, image=True).static[0].sum())
    assert found == pytest.approx(-maxwell(0.5, 0.5, 2.0 * height), rel=2e-4)


def parallel(first: tuple[float, float], second: tuple[float, float], apart: float) -> float:
    """Neumann's integral of two parallel filaments [m]: Grover, Inductance Calculations (1946), ch. 6 (memory)."""

    def part(u: float) -> float:
        long = abs(u)
        logarithm = np.arcsinh(long / apart) if apart > 0.0 else np.log(2.0 * long)
        return float(long * logarithm - np.hypot(long, apart))

    (a, b), (p, q) = first, second
    return part(q - a) + part(p - b) - part(p - a) - part(q - b)


@pytest.mark.parametrize("lowest", [0.5, 0.05, 0.005, 0.001])
@pytest.mark.parametrize("segments", [24, 48])
def test_grover_mutual_inductance_of_an_upright_square_and_its_image(lowest: float, segments: int) -> None:
    """The sides pair by pair; in the image, currents along the plane are reversed: Balanis, 4.7 (memory)."""
    side, top = 0.9, lowest + 0.9
    corners = 0.5 * side * np.array([[1.0, 1.0], [-1.0, 1.0], [-1.0, -1.0], [1.0, -1.0]])
    turn = geometry.cornered_turn(corners, 3)  # its port on an upright side
    wire = geometry.upright(cut(turn, 0.1e-3, segments), lowest + 0.5 * side)
    whole, up, down = (0.0, side), (lowest, top), (-top, -lowest)
    across = 2.0 * parallel(whole, whole, lowest + top)
    across -= parallel(whole, whole, 2.0 * lowest) + parallel(whole, whole, 2.0 * top)
    along = 2.0 * (parallel(up, down, 0.0) - parallel(up, down, side))
    found = float(thin_wire.potentials(wire, 1e3, image=True).static[0].sum())
    assert found == pytest.approx(across + along, rel=5e-4)


@pytest.mark.parametrize(("turns", "spacing"), [(2, 0.01), (3, 0.006), (4, 0.01)])
def test_maxwell_inductance_of_a_helix(turns: int, spacing: float) -> None:
    """N L + 2 sum (N - k) M(k spacing): NBS Scientific Paper 169 and Maxwell (memory), 0.5 %: the link is left out."""
    radius, wire_radius = 0.5, 0.5e-3
    path = geometry.wind(geometry.round_turn(radius), turns, spacing)
    wire = geometry.cut(path, wire_radius, 2.0 * np.pi * radius / 48, 0.5 * turns * spacing)
    pairs = sum((turns - k) * maxwell(radius, radius, k * spacing) for k in range(1, turns))
    ring = float(inductance.circle_inductance(radius, wire_radius))
    assert self_inductance(wire) == pytest.approx(turns * ring + 2.0 * pairs, rel=5e-3)


# --- losses -----------------------------------------------------------------------------------


def test_a_loss_moves_the_port_by_its_line_integral() -> None:
    """Z + integral Z' I^2: the port impedance is stationary, Harrington, Time-Harmonic Electromagnetic Fields, ch. 7.

    From memory, as is Schelkunoff 1934 for Z'. What is left goes as the square of its share of the reactance.
    """
    wire = circle(0.5, 0.25e-3)
    frequency = np.array([0.1 * c / np.pi])
    part = thin_wire.potentials(wire, float(frequency[0]))
    bare = thin_wire.solve(wire, frequency, (part,))
    for conductivity in (COPPER, 1.39e6):
        line = rod_impedance(frequency, conductivity, 0.25e-3)[:, None] * np.ones(len(wire.nodes))
        loaded = thin_wire.solve(wire, frequency, (part,), internal=line)
        added = (line * bare.complex_square).sum(axis=1)
        share = float(np.abs(added / bare.reactance)[0])
        left = loaded.reactance - (bare.reactance + added.imag)
        assert share > 0.005
        assert abs(left[0] / bare.reactance[0]) < 0.2 * share**2
