"""Boxes that take an entry: numbers of a measure, and what happened in practice."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import ClassVar

from rich.text import Text
from textual import events
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Vertical
from textual.screen import ModalScreen
from textual.widgets import Input, Static

from cuebook.errors import CuebookError, UsageError
from cuebook.jobs.log_entries import LearnerNote
from cuebook.jobs.typed_values import parse_values
from cuebook.vocabulary import load_vocabulary

MEMBER_KEYS = "abcdefghijklmnop"
_OBSERVED_KEYS = {
    "c": "clear",
    "s": "some",
    "n": "none",
    "w": "worse",
    "m": "mixed",
    "v": "not_seen",
}


@dataclass(frozen=True, slots=True)
class Numbers:
    """What was typed into a measure."""

    values: Mapping[str, tuple[float, ...]]


def read_numbers(text: str) -> Numbers:
    """Read ``metric 41 43 42`` (several metrics parted by ``;``).

    Raises
    ------
    UsageError : no metric, or something that is not a number.
    """
    pairs = []
    for part in text.split(";"):
        words = part.replace(",", " ").replace("=", " ").split()
        if not words:
            continue
        if len(words) < 2:
            raise UsageError(f"'{part.strip()}' has no numbers.", "Write: step_length_cm 41 43 42")
        pairs.append(f"{words[0]}={','.join(words[1:])}")
    return Numbers(parse_values(tuple(pairs), "Numbers"))


class MeasureBox(ModalScreen[Numbers | None]):
    """Numbers of one measure; empty is allowed: not observed is an answer."""

    BINDINGS: ClassVar[list[BindingType]] = [Binding("escape", "give_up", "Close")]

    def __init__(self, title: str, metric: str | None) -> None:
        super().__init__(classes="modal")
        self._title = title
        self._metric = metric

    def compose(self) -> ComposeResult:
        """Lay out title, field and keys."""
        with Vertical():
            yield Static(Text(self._title, style="bold"))
            yield Static("Measure and numbers, one an attempt, in order:")
            field = Input(value=f"{self._metric} " if self._metric else "", id="numbers")
            field.cursor_blink = False
            yield field
            yield Static("", id="fault")
            yield Static(Text("Example: step_length_cm 41 43 42.  Enter stores.  Escape closes."))

    def on_mount(self) -> None:
        """Take the keys at the end of what stands there."""
        field = self.query_one("#numbers", Input)
        field.focus()
        field.cursor_position = len(field.value)

    def on_input_submitted(self, event: Input.Submitted) -> None:
        """Hand the numbers on, or say what is wrong beside the field."""
        text = event.value.strip()
        if not text or text == (self._metric or ""):
            self.dismiss(Numbers({}))
            return
        try:
            numbers = read_numbers(text)
        except CuebookError as error:
            self.query_one("#fault", Static).update(Text(f"! {error}"))
            return
        self.dismiss(numbers)

    def action_give_up(self) -> None:
        """Close without storing."""
        self.dismiss(None)


@dataclass(frozen=True, slots=True)
class Practised:
    """What happened in practice."""

    note: LearnerNote
    except_codes: tuple[str, ...] = ()
    absent_codes: tuple[str, ...] = ()


class PracticeBox(ModalScreen[Practised | None]):
    """What happened in practice, by single keys; nothing of it has to be said."""

    def __init__(self, title: str, members: tuple[str, ...], *, has_cue: bool) -> None:
        super().__init__(classes="modal")
        self._title = title
        self._members = members[: len(MEMBER_KEYS)]
        self._has_cue = has_cue
        self._note = LearnerNote()
        self._marks: dict[str, str] = {}
        self._digits = ""

    def compose(self) -> ComposeResult:
        """Lay out title, answers and keys."""
        with Vertical():
            yield Static(Text(self._title, style="bold"))
            yield Static("", id="answers")

    def on_mount(self) -> None:
        """Show what can be said."""
        self._refresh_answers()

    def on_key(self, event: events.Key) -> None:
        """Take one answer a key."""
        event.stop()
        key = event.key
        if key == "escape":
            self.dismiss(None)
        elif key == "enter":
            self.dismiss(self._finish())
        elif event.character and event.character.isdigit():
            self._digits = (self._digits + event.character)[-2:]
            self._note = replace(self._note, said=int(self._digits))
        elif key == "backspace":
            self._digits = ""
            self._note = replace(self._note, said=None)
        elif self._members and key in MEMBER_KEYS[: len(self._members)]:
            self._turn_mark(self._members[MEMBER_KEYS.index(key)])
        elif not self._members:
            self._take_letter(key)
        self._refresh_answers()

    def _take_letter(self, key: str) -> None:
        if key in _OBSERVED_KEYS:
            self._note = replace(self._note, observed=_OBSERVED_KEYS[key])
        elif key == "r":
            self._note = replace(self._note, reaction=_next("reaction", self._note.reaction))
        elif key == "e":
            self._note = replace(self._note, event=_next("event", self._note.event))
        elif key == "x":
            self._note = replace(self._note, stop=_next("reason_for_stopping", self._note.stop))

    def _turn_mark(self, code: str) -> None:
        order = ["", "exception", "absent"] if self._has_cue else ["", "absent"]
        at = order.index(self._marks.get(code, ""))
        self._marks[code] = order[(at + 1) % len(order)]

    def _finish(self) -> Practised:
        return Practised(
            self._note,
            tuple(code for code in self._members if self._marks.get(code) == "exception"),
            tuple(code for code in self._members if self._marks.get(code) == "absent"),
        )

    def _refresh_answers(self) -> None:
        self.query_one("#answers", Static).update(self._describe())

    def _describe(self) -> Text:
        vocabulary = load_vocabulary()
        said = "not counted" if self._note.said is None else str(self._note.said)
        lines = [f"0-9  times said: {said}"] if self._has_cue else []
        if self._members:
            words = {"": "there", "exception": "not this cue", "absent": "absent"}
            lines += [
                f"{letter}    {code}: {words[self._marks.get(code, '')]}"
                for letter, code in zip(MEMBER_KEYS, self._members, strict=False)
            ]
        else:
            chosen = self._note.observed
            what = "  ".join(
                f"{'>' if slug == chosen else ' '}{letter} "
                f"{vocabulary.label('observed_change', slug)}"
                for letter, slug in _OBSERVED_KEYS.items()
            )
            lines.append(f"What was seen: {what}")
            for letter, title, list_name, slug in (
                ("r", "how it was taken", "reaction", self._note.reaction),
                ("e", "event", "event", self._note.event),
                ("x", "stopped because", "reason_for_stopping", self._note.stop),
            ):
                answer = vocabulary.label(list_name, slug) if slug else "nothing noted"
                lines.append(f"{letter}    {title}: {answer}")
            if self._note.event in {"fall", "near_fall"}:
                lines.append("!    Hurt? Stopped? Fill in your own incident record, too.")
        lines.append("Enter stores.  Escape closes.")
        return Text("\n".join(lines))


def _next(list_name: str, slug: str | None) -> str | None:
    """Return the word after the present one; after the last, none."""
    slugs: list[str | None] = [None, *load_vocabulary().slugs(list_name)]
    return slugs[(slugs.index(slug) + 1) % len(slugs)]
