from __future__ import annotations

import subprocess
import sys

import numpy as np
import pytest

from cuebook.cli.exit_codes import ExitCode, get_exit_code
from cuebook.cli.output import to_plain
from cuebook.errors import (
    CuebookError,
    InputError,
    NeedsAnswerError,
    StoreUnavailableError,
    UnknownCodeError,
    UsageError,
)


@pytest.mark.parametrize(
    ("error", "code"),
    [
        (UsageError("x"), ExitCode.USAGE),
        (InputError("x"), ExitCode.INPUT),
        (UnknownCodeError("x"), ExitCode.UNKNOWN_CODE),
        (NeedsAnswerError("x"), ExitCode.NEEDS_ANSWER),
        (StoreUnavailableError("x"), ExitCode.STORE),
        (CuebookError("x"), ExitCode.FAILED),
    ],
)
def test_each_kind_of_error_has_its_documented_exit_code(
    error: CuebookError, code: ExitCode
) -> None:
    """The exit code tells a script what kind of thing went wrong."""
    assert get_exit_code(error) == code


def test_json_has_no_nan_and_unpacks_numpy() -> None:
    """A missing number is null, and numpy values are plain numbers."""
    document = {"a": float("nan"), "b": np.float64(1.5), "c": np.array([1, 2]), "d": (True, None)}
    assert to_plain(document) == {"a": None, "b": 1.5, "c": [1, 2], "d": [True, None]}


def test_without_a_terminal_the_commands_are_listed_instead_of_screens() -> None:
    """A script that calls the bare program gets help and an end, never a waiting screen."""
    shown = subprocess.run(
        [sys.executable, "-P", "-m", "cuebook"],
        check=True,
        capture_output=True,
        text=True,
        stdin=subprocess.DEVNULL,
        timeout=60,
    )
    assert "What shifted: rank cues for a question." in shown.stdout


def test_a_closed_pipe_is_no_error() -> None:
    """Reading only the first lines of a long list ends quietly."""
    command = f"{sys.executable} -P -m cuebook metrics | head -n 1"
    shown = subprocess.run(
        ["bash", "-o", "pipefail", "-c", command], capture_output=True, text=True, check=False
    )
    assert shown.stderr == ""
