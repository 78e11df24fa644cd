"""What reaches the sky, its gain and its directions: by hand, by image theory, and over every soil of a span."""

from math import pi
from typing import Any

import numpy as np
import pytest
from designs import plain_design
from points import fed, likely, point
from scipy.constants import c, mu_0
from scipy.optimize import minimize_scalar
from scipy.special import sici

from magsafe.analysis.chain import RESISTANCE_ERROR, Chain, chain
from magsafe.analysis.sky import CUT_ANGLES, HALF_WAVE_DIPOLE, Pattern, Sky, pattern, sky
from magsafe.analysis.wires import wire_of
from magsafe.design import tables
from magsafe.design.shape import outline
from magsafe.physics.arrays import Array, ComplexArray
from magsafe.physics.far_field import FarField
from magsafe.physics.ground_pattern import GroundPattern, intensities
from magsafe.physics.half_space import relative_permittivity
from magsafe.physics.half_space_ring import ring_resistance_ratio, ring_sky_ratio
from magsafe.spread import Spread

PLANES = ["vertical", "horizontal"]
# Reference notes, section 7, at 7.1 MHz (computed there by two checkers): a dipole's resistance and what reaches the
# sky, over what it radiates in free space. Plane, mS/m, permittivity, height in wavelengths, R, sky.
TABLE = [
    ("vertical", 5000.0, 80, 0.05, 2.26, 1.82),
    ("vertical", 5000.0, 80, 0.25, 0.846, 0.757),
    ("vertical", 30.0, 20, 0.1, 1.85, 1.05),
    ("vertical", 5.0, 13, 0.05, 3.61, 0.918),
    ("vertical", 5.0, 13, 0.2, 1.04, 0.397),
    ("vertical", 5.0, 13, 0.5, 1.05, 0.603),
    ("vertical", 1.0, 5, 0.075, 1.98, 0.613),
    ("vertical", 1.0, 5, 1.0, 1.02, 0.582),
    ("horizontal", 5000.0, 80, 0.1, 0.211, 0.151),
    ("horizontal", 30.0, 20, 0.05, 4.13, 0.0545),
    ("horizontal", 5.0, 13, 0.05, 4.31, 0.0644),
    ("horizontal", 5.0, 13, 0.25, 0.818, 0.598),
    ("horizontal", 1.0, 5, 0.1, 1.29, 0.17),
    ("horizontal", 1.0, 5, 0.75, 0.986, 0.754),
]


def soil(millisiemens: float, permittivity: float) -> dict[str, Any]:
    return {"conductivity": f"{millisiemens} mS/m", "permittivity": permittivity}


def made(megahertz: float, **changes: Any) -> Chain:
    design = plain_design(transmission__0__frequency=f"{megahertz} MHz", **changes)
    return chain(design, megahertz * 1e6, outline(design.loop), Spread.exact(100.0))


def placed(plane: str, height: float, ground: Any, position: str = "side", **changes: Any) -> dict[str, Any]:
    """A loop in a plane, its centre at a height [m] over a ground.

    Upright, a capacitor at the side lets the charge's electric dipole stand: what it adds to the magnetic one on one
    side it takes away on the other, so that powers are those of the magnetic dipole alone.
    """
    where = {"capacitor__position": position} if plane == "vertical" else {}
    return {
        "loop__plane": plane, "loop__centre_height": f"{height:.6f} m", "site__ground": ground, **where, **changes
    }  # fmt: skip


def tiny(plane: str, height: float, ground: Any, megahertz: float = 7.1) -> Chain:
    """A loop of a 500th of a wavelength round, a magnetic dipole, its centre at a height in wavelengths."""
    wavelength = c / (megahertz * 1e6)
    diameter = 0.002 * wavelength / pi
    conductor = {"form": "rod", "outer_diameter": f"{40.0 * diameter:.6f} mm", "conductivity": "58 MS/m"}
    changes: dict[str, Any] = {"loop__diameter": f"{diameter:.9f} m", "loop__conductor": conductor}
    return made(megahertz, **placed(plane, height * wavelength, ground, **changes))


def sky_of(found: Chain) -> Sky:
    answer = sky(found)
    assert answer is not None
    return answer


def pattern_of(found: Chain) -> Pattern:
    answer = pattern(found)
    assert answer is not None
    return answer


def middle(spread: Spread) -> float:
    assert spread.likely is not None
    return spread.likely


def inside(spread: Spread, values: Array) -> bool:
    assert spread.low is not None
    assert spread.high is not None
    return bool(spread.low <= values.min() and values.max() <= spread.high)


# What reaches the sky -------------------------------------------------------------------------------------------


@pytest.mark.parametrize(("plane", "millisiemens", "permittivity", "height", "ratio", "share"), TABLE)
def test_a_tiny_loop_is_the_dipole_of_the_table(
    plane: str, millisiemens: float, permittivity: float, height: float, ratio: float, share: float
) -> None:
    over = tiny(plane, height, soil(millisiemens, permittivity)).around.over[0]
    assert over.radiated[0] / over.alone == pytest.approx(ratio, rel=0.005)
    assert over.sky[0].sum() / over.alone == pytest.approx(share, rel=0.005)


@pytest.mark.parametrize(("plane", "millisiemens", "permittivity", "height", "ratio", "share"), TABLE)
def test_what_reaches_the_sky_by_hand_from_the_table(
    plane: str, millisiemens: float, permittivity: float, height: float, ratio: float, share: float
) -> None:
    """sky Rrad/(R Rrad + losses); the table is a dipole's to three digits, the loop 0.037 wavelengths round."""
    metres = height * c / 7.1e6
    found = point(**placed(plane, metres, soil(millisiemens, permittivity), loop__diameter="0.5 m"))
    radiation, conductor = likely(found, "radiation_resistance"), likely(found, "conductor_resistance")
    by_hand = share * radiation / (ratio * radiation + conductor)
    assert likely(found, "overall_efficiency") == pytest.approx(by_hand, rel=0.01)
    assert likely(found, "ground_resistance") == pytest.approx((ratio - 1.0) * radiation, abs=0.015 * ratio * radiation)


TUBE = {"form": "tube", "outer_diameter": "22 mm", "wall": "1 mm", "conductivity": "49.3 MS/m"}


def test_the_worked_example_of_the_metre_loop() -> None:
    """Reference notes, section 7, lesson c: plumbing tube at 7.1 MHz, 1.5 m over average ground.

    26 milliohm more and 8.7 %, by a dipole of 6.04 milliohm; the solved loop radiates 6 % more at its port.
    """
    found = point(**placed("vertical", 1.5, soil(5.0, 13), loop__conductor=TUBE))
    more = likely(found, "radiation_resistance") / 6.04e-3
    assert more == pytest.approx(1.06, abs=0.01)
    assert likely(found, "ground_resistance") == pytest.approx(26e-3 * more, rel=0.035)
    assert likely(found, "overall_efficiency") == pytest.approx(0.087, rel=0.015)


@pytest.mark.parametrize("height", [0.05, 0.1, 0.15, 0.2])
def test_a_capacitor_on_top_sends_less_overhead_than_one_below_as_if_the_loop_were_higher(height: float) -> None:
    """By hand: of the current cos(kR a), a from the point opposite the port, cos(a) has the part 2 (kR)^2, an electric
    dipole of 2 kR of the magnetic one. Its image is opposed, the other's not: cos(kh) less or more 2 kR sin(kh).
    """

    def overhead(position: str) -> float:
        found = made(7.1, **placed("vertical", height * c / 7.1e6, "perfect", position))
        return float(pattern_of(found).cuts[0].gain[90]) * found.resistance("likely", found.likely)

    up, size = 2.0 * pi * height, 2.0 * pi * 0.5 * 7.1e6 / c
    above, below = (np.cos(up) + sign * 2.0 * size * np.sin(up) for sign in (-1.0, 1.0))
    assert overhead("top") / overhead("bottom") == pytest.approx((above / below) ** 2, rel=0.02)


@pytest.mark.parametrize("plane", PLANES)
@pytest.mark.parametrize("height", [0.8, 4.0, 11.0])
def test_over_a_perfect_plane_all_that_is_radiated_leaves(plane: str, height: float) -> None:
    """Poynting's theorem: the resistance of the loop with its image is the power through the upper half sphere."""
    changes = placed(plane, height, "perfect")
    for over in made(14.2, **changes).around.over:
        assert over.sky.sum() == pytest.approx(over.radiated[0], rel=RESISTANCE_ERROR)
        assert over.radiated[0] == over.flow.radiation
    found = point(transmission__0__frequency="14.2 MHz", **changes)
    radiated = likely(found, "radiation_resistance") + likely(found, "ground_resistance")
    wanted = radiated / likely(found, "total_resistance")
    assert likely(found, "overall_efficiency") == pytest.approx(wanted, rel=RESISTANCE_ERROR)


def test_in_free_space_it_is_the_efficiency_of_the_conductor_and_the_gain_that_of_its_directivity() -> None:
    found = point(loop__joint=[{"name": "lugs", "kind": "sliding contact", "at": "capacitor"}])
    figures = found.figures
    assert figures.overall_efficiency.spread == figures.conductor_efficiency.spread
    assert figures.ground_resistance.spread == Spread.exact(0.0)
    best = max(likely(found, "directivity_along_axis"), likely(found, "directivity_in_plane"))
    assert best == pytest.approx(1.5, rel=0.02)
    assert likely(found, "gain") == pytest.approx(best * likely(found, "conductor_efficiency"))
    assert likely(found, "effective_isotropic_radiated_power") == pytest.approx(100.0 * likely(found, "gain"))
    for name in ("gain_elevation", "share_above_60_degrees", "share_below_20_degrees"):
        assert not getattr(figures, name).spread.known
        assert "free space" in getattr(figures, name).why


@pytest.mark.parametrize(("plane", "height"), [("vertical", 2.0), ("horizontal", 4.0)])
def test_it_is_never_more_than_all(plane: str, height: float) -> None:
    """A full-wave loop of wire loses less than the methods' error over a perfect plane."""
    found = fed(100.4, loop__plane=plane, loop__centre_height=f"{height} m", site__ground="perfect")
    spread = found.figures.overall_efficiency.spread
    assert 0.99 < middle(spread) <= 1.0
    assert spread.high == 1.0


def test_without_a_ground_only_ends_are_told_and_without_a_height_nothing() -> None:
    # What leaves over any soil there is: wider than over each of the table.
    found = sky_of(made(7.1, **placed("vertical", 2.0, None)))
    for soil_name in ("sea water", "poor"):
        named = sky_of(made(7.1, **placed("vertical", 2.0, soil_name)))
        for name in ("efficiency", "gain", "above_60", "below_20", "elevation"):
            wide, narrow = getattr(found, name), getattr(named, name)
            assert wide.likely is None
            assert wide.low <= narrow.low * 1.02
            assert wide.high >= narrow.high * 0.98
    assert sky(made(7.1, site__ground="average")) is None
    assert pattern(made(7.1, **placed("vertical", 2.0, None))) is None
    bare = point(site__ground="average").figures
    for name in ("overall_efficiency", "gain", "share_above_60_degrees", "effective_radiated_power"):
        assert not getattr(bare, name).spread.known
        assert "loop.centre_height" in getattr(bare, name).why


# Spreads --------------------------------------------------------------------------------------------------------

JOINT = [{"name": "clamps", "resistance": {"low": "1 mohm", "likely": "8 mohm", "high": "40 mohm"}, "at": "capacitor"}]
SPANS = [
    ("vertical", 7.1, 2.0, "average"),
    ("vertical", 7.1, 12.0, "poor"),
    ("vertical", 14.2, 3.0, "sea water"),
    ("vertical", 10.1, 0.8, "fresh water"),
    ("horizontal", 7.1, 2.0, "very good"),
    ("horizontal", 10.1, 9.0, "average"),
]


def soils_within(name: str, frequency: float) -> ComplexArray:
    """Many soils of a named span, at other places than a grid of nine by four has."""
    row = tables.soils()[name]
    ends = [(each.low or 0.0, each.high or 0.0) for each in (row.conductivity, row.permittivity)]
    conductivity, permittivity = np.geomspace(*ends[0], 14), np.geomspace(*ends[1], 7)
    return relative_permittivity(permittivity, conductivity[:, None], frequency).ravel()


def losses(found: Chain) -> Array:
    """Losses between their ends [ohm]."""
    low, high = (found.resistance(end, found.likely) - found.likely.radiated for end in ("low", "high"))
    return np.linspace(low, high, 9)


@pytest.mark.parametrize(("plane", "megahertz", "height", "name"), SPANS)
def test_no_soil_of_a_span_with_any_loss_lies_outside_the_efficiency(
    plane: str, megahertz: float, height: float, name: str
) -> None:
    """By the ring of uniform current (half_space_ring, held against the reference tables), its current as alone."""
    found = made(megahertz, **placed(plane, height, name, loop__joint=JOINT, loop__diameter="0.5 m"))
    up, size = 4.0 * pi * height * found.frequency / c, 2.0 * pi * 0.25 * found.frequency / c
    soils, upright = soils_within(name, found.frequency), plane == "vertical"
    radiation = found.around.free[0].radiation
    radiated = radiation * ring_resistance_ratio(upright, soils, up, size)
    leaves = radiation * ring_sky_ratio(upright, soils, up, size)
    values = leaves[:, None] / (radiated[:, None] + losses(found))
    spread = sky_of(found).efficiency
    assert inside(spread, values)
    # No wider than the methods' errors and what the capacitance of the gap and the image leave open.
    assert (spread.low or 0.0) > 0.93 * values.min()
    assert (spread.high or 0.0) < 1.07 * values.max()


@pytest.mark.parametrize(("plane", "megahertz", "height", "name"), SPANS)
def test_no_soil_of_a_span_lies_outside_gain_shares_and_elevation(
    plane: str, megahertz: float, height: float, name: str
) -> None:
    found = made(megahertz, **placed(plane, height, name, loop__joint=JOINT, loop__diameter="0.5 m"))
    answer, frequency = sky_of(found), found.frequency
    size, up = 2.0 * pi * 0.25 * frequency / c, 4.0 * pi * height * frequency / c
    for relative in soils_within(name, frequency)[::9]:
        for over in found.around.over:
            far = GroundPattern.of(over.flow.segments(), frequency, complex(relative))
            assert inside(answer.above_60, np.array([far.share_between(pi / 3.0, pi / 2.0)]))
            assert inside(answer.below_20, np.array([far.share_between(0.0, pi / 9.0)]))
        far = GroundPattern.of(found.around.free[0].segments(), frequency, complex(relative))
        elevation, azimuth = far.strongest()
        # The spread's ends are directions that were tried, three degrees apart.
        off = np.radians(1.5)
        assert (answer.elevation.low or 0.0) - off <= elevation <= (answer.elevation.high or 0.0) + off
        ratio = float(ring_resistance_ratio(plane == "vertical", np.asarray(relative), up, size))
        into = found.around.free[0].radiation * ratio + losses(found)
        sent = far.intensity(np.array([elevation]), np.array([azimuth]))
        assert inside(answer.gain, 4.0 * pi * sent / into)


@pytest.mark.parametrize("plane", PLANES)
@pytest.mark.parametrize("height", [3.3, 17.0, 29.5])
def test_no_direction_between_those_tried_is_stronger_than_the_gain(plane: str, height: float) -> None:
    """A quarter of a degree by five, and losses whose least is not the likely one, which is searched more finely."""
    lossy = {"low": "0 ohm", "likely": "0.5 ohm", "high": "1 ohm"}
    found = made(28.5, **placed(plane, height, "perfect", capacitor__series_resistance=lossy))
    over = found.around.over[0]
    up, across = (
        grid.ravel()
        for grid in np.meshgrid(np.radians(np.arange(0.5, 90.1, 0.25)), np.radians(np.arange(0.0, 360.0, 5.0)))
    )
    sent = intensities(over.flow.segments(), 28.5e6, over.permittivity, up, across).max()
    gain = 4.0 * pi * sent / found.resistance("low", found.likely)
    spread = sky_of(found).gain
    assert 1.08 * middle(spread) < gain <= (spread.high or 0.0)
    assert (spread.high or 0.0) < 1.03 * gain


# By image theory ------------------------------------------------------------------------------------------------


def test_a_small_loop_low_over_a_perfect_plane_by_hand() -> None:
    """Magnetic dipole and image: Balanis, Antenna Theory, chapters 4 and 5 (memory).

    Upright, the field is doubled into half the sphere: 2 x 1.5, along the ground, and the power of all bearings goes as
    1 + s2, s the sine of the elevation. Flat, the image takes away: cos2 sin2 of the elevation, so 1/4 at 45 degrees
    over a mean of 1/15, 3.75, and the power goes as s2 - s4.
    """
    upright, flat = (sky_of(tiny(plane, 0.02, "perfect")) for plane in PLANES)
    assert middle(upright.gain) / middle(upright.efficiency) == pytest.approx(3.0, rel=0.01)
    assert middle(flat.gain) / middle(flat.efficiency) == pytest.approx(3.75, rel=0.01)
    assert middle(upright.elevation) == pytest.approx(0.0, abs=np.radians(5.0))
    assert middle(flat.elevation) == pytest.approx(pi / 4.0, abs=np.radians(0.5))

    def below(degrees: float, power: int) -> float:
        s = np.sin(np.radians(degrees))
        return float((s + s**3 / 3.0) * 3.0 / 4.0 if power == 0 else (s**3 / 3.0 - s**5 / 5.0) * 7.5)

    for answer, power in ((upright, 0), (flat, 2)):
        assert middle(answer.above_60) == pytest.approx(1.0 - below(60.0, power), rel=0.01)
        assert middle(answer.below_20) == pytest.approx(below(20.0, power), rel=0.01)


def flat_factor(elevation: Any, height: float) -> Any:
    """Power of a flat small loop over a perfect plane, height in wavelengths: cos2(a) sin2(kh sin a)."""
    return (np.cos(elevation) * np.sin(2.0 * pi * height * np.sin(elevation))) ** 2


@pytest.mark.parametrize("height", [0.1, 0.25, 0.5, 0.8])
def test_a_flat_loop_is_strongest_where_its_image_adds(height: float) -> None:
    """Array factor of two opposed sources: Balanis, Antenna Theory, section 4.7 (memory)."""
    rough = max(np.radians(np.arange(1.0, 90.0)), key=lambda a: float(flat_factor(a, height)))
    found = minimize_scalar(lambda a: -flat_factor(a, height), bounds=(rough - 0.05, rough + 0.05), method="bounded")
    assert middle(sky_of(tiny("horizontal", height, "perfect")).elevation) == pytest.approx(
        found.x, abs=np.radians(0.3)
    )


@pytest.mark.parametrize("height", [0.05, 0.2, 0.3])
def test_an_upright_loop_is_strongest_along_a_perfect_plane(height: float) -> None:
    """Likewise cos2(kh sin a) in its plane. A plane that falls short of perfect by a millionth sends nothing along."""
    assert middle(sky_of(tiny("vertical", height, "perfect")).elevation) == pytest.approx(0.0, abs=np.radians(2.5))


@pytest.mark.parametrize("height", [0.6, 1.1])
def test_the_lobes_of_a_flat_loop_are_those_of_its_array_factor(height: float) -> None:
    found = pattern_of(tiny("horizontal", height, "perfect"))
    a = np.radians(np.arange(0.0, 90.0, 0.01))
    value = flat_factor(a, height)
    tops = 1 + np.flatnonzero((value[1:-1] > value[:-2]) & (value[1:-1] > value[2:]))
    for azimuth in (0.0, pi / 2.0):
        lobes = sorted((each for each in found.lobes if each.azimuth == azimuth), key=lambda each: each.elevation)
        assert [each.elevation for each in lobes] == pytest.approx(list(a[tops]), abs=np.radians(0.2))
        strength = value[tops] / value.max()
        assert [each.strength for each in lobes] == pytest.approx(list(strength), rel=0.01, abs=0.001)
        assert all(each.near and each.far for each in lobes)
    assert [each.gain for each in found.lobes] == sorted((each.gain for each in found.lobes), reverse=True)


# Powers ---------------------------------------------------------------------------------------------------------


def test_effective_radiated_powers_are_gain_times_power_at_crest_and_on_average() -> None:
    """Radio Regulations, 1.161 and 1.162 (memory)."""
    line = {"low": "0.2 dB", "likely": "1 dB", "high": "2 dB"}
    figures = point(
        **placed("vertical", 2.0, "average"),
        feed={"line_loss": line},
        transmission__0={"frequency": "7.1 MHz", "power": "100 W", "mode": "SSB"},
    ).figures
    gain = figures.gain.spread
    for end, decibels in (("low", 2.0), ("likely", 1.0), ("high", 0.2)):
        crest = getattr(gain, end) * 100.0 * 10.0 ** (-0.1 * decibels)
        assert getattr(figures.effective_isotropic_radiated_power.spread, end) == pytest.approx(crest)
        assert getattr(figures.mean_effective_isotropic_radiated_power.spread, end) == pytest.approx(0.5 * crest)
        assert getattr(figures.effective_radiated_power.spread, end) == pytest.approx(crest / 1.64)
        assert getattr(figures.mean_effective_radiated_power.spread, end) == pytest.approx(0.5 * crest / 1.64)


def test_the_gain_of_a_half_wave_dipole() -> None:
    """4/Cin(2 pi): Balanis, Antenna Theory, section 4.6 (memory)."""
    x = 2.0 * pi
    assert pytest.approx(4.0 / (np.euler_gamma + np.log(x) - sici(x)[1]), abs=0.002) == HALF_WAVE_DIPOLE


# Directions -----------------------------------------------------------------------------------------------------


def test_intensities_over_several_soils_are_those_over_each() -> None:
    segments = made(14.2, **placed("vertical", 3.0, "average")).around.free[0].segments()
    random = np.random.default_rng(5)
    elevation, azimuth = random.uniform(0.0, pi / 2.0, 50), random.uniform(-pi, pi, 50)
    soils = np.array([13.0 - 6.3j, 80.0 - 6000.0j, 4.0 + 0j, 1.0 - 1e12j])
    found = intensities(segments, 14.2e6, soils, elevation, azimuth)
    assert found.shape == (4, 50)
    for row, relative in zip(found, soils, strict=True):
        wanted = GroundPattern.of(segments, 14.2e6, complex(relative)).intensity(elevation, azimuth)
        assert row == pytest.approx(wanted, rel=1e-12)


@pytest.mark.parametrize(("plane", "height", "ground"), [("vertical", 6.0, "poor"), ("horizontal", 3.0, "average")])
def test_likely_shares_gain_and_elevation_are_those_of_the_far_field(plane: str, height: float, ground: str) -> None:
    """The shares come from plane waves; here they are sums over directions."""
    found = made(14.2, **placed(plane, height, ground))
    row = tables.soils()[ground]
    relative = relative_permittivity(row.permittivity.likely or 0.0, row.conductivity.likely or 0.0, 14.2e6)
    far = GroundPattern.of(found.around.free[0].segments(), 14.2e6, complex(relative))
    answer, into = sky_of(found), found.resistance("likely", found.likely)
    assert middle(answer.above_60) == pytest.approx(far.share_between(pi / 3.0, pi / 2.0), rel=1e-4)
    assert middle(answer.below_20) == pytest.approx(far.share_between(0.0, pi / 9.0), rel=1e-4)
    assert middle(answer.efficiency) == pytest.approx(far.sky_power / into, rel=1e-4)
    up, across = np.meshgrid(np.radians(np.arange(0.0, 90.1, 0.5)), np.radians(np.arange(0.0, 360.0, 5.0)))
    best = far.gain(up.ravel(), across.ravel(), into)
    assert middle(answer.gain) == pytest.approx(best.max(), rel=1e-3)
    assert middle(answer.elevation) == pytest.approx(up.ravel()[best.argmax()], abs=np.radians(1.0))


def test_the_cuts_run_from_one_horizon_over_the_zenith_to_the_other() -> None:
    """Over a perfect plane by the loop and its image (FarField), towards the capacitor first in the loop's plane."""
    found = made(28.5, **placed("vertical", 5.0, "perfect"))
    over, angle = found.around.over[0], CUT_ANGLES
    wire = wire_of(over.flow.shape)
    assert wire.nodes[0, 1] > 0.45  # the port is on the side of positive y
    far = FarField.of(over.flow.segments(), 28.5e6, over_plane=True)
    for cut, azimuth in zip(pattern_of(found).cuts, (0.0, pi / 2.0), strict=True):
        # Angle from the zenith, turned to the other side beyond it; the horizon itself is left out.
        field = far.pattern(np.abs(pi / 2.0 - angle), np.where(angle > pi / 2.0, azimuth + pi, azimuth))
        wanted = 4.0 * pi * (np.abs(field) ** 2).sum(axis=1) / (mu_0 * c) / found.resistance("likely", found.likely)
        assert cut.azimuth == azimuth
        assert cut.gain[1:-1] == pytest.approx(wanted[1:-1], rel=2e-3, abs=1e-3 * wanted.max())
    in_plane = pattern_of(found).cuts[1].gain
    assert np.abs(in_plane[5:40] / in_plane[::-1][5:40] - 1.0).max() > 0.1


def test_a_capacitor_at_the_side_makes_the_sides_differ_and_each_lobe_is_a_maximum_there() -> None:
    found = made(28.5, **placed("vertical", 5.0, "average"))
    answer, into = pattern_of(found), found.resistance("likely", found.likely)
    relative = found.around.over[0].permittivity[0]
    far = GroundPattern.of(found.around.free[0].segments(), 28.5e6, complex(relative))
    across = [each for each in answer.lobes if each.azimuth > 0.0]
    assert {(each.near, each.far) for each in across} == {(True, False), (False, True)}
    assert max(each.gain for each in answer.lobes) <= middle(sky_of(found).gain) * (1.0 + 1e-6)
    assert all((each.near, each.far) == (True, True) for each in answer.lobes if each.azimuth == 0.0)
    for each in answer.lobes:
        azimuth = each.azimuth if each.near else each.azimuth + pi
        near = np.clip(each.elevation + np.array([-0.05, 0.0, 0.05]), 0.0, pi / 2.0)
        gain = far.gain(near, np.full(3, azimuth), into)
        assert gain[1] == pytest.approx(each.gain, rel=1e-6)
        assert gain[1] >= max(gain[0], gain[2])
        assert each.strength == pytest.approx(each.gain / middle(sky_of(found).gain), rel=1e-6)


@pytest.mark.parametrize(("plane", "megahertz"), [("vertical", 7.1), ("vertical", 3.6)])
def test_a_lobe_overhead_is_told_once_and_a_loop_alike_on_both_sides_too(plane: str, megahertz: float) -> None:
    """A low upright loop over soil sends straight up; an electric dipole's share tells its plane from its axis."""
    lobes = pattern_of(made(megahertz, **placed(plane, 2.0, "average", "top"))).lobes
    overhead = [each for each in lobes if each.elevation > np.radians(89.0)]
    assert len(overhead) == 1
    assert overhead[0].strength == pytest.approx(1.0, abs=1e-3) or lobes[0].strength == pytest.approx(1.0)
    assert all(each.near and each.far for each in lobes)


def test_no_lobe_is_stronger_than_the_strongest_direction() -> None:
    """By hand: along the plane 1, overhead cos2(kh) = 0.996."""
    found = tiny("vertical", 0.01, "perfect")
    assert max(each.strength for each in pattern_of(found).lobes) == pytest.approx(1.0, abs=1e-4)
    assert middle(sky_of(found).elevation) < np.radians(10.0)
