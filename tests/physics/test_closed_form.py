"""The closed forms as a second opinion: they agree wherever they reach, and they disagree with a wrong size."""

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from designs import plain_design
from scipy.constants import c

from magsafe.analysis.chain import Chain, chain
from magsafe.analysis.closed_form import Compared, SecondOpinion, second_opinion
from magsafe.analysis.operating_point import operating_point
from magsafe.checks.loop import methods_agree
from magsafe.design.model import Design
from magsafe.design.shape import outline
from magsafe.physics import conductor, inductance, small_loop
from magsafe.spread import Spread

WATT = Spread.exact(1.0)
FIGURES = ("volts", "Q", "efficiency", "reactance")
LOSSY: dict[str, Any] = {
    "capacitor__series_resistance": None,
    "capacitor__quality_factor": {"low": 500, "likely": 800, "high": 2000},
    "loop__joint": [
        {"name": "lugs", "resistance": "2 mohm", "at": "capacitor"},
        {"name": "seam", "resistance": "30 mohm", "at": "opposite"},
        {"name": "sleeves", "resistance": "10 mohm", "at": "spread"},
    ],
}


def made(sides: int | None, thickness: float, share: float, **changes: Any) -> Design:
    """Return a loop of 3 m round: its sides, conductor radius over mean radius, perimeter in wavelengths."""
    rod = {"form": "rod", "outer_diameter": f"{1e3 * 3.0 / np.pi * thickness:.6f} mm", "conductivity": "58 MS/m"}
    shape = {"shape": "circle"} if sides is None else {"shape": "polygon", "sides": sides}
    loop = {**shape, "perimeter": "3.0 m", "conductor": rod}
    return plain_design(loop=loop, transmission__0__frequency=f"{share * c / 3e6:.9f} MHz", **changes)


def chain_of(design: Design) -> Chain:
    return chain(design, design.transmission[0].frequency, outline(design.loop), WATT)


def opinion_of(design: Design) -> SecondOpinion:
    found = second_opinion(design, chain_of(design))
    assert found is not None
    return found


def by_name(found: SecondOpinion) -> dict[str, Compared]:
    return {each.figure: each for each in found.compared}


SIDES = [None, 3, 4, 5, 6, 8, 12, 24]
THICKNESSES = [0.001, 0.004, 0.012, 0.03, 0.0539]


@pytest.mark.parametrize("sides", SIDES)
@pytest.mark.parametrize("thickness", THICKNESSES)
def test_both_methods_agree_wherever_both_reach(sides: int | None, thickness: float) -> None:
    """Over sizes, without and with losses wherever they may sit; a side too short for its thickness is not reached."""
    too_much = []
    for share in (0.002, 0.03, 0.08, 0.15, 0.2, 0.249):
        for changes in ({}, LOSSY):
            design = made(sides, thickness, share, **changes)
            if sides is not None and not inductance.POLYGON_THICKNESS.holds(thickness * sides / (2.0 * np.pi)):
                assert second_opinion(design, chain_of(design)) is None
                continue
            too_much += [
                (share, bool(changes), each.figure, round(each.ratio, 5), round(each.share, 3))
                for each in opinion_of(design).compared
                if not each.share <= 1.0
            ]
    assert not too_much


@pytest.mark.parametrize("sides", [None, 3, 4, 8])
@pytest.mark.parametrize("share", [0.02, 0.1, 0.24])
def test_the_opinion_is_sharp_where_it_can_be(sides: int | None, share: float) -> None:
    """What is allowed is small where the loop is small, and the ratios are near 1: it says something."""
    found = by_name(opinion_of(made(sides, 0.01, share)))
    assert tuple(found) == FIGURES
    grown = 0.25 * (share / 0.25) ** 2
    for each in found.values():
        assert 1.0 - 0.03 - grown < each.least < 1.0 < each.most < 1.0 + 0.03 + grown
        assert abs(each.ratio - 1.0) < 0.02 + grown / 2.0


@pytest.mark.parametrize("sides", [None, 3, 8])
@pytest.mark.parametrize("thickness", [0.002, 0.03])
def test_what_is_allowed_is_the_study_s_error_at_a_quarter_wave_and_its_square_below(
    sides: int | None, thickness: float
) -> None:
    """And of a tiny loop what both methods leave open anyway: a hundredth, and the corners' inductance."""
    error = small_loop.closed_form_error(sides)
    design = made(sides, thickness, 0.002)
    corner = chain_of(design).corner_error
    assert (corner > 1e-4) == (sides is not None)
    for share in (0.002, 0.125, 0.2499):
        found, grown, x = by_name(opinion_of(made(sides, thickness, share))), (share / 0.25) ** 2, np.pi * share
        shunts = (error.least_shunt, small_loop.largest_shunt(thickness))
        less, more = (taken / (1.0 - taken) for taken in (shunt * x * np.tan(x) for shunt in shunts))
        wanted = {
            "volts": (error.voltage_below * grown, error.voltage_above * grown, 0.008),
            "Q": (error.quality_below * grown, error.quality_above * grown, 0.012),
            "efficiency": (0.0, error.efficiency_above * grown, 0.010),
            "reactance": (-min(less, 0.0), more, 0.007),
        }
        for name, (below, above, anyway) in wanted.items():
            assert 1.0 - found[name].least == pytest.approx(below + anyway + corner, abs=8e-4), (share, name)
            assert found[name].most - 1.0 == pytest.approx(above + anyway + corner, abs=8e-4), (share, name)


@pytest.mark.parametrize("sides", [None, 3, 4, 12])
@pytest.mark.parametrize("wrong", [0.9, 1.1])
def test_a_wrong_size_is_seen(sides: int | None, wrong: float) -> None:
    """A closed form of a loop a tenth larger or smaller: area by 21 %, radiation resistance by 46 %."""
    for share in (0.02, 0.08):
        design = made(sides, 0.01, share)
        right = chain_of(design)
        line = right.line
        scaled = replace(
            line,
            perimeter=line.perimeter * wrong,
            area=line.area * wrong**2,
            reach=line.reach * wrong,
            half_height=line.half_height * wrong,
        )
        found = second_opinion(design, replace(right, line=scaled))
        assert found is not None
        names = {each.figure for each in found.compared if each.share > 1.0}
        assert {"efficiency", "reactance"} <= names
        assert max(each.share for each in found.compared) > 3.0


@pytest.mark.parametrize(("field", "factor", "figure"), [("area", 1.1, "efficiency"), ("perimeter", 1.05, "reactance")])
def test_a_wrong_area_or_perimeter_alone_is_seen(field: str, factor: float, figure: str) -> None:
    design = made(6, 0.01, 0.04)
    right = chain_of(design)
    wrong = replace(right, line=replace(right.line, **{field: getattr(right.line, field) * factor}))
    found = second_opinion(design, wrong)
    assert found is not None
    assert by_name(found)[figure].share > 1.0


def test_a_thicker_conductor_than_was_solved_is_seen() -> None:
    design = made(None, 0.01, 0.04)
    found = second_opinion(design, replace(chain_of(design), conductor_radius=0.01 * 3.0 / (2.0 * np.pi) * 1.25))
    assert found is not None
    assert by_name(found)["reactance"].share > 1.0


def test_the_share_counts_what_lies_outside_to_either_side() -> None:
    assert Compared("Q", 1.01, 0.95, 1.02).share == pytest.approx(0.5)
    assert Compared("Q", 0.99, 0.95, 1.02).share == pytest.approx(0.2)
    assert Compared("Q", 0.94, 0.95, 1.02).share == pytest.approx(1.2)
    assert Compared("Q", 1.03, 0.95, 1.02).share == pytest.approx(1.5)
    assert Compared("Q", 1.0, 0.95, 1.02).share == 0.0


ROD = {"form": "rod", "outer_diameter": "22 mm", "conductivity": "58 MS/m"}
NOT_REACHED: list[dict[str, Any]] = [
    {"transmission__0__frequency": "24 MHz"},  # 0.2515 wavelengths
    {"loop__conductor__outer_diameter": "54.2 mm"},  # 0.0542 of the radius
    {"loop__turns": 2, "loop__turn_spacing": "80 mm"},
    {"loop": {"shape": "rectangle", "width": "0.8 m", "height": "0.8 m", "conductor": ROD}},
    {"capacitor": {"kind": "none"}},
]


@pytest.mark.parametrize("changes", NOT_REACHED)
def test_where_the_closed_forms_do_not_reach_there_is_no_opinion(changes: dict[str, Any]) -> None:
    design = plain_design(**changes)
    point = operating_point(design, design.transmission[0])
    assert not point.out_of_range
    assert point.figures.radiation_resistance.spread.known
    assert point.opinion is None
    assert methods_agree(point) is None


def test_just_within_their_range_there_is_one() -> None:
    for changes in ({"transmission__0__frequency": "23.8 MHz"}, {"loop__conductor__outer_diameter": "53.9 mm"}):
        design = plain_design(**changes)
        assert operating_point(design, design.transmission[0]).opinion is not None


def test_the_opinion_leaves_ground_and_overshoot_out() -> None:
    alone = by_name(opinion_of(made(8, 0.01, 0.1)))
    over = by_name(opinion_of(made(8, 0.01, 0.1, site__ground="perfect", loop__centre_height="2 m")))
    louder = by_name(opinion_of(made(8, 0.01, 0.1, margins={"overshoot": "3 dB"})))
    for name in FIGURES:
        assert over[name].ratio == pytest.approx(alone[name].ratio, rel=1e-9)
        assert louder[name].ratio == pytest.approx(alone[name].ratio, rel=1e-9)


@pytest.mark.parametrize("share", [0.05, 0.22])
def test_the_closed_forms_are_those_of_the_short_circuited_line(share: float) -> None:
    """Foster 1944, Balanis (memory) for radiation, tan and cosine of half the perimeter; written out once more here."""
    design = made(None, 0.01, share, **LOSSY)
    right = chain_of(design)
    radius, frequency = 1.5 / np.pi, right.frequency
    own, x = 0.01 * radius, np.pi * share
    inside = complex(conductor.rod_impedance(frequency, 58e6, own)) * 3.0
    lumped = 2.0 * np.pi * frequency * 4e-7 * np.pi * radius * (np.log(8.0 * radius / own) - 2.0) + inside.imag
    reactance = lumped * np.tan(x) / x
    mean = (1.0 + np.sin(2.0 * x) / (2.0 * x)) / (2.0 * np.cos(x) ** 2)
    radiated = 20.0 * np.pi**2 * share**4 * small_loop.FREE_SPACE_IMPEDANCE / (120.0 * np.pi) / np.cos(x) ** 2
    total = radiated + (inside.real + 10e-3) * mean + 30e-3 / np.cos(x) ** 2 + 2e-3 + reactance / 800.0
    slope = (lumped / np.cos(x) ** 2 + reactance) / 2.0
    wanted = {
        "volts": (2.0 / total) ** 0.5 * reactance,
        "Q": slope / total,
        "efficiency": radiated / total,
        "reactance": reactance,
    }
    free = right.likely_free
    solved = {
        "volts": right.voltage("likely", free, 1.0),
        "Q": right.quality("likely", free),
        "efficiency": right.efficiency("likely", free),
        "reactance": free.reactance,
    }
    found = by_name(opinion_of(design))
    for name, value in wanted.items():
        assert found[name].ratio == pytest.approx(solved[name] / value, rel=1e-4), name


def test_the_plain_small_loop_chain_beside_the_solved_one() -> None:
    """Uniform current: omega L, the plain radiation and conductor resistance, a capacitor's loss with its reactance."""
    design = plain_design(
        capacitor__series_resistance=None,
        capacitor__quality_factor={"low": 500, "likely": 800, "high": 2000},
        loop__joint=[{"name": "lugs", "resistance": "2 mohm", "at": "capacitor"}],
        transmission__0__frequency="21 MHz",
    )
    point = operating_point(design, design.transmission[0])
    frequency = 21e6
    radiation = float(small_loop.radiation_resistance(np.pi * 0.25, 1, c / frequency))
    inside = complex(conductor.rod_impedance(frequency, 58e6, 0.011)) * np.pi
    reactance = 2.0 * np.pi * frequency * float(inductance.circle_inductance(0.5, 0.011)) + inside.imag
    total = radiation + inside.real + 2e-3 + reactance / 800.0
    volts, quality, efficiency = (200.0 / total) ** 0.5 * reactance, reactance / total, radiation / total
    assert point.opinion is not None
    figures = point.figures
    solved = (figures.capacitor_peak_voltage, figures.unloaded_q, figures.conductor_efficiency)
    for ratio, plain, figure in zip(point.opinion.plain, (volts, quality, efficiency), solved, strict=True):
        assert ratio == pytest.approx(plain / (figure.spread.likely or 0.0))


def test_agreement_is_told_with_what_was_allowed() -> None:
    design = plain_design()
    point = operating_point(design, design.transmission[0])
    finding = methods_agree(point)
    assert finding is not None
    assert finding.verdict == "clear"
    assert finding.id == "loop.methods_agree"
    assert "solved against closed forms, in free space" in finding.because
    assert all(f"{name} " in finding.because for name in FIGURES)
    assert finding.because.count("allowed") == 4


def test_disagreement_leaves_it_unproven_and_names_the_worst() -> None:
    design = plain_design()
    point = operating_point(design, design.transmission[0])
    compared = (
        Compared("volts", 1.01, 0.99, 1.02),
        Compared("Q", 1.2, 0.97, 1.03),
        Compared("efficiency", 0.9, 0.95, 1.05),
    )
    assert point.opinion is not None
    finding = methods_agree(replace(point, opinion=replace(point.opinion, compared=compared)))
    assert finding is not None
    assert finding.verdict == "unproven"
    assert "Q +20.0 % (-3.0 % to +3.0 % allowed)" in finding.because
    assert "The Q disagree" in finding.because
    assert "neither is proven" in finding.because
