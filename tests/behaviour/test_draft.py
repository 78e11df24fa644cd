"""A design file by questions and answers: the table of questions, the conversation, a real terminal, the file."""

import io
import json
import random
import sys
import tomllib
from collections.abc import Callable, Iterator, Sequence
from functools import cache
from pathlib import Path
from typing import Any

import pexpect  # type: ignore[import-untyped]
import pytest
from commands import run
from hypothesis import given, settings
from hypothesis import strategies as st
from rich.console import Console

import magsafe
from magsafe.cli.conversation import Conversation, Left, head
from magsafe.cli.unfinished import Unfinished, beside, keep, kept
from magsafe.design.answers import entries_of, problems_of, refused, sound, spelled, value_of
from magsafe.design.model import DesignFile
from magsafe.design.questions import STEERING, UNKNOWN, Answer, Question, Step, path_of, sections, walk
from magsafe.design.writing import LONGEST_PIECE, WIDTH, Entry, UnwritableText, design_text, toml_string, toml_value
from magsafe.errors import CommandError, Problem
from magsafe.reports.draft import Teller

# What a person types to a small loop, a line for each question, in the order of the questions.
STATION = ["Slipway, west side", "", ""]
LOOP = ["circle", "", "1.0 m", "", "", "average", "2.0 m", "no", "PTFE"]
CONDUCTOR = ["tube", "22 mm", "1.0 mm", "copper tube", "", "painted", "no"]
JOINTS = ["yes", "clamps", "2", "bolted lug", "unknown", "capacitor", ""]
USE = ["40 m Morse", "7.03 MHz", "CW", "5 W", "always", "no", ""]
CAPACITOR = [
    *("vacuum variable", "top", "variable", "12 pF", "500 pF", ""),
    *("10 kV", "peak RF", "40 A", "30 MHz", "", "unknown", "sealed"),
]
FEED = ["motor", "unknown", "0.2 dB, 0.3 dB, 0.5 dB", "small loop", "5 mm", "unknown", "30 mm"]
SITE = ["5 m", "25 degC", "8 m", "", "icnirp-2020"]
PLACES = [
    *("yes", "operator's chair", "trained", "", "6 m", "0 m", "sitting", "0 m"),
    *("yes", "fence", "public", "fence", "8 m", ""),
]
WHOLE = [*STATION, *LOOP, *CONDUCTOR, *JOINTS, *USE, *CAPACITOR, *FEED, *SITE, *PLACES]


class Talk:
    """A conversation with scripted answers, and all that it printed."""

    def __init__(self, answers: Sequence[str], width: int = 80, state: Unfinished | None = None) -> None:
        self.screen = io.StringIO()
        self.typed = iter(answers)
        self.states: list[Unfinished] = []
        console = Console(file=self.screen, width=width, highlight=False, markup=False, emoji=False)
        self.talk = Conversation(self.listen, Teller(console), self.states.append)
        if state is not None:
            self.talk.take_up(state)

    def listen(self) -> str:
        try:
            return next(self.typed)
        except StopIteration:
            raise Left from None

    def run(self) -> tuple[Entry, ...]:
        return self.talk.run()

    def left(self) -> "Talk":
        with pytest.raises(Left):
            self.talk.run()
        return self

    @property
    def text(self) -> str:
        return self.screen.getvalue()

    @property
    def next_key(self) -> str:
        following = walk(self.talk.state.answers)[1]
        return "" if following is None else following.question.key


@cache
def usual() -> dict[str, Answer]:
    """Return the answers of the whole conversation, in their order."""
    return Talk(WHOLE).left().talk.state.answers


@cache
def whole_text() -> str:
    return design_text(Talk([*WHOLE, ""]).run(), head(Path("slipway.toml")))


def after(key: str, *answers: str, width: int = 80) -> Talk:
    """Return a conversation that has come to a question in the usual way, and was then answered so."""
    keys = list(usual())
    before = {each: usual()[each] for each in keys[: keys.index(key)]}
    return Talk(answers, width, Unfinished(before)).left()


# The table of questions ------------------------------------------------------------------------------------

QUESTIONS = [question for section in sections() for question in section.questions]


def model_keys(block: Any, before: str = "") -> Iterator[str]:
    for name, field in block.model_fields.items():
        key = f"{before}{field.alias or name}"
        inner = next((part for part in parts_of(field.annotation) if hasattr(part, "model_fields")), None)
        listed = "list" in str(field.annotation)
        yield key
        if inner is not None:
            yield from model_keys(inner, f"{key}{'[]' if listed else ''}.")


def parts_of(annotation: Any) -> Iterator[Any]:
    yield annotation
    for part in getattr(annotation, "__args__", ()):
        yield from parts_of(part)


def test_every_question_is_of_a_key_that_the_file_knows() -> None:
    known = set(model_keys(DesignFile))
    assert {question.key for question in QUESTIONS if question.written} <= known


def test_nearly_every_key_of_the_file_is_asked_for() -> None:
    asked = {question.key for question in QUESTIONS}
    parents = {key for key in model_keys(DesignFile) if any(each.startswith((f"{key}.", f"{key}[")) for each in asked)}
    not_asked = set(model_keys(DesignFile)) - asked - parents
    assert {key for key in not_asked if not key.startswith(("probe", "measured", "margins", "capacitor.with"))} == {
        "schema",
        "loop.conductor.temperature",  # the default of the contract
        "loop.conductor.strip_lies",  # changes nothing that is computed
        "capacitor.series_resistance",  # a quality factor says the same
        "feed.line_impedance",  # nearly always the 50 ohm of the default
        "feed.section_impedance",
        "feed.velocity_factor",
        "feed.small_loop.position",  # told by the clearance
        "feed.series_capacitor.balanced",
        "feed.series_capacitor.rated_current_at",
        "feed.series_capacitor.rated_reactive_power",
        "feed.series_capacitor.rated_dissipation",
        "site.sessions",  # told by whether all is worked in turn
        "site.over_the_body",
        "site.ground.conductivity",  # a soil of the table is asked for
        "site.ground.permittivity",
    }


@pytest.mark.parametrize("question", QUESTIONS, ids=lambda q: f"{q.key}, {q.when}")
def test_each_question_can_be_answered_and_says_why(question: Question) -> None:
    assert question.ask.endswith("?")
    assert question.explain.endswith(".")
    assert bool(question.default) == bool(question.because), "a default has its reason"
    assert question.options or question.example or question.form == "yes", "something shows what to type"
    assert question.comment or not question.written or question.key.rpartition(".")[0], "a key has its comment"
    if question.default == UNKNOWN:
        assert question.unknown
    elif question.default:
        assert isinstance(spelled(question, question.default), Answer)
    for key, _ in question.when:
        plain = key.replace("[any]", "[]").replace("[1]", "[]")
        assert plain in {each.key for each in QUESTIONS}, f"{key} is asked nowhere"


def choices(question: Question, count: int) -> list[Answer]:
    """Return the answers that the table itself offers."""
    if question.key.startswith(f"{STEERING}another") and count > 110:
        return [Answer("no")]
    offered = [Answer(None)] if question.unknown else []
    if question.options:
        return [*offered, *(Answer(option.value) for option in question.options)]
    if question.form == "yes":
        return [*offered, Answer("yes"), Answer("no")]
    if question.default not in ("", UNKNOWN):
        offered.append(Answer(question.default, default=True))
    name = f"{question.example} {count}" if question.form == "text" else question.example
    return [*offered, Answer(name)]


@pytest.mark.parametrize("seed", range(8))
def test_whatever_is_chosen_the_file_is_accepted(seed: int) -> None:
    chance = random.Random(seed)
    answers: dict[str, Answer] = {}
    count = 0
    while (following := walk(answers)[1]) is not None:
        question, count = following.question, count + 1
        offered = choices(question, count)
        chance.shuffle(offered)
        fit = next((each for each in offered if not refused(question, each, answers, "any")), None)
        assert fit is not None, f"{question.key} cannot be answered after {answers}"
        answers[question.key] = fit
    entries = entries_of(walk(answers)[0], answers)
    assert problems_of(entries, "any", whole=True) == ()
    design = magsafe.parse_design(design_text(entries, head(Path("any.toml"))).encode())
    assert design.loop.shape == answers["loop.shape"].text


def test_answers_to_questions_that_do_not_come_count_for_nothing() -> None:
    answers = {"loop.shape": Answer("rectangle"), "ask size of a circle": Answer("diameter")}
    for key in ("station.name", "station.callsign", "station.operator"):
        answers[key] = Answer(None)
    following = walk(answers)[1]
    assert following is not None
    assert following.question.key == "loop.width"


# What is typed ---------------------------------------------------------------------------------------------


def asked(key: str) -> Question:
    return next(question for question in QUESTIONS if question.key == key)


@pytest.mark.parametrize(
    ("key", "typed", "value"),
    [
        ("loop.shape", "2", "polygon"),
        ("loop.shape", " Circle ", "circle"),
        ("loop.turns", "2", 2),
        ("loop.turns", "two", "two"),
        ("loop.diameter", '"1.0 m"', "1.0 m"),
        ("loop.diameter", "1,5 m", "1,5 m"),
        ("loop.rotates", "Y", True),
        ("loop.rotates", "no", False),
        ("loop.supports", "none", []),
        ("loop.supports", "1, ptfe", ["PVC", "PTFE"]),
        ("site.floors", "0 m, 6 m", ["0 m", "6 m"]),
        ("loop.joint[].resistance", "0.3 mohm", "0.3 mohm"),
        (
            "loop.joint[].resistance",
            "0.1 mohm, 0.3 mohm, 1 mohm",
            {"low": "0.1 mohm", "likely": "0.3 mohm", "high": "1 mohm"},
        ),
        ("loop.joint[].resistance", "0,1 mohm", "0,1 mohm"),
        ("capacitor.quality_factor", "1000", 1000),
        ("capacitor.quality_factor", "500, 1000.5, 3000", {"low": 500, "likely": 1000.5, "high": 3000}),
        ("capacitor.sections_in_series", "2", 2),
        ("loop.conductor.material", "other", None),
        ("loop.points", "0 m, 0 m; 1 m, 0 m;", [["0 m", "0 m"], ["1 m", "0 m"]]),
        ("station.name", '"back"', "back"),
        ("station.name", '"Up" and "down"', '"Up" and "down"'),
        ("loop.turns", "9" * 5000, "9" * 5000),
    ],
)
def test_what_is_typed_and_what_stands_in_the_file(key: str, typed: str, value: Any) -> None:
    answer = spelled(asked(key), typed)
    assert isinstance(answer, Answer)
    assert answer.text is not None
    assert value_of(asked(key), answer.text) == value


def test_a_choice_that_only_steers_is_held_against_its_own_options() -> None:
    wrong = spelled(asked("ask size of a circle"), "diametre")
    assert isinstance(wrong, Problem)
    assert wrong.do == 'did you mean "diameter"?'
    assert isinstance(spelled(asked("ask plating"), "perhaps"), Problem)


def test_keys_have_paths() -> None:
    assert path_of("transmission[1].over.transmit") == ("transmission", 1, "over", "transmit")


# The conversation ------------------------------------------------------------------------------------------


def test_a_whole_conversation_makes_a_file_that_the_reader_accepts() -> None:
    design = magsafe.parse_design(whole_text().encode())
    assert design.station.name == "Slipway, west side"
    assert design.loop.diameter == 1.0
    assert design.loop.supports == ["PTFE"]
    assert design.loop.joint[0].count == 2
    assert design.capacitor.capacitance is not None
    assert design.capacitor.capacitance.max == pytest.approx(500e-12)
    assert design.feed.line_loss is not None
    assert design.feed.line_loss.low == pytest.approx(0.2)
    assert [place.name for place in design.place] == ["operator's chair", "fence"]
    assert design.place[1].fence == 8.0


def test_each_line_of_the_file_has_its_comment_and_defaults_their_reason() -> None:
    lines = whole_text().splitlines()
    assert max(map(len, lines)) <= WIDTH + 12
    above = ""
    for line in lines:
        if " = " in line and not line.startswith("#"):
            assert "#" in line or above.startswith("#"), line
        above = line
    assert (
        "turns = 1                          # 1 to 8; default, because most transmitting loops have one turn" in lines
    )
    assert "# callsign: not known: the sheet bears no callsign" in lines


@pytest.mark.parametrize(
    ("key", "typed", "expected", "do"),
    [
        ("loop.diameter", "1,5 m", "a length with its unit", "write a decimal point instead of the comma"),
        ("loop.diameter", "1.5", "a length with its unit", "unit"),
        ("loop.diameter", "1.5 W", "a length in m", ""),
        ("loop.diameter", "", "an answer", "type one, such as 1.0 m"),
        ("loop.diameter", "unknown", "nothing is computed without it", "type one, such as 1.0 m"),
        ("loop.turns", "9", "8 or less", "check the number"),
        ("loop.shape", "cirlce", "one of circle", 'did you mean "circle"?'),
        ("loop.centre_height", "0.3 m", "more than 500 mm", "raise it"),
        ("loop.conductor.wall", "12 mm", "less than half the outer diameter", "check both"),
        ("loop.conductor.material", "copper tub", "one of annealed copper", 'did you mean "copper tube"?'),
        ("capacitor.capacitance.max", "5 pF", "min below max", "exchange the two"),
        ("transmission[0].frequency", "7.1 mhz", "a frequency in Hz, kHz, MHz", ""),
        ("transmission[0].power", "100 MW", "a power", ""),
        ("site.rules", "fcc", "one of ca-sc6", "us-fcc"),
        ("station.name", "a\x1b[2Jb", "without control characters", "retype it"),
        ("station.name", "two\nlines", "without control characters", "retype it"),
        ("station.name", "half \ud83d", "text that a file can hold", "plain letters"),
        ("place[1].name", "Operator's chair!", "a name of its own", "change one"),
    ],
)
def test_a_wrong_answer_is_told_as_of_a_file_and_asked_again(key: str, typed: str, expected: str, do: str) -> None:
    talk = after(key, typed)
    told = " ".join(talk.text.split())
    assert "found" in told
    assert expected in told
    assert do in told
    assert talk.next_key == key
    assert "\x1b" not in talk.text


def test_a_question_mark_explains_and_asks_again() -> None:
    talk = after("loop.diameter", "?")
    assert "Measure from outside to outside" in talk.text
    assert "loop.diameter" in talk.text
    assert talk.next_key == "loop.diameter"


def test_back_goes_back_and_offers_what_was_answered() -> None:
    talk = after("loop.turns", "back", "")
    assert "Enter takes 1.0 m, your earlier answer." in talk.text
    assert talk.talk.state.answers["loop.diameter"] == Answer("1.0 m")
    assert talk.next_key == "loop.turns"
    back = after("loop.turns", "back", "back", "perimeter", "3.0 m")
    assert "loop.diameter" not in back.talk.state.answers
    assert back.talk.state.answers["loop.perimeter"] == Answer("3.0 m")


def test_back_at_the_first_question_says_so() -> None:
    talk = Talk(["back", "Quay"]).left()
    assert "There is nothing before this question." in talk.text
    assert talk.next_key == "station.callsign"


def test_unknown_tells_what_follows_and_stands_in_the_file_as_a_comment() -> None:
    talk = after("site.altitude", "unknown")
    assert "Left out: the thin air of 2000 m is taken for gaps and warmth." in talk.text
    answers = talk.talk.state.answers
    text = design_text(entries_of(walk(answers)[0], answers))
    assert "# altitude: not known: the thin air of 2000 m is taken for gaps and warmth" in text
    assert "altitude" not in tomllib.loads(text)["site"]


@pytest.mark.parametrize("word", ["leave", "LEAVE", " leave "])
def test_leaving_keeps_every_answer(word: str) -> None:
    talk = Talk([*STATION, "circle", word]).left()
    assert list(talk.states[-1].answers) == ["station.name", "station.callsign", "station.operator", "loop.shape"]
    assert len(talk.states) == 4


def test_what_was_left_is_taken_up_where_it_was() -> None:
    first = Talk(WHOLE[:12]).left()
    second = Talk([*WHOLE[12:], ""], state=first.states[-1])
    assert design_text(second.run(), head(Path("slipway.toml"))) == whole_text()


def test_letters_that_the_terminal_does_not_speak_are_asked_again() -> None:
    talk = Talk(["Quay"])
    heard: list[str | Exception] = [Left(), "Quay", UnicodeDecodeError("utf-8", b"\xff", 0, 1, "invalid")]

    def listen() -> str:
        found = heard.pop()
        if isinstance(found, Exception):
            raise found
        return found

    talk.talk.listen = listen
    talk.left()
    assert "type it again" in talk.text
    assert talk.talk.state.answers["station.name"] == Answer("Quay")


def test_figures_are_told_as_soon_as_they_are_known() -> None:
    talk = after("transmission[0].frequency", "7.03 MHz")
    told = " ".join(talk.text.partition("So far, at 7.03 MHz")[2].split())
    sheet = magsafe.check(magsafe.parse_design(whole_text().encode()))
    figures = sheet.operating_points[0].figures
    # 1 m of diameter at 7.03 MHz: pi / 42.64 m; the rest as the whole design has it.
    assert told.startswith("Perimeter 0.0737 wavelengths")
    for name, scale, unit in (("inductance", 1e6, "µH"), ("tuning_capacitance", 1e12, "pF")):
        likely = figures[name].likely
        assert likely is not None
        assert f"{likely * scale:.3g} {unit}" in told
    assert "mΩ in free space" in told


def test_volts_and_amps_are_told_with_the_ratings() -> None:
    talk = after("capacitor.weather", "sealed")
    told = " ".join(talk.text.partition("At the capacitor")[2].split())
    answers = talk.talk.state.answers
    design = magsafe.parse_design(design_text(entries_of(walk(answers)[0], answers)).encode())
    figures = magsafe.check(design).operating_points[0].figures
    volts, amps = figures["capacitor_peak_voltage"], figures["capacitor_rms_current"]
    assert volts.high is not None
    assert amps.high is not None
    assert told.startswith(", 40 m Morse, 7.03 MHz, 5 W PEP Voltage")
    assert f"{volts.high / 1e3:.3g} kV peak at worst" in told
    assert "rated 10.0 kV peak RF" in told
    assert f"{amps.high:.3g} A RMS at worst" in told
    assert "rated 40.0 A RMS" in told


def test_what_is_missing_counts_only_of_a_whole() -> None:
    entries = [entry for entry in Talk([*WHOLE, ""]).run() if entry.path != ("loop", "conductor", "wall")]
    assert problems_of(entries, "any", whole=False) == ()
    (missing,) = problems_of(entries, "any", whole=True)
    assert missing.key == "loop.conductor.wall"


def test_a_loop_that_no_capacitor_tunes_is_told_at_once() -> None:
    talk = after("transmission[0].frequency", "144 MHz")
    assert "Not computed: no series capacitor tunes this loop above its anti-resonance" in " ".join(talk.text.split())


def test_what_is_worked_in_turn_is_written_by_name() -> None:
    another = ["yes", "", "10.12 MHz", "CW", "5 W", "always", "no", ""]
    typed = [*STATION, *LOOP, *CONDUCTOR, *JOINTS, *USE[:-1], *another, *CAPACITOR, *FEED, *SITE, "", *PLACES]
    tree = tomllib.loads(design_text(Talk([*typed, ""]).run()))
    assert tree["site"]["sessions"] == [["40 m Morse", "10.12 MHz"]]
    typed[len(typed) - len(PLACES) - 1] = "no"
    assert "sessions" not in tomllib.loads(design_text(Talk([*typed, ""]).run()))["site"]


def test_what_does_not_fit_as_a_whole_is_told_and_asked_again(monkeypatch: pytest.MonkeyPatch) -> None:
    from magsafe.cli import conversation

    # Answers are held against each other one by one, so a whole that does not fit needs a looser gate to come about.
    monkeypatch.setattr(conversation, "refused", lambda *_: ())
    typed = [each if each != "1.0 mm" else "12 mm" for each in WHOLE]
    talk = Talk([*typed, "1.0 mm", ""])
    tree = tomllib.loads(design_text(talk.run()))
    assert "it does not fit together yet" in talk.text
    assert "less than half the outer diameter" in " ".join(talk.text.split())
    assert tree["loop"]["conductor"]["wall"] == "1.0 mm"


@pytest.mark.parametrize("width", [40, 60, 80])
def test_no_line_is_wider_than_the_screen(width: int) -> None:
    talk = Talk([*WHOLE[:20], "copper tub", "?", *WHOLE[20:], "?"], width)
    talk.talk.teller.welcome()
    talk.left()
    assert talk.next_key == ""
    assert max(map(len, talk.text.splitlines())) <= width


def test_no_mark_up_of_a_name_reaches_the_screen() -> None:
    talk = Talk(["[red]Quay[/red] :smile:", "back"]).left()
    assert "Enter takes [red]Quay[/red] :smile:, your earlier answer." in talk.text


# The file --------------------------------------------------------------------------------------------------

HOSTILE = [
    "quotes \" and ' and \"\"\" and '''",
    "back\\slash \\n \\u0041 \\",
    "line\nfeed\r\ntab\tnull\x00bell\x07escape\x1b[31m delete\x7f next\x85 mark\ufeff turn\u202e",
    "=[]{}#,. [[station]] # no comment",
    "\U0001f6a2 ship, \u03a9 ohm, \u0301 accent",
    " " * 3 * LONGEST_PIECE,
    '"\\' * 5000,
    "\U0001f6a2" * 10_000,
    ("x" * (LONGEST_PIECE - 1) + " ") * 20,
    "",
]


@pytest.mark.parametrize("text", HOSTILE, ids=range(len(HOSTILE)))
def test_hostile_texts_come_back_from_a_toml_reader(text: str) -> None:
    written = f"a = {toml_string(text)}"
    assert tomllib.loads(written) == {"a": text}
    assert all(letter.isprintable() or letter == "\n" for letter in written)
    assert max(map(len, written.split("\n"))) <= LONGEST_PIECE + 20


@settings(max_examples=100, deadline=None)
@given(text=st.text(max_size=3 * LONGEST_PIECE))
def test_any_text_comes_back_from_a_toml_reader(text: str) -> None:
    try:
        written = toml_string(text)
    except UnwritableText:
        assert any(0xD800 <= ord(letter) <= 0xDFFF for letter in text)
    else:
        assert tomllib.loads(f"a = {written}") == {"a": text}


VALUES = st.recursive(
    st.booleans()
    | st.integers(-(2**63), 2**63 - 1)
    | st.floats(allow_nan=False)
    | st.text(st.characters(exclude_categories=["Cs"]), max_size=20),
    lambda inner: (
        st.lists(inner, max_size=3)
        | st.dictionaries(st.text(st.characters(exclude_categories=["Cs"]), max_size=5), inner, max_size=3)
    ),
    max_leaves=8,
)


@settings(max_examples=100, deadline=None)
@given(value=VALUES)
def test_any_value_comes_back_from_a_toml_reader(value: Any) -> None:
    assert tomllib.loads(f"a = {toml_value(value)}") == {"a": value}


def test_what_has_no_form_in_a_file_is_a_fault() -> None:
    with pytest.raises(TypeError, match="NoneType has no form"):
        toml_value([None])


def test_what_has_no_table_of_its_own_is_not_lost() -> None:
    assert design_text([Entry(("rig", "name"), "x", "of ours")]).startswith('rig = { name = "x" }')


@pytest.mark.parametrize(
    "name",
    [
        '"; drop # \\ \\u0000 \' """',
        "\U0001f6a2 quay",
        "q" * 10_000,
        "\u03a9" * 10_000,
        "\"'\\" * 3_300 + "x",
    ],
    ids=["marks", "ship", "long", "greek", "escapes"],
)
def test_a_hostile_name_is_written_and_read_back(name: str) -> None:
    talk = Talk([name], state=Unfinished()).left()
    answers = {**usual(), **talk.talk.state.answers}
    text = design_text(entries_of(walk(answers)[0], answers), head(Path("x.toml")))
    assert magsafe.parse_design(text.encode()).station.name == name


def test_tables_come_in_the_order_of_the_contract() -> None:
    text = design_text(
        [
            Entry(("place", 1, "name"), "b"),
            Entry(("site", "rules"), []),
            Entry(("place", 0, "name"), "a"),
            Entry(("schema",), "magsafe.design/1"),
            Entry(("loop", "conductor", "plating", "material"), "silver", "which metal"),
            Entry(("loop", "conductor", "plating", "thickness"), "5 um", "how much"),
        ],
        [":schema ./design.schema.json", "Said first."],
    )
    assert text.splitlines() == [
        "#:schema ./design.schema.json",
        "# Said first.",
        'schema = "magsafe.design/1"',
        "",
        "[loop.conductor]",
        'plating = { material = "silver", thickness = "5 um" } # which metal; how much',
        "",
        "[site]",
        "rules = []",
        "",
        "[[place]]",
        'name = "a"',
        "",
        "[[place]]",
        'name = "b"',
    ]


def test_the_schema_is_named_where_it_lies_beside_the_file(tmp_path: Path) -> None:
    target = tmp_path / "quay.toml"
    assert not head(target)[0].startswith(":")
    assert "magsafe schema design" in head(target)[-1]
    (tmp_path / "design.schema.json").write_text("{}")
    assert head(target)[0] == ":schema ./design.schema.json"
    assert design_text([], head(target)).startswith("#:schema ./design.schema.json\n")


# What waits beside it --------------------------------------------------------------------------------------


def test_answers_wait_beside_the_file(tmp_path: Path) -> None:
    target = tmp_path / "quay.toml"
    assert kept(target) is None
    state = Unfinished({"station.name": Answer("Qu\udc80y"), "a": Answer(None, default=True)}, {"b": Answer("x")})
    keep(target, state)
    assert kept(target) == state
    assert beside(target).name == "quay.toml.draft"
    assert [path.name for path in tmp_path.iterdir()] == ["quay.toml.draft"]


@pytest.mark.parametrize(
    "data",
    [
        b"",
        b"# my own notes",
        b"[]",
        b"{}",
        b'{"schema": "magsafe.draft/2", "answers": [], "earlier": []}',
        b'{"schema": "magsafe.draft/1", "answers": [["a", 1, false]], "earlier": []}',
        b'{"schema": "magsafe.draft/1", "answers": 3, "earlier": []}',
        b"[" * 100_000,
        b" " * 4_000_001,
        b"\xff\xfe",
    ],
    ids=range(10),
)
def test_something_else_under_that_name_is_refused_and_kept(tmp_path: Path, data: bytes) -> None:
    target = tmp_path / "quay.toml"
    beside(target).write_bytes(data)
    with pytest.raises(CommandError, match="move that file away"):
        kept(target)
    assert beside(target).read_bytes() == data


@pytest.mark.parametrize(
    ("key", "answer"),
    [
        ("loop.diameter", Answer("a metre")),
        ("loop.diameter", Answer(None)),
        ("loop.rotates", Answer("perhaps")),
        ("loop.centre_height", Answer("0.3 m")),
        ("station.name", Answer("half \ud83d")),
        ("ask size of a circle", Answer("radius")),
    ],
)
def test_an_answer_that_no_longer_does_is_asked_again(key: str, answer: Answer) -> None:
    changed = {**usual(), key: answer, "loop.nonsense": Answer("x")}
    left = sound(changed, "any")
    assert set(changed) - set(left) == {key}
    following = walk(left)[1]
    assert following is not None
    assert following.question.key == key


# A real terminal -------------------------------------------------------------------------------------------

PROMPT = "\n> "


@pytest.fixture
def terminal(tmp_path: Path) -> Iterator[Callable[..., Any]]:
    started: list[Any] = []

    def start(*arguments: str) -> Any:
        env = {"PATH": "/usr/bin:/bin", "TERM": "dumb", "LANG": "C.UTF-8", "OPENBLAS_NUM_THREADS": "1"}
        env["PYTHONPATH"] = str(Path(magsafe.__file__).parents[1])
        child = pexpect.spawn(
            sys.executable,
            ["-m", "magsafe", "draft", *arguments],
            cwd=str(tmp_path),
            env=env,
            encoding="utf-8",
            timeout=60,
            dimensions=(24, 80),
        )
        child.delaybeforesend = None
        started.append(child)
        return child

    yield start
    for child in started:
        child.close(force=True)


def say(child: Any, *typed: str) -> None:
    for line in typed:
        child.expect(PROMPT)
        child.sendline(line)


def status(child: Any) -> int:
    child.expect(pexpect.EOF)
    child.close()
    return int(child.exitstatus)


def test_a_person_makes_a_file_leaves_and_goes_on(terminal: Callable[..., Any], tmp_path: Path) -> None:
    first = terminal()
    say(first, WHOLE[0], "", *WHOLE[1:5])
    say(first, "1,5 m")
    first.expect("write a decimal point instead of the comma")
    first.expect(PROMPT)
    first.sendintr()
    first.expect("\n  magsafe draft -o slipway_west_side.toml\r\n")
    assert status(first) == 2
    assert [path.name for path in tmp_path.iterdir()] == ["slipway_west_side.toml.draft"]

    second = terminal("-o", "slipway_west_side.toml")
    second.expect("5 answers are there")
    say(second, *WHOLE[5:30])
    second.expect(PROMPT)
    second.sendeof()
    second.expect("Your answers are in")
    assert status(second) == 2

    third = terminal("-o", "slipway_west_side.toml")
    say(third, *WHOLE[30:], "")
    third.expect("The design is in slipway_west_side.toml")
    third.expect("\n  magsafe check slipway_west_side.toml\r\n")
    assert status(third) == 0
    assert [path.name for path in tmp_path.iterdir()] == ["slipway_west_side.toml"]
    checked = run("check", str(tmp_path / "slipway_west_side.toml"))
    assert checked.returncode in (0, 1, 3)
    assert checked.stderr == ""
    assert (tmp_path / "slipway_west_side.toml").read_text(encoding="utf-8") == whole_text()


def test_a_file_that_exists_stays(terminal: Callable[..., Any], tmp_path: Path) -> None:
    (tmp_path / "quay.toml").write_text("mine")
    refused_at_once = terminal("-o", "quay.toml")
    refused_at_once.expect("quay.toml, which exists")
    refused_at_once.expect("--replace")
    assert status(refused_at_once) == 2

    asked_again = terminal()
    say(asked_again, "Quay", "")  # offers quay.toml
    asked_again.expect("quay.toml, which exists")
    say(asked_again, "missing/quay.toml")
    asked_again.expect("make the directory missing first")
    say(asked_again, "leave")
    asked_again.expect("nothing is kept")
    assert status(asked_again) == 2
    assert [path.name for path in tmp_path.iterdir()] == ["quay.toml"]
    assert (tmp_path / "quay.toml").read_text() == "mine"


def test_where_there_is_no_terminal_it_says_what_to_do_instead() -> None:
    done = run("draft", "-o", "never_written.toml", given=b"circle\n")
    assert done.returncode == 2
    assert done.stdout == ""
    assert "no terminal" in done.stderr
    assert "sample_designs/quay_rail.toml" in done.stderr
    assert "magsafe schema design" in done.stderr
    assert not Path("never_written.toml").exists()


def test_help_loads_nothing_heavy_and_tells_the_exit_statuses() -> None:
    done = run("draft", "--help")
    assert done.returncode == 0
    assert "--replace" in done.stdout
    assert "Leaves with 0" in " ".join(done.stdout.split())


@pytest.mark.parametrize(
    ("station", "name", "why"),
    [
        ("Quay hut, seaward rail!", "quay_hut_seaward_rail.toml", "the station is called so"),
        ("../../etc/passwd", "etc_passwd.toml", "the station is called so"),
        ("\u6e2f", "loop.toml", "the station gives it no name"),
        ("unknown", "loop.toml", "the station gives it no name"),
        ("q" * 10_000, f"{'q' * 60}.toml", "the station is called so"),
    ],
)
def test_the_station_gives_the_file_its_name(station: str, name: str, why: str) -> None:
    talk = Talk([station, "?", ""])
    tried: list[str] = []
    assert talk.talk.file(tried.append) == name
    assert tried == [name]
    assert f"because {why}" in " ".join(talk.text.split())


def test_a_name_that_will_not_do_is_asked_again_and_back_goes_to_the_station() -> None:
    talk = Talk(["Quay", "taken.toml", "back", "Pier", "free.toml"])

    def fits(name: str) -> None:
        if name == "taken.toml":
            raise CommandError("-o", "taken.toml, which exists", "a name that is free", "name another file")

    assert talk.talk.file(fits) == "free.toml"
    assert "taken.toml, which exists" in talk.text
    assert talk.talk.state.answers == {"station.name": Answer("Pier")}


def test_a_command_to_be_copied_stays_whole() -> None:
    talk = Talk([], width=40)
    talk.talk.teller.command("Go on with:", "magsafe", "draft", "-o", f"{'q' * 60} 1.toml")
    assert talk.text == f"Go on with:\n  magsafe draft -o '{'q' * 60} 1.toml'\n"


def test_the_draft_is_plain_json(tmp_path: Path) -> None:
    target = tmp_path / "quay.toml"
    keep(target, Unfinished({"station.name": Answer("Quay")}))
    assert json.loads(beside(target).read_text())["answers"] == [["station.name", "Quay", False]]


def test_a_step_of_no_section_has_no_heading() -> None:
    talk = Talk([])
    talk.talk.teller.question(Step(asked("loop.diameter"), "", talk.talk.teller.section), None)
    assert "of 9" not in talk.text
