"""The ground's bracket, held against the half-space integral that this version does not compute."""

from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from designs import plain_design
from scipy.constants import c, epsilon_0

from magsafe.analysis.surroundings import Surroundings, surroundings
from magsafe.design.shape import outline
from magsafe.physics import ground, inductance

OWN = 2.4e-6  # H, about the loop of a metre


def around(megahertz: float = 7.1, **changes: Any) -> Surroundings:
    design = plain_design(**changes)
    return surroundings(design, outline(design.loop), megahertz * 1e6, OWN)


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


SOILS = [
    # plane, S/m, permittivity, MHz, height in wavelengths: among them those that fall shortest of both simple cases
    ("vertical", 0.003, 3.0, 7.1, 0.22),
    ("vertical", 0.01, 3.0, 30.0, 0.22),
    ("vertical", 0.001, 3.0, 1.8, 0.22),
    ("vertical", 5.0, 80.0, 7.1, 0.33),
    ("vertical", 0.005, 13.0, 7.1, 0.75),
    ("horizontal", 0.0001, 13.0, 30.0, 0.36),
    ("horizontal", 0.0001, 13.0, 7.1, 0.36),
    ("horizontal", 5.0, 80.0, 7.1, 0.1),
    ("horizontal", 0.005, 13.0, 7.1, 0.75),
]


@pytest.mark.parametrize(("plane", "conductivity", "permittivity", "megahertz", "height"), SOILS)
def test_no_soil_falls_below_the_bracket(
    plane: str, conductivity: float, permittivity: float, megahertz: float, height: float
) -> None:
    """Less resistance than the bracket's low end would be more volts than the sheet tells."""
    metres = height * c / (megahertz * 1e6)
    there = {
        "loop__plane": plane,
        "site__ground": {"conductivity": f"{1e3 * conductivity:.4f} mS/m", "permittivity": permittivity},
    }
    true = half_space(plane == "vertical", (conductivity, permittivity), megahertz, height)
    known = around(megahertz, loop__centre_height=f"{metres:.6f} m", **there)
    anywhere = around(megahertz, **there)
    assert known.ratio.low is not None
    assert anywhere.ratio.low is not None
    assert anywhere.ratio.low <= known.ratio.low <= true + 1e-5
    assert known.ratio.high is None
    assert anywhere.ratio.high is None
    assert known.likely_is_free_space
    assert known.ratio.likely == 1.0


def test_a_missing_height_goes_below_every_height() -> None:
    for metres in np.linspace(1.0, 43.0, 85):
        there = around(site__ground="average", loop__centre_height=f"{metres:.3f} m").ratio.low
        anywhere = around(site__ground="average").ratio.low
        assert there is not None
        assert anywhere is not None
        assert 0.0 < anywhere <= there


def test_a_flat_loop_low_down_may_lose_all_its_resistance_but_not_more() -> None:
    """The image cancels it towards the ground; what radiates and what heats the soil are never negative."""
    flat: dict[str, Any] = {"loop__plane": "horizontal", "site__ground": "average"}
    assert around(**flat).ratio.low == 0.0
    for metres in ("0.3 m", "0.61 m", "1 m"):
        assert around(loop__centre_height=metres, **flat).ratio.low == 0.0
    there = around(loop__centre_height="3 m", **flat).ratio.low
    assert there is not None
    assert 0.0 < there < 1.0


@pytest.mark.parametrize("plane", ["vertical", "horizontal"])
def test_the_point_dipole_stands_for_the_loop_from_1_2_radii_up(plane: str) -> None:
    """Reference notes, section 7: the dipole model serves for heights of 1.2 loop radii or more."""
    above = around(loop__plane=plane, site__ground="perfect", loop__centre_height="0.601 m")
    below = around(loop__plane=plane, site__ground="perfect", loop__centre_height="0.599 m")
    assert above.perfect is not None
    assert not above.likely_is_free_space
    assert below.perfect is None
    assert below.likely_is_free_space
    assert below.ratio.high is None
    assert below.ratio.low == (1.0 if plane == "vertical" else 0.0)


@pytest.mark.parametrize("plane", ["vertical", "horizontal"])
@pytest.mark.parametrize("metres", [0.55, 1.0, 3.0])
def test_the_image_takes_away_its_mutual_inductance_at_most(plane: str, metres: float) -> None:
    """Two circles of the same current, their centres twice the height apart: on one axis, or in one plane."""
    found = around(loop__plane=plane, site__ground="average", loop__centre_height=f"{metres} m").image_share
    if plane == "vertical":
        mutual = -inductance.coplanar_mutual_inductance(0.5, 0.5, 2.0 * metres)
    else:
        mutual = float(inductance.coaxial_mutual_inductance(0.5, 0.5, 2.0 * metres))
    assert (found.low, found.likely) == (0.0, 0.0)
    assert found.high == pytest.approx(mutual / OWN, rel=1e-9)
    assert 0.0 < (found.high or 0.0) < 1.0


def test_free_space_is_exactly_that() -> None:
    found = around()
    assert (found.ratio.low, found.ratio.high, found.perfect, found.image_share.high) == (1.0, 1.0, 1.0, 0.0)


def test_a_perfect_plane_may_be_there_or_not() -> None:
    """Its likely ratio is the image's; both ends hold free space too."""
    for metres, form in ((2.0, "above"), (13.0, "below")):
        found = around(site__ground="perfect", loop__centre_height=f"{metres} m")
        image = float(ground.image_ratio_vertical(4.0 * np.pi * 7.1e6 / c * metres))
        assert (image > 1.0) == (form == "above")
        assert found.ratio.likely == pytest.approx(image)
        assert found.ratio.low == pytest.approx(min(1.0, image))
        assert found.ratio.high == pytest.approx(max(1.0, image))
        assert found.image_share.likely == found.image_share.high
