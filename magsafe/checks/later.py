"""What the design states and this version does not compute: unproven by name, never passed over."""

from collections.abc import Iterator

from magsafe.checks.judge import Check, unproven
from magsafe.checks.sheet import Finding
from magsafe.design.model import Design

_JUDGE = "judge it by other means"


def later(design: Design) -> Iterator[Finding]:
    """Yield a finding for each concern whose keys are in the file and whose physics is not in this version."""
    part = design.capacitor
    fed_as_it_is = design.feed.coupling == "direct" and part.kind == "none"
    if design.feed.coupling == "direct" and not fed_as_it_is:
        yield unproven(
            Check("feed.coupling", "Do the parts of the match stand their volts?", _JUDGE, "none", "1"),
            'coupling = "direct" of a loop with a capacitor is not computed by this version: what joins it to the line '
            "can carry the loop's full voltage",
        )
