"""What the design states and this version does not compute: unproven by name, never passed over."""

from collections.abc import Iterator
from typing import Any

from magsafe.checks.judge import Check, unproven
from magsafe.checks.sheet import Finding
from magsafe.design.model import Block, Design

_JUDGE = "judge it by other means"


def later(design: Design) -> Iterator[Finding]:
    """Yield a finding for each concern whose keys are in the file and whose physics is not in this version."""
    part = design.capacitor
    concerns: tuple[tuple[str, str, Block, tuple[str, ...]], ...] = (
        ("loop.measured", "Do the measured figures agree?", design, ("measured",)),
    )
    for name, question, block, keys in concerns:
        stated = [key for key in keys if _is_stated(block, key)]
        if stated:
            yield unproven(
                Check(name, question, _JUDGE, "none", "1"),
                f"{' and '.join(stated)}: kept from the design, but not computed by this version",
            )

    fed_as_it_is = design.feed.coupling == "direct" and part.kind == "none"
    if design.feed.coupling in ("capacitors", "direct") and not fed_as_it_is:
        yield unproven(
            Check("feed.coupling", "Do the parts of the match stand their volts?", _JUDGE, "none", "1"),
            f'coupling = "{design.feed.coupling}" is not computed by this version; a small series capacitor can carry '
            "the loop's full voltage",
        )


def _is_stated(block: Block, key: str) -> bool:
    fields: dict[str, Any] = {f.alias or name: name for name, f in type(block).model_fields.items()}
    return bool(getattr(block, fields[key]))
