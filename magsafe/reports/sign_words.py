"""What a fence sign and a pocket card say: distances for each tier, at what power, and what is not proven."""

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from math import inf
from typing import Literal

from magsafe import words
from magsafe.checks.sheet import (
    DistanceRecord,
    DistancesRecord,
    ExposureRecord,
    Finding,
    KeepoutPoint,
    KeepoutRecord,
    KeepoutSheet,
    PowerCeiling,
    SessionExposure,
    Sheet,
)
from magsafe.design.model import Design, Transmission
from magsafe.reports.map_words import reach_of
from magsafe.reports.people import farthest, on_floors
from magsafe.rules.limit import Who, load_rule

Exposure = ExposureRecord | SessionExposure
State = Literal["known", "at least", "unknown", "no rule"]
_PEOPLE: dict[Who, str] = {"public": "Public", "trained": "Trained people"}
_UNBOUNDED = "the keep-out reaches further than was searched"


@dataclass(frozen=True, slots=True)
class Tier:
    """What is told to one tier: a line, what stands beneath it very large, and small lines.

    `metres` is the distance for people on the floors as it is printed, empty where none is known.
    """

    state: State
    label: str
    large: str
    small: tuple[str, ...]
    metres: str


@dataclass(frozen=True, slots=True)
class SignWords:
    """All that a sign says."""

    proven: bool
    title: str
    header: str
    tiers: tuple[Tier, Tier]
    volts: str
    behind: str
    outside: str
    stopped: tuple[str, ...]
    thin: str
    reasons: tuple[str, ...]
    uses: tuple[str, ...]
    apart: str
    rules: tuple[str, ...]
    origin: str
    ask: tuple[tuple[str, str], ...]


def sign_words(sheet: Sheet, people: KeepoutSheet, design: Design) -> SignWords:
    """Return what the sign of a design says.

    Parameters
    ----------
    sheet : the whole result, which knows the volts
    people : its part about people
    design : the design of both
    """
    reasons = tuple(_reasons(people))
    proven = not reasons and people.verdict != "unproven"
    outside = "outside the fence" if proven and _fence_holds(people, design) else "away"
    order = sorted(range(len(people.operating_points)), key=lambda i: strictness(people.operating_points[i]))
    station, volts = design.station, _volts(sheet, design)
    return SignWords(
        proven=proven,
        title=f"Keep-out: {words.short(station.name or people.design.name, 60)}",
        header="Keep out while the transmitter is on" if proven else f"Distance not proven: keep everybody {outside}",
        tiers=(_tier(people, "public", proven=proven), _tier(people, "trained", proven=proven)),
        volts=volts,
        behind=f"a radio transmitter, a strong magnetic field, {volts}. It burns when touched, also at low power",
        outside=outside,
        stopped=tuple(dict.fromkeys(_named(f, 24) for f in _findings(people) if f.verdict == "stop")),
        thin=_thin(people),
        reasons=reasons,
        uses=(
            *(f"worked in turn ({words.short(each.name, 60)})" for each in people.sessions),
            *(_use(people.operating_points[i], design.transmission[i]) for i in order),
        ),
        apart=_apart(design),
        rules=tuple(_rules(people)),
        origin=f"{words.short(people.design.name)}, {people.date}, magsafe {people.magsafe}, "
        f"input {people.design.sha256[:12]}",
        ask=(
            ("Station", station.name or ""),
            ("Operator", station.operator or ""),
            ("Call sign", station.callsign or ""),
        ),
    )


def _fence_holds(people: KeepoutSheet, design: Design) -> bool:
    """Return whether a fence keeps the public out, as far off as an unbroken carrier asks, and within every limit."""
    fences = {place.name: place.fence for place in design.place if place.fence and place.who == "public"}
    records = of_tier((each for _, each in exposures(people)), "public")
    judged = [place for each in records for place in each.places if place.name in fences]
    carrier = largest_of([*key_downs(records), *(each.keepout for each in records if each.keepout is not None)])
    if not fences or not judged or carrier is None or carrier.distance is None:
        return False
    within = all(place.verdict in ("clear", "narrow") for place in judged)
    return within and min(fences.values()) >= carrier.distance


def _thin(people: KeepoutSheet) -> str:
    """Return why the verdict is narrow at best; empty if it is not."""
    found = [finding for finding in _findings(people) if finding.thin]
    read = any(finding.id.startswith("exposure.probe.") for finding in found)
    unread = any(not finding.id.startswith("exposure.probe.") for finding in found)
    reasons = (
        ("a probe read more than was computed, within its uncertainty, or far less", read),
        ("part of what the limits rest on nobody has read in its source", unread),
    )
    return "; ".join(reason for reason, holds in reasons if holds)


def several(entries: Sequence[str], most: int, joint: str = "; ") -> str:
    """Return the first entries of a list, and how many more there are and where."""
    more = len(entries) - most
    told = joint.join(entries[:most])
    return f"{told}{joint}and {more} more: see the sheet" if more > 0 else told


def strictness(point: KeepoutPoint) -> tuple[float, float]:
    """Return what sorts transmissions: those that reach furthest first and unknown ones before them."""
    averaged, carrier = reach_of(point)
    return (-inf, -inf) if averaged < 0.0 else (-averaged, -carrier)


# Distances -------------------------------------------------------------------------------------------------


def exposures(people: KeepoutSheet) -> Iterator[tuple[str, Exposure]]:
    """Yield what each rule says of each tier, and of which transmission or of which of them worked in turn."""
    for point in people.operating_points:
        yield from ((words.short(point.name), each) for each in point.exposure)
    for session in people.sessions:
        yield from ((f"{words.short(session.name)} in turn", each) for each in session.exposure)


def of_tier(found: Iterable[Exposure], who: Who) -> list[Exposure]:
    """Return what the rules that have limits for a tier say of it; empty where none has any."""
    return [each for each in found if each.who == who and load_rule(each.rule).limits(who)]


def state_of(records: Sequence[Exposure], *, proven: bool) -> State:
    """Return what is known of a tier's distance.

    Parameters
    ----------
    records : of `of_tier`
    proven : whether the verdict on people rests on nothing unproven
    """
    if not records:
        return "no rule"
    if any(each.keepout is None or _is_open(each.keepout) for each in records):
        return "unknown"
    return "known" if proven and not any(each.why for each in records) else "at least"


def floors_and_any(found: Sequence[DistancesRecord]) -> tuple[str, str]:
    """Return the largest distance on the floors and in any direction [m], as they are printed; empty if none is."""
    return (
        farthest([distance for each in found for distance in on_floors(each)]),
        farthest([each.any_direction for each in found]),
    )


def largest_of(found: Sequence[DistancesRecord]) -> DistanceRecord | None:
    """Return the largest distance, on the floors and in any direction; None if there is none."""
    every = [distance for each in found for distance in (each.any_direction, *on_floors(each)) if distance is not None]
    return max(every, key=lambda each: inf if each.distance is None else each.distance, default=None)


def key_downs(records: Sequence[Exposure]) -> list[DistancesRecord]:
    """Return the distances for an unbroken carrier, of each transmission."""
    return [each.keepout.key_down for each in records if isinstance(each.keepout, KeepoutRecord)]


def _is_open(found: DistancesRecord) -> bool:
    largest = largest_of([found])
    return largest is None or largest.distance is None


def _tier(people: KeepoutSheet, who: Who, *, proven: bool) -> Tier:
    name = _PEOPLE[who]
    records = of_tier((each for _, each in exposures(people)), who)
    state = state_of(records, proven=proven)
    if state == "no rule":
        told = f"none of the rules named has limits for {name.lower() if who == 'trained' else 'the public'}"
        if not any(point.exposure for point in people.operating_points):
            told = "no exposure rule is named"
        return Tier(state, f"{name}: distance not proven", "keep away", (told,), "")
    found = [each.keepout for each in records if each.keepout is not None and not _is_open(each.keepout)]
    floors, every = floors_and_any(found)
    # What is worked in turn may reach further than any carrier by itself.
    carrier = largest_of([*key_downs(records), *found]) if key_downs(records) else None
    small = []
    if carrier is not None:
        metres = farthest([carrier])
        told = "distance not proven" if carrier.distance is None else f"{_least(state)}{metres} m"
        small.append(f"unbroken carrier (key-down): {told}")
    if state == "unknown":
        if floors:
            most = max(floors, every, key=float)
            small.insert(0, f"by what is computed at least {most} m from the centre of the loop")
        return Tier(state, f"{name}: distance not proven", "keep away", tuple(small), "")
    if float(every) > float(floors):
        small.insert(0, f"in any direction, above too: {_least(state)}{every} m")
    label = f"{name}: {'keep away from the loop' if state == 'known' else 'not proven, keep away'}"
    return Tier(state, label, f"{_least(state)}{floors} m", tuple(small), floors)


def _least(state: State) -> str:
    return "" if state == "known" else "at least "


# Words -----------------------------------------------------------------------------------------------------


def _findings(people: KeepoutSheet) -> tuple[Finding, ...]:
    return (*people.findings, *(finding for point in people.operating_points for finding in point.findings))


def _named(finding: Finding, most: int = 32) -> str:
    return words.short(finding.place or finding.id.removeprefix("exposure.").replace(".", " "), most)


def _reasons(people: KeepoutSheet) -> Iterator[str]:
    """Yield what is not proven: the names for which a reason holds, then the reason."""
    held: dict[str, list[str]] = {}
    for finding in _findings(people):
        # A probe that read more than was computed: all distances are too short.
        too_short = finding.verdict == "stop" and finding.id.startswith("exposure.probe.")
        if finding.doubt or finding.verdict == "unproven" or too_short:
            held.setdefault(finding.doubt or finding.because, []).append(_named(finding))
    for name, each in exposures(people):
        if not load_rule(each.rule).limits("public" if each.who == "public" else "trained"):
            continue
        if each.keepout is not None and _is_open(each.keepout):
            held.setdefault(_UNBOUNDED, []).append(f"{each.rule} {each.who}")
        elif each.keepout is None or each.why:
            held.setdefault(each.why or "its distance is not known", []).append(name)
    for reason, names in held.items():
        yield f"{several(list(dict.fromkeys(names)), 3, ', ')}: {_shortened(reason)}"


def _shortened(reason: str, most: int = 200) -> str:
    return reason if len(reason) <= most else f"{reason[:most].rsplit(' ', 1)[0]} ..."


def _volts(sheet: Sheet, design: Design) -> str:
    name = "terminal_peak_voltage" if design.capacitor.kind == "none" else "capacitor_peak_voltage"
    figures = [point.figures[name] for point in sheet.operating_points if name in point.figures]
    worst = [figure.high for figure in figures if figure.high is not None]
    known = [max(each) for f in figures if (each := [v for v in (f.high, f.likely) if v is not None])]
    if not known:
        return "kilovolts on the loop"
    told = words.amount(max(known), "V", qualifier="peak")
    return f"up to {told} on the loop" if len(worst) == len(figures) else f"{told} on the loop, perhaps more"


def _use(point: KeepoutPoint, transmission: Transmission) -> str:
    """Return how a transmission may be used for the distances to hold."""
    name = ", ".join(dict.fromkeys((words.short(point.name), words.frequency(point.frequency))))
    parts = [name, *([transmission.mode] if transmission.mode else []), f"{words.watts(point.power)} PEP"]
    if transmission.duty is not None:
        parts.append(f"duty {100.0 * transmission.duty:.3g} %")
    if transmission.over is not None:
        parts.append(
            f"overs {words.duration(transmission.over.transmit)} / listen {words.duration(transmission.over.listen)}"
        )
    elif transmission.on_air_share is not None:
        parts.append(f"on the air {100.0 * transmission.on_air_share:.3g} % of any 6 min")
    else:
        parts.append("no pauses counted")
    if transmission.tune_up is not None:
        parts.append(
            f"tune-up {words.watts(transmission.tune_up.power)} for {words.duration(transmission.tune_up.time)}"
        )
    return ", ".join(parts)


def _apart(design: Design) -> str:
    """Return what is taken of transmissions that no session lists; empty where all are listed."""
    together = {name for names in design.site.sessions for name in names}
    if len(design.transmission) < 2 or len(together) == len(design.transmission):
        return ""
    return f"; {'the others' if together else 'each'} an averaging time apart"


def _rules(people: KeepoutSheet) -> list[str]:
    """Return the rules with their editions, the one that reaches furthest first."""
    reach: dict[str, float] = {}
    for _, each in exposures(people):
        own = None if each.keepout is None else largest_of([each.keepout])
        far = -1.0 if own is None else inf if own.distance is None else own.distance
        told = f"{each.rule}, {each.edition}"
        reach[told] = max(far, reach.get(told, -1.0))
    return sorted(reach, key=lambda told: -reach[told])


def clear_to(made: PowerCeiling) -> str:
    """Return the highest power that is clear for people [W], with a star where it is not proven."""
    if made.value is None or made.held_by in made.left_out:
        return "unproven"
    if made.value == 0.0:
        return "none"
    return f"{words.floor_two_digits(made.value)}{'' if made.complete else '*'}"
