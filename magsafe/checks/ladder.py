"""The power ladder: up to which power each check holds by itself, the lowest first."""

from dataclasses import dataclass

from magsafe.checks.sheet import Sheet


@dataclass(frozen=True, slots=True)
class Rung:
    """One check's own ceiling: the envelope power [W] that keeps its margin, and the one that reaches its limit.

    `lowest` marks the lowest of them. `known` is false where a doubt leaves both as upper
    bounds: more than that is too much in any case.
    """

    id: str
    place: str | None
    at_margin: float
    at_limit: float | None
    lowest: bool
    known: bool


@dataclass(frozen=True, slots=True)
class Ladder:
    """The rungs of one transmission, from the lowest up; the power that is planned, and what no power changes."""

    transmission: int
    planned: float
    rungs: tuple[Rung, ...]
    at_any_power: tuple[str, ...]


def ladder(sheet: Sheet, index: int) -> Ladder:
    """Return the ladder of one transmission of a sheet: of its own findings and those of the whole sheet."""
    point = sheet.operating_points[index]
    found = (*point.findings, *sheet.findings)
    counted = [f for f in found if f.power_at_margin is not None]
    lowest = min(counted, key=lambda f: (f.power_at_margin, f.id), default=None)
    rungs = tuple(
        Rung(
            f.id,
            f.place,
            f.power_at_margin or 0.0,
            f.power_at_limit,
            f is lowest,
            known=not f.doubt and f.verdict != "unproven",
        )
        for f in sorted(counted, key=lambda f: f.power_at_margin or 0.0)
    )
    fatal = tuple(f.id for f in found if f.verdict == "stop" and f.power_at_margin is None and not f.doubt)
    return Ladder(index, point.power, rungs, tuple(dict.fromkeys(fatal)))
