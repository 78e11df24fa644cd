"""The electric field on the conductor's surface, from the charge of the solved current."""

from math import pi, sqrt

import numpy as np

from magsafe.analysis.chain import VOLTAGE_ERROR, Chain
from magsafe.analysis.losses import Corner
from magsafe.design.model import Conductor
from magsafe.physics.corona import line_charge_field
from magsafe.spread import Spread


def sharpest_radius(made_of: Conductor) -> float:
    """Return the radius of the conductor's sharpest long edge [m]: of a strip, half of its thickness."""
    if made_of.form == "strip":
        return (made_of.thickness or 0.0) / 2.0
    return (made_of.outer_diameter or 0.0) / 2.0


def surface_field(chain: Chain, radius: float) -> tuple[Spread, float]:
    """Return the crest of the field where the charge is densest [V/m], and its high end without typical credit.

    That of a straight cylinder of a radius [m] with the charge of its segment: continuity of the solved current, whose
    change along the conductor is its charge. A strip's edge, a bend and the end at the capacitor have more.
    """

    def field(end: str, corner: Corner, power: float) -> float:
        flow = corner.state.flow
        segments = flow.segments()
        length = np.linalg.norm(segments.end - segments.start, axis=1)
        change = np.abs(segments.current_end - segments.current_start) / length
        # The port's own segment carries the gap's charge, which sits on its end faces.
        charge = float(change[1:].max()) / (2.0 * pi * chain.frequency)
        crest = sqrt(2.0) * chain.overshoot * chain.current(end, corner, power) * sqrt(corner.growth)
        return float(line_charge_field(charge * crest, radius))

    found = chain.spread(field).widened(VOLTAGE_ERROR, VOLTAGE_ERROR)
    return found, chain.dangerous(field, "bare") * (1.0 + VOLTAGE_ERROR)
