"""Stubs, sleeves and plates against a ladder of sections, textbook cables, and the reference notes.

"Reference notes" are the project's own, computed by independent scripts of two checkers.
"""

import numpy as np
import pytest
from scipy.constants import c, epsilon_0, mu_0
from scipy.integrate import quad

from magsafe.design import warmth_tables
from magsafe.physics.open_line import (
    Line,
    coaxial_capacitance,
    coaxial_field,
    coaxial_line,
    effective_capacitance,
    open_impedance,
    plate_capacitance,
    trombone_impedance,
)

# The cable of the reference notes: solid polyethylene, 50 ohm class, a braid of a quarter of copper's conductivity.
FREQUENCY = 7.1e6
CABLE = coaxial_line(FREQUENCY, 1.12e-3, 3.62e-3, 2.26, 2e-4, 58e6, 14.5e6)


def ladder(line: Line, length: float, sections: int) -> complex:
    """Impedance of a chain of T sections from its open end, by circuit rules alone."""
    piece = length / sections
    half, across = complex(line.series_impedance) * piece / 2.0, complex(line.shunt_admittance) * piece
    seen = 0.0j  # admittance, as the open end may not be divided by
    for _ in range(sections):
        total = across + seen if seen == 0 else across + 1.0 / (half + 1.0 / seen)
        seen = 1.0 / (half + 1.0 / total)
    return 1.0 / seen


@pytest.mark.parametrize("length", [0.3, 2.0, 6.0])
def test_a_ladder_of_twenty_thousand_sections_is_the_line(length: float) -> None:
    """Reference notes: agreement to 1e-9; what a ladder misses goes with the square of its sections."""
    found = complex(open_impedance(CABLE, length))
    assert ladder(CABLE, length, 20_000) == pytest.approx(found, rel=2e-9)
    coarse = abs(ladder(CABLE, length, 100) / found - 1.0)
    assert abs(ladder(CABLE, length, 200) / found - 1.0) == pytest.approx(coarse / 4.0, rel=0.02)
    assert ladder(CABLE, length, 20_000).real == pytest.approx(found.real, rel=1e-8)


def test_two_metres_of_cable_as_the_reference_notes_have_it() -> None:
    """ESR 0.131 ohm, Q 746, capacitance above C'l by tan(beta l)/(beta l), 7 %; a real Z0 is wrong six times over."""
    impedance = complex(open_impedance(CABLE, 2.0))
    assert impedance.real == pytest.approx(0.131, abs=8e-4)
    assert -impedance.imag / impedance.real == pytest.approx(746.0, rel=8e-3)
    plain = 2.0 * float(coaxial_capacitance(1.12e-3, 3.62e-3, 2.26))
    angle = float(CABLE.propagation.imag) * 2.0
    assert angle == pytest.approx(0.45, abs=0.005)
    longer = float(effective_capacitance(FREQUENCY, open_impedance(CABLE, 2.0))) / plain
    assert longer == pytest.approx(np.tan(angle) / angle, rel=2e-4)
    assert longer == pytest.approx(1.07, abs=0.005)
    real = CABLE.characteristic_impedance.real / np.tanh(CABLE.propagation * 2.0)
    assert float(real.real) / impedance.real == pytest.approx(6.0, abs=1.0)


def test_flat_surfaces_lose_less_than_round_ones_by_the_skin_depth() -> None:
    """Rs/(2 pi a) (1 + d/2a) and Rs/(2 pi b) (1 - d/2b): asymptotic series of the Bessel functions (memory)."""
    surfaces = []
    for conductivity, radius, sign in ((58e6, 1.12e-3, 1.0), (14.5e6, 3.62e-3, -1.0)):
        resistance = np.sqrt(np.pi * FREQUENCY * mu_0 / conductivity)
        depth = 1.0 / (conductivity * resistance)
        surfaces.append(resistance / (2.0 * np.pi * radius) * (1.0 + sign * depth / (2.0 * radius)))
    assert float(CABLE.series_impedance.real) == pytest.approx(sum(surfaces), rel=2e-4)


def test_a_common_cable_of_its_data_sheet() -> None:
    """0.81 mm solid in 2.95 mm of polyethylene: 53.5 ohm, 93.5 pF/m, velocity 66 % (cable data, memory)."""
    line = coaxial_line(30e6, 0.405e-3, 1.475e-3, 2.26, 2e-4, 58e6, 58e6)
    assert complex(line.characteristic_impedance).real == pytest.approx(53.5, rel=0.05)
    assert float(coaxial_capacitance(0.405e-3, 1.475e-3, 2.26)) == pytest.approx(93.5e-12, rel=0.05)
    velocity = 2.0 * np.pi * 30e6 / float(line.propagation.imag)
    assert velocity / c == pytest.approx(0.66, rel=0.015)


def test_the_capacitance_is_the_flux_of_the_field() -> None:
    """Gauss and the path integral of the field: 1/C' = integral of 1/(2 pi eps r) dr."""
    inner, outer, permittivity = 0.011, 0.013, 2.1
    volts, _ = quad(lambda r: 1.0 / (2.0 * np.pi * epsilon_0 * permittivity * r), inner, outer)
    assert float(coaxial_capacitance(inner, outer, permittivity)) == pytest.approx(1.0 / volts, rel=1e-10)
    # The charge of one volt over the surface of the inner conductor.
    charge = float(coaxial_capacitance(inner, outer, permittivity))
    field = charge / (2.0 * np.pi * inner * epsilon_0 * permittivity)
    assert float(coaxial_field(1.0, inner, outer)) == pytest.approx(field, rel=1e-12)


def test_a_trombone_of_two_sleeves() -> None:
    """Reference notes: a sleeve of 300 mm, 22 mm in 26 mm with PTFE, has 209.8 pF; two in series half of it."""
    sleeve = coaxial_line(FREQUENCY, 0.011, 0.013, 2.1, 2e-4, 49.3e6, 49.3e6)
    alone = effective_capacitance(FREQUENCY, open_impedance(sleeve, 0.3))
    both = trombone_impedance(sleeve, 0.3)
    assert float(alone) == pytest.approx(209.8e-12, rel=2e-3)
    assert float(effective_capacitance(FREQUENCY, both)) == pytest.approx(float(alone) / 2.0, rel=1e-12)
    assert float(both.real) == pytest.approx(2.0 * float(open_impedance(sleeve, 0.3).real), rel=1e-12)
    # Common practice gives such trombones a Q of 800 to 2000, contacts and bridge among the losses.
    assert -float(both.imag / both.real) > 2000.0


def test_plates_of_circuit_board_have_the_loss_of_their_board() -> None:
    """Reference notes: glass-epoxy plates have a tan delta of 0.02 to 0.07. Q is its inverse."""
    board = warmth_tables.dielectrics()["glass-epoxy"]
    assert board.permittivity.low is not None
    capacitance = plate_capacitance(0.01, 1.6e-3, board.permittivity.low)
    assert float(capacitance) == pytest.approx(0.01 * 8.854e-12 * 4.5 / 1.6e-3, rel=1e-4)
    for tangent, quality in ((board.loss_tangent.low, 50.0), (board.loss_tangent.high, 14.3)):
        assert tangent is not None
        assert 1.0 / tangent == pytest.approx(quality, rel=1e-3)


@pytest.mark.parametrize(
    ("name", "permittivity", "tangent", "strength"),
    [
        ("PTFE", (2.0, 2.1), (2e-4, 3e-4), (19.0, 25.0)),
        ("polyethylene", (2.2, 2.3), (2e-4, 5e-4), (18.0, 40.0)),
        ("mica", (5.4, 7.1), (2e-4, 4e-4), (100.0, None)),
        ("porcelain", (6.0, 6.0), (0.005, 0.01), (18.0, 22.0)),
        ("steatite", (6.5, 6.5), (7e-4, 7e-4), (19.0, 19.0)),
        ("alumina", (9.4, 9.4), (3e-4, 3e-4), (10.0, 15.0)),
        ("borosilicate glass", (4.6, 4.6), (0.003, 0.006), (10.0, 30.0)),
        ("soda-lime glass", (7.0, 7.0), (0.005, 0.01), (10.0, 30.0)),
        ("polystyrene", (2.5, 2.5), (1e-4, 3e-4), (20.0, 30.0)),
        ("acrylic", (2.7, 3.5), (0.015, 0.06), (15.0, 18.0)),
        ("PVC", (3.0, 4.0), (0.02, 0.06), (20.0, 50.0)),
        ("glass-epoxy", (4.5, 8.0), (0.02, 0.07), (6.0, 20.0)),
    ],
)
def test_the_dielectrics_hold_those_of_the_reference_notes(
    name: str,
    permittivity: tuple[float, float],
    tangent: tuple[float, float],
    strength: tuple[float, float | None],
) -> None:
    """Where the notes have one number, it lies within the ends of the table; strength in kV/mm."""
    row = warmth_tables.dielectrics()[name]
    kilovolts = (strength[0] * 1e6, None if strength[1] is None else strength[1] * 1e6)
    for spread, (low, high) in (
        (row.permittivity, permittivity),
        (row.loss_tangent, tangent),
        (row.strength, kilovolts),
    ):
        assert spread.low is not None
        assert spread.high is not None
        assert spread.low <= low
        assert high is None or high <= spread.high
        if low != high:
            assert spread.low == pytest.approx(low)
            assert high is None or spread.high == pytest.approx(high)
