from __future__ import annotations

import json
from pathlib import Path

import pytest

from cuebook.cli.exit_codes import ExitCode
from cuebook.cli.main import run


@pytest.fixture(autouse=True)
def _no_library(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    """Search the seed sets, whatever library the user of this machine has."""
    monkeypatch.setenv("CUEBOOK_LIBRARY", str(tmp_path / "none"))


SMALL_STEPS = "Takes tiny steps and shuffles down the corridor"


def test_find_prints_cues_with_the_caution_before_the_words(
    capsys: pytest.CaptureFixture[str],
) -> None:
    """Plain output names the cue, then its caution, then the words to say, then why."""
    assert run(["find", SMALL_STEPS, "--limit", "2"]) == ExitCode.DONE
    shown = capsys.readouterr()
    assert shown.err == ""
    lines = [line.strip() for line in shown.out.splitlines()]
    first = lines.index("1. paving-slab-stride")
    labels = [line.split(":")[0] for line in lines[first + 1 : lines.index("", first)]]
    order = [labels.index(label) for label in ("Caution", "Kind", "Say", "Carries", "Why")]
    assert order == sorted(order)
    assert order[0] == 0
    assert "Stride on as if from one paving slab to the next." in shown.out
    assert "2. long-step-heel-first" in lines
    assert all(len(line) <= 80 for line in shown.out.splitlines())


def test_words_may_be_given_without_quotes(capsys: pytest.CaptureFixture[str]) -> None:
    """Several words are read as one sentence."""
    assert run(["find", "takes", "tiny", "steps"]) == ExitCode.DONE
    assert "long-step-heel-first" in capsys.readouterr().out


def test_json_is_one_document_on_stdout(capsys: pytest.CaptureFixture[str]) -> None:
    """With --json nothing but the document is printed."""
    assert run(["find", SMALL_STEPS, "--json", "--age", "80", "--background", "town_living"]) == 0
    shown = capsys.readouterr()
    document = json.loads(shown.out)
    assert shown.err == ""
    assert document["format"] == "cuebook.find/1"
    assert document["cues"][0]["cue"] == "paving-slab-stride"
    assert any("town living" in reason for reason in document["cues"][0]["why"])


def test_a_danger_prints_its_stop_and_exits_as_an_answer(
    capsys: pytest.CaptureFixture[str],
) -> None:
    """A stop is an answer, exit 0; in JSON it comes without cues."""
    assert run(["find", "Chest goes tight when she walks up the hill"]) == ExitCode.DONE
    assert capsys.readouterr().out.startswith("Stop. Stay with the person.")
    assert run(["find", "Chest goes tight when she walks up the hill", "--json"]) == ExitCode.DONE
    document = json.loads(capsys.readouterr().out)
    assert document["stop"]["action"] == "stop_emergency"
    assert document["cues"] == []


def test_an_empty_find_says_what_to_add(capsys: pytest.CaptureFixture[str]) -> None:
    """Finding nothing is an answer, exit 0, that says how to go on."""
    assert run(["find", "qqq"]) == ExitCode.DONE
    assert "Say what goes wrong" in capsys.readouterr().out


@pytest.mark.parametrize(
    ("arguments", "code", "words"),
    [
        (["--task", "wlking"], ExitCode.UNKNOWN_CODE, "walking"),
        (["--kind", "analogie"], ExitCode.UNKNOWN_CODE, "analogy"),
        (["--background", "gardning"], ExitCode.UNKNOWN_CODE, "gardening"),
        (["--rate", "90", "--cycle", "steps"], ExitCode.UNKNOWN_CODE, "step"),
        (["--rate", "90"], ExitCode.NEEDS_ANSWER, "--cycle"),
        (["--rate", "0", "--cycle", "step"], ExitCode.USAGE, "above 0"),
        (["--rate", "nan", "--cycle", "step"], ExitCode.USAGE, "above 0"),
        (["--cycle", "step"], ExitCode.USAGE, "--rate"),
        (["--age", "-3"], ExitCode.USAGE, "age in years"),
        (["--age", "old"], ExitCode.USAGE, "--age"),
        (["--limit", "0"], ExitCode.USAGE, "--limit"),
        (["--learner", "heron-lamp", "--age", "80"], ExitCode.USAGE, "--age"),
        (["--learner", "heron-lamp", "--group", "hall"], ExitCode.USAGE, "exclude"),
    ],
)
def test_what_does_not_fit_is_refused_with_the_way_out(
    capsys: pytest.CaptureFixture[str], arguments: list[str], code: ExitCode, words: str
) -> None:
    """A wrong option gives its exit code and one line that says what to do."""
    assert run(["find", SMALL_STEPS, *arguments]) == code
    shown = capsys.readouterr()
    assert shown.out == ""
    assert words in shown.err
    assert shown.err.count("\n") == 1


def test_an_error_never_repeats_the_problem(capsys: pytest.CaptureFixture[str]) -> None:
    """Even with a wrong option, what was typed about somebody is not printed."""
    assert run(["find", "Zebedee has chest pain", "--task", "wlking", "--json"]) == 4
    shown = capsys.readouterr()
    assert "Zebedee" not in shown.err + shown.out
    assert json.loads(shown.err)["format"] == "cuebook.error/1"


def test_the_cycle_may_follow_from_the_task(capsys: pytest.CaptureFixture[str]) -> None:
    """A rate with a task is read in that task's usual cycles."""
    assert run(["find", SMALL_STEPS, "--task", "walking", "--rate", "90", "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    assert any("80 to 100 steps/min" in reason for reason in document["cues"][0]["why"])


def test_a_missing_text_is_a_usage_error(capsys: pytest.CaptureFixture[str]) -> None:
    """Find without a problem says that it needs one."""
    assert run(["find"]) == ExitCode.USAGE
    assert "TEXT" in capsys.readouterr().err
