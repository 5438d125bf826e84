"""Work off the screen's thread: it posts messages and touches no widget."""

from __future__ import annotations

from collections.abc import Callable
from concurrent.futures import Future, ThreadPoolExecutor
from dataclasses import replace
from typing import Any

from cuebook.errors import CuebookError
from cuebook.jobs.log_entries import BlockEntry, Logged
from cuebook.jobs.people import PersonLine
from cuebook.tui.fitting import NoLongerWantedError
from cuebook.tui.messages import WorkFailed
from cuebook.tui.ports import LibraryJobs

NEW = "new"


def attempt(job: Callable[[], Any], post: Callable[[Any], Any]) -> None:
    """Run a job and post the message it gives, or what went wrong; nothing escapes."""
    try:
        message = job()
    except NoLongerWantedError:
        return
    except CuebookError as error:
        message = WorkFailed(error)
    except Exception as fault:  # noqa: BLE001 - a fault in the background must be seen
        message = WorkFailed(describe_fault(fault))
    if message is not None:
        post(message)


def describe_fault(fault: BaseException) -> CuebookError:
    """Return a fault of the program itself in words; its text may hold what a user typed."""
    return CuebookError(
        f"Cuebook met a fault of its own ({type(fault).__name__}).",
        "What was said to be stored is stored. Try again; if it comes back, please report it.",
    )


class StoreLine:
    """Stores entries one after the other, in the order they were made, each in its session.

    Only its own thread reads and sets which session somebody's entries go to, so that entries
    made quickly one after the other never begin two sessions. What was handed over is stored
    even if the screens are left at once.
    """

    def __init__(self, jobs: LibraryJobs) -> None:
        self._jobs = jobs
        self._sessions: dict[str, str] = {}
        self._thread = ThreadPoolExecutor(max_workers=1, thread_name_prefix="store")

    def log(self, entry: BlockEntry) -> Future[Logged]:
        """Hand over a block."""
        return self._thread.submit(self._log, entry)

    def end_session(self, who: PersonLine) -> Future[bool]:
        """Hand over that a session is over, if one is open; the next entry begins a new one.

        Tells whether one was open.
        """
        return self._thread.submit(self._end, who)

    def close(self) -> None:
        """Wait until everything handed over is stored."""
        self._thread.shutdown(wait=True)

    def _log(self, entry: BlockEntry) -> Logged:
        code = entry.learner or entry.group or ""
        logged = self._jobs.log_block(replace(entry, session=self._sessions.get(code)))
        self._sessions[code] = logged.session_id
        return logged

    def _end(self, who: PersonLine) -> bool:
        session: str | None = self._sessions.get(who.code)
        if session is None:
            session = self._jobs.find_open_session(who)
        if session not in {None, NEW}:
            self._jobs.end_session(session or "")
        self._sessions[who.code] = NEW
        return session not in {None, NEW}
