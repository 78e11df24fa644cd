"""From a file to a `Design`, or to every message about what is wrong with it."""

import hashlib
import os
import re
import stat
import tomllib
from collections.abc import Iterator
from contextlib import suppress
from functools import lru_cache
from itertools import islice
from pathlib import Path
from typing import Any

from pydantic import ValidationError
from pydantic_core import ErrorDetails

from magsafe.design.consistency import complaints
from magsafe.design.implied import hand_at_the_capacitor
from magsafe.design.model import SCHEMA, Block, Design, DesignFile, Origin, nearest
from magsafe.design.quantities import printable, show
from magsafe.errors import DesignError, Problem

LARGEST_FILE = 1_000_000
_LINES_SEARCHED = 800
_MOST_PROBLEMS = 200
_LONGEST_LINE = 20_000
_MOST_DOTS = 200

_QUOTED = re.compile(r"\"[^\"]*\"|'[^']*'")

Path_ = tuple[str | int, ...]


def read_design(path: str | os.PathLike[str]) -> Design:
    """Read a design file.

    Parameters
    ----------
    path : the TOML file

    Raises
    ------
    DesignError : the file cannot be read or used; the message names every problem with its line
    """
    file = Path(path)
    return parse_design(_bytes_of(file), file.name)


def _bytes_of(file: Path) -> bytes:
    try:
        about = file.stat()
        if stat.S_ISDIR(about.st_mode):
            raise _refused(str(file), "a directory", "a design file", "name the .toml file in it")
        with file.open("rb") as stream:
            return stream.read(LARGEST_FILE + 1)
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) and error.strerror else str(error)
        raise _refused(
            str(file),
            reason.lower(),
            "a design file that can be read",
            "check the name and the folder",
        ) from None


def _refused(name: str, found: str, expected: str, do: str, line: int | None = None) -> DesignError:
    return DesignError(printable(name), [Problem("", found, expected, do, line)])


def parse_design(data: bytes, name: str = "<stdin>") -> Design:
    """Read a design from the bytes of a file.

    Parameters
    ----------
    data : TOML in UTF-8, at most 1 MB
    name : what messages call it

    Raises
    ------
    DesignError : as `read_design`
    """
    name = printable(name)
    text = _text_of(data, name)
    tree = _tree_of(text, name)
    problems = list(_problems(tree, text))
    if problems:
        raise DesignError(name, problems)
    stated = DesignFile.model_validate(tree)
    fields = {key: getattr(stated, key) for key in DesignFile.model_fields}
    origin = Origin(name, hashlib.sha256(data).hexdigest(), text)
    fields["place"] = [*stated.place, *hand_at_the_capacitor(stated)]
    return Design.model_construct(**fields, origin=origin)


def _text_of(data: bytes, name: str) -> str:
    if len(data) > LARGEST_FILE:
        raise _refused(name, "a file of more than 1 MB", "a design file of a few kB", "check which file it is")
    if not data.strip():
        raise _refused(
            name,
            "an empty file",
            f'schema = "{SCHEMA}" and what follows',
            "start from a sample design",
        )
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        found = f"byte 0x{data[error.start]:02x}, which is not UTF-8"
        raise _refused(name, found, "text in UTF-8", "save the file as UTF-8", line) from None


def _tree_of(text: str, name: str) -> dict[str, Any]:
    for count, row in enumerate(text.split("\n"), 1):
        if len(row) > _LONGEST_LINE:
            raise _refused(name, f"a line of {len(row)} characters", "lines of a design file", "break it up", count)
        # The parser's time grows as the square of the parts of a dotted key.
        if row.count(".") > _MOST_DOTS and _QUOTED.sub("", row).partition("#")[0].count(".") > _MOST_DOTS:
            raise _refused(name, "a key of too many parts", "a plain design file", "check which file it is", count)
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        reason, line = _syntax(str(error), text)
        raise _refused(
            name,
            reason,
            "TOML: key = value, texts in quotes",
            "mend this line, then the rest is read",
            line,
        ) from None
    except (RecursionError, ValueError) as error:
        found = "brackets nested too deep" if isinstance(error, RecursionError) else str(error)[:80]
        raise _refused(name, found, "a plain design file", "check which file it is") from None


def _syntax(message: str, text: str) -> tuple[str, int | None]:
    reason, _, place = message.partition(" (at ")
    if "end of document" in place:
        return f"{reason} at the end of the file", text.count("\n") + 1
    digits = place.removeprefix("line ").split(",")[0]
    return reason, int(digits) if digits.isdigit() else None


# Problems, each with its line ------------------------------------------------------------------------------


def _problems(tree: dict[str, Any], text: str) -> Iterator[Problem]:
    """Yield the problems, the first 200 of them: a file with more is not a design file with mistakes."""
    seen: set[tuple[Path_, str]] = set()
    for path, what, expected, do in islice(_found(tree), _MOST_PROBLEMS):
        if (path, expected) not in seen:
            seen.add((path, expected))
            yield Problem(written(path), what, expected, do, line_of(text, path))


def _found(tree: dict[str, Any]) -> Iterator[tuple[Path_, str, str, str]]:
    try:
        DesignFile.model_validate(tree)
    except ValidationError as error:
        for detail in error.errors(include_url=False):
            yield from _said(detail)
    yield from complaints(tree)


def _said(detail: ErrorDetails) -> Iterator[tuple[Path_, str, str, str]]:
    path = tuple(p for p in detail["loc"] if not str(p).startswith("<"))
    value, context = detail["input"], detail.get("ctx", {})
    match detail["type"]:
        case "design":
            for below, found, expected, do in context["problems"]:
                yield (*path, *([below[1:]] if below else [])), found, expected, do
        case "missing":
            yield path, "nothing", f"{path[-1]}, which is needed", f"add {path[-1]}"
        case "extra_forbidden":
            known = _keys_at(path[:-1])
            yield (
                path,
                "an unknown key",
                f"one of {', '.join(known)}",
                nearest(str(path[-1]), known, "remove it"),
            )
        case "literal_error":
            known = tuple(_words(str(context["expected"])))
            expected = f"one of {', '.join(known)}" if len(known) > 1 else f'"{known[0]}"'
            advice = nearest(value, known) if isinstance(value, str) else "write one of them in quotes"
            yield path, show(value), expected, advice
        case "list_type" if isinstance(value, dict):
            yield (
                path,
                "one table",
                f"a list of tables, [[{path[-1]}]]",
                f"write [[{written(path)}]], with two brackets",
            )
        case kind:
            expected, do = _plain_words(kind, context)
            yield path, show(value), expected, do


def _plain_words(kind: str, context: dict[str, Any]) -> tuple[str, str]:
    """Return (expected, do) for pydantic's own complaints."""
    words = {
        "string_type": ("a text in quotes", "put it in quotes"),
        "bool_type": ("true or false", "write true or false, without quotes"),
        "int_type": ("a whole number", "write it without quotes and without a unit"),
        "int_from_float": ("a whole number", "write it without a decimal point"),
        "float_type": ("a number", "write it without quotes and without a unit"),
        "list_type": ("a list in square brackets", "put it in square brackets"),
        "too_short": (f"at least {context.get('min_length')} of them", "add what is missing"),
        "too_long": (f"at most {context.get('max_length')} of them", "leave some out"),
        "greater_than_equal": (f"{context.get('ge')} or more", "check the number"),
        "less_than_equal": (f"{context.get('le')} or less", "check the number"),
        "finite_number": ("a finite number", "check the number"),
        "model_type": ("a table of keys", "write its keys and values as a table"),
    }
    return words.get(kind, ("another value", f"see the schema ({kind})"))


def _words(expected: str) -> Iterator[str]:
    """Yield the words of pydantic's "'a', 'b' or 'c'"."""
    yield from expected.split("'")[1::2]


def _keys_at(path: Path_) -> tuple[str, ...]:
    """Return the keys that the block at a path knows."""
    model: type[Block] = DesignFile
    for step in path:
        if isinstance(step, int):
            continue
        inner = next(
            (_block_in(f.annotation) for n, f in model.model_fields.items() if step in (n, f.alias)),
            None,
        )
        if inner is None:
            break
        model = inner
    return tuple(f.alias or name for name, f in model.model_fields.items())


def _block_in(annotation: Any) -> type[Block] | None:
    if isinstance(annotation, type) and issubclass(annotation, Block):
        return annotation
    inner = (_block_in(part) for part in getattr(annotation, "__args__", ()))
    return next((block for block in inner if block is not None), None)


def written(path: Path_) -> str:
    """Return a path as messages write it: `transmission[1].power` is in the second block in file order."""
    text = ""
    for step in path:
        key = str(step) if str(step).isidentifier() and len(str(step)) < 40 else show(str(step)[:40])
        text += f"[{step}]" if isinstance(step, int) else f".{key}" if text else key
    return text


def line_of(text: str, path: Path_) -> int | None:
    """Return the line, from 1, on which the value at a path begins; of a missing key, that of its table.

    The parser tells no positions, so growing pieces of the file are read until the path appears. Longer files
    than that is quick for get no line.
    """
    if text.count("\n") > _LINES_SEARCHED:
        return None
    lines = text.replace("\r\n", "\n").split("\n")
    pieces = _pieces(text)
    while path:
        start = 0
        for end, tree in pieces:
            if _holds(tree, path):
                while start < end - 1 and lines[start].lstrip()[:1] in ("", "#"):
                    start += 1
                return start + 1
            start = end
        path = path[:-1]
    return None


@lru_cache(maxsize=1)
def _pieces(text: str) -> list[tuple[int, dict[str, Any]]]:
    lines = text.replace("\r\n", "\n").split("\n")
    pieces = []
    for end in range(1, len(lines) + 1):
        with suppress(tomllib.TOMLDecodeError):  # in the middle of a value
            pieces.append((end, tomllib.loads("\n".join(lines[:end]))))
    return pieces


def _holds(tree: Any, path: Path_) -> bool:
    for step in path:
        if isinstance(step, int):
            found = isinstance(tree, list) and step < len(tree)
        else:
            found = isinstance(tree, dict) and step in tree
        if not found:
            return False
        tree = tree[step]
    return True
