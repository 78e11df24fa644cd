"""Average power over a rule's averaging time.

A rule averages the square of the field, hence power, over *any* window of its averaging time, so
the window that catches most of the transmission counts. What averages down the envelope's power:
the duty of the mode while keyed, and the share of that window that is keyed. Where a rule does not
average, neither helps.
"""

from dataclasses import dataclass
from functools import cache
from math import isfinite
from pathlib import Path
from typing import Literal, assert_never

from magsafe.rules.segment import NOT_AVERAGED
from magsafe.rules.table import (
    FREQUENCY_UNITS,
    SHARE_UNITS,
    Entries,
    TableError,
    UnknownName,
    parse_toml,
)

ON_AIR_SHARE_WINDOW = 360.0  # [s] an on-air share is told as the largest share of any 6 minutes

Evidence = Literal["verified", "derived", "common practice"]
EVIDENCE: tuple[Evidence, ...] = ("verified", "derived", "common practice")

_FILE = Path(__file__).parent / "modes.toml"


class UnknownMode(UnknownName):
    """No mode of that name; `nearest` and `known` say which there are."""


@dataclass(frozen=True, slots=True)
class Mode:
    """A mode of transmission: mean power over envelope power while keyed, and its bandwidth.

    `duty` is a share 0..1; `signal_bandwidth` is in Hz, None where the mode does not tell.
    """

    name: str
    meaning: str
    duty: float
    duty_source: str
    duty_evidence: Evidence
    duty_evidence_detail: str
    signal_bandwidth: float | None
    bandwidth_source: str


@dataclass(frozen=True, slots=True)
class Over:
    """The longest over and the pause after it [s]; no pause between two overs is shorter."""

    transmit: float
    listen: float

    def __post_init__(self) -> None:
        _require_positive("transmit", self.transmit)
        if not (isfinite(self.listen) and self.listen >= 0):
            raise ValueError(f"listen must be zero or more seconds, found {self.listen!r}")


@dataclass(frozen=True, slots=True)
class OnAirShare:
    """The largest share, above 0 and up to 1, of any 6 minutes that is keyed."""

    share: float

    def __post_init__(self) -> None:
        if not 0 < self.share <= 1:
            raise ValueError(f"share must be above 0 and up to 1, found {self.share!r}")


@dataclass(frozen=True, slots=True)
class TuneUp:
    """One unbroken carrier of so many seconds, with no second one in the same window."""

    time: float

    def __post_init__(self) -> None:
        _require_positive("time", self.time)


Pattern = Over | OnAirShare | TuneUp


def mode_names() -> tuple[str, ...]:
    """Names of the modes in the table, in its order."""
    return tuple(_modes())


def mode_named(name: str) -> Mode:
    """The mode of that name; UnknownMode, with the nearest names, where there is none."""
    try:
        return _modes()[name]
    except KeyError:
        raise UnknownMode("mode", name, _modes()) from None


def mode_duty(name: str) -> float:
    """Mean power over envelope power of a mode while keyed, 0..1; UnknownMode as above."""
    return mode_named(name).duty


def worst_window_share(transmit: float, listen: float, window: float) -> float:
    """The largest share of any window that overs and pauses in turn can fill.

    Parameters
    ----------
    transmit : longest over, above zero [s]
    listen : shortest pause between two overs, zero or more [s]
    window : averaging time, above zero [s]

    Returns
    -------
    share keyed of the worst window, 0..1

    Valid     exact where no over is longer than `transmit` and no pause shorter than `listen`.
              A window that meets n overs holds at most n transmit, and at most the window less
              (n - 1) listen; the best n is whole periods and one more over, which is what longest
              overs and shortest pauses in turn reach from the start of an over on. So shorter
              overs with pauses of at least `listen` are covered. Shorter overs with pauses
              shortened alike are not: see worst_window_share_of_shorter_overs.
    Source    derived here; the recipe (worst fraction of the averaging time on the air) is that
              of FCC OET Bulletin 65 Supplement B, Ed. 97-01.
    """
    over = Over(transmit, listen)
    _require_positive("window", window)
    periods, rest = divmod(window, over.transmit + over.listen)
    return min(1.0, (periods * over.transmit + min(rest, over.transmit)) / window)


def worst_window_share_of_shorter_overs(transmit: float, listen: float, window: float) -> float:
    """The largest share of any window when overs, and their pauses with them, may be shorter.

    Parameters
    ----------
    transmit : longest over, above zero [s]
    listen : pause after the longest over; a shorter over has a pause shorter in proportion [s]
    window : averaging time, above zero [s]

    Returns
    -------
    share keyed of the worst window, 0..1, never below that of worst_window_share

    Valid     exact where each over of length a, at most `transmit`, is followed by a pause of at
              least a listen / transmit. The worst window ends with a longest over whose pause it
              just misses, and before that is filled in proportion.
    Source    derived here.
    """
    over = Over(transmit, listen)
    _require_positive("window", window)
    proportion = over.transmit / (over.transmit + over.listen)
    return min(1.0, proportion + (1 - proportion) * min(over.transmit, window) / window)


def window_share(pattern: Pattern | None, averaging_time: float) -> float:
    """The largest share of any window of a rule's averaging time that is keyed.

    Parameters
    ----------
    pattern : how the station is on the air; None: always
    averaging_time : of the rule, 0 where it does not average [s]

    Returns
    -------
    share keyed of the worst window, 0..1; 1 where the rule does not average

    Valid     `Over`: as worst_window_share. `OnAirShare`: exact for every window; whole sixes of
              minutes hold the share each, what is left over holds no more than itself and no more
              than the share of one six. `TuneUp`: one carrier per window, nothing else keyed in
              it; where overs are keyed in the same window, the averaged powers of both add up.
    Source    derived here.
    """
    if averaging_time == NOT_AVERAGED:
        return 1.0
    _require_positive("averaging_time", averaging_time)
    match pattern:
        case None:
            return 1.0
        case Over(transmit, listen):
            return worst_window_share(transmit, listen, averaging_time)
        case OnAirShare(share):
            keyed = share * ON_AIR_SHARE_WINDOW
            return worst_window_share(keyed, ON_AIR_SHARE_WINDOW - keyed, averaging_time)
        case TuneUp(time):
            return min(1.0, time / averaging_time)
        case _:
            assert_never(pattern)


def averaged_power(envelope_power: float, duty: float, share: float) -> float:
    """Power averaged over a window.

    Parameters
    ----------
    envelope_power : at the crest of the envelope, zero or more [W]
    duty : mean over envelope power while keyed, 0..1 [1]
    share : keyed share of the window, 0..1 [1]

    Returns
    -------
    averaged power, never above `envelope_power` [W]

    Valid     thermal bases, whose rules average the square of the field.
    Source    FCC OET Bulletin 65 Supplement B, Ed. 97-01 (as quoted in a public regulatory note).
    """
    if not (isfinite(envelope_power) and envelope_power >= 0):
        raise ValueError(f"envelope_power must be zero or more watts, found {envelope_power!r}")
    for name, value in (("duty", duty), ("share", share)):
        if not 0 <= value <= 1:
            raise ValueError(f"{name} must lie in 0..1, found {value!r}")
    return envelope_power * duty * share


def judged_power(envelope_power: float, duty: float, pattern: Pattern | None, averaging_time: float) -> float:
    """The power that a limit of a given averaging time looks at.

    Parameters
    ----------
    envelope_power : at the crest of the envelope; for a `TuneUp` that of its carrier [W]
    duty : mean over envelope power while keyed, 1 for a tune-up carrier, 0..1 [1]
    pattern : how the station is on the air; None: always
    averaging_time : of the limit, 0 where it does not average [s]

    Returns
    -------
    power averaged over the worst window, or the full envelope where nothing is averaged [W]

    Valid     as window_share.
    Source    ICNIRP 2010 (levels against stimulation are not to be time averaged); FCC OET
              Bulletin 65 Supplement B for the average.
    """
    averaged = averaged_power(envelope_power, duty, window_share(pattern, averaging_time))
    return envelope_power if averaging_time == NOT_AVERAGED else averaged


def parse_modes(content: bytes, file: str) -> dict[str, Mode]:
    """The mode table from the bytes of its file; TableError tells everything wrong with it."""
    problems: list[str] = []
    head = Entries("head", parse_toml(content, file, TableError), problems)
    rows = [_read_mode(each) for each in head.tables("mode")]
    head.refuse_leftover()
    modes = {row.name: row for row in rows}
    if len(modes) < len(rows):
        head.note("two modes share a name")
    if problems:
        raise TableError(file, problems)
    return modes


@cache
def _modes() -> dict[str, Mode]:
    return parse_modes(_FILE.read_bytes(), _FILE.name)


def _read_mode(entries: Entries) -> Mode:
    bandwidth = entries.optional_quantity("signal_bandwidth", FREQUENCY_UNITS)
    mode = Mode(
        name=entries.text("name"),
        meaning=entries.text("meaning"),
        duty=entries.quantity("duty", SHARE_UNITS),
        duty_source=entries.text("duty_source"),
        duty_evidence=entries.word("duty_evidence", EVIDENCE),
        duty_evidence_detail=entries.text("duty_evidence_detail"),
        signal_bandwidth=bandwidth,
        bandwidth_source="" if bandwidth is None else entries.text("bandwidth_source"),
    )
    entries.refuse_leftover()
    if mode.duty <= 0 or mode.duty > 1:
        entries.note("duty must be above 0 % and up to 100 %")
    if bandwidth is not None and bandwidth <= 0:
        entries.note("signal_bandwidth must be above zero")
    return mode


def _require_positive(name: str, seconds: float) -> None:
    if not (isfinite(seconds) and seconds > 0):
        raise ValueError(f"{name} must be above zero seconds, found {seconds!r}")
