"""Keys made by the client: UUID version 7, so that rows sort by time and replay is harmless."""

from __future__ import annotations

import secrets
import time
import uuid


def make_key() -> str:
    """Return a new UUID version 7 (RFC 9562, section 5.7) as text."""
    milliseconds = time.time_ns() // 1_000_000
    value = milliseconds << 80
    value |= 0x7 << 76
    value |= secrets.randbits(12) << 64
    value |= 0b10 << 62
    value |= secrets.randbits(62)
    return str(uuid.UUID(int=value))


class KeyMaker:
    """Makes keys that keep the order in which they were asked for, within one program."""

    def __init__(self) -> None:
        self._last = 0

    def make(self) -> str:
        """Return a key that sorts after every earlier one of this maker."""
        value = uuid.UUID(make_key()).int
        if value <= self._last:
            # Same millisecond: count on from the last key instead of drawing anew.
            value = self._last + 1
        self._last = value
        return str(uuid.UUID(int=value))
