from __future__ import annotations

import shutil
from pathlib import Path

import pytest
from support.libraries import RULE, SPOON, add_measured_block, stamp_at

from cuebook.store.opening import open_library
from cuebook.store.places import DATABASE_NAME
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.cues import read_cues
from cuebook.store.reading.people import read_learner_lines
from cuebook.store.reading.practice import read_practice_log
from cuebook.store.schema import HEAD_REVISION
from cuebook.store.writing import people, practice

KEPT = sorted((Path(__file__).parent / "data").glob("library-*.sqlite3"))


def test_a_library_of_every_revision_is_kept() -> None:
    """The newest schema has its kept library, too: it is the old one of tomorrow."""
    assert f"library-{HEAD_REVISION}.sqlite3" in [path.name for path in KEPT]


@pytest.mark.parametrize("kept", KEPT, ids=lambda path: path.stem)
def test_an_old_library_is_upgraded_and_used(kept: Path, tmp_path: Path) -> None:
    """A library from the program of its time is opened, read, and written on."""
    shutil.copyfile(kept, tmp_path / DATABASE_NAME)
    with open_for_reading(tmp_path) as connection:
        assert read_cues(connection) == (SPOON, RULE)
        codes = [line.code for line in read_learner_lines(connection)]
        log = read_practice_log(connection, ("sparc",))
    assert codes == ["copper-gate", "heron-lamp"]
    assert [len(session.blocks) for session in log.sessions] == [3, 1, 1]
    with open_library(tmp_path, create=False) as library, library.transaction() as tx:
        learner = people.get_learner(tx, "heron-lamp").id
        session = practice.start_session(tx, stamp_at(30_000), learner_id=learner)
        add_measured_block(tx, stamp_at(30_001), session, learner, "baseline", {"sparc": (-1.4,)})
    with open_for_reading(tmp_path) as connection:
        newest = read_practice_log(connection, ("sparc",)).sessions[-1]
    values = newest.blocks[0].participations[0].values["sparc"]
    assert [value.value for value in values] == [-1.4]
