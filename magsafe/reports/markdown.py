"""A page as Markdown: pictures are told in words, and no text of anybody's is markup."""

import re
from collections.abc import Iterator

from magsafe.reports.marks import MARKS
from magsafe.reports.page import (
    Block,
    Boxes,
    Cell,
    Columns,
    Facts,
    Heading,
    Items,
    Page,
    Paragraph,
    Picture,
    Said,
    Table,
)

_MARKUP = re.compile(r"([\\`*_{}\[\]<>#|$~^!&@:=+-])")
_HARMLESS = re.compile(r"(?<=[0-9A-Za-z,;)])\\([-:=+!])(?=[\s0-9A-Za-z])")
_AT_THE_START = re.compile(r"^(\d+)([.)])(?=\s|$)")


def as_markdown(page: Page) -> str:
    """Return a page as Markdown."""
    parts = [part for block in page.blocks for part in _block(block)]
    return "\n\n".join([*parts, "---", escaped(page.footer)]) + "\n"


def escaped(text: str) -> str:
    """Return a text in which nothing is markup, be it a heading, a list, a link, HTML or a formula."""
    safe = _HARMLESS.sub(r"\1", _MARKUP.sub(r"\\\1", text))
    return _AT_THE_START.sub(r"\1\\\2", safe)


def _block(block: Block) -> Iterator[str]:
    """Yield the parts of a block, between which a line is empty."""
    if isinstance(block, Heading):
        yield f"{'#' * block.level} {escaped(block.text)}"
    elif isinstance(block, Paragraph):
        yield _strong(block.text) if block.style == "strong" else escaped(block.text)
    elif isinstance(block, Said):
        yield f"**{_mark(block)}** {_strong(block.text)}"
    elif isinstance(block, Facts):
        yield "\n".join(f"- {escaped(name)}: **{escaped(value)}**" for name, value in block.pairs)
    elif isinstance(block, Items):
        yield "\n".join(
            f"{f'{number}.' if block.numbered else '-'} {escaped(each)}" for number, each in enumerate(block.items, 1)
        )
    elif isinstance(block, Table):
        yield _strong(block.caption)
        yield _table(block)
    elif isinstance(block, Picture):
        yield _picture(block)
    elif isinstance(block, Columns):
        yield from (part for column in block.columns for each in column for part in _block(each))
    elif isinstance(block, Boxes):
        told = zip(block.names, block.texts, strict=True)
        yield "\n".join(f"- {escaped(name)}: {escaped(text) or '....................'}" for name, text in told)


def _strong(text: str) -> str:
    return f"**{escaped(text)}**" if text else ""


def _mark(said: Said) -> str:
    return f"{MARKS[said.verdict].shape} {said.verdict}"


def _picture(each: Picture) -> str:
    return escaped(f"Picture: {each.alt} {each.caption}".rstrip())


def _table(block: Table) -> str:
    rules = ["---:" if column in block.right else "---" for column in range(len(block.head))]
    lines = [[escaped(each) for each in block.head], rules, *([_cell(each) for each in row] for row in block.rows)]
    return "\n".join(f"| {' | '.join(line)} |" for line in lines)


def _cell(cell: Cell) -> str:
    if isinstance(cell, str):
        return escaped(cell)
    return f"{_mark(cell)} {escaped(cell.text)}".rstrip()
