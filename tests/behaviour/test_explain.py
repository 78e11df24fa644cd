"""What `magsafe explain` tells: of everything, nothing beside, and with numbers from which the figures follow."""

import ast
import math
import re
import subprocess
import sys
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, fields
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from commands import run
from designs import file_of, measured_changes, plain_design, plain_tree

import magsafe
from magsafe.analysis import chain as chains
from magsafe.analysis import sky as skies
from magsafe.analysis import soil
from magsafe.analysis.figures import Figures
from magsafe.analysis.operating_point import OperatingPoint, operating_point
from magsafe.analysis.terms import Term
from magsafe.analysis.workings import working
from magsafe.design.model import Design
from magsafe.reports.explanations import FigureText, figure_texts, finding_text, finding_texts, near
from magsafe.spread import Spread

PACKAGE = Path(magsafe.__file__).parent
SAMPLES = Path(__file__).parents[2] / "sample_designs"
DESIGNS = sorted(SAMPLES.glob("*.toml"))
NAMES = tuple(field.name for field in fields(Figures))
ENDS = ("low", "likely", "high")
BY_SEARCH = {"gain_elevation"}  # found by search: no number by itself goes in

# Designs that use what the samples leave out, on figures: each is a key that moves a letter of some formula.
CASES: dict[str, dict[str, Any]] = {
    "free space": {},
    "over a plane": {"site__ground": "perfect", "loop__centre_height": "1.5 m"},
    "over any soil": {"site__ground": None, "loop__centre_height": "1.5 m"},
    "at any height": {"site__ground": "average"},
    "flat": {"loop__plane": "horizontal", "loop__centre_height": "1 m", "site__ground": "poor"},
    "over one soil": {
        "loop__centre_height": "1 m",
        "capacitor__position": "side",
        "site__ground": {"conductivity": "5 mS/m", "permittivity": 13},
    },
    "free space radiates most": {
        "site__ground": None,
        "loop__centre_height": "4 m",
        "transmission__0__frequency": "24 MHz",
    },
    "soil moves the reactance": {
        "loop__centre_height": "0.61 m",
        "capacitor__position": "top",
        "site__ground": "average",
        "transmission__0__frequency": "28 MHz",
        "capacitor__series_resistance": None,
        "capacitor__quality_factor": 2000,
    },
    "overshoot and line": {"margins": {"overshoot": "1.5 dB"}, "feed": {"line_loss": "1 dB"}},
    "joints": {
        "loop__joint": [
            {"name": "clamps", "count": 2, "kind": "bolted lug", "at": "capacitor"},
            {"name": "flange", "resistance": "1 mohm", "at": "opposite"},
            {"name": "corners", "count": 4, "kind": "soldered lap", "at": "spread"},
        ]
    },
    "padding": {
        "capacitor__series_resistance": None,
        "capacitor__with": [
            {"connection": "parallel", "capacitance": "100 pF"},
            {"connection": "series", "capacitance": "1 nF", "quality_factor": 800},
        ],
    },
    "padding of ohms": {
        "capacitor__series_resistance": {"low": "1 mohm", "likely": "2 mohm", "high": "3 mohm"},
        "capacitor__with": [{"connection": "parallel", "capacitance": "100 pF"}],
    },
    "turns": {"loop__turns": 2, "loop__turn_spacing": "60 mm"},
    "square": {"loop__shape": "rectangle", "loop__diameter": None, "loop__width": "1 m", "loop__height": "0.8 m"},
    "near the anti-resonance": {"transmission__0__frequency": "30 MHz"},
    "overs": {
        "loop__conductor": {"form": "tube", "outer_diameter": "22 mm", "wall": "1 mm", "material": "copper tube"},
        "transmission__0__mode": "SSB",
        "transmission__0__over": {"transmit": "3 min", "listen": "2 min"},
    },
    "tune-up": {
        "loop__conductor": {"form": "tube", "outer_diameter": "8 mm", "wall": "1 mm", "material": "copper tube"},
        "transmission__0__mode": "CW",
        "transmission__0__over": {"transmit": "1 min", "listen": "2 min"},
        "transmission__0__tune_up": {"power": "90 W", "time": "100 s"},
    },
    "overs of a braid": {
        "loop__conductor": {"form": "braid", "outer_diameter": "10 mm", "material": "copper"},
        "transmission__0__over": {"transmit": "3 min", "listen": "2 min"},
    },
    "runs away": {
        "loop__conductor": {"form": "rod", "outer_diameter": "1 mm", "material": "aluminium 1350"},
        "transmission__0__power": "10 kW",
    },
    "stub": {
        "capacitor": {
            "kind": "coaxial stub",
            "dielectric": "PTFE",
            "inner_diameter": "3 mm",
            "outer_diameter": "10 mm",
            "length": "2 m",
        }
    },
    "full-wave over a plane": {
        "capacitor": {"kind": "none"},
        "site__ground": "perfect",
        "loop__centre_height": "3 m",
        "loop__diameter": "1.4 m",
        "transmission__0__frequency": "70 MHz",
    },
    "full-wave over any soil": {
        "capacitor": {"kind": "none", "position": "top"},
        "site__ground": None,
        "loop__centre_height": "2 m",
        "feed": {"line_loss": "1 dB"},
        "transmission__0__frequency": "95 MHz",
    },
    **{
        f"full-wave at {frequency}": {
            "capacitor": {"kind": "none", "position": "bottom"},
            "loop__shape": "rectangle",
            "loop__diameter": None,
            "loop__width": "0.4 m",
            "loop__height": "1.2 m",
            "loop__centre_height": "3 m",
            "loop__joint": [
                {
                    "name": "resistors",
                    "count": 8,
                    "at": "capacitor",
                    "resistance": {"low": "0.01 ohm", "likely": "4 ohm", "high": "10 ohm"},
                }
            ],
            "feed": {"line_loss": {"low": "0 dB", "likely": "0.3 dB", "high": "0.6 dB"}},
            "site__ground": "average",
            "transmission__0__frequency": frequency,
        }
        for frequency in ("98 MHz", "102 MHz")
    },
    "full-wave at any height": {
        "capacitor": {"kind": "none"},
        "site__ground": "average",
        "transmission__0__frequency": "95 MHz",
    },
    "full-wave through a transformer": {
        "capacitor": {"kind": "none"},
        "site__ground": "average",
        "loop__centre_height": "3 m",
        "feed": {"match": "2:1 transformer"},
        "transmission__0__frequency": "95 MHz",
    },
    "full-wave through a section at any height": {
        "capacitor": {"kind": "none"},
        "site__ground": "average",
        "feed": {"match": "quarter-wave section", "section_impedance": "82 ohm"},
        "transmission__0__frequency": "95 MHz",
    },
    "measured": measured_changes(2500.0, loop__centre_height="1.5 m", site__ground="average"),
    "measured at any height": measured_changes(2500.0, site__ground="average"),
    "measured worse": measured_changes(800.0, loop__centre_height="1.5 m", site__ground=None),
    "measured better": measured_changes(9000.0),
    "coupling loop": {"feed": {"coupling": "small loop", "small_loop": {"diameter": "0.21 m", "wire": "3 mm"}}},
    "coupling loop too large": {"feed": {"coupling": "small loop", "small_loop": {"diameter": "0.35 m"}}},
    "coupling loop beside the conductor": {
        "loop__centre_height": "2 m",
        "site__ground": "average",
        "feed": {
            "coupling": "small loop",
            "small_loop": {"position": "opposite the capacitor", "clearance": "30 mm", "diameter": "0.15 m"},
        },
    },
    "by capacitors": {"loop__centre_height": "2 m", "site__ground": "average", "feed": {"coupling": "capacitors"}},
    "by capacitors, balanced": {
        "margins": {"overshoot": "1 dB"},
        "feed": {"coupling": "capacitors", "series_capacitor": {"balanced": True, "capacitance": "12 pF"}},
    },
    "beyond tuning": {"transmission__0__frequency": "100 MHz"},
}


@cache
def points_of(name: str) -> tuple[Design, tuple[OperatingPoint, ...]]:
    design = magsafe.read_design(SAMPLES / f"{name}.toml") if name not in CASES else plain_design(**CASES[name])
    return design, tuple(operating_point(design, transmission) for transmission in design.transmission)


@cache
def worked(case: str, index: int, name: str) -> tuple[Term, ...]:
    design, points = points_of(case)
    return working(name, design, points[index])


EVERY = [*CASES, *(path.stem for path in DESIGNS)]


# Nothing missing, nothing left over ------------------------------------------------------------------------


def test_every_figure_is_explained_and_nothing_else() -> None:
    import tomllib

    told = tomllib.loads((PACKAGE / "reports" / "explained_figures.toml").read_text(encoding="utf-8"))
    assert list(told) == ["figure"]
    assert set(told["figure"]) == set(NAMES)
    assert tuple(figure_texts()) == NAMES
    known = {"title", "words", "formula", "letters", "low", "high", "danger", "valid", "error", "source", "by_hand"}
    for name, entry in told["figure"].items():
        assert known - {"by_hand"} <= set(entry) <= known, name


def families_made() -> Iterator[str]:
    """Yield an id of each family that checks/ makes: of `Check(` calls, names of the design replaced by stand-ins."""
    for path in sorted((PACKAGE / "checks").glob("*.py")):
        tree = ast.parse(path.read_text(encoding="utf-8"))
        texts = dict(_texts(tree))
        for scope in ast.walk(tree):
            if not isinstance(scope, ast.FunctionDef | ast.Module):
                continue
            for node in ast.walk(scope) if isinstance(scope, ast.FunctionDef) else scope.body:
                inner = ast.walk(node) if isinstance(scope, ast.Module) and isinstance(node, ast.Assign) else [node]
                for call in inner:
                    if isinstance(call, ast.Call) and isinstance(call.func, ast.Name) and call.func.id == "Check":
                        yield from _ids_of(call.args[0], scope, texts)


def _texts(tree: ast.Module) -> Iterator[tuple[str, str]]:
    """Yield the names of a module that stand for a text, and the text."""
    for node in tree.body:
        if isinstance(node, ast.Assign):
            target, value = node.targets[0], node.value
            names = target.elts if isinstance(target, ast.Tuple) else [target]
            values = value.elts if isinstance(value, ast.Tuple) else [value]
            for name, each in zip(names, values, strict=False):
                if isinstance(name, ast.Name) and isinstance(each, ast.Constant) and isinstance(each.value, str):
                    yield name.id, each.value


def _ids_of(first: ast.expr, scope: ast.AST, texts: Mapping[str, str]) -> Iterator[str]:
    match first:
        case ast.Constant(str(value)):
            yield value
        case ast.JoinedStr(values):
            yield "".join(_stand_in(value, texts) for value in values)
        case ast.Name(id=name) if name in texts:
            yield texts[name]
        case ast.Name():
            # An id by its name: one of those that stand in a table of the same function.
            for node in ast.walk(scope):
                named = node.elts[0] if isinstance(node, ast.Tuple) and node.elts else None
                if isinstance(named, ast.Constant) and "." in str(named.value):
                    yield str(named.value)
        case ast.Attribute(attr="id"):
            pass  # the id of another check, which is collected where that is made
        case _:
            raise AssertionError(f"an id that this test cannot read: {ast.unparse(first)}")


def _stand_in(value: ast.expr, texts: Mapping[str, str]) -> str:
    if isinstance(value, ast.Constant):
        return str(value.value)
    text = ast.unparse(value.value if isinstance(value, ast.FormattedValue) else value)
    if text in texts:
        return texts[text]
    if re.search(r"\bwho\b", text):
        return "public"
    return "us-fcc" if "rule" in text else "" if " if " in text else "1"


def test_every_finding_is_explained_and_nothing_else() -> None:
    made = set(families_made())
    assert len(made) > 25
    found = {name: finding_text(name) for name in made}
    assert [name for name, text in found.items() if text is None] == []
    assert {text.id for text in found.values() if text} == {each.id for each in finding_texts()}


def test_an_id_is_of_its_own_family() -> None:
    for name, family in {
        "capacitor.voltage": "capacitor.voltage",
        "capacitor.padding.330-pf.voltage": "capacitor.padding.<part>.voltage",
        "capacitor.padding.330-pf-no-2.heat": "capacitor.padding.<part>.heat",
        "joint.heat.capacitor-clamps": "joint.heat.<joint>",
        "joint.heat.": "joint.heat.<joint>",
        "exposure.rules": "exposure.rules",
        "exposure.us-fcc.public": "exposure.<rule>.<who>",
        "exposure.us-fcc.public.quay-walk": "exposure.<rule>.<who>.<place>",
        "exposure.us-fcc.public.session-1": "exposure.<rule>.<who>.<place>",
        "exposure.icnirp-2020.trained.session-2.desk": "exposure.<rule>.<who>.session-<number>.<place>",
        "exposure.probe.public": "exposure.probe.<probe>",
        "exposure.probe.desk.h": "exposure.probe.<probe>",
        "exposure.<rule>.<who>": "exposure.<rule>.<who>",
    }.items():
        text = finding_text(name)
        assert text is not None, name
        assert text.id == family
    for name in ("capacitor", "capacitor.voltage.x", "exposure.us-fc.public", "exposure.us-fcc.everyone", "joint.heat"):
        assert finding_text(name) is None


@pytest.mark.parametrize("sample", DESIGNS, ids=lambda p: p.stem)
def test_every_finding_of_a_sample_is_explained(sample: Path) -> None:
    for finding in magsafe.check(magsafe.read_design(sample)).all_findings():
        text = finding_text(finding.id)
        assert text is not None, finding.id
        if not text.margin:
            assert finding.margin_found is None, finding.id
        elif finding.margin_found is not None and finding.value is not None and finding.limit is not None:
            end = getattr(finding.value, text.end)
            assert text.margin in ("L / V", "V / L")
            ratio = finding.limit.value / end if text.margin == "L / V" else end / finding.limit.value
            assert finding.margin_found == pytest.approx(ratio, rel=1e-9), finding.id


def test_what_a_finding_looks_at_is_a_figure() -> None:
    for text in finding_texts():
        assert set(text.figures) <= set(NAMES), text.id
        assert (text.margin == "") == (text.end == ""), text.id
    used = figure_texts()["capacitor_peak_voltage"].used_by
    assert {"capacitor.voltage", "capacitor.gap"} <= set(used)


@pytest.mark.parametrize(
    ("finding", "figure"),
    [
        ("capacitor.voltage", "capacitor_peak_voltage"),
        ("capacitor.current", "capacitor_rms_current"),
        ("loop.bandwidth", "swr2_bandwidth"),
        ("conductor.temperature", "conductor_temperature_rise"),
        ("capacitor.range", "tuning_capacitance"),
        ("loop.size", "perimeter_in_wavelengths"),
    ],
)
def test_these_findings_hold_the_figure_itself(finding: str, figure: str) -> None:
    assert finding in figure_texts()[figure].used_by
    for point in magsafe.check(magsafe.read_design(SAMPLES / "quay_rail.toml")).operating_points:
        value = next(each.value for each in point.findings if each.id == finding)
        told = point.figures[figure]
        assert value is not None
        assert [value.low, value.likely, value.high] == [told.low, told.likely, told.high]


def test_texts_claim_nothing_that_the_house_does_not_say() -> None:
    for path in ("explained_figures.toml", "explained_findings.toml"):
        text = (PACKAGE / "reports" / path).read_text(encoding="utf-8").casefold()
        assert text.isascii()
        assert not re.search(r"\b(safe|safely|passes|compliant|approved)\b", text)
    for told in figure_texts().values():
        assert "{" not in "".join((told.words, told.valid, told.error, told.low, told.high, told.danger))


def test_stated_errors_are_those_of_the_program() -> None:
    texts = figure_texts()
    assert texts["capacitor_peak_voltage"].error.startswith(f"{100 * chains.VOLTAGE_ERROR:g} %")
    assert texts["unloaded_q"].error.startswith(f"{100 * chains.QUALITY_ERROR:g} %")
    assert texts["port_reactance"].error.startswith(f"{100 * chains.REACTANCE_ERROR:g} %")
    assert "0.001 to 3 wavelengths" in texts["total_resistance"].valid
    soils, losses, directions = (
        f"{100 * share:g} %" for share in (soil.BETWEEN_SOILS, soil.BETWEEN_LOSSES, skies.BETWEEN_DIRECTIONS)
    )
    assert f"{soils} of it at the high end" in texts["ground_resistance"].error
    assert f"and {losses} of what soil adds" in texts["ground_resistance"].error
    for name in ("overall_efficiency", "gain"):
        assert texts[name].error.startswith(f"twice {100 * chains.RESISTANCE_ERROR:g} %")
        assert f"twice {soils}" in texts[name].error
    assert f"{directions} for directions between" in texts["gain"].error
    assert f"{90.0 / skies.LEVELS:g} degrees apart" in texts["gain_elevation"].error


def test_numbers_in_the_texts_of_findings_are_those_of_the_program() -> None:
    from magsafe.analysis.dielectric_stress import SHEET_SHARE, WORKING
    from magsafe.analysis.rated_current import RATED_AIR
    from magsafe.analysis.rated_voltage import RATED_TO
    from magsafe.analysis.soil import LOWEST
    from magsafe.analysis.tuning import STEP_SWR
    from magsafe.analysis.warmth import CONVECTION_SCATTER, POOR_JOINT
    from magsafe.checks.line_capacitor import NEARLY
    from magsafe.checks.loop import MOST_SWR
    from magsafe.checks.probe import FAINT
    from magsafe.checks.tuning import STEPS_IN_WIDTH

    words = {each.id: f"{each.asks} {each.limit} {each.rests}" for each in finding_texts()}
    assert f"{LOWEST:g} radii" in words["loop.ground"]
    assert f"{LOWEST:g} radii" in words["capacitor.range"]
    assert f"SWR of {MOST_SWR:g}" in words["loop.size"]
    assert f"{NEARLY:g} times" in words["capacitor.geometry"]
    assert f"SWR {STEP_SWR:g}" in words["capacitor.tuning_step"]
    assert f"{RATED_TO:g} m" in words["capacitor.voltage"]
    assert f"{RATED_AIR - 273.15:g} degC" in words["capacitor.current"]
    assert f"margin of {1.0 / WORKING:g}" in words["capacitor.dielectric"]
    assert (SHEET_SHARE, POOR_JOINT, FAINT, STEPS_IN_WIDTH) == (1 / 5, 10.0, 1 / 10, 2.0)
    assert "A fifth of the sheet" in words["capacitor.dielectric"]
    assert "ten times as bad" in words["joint.heat.<joint>"]
    assert "less than a tenth" in words["exposure.probe.<probe>"]
    assert "two steps" in words["capacitor.tuning_step"]
    assert CONVECTION_SCATTER == 1 / 5
    assert "a fifth off convection" in figure_texts()["conductor_temperature_rise"].high


def test_sources_are_those_that_the_figures_carry() -> None:
    carried: dict[str, set[str]] = {name: set() for name in NAMES}
    for case in EVERY:
        for point in points_of(case)[1]:
            for name in NAMES:
                figure = getattr(point.figures, name)
                if figure.spread.known:
                    carried[name].add(figure.source)
    for name, text in figure_texts().items():
        assert set(text.sources) == (carried[name] or {"none"}), name


# Numbers ---------------------------------------------------------------------------------------------------


def terms_of(name: str, case: str = "quay_rail") -> tuple[dict[str, Term], Spread]:
    spread: Spread = getattr(points_of(case)[1][0].figures, name).spread
    return {term.letter: term for term in worked(case, 0, name)}, spread


def evaluated(text: FigureText, letters: dict[str, float]) -> float:
    """Return what a formula of the texts gives; `x_1`, `x_2` ... become the array `x_k`."""
    values: dict[str, Any] = dict(letters)
    for family in {letter for letter in text.letters if letter.endswith("_k")}:
        values[family] = np.array([v for k, v in letters.items() if re.fullmatch(rf"{family[:-1]}\d+", k)])
    functions = {"sqrt": math.sqrt, "ln": math.log, "pi": math.pi, "sum": np.sum, "min": min, "max": max, "abs": abs}
    for step in text.formula:
        name, right = step.split(" = ", 1)
        code = re.sub(r"\|(\w+)\|", r"abs(\1)", right).replace("^", "**")
        values[name] = eval(code, functions, values)
    return float(values[text.formula[-1].split(" = ")[0]])


@pytest.mark.parametrize("case", EVERY)
def test_the_numbers_that_went_in_give_the_figure(case: str) -> None:
    for number, point in enumerate(points_of(case)[1]):
        for name, text in figure_texts().items():
            spread: Spread = getattr(point.figures, name).spread
            found = worked(case, number, name)
            if not spread.known or name in BY_SEARCH:
                assert found == (), name
                continue
            for index, end in enumerate(ENDS):
                value = getattr(spread, end)
                letters = {term.letter: term.ends[index] for term in found}
                if value is None:
                    assert None in letters.values(), (name, end)
                    continue
                known = {letter: each for letter, each in letters.items() if each is not None}
                assert known == letters, (name, end)
                if not known:
                    assert value == 0.0, name
                    continue
                assert evaluated(text, known) == pytest.approx(value, rel=1e-9, abs=1e-15), (name, end)


def test_every_formula_is_evaluated_with_an_open_and_a_known_end() -> None:
    """The test above says something only if each formula is met."""
    met = {
        name
        for case in EVERY
        for point in points_of(case)[1]
        for name in NAMES
        if getattr(point.figures, name).spread.likely is not None
    }
    assert set(NAMES) == met


@pytest.mark.parametrize("case", EVERY)
def test_every_letter_is_told_and_every_letter_of_a_formula_has_a_number(case: str) -> None:
    for number, _ in enumerate(points_of(case)[1]):
        for name, text in figure_texts().items():
            found = worked(case, number, name)
            letters = {re.sub(r"_\d+$", "_k", term.letter) for term in found}
            assert letters <= set(text.letters), name
            if letters:
                named = set(re.findall(r"[A-Za-z]\w*", " ".join(text.formula)))
                results = {step.split(" = ")[0] for step in text.formula}
                assert named - results - {"sqrt", "ln", "pi", "sum", "min", "max"} <= letters, name
                assert all(term.unit for term in found)


def test_the_cases_reach_what_makes_an_end_of_the_ground() -> None:
    """The test of the numbers says something only if they come from each kind of place."""

    def ends(name: str, letter: str, case: str) -> tuple[float | None, float | None, float | None]:
        return terms_of(name, case)[0][letter].ends

    # Over a plane nothing lies between soils and no current is unsure; over one soil only the current is.
    assert ends("ground_resistance", "a", "over a plane") == ends("ground_resistance", "b", "over a plane")
    assert ends("ground_resistance", "b", "over one soil") == (0.0, 0.0, 0.0)
    low, likely, high = ends("ground_resistance", "a", "over one soil")
    assert (low or 0.0) < (likely or 0.0) == 0.0 < (high or 0.0)
    low, likely, high = ends("ground_resistance", "b", "flat")
    assert (low or 0.0) < (likely or 0.0) == 0.0 < (high or 0.0)
    # Where no ground is stated, and free space loses least, all that is radiated leaves; it makes one end alone.
    sky, ground = (ends("overall_efficiency", letter, "free space radiates most") for letter in ("S", "G"))
    assert sky[2] == ground[2]
    assert (sky[0] or 0.0) < (ground[0] or 0.0)
    # Soil moves the reactance either way, and the likely soil too.
    _, likely, high = ends("port_reactance", "Xs", "flat")
    assert 0.0 < (likely or 0.0) < (high or 0.0)
    assert (ends("port_reactance", "Xs", "soil moves the reactance")[1] or 0.0) < 0.0
    assert ends("port_reactance", "Xs", "over a plane") == (0.0, 0.0, 0.0)
    # No case leaves nothing of the resistance: the formula alone tells what would be.
    letters = {"R1": 0.1, "a": -0.2, "b": 0.0, "R0": 0.3, "e": 0.0, "d": -0.005}
    assert evaluated(figure_texts()["ground_resistance"], letters) == -0.3
    # The likely terminal is the nearest to the line's 50 ohm.
    matched = terms_of("swr_at_50_ohm", "full-wave at 102 MHz")[1]
    assert matched.low == matched.likely != matched.high
    # Without a height both ends of the reactance are open.
    assert ends("port_reactance", "X0", "at any height")[::2] == (None, None)


def test_what_the_ground_adds_follows_from_the_currents_by_hand() -> None:
    """Of the current alone and that with its image, over one soil: their distance outwards at either end."""
    chain = points_of("over one soil")[1][0].chain
    assert chain is not None
    alone, imaged = (float(over.radiated[0]) for over in chain.around.over)
    free, apart = chain.around.free[0].radiation, abs(alone - imaged)
    letters, spread = terms_of("ground_resistance", "over one soil")
    assert letters["R1"].ends == (min(alone, imaged), alone, max(alone, imaged))
    assert list(letters["a"].ends) == pytest.approx([-apart, 0.0, apart])
    assert letters["R0"].ends == (free, free, free)
    assert spread.likely == pytest.approx(alone - free)
    assert spread.low == pytest.approx((min(alone, imaged) - apart) * 0.995 - free, rel=0.02)
    assert spread.high == pytest.approx((max(alone, imaged) + apart) * 1.005 - free, rel=0.02)


def test_the_volts_follow_by_ohms_law_and_a_crest() -> None:
    """V = |X| sqrt(2 P / R): Ohm's law, root of two for the crest (any textbook)."""
    letters, spread = terms_of("capacitor_peak_voltage")
    for index, end in enumerate(ENDS):
        power, resistance, reactance, overshoot, error = (
            letters[letter].ends[index] or 0.0 for letter in ("P", "R", "X", "k", "d")
        )
        volts = abs(reactance) * math.sqrt(2.0 * power / resistance) * overshoot * (1.0 + error)
        assert volts == pytest.approx(getattr(spread, end), rel=1e-9)
    low, _, high = letters["R"].ends
    assert (low or 0.0) > (high or 0.0)  # most volts with the least resistance


def test_the_other_figures_follow_by_their_definitions() -> None:
    """Definitions of resistance, efficiency, resonance, bandwidth (Yaghjian & Best 2005, memory), EIRP and ERP."""
    figures = points_of("quay_rail")[1][0].figures
    frequency = points_of("quay_rail")[0].transmission[0].frequency

    def at(name: str, letter: str) -> float:
        return terms_of(name)[0][letter].ends[1] or 0.0

    def likely(name: str) -> float:
        return float(getattr(figures, name).spread.likely)

    total = sum(at("total_resistance", letter) for letter in ("Rr", "Rw", "Rj", "Rc"))
    assert total == pytest.approx(likely("total_resistance"))
    current = math.sqrt(at("capacitor_rms_current", "P") / at("capacitor_rms_current", "R"))
    assert current == pytest.approx(likely("capacitor_rms_current"))
    heat = current**2 * at("capacitor_dissipation", "r")
    assert heat == pytest.approx(likely("capacitor_dissipation"))
    capacitance = 1.0 / (2.0 * math.pi * frequency * at("tuning_capacitance", "X"))
    assert capacitance == pytest.approx(likely("tuning_capacitance"))
    assert frequency / at("swr2_bandwidth", "Q") / math.sqrt(2.0) == pytest.approx(likely("swr2_bandwidth"))
    assert at("effective_radiated_power", "G") * at("effective_radiated_power", "P") / 1.64 == pytest.approx(
        likely("effective_radiated_power")
    )
    assert at("perimeter_in_wavelengths", "s") == pytest.approx(math.pi)


def test_an_over_ends_above_the_mean_as_followed_in_time() -> None:
    """What one over adds at the likely end: a body of one heat capacity, its cycle followed in small steps of time."""
    letters, _ = terms_of("conductor_temperature_rise", "overs")
    air, mean, steady, added, heat, capacity, duty, share = (
        letters[each].ends[1] or 0.0 for each in ("Ta", "M", "K", "A", "q", "C", "u", "g")
    )
    assert share == pytest.approx(180.0 / 300.0)
    heat *= duty
    # What it loses for each kelvin, by the two steady states; nearly that at the mean, which is a little less.
    conductance = heat * (1.0 - share) / (steady - mean)
    rise, most, step = 0.0, 0.0, 0.25
    for second in np.arange(0.0, 20 * 300.0, step):
        keyed = heat if second % 300.0 < 180.0 else 0.0
        rise += step * (keyed - conductance * rise) / capacity
        most = max(most, rise)
    assert added == pytest.approx(most - heat * share / conductance, rel=0.1)
    assert air < mean < mean + added < steady


def test_the_printed_numbers_give_the_printed_figure() -> None:
    done = run("explain", "capacitor_peak_voltage", str(SAMPLES / "quay_rail.toml"))
    assert done.returncode == 0
    assert done.stderr == ""
    for part in done.stdout.split("letter ")[1:]:
        rows = [line.split() for line in part.splitlines()[1:6]]
        power, resistance, reactance, overshoot, error = ([float(cell) for cell in row[1:4]] for row in rows)
        assert [row[0] for row in rows] == ["P", "R", "X", "k", "d"]
        volts = [float(cell) for cell in part.splitlines()[6].split()[1:4]]
        for index in range(3):
            found = reactance[index] * math.sqrt(2.0 * power[index] / resistance[index]) * overshoot[index]
            assert found * (1.0 + error[index]) == pytest.approx(volts[index], rel=2e-5)
    sheet = magsafe.check(magsafe.read_design(SAMPLES / "quay_rail.toml"))
    assert f"{(sheet.operating_points[0].figures['capacitor_peak_voltage'].high or 0.0) / 1e3:.2f}" in done.stdout


# The command, run in this process but for what only a whole run tells --------------------------------------


@dataclass(frozen=True, slots=True)
class Done:
    returncode: int
    stdout: str
    stderr: str


Tell = Callable[..., Done]


@pytest.fixture
def tell(capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch) -> Tell:
    """Give `magsafe explain` with arguments."""
    from magsafe.cli.app import run as command

    monkeypatch.setenv("COLUMNS", "80")
    monkeypatch.delenv("FORCE_COLOR", raising=False)

    def run_it(*arguments: str) -> Done:
        status = 0
        try:
            command(["explain", *arguments])
        except SystemExit as left:
            status = int(left.code or 0)
        said = capsys.readouterr()
        return Done(status, said.out, said.err)

    return run_it


def test_without_arguments_it_lists_every_name(tell: Tell) -> None:
    done = tell()
    assert done.returncode == 0
    for name in (*NAMES, *(each.id for each in finding_texts())):
        assert f"  {name}:" in done.stdout
    assert max(map(len, done.stdout.splitlines())) <= 80


@pytest.mark.parametrize(("name", "near_one"), [
    ("capacitor_peak", "capacitor_peak_voltage"),
    ("capacitor.volt", "capacitor.voltage"),
    ("Capacitor Peak Voltage", "capacitor_peak_voltage"),
    ("capaciter_peak_voltage", "capacitor_peak_voltage"),
    ("joint.heat", "joint.heat.<joint>"),
    ("efficiency", "conductor_efficiency"),
])  # fmt: skip
def test_a_name_that_is_not_known_is_answered_with_those_near_it(name: str, near_one: str, tell: Tell) -> None:
    assert near_one in near(name)
    done = tell(name)
    assert done.returncode == 2
    assert done.stdout == ""
    assert "did you mean" in done.stderr
    assert near_one in done.stderr
    assert "Traceback" not in done.stderr


@pytest.mark.parametrize("name", ["", "zzzz", "\u00fc\u00df", "-x" * 3000, "a\x1b[31m"])
def test_a_strange_name_is_told_in_a_few_lines(name: str, tell: Tell) -> None:
    done = tell("--", name)
    assert done.returncode == 2
    assert done.stderr.count("\n") < 6
    assert "\x1b" not in done.stderr
    assert max(map(len, done.stderr.splitlines())) < 500


def test_a_design_alone_has_all_of_its_figures_told() -> None:
    path = str(SAMPLES / "quay_rail.toml")
    done = run("explain", path)
    assert done.returncode == 0
    assert max(map(len, done.stdout.splitlines())) <= 80
    for name in NAMES:
        assert name in done.stdout
    again = run("explain", "-", given=Path(path).read_bytes())
    assert again.stdout.replace("<stdin>", "quay_rail.toml") == done.stdout


def test_a_figure_is_shown_in_the_unit_of_the_sheet(capsys: pytest.CaptureFixture[str]) -> None:
    from magsafe.reports.explain import show_design

    for name, figure, factor, unit in (
        ("quay_rail", "port_reactance", 1.0, "\u03a9"),
        ("quay_rail", "total_resistance", 1e3, "m\u03a9"),
        ("quay_rail", "conductor_efficiency", 100.0, "%"),
        ("pier_head_square", "total_resistance", 1e3, "m\u03a9"),
        ("pier_head_square", "terminal_resistance", 1.0, "\u03a9"),
        ("pier_head_square", "radiation_resistance", 1.0, "\u03a9"),
    ):
        design, points = points_of(name)
        show_design(design, points)
        told = capsys.readouterr().out.split(f"\n{figure}\n")[1].splitlines()[0]
        value, shown = re.search(r": ([0-9.]+) (\S+)", told).groups()  # type: ignore[union-attr]
        assert shown == unit, told
        likely = getattr(points[0].figures, figure).spread.likely * factor
        assert float(value) == pytest.approx(likely, rel=6e-3), told


def test_a_figure_of_a_design_on_standard_input() -> None:
    done = run("explain", "unloaded_q", "-", given=file_of(plain_tree()))
    assert done.returncode == 0
    assert "letter" in done.stdout
    assert "<stdin>" in done.stdout


def test_errors_tell_what_would_do() -> None:
    path = str(SAMPLES / "quay_rail.toml")
    swapped = run("explain", path, "unloaded_q")
    assert swapped.returncode == 2
    assert f"magsafe explain unloaded_q {path}" in swapped.stderr
    missing = run("explain", "unloaded_q", "missing.toml")
    assert missing.returncode == 2
    assert "no such file" in missing.stderr
    assert run("explain", "missing.toml").returncode == 2
    broken = run("explain", "unloaded_q", "-", given=file_of(plain_tree(loop__diameter="1")))
    assert broken.returncode == 2
    assert "loop.diameter" in broken.stderr
    assert run("explain", str(SAMPLES)).returncode == 2


def test_a_finding_of_a_design_has_its_numbers(tell: Tell) -> None:
    path = str(SAMPLES / "quay_rail.toml")
    done = tell("capacitor.voltage", path)
    assert done.returncode == 0
    sheet = magsafe.check(magsafe.read_design(path))
    for point in sheet.operating_points:
        finding = next(each for each in point.findings if each.id == "capacitor.voltage")
        assert f"{finding.margin_found:.6g}" in done.stdout
    rows = [line.split() for line in done.stdout.splitlines() if line.startswith(("V ", "L ", "m "))]
    assert float(rows[1][3]) / float(rows[0][3]) == pytest.approx(float(rows[2][1]), rel=2e-5)


def test_a_place_has_the_fields_of_every_basis(tell: Tell) -> None:
    path = str(SAMPLES / "quay_rail.toml")
    sheet = magsafe.check(magsafe.read_design(path))
    done = tell("exposure.us-fcc.public.quay-walk", path)
    said = " ".join(done.stdout.split())
    for point in sheet.operating_points:
        place = next(each for record in point.exposure for each in record.places if each.name == "quay walk")
        for basis in place.bases:
            assert f"H {basis.magnetic:.6g} A/m of {basis.magnetic_limit:.6g} A/m" in said
            ratios = [basis.electric / basis.electric_limit, basis.magnetic / basis.magnetic_limit]  # type: ignore[operator]
            assert basis.share_of_limit == pytest.approx(max(ratios) ** 2)
            assert f"{basis.share_of_limit:.6g}" in said


def test_a_family_tells_all_of_its_findings_and_a_stranger_is_refused(tell: Tell) -> None:
    path = str(SAMPLES / "net_loft_balcony.toml")
    done = tell("joint.heat.<joint>", path)
    assert "joint.heat.soldered-corners" in done.stdout
    assert "joint.heat.capacitor-straps" in done.stdout
    stranger = tell("joint.heat.nobody", path)
    assert stranger.returncode == 2
    assert "joint.heat.soldered-corners" in stranger.stderr
    alone = tell("joint.heat.anything")
    assert alone.returncode == 0
    assert "ten times as bad" in " ".join(alone.stdout.split())
    none = tell("capacitor.gap", path)
    assert none.returncode == 2
    assert "does not give" in none.stderr


@pytest.mark.parametrize("name", [*NAMES, *(each.id for each in finding_texts())])
def test_every_text_fits_80_columns_and_ascii(name: str, capsys: pytest.CaptureFixture[str]) -> None:
    from rich.console import Console

    from magsafe.reports.explain import show_figure, show_finding

    console = Console(width=80, highlight=False, markup=False, emoji=False)
    figure, finding = figure_texts().get(name), finding_text(name)
    if figure is not None:
        design, points = points_of("breakwater_beacon" if "terminal" not in name else "pier_head_square")
        show_figure(figure, design, points, console)
    else:
        assert finding is not None
        show_finding(finding, None, (), console)
    text = capsys.readouterr().out
    assert name.split(".", maxsplit=1)[0] in text
    assert max(map(len, text.splitlines())) <= 80
    assert not any(line.endswith(" ") for line in text.splitlines())


def test_a_narrow_terminal_and_an_ascii_one_lose_nothing() -> None:
    path = str(SAMPLES / "quay_rail.toml")
    narrow = run("explain", "capacitor_peak_voltage", path, env={"COLUMNS": "40"})
    assert max(map(len, narrow.stdout.splitlines())) <= 40
    plain = run("explain", path, env={"PYTHONIOENCODING": "ascii"})
    assert plain.stdout.isascii()
    assert "?" not in plain.stdout


def test_names_of_a_design_mark_up_nothing(tmp_path: Path, tell: Tell) -> None:
    tree = plain_tree(
        transmission__0__name="[red]x", loop__joint=[{"name": "[b]j", "kind": "bolted lug", "at": "spread"}]
    )
    path = tmp_path / "hostile.toml"
    path.write_bytes(file_of(tree))
    done = tell("joint_resistance", str(path))
    assert "[red]x" in done.stdout
    assert "[b]j" in done.stdout


def test_help_is_quick() -> None:
    command = [sys.executable, "-X", "importtime", "-m", "magsafe", "explain", "--help"]
    loaded = subprocess.run(command, capture_output=True, text=True, check=True).stderr
    assert "magsafe.cli.explain" in loaded
    assert not re.search(r"\| +(numpy|scipy|pint)$", loaded, re.MULTILINE)
