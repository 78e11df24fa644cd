"""Before the first key-down of a transmitting magnetic loop.

Will capacitor and conductor stand it, how much radiates, where may people be, and what is the highest power
at which every check is clear.

    import magsafe
    sheet = magsafe.check(magsafe.read_design("sample_designs/quay_rail.toml"))
    print(sheet.verdict, sheet.power_ceiling.value)

Importing the package is cheap: each public name is fetched from its module when it is first asked for.
"""

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from magsafe.checks.run import check
    from magsafe.checks.sheet import Sheet
    from magsafe.design.model import Design
    from magsafe.design.reading import parse_design, read_design
    from magsafe.errors import CommandError, DesignError, MagsafeError

__version__ = "0.3.0"

_HOMES = {
    "CommandError": "magsafe.errors",
    "Design": "magsafe.design.model",
    "DesignError": "magsafe.errors",
    "MagsafeError": "magsafe.errors",
    "Sheet": "magsafe.checks.sheet",
    "check": "magsafe.checks.run",
    "parse_design": "magsafe.design.reading",
    "read_design": "magsafe.design.reading",
}

__all__ = [
    "CommandError",
    "Design",
    "DesignError",
    "MagsafeError",
    "Sheet",
    "check",
    "parse_design",
    "read_design",
]


def __getattr__(name: str) -> Any:
    if name not in _HOMES:
        raise AttributeError(f"module 'magsafe' has no attribute {name!r}")
    return getattr(import_module(_HOMES[name]), name)


def __dir__() -> list[str]:
    return [*__all__, "__version__"]
