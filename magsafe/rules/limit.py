"""Exposure limits as data: one file per edition of a rule, one row per tier, field and basis.

A limit is `coefficient * (frequency in MHz) ** exponent`, an RMS field strength with nobody
present. Where two segments meet, the lower value holds; outside a row's band there is no limit in
that row, and none is made up.
"""

import re
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache
from hashlib import sha256
from pathlib import Path
from typing import Literal

from magsafe.rules.body import BodyMean, read_body
from magsafe.rules.current import WHO, Current, Who, read_current
from magsafe.rules.exemption import Exemption, read_exemption
from magsafe.rules.segment import (
    NOT_AVERAGED,
    PROVENANCES,
    Provenance,
    Segment,
    covering,
    lowest_value,
    read_averaging_time,
    read_segments,
)
from magsafe.rules.summation import Summation, read_summation
from magsafe.rules.table import Entries, TableError, UnknownName, parse_toml
from magsafe.rules.tier import Tier, Without, read_tier, read_without

__all__ = [
    "FIELD_KINDS",
    "UNIT_OF",
    "WHO",
    "FieldKind",
    "Limit",
    "Rule",
    "RuleFileError",
    "Tier",
    "UnknownRule",
    "Who",
    "Without",
    "load_rule",
    "parse_rule",
    "rule_names",
]

FieldKind = Literal["electric", "magnetic", "power density"]

FIELD_KINDS: tuple[FieldKind, ...] = ("electric", "magnetic", "power density")
UNIT_OF: dict[FieldKind, str] = {"electric": "V/m", "magnetic": "A/m", "power density": "W/m2"}

_DATE = re.compile(r"\d{4}(-\d\d(-\d\d)?)?")
_FOLDER = Path(__file__).parent / "limits"


class UnknownRule(UnknownName):
    """No rule file of that name; `nearest` and `known` say which there are."""


class RuleFileError(TableError):
    """A rule file lacks something or contradicts itself; `problems` holds all of it."""


@dataclass(frozen=True, slots=True)
class Limit:
    """One row of a rule: how strong one field may be for one tier, on one basis.

    `averaging_time` is in seconds, 0.0 where the rule does not average (the crest of the envelope
    counts then). A row with `judged` false is shown, never held against a field.
    """

    who: Who
    field: FieldKind
    unit: str
    basis: str
    averaging_time: float
    edition: str
    source: str
    segments: tuple[Segment, ...]
    provenance: Provenance
    provenance_detail: str
    verified_part: str
    notes: str
    judged: bool
    why_not_judged: str

    @property
    def averaged(self) -> bool:
        """Whether the rule lets the square of the field be averaged over time."""
        return self.averaging_time > NOT_AVERAGED

    @property
    def band(self) -> tuple[float, float]:
        """Lowest and highest frequency [Hz] the row speaks of."""
        return self.segments[0].lowest_frequency, self.segments[-1].highest_frequency

    def at(self, frequency: float) -> float | None:
        """The limit at a frequency.

        Parameters
        ----------
        frequency : positive, finite [Hz]

        Returns
        -------
        limit in `unit`, RMS; the lower one where two segments meet; None outside `band`
        """
        return lowest_value(self.segments, frequency)

    def provenance_at(self, frequency: float) -> Provenance | None:
        """What the limit at a frequency [Hz] rests on; where segments meet, the weaker of them."""
        found = covering(self.segments, frequency)
        if not found:
            return None
        return "memory" if any(s.provenance == "memory" for s in found) else "verified"

    def provenance_detail_at(self, frequency: float) -> str | None:
        """What was read for the limit at a frequency [Hz], in words; None outside `band`."""
        details = dict.fromkeys(each.provenance_detail for each in covering(self.segments, frequency))
        return "; ".join(details) if details else None


@dataclass(frozen=True, slots=True)
class Rule:
    """One edition of a published exposure rule.

    `holds_from` and `holds_until` are ISO dates or their leading part; `holds_until` is None as
    long as no later edition is known. `sha256` is that of the bytes of `file`. A tier has rows, or stands in
    `without`. `summation` and `body` say how several transmissions add up, and whether a mean over the body counts.
    `currents` and `exemptions` are shown, never judged.
    """

    name: str
    title: str
    jurisdiction: str
    standard: str
    edition: str
    holds_from: str
    holds_until: str | None
    how_judged: str
    notes: str
    tiers: tuple[Tier, ...]
    rows: tuple[Limit, ...]
    without: tuple[Without, ...]
    summation: Summation
    body: BodyMean
    currents: tuple[Current, ...]
    exemptions: tuple[Exemption, ...]
    file: str
    sha256: str

    def limits(self, who: Who) -> tuple[Limit, ...]:
        """The rows that a field is held against for a tier; empty where the rule has none."""
        return tuple(each for each in self.rows if each.who == who and each.judged)

    def tier(self, who: Who) -> Tier | None:
        """How the rule itself calls a tier; None where it does not know it."""
        return next((each for each in self.tiers if each.who == who), None)

    def why_without(self, who: Who) -> str:
        """Why the rule has no limits for a tier, and where to look instead; empty where it has some."""
        return next((each.why for each in self.without if each.who == who), "")

    def uncovered_fields(self, who: Who, frequency: float) -> tuple[FieldKind, ...]:
        """Which of E and H no judged row limits at a frequency [Hz]: unproven, never unlimited."""
        covered = {each.field for each in self.limits(who) if each.at(frequency) is not None}
        wanted: tuple[FieldKind, ...] = ("electric", "magnetic")
        return tuple(field for field in wanted if field not in covered)


def rule_names() -> tuple[str, ...]:
    """Names of the rule files that are there, sorted."""
    return tuple(sorted(path.stem for path in _FOLDER.glob("*.toml")))


@cache
def load_rule(name: str) -> Rule:
    """The rule of that name; UnknownRule where there is none, RuleFileError where it is unfit."""
    if name not in rule_names():
        raise UnknownRule("rule", name, rule_names())
    path = _FOLDER / f"{name}.toml"
    return parse_rule(path.read_bytes(), path.name)


def parse_rule(content: bytes, file: str) -> Rule:
    """A rule from the bytes of its file; RuleFileError tells everything that is wrong with it."""
    problems: list[str] = []
    head = Entries("head", parse_toml(content, file, RuleFileError), problems)
    edition = head.text("edition")
    rule = Rule(
        name=head.text("name"),
        title=head.text("title"),
        jurisdiction=head.text("jurisdiction"),
        standard=head.text("standard"),
        edition=edition,
        holds_from=head.text("holds_from"),
        holds_until=head.text("holds_until", default="") or None,
        how_judged=head.text("how_judged"),
        notes=head.text("notes", default=""),
        tiers=tuple(read_tier(each) for each in head.tables("tier")),
        rows=tuple(_read_limit(each, edition) for each in head.tables("limit")),
        without=tuple(read_without(each) for each in head.optional_tables("without")),
        summation=read_summation(head.table("summation")),
        body=read_body(head.table("body")),
        currents=tuple(read_current(each) for each in head.optional_tables("current")),
        exemptions=tuple(read_exemption(each) for each in head.optional_tables("exemption")),
        file=file,
        sha256=sha256(content).hexdigest(),
    )
    head.refuse_leftover()
    if f"{rule.name}.toml" != file:
        head.note(f"name {rule.name!r} must be that of the file")
    for date in filter(None, (rule.holds_from, rule.holds_until)):
        if not _DATE.fullmatch(date):
            head.note(f"a date must look like 2021-05-03, 2021-05 or 2021, found {date!r}")
    if not problems:  # a placeholder would contradict others for no reason
        problems += _contradictions(rule)
    if problems:
        raise RuleFileError(file, problems)
    return rule


def _contradictions(rule: Rule) -> list[str]:
    """What is wrong between the parts of a rule, each part being sound by itself."""
    described = [each.who for each in rule.tiers]
    problems = [f"tier {who} is described twice" for who in _repeated(described)]
    problems += [
        f"no [[tier]] says who {who} is" for who in dict.fromkeys(row.who for row in rule.rows) if who not in described
    ]
    problems += [f"without {who} is given twice" for who in _repeated([each.who for each in rule.without])]
    for who in WHO:
        if not rule.limits(who) and not rule.why_without(who):
            problems.append(f"no judged limit for {who}, and no [[without]] says why")
        if rule.limits(who) and rule.why_without(who):
            problems.append(f"[[without]] says there is no limit for {who}, and there is one")
    currents = [f"{each.who}, {each.kind}" for each in rule.currents]
    problems += [f"two currents for {each}" for each in _repeated(currents)]
    averaged = {row.basis for row in rule.rows if row.judged and row.averaged}
    problems += [
        f"[body] names {each}, which is no judged basis that is averaged"
        for each in rule.body.bases
        if each not in averaged
    ]
    problems += [f"[body] names {each} twice" for each in _repeated(rule.body.bases)]
    problems += [f"two exemptions named {each}" for each in _repeated([each.name for each in rule.exemptions])]
    rows = [f"{row.who}, {row.field}, {row.basis}" for row in rule.rows]
    return problems + [f"two rows for {row}" for row in _repeated(rows)]


def _repeated(names: Sequence[str]) -> list[str]:
    return [name for name in dict.fromkeys(names) if names.count(name) > 1]


def _read_limit(entries: Entries, edition: str) -> Limit:
    provenance = entries.word("provenance", PROVENANCES)
    detail = entries.text("provenance_detail")
    limit = Limit(
        who=entries.word("who", WHO),
        field=entries.word("field", FIELD_KINDS),
        unit=entries.text("unit"),
        basis=entries.text("basis"),
        averaging_time=read_averaging_time(entries),
        edition=entries.text("edition"),
        source=entries.text("source"),
        segments=read_segments(entries, provenance, detail),
        provenance=provenance,
        provenance_detail=detail,
        verified_part=entries.text("verified_part", default=""),
        notes=entries.text("notes", default=""),
        judged=entries.flag("judged", default=True),
        why_not_judged=entries.text("why_not_judged", default=""),
    )
    entries.refuse_leftover()
    if limit.unit and limit.unit != UNIT_OF[limit.field]:
        entries.note(f"unit of {limit.field} must be {UNIT_OF[limit.field]}, found {limit.unit!r}")
    if limit.edition and edition and limit.edition != edition:
        entries.note(f"edition {limit.edition!r} is not that of the file, {edition!r}")
    if limit.judged == bool(limit.why_not_judged):
        entries.note("why_not_judged goes with judged = false, and only with it")
    return limit
