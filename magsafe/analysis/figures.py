"""Figures: each a spread with its unit, its method and its source."""

from dataclasses import dataclass, fields
from math import pi

from scipy.constants import c

from magsafe.analysis.chain import REACTANCE_ERROR, Chain
from magsafe.design.model import Design
from magsafe.design.shape import Outline
from magsafe.physics import small_loop, tuned_circuit
from magsafe.spread import UNKNOWN, Spread


@dataclass(frozen=True, slots=True)
class Figure:
    """A figure: its spread in one SI unit, how it was found, and why a value is missing where one is."""

    spread: Spread
    unit: str
    method: str
    source: str
    why: str = ""


@dataclass(frozen=True, slots=True)
class Figures:
    """The figures of one operating point, in the order in which they are told."""

    perimeter_in_wavelengths: Figure
    thickness_parameter: Figure
    radiation_resistance: Figure
    conductor_resistance: Figure
    joint_resistance: Figure
    capacitor_resistance: Figure
    ground_resistance: Figure
    total_resistance: Figure
    port_reactance: Figure
    inductance: Figure
    tuning_capacitance: Figure
    conductor_efficiency: Figure
    overall_efficiency: Figure
    unloaded_q: Figure
    loaded_q: Figure
    half_power_bandwidth: Figure
    swr2_bandwidth: Figure
    capacitor_peak_voltage: Figure
    capacitor_rms_current: Figure
    largest_current: Figure
    capacitor_dissipation: Figure
    conductor_temperature_rise: Figure
    coupling_loop_diameter: Figure


_LOOP_SOURCE = f"Foster 1944, Balanis (memory); taper held against Storer 1956 (memory); ends from a {small_loop.STUDY}"
_YAGHJIAN = "Yaghjian & Best 2005 (memory)"
_SOIL = "the loss in the soil is not computed by this version"
_NO_SOIL = f"{_SOIL}: it lowers this, so only the other end is known"
_SOIL_ADDS = f"{_SOIL}: it adds to this"
_NO_HEIGHT = "loop.centre_height is not given: how much of the inductance the ground's image takes away is open"
_SOIL_WIDENS = f"{_SOIL}: it widens this"


def figures_of(chain: Chain, design: Design) -> Figures:
    """Return all figures of a loop that the closed forms reach."""
    lowers = _NO_SOIL if chain.around.ratio.high is None else ""
    say = "; the likely value leaves the ground out" if chain.around.likely_is_free_space else ""
    quality = chain.spread(chain.quality).widened(*chain.quality_error())
    swr2 = float(tuned_circuit.swr_bandwidth_factor(2.0))
    return Figures(
        perimeter_in_wavelengths=_size(chain.line, chain.frequency),
        thickness_parameter=_thickness(chain),
        radiation_resistance=_radiation(chain),
        conductor_resistance=_conductor(chain),
        joint_resistance=_joints(chain),
        capacitor_resistance=_capacitor(chain),
        ground_resistance=_ground(chain),
        total_resistance=_total(chain, say),
        port_reactance=_reactance(chain),
        inductance=_inductance(chain, design),
        tuning_capacitance=_capacitance(chain),
        conductor_efficiency=_efficiency(chain),
        overall_efficiency=_not_yet("1", "the power that leaves over real ground"),
        unloaded_q=Figure(quality, "1", f"slope of the reactance of loop and capacitor{say}", _YAGHJIAN, lowers),
        loaded_q=Figure(quality.scaled(0.5), "1", f"half of the unloaded Q{say}", _YAGHJIAN, lowers),
        half_power_bandwidth=_bandwidth(chain, quality, 2.0, f"frequency over loaded Q{say}"),
        swr2_bandwidth=_bandwidth(chain, quality, swr2, f"between the points of SWR 2, matched at resonance{say}"),
        capacitor_peak_voltage=Figure(
            chain.spread(chain.voltage).widened(*chain.voltage_error()),
            "V",
            "crest of the RF at the crest of the envelope; its high end with the least resistance of free space, "
            f"perfect image and any soil{say}",
            _LOOP_SOURCE,
            lowers,
        ),
        capacitor_rms_current=Figure(
            chain.spread(chain.current).widened(*chain.current_error()),
            "A",
            f"RMS over an RF cycle at the port{say}",
            _LOOP_SOURCE,
            lowers,
        ),
        largest_current=Figure(
            chain.spread(chain.largest_current).widened(*chain.largest_current_error()),
            "A",
            f"RMS opposite the capacitor, where it is largest{say}",
            _LOOP_SOURCE,
            lowers,
        ),
        capacitor_dissipation=_dissipation(chain, lowers, say),
        conductor_temperature_rise=_not_yet("K", "the heating of the conductor"),
        coupling_loop_diameter=_not_yet("m", "the coupling loop"),
    )


def _not_yet(unit: str, what: str) -> Figure:
    return Figure(UNKNOWN, unit, "none", "none", f"{what} is not computed by this version")


def _size(line: Outline, frequency: float) -> Figure:
    return Figure(
        Spread.exact(line.perimeter * frequency / c),
        "1",
        "length of one turn's centre line over the free-space wavelength",
        "definition",
    )


def _thickness(chain: Chain) -> Figure:
    value = float(small_loop.thickness_parameter(chain.line.perimeter, chain.conductor_radius))
    return Figure(Spread.exact(value), "1", "2 ln(perimeter / conductor radius)", "Storer 1956 (memory)")


def _along(chain: Chain, low: float, likely: float, high: float) -> Spread:
    """Return the spread of a resistance along the loop over the excesses of the reactance."""
    least, most = min(chain.excesses), max(chain.excesses)
    found = Spread(low * (1.0 + least) ** 2, likely, high * (1.0 + most) ** 2)
    return found.widened(*chain.resistance_error())


def _radiation(chain: Chain) -> Figure:
    found = _along(chain, chain.radiation, chain.radiation, chain.radiation)
    method = "one-port loop with its current tapered as a cosine, in free space"
    return Figure(found, "ohm", method, _LOOP_SOURCE)


def _conductor(chain: Chain) -> Figure:
    part = chain.conductor
    return Figure(
        _along(chain, part.low, part.likely, part.high),
        "ohm",
        "exact internal impedance of the round conductor, mean square of the tapered current; its high end has "
        "10 % for roughness and oxide (common practice)",
        "Schelkunoff 1934 (memory); material as listed",
    )


def _joints(chain: Chain) -> Figure:
    found = Spread(
        sum(min(joint.at("low", bend) for bend in chain.bends) for joint in chain.joints),
        sum(joint.likely for joint in chain.joints),
        sum(max(joint.at("high", bend) for bend in chain.bends) for joint in chain.joints),
    )
    method = "as stated or typical of the kind, weighted by the square of the current where each joint sits"
    return Figure(found, "ohm", method, "the design; common practice")


def _capacitor(chain: Chain) -> Figure:
    part = chain.capacitor
    found = Spread(
        min(part.at("low", bend) for bend in chain.bends),
        part.at("likely", chain.likely_bend),
        max(part.at("high", bend) for bend in chain.bends),
    )
    method = "as stated, or reactance over Q; typical of the kind where not stated"
    return Figure(found, "ohm", method, "the design; common practice")


def _ground(chain: Chain) -> Figure:
    ratio = chain.around.perfect
    if ratio is None:
        return _not_yet("ohm", "the loss in real ground")
    value = (ratio - 1.0) * chain.radiation
    least, most = min(chain.excesses), max(chain.excesses)
    ends = sorted((value * (1.0 + least) ** 2, value * (1.0 + most) ** 2))
    found = Spread(ends[0], value, ends[1]).widened(*chain.resistance_error())
    source = "Wait, Electromagnetic Waves in Stratified Media (memory)"
    return Figure(found, "ohm", "image of a point dipole in a perfect plane; 0 in free space", source)


def _total(chain: Chain, say: str) -> Figure:
    ratio, highest = chain.around.ratio, None
    if ratio.high is not None:
        highest = max(chain.resistance("high", ratio.high, bend) for bend in chain.bends)
    found = Spread(
        min(chain.resistance("low", ratio.low or 0.0, bend) for bend in chain.bends),
        chain.resistance("likely", ratio.likely or 0.0, chain.likely_bend),
        highest,
    ).widened(*chain.resistance_error())
    method = f"sum of all, its low end with the least of free space, perfect image and any soil{say}"
    return Figure(found, "ohm", method, _LOOP_SOURCE, _SOIL_ADDS if highest is None else "")


def _reactance_ends(chain: Chain) -> Spread:
    """Return the port reactance [ohm]; the image may lower it, the charge's capacitance raise it."""
    factors = [bend.factor for bend in chain.bends]
    least = None if chain.around.image_share.high is None else chain.reactance * min(factors)
    error = REACTANCE_ERROR + chain.corner
    found = Spread(least, chain.reactance * chain.likely_bend.factor, chain.reactance * max(factors))
    return found.widened(error, error)


def _reactance(chain: Chain) -> Figure:
    found = _reactance_ends(chain)
    return Figure(
        found,
        "ohm",
        "omega L tan(x)/x; its high end with a capacitance across the port, its low end with the ground's image",
        _LOOP_SOURCE,
        _NO_HEIGHT if found.low is None else "",
    )


def _inductance(chain: Chain, design: Design) -> Figure:
    round_loop = design.loop.shape == "circle"
    error = REACTANCE_ERROR + chain.corner
    return Figure(
        Spread.exact(chain.inductance).widened(error, error),
        "H",
        "low frequency, in free space, internal part included",
        "Rosa & Grover, NBS Scientific Paper 169 (memory)" if round_loop else "Grover 1946, ch. 8 (memory)",
    )


def _capacitance(chain: Chain) -> Figure:
    reactance, omega = _reactance_ends(chain), 2.0 * pi * chain.frequency
    falling = (reactance.high, reactance.likely, reactance.low)
    ends = [None if end is None else 1.0 / (omega * end) for end in falling]
    why = _NO_HEIGHT if ends[2] is None else ""
    return Figure(Spread(*ends), "F", "cancels the port reactance; strays included", "resonance", why)


def _efficiency(chain: Chain) -> Figure:
    method = "radiation resistance over its sum with conductor, joints and capacitor; the ground left out"
    return Figure(chain.efficiency_spread(), "1", method, _LOOP_SOURCE)


def _bandwidth(chain: Chain, quality: Spread, factor: float, method: str) -> Figure:
    falling = (quality.high, quality.likely, quality.low)
    ends = [None if q is None else factor * chain.frequency / q for q in falling]
    why = _SOIL_WIDENS if ends[2] is None else ""
    return Figure(Spread(*ends), "Hz", method, _YAGHJIAN, why)


def _dissipation(chain: Chain, lowers: str, say: str) -> Figure:
    ratio, power = chain.around.ratio, chain.power
    low = None
    if ratio.high is not None:
        low = chain.capacitor_heat("low", "high", ratio.high, power.low or 0.0).low
    bend = chain.likely_bend
    part = chain.capacitor.at("likely", bend) / chain.resistance("likely", ratio.likely or 0.0, bend)
    likely = part * (power.likely or 0.0)
    high = chain.capacitor_heat("high", "low", ratio.low or 0.0, power.high or 0.0).high
    error = [2.0 * end for end in chain.current_error()]
    return Figure(
        Spread(low, likely, high).widened(*error),
        "W",
        f"key-down; its high end with its own loss high and every other low{say}",
        _LOOP_SOURCE,
        lowers,
    )


def unknown_figures(line: Outline, frequency: float, reasons: tuple[str, ...]) -> Figures:
    """Return figures without values, with the reasons why the closed forms do not reach this loop."""
    units = {
        "inductance": "H",
        "tuning_capacitance": "F",
        "half_power_bandwidth": "Hz",
        "swr2_bandwidth": "Hz",
        "capacitor_peak_voltage": "V",
        "capacitor_rms_current": "A",
        "largest_current": "A",
        "capacitor_dissipation": "W",
        "conductor_temperature_rise": "K",
        "coupling_loop_diameter": "m",
        "port_reactance": "ohm",
    }
    why = "; ".join(reasons)
    unknown = {
        f.name: Figure(
            UNKNOWN,
            units.get(f.name, "ohm" if f.name.endswith("_resistance") else "1"),
            "none",
            "none",
            why,
        )
        for f in fields(Figures)
    }
    return Figures(**{**unknown, "perimeter_in_wavelengths": _size(line, frequency)})
