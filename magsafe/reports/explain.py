"""Where a figure or a finding comes from, on a terminal: method, source and range, and the numbers that went in."""

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import fields
from math import isinf

from rich.console import Console, Group, RenderableType
from rich.text import Text

from magsafe import words
from magsafe.analysis.figures import Figure, Figures
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.terms import Ends
from magsafe.analysis.workings import working
from magsafe.checks.sheet import BasisRecord, Finding, Limit, Sheet, Value
from magsafe.design.model import Design
from magsafe.reports import telling
from magsafe.reports.explanations import FigureText, FindingText, figure_texts, finding_texts
from magsafe.reports.terminal import Speaker, console_on_output, is_plain, put

_DIGITS = 6  # more than a figure is worth, so that it can be worked out again
_LETTER = 8  # columns
_HEAD = ("letter", "low", "likely", "high", "unit")


def show_list(console: Console | None = None) -> None:
    """Print every figure and finding that can be explained, a line or two each."""
    say, console = _speaker(console)
    put(
        console,
        Group(
            Text("Figures", style="bold"),
            *(_entry(say, name, text.title) for name, text in figure_texts().items()),
            *say.heading("Findings; <...> stands for a name of the design"),
            *(_entry(say, each.id, each.title) for each in finding_texts()),
            Text(""),
            say.paragraph("magsafe explain NAME tells one of them; magsafe explain NAME DESIGN the numbers too."),
        ),
    )


def show_figure(
    text: FigureText, design: Design | None, points: Sequence[OperatingPoint] = (), console: Console | None = None
) -> None:
    """Print what a figure is, and for each transmission of a design the numbers that went in."""
    say, console = _speaker(console)
    parts = list(_figure(say, text))
    if design is not None:
        for title, point in zip(design.titles, points, strict=True):
            parts += _numbers(say, text, design, point, title)
    put(console, Group(*parts))


def show_finding(
    text: FindingText, sheet: Sheet | None, found: Sequence[tuple[str, Finding]] = (), console: Console | None = None
) -> None:
    """Print what a family of findings asks, and those that a sheet has, each with its transmission."""
    say, console = _speaker(console)
    parts = list(_finding(say, text))
    for title, finding in found:
        parts += _held(say, text, finding, title, () if sheet is None else _bases(sheet, title, finding))
    put(console, Group(*parts))


def show_design(design: Design, points: Sequence[OperatingPoint], console: Console | None = None) -> None:
    """Print every figure of a design briefly: its values, what it is, its formula."""
    say, console = _speaker(console)
    parts: list[RenderableType] = [Text(say.letters(design.origin.name), style="bold")]
    unknown: list[str] = []
    for name in (field.name for field in fields(Figures)):
        figures: list[Figure] = [getattr(point.figures, name) for point in points]
        if not any(figure.spread.known for figure in figures):
            unknown += [f"{name}: {why}." for why in dict.fromkeys(figure.why for figure in figures)]
            continue
        parts += say.heading(name)
        for title, figure in zip(design.titles, figures, strict=True):
            parts.append(say.paragraph(f"{words.short(title)}: {_shown(design, name, figure)}", indent=2))
        text = figure_texts().get(name)
        if text is not None:
            parts.append(say.paragraph(f"{text.title}; {', '.join(text.formula)}", indent=2))
    if unknown:
        parts += say.heading("Not known here")
        parts += [say.paragraph(each) for each in unknown]
    parts += [Text(""), say.paragraph("magsafe explain NAME DESIGN tells one of them with the numbers that went in.")]
    put(console, Group(*parts))


def _speaker(console: Console | None) -> tuple[Speaker, Console]:
    console = console or console_on_output()
    return Speaker(console.width, is_plain(console)), console


def _entry(say: Speaker, name: str, title: str) -> RenderableType:
    line = f"{name}: {title}"
    if len(line) + 2 <= say.width:
        return say.paragraph(line, indent=2)
    return Group(say.paragraph(f"{name}:", indent=2), say.paragraph(title, indent=6))


def _told(say: Speaker, rows: Iterable[tuple[str, str]]) -> Iterator[RenderableType]:
    """Yield headings with a paragraph each; nothing for a text that is empty."""
    for heading, text in rows:
        if text:
            yield from say.heading(heading)
            yield say.paragraph(text, indent=2)


# Figures ---------------------------------------------------------------------------------------------------


def _figure(say: Speaker, text: FigureText) -> Iterator[RenderableType]:
    yield Text(say.letters(f"{text.name}: {text.title}"), style="bold")
    yield from _told(say, [("How it is found", text.words)])
    yield from say.heading("Formula")
    yield from (say.paragraph(step, indent=2) for step in text.formula)
    yield Text("")
    yield from (say.paragraph(f"{letter}: {meaning}", indent=2) for letter, meaning in text.letters.items())
    yield from _told(
        say,
        [
            ("What makes its low end", text.low),
            ("What makes its high end", text.high),
            ("The dangerous end", text.danger),
            ("Valid for", text.valid),
            ("Stated error of the method", text.error),
            ("Source", "; or ".join(text.sources)),
            ("A rough check by hand", text.by_hand),
            ("Findings that look at it", ", ".join(text.used_by) or "none: it is there to be read"),
        ],
    )


def _numbers(
    say: Speaker, text: FigureText, design: Design, point: OperatingPoint, title: str
) -> Iterator[RenderableType]:
    """Yield the numbers that went into a figure in one transmission, and the figure."""
    figure: Figure = getattr(point.figures, text.name)
    yield from say.heading(
        f"{words.short(title)}, {words.frequency(point.transmission.frequency)}, {design.origin.name}"
    )
    yield say.paragraph(f"Method: {figure.method}. Source: {figure.source}.")
    if figure.why:
        yield say.paragraph(f"Not known, or at one end only: {figure.why}.")
    if not figure.spread.known:
        return
    terms = working(text.name, design, point)
    yield Text("")
    result = text.formula[-1].split(" = ")[0]
    own = (figure.spread.low, figure.spread.likely, figure.spread.high)
    rows = [(term.letter, *_cells(term.ends), term.unit) for term in terms]
    yield say.grid(_HEAD, [*rows, (result, *_cells(own), figure.unit)], first=_LETTER)
    for of in dict.fromkeys(f"{term.letter.partition('_')[2]}: {term.of}" for term in terms if term.of):
        yield say.paragraph(f"_{of}")
    if not terms and figure.spread.likely == 0.0:
        yield say.paragraph("No part adds to it.")
    elif not terms:
        yield say.paragraph("It is found by search: no number by itself goes in.")
    yield say.paragraph(f"{text.name} = {_shown(design, text.name, figure)}")


def _cells(ends: Ends) -> tuple[str, str, str]:
    low, likely, high = (
        "not known" if end is None else "no end" if isinf(end) else f"{end:.{_DIGITS}g}" for end in ends
    )
    return low, likely, high


def _shown(design: Design, name: str, figure: Figure) -> str:
    """Return a figure in the unit in which the sheet shows it: `5.74 kV (5.01 … 6.84)`."""
    spread, si = figure.spread, figure.unit
    if not spread.known:
        return "not known"
    rows = (*telling.FULL_WAVE_ROWS, *telling.ROWS) if design.capacitor.kind == "none" else telling.ROWS
    unit = next((row.unit for row in rows if row.figure == name), words.shown_unit(si))
    likely = "?" if spread.likely is None else words.number(spread.likely, si, unit)
    return " ".join(filter(None, (likely, unit, words.ends(spread, si, unit))))


# Findings --------------------------------------------------------------------------------------------------


def _finding(say: Speaker, text: FindingText) -> Iterator[RenderableType]:
    yield Text(say.letters(f"{text.id}: {text.title}"), style="bold")
    dangerous = {
        "high": "The high end: more is worse.",
        "low": "The low end: less is worse.",
        "": "Neither alone: no ratio tells it.",
    }[text.end]
    of_probe = text.id.startswith("exposure.probe")
    yield from _told(say, [("What is held against what", text.asks), ("The limit", text.limit)])
    if text.margin:
        yield from say.heading("Formula")
        yield say.paragraph(f"m = {text.margin}", indent=2)
        yield say.paragraph(
            f"m: margin found; V: the value at its {text.end} end; L: the limit. "
            + (
                "A stop where m is less than 1."
                if of_probe
                else "Clear where m is at least the margin asked, without credit for what is only typical too; narrow "
                "down to 1; below 1 the limit is exceeded."
            ),
            indent=2,
        )
    yield from _told(
        say,
        [
            ("The dangerous end", "What it certainly read: its low end." if of_probe else dangerous),
            ("How far it may be trusted", text.rests),
            ("Figures that it looks at", ", ".join(text.figures) or "none: its value is its own"),
        ],
    )


def _held(
    say: Speaker, text: FindingText, finding: Finding, title: str, bases: Sequence[BasisRecord]
) -> Iterator[RenderableType]:
    """Yield one finding of a sheet with its numbers."""
    yield from say.heading(f"{words.short(finding.id, 60)} ({words.short(title)})")
    yield say.item(finding.verdict, f"{finding.because}.")
    yield say.paragraph(f"Limit rests on: {finding.provenance}. Source: {finding.source}.")
    rows = list(_finding_rows(text, finding))
    if rows:
        yield Text("")
        yield say.grid(_HEAD, rows, first=_LETTER)
    if finding.margin_asked is not None:
        yield say.paragraph(f"The margin asked is {finding.margin_asked:.{_DIGITS}g}.")
    for name, power in (("margin", finding.power_at_margin), ("limit", finding.power_at_limit)):
        if power is not None:
            yield say.paragraph(f"It keeps the {name} up to {words.power(power)} at the transmitter, peak envelope.")
    for basis in bases:
        yield say.paragraph(_basis(basis))


def _finding_rows(text: FindingText, finding: Finding) -> Iterator[tuple[str, ...]]:
    value: Value | None = finding.value
    limit: Limit | None = finding.limit
    if value is not None:
        yield ("V", *_cells((value.low, value.likely, value.high)), value.unit)
    if limit is not None:
        yield ("L", *_cells((limit.value, limit.value, limit.value)), limit.unit)
    if finding.margin_found is not None and text.margin:
        found = finding.margin_found
        yield ("m", *(f"{found:.{_DIGITS}g}" if text.end == end else "" for end in ("low", "likely", "high")), "1")


def _bases(sheet: Sheet, title: str, finding: Finding) -> tuple[BasisRecord, ...]:
    """Return what each basis of a rule says of the place that a finding is about; nothing for one of another kind."""
    for point in sheet.operating_points:
        for exposure in point.exposure if point.name == title and finding.session is None else ():
            for place in exposure.places:
                begun = finding.id.startswith(f"exposure.{exposure.rule}.{exposure.who}.")
                if begun and place.name == finding.place:
                    return place.bases
    return ()


def _basis(basis: BasisRecord) -> str:
    fields_at = [
        f"{letter} {field:.{_DIGITS}g} {unit} of {limit:.{_DIGITS}g} {unit}"
        for letter, field, limit, unit in (
            ("E", basis.electric, basis.electric_limit, "V/m"),
            ("H", basis.magnetic, basis.magnetic_limit, "A/m"),
        )
        if field is not None and limit is not None
    ]
    over = f"averaged over {words.duration(basis.averaging_time)}" if basis.averaging_time else "not averaged"
    return (
        f"{basis.basis}, {over}: {' and '.join(fields_at)}, RMS; the larger ratio squared is "
        f"{basis.share_of_limit:.{_DIGITS}g} of the limit. It looks at {basis.judged_power:.{_DIGITS}g} W at the loop "
        "with the line's likely loss; the fields are those of its least."
    )
