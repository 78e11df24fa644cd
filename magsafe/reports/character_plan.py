"""The plan of a keep-out in characters, for a terminal: ASCII alone draws it, words beneath tell what it says."""

from collections.abc import Iterator
from math import ceil, floor, hypot

import numpy as np
from rich.console import Console, Group, RenderableType
from rich.text import Text

from magsafe.analysis.field_map import FieldMap
from magsafe.checks.sheet import KeepoutSheet
from magsafe.design.model import Design
from magsafe.physics.arrays import Array
from magsafe.reports.map_words import MapWords, words_of
from magsafe.reports.terminal import Speaker, console_on_output, is_plain, put

_COLUMNS = 76
_LINES = 30
_TALL = 2.0  # a character is so many times as tall as it is wide
_FAR = 4.0  # times the keep-out's reach: places further away are told, not drawn
_NUMBERS = "123456789abcdefghijkmnpqrsuvwxyz"
PUBLIC, EVERYBODY, TOUCH, LOOP, FENCE = ".", ":", "t", "#", "+"


def show_plan(
    sheet: KeepoutSheet, design: Design, index: int, made: FieldMap | None, console: Console | None = None
) -> None:
    """Print the plan of one transmission; where nothing is known of its fields, why there is none."""
    console = console or console_on_output()
    said = words_of(sheet, design, index)
    put(console, Group(*_parts(Speaker(console.width, is_plain(console)), said, design, made)))


def _parts(say: Speaker, said: MapWords, design: Design, made: FieldMap | None) -> Iterator[RenderableType]:
    yield from say.heading(f"Plan from above: {said.shown}")
    if made is None or not said.contours:
        yield say.paragraph("No plan is drawn, because no keep-out is known.")
    else:
        plan = _Plan(said, made, min(say.width, _COLUMNS + 4) - 4)
        yield Text("\n".join(f"  {line}" for line in plan.lines()), no_wrap=True)
        yield say.paragraph(f"To the right: {said.axes[0]}. Upwards: {said.axes[1]}.", indent=2)
        rules = ", ".join(dict.fromkeys(rule for each in said.contours for rule in each.rules))
        yield say.paragraph(
            f"'{PUBLIC}' the public keeps out, '{EVERYBODY}' trained people too, '{TOUCH}' touch, nobody comes nearer; "
            f"'{LOOP}' the loop, '{FENCE}' a fence. At any height, averaged, by the strictest of {rules}.",
            indent=2,
        )
    yield Text("")
    for spot, letter in zip(said.spots, _letters(len(said.spots)), strict=True):
        yield say.item(spot.verdict, f"{letter} {spot.text}")
    if design.loop.rotates:
        yield say.paragraph("The loop rotates: all is the worst of its bearings, and places are drawn at theirs.")
    for reason in said.not_proven:
        yield say.paragraph(f"Not proven: {reason}.")


def _letters(count: int) -> list[str]:
    return [_NUMBERS[i] if i < len(_NUMBERS) else "*" for i in range(count)]


class _Plan:
    """A grid of characters over the plan."""

    def __init__(self, said: MapWords, made: FieldMap, columns: int) -> None:
        self.said, self.made = said, made
        known = {(rule, each.who) for each in said.contours for rule in each.rules}
        layers = [layer for layer in made.layers if (layer.rule, layer.who) in known]
        self.reach = {
            who: made.plan.outermost([layer for layer in layers if layer.who == who]) for who in ("public", "trained")
        }
        most = float(np.maximum(self.reach["public"], self.reach["trained"]).max())
        self.spots = [s for s in said.spots if (s.fence or hypot(s.across, s.along)) <= _FAR * most]
        left, right, down, up = -most, most, -most, most
        for spot in self.spots:
            half = spot.fence or 0.5
            left, right = min(left, spot.across - half), max(right, spot.across + half)
            down, up = min(down, spot.along - half), max(up, spot.along + half)
        self.cell = max((right - left) / (columns - 2), (up - down) / _TALL / (_LINES - 2))
        line = self.cell * _TALL
        self.x = self.cell * np.arange(floor(left / self.cell), ceil(right / self.cell) + 1)
        self.y = line * np.arange(ceil(up / line), floor(down / line) - 1, -1)

    def lines(self) -> Iterator[str]:
        """Yield the lines of the plan, and its scale."""
        x, y = np.meshgrid(self.x, self.y)
        away, turn = np.hypot(x, y), np.arctan2(y, x)
        drawn = np.full(x.shape, " ")
        for who, sign in (("public", PUBLIC), ("trained", EVERYBODY)):
            drawn[away <= np.interp(turn, self.made.plan.angles, self.reach[who])] = sign
        drawn[np.abs(away - self.made.touch) < 0.75 * self.cell] = TOUCH
        for start, end in self.made.wire:
            for part in np.linspace(0.0, 1.0, 12):
                self._put(drawn, start + part * (end - start), LOOP)
        letters = dict(zip((s.name for s in self.said.spots), _letters(len(self.said.spots)), strict=True))
        for spot in self.spots:
            if spot.fence:
                for bearing in np.linspace(-np.pi, np.pi, 180):
                    self._put(drawn, spot.fence * np.array([np.cos(bearing), np.sin(bearing)]), FENCE)
        for spot in self.spots:
            where = [spot.across, spot.along] if not spot.fence else [0.7 * spot.fence, 0.7 * spot.fence]
            self._put(drawn, np.array(where), letters[spot.name])
        yield from ("".join(row).rstrip() for row in drawn)
        metres = next(m for m in (0.5, 1.0, 2.0, 5.0, 10.0, 20.0, 50.0, 100.0) if m >= 8.0 * self.cell)
        yield f"|{'-' * (round(metres / self.cell) - 1)}| {metres:g} m"

    def _put(self, drawn: "np.ndarray[tuple[int, ...], np.dtype[np.str_]]", point: Array, sign: str) -> None:
        column = int(np.argmin(np.abs(self.x - point[0])))
        drawn[int(np.argmin(np.abs(self.y - point[1]))), column] = sign
