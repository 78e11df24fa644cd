"""What soil takes by the currents of free space and of the image, held against the current that flows over the soil."""

from typing import Any

import pytest
from designs import plain_design
from soil_moments import solved_over_soil

from magsafe.analysis.flow import flow
from magsafe.analysis.surroundings import surroundings
from magsafe.design.model import Design
from magsafe.physics.half_space import relative_permittivity

CASES = [
    # MHz (0.07 to 1.05 wavelengths round), plane, capacitor, height in metres, S/m, permittivity, error of the likely
    (7.1, "vertical", "top", 1.5, 0.005, 13.0, 0.001),
    (7.1, "vertical", "bottom", 0.62, 0.005, 13.0, 0.02),
    (14.2, "vertical", "bottom", 0.7, 0.005, 13.0, 0.015),
    (21.0, "vertical", "side", 3.0, 0.01, 3.0, 0.002),
    (21.0, "vertical", "bottom", 0.62, 0.005, 13.0, 0.06),
    (28.0, "vertical", "bottom", 0.8, 0.005, 13.0, 0.05),
    (33.0, "vertical", "top", 2.0, 0.003, 3.0, 0.003),
    (33.0, "horizontal", None, 1.5, 0.0001, 3.0, 0.003),
    (34.0, "vertical", "side", 0.8, 0.005, 13.0, 0.08),
    (40.0, "vertical", "bottom", 2.0, 5.0, 80.0, 0.04),
    (40.0, "horizontal", None, 2.5, 0.03, 20.0, 0.01),
    (43.0, "vertical", "top", 0.8, 0.005, 13.0, 0.4),
    (95.0, "vertical", "bottom", 0.65, 0.005, 13.0, 0.05),
    (100.0, "vertical", "bottom", 1.0, 0.005, 13.0, 0.04),
    (100.0, "horizontal", None, 0.6, 0.005, 13.0, 0.1),
    (100.0, "horizontal", None, 1.5, 0.001, 5.0, 0.03),
]


def design_of(megahertz: float, plane: str, position: str | None, height: float, ground: Any) -> Design:
    where = {} if position is None else {"capacitor__position": position}
    return plain_design(
        transmission__0__frequency=f"{megahertz} MHz",
        loop__plane=plane,
        loop__centre_height=f"{height} m",
        site__ground=ground,
        **where,
    )


@pytest.mark.parametrize(("megahertz", "plane", "position", "height", "conductivity", "permittivity", "error"), CASES)
def test_the_current_that_flows_over_soil_draws_what_lies_between_the_ends(
    megahertz: float,
    plane: str,
    position: str | None,
    height: float,
    conductivity: float,
    permittivity: float,
    error: float,
) -> None:
    """Near its anti-resonance, 43 MHz, a loop's own current changes most."""
    stated = {"conductivity": f"{1e3 * conductivity} mS/m", "permittivity": permittivity}
    design, frequency = design_of(megahertz, plane, position, height, stated), megahertz * 1e6
    soil = complex(relative_permittivity(permittivity, conductivity, frequency))
    true = solved_over_soil(design, frequency, position, soil).real
    found = surroundings(design, frequency)
    assert max(state.radiated for state in found.least) <= true <= min(state.radiated for state in found.most)
    assert found.likely.radiated == pytest.approx(true, rel=error)


@pytest.mark.parametrize(("plane", "position"), [("vertical", "top"), ("vertical", "side"), ("horizontal", None)])
@pytest.mark.parametrize("megahertz", [7.1, 40.0, 100.0])
def test_with_a_perfect_conductor_for_soil_it_is_the_image(megahertz: float, plane: str, position: str | None) -> None:
    """Two ways to one number: the reference itself is right."""
    design = design_of(megahertz, plane, position, 1.2, "perfect")
    true = solved_over_soil(design, megahertz * 1e6, position, 1.0 - 1e12j)
    alone, image = (flow(design, megahertz * 1e6, position, image) for image in (False, True))
    assert true.real == pytest.approx(image.radiation, abs=1e-3 * alone.radiation)
    assert true.imag == pytest.approx(image.reactance, rel=1e-3, abs=0.05)


@pytest.mark.parametrize(
    ("megahertz", "position", "height"),
    [(7.1, "bottom", 0.62), (14.2, "bottom", 0.62), (21.0, "bottom", 0.62), (21.0, "top", 0.62), (28.0, "side", 0.7)],
)
def test_soil_moves_the_reactance_by_what_its_own_field_does(megahertz: float, position: str, height: float) -> None:
    """Low over soil it may move beyond both free space and image; within 10 % of that, 0.05 ohm at least."""
    stated = {"conductivity": "5 mS/m", "permittivity": 13.0}
    design, frequency = design_of(megahertz, "vertical", position, height, stated), megahertz * 1e6
    true = solved_over_soil(design, frequency, position, complex(relative_permittivity(13.0, 0.005, frequency))).imag
    likely = surroundings(design, frequency).likely
    moved = true - likely.flow.reactance
    assert likely.shift == pytest.approx(moved, rel=0.1, abs=0.05)
