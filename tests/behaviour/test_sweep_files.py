"""An analyser's file: every form that is right is read alike, and whatever is wrong gets a message, never a trace."""

import hashlib
import importlib.util
import os
import time
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from synthetic_sweeps import KnownLoop

from magsafe.design import sweep as module
from magsafe.design.sweep import Sweep, read_sweep
from magsafe.errors import CommandError
from magsafe.physics.arrays import Array, ComplexArray
from magsafe.physics.resonance_fit import fit_resonance

pytest.importorskip("skrf")

KNOWN = KnownLoop(coupling=1.3, line_length=3.0, line_loss=0.5, points=41)
FREQUENCY, REFLECTION = KNOWN.sweep()
UNITS = {"HZ": 1.0, "kHz": 1e3, "MHz": 1e6, "ghz": 1e9}
GOOD = """! a loop on a quay
# HZ S RI R 50
7000000 0.50 -0.10
7001000 0.40 -0.20 ! here
7002000 0.30 -0.30
"""


def columns(reflection: ComplexArray, form: str) -> Array:
    size, angle = np.abs(reflection), np.degrees(np.angle(reflection))
    pairs = {"RI": (reflection.real, reflection.imag), "MA": (size, angle), "DB": (20.0 * np.log10(size), angle)}
    return np.column_stack(pairs[form])


def written(form: str = "RI", unit: str = "HZ", option: str | None = None) -> str:
    rows = np.column_stack((FREQUENCY / UNITS[unit], columns(REFLECTION, form)))
    body = "\n".join(" ".join(f"{value:.15g}" for value in row) for row in rows)
    return f"{option or f'# {unit} S {form} R 50'}\n{body}\n"


def read(folder: Path, content: str | bytes, name: str = "loop.s1p") -> Sweep:
    file = folder / name
    file.write_bytes(content.encode() if isinstance(content, str) else content)
    return read_sweep(file)


def message(folder: Path, content: str | bytes, name: str = "loop.s1p") -> str:
    with pytest.raises(CommandError) as caught:
        read(folder, content, name)
    return str(caught.value)


# What is right ---------------------------------------------------------------------------------------------


@pytest.mark.parametrize("unit", list(UNITS))
@pytest.mark.parametrize("form", ["RI", "MA", "DB"])
def test_every_form_and_unit_is_read_alike(tmp_path: Path, form: str, unit: str) -> None:
    content = written(form, unit)
    found = read(tmp_path, content)
    np.testing.assert_allclose(found.frequency, FREQUENCY, rtol=1e-12)
    np.testing.assert_allclose(found.reflection, REFLECTION, rtol=1e-9)
    assert found.name == "loop.s1p"
    assert found.sha256 == hashlib.sha256(content.encode()).hexdigest()
    assert found.reference_impedance == 50.0
    assert not found.notes


def test_the_fit_takes_what_was_read(tmp_path: Path) -> None:
    found = read(tmp_path, written("DB", "MHz"))
    assert fit_resonance(found.frequency, found.reflection).unloaded_q.value == pytest.approx(1000.0, rel=1e-3)


def test_the_arrays_cannot_be_written_to(tmp_path: Path) -> None:
    found = read(tmp_path, GOOD)
    with pytest.raises(ValueError, match="read-only"):
        found.frequency[0] = 0.0
    with pytest.raises(ValueError, match="read-only"):
        found.reflection[0] = 0.0


@pytest.mark.parametrize(
    "content",
    [
        GOOD.replace("\n", "\r\n").encode(),
        GOOD.replace("\n", "\r").encode(),
        b"\xef\xbb\xbf" + GOOD.encode(),
        GOOD.upper().encode(),
        GOOD.lower().encode(),
        GOOD.replace(" ", "\t").encode(),
        GOOD.replace("7001000", "   7.001E+06").encode(),
        GOOD.replace("quay", "quay, 20 \xb0C").encode("latin-1"),
        GOOD.replace("quay", "quay, 20 \xb0C").encode(),
        GOOD.replace("\n", "\n\n").encode(),
        GOOD.replace("0.50", ".5").replace("0.40", "+4e-1").encode(),
        GOOD.rstrip("\n").encode(),
        GOOD.replace("# HZ", "#HZ").encode(),
        GOOD.replace("# HZ S RI R 50", "# RI HZ S R 50 ! any order").encode(),
        GOOD.replace("# HZ S RI R 50", "# HZ S RI").encode(),
        GOOD.replace("# HZ S RI R 50", "# RI HZ").encode(),
        (GOOD + "# HZ S RI R 50\n! end\n").encode(),
    ],
)
def test_what_makes_no_difference(tmp_path: Path, content: bytes) -> None:
    found = read(tmp_path, content)
    np.testing.assert_allclose(found.frequency, [7.0e6, 7.001e6, 7.002e6])
    np.testing.assert_allclose(found.reflection, [0.5 - 0.1j, 0.4 - 0.2j, 0.3 - 0.3j])


@pytest.mark.parametrize("name", ["LOOP.S1P", "a loop.s1p", "x.y.S1p"])
def test_names_of_any_case(tmp_path: Path, name: str) -> None:
    assert read(tmp_path, GOOD, name).name == name


def test_another_reference_is_passed_on(tmp_path: Path) -> None:
    found = read(tmp_path, GOOD.replace("R 50", "R 75.0"))
    assert found.reference_impedance == 75.0
    assert found.reflection[0] == pytest.approx(0.5 - 0.1j)


def test_defaults_are_those_of_the_standard(tmp_path: Path) -> None:
    """GHz S MA R 50: Touchstone File Format Specification 1.1 (memory)."""
    found = read(tmp_path, "#\n0.0071 0.5 90\n0.0072 0.4 180\n")
    np.testing.assert_allclose(found.frequency, [7.1e6, 7.2e6])
    np.testing.assert_allclose(found.reflection, [0.5j, -0.4], atol=1e-12)


def test_a_file_from_high_to_low_is_turned_round(tmp_path: Path) -> None:
    head, *rows = written().splitlines()
    found = read(tmp_path, "\n".join([head, *rows[::-1]]))
    np.testing.assert_allclose(found.frequency, FREQUENCY)
    np.testing.assert_allclose(found.reflection, REFLECTION)
    assert "turned round" in found.notes[0]


def test_a_wide_sweep_may_leave_the_range(tmp_path: Path) -> None:
    assert read(tmp_path, "# MHz S RI R 50\n0.01 0 0\n7 0 0\n900 0 0\n").frequency.size == 3


# What is wrong ---------------------------------------------------------------------------------------------

WRONG = [
    (GOOD.replace("RI R 50", "RI R 50 5"), "loop.s1p:2", "one real reference impedance"),
    (GOOD.replace("RI R 50", "RI R 50+5j"), "loop.s1p:2", "one real reference impedance"),
    (GOOD.replace("RI R 50", "RI R"), "loop.s1p:2", "one real reference impedance"),
    (GOOD.replace("R 50", "R 0"), "loop.s1p:2", "reference impedance of 0 ohm"),
    (GOOD.replace("R 50", "R -50"), "loop.s1p:2", "reference impedance of -50 ohm"),
    (GOOD.replace("R 50", "R 1e999"), "loop.s1p:2", "more than 0 ohm"),
    (GOOD.replace(" S ", " Z "), "loop.s1p:2", "Z parameters"),
    (GOOD.replace(" S ", " Y "), "loop.s1p:2", "Y parameters"),
    (GOOD.replace(" S ", " SY "), "loop.s1p:2", "in the option line"),
    (GOOD.replace(" S ", " S S "), "loop.s1p:2", "the second of its kind"),
    (GOOD.replace("HZ", "THZ"), "loop.s1p:2", "in the option line"),
    (GOOD.replace("HZ", "MHZ"), "loop.s1p", "by the unit MHz that its option line means"),
    (GOOD.replace("HZ S RI", ""), "loop.s1p", "by the unit GHz that its option line means"),
    (GOOD.replace("# HZ S RI R 50\n", ""), "loop.s1p:2", "numbers before any option line"),
    (GOOD + "# MHZ S RI R 50\n", "loop.s1p:6", "a second option line"),
    (GOOD + "7003000 0.2\n", "loop.s1p:6", "cut short"),
    (GOOD + "7003000 0.2 -", "loop.s1p:6", "a number"),
    (GOOD + "7003\n7004000 0.1 0.1", "loop.s1p:6", "1 numbers on a line"),
    (GOOD.replace("0.40 -0.20", "0.40 -0.20 0.1"), "loop.s1p:4", "4 numbers on a line"),
    (GOOD.replace("0.40 -0.20", "0.4 0 0 0 0 0 0 0"), "loop.s1p:4", "export S11 alone"),
    (GOOD.replace("0.40", "nan"), "loop.s1p:4", "not measured"),
    (GOOD.replace("0.40", "-INF"), "loop.s1p:4", "not measured"),
    (GOOD.replace("0.40", "1e999"), "loop.s1p:4", "a reflection of inf"),
    (GOOD.replace("0.40", "1_0"), "loop.s1p:4", "a number"),
    (GOOD.replace("0.40", "0,40"), "loop.s1p:4", "decimal point"),
    (GOOD.replace("0.40 ", "0.40; "), "loop.s1p:4", "decimal point"),
    (GOOD.replace("0.40", "\u0664"), "loop.s1p:4", "a number"),
    (GOOD.replace("0.40", "1.2"), "loop.s1p:4", "a reflection of 1.22"),
    (GOOD.replace(" RI", " DB").replace("0.50", "2"), "loop.s1p:3", "a loop gives back no more"),
    (GOOD.replace(" RI", " DB").replace("0.50", "9e9"), "loop.s1p:3", "a reflection of inf"),
    (GOOD.replace("7001000", "7000000"), "loop.s1p:4", "a second time"),
    (GOOD.replace("7001000", "7003000"), "loop.s1p:5", "out of order"),
    (GOOD.replace("7001000", "-7001000"), "loop.s1p:4", "not above 0"),
    (GOOD.replace("7001000", "0"), "loop.s1p:4", "not above 0"),
    (GOOD.replace("7001000", "1e999"), "loop.s1p:4", "not above 0"),
    ("[Version] 2.0\n" + GOOD, "loop.s1p:1", "version 2"),
    (GOOD.replace("! here", "! Port Impedance 50 5"), "loop.s1p:4", "an impedance of its own"),
    ("! Port Impedance 50 5\n" + GOOD, "loop.s1p:1", "an impedance of its own"),
    ("frequency,real,imag\n1,2,3\n", "loop.s1p:1", "check which file it is"),
    ("! only\n! comments\n", "loop.s1p", "comments and nothing else"),
    ("# HZ S RI R 50\n! none\n", "loop.s1p", "no points"),
    ("", "loop.s1p", "an empty file"),
    (" \r\n\t\n", "loop.s1p", "an empty file"),
    (b"\x89PNG\r\n\x1a\n\0\0", "loop.s1p:3", "not text"),
    (GOOD.encode("utf-16"), "loop.s1p", "UTF-16"),
    (b"PK\x03\x04\xff\xfe\x81", "loop.s1p:1", "check which file it is"),
]


@pytest.mark.parametrize(("content", "place", "said"), WRONG, ids=[f"{i}-{w[2]}" for i, w in enumerate(WRONG)])
def test_a_file_that_cannot_be_used(tmp_path: Path, content: str | bytes, place: str, said: str) -> None:
    text = message(tmp_path, content)
    head, found, expected, do = text.splitlines()
    assert head.split()[-1] == place
    assert said in text
    for label, row in (("found", found), ("expected", expected), ("do", do)):
        assert len(row.removeprefix(f"  {label}").strip()) > 2
    assert len(text) < 500
    assert str(tmp_path) not in text


@pytest.mark.parametrize(
    ("name", "said"),
    [
        ("loop.s2p", "S parameters of 2 ports"),
        ("loop.S4P", "S parameters of 4 ports"),
        ("loop.z1p", "Z parameters of 1 ports"),
        ("loop.ts", '".ts"'),
        ("loop.csv", '".csv"'),
        ("loop", "without an ending"),
    ],
)
def test_a_name_that_is_not_one_ports(tmp_path: Path, name: str, said: str) -> None:
    text = message(tmp_path, GOOD, name)
    assert said in text
    assert ".s1p" in text


def test_a_file_that_cannot_be_read(tmp_path: Path) -> None:
    with pytest.raises(CommandError, match="no such file"):
        read_sweep(tmp_path / "none.s1p")
    (tmp_path / "folder.s1p").mkdir()
    with pytest.raises(CommandError, match="a directory"):
        read_sweep(str(tmp_path / "folder.s1p"))
    with pytest.raises(CommandError, match="check the name"):
        read_sweep("a\0b.s1p")
    locked = tmp_path / "locked.s1p"
    locked.write_text(GOOD)
    locked.chmod(0)
    if not os.access(locked, os.R_OK):
        with pytest.raises(CommandError, match="permission"):
            read_sweep(locked)


def test_a_file_that_is_too_large(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    assert module.LARGEST_FILE == 100_000_000
    monkeypatch.setattr(module, "LARGEST_FILE", 2_000_000)
    assert "more than 2 MB" in message(tmp_path, GOOD + "!\n" * 1_000_000)


def test_without_scikit_rf_it_is_said_what_to_install(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    there = importlib.util.find_spec
    monkeypatch.setattr(module, "find_spec", lambda name: None if name == "skrf" else there(name))
    assert "pip install 'magsafe[measure]'" in message(tmp_path, GOOD)


def test_what_scikit_rf_raises_is_a_message(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def broken(_: object) -> None:
        raise ZeroDivisionError("\x1b[31m" + "x" * 1000)

    monkeypatch.setattr("skrf.io.touchstone.Touchstone", broken)
    text = message(tmp_path, GOOD)
    assert "scikit-rf cannot read" in text
    assert "\x1b" not in text
    assert len(text) < 500


@pytest.mark.parametrize("name", ["\x1b[2J.s1p", "a\nb.s1p"])
def test_a_name_moves_no_terminal(tmp_path: Path, name: str) -> None:
    assert "\x1b" not in message(tmp_path, "", name)
    assert len(message(tmp_path, "", name).splitlines()) == 4


# Anything at all -------------------------------------------------------------------------------------------


def usable(sweep: Sweep) -> bool:
    ascending = bool((np.diff(sweep.frequency) > 0.0).all())
    finite = bool(np.isfinite(sweep.reflection).all() and np.isfinite(sweep.frequency).all())
    return ascending and finite and sweep.frequency.size > 0 and sweep.reference_impedance > 0.0


def survives(folder: Path, content: bytes) -> None:
    try:
        sweep = read(folder, content)
    except CommandError as error:
        text = str(error)
        assert len(text.splitlines()) == 4
        assert text.replace("\n", "").isprintable()
    else:
        assert usable(sweep)


fuzzed = settings(
    max_examples=300, deadline=2000, suppress_health_check=[HealthCheck.function_scoped_fixture, HealthCheck.too_slow]
)


@fuzzed
@given(content=st.binary(max_size=300))
def test_bytes_of_any_kind(tmp_path: Path, content: bytes) -> None:
    survives(tmp_path, content)


@fuzzed
@given(content=st.binary(max_size=120), head=st.sampled_from([b"# HZ S RI R 50\n", b"# MHZ S DB\n", b"#"]))
def test_bytes_behind_an_option_line(tmp_path: Path, content: bytes, head: bytes) -> None:
    survives(tmp_path, head + content)


@fuzzed
@given(text=st.text(alphabet="#!sSrRIiMmAaDdBbHhZzGgkK0123456789.eE+-naninf \t\n\r[]", max_size=200))
def test_text_of_its_letters(tmp_path: Path, text: str) -> None:
    survives(tmp_path, text.encode())


@fuzzed
@given(
    start=st.integers(0, len(GOOD)),
    cut=st.integers(0, 20),
    put=st.one_of(st.binary(max_size=8), st.sampled_from([b"nan", b"1e999", b"\0", b"\r", b"!", b"#", b"[", b" 5 "])),
)
def test_a_good_file_damaged_somewhere(tmp_path: Path, start: int, cut: int, put: bytes) -> None:
    content = GOOD.encode()
    survives(tmp_path, content[:start] + put + content[start + cut :])


def test_a_million_points_take_seconds(tmp_path: Path) -> None:
    frequency = np.linspace(7.0e6, 7.2e6, 1_000_000)
    body = "\n".join(f"{f:.3f} 0.123456 -0.234567" for f in frequency.tolist())
    file = tmp_path / "long.s1p"
    file.write_text(f"# HZ S RI R 50\n{body}\n")
    started = time.perf_counter()
    assert read_sweep(file).frequency.size == 1_000_000
    assert time.perf_counter() - started < 30.0  # 5 s where this was written, 3 s of them in scikit-rf
