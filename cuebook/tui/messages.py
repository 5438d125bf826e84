"""Facts that have happened, as the screens tell one another."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from textual.message import Message

from cuebook.errors import CuebookError
from cuebook.jobs.find_cue import FoundCues
from cuebook.jobs.last_card import LastCard
from cuebook.jobs.log_entries import Logged
from cuebook.jobs.review_stored import QuestionLine, StoredReview


class CuesFound(Message):
    """A look-up has come back."""

    def __init__(self, text: str, found: FoundCues) -> None:
        super().__init__()
        self.text = text
        self.found = found


class CardRead(Message):
    """The card of a learner or group has been read."""

    def __init__(self, card: LastCard, members: tuple[str, ...]) -> None:
        super().__init__()
        self.card = card
        self.members = members


class UseLogged(Message):
    """Something is on disk."""

    def __init__(self, logged: Logged) -> None:
        super().__init__()
        self.logged = logged


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
    """A worker has fitted a question anew."""

    def __init__(self, question: QuestionLine, document: Mapping[str, Any]) -> None:
        super().__init__()
        self.question = question
        self.document = document


class WorkFailed(Message):
    """Work in the background could not be done."""

    def __init__(self, error: CuebookError) -> None:
        super().__init__()
        self.error = error
