"""Find: type the problem, read fitting cues, caution first."""

from __future__ import annotations

from typing import ClassVar

from rich.text import Text
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.widgets import Input, OptionList, Static
from textual.widgets.option_list import Option

from cuebook.jobs.find_cue import FoundCues
from cuebook.jobs.find_in_library import find_in_library
from cuebook.library.lookup import Hit, Request
from cuebook.tui.frame import FramedScreen
from cuebook.tui.messages import CuesFound
from cuebook.tui.workers import attempt
from cuebook.vocabulary import load_vocabulary

MOST_CUES = 20


class FindScreen(FramedScreen):
    """Cues for a problem in one's own words."""

    TITLE_WORD = "Find"
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("down", "to_list", "To the cues", show=False),
        Binding("escape", "to_field", "Back to the words", show=False),
        Binding("f5", "app.pick_who", "For whom"),
    ]

    def __init__(self) -> None:
        super().__init__()
        self._found: FoundCues | None = None

    def compose_panels(self) -> ComposeResult:
        """Lay out field, understanding, cues and detail."""
        field = Input(placeholder="What do you see? In your own words.", id="problem")
        field.cursor_blink = False
        yield field
        yield Static("", id="understood", classes="understood")
        yield OptionList(id="cues")
        yield Static("", id="detail", classes="detail")

    def on_mount(self) -> None:
        """Take the keys and say what to do."""
        self.query_one("#problem", Input).focus()
        self.say("Type the problem. Down goes to the cues. F5: for whom.")

    def on_input_changed(self, event: Input.Changed) -> None:
        """Look up what is typed so far, off the screen's thread."""
        text = event.value.strip()
        if not text:
            self._show_nothing()
            return
        self._look_up(text)

    def on_input_submitted(self) -> None:
        """Go to the cues."""
        self.action_to_list()

    def action_to_list(self) -> None:
        """Move to the list of cues."""
        listing = self.query_one("#cues", OptionList)
        if listing.option_count and self._found is not None and self._found.hits:
            listing.focus()
            if listing.highlighted is None:
                listing.highlighted = 0

    def action_to_field(self) -> None:
        """Go back to the words."""
        self.query_one("#problem", Input).focus()

    def look_up_again(self) -> None:
        """Look up the same words for somebody else."""
        text = self.query_one("#problem", Input).value.strip()
        if text:
            self._look_up(text)

    def _look_up(self, text: str) -> None:
        shared = self.cuebook.shared
        who = shared.who

        def job() -> CuesFound:
            found = find_in_library(
                shared.location,
                text,
                learner=who.code if who is not None and not who.is_group else None,
                group=who.code if who is not None and who.is_group else None,
                request=Request(limit=MOST_CUES),
            )
            return CuesFound(text, found)

        self.run_worker(
            lambda: attempt(job, self.post_message),
            thread=True,
            exclusive=True,
            group="look-up",
            exit_on_error=False,
        )

    def on_cues_found(self, message: CuesFound) -> None:
        """Show what has been found, unless the words have changed since."""
        message.stop()
        if message.text != self.query_one("#problem", Input).value.strip():
            return
        self._found = message.found
        listing = self.query_one("#cues", OptionList)
        listing.clear_options()
        if message.found.stop is not None:
            self.query_one("#understood", Static).update(Text(message.found.stop.message))
            self.query_one("#detail", Static).update("")
            self.say("No cue is shown for this.")
            return
        self.query_one("#understood", Static).update(_describe_understood(message.found))
        for hit in message.found.hits:
            listing.add_option(Option(_describe_row(hit)))
        self.query_one("#detail", Static).update("")
        if message.found.hits:
            self.say(f"{len(message.found.hits)} cues. Down, then Enter takes one into Log.")
        else:
            self.say(message.found.advice or "No cue fits. Say more: what moves, doing what?")

    def on_option_list_option_highlighted(self, event: OptionList.OptionHighlighted) -> None:
        """Show the words of a cue, large, with what they carry and leave out."""
        if self._found is not None and event.option_index < len(self._found.hits):
            hit = self._found.hits[event.option_index]
            self.query_one("#detail", Static).update(_describe_detail(hit))

    def on_option_list_option_selected(self, event: OptionList.OptionSelected) -> None:
        """Take a cue into the log."""
        if self._found is None or event.option_index >= len(self._found.hits):
            return
        hit = self._found.hits[event.option_index]
        task = self._guess_task(hit)
        self.cuebook.take_cue(hit.cue.code, hit.text, task, hit.cue.target_metric)

    def _guess_task(self, hit: Hit) -> str | None:
        understood = self._found.understanding if self._found is not None else None
        tasks = [task.slug for task in understood.tasks] if understood is not None else []
        for task in tasks:
            if task in hit.cue.tasks:
                return task
        return hit.cue.tasks[0] if hit.cue.tasks else None

    def _show_nothing(self) -> None:
        self._found = None
        self.query_one("#cues", OptionList).clear_options()
        self.query_one("#understood", Static).update("")
        self.query_one("#detail", Static).update("")
        self.say("Type the problem. Down goes to the cues. F5: for whom.")


def _describe_understood(found: FoundCues) -> Text:
    vocabulary = load_vocabulary()
    line = Text()
    for caution in found.cautions:
        line.append(f"! {caution}\n")
    if found.understanding is None:
        return line
    features = [vocabulary.label("feature", one.slug) for one in found.understanding.features[:4]]
    tasks = [vocabulary.label("task", one.slug) for one in found.understanding.tasks[:2]]
    line.append("Understood: " + (", ".join([*features, *tasks]) or "nothing yet"))
    return line


def _describe_row(hit: Hit) -> Text:
    kind = load_vocabulary().screen_word(hit.cue.kind)
    row = Text()
    for caution in hit.cautions[:1]:
        row.append(f"! {caution}\n")
    row.append(f"{hit.text}", style="bold")
    row.append(f"  ({kind.lower()})")
    return row


def _describe_detail(hit: Hit) -> Text:
    detail = Text()
    for caution in hit.cautions:
        detail.append(f"! {caution}\n")
    detail.append(f"Say: {hit.text}\n", style="bold")
    detail.append(f"Carries: {hit.cue.captures}\n")
    detail.append(f"Leaves out: {hit.cue.leaves_out}\n")
    detail.append(f"Why: {'; '.join(hit.why)}")
    return detail
