"""What the capacitor must be over all transmissions of a design, with the one that it has beside it."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import date
from math import floor, log10, sqrt

from magsafe import __version__
from magsafe.analysis import tuning
from magsafe.analysis.capacitor_parts import main_capacitance, main_part
from magsafe.analysis.chain import Chain
from magsafe.analysis.gap import site_air
from magsafe.analysis.losses import Loss, among
from magsafe.analysis.operating_point import OperatingPoint, operating_point
from magsafe.analysis.rated_voltage import altitude_derating
from magsafe.checks.as_built import as_built
from magsafe.checks.ceiling import ceiling, least
from magsafe.checks.run import check
from magsafe.checks.sheet import DesignRecord, Finding, Sheet, Value, worst
from magsafe.checks.sizing_sheet import (
    BandRecord,
    CapacitanceNeeded,
    CapacitorSheet,
    GapNeeded,
    KindPoint,
    KindRow,
    PowerRow,
    RatingNeeded,
    SizedTransmission,
    TuningRecord,
)
from magsafe.design import tables
from magsafe.design.model import Design
from magsafe.physics.atmosphere import relative_air_density
from magsafe.physics.deratings import WORKING
from magsafe.physics.gap_size import gap_for
from magsafe.spread import Spread

POWERS = (5.0, 10.0, 25.0, 50.0, 100.0, 200.0, 400.0, 1000.0, 1500.0)  # W
USUAL = (1.0, 1.5, 2.0, 2.5, 3.0, 4.0, 5.0, 7.5, 10.0)  # steps of ratings within a decade (common practice)
_NO_CAPACITOR = 'the loop is used without a capacitor (capacitor.kind = "none"): there is none to size'


@dataclass(frozen=True, slots=True)
class _Use:
    """One transmission that is computed: the main part's volts and amps at worst, without credit, and its watts."""

    index: int
    point: OperatingPoint
    chain: Chain
    voltage: float
    current: float
    heat: float

    @property
    def frequency(self) -> float:
        return self.point.transmission.frequency

    def scale(self, power: float) -> float:
        """Return by what volts and amps grow at another envelope power [W]."""
        return sqrt(power / self.point.power)


def sizing(design: Design, power: float | None = None, on: date | None = None) -> CapacitorSheet:
    """Return what the capacitor of a design must be.

    Parameters
    ----------
    design : a design that was read
    power : the envelope power on every transmission [W]; None for the design's own
    on : the date on the sheet; today where it is not given
    """
    used = design if power is None else at_power(design, power)
    too_good = _too_good(used)
    if not too_good:
        # Another capacitor makes another Q, so what was measured with this one sizes none.
        used = used.model_copy(update={"measured": []})
    origin = design.origin
    blank = CapacitorSheet(
        magsafe=__version__,
        date=(on or date.today()).isoformat(),
        design=DesignRecord(name=origin.name, sha256=origin.sha256, text=origin.text),
        power=power,
        verdict="clear",
        power_ceiling=None,
        transmissions=(),
    )
    points = tuple(operating_point(used, each) for each in used.transmission)
    transmissions = tuple(_transmission(used, i, point) for i, point in enumerate(points))
    if used.capacitor.kind == "none":
        return blank.model_copy(update={"transmissions": transmissions, "why": _NO_CAPACITOR})
    sheet = check(_without_people(used))
    shared = _own(sheet.findings)
    found = tuple((*_own(point.findings), *too_good.get(i, ())) for i, point in enumerate(sheet.operating_points))
    uses = tuple(use for i, point in enumerate(points) for use in _uses(i, point))
    return blank.model_copy(
        update={
            "verdict": worst(tuple(each.verdict for each in (*shared, *(f for each in found for f in each)))),
            "power_ceiling": least([ceiling((*each, *shared), i) for i, each in enumerate(found)]),
            "capacitance": _capacitance(used, uses),
            "peak_voltage": _rating([each.voltage for each in uses], uses, _volts_asked(used), "V"),
            "rms_current": _rating([each.current for each in uses], uses, used.margins.current, "A"),
            "gap": _gap(used, uses) if uses else None,
            "dissipation": max((each.heat for each in uses), default=None),
            "transmissions": transmissions,
            "powers": tuple(_row(used, uses, each) for each in POWERS) if uses else (),
            "kinds": tuple(_kinds(used, uses)),
            "tuning": _tuning(used, points),
            "findings": found,
            "shared_findings": shared,
            "notes": (*_notes(used, uses), *_unmeasured(used, design)),
            "cautions": _cautions(sheet),
        }
    )


def _too_good(design: Design) -> dict[int, tuple[Finding, ...]]:
    """Return the stops of transmissions whose measured Q is higher than the parts can make, by their index."""
    if not design.measured or design.capacitor.kind == "none":
        return {}
    judged = ((i, as_built(design, operating_point(design, each))) for i, each in enumerate(design.transmission))
    return {i: (each,) for i, each in judged if each is not None and each.verdict == "stop"}


def _unmeasured(used: Design, design: Design) -> tuple[str, ...]:
    """Return what becomes of a measured Q here; empty where the design holds none."""
    if not design.measured:
        return ()
    if used.measured:
        return ("The Q in [measured] is higher than the parts can make it, and so are the volts: all this counts it.",)
    return (
        "The Q in [measured] is that of the loop with the capacitor that it has; a better one has more, and more "
        "volts. All this is sized by the parts alone; magsafe check counts the measured Q.",
    )


def at_power(design: Design, power: float) -> Design:
    """Return a design with one envelope power [W] on every transmission; tune-ups above it become as weak as it."""
    moved = []
    for each in design.transmission:
        tune_up = each.tune_up
        if tune_up is not None and tune_up.power > power:
            tune_up = tune_up.model_copy(update={"power": power})
        moved.append(each.model_copy(update={"power": power, "carrier_power": None, "tune_up": tune_up}))
    return design.model_copy(update={"transmission": moved})


def _without_people(design: Design) -> Design:
    """Return a design without what only people are judged by, which takes longest and changes no capacitor."""
    site = design.site.model_copy(update={"rules": [], "sessions": []})
    return design.model_copy(update={"site": site, "place": [], "probe": []})


def _own(findings: Sequence[Finding]) -> tuple[Finding, ...]:
    return tuple(each for each in findings if each.id.startswith("capacitor."))


def _cautions(sheet: Sheet) -> tuple[str, ...]:
    return tuple(each for each in sheet.cautions if each.startswith(("RF burns", "Tuning", "Stored charge")))


def _uses(index: int, point: OperatingPoint) -> tuple[_Use, ...]:
    """Return the use of one transmission; none where the loop is not computed."""
    if point.chain is None:
        return ()
    part = main_part(point)
    voltage, current = part.bare_voltage or part.voltage.high, part.bare_current or part.current.high
    if part.missing or voltage is None or current is None:
        return ()
    heat = point.chain.heat_spread(point.chain.capacitor).high or 0.0
    return (_Use(index, point, point.chain, voltage, current, heat),)


def _transmission(design: Design, index: int, point: OperatingPoint) -> SizedTransmission:
    name, transmission = design.titles[index], point.transmission
    made = point.chain
    if design.capacitor.kind == "none":
        why: str | None = _NO_CAPACITOR
    else:
        why = "; ".join(point.out_of_range) or main_part(point).missing or None
    if made is None or why is not None:
        return SizedTransmission(name=name, frequency=transmission.frequency, power=point.power, why=why)
    part, rate, ends = main_part(point), tuning.tuning_rate(made), design.capacitor.capacitance
    steps = design.tuning.steps_per_range
    step = None if ends is None or steps is None else (rate.high or 0.0) * (ends.max - ends.min) / steps
    return SizedTransmission(
        name=name,
        frequency=transmission.frequency,
        power=point.power,
        capacitance=_value(main_capacitance(point)[1], "F"),
        peak_voltage=_value(part.voltage, "V"),
        bare_voltage=part.bare_voltage,
        rms_current=_value(part.current, "A"),
        bare_current=part.bare_current,
        dissipation=_value(made.heat_spread(made.capacitor), "W"),
        hertz_per_farad=_value(rate, "Hz/F"),
        swr15_width=tuning.step_width(made, "bare"),
        step=step,
        steps_needed=tuning.steps_needed(made, design.capacitor) if design.tuning.by in (None, "motor") else None,
    )


def _value(spread: Spread, unit: str) -> Value:
    return Value(low=spread.low, likely=spread.likely, high=spread.high, unit=unit)


def _capacitance(design: Design, uses: Sequence[_Use]) -> CapacitanceNeeded | None:
    """Return what a variable capacitor must reach with the padding as it is joined."""
    if not uses:
        return None
    needed, stray = [main_capacitance(each.point)[1] for each in uses], design.capacitor.stray
    lows, highs = [each.low for each in needed], [each.high for each in needed]
    why = None
    if None in (*lows, *highs):
        why = "how much of the inductance the ground's image takes away is open: loop.centre_height is not given"
    return CapacitanceNeeded(
        least=None if None in lows else max(0.0, min(each or 0.0 for each in lows) - stray),
        most=None if None in highs else max(0.0, max(each or 0.0 for each in highs) - stray),
        stray=stray,
        why=why,
    )


def _volts_asked(design: Design) -> float:
    """Return what a voltage rating must be over the volts: the margin, and what thin air takes off the rating."""
    thin = altitude_derating(design)
    return design.margins.voltage / (1.0 if thin is None else thin.factor)


def usual_rating(needed: float) -> float:
    """Return the next usual rating at or above a value in SI units (common practice)."""
    decade = 10.0 ** floor(log10(needed))
    return next(step * decade for step in USUAL if step * decade >= needed * (1.0 - 1e-9))


def _rating(values: Sequence[float], uses: Sequence[_Use], margin: float, unit: str) -> RatingNeeded | None:
    if not uses:
        return None
    at_worst, index = max(zip(values, (each.index for each in uses), strict=True))
    return RatingNeeded(
        at_worst=at_worst,
        transmission=index,
        margin_asked=margin,
        needed=at_worst * margin,
        usual=usual_rating(at_worst * margin),
        unit=unit,
    )


def _gap(design: Design, uses: Sequence[_Use]) -> GapNeeded:
    altitude, temperature = site_air(design)
    volts = [(each.voltage, each.frequency) for each in uses]
    single, each_of_two = _gaps(design, volts)
    why = "no gap that is computed stands the volts at that frequency" if None in (single, each_of_two) else None
    return GapNeeded(
        single=single,
        each_of_two=each_of_two,
        altitude=altitude,
        temperature=temperature,
        density=float(relative_air_density(altitude, temperature)),
        why=why,
    )


def _gaps(design: Design, volts: Sequence[tuple[float, float]]) -> tuple[float | None, float | None]:
    """Return one gap, and each of two in series [m], for crests [V] at frequencies [Hz]; None where none stands them.

    `capacitor.gap` asks for the margin or for half of breakdown, whichever is more.
    """
    density = float(relative_air_density(*site_air(design)))
    factor = max(1.0, design.margins.voltage * WORKING.factor)
    asked: list[tuple[float, float]] = []
    # A rating never rises with the frequency, so only what has more volts or a higher frequency can decide.
    for crest, frequency in sorted(volts, reverse=True):
        if all(frequency > known for _, known in asked):
            asked.append((crest, frequency))
    found: list[float | None] = []
    for sections in (1.0, 2.0):
        try:
            found.append(max(gap_for(crest * factor / sections, density, frequency) for crest, frequency in asked))
        except ValueError:
            found.append(None)
    return found[0], found[1]


def _row(design: Design, uses: Sequence[_Use], power: float) -> PowerRow:
    volts = [(each.voltage * each.scale(power), each.frequency) for each in uses]
    crest, amps = max(volts)[0], max(each.current * each.scale(power) for each in uses)
    single, each_of_two = _gaps(design, volts)
    margins = design.margins
    return PowerRow(
        power=power,
        peak_voltage=crest,
        voltage_needed=crest * _volts_asked(design),
        voltage_usual=usual_rating(crest * _volts_asked(design)),
        rms_current=amps,
        current_needed=amps * margins.current,
        current_usual=usual_rating(amps * margins.current),
        gap=single,
        gap_each_of_two=each_of_two,
        dissipation=max(each.heat * each.scale(power) ** 2 for each in uses),
    )


def _kinds(design: Design, uses: Sequence[_Use]) -> list[KindRow]:
    """Return the loop with its own capacitor, then with each kind's typical losses, the least first."""
    if not uses:
        return []
    own = KindRow(kind=design.capacitor.kind, own=True, quality_factor=None, points=_points(uses, None))
    rows = [(name, tables.capacitor_quality_factor(name)) for name in tables.capacitor_kinds()]
    rows.sort(key=lambda row: -(row[1].likely or 0.0))
    return [
        own,
        *(
            KindRow(kind=name, own=False, quality_factor=_value(typical, "1"), points=_points(uses, typical))
            for name, typical in rows
        ),
    ]


def _points(uses: Sequence[_Use], typical: Spread | None) -> tuple[KindPoint, ...]:
    found = []
    for each in uses:
        made = each.chain if typical is None else with_quality(each.chain, typical)
        # Somewhere in a line the volts are higher than at its terminals.
        voltage = made.spread(made.voltage).widened(made.voltage_error, made.voltage_error).scaled(made.capacitor_crest)
        found.append(
            KindPoint(
                transmission=each.index,
                efficiency=_value(made.efficiency_spread(), "1"),
                peak_voltage=_value(voltage, "V"),
            )
        )
    return tuple(found)


def with_quality(chain: Chain, typical: Spread) -> Chain:
    """Return a chain whose capacitor is no line and has another Q; what is typical bears no bare end."""
    ends = [1.0 / (q or 1.0) for q in (typical.high, typical.likely, typical.low)]
    lossy = Loss(ends[0], 0.0, ends[1], ends[2], where="capacitor")
    return replace(chain, capacitor=among(lossy, chain.network), capacitor_steepness=1.0, capacitor_crest=1.0)


def _tuning(design: Design, points: Sequence[OperatingPoint]) -> TuningRecord | None:
    """Return what the capacitor tunes; None where its range is not stated or the loop is beyond what is solved."""
    ends = tuning.capacitance_ends(design.capacitor)
    if ends is None or all(point.out_of_range and not point.beyond_tuning for point in points):
        return None
    needed = tuning.needed_capacitance(design)
    found = tuning.tuning_range(needed, ends)
    fixed = design.capacitor.capacitance is None
    covers = () if fixed else tuning.bands_covered(found, needed.limit)
    return TuningRecord(
        fixed=fixed,
        lowest=_value(found.lowest, "Hz"),
        highest=_value(found.highest, "Hz"),
        limit=needed.limit,
        bands=tuple(
            BandRecord(band=each.band, region=each.region, low=each.low, high=each.high, covered=each.covered)
            for each in covers
        ),
    )


def _notes(design: Design, uses: Sequence[_Use]) -> tuple[str, ...]:
    """Return what the sizes rest on, in plain sentences."""
    if not uses:
        return ()
    altitude, temperature = site_air(design)
    taken = [
        name
        for name, value in (("altitude", design.site.altitude), ("air_temperature", design.site.air_temperature))
        if value is None
    ]
    why = f" ({' and '.join(f'site.{name}' for name in taken)} not given)" if taken else ""
    found = [
        "Volts and amps at worst take no credit for what is typical of a kind of part: a capacitor of these ratings "
        "stands them whatever its losses.",
        "Usual ratings are preferred numbers (common practice). A rating must be of peak RF at the highest frequency, "
        "its current at that frequency too.",
        f"Air gaps: plates half as thick as the gap, full-round edges, air at {altitude:.5g} m and "
        f"{temperature - 273.15:.3g} degC{why}; the gap breaks down at twice the volts at worst or more. What radio "
        "frequency, edges and dust take off is extrapolated or common practice. Two in series share evenly only where "
        "they are symmetric and the rotor floats.",
        "The losses of each kind of capacitor are what is typical of it (common practice).",
        "Heat is key-down, with the capacitor's own losses high and all others low.",
    ]
    thin = altitude_derating(design)
    if thin is not None:
        found.append(
            f"At {altitude:.5g} m a voltage rating counts {thin.factor:.2f} of what it says (common practice): the "
            "rating told is as it must stand on the part."
        )
    if design.capacitor.padding:
        found.append(
            "Padding: sizes are those of the main capacitor with the padding joined as the design says; the tuning "
            "range and its bands are without any, and the volts beside each kind are those across all parts together."
        )
    return tuple(found)
