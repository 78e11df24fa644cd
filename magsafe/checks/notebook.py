"""A sheet as a notebook shows it: one line as text, or headings and tables in HTML, without a script and a colour.

A notebook asks the object itself, and what lies on this floor may not look up to the reports; so the few lines that
it shows are made here, of the sheet's own words.
"""

from collections.abc import Iterable, Iterator, Sequence
from html import escape

from magsafe import words
from magsafe.checks.sheet import ORDER, FigureRecord, Finding, OperatingPointRecord, PowerCeiling, Sheet
from magsafe.units import significant

LONGEST_NAME = 60
_LEFT = ' style="text-align:left"'  # notebooks set cells to the right
_MOST_ROWS = 400  # a notebook keeps what it shows: a design of a hundred transmissions shall not fill it


def in_a_line(sheet: Sheet) -> str:
    """Return a sheet in one line: its name, its verdict, its ceiling."""
    return f"<Sheet {words.short(sheet.design.name, LONGEST_NAME)!r}: {sheet.verdict}; {_ceiling(sheet.power_ceiling)}>"


def _ceiling(made: PowerCeiling) -> str:
    if made.value is None:
        return "no highest power can be named"
    if made.value == 0.0:
        return f"no power is clear, by {made.held_by}"
    if made.held_by in made.left_out:
        return f"no power is proven, more than {words.power(made.value)} is too much, by {made.held_by}"
    most = "clear up to" if made.complete else "unproven in part, at most"
    return f"{most} {words.power(made.value)}, held by {made.held_by}"


def as_html(sheet: Sheet) -> str:
    """Return a sheet as HTML that a light or a dark notebook shows in its own colours, every text escaped."""
    told = sorted(_findings(sheet), key=lambda each: ORDER.index(each[1].verdict))
    in_the_way = [
        (finding.verdict, finding.id, where, finding.because, finding.do)
        for where, finding in told
        if finding.verdict != "clear"
    ]
    clear = sum(finding.verdict == "clear" for _, finding in told)
    places = [
        (place.verdict, point.name, exposure.rule, exposure.who, place.name, _share(place.share_of_limit))
        for point in sheet.operating_points
        for exposure in point.exposure
        for place in exposure.places
    ]
    return "\n".join(
        [
            "<section>",
            f"<h3>{_text(sheet.verdict)}: {_text(_ceiling(sheet.power_ceiling))}</h3>",
            f"<p>{_text(sheet.design.name)}, {_text(sheet.date)}, magsafe {_text(sheet.magsafe)}</p>",
            *_table("What stands in the way", ("verdict", "finding", "transmission", "why", "do"), in_the_way),
            f"<p>{clear} {'finding is' if clear == 1 else 'findings are'} clear.</p>",
            *_figures(sheet.operating_points),
            *_table(
                "People: places", ("verdict", "transmission", "rule", "who", "place", "share of the limit"), places
            ),
            *_list("Assumed", sheet.assumptions),
            *_list("Cautions", sheet.cautions),
            "</section>",
        ]
    )


def _findings(sheet: Sheet) -> Iterator[tuple[str, Finding]]:
    yield from (("all", finding) for finding in sheet.findings)
    for point in sheet.operating_points:
        yield from ((point.name, finding) for finding in point.findings)


def _figures(points: Sequence[OperatingPointRecord]) -> Iterator[str]:
    rows = [
        (name.replace("_", " "), *(_figure(point.figures[name]) for point in points if name in point.figures))
        for name in dict.fromkeys(name for point in points for name in point.figures)
        if any(name in point.figures and _known(point.figures[name]) for point in points)
    ]
    return _table("Figures: likely, and from least to most", ("", *(point.name for point in points)), rows)


def _known(figure: FigureRecord) -> bool:
    return not figure.low is figure.likely is figure.high is None


def _figure(figure: FigureRecord) -> str:
    """Return a figure in the unit that suits it; each end that is not known is said so."""
    if not _known(figure):
        return "not known"
    unit = words.shown_unit(figure.unit)
    low, likely, high = (
        "?" if end is None else words.number(end, figure.unit, unit) for end in (figure.low, figure.likely, figure.high)
    )
    ends = "" if low == likely == high else f" ({low} to {high})"
    return f"{likely}{ends} {unit}".strip()


def _share(share: float | None) -> str:
    return "not known" if share is None else f"{significant(100.0 * share)} %"


def _table(title: str, head: Sequence[str], rows: Sequence[Sequence[str]]) -> Iterator[str]:
    if not rows:
        return
    yield f"<h4>{_text(title)}</h4>"
    yield f"<table><thead><tr>{_cells('th', head)}</tr></thead><tbody>"
    yield from (f"<tr>{_cells('td', row)}</tr>" for row in rows[:_MOST_ROWS])
    yield "</tbody></table>"
    if len(rows) > _MOST_ROWS:
        yield f"<p>{len(rows) - _MOST_ROWS} more rows are in the sheet and not shown.</p>"


def _list(title: str, texts: Iterable[str]) -> Iterator[str]:
    entries = [f"<li>{_text(text)}</li>" for text in texts]
    if entries:
        yield f"<h4>{_text(title)}</h4><ul>{''.join(entries)}</ul>"


def _cells(tag: str, texts: Iterable[str]) -> str:
    return "".join(f"<{tag}{_LEFT}>{_text(text)}</{tag}>" for text in texts)


def _text(text: str) -> str:
    return escape(text, quote=True)
