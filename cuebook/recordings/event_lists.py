"""Lists of events: onsets in seconds, taps and beats."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from cuebook.errors import InputError, Place, UsageError
from cuebook.recordings.channels import (
    EVENT_CHANNELS,
    TIME,
    describe_event_column,
    refuse_channel,
    split_unit,
)
from cuebook.recordings.recording import FloatArray, ReadingOptions, Recording
from cuebook.recordings.tables import TextTable
from cuebook.recordings.units import require_factor, scale_to_si
from cuebook.vocabulary import find_nearest

KIND_COLUMN = "trial_type"


def find_event_columns(
    table: TextTable, rule: ReadingOptions, *, expects_events: bool
) -> dict[str, int]:
    """Return which columns hold events; empty if the file is no list of events."""
    if rule.columns:
        named = {name: wanted for name, wanted in rule.columns.items() if name in EVENT_CHANNELS}
        for name in rule.columns:
            if named and name not in named:
                refuse_channel(name, EVENT_CHANNELS)
        return {name: table.find_column(wanted) for name, wanted in named.items()}
    if table.has_header:
        found = {
            kind: column
            for column, name in enumerate(table.names)
            if (kind := describe_event_column(name)) is not None
        }
        if found:
            return found
    if expects_events and len(table.names) == 1:
        return {"onset": 0}
    return {}


def read_events(
    table: TextTable, columns: Mapping[str, int], rule: ReadingOptions, file: str
) -> Recording:
    """Return the events of a file in seconds, each kind in order of time.

    Raises
    ------
    InputError : text among numbers, or times that go back.
    """
    _check_units(columns, rule)
    events: dict[str, FloatArray] = {}
    notes = []
    for kind, column in columns.items():
        times = table.get_numbers(column)
        given = next((rule.units[key] for key in (kind, TIME, "*") if key in rule.units), None)
        unit = given or split_unit(table.names[column])[1]
        factor = require_factor("time", unit, kind) if unit else 1.0
        if unit is None:
            notes.append(f"time: column '{table.names[column]}' taken in s")
        labels = _read_labels(table, kind)
        for name in dict.fromkeys(labels):
            chosen = np.array([label == name for label in labels])
            events[name] = scale_to_si(_order(times, chosen, table, column), factor)
    if not any(times.size for times in events.values()):
        raise InputError(f"{file} holds no event.", "Export it again.", Place(file=file))
    return Recording(
        file=file,
        signals=(),
        time_s=None,
        rate_hz=None,
        rate_source=None,
        events=events,
        notes=tuple(dict.fromkeys(notes)),
    )


def _check_units(columns: Mapping[str, int], rule: ReadingOptions) -> None:
    known = (*columns, TIME)
    for key in rule.units:
        if key not in {*known, "*"}:
            nearest = find_nearest(key, known) or known
            raise UsageError(
                f"--units names '{key}', which is no column of events.",
                f"Nearest known: {', '.join(nearest)}.",
            )


def _read_labels(table: TextTable, kind: str) -> list[str]:
    if kind == "onset" and KIND_COLUMN in table.names:
        cells = table.get_cells(table.names.index(KIND_COLUMN))
        return [cell.strip().lower() or "onset" for cell in cells]
    return [kind] * table.n_rows


def _order(times: FloatArray, chosen: np.ndarray, table: TextTable, column: int) -> FloatArray:
    chosen &= ~np.isnan(times)
    rows = np.flatnonzero(chosen)
    kept = times[rows]
    back = np.flatnonzero(np.diff(kept) < 0)
    if back.size:
        row = table.rows[int(rows[int(back[0]) + 1])]
        raise InputError(
            f"Time goes back at line {row} of {table.file}.",
            "Sort the events by time.",
            Place(table.file, row, table.names[column]),
        )
    return kept[np.append(True, np.diff(kept) > 0)] if kept.size else kept
