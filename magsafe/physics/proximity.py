"""Parallel round conductors close together: their losses and inductance where the skin is thin."""

from dataclasses import dataclass
from functools import lru_cache
from typing import TypeVar

import numpy as np
from scipy.constants import mu_0
from scipy.linalg import solve
from scipy.special import binom

from magsafe.physics.arrays import Array, ComplexArray
from magsafe.physics.ranges import Range

CLOSENESS = Range(
    "centre spacing over diameter", 1.02, np.inf, "order of the multipoles, checked against the exact pair"
)

Coefficients = TypeVar("Coefficients", Array, ComplexArray)

# The multipoles of the closest pair fall by exp(-tau) from one to the next, cosh tau = spacing over diameter. Those
# left out are less than exp(-10) of the first, and the loss goes with their square.
_FALL_OF_MULTIPOLES = 10.0


@dataclass(frozen=True, slots=True)
class Proximity:
    """What parallel conductors do to one another, against lone conductors and filaments.

    `loss_factor` [1], shape (N,): loss of each conductor over that of a lone one with the same current; it applies
    to the internal reactance too. `inductance_change` [H/m], shape (N,): flux of each conductor per metre and ampere
    of its own current, less that of the model in which every current is a filament on its axis seen from a radius of
    diameter/2. Both are to be multiplied with lengths or lone values, turn by turn.
    """

    loss_factor: Array
    inductance_change: Array

    @property
    def mean_loss_factor(self) -> float:
        """Mean over the conductors [1]: for turns in series, loss over N times a lone turn's."""
        return float(np.mean(self.loss_factor))

    @property
    def mean_inductance_change(self) -> float:
        """Mean over the conductors [H/m]: for turns in series, times the whole length of wire."""
        return float(np.mean(self.inductance_change))


def row_proximity(conductors: int, spacing: float, diameter: float) -> Proximity:
    """Return what equal currents in the same sense do in a row of equal round conductors.

    Parameters
    ----------
    conductors : number of conductors [1], 1 or more
    spacing : distance of neighbouring axes [m]
    diameter : outer diameter of each conductor [m]

    Returns
    -------
    Proximity, shapes (conductors,), in the order of the row

    Raises
    ------
    ValueError : fewer than one conductor, or conductors closer than `CLOSENESS`

    Valid     as `proximity`; turns of a coil or spiral whose spacing is much less than their radius.
    Source    surface-current problem of G. S. Smith, J. Appl. Phys. 43, 2196 (1972) (memory).
    """
    if conductors < 1:
        raise ValueError(f"a row needs at least one conductor, not {conductors}")
    positions = np.zeros((conductors, 2))
    positions[:, 0] = spacing * np.arange(conductors)
    return proximity(positions, diameter)


def proximity(positions: Array, diameter: float, currents: Array | None = None) -> Proximity:
    """Return what given currents do in equal round conductors at given places of their cross-section.

    Parameters
    ----------
    positions : axes in the plane across the conductors [m], shape (N, 2)
    diameter : outer diameter of each conductor [m]
    currents : currents, all in phase, negative for the opposite sense [A], shape (N,), none of them 0; all
        equal if left out

    Returns
    -------
    Proximity, shapes (N,)

    Raises
    ------
    ValueError : conductors closer than `CLOSENESS`, a current of 0, a diameter not above 0, shapes that do not fit

    Valid     skin depth much smaller than the radius and than the gaps, solid or thick-walled conductors, straight
              over lengths much greater than their spacings, no other metal near.
    Source    surface-current problem of G. S. Smith, J. Appl. Phys. 43, 2196 (1972) (memory), solved with multipoles.
    """
    axes = np.asarray(positions, dtype=np.float64)
    if axes.ndim != 2 or axes.shape[1] != 2 or not len(axes):
        raise ValueError(f"positions have shape (N, 2), not {axes.shape}")
    amperes = np.ones(len(axes)) if currents is None else np.asarray(currents, dtype=np.float64)
    if amperes.shape != (len(axes),) or not np.all(np.isfinite(amperes) & (amperes != 0.0)):
        raise ValueError("each conductor needs a current other than 0")
    if not diameter > 0.0:
        raise ValueError("the diameter must be above 0")
    if len(axes) == 1:
        return Proximity(np.ones(1), np.zeros(1))
    seen = _seen(axes, diameter)
    orders = np.arange(1, seen.shape[2] + 1)
    multipoles = _multipoles(seen, amperes)
    loss = 1.0 + 2.0 * np.sum((orders * np.abs(multipoles)) ** 2, axis=1) / amperes**2
    # A on the surface of conductor i, less that of the filaments: the others' multipoles at its axis, because the
    # mean of a potential over a circle without sources inside is that at the centre.
    change = np.real(np.einsum("ijl,jl->i", seen, multipoles)) / amperes
    return Proximity(loss, mu_0 / (2.0 * np.pi) * change)


def crowded_coefficients(conductors: int, spacing: float, diameter: float) -> Array:
    """Return what crowding takes from the coefficients of potential of a row of equal round conductors.

    Parameters
    ----------
    conductors : number of conductors [1], 2 or more
    spacing : distance of neighbouring axes [m]
    diameter : outer diameter of each conductor [m]

    Returns
    -------
    change against evenly spread charges, in units of 1/(2 pi epsilon) [1], shape (conductors, conductors), symmetric.
    In units of mu/(2 pi) it is the change of inductance per metre too, as on any line with waves of one speed

    Raises
    ------
    ValueError : fewer than two conductors, or conductors closer than `CLOSENESS`

    Valid     as `proximity`.
    Source    as `proximity`; two conductors with opposite charges give the two-wire line.
    """
    if conductors < 2:
        raise ValueError(f"a row has two conductors or more, not {conductors}")
    positions = np.stack([spacing * np.arange(conductors), np.zeros(conductors)], axis=1)
    seen = _seen(positions, diameter)
    columns = [np.real(np.einsum("ijl,jl->i", seen, _multipoles(seen, unit))) for unit in np.eye(conductors)]
    return np.stack(columns, axis=1)


def _seen(positions: Array, diameter: float) -> ComplexArray:
    """Return the powers of the inverse distances of conductors, in radii: shape (N, N, order), 0 for i = j."""
    across = (positions[:, 0] + 1.0j * positions[:, 1]) / (diameter / 2.0)
    distance = across[:, None] - across[None, :]
    closeness = float(np.min(np.abs(distance)[~np.eye(len(positions), dtype=bool)])) / 2.0
    if not CLOSENESS.holds(closeness * (1.0 + 1e-9)):
        raise ValueError(
            f"axes {closeness:.4g} diameters apart: below {CLOSENESS.low:g} the crowding of the current is not solved"
        )
    order = 3 + int(np.ceil(_FALL_OF_MULTIPOLES / np.arccosh(closeness)))
    # The zeros on the diagonal leave out what a conductor would do to itself.
    inverse = np.divide(1.0, distance, where=distance != 0.0, out=np.zeros_like(distance))
    return np.asarray(inverse[:, :, None] ** np.arange(1, order + 1), dtype=np.complex128)


def _multipoles(inverse: ComplexArray, currents: Array) -> ComplexArray:
    """Return c in A = (mu0/2 pi) Re sum_i [-I_i ln(z - z_i) + sum_l c_il (z - z_i)^-l], lengths in radii.

    `inverse` holds (z_i - z_j)^-l, shape (i, j, l), 0 for i = j.

    What the others give about conductor i is sum_n g_in (z - z_i)^n. On its surface |z - z_i| = 1 the part with
    angle n is Re[(conj(c_in) + g_in) exp(j n angle)]; A is the same all round if c_in = -conj(g_in) for every n.
    """
    order = inverse.shape[2]
    orders = np.arange(1, order + 1)
    sign = (-1.0) ** orders
    drive = np.einsum("ijn,j->in", inverse * (sign / orders), currents)
    # (D + w)^-l = sum_n (-1)^n binom(l+n-1, n) w^n D^-(l+n). With c = x / sqrt(l) the system is symmetric, and
    # positive definite because it is the energy of the surface currents.
    scale = np.sqrt(orders)
    size = len(currents) * order
    right = -(drive * scale).reshape(size)
    if not np.any(inverse.imag):  # a row along x
        real = _coupling(inverse.real, sign)
        real[np.diag_indices(size)] += 1.0
        found = solve(real, right.real, assume_a="pos", check_finite=False).astype(np.complex128)
    else:
        matrix = _coupling(inverse, sign)
        # x = conj(right - matrix x), split into real and imaginary parts.
        both = np.block([[matrix.real, -matrix.imag], [-matrix.imag, -matrix.real]])
        both[np.diag_indices(2 * size)] += 1.0
        halves = solve(both, np.concatenate([right.real, -right.imag]), assume_a="pos", check_finite=False)
        found = halves[:size] + 1.0j * halves[size:]
    return np.asarray(found.reshape(len(currents), order) / scale)


def _coupling(inverse: Coefficients, sign: Array) -> Coefficients:
    """Return what the multipoles give about the other conductors, shape (N * order, N * order)."""
    count, order = inverse.shape[0], inverse.shape[2]
    rows = (inverse * sign).transpose(0, 2, 1)[:, :, :, None]
    columns = inverse[:, None, :, :]
    binomials = _symmetric_binomials(order)[None, :, None, :]
    return (rows * columns * binomials).reshape(count * order, count * order)


@lru_cache(maxsize=32)
def _symmetric_binomials(order: int) -> Array:
    """Return binom(l + n - 1, n) sqrt(n / l), shape (order of the field n, order of the source l)."""
    field, source = np.meshgrid(np.arange(1, order + 1), np.arange(1, order + 1), indexing="ij")
    return np.asarray(binom(source + field - 1, field) * np.sqrt(field / source))
