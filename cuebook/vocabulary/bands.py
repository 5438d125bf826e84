"""Age bands and tempo bands: which band a number falls into."""

from __future__ import annotations

import math

from cuebook.errors import InputError
from cuebook.vocabulary.entries import Entry
from cuebook.vocabulary.loading import load_vocabulary, require_slug


def get_age_band(years: int) -> Entry | None:
    """Return the age band of an age in whole years; None below the youngest band."""
    for band in load_vocabulary().entries("age_band"):
        low = -math.inf if band.low is None else band.low
        high = math.inf if band.high is None else band.high
        if low <= years <= high:
            return band
    return None


def get_tempo_band(rate: float, cycle: str) -> Entry | None:
    """Return the tempo band of a rate in cycles a minute.

    Low limits are included, high ones excluded. None where a cycle has no bands (a turn, a
    count of eight). An unknown cycle raises UnknownCodeError; a rate that is not a positive
    number raises InputError.
    """
    require_slug("tempo_cycle", cycle)
    if not (math.isfinite(rate) and rate > 0):
        raise InputError(
            f"The rate is {rate}; it must be a number above 0.", "Give cycles a minute."
        )
    for band in load_vocabulary().entries("tempo_band"):
        low = -math.inf if band.low is None else band.low
        high = math.inf if band.high is None else band.high
        if band.cycle == cycle and low <= rate < high:
            return band
    return None
