"""The figures of the match: what fits the loop to its line, and what it leaves."""

from magsafe.analysis.capacitor_feed import by_capacitors, capacitor_feed
from magsafe.analysis.chain import STUDY, Chain
from magsafe.analysis.feeding import matched, section_of, stated_ratio
from magsafe.analysis.figures import NO_HEIGHT, Figure
from magsafe.analysis.small_loop_feed import sizing, small_loop, wire_radius
from magsafe.design.model import Design
from magsafe.physics import matching
from magsafe.spread import UNKNOWN, Spread

_COUPLED = "coupled circuits: any textbook; mutual inductance of the solved current (computed)"
_CIRCUIT = "circuit theory: any textbook"
_LINE = "Ramo, Whinnery & Van Duzer (memory)"


def feed_figures(chain: Chain, design: Design) -> dict[str, Figure]:
    """Return the figures of the match by their names: of the kind that the design uses, or may use."""
    found = {"swr_at_feed": _ratio(chain, design)}
    if not chain.tuned:
        return found | _as_it_is(chain, design)
    if by_capacitors(design):
        return found | _capacitors(chain, design)
    return found | {"coupling_loop_diameter": _small_loop(chain, design)}


def _ratio(chain: Chain, design: Design) -> Figure:
    """Return the SWR at the loop with the match as stated."""
    try:
        found = stated_ratio(design, chain)
    except ValueError as error:
        return Figure(UNKNOWN, "1", "none", "none", str(error))
    if not found.known:
        return Figure(UNKNOWN, "1", "none", "none", "the design does not state the size of a match")
    method = "on the line at the loop, the match as stated, the loop retuned to the lowest"
    source = _LINE if not chain.tuned else _CIRCUIT if by_capacitors(design) else _COUPLED
    return Figure(found, "1", method, source, "" if chain.most else NO_HEIGHT)


def _small_loop(chain: Chain, design: Design) -> Figure:
    found, why = sizing(design, chain)
    small = small_loop(design)
    apart = "" if small.clearance is None else f", {1e3 * small.clearance:.4g} mm clear of the conductor"
    method = (
        f"the smallest that matches {design.feed.line_impedance:.4g} ohm: wire of {2e3 * wire_radius(small):.3g} mm, "
        f"{small.lies}{apart}, in the plane of the loop; its ends by those of the resistance and of the charge, "
        "which couples too"
    )
    return Figure(found, "m", method if found.known else "none", _COUPLED if found.known else "none", why)


def _capacitors(chain: Chain, design: Design) -> dict[str, Figure]:
    names = {
        "match_parallel_capacitance": "F",
        "series_capacitance": "F",
        "series_capacitor_peak_voltage": "V",
        "series_capacitor_rms_current": "A",
    }
    try:
        found = capacitor_feed(design, chain)
    except ValueError as error:
        return {name: Figure(UNKNOWN, unit, "none", "none", str(error)) for name, unit in names.items()}
    part = design.feed.series_capacitor
    one = "each of two, a lead each" if part is not None and part.balanced else "between line and loop"
    said = {
        "match_parallel_capacitance": (found.parallel, "across the loop: what the tuning capacitor is set to"),
        "series_capacitance": (found.series, f"that matches, {one}"),
        "series_capacitor_peak_voltage": (
            found.voltage,
            f"crest of the RF across it at the crest of the envelope, {one}",
        ),
        "series_capacitor_rms_current": (found.current, "RMS over an RF cycle"),
    }
    return {
        name: Figure(spread, names[name], method, f"{_CIRCUIT}; {STUDY}", _open_end(spread))
        for name, (spread, method) in said.items()
    }


def _open_end(spread: Spread) -> str:
    """Return why an end of a figure of two capacitors is not known; empty where both are."""
    return NO_HEIGHT if spread.low is None or spread.high is None else ""


def _as_it_is(chain: Chain, design: Design) -> dict[str, Figure]:
    found = matched(design, chain)
    section = section_of(design)
    said: dict[str, tuple[Spread, str, str]] = {
        "quarter_wave_impedance": (
            found.section,
            "ohm",
            "of a section that matches the terminal resistance to the line",
        ),
        "swr_through_quarter_wave": (
            found.through_section,
            "1",
            f"on the line, through a section of {section:.4g} ohm that is cut for the first transmission",
        ),
        "swr_through_2_to_1": (found.two_to_one, "1", "on the line, through an ideal transformer, 2:1 in impedance"),
        "swr_through_4_to_1": (found.four_to_one, "1", "on the line, through an ideal transformer, 4:1 in impedance"),
    }
    why = "" if chain.most else "loop.centre_height is not given: it widens this"
    figures = {name: Figure(spread, unit, method, _LINE, why) for name, (spread, unit, method) in said.items()}
    return {**figures, "quarter_wave_length": _section_length(design)}


def _section_length(design: Design) -> Figure:
    factor = design.feed.velocity_factor
    length = float(matching.quarter_wave_length(design.transmission[0].frequency, factor or 1.0))
    slower = "of the cable as stated" if factor else "in free space; times the cable's velocity factor"
    return Figure(Spread.exact(length), "m", f"a quarter wave at the first transmission, {slower}", "definition")
