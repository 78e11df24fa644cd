"""How a rule file says what adds up, what may be averaged over the body and what is exempt, and what is refused."""

import pytest
from rule_text import SOUND, parse, problems_of

from magsafe.rules import Summation, load_rule, rule_names

EXEMPTION = """
[[exemption]]
kind = "EIRP"
jurisdiction = "the harbour"
name = "small boats"
threshold = "5 W"
averaged = false
included = false
source = "Harbour by-law 1, table 5"
provenance = "memory"
provenance_detail = "not read"
"""
BY_DISTANCE = """
[[exemption]]
kind = "ERP by distance"
jurisdiction = "the harbour"
name = "far away"
averaged = true
included = true
valid_beyond = "wavelength / 2 pi"
source = "Harbour by-law 1, table 6"
provenance = "verified"
provenance_detail = "the by-law"
segments = [
  { band = ["1 MHz", "2 MHz"], coefficient = 8, exponent = 0 },
  { band = ["2 MHz", "30 MHz"], coefficient = 30, exponent = -2 },
]
"""


def summation(fields: str, up_to: str = "") -> Summation:
    given = SOUND.replace('fields = "together"', f'fields = "{fields}"')
    return parse(given.replace('together_up_to = "10 MHz"\n', up_to)).summation


def parts(rule: Summation, electric: float, magnetic: float, frequency: float) -> tuple[float, float]:
    found = rule.contribution(electric, magnetic, frequency)
    return float(found[0]), float(found[1])


def test_sums_apart_keep_e_and_h_apart() -> None:
    assert parts(summation("apart"), 0.3, 0.5, 7.1e6) == (0.3, 0.5)


def test_the_larger_share_counts_in_both_sums() -> None:
    assert parts(summation("larger"), 0.3, 0.5, 7.1e6) == (0.5, 0.5)
    assert parts(summation("larger"), 0.5, 0.25, 7.1e6) == (0.5, 0.5)


def test_both_shares_together_up_to_a_frequency_that_still_counts() -> None:
    ending = parse(SOUND).summation
    assert ending.together_up_to == 10e6
    assert parts(ending, 0.25, 0.5, 10e6) == (0.75, 0.75)
    assert parts(ending, 0.25, 0.5, 10.001e6) == (0.5, 0.5)
    assert parts(summation("together"), 0.25, 0.5, 50e6) == (0.75, 0.75)


def test_many_points_at_once() -> None:
    electric, magnetic = [0.1, 0.4], [0.2, 0.3]
    for fields, expected in (
        ("apart", (electric, magnetic)),
        ("larger", ([0.2, 0.4],) * 2),
        ("together", ([0.3, 0.7],) * 2),
    ):
        found = summation(fields).contribution(electric, magnetic, 7.1e6)
        for side in (0, 1):
            assert found[side].tolist() == pytest.approx(expected[side])


@pytest.mark.parametrize("shares", [(-0.1, 0.0), (0.0, -0.1), (float("nan"), 0.0), (0.0, float("nan"))])
@pytest.mark.parametrize("fields", ["apart", "larger", "together"])
def test_a_share_that_is_none_is_refused(fields: str, shares: tuple[float, float]) -> None:
    with pytest.raises(ValueError, match="share must be zero or more"):
        summation(fields).contribution(*shares, 7.1e6)


@pytest.mark.parametrize("frequency", [0.0, -1.0, float("nan"), float("inf")])
def test_a_summation_at_a_frequency_that_is_none_is_refused(frequency: float) -> None:
    with pytest.raises(ValueError, match="frequency must be positive and finite"):
        summation("apart").contribution(0.1, 0.1, frequency)


def test_the_mean_over_the_body_is_read() -> None:
    body = parse(SOUND).body
    assert (body.mean, body.bases, body.nearest, body.local) == (True, ("thermal whole-body",), 0.2, "head and feet")
    assert (body.source, body.provenance) == ("Harbour by-law 1, table 4", "memory")
    bare = parse(SOUND.replace('nearest = "20 cm"\nlocal = "head and feet"\n', "")).body
    assert (bare.nearest, bare.local) == (None, "")
    none = SOUND.replace(
        'mean = true\nbases = ["thermal whole-body"]\nnearest = "20 cm"\nlocal = "head and feet"\n', ""
    )
    assert parse(none.replace("[body]\n", "[body]\nmean = false\n")).body.bases == ()


@pytest.mark.parametrize("table", ["summation", "body"])
def test_a_rule_without_such_a_table_is_refused(table: str) -> None:
    head, _, rest = SOUND.partition(f"[{table}]\n")
    assert f"head: [{table}] is missing" in problems_of(head + rest[rest.index("\n[") + 1 :])


@pytest.mark.parametrize(
    ("right", "wrong", "told"),
    [
        ('fields = "together"', 'fields = "both"', "head, summation: fields must be one of apart, larger, together"),
        ('fields = "together"', 'fields = "larger"', 'together_up_to goes with fields = "together", and only with it'),
        ('"10 MHz"', '"10 m"', "together_up_to: '10 m' is not a number with one of the units"),
        ('"10 MHz"', '"0 MHz"', "together_up_to must be above zero"),
        ("fields =", 'field = "x"\nfields =', "head, summation: unknown key field (nearest: fields)"),
        ("[summation]", "[[summation]]", "summation must be a table"),
        ("mean = true", 'mean = "yes"', "head, body: mean must be true or false"),
        ("mean = true", "mean = false", "bases, nearest and local go with mean = true"),
        ('bases = ["thermal whole-body"]\n', "", "bases is missing: mean = true needs the bases"),
        ('["thermal whole-body"]', '"thermal whole-body"', "bases must be a list of texts"),
        ('["thermal whole-body"]', "[]", "bases must be a list of texts"),
        ('["thermal whole-body"]', '["thermal whole-body", 3]', "bases must be a list of texts"),
        ('["thermal whole-body"]', '["thermal local"]', "[body] names thermal local, which is no judged basis"),
        ('averaging_time = "6 min"', 'averaging_time = "none"', "[body] names thermal whole-body, which is no judged"),
        (
            '["thermal whole-body"]',
            '["thermal whole-body", "thermal whole-body"]',
            "[body] names thermal whole-body twice",
        ),
        ('"20 cm"', '"20 MHz"', "nearest: '20 MHz' is not a number with one of the units m, cm"),
        ('"20 cm"', '"0 m"', "nearest must be above zero"),
        ("mean = true", "mean = true\nlocl = 3", "head, body: unknown key locl (nearest: local)"),
    ],
)
def test_unfit_words_about_sums_and_bodies_are_refused(right: str, wrong: str, told: str) -> None:
    assert right in SOUND
    problems = problems_of(SOUND.replace(right, wrong, 1))
    assert any(told in each for each in problems), problems


def test_an_exemption_is_read_and_limits_nothing() -> None:
    rule = parse(SOUND + EXEMPTION + BY_DISTANCE)
    small, far = rule.exemptions
    assert (small.kind, small.threshold, small.averaged, small.valid_beyond) == ("EIRP", 5.0, False, "")
    assert small.threshold_at(0.0, 7.1e6) == small.threshold_at(100.0, 50e6) == 5.0
    assert not small.exempts(5.0, 5.0)
    assert small.exempts(4.99, 5.0)
    assert far.exempts(5.0, 5.0)
    assert not far.exempts(5.01, 5.0)
    assert far.averaged
    assert far.threshold_at(100.0, 2e6) == pytest.approx(75e3)  # 30/4 below 8
    assert rule.rows == parse(SOUND).rows


def test_nearer_than_it_holds_and_outside_its_band_there_is_no_threshold() -> None:
    (far,) = parse(SOUND + BY_DISTANCE).exemptions
    edge = far.nearest(3e6)
    assert edge == pytest.approx(15.904, abs=1e-3)  # 299.792 / 3 / 6.28319
    assert far.threshold_at(edge, 3e6) == pytest.approx(30.0 / 9.0 * edge**2)
    assert far.threshold_at(0.999 * edge, 3e6) is None
    assert far.threshold_at(100.0, 0.9e6) is None
    assert far.threshold_at(100.0, 30.1e6) is None


@pytest.mark.parametrize("distance", [-1.0, float("nan"), float("inf")])
def test_a_distance_that_is_none_is_refused(distance: float) -> None:
    (small,) = parse(SOUND + EXEMPTION).exemptions
    with pytest.raises(ValueError, match="distance must be zero or more"):
        small.threshold_at(distance, 7.1e6)


@pytest.mark.parametrize("frequency", [0.0, float("nan")])
def test_an_exemption_at_a_frequency_that_is_none_is_refused(frequency: float) -> None:
    (small,) = parse(SOUND + EXEMPTION).exemptions
    with pytest.raises(ValueError, match="frequency must be positive"):
        small.threshold_at(1.0, frequency)


@pytest.mark.parametrize("text", [EXEMPTION, BY_DISTANCE])
def test_an_exemption_lacking_a_key_is_refused(text: str) -> None:
    lines = [line for line in text.splitlines() if " = " in line and "[" not in line]
    assert len(lines) == 9
    for line in lines:
        key = line.split(" = ", maxsplit=1)[0]
        told = f"head, exemption 1: {key} is missing"
        assert told in problems_of(SOUND + text.replace(line + "\n", "")), line


@pytest.mark.parametrize(
    ("text", "right", "wrong", "told"),
    [
        (EXEMPTION, '"EIRP"', '"size"', "kind must be one of ERP by distance, EIRP, power"),
        (EXEMPTION, '"5 W"', '"5 V"', "threshold: '5 V' is not a number with one of the units W, mW"),
        (EXEMPTION, '"5 W"', '"0 W"', "threshold must be above zero"),
        (EXEMPTION, '"5 W"', '"5 W"\nvalid_beyond = "wavelength / 2 pi"', "unknown key valid_beyond"),
        (EXEMPTION, "included = false", 'included = "no"', "included must be true or false"),
        (BY_DISTANCE, '"wavelength / 2 pi"', '"the pier"', "valid_beyond must be one of wavelength / 2 pi"),
        (BY_DISTANCE, "averaged = true", 'averaged = true\nthreshold = "1 W"', "unknown key threshold"),
        (BY_DISTANCE, '"2 MHz", "30 MHz"', '"3 MHz", "30 MHz"', "segments must rise and meet"),
        (EXEMPTION, EXEMPTION, EXEMPTION + EXEMPTION, "two exemptions named small boats"),
    ],
)
def test_an_unfit_exemption_is_refused(text: str, right: str, wrong: str, told: str) -> None:
    assert right in text
    problems = problems_of(SOUND + text.replace(right, wrong, 1))
    assert any(told in each for each in problems), problems


def test_how_the_rules_shipped_add_up() -> None:
    """Two requirements where ICNIRP 1998 holds, one sum of all in the guidelines of 2020 and in Japan."""
    found = {name: load_rule(name).summation.fields for name in rule_names()}
    assert found == {
        "ca-sc6": "larger",
        "de-26bimschv": "apart",
        "eu-1999-519": "apart",
        "eu-2013-35": "larger",
        "icnirp-1998": "apart",
        "icnirp-2020": "together",
        "ieee-c951-2019": "larger",
        "jp": "together",
        "jp-1990": "together",
        "us-fcc": "larger",
    }
    ends = {name: load_rule(name).summation.together_up_to for name in rule_names()}
    assert {name for name, end in ends.items() if end is not None} == {"icnirp-2020"}
    assert ends["icnirp-2020"] == 30e6
    assert parts(load_rule("icnirp-2020").summation, 0.4, 0.5, 7.1e6)[0] == pytest.approx(0.9)
    assert parts(load_rule("icnirp-2020").summation, 0.4, 0.5, 50.1e6) == (0.5, 0.5)


def test_which_of_the_rules_shipped_let_the_mean_over_the_body_count() -> None:
    means = {name: load_rule(name).body for name in rule_names() if load_rule(name).body.mean}
    assert set(means) == {"eu-1999-519", "icnirp-1998", "icnirp-2020", "ieee-c951-2019", "us-fcc"}
    for name, body in means.items():
        assert body.bases == ("thermal whole-body",)
        assert body.nearest == 0.2
        assert bool(body.local) == (name != "icnirp-2020")


def test_what_rests_on_memory() -> None:
    """Only what some text was read for is called verified."""
    sums = {name for name in rule_names() if load_rule(name).summation.provenance == "verified"}
    bodies = {name for name in rule_names() if load_rule(name).body.provenance == "verified"}
    assert sums == {"jp", "us-fcc"}
    assert bodies == {"de-26bimschv", "eu-1999-519", "eu-2013-35"}


def test_where_a_mean_may_count_without_a_word_of_local_limits_local_levels_are_judged() -> None:
    for name in rule_names():
        rule = load_rule(name)
        if rule.body.mean and not rule.body.local:
            for tier in rule.tiers:
                local = {row.field for row in rule.limits(tier.who) if row.basis == "thermal local"}
                assert local == {"electric", "magnetic"}
