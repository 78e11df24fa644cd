"""Conductors close together: exact pairs, limits, symmetry, scaling, and when there is no answer."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.constants import mu_0

from magsafe.physics.proximity import Proximity, crowded_coefficients, proximity, row_proximity

FLUX = mu_0 / (2.0 * np.pi)

# Extra mean loss of a row, N x spacing/diameter: boundary-element solution of two checkers (reference notes, section
# 1); method of G. S. Smith, J. Appl. Phys. 43, 2196 (1972) (memory).
SPACINGS = (1.1, 1.2, 1.3, 1.5, 1.75, 2.0, 2.5, 3.0, 4.0, 5.0, 6.0)
TABLE = {
    2: (0.299, 0.268, 0.240, 0.192, 0.148, 0.116, 0.077, 0.054, 0.031, 0.020, 0.014),
    3: (0.643, 0.531, 0.455, 0.345, 0.255, 0.195, 0.124, 0.085, 0.048, 0.030, 0.021),
    4: (0.997, 0.777, 0.643, 0.469, 0.336, 0.252, 0.156, 0.106, 0.058, 0.037, 0.025),
    5: (1.347, 1.002, 0.809, 0.572, 0.400, 0.295, 0.180, 0.121, 0.066, 0.042, 0.029),
    6: (1.689, 1.210, 0.955, 0.658, 0.452, 0.330, 0.198, 0.133, 0.072, 0.045, 0.031),
    8: (2.341, 1.577, 1.203, 0.796, 0.532, 0.382, 0.225, 0.149, 0.080, 0.050, 0.034),
}


def exact_pair(closeness: float) -> tuple[float, float]:
    """Extra loss and change of inductance [mu0/2 pi] of two equal currents in the same sense, cosh tau = closeness.

    The loss is the series of the reference notes, section 1. The inductance is that of the bipolar strip with its
    images (derived here): ln of the pair's radius of equal potential is ln(2 sinh tau) - tau/2 + 2 sum over k of
    (-1)^k ln(1 - exp(-2 k tau)), in radii of one conductor.
    """
    tau = float(np.arccosh(closeness))
    k = np.arange(1, int(40.0 / tau) + 2)
    loss = (1.0 + 2.0 * np.sum(1.0 / np.cosh(k * tau) ** 2)) / np.tanh(tau) - 2.0 / np.sinh(tau) ** 2 - 1.0
    images = 2.0 * float(np.sum((-1.0) ** k * np.log1p(-np.exp(-2.0 * k * tau))))
    radius = float(np.log(2.0 * np.sinh(tau))) - tau / 2.0 + images
    return float(loss), float(np.log(2.0 * closeness)) - 2.0 * radius


@pytest.mark.parametrize("closeness", [1.02, 1.05, 1.1, 1.25, 1.5, 3.0, 10.0])
def test_an_equal_pair_is_exact(closeness: float) -> None:
    found = row_proximity(2, closeness * 0.022, 0.022)
    loss, change = exact_pair(closeness)
    np.testing.assert_allclose(found.loss_factor, 1.0 + loss, rtol=1e-8)
    np.testing.assert_allclose(found.inductance_change, FLUX * change, rtol=1e-8)


@pytest.mark.parametrize("closeness", [1.02, 1.1, 1.5, 5.0])
def test_a_go_and_return_pair_is_the_two_wire_line(closeness: float) -> None:
    """1/sqrt(1 - (d/s)^2) and mu0/pi arcosh(s/d): classical two-wire line (any textbook)."""
    places = np.array([[0.0, 0.0], [0.6, 0.8]]) * closeness
    found = proximity(places, 1.0, np.array([3.0, -3.0]))
    np.testing.assert_allclose(found.loss_factor, 1.0 / np.sqrt(1.0 - closeness**-2), rtol=1e-8)
    of_line = np.arccosh(closeness) - np.log(2.0 * closeness)
    np.testing.assert_allclose(found.inductance_change, FLUX * of_line, rtol=1e-8)


def test_touching_conductors_are_a_strip_turned_inside_out() -> None:
    """Extra loss 1/3 (reference notes); equal radius pi/2 by w = 1/z, hence ln 2 - 2 ln(pi/2) of inductance."""
    loss, change = exact_pair(1.0 + 1e-6)
    assert loss == pytest.approx(1.0 / 3.0, rel=1e-4)
    assert change == pytest.approx(np.log(2.0) - 2.0 * np.log(np.pi / 2.0), rel=1e-4)
    near = [row_proximity(2, s, 1.0) for s in (1.02, 1.04)]
    # What is missing goes as the gap, near contact.
    assert 2.0 * near[0].mean_loss_factor - near[1].mean_loss_factor == pytest.approx(4.0 / 3.0, abs=3e-4)


@pytest.mark.parametrize("conductors", list(TABLE))
def test_the_table_of_rows(conductors: int) -> None:
    found = [row_proximity(conductors, s, 1.0).mean_loss_factor - 1.0 for s in SPACINGS]
    np.testing.assert_allclose(found, TABLE[conductors], atol=5.5e-4)


def test_the_ends_of_a_row_are_hot_and_the_middle_is_cool() -> None:
    """4.3 and 1.25 of a lone conductor (reference notes, section 1)."""
    factors = row_proximity(6, 1.1, 1.0).loss_factor
    assert factors[0] == pytest.approx(4.3, abs=0.05)
    assert factors[2] == pytest.approx(1.25, abs=0.005)


@pytest.mark.parametrize("closeness", [1.02, 1.05, 1.1])
def test_more_multipoles_change_nothing(closeness: float, monkeypatch: pytest.MonkeyPatch) -> None:
    found = row_proximity(8, closeness, 1.0)
    monkeypatch.setattr("magsafe.physics.proximity._FALL_OF_MULTIPOLES", 20.0)
    more = row_proximity(8, closeness, 1.0)
    np.testing.assert_allclose(found.loss_factor, more.loss_factor, rtol=1e-8)
    np.testing.assert_allclose(found.inductance_change, more.inductance_change, rtol=1e-8)


def test_a_row_is_its_own_mirror_image_and_no_two_of_its_half_are_alike() -> None:
    for values in (row_proximity(7, 1.2, 1.0).loss_factor, row_proximity(7, 1.2, 1.0).inductance_change):
        np.testing.assert_allclose(values, values[::-1], rtol=1e-9)
        assert len(np.unique(np.round(values / np.max(np.abs(values)), 6))) == 4


def test_far_apart_only_the_field_of_the_others_counts() -> None:
    """A cylinder in a uniform field H has 2 H cos: extra loss is half the square of 2 H over its own field, by hand."""
    spacing = 1e3
    found = row_proximity(5, spacing, 1.0)
    # H of the others at the axis over the conductor's own at its surface: radius times sum of 1/distance.
    others = np.array([1.0 + 1 / 2 + 1 / 3 + 1 / 4, 1 / 2 + 1 / 3, 0.0, 1 / 2 + 1 / 3, 1.0 + 1 / 2 + 1 / 3 + 1 / 4])
    np.testing.assert_allclose(found.loss_factor - 1.0, 2.0 * (0.5 * others / spacing) ** 2, rtol=1e-5, atol=1e-12)
    # Each of the others answers with a dipole against the field at it: -(a/s)^2 for a pair.
    pair = row_proximity(2, spacing, 1.0).mean_inductance_change
    assert pair == pytest.approx(-FLUX * (0.5 / spacing) ** 2, rel=1e-4)


@given(
    closeness=st.floats(1.05, 4.0),
    turn=st.floats(0.0, 6.28),
    size=st.floats(1e-4, 10.0),
    current=st.floats(-50.0, 50.0).filter(lambda i: abs(i) > 1e-3),
)
def test_turning_moving_scaling_and_reordering_change_nothing(
    closeness: float, turn: float, size: float, current: float
) -> None:
    places = closeness * np.array([[0.0, 0.0], [1.0, 0.0], [0.4, 1.1], [2.1, 0.3]])
    plain = proximity(places, 1.0)
    turned = size * places @ np.array([[np.cos(turn), np.sin(turn)], [-np.sin(turn), np.cos(turn)]]) + [0.3, -7.0]
    order = np.array([2, 0, 3, 1])
    moved = proximity(turned[order], size, np.full(4, current))
    np.testing.assert_allclose(moved.loss_factor, plain.loss_factor[order], rtol=1e-6)
    np.testing.assert_allclose(moved.inductance_change, plain.inductance_change[order], rtol=1e-6, atol=1e-13)


@given(
    closeness=st.floats(1.02, 20.0), currents=st.lists(st.floats(-3.0, 3.0).filter(lambda i: abs(i) > 0.1), min_size=2)
)
def test_crowding_adds_loss_and_takes_energy_away(closeness: float, currents: list[float]) -> None:
    """Of all surface currents of given sums the true ones have least energy (Thomson's theorem, any textbook)."""
    amperes = np.array(currents[:6])
    found = proximity(closeness * np.stack([np.arange(len(amperes)), 0.0 * amperes], axis=1), 1.0, amperes)
    assert np.all(found.loss_factor >= 1.0)
    assert float(np.sum(amperes**2 * found.inductance_change)) < 0.0


def test_the_field_is_what_the_surface_currents_give() -> None:
    """A on a surface, integrated from the surface currents of a general set, is the same all round."""
    places, diameter = np.array([[0.0, 0.0], [1.3, 0.2], [0.3, 1.5]]), 1.0
    found = proximity(places, diameter)
    # The same problem, without multipoles: rings of filaments and one potential for each ring.
    count = 240
    angle = 2.0 * np.pi * np.arange(count) / count
    ring = 0.5 * np.stack([np.cos(angle), np.sin(angle)], axis=1)
    points = (places[:, None, :] + ring).reshape(-1, 2)
    apart = np.hypot(*np.moveaxis(points[:, None, :] - points[None, :, :], -1, 0))
    # Own term of the trapezoidal rule for a logarithm on a circle: ln(radius / count).
    np.fill_diagonal(apart, 0.5 * 1.0 / count)
    belongs = np.kron(np.eye(3), np.ones((count, 1)))
    system = np.block([[-np.log(apart), -belongs], [belongs.T, np.zeros((3, 3))]])
    solution = np.linalg.solve(system, np.concatenate([np.zeros(3 * count), np.ones(3)]))
    current, potential = solution[:-3].reshape(3, count), solution[-3:]
    np.testing.assert_allclose(found.loss_factor, count * np.sum(current**2, axis=1), rtol=1e-6)
    distance = np.hypot(*np.moveaxis(places[:, None, :] - places[None, :, :], -1, 0)) + np.diag([0.5] * 3)
    filaments = -np.sum(np.log(distance), axis=1)
    np.testing.assert_allclose(found.inductance_change, FLUX * (potential - filaments), rtol=1e-5)


def test_means() -> None:
    found = Proximity(np.array([1.0, 4.0]), np.array([-1e-7, -3e-7]))
    assert found.mean_loss_factor == 2.5
    assert found.mean_inductance_change == pytest.approx(-2e-7)


def test_a_lone_conductor_is_left_alone() -> None:
    alone = row_proximity(1, 0.0, 0.01)
    assert alone.loss_factor.tolist() == [1.0]
    assert alone.inductance_change.tolist() == [0.0]


@pytest.mark.parametrize(
    ("call", "words"),
    [
        (lambda: row_proximity(3, 1.019, 1.0), "1.019 diameters apart: below 1.02"),
        (lambda: row_proximity(3, 0.0, 1.0), "0 diameters apart"),
        (lambda: row_proximity(3, float("nan"), 1.0), "nan diameters apart"),
        (lambda: row_proximity(0, 2.0, 1.0), "at least one conductor, not 0"),
        (lambda: row_proximity(2, 2.0, 0.0), "diameter must be above 0"),
        (lambda: proximity(np.zeros((3, 3)), 1.0), "shape"),
        (lambda: proximity(np.eye(2) * 5.0, 1.0, np.array([1.0, 0.0])), "current other than 0"),
        (lambda: proximity(np.eye(2) * 5.0, 1.0, np.array([1.0])), "current other than 0"),
    ],
)
def test_no_answer(call: object, words: str) -> None:
    assert callable(call)
    with pytest.raises(ValueError, match=words):
        call()
    row_proximity(3, 1.02 * 0.022, 0.022)  # the bound itself belongs to the range, whatever its last bit


@pytest.mark.parametrize("closeness", [1.02, 1.2, 2.0, 5.0])
def test_a_crowded_pair_is_the_two_wire_line(closeness: float) -> None:
    """Opposite charges: arcosh(s/d) for ln(2 s/d), any textbook; equal ones: the same as for equal currents."""
    found = crowded_coefficients(2, closeness * 0.01, 0.01)
    opposite = float(found[0, 0] - found[0, 1])
    assert opposite == pytest.approx(np.arccosh(closeness) - np.log(2.0 * closeness), rel=1e-8, abs=0.0)
    equal = float(row_proximity(2, closeness * 0.01, 0.01).inductance_change[0]) * 2.0 * np.pi / mu_0
    assert float(found[0].sum()) == pytest.approx(equal, rel=1e-9, abs=0.0)


@pytest.mark.parametrize("count", [2, 3, 8])
def test_crowding_lowers_the_energy_of_any_charges(count: int) -> None:
    """Thomson's theorem: charges that may move settle at the least energy. Symmetric, mirrored, gone far apart."""
    found = crowded_coefficients(count, 0.012, 0.01)
    np.testing.assert_allclose(found, found.T, atol=1e-12)
    np.testing.assert_allclose(found, found[::-1, ::-1], atol=1e-12)
    assert np.linalg.eigvalsh(found).max() < 0.0
    assert np.abs(crowded_coefficients(count, 1.0, 0.01)).max() < 1e-4
    rows = row_proximity(count, 0.012, 0.01).inductance_change * 2.0 * np.pi / mu_0
    np.testing.assert_allclose(found.sum(axis=1), rows, rtol=1e-8)


def test_one_conductor_crowds_nothing() -> None:
    with pytest.raises(ValueError, match="two conductors or more"):
        crowded_coefficients(1, 0.02, 0.01)
    with pytest.raises(ValueError, match="not solved"):
        crowded_coefficients(3, 0.01, 0.01)
