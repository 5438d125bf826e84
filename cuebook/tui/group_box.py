"""Make a group: its code, known learners, and some new ones."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Vertical
from textual.content import Content
from textual.screen import ModalScreen
from textual.widgets import Input, Static
from textual.widgets.option_list import Option

from cuebook.errors import CuebookError
from cuebook.jobs.people import check_code
from cuebook.tui.boxes import make_field
from cuebook.tui.listing import Listing
from cuebook.tui.pick_box import MOST_ROWS


@dataclass(frozen=True, slots=True)
class NewGroup:
    """A group as it is asked for."""

    code: str
    members: tuple[str, ...]
    n_new: int
    """How many learners are made with it, each under a code made by the program."""


class GroupBox(ModalScreen[NewGroup | None]):
    """Ask for a group's code first; then Enter puts learners in and takes them out."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("escape", "give_up", "Close"),
        Binding("up", "move('cursor_up')", "Up", priority=True),
        Binding("down", "move('cursor_down')", "Down", priority=True),
        Binding("f7", "more(1)", "One new learner more", priority=True),
        Binding("f8", "more(-1)", "One new learner fewer", priority=True),
        Binding("f9", "make", "Make the group", priority=True),
    ]

    def __init__(self, learners: Sequence[str]) -> None:
        super().__init__(classes="modal")
        self._learners = tuple(learners)[:MOST_ROWS]
        self._n_known = len(learners)
        self._chosen: set[str] = set()
        self._n_new = 0

    def compose(self) -> ComposeResult:
        """Lay out the field, the learners and the keys."""
        with Vertical():
            yield Static(Content.styled("New group", "bold"))
            yield Static("Code of small letters, such as monday-morning; no names:")
            yield make_field("group_code")
            yield Static("", id="fault")
            yield Listing(id="choices")
            yield Static("", id="how_many")
            yield Static(
                "Up, Down, Enter: in or out.  F7 a new learner more, F8 fewer.\n"
                "F9 makes the group.  Escape closes.",
                classes="foot",
            )

    def on_mount(self) -> None:
        """List everybody."""
        self.query_one(Listing).add_options(
            [Option(Content(f"[ ] {code}")) for code in self._learners]
        )
        self._count()

    def on_input_submitted(self, event: Input.Submitted) -> None:
        """Put the learner under the cursor in, or take them out."""
        event.stop()
        listing = self.query_one(Listing)
        if listing.highlighted is None:
            return
        code = self._learners[listing.highlighted]
        self._chosen ^= {code}
        sign = "x" if code in self._chosen else " "
        listing.replace_option_prompt_at_index(listing.highlighted, Content(f"[{sign}] {code}"))
        self._count()

    def action_move(self, where: str) -> None:
        """Move the cursor of the list."""
        getattr(self.query_one(Listing), f"action_{where}")()

    def action_more(self, step: int) -> None:
        """Make one more or one fewer new learner with the group."""
        self._n_new = max(self._n_new + step, 0)
        self._count()

    def action_make(self) -> None:
        """Hand the group on, or say beside the field what is missing."""
        try:
            code = check_code(self.query_one("#group_code", Input).value.strip())
        except CuebookError as error:
            self.query_one("#fault", Static).update(Content(f"! {error}"))
            return
        if not self._chosen and not self._n_new:
            self.query_one("#fault", Static).update("! Nobody is in it yet.")
            return
        members = tuple(code for code in self._learners if code in self._chosen)
        self.dismiss(NewGroup(code, members, self._n_new))

    def action_give_up(self) -> None:
        """Close without making one."""
        self.dismiss(None)

    def _count(self) -> None:
        n_listed = len(self._learners)
        rest = f"  {n_listed} of {self._n_known:,} shown." if n_listed < self._n_known else ""
        self.query_one("#how_many", Static).update(
            Content(f"In the group: {len(self._chosen)} known, {self._n_new} new.{rest}")
        )
