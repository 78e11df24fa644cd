"""Where the power goes: what reaches the sky over the ground that may be, its gain, and the directions it takes."""

from collections.abc import Iterator
from dataclasses import dataclass, replace
from math import ceil, pi, radians

import numpy as np
from scipy.constants import c

from magsafe.analysis.chain import RESISTANCE_ERROR, Chain
from magsafe.analysis.soil import BETWEEN_SOILS
from magsafe.analysis.surroundings import OverGround, State
from magsafe.physics.arrays import Array
from magsafe.physics.far_field import FarField
from magsafe.physics.ground_pattern import GroundPattern, intensities
from magsafe.spread import Spread

HALF_WAVE_DIPOLE = 1.64  # gain that ERP is counted against: 47 CFR 1.1307(b), as quoted in a regulatory note
BEARINGS, LEVELS = 24, 30  # directions that are tried for the strongest, over a quarter of a turn of elevation
PER_WAVE = 8  # levels for each wave of the squared pattern, of a loop high above the ground
BETWEEN_DIRECTIONS = 0.02  # of the gain, for what lies between them (computed)
CUT_ANGLES = np.radians(np.arange(0.0, 181.0, 1.0))
SAME = 1e-3  # elevation [rad] and relative strength within which the lobes of two sides are one
OVERHEAD = radians(89.0)  # elevation from which a lobe is one of both cuts: the search finds a flat one to a degree


@dataclass(frozen=True, slots=True)
class Sky:
    """What reaches the sky, each with its spread over soils, losses and the current's own change.

    `efficiency` is the power that leaves towards the sky over the power into the loop [1], `gain` the largest power
    density of any direction over that of the same power sent out evenly into the sphere [1], `elevation` where that is
    [rad]; `above_60` and `below_20` are shares of the sky power, at these degrees [1]. Likely values are None where no
    ground is stated. `pattern` tells where the likely power goes, None there too.
    """

    efficiency: Spread
    gain: Spread
    elevation: Spread
    above_60: Spread
    below_20: Spread
    pattern: "Pattern | None"


@dataclass(frozen=True, slots=True)
class Cut:
    """The likely gain [1] in an upright plane: from the horizon at an azimuth [rad] over the zenith to the other."""

    azimuth: float
    gain: Array


@dataclass(frozen=True, slots=True)
class Direction:
    """A lobe of a cut: on its near side, its far side or both; elevation [rad], gain [1].

    `strength` is that over the strongest direction of the whole pattern [1].
    """

    azimuth: float
    near: bool
    far: bool
    elevation: float
    gain: float
    strength: float


@dataclass(frozen=True, slots=True)
class Pattern:
    """The cuts along x and along y, and their lobes by falling strength; one overhead is told once.

    `gain` is that of the strongest direction of all [1], `elevation` where it is [rad].
    """

    cuts: tuple[Cut, ...]
    lobes: tuple[Direction, ...]
    gain: float
    elevation: float


def sky(chain: Chain) -> Sky | None:
    """Return what reaches the sky; None in free space and where no height is stated."""
    over = chain.around.over
    if not over:
        return None
    asked = [_asked(chain, each) for each in over]
    if not chain.around.ground_known:
        asked.append(_in_free_space(chain, asked[0]))
    found = pattern(chain)
    likely = None if found is None else _likely(chain, found)
    error = soil_error(chain)
    return Sky(
        efficiency=_most_one(
            _spread([one.efficiency for one in asked], None if likely is None else likely.efficiency, error)
        ),
        gain=_spread([one.gain for one in asked], None if likely is None else likely.gain, error + BETWEEN_DIRECTIONS),
        elevation=_directed([one.elevation for one in asked], found, 0.25 * pi / _levels(over[0], chain.frequency)),
        above_60=_most_one(
            _spread([one.above_60 for one in asked], None if likely is None else likely.above_60, RESISTANCE_ERROR)
        ),
        below_20=_most_one(
            _spread([one.below_20 for one in asked], None if likely is None else likely.below_20, RESISTANCE_ERROR)
        ),
        pattern=found,
    )


@dataclass(frozen=True, slots=True)
class _Values:
    """Values of `Sky` over soils and corners, or likely ones of shape ()."""

    efficiency: Array
    gain: Array
    elevation: Array
    above_60: Array
    below_20: Array


def _asked(chain: Chain, over: OverGround) -> _Values:
    """Return what a current sends over each soil, at each end of the losses and with each excess of the reactance."""
    elevation, azimuth = directions(over, chain.frequency)
    sent = intensities(over.flow.segments(), chain.frequency, over.permittivity, elevation, azimuth)
    best = np.argmax(sent, axis=1)
    whole = over.sky.sum(axis=1)
    into = np.stack(list(_delivered(chain, over)))
    return _Values(
        efficiency=whole / into,
        gain=4.0 * pi * sent[np.arange(len(best)), best] / into,
        elevation=elevation[best],
        above_60=over.sky[:, 2] / whole,
        below_20=over.sky[:, 0] / whole,
    )


def soil_error(chain: Chain) -> float:
    """Return the stated relative error of what is sent over soil [1]."""
    return 2.0 * RESISTANCE_ERROR + (2.0 * BETWEEN_SOILS if len(chain.around.over[0].radiated) > 1 else 0.0)


def _in_free_space(chain: Chain, like: _Values) -> _Values:
    """Return what leaves where there is no ground at all; its directions are no others than those `like` has."""
    efficiency = chain.efficiency_spread()
    ends = np.array([efficiency.low or 0.0, efficiency.high or 0.0])
    flow = chain.around.free[0]
    far = FarField.of(flow.segments(), chain.frequency)
    axis = np.array([1.0, 0.0, 0.0] if flow.shape.upright else [0.0, 0.0, 1.0])
    along = max(far.directivity_along(axis), far.directivity_along(-axis))
    gain = ends * max(along, far.largest_directivity_across(axis)[0])
    return replace(like, efficiency=ends, gain=gain)


def _delivered(chain: Chain, over: OverGround) -> Iterator[Array]:
    """Yield the power into the loop for 1 A into the conductor at the port [W], shape (soil,), at every corner."""
    for corner in chain.corners([State(over.flow, 0.0)]):
        for end in ("low", "high"):
            yield chain.resistance_over(over.radiated, end, corner) / corner.growth


def _likely(chain: Chain, found: "Pattern") -> _Values:
    over = chain.around.over[0]
    whole = over.sky[0].sum()
    return _Values(
        efficiency=whole / chain.taken(chain.likely),
        gain=np.array(found.gain),
        elevation=np.array(found.elevation),
        above_60=over.sky[0, 2] / whole,
        below_20=over.sky[0, 0] / whole,
    )


def directions(over: OverGround, frequency: float) -> tuple[Array, Array]:
    """Return elevations and azimuths that stand for all, shape (direction,) each."""
    levels = _levels(over, frequency)
    up, across = np.meshgrid(
        0.5 * pi * np.linspace(0.0, 1.0, levels + 1), 2.0 * pi * np.arange(BEARINGS) / BEARINGS, indexing="ij"
    )
    return up.ravel(), across.ravel()


def _levels(over: OverGround, frequency: float) -> int:
    """Return how many steps from the horizon to the zenith show every lobe."""
    return max(LEVELS, PER_WAVE * ceil(4.0 * over.flow.shape.height * frequency / c))


def _directed(values: list[Array], found: "Pattern | None", between: float) -> Spread:
    """Return the spread of elevations [rad], widened by what lies between those that are tried."""
    likely = None if found is None else np.array(found.elevation)
    plain = _spread(values, likely, 0.0)
    low, high = (plain.low or 0.0) - between, (plain.high or 0.0) + between
    return Spread(max(0.0, low), plain.likely, min(0.5 * pi, high))


def _spread(values: list[Array], likely: Array | None, error: float) -> Spread:
    low, high = min(float(each.min()) for each in values), max(float(each.max()) for each in values)
    if likely is None:
        return Spread(low, None, high).widened(error, error)
    middle = float(likely)
    return Spread(min(low, middle), middle, max(high, middle)).widened(error, error)


def _most_one(share: Spread) -> Spread:
    return Spread(share.low, share.likely, min(1.0, share.high or 0.0))


def pattern(chain: Chain) -> Pattern | None:
    """Return where the likely power goes; None in free space, and where ground or height is not stated."""
    over = chain.around.over
    if not over or not chain.around.ground_known:
        return None
    made, into = _ground_pattern(chain), chain.taken(chain.likely)
    beyond = 0.5 * pi < CUT_ANGLES
    elevation = np.where(beyond, pi - CUT_ANGLES, CUT_ANGLES)
    cuts = tuple(
        Cut(azimuth, made.gain(elevation, np.where(beyond, azimuth + pi, azimuth), into)) for azimuth in (0.0, 0.5 * pi)
    )
    elevation, azimuth = made.strongest()
    top = float(made.gain(np.array([elevation]), np.array([azimuth]), into)[0])
    first, second = (list(_lobes(made, cut.azimuth, into, top)) for cut in cuts)
    if any(lobe.elevation >= OVERHEAD for lobe in first):
        second = [lobe for lobe in second if lobe.elevation < OVERHEAD]
    lobes = tuple(sorted([*first, *second], key=lambda lobe: -lobe.gain))
    return Pattern(cuts, lobes, top, elevation)


def _ground_pattern(chain: Chain) -> GroundPattern:
    """Return the pattern of the likely current, whose powers are known already."""
    over = chain.around.over[0]
    free = FarField(over.flow.segments(), chain.frequency, over_plane=False, power=over.alone)
    return GroundPattern(free, complex(over.permittivity[0]), float(over.sky[0].sum()))


def _lobes(made: GroundPattern, azimuth: float, into: float, top: float) -> Iterator[Direction]:
    """Yield the lobes of both sides of a cut, those that are alike once."""
    sides = []
    for turned in (azimuth, azimuth + pi):
        found = made.lobes(turned)
        elevation = np.array([lobe.elevation for lobe in found])
        sides.append(list(zip(elevation, made.gain(elevation, np.full(len(found), turned), into), strict=True)))
    near, far = sides
    for elevation, gain in near:
        twin = next((each for each in far if _alike(each, (elevation, gain))), None)
        if twin is not None:
            far.remove(twin)
        yield Direction(azimuth, True, twin is not None, float(elevation), float(gain), float(gain) / top)
    for elevation, gain in far:
        yield Direction(azimuth, False, True, float(elevation), float(gain), float(gain) / top)


def _alike(one: tuple[float, float], other: tuple[float, float]) -> bool:
    return abs(one[0] - other[0]) < SAME and abs(one[1] / other[1] - 1.0) < SAME
