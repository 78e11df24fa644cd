"""What differs between the verdicts of two sheets: their findings, their highest powers, the margins asked for."""

import re
from collections.abc import Iterable, Iterator, Mapping

from magsafe import words
from magsafe.checks.compare_people import editions, place_names
from magsafe.checks.compare_transmissions import Pairs
from magsafe.checks.comparison import Change, Direction, differ, factor, toward
from magsafe.checks.sheet import ORDER, Finding, PowerCeiling, Sheet, Verdict
from magsafe.units import significant

_SESSION = re.compile(r"\.session-\d+\.")


def _verdicts(before: Verdict, after: Verdict) -> Direction:
    if before == after:
        return "other"
    return "worse" if ORDER.index(after) < ORDER.index(before) else "better"


def verdict(before: Sheet, after: Sheet) -> Iterator[Change]:
    """Yield how the verdict of the whole sheet differs."""
    if before.verdict != after.verdict:
        yield Change(
            kind="verdict", direction=_verdicts(before.verdict, after.verdict), of="verdict", before=before.verdict,
            after=after.verdict, text=f"The verdict was {before.verdict} and is {after.verdict}",
        )  # fmt: skip


def ceilings(before: Sheet, after: Sheet, pairs: Pairs) -> Iterator[Change]:
    """Yield how the highest powers differ: of the whole sheet, and of each transmission where there are several."""
    yield from _ceiling(before.power_ceiling, after.power_ceiling, None)
    if len(pairs) > 1 or len(before.operating_points) != len(after.operating_points):
        for old, now in pairs:
            yield from _ceiling(old.power_ceiling, now.power_ceiling, now.name)


def _ceiling(old: PowerCeiling, now: PowerCeiling, transmission: str | None) -> Iterator[Change]:
    # Of the whole sheet it comes before those of its transmissions.
    extra = 1e9 if transmission is None else 0.0
    where = f" in {words.short(transmission)}" if transmission is not None else ""
    held = f"{now.held_by} holds it there now." if now.held_by and now.held_by != old.held_by else None
    if differ(old.value, now.value) or old.complete != now.complete:
        way = toward(old.value, now.value, worse="lower")
        if way == "other":
            way = "worse" if old.complete and not now.complete else "other"
        elif way == "better" and old.complete and not now.complete:
            way = "worse"
        first, second = _powers(old, now)
        yield Change(
            kind="ceiling", direction=way, transmission=transmission, of="value", before=old.value, after=now.value,
            unit="W", text=f"The highest power{where} at which every check is clear was {first} and is {second}",
            detail=held, weight=extra + factor(old.value, now.value),
        )  # fmt: skip
    if differ(old.at_limit, now.at_limit):
        told = [("not known" if value is None else f"{significant(value)} W") for value in (old.at_limit, now.at_limit)]
        yield Change(
            kind="ceiling", direction=toward(old.at_limit, now.at_limit, worse="lower"), transmission=transmission,
            of="at_limit", before=old.at_limit, after=now.at_limit, unit="W",
            text=f"The first limit{where} was reached at {told[0]} and is at {told[1]}",
            weight=extra / 2.0 + factor(old.at_limit, now.at_limit),
        )  # fmt: skip


def _powers(old: PowerCeiling, now: PowerCeiling) -> tuple[str, str]:
    """Return two ceilings as they are told: rounded down to two digits, with three where two do not tell them apart."""
    told = [None if each.value is None else words.power(each.value) for each in (old, now)]
    if told[0] == told[1] and differ(old.value, now.value):
        told = [None if each.value is None else f"{significant(each.value)} W" for each in (old, now)]
    first, second = (
        "not to be named"
        if text is None
        else text
        if each.complete
        else f"at most {text}, with unproven parts left out"
        for text, each in zip(told, (old, now), strict=True)
    )
    return first, second


def margins(before: Mapping[str, float], after: Mapping[str, float]) -> Iterator[Change]:
    """Yield how the margins asked for differ; a smaller one is for the worse, since less is asked."""
    for name in {**before, **after}:
        old, now = before.get(name), after.get(name)
        if not differ(old, now):
            continue
        first, second = ("none" if value is None else significant(value, 4) for value in (old, now))
        way = toward(old, now, worse="lower")
        less = ", so that less is asked" if way == "worse" else ""
        yield Change(
            kind="margin", direction=way, of=name, before=old, after=now, unit="1",
            text=f"margin of {name}: {first} before, {second} now{less}", weight=factor(old, now),
        )  # fmt: skip


_Keyed = dict[tuple[str, str | None, int], Finding]


def findings(before: Sheet, after: Sheet, pairs: Pairs, renamed: Mapping[str, str]) -> Iterator[Change]:
    """Yield the findings whose verdict or margin differs, those that went and those that came.

    What went with its rule or its place is told with these. `renamed` gives today's names of the transmissions of the
    first sheet.
    """
    old_rules, new_rules = editions(before), editions(after)
    rules = [f"exposure.{rule}." for rule in old_rules if rule not in new_rules]
    there = place_names(after)
    places = [key for key in place_names(before) if key not in there]

    def told_already(finding: Finding) -> bool:
        """Whether its rule or its place is gone as a whole."""
        by_rule = any(finding.id.startswith(rule) for rule in rules)
        return by_rule or any(finding.place == name and f".{who}." in finding.id for name, who in places)

    old_sessions, new_sessions = _sessions(before, renamed), _sessions(after, {})
    everywhere: list[tuple[tuple[Finding, ...], tuple[Finding, ...], str | None]]
    everywhere = [(before.findings, after.findings, None)]
    everywhere += [(old.findings, now.findings, now.name) for old, now in pairs]
    for was, now_found, transmission in everywhere:
        old, new = _keyed(was, old_sessions), _keyed(now_found, new_sessions)
        for key, finding in old.items():
            if key in new:
                yield from _finding(finding, new[key], transmission)
            elif not told_already(finding):
                yield _dropped(finding, transmission)
        for key, finding in new.items():
            if key not in old:
                yield _added(finding, transmission)


def _sessions(sheet: Sheet, renamed: Mapping[str, str]) -> dict[int, str]:
    """Return for each session's number what it is called whatever its number."""
    points = sheet.operating_points
    return {
        session.number: " ".join(sorted(renamed.get(points[i].name, points[i].name) for i in session.transmissions))
        for session in sheet.sessions
    }


def _keyed(found: Iterable[Finding], sessions: Mapping[int, str]) -> _Keyed:
    made: _Keyed = {}
    for finding in found:
        name = finding.id
        if finding.session is not None:
            # A number says nothing where the sessions stand in another order.
            name = _SESSION.sub(".session.", name) + f" {sessions.get(finding.session, '')}"
        count = 0
        while (name, finding.place, count) in made:
            count += 1
        made[name, finding.place, count] = finding
    return made


def _because(finding: Finding) -> str:
    return words.short(finding.because, 500)


def _title(finding: Finding, transmission: str | None) -> str:
    where = f" ({words.short(transmission)})" if transmission is not None else ""
    return f"{words.short(finding.id, 60)}{where}"


def _finding(old: Finding, now: Finding, transmission: str | None) -> Iterator[Change]:
    title, way = _title(now, transmission), _verdicts(old.verdict, now.verdict)
    if old.verdict != now.verdict:
        yield Change(
            kind="finding", direction=way, transmission=transmission, of=now.id, part="verdict", before=old.verdict,
            after=now.verdict, text=f"{title} was {old.verdict} and is {now.verdict}",
            detail=f"Now: {_because(now)}. Before: {_because(old)}.",
            weight=1e9 * (len(ORDER) - ORDER.index(now.verdict)),
        )  # fmt: skip
        return
    if differ(old.margin_asked, now.margin_asked):
        asked = [("none" if margin is None else significant(margin)) for margin in (old.margin_asked, now.margin_asked)]
        yield Change(
            kind="finding", direction=toward(old.margin_asked, now.margin_asked, worse="lower"),
            transmission=transmission, of=now.id, part="margin_asked", before=old.margin_asked, after=now.margin_asked,
            unit="1", text=f"{title} stays {now.verdict}: a margin of {asked[0]} was asked, {asked[1]} is",
            weight=factor(old.margin_asked, now.margin_asked),
        )  # fmt: skip
    if differ(old.margin_found, now.margin_found) and not _is_share(now):
        found = [("none" if margin is None else significant(margin)) for margin in (old.margin_found, now.margin_found)]
        yield Change(
            kind="finding", direction=toward(old.margin_found, now.margin_found, worse="lower"),
            transmission=transmission, of=now.id, part="margin_found", before=old.margin_found, after=now.margin_found,
            unit="1", text=f"{title} {found[0]} before, {found[1]} now, {now.verdict}",
            weight=factor(old.margin_found, now.margin_found),
        )  # fmt: skip


def _is_share(finding: Finding) -> bool:
    """Return whether its margin is told as the share of the limit at its place."""
    return finding.place is not None and finding.id.startswith("exposure.") and ".probe." not in finding.id


def _dropped(finding: Finding, transmission: str | None) -> Change:
    # Nothing says any more that it keeps to its limit.
    held = finding.verdict in ("clear", "narrow")
    return Change(
        kind="finding", direction="unknown" if held else "other", transmission=transmission, of=finding.id,
        before=finding.verdict, after=None,
        text=f"{_title(finding, transmission)} was {finding.verdict} and is not asked any more",
    )  # fmt: skip


def _added(finding: Finding, transmission: str | None) -> Change:
    return Change(
        kind="finding", direction="other" if finding.verdict == "clear" else "worse", transmission=transmission,
        of=finding.id, before=None, after=finding.verdict,
        text=f"{_title(finding, transmission)} is asked now, and was not: {finding.verdict}",
        detail=None if finding.verdict == "clear" else f"Now: {_because(finding)}.",
        weight=1e9 * (len(ORDER) - ORDER.index(finding.verdict)),
    )  # fmt: skip
