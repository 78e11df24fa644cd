"""Validity as data: the range in which a method holds."""

from dataclasses import dataclass

import numpy as np

from magsafe.physics.arrays import Array, Values


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

    def within(self, values: Values) -> Array:
        """Return values as an array; raise ValueError if one of them lies outside, or is not a number."""
        given = np.asarray(values, dtype=np.float64)
        inside = (given >= self.low) & (given <= self.high)
        if not inside.all():
            first = given[~inside].flat[0]
            raise ValueError(f"{self.quantity} {first:g} is outside {self.low:g} to {self.high:g} ({self.source})")
        return given
