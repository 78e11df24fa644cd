"""What several commands share: the design argument, reading it, printing, exit status."""

import os
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

if TYPE_CHECKING:
    from magsafe.checks.sheet import Verdict
    from magsafe.design.model import Design

DesignPath = Annotated[str, typer.Argument(metavar="DESIGN", help="The design file (TOML), or - for standard input.")]
AsJson = Annotated[bool, typer.Option("--json", help="Print the machine form on standard output.")]
Strict = Annotated[bool, typer.Option("--strict", help="Leave with 4 where the verdict is narrow.")]


def load(design: str) -> "Design":
    """Read the design that a command was given."""
    from magsafe.design.reading import LARGEST_FILE, parse_design, read_design  # noqa: PLC0415

    if design != "-":
        return read_design(Path(design))
    data = b"" if sys.stdin is None else sys.stdin.buffer.read(LARGEST_FILE + 1)
    return parse_design(data)


def write(text: str) -> None:
    """Write a text for machines to standard output: UTF-8, whatever the terminal speaks."""
    with reader_may_leave():
        if sys.stdout is not None:
            sys.stdout.buffer.write(text.encode("utf-8") + (b"" if text.endswith("\n") else b"\n"))


@contextmanager
def reader_may_leave() -> Iterator[None]:
    """Print and flush; a reader that closes early, as `head` does, changes nothing about the exit status."""
    try:
        yield
        if sys.stdout is not None:
            sys.stdout.flush()
    except BrokenPipeError:
        # What is left in the buffer must go somewhere when the interpreter closes it.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


def exit_status(verdict: "Verdict", strict: bool = False) -> int:
    """Return the exit status of a verdict."""
    return {"clear": 0, "narrow": 4 if strict else 0, "stop": 1, "unproven": 3}[verdict]
