"""The first page: complete in itself. Verdict, ceiling, reasons, where people must not be, cautions, signature."""

import re
from collections.abc import Iterator, Sequence

from magsafe import words
from magsafe.analysis.field_map import FieldMap
from magsafe.checks.sheet import Finding, KeepoutSheet, Sheet
from magsafe.design.model import Design
from magsafe.reports import telling
from magsafe.reports.page import Block, Boxes, Break, Facts, Heading, Items, Paragraph, Said, Table
from magsafe.reports.page_map import map_blocks

MOST_REASONS, MOST_PLACES = 8, 5  # what leaves the first page room for the rest; all are told on the following ones
_TALLEST, _SHORTEST, _REASON = 108.0, 56.0, 8.7  # mm: of the map's views, and what each reason takes off them
NAME = 60  # letters of a name


def front(
    sheet: Sheet, people: KeepoutSheet, design: Design, *, index: int, fields: FieldMap | None, remarks: str
) -> Iterator[Block]:
    """Yield the blocks of the first page.

    Parameters
    ----------
    sheet, people, design : what was computed, its part about people, and of what
    index : the transmission on the map
    fields : the fields about its loop; None where none are known
    remarks : what whoever asked for the page has to add; may be empty
    """
    yield Heading(title(sheet, design), 1)
    yield Facts(tuple(_facts(sheet, design)))
    yield Said(sheet.verdict, telling.headline(sheet), "strong")
    yield Paragraph(telling.ceiling(sheet, sheet.power_ceiling), "strong")
    left = telling.left_out(sheet.power_ceiling)
    if left:
        yield Paragraph(left)
    told = list(telling.in_the_way(sheet))
    yield from _reasons(told)
    height = max(_SHORTEST, _TALLEST - _REASON * min(len(told), MOST_REASONS))
    yield Heading("Where people must not be")
    yield from map_blocks(people, design, index, fields, height=height, most=MOST_PLACES)
    yield Heading("Cautions")
    yield Items(tuple(sheet.cautions), columns=2, style="small")
    yield Paragraph(
        "This sheet tells what was computed against the limits that it names. It permits nothing: local regulation, "
        "the licence and the practice of a licensed operator go before it.",
        "small",
    )
    yield Boxes(("Remarks", "Name and signature", "Date"), (remarks, "", ""), (0.5, 0.32, 0.18))
    yield Break()


def title(sheet: Sheet, design: Design) -> str:
    """Return what the page is called."""
    return f"Station log, safety summary: {words.short(design.station.name or sheet.design.name, NAME)}"


def _facts(sheet: Sheet, design: Design) -> Iterator[tuple[str, str]]:
    yield "Station", words.short(design.station.name or "not named", NAME)
    yield "Callsign", words.short(design.station.callsign or "not given", NAME)
    yield "Operator", words.short(design.station.operator or "not given", NAME)
    yield "Date", sheet.date
    yield "Design file", words.short(sheet.design.name, NAME)


def _reasons(told: Sequence[telling.Told]) -> Iterator[Block]:
    if not told:
        return
    yield Heading("What stands in the way")
    rows = tuple(
        (Said(each.finding.verdict), f"{which(each)}: {in_short(each.finding)}", _begun(each.finding.do, 140))
        for each in told[:MOST_REASONS]
    )
    yield Table(
        "What is not clear, the worst first; of several powers the lowest counts",
        ("verdict", "figure and limit", "what to do"),
        rows,
        (0.13, 0.5, 0.37),
    )
    if len(told) > MOST_REASONS:
        worst = told[MOST_REASONS].finding.verdict
        yield Paragraph(
            f"{len(told) - MOST_REASONS} more are not clear, the worst of them {worst}: see Findings.", "strong"
        )


def which(told: telling.Told) -> str:
    """Return the id of a finding with its place and the transmissions that it holds for."""
    names = [words.short(told.finding.place)] if told.finding.place else []
    names += [", ".join(words.short(each, 24) for each in told.transmissions[:4])] if told.transmissions else []
    where = f" ({'; '.join(names)})" if names else ""
    return f"{words.short(told.finding.id, NAME)}{where}"


def in_short(finding: Finding) -> str:
    """Return why a finding is not clear: its figure and its limit alone where it has both."""
    if finding.value is None or finding.limit is None or finding.doubt:
        return _begun(finding.because)
    return f"{finding.because.partition(': ')[0]}."


def _begun(text: str, most: int = 170) -> str:
    """Return as many parts of a text, from its beginning, as there is room for."""
    end = 0
    for found in re.finditer(r"[;:,](?= )|$", text):
        if found.start() > most:
            break
        end = found.start()
    begun = words.short(text[:end] if end else text, most)
    return f"{begun}{')' * (begun.count('(') - begun.count(')'))}."
