"""Validity as data: the range in which a method holds."""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Range:
    """The closed interval of one quantity in which a method holds, with where that is from."""

    quantity: str
    low: float
    high: float
    source: str

    def holds(self, value: float) -> bool:
        """Return whether the method may be used at this value (NaN never)."""
        return self.low <= value <= self.high
