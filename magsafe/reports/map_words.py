"""What a map of the keep-out says in words: which transmission, which contours, places, and what is not proven."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from math import inf

from magsafe import words
from magsafe.analysis.people import HALF_WIDTH, POSTURES
from magsafe.checks.sheet import (
    ORDER,
    DistanceRecord,
    DistancesRecord,
    ExposureRecord,
    KeepoutPoint,
    KeepoutRecord,
    KeepoutSheet,
    SessionExposure,
    SessionPlace,
    Verdict,
)
from magsafe.design.model import Design, Place
from magsafe.reports.people import farthest, metres, on_floors, share

SEPARATE_RULES = 2  # more of them share one contour for each tier, or nobody can tell the lines apart
_DIRECTIONS = ("any_direction", "along_axis", "in_plane", "across", "above", "below")


@dataclass(frozen=True, slots=True)
class Contour:
    """One line of the map: its letter, its tier, the rules whose limits it keeps, and what it is called."""

    letter: str
    who: str
    rules: tuple[str, ...]
    text: str


@dataclass(frozen=True, slots=True)
class Spot:
    """A place on the map.

    `across` and `along` are the plan's two coordinates [m], `low` and `high` its heights; `fence` is a fence's radius,
    which has no coordinates. `verdict` is the worst of all rules and transmissions.
    """

    number: str
    name: str
    verdict: Verdict
    text: str
    across: float
    along: float
    half: float
    low: float
    high: float
    fence: float | None


@dataclass(frozen=True, slots=True)
class MapWords:
    """All that a map says."""

    title: str
    origin: str
    shown: str
    contours: tuple[Contour, ...]
    spots: tuple[Spot, ...]
    not_proven: tuple[str, ...]
    notes: tuple[str, ...]
    axes: tuple[str, str]


def shown_transmission(sheet: KeepoutSheet) -> int:
    """Return the index of the transmission whose keep-out reaches furthest; one that is computed before others."""
    return max(range(len(sheet.operating_points)), key=lambda i: (reach_of(sheet.operating_points[i]), -i))


def reach_of(point: KeepoutPoint) -> tuple[float, float]:
    """Return how far the keep-out of a transmission reaches in any direction, averaged and key-down [m].

    Infinite where the search did not bound it, -1 where nothing is known.
    """
    found = [each.keepout for each in point.exposure if each.keepout is not None]
    averaged = max((_metres(each.any_direction) for each in found), default=-1.0)
    return averaged, max((_metres(each.key_down.any_direction) for each in found), default=-1.0)


def farthest_of(point: KeepoutPoint) -> float:
    """Return the longest distance of a transmission's keep-out in any of its directions [m]; 0 where none is known."""
    found = [
        _metres(distance)
        for each in point.exposure
        if each.keepout is not None
        for distance in (*(getattr(each.keepout, name) for name in _DIRECTIONS), *on_floors(each.keepout))
        if distance is not None
    ]
    return max(found, default=0.0)


def _metres(found: DistanceRecord) -> float:
    return inf if found.distance is None else found.distance


def words_of(sheet: KeepoutSheet, design: Design, index: int) -> MapWords:
    """Return what the map of one transmission says."""
    point = sheet.operating_points[index]
    use = ", ".join(dict.fromkeys((words.short(point.name), words.frequency(point.frequency))))
    shown = f"{use}, {words.watts(point.power)} PEP at the transmitter"
    count = len(sheet.operating_points)
    if count > 1:
        shown += f"; of {count} transmissions the one whose keep-out reaches furthest by itself"
    vertical = design.loop.plane == "vertical"
    return MapWords(
        title=f"Where people must not be: {words.short(design.station.name or sheet.design.name, 60)}",
        origin=f"{words.short(sheet.design.name, 60)}, {sheet.date}, magsafe {sheet.magsafe}",
        shown=shown,
        contours=tuple(_contours(point, sheet)),
        spots=tuple(_spot(sheet, design, i, place, index) for i, place in enumerate(design.place, 1)),
        not_proven=tuple(dict.fromkeys(_not_proven(sheet, point))),
        notes=tuple(_notes(sheet, design, index)),
        axes=("along the axis", "in the plane of the loop") if vertical else ("in the plane", "across"),
    )


def _contours(point: KeepoutPoint, sheet: KeepoutSheet) -> Iterator[Contour]:
    known = [each for each in point.exposure if each.keepout is not None]
    names = list(dict.fromkeys(each.rule for each in known))
    groups: list[tuple[str, list[ExposureRecord]]] = []
    for who in ("public", "trained"):
        own = [each for each in known if each.who == who]
        groups += [(who, own)] if len(names) > SEPARATE_RULES and own else [(who, [each]) for each in own]
    for number, (who, own) in enumerate(groups):
        rules = tuple(each.rule for each in own)
        told = f"{rules[0]} {who} ({own[0].edition})"
        if len(rules) > 1:
            told = f"{who}, the strictest of {', '.join(rules)}"
        made = [each.keepout for each in own if each.keepout is not None]
        by = {each.any_direction.set_by for each in made} - ({"touch"} if len(made) > 1 else set())
        setters = f", by {' and '.join(sorted(by))}" if by else ""
        yield Contour(
            chr(ord("A") + number),
            who,
            rules,
            f"{told}: {farthest([each.any_direction for each in made])} m in any direction"
            f"{setters}; "
            f"on the floors {farthest([floor for each in made for floor in on_floors(each)])} m; "
            f"key-down {farthest([each.key_down.any_direction for each in made])} m{_in_turn(sheet, who, rules, made)}",
        )


def _in_turn(sheet: KeepoutSheet, who: str, rules: tuple[str, ...], drawn: list[KeepoutRecord]) -> str:
    """Return how far the sessions reach under these rules, where that is further than what is drawn."""
    summed = [
        each.keepout.any_direction
        for session in sheet.sessions
        for each in session.exposure
        if each.who == who and each.rule in rules and each.keepout is not None
    ]
    furthest = max((_metres(each.any_direction) for each in drawn), default=0.0)
    if not summed or max(_metres(each) for each in summed) <= furthest:
        return ""
    return f"; worked in turn {farthest(summed)} m, further than drawn"


def _spot(sheet: KeepoutSheet, design: Design, number: int, place: Place, index: int) -> Spot:
    found = [
        (record, each, i)
        for i, point in enumerate(sheet.operating_points)
        for each in point.exposure
        for record in each.places
        if record.name == place.name
    ]
    verdict: Verdict = "unproven"
    told = "no rule holds for it"
    if found:
        # The worst of all, and of those alike the one in the transmission shown with the largest share.
        record, exposure, where = min(
            found,
            key=lambda f: (ORDER.index(f[0].verdict), f[2] != index, -(f[0].share_of_limit or 0.0)),
        )
        verdict = record.verdict
        part = record.share_of_limit
        told = "its field is not known" if part is None else f"{share(part)} the power at the limit"
        told += f", {exposure.rule}"
        if where != index:
            told += f", in {words.short(sheet.operating_points[where].name)}"
    for summed, exposed, name in _summed(sheet, place):
        if summed.share_of_limit is not None and ORDER.index(summed.verdict) < ORDER.index(verdict):
            verdict = summed.verdict
            told = f"{share(summed.share_of_limit)} the power at the limit, {exposed.rule}, worked in turn: {name}"
    tuning = ", while tuning" if place.when == "tuning" else ""
    first, second = place.along_axis, place.in_plane
    if design.loop.plane == "horizontal":
        first, second = place.in_plane, place.across
    low = place.floor or 0.0 if place.height is None else place.height
    tall = POSTURES[place.posture or "standing"] if place.height is None else 0.0
    return Spot(
        number=str(number),
        name=place.name,
        verdict=verdict,
        text=f"{words.short(place.name)} ({place.who}{tuning}{', a fence' if place.fence else ''}): {told}",
        across=first or 0.0,
        along=second or 0.0,
        half=HALF_WIDTH if place.height is None else 0.0,
        low=low,
        high=low + tall,
        fence=place.fence,
    )


def _summed(sheet: KeepoutSheet, place: Place) -> Iterator[tuple[SessionPlace, SessionExposure, str]]:
    """Yield what each session adds up to at a place under each rule, and what the session is called."""
    for session in sheet.sessions:
        for exposure in session.exposure:
            for record in exposure.places:
                if record.name == place.name:
                    yield record, exposure, session.name


def _not_proven(sheet: KeepoutSheet, point: KeepoutPoint) -> Iterator[str]:
    """Yield why the contours do not hold, then why places or tiers are not proven."""
    whole = [each.why for each in point.exposure if each.why and not each.without]
    yield from whole
    for finding in (*sheet.findings, *point.findings):
        reason = finding.doubt or (finding.because if finding.verdict == "unproven" else "")
        for known in whole:
            reason = reason.replace(known, "").strip("; ")
        if reason:
            yield f"{words.short(finding.place)}: {reason}" if finding.place else f"{finding.id}: {reason}"


def _notes(sheet: KeepoutSheet, design: Design, index: int) -> Iterator[str]:
    point = sheet.operating_points[index]
    if point.exposure and any(each.keepout for each in point.exposure):
        yield (
            f"A contour: the limit less {design.margins.exposure:g} dB of field, at the power that the rule averages, "
            "with 2 % of distance added. Key-down distances are those of an unbroken carrier; they are not drawn."
        )
    if design.loop.rotates:
        yield "The loop rotates: all is the worst of its bearings, and places are drawn at theirs."
    if design.loop.plane == "vertical" and design.capacitor.position is None:
        yield "Where the capacitor sits is not stated: at each point the strongest field counts."
    further = list(_further(sheet, index))
    if further:
        yield f"Not drawn, and further in some directions, see the table: {'; '.join(further)}."
    unknown = [words.short(p.name) for p in sheet.operating_points if not any(e.keepout for e in p.exposure)]
    if unknown and point.exposure and any(each.keepout for each in point.exposure):
        yield f"No keep-out is known of {', '.join(unknown)}."


def _further(sheet: KeepoutSheet, index: int) -> Iterator[str]:
    """Yield other transmissions, and sessions, with the directions in which they reach further than the one shown.

    A session reaches further in most of them, so of these only any direction is told, the strictest rule of each tier.
    """
    shown = {(each.rule, each.who): each.keepout for each in sheet.operating_points[index].exposure}
    for other, point in enumerate(sheet.operating_points):
        found = list(_directions(shown, point.exposure)) if other != index else []
        if found:
            told = (f"{name.replace('_', ' ')} {metres(there)} m for {rule} {who}" for rule, who, name, there in found)
            yield f"{words.short(point.name)} ({', '.join(told)})"
    for session in sheet.sessions:
        found = list(_directions(shown, session.exposure))
        any_way = [
            (who, farthest([there for _, its, name, there in found if (its, name) == (who, "any_direction")]))
            for who in dict.fromkeys(who for _, who, _, _ in found)
        ]
        people = {"public": "the public", "trained": "trained people"}
        reaches = [f"{most} m for {people[who]}" for who, most in any_way if most]
        if found:
            reach = f"any direction {', '.join(reaches)}" if reaches else "in single directions"
            yield f"worked in turn {session.name} ({reach})"


def _directions(
    shown: Mapping[tuple[str, str], DistancesRecord | None], exposure: Sequence[ExposureRecord | SessionExposure]
) -> Iterator[tuple[str, str, str, DistanceRecord]]:
    """Yield rule, tier, direction and distance where that is further than what is shown."""
    for there in exposure:
        here = shown.get((there.rule, there.who))
        if here is None or there.keepout is None:
            continue
        for name in _DIRECTIONS:
            ours, theirs = getattr(here, name), getattr(there.keepout, name)
            if ours is not None and theirs is not None and _metres(theirs) > _metres(ours):
                yield there.rule, there.who, name, theirs
