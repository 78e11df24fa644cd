"""The sheet: the whole result in the contract's machine form. JSON and JSON schema come from these models."""

from typing import Annotated, Literal

from pydantic import BaseModel, ConfigDict, Field

SCHEMA = "magsafe.sheet/1"

Verdict = Literal["stop", "unproven", "narrow", "clear"]
JudgedOn = Literal["worst point", "mean over the body"]
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
    keeps the margin asked for and the bare limit; null where no power changes it. `session` is the number of the
    session that it is about, from 1. `thin` tells that its evidence allows
    narrow at best, `doubt` what part of its figure is not known: then it proves nothing, and a stop stays a stop.
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
    thin: bool = False
    doubt: str | None = None
    session: int | None = None


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


class BasisRecord(Record):
    """What one basis of a rule says of a place: RMS fields at the power it judges, at their dangerous end.

    `set_by` is the field that decides, E or H; null values are fields that the basis does not limit. `judged_on` tells
    whether the fields are those of the worst point or the root of the mean of squares over the body; `body_mean_share`
    is the share of the limit by that mean, null where the rule has none or the place is no posture.
    """

    electric: float | None
    magnetic: float | None
    electric_limit: float | None
    magnetic_limit: float | None
    share_of_limit: float
    field_ratio: float
    set_by: str
    basis: str
    judged_power: float
    averaging_time: float
    provenance: str
    judged_on: JudgedOn = "worst point"
    body_mean_share: float | None = None


class TimeRecord(Record):
    """How long one may transmit at full power within an averaging time, the margin kept [s].

    `keyed` is in the mode as it is keyed, `carrier` as an unbroken carrier; `keyed` is null while tuning.
    """

    averaging_time: float
    keyed: float | None
    carrier: float


class PlaceRecord(Record):
    """A place under one rule: its binding basis, its verdict, and the power it could bear [W].

    That is the envelope power; of a place that is judged while tuning, the tune-up carrier's. Null where the field is
    not known. `in_session` tells that its transmission is worked in turn with others: `times` are then those of this
    transmission alone, with nothing else on the air in that time.
    """

    name: str
    electric: float | None = None
    magnetic: float | None = None
    electric_limit: float | None = None
    magnetic_limit: float | None = None
    share_of_limit: float | None = None
    field_ratio: float | None = None
    set_by: str | None = None
    basis: str | None = None
    judged_power: float | None = None
    averaging_time: float | None = None
    provenance: str | None = None
    judged_on: JudgedOn = "worst point"
    body_mean_share: float | None = None
    verdict: Verdict
    power_ceiling: float | None = None
    at_limit: float | None = None
    when: str
    bases: tuple[BasisRecord, ...] = ()
    times: tuple[TimeRecord, ...] = ()
    in_session: bool = False


class DistanceRecord(Record):
    """A distance from the loop's centre [m], rounded up; null where the search did not bound it."""

    distance: float | None
    set_by: str
    basis: str


class FloorRecord(Record):
    """Distances for people on one floor; null for a direction that the loop does not have."""

    floor: float
    any_bearing: DistanceRecord
    along_axis: DistanceRecord | None
    in_plane: DistanceRecord
    across: DistanceRecord | None


class DistancesRecord(Record):
    """Distances beyond which no point exceeds the limit less the exposure margin."""

    any_direction: DistanceRecord
    along_axis: DistanceRecord | None
    in_plane: DistanceRecord
    across: DistanceRecord | None
    above: DistanceRecord
    below: DistanceRecord
    on_floors: tuple[FloorRecord, ...]


class KeepoutRecord(DistancesRecord):
    """The same averaged as the rule averages, and for an unbroken carrier at full power."""

    key_down: DistancesRecord


class ExposureRecord(Record):
    """One rule and tier: distances and places. `why` tells why there are no distances, or what they leave out.

    `without` tells that the rule has no limits for the tier; `why` then says where to look.
    """

    rule: str
    edition: str
    who: str
    keepout: KeepoutRecord | None
    places: tuple[PlaceRecord, ...]
    why: str | None = None
    without: bool = False


class SessionTerm(Record):
    """What one transmission adds at the worst division of a window: share of its time, and of the limit."""

    transmission: int
    share_of_window: float
    share_of_limit: float


class SessionPlace(Record):
    """A place under one rule while a session is worked: the worst sum over any averaging time.

    `power_factor` is what the powers of all its transmissions may be multiplied by with the margin kept, `at_limit` to
    the bare limit; null where no power changes the sum, or where it proves nothing.
    """

    name: str
    verdict: Verdict
    share_of_limit: float | None = None
    field_ratio: float | None = None
    set_by: str | None = None
    basis: str | None = None
    averaging_time: float | None = None
    judged_on: JudgedOn = "worst point"
    terms: tuple[SessionTerm, ...] = ()
    power_factor: float | None = None
    at_limit: float | None = None


class SessionExposure(Record):
    """One rule and tier during a session: distances, each at least those of its transmissions, and places."""

    rule: str
    edition: str
    who: str
    keepout: DistancesRecord | None
    places: tuple[SessionPlace, ...]
    why: str | None = None


class SessionRecord(Record):
    """Transmissions that are worked in turn within one averaging time, by their indices; sessions count from 1."""

    number: int
    name: str
    transmissions: tuple[int, ...]
    exposure: tuple[SessionExposure, ...]


class ExemptionPlace(Record):
    """A place of the public: how near it comes to the loop [m], and the threshold there [W].

    `why` tells why there is no threshold; an evaluation is required then.
    """

    name: str
    distance: float | None = None
    threshold: float | None = None
    exempt: bool | None = None
    why: str | None = None


class ExemptionRecord(Record):
    """Whether a rule asks for an evaluation: information, in no verdict and no ceiling.

    `power` is what `kind` names, at its dangerous end [W]: the mean over `averaging_time`, 0 where the crest counts.
    `threshold` is that at any distance, else each of `places` has its own, which holds from `nearest` [m] on.
    `axis_field_ratio` is the magnetic field over the public limit on the loop's own axis, in free space, at that
    threshold and that distance from its nearest part.
    """

    rule: str
    jurisdiction: str
    name: str
    kind: str
    power: float | None
    averaging_time: float
    threshold: float | None
    exempt: bool | None
    nearest: float
    places: tuple[ExemptionPlace, ...]
    axis_field_ratio: float | None
    warning: str
    source: str
    provenance: str
    why: str | None = None


class PatternCut(Record):
    """Likely gain in one upright plane through the loop's centre, from one horizon over the zenith to the other.

    `angle` runs from 0 to 180 degrees: to 90 it is the elevation on the side that `towards` names, beyond it 180 less
    the elevation on the other side, `away`. `gain` is over a source that radiates evenly [1], losses counted.
    """

    name: str
    towards: str
    away: str
    angle: tuple[float, ...]
    gain: tuple[float, ...]


class LobeRecord(Record):
    """A direction of a cut that is stronger than those beside it.

    `elevation` is above the horizon [deg], `side` the words of the cut for it, `strength` over the strongest of the
    whole pattern [1].
    """

    cut: str
    side: str
    elevation: float
    gain: float
    strength: float


class PatternRecord(Record):
    """Where the power goes, over the ground as likely: one cut in the loop's plane and one on its axis."""

    ground: str
    method: str
    cuts: tuple[PatternCut, ...]
    lobes: tuple[LobeRecord, ...]


class PlacingRecord(Record):
    """The same loop at another height or in the other plane, likely values for the same power into it.

    `change` is what reaches the sky over what does as designed [1], `low_angle_change` the same of what leaves below 20
    degrees; both null where nothing is left to compare with.
    """

    plane: Literal["vertical", "horizontal"]
    centre_height: float
    as_designed: bool
    overall_efficiency: float
    change: float | None
    low_angle_change: float | None
    share_above_60_degrees: float
    share_below_20_degrees: float
    capacitor_peak_voltage: float | None


class MeasurementRecord(Record):
    """The measured Q that a transmission rests on, beside the Q that its parts make.

    `unloaded_q` is as it was read at `resonance` [Hz], `carried_q` what it comes to at the transmission's frequency, as
    `computed_q` is. `coupling` is the load that the line put on the loop over the loop's own [1], null where it was not
    told. `points` are frequency [Hz], real and imaginary part of the reflection at the loop's own terminals, 1 far off.
    """

    date: str
    by: str | None
    resonance: float
    unloaded_q: Value
    carried_q: Value
    computed_q: Value
    coupling: Value | None
    points: tuple[tuple[float, float, float], ...] = ()


class OperatingPointRecord(Record):
    """One transmission: its figures, its findings, its ceiling, people; where its power goes, and what height does.

    `pattern` is null and `placings` empty where the ground or the loop's height is not stated; `measurement` is null
    where no measured Q counts.
    """

    name: str
    frequency: float
    power: float
    power_at_loop: float
    mode: str | None
    duty: float
    power_ceiling: PowerCeiling
    figures: dict[str, FigureRecord]
    findings: tuple[Finding, ...]
    exposure: tuple[ExposureRecord, ...] = ()
    exemptions: tuple[ExemptionRecord, ...] = ()
    pattern: PatternRecord | None = None
    placings: tuple[PlacingRecord, ...] = ()
    measurement: MeasurementRecord | None = None


class DeratingRecord(Record):
    """A factor on what is stood: of a breakdown of air, or of a rating; `applies_to` is the id of its finding."""

    name: str
    factor: float
    source: str
    evidence: str
    applies_to: str


class CouplingRecord(Record):
    """What one coupling loop does at one transmission.

    `matching_diameter` is that of the one which would match there [m]; `coefficient` the load that the line puts on the
    loop over the loop's own resistance [1], 1 where it matches; `swr` the lowest that retuning reaches; `offset` how
    far that lies above the loop's own resonance [Hz].
    """

    name: str
    matching_diameter: Value
    coefficient: Value
    swr: Value
    offset: float


class CouplingLoopRecord(Record):
    """The coupling loop as `stated`, or else that whose worst SWR over the transmissions is least; sizes in metres.

    `share_of_loop` is its diameter over that of a circle with the loop's mean radius [1].
    """

    diameter: float
    stated: bool
    wire: float
    position: str
    clearance: float | None
    share_of_loop: float
    transmissions: tuple[CouplingRecord, ...]


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
    sessions: tuple[SessionRecord, ...] = ()
    coupling_loop: CouplingLoopRecord | None = None
    measure_first: str | None = None
    deratings: tuple[DeratingRecord, ...] = ()
    cautions: tuple[str, ...]

    def all_findings(self) -> tuple[Finding, ...]:
        """Return the findings of the sheet and of every transmission."""
        inner = (finding for point in self.operating_points for finding in point.findings)
        return (*self.findings, *inner)

    def to_json(self) -> str:
        """Return the machine form."""
        return self.model_dump_json(by_alias=True, indent=2)

    def __repr__(self) -> str:
        from magsafe.checks.notebook import in_a_line  # noqa: PLC0415  (it is made of this module's records)

        return in_a_line(self)

    __str__ = __repr__

    def _repr_html_(self) -> str:
        from magsafe.checks.notebook import as_html  # noqa: PLC0415  (it is made of this module's records)

        return as_html(self)


class KeepoutPoint(Record):
    """The part of a transmission that is about people."""

    name: str
    frequency: float
    power: float
    power_ceiling: PowerCeiling
    findings: tuple[Finding, ...]
    exposure: tuple[ExposureRecord, ...]
    exemptions: tuple[ExemptionRecord, ...] = ()


class KeepoutSheet(Record):
    """The part of a sheet that is about people, with a verdict and a ceiling of its own."""

    schema_name: Annotated[Literal["magsafe.keepout/1"], Field(alias="schema")] = "magsafe.keepout/1"
    magsafe: str
    date: str
    design: DesignRecord
    findings: tuple[Finding, ...]
    verdict: Verdict
    power_ceiling: PowerCeiling
    operating_points: tuple[KeepoutPoint, ...]
    sessions: tuple[SessionRecord, ...] = ()
    cautions: tuple[str, ...]

    def to_json(self) -> str:
        """Return the machine form."""
        return self.model_dump_json(by_alias=True, indent=2)


def worst(verdicts: tuple[Verdict, ...]) -> Verdict:
    """Return the worst verdict, in the order stop, unproven, narrow, clear."""
    return min(verdicts, key=ORDER.index, default="clear")
