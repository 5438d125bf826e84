"""Keep the last ranking of a question, so that screens can show it at once."""

from __future__ import annotations

from collections.abc import Mapping
from datetime import datetime
from typing import TYPE_CHECKING, Any

from cuebook.store.canonical import drop_not_numbers
from cuebook.store.question_keys import make_question_key
from cuebook.store.tables.upkeep import RankingCache

if TYPE_CHECKING:
    from sqlmodel import Session


def keep_ranking(
    tx: Session,
    question: Mapping[str, object],
    document: Mapping[str, Any],
    *,
    evidence_revision: int,
    engine: str,
    n_uses: int,
    made_at: datetime,
) -> None:
    """Replace the stored ranking of a question."""
    tx.merge(
        RankingCache(
            question=make_question_key(question),
            evidence_revision=evidence_revision,
            engine=engine,
            n_uses=n_uses,
            made_at=made_at,
            document=drop_not_numbers(document),
        )
    )
