"""Random streams that depend on the seed and on what they are for, not on the order of use."""

from __future__ import annotations

import zlib

import numpy as np


def open_stream(seed: int, *purpose: str | int) -> np.random.Generator:
    """Return the generator of one purpose, such as ``("day", "walnut-kite", 3)``.

    Adding a learner or a cue leaves every other stream as it was. The same seed gives the
    same numbers with the same numpy; numpy may change its methods between versions (NEP 19).
    """
    label = "/".join(str(part) for part in purpose).encode("utf-8")
    return np.random.default_rng([seed, zlib.crc32(label)])
