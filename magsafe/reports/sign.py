"""A fence sign and a pocket card on one A4 sheet at true scale, in black and white, as SVG."""

from collections.abc import Sequence
from math import hypot
from typing import Any

from magsafe.checks.sheet import KeepoutSheet, Sheet
from magsafe.design.model import Design
from magsafe.reports.boxes import Paragraph, cut, fill, largest, with_clip
from magsafe.reports.pocket_card import CARD, draw_card
from magsafe.reports.sign_words import SignWords, Tier, several, sign_words
from magsafe.reports.svg import Box, Drawing, Point

WIDTH, HEIGHT = 210.0, 297.0  # mm, A4 upright
SIGN: Box = (0.0, 0.0, 210.0, 148.0)  # A5 lying
_FRAME: Box = (6.0, 6.0, 204.0, 143.0)
_LEFT, _RIGHT = 11.0, 199.0
_HEAD = 23.0  # where the band ends
_TIERS = 88.0  # where the distances end
_BETWEEN = 65.0  # the tiers
_COLUMN = 103.0  # between the columns
_ORIGIN = 138.0
_CARDS = 166.0
_THIN: dict[str, Any] = {"stroke": "#000", "stroke_width": 0.2}
_THICK: dict[str, Any] = {"stroke": "#000", "stroke_width": 0.6}


def fence_sign(sheet: Sheet, people: KeepoutSheet, design: Design) -> str:
    """Return the sign and the card as SVG.

    Parameters
    ----------
    sheet : the whole result, which knows the volts
    people : its part about people
    design : the design of both
    """
    said = sign_words(sheet, people, design)
    drawing = Drawing(WIDTH)
    _sign(drawing, said, design)
    _cutting(drawing)
    draw_card(drawing, ((WIDTH - 2.0 * CARD[0]) / 2.0, _CARDS), said, people, design)
    _printing(drawing)
    about = " ".join([said.header, *(f"{tier.label} {tier.large}." for tier in said.tiers)])
    return drawing.rendered(HEIGHT, said.title, about)


# The sign --------------------------------------------------------------------------------------------------


def _sign(drawing: Drawing, said: SignWords, design: Design) -> None:
    left, top, right, bottom = _FRAME
    with_clip(drawing, "sign", SIGN)
    drawing.add("rect", x=left, y=top, width=right - left, height=bottom - top, stroke="#000", stroke_width=1.0)
    drawing.add("rect", x=left, y=top, width=right - left, height=_HEAD - top, fill="#000")
    size = largest(said.header, _RIGHT - _LEFT, (9.5, 5.0), bold=True)
    middle = {"text_anchor": "middle", "font_weight": "bold", "fill": "#fff"}
    drawing.text((0.5 * (left + right), 0.5 * (top + _HEAD) + 0.36 * size), said.header, size, id="header", **middle)
    public, trained = said.tiers
    _tier(drawing, "public", public, (_LEFT, _HEAD + 1.5, 132.0, _BETWEEN - 0.5), 28.0)
    _tier(drawing, "trained", trained, (_LEFT, _BETWEEN + 0.5, 132.0, _TIERS - 0.5), 15.0)
    _picture(drawing, said, design, (136.0, _HEAD + 2.0, _RIGHT, _TIERS - 1.0))
    drawing.path([[(left, _TIERS), (right, _TIERS)], [(left, _BETWEEN), (133.0, _BETWEEN)]], **_THIN)
    drawing.path(
        [[(_COLUMN, _TIERS), (_COLUMN, _ORIGIN - 1.5)], [(left, _ORIGIN - 1.5), (right, _ORIGIN - 1.5)]], **_THIN
    )
    fill(drawing, "danger", (_LEFT, _TIERS + 0.5, _COLUMN - 3.0, 120.0), lambda n: _danger(said, n), (4.2, 2.3))
    _ask(drawing, said, (_LEFT, 120.0, _COLUMN - 3.0, _ORIGIN - 2.0))
    fill(drawing, "basis", (_COLUMN + 3.0, _TIERS + 0.5, _RIGHT, _ORIGIN - 2.0), lambda n: _basis(said, n), (3.4, 2.2))
    size = largest(said.origin, _RIGHT - _LEFT, (2.6, 2.1))
    drawing.text((_LEFT, _ORIGIN + 2.6), cut(said.origin, _RIGHT - _LEFT, size), size, id="origin")
    drawing.close()


def _tier(drawing: Drawing, who: str, tier: Tier, box: Box, most: float) -> None:
    """Write what is told to one tier: its line, its distance as large as there is room, small lines beside or below."""
    left, top, right, bottom = box
    with_clip(drawing, who, box)
    size = largest(tier.label, right - left, (6.0, 3.5), bold=True)
    drawing.text((left, top + 1.0 * size), cut(tier.label, right - left, size, bold=True), size, font_weight="bold")
    beside = most < 20.0
    room = 0.55 * (right - left) if beside else right - left
    wide = largest(tier.large, room, (most, 5.0), bold=True)
    base = top + 1.4 * size + 0.78 * wide + 0.3 * (most - wide)
    drawing.text((left, base), tier.large, wide, font_weight="bold", id=f"{who}-distance")
    lines = [*tier.small]
    if tier.metres and not beside:
        lines.insert(0, "from the centre of the loop, for people on the floors")
    start = (left + room + 2.0, top + 1.5 * size) if beside else (left, base + (0.8 if tier.metres else 0.25 * wide))
    drawing.close()
    told = [Paragraph("", line) for line in lines] if beside else [Paragraph("", "; ".join(lines))]
    fill(drawing, f"{who}-more", (*start, right, bottom), lambda _: told, (3.6, 2.3), most=1)


def _danger(said: SignWords, most: int) -> list[Paragraph]:
    told = [
        Paragraph("Behind it:", f"{said.behind}."),
        Paragraph(
            "Pacemaker or other implant:",
            f"stay {'well away' if said.outside == 'away' else said.outside} until your clinician has cleared it. The "
            "limits do not protect you.",
        ),
        Paragraph("When:", "while the transmitter is on."),
    ]
    if said.stopped:
        told.insert(1, Paragraph("Too near, nobody stays there:", f"{several(said.stopped, min(most, 3), ', ')}."))
    return told


def _basis(said: SignWords, most: int) -> list[Paragraph]:
    told = []
    if not said.proven:
        lead = f"Not proven. Keep everybody {said.outside} until this is known:"
        told.append(Paragraph(lead, f"{several(said.reasons, most)}."))
    told.append(Paragraph("Holds for:" if said.proven else "Computed for:", f"{several(said.uses, most)}{said.apart}."))
    rules = several(said.rules, most)
    if said.proven:
        told.append(Paragraph("Outside these distances:", f"within the limits of {rules}, as computed here."))
        if said.thin:
            told.append(Paragraph("Narrow at best:", f"{said.thin}. See the sheet."))
    elif said.rules:
        told.append(Paragraph("Not proven to be within the limits of", f"{rules}."))
    return told


def _ask(drawing: Drawing, said: SignWords, box: Box) -> None:
    """Write whom to ask; what the design does not tell is a line for a pen."""
    left, top, right, bottom = box
    with_clip(drawing, "ask", box)
    drawing.text((left, top + 4.0), "Ask", 3.6, font_weight="bold")
    step, start = (bottom - top - 1.0) / len(said.ask), left + 30.0
    for row, (label, value) in enumerate(said.ask):
        base = top + row * step + 4.0
        drawing.text((left + 10.0, base), label, 2.8)
        if value:
            size = largest(value, right - start, (4.0, 2.6), bold=True)
            told = cut(value, right - start, size, bold=True)
            drawing.text((start, base), told, size, font_weight="bold")
        else:
            drawing.path([[(start, base + 0.6), (right, base + 0.6)]], id=f"blank-{row}", **_THIN)
    drawing.close()


# The picture -----------------------------------------------------------------------------------------------


def _picture(drawing: Drawing, said: SignWords, design: Design, box: Box) -> None:
    """Draw a loop on its mast and a person away from it, and how far; it is not to scale."""
    left, top, right, bottom = box
    with_clip(drawing, "picture", box)
    ground, loop, person = bottom - 12.0, (left + 16.0, top + 17.0), right - 9.0
    edge = person - 8.0
    drawing.add("rect", x=left, y=top + 1.0, width=edge - left, height=ground - top - 1.0, fill="url(#sign-hatch)")
    drawing.define(
        '<pattern id="sign-hatch" width="3" height="3" patternUnits="userSpaceOnUse" patternTransform="rotate(45)">'
        '<path d="M0 1.5H3" stroke="#000" stroke-width="0.15"/></pattern>'
    )
    drawing.path([[(edge, top + 1.0), (edge, ground)]], stroke="#000", stroke_width=0.5, stroke_dasharray="2.4 1.4")
    drawing.path([[(left, ground), (right, ground)]], **_THICK)
    x, y = loop
    tall = 12.0 if design.loop.plane == "vertical" else 3.5
    for stroke, width in (("#fff", 4.0), ("#000", 1.4)):
        drawing.path([[(x, y + tall), (x, ground)]], stroke=stroke, stroke_width=width)
        drawing.add("ellipse", cx=x, cy=y, rx=12.0, ry=tall, stroke=stroke, stroke_width=width)
    if design.capacitor.kind != "none":
        mid = y - tall
        drawing.add("rect", x=x - 2.4, y=mid - 2.4, width=4.8, height=4.8, fill="#fff", stroke="#000", stroke_width=0.4)
        plates = [[(x + side, mid - 1.6), (x + side, mid + 1.6)] for side in (-0.7, 0.7)]
        drawing.path(plates, stroke="#000", stroke_width=0.6)
    _person(drawing, (person, ground))
    level = ground + 3.6
    _arrow(drawing, (edge, level), (x, level))
    drawing.path([[(at, ground + 0.6), (at, level + 1.4)] for at in (x, edge)], **_THIN)
    told = said.tiers[0].large if said.tiers[0].metres else "not proven"
    size = largest(told, edge - x + 8.0, (5.0, 3.0), bold=True)
    middle = 0.5 * (x + edge)
    drawing.text(
        (middle, level + 1.6 + size), told, size, text_anchor="middle", font_weight="bold", id="picture-distance"
    )
    drawing.text((right, top + 3.0), "not to scale", 2.1, text_anchor="end")
    drawing.close()


def _person(drawing: Drawing, feet: Point) -> None:
    x, y = feet
    drawing.add("circle", cx=x, cy=y - 23.0, r=2.6, fill="#000")
    body = [(x - 3.4, y - 19.4), (x + 3.4, y - 19.4), (x + 2.6, y - 9.5), (x - 2.6, y - 9.5)]
    legs = [[(x - 1.5, y - 10.0), (x - 1.9, y)], [(x + 1.5, y - 10.0), (x + 1.9, y)]]
    arms = [[(x + side * 3.4, y - 18.8), (x + side * 4.8, y - 10.5)] for side in (-1.0, 1.0)]
    drawing.path([body], closed=True, fill="#000")
    drawing.path([*legs, *arms], stroke="#000", stroke_width=1.8, stroke_linecap="round")


def _arrow(drawing: Drawing, one: Point, other: Point) -> None:
    """Draw a line with a head at each end."""
    drawing.path([[one, other]], stroke="#000", stroke_width=0.4)
    for here, there in ((one, other), (other, one)):
        away = hypot(there[0] - here[0], there[1] - here[1])
        along = ((there[0] - here[0]) / away, (there[1] - here[1]) / away)
        back = (here[0] + 2.4 * along[0], here[1] + 2.4 * along[1])
        across = (-0.9 * along[1], 0.9 * along[0])
        head = [here, (back[0] + across[0], back[1] + across[1]), (back[0] - across[0], back[1] - across[1])]
        drawing.path([head], closed=True, fill="#000")


# The sheet of paper ----------------------------------------------------------------------------------------


def _cutting(drawing: Drawing) -> None:
    """Draw where the sign and the card are cut, and where the card is folded."""
    lines: list[Sequence[Point]] = [[(0.0, SIGN[3]), (8.0, SIGN[3])], [(WIDTH - 8.0, SIGN[3]), (WIDTH, SIGN[3])]]
    left, wide, tall = (WIDTH - 2.0 * CARD[0]) / 2.0, CARD[0], CARD[1]
    top, bottom = _CARDS, _CARDS + tall
    for x in (left, left + wide, left + 2.0 * wide):
        lines += [[(x, top - 6.0), (x, top - 1.0)], [(x, bottom + 1.0), (x, bottom + 6.0)]]
    for y in (top, bottom):
        lines += [[(left - 6.0, y), (left - 1.0, y)], [(left + 2.0 * wide + 1.0, y), (left + 2.0 * wide + 6.0, y)]]
    drawing.path(lines, id="cut-marks", **_THIN)
    fold = [[(left + wide, top), (left + wide, bottom)]]
    drawing.path(fold, id="fold", stroke="#000", stroke_width=0.1, stroke_dasharray="1.5 1.5")


def _printing(drawing: Drawing) -> None:
    text = (
        "Print on A4 at 100 %, without fitting to the page. Cut at the marks; fold the card along its middle, the "
        "print outside. The line below is 100 mm long if the scale is true."
    )
    base = _CARDS + CARD[1] + 12.0
    fill(
        drawing,
        "printing",
        (19.4, base, WIDTH - 19.4, base + 12.0),
        lambda _: [Paragraph("", text)],
        (2.6, 2.6),
        most=1,
    )
    y = base + 18.0
    ends = [[(x, y - 1.5), (x, y + 1.5)] for x in (19.4, 119.4)]
    drawing.path([[(19.4, y), (119.4, y)], *ends], id="hundred", **_THIN)
    drawing.text((121.0, y + 0.9), "100 mm", 2.6)
