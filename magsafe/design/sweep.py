"""From an analyser's one-port Touchstone file to a `Sweep`, or to a message about what is wrong with it."""

import hashlib
import io
import os
import re
import stat
from dataclasses import dataclass
from importlib import import_module
from importlib.util import find_spec
from math import isfinite
from pathlib import Path
from typing import Any, NoReturn

import numpy as np

from magsafe.design.quantities import printable, show
from magsafe.errors import CommandError
from magsafe.physics.arrays import Array, ComplexArray

LARGEST_FILE = 100_000_000
LOWEST_FREQUENCY = 1e5
HIGHEST_FREQUENCY = 1e8
MOST_REFLECTION = 1.1

_UNITS = {"hz": "Hz", "khz": "kHz", "mhz": "MHz", "ghz": "GHz"}
_FORMATS = ("ma", "db", "ri")
_NUMBER = r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?"
_ONE_NUMBER = re.compile(_NUMBER)
_POINT = re.compile(rf"[ \t]*{_NUMBER}(?:[ \t]+{_NUMBER}){{2}}[ \t]*")
_PORTS = re.compile(r"\.[a-z]([0-9]+)p", re.IGNORECASE)
_EXPORT = "export S11 alone, as a .s1p file"
_A_SWEEP = "a Touchstone file of one port, .s1p"


@dataclass(frozen=True, slots=True, eq=False)
class Sweep:
    """A reflection sweep as an analyser filed it.

    `name` is the file's without its folder, `sha256` that of its bytes. `frequency` [Hz], shape (N,), ascends;
    `reflection` [1], shape (N,), refers to `reference_impedance` [ohm]. `notes` are sentences about how it was read.
    """

    name: str
    sha256: str
    frequency: Array
    reflection: ComplexArray
    reference_impedance: float
    notes: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class _Options:
    """What the option line says, with the standard's defaults."""

    unit: str = "ghz"
    form: str = "ma"
    reference: float = 50.0


def read_sweep(path: str | os.PathLike[str]) -> Sweep:
    """Read a reflection sweep.

    Parameters
    ----------
    path : the .s1p file: Touchstone version 1, S parameters, at most 100 MB

    Raises
    ------
    CommandError : scikit-rf is not installed, or the file cannot be read or used; the message tells file, line where
        it has one, what was found and what would do
    """
    file = Path(path)
    name = printable(file.name)
    _must_be_readable_by_us(name)
    _must_be_one_port(file.suffix, name)
    data = _bytes_of(file, name)
    lines = _text_of(data, name).replace("\r\n", "\n").replace("\r", "\n").split("\n")
    options, points, places = _points_of(lines, name)
    frequency, reflection = _read(options, points, name)
    notes = []
    if frequency.size > 1 and frequency[-1] < frequency[0]:
        frequency, reflection, places = frequency[::-1], reflection[::-1], places[::-1]
        notes.append("the file runs from the highest frequency to the lowest: it was turned round")
    _must_be_frequencies(frequency, places, options.unit, name)
    _must_be_reflections(reflection, places, name)
    frequency, reflection = np.ascontiguousarray(frequency), np.ascontiguousarray(reflection)
    frequency.flags.writeable = reflection.flags.writeable = False
    return Sweep(name, hashlib.sha256(data).hexdigest(), frequency, reflection, options.reference, tuple(notes))


def _refuse(name: str, found: str, expected: str, do: str, line: int | None = None) -> NoReturn:
    raise CommandError(name if line is None else f"{name}:{line}", found, expected, do) from None


# The file --------------------------------------------------------------------------------------------------


def _must_be_readable_by_us(name: str) -> None:
    if find_spec("skrf") is None:
        _refuse(
            name,
            "a sweep, and no scikit-rf to read it",
            "the extra magsafe[measure], which is not installed",
            "pip install 'magsafe[measure]'",
        )


def _must_be_one_port(suffix: str, name: str) -> None:
    ports = _PORTS.fullmatch(suffix)
    if ports and suffix[1] in "sS" and int(ports[1][:4]) == 1:
        return
    if ports:
        _refuse(
            name, f"a file of {suffix[1].upper()} parameters of {ports[1][:4].lstrip('0')} ports", _A_SWEEP, _EXPORT
        )
    _refuse(
        name,
        f"a name that ends in {show(suffix)}" if suffix else "a name without an ending",
        _A_SWEEP,
        "name the analyser's .s1p file; if this is one, give it that ending",
    )


def _bytes_of(file: Path, name: str) -> bytes:
    try:
        if stat.S_ISDIR(file.stat().st_mode):
            _refuse(name, "a directory", _A_SWEEP, "name the file in it")
        with file.open("rb") as stream:
            data = stream.read(LARGEST_FILE + 1)
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) and error.strerror else str(error)
        _refuse(printable(str(file)), reason.lower(), "a sweep that can be read", "check the name and the folder")
    if len(data) > LARGEST_FILE:
        _refuse(
            name,
            f"a file of more than {LARGEST_FILE // 1_000_000} MB",
            "a sweep of some thousand points",
            "sweep with fewer points, or a narrower span",
        )
    if not data.strip():
        _refuse(name, "an empty file", _A_SWEEP, "save the sweep again")
    return data


def _text_of(data: bytes, name: str) -> str:
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        _refuse(name, "text in UTF-16", "plain text", "save the file as UTF-8")
    if b"\0" in data:
        line = data.count(b"\n", 0, data.index(b"\0")) + 1
        _refuse(name, "a zero byte, so this is not text", _A_SWEEP, "export the sweep as Touchstone", line)
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError:
        return data.decode("latin-1")  # a degree sign in a comment does no harm


# Its lines -------------------------------------------------------------------------------------------------


def _points_of(lines: list[str], name: str) -> tuple[_Options, list[str], Array]:
    """Return what the option line says, the lines of the points without comments, and their numbers in the file."""
    options: _Options | None = None
    points: list[str] = []
    places: list[int] = []
    for count, row in enumerate(lines, 1):
        if options and _POINT.fullmatch(row):
            points.append(row)
            places.append(count)
            continue
        text, _, comment = row.partition("!")
        text = text.strip()
        if "port impedance" in comment.lower():
            _refuse(
                name,
                "a comment that gives the port an impedance of its own",
                "one real reference impedance, in the option line",
                "export with a reference of 50 ohm; if R in the option line is right, remove the comments",
                count,
            )
        if text.startswith("#"):
            stated = _options_of(text, name, count)
            if options and stated != options:
                _refuse(name, "a second option line, which differs", "one option line", "remove the wrong one", count)
            options = stated
        elif text and options is None:
            _refuse_beginning(text, name, count)
        elif text:
            _must_be_a_point(text, name, count, last=not any(lines[count:]))
            points.append(text)
            places.append(count)
    if options is None:
        _refuse(name, "comments and nothing else", _A_SWEEP, "save the sweep again")
    if not points:
        _refuse(name, "no points", "a frequency and two numbers on each line", "save the sweep again")
    return options, points, np.array(places, dtype=float)


def _refuse_beginning(text: str, name: str, line: int) -> NoReturn:
    if text.startswith("["):
        _refuse(
            name,
            f"{show(text)}, a keyword of Touchstone version 2",
            "Touchstone version 1",
            "export as version 1, .s1p",
            line,
        )
    if _ONE_NUMBER.fullmatch(text.split(maxsplit=1)[0]):
        _refuse(
            name,
            "numbers before any option line, so their units and form are unknown",
            "an option line above them, such as # HZ S RI R 50",
            "export the sweep again, or add the line if you know what the numbers are",
            line,
        )
    _refuse(
        name, show(text), "a Touchstone file: comments behind !, then an option line", "check which file it is", line
    )


def _must_be_a_point(text: str, name: str, line: int, *, last: bool) -> None:
    """Refuse a line that is not a frequency and two numbers."""
    words = text.split()
    for word in words:
        if not _ONE_NUMBER.fullmatch(word):
            _refuse_word(word, name, line)
    if len(words) == 3:
        return
    expected = "a frequency and two numbers"
    if len(words) < 3 and last:
        _refuse(name, f"a last line of {len(words)} numbers", expected, "the file was cut short: save it again", line)
    if len(words) >= 5:
        _refuse(name, f"{len(words)} numbers on a line, so more than one port", expected, _EXPORT, line)
    _refuse(name, f"{len(words)} numbers on a line", expected, "mend the line, or save the sweep again", line)


def _refuse_word(word: str, name: str, line: int) -> NoReturn:
    if word.lower().lstrip("+-") in ("nan", "inf", "infinity", "1.#ind", "1.#qnan", "1.#inf"):
        _refuse(name, f"{show(word)}, a point that was not measured", "finite numbers", "sweep again", line)
    if "," in word or ";" in word:
        _refuse(
            name,
            show(word),
            "numbers with a decimal point, apart by spaces",
            "export as Touchstone; set the program to decimal points",
            line,
        )
    _refuse(name, show(word), "a number", "mend the line, or save the sweep again", line)


def _options_of(text: str, name: str, line: int) -> _Options:
    """Return what an option line says; its words may stand in any order."""
    before, mark, after = f" {' '.join(text[1:].lower().split())} ".partition(" r ")
    seen: dict[str, str] = {}
    for word in before.split():
        kind = (
            "unit"
            if word in _UNITS
            else "form"
            if word in _FORMATS
            else "kind"
            if word in ("s", "y", "z", "g", "h")
            else ""
        )
        if not kind or kind in seen:
            _refuse(
                name,
                f"{show(word)} in the option line" + (", the second of its kind" if kind else ""),
                "such as # HZ S RI R 50",
                "export the sweep again as S parameters",
                line,
            )
        seen[kind] = word
    if seen.get("kind", "s") != "s":
        _refuse(
            name,
            f"{seen['kind'].upper()} parameters",
            "S parameters",
            "export the reflection, S11, instead",
            line,
        )
    reference = _reference_of(after.split(), name, line) if mark else 50.0
    return _Options(seen.get("unit", "ghz"), seen.get("form", "ma"), reference)


def _reference_of(words: list[str], name: str, line: int) -> float:
    found = f"R {' '.join(words)}" if words else "R without a number"
    if len(words) != 1 or not _ONE_NUMBER.fullmatch(words[0]):
        _refuse(
            name,
            f"{show(found)} in the option line",
            "one real reference impedance in ohm, last in the line, such as R 50",
            "export with a reference of 50 ohm",
            line,
        )
    value = float(words[0])
    if not (isfinite(value) and value > 0.0):
        _refuse(
            name,
            f"a reference impedance of {words[0]} ohm",
            "more than 0 ohm",
            "export with a reference of 50 ohm",
            line,
        )
    return value


# Its numbers -----------------------------------------------------------------------------------------------


def _read(options: _Options, points: list[str], name: str) -> tuple[Array, ComplexArray]:
    """Return frequency [Hz] and reflection as scikit-rf reads the checked lines."""
    stream = io.StringIO(f"# {options.unit} s {options.form} r 50\n" + "\n".join(points) + "\n")
    stream.name = "checked.s1p"
    try:
        touchstone: Any = import_module("skrf.io.touchstone")  # slow to import, and needed for few commands
        with np.errstate(all="ignore"):
            read = touchstone.Touchstone(stream)
        frequency, reflection = np.asarray(read.f, dtype=float), np.asarray(read.s[:, 0, 0], dtype=complex)
    except Exception as error:  # the library may raise anything
        _refuse(name, f"what scikit-rf cannot read: {show(str(error))}", _A_SWEEP, "save the sweep again")
    if frequency.shape != (len(points),) or reflection.shape != frequency.shape:
        _refuse(name, f"{len(points)} lines read as {frequency.size} points", _A_SWEEP, "save the sweep again")
    return frequency, reflection


def _must_be_frequencies(frequency: Array, places: Array, unit: str, name: str) -> None:
    """Refuse frequencies that no sweep has; they ascend but for what is wrong with them."""

    def refuse(where: int, found: str, expected: str, do: str) -> NoReturn:
        _refuse(name, found, expected, do, int(places[where]))

    bad = ~(np.isfinite(frequency) & (frequency > 0.0))
    if bad.any():
        refuse(int(np.argmax(bad)), "a frequency that is not above 0 and finite", "frequencies above 0", "sweep again")
    inside = (frequency >= LOWEST_FREQUENCY) & (frequency <= HIGHEST_FREQUENCY)
    if not inside.any():
        _refuse(
            name,
            f"{frequency.min():.4g} to {frequency.max():.4g} Hz, by the unit {_UNITS[unit]} that its option line means",
            "a sweep between 100 kHz and 100 MHz",
            "check the unit in the option line, and which file it is",
        )
    steps = np.diff(frequency)
    if (steps == 0.0).any():
        where = int(np.argmax(steps == 0.0)) + 1
        refuse(where, f"{frequency[where] / 1e6:.9g} MHz a second time", "each frequency once", "save one sweep alone")
    if (steps < 0.0).any():
        where = int(np.argmax(steps < 0.0)) + 1
        refuse(
            where,
            f"{frequency[where] / 1e6:.9g} MHz out of order",
            "frequencies that only rise, or only fall",
            "save one sweep alone",
        )


def _must_be_reflections(reflection: ComplexArray, places: Array, name: str) -> None:
    size = np.abs(reflection)
    bad = ~(size <= MOST_REFLECTION)
    if bad.any():
        where = int(np.argmax(bad))
        _refuse(
            name,
            f"a reflection of {size[where]:.3g}",
            f"at most {MOST_REFLECTION:g}: a loop gives back no more than it gets",
            "calibrate the analyser at its port and sweep again; check that the file holds S11",
            int(places[where]),
        )
