"""Measure a recording: which metrics fit the task, each with recipe, quality and reason."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace

import numpy as np

from cuebook.errors import UsageError
from cuebook.metrics import families
from cuebook.metrics.registry import MetricEntry, Registry, load_registry
from cuebook.metrics.settings import merge_settings, read_settings
from cuebook.metrics.signals import CleanTrack, Movement
from cuebook.metrics.values import Measurement, MetricValue, give_none
from cuebook.recordings.recording import POSITION, PRESSURE_CENTRE, Recording
from cuebook.vocabulary import load_vocabulary

Points = Mapping[str, tuple[float, ...]]

_FAMILY_METRICS: dict[str, tuple[str, ...]] = {
    "discrete": (
        *("movement_time_s", "path_length_cm", "straightness", "peak_speed_m_s"),
        *("mean_speed_m_s", "velocity_peaks", "sparc", "via_speed_ratio", "via_error_cm"),
    ),
    "still": ("sway_velocity_mm_s", "sway_path_mm", "sway_area_mm2"),
    "events": ("interval_cv_pct", "mean_asynchrony_ms", "asynchrony_sd_ms"),
}
_WITH_VIA = frozenset({"via_speed_ratio", "via_error_cm"})
_WITH_BEATS = frozenset({"mean_asynchrony_ms", "asynchrony_sd_ms"})


@dataclass(frozen=True, slots=True)
class Around:
    """What stands around the movement: places and beats."""

    points: Points = field(default_factory=dict)
    beats_s: tuple[float, ...] = ()
    """Beat times in seconds; empty: taken from the recording, if it has any."""
    beats_per_min: float | None = None


def measure_recording(
    recording: Recording,
    task: str | None = None,
    *,
    metrics: Sequence[str] = (),
    settings: Mapping[str, str] | None = None,
    around: Around | None = None,
) -> tuple[Measurement, ...]:
    """Return the metrics of a recording.

    Parameters
    ----------
    recording : one recording, one movement, one stance or one run of events.
    task : slug of the task; its movement family picks the metrics. None: assumed from the
        signals, and flagged.
    metrics : ids asked for; empty: those of the family.
    settings : settings that replace the metrics' defaults.
    around : places in the task and beats.

    Returns
    -------
    One measurement per metric. Those of the family that cannot be computed are missing with a
    reason; those that need a place or a beat are left out when neither asked for nor possible.

    Raises
    ------
    UnknownCodeError : unknown task or metric.
    UsageError : unknown setting, or a metric that is only typed.
    """
    registry = load_registry()
    given = read_settings(settings or {})
    family, is_assumed = _choose_family(recording, task)
    wanted = _choose_metrics(registry, metrics, family, recording, around or Around())
    movements: dict[tuple[object, ...], Movement | CleanTrack | None] = {}
    measured = [
        _measure_one(recording, registry.get(metric), given, around or Around(), movements)
        for metric in wanted
    ]
    if is_assumed:
        measured = [_flag(measurement, "task_assumed") for measurement in measured]
    return tuple(measured)


def _choose_family(recording: Recording, task: str | None) -> tuple[str, bool]:
    """Return the movement family, and whether it was assumed."""
    if task is not None:
        family = load_vocabulary().task(task).family
        if recording.events:
            return "events", False
        if family in _FAMILY_METRICS:
            return family, False
        if family != "any":
            return family, False
    if recording.events:
        return "events", False
    if recording.get_track(PRESSURE_CENTRE) is not None:
        return "still", True
    if recording.get_track(POSITION) is not None and families.rests_at_both_ends(recording):
        return "discrete", True
    return "none", True


def _choose_metrics(
    registry: Registry,
    asked: Sequence[str],
    family: str,
    recording: Recording,
    around: Around,
) -> tuple[str, ...]:
    if asked:
        chosen = []
        for metric in asked:
            entry = registry.get(metric)
            if not entry.is_computed:
                raise UsageError(
                    f"'{entry.metric}' is not computed from recordings in this version.",
                    "Type its values with cuebook log --value.",
                )
            chosen.append(entry.metric)
        return tuple(chosen)
    listed = _FAMILY_METRICS.get(family, ())
    if not listed and recording.get_track(POSITION) is not None and family != "none":
        listed = ("peak_speed_m_s",)
    has_beats = bool(around.beats_s or around.beats_per_min or "beat" in recording.events)
    return tuple(
        metric
        for metric in listed
        if not (metric in _WITH_VIA and "via" not in around.points)
        and not (metric in _WITH_BEATS and not has_beats)
    )


_COMPUTE: dict[str, Callable[[families.Case], MetricValue]] = {
    "movement_time_s": families.measure_movement_time,
    "path_length_cm": families.measure_path_length,
    "straightness": families.measure_straightness,
    "peak_speed_m_s": families.measure_peak_speed,
    "mean_speed_m_s": families.measure_mean_speed,
    "velocity_peaks": families.measure_velocity_peaks,
    "sparc": families.measure_sparc,
    "via_speed_ratio": families.measure_via_speed_ratio,
    "via_error_cm": families.measure_via_error,
    "interval_cv_pct": families.measure_interval_cv,
    "mean_asynchrony_ms": families.measure_mean_asynchrony,
    "asynchrony_sd_ms": families.measure_asynchrony_sd,
    "sway_velocity_mm_s": families.measure_sway_velocity,
    "sway_path_mm": families.measure_sway_path,
    "sway_area_mm2": families.measure_sway_area,
}


def _measure_one(
    recording: Recording,
    entry: MetricEntry,
    given: Mapping[str, str],
    around: Around,
    movements: dict[tuple[object, ...], Movement | CleanTrack | None],
) -> Measurement:
    settings = merge_settings(entry, given)
    case = families.Case(
        recording,
        settings,
        around.points,
        _find_beats(recording, around),
        movements=movements,
    )
    answer = _COMPUTE[entry.metric](case)
    if answer.reason is None and not math.isfinite(answer.value):
        answer = give_none("the value is not a finite number", *answer.flags)
    recipe: dict[str, object] = {
        "metric": entry.metric,
        "definition": entry.definition,
        **settings,
        **case.describe_protocol(entry.metric),
    }
    return Measurement(
        metric=entry.metric,
        value=None if answer.reason is not None else answer.value,
        unit=entry.unit,
        better=entry.better,
        n_used=answer.n_used,
        segment=None,
        recipe=recipe,
        quality=case.quality,
        flags=answer.flags,
        reason=answer.reason,
    )


def _find_beats(recording: Recording, around: Around) -> tuple[float, ...]:
    if around.beats_s:
        return around.beats_s
    if "beat" in recording.events:
        return tuple(recording.events["beat"].tolist())
    if around.beats_per_min:
        events = families.get_main_events(recording)
        if events is None or events.size == 0:
            return ()
        step = 60.0 / around.beats_per_min
        return tuple(np.arange(0.0, float(events[-1]) + step, step).tolist())
    return ()


def _flag(measurement: Measurement, flag: str) -> Measurement:
    return replace(measurement, flags=(*measurement.flags, flag))
