"""The table that tells what a rating in direct volts allows at radio frequency, and what to look for without one."""

import tomllib
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from typing import Any

from magsafe.physics.deratings import Evidence


@dataclass(frozen=True, slots=True)
class Conversion:
    """What kinds of capacitors stand at radio frequency: crest over a rating of one kind [1].

    `reserve` tells why a verdict by it is narrow at best, empty where it may be clear.
    """

    kinds: tuple[str, ...]
    rating: str
    factor: float
    source: str
    provenance: Evidence
    reserve: str = ""


@cache
def _table() -> dict[str, Any]:
    return tomllib.loads(files("magsafe.design").joinpath("ratings.toml").read_text(encoding="utf-8"))


@cache
def conversions() -> tuple[Conversion, ...]:
    """Return all rows."""
    return tuple(Conversion(**row | {"kinds": tuple(row["kinds"])}) for row in _table()["rating"])


def conversion(kind: str, rating: str) -> Conversion | None:
    """Return the row for a kind of capacitor and a kind of rating, None where nothing can be told."""
    return next((row for row in conversions() if kind in row.kinds and rating == row.rating), None)


def look_for(kind: str) -> str:
    """Return what to look for on a part of a kind that states no volts at radio frequency."""
    return str(_table()["look"][kind])
