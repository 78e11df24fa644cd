"""The JSON schemas hold for what goes in and what comes out, and refuse what is neither."""

import json
import tomllib
from functools import cache
from pathlib import Path
from typing import Any

import pytest
from commands import run
from designs import file_of, plain_tree
from jsonschema import Draft202012Validator, ValidationError

import magsafe
from magsafe.cli.schema import Which, as_written, schema_text

SAMPLES = Path(__file__).parents[2] / "sample_designs"
DESIGNS = sorted(SAMPLES.glob("*.toml"))


@cache
def validator(which: Which) -> Draft202012Validator:
    made = json.loads(schema_text(which))
    Draft202012Validator.check_schema(made)
    return Draft202012Validator(made)


@cache
def sheet_of(path: Path) -> str:
    return magsafe.check(magsafe.read_design(path)).to_json()


@pytest.mark.parametrize("which", list(Which))
def test_the_command_prints_the_schema(which: Which) -> None:
    assert run("schema", which.value).stdout == schema_text(which)


@pytest.mark.parametrize("sample", DESIGNS, ids=lambda p: p.stem)
def test_every_sample_is_a_design(sample: Path) -> None:
    validator(Which.design).validate(tomllib.loads(sample.read_text(encoding="utf-8")))


@pytest.mark.parametrize("sample", DESIGNS, ids=lambda p: p.stem)
def test_every_sample_gives_a_sheet(sample: Path) -> None:
    validator(Which.sheet).validate(json.loads(sheet_of(sample)))


@pytest.mark.parametrize("sample", DESIGNS, ids=lambda p: p.stem)
def test_every_sample_names_its_schema_and_the_schema_is_there(sample: Path) -> None:
    first = sample.read_text(encoding="utf-8").splitlines()[0]
    assert first.startswith("#:schema ")
    named = sample.parent / first.removeprefix("#:schema ")
    assert named.read_text(encoding="utf-8") == schema_text(Which.design)


ACCEPTED: list[dict[str, Any]] = [
    {},
    {"measured": {"frequency": "7.1 MHz", "unloaded_q": 1000}},
    {"measured": [{"frequency": "7.1 MHz", "unloaded_q": {"low": 900, "likely": 1000, "high": 1100}}]},
    {"site__ground": {"conductivity": "5 mS/m", "permittivity": 13}},
    {"site__ground": {"conductivity": {"low": "1 mS/m", "likely": "5 mS/m", "high": "20 mS/m"}, "permittivity": 13}},
    {"loop__joint": [{"name": "clamp", "resistance": "300 \u03bc\u2126", "at": "capacitor"}]},
    {"loop__joint": [{"name": "clamp", "resistance": "300 \u00b5\u03a9", "at": "capacitor"}]},
    {"loop__conductor__temperature": "-10 degC"},
    {"loop__conductor__plating": {"material": "silver", "thickness": "5 \u03bcm"}},
    {"margins": {"voltage": 2, "exposure": "3 dB"}},
    {"capacitor__with": [{"connection": "parallel", "capacitance": "330 pF", "on": ["3.6 MHz"]}]},
]


@pytest.mark.parametrize("changes", ACCEPTED, ids=lambda c: "-".join(c) or "plain")
def test_what_the_reader_takes_the_schema_takes(changes: dict[str, Any]) -> None:
    tree = plain_tree(**changes)
    magsafe.parse_design(file_of(tree))
    validator(Which.design).validate(tree)


REFUSED: list[dict[str, Any]] = [
    {"schema": "magsafe.design/2"},
    {"loop__diameter": 1.0},
    {"loop__diameter": "1,5 m"},
    {"loop__diameter": "1 V"},
    {"loop__turns": 9},
    {"loop__colour": "red"},
    {"loop__conductor__conductivity": None, "loop__conductor__material": "coper"},
    {"loop__supports": ["cheese"]},
    {"capacitor__kind": "vacuum"},
    {"capacitor__quality_factor": {"low": 500, "high": 3000}},
    {"site__rules": ["us-fc"]},
    {"site__ground": "averige"},
    {"transmission": []},
    {"transmission__0__frequency": None},
    {"measured": "yes"},
]


@pytest.mark.parametrize("changes", REFUSED, ids="-".join)
def test_what_the_schema_refuses_the_reader_refuses(changes: dict[str, Any]) -> None:
    tree = plain_tree(**changes)
    with pytest.raises(magsafe.DesignError):
        magsafe.parse_design(file_of(tree))
    assert not validator(Which.design).is_valid(tree)


SPOILT: list[tuple[tuple[str | int, ...], Any]] = [
    (("verdict",), None),
    (("verdict",), "fine"),
    (("colour",), "green"),
    (("operating_points", 0, "findings", 0, "because"), None),
    (("operating_points", 0, "figures", "unloaded_q", "likely"), "many"),
]


@pytest.mark.parametrize(("path", "value"), SPOILT)
def test_what_is_no_sheet_is_refused(path: tuple[str | int, ...], value: str | None) -> None:
    sheet: Any = json.loads(sheet_of(SAMPLES / "breakwater_beacon.toml"))
    validator(Which.sheet).validate(sheet)
    place: Any = sheet
    for step in path[:-1]:
        place = place[step]
    if value is None:
        del place[path[-1]]
    else:
        place[path[-1]] = value
    with pytest.raises(ValidationError):
        validator(Which.sheet).validate(sheet)


def test_an_editor_is_offered_only_what_a_file_may_hold() -> None:
    made = json.loads(schema_text(Which.design))
    for block in made["$defs"].values():
        for field in block["properties"].values():
            if "default" in field and "$ref" not in json.dumps(field):
                Draft202012Validator(field).validate(field["default"])
            assert "null" not in json.dumps(field)
    offered = made["$defs"]["Conductor"]["properties"]["material"]["enum"]
    assert "copper tube" in offered
    assert "us-fcc" in made["$defs"]["Site"]["properties"]["rules"]["items"]["enum"]


def test_only_null_and_defaults_that_nobody_would_write_are_taken_out() -> None:
    told = {
        "anyOf": [{"type": "number"}, {"type": "null"}],
        "default": None,
        "properties": {"a": {"type": "string", "default": 2.0}, "b": {"type": "string", "default": "x"}},
    }
    assert as_written(told) == {
        "type": "number",
        "properties": {"a": {"type": "string"}, "b": {"type": "string", "default": "x"}},
    }
    several = {"anyOf": [{"type": "number"}, {"type": "string"}, {"type": "null"}]}
    assert as_written(several) == {"anyOf": [{"type": "number"}, {"type": "string"}]}
