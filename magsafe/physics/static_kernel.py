"""Static interaction 1/R of straight round segments, integrated over the halves of rooftop currents.

Apart, 1/R is that of the axes with the next term of its average over both surfaces. Close together on one strand the
average over the circumference is taken in full, as between two points of one cylinder; close together on different
strands the axes stand for the conductors, as they do exactly for parallel cylinders with evenly spread currents.
"""

import numpy as np
from numpy.typing import NDArray

from magsafe.physics.arrays import Array
from magsafe.physics.geometry import Wire
from magsafe.physics.rooftops import gauss, integrated, quadrature_points

CLOSE = 1.5  # sums of two segments' lengths within which a pair is integrated in closed form over one of them
OUTER = 10  # Gauss points on the other one, clustered at its ends
TIGHT = 12.0  # conductor radii between two segments within which the average is taken in full
ROUND = 8  # Gauss points on half the circumference for it, clustered where the surface meets itself
ONE_STRAND = 2.6  # two places further apart along the chain than this times their distance lie on different strands
CHUNK = 4000  # pairs at once: in the cache


def static_pairs(wire: Wire, mirror: Array, distance: Array) -> Array:
    """Return the integrals of 1/R over pairs of half rooftops.

    Parameters
    ----------
    wire : the chain [m]
    mirror : factors on the coordinates of the second segment of a pair [1], shape (3,): ones, or -1 for an image
    distance : between the Gauss points of both [m], shape (segment * ORDER, segment * ORDER)

    Returns
    -------
    integrals [m], shape (2, 2, segment, segment)

    Valid     segments of two conductor radii or more; strands whose axes are no nearer than a conductor's diameter;
              at a corner within about a conductor's diameter only, where the shape of the bend would count.
    Source    surface average: Harrington, Field Computation by Moment Methods (1968) (memory).
    """
    pairs = integrated(_apart(wire, mirror, distance), wire.length)
    middle = wire.nodes + 0.5 * (wire.ends - wire.nodes)
    between = np.linalg.norm(middle[:, None] - middle * mirror, axis=2)
    lengths = wire.length[:, None] + wire.length
    first, second = np.nonzero(np.triu(between < CLOSE * lengths))
    one_strand = np.zeros(len(first), dtype=np.bool_)
    if bool((mirror > 0.0).all()):
        one_strand = _along(wire)[first, second] <= ONE_STRAND * between[first, second]
    tight = one_strand & (between[first, second] - 0.5 * lengths[first, second] < TIGHT * wire.radius)
    fraction, weight = _round()
    around = (2.0 * wire.radius * np.sin(0.5 * np.pi * fraction)) ** 2
    cases = (
        (tight, around, weight),
        (one_strand & ~tight, np.array([2.0 * wire.radius**2]), np.ones(1)),
        (~one_strand, np.zeros(1), np.ones(1)),
    )
    for case, offsets, weights in cases:
        rows, columns = first[case], second[case]
        for part in range(0, len(rows), CHUNK):
            m, k = rows[part : part + CHUNK], columns[part : part + CHUNK]
            # The mean of both orders: it does not matter then where the chain begins.
            one, other = _close(wire, mirror, m, k, offsets, weights), _close(wire, mirror, k, m, offsets, weights)
            found = 0.5 * (one + other.transpose(1, 0, 2))
            pairs[:, :, m, k] = found
            pairs[:, :, k, m] = found.transpose(1, 0, 2)
    return pairs


def crowded_pairs(wire: Wire, crowding: Array) -> Array:
    """Return what crowding takes from the integrals over pairs of segments that face each other in close turns.

    Parameters
    ----------
    wire : a winding [m]
    crowding : change of its turns' coefficients of potential, in units of 1/(2 pi epsilon) [1], shape (turn, turn)

    Returns
    -------
    integrals [m], shape (2, 2, segment, segment)

    Raises
    ------
    ValueError : turns of different numbers of segments, or another number of turns

    Valid     turns whose spacing is much less than their radius: the field between them is that of parallel lines.
    Source    integral of 1/R along a line, 2 ln(1/distance): so twice the change of the coefficient, where they face.
    """
    turns = [np.flatnonzero(wire.turn == number) for number in range(len(crowding))]
    if wire.turn.max() + 1 != len(crowding) or len({len(own) for own in turns}) != 1:
        raise ValueError(f"crowding is that of {len(crowding)} turns, and the wire's turns are others")
    pairs = np.zeros((2, 2, len(wire.turn), len(wire.turn)))
    for own, row in zip(turns, crowding, strict=True):
        for other, change in zip(turns, row, strict=True):
            facing = 2.0 * change * np.sqrt(wire.length[own] * wire.length[other])
            for i in (0, 1):
                for j in (0, 1):
                    pairs[i, j, own, other] = facing / (3.0 if i == j else 6.0)
    return pairs


def _apart(wire: Wire, mirror: Array, distance: Array) -> Array:
    """Return 1/R with the next term of its average over both circumferences, at the Gauss points."""
    points = quadrature_points(wire)
    order = len(points) // len(wire.length)
    inverse = 1.0 / np.where(distance > 0.0, distance, 1.0)
    direction = np.repeat(wire.direction, order, axis=0)
    other, mirrored = direction * mirror, points * mirror
    # The Laplacian across an axis t of 1/R is minus its second derivative along t; a circle's mean takes a^2/4 of it.
    ahead = direction @ mirrored.T - (direction * points).sum(axis=1)[:, None]
    behind = points @ other.T - (other * mirrored).sum(axis=1)
    along = 3.0 * (ahead**2 + behind**2) * inverse**2 - 2.0
    # Segments that touch are integrated otherwise; there the term would grow without bound.
    shift = np.minimum(0.25 * wire.radius**2 * inverse**2, 0.05)
    return np.asarray(inverse * (1.0 - shift * along))


def _along(wire: Wire) -> Array:
    """Return the distance of segments' middles along the chain, the shorter way round [m], (segment, segment)."""
    middle = np.cumsum(wire.length) - 0.5 * wire.length
    way = np.abs(middle[:, None] - middle)
    return np.asarray(np.minimum(way, wire.length.sum() - way))


def _round() -> tuple[Array, Array]:
    """Return shares of half the circumference with weights, clustered at the first."""
    fraction, weight = gauss(ROUND)
    return fraction**3, weight * 3.0 * fraction**2


def _clustered() -> tuple[Array, Array]:
    """Return nodes and weights on the interval from 0 to 1, clustered at both ends."""
    node, weight = gauss(OUTER)
    return node**2 * (3.0 - 2.0 * node), weight * 6.0 * node * (1.0 - node)


def _close(
    wire: Wire, mirror: Array, m: NDArray[np.intp], k: NDArray[np.intp], offsets: Array, weights: Array
) -> Array:
    """Return the integrals of close pairs, in closed form over the second segment: (2, 2, pair)."""
    place, weight = _clustered()
    length, other = wire.length[m][:, None], wire.length[k][:, None]
    points = wire.nodes[m][:, None] + (length * place)[:, :, None] * wire.direction[m][:, None]
    apart = points - (wire.nodes[k] * mirror)[:, None]
    foot = np.einsum("pni,pi->pn", apart, wire.direction[k] * mirror)
    aside = np.maximum(np.einsum("pni,pni->pn", apart, apart) - foot**2, 0.0)
    whole, rising = np.zeros_like(foot), np.zeros_like(foot)
    for offset, share in zip(offsets, weights, strict=True):
        square = aside + max(float(offset), 1e-30)
        near, far = np.sqrt(foot**2 + square), np.sqrt((other - foot) ** 2 + square)
        root = np.sqrt(square)
        integral = np.arcsinh((other - foot) / root) + np.arcsinh(foot / root)
        whole += share * integral
        rising += share * (far - near + foot * integral)
    rising /= other
    weighted = weight * length
    outer = np.stack([weighted * (1.0 - place), weighted * place])
    inner = np.stack([whole - rising, rising])
    return np.asarray(np.einsum("ipn,jpn->ijp", outer, inner))
