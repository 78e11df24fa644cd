"""From keys and values to the text of a design file: TOML with a comment to each key.

The standard library reads TOML and does not write it; what is written here is read back before anybody keeps it.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from textwrap import wrap
from typing import Any

from magsafe.design.quantities import printable

Path = tuple[str | int, ...]

WIDTH = 110
LONGEST_PIECE = 500  # characters of one line of a text; longer ones go on in the next line
_ESCAPES = {"\\": "\\\\", '"': '\\"', "\b": "\\b", "\t": "\\t", "\n": "\\n", "\f": "\\f", "\r": "\\r"}
# Tables with a heading of their own, in the order of the file; what lies deeper is written inline.
_TABLES = (
    ("station",),
    ("loop",),
    ("loop", "conductor"),
    ("loop", "joint", 0),
    ("capacitor",),
    ("tuning",),
    ("feed",),
    ("transmission", 0),
    ("site",),
    ("place", 0),
)


class UnwritableText(ValueError):
    """A text that no TOML file can hold: half of a character."""


@dataclass(frozen=True, slots=True)
class Entry:
    """A key of the file: its path, its value as TOML has it, a comment.

    With `value` None the key is not written: only a comment stands in its place.
    """

    path: Path
    value: Any
    comment: str = ""


def toml_string(text: str) -> str:
    """Return a text as a TOML string.

    Parameters
    ----------
    text : any text, however long

    Raises
    ------
    UnwritableText : it holds a surrogate, which TOML has no form for
    """
    pieces = [""]
    for letter in text:
        written = _escaped(letter)
        if len(pieces[-1]) + len(written) > LONGEST_PIECE:
            pieces.append("")
            # A blank at the beginning of a line that goes on would be read as none.
            written = "\\u0020" if letter == " " else written
        pieces[-1] += written
    if len(pieces) == 1:
        return f'"{pieces[0]}"'
    return '"""{}"""'.format("\\\n".join(pieces))


def _escaped(letter: str) -> str:
    if letter in _ESCAPES:
        return _ESCAPES[letter]
    if "\ud800" <= letter <= "\udfff":
        raise UnwritableText(f"letters that are no text ({letter!r})")
    if letter.isprintable():
        return letter
    # What could move a terminal or hide in an editor stands there in letters.
    return f"\\u{ord(letter):04X}" if ord(letter) < 0x10000 else f"\\U{ord(letter):08X}"


def toml_value(value: Any) -> str:
    """Return a value as TOML: a text, a number, true or false, a list or an inline table of these."""
    if isinstance(value, str):
        return toml_string(value)
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int | float):
        return repr(value)
    if isinstance(value, list):
        return f"[{', '.join(toml_value(item) for item in value)}]"
    if isinstance(value, dict):
        return f"{{ {', '.join(f'{_key(k)} = {toml_value(v)}' for k, v in value.items())} }}"
    raise TypeError(f"{type(value).__name__} has no form in a design file")


def _key(name: str) -> str:
    plain = name.isascii() and name.replace("_", "").replace("-", "").isalnum()
    return name if plain else toml_string(name)


def design_text(entries: Sequence[Entry], head: Sequence[str] = ()) -> str:
    """Return the text of a design file.

    Parameters
    ----------
    entries : keys with their values; those of one table come out in the order given, tables in that of the contract
    head : comments that come first; one that begins with a colon is for an editor, and stays on its line

    Raises
    ------
    UnwritableText : a text that TOML cannot hold
    """
    lines = []
    for line in head:
        lines += [f"#{printable(line)}"] if line.startswith(":") else _wrapped(printable(line))
    lines += _body([entry for entry in entries if not _table_of(entry.path)], 0)
    for table in _headings(entries):
        inside = [entry for entry in entries if _table_of(entry.path) == table]
        name = ".".join(str(step) for step in table if isinstance(step, str))
        lines += ["", f"[[{name}]]" if isinstance(table[-1], int) else f"[{name}]"]
        lines += _body(inside, len(table))
    return "\n".join(lines) + "\n"


def _headings(entries: Sequence[Entry]) -> Iterator[Path]:
    """Yield the tables that have something in them, in the order of the file."""
    used = dict.fromkeys(table for entry in entries if (table := _table_of(entry.path)))
    # A table of the same kind is one of several; they keep their own order.
    yield from sorted(used, key=lambda table: (_TABLES.index(_kind_of(table)), _number(table)))


def _kind_of(table: Path) -> Path:
    return tuple(0 if isinstance(step, int) else step for step in table)


def _number(table: Path) -> int:
    return next((step for step in table if isinstance(step, int)), 0)


def _table_of(path: Path) -> Path:
    """Return the longest table with a heading that a path lies in; the empty one at the top of the file."""
    kinds = [path[:length] for length in range(len(path) - 1, 0, -1) if _kind_of(path[:length]) in _TABLES]
    return kinds[0] if kinds else ()


def _body(entries: Sequence[Entry], depth: int) -> list[str]:
    """Return the lines of one table."""
    values: dict[str, Any] = {}
    comments: dict[str, list[str]] = {}
    for entry in entries:
        key, *deeper = (str(step) for step in entry.path[depth:])
        if entry.value is not None:
            _put(values, [key, *deeper], entry.value)
        if entry.comment:
            comments.setdefault(key, []).append(entry.comment)
    lines = []
    for key in dict.fromkeys(str(entry.path[depth]) for entry in entries):
        said = printable("; ".join(dict.fromkeys(comments.get(key, ()))))
        if key in values:
            lines += _commented(f"{_key(key)} = {toml_value(values[key])}", said)
        else:
            lines += _wrapped(f"{key}: {said}" if said else f"{key}: not stated")
    return lines


def _put(tree: dict[str, Any], path: list[str], value: Any) -> None:
    *way, last = path
    for step in way:
        tree = tree.setdefault(step, {})
    tree[last] = value


def _commented(line: str, comment: str) -> list[str]:
    """Return a line with its comment behind it, or before it where that would be too long."""
    if not comment:
        return [line]
    beside = f"{line.ljust(34)} # {comment}"
    if len(beside) <= WIDTH and "\n" not in line:
        return [beside]
    return [*_wrapped(comment), line]


def _wrapped(comment: str) -> list[str]:
    return [f"# {piece}" for piece in wrap(comment, WIDTH - 2, break_on_hyphens=False)]
