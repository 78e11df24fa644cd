"""Two sheets held against each other: does what was filed still hold, and what changed, the most dangerous first.

Not compared, because all of it follows from what is: patterns, other heights, deratings, times, what to measure first.
"""

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Literal

from magsafe import __version__, words
from magsafe.checks import compare_people
from magsafe.checks.compare_figures import figures
from magsafe.checks.compare_findings import ceilings, findings, margins, verdict
from magsafe.checks.compare_inputs import inputs
from magsafe.checks.compare_transmissions import matched, transmissions
from magsafe.checks.comparison import (
    DIRECTIONS,
    HARMLESS,
    KINDS,
    Answer,
    Change,
    Comparison,
    Side,
)
from magsafe.checks.sheet import Sheet

_MOST_KEYS = 8

Made = Literal["filed", "computed"]


@dataclass(frozen=True, slots=True)
class Source:
    """A sheet, whether it was filed or computed now, and the file that it is from."""

    sheet: Sheet
    made: Made
    file: str

    @property
    def side(self) -> Side:
        """Its part of the machine form."""
        sheet = self.sheet
        return Side(
            made=self.made,
            file=self.file,
            design=sheet.design.name,
            sha256=sheet.design.sha256,
            magsafe=sheet.magsafe,
            date=sheet.date,
            verdict=sheet.verdict,
            power_ceiling=sheet.power_ceiling,
        )


def compare(first: Source, second: Source, not_compared: Sequence[str] = ()) -> Comparison:
    """Hold a second sheet against a first.

    Transmissions belong together by name, else by frequency, else where one is left on each side within 5 % of
    frequency; their order does not matter.

    Parameters
    ----------
    first : what was
    second : what is
    not_compared : keys of filed sheets that this version does not know
    """
    before, after = first.sheet, second.sheet
    pairs, gone, new = matched(before.operating_points, after.operating_points)
    renamed = {old.name: now.name for old, now in pairs}
    found = [
        *verdict(before, after),
        *ceilings(before, after, pairs),
        *transmissions(pairs, gone, new),
        *margins(before.margins, after.margins),
        *findings(before, after, pairs, renamed),
        *compare_people.rules(before, after),
        *compare_people.places_gone_and_new(before, after),
        *compare_people.people(pairs, compare_people.editions(after)),
        *compare_people.worked_in_turn(before, after, renamed),
        *figures(pairs),
        *inputs(before, after),
        *_assumed(before, after),
        *_cautioned(before, after),
        *_software(before, after),
        *_unknown(not_compared),
    ]
    changes = tuple(sorted(found, key=_danger))
    unexplained = _is_unexplained(first, second, changes)
    answer: Answer = "does not hold" if unexplained else _answer(changes)
    return Comparison(
        magsafe=__version__,
        answer=answer,
        holds=answer == "holds",
        said=_said(answer, changes, first, second),
        verdict=after.verdict,
        before=first.side,
        after=second.side,
        changes=changes,
        not_compared=tuple(not_compared),
        notes=tuple(_notes(first, second, changes)),
    )


def _danger(change: Change) -> tuple[int, int, float]:
    return DIRECTIONS.index(change.direction), KINDS.index(change.kind), -change.weight


# The answer ------------------------------------------------------------------------------------------------


def _answer(changes: Sequence[Change]) -> Answer:
    if any(change.direction in ("worse", "unknown") for change in changes):
        return "does not hold"
    return "outdated" if any(change.kind not in HARMLESS for change in changes) else "holds"


def _is_unexplained(first: Source, second: Source, changes: Sequence[Change]) -> bool:
    """Return whether a filed sheet differs from what the same version computes from the same design."""
    old, new = first.sheet, second.sheet
    same = old.magsafe == new.magsafe and old.design.text == new.design.text and first.made != second.made
    return same and any(change.kind not in HARMLESS for change in changes)


def _said(answer: Answer, changes: Sequence[Change], first: Source, second: Source) -> str:
    """Return the answer in a sentence."""
    words_for = _TWO_DESIGNS if first.made == "computed" else _TWO_SHEETS if second.made == "filed" else _FILED
    if answer != "does not hold":
        return words_for[answer]
    worst = changes[0]
    if worst.direction not in ("worse", "unknown"):
        return f"{words_for['worse']}: the same version computes other figures from the same design."
    because = f"{worst.text[0].lower() if worst.kind in _SENTENCES else worst.text[0]}{worst.text[1:]}"
    return f"{words_for[worst.direction]}: {because}."


_FILED = {
    "holds": "The filed sheet still holds.",
    "outdated": "The filed sheet is out of date: nothing became worse, but it does not tell how things are now.",
    "worse": "The filed sheet does not hold any more",
    "unknown": "The filed sheet cannot be upheld",
}
_TWO_SHEETS = {
    "holds": "The two sheets tell the same.",
    "outdated": "The second sheet differs from the first, and nothing in it is worse.",
    "worse": "The first sheet does not hold by the second",
    "unknown": "The first sheet cannot be upheld by the second",
}
_TWO_DESIGNS = {
    "holds": "The two designs give the same.",
    "outdated": "The second design differs from the first, and nothing in it is worse.",
    "worse": "The second design is worse than the first",
    "unknown": "The second design cannot be held against the first",
}
_SENTENCES = ("verdict", "ceiling")


def _notes(first: Source, second: Source, changes: Sequence[Change]) -> Iterator[str]:
    before, after = first.sheet, second.sheet
    if first.made == second.made == "filed":
        yield "Both sheets are told as they were filed; nothing was computed anew."
    if _is_unexplained(first, second, changes):
        yield (
            "The same version computes other figures from the same design: the filed sheet was altered, or the "
            "program, its tables or its libraries were. Find out which before you trust either."
        )
    if first.made == "filed" and second.made == "computed" and _number(before.magsafe) > _number(after.magsafe):
        yield (
            f"The filed sheet is by magsafe {words.short(before.magsafe)}, which is newer than this one "
            f"({after.magsafe}): recheck it with that version or a later one."
        )


def _number(version: str) -> tuple[int, ...]:
    return tuple(int(part) for part in re.findall(r"\d{1,9}", version)[:3])


# The rest --------------------------------------------------------------------------------------------------


def _assumed(before: Sheet, after: Sheet) -> Iterator[Change]:
    """Yield the assumptions that only one of two sheets makes."""
    old, new = frozenset(before.assumptions), frozenset(after.assumptions)
    for sentence in (each for each in before.assumptions if each not in new):
        text = f"not assumed any more: {sentence}".removesuffix(".")
        yield Change(kind="assumption", direction="other", of="assumption", before=sentence, after=None, text=text)
    for sentence in (each for each in after.assumptions if each not in old):
        text = f"assumed now: {sentence}".removesuffix(".")
        yield Change(kind="assumption", direction="other", of="assumption", before=None, after=sentence, text=text)


def _cautioned(before: Sheet, after: Sheet) -> Iterator[Change]:
    """Yield the cautions that only one of two sheets has, by their first words; the rest holds figures told above."""
    old, new = ({each.partition(". ")[0]: each for each in sheet.cautions} for sheet in (before, after))
    for head in (each for each in old if each not in new):
        text = f"no caution any more: {head}".removesuffix(".")
        yield Change(kind="caution", direction="other", of=head, before=old[head], after=None, text=text)
    for head in (each for each in new if each not in old):
        text = f"a caution that was not there: {new[head]}".removesuffix(".")
        yield Change(kind="caution", direction="other", of=head, before=None, after=new[head], text=text)


def _software(before: Sheet, after: Sheet) -> Iterator[Change]:
    if before.magsafe != after.magsafe:
        yield Change(
            kind="software", direction="other", of="magsafe", before=before.magsafe, after=after.magsafe,
            text=f"made with magsafe {words.short(before.magsafe)} before, {words.short(after.magsafe)} now",
        )  # fmt: skip
    if before.design.name != after.design.name:
        yield Change(
            kind="layout", direction="other", of="name", before=before.design.name, after=after.design.name,
            text=f"the design file was {words.short(before.design.name)}, and is {words.short(after.design.name)}",
        )  # fmt: skip


def _unknown(keys: Sequence[str]) -> Iterator[Change]:
    """Yield what this version cannot read, and so cannot uphold: a newer one may have a reason for it."""
    if keys:
        told = ", ".join(words.short(key, 80) for key in keys[:_MOST_KEYS])
        more = f", and {len(keys) - _MOST_KEYS} more" if len(keys) > _MOST_KEYS else ""
        yield Change(
            kind="software", direction="unknown", of="keys", before=None, after=None,
            text=f"filed are keys that this version does not know, and does not compare: {told}{more}",
        )  # fmt: skip
