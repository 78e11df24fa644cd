"""A capacitor made at home, from its sizes: coaxial stub, trombone, plates with a dielectric between them.

`inner_diameter` and `outer_diameter` are those of the dielectric; of a trombone `length` is the longest overlap of each
of its two sleeves. Nothing tells where a dielectric lies between the ends of its kind: the middle stands for the likely
value.
"""

from dataclasses import dataclass
from itertools import product
from math import atan, inf, sin

from magsafe.analysis.capacitor_network import Network
from magsafe.design import tables, warmth_tables
from magsafe.design.model import Capacitor
from magsafe.physics import open_line
from magsafe.physics.arrays import ComplexArray
from magsafe.physics.open_line import Line
from magsafe.spread import Spread

SIZE_ERROR = 0.05  # of the capacitance, for sizes as read, air left beside the dielectric, and edges (common practice)

_COAXIAL = ("dielectric", "inner_diameter", "outer_diameter", "length")
KEYS: dict[str, tuple[str, ...]] = {
    "coaxial stub": _COAXIAL,
    "trombone": _COAXIAL,
    "dielectric plate": ("dielectric", "plate_area", "gap"),
}
_ALL_KEYS = ("dielectric", "inner_diameter", "outer_diameter", "length", "plate_area")
_PLATES = "air variable"  # whose typical Q stands for the metal of plates
_AIR = "air"


@dataclass(frozen=True, slots=True)
class LineLoss:
    """The loss of such a capacitor [1/Q] with its ends, and what makes it differ from a lumped one.

    `steepness` is the derivative of the reactance of all parts by the frequency, times it, over that reactance; `crest`
    the highest voltage along the line over that at its terminals. Both are 1 for a lumped one.
    """

    inverse_q: Spread
    steepness: float
    crest: float
    rows: tuple[str, ...]


def stated_keys(part: Capacitor) -> tuple[str, ...]:
    """Return the keys of its sizes that a capacitor states; a gap alone is that of air plates."""
    stated = tuple(key for key in _ALL_KEYS if getattr(part, key) is not None)
    return (*stated, "gap") if part.kind == "dielectric plate" and part.gap is not None else stated


def missing_keys(part: Capacitor) -> tuple[str, ...]:
    """Return the keys of its sizes that a capacitor of such a kind does not state."""
    return tuple(key for key in KEYS.get(part.kind, ()) if getattr(part, key) is None)


def is_complete(part: Capacitor) -> bool:
    """Return whether its sizes tell what a capacitor is."""
    return part.kind in KEYS and not missing_keys(part)


def is_variable(part: Capacitor) -> bool:
    """Return whether its sizes give a range that begins at nothing, and not one value."""
    return part.kind == "trombone"


def permittivity(part: Capacitor) -> Spread:
    """Return the relative permittivity of its dielectric, the middle as the likely value."""
    if part.dielectric in (None, _AIR):
        return Spread.exact(1.0)
    return _middled(warmth_tables.dielectrics()[part.dielectric or ""].permittivity)


def loss_tangent(part: Capacitor) -> Spread:
    """Return the loss tangent of its dielectric, the middle as the likely value."""
    if part.dielectric in (None, _AIR):
        return Spread.exact(0.0)
    return _middled(warmth_tables.dielectrics()[part.dielectric or ""].loss_tangent)


def _middled(ends: Spread) -> Spread:
    low, high = ends.low or 0.0, ends.high or 0.0
    return Spread(low, (low + high) / 2.0, high)


def capacitance(part: Capacitor, metal: Spread, frequency: float) -> Spread:
    """Return what its sizes give at a frequency [Hz]: at its length, of a trombone both sleeves in series [F].

    `metal` is the conductivity of a trombone's tubes [S/m]. The ends are those of the dielectric and of sizes as read.

    Raises
    ------
    ValueError : longer than a quarter of the wavelength on it
    """
    span = permittivity(part)
    ends = [_capacitance(part, metal, frequency, each or 0.0) for each in (span.low, span.likely, span.high)]
    return Spread(*ends).widened(SIZE_ERROR, SIZE_ERROR)


def _capacitance(part: Capacitor, metal: Spread, frequency: float, relative: float) -> float:
    if part.kind == "dielectric plate":
        return float(open_line.plate_capacitance(part.plate_area or 0.0, part.gap or 0.0, relative))
    line = line_of(part, metal, frequency, relative, "likely")
    return float(open_line.effective_capacitance(frequency, _impedance(part, line, part.length or 0.0)))


def _impedance(part: Capacitor, line: Line, length: float) -> ComplexArray:
    """Return the impedance at the terminals: of a stub, or of both sleeves in series [ohm]."""
    of = open_line.trombone_impedance if part.kind == "trombone" else open_line.open_impedance
    return of(line, length)


def sleeves(part: Capacitor) -> int:
    """Return how many equal pieces are in series."""
    return 2 if part.kind == "trombone" else 1


def line_of(part: Capacitor, metal: Spread, frequency: float, relative: float, end: str) -> Line:
    """Return the line of a stub, or of one sleeve, at one end of what its parts lose.

    `metal` is the conductivity of a trombone's tubes [S/m]; a cable's metal is copper, and its braid and strands lose
    more than smooth copper does.
    """
    tangent: float = getattr(loss_tangent(part), end)
    if part.kind == "trombone":
        sigma: float = {"low": metal.high, "likely": metal.likely, "high": metal.low}[end] or 0.0
        rough: float = getattr(tables.roughness_share(), end)
        inner = outer = sigma / (1.0 + rough) ** 2
    else:
        copper = tables.materials()["copper"].conductivity
        factors = tables.cable_factors()
        inner, outer = (copper / getattr(each, end) ** 2 for each in factors)
    radii = (part.inner_diameter or 0.0) / 2.0, (part.outer_diameter or 0.0) / 2.0
    return open_line.coaxial_line(frequency, *radii, relative, tangent, inner, outer)


def overlap(part: Capacitor, line: Line, reactance: float) -> float:
    """Return how long each sleeve, or the stub, must be to have a reactance at its terminals, without its sign [m]."""
    one = reactance / sleeves(part)
    return atan(abs(complex(line.characteristic_impedance)) / one) / float(line.propagation.imag)


def length_at(part: Capacitor, line: Line, reactance: float) -> float:
    """Return the length that works [m]: a stub's own, of a trombone that which has the reactance [ohm]."""
    return overlap(part, line, reactance) if is_variable(part) else part.length or 0.0


def line_loss(part: Capacitor, metal: Spread, net: Network, frequency: float, reactance: Spread) -> LineLoss | None:
    """Return what a capacitor of such a kind loses, where the loop has a reactance [ohm] with its ends.

    None where the padding leaves nothing for it, or it is longer than a quarter of the wavelength on it.
    """
    own = [own_reactance(net, each or 0.0) for each in (reactance.low, reactance.likely, reactance.high)]
    if min(own) <= 0.0 or max(own) == inf:
        return None
    rows = () if part.dielectric == _AIR else (f"dielectric, {part.dielectric}",)
    if part.kind == "dielectric plate":
        plates, tangent = tables.capacitor_quality_factor(_PLATES), loss_tangent(part)
        inverse = [1.0 / (q or 1.0) for q in (plates.high, plates.likely, plates.low)]
        ends = [a + (b or 0.0) for a, b in zip(inverse, (tangent.low, tangent.likely, tangent.high), strict=True)]
        return LineLoss(Spread(*ends), 1.0, 1.0, (*rows, f"capacitor, {_PLATES} (for the metal of the plates)"))
    span = permittivity(part)
    likely_line = line_of(part, metal, frequency, span.likely or 1.0, "likely")
    length = length_at(part, likely_line, own[1])

    def every(end: str) -> list[float]:
        return [
            _inverse_q(part, line_of(part, metal, frequency, relative or 1.0, end), each)
            for relative, each in product((span.low, span.high), (min(own), max(own)))
        ]

    ends = [min(every("low")), _inverse_q(part, likely_line, own[1]), max(every("high"))]
    if max(ends) == inf:
        return None
    lossless = [line_of(part, metal, frequency, relative or 1.0, "low") for relative in (span.low, span.high)]
    crest = max(
        float(open_line.largest_voltage_ratio(line, length_at(part, line, each)))
        for line, each in product(lossless, (min(own), max(own)))
    )
    angle = 2.0 * float(likely_line.propagation.imag) * length
    steepness = _steepness(net, reactance.likely or 0.0, angle / sin(angle))
    metals = "the tubes of a trombone" if part.kind == "trombone" else "the metal of a coaxial cable"
    return LineLoss(Spread(*ends), steepness, crest, (*rows, metals))


def own_reactance(net: Network, reactance: float) -> float:
    """Return the reactance of the main part itself, where the loop has one [ohm]; inf where it may have none."""
    share = net.main_share(reactance, 0.0)
    return net.section_reactance(reactance, 0.0) / share if share > 0.0 else inf


def _inverse_q(part: Capacitor, line: Line, reactance: float) -> float:
    impedance = complex(_impedance(part, line, length_at(part, line, reactance)))
    return impedance.real / -impedance.imag if impedance.imag < 0.0 else inf


def _steepness(net: Network, reactance: float, own: float) -> float:
    """Return how steep the reactance of all parts is, where that of the main one is `own`: by the power it takes."""
    share = net.main_share(reactance, 0.0) * net.section_reactance(reactance, 0.0) / reactance
    return 1.0 + (own - 1.0) * share
