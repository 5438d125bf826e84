"""From changes to what the model conditions on."""

from __future__ import annotations

import math
from collections import Counter, defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import replace

import numpy as np

from cuebook.evidence.borrowed_variance import BorrowedVariance, borrow_variance
from cuebook.evidence.design_columns import build_columns, keep_independent
from cuebook.evidence.group_events import Rows, code_events, collapse_events
from cuebook.evidence.prepared import (
    FloatArray,
    MissingRows,
    Moments,
    PreparedUses,
    ReferenceCheck,
    Tally,
)
from cuebook.evidence.reference import check_reference
from cuebook.evidence.usual_level import UsualLevel, follow_openings
from cuebook.practice.changes import AttemptSet, Change, ChangeKey, NoChange, UseRecord

__all__ = ["MissingRows", "Moments", "PreparedUses", "ReferenceCheck", "Tally", "prepare_uses"]

WITHIN_SESSION = frozenset({"during", "immediate", "transfer"})
FEWEST_REPEATS = 10
"""Degrees of freedom below which day and person cannot be told apart."""
LEAST_RELIABILITY, MOST_RELIABILITY = 0.05, 0.98
SINGLE_ATTEMPTS = "single attempts only: their noise is not known"
_NO_BEFORE = frozenset({"no_before", "no_clean_between", "session_began_with_cue"})
_NO_AFTER = frozenset(
    {"no_after", "no_values_during", "no_later_opening", "another_cue_between"}
    | {"no_transfer_measure"}
)


def prepare_uses(
    changes: Sequence[Change],
    *,
    contrast: str,
    without: Sequence[NoChange] = (),
    resolution: float | None = None,
    kinds: Mapping[str, str] | None = None,
) -> PreparedUses:
    """Return changes of one contrast ready for the model.

    Parameters
    ----------
    changes : of one metric; other contrasts and other recipes than the commonest are left out,
        and the latter said.
    without : uses without a change, with their reasons.
    resolution : smallest difference of the measure on the transformed scale; None: unknown.
    kinds : kind of each cue, for cues whose uses do not say it.

    Notes
    -----
    The known variance of a change is v = s^2/n1 + r s^2/n0 within a session and s^2/n1 across
    days, where r is the reliability of the before-set; the covariate ``state`` is
    (1 - r) times the before's distance from the learner's own mean within a session, and its
    distance from the learner's usual level until then across days: regression to the mean. The
    column ``level`` is the learner's mean, or across days the first opening, about its mean.
    """
    chosen, notes, refused = _choose(changes, contrast)
    gone = [one for one in without if one.contrast == contrast]
    chosen = sorted(chosen, key=_sort_key)
    labels = tuple(sorted({change.use.learner for change in chosen}))
    kind_of = _find_kinds(chosen, kinds or {})
    cues = tuple(sorted({cue for change in chosen for cue, _ in change.cue_weights}))
    borrowed = _borrow(chosen, resolution)
    state = _build_state(chosen, contrast, borrowed)
    rows = Rows.from_changes(chosen, labels, cues, state.variance, state.covariate, state.level)
    rows, is_collapsed = collapse_events(rows, n_fixed=8, n_cues=len(cues))
    if is_collapsed:
        notes.append("group events are counted as one use each")
    design, columns = build_columns(rows, contrast, cues, kind_of)
    design, columns, dropped = keep_independent(design, columns)
    change = rows.change
    spread = float(np.std(change, ddof=1)) if change.size > 1 else 0.0
    return PreparedUses(
        contrast=contrast,
        change=change,
        scale=spread if spread > 0 else 1.0,
        variance=rows.variance,
        design=design,
        columns=columns,
        cue_labels=cues,
        learner_labels=rows.learner_labels,
        cue=rows.cue,
        learner=rows.learner,
        cue_weights=rows.cue_weights,
        event=None if is_collapsed else code_events(rows.events),
        is_collapsed=is_collapsed,
        n_before=rows.n_before,
        n_after=rows.n_after,
        position_k=rows.position.round().astype(np.int64),
        session_t=rows.visit.round().astype(np.int64),
        days=rows.days,
        attempts=rows.attempts,
        randomised=rows.randomised,
        given_as_assigned=rows.as_assigned,
        people=rows.people,
        flags=rows.flags,
        kind_of_cue=kind_of,
        missing=None if is_collapsed else _build_missing(gone, rows, columns, state, cues, kind_of),
        moments=state.make_moments(borrowed, spread),
        reference=check_reference(chosen),
        tallies=_tally(chosen, gone),
        dropped_columns=dropped,
        notes=tuple(notes),
        refused=tuple(refused),
    )


def _sort_key(change: Change) -> tuple[str, int, int, str]:
    use = change.use
    return (use.learner, use.t, use.k, use.use)


def _choose(changes: Sequence[Change], contrast: str) -> tuple[list[Change], list[str], list[str]]:
    """Return the changes of a contrast whose values were made alike."""
    of_contrast = [change for change in changes if change.contrast == contrast]
    recipes = Counter(change.key.recipe for change in of_contrast)
    if len(recipes) <= 1:
        return of_contrast, [], []
    commonest = max(sorted(recipes), key=lambda recipe: recipes[recipe])
    kept = [change for change in of_contrast if change.key.recipe == commonest]
    n_other = len(of_contrast) - len(kept)
    refused = f"{n_other} changes measured another way: values are compared only if made alike"
    return kept, [], [refused]


def _find_kinds(changes: Sequence[Change], given: Mapping[str, str]) -> dict[str, str]:
    kinds = dict(given)
    for change in changes:
        if change.use.cue and change.use.kind:
            kinds.setdefault(change.use.cue, change.use.kind)
    return kinds


def _borrow(changes: Sequence[Change], resolution: float | None) -> BorrowedVariance:
    sets: dict[str, list[AttemptSet]] = defaultdict(list)
    # The after of one change may be the before of the next: each set is counted once.
    seen: set[tuple[str, str, float, int, float]] = set()
    for change in changes:
        for one in (change.before, change.after):
            mark = (change.use.learner, change.use.session, one.mean, one.n, one.sum_of_squares)
            if mark not in seen:
                seen.add(mark)
                sets[change.use.learner].append(one)
    return borrow_variance(sets, resolution) if sets else borrow_variance({})


class _State:
    """Regression to the mean: where a learner stood before, against their own mean."""

    def __init__(self, n: int) -> None:
        self.covariate: FloatArray = np.zeros(n)
        self.level: FloatArray = np.zeros(n)
        self.variance: FloatArray = np.zeros(n)
        self.sx2 = math.nan
        self.vw = math.nan
        self.mean_before = math.nan
        self.learner_means: dict[str, float] = {}
        self.visit_means: dict[str, float] = {}
        """Of ln(1 + visit)."""
        self.level_of: dict[str, float] = {}
        self.usual: dict[str, UsualLevel] = {}
        """Empty within a session."""
        self.attempt_variance: Mapping[str, float] = {}
        self.slope = 0.0
        self.is_split = True
        """Whether day and person can be told apart."""
        self.contrast = ""
        self.note = ""

    def make_moments(self, borrowed: BorrowedVariance, sd_change: float) -> Moments:
        """Return what attempts and visits vary by."""
        return Moments(
            v_is_modelled=borrowed.is_known,
            s2_learner=borrowed.by_learner,
            df_learner=borrowed.df_by_learner,
            s0_squared=borrowed.shared,
            d0=borrowed.prior_df,
            sum_df=borrowed.sum_df,
            sx2=self.sx2,
            vw=self.vw,
            mean_before=self.mean_before,
            sd_change=sd_change,
            reliability_note=self.note,
        )


def _get_variances(
    changes: Sequence[Change], borrowed: BorrowedVariance
) -> tuple[FloatArray, FloatArray]:
    """Return the sampling variances of the before- and after-means."""
    if not borrowed.is_known:
        zeros = np.zeros(len(changes))
        return zeros, zeros
    pairs = [
        tuple(
            one.sampling_variance
            if one.sampling_variance is not None
            else borrowed.by_learner[change.use.learner] / one.n
            for one in (change.before, change.after)
        )
        for change in changes
    ]
    table = np.array(pairs, dtype=np.float64).reshape(-1, 2)
    return table[:, 0], table[:, 1]


def _build_state(changes: Sequence[Change], contrast: str, borrowed: BorrowedVariance) -> _State:
    n = len(changes)
    state = _State(n)
    state.contrast = contrast
    if n == 0:
        return state
    learners = [change.use.learner for change in changes]
    before = np.array([change.before.mean for change in changes])
    visit = np.log1p(np.array([change.use.t for change in changes], dtype=np.float64))
    before_variance, after_variance = _get_variances(changes, borrowed)
    codes = np.unique(learners, return_inverse=True)[1]
    n_learners = int(codes.max()) + 1
    sizes = np.bincount(codes)
    means = np.bincount(codes, before) / sizes
    grand = float(np.mean(before))
    state.learner_means = {learners[i]: float(means[codes[i]]) for i in range(n)}
    visit_means = np.bincount(codes, visit) / sizes
    state.visit_means = {learners[i]: float(visit_means[codes[i]]) for i in range(n)}
    state.attempt_variance = borrowed.by_learner if borrowed.is_known else {}
    state.mean_before = grand
    state.level = means[codes] - grand
    state.level_of = dict(zip(learners, state.level.tolist(), strict=True))
    own = before - means[codes]
    visit_own = visit - visit_means[codes]
    denominator = float(visit_own @ visit_own)
    state.slope = float(visit_own @ own) / denominator if denominator >= 1e-9 else 0.0
    distance = own - state.slope * visit_own
    repeats = n - n_learners - 1
    if repeats < FEWEST_REPEATS:
        state.is_split = False
        state.covariate = before - grand
        state.variance = after_variance
        state.note = "too few repeated visits to separate day from person"
        return state
    state.vw = float(distance @ distance) / repeats
    if contrast not in WITHIN_SESSION:
        state.variance = after_variance
        _follow_days(state, changes, before)
        if borrowed.is_known:
            state.sx2 = _estimate_state_variance(state.vw, before_variance)
        else:
            state.note = SINGLE_ATTEMPTS
        return state
    if not borrowed.is_known:
        state.covariate = own
        state.note = SINGLE_ATTEMPTS
        return state
    state.sx2 = _estimate_state_variance(state.vw, before_variance)
    with np.errstate(invalid="ignore", divide="ignore"):
        reliability = state.sx2 / (state.sx2 + before_variance)
    reliability = np.clip(np.nan_to_num(reliability, nan=1.0), LEAST_RELIABILITY, MOST_RELIABILITY)
    state.covariate = (1.0 - reliability) * distance
    state.variance = after_variance + reliability * before_variance
    return state


def _follow_days(state: _State, changes: Sequence[Change], before: FloatArray) -> None:
    """Place each opening against what was usual until then; the first one is the level."""
    learners = [change.use.learner for change in changes]
    visits = [change.use.t for change in changes]
    state.covariate, state.usual = follow_openings(learners, visits, before)
    first = np.array([state.usual[learner].first for learner in learners])
    state.level = first - first.mean()
    state.level_of = dict(zip(learners, state.level.tolist(), strict=True))


def _estimate_state_variance(whole: float, before_variance: FloatArray) -> float:
    """Return the variance of the true state within learners: the whole without attempt noise."""
    return max(whole - float(np.mean(before_variance)), 0.05 * whole)


def _build_missing(
    gone: Sequence[NoChange],
    rows: Rows,
    columns: tuple[str, ...],
    state: _State,
    cues: tuple[str, ...],
    kind_of: Mapping[str, str],
) -> MissingRows | None:
    """Return uses that had a before and no after, with the covariates they would have had."""
    known = [
        one
        for one in gone
        if one.before is not None
        and one.reason in {"stopped", *_NO_AFTER}
        and one.use.learner in rows.learner_labels
        and (one.use.cue is None or one.use.cue in cues)
    ]
    if not known or not rows.change.size:
        return None
    likely = [_suppose(one) for one in known]
    all_rows = Rows.from_changes(
        likely,
        rows.learner_labels,
        cues,
        np.zeros(len(likely)),
        np.array([_place_state(one, state) for one in known]),
        np.array([state.level_of[one.use.learner] for one in known]),
    )
    design, names = build_columns(all_rows, state.contrast, cues, kind_of, centred_on=rows)
    picked = [names.index(name) for name in columns]
    return MissingRows(
        design[:, picked], all_rows.cue, all_rows.learner, tuple(one.reason for one in known)
    )


def _suppose(one: NoChange) -> Change:
    """Return a use as a change of nothing, for the columns that do not depend on it."""
    before = one.before or AttemptSet(0.0, 1, 0.0)
    key = one.key or ChangeKey("", "", one.use.task)
    return Change(one.use, one.contrast, key, before, before)


def _place_state(one: NoChange, state: _State) -> float:
    """Return the covariate that a use would have had, by the rule of those with a change."""
    if one.before is None:
        return 0.0
    if not state.is_split:
        return one.before.mean - state.mean_before
    learner = one.use.learner
    if state.usual:
        return one.before.mean - state.usual[learner].find(one.use.t)
    distance = one.before.mean - state.learner_means[learner]
    if not state.attempt_variance:
        return distance
    distance -= state.slope * (math.log1p(one.use.t) - state.visit_means[learner])
    noise = one.before.sampling_variance
    if noise is None:
        noise = state.attempt_variance[learner] / one.before.n
    whole = state.sx2 + noise
    reliability = state.sx2 / whole if whole > 0 else 1.0
    return (1.0 - min(max(reliability, LEAST_RELIABILITY), MOST_RELIABILITY)) * distance


def _tally(changes: Sequence[Change], gone: Sequence[NoChange]) -> dict[str | None, Tally]:
    """Return per cue what became of its uses; a use counts once."""
    tallies: dict[str | None, Tally] = {}
    changed: set[str] = set()
    for change in changes:
        if change.use.use in changed:
            continue
        changed.add(change.use.use)
        _add(tallies, change.use, "changed")
    for one in gone:
        if one.reason == "stopped":
            _add(tallies, one.use, "stopped")
        elif one.reason in _NO_BEFORE:
            _add(tallies, one.use, "no_before")
        elif one.reason in _NO_AFTER:
            _add(tallies, one.use, "no_after")
        else:
            _add(tallies, one.use, "other")
    return tallies


def _add(tallies: dict[str | None, Tally], use: UseRecord, what: str) -> None:
    tally = tallies.get(use.cue, Tally())
    tallies[use.cue] = replace(tally, met=tally.met + 1, **{what: getattr(tally, what) + 1})
