"""Log: the card first, then blocks by single keys; on disk before it says so."""

from __future__ import annotations

from typing import ClassVar

from rich.text import Text
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import VerticalScroll
from textual.widgets import Static

from cuebook.jobs.last_card import read_last_card
from cuebook.jobs.log_entries import BlockEntry, LearnerNote, Logged
from cuebook.jobs.people import list_members
from cuebook.tui.entry_boxes import MeasureBox, Numbers, PracticeBox, Practised
from cuebook.tui.frame import FramedScreen
from cuebook.tui.messages import CardRead, UseLogged
from cuebook.tui.workers import attempt
from cuebook.vocabulary import load_vocabulary

KEYS = (
    "O before any cue   C practice with the cue   A practice without a cue\n"
    "P straight after, cue off   S same again   N new session   E end it\n"
    "F5 for whom   F2 find a cue   T task"
)


class LogScreen(FramedScreen):
    """Who, what was said, what followed."""

    TITLE_WORD = "Log"
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("f5", "app.pick_who", "For whom"),
        Binding("o", "measure('baseline')", "Before any cue"),
        Binding("p", "measure('immediate_post')", "Straight after, cue off"),
        Binding("c", "practise(True)", "Practice with the cue"),
        Binding("a", "practise(False)", "Practice without a cue"),
        Binding("s", "same_again", "Same again"),
        Binding("n", "new_session", "New session"),
        Binding("e", "end_session", "End the session"),
        Binding("t", "next_task", "Task"),
    ]

    def __init__(self) -> None:
        super().__init__()
        self._members: tuple[str, ...] = ()
        self._session: str | None = None
        self._last: BlockEntry | None = None
        self._written: list[str] = []
        self._metric: str | None = None
        self._seen: str | None = None

    def compose_panels(self) -> ComposeResult:
        """Lay out card, what was written, keys."""
        yield Static("", id="card")
        with VerticalScroll(id="written"):
            yield Static("", id="lines")
        yield Static(Text(KEYS), id="keys")

    def on_screen_resume(self) -> None:
        """Show the card of whoever it is for; ask for whom if nobody is picked."""
        super().on_screen_resume()
        self.query_one("#written").can_focus = False
        who = self.shared.who
        if who is None:
            self.query_one("#card", Static).update("Nobody picked yet. F5: for whom.")
            self.say("F5 picks a learner or a group.")
        elif who.code != self._seen:
            self._seen, self._session, self._last, self._written = who.code, None, None, []
            self.query_one("#lines", Static).update("")
            self._read_card()
        self._metric = self.shared.metric or self._metric

    def _read_card(self) -> None:
        shared, who = self.shared, self.shared.who
        if who is None:
            return

        def job() -> CardRead:
            if who.is_group:
                members = list_members(shared.location, who.code)
                return CardRead(read_last_card(shared.location, group=who.code), members)
            return CardRead(read_last_card(shared.location, learner=who.code), ())

        self.run_worker(
            lambda: attempt(job, self.post_message),
            thread=True,
            exclusive=True,
            group="card",
            exit_on_error=False,
        )

    def on_card_read(self, message: CardRead) -> None:
        """Show the card; the opening measure comes before any cue."""
        message.stop()
        self._members = (message.card.who and message.members) or ()
        self.query_one("#card", Static).update(Text("\n".join(message.card.lines)))
        self.say("O takes the opening measure.")

    def action_measure(self, phase: str) -> None:
        """Ask for the numbers of a measure, cue off."""
        if not self._is_ready():
            return
        if self._members:
            self._log(self._make_entry(phase, LearnerNote()))
            self.say("Noted for the group. Values: pick one learner with F5.")
            return
        title = load_vocabulary().label("phase", phase)
        box = MeasureBox(f"{title[:1].upper()}{title[1:]}", self._metric)

        def store(numbers: Numbers | None) -> None:
            if numbers is None:
                return
            if numbers.values:
                self._metric = next(iter(numbers.values))
            self._log(self._make_entry(phase, LearnerNote(values=numbers.values)))

        self.app.push_screen(box, store)

    def action_practise(self, with_cue: bool) -> None:  # noqa: FBT001 - from a key binding
        """Ask what happened in practice, with the chosen cue or without one."""
        if not self._is_ready():
            return
        if with_cue and self.shared.cue is None:
            self.say("No cue is chosen. F2 finds one; Enter there takes it.")
            return
        title = f"Practice: {self.shared.cue}" if with_cue else "Practice without a cue"
        box = PracticeBox(title, self._members, has_cue=with_cue)

        def store(practised: Practised | None) -> None:
            if practised is None:
                return
            absent = dict.fromkeys(practised.absent_codes, LearnerNote(present="absent"))
            entry = self._make_entry("acquisition", practised.note)
            self._log(
                BlockEntry(
                    task=entry.task,
                    learner=entry.learner,
                    group=entry.group,
                    except_codes=practised.except_codes,
                    phase="acquisition",
                    cue=self.shared.cue if with_cue else None,
                    session=entry.session,
                    note=entry.note,
                    notes=absent,
                )
            )

        self.app.push_screen(box, store)

    def action_same_again(self) -> None:
        """Log the last practice once more."""
        if self._last is None:
            self.say("Nothing logged yet to do again.")
            return
        self._log(self._last)

    def action_new_session(self) -> None:
        """Begin a new session with the next entry."""
        self._session = "new"
        self._last = None
        self.say("The next entry begins a new session.")

    def action_end_session(self) -> None:
        """End the session that was logged in."""
        session = self._session
        if session in {None, "new"}:
            self.say("No session is open here yet.")
            return

        def job() -> None:
            from cuebook.jobs.log_use import end_session  # noqa: PLC0415

            end_session(self.shared.location, session or "")

        self.run_worker(lambda: attempt(job, self.post_message), thread=True, exit_on_error=False)
        self._session = None
        self.say("Session ended.")

    def action_next_task(self) -> None:
        """Ask for the task."""
        self.cuebook.pick_task()

    def _is_ready(self) -> bool:
        if self.shared.who is None:
            self.say("For whom? F5 picks a learner or a group.")
            return False
        if self.shared.task is None:
            self.say("Which task? T picks one; a cue from F2 brings its own.")
            return False
        return True

    def _make_entry(self, phase: str, note: LearnerNote) -> BlockEntry:
        who = self.shared.who
        if who is None:  # pragma: no cover - _is_ready has asked
            raise RuntimeError
        return BlockEntry(
            task=self.shared.task or "",
            learner=None if who.is_group else who.code,
            group=who.code if who.is_group else None,
            phase=phase,
            session=self._session,
            note=note,
        )

    def _log(self, entry: BlockEntry) -> None:
        location = self.shared.location
        if entry.phase == "acquisition":
            self._last = entry

        def job() -> UseLogged:
            from cuebook.jobs.log_use import log_block  # noqa: PLC0415

            return UseLogged(log_block(location, entry))

        self.say("Storing …")
        # Entries keep their order: one worker at a time, none is dropped.
        self.run_worker(
            lambda: self.cuebook.store_in_turn(lambda: attempt(job, self.post_message)),
            thread=True,
            group="store",
            exit_on_error=False,
        )

    def on_use_logged(self, message: UseLogged) -> None:
        """Say what is on disk now."""
        message.stop()
        self._session = message.logged.session_id
        self._written += _tell(message.logged)
        self.query_one("#lines", Static).update(Text("\n".join(self._written[-60:])))
        self.query_one("#written", VerticalScroll).scroll_end(animate=False)
        self.say("Stored.")


def _tell(logged: Logged) -> list[str]:
    return [*(f"! {caution}" for caution in logged.cautions), *logged.lines]
