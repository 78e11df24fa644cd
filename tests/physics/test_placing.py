"""The same loop at other heights and in the other plane, held against designs that state that height and plane."""

from typing import Any

import numpy as np
import pytest
from designs import plain_design
from points import likely, point

from magsafe.analysis.placing import Placing, placings
from magsafe.checks.sky import placing_records
from magsafe.design.model import Design

TUBE = {"form": "tube", "outer_diameter": "22 mm", "wall": "1.0 mm", "material": "copper tube"}
# A metre of tube with clamps, a capacitor of a certain Q and a line, as on a quay's rail.
RAIL: dict[str, Any] = {
    "loop__conductor": TUBE,
    "loop__joint": [{"name": "clamps", "count": 2, "kind": "bolted lug", "at": "capacitor"}],
    "capacitor__series_resistance": None,
    "capacitor__quality_factor": {"low": 2000, "likely": 4000, "high": 10000},
    "capacitor__stray": "3 pF",
    "feed": {"line_loss": {"low": "0.2 dB", "likely": "0.3 dB", "high": "0.5 dB"}},
    "margins": {"overshoot": "1 dB"},
}


def rail(
    plane: str = "vertical", height: float | None = 2.0, ground: Any = "average", **changes: Any
) -> dict[str, Any]:
    position = {"capacitor__position": "top"} if plane == "vertical" else {}
    centre = {} if height is None else {"loop__centre_height": f"{height} m"}
    return {**RAIL, "loop__plane": plane, **centre, **position, "site__ground": ground, **changes}


def rows(**changes: Any) -> tuple[Placing, ...]:
    found = point(**rail(**changes))
    assert found.chain is not None
    return placings(made(**changes), found.chain)


def made(**changes: Any) -> Design:
    return plain_design(**rail(**changes))


def places(found: tuple[Placing, ...]) -> list[tuple[str, float]]:
    return [(each.plane, each.height) for each in found]


STATED = {"conductivity": {"low": "1 mS/m", "likely": "4 mS/m", "high": "9 mS/m"}, "permittivity": 11}


@pytest.mark.parametrize("ground", ["average", "perfect", "sea water", STATED], ids=["soil", "plane", "sea", "stated"])
@pytest.mark.parametrize(("plane", "height", "megahertz"), [("vertical", 2.0, 7.1), ("horizontal", 3.0, 14.2)])
def test_each_row_is_what_a_check_of_that_height_and_plane_says(
    plane: str, height: float, megahertz: float, ground: Any
) -> None:
    changes = {"ground": ground, "transmission__0__frequency": f"{megahertz} MHz"}
    found = rows(plane=plane, height=height, **changes)
    assert len(found) == 6
    for row in found:
        stated = point(**rail(plane=row.plane, height=row.height, **changes))
        assert row.efficiency == pytest.approx(likely(stated, "overall_efficiency"), rel=5e-4)
        assert row.voltage == pytest.approx(likely(stated, "capacitor_peak_voltage"), rel=5e-4)
        assert row.sky[2] / row.sky.sum() == pytest.approx(likely(stated, "share_above_60_degrees"), rel=5e-4)
        assert row.sky[0] / row.sky.sum() == pytest.approx(likely(stated, "share_below_20_degrees"), rel=5e-4)


def test_the_design_comes_first_then_what_is_lower_and_higher_then_the_other_plane() -> None:
    """One height below by 1.3 times, two above by 1.3 and 2, in the list of heights; the other plane at two."""
    found = rows()
    assert places(found) == [
        ("vertical", 2.0), ("vertical", 1.5), ("vertical", 3.0), ("vertical", 4.0),
        ("horizontal", 2.0), ("horizontal", 4.0),
    ]  # fmt: skip
    assert [each.as_designed for each in found] == [True] + [False] * 5
    flat = rows(plane="horizontal", height=1.2)
    assert places(flat)[0] == ("horizontal", 1.2)
    assert ("vertical", 1.2) in places(flat)


@pytest.mark.parametrize(
    ("height", "wanted"),
    [
        # 1.2 radii up, 0.6 m, is the least for either plane of a metre's circle: 0.5 m is told for neither.
        (0.7, [("vertical", 0.7), ("vertical", 1.0), ("vertical", 1.5), ("horizontal", 0.7), ("horizontal", 1.5)]),
        (0.58, [("vertical", 0.58), ("vertical", 1.0), ("vertical", 1.5), ("horizontal", 1.5)]),
    ],
)
def test_a_row_that_would_be_too_low_is_not_told(height: float, wanted: list[tuple[str, float]]) -> None:
    assert places(rows(height=height)) == wanted


def test_no_row_above_a_flat_loop_is_nearer_to_soil_than_is_computed() -> None:
    """Heights at which what soil takes is left unproven are no advice."""
    assert min(each.height for each in rows(plane="horizontal", height=0.3)[1:]) >= 0.6


def test_without_ground_or_height_and_in_free_space_there_are_none() -> None:
    assert rows(ground=None) == ()
    assert rows(ground="none") == ()
    assert rows(height=None) == ()


@pytest.mark.parametrize("plane", ["vertical", "horizontal"])
def test_above_the_highest_of_the_list_only_lower_ones_are_told(plane: str) -> None:
    found = rows(plane=plane, height=45.0)
    assert {height for _, height in places(found)} == {45.0, 30.0}


def test_changes_are_ratios_to_the_design_and_shares_those_of_what_leaves() -> None:
    design, found = made(), point(**rail())
    records = placing_records(design, found)
    assert found.chain is not None
    placed = placings(design, found.chain)
    first = records[0]
    assert (first.change, first.low_angle_change, first.as_designed) == (1.0, 1.0, True)
    for record, row in zip(records, placed, strict=True):
        assert (record.plane, record.centre_height) == (row.plane, row.height)
        assert record.overall_efficiency == pytest.approx(float(np.sum(row.sky)))
        assert record.change == pytest.approx(record.overall_efficiency / first.overall_efficiency)
        below = record.overall_efficiency * record.share_below_20_degrees
        assert record.low_angle_change == pytest.approx(
            below / (first.overall_efficiency * first.share_below_20_degrees)
        )
        middle = float(row.sky[1]) / row.efficiency
        assert record.share_above_60_degrees + record.share_below_20_degrees + middle == pytest.approx(1.0)
        assert 0.0 < record.overall_efficiency < 1.0
        assert record.capacitor_peak_voltage == row.voltage
    # A flat loop low over soil: a worse one, that takes less volts (reference notes, section 7, lesson a).
    flat = next(each for each in records if each.plane == "horizontal")
    assert flat.change is not None
    assert flat.change < 0.2


def test_a_loop_without_a_capacitor_has_no_volts() -> None:
    wire = {"form": "rod", "outer_diameter": "3.2 mm", "conductivity": "58 MS/m"}
    changes: dict[str, Any] = {
        "capacitor": {"kind": "none"},
        "loop__conductor": wire,
        "loop__centre_height": "3 m",
        "transmission__0__frequency": "100.4 MHz",
        "site__ground": "average",
    }
    found = point(**changes)
    assert found.chain is not None
    made_of = placings(plain_design(**changes), found.chain)
    assert len(made_of) == 6
    assert all(each.voltage is None for each in made_of)
    for row in made_of:
        stated = point(**{**changes, "loop__plane": row.plane, "loop__centre_height": f"{row.height} m"})
        assert row.efficiency == pytest.approx(likely(stated, "overall_efficiency"), rel=5e-4)
