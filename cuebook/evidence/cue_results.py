"""Each cue's line of a ranking, put together and sorted."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from cuebook.evidence.arrays import IntArray
from cuebook.evidence.cue_facts import CueFacts
from cuebook.evidence.cue_model import HAS_CUE
from cuebook.evidence.harms import must_look
from cuebook.evidence.judgement import Judgement
from cuebook.evidence.question import ReviewQuestion, WatchMetric
from cuebook.evidence.ranks import Ranks, draw_ranks
from cuebook.evidence.result import CueResult, Interval, WatchLine
from cuebook.evidence.still_needed import StillNeeded, count_still_needed
from cuebook.evidence.verdicts import (
    SIGNS,
    WATCH_WORSE,
    Verdict,
    VerdictInput,
    choose_words,
    decide_verdict,
    list_missing,
    soften_verdict,
)
from cuebook.practice.changes import HarmTally

if TYPE_CHECKING:
    from cuebook.evidence.prepared import PreparedUses

TIE_CHANCE = 0.2
CLEAR_BEST = 0.5
TRADE_BETTER = 0.8


@dataclass(frozen=True, slots=True, eq=False)
class Background:
    """What all lines share."""

    prepared: PreparedUses
    question: ReviewQuestion
    facts: tuple[CueFacts, ...]
    part: IntArray
    has_reference: bool
    worthwhile: float
    detectable: float | None
    """None: no detectable change, or no reference to measure it from."""
    harms: Mapping[str | None, HarmTally]
    watch: Sequence[WatchMetric]


def list_cue_results(
    background: Background, main: Judgement, supposed: Judgement | None
) -> tuple[tuple[CueResult, ...], tuple[str, ...]]:
    """Return all lines, best first, and the cues that may well be as good as the first.

    Parameters
    ----------
    main : effects from what was measured.
    supposed : effects had all unmeasured uses gone badly; None where none is missing.
    """
    shown = _Shown(background, main)
    order = shown.sort()
    verdicts = [_decide(background, main, supposed, at) for at in range(len(background.facts))]
    lines = tuple(_write_line(background, shown, at, *verdicts[at]) for at in order)
    return lines, tuple(background.prepared.cue_labels[at] for at in order if shown.ties[at])


class _Shown:
    """Arrays of what is shown, by cue."""

    def __init__(self, background: Background, main: Judgement) -> None:
        self.background, self.main = background, main
        mixture = main.widened
        self.mean, self.sd = mixture.compute_mean(), mixture.compute_sd()
        self.ends = [mixture.compute_quantile(level) for level in (0.1, 0.9, 0.025, 0.975)]
        self.next_learner = (
            None
            if background.detectable is None
            else main.compute_next_learner(background.detectable)
        )
        self.is_known = np.array([fact.learners > 1 for fact in background.facts], dtype=bool)
        self.ranks: dict[int, tuple[Ranks, int]] = {}
        """Cue to the ranks of its part and its place in them."""
        self.ties = np.zeros(len(self.mean), dtype=bool)
        self._rank_parts()
        practice = main.get_column(HAS_CUE)
        self.practice_variance = 0.0 if practice is None else float(practice.compute_sd()[0]) ** 2
        self.noise_variance = _sum_noise(background, main)

    def sort(self) -> list[int]:
        """Return positions: parts in turn, best first, cues met by one learner last."""
        labels = self.background.prepared.cue_labels
        return sorted(
            range(len(self.mean)),
            key=lambda at: (
                not self.is_known[at],
                int(self.background.part[at]),
                -float(self.mean[at]),
                labels[at],
            ),
        )

    def find_place(self, at: int) -> int | None:
        """Return the rank of a cue by its mean, within its part."""
        if at not in self.ranks:
            return None
        same = self.is_known & (self.background.part == self.background.part[at])
        return 1 + int((self.mean[same] > self.mean[at]).sum())

    def _rank_parts(self) -> None:
        for number in np.unique(self.background.part):
            cues = np.flatnonzero((self.background.part == number) & self.is_known)
            if not len(cues):
                continue
            ranks = draw_ranks(self.main.effects, self.main.allowance.own, cues)
            for place, at in enumerate(ranks.cues.tolist()):
                self.ranks[at] = (ranks, place)
            if number == 0:
                first = ranks.cues[int(np.argmax(self.mean[ranks.cues]))]
                self.ties[ranks.cues] = ranks.p_above_first >= TIE_CHANCE
                self.ties[first] = True


def _decide(
    background: Background, main: Judgement, supposed: Judgement | None, at: int
) -> tuple[VerdictInput, Verdict, Verdict | None]:
    """Return what the rules saw, what is said, and what bad unmeasured uses would say."""
    given = _list_given(background, main, at)
    verdict = decide_verdict(given)
    if supposed is None:
        return given, verdict, None
    other = decide_verdict(_list_given(background, supposed, at))
    if (other.beside or other.slug) == (verdict.beside or verdict.slug):
        return given, verdict, None
    return given, soften_verdict(verdict, other), other


def _list_given(background: Background, judgement: Judgement, at: int) -> VerdictInput:
    fact = background.facts[at]
    tally = _get_harms(background, at)
    return VerdictInput(
        learners=fact.learners,
        uses=fact.uses,
        has_reference=background.has_reference,
        grade=fact.grade.letter,
        p_better=float(judgement.p_better[at]),
        p_worthwhile=float(judgement.p_worthwhile[at]),
        p_worse=float(judgement.p_worse[at]),
        p_no_difference=float(judgement.p_no_difference[at]),
        watch=_list_watch(background, float(judgement.p_better[at]), at),
        must_look=must_look(tally),
        misses_after=fact.misses_after,
    )


def _get_harms(background: Background, at: int) -> HarmTally:
    return background.harms.get(background.prepared.cue_labels[at], HarmTally())


def _list_watch(background: Background, p_better: float, at: int) -> tuple[WatchLine, ...]:
    cue = background.prepared.cue_labels[at]
    return tuple(
        WatchLine(
            metric=watched.metric,
            p_worse=line.p_worse,
            worthwhile=watched.ranking.worthwhile.value,
            effect=line.interval.effect,
            trade_off=p_better >= TRADE_BETTER and line.p_worse >= WATCH_WORSE,
        )
        for watched in background.watch
        for line in watched.ranking.cues
        if line.cue == cue
    )


def _write_line(
    background: Background,
    shown: _Shown,
    at: int,
    given: VerdictInput,
    verdict: Verdict,
    if_missing_bad: Verdict | None,
) -> CueResult:
    prepared, question, fact = background.prepared, background.question, background.facts[at]
    cue = prepared.cue_labels[at]
    mean = float(shown.mean[at])
    tally = prepared.tallies.get(cue)
    needed = _count_needed(background, shown, at)
    ranks, place = shown.ranks.get(at, (None, 0))
    next_learner = shown.next_learner
    return CueResult(
        cue=cue,
        kind=prepared.kind_of_cue.get(cue),
        uses=fact.uses,
        learners=fact.learners,
        interval=Interval(mean, *(float(end[at]) for end in shown.ends)),
        sd=float(shown.sd[at]),
        p_better=given.p_better,
        p_worthwhile=given.p_worthwhile,
        p_worse=given.p_worse,
        p_no_difference=given.p_no_difference,
        p_next_learner=None if next_learner is None else float(next_learner[at]),
        part=int(background.part[at]),
        rank=shown.find_place(at),
        expected_rank=None if ranks is None else float(ranks.expected[place]),
        rank_low90=None if ranks is None else int(ranks.low90[place]),
        rank_high90=None if ranks is None else int(ranks.high90[place]),
        p_best=None if ranks is None else float(ranks.p_best[place]),
        expected_loss=None if ranks is None else float(ranks.expected_loss[place]),
        verdict=verdict.slug,
        verdict_beside=verdict.beside,
        sign=SIGNS[verdict.slug],
        words=choose_words(verdict.slug, given.grade, question.metric, given.watch),
        missing=list_missing(given, _name_practice_needed(background)),
        verdict_if_missing_bad=None if if_missing_bad is None else if_missing_bad.slug,
        grade=fact.grade.letter,
        grade_words=fact.grade.words,
        grade_reasons=fact.grade.reasons,
        going_badly=fact.going_badly,
        more_uses=needed.uses,
        more_uses_note=needed.note,
        met=fact.uses if tally is None else tally.met,
        stopped=0 if tally is None else tally.stopped,
        no_after=0 if tally is None else tally.no_after,
        harms=_get_harms(background, at),
        watch=given.watch,
        marks=_list_marks(shown, at, ranks, place),
    )


def _name_practice_needed(background: Background) -> str:
    reasons = background.prepared.reference.reasons
    return reasons[0] if reasons else "add blocks without a cue"


def _list_marks(shown: _Shown, at: int, ranks: Ranks | None, place: int) -> tuple[str, ...]:
    if not shown.is_known[at]:
        return ("one_learner_only",)
    marks = []
    if ranks is not None:
        width = int(ranks.high90[place] - ranks.low90[place])
        if len(ranks.cues) > 1 and width > len(ranks.cues) / 2:
            marks.append("rank_not_known")
        if shown.find_place(at) == 1 and ranks.p_best[place] < CLEAR_BEST:
            marks.append("no_clear_best")
    if shown.ties[at]:
        marks.append("in_tie_band")
    return tuple(marks)


def _sum_noise(background: Background, main: Judgement) -> float:
    """Return the variance of one further use, all sources together."""
    variances = main.model.compute_variances()
    noise = float(main.model.rows.variance.mean()) + variances["residual"]
    noise += variances.get("cue_by_learner", 0.0)
    prepared = background.prepared
    cued = set(prepared.learner[prepared.cue >= 0].tolist())
    with_practice = cued & set(prepared.learner[prepared.cue < 0].tolist())
    if 2 * len(with_practice) < len(cued):
        noise += variances.get("learner", 0.0)
    return noise


def _count_needed(background: Background, shown: _Shown, at: int) -> StillNeeded:
    """Return how many uses would tell the effect from the nearer edge of what matters."""
    mean, sd = float(shown.mean[at]), float(shown.sd[at])
    edge = background.worthwhile if mean >= 0 else -background.worthwhile
    allowance = shown.main.allowance
    bias = float(np.sqrt(allowance.own[at] + allowance.shared))
    needed = count_still_needed(mean - edge, sd, shown.noise_variance, bias)
    if needed.uses != 0 and background.has_reference and shown.practice_variance > sd**2 / 2:
        note = "more practice without a cue would help most"
        return StillNeeded(needed.uses, f"{needed.note}; {note}" if needed.note else note)
    return needed
