"""The whole page of a sheet, from the verdict to the version: what every surface renders."""

from collections.abc import Iterator, Sequence

from magsafe.analysis.field_map import FieldMap
from magsafe.checks.first_keydown import FirstKeydown
from magsafe.checks.keepout import keepout
from magsafe.checks.ladder import ladder
from magsafe.checks.sheet import OperatingPointRecord, Sheet
from magsafe.checks.swr_curve import swr_curve
from magsafe.design.model import Design
from magsafe.reports import deratings, sky, telling
from magsafe.reports.charts import ladder_picture, swr_picture
from magsafe.reports.elevation import elevation_figure
from magsafe.reports.page import Block, Columns, Heading, Items, Page, Paragraph, Picture, Table
from magsafe.reports.page_feed import feeding, measurement
from magsafe.reports.page_figures import design_as_given, figures, methods
from magsafe.reports.page_findings import findings, provenance
from magsafe.reports.page_front import front, title
from magsafe.reports.page_keydown import first_keydowns
from magsafe.reports.page_people import exposure, worked_in_turn

_ELEVATION_WIDTH = 82.0  # mm
MOST_CHARTS = 12  # transmissions with charts of their own; the tables have all of them


def page_of(
    sheet: Sheet,
    design: Design,
    procedures: Sequence[FirstKeydown],
    *,
    index: int,
    fields: FieldMap | None,
    remarks: str = "",
) -> Page:
    """Return the page of a sheet.

    Parameters
    ----------
    sheet, design : what was computed, and of what
    procedures : the first key-down of each transmission
    index : the transmission on the map
    fields : the fields about its loop; None where none are known
    remarks : what whoever asked for the page has to add; may be empty
    """
    blocks = (
        *front(sheet, keepout(sheet), design, index=index, fields=fields, remarks=remarks),
        *_loop(sheet),
        *findings(sheet),
        *exposure(sheet),
        *worked_in_turn(sheet),
        *first_keydowns(sheet, procedures),
        *_rests_on(sheet),
        *provenance(sheet),
        *_ending(sheet),
    )
    name = title(sheet, design)
    footer = f"{name}; {sheet.verdict}; {sheet.date}; magsafe {sheet.magsafe}; design {sheet.design.sha256[:12]}"
    return Page.of(name, sheet.date, footer, blocks)


def _power(sheet: Sheet, index: int) -> Iterator[Block]:
    """Yield what power and detuning do to one transmission."""
    name = telling.use(sheet.operating_points[index])
    made = ladder(sheet, index)
    if made.at_any_power:
        yield Paragraph(f"No power helps against {', '.join(made.at_any_power)}: {name}.", "strong")
    if not made.rungs:
        yield Paragraph(f"No check that depends on power could be counted: {name}.")
    yield from (each for each in (ladder_picture(made, name), _swr(sheet, index)) if each is not None)


def _loop(sheet: Sheet) -> Iterator[Block]:
    """Yield the design, its figures and charts; of one transmission these stand beside each other, on one page."""
    points = sheet.operating_points
    told = (*design_as_given(sheet), *figures(sheet))
    if len(points) == 1:
        charts = (Heading("Power, bandwidth and pattern"), *_power(sheet, 0), *_elevation(sheet, 0))
        yield Columns(((*told, *_placings(points[0])), charts))
    else:
        yield from told
    yield from feeding(sheet)
    yield from (block for point in points[:MOST_CHARTS] for block in measurement(point))
    yield from methods(points)
    if len(points) > 1:
        for index, point in enumerate(points[:MOST_CHARTS]):
            yield Heading(f"Power, bandwidth and pattern: {telling.use(point)}")
            power, elevation = tuple(_power(sheet, index)), tuple(_elevation(sheet, index))
            yield Columns((power, elevation) if elevation else tuple((each,) for each in power))
            yield from _placings(point)
    if len(points) > MOST_CHARTS:
        yield Paragraph(f"The other {len(points) - MOST_CHARTS} transmissions have no charts here.")


def _swr(sheet: Sheet, index: int) -> Picture | None:
    point = sheet.operating_points[index]
    curve = swr_curve(point)
    return None if curve is None else swr_picture(curve, telling.use(point))


def _elevation(sheet: Sheet, index: int) -> Iterator[Picture]:
    """Yield the elevation pattern, which says in itself what it is; nothing where the ground is not stated."""
    point = sheet.operating_points[index]
    if point.pattern is not None:
        svg = elevation_figure(sheet, index)
        wide, tall = (float(each) for each in svg.split('viewBox="0 0 ', 1)[1].split('"', 1)[0].split())
        yield Picture(svg, sky.pattern_in_words(point), "", _ELEVATION_WIDTH, _ELEVATION_WIDTH * tall / wide)


def _placings(point: OperatingPointRecord) -> Iterator[Block]:
    """Yield what another height or plane would change; nothing where that is not known."""
    if point.placings:
        columns = tuple(" ".join(each.split()) for each in sky.placing_head(point.placings))
        rows, share = tuple(sky.placing_rows(point.placings)), 0.65 / len(columns)
        yield Table(
            f"{sky.PLACINGS_HEADING}: {telling.use(point)}",
            ("placing", *columns),
            rows,
            (0.35, *(share,) * len(columns)),
            tuple(range(1, len(columns) + 1)),
        )
        yield Paragraph(sky.PLACING_NOTE, "small")


def _rests_on(sheet: Sheet) -> Iterator[Block]:
    yield Heading("What was assumed, and what was taken off")
    yield Items(tuple(sheet.assumptions), style="small")
    factors = "; ".join(f"{factor} {told}" for factor, told in deratings.rows(sheet.deratings))
    if factors:
        yield Paragraph(f"{deratings.HEADING}: {factors}.", "small")
    asked = "; ".join(f"{name} {value:.3g}" for name, value in sheet.margins.items())
    yield Paragraph(f"Margins asked for, as ratios (of field, volts, amps and degrees): {asked}.", "small")


def _ending(sheet: Sheet) -> Iterator[Block]:
    yield Heading("This sheet")
    digits = sheet.design.sha256
    grouped = " ".join(digits[i : i + 8] for i in range(0, len(digits), 8))
    yield Paragraph(
        f"Made by magsafe {sheet.magsafe}, dated {sheet.date}, from {sheet.design.name}, whose bytes have the SHA-256 "
        f"{grouped}. The machine form (.json) holds the design's text, every figure and every finding; the "
        "first key-down follows from them. What is printed here was "
        "computed against the limits it names and promises nothing; local regulation, the licence and a qualified "
        "person's judgement go before it.",
        "small",
    )
