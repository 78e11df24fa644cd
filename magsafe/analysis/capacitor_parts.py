"""The volts, amps and watts of each part of the tuning capacitor, at its own dangerous ends."""

from dataclasses import dataclass

from magsafe.analysis.capacitor_network import tolerance_of
from magsafe.analysis.chain import VOLTAGE_ERROR, Chain, Question
from magsafe.analysis.losses import Corner
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.design.model import Padding
from magsafe.spread import Spread

CHANGE = "change or leave out the padding"  # what to do where a use is `missing`

# The volts and amps are most with the least losses; a share is then taken at its own upper end.
_SIGNS = {"high": -1.0, "likely": 0.0, "low": 1.0, "bare": 1.0}


@dataclass(frozen=True, slots=True)
class PartUse:
    """What one part of the capacitor sees in one transmission.

    `voltage` is its crest [V], `current` its RMS current [A]; the two `bare_` values are their high ends without credit
    for typical losses. `thin_voltage` and `thin_current` tell why the evidence for each is thin, empty where it is not;
    `missing` tells why nothing is known.
    """

    voltage: Spread
    bare_voltage: float | None
    current: Spread
    bare_current: float | None
    thin_voltage: str = ""
    thin_current: str = ""
    missing: str = ""


@dataclass(frozen=True, slots=True)
class PaddingUse:
    """A padding part with what it sees, and what it turns into heat, key-down [W]."""

    part: Padding
    use: PartUse
    heat: Spread


def main_part(point: OperatingPoint) -> PartUse:
    """Return what the main part of the capacitor sees: without padding, all that the port has.

    Of a line its voltage is that where it is highest.
    """
    volts, amps = point.figures.capacitor_peak_voltage.spread, point.figures.capacitor_rms_current.spread
    made = point.chain
    if made is None:
        return PartUse(volts, point.bare_voltage, amps, point.bare_current)
    if not made.network.padding:
        return PartUse(*_along(made, volts, point.bare_voltage), amps, point.bare_current)
    net = made.network
    current, bare_current = amps, point.bare_current
    if net.parallel and made.around.height_known:
        current, bare_current = _asked(made, _main_current(made), VOLTAGE_ERROR)
    elif net.parallel:
        # How much capacitance is left for it is open at one end: it may carry all.
        likely = _main_current(made)("likely", made.likely, made.power.likely or 0.0)
        current = Spread(None, likely, amps.high)
    return PartUse(
        *_along(made, *_section(made, point)),
        current,
        bare_current,
        _unstated(net.series),
        _unstated(net.padding if net.parallel else ()),
        _impossible(made),
    )


def padding_parts(point: OperatingPoint) -> tuple[PaddingUse, ...]:
    """Return what each padding part sees that is joined in a transmission; none where nothing is computed."""
    made = point.chain
    if made is None or not made.network.padding:
        return ()
    net, missing = made.network, _impossible(made)
    amps = point.figures.capacitor_rms_current.spread
    section = _section(made, point)
    found = []
    for part, loss in zip(net.padding, made.padding, strict=True):
        if part in net.series:
            voltage = _asked(made, _series_voltage(made, part), VOLTAGE_ERROR)
            use = PartUse(*voltage, amps, point.bare_current, _unstated((part,)), "", missing)
        else:
            current = _asked(made, _parallel_current(made, part), VOLTAGE_ERROR)
            use = PartUse(*section, *current, _unstated(net.series), _unstated((part, *net.series)), missing)
        found.append(PaddingUse(part, use, made.heat_spread(loss)))
    return tuple(found)


def _along(made: Chain, voltage: Spread, bare: float | None) -> tuple[Spread, float | None]:
    """Return the crest where it is highest along the main part [V], and its bare end, from those at its terminals."""
    crest = made.capacitor_crest
    likely, high = (None if end is None else end * crest for end in (voltage.likely, voltage.high))
    return Spread(voltage.low, likely, high), None if bare is None else bare * crest


def _section(made: Chain, point: OperatingPoint) -> tuple[Spread, float | None]:
    """Return the crest across the main part and what is across it [V], and its bare end."""
    if not made.network.series:
        return point.figures.capacitor_peak_voltage.spread, point.bare_voltage
    return _asked(made, _section_voltage(made), made.voltage_error)


def main_capacitance(point: OperatingPoint) -> tuple[Spread, Spread]:
    """Return what the main part must have [F]: with the padding as stated, and with its tolerance.

    A value that no capacitance gives is unknown here; a negative one is told as it is.
    """
    whole = point.figures.tuning_capacitance.spread
    made = point.chain
    if made is None or not made.network.padding:
        return whole, whole

    def left(value: float | None, sign: float) -> float | None:
        return None if value is None else made.network.main_capacitance(value, sign)

    likely = left(whole.likely, 0.0)
    return (
        Spread(left(whole.low, 0.0), likely, left(whole.high, 0.0)),
        Spread(left(whole.low, -1.0), likely, left(whole.high, 1.0)),
    )


def _impossible(made: Chain) -> str:
    net, whole = made.network, 1.0 / (made.network.omega * made.likely.reactance)
    left = net.main_capacitance(whole, 0.0)
    if left is None:
        return "the series padding alone is less than the loop needs: no capacitor beside it tunes this frequency"
    if left <= 0.0:
        return "the padding alone is more than the loop needs: nothing is left for the capacitor beside it"
    return ""


def _unstated(parts: tuple[Padding, ...]) -> str:
    if all(part.tolerance is not None for part in parts):
        return ""
    percent = 100.0 * max(tolerance_of(part) for part in parts if part.tolerance is None)
    return f"the tolerance of the padding is not given: {percent:.3g} % is taken (common practice)"


def _asked(chain: Chain, ask: Question, error: float) -> tuple[Spread, float]:
    return chain.spread(ask).widened(error, error), chain.dangerous(ask, "bare") * (1.0 + error)


def _moved(chain: Chain, corner: Corner, sign: float) -> float:
    return corner.reactance * (1.0 + sign * chain.reactance_error)


def _section_voltage(chain: Chain) -> Question:
    net = chain.network

    def ask(end: str, corner: Corner, power: float) -> float:
        sign = _SIGNS[end]
        reactance = _moved(chain, corner, sign)
        return chain.voltage(end, corner, power) * net.section_reactance(reactance, sign) / reactance

    return ask


def _series_voltage(chain: Chain, part: Padding) -> Question:
    net = chain.network

    def ask(end: str, corner: Corner, power: float) -> float:
        across = net.own_reactance(part, _SIGNS[end])
        return chain.voltage(end, corner, power) * across / corner.reactance

    return ask


def _parallel_current(chain: Chain, part: Padding) -> Question:
    net = chain.network

    def ask(end: str, corner: Corner, power: float) -> float:
        sign = _SIGNS[end]
        section = net.section_reactance(_moved(chain, corner, sign), sign)
        share = min(1.0, section / net.own_reactance(part, -sign))
        return chain.current(end, corner, power) * share

    return ask


def _main_current(chain: Chain) -> Question:
    net = chain.network

    def ask(end: str, corner: Corner, power: float) -> float:
        sign = _SIGNS[end]
        return chain.current(end, corner, power) * net.main_share(_moved(chain, corner, -sign), sign)

    return ask
