"""What can be explained: the texts of each figure and finding, and which of them a name means."""

import re
import tomllib
from dataclasses import dataclass, fields
from difflib import get_close_matches
from functools import cache
from pathlib import Path

from magsafe.analysis.chain import QUALITY_ERROR, REACTANCE_ERROR, RESISTANCE_ERROR, VOLTAGE_ERROR
from magsafe.analysis.figures import Figures
from magsafe.analysis.operating_point import THICKNESS
from magsafe.analysis.sky import BETWEEN_DIRECTIONS, LEVELS
from magsafe.analysis.soil import BETWEEN_LOSSES, BETWEEN_SOILS
from magsafe.physics.thin_wire import FULL_WAVE
from magsafe.rules.limit import rule_names

_FOLDER = Path(__file__).parent
_MOST_NEAR = 8  # names in an answer to a name that is not known


@dataclass(frozen=True, slots=True)
class FigureText:
    """What is said of a figure; the keys are told at the head of explained_figures.toml.

    `sources` are several where the ground decides which; `used_by` are the findings that look at it.
    """

    name: str
    title: str
    words: str
    formula: tuple[str, ...]
    letters: dict[str, str]
    low: str
    high: str
    danger: str
    valid: str
    error: str
    by_hand: str
    sources: tuple[str, ...]
    used_by: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class FindingText:
    """What is said of a family of findings; the keys are told at the head of explained_findings.toml."""

    id: str
    title: str
    asks: str
    margin: str
    end: str
    limit: str
    rests: str
    figures: tuple[str, ...]

    @property
    def pattern(self) -> re.Pattern[str]:
        """What the ids of the family look like."""
        kinds = {
            "<who>": "(trained|public)",
            "<rule>": f"({'|'.join(map(re.escape, rule_names()))})",
            "<number>": "[0-9]+",
            "<probe>": r"[^.]*(\.[eh])?",
        }
        parts = re.split("(<[a-z]+>)", self.id)
        return re.compile("".join(kinds.get(part, "[^.]*") if part[:1] == "<" else re.escape(part) for part in parts))

    def holds(self, name: str) -> bool:
        """Return whether an id, or the family's own name, is of this family."""
        return name == self.id or self.pattern.fullmatch(name) is not None


@cache
def figure_texts() -> dict[str, FigureText]:
    """Return what is said of each figure that a sheet has, in the sheet's order."""
    made = tomllib.loads((_FOLDER / "explained_figures.toml").read_text(encoding="utf-8"))
    found = {}
    for name in (field.name for field in fields(Figures)):
        own = made["figure"][name]
        source = own["source"]
        found[name] = FigureText(
            **{key: _filled(own.get(key, "")) for key in _PLAIN},
            name=name,
            formula=tuple(own["formula"]),
            letters=own["letters"],
            sources=(source,) if isinstance(source, str) else tuple(source),
            used_by=tuple(each.id for each in finding_texts() if name in each.figures),
        )
    return found


_PLAIN = ("title", "words", "low", "high", "danger", "valid", "error", "by_hand")


@cache
def finding_texts() -> tuple[FindingText, ...]:
    """Return what is said of each family of findings."""
    made = tomllib.loads((_FOLDER / "explained_findings.toml").read_text(encoding="utf-8"))
    return tuple(FindingText(**{**each, "figures": tuple(each["figures"])}) for each in made["finding"])


def _filled(text: str) -> str:
    """Return a text with the program's own constants in the places of their names."""
    facts = {
        "resistance_error": _percent(RESISTANCE_ERROR),
        "reactance_error": _percent(REACTANCE_ERROR),
        "voltage_error": _percent(VOLTAGE_ERROR),
        "quality_error": _percent(QUALITY_ERROR),
        "between_soils": _percent(BETWEEN_SOILS),
        "between_losses": _percent(BETWEEN_LOSSES),
        "elevation_step": f"{90.0 / LEVELS:g} degrees",
        "between_directions": _percent(BETWEEN_DIRECTIONS),
        "solver": (
            f"conductors of {FULL_WAVE.low:g} to {FULL_WAVE.high:g} wavelengths in all, their radius up to "
            f"{THICKNESS.high:g} of the loop's, and losses too small to bend the current; `loop.size` tells where that "
            "is left"
        ),
    }
    return text.format_map(facts)


def _percent(share: float) -> str:
    return f"{100.0 * share:g} %"


def finding_text(name: str) -> FindingText | None:
    """Return what is said of a finding by its id, or by the name of its family; the plainest family that fits it."""
    fitting = [each for each in finding_texts() if each.holds(name)]
    return min(fitting, key=lambda each: (each.id != name, each.id.count("<"), -len(each.id)), default=None)


def names() -> tuple[str, ...]:
    """Return every name that can be explained."""
    return (*figure_texts(), *(each.id for each in finding_texts()))


def near(name: str) -> tuple[str, ...]:
    """Return the known names that a name may have been meant for: those that it begins, or that look like it."""
    folded = name.casefold().replace(" ", "_")
    begun = [each for each in names() if folded and each.startswith(folded)]
    within = [each for each in names() if len(folded) > 2 and folded in each]
    alike = get_close_matches(folded, names(), n=3, cutoff=0.6)
    return tuple(dict.fromkeys((*begun, *within, *alike)))[:_MOST_NEAR]
