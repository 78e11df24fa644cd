"""What the design states and this version does not compute: unproven by name, never passed over."""

from collections.abc import Iterator
from typing import Any

from magsafe.checks.judge import Check, unproven
from magsafe.checks.sheet import Finding
from magsafe.design.model import Block, Design

_JUDGE = "judge it by other means"


def later(design: Design) -> Iterator[Finding]:
    """Yield a finding for each concern whose keys are in the file and whose physics is not in this version."""
    part, conductor = design.capacitor, design.loop.conductor
    concerns: tuple[tuple[str, str, Block, tuple[str, ...]], ...] = (
        (
            "capacitor.gap",
            "Does the air gap stand the crest of the RF?",
            part,
            ("gap", "plate_thickness", "plate_edge", "sections_in_series"),
        ),
        (
            "capacitor.geometry",
            "What do the sleeve's or plates' sizes give?",
            part,
            ("dielectric", "inner_diameter", "outer_diameter", "length"),
        ),
        ("capacitor.padding", "Does each padding part stand its share?", part, ("with",)),
        (
            "capacitor.heat",
            "Does the capacitor stand its own heat?",
            part,
            ("rated_reactive_power",),
        ),
        (
            "conductor.temperature",
            "How hot does the conductor get?",
            conductor,
            ("surface", "in_sun"),
        ),
        (
            "capacitor.tuning_step",
            "Can the drive hold the resonance?",
            design.tuning,
            ("steps_per_range",),
        ),
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
    if design.tuning.by == "hand at the loop" and not any(place.when == "tuning" for place in design.place):
        yield unproven(
            Check(
                "exposure.tuning",
                "What reaches the hand that tunes?",
                'add a [[place]] with when = "tuning" where that person stands, or tune from a distance',
                "the design",
                "1",
            ),
            'tuning.by = "hand at the loop" puts somebody there, and no place says where',
        )


def _is_stated(block: Block, key: str) -> bool:
    fields: dict[str, Any] = {f.alias or name: name for name, f in type(block).model_fields.items()}
    return bool(getattr(block, fields[key]))
