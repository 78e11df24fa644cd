"""Bad input is the normal case: every message tells file, line, key, what was found and what would do."""

import os
import time
from pathlib import Path
from typing import Any

import pytest
from designs import MakeDesign, file_of, plain_tree, put
from hypothesis import given, settings
from hypothesis import strategies as st

from magsafe.design.reading import LARGEST_FILE, line_of, parse_design, read_design
from magsafe.errors import DesignError, Problem

TEXTS = [
    # what is written for a length, part of what is answered
    ("9**9**9 m", "nothing is worked out"),
    ("1e400 m", "without an exponent"),
    ("1e3 m", "without an exponent"),
    ("nan m", "finite"),
    ("inf m", "finite"),
    ("-1 m", "minus"),
    ("1 m + 1 m", "nothing is worked out"),
    ("1,5 m", "decimal point"),
    ("１ m", "digits 0 to 9"),
    ("1 1/2 in", "fraction"),
    ("3' 3\"", "3.25 ft"),
    ("14 AWG", "diameter instead of the gauge"),
    ("1.0 kg", "write it in one of these"),
    ("22", "add the unit"),
    ("1  m", "at most one space"),
    (".5 m", "digit before"),
    ("5. m", "digit after"),
    ("1 M", "a million"),
    ("9" * 10_000_00, "one number and one unit"),
    ("", "in the form of"),
    ("m", "in the form of"),
    ("1 m # x", "in the form of"),
    ("1 m;", "in the form of"),
    ("0.001 m", "check the number"),
    ("9999 m", "check the number"),
]


def problems_of(data: bytes) -> tuple[Problem, ...]:
    with pytest.raises(DesignError) as caught:
        parse_design(data, "test.toml")
    return caught.value.problems


def problems(**changes: Any) -> tuple[Problem, ...]:
    return problems_of(file_of(plain_tree(**changes)))


@pytest.mark.parametrize(("text", "answer"), TEXTS, ids=[t[:20] or "empty" for t, _ in TEXTS])
def test_a_text_that_is_no_quantity(text: str, answer: str) -> None:
    data = file_of(plain_tree(loop__diameter=text))
    if len(data) > LARGEST_FILE:
        (problem,) = problems_of(data)
        assert "1 MB" in problem.found
        return
    found = [p for p in problems_of(data) if p.key == "loop.diameter"]
    assert len(found) == 1
    assert answer in found[0].do
    assert len(found[0].text("test.toml")) < 600


@pytest.mark.parametrize("value", [22, 1.5, True, ["1 m"], {"low": "1 m"}])
def test_a_bare_value_is_no_quantity(value: Any) -> None:
    (problem,) = problems(loop__diameter=value)
    assert problem.key == "loop.diameter"
    assert 'such as "22 mm"' in problem.expected


OTHER_KINDS = [
    ("transmission__0__frequency", "7.1 mHz", 'did you mean "7.1 MHz"'),
    ("transmission__0__frequency", "60 rpm", "write it in one of these"),
    ("transmission__0__power", "100 MW", "a million"),
    ("transmission__0__power", "30 dBm", "write it in one of these"),
    ("transmission__0__power", "20 kW", "check the number"),
    ("transmission__0__power", "100 Watts", 'did you mean "100 W"'),
    ("loop__conductor__outer_diameter", "22 m", "check the number"),
    ("capacitor__rated_voltage", "4000", "add the unit"),
    ("capacitor__series_resistance", "50 Mohm", "a million"),
    ("loop__conductor__temperature", "200 degC", "check the number"),
]


@pytest.mark.parametrize(("path", "text", "answer"), OTHER_KINDS)
def test_other_kinds_of_quantity(path: str, text: str, answer: str) -> None:
    found = problems(**{path: text})
    assert any(answer in problem.do for problem in found), found


GOOD = [
    ("loop__diameter", "1.0 m", 1.0),
    ("loop__diameter", "1000mm", 1.0),
    ("loop__diameter", "39.4 in", 1.00076),
    ("loop__diameter", "3.25 ft", 0.9906),
    ("loop__conductor__temperature", "20 °C", 293.15),
    ("loop__conductor__temperature", "-20 degC", 253.15),
    ("capacitor__stray", "0.000003 \u00b5F", 3e-12),
    ("capacitor__stray", "0.000003 \u03bcF", 3e-12),
    ("capacitor__series_resistance__likely", "5 m\u03a9", 5e-3),
    ("capacitor__series_resistance__likely", "5 m\u2126", 5e-3),
]


@pytest.mark.parametrize(("path", "text", "value"), GOOD)
def test_good_quantities_become_si(design: MakeDesign, path: str, text: str, value: float) -> None:
    found: Any = design(capacitor__series_resistance__high="9 mohm", **{path: text})
    for step in path.split("__"):
        found = getattr(found, step)
    assert found == pytest.approx(value)


def test_a_thin_foil_is_plausible(design: MakeDesign) -> None:
    strip = {"form": "strip", "width": "40 mm", "thickness": "0.05 mm", "material": "copper"}
    assert design(loop__conductor=strip).loop.conductor.thickness == pytest.approx(5e-5)


DISAGREEMENTS = [
    # changes, key named, part of what is expected or advised
    ({"loop__turns": 2}, "loop.turn_spacing", "needed from 2 turns"),
    ({"loop__turns": 2, "loop__turn_spacing": "20 mm"}, "loop.turn_spacing", "touch"),
    ({"loop__perimeter": "3 m"}, "loop.perimeter", "only one of"),
    ({"loop__diameter": None}, "loop.diameter", "diameter or perimeter"),
    ({"loop__sides": 4}, "loop.sides", "a circle is given by"),
    (
        {"loop__shape": "polygon", "loop__diameter": None, "loop__side": "1 m"},
        "loop.sides",
        "3 to 24",
    ),
    ({"loop__conductor__wall": "1 mm"}, "loop.conductor.wall", "a rod is given by"),
    ({"loop__conductor__form": "tube"}, "loop.conductor.wall", "outer_diameter and wall"),
    (
        {"loop__conductor__form": "tube", "loop__conductor__wall": "12 mm"},
        "loop.conductor.wall",
        "less than half",
    ),
    ({"loop__conductor__material": "copper"}, "loop.conductor.conductivity", "only one of"),
    ({"loop__conductor__conductivity": None}, "loop.conductor.material", "a material"),
    (
        {"loop__diameter": "60 mm", "loop__conductor__outer_diameter": "40 mm"},
        "loop.conductor.outer_diameter",
        "thicker than the loop is open",
    ),
    ({"loop__joint": [{"name": "x", "at": "capacitor"}]}, "loop.joint[0].kind", "a kind"),
    ({"capacitor__fixed": "47 pF"}, "capacitor.fixed", "only one of"),
    ({"capacitor__tolerance": "5 %"}, "capacitor.tolerance", "fixed value"),
    ({"capacitor__capacitance__min": "600 pF"}, "capacitor.capacitance", "min below max"),
    ({"capacitor__rated_voltage": None}, "capacitor.rated_voltage_kind", "rated_voltage beside it"),
    ({"capacitor__gap": "2 mm"}, "capacitor.gap", "an air kind"),
    ({"capacitor__kind": "none"}, "capacitor.rated_voltage", "nothing else"),
    ({"capacitor__quality_factor": 1000}, "capacitor.series_resistance", "only one of"),
    ({"transmission__0__power": None}, "transmission[0].power", "peak envelope power"),
    ({"transmission__0__carrier_power": "25 W"}, "transmission[0].carrier_power", "only one of"),
    (
        {"transmission__0__mode": "CW", "transmission__0__duty": "40 %"},
        "transmission[0].duty",
        "only one of",
    ),
    (
        {
            "transmission__0__over": {"transmit": "3 min", "listen": "3 min"},
            "transmission__0__on_air_share": "50 %",
        },
        "transmission[0].on_air_share",
        "only one of",
    ),
    (
        {"transmission__0__tune_up": {"power": "200 W", "time": "5 s"}},
        "transmission[0].tune_up.power",
        "at most the envelope power",
    ),
    (
        {"loop__plane": "horizontal", "capacitor__position": "top"},
        "capacitor.position",
        "horizontal",
    ),
    (
        {"loop__centre_height": "0.4 m", "site__ground": "average"},
        "loop.centre_height",
        "into the ground",
    ),
    ({"place": [{"name": "a", "who": "public"}]}, "place[0].in_plane", "where it is"),
    (
        {"place": [{"name": "a", "who": "public", "across": "2 m"}]},
        "place[0].across",
        "beside a vertical loop",
    ),
    (
        {
            "loop__plane": "horizontal",
            "place": [{"name": "a", "who": "public", "along_axis": "2 m"}],
        },
        "place[0].along_axis",
        "beside a horizontal loop",
    ),
    (
        {"place": [{"name": "a", "who": "public", "fence": "4 m", "in_plane": "2 m"}]},
        "place[0].in_plane",
        "a fence, or a place",
    ),
    (
        {
            "place": [
                {
                    "name": "a",
                    "who": "public",
                    "in_plane": "2 m",
                    "posture": "lying",
                    "height": "1 m",
                }
            ]
        },
        "place[0].height",
        "posture",
    ),
    (
        {
            "place": [
                {"name": "A b", "who": "public", "in_plane": "2 m"},
                {"name": "a-b", "who": "public", "in_plane": "3 m"},
            ]
        },
        "place[1].name",
        "a name of its own",
    ),
    (
        {"place": [{"name": "a", "who": "public", "in_plane": "2 m", "when": "tuning"}]},
        "place[0].when",
        "tune_up",
    ),
    ({"site__rules": ["us-fcc", "us-fcc"]}, "site.rules[1]", "once"),
    ({"site__rules": ["us-fc"]}, "site.rules[0]", 'did you mean "us-fcc"'),
    ({"site__ground": "avrage"}, "site.ground", 'did you mean "average"'),
    ({"site__ground": {"conductivity": "5 mS/m"}}, "site.ground.permittivity", "needed"),
    (
        {"loop__conductor__material": "coper tube"},
        "loop.conductor.material",
        'did you mean "copper tube"',
    ),
    ({"loop__diametre": "1 m"}, "loop.diametre", 'did you mean "diameter"'),
    ({"loop__rotates": "yes"}, "loop.rotates", "true or false"),
    ({"loop__turns": 1.5}, "loop.turns", "whole number"),
    ({"loop__turns": 9}, "loop.turns", "8 or less"),
    ({"transmission": []}, "transmission", "at least 1"),
    ({"loop": None}, "loop", "needed"),
    ({"schema": "magsafe.design/9"}, "schema", "magsafe.design/1"),
    ({"schema": None}, "schema", "needed"),
    ({"station": {"name": "a\u001b[2Jb"}}, "station.name", "control characters"),
    ({"station": {"callsign": "  "}}, "station.callsign", "a name"),
    ({"margins": {"voltage": 0.9}}, "margins.voltage", "1.0 or more"),
    ({"margins": {"voltage": "1.5"}}, "margins.voltage", "a number"),
    ({"margins": {"exposure": 2}}, "margins.exposure", "decibels"),
    (
        {"capacitor__series_resistance": {"low": "3 mohm", "likely": "2 mohm", "high": "4 mohm"}},
        "capacitor.series_resistance",
        "low <= likely <= high",
    ),
    (
        {"capacitor__series_resistance": {"low": "3 mohm", "likely": "4"}},
        "capacitor.series_resistance.likely",
        "add the unit",
    ),
]


@pytest.mark.parametrize(("changes", "key", "part"), DISAGREEMENTS, ids=[k for _, k, _ in DISAGREEMENTS])
def test_keys_that_do_not_fit_together(changes: dict[str, Any], key: str, part: str) -> None:
    found = problems(**changes)
    named = [p for p in found if p.key == key]
    assert named, [(p.key, p.expected, p.do) for p in found]
    assert any(part in f"{p.expected} {p.do}" for p in named), named


OUTLINES = [
    ([["0 m", "0 m"], ["1 m", "1 m"], ["1 m", "0 m"], ["0 m", "1 m"]], "cross or touch"),
    ([["0 m", "0 m"], ["1 m", "0 m"], ["1 m", "1 m"], ["0 m", "0 m"]], "each corner once"),
    ([["0 m", "0 m"], ["1 m", "0 m"], ["2 m", "0 m"]], "cross or touch|enclose"),
]


@pytest.mark.parametrize(("points", "part"), OUTLINES)
def test_an_outline_is_closed_and_does_not_cross_itself(points: list[list[str]], part: str) -> None:
    found = problems(loop__shape="outline", loop__diameter=None, loop__points=points)
    assert any(word in p.expected for p in found for word in part.split("|"))


def test_all_errors_come_at_once_and_in_file_order() -> None:
    data = b"""schema = "magsafe.design/1"
[loop]
shape = "circle"
diameter = 1.0
turns = 2
colour = "green"
[loop.conductor]
form = "tube"
outer_diameter = "22 mm"
wall = "1,0 mm"
material = "copper tube"
[capacitor]
kind = "vacuum variable"
capacitance = { min = "300 pF", max = "250 pF" }
[[transmission]]
frequency = "7.1 MHz"
power = "100 W"
[[transmission]]
frequency = "14.2 MHz"
"""
    found = problems_of(data)
    assert [(p.line, p.key) for p in found] == [
        (2, "loop.turn_spacing"),
        (4, "loop.diameter"),
        (6, "loop.colour"),
        (10, "loop.conductor.wall"),
        (14, "capacitor.capacitance"),
        (18, "transmission[1].power"),
    ]


def test_the_full_text_of_a_message() -> None:
    data = file_of(plain_tree()).replace(b'"15 kV"', b"4000")
    with pytest.raises(DesignError) as caught:
        parse_design(data, "harbour.toml")
    assert str(caught.value) == (
        "harbour.toml:3  capacitor.rated_voltage\n"
        "  found     4000\n"
        '  expected  a voltage with its unit, such as "4 kV"\n'
        "  do        add the unit, and put both inside quotes\n"
        "\n"
        "1 problem in harbour.toml."
    )


NOT_FILES = [
    (b"", "an empty file"),
    (b"  \n", "an empty file"),
    (b"\xff\xfe", "not UTF-8"),
    (b"a = \xe9", "not UTF-8"),
    (b"x" * (LARGEST_FILE + 1), "more than 1 MB"),
    (b"a = " + b"[" * 5000 + b"]" * 5000, "nested too deep|Invalid"),
    (b"a = " + b"{ b = " * 5000, "nested too deep|characters"),
    (b"a = 1\na = 2", "overwrite|Cannot"),
    (b"a = ", "Invalid value"),
    (b'a = "unclosed', "Unterminated|Illegal|Expected|end"),
    (b"a = 1" + b"0" * 5000, "digits|exceeds|limit|unknown key"),
]


@pytest.mark.parametrize(("data", "part"), NOT_FILES, ids=[p for _, p in NOT_FILES])
def test_what_is_no_design_file(data: bytes, part: str) -> None:
    found = problems_of(data)
    assert any(word in p.found for p in found for word in part.split("|")), found
    assert len(str(DesignError("x", found))) < 3000


WHOLE = """
schema = "magsafe.design/1"
[station]
name = "Quay hut, seaward rail"
callsign = "CALLSIGN"
operator = "duty operator"
[loop]
shape = "circle"
diameter = "1.0 m"
turns = 1
turn_spacing = "80 mm"
turn_arrangement = "side by side"
plane = "vertical"
centre_height = "2.0 m"
rotates = false
[loop.conductor]
form = "tube"
outer_diameter = "22 mm"
wall = "1.0 mm"
material = "copper tube"
temperature = "20 degC"
plating = { material = "silver", thickness = "5 um" }
surface = "oxidised"
in_sun = false
[[loop.joint]]
name = "capacitor clamps"
count = 2
kind = "bolted lug"
resistance = { low = "0.1 mohm", likely = "0.3 mohm", high = "1.0 mohm" }
at = "capacitor"
[capacitor]
kind = "air variable"
capacitance = { min = "12 pF", max = "250 pF" }
position = "top"
rated_voltage = "4 kV"
rated_voltage_kind = "peak RF"
rated_current = "20 A"
rated_current_at = "13.56 MHz"
rated_reactive_power = "5 kW"
quality_factor = { low = 500, likely = 1000, high = 3000 }
gap = "2.0 mm"
sections_in_series = 1
plate_thickness = "1 mm"
plate_edge = "round"
wiper = false
dielectric = "PTFE"
stray = "3 pF"
weather = "open"
[[capacitor.with]]
connection = "parallel"
capacitance = "330 pF"
rated_voltage = "7.5 kV"
on = ["3.6 MHz"]
[tuning]
by = "motor"
steps_per_range = 4000
[feed]
line_loss = "0.3 dB"
coupling = "small loop"
[[transmission]]
name = "40 m voice"
frequency = "7.1 MHz"
power = "100 W"
mode = "SSB"
over = { transmit = "3 min", listen = "3 min" }
tune_up = { power = "5 W", time = "20 s" }
[site]
ground = "average"
floors = ["0 m", "6 m"]
altitude = "100 m"
air_temperature = "20 degC"
metal_within = "0.5 m"
rules = ["us-fcc", "icnirp-2020"]
[[place]]
name = "operator's chair"
who = "trained"
along_axis = "2.5 m"
in_plane = "0 m"
posture = "sitting"
when = "always"
[[place]]
name = "fence"
who = "public"
fence = "4 m"
[margins]
voltage = 1.5
current = 1.25
temperature = 1.25
exposure = "2 dB"
overshoot = "0 dB"
[measured]
"""


def test_the_contracts_own_design_file_is_read() -> None:
    """Every block and key of the contract's example, side by side as it shows them."""
    made = parse_design(WHOLE.encode(), "contract.toml")
    assert made.place[1].fence == 4.0
    assert made.capacitor.padding[0].on == [3.6e6]


def test_one_block_where_a_list_is_due_is_told_so() -> None:
    found = problems_of(WHOLE.replace("[[transmission]]", "[transmission]").encode())
    assert any("[[transmission]]" in p.do for p in found)


def test_the_kind_of_a_rating_has_a_key_of_its_own() -> None:
    (problem,) = problems(capacitor__rated_voltage="4 kV DC")
    assert "rated_voltage_kind" in problem.do


@pytest.mark.parametrize("name", ["!!!", "???"])
def test_a_name_without_letters_makes_no_id(name: str) -> None:
    found = problems(place=[{"name": name, "who": "public", "in_plane": "2 m"}])
    assert any("letter or a digit" in p.expected for p in found)


@pytest.mark.parametrize("key", ["loop.turns", "capacitor.quality_factor", "capacitor.rated_voltage", "site.rules"])
def test_numbers_of_thousands_of_digits_do_no_harm(key: str) -> None:
    tree = plain_tree(capacitor__series_resistance=None)
    put(tree, key, "HUGE")
    for number in (b"0x" + b"F" * 5000, b"9" * 4000, b"nan", b"-inf", b"true"):
        found = problems_of(file_of(tree).replace(b'"HUGE"', number))
        assert all(len(p.text("x")) < 600 for p in found)


def test_control_characters_reach_no_terminal() -> None:
    for path in (
        "capacitor.kind",
        "loop.shape",
        "loop.conductor.form",
        "transmission.0.mode",
        "site.ground",
        "station.name",
    ):
        tree = plain_tree(capacitor__gap="2 mm")
        put(tree, path, "\u001b[31mred")
        text = str(DesignError("x", problems_of(file_of(tree))))
        assert "\x1b" not in text
    with pytest.raises(DesignError) as caught:
        parse_design(b"", "a\x1b[2J.toml")
    assert "\x1b" not in str(caught.value)


def test_deeply_dotted_keys_do_no_harm() -> None:
    found = problems_of(b".".join([b"a"] * 3000) + b" = 1")
    assert all(len(p.text("x")) < 600 for p in found)


def test_a_key_of_many_characters_is_cut() -> None:
    found = problems_of(b'"' + b"k" * 100_000 + b'" = 1')
    assert all(len(p.text("x")) < 600 for p in found)


def test_a_byte_order_mark_is_no_fault() -> None:
    assert parse_design(b"\xef\xbb\xbf" + file_of(plain_tree())).loop.shape == "circle"


def test_files_that_cannot_be_read(tmp_path: Path) -> None:
    with pytest.raises(DesignError, match="a directory"):
        read_design(tmp_path)
    with pytest.raises(DesignError, match="no such file"):
        read_design(tmp_path / "missing.toml")
    with pytest.raises(DesignError, match="embedded null"):
        read_design("a\0b")
    with pytest.raises(DesignError, match=r"too long|no such file"):
        read_design("a" * 5000)


@pytest.mark.skipif(os.geteuid() == 0, reason="root reads every file")
def test_a_file_without_permission(tmp_path: Path) -> None:
    locked = tmp_path / "locked.toml"
    locked.write_bytes(file_of(plain_tree()))
    locked.chmod(0)
    with pytest.raises(DesignError, match="permission denied"):
        read_design(locked)


def test_lines_of_tables_lists_inline_tables_and_what_is_missing() -> None:
    text = '# head\na = 1\n\n[b]\nc = { d = 1,  e = 2 }\n[[f]]\ng = [\n  1,\n  2,\n]\n[[f]]\nh = """\nx\n"""\n'
    assert line_of(text, ("a",)) == 2
    assert line_of(text, ("b", "c", "e")) == 5
    assert line_of(text, ("f", 0, "g", 1)) == 7
    assert line_of(text, ("f", 1, "h")) == 12
    assert line_of(text, ("f", 1, "missing")) == 11
    assert line_of(text, ("nowhere",)) is None
    assert line_of(text.replace("\n", "\r\n"), ("b", "c")) == 5


def test_a_name_of_ten_thousand_letters_is_read(design: MakeDesign) -> None:
    assert len(design(station={"name": "q" * 10_000}).station.name or "") == 10_000


def test_the_design_knows_where_it_is_from(tmp_path: Path) -> None:
    file = tmp_path / "quay.toml"
    file.write_bytes(file_of(plain_tree()))
    origin = read_design(file).origin
    assert origin.name == "quay.toml"
    assert len(origin.sha256) == 64
    assert origin.text.encode() == file.read_bytes()


@settings(max_examples=300, deadline=1000)
@given(st.text(max_size=60))
def test_any_text_is_a_length_or_a_clear_message(text: str) -> None:
    try:
        parse_design(file_of(plain_tree(loop__diameter=text)))
    except DesignError as error:
        assert all(p.expected and p.do for p in error.problems)


VALUES = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats(allow_nan=False, allow_infinity=False) | st.text(max_size=12),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=8), inner, max_size=3),
    max_leaves=6,
)
PATHS = [
    "loop", "loop__shape", "loop__conductor", "loop__joint", "loop__points", "capacitor", "capacitor__with",
    "capacitor__capacitance", "capacitor__quality_factor", "transmission", "transmission__0",
    "transmission__0__over", "site", "site__ground", "site__rules", "site__floors", "place", "margins", "measured",
    "station", "tuning", "feed__line_loss", "probe",
]  # fmt: skip


def clean(value: Any) -> Any:
    """Leave out None, which TOML cannot say."""
    if isinstance(value, dict):
        return {k: clean(v) for k, v in value.items() if v is not None}
    if isinstance(value, list):
        return [clean(v) for v in value if v is not None]
    return value


@settings(max_examples=400, deadline=2000)
@given(path=st.sampled_from(PATHS), value=VALUES)
def test_no_value_anywhere_makes_a_traceback(path: str, value: Any) -> None:
    data = file_of(plain_tree(**{path: clean(value) if value is not None else "none"}))
    try:
        parse_design(data)
    except DesignError as error:
        assert all(p.expected and p.do for p in error.problems)


def test_hopeless_files_are_answered_at_once() -> None:
    """A bound on hanging, not a measurement: ten seconds where tenths are usual."""
    begin = time.monotonic()
    problems_of(b"a = 1\n" * 100_000)
    problems_of("\n".join(f'[[transmission]]\npower = "{i}"' for i in range(5000)).encode())
    problems_of("\n".join(f"k{i} = 1" for i in range(80_000)).encode())
    problems_of(file_of(plain_tree(site__rules=["us-fcc"] * 60_000)).replace(b", ", b",\n"))
    problems_of(b"[" + b"a." * 300_000 + b"a]")
    problems_of(b"\n".join([b"[" + b"a." * 9_000 + b"a]"] * 50))
    assert time.monotonic() - begin < 10.0


BOUNDARIES = [
    # the first value that is refused: turns that just touch, a tube without a bore, an empty range, a loop on the soil
    ({"loop__turns": 2, "loop__turn_spacing": "22 mm"}, "loop.turn_spacing"),
    ({"loop__conductor__form": "tube", "loop__conductor__wall": "11 mm"}, "loop.conductor.wall"),
    ({"capacitor__capacitance": {"min": "100 pF", "max": "100 pF"}}, "capacitor.capacitance"),
    ({"loop__centre_height": "0.511 m", "site__ground": "average"}, "loop.centre_height"),
    ({"loop__centre_height": "0.505 m", "site__ground": "perfect"}, "loop.centre_height"),
    ({"loop__centre_height": "0.011 m", "site__ground": "average", "loop__plane": "horizontal"}, "loop.centre_height"),
    ({"transmission__0__tune_up": {"power": "100.1 W", "time": "5 s"}}, "transmission[0].tune_up.power"),
    (
        {
            "loop__conductor": {
                "form": "strip",
                "width": "10 mm",
                "thickness": "11 mm",
                "conductivity": "58 MS/m",
            }
        },
        "loop.conductor.thickness",
    ),
    (
        {
            "loop": {
                "shape": "rectangle",
                "width": "60 mm",
                "height": "2 m",
                "conductor": {"form": "rod", "outer_diameter": "40 mm", "conductivity": "58 MS/m"},
            }
        },
        "loop.conductor.outer_diameter",
    ),
    ({"capacitor__rated_current": None, "capacitor__rated_current_at": "7 MHz"}, "capacitor.rated_current_at"),
    ({"capacitor__quality_factor_at": "7 MHz"}, "capacitor.quality_factor_at"),
    ({"capacitor__kind": "air variable", "capacitor__plate_edge": "round"}, "capacitor.plate_edge"),
    (
        {"transmission__0": {"frequency": "7.1 MHz", "carrier_power": "25 W", "mode": "FM"}},
        "transmission[0].carrier_power",
    ),
    (
        {
            "transmission": [
                {"name": "40 m Voice", "frequency": "7.1 MHz", "power": "10 W"},
                {"name": "40-m voice", "frequency": "7.1 MHz", "power": "20 W"},
            ]
        },
        "transmission[1].name",
    ),
    (
        {"place": [{"name": "a", "who": "public", "in_plane": "2 m", "height": "1 m", "floor": "3 m"}]},
        "place[0].floor",
    ),
    ({"place": [{"name": "a", "who": "public", "fence": "4 m", "posture": "standing"}]}, "place[0].posture"),
    ({"place": [{"name": "a", "who": "public", "fence": "4 m", "height": "1 m"}]}, "place[0].height"),
    ({"place": [{"name": "a", "who": "public", "fence": "4 m", "floor": "1 m"}]}, "place[0].floor"),
]


@pytest.mark.parametrize(("changes", "key"), BOUNDARIES, ids=[k for _, k in BOUNDARIES])
def test_what_only_just_does_not_fit_is_refused_by_its_key(changes: dict[str, Any], key: str) -> None:
    assert [p.key for p in problems(**changes)] == [key]


JUST_FITTING: list[dict[str, Any]] = [
    {"loop__turns": 2, "loop__turn_spacing": "22.1 mm"},
    {"loop__conductor__form": "tube", "loop__conductor__wall": "10.9 mm"},
    {"capacitor__capacitance": {"min": "100 pF", "max": "100.1 pF"}},
    {"loop__centre_height": "0.512 m", "site__ground": "average"},
    {"loop__centre_height": "0.1 m", "site__ground": "none"},
    {"loop__centre_height": "0.1 m", "site__ground": "average", "loop__plane": "horizontal"},
    {"transmission__0__tune_up": {"power": "100 W", "time": "5 s"}},
    {"transmission__0__power": "10 kW"},
    {"transmission__0__power": "1 mW"},
    {"capacitor__position": "top"},
    {"capacitor__kind": "dielectric plate", "capacitor__gap": "2 mm", "capacitor__plate_thickness": "1 mm"},
    {"loop__conductor": {"form": "strip", "width": "10 mm", "thickness": "10 mm", "conductivity": "58 MS/m"}},
    {
        "loop": {
            "shape": "rectangle",
            "width": "90 mm",
            "height": "2 m",
            "conductor": {"form": "rod", "outer_diameter": "40 mm", "conductivity": "58 MS/m"},
        }
    },
    {"place": [{"name": "a", "who": "public", "in_plane": "2 m", "posture": "standing", "floor": "3 m"}]},
]


@pytest.mark.parametrize("changes", JUST_FITTING, ids=[" ".join(each) for each in JUST_FITTING])
def test_what_only_just_fits_is_read(design: MakeDesign, changes: dict[str, Any]) -> None:
    assert design(**changes).transmission


def test_padding_is_held_against_no_frequency_that_could_not_be_read() -> None:
    """The bad frequency has its own message: a second one about the padding would send to the wrong line."""
    padding = {"connection": "parallel", "capacitance": "1 nF", "on": ["3.6 MHz"]}
    found = problems(transmission__0__frequency="7,1 MHz", capacitor__with=[padding])
    assert [p.key for p in found] == ["transmission[0].frequency"]


def test_a_temperature_out_of_range_is_answered_in_degrees() -> None:
    (problem,) = problems(loop__conductor__temperature="95 degC")
    assert "between -60 degC and 90 degC" in problem.expected
