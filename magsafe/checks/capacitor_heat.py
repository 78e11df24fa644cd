"""Does the capacitor stand its own heat?"""

from magsafe import words
from magsafe.analysis.capacitor_heat import heat_of
from magsafe.analysis.capacitor_parts import CHANGE, main_part
from magsafe.analysis.exposure import use_of
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.checks.judge import Check, holds, judge, unproven
from magsafe.checks.sheet import Finding
from magsafe.design.model import Design

_HEAT = Check(
    "capacitor.heat",
    "Does the capacitor stand its own heat?",
    "fit a capacitor with a higher Q or one that may be hotter, or use shorter overs",
    "the dissipation rating as stated; the losses as listed",
    "W",
)
_LOOK = (
    "look on the part and in its data sheet for the RF amps or the watts that it may take, and state rated_current or "
    "rated_dissipation; of one made at home, feel it cold after a long over at little power, transmitter off"
)


def capacitor_heat(design: Design, point: OperatingPoint, current: Finding) -> Finding:
    """Does the capacitor stand its own heat? A rating of its current, where `current` keeps it, counts that."""
    part, made = design.capacitor, point.chain
    if made is None:
        return unproven(_HEAT, "; ".join(point.out_of_range))
    if missing := main_part(point).missing:
        return unproven(_HEAT, missing, do=CHANGE)
    duty = use_of(point.transmission).duty
    keyed = heat_of(made, (made.capacitor,))
    value = keyed.scaled(duty)
    told = f"{words.amount(keyed.high or 0.0, 'W')} at worst, key-down"
    if duty < 1.0:
        told = f"{told}, {words.amount(value.high or 0.0, 'W')} averaged over an over"
    if part.rated_dissipation is not None:
        limit, margin = part.rated_dissipation, design.margins.temperature
        bare = (heat_of(made, (made.capacitor,), "bare").high or 0.0) * duty
        reached = point.power * limit / bare * (1.0 - 1e-12) if bare > 0.0 else None
        found = judge(
            _HEAT,
            value,
            limit,
            margin,
            bare_end=bare,
            power=point.power,
            powers=(None if reached is None else reached / margin, reached),
            provenance="stated in the design",
        )
        said = f"{told}; {found.because}" if duty < 1.0 else found.because
        return found.model_copy(update={"because": said})
    if part.rated_current is None:
        why = f"{told}, and neither capacitor.rated_dissipation nor capacitor.rated_current says what it may take"
        return unproven(_HEAT, why, value, _LOOK)
    if current.verdict in ("clear", "narrow"):
        why = f"{told}; the rating of its current is one of its heat: {current.id} is kept"
        return holds(_HEAT, value, None, why)
    why = f"{told}; the rating of its current is one of its heat, and {current.id} is not kept"
    return unproven(_HEAT, why, value, current.do)
