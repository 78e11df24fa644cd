"""Keys about the feed, held against each other and against what they feed."""

from collections.abc import Iterator

from magsafe.design.raw_tree import Complaint, Tree, block_at, missing, not_here, word_of

_PATH = ("feed",)
_TWO = {"rated_voltage_kind": "rated_voltage", "rated_current_at": "rated_current"}


def feed_complaints(tree: Tree) -> Iterator[Complaint]:
    """Yield everything about the feed that does not fit together."""
    feed = block_at(tree, "feed")
    coupling, tuned = word_of(feed, "coupling", "none stated"), word_of(block_at(tree, "capacitor"), "kind") != "none"
    if "small_loop" in feed and coupling != "small loop":
        yield not_here(_PATH, feed, "small_loop", 'coupling = "small loop" beside it', "state it, or remove small_loop")
    if "series_capacitor" in feed and coupling != "capacitors":
        expected = 'coupling = "capacitors" beside it'
        yield not_here(_PATH, feed, "series_capacitor", expected, "state it, or remove series_capacitor")
    for key in () if tuned else ("small_loop", "series_capacitor"):
        if key in feed:
            yield not_here(_PATH, feed, key, "a loop with a capacitor: one without is fed as it is", f"remove {key}")
    yield from _small_loop(feed)
    part = block_at(feed, "series_capacitor")
    for key, companion in _TWO.items():
        if key in part and companion not in part:
            advice = f"add {companion}, or remove {key}"
            yield not_here((*_PATH, "series_capacitor"), part, key, f"{companion} beside it", advice)
    if "match" in feed and tuned:
        expected = 'a loop without a capacitor, kind = "none": a tuned loop is matched by coupling'
        yield not_here(_PATH, feed, "match", expected, "remove it, and state coupling")
    for key in ("section_impedance", "velocity_factor"):
        if key in feed and word_of(feed, "match") != "quarter-wave section":
            expected = 'match = "quarter-wave section" beside it'
            yield not_here(_PATH, feed, key, expected, f"state it, or remove {key}")


def _small_loop(feed: Tree) -> Iterator[Complaint]:
    small, path = block_at(feed, "small_loop"), (*_PATH, "small_loop")
    position = word_of(small, "position")
    if position == "opposite the capacitor" and "clearance" not in small:
        yield missing(path, "clearance", "how far apart the surfaces of both conductors are", '"30 mm"')
    if position == "centred" and "clearance" in small:
        expected = 'position = "opposite the capacitor" beside it'
        yield not_here(path, small, "clearance", expected, "change the position, or remove clearance")
