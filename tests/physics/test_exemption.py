"""Exemption from evaluation: the power held against it, how near people come, and what it allows on a loop's axis."""

from math import pi, sqrt
from typing import Any

import numpy as np
import pytest
from designs import plain_design
from scipy.constants import c, epsilon_0, mu_0

import magsafe
from magsafe.analysis.exemption import axis_field, most_eirp, nearest_part, threshold_power
from magsafe.analysis.operating_point import OperatingPoint, operating_point
from magsafe.checks.exemption import WARNING
from magsafe.checks.keepout import keepout
from magsafe.checks.sheet import ExemptionPlace, ExemptionRecord
from magsafe.design.model import Design
from magsafe.rules import load_rule

ERP_TABLE = load_rule("us-fcc").exemptions[0]
RADIUS = 0.5  # m, of the plain loop
HALF_ROD = 0.011  # m


def small(**changes: Any) -> Design:
    """Return the plain loop on 1.85 MHz, where it is a hundredth of a wavelength round."""
    tuned = {"capacitor__capacitance": {"min": "10 pF", "max": "10000 pF"}, "transmission__0__frequency": "1.85 MHz"}
    return plain_design(**{**tuned, **changes})


def point_of(design: Design) -> OperatingPoint:
    return operating_point(design, design.transmission[0])


def records(design: Design) -> dict[str, ExemptionRecord]:
    return {each.name: each for each in magsafe.check(design).operating_points[0].exemptions}


def dipole_on_axis(erp: float, distance: float, frequency: float) -> float:
    """Magnetic field on the axis of a point dipole, for a directivity of 3/2: its closed form.

    H = m / (2 pi r^3) sqrt(1 + (k r)^2), P = eta m^2 k^4 / (6 pi), m RMS (Balanis, Antenna Theory, ch. 5; memory).
    """
    wavenumber = 2.0 * pi * frequency / c
    power = erp * 1.64 / 1.5
    moment = sqrt(6.0 * pi * power / sqrt(mu_0 / epsilon_0)) / wavenumber**2
    return moment / (2.0 * pi * distance**3) * sqrt(1.0 + (wavenumber * distance) ** 2)


@pytest.mark.parametrize("plane", ["vertical", "horizontal"])
@pytest.mark.parametrize("out", [0.5, 1.0, 3.0])
def test_the_field_on_the_axis_of_a_small_loop_is_that_of_a_dipole(plane: str, out: float) -> None:
    """To 0.5 %: at 1.85 MHz the loop's radius is 2 % of the wavelength over 2 pi."""
    position = {"capacitor__position": "top"} if plane == "vertical" else {}
    design = small(loop__plane=plane, loop__centre_height="3 m", **position)
    distance = out * c / 1.85e6 / (2.0 * pi)
    assert axis_field(point_of(design), 25.0, distance) == pytest.approx(
        dipole_on_axis(25.0, distance, 1.85e6), rel=5e-3
    )


def test_at_the_threshold_the_axis_of_a_small_loop_has_1_41_times_the_limit() -> None:
    """Exposure notes, section 4: 2.83 times the far field at right angles, which the threshold sets to half the limit.

    2.83 / 2 = 1.41, to 2 %: figures of the tables, and a loop that is not a point.
    """
    site = {"ground": "none", "rules": ["us-fcc"]}
    found = records(small(site=site, loop__centre_height="3 m", capacitor__position="top"))
    ratio = found["evaluation, by ERP and distance"].axis_field_ratio
    assert ratio == pytest.approx(sqrt(2.0), rel=0.02)


def test_power_and_ground_do_not_change_it() -> None:
    ratios = [
        records(small(site={"ground": ground, "rules": ["us-fcc"]}, loop__centre_height="3 m", **changes))
        for ground, changes in (("none", {}), ("none", {"transmission__0__power": "1 W"}), ("perfect", {}))
    ]
    values = [each["evaluation, by ERP and distance"].axis_field_ratio or 0.0 for each in ratios]
    assert values[1:] == pytest.approx([values[0]] * 2, rel=1e-9)


def test_the_distance_on_the_axis_counts_from_the_nearest_part() -> None:
    """A loop whose radius is not small beside the distance: people on the axis are nearer in than that.

    At 28.5 MHz and 1.674 m from the conductor the centre is 1.608 m away.
    """
    design = plain_design(transmission__0__frequency="28.5 MHz")
    point = point_of(design)
    apart = c / 28.5e6 / (2.0 * pi)
    from_centre = sqrt((apart + HALF_ROD) ** 2 - RADIUS**2)
    again = axis_field(point, 1.0, sqrt(from_centre**2 + RADIUS**2) - HALF_ROD)
    assert axis_field(point, 1.0, apart) == pytest.approx(again, rel=1e-6)
    ring = axis_field(point, 1.0, apart)
    assert ring is not None
    assert ring > 1.05 * (axis_field(point, 1.0, sqrt(apart**2 + RADIUS**2) - HALF_ROD) or 0.0)


def test_where_the_centre_is_that_far_it_is_the_centre() -> None:
    """Nearer than its radius nobody is off the axis: the largest field there is that in the middle, about I / (2 a)."""
    point = point_of(small())
    assert axis_field(point, 1.0, 0.2) == axis_field(point, 1.0, 0.4)


def test_eirp_is_power_times_efficiency_times_directivity() -> None:
    """A small loop: 100 W, its efficiency, 3/2 of directivity, each at its high end."""
    point = point_of(plain_design())
    efficiency = point.figures.conductor_efficiency.spread
    found = most_eirp(point, 100.0) or 0.0
    likely = 100.0 * (efficiency.likely or 0.0) * 1.5
    assert likely < found < 1.05 * likely
    assert most_eirp(point, 50.0) == pytest.approx(0.5 * found)
    assert found == pytest.approx(100.0 * (efficiency.high or 0.0) * 1.5, rel=0.01)


def test_the_line_takes_its_least() -> None:
    plain = most_eirp(point_of(plain_design()), 100.0) or 0.0
    lossy = plain_design(feed={"line_loss": {"low": "1 dB", "likely": "2 dB", "high": "3 dB"}})
    assert most_eirp(point_of(lossy), 100.0) == pytest.approx(plain * 10.0**-0.1, rel=1e-9)


def test_a_loop_that_is_not_computed_has_no_gain() -> None:
    design = plain_design(
        transmission__0__frequency="50.1 MHz", site={"ground": "none", "rules": ["us-fcc", "icnirp-2020"]}
    )
    assert most_eirp(point_of(design), 100.0) is None
    assert axis_field(point_of(design), 1.0, 1.0) is None
    found = records(design)
    for name in ("evaluation, by ERP and distance", "licence condition"):
        assert found[name].power is None
        assert found[name].exempt is None
        assert "gain is not known: no series capacitor" in (found[name].why or "")


def test_over_ground_the_larger_counts_and_without_a_height_nothing_is_known() -> None:
    """Who leaves the height out is exempt by no more than over any ground at any height."""
    design = plain_design(site__ground="sea water", loop__centre_height="2 m", transmission__0__frequency="28.5 MHz")
    point = point_of(design)
    over = point.figures.effective_isotropic_radiated_power.spread.high or 0.0
    free = most_eirp(point_of(plain_design(transmission__0__frequency="28.5 MHz")), point.power) or 0.0
    assert over > 2.0 * free
    assert most_eirp(point, point.power) == pytest.approx(over)
    anywhere = plain_design(site__ground="average", site__rules=["us-fcc"])
    assert most_eirp(point_of(anywhere), 100.0) is None
    told = [each for each in records(anywhere).values() if each.kind != "power"]
    assert told
    assert all(each.power is None and "centre_height" in (each.why or "") for each in told)


def test_a_mean_counts_the_pattern_and_a_crest_does_not() -> None:
    """CW, 40 % while keyed, 6 of any 36 minutes: 100 W x 0.4 x 6 / 30 = 8 W over 30 min, 40 W over 6 min."""
    over = {"transmit": "6 min", "listen": "30 min"}
    cw = {"frequency": "7.1 MHz", "power": "100 W", "mode": "CW", "over": over}
    design = plain_design(transmission__0=cw, site={"ground": "none", "rules": ["us-fcc", "jp", "icnirp-2020"]})
    found = records(design)
    assert found["evaluation, by power alone"].power == pytest.approx(8.0)
    assert found["regulation, by mean power"].power == pytest.approx(40.0)
    mean, crest = found["evaluation, by ERP and distance"].power, found["licence condition"].power
    assert (crest or 0.0) / (mean or 1.0) == pytest.approx(1.64 * 100.0 / 8.0)


@pytest.mark.parametrize(
    ("where", "expected"),
    [
        ({"along_axis": "8 m"}, 7.7 - HALF_ROD),  # the column's face, in front of the ring
        ({"in_plane": "5 m"}, 4.2 - HALF_ROD),  # its corner is as high as the centre: 5 - 0.3 - 0.5
        ({"in_plane": "5 m", "posture": "lying"}, sqrt(4.7**2 + 1.4**2) - RADIUS - HALF_ROD),  # up to 0.6 m
        ({"in_plane": "5 m", "height": "2 m"}, 4.5 - HALF_ROD),  # a point
        ({"along_axis": "3 m", "height": "2 m"}, sqrt(9.25) - HALF_ROD),
        ({"in_plane": "5 m", "floor": "3 m"}, sqrt(4.7**2 + 1.0) - RADIUS - HALF_ROD),  # from 3 m up
        ({"along_axis": "0 m"}, 0.0),  # the conductor runs through it
        ({"fence": "4 m"}, 3.5 - HALF_ROD),
    ],
)
def test_how_near_people_come_by_geometry(where: dict[str, str], expected: float) -> None:
    """A ring of 0.5 m about (0, 0, 2 m) in the plane x = 0, people 0.6 m square and 2 m tall; polygon to 2 mm."""
    site = {"ground": "none", "rules": ["us-fcc"]}
    design = plain_design(site=site, loop__centre_height="2 m", place=[{"name": "somebody", "who": "public", **where}])
    assert nearest_part(design, point_of(design), design.place[0]) == pytest.approx(expected, abs=2e-3)


def test_a_fence_has_people_on_its_floors() -> None:
    site = {"ground": "none", "rules": ["us-fcc"], "floors": ["0 m", "6 m"]}
    fence = [{"name": "somebody", "who": "public", "fence": "4 m"}]
    design = plain_design(site=site, loop__centre_height="5 m", place=fence)
    found = nearest_part(design, point_of(design), design.place[0])
    assert found == pytest.approx(sqrt(16.0 + 1.0) - RADIUS - HALF_ROD, abs=2e-3)


def test_a_loop_that_rotates_comes_nearest_at_its_worst_bearing() -> None:
    """At 5 m on the axis, turned by a right angle: 5 - 0.5, less half the column's diagonal."""
    site = {"ground": "none", "rules": ["us-fcc"]}
    place = [{"name": "somebody", "who": "public", "along_axis": "5 m"}]
    design = plain_design(site=site, loop__centre_height="2 m", loop__rotates=True, place=place)
    found = nearest_part(design, point_of(design), design.place[0])
    assert found == pytest.approx(4.5 - 0.3 * sqrt(2.0) - HALF_ROD, abs=2e-3)


def test_a_flat_loop_and_one_of_unknown_height() -> None:
    place = [{"name": "somebody", "who": "public", "across": "5 m"}]
    site = {"ground": "none", "rules": ["us-fcc"]}
    design = plain_design(site=site, loop__plane="horizontal", loop__centre_height="1 m", place=place)
    assert nearest_part(design, point_of(design), design.place[0]) == pytest.approx(4.2 - HALF_ROD, abs=2e-3)
    unknown = plain_design(site=site, loop__plane="horizontal", place=place)
    assert nearest_part(unknown, point_of(unknown), unknown.place[0]) is None
    (told,) = records(unknown)["evaluation, by ERP and distance"].places
    assert (told.exempt, told.why) == (None, "its distance is not known")


def test_a_winding_counts_with_its_mirror_image() -> None:
    """Nothing tells which way round it is wound: somebody on either side of it is as near, off its axis too."""
    turns = {"loop__turns": 4, "loop__turn_spacing": "100 mm", "loop__turn_arrangement": "side by side"}
    distances = []
    for side in ("0.6 m", "-0.6 m"):
        place = [{"name": "somebody", "who": "public", "along_axis": side, "in_plane": "0.35 m", "height": "2 m"}]
        design = plain_design(
            site={"ground": "none", "rules": ["us-fcc"]}, loop__centre_height="2 m", place=place,
            transmission__0__frequency="3.6 MHz", capacitor__position="top", **turns
        )  # fmt: skip
        distances.append(nearest_part(design, point_of(design), design.place[0]))
    assert distances[0] == pytest.approx(distances[1], rel=1e-9)


def test_near_by_the_field_falls_with_the_cube_of_the_distance_to_the_axis_of_the_rod() -> None:
    """On the axis of a ring H = I a^2 / (2 s^3), with s to the middle of the conductor, 11 mm under its surface."""
    point = point_of(small())
    near, far = axis_field(point, 1.0, 0.6) or 0.0, axis_field(point, 1.0, 1.0) or 0.0
    assert near / far == pytest.approx((1.011 / 0.611) ** 3, rel=3e-3)


def test_below_its_band_the_table_asks_for_an_evaluation() -> None:
    """47 CFR 1.1307(b)(3)(i)(C): from 0.3 MHz; the widest loop here, on 0.28 MHz, has its gain and no threshold."""
    design = plain_design(
        loop__diameter="8 m",
        loop__conductor={"form": "rod", "outer_diameter": "60 mm", "conductivity": "58 MS/m"},
        capacitor__capacitance={"min": "100 pF", "max": "50000 pF"},
        transmission__0__frequency="0.28 MHz",
        site={"ground": "none", "rules": ["us-fcc"]},
        loop__centre_height="6 m",
        place=[{"name": "somebody", "who": "public", "along_axis": "1 km"}],
    )
    found = records(design)["evaluation, by ERP and distance"]
    assert "no threshold at this frequency" in (found.why or "")
    assert found.axis_field_ratio is None
    (place,) = found.places
    assert (place.exempt, place.why) == (False, "no threshold at this frequency")


def test_thresholds_at_many_distances() -> None:
    """47 CFR 1.1307(b)(3)(i)(C), Table 1: 3450 R^2/f^2 from 6.72 m on at 7.1 MHz, nothing nearer."""
    found = threshold_power(ERP_TABLE, np.array([6.7, 6.73, 10.0]), 7.1e6)
    assert np.isnan(found[0])
    assert found[1:] == pytest.approx([3450.0 * 6.73**2 / 50.41, 3450.0 * 100.0 / 50.41])
    assert np.isnan(threshold_power(ERP_TABLE, np.array([1e3]), 0.2e6)).all()


def places_of(**changes: Any) -> dict[str, Any]:
    """Return what is told of two public places, one too near for the table."""
    people = [
        {"name": "walk", "who": "public", "along_axis": "8 m"},
        {"name": "gate", "who": "public", "along_axis": "4 m"},
        {"name": "desk", "who": "trained", "along_axis": "9 m"},
    ]
    site = {"ground": "none", "rules": ["us-fcc"]}
    found = records(plain_design(site=site, loop__centre_height="2 m", place=people, **changes))
    return {each.name: each for each in found["evaluation, by ERP and distance"].places}


def test_places_of_the_public_and_nobody_else() -> None:
    """At 7.1 MHz and 7.689 m: 3450 x 7.689^2 / 7.1^2 = 4046 W; at 3.689 m, within 6.72 m, an evaluation is required."""
    found = places_of()
    assert set(found) == {"walk", "gate"}
    assert found["walk"].threshold == pytest.approx(4046.0, rel=2e-3)
    assert found["walk"].exempt
    assert found["gate"].threshold is None
    assert found["gate"].exempt is False
    assert "evaluation is required" in found["gate"].why


def test_above_the_threshold_nothing_is_exempt() -> None:
    """At 21.2 MHz and 2.3 m: 3450 x 2.3^2 / 21.2^2 = 40.6 W, less than 100 W at 92 % and 1.47 over 1.64."""
    assert axis_place("100 W").exempt is False
    assert axis_place("100 W").threshold == pytest.approx(40.6, rel=1e-3)
    assert axis_place("49.2 W").exempt


def axis_place(power: str) -> ExemptionPlace:
    (place,) = records(at_the_threshold(power))["evaluation, by ERP and distance"].places
    return place


def at_the_threshold(power: str) -> Design:
    """Return the plain loop at 21.2 MHz with somebody 2.3 m from its conductor, on its axis."""
    on_axis = sqrt((2.3 + HALF_ROD) ** 2 - RADIUS**2)
    return plain_design(
        loop__centre_height="2 m",
        place=[{"name": "walk", "who": "public", "along_axis": f"{on_axis} m", "height": "2 m"}],
        site={"ground": "none", "rules": ["us-fcc"]},
        capacitor__position="top",
        transmission__0={"frequency": "21.2 MHz", "power": power},
    )


def test_who_is_exempt_may_stand_in_too_strong_a_field() -> None:
    """Why the warning stands with it: at 49 W all is exempt, and the field on the axis is over the limit."""
    assert axis_place("49 W").exempt
    sheet = magsafe.check(at_the_threshold("49 W"))
    (exposed,) = [each for each in sheet.operating_points[0].exposure if each.who == "public"]
    assert exposed.places[0].verdict == "stop"
    assert 1.2 < (exposed.places[0].field_ratio or 0.0) < sqrt(2.0)


def test_it_is_in_no_finding_and_no_ceiling() -> None:
    """At 49 W the place stops the loop and holds the ceiling, exempt or not."""
    sheet = magsafe.check(at_the_threshold("49 W"))
    assert sheet.verdict == "stop"
    assert sheet.power_ceiling.held_by == "exposure.us-fcc.public.walk"
    assert not [each.id for each in sheet.all_findings() if "exempt" in each.id]
    (people,) = keepout(sheet).operating_points
    assert people.exemptions == sheet.operating_points[0].exemptions
    assert all(each.warning == WARNING for each in people.exemptions)
