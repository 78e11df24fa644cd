"""Numbers as they are printed, spreads, and how a sheet looks on a terminal."""

from io import StringIO

import pytest
from hypothesis import given
from hypothesis import strategies as st
from rich.console import Console

from magsafe import words
from magsafe.checks.sheet import (
    DesignRecord,
    FigureRecord,
    Finding,
    Limit,
    OperatingPointRecord,
    PowerCeiling,
    Sheet,
    Value,
    Verdict,
)
from magsafe.reports import telling
from magsafe.reports.terminal import show_sheet
from magsafe.spread import Spread
from magsafe.units import significant

NUMBERS = [
    (999.96, "1000"),
    (7.947, "7.95"),
    (0.000123456, "0.000123"),
    (2891.3, "2890"),
    (-8.2457, "-8.25"),
    (0, "0"),
]


@pytest.mark.parametrize(("value", "text"), NUMBERS)
def test_three_significant_digits_written_out(value: float, text: str) -> None:
    assert significant(value) == text


@given(st.floats(1e-12, 1e12))
def test_allowed_powers_are_never_rounded_up(value: float) -> None:
    told = float(words.floor_two_digits(value))
    assert told <= value * (1.0 + 1e-9)
    assert told >= value * 0.9 * (1.0 - 1e-9)


def test_figures_have_fixed_units() -> None:
    assert words.amount(7948.0, "V", qualifier="peak") == "7.95 kV peak"
    assert words.amount(83.0, "V/m") == "83.0 V/m"
    assert words.amount(0.0392, "ohm") == "39.2 mΩ"
    assert words.amount(2.01e-10, "F") == "201 pF"
    assert words.frequency(7.1e6) == "7.1 MHz"
    assert words.power(20.98) == "20 W"


def test_spreads_leave_out_what_rounds_away() -> None:
    assert words.ends(Spread(0.130, 0.150, 0.160), "1", "%") == "(13.0 … 16.0)"
    assert words.ends(Spread(0.15, 0.15, 0.15), "1", "%") == ""
    assert words.ends(Spread(None, 1.0, 2.0), "A", "A") == "(at most 2.00)"
    assert words.ends(Spread(1.0, 2.0, None), "A", "A") == "(at least 1.00)"


def test_a_limit_is_told_with_the_dangerous_end_first() -> None:
    told = words.against_limit(Spread(7e3, 7.7e3, 7.9e3), 4e3, "V", "high", None, "peak")
    assert told == "7.90 kV peak at worst, 7.70 likely, limit 4.00 kV peak"


def test_a_spread_is_in_order_and_finite() -> None:
    with pytest.raises(ValueError, match="low <= likely <= high"):
        Spread(2.0, 1.0, 3.0)
    with pytest.raises(ValueError, match="finite"):
        Spread(1.0, float("nan"), 3.0)
    with pytest.raises(ValueError, match="factor >= 0"):
        Spread(1.0, 2.0, 3.0).scaled(-1.0)
    with pytest.raises(ValueError, match="error is >= 0"):
        Spread(1.0, 2.0, 3.0).widened(-0.1, 0.0)
    assert Spread(-1.0, 0.0, 1.0).widened(0.1, 0.2) == Spread(-1.1, 0.0, 1.2)
    assert Spread(None, 1.0, None).widened(0.1, 0.1) == Spread(None, 1.0, None)


def _finding(verdict: Verdict) -> Finding:
    return Finding(
        id=f"check.{verdict}",
        question="Does it hold?",
        value=Value(low=1.0, likely=2.0, high=3.0, unit="V"),
        limit=Limit(value=2.0, unit="V"),
        margin_asked=1.5,
        margin_found=0.667,
        verdict=verdict,
        because="3.00 kV peak at worst, limit 2.00 kV peak: this exceeds the limit",
        do="fit a wider gap",
        source="the design",
        provenance="stated in the design",
    )


def _sheet() -> Sheet:
    """A sheet made by hand, with one finding of every verdict."""
    ceiling = PowerCeiling(
        value=20.9,
        at_limit=32.7,
        transmission=0,
        held_by="check.stop",
        complete=False,
        left_out=("check.unproven",),
    )
    figure = FigureRecord(low=1.0, likely=2.0, high=3.0, unit="1", method="hand", source="hand")
    figures = {row.figure: figure for row in telling.ROWS[:2]}
    unknown = FigureRecord(low=None, likely=None, high=None, unit="1", method="none", source="none", why="not computed")
    figures.update({row.figure: unknown for row in telling.ROWS[2:]})
    point = OperatingPointRecord(
        name="40 m voice",
        frequency=7.1e6,
        power=100.0,
        power_at_loop=100.0,
        mode="SSB",
        duty=0.5,
        power_ceiling=ceiling,
        figures=figures,
        findings=(_finding("stop"), _finding("narrow"), _finding("clear")),
    )
    return Sheet(
        magsafe="0.1.0",
        date="2026-05-04",
        design=DesignRecord(name="hand.toml", sha256="0" * 64, text=""),
        margins={},
        assumptions=("Something was assumed.",),
        findings=(_finding("unproven"),),
        verdict="stop",
        power_ceiling=ceiling,
        operating_points=(point,),
        cautions=("RF burns. Keep away.",),
    )


TOP_60 = """\
■ stop       Do not key this loop at 100 W.
             At most 20 W, and not before what is unproven
             is known; first limit reached at 32 W.
             check.stop holds it there.
             Not counted, because unproven: check.unproven.

hand.toml, 2026-05-04, magsafe 0.1.0

What stands in the way
■ stop       check.stop
             3.00 kV peak at worst, limit 2.00 kV peak: this
             exceeds the limit.
             Do: fit a wider gap.
◆ unproven   check.unproven
             3.00 kV peak at worst, limit 2.00 kV peak: this
             exceeds the limit.
             Do: fit a wider gap.
▲ narrow     check.narrow
             3.00 kV peak at worst, limit 2.00 kV peak: this
             exceeds the limit.
             Do: fit a wider gap.
"""


def _shown(width: int, colour: bool) -> str:
    out = StringIO()
    console = Console(
        file=out, width=width, highlight=False, markup=False, emoji=False,
        force_terminal=colour, color_system="truecolor" if colour else None,
    )  # fmt: skip
    show_sheet(_sheet(), console)
    return out.getvalue()


def test_the_first_screen_to_the_letter() -> None:
    assert _shown(60, colour=False).startswith(TOP_60)


def test_the_order_of_telling() -> None:
    text = _shown(100, colour=False)
    order = [
        "Do not key",
        "At most 20 W",
        "What stands in the way",
        "Figures",
        "What is clear",
        "Assumed",
        "Cautions",
    ]
    places = [text.index(words_) for words_ in order]
    assert places == sorted(places)


def test_colour_changes_no_word() -> None:
    import re

    coloured = re.sub(r"\x1b\[[0-9;]*m", "", _shown(80, colour=True))
    strip = [line.rstrip() for line in coloured.splitlines()]
    assert strip == _shown(80, colour=False).splitlines()


def test_no_line_is_wider_than_the_terminal() -> None:
    for width in (50, 60, 80, 100):
        assert max(map(len, _shown(width, colour=False).splitlines())) <= width


def test_a_digit_gained_by_rounding_is_no_fourth_one() -> None:
    assert significant(9.996) == "10.0"
    assert significant(0.09996) == "0.100"
    assert significant(99.96) == "100"


@pytest.mark.parametrize(("value", "text"), [(0.29, "0.29"), (0.57, "0.57"), (1.1, "1.1"), (29.0, "29"), (8.2, "8.2")])
def test_a_power_of_two_digits_stays_what_it_is(value: float, text: str) -> None:
    """0.29 / 0.01 is 28.999999999999996 in binary: nobody loses a step to that."""
    assert words.floor_two_digits(value) == text


def test_a_frequency_keeps_all_its_digits() -> None:
    assert words.frequency(10.1365e6) == "10.1365 MHz"
    assert words.frequency(14_074_000.0) == "14.074 MHz"


def test_a_figure_that_must_reach_its_limit_is_told_by_its_low_end() -> None:
    told = words.against_limit(Spread(2270.0, 3120.0, 3900.0), 2700.0, "Hz", "low", None)
    assert told == "2.27 kHz at worst, 3.12 likely, at least 2.70 kHz is needed"


def test_ends_that_are_equal_are_told_where_there_is_no_likely_value() -> None:
    assert words.ends(Spread(1.0, None, 1.0), "A", "A") == "(1.00 … 1.00)"
