"""The measured resonance beside the computed one: its circle in the plane of the reflection, and the SWR about it.

Lengths are in millimetres from the top left of the picture. Dots and dashes tell the lines apart without colour.
"""

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from math import asin, log10, pi
from typing import TYPE_CHECKING, Any

import numpy as np

from magsafe import words
from magsafe.checks.measured_sheet import MeasuredSheet
from magsafe.checks.resonance_curves import ResonanceCurves, Tuned, of_reading, of_record
from magsafe.checks.sheet import OperatingPointRecord
from magsafe.physics.arrays import Array, ComplexArray
from magsafe.reports import plotting, telling
from magsafe.reports.charts import Chart
from magsafe.reports.fit_text import fit
from magsafe.reports.map_views import round_length
from magsafe.reports.page import Picture
from magsafe.spread import Spread

if TYPE_CHECKING:
    from matplotlib.figure import Figure

WIDTH = 172.0
TITLE = "Reflection about resonance, measured and computed"
NO_POINTS = "the measurement holds no points with a coupling, so there is no circle to draw"
_EDGE, _LETTERS, _ROW = 2.0, 2.2, 3.4
_TOP, _SIDE = 10.0, 54.0  # of both panels
_LEFT, _RATIO_LEFT = 15.0, 88.0
_FOOT = 10.0  # of the scale beneath a panel
_ROOM = 1.12  # of a panel, over what lies in it
_BESIDE = 1.15  # of where the likely curves leave the panel
_SCALES = (10.0, 30.0, 100.0, 1000.0)  # highest SWR drawn
_RATIOS = (1.0, 2.0, 3.0, 5.0, 10.0, 20.0, 30.0, 50.0, 100.0, 300.0, 1000.0)
_SAMPLE = 8.0
_INK, _GREY, _READ = "#000000", "#999999", "#666666"
_MINUS = "\u2212"
_PENS: dict[str, tuple[float, dict[str, Any]]] = {
    "most": (0.3, {"dashes": (4, 2)}),
    "least": (0.35, {"dashes": (1, 1.5)}),
    "computed": (0.45, {}),
    "measured": (0.2, {"color": _READ}),
}


def resonance_picture(sheet: MeasuredSheet, *, as_dots: bool) -> bytes:
    """Return the picture of a measurement, as SVG or as dots (PNG).

    Raises
    ------
    ValueError : a measurement without points, or one that does not tell the coupling
    """
    curves = of_reading(sheet)
    if curves is None:
        raise ValueError(NO_POINTS)
    found = _Resonance(curves, _named(sheet.transmission, sheet.frequency))
    return found.dots() if as_dots else found.svg().encode("utf-8")


def record_picture(point: OperatingPointRecord) -> Picture | None:
    """Return the picture of the measurement that a transmission rests on; None where there is nothing to draw."""
    curves = None if point.measurement is None else of_record(point.measurement)
    if curves is None:
        return None
    found = _Resonance(curves, telling.use(point))
    return Picture(found.svg(), found.about, "", WIDTH, found.height)


def _named(name: str, frequency: float) -> str:
    return ", ".join(dict.fromkeys((words.short(" ".join(name.split())), words.frequency(frequency))))


# Words -----------------------------------------------------------------------------------------------------


def in_words(curves: ResonanceCurves) -> tuple[str, ...]:
    """Return what the picture says, in sentences."""
    day = f" on {words.short(' '.join(curves.date.split()), 30)}" if curves.date else ""
    told = [f"Measured{day} at {curves.resonance / 1e6:.6g} MHz: {_circuit(curves.measured, curves.read_q)}."]
    if curves.computed is None:
        told.append("From the parts nothing is computed here.")
    else:
        told.append(f"Computed from the parts, behind the same feed: {_circuit(curves.computed, curves.computed_q)}.")
        missing = [name for name, each in (("lowest", curves.least), ("highest", curves.most)) if each is None]
        if missing:
            told.append(f"The {' and the '.join(missing)} Q of the parts is not known.")
    told.append(
        "The reflection is that at the loop's own terminals, the line taken off; on the outer circle all is turned "
        "back, at 0 nothing is. Both are drawn about the resonance as it was read."
    )
    return tuple(told)


def _circuit(tuned: Tuned, quality: Spread) -> str:
    ends = words.ends(quality, "1", "")
    way = "matched" if abs(tuned.coupling - 1.0) < 5e-3 else "overcoupled" if tuned.coupling > 1.0 else "undercoupled"
    return (
        f"Q {words.amount(tuned.unloaded_q, '1')}{f' {ends}' if ends else ''}, {way}, SWR "
        f"{words.number(tuned.lowest_ratio, '1', '')} at resonance"
    )


# The picture -----------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class _Window:
    """What a square panel shows of the plane of the reflection: its left and lower corner, and its side."""

    left: float
    low: float
    side: float

    def across(self, real: Array | float) -> Any:
        return _LEFT + _SIDE * (np.asarray(real) - self.left) / self.side

    def down(self, imaginary: Array | float) -> Any:
        return _TOP + _SIDE - _SIDE * (np.asarray(imaginary) - self.low) / self.side


class _Resonance:
    """One picture: the circle on the left, the SWR on the right, what they are beneath."""

    def __init__(self, curves: ResonanceCurves, name: str) -> None:
        self.curves = curves
        self.highest = _highest(curves)
        self.reach = _BESIDE * curves.reach(self.highest)
        self.title = fit(f"{TITLE}: {name}")
        self.about = fit(f"{TITLE}: {name}. {' '.join(in_words(curves))}")
        self.said = [
            line
            for sentence in (fit(" ".join(in_words(curves))),)
            for line in plotting.lines_of(sentence, WIDTH - 2.0 * _EDGE, _LETTERS)
        ]
        self.height = _TOP + _SIDE + _FOOT + _ROW * (1.4 + len(self.said)) + _EDGE

    def svg(self) -> str:
        """Return it as SVG with its words."""
        with plotting.own_settings():
            return plotting.as_svg(self._drawn(), self.title, self.about)

    def dots(self) -> bytes:
        """Return it as PNG."""
        with plotting.own_settings():
            return plotting.as_dots(self._drawn())

    def _drawn(self) -> "Figure":
        figure, axes = plotting.picture_of(WIDTH, self.height)
        chart = Chart(axes)
        chart.text(
            _EDGE,
            _EDGE + 2.4,
            next(iter(plotting.lines_of(self.title, WIDTH - 2 * _EDGE, _LETTERS, bold=True))),
            bold=True,
        )
        self._circles(chart)
        self._ratios(chart)
        self._legend(chart)
        return figure

    def _lines(self) -> Iterator[tuple[str, Tuned]]:
        """Yield the curves, those above later."""
        made = {
            "most": self.curves.most,
            "least": self.curves.least,
            "computed": self.curves.computed,
            "measured": self.curves.measured,
        }
        yield from ((name, each) for name, each in made.items() if each is not None)

    # Circle ------------------------------------------------------------------------------------------------

    def _window(self) -> _Window:
        seen = self.curves.reflection
        left = min(float(seen.real.min()), *(1.0 - each.diameter for each in self.curves.circuits))
        right = max(1.0, float(seen.real.max()))
        tall = max(float(np.abs(seen.imag).max()), *(0.5 * each.diameter for each in self.curves.circuits))
        side = _ROOM * max(right - left, 2.0 * tall)
        return _Window(0.5 * (left + right - side), -0.5 * side, side)

    def _circles(self, chart: Chart) -> None:
        at = self._window()
        right, bottom, middle = _LEFT + _SIDE, _TOP + _SIDE, float(at.down(0.0))
        for axis in ("real", "imaginary"):
            self._scale(chart, at, axis)
        chart.line(*self._rim(at), 0.25, "rim")
        for name, tuned in self._lines():
            thick, style = _PENS[name]
            circle = tuned.circle()
            chart.line(at.across(circle.real), at.down(circle.imag), thick, f"circle-{name}", **style)
        self._dots(chart, at.across(self.curves.reflection.real), at.down(self.curves.reflection.imag), "read-circle")
        if self.curves.computed is not None:
            _mark(chart, float(at.across(1.0 - self.curves.computed.diameter)), middle, "D", "resonance-computed")
        _mark(chart, float(at.across(1.0 - self.curves.measured.diameter)), middle, "o", "resonance-measured")
        chart.line([_LEFT, right, right, _LEFT, _LEFT], [_TOP, _TOP, bottom, bottom, _TOP], 0.2)
        chart.text(0.5 * (_LEFT + right), bottom + 7.4, "reflection, real part", "center")
        chart.text(4.2, 0.5 * (_TOP + bottom), "reflection, imaginary part", "center", rotation=90)

    def _scale(self, chart: Chart, at: _Window, axis: str) -> None:
        """Draw the marks of one axis, and a fine line where it is 0."""
        real = axis == "real"
        low, step = at.left if real else at.low, round_length(at.side / 4.0)
        for count in range(int(np.ceil(low / step)), int(np.floor((low + at.side) / step)) + 1):
            value = count * step
            text = f"{value:.6g}".replace("-", _MINUS)
            if real:
                x, bottom = float(at.across(value)), _TOP + _SIDE
                chart.line([x, x], [bottom, bottom + 0.9], name=f"real-{value:.6g}")
                chart.text(x, bottom + 3.6, text, "center")
                if count == 0:
                    chart.line([x, x], [_TOP, bottom], 0.15, color=_GREY)
            else:
                y = float(at.down(value))
                chart.line([_LEFT - 0.9, _LEFT], [y, y], name=f"imaginary-{value:.6g}")
                chart.text(_LEFT - 1.6, y + 0.35 * _LETTERS, text, "right")
                if count == 0:
                    chart.line([_LEFT, _LEFT + _SIDE], [y, y], 0.15, color=_GREY)

    def _rim(self, at: _Window) -> tuple[Array, Array]:
        """Return the circle on which all is turned back, as far as it lies within the panel."""
        high = at.low + at.side
        reach = asin(min(1.0, high)) if at.left > 0.0 else pi
        turn = np.linspace(-reach, reach, 1441 if reach == pi else 241)
        rim: ComplexArray = np.asarray(np.exp(1j * turn))
        inside = (rim.real >= at.left) & (rim.real <= at.left + at.side) & (np.abs(rim.imag) <= high)
        return np.where(inside, at.across(rim.real), np.nan), np.where(inside, at.down(rim.imag), np.nan)

    # Standing-wave ratio -----------------------------------------------------------------------------------

    def _ratios(self, chart: Chart) -> None:
        curves, left, right = self.curves, _RATIO_LEFT, WIDTH - _EDGE
        bottom, reach, top = _TOP + _SIDE, self.reach, self.highest
        middle, scale = 0.5 * (left + right), 0.5 * (right - left) / reach

        def across(offset: Array) -> Any:
            return middle + scale * offset

        def down(ratio: Array | float) -> Any:
            return bottom - _SIDE * np.log10(ratio) / log10(top)

        for ratio in (each for each in _RATIOS if each <= top):
            y = float(down(ratio))
            chart.line([left, right], [y, y], 0.15, f"ratio-{ratio:g}", color=_GREY)
            chart.text(left - 1.0, y + 0.35 * _LETTERS, f"{ratio:g}", "right")
        for name, tuned in self._lines():
            thick, style = _PENS[name]
            offset = tuned.offsets(curves.resonance, reach)
            ratios = _ratio(tuned.reflection(offset, curves.resonance))
            low = ratios <= top
            chart.line(across(offset[low]), down(ratios[low]), thick, f"swr-{name}", **style)
        read = _ratio(curves.reflection)
        shown = (read <= top) & (np.abs(curves.offset) <= reach)
        self._dots(chart, across(curves.offset[shown]), down(read[shown]), "read-swr")
        chart.line([left, right], [bottom, bottom])
        self._hertz(chart, across, bottom)
        chart.text(middle, bottom + 7.4, f"kHz from {curves.resonance / 1e6:.6g} MHz", "center")
        chart.text(left - 7.0, 0.5 * (_TOP + bottom), "SWR", "center", rotation=90)

    def _hertz(self, chart: Chart, across: Callable[[Array], Any], bottom: float) -> None:
        step = round_length(self.reach / 4.5)
        for count in (each for each in range(-4, 5) if abs(each * step) <= self.reach):
            x = float(across(np.asarray(count * step)))
            chart.line([x, x], [bottom, bottom + 0.9], name=f"hertz-{count * step:g}")
            chart.text(x, bottom + 3.6, f"{count * step / 1e3:g}".replace("-", _MINUS), "center")

    # Both --------------------------------------------------------------------------------------------------

    def _dots(self, chart: Chart, across: Array, down: Array, name: str) -> None:
        chart.axes.plot(
            across, down, "o", color=_INK, markerfacecolor="white", markersize=0.9 * plotting.POINT,
            markeredgewidth=0.2 * plotting.POINT, gid=name,
        )  # fmt: skip

    def _legend(self, chart: Chart) -> None:
        y = _TOP + _SIDE + _FOOT + _ROW
        drawn = dict(self._lines())
        told = {
            "measured": "dots as read, line by Q and coupling",
            "computed": "computed, likely Q",
            "most": "highest Q",
            "least": "lowest Q",
        }
        x = _EDGE
        for name, text in ((name, text) for name, text in told.items() if name in drawn):
            thick, style = _PENS[name]
            chart.line([x, x + _SAMPLE], [y - 0.8] * 2, thick, **style)
            if name == "measured":
                self._dots(chart, x + _SAMPLE * np.array([0.25, 0.5, 0.75]), np.full(3, y - 0.8), "read-sample")
            chart.text(x + _SAMPLE + 1.2, y, text)
            x += _SAMPLE + 1.2 + plotting.measured(text, _LETTERS) + 5.0
        _mark(chart, x + 1.0, y - 0.8, "o", "sample-measured")
        if "computed" in drawn:
            _mark(chart, x + 3.4, y - 0.8, "D", "sample-computed")
        chart.text(x + (5.0 if "computed" in drawn else 2.6), y, "resonance")
        for number, line in enumerate(self.said):
            chart.text(_EDGE, y + _ROW * (number + 1.1), line)


def _highest(curves: ResonanceCurves) -> float:
    """Return the end of the scale of ratios: three times what is lowest on any likely curve, at least."""
    lowest = max(each.lowest_ratio for each in curves.likely)
    return next((each for each in _SCALES if each >= 3.0 * lowest), 10.0 * lowest)


def _mark(chart: Chart, across: float, down: float, shape: str, name: str) -> None:
    chart.axes.plot([across], [down], shape, color=_INK, markersize=1.3 * plotting.POINT, markeredgewidth=0.0, gid=name)


def _ratio(reflection: ComplexArray) -> Array:
    """Return the standing-wave ratio; without end where all, or by noise more, is turned back."""
    size = np.minimum(np.abs(reflection), 1.0 - 1e-12)
    return np.asarray((1.0 + size) / (1.0 - size))
