"""The tables a design may name rows of: materials, soils, kinds of parts, amateur bands.

Each row must carry its source; a table that lacks one is refused when it is loaded.
"""

import tomllib
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from typing import Any

from magsafe.spread import Spread

REGIONS = (1, 2, 3)


@dataclass(frozen=True, slots=True)
class Material:
    """A conductor material at 20 degC: conductivity [S/m], its relative scatter, coefficient [1/K]."""

    name: str
    conductivity: float
    scatter: float
    coefficient: float
    source: str
    provenance: str


@dataclass(frozen=True, slots=True)
class Soil:
    """A ground: spans of its conductivity [S/m] and of its relative permittivity."""

    name: str
    conductivity: Spread
    permittivity: Spread
    source: str
    provenance: str


@dataclass(frozen=True, slots=True)
class Band:
    """An amateur band: its limits [Hz] in ITU Regions 1, 2 and 3."""

    name: str
    regions: tuple[tuple[float, float], ...]
    source: str
    provenance: str

    def holds(self, frequency: float) -> bool:
        """Return whether the frequency lies in the band in any region."""
        return any(low <= frequency <= high for low, high in self.regions)


def _load(name: str) -> dict[str, Any]:
    return tomllib.loads(files("magsafe.design").joinpath(name).read_text(encoding="utf-8"))


@cache
def materials() -> dict[str, Material]:
    """Return the material table, by name."""
    return {row["name"]: Material(**row) for row in _load("materials.toml")["material"]}


@cache
def soils() -> dict[str, Soil]:
    """Return the soil table, by name."""
    spans = ("conductivity", "permittivity")
    rows = ({**row, **{span: Spread(*row[span]) for span in spans}} for row in _load("soils.toml")["soil"])
    return {row["name"]: Soil(**row) for row in rows}


@cache
def bands() -> tuple[Band, ...]:
    """Return the band table, in order of frequency."""
    table = _load("bands.toml")
    return tuple(
        Band(
            row["name"],
            tuple((row[f"region_{r}"][0], row[f"region_{r}"][1]) for r in REGIONS),
            table["source"],
            table["provenance"],
        )
        for row in table["band"]
    )


@cache
def _kinds() -> dict[str, Any]:
    return _load("kinds.toml")


def joint_resistance(kind: str) -> Spread:
    """Return the typical resistance [ohm] of one joint of a kind (common practice)."""
    return next(Spread(*row["resistance"]) for row in _kinds()["joint"] if row["name"] == kind)


def capacitor_kinds() -> tuple[str, ...]:
    """Return the kinds of capacitor whose typical Q is known, an air variable with a wiper as one of its own."""
    return tuple(row["name"] for row in _kinds()["capacitor"] if not row["name"].startswith("fixed part"))


def capacitor_quality_factor(kind: str) -> Spread:
    """Return the typical Q of a kind of capacitor at 3-30 MHz (common practice)."""
    return next(Spread(*r["quality_factor"]) for r in _kinds()["capacitor"] if r["name"] == kind)


def conductor_factor(form: str) -> Spread:
    """Return a form's resistance over that of a smooth conductor of its outer diameter [1] (common practice)."""
    rows = (Spread(*row["factor"]) for row in _kinds()["conductor"] if row["form"] == form)
    return next(rows, Spread.exact(1.0))


def roughness_share() -> Spread:
    """Return what roughness and oxide add to a resistance, as a share of it (common practice)."""
    return Spread(*_kinds()["roughness"]["share"])


def cable_factors() -> tuple[Spread, Spread]:
    """Return how much more the inner and the outer conductor of a cable lose than smooth copper (common practice)."""
    cable = _kinds()["cable"]
    return Spread(*cable["inner_factor"]), Spread(*cable["outer_factor"])


def band_of(frequency: float) -> Band | None:
    """Return the amateur band that holds a frequency [Hz] in any region, or None."""
    return next((band for band in bands() if band.holds(frequency)), None)
