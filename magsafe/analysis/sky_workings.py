"""The numbers that went into the figures of ground and sky, at each of their ends."""

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from math import pi

import numpy as np

from magsafe.analysis import terms
from magsafe.analysis.chain import RESISTANCE_ERROR, Chain
from magsafe.analysis.exposure import use_of
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.sky import BETWEEN_DIRECTIONS, directions, soil_error
from magsafe.analysis.soil import BETWEEN_LOSSES, BETWEEN_SOILS, PERFECT
from magsafe.analysis.surroundings import OverGround, State
from magsafe.analysis.terms import Term
from magsafe.design.model import Design
from magsafe.physics.arrays import Array
from magsafe.physics.far_field import IMPEDANCE, FarField
from magsafe.physics.ground_pattern import intensities


@dataclass(frozen=True, slots=True)
class _Case:
    """One current over one soil, at one end of the losses: powers for 1 A into the conductor at the port [W].

    `bands` are those that reach the sky, from the horizon up; `ground` is what radiation and ground take, `losses` what
    all else takes. `over` is None in free space, where all that is radiated leaves. `likely` tells whether it is the
    likely case.
    """

    over: OverGround | None
    soil: int
    ground: float
    losses: float
    likely: bool = False

    @property
    def bands(self) -> Array:
        return np.array([self.ground]) if self.over is None else np.asarray(self.over.sky[self.soil])

    @property
    def sky(self) -> float:
        return float(self.bands.sum())

    @property
    def whole(self) -> float:
        return self.ground + self.losses

    def moved(self, sign: float) -> float:
        """Return by how much an end is moved besides the stated error: in free space as its efficiency is, up to 1."""
        return 1.0 if self.over is not None else min(1.0 + sign * RESISTANCE_ERROR, self.whole / self.sky)


def _cases(chain: Chain) -> Iterator[_Case]:
    for over in chain.around.over:
        for corner in chain.corners([State(over.flow, 0.0)]):
            for end in ("low", "high"):
                into = chain.resistance_over(over.radiated, end, corner) / corner.growth
                for soil, (radiated, whole) in enumerate(zip(over.radiated, into, strict=True)):
                    yield _Case(over, soil, float(radiated), float(whole - radiated))


def _without_soil(chain: Chain) -> tuple[_Case, ...]:
    """Return what free space makes of the losses at either end; it counts where no ground is stated."""
    if chain.around.ground_known:
        return ()
    low, _, high = terms.efficient(chain)
    return tuple(
        _Case(None, 0, each.corner.state.radiated, _losses(chain, each)) for each in (low, high) if each is not None
    )


def _losses(chain: Chain, each: terms.Column) -> float:
    return (chain.resistance(each.losses, each.corner) - each.corner.radiated) / each.corner.growth


def _likely(chain: Chain) -> _Case | None:
    if not chain.around.ground_known:
        return None
    over = chain.around.over[0]
    losses = chain.taken(chain.likely) - chain.likely.radiated
    return _Case(over, 0, chain.likely.radiated, losses, likely=True)


@dataclass(frozen=True, slots=True)
class _Chosen:
    """What makes the ends of a figure: cases for low, likely and high, and the stated error."""

    low: _Case
    likely: _Case | None
    high: _Case
    error: float

    def term(self, letter: str, unit: str, value: Callable[[_Case], float]) -> Term:
        """Return a letter with its value at each end."""
        likely = None if self.likely is None else value(self.likely)
        return Term(letter, (value(self.low), likely, value(self.high)), unit)

    @property
    def off(self) -> Term:
        """The stated error at each end."""
        low, high = (
            case.moved(sign) * (1.0 + sign * self.error) - 1.0 for case, sign in ((self.low, -1.0), (self.high, 1.0))
        )
        return Term("d", (low, None if self.likely is None else 0.0, high), "1")


def _chosen(chain: Chain, ask: Callable[[_Case], float], error: float, *, anywhere: bool = True) -> _Chosen:
    """Return what makes the ends of a figure over ground; the likely case may be one of them itself.

    `anywhere` tells whether free space counts where no ground is stated.
    """
    likely, free = _likely(chain), _without_soil(chain) if anywhere else ()
    every = [*_cases(chain), *([] if likely is None else [likely])]
    low = min([*every, *free[:1]], key=lambda case: ask(case) * case.moved(-1.0))
    high = max([*every, *free[1:]], key=lambda case: ask(case) * case.moved(1.0))
    return _Chosen(low, likely, high, error)


def _ground(chain: Chain, _: Design, __: OperatingPoint) -> tuple[Term, ...]:
    if not chain.around.over:
        return ()
    low = min(_ground_ends(chain, -1.0), key=lambda each: each.added)
    high = max(_ground_ends(chain, 1.0), key=lambda each: each.added)
    first = chain.around.over[0]
    likely = (float(first.radiated[0]), first.alone, 0.0) if chain.around.ground_known else (None, None, None)
    return (
        Term("R1", (low.radiated, likely[0], high.radiated), "ohm"),
        Term("a", (low.changed, likely[2], high.changed), "ohm"),
        Term("b", (low.between, likely[2], high.between), "ohm"),
        Term("R0", (low.over.alone, likely[1], high.over.alone), "ohm"),
        Term("e", (low.excess, likely[2], high.excess), "1"),
        terms.stated_error(RESISTANCE_ERROR, ends=(0, likely[0], 0)),
    )


@dataclass(frozen=True, slots=True)
class _GroundEnd:
    """An end of what the ground adds: what a current takes over one soil, and by what that is moved outwards [ohm].

    `changed` is for the current's own change, `between` for soils between those tried; `sign` is -1 at the low end.
    """

    over: OverGround
    radiated: float
    changed: float
    between: float
    excess: float
    sign: float

    @property
    def added(self) -> float:
        whole = max(0.0, self.radiated + self.changed + self.between) * (1.0 + self.sign * RESISTANCE_ERROR)
        return (whole - self.over.alone) * (1.0 + self.excess) ** 2


def _ground_ends(chain: Chain, sign: float) -> Iterator[_GroundEnd]:
    around = chain.around
    for number, over in enumerate(around.over):
        radiated, apart = over.radiated, np.zeros(len(over.radiated))
        pairs = 2 * len(around.free)
        if not _is_plane(over):
            # The currents of free space come first, those with their image after them in the same order.
            other = around.over[(number + len(around.free)) % pairs]
            radiated = sign * np.maximum(sign * radiated, sign * other.radiated)
            apart = np.abs(over.radiated - other.radiated)
        soil = int(np.argmax(sign * radiated + apart))
        found, changed = float(radiated[soil]), sign * float(apart[soil])
        between = _between(found + changed, over.alone, sign) if len(radiated) > 1 else 0.0
        for corner in chain.corners([State(over.flow, found)]):
            yield _GroundEnd(over, found, changed, between, corner.excess, sign)


def _is_plane(over: OverGround) -> bool:
    return bool(over.permittivity[0] == PERFECT)


def _between(end: float, alone: float, sign: float) -> float:
    """Return what lies between the soils that are tried [ohm], beyond an end of them."""
    if sign > 0.0:
        return BETWEEN_SOILS * end
    return -(BETWEEN_SOILS * alone + BETWEEN_LOSSES * max(0.0, end - alone))


def _efficiency(chain: Chain, _: Design, __: OperatingPoint) -> tuple[Term, ...]:
    if not chain.around.over:
        columns = terms.efficient(chain)
        return (
            terms.term("S", "W", columns, lambda each: each.corner.state.radiated),
            terms.term("G", "W", columns, lambda each: each.corner.state.radiated),
            terms.term("L", "W", columns, lambda each: _losses(chain, each)),
            terms.stated_error(RESISTANCE_ERROR),
        )
    made = _chosen(chain, lambda case: case.sky / case.whole, soil_error(chain))
    return (
        made.term("S", "W", lambda case: case.sky),
        made.term("G", "W", lambda case: case.ground),
        made.term("L", "W", lambda case: case.losses),
        made.off,
    )


def _share(band: int) -> Callable[[Chain, Design, OperatingPoint], tuple[Term, ...]]:
    def work(chain: Chain, _: Design, __: OperatingPoint) -> tuple[Term, ...]:
        made = _chosen(chain, lambda case: float(case.bands[band]) / case.sky, RESISTANCE_ERROR, anywhere=False)
        return (
            made.term("B", "W", lambda case: float(case.bands[band])),
            made.term("S", "W", lambda case: case.sky),
            made.off,
        )

    return work


# Gain ------------------------------------------------------------------------------------------------------


def _gain(chain: Chain, _: Design, point: OperatingPoint) -> tuple[Term, ...]:
    if not chain.around.over:
        return _gain_in_free_space(chain, point)
    strongest: dict[int, Array] = {id(over): _strongest(over, chain.frequency) for over in chain.around.over}
    alone, radiated = (0.0, 1.0) if chain.around.ground_known else _strongest_alone(chain, point)

    def sent(case: _Case) -> float:
        if case.over is None:
            return alone / radiated * case.sky
        return likely if case.likely else float(strongest[id(case.over)][case.soil])

    # The likely case counts here by its own search, finer than that of the others.
    found = point.pattern
    likely = 0.0 if found is None else found.gain * chain.taken(chain.likely) / (4.0 * pi)
    made = _chosen(chain, lambda case: sent(case) / case.whole, soil_error(chain) + BETWEEN_DIRECTIONS)
    return made.term("U", "W/sr", sent), made.term("P", "W", lambda case: case.whole), made.off


def _strongest(over: OverGround, frequency: float) -> Array:
    """Return the power per solid angle in the strongest of the directions that are tried [W/sr], shape (soil,)."""
    sent = intensities(over.flow.segments(), frequency, over.permittivity, *directions(over, frequency))
    return np.asarray(sent.max(axis=1))


def along_axis(chain: Chain) -> tuple[float, float]:
    """Return power per solid angle along the loop's axis [W/sr], and all that is radiated [W], for 1 A, in free space.

    On the stronger side.
    """
    far, axis = _far_field(chain)
    return _density(far, max((axis, -axis), key=far.directivity_along)), far.power


def in_plane(chain: Chain) -> tuple[float, float]:
    """Return the same in the strongest direction of the loop's plane."""
    far, axis = _far_field(chain)
    return _density(far, far.largest_directivity_across(axis)[1]), far.power


def _far_field(chain: Chain) -> tuple[FarField, Array]:
    flow = chain.around.free[0]
    axis = np.array([1.0, 0.0, 0.0] if flow.shape.upright else [0.0, 0.0, 1.0])
    return FarField.of(flow.segments(), chain.frequency), axis


def _density(far: FarField, towards: Array) -> float:
    theta = np.arctan2(np.hypot(towards[:1], towards[1:2]), towards[2:])
    field = far.pattern(theta, np.arctan2(towards[1:2], towards[:1]))
    return float((np.abs(field) ** 2).sum()) / IMPEDANCE


def _strongest_alone(chain: Chain, point: OperatingPoint) -> tuple[float, float]:
    """Return power per solid angle in the stronger of two directions of free space [W/sr], and all of it [W]."""
    figures = point.figures
    both = (figures.directivity_along_axis, along_axis), (figures.directivity_in_plane, in_plane)
    _, directed = max(both, key=lambda each: each[0].spread.likely or 0.0)
    return directed(chain)


def _gain_in_free_space(chain: Chain, point: OperatingPoint) -> tuple[Term, ...]:
    density, radiated = _strongest_alone(chain, point)
    columns = terms.efficient(chain)
    into = terms.term("P", "W", columns, lambda each: radiated / chain.efficiency(each.losses, each.corner))
    # Directivity and efficiency are each widened, the efficiency to no more than 1.
    least, most = (1.0 - RESISTANCE_ERROR) ** 2, 1.0 + RESISTANCE_ERROR
    best = (into.ends[2] or 0.0) / radiated
    off = Term("d", (least - 1.0, 0.0, most * min(most, best) - 1.0), "1")
    return terms.same("U", density, "W/sr"), into, off


def _radiated(*, mean: bool) -> Callable[[Chain, Design, OperatingPoint], tuple[Term, ...]]:
    def work(_: Chain, __: Design, point: OperatingPoint) -> tuple[Term, ...]:
        gain, arriving = point.figures.gain.spread, point.power_at_loop
        known = (gain.low, gain.likely, gain.high)
        power = terms.where((arriving.low, arriving.likely, arriving.high), known)
        found = (terms.spread_of("G", gain, "1"), Term("P", power, "W"))
        return (*found, terms.same("u", use_of(point.transmission).duty, "1")) if mean else found

    return work


def _directivity(
    directed: Callable[[Chain], tuple[float, float]],
) -> Callable[[Chain, Design, OperatingPoint], tuple[Term, ...]]:
    def work(chain: Chain, _: Design, __: OperatingPoint) -> tuple[Term, ...]:
        density, radiated = directed(chain)
        return (
            terms.same("U", density, "W/sr"),
            terms.same("P", radiated, "W"),
            terms.stated_error(RESISTANCE_ERROR),
        )

    return work


SKY_WORKINGS: dict[str, Callable[[Chain, Design, OperatingPoint], tuple[Term, ...]]] = {
    "ground_resistance": _ground,
    "overall_efficiency": _efficiency,
    "gain": _gain,
    "share_above_60_degrees": _share(2),
    "share_below_20_degrees": _share(0),
    "effective_isotropic_radiated_power": _radiated(mean=False),
    "mean_effective_isotropic_radiated_power": _radiated(mean=True),
    "effective_radiated_power": _radiated(mean=False),
    "mean_effective_radiated_power": _radiated(mean=True),
    "directivity_along_axis": _directivity(along_axis),
    "directivity_in_plane": _directivity(in_plane),
}
