"""The nearest known words to one that is not known."""

from __future__ import annotations

from collections.abc import Iterable

_LEAST_LIKENESS = 55.0
"""Below this a suggestion confuses more than it helps (0-100, rapidfuzz ratio)."""

_SHORTEST_PART = 3
"""Letters from which a part of a name counts as meaning it."""


def find_nearest(word: str, known: Iterable[str], limit: int = 3) -> tuple[str, ...]:
    """Return up to `limit` known words that look most like `word`, best first."""
    from rapidfuzz import fuzz, process  # noqa: PLC0415 - only when something is unknown

    wanted = word.strip().lower().replace(" ", "_")
    listed = list(known)
    found = process.extract(
        wanted, listed, scorer=fuzz.ratio, limit=limit, score_cutoff=_LEAST_LIKENESS
    )
    nearest = [name for name, _, _ in found]
    # The first part of a longer name looks unlike it letter by letter, yet it is what was meant.
    if len(wanted) >= _SHORTEST_PART:
        nearest += [name for name in listed if wanted in name.lower() and name not in nearest]
    return tuple(nearest[:limit])
