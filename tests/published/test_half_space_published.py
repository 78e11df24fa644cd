"""Every check value of the loop over soil, each with its own tolerance and source.

The table stands beside this file with provenance per row; the rows of the perfect plane are in `check_values.toml`.
"""

import tomllib
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from scipy.constants import c

from magsafe.physics import half_space, half_space_ring, small_loop

Row = dict[str, Any]

ROWS: list[Row] = tomllib.loads(Path(__file__).with_name("ground_values.toml").read_text(encoding="utf-8"))["value"]


def _soil(row: Row) -> Any:
    i = row["inputs"]
    return half_space.relative_permittivity(i["eps_r"], i["sigma_S_per_m"], i["f_Hz"])


def _dipole(row: Row) -> Any:
    form = half_space.sky_ratio if "_sky_" in row["id"] else half_space.resistance_ratio
    heights = 4.0 * np.pi * np.asarray(row["inputs"]["h_over_lambda"])
    return form(row["inputs"]["loop"].startswith("vertical"), _soil(row), heights)


def _ring(row: Row) -> Any:
    return half_space_ring.ring_eddy_factor("vertical" in row["id"], row["inputs"]["h_over_radius"])


def _worked(row: Row) -> Any:
    """A vertical loop of 1 m over average soil, as a dipole at the height of its centre."""
    i = row["inputs"]
    wavelength = c / i["f_Hz"]
    height = 4.0 * np.pi * i["height_m"] / wavelength
    radiation = float(small_loop.radiation_resistance(np.pi * i["diameter_m"] ** 2 / 4.0, 1, wavelength))
    ratio = float(half_space.resistance_ratio(True, _soil(row), height))
    if row["id"].endswith("Radd"):
        return (ratio - 1.0) * radiation
    return float(half_space.sky_ratio(True, _soil(row), height)) * radiation / (ratio * radiation + i["R_cond_ohm"])


CALCULATIONS: dict[str, Callable[[Row], Any]] = {
    "ground_Rtot": _dipole,
    "ground_sky": _dipole,
    "ground_ring": _ring,
    "ground_vertical_ring": _ring,
    "loopA_ground": _worked,
}


@pytest.mark.parametrize("row", ROWS, ids=[row["id"] for row in ROWS])
def test_check_value(row: Row) -> None:
    found = next(f for prefix, f in CALCULATIONS.items() if row["id"].startswith(prefix))(row)
    np.testing.assert_allclose(found, np.asarray(row["value"]), rtol=row["rtol"])


def test_the_tables_of_soil_agree_to_their_last_digit() -> None:
    """Six digits are printed, so a right value is within five of the seventh: 624 of them."""
    tables = [row for row in ROWS if row["id"].startswith(("ground_Rtot", "ground_sky"))]
    assert sum(len(row["value"]) for row in tables) == 624
    for row in tables:
        np.testing.assert_allclose(_dipole(row), row["value"], rtol=5e-6, err_msg=row["id"])


def test_the_table_carries_its_provenance() -> None:
    for row in ROWS:
        assert row["provenance"] in ("seen", "memory", "computed"), row["id"]
        assert row["source"], row["id"]
