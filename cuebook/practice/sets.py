"""Sets of attempts: all usable values of one learner in one block for one key."""

from __future__ import annotations

import math
import statistics
from collections.abc import Sequence
from dataclasses import dataclass

from cuebook.practice.changes import AttemptSet
from cuebook.practice.log import AttemptValue
from cuebook.practice.scales import AttemptScale

OUTLIER_DISTANCE = 5.0
"""Robust SDs from the median beyond which a value is flagged (never dropped)."""


@dataclass(frozen=True, slots=True)
class FlaggedSet:
    """A set and what was noticed while it was made."""

    attempts: AttemptSet
    flags: tuple[str, ...] = ()


def build_set(
    values: Sequence[AttemptValue],
    recipe: str,
    scale: AttemptScale,
    *,
    drop_first: bool = False,
) -> FlaggedSet | None:
    """Return the set of one recipe, or None if no value is usable.

    Dropped: marked invalid, without a value, made after a stop, other recipes. Not dropped:
    outliers (flagged), ties, the first attempt (unless ``drop_first`` and two values remain).
    """
    of_recipe = [value for value in values if value.recipe == recipe]
    usable = [value for value in of_recipe if is_usable(value)]
    if not usable:
        return None
    if drop_first and len(usable) > 2 and is_usable(of_recipe[0]):
        usable = usable[1:]
    scaled = scale.apply([float(value.value) for value in usable if value.value is not None])
    flags = list(scaled.flags)
    if any(value.is_late for value in usable):
        flags.append("late")
    if _has_outlier(scaled.values):
        flags.append("outlier")
    return FlaggedSet(sum_up(scaled.values), tuple(flags))


def is_usable(value: AttemptValue) -> bool:
    """Return whether an attempt counts: measured, valid, made before any stop."""
    return (
        value.is_valid
        and value.value is not None
        and math.isfinite(value.value)
        and not value.is_after_stop
    )


def sum_up(values: Sequence[float]) -> AttemptSet:
    """Return mean, number and sum of squared deviations of values."""
    mean = math.fsum(values) / len(values)
    return AttemptSet(mean, len(values), math.fsum((value - mean) ** 2 for value in values))


def _has_outlier(values: Sequence[float]) -> bool:
    if len(values) < 5:
        return False
    middle = statistics.median(values)
    spread = 1.4826 * statistics.median(abs(value - middle) for value in values)
    return spread > 0 and any(abs(value - middle) > OUTLIER_DISTANCE * spread for value in values)
