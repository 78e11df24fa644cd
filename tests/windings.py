"""Windings for tests, cut into segments as the program cuts them."""

import numpy as np

from magsafe.physics import geometry
from magsafe.physics.geometry import Turn, Wire


def perimeter_of(turn: Turn) -> float:
    """Return the length of a turn's line [m]."""
    return float(np.linalg.norm(np.roll(turn.points, -1, axis=0) - turn.points, axis=1).sum())


def cut(
    turn: Turn, radius: float = 3e-3, per_turn: float = 48, turns: int = 1, spacing: float = 0.0, nested: bool = False
) -> Wire:
    """Return a winding in its plane, its port no wider than half of what it lies in."""
    perimeter = perimeter_of(turn)
    gap = max(4.0 * radius, 0.01 * perimeter)
    if turns > 1:
        gap = min(gap, 0.5 * turns * spacing)
    elif turn.corner.any():
        gap = min(gap, float(np.linalg.norm(turn.points[1] - turn.points[0])))
    return geometry.cut(geometry.wind(turn, turns, spacing, nested), radius, perimeter / per_turn, gap)
