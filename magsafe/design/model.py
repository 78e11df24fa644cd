"""What a design file may say: its blocks and keys, in the contract's words, in SI units.

Keys that only make sense together (a size for each shape, a wall for a tube) are held against each other in
`consistency`; here each key stands for itself.
"""

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from typing import Annotated, Any, Literal, get_args

from pydantic import (
    AfterValidator,
    BaseModel,
    BeforeValidator,
    ConfigDict,
    Discriminator,
    Field,
    Tag,
)

from magsafe.design import tables, warmth_tables
from magsafe.design.quantities import Quantity, Uncertain, UncertainQuantity, field_error, show
from magsafe.units import (
    AREA,
    CAPACITANCE,
    CONDUCTIVITY,
    CURRENT,
    DECIBEL,
    DURATION,
    ELECTRIC_FIELD,
    FREQUENCY,
    LENGTH,
    MAGNETIC_FIELD,
    POSITION,
    POWER,
    REACTIVE_POWER,
    RESISTANCE,
    SHARE,
    TEMPERATURE,
    VOLTAGE,
)

SCHEMA = "magsafe.design/1"
AM_CREST = 4.0  # envelope power of a fully modulated AM signal over its carrier


def _named(table: Callable[[], Iterable[str]], *also: str) -> AfterValidator:
    def check(name: str) -> str:
        rows = (*table(), *also)
        if name not in rows:
            raise field_error(("", show(name), f"one of {', '.join(rows)}", nearest(name, rows)))
        return name

    return AfterValidator(check)


def nearest(found: str, known: tuple[str, ...], otherwise: str = "choose one of them") -> str:
    """Return the advice that names the nearest known word."""
    from difflib import get_close_matches  # noqa: PLC0415  (only when something is wrong)

    lowered = {name.casefold(): name for name in known}
    near = get_close_matches(found.casefold(), lowered, n=1, cutoff=0.5)
    return f'did you mean "{lowered[near[0]]}"?' if near else otherwise


def _printable(text: str) -> str:
    if not text.strip():
        raise field_error(("", show(text), "a name", "write one, or leave the key out"))
    if not text.isprintable():
        raise field_error(("", show(text), "text on one line, without control characters", "retype it"))
    return text


def _rule_names() -> tuple[str, ...]:
    from magsafe.rules.limit import rule_names  # noqa: PLC0415  (only when rules are named)

    return rule_names()


def _rule(name: str) -> str:
    known = _rule_names()
    if name not in known:
        raise field_error(("", show(name), f"one of {', '.join(known)}", nearest(name, known)))
    return name


def _offered(table: Callable[[], Iterable[str]], *also: str) -> Any:
    """Return a field whose JSON schema lists the rows of a table, which an editor then offers."""
    return Field(json_schema_extra=lambda made: made.update(enum=[*table(), *also]))


Name = Annotated[str, AfterValidator(_printable)]
RuleName = Annotated[str, AfterValidator(_rule), _offered(_rule_names)]
MaterialName = Annotated[str, _named(tables.materials), _offered(tables.materials)]
PlasticName = Annotated[str, _named(warmth_tables.plastics), _offered(warmth_tables.plastics)]
DielectricName = Annotated[str, _named(warmth_tables.dielectrics, "air"), _offered(warmth_tables.dielectrics, "air")]
GroundName = Annotated[str, _named(tables.soils, "perfect", "none"), _offered(tables.soils, "perfect", "none")]

LoopLength = Annotated[float, Quantity(LENGTH, 0.02, 200.0)]
ConductorSize = Annotated[float, Quantity(LENGTH, 0.05e-3, 0.5)]
SmallLength = Annotated[float, Quantity(LENGTH, 1e-6, 0.5)]
Frequency = Annotated[float, Quantity(FREQUENCY, 100e3, 300e6)]
Power = Annotated[float, Quantity(POWER, 1e-3, 10e3)]
Voltage = Annotated[float, Quantity(VOLTAGE, 1.0, 1e6)]
Current = Annotated[float, Quantity(CURRENT, 1e-3, 10e3)]
ReactivePower = Annotated[float, Quantity(REACTIVE_POWER, 1.0, 1e8)]
Dissipation = Annotated[float, Quantity(POWER, 1e-3, 10e3)]
Capacitance = Annotated[float, Quantity(CAPACITANCE, 0.1e-12, 1e-6)]
Stray = Annotated[float, Quantity(CAPACITANCE, 0.0, 1e-9)]
Temperature = Annotated[float, Quantity(TEMPERATURE, 273.15 - 60.0, 273.15 + 90.0)]
Duration = Annotated[float, Quantity(DURATION, 0.1, 86400.0)]
Listening = Annotated[float, Quantity(DURATION, 0.0, 86400.0)]
Share = Annotated[float, Quantity(SHARE, 0.001, 1.0)]
PlaceDistance = Annotated[float, Quantity(POSITION, -1000.0, 1000.0)]
Height = Annotated[float, Quantity(POSITION, -100.0, 1000.0)]
Resistance = Annotated[Uncertain, UncertainQuantity(RESISTANCE, 0.0, 10.0)]
Loss = Annotated[
    Uncertain,
    UncertainQuantity(DECIBEL, 0.0, 20.0, '{ low = "0.1 dB", likely = "0.3 dB", high = "0.5 dB" }'),
]
QualityFactor = Annotated[Uncertain, UncertainQuantity(None, 5.0, 1e5, "{ low = 500, likely = 1000, high = 3000 }")]
Coupling = Annotated[Uncertain, UncertainQuantity(None, 1e-3, 1e3, "{ low = 0.8, likely = 0.9, high = 1.0 }")]
Reflection = Annotated[float, Field(ge=-1.5, le=1.5)]


CapacitorKind = Literal[
    "vacuum variable",
    "air variable",
    "split-stator air",
    "butterfly air",
    "mica",
    "ceramic",
    "coaxial stub",
    "trombone",
    "dielectric plate",
    "none",
]
KINDS: tuple[str, ...] = get_args(CapacitorKind)


class Block(BaseModel):
    """A table of the file: unknown keys are refused, nothing is converted on the quiet, nothing changes."""

    model_config = ConfigDict(extra="forbid", frozen=True, strict=True, defer_build=True)


class Station(Block):
    """Who and where, as it is printed on the sheet."""

    name: Name | None = None
    callsign: Name | None = None
    operator: Name | None = None


class Plating(Block):
    """A metal layer on the conductor."""

    material: MaterialName
    thickness: Annotated[float, Quantity(LENGTH, 0.01e-6, 1e-3)]


class Conductor(Block):
    """What the loop is made of."""

    form: Literal["rod", "tube", "strip", "braid", "corrugated"]
    outer_diameter: ConductorSize | None = None
    wall: SmallLength | None = None
    width: ConductorSize | None = None
    thickness: SmallLength | None = None
    strip_lies: Literal["flat", "on edge"] | None = None
    material: MaterialName | None = None
    conductivity: Annotated[float, Quantity(CONDUCTIVITY, 1e4, 70e6)] | None = None
    temperature: Temperature = 293.15
    plating: Plating | None = None
    surface: Literal["bright", "oxidised", "painted"] | None = None
    in_sun: bool | None = None


class Joint(Block):
    """Where the current crosses from piece to piece; `resistance` is that of one."""

    name: Name
    count: Annotated[int, Field(ge=1, le=1000)] = 1
    kind: Literal["soldered lap", "bolted lug", "compression", "sliding contact"] | None = None
    resistance: Resistance | None = None
    at: Literal["capacitor", "opposite", "spread"]


class Loop(Block):
    """The loop: shape, size, turns, how it hangs, its conductor and joints."""

    shape: Literal["circle", "polygon", "rectangle", "outline"]
    diameter: LoopLength | None = None
    perimeter: LoopLength | None = None
    sides: Annotated[int, Field(ge=3, le=24)] | None = None
    side: LoopLength | None = None
    across_flats: LoopLength | None = None
    width: LoopLength | None = None
    height: LoopLength | None = None
    points: (
        Annotated[
            list[Annotated[list[PlaceDistance], Field(min_length=2, max_length=2)]],
            Field(min_length=3, max_length=200),
        ]
        | None
    ) = None
    turns: Annotated[int, Field(ge=1, le=8)] = 1
    turn_spacing: Annotated[float, Quantity(LENGTH, 1e-3, 2.0)] | None = None
    turn_arrangement: Literal["side by side", "nested"] = "side by side"
    plane: Literal["vertical", "horizontal"] = "vertical"
    centre_height: Annotated[float, Quantity(LENGTH, 0.0, 500.0)] | None = None
    rotates: bool = False
    supports: list[PlasticName] | None = None
    conductor: Conductor
    joint: list[Joint] = []


class CapacitanceRange(Block):
    """The ends of a variable capacitor."""

    min: Capacitance
    max: Capacitance


class Padding(Block):
    """A fixed capacitor joined on some frequencies: across the main one, or in series with all that is across it."""

    connection: Literal["parallel", "series"]
    capacitance: Capacitance
    tolerance: Annotated[float, Quantity(SHARE, 0.0, 0.5)] | None = None
    rated_voltage: Voltage | None = None
    rated_voltage_kind: Literal["peak RF", "RMS RF", "DC working", "DC test"] | None = None
    rated_current: Current | None = None
    rated_current_at: Frequency | None = None
    rated_reactive_power: ReactivePower | None = None
    rated_dissipation: Dissipation | None = None
    quality_factor: QualityFactor | None = None
    on: Annotated[list[Frequency], Field(min_length=1)] | None = None


class Capacitor(Block):
    """All of the capacitor between the two terminals that the loop is joined to, as connected."""

    kind: CapacitorKind
    capacitance: CapacitanceRange | None = None
    fixed: Capacitance | None = None
    tolerance: Annotated[float, Quantity(SHARE, 0.0, 0.5)] | None = None
    position: Literal["top", "bottom", "side"] | None = None
    rated_voltage: Voltage | None = None
    rated_voltage_kind: Literal["peak RF", "RMS RF", "DC working", "DC test"] | None = None
    rated_current: Current | None = None
    rated_current_at: Frequency | None = None
    rated_reactive_power: ReactivePower | None = None
    rated_dissipation: Dissipation | None = None
    quality_factor: QualityFactor | None = None
    quality_factor_at: Frequency | None = None
    series_resistance: Resistance | None = None
    gap: Annotated[float, Quantity(LENGTH, 0.1e-3, 0.2)] | None = None
    sections_in_series: Annotated[int, Field(ge=1, le=2)] | None = None
    plate_thickness: Annotated[float, Quantity(LENGTH, 0.01e-3, 0.05)] | None = None
    plate_edge: Literal["round", "square cut"] | None = None
    wiper: bool = False
    dielectric: DielectricName | None = None
    inner_diameter: ConductorSize | None = None
    outer_diameter: ConductorSize | None = None
    length: Annotated[float, Quantity(LENGTH, 1e-3, 50.0)] | None = None
    plate_area: Annotated[float, Quantity(AREA, 1e-6, 10.0)] | None = None
    stray: Stray = 0.0
    weather: Literal["sealed", "vented", "open"] | None = None
    padding: Annotated[list[Padding], Field(alias="with")] = []


class Tuning(Block):
    """How the capacitor is turned."""

    by: Literal["hand at the loop", "insulated shaft", "motor"] | None = None
    steps_per_range: Annotated[int, Field(ge=2, le=10_000_000)] | None = None


class SmallLoop(Block):
    """The coupling loop: its diameter to the middle of its conductor, which is round, and where it lies.

    With a `clearance` between the surfaces of both conductors it lies inside the loop opposite the capacitor, else in
    the loop's middle.
    """

    diameter: Annotated[float, Quantity(LENGTH, 5e-3, 50.0)] | None = None
    wire: ConductorSize | None = None
    position: Literal["centred", "opposite the capacitor"] | None = None
    clearance: Annotated[float, Quantity(LENGTH, 0.0, 10.0)] | None = None

    @property
    def lies(self) -> str:
        """Where it lies, in words."""
        return "centred" if self.clearance is None else "opposite the capacitor"


class SeriesCapacitor(Block):
    """The small capacitor of a match, between line and loop; `balanced`: each of two, one in either lead."""

    capacitance: Capacitance | None = None
    balanced: bool = False
    rated_voltage: Voltage | None = None
    rated_voltage_kind: Literal["peak RF", "RMS RF", "DC working", "DC test"] | None = None
    rated_current: Current | None = None
    rated_current_at: Frequency | None = None
    rated_reactive_power: ReactivePower | None = None
    rated_dissipation: Dissipation | None = None
    quality_factor: QualityFactor | None = None


class Feed(Block):
    """How the power comes to the loop: the line, and what matches the loop to it."""

    line_loss: Loss | None = None
    line_impedance: Annotated[float, Quantity(RESISTANCE, 10.0, 1000.0)] = 50.0
    coupling: Literal["small loop", "capacitors", "direct", "none stated"] = "none stated"
    small_loop: SmallLoop | None = None
    series_capacitor: SeriesCapacitor | None = None
    match: Literal["none", "quarter-wave section", "2:1 transformer", "4:1 transformer"] | None = None
    section_impedance: Annotated[float, Quantity(RESISTANCE, 10.0, 1000.0)] | None = None
    velocity_factor: Annotated[float, Field(gt=0.3, le=1.0)] | None = None


class Over(Block):
    """The longest over: transmit, then listen."""

    transmit: Duration
    listen: Listening


class TuneUp(Block):
    """A full carrier for tuning."""

    power: Power
    time: Duration


class Transmission(Block):
    """One way the loop is used."""

    name: Name | None = None
    frequency: Frequency
    power: Power | None = None
    carrier_power: Power | None = None
    mode: Literal["SSB", "SSB unprocessed", "CW", "AM", "FM", "data"] | None = None
    duty: Share | None = None
    signal_bandwidth: Annotated[float, Quantity(FREQUENCY, 1.0, 1e6)] | None = None
    over: Over | None = None
    on_air_share: Share | None = None
    tune_up: TuneUp | None = None

    @property
    def envelope_power(self) -> float:
        """Peak envelope power at the transmitter [W]; of full AM, four times the carrier."""
        if self.power is not None:
            return self.power
        return AM_CREST * (self.carrier_power or 0.0)


class SoilConstants(Block):
    """Soil given by its constants."""

    conductivity: Annotated[
        Uncertain,
        UncertainQuantity(CONDUCTIVITY, 1e-6, 100.0, '{ low = "1 mS/m", likely = "5 mS/m", high = "20 mS/m" }'),
    ]
    permittivity: Annotated[Uncertain, UncertainQuantity(None, 1.0, 100.0, "{ low = 5, likely = 13, high = 25 }")]


def _ground_tag(value: Any) -> str:
    return "<constants>" if isinstance(value, dict) else "<name>"


Ground = Annotated[
    Annotated[GroundName, Tag("<name>")] | Annotated[SoilConstants, Tag("<constants>")],
    Discriminator(_ground_tag),
]


class Site(Block):
    """What is under and round the loop, and which rules hold there."""

    ground: Ground | None = None
    floors: Annotated[list[Height], Field(min_length=1, max_length=20)] | None = None
    altitude: Annotated[float, Quantity(POSITION, -500.0, 6000.0)] | None = None
    air_temperature: Temperature | None = None
    metal_within: Annotated[float, Quantity(LENGTH, 0.0, 1000.0)] | None = None
    rules: Annotated[list[RuleName], Field(max_length=20)] = []
    sessions: Annotated[list[Annotated[list[Name], Field(min_length=2, max_length=100)]], Field(max_length=20)] = []
    over_the_body: Literal["worst point", "mean of squares"] = "worst point"


class Place(Block):
    """Where somebody can be."""

    name: Name
    who: Literal["trained", "public"]
    along_axis: PlaceDistance | None = None
    in_plane: PlaceDistance | None = None
    across: PlaceDistance | None = None
    posture: Literal["standing", "sitting", "lying"] | None = None
    floor: Height | None = None
    height: Height | None = None
    fence: Annotated[float, Quantity(LENGTH, 0.1, 1000.0)] | None = None
    when: Literal["always", "tuning"] = "always"


class Probe(Block):
    """What a field probe read, RMS of all components, while a steady carrier of this power at the transmitter was on.

    `uncertainty` is the instrument's expanded one, in decibels of field.
    """

    name: Name | None = None
    place: Name | None = None
    along_axis: PlaceDistance | None = None
    in_plane: PlaceDistance | None = None
    across: PlaceDistance | None = None
    height: Height | None = None
    transmission: Name | None = None
    power: Power
    electric: Annotated[float, Quantity(ELECTRIC_FIELD, 1e-3, 100e3)] | None = None
    magnetic: Annotated[float, Quantity(MAGNETIC_FIELD, 1e-6, 1e3)] | None = None
    uncertainty: Annotated[float, Quantity(DECIBEL, 0.1, 10.0)]
    date: Name | None = None

    @property
    def uncertainty_ratio(self) -> float:
        """The uncertainty as a ratio of fields."""
        return float(10.0 ** (self.uncertainty / 20.0))

    def label(self, index: int) -> str:
        """Return what the probe at this index in the file is called: its name, its place, or its number."""
        return self.name or self.place or f"probe {index + 1}"


class Margins(Block):
    """What is asked beyond the limit, as ratios; decibels are of field and of volts."""

    voltage: Annotated[float, Field(ge=1.0, le=10.0)] = 1.5
    current: Annotated[float, Field(ge=1.0, le=10.0)] = 1.25
    temperature: Annotated[float, Field(ge=1.0, le=10.0)] = 1.25
    exposure: Annotated[float, Quantity(DECIBEL, 0.0, 20.0)] = 2.0
    overshoot: Annotated[float, Quantity(DECIBEL, 0.0, 6.0)] = 0.0

    @property
    def exposure_ratio(self) -> float:
        """The exposure margin as a ratio of fields."""
        return float(10.0 ** (self.exposure / 20.0))

    @property
    def overshoot_ratio(self) -> float:
        """The overshoot as a ratio of volts."""
        return float(10.0 ** (self.overshoot / 20.0))


def _as_tuple(value: Any) -> Any:
    return tuple(value) if isinstance(value, list) else value


class Measured(Block):
    """What an instrument said of the loop as built, at one resonance; `magsafe measured --save` writes it.

    `unloaded_q` is a 95 % interval about the likely value, `coupling` the load that the feed puts on the loop over the
    loop's own, `tuned_for` the frequency of the transmission, whose padding was joined, `line_loss` what was unfolded,
    `notes` what speaks against the reading. `design` tells which loop was measured (`as_built.identity`); `points` are
    frequency, real and imaginary part of the reflection at the loop's own terminals, for a picture.
    """

    frequency: Frequency | None = None
    unloaded_q: QualityFactor | None = None
    coupling: Coupling | None = None
    by: Literal["sweep", "points of one SWR", "half-power points"] | None = None
    tuned_for: Frequency | None = None
    line_loss: Loss | None = None
    notes: Annotated[list[Name], Field(max_length=20)] = []
    date: Name | None = None
    centre_height: Annotated[float, Quantity(LENGTH, 0.0, 500.0)] | None = None
    ground: Name | None = None
    design: Name | None = None
    points: Annotated[
        list[Annotated[tuple[Frequency, Reflection, Reflection], BeforeValidator(_as_tuple)]], Field(max_length=201)
    ] = []


def _as_list(value: Any) -> Any:
    return [value] if isinstance(value, dict) else value


def _or_one(made: dict[str, Any]) -> None:
    """Let the JSON schema of a list take one entry alone, as `_as_list` does."""
    listed = {key: made.pop(key) for key in ("type", "items", "maxItems")}
    made["anyOf"] = [listed, listed["items"]]


class DesignFile(Block):
    """A whole design file."""

    schema_name: Annotated[Literal["magsafe.design/1"], Field(alias="schema")]
    station: Station = Station()
    loop: Loop
    capacitor: Capacitor
    tuning: Tuning = Tuning()
    feed: Feed = Feed()
    transmission: Annotated[list[Transmission], Field(min_length=1, max_length=100)]
    site: Site = Site()
    place: Annotated[list[Place], Field(max_length=200)] = []
    probe: Annotated[list[Probe], Field(max_length=200)] = []
    margins: Margins = Margins()
    measured: Annotated[
        list[Measured], Field(max_length=100, json_schema_extra=_or_one), BeforeValidator(_as_list)
    ] = []


def titles_of(transmissions: Sequence[tuple[str | None, float]]) -> tuple[str, ...]:
    """Return what transmissions with these names and frequencies [Hz] are called."""
    plain = [name or f"{frequency / 1e6:.6g} MHz" for name, frequency in transmissions]
    return tuple(title if plain.count(title) == 1 else f"{title} ({index})" for index, title in enumerate(plain, 1))


@dataclass(frozen=True, slots=True)
class Origin:
    """Where a design was read: the file's name without its folder, the hash of its bytes, its text."""

    name: str
    sha256: str
    text: str


class Design(DesignFile):
    """A design that was read and found consistent, with where it is from."""

    origin: Origin

    @property
    def titles(self) -> tuple[str, ...]:
        """What each transmission is called: its name, or its frequency; numbered where that is not its own."""
        return titles_of([(each.name, each.frequency) for each in self.transmission])

    @property
    def ground_name(self) -> str | None:
        """`none`, `perfect`, a row of the soil table, `as given`, or None where nothing is stated."""
        ground = self.site.ground
        return "as given" if isinstance(ground, SoilConstants) else ground

    def __repr__(self) -> str:
        used = ", ".join(f"{each.frequency / 1e6:.9g} MHz" for each in self.transmission[:4])
        more = len(self.transmission) - 4
        also = f" and {more} more" if more > 0 else ""
        return f"<Design {self.origin.name[:60]!r}: {self.loop.shape}, {self.capacitor.kind}; {used}{also}>"

    __str__ = __repr__
