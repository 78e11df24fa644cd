"""Stretches of frequency over which one power law holds: what limits and current levels are made of."""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import isfinite
from typing import Literal

from magsafe.rules.table import FREQUENCY_UNITS, TIME_UNITS, Entries, parse_quantity

Provenance = Literal["verified", "memory"]

PROVENANCES: tuple[Provenance, ...] = ("verified", "memory")
NOT_AVERAGED = 0.0


@dataclass(frozen=True, slots=True)
class Segment:
    """A stretch of frequency, both ends included, over which one power law holds.

    Frequencies in Hz; `coefficient` is the limit at 1 MHz in the unit of the row.
    """

    lowest_frequency: float
    highest_frequency: float
    coefficient: float
    exponent: float
    provenance: Provenance
    provenance_detail: str

    def covers(self, frequency: float) -> bool:
        """Whether the frequency [Hz] lies in the segment, ends included."""
        return self.lowest_frequency <= frequency <= self.highest_frequency

    def value(self, frequency: float) -> float:
        """The limit at a frequency [Hz] that the segment covers."""
        return float(self.coefficient * (frequency / 1e6) ** self.exponent)


def covering(segments: Sequence[Segment], frequency: float) -> tuple[Segment, ...]:
    """The segments that cover a frequency [Hz]: two where they meet, none outside; ValueError where it is none."""
    if not (isfinite(frequency) and frequency > 0):
        raise ValueError(f"frequency must be positive and finite, found {frequency!r} Hz")
    return tuple(each for each in segments if each.covers(frequency))


def lowest_value(segments: Sequence[Segment], frequency: float) -> float | None:
    """The limit at a frequency [Hz], the lower one where two segments meet; None where none covers it."""
    return min((each.value(frequency) for each in covering(segments, frequency)), default=None)


def read_segments(entries: Entries, provenance: Provenance, detail: str) -> tuple[Segment, ...]:
    """The segments of a row; they must rise and meet. One without provenance of its own has that of the row."""
    segments = tuple(_read_segment(each, provenance, detail) for each in entries.tables("segments"))
    for below, above in pairwise(segments):
        if below.highest_frequency != above.lowest_frequency:
            entries.note(
                f"segments must rise and meet: one ends at {below.highest_frequency:g} Hz, "
                f"the next begins at {above.lowest_frequency:g} Hz"
            )
    return segments


def read_averaging_time(entries: Entries) -> float:
    """The averaging time of a row [s], 0.0 where it says "none"."""
    text = entries.text("averaging_time")
    if text in ("", "none"):
        return NOT_AVERAGED
    try:
        seconds = parse_quantity(text, TIME_UNITS)
    except ValueError as error:
        entries.note(f'averaging_time: {error}, nor "none"')
        return NOT_AVERAGED
    if seconds <= 0:
        entries.note(f'averaging_time must be longer than zero, or "none", found {text!r}')
    return seconds


def _read_segment(entries: Entries, provenance: Provenance, detail: str) -> Segment:
    lowest, highest = entries.quantities("band", FREQUENCY_UNITS, count=2)
    own = entries.has("provenance")
    segment = Segment(
        lowest_frequency=lowest,
        highest_frequency=highest,
        coefficient=entries.number("coefficient"),
        exponent=entries.number("exponent"),
        provenance=entries.word("provenance", PROVENANCES, default=provenance),
        provenance_detail=entries.text("provenance_detail", default=None if own else detail),
    )
    entries.refuse_leftover()
    if lowest <= 0 or highest <= lowest:
        entries.note("band must rise from above zero")
    if segment.coefficient <= 0:
        entries.note("coefficient must be above zero")
    return segment
