"""The ranking from changes to document: laws, refusals, and what is said beside the numbers."""

from __future__ import annotations

import json
import math
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from support.simulated_libraries import (
    CONFOUNDED,
    KEY,
    RANDOM_ORDER,
    Library,
    Scenario,
    simulate_library,
)
from support.simulated_occasions import ClassScenario, simulate_classes

from cuebook.evidence.preparation import prepare_uses
from cuebook.evidence.question import ReviewQuestion, WatchMetric
from cuebook.evidence.ranking import rank_cues
from cuebook.evidence.ranking_document import ranking_to_document
from cuebook.evidence.result import Ranking
from cuebook.practice.changes import AttemptSet, Change, HarmTally, NoChange, UseRecord

QUESTION = ReviewQuestion(metric="sparc")
SMALL = Scenario(n_learners=8, n_cues=5, n_uses=120)
CONTRACT = {
    "format",
    "metric",
    "unit",
    "better",
    "transform",
    "contrast",
    "n_uses",
    "n_learners",
    "method",
    "engine",
    "evidence_revision",
    "reference",
    "practice_alone",
    "worthwhile",
    "mdc95_one_learner",
    "cues",
    "variances",
    "counts",
    "notes",
    "refused",
}
CONTRACT_OF_CUE = {
    "cue",
    "kind",
    "uses",
    "learners",
    "effect",
    "effect_display",
    "low80",
    "high80",
    "low95",
    "high95",
    "p_better",
    "p_worthwhile",
    "p_next_learner",
    "rank",
    "rank_low90",
    "rank_high90",
    "p_best",
    "verdict",
    "grade",
    "more_uses",
    "stopped",
    "no_after",
    "harms",
    "watch",
}


def rank(
    changes: tuple[Change, ...],
    question: ReviewQuestion = QUESTION,
    without: tuple[NoChange, ...] = (),
    kinds: dict[str, str] | None = None,
    **others: Any,
) -> Ranking:
    """Prepare and rank changes."""
    prepared = prepare_uses(changes, contrast=question.contrast, without=without, kinds=kinds or {})
    return rank_cues(prepared, question, **others)


def rescale(change: Change, factor: float) -> Change:
    """Return a change in another unit."""

    def of_set(attempts: AttemptSet) -> AttemptSet:
        return AttemptSet(attempts.mean * factor, attempts.n, attempts.sum_of_squares * factor**2)

    return replace(change, before=of_set(change.before), after=of_set(change.after))


def make_change(
    cue: str | None, learner: str, before: float, after: float, t: int, k: int = 1
) -> Change:
    """Return a change of single attempts."""
    record = UseRecord(
        use=f"{learner}-{t}-{k}",
        learner=learner,
        cue=cue,
        task="reaching",
        session=f"{learner}-{t}",
        k=k,
        t=t,
    )
    return Change(record, "immediate", KEY, AttemptSet(before, 1, 0.0), AttemptSet(after, 1, 0.0))


@pytest.fixture(scope="module")
def library() -> Library:
    """Return a small confounded library."""
    return simulate_library(2001, SMALL)


@pytest.fixture(scope="module")
def ranking(library: Library) -> Ranking:
    """Return its ranking."""
    return rank(library.changes, kinds=dict(library.kinds))


def test_document_holds_every_agreed_key(ranking: Ranking) -> None:
    """The document has the agreed format, keys and plain JSON values."""
    document = ranking_to_document(ranking)
    assert document["format"] == "cuebook.review/1"
    assert set(document) >= CONTRACT
    read = json.loads(json.dumps(document, allow_nan=False))
    for line in read["cues"]:
        assert set(line) >= CONTRACT_OF_CUE
    assert set(read["variances"]) >= {"residual", "cue", "learner", "cue_by_learner"}
    assert set(read["practice_alone"]) >= {"effect", "low95", "high95"}


def test_intervals_nest_and_lines_come_best_first(ranking: Ranking) -> None:
    """The 80 % interval lies within the 95 %, the effect within both; lines sort by effect."""
    for line in ranking.cues:
        ends = line.interval
        assert ends.low95 < ends.low80 < ends.effect < ends.high80 < ends.high95
        assert line.rank_low90 is not None
        assert line.rank_high90 is not None
        assert 1 <= line.rank_low90 <= line.rank_high90 <= len(ranking.cues)
    effects = [line.interval.effect for line in ranking.cues]
    assert effects == sorted(effects, reverse=True)
    assert [line.rank for line in ranking.cues] == list(range(1, len(effects) + 1))
    assert sum(line.p_best or 0.0 for line in ranking.cues) == pytest.approx(1.0)


def test_same_uses_in_any_order_give_the_same_document(library: Library, ranking: Ranking) -> None:
    """Neither a second run nor another order of the rows changes a digit."""
    order = np.random.default_rng(3).permutation(len(library.changes))
    mixed = tuple(library.changes[at] for at in order)
    again = rank(mixed, kinds=dict(library.kinds))
    assert ranking_to_document(again) == ranking_to_document(ranking)


@pytest.mark.parametrize("factor", [0.01, 1000.0])
def test_unit_of_the_metric_changes_only_the_unit_of_the_answer(
    library: Library, ranking: Ranking, factor: float
) -> None:
    """Centimetres instead of metres: effects scale, probabilities, ranks and words stay."""
    scaled = rank(
        tuple(rescale(change, factor) for change in library.changes), kinds=dict(library.kinds)
    )
    for line, other in zip(ranking.cues, scaled.cues, strict=True):
        assert other.cue == line.cue
        assert other.interval.effect == pytest.approx(line.interval.effect * factor, rel=1e-6)
        assert other.interval.low95 == pytest.approx(line.interval.low95 * factor, rel=1e-5)
        assert other.p_better == pytest.approx(line.p_better, abs=1e-7)
        assert other.verdict == line.verdict
        assert other.more_uses == line.more_uses
        assert other.p_best == pytest.approx(line.p_best, abs=2e-3)


def test_regression_to_the_mean_has_its_predicted_slope(ranking: Ranking) -> None:
    """With several attempts a set, theory predicts a slope of -1 for the before-value."""
    assert ranking.regression_slope == pytest.approx(-1.0, abs=0.5)


def test_allowance_widens_and_random_order_needs_none(library: Library) -> None:
    """The allowance widens every interval; after random order it adds nothing to a cue's own."""
    free = rank(library.changes, replace(QUESTION, allowance=0.0))
    wide = rank(library.changes, replace(QUESTION, allowance=0.6))
    for line in free.cues:
        other = next(o for o in wide.cues if o.cue == line.cue)
        assert other.sd > line.sd
        assert other.interval.effect == pytest.approx(line.interval.effect)
    fair = simulate_library(2002, replace(RANDOM_ORDER, n_learners=8, n_cues=4, n_uses=240))
    first, second = (
        rank(fair.changes, replace(QUESTION, allowance=allowance)) for allowance in (0.0, 0.6)
    )
    assert [line.sd for line in first.cues] == [line.sd for line in second.cues]
    assert {line.grade for line in first.cues} == {"A"}
    assert {line.grade_words for line in first.cues} == {"random order"}


def test_without_practice_alone_cues_are_compared_with_one_another(library: Library) -> None:
    """No practice-only uses: no effect over practice alone, no strong word, and the cure named."""
    cued = tuple(change for change in library.changes if change.use.cue)
    found = rank(cued)
    assert found.reference == "mean_of_cues"
    assert found.practice_alone is None
    assert sum(line.interval.effect for line in found.cues) == pytest.approx(0.0, abs=1e-9)
    assert all(line.p_next_learner is None for line in found.cues)
    assert not {"helps", "seems_worse"} & {line.verdict for line in found.cues}
    assert any("practice alone" in reason for reason in found.refused)


def test_unlinked_parts_are_ranked_apart() -> None:
    """Cues of learners who share nothing are not put in one order."""
    rng = np.random.default_rng(5)
    changes = tuple(
        make_change(cue, learner, b := float(rng.normal()), b + float(rng.normal()), t)
        for cues, learners in ((("oar", "tide"), "abc"), (("kite", "moon", "reed"), "def"))
        for learner in learners
        for t, cue in enumerate(cues * 4)
    )
    found = rank(changes)
    assert {line.part for line in found.cues} == {0, 1}
    for part, size in ((0, 3), (1, 2)):
        lines = [line for line in found.cues if line.part == part]
        assert [line.rank for line in lines] == list(range(1, size + 1))
        assert sum(line.p_best or 0.0 for line in lines) == pytest.approx(1.0)
    assert any("2 parts" in reason for reason in found.refused)


def test_cue_met_by_one_learner_gets_no_verdict(library: Library) -> None:
    """A cue that only one learner met stands last, unranked, with 'one learner only'."""
    learner = library.changes[0].use.learner
    lonely = tuple(
        replace(change, use=replace(change.use, cue="lonely"))
        if change.use.cue and change.use.learner == learner
        else change
        for change in library.changes
    )
    last = rank(lonely).cues[-1]
    assert (last.cue, last.verdict, last.rank) == ("lonely", "one_learner_only", None)
    assert last.marks == ("one_learner_only",)


def test_stops_stand_before_any_praise(library: Library, ranking: Ranking) -> None:
    """A fall with the best cue puts 'stop and look' before it and praise is withheld."""
    best = ranking.cues[0].cue
    harms = {best: HarmTally(20, stops={"fall_or_near_fall": 1}, times_said=50)}
    found = rank(library.changes, harms=harms, kinds=dict(library.kinds)).cues[0]
    assert found.cue == best
    assert found.verdict == "stop_and_look"
    assert found.verdict_beside not in {"helps", "promising"}
    document = ranking_to_document(rank(library.changes, harms=harms))
    lines = document["cues"]
    assert isinstance(lines, list)
    assert {line["cue"]: line["harms"] for line in lines}[best] == 1


def test_gain_in_one_metric_and_loss_in_another_is_a_trade() -> None:
    """A cue that lifts the metric and lowers a watched one is said to trade them."""
    strong = Scenario(
        n_learners=12, n_cues=3, n_uses=400, kind_means=(2.0,), cue_sd=0.1, by_bad_day=0.0
    )
    library = simulate_library(2003, strong)
    worse = tuple(
        replace(
            change, after=replace(change.after, mean=2 * change.before.mean - change.after.mean)
        )
        for change in library.changes
    )
    watched = WatchMetric("path_length_cm", rank(worse))
    line = rank(library.changes, watch=[watched]).cues[0]
    assert line.verdict == "traded"
    assert line.words == "gained sparc, lost path_length_cm"
    assert line.watch[0].trade_off


def test_unmeasured_uses_can_take_back_a_verdict() -> None:
    """Many stopped uses, supposed to have gone badly, turn praise into 'cannot tell'."""
    strong = Scenario(n_learners=12, n_cues=3, n_uses=240, kind_means=(0.9,), cue_sd=0.1)
    library = simulate_library(2004, strong)
    best = rank(library.changes).cues[0]
    assert best.verdict == "helps"
    missing = (
        tuple(
            NoChange(
                replace(change.use, use=f"{change.use.use}-x", stop_reason="pain"),
                "immediate",
                "no_after",
                before=change.before,
                key=change.key,
            )
            for change in library.changes
            if change.use.cue == best.cue
        )
        * 2
    )
    found = rank(library.changes, without=missing)
    line = next(line for line in found.cues if line.cue == best.cue)
    assert line.verdict == "cannot_tell"
    assert line.no_after + line.stopped == len(missing)


def test_single_attempts_refuse_the_detectable_change() -> None:
    """Where no block holds two attempts, no change of one learner can be told from noise."""
    library = simulate_library(2005, replace(SMALL, most_attempts=1))
    found = rank(library.changes)
    assert found.detectable is None
    assert any("detectable change" in reason for reason in found.refused)
    assert all(line.p_next_learner is None for line in found.cues)


def test_detectable_change_of_later_days_is_refused(library: Library) -> None:
    """A retention change has no threshold from the attempts of one day."""
    later = tuple(replace(change, contrast="retention", days=3.0) for change in library.changes)
    found = rank(later, replace(QUESTION, contrast="retention"))
    assert found.detectable is None
    assert any("between days" in reason for reason in found.refused)


@pytest.mark.parametrize("n", [0, 1, 2])
def test_too_few_changes_are_an_answer_not_an_error(n: int) -> None:
    """With hardly any changes the answer says what to log."""
    found = rank(tuple(make_change("oar", f"l{at}", 1.0, 2.0, at) for at in range(n)))
    assert found.cues == ()
    assert "log at least 3" in found.refused[0]
    assert ranking_to_document(found)["n_uses"] == n


def test_class_that_shares_a_cue_counts_once() -> None:
    """Uses of a cue said to a whole class count as events; people count as learners."""
    library = simulate_classes(2006, ClassScenario())
    found = rank(library.changes)
    events = {change.use.event for change in library.changes}
    assert found.n_uses == len(events)
    for line in found.cues:
        own = {change.use.event for change in library.changes if change.use.cue == line.cue}
        assert line.uses == len(own)
        assert line.learners % 12 == 0


def test_copying_a_learner_inside_an_event_does_not_narrow_beyond_attempt_noise() -> None:
    """A class twice as large with the same values tells little more about the cue."""
    library = simulate_classes(2007, ClassScenario(n_classes=2, n_sessions=3))
    twice = library.changes + tuple(
        replace(change, use=replace(change.use, use=f"{change.use.use}-copy"))
        for change in library.changes
    )
    plain, copied = rank(library.changes), rank(twice)
    for line in plain.cues:
        other = next(o for o in copied.cues if o.cue == line.cue)
        assert other.uses == line.uses
        assert other.sd > 0.8 * line.sd


@st.composite
def draw_tables(draw: st.DrawFn) -> tuple[Change, ...]:
    """Draw small, odd tables: ties, single learners, constant values, huge and tiny units."""
    unit = draw(st.sampled_from([1e-6, 1.0, 1e6]))
    values = st.sampled_from([0.0, 1.0, 1.5, 2.0, -3.0])
    n = draw(st.integers(3, 24))
    rows = []
    for at in range(n):
        cue = draw(st.sampled_from([None, "oar", "tide", "kite"]))
        learner = draw(st.sampled_from(["ada", "bo", "cy", "di"]))
        before, after = draw(values) * unit, draw(values) * unit
        rows.append(make_change(cue, learner, before, after, at))
    return tuple(rows)


@given(changes=draw_tables())
@settings(max_examples=30, deadline=None)
def test_any_small_table_gets_an_honest_answer(changes: tuple[Change, ...]) -> None:
    """Whatever the table, there is a document of finite numbers, and no strong word."""
    document = ranking_to_document(rank(changes))
    lines = document["cues"]
    assert isinstance(lines, list)
    for line in lines:
        assert math.isfinite(line["effect"])
        assert line["low95"] <= line["low80"] <= line["high80"] <= line["high95"]
        for name in ("p_better", "p_worthwhile", "p_worse", "p_no_difference"):
            assert 0 <= line[name] <= 1
        assert line["verdict"] not in {"helps", "seems_worse", "no_worthwhile_difference"}
    json.dumps(document, allow_nan=False)


def test_default_question_is_calibrated_on_hard_libraries() -> None:
    """Over confounded libraries the shipped 95 % interval covers at least 90 % of true effects."""
    scenario = replace(CONFOUNDED, n_cues=12, n_uses=240, n_learners=15)
    covered = total = 0
    for seed in range(3001, 3031):
        library = simulate_library(seed, scenario)
        for line in rank(library.changes, kinds=dict(library.kinds)).cues:
            covered += line.interval.low95 <= library.truth[line.cue] <= line.interval.high95
            total += 1
    assert covered / total >= 0.90


def test_null_libraries_give_almost_no_praise() -> None:
    """Where no cue works, hardly one in three hundred is called 'helps'."""
    scenario = replace(
        CONFOUNDED, kind_means=(0.0, 0.0), cue_sd=0.0, n_cues=12, n_uses=240, n_learners=15
    )
    verdicts = [
        line.verdict
        for seed in range(3101, 3131)
        for line in rank(simulate_library(seed, scenario).changes).cues
    ]
    assert len(verdicts) > 300
    assert verdicts.count("helps") <= 1
