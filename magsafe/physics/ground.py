"""The loop over a perfectly conducting plane: closed form of its image."""

import numpy as np

from magsafe.physics.arrays import Array, Values


def soil_shortfall(vertical: bool, permittivity: float) -> float:
    """Return how far soil may take the radiation resistance below the lesser of free space and perfect image.

    The two cross 1 at different heights, so neither bounds what lies between them.

    Parameters
    ----------
    vertical : whether the loop is upright [1]
    permittivity : least relative permittivity of the soil [1]

    Returns
    -------
    largest shortfall as a share of the free-space radiation resistance [1]

    Valid     any conductivity, heights of 0.02 wavelengths and more.
    Source    the dipole's half-space integral over conductivity, permittivity and height (computed: 0.142 for any
              permittivity and 0.093 from 3 upwards for an upright loop, 0.023 for a flat one; rounded up).
    """
    if not vertical:
        return 0.025
    return 0.095 if permittivity >= 3.0 else 0.145


def image_ratio_horizontal(height: Values) -> Array:
    """Return the resistance of a horizontal small loop over a perfect plane, over that in free space.

    Parameters
    ----------
    height : wavenumber times twice the height of the loop's centre [1], shape (...), above 0

    Returns
    -------
    ratio [1], same shape, between 0 and 2

    Valid     loop small against wavelength and height (1.2 loop radii or more).
    Source    radiation of a vertical magnetic dipole and its image; Wait, Electromagnetic Waves in Stratified
              Media (memory).
    """
    # The series replaces the closed form where its terms cancel.
    safe = np.where(height < 0.05, 1.0, height)
    closed = 1.0 - 3.0 * (np.sin(safe) / safe**3 - np.cos(safe) / safe**2)
    return np.asarray(np.where(height < 0.05, height**2 / 10.0 * (1.0 - height**2 / 28.0), closed))


def image_ratio_vertical(height: Values) -> Array:
    """Return the resistance of a vertical small loop over a perfect plane, over that in free space.

    Parameters
    ----------
    height : wavenumber times twice the height of the loop's centre [1], shape (...), above 0

    Returns
    -------
    ratio [1], same shape, between 0 and 2

    Valid     loop small against wavelength and height (1.2 loop radii or more).
    Source    radiation of a horizontal magnetic dipole and its image; Wait, Electromagnetic Waves in Stratified
              Media (memory).
    """
    safe = np.where(height < 0.05, 1.0, height)
    closed = 1.0 + 1.5 * (np.sin(safe) / safe + np.cos(safe) / safe**2 - np.sin(safe) / safe**3)
    return np.asarray(np.where(height < 0.05, 2.0 - height**2 / 5.0 * (1.0 - height**2 / 28.0 * 1.5), closed))
