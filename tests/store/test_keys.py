from __future__ import annotations

import threading
import time
import uuid

import pytest
from hypothesis import given
from hypothesis import strategies as st

from cuebook.store import keys


def test_a_key_has_the_published_layout() -> None:
    """The worked example of RFC 9562, appendix A.6 (from memory), comes out bit by bit."""
    time_ms = 1_645_557_742_000  # 22 February 2022, 19:22:22 UTC
    random = (0xCC3 << 62) | 0x18C4DC0C0C07398F
    example = uuid.UUID("017F22E2-79B0-7CC3-98C4-DC0C0C07398F")
    assert keys._compose(time_ms, random) == example.int


def test_a_key_is_version_7_with_the_present_time() -> None:
    """The standard library reads version and variant; the first 48 bits are the clock."""
    before = time.time_ns() // 1_000_000
    key = uuid.UUID(keys.KeyMaker().make())
    after = time.time_ns() // 1_000_000
    assert key.version == 7
    assert key.variant == uuid.RFC_4122
    assert before <= key.int >> 80 <= after
    assert keys.is_key(str(key))
    assert not keys.is_key(str(uuid.uuid4()))
    assert not keys.is_key("heron-lamp")


@given(st.lists(st.integers(min_value=0, max_value=2**47), min_size=2, max_size=30))
def test_keys_sort_as_asked_for_whatever_the_clock_does(readings: list[int]) -> None:
    """A clock that stands still or goes back never puts a later key before an earlier one."""
    clock = iter(readings)
    maker = keys.KeyMaker()
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr("cuebook.store.keys.time.time_ns", lambda: next(clock) * 1_000_000)
        made = [maker.make() for _ in readings]
    assert made == sorted(made)
    assert len(set(made)) == len(made)
    assert all(keys.is_key(key) for key in made)


def test_keys_of_several_threads_are_all_different() -> None:
    """Threads that ask at once share no key."""
    made: list[str] = []

    def ask() -> None:
        made.extend([keys.make_key() for _ in range(500)])

    threads = [threading.Thread(target=ask) for _ in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert len(set(made)) == 2000
