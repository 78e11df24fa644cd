"""Fields of whole designs, the power that rules judge, and keep-out distances, by their laws."""

from math import pi, sqrt
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from designs import plain_design
from hypothesis import assume, given, settings
from hypothesis import strategies as st

import magsafe
from magsafe.analysis.exposure import Use, bases, key_down, use_of
from magsafe.analysis.field_source import FAR, NEAR, FieldSource, field_source, touch_distance
from magsafe.analysis.keepout import Distances, keep_out, reach_weight, round_up, shells
from magsafe.analysis.operating_point import operating_point
from magsafe.analysis.people import _fence, at_places, search
from magsafe.design.model import Design, Place
from magsafe.design.shape import outline
from magsafe.physics import near_field
from magsafe.rules.duty import OnAirShare, Over, Pattern
from magsafe.rules.limit import WHO, load_rule

SAMPLES = sorted((Path(__file__).parents[2] / "sample_designs").glob("*.toml"))
RULES = ("us-fcc", "icnirp-2020")


def source_of(nodes: int = NEAR, /, **changes: Any) -> FieldSource:
    design = plain_design(**changes)
    return field_source(design, operating_point(design, design.transmission[0]), nodes)


# Fields ----------------------------------------------------------------------------------------------------


def test_on_the_axis_the_field_is_that_of_a_ring() -> None:
    """I a^2 / 2(a^2 + z^2)^1.5 (Biot-Savart, any textbook); 0.2 MHz, where kz stays below 0.02."""
    source = source_of(transmission__0__frequency="0.2 MHz", capacitor__position="top")
    (case,) = source.point.ground_cases
    z = np.array([0.5, 1.0, 2.0, 4.0])
    found = source.strongest(np.stack([z, 0.0 * z, 0.0 * z], axis=1))
    ring = 0.25 / (2.0 * (0.25 + z**2) ** 1.5)
    np.testing.assert_allclose(np.sqrt(found.magnetic / case.square), ring, rtol=0.006)


def test_far_away_the_power_through_a_sphere_is_what_the_loop_radiates() -> None:
    """Conservation: E x H through a sphere of 200 m against radiation resistance times current squared.

    Both come of one solved current: what is left is the stated error, by which fields are widened.
    """
    source = source_of(FAR, transmission__0__frequency="7.1 MHz", capacitor__position="top")
    nodes, weights = np.polynomial.legendre.leggauss(24)
    turns = np.arange(24) / 24.0 * 2.0 * pi
    elevation, bearing = np.meshgrid(nodes, turns, indexing="ij")
    across = np.sqrt(1.0 - elevation**2)
    unit = np.stack([across * np.cos(bearing), across * np.sin(bearing), elevation], axis=-1).reshape(-1, 3)
    found = source.strongest(200.0 * unit)
    density = np.sqrt(found.electric * found.magnetic).reshape(24, 24)
    power = float(weights @ density.sum(axis=1)) * 2.0 * pi / 24.0 * 200.0**2
    (case,) = source.point.ground_cases
    wider = (1.0 + source.point.field_error) ** 2
    assert wider < 1.02
    # 200 m are 30 over the wavenumber: E H is the power density but for a thousandth.
    assert power == pytest.approx(case.square * case.flow.radiation * wider, rel=2e-3)
    likely = case.likely_square * case.flow.radiation
    assert likely < power < 1.03 * likely


def test_fewer_quadrature_points_a_metre_off_change_nothing_that_matters() -> None:
    near, far = source_of(NEAR), source_of(FAR)
    rng = np.random.default_rng(7)
    unit = rng.normal(size=(300, 3))
    points = unit / np.linalg.norm(unit, axis=1)[:, None] * rng.uniform(1.5, 30.0, (300, 1))
    one, other = near.strongest(points), far.strongest(points)
    np.testing.assert_allclose(np.sqrt(other.magnetic), np.sqrt(one.magnetic), rtol=1e-3)
    np.testing.assert_allclose(np.sqrt(other.electric), np.sqrt(one.electric), rtol=1e-3)


def test_close_over_a_perfect_plane_the_field_along_it_doubles() -> None:
    """Image theory: the horizontal dipole of an upright loop has an image of the same sense."""
    free = source_of(loop__centre_height="1 m", transmission__0__frequency="1.9 MHz")
    over = source_of(loop__centre_height="1 m", site__ground="perfect", transmission__0__frequency="1.9 MHz")
    point = np.array([[12.0, 0.0, 0.0]])
    ratio = sqrt(float(over.strongest(point).magnetic[0] / free.strongest(point).magnetic[0]))
    assert ratio == pytest.approx(2.0, rel=0.02)


def test_the_stronger_of_free_space_and_image_counts() -> None:
    """A flat loop's image cancels: over soil the field of free space stays."""
    flat: dict[str, Any] = {"loop__plane": "horizontal", "loop__centre_height": "1 m"}
    free, over = source_of(**flat), source_of(**flat, site__ground="average")
    point = np.array([[8.0, 0.0, 1.0]])
    assert float(over.strongest(point).magnetic[0]) >= float(free.strongest(point).magnetic[0])


def test_an_unstated_capacitor_position_takes_the_strongest() -> None:
    point = np.array([[0.3, 1.2, 0.4]])
    unknown = source_of().strongest(point)
    each = [source_of(capacitor__position=p).strongest(point) for p in ("top", "bottom", "side")]
    assert float(unknown.electric[0]) == pytest.approx(max(float(e.electric[0]) for e in each))
    assert min(float(e.electric[0]) for e in each) < 0.9 * float(unknown.electric[0])


@pytest.mark.parametrize(
    ("shape", "height"),
    [({"shape": "polygon", "sides": 4, "side": "1 m"}, "2 m"), ({"shape": "circle", "diameter": "1 m"}, "2 m")],
)
@pytest.mark.parametrize("plane", ["vertical", "horizontal"])
def test_wires_lie_where_the_design_says(shape: dict[str, Any], height: str, plane: str) -> None:
    conductor = {"form": "rod", "outer_diameter": "22 mm", "conductivity": "58 MS/m"}
    loop = {**shape, "plane": plane, "centre_height": height, "conductor": conductor}
    source = source_of(loop=loop)
    which = 0 if plane == "horizontal" else 2  # with its port at the side, where the place is not stated
    wire = source.wires[which]
    middle = 0.5 * (wire.start.min(axis=0) + wire.start.max(axis=0))
    np.testing.assert_allclose(middle, [0.0, 0.0, 2.0], atol=3e-3)
    normal = 0 if plane == "vertical" else 2
    assert float(np.ptp(wire.start[:, normal])) == 0.0
    assert float(wire.length.sum()) == pytest.approx(outline(source.design.loop).perimeter, rel=2e-3)
    assert float(np.linalg.norm(wire.start - [0.0, 0.0, 2.0], axis=1).max()) <= source.reach * 1.002
    # The port is the first segment: at the side of a polygon, half way along it.
    port = 0.5 * (wire.start[0] + wire.end[0])
    np.testing.assert_allclose(source.ports[which], port)
    towards = [0.5, 0.0, 2.0] if plane == "horizontal" else [0.0, 0.5, 2.0]
    np.testing.assert_allclose(port, towards, atol=2e-3)


@pytest.mark.parametrize(("position", "where"), [("top", (0.0, 2.5)), ("bottom", (0.0, 1.5)), ("side", (0.5, 2.0))])
def test_the_capacitor_sits_where_it_is_said_to(position: str, where: tuple[float, float]) -> None:
    source = source_of(loop__centre_height="2 m", capacitor__position=position)
    np.testing.assert_allclose(source.ports[0], [0.0, *where], atol=2e-3)


# Places ----------------------------------------------------------------------------------------------------


def place(**keys: Any) -> Place:
    from magsafe.units import POSITION, read_quantity

    made: dict[str, Any] = {
        k: read_quantity(v, POSITION) if isinstance(v, str) and k not in ("posture", "when") else v
        for k, v in keys.items()
    }
    return Place.model_construct(**{"name": "p", "who": "public", "when": "always", **made})


@pytest.mark.parametrize(
    "where",
    [
        {"along_axis": "1.5 m", "in_plane": "0.2 m", "posture": "standing"},
        {"along_axis": "0.8 m", "in_plane": "1.1 m", "posture": "sitting"},
        {"along_axis": "3 m", "in_plane": "-2 m", "posture": "lying"},
    ],
)
def test_the_worst_point_of_a_column_by_brute_force(where: dict[str, Any]) -> None:
    source = source_of(loop__centre_height="1.6 m", site__ground="average", capacitor__position="top")
    (found,) = search(source, (place(**where),))
    made = place(**where)
    high = {"standing": 2.0, "sitting": 1.4, "lying": 0.6}[where["posture"]]
    low_corner = np.array([(made.along_axis or 0.0) - 0.3, (made.in_plane or 0.0) - 0.3, 0.0])
    steps = np.stack(np.meshgrid(*[np.linspace(0.0, 1.0, n) for n in (17, 17, 41)]), axis=-1).reshape(-1, 3)
    points = low_corner + steps * [0.6, 0.6, high]
    squares = source.strongest(points)
    assert sqrt(found.magnetic) >= sqrt(float(squares.magnetic.max())) * 0.997
    assert sqrt(found.electric) >= sqrt(float(squares.electric.max())) * 0.997
    assert sqrt(found.magnetic) <= sqrt(float(squares.magnetic.max())) * 1.03


def test_a_rotating_loop_is_judged_at_its_worst_bearing() -> None:
    where = {"along_axis": "0 m", "in_plane": "2.5 m"}
    fixed = source_of(loop__centre_height="1.6 m", site__ground="average")
    turning = source_of(loop__centre_height="1.6 m", site__ground="average", loop__rotates=True)
    (still,), (turned,) = search(fixed, (place(**where),)), search(turning, (place(**where),))
    (on_axis,) = search(fixed, (place(along_axis="2.5 m", in_plane="0 m"),))
    assert turned.magnetic > 1.5 * still.magnetic
    assert sqrt(turned.magnetic) >= sqrt(on_axis.magnetic) * 0.999


def test_a_fence_is_the_worst_of_what_lies_outside_it() -> None:
    source = source_of(loop__centre_height="1.6 m", site__ground="average", capacitor__position="side")
    (found,) = search(source, (place(fence="3 m"),))
    rng = np.random.default_rng(5)
    turn, far, up = rng.uniform(0, 2 * pi, 5000), 3.0 + rng.exponential(2.0, 5000), rng.uniform(0.0, 2.0, 5000)
    squares = source.strongest(np.stack([far * np.cos(turn), far * np.sin(turn), up], axis=1))
    assert sqrt(found.magnetic) >= sqrt(float(squares.magnetic.max())) * 0.99
    assert sqrt(found.electric) >= sqrt(float(squares.electric.max())) * 0.99


def test_far_places_in_coarse_pieces_say_the_same() -> None:
    source = source_of(loop__centre_height="1.6 m", site__ground="average", capacitor__position="side")
    spots = {"a": "1.9 m", "b": "0.9 m", "c": "6 m"}
    places = tuple(place(along_axis=away).model_copy(update={"name": name}) for name, away in spots.items())
    together = at_places(source.design, source.point, places)
    for one, other in zip(together, search(source, places), strict=True):
        assert sqrt(one.magnetic) == pytest.approx(sqrt(other.magnetic), rel=3e-3)
        assert sqrt(one.electric) == pytest.approx(sqrt(other.electric), rel=6e-3)


def test_between_the_points_of_a_fence_two_percent_of_field_are_added() -> None:
    source = source_of(loop__centre_height="1.6 m", site__ground="average", capacitor__position="top")
    fence = place(fence="3 m")
    (found,) = search(source, (fence,))
    looked_at = source.strongest(_fence(source, fence))
    assert found.magnetic == pytest.approx(1.02**2 * float(looked_at.magnetic.max()))
    assert found.electric == pytest.approx(1.02**2 * float(looked_at.electric.max()))


def test_fields_are_widened_by_the_stated_error() -> None:
    source = source_of(transmission__0__frequency="14.2 MHz", capacitor__position="top")
    (case,), (wire,) = source.point.ground_cases, source.wires
    points = np.array([[2.0, 0.5, 0.3], [0.4, 3.0, -1.0]])
    electric, magnetic = near_field.fields(points, wire, 14.2e6)
    wider = case.square * (1.0 + source.point.field_error) ** 2
    found = source.strongest(points)
    np.testing.assert_allclose(found.electric, wider * near_field.magnitude(electric) ** 2)
    np.testing.assert_allclose(found.magnetic, wider * near_field.magnitude(magnetic) ** 2)
    assert source.point.field_error == 0.005


def test_near_the_bodies_the_electric_field_is_not_trusted() -> None:
    source = source_of(loop__centre_height="1.6 m", site__ground="average", capacitor__position="top")
    far, near, inside = search(source, (place(along_axis="2 m"), place(along_axis="0.5 m"), place(in_plane="0.5 m")))
    assert far.doubts == ()
    assert "0.3 m of the conductor" in near.doubts[0]
    assert any("runs through" in doubt for doubt in inside.doubts)


# Power that a rule judges ----------------------------------------------------------------------------------


def test_the_contracts_example_of_judged_power() -> None:
    """93.3 W at the loop, SSB, 3 min on and 3 off: 23.3 W over half an hour, and the envelope where not averaged."""
    use = Use(100.0, 0.5, Over(180.0, 180.0), 0.0, 0.0)
    assert use.judged(1800.0, "always") * 0.933 == pytest.approx(23.3, abs=0.05)
    assert use.judged(0.0, "always") == 100.0


def test_a_tune_up_adds_to_the_mean_of_its_window() -> None:
    use = Use(100.0, 0.5, Over(60.0, 1740.0), 100.0, 60.0)
    # 1 minute at 50 W and 1 minute at 100 W, of 6 and of 30 minutes.
    assert use.judged(360.0, "always") == pytest.approx(25.0)
    assert use.judged(1800.0, "always") == pytest.approx(5.0)
    assert use.judged(360.0, "tuning") == pytest.approx(100.0 / 6.0)
    assert use.judged(0.0, "tuning") == 100.0


def test_a_tune_up_adds_no_more_than_there_is_time() -> None:
    assert Use(100.0, 1.0, None, 50.0, 60.0).judged(360.0, "always") == pytest.approx(100.0)
    assert Use(100.0, 0.4, None, 90.0, 600.0).judged(360.0, "always") == pytest.approx(90.0)


PATTERNS: st.SearchStrategy[Pattern | None] = st.one_of(
    st.none(),
    st.builds(Over, st.floats(1.0, 3600.0), st.floats(0.0, 3600.0)),
    st.builds(OnAirShare, st.floats(0.01, 1.0)),
)


@given(
    envelope=st.floats(0.01, 2000.0),
    duty=st.floats(0.05, 1.0),
    pattern=PATTERNS,
    tuning=st.floats(0.0, 1.0),
    time=st.floats(0.1, 900.0),
    window=st.sampled_from([0.0, 360.0, 1800.0]),
)
def test_the_ceilings_inverse_undoes_the_averaging(
    envelope: float, duty: float, pattern: Pattern | None, tuning: float, time: float, window: float
) -> None:
    use = Use(envelope, duty, pattern, tuning * envelope, time)
    judged = use.judged(window, "always")
    assert judged <= envelope * (1.0 + 1e-12)
    back = use.envelope_for(judged, window)
    again = Use(back, duty, pattern, tuning * envelope, time)
    assert again.judged(window, "always") <= judged * (1.0 + 1e-9)
    assume(back > 0.0)
    more = Use(back * 1.01, duty, pattern, tuning * envelope, time)
    assert more.judged(window, "always") >= judged * (1.0 - 1e-9)


@given(duty=st.floats(0.05, 1.0), pattern=PATTERNS)
def test_averaging_never_helps_a_basis_that_does_not_average(duty: float, pattern: Pattern | None) -> None:
    assert Use(100.0, duty, pattern, 0.0, 0.0).judged(0.0, "always") == 100.0


def test_the_nerve_level_is_judged_at_the_envelope() -> None:
    """ICNIRP 2010 (read): 83 V/m is not averaged. ICNIRP 2020 whole-body is, over 30 minutes."""
    found = {basis.name: basis for basis in bases(load_rule("icnirp-2020"), "public", 7.1e6)}
    nerve, heat = found["electrostimulation"], found["thermal whole-body"]
    assert nerve.electric_limit == pytest.approx(83.0)
    assert nerve.averaging_time == 0.0
    assert heat.magnetic_limit == pytest.approx(0.3099, abs=5e-5)
    assert heat.averaging_time == 1800.0
    assert "electrostimulation" not in {b.name for b in bases(load_rule("icnirp-2020"), "public", 10.1e6)}


# Keep-out --------------------------------------------------------------------------------------------------


def distances_of(
    design: Design, index: int, rule: str, who: str, carrier: bool, factor: float = 1.0
) -> tuple[Distances, FieldSource]:
    point = operating_point(design, design.transmission[index])
    source = field_source(design, point, FAR)
    found = bases(load_rule(rule), "trained" if who == "trained" else "public", point.transmission.frequency)
    use = key_down(point.power) if carrier else use_of(point.transmission)
    at_loop = factor * (point.power_at_loop.high or 0.0) / point.power
    vertical = design.loop.plane == "vertical"
    margin = design.margins.exposure_ratio
    around = shells(source, reach_weight(found, use, at_loop, margin, source.bare_factor))
    return keep_out(around, found, use, at_loop, margin, vertical), source


def share(source: FieldSource, points: Any, design: Design, rule: str, who: str, carrier: bool) -> Any:
    """Share of the limit less the margin, written out from the definition."""
    point = source.point
    use = key_down(point.power) if carrier else use_of(point.transmission)
    squares = source.strongest(points)
    at_loop = (point.power_at_loop.high or 0.0) / point.power
    top = np.zeros(len(points))
    for basis in bases(load_rule(rule), "trained" if who == "trained" else "public", point.transmission.frequency):
        power = use.judged(basis.averaging_time, "always") * at_loop
        for square, limit in ((squares.electric, basis.electric_limit), (squares.magnetic, basis.magnetic_limit)):
            if limit is not None:
                top = np.maximum(top, square * power / limit**2)
    return top * design.margins.exposure_ratio**2


@pytest.mark.parametrize("sample", SAMPLES, ids=lambda p: p.stem)
@pytest.mark.parametrize("carrier", [False, True], ids=["averaged", "key-down"])
def test_no_point_outside_a_keep_out_exceeds_the_limit_less_the_margin(sample: Path, carrier: bool) -> None:
    """10 000 points a sample, half of them within a metre of the distance; each is evaluated in fine pieces."""
    design = magsafe.read_design(sample)
    rng = np.random.default_rng(11)
    for rule in design.site.rules:
        for who in WHO:
            found, _ = distances_of(design, 0, rule, who, carrier)
            near = field_source(design, operating_point(design, design.transmission[0]), NEAR)
            least = found.any_direction.distance
            assert least is not None
            far = least + np.concatenate([rng.uniform(0.0, 1.0, 2500), rng.exponential(8.0, 2500)])
            unit = rng.normal(size=(5000, 3))
            unit /= np.linalg.norm(unit, axis=1)[:, None]
            points = unit * far[:, None] + [0.0, 0.0, near.height]
            points = points[points[:, 2] >= 0.0]
            assert share(near, points, design, rule, who, carrier).max() < 1.0
            for floor in found.on_floors:
                for distance, side in ((floor.along_axis, 0), (floor.in_plane, 1)):
                    assert distance is not None
                    assert distance.distance is not None
                    line = np.zeros((2500, 3))
                    line[:, side] = distance.distance + rng.exponential(2.0, 2500)
                    line[:, 2] = floor.floor + rng.uniform(0.0, 2.0, 2500)
                    assert share(near, line, design, rule, who, carrier).max() < 1.0


MEETING_THE_GROUND = [
    # Loops whose distances end where the sphere about them meets the ground, and whose lobes are many.
    {"loop__centre_height": "2.88 m", "loop__diameter": "2.5 m", "transmission__0__frequency": "3.426 MHz"},
    {"loop__centre_height": "10.77 m", "loop__diameter": "0.46 m", "transmission__0__frequency": "30.687 MHz"},
    {"loop__centre_height": "3 m", "loop__diameter": "2.4 m", "transmission__0__frequency": "3.113 MHz"},
]


@pytest.mark.parametrize("changes", MEETING_THE_GROUND, ids=["low", "lobes", "flat"])
@pytest.mark.parametrize("watts", ["10 W", "30 W", "130 W", "850 W"])
def test_near_the_ground_no_distance_stops_short(changes: dict[str, Any], watts: str) -> None:
    plane = (
        {"loop__plane": "horizontal"} if changes["loop__centre_height"] == "3 m" else {"capacitor__position": "bottom"}
    )
    design = plain_design(**changes, **plane, site__ground="average", transmission__0__power=watts)
    found, source = distances_of(design, 0, "icnirp-2020", "public", carrier=True)
    near = field_source(design, source.point, NEAR)
    rng = np.random.default_rng(17)
    assert found.any_direction.distance is not None
    turn = rng.uniform(0.0, 2.0 * pi, 4000)
    away = np.sqrt(np.maximum(found.any_direction.distance**2 - near.height**2, 0.01)) + rng.exponential(0.5, 4000)
    ground = np.stack([away * np.cos(turn), away * np.sin(turn), rng.uniform(0.0, 0.3, 4000)], axis=1)
    outside = np.linalg.norm(ground - [0.0, 0.0, near.height], axis=1) > found.any_direction.distance
    assert share(near, ground[outside], design, "icnirp-2020", "public", True).max() < 1.0
    down = (found.below.distance or 0.0) + 1e-6
    if down < near.height:
        line = np.stack([np.zeros(500), np.zeros(500), np.linspace(0.0, near.height - down, 500)], axis=1)
        assert share(near, line, design, "icnirp-2020", "public", True).max() < 1.0
    for floor in found.on_floors:
        assert floor.any_bearing.distance is not None
        away = floor.any_bearing.distance + rng.exponential(1.0, 4000)
        people = np.stack([away * np.cos(turn), away * np.sin(turn), rng.uniform(0.0, 2.0, 4000)], axis=1)
        assert share(near, people, design, "icnirp-2020", "public", True).max() < 1.0


def test_the_middle_of_a_columns_lowest_face_is_looked_at() -> None:
    """A floor close above a flat loop: its strongest field is under the middle of the column."""
    source = source_of(loop__plane="horizontal", loop__centre_height="3 m", site__ground="average")
    (found,) = search(source, (place(in_plane="0 m", across="0 m", floor="3.55 m"),))
    middle = source.strongest(np.array([[0.0, 0.0, 3.55]]))
    assert found.magnetic >= float(middle.magnetic[0]) * (1.0 - 1e-9)


def test_the_distance_is_not_much_longer_than_it_must_be() -> None:
    design = plain_design(site__rules=["us-fcc"], capacitor__position="top")
    found, source = distances_of(design, 0, "us-fcc", "public", carrier=True)
    assert found.any_direction.distance is not None
    inside = np.array([[found.any_direction.distance * 0.93 - 0.1, 0.0, 0.0]])
    assert share(source, inside, design, "us-fcc", "public", True)[0] > 1.0


@settings(max_examples=15, deadline=None)
@given(factor=st.floats(1.0, 30.0))
def test_distances_never_shrink_with_power(factor: float) -> None:
    design = plain_design(capacitor__position="top", loop__centre_height="2 m", site__ground="average")
    less, _ = distances_of(design, 0, "icnirp-2020", "public", carrier=False)
    more, _ = distances_of(design, 0, "icnirp-2020", "public", carrier=False, factor=factor)
    for name in ("any_direction", "along_axis", "in_plane", "above"):
        here, there = getattr(less, name).distance, getattr(more, name).distance
        assert there is None or there >= here


def test_key_down_is_never_nearer_than_averaged() -> None:
    design = plain_design(
        transmission__0={
            "frequency": "7.1 MHz",
            "power": "100 W",
            "mode": "CW",
            "over": {"transmit": "1 min", "listen": "2 min"},
        }
    )
    averaged, _ = distances_of(design, 0, "us-fcc", "public", carrier=False)
    carrier, _ = distances_of(design, 0, "us-fcc", "public", carrier=True)
    assert (carrier.any_direction.distance or 0.0) > (averaged.any_direction.distance or 0.0)


def test_the_touch_distance_is_the_least() -> None:
    design = plain_design(transmission__0__power="0.01 W")
    found, source = distances_of(design, 0, "us-fcc", "public", carrier=True)
    assert found.any_direction.set_by == "touch"
    assert found.any_direction.distance == round_up(touch_distance(source.design)) == 1.5


def test_distances_are_rounded_up() -> None:
    assert round_up(2.01) == 2.1
    assert round_up(2.0) == 2.0
    assert round_up(2.1) == 2.1


def test_a_distance_beyond_the_search_is_not_made_up() -> None:
    design = plain_design(transmission__0__frequency="23 MHz", transmission__0__power="10 kW")
    found, _ = distances_of(design, 0, "us-fcc", "public", carrier=True, factor=1e4)
    assert found.any_direction.distance is None


def test_below_the_loop_nobody_is_under_the_ground() -> None:
    design = plain_design(loop__centre_height="2 m", site__ground="average", capacitor__position="top")
    found, _ = distances_of(design, 0, "us-fcc", "public", carrier=True, factor=10.0)
    assert found.below.distance == 2.0
