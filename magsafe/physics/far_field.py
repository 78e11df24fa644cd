"""Far field of given currents: pattern, radiated power, directivity.

With k the wavenumber, u the unit vector towards the observer and the segments of `near_field`, far away

    r E exp(jkr) = -j omega mu0/(4 pi) [N - (N u) u],   N = integral I exp(jk u r') dl

The current of a segment is linear, so its part of N is known in closed form: with the middle at m, half the length
h, the mean current and half of its change,

    integral = 2h exp(jk u m) [mean sinc(x) + j half j1(x)],   x = k h (u direction),  j1 the spherical Bessel function

Round a small loop the parts cancel: all of N but a share of its size in wavelengths. So N is summed as the moment,
integral I dl, once, plus what the phases add to it: exp - 1 and sinc - 1 from forms that do not subtract.

Phasors turn as exp(+j omega t), amplitudes are RMS, z is up; theta is counted from z, phi from x towards y.
"""

from collections.abc import Iterator
from dataclasses import dataclass, replace
from math import cbrt, ceil, isfinite, pi
from typing import Self

import numpy as np
from scipy.constants import c, mu_0

from magsafe.physics.arrays import Array, ComplexArray
from magsafe.physics.near_field import LONGEST_SEGMENT, SegmentCurrents, with_image

IMPEDANCE = mu_0 * c  # of free space
LARGEST_REACH = 200.0  # wavenumber times reach: beyond it the sphere takes minutes
CHUNK = 200_000  # pairs of direction and segment at once
ON_PLANE = 1e-9  # a direction along the plane may lie below it by rounding
PASSES = 5  # of the search for the largest directivity, each sixteen times finer


@dataclass(frozen=True, slots=True)
class FarField:
    """What the currents send out, far away.

    Attributes
    ----------
    currents : the segments and what flows in them; over a plane, with their image
    frequency : of the currents [Hz]
    over_plane : whether a perfectly conducting plane lies at z = 0, and only z > 0 counts
    power : radiated, into all directions or into those above the plane [W]
    """

    currents: SegmentCurrents
    frequency: float
    over_plane: bool
    power: float

    @classmethod
    def of(cls, currents: SegmentCurrents, frequency: float, over_plane: bool = False) -> Self:
        """Take the currents and integrate what they radiate.

        Parameters
        ----------
        currents : the segments and what flows in them, without an image
        frequency : of the currents [Hz]
        over_plane : add the image in a perfectly conducting plane at z = 0

        Raises
        ------
        ValueError : a frequency that is not positive, a segment beyond a quarter of the wavelength, currents that
            reach further than 200 over the wavenumber, or, over a plane, a segment that reaches below it

        Valid     a current that ends has its charge there, unlike in `near_field.fields`. Power to 1e-8: the
                  spherical waves that a source of that reach can send, each squared exactly by Gauss-Legendre
                  quadrature in cos(theta) and even steps in phi.
        Source    radiation integral: Jackson, Classical Electrodynamics, ch. 9; Balanis, Antenna Theory, ch. 3
                  and, for the plane, section 4.7 (all memory).
        """
        if not (isfinite(frequency) and frequency > 0.0):
            raise ValueError(f"frequency is {frequency} Hz, expected more than zero")
        longest = float(currents.length.max()) * frequency / c
        if longest > LONGEST_SEGMENT:
            raise ValueError(f"the longest segment is {longest:.3g} wavelengths, expected at most {LONGEST_SEGMENT}")
        if over_plane:
            currents = with_image(currents)
        centre = _middle(currents)
        ends = np.concatenate([currents.start, currents.end]) - centre
        reach = 2.0 * pi * frequency / c * float(np.linalg.norm(ends, axis=1).max())
        if reach > LARGEST_REACH:
            raise ValueError(f"the currents reach {reach:.4g} over the wavenumber, expected at most {LARGEST_REACH:g}")
        theta, phi, weight = _sphere(reach)
        density = _density(_pattern(currents, frequency, theta, phi))
        share = 0.5 if over_plane else 1.0  # the image makes the lower half the mirror of the upper
        return cls(currents, frequency, over_plane, share * float(weight @ density))

    def pattern(self, theta: Array, phi: Array) -> ComplexArray:
        """Return the electric field times the distance, its phase counted from the origin.

        Parameters
        ----------
        theta : angle from z [rad], shape (direction,)
        phi : angle from x towards y [rad], shape (direction,)

        Returns
        -------
        r E exp(jkr) along increasing theta and phi [V], RMS phasors, shape (direction, 2)

        Raises
        ------
        ValueError : angles of different or other shapes; over a plane, a direction below it

        Valid     distances far beyond the currents' reach, its square over the wavelength, and the wavelength.
        Source    radiation integral, as `of`.
        """
        if theta.ndim != 1 or theta.shape != phi.shape:
            raise ValueError(f"theta has shape {theta.shape} and phi {phi.shape}, expected (direction,) twice")
        below = int(np.count_nonzero(np.cos(theta) < -ON_PLANE))
        if self.over_plane and below:
            raise ValueError(f"{below} of {len(theta)} directions lie below the plane")
        return _pattern(self.currents, self.frequency, theta, phi)

    def directivity(self, theta: Array, phi: Array) -> Array:
        """Return the power density in each direction over that of the same power sent out evenly into the sphere.

        Parameters
        ----------
        theta : angle from z [rad], shape (direction,)
        phi : angle from x towards y [rad], shape (direction,)

        Returns
        -------
        directivity [1], shape (direction,); over a plane its mean over the upper half is 2

        Raises
        ------
        ValueError : as `pattern`, or currents that radiate nothing

        Valid     as `pattern`.
        Source    IEEE Std 145, definition of directivity (memory).
        """
        if self.power <= 0.0:
            raise ValueError("the currents radiate nothing, so they have no directivity")
        return 4.0 * pi * _density(self.pattern(theta, phi)) / self.power

    def directivity_along(self, axis: Array) -> float:
        """Return the directivity in the direction of a vector.

        Parameters
        ----------
        axis : where to [any unit], shape (3,)

        Returns
        -------
        directivity [1]

        Raises
        ------
        ValueError : a vector of another shape, without length or not finite, or as `directivity`

        Valid     as `pattern`.
        Source    as `directivity`.
        """
        return float(self.directivity(*_angles(_unit(axis)[None]))[0])

    def largest_directivity_across(self, normal: Array) -> tuple[float, Array]:
        """Return the largest directivity among the directions at right angles to a vector, and where it is.

        Parameters
        ----------
        normal : of the plane that holds the directions [any unit], shape (3,)

        Returns
        -------
        directivity [1] and the unit vector of that direction [1], shape (3,); one of several if they are equal

        Raises
        ------
        ValueError : as `directivity_along`

        Valid     as `pattern`; over a plane, the directions above it.
        Source    as `directivity`; eight samples or more to each wave of the squared pattern, refined about the best.
        """
        upright = _unit(normal)
        first = np.cross(upright, np.eye(3)[np.argmin(np.abs(upright))])
        first /= np.linalg.norm(first)
        second = np.cross(upright, first)
        reach = 2.0 * pi * self.frequency / c * float(np.abs(self.currents.start - _middle(self.currents)).max())
        count = 16 * _order(2.0 * reach)
        step = 2.0 * pi / count
        angle = step * np.arange(count)
        best, where = 0.0, first
        for _ in range(PASSES):
            towards = np.cos(angle)[:, None] * first + np.sin(angle)[:, None] * second
            above = towards[:, 2] >= -ON_PLANE if self.over_plane else np.full(len(towards), True)
            angle, towards = angle[above], towards[above]
            values = self.directivity(*_angles(towards))
            top = int(np.argmax(values))
            best, where = float(values[top]), towards[top]
            angle = angle[top] + step * np.linspace(-1.0, 1.0, 33)
            step /= 16.0
        return best, where


def _pattern(currents: SegmentCurrents, frequency: float, theta: Array, phi: Array) -> ComplexArray:
    """r E exp(jkr), shape (direction, 2), also below a plane, where it is the mirror's."""
    wavenumber = 2.0 * pi * frequency / c
    origin = _middle(currents)  # phases far from the origin would lose digits
    currents = replace(currents, start=currents.start - origin, end=currents.end - origin)
    middle, direction, length = 0.5 * (currents.start + currents.end), currents.direction, currents.length
    along = length[:, None] * direction
    mean = 0.5 * (currents.current_start + currents.current_end)[:, None] * along
    half = 0.5 * (currents.current_end - currents.current_start)[:, None] * along
    moment = mean.sum(axis=0)
    towards = _towards(theta, phi)
    flow = np.empty((len(theta), 3), dtype=np.complex128)
    for part in _chunks(len(theta), len(length)):
        phase = 1j * wavenumber * (towards[part] @ middle.T)
        x = 0.5 * wavenumber * length * (towards[part] @ direction.T)
        less, first = _bessel(x)
        turned = np.expm1(phase)
        flow[part] = moment + (turned * (1.0 + less) + less) @ mean + (1j * first * (1.0 + turned)) @ half
    flow *= np.exp(1j * wavenumber * (towards @ origin))[:, None]
    by_theta = _towards(theta + 0.5 * pi, phi)
    by_phi = np.stack([-np.sin(phi), np.cos(phi), np.zeros(len(phi))], axis=1)
    across = np.stack([(flow * by_theta).sum(axis=1), (flow * by_phi).sum(axis=1)], axis=1)
    return np.asarray(-1j * wavenumber * IMPEDANCE / (4.0 * pi) * across)


def _bessel(x: Array) -> tuple[Array, Array]:
    """sin(x)/x - 1 and the spherical Bessel function j1(x), for |x| up to pi/4, where both series are short."""
    y = x * x
    less = np.zeros_like(x)
    first = np.zeros_like(x)
    for m in range(7, 0, -1):
        less = -y / (2 * m * (2 * m + 1)) * (1.0 + less)
        first = -y / (2 * m * (2 * m + 3)) * (1.0 + first)
    return less, x / 3.0 * (1.0 + first)


def _density(pattern: ComplexArray) -> Array:
    """Power per solid angle [W/sr], shape (direction,)."""
    return np.asarray((pattern.real**2 + pattern.imag**2).sum(axis=1) / IMPEDANCE)


def _middle(currents: SegmentCurrents) -> Array:
    """A point in the middle of the currents; with an image it lies on the plane."""
    ends = np.concatenate([currents.start, currents.end])
    return np.asarray(0.5 * (ends.min(axis=0) + ends.max(axis=0)))


def _order(reach: float) -> int:
    """Highest spherical wave that counts from a source of that reach, in units of the wavenumber's inverse."""
    return ceil(reach + 4.0 * cbrt(reach) + 6.0)


def _sphere(reach: float) -> tuple[Array, Array, Array]:
    """Theta, phi and solid angle of directions all round, shape (direction,) each.

    Squared, the waves reach twice their order: so many even steps, and half as many nodes.
    """
    order = _order(reach)
    height, share = np.polynomial.legendre.leggauss(order + 1)
    steps = 2 * order + 1
    around = np.arange(steps) * 2.0 * pi / steps
    theta = np.repeat(np.arccos(height), steps)
    return theta, np.tile(around, order + 1), np.repeat(share * 2.0 * pi / steps, steps)


def _towards(theta: Array, phi: Array) -> Array:
    """Unit vectors, shape (direction, 3)."""
    flat = np.sin(theta)
    return np.stack([flat * np.cos(phi), flat * np.sin(phi), np.cos(theta)], axis=1)


def _angles(towards: Array) -> tuple[Array, Array]:
    """Theta and phi of unit vectors, shape (direction,) each."""
    x, y, z = towards.T
    return np.arctan2(np.hypot(x, y), z), np.arctan2(y, x)


def _unit(vector: Array) -> Array:
    if vector.shape != (3,):
        raise ValueError(f"the vector has shape {vector.shape}, expected (3,)")
    length = float(np.linalg.norm(vector))
    if not (isfinite(length) and length > 0.0):
        raise ValueError(f"the vector {vector} has no direction")
    return np.asarray(vector / length)


def _chunks(count: int, width: int) -> Iterator[slice]:
    step = max(1, CHUNK // width)
    return (slice(first, first + step) for first in range(0, count, step))
