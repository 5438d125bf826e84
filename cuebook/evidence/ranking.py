"""The top of the evidence package: prepared uses and a question in, a ranking out."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING

import numpy as np

from cuebook.evidence.arrays import IntArray
from cuebook.evidence.cue_facts import count_learners, count_uses, gather_facts
from cuebook.evidence.cue_model import (
    HAS_CUE,
    STATE,
    CueModel,
    fit_cue_model,
    list_model_rows,
)
from cuebook.evidence.cue_results import Background, list_cue_results
from cuebook.evidence.judgement import (
    Judgement,
    compare_with_mean,
    compute_allowance,
    judge_effects,
)
from cuebook.evidence.mixture import NormalMixture
from cuebook.evidence.parts import find_parts
from cuebook.evidence.question import ReviewQuestion, WatchMetric
from cuebook.evidence.ranking_notes import list_notes, list_refusals
from cuebook.evidence.result import DetectableChange, Interval, Ranking, Worthwhile
from cuebook.evidence.second_fit import fit_with_missing
from cuebook.evidence.thresholds import (
    WITHIN_SESSION,
    choose_worthwhile,
    compute_detectable,
    convert_step,
)
from cuebook.practice.changes import HarmTally

if TYPE_CHECKING:
    from cuebook.evidence.prepared import PreparedUses

FEWEST_CHANGES = 3


def rank_cues(
    prepared: PreparedUses,
    question: ReviewQuestion,
    *,
    harms: Mapping[str | None, HarmTally] | None = None,
    watch: Sequence[WatchMetric] = (),
) -> Ranking:
    """Rank the cues of a question, each with its interval, a word and what it rests on.

    Parameters
    ----------
    prepared : changes of one metric, task and contrast.
    question : direction and scale of the metric, and the choices the answer depends on.
    harms : stops and events per cue, over all its uses; key None is practice alone.
    watch : rankings of the metrics that should not get worse meanwhile.

    Returns
    -------
    A ranking; with too few changes one without cues that says so. The same uses and question give
    the same numbers to the last digit.
    """
    if len(prepared.change) < FEWEST_CHANGES:
        return _refuse_all(prepared, question)
    rows, row_notes = list_model_rows(prepared)
    model = fit_cue_model(rows)
    part = _number_parts(prepared)
    has_reference = prepared.reference.is_shown and HAS_CUE in rows.columns
    facts = gather_facts(prepared, _list_caps(prepared))
    worthwhile = _choose_worthwhile(prepared, question)
    detectable = _find_detectable(prepared, question, model)

    def judge(fitted: CueModel) -> Judgement:
        combination = fitted.combination
        if not has_reference:
            combination = compare_with_mean(combination, part)
        allowance = compute_allowance(
            question.allowance,
            fitted.compute_variances()["residual"],
            prepared.moments,
            np.array([fact.share_random for fact in facts]),
            practice_is_random=not has_reference or prepared.reference.practice_randomised,
        )
        return judge_effects(fitted, combination, allowance, worthwhile.value)

    main = judge(model)
    second_model = fit_with_missing(model, prepared)
    background = Background(
        prepared=prepared,
        question=question,
        facts=facts,
        part=part,
        has_reference=has_reference,
        worthwhile=worthwhile.value,
        detectable=detectable.value if detectable and has_reference else None,
        harms=harms or {},
        watch=watch,
    )
    cues, tie_band = list_cue_results(
        background, main, None if second_model is None else judge(second_model)
    )
    practice = main.get_column("intercept")
    slope = main.get_column(STATE)
    regression_slope = None if slope is None else float(slope.compute_mean()[0])
    return Ranking(
        question=question,
        n_uses=count_uses(prepared, np.ones(len(prepared.change), dtype=bool)),
        n_learners=count_learners(prepared, np.ones(len(prepared.change), dtype=bool)),
        method=_name_method(model),
        reference="practice_alone" if has_reference else "mean_of_cues",
        practice_alone=_read_interval(practice) if has_reference and practice else None,
        worthwhile=worthwhile,
        detectable=detectable,
        cues=cues,
        variances=model.compute_variances(),
        regression_slope=regression_slope,
        bias=main.allowance.sd,
        tie_band=tie_band,
        mean_before=_know(prepared.moments.mean_before),
        counts=_count(prepared),
        notes=(*row_notes, *list_notes(prepared, question, main, regression_slope, cues)),
        refused=list_refusals(
            prepared, question, has_reference=has_reference, part=part, detectable=detectable
        ),
    )


def _number_parts(prepared: PreparedUses) -> IntArray:
    """Return the connected part of each cue."""
    uses: list[tuple[str | None, str]] = []
    for row, (cue, learner) in enumerate(
        zip(prepared.cue.tolist(), prepared.learner.tolist(), strict=True)
    ):
        name = prepared.learner_labels[learner]
        cues = [cue]
        if prepared.cue_weights is not None and cue >= 0:
            cues = np.flatnonzero(prepared.cue_weights[row] > 0).tolist()
        uses += [(prepared.cue_labels[at] if at >= 0 else None, name) for at in cues]
    part = find_parts(uses)
    return np.array([part[cue] for cue in prepared.cue_labels], dtype=np.intp)


def _list_caps(prepared: PreparedUses) -> tuple[str, ...]:
    """Return why no cue of this review can be graded above C."""
    reasons = prepared.reference.reasons if prepared.reference.caps_at_c else ()
    if math.isnan(prepared.moments.vw):
        reasons = (*reasons, "too few repeated visits to separate day from person")
    return reasons


def _choose_worthwhile(prepared: PreparedUses, question: ReviewQuestion) -> Worthwhile:
    moments = prepared.moments
    return choose_worthwhile(
        question,
        n_changes=len(prepared.change),
        state_variance=_know(moments.sx2),
        within_variance=_know(moments.vw),
        sd_change=moments.sd_change,
        resolution=convert_step(question.resolution, question, _know(moments.mean_before)),
    )


def _find_detectable(
    prepared: PreparedUses, question: ReviewQuestion, model: CueModel
) -> DetectableChange | None:
    """Return the MDC95 of a typical learner, where attempts and blocks can be told apart."""
    moments = prepared.moments
    if not moments.v_is_modelled or question.contrast not in WITHIN_SESSION:
        return None
    return compute_detectable(
        question,
        attempt_variance=moments.s0_squared,
        freedom=moments.d0,
        block_variance=model.compute_variances()["residual"],
        mean_before=_know(moments.mean_before),
    )


def _know(value: float) -> float | None:
    """Return None in place of NaN."""
    return None if math.isnan(value) else value


def _read_interval(mixture: NormalMixture) -> Interval:
    ends = [float(mixture.compute_quantile(level)[0]) for level in (0.1, 0.9, 0.025, 0.975)]
    return Interval(float(mixture.compute_mean()[0]), *ends)


def _name_method(model: CueModel) -> str:
    if model.posterior.is_plug_in:
        return "crossed mixed model, variances held at the posterior mode"
    return "crossed mixed model, variances averaged over their posterior"


def _count(prepared: PreparedUses) -> dict[str, int]:
    tallies = prepared.tallies.values()
    practice = prepared.cue < 0
    return {
        "changes": len(prepared.change),
        "practice_alone_changes": int(practice.sum()),
        "cues": len(prepared.cue_labels),
        "met": sum(tally.met for tally in tallies),
        "stopped": sum(tally.stopped for tally in tallies),
        "no_before": sum(tally.no_before for tally in tallies),
        "no_after": sum(tally.no_after for tally in tallies),
        "other": sum(tally.other for tally in tallies),
    }


def _refuse_all(prepared: PreparedUses, question: ReviewQuestion) -> Ranking:
    found = len(prepared.change)
    return Ranking(
        question=question,
        n_uses=found,
        n_learners=len(set(prepared.learner.tolist())),
        method="none",
        reference="mean_of_cues",
        practice_alone=None,
        worthwhile=_choose_worthwhile(prepared, question),
        detectable=None,
        cues=(),
        variances={},
        regression_slope=None,
        bias=0.0,
        tie_band=(),
        mean_before=_know(prepared.moments.mean_before),
        counts=_count(prepared),
        notes=prepared.notes,
        refused=(
            f"a ranking: {found} changes; log at least {FEWEST_CHANGES} with attempts around them",
            *prepared.refused,
        ),
    )
