"""Keys about transmissions, people, probes and rules, held against each other on the raw tree."""

from collections.abc import Iterator

from magsafe import words
from magsafe.design.model import AM_CREST, nearest, titles_of
from magsafe.design.quantities import show
from magsafe.design.raw_tree import (
    Complaint,
    Path,
    Tree,
    block_at,
    blocks_at,
    either,
    missing,
    not_here,
    size_of,
    word_of,
)
from magsafe.units import FREQUENCY, POWER, plain
from magsafe.words import slug


def people_complaints(tree: Tree) -> Iterator[Complaint]:
    """Yield what does not fit together in transmissions, places, probes, rules and sessions."""
    for rule in (_transmissions, _plane, _places, _probes, _names, _rules, _sessions):
        yield from rule(tree)


def _transmissions(tree: Tree) -> Iterator[Complaint]:
    for index, block in blocks_at(tree, "transmission"):
        path = ("transmission", index)
        if "power" not in block and "carrier_power" not in block:
            yield missing(path, "power", "the peak envelope power at the transmitter", '"100 W"')
        yield from either(path, block, ("power", "carrier_power"), "both say how strong it is")
        if "carrier_power" in block and word_of(block, "mode") != "AM":
            yield not_here(
                path,
                block,
                "carrier_power",
                'mode = "AM" beside it',
                "write power, the peak envelope power",
            )
        yield from either(path, block, ("mode", "duty"), "a mode has its duty")
        yield from either(path, block, ("over", "on_air_share"), "both say how long it is on the air")
        power, carrier = size_of(block, "power", POWER), size_of(block, "carrier_power", POWER)
        if power is None and carrier is not None:
            power = AM_CREST * carrier
        tune = size_of(block_at(block, "tune_up"), "power", POWER)
        if power is not None and tune is not None and tune > power:
            yield (
                (*path, "tune_up", "power"),
                show(block["tune_up"]["power"]),
                f"at most the envelope power ({plain(power, POWER)}), which the ratings are held against",
                "tune with less, or state the larger as power",
            )


def _plane(tree: Tree) -> Iterator[Complaint]:
    plane = word_of(block_at(tree, "loop"), "plane", "vertical")
    capacitor = block_at(tree, "capacitor")
    if plane == "horizontal" and "position" in capacitor:
        yield not_here(("capacitor",), capacitor, "position", "no position in a horizontal loop", "remove it")
    refused, instead = ("along_axis", "across") if plane == "horizontal" else ("across", "along_axis")
    for key in ("place", "probe"):
        for index, place in blocks_at(tree, key):
            if refused in place:
                yield not_here(
                    (key, index),
                    place,
                    refused,
                    f"in_plane and {instead} beside a {plane} loop",
                    f"write {instead}",
                )


_ACROSS = ("along_axis", "in_plane", "across")


def _places(tree: Tree) -> Iterator[Complaint]:
    for index, place in blocks_at(tree, "place"):
        path = ("place", index)
        where = [key for key in _ACROSS if key in place]
        if "fence" in place:
            for key in (*where, "posture", "height", "floor"):
                if key in place:
                    yield not_here(path, place, key, "a fence, or a place, not both", f"remove {key} or fence")
        elif not where:
            yield missing(path, "in_plane", "where it is: along_axis, in_plane or across, or a fence", '"2 m"')
        if "height" in place and "posture" in place:
            yield not_here(
                path,
                place,
                "height",
                "a posture, or the height of a point",
                "keep posture or height",
            )
        if "height" in place and "floor" in place:
            yield not_here(
                path,
                place,
                "floor",
                "a floor for a posture only: height is above ground",
                "remove it",
            )
        if word_of(place, "when") == "tuning" and not _tunes(tree):
            yield not_here(
                path,
                place,
                "when",
                "a tune_up in a transmission, for its power",
                "add tune_up, or remove when",
            )


def _probes(tree: Tree) -> Iterator[Complaint]:
    places = {word_of(place, "name"): place for _, place in blocks_at(tree, "place")}
    count, titles = len(blocks_at(tree, "transmission")), _titles(tree)
    seen: set[tuple[str, str]] = set()
    for index, probe in blocks_at(tree, "probe"):
        path = ("probe", index)
        yield from _where_read(path, probe, places)
        if "electric" not in probe and "magnetic" not in probe:
            yield missing(path, "magnetic", "what it read: electric, magnetic or both", '"0.05 A/m"')
        yield from _while_sending(path, probe, count, titles)
        name = slug(word_of(probe, "name") or word_of(probe, "place") or f"probe {index + 1}")
        if word_of(probe, "name").strip() and not name:
            yield not_here(path, probe, "name", "a name with a letter or a digit in it", "change it")
        # Findings of one transmission are told apart by it.
        called = ("" if count == 1 else word_of(probe, "transmission"), name)
        if name and called in seen and "name" in probe:
            yield not_here(path, probe, "name", "a name of its own for each probe in one transmission", "change it")
        elif name and called in seen:
            yield missing(path, "name", "a name, where two probes share place and transmission", '"second reading"')
        seen.add(called)


def _where_read(path: Path, probe: Tree, places: dict[str, Tree]) -> Iterator[Complaint]:
    across = [key for key in _ACROSS if key in probe]
    if "place" in probe:
        for key in (*across, *(["height"] if "height" in probe else [])):
            why = "the name of a place, or a position of its own, not both"
            yield not_here(path, probe, key, why, f"remove {key} or place")
        named = word_of(probe, "place")
        if named in places and "fence" in places[named]:
            why = "a place where the probe was: a fence is all that lies on it and outside it"
            yield not_here(path, probe, "place", why, "give the probe a position and a height of its own")
        elif named.strip() and named not in places:
            listed = ", ".join(words.short(name) for name in list(places)[:6]) or "none is in the file"
            why = f"the name of a [[place]] ({listed})"
            advice = nearest(named, tuple(places), "add that place, or give the probe a position and a height")
            yield not_here(path, probe, "place", why, advice)
    elif not across and "height" in probe:
        yield missing(path, "in_plane", "where the probe was: along_axis, in_plane or across beside height", '"2 m"')
    elif not across:
        why = "where the probe was: the name of a place, or a position and a height of its own"
        yield missing(path, "place", why, '"operator\'s chair"')
    elif "height" not in probe:
        yield missing(path, "height", "how high above ground the probe was, beside its position", '"1.2 m"')


def _while_sending(path: Path, probe: Tree, count: int, titles: tuple[str, ...]) -> Iterator[Complaint]:
    listed = f" ({', '.join(words.short(title) for title in titles[:6])})" if titles else ""
    named = word_of(probe, "transmission")
    if "transmission" not in probe and count > 1:
        example = show(titles[0]) if titles else '"40 m voice"'
        yield missing(path, "transmission", f"which transmission was on the air{listed}", example)
    elif named.strip() and titles and named not in titles:
        why = f"what a [[transmission]] is called{listed}"
        yield not_here(path, probe, "transmission", why, nearest(named, titles))


def _titles(tree: Tree) -> tuple[str, ...]:
    """Return what each transmission is called; nothing where a frequency that makes a title cannot be read."""
    blocks = [block for _, block in blocks_at(tree, "transmission")]
    stated = [(word_of(block, "name"), size_of(block, "frequency", FREQUENCY)) for block in blocks]
    readable = [(name or None, frequency or 0.0) for name, frequency in stated if name or frequency is not None]
    return titles_of(readable) if len(readable) == len(stated) else ()


def _names(tree: Tree) -> Iterator[Complaint]:
    """Ids of findings are made of names, so a name needs letters, and a slug of its own."""
    for key in ("place", "transmission"):
        seen: set[str] = set()
        for index, block in blocks_at(tree, key):
            text = word_of(block, "name")
            name = slug(text)
            if text.strip() and not name:
                yield not_here((key, index), block, "name", "a name with a letter or a digit in it", "change it")
            if name and name in seen:
                yield not_here((key, index), block, "name", f"a name of its own for each {key}", "change one")
            seen.add(name)


def _tunes(tree: Tree) -> bool:
    return any("tune_up" in block for _, block in blocks_at(tree, "transmission"))


def _rules(tree: Tree) -> Iterator[Complaint]:
    rules = block_at(tree, "site").get("rules")
    listed = rules if isinstance(rules, list) else []
    seen = set()
    for index, rule in enumerate(listed):
        if isinstance(rule, str) and rule in seen:
            yield (("site", "rules", index), show(rule), "each rule once", "remove it")
        seen.add(rule if isinstance(rule, str) else "")


def _sessions(tree: Tree) -> Iterator[Complaint]:
    """Each session names transmissions of the file, each once, and no two sessions are the same."""
    listed, titles = block_at(tree, "site").get("sessions"), _titles(tree)
    known = f" ({', '.join(words.short(title) for title in titles[:6])})" if titles else ""
    seen: set[frozenset[str]] = set()
    for index, session in enumerate(listed if isinstance(listed, list) else []):
        names = [name for name in session if isinstance(name, str)] if isinstance(session, list) else []
        for place, name in enumerate(names):
            path = ("site", "sessions", index, place)
            if titles and name not in titles:
                yield (path, show(name), f"what a [[transmission]] is called{known}", nearest(name, titles))
            elif name in names[:place]:
                yield (path, show(name), "each transmission of a session once", "remove it")
        if names and frozenset(names) in seen:
            yield (("site", "sessions", index), show(session), "each session once", "remove it")
        seen.add(frozenset(names))
