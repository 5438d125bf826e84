"""Plain values as canonical JSON, and what no stored text may hold; light to load."""

from __future__ import annotations

import hashlib
import json
import math
from collections.abc import Mapping
from typing import Any

from cuebook.errors import InputError


def check_text(value: object) -> str:
    """Return a text that every engine keeps unchanged.

    Raises
    ------
    InputError : not a text, or one with a NUL character or a lone surrogate.
    """
    if not isinstance(value, str):
        raise InputError(f"{value!r} is not a text.", "Give words.")
    if "\x00" in value:
        raise InputError("A text holds a NUL character.", "Remove it.")
    try:
        value.encode("utf-8")
    except UnicodeEncodeError as error:
        raise InputError("A text is not valid Unicode.", "Type it again.") from error
    return str(value)


def make_plain(value: Any) -> Any:
    """Return a value as JSON knows it: numpy scalars and arrays unpacked, tuples as lists.

    Raises
    ------
    InputError : NaN, infinity, or something JSON has no word for.
    """
    if value is None or isinstance(value, bool | int):
        return value
    if isinstance(value, str):
        return check_text(value)
    if isinstance(value, float):
        if not math.isfinite(value):
            raise InputError(f"{value} cannot be stored as a number.", "Leave it empty.")
        return float(value)
    if isinstance(value, Mapping):
        return {check_text(name): make_plain(item) for name, item in value.items()}
    if isinstance(value, list | tuple):
        return [make_plain(item) for item in value]
    unpack = getattr(value, "tolist", None)
    if unpack is None:
        raise InputError(f"{value!r} cannot be stored.", "Give text, numbers, lists or mappings.")
    return make_plain(unpack())


def drop_not_numbers(value: Any) -> Any:
    """Return a plain value with every NaN and infinity emptied."""
    if isinstance(value, Mapping):
        return {name: drop_not_numbers(item) for name, item in value.items()}
    if isinstance(value, list | tuple):
        return [drop_not_numbers(item) for item in value]
    unpack = getattr(value, "tolist", None)
    if unpack is not None:
        return drop_not_numbers(unpack())
    return None if isinstance(value, float) and not math.isfinite(value) else value


def make_canonical(value: Any) -> str:
    """Return JSON with sorted keys and no spaces: equal values give equal texts."""
    return json.dumps(make_plain(value), sort_keys=True, separators=(",", ":"), ensure_ascii=False)


def make_digest(value: Any) -> str:
    """Return the SHA-256 of a value's canonical text."""
    return hashlib.sha256(make_canonical(value).encode()).hexdigest()
