"""The application: three places, one shared snapshot."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import ClassVar

from textual.binding import Binding, BindingType
from textual.content import Content
from textual.events import Resize

from cuebook.jobs.log_entries import BlockEntry
from cuebook.library.lookup import Hit
from cuebook.tui.boxes import ReadBox
from cuebook.tui.colours import DARK, LIGHT
from cuebook.tui.find_screen import FindScreen
from cuebook.tui.frame import FramedScreen
from cuebook.tui.key_list import list_keys
from cuebook.tui.log_screen import LogScreen
from cuebook.tui.logbook import make_referral
from cuebook.tui.messages import MembersRead
from cuebook.tui.people_app import PeopleApp
from cuebook.tui.pick_box import Choice, PickBox
from cuebook.tui.ports import LibraryJobs
from cuebook.tui.review_screen import ReviewScreen
from cuebook.tui.state import Shared
from cuebook.tui.workers import describe_fault

NARROW_WIDTH, WIDE_WIDTH = 72, 110
LOW_HEIGHT, HIGH_HEIGHT = 22, 36


class CuebookApp(PeopleApp):
    """Find, Log and What shifted, by keyboard alone."""

    CSS_PATH = "theme.tcss"
    ENABLE_COMMAND_PALETTE = False
    TITLE = "Cuebook"
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("f1", "show_keys", "All keys of this screen"),
        Binding("f2", "go('find')", "Find: cues for a problem"),
        Binding("f3", "go('log')", "Log: what was said, to whom, what followed"),
        Binding("f4", "go('review')", "What shifted: which cues moved a measure"),
        Binding("f5", "pick_who", "For whom: pick or add a learner or a group"),
        Binding("f8", "turn_light", "Light or dark"),
        Binding("f10", "quit", "Leave"),
    ]

    def __init__(self, location: str | Path | None = None, jobs: LibraryJobs | None = None) -> None:
        super().__init__(location, jobs)
        self._places: dict[str, FramedScreen] = {
            "find": FindScreen(),
            "log": LogScreen(),
            "review": ReviewScreen(),
        }

    def on_mount(self) -> None:
        """Open with Find."""
        for theme in (DARK, LIGHT):
            self.register_theme(theme)
        self.theme = DARK.name
        for name, screen in self._places.items():
            self.install_screen(screen, name)
        self.push_screen("find")

    def on_unmount(self) -> None:
        """Leave only when everything handed over is stored."""
        self.store.close()

    def on_resize(self, event: Resize) -> None:
        """Give room to what is being worked on."""
        width, height = event.size
        self.set_class(width < NARROW_WIDTH, "narrow")
        self.set_class(width >= WIDE_WIDTH, "wide")
        self.set_class(height < LOW_HEIGHT, "low")
        self.set_class(height >= HIGH_HEIGHT, "high")

    def share(self, shared: Shared) -> None:
        """Replace the shared snapshot and hand it to the screen."""
        self.shared = shared
        for screen in self.screen_stack:
            if isinstance(screen, FramedScreen):
                screen.shared = shared

    def tell(self, words: str) -> None:
        """Say something in the status line of the screen."""
        for screen in self.screen_stack:
            if isinstance(screen, FramedScreen):
                screen.say(words)

    def action_go(self, place: str) -> None:
        """Go to a place."""
        if not self.screen.is_modal:
            self.switch_screen(place)

    def action_turn_light(self) -> None:
        """Change between light and dark."""
        self.theme = LIGHT.name if self.theme == DARK.name else DARK.name

    def action_show_keys(self) -> None:
        """List all keys of the present screen."""
        if not self.screen.is_modal:
            self.push_screen(ReadBox("Keys", list_keys(type(self), type(self.screen))))

    def take_cue(self, hit: Hit, task: str | None) -> None:
        """Take a cue into the log and go there."""
        self.share(
            replace(
                self.shared,
                cue=hit.cue.code,
                cue_words=hit.text,
                cue_caution=" ".join(hit.cautions),
                task=task or self.shared.task,
                metric=hit.cue.target_metric or self.shared.metric,
            )
        )
        self.switch_screen("log")

    def note_referred(self) -> None:
        """Note of a learner that they were stopped and referred; ask of whom if need be."""
        who, task = self.shared.who, self.shared.task
        if who is None:
            self.tell("Of whom?")
            self.ask_who(self.note_referred)
        elif task is None:
            self.tell("In which task?")
            self.ask_task(self.note_referred)
        elif who.is_group:
            self._run(lambda: MembersRead(who.code, self.jobs.list_members(who.code)), "people")
        else:
            self._log_referral(make_referral(who, who.code, task))

    def on_members_read(self, message: MembersRead) -> None:
        """Ask which member was stopped and referred."""
        who, task = self.shared.who, self.shared.task
        if who is None or task is None or who.code != message.group or self.screen.is_modal:
            return

        def take(code: str | None) -> None:
            if code is not None:
                self._log_referral(make_referral(who, code, task))

        members = [Choice(code, "") for code in message.members]
        self.push_screen(PickBox("Who was stopped and referred?", members), take)

    def _log_referral(self, entry: BlockEntry) -> None:
        log = self._places["log"]
        if isinstance(log, LogScreen):
            self.switch_screen("log")
            self.call_later(log.log_entry, entry)

    def _fatal_error(self) -> None:
        """Leave with one plain sentence; a traceback is of no use beside a pupil."""
        fault = describe_fault(self._exception or RuntimeError())
        self._exit_renderables.append(Content(f"{fault.message} {fault.hint}").plain)
        self._close_messages_no_wait()


def run_app(location: str | Path | None = None) -> int:
    """Open the screens; return the exit code."""
    app = CuebookApp(location)
    app.run()
    return app.return_code or 0
