"""Facts about each cue's uses that need no model: counts, grade, parts, what is missing."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from cuebook.evidence.grades import Grade, GradeInput, grade_cue

if TYPE_CHECKING:
    from cuebook.evidence.prepared import PreparedUses, Tally

MOST_EXTRA_MISSING = 0.20
"""Share without an after-measure beyond that of practice alone."""


@dataclass(frozen=True, slots=True)
class CueFacts:
    """What is known about the uses of one cue."""

    uses: int
    """Uses with a change; a group event counts once."""
    learners: int
    share_random: float
    grade: Grade
    going_badly: float | None
    misses_after: bool


def gather_facts(prepared: PreparedUses, capped_reasons: tuple[str, ...]) -> tuple[CueFacts, ...]:
    """Return the facts of each cue, in the order of ``prepared.cue_labels``.

    Parameters
    ----------
    capped_reasons : why no cue of this review can be graded above C.
    """
    return tuple(
        _gather_one(prepared, at, capped_reasons) for at in range(len(prepared.cue_labels))
    )


def count_uses(prepared: PreparedUses, rows: npt.NDArray[np.bool_]) -> int:
    """Return the number of uses behind some rows; the rows of one event are one use."""
    if prepared.event is None:
        return int(rows.sum())
    events = prepared.event[rows]
    return int((events < 0).sum()) + len(np.unique(events[events >= 0]))


def count_learners(prepared: PreparedUses, rows: npt.NDArray[np.bool_]) -> int:
    """Return the number of people behind some rows; of a group, those who were met at once."""
    learner, people = prepared.learner[rows], prepared.people[rows]
    return sum(int(people[learner == code].max()) for code in np.unique(learner))


def mark_rows(prepared: PreparedUses, at: int) -> npt.NDArray[np.bool_]:
    """Return which rows belong to a cue, wholly or in part."""
    own = prepared.cue == at
    if prepared.cue_weights is not None:
        own = own | (prepared.cue_weights[:, at] > 0)
    return np.asarray(own)


def _gather_one(prepared: PreparedUses, at: int, capped_reasons: tuple[str, ...]) -> CueFacts:
    rows = mark_rows(prepared, at)
    weight = np.ones(int(rows.sum()))
    several = False
    if prepared.cue_weights is not None:
        weight = prepared.cue_weights[rows, at]
        several = bool((weight < 1).any())
    random = prepared.randomised[rows]
    share_random = float(weight @ random / weight.sum()) if weight.sum() > 0 else 0.0
    flags = [prepared.flags[row] for row in np.flatnonzero(rows)]
    deviating = ~prepared.given_as_assigned[rows][random]
    learners_of_cue = np.unique(prepared.learner[rows])
    practice = np.unique(prepared.learner[prepared.cue < 0])
    uses, learners = count_uses(prepared, rows), count_learners(prepared, rows)
    grade = grade_cue(
        GradeInput(
            uses=uses,
            learners=learners,
            share_random=share_random,
            share_deviating=float(deviating.mean()) if len(deviating) else 0.0,
            practice_learners=len(np.intersect1d(learners_of_cue, practice)),
            other_cues_noted=any("others" in of_row for of_row in flags),
            share_late=_share(flags, "late"),
            changed_after_result=any("changed_after_result" in of_row for of_row in flags),
            several_cues=several,
            capped_reasons=capped_reasons,
        )
    )
    cue = prepared.cue_labels[at]
    return CueFacts(
        uses=uses,
        learners=learners,
        share_random=share_random,
        grade=grade,
        going_badly=_share(flags, "going_badly") if flags else None,
        misses_after=_misses_after(prepared.tallies.get(cue), prepared.tallies.get(None)),
    )


def _share(flags: Sequence[tuple[str, ...]], flag: str) -> float:
    return sum(flag in of_row for of_row in flags) / len(flags) if flags else 0.0


def _misses_after(of_cue: Tally | None, of_practice: Tally | None) -> bool:
    """Say whether far more uses than of practice alone have no after-measure."""
    if of_cue is None or of_practice is None or not of_cue.met or not of_practice.met:
        return False
    extra = _share_missing(of_cue) - _share_missing(of_practice)
    return extra > MOST_EXTRA_MISSING


def _share_missing(tally: Tally) -> float:
    return float((tally.stopped + tally.no_after) / tally.met)
