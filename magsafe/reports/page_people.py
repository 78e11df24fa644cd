"""People: places and distances by rule and tier, what transmissions worked in turn add up to, exemptions."""

from collections.abc import Iterator

from magsafe import words
from magsafe.checks.sheet import ORDER, ExposureRecord, OperatingPointRecord, PlaceRecord, Sheet
from magsafe.reports import exemption, people, sessions, telling
from magsafe.reports.page import Block, Heading, Items, Paragraph, Said, Table

_DISTANCES = "Keep-out in metres from the loop's centre, averaged as the rule averages; last column key-down"


def exposure(sheet: Sheet) -> Iterator[Block]:
    """Yield places, distances and exemptions of each transmission."""
    points = sheet.operating_points
    if not any(point.exposure for point in points):
        yield Heading("People")
        yield Paragraph("No rule and no place is judged: see Findings.", "strong")
        return
    yield Heading("People")
    for point in points:
        yield from _places(point)
        rows = tuple(people.distance_rows(point))
        if rows:
            columns = people.distance_columns(point)
            share = 0.7 / len(columns)
            yield Table(
                f"{_DISTANCES}: {telling.use(point)}", ("rule and tier", *columns), rows,
                (0.3, *(share,) * len(columns)), tuple(range(1, len(columns) + 1)),
            )  # fmt: skip
    whys = dict.fromkeys(each.why for point in points for each in point.exposure if each.why)
    if whys:
        yield Items(tuple(f"{why[0].upper()}{why[1:]}." for why in whys if why), style="small")
    yield from _exemptions(sheet)


def _places(point: OperatingPointRecord) -> Iterator[Block]:
    found = [(place, each) for each in point.exposure for place in each.places]
    if not found:
        return
    rows = tuple(
        (words.short(place.name), f"{each.rule} {each.who}, {each.edition}", _told(place, each), Said(place.verdict))
        for place, each in sorted(found, key=lambda pair: ORDER.index(pair[0].verdict))
    )
    yield Table(
        f"Places: {telling.use(point)}", ("place", "rule, tier, edition", "field at worst, RMS", "verdict"), rows,
        (0.17, 0.2, 0.5, 0.13),
    )  # fmt: skip


def _told(place: PlaceRecord, exposed: ExposureRecord) -> str:
    """Return what is said of a place without its name and rule, which have columns of their own."""
    said = people.place_text(place, exposed)
    return f"{said.removeprefix(f'{words.short(place.name)}, {exposed.rule} {exposed.who}: ')}."


def _exemptions(sheet: Sheet) -> Iterator[Block]:
    points = sheet.operating_points
    warnings = tuple(exemption.warnings(points))
    if not warnings:
        return
    yield Paragraph(exemption.HEADING, "strong")
    yield Paragraph(" ".join(warnings), "small")
    yield Items(tuple(f"{telling.use(p)}: {said}" for p in points for said in exemption.sentences(p)), style="small")


def worked_in_turn(sheet: Sheet) -> Iterator[Block]:
    """Yield what each session adds up to; nothing where none is stated."""
    for session in sheet.sessions:
        yield Heading(f"Worked in turn: {words.short(session.name, 80)}")
        rows = tuple((text, Said(verdict)) for verdict, text in sessions.places(session, sheet.operating_points))
        if rows:
            yield Table("Places during this session", ("place, rule and tier", "verdict"), rows, (0.87, 0.13))
        columns = people.distance_columns(sheet.operating_points[session.transmissions[0]])[:-1]
        distances = tuple(sessions.distance_rows(session, len(columns)))
        share = 0.7 / len(columns)
        yield Table(
            "Keep-out of this session in metres from the loop's centre", ("rule and tier", *columns), distances,
            (0.3, *(share,) * len(columns)), tuple(range(1, len(columns) + 1)),
        )  # fmt: skip
