"""Where may people be while transmissions are worked in turn: what `site.sessions` lists, summed over each window."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import reduce
from math import sqrt

import numpy as np

from magsafe import words
from magsafe.analysis.exposure import Basis, When
from magsafe.analysis.keepout import Distances
from magsafe.analysis.session import (
    Part,
    Sum,
    Worked,
    further,
    keep_out_together,
    parts_of,
    scale_to_limit,
    worst_sum,
)
from magsafe.checks.exposure import as_record, averaged_keep_out, doubted, gap_of, unjudged, unread
from magsafe.checks.judge import Check, judge
from magsafe.checks.sheet import Finding, SessionExposure, SessionPlace, SessionRecord, SessionTerm
from magsafe.checks.view import View, counts_mean, judged_squares
from magsafe.design.model import Design, Place
from magsafe.rules.limit import WHO, Rule, Who, load_rule
from magsafe.spread import Spread
from magsafe.units import significant

Findings = dict[int, list[Finding]]


def sessions(design: Design, views: Sequence[View]) -> tuple[tuple[SessionRecord, ...], Findings]:
    """Return what each rule says of people during each session, and the findings of each transmission."""
    records, findings = [], Findings()
    rules = [load_rule(name) for name in design.site.rules]
    for number, names in enumerate(design.site.sessions, 1):
        members = tuple(design.titles.index(name) for name in names)
        session = _Session(number, members, tuple(views[index] for index in members))
        exposed = []
        for rule in rules:
            for who in WHO:
                if rule.limits(who):
                    record, found = _tier(session, rule, who)
                    exposed.append(record)
                    for index, each in found:
                        findings.setdefault(index, []).append(each)
        name = ", ".join(words.short(name) for name in names)
        records.append(SessionRecord(number=number, name=name, transmissions=members, exposure=tuple(exposed)))
    return tuple(records), findings


@dataclass(frozen=True, slots=True)
class _Session:
    """Transmissions worked in turn, by their indices, with their fields."""

    number: int
    members: tuple[int, ...]
    views: tuple[View, ...]

    @property
    def unknown(self) -> str:
        return next((view.unknown for view in self.views if view.unknown), "")

    @property
    def margin(self) -> float:
        return self.views[0].margin

    def bases(self, rule: Rule, who: Who) -> tuple[tuple[int, View, Basis], ...]:
        """Return every averaged basis of every transmission."""
        return tuple(
            (index, view, basis)
            for index, view in zip(self.members, self.views, strict=True)
            for basis in view.bases(rule, who)
            if basis.averaging_time
        )


def _tier(session: _Session, rule: Rule, who: Who) -> tuple[SessionExposure, list[tuple[int, Finding]]]:
    gaps = (gap_of(view, rule, who) for view in session.views)
    unknown = session.unknown or next((gap for gap in gaps if gap), "")
    places = [place for place in session.views[0].design.place if place.who == who]
    records, findings = [], []
    for place in places:
        if unknown or not _adds(session, place):
            records.append(SessionPlace(name=place.name, verdict="unproven"))
            continue
        record, found = _place(_AtPlace(session, rule, who, place))
        records.append(record)
        findings += found
    why = unknown or session.views[0].doubt or None
    keepout = None if unknown else _keepout(session, rule, who)
    record_of_tier = SessionExposure(
        rule=rule.name,
        edition=rule.edition,
        who=who,
        keepout=None if keepout is None else as_record(keepout),
        places=tuple(records),
        why=why,
    )
    return record_of_tier, findings


def _adds(session: _Session, place: Place) -> bool:
    """Return whether something adds up at a place: while tuning only tune-ups do."""
    return place.when == "always" or all(view.use.tune_up_time for view in session.views)


def _keepout(session: _Session, rule: Rule, who: Who) -> Distances | None:
    """Return how far the sum reaches in each direction, and never less than one transmission by itself."""
    worked, alone = [], []
    for index, view in zip(session.members, session.views, strict=True):
        if view.around is None:
            return None
        strict = view.at_loop * view.margin**2 * view.bare_factor
        worked.append(Worked(index, view.around, view.bases(rule, who), view.use, strict))
        alone.append(averaged_keep_out(view, view.around, view.bases(rule, who)))
    together = keep_out_together(worked, rule.summation, session.views[0].design.loop.plane == "vertical")
    return reduce(further, alone, together)


# Places ----------------------------------------------------------------------------------------------------

Name = tuple[str, float]
Factor = Callable[[View], float]


@dataclass(frozen=True, slots=True)
class _AtPlace:
    """A session at one place under one rule."""

    session: _Session
    rule: Rule
    who: Who
    place: Place

    @property
    def when(self) -> When:
        return self.place.when

    @property
    def bases(self) -> tuple[tuple[int, View, Basis], ...]:
        return self.session.bases(self.rule, self.who)

    @property
    def names(self) -> tuple[Name, ...]:
        """The averaged bases, by name and averaging time."""
        return tuple(dict.fromkeys((basis.name, basis.averaging_time) for _, _, basis in self.bases))

    @property
    def doubts(self) -> tuple[str, ...]:
        found = [doubt for view in self.session.views for doubt in view.strongest[self.place.name].doubts]
        metal = self.session.views[0].doubt
        return tuple(dict.fromkeys((*found, *([metal] if metal else []))))

    @property
    def mean(self) -> bool:
        """Whether the mean over the body decides."""
        return any(counts_mean(view, self.rule, each, view.strongest[self.place.name]) for _, view, each in self.bases)

    @property
    def thin(self) -> str:
        """Why the evidence is too thin; empty if it is not."""
        limits = ((row, each.frequency) for _, _, each in self.bases for row in (each.electric, each.magnetic) if row)
        added = "how transmissions add up is from memory" if self.rule.summation.provenance == "memory" else ""
        return "; ".join(filter(None, (unread(tuple(limits)), unjudged(self.rule, mean=self.mean), added)))

    def parts(self, name: Name, factor: Factor) -> list[Part]:
        """Return what fills the time under one basis, the power at the loop raised by a factor for each view."""
        return [
            part
            for index, view, basis in self.bases
            if (basis.name, basis.averaging_time) == name
            for electric, magnetic in [judged_squares(view, self.rule, basis, view.strongest[self.place.name])]
            for part in parts_of(
                index, basis, view.use, self.when, (np.array(electric), np.array(magnetic)), view.at_loop * factor(view)
            )
        ]

    def sum(self, name: Name, factor: Factor = lambda _: 1.0) -> Sum:
        return worst_sum(self.parts(name, factor), self.rule.summation)

    def power_factor(self, margin: float) -> float | None:
        """Return what all powers may be multiplied by with a margin of fields, without credit for typical losses."""
        scales = [
            scale_to_limit(self.parts(name, lambda view: view.bare_factor * margin**2), self.rule.summation)
            for name in self.names
        ]
        return min((each for each in scales if each is not None), default=None)


def _place(here: _AtPlace) -> tuple[SessionPlace, list[tuple[int, Finding]]]:
    session, rule, tuning = here.session, here.rule, here.when == "tuning"
    sums = {name: here.sum(name) for name in here.names}
    name = max(sums, key=lambda each: float(sums[each].share))
    binding, share = sums[name], float(sums[name].share)
    likely, bare = (
        max(float(here.sum(each, factor).share) for each in here.names)
        for factor in (lambda view: view.likely_factor, lambda view: view.bare_factor)
    )
    factors = (None, None) if tuning else (here.power_factor(session.margin), here.power_factor(1.0))
    check = Check(
        f"exposure.{rule.name}.{here.who}.session-{session.number}.{words.slug(here.place.name)}",
        f"Is {here.place.name} within the limits of {rule.name} for {here.who} people while these are worked in turn?",
        "work them an averaging time apart, or keep people out of this place while they are worked in turn",
        f"{rule.standard}, {rule.edition}; {rule.summation.source}",
        "1",
    )
    terms = _terms(binding, here.parts(name, lambda _: 1.0))
    findings = []
    for index, view in zip(session.members, session.views, strict=True):
        powers = tuple(None if factor is None else factor * view.point.power for factor in factors)
        found = judge(
            check,
            Spread(None, sqrt(likely), sqrt(share)),
            1.0,
            session.margin,
            bare_end=sqrt(bare),
            power=None if tuning else view.point.power,
            powers=(powers[0], powers[1]),
            thin=here.thin,
            provenance="memory" if here.thin else "verified",
            place=here.place.name,
        )
        relation = found.because.partition(": ")[2]
        worst = f"{significant(sqrt(share))} times the field at the limit, {significant(sqrt(likely))} likely"
        because = f"summed over the worst {words.duration(name[1])} ({name[0]}) {worst}: {relation}"
        do = _do(found, factors[0], check.do)
        found = found.model_copy(update={"because": because, "do": do, "session": session.number})
        findings.append((index, doubted(found, here.doubts)))
    verdict, proven = findings[0][1].verdict, not here.doubts
    record = SessionPlace(
        name=here.place.name,
        verdict=verdict,
        share_of_limit=share,
        field_ratio=sqrt(share),
        set_by="E" if binding.electric_decides else "H",
        basis=name[0],
        averaging_time=name[1],
        judged_on="mean over the body" if here.mean else "worst point",
        terms=terms,
        power_factor=factors[0] if proven else None,
        at_limit=factors[1] if proven else None,
    )
    return record, findings


def _terms(found: Sum, parts: Sequence[Part]) -> tuple[SessionTerm, ...]:
    """Return what each transmission adds, its overs and its tune-up together."""
    added: dict[int, tuple[float, float]] = {}
    for part, time, share in zip(parts, found.times, found.shares, strict=True):
        before = added.get(part.transmission, (0.0, 0.0))
        added[part.transmission] = before[0] + float(time), before[1] + float(share)
    return tuple(
        SessionTerm(transmission=index, share_of_window=time, share_of_limit=share)
        for index, (time, share) in added.items()
    )


def _do(found: Finding, factor: float | None, otherwise: str) -> str:
    """Return what to do: all powers lowered alike, or what the check says."""
    if found.verdict == "clear" or factor is None or factor >= 1.0 or factor == 0.0:
        return otherwise if factor == 0.0 and found.verdict != "clear" else found.do
    return f"lower all of their powers to {words.floor_two_digits(100.0 * factor)} %, or {otherwise}"
