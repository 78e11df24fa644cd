"""Answers that wait for the rest: kept beside the file that they will become, all of them or none."""

import json
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from magsafe.cli.saving import save
from magsafe.design.quantities import printable
from magsafe.design.questions import Answer
from magsafe.errors import CommandError

SCHEMA = "magsafe.draft/1"
ENDING = ".draft"
LARGEST = 4_000_000  # bytes; a draft has some kB


@dataclass(slots=True)
class Unfinished:
    """Answers by key, in the order in which they were given; `earlier` are those that were taken back."""

    answers: dict[str, Answer] = field(default_factory=dict)
    earlier: dict[str, Answer] = field(default_factory=dict)


def beside(target: Path) -> Path:
    """Return where the answers for a file wait."""
    return target.with_name(target.name + ENDING)


def keep(target: Path, unfinished: Unfinished) -> None:
    """Write the answers for a file that is not finished; CommandError where that cannot be."""
    made = {"schema": SCHEMA, "answers": _rows(unfinished.answers), "earlier": _rows(unfinished.earlier)}
    save("-o", beside(target), json.dumps(made, indent=1).encode("utf-8"), replace=True)


def _rows(answers: Mapping[str, Answer]) -> list[list[Any]]:
    return [[key, answer.text, answer.default] for key, answer in answers.items()]


def kept(target: Path) -> Unfinished | None:
    """Return the answers that wait for a file; None where there are none.

    Raises
    ------
    CommandError : a file of that name is there, and it is something else
    """
    path = beside(target)
    try:
        with path.open("rb") as file:
            data = file.read(LARGEST + 1)
        if len(data) > LARGEST:
            raise _strange(path, "more than 4 MB")
        made = json.loads(data)
        if made["schema"] != SCHEMA:
            raise _strange(path, "no unfinished design")
        return Unfinished(_answers(made["answers"]), _answers(made["earlier"]))
    except FileNotFoundError:
        return None
    except OSError as error:
        raise _strange(path, error.strerror or str(error)) from None
    except (ValueError, TypeError, KeyError, RecursionError):
        raise _strange(path, "no unfinished design") from None


def _answers(rows: Any) -> dict[str, Answer]:
    answers = {}
    for key, text, default in rows:
        if not (isinstance(key, str) and (text is None or isinstance(text, str)) and isinstance(default, bool)):
            raise TypeError
        answers[key] = Answer(text, default)
    return answers


def _strange(path: Path, found: str) -> CommandError:
    return CommandError(
        "-o",
        f"{printable(str(path))}: {found}",
        "the unfinished answers that this command keeps under that name, or nothing",
        "move that file away, or name another file with -o",
    )
