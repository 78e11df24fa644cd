"""What the air between a capacitor's plates stands, from their geometry and the air of the site."""

from dataclasses import dataclass, replace

import numpy as np

from magsafe import words
from magsafe.analysis.warmth import HOT_AIR, THIN_AIR
from magsafe.design.model import Capacitor, Design
from magsafe.physics.air_gap import (
    ASPECT,
    GAP,
    IONISATION_END,
    SWEPT,
    GapRating,
    gap_rating,
    rating_span,
    uniform_breakdown,
)
from magsafe.physics.atmosphere import relative_air_density
from magsafe.physics.deratings import RADIO_FREQUENCY, TRAPPED, Derating
from magsafe.physics.divided_voltage import series_voltage

AIR_KINDS = ("air variable", "split-stator air", "butterfly air")
_DENSITY = "U.S. Standard Atmosphere 1976 and the fit for a uniform field (memory)"


@dataclass(frozen=True, slots=True)
class GapVolts:
    """What all sections of an air capacitor stand at one frequency: crests [V].

    `breakdown` is that at radio frequency; where `doubt` tells what is not known of the plates, it is an upper bound.
    `rows` bring the uniform field in the air of the laboratory down to it, `working` goes from there to what may be
    worked with. `enough` is what plates of a twentieth of the gap stand [V], where the thickness is not stated.
    `text` tells the gap in words.
    """

    uniform: float
    breakdown: float
    sections: int
    density: float
    rows: tuple[Derating, ...]
    working: Derating
    text: str
    doubt: str = ""
    enough: float | None = None


def site_air(design: Design) -> tuple[float, float]:
    """Return altitude [m] and temperature [K] of the air in a gap: thin and hot where the site states none.

    Plates are as warm as the conductor that they are joined to, and never counted as colder than it.
    """
    site = design.site
    air = HOT_AIR if site.air_temperature is None else site.air_temperature
    return THIN_AIR if site.altitude is None else site.altitude, max(air, design.loop.conductor.temperature)


def counted_sections(part: Capacitor) -> int:
    """Return how many gaps share the volts; a rotor that a wiper holds does not float."""
    return 1 if part.wiper else part.sections_in_series or 1


def has_air_gap(part: Capacitor) -> bool:
    """Return whether a gap of air is stated."""
    return part.kind in AIR_KINDS and part.gap is not None


def gap_volts(design: Design, frequency: float) -> GapVolts:
    """Return what a capacitor's gap stands.

    Parameters
    ----------
    design : one whose capacitor `has_air_gap`
    frequency : [Hz]

    Returns
    -------
    GapVolts; its breakdown never higher for a smaller gap, a thinner plate, a higher site or hotter air

    Raises
    ------
    ValueError : no gap, or outside every method's range

    Valid     as `gap_rating`. A plate too thin for it, or of unknown thickness, is bounded from above by the thinnest
              and the thickest that were solved.
    Source    as `gap_rating`; sections in series share evenly only where they are symmetric.
    """
    part = design.capacitor
    if part.gap is None:
        raise ValueError("capacitor.gap is not given")
    altitude, temperature = site_air(design)
    density = float(relative_air_density(altitude, temperature))
    rating, doubt, enough = _rating(part, part.gap, density, frequency)
    sections = counted_sections(part)
    laboratory = float(uniform_breakdown(part.gap, 1.0))
    thinner = Derating(
        f"air of {density:.3g} times the density at sea level and 20 degC "
        f"({altitude:.5g} m, {temperature - 273.15:.3g} degC)",
        rating.uniform / laboratory,
        _DENSITY,
        "computed",
    )
    of_one = words.amount(part.gap, "m", "mm")
    shared = "two gaps in series, which share evenly only if they are symmetric, each of"
    if sections == 1:
        held = part.wiper and part.sections_in_series == 2
        shared = "one gap, since a wiper keeps the rotor from floating, of" if held else "a gap of"
    return GapVolts(
        uniform=laboratory,
        breakdown=_in_series(rating.breakdown, sections),
        sections=sections,
        density=density,
        rows=(thinner, *(_named(row, frequency, bound=bool(doubt)) for row in rating.deratings)),
        working=rating.working,
        text=f"{shared} {of_one} in air of {density:.3g} times the usual density",
        doubt=doubt,
        enough=None if enough is None else _in_series(enough.breakdown, sections),
    )


def _rating(part: Capacitor, gap: float, density: float, frequency: float) -> tuple[GapRating, str, GapRating | None]:
    """Return the rating, or the highest that may be with what is not known, and that of the thinnest plate solved."""
    square_cut = part.plate_edge != "round"
    if part.plate_thickness is None:
        thin, thick = rating_span(gap, density, frequency, square_cut=square_cut)
        return thick, "capacitor.plate_thickness is not given: the thickest plate is an upper bound", thin
    aspect = part.plate_thickness / gap
    if aspect < ASPECT.low / (1.0 + 1e-12):
        bound = gap_rating(gap, ASPECT.low * gap, density, frequency, square_cut=square_cut)
        return (
            bound,
            f"the plate is {aspect:.2g} of its gap thick; what foil stands is not known, "
            f"a plate of {ASPECT.low:g} is an upper bound",
            None,
        )
    return gap_rating(gap, part.plate_thickness, density, frequency, square_cut=square_cut), "", None


def _in_series(stood: float, sections: int) -> float:
    return float(series_voltage(np.full(sections, stood), np.ones(sections)))


def _named(row: Derating, frequency: float, *, bound: bool = False) -> Derating:
    """Return a row with what it holds for: the one frequency, or a plate that is an upper bound."""
    if row.name == TRAPPED.name:
        return replace(row, name=f"{row.name}, at {words.frequency(frequency)}")
    if bound and row.evidence == "computed":
        return replace(row, name=f"{row.name}, of the best plate that may be")
    return row


def trapped_in_any_gap(frequency: float, density: float) -> Derating:
    """Return what electrons that turn round within the gap take off at most, whatever the gap.

    Parameters
    ----------
    frequency : [Hz]
    density : relative air density [1]

    Returns
    -------
    Derating; of factor 1 where even the widest gap that they cross stands no more than where ionisation ends

    Valid     as `gap_rating`, for a uniform field: the narrowest gap that they do not cross loses most.
    Source    as its row.
    """
    crossed = min(SWEPT / frequency, GAP.high / density)
    factor = 1.0
    if crossed * density >= GAP.low:
        least = IONISATION_END * density * crossed
        factor = min(1.0, least / (RADIO_FREQUENCY.factor * float(uniform_breakdown(crossed, density))))
    return _named(replace(TRAPPED, factor=factor), frequency)
