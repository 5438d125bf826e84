"""The key under which the last ranking of a question is kept; light to load."""

from __future__ import annotations

from collections.abc import Mapping

from cuebook.store.canonical import make_canonical


def make_question_key(question: Mapping[str, object]) -> str:
    """Return a question as canonical text; what is not asked is left out."""
    return make_canonical({name: value for name, value in question.items() if value is not None})
