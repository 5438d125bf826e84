"""Keys made by the client: UUID version 7, so that rows sort by time and replay is harmless."""

from __future__ import annotations

import secrets
import threading
import time
import uuid

_TIME_SHIFT = 80
_STEP_BITS = 32
_VERSION_AND_VARIANT = (0x7 << 76) | (0b10 << 62)
_LOW = (1 << 62) - 1


class KeyMaker:
    """Makes keys that sort in the order in which they were asked for.

    RFC 9562, section 6.2, method 2: within a millisecond, and while the clock stands or goes
    back, the random part of the last key is raised by a random step.
    """

    def __init__(self) -> None:
        self._lock = threading.Lock()
        self._time_ms = -1
        self._random = 0

    def make(self) -> str:
        """Return a key that sorts after every earlier one of this maker."""
        with self._lock:
            now_ms = time.time_ns() // 1_000_000
            if now_ms > self._time_ms:
                self._time_ms = now_ms
                # The top bit stays free, so that a burst of keys has room to count up.
                self._random = secrets.randbits(73)
            else:
                self._random += 1 + secrets.randbits(_STEP_BITS)
            return str(uuid.UUID(int=_compose(self._time_ms, self._random)))


def _compose(time_ms: int, random: int) -> int:
    """Return the 128 bits: time, version, 12 random bits, variant, 62 random bits."""
    high, low = random >> 62, random & _LOW
    return (time_ms << _TIME_SHIFT) | _VERSION_AND_VARIANT | (high << 64) | low


_MAKER = KeyMaker()


def make_key() -> str:
    """Return a new UUID version 7 (RFC 9562, section 5.7) as text."""
    return _MAKER.make()


def is_key(text: str) -> bool:
    """Return whether a text is a key as this program writes them."""
    try:
        key = uuid.UUID(text)
    except ValueError:
        return False
    return str(key) == text and key.version == 7
