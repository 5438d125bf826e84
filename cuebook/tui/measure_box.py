"""Boxes that take the numbers of a measure: of one learner, or of a group's members."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Vertical
from textual.content import Content
from textual.screen import ModalScreen
from textual.widgets import Input, Static
from textual.widgets.option_list import Option

from cuebook.errors import CuebookError
from cuebook.jobs.log_entries import Values
from cuebook.metrics.registry import load_registry
from cuebook.tui.boxes import make_field
from cuebook.tui.listing import Listing
from cuebook.tui.numbers import EXAMPLE, describe_metric, read_numbers
from cuebook.tui.pick_box import Choice, PickBox


@dataclass(frozen=True, slots=True)
class Measures:
    """What was typed."""

    metric: str | None
    """What the numbers are of, for the next box; None: still not said."""
    values: Values = field(default_factory=dict)
    """Of one learner; empty: not observed."""
    by_member: Mapping[str, Values] = field(default_factory=dict)
    """Of the members of a group that were measured."""


def list_metric_choices() -> list[Choice]:
    """Return the measures that can be picked."""
    return [
        Choice(
            entry.metric,
            f"{entry.name}{f', {entry.unit}' if entry.unit else ''} ({entry.metric})",
            is_plain=True,
        )
        for entry in load_registry().entries
    ]


class _NumbersBox(ModalScreen[Measures | None]):
    """What the two boxes share: a title, the measure, a field, a fault beside it."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("escape", "give_up", "Close"),
        Binding("f6", "pick_metric", "Measure", priority=True),
    ]

    def __init__(self, title: str, metric: str | None) -> None:
        super().__init__(classes="modal")
        self._title = title
        self._metric = metric

    def action_pick_metric(self) -> None:
        """Ask what the numbers are of."""

        def take(metric: str | None) -> None:
            if metric is not None:
                self._metric = metric
                self.query_one("#metric", Static).update(Content(describe_metric(metric)))

        self.app.push_screen(PickBox("Which measure?", list_metric_choices()), take)

    def action_give_up(self) -> None:
        """Close without storing."""
        self.dismiss(None)

    def _say_fault(self, words: str) -> None:
        self.query_one("#fault", Static).update(Content(f"! {words}" if words else ""))


class MeasureBox(_NumbersBox):
    """Numbers of one learner; none, said twice, is the answer "not observed"."""

    def __init__(self, title: str, metric: str | None) -> None:
        super().__init__(title, metric)
        self._is_asked_again = False

    def compose(self) -> ComposeResult:
        """Lay out title, measure, field and keys."""
        with Vertical():
            yield Static(Content.styled(self._title, "bold"))
            yield Static(Content(describe_metric(self._metric)), id="metric")
            yield Static(Content(f"Numbers, one an attempt, in order, such as {EXAMPLE}:"))
            yield make_field("numbers")
            yield Static("", id="fault")
            yield Static("Enter stores.  Escape closes without storing.", classes="foot")

    def on_input_submitted(self, event: Input.Submitted) -> None:
        """Hand the numbers on, or say what is wrong beside the field."""
        if not event.value.strip():
            if self._is_asked_again:
                self.dismiss(Measures(self._metric))
                return
            self._is_asked_again = True
            self._say_fault("No numbers. Enter once more notes: not observed.")
            return
        try:
            values = read_numbers(event.value, self._metric)
        except CuebookError as error:
            self._say_fault(str(error))
            return
        self.dismiss(Measures(next(iter(values)), values))


class MembersBox(_NumbersBox):
    """Numbers of some members of a group, one after the other."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("up", "move('cursor_up')", "Up", priority=True),
        Binding("down", "move('cursor_down')", "Down", priority=True),
        Binding("f9", "store", "Store", priority=True),
    ]

    def __init__(
        self, title: str, metric: str | None, members: tuple[str, ...], absent: frozenset[str]
    ) -> None:
        super().__init__(title, metric)
        self._members = members
        self._absent = absent
        self._texts: dict[str, str] = {}
        self._values: dict[str, Values] = {}

    def compose(self) -> ComposeResult:
        """Lay out title, measure, members, field and keys."""
        with Vertical():
            yield Static(Content.styled(self._title, "bold"))
            yield Static(Content(describe_metric(self._metric)), id="metric")
            yield Listing(id="choices")
            yield Static("", id="whose")
            yield make_field("numbers")
            yield Static("", id="fault")
            yield Static(
                "Enter keeps the numbers and goes on.  Up, Down: another learner.\n"
                "F9 stores; whoever has no numbers is not observed.  Escape closes.",
                classes="foot",
            )

    def on_mount(self) -> None:
        """List the members and begin with the first."""
        listing = self.query_one(Listing)
        listing.add_options([Option(Content(self._describe(code))) for code in self._members])
        listing.highlighted = 0

    def on_option_list_option_highlighted(self) -> None:
        """Take up whoever is under the cursor."""
        code = self._code
        field_ = self.query_one("#numbers", Input)
        field_.value = self._texts.get(code, "")
        field_.cursor_position = len(field_.value)
        self.query_one("#whose", Static).update(
            Content(f"Numbers of {code}, one an attempt, such as {EXAMPLE}:")
        )

    def on_input_submitted(self, event: Input.Submitted) -> None:
        """Keep the numbers and go on to the next; after the last, store."""
        event.stop()
        if not self._keep():
            return
        listing = self.query_one(Listing)
        if listing.highlighted == len(self._members) - 1:
            self._finish()
        else:
            listing.action_cursor_down()

    def action_move(self, where: str) -> None:
        """Keep the numbers and go to another member."""
        if self._keep():
            getattr(self.query_one(Listing), f"action_{where}")()

    def action_store(self) -> None:
        """Keep the numbers and hand everything on."""
        if self._keep():
            self._finish()

    @property
    def _code(self) -> str:
        return self._members[self.query_one(Listing).highlighted or 0]

    def _keep(self) -> bool:
        """Keep what is typed for whoever is under the cursor; say what is wrong with it."""
        code, text = self._code, self.query_one("#numbers", Input).value.strip()
        self._texts[code] = text
        self._values.pop(code, None)
        if text:
            try:
                self._values[code] = read_numbers(text, self._metric)
            except CuebookError as error:
                self._say_fault(str(error))
                return False
            if self._metric is None:
                self._metric = next(iter(self._values[code]))
                self.query_one("#metric", Static).update(Content(describe_metric(self._metric)))
        self._say_fault("")
        self.query_one(Listing).replace_option_prompt_at_index(
            self._members.index(code), Content(self._describe(code))
        )
        return True

    def _finish(self) -> None:
        if not self._values:
            self._say_fault("No numbers of anybody yet. Escape closes without storing.")
            return
        self.dismiss(Measures(self._metric, by_member=self._values))

    def _describe(self, code: str) -> str:
        shown = self._texts.get(code) or ("absent" if code in self._absent else "not observed")
        return f"{code}: {shown}"
