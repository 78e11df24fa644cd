"""Integrals over the plane waves of a source above soil: their nodes, and how far they are refined.

Waves that travel have the sine of the elevation from 0 to 1; those that decay upwards have a decay from 0 up, in units
of the free-space wavenumber. Both are taken finest where the soil's reflection changes most.
"""

from collections.abc import Callable
from functools import lru_cache

import numpy as np

from magsafe.physics.arrays import Array, ComplexArray, Values

ORDER = 16  # Gauss-Legendre nodes a panel
PANELS = 5  # to begin with; doubled until two results agree
DOUBLINGS = 5
AGREEMENT = 1e-9  # of two results, relative; the finer one is better by many digits
ROUNDING = 1e-14  # of what is about 1
DECAY = 45.0  # exp(-45) is below the rounding of 1
SMALLEST = 1e-9  # decay in place of none: over a permittivity of 1 the coefficients at 0 are 0/0
PHASE = 12.0  # radians that one panel of a wave may hold


def refined(integral: Callable[[Array, Array], Array], panels: int = PANELS) -> Array:
    """Return an integral over 0 to 1 by Gauss-Legendre panels, doubled until two results agree.

    Parameters
    ----------
    integral : takes nodes and weights [1], both of shape (node,), and returns the sums, shape (...)
    panels : to begin with [1]

    Returns
    -------
    the sums [1] of the last rule

    Raises
    ------
    ArithmeticError : no two rules agree, up to 32 times the panels

    Valid     integrands that are smooth but for scales that so many even panels resolve.
    Source    Gauss-Legendre quadrature: any textbook.
    """
    coarse = integral(*rule(panels))
    for _ in range(DOUBLINGS):
        panels *= 2
        fine = integral(*rule(panels))
        apart = np.abs(fine - coarse)
        if bool((apart <= AGREEMENT * np.abs(fine) + ROUNDING).all()):
            return fine
        coarse = fine
    raise ArithmeticError(
        f"the integral over soil has not settled with {panels} panels: {float(apart.max()):.3g} apart"
    )


@lru_cache(maxsize=32)
def rule(panels: int) -> tuple[Array, Array]:
    """Return nodes and weights on 0 to 1 [1], shape (panels * ORDER,) each.

    Source    Gauss-Legendre quadrature: any textbook.
    """
    node, weight = np.polynomial.legendre.leggauss(ORDER)
    place = (np.arange(panels)[:, None] + 0.5 + 0.5 * node) / panels
    nodes, weights = place.ravel(), np.tile(0.5 * weight / panels, panels)
    nodes.setflags(write=False)
    weights.setflags(write=False)
    return nodes, weights


def medium_and_height(permittivity: ComplexArray, height: Values) -> tuple[ComplexArray, Array]:
    """Return permittivity [1] and height (2 kh) [1], checked, with an axis more for the nodes.

    Raises ValueError for a height not above 0 or a permittivity that no soil has.

    Source    none: what is refused is what has no meaning.
    """
    medium, x = np.asarray(permittivity, dtype=np.complex128), np.asarray(height, dtype=np.float64)
    if not bool((np.isfinite(x) & (x > 0.0)).all()):
        raise ValueError("a height is not positive and finite")
    if not bool((np.isfinite(medium) & (medium.real >= 1.0) & (medium.imag <= 0.0)).all()):
        raise ValueError("a relative permittivity is not finite, below 1, or has an imaginary part above 0")
    np.broadcast_shapes(medium.shape, x.shape)
    return medium[..., None], x[..., None]


def panels_for(permittivity: ComplexArray, height: Array) -> int:
    """Return how many panels hold the wave from the loop's image at all elevations [1].

    Source    found by trial: at `PHASE` radians a panel two rules agree (`refined` doubles them where they do not).
    """
    stretch = np.arcsinh(1.0 / _grazing(permittivity))
    return max(PANELS, int(np.ceil(float((height * stretch).max()) / PHASE)))


def rising(node: Array, weight: Array, permittivity: ComplexArray) -> tuple[Array, Array]:
    """Return the sine of the elevation from 0 to 1 and its steps [1], finer near the horizon.

    Source    substitution of sinh, for there the reflection changes: about the pseudo-Brewster angle (any textbook).
    """
    nearest = _grazing(permittivity)
    stretch = np.arcsinh(1.0 / nearest)
    return nearest * np.sinh(stretch * node), nearest * np.cosh(stretch * node) * stretch * weight


def decaying(node: Array, weight: Array, permittivity: ComplexArray, rate: Array) -> tuple[Array, Array]:
    """Return the decay upwards from 0 to where exp(-rate decay) is nothing, and its steps [1], three times the nodes.

    Source    substitution of sinh, with the nodes crowded at the kink of the wavenumber in the soil (derived here).
    """
    nearest = _grazing(permittivity)
    end = np.arcsinh(DECAY / rate / nearest)
    # Where g begins to decay there is a kink if nothing is lost, and nearly one in dry soil.
    kink = np.clip(np.arcsinh(np.sqrt(permittivity - 1.0).real / nearest), SMALLEST, end)
    fine, fine_step = node**4, 4.0 * node**3 * weight
    stretched = np.concatenate([0.5 * kink * node, kink - 0.5 * kink * fine, kink + (end - kink) * fine], axis=-1)
    step = np.concatenate([0.5 * kink * weight, 0.5 * kink * fine_step, (end - kink) * fine_step], axis=-1)
    return nearest * np.sinh(stretched), nearest * np.cosh(stretched) * step


def squared(value: ComplexArray) -> Array:
    """Return the squared magnitude, in the square of the unit, any shape; without a root on the way.

    Source    definition.
    """
    return np.asarray(value.real**2 + value.imag**2)


def weighted_sum(step: Array, value: Array) -> Array:
    """Return the sum of steps times values over the nodes, the last axis, in the product of their units.

    Source    definition of a quadrature.
    """
    return np.asarray(np.einsum("...n,...n->...", step, value))


def _grazing(permittivity: ComplexArray) -> Array:
    """Sine of the elevation at which the reflection changes most, the pseudo-Brewster angle."""
    return np.asarray(1.0 / np.sqrt(np.abs(permittivity + 1.0)))
