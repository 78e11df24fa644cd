"""The house: imports look down only, pint stays at the door, commands start quickly."""

import ast
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

import magsafe

PACKAGE = Path(magsafe.__file__).parent
FLOORS = (
    {"errors", "units", "spread", "words", "physics", "rules"},
    {"design"},
    {"analysis"},
    {"checks"},
    {"reports"},
    {"cli"},
)
MODULES = sorted(PACKAGE.rglob("*.py"))
PINT_MAY = {"units.py"}


def imports_of(path: Path) -> Iterator[str]:
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom) and node.module:
            yield node.module
            yield from (f"{node.module}.{alias.name}" for alias in node.names)


def floor(module: str) -> int | None:
    """Return the floor of a dotted name within the package; None for the package itself."""
    parts = module.split(".")
    if len(parts) < 2:
        return None
    return next((i for i, rooms in enumerate(FLOORS) if parts[1] in rooms), None)


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(PACKAGE)))
def test_nothing_looks_up(path: Path) -> None:
    own = floor(".".join(("magsafe", *path.relative_to(PACKAGE).with_suffix("").parts)))
    if own is None:
        return
    for name in imports_of(path):
        if name.startswith("magsafe."):
            other = floor(name)
            # `magsafe.__version__` and the like belong to no floor.
            assert other is None or other <= own, f"{path.name} imports {name}"


def test_every_room_has_a_floor() -> None:
    rooms = {p.stem if p.is_file() else p.name for p in PACKAGE.iterdir() if p.suffix in ("", ".py")}
    rooms -= {"__init__", "__main__", "__pycache__", "py"}
    assert rooms - {"py.typed"} <= set().union(*FLOORS)


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(PACKAGE)))
def test_pint_stays_at_the_door(path: Path) -> None:
    uses = any(name.split(".")[0] == "pint" for name in imports_of(path))
    assert not uses or path.name in PINT_MAY


@pytest.mark.parametrize("room", ["physics", "rules"])
def test_physics_and_rules_know_no_file_format_and_no_screen(room: str) -> None:
    for path in (PACKAGE / room).rglob("*.py"):
        known = {name.split(".")[0] for name in imports_of(path)}
        assert not known & {"pydantic", "typer", "rich"}, path.name


def loaded_by(*arguments: str) -> set[str]:
    """Return the top-level modules that a run of the command loads."""
    run = subprocess.run(
        [sys.executable, "-X", "importtime", "-m", "magsafe", *arguments],
        capture_output=True,
        text=True,
        check=True,
    )
    lines = (line for line in run.stderr.splitlines() if line.startswith("import time:"))
    return {line.rsplit("|", 1)[1].strip().split(".")[0] for line in lines}


def test_help_loads_no_numbers() -> None:
    assert not loaded_by("--help") & {"numpy", "scipy", "pint", "rich"}
    assert not loaded_by("check", "--help") & {"numpy", "scipy", "pint"}
    assert not loaded_by("capacitor", "--help") & {"numpy", "scipy", "pint"}


def test_version_loads_hardly_anything() -> None:
    assert not loaded_by("--version") & {"typer", "numpy", "scipy", "pint", "pydantic", "rich"}


def test_importing_the_package_is_cheap() -> None:
    code = "import sys, magsafe; print(sorted({m.split('.')[0] for m in sys.modules}))"
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert not set(ast.literal_eval(run.stdout)) & {"numpy", "scipy", "pint", "pydantic", "rich"}


def test_the_public_names_are_these() -> None:
    assert magsafe.__all__ == [
        "CommandError",
        "Design",
        "DesignError",
        "MagsafeError",
        "Sheet",
        "check",
        "parse_design",
        "read_design",
    ]
    for name in magsafe.__all__:
        assert getattr(magsafe, name) is not None
    with pytest.raises(AttributeError, match="no attribute 'approve'"):
        _ = magsafe.approve


def test_rooms_are_no_longer_than_two() -> None:
    for path in MODULES:
        assert path.read_text(encoding="utf-8").count("\n") <= 600, path.name
