"""Where people must not be: the distance beyond which no point exceeds a share of a limit, by direction.

Fields are not monotonic near the conductor, so the outermost crossing is looked for, inwards from far away. For each
direction and distance the strongest field over the heights or bearings that belong to it is kept; between distances
the square of the field is interpolated as a power law, and 2 % of distance is added for what lies between the samples.
"""

from collections.abc import Callable
from dataclasses import dataclass
from math import ceil, inf, log, pi

import numpy as np
from scipy.constants import c

from magsafe.analysis.exposure import Basis, Use, weights
from magsafe.analysis.field_source import FieldSource, touch_distance
from magsafe.physics.arrays import Array

FARTHEST = 150.0  # m
ELECTRIC_FOR_MAGNETIC = 377.0  # ohm: brings the two weights to one scale, no field is converted by it
_PAD = 1.02
_STEP = 0.1  # m, to which distances are rounded up
_PEOPLE = (0.0, 0.5, 1.0, 1.5, 2.0)  # m above a floor
_HEIGHTS = (0.0, 0.1, 0.2, 0.35, 0.5, 0.75, 1.0, 1.5, 2.5)  # of the distance, above and below the centre


@dataclass(frozen=True, slots=True)
class Distance:
    """A distance from the loop's centre [m], rounded up; None where the search did not bound it.

    `set_by` is `E`, `H` or `touch`; `basis` names the rule's basis, empty for touch.
    """

    distance: float | None
    set_by: str
    basis: str


@dataclass(frozen=True, slots=True)
class FloorDistances:
    """Distances for people on one floor [m above ground]; None for a direction that the loop does not have."""

    floor: float
    any_bearing: Distance
    along_axis: Distance | None
    in_plane: Distance
    across: Distance | None


@dataclass(frozen=True, slots=True)
class Distances:
    """The distances of one rule and tier; `along_axis` is of an upright loop, `across` of a flat one."""

    any_direction: Distance
    along_axis: Distance | None
    in_plane: Distance
    across: Distance | None
    above: Distance
    below: Distance
    on_floors: tuple[FloorDistances, ...]


@dataclass(frozen=True, slots=True)
class Shells:
    """Strongest squares for each watt at the loop against distance [m], by direction, shape (distance,) each.

    `to_ground` is how far the ground lies below the centre [m], infinite in free space: nobody is further down.
    """

    distances: Array
    electric: dict[str, Array]
    magnetic: dict[str, Array]
    floors: tuple[float, ...]
    bare_factor: float
    to_ground: float


def shells(source: FieldSource, weight: float) -> Shells:
    """Return the strongest fields about a source, from the touch distance to where nothing is reached any more.

    Parameters
    ----------
    source : the loop as wires
    weight : the largest `reach_weight` that will be asked for: the search goes no further out than it must
    """
    nearest = touch_distance(source.design)
    # Over a plane, direct and mirrored field make lobes whose number grows with the height in wavelengths.
    lobes = 2.0 * pi * source.point.transmission.frequency / c * source.height if source.grounded else 0.0
    farthest = _bounded(source, lobes, weight)
    steps = min(20 + ceil(5.0 * max(0.0, lobes - 0.5)), 80) / log(FARTHEST / nearest)
    distances = np.geomspace(nearest, farthest, ceil(steps * log(farthest / nearest)) + 2)
    if source.grounded and nearest < source.height < farthest:
        # Straight down the ground is a sample of its own: what lies further is not there.
        distances = np.sort(np.append(distances, source.height))
    count = len(distances)
    floors = tuple(source.design.site.floors or [0.0])
    families = _families(source, floors, lobes)
    sets = [make(distances) for make in families.values()]
    points = np.concatenate([each.reshape(-1, 3) for each in sets])
    there = points[:, 2] >= 0.0 if source.grounded else np.ones(len(points), dtype=bool)
    electric, magnetic = np.zeros(len(points)), np.zeros(len(points))
    squares = source.strongest(points[there])
    electric[there], magnetic[there] = squares.electric, squares.magnetic
    edges = np.cumsum([each.shape[0] * each.shape[1] for each in sets])[:-1]
    tops = [
        {
            name: part.reshape(count, -1).max(axis=1)
            for name, part in zip(families, np.split(values, edges), strict=True)
        }
        for values in (electric, magnetic)
    ]
    to_ground = source.height if source.grounded else inf
    return Shells(distances, tops[0], tops[1], floors, source.bare_factor, to_ground)


def _bounded(source: FieldSource, lobes: float, weight: float) -> float:
    """Return a distance from which on all spheres that were tried stay below half of the power at the limit [m]."""
    tried = np.geomspace(FARTHEST, touch_distance(source.design), 10)
    points = _sphere(tried, source.height, lobes, _half_turn(source))
    flat = points.reshape(-1, 3)
    there = flat[:, 2] >= 0.0 if source.grounded else np.ones(len(flat), dtype=bool)
    share = np.zeros(len(flat))
    squares = source.strongest(flat[there])
    share[there] = weight * np.maximum(squares.electric, squares.magnetic * ELECTRIC_FOR_MAGNETIC**2)
    reached = np.flatnonzero(share.reshape(len(tried), -1).max(axis=1) >= 0.5)
    first = int(reached[0]) if len(reached) else len(tried) - 1
    return float(tried[max(0, first - 1)])


def _half_turn(source: FieldSource) -> tuple[float, float]:
    """Return the bearings that all others mirror [rad]: a winding with its link, or a free outline, has none."""
    if source.design.loop.turns > 1 or source.design.loop.shape == "outline":
        return -pi, pi
    if source.design.loop.plane == "horizontal":
        return 0.0, pi
    return (0.0, pi / 2.0) if source.mirrors else (-pi / 2.0, pi / 2.0)


def reach_weight(bases: tuple[Basis, ...], use: Use, at_loop: float, margin: float, bare_factor: float) -> float:
    """Return the largest share of a limit less its margin for each unit of the electric square [m2/V2].

    Magnetic limits are told as electric ones by `ELECTRIC_FOR_MAGNETIC`, for this comparison alone.
    """
    found = weights(bases, use, at_loop * margin**2 * bare_factor)
    return max((max(e, h / ELECTRIC_FOR_MAGNETIC**2) for _, e, h in found), default=0.0)


Family = Callable[[Array], Array]


def _families(source: FieldSource, floors: tuple[float, ...], lobes: float) -> dict[str, Family]:
    """Return for each direction how its points follow from distances (d,): shape (d, point, 3)."""
    height = source.height
    vertical = source.design.loop.plane == "vertical"
    if vertical:
        bearings = {"along_axis": [0.0, pi], "in_plane": [pi / 2.0, -pi / 2.0]}
    else:
        bearings = {"in_plane": [0.0, pi], "across": [pi / 2.0, -pi / 2.0]}
    if source.design.loop.rotates:
        every = list(np.radians(np.arange(0.0, 360.0, 10.0)))
        bearings = dict.fromkeys(bearings, every)

    def any_height(turns: list[float]) -> Family:
        def points(distances: Array) -> Array:
            between = np.linspace(0.0, _HEIGHTS[-1], ceil(6.0 * lobes) + 1)
            steps = np.union1d(_HEIGHTS, between)
            up = np.concatenate([steps, -steps[1:]])
            own = height + distances[:, None] * up
            low = np.broadcast_to(np.linspace(0.0, height, 5), (len(distances), 5))
            heights = np.concatenate([own, low], axis=1) if source.grounded else own
            return _at(distances, heights, turns)

        return points

    def on_floor(floor: float, turns: list[float]) -> Family:
        def points(distances: Array) -> Array:
            heights = np.broadcast_to(floor + np.asarray(_PEOPLE), (len(distances), len(_PEOPLE)))
            return _at(distances, heights, turns)

        return points

    def upright(sign: float) -> Family:
        def points(distances: Array) -> Array:
            zero = np.zeros_like(distances)
            return np.stack([zero, zero, height + sign * distances], axis=1)[:, None, :]

        return points

    half = _half_turn(source)
    families: dict[str, Family] = {"any_direction": lambda d: _sphere(d, height, lobes, half)}
    families |= {name: any_height(turns) for name, turns in bearings.items()}
    families |= {"above": upright(1.0), "below": upright(-1.0)}
    round_about = list(np.arange(half[0], half[1] + 1e-9, np.radians(15.0)))
    for floor in floors:
        families[f"any_bearing on {floor:.6f}"] = on_floor(floor, round_about)
        families |= {f"{name} on {floor:.6f}": on_floor(floor, turns) for name, turns in bearings.items()}
    return families


def _at(distances: Array, heights: Array, turns: list[float]) -> Array:
    """Return points at horizontal distances (d,), heights (d, z) and bearings: shape (d, bearing * z, 3)."""
    made = []
    for turn in turns:
        x = np.broadcast_to((distances * np.cos(turn))[:, None], heights.shape)
        y = np.broadcast_to((distances * np.sin(turn))[:, None], heights.shape)
        made.append(np.stack([x, y, heights], axis=2))
    return np.concatenate(made, axis=1)


def _sphere(distances: Array, height: float, lobes: float, bearings: tuple[float, float]) -> Array:
    """Return points all round the centre, over the bearings that the others mirror."""
    step = 15.0 / (1.0 + lobes / 3.0)
    up = np.radians(np.linspace(-90.0, 90.0, ceil(180.0 / step) + 1))
    turn = np.linspace(*bearings, round((bearings[1] - bearings[0]) / np.radians(15.0)) + 1)
    elevation, bearing = (each.ravel() for each in np.meshgrid(up, turn))
    unit = np.stack(
        [np.cos(elevation) * np.cos(bearing), np.cos(elevation) * np.sin(bearing), np.sin(elevation)], axis=1
    )
    made = distances[:, None, None] * unit
    # Where the sphere meets the ground its strongest points may lie: a ring just above it, or the point straight down.
    down = np.minimum(height * (1.0 - 1e-9), distances)
    flat = np.sqrt(np.maximum(distances**2 - down**2, 0.0))[:, None]
    drop = np.broadcast_to(-down[:, None], (len(distances), len(turn)))
    ring = np.stack([flat * np.cos(turn), flat * np.sin(turn), drop], axis=2)
    return np.asarray(np.concatenate([made, ring], axis=1) + np.array([0.0, 0.0, height]))


# A share of the limit against distance, with the field and the basis that it is of.
Curve = tuple[str, str, Array]
Curves = Callable[[str], list[Curve]]


def keep_out(
    found: Shells, bases: tuple[Basis, ...], use: Use, at_loop: float, margin: float, vertical: bool
) -> Distances:
    """Return the distances beyond which no point exceeds the limits of `bases` less a margin.

    Parameters
    ----------
    found : the fields about the loop
    bases : the rule's bases for one tier
    use : how the power fills time
    at_loop : power at the loop for each watt at the transmitter, at its dangerous end
    margin : ratio of fields, 1 or more
    vertical : whether the loop is upright
    """
    # Without credit for typical losses, as every distance that people rely on.
    weighed = list(weights(bases, use, at_loop * margin**2 * found.bare_factor))

    def curves(name: str) -> list[Curve]:
        return [
            (field, basis.name, squares[name] * weight)
            for basis, by_electric, by_magnetic in weighed
            for field, squares, weight in (("E", found.electric, by_electric), ("H", found.magnetic, by_magnetic))
        ]

    return in_all_directions(found, found.distances, curves, vertical)


def in_all_directions(found: Shells, distances: Array, curves: Curves, vertical: bool) -> Distances:
    """Return the outermost crossings of curves at `distances`, by direction and floor."""

    def one(name: str) -> Distance:
        return _outermost(distances, curves(name))

    sides = ("along_axis", "in_plane") if vertical else ("in_plane", "across")

    def pick(name: str, suffix: str = "") -> Distance | None:
        return one(f"{name}{suffix}") if name in sides else None

    floors = tuple(
        FloorDistances(
            floor,
            one(f"any_bearing on {floor:.6f}"),
            pick("along_axis", f" on {floor:.6f}"),
            one(f"in_plane on {floor:.6f}"),
            pick("across", f" on {floor:.6f}"),
        )
        for floor in found.floors
    )
    return Distances(
        one("any_direction"),
        pick("along_axis"),
        one("in_plane"),
        pick("across"),
        one("above"),
        _capped(one("below"), found.to_ground),
        floors,
    )


def _outermost(distances: Array, curves: list[Curve]) -> Distance:
    """Return the outermost distance at which any curve comes to 1."""
    touch = Distance(round_up(float(distances[0])), "touch", "")
    found = [touch]
    for field, basis, shares in curves:
        reached = np.flatnonzero(shares >= 1.0)
        if not len(reached):
            continue
        last = int(reached[-1])
        if last == len(distances) - 1:
            return Distance(None, field, basis)
        here, there = float(shares[last]), float(shares[last + 1])
        share = log(here) / log(here / there) if there > 0.0 else 1.0
        crossing = float(distances[last] * (distances[last + 1] / distances[last]) ** share)
        found.append(Distance(round_up(crossing * _PAD), field, basis))
    return max(found, key=lambda each: each.distance or 0.0)


def _capped(found: Distance, most: float) -> Distance:
    """Return a distance no longer than the way there is."""
    if found.set_by == "touch" or most == inf:
        return found
    return Distance(min(found.distance or inf, round_up(most)), found.set_by, found.basis)


def round_up(distance: float) -> float:
    """Return a distance rounded up to 0.1 m."""
    return ceil(distance / _STEP - 1e-9) / 10.0
