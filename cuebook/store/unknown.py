"""The error for a code nobody has; light to load."""

from __future__ import annotations

from collections.abc import Iterable

from cuebook.errors import UnknownCodeError
from cuebook.vocabulary import find_nearest


def describe_unknown(what: str, code: str, known: Iterable[str]) -> UnknownCodeError:
    """Return the error for an unknown code; it names the nearest known ones."""
    listed = tuple(known)
    nearest = find_nearest(code, listed)
    if nearest:
        hint = f"Nearest known: {', '.join(nearest)}."
    elif listed:
        hint = f"Check how the {what} is written."
    else:
        hint = f"There is no {what} yet."
    return UnknownCodeError(f"Unknown {what} '{code}'.", hint)
