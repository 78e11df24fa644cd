"""Where may people be: each place under each rule, and silence is never clear."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import sqrt

from magsafe.analysis.exposure import Basis, Use, bases, key_down, use_of
from magsafe.analysis.field_source import FAR, field_source
from magsafe.analysis.keepout import Distances, Shells, keep_out, reach_weight, shells
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.people import Strongest, at_places
from magsafe.analysis.wires import extent
from magsafe.checks.judge import Check, judge, unproven
from magsafe.checks.sheet import (
    BasisRecord,
    DistanceRecord,
    ExposureRecord,
    Finding,
    KeepoutRecord,
    PlaceRecord,
)
from magsafe.design.consistency import slug
from magsafe.design.model import Design, Place
from magsafe.rules.limit import WHO, Limit, Rule, Who, load_rule
from magsafe.spread import Spread

_KEEP = "keep people out of this place, or lower the power"
_PEOPLE: dict[Who, str] = {"trained": "trained people", "public": "the public"}
_DO_WITHOUT: dict[Who, str] = {
    "trained": 'name a rule for trained people in site.rules too, or count them as the public: who = "public"',
    "public": "name a rule for the public in site.rules too",
}
_UNITS = {"E": "V/m", "H": "A/m"}


def no_rules(design: Design) -> tuple[Finding, ...]:
    """Return a finding where the design names no rule."""
    if design.site.rules:
        return ()
    check = Check(
        "exposure.rules",
        "Which exposure rules hold at this site?",
        'name them in site.rules, such as rules = ["icnirp-2020"]',
        "the design",
        "1",
    )
    return (unproven(check, "site.rules is missing or empty: nothing says how strong a field may be"),)


def exposure(design: Design, point: OperatingPoint) -> tuple[tuple[ExposureRecord, ...], tuple[Finding, ...]]:
    """Return what each rule says of people during one transmission, and the findings."""
    view = _view(design, point)
    records, findings = [], []
    rules = [load_rule(name) for name in design.site.rules]
    for rule in rules:
        for who in WHO:
            if rule.limits(who):
                record, found = _tier(view, rule, who)
            else:
                elsewhere = any(each.limits(who) for each in rules)
                record, found = _without(view, rule, who, elsewhere=elsewhere)
            records.append(record)
            findings.extend(found)
    return tuple(records), tuple(findings)


@dataclass(frozen=True, slots=True)
class _View:
    """One transmission with the fields about it, computed once for all rules."""

    design: Design
    point: OperatingPoint
    use: Use
    unknown: str
    doubt: str
    strongest: dict[str, Strongest]
    around: Shells | None
    bare_factor: float
    likely_factor: float

    @property
    def at_loop(self) -> float:
        """Most power at the loop for each watt at the transmitter."""
        return (self.point.power_at_loop.high or 0.0) / self.point.power

    @property
    def margin(self) -> float:
        return self.design.margins.exposure_ratio


def _view(design: Design, point: OperatingPoint) -> _View:
    unknown = _unknown(design, point)
    doubt, use = _metal(design), use_of(point.transmission)
    if unknown or not design.site.rules:
        return _View(design, point, use, unknown, doubt, {}, None, 1.0, 1.0)
    far = field_source(design, point, FAR)
    found = at_places(design, point, tuple(design.place))
    strongest = {place.name: each for place, each in zip(design.place, found, strict=True)}
    view = _View(design, point, use, unknown, doubt, strongest, None, far.bare_factor, far.likely_factor)
    heaviest = max(
        reach_weight(
            bases(load_rule(name), who, point.transmission.frequency), each, view.at_loop, view.margin, far.bare_factor
        )
        for name in design.site.rules
        for who in WHO
        for each in (use, key_down(point.power))
    )
    return replace(view, around=shells(far, heaviest))


def _unknown(design: Design, point: OperatingPoint) -> str:
    """Return why no field is known; empty where it is."""
    if point.out_of_range:
        return "; ".join(point.out_of_range)
    if design.loop.centre_height is None and design.ground_name != "none":
        return "loop.centre_height is not given"
    if design.loop.centre_height is None and design.place:
        return "loop.centre_height is not given, and places have their heights above ground"
    return ""


def _metal(design: Design) -> str:
    """Return why computed fields do not hold near metal; empty where none is that near."""
    near, across = design.site.metal_within, 2.0 * extent(design)
    if near is None or near >= across:
        return ""
    return f"metal is within {near:.3g} m, nearer than one loop diameter ({across:.3g} m): fields there are not proven"


def _tier(view: _View, rule: Rule, who: Who) -> tuple[ExposureRecord, list[Finding]]:
    frequency = view.point.transmission.frequency
    found = bases(rule, who, frequency)
    uncovered = rule.uncovered_fields(who, frequency)
    places = [place for place in view.design.place if place.who == who]
    gap = f"{rule.name} has no {' and no '.join(uncovered)} limit at this frequency" if uncovered else ""
    findings: list[Finding] = []
    records: list[PlaceRecord] = []
    if not any(place.when == "always" for place in places):
        findings.append(_no_place(rule, who, tuning=bool(places)))
    for place in places:
        record, finding = _place(view, rule, found, place, view.unknown or gap)
        records.append(record)
        findings.append(finding)
    why = view.unknown or gap or view.doubt or None
    keepout = None if view.around is None or not found else _keepout(view, view.around, found)
    return ExposureRecord(
        rule=rule.name, edition=rule.edition, who=who, keepout=keepout, places=tuple(records), why=why
    ), findings


def _without(view: _View, rule: Rule, who: Who, *, elsewhere: bool) -> tuple[ExposureRecord, list[Finding]]:
    """Return what a rule that does not know a tier says of it: nothing, which only another rule may fill."""
    why = f"{rule.name} has no limits for {_PEOPLE[who]}: {rule.why_without(who)}"
    places = [] if elsewhere else [place for place in view.design.place if place.who == who]
    check = Check(
        f"exposure.{rule.name}.{who}",
        f"Are people ({who}) within the limits of {rule.name}?",
        _DO_WITHOUT[who],
        f"{rule.standard}, {rule.edition}",
        "1",
    )
    found = [unproven(_place_check(rule, place, _DO_WITHOUT[who]), why, place=place.name) for place in places]
    if not elsewhere and not places:
        found = [unproven(check, f"{why}; no other rule in site.rules has any, and silence is not clear")]
    records = tuple(PlaceRecord(name=place.name, verdict="unproven", when=place.when) for place in places)
    return ExposureRecord(rule=rule.name, edition=rule.edition, who=who, keepout=None, places=records, why=why), found


def _no_place(rule: Rule, who: Who, *, tuning: bool) -> Finding:
    check = Check(
        f"exposure.{rule.name}.{who}",
        f"Are people ({who}) within the limits of {rule.name}?",
        f'add a [[place]] or a fence with who = "{who}", where they can be nearest',
        f"{rule.standard}, {rule.edition}",
        "1",
    )
    if tuning:
        return unproven(
            check, f'Only places while tuning are given for who = "{who}": nothing says where they are after'
        )
    return unproven(check, f'No place with who = "{who}" is given, and silence is not clear')


def _keepout(view: _View, around: Shells, found: tuple[Basis, ...]) -> KeepoutRecord:
    vertical = view.design.loop.plane == "vertical"

    def distances(use: Use) -> Distances:
        return keep_out(around, found, use, view.at_loop, view.margin, vertical)

    averaged, carrier = distances(view.use), distances(key_down(view.point.power))
    return KeepoutRecord.model_validate({**_as_dict(averaged), "key_down": _as_dict(carrier)})


def _as_dict(found: Distances) -> dict[str, object]:
    def one(each: object) -> object:
        return None if each is None else DistanceRecord.model_validate(each, from_attributes=True)

    named = {
        name: one(getattr(found, name))
        for name in ("any_direction", "along_axis", "in_plane", "across", "above", "below")
    }
    floors = [
        {
            "floor": each.floor,
            **{name: one(getattr(each, name)) for name in ("any_bearing", "along_axis", "in_plane", "across")},
        }
        for each in found.on_floors
    ]
    return {**named, "on_floors": tuple(floors)}


# Places ----------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class _Judged:
    """One field of one basis at a place."""

    basis: Basis
    kind: str
    row: Limit
    field: float
    limit: float
    judged: float

    @property
    def share(self) -> float:
        return (self.field / self.limit) ** 2


def _place_check(rule: Rule, place: Place, do: str) -> Check:
    return Check(
        f"exposure.{rule.name}.{place.who}.{slug(place.name)}",
        f"Is {place.name} within the limits of {rule.name} for {place.who} people?",
        do,
        f"{rule.standard}, {rule.edition}",
        "1",
    )


def _place(
    view: _View, rule: Rule, found: tuple[Basis, ...], place: Place, unknown: str
) -> tuple[PlaceRecord, Finding]:
    check = _place_check(rule, place, _KEEP)
    tuning = place.when == "tuning"
    if tuning and view.use.tune_up_time == 0.0:
        unknown = unknown or "this transmission has no tune_up, and the place is judged while tuning"
    if unknown or place.name not in view.strongest:
        record = PlaceRecord(name=place.name, verdict="unproven", when=place.when)
        return record, unproven(check, unknown, place=place.name)
    strongest = view.strongest[place.name]
    judged = _judged(view, found, strongest, tuning)
    binding = max(judged, key=lambda each: each.share)
    records = tuple(_basis_record(basis, judged) for basis in found)
    powers = _powers(view, judged, tuning)
    finding = judge(
        Check(
            check.id,
            check.question,
            _KEEP if tuning else _DO_TUNE_UP if powers[0] == 0.0 else _DO_PLACE,
            check.source,
            _UNITS[binding.kind],
            shown=_UNITS[binding.kind],
            qualifier="RMS",
        ),
        Spread(None, binding.field * sqrt(view.likely_factor), binding.field),
        binding.limit,
        view.margin,
        bare_end=binding.field * sqrt(view.bare_factor),
        power=None if tuning else view.point.power,
        powers=(None, None) if tuning else powers,
        thin=_thin(judged),
        provenance=binding.row.provenance_at(binding.basis.frequency) or "none",
        place=place.name,
    )
    finding = _doubted(finding, (*strongest.doubts, *([view.doubt] if view.doubt else [])))
    if place.fence:
        text = f"{finding.because}; for people on the floors, above them the keep-out holds"
        finding = finding.model_copy(update={"because": text})
    top = next(record for record in records if record.basis == binding.basis.name)
    return (
        PlaceRecord(
            name=place.name,
            **top.model_dump(),
            verdict=finding.verdict,
            power_ceiling=None if finding.doubt else powers[0],
            at_limit=None if finding.doubt else powers[1],
            when=place.when,
            bases=records,
        ),
        finding,
    )


_DO_PLACE = "keep people out of this place"
_DO_TUNE_UP = "lower the tune_up, which alone is too much here, or keep people out of this place"


def _doubted(finding: Finding, doubts: Sequence[str]) -> Finding:
    """Return a finding that proves nothing because part of the field is not known; a stop stays one.

    The power that it allows by what is known stays too: more is certainly too much, whatever the verdict.
    """
    if not doubts:
        return finding
    doubt = "; ".join(doubts)
    update: dict[str, object] = {"doubt": doubt, "do": _KEEP, "because": f"{doubt} ({finding.because})"}
    if finding.verdict != "stop":
        update["verdict"] = "unproven"
    return finding.model_copy(update=update)


def _judged(view: _View, found: tuple[Basis, ...], strongest: Strongest, tuning: bool) -> list[_Judged]:
    made = []
    for basis in found:
        power = view.use.judged(basis.averaging_time, "tuning" if tuning else "always")
        for kind, square, row in (
            ("E", strongest.electric, basis.electric),
            ("H", strongest.magnetic, basis.magnetic),
        ):
            limit = None if row is None else row.at(basis.frequency)
            if row is not None and limit is not None:
                field = sqrt(square * power * view.at_loop)
                likely = power * (view.point.power_at_loop.likely or 0.0) / view.point.power
                made.append(_Judged(basis, kind, row, field, limit, likely))
    return made


def _basis_record(basis: Basis, judged: Sequence[_Judged]) -> BasisRecord:
    own = {each.kind: each for each in judged if each.basis is basis}
    binding = max(own.values(), key=lambda each: each.share)
    electric, magnetic = own.get("E"), own.get("H")
    return BasisRecord(
        electric=None if electric is None else electric.field,
        magnetic=None if magnetic is None else magnetic.field,
        electric_limit=None if electric is None else electric.limit,
        magnetic_limit=None if magnetic is None else magnetic.limit,
        share_of_limit=binding.share,
        field_ratio=sqrt(binding.share),
        set_by=binding.kind,
        basis=basis.name,
        judged_power=binding.judged,
        averaging_time=basis.averaging_time,
        provenance=binding.row.provenance_at(basis.frequency) or "none",
    )


def _powers(view: _View, judged: Sequence[_Judged], tuning: bool) -> tuple[float, float]:
    """Return the power [W] that keeps the margin on every basis, and the one that reaches a limit.

    While tuning it is the carrier's power that is told, else the envelope power.
    """
    found = []
    for ratio in (view.margin, 1.0):
        powers = []
        for each in judged:
            time = each.basis.averaging_time
            looked_at = view.use.judged(time, "tuning" if tuning else "always")
            share = each.share * view.bare_factor * ratio**2
            if share == 0.0:
                continue
            allowed = looked_at / share * (1.0 - 1e-12)
            if tuning:
                powers.append(view.use.tune_up_power / share * (1.0 - 1e-12))
            else:
                powers.append(view.use.envelope_for(allowed, time))
        found.append(min(powers, default=0.0))
    return found[0], found[1]


def _thin(judged: Sequence[_Judged]) -> str:
    """Return which limits nobody has read in their source; empty if all were."""
    unread = [
        f"{each.kind} {each.limit:.4g} {_UNITS[each.kind]} ({each.basis.name})"
        for each in judged
        if each.row.provenance_at(each.basis.frequency) == "memory"
    ]
    return f"from memory and read by nobody in the standard: {', '.join(unread)}" if unread else ""
