"""Shapes as wires: the turn's centre line as a closed chain of corners, in its own plane and in space."""

import numpy as np

from magsafe.physics.arrays import Array


def regular_corners(sides: int, corner_radius: float, per_side: int) -> Array:
    """Return points along a regular polygon, beginning in the middle of the side that faces the first axis.

    Parameters
    ----------
    sides : number of sides [1]
    corner_radius : distance from the centre to a corner [m]
    per_side : pieces into which each side is cut [1], even, so that a point lies in the middle of each side

    Returns
    -------
    points in the plane [m], shape (sides * per_side, 2), each once, against the clock

    Valid     3 sides or more.
    Source    plane geometry.
    """
    angles = np.pi / sides * (2.0 * np.arange(sides + 1) - 1.0)
    corners = corner_radius * np.stack([np.cos(angles), np.sin(angles)], axis=1)
    share = np.arange(per_side)[:, None, None] / per_side
    pieces = corners[:-1] * (1.0 - share) + corners[1:] * share
    points = pieces.transpose(1, 0, 2).reshape(-1, 2)
    return np.roll(points, -(per_side // 2), axis=0)


def circle_corners(radius: float, pieces: int) -> Array:
    """Return the corners of the regular polygon that has a circle's area, beginning on the first axis.

    Parameters
    ----------
    radius : radius of the circle [m]
    pieces : number of corners [1]

    Returns
    -------
    points in the plane [m], shape (pieces, 2), each once, against the clock

    Valid     fields no nearer to the conductor than about the length of a piece; the magnetic moment is exact.
    Source    plane geometry: equal area.
    """
    step = 2.0 * np.pi / pieces
    angles = step * np.arange(pieces)
    corner_radius = radius * np.sqrt(step / np.sin(step))
    return np.asarray(corner_radius * np.stack([np.cos(angles), np.sin(angles)], axis=1))


def upright(points: Array, port_angle: float, height: float) -> Array:
    """Return plane points set up in the vertical plane x = 0, their first axis turned to an angle.

    Parameters
    ----------
    points : points in the plane [m], shape (point, 2)
    port_angle : where the first axis points: 0 to the side (y), pi/2 to the top [rad]
    height : height of the centre [m]

    Returns
    -------
    points in space [m], shape (point, 3): x along the loop's axis, y in its plane, z up

    Valid     any.
    Source    rotation.
    """
    turned = _turned(points, port_angle)
    return np.stack([np.zeros(len(points)), turned[:, 0], turned[:, 1] + height], axis=1)


def flat(points: Array, height: float) -> Array:
    """Return plane points laid in the horizontal plane at a height, their first axis along x.

    Parameters
    ----------
    points : points in the plane [m], shape (point, 2)
    height : height [m]

    Returns
    -------
    points in space [m], shape (point, 3): x in the plane, towards the port, y across, z up

    Valid     any.
    Source    definition.
    """
    return np.concatenate([points, np.full((len(points), 1), height)], axis=1)


def _turned(points: Array, angle: float) -> Array:
    cosine, sine = np.cos(angle), np.sin(angle)
    return np.asarray(points @ np.array([[cosine, sine], [-sine, cosine]]))
