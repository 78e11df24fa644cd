"""Levels for the current that a touch draws or that flows in a limb: shown with a rule, never judged.

They are about contact with metal that a field has charged, which no field computed here tells.
"""

from dataclasses import dataclass
from typing import Literal

from magsafe.rules.segment import (
    NOT_AVERAGED,
    PROVENANCES,
    Provenance,
    Segment,
    lowest_value,
    read_averaging_time,
    read_segments,
)
from magsafe.rules.table import Entries

Who = Literal["trained", "public"]
CurrentKind = Literal["contact", "contact, touch", "contact, grasp", "limb"]

WHO: tuple[Who, ...] = ("trained", "public")
CURRENT_KINDS: tuple[CurrentKind, ...] = ("contact", "contact, touch", "contact, grasp", "limb")
CURRENT_UNIT = "mA"


@dataclass(frozen=True, slots=True)
class Current:
    """How much current a rule allows through a contact or a limb of one tier, RMS, in mA.

    `averaging_time` is in seconds, 0.0 where the rule does not average.
    """

    who: Who
    kind: CurrentKind
    averaging_time: float
    source: str
    segments: tuple[Segment, ...]
    provenance: Provenance
    provenance_detail: str
    verified_part: str
    notes: str

    @property
    def averaged(self) -> bool:
        """Whether the rule averages the square of the current over time."""
        return self.averaging_time > NOT_AVERAGED

    def at(self, frequency: float) -> float | None:
        """The level at a frequency [Hz], RMS [mA]; the lower one where segments meet; None outside the band."""
        return lowest_value(self.segments, frequency)


def read_current(entries: Entries) -> Current:
    """A row of current levels; what is wrong with it is noted in `entries`."""
    provenance = entries.word("provenance", PROVENANCES)
    detail = entries.text("provenance_detail")
    current = Current(
        who=entries.word("who", WHO),
        kind=entries.word("kind", CURRENT_KINDS),
        averaging_time=read_averaging_time(entries),
        source=entries.text("source"),
        segments=read_segments(entries, provenance, detail),
        provenance=provenance,
        provenance_detail=detail,
        verified_part=entries.text("verified_part", default=""),
        notes=entries.text("notes", default=""),
    )
    unit = entries.text("unit")
    entries.refuse_leftover()
    if unit and unit != CURRENT_UNIT:
        entries.note(f"unit of a current must be {CURRENT_UNIT}, found {unit!r}")
    return current
