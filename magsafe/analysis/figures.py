"""Figures: each a spread with its unit, its method and its source."""

from collections.abc import Sequence
from dataclasses import dataclass, fields
from math import pi, sqrt

import numpy as np
from scipy.constants import c

from magsafe.analysis.capacitor_heat import heat_of
from magsafe.analysis.chain import REACTANCE_ERROR, RESISTANCE_ERROR, STUDY, VOLTAGE_ERROR, Chain, Question
from magsafe.analysis.flow import nearest_resonance
from magsafe.analysis.losses import Loss
from magsafe.design.model import Design
from magsafe.design.shape import Outline
from magsafe.physics import small_loop, tuned_circuit
from magsafe.physics.far_field import FarField
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
    unexplained_resistance: Figure
    total_resistance: Figure
    port_reactance: Figure
    inductance: Figure
    tuning_capacitance: Figure
    conductor_efficiency: Figure
    overall_efficiency: Figure
    gain: Figure
    gain_elevation: Figure
    share_above_60_degrees: Figure
    share_below_20_degrees: Figure
    effective_isotropic_radiated_power: Figure
    mean_effective_isotropic_radiated_power: Figure
    effective_radiated_power: Figure
    mean_effective_radiated_power: Figure
    directivity_along_axis: Figure
    directivity_in_plane: Figure
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
    match_parallel_capacitance: Figure
    series_capacitance: Figure
    series_capacitor_peak_voltage: Figure
    series_capacitor_rms_current: Figure
    quarter_wave_impedance: Figure
    quarter_wave_length: Figure
    swr_through_quarter_wave: Figure
    swr_through_2_to_1: Figure
    swr_through_4_to_1: Figure
    swr_at_feed: Figure
    terminal_resistance: Figure
    terminal_reactance: Figure
    terminal_peak_voltage: Figure
    swr_at_50_ohm: Figure
    nearest_resonance: Figure


_LOOP_SOURCE = f"Harrington 1968 (memory); {STUDY}"
_YAGHJIAN = "Yaghjian & Best 2005 (memory)"
NO_HEIGHT = "loop.centre_height is not given, so nothing bounds what the ground takes"
_LOWERED = f"{NO_HEIGHT}: it lowers this, so only the other end is known"
_ADDED = f"{NO_HEIGHT}: it adds to this"
_NO_REACTANCE = "loop.centre_height is not given: how far the ground moves the reactance is open"
_WIDENED = f"{NO_HEIGHT}: it widens this"


def figures_of(chain: Chain, design: Design) -> Figures:
    """Return all figures of a loop that the solver reaches."""
    tuned = design.capacitor.kind != "none"
    known = {
        "perimeter_in_wavelengths": _size(chain.line, chain.frequency),
        "thickness_parameter": _thickness(chain),
        "radiation_resistance": _radiation(chain),
        "conductor_resistance": _conductor(chain),
        "joint_resistance": _joints(chain),
        "unexplained_resistance": _unexplained(chain),
        "total_resistance": _total(chain),
        "port_reactance": _reactance(chain),
        "inductance": _inductance(chain),
        "conductor_efficiency": _efficiency(chain),
        "largest_current": _answer(
            chain, chain.largest_current, VOLTAGE_ERROR, "A", "RMS, anywhere on the conductor", _LOOP_SOURCE
        ),
        **_directivities(chain),
        **(_tuned(chain) if tuned else _terminals(chain, design)),
    }
    return Figures(**{f.name: known.get(f.name) or _none(f.name, tuned) for f in fields(Figures)})


_BY_CAPACITORS = (
    "match_parallel_capacitance",
    "series_capacitance",
    "series_capacitor_peak_voltage",
    "series_capacitor_rms_current",
)


def _none(name: str, tuned: bool) -> Figure:
    """Return a figure that this loop does not have."""
    why = "for a full-wave loop, used without a capacitor" if tuned else "the loop has no capacitor that tunes it"
    if tuned and name in _BY_CAPACITORS:
        why = "for a loop that capacitors match"
    elif tuned and name == "coupling_loop_diameter":
        why = "for a loop that a small loop feeds"
    return Figure(UNKNOWN, _unit(name), "none", "none", why)


def _tuned(chain: Chain) -> dict[str, Figure]:
    """Return the figures of a loop that its capacitor tunes."""
    quality = _answer(
        chain, chain.quality, chain.quality_error, "1", "slope of the reactance of loop and capacitor", _YAGHJIAN
    )
    swr2 = float(tuned_circuit.swr_bandwidth_factor(2.0))
    return {
        "capacitor_resistance": _capacitor(chain),
        "tuning_capacitance": _capacitance(chain),
        "unloaded_q": quality,
        "loaded_q": Figure(
            quality.spread.scaled(0.5), "1", f"half of the unloaded Q{_say(chain)}", _YAGHJIAN, quality.why
        ),
        "half_power_bandwidth": _bandwidth(chain, quality.spread, 2.0, "frequency over loaded Q"),
        "swr2_bandwidth": _bandwidth(chain, quality.spread, swr2, "between the points of SWR 2, matched at resonance"),
        "capacitor_peak_voltage": _answer(
            chain,
            chain.voltage,
            chain.voltage_error,
            "V",
            "crest of the RF at the crest of the envelope"
            + (
                ""
                if chain.measured
                else "; its high end with the least resistance of free space, perfect image and any soil"
            ),
            _LOOP_SOURCE,
        ),
        "capacitor_rms_current": _answer(
            chain, chain.current, VOLTAGE_ERROR, "A", "RMS over an RF cycle at the port", _LOOP_SOURCE
        ),
        "capacitor_dissipation": _dissipation(chain),
    }


def _terminals(chain: Chain, design: Design) -> dict[str, Figure]:
    """Return the figures of a loop that is fed as it is."""
    every = chain.terminals()
    likely = complex(chain.resistance("likely", chain.likely), chain.likely.reactance)
    swr = tuned_circuit.standing_wave_ratio(np.array(every), 50.0)
    crest = _crest(likely, chain.power.likely or 0.0)
    volts = [[crest, *(_crest(each, power or 0.0) for each in every)] for power in (chain.power.low, chain.power.high)]
    resonance = nearest_resonance(design, chain.frequency)
    open_end, say = not chain.most, _say(chain)
    every_or_likely = (likely, *every)
    resistance = Spread(
        min(each.real for each in every_or_likely),
        likely.real,
        None if open_end else max(each.real for each in every_or_likely),
    )
    reactance = Spread(
        min(each.imag for each in every_or_likely) if chain.around.height_known else None,
        likely.imag,
        max(each.imag for each in every_or_likely) if chain.around.height_known else None,
    )
    match = float(tuned_circuit.standing_wave_ratio(likely, 50.0))
    found = Spread(
        None if open_end else min(match, float(swr.min())),
        match,
        None if open_end else max(match, float(swr.max())),
    )
    return {
        "terminal_resistance": Figure(
            resistance,
            "ohm",
            f"radiation, conductor and joints, seen through a port of any usual width{say}",
            _LOOP_SOURCE,
            _ADDED if open_end else "",
        ),
        "terminal_reactance": Figure(
            reactance, "ohm", f"of a port of any usual width{say}", _LOOP_SOURCE, _no_height(chain)
        ),
        "terminal_peak_voltage": Figure(
            # More resistance may mean more volts or less, so an unknown height leaves both ends open.
            Spread(None, crest, None) if open_end else Spread(min(volts[0]), crest, max(volts[1])),
            "V",
            f"crest of the RF at the crest of the envelope, all of the power in the loop{say}",
            _LOOP_SOURCE,
            _WIDENED if open_end else "",
        ),
        "swr_at_50_ohm": Figure(
            found,
            "1",
            f"of the terminal impedance on a line of 50 ohm, no match between{say}",
            "definition",
            _WIDENED if open_end else "",
        ),
        "nearest_resonance": Figure(
            UNKNOWN if resonance is None else Spread.exact(resonance).widened(REACTANCE_ERROR, REACTANCE_ERROR),
            "Hz",
            "where the reactance rises through zero, in free space",
            _LOOP_SOURCE,
            "none within half the frequency either way" if resonance is None else "",
        ),
    }


def _crest(impedance: complex, power: float) -> float:
    """Return the crest of the voltage across an impedance [ohm] that takes a power [W]."""
    return sqrt(2.0 * power / impedance.real) * abs(impedance)


def _answer(chain: Chain, ask: Question, error: float, unit: str, method: str, source: str) -> Figure:
    """Return the figure of a question whose answer rises as the resistance falls."""
    lowers = "" if chain.most else _LOWERED
    return Figure(chain.spread(ask).widened(error, error), unit, f"{method}{_say(chain)}", source, lowers)


def _say(chain: Chain) -> str:
    """Return what is to be said of the total resistance that a figure goes with."""
    if chain.measured is not None:
        return "; with the resistance that the measured Q tells, each end by an end of its 95 %"
    return "" if chain.around.ground_known else "; the likely value leaves the ground out"


def _no_height(chain: Chain) -> str:
    return "" if chain.around.height_known else _NO_REACTANCE


def _unit(name: str) -> str:
    units = {
        "inductance": "H",
        "tuning_capacitance": "F",
        "match_parallel_capacitance": "F",
        "series_capacitance": "F",
        "series_capacitor_peak_voltage": "V",
        "series_capacitor_rms_current": "A",
        "quarter_wave_impedance": "ohm",
        "quarter_wave_length": "m",
        "half_power_bandwidth": "Hz",
        "swr2_bandwidth": "Hz",
        "nearest_resonance": "Hz",
        "capacitor_peak_voltage": "V",
        "terminal_peak_voltage": "V",
        "capacitor_rms_current": "A",
        "largest_current": "A",
        "capacitor_dissipation": "W",
        "conductor_temperature_rise": "K",
        "coupling_loop_diameter": "m",
        "gain_elevation": "deg",
    }
    if name.endswith("radiated_power"):
        return "W"
    return units.get(name, "ohm" if name.endswith(("_resistance", "_reactance")) else "1")


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


def _part(chain: Chain, losses: Sequence[Loss], error: float, method: str, source: str) -> Figure:
    """Return the resistance of some parts as the port sees it."""
    found = Spread(
        sum(min(loss.at("low", corner) for corner in chain.every) for loss in losses),
        sum(loss.at("likely", chain.likely) for loss in losses),
        sum(max(loss.at("high", corner) for corner in chain.every) for loss in losses),
    )
    return Figure(found.widened(error, error), "ohm", method, source)


def _radiation(chain: Chain) -> Figure:
    ends = [corner.radiated for corner in chain.free]
    found = Spread(min(ends), chain.likely_free.radiated, max(ends)).widened(RESISTANCE_ERROR, RESISTANCE_ERROR)
    return Figure(found, "ohm", "power radiated by the solved current, in free space", _LOOP_SOURCE)


def _conductor(chain: Chain) -> Figure:
    return _part(
        chain,
        [chain.conductor],
        RESISTANCE_ERROR,
        "internal impedance of the conductor's form times the square of the solved current, each turn with its "
        "proximity to the others; its high end has 10 % for roughness and oxide (common practice)",
        "Schelkunoff 1934, Cockcroft 1929, G. S. Smith 1972 (memory); material as listed",
    )


def _joints(chain: Chain) -> Figure:
    method = "as stated or typical of the kind, times the square of the current where each joint sits"
    return _part(chain, chain.joints, 0.0, method, "the design; common practice")


def _capacitor(chain: Chain) -> Figure:
    method = "as stated, or reactance over Q; by its sizes or typical of the kind where not stated; all parts together"
    return _part(chain, [chain.capacitor, *chain.padding], 0.0, method, "the design; common practice")


def _total(chain: Chain) -> Figure:
    found = Spread(
        min(chain.resistance("low", corner) for corner in chain.least),
        chain.resistance("likely", chain.likely),
        max((chain.resistance("high", corner) for corner in chain.most), default=None),
    ).widened(RESISTANCE_ERROR, RESISTANCE_ERROR)
    if chain.measured is not None:
        method = "half of the slope of the reactance over the measured Q, each end by an end of its 95 %"
        return Figure(found, "ohm", method, f"{_YAGHJIAN}; {_LOOP_SOURCE}")
    method = f"sum of all, its low end with the least of free space, perfect image and any soil{_say(chain)}"
    return Figure(found, "ohm", method, _LOOP_SOURCE, "" if chain.most else _ADDED)


def _unexplained(chain: Chain) -> Figure:
    """Return what the measured Q leaves that no part accounts for, its ends by those of both."""
    if chain.measured is None:
        return Figure(UNKNOWN, "ohm", "none", "none", "no Q was measured of this loop at this frequency")
    found = Spread(
        min(chain.resistance("low", each) - chain.resistance_of_parts("high", each) for each in chain.least),
        chain.unexplained("likely", chain.likely),
        max(chain.resistance("high", each) - chain.resistance_of_parts("low", each) for each in chain.most),
    )
    method = "the resistance that the measured Q tells, less the sum of radiation, ground and all parts as computed"
    return Figure(found, "ohm", method, f"{_YAGHJIAN}; the record in [measured]")


def _reactance_ends(chain: Chain) -> Spread:
    """Return the port reactance [ohm], moved by what is below and by the port's gap; open where no height is stated."""
    if not chain.around.height_known:
        return Spread(None, chain.likely.reactance, None)
    ends = [corner.reactance for corner in chain.every]
    found = Spread(min(ends), chain.likely.reactance, max(ends))
    return found.widened(chain.reactance_error, chain.reactance_error)


def _reactance(chain: Chain) -> Figure:
    return Figure(
        _reactance_ends(chain),
        "ohm",
        "of the solved current, internal part included; its ends with a port of other width, and with or without "
        "what is below",
        _LOOP_SOURCE,
        _no_height(chain),
    )


def _inductance(chain: Chain) -> Figure:
    error = REACTANCE_ERROR + chain.corner_error
    found = Spread.exact(chain.inductance).widened(error, error)
    return Figure(found, "H", "low frequency, in free space, internal part included", _LOOP_SOURCE)


def _capacitance(chain: Chain) -> Figure:
    reactance, omega = _reactance_ends(chain), 2.0 * pi * chain.frequency
    falling = (reactance.high, reactance.likely, reactance.low)
    ends = [None if end is None else 1.0 / (omega * end) for end in falling]
    return Figure(Spread(*ends), "F", "cancels the port reactance; strays included", "resonance", _no_height(chain))


def _efficiency(chain: Chain) -> Figure:
    method = "radiation resistance over its sum with conductor, joints and capacitor; the ground left out"
    return Figure(chain.efficiency_spread(), "1", method, _LOOP_SOURCE)


def _directivities(chain: Chain) -> dict[str, Figure]:
    """Return the directivity along the loop's axis, and the largest in its plane, in free space."""
    flow = chain.around.free[0]
    far = FarField.of(flow.segments(), chain.frequency)
    axis = np.array([1.0, 0.0, 0.0] if flow.shape.upright else [0.0, 0.0, 1.0])
    both = [far.directivity_along(axis), far.directivity_along(-axis)]
    found = {"directivity_along_axis": max(both), "directivity_in_plane": far.largest_directivity_across(axis)[0]}
    said = {"directivity_along_axis": "along the axis, the larger side", "directivity_in_plane": "largest in the plane"}
    return {
        name: Figure(
            Spread.exact(value).widened(RESISTANCE_ERROR, RESISTANCE_ERROR),
            "1",
            f"over a source that radiates evenly, {said[name]}, in free space",
            "radiation integral of the solved current: Balanis, Antenna Theory, ch. 3 (memory)",
        )
        for name, value in found.items()
    }


def _bandwidth(chain: Chain, quality: Spread, factor: float, method: str) -> Figure:
    falling = (quality.high, quality.likely, quality.low)
    ends = [None if q is None else factor * chain.frequency / q for q in falling]
    why = "" if chain.most else _WIDENED
    return Figure(Spread(*ends), "Hz", f"{method}{_say(chain)}", _YAGHJIAN, why)


def _dissipation(chain: Chain) -> Figure:
    return Figure(
        heat_of(chain, (chain.capacitor, *chain.padding)),
        "W",
        f"key-down, all parts together; its high end with its own loss high and every other low{_say(chain)}",
        _LOOP_SOURCE,
        "" if chain.most else _LOWERED,
    )


def unknown_figures(line: Outline, frequency: float, reasons: tuple[str, ...]) -> Figures:
    """Return figures without values, with the reasons why nothing is computed of this loop."""
    why = "; ".join(reasons)
    unknown = {f.name: Figure(UNKNOWN, _unit(f.name), "none", "none", why) for f in fields(Figures)}
    return Figures(**{**unknown, "perimeter_in_wavelengths": _size(line, frequency)})
