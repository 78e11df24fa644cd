"""The pocket card for whoever keys the transmitter: powers and distances in front, what to do on the back."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from math import ceil
from typing import Any

from magsafe import words
from magsafe.checks.sheet import ORDER, DistanceRecord, KeepoutPoint, KeepoutSheet
from magsafe.design.model import Design
from magsafe.reports import telling
from magsafe.reports.boxes import LEADING, Paragraph, cut, fill, lines_of, with_clip
from magsafe.reports.people import on_floors
from magsafe.reports.sign_words import (
    Exposure,
    SignWords,
    State,
    clear_to,
    key_downs,
    largest_of,
    of_tier,
    several,
    state_of,
    strictness,
)
from magsafe.reports.svg import Drawing, Point

CARD = (85.6, 54.0)  # mm, one side
_EDGE = 2.6
_SMALL = 2.15  # mm, 6 points
_NAME, _POWER, _CELL = 25.2, 12.0, 7.2  # mm, the columns
_ROW = 5.7
_HEADS = 6.6
_LEGEND = (
    "Metres from the loop's centre: floor, people on the floors; any, in any direction; key-down, the larger of both "
    "for an unbroken carrier (P public, T trained). "
)
_STAR = "* not proven: powers at most, distances at least. ? not known: keep everybody away."
_LINE: dict[str, Any] = {"stroke": "#000", "stroke_width": 0.15}


def draw_card(drawing: Drawing, corner: Point, said: SignWords, people: KeepoutSheet, design: Design) -> None:
    """Draw front and back beside each other, the upper left corner of the front at a point."""
    x, y = corner
    _front(drawing, (x + _EDGE, y + _EDGE), said, people)
    _back(drawing, (x + CARD[0] + _EDGE, y + _EDGE), said, people, design)


def _front(drawing: Drawing, corner: Point, said: SignWords, people: KeepoutSheet) -> None:
    left, top = corner
    right, bottom = left + CARD[0] - 2.0 * _EDGE, top + CARD[1] - 2.0 * _EDGE
    with_clip(drawing, "card-front", (left, top, right, bottom))
    drawing.text((left, top + 2.8), cut(said.title, right - left, 2.9, bold=True), 2.9, font_weight="bold")
    solid = "#000" if people.verdict == "stop" else "#fff"
    drawing.mark(people.verdict, (left + 1.4, top + 5.9), 2.6, fill=solid)
    drawing.close()
    headline = [Paragraph(f"{people.verdict}:", telling.people_headline(people))]
    fill(
        drawing, "card-headline", (left + 4.0, top + 3.6, right, top + 10.0), lambda _: headline, (2.4, _SMALL), most=1
    )
    rows = [*_together(people, proven=said.proven), *_by_power(people, proven=said.proven)]
    told, below, size, table, shown = Paragraph("", ""), bottom, 2.1, top + 10.2, 0
    for shown in range(len(rows), 0, -1):
        legend = _LEGEND + ("Powers: clear for people alone." if said.proven else _STAR)
        told = Paragraph(_more(len(rows) - shown), legend)
        below = bottom - LEADING * size * len(lines_of(told, right - left, size)) - 0.1
        if table + _HEADS + shown * _ROW <= below:
            break
    with_clip(drawing, "card-table", (left, table, right, below))
    _heads(drawing, (left, table))
    for number, row in enumerate(rows[:shown]):
        _draw_row(drawing, (left, table + _HEADS + number * _ROW), row, right)
    drawing.close()
    fill(drawing, "card-legend", (left, below, right, bottom), lambda _: [told], (size, size), most=1)


@dataclass(frozen=True, slots=True)
class _Row:
    """A row of the table: a name, how it is used, the power that is clear, distances."""

    name: str
    use: str
    power: str
    cells: tuple[str, ...]


def _more(count: int) -> str:
    return f"And {count} more: see the sheet." if count else ""


def _least_power(point: KeepoutPoint) -> tuple[float, tuple[float, float]]:
    """Return what sorts transmissions: those that bear least first and unknown ones before them, then by reach."""
    value = point.power_ceiling.value
    return -1.0 if value is None else value, strictness(point)


def _heads(drawing: Drawing, corner: Point) -> None:
    left, top = corner
    drawing.text((left, top + 2.4), "strictest first", _SMALL)
    x = left + _NAME + _POWER
    drawing.text((x, top + 2.4), "clear to", _SMALL, text_anchor="end")
    drawing.text((x, top + 5.1), "W PEP", _SMALL, text_anchor="end")
    for group, subs in (("public", ("floor", "any")), ("trained", ("floor", "any")), ("key-down", ("P", "T"))):
        drawing.text((x + 2.0 * _CELL, top + 2.4), group, _SMALL, text_anchor="end")
        for sub in subs:
            x += _CELL
            drawing.text((x, top + 5.1), sub, _SMALL, text_anchor="end")
    drawing.path([[(left, top + 6.0), (x, top + 6.0)]], **_LINE)


def _draw_row(drawing: Drawing, corner: Point, row: _Row, right: float) -> None:
    left, top = corner
    drawing.text((left, top + 2.2), cut(row.name, _NAME, _SMALL, bold=True), _SMALL, font_weight="bold")
    drawing.text((left, top + 4.8), cut(row.use, right - left, _SMALL), _SMALL)
    x = left + _NAME + _POWER
    drawing.text((x, top + 2.2), row.power, _SMALL, text_anchor="end", font_weight="bold")
    for cell in row.cells:
        x += _CELL
        drawing.text((x, top + 2.2), cell, _SMALL, text_anchor="end")


def _by_power(people: KeepoutSheet, *, proven: bool) -> Iterator[_Row]:
    """Yield a row for each transmission, the one that bears least first."""
    for point in sorted(people.operating_points, key=_least_power):
        frequency = words.frequency(point.frequency)
        use = f"{'' if point.name == frequency else f'{frequency}, '}{words.watts(point.power)} PEP"
        yield _Row(point.name, use, clear_to(point.power_ceiling), _cells(point.exposure, proven=proven))


def _together(people: KeepoutSheet, *, proven: bool) -> Iterator[_Row]:
    """Yield a row for each list of transmissions that are worked in turn: together they reach further than alone."""
    for session in people.sessions:
        yield _Row("worked in turn", session.name, "", (*_cells(session.exposure, proven=proven)[:4], "", ""))


def _cells(exposure: Sequence[Exposure], *, proven: bool) -> tuple[str, ...]:
    found, carriers = [], []
    for who in ("public", "trained"):
        records = of_tier(exposure, who)
        state = state_of(records, proven=proven)
        known = [each.keepout for each in records if each.keepout is not None]
        floors = [distance for each in known for distance in on_floors(each) if distance is not None]
        found += [_metres(floors, state), _metres([each.any_direction for each in known], state)]
        carrier = largest_of(key_downs(records))
        carriers.append(_metres([] if carrier is None else [carrier], state))
    return (*found, *carriers)


def _metres(found: list[DistanceRecord], state: State) -> str:
    """Return the largest of some distances; `?` where it is not known, a star where it is not proven."""
    if state in ("unknown", "no rule") or not found or any(each.distance is None for each in found):
        return "?"
    most = max(each.distance or 0.0 for each in found)
    told = f"{most:.1f}" if most < 99.95 else f"{ceil(most - 1e-9)}"
    return told if state == "known" else f"{told}*"


def _back(drawing: Drawing, corner: Point, said: SignWords, people: KeepoutSheet, design: Design) -> None:
    left, top = corner
    right, bottom = left + CARD[0] - 2.0 * _EDGE, top + CARD[1] - 2.0 * _EDGE

    tune_ups, tuned = _tune_ups(people, design), design.capacitor.kind != "none"

    def told(most: int) -> list[Paragraph]:
        return [
            *([] if said.proven else [Paragraph("Not proven, see the sign:", "key nothing with people about.")]),
            Paragraph(
                "If somebody comes near:",
                "1. Stop transmitting. 2. Wait until they are outside the distance. 3. Look round, then key again.",
            ),
            Paragraph("Tune-up:", f"{several(tune_ups, most)}."),
            Paragraph(
                "Burns:", f"{said.volts}. A touch burns deeply, also at a few watts. Parts stay hot after key-down."
            ),
            *([Paragraph("", "Never turn the capacitor by hand under power.")] if tuned else []),
            Paragraph("Implants:", f"wearers stay {said.outside} until their clinician has cleared it."),
            Paragraph("Storm:", "disconnect the feed line first. Keep clear of power lines."),
            Paragraph("", f"{people.date}, input {people.design.sha256[:12]}"),
        ]

    fill(drawing, "card-back", (left, top, right, bottom), told, (2.8, 2.1))


def _tune_ups(people: KeepoutSheet, design: Design) -> list[str]:
    """Return what is told of tuning: the carriers stated, and the places judged while tuning, the worst first."""
    carriers = [
        f"{words.watts(each.tune_up.power)} for {words.duration(each.tune_up.time)} at most ({words.short(title, 24)})"
        for each, title in zip(design.transmission, design.titles, strict=True)
        if each.tune_up is not None
    ]
    places = []
    for place in design.place:
        if place.when != "tuning":
            continue
        found = [
            record
            for point in people.operating_points
            for each in point.exposure
            for record in each.places
            if record.name == place.name
        ]
        verdict = min((record.verdict for record in found), key=ORDER.index, default="unproven")
        powers = [record.power_ceiling for record in found]
        known = [power for power in powers if power is not None]
        bears = f", bears {words.power(min(known))} of carrier" if known and len(known) == len(powers) else ""
        places.append((ORDER.index(verdict), f"at {words.short(place.name, 24)} ({place.who}) {verdict}{bears}"))
    told = [text for _, text in sorted(places, key=lambda each: each[0])]
    if not carriers and not told:
        return ["none is stated. Tune at 5 W or less, from a distance"]
    return [*told, *carriers]
