"""The table of soils: every row with its source, spans in order, and the constants that are known inside them."""

import pytest

from magsafe.design import tables

# Reference notes, section 7: what its tables were computed for [S/m, 1], and sea water's span (ITU-R P.527 by secondary
# tables).
KNOWN = {
    "sea water": [(5.0, 80.0), (4.0, 80.0)],
    "very good": [(30e-3, 20.0)],
    "average": [(5e-3, 13.0)],
    "poor": [(1e-3, 5.0)],
}


def test_every_row_has_its_source_and_its_spans_in_order() -> None:
    soils = tables.soils()
    assert set(KNOWN) < set(soils)
    for name, row in soils.items():
        assert row.name == name
        assert len(row.source) > 10
        assert row.provenance in ("memory", "common practice", "verified", "seen")
        for span, least in ((row.conductivity, 0.0), (row.permittivity, 1.0)):
            assert span.low is not None
            assert span.likely is not None
            assert span.high is not None
            assert least < span.low < span.likely < span.high


@pytest.mark.parametrize("name", KNOWN)
def test_the_constants_of_the_notes_lie_inside_and_the_first_is_likely(name: str) -> None:
    row = tables.soils()[name]
    for conductivity, permittivity in KNOWN[name]:
        assert (row.conductivity.low or 0.0) < conductivity < (row.conductivity.high or 0.0)
        assert (row.permittivity.low or 0.0) < permittivity < (row.permittivity.high or 0.0)
    assert (row.conductivity.likely, row.permittivity.likely) == KNOWN[name][0]


def test_the_soils_of_a_plot_span_a_decade() -> None:
    """Reference notes, section 7: they vary tenfold on one plot, soil from 1 to 10 mS/m, permittivity 4 to 20."""
    soils = tables.soils()
    for name in ("very good", "average", "poor"):
        span = soils[name].conductivity
        assert (span.high or 0.0) / (span.low or 1.0) == pytest.approx(10.0, rel=0.01)
    dry = [soils[name] for name in ("average", "poor")]
    assert min(each.conductivity.low or 0.0 for each in dry) <= 1e-3
    assert max(each.conductivity.high or 0.0 for each in dry) >= 10e-3
    assert min(each.permittivity.low or 0.0 for each in dry) <= 4.0
    assert max(each.permittivity.high or 0.0 for each in dry) >= 20.0
