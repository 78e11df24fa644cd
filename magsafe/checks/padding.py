"""Does each padding part stand its own volts, amps and heat? Its kind is unknown, so it may be solid."""

from collections.abc import Iterator
from math import sqrt

from magsafe import words
from magsafe.analysis.capacitor_network import network
from magsafe.analysis.capacitor_parts import CHANGE, PaddingUse, padding_parts
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.rated_current import beyond_rated_air, rated_current
from magsafe.analysis.rated_voltage import altitude_derating
from magsafe.checks.capacitor_heat import heat_of_part
from magsafe.checks.judge import Check, judge, unproven
from magsafe.checks.reactive_power import against_reactive_power
from magsafe.checks.sheet import Finding
from magsafe.design.model import Design, Padding

_PADDING, _HEAT = "capacitor.padding.", ".heat"  # how the ids of findings begin, and how those about heat end
_AS_STATED = "the padding's rating as stated"
_LOOK_VOLTS = (
    "look in the part's data sheet for its volts at radio frequency, and state rated_voltage and rated_voltage_kind; "
    "the volts printed on a body are often a direct or a test voltage"
)
_LOOK_AMPS = "look in the part's data sheet for its amps at this frequency, and state rated_current"


def padding(design: Design, point: OperatingPoint) -> Iterator[Finding]:
    """Yield what becomes of the volts, amps and heat of each part that is joined in a transmission."""
    names = padding_names(design)
    if point.chain is None:
        for part in network(design, point.transmission.frequency).padding:
            name = names[id(part)]
            rated = part.rated_reactive_power is not None
            reactive = (_reactive(name, part),) if rated else ()
            for check in (_volts(name, part), _amps(name, part), *reactive, _warmth(name, part)):
                yield unproven(check, "; ".join(point.out_of_range))
        return
    for found, loss in zip(padding_parts(point), point.chain.padding, strict=True):
        part, use, name = found.part, found.use, names[id(found.part)]
        current = _current(design, point, found, _amps(name, part))
        powers = []
        if part.rated_reactive_power is not None:
            check = _reactive(name, part)
            powers = [against_reactive_power(check, design, point, use, part.rated_reactive_power)]
        yield _voltage(design, point, found, _volts(name, part))
        yield current
        yield from powers
        yield heat_of_part(_warmth(name, part), design, point, (part, use, (loss,)), (current, *powers))


def padding_names(design: Design) -> dict[int, str]:
    """Return what each padding part is called in the id of its findings, by its identity: `330-pf`.

    Parts that would be called the same are numbered from the second on.
    """
    found: dict[int, str] = {}
    for part in design.capacitor.padding:
        name = words.slug(f"{part.capacitance * 1e12:.6g} pF")
        same = sum(1 for known in found.values() if known == name or known.startswith(f"{name}-no-"))
        found[id(part)] = f"{name}-no-{same + 1}" if same else name
    return found


def is_padding_heat(finding: str) -> bool:
    """Return whether the id of a finding is that of the heat in a padding part."""
    return finding.startswith(_PADDING) and finding.endswith(_HEAT)


def _called(part: Padding) -> str:
    return f"{part.capacitance * 1e12:.6g} pF in {'series' if part.connection == 'series' else 'parallel'}"


def _volts(name: str, part: Padding) -> Check:
    return Check(
        f"{_PADDING}{name}.voltage",
        f"Does the padding of {_called(part)} stand its own crest of the RF?",
        "fit a part with a higher peak RF rating, or several in series",
        _AS_STATED,
        "V",
        qualifier="peak",
    )


def _amps(name: str, part: Padding) -> Check:
    return Check(
        f"{_PADDING}{name}.current",
        f"Does the padding of {_called(part)} carry its own current?",
        "fit a part with a higher RF current rating, or several in parallel",
        _AS_STATED,
        "A",
        qualifier="RMS",
    )


def _reactive(name: str, part: Padding) -> Check:
    return Check(
        f"{_PADDING}{name}.reactive_power",
        f"Does the padding of {_called(part)} stand its own reactive power, RMS volts times RMS amps?",
        "fit a part with a higher reactive-power rating, or several in parallel",
        _AS_STATED,
        "W",
        shown="kVA",
    )


def _warmth(name: str, part: Padding) -> Check:
    return Check(
        f"{_PADDING}{name}{_HEAT}",
        f"Does the padding of {_called(part)} stand its own heat?",
        "fit a part with a higher Q or one that may be hotter, or several in parallel",
        "the padding's dissipation rating as stated; the losses as listed",
        "W",
    )


def _voltage(design: Design, point: OperatingPoint, found: PaddingUse, check: Check) -> Finding:
    part, use = found.part, found.use
    if missing := use.missing or _not_rated(part, use.bare_voltage or use.voltage.high):
        return unproven(check, missing, use.voltage, CHANGE if use.missing else _LOOK_VOLTS)
    limit = (part.rated_voltage or 0.0) * (sqrt(2.0) if part.rated_voltage_kind == "RMS RF" else 1.0)
    thinner = altitude_derating(design)
    lowered = "" if thinner is None else f"{thinner.factor:.3g} of it is taken in {thinner.name} ({thinner.evidence})"
    return judge(
        check,
        use.voltage,
        limit if thinner is None else limit * thinner.factor,
        design.margins.voltage,
        bare_end=use.bare_voltage,
        power=point.power,
        thin="; ".join(filter(None, (lowered, use.thin_voltage))),
        provenance="stated in the design",
    )


def _not_rated(part: Padding, crest: float | None) -> str:
    if part.rated_voltage is None:
        return "rated_voltage of the padding is not given"
    kind = part.rated_voltage_kind
    if kind is None:
        as_peak = ""
        if crest:
            as_peak = f"; as peak RF it would be {part.rated_voltage / crest:.3g} times the volts at worst"
        return f"rated_voltage_kind of the padding is not given: the rating may be of peak RF, RMS RF or DC{as_peak}"
    if kind.startswith("DC"):
        return f"the rating is a {kind} voltage; of padding of unknown kind that tells nothing at radio frequency"
    return ""


def _current(design: Design, point: OperatingPoint, found: PaddingUse, check: Check) -> Finding:
    part, use = found.part, found.use
    heat = found.heat.high
    warm = "" if heat is None else f"; it turns at most {words.amount(heat, 'W')} into heat, key-down"
    if part.rated_current is None or use.missing:
        missing = use.missing or "rated_current of the padding is not given"
        return unproven(check, f"{missing}{warm}", use.current, CHANGE if use.missing else _LOOK_AMPS)
    limit, lowered = rated_current(part, point.transmission.frequency)
    above = ", lowered above its frequency by common practice" if lowered else ""
    made = judge(
        check,
        use.current,
        limit,
        design.margins.current,
        bare_end=use.bare_current,
        power=point.power,
        thin="; ".join(filter(None, (lowered, beyond_rated_air(design), use.thin_current))),
        provenance=f"stated in the design{above}",
    )
    return made.model_copy(update={"because": f"{made.because}{warm}"})
