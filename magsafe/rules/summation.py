"""How a rule adds up transmissions that meet in one averaging window.

Each transmission takes a share of the electric and of the magnetic limit: the mean of the square of its field over
the window, divided by the square of the limit. What is not averaged has nothing to add as long as transmissions only
follow one another: at every instant one alone is on the air.
"""

from dataclasses import dataclass
from math import isfinite
from typing import TYPE_CHECKING, Literal

from magsafe.rules.segment import PROVENANCES, Provenance
from magsafe.rules.table import FREQUENCY_UNITS, Entries

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import ArrayLike, NDArray

FieldsAdded = Literal["apart", "larger", "together"]

FIELDS_ADDED: tuple[FieldsAdded, ...] = ("apart", "larger", "together")


@dataclass(frozen=True, slots=True)
class Summation:
    """How the shares of several transmissions add up on a basis that is averaged.

    `fields` "apart": the electric shares must come to no more than 1, and so must the magnetic ones; "larger": the
    larger share of each transmission counts; "together": both shares of each transmission count. `together_up_to`
    [Hz], end included, is where "together" ends and the larger share counts from there; None: it does not end.
    """

    fields: FieldsAdded
    together_up_to: float | None
    source: str
    provenance: Provenance
    provenance_detail: str

    def contribution(
        self, electric_share: "ArrayLike", magnetic_share: "ArrayLike", frequency: float
    ) -> "tuple[NDArray[np.float64], NDArray[np.float64]]":
        """What one transmission adds to the two sums, both of which must come to no more than 1.

        Parameters
        ----------
        electric_share : mean square of E over the square of its limit, zero or more, of any shape [1]
        magnetic_share : mean square of H over the square of its limit, zero or more, of that shape [1]
        frequency : of the transmission, positive, finite [Hz]

        Returns
        -------
        its part of the electric and of the magnetic sum [1]; the same number twice unless the fields add up apart,
        so that the larger of the two sums is always the total

        Raises
        ------
        ValueError : a share below zero or none at all, or a frequency that is none
        """
        import numpy as np  # noqa: PLC0415  (a rule is read without it)

        electric, magnetic = np.asarray(electric_share, dtype=float), np.asarray(magnetic_share, dtype=float)
        for name, share in (("electric_share", electric), ("magnetic_share", magnetic)):
            if not np.all(share >= 0.0):
                raise ValueError(f"{name} must be zero or more, found {share!r}")
        if not (isfinite(frequency) and frequency > 0):
            raise ValueError(f"frequency must be positive and finite, found {frequency!r} Hz")
        if self.fields == "apart":
            return electric, magnetic
        together = self.fields == "together" and (self.together_up_to is None or frequency <= self.together_up_to)
        part = electric + magnetic if together else np.maximum(electric, magnetic)
        return part, part


def read_summation(entries: Entries) -> Summation:
    """The summation of a rule; what is wrong with it is noted in `entries`."""
    summation = Summation(
        fields=entries.word("fields", FIELDS_ADDED),
        together_up_to=entries.optional_quantity("together_up_to", FREQUENCY_UNITS),
        source=entries.text("source"),
        provenance=entries.word("provenance", PROVENANCES),
        provenance_detail=entries.text("provenance_detail"),
    )
    entries.refuse_leftover()
    if summation.together_up_to is not None:
        if summation.fields != "together":
            entries.note('together_up_to goes with fields = "together", and only with it')
        if summation.together_up_to <= 0:
            entries.note("together_up_to must be above zero")
    return summation
