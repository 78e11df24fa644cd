"""Unloaded Q from two frequencies of one standing-wave ratio, such as the half-power points, read through a line."""

from dataclasses import dataclass

import numpy as np

from magsafe.physics.arrays import Array, Values
from magsafe.spread import Spread

_ENDS = (-1.0, 0.0, 1.0)
_BETWEEN = 41


@dataclass(frozen=True, slots=True)
class Branch:
    """What the points mean for a loop coupled in one way: `coupling` and `unloaded_q` [1]."""

    coupling: Spread
    unloaded_q: Spread


@dataclass(frozen=True, slots=True)
class PointsQ:
    """Unloaded Q by two points. The ratio at resonance does not tell the way of coupling, so both are carried.

    `resonance` [Hz]; `overcoupled` takes the loop for less than the line at resonance, `undercoupled` for more, as the
    coupling loop shows it; `unloaded_q` [1] is the union of both, its likely value None where they differ.
    """

    resonance: Spread
    overcoupled: Branch
    undercoupled: Branch
    unloaded_q: Spread


def reflection_of(swr: Values) -> Array:
    """Return the size of the reflection factor.

    Parameters
    ----------
    swr : standing-wave ratio [1], 1 or more, shape (...)

    Returns
    -------
    reflection factor [1], same shape

    Valid     any.
    Source    definition.
    """
    return np.asarray((np.asarray(swr) - 1.0) / (np.asarray(swr) + 1.0))


def at_the_loop(reflection: Values, line_loss: Values) -> Array:
    """Return the size of the reflection at the far end of a line.

    Parameters
    ----------
    reflection : size of the reflection factor at the near end [1], shape (...)
    line_loss : loss of the matched line, one way [dB], broadcast

    Returns
    -------
    reflection factor [1], broadcast shape; 1 or more where the line cannot lose so much

    Valid     line of the impedance that the ratio refers to.
    Source    the wave goes the line twice: textbook line theory.
    """
    return np.asarray(np.asarray(reflection) * 10.0 ** (np.asarray(line_loss) / 10.0))


def couplings(reflection: Values) -> tuple[Array, Array]:
    """Return the coupling, overcoupled and undercoupled, by the reflection at resonance.

    Parameters
    ----------
    reflection : size of the reflection factor at the loop, at resonance [1], shape (...), below 1

    Returns
    -------
    coupling above 1 and below 1 [1], same shape: the standing-wave ratio there, and one over it

    Valid     coupling without loss.
    Source    |1 - kappa| / (1 + kappa) is the reflection: textbook circuit theory.
    """
    over = (1.0 + np.asarray(reflection)) / (1.0 - np.asarray(reflection))
    return np.asarray(over), np.asarray(1.0 / over)


def tuning_times_q(reflection: Values, coupling: Values) -> Array:
    """Return unloaded Q times |f/f0 - f0/f| where a loop has a given reflection.

    Parameters
    ----------
    reflection : size of the reflection factor at the loop [1], shape (...), below 1, not below that at resonance
    coupling : what the line takes out of the loop over what the loop uses up [1], broadcast

    Returns
    -------
    product [1], broadcast shape

    Valid     one resonance behind a coupling without loss.
    Source    |Gamma|^2 = 1 - 4 kappa/((1 + kappa)^2 + (Q0 x)^2) solved for Q0 x (derived here from a series circuit);
              Yaghjian & Best, IEEE Transactions AP-53, 1298 (2005) have the same for a feed of any level (memory).
    """
    square = np.asarray(reflection) ** 2
    kappa = np.asarray(coupling)
    return np.asarray(np.sqrt((square * (1.0 + kappa) ** 2 - (1.0 - kappa) ** 2) / (1.0 - square)))


def half_power_swr(swr_at_resonance: float, line_loss: float = 0.0) -> float:
    """Return the standing-wave ratio that the analyser shows where a loop takes half of what it takes at resonance.

    Parameters
    ----------
    swr_at_resonance : as read at the near end of the line [1]
    line_loss : loss of the matched line, one way [dB]

    Returns
    -------
    standing-wave ratio at the near end [1]; 5.83 for a matched loop without line loss

    Raises
    ------
    ValueError : the ratio is below 1, the loss below 0, or the line cannot lose so much

    Valid     line of the impedance that the ratio refers to; loop and line as in `tuning_times_q`.
    Source    definition of the half-power points, with the line's loss put on again.
    """
    _must_be_a_ratio(swr_at_resonance)
    loss = Spread.exact(line_loss)
    _must_be_a_loss(loss)
    there = _unfolded(np.asarray(reflection_of(swr_at_resonance)), np.asarray(line_loss))
    read = np.sqrt(0.5 * (1.0 + there**2)) * 10.0 ** (-line_loss / 10.0)
    return float((1.0 + read) / (1.0 - read))


def q_of_swr_points(
    lower: float,
    upper: float,
    swr: float,
    swr_at_resonance: float,
    *,
    line_loss: Spread = Spread.exact(0.0),  # noqa: B008  (frozen)
    frequency_resolution: float = 0.0,
    reflection_error: float = 0.0,
) -> PointsQ:
    """Return unloaded Q by two frequencies of one standing-wave ratio.

    Parameters
    ----------
    lower, upper : the frequencies below and above resonance [Hz]
    swr : standing-wave ratio read at both [1], such as 2
    swr_at_resonance : the lowest ratio between them, as read [1], below `swr`
    line_loss : loss of the matched line between loop and analyser, one way [dB], all three values known
    frequency_resolution : how far each frequency may be off [Hz]
    reflection_error : how far each reading of the reflection factor may be off, at the analyser [1]

    Returns
    -------
    PointsQ; its ends are the worst case: every input at the end or between its ends that moves Q most, all at once

    Raises
    ------
    ValueError : values out of order or range, a reflection that comes to 1 or more behind the line's loss, or errors
        so large that the points are not told from the resonance

    Valid     one resonance behind a coupling without loss, line of the impedance that the ratio refers to.
    Source    `tuning_times_q`; resonance by the geometric mean, as |f/f0 - f0/f| is the same at both.
    """
    _must_be_a_ratio(swr_at_resonance)
    if not np.isfinite(swr) or not swr > swr_at_resonance:
        raise ValueError(
            f"the ratio at resonance, {swr_at_resonance:g}, is to be below that of the points, {swr:g}: "
            "take points of a higher ratio"
        )
    _must_be_errors(frequency_resolution, reflection_error)
    _must_be_a_loss(line_loss)

    resonance, tuning = _tuning(lower, upper, frequency_resolution)
    readings = (float(reflection_of(swr)), float(reflection_of(swr_at_resonance)))
    return _points(resonance, tuning, readings, line_loss, reflection_error)


# The ends --------------------------------------------------------------------------------------------------


def _points(
    resonance: Spread,
    tuning: Spread,
    readings: tuple[float, float],
    line_loss: Spread,
    error: float,
) -> PointsQ:
    """Return Q by readings of the reflection, at the points and at resonance.

    Q goes up with the reading at the points throughout; by that at resonance and the loss it may turn in between.
    """
    away = np.array([readings[0] + end * error for end in _ENDS])[:, None, None]
    steps = np.linspace(-1.0, 1.0, _BETWEEN)
    there = np.maximum(readings[1] + error * steps, 0.0)[None, :, None]
    low, likely, high = _known(line_loss)
    loss = np.concatenate((np.linspace(low, likely, _BETWEEN // 2), [likely], np.linspace(likely, high, _BETWEEN // 2)))
    unfolded = _unfolded(away, loss[None, None, :]), _unfolded(there, loss[None, None, :])
    if not (unfolded[1] < unfolded[0]).all():
        raise ValueError(
            "within the error of the reflection factor the points have the ratio of the resonance: "
            "take points of a higher ratio"
        )
    branches = []
    middle = 1, _BETWEEN // 2, _BETWEEN // 2
    narrow, usual, wide = _known(tuning)
    for kappa in couplings(unfolded[1]):
        q = np.broadcast_to(tuning_times_q(unfolded[0], kappa), (len(_ENDS), _BETWEEN, loss.size))
        every = np.broadcast_to(kappa, q.shape)
        branches.append(
            Branch(
                Spread(float(every.min()), float(every[middle]), float(every.max())),
                Spread(float(q.min()) / wide, float(q[middle]) / usual, float(q.max()) / narrow),
            )
        )
    over, under = branches
    ends = [_known(each.unloaded_q) for each in branches]
    same = ends[0][1] == ends[1][1]
    union = Spread(min(e[0] for e in ends), ends[0][1] if same else None, max(e[2] for e in ends))
    return PointsQ(resonance, over, under, union)


def _tuning(lower: float, upper: float, resolution: float) -> tuple[Spread, Spread]:
    """Return the resonance [Hz] and |f/f0 - f0/f| at both frequencies [1], each with its ends."""
    if not (np.isfinite([lower, upper]).all() and 0.0 < lower < upper):
        raise ValueError(f"the frequencies are to be above 0 and in order, not {lower:g} and {upper:g} Hz")
    if upper - lower <= 2.0 * resolution or lower <= resolution:
        raise ValueError(
            f"the points are {upper - lower:g} Hz apart, and each is known to {resolution:g} Hz: "
            "read the frequencies more finely"
        )
    ends = [(lower + end * resolution, upper - end * resolution) for end in (1.0, 0.0, -1.0)]
    narrow, usual, wide = ((high - low) / float(np.sqrt(low * high)) for low, high in ends)
    mean = float(np.sqrt(lower * upper))
    least = float(np.sqrt((lower - resolution) * (upper - resolution)))
    most = float(np.sqrt((lower + resolution) * (upper + resolution)))
    return Spread(least, mean, most), Spread(narrow, usual, wide)


def _unfolded(reflection: Array, line_loss: Array) -> Array:
    """Return the reflection at the loop, which is to be below 1."""
    there = at_the_loop(reflection, line_loss)
    if there.max() >= 1.0:
        raise ValueError(
            f"a reflection of {np.max(reflection):.3g} read through a line of {np.max(line_loss):g} dB would be "
            f"{there.max():.3g} at the loop, and a loop gives back less than 1: the line has less loss than that, or "
            "the reading is off"
        )
    return there


def _known(spread: Spread) -> tuple[float, float, float]:
    low, likely, high = spread.low, spread.likely, spread.high
    if low is None or likely is None or high is None:
        raise ValueError("low, likely and high are all needed")
    return low, likely, high


def _must_be_a_ratio(swr: float) -> None:
    if not (np.isfinite(swr) and swr >= 1.0):
        raise ValueError(f"a standing-wave ratio is 1 or more, not {swr:g}")


def _must_be_errors(resolution: float, reflection_error: float) -> None:
    if not (np.isfinite(resolution) and resolution >= 0.0):
        raise ValueError(f"the resolution of the frequency is 0 or more, not {resolution:g} Hz")
    if not 0.0 <= reflection_error < 1.0:
        raise ValueError(f"the error of the reflection factor is 0 or more and below 1, not {reflection_error:g}")


def _must_be_a_loss(line_loss: Spread) -> None:
    if _known(line_loss)[0] < 0.0:
        raise ValueError(f"the loss of a line is 0 dB or more, not {line_loss.low:g} dB")
