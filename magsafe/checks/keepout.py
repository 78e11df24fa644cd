"""The part of a sheet that is about people, judged on its own."""

from magsafe.checks.ceiling import ceiling, least
from magsafe.checks.sheet import Finding, KeepoutPoint, KeepoutSheet, Sheet, worst


def keepout(sheet: Sheet) -> KeepoutSheet:
    """Return where people must not be, with the verdict and the ceiling of the exposure findings alone."""
    shared = tuple(f for f in sheet.findings if _is_of_people(f))
    points = tuple(
        KeepoutPoint(
            name=point.name,
            frequency=point.frequency,
            power=point.power,
            power_ceiling=ceiling((*found, *shared), index),
            findings=found,
            exposure=point.exposure,
            exemptions=point.exemptions,
        )
        for index, point in enumerate(sheet.operating_points)
        for found in [tuple(f for f in point.findings if _is_of_people(f))]
    )
    everything = (*shared, *(finding for point in points for finding in point.findings))
    return KeepoutSheet(
        magsafe=sheet.magsafe,
        date=sheet.date,
        design=sheet.design,
        findings=shared,
        verdict=worst(tuple(finding.verdict for finding in everything)),
        power_ceiling=least([point.power_ceiling for point in points]),
        operating_points=points,
        sessions=sheet.sessions,
        cautions=sheet.cautions,
    )


def _is_of_people(finding: Finding) -> bool:
    return finding.id.startswith("exposure.")
