"""People during a first key-down: who leaves, how far all keep off, how long until exposure no longer adds up."""

from collections.abc import Iterator, Sequence
from math import isfinite

from magsafe.analysis.people import from_centre
from magsafe.checks.sheet import ExposureRecord, OperatingPointRecord, Sheet
from magsafe.design.model import Design


def occupied(design: Design, sheet: Sheet, index: int, energy: float) -> Iterator[str]:
    """Yield the places that nobody may be in during the carriers.

    In them the carriers, `energy` at the transmitter [J], would be more than the rule averages. Those that are not
    proven to be within the limit are among them, those nearer than the distance that is told for an unbroken carrier,
    those in which only a tune-up is judged, and those of a session that are not clear.
    """
    point = sheet.operating_points[index]
    told = dict(keep_off(point.exposure))
    for place in design.place:
        far = told.get(place.who, 0.0)
        if far is None or from_centre(design, place) < far:
            yield place.name
    for exposure in point.exposure:
        for judged in exposure.places:
            if judged.when == "tuning":
                yield judged.name
            if exposure.without or judged.when == "tuning":
                continue
            bears = bool(judged.times) and all(
                each.carrier >= each.averaging_time or each.carrier * point.power >= energy for each in judged.times
            )
            if judged.verdict in ("stop", "unproven") or not bears:
                yield judged.name
    for session in sheet.sessions:
        if index in session.transmissions:
            yield from (each.name for e in session.exposure for each in e.places if each.verdict != "clear")


def wait(point: OperatingPointRecord, empty: Sequence[str]) -> float:
    """Return the longest averaging time of what somebody is exposed to who stays in a place that time limits [s]."""
    return max(
        (
            each.averaging_time
            for exposure in point.exposure
            for place in exposure.places
            if place.name not in empty and place.when != "tuning"
            for each in place.times
            if each.carrier < each.averaging_time
        ),
        default=0.0,
    )


def again(point: OperatingPointRecord, empty: Sequence[str], energy: float, together: int) -> float:
    """Return the longest averaging time in which steps and overs fill so much of what a place bears [s]; else 0.

    So much that as many procedures as there are transmissions, or two, could come to all of it.
    """
    return max(
        (
            each.averaging_time
            for exposure in point.exposure
            for place in exposure.places
            if place.name not in empty and place.when != "tuning"
            for each in place.times
            if energy > each.carrier * point.power * (1.0 / max(2, together) - (place.share_of_limit or 0.0))
        ),
        default=0.0,
    )


def keep_off(exposures: Sequence[ExposureRecord]) -> Iterator[tuple[str, float | None]]:
    """Yield the farthest distance of an unbroken carrier for each tier [m]."""
    for who in ("public", "trained"):
        found = [e.keepout.key_down.any_direction.distance for e in exposures if e.who == who and e.keepout is not None]
        known = [each for each in found if each is not None and isfinite(each)]
        if found:
            yield who, max(known) if len(known) == len(found) else None
