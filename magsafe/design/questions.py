"""What a design is asked for, in which order: rows of a table, and the walk through them that answers decide.

The walk is a function of the answers alone: taking one back, or coming again another day, needs nothing else.
"""

import tomllib
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import cache
from importlib.resources import files
from itertools import count
from typing import Any, Literal

from magsafe.design import tables, warmth_tables

Form = Literal["text", "quantity", "choice", "whole", "yes", "spread", "list", "corners"]

STEERING = "ask "  # keys that begin with it are no keys of the file
UNKNOWN = "unknown"  # the answer that leaves a key out
ANY = "[any]"
WORKED_IN_TURN = "ask worked in turn"


@dataclass(frozen=True, slots=True)
class Option:
    """A value that may be chosen, what it means, and whether the file can hold it."""

    value: str
    note: str = ""
    written: bool = True


@dataclass(frozen=True, slots=True)
class Question:
    """A row of the table; the rows' meaning stands at its head."""

    key: str
    ask: str
    explain: str
    form: Form
    comment: str = ""
    options: tuple[Option, ...] = ()
    example: str = ""
    default: str = ""
    because: str = ""
    unknown: str = ""
    when: tuple[tuple[str, tuple[str, ...]], ...] = ()
    tell: Literal["", "loop", "capacitor"] = ""

    @property
    def written(self) -> bool:
        """Whether its answer stands in the file."""
        return not self.key.startswith(STEERING)


@dataclass(frozen=True, slots=True)
class Section:
    """Questions of one subject; with `each` they come again and again, `more` asks whether."""

    title: str
    questions: tuple[Question, ...]
    each: str = ""
    least: int = 0
    first: Question | None = None
    more: Question | None = None


@dataclass(frozen=True, slots=True)
class Answer:
    """What was answered, as its question spells it; `text` is None for unknown, `default` where Enter took it."""

    text: str | None
    default: bool = False


@dataclass(frozen=True, slots=True)
class Step:
    """A question of the walk: its section, the number of that from 1, the round of a repeated one from 0."""

    question: Question
    section: str
    number: int
    round: int | None = None


Answers = Mapping[str, Answer]


@cache
def sections() -> tuple[Section, ...]:
    """Return the table of questions."""
    text = files("magsafe.design").joinpath("questions.toml").read_text(encoding="utf-8")
    return tuple(_section(row) for row in tomllib.loads(text)["section"])


def _section(row: dict[str, Any]) -> Section:
    asked = tuple(_question(each) for each in row["question"])
    each = row.get("each", "")
    if not each:
        return Section(row["title"], asked)
    more = Question(
        f"{STEERING}another {each}[]",
        row["more"],
        row["explain"],
        "yes",
        default="no",
        because="all of them are told",
    )
    first = None if row.get("least") else replace(more, ask=row["ask"], default=row["default"], because=row["because"])
    return Section(row["title"], asked, each, row.get("least", 0), first, more)


def _rules() -> Sequence[Option]:
    from magsafe.rules.limit import load_rule, rule_names  # noqa: PLC0415  (only where somebody is asked)

    return [Option(name, load_rule(name).title) for name in rule_names()]


_TABLES: dict[str, Callable[[], Sequence[Option]]] = {
    "materials": lambda: [Option(name) for name in tables.materials()],
    "soils": lambda: [Option(name) for name in tables.soils()],
    "plastics": lambda: [Option(name) for name in warmth_tables.plastics()],
    "dielectrics": lambda: [Option(name) for name in warmth_tables.dielectrics()],
    "rules": _rules,
}


def _question(row: dict[str, Any]) -> Question:
    table = _TABLES[row["from"]]() if "from" in row else ()
    own = [Option(value, note, not rest) for value, note, *rest in row.get("options", ())]
    given = {key: value for key, value in row.items() if key not in ("from", "options", "when")}
    when = tuple((key, tuple(values)) for key, values in row.get("when", {}).items())
    return Question(**given, options=(*table, *own), when=when)


# The walk --------------------------------------------------------------------------------------------------


def walk(answers: Answers) -> tuple[tuple[Step, ...], Step | None]:
    """Return the questions that are answered, and the one that comes next.

    Parameters
    ----------
    answers : by key; those to questions that do not come are passed over

    Returns
    -------
    the answered steps in order, and the first that is open; None where all is answered
    """
    done: list[Step] = []
    for step in _steps(answers):
        if step.question.key not in answers:
            return tuple(done), step
        done.append(step)
    return tuple(done), None


def _steps(answers: Answers) -> Iterator[Step]:
    """Yield the questions that come; whoever asks for more than is answered must stop at the first open one."""
    known: dict[str, Answer] = {}  # what was answered on this walk: others may be left from another one
    for number, section in enumerate(sections(), 1):
        for index in _rounds(section):
            if index is not None and (asked := _another(section, index)) is not None:
                yield Step(asked, section.title, number, index)
                if answers[asked.key].text != "yes":
                    break
            for row in section.questions:
                question = row if index is None else _in_round(row, index)
                if applies(question, known):
                    yield Step(question, section.title, number, index)
                    known[question.key] = answers[question.key]


def _rounds(section: Section) -> Iterator[int | None]:
    """Yield the numbers of a section's rounds: of a repeated one without end."""
    if section.each:
        yield from count()
    yield None


def _another(section: Section, index: int) -> Question | None:
    """Return the question whether there is one more round; None where there must be one."""
    asked = section.first if index == 0 else section.more
    return None if asked is None or index < section.least else _in_round(asked, index)


def _in_round(question: Question, index: int) -> Question:
    """Return a question of a repeated section with the number of its round."""
    when = tuple((key.replace("[]", f"[{index}]"), values) for key, values in question.when)
    return replace(question, key=question.key.replace("[]", f"[{index}]"), when=when)


def applies(question: Question, answers: Answers) -> bool:
    """Return whether a question comes, as the answers before it stand."""
    return all(_holds(key, values, answers) for key, values in question.when)


def _holds(key: str, values: tuple[str, ...], answers: Answers) -> bool:
    if ANY in key:
        before, _, after = key.partition(ANY)
        keys = [each for each in answers if each.startswith(f"{before}[") and each.endswith(f"]{after}")]
        return any(_holds(each, values, answers) for each in keys)
    found = answers.get(key)
    text = None if found is None else found.text
    refused = [value[1:] for value in values if value.startswith("!")]
    if refused:
        return text not in refused
    return text is not None and ("*" in values or text in values)


def path_of(key: str) -> tuple[str | int, ...]:
    """Return the path of a key as messages write it: `transmission[1].power`."""
    steps: list[str | int] = []
    for part in key.split("."):
        name, _, index = part.partition("[")
        steps.append(name)
        if index:
            steps.append(int(index.rstrip("]")))
    return tuple(steps)
