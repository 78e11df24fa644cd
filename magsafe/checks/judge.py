"""The one place where a verdict is born."""

from dataclasses import dataclass
from math import inf, log10
from typing import Literal

from magsafe import words
from magsafe.checks.sheet import Finding, Limit, Value, Verdict
from magsafe.spread import Spread

End = Literal["low", "high"]


@dataclass(frozen=True, slots=True)
class Check:
    """The identity of a check: its id, its question, what to do if it does not hold, its source."""

    id: str
    question: str
    do: str
    source: str
    unit: str
    dangerous: End = "high"
    qualifier: str = ""
    shown: str | None = None


def judge(  # noqa: PLR0913 (each is a fact of its own, named at the call)
    check: Check,
    value: Spread,
    limit: float,
    margin: float,
    *,
    bare_end: float | None = None,
    power: float | None = None,
    powers: tuple[float | None, float | None] | None = None,
    thin: str = "",
    worst: Verdict = "stop",
    provenance: str = "verified",
    place: str | None = None,
) -> Finding:
    """Hold the dangerous end of a figure against a limit.

    Parameters
    ----------
    check : what is asked
    value : the figure, in the check's unit
    limit : what it may reach (for a dangerous high end) or must reach (for a low one)
    margin : ratio between limit and dangerous end that is asked for, 1 or more
    bare_end : the dangerous end without any credit for typical values; only where that keeps the margin too is the
        verdict clear. None: the figure rests on no typical value
    power : the envelope power [W] at which the figure was found, if power changes it
    powers : the envelope powers [W] at which the margin and the limit are reached; None: the figure grows as the root
        of the power
    thin : why the evidence is too thin for `clear`; empty if it is not
    worst : the worst verdict that this check can give
    provenance : what the limit rests on
    place : the name of the place that was judged
    """
    end = value.high if check.dangerous == "high" else value.low
    if end is None:
        return unproven(check, f"the {check.dangerous} end of the figure is not known", value, place=place)
    found = _margin(check.dangerous, end, limit)
    bare = found if bare_end is None else min(found, _margin(check.dangerous, bare_end, limit))
    verdict: Verdict = "stop" if found < 1.0 else "narrow" if bare < margin or thin else "clear"
    if verdict == "stop":
        verdict = worst
    allowed, reached = powers or (_power(power, bare / margin), _power(power, bare))
    text = words.against_limit(value, limit, check.unit, check.dangerous, check.shown, check.qualifier)
    relation = "this is too little" if found < 1.0 and check.dangerous == "low" else _relation(found, bare, margin)
    made = _finding(check, value, verdict, f"{text}: {relation}{f'; {thin}' if thin else ''}", limit)
    return made.model_copy(
        update={
            "place": place,
            "margin_asked": margin,
            "margin_found": None if found == inf else found,
            "do": _do(check, verdict, allowed, power, found >= margin),
            "provenance": provenance,
            "power_at_margin": allowed,
            "power_at_limit": reached,
            "thin": bool(thin),
        }
    )


def _finding(check: Check, value: Spread | None, verdict: Verdict, because: str, limit: float | None) -> Finding:
    """Return a finding that no margin and no power belongs to yet."""
    known = value is not None and value.known
    return Finding(
        id=check.id,
        question=check.question,
        value=_value(value, check.unit) if value is not None and known else None,
        limit=None if limit is None else Limit(value=limit, unit=check.unit),
        margin_asked=None,
        margin_found=None,
        verdict=verdict,
        because=because,
        do="nothing" if verdict == "clear" else check.do,
        source=check.source,
        provenance="none",
    )


def _margin(dangerous: End, end: float, limit: float) -> float:
    if dangerous == "low":
        return end / limit
    return inf if end == 0.0 else limit / end


def in_proportion(power: float, bare_end: float, limit: float, margin: float) -> tuple[float | None, float | None]:
    """Return the powers [W] at which a figure that grows as the power itself keeps a margin, and reaches its limit."""
    if bare_end <= 0.0:
        return None, None
    reached = power * limit / bare_end * (1.0 - 1e-12)
    return reached / margin, reached


def _power(power: float | None, ratio: float) -> float | None:
    """Return the power at which a figure that grows as its root comes to a ratio of 1."""
    if power is None or ratio == inf:
        return None
    # Rounded down by more than the last bit, so that at the power told the margin is kept.
    return power * ratio**2 * (1.0 - 1e-12)


def _do(check: Check, verdict: Verdict, allowed: float | None, power: float | None, kept: bool) -> str:
    """Return what to do: nothing, find better evidence, lower the power, or what the check says."""
    if verdict == "clear":
        return "nothing"
    do = "have what it rests on measured or read at its source, or count it as not proven" if kept else check.do
    if allowed is None or power is None or allowed >= power or allowed == 0.0:
        return do
    return f"lower the power to {words.power(allowed)}, or {do}"


def _relation(found: float, bare: float, margin: float) -> str:
    if found < 1.0:
        return "this exceeds the limit"
    if found < margin:
        return f"this is within, by {found:.3g} times where {margin:.3g} is asked"
    if bare < 1.0:
        return "this is within only by what is typical of its parts, which nobody measured; without that it exceeds"
    if bare < margin:
        return "this is within, but keeps the margin only by what is typical of its parts, which nobody measured"
    return "this is within, with the margin asked for"


def unproven(
    check: Check,
    because: str,
    value: Spread | None = None,
    do: str | None = None,
    limit: float | None = None,
    place: str | None = None,
) -> Finding:
    """Return the finding of a check that lacks something, or lies outside every method's range."""
    made = _finding(check, value, "unproven", because, limit)
    return made.model_copy(update={"do": do or check.do, "place": place})


def judge_between(check: Check, value: Spread, least: float, most: float, *, loose: bool) -> Finding:
    """Hold a whole spread between two ends. No ratio makes sense, so no margin is told.

    Parameters
    ----------
    check : what is asked
    value : the figure
    least, most : the ends it must lie between
    loose : the ends are a tolerance and not a reach: inside them the verdict is narrow
    """
    ends = [end for end in (value.low, value.likely, value.high) if end is not None]
    inside = all(least <= end <= most for end in ends)
    if inside and (value.low is None or value.high is None):
        one = "its ends are" if value.low is None and value.high is None else "one end of what it needs is"
        return unproven(check, f"{one} not known", value)
    verdict: Verdict = "stop" if not inside else "narrow" if loose else "clear"
    name = words.shown_unit(check.unit)
    likely = "" if value.likely is None else f"{words.amount(value.likely, check.unit)} likely, "
    worst = f"{words.number(min(ends), check.unit, name)} to {words.number(max(ends), check.unit, name)} at worst; "
    if value.low is None and value.high is None:
        worst = "more or less at worst; "
    text = f"{likely}{worst}it reaches {words.number(least, check.unit, name)} to {words.amount(most, check.unit)}"
    made = _finding(check, value, verdict, text, most if max(ends) > most else least)
    return made.model_copy(update={"provenance": "stated in the design"})


def judge_reading(
    check: Check,
    reading: float,
    uncertainty: float,
    computed: float,
    *,
    faint: float,
    field: str,
    when: str,
    place: str,
) -> Finding:
    """Hold what an instrument read against the most that is computed. No power changes what they are to each other.

    What an instrument certainly read, its reading over its uncertainty, is the end that is held against the limit.

    Parameters
    ----------
    check : what is asked
    reading : what the instrument read, in the check's unit
    uncertainty : of the instrument, as a ratio of 1 or more
    computed : the most that is computed, which a reading that agrees does not exceed
    faint : the share of `computed` below which a reading is sooner a fault of the instrument: narrow
    field, when, place : what was read, when, and where
    """
    least, decibels = reading / uncertainty, f"{20.0 * log10(uncertainty):.3g} dB"
    verdict: Verdict = "clear"
    because = "it is no stronger than computed"
    if least > computed:
        verdict = "stop"
        because = (
            f"it is stronger than computed by more than the instrument's {decibels}: the model or an input is wrong, "
            "and all distances are too short"
        )
    elif reading > computed:
        verdict = "narrow"
        because = f"it reads higher than computed, by no more than the instrument's {decibels}"
    elif reading < faint * computed:
        verdict = "narrow"
        because = (
            f"it is less than {100.0 * faint:.3g} % of that, which a wrong range, orientation or probe would read too, "
            "and hide a danger"
        )
    text = (
        f"{field} reads {words.amount(reading, check.unit, check.shown, check.qualifier)} {when}, computed at most "
        f"{words.amount(computed, check.unit, check.shown)}"
    )
    made = _finding(check, Spread(least, reading, reading * uncertainty), verdict, f"{text}: {because}", computed)
    return made.model_copy(
        update={
            "place": place,
            "margin_asked": uncertainty,
            "margin_found": computed / least,
            "provenance": "stated in the design",
            "thin": verdict == "narrow",
        }
    )


def holds(check: Check, value: Spread, limit: float | None, because: str) -> Finding:
    """Return the clear finding of a question that is answered by a range and not by a margin."""
    return _finding(check, value, "clear", because, limit).model_copy(update={"provenance": "computed"})


def stopped(check: Check, value: Spread, because: str, do: str) -> Finding:
    """Return the stop of a question that no power changes and no margin belongs to."""
    return _finding(check, value, "stop", because, None).model_copy(update={"do": do, "provenance": "computed"})


def undecided(check: Check, value: Spread, because: str, do: str) -> Finding:
    """Return the narrow finding of a question that harms nobody and lacks what it would be held against."""
    return _finding(check, value, "narrow", because, None).model_copy(update={"do": do})


def _value(spread: Spread, unit: str) -> Value:
    return Value(low=spread.low, likely=spread.likely, high=spread.high, unit=unit)
