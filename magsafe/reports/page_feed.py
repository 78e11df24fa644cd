"""The feed on the log sheet, and the measurement that a transmission rests on."""

from collections.abc import Iterator

from magsafe.checks.sheet import OperatingPointRecord, Sheet
from magsafe.reports import feed
from magsafe.reports.page import Block, Heading, Paragraph, Table
from magsafe.reports.resonance import record_picture

_NAME = 0.28  # of the width


def feeding(sheet: Sheet) -> Iterator[Block]:
    """Yield what matches the loop to its line; nothing where there is nothing to say."""
    told = feed.feed(sheet)
    if told is None:
        return
    yield Heading(feed.HEADING)
    yield from (Paragraph(sentence) for sentence in told.sentences)
    if told.rows:
        columns = len(told.head) - 1
        widths = (_NAME, *((1.0 - _NAME) / columns for _ in range(columns)))
        caption = "The match by transmission: likely (from least to most)"
        yield Table(caption, told.head, told.rows, widths, tuple(range(1, columns + 1)))
    yield from (Paragraph(note, "small") for note in told.notes)


def measurement(point: OperatingPointRecord) -> Iterator[Block]:
    """Yield on which measurement a transmission rests, and its picture; nothing where on none."""
    told = feed.measured(point)
    if told:
        yield Paragraph(told)
    picture = record_picture(point)
    if picture is not None:
        yield picture
