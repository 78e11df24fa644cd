"""Does what is under the loop lie within the range of its methods, and what does it do to the volts?"""

from dataclasses import replace
from math import ceil, sqrt

from magsafe import words
from magsafe.analysis.chain import Chain
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.soil import LOWEST, is_too_low, least_height, radii_up, size_factor
from magsafe.checks.judge import Check, holds, unproven
from magsafe.checks.sheet import Finding
from magsafe.checks.sky import ground_words
from magsafe.design.model import Design
from magsafe.spread import Spread

IMAGE = "the loop and its image in one matrix: Harrington 1968 (memory)"
WORTH_SAYING = 1.02  # by how much the ground raises volts
WORTH_SIZE = 0.005  # by how much a ring differs from a dipole

_CHECK = Check(
    "loop.ground",
    "Is the loop high enough for what the ground takes to be computed?",
    "raise the loop, or have its efficiency measured",
    "Sommerfeld's half-space in plane waves (memory); reference ring and dipole (computed)",
    "1",
    dangerous="low",
)


def ground(design: Design, point: OperatingPoint) -> Finding | None:
    """Is the loop high enough? None in free space, and where no height is stated."""
    height, chain = design.loop.centre_height, point.chain
    if height is None or chain is None or design.ground_name == "none":
        return None
    up, factor = radii_up(design.loop, height), size_factor(design, point.transmission.frequency)
    said = f"{_added(design, point, chain)}{_raised(chain)}"
    if factor is not None and abs(factor - 1.0) >= WORTH_SIZE:
        said += f"; its size makes that {factor:.3g} times what it would be for a dipole"
    if design.ground_name == "perfect":
        image = replace(_CHECK, source=IMAGE)
        return holds(image, Spread.exact(up), None, f"{said}; the loop is solved with its image at any height")
    if not is_too_low(design):
        return holds(_CHECK, Spread.exact(up), LOWEST, said)
    text = (
        f"it is {up:.3g} radii up, nearer to soil than {LOWEST:g}: how soil changes the current there is not computed. "
        f"With the currents of free space and of a perfect plane, {said}"
    )
    least = ceil(10.0 * least_height(design.loop)) / 10.0
    do = f"raise the centre to {least:g} m, or have the efficiency measured"
    return unproven(_CHECK, text, value=Spread.exact(up), limit=LOWEST, do=do)


def _added(design: Design, point: OperatingPoint, chain: Chain) -> str:
    """Return what the ground adds to the resistance, or takes away."""
    added, unit = point.figures.ground_resistance.spread, "m\u03a9" if chain.tuned else "\u03a9"
    if added.likely is None:
        ends = [words.number(end or 0.0, "ohm", unit) for end in (added.low, added.high)]
        return f"any ground there is adds {ends[0]} to {ends[1]} {unit}"
    turned = -1.0 if added.likely < 0.0 else 1.0
    shown = Spread(*sorted(turned * (end or 0.0) for end in (added.low, added.likely, added.high)))
    said = f"{words.amount(shown.likely or 0.0, 'ohm', unit)} {words.ends(shown, 'ohm', unit)}".rstrip()
    return f"{ground_words(design)} {'takes away' if turned < 0.0 else 'adds'} {said}"


def _raised(chain: Chain) -> str:
    """Return by how much the ground at worst raises volts, amps and fields; empty where it does not."""
    if chain.measured is not None:
        return ""
    free = min(chain.resistance("low", corner) for corner in chain.free)
    least = min(chain.resistance("low", corner) for corner in chain.least)
    more = sqrt(free / least)
    if more < WORTH_SAYING:
        return ""
    return f"; at worst it takes resistance away, and volts and amps count {more:.3g} times those of free space"
