"""Lengths of a loop's outline: perimeter, area, how far it reaches. Plane geometry, no electromagnetics."""

from dataclasses import dataclass
from math import cos, hypot, pi, sin, tan

from magsafe.design.model import Loop


@dataclass(frozen=True, slots=True)
class Outline:
    """One turn's centre line: perimeter [m], area [m2], reach [m] from the centre, half its height [m].

    `half_height` is taken with a polygon standing on a corner, the larger of its two ways to stand.
    """

    perimeter: float
    area: float
    reach: float
    half_height: float

    @property
    def mean_radius(self) -> float:
        """Radius of the circle of the same perimeter [m]."""
        return self.perimeter / (2.0 * pi)


def outline(loop: Loop) -> Outline:
    """Return the outline of a consistent loop (of the outer turn, where turns are nested)."""
    if loop.shape == "circle":
        radius = (loop.diameter or 0.0) / 2.0 or (loop.perimeter or 0.0) / (2.0 * pi)
        return Outline(2.0 * pi * radius, pi * radius**2, radius, radius)
    if loop.shape == "polygon":
        sides = loop.sides or 3
        side = loop.side or (loop.perimeter or 0.0) / sides
        side = side or (loop.across_flats or 0.0) * tan(pi / sides)
        reach = side / (2.0 * sin(pi / sides))
        area = sides * side**2 / (4.0 * tan(pi / sides))
        return Outline(sides * side, area, reach, reach)
    if loop.shape == "rectangle":
        width, height = loop.width or 0.0, loop.height or 0.0
        return Outline(2.0 * (width + height), width * height, hypot(width, height) / 2.0, height / 2.0)
    return _outline_of_points([(x, y) for x, y in loop.points or []])


def drop(loop: Loop) -> float:
    """Return how far the conductor's axis reaches below the loop's centre [m], wherever the capacitor sits."""
    spacing = (loop.turn_spacing or 0.0) if loop.turns > 1 else 0.0
    nested = loop.turn_arrangement == "nested"
    if loop.plane == "horizontal":
        return 0.0 if nested else loop.turns * spacing / 2.0
    return outline(loop).half_height + (spacing / 2.0 if nested else spacing)


def room_inside(loop: Loop) -> float | None:
    """Return the distance from the centre to the nearest side of the innermost turn [m]; None for a free outline."""
    line, depth = outline(loop), (loop.turns - 0.5) * (loop.turn_spacing or 0.0)
    if loop.shape == "circle":
        return line.reach - depth
    if loop.shape == "polygon":
        return line.reach * cos(pi / (loop.sides or 3)) - depth
    if loop.shape == "rectangle":
        return min(loop.width or 0.0, loop.height or 0.0) / 2.0 - depth
    return None


def _outline_of_points(points: list[tuple[float, float]]) -> Outline:
    pairs = list(zip(points, points[1:] + points[:1], strict=True))
    perimeter = sum(hypot(b[0] - a[0], b[1] - a[1]) for a, b in pairs)
    area = abs(sum(a[0] * b[1] - b[0] * a[1] for a, b in pairs)) / 2.0
    across, up = [p[0] for p in points], [p[1] for p in points]
    centre = ((min(across) + max(across)) / 2.0, (min(up) + max(up)) / 2.0)
    reach = max(hypot(x - centre[0], y - centre[1]) for x, y in points)
    return Outline(perimeter, area, reach, (max(up) - min(up)) / 2.0)


def crosses_itself(points: list[tuple[float, float]]) -> bool:
    """Return whether two sides of a closed outline meet anywhere but at their common corner."""
    count = len(points)
    sides = [(points[i], points[(i + 1) % count]) for i in range(count)]
    for i, first in enumerate(sides):
        for j in range(i + 1, count):
            neighbours = j == i + 1 or (i == 0 and j == count - 1)
            if not neighbours and _meet(*first, *sides[j]):
                return True
    return False


Point = tuple[float, float]


def _side_of(a: Point, b: Point, p: Point) -> float:
    return (b[0] - a[0]) * (p[1] - a[1]) - (b[1] - a[1]) * (p[0] - a[0])


def _meet(a: Point, b: Point, p: Point, q: Point) -> bool:
    def within(u: Point, v: Point, w: Point) -> bool:
        return min(u[0], v[0]) <= w[0] <= max(u[0], v[0]) and min(u[1], v[1]) <= w[1] <= max(u[1], v[1])

    d1, d2, d3, d4 = _side_of(p, q, a), _side_of(p, q, b), _side_of(a, b, p), _side_of(a, b, q)
    if d1 * d2 < 0 and d3 * d4 < 0:
        return True
    return (
        (d1 == 0 and within(p, q, a))
        or (d2 == 0 and within(p, q, b))
        or (d3 == 0 and within(a, b, p))
        or (d4 == 0 and within(a, b, q))
    )
