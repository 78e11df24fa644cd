"""Every row of every rule file against the limits as they were collected from the published texts.

`exposure_limits.toml` beside this file names the text of each block and what of it was read; it is evaluated here by
arithmetic of its own, so that a slip in a rule file or in how it is read shows.
"""

import re
import tomllib
from collections.abc import Sequence
from math import sqrt
from pathlib import Path
from typing import Any

import pytest
from scipy.constants import mu_0

from magsafe.design.tables import bands
from magsafe.rules import Current, Limit, Who, load_rule, rule_names

Block = dict[str, Any]

DATA = tomllib.loads((Path(__file__).parent / "exposure_limits.toml").read_text())
LIMITS: list[Block] = DATA["limit"]
CURRENTS: list[Block] = DATA["current"]
BY_ID = {block["id"]: block for block in LIMITS}

# The guidelines' controlled environment is an edition of its own, hence a file of its own.
RULE_OF_PREFIX = {"icnirp2020": "icnirp-2020", "icnirp1998": "icnirp-1998", "jp-occ": "jp-1990"}
WHO: dict[str, Who] = {"occ": "trained", "gp": "public"}
FIELD = {"E": "electric", "H": "magnetic", "S": "power density", "SE": "power density"}
BASIS = {
    "wb": "thermal whole-body",
    "local": "thermal local",
    "es": "electrostimulation",
    "es-low": "electrostimulation",
    "es-high": "electrostimulation, high level",
    "es-limbs": "electrostimulation, limbs",
}
# The edition as the file calls it, where that is shorter than in the block.
EDITION = {"us-fcc": "as amended 85 FR 18145 (2020)", "icnirp-2020": "2020", "icnirp-1998": "1998"}
# Levels of no rule that is known here; they stand in the notes of the rule named, in words.
IN_WORDS = {
    "icnirp2010-occ-contact": ("icnirp-2020", "40 mA for workers"),
    "icnirp2010-gp-contact": ("icnirp-2020", "20 mA for the public"),
    "de-emfv-occ-contact-peak": ("eu-2013-35", "15 mA peak"),
}

Key = tuple[str, Who, str, str]


def rule_of(prefix: str, tier: str) -> str:
    return RULE_OF_PREFIX.get(f"{prefix}-{tier}", RULE_OF_PREFIX.get(prefix, prefix))


def key_of(block_id: str) -> Key:
    """Return rule, tier, field and basis of the row that a block is about."""
    parts = re.fullmatch(r"(.+)-(occ|gp)-(E|H|S|SE)-(wb|local|es|es-low|es-high|es-limbs)", block_id)
    assert parts is not None, block_id
    prefix, tier, letter, suffix = parts.groups()
    return rule_of(prefix, tier), WHO[tier], FIELD[letter], BASIS[suffix]


def row_of(key: Key) -> Limit:
    rule, *rest = key
    (found,) = (row for row in load_rule(rule).rows if [row.who, row.field, row.basis] == rest)
    return found


def value(segments: Sequence[Block], megahertz: float) -> float | None:
    """Return a block's value, the lower one where two segments meet."""
    found = [
        float(each["coefficient"] * megahertz ** each["exponent"])
        for each in segments
        if each["f_low_MHz"] <= megahertz <= each["f_high_MHz"]
    ]
    return min(found, default=None)


def frequencies() -> list[float]:
    """Return the ends and the middle of every amateur band of every region [MHz]."""
    found = set()
    for band in bands():
        for low, high in band.regions:
            found |= {low / 1e6, (low + high) / 2e6, high / 1e6}
    return sorted(found)


def frequencies_and_meetings() -> list[float]:
    """Return those, and where the segments of any block meet or end, and just beside."""
    segments = [each for block in (*LIMITS, *CURRENTS) for each in block["segments"]]
    edges = {each[end] for each in segments for end in ("f_low_MHz", "f_high_MHz")}
    return sorted({*frequencies(), *(edge * near for edge in edges for near in (0.999, 1.0, 1.001))})


FREQUENCIES = frequencies_and_meetings()


def test_the_bands_reach_from_136_khz_to_beyond_50_mhz() -> None:
    assert len(frequencies()) >= 30
    assert frequencies()[0] < 0.14
    assert frequencies()[-1] > 50.0


@pytest.mark.parametrize("block", LIMITS, ids=lambda block: block["id"])
def test_row(block: Block) -> None:
    """Value at every amateur band and segment edge, unit, averaging, edition: as the block has them."""
    key = key_of(block["id"])
    row = row_of(key)
    compared = 0
    for megahertz in FREQUENCIES:
        expected = value(block["segments"], megahertz)
        found = row.at(megahertz * 1e6)
        assert found == (None if expected is None else pytest.approx(expected, rel=1e-12)), megahertz
        compared += expected is not None
    assert compared >= 10
    assert row.unit == block["unit"]
    assert row.averaging_time == 60.0 * block["averaging_minutes"]
    edition = EDITION.get(key[0], block["edition"])
    assert edition in block["edition"]
    assert row.edition == edition == load_rule(key[0]).edition


@pytest.mark.parametrize("block", LIMITS, ids=lambda block: block["id"])
def test_what_a_row_rests_on(block: Block) -> None:
    """No row claims a reading that its block does not have, and none that was made is left out."""
    key = key_of(block["id"])
    row = row_of(key)
    provenance, _, text = block["provenance"].partition(": ")
    assert row.provenance == provenance
    assert text in row.provenance_detail
    assert block.get("second_reader", "") in row.provenance_detail
    if provenance == "memory":
        assert "read" in row.provenance_detail
        assert {each.provenance for each in row.segments} == {"memory"}
    part = block.get("verified_part", "")
    if key[0] != "icnirp-2020" and not part.startswith("as "):  # that file tells the parts in words of its own
        assert part in row.verified_part
    assert bool(part) <= bool(row.verified_part)


def test_every_row_has_its_block() -> None:
    """Nothing stands in a rule file that no text was collected for, and no block is without its row."""
    rows = [(name, row.who, row.field, row.basis) for name in rule_names() for row in load_rule(name).rows]
    assert len(rows) == len(set(rows))
    blocks = [key_of(block["id"]) for block in LIMITS]
    assert len(blocks) == len(set(blocks)) == 71
    assert {key for key in rows if key[3] != "peak"} == set(blocks)
    assert {key for key in rows if key[3] == "peak"} == {key for key, _, _ in peaks()}


def peaks() -> list[tuple[Key, Block, Block]]:
    """Return the peak rows: key, the block of the factor, the block that it multiplies."""
    found = []
    for factor in DATA["peak"]:
        for prefix in factor["of"]:
            for letter in "EH":
                block = BY_ID[f"{prefix}-{letter}-wb"]
                rule, who, field, _ = key_of(block["id"])
                found.append(((rule, who, field, "peak"), factor, block))
    return found


@pytest.mark.parametrize(("key", "factor", "block"), peaks(), ids=lambda each: str(each[0]) if len(each) == 4 else "")
def test_peak_is_the_factor_times_the_table(key: Key, factor: Block, block: Block) -> None:
    """The crest of the envelope, RMS over the cycle: the factor is of the amplitude, hence over the root of 2."""
    row = row_of(key)
    assert row.averaging_time == 0.0
    assert row.provenance == factor["provenance"].partition(": ")[0]
    for megahertz in frequencies():
        times, table = value(factor["segments"], megahertz), value(block["segments"], megahertz)
        assert times is not None
        assert table is not None
        assert row.at(megahertz * 1e6) == pytest.approx(times * table / sqrt(2.0), rel=1e-5)


@pytest.mark.parametrize("megahertz", [0.1, 0.136, 1.9, 10.0])
def test_the_two_spellings_of_the_peak_factor_agree(megahertz: float) -> None:
    """6.93 f^0.664, in a Spanish decree 10^(0.665 log10(f/0.1) + 0.176): 1.5 at 0.1 MHz, 32 at 10 MHz; to 0.3 %."""
    spanish = 10.0**0.176 * (megahertz / 0.1) ** 0.665
    assert value(DATA["peak"][0]["segments"], megahertz) == pytest.approx(spanish, rel=3e-3)


@pytest.mark.parametrize(
    ("key", "microtesla"),
    [
        (("eu-2013-35", "trained", "magnetic", "thermal whole-body"), 2.0 / 7.1),
        (("eu-2013-35", "trained", "magnetic", "electrostimulation"), 100.0),
        (("eu-2013-35", "trained", "magnetic", "electrostimulation, limbs"), 300.0),
        (("de-26bimschv", "public", "magnetic", "electrostimulation"), 27.0),
    ],
)
def test_levels_written_as_flux_density(key: Key, microtesla: float) -> None:
    """Directive 2013/35/EU Annexes II and III, 26. BImSchV annex 1a: H = B / mu0, at 7.1 MHz."""
    assert row_of(key).at(7.1e6) == pytest.approx(microtesla * 1e-6 / mu_0, rel=1e-8)


def test_the_low_action_level_is_judged_and_the_high_one_shown() -> None:
    """Directive 2013/35/EU Annex II: 170 V/m low, 610 V/m high, which asks for measures that nobody can see."""
    judged = {(row.field, row.basis): row.at(7.1e6) for row in load_rule("eu-2013-35").limits("trained")}
    assert judged["electric", "electrostimulation"] == 170.0
    assert not any(basis.endswith(("high level", "limbs")) for _, basis in judged)
    assert row_of(("eu-2013-35", "trained", "electric", "electrostimulation, high level")).at(7.1e6) == 610.0


SET_ASIDE = [(name, row) for name in rule_names() for row in load_rule(name).rows if not row.judged]


@pytest.mark.parametrize(("name", "row"), SET_ASIDE, ids=lambda each: each if isinstance(each, str) else each.basis)
def test_what_is_not_judged_is_never_the_stricter(name: str, row: Limit) -> None:
    """A level set aside allows at least what a judged one of its field does; power density at least E times H.

    To 3 % of power density, which is rounding in the tables; that of IEEE C95.1 is the equivalent of E alone.
    """
    rule = load_rule(name)
    for hertz in (1e6 * each for each in FREQUENCIES):
        aside = row.at(hertz)
        if aside is None:
            continue
        judged = [(each.field, each.at(hertz) or 1e9) for each in rule.limits(row.who) if each.basis != "peak"]
        electric = min(found for field, found in judged if field == "electric")
        magnetic = min(found for field, found in judged if field == "magnetic")
        if row.field == "power density":
            other = electric / 376.73 if name == "ieee-c951-2019" else magnetic
            assert electric * other <= 1.03 * aside
        else:
            assert (electric if row.field == "electric" else magnetic) <= aside


def current_of(block: Block) -> Current:
    prefix, tier, _ = re.split(r"-(occ|gp)-", block["id"])
    (found,) = (
        each
        for each in load_rule(rule_of(prefix, tier)).currents
        if (each.who, each.kind) == (WHO[tier], block["kind"])
    )
    return found


@pytest.mark.parametrize("block", [b for b in CURRENTS if b["id"] not in IN_WORDS], ids=lambda block: block["id"])
def test_current(block: Block) -> None:
    """Contact and limb currents [mA]: value, averaging, what they rest on."""
    current = current_of(block)
    for megahertz in FREQUENCIES:
        assert current.at(megahertz * 1e6) == value(block["segments"], megahertz)
    assert current.averaging_time == 60.0 * block["averaging_minutes"]
    provenance, _, text = block["provenance"].partition(": ")
    assert current.provenance == provenance
    assert text in current.provenance_detail
    assert block.get("second_reader", "") in current.provenance_detail
    assert block.get("verified_part", "") == current.verified_part
    assert block.get("notes", "") == current.notes


def test_every_current_has_its_block() -> None:
    shown = [each for name in rule_names() for each in load_rule(name).currents]
    assert len(shown) == len(CURRENTS) - len(IN_WORDS) == 13
    assert {block["id"] for block in CURRENTS} >= set(IN_WORDS)
    for name, text in IN_WORDS.values():
        assert text in load_rule(name).notes


READ = {
    # rule: rows that were read in a text, rows from memory
    "ca-sc6": (0, 10),
    "de-26bimschv": (6, 0),
    "eu-1999-519": (7, 0),
    "eu-2013-35": (6, 0),
    "icnirp-1998": (10, 2),
    "icnirp-2020": (9, 7),
    "ieee-c951-2019": (1, 8),
    "jp": (3, 2),
    "jp-1990": (0, 2),
    "us-fcc": (6, 0),
}


def test_how_much_was_read() -> None:
    """So many rows of each rule were read in a text, so many were not: a change here needs a text."""
    found = {}
    for name in rule_names():
        words = [row.provenance for row in load_rule(name).rows]
        found[name] = (words.count("verified"), words.count("memory"))
    assert found == READ
