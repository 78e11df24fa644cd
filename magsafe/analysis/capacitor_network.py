"""How the parts of a tuning capacitor share volts and amps: the main one, what is across it, what is in series.

Parallel parts are joined across the main one first, series parts to all of that. Losses are too small to change how
volts and amps divide. `sign` is the end that is asked for: -1 the least, 0 the likely, 1 the most.
"""

from dataclasses import dataclass
from math import pi

from magsafe.design.model import Design, Padding

UNSTATED_TOLERANCE = 0.10  # of padding, where none is stated (common practice)

_SIGNS = {"low": -1.0, "bare": -1.0, "likely": 0.0, "high": 1.0}


@dataclass(frozen=True, slots=True)
class Network:
    """The padding that is joined at one angular frequency [rad/s]."""

    omega: float
    parallel: tuple[Padding, ...] = ()
    series: tuple[Padding, ...] = ()

    @property
    def padding(self) -> tuple[Padding, ...]:
        """All parts beside the main one."""
        return (*self.parallel, *self.series)

    def own_reactance(self, part: Padding, sign: float) -> float:
        """Return the reactance of a part by itself, without its sign [ohm]."""
        return 1.0 / (self.omega * part.capacitance * (1.0 - sign * tolerance_of(part)))

    def section_reactance(self, reactance: float, sign: float) -> float:
        """Return what of a reactance [ohm] is left for the main part and what is across it; not below 0."""
        return max(0.0, reactance - sum(self.own_reactance(part, -sign) for part in self.series))

    def susceptance(self, sign: float) -> float:
        """Return what is across the main part [S]."""
        return sum(1.0 / self.own_reactance(part, -sign) for part in self.parallel)

    def main_share(self, reactance: float, sign: float) -> float:
        """Return the main part's share of the current [1], where the port asks for a reactance [ohm]; 0 to 1."""
        return max(0.0, 1.0 - self.susceptance(-sign) * self.section_reactance(reactance, -sign))

    def main_capacitance(self, whole: float, sign: float) -> float | None:
        """Return what the main part must have [F] so that all have `whole`; None where no capacitance does.

        It is negative where the parts across it have more than enough.
        """
        left = 1.0 / whole - sum(self.omega * self.own_reactance(part, sign) for part in self.series)
        return 1.0 / left - self.susceptance(-sign) / self.omega if left > 0.0 else None


@dataclass(frozen=True, slots=True)
class Membership:
    """Where a part of the capacitor is, by which its own 1/Q, or its own resistance in ohm, is seen at the port.

    `part` is None for the main one. The power that it takes is that of its own volts and amps.
    """

    network: Network
    part: Padding | None = None
    in_ohms: bool = False

    def weight(self, end: str, reactance: float) -> float:
        """Return by what to multiply, where the loop has a reactance [ohm], at one end of what is known."""
        sign, net, part = _SIGNS[end], self.network, self.part
        if part is None:
            share = net.main_share(reactance, sign)
            return share**2 if self.in_ohms else share * net.section_reactance(reactance, sign)
        if part in net.series:
            return net.own_reactance(part, sign)
        return net.section_reactance(reactance, sign) ** 2 / net.own_reactance(part, -sign)


def tolerance_of(part: Padding) -> float:
    """Return the tolerance of padding [1], as stated or as is usual."""
    return UNSTATED_TOLERANCE if part.tolerance is None else part.tolerance


def network(design: Design, frequency: float) -> Network:
    """Return how the padding is joined at a frequency [Hz]."""
    joined = [part for part in design.capacitor.padding if part.on is None or frequency in part.on]
    return Network(
        2.0 * pi * frequency,
        tuple(part for part in joined if part.connection == "parallel"),
        tuple(part for part in joined if part.connection == "series"),
    )
