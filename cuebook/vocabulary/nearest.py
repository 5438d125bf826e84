"""The nearest known words to one that is not known."""

from __future__ import annotations

from collections.abc import Iterable

_LEAST_LIKENESS = 55.0
"""Below this a suggestion confuses more than it helps (0-100, rapidfuzz ratio)."""


def find_nearest(word: str, known: Iterable[str], limit: int = 3) -> tuple[str, ...]:
    """Return up to `limit` known words that look most like `word`, best first."""
    from rapidfuzz import fuzz, process  # noqa: PLC0415 - only when something is unknown

    wanted = word.strip().lower().replace(" ", "_")
    found = process.extract(
        wanted, list(known), scorer=fuzz.ratio, limit=limit, score_cutoff=_LEAST_LIKENESS
    )
    return tuple(name for name, _, _ in found)
