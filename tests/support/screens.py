"""Drive the screens by keys and read them as text."""

from __future__ import annotations

from contextlib import suppress

from textual.app import App
from textual.events import Paste
from textual.pilot import Pilot
from textual.worker import WorkerCancelled, WorkerFailed


def read_screen(app: App[None]) -> str:
    """Return the whole screen as lines of text, as a person sees it."""
    strips = app.screen._compositor.render_strips()
    return "\n".join(strip.text.rstrip() for strip in strips)


def read_widget(app: App[None], selector: str) -> str:
    """Return all the text of one widget, also what is scrolled out of sight."""
    return str(app.screen.query_one(selector).render())


async def settle(pilot: Pilot[None]) -> None:
    """Wait until no worker runs and every message has been handled."""
    await pilot.pause()
    while running := [worker for worker in pilot.app.workers if not worker.is_finished]:
        for worker in running:
            with suppress(WorkerCancelled, WorkerFailed):
                await worker.wait()
        await pilot.pause()
    await pilot.pause()


async def press(pilot: Pilot[None], *keys: str) -> None:
    """Press keys, one after the other, and wait for what they started."""
    await pilot.press(*keys)
    await settle(pilot)


async def paste(pilot: Pilot[None], text: str) -> None:
    """Put text into the field that has the keys, as a terminal pastes it."""
    pilot.app.post_message(Paste(text))
    await settle(pilot)


async def type_text(pilot: Pilot[None], text: str) -> None:
    """Type text letter by letter."""
    names = {" ": "space", ".": "full_stop", "_": "underscore", "-": "minus", ";": "semicolon"}
    await pilot.press(*(names.get(letter, letter) for letter in text))
    await settle(pilot)


async def pick_who(pilot: Pilot[None], code: str) -> None:
    """Pick a learner or a group by keys."""
    await press(pilot, "f5")
    await paste(pilot, code)
    await press(pilot, "enter")


async def take_first_cue(pilot: Pilot[None], problem: str) -> None:
    """Look a problem up and take the first cue into the log, by keys."""
    await press(pilot, "f2")
    await paste(pilot, problem)
    await press(pilot, "down", "enter")
