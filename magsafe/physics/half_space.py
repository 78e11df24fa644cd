"""A small loop over soil: what it draws, what reaches the sky and what the soil takes.

The loop is a magnetic dipole over a half-space of complex permittivity ec. A plane wave of its spectrum has the
lateral wavenumber s and the vertical ones q = sqrt(1 - s^2) above and g = sqrt(ec - s^2) below, both in units of the
free-space wavenumber and decaying away from the source. The soil turns it back with

    rs = (q - g)/(q + g)   (electric field level),      rp = (ec q - g)/(ec q + g)   (magnetic field level)

and with x the wavenumber times twice the height, the resistance over that of free space is

    1 + Re integral w exp(-jxq) dq   from q = -j infinity through 0 to 1,
    w = 3/2 s^2 rs (flat loop),   w = 3/4 (rp - q^2 rs) (upright loop)

All singularities of w have q in the third quadrant, so the path may as well run straight up to 1 from below: with
q = 1 - j tau the integrand neither oscillates nor comes near any of them.

What reaches the sky is the part with real q, direct and reflected wave squared; what the soil takes is the power that
flows down through its surface. The three are integrated each in its own way and add up.
"""

import numpy as np
from scipy.constants import epsilon_0, mu_0

from magsafe.physics.arrays import Array, ComplexArray, Values
from magsafe.physics.soil_spectrum import (
    DECAY,
    decaying,
    medium_and_height,
    panels_for,
    refined,
    rising,
    squared,
    weighted_sum,
)

SMALLEST = 1e-300  # in place of a zero that only divides another


def relative_permittivity(permittivity: Values, conductivity: Values, frequency: Values) -> ComplexArray:
    """Return the complex relative permittivity of a conducting medium.

    Parameters
    ----------
    permittivity : its real part [1], shape (...)
    conductivity : of the medium [S/m], broadcast
    frequency : [Hz], broadcast

    Returns
    -------
    complex relative permittivity [1], broadcast shape; its imaginary part is not above 0

    Valid     constants that do not themselves change over the band.
    Source    definition, ec = er - j sigma/(omega epsilon0): Jackson, Classical Electrodynamics, ch. 7 (memory).
    """
    loss = np.asarray(conductivity) / (2.0 * np.pi * np.asarray(frequency) * epsilon_0)
    return np.asarray(permittivity - 1j * loss, dtype=np.complex128)


def reflection(permittivity: ComplexArray, upward: ComplexArray | Array) -> tuple[ComplexArray, ComplexArray]:
    """Return the reflection coefficients of a plane wave at the surface of a half-space.

    Parameters
    ----------
    permittivity : complex relative permittivity of the half-space [1], shape (...)
    upward : vertical wavenumber above it, over that of free space [1], broadcast; sin(elevation) of a real wave

    Returns
    -------
    of the horizontal electric field and of the horizontal magnetic field [1], broadcast shape: -1 and 1 over a
    perfect conductor

    Valid     real and not negative, or from the lower right quarter of the complex plane; not 0 over a permittivity
              of 1.
    Source    Fresnel: Balanis, Advanced Engineering Electromagnetics, ch. 5 (memory).
    """
    lateral = 1.0 - upward**2
    below = _below(permittivity, lateral)
    # (a - b)/(a + b) as (a^2 - b^2)/(a + b)^2: nothing cancels over thin soil or where the wave hardly travels.
    turned = (1.0 - permittivity) / (upward + below) ** 2
    along = (permittivity - 1.0) * (permittivity - (permittivity + 1.0) * lateral)
    return np.asarray(turned), np.asarray(along / (permittivity * upward + below) ** 2)


def resistance_ratio(vertical: bool, permittivity: ComplexArray, height: Values) -> Array:
    """Return the resistance of a small loop over soil, radiation and loss together, over that in free space.

    Parameters
    ----------
    vertical : whether the loop is upright [1]
    permittivity : complex relative permittivity of the soil [1], shape (...)
    height : wavenumber times twice the height of the loop's centre [1], broadcast, above 0

    Returns
    -------
    ratio [1], broadcast shape

    Raises
    ------
    ValueError : a height that is not positive, a permittivity below 1 or one that gains power

    Valid     loop small against wavelength and height: a ring four radii up is within 2 % over soil and 7 % over sea,
              nearer down it is `half_space_ring`'s. Integral to 1e-9. Smooth, flat, even soil without end.
    Source    Sommerfeld's and Wait's formulation; Vogler & Noble, NBS Monograph 72 (1964) (memory).
    """
    medium, x = medium_and_height(permittivity, height)
    reach = np.arcsinh(DECAY / x)

    def integral(node: Array, weight: Array) -> Array:
        stretched = reach * node
        down = np.sinh(stretched)
        step = weight * reach * np.cosh(stretched) * np.exp(-x * down)
        whole = np.einsum("...n,...n->...", _returned(vertical, medium, 1.0 - 1j * down), step)
        return np.asarray(1.0 + (1j * np.exp(-1j * x[..., 0]) * whole).real)

    return refined(integral)


def sky_ratio(vertical: bool, permittivity: ComplexArray, height: Values) -> Array:
    """Return what a small loop over soil radiates into the sky, over what it radiates in free space.

    Parameters
    ----------
    vertical : whether the loop is upright [1]
    permittivity : complex relative permittivity of the soil [1], shape (...)
    height : wavenumber times twice the height of the loop's centre [1], broadcast, above 0

    Returns
    -------
    ratio [1] for the same current, broadcast shape

    Raises
    ------
    ValueError : as `resistance_ratio`

    Valid     as `resistance_ratio`; the wave along the surface counts as lost in the soil, where it ends.
    Source    direct and reflected wave: Balanis, Antenna Theory, section 4.8 (memory).
    """
    medium, x = medium_and_height(permittivity, height)
    panels = panels_for(medium, x)

    def integral(node: Array, weight: Array) -> Array:
        upward, step = rising(node, weight, medium)
        level, along = reflection(medium, upward)
        late = np.expm1(-1j * x * upward)
        # 1 + rs, which nearly vanishes close over a good conductor
        passed = 2.0 * upward / (upward + _below(medium, 1.0 - upward**2))
        if not vertical:
            return weighted_sum(0.75 * step * (1.0 - upward**2), squared(passed * (1.0 + late) - late))
        return weighted_sum(
            0.375 * step, squared(1.0 + along * (1.0 + late)) + upward**2 * squared(1.0 - level * (1.0 + late))
        )

    return refined(integral, panels)


def soil_ratio(vertical: bool, permittivity: ComplexArray, height: Values) -> Array:
    """Return the power that a small loop sends down through the surface of soil, over what it radiates in free space.

    Parameters
    ----------
    vertical : whether the loop is upright [1]
    permittivity : complex relative permittivity of the soil [1], shape (...)
    height : wavenumber times twice the height of the loop's centre [1], broadcast, above 0

    Returns
    -------
    ratio [1] for the same current, broadcast shape: `resistance_ratio` less `sky_ratio`

    Raises
    ------
    ValueError : as `resistance_ratio`

    Valid     as `resistance_ratio`. Soil that conducts nothing takes it too, and carries it away.
    Source    Poynting's theorem at the surface: Jackson, Classical Electrodynamics, ch. 6 (memory).
    """
    medium, x = medium_and_height(permittivity, height)

    def integral(node: Array, weight: Array) -> Array:
        upward, step = rising(node, weight, medium)
        decay, decay_step = decaying(node, weight, medium, x)
        waves = _taken(vertical, medium, np.asarray(upward, dtype=np.complex128))
        rest = _taken(vertical, medium, np.asarray(-1j * decay))
        return np.asarray(weighted_sum(step, waves) + weighted_sum(decay_step * np.exp(-x * decay), rest))

    return refined(integral)


def low_height_resistance(
    vertical: bool, permittivity: ComplexArray, frequency: Values, area: Values, turns: int, height: Values
) -> Array:
    """Return the loss resistance of a small loop close over soil: what the full integral comes to there.

    Parameters
    ----------
    vertical : whether the loop is upright [1]
    permittivity : complex relative permittivity of the soil [1], shape (...)
    frequency : [Hz], broadcast
    area : area of one turn [m2], broadcast
    turns : number of turns, all in phase [1]
    height : of the loop's centre [m], broadcast

    Returns
    -------
    resistance [ohm], broadcast shape

    Valid     height far below the skin depth of the soil and the wavelength, yet above the loop's size; finite rings
              by `half_space_ring`. Where conduction rules, a tenth of the skin depth leaves 19 % and a hundredth 2 %;
              what is radiated comes on top.
    Source    quasi-static eddy loss of a magnetic dipole, sigma (omega mu0 N A)^2/(32 pi h), half of it upright with
              8/|ec + 1|^2 of that half for the electric field (derived: the integral of `resistance_ratio` for large
              decay).
    """
    omega = 2.0 * np.pi * np.asarray(frequency)
    conductivity = -np.imag(permittivity) * omega * epsilon_0
    eddies = conductivity * (omega * mu_0 * turns * np.asarray(area)) ** 2 / (32.0 * np.pi * np.asarray(height))
    if not vertical:
        return np.asarray(eddies)
    return np.asarray(0.5 * eddies * (1.0 + 8.0 / np.abs(np.asarray(permittivity) + 1.0) ** 2))


def _below(permittivity: ComplexArray, lateral: ComplexArray | Array) -> ComplexArray:
    """Vertical wavenumber g in the soil for a squared lateral one: never growing downwards."""
    # -j times the root of the negative, which lies in the upper half; by real roots, in a third of the time.
    square = np.asarray(lateral - permittivity)
    real, imaginary = square.real, np.abs(square.imag)
    large = np.sqrt(0.5 * (np.sqrt(real * real + imaginary * imaginary) + np.abs(real)))
    small = 0.5 * imaginary / np.maximum(large, SMALLEST)
    return np.asarray(np.where(real < 0.0, large - 1j * small, small - 1j * large))


def _returned(vertical: bool, permittivity: ComplexArray, upward: ComplexArray) -> ComplexArray:
    """The weight w of the spectrum that comes back to the loop."""
    level, along = reflection(permittivity, upward)
    if vertical:
        return 0.75 * (along - upward**2 * level)
    return 1.5 * (1.0 - upward**2) * level


def _taken(vertical: bool, permittivity: ComplexArray, upward: ComplexArray) -> Array:
    """What passes into the soil of each part of the spectrum; `upward` is real, or -j times the decay."""
    size, lateral = np.abs(upward), (1.0 - upward**2).real
    below = _below(permittivity, lateral)
    level = 4.0 * size * below.real / squared(upward + below)
    if not vertical:
        return np.asarray(0.75 * lateral * level)
    along = 4.0 * size * (below * permittivity.conj()).real / squared(permittivity * upward + below)
    return np.asarray(0.375 * (along + size**2 * level))
