"""Work off the screen's thread: it posts messages and touches no widget."""

from __future__ import annotations

import json
import subprocess
import sys
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

from cuebook.errors import CuebookError
from cuebook.jobs.review_request import ReviewRequest
from cuebook.tui.messages import WorkFailed

FIT_TIMEOUT_S = 300


def attempt(job: Callable[[], Any], post: Callable[[Any], Any]) -> None:
    """Run a job and post the message it gives, or the error it met."""
    try:
        message = job()
    except CuebookError as error:
        post(WorkFailed(error))
        return
    if message is not None:
        post(message)


def fit_apart(location: str | Path | None, request: ReviewRequest) -> Mapping[str, Any]:
    """Fit a question in a process of its own, so that the screen's thread stays free.

    Raises
    ------
    CuebookError : what the other process said.
    """
    command = [sys.executable, "-m", "cuebook", "review", "--json", "--metric", request.metric]
    for option, value in (
        ("--task", request.task),
        ("--contrast", request.contrast),
        ("--better", request.better),
        ("--age-band", request.age_band),
        ("--background", request.background),
        ("--library", None if location is None else str(location)),
    ):
        if value is not None:
            command += [option, value]
    try:
        done = subprocess.run(  # noqa: S603 - our own program, with words of our own lists
            command, capture_output=True, text=True, timeout=FIT_TIMEOUT_S, check=False
        )
    except subprocess.TimeoutExpired as error:
        raise CuebookError("The ranking took too long.", "Try it from the command line.") from error
    if done.returncode:
        raise _read_error(done.stderr)
    document: Mapping[str, Any] = json.loads(done.stdout)
    return document


def _read_error(text: str) -> CuebookError:
    for line in reversed(text.splitlines()):
        try:
            said = json.loads(line)
        except ValueError:
            continue
        if isinstance(said, dict) and "message" in said:
            return CuebookError(str(said["message"]), str(said.get("hint", "")))
    return CuebookError("The ranking could not be made.", "Try: cuebook review")
