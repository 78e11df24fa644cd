"""The map of a keep-out: plan and upright views to one scale, with all that must be known beside them, as SVG.

Line style and hatching tell the tier, a letter the rule, a word the verdict; colour only helps.
"""

from magsafe.analysis.field_map import FieldMap
from magsafe.checks.sheet import KeepoutSheet
from magsafe.design.model import Design
from magsafe.reports import telling
from magsafe.reports.map_panels import COLOURS, DASHES, SMALL, TOUCH_DASHES, Panels, away_of, capacitor, tag
from magsafe.reports.map_views import EDGE, WIDTH
from magsafe.reports.map_words import MapWords, Spot, words_of
from magsafe.reports.svg import TEXT, Drawing, wrapped


def keepout_map(sheet: KeepoutSheet, design: Design, index: int, made: FieldMap | None) -> str:
    """Return the map of one transmission as SVG.

    Parameters
    ----------
    sheet : where people must not be
    design : the design of the sheet
    index : the transmission
    made : the fields about the loop; None where none are known, then no contour is drawn and the map says so
    """
    return _Map(sheet, design, words_of(sheet, design, index), made).drawn()


class _Map:
    """Puts one map on its sheet, from the top down."""

    def __init__(self, sheet: KeepoutSheet, design: Design, said: MapWords, made: FieldMap | None) -> None:
        self.sheet, self.design, self.said, self.made = sheet, design, said, made
        self.drawing = Drawing(WIDTH)
        self.panels = Panels(self.drawing, design, said, made)
        self.y = EDGE

    def drawn(self) -> str:
        """Return the whole map."""
        self._head()
        self.y = self.panels.draw(self.y)
        self._legend()
        self._places()
        self._ending()
        about = " ".join([self.said.shown, *(spot_line(spot) for spot in self.said.spots)])
        return self.drawing.rendered(self.y + EDGE, self.said.title, about)

    # Words -------------------------------------------------------------------------------------------------

    def _say(self, text: str, size: float = TEXT, indent: float = 0.0, weight: str = "normal") -> None:
        for line in wrapped(text, WIDTH - 2.0 * EDGE - indent, size):
            self.y += 1.45 * size
            self.drawing.text((EDGE + indent, self.y), line, size, font_weight=weight)

    def _head(self) -> None:
        verdict = self.sheet.verdict
        self.drawing.mark(verdict, (EDGE + 1.6, self.y + 3.1), 3.0)
        self._say(f"{verdict}: {telling.people_headline(self.sheet)}", 3.0, 4.5, "bold")
        self.y += 1.0
        self._say(self.said.title, 3.4, weight="bold")
        self._say(self.said.shown)
        self._say(self.said.origin, SMALL)
        if not self.said.contours:
            self._say("No contour is drawn, because no keep-out is known: see below.", weight="bold")
        elif self.said.not_proven:
            self._say("Not all that is drawn is proven: see below.", weight="bold")
        if self.said.contours and self.made is not None and not self.made.bounded:
            self._say("The keep-out reaches further than was searched; contours end there open.", weight="bold")
        self.y += 2.0

    def _legend(self) -> None:
        for each in self.said.contours:
            self._key(each.who, each.letter, each.text)
        self._key(
            "touch", "T", f"touch: {self.panels.touch:.2f} m from the centre, the outline and 1 m; nobody comes nearer"
        )
        turns = self.design.loop.turns
        self.y += 0.4
        self.drawing.path([[(EDGE, self.y + 2.6), (EDGE + 11.0, self.y + 2.6)]], stroke="#000", stroke_width=0.6)
        if self.design.capacitor.kind != "none":
            capacitor(self.drawing, (EDGE + 14.0, self.y + 2.6))
        told = ""
        if self.design.capacitor.kind != "none":
            told = " and where its capacitor may be" if self.made and len(self.made.ports) > 1 else " and its capacitor"
        self._say(f"the loop{f', {turns} turns,' if turns > 1 else ''}{told}", indent=17.0)
        self.y += 0.8
        told = "Hatched once: the public keeps out; hatched across: trained people too; both at any height."
        if self.made is not None and self.made.floors is not None:
            told += (
                " A thin line of the same kind, where it is apart, is for people on the floors only, from 0 to 2 m "
                "above them."
            )
        if any(spot.fence for spot in self.said.spots):
            told += " A double line is a fence."
        if any(not spot.fence for spot in self.said.spots):
            told += " A box is the column that a person takes up, 0.6 m wide; a side view shows those near its plane."
        self._say(told, SMALL)
        self.y += 1.0

    def _key(self, kind: str, letter: str, text: str) -> None:
        top, left = self.y, EDGE
        self.y += 0.4
        line = [[(left, top + 2.6), (left + 11.0, top + 2.6)]]
        if kind == "touch":
            self.drawing.path(line, stroke="#000", stroke_width=0.3, stroke_dasharray=TOUCH_DASHES)
        else:
            box = {"x": left, "y": top + 0.8, "width": 11.0, "height": 1.8}
            for who in ("public", "trained") if kind == "trained" else ("public",):
                self.drawing.add("rect", **box, fill=f"url(#hatch-{who})")
            dash = DASHES[kind]
            self.drawing.path(line, stroke=COLOURS[kind], stroke_width=0.5, stroke_dasharray=dash)
        tag(self.drawing, letter, (left + 14.0, top + 2.7))
        self._say(text, indent=17.0)

    def _places(self) -> None:
        for spot in self.said.spots:
            self.drawing.mark(spot.verdict, (EDGE + 8.0, self.y + 2.7))
            self.drawing.text((EDGE, self.y + 3.6), spot.number, font_weight="bold")
            where = (
                "" if spot in self.panels.inside else f"; outside the picture, {away_of(spot):.3g} m from the centre"
            )
            self._say(f"{spot_line(spot)}{where}", indent=11.0)
        if not self.said.spots:
            self._say("No place is given: where people are is not judged.", weight="bold")
        self.y += 1.0

    def _ending(self) -> None:
        for text in self.said.not_proven:
            self.drawing.mark("unproven", (EDGE + 1.6, self.y + 2.5), SMALL)
            self._say(f"Not proven: {text}.", SMALL, 4.5)
        for text in self.said.notes:
            self._say(text, SMALL)


def spot_line(spot: Spot) -> str:
    """Return what the map's list says of a place: the word first."""
    return f"{spot.verdict}: {spot.text}"
