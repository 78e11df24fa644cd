"""What the dielectric of a capacitor made at home stands: the sheet itself, and the air beside it."""

from dataclasses import dataclass
from math import sqrt

import numpy as np

from magsafe import words
from magsafe.analysis.gap import site_air
from magsafe.analysis.line_capacitor import permittivity, sleeves
from magsafe.design import warmth_tables
from magsafe.design.model import Capacitor, Design
from magsafe.physics.air_gap import GAP, IONISATION_END, SWEPT, uniform_breakdown
from magsafe.physics.arrays import Array
from magsafe.physics.atmosphere import relative_air_density
from magsafe.physics.deratings import RADIO_FREQUENCIES, RADIO_FREQUENCY, SPACING, SQUARE_CUT
from magsafe.physics.divided_voltage import air_field
from magsafe.physics.open_line import coaxial_field

# Of the strength of a thin sheet at 50 Hz, for good at radio frequency: 1/10 to 1/5 is common practice.
SHEET_SHARE = 0.2
WORKING = 0.5  # of that, and of the breakdown of air: what may be worked with (common practice)
THIN_SHEET = 1e-3  # m; strength falls from there as the root of the thickness (common practice: power 0.4 to 0.5)
# Nothing breaks down in air below its Paschen minimum (textbooks, memory).
_PASCHEN = (7.5e-6, 327.0)  # gap times relative density [m], crest [V]
_FILMS = np.geomspace(_PASCHEN[0], 1e-3, 60)  # m, of air that may be left beside a sheet


@dataclass(frozen=True, slots=True)
class Stress:
    """What the capacitor's main part may have at its highest: crest [V], and in words what holds it there.

    `WORKING` of it may be worked with.
    """

    voltage: float
    held_by: str


def dielectric_stress(design: Design, frequency: float) -> Stress:
    """Return at what crest the dielectric, or the air beside it, is at its limit.

    Parameters
    ----------
    design : one whose capacitor tells all its sizes
    frequency : [Hz]

    Raises
    ------
    ValueError : outside the range of a method

    Valid     smooth electrodes; the edges of plates and the ends of tubes, where the field is stronger, are not
              computed. A cable is taken as filled without air, all else may have air beside its dielectric, up to 1 mm.
    Source    deratings as listed; uniform-field fit in Kuffel, Zaengl & Kuffel (memory).
    """
    part = design.capacitor
    RADIO_FREQUENCIES.within(frequency)
    density = float(relative_air_density(*site_air(design)))
    thickness, flat = _thickness(part)
    spread = permittivity(part)
    limits = []
    if part.dielectric == "air":
        # Of tubes: they may lie off their axis, and their ends are cut.
        share = flat / thickness * RADIO_FREQUENCY.factor * SQUARE_CUT.factor
        air = float(_air(np.array([thickness * SPACING.factor]), density, frequency)[0]) * share
        limits.append((air, f"{words.amount(thickness, 'm', 'mm')} of air"))
    else:
        row = warmth_tables.dielectrics()[part.dielectric or ""]
        weaker = min(1.0, sqrt(THIN_SHEET / thickness))
        sheet = (row.strength.low or 0.0) * weaker * SHEET_SHARE * flat
        limits.append((sheet, f"{words.amount(thickness, 'm', 'mm')} of {row.name}"))
        if part.kind != "coaxial stub":
            sheets, relative = np.full((len(_FILMS), 1), flat), np.array([[spread.high or 1.0]])
            films = _air(_FILMS, density, frequency) / (air_field(1.0, _FILMS, sheets, relative) * _FILMS)
            film = float(films.min()) * RADIO_FREQUENCY.factor
            limits.append((film, f"a film of air beside {words.amount(thickness, 'm', 'mm')} of {row.name}"))
    stood, held_by = min(limits)
    return Stress(stood * sleeves(part), held_by)


def _thickness(part: Capacitor) -> tuple[float, float]:
    """Return how thick the dielectric is, and what of flat dielectric has its strongest field at the same volts [m]."""
    if part.kind == "dielectric plate":
        return part.gap or 0.0, part.gap or 0.0
    inner, outer = (part.inner_diameter or 0.0) / 2.0, (part.outer_diameter or 0.0) / 2.0
    return outer - inner, float(1.0 / coaxial_field(1.0, inner, outer))


def _air(gaps: Array, density: float, frequency: float) -> Array:
    """Return at what crest air gaps [m] break down at 50 Hz, or at radio frequency where electrons turn round in them.

    Below the range of the fit, the chord to the Paschen minimum, which lies below the curve; never below that minimum.
    """
    scaled = np.minimum(gaps * density, GAP.high)
    first, lowest = _PASCHEN
    edge = float(uniform_breakdown(GAP.low, 1.0))
    chord = lowest + (edge - lowest) * np.clip((scaled - first) / (GAP.low - first), 0.0, 1.0)
    found = np.where(scaled < GAP.low, chord, uniform_breakdown(np.maximum(scaled, GAP.low), 1.0))
    # A gap so narrow that its electrons are swept out is not credited beyond the narrowest one where they are not.
    widest = np.maximum(gaps, SWEPT / frequency)
    return np.asarray(np.minimum(found, IONISATION_END * density * widest))
