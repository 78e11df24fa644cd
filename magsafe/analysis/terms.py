"""The letters of a formula with their numbers at the ends of a figure, and what makes an end."""

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass

from magsafe.analysis.chain import Chain, Question
from magsafe.analysis.losses import Corner, Loss
from magsafe.spread import Spread

Ends = tuple[float | None, float | None, float | None]


@dataclass(frozen=True, slots=True)
class Term:
    """A letter of a formula: its value at the low end of the figure, at the likely value and at the high end, in SI.

    None where that end of the figure is not known. `of` names the part that a letter with a number belongs to.
    """

    letter: str
    ends: Ends
    unit: str
    of: str = ""


@dataclass(frozen=True, slots=True)
class Column:
    """One end of a figure: which end of the losses makes it, at which corner, with which power at the loop [W]."""

    losses: str
    corner: Corner
    power: float = 0.0


Columns = tuple[Column | None, Column | None, Column | None]


def rising(chain: Chain, ask: Question) -> Columns:
    """Return what makes the ends of a figure that rises as the resistance falls."""
    power = chain.power
    least, most = power.low or 0.0, power.high or 0.0
    low = min(chain.most, key=lambda corner: ask("high", corner, least), default=None)
    high = max(chain.least, key=lambda corner: ask("low", corner, most))
    return (
        None if low is None else Column("high", low, least),
        Column("likely", chain.likely, power.likely or 0.0),
        Column("low", high, most),
    )


def own(
    likely: Corner, below: Iterable[Corner], above: Iterable[Corner], ask: Callable[[str, Corner], float]
) -> Columns:
    """Return what makes the ends of a figure that rises with the losses themselves."""
    low = min(below, key=lambda corner: ask("low", corner), default=None)
    high = max(above, key=lambda corner: ask("high", corner), default=None)
    return (
        None if low is None else Column("low", low),
        Column("likely", likely),
        None if high is None else Column("high", high),
    )


def efficient(chain: Chain) -> Columns:
    """Return what makes the ends of the efficiency in free space."""
    low = min(chain.free, key=lambda corner: chain.efficiency("high", corner))
    high = max(chain.free, key=lambda corner: chain.efficiency("low", corner))
    return Column("high", low), Column("likely", chain.likely_free), Column("low", high)


def term(letter: str, unit: str, columns: Columns, value: Callable[[Column], float], of: str = "") -> Term:
    """Return a letter with its value at each of the columns."""
    low, likely, high = (None if each is None else value(each) for each in columns)
    return Term(letter, (low, likely, high), unit, of)


def same(letter: str, value: float, unit: str) -> Term:
    """Return a letter that has one value at all ends."""
    return Term(letter, (value, value, value), unit)


def spread_of(letter: str, spread: Spread, unit: str, *, turned: bool = False) -> Term:
    """Return a letter with the values of a spread; `turned` where its high end makes the figure's low one."""
    ends = (spread.low, spread.likely, spread.high)
    return Term(letter, (ends[2], ends[1], ends[0]) if turned else ends, unit)


def stated_error(error: float, unit: str = "1", ends: Sequence[object] = (1, 1, 1)) -> Term:
    """Return by how much the method's stated error moves the ends; None where an end is."""
    low, likely, high = (
        None if end is None else share * error for end, share in zip(ends, (-1.0, 0.0, 1.0), strict=True)
    )
    return Term("d", (low, likely, high), unit)


def excess(columns: Columns) -> Term:
    """Return by what share the port's own gap raises the reactance."""
    return term("e", "1", columns, lambda each: each.corner.excess)


def total(chain: Chain, columns: Columns) -> Term:
    """Return the total resistance."""
    return term("R", "ohm", columns, lambda each: chain.resistance(each.losses, each.corner))


def power(columns: Columns) -> Term:
    """Return the power at the loop."""
    return term("P", "W", columns, lambda each: each.power)


def parts(chain: Chain, columns: Columns) -> tuple[Term, ...]:
    """Return the resistances that the total is the sum of."""
    groups: dict[str, tuple[Loss, ...]] = {
        "Rw": (chain.conductor,),
        "Rj": chain.joints,
        "Rc": (chain.capacitor, *chain.padding),
    }
    radiated = term("Rr", "ohm", columns, lambda each: each.corner.radiated)
    unexplained = term("Ru", "ohm", columns, lambda each: chain.unexplained(each.losses, each.corner))
    return (radiated, *(_group(letter, losses, columns) for letter, losses in groups.items()), unexplained)


def _group(letter: str, losses: Sequence[Loss], columns: Columns) -> Term:
    return term(letter, "ohm", columns, lambda each: sum((loss.at(each.losses, each.corner) for loss in losses), 0.0))


def where(ends: Ends, known: Ends) -> Ends:
    """Return values at those ends of a figure alone that are known."""
    low, likely, high = (None if seen is None else end for end, seen in zip(ends, known, strict=True))
    return low, likely, high
