"""Rooftop currents on a closed chain of segments: their quadrature, and pairs of segments summed into matrices."""

from functools import cache

import numpy as np

from magsafe.physics.arrays import Array
from magsafe.physics.geometry import Wire

ORDER = 3  # Gauss points on a segment: current times position is integrated exactly, and to spare


@cache
def gauss(count: int) -> tuple[Array, Array]:
    """Return Gauss-Legendre nodes and weights on the interval from 0 to 1 [1], shape (count,) each.

    Source    any textbook of numerical integration.
    """
    node, weight = np.polynomial.legendre.leggauss(count)
    place, share = 0.5 + 0.5 * node, 0.5 * weight
    place.flags.writeable = share.flags.writeable = False
    return place, share


def quadrature_points(wire: Wire) -> Array:
    """Return the Gauss points of all segments [m], shape (segment * ORDER, 3).

    Source    as `gauss`.
    """
    place, _ = gauss(ORDER)
    along = (wire.length[:, None] * place)[:, :, None]
    return np.asarray((wire.nodes[:, None] + along * wire.direction[:, None]).reshape(-1, 3))


def integrated(kernel: Array, length: Array) -> Array:
    """Integrate a kernel between Gauss points over pairs of segments.

    Parameters
    ----------
    kernel : values [any unit], shape (..., segment * ORDER, segment * ORDER)
    length : length of each segment [m], shape (segment,)

    Returns
    -------
    integrals [unit m2], shape (..., 2, 2, segment, segment): the first two tell whether a segment carries the falling
    (0) or the rising half (1) of a rooftop

    Valid     kernels that are smooth over a pair of segments.
    Source    Gauss-Legendre quadrature.
    """
    place, weight = gauss(ORDER)
    halves = np.stack([weight * (1.0 - place), weight * place], axis=1)
    count, more = len(length), kernel.shape[:-2]
    inner = (kernel.reshape(-1, ORDER) @ halves).reshape(-1, ORDER, 2 * count)
    both = np.moveaxis((halves.T @ inner).reshape(*more, count, 2, count, 2), (-3, -1), (-4, -3))
    return np.ascontiguousarray(both) * (length[:, None] * length)


def assembled(pairs: Array, cosines: Array, charge: float, length: Array) -> Array:
    """Sum pairs of segments into matrices of rooftops.

    Parameters
    ----------
    pairs : integrals over pairs of half rooftops [unit m2], shape (..., 2, 2, segment, segment)
    cosines : of the angle between the currents of two segments [1], shape (segment, segment)
    charge : sign of the second one's charge [1]
    length : length of each segment [m], shape (segment,)

    Returns
    -------
    matrix of the currents [unit m2] and of the charges [unit], shape (..., 2, node, node)

    Valid     a closed chain: rooftop n rises on segment n - 1 and falls on segment n.
    Source    Harrington, Field Computation by Moment Methods (1968) (memory).
    """
    vector = pairs * cosines
    found = np.empty((*pairs.shape[:-4], 2, *pairs.shape[-2:]))
    both = vector[..., 0, :, :, :] + np.roll(vector[..., 1, :, :, :], 1, axis=-2)
    found[..., 0, :, :] = both[..., 0, :, :] + np.roll(both[..., 1, :, :], 1, axis=-1)
    whole = charge * pairs.sum(axis=(-4, -3)) / (length[:, None] * length)
    whole = whole - np.roll(whole, 1, axis=-2)
    found[..., 1, :, :] = whole - np.roll(whole, 1, axis=-1)
    return found
