"""Rank a question in a process of its own, so that keys never wait for the model."""

from __future__ import annotations

import json
import subprocess
import sys
import time
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

from textual.worker import NoActiveWorker, get_current_worker

from cuebook.errors import CuebookError
from cuebook.jobs.review_request import ReviewRequest

FIT_TIMEOUT_S = 300
POLL_S = 0.1


class NoLongerWantedError(CuebookError):
    """Another question was opened, or the screens were left, while a ranking was being made."""


def fit_apart(location: str | Path | None, request: ReviewRequest) -> Mapping[str, Any]:
    """Return the document of a freshly made ranking.

    Raises
    ------
    NoLongerWantedError : the worker that waits for it has been cancelled; the process is ended.
    CuebookError : what the other process said.
    """
    fitting = subprocess.Popen(  # noqa: S603 - our own program, with words of our own lists
        make_command(location, request),
        stdin=subprocess.DEVNULL,  # the terminal's keys belong to the screens
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        encoding="utf-8",
    )
    told, complained = wait_for(fitting, _make_wanted())
    if fitting.returncode:
        raise _read_error(complained)
    document: Mapping[str, Any] = json.loads(told)
    return document


def make_command(location: str | Path | None, request: ReviewRequest) -> list[str]:
    """Return the command line that ranks a question as JSON."""
    # -P: a file of the user's folder must not be taken for one of our libraries.
    command = [sys.executable, "-P", "-m", "cuebook", "review", "--json"]
    for option, value in (
        ("--metric", request.metric),
        ("--task", request.task),
        ("--contrast", request.contrast),
        ("--better", request.better),
        ("--age-band", request.age_band),
        ("--background", request.background),
        ("--library", None if location is None else str(location)),
    ):
        if value is not None:
            command += [option, value]
    return command


def _make_wanted() -> Callable[[], bool]:
    try:
        worker = get_current_worker()
    except NoActiveWorker:
        return lambda: True
    return lambda: not worker.is_cancelled


def wait_for(fitting: subprocess.Popen[str], is_wanted: Callable[[], bool]) -> tuple[str, str]:
    """Return what a process said; end it if it is no longer wanted or takes too long."""
    until = time.monotonic() + FIT_TIMEOUT_S
    try:
        while time.monotonic() < until:
            if not is_wanted():
                raise NoLongerWantedError("No longer wanted.")
            try:
                return fitting.communicate(timeout=POLL_S)
            except subprocess.TimeoutExpired:
                continue
        raise CuebookError("The ranking took too long.", "Try it from the command line.")
    finally:
        if fitting.poll() is None:
            fitting.kill()
            fitting.communicate()


def _read_error(text: str) -> CuebookError:
    for line in reversed(text.splitlines()):
        try:
            said = json.loads(line)
        except ValueError:
            continue
        if isinstance(said, dict) and "message" in said:
            return CuebookError(str(said["message"]), str(said.get("hint", "")))
    return CuebookError("The ranking could not be made.", "Try: cuebook review")
