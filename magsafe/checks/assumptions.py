"""What was assumed because the design does not state it, in plain sentences for the sheet."""

from collections.abc import Iterator, Sequence

from magsafe import words
from magsafe.analysis.gap import has_air_gap
from magsafe.analysis.line_capacitor import is_complete
from magsafe.analysis.losses import UNKNOWN_FIXED, capacitor_typical
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.rated_current import is_rated_for_heat
from magsafe.analysis.rated_voltage import RATED_TO
from magsafe.design import tables, warmth_tables
from magsafe.design.as_built import standing
from magsafe.design.implied import AT_THE_CAPACITOR
from magsafe.design.model import Design, SoilConstants


def assumptions(design: Design, points: Sequence[OperatingPoint]) -> tuple[str, ...]:
    """Return the assumptions behind a sheet, most weighty first."""
    found = (
        *_measured(design, points),
        *_ground(design, points),
        *_losses(design),
        *_feed(design),
        *_use(design),
        *_people(design),
        *_methods(design, points),
        *_volts(design),
        *_amps(design),
        *_kept(design),
    )
    return tuple(dict.fromkeys(found))


def _measured(design: Design, points: Sequence[OperatingPoint]) -> Iterator[str]:
    """Yield which figures rest on a measurement, and which records in the file count for nothing."""
    used = set()
    for title, point in zip(design.titles, points, strict=True):
        found = standing(design, point.transmission.frequency)
        if found is None:
            continue
        used.add(id(found.record))
        if point.chain is not None and point.chain.measured != point.chain.read:
            yield (
                f"{words.short(title)}: the likely values rest on the Q of {words.short(found.record.date or '')}, "
                "all of which lies below what the parts make, so volts, amps and fields at worst are by the parts."
            )
        elif point.chain is not None and point.chain.measured is not None:
            yield (
                f"{words.short(title)}: Q, total resistance, volts, amps, fields and efficiency rest on the Q measured "
                f"on {words.short(found.record.date or '')}, as the loop stood that day; rain, salt, loose clamps and "
                "things near it change it. For volts, amps and fields the upper end of its 95 % counts."
            )
    for record in design.measured:
        if id(record) not in used:
            where = "without a frequency" if record.frequency is None else f"at {words.frequency(record.frequency)}"
            yield f"A record in [measured] {where} belongs to no transmission and counts for nothing."


def _ground(design: Design, points: Sequence[OperatingPoint]) -> Iterator[str]:
    name = design.ground_name
    if name == "none":
        yield "Free space only: no ground, floor or wall is near, as the design states."
        return
    if points and all(point.chain is not None and point.chain.measured is not None for point in points):
        yield "What the ground takes of the measured resistance is as computed; efficiency goes by that."
    elif any(point.ground_left_out for point in points):
        yield (
            "Likely values leave the ground out. Volts and amps at worst take the least resistance that free space, "
            "a perfect plane or any soil can give."
        )
    elif name != "perfect":
        yield (
            f"{_soil(design)}. Volts, amps and fields at worst take the least resistance of free space, a perfect "
            "plane and all of that soil."
        )
    if name not in (None, "perfect"):
        yield (
            "The soil is flat, even and without end. What it takes is by the conductor's current and charge; the "
            "electric field of the capacitor's own body, wet trees, rebar and other metal are not computed."
        )
    if name is None:
        yield "site.ground is not given: any ground is taken as possible."
    if design.loop.centre_height is None:
        yield "loop.centre_height is not given: any height is taken as possible."


def _soil(design: Design) -> str:
    """Return the span of soil that is counted, and where it comes from."""
    stated = design.site.ground
    if isinstance(stated, SoilConstants):
        conductivity, permittivity = stated.conductivity, stated.permittivity
        span = _span(1e3 * conductivity.low, 1e3 * conductivity.high), _span(permittivity.low, permittivity.high)
        return f"The soil has {span[0]} mS/m and a relative permittivity of {span[1]}, as stated"
    row = tables.soils()[stated or ""]
    siemens, relative = (
        _span(scale * (each.low or 0.0), scale * (each.high or 0.0))
        for each, scale in ((row.conductivity, 1e3), (row.permittivity, 1.0))
    )
    return (
        f"{row.name}: {siemens} mS/m and a relative permittivity of {relative} are taken ({row.source}; "
        f"{row.provenance}), for constants of one plot vary tenfold"
    )


def _span(low: float, high: float) -> str:
    return f"{low:.3g}" if low == high else f"{low:.3g} to {high:.3g}"


def _losses(design: Design) -> Iterator[str]:
    conductor, part = design.loop.conductor, design.capacitor
    if conductor.material is not None:
        row = tables.materials()[conductor.material]
        yield (
            f"{row.name}: {row.conductivity / 1e6:.3g} MS/m at 20 degC, give or take {100 * row.scatter:.3g} % "
            f"({row.source}; {row.provenance})."
        )
    yield (
        f"For volts and amps the conductor is at {conductor.temperature - 273.15:.3g} degC, as at the start of an "
        f"over: each 10 K colder adds about 1 % to the volts{_cold(design)}. Roughness and oxide may add 10 % to its "
        "resistance (common practice)."
    )
    yield from _warmth(design)
    if conductor.conductivity is not None:
        yield "The stated conductivity is taken as that at 20 degC, and to follow the temperature as copper does."
    if part.kind == "none":
        return
    stated = part.quality_factor or part.series_resistance
    typical = capacitor_typical(part)
    if stated is None and is_complete(part):
        yield from _sizes(design)
    elif stated is None or stated.single:
        what = "not stated" if stated is None else "a single value, which is no low end for volts"
        yield (
            f"The capacitor's losses are {what}: Q {typical.low:.0f} to {typical.high:.0f} is typical of its kind "
            f"({part.kind}, common practice). No verdict is clear by that credit."
        )
    if part.quality_factor_at is not None:
        yield (
            "The capacitor's Q at another frequency than stated may be off either way by their ratio to the power of "
            "1.5 (common practice). No verdict is clear by that credit."
        )
    yield from _padding(design)
    for joint in design.loop.joint:
        if joint.resistance is None and joint.kind is not None:
            row_of = tables.joint_resistance(joint.kind)
            low, high = (words.number(v or 0.0, "ohm", "mΩ") for v in (row_of.low, row_of.high))
            yield (
                f"Joint {joint.name}: {low} to {high} mΩ each is typical of a {joint.kind} (common practice). "
                "No verdict is clear by that credit."
            )
    if not design.loop.joint:
        yield (
            "No joints are given: none is counted, which is the dangerous side for volts and the good side for "
            "efficiency."
        )


def _sizes(design: Design) -> Iterator[str]:
    """Yield what a capacitor made at home is taken to lose."""
    part = design.capacitor
    if part.dielectric != "air":
        row = warmth_tables.dielectrics()[part.dielectric or ""]
        spans = (f"{each.low:.3g} to {each.high:.3g}" for each in (row.permittivity, row.loss_tangent))
        permittivity, tangent = spans
        yield (
            f"{row.name}: relative permittivity {permittivity}, loss tangent {tangent} ({row.source}; "
            f"{row.provenance}). No verdict is clear by what it loses."
        )
    metals = {
        "coaxial stub": "the cable of copper, its outer conductor losing 1 to 3 times what smooth copper does, its "
        "inner one 1 to 1.25 times",
        "trombone": "its tubes of the loop's own metal",
        "dielectric plate": "its plates to lose what those of an air variable do",
    }
    yield f"The capacitor's losses follow from its sizes, {metals[part.kind]} (common practice)."


def _padding(design: Design) -> Iterator[str]:
    """Yield how padding is taken to be joined, and what is not stated of it."""
    parts = design.capacitor.padding
    if parts:
        yield (
            "Padding: parallel parts are taken as joined across the capacitor first, series parts to all of that; each "
            "on the frequencies that its own `on` lists, and on no other."
        )
    if any(part.quality_factor is None or part.quality_factor.single for part in parts):
        q = tables.capacitor_quality_factor(UNKNOWN_FIXED)
        yield (
            f"The Q of padding is not stated, or a single value: {q.low:.0f} to {q.high:.0f} is taken for a part whose "
            "kind is not known (common practice). No verdict is clear by that credit."
        )


def _warmth(design: Design) -> Iterator[str]:
    """Yield what is taken of air, sun and surface, where nothing is stated."""
    conductor, site = design.loop.conductor, design.site
    if site.air_temperature is None or site.altitude is None:
        hot = "" if site.air_temperature is not None else "air of 40 degC"
        high = "" if site.altitude is not None else "the thin air of 2000 m"
        taken = " and ".join(filter(None, (hot, high)))
        yield f"Warmth and air gaps: {taken} {'are' if hot and high else 'is'} taken."
    if conductor.in_sun is None:
        yield "loop.conductor.in_sun is not given: no sun is counted, which can warm a conductor by 40 K and more."
    if conductor.surface is None:
        yield "loop.conductor.surface is not given: bright or oxidised, whichever is the hotter."
    yield (
        "Warmth is that of still air, where the current is largest; speech and keying are averaged over the over, and "
        "no heat is led along the conductor but from joints."
    )


def _cold(design: Design) -> str:
    air = design.site.air_temperature
    if air is None or air >= design.loop.conductor.temperature:
        return ""
    return f"; volts and amps at worst take the air's {air - 273.15:.3g} degC"


def _feed(design: Design) -> Iterator[str]:
    loss = design.feed.line_loss
    if loss is None:
        yield "feed.line_loss is not given: all of the transmitter's power is taken to arrive at the loop."
    elif loss.single:
        yield "The line loss is a single value: for volts and amps the line is taken to lose nothing."
    if design.capacitor.kind == "none":
        yield "All of the power that the line leaves is taken to enter the loop, whatever its SWR."
    else:
        yield (
            "The loop is matched at its resonance. The capacitor's terminals are about 20 to 100 mm apart, and three "
            "conductor radii at least; a narrower gap's end faces belong to the capacitor."
        )
    if design.capacitor.kind != "none" and design.feed.coupling in ("small loop", "none stated"):
        small = design.feed.small_loop
        if small is None or small.wire is None:
            yield "The coupling loop's wire is not stated: 4 mm is taken."
        if small is None:
            yield "Where the coupling loop lies is not stated: the middle of the loop is taken, in its plane."


def _use(design: Design) -> Iterator[str]:
    for transmission in design.transmission:
        band = tables.band_of(transmission.frequency)
        if band is None:
            yield (
                f"{words.frequency(transmission.frequency)} lies in no amateur band of any ITU region "
                "(Radio Regulations, Article 5, from memory): the station's licence decides."
            )
        if transmission.carrier_power is not None:
            yield "Of an AM carrier, the envelope's crest is taken as 4 times its power (full modulation)."
    if design.margins.overshoot == 0.0:
        yield "No overshoot of the envelope at key-down is counted (margins.overshoot); 1 to 2 dB is common practice."


def _people(design: Design) -> Iterator[str]:
    if not design.site.rules:
        return
    yield (
        "Fields are of the loop alone, with nobody present, RMS over all components, the stronger of free space and of "
        "a perfect plane below, each with the current that the loop would draw there."
        if design.ground_name != "none"
        else "Fields are of the loop alone in free space, with nobody present, RMS over all components."
    )
    if design.site.over_the_body == "mean of squares":
        yield (
            "Where a rule averages over the body, a posture is judged by the mean of squares on the worst upright "
            "line of a column 0.3 m either way of the place, as site.over_the_body asks, elsewhere at its worst "
            "point; keep-out distances and fences rest on the worst point."
        )
    else:
        yield "A person is judged at the worst point of a column 0.3 m either way of the place, not at the body's mean."
    yield from _turns(design)
    if design.site.metal_within is None:
        yield "site.metal_within is not given: no metal is taken to be nearer than one loop diameter."
    if design.loop.plane == "vertical" and design.capacitor.position is None:
        yield "capacitor.position is not given: fields are the strongest of top, bottom and side."
    if design.site.floors is None:
        yield "site.floors is not given: people stand on the ground alone."
    for title, transmission in zip(design.titles, design.transmission, strict=True):
        if transmission.over is None and transmission.on_air_share is None:
            yield f"{title}: neither over nor on_air_share is given, so it is taken as always on the air."
        elif transmission.over is not None:
            yield (
                f"{title}: no over is longer than stated and no pause shorter. Shorter overs with shorter "
                "pauses can fill more of a window."
            )
        if transmission.tune_up is not None:
            yield (f"{title}: one tune-up in any averaging time, beside the overs.")


def _turns(design: Design) -> Iterator[str]:
    """Yield what is taken of whoever tunes, and of transmissions that follow one another."""
    if any(place.name == AT_THE_CAPACITOR for place in design.place):
        yield (
            'tuning.by = "hand at the loop" puts somebody at the capacitor, and no place while tuning lies within a '
            "metre of it: a trained person is taken, half a metre before it, at its height."
        )
    together = {name for names in design.site.sessions for name in names}
    if together:
        yield (
            "In a session one transmitter works one transmission at a time. Within any averaging time each may fill "
            "its own largest share, all of them the whole of it, and the worst division counts, each with the fields "
            "at its own worst point. Each tunes up once in that time: tuning at every change of band is more."
        )
    if len(design.transmission) > 1 and len(together) < len(design.transmission):
        what = "These transmissions are" if not together else "Transmissions that no session lists are"
        yield f"{what} taken to be worked an averaging time apart: list in site.sessions what is worked in turn."


def _methods(design: Design, points: Sequence[OperatingPoint]) -> Iterator[str]:
    loop = design.loop
    if any(point.opinion is None and not point.out_of_range for point in points):
        yield "Where no loop.methods_agree is told, no closed form reaches the loop: the solved current stands alone."
    if loop.turns > 1:
        turns = "beside their plane" if loop.turn_arrangement == "nested" else "outside them"
        yield (
            f"The turns are closed by a link one spacing {turns}, with the capacitor in its middle. They are bare: "
            "insulation between them would lower the frequency up to which a capacitor tunes the loop."
        )
    kind = tables.conductor_factor(loop.conductor.form)
    if kind.high != 1.0:
        yield (
            f"The resistance of a {loop.conductor.form} conductor is taken as {kind.low:g} to {kind.high:g} times that "
            "of a smooth one (common practice). No verdict is clear by that credit."
        )
    if loop.conductor.form == "strip":
        yield (
            "The strip is bent so gently that it is as good as straight; which way it lies changes nothing that is "
            "computed."
        )


def _volts(design: Design) -> Iterator[str]:
    """Yield what is taken of the capacitor's gap and rating."""
    part = design.capacitor
    if has_air_gap(part):
        yield (
            "Air gap: the plates are clean and as warm as the air or the conductor, whichever is the warmer; no credit "
            "for dry or humid air."
        )
        if part.plate_edge is None:
            yield "capacitor.plate_edge is not given: square-cut edges are taken."
        if part.kind != "air variable" and part.sections_in_series is None:
            yield "capacitor.sections_in_series is not given: one gap is counted."
    else:
        keys = {"plate_thickness": part.plate_thickness, "sections_in_series": part.sections_in_series}
        why = "a rating is of the part as connected" if part.gap is None else "its dielectric is judged as it is"
        for key in (key for key, value in keys.items() if value is not None):
            yield f"capacitor.{key}: without a gap of air it changes nothing; {why}."
    if part.rated_voltage is not None and design.site.altitude is None:
        yield f"site.altitude is not given: the capacitor's voltage rating holds as it stands, as to {RATED_TO:g} m."


def _amps(design: Design) -> Iterator[str]:
    """Yield in which air ratings of heat are taken to hold."""
    if design.site.air_temperature is None and is_rated_for_heat(design):
        yield "site.air_temperature is not given: current ratings hold as for air of 25 to 30 degC."


def _kept(design: Design) -> Iterator[str]:
    if design.capacitor.wiper and design.capacitor.kind != "air variable":
        yield "capacitor.wiper: its resistance counts only if it is stated as a joint."
    if design.loop.turns == 1 and design.loop.turn_spacing is not None:
        yield "loop.turn_spacing: one turn has none, so it changes nothing."
    if design.capacitor.weather == "open":
        yield "The capacitor stands in the open: rain, dew, salt and insects take away any voltage rating."
    if design.capacitor.stray > 0.0:
        stray = words.amount(design.capacitor.stray, "F")
        yield f"Stray capacitance of {stray} is counted as part of the capacitor's range."
