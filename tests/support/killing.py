"""Kill a writing program at a random moment and look at what it left."""

from __future__ import annotations

import random
import signal
import sqlite3
import subprocess
import sys
import time
from contextlib import closing
from dataclasses import dataclass
from pathlib import Path

from cuebook.store.places import DATABASE_NAME

PROGRAM = Path(__file__).with_name("writing_program.py")


@dataclass(frozen=True, slots=True)
class Aftermath:
    """What was said to be stored, and what is stored, after one kill."""

    acknowledged: frozenset[str]
    stored: frozenset[str]
    n_torn: int
    """Learners without the consent that was written in the same transaction."""
    integrity: str
    """``ok``, or what SQLite complains of."""
    was_killed: bool
    """False if the program had ended by itself."""


def start_program(folder: Path, name: str, n_learners: int) -> subprocess.Popen[str]:
    """Start a program that writes learners and says so."""
    return subprocess.Popen(
        [sys.executable, "-P", str(PROGRAM), str(folder), name, str(n_learners)],
        stdout=subprocess.PIPE,
        text=True,
    )


def kill_while_writing(folder: Path, name: str, seed: int) -> Aftermath:
    """Kill a writer some milliseconds after its first commit; return what is left."""
    with start_program(folder, name, 100_000) as program:
        if program.stdout is None:  # pragma: no cover - it was asked for
            raise RuntimeError(name)
        first = program.stdout.readline()
        time.sleep(random.Random(seed).uniform(0.0, 0.08))  # noqa: S311 - not for secrets
        program.send_signal(signal.SIGKILL)
        said = [first, *program.stdout.readlines()]
        was_killed = program.wait() == -signal.SIGKILL
    # A line cut off by the kill was not said.
    acknowledged = frozenset(line.strip() for line in said if line.endswith("\n"))
    return look(folder, name, acknowledged, was_killed=was_killed)


def look(folder: Path, name: str, acknowledged: frozenset[str], *, was_killed: bool) -> Aftermath:
    """Return what a library holds of one program's work."""
    with closing(sqlite3.connect(folder / DATABASE_NAME)) as plain:
        stored = plain.execute("SELECT code FROM learner WHERE code LIKE ?", (f"{name}-%",))
        torn = plain.execute(
            "SELECT COUNT(*) FROM learner WHERE id NOT IN (SELECT learner_id FROM consent)"
        )
        integrity = plain.execute("PRAGMA integrity_check")
        return Aftermath(
            acknowledged,
            frozenset(code for (code,) in stored),
            int(torn.fetchone()[0]),
            str(integrity.fetchone()[0]),
            was_killed,
        )
