"""How many more uses of a cue would settle it."""

from __future__ import annotations

import math
from dataclasses import dataclass

_ONE_SIDED_95 = 1.645
MOST_USES = 500


@dataclass(frozen=True, slots=True)
class StillNeeded:
    """Further uses until an effect can be told from a target."""

    uses: int | None
    """0: can be told already; None: cannot be reached, see the note."""
    note: str


def count_still_needed(
    distance: float, sd: float, noise_variance: float, bias: float = 0.0
) -> StillNeeded:
    """Return how many more uses would set an effect apart from a target, if it stayed as it is.

    Parameters
    ----------
    distance : from the posterior mean to the target (either sign).
    sd : posterior SD, bias allowance included.
    noise_variance : variance of one further use, all sources together.
    bias : SD of the part of ``sd`` that more uses of the same kind cannot remove.

    Notes
    -----
    The target SD is distance / 1.645; precision grows by one part in ``noise_variance`` a use.
    """
    wanted = abs(distance) / _ONE_SIDED_95
    if sd <= wanted:
        return StillNeeded(0, "")
    if wanted <= bias:
        return StillNeeded(None, "more uses of the same kind cannot settle this; use random order")
    gain = 1 / (wanted**2 - bias**2) - 1 / (sd**2 - bias**2)
    uses = math.ceil(noise_variance * gain)
    if uses > MOST_USES:
        return StillNeeded(None, "not reachable with this cue")
    return StillNeeded(uses, "")
