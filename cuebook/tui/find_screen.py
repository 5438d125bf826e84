"""Find: type the problem, read fitting cues, caution first."""

from __future__ import annotations

import time
from typing import ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Horizontal, VerticalScroll
from textual.content import Content
from textual.widgets import Input, OptionList, Static
from textual.widgets.option_list import Option
from textual.worker import get_current_worker

from cuebook.jobs.find_cue import FoundCues
from cuebook.library.lookup import Hit
from cuebook.tui.boxes import make_field
from cuebook.tui.find_words import describe_detail, describe_row, describe_understood
from cuebook.tui.frame import FramedScreen
from cuebook.tui.listing import Listing
from cuebook.tui.messages import CuesFound
from cuebook.tui.ports import MOST_CUES
from cuebook.tui.state import Shared

PAUSE_S = 0.08
"""A look-up begins when no key has come for this long."""
OPENING = "Type what you see, in your own words. Up, Down: the cues. F5: for whom."


class FindScreen(FramedScreen):
    """Cues for a problem in one's own words."""

    TITLE_WORD = "Find"
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("up", "move('cursor_up')", "Up and down in the cues", priority=True),
        Binding("down", "move('cursor_down')", "Up and down in the cues", priority=True),
        Binding("pageup", "scroll_detail(-1)", "Read on in the detail", priority=True),
        Binding("pagedown", "scroll_detail(1)", "Read on in the detail", priority=True),
        Binding("enter", "take", "Take the cue into Log"),
        Binding("f6", "app.pick_task", "Only cues for one task"),
        Binding("f9", "note_referred", "Note: stopped and referred, with the time"),
        Binding("escape", "leave_field", "Out of the field and back"),
    ]

    def __init__(self) -> None:
        super().__init__()
        self._found: FoundCues | None = None
        self._asked: tuple[str, str | None, str | None] = ("", None, None)

    def compose_panels(self) -> ComposeResult:
        """Lay out field, understanding, cues and detail."""
        with Horizontal(id="asking"):
            yield Static("Problem: ", id="asked")
            yield make_field("problem")
        yield Static("", id="understood")
        yield Listing(id="cues")
        with VerticalScroll(id="detail", can_focus=False):
            yield Static("", id="about")

    def on_mount(self) -> None:
        """Take the keys and say what to do."""
        self._field.focus()
        self.say(OPENING)

    def on_screen_resume(self) -> None:
        """Take the keys again."""
        super().on_screen_resume()
        self._field.focus()

    def watch_shared(self) -> None:
        """Look up the same words for somebody else or another task."""
        super().watch_shared()
        if self.is_mounted:
            self._look_up()

    def on_input_changed(self) -> None:
        """Look up what is typed so far."""
        self._look_up()

    def on_input_submitted(self, event: Input.Submitted) -> None:
        """Go to the first cue; then take the cue under the cursor."""
        event.stop()
        self.action_take()

    def action_move(self, where: str) -> None:
        """Move in the list of cues."""
        getattr(self._list, f"action_{where}")()

    def action_scroll_detail(self, direction: int) -> None:
        """Read on in the detail."""
        self.query_one("#detail").scroll_relative(y=4 * direction, animate=False)

    def action_leave_field(self) -> None:
        """Give the letters free for short keys, or take them back."""
        if self._field.has_focus:
            self.set_focus(None)
            self.say("1 Find, 2 Log, 3 What shifted, W for whom, ? keys, Escape: type again.")
        else:
            self._field.focus()
            self.say(OPENING)

    def action_take(self) -> None:
        """Take the cue under the cursor into the log."""
        if not self._hits:
            return
        at = self._list.highlighted
        if at is None:
            self._list.highlighted = 0
            self.say("Enter takes this cue into Log. Up, Down: another.")
            return
        hit = self._hits[at]
        self.cuebook.take_cue(hit, self._guess_task(hit))

    def action_note_referred(self) -> None:
        """Note that a learner was stopped and referred."""
        if self._found is not None and self._found.stop is not None:
            self.cuebook.note_referred()

    @property
    def _field(self) -> Input:
        return self.query_one("#problem", Input)

    @property
    def _list(self) -> Listing:
        return self.query_one("#cues", Listing)

    @property
    def _hits(self) -> tuple[Hit, ...]:
        return () if self._found is None else self._found.hits

    def _look_up(self) -> None:
        """Look up the words in a thread once no key comes for a moment."""
        text, shared = self._field.value.strip(), self.shared
        asked = make_asked(text, shared)
        if asked == self._asked:
            return
        self._asked = asked
        if not text:
            self.workers.cancel_group(self, "look-up")
            self._show(None)
            self.say(OPENING)
            return
        jobs = self.cuebook.jobs

        def job() -> CuesFound | None:
            worker = get_current_worker()
            time.sleep(PAUSE_S)
            if worker.is_cancelled:
                return None
            return CuesFound(text, jobs.find(text, shared.who, asked[2]))

        self.run_job(job, "look-up")

    def on_cues_found(self, message: CuesFound) -> None:
        """Show what has been found, unless the words have changed since."""
        message.stop()
        if message.text != self._asked[0]:
            return
        found = message.found
        self._show(found)
        if found.stop is not None:
            self.say("No cue for this. F9 notes: stopped and referred, with the time.")
        elif not found.hits:
            self.say("No cue fits yet.")
        elif len(found.hits) >= MOST_CUES:
            self.say(f"The best {MOST_CUES} shown; say more to narrow. Down, Enter takes one.")
        else:
            n = len(found.hits)
            self.say(f"{n} cue{'' if n == 1 else 's'}. Down, then Enter takes one into Log.")

    def on_option_list_option_highlighted(self, event: OptionList.OptionHighlighted) -> None:
        """Show the words of the cue under the cursor with what they carry and leave out."""
        if event.option_index < len(self._hits):
            self._show_detail(describe_detail(self._hits[event.option_index]))

    def on_option_list_option_selected(self, event: OptionList.OptionSelected) -> None:
        """Take the cue that was pointed at."""
        self._list.highlighted = event.option_index
        self.action_take()

    def _show(self, found: FoundCues | None) -> None:
        self._found = found
        understood, detail = Content(""), Content("")
        if found is not None and found.stop is not None:
            understood = Content.styled(f"! {found.stop.message}", "bold $warning")
        elif found is not None:
            understood = describe_understood(found)
            advice = found.advice or "No cue fits. Say more: what moves, doing what?"
            detail = describe_detail(found.hits[0]) if found.hits else Content(advice)
        self.query_one("#understood", Static).update(understood)
        self._list.clear_options()
        self._list.add_options([Option(describe_row(hit)) for hit in self._hits])
        self._show_detail(detail)

    def _show_detail(self, detail: Content) -> None:
        self.query_one("#about", Static).update(detail)
        self.query_one("#detail").scroll_home(animate=False)

    def _guess_task(self, hit: Hit) -> str | None:
        if self.shared.task_was_picked:
            return self.shared.task
        understood = () if self._found is None else self._found.understanding.tasks
        spoken_of = [task.slug for task in understood if task.slug in hit.cue.tasks]
        return next(iter((*spoken_of, *hit.cue.tasks)), None)


def make_asked(text: str, shared: Shared) -> tuple[str, str | None, str | None]:
    """Return what a look-up depends on: the words, for whom, and the task if one was picked."""
    who = None if shared.who is None else shared.who.code
    return text, who, shared.task if shared.task_was_picked else None
