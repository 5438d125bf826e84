from __future__ import annotations

from pathlib import Path

import pytest
from support.killing import kill_while_writing, look, start_program
from support.libraries import make_library

from cuebook.store.opening import open_library
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.rankings import read_revision

N_EACH = 40


def test_two_programs_that_write_at_once_lose_nothing(tmp_path: Path) -> None:
    """Two processes, started on no library at all, both get every commit in, and none is torn."""
    programs = [start_program(tmp_path, name, N_EACH) for name in ("robin", "wren")]
    for program, name in zip(programs, ("robin", "wren"), strict=True):
        said, _ = program.communicate(timeout=120)
        assert program.returncode == 0
        after = look(tmp_path, name, frozenset(said.split()), was_killed=False)
        assert after.acknowledged == after.stored
        assert len(after.stored) == N_EACH
        assert (after.n_torn, after.integrity) == (0, "ok")
    with open_for_reading(tmp_path) as connection:
        # Each transaction raises the counter once: none was overwritten by the other program.
        assert read_revision(connection, "evidence") == 2 * N_EACH


@pytest.mark.parametrize("seed", range(4))
def test_a_killed_writer_loses_no_commit_it_has_acknowledged(tmp_path: Path, seed: int) -> None:
    """SIGKILL in mid-writing: what was said to be stored is stored, whole, and all can go on."""
    make_library(tmp_path).close()
    after = kill_while_writing(tmp_path, "wren", seed)
    assert after.was_killed
    assert after.acknowledged
    assert after.acknowledged <= after.stored
    assert len(after.stored - after.acknowledged) <= 1  # stored, but killed before it was said
    assert (after.n_torn, after.integrity) == (0, "ok")
    with open_library(tmp_path, create=False) as library, library.transaction() as tx:
        assert tx.connection().exec_driver_sql("SELECT COUNT(*) FROM learner").scalar() is not None
