"""Text of any origin made fit to be shown: no controls, nothing that turns the line round, nothing without end."""

import re
from itertools import groupby
from unicodedata import bidirectional, category

LONGEST = 8000  # letters of one text
LONGEST_WORD = 48  # letters without a space between them
_MARKS = 3  # of accents on one letter
_UNSHOWN = ("Cc", "Cf", "Cs", "Co", "Cn")
_ISOLATE, _END = "\u2068", "\u2069"


def fit(text: str, most: int = LONGEST) -> str:
    """Return a text for one line or paragraph: what is too long is cut, with a mark that it is."""
    shown = "".join(_letter(each) for each in text[: 4 * most])
    words = [word if len(word) <= LONGEST_WORD else f"{word[: LONGEST_WORD - 3]}..." for word in shown.split()]
    found = " ".join(words)
    if len(found) > most or len(text) > 4 * most:
        found = f"{found[: most - 3].rstrip()}..."
    return _isolated(_few_marks(found))


def _letter(letter: str) -> str:
    if letter.isspace():
        return " "
    return "\ufffd" if category(letter) in _UNSHOWN else letter


def _few_marks(text: str) -> str:
    """Return a text without the heaps of accents that would run into the lines above and below."""
    return "".join(
        "".join(list(run)[:_MARKS]) if piled else "".join(run)
        for piled, run in groupby(text, lambda each: category(each) in ("Mn", "Me"))
    )


def _isolated(text: str) -> str:
    """Return a text in which what is read from the right moves none of the numbers beside it."""
    if not any(bidirectional(each) in ("R", "AL") for each in text):
        return text
    turned = "".join("r" if bidirectional(each) in ("R", "AL") else "." for each in text)
    parts, end = [], 0
    for found in re.finditer(r"r+(\.r+)*", turned):
        parts += [text[end : found.start()], _ISOLATE, text[found.start() : found.end()], _END]
        end = found.end()
    return "".join([*parts, text[end:]])
