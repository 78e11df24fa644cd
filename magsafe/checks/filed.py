"""Reading a sheet that was filed: whole, unaltered, of a form that is known, or a message that says what is wrong."""

import codecs
import hashlib
import json
import stat
from collections.abc import Iterator
from dataclasses import dataclass
from math import isfinite
from pathlib import Path
from typing import Any, NoReturn
from unicodedata import category

from pydantic import ValidationError

from magsafe.checks.ceiling import ceiling, least
from magsafe.checks.sheet import SCHEMA, PowerCeiling, Sheet, worst
from magsafe.design.model import Design
from magsafe.design.quantities import printable, show
from magsafe.design.reading import LARGEST_FILE, parse_design, written
from magsafe.errors import CommandError, DesignError, MagsafeError
from magsafe.words import short

LARGEST_SHEET = 32_000_000  # bytes; a hundred transmissions come to a third of it
_MOST_UNKNOWN = 10_000
_LARGEST_NUMBER = 1e100
_LONGEST_TEXT = 20_000
_MOST_TRANSMISSIONS = 1000
_DISTRUST = "trust no figure on this sheet; check the design file itself, and file that sheet"
_ANEW = "make the sheet anew: magsafe check DESIGN --json"
_OTHER_FORMS = {
    "magsafe.keepout": "a keep-out, not a sheet",
    "magsafe.capacitor": "a capacitor's sizes, not a sheet",
    "magsafe.recheck": "a recheck, not a sheet",
    "magsafe.design": "a design, not a sheet",
}

_Path = tuple[str | int, ...]


@dataclass(frozen=True, slots=True)
class Filed:
    """A sheet that was read, and the keys in it that this version does not know, which were left out."""

    sheet: Sheet
    unknown: tuple[str, ...]


def is_sheet(name: str, data: bytes) -> bool:
    """Return whether a file is to be read as a filed sheet: it is called `.json`, or begins with a brace.

    No TOML file begins with one.
    """
    start = data[:4096].removeprefix(codecs.BOM_UTF8).lstrip()
    return name.lower().endswith(".json") or start.startswith(b"{")


def bytes_of(name: str) -> bytes:
    """Return what a file holds, and of one that is too large a little more than a sheet may have.

    Raises
    ------
    CommandError : there is no such file, or it cannot be read
    """
    file = Path(name)
    try:
        if stat.S_ISDIR(file.stat().st_mode):
            _refuse(name, "", "a directory", "a filed sheet or a design file", "name the file in it")
        with file.open("rb") as stream:
            return stream.read(LARGEST_SHEET + 1)
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) and error.strerror else str(error)
        _refuse(name, "", reason.lower(), "a file that can be read", "check the name and the folder")


def parse_sheet(data: bytes, name: str) -> Filed:
    """Read a filed sheet.

    Keys that this version does not know are left out and named. What was altered is refused: a design that does not
    belong to its hash, a verdict that its findings do not give.

    Parameters
    ----------
    data : JSON as `magsafe check --json` prints it, at most 32 MB
    name : what messages call the file

    Raises
    ------
    CommandError : it is no sheet, not whole, of another form, or altered
    """
    tree = _tree_of(data, name)
    _check_form(tree, name)
    _check_texts(tree, name)
    sheet, unknown = _model_of(tree, name)
    _check_indices(sheet, name)
    _check_unaltered(sheet, name)
    _check_spreads(sheet, name)
    return Filed(sheet, unknown)


def design_in(sheet: Sheet, name: str) -> Design:
    """Return the design that a filed sheet holds, read as the file that it was.

    Raises
    ------
    MagsafeError : today's reader refuses it; the message shows why
    """
    from magsafe import __version__  # noqa: PLC0415  (the version that reads, beside the one that wrote)

    try:
        return parse_design(original(sheet), sheet.design.name)
    except DesignError as error:
        raise MagsafeError(
            f"magsafe {__version__} refuses the design in {printable(name)}, which magsafe {short(sheet.magsafe)} "
            f"accepted on {short(sheet.date)}.\n"
            "Whether the filed sheet still holds is not known: nothing was computed.\n"
            f"Mend a copy of the design, and give it beside the sheet: magsafe recheck SHEET DESIGN\n\n{error}"
        ) from None


def original(sheet: Sheet) -> bytes:
    """Return the bytes of the design file that a sheet holds: its text, with the mark before it that the hash tells."""
    plain = sheet.design.text.encode("utf-8", "surrogatepass")
    marked = codecs.BOM_UTF8 + plain
    return marked if _hash(marked) == sheet.design.sha256.lower() else plain


def _hash(data: bytes) -> str:
    return hashlib.sha256(data).hexdigest()


def _refuse(name: str, key: str, found: str, expected: str, do: str) -> NoReturn:
    place = f"{printable(name)}{f': {key}' if key else ''}"
    raise CommandError(place, found, expected, do) from None


# From bytes to a tree --------------------------------------------------------------------------------------


def _tree_of(data: bytes, name: str) -> dict[str, Any]:
    if len(data) > LARGEST_SHEET:
        _refuse(name, "", f"a file of more than {LARGEST_SHEET // 10**6} MB", "a filed sheet", "check which file it is")
    if not data.strip():
        _refuse(name, "", "an empty file", "a filed sheet, as JSON", _ANEW)
    try:
        text = data.decode("utf-8-sig" if data.startswith(codecs.BOM_UTF8) else json.detect_encoding(data))
        tree = json.loads(
            text, parse_constant=_no_constant, parse_float=_number, parse_int=_whole, object_pairs_hook=_once
        )
    except UnicodeDecodeError as error:
        _refuse(name, "", f"byte 0x{data[error.start]:02x}, which is no text", "JSON in UTF-8", _ANEW)
    except json.JSONDecodeError as error:
        if not text[error.pos :].strip() or error.msg.startswith("Unterminated"):
            _refuse(
                name,
                "",
                f"a file that ends too early, in line {error.lineno}",
                "the whole sheet",
                "copy it again, whole",
            )
        what = f"{error.msg[0].lower()}{error.msg[1:]} in line {error.lineno}, column {error.colno}"
        _refuse(name, "", f"no JSON: {what}", "a filed sheet, as JSON", _ANEW)
    except _Unfit as error:
        _refuse(name, "", str(error), "a sheet as it was written", _ANEW)
    except (RecursionError, ValueError) as error:
        found = "brackets nested too deep" if isinstance(error, RecursionError) else str(error)[:80]
        _refuse(name, "", found, "a filed sheet", "check which file it is")
    if not isinstance(tree, dict):
        _refuse(name, "", show(tree), "a sheet, in braces", "check which file it is")
    return tree


class _Unfit(Exception):  # not a ValueError, which the parser of JSON raises for its own
    """Something in JSON that no sheet holds."""


def _no_constant(word: str) -> NoReturn:
    raise _Unfit(f"{word}, which is no number")


def _number(digits: str) -> float:
    value = float(digits)
    if not isfinite(value) or abs(value) > _LARGEST_NUMBER:
        raise _Unfit(f"the number {digits[:20]}, which no figure comes to")
    return value if abs(value) > 1.0 / _LARGEST_NUMBER else 0.0


def _whole(digits: str) -> int:
    if len(digits) > 20:
        raise _Unfit(f"a whole number of {len(digits)} digits, which no figure comes to")
    return int(digits)


def _once(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    made: dict[str, Any] = {}
    for key, value in pairs:
        if key in made:
            raise _Unfit(f"the key {show(key)} twice in one place")
        made[key] = value
    return made


# From a tree to a sheet ------------------------------------------------------------------------------------


def _check_form(tree: dict[str, Any], name: str) -> None:
    form = tree.get("schema")
    if form == SCHEMA:
        return
    kind, _, number = form.partition("/") if isinstance(form, str) else ("", "", "")
    if kind in _OTHER_FORMS:
        _refuse(name, "schema", f"{show(form)}, {_OTHER_FORMS[kind]}", f'"{SCHEMA}"', _ANEW)
    if kind == SCHEMA.partition("/")[0] and number:
        made_by = show(tree.get("magsafe", "not stated"))
        _refuse(
            name, "schema", f"{show(form)}, another form of the sheet", f'"{SCHEMA}"',
            f"recheck it with the version that made it ({made_by}) or a later one",
        )  # fmt: skip
    found = "nothing" if form is None else show(form)
    _refuse(name, "schema", found, f'"{SCHEMA}"', f"check which file it is, or {_ANEW}")


def _check_texts(tree: dict[str, Any], name: str) -> None:
    """Refuse texts that move a terminal, anywhere but in the design's own, which is never printed."""
    waiting: list[tuple[_Path, Any]] = [((), tree)]
    while waiting:
        path, value = waiting.pop()
        if isinstance(value, dict):
            waiting += [((*path, key), each) for key, each in value.items() if (*path, key) != ("design", "text")]
            waiting += [((*path, key), key) for key in value if not key.isprintable()]
        elif isinstance(value, list):
            waiting += [((*path, index), each) for index, each in enumerate(value)]
        elif isinstance(value, str) and len(value) > _LONGEST_TEXT:
            _refuse(name, written(path), f"a text of {len(value)} characters", "the sentences of a sheet", _ANEW)
        elif isinstance(value, str) and not value.isprintable() and any(map(_moves, value)):
            _refuse(name, written(path), show(value), "a text that can be printed", _ANEW)


def _moves(letter: str) -> bool:
    return not letter.isprintable() and category(letter) != "Zs"


def _model_of(tree: dict[str, Any], name: str) -> tuple[Sheet, tuple[str, ...]]:
    """Return the sheet, and the keys that had to be left out of it, without their numbers in lists."""
    unknown: dict[str, None] = {}
    for last in (False, True):
        try:
            return Sheet.model_validate(tree), tuple(unknown)
        except ValidationError as error:
            if error.error_count() > _MOST_UNKNOWN:
                _refuse(name, "", f"{error.error_count()} things that no sheet has", "a filed sheet", _ANEW)
            for path in _known_by_others(error, name, last):
                unknown[".".join(str(step) for step in path if isinstance(step, str))] = None
                _remove(tree, path)
    raise AssertionError("the second reading returns or refuses")


def _known_by_others(error: ValidationError, name: str, last: bool) -> Iterator[_Path]:
    """Yield the paths of keys that are unknown; refuse where anything else is wrong."""
    details = error.errors(include_url=False)
    wrong = [each for each in details if last or each["type"] != "extra_forbidden"]
    if wrong:
        first, more = wrong[0], len(wrong) - 1
        found = "nothing" if first["type"] == "missing" else show(first["input"])
        expected = f"{first['loc'][-1]}, which a sheet has" if first["type"] == "missing" else first["msg"]
        rest = f" (and {more} more {'thing' if more == 1 else 'things'} that do not fit)" if more else ""
        _refuse(name, written(first["loc"]), f"{found}{rest}", expected.removeprefix("Input should be "), _ANEW)
    for each in details:
        yield each["loc"]


def _remove(tree: Any, path: _Path) -> None:
    for step in path[:-1]:
        tree = tree[step]
    del tree[path[-1]]


# What a sheet that nobody altered keeps to -------------------------------------------------------------------


def _check_unaltered(sheet: Sheet, name: str) -> None:
    text, told = original(sheet), sheet.design.sha256
    if len(text) > LARGEST_FILE + len(codecs.BOM_UTF8):
        _refuse(name, "design.text", "a design of more than 1 MB", "a design of a few kB", "check which file it is")
    if _hash(text) != told.lower():
        _refuse(
            name, "design.text", f"an altered design: SHA-256 {_hash(text)[:12]}, where {show(told[:12])} was filed",
            "the design as it was filed", _DISTRUST,
        )  # fmt: skip
    given = worst(tuple(finding.verdict for finding in sheet.all_findings()))
    if given != sheet.verdict:
        _refuse(
            name, "verdict", f'"{sheet.verdict}", where the findings give "{given}": the sheet was altered',
            "the sheet as it was filed", _DISTRUST,
        )  # fmt: skip
    for index, point in enumerate(sheet.operating_points):
        _check_ceiling(
            name,
            f"operating_points[{index}].power_ceiling",
            point.power_ceiling,
            ceiling((*point.findings, *sheet.findings), index),
        )
    _check_ceiling(name, "power_ceiling", sheet.power_ceiling, least([p.power_ceiling for p in sheet.operating_points]))


def _check_ceiling(name: str, key: str, filed: PowerCeiling, given: PowerCeiling) -> None:
    """Refuse a power that the findings do not give; which of them it names may be another version's way."""
    for part in ("value", "at_limit"):
        told, true = getattr(filed, part), getattr(given, part)
        if told != true:
            _refuse(
                name, f"{key}.{part}", f"{told}, where the findings give {true}: the sheet was altered",
                "the sheet as it was filed", _DISTRUST,
            )  # fmt: skip


def _check_spreads(sheet: Sheet, name: str) -> None:
    """Refuse a figure whose ends stand in another order than low, likely, high."""
    for index, point in enumerate(sheet.operating_points):
        for figure, told in point.figures.items():
            known = [end for end in (told.low, told.likely, told.high) if end is not None]
            if known != sorted(known):
                key = f"operating_points[{index}].figures.{printable(figure)}"
                _refuse(name, key, ", ".join(f"{end:.6g}" for end in known), "low, likely, high in order", _DISTRUST)


def _check_indices(sheet: Sheet, name: str) -> None:
    """Refuse what points at a transmission that is not there, or is called as another is."""
    points = sheet.operating_points
    if not points:
        _refuse(name, "operating_points", "none", "one or more", _ANEW)
    if len(points) > _MOST_TRANSMISSIONS:
        _refuse(name, "operating_points", f"{len(points)} of them", "those of one design", "check which file it is")
    names = [point.name for point in points]
    twice = next((index for index, each in enumerate(names) if each in names[:index]), None)
    if twice is not None:
        _refuse(name, f"operating_points[{twice}].name", show(names[twice]), "a name of its own", _ANEW)
    named = [("power_ceiling.transmission", sheet.power_ceiling.transmission)]
    named += [
        (f"operating_points[{i}].power_ceiling", each.power_ceiling.transmission) for i, each in enumerate(points)
    ]
    named += [
        (f"sessions[{i}].transmissions", index) for i, s in enumerate(sheet.sessions) for index in s.transmissions
    ]
    for key, index in named:
        if not 0 <= index < len(points):
            _refuse(name, key, f"transmission {index}", f"0 to {len(points) - 1}", _ANEW)
