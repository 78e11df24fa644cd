"""What a capacitor must be, in machine form: SI units, as the sheet. JSON comes from these models."""

from typing import Annotated, Literal

from pydantic import Field

from magsafe.checks.sheet import DesignRecord, Finding, PowerCeiling, Record, Value, Verdict

SCHEMA = "magsafe.capacitor/1"


class CapacitanceNeeded(Record):
    """The capacitance that a variable capacitor must reach in all transmissions [F], the stray taken off.

    `least` is 0 where the stray alone is more than is needed. `why` tells why an end is null.
    """

    least: float | None
    most: float | None
    stray: float
    unit: Literal["F"] = "F"
    why: str | None = None


class RatingNeeded(Record):
    """The largest volts or amps of all transmissions, and the rating that they ask for.

    `at_worst` takes no credit for what is typical of a kind; `transmission` is the index of the one that sets it.
    `needed` is that times the margin; `usual` the next rating of the usual steps (common practice).
    """

    at_worst: float
    transmission: int
    margin_asked: float
    needed: float
    usual: float
    unit: str


class GapNeeded(Record):
    """The air gap that stands the volts [m]: one, or each of two in series that share evenly.

    Plates are half as thick as the gap with full-round edges; the volts are at most half of breakdown, and less where
    the margin asks for it. `density` is that of the site's air over the laboratory's. Null where no gap in the range of
    the method stands them.
    """

    single: float | None
    each_of_two: float | None
    altitude: float
    temperature: float
    density: float
    unit: Literal["m"] = "m"
    why: str | None = None


class SizedTransmission(Record):
    """What one transmission asks of the capacitor; null with a `why` where the loop is not computed.

    `capacitance` is the capacitor's own part, the stray still in it. The `bare_` values are the high ends without
    credit for typical losses. `hertz_per_farad` is by how much the resonance falls for each farad more. `swr15_width`
    is the narrowest width between the points of SWR 1.5, without such credit, `step` by how much one step of the drive
    moves the resonance [Hz], `steps_needed` into how many steps a motor must divide the capacitor's range; null for
    hands.
    """

    name: str
    frequency: float
    power: float
    capacitance: Value | None = None
    peak_voltage: Value | None = None
    bare_voltage: float | None = None
    rms_current: Value | None = None
    bare_current: float | None = None
    dissipation: Value | None = None
    hertz_per_farad: Value | None = None
    swr15_width: float | None = None
    step: float | None = None
    steps_needed: int | None = None
    why: str | None = None


class PowerRow(Record):
    """The same at one envelope power on every transmission [W]: volts and amps at worst, ratings, gaps, heat [W]."""

    power: float
    peak_voltage: float
    voltage_needed: float
    voltage_usual: float
    rms_current: float
    current_needed: float
    current_usual: float
    gap: float | None
    gap_each_of_two: float | None
    dissipation: float | None


class KindPoint(Record):
    """One kind of capacitor in one transmission, by its index: efficiency without ground, volts with its losses."""

    transmission: int
    efficiency: Value
    peak_voltage: Value


class KindRow(Record):
    """The same loop with the losses typical of a kind (common practice); of the design's own the Q is null."""

    kind: str
    own: bool
    quality_factor: Value | None
    points: tuple[KindPoint, ...]


class BandRecord(Record):
    """What of an amateur band is tuned in one ITU region; `low` and `high` are the band's ends there [Hz]."""

    band: str
    region: int
    low: float
    high: float
    covered: Literal["wholly", "partly", "perhaps"]


class TuningRecord(Record):
    """The frequencies that the capacitor tunes the loop to [Hz], its stray counted and padding left out.

    For certain from the high end of `lowest` to the low end of `highest`; null values lie beyond what is solved. A
    `fixed` capacitor resonates at one frequency, somewhere from the low end of `lowest` to the high end of `highest`,
    and covers no band. `limit` is the port's anti-resonance.
    """

    fixed: bool
    lowest: Value
    highest: Value
    limit: float | None
    bands: tuple[BandRecord, ...]


class CapacitorSheet(Record):
    """What the capacitor must be over all transmissions, and the one that the design has beside it.

    Verdict and ceiling are those of the findings about the capacitor alone. `power` is the one that was asked for on
    every transmission, null for the design's own. Without a capacitor `why` says so, and nothing is sized.
    """

    schema_name: Annotated[Literal["magsafe.capacitor/1"], Field(alias="schema")] = "magsafe.capacitor/1"
    magsafe: str
    date: str
    design: DesignRecord
    power: float | None
    verdict: Verdict
    power_ceiling: PowerCeiling | None
    capacitance: CapacitanceNeeded | None = None
    peak_voltage: RatingNeeded | None = None
    rms_current: RatingNeeded | None = None
    gap: GapNeeded | None = None
    dissipation: float | None = None
    transmissions: tuple[SizedTransmission, ...]
    powers: tuple[PowerRow, ...] = ()
    kinds: tuple[KindRow, ...] = ()
    tuning: TuningRecord | None = None
    findings: tuple[tuple[Finding, ...], ...] = ()
    shared_findings: tuple[Finding, ...] = ()
    notes: tuple[str, ...] = ()
    cautions: tuple[str, ...] = ()
    why: str | None = None

    def to_json(self) -> str:
        """Return the machine form."""
        return self.model_dump_json(by_alias=True, indent=2)
