"""The commands as a person and a script meet them: output, errors, exit statuses."""

import json
import os
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest
from commands import COMMANDS, run
from designs import file_of, plain_tree

import magsafe

SAMPLES = Path(__file__).parents[2] / "sample_designs"
CLEAR = {
    "capacitor__rated_voltage": "30 kV",
    "site__rules": ["us-fcc"],
}


def check(*arguments: str, **changes: Any) -> subprocess.CompletedProcess[str]:
    return run("check", "-", *arguments, given=file_of(plain_tree(**changes)))


def test_version_both_ways() -> None:
    assert run("--version").stdout == f"magsafe {magsafe.__version__}\n"


def test_help_names_every_command() -> None:
    text = run("--help").stdout
    for command in COMMANDS:
        assert command in text
    for command in COMMANDS:
        assert run(command, "--help").returncode == 0


@pytest.mark.parametrize("sample", sorted(SAMPLES.glob("*.toml")), ids=lambda p: p.stem)
def test_every_sample_is_checked(sample: Path) -> None:
    done = run("check", str(sample))
    assert done.stderr == ""
    verdict = done.stdout.split()[1]
    assert done.returncode == {"clear": 0, "narrow": 0, "stop": 1, "unproven": 3}[verdict]
    assert max(map(len, done.stdout.splitlines())) <= 80
    assert not any(line.endswith(" ") for line in done.stdout.splitlines())
    assert "\x1b" not in done.stdout


def capacitor_verdict(sample: str) -> str:
    """Return the worst verdict over the capacitor's findings of a sample."""
    sheet = magsafe.check(magsafe.read_design(SAMPLES / f"{sample}.toml"))
    found = [f.verdict for f in sheet.all_findings() if f.id.startswith("capacitor.")]
    return min(found, key=["stop", "unproven", "narrow", "clear"].index)


@pytest.mark.parametrize(
    ("sample", "verdict"),
    [
        ("slipway_portable", "clear"),
        ("quay_rail", "narrow"),
        ("breakwater_mast", "stop"),
        ("lighthouse_gallery", "unproven"),
    ],
)
def test_the_samples_show_a_capacitor_of_each_verdict(sample: str, verdict: str) -> None:
    assert capacitor_verdict(sample) == verdict


@pytest.mark.parametrize(
    ("sample", "verdict"),
    [
        ("slipway_portable", "clear"),
        ("quay_rail", "narrow"),
        ("breakwater_mast", "stop"),
        ("lighthouse_gallery", "unproven"),
        ("net_loft_balcony", "clear"),
        ("pier_head_square", "clear"),
        ("pass_refuge", "stop"),
        ("breakwater_beacon", "stop"),
    ],
)
def test_each_sample_has_its_verdict_as_a_whole(sample: str, verdict: str) -> None:
    assert magsafe.check(magsafe.read_design(SAMPLES / f"{sample}.toml")).verdict == verdict


def test_json_is_alone_on_standard_output() -> None:
    done = check("--json")
    assert json.loads(done.stdout)["schema"] == "magsafe.sheet/1"
    assert done.stderr == ""


def test_exit_statuses() -> None:
    assert check(capacitor__rated_voltage="2 kV").returncode == 1
    assert check().returncode == 3
    assert check(loop__diameter="1").returncode == 2
    assert run("check", "no_such_file.toml").returncode == 2
    assert run("check").returncode == 2
    assert run("chekc").returncode == 2


def test_exit_statuses_of_verdicts() -> None:
    from magsafe.cli.common import exit_status

    assert [exit_status(v) for v in ("clear", "narrow", "stop", "unproven")] == [0, 0, 1, 3]
    assert exit_status("narrow", strict=True) == 4
    assert exit_status("clear", strict=True) == 0


def test_standard_input_is_named_in_errors() -> None:
    done = check(loop__diameter="1,5 m")
    assert done.stdout == ""
    assert done.stderr.startswith("<stdin>:2  loop.diameter\n")
    assert "Traceback" not in done.stderr


def test_a_fault_of_the_program_is_no_verdict(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    from magsafe import __main__
    from magsafe.cli import app

    def broken(arguments: list[str]) -> None:
        raise RuntimeError("a bug")

    monkeypatch.setattr(app, "run", broken)
    monkeypatch.setattr(sys, "argv", ["magsafe", "check", "x.toml"])
    with pytest.raises(SystemExit) as left:
        __main__.main()
    assert left.value.code == 70
    error = capsys.readouterr().err
    assert "fault of the program" in error
    assert "Traceback" not in error
    monkeypatch.setattr(sys, "argv", ["magsafe", "check", "x.toml", "--debug"])
    with pytest.raises(RuntimeError, match="a bug"):
        __main__.main()


def test_ascii_streams_get_ascii() -> None:
    done = run("check", str(SAMPLES / "quay_rail.toml"), env={"PYTHONIOENCODING": "ascii"})
    assert done.stdout.isascii()
    assert done.stdout.startswith("[narrow]")
    assert "mohm" in done.stdout
    assert "?" not in done.stdout.split("Figures")[1].split("Not known")[0]


def test_colour_is_for_terminals_and_obeys_no_color() -> None:
    coloured = run("check", str(SAMPLES / "quay_rail.toml"), env={"FORCE_COLOR": "1"})
    assert "\x1b[" in coloured.stdout
    plain = run("check", str(SAMPLES / "quay_rail.toml"), env={"NO_COLOR": "1"})
    assert "\x1b[" not in plain.stdout


def test_a_name_cannot_mark_up_the_terminal() -> None:
    done = check(transmission__0__name="[red]x")
    assert "[red]x" in done.stdout


def test_narrow_terminals_lose_no_word() -> None:
    done = run("check", str(SAMPLES / "slipway_portable.toml"), env={"COLUMNS": "60"})
    assert max(map(len, done.stdout.splitlines())) <= 60
    assert "capacitor.voltage" in done.stdout


def test_tables_and_schemas() -> None:
    assert "copper tube" in run("materials").stdout
    assert "40 m" in run("bands").stdout
    for which in ("design", "sheet"):
        made = json.loads(run("schema", which).stdout)
        assert made["$schema"].startswith("https://json-schema.org/")
        assert made["properties"]
    assert "transmission" in json.loads(run("schema", "design").stdout)["properties"]
    assert run("schema", "nothing").returncode == 2


@pytest.mark.parametrize(
    ("arguments", "status"),
    [
        (["check", "breakwater_mast"], 1),
        (["keepout", "lighthouse_gallery", "--json"], 3),
        (["bands"], 0),
        (["--version"], 0),
    ],
)
def test_a_reader_that_closes_early_changes_no_exit_status(arguments: list[str], status: int) -> None:
    named = [str(SAMPLES / f"{a}.toml") if (SAMPLES / f"{a}.toml").exists() else a for a in arguments]
    reading, writing = os.pipe()
    os.close(reading)
    done = subprocess.run(
        [sys.executable, "-m", "magsafe", *named], stdout=writing, stderr=subprocess.PIPE, text=True, check=False
    )
    os.close(writing)
    assert done.stderr == ""
    assert done.returncode == status


@pytest.mark.parametrize("encoding", ["ascii", "cp1252", "latin-1"])
def test_the_machine_form_is_utf_8_on_any_terminal(encoding: str) -> None:
    done = run("check", str(SAMPLES / "breakwater_mast.toml"), "--json", env={"PYTHONIOENCODING": encoding})
    assert json.loads(done.stdout)["verdict"] == "stop"
    assert done.stderr == ""


@pytest.mark.parametrize("columns", ["1", "10", "40", "200"])
def test_any_width_is_printed(columns: str) -> None:
    for command in (["check", str(SAMPLES / "quay_rail.toml")], ["bands"], ["rules", "us-fcc"]):
        done = run(*command, env={"COLUMNS": columns})
        assert done.returncode == 0
        assert "…-" not in done.stdout


def test_closed_streams_are_no_fault() -> None:
    sample = SAMPLES / "breakwater_mast.toml"
    for redirect, status in (("<&-", 2), (">&-", 1), ("2>&-", 1)):
        design = "-" if redirect == "<&-" else str(sample)
        command = f"'{sys.executable}' -m magsafe check {design} {redirect}"
        done = subprocess.run(["bash", "-c", command], capture_output=True, text=True, check=False)
        assert done.returncode == status, redirect
    command = f"'{sys.executable}' -m magsafe check missing.toml 2>&-"
    assert subprocess.run(["bash", "-c", command], capture_output=True, check=False).returncode == 2


def test_a_long_name_does_not_push_the_findings_off_the_screen() -> None:
    done = check(transmission__0__name="q" * 5000, capacitor__rated_voltage="2 kV")
    assert "capacitor.voltage" in "\n".join(done.stdout.splitlines()[:20])
    assert done.stdout.count("q" * 30) < 10


def test_large_powers_are_written_out() -> None:
    done = check(transmission__0__power="10 kW")
    assert "10000 W" in done.stdout
    assert "e+04" not in done.stdout


@pytest.mark.parametrize("arguments", [["check", ""], ["check", "/"], ["check", "/dev/null"]])
def test_strange_files_are_told_in_one_screen(arguments: list[str]) -> None:
    done = run(*arguments)
    assert done.returncode == 2
    assert done.stderr.count("\n") < 10
    assert "Traceback" not in done.stderr
