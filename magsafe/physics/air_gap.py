"""What volts an air gap between plates stands: uniform field, edges, and every derating as a row."""

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import cache
from math import inf

import numpy as np

from magsafe.physics.arrays import Array, Values
from magsafe.physics.corona import onset_field
from magsafe.physics.deratings import (
    FIELD_SHAPE,
    RADIO_FREQUENCIES,
    RADIO_FREQUENCY,
    SPACING,
    SQUARE_CUT,
    TRAPPED,
    WORKING,
    Derating,
    product,
)
from magsafe.physics.ranges import Range

GAP = Range("gap times relative air density [m]", 1e-4, 0.2, "range of the uniform-field fit")
ASPECT = Range("plate thickness over gap", 0.05, inf, "the thinnest edge whose field was solved; a foil is not")

# Strongest field at the edge over volts per gap, against plate thickness over gap: a plate with a full-round edge
# midway between two plates. Two solutions with charges on the boundary agree to 0.1 %.
_ASPECTS = (0.05, 0.1, 0.2, 0.3, 0.5, 0.75, 1.0, 1.5, 2.0)
_FACTORS = (6.7409, 4.7371, 3.3089, 2.6693, 2.0234, 1.6718, 1.4980, 1.3274, 1.2440)
_THICKEST = _ASPECTS[-1]

# The uniform-field fit without its term for the gap: below it air multiplies no electrons.
IONISATION_END = 2.422e6  # V/m at relative density 1
# An electron drifts at 1.3e5 m/s at breakdown and comes over pi times the frequency of that; less is taken, for safety.
SWEPT = 3e4  # m/s, gap times frequency

_PEEK = "Peek 1929 (constants seen on public pages) with the field at a full-round edge, computed"


@dataclass(frozen=True, slots=True)
class GapRating:
    """What one gap stands, row by row: all in volts, crest.

    `uniform` is the breakdown of the stated gap in a uniform field at 50 Hz; `deratings` bring it down to the breakdown
    of these plates at radio frequency, `working` from there to what may be worked with. Each factor is on the volts.
    """

    uniform: float
    deratings: tuple[Derating, ...]
    working: Derating

    @property
    def breakdown(self) -> float:
        """Crest at which the gap breaks down at radio frequency [V]."""
        return self.uniform * product(self.deratings)

    @property
    def allowed(self) -> float:
        """Crest that may be worked with [V]."""
        return self.breakdown * self.working.factor


def uniform_breakdown(gap: Values, density: Values) -> Array:
    """Return the breakdown voltage of air between large flat electrodes.

    Parameters
    ----------
    gap : distance between them [m], shape (...)
    density : relative air density [1], broadcast

    Returns
    -------
    voltage, crest at 50 Hz or direct [V], broadcast shape

    Raises
    ------
    ValueError : gap times density outside `GAP`

    Valid     uniform field, clean dry air. It lies 3 to 6 % below the public sphere-gap table at 5 and 10 mm.
    Source    fit A x + B sqrt(x) in Kuffel, Zaengl & Kuffel, High Voltage Engineering; Meek & Craggs (memory).
    """
    return _uniform(GAP.within(np.asarray(gap) * density))


def uniform_gap(voltage: Values, density: Values) -> Array:
    """Return the gap in a uniform field that breaks down at a voltage.

    Parameters
    ----------
    voltage : crest at 50 Hz or direct [V], shape (...)
    density : relative air density [1], broadcast

    Returns
    -------
    gap [m], broadcast shape

    Raises
    ------
    ValueError : the gap times density would be outside `GAP`

    Valid     as `uniform_breakdown`, whose inverse it is.
    Source    as `uniform_breakdown`.
    """
    kilovolts = np.asarray(voltage, dtype=np.float64) / 1e3
    if not np.all(kilovolts > 0.0):
        raise ValueError("the voltage must be above 0")
    # 2 c / (b + sqrt(b^2 + 4 a c)), the root without the difference of near numbers.
    root = 2.0 * kilovolts / (6.08 + np.sqrt(6.08**2 + 4.0 * 24.22 * kilovolts))
    return np.asarray(GAP.within(root**2 / 100.0) / density)


def edge_factor(aspect: Values) -> Array:
    """Return the strongest field at a plate's edge over that deep in the gap.

    Parameters
    ----------
    aspect : plate thickness over the gap on each side [1], shape (...)

    Returns
    -------
    factor [1], same shape, falling with the thickness

    Raises
    ------
    ValueError : an aspect below `ASPECT`

    Valid     full-round edge, midway between plates that reach beyond it. A plate thicker than twice the gap counts as
              one of twice the gap, 1.244: the factor goes on falling, 1.16 at 3 and 1.05 at 10, towards 1. Never divide
              a breakdown voltage by it: a small radius stands a stronger field (`edge_onset`).
    Source    computed, charges on the boundary, at nine aspects; between them monotone in logarithms, within 0.3 %.
    """
    known = np.minimum(ASPECT.within(np.asarray(aspect) * (1.0 + 1e-12)), _THICKEST)
    return np.asarray(np.exp(_log_factor()(np.log(known))))


@cache
def _log_factor() -> Callable[[Array], Array]:
    from scipy.interpolate import PchipInterpolator  # noqa: PLC0415  (only where there is a gap: slow to import)

    joined: Callable[[Array], Array] = PchipInterpolator(np.log(_ASPECTS), np.log(_FACTORS))
    return joined


def edge_onset(gap: Values, thickness: Values, density: Values) -> Array:
    """Return the voltage at which the air at a plate's full-round edge begins to break down.

    Parameters
    ----------
    gap : between the plate and each of its neighbours [m], shape (...)
    thickness : of the plate [m], broadcast
    density : relative air density [1], broadcast

    Returns
    -------
    voltage, crest at 50 Hz [V], broadcast shape

    Raises
    ------
    ValueError : thickness over gap below `ASPECT`, or a density that is not above 0

    Valid     as `edge_factor` and Peek's law, for gaps much wider than the zone at the edge: in short ones hold
              it against `uniform_breakdown` and take off `FIELD_SHAPE` (`breakdown`).
    Source    Peek 1929 with the computed field.
    """
    wide = np.asarray(gap, dtype=np.float64)
    # A still thicker plate has a larger radius and a smaller factor; with the factor held, the radius is held too.
    counted = np.minimum(thickness, _THICKEST * wide)
    return np.asarray(onset_field(counted / 2.0, density) * wide / edge_factor(counted / wide))


def breakdown(gap: Values, thickness: Values, density: Values) -> Array:
    """Return the breakdown voltage of a gap between plates with full-round edges, at low frequency.

    Parameters
    ----------
    gap : between the plate and each of its neighbours [m], shape (...)
    thickness : of the plate [m], broadcast
    density : relative air density [1], broadcast

    Returns
    -------
    voltage, crest at 50 Hz [V], broadcast shape; never higher for a smaller gap, a thinner plate or thinner air

    Raises
    ------
    ValueError : gap times density outside `GAP`, thickness over gap below `ASPECT`

    Valid     as `edge_factor`. The lower of `uniform_breakdown` and `edge_onset` joins two limits with a sharp corner
              and reads high; the factors of `FIELD_SHAPE` take that off. They step down where the plate is thinner than
              0.3 and 0.2 of the gap, so that a gap closed across a step would stand more. The value returned is the
              highest function that lies nowhere above the stepped one and never falls for a wider gap or a thicker
              plate: beside a step it stays level, where the factor alone would jump.
    Source    as its parts; factors computed by avalanche integrals.
    """
    wide = np.asarray(gap, dtype=np.float64)
    GAP.within(wide * density)
    ASPECT.within(np.asarray(thickness) / wide * (1.0 + 1e-12))
    return _least(wide, thickness, density)


def gap_rating(gap: float, thickness: float, density: float, frequency: float, *, square_cut: bool) -> GapRating:
    """Return what one gap of an air capacitor stands at radio frequency, with every derating as a row.

    Parameters
    ----------
    gap : as stated, between the plate and each of its neighbours [m]
    thickness : of the plate [m]
    density : relative air density [1]
    frequency : [Hz]
    square_cut : whether the plates' edges are square cut [yes or no]; not known: they are

    Returns
    -------
    GapRating; never higher for a smaller gap, a thinner plate or thinner air

    Raises
    ------
    ValueError : outside `GAP` with the spacing's tolerance taken off, outside `ASPECT` or `RADIO_FREQUENCIES`

    Valid     as `breakdown`, at most 54 MHz, far from any measurement read. Where electrons no longer cross the gap in
              half a period, breakdown may sink to where ionisation ends, and no more is counted there; a narrower gap,
              which they still cross, is counted as no better. Dry and clean: no rating holds with dew, rain or insects,
              and none again after the first arc has pitted the plates.
    Source    as `breakdown` and the rows of `DERATINGS`.
    """
    RADIO_FREQUENCIES.within(frequency)
    ASPECT.within(thickness / gap * (1.0 + 1e-12))
    narrow = gap * SPACING.factor
    stood = float(breakdown(narrow, thickness, density))
    stated, even = float(uniform_breakdown(gap, density)), float(uniform_breakdown(narrow, density))
    joined = min(even, float(edge_onset(narrow, thickness, density)))
    rows = (
        replace(SPACING, name=f"gap {1.0 - SPACING.factor:.0%} narrower than stated", factor=even / stated),
        Derating("field at the plates' edges", joined / even, _PEEK, "computed"),
        replace(_shape_row(thickness / narrow), factor=stood / joined),
        RADIO_FREQUENCY,
        replace(TRAPPED, factor=_trapped(narrow, density, frequency, stood * RADIO_FREQUENCY.factor)),
        *((SQUARE_CUT,) if square_cut else ()),
    )
    return GapRating(stated, rows, WORKING)


def rating_span(gap: float, density: float, frequency: float, *, square_cut: bool) -> tuple[GapRating, GapRating]:
    """Return the ratings of the thinnest and the thickest plate, for a gap whose plate thickness is not stated.

    Parameters
    ----------
    gap, density, frequency, square_cut : as `gap_rating` [m, 1, Hz, yes or no]

    Returns
    -------
    ratings of plates of 0.05 and of 2 gaps

    Raises
    ------
    ValueError : as `gap_rating`

    Valid     as `gap_rating`. The first is no lower bound: a foil thinner than a twentieth of the gap stands less, by
              an unknown amount. So whoever asks can say that volts above the second exceed what any plate stands, and
              that all others are unproven until the thickness is stated; below the first, that a plate of a twentieth
              of the gap is enough.
    Source    as `gap_rating`.
    """
    thin, thick = (
        gap_rating(gap, share * gap, density, frequency, square_cut=square_cut) for share in (ASPECT.low, _THICKEST)
    )
    return thin, thick


def _uniform(scaled: Values) -> Array:
    """Return the volts of the fit; `scaled` is gap times density [m]."""
    centimetres = 100.0 * np.asarray(scaled)
    return np.asarray(1e3 * (24.22 * centimetres + 6.08 * np.sqrt(centimetres)))


def _least(gap: Array, thickness: Values, density: Values) -> Array:
    """Return the highest function of gap and thickness below all steps that falls with neither.

    The lower of fit and onset rises with both. So all that a wider gap or thicker plate can take off is the smaller
    factor of a plate thinner for its gap, and most of it at the narrowest such gap with this same plate.
    """
    found = np.full(np.broadcast_shapes(gap.shape, np.shape(thickness), np.shape(density)), inf)
    thicker_from = inf
    for thinnest, row in FIELD_SHAPE:
        wide = np.maximum(gap, np.asarray(thickness) / thicker_from)
        joined = np.minimum(_uniform(wide * density), edge_onset(wide, thickness, density))
        found = np.minimum(found, row.factor * joined)
        thicker_from = thinnest
    return np.asarray(found)


def _trapped(gap: float, density: float, frequency: float, stood: float) -> float:
    """Return what is left of the volts that a gap [m] stands [V] where electrons may turn round within it."""
    widest_crossed = SWEPT / frequency
    return min(1.0, IONISATION_END * density * max(gap, widest_crossed) / stood)


def _shape_row(aspect: float) -> Derating:
    """Return the row for a plate thickness over gap that is known to be in range."""
    return next(
        (row for thinnest, row in FIELD_SHAPE if aspect >= thinnest),
        FIELD_SHAPE[-1][1],
    )
