"""The tables that tell what warmth and voltage do: finishes, metals, temperatures not stood, dielectrics.

Each row must carry its source; a table that lacks one is refused when it is loaded. Names of dielectrics are those
that a design may state.
"""

import tomllib
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from typing import Any

from scipy.constants import zero_Celsius

from magsafe.spread import Spread


@dataclass(frozen=True, slots=True)
class Dielectric:
    """An insulator: relative permittivity [1], loss tangent at 1 to 30 MHz [1], strength of a thin sheet [V/m].

    The spreads have no likely value: nothing tells where a piece lies between the ends of its kind.
    """

    name: str
    permittivity: Spread
    loss_tangent: Spread
    strength: Spread
    source: str
    provenance: str


@dataclass(frozen=True, slots=True)
class Finish:
    """The outside of a conductor: emissivity for heat [1] and absorptivity for sunlight [1]."""

    name: str
    emissivity: Spread
    absorptivity: Spread
    source: str
    provenance: str


@dataclass(frozen=True, slots=True)
class Metal:
    """A family of materials: density [kg/m3], specific heat [J/(kg K)], linear expansion [1/K]."""

    name: str
    materials: tuple[str, ...]
    density: float
    specific_heat: float
    expansion: float
    source: str
    provenance: str


@dataclass(frozen=True, slots=True)
class TouchThreshold:
    """Bare metal burns skin from `temperature` [K] on when touched for `contact` [s]."""

    contact: float
    temperature: float
    source: str
    provenance: str


@dataclass(frozen=True, slots=True)
class Softening:
    """A solder melts, or a plastic gives way, at `temperature` [K]."""

    name: str
    temperature: float
    source: str
    provenance: str


def _load(name: str) -> dict[str, Any]:
    return tomllib.loads(files("magsafe.design").joinpath(name).read_text(encoding="utf-8"))


def _kelvin(row: dict[str, Any]) -> dict[str, Any]:
    return {key: value for key, value in row.items() if key != "celsius"} | {
        "temperature": row["celsius"] + zero_Celsius
    }


@cache
def dielectrics() -> dict[str, Dielectric]:
    """Return the table of dielectrics, by name."""
    ends = ("permittivity", "loss_tangent", "strength")
    rows = _load("dielectrics.toml")["dielectric"]
    return {
        row["name"]: Dielectric(**row | {key: Spread(row[key][0], None, row[key][1]) for key in ends}) for row in rows
    }


@cache
def finishes() -> dict[str, Finish]:
    """Return the table of finishes, by name."""
    ends = ("emissivity", "absorptivity")
    rows = _load("finishes.toml")["finish"]
    return {row["name"]: Finish(**row | {key: Spread(*row[key]) for key in ends}) for row in rows}


@cache
def metals() -> dict[str, Metal]:
    """Return the table of metals, by name of each material of the table of materials."""
    rows = [Metal(**row | {"materials": tuple(row["materials"])}) for row in _load("metals.toml")["metal"]]
    return {material: row for row in rows for material in row.materials}


@cache
def touch_thresholds() -> tuple[TouchThreshold, ...]:
    """Return the burn thresholds of bare metal, the shortest contact first."""
    return tuple(TouchThreshold(**_kelvin(row)) for row in _load("temperatures.toml")["touch"])


@cache
def solders() -> dict[str, Softening]:
    """Return where solders begin to melt, by name."""
    return {row["name"]: Softening(**_kelvin(row)) for row in _load("temperatures.toml")["solder"]}


@cache
def standing() -> dict[str, Softening]:
    """Return what metals and joints stand for long, by name."""
    return {row["name"]: Softening(**_kelvin(row)) for row in _load("temperatures.toml")["standing"]}


@cache
def plastics() -> dict[str, Softening]:
    """Return where plastics begin to give way, by name."""
    return {row["name"]: Softening(**_kelvin(row)) for row in _load("temperatures.toml")["softening"]}
