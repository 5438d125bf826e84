"""What shifted: plain sentences, then cues with their intervals; fitted off the screen."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, ClassVar

from rich.text import Text
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import VerticalScroll
from textual.widgets import OptionList, Static
from textual.widgets.option_list import Option

from cuebook.jobs.review_stored import QuestionLine, read_questions, read_stored_review
from cuebook.jobs.review_words import describe_rest, format_chance, format_interval, format_number
from cuebook.tui.bars import draw_bar, make_scale
from cuebook.tui.frame import FramedScreen
from cuebook.tui.messages import QuestionsRead, RankingMade, RankingRead
from cuebook.tui.workers import attempt, fit_apart


class ReviewScreen(FramedScreen):
    """Which cues shifted a measure, with what is not known said first."""

    TITLE_WORD = "What shifted"
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("escape", "to_questions", "Questions", show=False),
        Binding("r", "fit_again", "Rank anew"),
        Binding("f5", "app.pick_who", "For whom"),
    ]

    def __init__(self) -> None:
        super().__init__()
        self._questions: tuple[QuestionLine, ...] = ()
        self._question: QuestionLine | None = None

    def compose_panels(self) -> ComposeResult:
        """Lay out the questions and the answer."""
        yield OptionList(id="questions")
        with VerticalScroll(id="ranking"):
            yield Static("", id="answer")

    def on_screen_resume(self) -> None:
        """Read which questions have data."""
        super().on_screen_resume()
        self.query_one("#questions", OptionList).focus()
        location = self.shared.location
        self.run_worker(
            lambda: attempt(lambda: QuestionsRead(read_questions(location)), self.post_message),
            thread=True,
            exclusive=True,
            group="questions",
            exit_on_error=False,
        )

    def on_questions_read(self, message: QuestionsRead) -> None:
        """List the questions; open the first."""
        message.stop()
        self._questions = self._put_own_first(message.questions)
        listing = self.query_one("#questions", OptionList)
        kept = listing.highlighted
        listing.clear_options()
        for one in self._questions:
            listing.add_option(Option(Text(f"{one.title}  ({_count_values(one)})")))
        if not message.questions:
            self.query_one("#answer", Static).update(
                "Nothing is measured yet. Log values before and after a cue, or import recordings."
            )
            self.say("F3 logs.")
            return
        listing.highlighted = min(kept or 0, len(message.questions) - 1)
        self.say("Enter opens a question. R ranks anew.")

    def _put_own_first(self, questions: tuple[QuestionLine, ...]) -> tuple[QuestionLine, ...]:
        """Put what is being worked on at the top."""
        task, metric = self.shared.task, self.shared.metric
        return tuple(
            sorted(
                questions,
                key=lambda one: (
                    -2 * (one.request.task == task and one.request.metric == metric)
                    - (one.request.task == task)
                ),
            )
        )

    def on_option_list_option_selected(self, event: OptionList.OptionSelected) -> None:
        """Open a question: the last ranking at once."""
        self._open(self._questions[event.option_index])

    def _open(self, question: QuestionLine) -> None:
        self._question = question
        location = self.shared.location
        self.say("Reading the last ranking …")
        self.run_worker(
            lambda: attempt(
                lambda: RankingRead(question, read_stored_review(location, question.request)),
                self.post_message,
            ),
            thread=True,
            exclusive=True,
            group="ranking",
            exit_on_error=False,
        )

    def on_ranking_read(self, message: RankingRead) -> None:
        """Show the last ranking; rank anew if something was logged since."""
        message.stop()
        if message.question is not self._question:
            return
        if message.stored is not None:
            state = "" if message.stored.is_current else ", being brought up to date"
            self._show(message.stored.document)
            self.say(f"As of {message.stored.n_uses} uses{state}.")
            if message.stored.is_current:
                return
        self.action_fit_again()

    def action_fit_again(self) -> None:
        """Rank the open question anew in a process of its own."""
        question, location = self._question, self.shared.location
        if question is None:
            self.say("Enter opens a question first.")
            return
        self.say("Ranking …")
        self.run_worker(
            lambda: attempt(
                lambda: RankingMade(question, fit_apart(location, question.request)),
                self.post_message,
            ),
            thread=True,
            exclusive=True,
            group="fit",
            exit_on_error=False,
        )

    def on_ranking_made(self, message: RankingMade) -> None:
        """Show a ranking that has just been made."""
        message.stop()
        if message.question is self._question:
            self._show(message.document)
            self.say(f"As of now: {message.document['n_uses']} uses with a change.")

    def action_to_questions(self) -> None:
        """Go back to the questions."""
        self.query_one("#questions", OptionList).focus()

    def _show(self, document: Mapping[str, Any]) -> None:
        width = max(self.size.width - 4, 40)
        self.query_one("#answer", Static).update(describe_answer(document, width))
        self.query_one("#ranking", VerticalScroll).scroll_home(animate=False)


def _count_values(question: QuestionLine) -> str:
    learners = "learner" if question.n_learners == 1 else "learners"
    return f"{question.n_values} values, {question.n_learners} {learners}"


def describe_answer(document: Mapping[str, Any], width: int) -> Text:
    """Return a review as text: sentences, the line to beat, cues with bars, the rest."""
    answer = Text()
    for line in document.get("opening") or ():
        answer.append(f"{line}\n", style="bold")
    cues = document["cues"]
    if cues:
        answer.append(_describe_line_to_beat(document))
        scale = make_scale(cues, min(width - 8, 60))
        for cue in cues:
            answer.append(f"{cue.get('sign') or '?':<4}{cue['cue']}: {cue['words']}\n", "bold")
            answer.append(f"    {draw_bar(cue, scale, document.get('worthwhile'))}\n")
            answer.append(
                f"    {format_number(cue['effect'])} ({format_interval(cue)}), "
                f"chance {format_chance(cue['p_better'])}; {cue['uses']} uses, "
                f"{cue['learners']} learners; {cue.get('grade_words') or ''}\n"
            )
    for line in describe_rest(document):
        answer.append(f"{line}\n")
    return answer


def _describe_line_to_beat(document: Mapping[str, Any]) -> str:
    alone = document.get("practice_alone")
    if not alone:
        return "Line: the mean of the cues; practice alone is not known well enough.\n"
    return (
        f"Line: practice alone, {format_number(alone['effect'])} ({format_interval(alone)}). "
        "Dots: too small to matter.\n"
    )
