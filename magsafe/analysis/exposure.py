"""What a rule looks at: its limits at one frequency, and the power that each of them judges."""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Literal

from magsafe.design.model import Transmission
from magsafe.rules.duty import OnAirShare, Over, Pattern, TuneUp, averaged_power, mode_duty, window_share
from magsafe.rules.limit import Limit, Rule, Who

When = Literal["always", "tuning"]


@dataclass(frozen=True, slots=True)
class Basis:
    """One basis of a rule at one frequency: its limits [V/m and A/m], and over what time it averages [s].

    A field without a limit on this basis has None. `averaging_time` is 0 where the envelope counts in full.
    """

    name: str
    averaging_time: float
    electric: Limit | None
    magnetic: Limit | None
    frequency: float

    @property
    def electric_limit(self) -> float | None:
        """The electric field allowed, RMS [V/m]."""
        return None if self.electric is None else self.electric.at(self.frequency)

    @property
    def magnetic_limit(self) -> float | None:
        """The magnetic field allowed, RMS [A/m]."""
        return None if self.magnetic is None else self.magnetic.at(self.frequency)


def bases(rule: Rule, who: Who, frequency: float) -> tuple[Basis, ...]:
    """Return the bases of a rule for one tier that have a limit at a frequency [Hz]."""
    rows = [row for row in rule.limits(who) if row.at(frequency) is not None]
    found = []
    for name, averaging in dict.fromkeys((row.basis, row.averaging_time) for row in rows):
        own = {row.field: row for row in rows if (row.basis, row.averaging_time) == (name, averaging)}
        found.append(Basis(name, averaging, own.get("electric"), own.get("magnetic"), frequency))
    return tuple(found)


@dataclass(frozen=True, slots=True)
class Filling:
    """What fills a share of a window, 0..1: its mean power while it lasts [W], and whether the envelope scales that."""

    power: float
    time: float
    scales: bool


@dataclass(frozen=True, slots=True)
class Use:
    """How a transmission fills time: envelope power [W], duty while keyed, pattern of overs, tune-up carrier.

    A tune-up comes before an over: its carrier adds to the mean of the window, once, and the sum is never more than the
    stronger of the two lasting all the time.
    """

    envelope: float
    duty: float
    pattern: Pattern | None
    tune_up_power: float
    tune_up_time: float

    def judged(self, averaging_time: float, when: When) -> float:
        """Return the power at the transmitter that a basis looks at [W]."""
        if when == "tuning":
            share = window_share(TuneUp(self.tune_up_time), averaging_time)
            return averaged_power(self.tune_up_power, 1.0, share)
        return self._always(self.envelope, averaging_time)

    def fillings(self, averaging_time: float, when: When) -> tuple[Filling, ...]:
        """Return what fills a window of a rule that averages: the overs and the tune-up, or the tune-up alone."""
        tuned = (Filling(self.tune_up_power, min(1.0, self.tune_up_time / averaging_time), scales=False),)
        if when == "tuning":
            return tuned
        overs = Filling(self.envelope * self.duty, window_share(self.pattern, averaging_time), scales=True)
        return (overs, *(tuned if self.tune_up_time else ()))

    def _always(self, envelope: float, averaging_time: float) -> float:
        if averaging_time == 0.0:
            return envelope
        mean = averaged_power(envelope, self.duty, window_share(self.pattern, averaging_time))
        return min(mean + self._tuning(averaging_time), max(envelope * self.duty, self.tune_up_power))

    def _tuning(self, averaging_time: float) -> float:
        """Return what a tune-up adds to the mean of a window [W]."""
        return self.tune_up_power * min(1.0, self.tune_up_time / averaging_time)

    def envelope_for(self, allowed: float, averaging_time: float) -> float:
        """Return the envelope power [W] at which a basis looks at no more than `allowed` [W]; 0 if none does."""
        if averaging_time == 0.0:
            return allowed
        share = window_share(self.pattern, averaging_time)
        beside = max(0.0, allowed - self._tuning(averaging_time)) / (self.duty * share)
        return max(beside, allowed / self.duty) if allowed >= self.tune_up_power else beside


def use_of(transmission: Transmission) -> Use:
    """Return how a transmission fills time; always on the air where nothing is stated."""
    if transmission.duty is not None:
        duty = transmission.duty
    else:
        duty = 1.0 if transmission.mode is None else mode_duty(transmission.mode)
    tune = transmission.tune_up
    return Use(
        transmission.envelope_power,
        duty,
        _pattern(transmission),
        0.0 if tune is None else tune.power,
        0.0 if tune is None else tune.time,
    )


def _pattern(transmission: Transmission) -> Pattern | None:
    if transmission.over is not None:
        return Over(transmission.over.transmit, transmission.over.listen)
    if transmission.on_air_share is not None:
        return OnAirShare(transmission.on_air_share)
    return None


def key_down(envelope: float) -> Use:
    """Return an unbroken carrier at full power [W]."""
    return Use(envelope, 1.0, None, 0.0, 0.0)


def weights(found: tuple[Basis, ...], use: Use, at_loop: float) -> Iterator[tuple[Basis, float, float]]:
    """Yield each basis with its weights: share of the limit over the square of the field for each watt at the loop.

    `at_loop` is the power at the loop for each watt at the transmitter. The weights are of the electric and the
    magnetic square; 0 where there is no limit.
    """
    for basis in found:
        power = use.judged(basis.averaging_time, "always") * at_loop
        electric, magnetic = basis.electric_limit, basis.magnetic_limit
        yield (
            basis,
            0.0 if electric is None else power / electric**2,
            0.0 if magnetic is None else power / magnetic**2,
        )
