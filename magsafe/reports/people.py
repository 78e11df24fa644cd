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
    """Yield a row for each rule and tier: its distances in metres."""
    for each in point.exposure:
        label = f"{each.rule} {each.who}"
        found = each.keepout
        if found is None:
            yield (label, *("?" for _ in distance_columns(point)))
            continue
        sides = [d for d in (found.along_axis, found.in_plane, found.across) if d is not None]
        yield (
            label,
            metres(found.any_direction),
            *(metres(side) for side in sides),
            metres(found.above),
            metres(found.below),
            farthest(on_floors(found)),
            metres(found.key_down.any_direction),
        )


def place_text(place: PlaceRecord, exposure: ExposureRecord) -> str:
    """Return what one rule says of one place, in a sentence."""
    if place.share_of_limit is None or place.set_by is None:
        return f"{words.short(place.name)}, {exposure.rule} {exposure.who}: not known"
    electric = place.set_by == "E"
    field = place.electric if electric else place.magnetic
    limit = place.electric_limit if electric else place.magnetic_limit
    unit = FIELD_UNITS[place.set_by]
    who = f"{words.short(place.name)}, {exposure.rule} {exposure.who}"
    found = (
        f"{who}: {place.set_by} {words.amount(field or 0.0, unit)} RMS of {words.amount(limit or 0.0, unit)}, "
        f"{_share(place.share_of_limit)} the power at the limit"
    )
    if place.power_ceiling is None:
        return f"{found} by what is computed, but not proven"
    what = "a tune-up of " if place.when == "tuning" else ""
    return f"{found}; could bear {what}{words.power(place.power_ceiling)}"


def _share(share: float) -> str:
    return f"{significant(100.0 * share, 2)} % of" if share < 10.0 else f"{significant(share, 2)} times"


def keepout_rows(point: KeepoutPoint) -> Iterator[tuple[str, ...]]:
    """Yield a row for each rule, tier and direction: averaged, what sets it, key-down."""
    for each in point.exposure:
        found = each.keepout
        if found is None:
            continue
        names = ("any_direction", "along_axis", "in_plane", "across", "above", "below")
        pairs = [(name.replace("_", " "), getattr(found, name), getattr(found.key_down, name)) for name in names]
        for floor, carrier in zip(found.on_floors, found.key_down.on_floors, strict=True):
            pairs += [
                (f"floor {floor.floor:g} m, {name.replace('_', ' ')}", getattr(floor, name), getattr(carrier, name))
                for name in ("any_bearing", "along_axis", "in_plane", "across")
            ]
        for label, averaged, carrier_distance in pairs:
            if averaged is not None:
                yield (
                    f"{each.rule} {each.who}",
                    label,
                    metres(averaged),
                    f"{averaged.set_by}{f', {averaged.basis}' if averaged.basis else ''}",
                    metres(carrier_distance),
                )
