"""Measure a file; nothing is stored."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING, Any

from cuebook.errors import InputError, UsageError
from cuebook.vocabulary import load_vocabulary

if TYPE_CHECKING:
    from cuebook.metrics.engine import Around
    from cuebook.metrics.values import Measurement
    from cuebook.recordings.recording import ReadingOptions, Recording

EVENT_FAMILY = "events"


@dataclass(frozen=True)
class MeasuredFile:
    """What one file says."""

    file: str
    recording: Recording
    measurements: tuple[Measurement, ...]
    rule: Mapping[str, object] = field(default_factory=dict)


def measure_file(
    path: Path,
    *,
    task: str | None = None,
    metrics: tuple[str, ...] = (),
    settings: Mapping[str, str] | None = None,
    options: ReadingOptions | None = None,
) -> MeasuredFile:
    """Read a file and compute its metrics.

    Raises
    ------
    InputError, NeedsAnswerError, UsageError, UnknownCodeError : as reading and measuring do.
    """
    from cuebook.recordings.text_files import read_bytes  # noqa: PLC0415

    return measure_content(
        read_bytes(path),
        path.name,
        task=task,
        metrics=metrics,
        settings=settings,
        options=options,
    )


def measure_content(
    content: bytes,
    file: str,
    *,
    task: str | None = None,
    metrics: tuple[str, ...] = (),
    settings: Mapping[str, str] | None = None,
    options: ReadingOptions | None = None,
) -> MeasuredFile:
    """Read bytes and compute their metrics; see :func:`measure_file`."""
    from cuebook.metrics.engine import measure_recording  # noqa: PLC0415
    from cuebook.recordings.reading import read_content  # noqa: PLC0415
    from cuebook.recordings.recording import ReadingOptions  # noqa: PLC0415

    rule = options or ReadingOptions()
    expects_events = task is not None and load_vocabulary().task(task).family == EVENT_FAMILY
    recording = read_content(content, file, rule, expects_events=expects_events)
    measured = measure_recording(
        recording,
        task,
        metrics=metrics,
        settings=settings,
        around=_look_around(rule),
    )
    return MeasuredFile(file, recording, measured, rule.as_rule())


def _look_around(rule: ReadingOptions) -> Around:
    from cuebook.metrics.engine import Around  # noqa: PLC0415

    if rule.beats is None:
        return Around(points=rule.points)
    try:
        per_minute = float(rule.beats)
    except ValueError:
        return Around(points=rule.points, beats_s=_read_beats(Path(rule.beats)))
    if not 0 < per_minute < 1000:
        raise UsageError(f"--beats {rule.beats} is no tempo.", "Give beats a minute, such as 100.")
    return Around(points=rule.points, beats_per_min=per_minute)


def _read_beats(path: Path) -> tuple[float, ...]:
    from cuebook.recordings.reading import read_recording  # noqa: PLC0415

    recording = read_recording(path, expects_events=True)
    for kind in ("beat", "onset"):
        if kind in recording.events:
            return tuple(recording.events[kind].tolist())
    raise InputError(f"{path} holds no beats.", "Give a list of times, one a line.")


def to_document(measured: MeasuredFile) -> dict[str, Any]:
    """Return the document ``cuebook.measure/1``."""
    recording = measured.recording
    channels = [
        {"name": signal.name, "quantity": signal.quantity, "unit": signal.unit}
        for signal in recording.signals
    ]
    channels += [{"name": kind, "quantity": "events", "unit": "s"} for kind in recording.events]
    return {
        "format": "cuebook.measure/1",
        "file": measured.file,
        "recording": {
            "rate_hz": recording.rate_hz,
            "rate_source": recording.rate_source,
            "duration_s": recording.duration_s,
            "n_samples": recording.n_samples,
            "channels": channels,
            "notes": list(recording.notes),
        },
        "measurements": [
            {
                "metric": one.metric,
                "value": one.value,
                "unit": one.unit,
                "better": one.better,
                "n_used": one.n_used,
                "segment": one.segment,
                "recipe": dict(one.recipe),
                "quality": dict(one.quality),
                "flags": list(one.flags),
                "reason": one.reason,
            }
            for one in measured.measurements
        ],
    }
