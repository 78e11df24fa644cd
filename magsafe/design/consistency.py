"""Keys held against each other. Works on the raw tree of the file, so that one bad value hides no other.

Each rule yields problems as (path, found, expected, do). A value that cannot be read counts as absent here: its own
message comes from the model.
"""

from collections.abc import Callable, Iterator

from pydantic import ValidationError

from magsafe.design import shape
from magsafe.design.feed_consistency import feed_complaints
from magsafe.design.model import KINDS, Loop
from magsafe.design.people_consistency import people_complaints
from magsafe.design.quantities import show
from magsafe.design.raw_tree import (
    Complaint,
    Tree,
    block_at,
    blocks_at,
    either,
    missing,
    not_here,
    size_of,
    word_of,
)
from magsafe.units import (
    CAPACITANCE,
    LENGTH,
    plain,
)

_SIZES = {
    "circle": ("diameter", "perimeter"),
    "polygon": ("side", "across_flats", "perimeter"),
    "rectangle": ("width", "height"),
    "outline": ("points",),
}
_ALL_SIZES = ("diameter", "perimeter", "sides", "side", "across_flats", "width", "height", "points")
_FORMS = {
    "rod": ("outer_diameter",),
    "tube": ("outer_diameter", "wall"),
    "strip": ("width", "thickness"),
    "braid": ("outer_diameter",),
    "corrugated": ("outer_diameter",),
}
_ALL_FORM_KEYS = ("outer_diameter", "wall", "width", "thickness", "strip_lies")
_AIR_KINDS = ("air variable", "split-stator air", "butterfly air")


def complaints(tree: Tree) -> Iterator[Complaint]:
    """Yield everything in the file that does not fit together."""
    rules: tuple[Callable[[Tree], Iterator[Complaint]], ...] = (
        _loop_sizes,
        _turns,
        _conductor_form,
        _conductor_metal,
        _thickness,
        _outline,
        _above_ground,
        _capacitor_value,
        _capacitor_ratings,
        _padding_ratings,
        _sleeve,
        _capacitor_kind,
    )
    for rule in rules:
        yield from rule(tree)
    yield from feed_complaints(tree)
    yield from people_complaints(tree)


def _loop_sizes(tree: Tree) -> Iterator[Complaint]:
    loop = block_at(tree, "loop")
    kind = word_of(loop, "shape")
    if kind not in _SIZES:
        return
    wanted = _SIZES[kind]
    allowed = (*wanted, "sides") if kind == "polygon" else wanted
    for key in _ALL_SIZES:
        if key in loop and key not in allowed:
            yield not_here(("loop",), loop, key, f"a {kind} is given by {' or '.join(wanted)}", "remove it")
    if kind == "rectangle":
        for key in wanted:
            if key not in loop:
                yield missing(("loop",), key, "width and height of the rectangle", '"1.2 m"')
    elif not any(key in loop for key in wanted):
        example = '[["0 m", "0 m"], ...]' if kind == "outline" else '"1.0 m"'
        yield missing(("loop",), wanted[0], f"{' or '.join(wanted)} of the {kind}", example)
    elif kind != "outline":
        yield from either(("loop",), loop, wanted, "the others follow from it")
    if kind == "polygon" and "sides" not in loop:
        yield missing(("loop",), "sides", "the number of sides, 3 to 24", "8")


def _turns(tree: Tree) -> Iterator[Complaint]:
    loop = block_at(tree, "loop")
    turns = loop.get("turns", 1)
    if not isinstance(turns, int) or turns < 2:
        return
    if "turn_spacing" not in loop:
        yield missing(("loop",), "turn_spacing", "centre to centre, needed from 2 turns up", '"80 mm"')
    spacing, thick = size_of(loop, "turn_spacing"), _conductor_across(loop)
    if spacing is not None and thick is not None and spacing <= thick:
        yield (
            ("loop", "turn_spacing"),
            show(loop["turn_spacing"]),
            f"more than the conductor's {plain(thick, LENGTH)}: nearer, the turns touch",
            "measure it from centre to centre",
        )
    made = _readable_loop(loop)
    if made is None or thick is None or made.turn_arrangement != "nested":
        return
    room = shape.room_inside(made)
    if room is not None and room <= thick:
        yield (
            ("loop", "turns"),
            show(turns),
            "fewer nested turns, or a closer turn_spacing: there is no room for the innermost one",
            'use fewer turns, or turn_arrangement = "side by side"',
        )


def _conductor_across(loop: Tree) -> float | None:
    conductor = block_at(loop, "conductor")
    key = "width" if word_of(conductor, "form") == "strip" else "outer_diameter"
    return size_of(conductor, key)


def _conductor_form(tree: Tree) -> Iterator[Complaint]:
    conductor, path = block_at(tree, "loop", "conductor"), ("loop", "conductor")
    form = word_of(conductor, "form")
    if form not in _FORMS:
        return
    wanted = _FORMS[form]
    for key in wanted:
        if key not in conductor:
            yield missing(path, key, f"{' and '.join(wanted)} of a {form}", '"1.0 mm"')
    allowed = (*wanted, "strip_lies") if form == "strip" else wanted
    for key in _ALL_FORM_KEYS:
        if key in conductor and key not in allowed:
            yield not_here(path, conductor, key, f"a {form} is given by {' and '.join(wanted)}", "remove it")
    wall, across = size_of(conductor, "wall"), size_of(conductor, "outer_diameter")
    if form == "tube" and wall is not None and across is not None and wall >= across / 2.0:
        yield (
            (*path, "wall"),
            show(conductor["wall"]),
            f"less than half the outer diameter ({plain(across / 2.0, LENGTH)})",
            'check both, or write form = "rod"',
        )
    width, thick = size_of(conductor, "width"), size_of(conductor, "thickness")
    if form == "strip" and width is not None and thick is not None and thick > width:
        yield (
            (*path, "thickness"),
            show(conductor["thickness"]),
            f"at most the width ({plain(width, LENGTH)})",
            "exchange the two",
        )


def _conductor_metal(tree: Tree) -> Iterator[Complaint]:
    conductor, path = block_at(tree, "loop", "conductor"), ("loop", "conductor")
    metal = ("material", "conductivity")
    yield from either(path, conductor, metal, "both say how well it conducts")
    if conductor and not any(key in conductor for key in metal):
        yield missing(path, "material", "a material, or a conductivity", '"copper tube"')
    for index, joint in blocks_at(block_at(tree, "loop"), "joint"):
        if "kind" not in joint and "resistance" not in joint:
            yield missing(("loop", "joint", index), "kind", "a kind, or the resistance of one", '"bolted lug"')


def _thickness(tree: Tree) -> Iterator[Complaint]:
    loop = block_at(tree, "loop")
    across, narrowest = _conductor_across(loop), _narrowest(loop)
    if across is None or narrowest is None or across < narrowest / 2.0:
        return
    key = "width" if word_of(block_at(loop, "conductor"), "form") == "strip" else "outer_diameter"
    yield (
        ("loop", "conductor", key),
        show(loop["conductor"][key]),
        f"less than half the loop's narrowest width ({plain(narrowest / 2.0, LENGTH)})",
        "check the conductor and the loop's size: the conductor is thicker than the loop is open",
    )


def _narrowest(loop: Tree) -> float | None:
    """Return twice the least distance from the centre to the turn's centre line [m], as far as it is known."""
    made = _readable_loop(loop)
    if made is None:
        return None
    line = shape.outline(made)
    if made.shape == "rectangle":
        return min(made.width or 0.0, made.height or 0.0)
    return 4.0 * line.area / line.perimeter


_GEOMETRY = (*_ALL_SIZES, "shape")
_WINDING = ("turns", "turn_spacing", "turn_arrangement", "plane")


def _readable_loop(loop: Tree) -> Loop | None:
    """Return the loop's geometry alone, if that can be read, however wrong its other keys are."""
    geometry = {key: loop[key] for key in _GEOMETRY if key in loop}
    winding = {key: loop[key] for key in _WINDING if key in loop}
    made = _valid_loop({**geometry, **winding}) or _valid_loop(geometry)
    if made is None:
        return None
    try:
        line = shape.outline(made)
    except (ValueError, ZeroDivisionError):  # an outline without points has no size at all
        return None
    return made if line.perimeter > 0.0 and line.area > 0.0 else None


def _valid_loop(geometry: Tree) -> Loop | None:
    try:
        return Loop.model_validate({**geometry, "conductor": {"form": "rod"}})
    except ValidationError:
        return None


def _outline(tree: Tree) -> Iterator[Complaint]:
    loop, path = block_at(tree, "loop"), ("loop", "points")
    if word_of(loop, "shape") != "outline":
        return
    try:
        geometry = {"shape": "outline", "points": loop.get("points"), "conductor": {"form": "rod"}}
        points = [(x, y) for x, y in Loop.model_validate(geometry).points or []]
    except ValidationError:
        return
    found = show(loop["points"]) if points else ""
    if len(set(points)) < len(points):
        expected = "each corner once: the outline closes by itself"
        yield path, found, expected, "remove the repeated corner"
    elif points and shape.crosses_itself(points):
        expected = "an outline that does not cross or touch itself"
        yield path, found, expected, "put the corners in the order in which the conductor runs"
    elif points and _readable_loop(loop) is None:
        yield path, found, "corners that enclose an area", "check the points"


def _above_ground(tree: Tree) -> Iterator[Complaint]:
    loop = block_at(tree, "loop")
    height, made = size_of(loop, "centre_height"), _readable_loop(loop)
    if height is None or made is None or block_at(tree, "site").get("ground") == "none":
        return
    lowest = shape.drop(made) + (_conductor_across(loop) or 0.0) / 2.0
    if height <= lowest:
        yield (
            ("loop", "centre_height"),
            show(loop["centre_height"]),
            f"more than {plain(lowest, LENGTH)}, or the loop reaches into the ground",
            'raise it, or write site.ground = "none" for free space',
        )


# The capacitor ---------------------------------------------------------------------------------------------


def _capacitor_value(tree: Tree) -> Iterator[Complaint]:
    capacitor, path = block_at(tree, "capacitor"), ("capacitor",)
    yield from either(path, capacitor, ("capacitance", "fixed"), "it is variable or it is not")
    if "tolerance" in capacitor and "fixed" not in capacitor:
        yield not_here(path, capacitor, "tolerance", "a tolerance of a fixed value", "add fixed, or remove it")
    ends = block_at(capacitor, "capacitance")
    least, most = size_of(ends, "min", CAPACITANCE), size_of(ends, "max", CAPACITANCE)
    if least is not None and most is not None and least >= most:
        yield (
            ("capacitor", "capacitance"),
            show(ends),
            "min below max",
            'exchange the two, or write fixed = "47 pF" for a fixed capacitor',
        )
    yield from either(path, capacitor, ("quality_factor", "series_resistance"), "both say what it loses")


_COMPANIONS = {
    "rated_voltage_kind": "rated_voltage",
    "rated_current_at": "rated_current",
    "quality_factor_at": "quality_factor",
    "plate_edge": "plate_thickness",
}


def _capacitor_ratings(tree: Tree) -> Iterator[Complaint]:
    capacitor = block_at(tree, "capacitor")
    for key, companion in _COMPANIONS.items():
        if key in capacitor and companion not in capacitor:
            yield not_here(
                ("capacitor",),
                capacitor,
                key,
                f"{companion} beside it",
                f"add {companion}, or remove {key}",
            )


def _padding_ratings(tree: Tree) -> Iterator[Complaint]:
    for index, part in blocks_at(block_at(tree, "capacitor"), "with"):
        for key in ("rated_voltage_kind", "rated_current_at"):
            companion = _COMPANIONS[key]
            if key in part and companion not in part:
                advice = f"add {companion}, or remove {key}"
                yield not_here(("capacitor", "with", index), part, key, f"{companion} beside it", advice)


def _sleeve(tree: Tree) -> Iterator[Complaint]:
    capacitor = block_at(tree, "capacitor")
    inner, outer = size_of(capacitor, "inner_diameter"), size_of(capacitor, "outer_diameter")
    if inner is not None and outer is not None and inner >= outer:
        yield (
            ("capacitor", "inner_diameter"),
            show(capacitor["inner_diameter"]),
            f"less than outer_diameter ({plain(outer, LENGTH)}): both are diameters of the dielectric",
            "exchange the two",
        )


def _capacitor_kind(tree: Tree) -> Iterator[Complaint]:
    capacitor, path = block_at(tree, "capacitor"), ("capacitor",)
    kind = word_of(capacitor, "kind")
    if kind == "none":
        for key in capacitor:
            if key not in ("kind", "position"):
                yield not_here(
                    path,
                    capacitor,
                    key,
                    'nothing else beside kind = "none"',
                    "remove it, or name the kind",
                )
        return
    if kind not in KINDS:
        return
    for key in ("gap", "plate_thickness", "plate_edge", "sections_in_series"):
        if key in capacitor and kind not in (*_AIR_KINDS, "dielectric plate"):
            yield not_here(
                path,
                capacitor,
                key,
                f"an air kind ({', '.join(_AIR_KINDS)})",
                "remove it, or name the kind",
            )
    if kind == "dielectric plate" and word_of(capacitor, "dielectric") == "air":
        yield (
            (*path, "dielectric"),
            show(capacitor["dielectric"]),
            "a solid dielectric between the plates: of plates in air their edges and their thickness decide",
            'write kind = "air variable" with gap, plate_thickness and plate_edge; remove dielectric and plate_area',
        )


# Use -------------------------------------------------------------------------------------------------------
