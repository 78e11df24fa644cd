"""The conversation of a draft: asks, listens, and goes on or back as the answers have it."""

from collections.abc import Callable, Sequence
from dataclasses import replace
from pathlib import Path

from magsafe.analysis.operating_point import operating_point, operating_points
from magsafe.cli.unfinished import Unfinished
from magsafe.design.answers import entries_of, problems_of, refused, sound, spelled, without
from magsafe.design.model import Design
from magsafe.design.questions import STEERING, UNKNOWN, Answer, Question, Step, walk
from magsafe.design.reading import parse_design
from magsafe.design.writing import Entry, design_text
from magsafe.errors import CommandError, DesignError, Problem
from magsafe.reports.draft import Teller

LONGEST_NAME = 60  # letters of a file's name that is offered

Listen = Callable[[], str]

_STATION = "station.name"
_FILE = Question(
    f"{STEERING}file",
    "What shall the design file be called?",
    "The file that is written at the end, in this folder or another one. One that exists is not replaced.",
    "text",
    example="quay_rail.toml",
)
_LAST = Question(
    f"{STEERING}write",
    "All is asked. Write the file?",
    "What was answered is written as a design file, and then checked. Nothing exists under its name before that.",
    "yes",
    default="yes",
    because="the reader of design files accepts it",
)
# What stands for the rest of a loop that is known by its shape, conductor and frequency alone.
_NO_CAPACITOR = (
    Entry(("capacitor", "kind"), "vacuum variable"),
    Entry(("transmission", 0, "power"), "1 W"),
)


class Left(Exception):
    """Somebody wants to go on another time."""


class Back(Exception):
    """Somebody wants the question before."""


class Conversation:
    """Questions and answers about one design.

    Parameters
    ----------
    listen : returns what is typed
    teller : prints
    keep : is told of every answer; None as long as there is no file to keep them beside
    """

    def __init__(self, listen: Listen, teller: Teller, keep: Callable[[Unfinished], None] | None = None) -> None:
        self.listen = listen
        self.teller = teller
        self.keep = keep or _keep_nothing
        self.state = Unfinished()
        self.name = "the answers"

    def take_up(self, state: Unfinished) -> int:
        """Go on from answers of another day; return how many of them still do."""
        self.state = Unfinished(sound(state.answers, self.name), dict(state.earlier))
        return len(walk(self.state.answers)[0])

    def run(self) -> tuple[Entry, ...]:
        """Ask until a whole design is told that the file's reader accepts; return its keys.

        Raises
        ------
        Left : somebody wants to go on another time
        """
        while True:
            steps, following = walk(self.state.answers)
            if following is None:
                entries = self._agreed(steps)
                if entries is not None:
                    return entries
                continue
            self.one(following)

    def one(self, step: Step) -> None:
        """Ask one question, and go on or back."""
        try:
            answer = self._ask(step)
        except Back:
            self._back()
            return
        self._take(step.question, answer)
        if step.question.tell:
            self._tell(step.question)

    def file(self, fits: Callable[[str], object]) -> str:
        """Ask for the station and then for the file's name, until one will do.

        Parameters
        ----------
        fits : raises CommandError where a file of that name cannot be written
        """
        while True:
            _, following = walk(self.state.answers)
            if following is not None and following.question.key == _STATION:
                self.one(following)
                continue
            try:
                return self._file(_named(self.state.answers[_STATION].text), fits)
            except Back:
                self._back()

    def _file(self, question: Question, fits: Callable[[str], object]) -> str:
        self.teller.question(Step(question, "", self.teller.section), None)
        while True:
            answer = self._understood(question, self._heard(question), None)
            if isinstance(answer, Problem):
                self.teller.wrong([answer], question.key)
                continue
            name = answer.text or ""
            try:
                fits(name)
            except CommandError as error:
                self.teller.wrong([error.problem], error.problem.key)
                continue
            return name

    def _ask(self, step: Step) -> Answer:
        question = step.question
        earlier = self.state.earlier.get(question.key)
        self.teller.question(step, earlier)
        while True:
            typed = self._heard(question)
            answer = self._understood(question, typed, earlier)
            if isinstance(answer, Problem):
                self.teller.wrong([answer], question.key)
                continue
            problems = refused(question, answer, self.state.answers, self.name)
            if not problems:
                self.teller.taken(question, answer, typed)
                return answer
            self.teller.wrong(problems, question.key)

    def _heard(self, question: Question) -> str:
        """Return what was typed, when it is none of the words that steer."""
        while True:
            try:
                typed = self.listen()
            except UnicodeDecodeError:
                self.teller.lines("That came in letters that this terminal does not speak; type it again.", indent=2)
                continue
            match typed.strip().casefold():
                case "?":
                    self.teller.explain(question)
                case "leave":
                    raise Left
                case "back":
                    raise Back
                case _:
                    return typed

    def _understood(self, question: Question, typed: str, earlier: Answer | None) -> Answer | Problem:
        said = typed.strip()
        if not said and earlier is not None:
            return earlier
        by_default = not said and bool(question.default)
        said = question.default if by_default else said
        if not said:
            return Problem(question.key, "nothing", "an answer", _instead(question))
        if said.casefold() == UNKNOWN:
            if not question.unknown:
                return Problem(question.key, UNKNOWN, "an answer: nothing is computed without it", _instead(question))
            return Answer(None, by_default)
        answer = spelled(question, said)
        return Answer(answer.text, by_default) if isinstance(answer, Answer) else answer

    def _take(self, question: Question, answer: Answer) -> None:
        self.state.answers.pop(question.key, None)
        self.state.earlier.pop(question.key, None)
        self.state.answers[question.key] = answer
        self.keep(self.state)

    def _back(self) -> None:
        """Take the last answer back, and offer it when its question comes again."""
        walked = {step.question.key for step in walk(self.state.answers)[0]}
        last = next((key for key in reversed(self.state.answers) if key in walked), None)
        if last is None:
            self.teller.lines("There is nothing before this question.", indent=2)
            return
        self.state.earlier[last] = self.state.answers.pop(last)
        self.keep(self.state)

    def _agreed(self, steps: Sequence[Step]) -> tuple[Entry, ...] | None:
        """Return the keys of the file; None where something does not fit together, or somebody goes back."""
        entries = entries_of(steps, self.state.answers)
        problems = problems_of(entries, self.name, whole=True)
        if problems:
            self.teller.lines("All is asked, but it does not fit together yet:")
            self.teller.wrong(problems)
            fewer = without([problem.key for problem in problems], self.state.answers)
            if len(fewer) == len(self.state.answers):
                self._back()
            self.state.earlier |= {key: value for key, value in self.state.answers.items() if key not in fewer}
            self.state.answers = {key: value for key, value in self.state.answers.items() if key in fewer}
            return None
        try:
            agreed = self._ask(Step(_LAST, "", self.teller.section))
        except Back:
            self._back()
            return None
        if agreed.text != "yes":
            raise Left
        return entries

    # Figures -----------------------------------------------------------------------------------------------

    def _tell(self, question: Question) -> None:
        """Tell the figures that are known now."""
        entries = entries_of(walk(self.state.answers)[0], self.state.answers)
        if question.tell == "loop":
            used = Entry(("transmission", 0, "frequency"), self.state.answers[question.key].text)
            kept = [entry for entry in entries if entry.path[0] in ("schema", "loop", "site")]
            design = self._design([*kept, used, *_NO_CAPACITOR])
            if design is not None:
                self.teller.loop(operating_point(design, design.transmission[0]))
            return
        design = self._design(entries)
        if design is not None:
            self.teller.capacitor(design.titles, operating_points(design), design.capacitor)

    def _design(self, entries: Sequence[Entry]) -> Design | None:
        """Return what is known so far as a design; None where that is none yet."""
        try:
            return parse_design(design_text(entries).encode(), self.name)
        except DesignError:
            return None


def _keep_nothing(_: Unfinished) -> None:
    """Keep nothing."""


def _instead(question: Question) -> str:
    """Return what may be answered."""
    such = f"type one, such as {question.example}" if question.example else "type one"
    such = "type one of them, or its number" if question.options and question.form == "choice" else such
    such = "type yes or no" if question.form == "yes" else such
    return f"{such}, or unknown, or ?" if question.unknown else f"{such}, or ? for what it means"


def _named(station: str | None) -> Question:
    """Return the question for the file's name, with the name that a station gives it."""
    plain = "".join(letter if letter.isascii() and letter.isalnum() else " " for letter in (station or "").casefold())
    name = "_".join(plain.split())[:LONGEST_NAME]
    why = "the station is called so" if name else "the station gives it no name"
    return replace(_FILE, default=f"{name or 'loop'}.toml", because=why)


def head(target: Path) -> tuple[str, ...]:
    """Return what a drafted file says at its top, with the schema for an editor if that lies beside it."""
    schema = "design.schema.json"
    known = target.with_name(schema).is_file()
    hint = f"An editor learns the keys with: magsafe schema design > {schema}, and #:schema ./{schema} as first line."
    return (
        *([f":schema ./{schema}"] if known else []),
        "A design from questions and answers. Change it as you like; magsafe check names all that does not fit.",
        "At their defaults: [margins], loop.conductor.temperature. Not asked: capacitor.with (padding), [[probe]],",
        "site.over_the_body, a soil by its constants.",
        *([] if known else [hint]),
    )
