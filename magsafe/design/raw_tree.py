"""The tree of a design file as it was read, before anything in it is known to be sound, and complaints about it."""

from collections.abc import Iterator
from typing import Any

from magsafe.design.quantities import show
from magsafe.units import LENGTH, Kind, QuantityError, read_quantity

Tree = dict[str, Any]
Path = tuple[str | int, ...]
Complaint = tuple[Path, str, str, str]


def block_at(tree: Any, *path: str) -> Tree:
    """Return the table at a path of keys; an empty one where there is none."""
    for key in path:
        tree = tree.get(key) if isinstance(tree, dict) else None
    return tree if isinstance(tree, dict) else {}


def blocks_at(tree: Tree, key: str) -> list[tuple[int, Tree]]:
    """Return the tables of a list, each with its index; nothing where there are none."""
    found = tree.get(key)
    items = found if isinstance(found, list) else []
    return [(i, item) for i, item in enumerate(items) if isinstance(item, dict)]


def size_of(block: Tree, key: str, kind: Kind = LENGTH) -> float | None:
    """Return a quantity in SI units; None where it is not there or cannot be read."""
    try:
        return read_quantity(block.get(key), kind)
    except QuantityError:
        return None


def word_of(block: Tree, key: str, default: str = "") -> str:
    """Return a text; the default where it is not there, nothing where it is no text."""
    value = block.get(key, default)
    return value if isinstance(value, str) else ""


def missing(path: Path, key: str, because: str, example: str) -> Complaint:
    """Return the complaint that a key is missing, and what could stand there."""
    return (*path, key), "nothing", because, f"add {key} = {example}"


def not_here(path: Path, block: Tree, key: str, why: str, do: str) -> Complaint:
    """Return the complaint that a key which is there does not go with others."""
    return (*path, key), show(block[key]), why, do


def either(path: Path, block: Tree, keys: tuple[str, ...], why: str) -> Iterator[Complaint]:
    """Yield a complaint about each key but the first of those that exclude each other."""
    given = [key for key in keys if key in block]
    for key in given[1:]:
        yield not_here(path, block, key, f"only one of {', '.join(keys)}: {why}", f"keep {given[0]} or {key}")


# The loop --------------------------------------------------------------------------------------------------
