"""Windings and free outlines: no mirror, no handedness, conductors that come near themselves, crowding at its ends."""

from math import pi
from typing import Any

import numpy as np
import pytest
from designs import plain_design

import magsafe
from magsafe.analysis.field_source import FAR, NEAR, field_source
from magsafe.analysis.flow import turn_factors
from magsafe.analysis.operating_point import operating_point
from magsafe.analysis.wires import extent, shape_of, wire_of
from magsafe.physics.proximity import row_proximity

COIL: dict[str, Any] = {
    "loop__turns": 4,
    "loop__turn_spacing": "300 mm",
    "capacitor__position": "side",
    "site__ground": "perfect",
    "loop__centre_height": "2.5 m",
    "transmission__0__frequency": "3.6 MHz",
    "transmission__0__power": "1500 W",
}
CORNERS = [["0 m", "0 m"], ["3 m", "0 m"], ["3 m", "1 m"], ["1 m", "1 m"], ["1 m", "1.2 m"], ["0 m", "1.2 m"]]
RODS = {"form": "rod", "outer_diameter": "22 mm", "conductivity": "58 MS/m"}
OUTLINE: dict[str, Any] = {
    "loop": {"shape": "outline", "points": CORNERS, "conductor": RODS},
    "capacitor__position": "top",
    "transmission__0__frequency": "7.1 MHz",
    "transmission__0__power": "1500 W",
}


@pytest.mark.parametrize("changes", [COIL, {**COIL, "loop__plane": "horizontal", "capacitor__position": None}, OUTLINE])
def test_no_bearing_reaches_further_than_the_keep_out_says(changes: dict[str, Any]) -> None:
    """Every bearing is tried here, at heights of people and of the loop: neither shape mirrors itself."""
    design = plain_design(site__rules=["us-fcc"], **changes)
    keepout = magsafe.check(design).operating_points[0].exposure[1].keepout
    assert keepout is not None
    assert keepout.any_direction is not None
    distance = keepout.any_direction.distance
    assert distance is not None
    source = field_source(design, operating_point(design, design.transmission[0]), FAR)
    bearings = np.linspace(0.0, 2.0 * pi, 72, endpoint=False)
    up = np.linspace(-1.0, 1.0, 13)
    level = np.sqrt(1.0 - up**2)
    unit = np.stack(
        [
            np.outer(np.cos(bearings), level).ravel(),
            np.outer(np.sin(bearings), level).ravel(),
            np.tile(up, len(bearings)),
        ],
        axis=1,
    )
    points = unit * (distance + 0.02) + np.array([0.0, 0.0, source.height])
    if source.grounded:
        points = points[points[:, 2] >= 0.0]
    found = source.strongest(points)
    megahertz = design.transmission[0].frequency / 1e6
    electric, magnetic = 824.0 / megahertz, 2.19 / megahertz  # 47 CFR 1.1310, general population, as the rule file
    share = 1500.0 * np.maximum(found.electric / electric**2, found.magnetic / magnetic**2)
    assert float(share.max()) <= 10.0 ** (-2.0 / 10.0) * 1.001


def test_a_winding_is_judged_wound_either_way() -> None:
    source = field_source(*_at(**{**COIL, "capacitor__position": "top"}), NEAR)
    places = np.array([[3.0, 2.0, 1.0], [-3.0, 2.0, 1.0]])
    found = source.strongest(places)
    assert found.magnetic[0] == pytest.approx(found.magnetic[1], rel=1e-9)
    assert found.electric[0] == pytest.approx(found.electric[1], rel=1e-9)


def _at(**changes: Any) -> tuple[Any, Any]:
    design = plain_design(**changes)
    return design, operating_point(design, design.transmission[0])


@pytest.mark.parametrize(
    "points",
    [
        # a spike whose tip lies 5 mm from the axis opposite; a wedge of two degrees
        [["0 m", "0 m"], ["1 m", "0 m"], ["1 m", "0.4 m"], ["0.005 m", "0.5 m"], ["1 m", "0.6 m"], ["1 m", "1 m"],
         ["0 m", "1 m"]],
        [["0 m", "0 m"], ["3 m", "0 m"], ["3 m", "0.1 m"]],
    ],
)  # fmt: skip
def test_a_conductor_that_comes_near_itself_is_unproven(points: list[list[str]]) -> None:
    design = plain_design(loop={"shape": "outline", "points": points, "conductor": RODS})
    found = operating_point(design, design.transmission[0]).out_of_range
    assert any("of its diameters of itself" in reason for reason in found)


def test_nested_turns_may_not_cross_in_a_neck() -> None:
    """A dumbbell with a neck of 0.1 m, three turns 60 mm apart."""
    bell = [(0, 0), (1, 0), (1, 0.45), (2, 0.45), (2, 0), (3, 0), (3, 1), (2, 1), (2, 0.55), (1, 0.55), (1, 1), (0, 1)]
    points = [[f"{x} m", f"{y} m"] for x, y in bell]
    winding = {"turns": 3, "turn_spacing": "60 mm", "turn_arrangement": "nested"}
    conductor = {**RODS, "outer_diameter": "6 mm"}
    design = plain_design(
        loop={"shape": "outline", "points": points, "conductor": conductor, **winding},
        transmission__0__frequency="1.85 MHz",
    )
    assert operating_point(design, design.transmission[0]).out_of_range


def test_the_reach_holds_every_node_of_a_pointed_winding() -> None:
    points = [["0 m", "0 m"], ["6 m", "0 m"], ["0 m", "1 m"]]
    winding = {"turns": 2, "turn_spacing": "100 mm", "turn_arrangement": "nested"}
    conductor = {**RODS, "outer_diameter": "6 mm"}
    design = plain_design(
        loop={"shape": "outline", "points": points, "conductor": conductor, **winding}, capacitor__position="bottom"
    )
    nodes = wire_of(shape_of(design.loop, 7.1e6, "bottom")).nodes
    assert extent(design) >= float(np.linalg.norm(nodes, axis=1).max()) > 3.3


def test_thick_skin_crowds_less_at_the_low_end() -> None:
    """Radius over skin depth 0.8: crowding is 2 or 3 % (exact cylinder in a cross field), none is credited."""
    thin = {"form": "rod", "outer_diameter": "1 mm", "conductivity": "1.39 MS/m"}
    design = plain_design(loop__turns=8, loop__turn_spacing="1.3 mm", loop__conductor=thin)
    low, likely, high = turn_factors(design, 0.475e6)
    assert low.tolist() == [1.0] * 9
    assert float(likely[:8].mean()) > 2.0
    assert (high >= likely).all()
    copper = plain_design(loop__turns=8, loop__turn_spacing="13 mm", loop__conductor__outer_diameter="10 mm")
    row = row_proximity(8, 0.013, 0.010).loss_factor
    low, likely, _ = turn_factors(copper, 7.1e6)
    np.testing.assert_allclose(likely[:8], row)
    np.testing.assert_allclose(low[:8] - 1.0, 0.8 * (row - 1.0), rtol=0.02)
    assert low[8] == likely[8] == 1.0  # the link lies alone


def test_inner_turns_of_a_spiral_lie_in_the_field_of_all() -> None:
    """Nested rings with a thin skin (computed): 1.5 times a row's loss for eight at 1.14 diameters; a pair as one."""
    nested: dict[str, Any] = {"loop__turn_arrangement": "nested", "loop__conductor__outer_diameter": "10 mm"}
    eight = plain_design(loop__turns=8, loop__turn_spacing="11.4 mm", **nested)
    low, likely, high = (float(each[:8].mean()) for each in turn_factors(eight, 30e6))
    row = float(row_proximity(8, 0.0114, 0.010).loss_factor.mean())
    assert low < row < 1.2 * row < likely < 1.5 * row < high
    pair = plain_design(loop__turns=2, loop__turn_spacing="11.4 mm", **nested)
    np.testing.assert_allclose(turn_factors(pair, 30e6)[1][:2], row_proximity(2, 0.0114, 0.010).loss_factor)


def test_a_small_loop_without_a_capacitor_is_no_full_wave_loop() -> None:
    """At 100 W a metre of loop carries kilovolts at its open port, whatever is joined there."""
    design, point = _at(capacitor={"kind": "none"}, feed={"coupling": "direct"})
    sheet = magsafe.check(design)
    size = next(f for f in sheet.operating_points[0].findings if f.id == "loop.size")
    assert size.verdict == "unproven"
    assert sheet.verdict == "unproven"
    volts = point.figures.terminal_peak_voltage.spread.likely
    assert volts == pytest.approx(8e3, rel=0.05)
    assert "kV peak at 100 W" in sheet.cautions[0]
