"""The first key-down in words: what comes first, the steps, what to watch, how long to wait, when to stop."""

from collections.abc import Iterator, Sequence
from math import ceil, floor, inf, log10

from scipy.constants import zero_Celsius

from magsafe import words
from magsafe.checks.cautions import least_touch, told_hot
from magsafe.checks.first_keydown import FirstKeydown
from magsafe.checks.sheet import Sheet
from magsafe.reports import telling
from magsafe.reports.page import Block, Heading, Items, Paragraph, Said, Table
from magsafe.spread import Spread
from magsafe.units import magnitude, significant

_MOST_BEFORE = 8
_MOST_NAMES = 6


def first_keydowns(sheet: Sheet, found: Sequence[FirstKeydown]) -> Iterator[Block]:
    """Yield the procedure of each transmission."""
    yield Heading("The first key-down")
    yield Paragraph(
        "Computed for this loop. It permits nothing; it tells in which order a licensed operator who has decided to "
        "key it may do so with the least to lose.",
        "small",
    )
    for each in found:
        if len(found) > 1:
            yield Heading(telling.use(sheet.operating_points[each.transmission]), 3)
        yield from _procedure(sheet, each)


def _procedure(sheet: Sheet, each: FirstKeydown) -> Iterator[Block]:
    yield from _before(sheet, each)
    if not each.steps:
        yield Paragraph(
            "No steps are told while something stops or is unproven. They come with the sheet on which nothing does.",
            "strong",
        )
        return
    yield Items(tuple(_preparing(sheet, each)), numbered=True)
    yield _steps(each)
    yield Items(tuple(_watching(each)))


def _before(sheet: Sheet, each: FirstKeydown) -> Iterator[Block]:
    if each.before:
        yield Said(sheet.verdict, "Before any key-down, and then compute a new sheet:", "strong")
        told = list(_to_do(each))
        rest = len(told) - _MOST_BEFORE
        more = (f"{rest} more: see Findings.",) if rest > 0 else ()
        yield Items((*told[:_MOST_BEFORE], *more))
    elif each.others:
        yield Said(
            sheet.verdict,
            "Before any key-down: put right what stands in the way of the other transmissions, or take them out of the "
            "design, and compute a new sheet.",
            "strong",
        )


def _to_do(each: FirstKeydown) -> Iterator[str]:
    """Yield what is to be done, once, with the findings that it puts right."""
    found: dict[str, list[str]] = {}
    for finding in each.before:
        found.setdefault(finding.do, []).append(_of(finding.id, finding.place))
    for do, names in found.items():
        yield f"{do[0].upper()}{do[1:]}: {', '.join(names)}."


def _of(name: str, place: str | None) -> str:
    return f"{words.short(name, 60)}{f' ({words.short(place)})' if place else ''}"


def _preparing(sheet: Sheet, each: FirstKeydown) -> Iterator[str]:
    """Yield what is done before the first carrier, in order."""
    point = sheet.operating_points[each.transmission]
    off = [f"{'the public' if who == 'public' else 'trained people'} {_metres(far)}" for who, far in each.keep_off]
    if off:
        yield (
            f"Keep people off, in any direction from the loop: {', '.join(off)}. These are the distances of an "
            f"unbroken carrier at {words.watts(point.power)}."
        )
    else:
        yield "Keep everybody off: no distance is known."
    if each.empty:
        names = [words.short(name) for name in each.empty[:_MOST_NAMES]]
        more = f" and {len(each.empty) - _MOST_NAMES} more" if len(each.empty) > _MOST_NAMES else ""
        yield f"Leave empty until the last carrier is over: {', '.join(names)}{more}."
    where = words.frequency(each.resonance)
    if each.capacitance is None and each.width is None:
        yield f"Measure the SWR at {where} with an analyser before any carrier."
        return
    tuned = f" with {_spread(each.capacitance, 'F', 'pF')} in the capacitor" if each.capacitance else ""
    wide = f"; it is {_spread(each.width, 'Hz', 'kHz')} wide between the points of SWR 2" if each.width else ""
    yield (
        f"Tune without transmitter, by analyser or by the noise in the receiver, to {where}. Expect resonance{tuned}"
        f"{wide}. Where it is found elsewhere, the loop is not the one computed: stop."
    )


def _metres(found: float | None) -> str:
    return "as far as there is room, since the search did not bound it" if found is None else f"{found:.1f} m"


def _spread(found: Spread, si: str, unit: str) -> str:
    likely = "?" if found.likely is None else words.number(found.likely, si, unit)
    return f"{' '.join(part for part in (likely, words.ends(found, si, unit)) if part)} {unit}"


def _steps(found: FirstKeydown) -> Table:
    where = "capacitor" if found.tuned else "terminals"
    rows = tuple(
        (
            str(number),
            _watts(each.power),
            "not known" if each.volts is None else up(each.volts, "V", "kV"),
            "not known" if each.amps is None else up(each.amps, "A", "A"),
            "not known" if each.creep is None else up(each.creep, "Hz", "Hz"),
        )
        for number, each in enumerate(found.steps, 1)
    )
    return Table(
        f"Carriers of {found.carrier:.0f} s each, from a distance; listen and look after each",
        (
            "step",
            "power, W PEP",
            f"{where}, kV peak at worst",
            "largest current, A RMS at worst",
            "warmth moves it by, Hz at most",
        ),
        rows,
        (0.08, 0.14, 0.26, 0.26, 0.26),
        (1, 2, 3, 4),
    )


def _watts(power: float) -> str:
    return f"{power:.6g}"


def up(value: float, si: str, unit: str) -> str:
    """Return a worst end as a number of `unit` with three digits, rounded up and never down."""
    shown = magnitude(value, si, unit)
    if shown <= 0.0:
        return "0"
    digit = 10.0 ** (floor(log10(shown)) - 2)
    # The guard keeps a value that has three digits, but for its last bit, from gaining one.
    return significant(ceil(shown / digit * (1.0 - 1e-12)) * digit)


def _watching(each: FirstKeydown) -> Iterator[str]:
    """Yield what to watch during the steps, the waits, and when to stop."""
    yield (
        "Watch the SWR during each carrier. The conductor's warmth moves the resonance down by no more than the table "
        "tells; what moves it further, or up, comes from the capacitor, a joint or an arc. Joints warm within seconds, "
        "so a carrier this long shows them."
    )
    yield (
        "Stop, and look for the reason with the transmitter off, when the SWR jumps or creeps past 2, at a glow, a "
        f"crackle, a smell, or when the power falls by itself. {_never(each)}"
    )
    if each.am_carrier is not None:
        yield (
            f"AM: before anybody speaks, the carrier alone is at most {words.power(each.am_carrier)}, a quarter of "
            f"{words.watts(each.keyed[-1])} PEP, to which full modulation raises it."
        )
    if each.over < inf:
        then = f"{words.duration(each.pause)} of listening" if each.pause else "no pause"
        over = f"send one over as the design has it, {words.duration(each.over)} of transmitting and then {then}"
    elif each.settling is not None:
        over = f"transmit for {_minutes(each.settling)}, until the conductor is within 5 % of a steady temperature"
    else:
        over = "transmit as the design has it"
    wait = f"wait {words.duration(each.wait)}, so that nobody's exposure adds up, and then " if each.wait else ""
    yield f"After the last carrier {wait}{over}, at {_keyed(each)}, and watch the SWR again. {_warmth(each)}"
    if each.again:
        yield (
            f"Wait {words.duration(each.again)} with nothing on the air before the procedure of another transmission, "
            "and before these steps are repeated: what people were exposed to adds up over that time."
        )


def _never(each: FirstKeydown) -> str:
    """Return the powers that nothing goes beyond: of a carrier, and of the mode as it is keyed where that is more."""
    top, most = each.steps[-1].power, each.keyed[-1]
    if most <= top:
        return f"Never beyond {words.watts(top)} PEP."
    return (
        f"Never an unbroken carrier beyond {words.watts(top)}: joints and capacitor are proven for the mean power of "
        f"the mode. As the mode keys it, never beyond {words.watts(most)} PEP."
    )


def _keyed(each: FirstKeydown) -> str:
    """Return the power of the first over, and how it goes up from there."""
    if each.keyed[-1] <= each.steps[-1].power:
        return "no more power"
    rising = ", ".join(words.floor_two_digits(power) for power in each.keyed[:-1])
    via = f"{rising} and " if rising else ""
    pause = ", each after its pause," if each.pause else ""
    return f"the power of the last carrier, then{pause} at {via}{words.watts(each.keyed[-1])} PEP"


def _warmth(each: FirstKeydown) -> str:
    """Return what is hot, and how long hands stay off."""
    capacitor = "How hot the capacitor gets is not computed: measure it before a hand touches it."
    return " ".join((*_hot(each), *((capacitor,) if each.tuned else ())))


def _hot(each: FirstKeydown) -> Iterator[str]:
    """Yield how hot conductor and joints get, and when a hand may touch them."""
    least = least_touch().temperature
    if each.hottest is None or each.idle is None:
        yield "How warm the conductor gets is not known: no hand on it before its temperature was measured."
    elif not each.hot:
        yield f"Conductor and joints stay below {_degrees(least)}, where a long touch begins to burn."
    else:
        yield f"At worst: {told_hot(each.hot)}; measure before a hand touches it."
        if each.idle >= least:
            yield (
                f"Air and sun alone may keep the conductor at {_degrees(each.idle)}: no hand touches it, or any joint, "
                "before it is measured."
            )
        elif each.cooling:
            yield f"The conductor takes {_minutes(each.cooling)} to cool to {_degrees(least)}: no hand on it before."
        elif each.cooling is None:
            yield f"How long the conductor stays above {_degrees(least)} is not known."


def _degrees(kelvin: float) -> str:
    return f"{ceil(kelvin - zero_Celsius - 1e-9)} degC"


def _minutes(seconds: float) -> str:
    """Return a time rounded up to half a minute, or to ten seconds below two minutes."""
    if seconds < 120.0:
        return f"{10 * (int(seconds / 10.0) + 1)} s"
    return f"{(int(seconds / 30.0) + 1) / 2:g} min"
