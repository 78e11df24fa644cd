"""How a conductor or a part warms while it is keyed and cools while it is not."""

from collections.abc import Callable

import numpy as np

from magsafe.physics.arrays import Array, Values
from magsafe.physics.heat import (
    CEILING,
    ElectricHeat,
    Surface,
    Surroundings,
    absorbed_sunshine,
    lost_heat,
    steady_temperature,
)

_RELATIVE, _ABSOLUTE = 1e-8, 1e-7  # of the solver, on temperature over that of the air [K]
_CLOSE_ENOUGH = 1e-5  # K
_MOST_STEPS = 60
_COOLING_STEPS = 400  # between two temperatures, even in the logarithm of what is left to cool


def heat_capacity_per_metre(section: Values, density: Values, specific_heat: Values) -> Array:
    """Return the heat that warms a metre of conductor by one kelvin.

    Parameters
    ----------
    section : area of metal in the cross-section [m2], shape (...)
    density : density of the metal [kg/m3], broadcast
    specific_heat : heat capacity of the metal [J/(kg K)], broadcast

    Returns
    -------
    heat capacity per metre [J/(m K)], broadcast shape

    Valid     one metal; heat crosses the section at once, which it does in well under a second.
    Source    definition.
    """
    return np.asarray(np.asarray(section) * density * specific_heat)


def temperature_after(
    duration: Values,
    start: Values,
    heat: ElectricHeat,
    surface: Surface,
    surroundings: Surroundings,
    heat_capacity: Values,
) -> Array:
    """Return the temperature of a conductor after it has been keyed, or left to cool with a heat of 0.

    Parameters
    ----------
    duration : time [s], 0 or more, finite, shape (...)
    start : temperature at its beginning [K], up to `CEILING`, broadcast
    heat : heat of the current, a mean over times much shorter than those of the warming [W/m], broadcast
    surface : outside of the conductor [m, 1], broadcast
    surroundings : air and sun [K, Pa, W/m2], broadcast
    heat_capacity : per metre [J/(m K)], above 0, broadcast

    Returns
    -------
    temperature [K], broadcast shape; inf above `CEILING`

    Raises
    ------
    ValueError : a duration, a start or a heat capacity out of those ranges

    Valid     as `steady_temperature`; the plume as in steady state, which it reaches in seconds.
    Source    conservation of energy.
    """
    _refuse_times(duration, 0.0)
    ends = _warmed(np.ones(1), duration, start, heat, surface, surroundings, heat_capacity)
    return np.asarray(np.where(ends[0] > CEILING, np.inf, ends[0]))


def time_to_cool(
    start: Values, end: Values, surface: Surface, surroundings: Surroundings, heat_capacity: Values
) -> Array:
    """Return how long a conductor without current takes to cool from one temperature to another.

    Parameters
    ----------
    start : temperature at its beginning [K], up to `CEILING`, shape (...)
    end : temperature to cool to [K], broadcast
    surface : outside of the conductor [m, 1], broadcast
    surroundings : air and sun [K, Pa, W/m2], broadcast
    heat_capacity : per metre [J/(m K)], above 0, broadcast

    Returns
    -------
    time [s], broadcast shape; 0 where it starts no warmer, inf where air and sun alone keep it as warm as the end

    Raises
    ------
    ValueError : a start or a heat capacity out of those ranges

    Valid     as `temperature_after`, of which it is the inverse.
    Source    conservation of energy: the capacity over the heat lost, summed over temperature.
    """
    _refuse_start(start)
    _refuse_capacity(heat_capacity)
    sun = absorbed_sunshine(surface, surroundings)
    idle = steady_temperature(ElectricHeat(0.0, 0.0), surface, surroundings)
    first, last, idle, _ = np.broadcast_arrays(start, end, idle, heat_capacity)
    reached, cools = last > idle, first > last
    idle = np.where(reached, idle, 0.0)
    left = np.where(reached, last - idle, 1.0)
    # A body that loses in proportion takes as long for every step of the logarithm.
    steps = np.linspace(np.log(left), np.log(np.where(reached & cools, first - idle, left)), _COOLING_STEPS)
    lost = np.where(reached, lost_heat(idle + np.exp(steps), surface, surroundings) - sun, 1.0)
    reached = reached & (lost > 0.0).all(axis=0)
    paces = heat_capacity * np.exp(steps) / np.where(lost > 0.0, lost, 1.0)
    taken = np.sum(0.5 * (paces[1:] + paces[:-1]) * np.diff(steps, axis=0), axis=0)
    return np.asarray(np.where(reached, taken, np.where(cools, np.inf, 0.0)))


def temperature_history(
    times: Array,
    over: float,
    pause: float,
    start: Values,
    heat: ElectricHeat,
    surface: Surface,
    surroundings: Surroundings,
    heat_capacity: Values,
) -> Array:
    """Return the temperature of a conductor at times in a row of overs and pauses that begins with an over.

    Parameters
    ----------
    times : since the first key-down [s], rising, 0 or more, shape (K,)
    over : length of each transmission [s], above 0
    pause : length of each pause [s], 0 or more
    start : temperature at key-down [K], up to `CEILING`, shape (...)
    heat : heat while keyed [W/m], broadcast
    surface : outside of the conductor [m, 1], broadcast
    surroundings : air and sun [K, Pa, W/m2], broadcast
    heat_capacity : per metre [J/(m K)], above 0, broadcast

    Returns
    -------
    temperature [K], shape (K, ...); inf above `CEILING`, and ever after

    Raises
    ------
    ValueError : times that are negative or do not rise, an over or pause out of its range, and as `temperature_after`

    Valid     as `temperature_after`.
    Source    conservation of energy.
    """
    asked = np.asarray(times, dtype=np.float64)
    if (
        asked.ndim != 1
        or not len(asked)
        or not (np.isfinite(asked).all() and asked[0] >= 0.0 and (np.diff(asked) > 0.0).all())
    ):
        raise ValueError("times must be finite, 0 or more, and each later than the one before")
    _refuse_times(over, np.nextafter(0.0, 1.0))
    _refuse_times(pause, 0.0)
    silence = ElectricHeat(np.zeros_like(np.asarray(heat.at_20)), heat.coefficient, heat.exponent)
    now, keyed = 0.0, True
    temperature: Values = start
    lost: Array | bool = False
    parts: list[Array] = []
    while now < asked[-1] or not parts:
        length = over if keyed else pause
        inside = asked[((asked > now) | (now == 0.0)) & (asked <= now + length)]
        if length > 0.0:
            shares = np.minimum((inside - now) / length, 1.0)
            shares = shares if len(shares) and shares[-1] == 1.0 else np.append(shares, 1.0)
            found = _warmed(
                shares, length, temperature, heat if keyed else silence, surface, surroundings, heat_capacity
            )
            gone = np.logical_or.accumulate(found > CEILING, axis=0) | lost
            parts.append(np.where(gone, np.inf, found)[: len(inside)])
            lost, temperature = gone[-1], np.minimum(found[-1], CEILING)
        now, keyed = now + length, not keyed
    return np.concatenate(parts)


def repeated_over_temperature(
    over: Values,
    pause: Values,
    heat: ElectricHeat,
    surface: Surface,
    surroundings: Surroundings,
    heat_capacity: Values,
) -> Array:
    """Return the temperature at the end of an over after ever so many overs and pauses.

    Parameters
    ----------
    over : length of each transmission [s], above 0, finite, shape (...)
    pause : length of each pause [s], 0 or more, finite, broadcast
    heat : heat while keyed [W/m], broadcast
    surface : outside of the conductor [m, 1], broadcast
    surroundings : air and sun [K, Pa, W/m2], broadcast
    heat_capacity : per metre [J/(m K)], above 0, broadcast

    Returns
    -------
    temperature [K], broadcast shape, the highest that such a row reaches; inf where that is above `CEILING`

    Raises
    ------
    ValueError : an over, a pause or a heat capacity out of those ranges

    Valid     as `temperature_after`; never above `steady_temperature`, which it is without a pause.
    Source    conservation of energy: the state that an over and a pause bring back.
    """
    _refuse_times(over, np.nextafter(0.0, 1.0))
    _refuse_times(pause, 0.0)
    silence = ElectricHeat(np.zeros_like(np.asarray(heat.at_20)), heat.coefficient, heat.exponent)
    conductor = (surface, surroundings, heat_capacity)

    def next_end(end: Array) -> Array:
        cooled = _warmed(np.ones(1), pause, end, silence, *conductor)[0]
        return np.asarray(_warmed(np.ones(1), over, cooled, heat, *conductor)[0])

    key_down = steady_temperature(heat, surface, surroundings)
    idle = steady_temperature(silence, surface, surroundings)
    high = np.minimum(key_down, CEILING)
    shape = next_end(high).shape
    found = _fixed_point(next_end, np.broadcast_to(idle, shape), np.broadcast_to(high, shape))
    found = np.where(np.asarray(pause) == 0.0, key_down, found)
    return np.asarray(np.where(found >= CEILING, np.inf, found))


def _refuse_times(times: Values, least: float) -> None:
    if not np.all(np.isfinite(times) & (np.asarray(times) >= least)):
        raise ValueError(f"times must be finite and {'0 or more' if least == 0.0 else 'above 0'}")


def _refuse_start(start: Values) -> None:
    if not np.all((np.asarray(start) > 0.0) & (np.asarray(start) <= CEILING * (1.0 + 1e-9))):
        raise ValueError(f"a start must be between 0 and {CEILING:g} K")


def _refuse_capacity(heat_capacity: Values) -> None:
    if not np.all(np.isfinite(heat_capacity) & (np.asarray(heat_capacity) > 0.0)):
        raise ValueError("a heat capacity must be above 0")


def _warmed(
    shares: Array,
    duration: Values,
    start: Values,
    heat: ElectricHeat,
    surface: Surface,
    surroundings: Surroundings,
    heat_capacity: Values,
) -> Array:
    """Return the temperatures after shares of the duration [1], rising, the last 1; shape (shares, ...)."""
    _refuse_capacity(heat_capacity)
    _refuse_start(start)
    sun = absorbed_sunshine(surface, surroundings)
    air = np.asarray(surroundings.temperature, dtype=np.float64)
    shape = np.broadcast_shapes(
        np.shape(duration), np.shape(start), np.shape(heat.at(air) + lost_heat(air, surface, surroundings) + sun),
        np.shape(heat_capacity),
    )  # fmt: skip
    pace = np.asarray(duration) / heat_capacity

    def warming(_: float, rises: Array) -> Array:
        temperature = air + rises.reshape(shape)
        gain = heat.at(temperature) + sun - lost_heat(temperature, surface, surroundings)
        return np.asarray(np.broadcast_to(pace * gain, shape)).ravel()

    first = np.broadcast_to(np.asarray(start) - air, shape).ravel()
    # No element knows of another: the Jacobian has its diagonal only.
    from scipy.integrate import solve_ivp  # noqa: PLC0415  (slow to import, and a check does not need it)

    run = solve_ivp(
        warming, (0.0, 1.0), first, method="LSODA", t_eval=shares, rtol=_RELATIVE, atol=_ABSOLUTE, lband=0, uband=0
    )
    if not run.success:
        raise ArithmeticError(f"the warming could not be followed: {run.message}")
    return np.asarray(air + run.y.T.reshape((len(shares), *shape)))


def _fixed_point(step: Callable[[Array], Array], low: Array, high: Array) -> Array:
    """Return where step(x) = x between ends that it moves inwards: regula falsi with Illinois' halving."""
    below, above = step(low) - low, step(high) - high
    found, side = high, np.zeros(high.shape)
    for _ in range(_MOST_STEPS):
        width = below - above
        # Where it moves the upper end further up, there is no such point, and the clip leaves that end.
        between = low + (high - low) * np.clip(below / np.where(width > 0.0, width, np.inf), 0.0, 1.0)
        before, found = found, np.where(width > 0.0, between, high)
        if np.all(np.abs(found - before) < _CLOSE_ENOUGH):
            break
        moved = step(found) - found
        rises = moved > 0.0
        # An end that stays a second time is given half its weight, or it would stay for good.
        above = np.where(rises, np.where(side > 0.0, 0.5 * above, above), moved)
        below = np.where(rises, moved, np.where(side < 0.0, 0.5 * below, below))
        low, high = np.where(rises, found, low), np.where(rises, high, found)
        side = np.where(rises, 1.0, -1.0)
    return np.asarray(found)
