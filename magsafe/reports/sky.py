"""Where a loop's power goes, and what height and plane do to it: levels, lobes and rows, the same on every surface."""

from collections.abc import Iterator, Sequence
from itertools import pairwise
from math import floor, log10, sqrt
from textwrap import wrap

from magsafe import words
from magsafe.checks.sheet import LobeRecord, OperatingPointRecord, PatternCut, PatternRecord, PlacingRecord
from magsafe.reports import telling

PATTERN_HEADING = "Where the power goes"
PLACINGS_HEADING = "How height and plane matter"
DEPTH = 30.0  # dB from the rim of a picture to its middle, and from a full bar to none
RING = 10.0  # dB from one ring to the next
ELEVATIONS = (90.0, 75.0, 60.0, 45.0, 30.0, 15.0, 5.0, 0.0)
NOTHING = 1e-9  # of the strongest: what is less is rounding
MOST_LOBES = 8  # that are told; the machine form has all
UP = 89.0  # degrees from which a lobe points straight up
# A space before each keeps them apart: they stand to the right.
_PLACING_HEAD = (" to the\nsky, %", " change,\ndB", " below 20\ndeg, dB", " above 60\ndeg, %", " volts,\nkV peak")
PLACING_LABEL = 28  # columns for what a row of that table is about
_UNKNOWN = "not known"
_STEP = 5.0  # dB: the rim is a multiple of it
_SAME = 0.05  # dB that no reader sees at one decimal
_ASIDE = 76  # columns that the bars of two cuts need beside each other
_ANGLE, _NUMBER, _WIDEST = 3, 6, 25  # columns for the elevation, for a level, for a level and its bar at most
_PLANES = {"vertical": "upright", "horizontal": "flat"}


def level(ratio: float, least: float = 0.0) -> float | None:
    """Return a gain or a change in decibels; None where it is nothing, or no more than the least that counts."""
    return 10.0 * log10(ratio) if ratio > least else None


def decibels(value: float) -> str:
    """Return a level with its one decimal: `-3.1`."""
    text = f"{value:.1f}"
    return "0.0" if text == "-0.0" else text


def signed(ratio: float | None) -> str:
    """Return a change in decibels with its sign: `+1.9`."""
    if ratio is None:
        return _UNKNOWN
    made = level(ratio)
    if made is None:
        return "nothing left"
    return decibels(made) if abs(made) < _SAME else f"{made:+.1f}"


def strongest(pattern: PatternRecord) -> float:
    """Return the largest gain of all cuts [1]."""
    return max((gain for cut in pattern.cuts for gain in cut.gain), default=0.0)


def rim(pattern: PatternRecord) -> float:
    """Return the level at which pictures end outwards, the next multiple of five above the strongest [dBi]."""
    peak = level(strongest(pattern))
    return 0.0 if peak is None else _STEP * (floor(peak / _STEP) + 1.0)


def gain_at(cut: PatternCut, angle: float) -> float:
    """Return the gain at an angle of a cut [deg], its field straight between those of its neighbours [1]."""
    pairs = list(zip(cut.angle, cut.gain, strict=True))
    for (low, before), (high, after) in pairwise(pairs):
        if low <= angle <= high and high > low:
            field = sqrt(before) + (sqrt(after) - sqrt(before)) * (angle - low) / (high - low)
            return field * field
    return min(pairs, key=lambda pair: abs(pair[0] - angle))[1]


def shown_level(cut: PatternCut, angle: float, peak: float) -> str:
    """Return the level at an angle of a cut as a number; `none` where nothing leaves."""
    made = level(gain_at(cut, angle), NOTHING * peak)
    return "none" if made is None else decibels(made)


def basis(pattern: PatternRecord) -> str:
    """Return what a pattern holds for."""
    return f"Likely gain in dBi, losses counted, over {whole(pattern.ground)} Method: {whole(pattern.method)}"


def scale(pattern: PatternRecord) -> str:
    """Return how its bars are read."""
    top = rim(pattern)
    return f"A full bar is {top:.0f} dBi, no bar is {top - DEPTH:.0f} dBi or less."


def bars(pattern: PatternRecord, width: int) -> Iterator[str]:
    """Yield a pattern as lines of characters: one for each elevation, a level and a bar for each side of each cut."""
    aside = width >= _ASIDE
    for cuts in (pattern.cuts,) if aside else tuple((cut,) for cut in pattern.cuts):
        yield ""
        yield from _block(cuts, width, strongest(pattern), rim(pattern))


def _block(cuts: Sequence[PatternCut], width: int, peak: float, top: float) -> Iterator[str]:
    sides = [(cut, away) for cut in cuts for away in (False, True)]
    room = min((width - _ANGLE) // len(sides), _WIDEST)
    yield from _aside([(cut.name, 2 * room) for cut in cuts])
    yield from _aside([(cut.away if away else cut.towards, room) for cut, away in sides])
    longest = room - _NUMBER - 2
    for elevation in ELEVATIONS:
        line = f"{elevation:{_ANGLE}.0f}"
        for cut, away in sides:
            angle = 180.0 - elevation if away else elevation
            made = level(gain_at(cut, angle), NOTHING * peak)
            share = 0.0 if made is None else (made - top + DEPTH) / DEPTH
            bar = "=" * max(0, round(share * longest))
            line += f"{shown_level(cut, angle, peak):>{_NUMBER}} {bar:<{longest + 1}}"
        yield line.rstrip()


def _aside(columns: Sequence[tuple[str, int]]) -> Iterator[str]:
    """Yield texts beside each other, each in its width and set in as far as the levels."""
    made = [wrap(text, room - 3) or [""] for text, room in columns]
    for line in range(max(map(len, made))):
        told = "".join(
            f"  {lines[line] if line < len(lines) else '':<{room - 2}}"
            for lines, (_, room) in zip(made, columns, strict=True)
        )
        yield f"{' ' * _ANGLE}{told}".rstrip()


def lobes(pattern: PatternRecord) -> tuple[tuple[tuple[LobeRecord, ...], str], ...]:
    """Return the lobes with a text each, the strongest first.

    Those straight up count as one, and so do two that are alike on both sides of a cut.
    """
    left = sorted(pattern.lobes, key=lambda lobe: (-lobe.gain, lobe.elevation))
    told: list[tuple[tuple[LobeRecord, ...], str]] = []
    while left:
        lobe = left[0]
        group = tuple(other for other in left if other is lobe or _alike(lobe, other))
        left = [other for other in left if other not in group]
        made, below = level(lobe.gain), level(lobe.strength)
        if made is None or below is None:
            continue
        side = "both sides" if len(group) > 1 else lobe.side
        where = "straight up" if lobe.elevation >= UP else f"{_inner(lobe.cut)}, {side}"
        top = "as strong" if told else "the strongest"
        rank = top if below > -_SAME else f"{decibels(-below)} dB below the strongest"
        told.append((group, f"{lobe.elevation:.0f} deg, {where}: {decibels(made)} dBi, {rank}"))
    return tuple(told)


def lobe_angles(pattern: PatternRecord, lobe: LobeRecord) -> tuple[float, ...]:
    """Return the angles of its cut at which a lobe is [deg]: two where its side is neither one nor the other."""
    if lobe.elevation >= UP:
        return (lobe.elevation,)
    sides = {cut.name: (cut.towards, cut.away) for cut in pattern.cuts}
    towards, away = sides.get(lobe.cut, ("", ""))
    angles = {towards: (lobe.elevation,), away: (180.0 - lobe.elevation,)}
    return angles.get(lobe.side, (lobe.elevation, 180.0 - lobe.elevation))


def _alike(one: LobeRecord, other: LobeRecord) -> bool:
    """Return whether two lobes are one straight up, or mirror images in one cut that no reader tells apart."""
    if min(one.elevation, other.elevation) >= UP:
        return True
    mirrored = one.cut == other.cut and one.side != other.side
    return mirrored and abs(one.elevation - other.elevation) < 0.5 and abs(one.gain - other.gain) <= 0.01 * one.gain


def pattern_in_words(point: OperatingPointRecord) -> str:
    """Return what the picture of a transmission's pattern shows, with its numbers, for who cannot see it.

    Raises
    ------
    ValueError : a transmission without a pattern
    """
    pattern = point.pattern
    if pattern is None:
        raise ValueError(f"the transmission {point.name!r} has no pattern")
    peak = strongest(pattern)
    told = [f"{telling.use(point)}.", basis(pattern)]
    for cut in pattern.cuts:
        for side, away in ((cut.towards, False), (cut.away, True)):
            levels = ", ".join(
                f"{elevation:.0f} deg {shown_level(cut, 180.0 - elevation if away else elevation, peak)}"
                for elevation in reversed(ELEVATIONS)
            )
            told.append(f"{cut.name}, {side}, from the horizon up, in dBi: {levels}.")
    return " ".join([*told, *sentences(point)])


def sentences(point: OperatingPointRecord) -> tuple[str, ...]:
    """Return the lobes of a transmission, and how high its power leaves."""
    strong = () if point.pattern is None else lobes(point.pattern)
    told = (*(f"Lobe at {text}." for _, text in strong[:MOST_LOBES]), weaker(len(strong)), sky_shares(point))
    return tuple(each for each in told if each)


def weaker(count: int) -> str:
    """Return how many lobes are not told; empty where all are."""
    return f"{count - MOST_LOBES} more lobes are weaker." if count > MOST_LOBES else ""


def designed(point: OperatingPointRecord) -> PlacingRecord | None:
    """Return the placing of the loop as designed, if it is among those that were computed."""
    return next((placing for placing in point.placings if placing.as_designed), None)


def sky_shares(point: OperatingPointRecord) -> str:
    """Return how high the power leaves, over all directions; empty where it is not known."""
    placing = designed(point)
    if placing is None:
        return ""
    high, low = (
        words.amount(share, "1", "%") for share in (placing.share_above_60_degrees, placing.share_below_20_degrees)
    )
    return f"Of what reaches the sky {high} leaves above 60 deg and {low} below 20 deg, all directions counted."


PLACING_NOTE = (
    "Likely values for the same power into the loop; changes are against the loop as designed. All else on this sheet "
    "is for the loop as designed: check again before it is moved."
)


def placing_head(placings: Sequence[PlacingRecord]) -> tuple[str, ...]:
    """Return the heads of the columns of a table of placings; of volts where a capacitor has any."""
    return _PLACING_HEAD if _have_volts(placings) else _PLACING_HEAD[:-1]


def _have_volts(placings: Sequence[PlacingRecord]) -> bool:
    return any(each.capacitor_peak_voltage is not None for each in placings)


def placing_rows(placings: Sequence[PlacingRecord]) -> Iterator[tuple[str, ...]]:
    """Yield a row for each placing, as `placing_head` has them, what it is about before."""
    columns = len(placing_head(placings))
    for each in placings:
        label = f"{plane(each)}, {_metres(each)}{', as designed' if each.as_designed else ''}"
        yield (label, *_figures(each)[:columns])


def placing_sentences(placings: Sequence[PlacingRecord]) -> Iterator[str]:
    """Yield a sentence for each placing, where there is no room for a table."""
    now = next((each for each in placings if each.as_designed), None)
    for each in placings:
        sky, change, low, high, volts = _figures(each)
        changes = "" if each.as_designed else f", change {_with(change, 'dB')}, below 20 deg {_with(low, 'dB')}"
        told = f", capacitor {_with(volts, 'kV peak')}" if _have_volts(placings) else ""
        yield f"{_said(each, now)}: {sky} % to the sky{changes}, {high} % of it above 60 deg{told}."


def _figures(each: PlacingRecord) -> tuple[str, str, str, str, str]:
    volts = each.capacitor_peak_voltage
    return (
        words.number(each.overall_efficiency, "1", "%"),
        signed(each.change),
        signed(each.low_angle_change),
        words.number(each.share_above_60_degrees, "1", "%"),
        _UNKNOWN if volts is None else words.number(volts, "V", "kV"),
    )


def _with(number: str, unit: str) -> str:
    return f"{number} {unit}" if number[-1].isdigit() else number


def _said(each: PlacingRecord, now: PlacingRecord | None) -> str:
    """Return what to do to the loop to have it so."""
    metres = _metres(each)
    if each.as_designed:
        return f"As designed, {plane(each)} at {metres}"
    if now is None:
        return f"{plane(each).capitalize()} at {metres}"
    if each.plane != now.plane:
        return f"{'Lay it flat' if each.plane == 'horizontal' else 'Stand it upright'} at {metres}"
    return f"{'Raise' if each.centre_height > now.centre_height else 'Lower'} it to {metres}"


def _metres(each: PlacingRecord) -> str:
    return words.amount(each.centre_height, "m")


def plane(each: PlacingRecord) -> str:
    """Return how a loop stands."""
    return _PLANES[each.plane]


def _inner(text: str) -> str:
    """Return a text as it stands within a sentence."""
    return f"{text[:1].lower()}{text[1:]}"


def whole(text: str) -> str:
    """Return a text on one line, as a sentence that ends."""
    text = " ".join(text.split())
    return text if text.endswith((".", "!", "?")) else f"{text}."
