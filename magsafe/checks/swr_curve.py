"""The standing-wave ratio about resonance, of a loop that is matched there."""

from dataclasses import dataclass

import numpy as np

from magsafe.checks.sheet import OperatingPointRecord
from magsafe.physics.arrays import Array

REACH = 4.0  # times the width between the points of SWR 2, on either side
_POINTS = 321


@dataclass(frozen=True, slots=True)
class SwrCurve:
    """Ratios over offsets from resonance.

    `offset` is in hertz, shape (point,); `likely` has its shape [1], `narrowest` and `widest` too: of the highest and
    the lowest unloaded Q, None where that end is not known. `width` is that between the likely points of SWR 2 [Hz].
    """

    frequency: float
    offset: Array
    likely: Array
    narrowest: Array | None
    widest: Array | None
    width: float


def swr_curve(point: OperatingPointRecord) -> SwrCurve | None:
    """Return the curve of one transmission; None where its Q is not known, as of a loop without a capacitor."""
    q, width = point.figures.get("unloaded_q"), point.figures.get("swr2_bandwidth")
    if q is None or width is None or q.likely is None or width.likely is None:
        return None
    offset = np.linspace(-REACH, REACH, _POINTS) * width.likely
    return SwrCurve(
        frequency=point.frequency,
        offset=offset,
        likely=series_swr(offset, point.frequency, q.likely),
        narrowest=None if q.high is None else series_swr(offset, point.frequency, q.high),
        widest=None if q.low is None else series_swr(offset, point.frequency, q.low),
        width=width.likely,
    )


def series_swr(offset: Array, frequency: float, unloaded_q: float) -> Array:
    """Return the standing-wave ratio of a series resonance whose resistance is matched to the line.

    Parameters
    ----------
    offset : from resonance [Hz], shape (point,), above -frequency
    frequency : of the resonance [Hz]
    unloaded_q : reactance of coil or capacitor over the resistance, at resonance [1]

    Returns
    -------
    ratio [1], shape (point,)

    Valid     a single resonance; the transformer between loop and line does not change over the offsets.
    Source    impedance 1 + j Q (f/f0 - f0/f) of a series circuit over its own resistance, and the definition of the
              ratio by the reflection factor (textbook circuit theory).
    """
    tuned = 1.0 + np.asarray(offset) / frequency
    detuning = unloaded_q * (tuned - 1.0 / tuned)
    reflected = np.abs(detuning) / np.hypot(2.0, detuning)
    return np.asarray((1.0 + reflected) / (1.0 - reflected))
