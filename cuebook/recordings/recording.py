"""A recording as a value: labelled signals over time, and how both were understood."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]

POSITION, SPEED, ACCELERATION = "position", "speed", "acceleration"
ANGULAR_SPEED, ANGLE, FORCE = "angular_speed", "angle", "force"
MOMENT, PRESSURE_CENTRE, UNKNOWN = "moment", "centre_of_pressure", "unknown"

AXES = ("x", "y", "z")


def _freeze(values: FloatArray) -> FloatArray:
    """Return a view that nobody can write to."""
    view = values.view()
    view.flags.writeable = False
    return view


@dataclass(frozen=True, eq=False)
class Signal:
    """One channel of a recording."""

    name: str
    """The column's own name, or its number where it has none."""
    quantity: str
    """position, speed, acceleration, centre_of_pressure, force …, or unknown."""
    unit: str | None
    """Unit in the file; None if unknown, and then the values are as in the file."""
    axis: str | None
    """x, y or z; None for a signal without a direction."""
    values: FloatArray
    """Shape (n_samples,), SI units where the unit is known; NaN where missing."""
    point: str = ""
    """Which point it belongs to: hand, cop …; empty if the name does not say."""

    def __post_init__(self) -> None:
        object.__setattr__(self, "values", _freeze(self.values))


@dataclass(frozen=True, slots=True)
class Gap:
    """A hole in time."""

    start_s: float
    end_s: float

    @property
    def duration_s(self) -> float:
        """Return its length in seconds."""
        return self.end_s - self.start_s


@dataclass(frozen=True, eq=False)
class PointTrack:
    """The path of one point."""

    values: FloatArray
    """Shape (n_samples, n_axes), metres, or the file's unit where that is unknown."""
    is_unit_known: bool
    names: tuple[str, ...]
    units: tuple[str | None, ...] = ()
    """Unit of each axis in the file; None where unknown."""


@dataclass(frozen=True, eq=False)
class Recording:
    """Everything read from one file under one rule; never changed afterwards."""

    file: str
    """Name of the file, without its folders."""
    signals: tuple[Signal, ...]
    time_s: FloatArray | None
    """Shape (n_samples,), seconds from the first sample; None for a list of events."""
    rate_hz: float | None
    """Samples a second; None for a list of events."""
    rate_source: str | None
    """file, user or header; None for a list of events."""
    gaps: tuple[Gap, ...] = ()
    is_resampling_needed: bool = False
    """Whether the stamps jitter by more than their own rounding."""
    events: Mapping[str, FloatArray] = field(default_factory=dict)
    """Times in seconds per kind: tap, beat, step, onset."""
    notes: tuple[str, ...] = ()
    """What was understood or assumed, in plain words; no header text."""

    def __post_init__(self) -> None:
        if self.time_s is not None:
            object.__setattr__(self, "time_s", _freeze(self.time_s))
        frozen = {kind: _freeze(times) for kind, times in self.events.items()}
        object.__setattr__(self, "events", frozen)

    @property
    def n_samples(self) -> int:
        """Return how many samples (or events) there are."""
        if self.time_s is not None:
            return int(self.time_s.size)
        return sum(int(times.size) for times in self.events.values())

    @property
    def duration_s(self) -> float:
        """Return seconds from the first to the last sample or event."""
        if self.time_s is not None:
            return float(self.time_s[-1] - self.time_s[0])
        times = [times for times in self.events.values() if times.size]
        if not times:
            return 0.0
        return float(max(t[-1] for t in times) - min(t[0] for t in times))

    @property
    def missing_fraction(self) -> float:
        """Return the share of samples that are missing in at least one signal."""
        if not self.signals or not self.n_samples:
            return 0.0
        missing = np.zeros(self.n_samples, dtype=bool)
        for signal in self.signals:
            missing |= np.isnan(signal.values)
        return float(np.mean(missing))

    def get_track(self, *quantities: str) -> PointTrack | None:
        """Return the path of the one point of some quantities; None if there is none.

        Several points: the first in file order, all its axes.
        """
        chosen = [signal for signal in self.signals if signal.quantity in quantities]
        chosen = [signal for signal in chosen if signal.axis in AXES]
        if not chosen:
            return None
        point = chosen[0].point
        of_point = {signal.axis: signal for signal in reversed(chosen) if signal.point == point}
        axes = [of_point[axis] for axis in AXES if axis in of_point]
        return PointTrack(
            np.column_stack([signal.values for signal in axes]),
            all(signal.unit is not None for signal in axes),
            tuple(signal.name for signal in axes),
            tuple(signal.unit for signal in axes),
        )

    def get_series(self, *quantities: str) -> Signal | None:
        """Return the first signal of some quantities; None if there is none."""
        return next((s for s in self.signals if s.quantity in quantities), None)


@dataclass(frozen=True, slots=True)
class ReadingOptions:
    """What a user says about a file; everything may stay open."""

    columns: Mapping[str, str] = field(default_factory=dict)
    """Channel (time, x, y, z, cop_x, speed, tap, beat …) to header name or number from 1."""
    rate_hz: float | None = None
    units: Mapping[str, str] = field(default_factory=dict)
    """Unit per channel: a column's name, hand_x, x, a quantity, time; ``*`` for all it fits."""
    points: Mapping[str, tuple[float, ...]] = field(default_factory=dict)
    """Places in the task, such as via, in the unit of the position in the file."""
    beats: str | None = None
    """A file of beats, or beats a minute."""

    def as_rule(self) -> dict[str, object]:
        """Return the rule as plain values: equal rules read a file alike."""
        rule: dict[str, object] = {}
        if self.columns:
            rule["columns"] = dict(sorted(self.columns.items()))
        if self.rate_hz is not None:
            rule["rate_hz"] = self.rate_hz
        if self.units:
            rule["units"] = dict(sorted(self.units.items()))
        if self.points:
            rule["points"] = {name: list(at) for name, at in sorted(self.points.items())}
        if self.beats is not None:
            rule["beats"] = self.beats
        return rule
