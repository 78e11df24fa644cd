"""How hot do conductor and joints get, and how far does the warmth move the resonance?"""

from collections.abc import Iterator
from math import inf

import numpy as np
from scipy.constants import zero_Celsius

from magsafe import words
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.warmth import RUNS_AWAY, JointWarmth, Warmth, expansion_of, joint_warmth
from magsafe.checks.judge import Check, judge, stopped, unproven
from magsafe.checks.sheet import Finding
from magsafe.design import warmth_tables
from magsafe.design.model import Conductor, Design, Joint
from magsafe.design.warmth_tables import Softening
from magsafe.physics.heat import frequency_drift
from magsafe.spread import Spread

CONDUCTOR, JOINT = "conductor.temperature", "joint.heat."  # id of a finding, and what those of joints begin with
_TEMPERATURE = Check(
    CONDUCTOR,
    "How hot does the conductor get by the end of the longest over?",
    "use shorter overs or a thicker conductor, paint it, or keep it out of the sun",
    "Churchill & Chu 1975 by the ht library; finishes and temperatures as listed",
    "K",
    shown="K",
    qualifier="over the air",
)
_DRIFT = Check(
    "loop.drift",
    "Does the resonance stay within the points of SWR 2 while the conductor warms?",
    "retune during the over, use shorter overs, or a thicker conductor",
    "thermal expansion of the conductor alone",
    "Hz",
    shown="kHz",
)
_DO_JOINT = "solder or braze it with a wide lap, clean it, or press it harder"
_LASTING = 1.0 - 1e-9  # of an allowed power, so that at the power told the margin is kept


def heat(design: Design, point: OperatingPoint) -> tuple[Finding, ...]:
    """Return the findings about warmth: conductor, each group of joints, drift."""
    if point.chain is None or point.warmth is None:
        why = "; ".join(point.out_of_range)
        tuned = [unproven(_DRIFT, why)] if design.capacitor.kind != "none" else []
        unknown = [unproven(_joint_check(joint), why) for joint in design.loop.joint]
        return (unproven(_TEMPERATURE, why), *unknown, *tuned)
    joints = joint_warmth(point.chain, design, point.warmth)
    return (
        _temperature(design, point, point.warmth),
        *(_joint(point, point.warmth, each, design.margins.temperature) for each in joints),
        *([_drift(design, point, point.warmth)] if design.capacitor.kind != "none" else []),
    )


# Conductor -------------------------------------------------------------------------------------------------


def _temperature(design: Design, point: OperatingPoint, warm: Warmth) -> Finding:
    least = min(_limits(design), key=lambda each: each.temperature)
    air = warm.air_temperature
    found, bare = warm.temperature(), float(warm.bare.high_at(np.ones(1))[0])
    allowed = least.temperature - air
    hottest = found.high or 0.0
    low, likely = (None if end is None else end - air for end in (found.low, found.likely))
    if allowed <= 0.0:
        said = f"the air alone is as warm as {least.name} may be, {_celsius(least)}"
        return stopped(_TEMPERATURE, Spread(low, likely, None), said, "wait for cooler air")
    margin, softest = design.margins.temperature, _softest_unknown(design)
    kept = air + allowed / margin
    # Above the softest plastic that may hold it nothing is clear, so no power there is.
    kept = kept if softest is None else min(kept, softest.temperature)
    reached = [warm.bare.power_to(kept), warm.bare.power_to(air + allowed)]
    finding = judge(
        _TEMPERATURE,
        Spread(low, likely, hottest - air),
        allowed,
        margin,
        bare_end=bare - air,
        power=point.power,
        powers=(point.power * reached[0] * _LASTING, point.power * reached[1] * _LASTING),
        thin="" if softest is None or bare <= softest.temperature else _unsupported(softest),
        provenance=least.provenance,
    )
    limit = f"the limit is {_celsius(least)} ({least.name}, {least.provenance})"
    if hottest == RUNS_AWAY:
        return _runs_away(finding, f"nothing keeps it at a temperature, in air of {_degrees(air)}; {limit}")
    said = f"{_degrees(hottest)} at worst in air of {_degrees(air)}; {limit}"
    return finding.model_copy(update={"because": f"{said}: {finding.because}"})


def _runs_away(finding: Finding, because: str) -> Finding:
    """Return a stop without the figure of what has none."""
    known = None if finding.value is None else finding.value.model_copy(update={"likely": None, "high": None})
    return finding.model_copy(update={"because": because, "value": known, "margin_found": None})


def _limits(design: Design) -> Iterator[Softening]:
    """Yield what gives way when the conductor gets warm."""
    yield warmth_tables.standing()[_metal(design.loop.conductor)]
    if any(joint.kind == "soldered lap" for joint in design.loop.joint):
        yield warmth_tables.solders()["tin-lead"]
    yield from (warmth_tables.plastics()[name] for name in design.loop.supports or [])


def _metal(made_of: Conductor) -> str:
    name = made_of.material or ""
    light, hard = name.startswith("aluminium"), name.startswith("stainless")
    return "aluminium" if light else "stainless steel" if hard else "copper and its alloys"


def _softest_unknown(design: Design) -> Softening | None:
    """Return the softest plastic, which may hold the loop; None where the design says what holds it."""
    if design.loop.supports is not None:
        return None
    return min(warmth_tables.plastics().values(), key=lambda each: each.temperature)


def _unsupported(softest: Softening) -> str:
    return (
        f"what holds the conductor is not stated in loop.supports, and {softest.name} gives way at {_celsius(softest)}"
    )


def _degrees(kelvin: float) -> str:
    return f"{kelvin - zero_Celsius:.0f} degC"


def _celsius(row: Softening) -> str:
    return _degrees(row.temperature)


# Joints ----------------------------------------------------------------------------------------------------


def _joint_check(joint: Joint) -> Check:
    return Check(
        f"{JOINT}{words.slug(joint.name)}",
        f"How hot does a joint of {joint.name} get?",
        _DO_JOINT,
        "fin of infinite length (Incropera & DeWitt, memory); temperatures as listed",
        "K",
        shown="K",
        qualifier="over the air",
    )


def _joint(point: OperatingPoint, warm: Warmth, found: JointWarmth, margin: float) -> Finding:
    """Return how hot one joint gets: the conductor beside it at its hottest, and its own heat led away along that."""
    check, joint, air = _joint_check(found.joint), found.joint, warm.air_temperature
    watts = words.amount((found.heat.high or 0.0) * warm.strongest_share, "W")
    if found.resistance is None:
        return unproven(check, f"up to {watts} in one joint; how much metal leads that away is not stated")
    row = _standing(joint)
    allowed = row.temperature - air
    conductor = warm.temperature()
    if allowed <= 0.0:
        said = f"the air alone is as warm as a joint may be, {_celsius(row)} ({row.name})"
        return stopped(check, Spread(None, None, None), said, "wait for cooler air")
    rise = found.resistance * warm.strongest_share
    low, likely, high = (
        None if along is None or own is None else along - air + rise * own
        for along, own in zip(
            (conductor.low, conductor.likely, conductor.high),
            (found.spot.low, found.spot.likely, found.spot.high),
            strict=True,
        )
    )
    beside, poor = rise * found.bare_spot, rise * found.poor_spot
    alone = float(warm.bare.high_at(np.ones(1))[0]) - air
    # Where nobody measured it, only what a joint ten times as bad would bear is clear, and no power above that.
    typical = joint.kind if joint.resistance is None else ""
    reached = [
        warm.bare.power_to(air + allowed / margin, poor if typical else beside),
        warm.bare.power_to(air + allowed, beside),
    ]
    finding = judge(
        check,
        Spread(low, likely, high),
        allowed,
        margin,
        bare_end=alone + beside,
        power=point.power,
        powers=(point.power * reached[0] * _LASTING, point.power * reached[1] * _LASTING),
        thin=f"one ten times as bad as is typical of a {typical} would exceed, and nobody measured it"
        if typical and (alone + poor) * margin > allowed
        else "",
        provenance=row.provenance,
    )
    spot = words.amount((found.spot.high or 0.0) * warm.strongest_share, "W")
    together = "" if spot == watts else f", {spot} where they meet"
    limit = f"the limit is {_celsius(row)} ({row.name}, {row.provenance})"
    if conductor.high == RUNS_AWAY:
        return _runs_away(finding, f"up to {watts} in one joint, and the conductor beside it runs away; {limit}")
    said = f"up to {watts} in one joint{together}, {_degrees(air + (high or 0.0))} at worst; {limit}"
    return finding.model_copy(update={"because": f"{said}: {finding.because}"})


def _standing(joint: Joint) -> Softening:
    """Return what a joint stands; of a kind that is not stated, what the one that stands least does."""
    if joint.kind == "soldered lap":
        return warmth_tables.solders()["tin-lead"]
    return warmth_tables.standing()[joint.kind or "sliding contact"]


# Drift -----------------------------------------------------------------------------------------------------


def _drift(design: Design, point: OperatingPoint, warm: Warmth) -> Finding:
    """Return how far the resonance moves in the longest over. At worst narrow: to be off resonance harms nobody."""
    width = point.figures.swr2_bandwidth.spread
    expansion = expansion_of(design.loop.conductor)
    hottest, likely = warm.temperature().high or 0.0, warm.temperature().likely or 0.0
    if width.low is None or expansion is None or hottest == RUNS_AWAY:
        return unproven(_DRIFT, "the bandwidth or the conductor's warmth is not known")
    frequency = point.transmission.frequency
    least, _ = frequency_drift(frequency, expansion, max(0.0, likely - warm.likely_idle))
    _, worst = frequency_drift(frequency, expansion, max(0.0, hottest - warm.idle))
    # What the sun has heated already loses more, so that the hotter end may rise by less.
    most = max(abs(float(least)), abs(float(worst)))
    found = Spread(None, abs(float(least)), most)
    finding = judge(_DRIFT, found, width.low / 2.0, 1.0, worst="narrow", provenance="computed")
    after = "an over without end" if warm.over == inf else f"{words.duration(warm.over)} of transmitting"
    moved, between = words.amount(most, "Hz"), words.amount(width.low, "Hz")
    said = f"after {after} it has moved down by up to {moved}, of {between} between the points of SWR 2"
    if design.loop.conductor.material is None:
        said = f"{said}; no metal is stated, so the one that expands most is taken"
    return finding.model_copy(update={"because": f"{said}: {finding.because.partition(': ')[2]}"})
