"""Where may people be: until fields are computed, every rule and tier is unproven."""

from collections.abc import Iterator

from magsafe.checks.judge import Check, unproven
from magsafe.checks.sheet import Finding
from magsafe.design.model import Design

_WHO = ("trained", "public")


def exposure(design: Design) -> Iterator[Finding]:
    """Yield a finding for each rule in force and each tier of people."""
    if not design.site.rules:
        yield unproven(
            Check(
                "exposure.rules",
                "Which exposure rules hold at this site?",
                'name them in site.rules, such as rules = ["icnirp-2020"]',
                "the design",
                "1",
            ),
            "site.rules is missing or empty: nothing says how strong a field may be",
        )
    for rule in design.site.rules:
        for who in _WHO:
            yield unproven(
                Check(
                    f"exposure.{rule}.{who}",
                    f"Are people ({who}) within the limits of {rule}?",
                    "keep people away until it is known, or have the field measured",
                    rule,
                    "1",
                ),
                "Fields near the loop are not computed by this version",
            )
