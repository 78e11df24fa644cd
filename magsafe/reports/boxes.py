"""Text in boxes: measured letter by letter, wrapped, and as large as its box holds it."""

import re
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from math import floor
from unicodedata import east_asian_width

from magsafe.reports.svg import Box, Drawing, plain

LEADING = 1.28  # of the size, from line to line
_STEP = 0.1  # mm
_WIDE = "MWmw@%\u2026\u2014"
# A number stays on the line of its unit, and a step's number on that of its first word.
_WORD = re.compile(r"\d\. \S+|\S*\d (?:m|s|W|kV|MHz|min|%|mm)(?![^\s,.;:)])[,.;:)]*|\S+")
_MORE = "... more: see the sheet"

Run = tuple[str, bool]  # a piece of a line, and whether it is bold


@dataclass(frozen=True, slots=True)
class Paragraph:
    """A bold beginning, which may be empty, and what follows it."""

    lead: str
    text: str


def letter_width(letter: str, *, bold: bool = False) -> float:
    """Return the width that a letter takes at the most, of its size.

    No less than in any font of `svg.FONTS`: the widest of their proportional ones, and the one of even width. Rare
    letters of other scripts may be wider; boxes are clipped besides.
    """
    if east_asian_width(letter) in "WF":
        return 1.3
    if letter in _WIDE:
        return 1.11 if bold else 1.02
    if not letter.isascii():
        return 1.25 if bold else 1.15
    if letter.isupper() or letter in "&+=<>~#^|":
        return 0.88 if bold else 0.84
    if letter.isalnum() or letter in "${}":
        return 0.72 if bold else 0.65
    return 0.61


def measured(text: str, size: float, *, bold: bool = False) -> float:
    """Return the width that a text takes at the most [mm]."""
    return size * sum(letter_width(letter, bold=bold) for letter in text)


def cut(text: str, width: float, size: float, *, bold: bool = False) -> str:
    """Return a text that is no wider than `width` [mm], with a mark where it was cut."""
    text = plain(text)
    if measured(text, size, bold=bold) <= width:
        return text
    room = width - measured("...", size, bold=bold)
    kept = ""
    for letter in text:
        room -= size * letter_width(letter, bold=bold)
        if room < 0.0:
            break
        kept += letter
    return f"{kept.rstrip()}..."


def largest(text: str, width: float, sizes: tuple[float, float], *, bold: bool = False) -> float:
    """Return the largest size between two at which a text is no wider than `width` [mm]; the smaller if none is."""
    most, least = sizes
    fits = width / (measured(plain(text), 1.0, bold=bold) or 1.0)
    return max(least, min(most, floor(100.0 * fits) / 100.0))  # as it is written, to a hundredth


def lines_of(paragraph: Paragraph, width: float, size: float) -> list[list[Run]]:
    """Return the lines of a paragraph that is `width` wide [mm]; a word that is wider is broken."""
    lines: list[list[Run]] = [[]]
    room = width
    for word, bold in _words(paragraph, width, size):
        wide = measured(word, size, bold=bold)
        gap = measured(" ", size, bold=bold) if lines[-1] else 0.0
        if lines[-1] and gap + wide > room:
            lines.append([])
            room, gap = width, 0.0
        lines[-1].append((word, bold))
        room -= gap + wide
    return lines


def _words(paragraph: Paragraph, width: float, size: float) -> Iterator[Run]:
    for text, bold in ((paragraph.lead, True), (paragraph.text, False)):
        for word in _WORD.findall(plain(text)):
            start, used = 0, 0.0
            for end, letter in enumerate(word):
                wide = size * letter_width(letter, bold=bold)
                if end > start and used + wide > width:
                    yield word[start:end], bold
                    start, used = end, 0.0
                used += wide
            yield word[start:], bold


def fill(
    drawing: Drawing,
    name: str,
    box: Box,
    build: Callable[[int], Sequence[Paragraph]],
    sizes: tuple[float, float],
    most: int = 8,
) -> None:
    """Write paragraphs into a box, in the largest size between two that holds them.

    Parameters
    ----------
    drawing : where it is written
    name : of the box; nothing is drawn outside it
    box : left, top, right, bottom [mm]
    build : gives the paragraphs with so many entries of each list
    sizes : the largest and the smallest size [mm]
    most : as many entries as are tried first; fewer where they do not fit in the smallest size
    """
    left, top, right, bottom = box
    height, width = bottom - top, right - left
    lines: list[list[Run]] = []
    size, gap = sizes[1], 0.0
    for count, size in _tries(sizes, most):
        made = [lines_of(paragraph, width, size) for paragraph in build(count)]
        lines, gap = [line for paragraph in made for line in paragraph], 0.3 * size
        starts = {sum(len(each) for each in made[:i]) for i in range(1, len(made))}
        if len(lines) * LEADING * size + len(starts) * gap <= height:
            break
    else:
        starts = set()
        lines = [*lines[: max(0, int(height / (LEADING * size)) - 1)], [(_MORE, True)]]
    with_clip(drawing, name, box)
    y = top
    for index, line in enumerate(lines):
        y += LEADING * size + (gap if index in starts else 0.0)
        drawing.runs((left, y - 0.3 * size), _joined(line), size)
    drawing.close()


def with_clip(drawing: Drawing, name: str, box: Box) -> None:
    """Begin a group outside whose box nothing is drawn."""
    drawing.clip(f"clip-{name}", box)
    drawing.open(id=name, clip_path=f"url(#clip-{name})")


def _tries(sizes: tuple[float, float], most: int) -> Iterator[tuple[int, float]]:
    steps = round((sizes[0] - sizes[1]) / _STEP)
    for count in range(most, 0, -1):
        for step in range(steps + 1):
            yield count, sizes[0] - step * _STEP


def _joined(line: Sequence[Run]) -> list[Run]:
    """Return a line with words of one weight as one run."""
    bold = " ".join(word for word, heavy in line if heavy)
    light = " ".join(word for word, heavy in line if not heavy)
    return [run for run in ((f"{bold} " if bold and light else bold, True), (light, False)) if run[0]]
