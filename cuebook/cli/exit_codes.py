"""The documented exit codes, and which error leads to which."""

from __future__ import annotations

from enum import IntEnum

from cuebook.errors import (
    CuebookError,
    InputError,
    NeedsAnswerError,
    StoreUnavailableError,
    UnknownCodeError,
    UsageError,
)


class ExitCode(IntEnum):
    """What the shell is told when a command ends."""

    DONE = 0
    """Also a refusal to rank, a stop-and-refer and an empty find: these are answers."""
    FAILED = 1
    USAGE = 2
    INPUT = 3
    UNKNOWN_CODE = 4
    NEEDS_ANSWER = 5
    STORE = 6
    INTERRUPTED = 130


_CODE_OF_ERROR: tuple[tuple[type[CuebookError], ExitCode], ...] = (
    (UsageError, ExitCode.USAGE),
    (InputError, ExitCode.INPUT),
    (UnknownCodeError, ExitCode.UNKNOWN_CODE),
    (NeedsAnswerError, ExitCode.NEEDS_ANSWER),
    (StoreUnavailableError, ExitCode.STORE),
)


def get_exit_code(error: CuebookError) -> ExitCode:
    """Return the documented exit code of an error."""
    for kind, code in _CODE_OF_ERROR:
        if isinstance(error, kind):
            return code
    return ExitCode.FAILED
