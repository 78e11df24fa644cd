"""Field types of the design file: a text with a unit comes in, an SI float or an `Uncertain` goes on."""

from dataclasses import dataclass
from typing import Any

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic_core import CoreSchema, PydanticCustomError, core_schema

from magsafe.units import Kind, QuantityError, read_quantity

_NUMBER = r"^ *-?[0-9]+(\.[0-9]+)? ?"
_ENDS = ("low", "likely", "high")
# Signs that look like a letter: the reader takes either for the other.
_TWINS = {0x00B5: "[\u00b5\u03bc]", 0x03A9: "[\u03a9\u2126]"}


def _schema_text(kind: Kind) -> dict[str, Any]:
    units = "|".join(unit.replace("/", "\\/") for unit in kind.units).translate(_TWINS)
    return {
        "type": "string",
        "pattern": f"{_NUMBER}({units}) *$",
        "examples": [kind.example],
        "description": f"{kind.name}: a decimal number and a unit",
    }


def field_error(*problems: tuple[str, str, str, str]) -> PydanticCustomError:
    """Return one pydantic error that carries (path below the field, found, expected, do) for each problem."""
    return PydanticCustomError("design", "{count} problems", {"count": len(problems), "problems": problems})


@dataclass(frozen=True, slots=True)
class Uncertain:
    """A quantity as stated: a single value, or low, likely and high, in SI units.

    `single` tells that only one value was written: whether that counts as its low end too depends on what it
    is used for.
    """

    low: float
    likely: float
    high: float
    single: bool = False


@dataclass(frozen=True)
class Quantity:
    """Annotation of a field that holds `"<decimal number> <unit>"` and becomes an SI float."""

    kind: Kind
    least: float | None = None
    most: float | None = None

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        """Return a plain validator: the text is never read by anybody else."""
        return core_schema.no_info_plain_validator_function(self.read)

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> dict[str, Any]:
        """Return what an editor may check: the form, not the size."""
        return _schema_text(self.kind)

    def read(self, value: object) -> float:
        """Return the value in SI units."""
        try:
            return read_quantity(value, self.kind, self.least, self.most)
        except QuantityError as error:
            raise field_error(("", show(value), error.expected, error.do)) from None


@dataclass(frozen=True)
class UncertainQuantity:
    """Annotation of a field that holds a quantity, or a table of low, likely and high.

    With `kind` None the values are bare numbers without a unit.
    """

    kind: Kind | None
    least: float | None = None
    most: float | None = None
    example: str = '{ low = "0.2 mohm", likely = "0.5 mohm", high = "2 mohm" }'

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        """Return a plain validator that yields `Uncertain`."""
        return core_schema.no_info_plain_validator_function(self.read)

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> dict[str, Any]:
        """Return the two forms."""
        one = {"type": "number"} if self.kind is None else _schema_text(self.kind)
        table = {
            "type": "object",
            "properties": dict.fromkeys(_ENDS, one),
            "required": list(_ENDS),
            "additionalProperties": False,
        }
        return {"anyOf": [one, table]}

    def read(self, value: object) -> Uncertain:
        """Return the stated values in SI units."""
        if not isinstance(value, dict):
            likely = self._one(value, "")
            return Uncertain(likely, likely, likely, single=True)
        strange = [key for key in value if key not in _ENDS]
        problems = [(f".{key}", show(value[key]), "low, likely and high only", "remove it") for key in strange]
        known: dict[str, float] = {}
        for key in _ENDS:
            if key not in value:
                problems.append(("", show(value), f"low, likely and high, as in {self.example}", f"add {key}"))
                continue
            try:
                known[key] = self._one(value[key], f".{key}")
            except PydanticCustomError as error:
                problems.extend((error.context or {})["problems"])
        if not problems and not known["low"] <= known["likely"] <= known["high"]:
            problems.append(("", show(value), "low <= likely <= high", "put the values in order"))
        if problems:
            raise field_error(*problems)
        return Uncertain(known["low"], known["likely"], known["high"])

    def _one(self, value: object, path: str) -> float:
        if self.kind is not None:
            try:
                return read_quantity(value, self.kind, self.least, self.most)
            except QuantityError as error:
                raise field_error((path, show(value), error.expected, error.do)) from None
        expected = "a number without a unit"
        if isinstance(value, bool) or not isinstance(value, int | float):
            raise field_error((path, show(value), expected, "write a plain number, such as 1000"))
        # Compared before it is made a float, which a number of hundreds of digits cannot be; NaN fails here too.
        least, most = self.least or 0.0, self.most or 0.0
        if not least <= value <= most:
            raise field_error((path, show(value), f"{expected} from {least:g} to {most:g}", "check it"))
        return float(value)


def printable(text: str) -> str:
    """Return a text with nothing in it that moves a terminal or that UTF-8 cannot hold."""
    return "".join(c if c.isprintable() else repr(c)[1:-1] for c in text)


def show(value: object) -> str:
    """Return what was found, short enough for a message and with nothing in it that moves a terminal."""
    if isinstance(value, str):
        text = f'"{printable(value[:60])}"'
        return text if len(value) <= 60 else f'{text[:-1]}..." ({len(value)} characters)'
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int) and value.bit_length() > 200:
        return f"a number of about {value.bit_length() * 3 // 10} digits"
    if isinstance(value, dict):
        return (
            "an empty table"
            if not value
            else f"a table of {', '.join(show(str(k)[:20])[1:-1] for k in list(value)[:4])}"
        )
    if isinstance(value, list):
        return f"a list of {len(value)}"
    text = str(value)
    return text if len(text) <= 60 else f"{text[:57]}..."
