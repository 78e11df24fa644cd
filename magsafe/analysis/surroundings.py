"""What the ground may do to the loop's resistance and reactance, before real soil is computed."""

from dataclasses import dataclass

import numpy as np
from scipy.constants import c

from magsafe.design import tables
from magsafe.design.model import Design, SoilConstants
from magsafe.design.shape import Outline
from magsafe.physics import ground, inductance
from magsafe.spread import Spread

DIPOLE_HEIGHT = 1.2  # in loop radii: nearer to the ground the point dipole does not stand for the loop


@dataclass(frozen=True, slots=True)
class Surroundings:
    """Radiation plus ground resistance over radiation resistance in free space, and the image's mutual inductance.

    `ratio.low` is the least that free space, a perfect image or any soil can give; `ratio.high` is None where
    soil adds an amount that is not computed. `likely_is_free_space` says that `ratio.likely` leaves the ground out.
    `image` is the ratio over a perfect plane, or the least it can be where the point dipole does not tell it; None
    where no plane is near. `image_share` is the largest share of the inductance that the image takes away.
    """

    ratio: Spread
    likely_is_free_space: bool
    perfect: float | None
    image: float | None
    image_share: Spread


def surroundings(design: Design, line: Outline, frequency: float, own: float) -> Surroundings:
    """Return the bracket of the ground at one frequency [Hz], for a loop of inductance `own` [H]."""
    if design.ground_name == "none":
        return Surroundings(Spread.exact(1.0), False, 1.0, None, Spread.exact(0.0))
    vertical = design.loop.plane == "vertical"
    height = design.loop.centre_height
    image_ratio = ground.image_ratio_vertical if vertical else ground.image_ratio_horizontal
    shortfall = ground.soil_shortfall(vertical, _least_permittivity(design))
    share = _image_share(vertical, height, line, own)
    holds = height is not None and height >= DIPOLE_HEIGHT * line.reach
    if height is None or (not holds and not vertical):
        # Any height, or a flat loop so low that only the sign of the image is known: radiation resistance and
        # what the ground adds are together never negative.
        everywhere = image_ratio(np.linspace(0.001, 30.0, 6000))
        least = max(0.0, float(everywhere.min()) - shortfall) if vertical else 0.0
        return Surroundings(Spread(least, 1.0, None), True, None, least, share)
    ratio = float(image_ratio(np.float64(4.0 * np.pi * frequency / c * height)))
    if design.ground_name == "perfect":
        if holds:
            low, high = min(1.0, ratio), max(1.0, ratio)
            return Surroundings(Spread(low, ratio, high), False, ratio, ratio, Spread.exact(share.high or 0.0))
        least = min(1.0, ratio)
        return Surroundings(Spread(least, 1.0, None), True, None, least, share)
    least = max(0.0, min(1.0, ratio) - shortfall)
    return Surroundings(Spread(least, 1.0, None), True, None, ratio if holds else min(1.0, ratio), share)


def _least_permittivity(design: Design) -> float:
    """Return the least permittivity that the ground may have; 1 where nothing is stated."""
    stated = design.site.ground
    if isinstance(stated, SoilConstants):
        return stated.permittivity.low
    return tables.soils()[stated].permittivity if stated in tables.soils() else 1.0


def _image_share(vertical: bool, height: float | None, line: Outline, own: float) -> Spread:
    """Return how much of the inductance the image takes away: nothing, up to all of a perfect plane's part."""
    if height is None:
        return Spread(0.0, 0.0, None)
    radius = float(np.sqrt(line.area / np.pi))
    if vertical:
        mutual = -inductance.coplanar_mutual_inductance(radius, radius, 2.0 * max(height, 1.01 * radius))
    else:
        apart = np.float64(2.0 * max(height, 0.01 * radius))
        mutual = float(inductance.coaxial_mutual_inductance(radius, radius, apart))
    return Spread(0.0, 0.0, min(mutual / own, 0.9))
