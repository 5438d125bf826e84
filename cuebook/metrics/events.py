"""Metrics of rhythm: intervals of events, and events against a beat."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from cuebook.metrics.profiles import FloatArray
from cuebook.metrics.values import MetricValue, give_none


def compute_interval_cv_pct(
    onset_s: FloatArray, *, min_intervals: int = 20, detrend: str = "none"
) -> MetricValue:
    """Return 100 SD / mean of the intervals between events.

    Parameters
    ----------
    onset_s : shape (n_events,), increasing seconds.
    min_intervals : fewer give no value.
    detrend : none or linear; linear removes a drift of tempo first.

    Notes
    -----
    SD with divisor n - 1 (n - 2 after a line is removed). Drift inflates the plain form.
    """
    intervals = np.diff(onset_s)
    if intervals.size < max(min_intervals, 2):
        return give_none(f"{intervals.size} intervals; at least {max(min_intervals, 2)} are needed")
    mean = float(np.mean(intervals))
    if not mean > 0:
        return give_none("the events do not follow one another in time")
    if detrend == "linear":
        order = np.arange(intervals.size, dtype=np.float64)
        slope, level = np.polyfit(order, intervals, 1)
        residual = intervals - (slope * order + level)
        if intervals.size < 3:
            return give_none("3 intervals are needed to remove a drift")
        spread = float(np.sqrt(np.sum(residual**2) / (intervals.size - 2)))
    else:
        spread = float(np.std(intervals, ddof=1))
    return MetricValue(100.0 * spread / mean, int(intervals.size))


@dataclass(frozen=True, slots=True)
class BeatMatch:
    """Events matched one to one with beats."""

    asynchrony_s: FloatArray
    """Event minus beat in seconds, in time order; negative is early."""
    missed_beats: int
    extra_events: int


def match_beats(event_s: FloatArray, beat_s: FloatArray) -> BeatMatch:
    """Match each beat with the nearest event within half an interval, one to one.

    Parameters
    ----------
    event_s, beat_s : shapes (n_events,), (n_beats,), increasing seconds; n_beats >= 2.

    Notes
    -----
    Nearest pairs are matched first, so that a stray event never takes a beat from a
    closer one. The half interval is that of the beats around the beat.
    """
    steps = np.diff(beat_s)
    reach = 0.5 * np.minimum(np.append(steps, steps[-1]), np.insert(steps, 0, steps[0]))
    distance = event_s[:, None] - beat_s[None, :]
    event_index, beat_index = np.nonzero(np.abs(distance) <= reach[None, :])
    order = np.argsort(np.abs(distance[event_index, beat_index]), kind="stable")
    taken_events: set[int] = set()
    taken_beats: dict[int, float] = {}
    for event, beat in zip(event_index[order], beat_index[order], strict=True):
        if int(event) in taken_events or int(beat) in taken_beats:
            continue
        taken_events.add(int(event))
        taken_beats[int(beat)] = float(distance[event, beat])
    matched = np.array([taken_beats[beat] for beat in sorted(taken_beats)], dtype=np.float64)
    return BeatMatch(matched, beat_s.size - len(taken_beats), event_s.size - len(taken_events))


def compute_mean_asynchrony_ms(match: BeatMatch) -> MetricValue:
    """Return the mean of event minus beat in milliseconds; negative is early.

    Early by 20 to 80 ms is usual in tapping with a metronome, not a fault.
    """
    if match.asynchrony_s.size == 0:
        return give_none("no event lies near a beat")
    return MetricValue(
        1000.0 * float(np.mean(match.asynchrony_s)), match.asynchrony_s.size, _flag(match)
    )


def compute_asynchrony_sd_ms(match: BeatMatch) -> MetricValue:
    """Return the SD (divisor n - 1) of event minus beat in milliseconds."""
    if match.asynchrony_s.size < 2:
        return give_none("at least 2 events near a beat are needed")
    return MetricValue(
        1000.0 * float(np.std(match.asynchrony_s, ddof=1)), match.asynchrony_s.size, _flag(match)
    )


def _flag(match: BeatMatch) -> tuple[str, ...]:
    flags = []
    if match.missed_beats:
        flags.append(f"missed_beats={match.missed_beats}")
    if match.extra_events:
        flags.append(f"extra_events={match.extra_events}")
    return tuple(flags)
