"""What a design implies without saying it."""

from collections.abc import Iterator

from magsafe.design.model import DesignFile, Place
from magsafe.design.shape import outline

AT_THE_CAPACITOR = "hand at the capacitor"
ARM = 0.5  # m, from whoever turns a capacitor to the capacitor (common practice)


def hand_at_the_capacitor(stated: DesignFile) -> Iterator[Place]:
    """Yield the place of whoever tunes by hand at the loop, where no place while tuning is stated.

    Trained, at arm's length before the capacitor, on the highest floor below it.
    """
    if stated.tuning.by != "hand at the loop" or any(place.when == "tuning" for place in stated.place):
        return
    loop, reach = stated.loop, outline(stated.loop).reach
    position = stated.capacitor.position or "top"
    height = (loop.centre_height or 0.0) + {"top": reach, "bottom": -reach, "side": 0.0}[position] * (
        loop.plane == "vertical"
    )
    floor = max((each for each in stated.site.floors or [0.0] if each <= height), default=0.0)
    upright = loop.plane == "vertical"
    beside = reach if position == "side" else 0.0
    # The model reads texts with units; these are in SI units already.
    yield Place.model_construct(
        name=AT_THE_CAPACITOR,
        who="trained",
        posture="standing",
        floor=floor,
        when="tuning",
        along_axis=ARM if upright else None,
        in_plane=beside if upright else reach + ARM,
        across=None if upright else 0.0,
    )
