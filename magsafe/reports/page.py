"""A page as a tree of blocks that every surface renders: headings, sentences, tables, pictures, boxes.

What a block holds is text and nothing else; no block knows of any markup. `Page.of` makes all text fit to be shown.
"""

from collections.abc import Sequence
from dataclasses import dataclass, fields, is_dataclass, replace
from typing import Any, ClassVar, Literal

from magsafe.checks.sheet import Verdict
from magsafe.reports.fit_text import fit

Style = Literal["plain", "strong", "small"]


@dataclass(frozen=True, slots=True)
class Heading:
    """A heading; level 1 stands once, at the top."""

    kind: ClassVar[str] = "heading"
    text: str
    level: int = 2


@dataclass(frozen=True, slots=True)
class Paragraph:
    """Some sentences."""

    kind: ClassVar[str] = "paragraph"
    text: str
    style: Style = "plain"


@dataclass(frozen=True, slots=True)
class Said:
    """A verdict as a word and a shape; beside it what it says."""

    kind: ClassVar[str] = "said"
    verdict: Verdict
    text: str = ""
    style: Style = "plain"


@dataclass(frozen=True, slots=True)
class Facts:
    """Names, each with what it is, in one line where there is room."""

    kind: ClassVar[str] = "facts"
    pairs: tuple[tuple[str, str], ...]


@dataclass(frozen=True, slots=True)
class Items:
    """A list; in `columns` beside each other where pages are printed."""

    kind: ClassVar[str] = "items"
    items: tuple[str, ...]
    numbered: bool = False
    columns: int = 1
    style: Style = "plain"


Cell = str | Said


@dataclass(frozen=True, slots=True)
class Table:
    """A table; the first cell of a row names it. `widths` are shares of the width, `right` are columns of numbers."""

    kind: ClassVar[str] = "table"
    caption: str
    head: tuple[str, ...]
    rows: tuple[tuple[Cell, ...], ...]
    widths: tuple[float, ...]
    right: tuple[int, ...] = ()


@dataclass(frozen=True, slots=True)
class Picture:
    """A picture as SVG, `width` by `height` [mm], and what it shows in words."""

    kind: ClassVar[str] = "picture"
    svg: str
    alt: str
    caption: str
    width: float
    height: float


@dataclass(frozen=True, slots=True)
class Columns:
    """Columns of blocks, beside each other where there is room."""

    kind: ClassVar[str] = "columns"
    columns: "tuple[tuple[Block, ...], ...]"


@dataclass(frozen=True, slots=True)
class Boxes:
    """Boxes to write in, beside each other, each under its name; the text of one may be given."""

    kind: ClassVar[str] = "boxes"
    names: tuple[str, ...]
    texts: tuple[str, ...]
    widths: tuple[float, ...]


@dataclass(frozen=True, slots=True)
class Break:
    """Where a new sheet of paper begins."""

    kind: ClassVar[str] = "break"


Block = Heading | Paragraph | Said | Facts | Items | Table | Picture | Columns | Boxes | Break


@dataclass(frozen=True, slots=True)
class Page:
    """A whole document: its title, its date (YYYY-MM-DD), the line on every sheet of paper, and its blocks."""

    title: str
    date: str
    footer: str
    blocks: tuple[Block, ...]

    @classmethod
    def of(cls, title: str, date: str, footer: str, blocks: Sequence[Block]) -> "Page":
        """Return a page with all its text made fit to be shown."""
        return cls(fit(title, 120), date, fit(footer, 160), tuple(_fitted(block) for block in blocks))


def _fitted(value: Any) -> Any:
    """Return a block, or a part of one, with all its text made fit; a picture is escaped where it is drawn."""
    if isinstance(value, str):
        return fit(value)
    if isinstance(value, tuple):
        return tuple(_fitted(each) for each in value)
    if is_dataclass(value) and not isinstance(value, type):
        parts = {f.name: _fitted(getattr(value, f.name)) for f in fields(value) if f.name != "svg"}
        return replace(value, **parts)
    return value


def tree(value: Any) -> Any:
    """Return a block or a part of one as dictionaries and lists, for what reads data only."""
    if isinstance(value, tuple):
        return [tree(each) for each in value]
    if is_dataclass(value) and not isinstance(value, type):
        parts = {f.name: tree(getattr(value, f.name)) for f in fields(value)}
        return {"kind": getattr(value, "kind", ""), **parts}
    return value
