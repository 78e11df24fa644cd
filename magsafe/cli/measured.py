"""`magsafe measured`: what an instrument says of the loop as built, against what was computed."""

from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Literal

import typer

from magsafe.cli.common import AsJson, DesignPath, Strict, exit_status, load, reader_may_leave, write

if TYPE_CHECKING:
    from datetime import date

    from magsafe.analysis.instrument import Reading
    from magsafe.checks.measured_sheet import MeasuredSheet
    from magsafe.design.model import Design
    from magsafe.design.sweep import Sweep
    from magsafe.spread import Spread
    from magsafe.units import Kind

SweepFile = Annotated[
    str | None, typer.Option("--sweep", metavar="FILE.s1p", help="A reflection sweep of the loop (Touchstone).")
]
Swr2 = Annotated[
    tuple[str, str] | None,
    typer.Option("--swr2", metavar="LOW HIGH", help='Instead: both frequencies of SWR 2, such as "7.098 MHz".'),
]
HalfPower = Annotated[
    tuple[str, str] | None,
    typer.Option("--half-power", metavar="LOW HIGH", help="Instead: both half-power frequencies."),
]
AtResonance = Annotated[
    float | None,
    typer.Option("--swr-at-resonance", metavar="SWR", help="The lowest SWR between them, as read.", min=1.0, max=20.0),
]
AtPoints = Annotated[
    float | None,
    typer.Option("--swr-at-points", metavar="SWR", help="The SWR read at the half-power points.", min=1.0, max=100.0),
]
LineLoss = Annotated[
    str | None,
    typer.Option(
        "--line-loss",
        metavar="LOSS",
        help='Of the line between instrument and loop, one way: "0.4 dB", or low,likely,high. With points it must be '
        'said; "0 dB" at the loop itself. A sweep tells it.',
    ),
]
Coupled = Annotated[
    Literal["over", "under"] | None,
    typer.Option("--coupled", help="Which way the loop is coupled, where two points do not tell."),
]
ReflectionError = Annotated[
    float,
    typer.Option(
        "--reflection-error",
        help="Bound of the instrument's own error in the reflection factor.",
        min=0.005,
        max=0.3,
    ),
]
OnDate = Annotated[
    str | None, typer.Option("--date", metavar="DATE", help="The day of the measurement, as 2026-05-04; else today.")
]
Save = Annotated[bool, typer.Option("--save", help="Write it into DESIGN as a [[measured]] block, for check to use.")]
Replace = Annotated[
    bool, typer.Option("--replace", help="Let --save take the place of an earlier record, --picture of a file.")
]
PicturePath = Annotated[
    str | None,
    typer.Option("--picture", metavar="FILE", help="Draw circle and SWR, as .svg or .png, by its ending."),
]

CONNECTOR = 0.1  # dB, more than is said of a line loss that is one value (common practice)
SINGLE = 0.2  # of a line loss that is one value: what tables of cables leave (common practice)


def measured(  # noqa: PLR0913, PLR0917  (an option each)
    design: DesignPath,
    sweep: SweepFile = None,
    swr2: Swr2 = None,
    half_power: HalfPower = None,
    swr_at_resonance: AtResonance = None,
    swr_at_points: AtPoints = None,
    line_loss: LineLoss = None,
    coupled: Coupled = None,
    reflection_error: ReflectionError = 0.02,
    on: OnDate = None,
    save: Save = False,
    replace: Replace = False,
    picture: PicturePath = None,
    as_json: AsJson = False,
    strict: Strict = False,
) -> None:
    """What an instrument says of the loop as built: Q, resistance, efficiency, volts, ceiling, against the computed.

    Leaves with 0 (they agree), 1 (Q above what the parts can make: stop), 3 (unproven), 4 (narrow, with --strict) or
    2 (the design, the file or an option cannot be used).
    """
    day = _day(on)
    points = _points(sweep, swr2, half_power, swr_at_resonance, line_loss, coupled)
    if swr_at_points is not None and half_power is None:
        raise _refused("--swr-at-points", "no --half-power beside it", "half-power points", "leave it out")
    file = _picture_file(picture, sweep, replace=replace)
    if save and design == "-":
        raise _refused("--save", "a design from standard input", "a file to write into", "name the design's file")
    _require_saving(save, replace, picture)
    read = load(design)
    if points is None:
        found, reading = _swept(Path(sweep or ""), line_loss, reflection_error)
    else:
        ratios = (swr_at_resonance or 1.0, swr_at_points)
        found, reading = None, _pointed(points, ratios, line_loss or "", reflection_error, coupled)
    sheet = _held_against(read, reading, found, day)
    if save:
        _save(Path(design), read, reading, sheet.date, replace=replace)
    if file is not None:
        _draw(sheet, file, replace=replace)
    if as_json:
        write(sheet.to_json())
    else:
        from magsafe.reports.measured import show_measured  # noqa: PLC0415  (keeps --help quick)

        with reader_may_leave():
            show_measured(sheet, saved=save)
    raise typer.Exit(exit_status(sheet.verdict, strict))


# What was asked --------------------------------------------------------------------------------------------


def _refused(option: str, found: str, expected: str, do: str) -> Exception:
    from magsafe.errors import CommandError  # noqa: PLC0415  (keeps --help quick)

    return CommandError(option, found, expected, do)


def _points(
    sweep: str | None,
    swr2: tuple[str, str] | None,
    half_power: tuple[str, str] | None,
    swr_at_resonance: float | None,
    line_loss: str | None,
    coupled: str | None,
) -> tuple[tuple[str, str], bool] | None:
    """Return the two points and whether they are those of half power; None for a sweep."""
    given = [
        name for name, each in (("--sweep", sweep), ("--swr2", swr2), ("--half-power", half_power)) if each is not None
    ]
    if len(given) != 1:
        found = " and ".join(given) or "none of --sweep, --swr2 and --half-power"
        raise _refused(
            "magsafe measured", found, "one of the three", "add --sweep FILE.s1p, or --swr2 LOW HIGH --swr-at-resonance"
        )
    if sweep is not None:
        for option, value in (("--swr-at-resonance", swr_at_resonance), ("--coupled", coupled)):
            if value is not None:
                raise _refused(option, f"{value} beside --sweep", "a sweep alone: it tells this", "leave it out")
        return None
    if swr_at_resonance is None:
        raise _refused(
            given[0], "no --swr-at-resonance beside it", "the lowest SWR between both frequencies", "read it and add it"
        )
    if line_loss is None:
        raise _refused(
            given[0],
            "no --line-loss beside it",
            "what the line between instrument and loop loses: without it Q reads too low, and volts too low",
            'add --line-loss "0.4 dB", or "0 dB" where the instrument sits at the loop',
        )
    points = swr2 or half_power
    return None if points is None else (points, half_power is not None)


def _day(text: str | None) -> "date | None":
    """Return the day that was named."""
    from datetime import date  # noqa: PLC0415

    if text is None:
        return None
    try:
        found = date.fromisoformat(text)
    except ValueError:
        raise _refused("--date", repr(text[:40]), "a date such as 2026-05-04", "write year, month and day") from None
    if found > date.today():
        raise _refused("--date", text, "a day that has been", "check the date")
    return found


def _picture_file(picture: str | None, sweep: str | None, *, replace: bool) -> Path | None:
    if picture is None:
        return None
    if sweep is None:
        raise _refused("--picture", "two points", "a sweep, whose circle can be drawn", "add --sweep FILE.s1p")
    from magsafe.cli.saving import picture_file  # noqa: PLC0415

    return picture_file("--picture", picture, replace=replace)


def _require_saving(save: bool, replace: bool, picture: str | None) -> None:
    if replace and not save and picture is None:
        raise _refused("--replace", "neither --save nor --picture beside it", "a thing to replace", "leave it out")


# What was read ---------------------------------------------------------------------------------------------


def _swept(path: Path, line_loss: str | None, reflection_error: float) -> "tuple[Sweep, Reading]":
    from magsafe.analysis.instrument import by_sweep  # noqa: PLC0415
    from magsafe.design.quantities import printable  # noqa: PLC0415
    from magsafe.design.sweep import read_sweep  # noqa: PLC0415

    loss = None if line_loss is None else _loss(line_loss)
    found = read_sweep(path)
    try:
        return found, by_sweep(found, loss, reflection_error)
    except ValueError as error:
        raise _unfit(printable(str(path)), error) from None


def _pointed(
    points: tuple[tuple[str, str], bool],
    ratios: tuple[float, float | None],
    line_loss: str,
    reflection_error: float,
    coupled: str | None,
) -> "Reading":
    from magsafe.analysis.instrument import by_points  # noqa: PLC0415

    (low, high), half_power = points
    option = "--half-power" if half_power else "--swr2"
    ends = [_frequency(option, each) for each in (low, high)]
    (first, fine), (last, coarse) = ends
    if not first < last:
        raise _refused(option, f"{low} and {high}", "the lower frequency first", "exchange the two")
    try:
        return by_points(
            (first, last),
            ratios[0],
            half_power=half_power,
            line_loss=_loss(line_loss),
            resolution=max(fine, coarse),
            reflection_error=reflection_error,
            way="over" if coupled == "over" else "under" if coupled == "under" else None,
            swr_at_points=ratios[1],
        )
    except ValueError as error:
        raise _unfit(option, error) from None


def _unfit(place: str, error: ValueError) -> Exception:
    """Return the message about a reading that tells no Q: what is wrong, then what to do, as its words have it."""
    found, _, do = str(error).rpartition(": ")
    if not found:
        found, do = do, "measure again, about the resonance"
    return _refused(place, found, "a reading that tells one resonance", do)


def _frequency(option: str, text: str) -> tuple[float, float]:
    """Return a frequency and half of its last digit's place [Hz]: so finely was it read."""
    from magsafe.units import FREQUENCY  # noqa: PLC0415

    found = _quantity(option, text, FREQUENCY)
    number = text.strip().split()[0] if " " in text.strip() else text.strip().rstrip("kMGHz")
    digits = len(number.partition(".")[2])
    return found, 0.5 * found / float(number) * 10.0**-digits


def _loss(text: str) -> "Spread":
    """Return a line's loss [dB]: one value with what tables of cables leave, or low, likely and high."""
    from magsafe.spread import Spread  # noqa: PLC0415
    from magsafe.units import DECIBEL  # noqa: PLC0415

    values = [_quantity("--line-loss", each, DECIBEL) for each in text.split(",")]
    if len(values) == 1:
        # More loss than is unfolded makes Q, and the volts, read low: a connector's is added at that end.
        return Spread((1.0 - SINGLE) * values[0], values[0], (1.0 + SINGLE) * values[0] + CONNECTOR)
    if len(values) == 3 and 0.0 <= values[0] <= values[1] <= values[2]:
        return Spread(*values)
    raise _refused("--line-loss", repr(text[:60]), "one value, or low, likely and high in order", 'write "0.4 dB"')


def _quantity(option: str, text: str, kind: "Kind") -> float:
    from magsafe.design.quantities import show  # noqa: PLC0415
    from magsafe.units import QuantityError, read_quantity  # noqa: PLC0415

    try:
        return read_quantity(text.strip(), kind, *((0.0, 20.0) if kind.si == "dB" else (100e3, 300e6)))
    except QuantityError as error:
        raise _refused(option, show(text), error.expected, error.do) from None


# What becomes of it ----------------------------------------------------------------------------------------


def _held_against(design: "Design", reading: "Reading", sweep: "Sweep | None", day: "date | None") -> "MeasuredSheet":
    from magsafe.checks.measured import NotOfThisDesign, measured  # noqa: PLC0415

    try:
        return measured(design, reading, sweep, day)
    except NotOfThisDesign as error:
        raise _refused(design.origin.name, error.found, error.expected, error.do) from None


def _draw(sheet: "MeasuredSheet", path: Path, *, replace: bool) -> None:
    from magsafe.__main__ import say  # noqa: PLC0415
    from magsafe.cli.saving import save  # noqa: PLC0415
    from magsafe.reports.resonance import resonance_picture  # noqa: PLC0415

    data = resonance_picture(sheet, as_dots=path.suffix.lower() == ".png")
    save("--picture", path, data, replace=replace)
    say(f"Circle and SWR are in {path}.\n")


def _save(path: Path, design: "Design", reading: "Reading", day: str, *, replace: bool) -> None:
    """Write the record into the design's file, all else in it as it was; refuse what would not be read again."""
    from codecs import BOM_UTF8  # noqa: PLC0415
    from hashlib import sha256  # noqa: PLC0415

    from magsafe.__main__ import say  # noqa: PLC0415
    from magsafe.analysis.instrument import record_of  # noqa: PLC0415
    from magsafe.cli.saving import save  # noqa: PLC0415
    from magsafe.design.reading import parse_design  # noqa: PLC0415
    from magsafe.design.recording import CannotRecord, record_text, standing_records, with_record  # noqa: PLC0415

    text, resonance = design.origin.text, reading.resonance.likely or 0.0
    record = record_of(design, reading, day)
    if standing_records(text, resonance) and not replace:
        raise _refused("--save", "a record at that frequency in the design", "a frequency without one", "add --replace")
    try:
        made = with_record(text, record, resonance)
    except CannotRecord as error:
        raise _refused(
            "--save",
            f"{path.name}: {error}",
            "[[measured]] blocks",
            f"write this block into it:\n\n{record_text(record)}",
        ) from None
    before = path.read_bytes()
    data = (BOM_UTF8 if before.startswith(BOM_UTF8) else b"") + made.encode("utf-8")
    parse_design(data, path.name)
    if sha256(before).hexdigest() != design.origin.sha256:
        raise _refused("--save", f"{path}, changed since it was read", "the design as it was read", "run it again")
    save("--save", path.resolve(), data, replace=True)
    say(f"The record is in {path}; magsafe check uses it from now on.\n")
