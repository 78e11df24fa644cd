"""Which transmissions of two sheets belong together, and what differs in how they are used."""

from collections.abc import Iterator, Sequence

from magsafe import words
from magsafe.checks.comparison import Change, Direction, differ, factor, toward
from magsafe.checks.sheet import ORDER, OperatingPointRecord, Verdict, worst
from magsafe.units import significant

_NEAR = 0.05  # of the frequency: as far as one transmission may have moved and still be the same without its name

_Point = OperatingPointRecord
Pairs = list[tuple[_Point, _Point]]


def matched(before: Sequence[_Point], after: Sequence[_Point]) -> tuple[Pairs, list[_Point], list[_Point]]:
    """Return the transmissions that belong together, in the second's order, and those that went and came."""
    partner: dict[str, _Point] = {point.name: point for point in before if any(p.name == point.name for p in after)}
    gone = [point for point in before if point.name not in partner]
    new = [point for point in after if point.name not in partner]
    for point in list(new):
        here = [other for other in gone if not differ(other.frequency, point.frequency)]
        there = [other for other in new if not differ(other.frequency, point.frequency)]
        if len(here) == len(there) == 1:
            partner[point.name] = here[0]
            gone.remove(here[0])
    new = [point for point in new if point.name not in partner]
    if len(gone) == len(new) == 1 and abs(gone[0].frequency - new[0].frequency) <= _NEAR * new[0].frequency:
        partner[new[0].name] = gone[0]
        gone, new = [], []
    return [(partner[point.name], point) for point in after if point.name in partner], gone, new


def transmissions(pairs: Pairs, gone: Sequence[_Point], new: Sequence[_Point]) -> Iterator[Change]:
    """Yield the transmissions that went and came, their names, and how each is used."""
    for point in gone:
        name = words.short(point.name)
        yield Change(
            kind="transmission", direction="other", of=point.name, before=point.power, after=None, unit="W",
            text=f"transmission {name} ({words.watts(point.power)}) is not there any more",
        )  # fmt: skip
    for point in new:
        verdict = _worst_of(point)
        yield Change(
            kind="transmission", direction="other" if verdict == "clear" else "worse", of=point.name, before=None,
            after=point.power, unit="W",
            text=f"transmission {words.short(point.name)} ({words.watts(point.power)}) is new: {verdict}",
            weight=100.0 - ORDER.index(verdict),
        )  # fmt: skip
    for old, now in pairs:
        if old.name != now.name:
            yield Change(
                kind="transmission", direction="other", of=now.name, part="name", before=old.name, after=now.name,
                text=f"transmission {words.short(old.name)} is called {words.short(now.name)} now",
            )  # fmt: skip
        yield from _use(old, now)


def _use(old: _Point, now: _Point) -> Iterator[Change]:
    """Yield how the use of one transmission differs."""
    name = words.short(now.name)
    told: list[tuple[str, float, float, str, str, Direction]] = []
    if old.frequency != now.frequency:
        said = words.frequency(old.frequency), words.frequency(now.frequency)
        told.append(("frequency", old.frequency, now.frequency, *said, "other"))
    if differ(old.power, now.power):
        way = toward(old.power, now.power, worse="higher")
        told.append(("power", old.power, now.power, words.watts(old.power), words.watts(now.power), way))
    elif differ(old.power_at_loop, now.power_at_loop):
        said = words.amount(old.power_at_loop, "W"), words.amount(now.power_at_loop, "W")
        way = toward(old.power_at_loop, now.power_at_loop, worse="higher")
        told.append(("power_at_loop", old.power_at_loop, now.power_at_loop, *said, way))
    if differ(old.duty, now.duty):
        said = f"{significant(100 * old.duty)} %", f"{significant(100 * now.duty)} %"
        told.append(("duty", old.duty, now.duty, *said, toward(old.duty, now.duty, worse="higher")))
    units = {"frequency": "Hz", "power": "W", "power_at_loop": "W", "duty": "1"}
    for part, was, is_now, first, second, way in told:
        yield Change(
            kind="transmission", direction=way, transmission=now.name, of=now.name, part=part, before=was, after=is_now,
            unit=units[part], text=f"{part.replace('_', ' ')} of {name}: {first} before, {second} now",
            weight=factor(was, is_now),
        )  # fmt: skip
    if old.mode != now.mode:
        yield Change(
            kind="transmission", direction="other", transmission=now.name, of=now.name, part="mode", before=old.mode,
            after=now.mode,
            text=f"mode of {name}: {old.mode or 'none stated'} before, {now.mode or 'none stated'} now",
        )  # fmt: skip


def _worst_of(point: _Point) -> Verdict:
    return worst(tuple(finding.verdict for finding in point.findings))
