"""The highest power at which every power-dependent finding keeps its margin, and which finding holds it there."""

from collections.abc import Sequence

from magsafe.checks.sheet import Finding, PowerCeiling


def ceiling(findings: Sequence[Finding], transmission: int) -> PowerCeiling:
    """Return the ceiling of one transmission from its findings and those of the whole sheet.

    What is unproven or in doubt is left out, and the ceiling is then told as "at most". What stops it at any
    power makes it 0.
    """
    counted = [(f.power_at_margin, f.id) for f in findings if f.power_at_margin is not None]
    limits = [f.power_at_limit for f in findings if f.power_at_limit is not None]
    left_out = tuple(f.id for f in findings if f.verdict == "unproven" or f.doubt)
    value, held_by = min(counted, default=(None, None))
    at_limit = min(limits, default=None)
    fatal = [f.id for f in findings if f.verdict == "stop" and f.power_at_margin is None and not f.doubt]
    if fatal:
        value, at_limit, held_by = 0.0, 0.0, fatal[0]
    thin = tuple(f.id for f in findings if f.thin)
    return PowerCeiling(
        value=value,
        at_limit=at_limit,
        transmission=transmission,
        held_by=held_by,
        complete=not left_out,
        left_out=left_out,
        on_thin_evidence=thin,
    )


def least(ceilings: Sequence[PowerCeiling]) -> PowerCeiling:
    """Return the least ceiling of all transmissions; the sheet's names all that is left out of any."""
    counted = [c for c in ceilings if c.value is not None]
    lowest = min(counted, key=lambda c: c.value or 0.0, default=ceilings[0])
    at_limit = min((c.at_limit for c in ceilings if c.at_limit is not None), default=None)
    left_out = tuple(dict.fromkeys(name for c in ceilings for name in c.left_out))
    thin = tuple(dict.fromkeys(name for c in ceilings for name in c.on_thin_evidence))
    return lowest.model_copy(
        update={
            "at_limit": at_limit,
            "left_out": left_out,
            "complete": not left_out,
            "on_thin_evidence": thin,
        }
    )
