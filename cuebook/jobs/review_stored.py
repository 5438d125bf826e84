"""What a screen shows of reviews before anything is fitted; reading path only."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from cuebook.jobs.review_request import ReviewRequest
from cuebook.metrics.registry import load_registry
from cuebook.store.places import has_library
from cuebook.store.question_keys import make_question_key
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.rankings import (
    read_measured_questions,
    read_ranking,
    read_revision,
)
from cuebook.vocabulary import load_vocabulary

Location = str | Path | None
_DIRECTIONS = ("higher", "lower")


@dataclass(frozen=True, slots=True)
class QuestionLine:
    """A question that has values behind it."""

    request: ReviewRequest
    title: str
    n_values: int
    n_learners: int


@dataclass(frozen=True, slots=True)
class StoredReview:
    """The last ranking of a question."""

    document: Mapping[str, Any]
    n_uses: int
    is_current: bool
    """Whether nothing was logged since that changes what it rests on."""


def read_questions(location: Location) -> tuple[QuestionLine, ...]:
    """Return the questions that have data.

    Metrics with a direction of their own come first, then those that are only kept an eye on,
    in that direction; a metric without any gives two questions: more, or less, is better.
    """
    if not has_library(location):
        return ()
    with open_for_reading(location) as connection:
        measured = read_measured_questions(connection)
    vocabulary, registry = load_vocabulary(), load_registry()
    lines = []
    for one in measured:
        if not registry.has(one.metric):
            continue
        entry = registry.get(one.metric)
        own: tuple[str | None, ...] = (None,)
        if entry.better not in _DIRECTIONS:
            own = (entry.watch_better,) if entry.watch_better in _DIRECTIONS else _DIRECTIONS
        for better in own:
            words = {None: "", "higher": ", more is better", "lower": ", less is better"}[better]
            lines.append(
                QuestionLine(
                    ReviewRequest(one.metric, one.task, better=better),
                    f"{entry.name}{words}; {vocabulary.label('task', one.task)}",
                    one.n_values,
                    one.n_learners,
                )
            )
    # Those with a direction of their own first: they are what goals are set in.
    return tuple(sorted(lines, key=lambda line: line.request.better is not None))


def read_stored_review(location: Location, request: ReviewRequest) -> StoredReview | None:
    """Return the last ranking of a question, and whether it is still current."""
    if not has_library(location):
        return None
    with open_for_reading(location) as connection:
        stored = read_ranking(connection, make_question_key(request.key))
        revision = read_revision(connection, "evidence")
    if stored is None:
        return None
    return StoredReview(stored.document, stored.n_uses, stored.evidence_revision == revision)
