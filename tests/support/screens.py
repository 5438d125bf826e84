"""Drive the screens by keys and read them as text."""

from __future__ import annotations

from textual.app import App
from textual.pilot import Pilot


def read_screen(app: App[None]) -> str:
    """Return the whole screen as lines of text, as a person sees it."""
    strips = app.screen._compositor.render_strips()
    return "\n".join(strip.text.rstrip() for strip in strips)


async def settle(pilot: Pilot[None]) -> None:
    """Wait until no worker runs and every message has been handled."""
    for _ in range(3):
        await pilot.app.workers.wait_for_complete()
        await pilot.pause()


async def press(pilot: Pilot[None], *keys: str) -> None:
    """Press keys, one after the other, and wait for what they started."""
    await pilot.press(*keys)
    await settle(pilot)


async def type_text(pilot: Pilot[None], text: str) -> None:
    """Type text letter by letter."""
    names = {" ": "space", ".": "full_stop", "_": "underscore", "-": "minus", ";": "semicolon"}
    await pilot.press(*(names.get(letter, letter) for letter in text))
    await settle(pilot)
