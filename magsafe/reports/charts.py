"""The charts of a page: power ladder and standing-wave ratio, black on white, the same to the byte on every run.

Lengths are in millimetres from the top left of the picture.
"""

from collections.abc import Callable, Iterator, Sequence
from math import ceil, floor, log10
from typing import TYPE_CHECKING, Any

import numpy as np

from magsafe import words
from magsafe.checks.ladder import Ladder, Rung
from magsafe.checks.swr_curve import SwrCurve
from magsafe.physics.arrays import Array
from magsafe.reports import plotting
from magsafe.reports.fit_text import fit
from magsafe.reports.map_views import round_length
from magsafe.reports.page import Picture

if TYPE_CHECKING:
    from matplotlib.axes import Axes

MOST_RUNGS = 10
WIDTH = 82.0
_LETTERS = 2.2
_EDGE = 2.0
_ROW, _FOOT = 5.6, 9.5  # of a rung, and of the scale beneath all
_SWR_HEIGHT, _SWR_LEFT = 46.0, 9.0
_HIGHEST = 10.0  # of the ratios that are drawn
_RATIOS = (1.0, 2.0, 3.0, 5.0, 10.0)
_INK, _GREY = "#000000", "#999999"


class Chart:
    """A picture that grows by what is drawn in it; lengths in millimetres from its top left."""

    def __init__(self, axes: "Axes") -> None:
        self.axes = axes

    def line(self, across: Any, down: Any, thick: float = 0.25, name: str | None = None, **style: Any) -> None:
        """Draw a line `thick` wide; colour and dashes may be given."""
        style = {"color": _INK, "solid_capstyle": "butt", **style}
        self.axes.plot(across, down, linewidth=thick * plotting.POINT, gid=name, **style)

    def dot(self, across: float, down: float, name: str, *, filled: bool) -> None:
        """Draw a dot."""
        fill = _INK if filled else "white"
        self.axes.plot(
            [across], [down], "o", color=_INK, markerfacecolor=fill, markersize=1.4 * plotting.POINT,
            markeredgewidth=0.25 * plotting.POINT, gid=name,
        )  # fmt: skip

    def text(self, across: float, down: float, text: str, side: str = "left", **style: Any) -> None:
        """Write a line of text, its baseline at a point."""
        bold = bool(style.pop("bold", False))
        self.axes.text(
            across, down, text, fontproperties=plotting.letters(_LETTERS, bold=bold), color=_INK,
            horizontalalignment=side, verticalalignment="baseline", parse_math=False, **style,
        )  # fmt: skip


def _chart(height: float, title: str, about: str, draw: Callable[[Chart], None]) -> str:
    """Return what is drawn in a picture of a height [mm] as SVG with its words."""
    with plotting.own_settings():
        figure, axes = plotting.picture_of(WIDTH, height)
        draw(Chart(axes))
        return plotting.as_svg(figure, title, about)


# Power ladder ----------------------------------------------------------------------------------------------


def ladder_picture(made: Ladder, name: str) -> Picture | None:
    """Return the ladder of one transmission as a picture; None where no check depends on power."""
    if not made.rungs:
        return None
    shown = _shown(made.rungs)
    left = len(made.rungs) - len(shown)
    rest = f" {left} more hold to higher powers and are not drawn." if left else ""
    title = f"Power ladder of {name}"
    about = (
        f"{title}, the lowest first: {'; '.join(_rung_words(each) for each in shown)}. "
        f"Planned: {words.watts(made.planned)}.{rest}"
    )
    height = _EDGE + _ROW * len(shown) + _FOOT
    return Picture(
        svg=_chart(height, title, about, lambda chart: _draw_ladder(chart, made, shown)),
        alt=about,
        caption=f"Up to which power each check holds by itself, {name}. Dot: with the margin asked for. Bar: the bare "
        f"limit. Filled dot: the lowest. Dashed line: the power planned.{rest}",
        width=WIDTH,
        height=height,
    )


def _shown(rungs: Sequence[Rung]) -> tuple[Rung, ...]:
    lowest = [each for each in rungs if each.lowest]
    rest = [each for each in rungs if not each.lowest]
    return tuple([*lowest, *rest][:MOST_RUNGS])


def _rung_words(rung: Rung) -> str:
    limit = "" if rung.at_limit is None else f", limit at {words.power(rung.at_limit)}"
    most = "" if rung.known else ", not proven"
    return f"{_label(rung)} {words.power(rung.at_margin)}{limit}{most}"


def _label(rung: Rung) -> str:
    if rung.place is None:
        return fit(words.short(rung.id, 50))
    rule = rung.id.rsplit(".", 1)[0]
    return fit(f"{words.short(rule, 40)}, {words.short(rung.place, 30)}")


def _over_the_line(rung: Rung) -> str:
    """Return what stands over a rung, cut where it would run out of the picture."""
    tail = f": {words.power(rung.at_margin)}{'' if rung.known else ', not proven'}"
    name, room = _label(rung), WIDTH - 2.0 * _EDGE - plotting.measured(tail, _LETTERS, bold=True)
    while len(name) > 1 and plotting.measured(f"{name}...", _LETTERS, bold=True) > room:
        name = name[:-1]
    return f"{name}{'' if name == _label(rung) else '...'}{tail}"


def _draw_ladder(chart: Chart, made: Ladder, shown: Sequence[Rung]) -> None:
    known = [made.planned, *(p for each in shown for p in (each.at_margin, each.at_limit) if p)]
    least, most = min(known) / 1.4, max(known) * 1.4
    wide = WIDTH - 2.0 * _EDGE

    def at(power: float) -> float:
        return _EDGE + wide * log10(max(power, least) / least) / log10(most / least)

    bottom = _EDGE + _ROW * len(shown)
    chart.line([at(made.planned)] * 2, [_EDGE, bottom], name="planned", dashes=(5, 3))
    for row, each in enumerate(shown):
        y = _EDGE + _ROW * (row + 0.8)
        start, end = at(each.at_margin), each.at_limit
        if end:
            style: dict[str, Any] = {} if each.known else {"dashes": (1, 1.5)}
            chart.line([start, at(end)], [y, y], 0.6 if each.lowest else 0.3, **style)
            chart.line([at(end)] * 2, [y - 0.9, y + 0.9], 0.3, f"limit-{row + 1}")
        chart.dot(start, y, f"margin-{row + 1}", filled=each.lowest)
        told = _over_the_line(each)
        end_of_text = _EDGE + plotting.measured(told, _LETTERS, bold=each.lowest)
        chart.line([_EDGE, end_of_text + 0.5], [y - 2.3] * 2, 2.4, color="white")
        chart.text(_EDGE, y - 1.6, told, bold=each.lowest)
    chart.line([_EDGE, WIDTH - _EDGE], [bottom, bottom])
    last = -1.0
    for power in _round_powers(least, most):
        text, x = f"{power:g}", at(power)
        chart.line([x, x], [bottom, bottom + 0.9], name=f"watts-{text}")
        half = 0.5 * plotting.measured(text, _LETTERS)
        if x - half > last + 1.0 and x - half > _EDGE / 2.0 and x + half < WIDTH - _EDGE / 2.0:
            chart.text(x, bottom + 3.4, text, "center")
            last = x + half
    chart.text(0.5 * WIDTH, bottom + 7.4, "envelope power at the transmitter, W", "center")


def _round_powers(least: float, most: float) -> Iterator[float]:
    """Yield the powers that are marked: 1, 2 and 5 times the powers of ten, or these alone where there are many."""
    steps = (1.0, 2.0, 5.0) if most / least < 1e4 else (1.0,)
    for decade in range(floor(log10(least)), ceil(log10(most)) + 1):
        for step in steps:
            power = step * 10.0**decade
            if least <= power <= most:
                yield power


# Standing-wave ratio ---------------------------------------------------------------------------------------


def swr_picture(made: SwrCurve, name: str) -> Picture:
    """Return the standing-wave ratio about resonance as a picture."""
    missing = [told for told, line in (("narrowest", made.narrowest), ("widest", made.widest)) if line is None]
    left = f" The {' and the '.join(missing)} end is not known." if missing else ""
    title = f"Standing-wave ratio of {name}"
    about = (
        f"{title} about {words.frequency(made.frequency)}: 1 at resonance, 2 at "
        f"{words.amount(made.width / 2.0, 'Hz')} to either side, likely.{left}"
    )
    return Picture(
        svg=_chart(_SWR_HEIGHT, title, about, lambda chart: _draw_swr(chart, made)),
        alt=about,
        caption=f"SWR about resonance, {name}, matched there. Solid: likely. Dashed: from the highest Q. Dotted: from "
        f"the lowest.{left}",
        width=WIDTH,
        height=_SWR_HEIGHT,
    )


def _draw_swr(chart: Chart, made: SwrCurve) -> None:
    left, right, top, bottom = _SWR_LEFT, WIDTH - _EDGE, _EDGE + 1.0, _SWR_HEIGHT - _FOOT
    reach = float(made.offset[-1])
    middle, scale = 0.5 * (left + right), 0.5 * (right - left) / reach

    def across(offset: Array | float) -> Any:
        return middle + scale * np.asarray(offset)

    def down(ratio: Array | float) -> Any:
        return bottom - (bottom - top) * np.log10(ratio) / log10(_HIGHEST)

    for ratio in _RATIOS:
        y = float(down(ratio))
        chart.line([left, right], [y, y], 0.15, f"ratio-{ratio:g}", color=_GREY)
        chart.text(left - 1.0, y + 0.35 * _LETTERS, f"{ratio:g}", "right")
    curves: tuple[tuple[str, Array | None, float, dict[str, Any]], ...] = (
        ("narrowest", made.narrowest, 0.3, {"dashes": (4, 2)}),
        ("widest", made.widest, 0.35, {"dashes": (1, 1.5)}),
        ("likely", made.likely, 0.45, {}),
    )
    for name, curve, thick, style in curves:
        if curve is not None:
            low = curve <= _HIGHEST
            chart.line(across(made.offset[low]), down(curve[low]), thick, name, **style)
    for side in (-0.5, 0.5):
        x = float(across(side * made.width))
        chart.line([x, x], [float(down(2.0)), bottom], 0.2, color=_GREY)
    chart.line([left, right], [bottom, bottom])
    step = round_length(reach / 4.5)
    for count in range(-4, 5):
        if abs(count * step) <= reach:
            x = float(across(count * step))
            chart.line([x, x], [bottom, bottom + 0.9], name=f"hertz-{count * step:g}")
            chart.text(x, bottom + 3.4, f"{count * step / 1e3:g}".replace("-", "\u2212"), "center")
    chart.text(middle, bottom + 7.4, f"kHz from {words.frequency(made.frequency)}", "center")
    chart.text(2.6, 0.5 * (top + bottom), "SWR", "center", rotation=90)
