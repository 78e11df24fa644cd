"""One transmission with the fields about its loop, computed once for all rules, tiers and places."""

from dataclasses import dataclass, replace

from magsafe.analysis.exposure import Basis, Use, bases, key_down, use_of
from magsafe.analysis.field_source import FAR, field_source
from magsafe.analysis.keepout import Shells, reach_weight, shells
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.people import Strongest, at_places
from magsafe.analysis.wires import extent
from magsafe.design.model import Design
from magsafe.rules.limit import WHO, Rule, load_rule


@dataclass(frozen=True, slots=True)
class View:
    """The fields of one transmission at all places and about the loop.

    `unknown` is why no field is known, `doubt` why those computed do not hold; both empty otherwise. `around` is None
    where nothing is known or no rule is named. The factors are of squares: without credit for typical losses over with
    it, and likely over dangerous.
    """

    design: Design
    point: OperatingPoint
    use: Use
    unknown: str
    doubt: str
    strongest: dict[str, Strongest]
    around: Shells | None
    bare_factor: float
    likely_factor: float

    @property
    def at_loop(self) -> float:
        """Most power at the loop for each watt at the transmitter."""
        return (self.point.power_at_loop.high or 0.0) / self.point.power

    @property
    def title(self) -> str:
        """What the transmission is called."""
        index = next(i for i, each in enumerate(self.design.transmission) if each is self.point.transmission)
        return self.design.titles[index]

    @property
    def margin(self) -> float:
        """The exposure margin as a ratio of fields."""
        return self.design.margins.exposure_ratio

    def bases(self, rule: Rule, who: str) -> tuple[Basis, ...]:
        """Return the bases of a rule for one tier at this frequency."""
        return bases(rule, "trained" if who == "trained" else "public", self.point.transmission.frequency)


def view_of(design: Design, point: OperatingPoint, together: int = 1) -> View:
    """Return the view of a transmission that is worked in turn with so many others, itself counted."""
    unknown, doubt, use = _unknown(design, point), metal_near(design), use_of(point.transmission)
    if unknown or not design.site.rules:
        return View(design, point, use, unknown, doubt, {}, None, 1.0, 1.0)
    far = field_source(design, point, FAR)
    found = at_places(design, point, tuple(design.place))
    strongest = {place.name: each for place, each in zip(design.place, found, strict=True)}
    view = View(design, point, use, unknown, doubt, strongest, None, far.bare_factor, far.likely_factor)
    heaviest = max(
        reach_weight(view.bases(load_rule(name), who), each, view.at_loop, view.margin, far.bare_factor)
        for name in design.site.rules
        for who in WHO
        for each in (use, key_down(point.power))
    )
    # Twice for rules that add the electric to the magnetic share.
    return replace(view, around=shells(far, heaviest * (1 if together == 1 else 2 * together)))


def counts_mean(view: View, rule: Rule, basis: Basis, found: Strongest) -> bool:
    """Return whether the mean over the body decides: the design asks for it and the rule lets it, this near."""
    asked = view.design.site.over_the_body == "mean of squares"
    return asked and allows_mean(rule, basis, found)


def allows_mean(rule: Rule, basis: Basis, found: Strongest) -> bool:
    """Return whether a rule averages a basis over the body of somebody at a place, which must be a posture."""
    body = rule.body
    return body.mean and basis.name in body.bases and found.means is not None and found.nearest >= (body.nearest or 0.0)


def judged_squares(view: View, rule: Rule, basis: Basis, found: Strongest) -> tuple[float, float]:
    """Return the electric and magnetic squares for each watt at the loop that a basis is judged by."""
    if found.means is not None and counts_mean(view, rule, basis, found):
        return found.means.electric, found.means.magnetic
    return found.electric, found.magnetic


def _unknown(design: Design, point: OperatingPoint) -> str:
    """Return why no field is known; empty where it is."""
    if point.out_of_range:
        return "; ".join(point.out_of_range)
    if design.loop.centre_height is None and design.ground_name != "none":
        return "loop.centre_height is not given"
    if design.loop.centre_height is None and design.place:
        return "loop.centre_height is not given, and places have their heights above ground"
    return ""


def metal_near(design: Design) -> str:
    """Return why computed fields do not hold near metal; empty where none is that near."""
    near, across = design.site.metal_within, 2.0 * extent(design)
    if near is None or near >= across:
        return ""
    return f"metal is within {near:.3g} m, nearer than one loop diameter ({across:.3g} m): fields there are not proven"
