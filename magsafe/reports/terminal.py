"""A sheet on a terminal: 80 columns hold everything, the same text with and without colour, no boxes."""

import sys
from collections.abc import Iterable, Iterator, Sequence
from io import TextIOWrapper
from textwrap import wrap

from rich.console import Console, Group, RenderableType
from rich.padding import Padding
from rich.table import Table
from rich.text import Text

from magsafe import words
from magsafe.checks.sheet import (
    ORDER,
    DeratingRecord,
    FigureRecord,
    Finding,
    KeepoutPoint,
    KeepoutSheet,
    OperatingPointRecord,
    SessionRecord,
    Sheet,
    Verdict,
)
from magsafe.reports import deratings, exemption, feed, people, sessions, sky, telling
from magsafe.reports.marks import MARKS
from magsafe.spread import Spread

WIDEST = 100
NARROWEST = 40
_SAID = 13  # columns for shape and verdict word
_LABEL = 27
_FACTOR = 7  # columns for a factor
_TABLE = 76  # columns that the tables of distances need
_ASIDE = 4  # transmissions beside each other in one table
_PLAIN = str.maketrans(
    {
        "Ω": "ohm",
        "µ": "u",
        "…": "..",
        "·": "-",
        "²": "^2",
        "–": "-",
        "—": "-",
        "×": "x",
        "°": "deg ",
    }
)


def console_on_output() -> Console:
    """Return a console on standard output that no narrow encoding breaks and no user's text marks up."""
    if isinstance(sys.stdout, TextIOWrapper):
        sys.stdout.reconfigure(errors="replace")
    console = Console(highlight=False, markup=False, emoji=False)
    console.width = min(max(console.width, NARROWEST), WIDEST)
    return console


def is_plain(console: Console) -> bool:
    """Return whether the console's encoding is not known to hold more than ASCII."""
    return not console.encoding.lower().startswith("utf")


def put(console: Console, *parts: RenderableType) -> None:
    """Print parts; where there is no colour, without the spaces that fill lines up to the width."""
    if console.is_terminal and console.color_system:
        console.print(*parts, sep="\n")
        return
    with console.capture() as capture:
        console.print(*parts, sep="\n")
    lines = capture.get().split("\n")
    console.file.write("\n".join(line.rstrip(" ") for line in lines))


def show_sheet(sheet: Sheet, console: Console | None = None) -> None:
    """Print a sheet."""
    console = console or console_on_output()
    put(console, render(sheet, console.width, plain=is_plain(console)))


def render(sheet: Sheet, width: int, *, plain: bool) -> RenderableType:
    """Return a sheet as what rich prints, `width` columns wide; `plain` keeps to ASCII."""
    say = Speaker(width, plain)
    return Group(
        *say.top(sheet),
        *say.in_the_way(sheet),
        *say.figures(sheet.operating_points),
        *say.feeding(sheet),
        *say.patterns(sheet.operating_points),
        *say.placings(sheet.operating_points),
        *say.derations(sheet.deratings),
        *say.people(sheet.operating_points, sheet.sessions),
        *say.clear(sheet),
        *say.measure_first(sheet),
        *say.list_of("Assumed", sheet.assumptions),
        *say.list_of("Cautions", sheet.cautions),
    )


def show_keepout(sheet: KeepoutSheet, console: Console | None = None) -> None:
    """Print where people must not be."""
    console = console or console_on_output()
    say = Speaker(console.width, is_plain(console))
    put(console, Group(*say.keepout(sheet)))


class Speaker:
    """Turns parts of a sheet into text of one width and alphabet."""

    def __init__(self, width: int, plain: bool) -> None:
        self.width = width
        self.plain = plain

    def letters(self, text: str) -> str:
        """Return a text in the alphabet of the stream."""
        if not self.plain:
            return text
        return text.translate(_PLAIN).encode("ascii", "replace").decode()

    def paragraph(self, text: str, style: str = "", indent: int = 0) -> RenderableType:
        """Return a text wrapped to the width, indented as a whole."""
        lines = wrap(self.letters(text), self.width - indent, break_on_hyphens=False) or [""]
        return Text("\n".join(" " * indent + line for line in lines), style=style, no_wrap=True)

    def heading(self, text: str) -> Iterator[RenderableType]:
        """Yield an empty line and a heading."""
        yield Text("")
        yield Text(self.letters(text), style="bold")

    def mark(self, verdict: Verdict) -> Text:
        """Return shape and word of a verdict."""
        said = f"[{verdict}]" if self.plain else f"{MARKS[verdict].shape} {verdict}"
        return Text(said.ljust(_SAID), style=MARKS[verdict].colour)

    def keepout(self, sheet: KeepoutSheet) -> Iterator[RenderableType]:
        """Yield the verdict on people, their places, and every distance."""
        yield self.item(sheet.verdict, telling.people_headline(sheet), bold=True)
        yield self.paragraph(telling.people_ceiling(sheet), indent=_SAID)
        yield Text("")
        yield self.paragraph(f"{sheet.design.name}, {sheet.date}, magsafe {sheet.magsafe}", "dim")
        for finding in sheet.findings:
            yield self.item(finding.verdict, f"{finding.id}: {finding.because}. Do: {finding.do}.")
        for point in sheet.operating_points:
            yield from self.heading(telling.use(point))
            for finding in (each for each in point.findings if each.session is None):
                yield self._told(finding)
            head = ("rule and tier", "direction", "m", "set by", "key-down, m")
            yield Text("")
            yield self.grid(head, people.keepout_rows(point))
        for session in sheet.sessions:
            yield from self.heading(f"Worked in turn: {session.name}")
            for finding in sessions.findings(session, sheet.operating_points):
                yield self._told(finding)
            yield Text("")
            yield self.grid(("rule and tier", "direction", "m", "set by"), sessions.keepout_rows(session))
        yield from self.doubts(sheet.operating_points)
        yield from self.exempt(sheet.operating_points)
        yield from self.list_of("Cautions", sheet.cautions)

    def _told(self, finding: Finding) -> RenderableType:
        """Return a finding about people in full: its place, its id, why, and what to do."""
        where = f"{words.short(finding.place)} ({words.short(finding.id, 60)})" if finding.place else finding.id
        do = "" if finding.verdict == "clear" else f" Do: {finding.do}."
        return self.item(finding.verdict, f"{where}: {finding.because}.{do}")

    def top(self, sheet: Sheet) -> Iterator[RenderableType]:
        """Yield the verdict, what it means, and the highest power."""
        made = sheet.power_ceiling
        yield self.item(sheet.verdict, telling.headline(sheet), bold=True)
        yield self.paragraph(telling.ceiling(sheet, made), indent=_SAID)
        if telling.left_out(made):
            yield self.paragraph(telling.left_out(made), indent=_SAID)
        yield Text("")
        yield self.paragraph(f"{sheet.design.name}, {sheet.date}, magsafe {sheet.magsafe}", "dim")

    def item(self, verdict: Verdict, text: str, *, bold: bool = False) -> Text:
        """Return a verdict mark and a text beside it, its further lines indented as far."""
        lines = wrap(self.letters(text), self.width - _SAID, break_on_hyphens=False)
        mark = self.mark(verdict)
        if bold:
            mark.stylize("bold")
        body = f"\n{' ' * _SAID}".join(lines)
        return Text.assemble(mark, (body, "bold" if bold else ""), no_wrap=True)

    def in_the_way(self, sheet: Sheet) -> Iterator[RenderableType]:
        """Yield what is not clear, the worst first."""
        told = list(telling.in_the_way(sheet))
        if told:
            yield from self.heading("What stands in the way")
        for each in told:
            yield self.item(each.finding.verdict, _title(each))
            yield self.paragraph(f"{each.finding.because}.", indent=_SAID)
            yield self.paragraph(f"Do: {each.finding.do}.", indent=_SAID)

    def clear(self, sheet: Sheet) -> Iterator[RenderableType]:
        """Yield what is clear, a paragraph each."""
        told = [each for each in telling.findings(sheet, "clear") if not _is_among_places(each.finding)]
        if told:
            yield from self.heading("What is clear")
        for each in told:
            yield self.item("clear", f"{_title(each)}: {each.finding.because}.")

    def people(
        self, points: Sequence[OperatingPointRecord], worked: Sequence[SessionRecord]
    ) -> Iterator[RenderableType]:
        """Yield places with their verdicts, and the table of distances, for each transmission."""
        if not any(point.exposure for point in points):
            return
        yield from self.heading("People: places")
        for point in points:
            yield self.paragraph(telling.use(point))
            places = [(place, exposure) for exposure in point.exposure for place in exposure.places]
            for place, exposure in sorted(places, key=lambda each: ORDER.index(each[0].verdict)):
                yield self.item(place.verdict, f"{people.place_text(place, exposure)}.")
        for session in worked:
            yield self.paragraph(f"Worked in turn: {session.name}")
            for verdict, text in sessions.places(session, points):
                yield self.item(verdict, text)
        yield from self.heading("People: keep-out in metres from the loop's centre, averaged; last column key-down")
        for point in points:
            yield self.grid((words.short(point.name), *people.distance_columns(point)), people.distance_rows(point))
        for session in worked:
            columns = people.distance_columns(points[session.transmissions[0]])[:-1]
            yield self.paragraph(f"Worked in turn: {session.name}")
            yield self.grid(("", *columns), sessions.distance_rows(session, len(columns)))
        yield from self.doubts(points)
        yield from self.exempt(points)

    def doubts(self, points: Sequence[OperatingPointRecord | KeepoutPoint]) -> Iterator[RenderableType]:
        """Yield why distances are not known, or do not hold, and which rules have no limits for a tier."""
        reasons = dict.fromkeys((each.without, each.why) for point in points for each in point.exposure if each.why)
        for without, reason in reasons:
            yield self.paragraph(f"{reason}." if without else f"Not proven: {reason}.")

    def exempt(self, points: Sequence[OperatingPointRecord | KeepoutPoint]) -> Iterator[RenderableType]:
        """Yield whether the rules ask for an evaluation at all."""
        if any(point.exemptions for point in points):
            yield from self.heading(exemption.HEADING)
        for warning in exemption.warnings(points):
            yield self.paragraph(warning)
        for point in points:
            said = tuple(exemption.sentences(point))
            if said:
                yield self.paragraph(telling.use(point))
            for sentence in said:
                yield self.paragraph(sentence, indent=2)

    def grid(self, head: Sequence[str], rows: Iterable[Sequence[str]], first: int = _LABEL - 6) -> RenderableType:
        """Return a table of short cells, the first column to the left; where it would not fit, a line for each row."""
        listed = list(rows)
        if self.width < _TABLE:
            lines = [
                ", ".join(f"{name} {cell}" for name, cell in zip(head[1:], row[1:], strict=True)) for row in listed
            ]
            return Group(*(self.paragraph(f"{row[0]}: {line}") for row, line in zip(listed, lines, strict=True)))
        table = Table(box=None, pad_edge=False, padding=(0, 0, 0, 1), show_edge=False)
        table.add_column(Text(self.letters(head[0])), width=first)
        for name in head[1:]:
            words_in_it = name in ("direction", "set by")
            table.add_column(Text(self.letters(name)), justify="left" if words_in_it else "right", min_width=6)
        for row in listed:
            table.add_row(*(self.letters(cell) for cell in row))
        return Padding(table, (0, 0, 1, 0))

    def figures(self, points: Sequence[OperatingPointRecord]) -> Iterator[RenderableType]:
        """Yield the table of figures, so many transmissions beside each other as the width holds."""
        yield from self.heading("Figures: likely, below it from least to most")
        aside = max(1, min(_ASIDE, (self.width - _LABEL) // 13))
        for start in range(0, len(points), aside):
            yield self._table(points[start : start + aside])
        reasons = dict.fromkeys(
            f"{row.label.split(',')[0]}: {figure.why}."
            for row in telling.rows(points)
            for point in points
            if (figure := point.figures[row.figure]).why
        )
        if reasons:
            yield from self.heading("Not known, or known at one end only")
            for reason in reasons:
                yield self.paragraph(reason)

    def _table(self, points: Sequence[OperatingPointRecord]) -> RenderableType:
        table = Table(box=None, pad_edge=False, padding=(0, 0, 0, 1), show_edge=False)
        table.add_column("", width=_LABEL)
        for point in points:
            name = "\n".join(dict.fromkeys((words.short(point.name), words.frequency(point.frequency))))
            table.add_column(Text(self.letters(name)), justify="right", width=12)
        table.add_row("Power at the key, W PEP", *(f"{point.power:.6g}" for point in points))
        table.add_row("Clear up to, W PEP", *(self._clear_to(point) for point in points))
        for row in telling.rows(points):
            cells = [self._cell(point.figures[row.figure], row) for point in points]
            table.add_row(self.letters(row.label), *cells)
        return Padding(table, (0, 0, 1, 0))

    def _clear_to(self, point: OperatingPointRecord) -> str:
        made = point.power_ceiling
        if made.value is None:
            return "unproven"
        return f"{'' if made.complete else 'at most '}{words.floor_two_digits(made.value)}"

    def _cell(self, figure: FigureRecord, row: telling.Row) -> str:
        spread = Spread(figure.low, figure.likely, figure.high)
        if not spread.known:
            return "not known"
        likely = "?" if spread.likely is None else words.number(spread.likely, row.si, row.unit)
        ends = words.ends(spread, row.si, row.unit).strip("()").replace("at most", "up to").replace("at least", "from")
        return self.letters(f"{likely}\n{ends}" if ends else likely)

    def feeding(self, sheet: Sheet) -> Iterator[RenderableType]:
        """Yield what matches the loop to its line; nothing where there is nothing to say."""
        told = feed.feed(sheet)
        if told is None:
            return
        yield from self.heading(feed.HEADING)
        yield from (self.paragraph(sentence) for sentence in told.sentences)
        if told.rows:
            yield self.grid(told.head, told.rows, feed.LABEL)
        yield from (self.paragraph(note, "dim") for note in told.notes)

    def patterns(self, points: Sequence[OperatingPointRecord]) -> Iterator[RenderableType]:
        """Yield where the power of each transmission goes; nothing where that is not known."""
        shown = [(point, point.pattern) for point in points if point.pattern is not None]
        if shown:
            yield from self.heading(sky.PATTERN_HEADING)
        bases = dict.fromkeys(sky.basis(pattern) for _, pattern in shown)
        if len(bases) == 1:
            yield self.paragraph(next(iter(bases)))
        for point, pattern in shown:
            yield Text("")
            yield self.paragraph(f"{telling.use(point)}. {sky.scale(pattern)}")
            if len(bases) > 1:
                yield self.paragraph(sky.basis(pattern))
            yield Text(self.letters("\n".join(sky.bars(pattern, self.width))), no_wrap=True)
            yield from (self.paragraph(sentence) for sentence in sky.sentences(point))

    def placings(self, points: Sequence[OperatingPointRecord]) -> Iterator[RenderableType]:
        """Yield what height and plane do to each transmission; nothing where that is not known."""
        shown = [point for point in points if point.placings]
        if shown:
            yield from self.heading(sky.PLACINGS_HEADING)
            yield self.paragraph(sky.PLACING_NOTE)
        for number, point in enumerate(shown):
            if self.width < _TABLE or number == 0:
                yield Text("")
            if self.width < _TABLE:
                yield self.paragraph(telling.use(point))
                yield from (self.paragraph(text, indent=2) for text in sky.placing_sentences(point.placings))
            else:
                head = (words.short(point.name, sky.PLACING_LABEL), *sky.placing_head(point.placings))
                yield self.grid(head, sky.placing_rows(point.placings), sky.PLACING_LABEL)

    def measure_first(self, sheet: Sheet) -> Iterator[RenderableType]:
        """Yield which uncertain input to measure first; nothing where none is worth it."""
        if sheet.measure_first is not None:
            yield Text("")
            yield self.paragraph(sheet.measure_first)

    def derations(self, records: Sequence[DeratingRecord]) -> Iterator[RenderableType]:
        """Yield the table of derations; nothing where nothing was taken off."""
        if records:
            yield from self.heading(deratings.HEADING)
        for factor, text in deratings.rows(records):
            lines = wrap(self.letters(text), self.width - _FACTOR, break_on_hyphens=False)
            body = f"\n{' ' * _FACTOR}".join(lines)
            yield Text(f"{factor.rjust(_FACTOR - 2)}  {body}", no_wrap=True)

    def list_of(self, title: str, sentences: Sequence[str]) -> Iterator[RenderableType]:
        """Yield a heading and sentences, each a paragraph with a hanging mark."""
        yield from self.heading(title)
        for sentence in sentences:
            lines = wrap(self.letters(sentence), self.width - 2, break_on_hyphens=False)
            yield Text("\n".join(f"{'- ' if i == 0 else '  '}{line}" for i, line in enumerate(lines)), no_wrap=True)


def _is_among_places(finding: Finding) -> bool:
    """Return whether the list of places tells it: that of a rule for a place, and not a reading there."""
    return finding.place is not None and not finding.id.startswith("exposure.probe.")


def _title(told: telling.Told) -> str:
    where = f" ({', '.join(told.transmissions)})" if told.transmissions else ""
    if told.finding.place is None:
        return f"{told.finding.id}{where}"
    rule = told.finding.id.rsplit(".", 1)[0]
    return f"{rule}, {words.short(told.finding.place)}{where}"
