"""Resistances of the loop's parts, each with the ends that different questions need."""

from dataclasses import dataclass, replace
from typing import Literal

import numpy as np

from magsafe.analysis.capacitor_network import Membership, Network
from magsafe.analysis.surroundings import State
from magsafe.design import tables
from magsafe.design.model import Capacitor, Conductor, Joint, Padding, Plating
from magsafe.design.quantities import Uncertain
from magsafe.physics import conductor
from magsafe.physics.arrays import Array, ComplexArray
from magsafe.spread import Spread

COPPER_COEFFICIENT = 0.0039  # 1/K, of a conductivity that is stated without its metal (common practice)
UNKNOWN_FIXED = "fixed part of unknown kind"

Where = Literal["conductor", "spread", "opposite", "port", "capacitor"]


@dataclass(frozen=True, slots=True)
class Corner:
    """A state of the loop with a capacitance across its port: `excess` is by how much it raises the reactance [1].

    `in_place` tells that it is one that the loop may be in where it stands, which a measurement there speaks of.
    """

    state: State
    excess: float
    internal: float
    in_place: bool = True

    @property
    def reactance(self) -> float:
        """Reactance of the loop at the port, internal part included [ohm]."""
        flow = self.state.flow
        return (flow.reactance + self.state.shift + self.internal * flow.internal_length) * (1.0 + self.excess)

    @property
    def radiated(self) -> float:
        """Resistance of radiation and ground [ohm]."""
        return self.state.radiated * self.growth

    @property
    def growth(self) -> float:
        """Square of the current into the conductor over that at the port."""
        return (1.0 + self.excess) ** 2

    @property
    def slope(self) -> float:
        """Derivative of the reactance by the frequency, times it, and the reactance [ohm].

        Of the internal reactance, which goes as the root of the frequency by the skin depth, half counts.
        """
        flow = self.state.flow
        inner = self.internal * flow.internal_length
        return (flow.slope + flow.reactance + self.state.shift + 1.5 * inner) * self.growth

    def weight(self, where: Where | Membership, end: str) -> float:
        """Return by what a part's own value is multiplied to be seen at the port, at one end of what is known."""
        if isinstance(where, Membership):
            return where.weight(end, abs(self.reactance))
        flow = self.state.flow
        lengths = {"low": flow.least_length, "bare": flow.least_length, "high": flow.most_length}
        along = {
            "conductor": lengths.get(end, flow.conductor_length),
            "spread": flow.mean_square,
            "opposite": flow.opposite_square,
        }
        if where in along:
            return along[where] * self.growth
        return 1.0 if where == "port" else abs(self.reactance)


@dataclass(frozen=True, slots=True)
class Loss:
    """The loss of one part by its own values: ohm, ohm per metre of the conductor, or 1/Q of the capacitor.

    `low` may rest on what is typical of a kind; `bare` is the low end that rests on stated values alone, zero
    where nothing is stated. `where` tells how the port sees it. `typical` names the rows of common practice used.
    """

    low: float
    bare: float
    likely: float
    high: float
    where: Where | Membership
    typical: tuple[str, ...] = ()

    def at(self, end: str, corner: Corner) -> float:
        """Return the resistance at one end, as the port sees it at a corner [ohm]."""
        value: float = getattr(self, end)
        return value * corner.weight(self.where, end)


def conductivity(made_of: Conductor, coldest: float) -> Spread:
    """Return the conductivity [S/m]: likely at the conductor's temperature, its high end at the coldest [K].

    A stated conductivity is that at 20 degC and follows the temperature as copper does.
    """
    if made_of.conductivity is not None:
        at_20, scatter, coefficient = made_of.conductivity, 0.0, COPPER_COEFFICIENT
    else:
        row = tables.materials()[made_of.material or ""]
        at_20, scatter, coefficient = row.conductivity, row.scatter, row.coefficient
    warm = float(conductor.conductivity_at(at_20, coefficient, made_of.temperature))
    cold = float(conductor.conductivity_at(at_20, coefficient, min(coldest, made_of.temperature)))
    return Spread(warm * (1.0 - scatter), warm, cold * (1.0 + scatter))


def conductor_loss(made_of: Conductor, frequency: float, coldest: float) -> tuple[Loss, float]:
    """Return the conductor's loss [ohm/m] with its ends, and its internal reactance [ohm/m]."""
    sigma = conductivity(made_of, coldest)
    # Resistance falls steadily with conductivity, also where the wall is thin.
    tried = np.array([sigma.high, sigma.likely, sigma.low], dtype=np.float64)
    impedance, error = _impedance(made_of, frequency, tried, coldest)
    rough, kind = tables.roughness_share(), tables.conductor_factor(made_of.form)
    smooth = impedance.real * np.array([1.0 - error, 1.0, 1.0 + error])
    low, likely, high = (
        float(value) * (1.0 + (share or 0.0)) * (factor or 1.0)
        for value, share, factor in zip(
            smooth, (rough.low, rough.likely, rough.high), (kind.low, kind.likely, kind.high), strict=True
        )
    )
    rows = (f"conductor, {made_of.form}",) if kind.high != 1.0 else ()
    return Loss(low, float(smooth[0]), likely, high, "conductor", rows), float(impedance.imag[1])


def _impedance(made_of: Conductor, frequency: float, sigma: Array, coldest: float) -> tuple[ComplexArray, float]:
    """Return impedance per metre of a smooth conductor [ohm/m] for each conductivity, (3,), and its relative error."""
    radius = (made_of.outer_diameter or 0.0) / 2.0
    if made_of.form == "strip":
        from magsafe.physics import strip  # noqa: PLC0415  (it brings a root finder, which is slow to import)

        found = [
            strip.strip_impedance(frequency, float(each), made_of.width or 0.0, made_of.thickness or 0.0)
            for each in sigma
        ]
        impedance = np.array([each.impedance for each in found])
        error = max(max(each.below, each.above) for each in found)
    elif made_of.form == "tube":
        impedance, error = conductor.tube_impedance(frequency, sigma, radius, made_of.wall or 0.0), 0.0
    else:
        impedance, error = conductor.rod_impedance(frequency, sigma, radius), 0.0
    if made_of.plating is None:
        return impedance, error
    layer = plating_conductivity(made_of.plating, made_of.temperature, coldest)[:, None]
    plated = conductor.plated_surface_impedance(frequency, layer, made_of.plating.thickness, sigma)
    bare = (1.0 + 1.0j) / (sigma * conductor.skin_depth(frequency, sigma))
    # A poorer layer may raise the loss or let the current through to the base: every pair of ends is tried.
    every = impedance * plated.real / bare.real
    ends = [every.flat[np.argmin(every.real)], every[1, 1], every.flat[np.argmax(every.real)]]
    return np.array(ends), error


def plating_conductivity(plating: Plating, temperature: float, coldest: float) -> Array:
    """Return high, likely and low conductivity of the plating [S/m], shape (3,)."""
    row = tables.materials()[plating.material]
    warm = float(conductor.conductivity_at(row.conductivity, row.coefficient, temperature))
    cold = float(conductor.conductivity_at(row.conductivity, row.coefficient, min(coldest, temperature)))
    return np.array([cold * (1.0 + row.scatter), warm, warm * (1.0 - row.scatter)])


def stated_ends(stated: Uncertain | None, typical: Spread | None) -> tuple[float, float, float, float]:
    """Return (low, bare, likely, high) of a loss from what is stated and what is typical of its kind.

    A single stated value is its own high end; its low end is the typical low, or zero. Only a stated low lowers
    the volts without resting on common practice.
    """
    typical_low = (typical.low or 0.0) if typical else 0.0
    if stated is None:
        known = typical or Spread.exact(0.0)
        return typical_low, 0.0, known.likely or 0.0, known.high or 0.0
    if stated.single:
        return min(typical_low, stated.likely), 0.0, stated.likely, stated.high
    return stated.low, stated.low, stated.likely, stated.high


_PLACES: dict[str, Where] = {"capacitor": "port", "spread": "spread", "opposite": "opposite"}


def joint_loss(joint: Joint) -> Loss:
    """Return the loss of one group of joints, where it sits [ohm]."""
    typical = tables.joint_resistance(joint.kind) if joint.kind else None
    low, bare, likely, high = (end * joint.count for end in stated_ends(joint.resistance, typical))
    uses = joint.kind and (joint.resistance is None or joint.resistance.single)
    rows = (f"joint, {joint.kind}",) if uses else ()
    return Loss(low, bare, likely, high, _PLACES[joint.at], rows)


def capacitor_loss(part: Capacitor, frequency: float, reactance: float) -> Loss:
    """Return the loss of the capacitor [1/Q, or ohm where its resistance is stated].

    A Q stated for another frequency is widened to both sides by the ratio of the frequencies to the power of 1.5, which
    metal losses at one capacitance give (common practice), and no longer counts as stated for volts. `reactance` is
    that of the loop [ohm], by which a typical Q becomes the low end of a single stated resistance.
    """
    if part.kind == "none":
        return Loss(0.0, 0.0, 0.0, 0.0, "port")
    typical_q = capacitor_typical(part)
    if part.series_resistance is not None:
        typical = Spread(reactance / (typical_q.high or 1.0), None, None)
        ends = stated_ends(part.series_resistance, typical)
        rows = (f"capacitor, {part.kind}",) if part.series_resistance.single else ()
        return Loss(*ends, where="port", typical=rows)
    typical = Spread(*(1.0 / (q or 1.0) for q in (typical_q.high, typical_q.likely, typical_q.low)))
    rows, stated, moved = (f"capacitor, {part.kind}",), None, 1.0
    if part.quality_factor is not None:
        q = part.quality_factor
        if part.quality_factor_at is not None:
            ratio = frequency / part.quality_factor_at
            moved = max(ratio, 1.0 / ratio) ** 1.5
        stated = Uncertain(1.0 / (q.high * moved), 1.0 / q.likely, moved / q.low, q.single)
        if moved > 1.0:
            rows = ("capacitor, Q at another frequency",)
        elif not q.single:
            rows = ()
    low, bare, likely, high = stated_ends(stated, typical)
    return Loss(low, 0.0 if moved > 1.0 else bare, likely, high, where="capacitor", typical=rows)


def padding_loss(part: Padding, net: Network) -> Loss:
    """Return the loss of a padding part [1/Q], as the network lets the port see it."""
    typical_q = tables.capacitor_quality_factor(UNKNOWN_FIXED)
    typical = Spread(*(1.0 / (q or 1.0) for q in (typical_q.high, typical_q.likely, typical_q.low)))
    rows: tuple[str, ...] = (f"capacitor, {UNKNOWN_FIXED}",)
    stated, q = None, part.quality_factor
    if q is not None:
        stated = Uncertain(1.0 / q.high, 1.0 / q.likely, 1.0 / q.low, q.single)
        rows = rows if q.single else ()
    return Loss(*stated_ends(stated, typical), where=Membership(net, part), typical=rows)


def among(loss: Loss, net: Network) -> Loss:
    """Return the loss of a capacitor's main part as the padding lets the port see it; without padding, as it is."""
    if not net.padding:
        return loss
    return replace(loss, where=Membership(net, in_ohms=loss.where == "port"))


def capacitor_typical(part: Capacitor) -> Spread:
    """Return the Q that is typical of the capacitor's kind (common practice)."""
    wiper = part.kind == "air variable" and part.wiper
    return tables.capacitor_quality_factor("air variable with a wiper" if wiper else part.kind)
