"""Which loop a measurement was made of, so that it is not used for another one."""

from dataclasses import dataclass
from datetime import date
from hashlib import sha256
from json import dumps
from math import isclose
from typing import Any

from magsafe.design.model import Design, Measured, SoilConstants
from magsafe.design.quantities import Uncertain, show
from magsafe.units import LENGTH, plain

NO_GROUND = "not stated"
NEAR = 0.02  # of a frequency, within which a measured Q is carried over to it
SAME_HEIGHT = 1e-6  # what writing it in another unit may change
LEAST_Q, MOST_Q = 5.0, 1e5  # that a record holds
LEAST_COUPLING, MOST_COUPLING = 1e-3, 1e3
MOST_REFLECTION = 1.5  # of its real and of its imaginary part
_DIGITS = 16
# What is known of a part and not the part itself: to learn more of it does not make another loop.
_KNOWN_OF_LOOP = {"centre_height", "joint", "conductor"}
_KNOWN_OF_CONDUCTOR = {"temperature", "in_sun", "surface"}
_KNOWN_OF_JOINT = {"name", "resistance"}


@dataclass(frozen=True, slots=True)
class Standing:
    """A record of a measurement at a transmission's frequency, and why it does not count; empty where it does."""

    record: Measured
    why_not: str


def identity(design: Design) -> str:
    """Return a short hash of the loop as built: its sizes, conductor, joints, capacitor, feed, and the metal near it.

    The resistance of a joint is what is known of it and not the joint itself; a capacitor counts with all that is
    stated of it, for another one of its kind has another Q. Height and ground are held against a record by their own
    keys, the ground's constants here.
    """
    loop = design.loop.model_dump(exclude=_KNOWN_OF_LOOP)
    conductor = design.loop.conductor.model_dump(exclude=_KNOWN_OF_CONDUCTOR)
    joints = [joint.model_dump(exclude=_KNOWN_OF_JOINT) for joint in design.loop.joint]
    feed = design.feed.model_dump(exclude={"line_loss"})
    near = [_ground(design), design.site.metal_within]
    built = _plain([loop, conductor, joints, design.capacitor.model_dump(), feed, near])
    return sha256(dumps(built, sort_keys=True).encode()).hexdigest()[:_DIGITS]


def _plain(value: Any) -> Any:
    """Return a value with its numbers as texts of nine digits, which writing them in another unit does not change."""
    if isinstance(value, Uncertain):
        return _plain([value.low, value.likely, value.high])
    if isinstance(value, dict):
        return {key: _plain(each) for key, each in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(each) for each in value]
    return f"{value:.9g}" if isinstance(value, float) else value


def _ground(design: Design) -> Any:
    """Return the ground as stated: its name, or the ends of its constants."""
    ground = design.site.ground
    if not isinstance(ground, SoilConstants):
        return ground
    return [[each.low, each.likely, each.high] for each in (ground.conductivity, ground.permittivity)]


def standing(design: Design, frequency: float) -> Standing | None:
    """Return the record that counts at a frequency [Hz]; None where none is within `NEAR`.

    Of several that stand that with the highest Q, which makes most volts; where none does, the nearest.
    """
    near = [
        (abs(record.frequency / frequency - 1.0), index)
        for index, record in enumerate(design.measured)
        if record.frequency is not None and record.unloaded_q is not None
    ]
    found = [
        Standing(record, _why_not(design, record, frequency))
        for away, index in sorted(near)
        if away <= NEAR
        for record in (design.measured[index],)
    ]
    valid = [each for each in found if not each.why_not]
    return max(valid, key=_highest) if valid else next(iter(found), None)


def _highest(found: Standing) -> float:
    quality = found.record.unloaded_q
    return 0.0 if quality is None else quality.high


def _why_not(design: Design, record: Measured, frequency: float) -> str:
    """Return why a record does not count, or what has changed since it was made; empty where nothing has."""
    return next(filter(None, (_unfit(record), _elsewhere(design, record), _otherwise(design, record, frequency))), "")


def _unfit(record: Measured) -> str:
    """Return what a record lacks in itself."""
    if record.design is None or record.date is None:
        return "the record does not tell when, or of which loop, it was made"
    if not _has_been(record.date):
        return f"its date, {show(record.date)}, is no day that has been"
    if record.unloaded_q is not None and record.unloaded_q.single:
        return "it tells one value of Q without its ends"
    return ""


def _elsewhere(design: Design, record: Measured) -> str:
    """Return how the place where a record was made differs."""
    height, then = design.loop.centre_height, record.centre_height
    if (height is None) != (then is None) or not isclose(height or 0.0, then or 0.0, rel_tol=SAME_HEIGHT):
        return f"it was made with the centre {_height(then)}, and the design says {_height(height)}"
    if record.ground != (design.ground_name or NO_GROUND):
        return f"it was made over {_over(record.ground)}, and the design says {_over(design.ground_name)}"
    return ""


def _otherwise(design: Design, record: Measured, frequency: float) -> str:
    """Return how the loop, or what was joined to it, differs."""
    if _joined(design, record.tuned_for or record.frequency or 0.0) != _joined(design, frequency):
        return "other padding was joined then than is in this transmission"
    if record.design != identity(design):
        return "the loop in the design, or what is near it, has changed since"
    return ""


def _has_been(day: str) -> bool:
    try:
        return date.fromisoformat(day) <= date.today()
    except ValueError:
        return False


def _joined(design: Design, frequency: float) -> list[int]:
    """Return which padding is joined at a transmission's frequency [Hz], by its place in the file."""
    return [i for i, part in enumerate(design.capacitor.padding) if part.on is None or frequency in part.on]


def _over(ground: str | None) -> str:
    return "a ground not stated" if ground in (None, NO_GROUND) else f"ground {show(ground)}"


def _height(height: float | None) -> str:
    return "at no stated height" if height is None else f"{plain(height, LENGTH)} up"
