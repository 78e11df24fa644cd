"""What a rule file and the mode table must hold, and what is said when they do not."""

import subprocess
import sys
from collections.abc import Callable
from dataclasses import FrozenInstanceError
from hashlib import sha256
from pathlib import Path

import pytest
from rule_text import SOUND, parse, problems_of

import magsafe.rules
from magsafe.design.tables import bands
from magsafe.rules import (
    RuleFileError,
    TableError,
    UnknownMode,
    UnknownRule,
    Who,
    load_rule,
    mode_duty,
    mode_named,
    mode_names,
    parse_rule,
    rule_names,
)
from magsafe.rules.duty import parse_modes
from magsafe.rules.table import FREQUENCY_UNITS, TIME_UNITS, parse_quantity

FOLDER = Path(magsafe.rules.__file__).parent


def test_the_sound_file_is_read() -> None:
    rule = parse(SOUND)
    (limit,) = rule.limits("public")
    assert limit.at(2e6) == 45.0
    assert limit.band == (1e6, 30e6)
    assert limit.averaging_time == 360.0
    assert limit.averaged
    assert rule.limits("trained") == ()
    assert rule.tier("trained") is None
    assert rule.why_without("trained") == "the crew have a by-law of their own"
    assert rule.why_without("public") == ""
    assert rule.currents == ()
    assert rule.uncovered_fields("public", 7.1e6) == ("magnetic",)
    assert rule.uncovered_fields("trained", 7.1e6) == ("electric", "magnetic")
    assert rule.holds_until is None
    assert rule.sha256 == sha256(SOUND.encode()).hexdigest()
    with pytest.raises(FrozenInstanceError):
        limit.unit = "A/m"  # type: ignore[misc]


def required_lines() -> list[str]:
    """Every line of the sound file that gives a required key, but those inside the segments."""
    optional = ("together_up_to", "nearest", "local")
    return [line for line in SOUND.splitlines() if " = " in line and "[" not in line and not line.startswith(optional)]


@pytest.mark.parametrize("line", sorted(set(required_lines())))
def test_a_missing_key_is_refused(line: str) -> None:
    key = line.split(" = ", maxsplit=1)[0]
    assert any(f"{key} is missing" in each for each in problems_of(SOUND.replace(line + "\n", "")))


@pytest.mark.parametrize("key", ["edition", "unit", "averaging_time", "source", "provenance"])
def test_a_row_lacking_a_key_names_the_row(key: str) -> None:
    head, row = SOUND.split("[[limit]]")
    kept = [line for line in row.splitlines() if not line.startswith(f"{key} = ")]
    assert problems_of(head + "[[limit]]" + "\n".join(kept)) == (f"head, limit 1: {key} is missing",)


def test_all_that_is_missing_is_told_at_once() -> None:
    text = SOUND.replace('unit = "V/m"\n', "").replace('source = "Harbour by-law 1, table 1"\n', "")
    assert len(problems_of(text)) == 2


@pytest.mark.parametrize("key", ["band", "coefficient", "exponent"])
def test_a_segment_lacking_a_key_is_refused(key: str) -> None:
    given = {"band": 'band = ["1 MHz", "2 MHz"], ', "coefficient": "coefficient = 50, "}
    text = SOUND.replace(given.get(key, ", exponent = 0"), "", 1)
    assert f"head, limit 1, segments 1: {key} is missing" in problems_of(text)


@pytest.mark.parametrize(
    ("right", "wrong", "told"),
    [
        ('unit = "V/m"', 'unit = "A/m"', "unit of electric must be V/m"),
        ('unit = "V/m"', 'unit = ""', "unit must be a text that is not empty"),
        ('who = "public"\nfield', 'who = "crew"\nfield', "who must be one of trained, public"),
        ('"verified"', '"hearsay"', "provenance must be one of verified, memory"),
        ('"6 min"', '"6"', "averaging_time: '6' is not a number with one of the units s, min"),
        ('"6 min"', '"six min"', "'six' in 'six min' is not a decimal number"),
        ('"6 min"', '"0 min"', "averaging_time must be longer than zero"),
        ('"2 MHz", "30 MHz"', '"3 MHz", "30 MHz"', "segments must rise and meet"),
        ('"2 MHz", "30 MHz"', '"1.9 MHz", "30 MHz"', "segments must rise and meet"),
        ('"2 MHz", "30 MHz"', '"2 MHz", "1 MHz"', "band must rise from above zero"),
        ('"2 MHz", "30 MHz"', '"2 MHz"', "band must be a list of 2"),
        ('"2 MHz", "30 MHz"', '"2 MHz", "30 GHz"', "'30 GHz' is not a number with one of the"),
        ("coefficient = 50", "coefficient = 0", "coefficient must be above zero"),
        ("coefficient = 50", "coefficient = nan", "coefficient must be a finite number"),
        ("coefficient = 50", 'coefficient = "50"', "coefficient must be a finite number"),
        ("exponent = 0", "exponent = 0, power = 2", "unknown key power"),
        ('edition = "1"\nsource', 'edition = "2"\nsource', "edition '2' is not that of the file"),
        ('provenance_detail = "the by-law"', 'provenance_detial = "x"', "provenance_detail is mis"),
        ("how_judged =", 'how_juged = "x"\nhow_judged =', "how_juged (nearest: how_judged)"),
        ('name = "harbour"', 'name = "quay"', "name 'quay' must be that of the file"),
        ('"2020-01"', '"January"', "a date must look like 2021-05-03, 2021-05 or 2021"),
        ('who = "public"\nown', 'who = "trained"\nown', "no [[tier]] says who public is"),
        ('who = "trained"\nwhy', 'who = "crew"\nwhy', "who must be one of trained, public"),
        ("why = ", 'wy = "x"\nwhy = ', "unknown key wy (nearest: why)"),
        ('who = "trained"\nwhy', 'who = "public"\nwhy', "[[without]] says there is no limit for public"),
        ('who = "trained"\nwhy', 'who = "public"\nwhy', "no judged limit for trained, and no [[without]] says why"),
        ("segments = [", "judged = false\nsegments = [", "why_not_judged goes with judged"),
        ("segments = [", 'judged = "no"\nsegments = [', "judged must be true or false"),
        ("segments = [", 'why_not_judged = "x"\nsegments = [', "why_not_judged goes with judged"),
        ("[[limit]]", "[limit]", "limit must be a list of tables"),
    ],
)
def test_an_unfit_value_is_refused(right: str, wrong: str, told: str) -> None:
    assert right in SOUND
    problems = problems_of(SOUND.replace(right, wrong, 1))
    assert any(told in each for each in problems), problems


def test_an_own_provenance_of_a_segment_needs_its_own_detail() -> None:
    text = SOUND.replace("exponent = -1", 'exponent = -1, provenance = "memory"')
    assert problems_of(text) == ("head, limit 1, segments 2: provenance_detail is missing",)
    rule = parse(text.replace('"memory" }', '"memory", provenance_detail = "nobody read it" }'))
    (limit,) = rule.limits("public")
    assert limit.provenance_at(1.5e6) == "verified"
    assert limit.provenance_at(2e6) == "memory"
    assert limit.provenance_detail_at(2e6) == "the by-law; nobody read it"
    assert limit.provenance_at(3e6) == "memory"
    assert limit.provenance_at(31e6) is None


def test_doubled_rows_and_tiers_are_refused() -> None:
    row = "[[limit]]" + SOUND.split("[[limit]]")[1]
    assert problems_of(SOUND + row) == ("two rows for public, electric, thermal whole-body",)
    tier = "[[tier]]" + SOUND.split("[[tier]]")[1].split("[[limit]]", maxsplit=1)[0]
    assert problems_of(SOUND + tier) == ("tier public is described twice",)
    without = "[[without]]" + SOUND.split("[[without]]")[1].split("[[tier]]", maxsplit=1)[0]
    assert problems_of(SOUND + without) == ("without trained is given twice",)


def test_a_tier_of_which_every_row_is_set_aside_needs_its_reason() -> None:
    """A row that is only shown limits nobody: such a tier is one without limits."""
    text = SOUND.replace("segments = [", 'judged = false\nwhy_not_judged = "x"\nsegments = [')
    assert problems_of(text) == (
        "no judged limit for public, and no [[without]] says why",
        "[body] names thermal whole-body, which is no judged basis that is averaged",
    )


CURRENT = """
[[current]]
who = "public"
kind = "limb"
unit = "mA"
averaging_time = "6 min"
source = "Harbour by-law 1, table 2"
provenance = "memory"
provenance_detail = "not read"
segments = [
  { band = ["1 MHz", "2 MHz"], coefficient = 40, exponent = 0 },
  { band = ["2 MHz", "30 MHz"], coefficient = 76, exponent = -1, provenance = "verified", provenance_detail = "it" },
]
"""


def test_a_current_is_read_and_limits_no_field() -> None:
    rule = parse(SOUND + CURRENT)
    (current,) = rule.currents
    assert (current.who, current.kind, current.averaging_time, current.averaged) == ("public", "limb", 360.0, True)
    assert [current.at(f) for f in (1e6, 2e6, 4e6, 31e6)] == [40.0, 38.0, 19.0, None]
    assert [each.provenance for each in current.segments] == ["memory", "verified"]
    assert rule.limits("public") == parse(SOUND).limits("public")


@pytest.mark.parametrize("line", [line for line in CURRENT.splitlines() if " = " in line and "[" not in line])
def test_a_current_lacking_a_key_is_refused(line: str) -> None:
    key = line.split(" = ", maxsplit=1)[0]
    assert f"head, current 1: {key} is missing" in problems_of(SOUND + CURRENT.replace(line + "\n", ""))


@pytest.mark.parametrize(
    ("right", "wrong", "told"),
    [
        ('"mA"', '"A"', "unit of a current must be mA"),
        ('"limb"', '"foot"', "kind must be one of contact"),
        ('"6 min"', '"0 s"', "averaging_time must be longer than zero"),
        ('"2 MHz", "30 MHz"', '"3 MHz", "30 MHz"', "segments must rise and meet"),
        ('"memory"', '"hearsay"', "provenance must be one of"),
        ("unit =", 'basis = "x"\nunit =', "unknown key basis"),
        (CURRENT, CURRENT + CURRENT, "two currents for public, limb"),
    ],
)
def test_an_unfit_current_is_refused(right: str, wrong: str, told: str) -> None:
    assert right in CURRENT
    problems = problems_of(SOUND + CURRENT.replace(right, wrong, 1))
    assert any(told in each for each in problems), problems


def test_what_is_no_toml_is_refused_with_its_name() -> None:
    assert len(problems_of("name = ")) == 1
    with pytest.raises(RuleFileError, match=r"harbour\.toml"):
        parse_rule(b"\xff", "harbour.toml")


@pytest.mark.parametrize("frequency", [0.0, -7.1e6, float("nan"), float("inf")])
def test_a_frequency_that_is_none_is_refused(frequency: float) -> None:
    limit = parse(SOUND).rows[0]
    asks: tuple[Callable[[float], object], ...] = (limit.at, limit.provenance_at)
    for ask in asks:
        with pytest.raises(ValueError, match="frequency must be positive and finite"):
            ask(frequency)


def test_the_files_shipped_are_sound_and_hashed() -> None:
    assert rule_names() == tuple(sorted(path.stem for path in (FOLDER / "limits").glob("*.toml")))
    assert {"us-fcc", "icnirp-2020"} <= set(rule_names())
    for name in rule_names():
        rule = load_rule(name)
        assert rule.sha256 == sha256((FOLDER / "limits" / rule.file).read_bytes()).hexdigest()
        assert load_rule(name) is rule
        tiers: tuple[Who, ...] = ("trained", "public")
        for who in tiers:
            assert bool(rule.limits(who)) != bool(rule.why_without(who))
            assert rule.uncovered_fields(who, 7.1e6) == (() if rule.limits(who) else ("electric", "magnetic"))
            assert (rule.tier(who) is None) == bool(rule.why_without(who))


def test_the_tiers_that_a_rule_does_not_know() -> None:
    found = {(name, each.who) for name in rule_names() for each in load_rule(name).without}
    assert found == {
        ("eu-1999-519", "trained"),
        ("de-26bimschv", "trained"),
        ("jp", "trained"),
        ("eu-2013-35", "public"),
        ("jp-1990", "public"),
    }


def test_the_rules_are_covered_on_every_amateur_band_but_the_fccs_lowest() -> None:
    """Both fields have a judged level wherever amateurs transmit; below 300 kHz the FCC has none."""
    gaps = {
        (name, band.name)
        for name in rule_names()
        for band in bands()
        for who in ("trained", "public")
        for edges in band.regions
        for edge in edges
        if load_rule(name).limits(who) and load_rule(name).uncovered_fields(who, edge)
    }
    assert gaps == {("us-fcc", "2200 m")}


def test_rows_not_judged_are_shown_but_not_among_the_limits() -> None:
    for name, count in (("us-fcc", 2), ("icnirp-2020", 4), ("eu-2013-35", 2), ("ieee-c951-2019", 3)):
        rule = load_rule(name)
        aside = [row for row in rule.rows if not row.judged]
        assert len(aside) == count
        assert not set(aside) & {*rule.limits("trained"), *rule.limits("public")}


def test_an_unknown_rule_names_the_nearest() -> None:
    with pytest.raises(UnknownRule) as refused:
        load_rule("ICNIRP-2002")
    assert refused.value.nearest == ("icnirp-2020", "icnirp-1998")
    assert isinstance(refused.value, LookupError)
    assert str(refused.value) == (
        f"no rule 'ICNIRP-2002'; nearest: icnirp-2020, icnirp-1998; known: {', '.join(rule_names())}"
    )
    with pytest.raises(UnknownRule, match="nothing resembles it"):
        load_rule("../modes")


def test_an_unknown_mode_names_the_nearest() -> None:
    assert mode_names() == ("SSB", "SSB unprocessed", "CW", "AM", "FM", "data")
    with pytest.raises(UnknownMode) as refused:
        mode_duty("ssb")
    assert "SSB" in refused.value.nearest


def test_bandwidths_are_called_common_practice() -> None:
    found = {name: mode_named(name).signal_bandwidth for name in mode_names()}
    assert found == {
        "SSB": 2700.0,
        "SSB unprocessed": 2700.0,
        "CW": 500.0,
        "AM": 6000.0,
        "FM": 16000.0,
        "data": None,
    }
    for name, bandwidth in found.items():
        told = mode_named(name).bandwidth_source
        assert told == ("" if bandwidth is None else "common practice")


MODE = """\
[[mode]]
name = "semaphore"
meaning = "flags"
duty = "30 %"
duty_source = "nowhere"
duty_evidence = "derived"
duty_evidence_detail = "made up"
signal_bandwidth = "1 kHz"
bandwidth_source = "common practice"
"""


def test_the_sound_mode_is_read() -> None:
    assert parse_modes(MODE.encode(), "modes.toml")["semaphore"].duty == 0.3


@pytest.mark.parametrize("line", [each for each in MODE.splitlines() if " = " in each])
def test_a_mode_lacking_a_key_is_refused(line: str) -> None:
    left_over = "unknown key bandwidth_source" if line.startswith("signal") else "is missing"
    with pytest.raises(TableError, match=left_over):
        parse_modes(MODE.replace(line + "\n", "").encode(), "modes.toml")


@pytest.mark.parametrize(
    ("right", "wrong", "told"),
    [
        ("30 %", "0 %", "duty must be above 0 %"),
        ("30 %", "101 %", "duty must be above 0 %"),
        ('"30 %"', "0.3", "duty must be a text"),
        ('"1 kHz"', '"0 kHz"', "signal_bandwidth must be above zero"),
        (MODE, MODE + MODE, "two modes share a name"),
    ],
)
def test_an_unfit_mode_is_refused(right: str, wrong: str, told: str) -> None:
    with pytest.raises(TableError, match=told):
        parse_modes(MODE.replace(right, wrong).encode(), "modes.toml")


def test_quantities_are_decimal() -> None:
    """Two spellings of one edge give one float, so that segments meet."""
    assert parse_quantity("1.34 MHz", FREQUENCY_UNITS) == 1340e3
    assert parse_quantity("1340 kHz", FREQUENCY_UNITS) == 1340e3
    assert parse_quantity("1.5 min", TIME_UNITS) == 90.0
    for text in ("7.1", "7.1MHz", "NaN MHz", "1e999 MHz", "MHz"):
        with pytest.raises(ValueError, match=r"is not"):
            parse_quantity(text, FREQUENCY_UNITS)


def test_the_rules_need_nothing_but_the_standard_library() -> None:
    heavy = "{'numpy', 'scipy', 'pint', 'pydantic', 'rich'}"
    code = f"import magsafe.rules, sys; print(sorted({heavy} & set(sys.modules)))"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
