from __future__ import annotations

from pathlib import Path

import pytest

from cuebook.cli.main import run
from cuebook.jobs.people import NewLearner, add_learner


@pytest.mark.parametrize("place", ["before", "after", "variable"])
def test_the_library_is_named_before_or_after_the_command_or_by_the_variable(
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
    place: str,
) -> None:
    """What is typed wins over the variable, wherever it is typed."""
    named, other = tmp_path / "named", tmp_path / "other"
    add_learner(named, NewLearner(code="heron-lamp"))
    add_learner(other, NewLearner(code="copper-gate"))
    monkeypatch.setenv("CUEBOOK_LIBRARY", str(named if place == "variable" else other))
    option = [] if place == "variable" else ["--library", str(named)]
    command = ["learner", "list"]
    assert run([*option, *command] if place == "before" else [*command, *option]) == 0
    assert "heron-lamp" in capsys.readouterr().out


def test_a_guardians_yes_alone_is_said_to_count_as_no(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A child's own agreement is asked for beside the guardian's."""
    added = ["learner", "add", "ada-one", "--age", "12", "--ranking", "yes"]
    given = ["--given-by", "parent_guardian", "--library", str(tmp_path / "library")]
    assert run([*added, *given]) == 0
    assert "counts as no" in capsys.readouterr().out
