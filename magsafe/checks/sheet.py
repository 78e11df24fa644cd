"""The sheet: the whole result in the contract's machine form. JSON and JSON schema come from these models."""

from typing import Annotated, Literal

from pydantic import BaseModel, ConfigDict, Field

SCHEMA = "magsafe.sheet/1"

Verdict = Literal["stop", "unproven", "narrow", "clear"]
ORDER: tuple[Verdict, ...] = ("stop", "unproven", "narrow", "clear")


class Record(BaseModel):
    """A frozen part of the sheet."""

    model_config = ConfigDict(frozen=True, extra="forbid", allow_inf_nan=False, defer_build=True)


class Value(Record):
    """A figure beside its limit, in SI units."""

    low: float | None
    likely: float | None
    high: float | None
    unit: str


class Limit(Record):
    """What a figure is held against."""

    value: float
    unit: str


class FigureRecord(Record):
    """A figure with how it was found; `why` tells why a value is null."""

    low: float | None
    likely: float | None
    high: float | None
    unit: str
    method: str
    source: str
    why: str | None = None


class Finding(Record):
    """One question, its figure, its limit, its verdict.

    `power_at_margin` and `power_at_limit` are the envelope powers at the transmitter [W] up to which this finding
    keeps the margin asked for and the bare limit; null where no power changes it.
    """

    id: str
    place: str | None = None
    question: str
    value: Value | None
    limit: Limit | None
    margin_asked: float | None
    margin_found: float | None
    verdict: Verdict
    because: str
    do: str
    source: str
    provenance: str
    power_at_margin: float | None = None
    power_at_limit: float | None = None


class PowerCeiling(Record):
    """The highest envelope power at the transmitter [W] at which every power-dependent finding keeps its margin.

    `on_thin_evidence` lists the findings that are narrow for their evidence at any power; they count with their
    margin.
    """

    value: float | None
    at_limit: float | None
    unit: Literal["W"] = "W"
    transmission: int
    held_by: str | None
    complete: bool
    left_out: tuple[str, ...]
    on_thin_evidence: tuple[str, ...] = ()


class DesignRecord(Record):
    """The design as it was read, so that a sheet can be recomputed from itself."""

    name: str
    sha256: str
    text: str


class OperatingPointRecord(Record):
    """One transmission: its figures, its findings, its ceiling."""

    name: str
    frequency: float
    power: float
    power_at_loop: float
    mode: str | None
    duty: float
    power_ceiling: PowerCeiling
    figures: dict[str, FigureRecord]
    findings: tuple[Finding, ...]
    exposure: tuple[()] = ()


class Sheet(Record):
    """The whole result."""

    schema_name: Annotated[Literal["magsafe.sheet/1"], Field(alias="schema")] = "magsafe.sheet/1"
    magsafe: str
    date: str
    design: DesignRecord
    margins: dict[str, float]
    assumptions: tuple[str, ...]
    findings: tuple[Finding, ...]
    verdict: Verdict
    power_ceiling: PowerCeiling
    operating_points: tuple[OperatingPointRecord, ...]
    cautions: tuple[str, ...]

    def all_findings(self) -> tuple[Finding, ...]:
        """Return the findings of the sheet and of every transmission."""
        inner = (finding for point in self.operating_points for finding in point.findings)
        return (*self.findings, *inner)

    def to_json(self) -> str:
        """Return the machine form."""
        return self.model_dump_json(by_alias=True, indent=2)


def worst(verdicts: tuple[Verdict, ...]) -> Verdict:
    """Return the worst verdict, in the order stop, unproven, narrow, clear."""
    return min(verdicts, key=ORDER.index, default="clear")
