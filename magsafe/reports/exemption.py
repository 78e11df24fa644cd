"""Exemption from evaluation in sentences: information beside the verdicts, and always under its warning."""

from collections.abc import Iterator, Sequence

from magsafe import words
from magsafe.checks.sheet import ExemptionPlace, ExemptionRecord, KeepoutPoint, OperatingPointRecord
from magsafe.units import significant

HEADING = "Exemption from evaluation: for information, in no verdict"
_POWER = {"ERP by distance": "ERP", "EIRP": "EIRP", "power": "power of the transmitter"}


def sentences(point: OperatingPointRecord | KeepoutPoint) -> Iterator[str]:
    """Yield what each exemption of the site's rules says of one transmission, a paragraph each."""
    for each in point.exemptions:
        yield " ".join(_said(each))


def warnings(points: Sequence[OperatingPointRecord | KeepoutPoint]) -> Iterator[str]:
    """Yield what stands above the sentences; empty where no rule of the site exempts anything."""
    for warning in dict.fromkeys(each.warning for point in points for each in point.exemptions):
        yield f"{warning[0].upper()}{warning[1:]}."


def _said(record: ExemptionRecord) -> Iterator[str]:
    memory = ", from memory" if record.provenance == "memory" else ""
    where = f"{record.jurisdiction}, {record.name} ({record.rule}; {record.source}{memory})"
    if record.power is None:
        yield f"{where}: not known, {record.why}."
    else:
        mean = f"mean over {words.duration(record.averaging_time)}" if record.averaging_time else "at the crest"
        own = f"{_POWER[record.kind]} {words.amount(record.power, 'W')} {mean}"
        if record.threshold is not None:
            told = "exempt" if record.exempt else "not exempt"
            yield f"{where}: {own}, threshold {words.watts(record.threshold)}: {told}."
        else:
            yield f"{where}: {own}{f'; {record.why}' if record.why else ''}."
    if record.kind == "ERP by distance" and not (record.power is not None and record.why):
        yield from _by_distance(record)


def _by_distance(record: ExemptionRecord) -> Iterator[str]:
    nearest = words.amount(record.nearest, "m")
    yield f"It holds from {nearest} on (wavelength / 2 pi); nearer than that an evaluation is required."
    if record.places:
        yield f"{'; '.join(_place(each, known=record.power is not None) for each in record.places)}."
    else:
        yield "No place of the public is given to hold it against."
    if record.axis_field_ratio is not None:
        yield (
            f"Used to the full at {nearest} on the loop's own axis, in free space, it lets the magnetic field be "
            f"{significant(record.axis_field_ratio, 3)} times the limit for the public."
        )


def _place(place: ExemptionPlace, *, known: bool) -> str:
    name = words.short(place.name)
    if place.distance is None:
        return f"{name}: {place.why}"
    where = f"{name} at {words.amount(place.distance, 'm')}"
    if place.threshold is None:
        return f"{where}: {place.why}"
    told = ("exempt" if place.exempt else "not exempt") if known else "not known whether exempt"
    return f"{where}: threshold {words.power(place.threshold)}, {told}"
