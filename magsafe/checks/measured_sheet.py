"""What an instrument says of the loop as built, in machine form: SI units, line loss in decibels."""

from typing import Annotated, Literal

from pydantic import Field

from magsafe.checks.sheet import DesignRecord, FigureRecord, Finding, PowerCeiling, Record, Value, Verdict

SCHEMA = "magsafe.measured/1"


class SweepRecord(Record):
    """The file that was read; `sha256` is of its bytes."""

    name: str
    sha256: str
    points: int
    reference_impedance: float


class BranchRecord(Record):
    """What two points mean for a loop that is coupled in one way."""

    coupled: Literal["overcoupled", "undercoupled"]
    coupling: Value
    unloaded_q: Value


class ReadingRecord(Record):
    """What the instrument says, each with its 95 % ends.

    `coupling` is the load that the line puts on the loop over the loop's own, null where the points do not tell its
    way; `branches` has both then. `line_loss` [dB, one way] was unfolded. `noise` and `systematic` are the two parts of
    the upper end of Q, over Q; null where they are not told apart. `points` are frequency [Hz], real and imaginary part
    of the reflection at the loop's own terminals.
    """

    by: str
    file: SweepRecord | None
    resonance: Value
    unloaded_q: Value
    loaded_q: Value | None
    coupling: Value | None
    line_loss: Value
    branches: tuple[BranchRecord, ...]
    points_in_band: int | None
    residual: float | None
    noise: float | None
    systematic: float | None
    points: tuple[tuple[float, float, float], ...]


class BesideRecord(Record):
    """A figure as computed from the parts, and with the measured Q."""

    computed: FigureRecord
    measured: FigureRecord


class CeilingsRecord(Record):
    """The power ceiling of the transmission as computed from the parts, and with the measured Q."""

    computed: PowerCeiling
    measured: PowerCeiling


class MeasuredSheet(Record):
    """A measurement beside what was computed, for the transmission that is nearest to it."""

    schema_name: Annotated[Literal["magsafe.measured/1"], Field(alias="schema")] = "magsafe.measured/1"
    magsafe: str
    date: str
    design: DesignRecord
    transmission: str
    frequency: float
    power: float
    reading: ReadingRecord
    figures: dict[str, BesideRecord]
    power_ceiling: CeilingsRecord
    findings: tuple[Finding, ...]
    verdict: Verdict
    notes: tuple[str, ...]
    cautions: tuple[str, ...]

    def to_json(self) -> str:
        """Return the machine form."""
        return self.model_dump_json(by_alias=True, indent=2)
