"""Units at the door: the one registry, reading of quantities, and numbers as they are printed.

A user's text never reaches pint's expression parser, which evaluates it. One regular expression splits number
and unit, the unit is looked up among the spellings its field accepts, and only then is it converted to SI.
"""

import re
from dataclasses import dataclass
from difflib import get_close_matches
from functools import cache, lru_cache
from math import isfinite, log10
from pathlib import Path

import pint

_TEXT_LIMIT = 48
_SPLIT = re.compile(r"(-?[0-9]+(?:\.[0-9]+)?) ?([A-Za-zµΩ°%/]{1,16}2?)")
# The micro sign and the letter mu look the same, and so do the ohm sign and the letter omega.
_SAME_LOOKS = {0x03BC: 0x00B5, 0x2126: 0x03A9}
# Squares are ours: pint reads the prefix of cm2 as that of the whole.
_OWN_FACTORS = {"%": 0.01, "dB": 1.0, "m2": 1.0, "cm2": 1e-4, "mm2": 1e-6}


@cache
def registry() -> "pint.UnitRegistry[float]":
    """Return the one registry, made when it is first asked for from a short unit file of our own."""
    made: pint.UnitRegistry[float] = pint.UnitRegistry(None)
    made.load_definitions(Path(__file__).with_name("units.txt"))
    return made


@dataclass(frozen=True, slots=True)
class Kind:
    """What a field measures: its name with article, SI unit, accepted spellings, an example.

    `instead` is what to answer to the unit of something else that people write here: (pattern of the unit, advice).
    """

    name: str
    si: str
    units: tuple[str, ...]
    example: str
    signed: bool = False
    instead: tuple[tuple[str, str], ...] = ()


LENGTH = Kind("a length", "m", ("m", "cm", "mm", "um", "µm", "km", "in", "ft"), "22 mm")
POSITION = Kind("a position", "m", LENGTH.units, "1.2 m", signed=True)
AREA = Kind("an area", "m2", ("m2", "cm2", "mm2"), "100 cm2")
FREQUENCY = Kind("a frequency", "Hz", ("Hz", "kHz", "MHz", "GHz"), "7.1 MHz")
POWER = Kind("a power", "W", ("W", "mW", "kW"), "100 W")
REACTIVE_POWER = Kind("a reactive power", "W", ("W", "kW", "VA", "kVA", "var", "kvar"), "5 kVA")
VOLTAGE = Kind("a voltage", "V", ("V", "mV", "kV"), "4 kV")
CURRENT = Kind("a current", "A", ("A", "mA"), "20 A")
RESISTANCE = Kind(
    "a resistance",
    "ohm",
    ("ohm", "mohm", "uohm", "kohm", "Ω", "mΩ", "µΩ", "kΩ"),
    "0.5 mohm",
)
CAPACITANCE = Kind("a capacitance", "F", ("pF", "nF", "uF", "µF", "F"), "47 pF")
CONDUCTIVITY = Kind("a conductivity", "S/m", ("S/m", "MS/m", "mS/m", "kS/m"), "58 MS/m")
_NOT_A_FIELD = (
    (r"dB.*", "write the field itself, not decibels over something"),
    (r".?W.*", "write the field that the probe senses, not a power density"),
)
ELECTRIC_FIELD = Kind(
    "an electric field",
    "V/m",
    ("V/m", "mV/m", "kV/m"),
    "12 V/m",
    instead=(
        (r".?(A/m|T|G)|.*([Tt]esla|[Gg]auss)", "that is a magnetic field: write it as magnetic, in A/m"),
        *_NOT_A_FIELD,
    ),
)
MAGNETIC_FIELD = Kind(
    "a magnetic field",
    "A/m",
    ("A/m", "mA/m", "uA/m", "µA/m"),
    "0.05 A/m",
    instead=(
        (r".?T|.*[Tt]esla", "that is a flux density: write the field in A/m, 1 uT is 0.796 A/m"),
        (r".?G|.*[Gg]auss", "that is a flux density: write the field in A/m, 1 G is 79.6 A/m"),
        (r".?V/m", "that is an electric field: write it as electric"),
        *_NOT_A_FIELD,
    ),
)
TEMPERATURE = Kind("a temperature", "K", ("degC", "°C", "K"), "20 degC", signed=True)
DURATION = Kind("a time", "s", ("s", "min", "h"), "3 min")
SHARE = Kind("a share", "1", ("%",), "40 %")
DECIBEL = Kind("a ratio in decibels", "dB", ("dB",), "0.3 dB")


class QuantityError(ValueError):
    """A text that is not the quantity its field asks for: what was expected, what to do."""

    def __init__(self, expected: str, do: str) -> None:
        self.expected = expected
        self.do = do
        super().__init__(f"expected {expected}; {do}")


def read_quantity(value: object, kind: Kind, least: float | None = None, most: float | None = None) -> float:
    """Read `"<decimal number> <unit>"` and return it in the kind's SI unit.

    Parameters
    ----------
    value : what stands in the file
    kind : what the field measures
    least, most : the plausible range in SI units, both included; None leaves that side open

    Raises
    ------
    QuantityError : not such a text, another dimension, not finite, a sign the field cannot have, or a size
        outside the plausible range
    """
    return _read_text(_as_text(value, kind), kind, least, most)


def _as_text(value: object, kind: Kind) -> str:
    expected = f'{kind.name} with its unit, such as "{kind.example}"'
    if isinstance(value, bool) or not isinstance(value, str | int | float):
        raise QuantityError(expected, "write a number and a unit inside quotes")
    if not isinstance(value, str):
        raise QuantityError(expected, "add the unit, and put both inside quotes")
    return value


@lru_cache(maxsize=4096)
def _read_text(text: str, kind: Kind, least: float | None, most: float | None) -> float:
    expected = f'{kind.name} with its unit, such as "{kind.example}"'
    if len(text) > _TEXT_LIMIT:
        raise QuantityError(expected, "write one number and one unit, nothing else")
    text = text.strip(" ").translate(_SAME_LOOKS)
    match = _SPLIT.fullmatch(text)
    if match is None:
        raise QuantityError(expected, _advice(text, kind))
    number, unit = float(match[1]), match[2]
    if unit not in kind.units:
        raise QuantityError(f"{kind.name} in {', '.join(_distinct(kind.units))}", _unit_advice(match[1], unit, kind))
    si = _to_si(number, unit, kind)
    if not isfinite(si):
        raise QuantityError(expected, "write a finite number")
    if si < 0 and not kind.signed:
        raise QuantityError(f"{kind.name} that is not negative", "drop the minus sign")
    if (least is not None and si < least) or (most is not None and si > most):
        bounds = " and ".join(plain(b, kind) for b in (least, most) if b is not None)
        word = "between " if least is not None and most is not None else ""
        word = word or ("of at least " if most is None else "of at most ")
        raise QuantityError(f"{kind.name} {word}{bounds}", "check the number and its unit")
    return si


def _to_si(number: float, unit: str, kind: Kind) -> float:
    if unit in _OWN_FACTORS:
        return number * _OWN_FACTORS[unit]
    made = registry()
    return float(made.Quantity(number, made.Unit(unit)).m_as(kind.si))


def _distinct(units: tuple[str, ...]) -> list[str]:
    """Return the units to show in a message: without the symbols that a keyboard lacks, where letters do."""
    return [u for u in units if "Ω" not in u and "µ" not in u]


def _advice(text: str, kind: Kind) -> str:
    """Return what to write instead, for the slips that are known."""
    reading = f'write it in the form of "{kind.example}"'
    if re.search(r"[²³]", text):
        return "write squares with a plain 2, such as cm2"
    if text.isascii() is False and any(c.isdigit() and not c.isascii() for c in text):
        return "write the digits 0 to 9"
    if re.search(r"nan|inf", text, re.IGNORECASE):
        return "write a finite number"
    rules = (
        (r"[0-9],[0-9]", "write a decimal point instead of the comma"),
        ("\u2212", "write the minus sign of the keyboard, -"),
        (r"#[0-9]", 'write the diameter instead of the gauge, such as "2.05 mm"'),
        (
            r"['\"′″’”]",
            'write feet or inches as one decimal number, such as "3.25 ft" or "39.4 in"',
        ),
        (r"[0-9] ?/ ?[0-9]", 'write the fraction as a decimal number, such as "1.5 in"'),
        (r"^-?[0-9.]+[eE][-+]?[0-9]+", "write the number out, without an exponent"),
        (r"[*^()]| [-+] ", "write the result: nothing is worked out here"),
        (r"^-?[0-9]+(\.[0-9]+)?$", "add the unit"),
        (r"^-?\.[0-9]", "write a digit before the decimal point"),
        (r"^-?[0-9]+\.([^0-9]|$)", "write a digit after the decimal point"),
        (r"[0-9] ?[kmM]?V.*\b(DC|RF|RMS|peak|AC)\b", "write the volts alone, and their kind as rated_voltage_kind"),
        (r" {2,}", "leave at most one space between number and unit"),
    )
    for pattern, advice in rules:
        if re.search(pattern, text):
            return advice
    return reading


def _unit_advice(number: str, unit: str, kind: Kind) -> str:
    if unit.upper() in ("AWG", "SWG"):
        return 'write the diameter instead of the gauge, such as "2.05 mm"'
    for pattern, advice in kind.instead:
        if re.fullmatch(pattern, unit):
            return advice
    by_case = [u for u in kind.units if u.casefold() == unit.casefold()]
    if unit[:1] == "M" and by_case and by_case[0][:1] == "m":
        return "M is mega, a million: check the unit"
    aliases = {"ohms": "ohm", "watts": "W", "watt": "W", "volts": "V", "volt": "V", "amps": "A"}
    known = aliases.get(unit.casefold())
    near = by_case or ([known] if known in kind.units else [])
    near = near or get_close_matches(unit, kind.units, n=1, cutoff=0.6)
    if near:
        return f'did you mean "{number} {near[0]}"?'
    return f'write it in one of these, such as "{kind.example}"'


def plain(value: float, kind: Kind) -> str:
    """Return a value with the unit of the kind that suits its size, for messages."""
    if kind is TEMPERATURE:
        return f"{value - 273.15:g} degC"
    units = [u for u in _distinct(kind.units) if u not in ("in", "ft", "um", "cm", "µm", "GHz")]
    scaled = [(value / _to_si(1.0, u, kind), u) for u in units]
    whole = [(n, u) for n, u in scaled if 1 <= abs(n) < 1000]
    number, unit = whole[0] if whole else min(scaled, key=lambda s: abs(log10(abs(s[0]) or 1)))
    return f"{number:.6g} {unit}"


def magnitude(value: float, si: str, unit: str) -> float:
    """Return an SI value as a number of `unit`; `%` and `dBi`, of a gain as a ratio, are ours, not pint's."""
    if unit == si or unit in ("", "1"):
        return value
    if unit == "%":
        return value * 100.0
    if unit == "dBi":
        return 10.0 * log10(value)
    return value * _factor(si, unit)


@cache
def _factor(si: str, unit: str) -> float:
    made = registry()
    return float(made.Quantity(1.0, made.Unit(si)).m_as(unit))


def significant(value: float, digits: int = 3) -> str:
    """Return a number with so many significant digits, written out (no exponent)."""
    if value == 0:
        return "0"
    places = digits - 1 - int(f"{value:e}".split("e")[1])
    rounded = round(value, places)
    places = digits - 1 - int(f"{rounded:e}".split("e")[1])
    return f"{rounded:.{max(places, 0)}f}"
