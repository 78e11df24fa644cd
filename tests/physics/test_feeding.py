"""The feed of a design: where coupling loops lie, their sizes and ends, two capacitors, sections, power that arrives.

Held against plane geometry, two meshes, a nodal circuit, cascaded two-ports and brute force. The mutual inductances and
the networks below it have tests of their own.
"""

import re
from collections.abc import Callable
from dataclasses import replace
from functools import cache
from math import hypot, pi, sqrt, tan
from typing import Any

import numpy as np
import pytest
from designs import plain_design
from points import fed as full_wave
from points import point
from scipy.constants import c
from scipy.optimize import minimize_scalar

from magsafe.analysis.capacitor_feed import CapacitorFeed, by_capacitors, capacitor_feed, series_part
from magsafe.analysis.chain import Chain, chain
from magsafe.analysis.feeding import arriving, matched, stated_coefficient, stated_ratio
from magsafe.analysis.figures import NO_HEIGHT
from magsafe.analysis.operating_point import OperatingPoint, operating_points
from magsafe.analysis.small_loop_feed import (
    fed,
    not_coupled,
    one_for_all,
    place_of,
    ratio_of,
    sized,
    sizing,
    small_loop,
    wire_radius,
)
from magsafe.design import tables
from magsafe.design.model import Design
from magsafe.design.shape import outline
from magsafe.physics import coupling, coupling_loop
from magsafe.physics.arrays import Array
from magsafe.physics.coupling_loop import Circuit
from magsafe.physics.near_field import SegmentCurrents, distance_to_axis
from magsafe.spread import UNKNOWN, Spread

ROD = {"form": "rod", "outer_diameter": "22 mm", "conductivity": "58 MS/m"}
BESIDE = {"position": "opposite the capacitor", "clearance": "20 mm"}
WATTS = 100.0


def chain_of(design: Design, power: float = WATTS) -> Chain:
    """Return the chain of a design's first transmission, all of the power at the loop."""
    return chain(design, design.transmission[0].frequency, outline(design.loop), Spread.exact(power))


def known(value: float | None) -> float:
    assert value is not None
    return value


def ends(spread: Spread) -> tuple[float, float, float]:
    return known(spread.low), known(spread.likely), known(spread.high)


def solved(found: OperatingPoint) -> Chain:
    assert found.chain is not None
    return found.chain


def coupled_by(small: dict[str, Any] | None = None, **changes: Any) -> Design:
    """Return the plain design fed by a coupling loop."""
    return plain_design(feed={"coupling": "small loop", "small_loop": small or {}}, **changes)


# Where they lie --------------------------------------------------------------------------------------------


def _shaped(shape: str, **sizes: Any) -> dict[str, Any]:
    return {"shape": shape, "conductor": ROD, "supports": [], **sizes}


RECTANGLE = _shaped("rectangle", width="1.2 m", height="0.7 m")
# A trapezium 1.2 m below, 0.6 m above, 0.8 m high, its middle 0.6 m from either end and 0.4 m up.
TRAPEZIUM = _shaped(
    "outline", points=[["0 m", "0 m"], ["1.2 m", "0 m"], ["0.9 m", "0.8 m"], ["0.3 m", "0.8 m"]], centre_height="3 m"
)
# Its middle is in its left leg; seen from the right end the left wall is nearest, and the foot's end further.
L_SHAPE = _shaped(
    "outline",
    points=[["0 m", "0 m"], ["1 m", "0 m"], ["1 m", "0.3 m"], ["0.7 m", "0.3 m"], ["0.7 m", "1 m"], ["0 m", "1 m"]],
)
U_SHAPE = _shaped(
    "outline",
    points=[
        ["0 m", "0 m"],
        ["1 m", "0 m"],
        ["1 m", "1 m"],
        ["0.8 m", "1 m"],
        ["0.8 m", "0.2 m"],
        ["0.2 m", "0.2 m"],
        ["0.2 m", "1 m"],
        ["0 m", "1 m"],
    ],
)
PENTAGON = 0.3 / np.sin(pi / 5.0)  # m, from the middle to a corner, of sides of 0.6 m


def _turns(turns: int, arrangement: str, plane: str = "vertical") -> dict[str, Any]:
    return {
        "loop__turns": turns,
        "loop__turn_spacing": "50 mm",
        "loop__turn_arrangement": arrangement,
        "loop__diameter": "0.8 m",
        "loop__plane": plane,
        "transmission__0__frequency": "3.6 MHz",
    }


# The design; the middle of the loop; where the conductor is opposite the capacitor, from the middle; by plane geometry.
PLACES: dict[str, tuple[dict[str, Any], tuple[float, float, float], tuple[float, float, float]]] = {
    "circle": ({}, (0.0, 0.0, 0.0), (0.0, 0.0, -0.5)),
    "circle, capacitor on top": ({"capacitor__position": "top"}, (0.0, 0.0, 0.0), (0.0, 0.0, -0.5)),
    "circle, capacitor below": (
        {"capacitor__position": "bottom", "loop__centre_height": "2 m"},
        (0.0, 0.0, 2.0),
        (0.0, 0.0, 0.5),
    ),
    "circle, capacitor aside": ({"capacitor__position": "side"}, (0.0, 0.0, 0.0), (0.0, -0.5, 0.0)),
    "circle lying flat": (
        {"loop__plane": "horizontal", "loop__centre_height": "2 m"},
        (0.0, 0.0, 2.0),
        (-0.5, 0.0, 0.0),
    ),
    "octagon": (
        {"loop": _shaped("polygon", sides=8, side="0.4 m"), "capacitor__position": "bottom"},
        (0.0, 0.0, 0.0),
        (0.0, 0.0, 0.2 / tan(pi / 8.0)),
    ),
    "pentagon, opposite a corner": (
        {"loop": _shaped("polygon", sides=5, side="0.6 m", centre_height="2 m"), "capacitor__position": "top"},
        (0.0, 0.0, 2.0),
        (0.0, 0.0, -PENTAGON),
    ),
    "triangle, opposite a corner": (
        {"loop": _shaped("polygon", sides=3, side="1 m"), "capacitor__position": "side"},
        (0.0, 0.0, 0.0),
        (0.0, -1.0 / sqrt(3.0), 0.0),
    ),
    "rectangle": ({"loop": RECTANGLE, "capacitor__position": "top"}, (0.0, 0.0, 0.0), (0.0, 0.0, -0.35)),
    "rectangle, capacitor aside": ({"loop": RECTANGLE, "capacitor__position": "side"}, (0, 0, 0), (0.0, -0.6, 0.0)),
    "trapezium": ({"loop": TRAPEZIUM, "capacitor__position": "bottom"}, (0.0, 0.0, 3.0), (0.0, 0.0, 0.4)),
    # The middle of its right side is 0.45 m off and level with the middle: so is that of the left.
    "trapezium, capacitor aside": (
        {"loop": TRAPEZIUM, "capacitor__position": "side"},
        (0.0, 0.0, 3.0),
        (0.0, -0.45, 0.0),
    ),
    # From the middle of the foot's end, 0.5 m off and 0.35 m below the middle, through the middle to the left wall.
    "L, capacitor on the foot": (
        {"loop": L_SHAPE, "capacitor__position": "side"},
        (0.0, 0.0, 0.0),
        (0.0, -0.5, 0.35),
    ),
    "two turns side by side": (_turns(2, "side by side"), (0.0, 0.0, 0.0), (-0.025, 0.0, -0.4)),
    "three turns side by side": (_turns(3, "side by side"), (0.0, 0.0, 0.0), (0.0, 0.0, -0.4)),
    "three flat turns above another": (
        _turns(3, "side by side", "horizontal"),
        (0.0, 0.0, 0.0),
        (-0.4, 0.0, 0.0),
    ),
    # A spiral of t turns is set in by t - 1 spacings where the last has gone half its way.
    "two nested turns": (_turns(2, "nested"), (0.0, 0.0, 0.0), (0.0, 0.0, -0.35)),
    "three nested turns lying flat": (_turns(3, "nested", "horizontal"), (0.0, 0.0, 0.0), (-0.3, 0.0, 0.0)),
}


@cache
def placed(name: str) -> tuple[Design, Design, Chain]:
    """Return a design with its coupling loop beside the conductor, the same with it centred, and its chain."""
    changes, _, _ = PLACES[name]
    design = coupled_by(BESIDE, **changes)
    return design, coupled_by(**changes), chain_of(design)


def currents_of(made: Chain) -> SegmentCurrents:
    return made.likely.state.flow.segments()


@pytest.mark.parametrize("name", PLACES)
def test_a_coupling_loop_lies_in_the_middle_or_opposite_the_capacitor(name: str) -> None:
    beside, centred, made = placed(name)
    _, centre, away = PLACES[name]
    currents, where, middle = currents_of(made), place_of(beside, made), place_of(centred, made)
    assert middle.inward is None
    np.testing.assert_allclose(middle.start, centre, atol=1e-12)
    # A round turn is cut into chords, which lie up to 3 mm off; turns side by side may be taken from either side.
    found = where.start - np.array(centre)
    if name == "two turns side by side":
        found[0] = -abs(found[0])
    np.testing.assert_allclose(found, away, atol=4e-3)
    assert float(distance_to_axis(where.start[None], currents)[0]) < 1e-9
    assert where.inward is not None
    inward = -np.array(away)
    normal = np.array([0.0, 0.0, 1.0]) if beside.loop.plane == "horizontal" else np.array([1.0, 0.0, 0.0])
    inward -= normal * (inward @ normal)
    np.testing.assert_allclose(where.inward, inward / np.linalg.norm(inward), atol=2e-2)
    assert np.linalg.norm(where.inward) == pytest.approx(1.0)
    for each in (where, middle):
        assert abs(each.normal @ normal) == pytest.approx(1.0)
    assert (where.clearance, middle.clearance) == (0.020, 0.0)


def _nearest_metal(currents: SegmentCurrents, centre: Array, normal: Array, radius: float, wire: float) -> float:
    """Return the least distance of a circle's surface from the conductor's, tried all round it."""
    aside = np.cross(normal, [0.3, 0.5, 0.8])
    first = aside / np.linalg.norm(aside)
    second = np.cross(normal, first)
    turn = np.linspace(0.0, 2.0 * pi, 721)[:, None]
    points = centre + radius * (np.cos(turn) * first + np.sin(turn) * second)
    return float(distance_to_axis(points, currents).min()) - currents.radius - wire


@pytest.mark.parametrize("name", PLACES)
def test_a_coupling_loop_is_as_clear_of_the_conductor_as_it_was_put(name: str) -> None:
    """Of all the loop's conductor, its other turns too; the circle is 60 mm across."""
    beside, _, made = placed(name)
    where, currents, wire = place_of(beside, made), currents_of(made), wire_radius(small_loop(beside))
    centre = where.centres(currents, wire, np.array([0.03]))[0]
    apart = _nearest_metal(currents, centre, where.normal, 0.03, wire)
    assert apart == pytest.approx(0.020, abs=1e-3)
    least, middle = where.largest(currents, wire), np.linalg.norm(centre - where.start)
    assert least > 0.1
    assert middle < np.linalg.norm(PLACES[name][2])


def test_in_the_middle_of_a_triangle_there_is_the_room_of_its_inscribed_circle() -> None:
    """The middle of a regular polygon is not that of the box round it where its sides are odd."""
    _, centred, made = placed("triangle, opposite a corner")
    room = place_of(centred, made).largest(currents_of(made), 0.002)
    assert room == pytest.approx(0.5 / sqrt(3.0) - 0.011 - 0.002, rel=1e-9)


def test_an_outline_that_does_not_surround_its_middle_has_no_place_for_one() -> None:
    design = coupled_by(loop=U_SHAPE, capacitor__position="bottom")
    made = chain_of(design)
    with pytest.raises(ValueError, match="outside it"):
        place_of(design, made)
    spread, why = sizing(design, made)
    assert spread == UNKNOWN
    assert "the middle of the outline lies outside it" in why
    stated = coupled_by({"diameter": "0.2 m"}, loop=U_SHAPE, capacitor__position="bottom")
    with pytest.raises(ValueError, match="outside it"):
        stated_ratio(stated, made)


@pytest.mark.parametrize("turns", [2, 3])
@pytest.mark.parametrize("arrangement", ["side by side", "nested"])
def test_turns_have_a_figure_too(turns: int, arrangement: str) -> None:
    """A coupling loop sees all turns, so the one that matches is no larger than beside a single turn."""
    found = sizing(
        coupled_by(BESIDE, **_turns(turns, arrangement)), chain_of(plain_design(**_turns(turns, arrangement)))
    )
    low, likely, high = ends(found[0])
    assert 0.04 < low < likely < high < 0.4
    assert found[1] == ""


# Which size matches ----------------------------------------------------------------------------------------


@cache
def lossy() -> tuple[Design, Chain]:
    """A loop whose capacitor and joint may be better or worse than likely, 14.2 MHz."""
    design = coupled_by(
        transmission__0__frequency="14.2 MHz",
        capacitor__series_resistance={"low": "2 mohm", "likely": "10 mohm", "high": "40 mohm"},
    )
    return design, chain_of(design)


def strength(design: Design, made: Chain, diameter: float, resistance: float) -> float:
    """Return kappa of a coupling loop with a resistance of the loop."""
    circuit = Circuit(currents_of(made), made.frequency, resistance, design.feed.line_impedance)
    (found,) = coupling_loop.coupled(
        circuit, place_of(design, made), wire_radius(small_loop(design)), np.array([diameter])
    )
    return found.coefficient


def _resistances(made: Chain) -> tuple[float, float, float]:
    """Return the least, the likely and the most of the total resistance, end by end of all corners."""
    return (
        min(made.resistance("low", each) for each in made.least),
        made.resistance("likely", made.likely),
        max(made.resistance("high", each) for each in made.most),
    )


def test_a_metre_of_22_mm_rod_at_14_mhz_is_matched_by_a_fifth_of_its_diameter() -> None:
    """Common practice says a fifth; wire of 4 mm, where the design states none, in the middle."""
    design = plain_design(
        transmission__0__frequency="14.2 MHz",
        capacitor__series_resistance={"low": "10 mohm", "likely": "10 mohm", "high": "10 mohm"},
    )
    spread, why = sizing(design, chain_of(design))
    low, likely, high = ends(spread)
    assert why == ""
    assert 0.20 < likely < 0.21
    assert 0.19 < low < likely < high < 0.22
    assert likely / 1.0 == pytest.approx(0.2, abs=0.01)


def test_the_likely_size_is_what_matches_the_likely_loop() -> None:
    design, made = lossy()
    _, likely, _ = ends(sizing(design, made)[0])
    assert strength(design, made, likely, _resistances(made)[1]) == pytest.approx(1.0, rel=1e-6)


def test_the_ends_of_the_size_are_those_of_the_resistance_and_of_the_charge() -> None:
    """kappa at the low end, with the least resistance and the most that charge adds, is 1; at the high end likewise."""
    design, made = lossy()
    low, likely, high = ends(sizing(design, made)[0])
    below, above = coupling.coefficient_ends(pi * 14.2e6 / c, pi * likely * 14.2e6 / c)
    assert float(below) < 1.0 < float(above)
    least, _, most = _resistances(made)
    assert strength(design, made, low, least) * float(above) == pytest.approx(1.0, rel=1e-6)
    assert strength(design, made, high, most) * float(below) == pytest.approx(1.0, rel=1e-6)
    assert low < likely < high
    found = sized(design, made)
    assert [known(None if each is None else each.resistance) for each in found] == pytest.approx([*_resistances(made)])
    assert [known(None if each is None else each.charge) for each in found] == pytest.approx(
        [float(above), 1.0, float(below)]
    )


def test_a_better_loop_takes_a_smaller_coupling_loop() -> None:
    def likely(ohms: str) -> float:
        end = {"low": ohms, "likely": ohms, "high": ohms}
        design = coupled_by(capacitor__series_resistance=end)
        return ends(sizing(design, chain_of(design))[0])[1]

    assert likely("0 ohm") < 0.98 * likely("10 mohm") < 0.9 * likely("100 mohm")


def test_a_line_of_another_impedance_takes_another_size() -> None:
    sizes = {}
    for ohms in (50, 75, 200):
        design = plain_design(feed__line_impedance=f"{ohms} ohm")
        made = chain_of(design)
        sizes[ohms] = ends(sizing(design, made)[0])[1]
        circuit = Circuit(currents_of(made), made.frequency, _resistances(made)[1], float(ohms))
        (found,) = coupling_loop.coupled(circuit, place_of(design, made), 0.002, np.array([sizes[ohms]]))
        assert found.standing_wave_ratio == pytest.approx(1.0, rel=1e-6)
    assert sizes[50] < sizes[75] < sizes[200]


@cache
def at_no_height() -> tuple[Design, Chain]:
    design = coupled_by({"diameter": "0.3 m"}, site__ground="average")
    return design, chain_of(design)


def test_without_a_height_nothing_bounds_the_largest_that_matches() -> None:
    design, made = at_no_height()
    assert made.most == ()
    spread, why = sizing(design, made)
    assert spread.high is None
    assert known(spread.low) < known(spread.likely)
    assert why == NO_HEIGHT


def test_without_a_height_nothing_bounds_how_weakly_one_couples() -> None:
    design, made = at_no_height()
    found = fed(design, made, 0.3)
    assert found.coefficient.low is None
    assert known(found.coefficient.likely) < known(found.coefficient.high)
    likely = known(found.coefficient.likely)
    assert found.ratio == Spread(None, max(likely, 1.0 / likely), None)


JOINT: dict[str, Any] = {"name": "joint", "count": 1, "at": "capacitor"}
NO_SIZE: dict[str, tuple[dict[str, Any], dict[str, Any], str]] = {
    "no room": ({"position": "opposite the capacitor", "clearance": "0.9 m"}, {}, "there is no room"),
    "too thick": (
        {"position": "opposite the capacitor", "clearance": "10 mm", "wire": "12 mm"},
        {},
        "the smallest loop of this wire couples too much",
    ),
    "too large for its frequency": (
        {},
        {"transmission__0__frequency": "28 MHz", "loop__joint": [{**JOINT, "resistance": "3 ohm"}]},
        r"its circumference would be 0.\d+ wavelengths; coupling loops are computed to 0.1",
    ),
    "too lossy": (
        {"position": "opposite the capacitor", "clearance": "0.2 m"},
        {"loop__joint": [{**JOINT, "resistance": "10 ohm"}]},
        r"nothing that fits in there matches: the largest, \d+ mm, reaches 0.\d+ of the coupling needed",
    ),
}


@pytest.mark.parametrize("name", NO_SIZE)
def test_why_no_size_matches_is_told(name: str) -> None:
    small, changes, why = NO_SIZE[name]
    design = coupled_by(small, **changes)
    spread, told = sizing(design, chain_of(design))
    assert spread.likely is None
    assert spread.high is None
    assert told
    assert re.search(why, told)


NOT_COUPLED: dict[str, tuple[dict[str, Any], str]] = {
    "direct": ({"feed": {"coupling": "direct"}}, 'coupling = "direct"'),
    "capacitors": ({"feed": {"coupling": "capacitors"}}, 'coupling = "capacitors"'),
    "too long": (
        {"transmission__0__frequency": "30 MHz"},
        "0.314 wavelengths long; coupling loops are computed to 0.3",
    ),
    "too long by its turns": (
        {"loop__turns": 2, "loop__turn_spacing": "60 mm", "transmission__0__frequency": "14.5 MHz"},
        "0.304 wavelengths long",
    ),
}


@pytest.mark.parametrize("name", NOT_COUPLED)
def test_why_no_coupling_loop_is_computed_is_told(name: str) -> None:
    changes, why = NOT_COUPLED[name]
    design = plain_design(**changes)
    made = chain_of(design)
    assert why in not_coupled(design, made)
    assert sizing(design, made) == (UNKNOWN, not_coupled(design, made))
    assert not not_coupled(plain_design(transmission__0__frequency="28.5 MHz"), replace(made, frequency=14.2e6))


# What one of a size does -----------------------------------------------------------------------------------


def seen_through(design: Design, made: Chain, diameter: float, tuned: float) -> complex:
    """Return what the line sees, by two meshes: the coupling loop's, and the loop's with a reactance [ohm] left."""
    place, wire = place_of(design, made), wire_radius(small_loop(design))
    centres = place.centres(currents_of(made), wire, np.array([0.5 * diameter]))
    mutual = coupling.mutual_inductance(currents_of(made), centres, place.normal, np.array([0.5 * diameter]))
    omega = 2.0 * pi * made.frequency
    own = float(coupling.own_reactance(made.frequency, 0.5 * diameter, wire))
    # Row by row: the coupling loop with 1 V on it, the loop with its capacitor.
    meshes = np.array(
        [
            [1j * own, 1j * omega * float(mutual[0])],
            [1j * omega * float(mutual[0]), _resistances(made)[1] + 1j * tuned],
        ]
    )
    return complex(1.0 / np.linalg.solve(meshes, np.array([1.0, 0.0]))[0])


def swr(impedance: complex, line: float = 50.0) -> float:
    reflected = abs((impedance - line) / (impedance + line))
    return (1.0 + reflected) / (1.0 - reflected)


@pytest.mark.parametrize("diameter", [0.12, 0.22, 0.35])
def test_the_swr_is_the_lowest_that_two_meshes_reach(diameter: float) -> None:
    design, made = lossy()
    found, resistance = fed(design, made, diameter), _resistances(made)[1]
    best = minimize_scalar(
        lambda each: swr(seen_through(design, made, diameter, each * resistance)), bounds=(-2.0, 30.0), method="bounded"
    )
    assert known(found.ratio.likely) == pytest.approx(best.fun, rel=1e-4)
    likely = known(found.coefficient.likely)
    assert (likely > 1.0) == (diameter > 0.2)
    assert known(found.ratio.likely) == pytest.approx(max(likely, 1.0 / likely))
    # X = R Q (f/f0 - f0/f), at the frequency of the transmission: f0 lies an offset below.
    quality, own = made.quality("likely", made.likely), best.x
    assert found.offset > 0.0
    resonance = made.frequency - found.offset
    tuned = quality * (made.frequency / resonance - resonance / made.frequency)
    assert tuned == pytest.approx(own, rel=1e-2)


def test_what_couples_more_is_the_loop_that_loses_less() -> None:
    design, made = lossy()
    found = fed(design, made, 0.25).coefficient
    least, likely, most = _resistances(made)
    below, above = coupling.coefficient_ends(pi * 14.2e6 / c, pi * 0.25 * 14.2e6 / c)
    low, middle, high = ends(found)
    assert low < middle < high
    assert low == pytest.approx(strength(design, made, 0.25, most) * float(below))
    assert middle == pytest.approx(strength(design, made, 0.25, likely))
    assert high == pytest.approx(strength(design, made, 0.25, least) * float(above))


RATIOS = {
    # kappa: low, likely, high; SWR: low, likely, high
    "undercoupled": ((0.25, 0.4, 0.5), (2.0, 2.5, 4.0)),
    "overcoupled": ((2.0, 2.5, 4.0), (2.0, 2.5, 4.0)),
    "about a match": ((0.5, 1.0, 1.6), (1.0, 1.0, 2.0)),
    "mostly overcoupled": ((0.8, 1.5, 3.0), (1.0, 1.5, 3.0)),
    "one end matches": ((1.0, 1.2, 1.5), (1.0, 1.2, 1.5)),
}


@pytest.mark.parametrize("name", RATIOS)
def test_the_swr_is_one_where_a_match_lies_inside(name: str) -> None:
    coefficient, ratio = RATIOS[name]
    assert ends(ratio_of(Spread(*coefficient))) == pytest.approx(ratio)


def test_the_swr_of_an_open_end_is_open() -> None:
    assert ratio_of(Spread(None, 0.5, 2.0)) == Spread(None, 2.0, None)
    assert ratio_of(UNKNOWN) == UNKNOWN


def test_a_coupling_loop_that_cannot_be_computed_is_refused() -> None:
    design, made = lossy()
    for diameter, why in (
        (1.1, "no room"),
        (0.03, "conductor radius over coupling loop radius"),
        (0.7, "its circumference is 0.104 wavelengths"),
    ):
        with pytest.raises(ValueError, match=why):
            fed(design, made, diameter)


# One for all -----------------------------------------------------------------------------------------------


@cache
def bands() -> tuple[Design, tuple[Chain, ...]]:
    used = [{"frequency": f"{each} MHz", "power": "100 W"} for each in (7.1, 10.12, 14.2, 18.1)]
    design = plain_design(
        transmission=used, capacitor__series_resistance={"low": "5 mohm", "likely": "20 mohm", "high": "40 mohm"}
    )
    made = (chain(design, each.frequency, outline(design.loop), Spread.exact(WATTS)) for each in design.transmission)
    return design, tuple(made)


@pytest.mark.parametrize("used", [(0, 1), (0, 3), (0, 1, 2, 3)])
def test_one_for_all_is_the_one_whose_worst_swr_is_least(used: tuple[int, ...]) -> None:
    design, every = bands()
    chains = [every[each] for each in used]
    matching = [ends(sizing(design, each)[0])[1] for each in chains]
    found = known(one_for_all(design, chains, matching))
    sizes = np.linspace(0.06, 0.5, 400)

    def worst(diameters: Array) -> Array:
        ratios = []
        for made in chains:
            circuit = Circuit(currents_of(made), made.frequency, _resistances(made)[1], 50.0)
            each = coupling_loop.coupled(circuit, place_of(design, made), 0.002, diameters)
            ratios.append([swr_of(one.coefficient) for one in each])
        return np.asarray(np.max(ratios, axis=0))

    brute = worst(sizes)
    assert min(matching) < found < max(matching)
    assert float(worst(np.array([found]))[0]) <= 1.02 * float(brute.min())
    assert found == pytest.approx(float(sizes[int(np.argmin(brute))]), rel=0.02)


def test_a_transmission_that_nothing_matches_counts_too() -> None:
    """30 cm off the conductor nothing that fits matches 3.6 MHz: the largest, 373 mm, serves both best."""
    ohms = {"low": "0.4 ohm", "likely": "0.4 ohm", "high": "0.4 ohm"}
    used = [{"frequency": f"{each} MHz", "power": "100 W"} for each in (3.6, 14.2)]
    design = coupled_by({"clearance": "0.3 m"}, transmission=used, loop__joint=[{**JOINT, "resistance": ohms}])
    chains = [chain(design, each.frequency, outline(design.loop), Spread.exact(WATTS)) for each in design.transmission]
    unmatched, matching = (sizing(design, each)[0].likely for each in chains)
    assert unmatched is None
    found = known(one_for_all(design, chains, [known(matching)]))
    assert found > 1.05 * known(matching)

    def worst(diameter: float) -> float:
        return max(swr_of(strength(design, made, diameter, _resistances(made)[1])) for made in chains)

    assert worst(found) <= 1.03 * min(worst(float(each)) for each in np.linspace(0.05, 0.3725, 60))


def swr_of(coefficient: float) -> float:
    return max(coefficient, 1.0 / coefficient)


def test_one_for_one_is_the_one_that_matches_it() -> None:
    design, every = bands()
    assert one_for_all(design, every[:1], [0.19]) == 0.19
    assert one_for_all(design, every[:2], [0.19, 0.19]) == 0.19
    assert one_for_all(design, every, []) is None


# Two capacitors --------------------------------------------------------------------------------------------


def by_two(part: dict[str, Any] | None = None, ohms: float = 50.0, **changes: Any) -> Design:
    """Return the plain design fed by two capacitors on a line of so many ohm."""
    feed: dict[str, Any] = {"coupling": "capacitors", "line_impedance": f"{ohms} ohm"}
    if part is not None:
        feed["series_capacitor"] = part
    return plain_design(feed=feed, **changes)


LOSSLESS = {"quality_factor": {"low": 1e5, "likely": 1e5, "high": 1e5}}
Q_OF_500 = {"quality_factor": {"low": 500, "likely": 500, "high": 500}}


@cache
def free() -> Chain:
    return chain_of(by_two())


@pytest.fixture(scope="module")
def loop_at_port() -> complex:
    """What the loop shows at its port, without any capacitor but with its losses, likely."""
    return complex(_resistances(free())[1], free().likely.reactance)


class Nodes:
    """A transmitter matched to its line, a series capacitor or two, a capacitor across the loop: solved by nodes.

    Node 0 is the feed, node 1 the loop's end next to it, node 2 the loop's other end; the transmitter's other terminal
    is earth. Without a second series capacitor a wire of 1 uohm joins node 2 to earth.
    """

    def __init__(
        self,
        loop: complex,
        series: float,
        parallel: float,
        *,
        line: float = 50.0,
        q: float = np.inf,
        balanced: bool = False,
    ) -> None:
        self.omega, self.loop, self.line = 2.0 * pi * 7.1e6, loop, line
        reactance = 1.0 / (self.omega * series)
        self.leg, self.legs = complex(reactance / q, -reactance), 2 if balanced else 1
        matrix = np.zeros((3, 3), dtype=complex)
        matrix[0, 0] += 1.0 / line
        self._join(matrix, 0, 1, 1.0 / self.leg)
        self._join(matrix, 1, 2, 1.0 / loop + 1j * self.omega * parallel)
        matrix[2, 2] += 1.0 / self.leg if balanced else 1e6
        # 2 sqrt(P Z) volts RMS behind the line's impedance have P to give.
        self.volts = np.linalg.solve(matrix, np.array([2.0 * sqrt(WATTS * line) / line, 0.0, 0.0]))

    @staticmethod
    def _join(matrix: np.ndarray[Any, Any], one: int, other: int, admittance: complex) -> None:
        matrix[one, one] += admittance
        matrix[other, other] += admittance
        matrix[one, other] -= admittance
        matrix[other, one] -= admittance

    @property
    def amps(self) -> float:
        return float(abs((self.volts[0] - self.volts[1]) / self.leg))

    @property
    def series_crest(self) -> float:
        return float(sqrt(2.0) * abs(self.volts[0] - self.volts[1]))

    @property
    def loop_crest(self) -> float:
        return float(sqrt(2.0) * abs(self.volts[1] - self.volts[2]))

    @property
    def into_the_loop(self) -> float:
        return float(abs(self.volts[1] - self.volts[2]) ** 2 * (1.0 / self.loop).real)

    @property
    def into_the_series(self) -> float:
        return self.legs * self.amps**2 * self.leg.real

    @property
    def ratio(self) -> float:
        current = (2.0 * sqrt(WATTS * self.line) - self.volts[0]) / self.line
        return swr(complex(self.volts[0] / current), self.line)


@pytest.mark.parametrize("balanced", [False, True])
@pytest.mark.parametrize("ohms", [50.0, 75.0, 300.0])
def test_two_capacitors_see_what_a_circuit_of_nodes_has(ohms: float, balanced: bool, loop_at_port: complex) -> None:
    design = by_two({"balanced": balanced, **LOSSLESS}, ohms)
    found = capacitor_feed(design, free())
    series, parallel = known(found.series.likely), known(found.parallel.likely)
    nodes = Nodes(loop_at_port, series, parallel, line=ohms, balanced=balanced)
    assert nodes.into_the_loop == pytest.approx(WATTS, rel=1e-6)
    assert nodes.ratio == pytest.approx(1.0, abs=1e-4)
    assert known(found.voltage.likely) == pytest.approx(nodes.series_crest, rel=1e-6)
    assert known(found.current.likely) == pytest.approx(nodes.amps, rel=1e-6)
    assert known(found.current.likely) == pytest.approx(sqrt(WATTS / ohms), rel=1e-6)
    assert known(found.coefficient.likely) == pytest.approx(1.0, rel=1e-9)
    # At right angles: the loop's volts are the root of the sum of the squares of all the others.
    across = nodes.legs * known(found.voltage.likely)
    assert hypot(across, sqrt(2.0 * WATTS * ohms)) == pytest.approx(nodes.loop_crest, rel=1e-6)


def test_balanced_halves_have_twice_the_capacitance_and_half_the_volts_each() -> None:
    one, two = (capacitor_feed(by_two({"balanced": each}), free()) for each in (False, True))
    for name, factor in (("series", 2.0), ("voltage", 0.5), ("current", 1.0), ("heat", 0.5), ("parallel", 1.0)):
        single, halved = ends(getattr(one, name)), ends(getattr(two, name))
        assert halved == pytest.approx([factor * each for each in single], rel=1e-9), name
    assert two.bare_voltage == pytest.approx(0.5 * one.bare_voltage)
    assert ends(one.kept) == pytest.approx(ends(two.kept))


def best_tuned(loop: complex, series: float, q: float, *, balanced: bool = False) -> Nodes:
    """Return the circuit with a series capacitor of some size, the one across the loop set to the lowest SWR."""
    omega = 2.0 * pi * 7.1e6
    resonant = -(1.0 / loop).imag / omega

    def ratio(picofarads: float) -> float:
        return Nodes(loop, series, picofarads * 1e-12, q=q, balanced=balanced).ratio

    tried = np.linspace(resonant * 1e12 - 40.0, resonant * 1e12 + 1.0, 4000)
    start = tried[int(np.argmin([ratio(each) for each in tried]))]
    best = minimize_scalar(ratio, bounds=(start - 0.02, start + 0.02), method="bounded", options={"xatol": 1e-9})
    return Nodes(loop, series, best.x * 1e-12, q=q, balanced=balanced)


@pytest.mark.parametrize(("picofarads", "balanced"), [(4.0, False), (8.0, False), (14.0, True)])
def test_a_stated_capacitance_leaves_the_swr_that_retuning_reaches(
    picofarads: float, balanced: bool, loop_at_port: complex
) -> None:
    design = by_two({"capacitance": f"{picofarads} pF", "balanced": balanced, **LOSSLESS})
    found = capacitor_feed(design, free())
    nodes = best_tuned(loop_at_port, picofarads * 1e-12, np.inf, balanced=balanced)
    likely = known(found.coefficient.likely)
    assert swr_of(likely) == pytest.approx(nodes.ratio, rel=2e-3)
    assert (likely > 1.0) == (picofarads > 6.0)  # 5.6 pF match, 11.3 of each of two
    # The volts are told for all the power in the loop, of which it has this share here.
    share = nodes.into_the_loop / WATTS
    assert share == pytest.approx(4.0 * likely / (1.0 + likely) ** 2, rel=5e-3)
    counted = known(found.voltage.likely) * sqrt(share)
    assert nodes.series_crest <= counted * 1.0005
    assert counted * nodes.legs == pytest.approx(nodes.loop_crest, rel=1e-3)
    assert known(found.current.likely) * sqrt(share) == pytest.approx(nodes.amps, rel=2e-3)


def test_all_of_the_loops_volts_are_counted_across_a_stated_capacitance() -> None:
    """It need not match, so nothing is taken off for the line's volts, here of a line where they count."""
    made = free()
    matching = by_two(LOSSLESS, 600.0)
    series = known(capacitor_feed(matching, made).series.likely)
    stated = by_two({"capacitance": f"{1e12 * series:.9g} pF", **LOSSLESS}, 600.0)
    loop, of_one = made.voltage("likely", made.likely, WATTS), capacitor_feed(matching, made)
    assert known(capacitor_feed(stated, made).voltage.likely) == pytest.approx(loop, rel=1e-9)
    assert known(of_one.voltage.likely) == pytest.approx(sqrt(loop**2 - 2.0 * WATTS * 600.0), rel=1e-9)
    assert known(capacitor_feed(stated, made).coefficient.likely) == pytest.approx(1.0, rel=1e-6)


@pytest.mark.parametrize("picofarads", [None, 8.0, 14.0])
def test_a_lossy_series_capacitor_lets_its_share_through(picofarads: float | None, loop_at_port: complex) -> None:
    """Of the power that goes in, by the same circuit; overcoupled it takes more."""
    stated = {} if picofarads is None else {"capacitance": f"{picofarads} pF"}
    found = capacitor_feed(by_two({**stated, **Q_OF_500}), free())
    series = known(found.series.likely) if picofarads is None else picofarads * 1e-12
    if picofarads is None:
        nodes = Nodes(loop_at_port, series, known(found.parallel.likely), q=500.0)
    else:
        nodes = best_tuned(loop_at_port, series, 500.0)
    share = nodes.into_the_loop / (nodes.into_the_loop + nodes.into_the_series)
    assert known(found.kept.likely) == pytest.approx(share, rel=0.02)
    assert known(found.kept.low) <= known(found.kept.likely) < 1.0
    assert found.kept.high == 1.0
    # Its watts are told for all the power in the loop.
    watts = nodes.into_the_series * WATTS / nodes.into_the_loop
    assert known(found.heat.likely) == pytest.approx(watts, rel=2e-3)


def test_a_worse_capacitor_keeps_less_and_is_hotter() -> None:
    found = capacitor_feed(by_two({"quality_factor": {"low": 300, "likely": 1000, "high": 3000}}), free())
    reactance, amps = known(found.voltage.likely) / (sqrt(2.0) * sqrt(WATTS / 50.0)), sqrt(WATTS / 50.0)
    assert known(found.kept.likely) == pytest.approx(50.0 / (50.0 + reactance / 1000.0), rel=1e-6)
    assert known(found.kept.low) < 50.0 / (50.0 + reactance / 300.0)
    # The smallest that may match has the most reactance, and the loop that couples most leaves it the most power.
    most = known(found.coefficient.high) / (2.0 * pi * 7.1e6 * known(found.series.low))
    assert known(found.kept.low) == pytest.approx(50.0 / (50.0 + most / 300.0), rel=1e-9)
    low, likely, high = ends(found.heat)
    assert likely == pytest.approx(amps**2 * reactance / 1000.0, rel=1e-6)
    assert low < 0.4 * likely
    assert high > 3.0 * likely
    assert found.bare_heat >= high
    # Of a part whose Q is not stated, what is usual of a fixed one of unknown kind.
    usual = tables.capacitor_quality_factor("fixed part of unknown kind")
    plain = capacitor_feed(by_two(), free())
    assert known(plain.heat.likely) == pytest.approx(amps**2 * reactance / known(usual.likely), rel=1e-6)


def test_the_dangerous_ends_are_those_of_the_least_losses_and_the_bare_ones_of_none_that_is_typical() -> None:
    """By hand from the chain: the crest is sqrt(2 P / R) X less the line's, over every corner, and the stated error."""
    design = by_two(LOSSLESS, capacitor__series_resistance=None)
    made = chain_of(design)
    found, error = capacitor_feed(design, made), made.voltage_error

    def crest(end: str, corners: Any) -> list[float]:
        return [
            sqrt(2.0 * WATTS / made.resistance(end, each) * each.reactance**2 - 2.0 * WATTS * 50.0) for each in corners
        ]

    assert made.typical
    assert known(found.voltage.high) == pytest.approx(max(crest("low", made.least)) * (1.0 + error), rel=1e-9)
    assert known(found.voltage.low) == pytest.approx(min(crest("high", made.most)) * (1.0 - error), rel=1e-9)
    assert found.bare_voltage == pytest.approx(max(crest("bare", made.least)) * (1.0 + error), rel=1e-9)
    assert found.bare_voltage > 1.01 * known(found.voltage.high)
    assert found.bare_current >= known(found.current.high)
    assert found.bare_heat >= known(found.heat.high)


def test_an_overshoot_raises_the_volts_alone() -> None:
    calm, wild = (chain_of(by_two(LOSSLESS, margins__overshoot=each)) for each in ("0 dB", "3 dB"))
    one, other = (capacitor_feed(by_two(LOSSLESS), each) for each in (calm, wild))
    assert wild.overshoot == pytest.approx(10.0**0.15)
    assert ends(other.voltage) == pytest.approx([wild.overshoot * each for each in ends(one.voltage)], rel=1e-9)
    assert other.bare_voltage == pytest.approx(wild.overshoot * one.bare_voltage, rel=1e-9)
    assert ends(other.current) == pytest.approx(ends(one.current), rel=1e-9)
    assert ends(other.heat) == pytest.approx(ends(one.heat), rel=1e-9)


def test_every_corner_is_in_the_spread_of_what_matches() -> None:
    made = lossy()[1]
    design = by_two(LOSSLESS)
    found, part = capacitor_feed(design, made), series_part(design, made)
    every = [part.match(end, corner) for end, corner in part.corners]
    assert ends(found.series) == (min(e.series for e in every), every[0].series, max(e.series for e in every))
    assert ends(found.parallel) == (min(e.parallel for e in every), every[0].parallel, max(e.parallel for e in every))
    low, likely, high = ends(found.coefficient)
    assert likely == pytest.approx(1.0)
    assert low < 1.0 < high


def test_without_a_height_the_ends_of_the_most_resistance_are_open() -> None:
    """More resistance takes more between line and loop, less across it, and couples less."""
    design = by_two({"capacitance": "8 pF", **LOSSLESS}, site__ground="average")
    found = capacitor_feed(design, chain_of(design))
    assert (found.series.high, found.parallel.low, found.coefficient.low) == (None, None, None)
    assert None not in (found.series.low, found.parallel.high, found.coefficient.high, found.voltage.high)
    assert found.voltage.low is None
    solved_point = point(feed=design_feed(), site__ground="average")
    for name in ("series_capacitance", "match_parallel_capacitance", "series_capacitor_peak_voltage"):
        assert getattr(solved_point.figures, name).why == NO_HEIGHT


def design_feed() -> dict[str, Any]:
    return {"coupling": "capacitors", "series_capacitor": {"capacitance": "8 pF"}}


def test_a_loop_that_two_capacitors_do_not_match_is_refused() -> None:
    """A line of 10 ohm and a loop that loses more than that in series."""
    joint = {
        "name": "joints",
        "count": 2,
        "at": "capacitor",
        "resistance": {"low": "8 ohm", "likely": "8 ohm", "high": "8 ohm"},
    }
    design = by_two({"capacitance": "8 pF"}, 10.0, loop__joint=[joint])
    made = chain_of(design)
    with pytest.raises(ValueError, match="takes an inductor"):
        capacitor_feed(design, made)
    with pytest.raises(ValueError, match="takes an inductor"):
        stated_coefficient(design, made)
    assert arriving(design, made) == made.power


def test_a_loop_without_a_capacitor_is_not_matched_by_two() -> None:
    assert by_capacitors(by_two())
    assert not by_capacitors(plain_design())
    assert not by_capacitors(plain_design(capacitor={"kind": "none"}, feed={"coupling": "capacitors"}))


# Sections and transformers ---------------------------------------------------------------------------------

# A rectangle of 3.2 mm wire that is fed in the middle of its longer lower side, where it is resonant with 112 ohm.
WIDE: dict[str, Any] = {
    "loop__shape": "rectangle",
    "loop__diameter": None,
    "loop__width": "0.7 m",
    "loop__height": "0.8 m",
    "capacitor__position": "bottom",
}


@cache
def at_112_ohm() -> OperatingPoint:
    return full_wave(108.3, **WIDE)


def test_112_ohm_through_75_ohm_is_50_and_through_transformers_56_and_28() -> None:
    """By hand: sqrt(112 * 50) = 74.8; 75^2 / 112 = 50.2, SWR 1.00; 112 / 2 = 56, 1.12; 112 / 4 = 28, 1.79."""
    found = at_112_ohm().figures
    assert known(found.terminal_resistance.spread.likely) == pytest.approx(112.0, rel=0.02)
    assert abs(known(found.terminal_reactance.spread.likely)) < 6.0
    assert known(found.quarter_wave_impedance.spread.likely) == pytest.approx(74.8, rel=0.01)
    assert known(found.swr_through_quarter_wave.spread.likely) == pytest.approx(1.00, abs=0.06)
    assert known(found.swr_through_2_to_1.spread.likely) == pytest.approx(1.12, abs=0.04)
    assert known(found.swr_through_4_to_1.spread.likely) == pytest.approx(1.79, rel=0.03)


def through_section(load: complex, section: float, quarters: float) -> complex:
    """Return what a section shows, as two quarter-turned two-ports of half its length each, in cascade."""
    angle = 0.25 * pi * quarters
    half = np.array([[np.cos(angle), 1j * section * np.sin(angle)], [1j * np.sin(angle) / section, np.cos(angle)]])
    (a, b), (d, e) = half @ half
    return complex((a * load + b) / (d * load + e))


def likely_load(found: OperatingPoint) -> complex:
    return complex(
        known(found.figures.terminal_resistance.spread.likely), known(found.figures.terminal_reactance.spread.likely)
    )


@pytest.mark.parametrize("stated", [None, "93 ohm"])
def test_the_section_is_cut_for_the_first_transmission(stated: str | None) -> None:
    """At the second it is longer than a quarter wave, by the ratio of the frequencies."""
    feed: dict[str, Any] = {"match": "quarter-wave section"}
    if stated:
        feed["section_impedance"] = stated
    used = [{"frequency": f"{each} MHz", "power": "100 W"} for each in (104, 112)]
    design = plain_design(
        capacitor={"kind": "none"},
        transmission=used,
        feed=feed,
        loop__conductor={"form": "rod", "outer_diameter": "3.2 mm", "conductivity": "58 MS/m"},
        **WIDE,
    )
    section = 93.0 if stated else 75.0
    for quarters, found in zip((1.0, 112.0 / 104.0), operating_points(design), strict=True):
        expected = swr(through_section(likely_load(found), section, quarters))
        assert known(found.figures.swr_through_quarter_wave.spread.likely) == pytest.approx(expected, rel=1e-6)
        assert found.figures.swr_at_feed.spread == found.figures.swr_through_quarter_wave.spread


def test_a_match_takes_in_every_impedance_that_may_be() -> None:
    made = solved(at_112_ohm())
    found = matched(full_design(None), made)
    for ratio, name in ((1.0, "plain"), (2.0, "two_to_one"), (4.0, "four_to_one")):
        every = [swr(each / ratio) for each in made.terminals()]
        low, _, high = ends(getattr(found, name))
        assert low <= min(every) * (1.0 + 1e-9)
        assert high == pytest.approx(max(every), rel=1e-9)
    low, _, high = ends(found.section)
    assert low == pytest.approx(sqrt(50.0 * min(each.real for each in made.terminals())), rel=1e-9)
    assert high == pytest.approx(sqrt(50.0 * max(each.real for each in made.terminals())), rel=1e-9)


def full_design(match: str | None, **feed: Any) -> Design:
    kept = {**feed, **({} if match is None else {"match": match})}
    return plain_design(capacitor={"kind": "none"}, transmission__0__frequency="108.3 MHz", feed=kept)


MATCHES: dict[str, Callable[[complex], float]] = {
    "none": swr,
    "quarter-wave section": lambda load: swr(through_section(load, 75.0, 1.0)),
    "2:1 transformer": lambda load: swr(load / 2.0),
    "4:1 transformer": lambda load: swr(load / 4.0),
}


@pytest.mark.parametrize("match", MATCHES)
def test_the_stated_match_of_a_full_wave_loop_decides(match: str) -> None:
    made, design = solved(at_112_ohm()), full_design(match)
    likely = MATCHES[match](likely_load(at_112_ohm()))
    found = stated_ratio(design, made)
    assert known(found.likely) == pytest.approx(likely, rel=1e-9)
    power = arriving(design, made)
    share = 1.0 - ((likely - 1.0) / (likely + 1.0)) ** 2
    assert known(power.likely) == pytest.approx(WATTS * share, rel=1e-9)
    worst = known(found.high)
    assert known(power.low) == pytest.approx(WATTS * (1.0 - ((worst - 1.0) / (worst + 1.0)) ** 2), rel=1e-9)
    assert power.high == WATTS


def test_no_stated_match_takes_nothing() -> None:
    made = solved(at_112_ohm())
    assert stated_coefficient(full_design(None), made) == UNKNOWN
    assert arriving(full_design(None), made) == Spread.exact(WATTS)


def test_without_a_height_only_the_likely_match_of_a_full_wave_loop_is_known() -> None:
    found = full_wave(108.3, site__ground="average", feed={"match": "2:1 transformer"}, **WIDE)
    for name in ("swr_through_quarter_wave", "swr_through_2_to_1", "swr_at_feed"):
        spread = getattr(found.figures, name).spread
        assert (spread.low, spread.high) == (None, None), name
        assert spread.likely is not None
    section = found.figures.quarter_wave_impedance.spread
    assert section.high is None
    assert known(section.low) <= known(section.likely)
    # Nothing bounds what it turns back, so nothing may arrive.
    assert found.power_at_loop.low == 0.0
    assert 0.9 * WATTS < known(found.power_at_loop.likely) < WATTS
    assert found.power_at_loop.high == WATTS


# What of the power arrives ---------------------------------------------------------------------------------


def reflected(ratio: float) -> float:
    """Return the share of the power that an SWR turns back, by the reflection factor."""
    return ((ratio - 1.0) / (ratio + 1.0)) ** 2


def test_a_mismatch_takes_from_the_likely_and_the_low_end_alone() -> None:
    found = point(feed={"coupling": "small loop", "small_loop": {"diameter": "0.3 m"}, "line_loss": "1 dB"})
    _, likely, worst = ends(found.figures.swr_at_feed.spread)
    assert 3.0 < likely < worst
    low, middle, high = ends(found.power_at_loop)
    line = 10.0**-0.1
    assert middle == pytest.approx(WATTS * line * (1.0 - reflected(likely)), rel=1e-9)
    assert low == pytest.approx(WATTS * line * (1.0 - reflected(worst)), rel=1e-9)
    assert high == WATTS  # a line loss of a single value may also be nothing


def test_a_stated_mismatch_changes_no_dangerous_end() -> None:
    plain = point()
    for feed in (
        {"coupling": "small loop", "small_loop": {"diameter": "0.35 m"}},
        {"coupling": "small loop", "small_loop": {"diameter": "60 mm"}},
        design_feed(),
    ):
        found = point(feed=feed)
        assert known(found.power_at_loop.likely) < 0.9 * WATTS
        assert (found.bare_voltage, found.bare_current) == (plain.bare_voltage, plain.bare_current)
        for name in ("capacitor_peak_voltage", "capacitor_rms_current"):
            changed, same = getattr(found.figures, name).spread, getattr(plain.figures, name).spread
            assert changed.high == same.high, name
            assert known(changed.likely) < known(same.likely), name
        assert [each.square for each in found.ground_cases] == [each.square for each in plain.ground_cases]


def test_the_series_capacitor_takes_its_share_too() -> None:
    part = {"capacitance": "8 pF", "quality_factor": {"low": 300, "likely": 500, "high": 1000}}
    design = by_two(part)
    found = arriving(design, free())
    made: CapacitorFeed = capacitor_feed(design, free())
    ratio = stated_ratio(design, free())
    assert known(found.likely) == pytest.approx(
        WATTS * (1.0 - reflected(known(ratio.likely))) * known(made.kept.likely), rel=1e-9
    )
    assert known(found.low) == pytest.approx(
        WATTS * (1.0 - reflected(known(ratio.high))) * known(made.kept.low), rel=1e-9
    )
    assert known(found.low) < known(found.likely) < known(found.high) == WATTS
    # Of no stated capacitance it is what matches, and the capacitor alone takes some.
    matching = by_two({"quality_factor": 500})
    assert known(arriving(matching, free()).likely) == pytest.approx(
        WATTS * known(capacitor_feed(matching, free()).kept.likely), rel=1e-9
    )


def test_a_coupling_loop_without_room_takes_nothing_and_says_so() -> None:
    found = point(feed={"coupling": "small loop", "small_loop": {"diameter": "1.2 m"}})
    assert found.power_at_loop == Spread.exact(WATTS)
    assert found.figures.swr_at_feed.spread == UNKNOWN
    assert "no room" in found.figures.swr_at_feed.why


def test_without_a_height_nothing_bounds_what_a_coupling_loop_turns_back() -> None:
    design, made = at_no_height()
    found, likely = arriving(design, made), known(stated_ratio(design, made).likely)
    assert found.low == 0.0
    assert known(found.likely) == pytest.approx(WATTS * (1.0 - reflected(likely)), rel=1e-9)
    assert found.high == WATTS


def test_a_size_that_is_not_used_says_nothing_of_the_power() -> None:
    made = free()
    assert stated_coefficient(plain_design(), made) == UNKNOWN
    assert stated_coefficient(by_two(), made) == UNKNOWN
    assert stated_coefficient(plain_design(feed={"coupling": "direct"}), made) == UNKNOWN
    assert arriving(plain_design(), made) == Spread.exact(WATTS)
