from __future__ import annotations

import math
import sqlite3
from collections.abc import Iterator
from datetime import datetime
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from sqlmodel import select
from support.libraries import make_library, stamp_at, write_rows

from cuebook.errors import InputError
from cuebook.store.canonical import drop_not_numbers, make_canonical, make_plain
from cuebook.store.keys import make_key
from cuebook.store.opening import Library
from cuebook.store.tables.people import Goal, Learner
from cuebook.store.tables.practice import Session
from cuebook.store.tables.upkeep import Draft

STORABLE = st.text(st.characters(exclude_categories=["Cs"], exclude_characters="\x00"))
PLAIN = st.recursive(
    st.none()
    | st.booleans()
    | st.integers()
    | st.floats(allow_nan=False, allow_infinity=False)
    | STORABLE,
    lambda inner: st.lists(inner, max_size=4) | st.dictionaries(STORABLE, inner, max_size=4),
    max_leaves=12,
)


@pytest.fixture
def library(tmp_path: Path) -> Iterator[Library]:
    with make_library(tmp_path / "library") as made:
        yield made


def keep_draft(library: Library, content: Any) -> Any:
    """Write a document and read it back."""
    with library.transaction() as tx:
        tx.merge(Draft(place="test", content=content, saved_at=stamp_at(0).occurred_at))
    with library.transaction() as tx:
        return tx.exec(select(Draft.content)).one()


def make_goal(learner_id: str, **given: Any) -> Goal:
    """Return a goal row."""
    columns: dict[str, Any] = {"task": "reaching", **given}
    return Goal(id=make_key(), learner_id=learner_id, **columns, **stamp_at(0).as_columns())


def read_learner_id(library: Library) -> str:
    """Return the key of the only learner."""
    with library.transaction() as tx:
        return tx.exec(select(Learner.id)).one()


@given(words=STORABLE)
@settings(max_examples=40, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_any_text_comes_back_the_same(library: Library, words: str) -> None:
    """Text in any script, with quotes, markup or line ends, is stored as it was typed."""
    key = read_learner_id(library)
    with library.transaction() as tx:
        goal = make_goal(key, words=words)
        tx.add(goal)
    with library.transaction() as tx:
        assert tx.exec(select(Goal.words).where(Goal.id == goal.id)).one() == words


@given(content=PLAIN)
@settings(max_examples=40, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_any_plain_document_comes_back_the_same(library: Library, content: Any) -> None:
    """Lists and mappings of plain values survive storing."""
    assert keep_draft(library, {"content": content}) == {"content": content}


@pytest.mark.parametrize("words", ["a\x00b", "\ud800"])
def test_text_that_an_engine_could_not_keep_is_refused(library: Library, words: str) -> None:
    """NUL and lone surrogates are refused with words, and nothing is stored."""
    key = read_learner_id(library)
    goal = make_goal(key, words=words)
    with pytest.raises(InputError):
        write_rows(library, goal)
    with library.transaction() as tx:
        assert tx.exec(select(Goal)).all() == []


@pytest.mark.parametrize("number", [math.nan, math.inf, -math.inf, np.float64("nan"), "fast"])
def test_what_is_no_finite_number_is_refused(library: Library, number: Any) -> None:
    """A number column never holds NaN, infinity or words."""
    key = read_learner_id(library)
    goal = make_goal(key, target=number)
    with pytest.raises(InputError):
        write_rows(library, goal)


def test_numpy_numbers_are_stored_as_plain_ones(library: Library) -> None:
    """Scalars of numpy land as INTEGER and REAL, never as raw bytes."""
    key = read_learner_id(library)
    yes: Any = np.bool_(1)
    with library.transaction() as tx:
        tx.add(make_goal(key, target=np.float32(0.5), revision=np.int64(3)))
        tx.add(
            Session(
                id=make_key(),
                learner_id=key,
                do_not_use=yes,
                is_date_only=False,
                **stamp_at(0).as_columns(),
            )
        )
    with sqlite3.connect(library.database) as plain:
        found = plain.execute(
            "SELECT target, typeof(target), revision, typeof(revision) FROM goal"
        ).fetchone()
        stored = plain.execute("SELECT do_not_use, typeof(do_not_use) FROM session").fetchone()
    plain.close()
    assert found == (0.5, "real", 3, "integer")
    assert stored == (1, "integer")


@pytest.mark.parametrize("number", [2.5, "3", 2**63])
def test_what_is_no_whole_number_is_refused(library: Library, number: Any) -> None:
    """A column of whole numbers takes no fractions, no words, nothing beyond 64 bits."""
    key = read_learner_id(library)
    goal = make_goal(key, revision=number)
    with pytest.raises(InputError):
        write_rows(library, goal)


def test_a_naive_time_is_refused_by_the_column(library: Library) -> None:
    """A time without a zone cannot be stored by any way in."""
    key = read_learner_id(library)
    naive = datetime(2026, 3, 2)  # noqa: DTZ001 - the point of the test
    goal = make_goal(key, worthwhile_set_at=naive)
    with pytest.raises(InputError, match="no zone"):
        write_rows(library, goal)


def test_documents_unpack_numpy_and_refuse_nan(library: Library) -> None:
    """Arrays become lists; NaN in a document is refused, because engines differ on it."""
    content = {"rate": np.float64(2.5), "n": np.int64(3), "list": np.array([1, 2])}
    assert keep_draft(library, content) == {"rate": 2.5, "n": 3, "list": [1, 2]}
    with pytest.raises(InputError):
        keep_draft(library, {"rate": math.nan})
    with pytest.raises(InputError):
        make_plain({"object": object()})
    assert drop_not_numbers({"a": [math.nan, np.float64("inf"), 1.0]}) == {"a": [None, None, 1.0]}


@given(st.dictionaries(STORABLE, st.integers(), min_size=2))
def test_equal_documents_are_equal_texts(document: dict[str, int]) -> None:
    """The order in which a mapping was built does not change its canonical text."""
    turned = dict(reversed(document.items()))
    assert make_canonical(document) == make_canonical(turned)
