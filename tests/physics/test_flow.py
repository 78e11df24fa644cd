"""The current solved for a design: its wire, its sums against the Fourier series, its resonances, its extremes."""

from typing import Any

import numpy as np
import pytest
from designs import plain_design
from points import fed, likely, point
from scipy.constants import c

from magsafe.analysis.chain import RESISTANCE_ERROR
from magsafe.analysis.flow import flow, nearest_resonance
from magsafe.analysis.wires import shape_of, wire_of
from magsafe.design.shape import outline
from magsafe.physics import round_loop

THIN = {"form": "rod", "outer_diameter": "1 mm", "conductivity": "58 MS/m"}
WINDING: dict[str, Any] = {"loop__turn_spacing": "40 mm", "loop__conductor": THIN}
FINENESS: list[tuple[dict[str, Any], float, int]] = [
    # what is changed, megahertz, segments of a turn with which the solver is shown to converge
    ({}, 7.1, 48),
    ({"loop__conductor": THIN}, 40.0, 48),
    ({"loop__conductor": THIN, "capacitor": {"kind": "none"}}, 280.0, 48),
    ({**WINDING, "loop__turns": 2}, 5.0, 48),
    ({**WINDING, "loop__turns": 4}, 5.0, 24),
    ({"loop__conductor__outer_diameter": "59 mm"}, 20.0, 35),
]


@pytest.mark.parametrize(("changes", "megahertz", "per_turn"), FINENESS)
def test_segments_are_of_lengths_for_which_the_solver_is_proved(
    changes: dict[str, Any], megahertz: float, per_turn: int
) -> None:
    """Twenty to a wavelength or more, two conductor radii or longer, as many round a turn as in the tests of it."""
    design = plain_design(transmission__0__frequency=f"{megahertz} MHz", **changes)
    shape = shape_of(design.loop, megahertz * 1e6, "top")
    wire = wire_of(shape)
    assert wire.length.max() <= c / (megahertz * 1e6) / 20.0 * (1.0 + 1e-9)
    assert wire.length.min() >= 2.0 * shape.radius
    assert (np.bincount(wire.turn[wire.turn >= 0]) >= per_turn - 1).all()


@pytest.mark.parametrize("millimetres", [0.5, 3.0, 22.0, 59.9])
@pytest.mark.parametrize("size", [0.02, 0.1, 0.35])
def test_the_sums_of_a_ring_are_those_of_its_fourier_series(millimetres: float, size: float) -> None:
    """Storer 1956 (memory), a port of the same width; what a capacitance across the port leaves as it is."""
    frequency = size * c / np.pi
    rod = {"form": "rod", "outer_diameter": f"{millimetres} mm", "conductivity": "58 MS/m"}
    design = plain_design(loop__conductor=rod, transmission__0__frequency=f"{frequency / 1e6:.9f} MHz")
    found = flow(design, frequency, "top", image=False)
    gap = float(found.currents.wire.length[0]) / 0.5
    series = round_loop.solve(0.5, 0.5e-3 * millimetres, np.array([frequency]), gap)
    radiation, reactance = float(series.radiation_resistance[0]), float(series.impedance[0].imag)
    assert found.radiation / found.reactance**2 == pytest.approx(radiation / reactance**2, rel=1e-3)
    assert found.mean_square / found.radiation == pytest.approx(float(series.mean_square[0]) / radiation, rel=1e-3)
    far = abs(complex(series.current(np.array([np.pi]))[0, 0])) ** 2
    assert found.opposite_square / found.radiation == pytest.approx(far / radiation, rel=2e-3)


def test_a_thin_wire_has_a_port_of_a_hundredth_of_its_length() -> None:
    """There may be no conductor in it, the dangerous side for volts: so much less resistance at the low end."""
    spread = point(loop__conductor=THIN, transmission__0__frequency="1 MHz").figures.conductor_resistance.spread
    assert spread.low is not None
    assert spread.low / (spread.likely or 0.0) == pytest.approx(0.99 * (1.0 - RESISTANCE_ERROR), rel=2e-4)


def test_of_several_resonances_the_nearest_is_told() -> None:
    """Round a loop of 3.2 mm wire they follow near every whole wavelength; two of them lie within half of 150 MHz."""
    wavelengths = {mhz: np.pi * likely(fed(mhz), "nearest_resonance") / c for mhz in (72.0, 140.0, 175.0, 195.0)}
    assert wavelengths[72.0] == pytest.approx(wavelengths[140.0], rel=1e-4)
    assert wavelengths[175.0] == pytest.approx(wavelengths[195.0], rel=1e-4)
    assert 1.0 < wavelengths[72.0] < 1.1
    assert 2.0 < wavelengths[195.0] < 2.15


def test_at_a_resonance_the_reactance_rises_through_zero() -> None:
    wire = {"form": "rod", "outer_diameter": "3.2 mm", "conductivity": "58 MS/m"}
    design = plain_design(capacitor={"kind": "none"}, loop__conductor=wire, transmission__0__frequency="120 MHz")
    found = nearest_resonance(design, 120e6)
    assert found is not None
    below, above = (flow(design, share * found, "top", image=False).reactance for share in (0.9995, 1.0005))
    assert below < 0.0 < above
    assert abs(below + above) < 0.05 * (above - below)


def test_every_transmission_of_a_fed_loop_is_computed() -> None:
    """The one of the highest frequency decides for what the matrices are made."""
    sent = [{"frequency": f"{mhz} MHz", "power": "100 W", "signal_bandwidth": "0.5 kHz"} for mhz in (60.0, 250.0)]
    for order in (sent, sent[::-1]):
        design = plain_design(capacitor={"kind": "none"}, loop__conductor=THIN, transmission=order)
        for each in design.transmission:
            alone = plain_design(
                capacitor={"kind": "none"}, loop__conductor=THIN, transmission__0__frequency=f"{each.frequency} Hz"
            )
            found, wanted = (flow(one, each.frequency, "top", image=False) for one in (design, alone))
            assert found.reactance == pytest.approx(wanted.reactance, rel=1e-6)


@pytest.mark.parametrize("turns", [2, 3])
def test_crowding_raises_the_internal_reactance_as_it_raises_the_loss(turns: int) -> None:
    """Where the skin is thin the inside's reactance is its resistance, place by place (Wheeler 1942, memory)."""
    design = plain_design(
        loop__turns=turns,
        loop__turn_spacing="14 mm",
        loop__conductor__outer_diameter="10 mm",
        transmission__0__frequency="0.3 MHz",
    )
    found = flow(design, 0.3e6, "top", image=False)
    assert found.internal_length == pytest.approx(found.conductor_length, rel=1e-3)
    assert found.conductor_length > 1.1 * turns * outline(design.loop).perimeter * found.mean_square


def port_of(points: list[tuple[float, float]], place: str) -> tuple[float, float]:
    """Where the middle of the port lies, from the corner of the outline's box that is lowest and leftmost [m]."""
    corners = [[f"{across} m", f"{up} m"] for across, up in points]
    design = plain_design(loop={"shape": "outline", "points": corners, "conductor": THIN}, capacitor__position=place)
    wire = wire_of(shape_of(design.loop, 7.1e6, place))
    middle = 0.5 * (wire.nodes[0] + wire.nodes[1]) - wire.nodes.min(axis=0)
    return float(middle[1]), float(middle[2])


def test_of_sides_as_high_the_longest_holds_the_port_and_of_equal_ones_the_rightmost() -> None:
    """Two towers with a notch between them; and the same upside down, and lying on its side."""
    for left in (1.0, 1.2):
        towers = [(0.0, 0.0), (3.0, 0.0), (3.0, 1.0), (2.0, 1.0), (1.6, 0.4), (left, 1.0), (0.0, 1.0)]
        wanted = 2.5 if left == 1.0 else left / 2.0
        assert port_of(towers, "top") == pytest.approx((wanted, 1.0), abs=1e-3)
        hanging = [(across, 1.0 - up) for across, up in towers]
        assert port_of(hanging, "bottom") == pytest.approx((wanted, 0.0), abs=1e-3)
    lying = [(up, across) for across, up in towers]
    assert port_of(lying, "side") == pytest.approx((1.0, 0.6), abs=1e-3)


@pytest.mark.parametrize(("place", "side"), [("side", 0.07), ("top", 1.5)])
def test_a_port_takes_no_more_than_half_of_its_side(place: str, side: float) -> None:
    """Four conductor radii are 44 mm; of a side of 70 mm half is less."""
    design = plain_design(
        loop={
            "shape": "rectangle",
            "width": "1.5 m",
            "height": "70 mm",
            "conductor": {"form": "rod", "outer_diameter": "22 mm", "conductivity": "58 MS/m"},
        }
    )
    wire = wire_of(shape_of(design.loop, 7.1e6, place))
    assert float(wire.length[0]) == pytest.approx(min(0.044, side / 2.0), rel=1e-6)
