"""Whether a rule asks for an evaluation at all: told beside the findings, and never one of them."""

import numpy as np

from magsafe.analysis.exemption import (
    axis_field,
    most_eirp,
    nearest_part,
    threshold_power,
)
from magsafe.analysis.sky import HALF_WAVE_DIPOLE
from magsafe.checks.sheet import ExemptionPlace, ExemptionRecord
from magsafe.checks.view import View
from magsafe.rules.exemption import Exemption
from magsafe.rules.limit import Rule, load_rule

WARNING = (
    "exemption from evaluation is not compliance: the limit still binds; each transmission is held against it by "
    "itself, and what is worked in turn adds up"
)
_TOO_NEAR = "nearer than it holds, so that an evaluation is required"


def exemptions(view: View) -> tuple[ExemptionRecord, ...]:
    """Return what the rules of the site say of evaluation during one transmission. No verdict rests on it."""
    rules = [load_rule(name) for name in view.design.site.rules]
    return tuple(_exemption(view, rule, each) for rule in rules for each in rule.exemptions)


def _exemption(view: View, rule: Rule, exemption: Exemption) -> ExemptionRecord:
    frequency = view.point.transmission.frequency
    time = _window(rule) if exemption.averaged else 0.0
    power, why = _power(view, exemption, time)
    by_distance = exemption.kind == "ERP by distance"
    fixed = None if by_distance else exemption.threshold_at(0.0, frequency)
    nearest = exemption.nearest(frequency)
    if by_distance and exemption.threshold_at(nearest, frequency) is None:
        why = "it has no threshold at this frequency, so that an evaluation is required"
    return ExemptionRecord(
        rule=rule.name,
        jurisdiction=exemption.jurisdiction,
        name=exemption.name,
        kind=exemption.kind,
        power=power,
        averaging_time=time,
        threshold=fixed,
        exempt=None if power is None or fixed is None else exemption.exempts(power, fixed),
        nearest=nearest,
        places=_places(view, exemption, power) if by_distance else (),
        axis_field_ratio=_axis_field_ratio(view, rule, exemption) if by_distance else None,
        warning=WARNING,
        source=exemption.source,
        provenance=exemption.provenance,
        why=why or None,
    )


def _window(rule: Rule) -> float:
    """Return the shortest averaging time of a rule for the public [s], whose mean is the largest."""
    return min((row.averaging_time for row in rule.limits("public") if row.averaged), default=0.0)


def _power(view: View, exemption: Exemption, time: float) -> tuple[float | None, str]:
    """Return what is held against the threshold [W] at its dangerous end, and why it is not known where it is not."""
    power = view.use.judged(time, "always")
    if exemption.kind == "power":
        return power, ""
    eirp = most_eirp(view.point, power)
    if eirp is None:
        figures = view.point.figures
        reason = figures.conductor_efficiency.why or figures.effective_isotropic_radiated_power.why
        return None, f"its gain is not known{f': {reason}' if reason else ''}"
    return (eirp if exemption.kind == "EIRP" else eirp / HALF_WAVE_DIPOLE), ""


def _places(view: View, exemption: Exemption, power: float | None) -> tuple[ExemptionPlace, ...]:
    """Return the threshold at each place of the public."""
    frequency, made = view.point.transmission.frequency, []
    for place in view.design.place:
        if place.who != "public":
            continue
        distance = nearest_part(view.design, view.point, place)
        if distance is None:
            made.append(ExemptionPlace(name=place.name, why="its distance is not known"))
            continue
        threshold = float(threshold_power(exemption, np.array([distance]), frequency)[0])
        if np.isnan(threshold):
            near = distance < exemption.nearest(frequency)
            why = _TOO_NEAR if near else "no threshold at this frequency"
            made.append(ExemptionPlace(name=place.name, distance=distance, exempt=False, why=why))
            continue
        exempt = None if power is None else exemption.exempts(power, threshold)
        made.append(ExemptionPlace(name=place.name, distance=distance, threshold=threshold, exempt=exempt))
    return tuple(made)


def _axis_field_ratio(view: View, rule: Rule, exemption: Exemption) -> float | None:
    """Return the magnetic field over the limit for the public where a threshold is used to the full.

    At the nearest distance at which the threshold holds, out along the loop's own axis, at its ERP, in free space.
    """
    frequency = view.point.transmission.frequency
    distance = exemption.nearest(frequency)
    erp = exemption.threshold_at(distance, frequency)
    rows = [row for row in rule.limits("public") if row.field == "magnetic" and row.averaged]
    limits = [limit for row in rows if (limit := row.at(frequency)) is not None]
    field = None if erp is None else axis_field(view.point, erp, distance)
    return None if field is None or not limits else field / min(limits)
