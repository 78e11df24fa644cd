"""What the sheet says of people: findings, places, ceilings, keep-out and rules as the contract has them."""

import json
from typing import Any

import pytest
from commands import run
from designs import MakeDesign, file_of, plain_tree

import magsafe
from magsafe.checks.keepout import keepout
from magsafe.checks.sheet import Finding, PlaceRecord, Sheet
from magsafe.reports import telling

DESK = {"name": "operating desk", "who": "trained", "along_axis": "3 m", "posture": "sitting"}
WALK = {"name": "Quay walk", "who": "public", "along_axis": "8 m"}
SITE = {"site": {"ground": "average", "rules": ["us-fcc"]}, "loop__centre_height": "2 m", "capacitor__position": "top"}


def sheet_of(design: MakeDesign, **changes: Any) -> Sheet:
    return magsafe.check(design(**{**SITE, **changes}))


def findings(sheet: Sheet) -> dict[str, Finding]:
    return {f.id: f for f in sheet.all_findings() if f.id.startswith("exposure.")}


def place_of(sheet: Sheet, name: str, rule: str = "us-fcc") -> PlaceRecord:
    (point, *_) = sheet.operating_points
    return next(p for e in point.exposure if e.rule == rule for p in e.places if p.name == name)


def test_silence_is_never_clear(design: MakeDesign) -> None:
    found = findings(sheet_of(design, place=[DESK]))
    assert set(found) == {"exposure.us-fcc.trained.operating-desk", "exposure.us-fcc.public"}
    assert found["exposure.us-fcc.public"].verdict == "unproven"
    assert found["exposure.us-fcc.trained.operating-desk"].verdict == "clear"


@pytest.mark.parametrize(
    ("rule", "who", "told"),
    [
        ("eu-1999-519", "trained", "eu-1999-519 has no limits for trained people: "),
        ("de-26bimschv", "trained", "de-26bimschv has no limits for trained people: "),
        ("jp", "trained", "jp has no limits for trained people: "),
        ("eu-2013-35", "public", "eu-2013-35 has no limits for the public: "),
        ("jp-1990", "public", "jp-1990 has no limits for the public: "),
    ],
)
@pytest.mark.parametrize("places", [True, False], ids=["with places", "without places"])
def test_a_tier_that_a_rule_does_not_know_is_unproven_and_told_so(
    design: MakeDesign, rule: str, who: str, told: str, *, places: bool
) -> None:
    """It is not that no place is given: the rule says nothing of these people, and that is not clear either."""
    site = {"ground": "average", "rules": [rule]}
    far = [{**DESK, "along_axis": "6 m"}, {**WALK, "along_axis": "12 m"}]
    sheet = sheet_of(design, site=site, place=far if places else [])
    (found,) = (f for f in findings(sheet).values() if f.id.startswith(f"exposure.{rule}.{who}"))
    assert found.verdict == "unproven"
    assert found.because.startswith(told)
    assert "No place" not in found.because
    assert "site.rules" in found.do
    assert found.id in sheet.power_ceiling.left_out
    assert sheet.verdict == "unproven"
    record = next(e for e in sheet.operating_points[0].exposure if e.who == who)
    assert record.keepout is None
    assert (record.why or "").startswith(told)
    assert [p.verdict for p in record.places] == (["unproven"] if places else [])
    other = next(e for e in sheet.operating_points[0].exposure if e.who != who)
    assert other.keepout is not None
    assert other.why is None


def test_a_tier_that_another_rule_knows_is_judged_by_that_one(design: MakeDesign) -> None:
    """Two rules that share the people out between them leave nobody out."""
    site = {"ground": "average", "rules": ["eu-1999-519", "eu-2013-35"]}
    far = [{**DESK, "along_axis": "6 m"}, {**WALK, "along_axis": "12 m"}]
    sheet = sheet_of(design, site=site, place=far)
    assert {f.id: f.verdict for f in findings(sheet).values()} == {
        "exposure.eu-1999-519.public.quay-walk": "clear",
        "exposure.eu-2013-35.trained.operating-desk": "clear",
    }
    silent = [e for e in sheet.operating_points[0].exposure if e.keepout is None]
    assert [(e.rule, e.who, e.places) for e in silent] == [("eu-1999-519", "trained", ()), ("eu-2013-35", "public", ())]
    assert all("has no limits for" in (e.why or "") for e in silent)
    alone = findings(sheet_of(design, site=site, place=far[1:]))
    assert alone["exposure.eu-2013-35.trained"].because.startswith("No place")
    assert set(alone) == {"exposure.eu-1999-519.public.quay-walk", "exposure.eu-2013-35.trained"}


def test_a_fault_of_the_loop_does_not_hide_that_a_tier_is_unknown(design: MakeDesign) -> None:
    site = {"ground": "average", "rules": ["eu-1999-519"]}
    sheet = sheet_of(design, site=site, place=[DESK, WALK], transmission__0__frequency="50.1 MHz")
    found = findings(sheet)["exposure.eu-1999-519.trained.operating-desk"]
    assert "has no limits for trained people" in found.because


def test_a_short_over_is_held_against_the_crest(design: MakeDesign) -> None:
    """1999/519/EC: what the mean over 6 min allows, the crest may not; the least power of all bases holds.

    At 1.85 MHz the peak factor is 6.93 x 1.85^0.664 over the root of 2, 7.37 of field or 54 of power; 10 s of
    6 min at 20 % have a crest of 180 times the mean.
    """
    over = {"transmit": "10 s", "listen": "10 min"}
    use = {"frequency": "1.85 MHz", "power": "100 W", "mode": "SSB unprocessed", "over": over}
    site = {"ground": "average", "rules": ["eu-1999-519"]}
    place = place_of(sheet_of(design, site=site, place=[WALK], transmission__0=use), "Quay walk", "eu-1999-519")
    shares = {basis.basis: basis for basis in place.bases}
    assert set(shares) == {"thermal whole-body", "electrostimulation", "peak"}
    assert shares["peak"].judged_power == shares["electrostimulation"].judged_power == pytest.approx(100.0)
    assert shares["thermal whole-body"].judged_power == pytest.approx(100.0 * 0.2 / 36.0)
    times = shares["peak"].share_of_limit / shares["thermal whole-body"].share_of_limit
    assert times == pytest.approx(180.0 / (6.93 * 1.85**0.664) ** 2 * 2.0, rel=1e-4)
    assert place.basis == "peak"


def test_the_finding_of_a_place_carries_its_name(design: MakeDesign) -> None:
    found = findings(sheet_of(design, place=[DESK, WALK]))["exposure.us-fcc.public.quay-walk"]
    assert found.place == "Quay walk"
    assert found.margin_asked == pytest.approx(1.2589, abs=1e-4)
    assert found.limit is not None
    assert found.value is not None
    assert found.margin_found == pytest.approx(found.limit.value / (found.value.high or 0.0))
    assert found.provenance == "verified"


def test_a_place_copies_its_binding_basis(design: MakeDesign) -> None:
    site = {"ground": "average", "rules": ["icnirp-2020"]}
    place = place_of(sheet_of(design, site=site, place=[WALK]), "Quay walk", "icnirp-2020")
    binding = max(place.bases, key=lambda basis: basis.share_of_limit)
    for name in type(binding).model_fields:
        assert getattr(place, name) == getattr(binding, name)
    for basis in place.bases:
        assert basis.field_ratio == pytest.approx(basis.share_of_limit**0.5)
        ratios = [
            field / limit
            for field, limit in ((basis.electric, basis.electric_limit), (basis.magnetic, basis.magnetic_limit))
            if field is not None and limit is not None
        ]
        assert basis.field_ratio == pytest.approx(max(ratios))
    powers = {basis.basis: basis.judged_power for basis in place.bases}
    assert powers["electrostimulation"] == pytest.approx(100.0)


def test_shares_scale_with_power_exactly(design: MakeDesign) -> None:
    one = place_of(sheet_of(design, place=[WALK]), "Quay walk")
    ten = place_of(sheet_of(design, place=[WALK], transmission__0__power="1000 W"), "Quay walk")
    assert (ten.share_of_limit or 0.0) == pytest.approx(10.0 * (one.share_of_limit or 0.0), rel=1e-12)
    assert ten.power_ceiling == pytest.approx(one.power_ceiling, rel=1e-9)


def test_at_its_ceiling_a_place_is_clear_and_above_it_is_not(design: MakeDesign) -> None:
    mode = {"frequency": "7.1 MHz", "power": "100 W", "mode": "SSB", "over": {"transmit": "4 min", "listen": "3 min"}}
    near = {**WALK, "along_axis": "3 m"}
    ceiling = place_of(sheet_of(design, place=[near], transmission__0=mode), "Quay walk").power_ceiling or 0.0

    def verdict(watts: float) -> str:
        made = sheet_of(design, place=[near], transmission__0={**mode, "power": f"{watts:.9f} W"})
        return place_of(made, "Quay walk").verdict

    assert verdict(ceiling * (1.0 - 1e-6)) == "clear"
    assert verdict(ceiling * 1.01) == "narrow"


def test_what_a_place_could_bear_rests_on_no_typical_loss(design: MakeDesign) -> None:
    """Sliding contacts by kind alone lower the field that is shown, and not the power that is allowed."""
    contacts = [{"name": "brushes", "kind": "sliding contact", "count": 4, "at": "capacitor"}]
    plain = place_of(sheet_of(design, place=[WALK]), "Quay walk")
    typical = place_of(sheet_of(design, place=[WALK], loop__joint=contacts), "Quay walk")
    assert (typical.share_of_limit or 0.0) < 0.8 * (plain.share_of_limit or 0.0)
    # One factor serves free space and image, so it may allow a little less, never more.
    assert 0.9 < (typical.power_ceiling or 0.0) / (plain.power_ceiling or 1.0) <= 1.0 + 1e-9


def test_people_hold_the_power_ceiling(design: MakeDesign) -> None:
    near = {**WALK, "along_axis": "2 m"}
    sheet = sheet_of(design, place=[DESK, near], capacitor__rated_voltage="100 kV", capacitor__rated_current="1000 A")
    assert sheet.power_ceiling.held_by == "exposure.us-fcc.public.quay-walk"
    assert sheet.power_ceiling.complete
    assert sheet.verdict == "stop"


def test_memory_rows_give_at_best_narrow_and_name_the_number(design: MakeDesign) -> None:
    site = {"ground": "average", "rules": ["icnirp-2020"]}
    far = {**DESK, "along_axis": "20 m"}
    sheet = sheet_of(design, site=site, place=[far, {**WALK, "along_axis": "20 m"}])
    found = findings(sheet)["exposure.icnirp-2020.trained.operating-desk"]
    assert found.verdict == "narrow"
    assert "from memory" in found.because
    assert "170" in found.because
    assert found.id in sheet.power_ceiling.on_thin_evidence
    assert (sheet.power_ceiling.value or 0.0) > 0.0


def test_near_metal_nothing_is_proven_but_a_stop_stays(design: MakeDesign) -> None:
    site = {**SITE["site"], "metal_within": "0.5 m"}  # type: ignore[dict-item]
    sheet = sheet_of(design, site=site, place=[WALK, {**DESK, "along_axis": "0.8 m"}])
    assert findings(sheet)["exposure.us-fcc.public.quay-walk"].verdict == "unproven"
    assert "metal" in findings(sheet)["exposure.us-fcc.public.quay-walk"].because
    assert findings(sheet)["exposure.us-fcc.trained.operating-desk"].verdict == "stop"


def test_within_reach_of_the_bodies_the_electric_field_is_unproven(design: MakeDesign) -> None:
    close = {**DESK, "along_axis": "0.5 m"}
    found = findings(sheet_of(design, place=[close], transmission__0__power="0.01 W"))
    assert found["exposure.us-fcc.trained.operating-desk"].verdict == "unproven"
    assert "0.3 m" in found["exposure.us-fcc.trained.operating-desk"].because


def test_a_missing_height_leaves_places_unproven(design: MakeDesign) -> None:
    sheet = sheet_of(design, place=[WALK], loop__centre_height=None)
    assert "centre_height" in findings(sheet)["exposure.us-fcc.public.quay-walk"].because
    assert place_of(sheet, "Quay walk").share_of_limit is None
    sheet = sheet_of(design, place=[WALK], loop__centre_height=None, site={"ground": "none", "rules": ["us-fcc"]})
    assert findings(sheet)["exposure.us-fcc.public.quay-walk"].verdict == "unproven"


def test_a_tuning_place_is_judged_at_the_tune_up_power(design: MakeDesign) -> None:
    tuner = {**DESK, "when": "tuning", "along_axis": "1.5 m"}
    use = {
        "frequency": "7.1 MHz",
        "power": "100 W",
        "signal_bandwidth": "0.5 kHz",
        "tune_up": {"power": "5 W", "time": "60 s"},
    }
    sheet = sheet_of(design, place=[tuner], transmission__0=use)
    place = place_of(sheet, "operating desk")
    assert place.judged_power == pytest.approx(5.0 / 6.0)
    finding = findings(sheet)["exposure.us-fcc.trained.operating-desk"]
    assert finding.power_at_margin is None  # the envelope power does not change it
    always = place_of(sheet_of(design, place=[{**tuner, "when": "always"}], transmission__0=use), "operating desk")
    assert (always.share_of_limit or 0.0) > 10.0 * (place.share_of_limit or 0.0)


def test_a_tuning_place_without_a_tune_up_is_unproven_for_that_transmission(design: MakeDesign) -> None:
    tuned = {"frequency": "7.1 MHz", "power": "100 W", "tune_up": {"power": "5 W", "time": "60 s"}}
    plain = {"frequency": "14.2 MHz", "power": "100 W"}
    sheet = sheet_of(design, place=[{**DESK, "when": "tuning"}], transmission=[tuned, plain])
    verdicts = [
        f.verdict for p in sheet.operating_points for f in p.findings if f.id.endswith("trained.operating-desk")
    ]
    assert verdicts == ["clear", "unproven"]


def test_a_power_held_by_doubt_is_told_as_an_upper_bound_only(design: MakeDesign) -> None:
    site = {"ground": "average", "rules": ["us-fcc"], "metal_within": "0.5 m"}
    ratings = {
        "capacitor__rated_voltage": None,
        "capacitor__rated_voltage_kind": None,
        "capacitor__rated_current": None,
    }
    sheet = sheet_of(design, site=site, place=[{**WALK, "along_axis": "3.6 m"}], **ratings)
    assert telling.ceiling(sheet, sheet.power_ceiling).startswith("No power is proven. More than")
    assert telling.people_ceiling(keepout(sheet)).startswith("No power is proven for people.")


def test_only_tuning_places_leave_a_tier_unproven(design: MakeDesign) -> None:
    use = {"frequency": "7.1 MHz", "power": "100 W", "tune_up": {"power": "5 W", "time": "60 s"}}
    found = findings(sheet_of(design, place=[{**DESK, "when": "tuning"}], transmission__0=use))
    assert found["exposure.us-fcc.trained"].verdict == "unproven"
    assert "while tuning" in found["exposure.us-fcc.trained"].because


def test_a_place_in_doubt_holds_the_same_power_whatever_its_verdict(design: MakeDesign) -> None:
    close = {**WALK, "along_axis": "0.5 m"}

    def ceiling(watts: str) -> tuple[float | None, bool, str]:
        sheet = sheet_of(design, place=[close], transmission__0__power=watts)
        assert place_of(sheet, "Quay walk").power_ceiling is None
        made = sheet.power_ceiling
        return made.value, made.complete, findings(sheet)["exposure.us-fcc.public.quay-walk"].verdict

    (high, high_complete, high_verdict), (low, low_complete, low_verdict) = ceiling("1000 W"), ceiling("0.001 W")
    assert (high_verdict, low_verdict) == ("stop", "unproven")
    assert not high_complete
    assert not low_complete
    assert high == pytest.approx(low, rel=1e-9)


def test_a_tune_up_that_alone_is_too_much_is_told_so(design: MakeDesign) -> None:
    use = {"frequency": "7.1 MHz", "power": "100 W", "mode": "CW", "tune_up": {"power": "100 W", "time": "30 min"}}
    near = {**WALK, "along_axis": "1.5 m"}
    found = findings(sheet_of(design, place=[near], transmission__0=use))["exposure.us-fcc.public.quay-walk"]
    assert found.verdict == "stop"
    assert "tune_up, which alone" in found.do


def test_unread_rows_that_do_not_bind_are_named_beside_the_ceiling(design: MakeDesign) -> None:
    site = {"ground": "average", "rules": ["icnirp-2020"]}
    sheet = sheet_of(design, site=site, place=[WALK], transmission__0={"frequency": "7.1 MHz", "power": "100 W"})
    found = findings(sheet)["exposure.icnirp-2020.public.quay-walk"]
    assert found.thin
    assert found.id in sheet.power_ceiling.on_thin_evidence


def test_a_fence_is_held_against_the_field_outside_it(design: MakeDesign) -> None:
    def verdict(metres: str) -> str:
        sheet = sheet_of(design, place=[{"name": "fence", "who": "public", "fence": metres}])
        return findings(sheet)["exposure.us-fcc.public.fence"].verdict

    distance = sheet_of(design).operating_points[0].exposure[1].keepout
    assert distance is not None
    least = max(d.distance or 0.0 for f in distance.on_floors for d in (f.along_axis, f.in_plane) if d is not None)
    assert verdict(f"{least + 0.3:.2f} m") == "clear"
    assert verdict(f"{least * 0.7:.2f} m") == "stop"


def test_distances_are_in_the_machine_form_as_the_contract_shows_them(design: MakeDesign) -> None:
    made = json.loads(sheet_of(design, place=[WALK]).to_json())
    exposure = made["operating_points"][0]["exposure"]
    assert [(e["rule"], e["who"]) for e in exposure] == [("us-fcc", "trained"), ("us-fcc", "public")]
    directions = {"any_direction", "along_axis", "in_plane", "across", "above", "below", "on_floors"}
    out = exposure[1]["keepout"]
    assert set(out) == {*directions, "key_down"}
    assert set(out["key_down"]) == directions
    assert set(out["any_direction"]) == {"distance", "set_by", "basis"}
    assert out["across"] is None
    assert set(out["on_floors"][0]) == {"floor", "any_bearing", "along_axis", "in_plane", "across"}
    (place,) = exposure[1]["places"]
    assert set(place) >= {
        "name", "electric", "magnetic", "electric_limit", "magnetic_limit", "share_of_limit", "field_ratio", "set_by",
        "basis", "judged_power", "averaging_time", "provenance", "verdict", "power_ceiling", "at_limit", "bases",
    }  # fmt: skip
    assert place["averaging_time"] == 1800.0


def test_a_flat_loop_has_across_and_no_axis(design: MakeDesign) -> None:
    sheet = sheet_of(
        design,
        loop__plane="horizontal",
        capacitor__position=None,
        place=[{"name": "Quay walk", "who": "public", "across": "8 m"}],
    )
    out = sheet.operating_points[0].exposure[0].keepout
    assert out is not None
    assert out.along_axis is None
    assert out.across is not None
    assert findings(sheet)["exposure.us-fcc.public.quay-walk"].verdict == "clear"


def test_beyond_what_tunes_people_are_unproven(design: MakeDesign) -> None:
    sheet = sheet_of(design, place=[WALK], transmission__0__frequency="50.1 MHz")
    assert findings(sheet)["exposure.us-fcc.public.quay-walk"].verdict == "unproven"
    assert sheet.operating_points[0].exposure[0].keepout is None


def test_keepout_leaves_by_its_own_findings(design: MakeDesign) -> None:
    made = design(
        **SITE, place=[{**DESK, "along_axis": "9 m"}, {**WALK, "along_axis": "12 m"}], capacitor__rated_voltage="1 kV"
    )
    sheet = magsafe.check(made)
    assert sheet.verdict == "stop"
    people = keepout(sheet)
    assert people.verdict == "clear"
    assert people.power_ceiling.held_by is not None
    assert people.power_ceiling.held_by.startswith("exposure.")


def test_the_keepout_command() -> None:
    data = file_of(plain_tree(**SITE, place=[{**DESK, "along_axis": "9 m"}, {**WALK, "along_axis": "12 m"}]))
    done = run("keepout", "-", given=data)
    assert done.returncode == 0
    assert done.stdout.startswith("● clear")
    assert max(map(len, done.stdout.splitlines())) <= 80
    for word in ("any direction", "along axis", "key-down", "us-fcc public", "Cautions"):
        assert word in done.stdout
    made = json.loads(run("keepout", "-", "--json", given=data).stdout)
    assert made["schema"] == "magsafe.keepout/1"
    assert made["operating_points"][0]["exposure"][0]["keepout"]["any_direction"]["distance"] > 1.0


def test_the_rules_command() -> None:
    assert "icnirp-2020" in run("rules").stdout
    text = run("rules", "us-fcc").stdout
    for word in ("2.19 / f A/m", "30 min", "verified", "sha256", "general population"):
        assert word in text
    text = run("rules", "eu-2013-35").stdout
    for word in (
        "40 mA",
        "100 mA",
        "No limits: the Directive is for workers",
        "high level (not judged)",
        "second reading",
    ):
        assert word in text
    assert "1998, superseded" in " ".join(run("rules", env={"COLUMNS": "200"}).stdout.split())
    wrong = run("rules", "us-fc")
    assert wrong.returncode == 2
    assert "did you mean us-fcc?" in wrong.stderr


def test_a_tier_without_limits_has_no_row_of_question_marks(design: MakeDesign) -> None:
    """It is told in one plain sentence, where to look instead, and not as something that was not proven."""
    site = {"ground": "average", "rules": ["eu-1999-519", "us-fcc"]}
    tree = plain_tree(
        **{**SITE, "site": site, "place": [{**DESK, "along_axis": "9 m"}, {**WALK, "along_axis": "12 m"}]}
    )
    for command in ("check", "keepout"):
        text = " ".join(run(command, "-", given=file_of(tree)).stdout.split())
        assert text.count("eu-1999-519 has no limits for trained people: the recommendation is for the general") == 1
        assert "Not proven" not in text
        assert " ? " not in text
        assert "eu-1999-519 public" in text
        assert "eu-1999-519 trained" not in text
    records = magsafe.check(design(**{**SITE, "site": site})).operating_points[0].exposure
    assert [(e.rule, e.who) for e in records if e.without] == [("eu-1999-519", "trained")]


def test_a_place_that_no_rule_knows_is_told_so() -> None:
    site = {"ground": "average", "rules": ["eu-1999-519"]}
    tree = plain_tree(
        **{**SITE, "site": site, "place": [{**DESK, "along_axis": "9 m"}, {**WALK, "along_axis": "12 m"}]}
    )
    text = " ".join(run("check", "-", given=file_of(tree)).stdout.split())
    assert "operating desk, eu-1999-519 trained: no limits in this rule" in text
    assert "unproven" in text


def test_distances_that_are_not_known_keep_their_question_marks() -> None:
    tree = plain_tree(**SITE, place=[DESK, WALK], transmission__0__frequency="50.1 MHz")
    text = " ".join(run("check", "-", given=file_of(tree)).stdout.split())
    assert "us-fcc trained ? ?" in text
    assert "Not proven: no series capacitor" in text


def test_exemption_is_told_with_its_warning_on_both_surfaces() -> None:
    """47 CFR 1.1307(b)(3)(i)(C), Table 1: at 7.1 MHz it holds from 6.72 m on, as 3450 R^2/f^2."""
    site = {"ground": "average", "rules": ["us-fcc", "icnirp-2020"]}
    near = {**WALK, "name": "gate", "along_axis": "4 m"}
    tree = plain_tree(**{**SITE, "site": site, "place": [WALK, near]})
    for command in ("check", "keepout"):
        done = run(command, "-", given=file_of(tree)).stdout
        assert max(map(len, done.splitlines())) <= 80
        text = " ".join(done.split())
        assert "Exemption from evaluation is not compliance: the limit still binds; each transmission" in text
        assert "It holds from 6.72 m on (wavelength / 2 pi); nearer than that an evaluation is required." in text
        assert "Quay walk at 7.69 m: threshold 4000 W, exempt; gate at 3.69 m: nearer than it holds" in text
        assert "1.40 times the limit for the public" in text
        assert "power of the transmitter 100 W mean over 30 min, threshold 0.001 W: not exempt" in text
        assert "United Kingdom, licence condition" in text
        assert "at the crest, threshold 10 W: not exempt" in text
    made = json.loads(run("keepout", "-", "--json", given=file_of(tree)).stdout)
    told = made["operating_points"][0]["exemptions"]
    assert [each["kind"] for each in told] == ["ERP by distance", "power", "EIRP"]
    assert all("is not compliance: the limit still binds" in each["warning"] for each in told)


def test_without_a_public_place_there_is_nothing_to_hold_it_against() -> None:
    tree = plain_tree(**SITE, place=[DESK], transmission__0__frequency="50.1 MHz")
    text = " ".join(run("check", "-", given=file_of(tree)).stdout.split())
    assert "No place of the public is given to hold it against." in text
    assert "evaluation, by ERP and distance" in text
    assert "not known, its gain is not known" in text


def test_a_rule_that_exempts_nobody_says_nothing_of_it() -> None:
    site = {"ground": "average", "rules": ["eu-1999-519"]}
    tree = plain_tree(**{**SITE, "site": site})
    assert "Exemption" not in run("check", "-", given=file_of(tree)).stdout


def test_the_rules_command_tells_sums_means_and_exemptions() -> None:
    text = " ".join(run("rules", "us-fcc").stdout.split())
    for said in (
        "Several transmissions: on a basis that is averaged, the larger of the squares",
        "Mean over the body: of the square, where it is asked for, on thermal whole-body, no nearer to the source",
        "Left unjudged then: the SAR limits for parts of the body",
        "Exempt from evaluation, not from the limits: United States",
        "It holds from R = wavelength / 2 pi on.",
        "3450 / f^2 R^2 W",
        "power at or below 0.001 W; the mean counts.",
    ):
        assert said in text
    text = " ".join(run("rules", "icnirp-2020").stdout.split())
    assert "come to no more than 1 together. So up to 30 MHz; above, the larger of the two counts." in text
    text = " ".join(run("rules", "de-26bimschv").stdout.split())
    assert "Mean over the body: does not count" in text
    assert "come to no more than 1, and so do those of H." in text
    assert "EIRP below 10 W; the crest of the envelope counts." in text
