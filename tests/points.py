"""Operating points for tests: the plain design with changes, and loops of other shapes."""

from typing import Any

from designs import plain_design

from magsafe.analysis.operating_point import OperatingPoint, operating_point


def point(**changes: Any) -> OperatingPoint:
    """Return the operating point of the plain design with changes."""
    made = plain_design(**changes)
    return operating_point(made, made.transmission[0])


def likely(found: OperatingPoint, name: str) -> float:
    """Return the likely value of a figure [SI]."""
    value: float | None = getattr(found.figures, name).spread.likely
    assert value is not None
    return value


STRIP = {"form": "strip", "width": "40 mm", "thickness": "1 mm", "conductivity": "58 MS/m"}
RODS = {"form": "rod", "outer_diameter": "22 mm", "conductivity": "58 MS/m"}


def polygon(sides: int, perimeter: float, conductor: float) -> dict[str, Any]:
    """Return a regular polygon: its sides, its perimeter and its conductor's diameter [m]."""
    return {
        "shape": "polygon",
        "sides": sides,
        "perimeter": f"{perimeter} m",
        "conductor": {"form": "rod", "outer_diameter": f"{1e3 * conductor} mm", "conductivity": "58 MS/m"},
    }


def rectangle(width: float, height: float) -> dict[str, Any]:
    """Return a rectangle of a rod, width and height [m]."""
    return {"shape": "rectangle", "width": f"{width} m", "height": f"{height} m", "conductor": RODS}


def fed(megahertz: float, **changes: Any) -> OperatingPoint:
    """A loop without a capacitor, of 3.2 mm wire, fed as it is."""
    wire = {"form": "rod", "outer_diameter": "3.2 mm", "conductivity": "58 MS/m"}
    return point(
        capacitor={"kind": "none"}, loop__conductor=wire, transmission__0__frequency=f"{megahertz} MHz", **changes
    )
