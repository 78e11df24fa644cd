"""What differs about people between two sheets: rules, places, distances, sessions, exemptions."""

from collections.abc import Collection, Iterator, Mapping, Sequence

from magsafe import words
from magsafe.checks.comparison import Change, differ, factor, toward
from magsafe.checks.sheet import (
    ORDER,
    DistanceRecord,
    DistancesRecord,
    ExemptionRecord,
    ExposureRecord,
    KeepoutRecord,
    OperatingPointRecord,
    PlaceRecord,
    SessionExposure,
    SessionPlace,
    SessionRecord,
    Sheet,
    Verdict,
    worst,
)
from magsafe.units import significant

Pairs = Sequence[tuple[OperatingPointRecord, OperatingPointRecord]]

_SIDES = ("any_direction", "along_axis", "in_plane", "across", "above", "below")
_FLOOR_SIDES = ("any_bearing", "along_axis", "in_plane", "across")

_Exposure = ExposureRecord | SessionExposure


def rules(before: Sheet, after: Sheet) -> Iterator[Change]:
    """Yield the rules that went, came, or hold in another edition."""
    old, new = editions(before), editions(after)
    for rule in {**old, **new}:
        was, now = old.get(rule), new.get(rule)
        if was == now:
            continue
        text = f"rule {rule}: edition {was} before, {now} now"
        if now is None:
            text = f"rule {rule} ({was}) is not judged any more"
        elif was is None:
            text = f"rule {rule} ({now}) is judged now, and was not"
        yield Change(
            kind="rule", direction="worse" if now is None else "other", of=rule, before=was, after=now, text=text
        )


def editions(sheet: Sheet) -> dict[str, str]:
    """Return the edition of each rule that a sheet judges by; several of one rule, of an altered sheet, all of them."""
    found: dict[str, dict[str, None]] = {}
    everywhere: list[_Exposure] = [each for point in sheet.operating_points for each in point.exposure]
    everywhere += [each for session in sheet.sessions for each in session.exposure]
    for each in everywhere:
        found.setdefault(each.rule, {})[each.edition] = None
    return {rule: " and ".join(each) for rule, each in found.items()}


def place_names(sheet: Sheet) -> dict[tuple[str, str], Verdict]:
    """Return the places of a sheet, each with the tier that it is judged for, and the worst verdict on it."""
    found: dict[tuple[str, str], Verdict] = {}
    for point in sheet.operating_points:
        for exposure in point.exposure:
            for place in exposure.places:
                key = place.name, exposure.who
                found[key] = worst((place.verdict, found.get(key, "clear")))
    return found


def places_gone_and_new(before: Sheet, after: Sheet) -> Iterator[Change]:
    """Yield the places that only one of two sheets judges, or judges for this tier."""
    old, new = place_names(before), place_names(after)
    for name, who in (key for key in old if key not in new):
        yield Change(
            kind="place", direction="worse", of=name, part=who, before=old[name, who], after=None,
            text=f"place {words.short(name)} ({who}) is not judged any more",
        )  # fmt: skip
    for name, who in (key for key in new if key not in old):
        verdict = new[name, who]
        yield Change(
            kind="place", direction="other" if verdict == "clear" else "worse", of=name, part=who, before=None,
            after=verdict, text=f"place {words.short(name)} ({who}) is judged now, and was not: {verdict}",
            weight=100.0 - ORDER.index(verdict),
        )  # fmt: skip


def people(pairs: Pairs, judged: Collection[str]) -> Iterator[Change]:
    """Yield what differs in places, distances and exemptions of transmissions that both sheets have.

    `judged` are the rules that the second sheet judges anything by.
    """
    for old, new in pairs:
        yield from _exposures(old.exposure, new.exposure, judged, new.name, None)
        yield from _exemptions(old.exemptions, new.exemptions, new.name)


def worked_in_turn(before: Sheet, after: Sheet, renamed: Mapping[str, str]) -> Iterator[Change]:
    """Yield what differs in the sessions, matched by the transmissions that are worked in turn.

    `renamed` gives today's names of the transmissions of the first sheet.
    """
    judged = editions(after)
    old = {_members(session, before, renamed): session for session in before.sessions}
    new = {_members(session, after, {}): session for session in after.sessions}
    for members in {**old, **new}:
        was, now = old.get(members), new.get(members)
        name = ", ".join(sorted(members))
        if was is not None and now is not None:
            yield from _exposures(was.exposure, now.exposure, judged, None, name)
        elif was is not None:
            text = f"{name} are not counted as worked in turn any more"
            yield Change(
                kind="place", direction="worse", of="session", session=name, before=name, after=None, text=text
            )
        else:
            text = f"{name} are counted as worked in turn now"
            yield Change(
                kind="place", direction="other", of="session", session=name, before=None, after=name, text=text
            )


def _members(session: SessionRecord, sheet: Sheet, renamed: Mapping[str, str]) -> frozenset[str]:
    names = [sheet.operating_points[index].name for index in session.transmissions]
    return frozenset(renamed.get(name, name) for name in names)


def _exposures(
    before: Sequence[_Exposure],
    after: Sequence[_Exposure],
    judged: Collection[str],
    transmission: str | None,
    session: str | None,
) -> Iterator[Change]:
    new = {(each.rule, each.who): each for each in after}
    for was in before:
        now = new.get((was.rule, was.who))
        if now is None:
            if was.rule in judged:  # else the rule itself is told as gone
                yield _tier_gone(was, transmission, session)
            continue
        yield from _distances(was, now, transmission, session)
        theirs = {place.name: place for place in now.places}
        for place in was.places:
            if place.name in theirs:
                yield from _place(place, theirs[place.name], was, transmission, session)


def _tier_gone(was: _Exposure, transmission: str | None, session: str | None) -> Change:
    of = f"{was.rule} {was.who}"
    return Change(
        kind="rule", direction="worse", transmission=transmission, session=session, of=of, before=was.edition,
        after=None,
        text=f"{of}{_where(transmission, session)} is not judged any more",
    )  # fmt: skip


def _place(
    was: PlaceRecord | SessionPlace,
    now: PlaceRecord | SessionPlace,
    exposure: _Exposure,
    transmission: str | None,
    session: str | None,
) -> Iterator[Change]:
    """Yield how the share of the limit differs at one place; its verdict is told with the findings."""
    if not differ(was.share_of_limit, now.share_of_limit):
        return
    yield Change(
        kind="place",
        direction=toward(was.share_of_limit, now.share_of_limit, worse="higher"),
        transmission=transmission,
        session=session,
        of=now.name,
        part=f"{exposure.rule} {exposure.who}",
        before=was.share_of_limit,
        after=now.share_of_limit,
        unit="1",
        text=f"{words.short(now.name)}, {exposure.rule} {exposure.who}{_where(transmission, session)}: share of the "
        f"power at the limit {_share(was.share_of_limit)} before, {_share(now.share_of_limit)} now",
        weight=now.share_of_limit or 0.0,
    )


def _share(found: float | None) -> str:
    if found is None:
        return "not known"
    return f"{significant(100.0 * found)} %" if found < 10.0 else f"{significant(found)} times"


def _where(transmission: str | None, session: str | None) -> str:
    if session is not None:
        return f" (in turn: {session})"
    return f" ({words.short(transmission)})" if transmission is not None else ""


def _distances(was: _Exposure, now: _Exposure, transmission: str | None, session: str | None) -> Iterator[Change]:
    of, where = f"{now.rule} {now.who}", _where(transmission, session)
    if was.keepout is None or now.keepout is None:
        if was.keepout is not now.keepout:
            lost = now.keepout is None
            why = f": {words.short(now.why, 200)}" if lost and now.why else ""
            yield Change(
                kind="keepout",
                direction="worse" if lost else "other",
                transmission=transmission,
                session=session,
                of=of,
                before=None,
                after=None,
                text=f"keep-out {of}{where}: {f'not known any more{why}' if lost else 'known now'}",
                weight=1e6,
            )
        return
    old, new = dict(_all_distances(was.keepout)), dict(_all_distances(now.keepout))
    for part in {**old, **new}:
        if part not in old or part not in new:
            gone = part in old
            distance = (old if gone else new)[part].distance
            yield Change(
                kind="keepout",
                direction="worse" if gone else "other",
                transmission=transmission,
                session=session,
                of=of,
                part=part,
                before=distance if gone else None,
                after=None if gone else distance,
                unit="m",
                text=f"keep-out {of}{where}: {part} {metres(distance)}, {'not told any more' if gone else 'told now'}",
            )
            continue
        if old[part].distance == new[part].distance:
            continue
        first, second = old[part].distance, new[part].distance
        # Unbounded is further than any distance.
        grown = second is None or (first is not None and second > first)
        yield Change(
            kind="keepout",
            direction="worse" if grown else "better",
            transmission=transmission,
            session=session,
            of=of,
            part=part,
            before=first,
            after=second,
            unit="m",
            text=f"keep-out {of}{where}: {part} {metres(first)} before, {metres(second)} now",
            weight=1e6 if None in (first, second) else factor(first, second),
        )


def metres(distance: float | None) -> str:
    """Return a distance of a keep-out, rounded up when it was made."""
    return "unbounded" if distance is None else f"{distance:.1f} m"


def _all_distances(found: KeepoutRecord | DistancesRecord) -> Iterator[tuple[str, DistanceRecord]]:
    yield from _named(found, "")
    if isinstance(found, KeepoutRecord):
        yield from _named(found.key_down, "key-down ")


def _named(found: DistancesRecord, prefix: str) -> Iterator[tuple[str, DistanceRecord]]:
    for side in _SIDES:
        distance = getattr(found, side)
        if distance is not None:
            yield f"{prefix}{side.replace('_', ' ')}", distance
    for floor in found.on_floors:
        for side in _FLOOR_SIDES:
            distance = getattr(floor, side)
            if distance is not None:
                yield f"{prefix}floor {floor.floor:g} m {side.replace('_', ' ')}", distance


def _exemptions(
    before: Sequence[ExemptionRecord], after: Sequence[ExemptionRecord], transmission: str
) -> Iterator[Change]:
    new = {(each.rule, each.jurisdiction, each.name): each for each in after}
    for was in before:
        now = new.get((was.rule, was.jurisdiction, was.name))
        if now is None:
            yield Change(
                kind="exemption", direction="other", transmission=transmission, of=f"{was.rule}, {was.name}",
                before=_told(was), after=None,
                text=f"{was.rule}, {was.name}{_where(transmission, None)}: {_told(was)} before, not told any more",
            )  # fmt: skip
            continue
        if _exempt(was) == _exempt(now):
            continue
        yield Change(
            kind="exemption",
            direction="better" if _exempt(now) else "worse",
            transmission=transmission,
            of=f"{was.rule}, {was.name}",
            before=_told(was),
            after=_told(now),
            text=f"{was.rule}, {was.name}{_where(transmission, None)}: {_told(was)} before, {_told(now)} now",
        )


def _exempt(found: ExemptionRecord) -> bool:
    """Return whether a rule asks for no evaluation: by one threshold, or at every place."""
    if found.places:
        return all(place.exempt for place in found.places)
    return bool(found.exempt)


def _told(found: ExemptionRecord) -> str:
    return "exempt from evaluation" if _exempt(found) else "not exempt from evaluation"
