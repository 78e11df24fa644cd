"""A ring of uniform current over soil: what its size adds to the dipole of `half_space`.

A uniform current round a plane area is a sheet of magnetic dipoles over it. The part of their spectrum with lateral
wavenumber s, at the angle f to the ring's axis if that lies flat, carries the Fourier transform of the disc: with b the
radius in units of the wavenumber's inverse,

    F(z) = (2 J1(z)/z)^2 in power,   z = b s (flat ring),   z = b sqrt(1 - s^2 cos^2 f) (upright ring)

Twice, because the wave leaves the disc and comes back to it. The part that decays upwards has z imaginary where
s cos f > 1: there F grows, as the lower half of an upright ring is nearer to the soil than its centre.

A dipole's spectrum needs no angle; that of an upright ring is averaged over it, sin^2 f for the waves with a level
magnetic field and cos^2 f for those with a level electric one. The averages know nothing of the soil and are smooth, so
they are taken at few places and carried to all nodes by Chebyshev polynomials.

Over soil that conducts well the ring's loss is nothing like its dipole's: where the skin depth is less than the ring's
distance from the surface, an upright ring loses twice as much at 1.2 radii, and a flat one half.
"""

import numpy as np
from scipy.fft import dct
from scipy.special import i1e, j1

from magsafe.physics.arrays import Array, ComplexArray, Values
from magsafe.physics.half_space import reflection
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

NODES_PER_ANGLE = 5  # angles and
NODES_PER_TERM = 2  # terms of the polynomials are refined with the rest
LOWEST = 1e-6  # decay from which on a series takes the place of a quotient

Transform = tuple[Array, Array]  # of the disc: for a level magnetic field, and for a level electric field


def ring_free_ratio(size: Values) -> Array:
    """Return the radiation resistance of a ring of uniform current in free space, over that of its dipole.

    Parameters
    ----------
    size : wavenumber times the ring's radius [1], shape (...): its perimeter in wavelengths

    Returns
    -------
    ratio [1], same shape

    Raises
    ------
    ValueError : a size that is not positive and finite

    Valid     thin conductor, uniform current.
    Source    Foster, Proceedings of the IRE 32, 603 (1944); Balanis, Antenna Theory, section 5.3 (memory).
    """
    wide = _size(size)

    def integral(node: Array, weight: Array) -> Array:
        return weighted_sum(1.5 * weight * (1.0 - node**2), _disc(wide**2 * (1.0 - node**2)))

    return refined(integral)


def ring_resistance_ratio(vertical: bool, permittivity: ComplexArray, height: Values, size: Values) -> Array:
    """Return the resistance of a ring of uniform current over soil, over the same ring's in free space.

    Parameters
    ----------
    vertical : whether the ring is upright [1]
    permittivity : complex relative permittivity of the soil [1], shape (...)
    height : wavenumber times twice the height of the ring's centre [1], broadcast; upright, more than twice `size`
    size : wavenumber times the ring's radius [1], broadcast

    Returns
    -------
    ratio [1], broadcast shape

    Raises
    ------
    ValueError : as `half_space.resistance_ratio`; a size that is not positive and finite; an upright ring that touches

    Valid     uniform current: perimeter to a tenth of the wavelength, as for `small_loop.UNIFORM_CURRENT`. Charge, such
              as that about a capacitor, has a loss in soil of its own, which is left out. Integral to 1e-9.
    Source    as `half_space.resistance_ratio`, with the disc's transform: Watson, Theory of Bessel Functions, ch. 2
              (memory).
    """
    medium, x = medium_and_height(permittivity, height)
    wide = _clear(vertical, size, x)

    def returned(upward: ComplexArray | Array, transform: Transform) -> ComplexArray:
        level, along = reflection(medium, upward)
        by_magnetic, by_electric = transform
        if not vertical:
            return np.asarray(1.5 * (1.0 - upward**2) * level * by_electric)
        return np.asarray(1.5 * (along * by_magnetic - upward**2 * level * by_electric))

    def integral(node: Array, weight: Array) -> Array:
        upward, step = rising(node, weight, medium)
        wave = np.exp(-1j * x * upward) * returned(upward, _transform(vertical, wide, upward, len(node)))
        decay, decay_step = decaying(node, weight, medium, _rate(vertical, wide, x))
        grown = _decaying_transform(vertical, wide, decay, x, len(node))
        rest = returned(np.asarray(-1j * decay), grown)
        # Re(j w) of the decaying part, so that its real part, which only stores, is not summed
        return weighted_sum(step, wave.real) - weighted_sum(decay_step, rest.imag)

    free = ring_free_ratio(size)
    return np.asarray(1.0 + refined(integral, panels_for(medium, x)) / free)


def ring_sky_ratio(vertical: bool, permittivity: ComplexArray, height: Values, size: Values) -> Array:
    """Return what a ring of uniform current over soil radiates into the sky, over the same ring in free space.

    Parameters
    ----------
    vertical : whether the ring is upright [1]
    permittivity : complex relative permittivity of the soil [1], shape (...)
    height : wavenumber times twice the height of the ring's centre [1], broadcast; upright, more than twice `size`
    size : wavenumber times the ring's radius [1], broadcast

    Returns
    -------
    ratio [1] for the same current, broadcast shape

    Raises
    ------
    ValueError : as `ring_resistance_ratio`

    Valid     as `ring_resistance_ratio`.
    Source    as `half_space.sky_ratio`.
    """
    medium, x = medium_and_height(permittivity, height)
    wide = _clear(vertical, size, x)

    def integral(node: Array, weight: Array) -> Array:
        upward, step = rising(node, weight, medium)
        level, along = reflection(medium, upward)
        by_magnetic, by_electric = _transform(vertical, wide, upward, len(node))
        late = np.exp(-1j * x * upward)
        if not vertical:
            return weighted_sum(0.75 * step * (1.0 - upward**2) * by_electric, squared(1.0 + level * late))
        sent = by_magnetic * squared(1.0 + along * late) + upward**2 * by_electric * squared(1.0 - level * late)
        return weighted_sum(0.75 * step, sent)

    return np.asarray(refined(integral, panels_for(medium, x)) / ring_free_ratio(size))


def ring_eddy_factor(vertical: bool, height: Values) -> Array:
    """Return the eddy loss of a ring close over soil, over that of its dipole by `half_space.low_height_resistance`.

    Parameters
    ----------
    vertical : whether the ring is upright [1]
    height : of its centre, over its radius [1], shape (...)

    Returns
    -------
    factor [1], same shape: upright 1.08 at 1.2 and at most 1.139, where it touches; flat 0.90 at 1

    Raises
    ------
    ValueError : an upright ring that touches, a height that is not positive and finite

    Valid     heights far below the skin depth and the wavelength; uniform current.
    Source    the decaying part of the ring's spectrum with its static reflection (derived).
    """
    return _static_factor(vertical, height, electric=False)


def ring_electric_factor(height: Values) -> Array:
    """Return the electric part of an upright ring's loss close over soil, over that of its dipole.

    Parameters
    ----------
    height : of its centre, over its radius [1], shape (...)

    Returns
    -------
    factor [1], same shape, on the 8/|ec + 1|^2 of `half_space.low_height_resistance`: at most 1.039

    Raises
    ------
    ValueError : as `ring_eddy_factor`

    Valid     as `ring_eddy_factor`.
    Source    as `ring_eddy_factor`.
    """
    return _static_factor(True, height, electric=True)


def _static_factor(vertical: bool, height: Values, electric: bool) -> Array:
    """Integral over the decay, in units of the radius, of 2h exp(-2 h decay) times the disc's transform."""
    high = np.asarray(height, dtype=np.float64)[..., None]
    if not bool((np.isfinite(high) & (high > (1.0 if vertical else 0.0))).all()):
        raise ValueError("a height is not finite, or the ring reaches the soil")
    end = np.arcsinh(DECAY / (2.0 * (high - 1.0 if vertical else high)))

    def integral(node: Array, weight: Array) -> Array:
        decay = np.sinh(end * node)
        step = 2.0 * high * weight * end * np.cosh(end * node)
        if not vertical:
            return weighted_sum(step * np.exp(-2.0 * high * decay), _disc(decay**2))
        cosine = _cosines(len(node))
        share = 2.0 * (1.0 - cosine**2 if electric else cosine**2)
        place = decay[..., None] * cosine
        grown = _grown_disc(place) * np.exp(2.0 * (place - high[..., None] * decay[..., None]))
        return weighted_sum(step, (share * grown).mean(axis=-1))

    return refined(integral)


def _transform(vertical: bool, size: Array, upward: Array, count: int) -> Transform:
    """The disc's transform for real waves, averaged over the angle; a flat disc has no level magnetic field."""
    lateral = 1.0 - upward**2
    if not vertical:
        disc = _disc(size**2 * lateral)
        return np.zeros_like(disc), disc
    places = _places(count // NODES_PER_TERM)
    magnetic, electric = _averages(size, 0.5 + 0.5 * places, count)
    return _carried(magnetic, 2.0 * lateral - 1.0), _carried(electric, 2.0 * lateral - 1.0)


def _decaying_transform(vertical: bool, size: Array, decay: Array, height: Array, count: int) -> Transform:
    """The disc's transform for decaying waves times exp(-height decay), averaged over the angle."""
    if not vertical:
        disc = _disc(size**2 * (1.0 + decay**2)) * np.exp(-height * decay)
        return np.zeros_like(disc), disc
    rate = _rate(vertical, size, height)
    end = np.arcsinh(size * DECAY / rate)
    sampled = np.sinh(end * (0.5 + 0.5 * _places(count // NODES_PER_TERM))) / size
    magnetic, electric = _averages(size, 1.0 + sampled**2, count)
    place = 2.0 * np.arcsinh(size * decay) / end - 1.0
    least = np.exp(-rate * decay)
    return _carried(magnetic, place) * least, _carried(electric, place) * least


def _averages(size: Array, lateral: Array, count: int) -> Transform:
    """The upright disc's transform, averaged over the angle; less its growth where it grows."""
    square = _cosines(count) ** 2
    argument = (size**2)[..., None] * (1.0 - lateral[..., None] * square)
    growing = np.sqrt(np.maximum(-argument, 0.0))
    growth = size * np.sqrt(np.maximum(lateral - 1.0, 0.0))
    disc = np.where(argument < 0.0, _grown_disc(growing), _disc(argument)) * np.exp(2.0 * (growing - growth[..., None]))
    return (disc * (1.0 - square)).mean(axis=-1), (disc * square).mean(axis=-1)


def _places(terms: int) -> Array:
    """Chebyshev places from 1 to -1."""
    return np.asarray(np.cos((np.arange(terms) + 0.5) * np.pi / terms))


def _carried(values: Array, place: Array) -> Array:
    """Values at Chebyshev places, carried to others between -1 and 1 by Clenshaw's sum."""
    terms = values.shape[-1]
    factors = dct(values, axis=-1) / terms
    factors[..., 0] *= 0.5
    first, second = np.zeros_like(place), np.zeros_like(place)
    for term in range(terms - 1, 0, -1):
        first, second = 2.0 * place * first - second + factors[..., term, None], first
    return np.asarray(place * first - second + factors[..., 0, None])


def _cosines(count: int) -> Array:
    """Cosines of even angles over a quarter of a turn: exact for what repeats, as all here does."""
    angles = count // NODES_PER_ANGLE
    return np.asarray(np.cos((np.arange(angles) + 0.5) * 0.5 * np.pi / angles))


def _disc(square: Array) -> Array:
    """(2 J1(z)/z)^2 for z^2."""
    place = np.sqrt(np.maximum(square, LOWEST**2))
    return np.asarray((2.0 * j1(place) / place) ** 2)


def _grown_disc(place: Array) -> Array:
    """(2 I1(z)/z)^2 exp(-2 z)."""
    positive = np.maximum(place, LOWEST)
    return np.asarray((2.0 * i1e(positive) / positive) ** 2)


def _rate(vertical: bool, size: Array, height: Array) -> Array:
    """How fast the spectrum decays: twice the height of what is nearest to the soil."""
    return height - 2.0 * size if vertical else height


def _size(size: Values) -> Array:
    wide = np.asarray(size, dtype=np.float64)[..., None]
    if not bool((np.isfinite(wide) & (wide > 0.0)).all()):
        raise ValueError("a ring's size is not positive and finite")
    return wide


def _clear(vertical: bool, size: Values, height: Array) -> Array:
    """The size with an axis for the nodes, once no upright ring touches the soil."""
    wide = _size(size)
    if vertical and bool((height <= 2.0 * wide).any()):
        raise ValueError("an upright ring reaches the soil")
    return wide
