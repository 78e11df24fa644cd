"""Docstrings, README and tables hold what they promise."""

import ast
import re
import tomllib
from collections.abc import Iterator
from math import pi, sqrt
from pathlib import Path

import pytest
from commands import COMMANDS
from designs import plain_design
from readme_commands import command_under

import magsafe

PACKAGE = Path(magsafe.__file__).parent
ROOT = Path(__file__).parents[2]


def functions() -> Iterator[tuple[str, ast.FunctionDef, str]]:
    for path in sorted((PACKAGE / "physics").glob("*.py")):
        for node in ast.parse(path.read_text(encoding="utf-8")).body:
            if isinstance(node, ast.FunctionDef) and not node.name.startswith("_"):
                yield path.stem, node, ast.get_docstring(node) or ""


FORMULAS = [(room, node, doc) for room, node, doc in functions() if "Returns\n" in doc]


@pytest.mark.parametrize(("room", "node", "doc"), FORMULAS, ids=[f"{r}.{n.name}" for r, n, _ in FORMULAS])
def test_a_formula_has_its_identity_card(room: str, node: ast.FunctionDef, doc: str) -> None:
    assert re.search(r"^Valid", doc, re.M), "no Valid"
    assert re.search(r"^Source", doc, re.M), "no Source"
    listed = doc.split("----------\n")[1].split("\nReturns", maxsplit=1)[0]
    names = [n for line in listed.splitlines() if (m := re.match(r"([\w, ]+) : ", line)) for n in m[1].split(", ")]
    arguments = [a.arg for a in (*node.args.args, *node.args.kwonlyargs)]
    assert names == arguments
    for line in listed.splitlines():
        if re.match(r"[\w, ]+ : ", line) and not any(t in line for t in ("currents", "field :")):
            assert re.search(r"\[[^\]]+\]", line), f"no unit: {line}"


def test_most_physics_functions_are_such_formulas() -> None:
    everything = [node.name for _, node, _ in functions()]
    assert len(FORMULAS) >= 0.8 * len(everything)


def test_every_public_name_has_a_docstring() -> None:
    for path in PACKAGE.rglob("*.py"):
        tree = ast.parse(path.read_text(encoding="utf-8"))
        assert ast.get_docstring(tree), path
        for node in tree.body:
            if isinstance(node, ast.FunctionDef | ast.ClassDef) and not node.name.startswith("_"):
                assert ast.get_docstring(node), f"{path}: {node.name}"


@pytest.mark.parametrize("table", sorted(PACKAGE.glob("design/*.toml")), ids=lambda p: p.stem)
def test_every_row_of_a_table_names_its_source(table: Path) -> None:
    made = tomllib.loads(table.read_text(encoding="utf-8"))
    rows = [row for rows in made.values() if isinstance(rows, list) for row in rows]
    assert rows
    if table.stem == "kinds":
        assert "common practice" in table.read_text(encoding="utf-8")
        return
    for row in rows:
        assert row.get("source") or made.get("source"), row
        assert row.get("provenance") or made.get("provenance"), row


def test_the_readme_has_its_two_commands() -> None:
    assert "magsafe check sample_designs/" in command_under("check")
    assert "pytest" in command_under("tests")


def test_the_readme_names_every_command_and_sample() -> None:
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    for command in COMMANDS:
        assert f"magsafe {command}" in text
    for sample in (ROOT / "sample_designs").glob("*.toml"):
        assert sample.name in text


def test_the_readmes_distances_are_the_tools() -> None:
    """Near field by the tool beside OET Bulletin 65's far-field formula, S = P G / 4 pi R^2 (as quoted, secondary)."""
    design = plain_design(
        site__rules=["us-fcc"],
        margins={"exposure": "0 dB"},
        capacitor__position="top",
        loop__conductor={"form": "tube", "outer_diameter": "22 mm", "wall": "1 mm", "material": "copper tube"},
    )
    (point,) = magsafe.check(design).operating_points
    keepout = point.exposure[1].keepout
    assert keepout is not None
    assert keepout.along_axis is not None
    efficiency = point.figures["conductor_efficiency"].likely or 0.0
    density = 1800.0 / 7.1**2  # W/m2, plane-wave equivalent of 47 CFR 1.1310 for the general population
    far = sqrt(100.0 * 1.5 * efficiency / (4.0 * pi * density))
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    assert f"from {keepout.along_axis.distance:.1f} m on its axis" in text
    assert f"at {far:.2f} m ({2.0 * far:.2f} m with full ground reflection)" in text


def test_the_output_in_the_readme_is_that_of_the_program() -> None:
    """The first lines of the quoted run are what the program prints today, but for the date."""
    import subprocess
    import sys

    text = (ROOT / "README.md").read_text(encoding="utf-8")
    quoted = text.split("```text\n", 1)[1].split("```", 1)[0].rstrip().splitlines()
    sample = ROOT / "sample_designs" / "quay_rail.toml"
    run = subprocess.run(
        [sys.executable, "-m", "magsafe", "check", str(sample)],
        capture_output=True, text=True, encoding="utf-8", env={"PYTHONIOENCODING": "utf-8", "PATH": ""}, check=False,
    )  # fmt: skip
    printed = run.stdout.splitlines()

    def without_date(line: str) -> str:
        return re.sub(r"\d{4}-\d\d-\d\d", "DATE", line)

    assert len(quoted) > 10
    assert [without_date(q) for q in quoted] == [without_date(p) for p in printed[: len(quoted)]]
