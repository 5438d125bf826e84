"""What the screens need of the program: one place that calls the jobs, for one library."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path
from typing import Any

from cuebook.jobs.find_cue import FoundCues
from cuebook.jobs.find_in_library import find_in_library
from cuebook.jobs.last_card import LastCard, read_last_card
from cuebook.jobs.log_entries import BlockEntry, Logged
from cuebook.jobs.meetings import list_sessions, show_session
from cuebook.jobs.people import (
    NewLearner,
    PersonLine,
    add_group,
    add_learner,
    list_members,
    list_people,
    set_consent,
)
from cuebook.jobs.review_request import ReviewRequest
from cuebook.jobs.review_stored import (
    QuestionLine,
    StoredReview,
    read_questions,
    read_stored_review,
)
from cuebook.library.lookup import Request
from cuebook.tui.fitting import fit_apart

MOST_CUES = 50


@dataclass(frozen=True, slots=True)
class Card:
    """What Log shows of somebody before anything is entered."""

    last: LastCard
    members: tuple[str, ...] = ()
    """Codes of a group's members; empty for one learner."""
    open_lines: tuple[str, ...] = ()
    """What is logged already in a session that is still open today."""


class LibraryJobs:
    """The jobs on one library; every method may be called from any thread."""

    def __init__(self, location: str | Path | None = None) -> None:
        self.location = location

    def find(self, text: str, who: PersonLine | None, task: str | None) -> FoundCues:
        """Return cues for a problem; ``task`` None: the task that the words speak of."""
        return find_in_library(
            self.location,
            text,
            learner=who.code if who is not None and not who.is_group else None,
            group=who.code if who is not None and who.is_group else None,
            request=Request(task=task, limit=MOST_CUES),
        )

    def list_people(self) -> tuple[PersonLine, ...]:
        """Return groups, then learners."""
        return list_people(self.location)

    def list_members(self, group: str) -> tuple[str, ...]:
        """Return the codes of a group's members."""
        return list_members(self.location, group)

    def add_learner(self) -> PersonLine:
        """Add a learner under a code made by the program."""
        code = add_learner(self.location, NewLearner())
        return PersonLine(code, is_group=False, label="", note="new")

    def add_group(self, code: str, members: tuple[str, ...], n_new: int) -> PersonLine:
        """Add a group of known learners and of some new ones, each under a code of their own."""
        made = tuple(self.add_learner().code for _ in range(n_new))
        everybody = add_group(self.location, code, (*members, *made))
        return PersonLine(code, is_group=True, label="", note=f"{len(everybody)} learners")

    def set_consent(self, code: str, answer: str, given_by: str, assent: str) -> None:
        """Note whether results may be used to rank cues."""
        set_consent(
            self.location, code, "use_for_ranking", answer, given_by=given_by, assent=assent
        )

    def read_card(self, who: PersonLine) -> Card:
        """Return the card for the next meeting and what is logged today already."""
        if who.is_group:
            last = read_last_card(self.location, group=who.code)
            members = self.list_members(who.code)
        else:
            last, members = read_last_card(self.location, learner=who.code), ()
        session = self.find_open_session(who)
        lines = () if session is None else show_session(self.location, session)[:-1]
        return Card(last, members, lines)

    def find_open_session(self, who: PersonLine) -> str | None:
        """Return today's session of somebody if it has not ended; None if there is none."""
        today = datetime.now().astimezone().date()
        sessions = list_sessions(
            self.location,
            learner=None if who.is_group else who.code,
            group=who.code if who.is_group else None,
        )
        for session in sessions:
            is_today = session.started_at.astimezone().date() == today
            if session.is_open and is_today and session.who == who.code and session.n_blocks:
                return session.session_id
        return None

    def log_block(self, entry: BlockEntry) -> Logged:
        """Log one block; it is on disk when this returns."""
        from cuebook.jobs.log_use import log_block  # noqa: PLC0415

        return log_block(self.location, entry)

    def end_session(self, session_id: str) -> None:
        """Note that a session is over."""
        from cuebook.jobs.log_use import end_session  # noqa: PLC0415

        end_session(self.location, session_id)

    def read_questions(self) -> tuple[QuestionLine, ...]:
        """Return the questions that have values behind them."""
        return read_questions(self.location)

    def read_stored_review(self, request: ReviewRequest) -> StoredReview | None:
        """Return the last ranking of a question; None if there is none."""
        return read_stored_review(self.location, request)

    def fit(self, request: ReviewRequest) -> Mapping[str, Any]:
        """Rank cues for a question anew, in a process of its own."""
        return fit_apart(self.location, request)
