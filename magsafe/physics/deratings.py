"""What takes a published breakdown voltage down to what may be worked with: one row each, to be printed."""

from dataclasses import dataclass
from math import prod
from typing import Literal

from magsafe.physics.ranges import Range

Evidence = Literal["seen", "memory", "computed", "extrapolated", "common practice"]


@dataclass(frozen=True, slots=True)
class Derating:
    """A factor on the volts (or on what the name says), with what it rests on.

    `evidence`: "seen", the number was read in the source; "memory", recalled from it; "computed", by formulas named in
    the source; "extrapolated", read for other conditions; "common practice", no source is claimed.
    """

    name: str
    factor: float
    source: str
    evidence: Evidence


def product(rows: tuple[Derating, ...]) -> float:
    """Return the product of the factors.

    Parameters
    ----------
    rows : the deratings, any number [1]

    Returns
    -------
    factor [1]; 1 without rows

    Valid     any.
    Source    none.
    """
    return prod(row.factor for row in rows)


RADIO_FREQUENCIES = Range("frequency [Hz]", 0.0, 54e6, "measured at 0.7 and 1.8 MHz, carried on to 54 MHz")

RADIO_FREQUENCY = Derating(
    "radio frequency instead of 50 Hz",
    0.80,
    "Ekstrand, Proc. IRE 28 (1940), abstract: spheres break down 17 to 20 % lower at 0.7 and 1.8 MHz; "
    "no measurement of millimetre gaps above 2 MHz was read, and below 0.7 MHz the same is taken",
    "extrapolated",
)
TRAPPED = Derating(
    "electrons that turn round within the gap",
    1.0,
    "drift of electrons in air (memory): beyond gap times frequency of 3e4 m/s no more than the field where ionisation "
    "ends, 24.2 kV/cm; the factor is that of the gap and frequency",
    "memory",
)
SPACING = Derating("gap narrower than stated, factor on the gap", 0.90, "common practice", "common practice")
SQUARE_CUT = Derating("square-cut edges", 0.70, "common practice: 20 to 30 % lower", "common practice")
WORKING = Derating(
    "working crest over breakdown", 0.50, "common practice: 0.5 to 0.6, for dust, burrs, age", "common practice"
)
ROUGH_SURFACE = Derating("roughness of a handled surface", 0.80, "common practice: 0.8 to 0.9", "common practice")

_AVALANCHES = "avalanche integrals along field lines, tied to the uniform-field fit, against the lower of fit and onset"

# From which plate thickness over gap, thickest first.
FIELD_SHAPE: tuple[tuple[float, Derating], ...] = (
    (0.30, Derating("edge joined to gap, plate at least 0.3 of the gap", 0.93, _AVALANCHES, "computed")),
    (0.20, Derating("edge joined to gap, plate 0.2 to 0.3 of the gap", 0.88, _AVALANCHES, "computed")),
    (0.05, Derating("edge joined to gap, plate 0.05 to 0.2 of the gap", 0.75, _AVALANCHES, "computed")),
)

DERATINGS: tuple[Derating, ...] = (
    SPACING,
    *(row for _, row in FIELD_SHAPE),
    RADIO_FREQUENCY,
    TRAPPED,
    SQUARE_CUT,
    WORKING,
    ROUGH_SURFACE,
)
