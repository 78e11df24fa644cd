"""Patterns for tests: a loop over soil, its records made from the far field of its current."""

from functools import cache
from math import pi
from typing import Literal

import numpy as np
from scipy.constants import c

from magsafe.checks.sheet import (
    DesignRecord,
    FigureRecord,
    LobeRecord,
    OperatingPointRecord,
    PatternCut,
    PatternRecord,
    PlacingRecord,
    PowerCeiling,
    Sheet,
)
from magsafe.physics import half_space
from magsafe.physics.far_field import FarField
from magsafe.physics.ground_pattern import GroundPattern
from magsafe.physics.near_field import SegmentCurrents

METHOD = "far field of the solved current over flat soil, reflected as plane waves are"
SIDES = {
    "vertical": (
        ("In the plane of the loop", "towards the capacitor", "away from the capacitor"),
        ("On the axis of the loop", "along the axis", "against the axis"),
    ),
    "horizontal": (
        ("Upright through the capacitor", "towards the capacitor", "away from the capacitor"),
        ("Upright across it", "across, one way", "across, the other way"),
    ),
}
Plane = Literal["vertical", "horizontal"]


@cache
def loop_over_soil(frequency: float, height: float, plane: Plane, diameter: float = 1.0) -> tuple[GroundPattern, float]:
    """Return the pattern of a round loop of one ampere over average soil, and its power in free space."""
    angle = 2.0 * pi / 48 * np.arange(49)
    first, second, rest = 0.5 * diameter * np.cos(angle), 0.5 * diameter * np.sin(angle), np.zeros(49)
    corners = np.column_stack([rest, first, second + height] if plane == "vertical" else [first, second, rest + height])
    corners[-1] = corners[0]
    # The current of a loop tuned opposite its middle: a little more there than at the capacitor.
    wavenumber = 2.0 * pi * frequency / c
    current = np.cos(0.5 * wavenumber * diameter * (pi - np.abs(angle - pi))) + 0j
    segments = SegmentCurrents(corners[:-1], corners[1:], current[:-1], current[1:], 5e-3)
    soil = complex(half_space.relative_permittivity(13.0, 5e-3, frequency))
    return GroundPattern.of(segments, frequency, soil), FarField.of(segments, frequency).power


@cache
def pattern_record(
    frequency: float, height: float, plane: Plane, efficiency: float, step: float = 1.0
) -> PatternRecord:
    """Return the records of a loop that sends that share of its power into free space."""
    made, sent = loop_over_soil(frequency, height, plane)
    power = sent / efficiency
    up, around = made.strongest()
    most = float(made.intensity(np.array([up]), np.array([around]))[0])
    cuts, lobes = [], []
    for (name, towards, away), azimuth in zip(SIDES[plane], (0.5 * pi, 0.0), strict=True):
        angle = np.arange(0.0, 180.0 + 0.5 * step, step)
        over = angle > 90.0
        elevation = np.radians(np.where(over, 180.0 - angle, angle))
        gain = made.gain(elevation, np.where(over, azimuth + pi, azimuth), power)
        cuts.append(PatternCut(name=name, towards=towards, away=away, angle=tuple(angle), gain=tuple(gain)))
        for side, bearing in ((towards, azimuth), (away, azimuth + pi)):
            for lobe in made.lobes(bearing):
                at = np.array([lobe.elevation]), np.array([bearing])
                lobes.append(
                    LobeRecord(
                        cut=name,
                        side=side,
                        elevation=float(np.degrees(lobe.elevation)),
                        gain=float(made.gain(*at, power)[0]),
                        strength=float(made.intensity(*at)[0]) / most,
                    )
                )
    return PatternRecord(ground="average soil", method=METHOD, cuts=tuple(cuts), lobes=tuple(lobes))


@cache
def placing_records(frequency: float, height: float, plane: Plane, efficiency: float) -> tuple[PlacingRecord, ...]:
    """Return the loop at other heights and in the other plane, its losses as they are."""

    def sky(at: float, stands: Plane) -> tuple[float, float, float, float]:
        made, sent = loop_over_soil(frequency, at, stands)
        power = sent / efficiency
        low, high = made.share_between(0.0, pi / 9.0), made.share_between(pi / 3.0, 0.5 * pi)
        return made.sky_power / power, low * made.sky_power / power, low, high

    now = sky(height, plane)
    other: Plane = "horizontal" if plane == "vertical" else "vertical"
    made = []
    for at, stands in ((height, plane), (1.5, plane), (3.0, plane), (5.0, plane), (10.0, plane), (height, other)):
        reach, beneath, low, high = sky(at, stands)
        made.append(
            PlacingRecord(
                plane=stands,
                centre_height=at,
                as_designed=(at, stands) == (height, plane),
                overall_efficiency=reach,
                change=reach / now[0],
                low_angle_change=beneath / now[1],
                share_above_60_degrees=high,
                share_below_20_degrees=low,
                capacitor_peak_voltage=None if stands == other else 5740.0 * (now[0] / reach) ** 0.1,
            )
        )
    return tuple(made)


def sheet_with(*points: OperatingPointRecord, name: str = "quay_rail.toml") -> Sheet:
    """Return a sheet made by hand around some transmissions."""
    return Sheet(
        magsafe="0.1.0",
        date="2026-05-04",
        design=DesignRecord(name=name, sha256="0" * 64, text=""),
        margins={},
        assumptions=(),
        findings=(),
        verdict="clear",
        power_ceiling=CEILING,
        operating_points=points,
        cautions=(),
    )


CEILING = PowerCeiling(value=20.9, at_limit=32.7, transmission=0, held_by="none", complete=True, left_out=())


def transmission(
    pattern: PatternRecord | None,
    placings: tuple[PlacingRecord, ...] = (),
    name: str = "40 m voice",
    frequency: float = 7.1e6,
) -> OperatingPointRecord:
    """Return a transmission made by hand."""
    figure = FigureRecord(low=1.0, likely=2.0, high=3.0, unit="1", method="hand", source="hand")
    return OperatingPointRecord(
        name=name,
        frequency=frequency,
        power=100.0,
        power_at_loop=100.0,
        mode="SSB",
        duty=0.5,
        power_ceiling=CEILING,
        figures={"overall_efficiency": figure},
        findings=(),
        pattern=pattern,
        placings=placings,
    )
