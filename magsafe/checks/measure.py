"""What to measure first, in one line: the uncertain input that takes most off the volts at worst."""

from collections.abc import Sequence

from magsafe import words
from magsafe.analysis import sensitivity
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.design.model import Design
from magsafe.spread import Spread


def measure_first(design: Design, points: Sequence[OperatingPoint]) -> str | None:
    """Return what to measure first, asked where the volts are highest; None where nothing uncertain is worth it.

    Amps and fields fall with the volts, but for what moves the reactance alone.
    """
    known = [(i, point) for i, point in enumerate(points) if point.chain is not None]
    index, point = max(known, key=lambda each: each[1].bare_voltage or 0.0, default=(0, None))
    if point is None or point.chain is None:
        return None
    best = sensitivity.measure_first(design, point.chain)
    where = f" in {words.short(design.titles[index])}" if len(points) > 1 else ""
    return None if best is None else _said(best, where)


def _said(best: sensitivity.Gain, where: str) -> str:
    before, after = best.efficiency
    share = f"efficiency {_ends(after)} instead of {_ends(before)}"
    if best.voltage is None:
        return f"Measure first: {best.name}. If it proves as likely: {share}{where}."
    first, then = (words.number(each, "V", "kV") for each in best.voltage)
    return (
        f"Measure first: {best.name}. If it proves as likely, volts at worst, without credit for typical losses, fall "
        f"from {first} to {then} kV peak{where}; {share}."
    )


def _ends(spread: Spread) -> str:
    return f"{words.number(spread.low or 0.0, '1', '%')} to {words.number(spread.high or 0.0, '1', '%')} %"
