"""Pick one of many by typing the first letters; the cursor keys move in the list meanwhile."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import ClassVar

from textual import events
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Vertical
from textual.content import Content
from textual.screen import ModalScreen
from textual.widgets import Input, OptionList, Static
from textual.widgets.option_list import Option

from cuebook.tui.boxes import make_field
from cuebook.tui.listing import Listing

MOST_ROWS = 200


@dataclass(frozen=True, slots=True)
class Choice:
    """One row of a pick list."""

    slug: str
    words: str
    """What is shown beside the slug, or instead of it if ``is_plain``."""
    is_plain: bool = False

    @property
    def row(self) -> str:
        """Return the row as it is read."""
        return self.words if self.is_plain else f"{self.slug}  {self.words}".rstrip()


def narrow_choices(choices: Sequence[Choice], typed: str) -> tuple[Choice, ...]:
    """Return what is typed in full, then what begins with it, then what holds it."""
    wanted = typed.strip().lower()

    def judge(one: Choice) -> int:
        row = one.row.lower()
        is_whole = wanted in {row, one.slug.lower(), one.words.lower()}
        return 0 if is_whole else 1 if row.startswith(wanted) else 2

    fitting = [one for one in choices if wanted in one.row.lower()]
    return tuple(sorted(fitting, key=judge) if wanted else fitting)


class PickBox(ModalScreen[str | None]):
    """Gives the slug of what was picked, or the name of an extra key."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("escape", "give_up", "Close"),
        Binding("up", "move('cursor_up')", "Up", priority=True),
        Binding("down", "move('cursor_down')", "Down", priority=True),
        Binding("pageup", "move('page_up')", "Page up", priority=True),
        Binding("pagedown", "move('page_down')", "Page down", priority=True),
    ]

    def __init__(
        self, title: str, choices: Sequence[Choice], extras: Mapping[str, str] | None = None
    ) -> None:
        super().__init__(classes="modal")
        self._title = title
        self._choices = tuple(choices)
        self._extras = dict(extras or {})
        self._shown: tuple[Choice, ...] = ()

    def compose(self) -> ComposeResult:
        """Lay out the field, the list and the keys."""
        adds = "".join(f"  {key.upper()} {words}." for key, words in self._extras.items())
        with Vertical():
            yield Static(Content.styled(self._title, "bold"))
            yield make_field("typed", placeholder="type the first letters")
            yield Listing(id="choices")
            yield Static("", id="how_many")
            yield Static(Content(f"Enter picks.{adds}  Escape closes."), classes="foot")

    def on_mount(self) -> None:
        """Show everything."""
        self._refill("")

    def on_input_changed(self, event: Input.Changed) -> None:
        """Narrow the list to what is typed."""
        self._refill(event.value)

    def on_input_submitted(self) -> None:
        """Pick the row under the cursor."""
        at = self.query_one(Listing).highlighted
        if at is not None and at < len(self._shown):
            self.dismiss(self._shown[at].slug)

    def on_option_list_option_selected(self, event: OptionList.OptionSelected) -> None:
        """Pick what was pointed at."""
        self.dismiss(self._shown[event.option_index].slug)

    def on_key(self, event: events.Key) -> None:
        """Hand an extra key on."""
        if event.key in self._extras:
            event.stop()
            self.dismiss(event.key)

    def action_move(self, where: str) -> None:
        """Move the cursor of the list."""
        getattr(self.query_one(Listing), f"action_{where}")()

    def action_give_up(self) -> None:
        """Close without picking."""
        self.dismiss(None)

    def _refill(self, typed: str) -> None:
        fitting = narrow_choices(self._choices, typed)
        self._shown = fitting[:MOST_ROWS]
        listing = self.query_one(Listing)
        listing.clear_options()
        listing.add_options([Option(Content(one.row)) for one in self._shown])
        listing.highlighted = 0 if self._shown else None
        told = ""
        if not fitting:
            told = "None of that name."
        elif len(fitting) > MOST_ROWS:
            told = f"{MOST_ROWS} of {len(fitting):,} shown; keep typing."
        self.query_one("#how_many", Static).update(Content(told))
