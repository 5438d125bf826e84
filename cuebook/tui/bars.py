"""Intervals drawn with text cells: one row a cue, over one shared scale."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

EFFECT, INNER, OUTER, ZERO, CROSSED, BAND = "●", "━", "─", "│", "┼", "·"
MARGIN = 0.03


@dataclass(frozen=True, slots=True)
class BarScale:
    """The scale that all rows of a ranking share."""

    low: float
    high: float
    width: int

    def place(self, value: float) -> int:
        """Return the cell of a value, kept inside the row."""
        span = self.high - self.low
        at = round((value - self.low) / span * (self.width - 1)) if span > 0 else 0
        return min(max(at, 0), self.width - 1)


def make_scale(cues: Sequence[Mapping[str, Any]], width: int) -> BarScale:
    """Return a scale that holds every 95 % interval and 0."""
    ends = [cue[name] for cue in cues for name in ("low95", "high95") if cue[name] is not None]
    low, high = min([0.0, *ends]), max([0.0, *ends])
    margin = MARGIN * (high - low)
    return BarScale(low - margin, high + margin, max(width, 8))


def draw_bar(cue: Mapping[str, Any], scale: BarScale, worthwhile: float | None) -> str:
    """Return one row: 95 % thin, 80 % thick, the effect, 0 and the band too small to matter."""
    cells = [" "] * scale.width
    zero = scale.place(0.0)
    if worthwhile:
        for at in range(scale.place(-worthwhile), scale.place(worthwhile) + 1):
            cells[at] = BAND
    cells[zero] = ZERO
    for low, high, mark in (("low95", "high95", OUTER), ("low80", "high80", INNER)):
        if cue[low] is not None and cue[high] is not None:
            for at in range(scale.place(cue[low]), scale.place(cue[high]) + 1):
                cells[at] = mark
    if cells[zero] in {OUTER, INNER}:
        cells[zero] = CROSSED
    if cue["effect"] is not None:
        cells[scale.place(cue["effect"])] = EFFECT
    return "".join(cells)


def draw_axis(scale: BarScale, low: str, zero: str, high: str) -> str:
    """Return the line of labels: the line to beat at its own cell, and the ends where they fit."""
    at = scale.place(0.0)
    label = f"{ZERO} {zero}" if at + len(zero) + 2 <= scale.width else f"{zero} {ZERO}"
    begin = at if label.startswith(ZERO) else max(at - len(zero) - 1, 0)
    cells = list((" " * begin + label).ljust(scale.width)[: scale.width])
    if begin > len(low):
        cells[: len(low)] = low
    if begin + len(label) < scale.width - len(high):
        cells[scale.width - len(high) :] = high
    return "".join(cells)
