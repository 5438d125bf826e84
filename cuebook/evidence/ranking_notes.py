"""Sentences that go with a ranking: what it rests on, and what is not shown and why."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from cuebook.evidence.arrays import IntArray
from cuebook.evidence.judgement import Judgement
from cuebook.evidence.question import ReviewQuestion
from cuebook.evidence.result import CueResult, DetectableChange
from cuebook.evidence.thresholds import WITHIN_SESSION

if TYPE_CHECKING:
    from cuebook.evidence.prepared import PreparedUses

SLOPE_WITHIN = (-1.5, -0.5)
SLOPE_BETWEEN = (-1.3, 0.0)


def list_notes(
    prepared: PreparedUses,
    question: ReviewQuestion,
    main: Judgement,
    regression_slope: float | None,
    cues: Sequence[CueResult],
) -> tuple[str, ...]:
    """Return what a reader must know beside the lines."""
    notes = list(prepared.notes)
    if prepared.dropped_columns:
        notes.append(f"not adjusted for {', '.join(prepared.dropped_columns)}: it did not vary")
    if prepared.reference.is_shown and prepared.reference.caps_at_c:
        notes += prepared.reference.reasons
    notes += _note_slope(prepared, question, regression_slope)
    if main.allowance.own.any():
        notes.append(
            f"every number allows for unrecorded reasons of choice "
            f"(allowance {question.allowance:g} of the unexplained spread)"
        )
    if main.model.posterior.is_plug_in and main.model.posterior.names:
        notes.append("variances are held at their most probable values")
    if any("no_clear_best" in line.marks for line in cues):
        notes.append("no clear best: the first cues may be as good as one another")
    if any(line.no_after or line.stopped for line in cues):
        notes.append("effects are from those who could go on")
    return tuple(notes)


def list_refusals(
    prepared: PreparedUses,
    question: ReviewQuestion,
    *,
    has_reference: bool,
    part: IntArray,
    detectable: DetectableChange | None,
) -> tuple[str, ...]:
    """Return what is not shown, with the reason and the cure."""
    refused = list(prepared.refused)
    if not has_reference:
        why = "; ".join(prepared.reference.reasons) or "add blocks without a cue"
        refused.append(f"an effect over practice alone: {why}. Cues are compared with their mean")
    n_parts = len(set(part.tolist()))
    if n_parts > 1:
        refused.append(
            f"one ranking of all cues: no learner links the {n_parts} parts of the list. "
            "Ranks hold within a part; use cues of both parts with the same learners"
        )
    if detectable is None:
        refused.append(f"a detectable change of one learner: {_explain_no_mdc(question)}")
    return tuple(refused)


def _explain_no_mdc(question: ReviewQuestion) -> str:
    if question.contrast not in WITHIN_SESSION:
        return "no threshold between days is known; it needs repeated days without a cue"
    return "no block holds two attempts; measure two or more attempts before and after"


def _note_slope(prepared: PreparedUses, question: ReviewQuestion, slope: float | None) -> list[str]:
    if slope is None:
        return []
    within = prepared.moments.v_is_modelled and question.contrast in WITHIN_SESSION
    low, high = SLOPE_WITHIN if within else SLOPE_BETWEEN
    if low <= slope <= high:
        return []
    expected = f"slope {slope:.2f}, expected {low:g} to {high:g}"
    return [f"regression to the mean looks unusual ({expected}): read the effects with care"]
