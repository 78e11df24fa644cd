"""Can the drive hold the resonance? How far one of its steps moves it, against the width that the loop has."""

from magsafe import words
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.tuning import STEP_SWR, step_width, tuning_rate
from magsafe.checks.judge import Check, judge, unproven
from magsafe.checks.sheet import Finding
from magsafe.design.model import Design

STEPS_IN_WIDTH = 2.0  # steps that the width shall hold: one is then never further from the match than half of it

_STEP = Check(
    "capacitor.tuning_step",
    f"Does one step of the drive stay within half of the width between the points of SWR {STEP_SWR:g}?",
    "use a drive that resolves more steps, a capacitor of a smaller range, or padding",
    "Yaghjian & Best 2005 (memory); steps taken as equal in capacitance, no backlash",
    "Hz",
)


def tuning_step(design: Design, point: OperatingPoint) -> tuple[Finding, ...]:
    """Return whether one step of the drive is fine enough; nothing where the design tells no steps.

    At worst narrow: a loop that is off its resonance radiates less and harms nobody.
    """
    steps, ends = design.tuning.steps_per_range, design.capacitor.capacitance
    if steps is None:
        return ()
    if ends is None:
        return (
            unproven(_STEP, "capacitor.capacitance is not given: what one of steps_per_range changes is not known"),
        )
    if point.chain is None:
        return (unproven(_STEP, "; ".join(point.out_of_range)),)
    step = tuning_rate(point.chain).scaled((ends.max - ends.min) / steps)
    width, bare_width = step_width(point.chain), step_width(point.chain, "bare")
    found = judge(
        _STEP,
        step,
        width,
        STEPS_IN_WIDTH,
        bare_end=(step.high or 0.0) * width / bare_width,
        worst="narrow",
        provenance="computed",
    )
    said = f"one of {steps} equal steps moves the resonance by"
    limit = f"the width at SWR {STEP_SWR:g} is {words.amount(width, 'Hz')} at its narrowest"
    text = found.because.split(": ", 1)[1]
    worst = words.amount(step.high or 0.0, "Hz")
    return (found.model_copy(update={"because": f"{said} {worst} at worst, {limit}: {text}"}),)
