"""What a design implies without saying it."""

from collections.abc import Iterator
from math import hypot

from magsafe.design.model import DesignFile, Place
from magsafe.design.shape import outline

AT_THE_CAPACITOR = "hand at the capacitor"
ARM = 0.5  # m, from whoever turns a capacitor to the capacitor (common practice)
CHEST = 1.2  # m above the feet, where a hand works
NEAR = 1.0  # m: a place while tuning that is no further than this from the capacitor stands for the hand


def hand_at_the_capacitor(stated: DesignFile) -> Iterator[Place]:
    """Yield the place of whoever tunes by hand at the loop, where no place while tuning is stated beside the capacitor.

    Trained, at arm's length, with the capacitor at the height of the chest: on a floor, a ladder or a roof.
    """
    if stated.tuning.by != "hand at the loop":
        return
    loop, reach = stated.loop, outline(stated.loop).reach
    upright, position = loop.plane == "vertical", stated.capacitor.position or "top"
    height = (loop.centre_height or 0.0) + ({"top": reach, "bottom": -reach, "side": 0.0}[position] if upright else 0.0)
    beside = reach if position == "side" or not upright else 0.0
    near = (
        hypot(
            (place.in_plane or 0.0) - beside,
            (place.along_axis if upright else place.across) or 0.0,
        )
        <= NEAR
        for place in stated.place
        if place.when == "tuning" and not place.fence
    )
    if any(near):
        return
    # The model reads texts with units; these are in SI units already.
    yield Place.model_construct(
        name=AT_THE_CAPACITOR,
        who="trained",
        posture="standing",
        floor=max(0.0, height - CHEST),
        when="tuning",
        along_axis=ARM if upright else None,
        in_plane=beside if upright else reach + ARM,
        across=None if upright else 0.0,
    )
