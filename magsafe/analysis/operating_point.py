"""One design at one frequency: what the checks hold against ratings and limits."""

from collections.abc import Iterator
from dataclasses import dataclass, replace

from scipy.constants import c

from magsafe import words
from magsafe.analysis.chain import VOLTAGE_ERROR, Chain, GroundCase, chain
from magsafe.analysis.closed_form import SecondOpinion, second_opinion
from magsafe.analysis.exposure import use_of
from magsafe.analysis.feed_figures import feed_figures
from magsafe.analysis.feeding import arriving as arriving_at
from magsafe.analysis.figures import NO_HEIGHT, Figure, Figures, figures_of, unknown_figures
from magsafe.analysis.flow import TUNING_SCAN, tuning_limit
from magsafe.analysis.losses import conductivity
from magsafe.analysis.sky import Pattern, sky
from magsafe.analysis.sky_figures import sky_figures
from magsafe.analysis.warmth import RUNS_AWAY, Warmth, warmth
from magsafe.analysis.wires import clearance, electrical_radius, positions, shape_of, shortest_side, wire_of
from magsafe.design.model import Design, Loop, Transmission
from magsafe.design.shape import Outline, outline
from magsafe.physics.conductor import skin_depth
from magsafe.physics.ranges import Range
from magsafe.physics.thin_wire import FULL_WAVE
from magsafe.spread import UNKNOWN, Spread

THICKNESS = Range("conductor radius over loop radius", 0.0, 0.06, "the thickest loop held against the Fourier series")
SHORTEST_SIDE = 6.0  # conductor radii
WIDEST_STRIP = 0.12  # loop radii: wider, the side towards the centre carries more
THICK_WALL = 3.0  # skin depths
LOWEST = 2.0  # conductor radii between the ground and the axis; to 4 the reactance reads up to 7 % high, which is safe

TURN_SPACING = 1.02  # diameters, from which the crowding is solved


@dataclass(frozen=True, slots=True)
class OperatingPoint:
    """A transmission's figures and what the checks need beside them.

    `power` is the peak envelope power at the transmitter [W], `power_at_loop` what of it arrives. The two `bare_`
    values are the dangerous ends of volts and amps that rest on no typical value. `typical` names the rows of common
    practice that were used. `out_of_range` tells why nothing is computed of this loop; then most figures are unknown.
    `tuning_limit` is the frequency above which no series capacitor tunes the loop [Hz], `beyond_tuning` says that the
    transmission lies above it. `bound_ratio` is Q over efficiency times the lower bound on Q. `opinion` is what the
    closed forms say, None where they do not reach. `chain` is what answers further questions, and `warmth`
    the conductor's; both None with `out_of_range`. `pattern` is where the likely power goes, None where no ground or
    height is stated.
    """

    transmission: Transmission
    power: float
    power_at_loop: Spread
    figures: Figures
    out_of_range: tuple[str, ...] = ()
    tuning_limit: float | None = None
    beyond_tuning: bool = False
    bare_voltage: float | None = None
    bare_current: float | None = None
    typical: tuple[str, ...] = ()
    ground_left_out: bool = False
    bound_ratio: Spread = UNKNOWN
    opinion: SecondOpinion | None = None
    ground_cases: tuple[GroundCase, ...] = ()
    field_error: float = VOLTAGE_ERROR
    chain: Chain | None = None
    warmth: Warmth | None = None
    pattern: Pattern | None = None


def operating_point(design: Design, transmission: Transmission) -> OperatingPoint:
    """Return the figures of a design in one transmission."""
    line = outline(design.loop)
    frequency, power = transmission.frequency, transmission.envelope_power
    arriving = power_at_loop(design, power)
    reasons = out_of_range(design, frequency, line)
    limit = None if reasons else tuning_limit(design)
    tuned = design.capacitor.kind != "none"
    beyond = tuned and limit is not None and frequency >= limit
    if tuned and not reasons and limit is None:
        reasons = _unlimited(design.loop, frequency, line)
    made = None if reasons or beyond else chain(design, frequency, line, arriving)
    if limit is not None and beyond:
        reasons = (
            f"no series capacitor tunes this loop above its anti-resonance at {words.amount(limit, 'Hz', 'MHz')}",
        )
    elif made is not None:
        reasons = _unfit(made, limit)
        made = None if reasons else made
    if made is None:
        figures = unknown_figures(line, frequency, reasons)
        return OperatingPoint(transmission, power, arriving, figures, reasons, limit, beyond)
    arriving = arriving_at(design, made)
    made = replace(made, power=arriving)
    warm, figures = warmth(made, design, use_of(transmission)), figures_of(made, design)
    free_gain = (figures.directivity_along_axis, figures.directivity_in_plane)
    reaching = sky(made)
    over_ground = sky_figures(made, reaching, arriving, use_of(transmission).duty, free_gain)
    bare_voltage = made.dangerous(made.voltage, "bare") * (1.0 + made.voltage_error)
    return OperatingPoint(
        transmission=transmission,
        power=power,
        power_at_loop=arriving,
        figures=replace(figures, conductor_temperature_rise=_rise(warm), **over_ground, **feed_figures(made, design)),
        tuning_limit=limit,
        bare_voltage=bare_voltage if tuned else None,
        bare_current=made.dangerous(made.current, "bare") * (1.0 + VOLTAGE_ERROR),
        typical=made.typical,
        ground_left_out=not made.around.ground_known,
        bound_ratio=made.bound_ratio() if tuned else UNKNOWN,
        opinion=second_opinion(design, replace(made, measured=None)) if tuned else None,
        ground_cases=made.ground_cases(),
        field_error=made.voltage_error,
        chain=made,
        warmth=warm,
        pattern=None if reaching is None else reaching.pattern,
    )


def operating_points(design: Design) -> tuple[OperatingPoint, ...]:
    """Return the operating points of a design, one for each transmission."""
    return tuple(operating_point(design, transmission) for transmission in design.transmission)


def _rise(warm: Warmth) -> Figure:
    found, air = warm.temperature(), warm.air_temperature
    ends = [None if end is None or end >= RUNS_AWAY else end - air for end in (found.low, found.likely, found.high)]
    why = "it runs away: what it takes up grows faster than what it loses" if found.high == RUNS_AWAY else ""
    method = (
        "over the air, at the end of the longest over, where the current is largest; its high end bounds any number of "
        "overs"
    )
    if found.low is None:
        why = why or f"{NO_HEIGHT}: it lowers this, so only the other end is known"
    return Figure(Spread(*ends), "K", method, "Churchill & Chu 1975 by the ht library; radiation; sun", why)


def _unfit(made: Chain, limit: float | None) -> tuple[str, ...]:
    """Return why what was solved does not stand for the loop; empty if it does."""
    if made.tuned and not made.gap_is_small:
        if limit is None:
            return ("no series capacitor tunes this loop: it is capacitive at its port",)
        return (f"so near to its anti-resonance at {words.amount(limit, 'Hz', 'MHz')} the port's own gap decides",)
    if not made.current_is_perfect:
        return (
            f"the conductor's resistance is {100.0 * made.lossy_share:.2g} % of its reactance: too much for a current "
            "that is solved without loss",
        )
    return ()


def power_at_loop(design: Design, power: float) -> Spread:
    """Return what arrives at the loop [W]; a line loss of a single value may also be nothing."""
    loss = design.feed.line_loss
    if loss is None:
        return Spread.exact(power)
    least = 0.0 if loss.single else loss.low
    arriving = [power * 10.0 ** (-db / 10.0) for db in (loss.high, loss.likely, least)]
    return Spread(*arriving)


def out_of_range(design: Design, frequency: float, line: Outline) -> tuple[str, ...]:
    """Return why nothing is computed of this design at this frequency [Hz]; empty if it is."""
    found = (*_size_reasons(design.loop, frequency, line), *_conductor_reasons(design.loop, frequency))
    return found or tuple(_place_reasons(design, frequency))


def _unlimited(loop: Loop, frequency: float, line: Outline) -> tuple[str, ...]:
    """Return why a loop is not computed whose anti-resonance was not found where it is looked for."""
    size, most = line.perimeter * loop.turns * frequency / c, float(TUNING_SCAN[-1])
    if size <= most:
        return ()
    return (f"the conductor is {size:.3g} wavelengths long; what a capacitor tunes is computed to {most:g}",)


def _size_reasons(loop: Loop, frequency: float, line: Outline) -> Iterator[str]:
    size = line.perimeter * loop.turns * frequency / c
    if not FULL_WAVE.holds(size):
        yield (
            f"the conductor is {size:.3g} wavelengths long; the solver is proved from {FULL_WAVE.low:g} to "
            f"{FULL_WAVE.high:g}"
        )
    radius = electrical_radius(loop.conductor)
    nested = loop.turns > 1 and loop.turn_arrangement == "nested"
    inner = line.mean_radius - ((loop.turns - 0.5) * (loop.turn_spacing or 0.0) if nested else 0.0)
    if inner <= 0.0:
        yield "there is no room for the innermost turn"
        return
    thickness = radius / inner
    if not THICKNESS.holds(thickness):
        yield f"the conductor's radius is {thickness:.3g} of the loop's; the solver is proved to {THICKNESS.high:g}"
    side = shortest_side(loop)
    if side is not None and side < SHORTEST_SIDE * radius:
        yield (
            f"a side is {side / radius:.3g} times as long as the conductor's radius; a corner's own shape decides "
            f"below {SHORTEST_SIDE:g}"
        )


def _place_reasons(design: Design, frequency: float) -> Iterator[str]:
    """Yield why the wire cannot be where the design puts it."""
    shapes = [shape_of(design.loop, frequency, position) for position in positions(design)]
    try:
        lowest = min(float(wire_of(shape).nodes[:, 2].min()) for shape in shapes)
        apart = min(clearance(wire_of(shape)) for shape in shapes)
    except ValueError as error:
        yield str(error)
        return
    if apart < 0.99 * TURN_SPACING:  # chords of round turns lie a little nearer than the turns
        yield (
            f"the conductor comes within {apart:.3g} of its diameters of itself, axis to axis; how its current crowds "
            "is not computed"
        )
    if design.ground_name == "none" or design.loop.centre_height is None:
        return
    if lowest < LOWEST * shapes[0].radius:
        yield "the conductor is nearer to the ground than its own diameter; how its current crowds is not computed"


def _conductor_reasons(loop: Loop, frequency: float) -> Iterator[str]:
    made_of = loop.conductor
    width = (made_of.width or 0.0) / outline(loop).mean_radius
    if made_of.form == "strip" and width > WIDEST_STRIP:
        yield f"the strip is {width:.3g} of the loop's radius wide; it is computed as if straight to {WIDEST_STRIP:g}"
    if loop.turns > 1 and made_of.form == "strip":
        yield "what the turns of a strip do to one another is not computed by this version"
    elif loop.turns > 1 and (loop.turn_spacing or 0.0) < TURN_SPACING * (made_of.outer_diameter or 0.0):
        yield f"the turns are nearer together than {TURN_SPACING:g} diameters; how the current crowds is not computed"
    if made_of.plating is not None and made_of.form == "tube":
        sigma = conductivity(made_of, made_of.temperature).likely or 0.0
        wall = (made_of.wall or 0.0) / float(skin_depth(frequency, sigma))
        if wall < THICK_WALL:
            yield (f"the plated wall is {wall:.3g} skin depths thick; plating is computed on walls from {THICK_WALL:g}")
