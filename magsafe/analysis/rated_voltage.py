"""What a capacitor's stated voltage rating allows as the crest of the RF, with every factor as a row."""

from dataclasses import dataclass
from math import sqrt

from magsafe.analysis.gap import AIR_KINDS, site_air, trapped_in_any_gap
from magsafe.design.model import Design
from magsafe.design.ratings import conversion
from magsafe.physics.atmosphere import relative_air_density, standard_pressure
from magsafe.physics.deratings import Derating, product

RATED_TO = 1000.0  # m, to which a rating is taken to hold as it stands

_ALTITUDE = "common practice: ratings hold to 1000 m; flash-over outside falls with the density of the air"


@dataclass(frozen=True, slots=True)
class RatedVoltage:
    """A rating as the crest of the RF at one site and frequency.

    `allowed` is that crest [V], `crest` the rating as it stands, of an RMS rating its crest; `rows` go from one to the
    other. `told` says in words what was done, empty where the rating holds as it stands; `thin` tells that this rests
    on too little for a clear verdict. `source` is what it rests on.
    """

    crest: float
    rows: tuple[Derating, ...]
    told: str
    thin: bool
    source: str

    @property
    def provenance(self) -> str:
        """What the limit rests on."""
        rests = dict.fromkeys(row.evidence for row in self.rows)
        return f"stated in the design, converted: {', '.join(rests)}" if rests else "stated in the design"

    @property
    def allowed(self) -> float:
        """Crest of the RF that the rating allows [V]."""
        return self.crest * product(self.rows)


def not_rated(design: Design) -> str:
    """Return why the stated rating tells nothing at radio frequency; empty where it does."""
    part = design.capacitor
    if part.rated_voltage is None:
        return "capacitor.rated_voltage is not given"
    kind = part.rated_voltage_kind
    if kind is None:
        return "capacitor.rated_voltage_kind is not given: the rating may be of peak RF, RMS RF or DC"
    if kind.startswith("DC") and conversion(part.kind, kind) is None:
        return f"the rating is a {kind} voltage; of a {part.kind} capacitor that tells nothing at radio frequency"
    return ""


def altitude_derating(design: Design) -> Derating | None:
    """Return what the site's thin air takes off any voltage rating; None to 1000 m, and where no altitude is stated."""
    altitude = design.site.altitude
    if altitude is None or altitude <= RATED_TO:
        return None
    factor = float(standard_pressure(altitude) / standard_pressure(RATED_TO))
    name = f"air at {altitude:.5g} m, thinner than at {RATED_TO:g} m"
    return Derating(name, factor, _ALTITUDE, "common practice")


def rated_voltage(design: Design, frequency: float) -> RatedVoltage:
    """Return what a capacitor's rating allows.

    Parameters
    ----------
    design : one with a rating that tells something (`not_rated` is empty)
    frequency : [Hz]

    Returns
    -------
    RatedVoltage; never higher at a higher site

    Raises
    ------
    ValueError : the rating tells nothing

    Valid     a sound part, clean and dry. A direct voltage beside the RF is not counted.
    Source    rows of `ratings.toml`; above 1000 m common practice.
    """
    part = design.capacitor
    stated, kind = part.rated_voltage, part.rated_voltage_kind
    if missing := not_rated(design):
        raise ValueError(missing)
    if stated is None or kind is None:
        raise ValueError("no rating")
    crest = stated * sqrt(2.0) if kind == "RMS RF" else stated
    rows: list[Derating] = []
    told: list[str] = []
    thin, source = False, "the capacitor's rating as stated"
    found = conversion(part.kind, kind)
    if found is not None:
        rows.append(Derating(f"crest of the RF over a {kind} rating", found.factor, found.source, found.provenance))
        reserve = f": {found.reserve}" if found.reserve else ""
        told.append(f"{found.factor:g} of the {kind} rating is taken as peak RF ({found.source}){reserve}")
        thin, source = bool(found.reserve), f"{source}; {found.source}"
        if part.kind in AIR_KINDS:
            turned = trapped_in_any_gap(frequency, float(relative_air_density(*site_air(design))))
            rows += [turned] if turned.factor < 1.0 else []
    thinner = altitude_derating(design)
    if thinner is not None:
        rows.append(thinner)
        told.append(f"{thinner.factor:.3g} of it is taken in {thinner.name} ({thinner.source})")
        thin = True
    return RatedVoltage(crest, tuple(rows), "; ".join(told), thin, source)
