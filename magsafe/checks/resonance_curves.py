"""The reflection about resonance as it was read, and as the loop's parts would make it behind the same feed."""

from collections.abc import Sequence
from dataclasses import dataclass
from math import atan

import numpy as np

from magsafe.checks.measured_sheet import MeasuredSheet
from magsafe.checks.sheet import FigureRecord, MeasurementRecord, Value
from magsafe.physics.arrays import Array, ComplexArray
from magsafe.physics.swr_points import reflection_of, tuning_times_q
from magsafe.physics.tuned_circuit import detuned_impedance
from magsafe.spread import Spread

_POINTS = 361
_MOST_REACH = 0.5  # of the resonance


@dataclass(frozen=True, slots=True)
class Tuned:
    """A loop behind its feed: its unloaded Q [1], and the load that the line puts on it over its own [1]."""

    unloaded_q: float
    coupling: float

    @property
    def loaded_q(self) -> float:
        """Its Q with the line's load [1]."""
        return self.unloaded_q / (1.0 + self.coupling)

    @property
    def diameter(self) -> float:
        """Diameter of its circle in the plane of the reflection [1]: below 1 undercoupled, above it overcoupled."""
        return 2.0 * self.coupling / (1.0 + self.coupling)

    @property
    def lowest_ratio(self) -> float:
        """Its standing-wave ratio at resonance [1]."""
        return max(self.coupling, 1.0 / self.coupling)

    def reflection(self, offset: Array, resonance: float) -> ComplexArray:
        """Return the reflection at the loop's own terminals, 1 far off, at offsets from the resonance [Hz]."""
        return np.asarray(1.0 - self.diameter / detuned_impedance(offset, resonance, self.loaded_q))

    def detuning(self, ratio: float) -> float:
        """Return how far from resonance, over it, the standing-wave ratio comes to `ratio` [1], above the lowest."""
        return 0.5 * float(tuning_times_q(reflection_of(ratio), self.coupling)) / self.unloaded_q

    def offsets(self, resonance: float, reach: float) -> Array:
        """Return offsets [Hz] to `reach` on both sides, so close that the circle is drawn evenly."""
        half_width = resonance / (2.0 * self.loaded_q)
        end = atan(reach / half_width)
        return np.asarray(half_width * np.tan(np.linspace(-end, end, _POINTS)))

    def circle(self) -> ComplexArray:
        """Return its whole circle."""
        turn = np.linspace(-np.pi, np.pi, _POINTS)
        return np.asarray(1.0 - 0.5 * self.diameter * (1.0 + np.exp(1j * turn)))


@dataclass(frozen=True, slots=True)
class ResonanceCurves:
    """What was read of one resonance [Hz], beside what the parts make of it with the same feed.

    `offset` [Hz] and `reflection` [1] are the points as read, shape (point,). `measured` is the circuit by the
    likely reading; `computed` that of the parts, None where they tell no Q; `least` and `most` those of the ends of
    their Q. `read_q` and `computed_q` are both Q at that resonance, with their ends.
    """

    resonance: float
    date: str
    offset: Array
    reflection: ComplexArray
    measured: Tuned
    read_q: Spread
    computed: Tuned | None
    least: Tuned | None
    most: Tuned | None
    computed_q: Spread

    @property
    def circuits(self) -> tuple[Tuned, ...]:
        """The circuits that are drawn."""
        return tuple(each for each in (self.measured, self.computed, self.least, self.most) if each is not None)

    @property
    def likely(self) -> tuple[Tuned, ...]:
        """The circuits by likely values."""
        return (self.measured,) if self.computed is None else (self.measured, self.computed)

    def reach(self, ratio: float) -> float:
        """Return how far from resonance all likely curves come to a standing-wave ratio [1], in hertz."""
        return self.resonance * min(_MOST_REACH, max(each.detuning(ratio) for each in self.likely))


def of_reading(sheet: MeasuredSheet) -> ResonanceCurves | None:
    """Return the curves of a measurement; None where it has no points, or does not tell the coupling."""
    reading, figure = sheet.reading, sheet.figures["unloaded_q"]
    return _curves(
        (reading.resonance.likely, sheet.date),
        reading.points,
        (reading.unloaded_q, reading.coupling),
        _spread(figure.computed),
        figure.measured.likely,
    )


def of_record(record: MeasurementRecord) -> ResonanceCurves | None:
    """Return the curves of the measurement that a transmission rests on; None as `of_reading`."""
    return _curves(
        (record.resonance, record.date),
        record.points,
        (record.unloaded_q, record.coupling),
        _spread(record.computed_q),
        record.carried_q.likely,
    )


def _spread(found: Value | FigureRecord) -> Spread:
    return Spread(found.low, found.likely, found.high)


def _curves(
    at: tuple[float | None, str],
    points: Sequence[tuple[float, float, float]],
    read: tuple[Value, Value | None],
    computed: Spread,
    carried: float | None,
) -> ResonanceCurves | None:
    """Put curves together; `carried` is the read Q where `computed` is known, at the transmission's frequency."""
    (resonance, day), (quality, coupling) = at, read
    if not points or not resonance or not quality.likely or coupling is None or not coupling.likely:
        return None
    likely = quality.likely
    parts = computed.scaled(likely / carried) if carried else Spread(None, None, None)
    measured = Tuned(likely, coupling.likely)
    frequency, real, imaginary = np.array(points, dtype=float).T
    return ResonanceCurves(
        resonance=resonance,
        date=day,
        offset=np.asarray(frequency - resonance),
        reflection=np.asarray(real + 1j * imaginary),
        measured=measured,
        read_q=_spread(quality),
        computed=_of_parts(measured, parts.likely),
        least=_of_parts(measured, parts.low),
        most=_of_parts(measured, parts.high),
        computed_q=parts,
    )


def _of_parts(measured: Tuned, quality: float | None) -> Tuned | None:
    """Return the circuit of another Q behind the same feed, whose load on the loop stays what it is [ohm]."""
    if not quality:
        return None
    return Tuned(quality, measured.coupling * quality / measured.unloaded_q)
