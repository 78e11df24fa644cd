"""A coupling loop inside a tuned loop: where it lies, what one of a given size does, and the size that matches."""

from dataclasses import dataclass, replace

import numpy as np
from scipy.constants import speed_of_light
from scipy.optimize import brentq

from magsafe.physics.arrays import Array
from magsafe.physics.coupling import (
    THICKNESS,
    best_standing_wave_ratio,
    best_tuned_reactance,
    coupling_coefficient,
    mutual_inductance,
    own_reactance,
)
from magsafe.physics.near_field import SegmentCurrents, distance_to_axis

SIZES = 48  # coupling loops tried before the root is refined
STEPS = 1024  # along the way inwards


@dataclass(frozen=True, slots=True)
class Place:
    """Where coupling loops of any size lie, in the plane of the tuned loop and inside it.

    Attributes
    ----------
    start : centre of the coupling loops, or the point of the conductor's axis beside which they lie [m], shape (3,)
    inward : unit vector from there into the loop [1], shape (3,); None for `start` as their centre
    normal : axis of the coupling loops [1], shape (3,)
    clearance : least distance between the surfaces of both conductors [m], 0 or more
    """

    start: Array
    inward: Array | None
    normal: Array
    clearance: float

    def __post_init__(self) -> None:
        if not (np.isfinite(self.clearance) and self.clearance >= 0.0):
            raise ValueError(f"the clearance is {self.clearance} m, expected 0 or more")

    def largest(self, currents: SegmentCurrents, conductor_radius: float) -> float:
        """Return the largest radius for which there is room [m]; not above 0 where there is none.

        Raises ValueError for a place that is not on the conductor, and a direction that leads out of the loop.

        Source    plane geometry.
        """
        room = float(self._way(currents)[1][-1])
        return room - (self.clearance + currents.radius + conductor_radius)

    def centres(self, currents: SegmentCurrents, conductor_radius: float, radius: Array) -> Array:
        """Return the centres of coupling loops as near to the conductor as the clearance lets them.

        Parameters
        ----------
        currents : the tuned loop
        conductor_radius : of the coupling loop's conductor [m]
        radius : of the coupling loops [m], shape (circle,), up to `largest`

        Returns
        -------
        centres [m], shape (circle, 3)

        Valid     coupling loops inside the tuned one.
        Source    plane geometry. In a corner they lie further in, where the sides are as far as the clearance asks.
        """
        if self.inward is None:
            return np.broadcast_to(self.start, (len(radius), 3))
        inwards, room = self._way(currents)
        needed = radius + self.clearance + currents.radius + conductor_radius
        return np.asarray(self.start + np.interp(needed, room, inwards)[:, None] * self.inward)

    def _way(self, currents: SegmentCurrents) -> tuple[Array, Array]:
        """Return places along the way inwards [m], and the distance of the nearest conductor's axis, not falling."""
        if self.inward is None:
            return np.zeros(1), distance_to_axis(self.start[None], currents)
        across = float(np.linalg.norm(np.ptp(currents.start, axis=0)))
        inwards = across * np.linspace(0.0, 1.0, STEPS)
        room = distance_to_axis(self.start + inwards[:, None] * self.inward, currents)
        if not room[0] <= currents.radius:
            raise ValueError(f"the place lies {room[0]:.4g} m from the conductor's axis, expected on it")
        # Up to the first crest: beyond it the other side is the nearer one.
        falling = np.flatnonzero((np.diff(room) <= 0.0) & (inwards[1:] > 2.0 * currents.radius))
        if not len(falling):
            raise ValueError(f"the direction {self.inward} leads out of the tuned loop, expected one into it")
        until = int(falling[0]) + 1
        return inwards[:until], np.maximum.accumulate(room[:until])


def centred(centre: Array, normal: Array, clearance: float = 0.0) -> Place:
    """Return the place of coupling loops about one centre [m], their axis along `normal`.

    Source    plane geometry.
    """
    return Place(np.asarray(centre, dtype=np.float64), None, np.asarray(normal, dtype=np.float64), clearance)


def beside(point: Array, inward: Array, normal: Array, clearance: float) -> Place:
    """Return the place of coupling loops inside the tuned loop, beside its conductor.

    Parameters
    ----------
    point : on the axis of the conductor, as its segments have it [m], shape (3,); usually opposite the capacitor
    inward : direction from there to the centre, of any length [1], shape (3,)
    normal : axis of the coupling loops [1], shape (3,)
    clearance : between the surfaces of both conductors [m], 0 or more

    Returns
    -------
    the place

    Raises
    ------
    ValueError : no direction, or a clearance that is not a length

    Valid     any loop in one plane.
    Source    plane geometry.
    """
    length = float(np.linalg.norm(inward))
    if not (np.isfinite(length) and length > 0.0):
        raise ValueError(f"inward is {inward}, expected a direction")
    way = np.asarray(inward, dtype=np.float64) / length
    return Place(np.asarray(point, dtype=np.float64), way, np.asarray(normal, dtype=np.float64), clearance)


@dataclass(frozen=True, slots=True)
class Coupled:
    """One coupling loop beside the tuned loop, at one frequency.

    Attributes
    ----------
    diameter : of the coupling loop, to the axis of its conductor [m]
    size : its circumference in wavelengths [1]: its numbers hold within `SIZE`
    centre : [m], shape (3,)
    mutual_inductance : referred to the current at the tuned loop's port [H], of either sign
    mutual_reactance : omega times its magnitude [ohm]
    reactance : of the coupling loop alone [ohm]
    coefficient : kappa [1]: 1 matches, more is overcoupled
    standing_wave_ratio : the lowest that retuning the tuned loop reaches [1]
    tuned_reactance : of the tuned loop with its capacitor there [ohm]
    """

    diameter: float
    size: float
    centre: Array
    mutual_inductance: float
    mutual_reactance: float
    reactance: float
    coefficient: float
    standing_wave_ratio: float
    tuned_reactance: float


@dataclass(frozen=True, slots=True)
class Sizing:
    """What size of coupling loop matches.

    Attributes
    ----------
    matched : the smallest that matches, None where none does
    largest : the largest for which there is room, None where there is none for any
    strongest : the one of all sizes tried that couples most, None as `largest`; below a coefficient of 1, nothing that
        fits inside the tuned loop there matches
    smallest_overcouples : whether nothing matches because the smallest that the form of the inductance allows, ten
        conductor radii, is overcoupled already [1]
    """

    matched: Coupled | None
    largest: Coupled | None
    strongest: Coupled | None
    smallest_overcouples: bool


@dataclass(frozen=True, slots=True)
class Circuit:
    """What the coupling loop works into and is fed from, at one frequency.

    Attributes
    ----------
    currents : what flows in the tuned loop for 1 A at its port
    frequency : [Hz]
    resistance : of the tuned loop at its port [ohm]
    line : impedance of the coupling loop's line [ohm]

    Raises
    ------
    ValueError : a number that is not above zero
    """

    currents: SegmentCurrents
    frequency: float
    resistance: float
    line: float

    def __post_init__(self) -> None:
        for name, unit in (("frequency", "Hz"), ("resistance", "ohm"), ("line", "ohm")):
            value = getattr(self, name)
            if not (np.isfinite(value) and value > 0.0):
                raise ValueError(f"{name} is {value} {unit}, expected a number above zero")


def coupled(circuit: Circuit, place: Place, conductor_radius: float, diameters: Array) -> list[Coupled]:
    """Return what coupling loops of given sizes do.

    Parameters
    ----------
    circuit : tuned loop and line [A, m, Hz, ohm]
    place : where they lie [m, 1]
    conductor_radius : of their round conductor [m]
    diameters : to the axis of it [m], shape (circle,)

    Returns
    -------
    one for each

    Raises
    ------
    ValueError : a coupling loop for which there is no room, a conductor too thick for it

    Valid     `SIZE`, `TUNED_LOOP`, `THICKNESS`, with the ends of `coefficient_ends`. Not refused beyond
              `SIZE`: whoever prints it asks the range.
    Source    `mutual_inductance`, `own_reactance`, `coupling_coefficient`.
    """
    radii = 0.5 * np.asarray(diameters, dtype=np.float64)
    room = place.largest(circuit.currents, conductor_radius)
    if not bool((radii <= room * (1.0 + 1e-12)).all()):
        raise ValueError(f"a coupling loop of {2.0 * radii.max():.4g} m has no room: {2.0 * max(room, 0.0):.4g} m have")
    centres = place.centres(circuit.currents, conductor_radius, radii)
    mutual = mutual_inductance(circuit.currents, centres, place.normal, radii)
    omega = 2.0 * np.pi * circuit.frequency
    own = own_reactance(circuit.frequency, radii, conductor_radius)
    strength = coupling_coefficient(omega * mutual, own, circuit.resistance, circuit.line)
    ratio = best_standing_wave_ratio(strength)
    tuned = best_tuned_reactance(strength, own, circuit.resistance, circuit.line)
    rows = np.stack([mutual, omega * np.abs(mutual), own, strength, ratio, tuned], axis=1).tolist()
    return [
        Coupled(2.0 * float(radius), float(radius) * omega / speed_of_light, centre, *row)
        for radius, centre, row in zip(radii, centres, rows, strict=True)
    ]


@dataclass(frozen=True, slots=True)
class Candidates:
    """Coupling loops of all sizes that fit at a place, worked out once for any resistance of the tuned loop.

    Attributes
    ----------
    circuit : tuned loop and line [A, m, Hz, ohm]
    place : where they lie [m, 1]
    conductor_radius : of their round conductor [m]
    tried : one for each size, at the circuit's resistance; empty where there is no room for any
    """

    circuit: Circuit
    place: Place
    conductor_radius: float
    tried: tuple[Coupled, ...]

    def matching(self, resistance: float) -> Sizing:
        """Return the smallest that matches the line with another resistance of the tuned loop [ohm].

        Valid     as `coupled`; its diameter is too large by up to a third of what kappa is too small.
        Source    (omega M)^2 = Z0 R (1 + (Xc/Z0)^2): the smallest root of kappa = 1, bracketed by the sizes tried, then
                  Brent's method.
        """
        if not self.tried:
            return Sizing(None, None, None, False)
        circuit = replace(self.circuit, resistance=resistance)
        tried = [_with_resistance(each, self.circuit, resistance) for each in self.tried]
        strength = np.array([each.coefficient for each in tried])
        strongest = tried[int(np.argmax(strength))]
        enough = np.flatnonzero(strength >= 1.0)
        if not len(enough) or enough[0] == 0:
            return Sizing(None, tried[-1], strongest, bool(len(enough)))

        def one(diameter: float) -> Coupled:
            return coupled(circuit, self.place, self.conductor_radius, np.array([diameter]))[0]

        first = int(enough[0])
        ends = tried[first - 1].diameter, tried[first].diameter
        found = float(brentq(lambda diameter: one(diameter).coefficient - 1.0, *ends, rtol=1e-10))
        return Sizing(one(found), tried[-1], strongest, False)


def _with_resistance(found: Coupled, circuit: Circuit, resistance: float) -> Coupled:
    """Return a coupling loop beside a tuned loop of another resistance [ohm]."""
    strength = found.coefficient * circuit.resistance / resistance
    ratio = float(best_standing_wave_ratio(strength))
    tuned = float(best_tuned_reactance(strength, found.reactance, resistance, circuit.line))
    return replace(found, coefficient=strength, standing_wave_ratio=ratio, tuned_reactance=tuned)


def candidates(circuit: Circuit, place: Place, conductor_radius: float) -> Candidates:
    """Return coupling loops of all sizes that fit at a place.

    Parameters
    ----------
    circuit : tuned loop and line [A, m, Hz, ohm]
    place : where the coupling loop lies [m, 1]
    conductor_radius : of its round conductor [m]

    Returns
    -------
    `SIZES` of them, from ten conductor radii up

    Valid     as `coupled`.
    Source    `coupled`.
    """
    least = conductor_radius / THICKNESS.high * (1.0 + 1e-12)  # not refused by rounding
    most = place.largest(circuit.currents, conductor_radius)
    if most < least:
        return Candidates(circuit, place, conductor_radius, ())
    tried = coupled(circuit, place, conductor_radius, 2.0 * np.geomspace(least, most, SIZES))
    return Candidates(circuit, place, conductor_radius, tuple(tried))


def matching_size(circuit: Circuit, place: Place, conductor_radius: float) -> Sizing:
    """Return the smallest coupling loop that matches the line.

    Parameters
    ----------
    circuit : tuned loop and line [A, m, Hz, ohm]
    place : where the coupling loop lies [m, 1]
    conductor_radius : of its round conductor [m]

    Returns
    -------
    the coupling loop, and what the largest reaches

    Valid     as `Candidates.matching`.
    Source    `Candidates.matching`.
    """
    return candidates(circuit, place, conductor_radius).matching(circuit.resistance)
