"""Where the power goes, and what height and plane do to it, as records of the sheet: in no verdict and no ceiling."""

from math import degrees

import numpy as np

from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.placing import Placing, placings
from magsafe.analysis.sky import CUT_ANGLES, OVERHEAD, Direction
from magsafe.checks.sheet import LobeRecord, PatternCut, PatternRecord, PlacingRecord
from magsafe.design.model import Design, SoilConstants


def pattern_record(design: Design, point: OperatingPoint) -> PatternRecord | None:
    """Return the pattern of a transmission; None in free space, and where ground or height is not stated."""
    found = point.pattern
    if found is None:
        return None
    sides = _sides(design)
    angles = tuple(float(each) for each in np.degrees(CUT_ANGLES).round(6))
    return PatternRecord(
        ground=ground_words(design),
        method="direct and reflected wave (Fresnel) of the solved current over flat, even ground, all losses counted",
        cuts=tuple(
            PatternCut(name=name, towards=near, away=far, angle=angles, gain=tuple(float(each) for each in cut.gain))
            for cut, (name, near, far) in zip(found.cuts, sides, strict=True)
        ),
        lobes=tuple(_lobe(lobe, sides[0 if lobe.azimuth == 0.0 else 1]) for lobe in found.lobes),
    )


def _sides(design: Design) -> tuple[tuple[str, str, str], tuple[str, str, str]]:
    """Return what the cuts along x and y are called, and their two sides."""
    at_side = design.loop.plane == "horizontal" or design.capacitor.position == "side"
    plane = ("the capacitor's side", "the far side") if at_side else ("positive in_plane", "negative in_plane")
    if design.loop.plane == "horizontal":
        return ("along in_plane", *plane), ("across", "positive across", "negative across")
    return ("along the axis", "positive along_axis", "negative along_axis"), ("in the loop's plane", *plane)


def _lobe(lobe: Direction, sides: tuple[str, str, str]) -> LobeRecord:
    name, near, far = sides
    side = "both sides" if lobe.near and lobe.far else near if lobe.near else far
    return LobeRecord(
        cut=name,
        side="overhead" if lobe.elevation >= OVERHEAD else side,
        elevation=degrees(lobe.elevation),
        gain=lobe.gain,
        strength=lobe.strength,
    )


def ground_words(design: Design) -> str:
    """Return the ground as it is told beside what rests on it."""
    stated = design.site.ground
    if isinstance(stated, SoilConstants):
        siemens, permittivity = stated.conductivity.likely, stated.permittivity.likely
        return f"soil of {1e3 * siemens:.3g} mS/m, relative permittivity {permittivity:.3g}"
    if stated == "perfect":
        return "a perfect plane"
    return f"{stated} as likely" if str(stated).endswith("water") else f"{stated} ground as likely"


def placing_records(design: Design, point: OperatingPoint) -> tuple[PlacingRecord, ...]:
    """Return the loop as designed, then at other heights and in the other plane."""
    made = () if point.chain is None else placings(design, point.chain)
    return tuple(_placing(each, made[0]) for each in made)


def _placing(made: Placing, designed: Placing) -> PlacingRecord:
    whole = made.efficiency
    return PlacingRecord(
        plane=made.plane,
        centre_height=made.height,
        as_designed=made.as_designed,
        overall_efficiency=whole,
        change=_over(whole, designed.efficiency),
        low_angle_change=_over(float(made.sky[0]), float(designed.sky[0])),
        share_above_60_degrees=float(made.sky[2]) / whole,
        share_below_20_degrees=float(made.sky[0]) / whole,
        capacitor_peak_voltage=made.voltage,
    )


def _over(value: float, reference: float) -> float | None:
    return value / reference if reference > 0.0 else None
