from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from cuebook.cli.exit_codes import ExitCode
from cuebook.cli.main import run

CUE = "paving-slab-stride"
WORDS = "Stride on as if from one paving slab to the next."
AT = ("--at", "2026-03-02T09:00+00:00")


@pytest.fixture(autouse=True)
def library(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> Path:
    """Let every command work on a library of the test's own, by the variable."""
    folder = tmp_path / "library"
    monkeypatch.setenv("CUEBOOK_LIBRARY", str(folder))
    return folder


@pytest.fixture
def heron() -> None:
    """Add the learner heron-lamp, who may be ranked."""
    assert run(["learner", "add", "heron-lamp", "--age", "70", "--ranking", "yes"]) == ExitCode.DONE


Shown = pytest.CaptureFixture[str]


def read_json(capsys: Shown, *arguments: str) -> dict[str, Any]:
    """Run a command with --json and return its document; all else on stderr stays empty."""
    capsys.readouterr()
    assert run([*arguments, "--json"]) == ExitCode.DONE
    shown = capsys.readouterr()
    assert shown.err == ""
    document: dict[str, Any] = json.loads(shown.out)
    return document


def read_error(capsys: Shown, expected: ExitCode, *arguments: str) -> dict[str, Any]:
    """Run a command that fails, plainly and with --json; return the error document."""
    capsys.readouterr()
    assert run([*arguments]) == expected
    plain = capsys.readouterr()
    assert plain.out == ""
    assert len(plain.err.splitlines()) == 1
    assert plain.err.startswith("cuebook: ")
    assert run([*arguments, "--json"]) == expected
    shown = capsys.readouterr()
    assert shown.out == ""
    document: dict[str, Any] = json.loads(shown.err)
    assert document["format"] == "cuebook.error/1"
    assert document["code"] == expected
    assert set(document) == {"format", "code", "message", "where", "hint"}
    return document


def log(*arguments: str, learner: str = "heron-lamp") -> list[str]:
    """Return the arguments that log a block of walking."""
    return ["log", "--learner", learner, "--task", "walking", *arguments]


def test_a_learner_gets_a_code_of_two_words(capsys: Shown) -> None:
    """Without a code the program makes one, and says what no answer on ranking means."""
    document = read_json(capsys, "learner", "add")
    assert document["format"] == "cuebook.learner/1"
    assert document["learner"].count("-") == 1
    assert run(["learner", "add", "fox-bell"]) == ExitCode.DONE
    assert "counts as no" in capsys.readouterr().out


@pytest.mark.usefixtures("heron")
def test_learners_are_listed_and_shown(capsys: Shown) -> None:
    """A page starts with what must be heeded; only the age band was kept."""
    assert run(["learner", "list"]) == ExitCode.DONE
    listed = capsys.readouterr().out
    assert "heron-lamp" in listed
    assert "70-" not in listed
    assert "65-74" in listed
    run(["learner", "hold", "heron-lamp", "--task", "walking", "--until", "seen", "--by", "doctor"])
    document = read_json(capsys, "learner", "show", "heron-lamp")
    assert document["age_band"] == "65-74"
    assert document["consents"]["use_for_ranking"] == "yes"
    assert document["lines"][1].startswith("On hold")
    assert read_json(capsys, "learner", "list")["learners"][0]["code"] == "heron-lamp"


@pytest.mark.usefixtures("heron")
def test_before_and_after_are_logged_in_one_command(capsys: Shown) -> None:
    """The shorthand stores three blocks; both faces say what is on disk."""
    document = read_json(
        capsys,
        *log("--cue", CUE, "--before", "sparc=-1.8,-1.7", "--after", "sparc=-1.5", "--said", "2"),
        *AT,
    )
    assert document["format"] == "cuebook.logged/1"
    assert len(document["block_ids"]) == 3
    assert document["learners"] == ["heron-lamp"]
    lines = "\n".join(document["lines"])
    for part in ("sparc -1.8 -1.7", CUE, "sparc -1.5", "said 2 times"):
        assert part in lines
    assert run(["session", "show", document["session_id"]]) == ExitCode.DONE
    assert WORDS in capsys.readouterr().out


@pytest.mark.usefixtures("heron")
def test_the_card_for_the_next_meeting(capsys: Shown) -> None:
    """The card holds the exact words, what followed, and what to do first."""
    run(log("--cue", CUE, "--before", "sparc=-1.8", "--reaction", "liked", *AT))
    capsys.readouterr()
    assert run(["last", "--learner", "heron-lamp"]) == ExitCode.DONE
    shown = capsys.readouterr().out
    assert WORDS in shown
    assert "liked it" in shown
    assert "Take the opening measure now, before any cue." in shown
    document = read_json(capsys, "last", "--learner", "heron-lamp")
    assert document["format"] == "cuebook.last/1"
    assert document["last_cue"] == CUE
    assert document["last_words"] == WORDS
    assert document["last_session_on"].startswith("2026-03-0")


@pytest.mark.usefixtures("heron")
def test_a_hold_is_said_before_anything_else(capsys: Shown) -> None:
    """A caution comes first; the entry is stored as said; who cleared is noted."""
    hold = [
        "learner",
        "hold",
        "heron-lamp",
        "--task",
        "walking",
        "--until",
        "seen",
        "--by",
        "doctor",
    ]
    assert run(hold) == ExitCode.DONE
    capsys.readouterr()
    assert run(log(*AT)) == ExitCode.DONE
    first = capsys.readouterr().out.splitlines()[0]
    assert first.startswith("Caution: heron-lamp is on hold")
    assert run(["learner", "clear", "heron-lamp", "--task", "walking", "--by", "doctor"]) == 0
    again = read_error(
        capsys, ExitCode.INPUT, "learner", "clear", "heron-lamp", "--task", "walking", "--by", "x"
    )
    assert "not on hold" in again["message"]


def test_a_group_is_logged_in_one_command(capsys: Shown) -> None:
    """Twelve members, two exceptions, one absent: each is where they were."""
    members = [f"member-{letter}" for letter in "abcdefghijkl"]
    for member in members:
        run(["learner", "add", member])
    options = [part for member in members for part in ("--member", member)]
    group = read_json(capsys, "group", "add", "lane-class", *options)
    assert group["members"] == members
    entry = ["log", "--group", "lane-class", "--task", "walking", "--cue", CUE, *AT]
    entry += ["--except", members[0], "--except", members[1], "--absent", members[2]]
    document = read_json(capsys, *entry)
    assert sorted(document["learners"]) == members
    assert len(document["block_ids"]) == 2
    assert "9 of 10 present" in "\n".join(document["lines"])
    sessions = read_json(capsys, "session", "list", "--group", "lane-class")["sessions"]
    assert [(line["who"], line["n_blocks"]) for line in sessions] == [("lane-class", 2)]
    session = read_json(capsys, "session", "show", document["session_id"])
    assert sum("member-c: absent" in line for line in session["lines"]) == 1
    assert run(["group", "list"]) == ExitCode.DONE
    assert "12: member-a" in capsys.readouterr().out


@pytest.mark.usefixtures("heron")
def test_a_session_can_be_ended(capsys: Shown) -> None:
    """After its end, the next block opens another session."""
    first = read_json(capsys, *log())["session_id"]
    assert read_json(capsys, *log())["session_id"] == first
    assert read_json(capsys, "session", "end", first)["ended"] is True
    assert read_json(capsys, *log())["session_id"] != first
    listed = read_json(capsys, "session", "list", "--learner", "heron-lamp")["sessions"]
    assert [line["is_open"] for line in listed] == [True, False]


BAD: dict[str, tuple[list[str], ExitCode, str]] = {
    "nobody": (["log", "--task", "walking"], ExitCode.USAGE, "--learner"),
    "both": (log("--group", "x"), ExitCode.USAGE, "one of the two"),
    "no task": (["log", "--learner", "heron-lamp"], ExitCode.USAGE, "task"),
    "no number": (log("--value", "sparc=fast"), ExitCode.USAGE, "fast"),
    "no equals": (log("--value", "sparc"), ExitCode.USAGE, "METRIC=NUMBER"),
    "nan": (log("--value", "sparc=nan"), ExitCode.USAGE, "nan"),
    "said less than none": (log("--cue", CUE, "--said", "-1"), ExitCode.USAGE, "said"),
    "no time": (log("--at", "yesterday"), ExitCode.USAGE, "yesterday"),
    "time to come": (log("--at", "2999-01-01T00:00"), ExitCode.USAGE, "still to come"),
    "phase with shorthand": (
        log("--phase", "baseline", "--before", "sparc=-1"),
        ExitCode.USAGE,
        "--phase",
    ),
    "group with shorthand": (
        ["log", "--group", "x", "--task", "walking", "--before", "sparc=-1"],
        ExitCode.USAGE,
        "--learner",
    ),
    "cue in a measure": (log("--cue", CUE, "--phase", "baseline"), ExitCode.USAGE, "cue"),
    "negative speed": (log("--value", "gait_speed_m_s=-1"), ExitCode.INPUT, "negative"),
    "unknown learner": (log(learner="heron-lampp"), ExitCode.UNKNOWN_CODE, "heron-lamp"),
    "unknown group": (
        ["log", "--group", "lane", "--task", "walking"],
        ExitCode.UNKNOWN_CODE,
        "lane",
    ),
    "unknown cue": (log("--cue", "paving-slab-strid"), ExitCode.UNKNOWN_CODE, CUE),
    "unknown metric": (log("--value", "sparcc=1"), ExitCode.UNKNOWN_CODE, "sparc"),
    "unknown task": (
        ["log", "--learner", "heron-lamp", "--task", "wallking"],
        ExitCode.UNKNOWN_CODE,
        "walking",
    ),
    "unknown stop": (log("--cue", CUE, "--stop", "pein"), ExitCode.UNKNOWN_CODE, "pain"),
    "unknown session": (log("--session", "nonsense"), ExitCode.UNKNOWN_CODE, "nonsense"),
}


@pytest.mark.usefixtures("heron")
@pytest.mark.parametrize("case", BAD)
def test_a_bad_entry_has_its_exit_code_and_stores_nothing(capsys: Shown, case: str) -> None:
    """Each slip gives one plain line, a documented code, and leaves no session behind."""
    arguments, code, word = BAD[case]
    error = read_error(capsys, code, *arguments)
    assert word in f"{error['message']} {error['hint']}"
    assert read_json(capsys, "session", "list")["sessions"] == []


@pytest.mark.parametrize(
    ("arguments", "code"),
    [
        (["learner", "show", "fox"], ExitCode.STORE),
        (["last", "--learner", "fox"], ExitCode.STORE),
        (["learner", "erase", "fox", "--yes"], ExitCode.STORE),
        (["learner", "add", "Mr Smith"], ExitCode.USAGE),
        (["learner", "add", "--age", "2"], ExitCode.USAGE),
        (["learner", "add", "--experience", "guru"], ExitCode.UNKNOWN_CODE),
        (["learner", "add", "--background", "cookin"], ExitCode.UNKNOWN_CODE),
        (["last"], ExitCode.USAGE),
    ],
)
def test_slips_about_people_have_their_codes(
    capsys: Shown, library: Path, arguments: list[str], code: ExitCode
) -> None:
    """Without a library nothing is made by asking; bad words are met with their code."""
    read_error(capsys, code, *arguments)
    assert not library.exists()


def test_empty_lists_say_what_to_do(capsys: Shown, library: Path) -> None:
    """Lists of nothing are an answer, and make no library."""
    for arguments in (["learner", "list"], ["group", "list"], ["session", "list"]):
        assert run(arguments) == ExitCode.DONE
        assert capsys.readouterr().out.startswith("No ")
    assert not library.exists()


@pytest.mark.usefixtures("heron")
def test_erasing_asks_and_then_leaves_nothing(capsys: Shown, library: Path) -> None:
    """Without --yes nothing happens; with it the code is in no file of the library any more."""
    run(log("--cue", CUE, "--words", "like stepping stones", *AT))
    assert "--yes" in read_error(capsys, ExitCode.USAGE, "learner", "erase", "heron-lamp")["hint"]
    assert read_json(capsys, "learner", "erase", "heron-lamp", "--yes")["learner"] == "heron-lamp"
    left = b"".join(path.read_bytes() for path in library.rglob("*") if path.is_file())
    assert b"heron-lamp" not in left
    assert b"stepping stones" not in left
    read_error(capsys, ExitCode.UNKNOWN_CODE, "learner", "show", "heron-lamp")


def test_the_library_can_be_named_with_each_command(capsys: Shown, tmp_path: Path) -> None:
    """--library wins over the variable."""
    other = str(tmp_path / "other")
    assert run(["learner", "add", "fox-bell", "--library", other]) == ExitCode.DONE
    assert [
        line["code"]
        for line in read_json(capsys, "learner", "list", "--library", other)["learners"]
    ] == ["fox-bell"]
    assert read_json(capsys, "learner", "list")["learners"] == []
    error = read_error(capsys, ExitCode.STORE, "learner", "list", "--library", "postgresql://x/y")
    assert "server" in error["message"]
