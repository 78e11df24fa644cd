"""Lengths of a loop's outline: plane geometry (any textbook)."""

from math import pi, sqrt
from typing import Any

import pytest
from designs import plain_design

from magsafe.design.shape import Outline, outline


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
