"""Boxes over a screen: pick somebody, read an error, read the keys."""

from __future__ import annotations

from typing import ClassVar

from rich.text import Text
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Vertical, VerticalScroll
from textual.screen import ModalScreen
from textual.widgets import Input, OptionList, Static
from textual.widgets.option_list import Option

from cuebook.jobs.people import PersonLine

MOST_ROWS = 200


class ReadBox(ModalScreen[None]):
    """Words that need reading: scrolls, closes with Enter or Escape."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("escape,enter", "dismiss_box", "Close"),
    ]

    def __init__(self, title: str, lines: tuple[str, ...]) -> None:
        super().__init__(classes="modal")
        self._title = title
        self._lines = lines

    def compose(self) -> ComposeResult:
        """Lay out title, words and how to close."""
        with Vertical():
            yield Static(Text(self._title, style="bold"))
            with VerticalScroll():
                yield Static(Text("\n".join(self._lines)))
            yield Static(Text("Enter or Escape closes."))

    def action_dismiss_box(self) -> None:
        """Close the box."""
        self.dismiss(None)


class PickBox(ModalScreen[PersonLine | None]):
    """Pick a learner or group by the first letters of the code; or add a learner."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("escape", "give_up", "Close"),
        Binding("down", "to_list", "List", show=False),
        Binding("f7", "add", "New learner"),
    ]

    def __init__(self, people: tuple[PersonLine, ...], of_what: str = "code") -> None:
        super().__init__(classes="modal")
        self._people = people
        self._of_what = of_what
        self._shown: list[PersonLine] = []

    def compose(self) -> ComposeResult:
        """Lay out the field, the list and the keys."""
        with Vertical():
            asked = "For whom?" if self._of_what == "code" else "Which task?"
            yield Static(Text(f"{asked} Type the first letters.", style="bold"))
            field = Input(placeholder=self._of_what, id="code")
            field.cursor_blink = False
            yield field
            yield OptionList(id="people")
            adds = "  F7 adds a new learner." if self._of_what == "code" else ""
            yield Static(Text(f"Enter picks.{adds}  Escape closes."))

    def on_mount(self) -> None:
        """Show everybody and take the keys."""
        self._refill("")
        self.query_one("#code", Input).focus()

    def on_input_changed(self, event: Input.Changed) -> None:
        """Narrow the list to what is typed."""
        self._refill(event.value.strip().lower())

    def on_input_submitted(self) -> None:
        """Pick the first in the list."""
        if self._shown:
            self.dismiss(self._shown[0])

    def on_option_list_option_selected(self, event: OptionList.OptionSelected) -> None:
        """Pick the one under the cursor."""
        self.dismiss(self._shown[event.option_index])

    def action_to_list(self) -> None:
        """Move from the field into the list."""
        self.query_one("#people", OptionList).focus()

    def action_give_up(self) -> None:
        """Close without picking."""
        self.dismiss(None)

    def action_add(self) -> None:
        """Ask for a new learner with a code made by the program."""
        if self._of_what == "code":
            self.dismiss(PersonLine("", is_group=False, label="new", note=""))

    def _refill(self, typed: str) -> None:
        self._shown = [one for one in self._people if one.code.startswith(typed)][:MOST_ROWS]
        listing = self.query_one("#people", OptionList)
        listing.clear_options()
        for one in self._shown:
            kind = "group, " if one.is_group else ""
            listing.add_option(Option(Text(f"{one.code}  {kind}{one.note}")))
        if not self._shown:
            listing.add_option(Option(Text("none of that name"), disabled=True))


class ConsentBox(ModalScreen[tuple[str, str, str] | None]):
    """Ask once whether results may be used in rankings; no answer counts as no."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("y", "answer('yes', 'self', 'not_applicable')", "Yes"),
        Binding("g", "answer('yes', 'parent_guardian', 'yes')", "Guardian and child"),
        Binding("n", "answer('no', 'self', 'not_applicable')", "No"),
        Binding("enter,escape", "leave_open", "Not asked"),
    ]

    def __init__(self, code: str) -> None:
        super().__init__(classes="modal")
        self._code = code

    def compose(self) -> ComposeResult:
        """Lay out the question and its keys."""
        words = (
            f"New learner: {self._code}\n"
            "May results be used to rank cues? Asked and answered today:\n"
            "Y      yes, said by the person\n"
            "G      yes, a parent or guardian said so and the child agreed\n"
            "N      no: results stay on their own page\n"
            "Enter  not asked, which counts as no"
        )
        with Vertical():
            yield Static(Text(words))

    def action_answer(self, answer: str, given_by: str, assent: str) -> None:
        """Hand the answer on."""
        self.dismiss((answer, given_by, assent))

    def action_leave_open(self) -> None:
        """Leave the question open."""
        self.dismiss(None)
