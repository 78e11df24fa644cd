"""A record put into a design file: read again as it was meant, and not a byte of the rest touched."""

import stat
import tomllib
from codecs import BOM_UTF8
from pathlib import Path
from typing import Any

import pytest
from designs import file_of, plain_tree
from hypothesis import given, settings
from hypothesis import strategies as st

from magsafe.checks.run import check
from magsafe.cli.app import run
from magsafe.design.as_built import NEAR
from magsafe.design.reading import parse_design
from magsafe.design.recording import CannotRecord, record_text, standing_records, with_record

SAMPLES = sorted((Path(__file__).parents[2] / "sample_designs").glob("*.toml"))
FREQUENCY = 7.1e6
RECORD: dict[str, Any] = {
    "frequency": "7.1000000 MHz",
    "unloaded_q": {"low": 900.0, "likely": 1000.0, "high": 1100.0},
    "by": "sweep",
    "date": "2026-05-04",
    "ground": 'over "wet" sand \\ stones',
    "design": "0123456789abcdef",
    "centre_height": "1.5 m",
    "points": [["7.0900000 MHz", 0.5, -0.5], ["7.1100000 MHz", -0.25, 0.125]],
}
BLOCK = record_text(RECORD)
PLAIN = file_of(plain_tree()).decode()
OTHER = '[[measured]]\nfrequency = "14.2 MHz"\nunloaded_q = 700\n'


def near(megahertz: float, q: int = 500) -> str:
    return f'[[measured]]\nfrequency = "{megahertz:.6f} MHz"\nunloaded_q = {q}\n'


def records(text: str) -> list[dict[str, Any]]:
    found = tomllib.loads(text).get("measured", [])
    return [found] if isinstance(found, dict) else found


def without(text: str) -> dict[str, Any]:
    return {key: value for key, value in tomllib.loads(text).items() if key != "measured"}


# Into a file without a record ------------------------------------------------------------------------------


def test_a_block_reads_as_the_record_that_it_was_written_from() -> None:
    assert tomllib.loads(BLOCK)["measured"] == [RECORD]
    assert BLOCK.count("\n    [") == 2


@pytest.mark.parametrize("file", SAMPLES, ids=lambda file: file.stem)
def test_every_sample_takes_a_record_at_its_end_and_keeps_each_byte_before_it(file: Path) -> None:
    """At a frequency at which no sample has one."""
    text = file.read_text(encoding="utf-8")
    before, record = records(text), {**RECORD, "frequency": "50.0000000 MHz"}
    made = with_record(text, record, 50e6)
    assert made == f"{text}\n{record_text(record)}"
    assert records(made) == [*before, record]
    again = parse_design(made.encode(), file.name)
    assert again.measured[-1].date == "2026-05-04"
    assert again.measured[-1].points[1] == pytest.approx((7.11e6, -0.25, 0.125))


@pytest.mark.parametrize("file", SAMPLES, ids=lambda file: file.stem)
def test_to_record_twice_is_to_record_once(file: Path) -> None:
    once = with_record(file.read_text(encoding="utf-8"), RECORD, FREQUENCY)
    later = {**RECORD, "date": "2026-06-01"}
    assert with_record(once, RECORD, FREQUENCY) == once
    assert with_record(once, later, FREQUENCY) == once.replace("2026-05-04", "2026-06-01")


@pytest.mark.parametrize(
    ("end", "between"),
    [
        ("", "\n\n"),
        ("\n", "\n"),
        ("\n\n", ""),
        ("\n\n\n", ""),
        ("  ", "\n\n"),
        ("\n# the end", "\n\n"),
        ("\n\t\n", "\n"),
    ],
)
def test_whatever_a_file_ends_with_stays_and_one_empty_line_comes_before_the_block(end: str, between: str) -> None:
    assert with_record(f"{PLAIN}{end}", RECORD, FREQUENCY) == f"{PLAIN}{end}{between}{BLOCK}"


def test_ends_of_lines_stay_as_each_is() -> None:
    """A file from another system has CR LF throughout; one that two programs wrote has both, and keeps both."""
    text = PLAIN.replace("\n", "\r\n")
    assert with_record(text, RECORD, FREQUENCY) == f"{text}\r\n\r\n{BLOCK}".replace("\r\n", "\n").replace("\n", "\r\n")
    mixed = f"# first\n{text}\r\n# last\n"
    made = with_record(mixed, RECORD, FREQUENCY)
    assert made.startswith(mixed)
    assert made[len(mixed) :] == f"\n{BLOCK}".replace("\n", "\r\n")
    replaced = with_record(f"{mixed}\n{near(7.1)}\n# after\n", RECORD, FREQUENCY)
    assert replaced.startswith(f"{mixed}\n\n# after\n")


STRINGS = (
    '[station]\nname = "a [[measured]] b"\n',
    "[station]\nname = '[[measured]]'\n",
    '[station]\nname = """\\\n  [[measured]] \\\n  frequency = 7.1"""\n',
    '[station] # [[measured]]\n# [[measured]]\n#[measured]\nname = "x" # [measured]\n',
)


@pytest.mark.parametrize("block", STRINGS)
def test_the_word_in_a_text_or_a_comment_is_no_block(block: str) -> None:
    text = f"{PLAIN}\n{block}"
    made = with_record(text, RECORD, FREQUENCY)
    assert made == f"{text}\n{BLOCK}"
    both = f"{PLAIN}\n\n{near(7.11)}\n{block}"
    assert with_record(both, RECORD, FREQUENCY) == f"{PLAIN}\n\n\n{block}\n{BLOCK}"


@pytest.mark.parametrize("line", ["[[measured]]", "[measured]", "[[measured]] # x"])
def test_a_text_of_several_lines_with_the_word_alone_is_kept_or_refused(line: str) -> None:
    """No design has such a text, as names stand on one line; still nothing may be torn out of one."""
    text = f'{PLAIN}\n{near(7.1)}\n[station]\nname = """\n{line}\nfrequency = 7.1\n"""\n{near(7.11)}'
    try:
        made = with_record(text, RECORD, FREQUENCY)
    except CannotRecord:
        return
    assert without(made) == without(text)
    assert records(made) == [RECORD]


# In place of others ----------------------------------------------------------------------------------------

COMMENTED = f"""{PLAIN}

# before: of the quay in May
[[measured]] # with a word behind it
frequency = "7.11 MHz"
# inside
unloaded_q = {{ low = 400, likely = 500, high = 600 }}
points = [
    ["7.1 MHz", 0.5, 0.5], # [[measured]]
    # ["7.2 MHz", 0.5, 0.5],
]

# after: of what comes next
[station]
name = "quay" # a comment that stays

  [[ measured ]]
  frequency = "14.2 MHz"
  unloaded_q = 700
# the last line"""


def test_only_the_lines_of_the_record_itself_go() -> None:
    made = with_record(COMMENTED, RECORD, FREQUENCY)
    first = COMMENTED.index("[[measured]] # with")
    after = COMMENTED.index("\n# after")
    assert made == f"{COMMENTED[:first]}{COMMENTED[after:]}\n\n{BLOCK}"
    assert [each["frequency"] for each in records(made)] == ["14.2 MHz", "7.1000000 MHz"]


def test_what_comments_the_end_of_the_file_stays_when_its_last_record_goes() -> None:
    text = f"{PLAIN}\n\n{near(7.1)}\n# written by hand, keep\n\n# and this"
    assert with_record(text, RECORD, FREQUENCY) == f"{PLAIN}\n\n\n# written by hand, keep\n\n# and this\n\n{BLOCK}"


def test_records_near_the_frequency_go_and_others_stay() -> None:
    edge = 7.1 * NEAR
    blocks = [near(7.1 - 1.001 * edge, 1), near(7.1 - 0.999 * edge, 2), near(7.1 + 0.999 * edge, 3)]
    blocks += [near(7.1 + 1.001 * edge, 4), OTHER, '[[measured]]\ndate = "2026-01-01"\n']
    text = f"{PLAIN}\n\n" + "\n".join(blocks)
    assert [each["unloaded_q"] for each in standing_records(text, FREQUENCY)] == [2, 3]
    made = records(with_record(text, RECORD, FREQUENCY))
    assert [each.get("unloaded_q") for each in made] == [1, 4, 700, None, RECORD["unloaded_q"]]


@pytest.mark.parametrize("table", ["[measured]\n", "[measured]\n# fill this in\n", "[ measured ] # empty\n"])
def test_an_empty_table_makes_room_and_its_comments_stay(table: str) -> None:
    text = f'{PLAIN}\n{table}[station]\nname = "x"\n'
    made = with_record(text, RECORD, FREQUENCY)
    assert records(made) == [RECORD]
    assert ("# fill this in" in made) is ("# fill" in table)
    assert without(made) == without(text)


def test_a_single_table_at_another_frequency_becomes_one_of_the_list() -> None:
    table = OTHER.replace("[[", "[").replace("]]", "]")
    made = with_record(f"{PLAIN}\n{table}", RECORD, FREQUENCY)
    assert made == f"{PLAIN}\n{OTHER}\n{BLOCK}"


@pytest.mark.parametrize(
    "text",
    [
        f'measured = [{{ frequency = "7.1 MHz", unloaded_q = 500 }}]\n{PLAIN}',
        f'measured = [{{ frequency = "14 MHz", unloaded_q = 500 }}]\n{PLAIN}',
        f'measured = {{ frequency = "7.1 MHz", unloaded_q = 500 }}\n{PLAIN}',
        f"measured = []\n{PLAIN}",
        f"measured = {{}}\n{PLAIN}",
        f'measured.frequency = "7.1 MHz"\nmeasured.unloaded_q = 500\n{PLAIN}',
        f'{PLAIN}\n[["measured"]]\nfrequency = "7.1 MHz"\n',
        f'{PLAIN}\n[[measured]]\nfrequency = "7.1 MHz"\n[measured.unloaded_q]\nlow = 1\nlikely = 2\nhigh = 3\n',
    ],
)
def test_records_in_another_form_are_refused(text: str) -> None:
    tomllib.loads(text)
    with pytest.raises(CannotRecord, match="blocks"):
        with_record(text, RECORD, FREQUENCY)


PIECES = (
    "", "\n", "\n\n", "# [[measured]]\n", "# note\n", near(7.1), near(7.12, 3), OTHER,
    near(7.05, 9).replace("\n", "\r\n"),
    '[[place]]\nname = "[[measured]]"\nwho = "public"\n', "[margins]\nvoltage = 2.0 # asked\n", "  \n",
    '[[measured]]\n# inside\nfrequency = "7.1 MHz"\n\n# between\n\nunloaded_q = 5 # behind\n',
)  # fmt: skip


@settings(max_examples=150, deadline=None)
@given(pieces=st.lists(st.sampled_from(PIECES), max_size=8), last=st.sampled_from(["", "\n", "# end", "\r\n"]))
def test_any_file_of_blocks_keeps_all_else_byte_for_byte(pieces: list[str], last: str) -> None:
    """Its lines but those of the records that go are all there, in order, with their ends."""
    used = [piece for i, piece in enumerate(pieces) if "margins" not in piece or piece not in pieces[:i]]
    text = f"{PLAIN}\n{''.join(used)}{last}"
    made = with_record(text, RECORD, FREQUENCY)
    assert without(made) == without(text)
    kept = [each for each in records(text) if each not in standing_records(text, FREQUENCY)]
    assert records(made) == [*kept, RECORD]
    body = made[: made.rindex("[[measured]]")].splitlines(keepends=True)
    gone = [line for line in text.splitlines(keepends=True) if line not in body]
    own = "".join(piece for piece in used if "frequency" in piece and "14.2" not in piece).splitlines()
    assert all(line.strip() in {each.strip() for each in own} or line == last for line in gone), gone
    rest = iter(text.splitlines(keepends=True))
    assert all(line in rest for line in body[:-2])  # each in turn, so in order
    assert with_record(made, RECORD, FREQUENCY) == made


# By the command --------------------------------------------------------------------------------------------

POINTS = (
    "--swr2",
    "7.097 MHz",
    "7.103 MHz",
    "--swr-at-resonance",
    "1.0",
    "--line-loss",
    "0 dB",
    "--date",
    "2026-05-04",
)


def saved(file: Path, *more: str) -> int:
    """Run the command that saves a record, and return its exit status."""
    with pytest.raises(SystemExit) as left:
        run(["measured", str(file), *POINTS, "--save", *more])
    return int(left.value.code or 0)


def names(file: Path) -> list[str]:
    """Return what stands in a file's directory."""
    return sorted(each.name for each in file.parent.iterdir())


@pytest.fixture
def file(tmp_path: Path) -> Path:
    made = tmp_path / "loop.toml"
    made.write_bytes(file_of(plain_tree()))
    return made


def test_the_file_is_the_old_one_and_a_block(file: Path, capsys: pytest.CaptureFixture[str]) -> None:
    before = file.read_bytes()
    assert saved(file) in (0, 1, 3)
    after = file.read_bytes()
    assert after.startswith(before + b"\n\n[[measured]]\n")
    record = parse_design(after).measured[0]
    assert record.by == "points of one SWR"
    assert record.date == "2026-05-04"
    assert str(file) in capsys.readouterr().err
    assert names(file) == ["loop.toml"]


def test_a_byte_order_mark_and_cr_lf_stay(file: Path) -> None:
    before = BOM_UTF8 + file.read_bytes().replace(b"\n", b"\r\n") + b"\r\n"
    file.write_bytes(before)
    saved(file)
    after = file.read_bytes()
    assert after.startswith(before + b"\r\n[[measured]]\r\n")
    assert after.count(b"\n") == after.count(b"\r\n")
    assert after.count(BOM_UTF8) == 1
    saved(file, "--replace")
    assert file.read_bytes() == after


def test_mode_and_link_stay(file: Path) -> None:
    file.chmod(0o640)
    link = file.parent / "link.toml"
    link.symlink_to(file.name)
    saved(link)
    assert link.is_symlink()
    assert link.readlink() == Path("loop.toml")
    assert stat.S_IMODE(file.stat().st_mode) == 0o640
    assert b"[[measured]]" in file.read_bytes()
    assert names(file) == ["link.toml", "loop.toml"]


def test_a_record_that_is_there_is_replaced_only_when_told(file: Path, capsys: pytest.CaptureFixture[str]) -> None:
    saved(file)
    before = file.read_bytes()
    capsys.readouterr()
    assert saved(file) == 2
    assert file.read_bytes() == before
    assert "add --replace" in capsys.readouterr().err
    with pytest.raises(SystemExit):
        run(["measured", str(file), *POINTS[:-1], "2026-06-05", "--save", "--replace"])
    assert file.read_bytes() == before.replace(b"2026-05-04", b"2026-06-05")


def test_what_cannot_be_recorded_is_shown_to_be_pasted_and_the_file_stays(
    file: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    file.write_bytes(b'measured = [{ frequency = "14 MHz", unloaded_q = 500 }]\n' + file.read_bytes())
    before = file.read_bytes()
    assert saved(file) == 2
    assert file.read_bytes() == before
    told = capsys.readouterr().err
    block = tomllib.loads(told[told.index("\n[[measured]]") :])["measured"][0]
    assert block["date"] == "2026-05-04"
    assert names(file) == ["loop.toml"]


def test_a_save_that_fails_leaves_the_file_and_nothing_beside_it(
    file: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    before = file.read_bytes()

    def full(_: int) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("os.fsync", full)
    assert saved(file) == 2
    assert file.read_bytes() == before
    assert names(file) == ["loop.toml"]
    assert "No space left on device" in capsys.readouterr().err


def test_a_file_that_changed_while_it_was_computed_is_left_alone(
    file: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    def meanwhile(*given_: Any, **named: Any) -> Any:
        file.write_bytes(PLAIN.encode() + b"\n# edited\n")
        return check(*given_, **named)

    monkeypatch.setattr("magsafe.checks.measured.check", meanwhile)
    assert saved(file) == 2
    assert file.read_bytes() == PLAIN.encode() + b"\n# edited\n"
    assert "changed since it was read" in capsys.readouterr().err
    assert names(file) == ["loop.toml"]


def test_a_full_list_of_records_is_refused_before_it_is_written(file: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A design holds at most a hundred."""
    full = file.read_text() + "\n\n" + "\n".join(near(20.0 + i) for i in range(100))
    file.write_text(full)
    assert saved(file) == 2
    assert file.read_text() == full
    assert "measured" in capsys.readouterr().err


def test_standard_input_cannot_be_saved_into(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as left:
        run(["measured", "-", *POINTS, "--save"])
    assert left.value.code == 2
    told = capsys.readouterr()
    assert "standard input" in told.err
    assert told.out == ""
