"""Resistances of the loop's parts, each with the ends that different questions need."""

from dataclasses import dataclass

import numpy as np

from magsafe.design import tables
from magsafe.design.model import Capacitor, Conductor, Joint, Loop
from magsafe.design.quantities import Uncertain
from magsafe.physics import conductor, small_loop
from magsafe.spread import Spread

COPPER_COEFFICIENT = 0.0039  # 1/K, of a conductivity that is stated without its metal (common practice)


@dataclass(frozen=True, slots=True)
class Bend:
    """How the port reactance differs from the closed form in free space.

    `excess` is raised by a capacitance across the port, `taken` is the share that the ground's image takes away.
    """

    excess: float
    taken: float

    @property
    def factor(self) -> float:
        """The reactance over that of the closed form in free space."""
        return (1.0 + self.excess) * (1.0 - self.taken)


@dataclass(frozen=True, slots=True)
class Loss:
    """The resistance of one part, referred to the port current [ohm].

    `low` may rest on what is typical of a kind; `bare` is the low end that rests on stated values alone, zero
    where nothing is stated. `grows` tells how it follows the reactance's bend: 2, by the square of the excess, along
    the conductor; 1, as the reactance, for a capacitor of given Q; 0, not at all, at the port. `typical` names the rows
    of common practice used.
    """

    low: float
    bare: float
    likely: float
    high: float
    grows: int
    typical: tuple[str, ...] = ()

    def at(self, end: str, bend: Bend) -> float:
        """Return the resistance at one end, as the port sees it with a bend of the reactance."""
        value: float = getattr(self, end)
        return value * (1.0, bend.factor, (1.0 + bend.excess) ** 2)[self.grows]


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


def impedance_per_metre(made_of: Conductor, frequency: float, coldest: float) -> tuple[Spread, float]:
    """Return resistance [ohm/m] with its spread, and internal reactance [ohm/m], of a rod or tube."""
    sigma = conductivity(made_of, coldest)
    # Resistance falls steadily with conductivity, also where the wall is thin.
    tried = np.array([sigma.high, sigma.likely, sigma.low], dtype=np.float64)
    radius = (made_of.outer_diameter or 0.0) / 2.0
    if made_of.form == "rod":
        impedance = conductor.rod_impedance(frequency, tried, radius)
    else:
        impedance = conductor.tube_impedance(frequency, tried, radius, made_of.wall or 0.0)
    rough = tables.roughness_share()
    low, likely, high = (float(each) for each in impedance.real)
    resistance = Spread(
        low * (1.0 + (rough.low or 0.0)), likely * (1.0 + (rough.likely or 0.0)), high * (1.0 + (rough.high or 0.0))
    )
    return resistance, float(impedance.imag[1])


def conductor_loss(per_metre: Spread, perimeter: float, x: float) -> Loss:
    """Return the loss of the conductor from its resistance per metre [ohm/m]."""
    factor = perimeter * float(small_loop.loss_taper(x))
    low = (per_metre.low or 0.0) * factor
    return Loss(low, low, (per_metre.likely or 0.0) * factor, (per_metre.high or 0.0) * factor, grows=2)


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


_PLACES = {"capacitor": 0, "spread": 2, "opposite": 2}


def joint_loss(joint: Joint, x: float) -> Loss:
    """Return the loss of one group of joints, where it sits."""
    typical = tables.joint_resistance(joint.kind) if joint.kind else None
    at = x
    share = {
        "capacitor": 1.0,
        "opposite": float(small_loop.opposite_taper(at)) ** 2,
        "spread": float(small_loop.loss_taper(at)),
    }[joint.at]
    low, bare, likely, high = (end * joint.count * share for end in stated_ends(joint.resistance, typical))
    uses = joint.kind and (joint.resistance is None or joint.resistance.single)
    rows = (f"joint, {joint.kind}",) if uses else ()
    return Loss(low, bare, likely, high, _PLACES[joint.at], rows)


def joint_losses(loop: Loop, x: float) -> tuple[Loss, ...]:
    """Return the losses of all joints."""
    return tuple(joint_loss(joint, x) for joint in loop.joint)


def capacitor_loss(part: Capacitor, reactance: float, frequency: float) -> Loss:
    """Return the series resistance of the capacitor tuned to a loop of this reactance [ohm].

    A Q stated for another frequency is widened to both sides by the ratio of the frequencies to the power of 1.5, which
    metal losses at one capacitance give (common practice), and no longer counts as stated for volts.
    """
    typical_q = capacitor_typical(part)
    if part.series_resistance is not None:
        typical = Spread(reactance / (typical_q.high or 1.0), None, None)
        ends = stated_ends(part.series_resistance, typical)
        rows = (f"capacitor, {part.kind}",) if part.series_resistance.single else ()
        return Loss(*ends, grows=0, typical=rows)
    typical = Spread(*(reactance / (q or 1.0) for q in (typical_q.high, typical_q.likely, typical_q.low)))
    rows, stated, moved = (f"capacitor, {part.kind}",), None, 1.0
    if part.quality_factor is not None:
        q = part.quality_factor
        if part.quality_factor_at is not None:
            ratio = frequency / part.quality_factor_at
            moved = max(ratio, 1.0 / ratio) ** 1.5
        stated = Uncertain(reactance / (q.high * moved), reactance / q.likely, reactance * moved / q.low, q.single)
        if moved > 1.0:
            rows = ("capacitor, Q at another frequency",)
        elif not q.single:
            rows = ()
    low, bare, likely, high = stated_ends(stated, typical)
    return Loss(low, 0.0 if moved > 1.0 else bare, likely, high, grows=1, typical=rows)


def capacitor_typical(part: Capacitor) -> Spread:
    """Return the Q that is typical of the capacitor's kind (common practice)."""
    wiper = part.kind == "air variable" and part.wiper
    return tables.capacitor_quality_factor("air variable with a wiper" if wiper else part.kind)
