"""Does the air round the conductor glow?"""

from magsafe.analysis.gap import site_air
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.surface_field import sharpest_radius, surface_field
from magsafe.checks.judge import Check, judge, unproven
from magsafe.checks.sheet import Finding
from magsafe.design.model import Design
from magsafe.physics.atmosphere import relative_air_density
from magsafe.physics.corona import ONSET_DERATINGS, derated_onset_field

_CORONA = Check(
    "conductor.corona",
    "Does the air round the conductor glow where its charge is densest?",
    "use a thicker conductor, round its ends and screws, or lower the power",
    "Peek 1929 (constants seen on public pages); charge of the solved current",
    "V/m",
    shown="kV/m",
    qualifier="peak",
)


def corona(design: Design, point: OperatingPoint) -> Finding:
    """Does the field on the smooth conductor stay below the onset of corona?

    Its derations are common practice, so a field near the onset is at best narrow: clear only where it keeps the margin
    by the square of it.
    """
    if point.chain is None:
        return unproven(_CORONA, "; ".join(point.out_of_range))
    radius = sharpest_radius(design.loop.conductor)
    density = float(relative_air_density(*site_air(design)))
    limit = float(derated_onset_field(radius, density))
    found, bare = surface_field(point.chain, radius)
    margin = design.margins.voltage
    near = bare * margin**2 > limit
    rows = "; ".join(f"{row.name} {row.factor:g}, {row.evidence}" for row in ONSET_DERATINGS)
    finding = judge(
        _CORONA,
        found,
        limit,
        margin,
        bare_end=bare,
        power=point.power,
        powers=(
            point.power * (limit / (bare * margin**2)) ** 2 * (1.0 - 1e-9),
            point.power * (limit / bare) ** 2 * (1.0 - 1e-9),
        ),
        thin=f"the onset is lowered by what nobody measured on it ({rows})" if near else "",
        provenance="common practice",
    )
    return finding.model_copy(update={"because": f"{finding.because}; points, ends and wet metal glow earlier"})
