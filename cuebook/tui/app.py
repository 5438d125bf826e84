"""The application: three places, one shared state."""

from __future__ import annotations

import threading
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import ClassVar

from textual.app import App
from textual.binding import Binding, BindingType
from textual.events import Resize
from textual.theme import Theme

from cuebook.errors import CuebookError
from cuebook.jobs.people import (
    NewLearner,
    PersonLine,
    add_learner,
    list_people,
    set_consent,
)
from cuebook.tui.boxes import ConsentBox, PickBox, ReadBox
from cuebook.tui.find_screen import FindScreen
from cuebook.tui.log_screen import LogScreen
from cuebook.tui.review_screen import ReviewScreen
from cuebook.tui.state import Shared
from cuebook.vocabulary import load_vocabulary

DARK = Theme(
    name="cuebook-dark",
    primary="#6fa8dc",
    secondary="#6fa8dc",
    accent="#e69138",
    warning="#e69138",
    error="#e69138",
    success="#6fa8dc",
    background="#101418",
    surface="#181e24",
    panel="#22303c",
    foreground="#e8e8e8",
    dark=True,
)
LIGHT = Theme(
    name="cuebook-light",
    primary="#0b5394",
    secondary="#0b5394",
    accent="#b45f06",
    warning="#b45f06",
    error="#b45f06",
    success="#0b5394",
    background="#fbfbf8",
    surface="#f2f2ee",
    panel="#dfe6ec",
    foreground="#1a1a1a",
    dark=False,
)
KEYS = (
    "F2   Find: type the problem, read fitting cues",
    "F3   Log: what was said, to whom, what followed",
    "F4   What shifted: which cues moved a measure",
    "F5   For whom: pick a learner or a group, or add a learner",
    "F8   Light or dark",
    "F10  Leave",
    "",
    "In Log:",
    "O    before any cue: the opening measure",
    "C    practice with the cue",
    "A    practice without a cue",
    "P    straight after, cue off",
    "S    same again",
    "N    new session      E  end the session      T  task",
    "",
    "In What shifted:  Enter opens a question, R ranks anew, Escape goes back to the questions",
)


class CuebookApp(App[None]):
    """Find, Log and What shifted, by keyboard alone."""

    CSS_PATH = "theme.tcss"
    ENABLE_COMMAND_PALETTE = False
    TITLE = "Cuebook"
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("f1", "show_keys", "Keys"),
        Binding("question_mark", "show_keys", "Keys", show=False),
        Binding("f2", "go('find')", "Find"),
        Binding("f3", "go('log')", "Log"),
        Binding("f4", "go('review')", "What shifted"),
        Binding("f5", "pick_who", "For whom"),
        Binding("f8", "turn_light", "Light or dark"),
        Binding("f10", "quit", "Leave"),
    ]

    def __init__(self, location: str | Path | None = None) -> None:
        super().__init__()
        self.shared = Shared(location=location)
        self._store_lock = threading.Lock()

    def on_mount(self) -> None:
        """Open with Find."""
        for theme in (DARK, LIGHT):
            self.register_theme(theme)
        self.theme = DARK.name
        for name, screen in (
            ("find", FindScreen()),
            ("log", LogScreen()),
            ("review", ReviewScreen()),
        ):
            self.install_screen(screen, name)
        self.push_screen("find")

    def on_resize(self, event: Resize) -> None:
        """Give more room to details where there is room."""
        self.set_class(event.size.height < 24, "narrow")
        self.set_class(event.size.height >= 36, "wide")

    def action_go(self, place: str) -> None:
        """Go to a place."""
        if not self.screen.is_modal:
            self.switch_screen(place)

    def action_turn_light(self) -> None:
        """Change between light and dark."""
        self.theme = LIGHT.name if self.theme == DARK.name else DARK.name

    def action_show_keys(self) -> None:
        """List all keys."""
        if not self.screen.is_modal:
            self.push_screen(ReadBox("Keys", KEYS))

    def action_pick_who(self) -> None:
        """Ask for whom."""
        if self.screen.is_modal:
            return
        try:
            people = list_people(self.shared.location)
        except CuebookError as error:
            self.show_error(error)
            return
        self.push_screen(PickBox(people), self._take_who)

    def pick_task(self) -> None:
        """Ask for the task."""
        tasks = tuple(
            PersonLine(task.slug, is_group=False, label=task.label, note=task.label)
            for task in load_vocabulary().tasks
        )

        def take(task: PersonLine | None) -> None:
            if task is not None and task.code:
                self._share(replace(self.shared, task=task.code))

        self.push_screen(PickBox(tasks, of_what="task"), take)

    def take_cue(self, code: str, words: str, task: str | None, metric: str | None) -> None:
        """Take a cue into the log and go there."""
        self.shared = replace(
            self.shared,
            cue=code,
            cue_words=words,
            task=task or self.shared.task,
            metric=metric or self.shared.metric,
        )
        self.switch_screen("log")

    def show_error(self, error: CuebookError) -> None:
        """Show what went wrong in a box that scrolls."""
        self.push_screen(ReadBox("This did not work", (error.message, error.hint)))

    def store_in_turn(self, work: Callable[[], None]) -> None:
        """Run one entry after the other, in the order they were made."""
        with self._store_lock:
            work()

    def _take_who(self, who: PersonLine | None) -> None:
        if who is None:
            return
        if not who.code:
            try:
                code = add_learner(self.shared.location, NewLearner())
            except CuebookError as error:
                self.show_error(error)
                return
            who = PersonLine(code, is_group=False, label="", note="new")
            self._share(replace(self.shared, who=who))
            self.push_screen(ConsentBox(code), lambda answer: self._note_consent(code, answer))
            return
        self._share(replace(self.shared, who=who))

    def _note_consent(self, code: str, answer: tuple[str, str, str] | None) -> None:
        if answer is None:
            return
        given, given_by, assent = answer
        try:
            set_consent(
                self.shared.location,
                code,
                "use_for_ranking",
                given,
                given_by=given_by,
                assent=assent,
            )
        except CuebookError as error:
            self.show_error(error)

    def _share(self, shared: Shared) -> None:
        self.shared = shared
        screen = self.screen
        if isinstance(screen, FindScreen):
            screen.shared = shared
            screen.look_up_again()
        elif isinstance(screen, (LogScreen, ReviewScreen)):
            screen.on_screen_resume()


def run_app(location: str | Path | None = None) -> None:
    """Open the screens."""
    CuebookApp(location).run()
