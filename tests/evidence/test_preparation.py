"""What the model conditions on, recomputed by hand and held to its laws."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace

import numpy as np
import pytest
from support.simulated_libraries import Scenario, simulate_library
from support.simulated_occasions import RetentionScenario, simulate_retention

from cuebook.evidence.arrays import FloatArray
from cuebook.evidence.preparation import prepare_uses
from cuebook.evidence.question import ReviewQuestion
from cuebook.evidence.ranking import rank_cues
from cuebook.practice.changes import AttemptSet, Change, ChangeKey, NoChange, UseRecord

KEY = ChangeKey("sparc", "recipe-a", "reaching")
SMALL = Scenario(n_cues=6, n_learners=10, n_uses=160)


def make_set(values: Sequence[float]) -> AttemptSet:
    """Return attempts as a set."""
    mean = sum(values) / len(values)
    return AttemptSet(mean, len(values), sum((value - mean) ** 2 for value in values))


def make_changes(n_learners: int = 4, n_visits: int = 6, most: int = 3) -> list[Change]:
    """Return changes of learners over visits, every third one practice alone."""
    rng = np.random.default_rng(8)
    changes = []
    for learner in range(n_learners):
        level = rng.normal(0, 2)
        for t in range(n_visits):
            state = level + 0.2 * t + rng.normal(0, 0.7)
            n0, n1 = (int(n) for n in rng.integers(1, most + 1, 2))
            cue = None if (t + learner) % 3 == 0 else f"cue-{(t + learner) % 3}"
            use = UseRecord(
                f"u{learner}-{t}", f"l{learner}", cue, "reaching", f"s{learner}-{t}", 1, t
            )
            changes.append(
                Change(
                    use,
                    "immediate",
                    KEY,
                    make_set(rng.normal(state, 1, n0).tolist()),
                    make_set(rng.normal(state + 0.3, 1, n1).tolist()),
                    days=0.0,
                )
            )
    return changes


def detrend(changes: Sequence[Change]) -> FloatArray:
    """Return each before as its distance from the learner's own mean and trend over visits."""
    learners = np.array([change.use.learner for change in changes])
    before = np.array([change.before.mean for change in changes])
    visit = np.log(1.0 + np.array([change.use.t for change in changes]))
    for learner in set(learners):
        own = learners == learner
        before[own] -= before[own].mean()
        visit[own] -= visit[own].mean()
    distance: FloatArray = before - (visit @ before) / (visit @ visit) * visit
    return distance


def test_within_a_session_variance_and_state_follow_their_formulas() -> None:
    """Variance s2/n1 + r s2/n0 and state (1 - r) zc with r = sx2 / (sx2 + s2/n0), computed anew."""
    changes = make_changes()
    prepared = prepare_uses(changes, contrast="immediate")
    s2 = np.array([prepared.moments.s2_learner[change.use.learner] for change in changes])
    n0 = np.array([change.before.n for change in changes])
    n1 = np.array([change.after.n for change in changes])
    zc = detrend(changes)
    vw = float(zc @ zc) / (len(changes) - 4 - 1)
    sx2 = max(vw - float(np.mean(s2 / n0)), 0.05 * vw)
    r = np.clip(sx2 / (sx2 + s2 / n0), 0.05, 0.98)
    assert prepared.moments.vw == pytest.approx(vw)
    assert prepared.moments.sx2 == pytest.approx(sx2)
    assert prepared.variance == pytest.approx(s2 / n1 + r * s2 / n0)
    assert prepared.design[:, prepared.columns.index("state")] == pytest.approx((1 - r) * zc)
    assert prepared.change == pytest.approx([change.difference for change in changes])


def test_across_days_the_state_is_the_distance_from_what_was_usual() -> None:
    """Half-way to each earlier opening; only the after's noise is known; level: first opening."""
    changes = [
        replace(change, contrast="retention", days=2.0 + at % 5)
        for at, change in enumerate(make_changes())
    ]
    prepared = prepare_uses(changes, contrast="retention")
    s2 = np.array([prepared.moments.s2_learner[change.use.learner] for change in changes])
    assert prepared.variance == pytest.approx(s2 / [change.after.n for change in changes])
    openings = np.array([change.before.mean for change in changes]).reshape(4, 6)
    usual = openings[:, 0].copy()
    expected = np.zeros((4, 6))
    for visit in range(6):
        expected[:, visit] = openings[:, visit] - usual
        usual = (usual + openings[:, visit]) / 2
    state = prepared.design[:, prepared.columns.index("state")]
    assert state == pytest.approx(expected.ravel())
    level = prepared.design[:, prepared.columns.index("level")]
    assert level == pytest.approx((openings[:, 0] - openings[:, 0].mean()).repeat(6))
    days = np.log(1.0 + np.array([change.days for change in changes]))
    column = prepared.design[:, prepared.columns.index("log_days")]
    assert column == pytest.approx(days - days.mean())


def test_single_attempts_leave_all_noise_to_the_residual() -> None:
    """Without any set of two: no known variance, and the covariate is b - learner's mean."""
    changes = make_changes(most=1)
    prepared = prepare_uses(changes, contrast="immediate")
    assert not prepared.variance.any()
    assert not prepared.moments.v_is_modelled
    before = np.array([change.before.mean for change in changes])
    means = before.reshape(4, 6).mean(axis=1).repeat(6)
    state = prepared.design[:, prepared.columns.index("state")]
    assert state == pytest.approx(before - means)
    level = prepared.design[:, prepared.columns.index("level")]
    assert level == pytest.approx(means - before.mean())


def test_too_few_repeated_visits_do_not_tell_day_from_person() -> None:
    """With n - learners - 1 < 10 the state is b - grand mean, v is s2/n1, and it is said."""
    changes = make_changes(n_learners=4, n_visits=3)
    prepared = prepare_uses(changes, contrast="immediate")
    before = np.array([change.before.mean for change in changes])
    assert prepared.design[:, prepared.columns.index("state")] == pytest.approx(
        before - before.mean()
    )
    s2 = np.array([prepared.moments.s2_learner[change.use.learner] for change in changes])
    assert prepared.variance == pytest.approx(s2 / [change.after.n for change in changes])
    assert "too few repeated visits" in prepared.moments.reliability_note


def scale_set(one: AttemptSet, factor: float) -> AttemptSet:
    """Return a set in another unit."""
    return AttemptSet(one.mean * factor, one.n, one.sum_of_squares * factor**2)


def test_a_change_of_unit_scales_effects_and_changes_nothing_else() -> None:
    """Metres to millimetres: effects and bounds times 1000, chances and words the same."""
    changes = simulate_library(3, SMALL).changes
    in_mm = [
        replace(change, before=scale_set(change.before, 1000), after=scale_set(change.after, 1000))
        for change in changes
    ]
    question = ReviewQuestion(metric="sparc")
    one = rank_cues(prepare_uses(changes, contrast="immediate"), question)
    other = rank_cues(prepare_uses(in_mm, contrast="immediate"), question)
    assert [cue.cue for cue in one.cues] == [cue.cue for cue in other.cues]
    for own, scaled in zip(one.cues, other.cues, strict=True):
        assert scaled.interval.effect == pytest.approx(1000 * own.interval.effect, rel=1e-6)
        assert scaled.verdict == own.verdict


def test_a_factor_of_a_log_measure_changes_nothing() -> None:
    """On the log scale a unit is a shift of every value: the ranking is the same."""
    changes = simulate_library(3, SMALL).changes
    shift = math.log(1000)
    shifted = [
        replace(
            change,
            before=replace(change.before, mean=change.before.mean + shift),
            after=replace(change.after, mean=change.after.mean + shift),
        )
        for change in changes
    ]
    one, other = (prepare_uses(own, contrast="immediate") for own in (changes, shifted))
    assert other.change == pytest.approx(one.change, abs=1e-9)
    assert other.variance == pytest.approx(one.variance, abs=1e-9)
    assert other.design == pytest.approx(one.design, abs=1e-9)


def test_the_order_of_rows_does_not_matter() -> None:
    """A shuffled log prepares to exactly the same numbers."""
    changes = list(simulate_library(3, SMALL).changes)
    one = prepare_uses(changes, contrast="immediate")
    changes = [changes[at] for at in np.random.default_rng(4).permutation(len(changes))]
    other = prepare_uses(changes, contrast="immediate")
    assert np.array_equal(one.design, other.design)
    assert np.array_equal(one.change, other.change)
    assert np.array_equal(one.variance, other.variance)
    assert np.array_equal(one.cue, other.cue)


def test_values_made_another_way_are_left_out_and_said() -> None:
    """The commonest recipe is ranked; the others are counted among the refused."""
    changes = make_changes()
    odd = [
        replace(changes[0], key=replace(KEY, recipe="recipe-b")),
        *changes[1:],
    ]
    prepared = prepare_uses(odd, contrast="immediate")
    assert prepared.change.size == len(changes) - 1
    assert any("measured another way" in reason for reason in prepared.refused)


def test_other_contrasts_are_left_out() -> None:
    """Only changes of the contrast asked for are ranked."""
    changes = make_changes()
    changes[0] = replace(changes[0], contrast="during")
    assert prepare_uses(changes, contrast="immediate").change.size == len(changes) - 1


def test_a_change_of_several_cues_belongs_to_each_by_its_share() -> None:
    """A retention change of two cues carries half a weight for each."""
    changes = [replace(change, contrast="retention", days=3.0) for change in make_changes()]
    changes[1] = replace(changes[1], weights=(("cue-1", 0.5), ("cue-2", 0.5)))
    prepared = prepare_uses(changes, contrast="retention")
    assert prepared.cue_weights is not None
    assert prepared.cue_labels == ("cue-1", "cue-2")
    assert prepared.cue_weights[1] == pytest.approx([0.5, 0.5])
    assert prepared.cue_weights.sum(axis=1) == pytest.approx(
        [1.0 if change.cue_weights else 0.0 for change in changes]
    )
    assert prepared.design[1, prepared.columns.index("has_cue")] == 1.0


def drop_after(change: Change, reason: str) -> NoChange:
    """Return a use that had a before and lost its after."""
    return NoChange(change.use, change.contrast, reason, change.before, change.key)


def test_every_use_met_is_counted_once() -> None:
    """Per cue: met = changed + stopped + no before + no after + other."""
    changes = make_changes()
    cued = [change for change in changes if change.use.cue == "cue-1"]
    gone = [
        drop_after(cued[0], "stopped"),
        drop_after(cued[1], "no_after"),
        NoChange(cued[2].use, "immediate", "no_before"),
        NoChange(cued[3].use, "immediate", "session_not_to_be_used"),
        NoChange(cued[4].use, "retention", "no_after"),
    ]
    left = [change for change in changes if change not in cued[:4]]
    tally = prepare_uses(left, contrast="immediate", without=gone).tallies["cue-1"]
    assert (tally.stopped, tally.no_after, tally.no_before, tally.other) == (1, 1, 1, 1)
    assert tally.changed == len(cued) - 4
    assert tally.met == len(cued)


def test_uses_without_an_after_get_the_covariates_they_would_have_had() -> None:
    """A row that loses its after has its place, visit and cue in the rows for the second fit."""
    changes = make_changes()
    at = next(at for at, change in enumerate(changes) if change.use.cue == "cue-2" and at > 6)
    left = changes[:at] + changes[at + 1 :]
    prepared = prepare_uses(
        left,
        contrast="immediate",
        without=[
            drop_after(changes[at], "stopped"),
            NoChange(changes[at].use, "immediate", "no_before"),
        ],
    )
    missing = prepared.missing
    assert missing is not None
    assert missing.reason == ("stopped",)
    row = dict(zip(prepared.columns, missing.design[0], strict=True))
    assert (row["intercept"], row["has_cue"]) == (1.0, 1.0)
    visits = np.log(1.0 + np.array([change.use.t for change in left]))
    assert row["session"] == pytest.approx(math.log(1.0 + changes[at].use.t) - visits.mean())
    assert prepared.cue_labels[missing.cue[0]] == "cue-2"
    assert prepared.learner_labels[missing.learner[0]] == changes[at].use.learner


def test_the_state_of_a_missing_use_is_what_the_same_use_would_have() -> None:
    """A use lost beside an equal one that was measured has the same place against its learner."""
    changes = make_changes()
    twin = replace(changes[7], use=replace(changes[7].use, use="twin"))
    prepared = prepare_uses(changes, contrast="immediate", without=[drop_after(twin, "no_after")])
    missing = prepared.missing
    assert missing is not None
    state = prepared.columns.index("state")
    assert missing.design[0, state] == pytest.approx(prepared.design[7, state], abs=1e-9)


def test_nothing_at_all_is_prepared_without_a_crash() -> None:
    """No change gives empty arrays and no reference."""
    prepared = prepare_uses([], contrast="immediate")
    assert prepared.change.size == 0
    assert not prepared.reference.is_shown
    assert prepared.missing is None


def test_a_later_opening_does_not_reach_back() -> None:
    """Across days, what happens at the last visit leaves the states of all earlier ones alone."""
    changes = [replace(one, contrast="retention", days=3.0) for one in make_changes()]
    other = list(changes)
    other[5] = replace(other[5], before=replace(other[5].before, mean=40.0))
    one, moved = (prepare_uses(own, contrast="retention") for own in (changes, other))
    at = one.columns.index("state")
    assert moved.design[:5, at] == pytest.approx(one.design[:5, at])
    assert moved.design[5, at] > one.design[5, at] + 10


def test_two_changes_from_one_opening_have_one_state() -> None:
    """Rows of the same visit start from the same opening: it is counted once."""
    changes = [replace(one, contrast="transfer_later", days=3.0) for one in make_changes()]
    twin = replace(changes[2], use=replace(changes[2].use, use="twin", k=2))
    prepared = prepare_uses([*changes, twin], contrast="transfer_later")
    at = prepared.columns.index("state")
    assert prepared.design[2, at] == pytest.approx(prepared.design[3, at])


def test_a_missing_retention_has_the_state_of_its_visit() -> None:
    """A visit whose next opening never came is placed against what was usual by then."""
    changes = [replace(one, contrast="retention", days=3.0) for one in make_changes()]
    prepared = prepare_uses(
        changes, contrast="retention", without=[drop_after(changes[9], "no_after")]
    )
    missing = prepared.missing
    assert missing is not None
    for name in ("state", "level"):
        at = prepared.columns.index(name)
        assert missing.design[0, at] == pytest.approx(prepared.design[9, at])


def test_intervals_of_retention_cover_the_truth() -> None:
    """In ten chains of visits at least nine in ten 95 % intervals hold the true effect."""
    covered = []
    for seed in range(1, 11):
        library = simulate_retention(seed, RetentionScenario())
        ranking = rank_cues(
            prepare_uses(library.changes, contrast="retention"),
            ReviewQuestion(metric="m", contrast="retention", allowance=0.0),
        )
        assert ranking.reference == "practice_alone"
        covered += [
            cue.interval.low95 <= library.truth[cue.cue] <= cue.interval.high95
            for cue in ranking.cues
        ]
    assert len(covered) == 150
    assert sum(covered) / len(covered) >= 0.91
