"""A record of a measurement put into the text of a design file, with all else in it left as it stands."""

import re
import tomllib
from collections.abc import Mapping
from typing import Any

from magsafe.design.as_built import NEAR
from magsafe.design.writing import toml_value
from magsafe.units import FREQUENCY, QuantityError, read_quantity

_HEADER = re.compile(r"\s*\[{1,2}\s*measured\s*\]{1,2}\s*(#.*)?")
_ANY_HEADER = re.compile(r"\s*\[{1,2}\s*[A-Za-z0-9_\"'.\s-]+\]{1,2}\s*(#.*)?")


class CannotRecord(ValueError):
    """The file is written in a way that a record cannot be put into without touching what else is in it."""


def record_text(record: Mapping[str, Any]) -> str:
    """Return a record as a block of a design file: keys and values as TOML has them, a list of lists line by line."""
    lines = ["[[measured]]"]
    for key, value in record.items():
        if isinstance(value, list) and value and isinstance(value[0], list):
            lines += [f"{key} = [", *(f"    {toml_value(item)}," for item in value), "]"]
        else:
            lines.append(f"{key} = {toml_value(value)}")
    return "\n".join(lines) + "\n"


def standing_records(text: str, frequency: float) -> list[Mapping[str, Any]]:
    """Return the records in a design's text that a new one at a frequency [Hz] would take the place of."""
    return [each for each in _records(tomllib.loads(text)) if _is_at(each, frequency)]


def with_record(text: str, record: Mapping[str, Any], frequency: float) -> str:
    """Return a design's text with a record, in place of those near its frequency.

    Parameters
    ----------
    text : of a design file that was read
    record : keys and values as TOML has them
    frequency : of the record [Hz]; records within `NEAR` of it go

    Raises
    ------
    CannotRecord : the file holds its records in a form that cannot be cut out line by line
    """
    tree = tomllib.loads(text)
    records = _records(tree)
    gone = {i for i, each in enumerate(records) if not each or _is_at(each, frequency)}
    kept = [each for i, each in enumerate(records) if i not in gone]
    newline = "\r\n" if "\r\n" in text else "\n"
    without = _cut(text, gone)
    before = newline * (2 - min(2, _ends(without))) if without else ""
    made = without + before + record_text(record).replace("\n", newline)
    wanted = {**{key: value for key, value in tree.items() if key != "measured"}, "measured": [*kept, dict(record)]}
    try:
        same = tomllib.loads(made) == wanted
    except tomllib.TOMLDecodeError:
        same = False
    if not same:
        raise CannotRecord("its records are not written as [[measured]] blocks")
    return made


def _ends(text: str) -> int:
    """Return how many ends of line a text ends with."""
    bare = text.replace("\r\n", "\n")
    return len(bare) - len(bare.rstrip("\n"))


def _cut(text: str, gone: set[int]) -> str:
    """Return a text without the lines of some of its `measured` tables; what comments the next table stays."""
    lines, block, number, cutting = list[str](), list[str](), -1, False
    for line in re.findall(r"[^\n]*\n|[^\n]+", text):
        kept, bare = line, line.rstrip("\r\n")
        if cutting and _ANY_HEADER.fullmatch(bare):
            lines += _tail(block)
            block, cutting = [], False
        if _HEADER.fullmatch(bare):
            number += 1
            cutting = number in gone
            kept = line if "[[" in line else line.replace("[", "[[", 1).replace("]", "]]", 1)
        (block if cutting else lines).append(kept)
    return "".join([*lines, *_tail(block)])


def _tail(block: list[str]) -> list[str]:
    """Return the lines of comment and the empty ones that a block ends with."""
    own = max((i for i, line in enumerate(block) if line.strip() and not line.lstrip().startswith("#")), default=-1)
    return block[own + 1 :]


def _records(tree: Mapping[str, Any]) -> list[Mapping[str, Any]]:
    found = tree.get("measured", [])
    return [found] if isinstance(found, dict) else list(found)


def _is_at(record: Mapping[str, Any], frequency: float) -> bool:
    try:
        found = read_quantity(record.get("frequency"), FREQUENCY, None, None)
    except QuantityError:
        return False
    return abs(found / frequency - 1.0) <= NEAR
