"""The thresholds below which a rule asks for no evaluation, against the blocks as read and worked by hand."""

import tomllib
from math import pi
from pathlib import Path
from typing import Any

import pytest
from scipy.constants import speed_of_light

from magsafe.rules import Exemption, load_rule, rule_names

Block = dict[str, Any]

BLOCKS: dict[str, Block] = {
    block["id"]: block
    for block in tomllib.loads((Path(__file__).parent / "exposure_limits.toml").read_text())["exemption"]
}
# Rule and place among its exemptions. Britain's licence condition takes either edition of the guidelines.
WHERE = [
    ("us-fcc-erp-table", "us-fcc", 0),
    ("us-fcc-1mW", "us-fcc", 1),
    ("gb-ofcom-10W", "icnirp-1998", 0),
    ("gb-ofcom-10W", "icnirp-2020", 0),
    ("jp-20mW", "jp", 0),
    ("de-26bimschv-10W", "de-26bimschv", 0),
]
MEGAHERTZ = (0.3, 0.475, 1.339, 1.341, 1.9, 7.1, 14.1, 28.5, 29.99, 30.01, 50.1, 300.0)


def by_distance() -> Exemption:
    (found,) = (each for each in load_rule("us-fcc").exemptions if each.kind == "ERP by distance")
    return found


@pytest.mark.parametrize(("block_id", "rule", "index"), WHERE)
def test_exemption_is_as_read(block_id: str, rule: str, index: int) -> None:
    """Value and what it rests on, as the block has them."""
    block, exemption = BLOCKS[block_id], load_rule(rule).exemptions[index]
    provenance, _, text = block["provenance"].partition(": ")
    assert exemption.provenance == provenance
    assert text in exemption.provenance_detail
    assert block.get("second_reader", "") in exemption.provenance_detail
    assert block["standard"].replace(",", "").removesuffix(" Table 1") in exemption.source.replace(",", "")
    for megahertz in MEGAHERTZ:
        distance = 60.0 / megahertz  # beyond 47.7/f
        if "max_W" in block:
            assert exemption.threshold_at(0.0, megahertz * 1e6) == block["max_W"]
            continue
        (law,) = (each for each in block["segments"] if each["f_low_MHz"] <= megahertz <= each["f_high_MHz"])
        expected = law["coefficient"] * distance ** block["R_exponent"] * megahertz ** law["exponent"]
        assert exemption.threshold_at(distance, megahertz * 1e6) == pytest.approx(expected, rel=1e-12)


def test_every_exemption_has_its_block() -> None:
    assert {block_id for block_id, _, _ in WHERE} == set(BLOCKS)
    assert {(rule, index) for _, rule, index in WHERE} == {
        (name, index) for name in rule_names() for index in range(len(load_rule(name).exemptions))
    }


@pytest.mark.parametrize(
    ("megahertz", "distance", "watts"),
    [
        (7.1, 10.0, 6843.9),  # 3450 x 100 / 50.41
        (14.1, 5.0, 433.83),  # 3450 x 25 / 198.81
        (28.5, 2.0, 16.990),  # 3450 x 4 / 812.25
        (50.1, 3.0, 34.47),  # 3.83 x 9
        (1.0, 50.0, 4.8e6),  # 1920 x 2500
        (30.0, 2.0, 15.32),  # where two rows meet the lower holds: 3.83 x 4, not 3450 / 900 x 4 = 15.33
        (1.34, 40.0, 3.072e6),  # 1920 x 1600, not 3450 / 1.34^2 x 1600 = 3.0742e6
    ],
)
def test_47_cfr_1_1307_worked_by_hand(megahertz: float, distance: float, watts: float) -> None:
    """47 CFR 1.1307(b)(3)(i)(C), Table 1."""
    assert by_distance().threshold_at(distance, megahertz * 1e6) == pytest.approx(watts, rel=1e-4)


@pytest.mark.parametrize("megahertz", MEGAHERTZ)
def test_47_cfr_1_1307_is_the_public_limit_of_a_far_field_doubled(megahertz: float) -> None:
    """The threshold is S_limit 4 pi R^2 / (1.64 x 4), to 0.4 % (three figures of 1920, 3450, 3.83)."""
    (density,) = (row for row in load_rule("us-fcc").rows if (row.who, row.field) == ("public", "power density"))
    limit = density.at(megahertz * 1e6)
    assert limit is not None
    distance = 100.0 / megahertz
    expected = limit * 4.0 * pi * distance**2 / (1.64 * 4.0)
    assert by_distance().threshold_at(distance, megahertz * 1e6) == pytest.approx(expected, rel=4e-3)


@pytest.mark.parametrize("megahertz", [1.9, 7.1, 28.5, 50.1])
def test_47_cfr_1_1307_holds_from_the_wavelength_over_2_pi_on(megahertz: float) -> None:
    """R >= wavelength / 2 pi, which is 47.7/f metres; nearer an evaluation is required."""
    exemption = by_distance()
    edge = exemption.nearest(megahertz * 1e6)
    assert edge == speed_of_light / (megahertz * 1e6) / (2.0 * pi)
    assert edge == pytest.approx(47.7 / megahertz, rel=1e-3)
    assert exemption.threshold_at(1.0001 * edge, megahertz * 1e6) is not None
    assert exemption.threshold_at(0.9999 * edge, megahertz * 1e6) is None


def test_10_w_eirp_are_6_1_w_erp() -> None:
    """Ofcom EMF FAQ: above 10 W EIRP or 6.1 W ERP; the half-wave dipole has a gain of 1.64."""
    assert load_rule("icnirp-2020").exemptions[0].threshold == pytest.approx(6.1 * 1.64, rel=1e-3)


def test_means_and_edges() -> None:
    """A mean counts where a text says so; 10 W EIRP are within the German ordinance, and outside Ofcom's condition."""
    assert {e.jurisdiction for name in rule_names() for e in load_rule(name).exemptions if e.averaged} == {
        "United States",
        "Japan",
    }
    assert not load_rule("de-26bimschv").exemptions[0].exempts(10.0, 10.0)
    assert load_rule("icnirp-1998").exemptions[0].exempts(10.0, 10.0)
