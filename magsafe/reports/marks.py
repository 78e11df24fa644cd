"""Verdict marks: word first, shape second, colour third; any one of them is enough alone."""

from dataclasses import dataclass

from magsafe.checks.sheet import Verdict


@dataclass(frozen=True, slots=True)
class Mark:
    """How one verdict looks; the colours are those of Okabe and Ito."""

    shape: str
    colour: str


MARKS: dict[Verdict, Mark] = {
    "stop": Mark("■", "#D55E00"),
    "unproven": Mark("◆", "#CC79A7"),
    "narrow": Mark("▲", "#E69F00"),
    "clear": Mark("●", "#009E73"),
}
