"""Shapes as wires: area, lengths, port, labels, positions, room, and properties of whatever is cut."""

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from windings import cut, perimeter_of

from magsafe.physics import geometry
from magsafe.physics.geometry import LINK, Turn

Array = NDArray[np.float64]

SQUARE = np.array([[0.5, 0.5], [-0.5, 0.5], [-0.5, -0.5], [0.5, -0.5]])
ROUND = geometry.round_turn(0.5)


def area_of(points: Array) -> float:
    """Enclosed area, seen along the third axis, positive against the clock."""
    x, y = points[:, 0], points[:, 1]
    return 0.5 * float((x * np.roll(y, -1) - y * np.roll(x, -1)).sum())


# --- turns ------------------------------------------------------------------------------------


@pytest.mark.parametrize("radius", [0.01, 0.5, 20.0])
def test_a_round_turn_has_the_circle_s_area(radius: float) -> None:
    turn = geometry.round_turn(radius)
    assert area_of(turn.points) == pytest.approx(np.pi * radius**2, rel=1e-12)
    assert perimeter_of(turn) == pytest.approx(2.0 * np.pi * radius, rel=1e-5)
    np.testing.assert_allclose(np.hypot(*turn.points.T), radius, rtol=1e-5)
    np.testing.assert_allclose(turn.points[0], [np.hypot(*turn.points[0]), 0.0], atol=1e-15)
    assert not turn.corner.any()


@pytest.mark.parametrize("sides", [3, 4, 5, 8, 24])
def test_regular_corners(sides: int) -> None:
    """Equal sides, the middle of the first on the first axis: against the clock."""
    corners = geometry.regular_corners(sides, 0.7)
    following = np.roll(corners, -1, axis=0)
    np.testing.assert_allclose(np.hypot(*corners.T), 0.7, rtol=1e-12)
    np.testing.assert_allclose(np.linalg.norm(following - corners, axis=1), 1.4 * np.sin(np.pi / sides), rtol=1e-12)
    np.testing.assert_allclose(0.5 * (corners[0] + corners[1]), [0.7 * np.cos(np.pi / sides), 0.0], atol=1e-12)
    assert area_of(corners) == pytest.approx(0.5 * sides * 0.49 * np.sin(2.0 * np.pi / sides), rel=1e-12)


@pytest.mark.parametrize("backwards", [False, True])
@pytest.mark.parametrize("side", range(4))
def test_a_cornered_turn_begins_in_the_middle_of_the_port_s_side(side: int, backwards: bool) -> None:
    """Whichever way the corners are told, the turn runs against the clock through all of them."""
    corners = np.array([[0.0, 0.0], [2.0, 0.0], [2.5, 1.0], [0.0, 1.5]])
    if backwards:
        corners = corners[::-1]
    turn = geometry.cornered_turn(corners, side)
    np.testing.assert_allclose(turn.points[0], 0.5 * (corners[side] + corners[(side + 1) % 4]))
    assert area_of(turn.points) == pytest.approx(abs(area_of(corners)), rel=1e-12)
    assert {tuple(point) for point in turn.points[1:]} == {tuple(corner) for corner in corners}
    assert turn.corner.tolist() == [False, True, True, True, True]


def test_turned_by_a_right_angle() -> None:
    """The port of a round turn goes from the first axis to the second: against the clock."""
    turn = geometry.turned(ROUND, 0.5 * np.pi)
    np.testing.assert_allclose(turn.points[0], [0.0, np.hypot(*ROUND.points[0])], atol=1e-15)
    assert area_of(turn.points) == pytest.approx(area_of(ROUND.points), rel=1e-12)
    np.testing.assert_array_equal(turn.corner, ROUND.corner)
    there_and_back = geometry.turned(geometry.turned(ROUND, 0.7), -0.7)
    np.testing.assert_allclose(there_and_back.points, ROUND.points, atol=1e-15)


@pytest.mark.parametrize("sides", [3, 4, 7])
def test_set_inwards_by_the_same_distance_everywhere(sides: int) -> None:
    """A polygon set inwards by d keeps its shape, its apothem less by d: plane geometry."""
    turn = geometry.cornered_turn(geometry.regular_corners(sides, 1.0), 0)
    inner = turn.points + 0.1 * turn.inward
    share = 1.0 - 0.1 / np.cos(np.pi / sides)
    np.testing.assert_allclose(inner, share * turn.points, atol=1e-12)


# --- one turn, cut ----------------------------------------------------------------------------


@pytest.mark.parametrize("per_turn", [8, 16, 24, 48, 120])
def test_a_round_wire_keeps_the_circle_s_area(per_turn: int) -> None:
    """However few segments: without it an inscribed polygon of 16 sides radiates 5 % too little."""
    wire = cut(ROUND, per_turn=per_turn)
    assert area_of(wire.nodes) == pytest.approx(np.pi * 0.25, rel=1e-12)


@pytest.mark.parametrize("radius", [0.05e-3, 3e-3, 11e-3])
@pytest.mark.parametrize("turn", [ROUND, geometry.cornered_turn(SQUARE, 2)], ids=["circle", "square"])
def test_the_port_is_the_first_segment(turn: Turn, radius: float) -> None:
    """As wide as asked, its middle where the turn begins; on a circle equal area widens it by less than 0.3 %."""
    wire = cut(turn, radius)
    gap = max(4.0 * radius, 0.01 * perimeter_of(turn))
    assert wire.length[0] == pytest.approx(gap, rel=3e-3 if turn is ROUND else 1e-12)
    middle = 0.5 * (wire.nodes[0] + wire.ends[0])
    np.testing.assert_allclose(middle[:2], turn.points[0], atol=2e-3 if turn is ROUND else 1e-12)
    assert middle[2] == 0.0


@pytest.mark.parametrize("turn", [ROUND, geometry.cornered_turn(SQUARE, 0)], ids=["circle", "square"])
def test_segments_grow_from_the_port(turn: Turn) -> None:
    """None longer than asked, none next to another of three times its length, the longest reached."""
    wire = cut(turn, 1e-3)
    longest = perimeter_of(turn) / 48
    assert wire.length.max() <= 1.002 * longest  # equal area
    assert wire.length.max() > 0.9 * longest
    ratio = wire.length / np.roll(wire.length, 1)
    assert ratio.max() < 1.7
    assert ratio.min() > 1.0 / 1.7
    assert wire.length[1] < 0.6 * wire.length.max()


def test_every_corner_is_a_node() -> None:
    for corners in (SQUARE, geometry.regular_corners(3, 0.4), geometry.regular_corners(24, 0.5)):
        wire = cut(geometry.cornered_turn(corners, 0))
        for corner in corners:
            assert np.linalg.norm(wire.nodes[:, :2] - corner, axis=1).min() < 1e-12
        assert wire.length.sum() == pytest.approx(perimeter_of(geometry.cornered_turn(corners, 0)), rel=1e-12)


def test_a_corner_within_two_radii_of_the_one_before_is_left_out() -> None:
    """A chamfer of 15 mm on conductors of 6 and of 20 mm diameter."""
    corners = np.array([[0.5, 0.5], [-0.5, 0.5], [-0.5, -0.5], [0.489, -0.5], [0.5, -0.489]])
    side = float(np.hypot(0.011, 0.011))
    for radius, kept in ((0.4 * side, True), (0.6 * side, False)):
        wire = cut(geometry.cornered_turn(corners, 0), radius)
        apart = [float(np.linalg.norm(wire.nodes[:, :2] - corner, axis=1).min()) for corner in corners]
        assert sum(distance < 1e-12 for distance in apart) == (5 if kept else 4)


def test_a_port_keeps_within_its_side() -> None:
    """A port on a side of 15 mm, itself 40 mm wide; of a winding, wider than the link it lies in."""
    corners = np.array([[0.5, 0.5], [-0.5, 0.5], [-0.5, -0.5], [0.49, -0.5], [0.5, -0.49]])
    with pytest.raises(ValueError, match="round the next corner"):
        geometry.cut(geometry.wind(geometry.cornered_turn(corners, 3)), 3e-3, 0.05, 0.04)
    with pytest.raises(ValueError, match="round the next corner"):
        geometry.cut(geometry.wind(ROUND, 2, 0.02), 3e-3, 0.05, 0.04)


def test_upright_and_flat() -> None:
    """The plane of the turns: y and z with the axis along x, or x and y with it along z. Neither mirrors."""
    wire = cut(ROUND, turns=3, spacing=0.05)
    upright, flat = geometry.upright(wire, 2.0), geometry.flat(wire, 3.0)
    np.testing.assert_allclose(upright.nodes.T, [wire.nodes[:, 2], wire.nodes[:, 0], wire.nodes[:, 1] + 2.0])
    np.testing.assert_allclose(flat.nodes, wire.nodes + np.array([0.0, 0.0, 3.0]))
    for moved in (upright, flat):
        np.testing.assert_array_equal(moved.turn, wire.turn)
        assert moved.radius == wire.radius
        np.testing.assert_allclose(moved.length, wire.length, rtol=1e-9)
    triples = [np.linalg.det(each.direction[[1, 9, 23]]) for each in (wire, upright, flat)]
    assert abs(triples[0]) > 1e-3
    np.testing.assert_allclose(triples, triples[0], rtol=1e-6)


def test_a_wire_is_closed() -> None:
    wire = cut(ROUND, turns=2, spacing=0.05)
    np.testing.assert_array_equal(wire.ends[:-1], wire.nodes[1:])
    np.testing.assert_array_equal(wire.ends[-1], wire.nodes[0])
    np.testing.assert_allclose(wire.nodes + wire.length[:, None] * wire.direction, wire.ends, atol=1e-12)
    np.testing.assert_allclose((wire.length[:, None] * wire.direction).sum(axis=0), 0.0, atol=1e-12)


# --- windings ---------------------------------------------------------------------------------


@pytest.mark.parametrize("turns", [2, 3, 8])
@pytest.mark.parametrize("turn", [ROUND, geometry.cornered_turn(SQUARE, 0)], ids=["circle", "square"])
def test_a_helix(turn: Turn, turns: int) -> None:
    """Turn i of n at (i - (n - 1)/2) spacings on the average, half a spacing to either side; n times the area.

    The link with the port runs one spacing outside, straight along the axis.
    """
    spacing = 0.05
    wire = cut(turn, turns=turns, spacing=spacing)
    middle = 0.5 * (wire.nodes + wire.ends)
    for number in range(turns):
        own = wire.turn == number
        place = float(wire.length[own] @ middle[own, 2] / wire.length[own].sum())
        assert place == pytest.approx((number - 0.5 * (turns - 1)) * spacing, abs=0.02 * spacing)
        assert np.ptp(middle[own, 2]) <= spacing
        whole = float(np.hypot(perimeter_of(turn), spacing))  # but for a segment across the end of a turn
        assert wire.length[own].sum() == pytest.approx(whole, abs=1.05 * wire.length.max())
    link = wire.turn == LINK
    assert link.sum() + sum(int((wire.turn == number).sum()) for number in range(turns)) == len(wire.turn)
    assert wire.length[link].sum() == pytest.approx((turns + 2) * spacing, rel=0.02)
    assert bool(link[0])
    np.testing.assert_allclose(middle[0], [*(1.0 + spacing / 0.5) * turn.points[0], 0.0], atol=2e-3)
    assert area_of(wire.nodes) == pytest.approx(turns * area_of(turn.points), rel=2e-3)


@pytest.mark.parametrize("turns", [2, 3, 5])
@pytest.mark.parametrize("turn", [ROUND, geometry.cornered_turn(SQUARE, 0)], ids=["circle", "square"])
def test_a_spiral(turn: Turn, turns: int) -> None:
    """Turn i of n is (i - 1/2 to i + 1/2) spacings inside the outermost, in one plane, the link beside it."""
    spacing = 0.05
    wire = cut(turn, turns=turns, spacing=spacing, nested=True)
    middle = 0.5 * (wire.nodes + wire.ends)
    np.testing.assert_allclose(wire.nodes[wire.turn >= 0][1:-1, 2], 0.0, atol=1e-12)
    for number in range(turns):
        own = wire.turn == number
        across = float(np.abs(middle[own, 0] if turn is not ROUND else np.hypot(*middle[own, :2].T)).max())
        assert across == pytest.approx(0.5 - (number - 0.5) * spacing, abs=0.4 * spacing)
        sides = 2.0 * np.pi if turn is ROUND else 8.0
        whole = sides * (0.5 - number * spacing)
        assert wire.length[own].sum() == pytest.approx(whole, abs=1.05 * wire.length.max())
    link = wire.turn == LINK
    assert bool(link[0])
    assert middle[0, 2] == pytest.approx(spacing, rel=1e-9)
    assert wire.length[link].sum() == pytest.approx((turns + 2) * spacing, rel=0.02)


def test_turns_keep_their_distance() -> None:
    """Axes of neighbouring turns of a helix and of a spiral nowhere nearer than nine tenths of the spacing."""
    for nested in (False, True):
        for turn in (ROUND, geometry.cornered_turn(SQUARE, 0)):
            wire = cut(turn, turns=3, spacing=0.05, nested=nested)
            place = np.linspace(0.0, 1.0, 9)[:, None]
            along = wire.nodes[:, None] + place * (wire.ends - wire.nodes)[:, None]
            for first, second in pairwise(range(3)):
                here, there = along[wire.turn == first], along[wire.turn == second]
                gaps = np.linalg.norm(here.reshape(-1, 1, 3) - there.reshape(1, -1, 3), axis=2)
                ends = gaps.min(axis=1).reshape(len(here), -1)[2:-4]  # where one turn goes over into the next
                assert ends.min() > 0.9 * 0.05


@pytest.mark.parametrize("turn", [ROUND, geometry.cornered_turn(SQUARE, 0)], ids=["circle", "square"])
def test_nested_turns_need_room(turn: Turn) -> None:
    """The centre is 0.5 m in: five turns at 110 mm end 495 mm in, at 112 mm they would cross it."""
    geometry.wind(turn, 5, 0.11, nested=True)
    with pytest.raises(ValueError, match=r"^no room for turns 0\.504 m inside the outermost one$"):
        geometry.wind(turn, 5, 0.112, nested=True)


def test_nested_turns_need_room_in_the_narrow_direction() -> None:
    narrow = geometry.cornered_turn(np.array([[1.0, 0.1], [-1.0, 0.1], [-1.0, -0.1], [1.0, -0.1]]), 0)
    geometry.wind(narrow, 2, 0.06, nested=True)
    with pytest.raises(ValueError, match="no room"):
        geometry.wind(narrow, 2, 0.07, nested=True)


def test_one_turn_is_flat_and_needs_no_spacing() -> None:
    for nested in (False, True):
        path = geometry.wind(ROUND, 1, 123.0, nested)
        np.testing.assert_array_equal(path.points[:, :2], ROUND.points)
        assert not path.points[:, 2].any()
        assert not path.turn.any()


# --- whatever is cut --------------------------------------------------------------------------


@st.composite
def outlines(draw: st.DrawFn) -> Array:
    """Corners of a convex outline of up to nine sides, told in either sense, somewhere about 1 m wide."""
    count = draw(st.integers(3, 9))
    steps = np.array(draw(st.lists(st.floats(0.5, 1.5), min_size=count, max_size=count)))
    angle = 2.0 * np.pi * np.cumsum(steps) / steps.sum()
    squeeze = draw(st.floats(0.2, 1.0))
    corners = np.stack([0.5 * np.cos(angle), 0.5 * squeeze * np.sin(angle)], axis=1)
    return corners[::-1] if draw(st.booleans()) else corners


@settings(max_examples=60, deadline=None)
@given(outlines(), st.integers(0, 8), st.floats(-5.0, -2.4), st.sampled_from([24, 48, 96]), st.integers(1, 4))
def test_any_outline(corners: Array, side: int, fineness: float, per_turn: int, turns: int) -> None:
    """A closed chain of segments of two radii or more, none longer than asked, that keeps length and area."""
    radius = 10.0**fineness
    turn = geometry.cornered_turn(corners, side % len(corners))
    spacing = 8.0 * radius
    wire = cut(turn, radius, per_turn, turns, spacing)
    assert len(wire.turn) == len(wire.nodes)
    assert wire.length.min() >= 2.0 * radius * (1.0 - 1e-9)
    pitch = spacing / per_turn if turns > 1 else 0.0
    assert wire.length.max() <= max(np.hypot(perimeter_of(turn) / per_turn, pitch), 4.0 * radius) * (1.0 + 1e-9)
    area = turns * area_of(turn.points)
    assert area_of(wire.nodes) == pytest.approx(area, rel=0.01 + 20.0 * radius * turns / perimeter_of(turn))
    whole = turns * np.hypot(perimeter_of(turn), spacing if turns > 1 else 0.0)
    whole += (turns + 2) * spacing if turns > 1 else 0.0
    # A corner left out saves two radii at most.
    left_out = 2.0 * radius * (turns * len(corners) + 4)
    assert whole - left_out <= wire.length.sum() <= whole * (1.0 + 1e-9)
    expected = {0} if turns == 1 else {LINK, *range(turns)}
    assert set(wire.turn.tolist()) == expected
    numbered = wire.turn[wire.turn >= 0]
    assert (np.diff(numbered) >= 0).all()


@settings(max_examples=40, deadline=None)
@given(st.floats(-2.0, 1.5), st.floats(-4.0, -1.3), st.sampled_from([20, 24, 48, 96]))
def test_any_ring(size: float, thickness: float, per_turn: int) -> None:
    """Equal area, twice the radius at least, none much longer than asked, symmetric about its port."""
    radius = 10.0**size
    conductor = radius * 10.0**thickness
    per_turn = min(per_turn, int(2.0 * np.pi * radius / (2.5 * conductor)))
    wire = cut(geometry.round_turn(radius), conductor, per_turn)
    assert area_of(wire.nodes) == pytest.approx(np.pi * radius**2, rel=1e-9)
    assert wire.length.min() >= 2.0 * conductor
    assert wire.length[1:].max() <= 1.01 * 2.0 * np.pi * radius / per_turn
    mirrored = np.roll(wire.nodes[::-1], 2, axis=0) * np.array([1.0, -1.0, 1.0])
    np.testing.assert_allclose(mirrored, wire.nodes, atol=1e-4 * radius)
    assert not wire.turn.any()
