"""People on a terminal: the table of places, the table of distances, and all of a keep-out."""

from collections.abc import Iterator, Sequence

from magsafe import words
from magsafe.checks.sheet import (
    DistanceRecord,
    DistancesRecord,
    ExposureRecord,
    KeepoutPoint,
    OperatingPointRecord,
    PlaceRecord,
    TimeRecord,
)
from magsafe.units import significant

FIELD_UNITS = {"E": "V/m", "H": "A/m"}


def metres(found: DistanceRecord | None) -> str:
    """Return a distance to 0.1 m, rounded up when it was made; `unbounded` where the search did not bound it."""
    if found is None:
        return ""
    return "unbounded" if found.distance is None else f"{found.distance:.1f}"


def farthest(found: Sequence[DistanceRecord | None]) -> str:
    """Return the largest of some distances."""
    known = [each for each in found if each is not None]
    if any(each.distance is None for each in known):
        return "unbounded"
    return f"{max((each.distance or 0.0) for each in known):.1f}" if known else ""


def on_floors(found: DistancesRecord) -> list[DistanceRecord | None]:
    """Return the distances for people on all floors, at any bearing."""
    return [floor.any_bearing for floor in found.on_floors]


def distance_columns(point: OperatingPointRecord) -> tuple[str, ...]:
    """Return the headings of the table of distances."""
    vertical = all(e.keepout is None or e.keepout.across is None for e in point.exposure)
    sides = ("axis", "plane") if vertical else ("plane", "across")
    return ("any", *sides, "up", "down", "floors", "key-down")


def distance_rows(point: OperatingPointRecord) -> Iterator[tuple[str, ...]]:
    """Yield a row for each rule and tier that it has limits for: its distances in metres."""
    for each in point.exposure:
        if each.without:
            continue
        label = f"{each.rule} {each.who}"
        found = each.keepout
        if found is None:
            yield (label, *("?" for _ in distance_columns(point)))
            continue
        yield (label, *distances_of(found), metres(found.key_down.any_direction))


def distances_of(found: DistancesRecord) -> tuple[str, ...]:
    """Return the distances of one row, in metres, key-down left out."""
    sides = [d for d in (found.along_axis, found.in_plane, found.across) if d is not None]
    return (
        metres(found.any_direction),
        *(metres(side) for side in sides),
        metres(found.above),
        metres(found.below),
        farthest(on_floors(found)),
    )


def place_text(place: PlaceRecord, exposure: ExposureRecord) -> str:
    """Return what one rule says of one place, in a sentence."""
    if place.share_of_limit is None or place.set_by is None:
        what = "no limits in this rule" if exposure.without else "not known"
        return f"{words.short(place.name)}, {exposure.rule} {exposure.who}: {what}"
    electric = place.set_by == "E"
    field = place.electric if electric else place.magnetic
    limit = place.electric_limit if electric else place.magnetic_limit
    unit = FIELD_UNITS[place.set_by]
    who = f"{words.short(place.name)}, {exposure.rule} {exposure.who}"
    over = "over the body " if place.judged_on == "mean over the body" else ""
    found = (
        f"{who}: {place.set_by} {over}{words.amount(field or 0.0, unit)} RMS of {words.amount(limit or 0.0, unit)}, "
        f"{share(place.share_of_limit)} the power at the limit"
    )
    if place.body_mean_share is not None and not over:
        found += f" ({share(place.body_mean_share).removesuffix(' of')} by the mean over the body)"
    if place.power_ceiling is None:
        return f"{found}, by what is computed, but not proven"
    if place.power_ceiling == 0.0 and place.when != "tuning":
        return f"{found}; could bear no power: the tune-up alone is too much{times(place)}"
    what = "a tune-up of " if place.when == "tuning" else ""
    return f"{found}; could bear {what}{words.power(place.power_ceiling)}{times(place)}"


def times(place: PlaceRecord) -> str:
    """Return how long one may transmit at full power with somebody there, the margin kept."""
    limited = [each for each in place.times if each.carrier < each.averaging_time]
    if place.times and not limited:
        return f"; {'the tune-up' if place.when == 'tuning' else 'even an unbroken carrier'} has no limit of time"
    return "".join(f"; with somebody there {_time(each)}{_alone(place)}" for each in limited)


def _alone(place: PlaceRecord) -> str:
    return ", and nothing else in that time" if place.in_session else ""


def _time(found: TimeRecord) -> str:
    window, minutes = words.duration(found.averaging_time), words.floor_two_digits(found.carrier / 60.0)
    if found.keyed is None:
        return f"{minutes} min of the tune-up's carrier in any {window}"
    carrier = f"{minutes} min of an unbroken carrier" if found.carrier else "no carrier"
    if found.keyed >= found.averaging_time:
        return f"keyed without end, or {carrier} in any {window}"
    keyed = f"keyed for {words.floor_two_digits(found.keyed / 60.0)} min" if found.keyed else "not at all"
    return f"{keyed} in any {window}{f', or {carrier}' if found.keyed else ''}"


def share(found: float) -> str:
    """Return a share of the power at the limit: `42 % of`, or `12 times`."""
    return f"{significant(100.0 * found, 2)} % of" if found < 10.0 else f"{significant(found, 2)} times"


def keepout_rows(point: KeepoutPoint) -> Iterator[tuple[str, ...]]:
    """Yield a row for each rule, tier and direction: averaged, what sets it, key-down."""
    for each in point.exposure:
        found = each.keepout
        if found is None:
            continue
        carrier = dict(directions(found.key_down))
        for label, averaged in directions(found):
            yield (f"{each.rule} {each.who}", label, metres(averaged), set_by(averaged), metres(carrier[label]))


def directions(found: DistancesRecord) -> Iterator[tuple[str, DistanceRecord]]:
    """Yield each direction that the loop has, and its distance; floors last."""
    sides = ("along_axis", "in_plane", "across")
    named = [(name, getattr(found, name)) for name in ("any_direction", *sides, "above", "below")]
    for floor in found.on_floors:
        named += [(f"floor {floor.floor:g} m, {name}", getattr(floor, name)) for name in ("any_bearing", *sides)]
    for name, distance in named:
        if distance is not None:
            yield name.replace("_", " "), distance


def set_by(found: DistanceRecord) -> str:
    """Return what sets a distance: the field and its basis, or the touch distance."""
    return f"{found.set_by}{f', {found.basis}' if found.basis else ''}"
