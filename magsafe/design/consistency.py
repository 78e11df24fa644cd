"""Keys held against each other. Works on the raw tree of the file, so that one bad value hides no other.

Each rule yields problems as (path, found, expected, do). A value that cannot be read counts as absent here: its own
message comes from the model.
"""

from collections.abc import Callable, Iterator
from typing import Any

from pydantic import ValidationError

from magsafe.design import shape
from magsafe.design.model import AM_CREST, KINDS, Loop
from magsafe.design.quantities import show
from magsafe.units import (
    CAPACITANCE,
    LENGTH,
    POWER,
    Kind,
    QuantityError,
    plain,
    read_quantity,
)

Tree = dict[str, Any]
Path = tuple[str | int, ...]
Complaint = tuple[Path, str, str, str]

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
        _capacitor_kind,
        _transmissions,
        _plane,
        _places,
        _names,
        _rules,
    )
    for rule in rules:
        yield from rule(tree)


# Reading of the raw tree -----------------------------------------------------------------------------------


def _block(tree: Any, *path: str) -> Tree:
    for key in path:
        tree = tree.get(key) if isinstance(tree, dict) else None
    return tree if isinstance(tree, dict) else {}


def _blocks(tree: Tree, key: str) -> list[tuple[int, Tree]]:
    found = tree.get(key)
    items = found if isinstance(found, list) else []
    return [(i, item) for i, item in enumerate(items) if isinstance(item, dict)]


def _size(block: Tree, key: str, kind: Kind = LENGTH) -> float | None:
    try:
        return read_quantity(block.get(key), kind)
    except QuantityError:
        return None


def _word(block: Tree, key: str, default: str = "") -> str:
    value = block.get(key, default)
    return value if isinstance(value, str) else ""


def _missing(path: Path, key: str, because: str, example: str) -> Complaint:
    return (*path, key), "nothing", because, f"add {key} = {example}"


def _not_here(path: Path, block: Tree, key: str, why: str, do: str) -> Complaint:
    return (*path, key), show(block[key]), why, do


def _either(path: Path, block: Tree, keys: tuple[str, ...], why: str) -> Iterator[Complaint]:
    given = [key for key in keys if key in block]
    for key in given[1:]:
        yield _not_here(path, block, key, f"only one of {', '.join(keys)}: {why}", f"keep {given[0]} or {key}")


# The loop --------------------------------------------------------------------------------------------------


def _loop_sizes(tree: Tree) -> Iterator[Complaint]:
    loop = _block(tree, "loop")
    kind = _word(loop, "shape")
    if kind not in _SIZES:
        return
    wanted = _SIZES[kind]
    allowed = (*wanted, "sides") if kind == "polygon" else wanted
    for key in _ALL_SIZES:
        if key in loop and key not in allowed:
            yield _not_here(("loop",), loop, key, f"a {kind} is given by {' or '.join(wanted)}", "remove it")
    if kind == "rectangle":
        for key in wanted:
            if key not in loop:
                yield _missing(("loop",), key, "width and height of the rectangle", '"1.2 m"')
    elif not any(key in loop for key in wanted):
        example = '[["0 m", "0 m"], ...]' if kind == "outline" else '"1.0 m"'
        yield _missing(("loop",), wanted[0], f"{' or '.join(wanted)} of the {kind}", example)
    elif kind != "outline":
        yield from _either(("loop",), loop, wanted, "the others follow from it")
    if kind == "polygon" and "sides" not in loop:
        yield _missing(("loop",), "sides", "the number of sides, 3 to 24", "8")


def _turns(tree: Tree) -> Iterator[Complaint]:
    loop = _block(tree, "loop")
    turns = loop.get("turns", 1)
    if not isinstance(turns, int) or turns < 2:
        return
    if "turn_spacing" not in loop:
        yield _missing(("loop",), "turn_spacing", "centre to centre, needed from 2 turns up", '"80 mm"')
    spacing, thick = _size(loop, "turn_spacing"), _conductor_across(loop)
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
    conductor = _block(loop, "conductor")
    key = "width" if _word(conductor, "form") == "strip" else "outer_diameter"
    return _size(conductor, key)


def _conductor_form(tree: Tree) -> Iterator[Complaint]:
    conductor, path = _block(tree, "loop", "conductor"), ("loop", "conductor")
    form = _word(conductor, "form")
    if form not in _FORMS:
        return
    wanted = _FORMS[form]
    for key in wanted:
        if key not in conductor:
            yield _missing(path, key, f"{' and '.join(wanted)} of a {form}", '"1.0 mm"')
    allowed = (*wanted, "strip_lies") if form == "strip" else wanted
    for key in _ALL_FORM_KEYS:
        if key in conductor and key not in allowed:
            yield _not_here(path, conductor, key, f"a {form} is given by {' and '.join(wanted)}", "remove it")
    wall, across = _size(conductor, "wall"), _size(conductor, "outer_diameter")
    if form == "tube" and wall is not None and across is not None and wall >= across / 2.0:
        yield (
            (*path, "wall"),
            show(conductor["wall"]),
            f"less than half the outer diameter ({plain(across / 2.0, LENGTH)})",
            'check both, or write form = "rod"',
        )
    width, thick = _size(conductor, "width"), _size(conductor, "thickness")
    if form == "strip" and width is not None and thick is not None and thick > width:
        yield (
            (*path, "thickness"),
            show(conductor["thickness"]),
            f"at most the width ({plain(width, LENGTH)})",
            "exchange the two",
        )


def _conductor_metal(tree: Tree) -> Iterator[Complaint]:
    conductor, path = _block(tree, "loop", "conductor"), ("loop", "conductor")
    metal = ("material", "conductivity")
    yield from _either(path, conductor, metal, "both say how well it conducts")
    if conductor and not any(key in conductor for key in metal):
        yield _missing(path, "material", "a material, or a conductivity", '"copper tube"')
    for index, joint in _blocks(_block(tree, "loop"), "joint"):
        if "kind" not in joint and "resistance" not in joint:
            yield _missing(("loop", "joint", index), "kind", "a kind, or the resistance of one", '"bolted lug"')


def _thickness(tree: Tree) -> Iterator[Complaint]:
    loop = _block(tree, "loop")
    across, narrowest = _conductor_across(loop), _narrowest(loop)
    if across is None or narrowest is None or across < narrowest / 2.0:
        return
    key = "width" if _word(_block(loop, "conductor"), "form") == "strip" else "outer_diameter"
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
    except ZeroDivisionError:
        return None
    return made if line.perimeter > 0.0 and line.area > 0.0 else None


def _valid_loop(geometry: Tree) -> Loop | None:
    try:
        return Loop.model_validate({**geometry, "conductor": {"form": "rod"}})
    except ValidationError:
        return None


def _outline(tree: Tree) -> Iterator[Complaint]:
    loop, path = _block(tree, "loop"), ("loop", "points")
    if _word(loop, "shape") != "outline":
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
    loop = _block(tree, "loop")
    height, made = _size(loop, "centre_height"), _readable_loop(loop)
    if height is None or made is None or _block(tree, "site").get("ground") == "none":
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
    capacitor, path = _block(tree, "capacitor"), ("capacitor",)
    yield from _either(path, capacitor, ("capacitance", "fixed"), "it is variable or it is not")
    if "tolerance" in capacitor and "fixed" not in capacitor:
        yield _not_here(path, capacitor, "tolerance", "a tolerance of a fixed value", "add fixed, or remove it")
    ends = _block(capacitor, "capacitance")
    least, most = _size(ends, "min", CAPACITANCE), _size(ends, "max", CAPACITANCE)
    if least is not None and most is not None and least >= most:
        yield (
            ("capacitor", "capacitance"),
            show(ends),
            "min below max",
            'exchange the two, or write fixed = "47 pF" for a fixed capacitor',
        )
    yield from _either(path, capacitor, ("quality_factor", "series_resistance"), "both say what it loses")


_COMPANIONS = {
    "rated_voltage_kind": "rated_voltage",
    "rated_current_at": "rated_current",
    "quality_factor_at": "quality_factor",
    "plate_edge": "plate_thickness",
}


def _capacitor_ratings(tree: Tree) -> Iterator[Complaint]:
    capacitor = _block(tree, "capacitor")
    for key, companion in _COMPANIONS.items():
        if key in capacitor and companion not in capacitor:
            yield _not_here(
                ("capacitor",),
                capacitor,
                key,
                f"{companion} beside it",
                f"add {companion}, or remove {key}",
            )


def _capacitor_kind(tree: Tree) -> Iterator[Complaint]:
    capacitor, path = _block(tree, "capacitor"), ("capacitor",)
    kind = _word(capacitor, "kind")
    if kind == "none":
        for key in capacitor:
            if key not in ("kind", "position"):
                yield _not_here(
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
            yield _not_here(
                path,
                capacitor,
                key,
                f"an air kind ({', '.join(_AIR_KINDS)})",
                "remove it, or name the kind",
            )


# Use -------------------------------------------------------------------------------------------------------


def _transmissions(tree: Tree) -> Iterator[Complaint]:
    for index, block in _blocks(tree, "transmission"):
        path = ("transmission", index)
        if "power" not in block and "carrier_power" not in block:
            yield _missing(path, "power", "the peak envelope power at the transmitter", '"100 W"')
        yield from _either(path, block, ("power", "carrier_power"), "both say how strong it is")
        if "carrier_power" in block and _word(block, "mode") != "AM":
            yield _not_here(
                path,
                block,
                "carrier_power",
                'mode = "AM" beside it',
                "write power, the peak envelope power",
            )
        yield from _either(path, block, ("mode", "duty"), "a mode has its duty")
        yield from _either(path, block, ("over", "on_air_share"), "both say how long it is on the air")
        power, carrier = _size(block, "power", POWER), _size(block, "carrier_power", POWER)
        if power is None and carrier is not None:
            power = AM_CREST * carrier
        tune = _size(_block(block, "tune_up"), "power", POWER)
        if power is not None and tune is not None and tune > power:
            yield (
                (*path, "tune_up", "power"),
                show(block["tune_up"]["power"]),
                f"at most the envelope power ({plain(power, POWER)}), which the ratings are held against",
                "tune with less, or state the larger as power",
            )


def slug(name: str) -> str:
    """Return a name as it stands in the id of a finding: letters, digits and hyphens, lower case."""
    kept = "".join(c if c.isalnum() else " " for c in name.casefold())
    return "-".join(kept.split())


def _plane(tree: Tree) -> Iterator[Complaint]:
    plane = _word(_block(tree, "loop"), "plane", "vertical")
    capacitor = _block(tree, "capacitor")
    if plane == "horizontal" and "position" in capacitor:
        yield _not_here(("capacitor",), capacitor, "position", "no position in a horizontal loop", "remove it")
    refused, instead = ("along_axis", "across") if plane == "horizontal" else ("across", "along_axis")
    for index, place in _blocks(tree, "place"):
        if refused in place:
            yield _not_here(
                ("place", index),
                place,
                refused,
                f"in_plane and {instead} beside a {plane} loop",
                f"write {instead}",
            )


def _places(tree: Tree) -> Iterator[Complaint]:
    for index, place in _blocks(tree, "place"):
        path = ("place", index)
        where = [key for key in ("along_axis", "in_plane", "across") if key in place]
        if "fence" in place:
            for key in (*where, "posture", "height", "floor"):
                if key in place:
                    yield _not_here(path, place, key, "a fence, or a place, not both", f"remove {key} or fence")
        elif not where:
            yield _missing(path, "in_plane", "where it is: along_axis, in_plane or across, or a fence", '"2 m"')
        if "height" in place and "posture" in place:
            yield _not_here(
                path,
                place,
                "height",
                "a posture, or the height of a point",
                "keep posture or height",
            )
        if "height" in place and "floor" in place:
            yield _not_here(
                path,
                place,
                "floor",
                "a floor for a posture only: height is above ground",
                "remove it",
            )
        if _word(place, "when") == "tuning" and not _tunes(tree):
            yield _not_here(
                path,
                place,
                "when",
                "a tune_up in a transmission, for its power",
                "add tune_up, or remove when",
            )


def _names(tree: Tree) -> Iterator[Complaint]:
    """Ids of findings are made of names, so a name needs letters, and a slug of its own."""
    for key in ("place", "transmission"):
        seen: set[str] = set()
        for index, block in _blocks(tree, key):
            text = _word(block, "name")
            name = slug(text)
            if text.strip() and not name:
                yield _not_here((key, index), block, "name", "a name with a letter or a digit in it", "change it")
            if name and name in seen:
                yield _not_here((key, index), block, "name", f"a name of its own for each {key}", "change one")
            seen.add(name)


def _tunes(tree: Tree) -> bool:
    return any("tune_up" in block for _, block in _blocks(tree, "transmission"))


def _rules(tree: Tree) -> Iterator[Complaint]:
    rules = _block(tree, "site").get("rules")
    listed = rules if isinstance(rules, list) else []
    seen = set()
    for index, rule in enumerate(listed):
        if isinstance(rule, str) and rule in seen:
            yield (("site", "rules", index), show(rule), "each rule once", "remove it")
        seen.add(rule if isinstance(rule, str) else "")
