"""Every finding with question, figure, limit, margin and verdict; why those that are not clear are not; and on what
the limits rest.
"""

from collections.abc import Iterator
from math import isclose

from magsafe import words
from magsafe.checks.sheet import ORDER, Finding, Sheet
from magsafe.reports import telling
from magsafe.reports.page import Block, Heading, Items, Paragraph, Said, Table
from magsafe.reports.page_front import which
from magsafe.spread import Spread
from magsafe.units import significant

_SHOWN = {"V": ("kV", "peak"), "A": ("A", "RMS"), "V/m": ("V/m", "RMS"), "A/m": ("A/m", "RMS")}


def findings(sheet: Sheet) -> Iterator[Block]:
    """Yield the table of all findings, and in full what is not clear."""
    yield Heading("Findings")
    told = [each for verdict in ORDER for each in telling.findings(sheet, verdict)]
    rows = tuple((f"{which(each)}: {each.finding.question}", *_judged(each.finding)) for each in told)
    yield Table(
        "Every finding, the worst first; the margin found of the one asked for",
        ("finding", "figure", "limit", "margin", "verdict"),
        rows,
        (0.51, 0.18, 0.12, 0.09, 0.1),
    )
    open_ones = [each for each in told if each.finding.verdict != "clear"]
    if open_ones:
        yield Paragraph("Why they are not clear", "strong")
        yield Items(tuple(f"{which(e)}: {e.finding.because}.{_to_do(e.finding)}" for e in open_ones), style="small")


def _to_do(finding: Finding) -> str:
    """Return what to do; of what stands in the way of any key-down the procedure tells it."""
    return f" Do: {finding.do}." if finding.verdict == "narrow" else ""


def _judged(finding: Finding) -> tuple[str, str, str, Said]:
    return figure_of(finding), limit_of(finding), _margin(finding), Said(finding.verdict)


def figure_of(finding: Finding) -> str:
    """Return the figure of a finding with its ends and unit."""
    value = finding.value
    if value is None or all(each is None for each in (value.low, value.likely, value.high)):
        return "not known"
    unit, kind = _unit(finding, value.unit)
    spread = Spread(value.low, value.likely, value.high)
    if spread.likely is None:
        ends = words.ends(spread, value.unit, unit).strip("()")
    else:
        ends = f"{words.number(spread.likely, value.unit, unit)} {words.ends(spread, value.unit, unit)}".rstrip()
    return " ".join(part for part in (ends, unit, kind) if part)


def limit_of(finding: Finding) -> str:
    """Return the limit of a finding, and which way it holds where that can be told from the margin."""
    if finding.limit is None:
        return ""
    unit, kind = _unit(finding, finding.limit.unit)
    amount = words.number(finding.limit.value, finding.limit.unit, unit)
    return " ".join(part for part in (_way(finding), amount, unit, kind) if part)


def _unit(finding: Finding, si: str) -> tuple[str, str]:
    if finding.id == "conductor.corona":
        return "kV/m", "peak"
    return _SHOWN.get(si, (words.shown_unit(si), ""))


def _way(finding: Finding) -> str:
    """Return `at least` for what must reach its limit: its margin is figure over limit."""
    value, limit, margin = finding.value, finding.limit, finding.margin_found
    if value is None or limit is None or not margin or not value.low or limit.value <= 0.0:
        return ""
    return "at least" if isclose(value.low / limit.value, margin, rel_tol=1e-9) else ""


def _margin(finding: Finding) -> str:
    if finding.margin_found is None:
        return ""
    found = significant(finding.margin_found)
    return found if finding.margin_asked is None else f"{found} of {significant(finding.margin_asked)}"


def provenance(sheet: Sheet) -> Iterator[Block]:
    """Yield on what the limits rest: each provenance and source once, with the findings that are held against it."""
    found: dict[tuple[str, str], list[str]] = {}
    for finding in sheet.all_findings():
        if finding.limit is not None:
            found.setdefault((finding.provenance, finding.source), []).append(words.short(finding.id, 60))
    if not found:
        return
    yield Heading("What the limits rest on")
    for kind in dict.fromkeys(kind for kind, _ in sorted(found)):
        own = ((source, ids) for (each, source), ids in sorted(found.items()) if each == kind)
        told = "; ".join(f"{', '.join(dict.fromkeys(ids))} ({source})" for source, ids in own)
        yield Paragraph(f"{kind[0].upper()}{kind[1:]}: {told}.", "small")
