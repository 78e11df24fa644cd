"""What to measure first: which uncertain input takes most off the volts at worst, or off the efficiency's spread."""

from collections.abc import Iterator
from dataclasses import dataclass, replace

from magsafe.analysis.chain import Chain
from magsafe.analysis.losses import Loss
from magsafe.design.model import Design
from magsafe.spread import Spread

WORTH_IT = 0.01  # of the volts or of the efficiency: below it nothing is named


@dataclass(frozen=True, slots=True)
class Gain:
    """What would be known with one input at its likely value.

    `voltage` is the crest at worst without credit for typical losses [V], as it is and with the input known; None
    where no capacitor tunes the loop. `efficiency` is its spread [1], the same two.
    """

    name: str
    voltage: tuple[float, float] | None
    efficiency: tuple[Spread, Spread]

    @property
    def share(self) -> float:
        """What is taken off the volts at worst, or without a capacitor off the efficiency's spread [1]."""
        if self.voltage is not None:
            return 1.0 - self.voltage[1] / self.voltage[0]
        return _width(self.efficiency[0]) - _width(self.efficiency[1])


def gains(design: Design, chain: Chain) -> tuple[Gain, ...]:
    """Return what each uncertain input would bring if it were known, the most first."""
    found = [
        Gain(
            name,
            (_volts(chain), _volts(known)) if chain.tuned else None,
            (chain.efficiency_spread(), known.efficiency_spread()),
        )
        for name, known in one_known(design, chain)
    ]
    return tuple(sorted(found, key=lambda each: -each.share))


def measure_first(design: Design, chain: Chain) -> Gain | None:
    """Return the input that would bring most; None where none is worth it."""
    best = next(iter(gains(design, chain)), None)
    return best if best is not None and best.share >= WORTH_IT else None


def one_known(design: Design, chain: Chain) -> Iterator[tuple[str, Chain]]:
    """Yield the name of each uncertain input, and the chain with that one at its likely value."""
    if chain.tuned:
        yield "the capacitor's losses (its Q)", replace(chain, capacitor=_known(chain.capacitor))
    for i in range(len(chain.padding)):
        padding = (*chain.padding[:i], _known(chain.padding[i]), *chain.padding[i + 1 :])
        which = f" part {i + 1}" if len(chain.padding) > 1 else ""
        yield f"the losses of the padding{which}", replace(chain, padding=padding)
    yield "the conductor's resistance", replace(chain, conductor=_known(chain.conductor))
    for i, joint in enumerate(design.loop.joint):
        joints = (*chain.joints[:i], _known(chain.joints[i]), *chain.joints[i + 1 :])
        yield f"the resistance of joint {joint.name}", replace(chain, joints=joints)
    loss = design.feed.line_loss
    if loss is not None and loss.high > 0.0:
        # The high end counts the least loss, and no mismatch.
        least = 0.0 if loss.single else loss.low
        arriving = (chain.power.high or 0.0) * 10.0 ** (-(loss.likely - least) / 10.0)
        yield "the line's loss", replace(chain, power=Spread.exact(arriving))
    if design.ground_name is None or (design.ground_name != "none" and design.loop.centre_height is None):
        # A further key would only choose one of the states that are counted now; the likely one stands for it.
        around = replace(chain.around, least=(chain.around.likely,))
        missing = "the ground" if design.ground_name is None else "the loop's height"
        yield f"{missing}, which the design does not state", replace(chain, around=around)
    if chain.tuned:
        yield "the gap between the capacitor's terminals", replace(chain, gap_capacitance=0.0)


def _known(loss: Loss) -> Loss:
    return replace(loss, low=loss.likely, bare=loss.likely, high=loss.likely)


def _volts(chain: Chain) -> float:
    return chain.dangerous(chain.voltage, "bare") * (1.0 + chain.voltage_error)


def _width(spread: Spread) -> float:
    return (spread.high or 0.0) - (spread.low or 0.0)
