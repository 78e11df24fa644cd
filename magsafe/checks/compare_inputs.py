"""What differs between two design files: key by key, blocks with names matched by these."""

import tomllib
from collections.abc import Iterator, Sequence
from typing import Any

from magsafe.checks.comparison import Change
from magsafe.checks.filed import original
from magsafe.checks.sheet import Sheet
from magsafe.design.quantities import show
from magsafe.design.reading import parse_design
from magsafe.errors import DesignError

_NOT_THERE = object()


def inputs(before: Sheet, after: Sheet) -> Iterator[Change]:
    """Yield a change for each key whose value differs, or one where only layout, comments or order do."""
    if before.design.text == after.design.text:
        return
    first, second = _tree(before), _tree(after)
    if isinstance(first, str) or isinstance(second, str):
        which, why = ("first", first) if isinstance(first, str) else ("second", second)
        yield Change(
            kind="input", direction="unknown", of="design", before=None, after=None,
            text=f"the design in the {which} sheet is refused by this version, so the inputs are not compared",
            detail=str(why),
        )  # fmt: skip
        return
    old, new = dict(_leaves(first)), dict(_leaves(second))
    changed = [key for key in {**old, **new} if old.get(key, _NOT_THERE) != new.get(key, _NOT_THERE)]
    for key in changed:
        yield _input(key, old.get(key, _NOT_THERE), new.get(key, _NOT_THERE))
    if not changed:
        yield Change(
            kind="layout", direction="other", of="design", before=before.design.sha256, after=after.design.sha256,
            text="the design file differs in layout, comments or order only",
        )  # fmt: skip


def _tree(sheet: Sheet) -> dict[str, Any] | str:
    """Return the tree of a sheet's design, or why the reader, which also bounds what TOML costs, refuses it."""
    try:
        parse_design(original(sheet), sheet.design.name)
    except DesignError as error:
        return error.text(most=3)
    return tomllib.loads(sheet.design.text)


def _input(key: str, before: Any, after: Any) -> Change:
    if before is _NOT_THERE:
        text = f"{key} = {_written(after)}, which was not there"
    elif after is _NOT_THERE:
        text = f"{key} = {_written(before)} is not there any more"
    else:
        text = f"{key} = {_written(before)} before, {_written(after)} now"
    return Change(
        kind="input",
        direction="other",
        of=key,
        before=None if before is _NOT_THERE else _written(before),
        after=None if after is _NOT_THERE else _written(after),
        text=text,
    )


def _written(value: Any) -> str:
    """Return a value as TOML writes it, cut where it is long."""
    if isinstance(value, list):
        text = f"[{', '.join(_written(each) for each in value[:50])}]"
        return text if len(text) <= 120 else f"{text[:117]}..."
    if isinstance(value, float):
        return repr(value)
    return show(value)


def _leaves(tree: dict[str, Any], at: str = "") -> Iterator[tuple[str, Any]]:
    """Yield each value with its path; lists of tables are walked, other lists are values."""
    for key, value in tree.items():
        path = f"{at}.{key}" if at else key
        if isinstance(value, dict):
            yield from _leaves(value, path)
        elif isinstance(value, list) and value and all(isinstance(each, dict) for each in value):
            for label, each in zip(_labels(value), value, strict=True):
                yield from _leaves(each, f"{path}[{label}]")
        else:
            yield path, value


def _labels(blocks: Sequence[dict[str, Any]]) -> list[str]:
    """Return what tells blocks apart: their names where each has one of its own, else their numbers."""
    names = [block.get("name") for block in blocks]
    told = [show(name) for name in names if isinstance(name, str)]
    if len(told) == len(blocks) and len(set(told)) == len(told):
        return told
    return [str(index) for index in range(len(blocks))]
