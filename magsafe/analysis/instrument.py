"""What an instrument says of the loop: resonance, coupling and unloaded Q, from a sweep or from two points."""

from dataclasses import dataclass
from math import inf
from typing import Any, Literal

import numpy as np

from magsafe.design.as_built import LEAST_COUPLING, MOST_COUPLING, MOST_REFLECTION, NO_GROUND, identity
from magsafe.design.model import Design, Measured
from magsafe.design.sweep import Sweep
from magsafe.physics.resonance_fit import Estimate, ResonanceFit, fit_resonance
from magsafe.physics.swr_points import Branch, PointsQ, half_power_swr, q_of_swr_points
from magsafe.spread import UNKNOWN, Spread

By = Literal["sweep", "points of one SWR", "half-power points"]
Way = Literal["over", "under"]

_ONE_SWEEP = (
    "one sweep does not show a resonance that moves while it is taken: sweep once upwards and once downwards, and "
    "trust neither if they differ"
)
KEPT = 41  # points of a sweep that a record keeps for its picture
WIDE = 6.0  # half-power widths to either side of resonance, within which they are kept


@dataclass(frozen=True, slots=True)
class Reading:
    """What an instrument says, each with its 95 % ends.

    `resonance` [Hz]; `unloaded_q`, `loaded_q`, `coupling` [1], the last unknown where the points do not tell its way;
    `line_loss` is that unfolded, or seen in the sweep, one way [dB]. `branches` name the two ways of coupling with what
    each means. `points` are frequency [Hz] and reflection at the loop's own terminals [1]. `noise` and `systematic` are
    the two parts of the upper end of Q over Q [1], where a sweep tells them apart. `notes` are sentences about the
    reading, `doubts` what speaks against it and its ends do not hold.
    """

    by: By
    resonance: Spread
    unloaded_q: Spread
    loaded_q: Spread
    coupling: Spread
    line_loss: Spread
    branches: tuple[tuple[str, Branch], ...] = ()
    points: tuple[tuple[float, complex], ...] = ()
    points_in_band: int | None = None
    residual: float | None = None
    noise: float | None = None
    systematic: float | None = None
    notes: tuple[str, ...] = ()
    doubts: tuple[str, ...] = ()


def by_sweep(sweep: Sweep, line_loss: Spread | None, reflection_error: float) -> Reading:
    """Return what a sweep of the reflection says.

    Parameters
    ----------
    sweep : as it was read
    line_loss : of the line between analyser and loop, one way [dB]; it is only held against what the sweep shows
    reflection_error : bound of the analyser's systematic error in the reflection [1]

    Raises
    ------
    ValueError : the sweep does not tell a resonance; the message says why
    """
    found = fit_resonance(sweep.frequency, sweep.reflection, reflection_error)
    quality = found.unloaded_q
    if found.loss.high < 0.0:
        raise ValueError(
            "far from resonance the reflection is more than 1, beyond the instrument's error: calibrate the analyser "
            "at its port and sweep again"
        )
    held = found.notes[:1] if found.delay_held else ()
    return Reading(
        by="sweep",
        resonance=_spread(found.resonance),
        unloaded_q=_spread(quality),
        loaded_q=_spread(found.loaded_q),
        coupling=_spread(found.coupling),
        line_loss=_spread(found.loss),
        points=_kept(sweep, found),
        points_in_band=found.points_in_band,
        residual=found.residual,
        noise=quality.noise / quality.value,
        systematic=quality.above / quality.value,
        notes=(*held, _ONE_SWEEP),
        doubts=(*found.notes[len(held) :], *_about_the_line(found.loss, line_loss)),
    )


def _spread(found: Estimate) -> Spread:
    """Return an estimate with its 95 % ends; an end that nothing bounds is None."""
    ends = (found.low, found.value, found.high)
    return Spread(*(each if np.isfinite(each) else None for each in ends))


def _about_the_line(seen: Estimate, stated: Spread | None) -> tuple[str, ...]:
    """Return what is to be said of the loss that a sweep shows, held against the line's as stated."""
    if stated is None:
        return ()
    if (stated.low or 0.0) > seen.high:
        return (
            f"the sweep shows no more than {seen.high:.2g} dB of loss, and the line is said to have {stated.low:.2g} "
            "dB: what the sweep shows was unfolded",
        )
    if stated.high is not None and stated.high < seen.low:
        return (
            f"the sweep shows at least {seen.low:.2g} dB of loss, more than the line's: the coupling, a balun or a "
            "connector takes the rest, and it was unfolded as if it were the line's",
        )
    return ()


def _kept(sweep: Sweep, found: ResonanceFit) -> tuple[tuple[float, complex], ...]:
    """Return some points about resonance, line loss and delay taken off."""
    away = sweep.frequency - found.resonance.value
    near = np.flatnonzero(np.abs(away) <= WIDE * found.bandwidth)
    if len(near) > KEPT:
        # Evenly round the circle, whose points crowd far from resonance.
        angle = np.arctan(2.0 * away[near] / found.bandwidth)
        wanted = np.linspace(angle[0], angle[-1], KEPT)
        near = near[np.unique(np.searchsorted(angle, wanted).clip(max=len(near) - 1))]
    line = np.exp(-2j * np.pi * away[near] * found.delay) * found.far_off
    seen = sweep.reflection[near] / line
    return tuple((float(f), complex(each)) for f, each in zip(sweep.frequency[near], seen, strict=True))


def by_points(
    ends: tuple[float, float],
    swr_at_resonance: float,
    *,
    half_power: bool,
    line_loss: Spread,
    resolution: float,
    reflection_error: float,
    way: Way | None,
    swr_at_points: float | None = None,
) -> Reading:
    """Return what two frequencies say: of an SWR of 2, or the half-power points.

    Parameters
    ----------
    ends : below and above resonance [Hz]
    swr_at_resonance : the lowest between them, as read [1]
    half_power : whether they are the half-power points
    line_loss : of the line between instrument and loop, one way [dB]
    resolution : how far each frequency may be off [Hz]
    reflection_error : how far each reading of the reflection factor may be off [1]
    way : of coupling, where something else tells it; None carries both
    swr_at_points : the SWR read at the half-power points [1]; None for the one that belongs to them

    Raises
    ------
    ValueError : the points do not go with each other, or with the line's loss; the message says why
    """
    ratio, notes = 2.0, tuple[str, ...]()
    if half_power:
        there = half_power_swr(swr_at_resonance, line_loss.likely or 0.0)
        ratio = swr_at_points or there
        notes = (
            f"through this line half power is where the instrument reads an SWR of {there:.3g}, and {ratio:.3g} was "
            "taken to be read there: points of another SWR give another Q, and --swr-at-points says which",
        )
    found = q_of_swr_points(
        *ends,
        ratio,
        swr_at_resonance,
        line_loss=line_loss,
        frequency_resolution=resolution,
        reflection_error=reflection_error,
    )
    branches = (("overcoupled", found.overcoupled), ("undercoupled", found.undercoupled))
    chosen = {"over": found.overcoupled, "under": found.undercoupled}.get(way or "")
    both = _both(found)
    return Reading(
        by="half-power points" if half_power else "points of one SWR",
        resonance=found.resonance,
        unloaded_q=both if chosen is None else chosen.unloaded_q,
        loaded_q=UNKNOWN,
        coupling=UNKNOWN if chosen is None else chosen.coupling,
        line_loss=line_loss,
        branches=branches if chosen is None else (),
        notes=(*notes, *(_about_the_branches(found) if chosen is None else ())),
    )


def _both(found: PointsQ) -> Spread:
    """Return the union of both ways of coupling, its likely value midway between theirs."""
    likely = [each.unloaded_q.likely or 0.0 for each in (found.overcoupled, found.undercoupled)]
    return Spread(found.unloaded_q.low, sum(likely) / 2.0, found.unloaded_q.high)


def _about_the_branches(found: PointsQ) -> tuple[str, ...]:
    over, under = found.overcoupled.unloaded_q.likely or 0.0, found.undercoupled.unloaded_q.likely or 0.0
    if abs(over / under - 1.0) < 0.01:
        return ()
    return (
        f"two points do not tell which way the loop is coupled: Q is {over:.3g} if overcoupled, {under:.3g} if "
        "undercoupled, and both are carried; a sweep tells, or --coupled does",
    )


def record_of(design: Design, reading: Reading, on: str) -> dict[str, Any]:
    """Return the record of a reading made on a day (ISO), as a [[measured]] block of a design file has it."""
    coupling, height, resonance = reading.coupling, design.loop.centre_height, reading.resonance.likely or 0.0

    def away(frequency: float) -> float:
        return abs(frequency - resonance)

    found: dict[str, Any] = {
        "frequency": _megahertz(resonance),
        "unloaded_q": _rounded(reading.unloaded_q),
        "by": reading.by,
        "tuned_for": _megahertz(min((each.frequency for each in design.transmission), key=away)),
        "line_loss": {name: f"{max(0.0, loss or 0.0):.4f} dB" for name, loss in _ends(reading.line_loss).items()},
        "date": on,
        "ground": design.ground_name or NO_GROUND,
        "design": identity(design),
    }
    if reading.doubts:
        found["notes"] = list(reading.doubts)
    if height is not None:
        found["centre_height"] = f"{height:.9g} m"
    if (coupling.low or 0.0) >= LEAST_COUPLING and (coupling.high or inf) <= MOST_COUPLING:
        found["coupling"] = _rounded(coupling)
    # Behind a line of much loss the noise of a point may come to more than a record holds.
    held = [(f, each) for f, each in reading.points if max(abs(each.real), abs(each.imag)) <= MOST_REFLECTION]
    if held:
        found["points"] = [[_megahertz(f), round(each.real, 5), round(each.imag, 5)] for f, each in held]
    return found


def measured_design(design: Design, record: dict[str, Any]) -> Design:
    """Return a design with a record, by `record_of`, as its only one."""
    return design.model_copy(update={"measured": [Measured.model_validate(record)]})


def _megahertz(frequency: float) -> str:
    return f"{frequency / 1e6:.7f} MHz"


def _rounded(spread: Spread) -> dict[str, float]:
    """Return a spread as a file has it."""
    return {name: float(f"{end or 0.0:.6g}") for name, end in _ends(spread).items()}


def _ends(spread: Spread) -> dict[str, float | None]:
    return {"low": spread.low, "likely": spread.likely, "high": spread.high}
