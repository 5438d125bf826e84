"""One function a metric: from a recording with its settings to a value or a reason."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np

from cuebook.metrics import discrete, events, still
from cuebook.metrics.profiles import FloatArray, cut_path, cut_speed, detect_movement
from cuebook.metrics.signals import (
    CleanTrack,
    Movement,
    Settings,
    find_movement,
    find_sway,
)
from cuebook.metrics.values import MetricValue, give_none
from cuebook.recordings.recording import Recording

UNIT_UNKNOWN = "unit_unknown"
_SHARED_SETTINGS = ("lowpass_hz", "onset", "max_gap_s", "resample")
_EVENT_ORDER = ("tap", "onset", "step")


@dataclass
class Case:
    """A recording as one metric looks at it."""

    recording: Recording
    settings: Settings
    points: Mapping[str, tuple[float, ...]]
    beats_s: tuple[float, ...]
    quality: dict[str, object] = field(default_factory=dict)
    movements: dict[tuple[object, ...], Movement | CleanTrack | None] = field(default_factory=dict)
    """Movements found already under the same settings; shared by the metrics of a recording."""

    def find_movement(self) -> Movement | str:
        """Return the movement, or the reason why there is none."""
        key = tuple(self.settings.get(name) for name in _SHARED_SETTINGS)
        if key not in self.movements:
            self.movements[key] = find_movement(self.recording, self.settings)
        found = self.movements[key]
        if found is None:
            return "no position or speed was recorded"
        track = found.track if isinstance(found, Movement) else found
        self.quality.update(track.quality)
        if isinstance(found, CleanTrack):
            return found.reason or "the movement cannot be used"
        return found

    def find_sway(self) -> CleanTrack | str:
        """Return the sway track, or the reason why there is none."""
        found = find_sway(self.recording, self.settings)
        if found is None:
            return "no centre of pressure or marker was recorded"
        self.quality.update(found.quality)
        if found.values is None:
            return found.reason or "the track cannot be used"
        return found

    def describe_protocol(self, metric: str) -> dict[str, object]:
        """Return the choices of protocol that belong to the recipe of a metric."""
        if metric.startswith("via_") and "via" in self.points:
            return {"via": list(self.points["via"])}
        return {}


def rests_at_both_ends(recording: Recording) -> bool:
    """Return whether one point moves and rests before and after."""
    found = find_movement(recording, {"lowpass_hz": 6.0, "onset": 0.05, "max_gap_s": 0.1})
    return isinstance(found, Movement) and found.window.is_whole


def get_main_events(recording: Recording) -> FloatArray | None:
    """Return the events that are measured: taps, else onsets, else steps."""
    for kind in _EVENT_ORDER:
        if kind in recording.events:
            return recording.events[kind]
    return None


def _in_unit(movement: Movement, value: float, factor: float, n_used: int) -> MetricValue:
    """Return a value in the metric's unit, or the reason that the file's unit is unknown."""
    if not movement.track.is_unit_known:
        return give_none(UNIT_UNKNOWN, *movement.flags)
    return MetricValue(value * factor, n_used, movement.flags)


def _cut(movement: Movement) -> FloatArray | None:
    return None if movement.position is None else cut_path(movement.position, movement.window)


def measure_movement_time(case: Case) -> MetricValue:
    """Seconds from onset to offset."""
    movement = case.find_movement()
    if isinstance(movement, str):
        return give_none(movement)
    seconds = discrete.compute_movement_time(movement.window, movement.track.rate_hz)
    return MetricValue(seconds, movement.speed.size, movement.flags)


def measure_path_length(case: Case) -> MetricValue:
    """Length of the path from onset to offset, cm."""
    movement = case.find_movement()
    if isinstance(movement, str):
        return give_none(movement)
    path = _cut(movement)
    if path is None:
        return give_none("no position was recorded")
    return _in_unit(movement, discrete.compute_path_length(path), 100.0, path.shape[0])


def measure_straightness(case: Case) -> MetricValue:
    """Chord over path."""
    movement = case.find_movement()
    if isinstance(movement, str):
        return give_none(movement)
    path = _cut(movement)
    if path is None:
        return give_none("no position was recorded")
    least_m = float(case.settings["min_chord_cm"]) / 100.0 if movement.track.is_unit_known else 0.0
    answer = discrete.compute_straightness(path, least_m)
    return MetricValue(answer.value, answer.n_used, (*movement.flags, *answer.flags), answer.reason)


def measure_peak_speed(case: Case) -> MetricValue:
    """Peak speed, m/s."""
    movement = case.find_movement()
    if isinstance(movement, str):
        return give_none(movement)
    return _in_unit(movement, discrete.compute_peak_speed(movement.speed), 1.0, movement.speed.size)


def measure_mean_speed(case: Case) -> MetricValue:
    """Path over movement time, m/s."""
    movement = case.find_movement()
    if isinstance(movement, str):
        return give_none(movement)
    path = _cut(movement)
    seconds = discrete.compute_movement_time(movement.window, movement.track.rate_hz)
    if path is None or not seconds > 0:
        return give_none("no path was recorded")
    return _in_unit(movement, discrete.compute_path_length(path) / seconds, 1.0, path.shape[0])


def measure_velocity_peaks(case: Case) -> MetricValue:
    """Count speed peaks that stand apart, between onset and offset."""
    movement = case.find_movement()
    if isinstance(movement, str):
        return give_none(movement)
    count = discrete.count_speed_peaks(
        cut_speed(movement.speed, movement.window),
        floor=float(case.settings["floor"]),
        valley=float(case.settings["valley"]),
    )
    if count == 0:
        return give_none("no speed peak inside the movement", *movement.flags)
    return MetricValue(float(count), count, movement.flags)


def measure_sparc(case: Case) -> MetricValue:
    """Spectral arc length of the movement, trimmed at a share of its peak speed."""
    movement = case.find_movement()
    if isinstance(movement, str):
        return give_none(movement)
    cap_hz = float(case.settings["cap_hz"])
    if movement.track.rate_hz < 2.0 * cap_hz:
        return give_none(f"sampled at {movement.track.rate_hz:.3g} Hz; needs {2 * cap_hz:g} Hz")
    window = detect_movement(movement.speed, float(case.settings["trim"]))
    if window is None:  # pragma: no cover - the movement has a speed already
        return give_none("nothing moves")
    speed = cut_speed(movement.speed, window)
    value = discrete.compute_sparc(
        speed,
        movement.track.rate_hz,
        padlevel=int(float(case.settings["padlevel"])),
        cap_hz=cap_hz,
        amp=float(case.settings["amp"]),
    )
    return MetricValue(value, speed.size, movement.flags)


def _find_via(case: Case, movement: Movement) -> tuple[FloatArray, FloatArray] | str:
    path = _cut(movement)
    if path is None:
        return "no position was recorded"
    if "via" not in case.points:
        return "no via point was given: --point via=X,Y"
    via = np.array(case.points["via"], dtype=np.float64)
    if via.size > path.shape[1]:
        return f"the via point has {via.size} coordinates, the path {path.shape[1]}"
    return path[:, : via.size], via


def measure_via_speed_ratio(case: Case) -> MetricValue:
    """Lowest speed near the via point over the lower of the peaks beside it."""
    movement = case.find_movement()
    if isinstance(movement, str):
        return give_none(movement)
    found = _find_via(case, movement)
    if isinstance(found, str):
        return give_none(found)
    answer = discrete.compute_via_speed_ratio(found[0], movement.track.rate_hz, found[1])
    return MetricValue(answer.value, answer.n_used, (*movement.flags, *answer.flags), answer.reason)


def measure_via_error(case: Case) -> MetricValue:
    """Smallest distance of the path to the via point, cm."""
    movement = case.find_movement()
    if isinstance(movement, str):
        return give_none(movement)
    found = _find_via(case, movement)
    if isinstance(found, str):
        return give_none(found)
    distance, _ = discrete.compute_distance_to_path(*found)
    return _in_unit(movement, distance, 100.0, found[0].shape[0])


def measure_interval_cv(case: Case) -> MetricValue:
    """Spread of the intervals between events over their mean, %."""
    onsets = get_main_events(case.recording)
    if onsets is None:
        return give_none("no events were recorded")
    case.quality.update(n_events=int(onsets.size), duration_s=case.recording.duration_s)
    return events.compute_interval_cv_pct(
        onsets,
        min_intervals=int(float(case.settings["min_intervals"])),
        detrend=str(case.settings["detrend"]),
    )


def _match(case: Case) -> events.BeatMatch | str:
    onsets = get_main_events(case.recording)
    if onsets is None:
        return "no events were recorded"
    if len(case.beats_s) < 2:
        return "no beats were given: --beats FILE or BPM"
    case.quality.update(n_events=int(onsets.size), n_beats=len(case.beats_s))
    return events.match_beats(onsets, np.array(case.beats_s, dtype=np.float64))


def measure_mean_asynchrony(case: Case) -> MetricValue:
    """Mean of event minus beat, ms."""
    match = _match(case)
    return give_none(match) if isinstance(match, str) else events.compute_mean_asynchrony_ms(match)


def measure_asynchrony_sd(case: Case) -> MetricValue:
    """Spread of event minus beat, ms."""
    match = _match(case)
    return give_none(match) if isinstance(match, str) else events.compute_asynchrony_sd_ms(match)


def _sway(case: Case) -> tuple[FloatArray, CleanTrack] | MetricValue:
    track = case.find_sway()
    if isinstance(track, str):
        return give_none(track)
    if track.values is None:  # pragma: no cover - find_sway gives the reason instead
        return give_none("the track cannot be used")
    if not track.is_unit_known:
        return give_none(UNIT_UNKNOWN, *track.flags)
    return track.values, track


def measure_sway_velocity(case: Case) -> MetricValue:
    """Mean velocity of sway, mm/s."""
    found = _sway(case)
    if isinstance(found, MetricValue):
        return found
    values, track = found
    velocity = still.compute_sway_velocity(values, track.rate_hz, str(case.settings["duration"]))
    return MetricValue(velocity * 1000.0, values.shape[0], track.flags)


def measure_sway_path(case: Case) -> MetricValue:
    """Length of the sway path, mm."""
    found = _sway(case)
    if isinstance(found, MetricValue):
        return found
    values, track = found
    return MetricValue(still.compute_sway_path(values) * 1000.0, values.shape[0], track.flags)


def measure_sway_area(case: Case) -> MetricValue:
    """Area of the 95 % prediction ellipse of sway, mm2."""
    found = _sway(case)
    if isinstance(found, MetricValue):
        return found
    values, track = found
    area = still.compute_prediction_ellipse_area(values, str(case.settings["ellipse"]))
    return MetricValue(area * 1e6, values.shape[0], track.flags)
