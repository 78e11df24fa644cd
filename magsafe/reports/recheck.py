"""A recheck on a terminal: whether the sheet still holds, then what changed, the most dangerous first."""

from collections.abc import Iterator, Sequence

from rich.console import Console, Group, RenderableType
from rich.text import Text

from magsafe import words
from magsafe.checks.compare_people import metres
from magsafe.checks.comparison import DIGITS, Change, Comparison, Side
from magsafe.checks.sheet import Sheet, Value
from magsafe.reports import telling
from magsafe.reports.terminal import Speaker, console_on_output, is_plain, put

_HEADINGS = {
    "worse": "Changed for the worse",
    "unknown": "Cannot be held against each other",
    "from": "What it is computed from",
    "better": "Changed for the better",
    "other": "What else changed",
}
_FROM = ("input", "rule", "software", "layout")
_VERBATIM = ("finding", "input", "exemption")  # they begin with an id or a key, written as it is
_MOST_DISTANCES = 4
_ROUNDING = (
    f"Numbers count as changed where {DIGITS} digits tell them apart by more than half a step of the last; distances "
    "and verdicts, always. The date is not compared."
)


def show_recheck(comparison: Comparison, now: Sheet, console: Console | None = None) -> None:
    """Print a comparison, and what the second sheet says of the hand on the key."""
    console = console or console_on_output()
    say = Speaker(console.width, is_plain(console))
    put(console, Group(*_told(comparison, now, say)))


def _told(found: Comparison, now: Sheet, say: Speaker) -> Iterator[RenderableType]:
    yield say.item(found.verdict, f"{found.said} {telling.headline(now)}", bold=True)
    indent = len(say.mark(found.verdict).plain)
    yield say.paragraph(telling.ceiling(now, now.power_ceiling), indent=indent)
    if telling.left_out(now.power_ceiling):
        yield say.paragraph(telling.left_out(now.power_ceiling), indent=indent)
    yield Text("")
    yield say.paragraph(f"Before: {_side(found.before)}", "dim")
    yield say.paragraph(f"Now: {_side(found.after)}", "dim")
    for note in found.notes:
        yield Text("")
        yield say.paragraph(note)
    told = _without_twins(found.changes)
    for section, heading in _HEADINGS.items():
        sentences = list(_sentences([each for each in told if _section(each) == section]))
        if sentences:
            yield from say.list_of(heading, sentences)
    if not told:
        yield Text("")
        yield say.paragraph("Nothing changed.")
    yield Text("")
    yield say.paragraph(_ROUNDING)


def _side(side: Side) -> str:
    design = f" (design {words.short(side.design)})" if side.made == "filed" else ""
    return f"{side.file}{design}, {side.made} {side.date}, magsafe {words.short(side.magsafe, 20)}, {side.verdict}"


def _section(change: Change) -> str:
    return "from" if change.direction == "other" and change.kind in _FROM else change.direction


def _without_twins(changes: Sequence[Change]) -> list[Change]:
    """Return changes without the highest power of that transmission whose power is the whole sheet's."""
    whole = {(each.of, each.before, each.after) for each in changes if _is_ceiling(each) and each.transmission is None}
    return [
        each
        for each in changes
        if not (_is_ceiling(each) and each.transmission is not None and (each.of, each.before, each.after) in whole)
    ]


def _is_ceiling(change: Change) -> bool:
    return change.kind == "ceiling"


def _sentences(changes: Sequence[Change]) -> Iterator[str]:
    """Yield changes in sentences; the distances of one rule, tier and transmission in one, and so what stays within."""
    groups: dict[object, list[Change]] = {}
    for index, change in enumerate(changes):
        groups.setdefault(_group(change) or index, []).append(change)
    for first, *others in groups.values():
        if first.part == "margin_found":
            yield f"Margins, the verdicts unchanged: {'; '.join(each.text for each in (first, *others))}."
        elif others:
            yield _distances([first, *others])
        else:
            start = first.text[0] if first.kind in _VERBATIM else first.text[0].upper()
            yield f"{start}{first.text[1:]}.{f' {first.detail}' if first.detail else ''}"


def _group(change: Change) -> tuple[str | None, ...] | None:
    """Return what tells changes that are told in one sentence; None for one that has a sentence of its own."""
    if change.part == "margin_found":
        return (change.part,)
    if change.kind == "keepout" and change.part is not None:
        return change.kind, change.of, change.transmission, change.session
    return None


def _distances(changes: Sequence[Change]) -> str:
    """Return the distances of one rule, tier and transmission: those that a station keeps to, and how many more."""
    first = changes[0]
    where = first.session or first.transmission
    kept = [each for each in changes if _is_kept(each.part or "")] or list(changes[:_MOST_DISTANCES])
    more = len(changes) - len(kept)
    told = "; ".join(_distance(each) for each in sorted(kept, key=lambda each: "key-down" in (each.part or "")))
    rest = f"; and {more} more, which --json tells" if more else ""
    return f"Keep-out {first.of} ({words.short(where or '', 80)}): {told}{rest}."


def _is_kept(part: str) -> bool:
    if part.startswith("key-down "):
        return part == "key-down any direction"
    return "floor" not in part or part.endswith("any bearing")


def _distance(change: Change) -> str:
    first, second = (None if isinstance(end, str | Value) else end for end in (change.before, change.after))
    return f"{change.part} {metres(first)} before, {metres(second)} now"
