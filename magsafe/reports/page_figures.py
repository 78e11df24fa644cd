"""The design as given, and the figures by transmission with spread, method and source."""

import tomllib
from collections.abc import Iterator, Sequence
from typing import Any

from magsafe import words
from magsafe.checks.sheet import FigureRecord, OperatingPointRecord, Sheet
from magsafe.reports import telling
from magsafe.reports.page import Block, Heading, Paragraph, Table
from magsafe.spread import Spread

ASIDE = 4  # transmissions beside each other in one table
_VALUE = 120  # letters of one value of the design
_NOT_SHOWN = ("schema", "station")


# The design ------------------------------------------------------------------------------------------------


def design_as_given(sheet: Sheet) -> Iterator[Block]:
    """Yield the design in its own words."""
    yield Heading("The design as given")
    tables = tomllib.loads(sheet.design.text)
    shown = {name: _counted(value) if name == "measured" else value for name, value in tables.items()}
    rows = tuple(row for name, value in shown.items() if name not in _NOT_SHOWN for row in _given(name, value))
    yield Table(f"{words.short(sheet.design.name, 60)}, in its own words", ("part", "as given"), rows, (0.2, 0.8))


def _counted(value: Any) -> Any:
    """Return records of measurements with the number of their points, which a picture shows."""
    if isinstance(value, list):
        return [_counted(each) for each in value]
    if isinstance(value, dict) and isinstance(value.get("points"), list):
        return value | {"points": f"{len(value['points'])} of the sweep"}
    return value


def _given(name: str, value: Any) -> Iterator[tuple[str, str]]:
    """Yield a row for each table of the design; tables within it have their own."""
    if isinstance(value, list) and value and all(isinstance(each, dict) for each in value):
        for number, each in enumerate(value, 1):
            yield from _given(f"{name} {number}" if len(value) > 1 else name, each)
        return
    if not isinstance(value, dict) or _is_spread(value):
        yield name, _said(value)
        return
    inner = {key: each for key, each in value.items() if _is_table(each)}
    own = "; ".join(f"{_words(key)} {_said(each)}" for key, each in value.items() if key not in inner)
    if own:
        yield name, own
    for key, each in inner.items():
        yield from _given(f"{name}, {key}", each)


def _is_table(value: Any) -> bool:
    if isinstance(value, list):
        return bool(value) and all(isinstance(each, dict) for each in value)
    return isinstance(value, dict) and not _is_spread(value) and len(value) > 2


def _is_spread(value: Any) -> bool:
    return isinstance(value, dict) and set(value) <= {"low", "likely", "high"}


def _said(value: Any) -> str:
    if isinstance(value, bool):
        return "yes" if value else "no"
    if _is_spread(value):
        return f"{' / '.join(str(value[end]) for end in value)} ({', '.join(value)})"
    if isinstance(value, dict):
        return words.short(", ".join(f"{_words(key)} {_said(each)}" for key, each in value.items()), _VALUE)
    if isinstance(value, list):
        return words.short(", ".join(_said(each) for each in value), _VALUE)
    return words.short(str(value), _VALUE)


def _words(key: str) -> str:
    return words.short(key.replace("_", " "))


# Figures ---------------------------------------------------------------------------------------------------


def figures(sheet: Sheet) -> Iterator[Block]:
    """Yield the figures of all transmissions, and what is not known of them."""
    points = sheet.operating_points
    yield Heading("Figures")
    for start in range(0, len(points), ASIDE):
        yield _figures(points[start : start + ASIDE])
    unknown = tuple(_unknown(points))
    if unknown:
        yield Paragraph(f"Not known, or known at one end only: {' '.join(unknown)}", "small")
    if sheet.measure_first is not None:
        yield Paragraph(sheet.measure_first)


def _figures(points: Sequence[OperatingPointRecord]) -> Table:
    names = (_named(point) for point in points)
    uses = zip(*(_use(point) for point in points), strict=True)
    first = 0.34 if len(points) > 1 else 0.5
    rows = (
        *((row[0][0], *(told for _, told in row)) for row in uses),
        *((row.label, *(cell(point.figures[row.figure], row) for point in points)) for row in telling.rows(points)),
    )
    widths = (first, *((1.0 - first) / len(points) for _ in points))
    caption = "Figures by transmission: likely (from least to most)"
    return Table(caption, ("figure", *names), rows, widths, tuple(range(1, len(points) + 1)))


def _named(point: OperatingPointRecord) -> str:
    return ", ".join(dict.fromkeys((words.short(point.name, 30), words.frequency(point.frequency))))


def _use(point: OperatingPointRecord) -> Iterator[tuple[str, str]]:
    yield "Power at the key, W PEP", f"{point.power:.6g}"
    yield "Power at the loop, W", words.number(point.power_at_loop, "W", "W")
    yield "Mode; share keyed", f"{point.mode or 'not stated'}; {100.0 * point.duty:.3g} %"
    yield "Clear up to, W PEP", _clear_to(point)


def _clear_to(point: OperatingPointRecord) -> str:
    made = point.power_ceiling
    if made.value is None:
        return "unproven"
    return f"{'' if made.complete else 'at most '}{words.floor_two_digits(made.value)}"


def cell(figure: FigureRecord, row: telling.Row) -> str:
    """Return a figure with its ends."""
    spread = Spread(figure.low, figure.likely, figure.high)
    if not spread.known:
        return "not known"
    likely = "?" if spread.likely is None else words.number(spread.likely, row.si, row.unit)
    found = words.ends(spread, row.si, row.unit)
    return f"{likely} {found}" if found else likely


def _unknown(points: Sequence[OperatingPointRecord]) -> Iterator[str]:
    """Yield each reason once, with the figures that it is about."""
    found: dict[str, list[str]] = {}
    for row in telling.rows(points):
        for why in dict.fromkeys(p.figures[row.figure].why for p in points):
            if why:
                found.setdefault(why, []).append(row.label.split(",")[0])
    for why, names in found.items():
        yield f"{', '.join(names)}: {why}."


def methods(points: Sequence[OperatingPointRecord]) -> Iterator[Block]:
    """Yield how each figure was found, and the sources, each once under a number."""
    found = dict.fromkeys(
        (row.label.split(",")[0], each.method, each.source)
        for row in telling.rows(points)
        for each in (point.figures[row.figure] for point in points)
        if each.method != "none"
    )
    sources = list(dict.fromkeys(source for _, _, source in found))
    told = (f"{label}: {method} [{sources.index(source) + 1}]." for label, method, source in found)
    yield Heading("How each figure was found, and its source", 3)
    yield Paragraph(" ".join(told), "small")
    yield Paragraph(" ".join(f"[{number}] {source}." for number, source in enumerate(sources, 1)), "small")
