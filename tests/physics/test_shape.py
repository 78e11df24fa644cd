"""Lengths of a loop's outline: plane geometry (any textbook), and how far its wire goes."""

from math import pi, sqrt
from typing import Any

import numpy as np
import pytest
from designs import plain_design

from magsafe.analysis.wires import positions, shape_of, wire_of
from magsafe.design.model import Design
from magsafe.design.shape import Outline, drop, outline, room_inside
from magsafe.physics.geometry import Wire


def line(**keys: Any) -> Outline:
    conductor = {"form": "rod", "outer_diameter": "10 mm", "conductivity": "58 MS/m"}
    return outline(plain_design(loop={**keys, "conductor": conductor}).loop)


def test_a_circle_by_its_diameter_or_its_perimeter() -> None:
    by_diameter, by_perimeter = line(shape="circle", diameter="2 m"), line(shape="circle", perimeter=f"{2 * pi:.12f} m")
    for found in (by_diameter, by_perimeter):
        assert found.perimeter == pytest.approx(2.0 * pi)
        assert found.area == pytest.approx(pi)
        assert found.reach == pytest.approx(1.0)
        assert found.half_height == pytest.approx(1.0)
        assert found.mean_radius == pytest.approx(1.0)


@pytest.mark.parametrize(
    ("sides", "across", "area", "reach"),
    # regular polygons of side 1 m: distance of opposite sides, or twice that from centre to side
    [
        (3, 1.0 / sqrt(3.0), sqrt(3.0) / 4.0, 1.0 / sqrt(3.0)),
        (4, 1.0, 1.0, sqrt(0.5)),
        (6, sqrt(3.0), 1.5 * sqrt(3.0), 1.0),
        (8, 1.0 + sqrt(2.0), 2.0 * (1.0 + sqrt(2.0)), sqrt(1.0 + sqrt(0.5))),
    ],
)
def test_a_polygon_by_its_side_its_perimeter_or_across_its_flats(
    sides: int, across: float, area: float, reach: float
) -> None:
    stated = ({"side": "1 m"}, {"perimeter": f"{sides} m"}, {"across_flats": f"{across:.12f} m"})
    for size in stated:
        found = line(shape="polygon", sides=sides, **size)
        assert found.perimeter == pytest.approx(sides)
        assert found.area == pytest.approx(area)
        assert found.reach == pytest.approx(reach)
        assert found.half_height == pytest.approx(reach)


def test_a_rectangle_and_the_same_as_an_outline() -> None:
    corners = [["0 m", "0 m"], ["3 m", "0 m"], ["3 m", "1.6 m"], ["0 m", "1.6 m"]]
    for found in (line(shape="rectangle", width="3 m", height="1.6 m"), line(shape="outline", points=corners)):
        assert found.perimeter == pytest.approx(9.2)
        assert found.area == pytest.approx(4.8)
        assert found.reach == pytest.approx(1.7)
        assert found.half_height == pytest.approx(0.8)


RODS = {"form": "rod", "outer_diameter": "4 mm", "conductivity": "58 MS/m"}
PLAIN: dict[str, dict[str, Any]] = {
    "circle": {"shape": "circle", "diameter": "1 m"},
    "hexagon": {"shape": "polygon", "sides": 6, "across_flats": "1 m"},
    "triangle": {"shape": "polygon", "sides": 3, "side": "1.5 m"},
    "wide": {"shape": "rectangle", "width": "1.6 m", "height": "0.9 m"},
    "tall": {"shape": "rectangle", "width": "0.9 m", "height": "1.6 m"},
}
KITE = [["0 m", "0 m"], ["1.6 m", "0.9 m"], ["1.8 m", "1.3 m"], ["0.7 m", "1.2 m"]]  # most of its corners lie high
WOUND: list[dict[str, Any]] = [
    {},
    {"turns": 2, "turn_spacing": "50 mm"},
    {"turns": 4, "turn_spacing": "50 mm"},
    {"turns": 3, "turn_spacing": "40 mm", "turn_arrangement": "nested"},
]


def wires(plane: str, **keys: Any) -> tuple[Design, list[Wire]]:
    """The wire of a loop at every place of its capacitor, its centre in the origin."""
    design = plain_design(loop={**keys, "conductor": RODS, "plane": plane}, transmission__0__frequency="3.6 MHz")
    return design, [wire_of(shape_of(design.loop, 3.6e6, place)) for place in positions(design)]


@pytest.mark.parametrize("plane", ["vertical", "horizontal"])
@pytest.mark.parametrize("winding", WOUND, ids=["one", "two", "four", "nested"])
@pytest.mark.parametrize("shape", PLAIN)
def test_a_loop_drops_as_far_as_its_wire_does(shape: str, winding: dict[str, Any], plane: str) -> None:
    """Too little and it would lie in the ground unseen; a polygon is taken as standing on a corner, which is more."""
    design, made = wires(plane, **PLAIN[shape], **winding)
    lowest = -min(float(wire.nodes[:, 2].min()) for wire in made)
    found = drop(design.loop)
    # The corners of the polygon that has a circle's area lie outside it, by 0.6 % with 24 of them.
    assert found >= lowest * (0.994 if shape == "circle" else 1.0) - 1e-6
    slack = 0.25 if plane == "vertical" and shape in ("triangle", "hexagon") else 0.02
    assert found <= lowest * (1.0 + slack) + 0.011


def test_a_free_outline_hangs_by_the_middle_of_its_box() -> None:
    """Not by the mean of its corners, of which most lie high here."""
    design, made = wires("vertical", shape="outline", points=KITE)
    for wire in made:
        assert drop(design.loop) == pytest.approx(0.65)
        assert float(wire.nodes[:, 2].min()) == pytest.approx(-0.65, abs=1e-9)
        assert float(wire.nodes[:, 2].max()) == pytest.approx(0.65, abs=1e-9)


@pytest.mark.parametrize("turns", [1, 2, 3, 5])
@pytest.mark.parametrize("shape", PLAIN)
def test_the_room_inside_a_spiral_is_what_its_innermost_turn_leaves(shape: str, turns: int) -> None:
    """From the centre to the wire in its plane: never more than is there, and less by one spacing at most."""
    winding = {"turns": turns, "turn_spacing": "40 mm", "turn_arrangement": "nested"} if turns > 1 else {}
    design, made = wires("horizontal", **PLAIN[shape], **winding)
    share = np.linspace(0.0, 1.0, 40)[:, None, None]
    nearest = min(
        float(np.linalg.norm(((1.0 - share) * wire.nodes + share * wire.ends)[..., :2], axis=2).min()) for wire in made
    )
    found = room_inside(design.loop)
    assert found is not None
    assert nearest - 0.041 <= found <= nearest + 2e-3


def test_a_free_outline_tells_no_room() -> None:
    points = [["0 m", "0 m"], ["1 m", "0 m"], ["1 m", "1 m"], ["0 m", "1 m"]]
    assert room_inside(wires("vertical", shape="outline", points=points)[0].loop) is None


def test_an_outline_reaches_as_far_up_as_down_from_its_middle() -> None:
    points = [["0 m", "0 m"], ["3 m", "0.4 m"], ["1 m", "1 m"]]
    found = line(shape="outline", points=points)
    assert found.half_height == pytest.approx(0.5)
    assert found.reach == pytest.approx(np.hypot(1.5, 0.5))
