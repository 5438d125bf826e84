"""What happened in practice, by single keys."""

from __future__ import annotations

from textual import events
from textual.app import ComposeResult
from textual.containers import Vertical, VerticalScroll
from textual.content import Content
from textual.screen import ModalScreen
from textual.widgets import Static

from cuebook.tui.answers import OWN_WORDS_KEY, PracticeAnswers
from cuebook.tui.boxes import WordsBox, get_box_width
from cuebook.tui.practice_words import describe_answers, describe_members


class PracticeBox(ModalScreen[PracticeAnswers | None]):
    """Answers for everybody, or for the member that is marked; nothing has to be said."""

    def __init__(self, title: str, answers: PracticeAnswers) -> None:
        super().__init__(classes="modal")
        self._title = title
        self._answers = answers

    def compose(self) -> ComposeResult:
        """Lay out title, members, answers and keys."""
        with Vertical():
            yield Static(Content.styled(self._title, "bold"))
            with VerticalScroll(id="members", can_focus=False):
                yield Static("", id="rows")
            yield Static("", id="answers")
            yield Static("Enter stores.  Escape closes without storing.", classes="foot")

    def on_mount(self) -> None:
        """Show what can be said."""
        self.query_one("#members").display = bool(self._answers.members)
        self._refresh_answers()

    def on_resize(self) -> None:
        """Lay the members out anew."""
        self._refresh_answers()

    def on_key(self, event: events.Key) -> None:
        """Take one answer a key."""
        event.stop()
        key = event.key.lower()
        if key == "escape":
            self.dismiss(None)
        elif key == "enter":
            self.dismiss(self._answers)
        elif key == OWN_WORDS_KEY:
            self._ask_words()
        else:
            self._answers = self._answers.press(key)
            needs_mark = self._answers.needs_mark and key in {"e", "x"}
            self._refresh_answers("Mark the learner first: this is of one person." * needs_mark)

    def _ask_words(self) -> None:
        if self._answers.needs_mark:
            self._refresh_answers("Mark the learner first: words are one person's.")
            return

        def keep(words: str | None) -> None:
            if words is not None:
                self._answers = self._answers.put_words(words)
                self._refresh_answers()

        self.app.push_screen(
            WordsBox("Their own words for it", self._answers.own_note.words or ""), keep
        )

    def _refresh_answers(self, told: str = "") -> None:
        answers = self._answers
        width = get_box_width(self.app)
        if answers.members:
            rows, at = describe_members(answers, width)
            self.query_one("#rows", Static).update(Content(rows))
            self.query_one("#members").scroll_to(y=max(at - 1, 0), animate=False)
        words = describe_answers(answers, width)
        self.query_one("#answers", Static).update(Content(f"{words}\n! {told}" if told else words))
