"""The frame every screen shares: where one is, for whom, and what just happened."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any, ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.content import Content
from textual.reactive import reactive
from textual.screen import Screen
from textual.widgets import Static

from cuebook.tui.messages import WorkFailed
from cuebook.tui.state import Shared
from cuebook.tui.workers import attempt

if TYPE_CHECKING:
    from cuebook.tui.app import CuebookApp

PLACES = (("F2", "Find"), ("F3", "Log"), ("F4", "What shifted"))


class FramedScreen(Screen[None]):
    """A screen with a line of places, a line of context and a status line."""

    TITLE_WORD = ""
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("1", "app.go('find')", "Find", show=False),
        Binding("2", "app.go('log')", "Log", show=False),
        Binding("3", "app.go('review')", "What shifted", show=False),
        Binding("w", "app.pick_who", "For whom", show=False),
        Binding("question_mark", "app.show_keys", "Keys", show=False),
        Binding("q", "app.quit", "Leave", show=False),
    ]
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
        self.show_line()

    def watch_shared(self) -> None:
        """Show for whom, which task, which cue."""
        self.show_line()

    def show_line(self) -> None:
        """Show the shared state in the line of context."""
        if self.is_mounted:
            self.query_one("#context", Static).update(Content(self.shared.line))

    def say(self, words: str) -> None:
        """Show what just happened in the status line."""
        self.query_one("#status", Static).update(Content(words))

    def run_job(self, job: Callable[[], Any], group: str) -> None:
        """Run a job in a thread; it posts its message here. A newer one of its group wins."""
        self.run_worker(
            lambda: attempt(job, self.post_message),
            thread=True,
            exclusive=True,
            group=group,
            exit_on_error=False,
        )

    def on_work_failed(self, message: WorkFailed) -> None:
        """Say what could not be done in a box that scrolls."""
        message.stop()
        self.say("That did not work.")
        self.cuebook.show_error(message.error)

    def _name_places(self) -> Content:
        parts: list[tuple[str, str]] = []
        for key, name in PLACES:
            is_here = name == self.TITLE_WORD
            shown = f"{key} [{name}]" if is_here else f"{key} {name}"
            parts += [(shown, "bold $primary" if is_here else ""), ("   ", "")]
        return Content.assemble(*parts, "F1 Keys   F10 Leave")
