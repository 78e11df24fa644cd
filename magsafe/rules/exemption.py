"""Below what power a rule asks for no evaluation, or does not ask at all: shown, never judged.

Such a threshold is a matter of paperwork. A field may exceed its limit below it.
"""

from dataclasses import dataclass
from math import isfinite, pi
from typing import Literal

from magsafe.rules.segment import PROVENANCES, Provenance, Segment, lowest_value, read_segments
from magsafe.rules.table import POWER_UNITS, Entries

ExemptionKind = Literal["ERP by distance", "EIRP", "power"]

EXEMPTION_KINDS: tuple[ExemptionKind, ...] = ("ERP by distance", "EIRP", "power")
VALID_BEYOND: tuple[str, ...] = ("wavelength / 2 pi",)

_LIGHT = 299_792_458.0  # [m/s], exact by definition


@dataclass(frozen=True, slots=True)
class Exemption:
    """A threshold of power below which a rule asks for no evaluation.

    `kind` is what is held against it: the ERP at a distance (`segments`: coefficient * (f in MHz) ** exponent *
    (R in m) ** 2, in W), or EIRP or transmitter power (`threshold` [W]). `averaged`: a mean over the averaging time
    of the rule's public tier counts, not the crest of the envelope. `included`: the threshold itself is exempt.
    """

    kind: ExemptionKind
    jurisdiction: str
    name: str
    threshold: float | None
    segments: tuple[Segment, ...]
    valid_beyond: str
    averaged: bool
    included: bool
    source: str
    provenance: Provenance
    provenance_detail: str
    notes: str

    def nearest(self, frequency: float) -> float:
        """The distance [m] from which on the threshold may be used at a frequency [Hz]; 0 where any will do."""
        if not (isfinite(frequency) and frequency > 0):
            raise ValueError(f"frequency must be positive and finite, found {frequency!r} Hz")
        return _LIGHT / frequency / (2.0 * pi) if self.valid_beyond else 0.0

    def threshold_at(self, distance: float, frequency: float) -> float | None:
        """The threshold [W] for people at a distance.

        Parameters
        ----------
        distance : from people to the nearest part of the antenna, zero or more [m]
        frequency : positive, finite [Hz]

        Returns
        -------
        ERP, EIRP or power, as `kind` says [W]; None nearer than `nearest`, and outside the band of the segments

        Raises
        ------
        ValueError : a distance below zero or none at all, or a frequency that is none
        """
        if not (isfinite(distance) and distance >= 0):
            raise ValueError(f"distance must be zero or more metres, found {distance!r}")
        if distance < self.nearest(frequency):
            return None
        if self.threshold is not None:
            return self.threshold
        at_one_metre = lowest_value(self.segments, frequency)
        return None if at_one_metre is None else at_one_metre * distance**2

    def exempts(self, power: float, threshold: float) -> bool:
        """Whether a power stays below a threshold, or at it where that is `included`; both in W."""
        return power < threshold or (self.included and power == threshold)


def read_exemption(entries: Entries) -> Exemption:
    """An exemption of a rule; what is wrong with it is noted in `entries`."""
    kind = entries.word("kind", EXEMPTION_KINDS)
    by_distance = kind == "ERP by distance"
    provenance = entries.word("provenance", PROVENANCES)
    detail = entries.text("provenance_detail")
    exemption = Exemption(
        kind=kind,
        jurisdiction=entries.text("jurisdiction"),
        name=entries.text("name"),
        threshold=None if by_distance else entries.quantity("threshold", POWER_UNITS),
        segments=read_segments(entries, provenance, detail) if by_distance else (),
        valid_beyond=entries.word("valid_beyond", VALID_BEYOND) if by_distance else "",
        averaged=entries.flag("averaged"),
        included=entries.flag("included"),
        source=entries.text("source"),
        provenance=provenance,
        provenance_detail=detail,
        notes=entries.text("notes", default=""),
    )
    entries.refuse_leftover()
    if exemption.threshold is not None and exemption.threshold <= 0:
        entries.note("threshold must be above zero")
    return exemption
