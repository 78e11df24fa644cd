"""The loop as a source of fields: where its conductor and its capacitor may be, and what mirrors what."""

from typing import Any

import numpy as np
import pytest
from designs import plain_design
from points import rectangle

from magsafe.analysis.field_source import FAR, NEAR, FieldSource, field_source
from magsafe.analysis.operating_point import operating_point

LOOPS: dict[str, dict[str, Any]] = {
    "circle": {"loop": {**rectangle(1.0, 1.0), "shape": "circle", "width": None, "height": None, "diameter": "1 m"}},
    "rectangle": {"loop": rectangle(1.0, 1.0)},
}


def source_of(nodes: int = NEAR, /, **changes: Any) -> FieldSource:
    design = plain_design(**changes)
    return field_source(design, operating_point(design, design.transmission[0]), nodes)


@pytest.mark.parametrize("shape", LOOPS)
def test_a_capacitor_of_no_stated_place_is_near_wherever_it_may_be(shape: str) -> None:
    """The distance to it is that to the nearest of its places, a touch from each; the wire is where it is."""
    keys = {name: value for name, value in LOOPS[shape]["loop"].items() if value is not None}
    source = source_of(loop={**keys, "centre_height": "2 m"})
    places = np.array([[0.0, 0.0, 2.5], [0.0, 0.0, 1.5], [0.0, 0.5, 2.0]])
    axis, port = source.clearance(places + np.array([0.1, 0.0, 0.0]))
    np.testing.assert_allclose(port, 0.1, atol=1e-3)
    np.testing.assert_allclose(axis, 0.1, atol=1e-3)
    axis, port = source.clearance(np.array([[0.0, 0.0, 2.0], [3.0, 0.0, 2.0]]))
    np.testing.assert_allclose(axis, [0.5, np.hypot(3.0, 0.5)], rtol=5e-3)
    np.testing.assert_allclose(port, [0.5, np.hypot(3.0, 0.5)], rtol=5e-3)


@pytest.mark.parametrize("place", ["top", "bottom", "side"])
def test_the_capacitor_is_where_it_is_said_to_be(place: str) -> None:
    source = source_of(capacitor__position=place, loop__centre_height="2 m")
    wanted = {"top": [0.0, 0.0, 2.5], "bottom": [0.0, 0.0, 1.5], "side": [0.0, 0.5, 2.0]}[place]
    np.testing.assert_allclose(source.ports, [wanted], atol=1e-3)


@pytest.mark.parametrize("place", ["top", "bottom", "side"])
def test_only_what_mirrors_is_said_to_mirror(place: str) -> None:
    """A capacitor at the side draws the electric field to its side; one at the top or bottom leaves both alike."""
    source = source_of(capacitor__position=place, transmission__0__frequency="14.2 MHz", loop__centre_height="2 m")
    points = np.array([[0.4, 0.7, 2.1], [0.2, 0.6, 1.4], [1.0, 1.5, 2.0]])
    here, there = (source.strongest(points * np.array([1.0, way, 1.0])) for way in (1.0, -1.0))
    alike = np.allclose(here.electric, there.electric, rtol=1e-3)
    assert alike == (place != "side")
    assert source.mirrors == alike


@pytest.mark.parametrize(("ground", "grounded"), [("none", False), ("perfect", True), ("average", True)])
def test_nothing_is_looked_for_below_a_plane_that_may_be_there(ground: str, grounded: bool) -> None:
    assert source_of(site__ground=ground, loop__centre_height="2 m").grounded == grounded


def test_the_conductor_of_a_winding_is_near_wherever_its_link_may_be() -> None:
    """The link, one spacing outside the turns, has the capacitor in its middle: every place of it is in reach."""
    source = source_of(loop__turns=3, loop__turn_spacing="200 mm", loop__centre_height="2 m")
    assert len(source.ports) >= 3
    axis, port = source.clearance(source.ports)
    np.testing.assert_allclose(axis, 0.0, atol=1e-6)
    np.testing.assert_allclose(port, 0.0, atol=1e-6)


def test_factors_hold_every_case_of_the_ground() -> None:
    """Times `bare_factor` nothing typical is credited in any case; times `likely_factor` none is above the likely."""
    source = source_of(
        capacitor__series_resistance=None,
        site__ground="perfect",
        loop__centre_height="3 m",
        transmission__0__frequency="21 MHz",
    )
    cases = source.point.ground_cases
    bare = [case.bare_square / case.square for case in cases]
    likely = [case.likely_square / case.square for case in cases]
    assert max(bare) > 1.005 * min(bare) > 1.005
    assert max(likely) > 1.005 * min(likely)
    assert source.bare_factor == pytest.approx(max(bare))
    assert source.likely_factor == pytest.approx(min(likely))


def test_a_metre_off_few_nodes_are_enough() -> None:
    """Gauss-Legendre on segments much shorter than the distance: a thousandth of the field strength."""
    coarse, fine = (
        source_of(nodes, loop__diameter="5 m", transmission__0__frequency="3.6 MHz", capacitor__position="top")
        for nodes in (FAR, NEAR)
    )
    way = np.random.default_rng(2).normal(size=(200, 3))
    points = 3.5 * way / np.linalg.norm(way, axis=1)[:, None]
    for few, many in zip(
        (coarse.strongest(points).electric, coarse.strongest(points).magnetic),
        (fine.strongest(points).electric, fine.strongest(points).magnetic),
        strict=True,
    ):
        np.testing.assert_allclose(np.sqrt(few), np.sqrt(many), rtol=1e-3)
