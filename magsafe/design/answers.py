"""From what somebody types to what stands in a design file, each answer held against the file's own reader."""

import re
from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from magsafe.design.model import SCHEMA, nearest, titles_of
from magsafe.design.quantities import show
from magsafe.design.questions import WORKED_IN_TURN, Answer, Answers, Question, Step, path_of, walk
from magsafe.design.reading import parse_design, written
from magsafe.design.writing import Entry, UnwritableText, design_text, toml_value
from magsafe.errors import DesignError, Problem
from magsafe.units import FREQUENCY, QuantityError, read_quantity

_SCHEMA = Entry(("schema",), SCHEMA, "which form this file has; magsafe schema design prints it")
# Of a file this long the reader does not look for the lines of its problems, which takes most of its time; nobody sees
# the lines of a file that is not written yet.
_NO_LINES = "\n" * 801
_SHAPE, _CORNERS = ("loop", "shape"), ("loop", "points")
_YES = {"yes": "yes", "y": "yes", "true": "yes", "no": "no", "n": "no", "false": "no"}
_NUMBER = re.compile(r"-?[0-9]{1,18}(\.[0-9]{1,18})?")
_MOST_DIGITS = 3  # of the number of an option


def spelled(question: Question, text: str) -> Answer | Problem:
    """Return an answer as its question spells it, or what is wrong with it.

    Parameters
    ----------
    question : what was asked
    text : what was typed
    """
    text = text.strip()
    if question.form == "text":
        return Answer(_unquoted(text))
    if question.form == "yes" or (question.form == "choice" and not question.written):
        return _one_of(question, text)
    if question.form == "choice":
        return Answer(_option(question, text))
    if question.form == "list":
        return Answer(", ".join(_option(question, _unquoted(part.strip())) for part in text.split(",")))
    return Answer(_unquoted(text))


def _one_of(question: Question, text: str) -> Answer | Problem:
    """Return an answer that no reader will ever see, and so is held against its own options."""
    if question.form == "yes":
        found = _YES.get(text.casefold())
        if found is None:
            return Problem(question.key, show(text), "yes or no", "type yes or no")
        return Answer(found)
    known = tuple(option.value for option in question.options)
    chosen = _option(question, text)
    if chosen not in known:
        return Problem(question.key, show(text), f"one of {', '.join(known)}", nearest(text, known))
    return Answer(chosen)


def _option(question: Question, text: str) -> str:
    """Return the option that a number or a word names; the text itself where none does."""
    known = [option.value for option in question.options]
    exact = {value.casefold(): value for value in known}.get(text.casefold())
    if exact is not None:
        return exact
    if text.isascii() and text.isdigit() and len(text) <= _MOST_DIGITS and 1 <= int(text) <= len(known):
        return known[int(text) - 1]
    return _unquoted(text)


def _unquoted(text: str) -> str:
    """Return a text without the quotes that it would have in a file."""
    inside = text[1:-1]
    quoted = len(text) >= 2 and text[0] == text[-1] and text[0] in "\"'" and text[0] not in inside
    return inside if quoted else text


def value_of(question: Question, text: str) -> Any:
    """Return what stands in the file for an answer; None where nothing does.

    What cannot be understood goes to the file's reader as it is, which says what would do.
    """
    value: Any = text
    match question.form:
        case "yes":
            value = text == "yes"
        case "whole":
            value = _plain(text)
        case "choice":
            value = _chosen(question, text)
        case "list":
            value = [] if text.casefold() == "none" else [part.strip() for part in text.split(",")]
        case "spread":
            value = _spread(text)
        case "corners":
            value = [[part.strip() for part in corner.split(",")] for corner in text.split(";") if corner.strip()]
    return value


def _chosen(question: Question, text: str) -> Any:
    if any(option.value == text and not option.written for option in question.options):
        return None
    # Where all options are numbers, so is the value in the file.
    return _plain(text) if all(option.value.isdigit() for option in question.options) else text


def _spread(text: str) -> Any:
    parts = [_plain(part.strip()) for part in text.split(",")]
    # A comma within a number makes another count of parts, and then the reader explains it.
    return dict(zip(("low", "likely", "high"), parts, strict=True)) if len(parts) == 3 else _plain(text)


def _plain(text: str) -> Any:
    """Return a number without a unit as a number, and anything else as it is."""
    if not _NUMBER.fullmatch(text):
        return text
    return float(text) if "." in text else int(text)


# The file --------------------------------------------------------------------------------------------------


def entries_of(steps: Sequence[Step], answers: Answers) -> tuple[Entry, ...]:
    """Return the keys of the file, each with its comment, for the steps that were answered."""
    entries = [_SCHEMA]
    for step in steps:
        question, answer = step.question, answers[step.question.key]
        if question.key == WORKED_IN_TURN and answer.text == "yes":
            entries.append(Entry(("site", "sessions"), [list(_titles(steps, answers))], _comment(question, answer)))
        if not question.written:
            continue
        value = None if answer.text is None else value_of(question, answer.text)
        if value is not None or answer.text is None:
            entries.append(Entry(path_of(question.key), value, _comment(question, answer)))
    return tuple(entries)


def _comment(question: Question, answer: Answer) -> str:
    if answer.text is None:
        return f"not known: {question.unknown}"
    if not (answer.default and question.because):
        return question.comment
    return "; ".join(filter(None, (question.comment, f"default, because {question.because}")))


def _titles(steps: Sequence[Step], answers: Answers) -> tuple[str, ...]:
    """Return what the transmissions are called, as the reader calls them."""
    stated = []
    keys = [step.question.key for step in steps if step.question.key.endswith(".frequency")]
    for key in keys:
        try:
            frequency = read_quantity(answers[key].text, FREQUENCY)
        except QuantityError:
            frequency = 0.0
        name = answers.get(key.removesuffix("frequency") + "name")
        stated.append((None if name is None else name.text, frequency))
    return titles_of(stated)


def problems_of(entries: Sequence[Entry], name: str, *, whole: bool) -> tuple[Problem, ...]:
    """Return what the file's reader says of keys; of a part of a file, what is not missing yet.

    Parameters
    ----------
    entries : the keys so far
    name : what the file is called
    whole : whether all is told, so that what is missing counts
    """
    stated = {entry.path: entry.value for entry in entries}
    if not whole and stated.get(_SHAPE) == "outline" and _CORNERS not in stated:
        # Nothing is to be said of an outline before it has corners.
        entries = [entry for entry in entries if entry.path != _SHAPE]
    try:
        parse_design((design_text(entries) + _NO_LINES).encode(), name)
    except DesignError as error:
        return tuple(each for each in error.problems if whole or each.found != "nothing")
    except UnwritableText:
        return tuple(_unwritable(entries))
    return ()


def _unwritable(entries: Sequence[Entry]) -> Iterator[Problem]:
    for entry in (each for each in entries if each.value is not None):
        try:
            toml_value(entry.value)
        except UnwritableText as error:
            yield Problem(written(entry.path), str(error), "text that a file can hold", "type it in plain letters")


def refused(question: Question, answer: Answer, answers: Answers, name: str) -> tuple[Problem, ...]:
    """Return why an answer does not do beside those before it; empty if it does."""
    if answer.text is None:
        return ()
    tried = {**answers, question.key: answer}
    return problems_of(entries_of(walk(tried)[0], tried), name, whole=False)


def sound(answers: Answers, name: str) -> dict[str, Answer]:
    """Return the answers that still do, of a draft that another version wrote or that somebody has changed."""
    kept = dict(answers)
    while True:
        steps, _ = walk(kept)
        unfit = [step.question.key for step in steps if not _fits(step.question, kept[step.question.key])]
        unfit = unfit or [problem.key for problem in problems_of(entries_of(steps, kept), name, whole=False)]
        fewer = without(unfit, kept)
        if not unfit:
            return kept
        if len(fewer) == len(kept):
            return {}
        kept = fewer


def _fits(question: Question, answer: Answer) -> bool:
    if answer.text is None:
        return bool(question.unknown)
    return isinstance(spelled(question, answer.text), Answer)


def without(keys: Sequence[str], answers: Mapping[str, Answer]) -> dict[str, Answer]:
    """Return the answers but for those that messages about these keys concern."""
    return {key: answer for key, answer in answers.items() if not any(_concerns(key, each) for each in keys)}


def _concerns(key: str, of: str) -> bool:
    """Return whether a message about the key `of` concerns the answer to another: the same, one within, one about."""
    if of.startswith("site.sessions"):
        return key == WORKED_IN_TURN
    return key == of or key.startswith((f"{of}.", f"{of}[")) or of.startswith((f"{key}.", f"{key}["))
