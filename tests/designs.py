"""Designs for tests: a small one that is easy to vary."""

from collections.abc import Callable
from copy import deepcopy
from typing import Any

from magsafe.design.as_built import NO_GROUND, identity
from magsafe.design.model import Design
from magsafe.design.reading import parse_design

Tree = dict[str, Any]

# A metre of 22 mm copper rod in free space with a capacitor that loses nothing, 100 W at the loop.
PLAIN: Tree = {
    "schema": "magsafe.design/1",
    "loop": {
        "shape": "circle",
        "diameter": "1.0 m",
        "conductor": {"form": "rod", "outer_diameter": "22 mm", "conductivity": "58 MS/m", "surface": "painted"},
        "supports": [],
    },
    "capacitor": {
        "kind": "vacuum variable",
        "capacitance": {"min": "10 pF", "max": "500 pF"},
        "series_resistance": {"low": "0 ohm", "likely": "0 ohm", "high": "0 ohm"},
        "rated_voltage": "15 kV",
        "rated_voltage_kind": "peak RF",
        "rated_current": "100 A",
    },
    "transmission": [{"frequency": "7.1 MHz", "power": "100 W", "signal_bandwidth": "0.5 kHz"}],
    "site": {"ground": "none"},
}


def toml(value: Any) -> str:
    """Return a value of a design tree as inline TOML."""
    if isinstance(value, dict):
        return "{" + ", ".join(f'"{k}" = {toml(v)}' for k, v in value.items()) + "}"
    if isinstance(value, list):
        return "[" + ", ".join(toml(v) for v in value) + "]"
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        escaped = value.replace("\\", "\\\\").replace('"', '\\"')
        return '"' + "".join(c if c.isprintable() else f"\\u{ord(c):04x}" for c in escaped) + '"'
    return repr(value)


def file_of(tree: Tree) -> bytes:
    """Return the bytes of a design file that holds a tree."""
    return "\n".join(f"{key} = {toml(value)}" for key, value in tree.items()).encode()


def put(tree: Any, path: str, value: Any) -> None:
    """Set the value at a dotted path; None removes it."""
    *way, last = path.split(".")
    for step in way:
        tree = tree[int(step)] if isinstance(tree, list) else tree.setdefault(step, {})
    if value is None:
        tree.pop(last, None)
    elif isinstance(tree, list):
        tree[int(last)] = value
    else:
        tree[last] = value


MakeTree = Callable[..., Tree]
MakeDesign = Callable[..., Design]


def plain_tree(**changes: Any) -> Tree:
    """Return the plain design's tree with changes; `__` in a name stands for the dot of a path."""
    tree = deepcopy(PLAIN)
    for name, value in changes.items():
        put(tree, name.replace("__", "."), value)
    return tree


def measured_changes(quality: float, spread: float = 0.02, **changes: Any) -> Tree:
    """Return changes of the plain design with the record of a Q, measured of it as it then is at its frequency."""
    design = plain_design(**changes)
    height = design.loop.centre_height
    record = {
        "frequency": f"{design.transmission[0].frequency / 1e6:.9g} MHz",
        "unloaded_q": {"low": quality * (1.0 - spread), "likely": quality, "high": quality * (1.0 + spread)},
        "date": "2026-05-04",
        "ground": design.ground_name or NO_GROUND,
        "design": identity(design),
    }
    if height is not None:
        record["centre_height"] = f"{height:.9g} m"
    return {**changes, "measured": [record]}


def plain_design(**changes: Any) -> Design:
    """Return the plain design with changes, read as a file is."""
    return parse_design(file_of(plain_tree(**changes)), "plain.toml")
