"""The errors a user can meet, sorted by what the user must do next."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Place:
    """Where in the user's input something was wrong."""

    file: str | None = None
    """Name or path as the user gave it; None if no file is involved."""
    row: int | None = None
    """Line of the file, counted from 1; None if it concerns the whole file."""
    column: str | None = None
    """Column or field name; None if it concerns the whole row."""


class CuebookError(Exception):
    """Something a user can act on.

    ``message`` says what was wrong and where in one line; ``hint`` what to do next.
    """

    def __init__(self, message: str, hint: str = "", place: Place | None = None) -> None:
        super().__init__(message)
        self.message = message
        self.hint = hint
        self.place = place or Place()

    def __str__(self) -> str:
        return f"{self.message} {self.hint}".strip()


class UsageError(CuebookError):
    """The words of the call do not fit together: call again, corrected."""


class InputError(CuebookError):
    """A file or a value cannot be used: mend it, or leave it out."""


class UnknownCodeError(CuebookError):
    """A code is not known: the message names the nearest known ones."""


class NeedsAnswerError(CuebookError):
    """Cuebook will not guess: the message names the option that answers."""


class StoreUnavailableError(CuebookError):
    """The library is locked, unreachable, damaged, or newer than this program."""
