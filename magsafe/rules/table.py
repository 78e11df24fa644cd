"""Reading a data table with provenance: every value typed, every problem told, no key left over."""

import tomllib
from collections.abc import Iterable, Mapping
from decimal import Decimal, InvalidOperation
from math import isfinite, nan
from typing import TypeVar

FREQUENCY_UNITS: Mapping[str, Decimal] = {
    "Hz": Decimal(1),
    "kHz": Decimal(10) ** 3,
    "MHz": Decimal(10) ** 6,
}
TIME_UNITS: Mapping[str, Decimal] = {"s": Decimal(1), "min": Decimal(60)}
LENGTH_UNITS: Mapping[str, Decimal] = {"m": Decimal(1), "cm": Decimal("0.01")}
POWER_UNITS: Mapping[str, Decimal] = {"W": Decimal(1), "mW": Decimal("0.001")}
SHARE_UNITS: Mapping[str, Decimal] = {"%": Decimal("0.01")}

Word = TypeVar("Word", bound=str)


class TableError(ValueError):
    """A data file is refused. `file` names it, `problems` holds all that is wrong with it."""

    def __init__(self, file: str, problems: Iterable[str]) -> None:
        self.file = file
        self.problems = tuple(problems)
        super().__init__("\n".join(f"{file}: {problem}" for problem in self.problems))


class UnknownName(LookupError):
    """A table has no row of the name asked for; `nearest` are the names that resemble it."""

    def __init__(self, kind: str, name: str, known: Iterable[str]) -> None:
        self.name = name
        self.known = tuple(known)
        self.nearest = nearest_names(name, self.known)
        hint = f"nearest: {', '.join(self.nearest)}" if self.nearest else "nothing resembles it"
        super().__init__(f"no {kind} {name!r}; {hint}; known: {', '.join(self.known)}")


def parse_toml(content: bytes, file: str, refusal: type[TableError]) -> dict[str, object]:
    """The tables of a TOML file from its bytes; `refusal` is raised where it is not TOML."""
    try:
        return tomllib.loads(content.decode())
    except (tomllib.TOMLDecodeError, UnicodeDecodeError) as error:
        raise refusal(file, [str(error)]) from None


def nearest_names(name: str, known: Iterable[str]) -> tuple[str, ...]:
    """Known names that resemble `name`, the nearest first, at most three; capitals do not count."""
    from difflib import get_close_matches  # noqa: PLC0415 (needed only once something is wrong)

    by_folded = {each.casefold(): each for each in known}
    return tuple(by_folded[match] for match in get_close_matches(name.casefold(), by_folded, n=3, cutoff=0.5))


def parse_quantity(text: str, units: Mapping[str, Decimal]) -> float:
    """SI value of a text such as "1.34 MHz"; decimal arithmetic, so that band edges meet exactly.

    Raises ValueError where the text is not a number, one space and one of `units`.
    """
    number, _, unit = text.partition(" ")
    if unit not in units:
        raise ValueError(f"{text!r} is not a number with one of the units {', '.join(units)}")
    try:
        value = float(Decimal(number) * units[unit])
    except InvalidOperation:
        raise ValueError(f"{number!r} in {text!r} is not a decimal number") from None
    if not isfinite(value):
        raise ValueError(f"{text!r} is not finite")
    return value


class Entries:
    """One TOML table while it is read.

    A missing or unfit value is noted in `problems` and replaced by a placeholder, so that all
    problems of a file come out together. Whoever reads must raise when `problems` is not empty:
    a placeholder never leaves the reader.
    """

    def __init__(self, where: str, content: Mapping[str, object], problems: list[str]) -> None:
        self.where = where
        self._left = dict(content)
        self._known: list[str] = []
        self._problems = problems

    def note(self, problem: str) -> None:
        """Note a problem of this table."""
        self._problems.append(f"{self.where}: {problem}")

    def has(self, key: str) -> bool:
        """Whether the key is there and not yet read."""
        return key in self._left

    def _take(self, key: str, required: bool = True) -> object | None:
        self._known.append(key)
        value = self._left.pop(key, None)
        if value is None and required:
            self.note(f"{key} is missing")
        return value

    def text(self, key: str, default: str | None = None) -> str:
        """A text that is not empty; `default` where the key may be left out."""
        value = self._take(key, required=default is None)
        if value is None:
            return default or ""
        if not isinstance(value, str) or not value.strip():
            self.note(f"{key} must be a text that is not empty, found {value!r}")
            return ""
        return value

    def word(self, key: str, allowed: tuple[Word, ...], default: Word | None = None) -> Word:
        """One word of a closed set; `default` where the key may be left out."""
        value = self._take(key, required=default is None)
        if value is None:
            return allowed[0] if default is None else default
        for each in allowed:
            if value == each:
                return each
        self.note(f"{key} must be one of {', '.join(allowed)}, found {value!r}")
        return allowed[0]

    def flag(self, key: str, default: bool | None = None) -> bool:
        """A true or false; `default` where the key may be left out."""
        value = self._take(key, required=default is None)
        if value is None:
            return bool(default)
        if not isinstance(value, bool):
            self.note(f"{key} must be true or false, found {value!r}")
            return bool(default)
        return value

    def texts(self, key: str) -> tuple[str, ...]:
        """A list of texts that are not empty, at least one; empty where the key is left out."""
        value = self._take(key, required=False)
        if value is None:
            return ()
        texts = [each for each in value if isinstance(each, str) and each.strip()] if isinstance(value, list) else []
        if not texts or not isinstance(value, list) or len(texts) != len(value):
            self.note(f"{key} must be a list of texts, at least one, found {value!r}")
        return tuple(texts)

    def number(self, key: str) -> float:
        """A finite number."""
        value = self._take(key)
        if value is None:
            return nan
        if isinstance(value, bool) or not isinstance(value, int | float) or not isfinite(value):
            self.note(f"{key} must be a finite number, found {value!r}")
            return nan
        return float(value)

    def quantity(self, key: str, units: Mapping[str, Decimal]) -> float:
        """A number with its unit, in SI."""
        return self._parsed(self.text(key), key, units)

    def optional_quantity(self, key: str, units: Mapping[str, Decimal]) -> float | None:
        """A number with its unit, in SI; None where the key is left out."""
        return self.quantity(key, units) if self.has(key) else None

    def quantities(self, key: str, units: Mapping[str, Decimal], count: int) -> tuple[float, ...]:
        """A list of exactly `count` numbers with their units, in SI."""
        value = self._take(key)
        if not isinstance(value, list) or len(value) != count:
            if value is not None:
                self.note(f"{key} must be a list of {count}, found {value!r}")
            return (nan,) * count
        return tuple(self._parsed(each, key, units) for each in value)

    def _parsed(self, value: object, key: str, units: Mapping[str, Decimal]) -> float:
        if value == "":
            return nan  # already noted as missing or empty
        try:
            return parse_quantity(str(value), units)
        except ValueError as error:
            self.note(f"{key}: {error}")
            return nan

    def tables(self, key: str) -> tuple["Entries", ...]:
        """A list of tables, at least one."""
        value = self._take(key)
        if value is None:
            return ()
        if not isinstance(value, list) or not value or not all(isinstance(v, dict) for v in value):
            self.note(f"{key} must be a list of tables, at least one")
            return ()
        return tuple(
            Entries(f"{self.where}, {key} {index}", each, self._problems) for index, each in enumerate(value, start=1)
        )

    def table(self, key: str) -> "Entries":
        """One table; what must be in it is missing where it is left out."""
        value = self._take(key, required=False)
        if not isinstance(value, dict):
            self.note(f"[{key}] is missing" if value is None else f"{key} must be a table, found {value!r}")
        return Entries(f"{self.where}, {key}", value if isinstance(value, dict) else {}, self._problems)

    def optional_tables(self, key: str) -> tuple["Entries", ...]:
        """A list of tables that may be left out."""
        return self.tables(key) if self.has(key) else ()

    def refuse_leftover(self) -> None:
        """Note every key that nobody asked for, with the nearest known one."""
        for key in self._left:
            near = nearest_names(key, self._known)
            self.note(f"unknown key {key}" + (f" (nearest: {near[0]})" if near else ""))
