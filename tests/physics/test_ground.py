"""Limits of the image in a perfect plane."""

import numpy as np
import pytest

from magsafe.physics import ground


def test_far_above_the_plane_free_space_returns() -> None:
    for form in (ground.image_ratio_vertical, ground.image_ratio_horizontal):
        assert float(form(2e4)) == pytest.approx(1.0, abs=2e-4)


def test_close_over_the_plane_the_image_doubles_or_cancels() -> None:
    assert float(ground.image_ratio_vertical(1e-3)) == pytest.approx(2.0, abs=1e-6)
    assert float(ground.image_ratio_horizontal(1e-3)) == pytest.approx(1e-7, rel=1e-3)


@pytest.mark.parametrize("form", [ground.image_ratio_vertical, ground.image_ratio_horizontal])
def test_the_series_meets_the_closed_form(form: object) -> None:
    assert callable(form)
    below, above = float(form(0.05 - 1e-9)), float(form(0.05 + 1e-9))
    assert below == pytest.approx(above, rel=1e-6)


def test_the_image_by_integration_of_its_far_field() -> None:
    """Horizontal loop: the pattern sin^2 times 4 sin^2(kh cos) over the upper half, against 4/3 in free space."""
    nodes, weights = np.polynomial.legendre.leggauss(60)
    u = (nodes + 1.0) / 2.0
    for height in (0.3, 1.0, 2.5):
        pattern = (1.0 - u**2) * 4.0 * np.sin(height * u / 2.0) ** 2
        ratio = float(np.sum(weights / 2.0 * pattern)) / (4.0 / 3.0)
        assert float(ground.image_ratio_horizontal(height)) == pytest.approx(ratio, rel=1e-9)


def test_no_height_gives_a_negative_or_more_than_doubled_resistance() -> None:
    heights = np.geomspace(1e-4, 1e3, 4000)
    for form in (ground.image_ratio_vertical, ground.image_ratio_horizontal):
        ratio = form(heights)
        assert ratio.min() >= 0.0
        assert ratio.max() <= 2.0


@pytest.mark.parametrize("height", [0.02, 0.04, 0.0499, 0.3, 1.0, 2.5])
def test_both_images_by_integration_far_down_into_their_series(height: float) -> None:
    """Image and loop add up to 2 sin or 2 cos of half the phase; each pattern over the upper half against 4/3.

    The series leaves out a sixth power of the height: 1e-8 of the horizontal ratio, 1e-11 of the vertical one.
    """
    nodes, weights = np.polynomial.legendre.leggauss(60)
    u = (nodes + 1.0) / 2.0
    flat = (1.0 - u**2) * 4.0 * np.sin(height * u / 2.0) ** 2
    upright = (1.0 + u**2) / 2.0 * 4.0 * np.cos(height * u / 2.0) ** 2
    wanted = [float(np.sum(weights / 2.0 * pattern)) / (4.0 / 3.0) for pattern in (flat, upright)]
    assert float(ground.image_ratio_horizontal(height)) == pytest.approx(wanted[0], rel=1e-8, abs=0.0)
    assert float(ground.image_ratio_vertical(height)) == pytest.approx(wanted[1], rel=1e-11)
