"""Where may people be: each place under each rule, and silence is never clear."""

from collections.abc import Sequence
from dataclasses import dataclass
from math import sqrt

from magsafe import words
from magsafe.analysis.exposure import Basis, Use, key_down
from magsafe.analysis.keepout import Distances, Shells, keep_out
from magsafe.analysis.people import Strongest
from magsafe.checks.judge import Check, judge, unproven
from magsafe.checks.sheet import (
    BasisRecord,
    DistanceRecord,
    DistancesRecord,
    ExposureRecord,
    Finding,
    KeepoutRecord,
    PlaceRecord,
    TimeRecord,
)
from magsafe.checks.view import View, allows_mean, counts_mean, judged_squares
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


def exposure(view: View) -> tuple[tuple[ExposureRecord, ...], tuple[Finding, ...]]:
    """Return what each rule says of people during one transmission, and the findings."""
    records, findings = [], []
    rules = [load_rule(name) for name in view.design.site.rules]
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


def _tier(view: View, rule: Rule, who: Who) -> tuple[ExposureRecord, list[Finding]]:
    found = view.bases(rule, who)
    places = [place for place in view.design.place if place.who == who]
    gap = gap_of(view, rule, who)
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


def gap_of(view: View, rule: Rule, who: Who) -> str:
    """Return which field a rule does not limit at this frequency; empty where it limits both."""
    uncovered = rule.uncovered_fields(who, view.point.transmission.frequency)
    return f"{rule.name} has no {' and no '.join(uncovered)} limit at this frequency" if uncovered else ""


def _without(view: View, rule: Rule, who: Who, *, elsewhere: bool) -> tuple[ExposureRecord, list[Finding]]:
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
    record = ExposureRecord(
        rule=rule.name, edition=rule.edition, who=who, keepout=None, places=records, why=why, without=True
    )
    return record, found


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


def _keepout(view: View, around: Shells, found: tuple[Basis, ...]) -> KeepoutRecord:
    carrier = _distances(view, around, found, key_down(view.point.power))
    averaged = averaged_keep_out(view, around, found)
    return KeepoutRecord.model_validate({**_as_dict(averaged), "key_down": _as_dict(carrier)})


def averaged_keep_out(view: View, around: Shells, found: tuple[Basis, ...]) -> Distances:
    """Return the distances of a transmission as its rule averages it."""
    return _distances(view, around, found, view.use)


def _distances(view: View, around: Shells, found: tuple[Basis, ...], use: Use) -> Distances:
    return keep_out(around, found, use, view.at_loop, view.margin, view.design.loop.plane == "vertical")


def as_record(found: Distances) -> DistancesRecord:
    """Return distances as the sheet has them."""
    return DistancesRecord.model_validate(_as_dict(found))


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
    """One field of one basis at a place.

    `mean` tells that `field` is the mean over the body, `body_mean` is that mean where the rule allows one.
    """

    basis: Basis
    kind: str
    row: Limit
    field: float
    limit: float
    judged: float
    mean: bool
    body_mean: float | None

    @property
    def share(self) -> float:
        return (self.field / self.limit) ** 2


def _place_check(rule: Rule, place: Place, do: str) -> Check:
    return Check(
        f"exposure.{rule.name}.{place.who}.{words.slug(place.name)}",
        f"Is {place.name} within the limits of {rule.name} for {place.who} people?",
        do,
        f"{rule.standard}, {rule.edition}",
        "1",
    )


def _place(view: View, rule: Rule, found: tuple[Basis, ...], place: Place, unknown: str) -> tuple[PlaceRecord, Finding]:
    check = _place_check(rule, place, _KEEP)
    tuning = place.when == "tuning"
    if tuning and view.use.tune_up_time == 0.0:
        unknown = unknown or "this transmission has no tune_up, and the place is judged while tuning"
    if unknown or place.name not in view.strongest:
        record = PlaceRecord(name=place.name, verdict="unproven", when=place.when)
        return record, unproven(check, unknown, place=place.name)
    strongest = view.strongest[place.name]
    judged = _judged(view, rule, found, strongest, tuning)
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
        thin="; ".join(filter(None, (unread(_rows(judged)), unjudged(rule, mean=binding.mean)))),
        provenance=binding.row.provenance_at(binding.basis.frequency) or "none",
        place=place.name,
    )
    finding = doubted(finding, (*strongest.doubts, *([view.doubt] if view.doubt else [])))
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
            times=() if finding.doubt else _times(view, judged, tuning),
            in_session=any(view.title in names for names in view.design.site.sessions),
        ),
        finding,
    )


_DO_PLACE = "keep people out of this place"
_DO_TUNE_UP = "lower the tune_up, which alone is too much here, or keep people out of this place"


def doubted(finding: Finding, doubts: Sequence[str]) -> Finding:
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


def _judged(view: View, rule: Rule, found: tuple[Basis, ...], strongest: Strongest, tuning: bool) -> list[_Judged]:
    made = []
    for basis in found:
        power = view.use.judged(basis.averaging_time, "tuning" if tuning else "always")
        at_loop, mean = power * view.at_loop, counts_mean(view, rule, basis, strongest)
        electric, magnetic = judged_squares(view, rule, basis, strongest)
        means = strongest.means if allows_mean(rule, basis, strongest) else None
        for kind, square, row, body in (
            ("E", electric, basis.electric, None if means is None else means.electric),
            ("H", magnetic, basis.magnetic, None if means is None else means.magnetic),
        ):
            limit = None if row is None else row.at(basis.frequency)
            if row is not None and limit is not None:
                likely = power * (view.point.power_at_loop.likely or 0.0) / view.point.power
                over_body = None if body is None else sqrt(body * at_loop)
                made.append(_Judged(basis, kind, row, sqrt(square * at_loop), limit, likely, mean, over_body))
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
        judged_on="mean over the body" if binding.mean else "worst point",
        body_mean_share=max(
            ((each.body_mean / each.limit) ** 2 for each in own.values() if each.body_mean is not None), default=None
        ),
    )


def _times(view: View, judged: Sequence[_Judged], tuning: bool) -> tuple[TimeRecord, ...]:
    """Return how long one may transmit at full power in each averaging time, the margin kept.

    In time of the mode as it is keyed, and of an unbroken carrier; a place while tuning has the tune-up's carrier only.
    Not at all where a basis that does not average is exceeded.
    """
    use, times = view.use, dict.fromkeys(each.basis.averaging_time for each in judged if each.basis.averaging_time)
    strict = view.margin**2 * view.bare_factor
    if any(each.share * strict > 1.0 for each in judged if not each.basis.averaging_time):
        return tuple(TimeRecord(averaging_time=time, keyed=None if tuning else 0.0, carrier=0.0) for time in times)
    made = []
    for time in times:
        allowed = []
        for carrier in (False, True):
            power = use.tune_up_power if tuning else use.envelope * (1.0 if carrier else use.duty)
            rest = []
            for each in judged:
                if each.basis.averaging_time == time and each.share > 0.0:
                    for_each_watt = each.share * strict / use.judged(time, "tuning" if tuning else "always")
                    beside = 0.0 if tuning else use.tune_up_power * min(1.0, use.tune_up_time / time)
                    rest.append(max(0.0, 1.0 - beside * for_each_watt) / (power * for_each_watt))
            allowed.append(min([1.0, *rest]) * time)
        made.append(TimeRecord(averaging_time=time, keyed=None if tuning else allowed[0], carrier=allowed[1]))
    return tuple(made)


def _powers(view: View, judged: Sequence[_Judged], tuning: bool) -> tuple[float, float]:
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


def _rows(judged: Sequence[_Judged]) -> list[tuple[Limit, float]]:
    return [(each.row, each.basis.frequency) for each in judged]


def unread(rows: Sequence[tuple[Limit, float]]) -> str:
    """Return which limits, each at its frequency [Hz], nobody has read in their source; empty if all were."""
    named = dict.fromkeys(
        f"{'E' if row.field == 'electric' else 'H'} {row.at(frequency):.4g} {row.unit} ({row.basis})"
        for row, frequency in rows
        if row.provenance_at(frequency) == "memory"
    )
    return f"from memory and read by nobody in the standard: {', '.join(named)}" if named else ""


def unjudged(rule: Rule, *, mean: bool) -> str:
    """Return what is left unjudged, or from memory, where the mean over the body decides; empty if nothing is."""
    if not mean:
        return ""
    memory = "that the rule lets it count is from memory" if rule.body.provenance == "memory" else ""
    reasons = "; ".join(filter(None, (rule.body.local, memory)))
    return f"by the mean over the body; {reasons}" if reasons else ""
