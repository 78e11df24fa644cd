"""Numbers as people read them: three significant digits and one fixed unit for each kind of figure."""

from magsafe.spread import Spread
from magsafe.units import magnitude, significant

# SI unit -> unit shown. A share shows as a percentage where it is one; that is the caller's to say.
SHOWN = {
    "V": "kV",
    "A": "A",
    "ohm": "mΩ",
    "F": "pF",
    "H": "µH",
    "Hz": "kHz",
    "W": "W",
    "K": "K",
    "m": "m",
    "V/m": "V/m",
    "A/m": "A/m",
}
LIKELY_ABOUT = "…"


def shown_unit(si: str) -> str:
    """Return the unit in which a figure with this SI unit is shown."""
    return SHOWN.get(si, "" if si == "1" else si)


def amount(value: float, si: str, unit: str | None = None, qualifier: str = "") -> str:
    """Return a value with its unit: `7.95 kV peak`."""
    name = shown_unit(si) if unit is None else unit
    tail = f" {name}" if name else ""
    return f"{number(value, si, name)}{tail}{f' {qualifier}' if qualifier else ''}"


def number(value: float, si: str, unit: str) -> str:
    """Return a value of an SI unit as a number of the unit shown."""
    return significant(magnitude(value, si, unit))


def ends(spread: Spread, si: str, unit: str) -> str:
    """Return the ends of a spread, `(13 … 16)`; empty where they round to the likely value."""
    low = None if spread.low is None else number(spread.low, si, unit)
    high = None if spread.high is None else number(spread.high, si, unit)
    likely = None if spread.likely is None else number(spread.likely, si, unit)
    if low == high == likely or (low is None and high is None):
        return ""
    if low is None:
        return f"(at most {high})"
    if high is None:
        return f"(at least {low})"
    return f"({low} {LIKELY_ABOUT} {high})"


def against_limit(value: Spread, limit: float, si: str, dangerous: str, unit: str | None, qualifier: str = "") -> str:
    """Return a figure beside its limit, the dangerous end first: `7.9 kV at worst, 7.7 likely, limit 4 kV`."""
    name = shown_unit(si) if unit is None else unit
    end = value.high if dangerous == "high" else value.low
    worst = amount(end or 0.0, si, name, qualifier)
    likely = ""
    if value.likely is not None and number(value.likely, si, name) != number(end or 0.0, si, name):
        likely = f", {number(value.likely, si, name)} likely"
    bound = amount(limit, si, name, qualifier)
    return f"{worst} at worst{likely}, {f'limit {bound}' if dangerous == 'high' else f'at least {bound} is needed'}"


def watts(value: float) -> str:
    """Return a planned power as it was given, to six digits: `100 W`."""
    return f"{value:.6g} W"


def power(value: float) -> str:
    """Return an allowed power, rounded down to two digits: `20 W`."""
    return f"{floor_two_digits(value)} W"


def floor_two_digits(value: float) -> str:
    """Return a number >= 0 rounded down to two significant digits, written out."""
    if value <= 0.0:
        return "0"
    # The guard keeps a value that is a whole number of steps, but for its last bit, from losing a step.
    exponent = int(f"{value:e}".split("e")[1])
    step = 10.0 ** (exponent - 1)
    floored = int(value * (1.0 + 1e-12) / step) * step
    return f"{floored:.{max(1 - exponent, 0)}f}"


def duration(seconds: float) -> str:
    """Return a time span in whole minutes where it is that, else in seconds: `6 min`."""
    return f"{seconds / 60.0:g} min" if seconds % 60.0 == 0.0 else f"{seconds:.3g} s"


def short(text: str, most: int = 40) -> str:
    """Return a name that is too long for a line cut, with a mark that it is."""
    return text if len(text) <= most else f"{text[: most - 3]}..."


def frequency(hertz: float) -> str:
    """Return a frequency in MHz with all its digits: `7.1 MHz`."""
    return f"{magnitude(hertz, 'Hz', 'MHz'):.9g} MHz"


def slug(name: str) -> str:
    """Return a name as it stands in the id of a finding: letters, digits and hyphens, lower case."""
    kept = "".join(c if c.isalnum() else " " for c in name.casefold())
    return "-".join(kept.split())
