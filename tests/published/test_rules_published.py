"""Exposure limits and duty factors against the published tables they were taken from.

What was read and what rests on memory stands in the rule files; where a table below is typed from
memory, its test says so.
"""

import math
import re
import tomllib
from pathlib import Path
from typing import Any

import pytest

from magsafe.rules import (
    FieldKind,
    Limit,
    OnAirShare,
    Who,
    judged_power,
    load_rule,
    mode_duty,
    mode_named,
)

CHECKS = tomllib.loads((Path(__file__).parent / "exposure_checks.toml").read_text())["check"]
RULE_OF_PREFIX = {"icnirp2020": "icnirp-2020"}
WHO: dict[str, Who] = {"occ": "trained", "gp": "public"}
FIELD: dict[str, FieldKind] = {"E": "electric", "H": "magnetic", "S": "power density"}
BASIS = {"wb": "thermal whole-body", "local": "thermal local", "es": "electrostimulation"}


def row(rule: str, who: Who, field: FieldKind, basis: str) -> Limit:
    (found,) = (each for each in load_rule(rule).rows if (each.who, each.field, each.basis) == (who, field, basis))
    return found


def half_of_last_digit(expected: float, digits: int = 4) -> float:
    """Half a unit of the last of so many significant digits."""
    return 0.5 * float(10.0 ** (math.floor(math.log10(expected)) - digits + 1))


@pytest.mark.parametrize("check", CHECKS, ids=lambda c: f"{c['limit']} at {c['frequency_MHz']} MHz")
def test_worked_value(check: dict[str, Any]) -> None:
    """Each value is worked out by hand from the published law, rounded to four figures."""
    parts = re.fullmatch(r"(.+)-(occ|gp)-([EHS])-(wb|local|es)", check["limit"])
    assert parts is not None
    prefix, tier, letter, suffix = parts.groups()
    limit = row(RULE_OF_PREFIX.get(prefix, prefix), WHO[tier], FIELD[letter], BASIS[suffix])
    assert limit.unit == check["unit"]
    found = limit.at(check["frequency_MHz"] * 1e6)
    assert found == pytest.approx(check["expected"], abs=half_of_last_digit(check["expected"]))
    assert limit.provenance == check["provenance"]


def test_all_thirty_worked_values_are_there() -> None:
    """No block was lost: 9 of the FCC, 8 of ICNIRP 2020, 13 of the rules that came after them."""
    assert len(CHECKS) == 30
    assert len([c for c in CHECKS if c["limit"].startswith(("us-fcc", "icnirp2020"))]) == 17


FCC_TABLE_1 = [
    # who, minutes, MHz from, to; E in V/m, H in A/m, S in mW/cm2, each (number, power of f in MHz)
    ("trained", 6, 0.3, 3.0, (614, 0), (1.63, 0), (100, 0)),
    ("trained", 6, 3.0, 30.0, (1842, -1), (4.89, -1), (900, -2)),
    ("trained", 6, 30.0, 300.0, (61.4, 0), (0.163, 0), (1.0, 0)),
    ("public", 30, 0.3, 1.34, (614, 0), (1.63, 0), (100, 0)),
    ("public", 30, 1.34, 30.0, (824, -1), (2.19, -1), (180, -2)),
    ("public", 30, 30.0, 300.0, (27.5, 0), (0.073, 0), (0.2, 0)),
]

ICNIRP_2020_TABLES = [
    # who, basis, minutes, MHz from, to, then E in V/m, H in A/m
    # table 5, whole body: public read in quotations (0.073 A/m not), occupational from memory
    ("trained", "thermal whole-body", 30, 0.1, 30.0, (660, -0.7), (4.9, -1)),
    ("trained", "thermal whole-body", 30, 30.0, 300.0, (61, 0), (0.16, 0)),
    ("public", "thermal whole-body", 30, 0.1, 30.0, (300, -0.7), (2.2, -1)),
    ("public", "thermal whole-body", 30, 30.0, 300.0, (27.7, 0), (0.073, 0)),
    # table 6, local: read in a handbook
    ("trained", "thermal local", 6, 0.1, 30.0, (1504, -0.7), (10.8, -1)),
    ("trained", "thermal local", 6, 30.0, 300.0, (139, 0), (0.36, 0)),
    ("public", "thermal local", 6, 0.1, 30.0, (671, -0.7), (4.9, -1)),
    ("public", "thermal local", 6, 30.0, 300.0, (62, 0), (0.163, 0)),
    # read in ICNIRP 2010, tables 3 and 4; that table 8 of 2020 keeps them is memory (but 21 A/m)
    ("trained", "electrostimulation", 0, 0.1, 10.0, (170, 0), (80, 0)),
    ("public", "electrostimulation", 0, 0.1, 10.0, (83, 0), (21, 0)),
]


def inside(low: float, high: float) -> list[float]:
    """Frequencies [Hz] within a band [MHz], away from its ends, where neighbours could rule."""
    return [1e6 * low ** (1 - s) * high**s for s in (0.05, 0.4, 0.95)]


@pytest.mark.parametrize("line", FCC_TABLE_1, ids=lambda t: f"{t[0]} {t[2]}-{t[3]} MHz")
def test_47_cfr_1_1310_table_1(line: Any) -> None:
    """47 CFR 1.1310(e)(1), Table 1, read in reprints: every cell, S in the unit of the print."""
    who, minutes, low, high, *cells = line
    kinds: tuple[FieldKind, ...] = ("electric", "magnetic", "power density")
    for kind, (number, power), factor in zip(kinds, cells, (1, 1, 10), strict=True):
        limit = row("us-fcc", who, kind, "thermal whole-body")
        assert limit.averaging_time == 60 * minutes
        for frequency in inside(low, high):
            expected = factor * number * (frequency / 1e6) ** power
            assert limit.at(frequency) == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize("line", ICNIRP_2020_TABLES, ids=lambda t: f"{t[0]} {t[1]} {t[3]}-{t[4]}")
def test_icnirp_2020_tables_5_6_8(line: Any) -> None:
    """ICNIRP 2020, Health Physics 118: 483-524, tables 5, 6, 8; what was read stands above."""
    who, basis, minutes, low, high, *cells = line
    kinds: tuple[FieldKind, ...] = ("electric", "magnetic")
    for kind, (number, power) in zip(kinds, cells, strict=True):
        limit = row("icnirp-2020", who, kind, basis)
        assert limit.averaging_time == 60 * minutes
        for frequency in inside(low, high):
            assert limit.at(frequency) == pytest.approx(number * (frequency / 1e6) ** power, rel=1e-12)


def test_nothing_but_the_printed_cells_is_in_the_files() -> None:
    """As many segments as the tables above have cells, and 4 of power density: no row was added or doubled."""
    for name, cells in (("us-fcc", 3 * len(FCC_TABLE_1)), ("icnirp-2020", 20 + 4)):
        assert sum(len(each.segments) for each in load_rule(name).rows) == cells


@pytest.mark.parametrize("who", ["trained", "public"])
def test_47_cfr_1_1310_power_density_is_the_plane_wave_of_e_and_of_h(who: Who) -> None:
    """Below 30 MHz the S column is the plane-wave equivalent: S = E^2/377 = 377 H^2 (377 ohm).

    To 2 %: E and H are printed to three figures (614^2/377 = 1000.0, 0.073^2 377 = 2.009,
    27.5^2/377 = 2.006, 2.19^2 377 = 1808).
    """
    electric, magnetic, density = (row("us-fcc", who, kind, "thermal whole-body") for kind in FIELD.values())
    for frequency in (0.4e6, 1.0e6, 1.9e6, 7.1e6, 28.5e6, 50.1e6, 250e6):
        e, h, s = electric.at(frequency), magnetic.at(frequency), density.at(frequency)
        assert e is not None
        assert h is not None
        assert e**2 / 376.73 == pytest.approx(s, rel=0.02)
        assert h**2 * 376.73 == pytest.approx(s, rel=0.02)
    assert not density.judged
    assert "comparison only" in density.why_not_judged


@pytest.mark.parametrize(
    ("rule", "who", "field", "megahertz", "lower"),
    [
        ("us-fcc", "public", "electric", 1.34, 614.0),  # 824/1.34 = 614.9
        ("us-fcc", "public", "magnetic", 1.34, 1.63),  # 2.19/1.34 = 1.634
        ("us-fcc", "public", "electric", 30, 824 / 30),  # 27.47, not 27.5
        ("us-fcc", "trained", "electric", 30, 61.4),
        ("icnirp-2020", "trained", "magnetic", 30, 0.16),  # 4.9/30 = 0.1633, a jump of 2.0 %
        ("icnirp-2020", "public", "magnetic", 30, 0.073),  # 2.2/30 = 0.0733
        ("icnirp-2020", "trained", "electric", 30, 61.0),  # 660/30^0.7 = 61.02
        ("icnirp-2020", "public", "electric", 30, 27.7),  # 300/30^0.7 = 27.74
    ],
)
def test_where_segments_meet_the_lower_value_holds(
    rule: str, who: Who, field: FieldKind, megahertz: float, lower: float
) -> None:
    """The printed laws, worked out on both sides of an edge; the text does not say which holds."""
    limit = row(rule, who, field, "thermal whole-body")
    assert limit.at(megahertz * 1e6) == pytest.approx(lower, rel=1e-9)


def test_icnirp_2020_where_stimulation_binds_under_an_unbroken_carrier() -> None:
    """Derived from the levels: 300/f^0.7 = 83 at 6.27 MHz, 660/f^0.7 = 170 at 6.94 MHz."""
    crossings: tuple[tuple[Who, float], ...] = (("public", 6.27), ("trained", 6.94))
    for who, megahertz in crossings:
        heat = row("icnirp-2020", who, "electric", "thermal whole-body").at(megahertz * 1e6)
        nerve = row("icnirp-2020", who, "electric", "electrostimulation").at(megahertz * 1e6)
        assert heat == pytest.approx(nerve, rel=1e-3)


def test_icnirp_2020_stimulation_ends_at_10_mhz() -> None:
    """ICNIRP 2010: the levels are given to 10 MHz; above, this row has none."""
    limit = row("icnirp-2020", "public", "electric", "electrostimulation")
    assert limit.at(10e6) == 83.0
    assert limit.at(10.000001e6) is None
    assert limit.averaging_time == 0.0
    assert not limit.averaged


def test_below_300_khz_the_fcc_table_is_silent() -> None:
    """47 CFR 1.1310: below 300 kHz only SAR is limited; silence is not freedom."""
    rule = load_rule("us-fcc")
    assert rule.uncovered_fields("public", 299_999.0) == ("electric", "magnetic")
    assert rule.uncovered_fields("public", 300_000.0) == ()
    assert row("us-fcc", "public", "electric", "thermal whole-body").at(299_999.0) is None
    assert row("us-fcc", "public", "electric", "thermal whole-body").at(300.1e6) is None


@pytest.mark.parametrize(
    ("who", "field", "basis", "megahertz", "provenance"),
    [
        ("public", "electric", "thermal whole-body", 7.1, "verified"),
        ("public", "magnetic", "thermal whole-body", 7.1, "verified"),
        ("public", "magnetic", "thermal whole-body", 30, "memory"),
        ("public", "magnetic", "thermal whole-body", 50.1, "memory"),
        ("trained", "electric", "thermal whole-body", 7.1, "memory"),
        ("trained", "magnetic", "thermal whole-body", 7.1, "memory"),
        ("public", "electric", "electrostimulation", 7.1, "memory"),
        ("public", "magnetic", "electrostimulation", 7.1, "verified"),
        ("trained", "electric", "electrostimulation", 7.1, "memory"),
        ("trained", "magnetic", "electrostimulation", 7.1, "memory"),
        ("public", "electric", "electrostimulation", 14.1, None),
    ],
)
def test_icnirp_2020_says_what_was_read(
    who: Who, field: FieldKind, basis: str, megahertz: float, provenance: str | None
) -> None:
    """A level read only in the edition before, or in no text, is not called verified."""
    limit = row("icnirp-2020", who, field, basis)
    assert limit.provenance_at(megahertz * 1e6) == provenance
    detail = limit.provenance_detail_at(megahertz * 1e6)
    assert (detail is None) == (provenance is None)


def test_every_fcc_row_was_read() -> None:
    """47 CFR 1.1310 Table 1 was read in full, in reprints."""
    for limit in load_rule("us-fcc").rows:
        assert all(s.provenance == "verified" for s in limit.segments)


OET_65B_TABLE_2 = [
    ("SSB", 0.50),  # conversational, heavy speech processing
    ("SSB unprocessed", 0.20),  # conversational, no speech processing
    ("CW", 0.40),  # conversational
    ("FM", 1.00),  # voice
    ("data", 1.00),  # FSK, RTTY, AFSK over SSB
]


@pytest.mark.parametrize(("mode", "factor"), OET_65B_TABLE_2)
def test_oet_65_supplement_b_table_2(mode: str, factor: float) -> None:
    """FCC OET Bulletin 65 Supplement B, Ed. 97-01, Table 2, as quoted in a regulatory note."""
    assert mode_duty(mode) == factor
    assert mode_named(mode).duty_evidence == "verified"


def test_am_takes_the_upper_bound() -> None:
    """Not in that table as read. A fully modulated sine has 3/8 of its envelope power (theory)."""
    assert mode_duty("AM") == 1.0
    assert mode_named("AM").duty_evidence == "derived"


def test_oet_65_supplement_b_example() -> None:
    """Its example, as quoted: 500 W, CW, 45 s of 6 minutes: 500 x 0.40 x 45/360 = 25 W."""
    assert judged_power(500.0, mode_duty("CW"), OnAirShare(45 / 360), 360.0) == pytest.approx(25.0)
