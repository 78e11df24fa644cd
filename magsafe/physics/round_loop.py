"""The perfectly conducting circular loop with one port, solved as a Fourier series round the turn.

With a the conductor's radius, b the loop's, s = kb the perimeter in wavelengths, alpha = a/b and eta0 the impedance
of free space, the current under an applied field whose harmonics are u_n (all 1 for a point source) is

    I(phi) = V / (j pi eta0) [1/a_0 + 2 sum u_n cos(n phi) / a_n],   a_n = s/2 (N_{n+1} + N_{n-1}) - n^2/s N_n

where N_n is the n-th harmonic of b exp(-jkR)/R, R from surface to surface:

    N_0 = (1/pi) ln(8/alpha)                            - 1/2 integral_0^2s [Omega_0(x)  + j J_0(x)] dx
    N_n = (1/pi) [K0(n alpha) I0(n alpha) + C_n]        - 1/2 integral_0^2s [Omega_2n(x) + j J_2n(x)] dx
    C_n = ln(4n) + gamma - 2 sum_{m<n} 1/(2m + 1) = ln(n) - digamma(n + 1/2)

with J the Bessel and Omega the Lommel-Weber functions. They integrate to (exp(-jx sin t) - 1) cos(2nt) / sin t,
whose power series in x is known by recurrence; every term of the imaginary part vanishes up to the leading one,
which keeps the radiation resistance exact where it is a hundred-millionth of the reactance.

**The port** is a gap of a finite angle with a uniform field: u_n = sinc(n gap/2), and what counts as its current is
the mean over the gap, so that volts times current is the power; its admittance has the square of u_n. A point source
would have an infinite capacitance between its edges and so no admittance at all. The capacitance of a real gap is
finite, but it depends on the gap's width: across the port it moves the reactance, the more the larger the loop. It
moves the resistance only as any capacitance across the port does, so that R/X^2 is nearly free of it.

Phasors turn as exp(+j omega t).

Source    Hallén, Nova Acta Uppsala 11 (1938); Storer, Transactions of the AIEE 75, 606 (1956); Wu, Journal of
          Mathematical Physics 3, 1301 (1962); King in Collin & Zucker, Antenna Theory, ch. 11 (1969) (all memory).
"""

from dataclasses import dataclass
from functools import lru_cache
from math import ceil, isfinite

import numpy as np
from scipy.constants import c, mu_0
from scipy.special import i0e, k0e, psi

from magsafe.physics.arrays import Array, ComplexArray
from magsafe.physics.ranges import Range

SIZE = Range("perimeter in wavelengths", 1e-4, 3.2, "convergence of the power series in double precision")
THICKNESS = Range(
    "conductor radius over loop radius", 1e-6, 0.06, "what the kernel leaves out goes as the square of the thickness"
)
GAP = Range("angle of the gap in rad", 0.01, 0.6, "number of harmonics; a gap that is still a port")

_IMPEDANCE = mu_0 * c  # of free space
_TERMS = 48  # of the power series: the last is 1e-18 at the largest size
_PER_GAP = 60.0  # harmonics times gap, each harmonic at each frequency; no more than the first ten radiate
_PER_GAP_STATIC = 2000.0  # the same for those that only add to the capacitance of the gap


@dataclass(frozen=True, slots=True)
class RoundLoop:
    """What the series gives, row by row of the frequencies asked for.

    Attributes
    ----------
    frequencies : as given [Hz], shape (frequency,)
    impedance : at the port [ohm], shape (frequency,)
    reactance_slope : derivative of its imaginary part with respect to angular frequency [ohm s],
        shape (frequency,), from the derivative of each term of the series
    mean_square : mean of |current|^2 over the turn, over |port current|^2 [1], shape (frequency,)
    harmonics : current round the turn per ampere at the port, as the amplitudes of cos(n phi) [1],
        shape (frequency, harmonic), n from 0
    """

    frequencies: Array
    impedance: ComplexArray
    reactance_slope: Array
    mean_square: Array
    harmonics: ComplexArray

    @property
    def radiation_resistance(self) -> Array:
        """Radiation resistance at the port [ohm], shape (frequency,): with no other loss, all of the real part."""
        return np.asarray(self.impedance.real)

    def current(self, angles: Array) -> ComplexArray:
        """Return the current round the turn per ampere at the port.

        Parameters
        ----------
        angles : from the middle of the gap [rad], shape (angle,)

        Returns
        -------
        current [1], shape (frequency, angle), counted along the turn; its mean over the gap is 1

        Valid     as `solve`; to 3e-4 of the largest at the port, to 1e-5 a few gaps away from it.
        Source    the Fourier series.
        """
        order = np.arange(self.harmonics.shape[1])
        return np.asarray(self.harmonics @ np.cos(order[:, None] * np.asarray(angles)))


def solve(radius: float, conductor_radius: float, frequencies: Array, gap: float) -> RoundLoop:
    """Solve the loop in free space.

    Parameters
    ----------
    radius : of the turn's centre line [m]
    conductor_radius : of the round conductor [m]
    frequencies : where to solve [Hz], shape (frequency,)
    gap : angle of the turn over which the port's field lies [rad]

    Returns
    -------
    impedance, slope and current of the port at each frequency

    Raises
    ------
    ValueError : frequencies of another shape; a radius, thickness, gap or size outside `THICKNESS`, `GAP` and
        `SIZE`, or not finite

    Valid     `SIZE`, `THICKNESS`, `GAP`. Harmonics: 60 over the gap (in rad), then up to 2000 over the gap as a
              capacitance: impedance to 2e-6. The kernel leaves out the square of the thickness. With a gap narrower
              than about three conductor radii the port's capacitance is that of this model and of no other.
    Source    as the module.
    """
    frequencies = np.asarray(frequencies, dtype=np.float64)
    size = _size(radius, conductor_radius, frequencies, gap)
    thickness = conductor_radius / radius
    count = ceil(_PER_GAP / gap)
    order = np.arange(count + 1)
    source = np.sinc(order * gap / (2.0 * np.pi))
    folded = np.where(order == 0, 1.0, 2.0) * source  # both signs of n
    coefficient, slope = _coefficients(size, thickness, count)
    inverse = 1.0 / coefficient
    terms = folded * inverse
    rest = _static_rest(thickness, gap, count)
    scale = -1j / (np.pi * _IMPEDANCE)
    total = terms @ source - size * rest
    total_slope = -(terms * inverse * slope) @ source - rest
    impedance = 1.0 / (scale * total)
    by_size = -(impedance**2) * scale * total_slope
    harmonics = terms / total[:, None]
    mean_square = np.abs(harmonics[:, 0]) ** 2 + 0.5 * (np.abs(harmonics[:, 1:]) ** 2).sum(axis=1)
    return RoundLoop(frequencies, impedance, by_size.imag * radius / c, mean_square, harmonics)


def kernel_harmonics(size: Array, thickness: float, count: int) -> tuple[ComplexArray, ComplexArray]:
    """Return the harmonics N_n of the loop's kernel, and their derivatives with respect to size.

    Parameters
    ----------
    size : perimeter in wavelengths [1], shape (frequency,)
    thickness : conductor radius over loop radius [1]
    count : highest harmonic [1]

    Returns
    -------
    N_n and dN_n/dsize [1], each of shape (frequency, count + 1)

    Valid     `SIZE`, `THICKNESS`.
    Source    as the module; the static part King, the series term by term.
    """
    power = np.arange(1, _TERMS + 1)
    table = _series(count)
    rising = (2.0 * size[:, None]) ** power
    falling = power * rising / size[:, None]
    # (-j)^p by its real and imaginary parts: a rounded power of j would spill the reactance into the resistance
    even, odd = power % 2 == 0, power % 2 == 1
    sign = np.where((power // 2) % 2 == 0, 1.0, -1.0)[:, None] * table
    static = _static_harmonics(np.arange(count + 1.0), thickness)
    value = np.empty((len(size), count + 1), dtype=np.complex128)
    value.real = rising[:, even] @ sign[even] + static
    value.imag = -(rising[:, odd] @ sign[odd])
    change = np.empty_like(value)
    change.real = falling[:, even] @ sign[even]
    change.imag = -(falling[:, odd] @ sign[odd])
    return value, change


def _size(radius: float, conductor_radius: float, frequencies: Array, gap: float) -> Array:
    """Perimeter in wavelengths, shape (frequency,), once everything is within range."""
    if frequencies.ndim != 1:
        raise ValueError(f"frequencies have shape {frequencies.shape}, expected (frequency,)")
    for name, length in (("loop radius", radius), ("conductor radius", conductor_radius)):
        if not (isfinite(length) and length > 0.0):
            raise ValueError(f"{name} is {length} m, expected a positive length")
    size = np.asarray(2.0 * np.pi * radius * frequencies / c)
    for held, values in ((THICKNESS, np.array([conductor_radius / radius])), (GAP, np.array([gap])), (SIZE, size)):
        for value in values[~((values >= held.low) & (values <= held.high))][:1]:
            raise ValueError(f"{held.quantity} is {value:.4g}, expected {held.low:g} to {held.high:g}")
    return size


def _coefficients(size: Array, thickness: float, count: int) -> tuple[ComplexArray, ComplexArray]:
    """a_n and da_n/dsize, each of shape (frequency, count + 1)."""
    kernel, change = kernel_harmonics(size, thickness, count + 1)
    size = size[:, None]
    square = np.arange(count + 1) ** 2
    flow, flow_change = _neighbours(kernel), _neighbours(change)
    kernel, change = kernel[:, :-1], change[:, :-1]
    value = 0.5 * size * flow - square / size * kernel
    slope = 0.5 * flow + 0.5 * size * flow_change + square / size**2 * kernel - square / size * change
    return value, slope


def _neighbours(kernel: ComplexArray) -> ComplexArray:
    """N_{n+1} + N_{n-1} of even harmonics, one column fewer."""
    return np.asarray(kernel[:, 1:] + np.concatenate([kernel[:, 1:2], kernel[:, :-2]], axis=1))


def _static_harmonics(order: Array, thickness: float) -> Array:
    """Harmonics of the kernel at zero frequency, shape (harmonic,)."""
    turns = np.maximum(order, 1.0)
    close = k0e(turns * thickness) * i0e(turns * thickness)  # the scaling factors cancel
    around = np.where(order == 0, np.log(8.0 / thickness), close + np.log(turns) - psi(turns + 0.5))
    return np.asarray(around / np.pi)


@lru_cache(maxsize=8)
def _series(count: int) -> Array:
    """The part of N_n that frequency makes, as factors of (-2js)^p, p from 1, shape (_TERMS, count + 1).

    N_n - static = 1/2 sum_p (-2js)^p/p! M_{p-1,n},  M_{q,n} = (1/pi) integral_0^pi sin^q(t) cos(2nt) dt.
    """
    order = np.arange(count + 1)
    moments = np.empty((_TERMS, count + 1))
    moments[0] = order == 0
    moments[1] = 2.0 / np.pi / (1.0 - 4.0 * order**2)
    for q in range(2, _TERMS):
        below = (q * q - 4 * order * order).astype(np.float64)
        first = below == 0.0  # the leading term of this harmonic: all before it are zero
        grown = moments[q - 2] * (q * (q - 1)) / np.where(first, 1.0, below)
        moments[q] = np.where(first, (-1.0) ** (q // 2) * 0.5**q, grown)
    factorial = np.cumprod(np.arange(1.0, _TERMS + 1.0))
    table: Array = 0.5 * moments / factorial[:, None]
    table.setflags(write=False)
    return table


def _static_rest(thickness: float, gap: float, count: int) -> float:
    """Sum of 2 u_n^2 / (n^2 N_n) over the harmonics above `count`, N_n at zero frequency.

    So far up, a_n is -n^2/s N_n to a part in (n/s)^2, and all that is left of the sum is a capacitance.
    """
    order = np.arange(count + 1.0, ceil(_PER_GAP_STATIC / gap) + 1.0)
    source = np.sinc(order * gap / (2.0 * np.pi))
    return float(np.sum(2.0 * source**2 / (order**2 * _static_harmonics(order, thickness))))
