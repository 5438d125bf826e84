"""The list of keys, made of the bindings themselves, so that it cannot promise too much."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

from textual.binding import Binding

from cuebook.tui.frame import FramedScreen

_SHORT = (
    "1 2 3     the three places, once the field is left with Escape",
    "W ? Q     for whom, keys, leave: likewise",
)


def list_keys(app: type[Any], screen: type[Any]) -> tuple[str, ...]:
    """Return all keys of a screen and of the whole program, a line each."""
    title = getattr(screen, "TITLE_WORD", "")
    own = [*_describe(screen.__dict__.get("BINDINGS", ()))]
    everywhere = [*_describe(app.BINDINGS)]
    short = _SHORT if issubclass(screen, FramedScreen) else ()
    return (f"In {title}:", *own, "", "Everywhere:", *everywhere, *short)


def _describe(bindings: Iterable[Any]) -> Iterable[str]:
    by_words: dict[str, list[str]] = {}
    for one in bindings:
        if isinstance(one, Binding) and one.show:
            by_words.setdefault(one.description, []).append(_name(one.key))
    for words, keys in by_words.items():
        yield f"{' '.join(keys):<10}{words}"


def _name(key: str) -> str:
    return {"pageup": "PgUp", "pagedown": "PgDn", "escape": "Esc"}.get(key, key.capitalize())
