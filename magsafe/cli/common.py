"""What several commands share: the design argument, reading it, printing, exit status."""

import sys
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

    if design == "-":
        return parse_design(sys.stdin.buffer.read(LARGEST_FILE + 1))
    return read_design(Path(design))


def write(text: str) -> None:
    """Write a text to standard output as it is."""
    sys.stdout.write(text if text.endswith("\n") else f"{text}\n")


def exit_status(verdict: "Verdict", strict: bool = False) -> int:
    """Return the exit status of a verdict."""
    return {"clear": 0, "narrow": 4 if strict else 0, "stop": 1, "unproven": 3}[verdict]
