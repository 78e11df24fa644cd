"""What the ground may do to a loop, held against the half-space integral in another form, and its bracket."""

from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from designs import plain_design
from scipy.constants import c, epsilon_0, mu_0

from magsafe.analysis.chain import chain
from magsafe.analysis.flow import Flow, flow
from magsafe.analysis.surroundings import Surroundings, surroundings
from magsafe.design.model import Design
from magsafe.design.shape import outline
from magsafe.physics import ground, inductance
from magsafe.physics.arrays import ComplexArray
from magsafe.physics.far_field import FarField
from magsafe.physics.half_space import relative_permittivity
from magsafe.physics.half_space_ring import ring_resistance_ratio
from magsafe.physics.wave_spectrum import WaveSpectrum
from magsafe.spread import Spread

PLANES = ["vertical", "horizontal"]


def design_at(megahertz: float, **changes: Any) -> Design:
    return plain_design(transmission__0__frequency=f"{megahertz} MHz", **changes)


def around(megahertz: float = 7.1, **changes: Any) -> Surroundings:
    return surroundings(design_at(megahertz, **changes), megahertz * 1e6)


def small(megahertz: float, **changes: Any) -> dict[str, Any]:
    """A loop of a 500th of a wavelength round: a magnetic dipole; its electric moment counts for less than 1 %."""
    diameter = 0.002 * c / (np.pi * megahertz * 1e6)
    conductor = {"form": "rod", "outer_diameter": f"{40.0 * diameter:.6f} mm", "conductivity": "58 MS/m"}
    return {"loop__diameter": f"{diameter:.9f} m", "loop__conductor": conductor, **changes}


def shares(found: Surroundings) -> list[float]:
    """The least resistances over that in free space, which the capacitor's place hardly moves."""
    return [state.radiated / found.free[0].radiation for state in found.least]


def half_space(vertical: bool, soil: tuple[float, float], megahertz: float, height: float) -> float:
    """Resistance of a small loop over soil (S/m, permittivity), over that in free space; height in wavelengths.

    Sommerfeld's integral of a magnetic dipole over a half-space (Wait, Electromagnetic Waves in Stratified Media;
    memory), as the reference notes have it in section 7.
    """
    relative = soil[1] - 1j * soil[0] / (2.0 * np.pi * megahertz * 1e6 * epsilon_0)

    def weight(upward: Any) -> Any:
        lateral = 1.0 - upward**2
        into = np.sqrt(relative - lateral)
        into = np.where(into.imag > 0.0, -into, into)
        across = (upward - into) / (upward + into)
        along = (relative * upward - into) / (relative * upward + into)
        return 0.75 * (along - upward**2 * across) if vertical else 1.5 * lateral * across

    nodes, weights = np.polynomial.legendre.leggauss(120)
    u, phase = (nodes + 1.0) / 2.0, 4.0 * np.pi * height
    radiating = np.sum(weights / 2.0 * weight(u + 0j) * np.exp(-1j * phase * u))
    nodes, weights = np.polynomial.legendre.leggauss(16)
    edges = np.concatenate(([0.0], np.geomspace(1e-3, 45.0, 24))) / phase
    near = 0.0 + 0.0j
    for low, high in pairwise(edges):
        v = low + (high - low) * (nodes + 1.0) / 2.0
        near += np.sum(weights * (high - low) / 2.0 * weight(-1j * v) * np.exp(-phase * v))
    return float(1.0 + (radiating + 1j * near).real)


def test_the_integral_is_that_of_the_reference_table() -> None:
    """Reference notes, section 7, at 7.1 MHz, three digits printed."""
    average, poor = (0.005, 13.0), (0.001, 5.0)
    printed = [(True, average, 0.25, 0.857), (True, poor, 0.3, 0.841), (False, average, 0.2, 0.737)]
    for vertical, soil, height, ratio in printed:
        assert half_space(vertical, soil, 7.1, height) == pytest.approx(ratio, abs=0.0006)


def over_soil(alone: Flow, soil: tuple[float, float], frequency: float) -> float:
    """Resistance of a whole loop over soil (S/m, permittivity) with a given current [ohm].

    The current's plane waves, each reflected by Fresnel's coefficients, on the current again (Sommerfeld's integral in
    Weyl's form; memory): upward ones with the cosine of their angle from 1 to 0, then the evanescent ones.
    """
    wire, k = alone.segments(), 2.0 * np.pi * frequency / c
    relative = soil[1] - 1j * soil[0] / (2.0 * np.pi * frequency * epsilon_0)
    pieces = []
    for share in (0.5 - 0.75**0.5 / 3.0, 0.5 + 0.75**0.5 / 3.0):  # Gauss of two points on each segment
        current = 0.5 * (wire.current_start * (1.0 - share) + wire.current_end * share)
        pieces.append((wire.start + (wire.end - wire.start) * share, current[:, None] * (wire.end - wire.start)))
    points = np.concatenate([place for place, _ in pieces])
    moments: ComplexArray = np.concatenate([moment for _, moment in pieces])

    def reflected(upward: complex, bearings: int) -> complex:
        lateral = float(np.sqrt(1.0 - upward**2 + 0j).real)
        turned = 2.0 * np.pi * (np.arange(bearings) + 0.5) / bearings
        cosine, sine = np.cos(turned), np.sin(turned)
        across = np.exp(1j * k * lateral * (cosine[:, None] * points[:, 0] + sine[:, None] * points[:, 1]))
        height = np.exp(-1j * k * upward * points[:, 2])
        down, up = (across * height) @ moments, (across.conj() * height) @ moments.conj()
        into = np.sqrt(relative - lateral**2 + 0j)
        into = -into if into.imag > 0.0 else into
        transverse = [-sine * each[:, 0] + cosine * each[:, 1] for each in (down, up)]
        radial = [cosine * each[:, 0] + sine * each[:, 1] for each in (down, up)]
        first = (upward - into) / (upward + into) * transverse[0] * transverse[1]
        second = (relative * upward - into) / (relative * upward + into)
        second = second * (-upward * radial[0] - lateral * down[:, 2]) * (upward * radial[1] - lateral * up[:, 2])
        return complex((first + second).mean())

    nodes, weights = np.polynomial.legendre.leggauss(48)
    total = sum(w / 2.0 * reflected(complex((u + 1.0) / 2.0), 64) for u, w in zip(nodes, weights, strict=True))
    nodes, weights = np.polynomial.legendre.leggauss(6)
    edges = np.concatenate(([0.0], np.geomspace(1e-3, 14.0, 14))) / (2.0 * k * points[:, 2].min())
    reach = float(np.abs(points[:, :2]).max())
    for low, high in pairwise(edges):
        for u, w in zip(nodes, weights, strict=True):
            v = low + (high - low) * (u + 1.0) / 2.0
            total += 1j * w * (high - low) / 2.0 * reflected(-1j * v, int(64 + 4.0 * k * v * reach))
    radiated = FarField.of(wire, frequency).power if alone.image else alone.radiation
    return radiated + float(mu_0 * c * k**2 / (4.0 * np.pi) * total.real)


@pytest.mark.parametrize("soil", [(0.005, 13.0), (0.003, 3.0)])
@pytest.mark.parametrize("plane", PLANES)
def test_both_integrals_agree_for_a_small_loop(plane: str, soil: tuple[float, float]) -> None:
    design = design_at(7.1, **small(7.1), loop__plane=plane, site__ground="average", loop__centre_height="6.3336 m")
    alone = flow(design, 7.1e6, None if plane == "horizontal" else "side", image=False)
    dipole = half_space(plane == "vertical", soil, 7.1, 0.15)
    assert over_soil(alone, soil, 7.1e6) / alone.radiation == pytest.approx(dipole, rel=0.003)


SOILS = [
    # plane, S/m, permittivity, MHz, height in wavelengths: among them those that fall shortest of both simple cases
    ("vertical", 0.003, 3.0, 7.1, 0.22),
    ("vertical", 0.001, 3.0, 3.0, 0.22),
    ("vertical", 0.001, 3.0, 1.8, 0.22),
    ("vertical", 5.0, 80.0, 7.1, 0.33),
    ("vertical", 0.005, 13.0, 7.1, 0.75),
    ("horizontal", 0.00001, 13.0, 3.0, 0.36),
    ("horizontal", 0.0001, 13.0, 7.1, 0.36),
    ("horizontal", 5.0, 80.0, 7.1, 0.1),
    ("horizontal", 0.005, 13.0, 7.1, 0.75),
]


@pytest.mark.parametrize(("plane", "conductivity", "permittivity", "megahertz", "height"), SOILS)
def test_a_soil_stated_is_what_a_small_loop_draws_over_it(
    plane: str, conductivity: float, permittivity: float, megahertz: float, height: float
) -> None:
    """One soil, no span: its own resistance is the likely and the most; with less the sheet would tell more volts.

    Each end may lie farther out by a hundredth, never farther in: the electric moment is under 0.5 %.
    """
    metres = height * c / (megahertz * 1e6)
    there = small(
        megahertz,
        loop__plane=plane,
        site__ground={"conductivity": f"{1e3 * conductivity:.5f} mS/m", "permittivity": permittivity},
    )
    true = half_space(plane == "vertical", (conductivity, permittivity), megahertz, height)
    form = ground.image_ratio_vertical if plane == "vertical" else ground.image_ratio_horizontal
    least = min(1.0, float(form(4.0 * np.pi * height)), true)
    known = around(megahertz, loop__centre_height=f"{metres:.6f} m", **there)
    assert known.likely.flow is known.free[0]
    assert known.likely.radiated / known.free[0].radiation == pytest.approx(true, rel=0.005)
    most = [state.radiated / known.free[0].radiation for state in known.most]
    assert least - 0.016 < min(shares(known)) <= max(shares(known)) < least + 0.0035
    assert true - 0.0035 < min(most) <= max(most) < true * 1.016
    assert max(shares(known)) <= true + 3.5e-3  # the charge of so small a loop still tells top from bottom
    assert known.ground_known
    assert known.height_known


@pytest.mark.parametrize(("plane", "conductivity", "permittivity", "megahertz", "height"), SOILS)
def test_no_soil_falls_below_the_bracket_of_any_height(
    plane: str, conductivity: float, permittivity: float, megahertz: float, height: float
) -> None:
    """Less resistance than the bracket's low end would be more volts than the sheet tells."""
    soil = {"conductivity": f"{1e3 * conductivity:.5f} mS/m", "permittivity": permittivity}
    true = half_space(plane == "vertical", (conductivity, permittivity), megahertz, height)
    anywhere = around(megahertz, **small(megahertz, loop__plane=plane, site__ground=soil))
    assert min(shares(anywhere)) <= true
    assert not anywhere.most
    assert not anywhere.over
    assert not anywhere.ground_known
    assert not anywhere.height_known
    assert (anywhere.likely.flow.image, anywhere.likely.radiated) == (False, anywhere.free[0].radiation)


LARGER = [
    # MHz (0.22 to 1.05 wavelengths round), plane, place of the capacitor, height in metres, S/m, permittivity
    (21.0, "vertical", "side", 3.0, (0.01, 3.0)),
    (33.0, "vertical", "top", 2.0, (0.003, 3.0)),
    (33.0, "horizontal", None, 1.5, (0.0001, 3.0)),
    (34.0, "vertical", "side", 0.8, (0.005, 13.0)),
    (40.0, "vertical", "bottom", 2.0, (5.0, 80.0)),
    (40.0, "horizontal", None, 2.5, (0.03, 20.0)),
    (100.0, "vertical", "bottom", 1.0, (0.005, 13.0)),
    (100.0, "vertical", "side", 2.0, (5.0, 80.0)),
    (100.0, "horizontal", None, 1.5, (0.001, 5.0)),
]


@pytest.mark.parametrize(("megahertz", "plane", "place", "metres", "soil"), LARGER)
def test_a_larger_loop_over_soil_is_bracketed_by_both_of_its_currents(
    megahertz: float, plane: str, place: str | None, metres: float, soil: tuple[float, float]
) -> None:
    """With the current that it has alone and with the one that it has over its image, and by how far they differ."""
    stated = {"conductivity": f"{1e3 * soil[0]:.4f} mS/m", "permittivity": soil[1]}
    changes = {} if place is None else {"capacitor__position": place}
    there = {"loop__plane": plane, "site__ground": stated, "loop__centre_height": f"{metres} m", **changes}
    design = design_at(megahertz, **there)
    alone, image = (flow(design, megahertz * 1e6, place, image) for image in (False, True))
    true = [over_soil(current, soil, megahertz * 1e6) for current in (alone, image)]
    apart, near = abs(true[0] - true[1]), 0.005 * max(alone.radiation, *true)
    found = around(megahertz, **there)
    assert found.likely.radiated == pytest.approx(true[0], abs=near)
    assert [float(over.radiated[0]) for over in found.over] == pytest.approx(true, abs=near)
    least = max(0.0, min(alone.radiation, image.radiation, min(true) - apart))
    assert [state.radiated for state in found.least] == pytest.approx([least] * 2, abs=3.0 * near)
    assert [state.radiated for state in found.most] == pytest.approx([max(true) + apart] * 2, abs=3.0 * near)
    assert 0.0 <= max(state.radiated for state in found.least) <= min(true)
    assert min(state.radiated for state in found.most) >= max(true)


SPANS: list[tuple[Any, tuple[float, float], tuple[float, float]]] = [
    # ground, ends of its conductivity [S/m] and of its permittivity as the list of soils has them (common practice)
    ("average", (0.0015, 0.015), (8.0, 20.0)),
    ("poor", (0.0003, 0.003), (3.0, 10.0)),
    ("sea water", (3.0, 6.0), (70.0, 85.0)),
    ("fresh water", (1e-4, 0.03), (78.0, 88.0)),
    (
        {"conductivity": {"low": "1 mS/m", "likely": "2 mS/m", "high": "40 mS/m"}, "permittivity": 9},
        (0.001, 0.04),
        (9.0, 9.0),
    ),
    (None, (1e-5, 10.0), (1.0, 90.0)),
]
STANDS: list[tuple[float, str, float]] = [
    (1.8, "vertical", 0.6),
    (3.6, "horizontal", 20.0),
    (7.1, "vertical", 0.6),
    (7.1, "horizontal", 1.5),
    (14.2, "vertical", 5.0),
    (30.0, "vertical", 1.0),
    (100.0, "vertical", 3.0),
]


@pytest.mark.parametrize(("megahertz", "plane", "metres"), STANDS)
@pytest.mark.parametrize(
    ("name", "conductivity", "permittivity"), SPANS, ids=["average", "poor", "sea", "lake", "own", "any"]
)
def test_both_ends_hold_every_soil_of_the_span(
    name: Any,
    conductivity: tuple[float, float],
    permittivity: tuple[float, float],
    megahertz: float,
    plane: str,
    metres: float,
) -> None:
    """Forty by fifteen soils: between those that are sampled none draws more or less by a hundredth."""
    changes = {"capacitor__position": "bottom"} if plane == "vertical" else {}
    found = around(megahertz, site__ground=name, loop__plane=plane, loop__centre_height=f"{metres} m", **changes)
    frequency = megahertz * 1e6
    soils = relative_permittivity(
        np.geomspace(*permittivity, 15), np.geomspace(*conductivity, 40)[:, None], frequency
    ).ravel()
    assert [over.flow.image for over in found.over[:2]] == [False, True]
    for over in found.over[:2]:
        spectrum = WaveSpectrum.of(over.flow.segments(), frequency, soils)
        added = spectrum.power(soils, np.zeros(1))[:, 0] - spectrum.free_power
        true = added + (spectrum.free_power if over.flow.image else over.alone)
        assert max(state.radiated for state in found.least) <= true.min()
        assert min(state.radiated for state in found.most[:2]) >= true.max()
        gap = 0.01 * over.alone if true.min() < over.alone else 0.04 * true.min()  # there free space is the least
        assert over.radiated.min() - true.min() <= gap
        assert true.max() <= 1.01 * over.radiated.max()
        assert over.radiated.min() >= true.min() - 0.01 * over.alone
        assert over.radiated.max() <= 1.01 * true.max()


@pytest.mark.parametrize("plane", PLANES)
@pytest.mark.parametrize(("name", "conductivity", "permittivity"), SPANS[:4], ids=["average", "poor", "sea", "lake"])
def test_the_span_of_a_ring_is_that_of_its_closed_form_spectrum(
    name: str, conductivity: tuple[float, float], permittivity: tuple[float, float], plane: str
) -> None:
    """At a 300th of a wavelength round the current is even: `half_space_ring`, held against published values.

    Over dry soil the little charge that there is counts for some hundredths: it grows as the current's field does.
    """
    found = around(0.3, site__ground=name, loop__plane=plane, loop__centre_height="0.9 m")
    soils = relative_permittivity(np.geomspace(*permittivity, 15), np.geomspace(*conductivity, 40)[:, None], 3e5)
    wavenumber = 6e5 * np.pi / c
    ratio = ring_resistance_ratio(plane == "vertical", soils, 1.8 * wavenumber, 0.5 * wavenumber)
    most = max(state.radiated for state in found.most) / found.free[0].radiation
    assert ratio.max() < most < 1.06 * ratio.max()
    assert max(shares(found)) < ratio.min()
    drawn = np.concatenate([over.radiated / over.alone for over in found.over])
    assert drawn.max() == pytest.approx(ratio.max(), rel=0.05)
    assert drawn.min() == pytest.approx(ratio.min(), rel=0.05)


def test_the_likely_soil_is_the_one_that_the_name_has() -> None:
    """0.005 S/m and 13, common practice for average soil; every place of the capacitor has its pair of currents."""
    found = around(site__ground="average", loop__centre_height="2 m")
    assert found.likely.radiated == pytest.approx(over_soil(found.free[0], (0.005, 13.0), 7.1e6), rel=0.003)
    assert [over.flow for over in found.over[:4]] == list(found.free)
    assert [over.flow.image for over in found.over] == [False] * 4 + [True] * 4
    assert [over.alone for over in found.over] == [each.radiation for each in found.free] * 2
    assert found.ground_known
    for over in found.over:
        most = [state for state in found.most if state.flow is over.flow]
        assert sorted(state.shift for state in most) == sorted({over.shift.min(), over.shift.max()})
        assert all(state.radiated >= over.radiated.max() for state in most)
        assert over.permittivity[0] == pytest.approx(relative_permittivity(13.0, 0.005, 7.1e6), rel=1e-12)
        assert over.sky.shape == (len(over.permittivity), 3)
        assert (over.sky.sum(axis=1) < over.radiated).all()


def test_without_a_soil_any_may_be_there_and_none_is_likely() -> None:
    found = around(site__ground=None, loop__centre_height="2 m")
    assert not found.ground_known
    assert found.height_known
    assert (found.likely.flow.image, found.likely.radiated) == (False, found.free[0].radiation)
    for name in ("average", "sea water", "poor", "fresh water", "very good"):
        there = around(site__ground=name, loop__centre_height="2 m")
        for least, own, over in zip(found.least, found.over[:8], there.over, strict=True):
            most = [state for state in found.most[:12] if state.flow is own.flow]
            assert least.radiated <= over.radiated.min()
            assert min(state.radiated for state in most) >= over.radiated.max()
            assert min(state.shift for state in most) <= over.shift.min() + 1e-3
            assert max(state.shift for state in most) >= over.shift.max() - 1e-3


@pytest.mark.parametrize(
    ("soil", "shortfall"),
    [
        ({"conductivity": "5 mS/m", "permittivity": {"low": 2.9, "likely": 5, "high": 10}}, 0.145),
        ({"conductivity": "5 mS/m", "permittivity": {"low": 3, "likely": 5, "high": 10}}, 0.095),
        (None, 0.145),
        ("average", 0.095),
    ],
)
def test_the_least_permittivity_decides_what_soil_may_take_at_any_height(soil: Any, shortfall: float) -> None:
    """Of any soil 0.145, from a permittivity of 3 upwards 0.095 of free space (half-space integral, computed)."""
    found = around(site__ground=soil, capacitor__position="side")
    alone = found.free[0].radiation
    over = [state for state in found.least if state.flow.image]
    assert len(over) > 10
    for state in over:
        wanted = min(alone, state.flow.radiation) - (shortfall + 0.03) * alone
        assert state.radiated == pytest.approx(max(0.0, wanted), rel=1e-9)
    least = float(ground.image_ratio_vertical(np.linspace(0.1, 30.0, 3000)).min())
    assert min(shares(found)) <= least - shortfall


@pytest.mark.parametrize(("megahertz", "share"), [(36.1, 0.3783), (36.4, 0.3814)])
def test_above_0_38_wavelengths_the_whole_of_the_image_may_be_lost(megahertz: float, share: float) -> None:
    """Up to there the dipole's shortfall below free space and image holds (0.095 upright; its integral)."""
    changes = {"site__ground": "average", "capacitor__position": "side"}
    design = design_at(megahertz, **changes)
    assert outline(design.loop).perimeter * megahertz * 1e6 / c == pytest.approx(share, abs=5e-4)
    found = around(megahertz, **changes)
    alone, other = found.free[0], 0
    for state in found.least:
        if not state.flow.image:
            continue
        over = state.flow
        moved = abs(complex(over.radiation - alone.radiation, over.reactance - alone.reactance))
        by_dipole = max(0.0, min(alone.radiation, over.radiation) - 0.125 * alone.radiation)
        by_image = max(0.0, alone.radiation * 0.97 - 1.05 * moved)
        other += abs(by_dipole - by_image) > 0.01 * alone.radiation
        assert state.radiated == pytest.approx(by_image if share > 0.38 else by_dipole, rel=1e-9)
    assert other > 5
    assert [state.flow.image for state in found.least[:2]] == [False, True]


def test_no_resistance_is_negative_however_near_the_ground() -> None:
    for megahertz in (7.1, 21.0, 34.0, 40.0, 100.0):
        for plane, metres in (("vertical", "0.56 m"), ("horizontal", "0.1 m"), ("horizontal", "1 m")):
            for soil in ("average", "sea water", "poor"):
                found = around(megahertz, loop__plane=plane, loop__centre_height=metres, site__ground=soil)
                assert all(state.radiated >= 0.0 for state in (*found.least, *found.fields))


def test_a_missing_height_goes_below_every_height_of_a_small_loop() -> None:
    anywhere = min(shares(around(**small(7.1, site__ground="average"))))
    for metres in np.linspace(1.0, 43.0, 22):
        there = around(**small(7.1, site__ground="average", loop__centre_height=f"{metres:.3f} m"))
        assert 0.0 < anywhere <= min(shares(there))


@pytest.mark.parametrize("ground_name", ["average", "perfect"])
@pytest.mark.parametrize(("megahertz", "plane"), [(21.0, "vertical"), (30.0, "vertical"), (30.0, "horizontal")])
def test_a_missing_height_holds_the_volts_and_the_reactance_of_every_height(
    megahertz: float, plane: str, ground_name: str
) -> None:
    """Low down the image raises the reactance near the anti-resonance, and the charge's image takes radiation away.

    Nearer to soil than 1.2 radii it may raise the reactance by more than either: what holds there are the solved ones.
    """

    def highest(corners: str = "every", **changes: Any) -> tuple[float, float]:
        design = design_at(megahertz, site__ground=ground_name, loop__plane=plane, **changes)
        made = chain(design, megahertz * 1e6, outline(design.loop), Spread.exact(100.0))
        return made.dangerous(made.voltage, "bare"), max(corner.reactance for corner in getattr(made, corners))

    volts, ohms = highest()
    low = (0.55, 0.58, 0.7, 0.9) if plane == "vertical" else (0.08, 0.3)
    for metres in (*low, 1.15, 1.4, 1.75, 2.0, 2.35, 3.0, 4.6, 7.0, 12.0):
        near_soil = ground_name != "perfect" and metres < 1.2 * 0.5
        there = highest("least" if near_soil else "every", loop__centre_height=f"{metres} m")
        assert there[0] <= volts * (1.0 + 1e-12), metres
        assert there[1] <= ohms * (1.0 + 1e-12), metres


def test_a_flat_loop_low_down_may_lose_all_its_resistance_but_not_more() -> None:
    """The image cancels it towards the ground; what radiates and what heats the soil are never negative.

    Which soil it is decides: over average soil a low loop draws many times as much, and the image bounds the low end.
    """
    flat: dict[str, Any] = {"loop__plane": "horizontal", "site__ground": "average"}
    assert min(shares(around(**flat))) == 0.0
    for metres, image in (("0.3 m", 0.001), ("0.61 m", 0.0034), ("1 m", 0.009)):
        there = around(loop__centre_height=metres, **flat)
        assert shares(there) == pytest.approx([there.least[1].flow.radiation / there.free[0].radiation] * 2, rel=1e-9)
        assert shares(there)[0] == pytest.approx(image, rel=0.2)
        assert min(over.radiated.min() for over in there.over) > 5.0 * there.free[0].radiation
    there = around(loop__centre_height="3 m", **flat)
    assert all(0.0 < share < 1.0 for share in shares(there))


HEIGHTS = (0.05, 0.1, 0.2, 0.3, 0.45, 0.7)


@pytest.mark.parametrize("plane", PLANES)
@pytest.mark.parametrize("height", HEIGHTS)
def test_the_solved_image_of_a_tiny_loop_is_that_of_a_dipole(plane: str, height: float) -> None:
    """Wait, Electromagnetic Waves in Stratified Media (memory); height in wavelengths."""
    metres = height * c / 7.1e6
    found = around(**small(7.1, loop__plane=plane, site__ground="perfect", loop__centre_height=f"{metres:.6f} m"))
    form = ground.image_ratio_vertical if plane == "vertical" else ground.image_ratio_horizontal
    wanted = float(form(4.0 * np.pi * height))
    assert found.likely.flow.image
    assert found.likely.radiated / found.free[0].radiation == pytest.approx(wanted, rel=0.01)


def test_the_solved_image_of_a_finite_loop_departs_from_the_dipole_s() -> None:
    """Its charge makes an electric moment, whose image tells top from bottom: more so the larger the loop."""
    departs = []
    for megahertz in (1.0, 7.1, 14.2, 21.0, 30.0):
        metres = 0.2 * c / (megahertz * 1e6)
        found = around(megahertz, site__ground="perfect", loop__centre_height=f"{metres:.6f} m")
        dipole = float(ground.image_ratio_vertical(4.0 * np.pi * 0.2))
        top, bottom, side, other = (s.radiated / found.free[0].radiation / dipole for s in found.least[4:])
        assert top < side < bottom
        assert other == pytest.approx(side, rel=1e-6)
        departs.append(bottom - top)
    assert departs == sorted(departs)
    assert departs[0] < 0.05
    assert departs[-1] > 0.5


@pytest.mark.parametrize("plane", PLANES)
@pytest.mark.parametrize("metres", [0.55, 1.0, 3.0])
def test_the_image_takes_away_its_mutual_inductance(plane: str, metres: float) -> None:
    """Two circles of the same current, their centres twice the height apart: on one axis, or in one plane.

    Maxwell's and Neumann's filaments of even current, hence at a 600th of a wavelength.
    """
    found = around(0.5, loop__plane=plane, site__ground="perfect", loop__centre_height=f"{metres} m")
    if plane == "vertical":
        mutual = -inductance.coplanar_mutual_inductance(0.5, 0.5, 2.0 * metres)
    else:
        mutual = float(inductance.coaxial_mutual_inductance(0.5, 0.5, 2.0 * metres))
    taken = found.free[0].reactance - found.likely.flow.reactance
    assert taken == pytest.approx(2.0 * np.pi * 0.5e6 * mutual, rel=0.015)


def test_free_space_is_exactly_that() -> None:
    found = around()
    assert [state.flow.image for state in found.least] == [False] * 4
    assert found.least == found.most == found.fields
    assert [state.radiated for state in found.least] == [alone.radiation for alone in found.free]
    assert found.likely == found.least[0]
    assert found.ground_known
    assert found.height_known


def test_a_perfect_plane_may_be_there_or_not() -> None:
    """Its likely state is the image's; both ends hold free space too, for every place of the capacitor."""
    for metres, more in ((2.0, True), (13.0, False)):
        found = around(site__ground="perfect", loop__centre_height=f"{metres} m")
        image = float(ground.image_ratio_vertical(4.0 * np.pi * 7.1e6 / c * metres))
        assert (image > 1.0) == more
        assert found.likely.radiated / found.free[0].radiation == pytest.approx(image, rel=0.1)
        assert found.least == found.most == found.fields
        assert [state.flow.image for state in found.least] == [False] * 4 + [True] * 4
        assert all(state.radiated == state.flow.radiation for state in found.least)


@pytest.mark.parametrize("metres", ["0.9 m", "2 m", "5 m"])
def test_fields_over_soil_are_those_of_free_space_at_its_least_and_of_the_image(metres: str) -> None:
    """The image's with what the plane leaves, or with less where a soil that reflects as the plane leaves less."""
    found = around(30.0, site__ground="average", loop__centre_height=metres)
    assert [state.flow.image for state in found.fields] == [False] * 4 + [True] * 4
    assert [s.radiated for s in found.fields[:4]] == [s.radiated for s in found.least[:4]]
    for state, alone, over in zip(found.fields[4:], found.over[:4], found.over[4:], strict=True):
        soil = float((np.minimum(alone.radiated, over.radiated) - np.abs(alone.radiated - over.radiated)).min())
        soil -= 0.01 * alone.alone + 0.04 * max(0.0, soil - alone.alone)
        assert state.flow is over.flow
        assert state.radiated == pytest.approx(min(state.flow.radiation, soil), rel=1e-9)
    assert 0 < sum(state.radiated == state.flow.radiation for state in found.fields[4:]) < 4
    assert len({round(state.radiated, 9) for state in found.least[4:]}) > 1  # each place of the capacitor has its own


def test_where_the_capacitor_is_stated_only_that_place_is_taken() -> None:
    found = around(site__ground="perfect", loop__centre_height="2 m", capacitor__position="bottom")
    assert len(found.free) == 1
    assert [len(each) for each in (found.least, found.most, found.fields)] == [2, 2, 2]


COPPER = {"form": "rod", "outer_diameter": "10 mm", "conductivity": "58 MS/m"}
POINTS = [["3 m", "5 m"], ["4.2 m", "5 m"], ["4.2 m", "5.8 m"], ["3 m", "5.8 m"]]
SHAPES: list[tuple[dict[str, Any], float, float]] = [
    # loop, how far the middle of its uppermost and of its rightmost side lies from its centre
    ({"shape": "circle", "diameter": "1 m"}, 0.5, 0.5),
    ({"shape": "polygon", "sides": 6, "across_flats": "1 m"}, 0.5, 0.5),
    ({"shape": "rectangle", "width": "1.2 m", "height": "0.8 m"}, 0.4, 0.6),
    ({"shape": "outline", "points": POINTS}, 0.4, 0.6),
]


@pytest.mark.parametrize(("loop", "up", "across"), SHAPES, ids=[str(loop["shape"]) for loop, _, _ in SHAPES])
def test_the_port_is_where_the_capacitor_is_said_to_be(loop: dict[str, Any], up: float, across: float) -> None:
    """The middle of the uppermost, lowest or rightmost (y) side; of a loop lying flat that along x."""
    there: dict[str, Any] = {"loop": {**loop, "conductor": COPPER, "centre_height": "3 m"}}
    for place, wanted in (("top", (0, 0, 3 + up)), ("bottom", (0, 0, 3 - up)), ("side", (0, across, 3))):
        wire = around(capacitor__position=place, **there).free[0].segments()
        assert 0.5 * (wire.start[0] + wire.end[0]) == pytest.approx(np.array(wanted), abs=2e-3), place
    there["loop"]["plane"] = "horizontal"
    wire = around(**there).free[0].segments()
    assert 0.5 * (wire.start[0] + wire.end[0]) == pytest.approx(np.array([across, 0.0, 3.0]), abs=2e-3)


def test_a_missing_height_goes_below_every_height_of_a_large_loop() -> None:
    """Above 0.38 wavelengths the dipole proves nothing: all that the image adds may be lost at any height."""
    changes: dict[str, Any] = {"site__ground": "average", "capacitor__position": "side"}
    for megahertz in (38.0, 100.0):
        anywhere = min(shares(around(megahertz, **changes)))
        for metres in (0.6, 0.9, 1.5, 2.5, 3.9):
            there = around(megahertz, loop__centre_height=f"{metres} m", **changes)
            assert anywhere <= min(shares(there)) + 1e-12, (megahertz, metres)


@pytest.mark.parametrize("plane", PLANES)
def test_without_a_height_no_image_stands_anywhere_and_the_fields_are_those_of_its_absence(plane: str) -> None:
    """As strong as with the least resistance of any height; where an image would be nobody has said."""
    found = around(21.0, site__ground="average", loop__plane=plane)
    assert [state.flow for state in found.fields] == list(found.free)
    least = min(state.radiated for state in found.least)
    assert all(state.radiated == least for state in found.fields)
    assert any(state.flow.image for state in found.least)
