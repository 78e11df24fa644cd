"""The views of a map drawn: contours, loop, ground and floors, places with their words, measures."""

from collections.abc import Sequence
from math import cos, floor, hypot, radians, sin
from typing import Any

from magsafe.analysis.field_map import FieldMap, Grid, Layer
from magsafe.design.model import Design
from magsafe.design.shape import outline
from magsafe.reports.map_views import EDGE, HEIGHT, LEFT, WIDTH, Projection, View, arranged, round_length, view_of
from magsafe.reports.map_words import MapWords, Spot
from magsafe.reports.svg import Box, Drawing, Labels, Point, around, everywhere, nearest, number, width_of

SMALL = 2.2
_FAR = 4.0  # times the keep-out's reach: places further away would leave nothing of it to see, and are told instead
COLOURS = {"public": "#0072B2", "trained": "#000000"}
DASHES = {"public": "none", "trained": "3 1.2"}
TOUCH_DASHES = "2.6 0.9 0.5 0.9"
_SAME = 0.1  # m: a floors' contour nearer to the other than distances are told is not drawn twice
_THIN: dict[str, Any] = {"stroke": "#000", "stroke_width": 0.15}
_THICK: dict[str, Any] = {"stroke": "#000", "stroke_width": 0.5}


class Panels:
    """All views of one map, to one scale.

    `touch` is the touch distance [m], `inside` are the places that are near enough to be drawn.
    """

    def __init__(self, drawing: Drawing, design: Design, said: MapWords, made: FieldMap | None) -> None:
        self.drawing, self.design, self.said, self.made = drawing, design, said, made
        self.touch = made.touch if made else outline(design.loop).reach + 1.0
        self.centre = design.loop.centre_height or 0.0
        self.known_height = design.loop.centre_height is not None
        # Only what the sheet knows is drawn: where it says nothing of a tier, a contour would say more than is known.
        told = {(rule, each.who) for each in said.contours for rule in each.rules}
        layers = tuple(layer for layer in (made.layers if made else ()) if (layer.rule, layer.who) in told)
        self.drawn_layers = layers
        self.layers = {
            each.letter: tuple(layer for layer in layers if layer.rule in each.rules and layer.who == each.who)
            for each in said.contours
        }
        self.reach = max([self.touch, *(float(g.outermost(layers).max()) for g in self._grids())])
        self.inside = tuple(s for s in said.spots if away_of(s) <= _FAR * self.reach)

    @property
    def _free(self) -> bool:
        """Whether there is no ground: then level 0 is a level like others."""
        return self.design.ground_name == "none"

    def _grids(self) -> tuple[Grid, ...]:
        return () if self.made is None else (self.made.plan, *self.made.sides)

    def draw(self, top: float, wide: float = WIDTH - 2.0 * EDGE, height: float = HEIGHT) -> float:
        """Draw all views below a height on the sheet, in so much room, and return where they end [mm]."""
        widest = max((_label_width(spot) for spot in self.inside), default=0.0)
        plan, sides = self._plan(0.0), self._sides(0.0)
        _, scale, _ = arranged(plan, sides, top, wide, height)
        # The words beside places need room to the right, which makes the scale smaller in turn.
        room = 1.15 * widest / scale
        views, scale, bottom = arranged(self._plan(room), self._sides(room), top, wide, height)
        for who, turn in (("public", 45), ("trained", -45)):
            stroke = f'stroke="{COLOURS[who]}" stroke-width="0.18"'
            self.drawing.define(
                f'<pattern id="hatch-{who}" width="2" height="2" patternUnits="userSpaceOnUse" '
                f'patternTransform="rotate({turn})"><path d="M0 1H2" {stroke}/></pattern>'
            )
        for view, grid in zip(views, self._grids() or (None,) * len(views), strict=True):
            self._panel(view, grid)
        return self._scale_bar(bottom, scale)

    def _plan(self, room: float) -> View:
        (left, right), (down, up) = self._reaches(self.made.plan if self.made else None, 0.0)
        for spot in self.inside:
            half = spot.fence or max(spot.half, 0.3)
            beside = 0.0 if spot.fence else room
            left, right = min(left, spot.across - half), max(right, spot.across + half + beside)
            down, up = min(down, spot.along - half), max(up, spot.along + half)
        return view_of("plan", "Plan, from above, at any height", self.said.axes, (left, down), (right, up))

    def _sides(self, room: float) -> list[View]:
        made = []
        grids: Sequence[Grid | None] = self.made.sides if self.made else (None,)
        for index, grid in enumerate(grids, 1):
            name = grid.name if grid else self.said.axes[0]
            (left, right), (down, up) = self._reaches(grid, self.centre)
            for spot in self.inside:
                across = self._beside(spot, name)
                if across is None or not self.known_height:
                    continue
                half = spot.fence or max(spot.half, 0.3)
                left, right = min(left, across - half), max(right, across + half + room)
                down, up = min(down, spot.low), max(up, spot.high)
            if self.known_height and self.centre <= 5.0 * self.reach:
                down = min(down, 0.0)
            made.append(view_of(f"side-{index}", f"Side view {name}", (name, "up"), (left, down), (right, up)))
        return made

    def _reaches(self, grid: Grid | None, middle: float) -> tuple[Point, Point]:
        """Return how far contours and touch reach in a view, left and right, down and up [m]."""
        if grid is None:
            return (-self.touch, self.touch), (middle - self.touch, middle + self.touch)
        points = grid.put(grid.outermost(self.drawn_layers), grid.angles)
        (left, down), (right, up) = points.min(axis=0), points.max(axis=0)
        return (float(left), float(right)), (float(down), float(up))

    def _beside(self, spot: Spot, name: str) -> float | None:
        """Return where a place stands in an upright view [m]; None where it is too far off its plane."""
        if spot.fence:
            return 0.0
        if name.startswith("at"):
            return hypot(spot.across, spot.along)
        first = name == self.said.axes[0]
        own, off = (spot.across, spot.along) if first else (spot.along, spot.across)
        return own if abs(off) <= 0.5 else None

    def _panel(self, view: View, grid: Grid | None) -> None:
        draw, labels, box = self.drawing, Labels(), view.box
        draw.text((box[0], box[1] - 1.2), view.title, font_weight="bold")
        draw.clip(f"clip-{view.name}", box)
        ground = None if view.name == "plan" or not self.known_height else view.at(0.0, 0.0)[1]
        above = box if ground is None or self._free else (*box[:3], min(box[3], ground))
        draw.clip(f"above-{view.name}", above)
        draw.open(id=view.name, clip_path=f"url(#clip-{view.name})")
        draw.open(clip_path=f"url(#above-{view.name})")
        self._keep_out(view, grid)
        draw.close()
        self._levels(view, ground)
        self._loop(view, labels)
        spots = self._spots(view, labels)
        draw.close()
        left, top, right, bottom = box
        draw.path([[(left, top), (right, top), (right, bottom), (left, bottom)]], closed=True, **_THIN)
        self._ticks(view)
        self._tags(view, grid, labels)
        self._spot_labels(view, spots, labels)
        self._floor_labels(view, ground, labels)

    def _keep_out(self, view: View, grid: Grid | None) -> None:
        draw, middle = self.drawing, view.at(*(grid.centre if grid else self._centre(view)))
        disc = {"cx": middle[0], "cy": middle[1], "r": self.touch * view.scale}
        for who in ("public", "trained"):
            draw.add("circle", **disc, fill=f"url(#hatch-{who})")
            own = self._of(who)
            if grid is not None and own:
                rings = [view.line(ring) for area in grid.areas(own) for ring in area]
                draw.path(rings, closed=True, fill=f"url(#hatch-{who})", fill_rule="evenodd")
        draw.add(
            "circle", **disc, id=f"{view.name}-touch", stroke="#000", stroke_width=0.3, stroke_dasharray=TOUCH_DASHES
        )
        if grid is None or self.made is None:
            return
        for each in self.said.contours:
            layers = self.layers[each.letter]
            style: dict[str, Any] = {"stroke": COLOURS[each.who], "stroke_dasharray": DASHES[each.who]}
            lines = [view.line(line) for line in grid.lines(layers)]
            if each.who == "trained":
                # Two dashed lines on each other would fill each other's gaps and look like a line of the other tier.
                draw.path(lines, stroke="#fff", stroke_width=0.5)
            draw.path(lines, id=f"{view.name}-{each.letter}", stroke_width=0.5, **style)
            floors = self.made.floors
            if view.name == "plan" and floors is not None and _differs(floors, grid, layers):
                thin = [view.line(line) for line in floors.lines(layers)]
                draw.path(thin, id=f"floors-{each.letter}", stroke_width=0.22, **style)

    def _of(self, who: str) -> tuple[Layer, ...]:
        return tuple(layer for layer in self.drawn_layers if layer.who == who)

    def _centre(self, view: View) -> Point:
        return (0.0, 0.0 if view.name == "plan" else self.centre)

    def _levels(self, view: View, ground: float | None) -> None:
        if ground is None:
            return
        left, _, right, bottom = view.box
        if ground <= bottom:
            style = _THIN if self._free else _THICK
            self.drawing.path([[(left, ground), (right, ground)]], id=f"{view.name}-ground", **style)
        if ground <= bottom and not self._free:
            steps = [left + 2.0 * i for i in range(int((right - left) / 2.0) + 1)]
            self.drawing.path([[(x, ground), (x - 1.4, ground + 1.4)] for x in steps], **_THIN)
        for level in self._floors_above():
            y = view.at(0.0, level)[1]
            self.drawing.path([[(left, y), (right, y)]], stroke="#000", stroke_width=0.25, stroke_dasharray="0.6 0.6")

    def _floors_above(self) -> list[float]:
        return [level for level in self.design.site.floors or [] if level > 0.0]

    def _floor_labels(self, view: View, ground: float | None, labels: Labels) -> None:
        if ground is None:
            return
        left, top, right, bottom = view.box
        named = "level 0 m" if self._free else "ground"
        for level, name in ((0.0, named), *((z, f"floor {z:g} m") for z in self._floors_above())):
            y, wide = view.at(0.0, level)[1], width_of(name, SMALL)
            if not top < y <= bottom:
                continue
            spots = [(x, y - 2.9, x + wide, y - 0.3) for x in (right - wide - 0.6, left + 0.6)]
            box = labels.first_free(spots, view.box)
            if box is not None:
                self._backed(box)
                self.drawing.text((box[0], box[3] - 0.5), name, SMALL)

    def _loop(self, view: View, labels: Labels) -> None:
        if self.made is None:
            return
        project = self._projection(view)
        pieces = [[view.at(*project(p)) for p in segment] for segment in self.made.wire]
        loop = self.design.loop
        apart = (loop.turn_spacing or 0.0) * view.scale if loop.turns > 1 else 1.0
        thick = min(0.6, max(0.12, 0.5 * apart))  # so that turns stay apart where they can
        self.drawing.path(pieces, id=f"{view.name}-loop", stroke="#000", stroke_width=thick, stroke_linecap="round")
        for port in self.made.ports if self.design.capacitor.kind != "none" else ():
            x, y = view.at(*project(port))
            capacitor(self.drawing, (x, y))
            labels.keep((x - 1.5, y - 1.5, x + 1.5, y + 1.5))
        xs, ys = zip(*(point for piece in pieces for point in piece), strict=True)
        if max(xs) - min(xs) < 3.0 or max(ys) - min(ys) < 3.0:
            labels.keep((min(xs) - 0.5, min(ys) - 0.5, max(xs) + 0.5, max(ys) + 0.5))

    def _projection(self, view: View) -> Projection:
        if view.name == "plan":
            return Projection(0, 1)
        # Of a loop that rotates, the view that shows it in its plane; of a flat one, in the plane and across.
        vertical = self.design.loop.plane == "vertical"
        first = view.axes[0] == "along the axis" if vertical else view.axes[0] == self.said.axes[0]
        return Projection(0 if first else 1, 2)

    def _spots(self, view: View, labels: Labels) -> list[tuple[Spot, Box]]:
        found = []
        for spot in self.inside:
            if spot.fence:
                found.append((spot, self._fence(view, spot.fence)))
                continue
            across: float | None = spot.across
            if view.name == "plan":
                low, high = spot.along - spot.half, spot.along + spot.half
            else:
                across = self._beside(spot, view.axes[0]) if self.known_height else None
                low, high = spot.low, spot.high
            if across is None:
                continue
            (left, bottom), (right, top) = view.at(across - spot.half, low), view.at(across + spot.half, high)
            told: dict[str, str | float] = {"class": f"place place-{spot.number}"}
            if right - left < 1.0:
                left, right = left - 0.5, right + 0.5
            if bottom - top < 1.0:
                top, bottom = top - 0.5, bottom + 0.5
            self.drawing.add(
                "rect", x=left, y=top, width=right - left, height=bottom - top, fill="#fff", fill_opacity=0.8,
                stroke="#000", stroke_width=0.35, **told,
            )  # fmt: skip
            labels.keep((left, top, right, bottom))
            found.append((spot, (left, top, right, bottom)))
        return found

    def _fence(self, view: View, radius: float) -> Box:
        """Draw a fence and return the box beside which its label goes."""
        if view.name == "plan":
            (x, y), r = view.at(0.0, 0.0), radius * view.scale
            self.drawing.add("circle", cx=x, cy=y, r=r, stroke="#000", stroke_width=0.9)
            self.drawing.add("circle", cx=x, cy=y, r=r, stroke="#fff", stroke_width=0.5)
            slant = radians(40.0)
            return (x + r * cos(slant), y - r * sin(slant), x + r * cos(slant), y - r * sin(slant))
        top = view.at(radius, 0.0)
        for level in (self.design.site.floors or [0.0]) if self.known_height else []:
            for side in (-radius, radius):
                post = [[view.at(side, level), view.at(side, level + 2.0)]]
                self.drawing.path(post, stroke="#000", stroke_width=0.9)
                self.drawing.path(post, stroke="#fff", stroke_width=0.5)
            top = view.at(radius, level + 2.0)
        return (*top, *top)

    def _spot_labels(self, view: View, spots: Sequence[tuple[Spot, Box]], labels: Labels) -> None:
        for spot, own in spots:
            wide, tall = _label_width(spot), 3.4
            beside = [*around(own, wide, tall), *everywhere(own, wide, tall, view.box)]
            # Where nothing at all is free the word goes over what is there: it is never left out.
            box = labels.first_free(beside, view.box) or beside[0]
            here, there = nearest(own, box)
            if hypot(here[0] - there[0], here[1] - there[1]) > 1.0:
                self.drawing.path([[here, there]], **_THIN)
            self._backed(box)
            x, base = box[0] + 0.4, box[3] - 0.9
            self.drawing.text((x, base), spot.number, font_weight="bold")
            x += width_of(spot.number) + 1.5
            self.drawing.mark(spot.verdict, (x, base - 0.9))
            self.drawing.text((x + 1.7, base), spot.verdict)

    def _tags(self, view: View, grid: Grid | None, labels: Labels) -> None:
        """Put a letter on each contour, and on the touch circle."""
        if grid is None:
            return
        lines: list[tuple[str, Sequence[float] | None]] = [("T", None)]
        lines += [(each.letter, list(grid.outermost(self.layers[each.letter]))) for each in self.said.contours]
        for order, (letter, reaches) in enumerate(lines):
            candidates = []
            for step in range(24):
                turn = radians((125.0 + 37.0 * order + (15.0 * step)) % 360.0 - 180.0)
                nearest = min(range(len(grid.angles)), key=lambda i: abs(grid.angles[i] - turn))
                away = self.touch if reaches is None else float(reaches[nearest])
                if reaches is not None and (away < 1.01 * self.touch or away >= 0.999 * float(grid.last[nearest])):
                    continue
                x, y = view.at(grid.centre[0] + away * cos(turn), grid.centre[1] + away * sin(turn))
                candidates.append((x - 1.7, y - 1.7, x + 1.7, y + 1.7))
            box = labels.first_free(candidates, view.box) or (candidates[0] if candidates else None)
            if box is not None:
                tag(self.drawing, letter, (box[0] + 1.7, box[1] + 1.7))

    def _backed(self, box: Box) -> None:
        left, top, right, bottom = box
        size = {"x": left, "y": top, "width": right - left, "height": bottom - top}
        self.drawing.add("rect", **size, fill="#fff", fill_opacity=0.85)

    # Measures ----------------------------------------------------------------------------------------------

    def _ticks(self, view: View) -> None:
        left, top, right, bottom = view.box
        step = round_length(9.0 / view.scale)
        for k in range(floor(view.low[0] / step) + 1, floor(view.high[0] / step) + 1):
            x = view.at(k * step, 0.0)[0]
            self.drawing.path([[(x, bottom), (x, bottom + 1.0)]], **_THIN)
            self.drawing.text((x, bottom + 3.3), f"{k * step:g}", SMALL, text_anchor="middle")
        for k in range(floor(view.low[1] / step) + 1, floor(view.high[1] / step) + 1):
            y = view.at(0.0, k * step)[1]
            self.drawing.path([[(left, y), (left - 1.0, y)]], **_THIN)
            self.drawing.text((left - 1.4, y + 0.8), f"{k * step:g}", SMALL, text_anchor="end")
        across, up = (f"{name}, m" for name in view.axes)
        self.drawing.text((0.5 * (left + right), bottom + 6.4), across, SMALL, text_anchor="middle")
        x, y = left - 6.2, 0.5 * (top + bottom)
        turned = f"rotate(-90 {number(x)} {number(y)})"
        self.drawing.text((x, y), up, SMALL, text_anchor="middle", transform=turned)

    def _scale_bar(self, top: float, scale: float) -> float:
        metres = round_length(20.0 / scale)
        left, y, wide = EDGE + LEFT, top + 1.2, metres * scale
        ends = [[(x, y - 1.0), (x, y + 1.0)] for x in (left, left + wide)]
        self.drawing.path([[(left, y), (left + wide, y)], *ends], id="scale-bar", **_THICK)
        self.drawing.text((left + wide + 1.5, y + 0.9), f"{metres:g} m", id="scale-bar-label")
        return top + 4.5


def away_of(spot: Spot) -> float:
    """Return how far a place is from the loop's centre, seen from above [m]."""
    return spot.fence if spot.fence else hypot(spot.across, spot.along)


def tag(drawing: Drawing, letter: str, at: Point) -> None:
    """Draw a letter in a circle."""
    drawing.add("circle", cx=at[0], cy=at[1], r=1.5, fill="#fff", stroke="#000", stroke_width=0.15)
    drawing.text((at[0], at[1] + 0.8), letter, 2.2, text_anchor="middle", font_weight="bold")


def capacitor(drawing: Drawing, at: Point) -> None:
    """Draw a capacitor, two plates in a circle."""
    x, y = at
    drawing.add("circle", cx=x, cy=y, r=1.35, fill="#fff", stroke="#000", stroke_width=0.3)
    plates = [[(x + side, y - 0.8), (x + side, y + 0.8)] for side in (-0.35, 0.35)]
    drawing.path(plates, stroke="#000", stroke_width=0.35)


def _label_width(spot: Spot) -> float:
    return width_of(f"{spot.number} {spot.verdict}") + 3.4


def _differs(floors: Grid, grid: Grid, layers: Sequence[Layer]) -> bool:
    apart = abs(floors.outermost(layers) - grid.outermost(layers))
    return bool(apart.max() > _SAME)
