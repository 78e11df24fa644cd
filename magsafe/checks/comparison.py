"""What a recheck finds, in machine form. JSON comes from these models; values are in SI units, as on the sheet."""

from math import floor, log10
from typing import Annotated, Literal, get_args

from pydantic import Field

from magsafe.checks.sheet import PowerCeiling, Record, Value, Verdict
from magsafe.units import significant

SCHEMA = "magsafe.recheck/1"
DIGITS = 3

Answer = Literal["holds", "outdated", "does not hold"]
Direction = Literal["worse", "unknown", "better", "other"]
# The most dangerous first: what decides about the key, then people, then what is asked at all.
Kind = Literal[
    "verdict",
    "ceiling",
    "finding",
    "place",
    "keepout",
    "rule",
    "margin",
    "transmission",
    "figure",
    "exemption",
    "input",
    "assumption",
    "caution",
    "software",
    "layout",
]
DIRECTIONS: tuple[Direction, ...] = get_args(Direction)
KINDS: tuple[Kind, ...] = get_args(Kind)
HARMLESS: frozenset[Kind] = frozenset({"software", "layout"})  # a sheet holds in spite of these


class Change(Record):
    """One thing that differs.

    `direction` is `worse` where more is risked or less is asked than before, `unknown` where the two cannot be held
    against each other, `other` where neither is more dangerous by itself. `of` is the finding, the figure, the place,
    the rule and tier, or the key of the design; `part` the direction of a distance or the field of a transmission.
    `transmission` is null for what is of the whole sheet, `session` the transmissions that are worked in turn. `before`
    and `after` are null where there is none. `weight` orders changes of one kind, the
    heaviest first, and is not printed.
    """

    kind: Kind
    direction: Direction
    transmission: str | None = None
    session: str | None = None
    of: str
    part: str | None = None
    before: Value | float | str | None
    after: Value | float | str | None
    unit: str | None = None
    text: str
    detail: str | None = None
    weight: Annotated[float, Field(exclude=True)] = 0.0


class Side(Record):
    """One of the two sheets: as it was filed, or computed now from a design."""

    made: Literal["filed", "computed"]
    file: str
    design: str
    sha256: str
    magsafe: str
    date: str
    verdict: Verdict
    power_ceiling: PowerCeiling


class Comparison(Record):
    """Whether a sheet still holds, why, and all that changed, the most dangerous first.

    `verdict` is that of the second side. `holds` is true where nothing changed but the version of the program or the
    layout of the design file. An answer `outdated` means that something changed and nothing of it for the worse; where
    the same version computes otherwise from the same design, a filed sheet does not hold whatever changed. Two numbers
    differ where `digits` significant digits tell them apart and they are more than half a step of the last digit from
    each other. `not_compared` names the keys that this version does not know; a sheet with such keys does not hold.
    """

    schema_name: Annotated[Literal["magsafe.recheck/1"], Field(alias="schema")] = "magsafe.recheck/1"
    magsafe: str
    answer: Answer
    holds: bool
    said: str
    verdict: Verdict
    before: Side
    after: Side
    digits: int = DIGITS
    changes: tuple[Change, ...]
    not_compared: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()

    def to_json(self) -> str:
        """Return the machine form."""
        return self.model_dump_json(by_alias=True, indent=2)


def differ(before: float | None, after: float | None) -> bool:
    """Return whether two numbers are apart by more than rounding, or only one of them is known."""
    if before is None or after is None:
        return before is not after
    if before == after:
        return False
    step = 10.0 ** (floor(log10(max(abs(before), abs(after)))) - (DIGITS - 1))
    return abs(before - after) > step / 2.0 and significant(before, DIGITS) != significant(after, DIGITS)


def toward(before: float | None, after: float | None, *, worse: Literal["higher", "lower"]) -> Direction:
    """Return the direction of a number that is more dangerous where it is higher, or lower.

    One that is not known any more is worse; one that is known now is neither.
    """
    if not differ(before, after):
        return "other"
    if before is None or after is None:
        return "worse" if after is None else "other"
    return "worse" if (after > before) == (worse == "higher") else "better"


def factor(before: float | None, after: float | None) -> float:
    """Return by how many times two numbers are apart, 1 or more; 1 where that tells nothing."""
    if before is None or after is None or min(abs(before), abs(after)) == 0.0:
        return 1.0
    return max(abs(before / after), abs(after / before))
