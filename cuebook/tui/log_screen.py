"""Log: who, what was said, what followed; said to be stored once it is on disk."""

from __future__ import annotations

from collections.abc import Callable
from concurrent.futures import Future
from dataclasses import replace
from typing import Any, ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import VerticalScroll
from textual.content import Content
from textual.widgets import Static

from cuebook.errors import CuebookError
from cuebook.jobs.log_entries import BlockEntry, Logged
from cuebook.tui.answers import PracticeAnswers
from cuebook.tui.frame import FramedScreen
from cuebook.tui.logbook import (
    Sitting,
    make_group_measure,
    make_measure,
    make_practice,
    make_same_again,
)
from cuebook.tui.measure_box import MeasureBox, Measures, MembersBox
from cuebook.tui.messages import BlockLogged, CardRead, SessionEnded
from cuebook.tui.practice_box import PracticeBox
from cuebook.tui.state import Shared
from cuebook.tui.workers import attempt
from cuebook.vocabulary import load_vocabulary

KEYS = (
    "O before any cue   C practice with the cue   A practice without a cue\n"
    "P straight after, cue off   L new place or pressure   S same again\n"
    "T task   D side   N end, new session   W for whom   F2 find a cue"
)
SHORT_KEYS = (
    "O before  C with the cue  A no cue  P straight after\n"
    "L new place  S same again  T task  D side\n"
    "N end, new session  W for whom  F2 find"
)
MOST_LINES = 200


class LogScreen(FramedScreen):
    """Who, what was said, what followed."""

    TITLE_WORD = "Log"
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("o", "measure('baseline')", "Before any cue: the opening measure"),
        Binding("c", "practise(True)", "Practice with the cue"),
        Binding("a", "practise(False)", "Practice without a cue"),
        Binding("p", "measure('immediate_post')", "Straight after, cue off"),
        Binding("l", "measure('transfer')", "New place or pressure"),
        Binding("s", "same_again", "Same again"),
        Binding("t", "app.pick_task", "Task"),
        Binding("d", "app.turn_side", "Side"),
        Binding("n", "end_session", "End the session; the next entry begins a new one"),
        Binding("up", "scroll_card(-1)", "Read the card"),
        Binding("down", "scroll_card(1)", "Read the card"),
        Binding("pageup", "scroll_lines(-1)", "Read what was logged"),
        Binding("pagedown", "scroll_lines(1)", "Read what was logged"),
    ]

    def __init__(self) -> None:
        super().__init__()
        self._sitting: Sitting | None = None
        self._lines: list[str] = []

    def compose_panels(self) -> ComposeResult:
        """Lay out card, what was written, keys."""
        with VerticalScroll(id="card", can_focus=False):
            yield Static("", id="card_lines")
        yield Static("", id="saying")
        with VerticalScroll(id="written", can_focus=False):
            yield Static("", id="lines")
        yield Static(Content(KEYS), id="keys")

    def on_resize(self) -> None:
        """Name the keys as fully as there is room."""
        is_narrow = self.app.has_class("narrow")
        self.query_one("#keys", Static).update(Content(SHORT_KEYS if is_narrow else KEYS))

    def on_screen_resume(self) -> None:
        """Say what comes next."""
        super().on_screen_resume()
        shared = self.shared
        if shared.who is None:
            self._put_card("Nobody is picked yet. F5 picks a learner or a group, or adds one.")
            self.say("F5: for whom.")
        elif self._sitting is not None and shared.cue is not None:
            self.say("C logs practice with this cue.")

    def watch_shared(self) -> None:
        """Read the card of somebody who has just been picked."""
        super().watch_shared()
        if self.is_mounted:
            self.query_one("#saying", Static).update(describe_saying(self.shared))
        who = self.shared.who
        if who is None or (self._sitting is not None and self._sitting.who.code == who.code):
            return
        self._sitting, self._lines = None, []
        self._put_card(f"Reading the card of {who.code} …")
        self._put_lines()
        jobs = self.cuebook.jobs
        self.run_job(lambda: CardRead(who.code, jobs.read_card(who)), "card")

    def on_card_read(self, message: CardRead) -> None:
        """Show the card; the opening measure comes before any cue."""
        message.stop()
        who = self.shared.who
        if who is None or who.code != message.who:
            return
        card = message.card
        self._sitting = Sitting(who, card.members)
        self._put_card("\n".join(card.last.lines))
        self._lines = ["Today so far:", *card.open_lines[1:]] if card.open_lines else []
        self._put_lines()
        self.say(f"{card.last.opening} O takes it.")

    def action_measure(self, phase: str) -> None:
        """Ask for the numbers of a measure, cue off."""
        sitting = self._get_ready()
        if sitting is None:
            return
        label = load_vocabulary().label("phase", phase)
        title, metric = f"{label[:1].upper()}{label[1:]}", self.shared.metric
        if sitting.members:
            box: MeasureBox | MembersBox = MembersBox(
                title, metric, sitting.members, sitting.absent
            )
        else:
            box = MeasureBox(title, metric)
        self.app.push_screen(box, lambda measures: self._store_measures(sitting, phase, measures))

    def _store_measures(self, sitting: Sitting, phase: str, measures: Measures | None) -> None:
        if measures is None:
            return
        shared = self.shared
        if sitting.members:
            entry = make_group_measure(sitting, shared, phase, measures.by_member)
        else:
            entry = make_measure(sitting, shared, phase, measures.values)
        self._log(entry)
        self.cuebook.share(replace(shared, metric=measures.metric))

    def action_practise(self, with_cue: bool) -> None:  # noqa: FBT001 - from a key binding
        """Ask what happened in practice, with the chosen cue or without one."""
        sitting = self._get_ready()
        if sitting is None:
            return
        shared = self.shared
        if with_cue and shared.cue is None:
            self.say("No cue is chosen. F2 finds one; Enter there takes it.")
            return
        title = f"Practice: {shared.cue_words}" if with_cue else "Practice without a cue"
        cue = shared.cue if with_cue else None

        def store(answers: PracticeAnswers | None) -> None:
            if answers is None:
                return
            entry = make_practice(sitting, shared, answers, cue)
            self._sitting = replace(sitting, absent=answers.absent, last_practice=entry)
            self._log(entry)

        self.app.push_screen(PracticeBox(title, sitting.start_answers(has_cue=with_cue)), store)

    def action_same_again(self) -> None:
        """Log the last practice once more, without its answers."""
        if self._sitting is None or self._sitting.last_practice is None:
            self.say("Nothing practised here yet that could be done again. C or A first.")
            return
        self._log(make_same_again(self._sitting.last_practice))

    def action_end_session(self) -> None:
        """End the session that is open; the next entry begins a new one."""
        sitting = self._sitting
        if sitting is None:
            self.say("For whom? F5 picks a learner or a group.")
            return
        who = sitting.who
        self._sitting = replace(sitting, absent=frozenset(), last_practice=None)
        ended = self.cuebook.store.end_session(who)
        self._wait_for(ended, lambda was_open: SessionEnded(who.code, was_open=was_open))

    def on_session_ended(self, message: SessionEnded) -> None:
        """Say that the end is on disk."""
        message.stop()
        if message.was_open:
            self._lines.append(f"Session of {message.who} ended.")
            self._put_lines()
        ended = "Session ended. " if message.was_open else ""
        self.say(f"{ended}The next entry begins a new session.")

    def action_scroll_card(self, direction: int) -> None:
        """Read on or back in the card."""
        self.query_one("#card").scroll_relative(y=2 * direction, animate=False)

    def action_scroll_lines(self, direction: int) -> None:
        """Read back or on in what was written."""
        self.query_one("#written").scroll_relative(y=4 * direction, animate=False)

    def log_entry(self, entry: BlockEntry) -> None:
        """Store an entry that was made elsewhere."""
        self._log(entry)

    def _get_ready(self) -> Sitting | None:
        """Return whom the next entry is for; say what is missing if it cannot be made."""
        if self.shared.who is None:
            self.say("For whom? F5 picks a learner or a group.")
        elif self.shared.task is None:
            self.say("Which task? T picks one; a cue from F2 brings its own.")
        elif self._sitting is None:
            self.say("The card is still being read.")
        return None if self.shared.task is None else self._sitting

    def _log(self, entry: BlockEntry) -> None:
        who = entry.learner or entry.group or ""
        self._wait_for(self.cuebook.store.log(entry), lambda logged: BlockLogged(who, logged))

    def _wait_for(self, stored: Future[Any], tell: Callable[[Any], Any]) -> None:
        """Wait in a thread until something is on disk, then say so; nothing is dropped."""
        self.say("Storing …")

        def job() -> Any:
            try:
                return tell(stored.result())
            except CuebookError as error:
                hint = f"{error.hint} Nothing of this entry is stored.".strip()
                raise CuebookError(error.message, hint) from error

        self.run_worker(
            lambda: attempt(job, self.post_message),
            thread=True,
            group="store",
            exit_on_error=False,
        )

    def on_block_logged(self, message: BlockLogged) -> None:
        """Say what is on disk now."""
        message.stop()
        if self.shared.who is not None and self.shared.who.code == message.who:
            self._lines += _tell(message.logged)
            self._put_lines()
        self.say(f"Stored for {message.who}.")

    def _put_card(self, words: str) -> None:
        self.query_one("#card_lines", Static).update(Content(words))
        self.query_one("#card").scroll_home(animate=False)

    def _put_lines(self) -> None:
        self.query_one("#lines", Static).update(Content("\n".join(self._lines[-MOST_LINES:])))
        self.query_one("#written").scroll_end(animate=False)


def describe_saying(shared: Shared) -> Content:
    """Return the words to say, on a line of their own, with their caution first."""
    if shared.cue is None:
        return Content("")
    parts = [(f"! {shared.cue_caution}\n", "bold $warning")] if shared.cue_caution else []
    return Content.assemble(*parts, (f"  {shared.cue_words}", "bold $primary"))


def _tell(logged: Logged) -> list[str]:
    return [*(f"! {caution}" for caution in logged.cautions), *logged.lines]
