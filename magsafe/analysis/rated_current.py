"""What a rating of amps, kVA or watts counts: its heat from which frequency up, and in which air."""

from magsafe import words
from magsafe.design.model import Capacitor, Design, Padding, SeriesCapacitor

# In these the dielectric itself warms, and at the same amps the more the lower the frequency is.
SOLID_KINDS = ("ceramic", "mica", "dielectric plate", "coaxial stub", "trombone")
# Makers' guides (seen): vacuum capacitors 25 degC, ceramic ones 30 degC, both with still air.
RATED_AIR = 303.15  # K


def uncounted_heat(part: Capacitor | Padding | SeriesCapacitor, frequency: float) -> str:
    """Return why a rating of amps does not count what a part may take as heat at a frequency [Hz]; empty if it does.

    A part of unknown kind, as padding is, may be solid.
    """
    name = "capacitor.rated_current"
    if not isinstance(part, Capacitor):
        name = f"rated_current of the {'padding' if isinstance(part, Padding) else 'series capacitor'}"
    if part.rated_current is None:
        return f"{name} is not given"
    if isinstance(part, Capacitor) and part.kind not in SOLID_KINDS:
        return ""
    if part.rated_current_at is None:
        return f"it is not told at which frequency {name} holds: below it the same heat allows less"
    if frequency < part.rated_current_at:
        return f"{name} is that at {words.frequency(part.rated_current_at)}: below, the same heat allows less"
    return ""


def rated_current(part: Capacitor | Padding | SeriesCapacitor, frequency: float) -> tuple[float, str]:
    """Return the amps that a part may carry at a frequency [Hz], and in words what lowered them; empty if nothing did.

    Raises
    ------
    ValueError : none are stated
    """
    if part.rated_current is None:
        raise ValueError("no current rating is stated")
    at = part.rated_current_at
    if at is None or frequency <= at:
        return part.rated_current, ""
    # Series resistance grows as the root of the frequency; the same heat then allows less current.
    lowered = part.rated_current * (at / frequency) ** 0.25
    return lowered, f"above {words.frequency(at)} the rating is lowered by common practice"


def beyond_rated_air(design: Design) -> str:
    """Return why ratings of heat are thin in the air that the site states; empty where they are not."""
    air = design.site.air_temperature
    if air is None or air <= RATED_AIR:
        return ""
    return (
        f"the air is of {air - 273.15:.3g} degC, and ratings of amps, kVA and watts are for still air of 25 to "
        f"{RATED_AIR - 273.15:.0f} degC"
    )


def is_rated_for_heat(design: Design) -> bool:
    """Return whether any part of the capacitor states amps, kVA or watts."""
    parts: tuple[Capacitor | Padding, ...] = (design.capacitor, *design.capacitor.padding)
    keys = ("rated_current", "rated_reactive_power", "rated_dissipation")
    return any(getattr(part, key) is not None for part in parts for key in keys)
