"""One design at one frequency: what the checks hold against ratings and limits."""

from dataclasses import dataclass

from scipy.constants import c

from magsafe.analysis.chain import GroundCase, WithoutTaper, chain
from magsafe.analysis.figures import Figures, figures_of, unknown_figures
from magsafe.design.model import Design, Transmission
from magsafe.design.shape import Outline, outline
from magsafe.physics import inductance, small_loop
from magsafe.spread import UNKNOWN, Spread


@dataclass(frozen=True, slots=True)
class OperatingPoint:
    """A transmission's figures and what the checks need beside them.

    `power` is the peak envelope power at the transmitter [W], `power_at_loop` what of it arrives. The two `bare_`
    values are the dangerous ends of volts and amps that rest on no typical value. `typical` names the rows of common
    practice that were used. `out_of_range` tells why the closed forms do not reach this loop; then most figures are
    unknown. `bound_ratio` is Q over efficiency times the lower bound on Q.
    """

    transmission: Transmission
    power: float
    power_at_loop: Spread
    figures: Figures
    out_of_range: tuple[str, ...]
    bare_voltage: float | None
    bare_current: float | None
    typical: tuple[str, ...]
    ground_left_out: bool
    bound_ratio: Spread
    without_taper: WithoutTaper | None
    ground_cases: tuple[GroundCase, ...]
    field_error: float


def operating_point(design: Design, transmission: Transmission) -> OperatingPoint:
    """Return the figures of a design in one transmission."""
    line = outline(design.loop)
    reasons = out_of_range(design, transmission.frequency, line)
    power = transmission.envelope_power
    arriving = power_at_loop(design, power)
    if reasons:
        figures = unknown_figures(line, transmission.frequency, reasons)
        return OperatingPoint(
            transmission, power, arriving, figures, reasons, None, None, (), False, UNKNOWN, None, (), 0.0
        )
    made = chain(design, transmission.frequency, line, arriving)
    return OperatingPoint(
        transmission,
        power,
        arriving,
        figures_of(made, design),
        (),
        made.dangerous(made.voltage, "bare") * (1.0 + made.voltage_error()[1]),
        made.dangerous(made.current, "bare") * (1.0 + made.current_error()[1]),
        made.typical,
        made.around.likely_is_free_space,
        made.bound_ratio(),
        made.without_taper(),
        made.ground_cases(),
        made.field_error(),
    )


def power_at_loop(design: Design, power: float) -> Spread:
    """Return what arrives at the loop [W]; a line loss of a single value may also be nothing."""
    loss = design.feed.line_loss
    if loss is None:
        return Spread.exact(power)
    least = 0.0 if loss.single else loss.low
    arriving = [power * 10.0 ** (-db / 10.0) for db in (loss.high, loss.likely, least)]
    return Spread(*arriving)


def out_of_range(design: Design, frequency: float, line: Outline) -> tuple[str, ...]:
    """Return why the closed forms do not reach this design at this frequency [Hz]; empty if they do."""
    loop, made_of = design.loop, design.loop.conductor
    reasons = []
    size = line.perimeter * frequency / c
    if not small_loop.TAPERED_CURRENT.holds(size):
        reasons.append(
            f"the perimeter is {size:.3g} wavelengths; the closed forms hold to {small_loop.TAPERED_CURRENT.high:g}"
        )
    if loop.turns > 1:
        reasons.append("the closed forms hold for one turn")
    if loop.shape not in ("circle", "polygon"):
        reasons.append(f"the closed forms hold for circles and regular polygons, not for {_a(loop.shape)}")
    if made_of.form not in ("rod", "tube"):
        reasons.append(f"the loss of {_a(made_of.form)} is not computed by this version")
    if made_of.plating is not None:
        reasons.append("the loss of a plated conductor is not computed by this version")
    if design.capacitor.kind == "none":
        reasons.append("a full-wave loop without a capacitor is not computed by this version")
    thickness = (made_of.outer_diameter or 0.0) / 2.0 / line.mean_radius
    if made_of.form in ("rod", "tube") and not small_loop.TAPERED_THICKNESS.holds(thickness):
        reasons.append(
            f"the conductor's radius is {thickness:.3g} of the loop's; the closed forms are proved to "
            f"{small_loop.TAPERED_THICKNESS.high:g}"
        )
    if loop.shape == "polygon":
        slender = (made_of.outer_diameter or 0.0) / 2.0 / (line.perimeter / (loop.sides or 3))
        if not inductance.POLYGON_THICKNESS.holds(slender):
            reasons.append(
                f"the conductor's radius is {slender:.3g} of a side; the polygon's inductance is proved to "
                f"{inductance.POLYGON_THICKNESS.high:g}"
            )
    return tuple(reasons)


def _a(word: str) -> str:
    return f"{'an' if word[0] in 'aeiou' else 'a'} {word}"
