"""What shifted: from the log (or a table) to a ranking and the plain document of it."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import replace
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any

from cuebook.errors import NeedsAnswerError, UsageError
from cuebook.jobs.review_opening import describe_opening
from cuebook.jobs.review_recorded import list_recorded
from cuebook.jobs.review_request import ReviewDocument, ReviewRequest, TableRequest
from cuebook.metrics.registry import MetricEntry, load_registry
from cuebook.practice.derive import derive_changes
from cuebook.practice.log import PracticeLog
from cuebook.practice.scales import AttemptScale
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.cues import read_cues
from cuebook.store.reading.practice import read_practice_log
from cuebook.store.reading.rankings import read_revision
from cuebook.vocabulary import load_vocabulary, require_slug

if TYPE_CHECKING:
    from cuebook.evidence.preparation import PreparedUses
    from cuebook.evidence.question import ReviewQuestion, WatchMetric
    from cuebook.evidence.result import Ranking
    from cuebook.library.cues import Cue
    from cuebook.practice.changes import Derived

Location = str | Path | None
MOST_WATCHED = 3


def review_library(
    location: Location, request: ReviewRequest, *, keep: bool = True
) -> ReviewDocument:
    """Rank cues for a question; keep the ranking so that screens can show it at once.

    Raises
    ------
    UnknownCodeError : unknown metric, task or filter.
    NeedsAnswerError : a metric without a direction of its own, or several tasks and none named.
    """
    entry = load_registry().get(request.metric)
    _check_filters(request)
    scale = make_scale(entry, request.better)
    with open_for_reading(location) as connection:
        revision = read_revision(connection, "evidence")
        watched = [load_registry().get(name) for name in entry.watch_partners[:MOST_WATCHED]]
        metrics = [entry.metric, *(one.metric for one in watched)]
        log = read_practice_log(connection, metrics)
        cues = {cue.code: cue for cue in read_cues(connection)}
    log, task = _narrow(log, request, entry.metric)
    derived = derive_changes(log, entry.metric, scale)
    ranking = _rank(
        derived,
        entry,
        scale,
        replace(request, task=task),
        revision,
        _rank_watched(log, watched, request),
    )
    document = _finish(ranking, derived, entry, replace(request, task=task), log, cues)
    if keep:
        _keep(location, request, document, revision, document["n_uses"])
    return ReviewDocument(document)


def make_scale(entry: MetricEntry, better: str | None) -> AttemptScale:
    """Return the scale of a metric with a direction: its own, or the one asked for.

    Raises
    ------
    NeedsAnswerError : the metric has none and none was asked for.
    UsageError : a direction that cannot be read.
    """
    direction, target = read_better(better) if better else (entry.better, None)
    if direction == "none" or (direction == "target" and target is None):
        raise NeedsAnswerError(
            f"{entry.name} has no direction of its own.",
            "Say what is better: --better higher, lower or target:VALUE.",
        )
    return AttemptScale(
        metric=entry.metric,
        transform=entry.transform,
        better=direction,
        target=target,
        resolution=entry.resolution,
        unit=entry.unit,
    )


def read_better(text: str) -> tuple[str, float | None]:
    """Return direction and target of ``higher``, ``lower`` or ``target:VALUE``."""
    direction, separator, value = text.partition(":")
    if direction in {"higher", "lower"} and not separator:
        return direction, None
    if direction == "target" and separator:
        try:
            goal = float(value)
        except ValueError:
            goal = math.nan
        if math.isfinite(goal):
            return "target", goal
    raise UsageError(
        f"--better reads '{text}'.", "Write higher, lower, or target:VALUE such as target:0."
    )


def _check_filters(request: ReviewRequest) -> None:
    if request.task is not None:
        require_slug("task", request.task)
    if request.age_band is not None:
        require_slug("age_band", request.age_band)
    if request.background is not None:
        require_slug("background", request.background)


def _narrow(
    log: PracticeLog, request: ReviewRequest, metric: str
) -> tuple[PracticeLog, str | None]:
    """Return the log as far as the question reaches, and the task it is about."""
    chosen = {
        code: learner
        for code, learner in log.learners.items()
        if (request.age_band is None or learner.age_band == request.age_band)
        and (request.background is None or request.background in learner.backgrounds)
    }
    if len(chosen) < len(log.learners):
        sessions = tuple(
            replace(
                session,
                blocks=tuple(
                    replace(
                        block,
                        participations=tuple(
                            part for part in block.participations if part.learner in chosen
                        ),
                    )
                    for block in session.blocks
                ),
            )
            for session in log.sessions
        )
        log = PracticeLog(chosen, sessions)
    tasks = sorted(
        {
            block.task
            for session in log.sessions
            for block in session.blocks
            for part in block.participations
            if part.values.get(metric)
        }
    )
    task = request.task
    if task is None and len(tasks) > 1:
        raise NeedsAnswerError(
            f"{metric} was measured on several tasks: {', '.join(tasks)}.",
            "Pick one with --task.",
        )
    task = task or (tasks[0] if tasks else None)
    # Other tasks stay in the log: a cue given on them is seen, and flagged.
    return log, task


def _rank(
    derived: Derived,
    entry: MetricEntry,
    scale: AttemptScale,
    request: ReviewRequest,
    revision: int | None,
    watch: Sequence[WatchMetric],
) -> Ranking:
    from cuebook.evidence.preparation import prepare_uses  # noqa: PLC0415
    from cuebook.evidence.question import DEFAULT_ALLOWANCE, ReviewQuestion  # noqa: PLC0415
    from cuebook.evidence.ranking import rank_cues  # noqa: PLC0415

    of_task = _keep_task(derived, request.task)
    prepared = prepare_uses(
        of_task.changes,
        contrast=request.contrast,
        without=of_task.without,
        resolution=scale.transformed_resolution,
    )
    question = ReviewQuestion(
        metric=entry.metric,
        contrast=request.contrast,
        unit=entry.unit,
        better=scale.better,
        transform=scale.transform,
        target=scale.target,
        resolution=scale.resolution,
        allowance=DEFAULT_ALLOWANCE if request.allowance is None else request.allowance,
        evidence_revision=revision,
        task=request.task,
        filters={
            name: value
            for name, value in (
                ("age_band", request.age_band),
                ("background", request.background),
            )
            if value is not None
        },
    )
    question = _set_worthwhile(question, request.worthwhile, prepared)
    return rank_cues(prepared, question, harms=of_task.harms, watch=watch)


def _set_worthwhile(
    question: ReviewQuestion, worthwhile: float | None, prepared: PreparedUses
) -> ReviewQuestion:
    """Return the question with the smallest difference that matters on the model's scale."""
    from cuebook.evidence.thresholds import convert_step  # noqa: PLC0415

    if worthwhile is None:
        return question
    if not (worthwhile > 0 and math.isfinite(worthwhile)):
        raise UsageError("--worthwhile must be above 0.", "Give the least that matters.")
    step = convert_step(worthwhile, question, prepared.moments.mean_before)
    return replace(question, worthwhile=step)


def _keep_task(derived: Derived, task: str | None) -> Derived:
    if task is None:
        return derived
    return replace(
        derived,
        uses=tuple(use for use in derived.uses if use.task == task),
        changes=tuple(change for change in derived.changes if change.use.task == task),
        without=tuple(one for one in derived.without if one.use.task == task),
        confused=tuple(pair for pair in derived.confused if pair.key.task == task),
    )


def _rank_watched(
    log: PracticeLog, watched: Sequence[MetricEntry], request: ReviewRequest
) -> list[WatchMetric]:
    """Rank the metrics to keep an eye on; those without values or direction are left out."""
    from cuebook.evidence.question import WatchMetric  # noqa: PLC0415

    rankings = []
    for entry in watched:
        if entry.watch_better not in {"higher", "lower"}:
            continue
        scale = make_scale(entry, entry.watch_better)
        derived = derive_changes(log, entry.metric, scale)
        own = ReviewRequest(entry.metric, request.task, request.contrast)
        ranking = _rank(derived, entry, scale, own, None, ())
        if ranking.cues:
            rankings.append(WatchMetric(entry.metric, ranking))
    return rankings


def _finish(
    ranking: Ranking,
    derived: Derived,
    entry: MetricEntry,
    request: ReviewRequest,
    log: PracticeLog,
    cues: Mapping[str, Cue],
) -> dict[str, Any]:
    """Return the document with the words a reader needs beside the numbers."""
    from cuebook.evidence.ranking_document import ranking_to_document  # noqa: PLC0415

    vocabulary = load_vocabulary()
    document: dict[str, Any] = ranking_to_document(ranking)
    document["metric_name"] = entry.name
    document["task_label"] = vocabulary.task(request.task).label if request.task else None
    document["contrast_words"] = name_contrast(request.contrast)
    for line in document["cues"]:
        cue = cues.get(line["cue"])
        line["first_words"] = cue.wording().text if cue is not None else ""
        line["caution"] = cue.caution if cue is not None else ""
        line["words"] = _name_metrics(line["words"], [entry.metric, *entry.watch_partners])
    own = _keep_task(derived, request.task)
    document["recorded"] = list_recorded(own, log, entry, request.contrast, document["cues"])
    document["withheld"] = [*document["refused"], *_list_left_out(derived)]
    document["opening"] = describe_opening(document)
    return document


def _name_metrics(words: str, metrics: Sequence[str]) -> str:
    """Return a verdict's words with the metrics' names in place of their ids."""
    for metric in sorted(metrics, key=len, reverse=True):
        words = words.replace(metric, load_registry().get(metric).name.lower())
    return words


def name_contrast(contrast: str) -> str:
    """Return when it was measured, in the words of the screen."""
    vocabulary = load_vocabulary()
    words = {
        "during": "while the cue was on",
        "immediate": vocabulary.label("phase", "immediate_post"),
        "retention": vocabulary.label("phase", "retention"),
        "transfer": vocabulary.label("phase", "transfer"),
        "transfer_later": f"{vocabulary.label('phase', 'transfer')}, another day",
        "followup": vocabulary.label("phase", "follow_up"),
    }
    return words[contrast]


def _list_left_out(derived: Derived) -> list[str]:
    words = {
        "no_consent_for_ranking": "uses of learners who did not agree to be ranked",
        "cue_not_known": "blocks in which it is not known which cue was given",
    }
    return [
        f"{count} {words.get(reason, reason.replace('_', ' '))}"
        for reason, count in sorted(derived.left_out.items())
        if count
    ]


def _keep(
    location: Location,
    request: ReviewRequest,
    document: Mapping[str, Any],
    revision: int,
    n_uses: int,
) -> None:
    """Keep a ranking; a library that cannot be written is no reason to withhold an answer."""
    from cuebook.errors import StoreUnavailableError  # noqa: PLC0415
    from cuebook.evidence.ranking_document import ENGINE  # noqa: PLC0415
    from cuebook.store.opening import open_library  # noqa: PLC0415
    from cuebook.store.writing.rankings import keep_ranking  # noqa: PLC0415

    try:
        with open_library(location, create=False) as library, library.transaction() as tx:
            keep_ranking(
                tx,
                request.key,
                document,
                evidence_revision=revision,
                engine=ENGINE,
                n_uses=n_uses,
                made_at=datetime.now(UTC),
            )
    except StoreUnavailableError:
        return


def review_table(request: TableRequest) -> ReviewDocument:
    """Rank a table of uses from anywhere; no library is needed."""
    from cuebook.evidence.preparation import prepare_uses  # noqa: PLC0415
    from cuebook.evidence.question import DEFAULT_ALLOWANCE, ReviewQuestion  # noqa: PLC0415
    from cuebook.evidence.ranking import rank_cues  # noqa: PLC0415
    from cuebook.evidence.ranking_document import ranking_to_document  # noqa: PLC0415
    from cuebook.evidence.use_table import read_use_table  # noqa: PLC0415

    better, target = read_better(request.better)
    if request.transform == "log" and target is not None and target <= 0:
        raise UsageError(f"A target of {target:g} has no logarithm.", "Leave --transform log out.")
    scale = AttemptScale(
        request.metric or "table", request.transform, better, target, unit=request.unit
    )
    table = read_use_table(
        request.path, scale, metric=request.metric, contrast=request.contrast, task=request.task
    )
    prepared = prepare_uses(table.changes, contrast=table.contrast, without=table.without)
    question = ReviewQuestion(
        metric=table.metric,
        contrast=table.contrast,
        unit=request.unit,
        better=better,
        transform=request.transform,
        target=target,
        allowance=DEFAULT_ALLOWANCE if request.allowance is None else request.allowance,
        task=table.task or None,
    )
    question = _set_worthwhile(question, request.worthwhile, prepared)
    document: dict[str, Any] = ranking_to_document(rank_cues(prepared, question))
    document["refused_rows"] = [
        {"row": refused.row, "reason": refused.reason} for refused in table.refused
    ]
    document["notes"] = [*table.notes, *document["notes"]]
    document["refused"] = [
        *document["refused"],
        *(f"row {refused.row}: {refused.reason}" for refused in table.refused),
    ]
    document["withheld"] = document["refused"]
    document["contrast_words"] = name_contrast(table.contrast)
    document["recorded"] = []
    document["opening"] = describe_opening(document)
    return ReviewDocument(document)
