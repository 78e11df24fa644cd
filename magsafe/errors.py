"""What can go wrong with what the user gave, in one family and with one face.

Every message tells place, found, expected and what to do. Anything else that is raised is a fault of the
program and leaves with exit status 70.
"""

from collections.abc import Sequence
from dataclasses import dataclass


class MagsafeError(Exception):
    """Something the user can put right."""


@dataclass(frozen=True, slots=True)
class Problem:
    """One thing wrong in a design file.

    `key` is the path as it is written in messages (`transmission[1].power`, the second block in file order);
    `line` counts from 1 and is None where the file has no such place.
    """

    key: str
    found: str
    expected: str
    do: str
    line: int | None = None

    def text(self, file: str) -> str:
        """Return the message in four lines, for a terminal."""
        place = f"{file}:{self.line}" if self.line else file
        head = f"{place}  {self.key}" if self.key else place
        return f"{head}\n  found     {self.found}\n  expected  {self.expected}\n  do        {self.do}"


class DesignError(MagsafeError):
    """A design file that cannot be used: all its problems, in file order."""

    def __init__(self, file: str, problems: Sequence[Problem]) -> None:
        self.file = file
        self.problems = tuple(sorted(problems, key=lambda p: p.line or 0))
        super().__init__(self.text())

    def text(self, most: int = 50) -> str:
        """Return every problem, `most` of them in full, and how many there are."""
        shown = [problem.text(self.file) for problem in self.problems[:most]]
        count = len(self.problems)
        rest = "" if count <= most else f" ({count - most} more are not shown)"
        shown.append(f"{count} problem{'s' if count != 1 else ''} in {self.file}{rest}.")
        return "\n\n".join(shown)


class CommandError(MagsafeError):
    """A command that could not be carried out: found, expected, do."""

    def __init__(self, place: str, found: str, expected: str, do: str) -> None:
        self.problem = Problem(place, found, expected, do)
        super().__init__(self.problem.text("magsafe"))
