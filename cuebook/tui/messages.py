"""Facts that have happened, as work in the background tells the screens."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

from textual.message import Message

from cuebook.errors import CuebookError
from cuebook.jobs.find_cue import FoundCues
from cuebook.jobs.log_entries import Logged
from cuebook.jobs.people import PersonLine
from cuebook.jobs.review_stored import QuestionLine, StoredReview
from cuebook.tui.ports import Card


class PeopleRead(Message):
    """Who can be picked is known."""

    def __init__(
        self, people: tuple[PersonLine, ...], then: Callable[[], None] | None = None
    ) -> None:
        super().__init__()
        self.people = people
        self.then = then
        """What goes on once somebody is picked; None: nothing."""


class MembersRead(Message):
    """The members of a group are known."""

    def __init__(self, group: str, members: tuple[str, ...]) -> None:
        super().__init__()
        self.group = group
        self.members = members


class PersonAdded(Message):
    """A learner or a group is on disk."""

    def __init__(self, person: PersonLine) -> None:
        super().__init__()
        self.person = person


class ConsentNoted(Message):
    """An answer about rankings is on disk."""

    def __init__(self, code: str, answer: str) -> None:
        super().__init__()
        self.code = code
        self.answer = answer


class CuesFound(Message):
    """A look-up has come back."""

    def __init__(self, text: str, found: FoundCues) -> None:
        super().__init__()
        self.text = text
        self.found = found


class CardRead(Message):
    """The card of a learner or group has been read."""

    def __init__(self, who: str, card: Card) -> None:
        super().__init__()
        self.who = who
        self.card = card


class BlockLogged(Message):
    """A block is on disk."""

    def __init__(self, who: str, logged: Logged) -> None:
        super().__init__()
        self.who = who
        self.logged = logged


class SessionEnded(Message):
    """A session is over, on disk; the next entry begins a new one."""

    def __init__(self, who: str, *, was_open: bool) -> None:
        super().__init__()
        self.who = who
        self.was_open = was_open


class QuestionsRead(Message):
    """The questions that have data are known."""

    def __init__(self, questions: tuple[QuestionLine, ...]) -> None:
        super().__init__()
        self.questions = questions


class RankingRead(Message):
    """The last ranking of a question has been read; None if there is none yet."""

    def __init__(self, question: QuestionLine, stored: StoredReview | None) -> None:
        super().__init__()
        self.question = question
        self.stored = stored


class RankingMade(Message):
    """A question has been ranked anew."""

    def __init__(self, question: QuestionLine, document: Mapping[str, Any]) -> None:
        super().__init__()
        self.question = question
        self.document = document


class WorkFailed(Message):
    """Work in the background could not be done."""

    def __init__(self, error: CuebookError) -> None:
        super().__init__()
        self.error = error
