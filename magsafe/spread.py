"""A figure that is not known exactly: low, likely, high."""

from dataclasses import dataclass
from math import isfinite

ROUNDING = 1e-9  # of a value: what the last digits of a sum may leave


@dataclass(frozen=True, slots=True)
class Spread:
    """Three values of one figure in one unit, `low <= likely <= high`.

    An end that nothing bounds, or a likely value that no method reaches, is None: an open end is said aloud,
    never replaced by a number.

    Raises
    ------
    ValueError : the values are out of order, or one is not finite
    """

    low: float | None
    likely: float | None
    high: float | None

    def __post_init__(self) -> None:
        """Refuse values out of order."""
        known = [v for v in (self.low, self.likely, self.high) if v is not None]
        if not all(isfinite(v) for v in known):
            raise ValueError(f"a spread holds finite values only, not {known}")
        if known != sorted(known):
            raise ValueError(f"low <= likely <= high is not held by {known}")

    @classmethod
    def exact(cls, value: float) -> "Spread":
        """Return a spread of no width."""
        return cls(value, value, value)

    @classmethod
    def about(cls, low: float | None, likely: float, high: float) -> "Spread":
        """Return a spread whose ends were computed another way than its likely value: the last digits may cross.

        Raises
        ------
        ValueError : they cross by more than rounding
        """
        last = ROUNDING * abs(likely)
        if low is not None and likely < low <= likely + last:
            low = likely
        if likely - last <= high < likely:
            high = likely
        return cls(low, likely, high)

    @property
    def known(self) -> bool:
        """Whether any of the three values is known."""
        return not (self.low is None and self.likely is None and self.high is None)

    def scaled(self, factor: float) -> "Spread":
        """Return the spread times a factor >= 0."""
        if factor < 0:
            raise ValueError(f"a spread is scaled by a factor >= 0, not {factor}")
        return Spread(
            None if self.low is None else self.low * factor,
            None if self.likely is None else self.likely * factor,
            None if self.high is None else self.high * factor,
        )

    def widened(self, below: float, above: float) -> "Spread":
        """Return the spread with its ends moved out by a method's stated relative errors [1]."""
        if below < 0 or above < 0:
            raise ValueError("a stated error is >= 0")
        low = None if self.low is None else self.low - abs(self.low) * below
        high = None if self.high is None else self.high + abs(self.high) * above
        return Spread(low, self.likely, high)


UNKNOWN = Spread(None, None, None)
