"""Does each padding part stand its own volts, amps and heat? Its kind is unknown, so it may be solid."""

from collections.abc import Iterator

from magsafe import words
from magsafe.analysis.capacitor_heat import heat_of
from magsafe.analysis.capacitor_network import network
from magsafe.analysis.capacitor_parts import padding_parts
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.checks.capacitor_heat import heat_of_part
from magsafe.checks.judge import Check, unproven
from magsafe.checks.rated_part import current_of_part, voltage_of_part
from magsafe.checks.reactive_power import against_reactive_power
from magsafe.checks.sheet import Finding
from magsafe.design.model import Design, Padding

_PADDING, _HEAT = "capacitor.padding.", ".heat"  # how the ids of findings begin, and how those about heat end
_AS_STATED = "the padding's rating as stated"
_CALLED = "the padding"


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
        current = current_of_part(_amps(name, part), design, point, (part, use, found.heat), _CALLED)
        powers = []
        if part.rated_reactive_power is not None:
            check = _reactive(name, part)
            powers = [against_reactive_power(check, design, point, use, part.rated_reactive_power)]
        yield voltage_of_part(_volts(name, part), design, point, (part, use), _CALLED)
        yield current
        yield from powers
        heats = heat_of(point.chain, (loss,)), heat_of(point.chain, (loss,), "bare").high or 0.0
        yield heat_of_part(_warmth(name, part), design, point, (part, use, heats), (current, *powers))


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
