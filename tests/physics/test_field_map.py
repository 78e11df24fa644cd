"""Contours of a map against the definition of the keep-out, evaluated by bisection, and against its table."""

from math import ceil
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from designs import plain_design

import magsafe
from magsafe.analysis import keepout
from magsafe.analysis.exposure import bases, use_of
from magsafe.analysis.field_map import FieldMap, Grid, Layer, field_map, layers_of
from magsafe.analysis.field_source import FAR, FieldSource, field_source
from magsafe.analysis.keepout import Distances, keep_out, reach_weight, shells
from magsafe.analysis.operating_point import operating_point
from magsafe.design.model import Design
from magsafe.rules.limit import load_rule

SAMPLE = Path(__file__).parents[2] / "sample_designs" / "breakwater_mast.toml"
SITE = {"ground": "average", "rules": ["us-fcc", "icnirp-2020"]}
CASES: dict[str, dict[str, Any]] = {
    "upright": {"loop__centre_height": "2 m", "site": SITE, "capacitor__position": "top"},
    "side": {"loop__centre_height": "2 m", "site": SITE, "capacitor__position": "side"},
    "flat": {"loop__centre_height": "3 m", "site": SITE, "loop__plane": "horizontal"},
    "free space": {"site": {"ground": "none", "rules": ["us-fcc"]}, "capacitor__position": "bottom"},
    "rotating": {"loop__centre_height": "3 m", "site": SITE, "capacitor__position": "top", "loop__rotates": True},
    "two turns": {
        "loop__centre_height": "3 m", "site": SITE, "capacitor__position": "bottom", "loop__turns": 2,
        "loop__turn_spacing": "150 mm", "transmission__0__frequency": "3.6 MHz",
    },
    "flat spiral": {
        "loop__centre_height": "3 m", "site": SITE, "loop__plane": "horizontal", "loop__turns": 2,
        "loop__turn_spacing": "80 mm", "loop__turn_arrangement": "nested", "transmission__0__frequency": "3.6 MHz",
    },
    "big": {
        "loop__centre_height": "4 m", "site": SITE, "capacitor__position": "bottom", "loop__diameter": "3 m",
        "transmission__0__frequency": "3.65 MHz", "transmission__0__power": "400 W",
    },
}  # fmt: skip


def made_of(design: Design) -> tuple[FieldMap, FieldSource]:
    point = operating_point(design, design.transmission[0])
    return field_map(design, point, 0.0), field_source(design, point, FAR)


def table_of(design: Design, source: FieldSource, layer: Layer) -> Distances:
    """The table's distances, as the checks ask for them."""
    point = source.point
    own, use = bases(load_rule(layer.rule), layer.who, point.transmission.frequency), use_of(point.transmission)
    at_loop, margin = (point.power_at_loop.high or 0.0) / point.power, design.margins.exposure_ratio
    around = shells(source, reach_weight(own, use, at_loop, margin, source.bare_factor))
    return keep_out(around, own, use, at_loop, margin, design.loop.plane == "vertical")


def crossing(grid: Grid, layer: Layer, degrees: float) -> float:
    """How far out the drawn lines are at an angle, the touch distance where there is none."""
    reached = [float(grid.distances[0])]
    for line in grid.lines([layer]):
        away = np.hypot(line[:, 0] - grid.centre[0], line[:, 1] - grid.centre[1])
        turn = np.degrees(np.arctan2(line[:, 1] - grid.centre[1], line[:, 0] - grid.centre[0]))
        near = np.abs((turn - degrees + 180.0) % 360.0 - 180.0) < 1e-6
        reached += [float(each) for each in away[near]]
    return max(reached)


@pytest.mark.parametrize("name", CASES)
def test_contours_are_at_the_tables_distances(name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    """To 1 %, the table's own rounding to 0.1 m taken away."""
    monkeypatch.setattr(keepout, "round_up", float)
    design = plain_design(**CASES[name])
    made, source = made_of(design)
    vertical, turns = design.loop.plane == "vertical", design.loop.rotates
    assert made.layers
    for layer in made.layers:
        table = table_of(design, source, layer)
        first = table.along_axis if vertical else table.in_plane
        second = table.in_plane if vertical else table.across
        for distance, angles in ((first, (0.0, 180.0)), (second, (90.0, -90.0))):
            assert distance is not None
            assert distance.distance == pytest.approx(max(crossing(made.plan, layer, a) for a in angles), rel=0.01)
        above = max(crossing(side, layer, 90.0) for side in made.sides)
        if not turns:
            assert table.above.distance == pytest.approx(above, rel=0.01)
        if made.floors is not None:
            (floor,) = table.on_floors
            drawn = float(made.floors.outermost([layer]).max())
            # Bearings and heights of the two are not the same: the map looks at more of them.
            assert floor.any_bearing.distance == pytest.approx(drawn, rel=0.02)
            assert drawn >= 0.99 * (floor.any_bearing.distance or 0.0)


@pytest.mark.parametrize("name", ["upright", "side", "flat", "big"])
def test_on_a_contour_the_share_is_one(name: str) -> None:
    """The strongest over the heights, at points of the drawn line with its 2 % taken off."""
    design = plain_design(**CASES[name])
    made, source = made_of(design)
    looked_at = 0
    for layer in made.layers:
        for line in made.plan.lines([layer]):
            for x, y in line[:: max(1, len(line) // 8)]:
                z = np.linspace(0.0, 12.0, 1201)
                squares = source.strongest(np.stack([0.0 * z + x / 1.02, 0.0 * z + y / 1.02, z], axis=1))
                share = max(float((squares.electric * e).max()) for e, _ in layer.weighed)
                share = max(share, *(float((squares.magnetic * h).max()) for _, h in layer.weighed))
                assert share == pytest.approx(1.0, abs=0.04)  # of power: 1 % of distance in a near field
                looked_at += 1
    assert looked_at >= 8


def test_the_pad_and_the_heights_of_people_are_those_of_the_table() -> None:
    from magsafe.analysis import field_map as drawn

    assert drawn.PAD == keepout._PAD
    assert set(keepout._PEOPLE) <= set(drawn.PEOPLE)
    assert set(keepout._HEIGHTS) <= set(drawn.HEIGHTS)


def test_weights_count_margin_duty_and_bare_losses() -> None:
    """One over the limit's square, times watts, 2 dB and what typical losses had taken: written out."""
    contacts = [{"name": "brushes", "kind": "sliding contact", "count": 4, "at": "capacitor"}]
    over = {"frequency": "7.1 MHz", "power": "80 W", "mode": "SSB", "over": {"transmit": "3 min", "listen": "3 min"}}
    design = plain_design(**CASES["upright"], transmission__0=over, loop__joint=contacts)
    point = operating_point(design, design.transmission[0])
    source = field_source(design, point, FAR)
    assert source.bare_factor > 1.1
    layer = next(each for each in layers_of(design, source) if (each.rule, each.who) == ("us-fcc", "public"))
    ((_, magnetic),) = layer.weighed
    # 47 CFR 1.1310: 2.19 / f A/m, over 30 minutes: 80 W at half duty, half of the time.
    assert magnetic == pytest.approx(20.0 * 10.0**0.2 * source.bare_factor / (2.19 / 7.1) ** 2, rel=1e-3)


@pytest.mark.parametrize("name", ["upright", "side", "flat", "rotating", "two turns", "flat spiral"])
def test_a_map_has_the_symmetries_of_its_loop(name: str) -> None:
    design = plain_design(**CASES[name])
    made, source = made_of(design)
    plan, angles = made.plan, np.degrees(made.plan.angles)
    reach = plan.outermost(made.layers)
    assert reach[0] == reach[-1]
    at = {round(float(angle)): float(each) for angle, each in zip(angles, reach, strict=True)}
    for degrees in range(0, 181, 5):
        if name.startswith("flat"):
            assert at[degrees] == at[-degrees]
        else:
            assert at[degrees] == at[180 - degrees]  # the plane of the loop mirrors
    if name == "upright":
        assert at[30] == at[-30]
    if name == "rotating":
        assert len(set(at.values())) == 1
        return
    # What is folded is what is there: four bearings evaluated where they are.
    for bearing in (-150.0, -60.0, 45.0, 120.0):
        own = np.flatnonzero(np.isclose(angles, bearing))[0]
        ring = plan.distances[:3]
        z = np.linspace(0.0, 12.0, 601)
        for k, away in enumerate(ring):
            turn = np.radians(bearing)
            points = np.stack([0.0 * z + away * np.cos(turn), 0.0 * z + away * np.sin(turn), z], axis=1)
            found = source.strongest(points)
            assert plan.magnetic[own, k] == pytest.approx(float(found.magnetic.max()), rel=0.03)


def test_areas_end_at_the_touch_distance_and_hold_what_exceeds() -> None:
    design = plain_design(**CASES["big"])
    made, _ = made_of(design)
    for area in made.plan.areas(made.layers):
        away = np.hypot(*np.concatenate(area).T)
        assert away.min() >= made.touch * (1.0 - 1e-9)
        assert away.max() == pytest.approx(float(made.plan.outermost(made.layers).max()), rel=0.01)


def test_a_map_grows_until_its_contours_close() -> None:
    design = plain_design(**{**CASES["free space"], "transmission__0__power": "1500 W"})
    made, _ = made_of(design)  # it is told that nothing reaches anywhere
    assert made.bounded
    assert float(made.plan.outermost(made.layers).max()) > 1.5 * made.touch


def test_a_map_that_does_not_close_says_so() -> None:
    power = {"transmission__0__power": "10 kW", "transmission__0__frequency": "23 MHz"}
    design = plain_design(**{**CASES["free space"], **power})
    point = operating_point(design, design.transmission[0])
    made = field_map(design, point, 0.0)
    strong = Layer("us-fcc", "public", tuple((e * 1e4, h * 1e4) for e, h in made.layers[0].weighed))
    assert not made.plan.bounded([strong])
    assert made.plan.outermost([strong]).max() == made.plan.distances[-1]


def test_nobody_is_below_the_ground() -> None:
    design = plain_design(**CASES["upright"])
    made, _ = made_of(design)
    for side in made.sides:
        reach = side.outermost(made.layers)
        up = side.centre[1] + reach * np.sin(side.angles)
        assert up.min() >= min(0.0, side.centre[1] - made.touch) - 1e-9
        assert side.lowest == 0.0


def test_progress_tells_every_point_once() -> None:
    design = plain_design(**CASES["upright"])
    told: list[tuple[int, int]] = []
    field_map(design, operating_point(design, design.transmission[0]), 5.0, lambda done, of: told.append((done, of)))
    done = [each for each, _ in told]
    assert done == sorted(set(done))
    assert done[-1] == told[-1][1]
    assert len({of for _, of in told}) == 1


def test_a_sample_reaches_in_its_map_as_far_as_in_its_table() -> None:
    """The distances on the sheet are rounded up to 0.1 m."""
    design = magsafe.read_design(SAMPLE)
    made, source = made_of(design)
    for layer in made.layers:
        table = table_of(design, source, layer)
        for found, angle in ((table.along_axis, 0.0), (table.in_plane, 90.0)):
            assert found is not None
            drawn = crossing(made.plan, layer, angle)
            assert ceil(drawn * 0.99 * 10.0 - 1e-9) / 10.0 <= (found.distance or 0.0) <= drawn * 1.01 + 0.1
