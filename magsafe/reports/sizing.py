"""What a capacitor must be, on a terminal: needs first, then each transmission, power, kinds, tuning, and the part."""

from collections.abc import Iterator, Sequence
from math import ceil, floor

from rich.console import Console, Group, RenderableType
from rich.text import Text

from magsafe import words
from magsafe.checks.sheet import ORDER, Finding, Value
from magsafe.checks.sizing_sheet import BandRecord, CapacitorSheet, RatingNeeded, SizedTransmission, TuningRecord
from magsafe.reports.terminal import Speaker, console_on_output, is_plain, put
from magsafe.spread import Spread

_REGIONS = (1, 2, 3)
_COVERED = {
    "wholly": "Wholly, for certain",
    "partly": "In part, for certain",
    "perhaps": "Perhaps, not for certain",
}


def show_sizing(sheet: CapacitorSheet, console: Console | None = None) -> None:
    """Print what the capacitor must be."""
    console = console or console_on_output()
    say = Speaker(console.width, is_plain(console))
    put(console, Group(*_render(sheet, say)))


def _render(sheet: CapacitorSheet, say: Speaker) -> Iterator[RenderableType]:
    if sheet.why is not None:
        yield say.paragraph(f"{sheet.design.name}: {sheet.why}. magsafe check tells what its terminals carry.")
        return
    yield say.item(sheet.verdict, headline(sheet), bold=True)
    yield say.paragraph(_ceiling(sheet), indent=13)
    yield Text("")
    powers = "at the powers of the design" if sheet.power is None else f"at {words.watts(sheet.power)} PEP throughout"
    yield say.paragraph(f"{sheet.design.name}, {powers}, {sheet.date}, magsafe {sheet.magsafe}", "dim")
    yield from _needed(sheet, say)
    yield from _transmissions(sheet, say)
    yield from _powers(sheet, say)
    yield from _kinds(sheet, say)
    yield from _tuning(sheet, say)
    yield from _fitted(sheet, say)
    if sheet.notes:
        yield from say.list_of("What the sizes rest on", sheet.notes)
    yield from say.list_of("Cautions", sheet.cautions)


def headline(sheet: CapacitorSheet) -> str:
    """Return what the verdict on the capacitor means for the hand on the key."""
    at = "as planned" if sheet.power is None else f"at {words.watts(sheet.power)}"
    return {
        "stop": f"Do not key this loop {at} with the capacitor that the design has.",
        "unproven": f"Do not key this loop {at} before what is unproven of its capacitor is known.",
        "narrow": f"The capacitor is within the limits computed here {at}, but not with all that was asked.",
        "clear": f"The capacitor is within the limits computed here {at}, with the margins asked for.",
    }[sheet.verdict]


def _ceiling(sheet: CapacitorSheet) -> str:
    made = sheet.power_ceiling
    if made is None or made.value is None or made.at_limit is None:
        return "No highest power can be named for the capacitor: nothing that depends on power could be counted."
    several = ""
    if len(sheet.transmissions) > 1:
        several = f" in {words.short(sheet.transmissions[made.transmission].name)}"
    if made.value == 0.0:
        return f"No power is clear for the capacitor: {made.held_by}{several} stops it at any power."
    if made.held_by in made.left_out:
        return (
            f"No power is proven for the capacitor. More than {words.power(made.value)} is too much in any case, by "
            f"{made.held_by}{several}."
        )
    most = "" if made.complete else "at most "
    left_out = "" if made.complete else f" Not counted, because unproven: {', '.join(made.left_out)}."
    return (
        f"For the capacitor clear up to {most}{words.power(made.value)}; first limit reached at "
        f"{words.power(made.at_limit)}. {made.held_by} holds it there{several}.{left_out} "
        "magsafe check counts all else."
    )


def _needed(sheet: CapacitorSheet, say: Speaker) -> Iterator[RenderableType]:
    yield from say.heading("What the capacitor must be")
    if sheet.peak_voltage is None or sheet.rms_current is None:
        reasons = dict.fromkeys(each.why for each in sheet.transmissions if each.why)
        yield say.paragraph(f"Not computed: {'; '.join(reasons)}.")
        return
    left_out = [each for each in sheet.transmissions if each.why]
    for each in left_out:
        yield say.paragraph(f"Not counted: {words.short(each.name)}. {_sentence(each.why or '')}")
    if sheet.capacitance is not None:
        least, most = sheet.capacitance.least, sheet.capacitance.most
        low = "an amount that is not known" if least is None else f"{_outward(least, down=True)} pF or less"
        high = "an amount that is not known" if most is None else f"{_outward(most, down=False)} pF or more"
        stray = (
            f", with {words.amount(sheet.capacitance.stray, 'F')} of stray beside it" if sheet.capacitance.stray else ""
        )
        why = f" ({sheet.capacitance.why})" if sheet.capacitance.why else ""
        yield say.paragraph(f"Capacitance: from {low} to {high}{stray}{why}.")
    yield say.paragraph(f"Volts: {_rating(sheet, sheet.peak_voltage, 'peak')}")
    yield say.paragraph(f"Amps: {_rating(sheet, sheet.rms_current, 'RMS')}")
    if sheet.gap is not None:
        single, of_two = _gap(sheet.gap.single), _gap(sheet.gap.each_of_two)
        why = f" ({sheet.gap.why})" if sheet.gap.why else ""
        yield say.paragraph(f"Air gap: {single} mm, or two gaps in series of {of_two} mm each{why}.")
    if sheet.dissipation is not None:
        yield say.paragraph(f"Heat: {words.amount(sheet.dissipation, 'W')} in it at worst, key-down.")


def _outward(farads: float, *, down: bool) -> str:
    """Return an end of a range in pF with three digits, rounded so that the range told is never too small."""
    picofarads = words.number(farads, "F", "pF")
    step = 10.0 ** -len(picofarads.partition(".")[2]) if float(picofarads) < 1000.0 else 10.0
    whole = farads * 1e12 / step * (1.0 + 1e-9 if down else 1.0 - 1e-9)
    return f"{(floor(whole) if down else ceil(whole)) * step:.{len(picofarads.partition('.')[2])}f}"


def _sentence(text: str) -> str:
    return f"{text[:1].upper()}{text[1:]}."


def _rating(sheet: CapacitorSheet, needed: RatingNeeded, qualifier: str) -> str:
    where = sheet.transmissions[needed.transmission]
    at = f" in {words.short(where.name)}" if len(sheet.transmissions) > 1 else ""
    return (
        f"{words.amount(needed.at_worst, needed.unit)} {qualifier} at worst{at}; rated "
        f"{words.amount(needed.needed, needed.unit)} {qualifier} or more, which is {needed.margin_asked:.3g} times "
        f"that. Usual rating: {_plain(needed.usual, needed.unit)} {qualifier}."
    )


def _plain(value: float, unit: str) -> str:
    """Return a usual rating without digits that say nothing: `15 kV`, `7.5 kV`, `75 A`."""
    return f"{value / 1e3:g} kV" if unit == "V" else f"{value:g} A"


def _gap(value: float | None) -> str:
    """Return a gap in millimetres, rounded up to a tenth."""
    return "?" if value is None else f"{ceil(value * 1e4 * (1.0 - 1e-9)) / 10.0:.1f}"


def _spread(value: Value | None, unit: str) -> str:
    """Return likely value and ends in one cell."""
    if value is None:
        return "?"
    spread = Spread(value.low, value.likely, value.high)
    likely = "?" if spread.likely is None else words.number(spread.likely, value.unit, unit)
    return f"{likely} {words.ends(spread, value.unit, unit)}".rstrip()


def _transmissions(sheet: CapacitorSheet, say: Speaker) -> Iterator[RenderableType]:
    computed = [each for each in sheet.transmissions if each.why is None]
    if not computed:
        return
    yield from say.heading("Each transmission: likely, from least to most")
    for each in computed:
        parts = dict.fromkeys((words.short(each.name), words.frequency(each.frequency)))
        yield say.paragraph(f"{', '.join(parts)}, {words.watts(each.power)} PEP")
        yield say.paragraph(_one(each), indent=2)


def _one(each: SizedTransmission) -> str:
    rate = each.hertz_per_farad
    # Hz/F and kHz/pF differ by a factor that no unit of the file knows.
    in_khz = None if rate is None else Value(**{**rate.model_dump(), **_scaled(rate, 1e-15), "unit": "1"})
    return (
        f"{_spread(each.capacitance, 'pF')} pF, {_spread(each.peak_voltage, 'kV')} kV peak, "
        f"{_spread(each.rms_current, 'A')} A RMS, heat {_spread(each.dissipation, 'W')} W, "
        f"tuned by {_spread(in_khz, '')} kHz per pF"
    )


def _scaled(value: Value, factor: float) -> dict[str, float | None]:
    known = {"low": value.low, "likely": value.likely, "high": value.high}
    return {name: None if each is None else each * factor for name, each in known.items()}


def _powers(sheet: CapacitorSheet, say: Speaker) -> Iterator[RenderableType]:
    if not sheet.powers:
        return
    yield from say.heading("With power")
    head = ("W PEP", "kV peak", "rated kV", "A RMS", "rated A", "one gap", "each of 2", "heat W")
    rows = [
        (
            f"{each.power:g}",
            words.number(each.peak_voltage, "V", "kV"),
            f"{each.voltage_usual / 1e3:g}",
            words.number(each.rms_current, "A", "A"),
            f"{each.current_usual:g}",
            _gap(each.gap),
            _gap(each.gap_each_of_two),
            "?" if each.dissipation is None else words.number(each.dissipation, "W", "W"),
        )
        for each in sheet.powers
    ]
    yield say.grid(head, rows, first=6)
    worst = "The worst of all transmissions" if len(sheet.transmissions) > 1 else "At worst"
    yield say.paragraph(f"{worst}, each at that power. Usual ratings keep the margins; gaps are in mm.")


def _kinds(sheet: CapacitorSheet, say: Speaker) -> Iterator[RenderableType]:
    if not sheet.kinds:
        return
    yield from say.heading("The same loop with each kind of capacitor")
    shown = _lowest_and_highest(sheet)
    at = [words.frequency(sheet.transmissions[i].frequency).removesuffix(" MHz") for i in shown]
    head = ["typical losses", "Q"]
    for frequency in at:
        head += [f"% at {frequency}", "kV peak"]
    rows = []
    for each in sheet.kinds:
        q = each.quality_factor
        cells = ["as designed" if q is None else f"{q.low:g}-{q.high:g}"]
        points = {point.transmission: point for point in each.points}
        for i in shown:
            efficiency, volts = points[i].efficiency.likely, points[i].peak_voltage.high
            cells.append("?" if efficiency is None else words.number(efficiency, "1", "%"))
            cells.append("?" if volts is None else words.number(volts, "V", "kV"))
        rows.append((f"this one ({each.kind})" if each.own else each.kind, *cells))
    yield say.grid(head, rows, first=26)
    yield say.paragraph(
        "% is the likely efficiency at that many MHz without ground, kV peak the volts at worst with the least loss of "
        "the kind: what less loss buys, and costs. The rating above counts no such loss."
    )


def _lowest_and_highest(sheet: CapacitorSheet) -> tuple[int, ...]:
    """Return the computed transmissions of the lowest and the highest frequency."""
    known = sorted(
        (sheet.transmissions[each.transmission].frequency, each.transmission) for each in sheet.kinds[0].points
    )
    return tuple(dict.fromkeys((known[0][1], known[-1][1])))


def _tuning(sheet: CapacitorSheet, say: Speaker) -> Iterator[RenderableType]:
    made = sheet.tuning
    tuned = [each for each in sheet.transmissions if each.swr15_width is not None]
    if made is None and not tuned:
        return
    yield from say.heading("Tuning")
    if made is not None:
        yield say.paragraph(_range(made))
        for covered, said in _COVERED.items():
            named = _bands([each for each in made.bands if each.covered == covered])
            if named:
                yield say.paragraph(f"{said}: {'; '.join(named)}.")
    for each in tuned:
        yield say.paragraph(_step(each))


def _range(made: TuningRecord) -> str:
    first, last, may_first, may_last = made.lowest.high, made.highest.low, made.lowest.low, made.highest.high
    below = "below what is solved" if may_first is None else words.amount(may_first, "Hz", "MHz")
    above = "beyond what is known" if may_last is None else words.amount(may_last, "Hz", "MHz")
    if made.fixed:
        return f"This fixed capacitor resonates at one frequency, somewhere from {below} to {above}."
    certain = "Nothing is tuned for certain."
    if first is not None and last is not None and first <= last:
        certain = f"From {words.number(first, 'Hz', 'MHz')} to {words.amount(last, 'Hz', 'MHz')} for certain."
    return f"{certain} At the most from {below} to {above}."


def _bands(covers: Sequence[BandRecord]) -> list[str]:
    """Return the bands with their frequencies, those that are alike in several ITU regions together."""
    found: dict[tuple[str, float, float], list[int]] = {}
    for each in covers:
        found.setdefault((each.band, each.low, each.high), []).append(each.region)
    return [
        f"{low / 1e6:.6g} to {high / 1e6:.6g} MHz ({band}{_where(regions)})"
        for (band, low, high), regions in found.items()
    ]


def _where(regions: Sequence[int]) -> str:
    if tuple(regions) == _REGIONS:
        return ""
    names = " and ".join(str(each) for each in regions)
    return f", Region{'s' if len(regions) > 1 else ''} {names}"


def _step(each: SizedTransmission) -> str:
    width, rate = each.swr15_width or 0.0, each.hertz_per_farad
    text = f"{words.short(each.name)}: {words.amount(width, 'Hz')} wide between the points of SWR 1.5 at its narrowest."
    if rate is not None and rate.high:
        text += f" Half of it is {words.amount(0.5 * width / rate.high, 'F')}"
        if each.steps_needed is not None:
            text += f", one of {_up(each.steps_needed)} equal steps over the capacitor's range"
        text += "."
    return text if each.step is None else f"{text} One step of this drive is {words.amount(each.step, 'Hz')}."


def _up(count: int) -> str:
    """Return a count rounded up to three digits."""
    unit = 10 ** max(0, len(str(count)) - 3)
    return str(-(-count // unit) * unit)


def _fitted(sheet: CapacitorSheet, say: Speaker) -> Iterator[RenderableType]:
    """Yield the findings about the capacitor that the design has, the worst first."""
    groups: dict[tuple[str, str], tuple[Finding, list[str]]] = {}
    for finding in sheet.shared_findings:
        groups[finding.id, finding.because] = (finding, [])
    for each, findings in zip(sheet.transmissions, sheet.findings, strict=True):
        for finding in findings:
            groups.setdefault((finding.id, finding.because), (finding, []))[1].append(words.short(each.name))
    if not groups:
        return
    yield from say.heading("The capacitor that the design has")
    for finding, names in sorted(groups.values(), key=lambda told: ORDER.index(told[0].verdict)):
        where = f" ({', '.join(names)})" if names and len(names) < len(sheet.transmissions) else ""
        do = "" if finding.verdict == "clear" else f" Do: {finding.do}."
        yield say.item(finding.verdict, f"{finding.id}{where}: {finding.because}.{do}")
