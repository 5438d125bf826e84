"""A ranking as a plain document: ``cuebook.review/1``. Light: loads no numpy."""

from __future__ import annotations

import math

from cuebook.evidence.display_scale import convert_effect, name_display_unit
from cuebook.evidence.harms import count_falls, count_harms
from cuebook.evidence.result import CueResult, Interval, Ranking

FORMAT = "cuebook.review/1"
ENGINE = "crossed/1"
"""Changes whenever the same log would give other numbers."""


def ranking_to_document(ranking: Ranking) -> dict[str, object]:
    """Return the document of a ranking; numbers are unrounded, what is unknown is None."""
    question = ranking.question
    practice = ranking.practice_alone
    detectable = ranking.detectable
    document: dict[str, object] = {
        "format": FORMAT,
        "metric": question.metric,
        "unit": question.unit,
        "better": question.better,
        "target": question.target,
        "transform": question.transform,
        "display_unit": name_display_unit(question),
        "contrast": question.contrast,
        "task": question.task,
        "filters": dict(question.filters),
        "n_uses": ranking.n_uses,
        "n_learners": ranking.n_learners,
        "method": ranking.method,
        "engine": ENGINE,
        "evidence_revision": question.evidence_revision,
        "reference": ranking.reference,
        "practice_alone": None if practice is None else _show_interval(ranking, practice),
        "worthwhile": ranking.worthwhile.value,
        "worthwhile_source": ranking.worthwhile.source,
        "worthwhile_note": ranking.worthwhile.note,
        "worthwhile_display": _show(ranking, ranking.worthwhile.value),
        "mdc95_one_learner": None if detectable is None else detectable.value,
        "mdc95_details": None
        if detectable is None
        else {
            "n_before": detectable.attempts_before,
            "n_after": detectable.attempts_after,
            "nu": detectable.freedom,
            "occasion": detectable.occasion,
            "low_display": detectable.low_display,
            "high_display": detectable.high_display,
        },
        "allowance": question.allowance,
        "bias": ranking.bias,
        "regression_slope": ranking.regression_slope,
        "tie_band": list(ranking.tie_band),
        "cues": [_show_cue(ranking, line) for line in ranking.cues],
        "variances": {
            name: ranking.variances.get(name)
            for name in ("residual", "cue", "learner", "cue_by_learner", "event")
        },
        "counts": dict(ranking.counts),
        "notes": list(ranking.notes),
        "refused": list(ranking.refused),
        "refused_rows": [dict(row) for row in ranking.refused_rows],
    }
    return {key: _drop_not_finite(value) for key, value in document.items()}


def _show_cue(ranking: Ranking, line: CueResult) -> dict[str, object]:
    return {
        "cue": line.cue,
        "kind": line.kind,
        "uses": line.uses,
        "learners": line.learners,
        **_show_interval(ranking, line.interval),
        "sd": line.sd,
        "p_better": line.p_better,
        "p_worthwhile": line.p_worthwhile,
        "p_worse": line.p_worse,
        "p_no_difference": line.p_no_difference,
        "p_next_learner": line.p_next_learner,
        "part": line.part,
        "rank": line.rank,
        "expected_rank": line.expected_rank,
        "rank_low90": line.rank_low90,
        "rank_high90": line.rank_high90,
        "p_best": line.p_best,
        "expected_loss": line.expected_loss,
        "verdict": line.verdict,
        "verdict_beside": line.verdict_beside,
        "verdict_if_missing_bad": line.verdict_if_missing_bad,
        "sign": line.sign,
        "words": line.words,
        "missing": list(line.missing),
        "grade": line.grade,
        "grade_words": line.grade_words,
        "grade_reasons": list(line.grade_reasons),
        "going_badly": line.going_badly,
        "more_uses": line.more_uses,
        "more_uses_note": line.more_uses_note,
        "met": line.met,
        "stopped": line.stopped,
        "no_after": line.no_after,
        "harms": count_harms(line.harms),
        "harm_details": {
            "uses": line.harms.uses,
            "times_said": line.harms.times_said,
            "stops": dict(line.harms.stops),
            "events": dict(line.harms.events),
            "falls": count_falls(line.harms),
            "declined": line.harms.declined,
        },
        "watch": [
            {
                "metric": watched.metric,
                "effect": watched.effect,
                "worthwhile": watched.worthwhile,
                "p_worse": watched.p_worse,
                "trade_off": watched.trade_off,
            }
            for watched in line.watch
        ],
        "marks": list(line.marks),
    }


def _show_interval(ranking: Ranking, interval: Interval) -> dict[str, object]:
    ends = {
        "low80": interval.low80,
        "high80": interval.high80,
        "low95": interval.low95,
        "high95": interval.high95,
    }
    shown = sorted(_show(ranking, end) for end in (interval.low95, interval.high95))
    return {
        "effect": interval.effect,
        "effect_display": _show(ranking, interval.effect),
        **ends,
        "low95_display": shown[0],
        "high95_display": shown[1],
    }


def _show(ranking: Ranking, effect: float) -> float:
    return convert_effect(effect, ranking.question, ranking.mean_before)


def _drop_not_finite(value: object) -> object:
    """Return the value with None in place of what JSON has no word for."""
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    if isinstance(value, dict):
        return {key: _drop_not_finite(part) for key, part in value.items()}
    if isinstance(value, list):
        return [_drop_not_finite(part) for part in value]
    return value
