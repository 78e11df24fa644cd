"""The standing-wave ratio about resonance, of a loop that is matched there."""

from dataclasses import dataclass

import numpy as np

from magsafe.checks.sheet import OperatingPointRecord
from magsafe.physics.arrays import Array
from magsafe.physics.tuned_circuit import detuned_impedance, standing_wave_ratio

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
        likely=_ratio(offset, point.frequency, q.likely),
        narrowest=None if q.high is None else _ratio(offset, point.frequency, q.high),
        widest=None if q.low is None else _ratio(offset, point.frequency, q.low),
        width=width.likely,
    )


def _ratio(offset: Array, frequency: float, unloaded_q: float) -> Array:
    return standing_wave_ratio(detuned_impedance(offset, frequency, unloaded_q), 1.0)
