"""Far field of given currents over soil: direct wave and the one that the soil turns back.

Far away the wave from the soil is that which the currents send down at the same angle, times the reflection
coefficient of its polarisation. With FarField's pattern E at the angle theta from z,

    E_theta(theta) + rp E_theta(pi - theta),     E_phi(theta) + rs E_phi(pi - theta)

with the phases of both counted from a point on the surface. Over a perfect conductor, rp = 1 and rs = -1, it is the
field of the currents and their image. The wave along the surface falls off faster and is no part of it.

Elevation is counted from the horizon up, azimuth from x towards y; amplitudes are RMS.
"""

from dataclasses import dataclass
from math import cbrt, ceil, pi
from typing import Self

import numpy as np
from scipy.constants import c, mu_0

from magsafe.physics.arrays import Array, ComplexArray
from magsafe.physics.far_field import FarField
from magsafe.physics.half_space import reflection
from magsafe.physics.near_field import SegmentCurrents
from magsafe.physics.soil_spectrum import PHASE, rule

IMPEDANCE = mu_0 * c  # of free space
LEAST_PANELS = 1  # of elevation, sixteen angles each
OWN_PHASE = 2.0  # radians that the change of the reflection coefficients counts for
ALLOWANCE = 1e-9  # a direction along the ground or to the zenith may lie beyond it by rounding
PASSES = 4  # of a search for a maximum, each sixteen times finer
FINE: Array = np.linspace(-1.0, 1.0, 33)
CUT_STEP = pi / 360.0  # largest step of elevation in the search for lobes
FAINTEST = 1e-9  # of the strongest: what is less is rounding
CHUNK = 15_000  # pairs of direction and segment at once: in the cache
NEGLECTED = 1e-15  # terms of a series


@dataclass(frozen=True, slots=True)
class Lobe:
    """A direction in which a cut through the pattern is strongest among its neighbours.

    Attributes
    ----------
    elevation : above the horizon [rad]
    strength : power density over that of the strongest lobe of the cut [1]
    """

    elevation: float
    strength: float


@dataclass(frozen=True, slots=True)
class GroundPattern:
    """What currents over flat soil send into the sky, far away.

    Attributes
    ----------
    free : the same currents in free space
    permittivity : complex relative permittivity of the soil [1]
    sky_power : radiated into all directions above the ground [W]
    """

    free: FarField
    permittivity: complex
    sky_power: float

    @classmethod
    def of(cls, currents: SegmentCurrents, frequency: float, permittivity: complex) -> Self:
        """Take the currents and integrate what they send into the sky.

        Parameters
        ----------
        currents : the segments and what flows in them, without an image
        frequency : of the currents [Hz]
        permittivity : complex relative permittivity of the soil [1], as by `half_space.relative_permittivity`

        Raises
        ------
        ValueError : as `FarField.of`; a segment that reaches below the ground; a permittivity that is not finite,
            below 1 or has an imaginary part above 0

        Valid     the currents are given: that soil changes them is the caller's to know. Flat, even soil without end.
                  Power to 1e-9 over soil and sea, to 1e-7 over what conducts without end.
        Source    reflection of plane waves: Balanis, Antenna Theory, section 4.8 (memory).
        """
        below = int(np.count_nonzero(np.minimum(currents.start[:, 2], currents.end[:, 2]) < 0.0))
        if below:
            raise ValueError(f"{below} of {len(currents.start)} segments reach below the ground z = 0")
        if not (np.isfinite(permittivity) and permittivity.real >= 1.0 and permittivity.imag <= 0.0):
            raise ValueError(f"the relative permittivity is {permittivity}, expected at least 1 and no gain")
        whole = cls(FarField.of(currents, frequency), permittivity, 0.0)
        return cls(whole.free, permittivity, whole._power_between(0.0, 0.5 * pi))

    def pattern(self, elevation: Array, azimuth: Array) -> ComplexArray:
        """Return the electric field times the distance, its phase counted from the origin.

        Parameters
        ----------
        elevation : above the horizon [rad], shape (direction,)
        azimuth : from x towards y [rad], shape (direction,)

        Returns
        -------
        r E exp(jkr) along increasing theta (downwards) and azimuth [V], RMS phasors, shape (direction, 2)

        Raises
        ------
        ValueError : angles of different or other shapes, a direction below the ground

        Valid     distances far beyond the currents' reach, the wavelength and, near the horizon, the distance at which
                  the wave along the surface has faded. Nothing goes along real soil.
        Source    as `of`.
        """
        if elevation.ndim != 1 or elevation.shape != azimuth.shape:
            raise ValueError(
                f"elevation has shape {elevation.shape} and azimuth {azimuth.shape}, expected (direction,) twice"
            )
        outside = int(np.count_nonzero(np.abs(elevation - 0.25 * pi) > 0.25 * pi + ALLOWANCE))
        if outside:
            raise ValueError(f"{outside} of {len(elevation)} elevations lie outside 0 to pi/2")
        direct, turned = _up_and_down(self.free.currents, self.free.frequency, elevation, azimuth)
        level, along = reflection(np.asarray(self.permittivity), np.maximum(np.sin(elevation), 0.0))
        return np.asarray(direct + np.stack([along, level], axis=1) * turned)

    def intensity(self, elevation: Array, azimuth: Array) -> Array:
        """Return the power per solid angle.

        Parameters
        ----------
        elevation : above the horizon [rad], shape (direction,)
        azimuth : from x towards y [rad], shape (direction,)

        Returns
        -------
        intensity [W/sr], shape (direction,)

        Raises
        ------
        ValueError : as `pattern`

        Valid     as `pattern`.
        Source    IEEE Std 145, definition of radiation intensity (memory).
        """
        field = self.pattern(elevation, azimuth)
        return np.asarray((field.real**2 + field.imag**2).sum(axis=1) / IMPEDANCE)

    def gain(self, elevation: Array, azimuth: Array, power: float) -> Array:
        """Return the power density in each direction over that of the input power sent out evenly into the sphere.

        Parameters
        ----------
        elevation : above the horizon [rad], shape (direction,)
        azimuth : from x towards y [rad], shape (direction,)
        power : into the loop with these currents, all losses included [W]

        Returns
        -------
        gain [1], shape (direction,)

        Raises
        ------
        ValueError : as `pattern`, or a power that is not positive

        Valid     as `pattern`.
        Source    IEEE Std 145, definition of gain (memory).
        """
        if not power > 0.0:
            raise ValueError(f"the power is {power} W, expected more than zero")
        return 4.0 * pi * self.intensity(elevation, azimuth) / power

    def share_between(self, low: float, high: float) -> float:
        """Return the share of the sky power that goes to elevations between two.

        Parameters
        ----------
        low, high : the elevations, low below high [rad]

        Returns
        -------
        share [1]

        Raises
        ------
        ValueError : elevations that are not in order within 0 to pi/2, or currents that radiate nothing

        Valid     as `pattern`.
        Source    definition.
        """
        if not 0.0 <= low < high <= 0.5 * pi + ALLOWANCE:
            raise ValueError(f"elevations {low} and {high}, expected in order within 0 to pi/2")
        self._require_power()
        return self._power_between(low, high) / self.sky_power

    def strongest(self) -> tuple[float, float]:
        """Return the elevation and azimuth of the strongest direction.

        Returns
        -------
        elevation and azimuth [rad]; one of several if they are equal

        Raises
        ------
        ValueError : currents that radiate nothing

        Valid     as `pattern`.
        Source    eight samples or more to each wave of the squared pattern, refined about the best.
        """
        self._require_power()
        levels = 8 * ceil(self._phase() / pi) + 45
        around = 4 * ceil(0.5 * self._steps())  # along x and y too, where a loop is strongest
        elevation, azimuth = 0.5 * pi * np.linspace(0.0, 1.0, levels + 1), 2.0 * pi * np.arange(around) / around
        step, turn = 0.5 * pi / levels, 2.0 * pi / around
        for _ in range(PASSES):
            up, across = (grid.ravel() for grid in np.meshgrid(elevation, azimuth, indexing="ij"))
            best = int(np.argmax(self.intensity(up, across)))
            elevation = np.clip(up[best] + step * FINE[::2], 0.0, 0.5 * pi)
            azimuth = across[best] + turn * FINE[::2]
            step, turn = step / 8.0, turn / 8.0
        return float(up[best]), float(across[best] % (2.0 * pi))

    def lobes(self, azimuth: float) -> tuple[Lobe, ...]:
        """Return the lobes of an upright cut from the horizon at one azimuth to the zenith.

        Parameters
        ----------
        azimuth : of the cut [rad]

        Returns
        -------
        lobes by rising elevation; one at the zenith counts if both sides of it fall off

        Raises
        ------
        ValueError : currents that radiate nothing

        Valid     as `pattern`.
        Source    local maxima of a sampling with eight steps to each wave of the squared pattern, refined.
        """
        self._require_power()
        levels = max(ceil(0.5 * pi / CUT_STEP), 8 * ceil(self._phase() / pi))
        step = 0.5 * pi / levels
        # Two samples beyond the zenith, at the opposite azimuth, show whether the cut peaks there.
        along = step * np.arange(levels + 3.0)
        values = self._cut(along, azimuth)
        inner = values[1:-1]
        tops = along[1:-1][(inner > values[:-2]) & (inner >= values[2:]) & (inner > FAINTEST * values.max())]
        found = []
        for top in tops:
            place, width = float(top), step
            for _ in range(PASSES):
                near = place + width * FINE
                at = self._cut(near, azimuth)
                place, width = float(near[int(np.argmax(at))]), width / 16.0
            if place <= 0.5 * pi + width:
                found.append((min(place, 0.5 * pi), float(at.max())))
        strongest = max((value for _, value in found), default=1.0)
        return tuple(Lobe(place, value / strongest) for place, value in found)

    def _cut(self, along: Array, azimuth: float) -> Array:
        """Intensity along an upright half circle, from the horizon over the zenith."""
        over = along > 0.5 * pi
        elevation = np.maximum(np.where(over, pi - along, along), 0.0)
        return self.intensity(elevation, np.where(over, azimuth + pi, azimuth))

    def _power_between(self, low: float, high: float) -> float:
        # In the sine of the elevation, finer near the horizon, where the reflection changes.
        nearest = 1.0 / abs(self.permittivity + 1.0) ** 0.5
        first, last = (float(np.arcsinh(np.sin(each) / nearest)) for each in (low, high))
        panels = LEAST_PANELS + ceil((self._phase() + OWN_PHASE) * (last - first) / PHASE)
        node, weight = rule(panels)
        stretched = first + (last - first) * node
        sine = np.minimum(nearest * np.sinh(stretched), 1.0)
        share = nearest * np.cosh(stretched) * (last - first) * weight
        steps = self._steps()
        around = 2.0 * pi * np.arange(steps) / steps
        sent = self.intensity(np.repeat(np.arcsin(sine), steps), np.tile(around, len(sine)))
        return float(share @ sent.reshape(-1, steps).mean(axis=1)) * 2.0 * pi

    def _reach(self) -> tuple[float, float]:
        """Wavenumber times the reach aside of the middle, and times the greatest height."""
        ends = np.concatenate([self.free.currents.start, self.free.currents.end])
        middle = 0.5 * (ends[:, :2].min(axis=0) + ends[:, :2].max(axis=0))
        wavenumber = 2.0 * pi * self.free.frequency / c
        aside = float(np.linalg.norm(ends[:, :2] - middle, axis=1).max())
        return wavenumber * aside, wavenumber * float(ends[:, 2].max())

    def _phase(self) -> float:
        """How far the phase between parts of the squared pattern goes with the sine of the elevation [rad]."""
        aside, height = self._reach()
        return 2.0 * (aside + height)

    def _steps(self) -> int:
        """Even steps of azimuth that sum the squared pattern exactly."""
        aside, _ = self._reach()
        return 2 * ceil(aside + 4.0 * cbrt(aside) + 6.0) + 1

    def _require_power(self) -> None:
        if self.sky_power <= 0.0:
            raise ValueError("the currents send nothing into the sky")


def intensities(
    currents: SegmentCurrents, frequency: float, permittivity: ComplexArray, elevation: Array, azimuth: Array
) -> Array:
    """Return the power per solid angle over several soils.

    Parameters
    ----------
    currents : the segments and what flows in them, without an image
    frequency : of the currents [Hz]
    permittivity : complex relative permittivities of the soils [1], shape (soil,)
    elevation : above the horizon [rad], shape (direction,)
    azimuth : from x towards y [rad], shape (direction,)

    Returns
    -------
    intensity [W/sr], shape (soil, direction)

    Valid     as `GroundPattern.pattern`.
    Source    as `GroundPattern.of`.
    """
    direct, turned = _up_and_down(currents, frequency, elevation, azimuth)
    level, along = reflection(permittivity[:, None], np.maximum(np.sin(elevation), 0.0))
    field = direct + np.stack([along, level], axis=2) * turned
    return np.asarray((field.real**2 + field.imag**2).sum(axis=2) / IMPEDANCE)


def _up_and_down(
    currents: SegmentCurrents, frequency: float, elevation: Array, azimuth: Array
) -> tuple[ComplexArray, ComplexArray]:
    """FarField's pattern at each elevation and as far below the horizon, shape (direction, 2) each.

    The radiation integral of `far_field` with real sines, those aside used for both: a tenth of the time.
    """
    wavenumber = 2.0 * pi * frequency / c
    middle = 0.5 * (currents.start + currents.end)
    origin = 0.5 * (middle[:, :2].min(axis=0) + middle[:, :2].max(axis=0))  # phases far from it would lose digits
    middle = wavenumber * np.column_stack([middle[:, :2] - origin, middle[:, 2]])
    half_length = (0.5 * wavenumber * currents.length)[:, None] * currents.direction
    along = currents.length[:, None] * currents.direction
    mean = 0.5 * (currents.current_start + currents.current_end)[:, None] * along
    change = 0.5 * (currents.current_end - currents.current_start)[:, None] * along
    # Columns are real and imaginary components; rows are what cos, sin, cos j1 and sin j1 of the phase bring.
    flow = np.concatenate([mean, 1j * mean, 1j * change, -change])
    flow = np.concatenate([flow.real, flow.imag], axis=1)
    aside = np.stack([np.cos(elevation) * np.cos(azimuth), np.cos(elevation) * np.sin(azimuth)], axis=1)
    sine = np.sin(elevation)[:, None]
    # A grid repeats its elevations, and the phases of height with them.
    distinct, level = np.unique(sine[:, 0], return_inverse=True)
    phases = distinct[:, None] * middle[:, 2]
    rises, falls = np.cos(phases), np.sin(phases)
    count = _terms(float(np.linalg.norm(half_length, axis=1).max()))
    sums = np.empty((2, len(elevation), 6))
    step = max(1, CHUNK // len(middle))
    for part in (slice(first, first + step) for first in range(0, len(elevation), step)):
        phase = aside[part] @ middle[:, :2].T
        cosines, sines = np.cos(phase), np.sin(phase)
        rise, fall = rises[level[part]], falls[level[part]]
        across, upright = aside[part] @ half_length[:, :2].T, sine[part] * half_length[:, 2]
        for which, sign in enumerate((1.0, -1.0)):
            real = cosines * rise - sign * sines * fall
            imaginary = sines * rise + sign * cosines * fall
            whole, first = _segment(across + sign * upright, count)
            terms = [real * whole, imaginary * whole, real * first, imaginary * first]
            sums[which, part] = np.concatenate(terms, axis=1) @ flow
    total = sums[:, :, :3] + 1j * sums[:, :, 3:]
    total *= -1j * wavenumber * IMPEDANCE / (4.0 * pi) * np.exp(1j * wavenumber * (aside @ origin))[:, None]
    by_azimuth = -np.sin(azimuth) * total[..., 0] + np.cos(azimuth) * total[..., 1]
    outward = np.cos(azimuth) * total[..., 0] + np.sin(azimuth) * total[..., 1]
    by_theta = np.sin(elevation) * outward * np.array([[1.0], [-1.0]]) - np.cos(elevation) * total[..., 2]
    both = np.stack([by_theta, by_azimuth], axis=2)
    return both[0], both[1]


def _segment(x: Array, terms: int) -> tuple[Array, Array]:
    """sin(x)/x and the spherical Bessel function j1(x) by so many terms of their series after the first."""
    y = x * x
    whole, first = np.ones_like(x), np.ones_like(x)
    for m in range(terms, 0, -1):
        whole = 1.0 - y * whole / (2 * m * (2 * m + 1))
        first = 1.0 - y * first / (2 * m * (2 * m + 3))
    return whole, x / 3.0 * first


def _terms(largest: float) -> int:
    """Terms of sin(x)/x that count, for |x| up to the largest."""
    count, term = 0, 1.0
    while term > NEGLECTED:
        count += 1
        term *= largest**2 / (2 * count * (2 * count + 1))
    return count
