"""The frame every screen shares: where one is, for whom, and what just happened."""

from __future__ import annotations

from typing import TYPE_CHECKING

from rich.text import Text
from textual.app import ComposeResult
from textual.reactive import reactive
from textual.screen import Screen
from textual.widgets import Static

from cuebook.tui.messages import WorkFailed
from cuebook.tui.state import Shared

if TYPE_CHECKING:
    from cuebook.tui.app import CuebookApp

PLACES = (("F2", "Find"), ("F3", "Log"), ("F4", "What shifted"))


class FramedScreen(Screen[None]):
    """A screen with a line of places, a line of context and a status line."""

    TITLE_WORD = ""
    shared: reactive[Shared] = reactive(Shared())

    def compose(self) -> ComposeResult:
        """Lay out the frame around the screen's own panels."""
        yield Static(self._name_places(), classes="places", id="places")
        yield Static("", classes="context", id="context")
        yield from self.compose_panels()
        yield Static("", classes="status", id="status")

    def compose_panels(self) -> ComposeResult:
        """Lay out the screen's own panels."""
        yield from ()

    @property
    def cuebook(self) -> CuebookApp:
        """Return the app under its own type."""
        from cuebook.tui.app import CuebookApp  # noqa: PLC0415

        if not isinstance(self.app, CuebookApp):  # pragma: no cover - only ever used in it
            raise TypeError
        return self.app

    def on_screen_resume(self) -> None:
        """Show the shared state as it is now."""
        self.shared = self.cuebook.shared

    def watch_shared(self, shared: Shared) -> None:
        """Show for whom, which task, which cue."""
        if self.is_mounted:
            self.query_one("#context", Static).update(Text(shared.line))

    def say(self, words: str) -> None:
        """Show what just happened in the status line."""
        self.query_one("#status", Static).update(Text(words))

    def on_work_failed(self, message: WorkFailed) -> None:
        """Say what could not be done; long words go into a box that scrolls."""
        message.stop()
        self.cuebook.show_error(message.error)

    def _name_places(self) -> Text:
        line = Text()
        for key, name in PLACES:
            is_here = name == self.TITLE_WORD
            line.append(f"{key} ", style="bold" if is_here else "")
            line.append(f"[{name}]" if is_here else name, style="bold" if is_here else "")
            line.append("   ")
        line.append("F1 Keys   F10 Leave")
        return line
