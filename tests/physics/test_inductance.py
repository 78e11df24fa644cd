"""Symmetry, limits and consistency of the closed forms of inductance."""

import numpy as np
import pytest
from scipy.constants import mu_0

from magsafe.physics import inductance


def test_mutual_inductance_does_not_care_which_circle_is_fed() -> None:
    one = inductance.coaxial_mutual_inductance(0.5, 0.2, 0.1)
    other = inductance.coaxial_mutual_inductance(0.2, 0.5, 0.1)
    assert float(one) == pytest.approx(float(other), rel=1e-12)
    inner = inductance.coplanar_mutual_inductance(0.5, 0.1, 0.2)
    outer = inductance.coplanar_mutual_inductance(0.1, 0.5, 0.2)
    assert inner == pytest.approx(outer, rel=1e-9)


def test_concentric_coplanar_circles_are_coaxial_ones_without_distance() -> None:
    plane = inductance.coplanar_mutual_inductance(0.5, 0.1, 0.0)
    assert plane == pytest.approx(float(inductance.coaxial_mutual_inductance(0.5, 0.1, 0.0)), rel=1e-9)


def test_far_circles_couple_as_dipoles() -> None:
    """mu0 m1 m2 / (4 pi d^3), with a factor of 2 on the axis and -1 beside it: magnetic dipoles."""
    moment = np.pi * 0.1**2
    dipole = mu_0 * moment**2 / (4.0 * np.pi * 20.0**3)
    axial = float(inductance.coaxial_mutual_inductance(0.1, 0.1, 20.0))
    beside = inductance.coplanar_mutual_inductance(0.1, 0.1, 20.0)
    assert axial == pytest.approx(2.0 * dipole, rel=1e-3, abs=0.0)
    assert beside == pytest.approx(-dipole, rel=1e-3, abs=0.0)


def test_a_polygon_of_many_sides_is_nearly_a_circle() -> None:
    perimeter = 2.0 * np.pi * 0.5
    circle = float(inductance.circle_inductance(0.5, 1e-3))
    ratios = [float(inductance.polygon_inductance(perimeter, n, 1e-3)) / circle for n in (3, 4, 6, 12, 24)]
    assert ratios == sorted(ratios)
    assert ratios[-1] == pytest.approx(1.0, abs=0.003)


def test_inductance_scales_with_size() -> None:
    one = float(inductance.circle_inductance(0.5, 0.011))
    assert float(inductance.circle_inductance(1.0, 0.022)) == pytest.approx(2.0 * one, rel=1e-12)
