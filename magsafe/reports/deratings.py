"""The table of derations: what was taken off a breakdown or a rating, and on what that rests."""

from collections.abc import Sequence

from magsafe.checks.sheet import DeratingRecord
from magsafe.units import significant

HEADING = "Derations: factors on the volts that are stood"


def rows(records: Sequence[DeratingRecord]) -> tuple[tuple[str, str], ...]:
    """Return each factor with what it is for."""
    return tuple((significant(each.factor), _said(each)) for each in records)


def _said(each: DeratingRecord) -> str:
    """Return a row in a line or two: of its source what comes first, the machine form has the whole."""
    source = each.source.split(";")[0]
    rests = source if source.startswith(each.evidence) else f"{each.evidence}: {source}"
    return f"{each.applies_to}, {each.name} ({rests})"
