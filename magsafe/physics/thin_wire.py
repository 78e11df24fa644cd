"""Method of moments on thin wires: the current that flows in a perfectly conducting loop with one port.

The loop is a closed chain of straight round segments. Its current is linear along each segment (a rooftop over two
segments, one unknown, at every node), and the tangential electric field of current and charge vanishes on average over
each rooftop (Galerkin). With G = exp(-jkR)/R, rooftops f and directions t,

    Z = j eta0/(4 pi) [k A - B/k],   A = integral f f' (t.t') G,   B = integral df/ds df'/ds' G.

G is split in two. Its static part 1/R is averaged over the conductor's surface where segments lie close together on
one strand, so that segments may be nearly as short as the conductor is thick; between strands it is that of the axes.
The rest, (exp(-jkR) - 1)/R, is smooth: one quadrature rule serves all pairs, with the true distance of the axes. The
rule integrates current times position exactly, so that what a closed loop cancels of the radiated power cancels here
too, and radiation resistance is right where it is a hundred-millionth of the reactance.

The rest is a power series in k, whose matrices are made once for a geometry: a further frequency is a sum of matrices
and a dense solve. Where a chain and its image are too far apart for the series it is evaluated directly.

The port is one segment with a uniform field along it. Charge piles up on both sides of a gap, and the capacitance that
it makes across the port grows without end as the gap narrows: so the reactance at a port has no value without the
gap's width, however fine the segments, while whatever a capacitance across the port does not change has.
"""

from dataclasses import dataclass, replace
from math import factorial, pi

import numpy as np
from scipy.constants import c, mu_0

from magsafe.physics.arrays import Array, ComplexArray
from magsafe.physics.geometry import Wire
from magsafe.physics.ranges import Range
from magsafe.physics.rooftops import assembled, integrated, quadrature_points
from magsafe.physics.static_kernel import crowded_pairs, static_pairs

SERIES_REACH = 7.0  # largest distance times wavenumber for the series: beyond it rounding costs more than three digits
CHUNK = 60_000  # matrix elements of frequencies or of powers at once: in the cache
SERIES_ERROR = 1e-15  # of the first term left out, against the static part

FULL_WAVE = Range(
    "length of the conductor in wavelengths", 0.001, 3.0, "held against the Fourier series of the circular loop"
)

_SCALE = mu_0 * c / (4.0 * pi)


@dataclass(frozen=True, slots=True)
class LoopCurrents:
    """The current of a perfectly conducting loop at several frequencies, for 1 A RMS at its port.

    Attributes
    ----------
    wire : the loop
    frequency : frequencies [Hz], shape (frequency,)
    current : current at each node, along the chain [1, per ampere at the port], shape (frequency, node)
    resistance : power radiated, over a plane with its image's part, at 1 A [ohm], shape (frequency,)
    reactance : reactance at the port [ohm], shape (frequency,)
    slope : derivative of the reactance by the angular frequency [ohm s], shape (frequency,)
    """

    wire: Wire
    frequency: Array
    current: ComplexArray
    resistance: Array
    reactance: Array
    slope: Array

    @property
    def square(self) -> Array:
        """Integral of |current|^2 along each segment [m], shape (frequency, segment)."""
        start, end = self.current, np.roll(self.current, -1, axis=1)
        square = np.abs(start) ** 2 + np.abs(end) ** 2 + (start * end.conj()).real
        return np.asarray(square * self.wire.length / 3.0)

    @property
    def complex_square(self) -> ComplexArray:
        """Integral of current^2 along each segment [m], shape (frequency, segment)."""
        start, end = self.current, np.roll(self.current, -1, axis=1)
        return np.asarray((start**2 + end**2 + start * end) * self.wire.length / 3.0)

    @property
    def largest(self) -> Array:
        """Largest current anywhere on the chain, over that at the port [1], shape (frequency,)."""
        return np.asarray(np.abs(self.current).max(axis=1))

    @property
    def charge(self) -> ComplexArray:
        """Charge per length of each segment [C/m, per ampere at the port], shape (frequency, segment)."""
        change = np.roll(self.current, -1, axis=1) - self.current
        return np.asarray(1j * change / self.wire.length / (2.0 * pi * self.frequency[:, None]))

    def opposite(self) -> ComplexArray:
        """Return the current halfway along the chain from the port [1, per ampere at the port], shape (frequency,)."""
        length = self.wire.length
        places = np.concatenate([[0.0], np.cumsum(length)])
        wanted = 0.5 * (places[-1] + length[0])
        values = np.concatenate([self.current, self.current[:, :1]], axis=1)
        segment = int(np.searchsorted(places, wanted, side="right")) - 1
        part = (wanted - places[segment]) / length[segment]
        return np.asarray(values[:, segment] * (1.0 - part) + values[:, segment + 1] * part)


@dataclass(frozen=True, slots=True)
class Potentials:
    """The matrices A and B of a chain for any wavenumber up to the highest that was asked for [1/m].

    `static` holds their static part, shape (2, node, node); `powers` the rest in powers of the wavenumber, shape
    (power, 2 * node * node), empty where it is evaluated directly. `dots` are the cosines between segments, `charge` is
    the sign of the source's charge.
    """

    highest: float
    static: Array
    powers: Array
    distance: Array
    dots: Array
    charge: float
    length: Array

    def at(self, wavenumber: Array) -> tuple[ComplexArray, ComplexArray]:
        """Return A and B and their derivatives by the wavenumber [1/m], shape (frequency, 2, node, node) each."""
        if float(wavenumber.max()) > self.highest:
            raise ValueError(f"wavenumber {wavenumber.max():.6g} 1/m is above the highest, {self.highest:.6g} 1/m")
        if len(self.powers):
            value, slope = self._series(wavenumber)
        else:
            value = np.empty((len(wavenumber), *self.static.shape), dtype=np.complex128)
            slope = np.empty_like(value)
            for i, k in enumerate(wavenumber):
                value[i], slope[i] = self._direct(float(k))
        value.real += self.static
        return value, slope

    def _series(self, k: Array) -> tuple[ComplexArray, ComplexArray]:
        power = np.arange(1, len(self.powers) + 1)
        # exp(-jkR) = sum of (-jkR)^n / n!: even powers are real, odd ones imaginary.
        signs = np.array([(1.0, -1.0, -1.0, 1.0)[n % 4] / factorial(n) for n in power])
        value, slope = (
            np.empty((len(k), *self.static.shape), dtype=np.complex128),
            np.empty((len(k), *self.static.shape), dtype=np.complex128),
        )
        for found, terms in ((value, k[:, None] ** power), (slope, power * k[:, None] ** (power - 1))):
            factors = terms * signs
            found.real = (factors[:, 1::2] @ self.powers[1::2]).reshape(found.shape)
            found.imag = (factors[:, 0::2] @ self.powers[0::2]).reshape(found.shape)
        return value, slope

    def _direct(self, k: float) -> tuple[ComplexArray, ComplexArray]:
        phase = k * self.distance
        sine, cosine, sinc = np.sin(phase), np.cos(phase), np.sinc(phase / pi)
        apart = np.where(self.distance > 0.0, self.distance, 1.0)
        value, slope = np.empty((2, *self.static.shape), dtype=np.complex128)
        value.real, slope.real = self.matrices((cosine - 1.0) / apart), self.matrices(-sine)
        # Without the constant -jk of the kernel, which cancels in B; in A the port's own moment holds it.
        value.imag, slope.imag = self.matrices(k - k * sinc), self.matrices(1.0 - cosine)
        constant = self.matrices(np.ones_like(phase))[0]
        value.imag[0] -= k * constant
        slope.imag[0] -= constant
        return value, slope

    def matrices(self, kernel: Array) -> Array:
        """Return A and B of a kernel given at the Gauss points, shape (..., 2, node, node)."""
        return assembled(integrated(kernel, self.length), self.dots, self.charge, self.length)


def potentials(wire: Wire, frequency: float, image: bool = False, crowding: Array | None = None) -> Potentials:
    """Return the potential matrices of a chain on itself, or of its image in the plane z = 0 on it.

    Parameters
    ----------
    wire : the chain [m]; with `image`, above the plane
    frequency : the highest that will be asked for [Hz]
    image : whether the sources are the image in a perfect plane, currents along it and charges reversed [1]
    crowding : what crowding takes from the coefficients of potential of close turns, in units of 1/(2 pi epsilon) [1],
        shape (turn, turn); None leaves charge and current evenly spread round the conductor

    Returns
    -------
    matrices for any wavenumber up to that of `frequency`

    Raises
    ------
    ValueError : with `image`, a wire that reaches down to the plane

    Valid     segments of two conductor radii or more; strands whose axes are no nearer than a conductor's diameter.
    Source    Harrington, Field Computation by Moment Methods (1968) (memory).
    """
    mirror = np.array([1.0, 1.0, -1.0]) if image else np.ones(3)
    charge = -1.0 if image else 1.0
    direction, length = wire.direction, wire.length
    if image and not float(wire.nodes[:, 2].min()) > 0.0:
        raise ValueError("the wire reaches down to the plane z = 0")
    points = quadrature_points(wire)
    distance = _distances(points, points * mirror)
    dots = charge * (direction @ (direction * mirror).T)
    pairs = static_pairs(wire, mirror, distance)
    if crowding is not None and not image:
        pairs += crowded_pairs(wire, crowding)
    static = assembled(pairs, dots, charge, length)
    highest = 2.0 * pi * frequency / c * (1.0 + 1e-12)
    empty = np.empty((0, static.size))
    made = Potentials(highest, static, empty, distance, dots, charge, length)
    reach = highest * float(distance.max())
    if reach > SERIES_REACH:
        return made
    powers = np.empty((_terms(reach), *static.shape))
    step = max(1, CHUNK // distance.size)
    kernel = np.ones((step, *distance.shape))
    for first in range(0, len(powers), step):
        kernel[0] = kernel[-1] * distance if first else 1.0
        for i in range(1, step):
            np.multiply(kernel[i - 1], distance, out=kernel[i])
        powers[first : first + step] = made.matrices(kernel)[: len(powers) - first]
    powers[0, 1] = 0.0  # the charges of a rooftop sum to nothing
    return replace(made, powers=powers.reshape(len(powers), -1))


def _terms(reach: float) -> int:
    """Return how many powers of the wavenumber count, for the largest distance times it."""
    count, size = 4, reach**4 / 24.0
    while size > SERIES_ERROR:
        count += 1
        size *= reach / count
    return count


def _distances(points: Array, others: Array) -> Array:
    squares = [(points[:, None, i] - others[None, :, i]) ** 2 for i in range(3)]
    return np.asarray(np.sqrt(squares[0] + squares[1] + squares[2]))


def solve(
    wire: Wire, frequency: Array, parts: tuple[Potentials, ...], internal: ComplexArray | None = None
) -> LoopCurrents:
    """Return the loop's current at the given frequencies.

    Parameters
    ----------
    wire : the loop [m]
    frequency : frequencies [Hz], shape (frequency,)
    parts : potential matrices [m, 1/m] of the chain on itself and, over a plane, of its image
    internal : internal impedance per metre of each segment [ohm/m], shape (frequency, segment); None for a perfect
        conductor. It is there to show how little it changes the current's shape; losses are integrals over the current.

    Returns
    -------
    currents per ampere at the port. Where `internal` is given, `resistance` is still the radiated power alone, and
    `slope` leaves out how `internal` itself changes with frequency.

    Raises
    ------
    ValueError : a frequency that is not positive or above that for which `parts` were made, matrices of another wire,
        `internal` of another shape

    Valid     `FULL_WAVE`, 20 segments or more per wavelength; thin conductors.
    Source    Harrington, Field Computation by Moment Methods (1968) (memory).
    """
    asked = np.asarray(frequency, dtype=np.float64)
    _require(wire, asked, parts, internal)
    parts = _together(parts)
    step = max(1, CHUNK // len(wire.nodes) ** 2)
    found = [
        _solved(wire, asked[i : i + step], parts, internal[i : i + step] if internal is not None else None)
        for i in range(0, len(asked), step)
    ]
    return LoopCurrents(wire, asked, *(np.concatenate(each) for each in zip(*found, strict=True)))


def _require(wire: Wire, frequency: Array, parts: tuple[Potentials, ...], internal: ComplexArray | None) -> None:
    if frequency.ndim != 1 or not len(frequency) or not bool((np.isfinite(frequency) & (frequency > 0.0)).all()):
        raise ValueError(f"frequencies are {frequency}, expected one or more above zero")
    length = wire.length
    if not parts or any(len(part.length) != len(length) or not np.allclose(part.length, length) for part in parts):
        raise ValueError("the matrices are those of another wire")
    if internal is not None and internal.shape != (len(frequency), len(length)):
        raise ValueError(f"internal has shape {internal.shape}, expected {(len(frequency), len(length))}")


def _together(parts: tuple[Potentials, ...]) -> tuple[Potentials, ...]:
    """Return the parts with all series added into one."""
    series = [part for part in parts if len(part.powers)]
    if len(series) < 2:
        return parts
    powers = np.zeros((max(len(part.powers) for part in series), series[0].static.size))
    for part in series:
        powers[: len(part.powers)] += part.powers
    static = np.sum([part.static for part in series], axis=0)
    highest = min(part.highest for part in series)
    both = replace(series[0], highest=highest, static=static, powers=powers)
    return (both, *(part for part in parts if not len(part.powers)))


def _solved(
    wire: Wire, frequency: Array, parts: tuple[Potentials, ...], internal: ComplexArray | None
) -> tuple[ComplexArray, Array, Array, Array]:
    """Return current, resistance, reactance and its slope at a few frequencies."""
    k = 2.0 * pi * frequency / c
    value, slope = parts[0].at(k)
    for part in parts[1:]:
        more = part.at(k)
        value, slope = value + more[0], slope + more[1]
    wave = k[:, None, None]
    impedance = 1j * _SCALE * (wave * value[:, 0] - value[:, 1] / wave)
    derivative = 1j * _SCALE * (value[:, 0] + wave * slope[:, 0] + value[:, 1] / wave**2 - slope[:, 1] / wave)
    drive = np.zeros((len(k), len(wire.nodes), 1), dtype=np.complex128)
    drive[:, :2] = 0.5  # half of the port's field on either rooftop that it belongs to
    full = impedance if internal is None else impedance + _loaded(wire, internal)
    current = np.linalg.solve(full, drive)
    at_port: ComplexArray = (current * drive).sum(axis=(1, 2))
    current = current / at_port[:, None, None]
    across = current.transpose(0, 2, 1)
    # With V = Z I and a port admittance V.I, the derivative of the impedance is I.(dZ/dk).I for 1 A.
    gradient: ComplexArray = (across @ derivative @ current)[:, 0, 0]
    # Of the real part alone: the reactance is up to 1e8 times as large.
    radiated: ComplexArray = (across.conj() @ (impedance.real @ current))[:, 0, 0]
    reactance = (1.0 / at_port).imag
    return current[..., 0], np.asarray(radiated.real), np.asarray(reactance), np.asarray(gradient.imag / c)


def _loaded(wire: Wire, internal: ComplexArray) -> ComplexArray:
    """Return the matrices of an internal impedance per metre along the segments, (frequency, node, node)."""
    third = internal * wire.length / 3.0
    here, following = np.arange(len(wire.length)), np.roll(np.arange(len(wire.length)), -1)
    found = np.zeros((len(internal), len(here), len(here)), dtype=np.complex128)
    found[:, here, here] = third + np.roll(third, 1, axis=1)
    found[:, here, following] = found[:, following, here] = 0.5 * third
    return found
