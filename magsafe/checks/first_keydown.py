"""The first key-down of a loop: what comes before it, from which power it goes up in which steps, what to watch.

It is computed for this loop from its sheet, and is no permission: what is a stop or unproven comes first, and without
a proven ceiling there are no steps.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from math import inf, isfinite, sqrt

import numpy as np
from scipy.integrate import trapezoid

from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.warmth import RUNS_AWAY, Warmth
from magsafe.checks.sheet import ExposureRecord, Finding, OperatingPointRecord, Sheet
from magsafe.design import warmth_tables
from magsafe.design.model import Design
from magsafe.physics.arrays import Array
from magsafe.physics.heat import absorbed_sunshine, frequency_drift, lost_heat
from magsafe.spread import Spread
from magsafe.words import floor_two_digits

FIRST = 5.0  # W, at most, of the first carrier (common practice, as in the cautions)
CARRIER = 10.0  # s of each carrier: joints warm in seconds (common practice)
_DOUBLE = 2.0  # 3 dB from step to step: volts and amps grow by 1.41
_NEAR_TOP = 1.25  # a step nearer to the last one is left out
_COOL = 0.1  # of its rise that a conductor may keep when hands come back
_COOLING_STEPS = 400


@dataclass(frozen=True, slots=True)
class Step:
    """One carrier: envelope power at the transmitter [W], and what the loop then carries at the dangerous end.

    `volts` is peak, `amps` RMS; `creep` is how far the conductor's warming alone moves the resonance down while the
    carrier lasts [Hz], at most. None where not known.
    """

    power: float
    volts: float | None
    amps: float | None
    creep: float | None


@dataclass(frozen=True, slots=True)
class FirstKeydown:
    """The procedure of one transmission.

    `tuned` tells whether a capacitor tunes it. `before` are the findings that come first, `others` tells that only
    other transmissions have such. `steps` is empty where no power is proven; `carrier` is how long each is held [s].
    `empty` are the places that nobody may be in during them, `wait` is how long after them the first over comes, so
    that both do not add up where somebody stays [s]; `keep_off` are the distances of an unbroken carrier at the planned
    power [m] by tier, None where the search did not bound it. `resonance` is the frequency to tune to [Hz],
    `capacitance` what tunes it [F], `width` the width between the points of SWR 2 [Hz]; each None where not known.
    `over` and `pause` are those of the design [s], infinite and 0 without; `rise` is the conductor's at the end of the
    longest over [K], `cooling` how long it then takes to lose nine tenths of that at the worst end [s], `settling` how
    long it takes to come within 5 % of a steady temperature [s]; each None where not known.
    """

    transmission: int
    tuned: bool
    before: tuple[Finding, ...]
    others: bool
    steps: tuple[Step, ...]
    carrier: float
    empty: tuple[str, ...]
    wait: float
    keep_off: tuple[tuple[str, float | None], ...]
    resonance: float
    capacitance: Spread | None
    width: Spread | None
    over: float
    pause: float
    rise: float | None
    cooling: float | None
    settling: float | None


def first_keydown(design: Design, sheet: Sheet, points: Sequence[OperatingPoint]) -> tuple[FirstKeydown, ...]:
    """Return the procedure of every transmission of a sheet.

    Parameters
    ----------
    design : the design of the sheet
    sheet : what was computed of it
    points : its transmissions; the conductor's warming in time comes from them
    """
    return tuple(_procedure(design, sheet, index, point.warmth) for index, point in enumerate(points))


def _procedure(design: Design, sheet: Sheet, index: int, warm: Warmth | None) -> FirstKeydown:
    point = sheet.operating_points[index]
    before = tuple(f for f in (*sheet.findings, *point.findings) if f.verdict in ("stop", "unproven"))
    powers = step_powers(point)
    metal = warmth_tables.metals().get(design.loop.conductor.material or "copper")
    expansion = None if metal is None else metal.expansion
    steps = tuple(_step(point, power, warm, expansion) for power in powers)
    empty = tuple(dict.fromkeys(_occupied(point, sum(powers) * CARRIER)))
    figures = point.figures
    return FirstKeydown(
        transmission=index,
        tuned=_tuned(point),
        before=before,
        others=not before and sheet.verdict in ("stop", "unproven"),
        steps=steps,
        carrier=CARRIER,
        empty=empty,
        wait=_wait(point, empty),
        keep_off=tuple(_keep_off(point.exposure)),
        resonance=point.frequency,
        capacitance=_spread(point, "tuning_capacitance") if "tuning_capacitance" in figures else None,
        width=_spread(point, "swr2_bandwidth") if "swr2_bandwidth" in figures else None,
        over=inf if warm is None else warm.over,
        pause=0.0 if warm is None else warm.pause,
        rise=None if warm is None else _rise(warm),
        cooling=None if warm is None else cooling_time(warm),
        settling=None if warm is None else settling_time(warm),
    )


# Powers ----------------------------------------------------------------------------------------------------


def step_powers(point: OperatingPointRecord) -> tuple[float, ...]:
    """Return the powers of the carriers [W], the first no more than 5 W, the last the ceiling or what is planned.

    Empty where the ceiling is not known, is 0, or leaves something out.
    """
    made = point.power_ceiling
    if not made.complete or not made.value:
        return ()
    top = _floored(min(made.value, point.power))
    powers = [min(FIRST, top)]
    while powers[-1] * _DOUBLE * _NEAR_TOP < top:
        powers.append(powers[-1] * _DOUBLE)
    return (*powers, top) if top > powers[-1] else tuple(powers)


def _floored(power: float) -> float:
    return float(floor_two_digits(power))


def _step(point: OperatingPointRecord, power: float, warm: Warmth | None, expansion: float | None) -> Step:
    share = power / point.power
    volts, amps = (_high(point, name) for name in _CARRIED[_tuned(point)])
    return Step(
        power=power,
        volts=None if volts is None else volts * sqrt(share),
        amps=None if amps is None else amps * sqrt(share),
        creep=None if warm is None or expansion is None else _creep(point.frequency, warm, share, expansion),
    )


_CARRIED = {
    True: ("capacitor_peak_voltage", "largest_current"),
    False: ("terminal_peak_voltage", "largest_current"),
}


def _tuned(point: OperatingPointRecord) -> bool:
    """Return whether a capacitor tunes the loop; a full-wave loop has its volts at the terminals."""
    figure = point.figures.get("terminal_peak_voltage")
    return figure is None or figure.likely is None


def _high(point: OperatingPointRecord, name: str) -> float | None:
    figure = point.figures.get(name)
    return None if figure is None else figure.high


def _spread(point: OperatingPointRecord, name: str) -> Spread | None:
    figure = point.figures[name]
    found = Spread(figure.low, figure.likely, figure.high)
    return found if found.known else None


# Heat ------------------------------------------------------------------------------------------------------


def _creep(frequency: float, warm: Warmth, share: float, expansion: float) -> float | None:
    """Return how far one carrier's heat moves the resonance at most [Hz], none of it lost; None where not known."""
    if warm.capacity == 0.0 or warm.heat.high is None:
        return None
    rise = warm.heat.high * share * CARRIER / warm.capacity
    _, most = frequency_drift(frequency, expansion, rise)
    return abs(float(most))


def _rise(warm: Warmth) -> float | None:
    hottest = warm.temperature().high
    return None if hottest is None or hottest >= RUNS_AWAY else hottest - warm.idle


def cooling_time(warm: Warmth) -> float | None:
    """Return how long the conductor takes to lose nine tenths of its rise after the longest over [s], at the worst end.

    None where the section or the rise is not known. It follows the heat lost at each temperature, which falls as it
    cools.
    """
    rise = _rise(warm)
    if rise is None or rise <= 0.0 or warm.capacity == 0.0:
        return None
    temperatures = warm.idle + np.geomspace(_COOL * rise, rise, _COOLING_STEPS)
    lost = _lost_at_worst(warm, temperatures)
    if not bool((lost > 0.0).all()):
        return None
    return float(trapezoid(warm.capacity / lost, temperatures))


def _lost_at_worst(warm: Warmth, temperatures: Array) -> Array:
    """Return the heat that a metre loses at the end that loses least, less what the sun brings [W/m], shape (n,)."""
    lost = lost_heat(temperatures[:, None], warm.surface, warm.air) - absorbed_sunshine(warm.surface, warm.air)
    return np.broadcast_to(lost, (len(temperatures), 3))[:, 2]


def settling_time(warm: Warmth) -> float | None:
    """Return how long the conductor takes to come within 5 % of a steady temperature [s]: three time constants."""
    likely = warm.temperature().likely
    if likely is None or likely >= RUNS_AWAY or warm.capacity == 0.0:
        return None
    warmer, cooler = (
        float(np.broadcast_to(lost_heat(likely + step, warm.surface, warm.air), 3)[1]) for step in (1, -1)
    )
    return 3.0 * warm.capacity / ((warmer - cooler) / 2.0)


# People ----------------------------------------------------------------------------------------------------


def _occupied(point: OperatingPointRecord, energy: float) -> Iterator[str]:
    """Yield the places in which the carriers, `energy` at the transmitter [J], would be more than the rule averages.

    Those that are not proven to be within the limit are among them.
    """
    for exposure in point.exposure:
        for place in exposure.places:
            if exposure.without or place.when == "tuning":
                continue
            bears = bool(place.times) and all(
                each.carrier >= each.averaging_time or each.carrier * point.power >= energy for each in place.times
            )
            if place.verdict in ("stop", "unproven") or not bears:
                yield place.name


def _wait(point: OperatingPointRecord, empty: Sequence[str]) -> float:
    """Return the longest averaging time of what somebody is exposed to who stays in a place that time limits [s]."""
    return max(
        (
            each.averaging_time
            for exposure in point.exposure
            for place in exposure.places
            if place.name not in empty and place.when != "tuning"
            for each in place.times
            if each.carrier < each.averaging_time
        ),
        default=0.0,
    )


def _keep_off(exposures: Sequence[ExposureRecord]) -> Iterator[tuple[str, float | None]]:
    """Yield the farthest distance of an unbroken carrier for each tier [m]."""
    for who in ("public", "trained"):
        found = [e.keepout.key_down.any_direction.distance for e in exposures if e.who == who and e.keepout is not None]
        known = [each for each in found if each is not None and isfinite(each)]
        if found:
            yield who, max(known) if len(known) == len(found) else None
