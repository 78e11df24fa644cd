"""How a draft speaks: a question with what may be answered, what is wrong with an answer, figures on the way."""

from collections.abc import Iterator, Sequence
from shlex import quote
from textwrap import wrap

from rich.console import Console, RenderableType
from rich.text import Text

from magsafe import words
from magsafe.analysis.figures import Figure
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.checks.sheet import Sheet
from magsafe.design.model import Capacitor
from magsafe.design.quantities import printable
from magsafe.design.questions import UNKNOWN, Answer, Question, Step, sections
from magsafe.errors import Problem
from magsafe.reports import telling
from magsafe.reports.terminal import Speaker, is_plain, put

LONGEST_SHOWN = 50  # characters of an answer
_LABEL = 22
_SAID = 13  # columns for a verdict's mark

HELP = "One question after another makes a design file. At any of them:"
STEERING_WORDS = (
    ("?", "explains it: what it means, where to measure, why it matters"),
    ("Enter", "takes what is offered"),
    ("back", "goes one question back"),
    ("unknown", "leaves a thing out, where that is offered"),
    ("leave", "stops here and keeps the answers; Ctrl-C and Ctrl-D do the same"),
)
HOW_TO_WRITE = 'Sizes need their unit: 22 mm, 7.1 MHz, 100 W. A name like one of these words goes in quotes: "back".'

_LOOP = (
    ("Perimeter", "perimeter_in_wavelengths", "1", "", "wavelengths"),
    ("Inductance", "inductance", "H", "µH", ""),
    ("Tuning capacitance", "tuning_capacitance", "F", "pF", ""),
    ("Radiation resistance", "radiation_resistance", "ohm", "mΩ", "in free space"),
)


class Teller:
    """Prints a draft's side of the conversation on a console."""

    def __init__(self, console: Console) -> None:
        self.console = console
        self.say = Speaker(console.width, is_plain(console))
        self.section = 0
        self.round: int | None = None

    def lines(self, *texts: str, style: str = "", indent: int = 0) -> None:
        """Print texts, each a paragraph of its own."""
        self.put([self.say.paragraph(text, style, indent) for text in texts])

    def command(self, before: str, *words_of_it: str) -> None:
        """Print a command on a line of its own, to be copied: whole, however long it is."""
        typed = " ".join(quote(printable(word)) for word in words_of_it)
        self.lines(before)
        self.console.print(Text(f"  {typed}"), soft_wrap=True)

    def put(self, parts: Sequence[RenderableType]) -> None:
        """Print parts, nothing where there are none."""
        if parts:
            put(self.console, *parts)

    def welcome(self) -> None:
        """Tell how to answer."""
        self.lines(HELP)
        self.put([self._beside(f"  {word.ljust(9)}", meaning) for word, meaning in STEERING_WORDS])
        self.lines(HOW_TO_WRITE)

    def _beside(self, label: str, text: str) -> RenderableType:
        """Return a text with a label before it, its further lines as far in as the first."""
        lines = wrap(self.say.letters(text), self.say.width - len(label), break_on_hyphens=False)
        return Text(self.say.letters(label) + f"\n{' ' * len(label)}".join(lines), no_wrap=True)

    def question(self, step: Step, earlier: Answer | None) -> None:
        """Print a question, under a heading where a section begins, with its options and what Enter takes."""
        question = step.question
        if step.number != self.section:
            self.put(list(self.say.heading(f"{step.section} ({step.number} of {len(sections())})")))
        elif step.round is not None and step.round != self.round and question.written:
            self.put(list(self.say.heading(_round(step))))
        self.section = step.number
        self.round = step.round if question.written or step.round is None else self.round
        self.put([Text(""), *self._asked(question), *self._offers(question, earlier)])

    def _asked(self, question: Question) -> Iterator[RenderableType]:
        yield self.say.paragraph(question.ask)
        width = max((len(option.value) for option in question.options), default=0)
        for number, option in enumerate(question.options, 1):
            label = f"  {number:>2} {option.value.ljust(width if option.note else 0)}"
            yield self._beside(f"{label}  ", option.note) if option.note else Text(self.say.letters(label))
        if question.form == "yes":
            yield self.say.paragraph("yes or no", indent=2)
        if question.example:
            yield self.say.paragraph(f"such as {question.example}", indent=2)

    def _offers(self, question: Question, earlier: Answer | None) -> Iterator[RenderableType]:
        if earlier is not None:
            yield self.say.paragraph(f"Enter takes {_shown(earlier.text)}, your earlier answer.", indent=2)
        elif question.default == UNKNOWN:
            yield self.say.paragraph(f"Enter leaves it out, because {question.because}.", indent=2)
        elif question.default:
            yield self.say.paragraph(f"Enter takes {question.default}, because {question.because}.", indent=2)
        if question.unknown and (earlier is not None or question.default != UNKNOWN):
            yield self._beside("  ", f"{UNKNOWN} leaves it out: {question.unknown}.")

    def explain(self, question: Question) -> None:
        """Print what a question means."""
        self.lines(question.explain, indent=2)
        if question.written:
            self.lines(f"In the file it is {question.key}.", indent=2)

    def taken(self, question: Question, answer: Answer, typed: str) -> None:
        """Print how an answer was understood, where that is not what was typed."""
        if answer.text is None:
            self.lines(f"Left out: {question.unknown}.", indent=2)
        elif answer.text != typed.strip():
            self.lines(f"= {_shown(answer.text)}", indent=2)

    def wrong(self, problems: Sequence[Problem], asked: str = "") -> None:
        """Print what is wrong, as the reader of design files says it."""
        for problem in problems:
            if problem.key and problem.key != asked:
                self.lines(problem.key, indent=2)
            for label, text in (("found", problem.found), ("expected", problem.expected), ("do", problem.do)):
                self.put([self._beside(f"    {label.ljust(10)}", text)])

    # Figures -----------------------------------------------------------------------------------------------

    def loop(self, point: OperatingPoint) -> None:
        """Print what shape, conductor and frequency tell."""
        self.put(list(self.say.heading(f"So far, at {words.frequency(point.transmission.frequency)}")))
        for label, name, si, unit, after in _LOOP:
            figure: Figure = getattr(point.figures, name)
            self._row(label, _told(figure, si, unit, after))
        self._doubts(point)

    def capacitor(self, titles: Sequence[str], points: Sequence[OperatingPoint], part: Capacitor) -> None:
        """Print the volts and amps that capacitor and power make, beside what the capacitor is rated for."""
        for title, point in zip(titles, points, strict=True):
            told = dict.fromkeys((words.short(printable(title)), words.frequency(point.transmission.frequency)))
            self.put(list(self.say.heading(f"At the capacitor, {', '.join(told)}, {words.watts(point.power)} PEP")))
            figures = point.figures
            kind = f" {part.rated_voltage_kind or ', of a kind that is not known'}".replace(" ,", ",")
            self._row("Voltage", _worst(figures.capacitor_peak_voltage, "V", "peak", part.rated_voltage, kind))
            self._row("Current", _worst(figures.capacitor_rms_current, "A", "RMS", part.rated_current, " RMS"))
            self._doubts(point)
        self.lines("Margins, gap, heat and people are counted at the end, and by magsafe check.", indent=2)

    def _row(self, label: str, text: str) -> None:
        self.put([self._beside(f"  {self.say.letters(label).ljust(_LABEL)}", text)])

    def _doubts(self, point: OperatingPoint) -> None:
        for reason in point.out_of_range:
            self.lines(f"Not computed: {reason}.", indent=2)

    def verdict(self, sheet: Sheet) -> None:
        """Print the verdict and the highest power."""
        self.put(
            [
                Text(""),
                self.say.item(sheet.verdict, telling.headline(sheet), bold=True),
                self.say.paragraph(telling.ceiling(sheet, sheet.power_ceiling), indent=_SAID),
            ]
        )


def _round(step: Step) -> str:
    """Return what a round of a repeated section is called: `Place 2`."""
    *_, name = sections()[step.number - 1].each.split(".")
    return f"{name.capitalize()} {(step.round or 0) + 1}"


def _shown(text: str | None) -> str:
    return UNKNOWN if text is None else words.short(printable(text), LONGEST_SHOWN)


def _told(figure: Figure, si: str, unit: str, after: str) -> str:
    """Return a figure with its spread: `192 pF (188 ... 197)`."""
    spread = figure.spread
    if spread.likely is None:
        return "not known"
    tail = " ".join(filter(None, (unit, after)))
    return " ".join(filter(None, (words.number(spread.likely, si, unit), tail, words.ends(spread, si, unit))))


def _worst(figure: Figure, si: str, qualifier: str, rated: float | None, kind: str) -> str:
    """Return a figure with its dangerous end first, and the rating beside it."""
    spread = figure.spread
    if spread.high is None:
        said = f"not known{f': {figure.why}' if figure.why else ''}"
    else:
        said = f"{words.amount(spread.high, si, qualifier=qualifier)} at worst"
        if spread.likely is not None:
            said = f"{said}, {words.number(spread.likely, si, words.shown_unit(si))} likely"
    return f"{said}; " + ("no rating is stated" if rated is None else f"rated {words.amount(rated, si)}{kind}")
