"""One resonance in a sweep of the reflection factor: frequency, Q and coupling by least squares, with uncertainties."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.special import stdtrit

from magsafe.physics.arrays import Array, ComplexArray, Values

LEAST_POINTS = 8
LEAST_IN_BAND = 2
MOST_REFLECTION = 1.2
LONGEST_DELAY = 1e-6
"""There and back [s]: 100 m of cable. What a sweep cannot tell to half of this, it cannot tell."""

# Further from resonance than this many half-power bandwidths, feeder and coupling loop vary more than the fit allows.
_REACH = 10.0
_MOST_POINTS = 20_000
_MOST_AT_START = 2_000
_MOST_DELAYS = 64
_STEPS = 60
_SETTLED = 1e-8  # of a bandwidth, of Q
_CONFIDENCE = 0.975
_CLEAR = 10.0
_SHALLOW = 1e-3
_LARGE_RESIDUAL = 0.02
_ALIKE = 0.5
_NO_CIRCLE = 0.1
_LARGE_LEAN = np.radians(10.0)


@dataclass(frozen=True, slots=True)
class Estimate:
    """A fitted value with both parts of its uncertainty, in one unit.

    `uncertainty` is the standard uncertainty by the scatter of the points, `noise` the half width of its 95 % interval
    (Student's t). `below` and `above` are how far systematic errors may move the value, in quadrature: the analyser's,
    at its worst phase, that of the circuit behind the fit, and a delay that the sweep does not tell. An end that
    nothing bounds is infinite.
    """

    value: float
    uncertainty: float
    noise: float
    below: float = 0.0
    above: float = 0.0

    @property
    def low(self) -> float:
        """Low end at 95 %: both parts in quadrature."""
        return self.value - float(np.hypot(self.noise, self.below))

    @property
    def high(self) -> float:
        """High end at 95 %: both parts in quadrature."""
        return self.value + float(np.hypot(self.noise, self.above))


@dataclass(frozen=True, slots=True)
class ResonanceFit:
    """One resonance as a reflection sweep shows it.

    `resonance` [Hz] is that of the loop with what the line couples into it; `loaded_q`, `unloaded_q`, `coupling` [1]:
    below 1 undercoupled, above 1 overcoupled. `far_off` is the reflection beside the resonance, `diameter` the vector
    from there across the circle, both at resonance. `loss` [dB] is one way, as the far-off reflection shows it;
    `delay` [s] there and back, `delay_uncertainty` [s] its standard uncertainty, `delay_held` whether it was held at 0
    because the sweep does not tell it. `lean` [rad] is the angle by which the diameter leaves the way to the centre: 0
    with a lossless coupling and a good calibration. `residual` is the rms of what the curve leaves of each point,
    `correlation` how much neighbours are alike in that (0 for noise), `points` how many were fitted, `points_in_band`
    how many lie between the half-power points. `notes` are sentences about what limits the fit.
    """

    resonance: Estimate
    loaded_q: Estimate
    unloaded_q: Estimate
    coupling: Estimate
    loss: Estimate
    far_off: complex
    diameter: complex
    delay: float
    delay_uncertainty: float
    delay_held: bool
    lean: float
    residual: float
    correlation: float
    points: int
    points_in_band: int
    notes: tuple[str, ...]

    @property
    def bandwidth(self) -> float:
        """Width between the half-power points of the loaded resonance [Hz]."""
        return self.resonance.value / self.loaded_q.value

    def curve(self, frequency: Values) -> ComplexArray:
        """Return the fitted reflection.

        Parameters
        ----------
        frequency : [Hz], shape (...)

        Returns
        -------
        reflection factor [1], same shape, as the analyser reads it

        Valid     about the resonance, as far as points were fitted.
        Source    `fit_resonance`.
        """
        away = np.asarray(frequency) - self.resonance.value
        return np.asarray(np.exp(-2j * np.pi * away * self.delay) * self.far_off * self.at_terminals(frequency))

    def at_terminals(self, frequency: Values) -> ComplexArray:
        """Return the fitted reflection without the loss and the delay of the line.

        Parameters
        ----------
        frequency : [Hz], shape (...)

        Returns
        -------
        reflection factor [1], same shape: 1 far off, 1 - diameter at resonance

        Valid     as `curve`.
        Source    `fit_resonance`.
        """
        pole = _pole(np.asarray(frequency, dtype=float), self.resonance.value, self.loaded_q.value)
        return np.asarray(1.0 + self.diameter / self.far_off * pole)


def fit_resonance(frequency: Array, reflection: ComplexArray, reflection_error: float = 0.0) -> ResonanceFit:
    """Return the resonance that a sweep of the reflection factor shows.

    Parameters
    ----------
    frequency : in strict order, up or down [Hz], shape (N,)
    reflection : reflection factor at the analyser [1], shape (N,)
    reflection_error : bound of the analyser's systematic error in the reflection factor [1]; taken as one offset of
        all points, at the phase that moves Q most each way, and joined to the scatter in quadrature

    Returns
    -------
    ResonanceFit

    Raises
    ------
    ValueError : the points are too few, not in order, or not those of a passive loop; no resonance stands out, it lies
        at the edge, or too little of it is seen. The message is a plain reason.

    Valid     one resonance behind a coupling without loss and a matched line; its loss drops out of Q. A coupling loop
              of up to twice the line's impedance moves Q by less than diameter/loaded Q (computed from the circuit):
              that is in the ends. The points carry noise of one size; where what the curve leaves of neighbours is
              alike, the interval is widened as if they were fewer, and it is added to `reflection_error`.
    Source    reflection of a coupled resonance: Kajfez & Hwan, IEEE Transactions MTT-32, 666 (1984) (memory); variable
              projection: Golub & Pereyra, SIAM J. Numer. Anal. 10, 413 (1973), with the simpler Jacobian of Kaufman,
              BIT 15, 49 (1975) (memory).
    """
    frequency, reflection = _checked(frequency, reflection)
    if not 0.0 <= reflection_error < 1.0:
        raise ValueError(f"the error of the reflection factor is 0 or more and below 1, not {reflection_error:g}")
    dip = _deepest_dip(frequency, np.abs(reflection) ** 2)
    if dip is None:
        raise ValueError(
            f"no resonance stands out between {frequency[0] / 1e6:.6g} and {frequency[-1] / 1e6:.6g} MHz: "
            "the reflection dips nowhere by more than its noise; sweep about the resonance, with more points"
        )
    fitted = _fitted(frequency, reflection, dip)
    return _result(frequency, reflection, fitted, reflection_error)


def _checked(frequency: Array, reflection: ComplexArray) -> tuple[Array, ComplexArray]:
    frequency, reflection = np.asarray(frequency, dtype=float), np.asarray(reflection, dtype=complex)
    if frequency.ndim != 1 or frequency.shape != reflection.shape:
        raise ValueError(f"one reflection for each frequency, not shapes {frequency.shape} and {reflection.shape}")
    if frequency.size < LEAST_POINTS:
        raise ValueError(f"a sweep of {frequency.size} points is too short: at least {LEAST_POINTS} are needed")
    if not (np.isfinite(frequency).all() and np.isfinite(reflection).all()):
        raise ValueError("a frequency or a reflection is not a finite number")
    if frequency[0] > frequency[-1]:
        frequency, reflection = frequency[::-1], reflection[::-1]
    if frequency[0] <= 0.0 or not (np.diff(frequency) > 0.0).all():
        raise ValueError("the frequencies are not above 0 and in strict order")
    most = int(np.argmax(np.abs(reflection)))
    if abs(reflection[most]) > MOST_REFLECTION:
        raise ValueError(
            f"a reflection of {abs(reflection[most]):.3g} at {frequency[most] / 1e6:.6g} MHz: a loop gives back no "
            "more than 1, so calibrate the analyser at its port and sweep again"
        )
    return frequency, reflection


# Where to begin --------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class _Dip:
    """A dip of the reflected power: where [Hz], and how wide [Hz]."""

    centre: float
    width: float


def _deepest_dip(frequency: Array, power: Array) -> _Dip | None:
    """Return the dip that stands out most: the mean of a window below that of its flanks, over windows of all sizes."""
    total = np.concatenate(([0.0], np.cumsum(power)))
    noise = float(np.median(np.abs(np.diff(power)))) / (0.6745 * np.sqrt(2.0))
    best, score = None, 0.0
    wide = 2
    while 2 * wide <= power.size:
        half = wide // 2
        first = np.arange(half, power.size - wide - half + 1, max(1, wide // 8))
        inside = (total[first + wide] - total[first]) / wide
        flanks = (total[first] - total[first - half] + total[first + wide + half] - total[first + wide]) / (2 * half)
        contrast = flanks - inside
        deepest = int(np.argmax(contrast))
        # A weak power of the width lets a dip win over one stray point, yet not a shallow ripple over a deep dip.
        rank = float(contrast[deepest]) * wide**0.1
        if contrast[deepest] > max(_CLEAR * noise / np.sqrt(wide), _SHALLOW) and rank > score:
            here = int(first[deepest])
            low, high = float(frequency[here]), float(frequency[here + wide - 1])
            best, score = _Dip(0.5 * (low + high), (high - low) * wide / (wide - 1)), rank
        wide = max(wide + 1, wide * 5 // 4)
    return best


# The fit ---------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class _Fitted:
    """Least squares at its end: parameters (resonance, ln Q, delay, Re a, Im a, Re b, Im b) and their covariance."""

    parameters: Array
    covariance: Array
    freedom: int
    correlation: float
    residual: float

    @property
    def resonance(self) -> float:
        return float(self.parameters[0])

    @property
    def quality(self) -> float:
        return float(np.exp(self.parameters[1]))

    @property
    def delay(self) -> float:
        return float(self.parameters[2])

    @property
    def far_off(self) -> complex:
        return complex(self.parameters[3], self.parameters[4])

    @property
    def diameter(self) -> complex:
        return complex(self.parameters[5], self.parameters[6])


def _pole(frequency: Array, resonance: float, quality: float) -> ComplexArray:
    return np.asarray(1.0 / (1.0 + 1j * quality * (frequency / resonance - resonance / frequency)))


def _basis(frequency: Array, resonance: float, quality: float, delay: float) -> ComplexArray:
    """Return the two columns that the sweep is a sum of, shape (N, 2)."""
    turned = np.exp(-2j * np.pi * (frequency - resonance) * delay)
    return np.stack((turned, turned * _pole(frequency, resonance, quality)), axis=1)


def _amplitudes(basis: ComplexArray, reflection: ComplexArray) -> tuple[ComplexArray, float]:
    """Return the best a and b of a basis, and the sum of squares that they leave."""
    orthogonal, triangle = np.linalg.qr(basis)
    shares = orthogonal.conj().T @ reflection
    left = reflection - orthogonal @ shares
    best = np.linalg.lstsq(triangle, shares, rcond=None)[0]
    return np.asarray(best, dtype=np.complex128), float(np.vdot(left, left).real)


def _thinned(frequency: Array, reflection: ComplexArray, most: int) -> tuple[Array, ComplexArray]:
    """Return means over neighbours, so that no more than `most` points are left."""
    if frequency.size <= most:
        return frequency, reflection
    starts = np.arange(most) * frequency.size // most
    counts = np.diff(np.append(starts, frequency.size))
    means = np.add.reduceat(reflection, starts) / counts
    return np.add.reduceat(frequency, starts) / counts, np.asarray(means, dtype=np.complex128)


def _near(frequency: Array, centre: float, reach: float) -> slice:
    first, last = np.searchsorted(frequency, [centre - reach, centre + reach])
    return slice(int(first), int(last)) if last - first >= LEAST_POINTS else slice(0, frequency.size)


def _fitted(frequency: Array, reflection: ComplexArray, dip: _Dip) -> _Fitted:
    part = _near(frequency, dip.centre, _REACH * dip.width)
    few = _thinned(frequency[part], reflection[part], _MOST_AT_START)
    start = _start(*few, dip)
    resonance, quality, delay = _refined(*few, start, hold=False)
    part = _near(frequency, resonance, _REACH * resonance / quality)
    many = _thinned(frequency[part], reflection[part], _MOST_POINTS)
    free = _ended(*many, _refined(*many, (resonance, quality, delay), hold=False), hold=False)
    _must_stand_out(free, frequency)
    if np.sqrt(free.covariance[2, 2]) <= 0.5 * LONGEST_DELAY:
        return free
    held = _ended(*many, _refined(*many, (free.resonance, free.quality, 0.0), hold=True), hold=True)
    _must_stand_out(held, frequency)
    return held


def _start(frequency: Array, reflection: ComplexArray, dip: _Dip) -> tuple[float, float, float]:
    """Return the best of some resonances, Q and delays."""
    step = 0.25 / (frequency[-1] - frequency[0])
    count = int(min(np.ceil(2.0 * LONGEST_DELAY / step), _MOST_DELAYS))
    delays = step * np.arange(-count, count + 1)
    straightened = np.exp(2j * np.pi * np.outer(delays, frequency - dip.centre))
    both = [straightened * reflection, straightened * reflection.conj()]
    tried: list[tuple[float, float, float]] = []
    remainders: list[Array] = []
    for shift in (-0.25, 0.0, 0.25):
        for factor in (0.5, 1.0, 2.5):
            at = (dip.centre + shift * dip.width, factor * dip.centre / dip.width)
            basis = _basis(frequency, *at, 0.0)
            tried += [(*at, float(delay)) for delay in delays]
            remainders.append(np.stack([_left(basis, each) for each in both], axis=1))
    left = np.concatenate(remainders)
    if left[:, 1].min() < 0.25 * left[:, 0].min():
        raise ValueError(
            "the circle of the resonance is run through backwards as the frequency rises: the imaginary part has the "
            "wrong sign"
        )
    return tried[int(np.argmin(left[:, 0]))]


def _left(basis: ComplexArray, reflections: ComplexArray) -> Array:
    """Return what the best a and b of a basis leave of each row, as sums of squares: good enough to begin with."""
    shares = basis.conj().T @ reflections.T
    explained = np.sum(shares.conj() * np.linalg.solve(basis.conj().T @ basis, shares), axis=0)
    return np.asarray(np.sum(np.abs(reflections) ** 2, axis=1) - explained.real)


def _slopes(frequency: Array, resonance: float, quality: float, delay: float, b: complex) -> ComplexArray:
    """Return the derivatives of the curve by (resonance, ln Q), shape (N, 2)."""
    away = frequency - resonance
    turned = np.exp(-2j * np.pi * away * delay)
    pole = _pole(frequency, resonance, quality)
    by_tuning = -b * turned * pole**2 * 1j * quality
    tuned = frequency / resonance
    by_resonance = by_tuning * -(tuned + 1.0 / tuned) / resonance
    return np.stack((by_resonance, by_tuning * (tuned - 1.0 / tuned)), axis=1)


def _jacobian(frequency: Array, at: tuple[float, float, float], amplitudes: ComplexArray) -> ComplexArray:
    """Return the derivatives by (resonance, ln Q, delay, Re a, Im a, Re b, Im b), shape (N, 7)."""
    basis = _basis(frequency, *at)
    curve = basis @ amplitudes
    # The resonance moves the zero of the phase too: a common turn of a and b, on which no figure depends.
    slopes = _slopes(frequency, *at, complex(amplitudes[1]))
    by_delay = -2j * np.pi * (frequency - at[0]) * curve
    return np.column_stack((slopes[:, 0], slopes[:, 1], by_delay, basis[:, 0], 1j * basis[:, 0],
                            basis[:, 1], 1j * basis[:, 1]))  # fmt: skip


def _refined(
    frequency: Array, reflection: ComplexArray, start: tuple[float, float, float], *, hold: bool
) -> tuple[float, float, float]:
    """Return (resonance, Q, delay) of the least squares: variable projection with damped steps."""
    at, damping = start, 1e-3
    amplitudes, left = _amplitudes(_basis(frequency, *at), reflection)
    free = slice(0, 2 if hold else 3)
    for _ in range(_STEPS):
        basis = _basis(frequency, *at)
        orthogonal = np.linalg.qr(basis)[0]
        slopes = _jacobian(frequency, at, amplitudes)[:, free]
        slopes = slopes - orthogonal @ (orthogonal.conj().T @ slopes)
        remainder = reflection - basis @ amplitudes
        normal = (slopes.conj().T @ slopes).real
        scale = np.sqrt(np.diag(normal))
        if not (scale > 0.0).all():
            break
        wanted = (slopes.conj().T @ remainder).real / scale
        step = np.linalg.solve(normal / np.outer(scale, scale) + damping * np.eye(scale.size), wanted) / scale
        moved = np.append(step, 0.0) if hold else step
        # A step of more than a bandwidth or a factor 3 in Q leaves the region where the slopes mean anything.
        most = max(abs(moved[0]) * at[1] / at[0], abs(moved[1]))
        moved = moved / max(most, 1.0)
        new = (at[0] + float(moved[0]), at[1] * float(np.exp(moved[1])), at[2] + float(moved[2]))
        found, after = _amplitudes(_basis(frequency, *new), reflection)
        if after <= left and frequency[0] <= new[0] <= frequency[-1]:
            settled = abs(moved[0]) * at[1] / at[0] < _SETTLED and abs(moved[1]) < _SETTLED
            at, amplitudes, left, damping = new, found, after, damping / 10.0
            if settled:
                break
        else:
            damping = 10.0 * damping
            if damping > 1e4:
                break
    return at


def _ended(frequency: Array, reflection: ComplexArray, at: tuple[float, float, float], *, hold: bool) -> _Fitted:
    amplitudes, _ = _amplitudes(_basis(frequency, *at), reflection)
    remainder = reflection - _basis(frequency, *at) @ amplitudes
    free = np.array([0, 1, 3, 4, 5, 6] if hold else [0, 1, 2, 3, 4, 5, 6])
    slopes = _jacobian(frequency, at, amplitudes)[:, free]
    scale = np.linalg.norm(slopes, axis=0)
    if not (scale > 0.0).all():
        raise ValueError("no resonance stands out: the best circle is a point")
    freedom = 2 * frequency.size - free.size
    square = float(np.vdot(remainder, remainder).real)
    correlation = _correlation(remainder)
    # Neighbours that are alike tell less than as many points of their own would.
    widening = (1.0 + correlation) / (1.0 - correlation) if correlation > 3.0 / np.sqrt(frequency.size) else 1.0
    inner = np.linalg.pinv((slopes.conj().T @ slopes).real / np.outer(scale, scale), rcond=1e-14, hermitian=True)
    covariance = np.zeros((7, 7))
    covariance[np.ix_(free, free)] = widening * square / freedom * inner / np.outer(scale, scale)
    a, b = amplitudes
    parameters = np.array([at[0], np.log(at[1]), at[2], a.real, a.imag, b.real, b.imag])
    return _Fitted(parameters, covariance, freedom, correlation, float(np.sqrt(square / frequency.size)))


def _correlation(remainder: ComplexArray) -> float:
    square = float(np.vdot(remainder, remainder).real)
    if square == 0.0:
        return 0.0
    return float(np.clip(np.vdot(remainder[1:], remainder[:-1]).real / square, -0.98, 0.98))


def _must_stand_out(fitted: _Fitted, frequency: Array) -> None:
    quality, resonance = fitted.quality, fitted.resonance
    width = resonance / quality
    low, high = frequency[0] / 1e6, frequency[-1] / 1e6
    if frequency[-1] - frequency[0] < width:
        raise ValueError(
            f"the sweep spans {1e3 * (high - low):.4g} kHz, less than the resonance's half-power width of about "
            f"{1e-3 * width:.3g} kHz: sweep at least three times as wide"
        )
    if not frequency[0] + 0.5 * width <= resonance <= frequency[-1] - 0.5 * width:
        raise ValueError(
            f"the resonance lies at the edge of the sweep, near {resonance / 1e6:.6g} MHz: move the span from "
            f"{low:.6g}...{high:.6g} MHz so that it is in the middle"
        )
    if np.sum(np.abs(frequency - resonance) <= 0.5 * width) < LEAST_IN_BAND:
        raise ValueError(
            f"fewer than {LEAST_IN_BAND} points lie within the half-power width of about {1e-3 * width:.3g} kHz at "
            f"{resonance / 1e6:.6g} MHz: sweep a narrower span, or with more points"
        )
    if fitted.residual > _NO_CIRCLE * abs(fitted.diameter) and fitted.correlation > _ALIKE:
        raise ValueError(
            "the points do not follow one circle: there is more than one resonance, or the loop moved during the sweep"
        )
    scatter = np.sqrt(max(fitted.covariance[5, 5], fitted.covariance[6, 6]))
    if abs(fitted.diameter) < 8.0 * scatter or np.sqrt(fitted.covariance[1, 1]) > 0.25:
        raise ValueError("no resonance stands out of the noise: its width is not known to a quarter")
    if abs(fitted.diameter) >= 2.0 * abs(fitted.far_off):
        raise ValueError("the circle is larger than a passive loop makes: calibrate the analyser and sweep again")


# What it says ----------------------------------------------------------------------------------------------

# What the figures are made of: (resonance, loaded Q, size of a, size of b).
_Parts = tuple[float, float, float, float]
_Measure = Callable[[_Parts], float]


def _loaded(parts: _Parts) -> float:
    return parts[1]


def _coupling(parts: _Parts) -> float:
    """Return what the line takes out of the loop over what the loop uses up: 1 where they match."""
    _, _, far, across = parts
    return across / (2.0 * far - across) if across < 2.0 * far else float("inf")


def _unloaded(parts: _Parts) -> float:
    return _loaded(parts) * (1.0 + _coupling(parts))


def _loss(parts: _Parts) -> float:
    """Return the loss one way [dB]: the far-off reflection has gone it twice."""
    return float(-10.0 * np.log10(parts[2])) if parts[2] > 0.0 else float("inf")


def _parts(fitted: _Fitted) -> _Parts:
    return fitted.resonance, fitted.quality, abs(fitted.far_off), abs(fitted.diameter)


def _result(frequency: Array, reflection: ComplexArray, fitted: _Fitted, error: float) -> ResonanceFit:
    a, b, parts = fitted.far_off, fitted.diameter, _parts(fitted)
    resonance, quality, far, across = parts
    away = np.abs(frequency - resonance)
    near = _near(frequency, resonance, _REACH * resonance / quality)
    left = reflection[near] - _basis(frequency[near], resonance, quality, fitted.delay) @ np.array([a, b])
    residual = float(np.sqrt(np.mean(np.abs(left) ** 2)))
    held = bool(fitted.covariance[2, 2] == 0.0)
    # What the curve leaves beside noise is no less of an error than the analyser's.
    error = float(np.hypot(error, residual * np.sqrt(fitted.correlation))) if fitted.correlation > _ALIKE else error
    # An offset of all points moves a, and nothing else.
    offset = [(resonance, quality, far + error, across), (resonance, quality, far - error, across)]
    # What a coupling reactance that goes with frequency leaves out of the loop's own (see `fit_resonance`, Valid).
    model = across / far / quality
    shape = [
        (resonance, quality * (1.0 + end * model), far, across * (1.0 + 0.25 * end * model)) for end in (-1.0, 1.0)
    ]
    cases = [offset, shape]
    if held:
        cases.append([_parts(_held(frequency, reflection, fitted, sign * LONGEST_DELAY)) for sign in (-1.0, 1.0)])
    student = float(stdtrit(fitted.freedom, _CONFIDENCE))

    def estimate(measure: _Measure, slope: Array) -> Estimate:
        value = measure(parts)
        uncertainty = float(np.sqrt(max(float(slope @ fitted.covariance @ slope), 0.0)))
        moved = [[measure(each) - value for each in both] for both in cases]
        below = float(np.linalg.norm([max(-min(both), 0.0) for both in moved]))
        above = float(np.linalg.norm([max(*both, 0.0) for both in moved]))
        return Estimate(value, uncertainty, student * uncertainty, below, above)

    by_resonance, by_quality = np.eye(7)[0], np.eye(7)[1]
    by_far = np.array([0.0, 0.0, 0.0, a.real, a.imag, 0.0, 0.0]) / far**2
    by_diameter = np.array([0.0, 0.0, 0.0, 0.0, 0.0, b.real, b.imag]) / across**2 - by_far
    diameter = across / far
    lean = float(np.angle(-b / a))
    return ResonanceFit(
        resonance=estimate(lambda each: each[0], by_resonance),
        loaded_q=estimate(_loaded, quality * by_quality),
        unloaded_q=estimate(_unloaded, _unloaded(parts) * (by_quality + diameter / (2.0 - diameter) * by_diameter)),
        coupling=estimate(_coupling, 2.0 * diameter / (2.0 - diameter) ** 2 * by_diameter),
        loss=estimate(_loss, -10.0 / np.log(10.0) * by_far),
        far_off=a,
        diameter=b,
        delay=fitted.delay,
        delay_uncertainty=float(np.sqrt(fitted.covariance[2, 2])),
        delay_held=held,
        lean=lean,
        residual=residual,
        correlation=fitted.correlation,
        points=left.size,
        points_in_band=int(np.sum(away <= 0.5 * resonance / quality)),
        notes=_notes(held, lean, residual / across, fitted.correlation),
    )


def _held(frequency: Array, reflection: ComplexArray, fitted: _Fitted, delay: float) -> _Fitted:
    """Return the fit with a given delay."""
    part = _near(frequency, fitted.resonance, _REACH * fitted.resonance / fitted.quality)
    many = _thinned(frequency[part], reflection[part], _MOST_AT_START)
    return _ended(*many, _refined(*many, (fitted.resonance, fitted.quality, delay), hold=True), hold=True)


def _notes(held: bool, lean: float, residual: float, correlation: float) -> tuple[str, ...]:
    notes = []
    if held:
        notes.append(
            "the sweep is too narrow to tell the delay of the line: it is held at 0, and what "
            f"{1e6 * LONGEST_DELAY:g} us would do is in the ends"
        )
    if residual > _LARGE_RESIDUAL and correlation > _ALIKE:
        notes.append(
            f"the points leave the circle by {100.0 * residual:.2g} % of its diameter, neighbours alike: there is more "
            "than one resonance, or the loop moved during the sweep"
        )
    if abs(lean) > _LARGE_LEAN:
        notes.append(
            f"the circle leans by {np.degrees(lean):.0f} degrees: the coupling has losses, or the calibration is off"
        )
    return tuple(notes)
