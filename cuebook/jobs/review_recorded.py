"""What is recorded and cannot be ranked yet: each use with its values, change and reason."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from statistics import fmean
from typing import Any

from cuebook.metrics.registry import MetricEntry
from cuebook.practice.changes import Change, Derived, NoChange, UseRecord
from cuebook.practice.log import LoggedBlock, PracticeLog

MOST_LISTED = 200
_WORDS = {
    "stopped": "this learner had to stop",
    "no_values": "present, but nothing was measured",
    "practice_again_too_soon": "the next practice came within 24 hours",
    "no_before": "no attempts before the cue",
    "no_clean_between": "no clean attempts between the two cues",
    "no_after": "no attempts without the cue afterwards",
    "no_values_during": "no values while the cue was on",
    "session_began_with_cue": "the session began with a cue",
    "another_cue_between": "another cue came between",
    "no_later_opening": "no opening measure at a later session yet",
    "later_than_28_days": "the next opening measure came later than 28 days",
    "within_28_days": "measured within 28 days: see next time, before any cue",
    "cue_not_known": "it is not known which cue was given",
    "counted_with_the_session": "counted with the session's first cue",
    "practice_in_a_cued_session": "practice alone in a session with a cue adds nothing here",
    "no_transfer_measure": "no measure in a new place or under pressure",
    "never_measured_there_before": "never measured there before",
    "measured_on_the_other_occasion": "measured on the other occasion",
    "many_other_cues": "many other cues were given",
    "session_not_to_be_used": "the session is marked not to be used",
}


def name_reason(reason: str) -> str:
    """Return why there is no change, in plain words."""
    return _WORDS.get(reason, reason.replace("_", " "))


def list_recorded(
    derived: Derived,
    log: PracticeLog,
    entry: MetricEntry,
    contrast: str,
    ranked: Sequence[Mapping[str, Any]],
) -> list[dict[str, Any]]:
    """Return uses whose cue is not in the ranking, with values, change and reason.

    Changes are shown in the metric's own unit: mean after minus mean before, not oriented.
    """
    in_ranking = {line["cue"] for line in ranked}
    values = _Values(log, entry.metric)
    listed: list[dict[str, Any]] = []
    why = "too few uses to rank"
    for change in derived.changes:
        if change.contrast != contrast or change.use.cue in in_ranking:
            continue
        if change.use.cue is None and in_ranking:
            continue
        listed.append(_show_change(change, values, entry, why))
    for one in derived.without:
        if one.contrast != contrast or one.use.cue in in_ranking:
            continue
        if one.use.cue is None:
            continue
        listed.append(_show_reason(one, entry))
    return listed[-MOST_LISTED:]


def _show_change(change: Change, values: _Values, entry: MetricEntry, why: str) -> dict[str, Any]:
    before, after = values.find(change.use, change.before.mean, change.after.mean, change.contrast)
    difference = fmean(after) - fmean(before) if before and after else None
    return {
        **_name_use(change.use),
        "before": before,
        "after": after,
        "change": difference,
        "unit": entry.unit,
        "reason": why,
    }


def _show_reason(one: NoChange, entry: MetricEntry) -> dict[str, Any]:
    return {
        **_name_use(one.use),
        "before": [],
        "after": [],
        "change": None,
        "unit": entry.unit,
        "reason": name_reason(one.reason),
    }


def _name_use(use: UseRecord) -> dict[str, Any]:
    return {"cue": use.cue, "learner": use.learner, "session": use.session, "k": use.k}


class _Values:
    """Finds the raw values behind a change again, block by block."""

    def __init__(self, log: PracticeLog, metric: str) -> None:
        self._metric = metric
        self._sessions = {session.session: session for session in log.sessions}
        self._order = sorted(log.sessions, key=lambda session: session.started_at)

    def find(
        self, use: UseRecord, before: float, after: float, contrast: str
    ) -> tuple[list[float], list[float]]:
        """Return the values before and after a use, within its session and across days."""
        del before, after
        session = self._sessions[use.session]
        blocks = sorted(session.blocks, key=lambda block: block.number)
        own = [block.block for block in blocks].index(use.use.rsplit(":", 1)[0])
        earlier = self._last(reversed(blocks[:own]), use)
        if contrast == "during":
            return earlier, self._read(blocks[own], use.learner)
        if contrast == "immediate":
            return earlier, self._last(iter(blocks[own + 1 :]), use)
        later = [other for other in self._order if other.started_at > session.started_at]
        for other in later:
            found = self._last(iter(sorted(other.blocks, key=lambda block: block.number)), use)
            if found:
                return self._last(iter(blocks), use), found
        return earlier, []

    def _last(self, blocks: Iterable[LoggedBlock], use: UseRecord) -> list[float]:
        for block in blocks:
            if block.task != use.task or block.phase == "acquisition":
                continue
            found = self._read(block, use.learner)
            if found:
                return found
        return []

    def _read(self, block: LoggedBlock, learner: str) -> list[float]:
        return [
            value.value
            for part in block.participations
            if part.learner == learner
            for value in part.values.get(self._metric, ())
            if value.value is not None and value.is_valid and not value.is_after_stop
        ]
