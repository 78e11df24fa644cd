"""The first key-down of a loop: what comes before it, from which power it goes up in which steps, what to watch.

It is computed for this loop from its sheet, and is no permission: what is a stop or unproven comes first, and without
a proven ceiling there are no steps.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import ceil, inf, isfinite, log2, sqrt

import numpy as np

from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.warmth import RUNS_AWAY, Warmth, expansion_of
from magsafe.checks.capacitor_heat import CAPACITOR_HEAT
from magsafe.checks.cautions import HotPart, hot_parts, joint_temperatures, least_touch
from magsafe.checks.heat import CONDUCTOR, JOINT
from magsafe.checks.keydown_people import again, keep_off, occupied, wait
from magsafe.checks.padding import is_padding_heat
from magsafe.checks.sheet import Finding, OperatingPointRecord, Sheet
from magsafe.design.model import AM_CREST, Design
from magsafe.physics.heat import CEILING, frequency_drift
from magsafe.physics.warming import time_to_cool
from magsafe.spread import Spread
from magsafe.words import floor_two_digits

FIRST = 5.0  # W, at most, of the first carrier (common practice, as in the cautions)
CARRIER = 10.0  # s of each carrier: joints warm in seconds (common practice)
_DOUBLE = 2.0  # at most 3 dB from step to step: volts and amps grow by 1.41
_ALL = 4.0 * CARRIER  # s of the strongest carrier that hold more than all steps, each 1.41 to 2 times the one before


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
    other transmissions have such. `steps` is empty where no power is proven and with either of these; `carrier` is how
    long each is held [s]. `keyed` are the envelope powers in the mode itself after them [W], the last the most; they
    are several where the mode's mean is less than an unbroken carrier, which then ends lower. `am_carrier` is the most
    of an AM carrier that nobody speaks on [W], None in other modes.
    `empty` are the places that nobody may be in during the steps, `wait` is how long after them the first over comes,
    so that both do not add up where somebody stays, and `again` before another procedure or the same once more [s];
    `keep_off` are the distances of an unbroken carrier at the planned
    power [m] by tier, None where the search did not bound it. `resonance` is the frequency to tune to [Hz],
    `capacitance` what tunes it [F], `width` the width between the points of SWR 2 [Hz]; each None where not known.
    `over` and `pause` are those of the design [s], infinite and 0 without; `hottest` is the conductor after steps and
    longest over [K], `hot` what may then burn, the hottest first. `cooling` is how long the conductor takes to cool to
    where no touch burns at the worst end [s]; `idle` what the air and the sun alone make of it [K]. `settling` is how
    long it takes to come within 5 % of a steady temperature [s]; each None where not known.
    """

    transmission: int
    tuned: bool
    before: tuple[Finding, ...]
    others: bool
    steps: tuple[Step, ...]
    carrier: float
    keyed: tuple[float, ...]
    am_carrier: float | None
    empty: tuple[str, ...]
    wait: float
    again: float
    keep_off: tuple[tuple[str, float | None], ...]
    resonance: float
    capacitance: Spread | None
    width: Spread | None
    over: float
    pause: float
    hottest: float | None
    hot: tuple[HotPart, ...]
    cooling: float | None
    idle: float | None
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
    others = not before and sheet.verdict in ("stop", "unproven")
    powers = () if before or others else step_powers(point, warm)
    expansion = expansion_of(design.loop.conductor)
    tuned = design.capacitor.kind != "none"
    energy = sum(powers) * CARRIER
    empty = tuple(dict.fromkeys(occupied(design, sheet, index, energy)))
    figures, most = point.figures, _most(point)
    hottest = None if warm is None else _hottest(warm, point, powers)
    return FirstKeydown(
        transmission=index,
        tuned=tuned,
        before=before,
        others=others,
        steps=tuple(_step(point, power, warm, expansion, tuned=tuned) for power in powers),
        carrier=CARRIER,
        keyed=_rising(powers[-1], most)[1:] or (most,) if powers else (),
        am_carrier=most / AM_CREST if point.mode == "AM" and powers else None,
        empty=empty,
        wait=wait(point, empty),
        again=again(point, empty, energy, len(sheet.operating_points)),
        keep_off=tuple(keep_off(point.exposure)),
        resonance=point.frequency,
        capacitance=_spread(point, "tuning_capacitance") if "tuning_capacitance" in figures else None,
        width=_spread(point, "swr2_bandwidth") if "swr2_bandwidth" in figures else None,
        over=inf if warm is None else warm.over,
        pause=0.0 if warm is None else warm.pause,
        hottest=hottest,
        hot=() if warm is None or hottest is None else _hot(point, warm, hottest, powers),
        cooling=None if warm is None or hottest is None else cooling_time(warm, hottest),
        idle=None if warm is None else warm.idle,
        settling=None if warm is None else settling_time(warm),
    )


# Powers ----------------------------------------------------------------------------------------------------


def step_powers(point: OperatingPointRecord, warm: Warmth | None) -> tuple[float, ...]:
    """Return the powers of the carriers [W], the first no more than 5 W, none more than twice the one before.

    The last is what is planned or the ceiling, or less: findings about heat count the mean power of the mode, and these
    carriers are unbroken. Empty where the ceiling is not known, is 0, or leaves something out.

    Parameters
    ----------
    point : the transmission on the sheet
    warm : its conductor; None where it is not known, which no complete ceiling goes with
    """
    most = _most(point)
    top = _floored(_unbroken(point, warm, most))
    return _rising(min(FIRST, top), top) if top > 0.0 else ()


def _most(point: OperatingPointRecord) -> float:
    """Return the most envelope power in the mode as it is keyed [W]; 0 where none is proven."""
    made = point.power_ceiling
    return _floored(min(made.value, point.power)) if made.complete and made.value else 0.0


def _unbroken(point: OperatingPointRecord, warm: Warmth | None, most: float) -> float:
    """Return the most power of carriers of 10 s that heat nothing more than its finding allows [W]."""
    share = point.duty if warm is None else warm.strongest_share
    for finding in point.findings:
        allowed = finding.power_at_margin
        if allowed is None:
            continue
        if _warms_in_seconds(finding.id):
            most = min(most, allowed * share)
        if warm is not None and (finding.id == CONDUCTOR or finding.id.startswith(JOINT)):
            # All steps together may not warm the conductor more than the keying does that the finding allows.
            kept = float(warm.bare.high_at(np.array([allowed / point.power]))[0])
            most = min(most, point.power * _of_carriers(warm.bare, _ALL).power_to(kept))
    return most


def _warms_in_seconds(name: str) -> bool:
    return name == CAPACITOR_HEAT or is_padding_heat(name) or name.startswith(JOINT)


def _of_carriers(warm: Warmth, lasting: float) -> Warmth:
    """Return a conductor that starts idle and carries an unbroken carrier for so long [s]."""
    return replace(warm, duty=1.0, over=lasting, pause=inf, tune_share=0.0, tune_time=0.0)


def _rising(first: float, last: float) -> tuple[float, ...]:
    """Return powers from the first to the last [W], as even as two digits allow and none more than doubled."""
    powers = [first]
    for left in range(ceil(log2(last / first) - 1e-9), 1, -1):
        even = powers[-1] * (last / powers[-1]) ** (1.0 / left)
        low = _floored(even)
        powers.append(low if last <= low * _DOUBLE ** (left - 1) * (1.0 + 1e-9) else even)
    return (*powers, last) if last > first else (first,)


def _floored(power: float) -> float:
    return float(floor_two_digits(power))


def _step(
    point: OperatingPointRecord, power: float, warm: Warmth | None, expansion: float | None, *, tuned: bool
) -> Step:
    share = power / point.power
    # An untuned loop has its volts at the terminals.
    volts = _high(point, "capacitor_peak_voltage" if tuned else "terminal_peak_voltage")
    amps = _high(point, "largest_current")
    return Step(
        power=power,
        volts=None if volts is None else volts * sqrt(share),
        amps=None if amps is None else amps * sqrt(share),
        creep=None if warm is None or expansion is None else _creep(point.frequency, warm, share, expansion),
    )


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
    _, most = frequency_drift(frequency, expansion, warm.rise_of(warm.heat.high * share, CARRIER))
    return abs(float(most))


def _hottest(warm: Warmth, point: OperatingPointRecord, powers: Sequence[float]) -> float | None:
    """Return the conductor's high end after the steps and the longest over [K]; None where nothing holds it."""
    over = warm.temperature().high
    if over is None or over >= RUNS_AWAY:
        return None
    if not powers:
        return over
    one = np.ones(1)
    share = powers[-1] / point.power
    steps = float(_of_carriers(warm, sum(powers) / powers[-1] * CARRIER).high_at(share * one)[0])
    # What the steps leave is never more than added to an over, nor is it hotter than either going on for ever.
    endless = float(replace(warm, over=inf, pause=0.0).high_at(one)[0])
    found = min(over + steps - warm.idle, max(endless, over, steps))
    return None if found >= RUNS_AWAY else found


def _hot(point: OperatingPointRecord, warm: Warmth, hottest: float, powers: Sequence[float]) -> tuple[HotPart, ...]:
    """Return what may burn after steps and over."""
    # An unbroken carrier may heat a joint more than the planned power does in the mode.
    stronger = max(1.0, max(powers, default=0.0) / (point.power * warm.strongest_share))
    after = hottest - (warm.temperature().high or 0.0)
    joints = joint_temperatures(point.findings, warm.air_temperature + max(0.0, after), stronger)
    return hot_parts(hottest, tuple(joints))


def cooling_time(warm: Warmth, hottest: float) -> float | None:
    """Return how long a conductor at `hottest` [K] takes until no touch burns, however long [s], at the worst end.

    None where the section is not known, where air and sun alone keep it hotter than that, or where it melts; 0 where it
    is no hotter.
    """
    least = least_touch().temperature
    if warm.idle < least and hottest <= least:
        return 0.0
    if warm.idle >= least or warm.most_capacity == 0.0 or hottest > CEILING:
        return None
    longest = float(time_to_cool(hottest, least, warm.surface, warm.air, warm.most_capacity).max())
    return longest if isfinite(longest) else None


def settling_time(warm: Warmth) -> float | None:
    """Return how long the conductor takes to come within 5 % of a steady temperature [s]: three time constants."""
    likely = warm.temperature().likely
    if likely is None or likely >= RUNS_AWAY or warm.most_capacity == 0.0:
        return None
    return 3.0 * warm.slowest.time_constant(likely)
