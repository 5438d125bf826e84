"""Boxes over a screen that are read or answered with one key."""

from __future__ import annotations

from typing import ClassVar

from textual.app import App, ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Vertical, VerticalScroll
from textual.content import Content
from textual.screen import ModalScreen
from textual.widgets import Input, Static

SHARE, WIDEST, ROOM_BESIDE = 0.92, 96, 4
"""Of the screen's width, in cells, and what border and padding take; as in theme.tcss."""


def get_box_width(app: App[None]) -> int:
    """Return how many cells a line in a box has."""
    width = app.size.width
    is_full = app.has_class("narrow") or app.has_class("low")
    return max(min(width if is_full else int(width * SHARE), WIDEST) - ROOM_BESIDE, 20)


def make_field(name: str, value: str = "", placeholder: str = "") -> Input:
    """Return a field of one line whose cursor does not blink."""
    field = Input(value=value, placeholder=placeholder, id=name, compact=True)
    field.cursor_blink = False
    return field


class ReadBox(ModalScreen[None]):
    """Words that need reading: scrolls, closes with Enter or Escape."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("escape,enter", "close_box", "Close"),
    ]

    def __init__(self, title: str, lines: tuple[str, ...]) -> None:
        super().__init__(classes="modal")
        self._title = title
        self._lines = lines

    def compose(self) -> ComposeResult:
        """Lay out title, words and how to close."""
        with Vertical():
            yield Static(Content.styled(self._title, "bold"))
            with VerticalScroll(id="words"):
                yield Static(Content("\n".join(self._lines)))
            yield Static("Up and Down scroll.  Enter or Escape closes.", classes="foot")

    def on_mount(self) -> None:
        """Let the keys scroll the words."""
        self.query_one("#words").focus()

    def action_close_box(self) -> None:
        """Close the box."""
        self.dismiss(None)


class WordsBox(ModalScreen[str | None]):
    """A line of somebody's own words."""

    BINDINGS: ClassVar[list[BindingType]] = [Binding("escape", "give_up", "Close")]

    def __init__(self, title: str, value: str = "") -> None:
        super().__init__(classes="modal")
        self._title = title
        self._value = value

    def compose(self) -> ComposeResult:
        """Lay out title, field and keys."""
        with Vertical():
            yield Static(Content.styled(self._title, "bold"))
            yield make_field("own_words", self._value)
            yield Static("Enter keeps the words.  Escape closes.", classes="foot")

    def on_input_submitted(self, event: Input.Submitted) -> None:
        """Hand the words on."""
        self.dismiss(event.value.strip())

    def action_give_up(self) -> None:
        """Close without keeping."""
        self.dismiss(None)


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
            "May results be used to rank cues? Ask, then press:\n"
            "Y      yes, said by the person\n"
            "G      yes, a parent or guardian said so and the child agreed\n"
            "N      no: results stay on their own page\n"
            "Enter  not asked, which counts as no"
        )
        with Vertical():
            yield Static(Content.styled(f"New learner: {self._code}", "bold"))
            yield Static(Content(words))

    def action_answer(self, answer: str, given_by: str, assent: str) -> None:
        """Hand the answer on."""
        self.dismiss((answer, given_by, assent))

    def action_leave_open(self) -> None:
        """Leave the question open."""
        self.dismiss(None)
