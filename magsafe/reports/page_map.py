"""The map of a keep-out as a page shows it: the views alone, with what their letters and lines mean beside them."""

from collections.abc import Iterator
from math import ceil

from magsafe import words
from magsafe.analysis.field_map import FieldMap
from magsafe.checks.sheet import KeepoutSheet
from magsafe.design.model import Design
from magsafe.reports.map_panels import Panels, away_of
from magsafe.reports.map_views import EDGE
from magsafe.reports.map_words import MapWords, Spot, words_of
from magsafe.reports.page import Block, Items, Paragraph, Picture
from magsafe.reports.svg import Drawing

WIDTH = 170.0  # mm
_LINES = {"public": "solid line, hatched once", "trained": "dashed line, hatched across"}


def map_blocks(
    sheet: KeepoutSheet, design: Design, index: int, made: FieldMap | None, *, height: float, most: int
) -> tuple[Block, ...]:
    """Return the map of one transmission, its key, and the places with their verdicts.

    Parameters
    ----------
    sheet, design : where people must not be, and of what design
    index : the transmission
    made : the fields about its loop; None where none are known
    height : how tall the views are together at the most [mm]
    most : how many places are told
    """
    said = words_of(sheet, design, index)
    drawing = Drawing(WIDTH)
    panels = Panels(drawing, design, said, made)
    bottom = panels.draw(0.0, WIDTH - 2.0 * EDGE, height)
    about = " ".join([said.shown, *(f"{spot.verdict}: {spot.text}." for spot in said.spots)])
    picture = Picture(
        svg=drawing.rendered(bottom + 1.0, said.title, about),
        alt=f"Map of the keep-out to scale. {about}",
        caption=f"To scale: {said.shown}.",
        width=WIDTH,
        height=bottom + 1.0,
    )
    return (
        *_warnings(said, made),
        picture,
        Items((*_key(said, panels), *_places(said.spots, panels, most)), style="small"),
        *([] if said.spots else [Paragraph("No place is given: where people are is not judged.", "strong")]),
    )


def _warnings(said: MapWords, made: FieldMap | None) -> Iterator[Block]:
    if not said.contours:
        yield Paragraph("No contour is drawn, because no keep-out is known.", "strong")
    elif said.not_proven:
        yield Paragraph("Not all that is drawn is proven: see what stands in the way.", "strong")
    if said.contours and made is not None and not made.bounded:
        yield Paragraph("The keep-out reaches further than was searched; contours end there open.", "strong")


def _key(said: MapWords, panels: Panels) -> Iterator[str]:
    for each in said.contours:
        yield f"{each.letter} ({_LINES[each.who]}): {each.text}."
    yield f"T (dash and dot): touch, {ceil(100.0 * panels.touch) / 100.0:.2f} m from the centre; nobody comes nearer."


def _places(spots: tuple[Spot, ...], panels: Panels, most: int) -> Iterator[str]:
    for spot in spots[:most]:
        yield f"{spot.number}: {spot.verdict}, {_told(spot, panels)}."
    if len(spots) > most:
        yield f"{len(spots) - most} more places: see People."


def _told(spot: Spot, panels: Panels) -> str:
    away = "" if spot in panels.inside else f"; outside the picture, {words.amount(away_of(spot), 'm')} from the centre"
    return f"{spot.text}{away}"
