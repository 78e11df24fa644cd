"""Sessions on a terminal: what transmissions worked in turn add up to at each place, and how far that reaches."""

from collections.abc import Iterator, Sequence

from magsafe import words
from magsafe.checks.sheet import (
    ORDER,
    Finding,
    KeepoutPoint,
    OperatingPointRecord,
    SessionExposure,
    SessionPlace,
    SessionRecord,
    Verdict,
)
from magsafe.reports.people import directions, distances_of, metres, set_by, share

Points = Sequence[OperatingPointRecord] | Sequence[KeepoutPoint]


def places(session: SessionRecord, points: Points) -> Iterator[tuple[Verdict, str]]:
    """Yield the verdict on each place under each rule and what is said of it, the worst first."""
    found = [(place, exposure) for exposure in session.exposure for place in exposure.places]
    for place, exposure in sorted(found, key=lambda each: ORDER.index(each[0].verdict)):
        yield place.verdict, f"{place_text(place, exposure, points)}."


def place_text(place: SessionPlace, exposure: SessionExposure, points: Points) -> str:
    """Return what one rule says of one place during a session, in a sentence."""
    who = f"{words.short(place.name)}, {exposure.rule} {exposure.who}"
    if place.share_of_limit is None or place.averaging_time is None:
        return f"{who}: not known{f': {exposure.why}' if exposure.why else ''}"
    window = words.duration(place.averaging_time)
    terms = ", ".join(
        f"{words.short(points[term.transmission].name)} {100.0 * term.share_of_window:.0f} %"
        for term in place.terms
        if term.share_of_window > 0.0
    )
    over = " over the body" if place.judged_on == "mean over the body" else ""
    text = (
        f"{who}: {place.set_by}{over}, {share(place.share_of_limit)} the power at the limit, in the worst {window} "
        f"({terms} of it)"
    )
    if place.power_factor is None:
        return text
    if place.power_factor == 0.0:
        return f"{text}; the tune-ups alone are too much"
    return f"{text}; all powers together could be {words.floor_two_digits(place.power_factor)} times"


def distance_rows(session: SessionRecord, columns: int) -> Iterator[tuple[str, ...]]:
    """Yield a row for each rule and tier: its distances in metres, in so many columns."""
    for each in session.exposure:
        unknown = ("?",) * columns
        yield (f"{each.rule} {each.who}", *(unknown if each.keepout is None else distances_of(each.keepout)))


def keepout_rows(session: SessionRecord) -> Iterator[tuple[str, ...]]:
    """Yield a row for each rule, tier and direction: the distance, and what sets it."""
    for each in session.exposure:
        if each.keepout is None:
            yield f"{each.rule} {each.who}", "any direction", "?", "not known"
            continue
        for label, distance in directions(each.keepout):
            yield f"{each.rule} {each.who}", label, metres(distance), set_by(distance)


def findings(session: SessionRecord, points: Sequence[KeepoutPoint]) -> tuple[Finding, ...]:
    """Return the findings of a session, told once: each of its transmissions has them."""
    return tuple(each for each in points[session.transmissions[0]].findings if each.session == session.number)
