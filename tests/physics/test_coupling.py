"""The coupling loop held against closed forms, flux, brute force and a full-wave solution of both loops."""

from dataclasses import dataclass
from functools import cache
from math import pi

import numpy as np
import pytest
from coupled_wires import TwoPort, two_port
from scipy.constants import c, mu_0
from scipy.optimize import brentq, minimize_scalar
from thin_wires import rectangle, solved, source
from windings import cut

from magsafe.physics import conductor, coupling, coupling_loop, geometry, inductance, near_field, thin_wire
from magsafe.physics.arrays import Array
from magsafe.physics.coupling import mutual_inductance
from magsafe.physics.coupling_loop import Circuit, Place, beside, centred, matching_size
from magsafe.physics.geometry import Wire
from magsafe.physics.near_field import SegmentCurrents
from magsafe.physics.thin_wire import Potentials
from magsafe.physics.tuned_circuit import detuned_impedance, standing_wave_ratio

AXIS = np.array([0.0, 0.0, 1.0])
MIDDLE = np.zeros(3)
COPPER_TUBE = 49.3e6  # S/m, phosphorus-deoxidised


def uniform(nodes: Array, radius: float, current: complex = 1.0) -> SegmentCurrents:
    flow = np.full(len(nodes), current, dtype=np.complex128)
    return SegmentCurrents(nodes, np.roll(nodes, -1, axis=0), flow, flow, radius)


def circle(radius: float, sides: int = 720, centre: Array = MIDDLE) -> Array:
    """Corners of a polygon of the circle's area."""
    angle = 2.0 * pi / sides * np.arange(sides)
    outside = radius * np.sqrt(angle[1] / np.sin(angle[1]))
    return np.asarray(centre + outside * np.stack([np.cos(angle), np.sin(angle), 0.0 * angle], axis=1))


def ring(diameter: float, radius: float, per_turn: int, bearing: float = 0.0, aside: float = 0.0) -> Wire:
    """A round loop in the plane z = 0, its port at a bearing."""
    wire = cut(geometry.turned(geometry.round_turn(0.5 * diameter), bearing), radius, per_turn)
    return Wire(wire.nodes + np.array([aside, 0.0, 0.0]), wire.turn, radius)


def opposite(wire: Wire) -> Array:
    """The place halfway along the chain from the middle of its port."""
    ends = np.concatenate([[0.0], np.cumsum(wire.length)])
    wanted = 0.5 * (ends[-1] + wire.length[0])
    closed = np.concatenate([wire.nodes, wire.nodes[:1]])
    return np.array([np.interp(wanted, ends, closed[:, i]) for i in range(3)])


def inside(wire: Wire, clearance: float) -> Place:
    point = opposite(wire)
    return beside(point, wire.nodes.mean(axis=0) - point, AXIS, clearance)


def tapered() -> SegmentCurrents:
    """A bent chain in space whose current has every slope and phase."""
    chance = np.random.default_rng(7)
    nodes = circle(0.5, 9) + 0.1 * chance.standard_normal((9, 3))
    current = chance.standard_normal(9) + 1j * chance.standard_normal(9)
    return SegmentCurrents(nodes, np.roll(nodes, -1, axis=0), current, np.roll(current, -1), 1e-3)


# Mutual inductance


@pytest.mark.parametrize("distance", [0.0, 0.03, 0.2, 1.5])
def test_circles_on_one_axis_have_maxwells_mutual_inductance(distance: float) -> None:
    radii = np.array([0.02, 0.1, 0.3, 0.48, 0.6])
    found = mutual_inductance(uniform(circle(0.5), 1e-3), np.array([0.0, 0.0, distance]), AXIS, radii)
    wanted = inductance.coaxial_mutual_inductance(0.5, radii, distance)
    np.testing.assert_allclose(found, wanted, rtol=1e-4)


@pytest.mark.parametrize(("radius", "aside"), [(0.1, 0.2), (0.05, 0.44), (0.2, 0.295), (0.1, 0.9)])
def test_circles_in_one_plane_have_smythes_mutual_inductance(radius: float, aside: float) -> None:
    found = float(mutual_inductance(uniform(circle(0.5, 2000), 1e-3), np.array([aside, 0.0, 0.0]), AXIS, radius))
    assert found == pytest.approx(inductance.coplanar_mutual_inductance(0.5, radius, aside), rel=1e-4)


def test_a_square_is_a_dipole_field_at_its_centre() -> None:
    """B = 2 sqrt(2) mu0 I / (pi side) in the middle of a square (any textbook), over a small circle's area."""
    nodes = np.concatenate([rectangle(0.8, 0.8), np.zeros((4, 1))], axis=1)
    found = float(mutual_inductance(uniform(nodes, 1e-3), MIDDLE, AXIS, 1e-3))
    assert found == pytest.approx(2.0 * np.sqrt(2.0) * mu_0 / (pi * 0.8) * pi * 1e-6, rel=1e-5)


def test_a_tapered_current_links_the_flux_of_its_field() -> None:
    """Flux of the magnetic field of `near_field` through the disc: the law of Biot and Savart, other code."""
    currents, centre, normal, radius = tapered(), np.array([0.1, -0.05, 0.2]), np.array([0.3, -0.4, 0.9]), 0.12
    axis = normal / np.linalg.norm(normal)
    first = np.cross(axis, [1.0, 0.0, 0.0])
    first /= np.linalg.norm(first)
    second = np.cross(axis, first)
    share, weight = np.polynomial.legendre.leggauss(12)
    out, angle = radius * (0.5 + 0.5 * share), 2.0 * pi / 40 * np.arange(40)
    places = centre + out[:, None, None] * (np.cos(angle)[:, None] * first + np.sin(angle)[:, None] * second)
    magnetic = near_field.fields(places.reshape(-1, 3), currents, 1.0)[1].real @ axis
    area = np.repeat(0.5 * radius * weight * out * 2.0 * pi / 40, 40)
    flux = mu_0 * float((magnetic * area).sum())
    assert float(mutual_inductance(currents, centre, normal, radius)) == pytest.approx(flux, rel=1e-9)


def test_mutual_inductance_does_not_care_which_loop_carries_the_current() -> None:
    aside = np.array([0.2, 0.1, 0.05])
    one = mutual_inductance(uniform(circle(0.5), 1e-3), aside, AXIS, 0.1)
    other = mutual_inductance(uniform(circle(0.1, 720, aside), 1e-3), MIDDLE, AXIS, 0.5)
    assert float(one) == pytest.approx(float(other), rel=1e-4)


def test_mutual_inductance_scales_turns_and_adds() -> None:
    currents, centre = tapered(), np.array([0.1, 0.0, 0.1])
    whole = float(mutual_inductance(currents, centre, AXIS, 0.15))
    larger = SegmentCurrents(
        2.0 * currents.start, 2.0 * currents.end, currents.current_start, currents.current_end, 1e-3
    )
    assert float(mutual_inductance(larger, 2.0 * centre, AXIS, 0.3)) == pytest.approx(2.0 * whole, rel=1e-9)
    assert float(mutual_inductance(currents, centre, -3.0 * AXIS, 0.15)) == pytest.approx(-whole, rel=1e-9)
    parts = [
        SegmentCurrents(
            currents.start[s], currents.end[s], currents.current_start[s], currents.current_end[s], currents.radius
        )
        for s in (slice(0, 4), slice(4, 9))
    ]
    summed = sum(float(mutual_inductance(part, centre, AXIS, 0.15)) for part in parts)
    assert summed == pytest.approx(whole, rel=1e-9)


def test_a_circle_close_to_the_conductor_still_has_all_its_digits() -> None:
    """0.2 mm of air: the equal steps are doubled until they see it."""
    currents = uniform(circle(0.5, 2000), 1e-4)
    found = float(mutual_inductance(currents, np.array([0.4496, 0.0, 0.0]), AXIS, 0.05))
    angle = 2.0 * pi / 16384 * (np.arange(16384) + 0.5)
    x, y = 0.4496 + 0.05 * np.cos(angle), 0.05 * np.sin(angle)
    rho = np.hypot(x, y)
    flux = np.array([inductance.coaxial_mutual_inductance(0.5, r, 0.0) for r in rho])  # 2 pi rho times the potential
    wanted = float(np.mean(flux / rho * (x * np.cos(angle) + y * np.sin(angle)) / rho) * 0.05)
    assert found == pytest.approx(wanted, rel=1e-3)


def test_many_circles_are_one_call() -> None:
    currents, radii = tapered(), np.array([[0.02, 0.05, 0.1], [0.11, 0.12, 0.2]])
    centres = np.stack([radii, 0.0 * radii, 0.1 + 0.0 * radii], axis=-1)
    found = mutual_inductance(currents, centres, AXIS, radii)
    assert found.shape == (2, 3)
    for i in np.ndindex(2, 3):
        assert float(found[i]) == pytest.approx(
            float(mutual_inductance(currents, centres[i], AXIS, radii[i])), rel=1e-9
        )


def test_a_circle_across_the_loop_links_nothing() -> None:
    found = float(mutual_inductance(uniform(circle(0.5), 0.01), MIDDLE, np.array([0.0, 1.0, 0.0]), 0.1))
    assert abs(found) < 1e-6 * mu_0 * 0.1


def test_circles_that_cannot_be_are_refused() -> None:
    currents = uniform(circle(0.5), 0.01)
    with pytest.raises(ValueError, match="enters the conductor"):
        mutual_inductance(currents, MIDDLE, AXIS, 0.495)
    with pytest.raises(ValueError, match="too near to the conductor's axis"):
        mutual_inductance(
            uniform(circle(0.5, 24), 1e-9), np.array([0.45, 0.0, 0.0]), AXIS, circle(0.5, 24)[0, 0] - 0.45 - 1e-8
        )
    with pytest.raises(ValueError, match="expected lengths above zero"):
        mutual_inductance(currents, MIDDLE, AXIS, np.array([0.1, 0.0]))
    with pytest.raises(ValueError, match="expected a direction"):
        mutual_inductance(currents, MIDDLE, 0.0 * AXIS, 0.1)


# Two coupled circuits


@pytest.mark.parametrize("coefficient", [0.1, 0.7, 1.0, 1.6, 12.0])
@pytest.mark.parametrize("own", [0.0, 20.0, 74.0, 150.0])
def test_retuning_reaches_what_brute_force_finds(coefficient: float, own: float) -> None:
    resistance, line = 0.0444, 50.0
    needed = float(coupling.matching_mutual_reactance(resistance, own, line))
    mutual = needed * np.sqrt(coefficient)
    found = float(coupling.coupling_coefficient(mutual, own, resistance, line))
    assert found == pytest.approx(coefficient, rel=1e-12)

    def ratio(tuned: float) -> float:
        seen = coupling.input_impedance(mutual, own, complex(resistance, tuned))
        return float(standing_wave_ratio(seen, line))

    grid = np.linspace(-60.0, 60.0, 6001) * resistance
    start = grid[int(np.argmin([ratio(x) for x in grid]))]
    step = grid[1] - grid[0]
    best = minimize_scalar(ratio, bounds=(start - step, start + step), method="bounded", options={"xatol": 1e-12})
    assert float(coupling.best_standing_wave_ratio(found)) == pytest.approx(float(best.fun), rel=1e-6)
    at = float(coupling.best_tuned_reactance(found, own, resistance, line))
    assert at == pytest.approx(float(best.x), abs=1e-3 * resistance)
    assert ratio(at) == pytest.approx(max(coefficient, 1.0 / coefficient), rel=1e-9)


def test_the_impedance_is_that_of_two_meshes() -> None:
    """Kirchhoff's voltages round both loops, solved as a matrix."""
    matrix = np.array([[0.05 + 0.02j, 1.7j], [1.7j, 25.0j]])
    wanted = 1.0 / np.linalg.inv(matrix)[1, 1]
    assert complex(coupling.input_impedance(1.7, 25.0, 0.05 + 0.02j)) == pytest.approx(complex(wanted), rel=1e-12)


@pytest.mark.parametrize("coefficient", [0.5, 1.0, 3.0])
@pytest.mark.parametrize("quality", [20.0, 1500.0])
def test_the_best_match_lies_above_the_loops_own_resonance(coefficient: float, quality: float) -> None:
    """The resonance is moved, at one frequency, until the SWR is lowest."""
    frequency, own, line, resistance = 14.2e6, 46.0, 50.0, 0.155
    mutual = float(np.sqrt(coefficient)) * float(coupling.matching_mutual_reactance(resistance, own, line))

    def ratio(offset: float) -> float:
        impedance = resistance * detuned_impedance(offset, frequency - offset, quality)
        return float(standing_wave_ratio(coupling.input_impedance(mutual, own, complex(impedance)), line))

    width = 3.0 * coefficient * frequency / quality
    best = minimize_scalar(ratio, bounds=(-0.2 * width, width), method="bounded", options={"xatol": 1e-3})
    found = float(coupling.best_offset(frequency, coefficient, own, line, quality))
    assert found == pytest.approx(float(best.x), rel=1e-3)
    assert found == pytest.approx(coefficient * frequency * own / (2.0 * quality * line), rel=coefficient / quality)


def test_critical_coupling_is_that_of_two_tuned_circuits() -> None:
    """k = 1/sqrt(Q1 Q2) with both tuned: Terman, Radio Engineers' Handbook (1943) (memory)."""
    omega, first, second, resistance, line = 2.0 * pi * 7.1e6, 2.4e-6, 0.4e-6, 0.05, 50.0
    critical = 1.0 / np.sqrt(omega * first / resistance * omega * second / line)
    found = float(coupling.matching_mutual_reactance(resistance, 0.0, line))
    assert found / (omega * np.sqrt(first * second)) == pytest.approx(critical, rel=1e-12)


def test_a_place_a_little_off_the_axis_is_still_there() -> None:
    """The corner of the true circle lies outside the sides that stand for it."""
    wire, circuit = tuned_loop(1.0, 0.011, 14.2e6, 0.010)
    inwards = np.array([1.0, 0.0, 0.0])
    found = matching_size(circuit, beside(np.array([-0.503, 0.0, 0.0]), inwards, AXIS, 0.03), 0.002).matched
    wanted = matching_size(circuit, inside(wire, 0.03), 0.002).matched
    assert found is not None
    assert wanted is not None
    assert found.diameter == pytest.approx(wanted.diameter, rel=1e-3)


def test_nothing_couples_nothing() -> None:
    assert float(coupling.best_standing_wave_ratio(0.0)) == np.inf
    assert float(coupling.best_standing_wave_ratio(1.0)) == 1.0


def test_a_thick_conductor_has_no_form_for_its_reactance() -> None:
    assert float(coupling.own_reactance(14.2e6, 0.1, 0.002)) == pytest.approx(
        2.0 * pi * 14.2e6 * mu_0 * 0.1 * (np.log(400.0) - 2.0), rel=1e-9
    )
    with pytest.raises(ValueError, match=r"conductor radius over coupling loop radius 0.2 is outside"):
        coupling.own_reactance(14.2e6, 0.01, 0.002)


# Sizes


@cache
def tuned_loop(diameter: float, radius: float, frequency: float, extra: float) -> tuple[Wire, Circuit]:
    """A round loop of copper tube of 1 mm wall, solved, with so much resistance besides at its port."""
    wire = ring(diameter, radius, 60)
    found = solved(wire, np.array([frequency]))
    loss = complex(conductor.tube_impedance(frequency, COPPER_TUBE, radius, 1e-3)).real * float(found.square.sum())
    return wire, Circuit(source(found), frequency, float(found.resistance[0]) + loss + extra, 50.0)


@pytest.mark.parametrize(("clearance", "wanted"), [(None, 0.203), (0.087, 0.149), (0.017, 0.106)])
def test_the_size_that_matches_a_one_metre_loop(clearance: float | None, wanted: float) -> None:
    """1 m, 22 mm copper tube, 14.2 MHz, 10 mohm besides, coupling wire 4 mm; 100 and 30 mm from axis to axis.

    Computed independently of this code.
    """
    wire, circuit = tuned_loop(1.0, 0.011, 14.2e6, 0.010)
    place = centred(MIDDLE, AXIS) if clearance is None else inside(wire, clearance)
    found = matching_size(circuit, place, 0.002)
    assert found.matched is not None
    assert found.matched.diameter == pytest.approx(wanted, rel=0.05)
    assert found.matched.coefficient == pytest.approx(1.0, rel=1e-6)
    assert found.matched.standing_wave_ratio == pytest.approx(1.0, rel=1e-6)
    needed = coupling.matching_mutual_reactance(circuit.resistance, found.matched.reactance, 50.0)
    assert found.matched.mutual_reactance == pytest.approx(float(needed), rel=1e-6)
    assert found.matched.mutual_reactance == pytest.approx(
        2.0 * pi * 14.2e6 * abs(found.matched.mutual_inductance), rel=1e-12
    )
    assert found.matched.tuned_reactance == pytest.approx(circuit.resistance * found.matched.reactance / 50.0, rel=1e-6)
    assert found.matched.size == pytest.approx(pi * found.matched.diameter * 14.2e6 / c, rel=1e-12)


def test_a_coupling_loop_lies_where_it_was_put() -> None:
    wire, circuit = tuned_loop(1.0, 0.011, 14.2e6, 0.010)
    found = matching_size(circuit, inside(wire, 0.03), 0.002).matched
    assert found is not None
    edge = float(np.linalg.norm(found.centre - opposite(wire))) - 0.5 * found.diameter
    assert edge - 0.011 - 0.002 == pytest.approx(0.03, rel=0.02)
    assert found.centre[0] < 0.0  # opposite the port
    assert abs(found.centre[1]) < 1e-9


@pytest.mark.parametrize(
    "corners",
    [geometry.regular_corners(3, 0.6), geometry.regular_corners(8, 0.5), rectangle(1.5, 0.5)],
    ids=["triangle", "octagon", "rectangle"],
)
def test_a_coupling_loop_in_a_polygon_keeps_clear_of_its_sides(corners: Array) -> None:
    """In the corner opposite the port of a triangle it lies further in."""
    wire = cut(geometry.cornered_turn(corners, 0), 0.008, 60)
    circuit = Circuit(source(solved(wire, np.array([7.1e6]))), 7.1e6, 0.08, 50.0)
    place = inside(wire, 0.02)
    room = place.largest(circuit.currents, 0.002)
    sizes = np.linspace(0.05, 2.0 * room, 12)
    angle = 2.0 * pi / 720 * np.arange(720)
    for each in coupling_loop.coupled(circuit, place, 0.002, sizes):
        points = each.centre + 0.5 * each.diameter * np.stack([np.cos(angle), np.sin(angle), 0.0 * angle], axis=1)
        nearest = float(near_field.distance_to_axis(points, circuit.currents).min()) - 0.01
        assert nearest == pytest.approx(0.02, rel=0.02)
    with pytest.raises(ValueError, match="has no room"):
        coupling_loop.coupled(circuit, place, 0.002, np.array([2.01 * room]))
    matched = matching_size(circuit, place, 0.002).matched
    assert matched is not None
    assert matched.coefficient == pytest.approx(1.0, rel=1e-6)


def test_the_largest_that_fits_is_a_polygons_inscribed_circle() -> None:
    nodes = np.concatenate([rectangle(0.8, 0.6), np.zeros((4, 1))], axis=1)
    room = centred(MIDDLE, AXIS, 0.05).largest(uniform(nodes, 0.01), 0.002)
    assert room == pytest.approx(0.3 - 0.05 - 0.01 - 0.002, rel=1e-9)


def test_where_nothing_matches_it_says_how_much_couples() -> None:
    wire, circuit = tuned_loop(1.0, 0.011, 14.2e6, 0.010)
    poor = Circuit(circuit.currents, circuit.frequency, 4000.0, 50.0)
    found = matching_size(poor, inside(wire, 0.03), 0.002)
    assert found.matched is None
    assert not found.smallest_overcouples
    assert found.largest is not None
    assert found.strongest is not None
    assert found.strongest.coefficient < 1.0
    assert found.largest.diameter == pytest.approx(1.0 - 2.0 * 0.011 - 2.0 * 0.002 - 2.0 * 0.03, abs=0.003)
    assert found.strongest.standing_wave_ratio == pytest.approx(1.0 / found.strongest.coefficient, rel=1e-9)
    tried = coupling_loop.coupled(poor, inside(wire, 0.03), 0.002, np.linspace(0.05, found.largest.diameter, 30))
    assert max(each.coefficient for each in tried) <= found.strongest.coefficient * 1.001


def test_where_the_smallest_is_too_much_it_says_so() -> None:
    wire, circuit = tuned_loop(1.0, 0.011, 14.2e6, 0.010)
    found = matching_size(Circuit(circuit.currents, circuit.frequency, 0.001, 50.0), inside(wire, 0.01), 0.006)
    assert found.matched is None
    assert found.smallest_overcouples
    assert found.strongest is not None
    assert found.strongest.coefficient > 1.0


def test_where_there_is_no_room_nothing_is_found() -> None:
    wire, circuit = tuned_loop(1.0, 0.011, 14.2e6, 0.010)
    found = matching_size(circuit, inside(wire, 0.45), 0.006)
    assert (found.matched, found.largest, found.strongest) == (None, None, None)


def test_the_smallest_of_two_that_match_is_taken() -> None:
    """A root is where kappa first passes 1 from below: nothing smaller is overcoupled."""
    wire, circuit = tuned_loop(1.0, 0.011, 7.1e6, 0.010)
    place = inside(wire, 0.03)
    matched = matching_size(circuit, place, 0.002).matched
    assert matched is not None
    smaller = coupling_loop.coupled(circuit, place, 0.002, np.linspace(0.041, 0.999 * matched.diameter, 40))
    assert max(each.coefficient for each in smaller) < 1.0


def test_numbers_that_cannot_be_are_refused() -> None:
    _, circuit = tuned_loop(1.0, 0.011, 14.2e6, 0.010)
    for frequency, resistance, line, words in (
        (0.0, 1.0, 50.0, "frequency is 0.0 Hz"),
        (1e6, -1.0, 50.0, "resistance is -1.0 ohm"),
        (1e6, 1.0, np.nan, "line is nan ohm"),
    ):
        with pytest.raises(ValueError, match=words):
            Circuit(circuit.currents, frequency, resistance, line)
    with pytest.raises(ValueError, match=r"the clearance is -0.1 m"):
        centred(MIDDLE, AXIS, -0.1)
    with pytest.raises(ValueError, match=r"the place lies 0\.040\d+ m from the conductor's axis"):
        matching_size(circuit, beside(np.array([-0.46, 0.0, 0.0]), np.array([1.0, 0.0, 0.0]), AXIS, 0.03), 0.002)
    with pytest.raises(ValueError, match="leads out of the tuned loop"):
        matching_size(circuit, beside(np.array([-0.5, 0.0, 0.0]), np.array([-1.0, 0.0, 0.0]), AXIS, 0.03), 0.002)
    with pytest.raises(ValueError, match="expected a direction"):
        beside(MIDDLE, MIDDLE, AXIS, 0.1)


# The full-wave solution of both loops


@dataclass(frozen=True, slots=True)
class Both:
    """The same two loops by both methods."""

    whole: TwoPort
    circuit: Circuit
    lumped: coupling_loop.Coupled

    @property
    def ratio(self) -> float:
        """Kappa by the full-wave solution over the lumped one."""
        return self.whole.coefficient(50.0) / self.lumped.coefficient


def both(size: float, share: float, clearance: float | None, bearing: float) -> Both:
    """A 1 m loop of 22 mm rod, so many wavelengths round, and one of 4 mm wire with its port at a bearing."""
    return of_diameter(size * c / pi, share, clearance, bearing)


@cache
def whole_metre() -> tuple[Wire, Potentials]:
    wire = ring(1.0, 0.011, 96)
    return wire, thin_wire.potentials(wire, 30e6)


def of_diameter(frequency: float, diameter: float, clearance: float | None, bearing: float) -> Both:
    wire, known = whole_metre()
    found = thin_wire.solve(wire, np.array([frequency]), (known,))
    internal = complex(conductor.rod_impedance(frequency, COPPER_TUBE, 0.011))
    resistance = float(found.resistance[0]) + internal.real * float(found.square.sum())
    circuit = Circuit(source(found), frequency, resistance, 50.0)
    place = centred(MIDDLE, AXIS) if clearance is None else inside(wire, clearance)
    (lumped,) = coupling_loop.coupled(circuit, place, 0.002, np.array([diameter]))
    small = ring(diameter, 0.002, 40, bearing, float(lumped.centre[0]))
    return Both(two_port(wire, small, frequency, (internal, 0.0), known), circuit, lumped)


def test_the_reference_is_each_loop_alone_when_they_are_far_apart() -> None:
    frequency = 14.2e6
    wire, small = ring(1.0, 0.011, 48), ring(0.2, 0.002, 32, 0.0, 300.0)
    found = two_port(wire, small, frequency)
    for impedance, each in ((found.first, wire), (found.second, small)):
        alone = solved(each, np.array([frequency]))
        assert impedance.imag == pytest.approx(float(alone.reactance[0]), rel=1e-9)
        assert impedance.real == pytest.approx(float(alone.resistance[0]), rel=1e-3)


def test_the_reference_does_not_care_which_loop_comes_first() -> None:
    wire, small = ring(1.0, 0.011, 48), ring(0.2, 0.002, 32, 2.0, -0.3)
    one, other = two_port(wire, small, 14.2e6), two_port(small, wire, 14.2e6)
    assert one.mutual == pytest.approx(other.mutual, rel=1e-9)
    assert one.first == pytest.approx(other.second, rel=1e-9)


def test_the_reference_of_slow_circles_is_maxwells() -> None:
    """Both far below a wavelength: omega times the closed form, 0.2 % for 48 and 40 sides."""
    found = two_port(ring(1.0, 0.002, 48), ring(0.3, 0.002, 40), 0.3e6)
    omega = 2.0 * pi * 0.3e6
    wanted = omega * float(inductance.coaxial_mutual_inductance(0.5, 0.15, 0.0))
    assert found.mutual.imag == pytest.approx(wanted, rel=2e-3)


def test_the_reference_finds_the_circle_of_best_tuning() -> None:
    """Its coefficient against a search over the series reactance."""
    whole = both(0.15, 0.25, 0.03, pi).whole

    def ratio(tuned: float) -> float:
        return float(standing_wave_ratio(whole.impedance(tuned - whole.first.imag), 50.0))

    grid = np.linspace(0.0, 40.0, 4001) * whole.first.real
    start = float(grid[int(np.argmin([ratio(x) for x in grid]))])
    best = minimize_scalar(ratio, bounds=(start - 1e-2, start + 1e-2), method="bounded", options={"xatol": 1e-9})
    assert float(best.fun) == pytest.approx(whole.coefficient(50.0), rel=1e-3)


CASES = [
    (size, share, clearance, bearing)
    for size in (0.05, 0.15, 0.3)
    for share in (0.1, 0.3)
    for clearance in (None, 0.1, 0.01)
    for bearing in (0.0, pi)
] + [
    (0.2, 0.5, None, pi),
    (0.2, 0.5, 0.1, pi),
    (0.1, 0.5, 0.01, pi),
    (0.1, 0.5, 0.01, 0.0),
    (0.15, 0.3, 0.03, 0.5 * pi),
]


@pytest.mark.parametrize(("size", "share", "clearance", "bearing"), CASES)
def test_kappa_is_between_its_ends(size: float, share: float, clearance: float | None, bearing: float) -> None:
    found = both(size, share, clearance, bearing)
    low, high = coupling.coefficient_ends(size, found.lumped.size)
    assert float(low) <= found.ratio <= float(high)


@pytest.mark.parametrize("bearing", [0.0, pi])
@pytest.mark.parametrize(
    "corners",
    [rectangle(pi / 3.0, pi / 6.0), rectangle(pi / 4.0, pi / 4.0), geometry.regular_corners(3, pi / 3.0**1.5)],
    ids=["rectangle", "square", "triangle"],
)
def test_kappa_of_a_polygon_is_between_its_ends(corners: Array, bearing: float) -> None:
    """As long round as a 1 m circle, 0.3 wavelengths, where the least is left of the ends."""
    wire, frequency = cut(geometry.cornered_turn(corners, 0), 0.011, 60), 0.3 * c / pi
    found = solved(wire, np.array([frequency]))
    circuit = Circuit(source(found), frequency, float(found.resistance[0]), 50.0)
    centre = np.append(corners.mean(axis=0), 0.0)
    (lumped,) = coupling_loop.coupled(circuit, centred(centre, AXIS), 0.002, np.array([0.33]))
    away = centre - opposite(wire)
    small = ring(0.33, 0.002, 40, float(np.arctan2(away[1], away[0])) + bearing)
    whole = two_port(wire, Wire(small.nodes + centre, small.turn, 0.002), frequency)
    low, high = coupling.coefficient_ends(0.3, lumped.size)
    assert float(low) <= whole.coefficient(50.0) / lumped.coefficient <= float(high)


def test_the_ends_of_kappa_are_not_too_wide() -> None:
    """Port next to the conductor, centred: more than half of what is left open is there."""
    for size, share in ((0.3, 0.3), (0.15, 0.3), (0.2, 0.5)):
        found = both(size, share, None, pi)
        high = float(coupling.coefficient_ends(size, found.lumped.size)[1])
        assert found.ratio - 1.0 > 0.45 * (high - 1.0)
    with pytest.raises(ValueError, match=r"tuned loop's perimeter in wavelengths 0.31"):
        coupling.coefficient_ends(0.31, 0.01)
    with pytest.raises(ValueError, match=r"coupling loop's circumference in wavelengths 0.11"):
        coupling.coefficient_ends(0.3, 0.11)


@pytest.mark.parametrize(("size", "share"), [(0.15, 0.2), (0.3, 0.3)])
def test_the_coupling_loops_own_reactance_is_a_little_more(size: float, share: float) -> None:
    found = both(size, share, 0.01, pi)
    assert 1.0 <= found.whole.second.imag / found.lumped.reactance < 1.0 + 6.5 * found.lumped.size**2 + 0.01


@pytest.mark.parametrize(
    ("clearance", "frequency"), [(None, 7.1e6), (None, 14.2e6), (0.1, 14.2e6), (0.03, 14.2e6), (0.03, 21.2e6)]
)
def test_the_matching_size_is_that_of_the_full_wave_solution(clearance: float | None, frequency: float) -> None:
    """Of a perfectly tuned loop; the lumped size is the larger, by up to a third of what kappa lacks."""
    lumped = of_diameter(frequency, 0.2, clearance, pi)
    place = centred(MIDDLE, AXIS) if clearance is None else inside(whole_metre()[0], clearance)
    found = matching_size(lumped.circuit, place, 0.002).matched
    assert found is not None

    def beyond(diameter: float) -> float:
        return float(np.log(of_diameter(frequency, diameter, clearance, pi).whole.coefficient(50.0)))

    wanted = float(brentq(beyond, 0.8 * found.diameter, 1.1 * found.diameter, rtol=1e-4))
    high = float(coupling.coefficient_ends(pi * frequency / c, found.size)[1])
    assert 0.0 < found.diameter / wanted - 1.0 < 0.5 * (high - 1.0)
