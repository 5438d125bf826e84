"""What shifted: plain sentences, then cues with their intervals; ranked off the screen."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import Any, ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import VerticalScroll
from textual.content import Content
from textual.reactive import reactive
from textual.widgets import OptionList, Static
from textual.widgets.option_list import Option

from cuebook.jobs.review_stored import QuestionLine
from cuebook.tui.frame import FramedScreen
from cuebook.tui.listing import Listing
from cuebook.tui.messages import QuestionsRead, RankingMade, RankingRead
from cuebook.tui.pick_box import Choice, PickBox
from cuebook.tui.review_answer import describe_answer
from cuebook.tui.state import Shared

CONTRASTS: Mapping[str, str] = {
    "immediate": "straight after, cue off",
    "during": "while the cue was on",
    "retention": "next time, before any cue",
    "transfer": "new place or pressure",
    "transfer_later": "new place or pressure, another day",
}
NOTHING = (
    "Nothing is measured yet. Log values before and after a cue (F3), "
    "or take recordings in: cuebook import."
)


class ReviewScreen(FramedScreen):
    """Which cues shifted a measure, with what is not known said first."""

    TITLE_WORD = "What shifted"
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("up", "move('cursor_up')", "Another question"),
        Binding("down", "move('cursor_down')", "Another question"),
        Binding("enter", "open", "Open the question"),
        Binding("pageup", "scroll_answer(-1)", "Read back and on"),
        Binding("pagedown", "scroll_answer(1)", "Read back and on"),
        Binding("home", "scroll_ends(-1)", "First and last line"),
        Binding("end", "scroll_ends(1)", "First and last line"),
        Binding("m", "pick_contrast", "When measured: straight after, next time …"),
        Binding("r", "fit_again", "Rank anew"),
    ]
    document: reactive[Mapping[str, Any] | None] = reactive(None, always_update=True)
    """What is shown; None: nothing yet."""

    def __init__(self) -> None:
        super().__init__()
        self._questions: tuple[QuestionLine, ...] = ()
        self._question: QuestionLine | None = None
        self._contrast = "immediate"

    def compose_panels(self) -> ComposeResult:
        """Lay out the questions and the answer."""
        yield Listing(id="questions")
        yield Static("", id="asked")
        with VerticalScroll(id="ranking", can_focus=False):
            yield Static("", id="answer")

    def on_screen_resume(self) -> None:
        """Read which questions have data."""
        super().on_screen_resume()
        jobs = self.cuebook.jobs
        self.say("Reading …")
        self.run_job(lambda: QuestionsRead(jobs.read_questions()), "questions")

    def on_questions_read(self, message: QuestionsRead) -> None:
        """List the questions, what is being worked on first; open the one that was open."""
        message.stop()
        open_now = self._question
        self._questions = put_own_first(message.questions, self.shared)
        listing = self.query_one("#questions", Listing)
        listing.clear_options()
        listing.add_options([Option(Content(_describe_row(one))) for one in self._questions])
        if not self._questions:
            self._question = None
            self.query_one("#asked", Static).update("")
            self.query_one("#answer", Static).update(NOTHING)
            self.say("F3 logs.")
            return
        titles = [one.title for one in self._questions]
        kept = open_now is not None and open_now.title in titles
        listing.highlighted = titles.index(open_now.title) if open_now and kept else 0
        self.action_open()

    def action_move(self, where: str) -> None:
        """Move in the list of questions."""
        getattr(self.query_one("#questions", Listing), f"action_{where}")()
        self.say("Enter opens this question.")

    def on_option_list_option_selected(self, event: OptionList.OptionSelected) -> None:
        """Open the question that was pointed at."""
        self.query_one("#questions", Listing).highlighted = event.option_index
        self.action_open()

    def action_open(self) -> None:
        """Open the question under the cursor: the last ranking at once."""
        at = self.query_one("#questions", Listing).highlighted
        if at is None or at >= len(self._questions):
            return
        chosen = self._questions[at]
        question = replace(chosen, request=replace(chosen.request, contrast=self._contrast))
        self._question = question
        self.query_one("#asked", Static).update(
            Content(f"{question.title}; measured {CONTRASTS[self._contrast]} (M changes)")
        )
        self.say("Reading the last ranking …")
        jobs = self.cuebook.jobs
        self.run_job(
            lambda: RankingRead(question, jobs.read_stored_review(question.request)), "ranking"
        )

    def on_ranking_read(self, message: RankingRead) -> None:
        """Show the last ranking; rank anew if something was logged since."""
        message.stop()
        if message.question is not self._question:
            return
        stored = message.stored
        self.document = None if stored is None else stored.document
        if stored is None:
            self.query_one("#answer", Static).update("Not ranked yet; ranking now …")
        elif stored.is_current:
            self.say(f"As of {stored.n_uses} uses. PgUp, PgDn read on. R ranks anew.")
            return
        self.action_fit_again()
        if stored is not None:
            self.say(f"Outdated: as of {stored.n_uses} uses. Being brought up to date …")

    def action_fit_again(self) -> None:
        """Rank the open question anew in a process of its own."""
        question = self._question
        if question is None:
            self.say("There is no question to rank yet.")
            return
        self.say("Ranking …")
        jobs = self.cuebook.jobs
        self.run_job(lambda: RankingMade(question, jobs.fit(question.request)), "fit")

    def on_ranking_made(self, message: RankingMade) -> None:
        """Show a ranking that has just been made."""
        message.stop()
        if message.question is self._question:
            self.document = message.document
            self.say(f"As of now: {message.document['n_uses']} uses. PgUp, PgDn read on.")

    def action_pick_contrast(self) -> None:
        """Ask when it was measured."""

        def take(contrast: str | None) -> None:
            if contrast is not None:
                self._contrast = contrast
                self.action_open()

        choices = [Choice(slug, words, is_plain=True) for slug, words in CONTRASTS.items()]
        self.app.push_screen(PickBox("When measured?", choices), take)

    def action_scroll_answer(self, direction: int) -> None:
        """Read on or back in the answer."""
        panel = self.query_one("#ranking")
        panel.scroll_relative(y=direction * max(panel.size.height - 2, 1), animate=False)

    def action_scroll_ends(self, direction: int) -> None:
        """Go to the first or the last line of the answer."""
        panel = self.query_one("#ranking")
        (panel.scroll_home if direction < 0 else panel.scroll_end)(animate=False)

    def on_resize(self) -> None:
        """Draw the bars anew for the width there is."""
        if self.document is not None:
            self._draw(self.document)

    def watch_document(self, document: Mapping[str, Any] | None) -> None:
        """Show a ranking from its first line on."""
        if self.is_mounted and document is not None:
            self._draw(document)
            self.query_one("#ranking").scroll_home(animate=False)

    def _draw(self, document: Mapping[str, Any]) -> None:
        width = max(self.size.width - 4, 40)
        self.query_one("#answer", Static).update(describe_answer(document, width))


def put_own_first(questions: tuple[QuestionLine, ...], shared: Shared) -> tuple[QuestionLine, ...]:
    """Return the questions with those of the present task and measure at the top."""

    def judge(one: QuestionLine) -> int:
        is_task = one.request.task == shared.task
        return -2 * (is_task and one.request.metric == shared.metric) - is_task

    return tuple(sorted(questions, key=judge))


def _describe_row(question: QuestionLine) -> str:
    learners = "learner" if question.n_learners == 1 else "learners"
    return f"{question.title}  ({question.n_values} values, {question.n_learners} {learners})"
