"""Transmissions that one transmitter works in turn: what they add up to, at worst, in any window of a rule.

Each may fill its own worst share of the window, and all of them together no more than the whole window; nobody knows
which comes when, so the time is given to what exposes most. Only what a rule averages adds up: two transmissions are
never on the air at once, so the crest of one is not raised by another.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import inf

import numpy as np

from magsafe.analysis.exposure import Basis, Use, When
from magsafe.analysis.keepout import Curve, Distance, Distances, FloorDistances, Shells, in_all_directions
from magsafe.physics.arrays import Array
from magsafe.rules.summation import Summation

_NOTHING = 1e-30  # of a limit: no power that there is brings it to that limit


@dataclass(frozen=True, slots=True)
class Part:
    """Something that fills time: a transmission's overs, or its tune-up.

    `electric` and `magnetic` are the squares of the fields over the limit's if it lasted all the time, of any one
    shape; `time` is the largest share of the window that it fills, 0..1. `scales` tells whether the transmission's
    power changes it; a tune-up has a power of its own.
    """

    transmission: int
    frequency: float
    electric: Array
    magnetic: Array
    time: float
    scales: bool


@dataclass(frozen=True, slots=True)
class Sum:
    """The worst sum over a window: share of the limit, which field decides, and the time that each part takes.

    `share` has the parts' shape, `times` one more axis in front, (part, ...), as have `shares`, what each part adds.
    """

    share: Array
    electric_decides: np.ndarray[tuple[int, ...], np.dtype[np.bool_]]
    times: Array
    shares: Array


def parts_of(
    transmission: int, basis: Basis, use: Use, when: When, squares: tuple[Array, Array], factor: float
) -> tuple[Part, ...]:
    """Return what of a transmission fills time under an averaged basis.

    Parameters
    ----------
    transmission : index of the transmission
    basis : a basis that is averaged
    use : how the transmission fills time
    when : `tuning` where only tune-ups count
    squares : electric and magnetic squares for each watt at the loop, of one shape [V2/m2/W and A2/m2/W]
    factor : power at the loop for each watt at the transmitter, times what the squares are raised by
    """
    made = []
    for each in use.fillings(basis.averaging_time, when):
        electric, magnetic = (
            np.zeros_like(square) if limit is None else square * (factor * each.power / limit**2)
            for square, limit in zip(squares, (basis.electric_limit, basis.magnetic_limit), strict=True)
        )
        made.append(Part(transmission, basis.frequency, electric, magnetic, each.time, each.scales))
    return tuple(made)


def worst_sum(parts: Sequence[Part], summation: Summation) -> Sum:
    """Return the largest sum of parts over a window, as a rule adds them.

    Valid     one transmitter: parts never overlap in time.
    Source    the rule's own way of adding (`summation`); the division of the window is derived here: a sum that grows
              with each part's time is greatest where what exposes most has all the time that it can have.
    """
    times = np.array([part.time for part in parts])
    both = [summation.contribution(part.electric, part.magnetic, part.frequency) for part in parts]
    filled = [_fullest(np.stack([each[kind] for each in both]), times) for kind in (0, 1)]
    sums = [(taken * np.stack([each[kind] for each in both])).sum(axis=0) for kind, taken in enumerate(filled)]
    first = sums[0] >= sums[1]
    taken = np.where(first, filled[0], filled[1])
    shares = taken * np.where(first, *(np.stack([each[kind] for each in both]) for kind in (0, 1)))
    electric, magnetic = (
        (taken * np.stack(values)).sum(axis=0)
        for values in ([part.electric for part in parts], [part.magnetic for part in parts])
    )
    return Sum(np.maximum(*sums), electric >= magnetic, taken, shares)


def _fullest(shares: Array, times: Array) -> Array:
    """Return the time that each part takes where the largest share is served first, shape of `shares` (part, ...)."""
    order = np.argsort(-shares, axis=0, kind="stable")
    own = np.broadcast_to(times.reshape(-1, *[1] * (shares.ndim - 1)), shares.shape)
    until = np.minimum(np.cumsum(np.take_along_axis(own, order, axis=0), axis=0), 1.0)
    taken = np.empty_like(shares)
    np.put_along_axis(taken, order, np.diff(until, axis=0, prepend=0.0), axis=0)
    return taken


def scale_to_limit(parts: Sequence[Part], summation: Summation) -> float | None:
    """Return by what factor the powers of all transmissions together may grow until the sum is 1.

    0 where the tune-ups alone come to it, None where no power changes the sum. `parts` have one value each.
    """

    from scipy.optimize import brentq  # noqa: PLC0415  (only where there are sessions: slow to import)

    def excess(factor: float) -> float:
        scaled = [
            replace(each, electric=each.electric * factor, magnetic=each.magnetic * factor) if each.scales else each
            for each in parts
        ]
        return float(worst_sum(scaled, summation).share.max()) - 1.0

    alone = [float(worst_sum([each], summation).share.max()) for each in parts if each.scales]
    if max(alone, default=0.0) < _NOTHING:
        return None
    if excess(0.0) >= 0.0:
        return 0.0
    most = (1.0 + 1e-9) / max(alone)
    # Rounded down by more than the root's own tolerance, so that at the power told the margin is kept.
    return most * float(brentq(lambda share: excess(most * share), 0.0, 1.0, xtol=1e-14, rtol=1e-13)) * (1.0 - 1e-11)


# Distances -------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Worked:
    """One transmission of a session: its fields about the loop, its bases, how it fills time, and its strict factor.

    `factor` is the power at the loop for each watt at the transmitter with the margin and without typical losses.
    """

    transmission: int
    around: Shells
    bases: tuple[Basis, ...]
    use: Use
    factor: float


def keep_out_together(session: Sequence[Worked], summation: Summation, vertical: bool) -> Distances:
    """Return the distances beyond which the sum of transmissions worked in turn exceeds no averaged limit.

    Between their distances the squares are power laws, and beyond its last one a transmission counts as there: the
    shells of a session go out to where that is little.
    """
    distances = np.unique(np.concatenate([each.around.distances for each in session]))
    names = dict.fromkeys(
        (basis.name, basis.averaging_time) for each in session for basis in each.bases if basis.averaging_time
    )

    def curves(name: str) -> list[Curve]:
        made = []
        for wanted in names:
            parts = [
                part
                for each in session
                for basis in each.bases
                if (basis.name, basis.averaging_time) == wanted
                for part in parts_of(
                    each.transmission, basis, each.use, "always", _squares_at(each.around, name, distances), each.factor
                )
            ]
            found = worst_sum(parts, summation)
            for field, decides in (("E", found.electric_decides), ("H", ~found.electric_decides)):
                if decides.any():
                    made.append((field, wanted[0], np.where(decides, found.share, 0.0)))
        return made

    return in_all_directions(session[0].around, distances, curves, vertical)


def _squares_at(found: Shells, name: str, distances: Array) -> tuple[Array, Array]:
    """Return the electric and magnetic squares of one direction at other distances."""
    least = np.finfo(float).tiny
    electric, magnetic = (
        np.exp(np.interp(np.log(distances), np.log(found.distances), np.log(np.maximum(squares[name], least))))
        for squares in (found.electric, found.magnetic)
    )
    return electric, magnetic


def further(one: Distances, other: Distances) -> Distances:
    """Return the greater of two sets of distances of one loop, direction by direction."""
    floors = tuple(
        FloorDistances(
            here.floor,
            _greater(here.any_bearing, there.any_bearing),
            _greater_of(here.along_axis, there.along_axis),
            _greater(here.in_plane, there.in_plane),
            _greater_of(here.across, there.across),
        )
        for here, there in zip(one.on_floors, other.on_floors, strict=True)
    )
    return Distances(
        _greater(one.any_direction, other.any_direction),
        _greater_of(one.along_axis, other.along_axis),
        _greater(one.in_plane, other.in_plane),
        _greater_of(one.across, other.across),
        _greater(one.above, other.above),
        _greater(one.below, other.below),
        floors,
    )


def _greater(first: Distance, second: Distance) -> Distance:
    return max(first, second, key=lambda each: inf if each.distance is None else each.distance)


def _greater_of(first: Distance | None, second: Distance | None) -> Distance | None:
    return None if first is None or second is None else _greater(first, second)
