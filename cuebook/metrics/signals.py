"""From a recording to what metrics look at: a clean path, a speed profile, a sway track."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np

from cuebook.metrics.profiles import FloatArray, MovementWindow, compute_speed, detect_movement
from cuebook.recordings.cleaning import (
    estimate_noise_sd,
    fill_gaps,
    filter_zero_phase,
    resample_evenly,
)
from cuebook.recordings.recording import (
    ANGULAR_SPEED,
    POSITION,
    PRESSURE_CENTRE,
    SPEED,
    PointTrack,
    Recording,
)

MOST_MISSING = 0.10
LONGEST_GAP_S = 0.2
FEWEST_SAMPLES = 10

Settings = Mapping[str, float | str]


@dataclass(frozen=True, eq=False)
class CleanTrack:
    """A path that has been put on an even grid, filled and filtered."""

    values: FloatArray | None
    """Shape (n_samples, n_axes); None if it cannot be used, and then there is a reason."""
    rate_hz: float
    is_unit_known: bool
    names: tuple[str, ...] = ()
    reason: str | None = None
    flags: tuple[str, ...] = ()
    quality: Mapping[str, object] = field(default_factory=dict)


@dataclass(frozen=True, eq=False)
class Movement:
    """One movement: its path (if there is one), its speed and its window."""

    track: CleanTrack
    position: FloatArray | None
    """None where only a speed was recorded."""
    speed: FloatArray
    window: MovementWindow
    flags: tuple[str, ...]


def clean_track(recording: Recording, track: PointTrack, settings: Settings) -> CleanTrack:
    """Return a track ready for metrics, or the reason why it cannot be used."""
    rate_hz = float(recording.rate_hz or math.nan)
    max_gap_s = float(settings.get("max_gap_s", 0.1))
    values = track.values
    flags: list[str] = []
    if recording.is_resampling_needed and settings.get("resample", "auto") == "auto":
        values = _resample(recording, values, rate_hz)
        flags.append("resampled")
    values = _cut_missing_ends(values)
    if values.shape[0] < FEWEST_SAMPLES:
        return _refuse(track, rate_hz, f"only {values.shape[0]} samples")
    filled = fill_gaps(values, rate_hz, max_gap_s)
    quality: dict[str, object] = {
        "rate_hz": rate_hz,
        "duration_s": (values.shape[0] - 1) / rate_hz,
        "missing_fraction": filled.missing_fraction,
        "longest_gap_s": filled.longest_gap_s,
    }
    if filled.missing_fraction > MOST_MISSING or filled.longest_gap_s > LONGEST_GAP_S:
        return _refuse(
            track,
            rate_hz,
            f"{filled.missing_fraction:.0%} missing, the longest gap {filled.longest_gap_s:.2g} s",
            quality,
        )
    if np.isnan(filled.values).any():
        return _refuse(track, rate_hz, "a gap too long to be filled", quality)
    if filled.filled.any():
        flags.append("gap_filled")
    quality["noise_sd"] = estimate_noise_sd(filled.values)
    return CleanTrack(
        _filter(filled.values, rate_hz, settings, flags),
        rate_hz,
        track.is_unit_known,
        track.names,
        flags=tuple(flags),
        quality=quality,
    )


def find_movement(recording: Recording, settings: Settings) -> Movement | CleanTrack | None:
    """Return the one movement of a recording.

    Returns
    -------
    The movement; a refused track with its reason; None if no position or speed was recorded.
    """
    track = recording.get_track(POSITION)
    if track is not None:
        clean = clean_track(recording, track, settings)
        if clean.values is None:
            return clean
        return _window(clean, clean.values, compute_speed(clean.values, clean.rate_hz), settings)
    series = recording.get_series(SPEED, ANGULAR_SPEED)
    if series is None:
        return None
    lone = PointTrack(np.abs(series.values)[:, None], series.unit is not None, (series.name,))
    clean = clean_track(recording, lone, settings)
    if clean.values is None:
        return clean
    return _window(clean, None, np.abs(clean.values[:, 0]), settings)


def find_sway(recording: Recording, settings: Settings) -> CleanTrack | None:
    """Return the sway track with its start discarded; None if there is no such signal."""
    track = recording.get_track(PRESSURE_CENTRE) or recording.get_track(POSITION)
    if track is None:
        return None
    rate_hz = float(recording.rate_hz or math.nan)
    skip = round(float(settings.get("discard_s", 0.0)) * rate_hz)
    if skip >= track.values.shape[0]:
        return _refuse(track, rate_hz, "shorter than the start that is discarded")
    cut = PointTrack(track.values[skip:, :2], track.is_unit_known, track.names[:2])
    if cut.values.shape[1] < 2:
        return _refuse(track, rate_hz, "sway needs two directions")
    if recording.is_resampling_needed:
        return _clean_stamped_sway(recording, track, settings, skip)
    return clean_track(recording, cut, {**settings, "resample": "none"})


def _clean_stamped_sway(
    recording: Recording, track: PointTrack, settings: Settings, skip: int
) -> CleanTrack:
    whole = clean_track(recording, track, settings)
    if whole.values is None:
        return whole
    return CleanTrack(
        whole.values[skip:, :2],
        whole.rate_hz,
        whole.is_unit_known,
        whole.names[:2],
        flags=whole.flags,
        quality=whole.quality,
    )


def _window(
    clean: CleanTrack, position: FloatArray | None, speed: FloatArray, settings: Settings
) -> Movement | CleanTrack:
    window = detect_movement(speed, float(settings.get("onset", 0.05)))
    if window is None:
        return CleanTrack(
            None,
            clean.rate_hz,
            clean.is_unit_known,
            clean.names,
            "nothing moves",
            clean.flags,
            clean.quality,
        )
    flags = list(clean.flags)
    if not window.starts_at_rest:
        flags.append("no_rest_at_start")
    if not window.ends_at_rest:
        flags.append("no_rest_at_end")
    return Movement(clean, position, speed, window, tuple(flags))


def _refuse(
    track: PointTrack, rate_hz: float, reason: str, quality: Mapping[str, object] | None = None
) -> CleanTrack:
    return CleanTrack(
        None, rate_hz, track.is_unit_known, track.names, reason, quality=quality or {}
    )


def _cut_missing_ends(values: FloatArray) -> FloatArray:
    known = np.flatnonzero(~np.isnan(values).any(axis=1))
    return values[known[0] : known[-1] + 1] if known.size else values[:0]


def _resample(recording: Recording, values: FloatArray, rate_hz: float) -> FloatArray:
    if recording.time_s is None:  # pragma: no cover - only stamped recordings jitter
        return values
    known = ~np.isnan(values).any(axis=1)
    if np.count_nonzero(known) < FEWEST_SAMPLES:
        return values[known]
    return resample_evenly(recording.time_s[known], values[known], rate_hz)


def _filter(values: FloatArray, rate_hz: float, settings: Settings, flags: list[str]) -> FloatArray:
    cutoff = settings.get("lowpass_hz", "none")
    if cutoff == "none":
        return values
    if float(cutoff) >= 0.4 * rate_hz:
        # Too slow for this filter: the sampling itself has already cut the fast part.
        flags.append("sampled_too_slowly_to_filter")
        return values
    return filter_zero_phase(values, rate_hz, float(cutoff))
