"""Does the capacitor stand its own heat?"""

from collections.abc import Sequence

from magsafe import words
from magsafe.analysis.capacitor_heat import heat_of
from magsafe.analysis.capacitor_parts import CHANGE, PartUse, main_part
from magsafe.analysis.exposure import use_of
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.rated_current import beyond_rated_air, uncounted_heat
from magsafe.checks.judge import Check, holds, in_proportion, judge, unproven
from magsafe.checks.sheet import Finding
from magsafe.design.model import Capacitor, Design, Padding, SeriesCapacitor
from magsafe.spread import Spread

CAPACITOR_HEAT = "capacitor.heat"  # id of the finding
_HEAT = Check(
    CAPACITOR_HEAT,
    "Does the capacitor stand its own heat?",
    "fit a capacitor with a higher Q or one that may be hotter, or use shorter overs",
    "the dissipation rating as stated; the losses as listed",
    "W",
)
_LOOK = (
    "look on the part and in its data sheet for the RF amps, their frequency, the kVA or the watts that it may take, "
    "and state rated_current with rated_current_at, rated_reactive_power or rated_dissipation; of one made at home, "
    "feel it cold after a long over at little power, transmitter off"
)


def capacitor_heat(design: Design, point: OperatingPoint, current: Finding, reactive: Sequence[Finding]) -> Finding:
    """Does the capacitor stand its own heat? `current` and `reactive` judge the ratings that may count that."""
    if point.chain is None:
        return unproven(_HEAT, "; ".join(point.out_of_range))
    losses = (point.chain.capacitor,)
    heats = heat_of(point.chain, losses), heat_of(point.chain, losses, "bare").high or 0.0
    return heat_of_part(_HEAT, design, point, (design.capacitor, main_part(point), heats), (current, *reactive))


def heat_of_part(
    check: Check,
    design: Design,
    point: OperatingPoint,
    of: tuple[Capacitor | Padding | SeriesCapacitor, PartUse, tuple[Spread, float]],
    others: Sequence[Finding],
) -> Finding:
    """Hold the heat in one part against its watts, or tell which of its other ratings counts it.

    Such a rating is judged by a finding of its own, with its own power, so that this one does not depend on the power.

    Parameters
    ----------
    check : what is asked
    design, point : the design, and the transmission, which is computed
    of : the part, what it sees, and its heat, key-down: the spread, and its high end without credit for typical losses
    others : the finding about its current, and that about its reactive power if there is one
    """
    (part, use, (keyed, bare_keyed)), made = of, point.chain
    if made is None or use.missing:
        return unproven(check, use.missing or "; ".join(point.out_of_range), do=CHANGE if use.missing else None)
    keying = use_of(point.transmission)
    duty = max(keying.duty, keying.tune_up_power / keying.envelope)
    value = keyed.scaled(duty)
    told = f"{words.amount(keyed.high or 0.0, 'W')} at worst, key-down"
    if duty < 1.0:
        told = f"{told}, {words.amount(value.high or 0.0, 'W')} averaged over an over"
    if part.rated_dissipation is not None:
        bare = bare_keyed * duty
        thin = dict.fromkeys(filter(None, (_guessed(part), use.thin_voltage, use.thin_current)))
        found = _by_watts(check, design, point, (value, bare), part.rated_dissipation, tuple(thin))
        said = f"{told}; {found.because}" if duty < 1.0 else found.because
        return found.model_copy(update={"because": said})
    return _by_others(check, value, told, uncounted_heat(part, made.frequency), others)


def _by_watts(
    check: Check,
    design: Design,
    point: OperatingPoint,
    heat: tuple[Spread, float],
    limit: float,
    thin: tuple[str, ...],
) -> Finding:
    (value, bare), margin = heat, design.margins.temperature
    return judge(
        check,
        value,
        limit,
        margin,
        bare_end=bare,
        power=point.power,
        powers=in_proportion(point.power, bare, limit, margin),
        thin="; ".join(filter(None, (*thin, beyond_rated_air(design)))),
        provenance="stated in the design",
    )


def _guessed(part: Capacitor | Padding | SeriesCapacitor) -> str:
    """Return whether nothing that is stated bounds what a part loses, in words; empty where something does."""
    resistance = part.series_resistance if isinstance(part, Capacitor) else None
    if part.quality_factor is not None or resistance is not None:
        return ""
    return "what it loses at worst is not stated, and taken as is usual (common practice)"


def _by_others(check: Check, value: Spread, told: str, uncounted: str, others: Sequence[Finding]) -> Finding:
    """Return what becomes of heat that no rating of watts is stated for."""
    current, *reactive = others
    counting = [*(() if uncounted else (current,)), *reactive]
    judged = [each for each in counting if each.verdict != "unproven"]
    if judged:
        by = " and ".join(each.id for each in judged)
        rating = "current" if judged[0] is current else "reactive power"
        return holds(check, value, None, f"{told}; its rating of {rating} counts its heat: see {by}, which judges it")
    why = uncounted or f"{current.id}, which would count it, is unproven"
    return unproven(check, f"{told}, and nothing says what it may take: no rated_dissipation; {why}", value, _LOOK)
