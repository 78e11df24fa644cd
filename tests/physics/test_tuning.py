"""What a capacitor tunes: against the lumped circuit, the Fourier series of the ring, and differences of the solver."""

import warnings
from math import log, pi, sqrt
from typing import Any

import numpy as np
import pytest
from designs import MakeDesign
from scipy.constants import c, mu_0

import magsafe
from magsafe.analysis import tuning
from magsafe.analysis.chain import Chain
from magsafe.analysis.flow import flow
from magsafe.analysis.operating_point import OperatingPoint, operating_point
from magsafe.checks.sheet import Finding
from magsafe.design.model import Design
from magsafe.physics import round_loop
from magsafe.spread import Spread


def point(design: Design) -> OperatingPoint:
    return operating_point(design, design.transmission[0])


def range_of(design: Design) -> tuning.TuningRange:
    ends = tuning.capacitance_ends(design.capacitor)
    assert ends is not None
    return tuning.tuning_range(tuning.needed_capacitance(design), ends)


def chain_of(design: Design) -> Chain:
    made = point(design).chain
    assert made is not None
    return made


def finding(design: Design, name: str) -> Finding:
    return next(f for f in magsafe.check(design).all_findings() if f.id == name)


def test_a_small_ring_tunes_where_its_inductance_and_the_capacitor_resonate(design: MakeDesign) -> None:
    """f = 1 / (2 pi sqrt(LC)), L = mu0 R (ln(8 R / a) - 2) of a ring with a thin skin (Grover, memory)."""
    made = design(capacitor__capacitance={"min": "20 nF", "max": "100 nF"}, transmission__0__frequency="0.4 MHz")
    inductance = mu_0 * 0.5 * (log(8.0 * 0.5 / 11e-3) - 2.0)
    found = range_of(made)
    for spread, farads in ((found.lowest, 100e-9), (found.highest, 20e-9)):
        lumped = 1.0 / (2.0 * pi * sqrt(inductance * farads))
        assert spread.likely == pytest.approx(lumped, rel=0.01)
        assert spread.likely is not None
        assert spread.low is not None
        assert spread.high is not None
        assert spread.low < spread.likely < spread.high


def test_a_small_ring_tunes_by_half_of_frequency_over_capacitance(design: MakeDesign) -> None:
    """df/dC = -f / 2C of a lumped circuit; what the taper takes off at a hundredth of a wavelength is 0.1 %."""
    made = point(design(transmission__0__frequency="1.0 MHz"))
    assert made.chain is not None
    capacitance = made.figures.tuning_capacitance.spread.likely or 0.0
    rate = tuning.tuning_rate(made.chain).likely or 0.0
    assert rate == pytest.approx(1e6 / (2.0 * capacitance), rel=2e-3)


@pytest.mark.parametrize("megahertz", [7.1, 14.2, 25.0, 33.0])
@pytest.mark.parametrize("ground", ["none", "perfect"])
def test_the_rate_is_the_difference_of_two_solutions(design: MakeDesign, megahertz: float, ground: str) -> None:
    def at(frequency: float) -> Design:
        return design(
            transmission__0__frequency=f"{frequency:.9f} MHz", site__ground=ground, loop__centre_height="1.2 m"
        )

    step = 1e-4 * megahertz
    needed = [
        point(at(f)).figures.tuning_capacitance.spread.likely or 0.0 for f in (megahertz - step, megahertz + step)
    ]
    difference = 2.0 * step * 1e6 / (needed[0] - needed[1])
    rate = tuning.tuning_rate(chain_of(at(megahertz)))
    # The slope leaves out how the length changes on which the internal reactance counts.
    assert rate.likely == pytest.approx(difference, rel=5e-4)
    assert rate.low is not None
    assert rate.high is not None
    assert rate.low < difference < rate.high


def test_where_the_current_tapers_it_tunes_slower_than_a_lumped_circuit(design: MakeDesign) -> None:
    made = point(design(transmission__0__frequency="30 MHz"))
    assert made.chain is not None
    lumped = 30e6 / (2.0 * (made.figures.tuning_capacitance.spread.likely or 1.0))
    steepness = made.chain.steepness
    assert steepness > 1.3
    assert tuning.tuning_rate(made.chain).likely == pytest.approx(lumped * 2.0 / (1.0 + steepness), rel=1e-9)


def test_the_highest_frequency_is_that_of_the_fourier_series(design: MakeDesign) -> None:
    """Storer 1956 (memory) with a port of the same width, where the current tapers most."""
    made = design(capacitor__capacitance={"min": "8 pF", "max": "100 pF"}, transmission__0__frequency="20 MHz")
    highest = range_of(made).highest.likely or 0.0
    assert highest > 0.25 * c / pi
    gap = float(flow(made, highest, "top", image=False).currents.wire.length[0]) / 0.5
    reactance = float(round_loop.solve(0.5, 11e-3, np.array([highest]), gap).impedance[0].imag)
    # What the two make of the port's own field differs by less than what is stated for it, 0.69 pF.
    assert 1.0 / (2.0 * pi * highest * reactance) == pytest.approx(8e-12, abs=0.2e-12)


@pytest.mark.parametrize(
    "around",
    [
        {"site__ground": "none"},
        {"site__ground": "average", "loop__centre_height": "0.8 m"},
        {"site__ground": "perfect", "loop__centre_height": "0.8 m", "capacitor__position": "bottom"},
        {"loop__turns": 2, "loop__turn_spacing": "60 mm"},
        {"loop__shape": "polygon", "loop__sides": 4, "loop__side": "0.8 m", "loop__diameter": None},
        {"loop__conductor": {"form": "strip", "width": "30 mm", "thickness": "1 mm", "material": "copper"}},
    ],
)
def test_within_what_is_tuned_for_certain_the_range_is_clear_and_beyond_it_is_not(
    design: MakeDesign, around: dict[str, Any]
) -> None:
    changes = {"capacitor__capacitance": {"min": "30 pF", "max": "300 pF"}, "capacitor__stray": "2 pF", **around}
    if "material" in around.get("loop__conductor", {}):
        changes["loop__conductor"] = {**around["loop__conductor"], "material": "copper tube"}
    found = range_of(design(**changes))
    assert found.lowest.high is not None
    assert found.highest.low is not None

    def verdict(hertz: float) -> str:
        return finding(
            design(transmission__0__frequency=f"{hertz / 1e6:.9f} MHz", **changes), "capacitor.range"
        ).verdict

    assert verdict(found.lowest.high * 1.0005) == "clear"
    assert verdict(found.lowest.high * 0.9995) == "stop"
    assert verdict(found.highest.low * 0.9995) == "clear"
    assert verdict(found.highest.low * 1.0005) == "stop"


@pytest.mark.parametrize("millimetres", [1.0, 22.0])
@pytest.mark.parametrize("ground", ["none", "average", "perfect"])
def test_between_the_frequencies_solved_it_is_what_the_figure_says(
    design: MakeDesign, millimetres: float, ground: str
) -> None:
    """With the internal reactance of a thin wire, 1 % of the whole, the image, and every end."""
    made = design(
        loop__conductor={"form": "rod", "outer_diameter": f"{millimetres:g} mm", "conductivity": "58 MS/m"},
        transmission__0__frequency="11.3 MHz",
        site__ground=ground,
        loop__centre_height="1 m",
    )
    figure, needed = point(made).figures.tuning_capacitance.spread, tuning.needed_capacitance(made)
    for curve, end in ((needed.least, figure.low), (needed.likely, figure.likely), (needed.most, figure.high)):
        assert np.interp(11.3e6, needed.frequency, curve) == pytest.approx(end, rel=2e-5, abs=1e-20)


def test_more_frequencies_move_no_end(design: MakeDesign, monkeypatch: pytest.MonkeyPatch) -> None:
    made = design(capacitor__capacitance={"min": "4 pF", "max": "1000 pF"})
    coarse = range_of(made)
    monkeypatch.setattr(tuning, "SOLVED", (18, 60))
    fine = range_of(made)
    for one, other in ((coarse.lowest, fine.lowest), (coarse.highest, fine.highest)):
        assert one.low == pytest.approx(other.low, rel=1e-5)
        assert one.likely == pytest.approx(other.likely, rel=1e-5)
        assert one.high == pytest.approx(other.high, rel=1e-5)


def test_a_height_that_is_not_known_leaves_nothing_certain(design: MakeDesign) -> None:
    found = range_of(design(site__ground=None))
    assert found.lowest.high is None
    assert found.highest.high is None
    assert found.lowest.low is not None
    assert {each.covered for each in tuning.bands_covered(found)} == {"perhaps"}


def test_what_is_beyond_the_scan_is_not_told_as_known(design: MakeDesign) -> None:
    wide = range_of(design(capacitor__capacitance={"min": "0.5 pF", "max": "1 uF"}, loop__diameter="0.5 m"))
    assert wide.highest.likely is None
    assert wide.highest.high is None
    assert wide.highest.low is not None
    assert wide.lowest.low is None
    low = range_of(design(capacitor__capacitance={"min": "900 nF", "max": "1 uF"}, loop__diameter="0.2 m"))
    assert low.highest.high is not None


def test_a_capacitor_that_is_too_small_for_all_tunes_nothing(design: MakeDesign) -> None:
    found = range_of(design(capacitor__capacitance={"min": "0.2 pF", "max": "0.4 pF"}))
    assert not [each for each in tuning.bands_covered(found) if each.high < 30e6]


def test_the_ends_of_a_capacitor_have_its_stray_and_its_tolerance(design: MakeDesign) -> None:
    made = design(capacitor__stray="3 pF").capacitor
    assert tuning.capacitance_ends(made) == pytest.approx((13e-12, 503e-12), abs=1e-20)
    fixed = {"capacitor__capacitance": None, "capacitor__fixed": "100 pF"}
    made = design(**fixed, capacitor__tolerance="5 %").capacitor
    assert tuning.capacitance_ends(made) == pytest.approx((95e-12, 105e-12), abs=1e-20)
    assert tuning.capacitance_ends(design(**fixed).capacitor) is None


# Bands: ITU Radio Regulations, Article 5 (memory): 7.0 to 7.2 MHz in Regions 1 and 3, to 7.3 in Region 2 ------------


@pytest.mark.parametrize(
    ("lowest", "highest", "region", "covered"),
    [
        ((6.8, 6.9, 7.0), (7.2, 7.25, 7.3), 1, "wholly"),
        ((6.8, 6.9, 7.0), (7.2, 7.25, 7.3), 2, "partly"),
        ((6.8, 6.9, 7.01), (7.2, 7.25, 7.3), 1, "partly"),
        ((6.8, 6.9, 7.21), (7.5, 7.6, 7.7), 1, "perhaps"),
        ((6.8, 6.9, 7.21), (7.5, 7.6, 7.7), 2, "partly"),
        ((7.21, 7.25, 7.28), (7.5, 7.6, 7.7), 1, None),
        ((5.0, 5.1, 5.2), (6.7, 6.8, 6.9), 1, None),
        ((5.0, 5.1, 5.2), (6.7, 6.9, 7.1), 1, "perhaps"),
        ((None, 5.1, 5.2), (7.3, 7.4, None), 2, "wholly"),
        ((5.0, 5.1, None), (7.3, 7.4, None), 2, "perhaps"),
        ((7.0, 7.1, 7.2), (7.1, 7.15, 7.3), 1, "perhaps"),
    ],
)
def test_what_of_a_band_is_tuned(
    lowest: tuple[float | None, ...], highest: tuple[float | None, ...], region: int, covered: str | None
) -> None:
    def spread(ends: tuple[float | None, ...]) -> Spread:
        return Spread(*(None if end is None else 1e6 * end for end in ends))

    found = tuning.bands_covered(tuning.TuningRange(spread(lowest), spread(highest)))
    mine = [each.covered for each in found if each.band == "40 m" and each.region == region]
    assert mine == ([] if covered is None else [covered])


# Steps ---------------------------------------------------------------------------------------------------------------


def test_the_width_is_that_between_the_points_of_swr_1_5(design: MakeDesign) -> None:
    """(s - 1) / sqrt(s) over the unloaded Q: 0.4082 for SWR 1.5 (Yaghjian & Best 2005, memory)."""
    made = point(design())
    assert made.chain is not None
    quality = made.figures.unloaded_q.spread.high or 0.0
    assert tuning.step_width(made.chain) == pytest.approx(0.5 / sqrt(1.5) * 7.1e6 / quality, rel=1e-6)
    assert tuning.step_width(made.chain, "bare") <= tuning.step_width(made.chain) * (1.0 + 1e-9)


def test_the_steps_that_are_needed_are_clear_and_one_less_is_not(design: MakeDesign) -> None:
    made = design()
    steps = tuning.steps_needed(chain_of(made), made.capacitor)
    assert steps is not None
    assert finding(design(tuning={"steps_per_range": steps}), "capacitor.tuning_step").verdict == "clear"
    assert finding(design(tuning={"steps_per_range": steps - 1}), "capacitor.tuning_step").verdict == "narrow"


def test_a_step_is_the_range_over_the_steps_times_the_rate(design: MakeDesign) -> None:
    made = design(tuning={"steps_per_range": 4000})
    found = finding(made, "capacitor.tuning_step")
    rate = tuning.tuning_rate(chain_of(made)).high or 0.0
    assert found.value is not None
    assert found.value.high == pytest.approx(490e-12 / 4000 * rate)
    assert found.limit is not None
    assert found.limit.value == pytest.approx(tuning.step_width(chain_of(made)))
    assert found.power_at_margin is None


def test_a_coarse_drive_is_narrow_and_never_more(design: MakeDesign) -> None:
    assert finding(design(tuning={"steps_per_range": 2}), "capacitor.tuning_step").verdict == "narrow"


def test_a_typical_q_gives_no_clear_step(design: MakeDesign) -> None:
    """What is typical of a kind makes the loop wider, and no verdict is clear by that."""
    typical: dict[str, Any] = {"capacitor__series_resistance": None, "capacitor__kind": "dielectric plate"}
    made = design(**typical)
    width = tuning.step_width(chain_of(made))
    steps = int(490e-12 * (tuning.tuning_rate(chain_of(made)).high or 0.0) / (0.5 * width)) + 1
    assert finding(design(**typical, tuning={"steps_per_range": steps}), "capacitor.tuning_step").verdict == "narrow"


def test_without_a_range_or_a_loop_a_step_is_unproven(design: MakeDesign) -> None:
    steps = {"tuning": {"steps_per_range": 4000}}
    fixed = {"capacitor__capacitance": None, "capacitor__fixed": "201 pF", "capacitor__tolerance": "5 %"}
    assert finding(design(**steps, **fixed), "capacitor.tuning_step").verdict == "unproven"
    beyond = design(**steps, transmission__0__frequency="50.1 MHz")
    assert finding(beyond, "capacitor.tuning_step").verdict == "unproven"


@pytest.mark.parametrize(("connection", "farads"), [("parallel", 120.0), ("series", 330.0)])
def test_padding_changes_what_a_picofarad_does(design: MakeDesign, connection: str, farads: float) -> None:
    """Whole = main + padding, or main * padding / (main + padding): the difference of two such, times f / 2C."""
    part = {"connection": connection, "capacitance": f"{farads:g} pF", "tolerance": "0 %"}
    padded, plain = chain_of(design(capacitor__with=[part])), chain_of(design())
    whole = point(design()).figures.tuning_capacitance.spread.likely or 0.0
    other = farads * 1e-12
    main = whole - other if connection == "parallel" else 1.0 / (1.0 / whole - 1.0 / other)

    def joined(main: float) -> float:
        return main + other if connection == "parallel" else main * other / (main + other)

    share = (joined(main + 1e-15) - joined(main - 1e-15)) / 2e-15
    assert share < 1.0 or connection == "parallel"
    expected = (tuning.tuning_rate(plain).likely or 0.0) * share
    assert tuning.tuning_rate(padded).likely == pytest.approx(expected, rel=1e-4)


def test_a_thin_poor_conductor_is_followed_to_where_its_port_turns_capacitive(design: MakeDesign) -> None:
    """Its internal inductance moves the anti-resonance below that of the perfect wire: beyond, nothing is told."""
    steel = {"form": "rod", "outer_diameter": "3.31 mm", "material": "stainless steel 304"}
    made = design(loop__diameter="0.701 m", loop__conductor=steel, capacitor__position="bottom")
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        needed = tuning.needed_capacitance(made)
    assert np.all(needed.least > 0.0)
    assert np.all(np.diff(needed.frequency) > 0.0)
    assert needed.limit is not None
    assert needed.frequency[-1] < needed.limit
