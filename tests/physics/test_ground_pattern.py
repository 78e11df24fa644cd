"""Far field over soil: the image, free space, reciprocity by boundary conditions, and where the power goes."""

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.constants import c
from scipy.optimize import minimize_scalar

from magsafe.physics import ground_pattern, half_space
from magsafe.physics.far_field import FarField
from magsafe.physics.ground_pattern import GroundPattern
from magsafe.physics.near_field import SegmentCurrents

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

FREQUENCY = 14.2e6
WAVELENGTH = c / FREQUENCY
WAVENUMBER = 2.0 * np.pi / WAVELENGTH
PERFECT = 1.0 - 1e24j
SEA = complex(half_space.relative_permittivity(80.0, 5.0, FREQUENCY))
PASTURE = complex(half_space.relative_permittivity(13.0, 5e-3, FREQUENCY))
SAND = complex(half_space.relative_permittivity(5.0, 1e-3, FREQUENCY))
DRY = 4.0 + 0j


def chain(corners: Array, current: ComplexArray | Array | complex) -> SegmentCurrents:
    at_corners = np.broadcast_to(np.asarray(current, dtype=np.complex128), (len(corners),))
    return SegmentCurrents(corners[:-1], corners[1:], at_corners[:-1], at_corners[1:], 1e-4)


def ring(perimeter: float, height: float, upright: bool, count: int = 78, taper: float = 0.0) -> SegmentCurrents:
    """A closed polygon with its axis along x (upright) or z; sizes in wavelengths; its current uniform or tapered."""
    angle = 2.0 * np.pi / count * np.arange(count + 1)
    radius = perimeter * WAVELENGTH / (2.0 * np.pi)
    first, second, rest = radius * np.cos(angle), radius * np.sin(angle), np.zeros(count + 1)
    first[-1], second[-1] = first[0], second[0]
    up = height * WAVELENGTH
    corners = np.column_stack([rest, first, second + up] if upright else [first, second, rest + up])
    return chain(corners, np.cos(taper * (angle - np.pi)) * np.exp(0.4j))


def tilted(seed: int = 3) -> SegmentCurrents:
    """Wires in no particular direction with currents in no particular phase, 300 m from the origin."""
    random = np.random.default_rng(seed)
    start = random.uniform([0.0, 0.0, 0.2], [0.5, 0.5, 0.9], (5, 3)) * WAVELENGTH
    end = start + random.uniform(-0.12, 0.12, (5, 3)) * WAVELENGTH
    aside = np.array([300.0, -170.0, 0.0])
    first, second = random.normal(size=(2, 5)) + 1j * random.normal(size=(2, 5))
    return SegmentCurrents(start + aside, end + aside, first, second, 1e-4)


def directions(count: int = 40, seed: int = 7) -> tuple[Array, Array]:
    random = np.random.default_rng(seed)
    return random.uniform(0.02, 0.5 * np.pi, count), random.uniform(-np.pi, np.pi, count)


SOURCES = [ring(0.25, 0.3, True, taper=0.4), ring(0.6, 1.2, False, taper=0.2), tilted()]
NAMES = ["upright loop", "flat loop", "tilted wires"]


@pytest.mark.parametrize("currents", SOURCES, ids=NAMES)
def test_over_a_perfect_conductor_it_is_the_image(currents: SegmentCurrents) -> None:
    """Field, phase and polarisation against the currents with their image: Balanis, section 4.7 (memory)."""
    elevation, azimuth = directions()
    found = GroundPattern.of(currents, FREQUENCY, PERFECT)
    image = FarField.of(currents, FREQUENCY, over_plane=True)
    wanted = image.pattern(0.5 * np.pi - elevation, azimuth)
    assert np.abs(found.pattern(elevation, azimuth) - wanted).max() < 1e-9 * np.abs(wanted).max()
    assert found.sky_power == pytest.approx(image.power, rel=1e-7)


@pytest.mark.parametrize("currents", SOURCES, ids=NAMES)
def test_over_nothing_it_is_free_space(currents: SegmentCurrents) -> None:
    elevation, azimuth = directions()
    found = GroundPattern.of(currents, FREQUENCY, 1.0 + 0j).pattern(elevation, azimuth)
    wanted = FarField.of(currents, FREQUENCY).pattern(0.5 * np.pi - elevation, azimuth)
    assert np.abs(found - wanted).max() < 1e-12 * np.abs(wanted).max()


def waves_at(
    place: Array, elevation: float, azimuth: float, upright: bool, medium: complex
) -> tuple[Array, Array, Array]:
    """Electric field of a plane wave of 1 V/m from a direction, of what the soil turns back, and the misfit below.

    The waves turned back and passed on come from four equations: level E and H do not jump at z = 0. The wavevectors
    and H = k x E/(omega mu0) are all that goes in; no reflection coefficient.
    """
    flat = np.array([np.cos(azimuth), np.sin(azimuth), 0.0])
    side = np.array([-np.sin(azimuth), np.cos(azimuth), 0.0])
    up = np.array([0.0, 0.0, 1.0])
    # By reciprocity the wave comes in against the direction that is looked at.
    coming = -(np.cos(elevation) * flat + np.sin(elevation) * up)
    turned = coming * np.array([1.0, 1.0, -1.0])
    g = np.sqrt(complex(medium - np.cos(elevation) ** 2))
    g = -g if g.imag > 0.0 else g
    passed = -np.cos(elevation) * flat - g * up
    by_theta = np.sin(elevation) * flat - np.cos(elevation) * up
    given = by_theta if upright else side
    unknown = [
        side.astype(complex),
        np.cross(turned, side).astype(complex),
        side.astype(complex),
        np.cross(passed, side),
    ]
    waves = [turned, turned, passed, passed]
    columns = np.array(
        [
            [*(sign * e)[:2], *(sign * np.cross(k, e))[:2]]
            for sign, e, k in zip((1.0, 1.0, -1.0, -1.0), unknown, waves, strict=True)
        ]
    ).T
    known = -np.array([*given[:2], *np.cross(coming, given)[:2]])
    answer = np.linalg.solve(columns, known)
    reflected = answer[0] * unknown[0] + answer[1] * unknown[1]
    phase = np.exp(-1j * WAVENUMBER * (place @ np.stack([coming, turned]).T))
    return np.asarray(phase[:, :1] * given + phase[:, 1:] * reflected), columns @ answer - known, coming


@pytest.mark.parametrize("medium", [SEA, PASTURE, SAND, DRY], ids=["sea", "pasture", "sand", "dry"])
@pytest.mark.parametrize("upright", [True, False], ids=["theta", "phi"])
def test_it_sends_as_it_receives(medium: complex, upright: bool) -> None:
    """Reciprocity: r E exp(jkr) along a polarisation is -j omega mu0/(4 pi) integral I E(plane wave) dl."""
    currents = tilted()
    pattern = GroundPattern.of(currents, FREQUENCY, medium)
    node, weight = np.polynomial.legendre.leggauss(12)
    share = 0.5 + 0.5 * node
    places = currents.start[:, None] + share[:, None] * (currents.end - currents.start)[:, None]
    flow = currents.current_start[:, None] + share * (currents.current_end - currents.current_start)[:, None]
    step = (0.5 * weight * flow)[:, :, None] * (currents.end - currents.start)[:, None]
    elevation, azimuth = directions(12)
    found = pattern.pattern(elevation, azimuth)
    for i in range(12):
        field, misfit, _ = waves_at(places.reshape(-1, 3), float(elevation[i]), float(azimuth[i]), upright, medium)
        assert np.abs(misfit).max() < 1e-12
        wanted = -1j * WAVENUMBER * ground_pattern.IMPEDANCE / (4.0 * np.pi) * np.sum(field * step.reshape(-1, 3))
        assert complex(found[i, 0 if upright else 1]) == pytest.approx(wanted, rel=1e-9, abs=1e-9 * np.abs(found).max())


@pytest.mark.parametrize("medium", [SEA, PASTURE, SAND, DRY, PERFECT], ids=["sea", "pasture", "sand", "dry", "perfect"])
@pytest.mark.parametrize("upright", [True, False], ids=["upright", "flat"])
@pytest.mark.parametrize("height", [0.02, 0.1, 0.35, 1.0, 4.0])
def test_a_tiny_loop_sends_into_the_sky_what_its_dipole_does(medium: complex, upright: bool, height: float) -> None:
    found = GroundPattern.of(ring(0.001, height, upright), FREQUENCY, medium)
    wanted = float(half_space.sky_ratio(upright, np.asarray(medium), 4.0 * np.pi * height))
    assert found.sky_power / found.free.power == pytest.approx(wanted, rel=1e-6)


def test_the_sky_power_has_converged(monkeypatch: pytest.MonkeyPatch) -> None:
    usual = [GroundPattern.of(currents, FREQUENCY, m).sky_power for currents in SOURCES for m in (SEA, SAND, DRY)]
    high = GroundPattern.of(ring(0.1, 8.0, True), FREQUENCY, SEA).sky_power
    monkeypatch.setattr(ground_pattern, "LEAST_PANELS", 30)
    finer = [GroundPattern.of(currents, FREQUENCY, m).sky_power for currents in SOURCES for m in (SEA, SAND, DRY)]
    assert usual == pytest.approx(finer, rel=1e-9)
    assert high == pytest.approx(GroundPattern.of(ring(0.1, 8.0, True), FREQUENCY, SEA).sky_power, rel=1e-9)


@pytest.mark.parametrize("currents", SOURCES, ids=NAMES)
def test_shares_of_the_sky_by_plain_sums(currents: SegmentCurrents) -> None:
    pattern = GroundPattern.of(currents, FREQUENCY, PASTURE)
    steps = 90
    middles = 0.5 * np.pi * (np.arange(steps) + 0.5) / steps  # one degree
    around = 2.0 * np.pi * np.arange(24) / 24
    sent = pattern.intensity(np.repeat(middles, 24), np.tile(around, steps)).reshape(steps, 24).mean(axis=1)
    band = sent * np.cos(middles) * 2.0 * np.pi * 0.5 * np.pi / steps
    assert float(band.sum()) == pytest.approx(pattern.sky_power, rel=1e-4)
    low, middle, high = (pattern.share_between(np.radians(a), np.radians(b)) for a, b in ((0, 20), (20, 60), (60, 90)))
    assert low == pytest.approx(float(band[:20].sum()) / pattern.sky_power, rel=5e-4)
    assert high == pytest.approx(float(band[60:].sum()) / pattern.sky_power, rel=5e-4)
    assert low + middle + high == pytest.approx(1.0, rel=1e-9)


def test_gain_is_the_share_that_reaches_the_sky() -> None:
    """The mean of the gain over the whole sphere, its lower half dark, is sky power over input power."""
    pattern = GroundPattern.of(SOURCES[0], FREQUENCY, PASTURE)
    node, weight = np.polynomial.legendre.leggauss(40)
    elevation = np.arcsin(0.5 + 0.5 * node)
    around = 2.0 * np.pi * np.arange(24) / 24
    gain = pattern.gain(np.repeat(elevation, 24), np.tile(around, 40), 7.0 * pattern.sky_power)
    mean = 0.5 * float(0.5 * weight @ gain.reshape(40, 24).mean(axis=1))
    assert mean == pytest.approx(1.0 / 7.0, rel=1e-6)


def test_a_loop_in_the_plane_across_x_sends_the_same_to_all_four_quarters() -> None:
    pattern = GroundPattern.of(ring(0.2, 0.4, True), FREQUENCY, SAND)
    elevation = np.linspace(0.05, 1.5, 9)
    quarters = [pattern.intensity(elevation, np.full(9, azimuth)) for azimuth in (0.7, np.pi - 0.7, -0.7, np.pi + 0.7)]
    for other in quarters[1:]:
        assert other == pytest.approx(quarters[0], rel=1e-9)


def test_turning_the_currents_turns_the_pattern() -> None:
    here = tilted()
    turn = np.array([[0.6, -0.8, 0.0], [0.8, 0.6, 0.0], [0.0, 0.0, 1.0]])
    there = SegmentCurrents(here.start @ turn.T, here.end @ turn.T, here.current_start, here.current_end, here.radius)
    elevation, azimuth = directions()
    before = GroundPattern.of(here, FREQUENCY, PASTURE)
    after = GroundPattern.of(there, FREQUENCY, PASTURE)
    found = after.pattern(elevation, azimuth + np.arctan2(0.8, 0.6))
    assert np.abs(found - before.pattern(elevation, azimuth)).max() < 1e-9 * np.abs(found).max()
    assert after.sky_power == pytest.approx(before.sky_power, rel=1e-9)


@pytest.mark.parametrize(("height", "wanted"), [(0.5, [30.0]), (1.0, [14.48, 48.59]), (1.5, [9.59, 30.0, 56.44])])
def test_lobes_of_a_level_wire_over_a_perfect_conductor(height: float, wanted: list[float]) -> None:
    """sin(elevation) = (2n - 1) lambda/(4h) broadside: Balanis, Antenna Theory, section 4.7.4 (memory)."""
    wire = chain(np.array([[-0.01, 0.0, height], [0.01, 0.0, height]]) * WAVELENGTH, 1.0)
    pattern = GroundPattern.of(wire, FREQUENCY, PERFECT)
    lobes = pattern.lobes(0.5 * np.pi)
    assert [np.degrees(lobe.elevation) for lobe in lobes] == pytest.approx(wanted, abs=0.005)
    assert min(lobe.strength for lobe in lobes) == pytest.approx(1.0, abs=1e-6)


def test_a_low_upright_loop_over_soil_sends_most_to_the_zenith() -> None:
    pattern = GroundPattern.of(ring(0.05, 0.05, True), FREQUENCY, PASTURE)
    (lobe,) = pattern.lobes(0.0)
    assert np.degrees(lobe.elevation) == pytest.approx(90.0, abs=0.01)
    assert lobe.strength == 1.0
    assert np.degrees(pattern.strongest()[0]) == pytest.approx(90.0, abs=0.1)
    # over sea it is low, in its own plane
    elevation, azimuth = GroundPattern.of(ring(0.05, 0.05, True), FREQUENCY, SEA).strongest()
    assert np.degrees(elevation) < 30.0
    assert abs(np.sin(azimuth)) == pytest.approx(1.0, abs=1e-4)


@pytest.mark.parametrize("medium", [SEA, PASTURE])
def test_the_strongest_direction_and_the_lobes_are_the_maxima(medium: complex) -> None:
    pattern = GroundPattern.of(SOURCES[1], FREQUENCY, medium)
    elevation, azimuth = pattern.strongest()
    best = float(pattern.intensity(np.array([elevation]), np.array([azimuth]))[0])
    up, across = (g.ravel() for g in np.meshgrid(np.linspace(0.0, 0.5 * np.pi, 181), np.linspace(-3.1, 3.1, 90)))
    assert best >= float(pattern.intensity(up, across).max())
    lobes = pattern.lobes(azimuth)
    assert max(lobe.strength for lobe in lobes) == 1.0
    assert len(lobes) >= 2
    for lobe in lobes:
        near = minimize_scalar(
            lambda e: -float(pattern.intensity(np.array([e]), np.array([azimuth]))[0]),
            bounds=(lobe.elevation - 0.02, min(lobe.elevation + 0.02, 0.5 * np.pi)),
            method="bounded",
            options={"xatol": 1e-9},
        )
        assert lobe.elevation == pytest.approx(float(near.x), abs=1e-4)
        assert lobe.strength == pytest.approx(-float(near.fun) / best, rel=1e-5)


@pytest.mark.parametrize("azimuth", [0.0, 0.9, 2.2])
def test_a_cut_goes_on_over_the_zenith(azimuth: float) -> None:
    """Lobes of a cut and of the one opposite are the maxima of the half circle through both, by plain sampling."""
    pattern = GroundPattern.of(tilted(), FREQUENCY, PASTURE)
    angle = np.linspace(0.0, np.pi, 5761)  # the zenith is one of them
    over = angle > 0.5 * np.pi
    sent = pattern.intensity(np.where(over, np.pi - angle, angle), np.where(over, azimuth + np.pi, azimuth))
    tops = angle[1:-1][(sent[1:-1] > sent[:-2]) & (sent[1:-1] >= sent[2:])]
    found = [lobe.elevation for lobe in pattern.lobes(azimuth)]
    opposite = [np.pi - lobe.elevation for lobe in pattern.lobes(azimuth + np.pi)]
    assert sorted([*found, *opposite]) == pytest.approx(list(tops), abs=6e-4)
    assert np.abs(tops - 0.5 * np.pi).min() > 0.01  # none of these sources sends most straight up


def test_nothing_goes_along_real_soil() -> None:
    pattern = GroundPattern.of(SOURCES[0], FREQUENCY, SAND)
    assert pattern.intensity(np.zeros(3), np.array([0.0, 1.0, 2.0])).max() < 1e-20 * pattern.sky_power


def test_what_cannot_be_is_refused() -> None:
    loop = SOURCES[0]
    pattern = GroundPattern.of(loop, FREQUENCY, PASTURE)
    one = np.array([1.0])
    with pytest.raises(ValueError, match=r"segments reach below the ground"):
        GroundPattern.of(ring(0.25, 0.01, True), FREQUENCY, PASTURE)
    for wrong in (0.5 - 1j, 3.0 + 1j, complex(float("nan"), 0.0)):
        with pytest.raises(ValueError, match="relative permittivity"):
            GroundPattern.of(loop, FREQUENCY, wrong)
    with pytest.raises(ValueError, match="1 of 2 elevations lie outside"):
        pattern.pattern(np.array([0.5, -0.1]), np.zeros(2))
    with pytest.raises(ValueError, match=r"expected \(direction,\) twice"):
        pattern.pattern(one, np.ones(2))
    with pytest.raises(ValueError, match="expected more than zero"):
        pattern.gain(one, one, 0.0)
    for low, high in ((-0.1, 1.0), (1.0, 1.0), (0.5, 1.7)):
        with pytest.raises(ValueError, match="expected in order"):
            pattern.share_between(low, high)
    dead = GroundPattern.of(chain(np.stack([loop.start[0], loop.end[0]]), 0.0), FREQUENCY, PASTURE)
    for ask in (dead.strongest, lambda: dead.lobes(0.0), lambda: dead.share_between(0.0, 1.0)):
        with pytest.raises(ValueError, match="send nothing into the sky"):
            ask()
