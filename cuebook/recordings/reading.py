"""Read one file under one rule."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from cuebook.errors import InputError, NeedsAnswerError, Place
from cuebook.recordings.channels import TIME, Channel, describe_column, name_channel
from cuebook.recordings.event_lists import find_event_columns, read_events
from cuebook.recordings.recording import UNKNOWN, FloatArray, ReadingOptions, Recording, Signal
from cuebook.recordings.tables import TextTable, read_table
from cuebook.recordings.text_files import decode_text, read_bytes
from cuebook.recordings.time_axis import TimeAxis, build_uniform, read_stamps
from cuebook.recordings.units import KIND_OF_QUANTITY, require_factor, tidy_unit

if TYPE_CHECKING:
    from collections.abc import Sequence


def read_recording(
    path: Path | str, options: ReadingOptions | None = None, *, expects_events: bool = False
) -> Recording:
    """Read a file of delimited text: signals over time, or a list of events.

    Parameters
    ----------
    path : the file.
    options : what the user says about it; None: nothing.
    expects_events : whether one bare column of increasing numbers is a list of events.

    Raises
    ------
    InputError : missing, empty, binary, text among numbers, time going back, all zero.
    NeedsAnswerError : rate, unit or columns that the file does not tell.
    UsageError : a column or unit that is not there.
    """
    return read_content(
        read_bytes(Path(path)), Path(path).name, options, expects_events=expects_events
    )


def read_content(
    content: bytes,
    file: str,
    options: ReadingOptions | None = None,
    *,
    expects_events: bool = False,
) -> Recording:
    """Read the bytes of a file; see :func:`read_recording`."""
    rule = options or ReadingOptions()
    if not content.strip():
        raise InputError(f"{file} is empty.", "Export the recording again.", Place(file=file))
    table = read_table(decode_text(content, file), file)
    columns = find_event_columns(table, rule, expects_events=expects_events)
    if columns:
        return read_events(table, columns, rule, file)
    return _read_signals(table, rule, file)


def _read_signals(table: TextTable, rule: ReadingOptions, file: str) -> Recording:
    channels = _find_channels(table, rule, file)
    axis = _build_time(table, channels, rule, file)
    signals = []
    notes = list(axis.notes)
    for channel in channels:
        if channel.quantity == TIME:
            continue
        values = table.get_numbers(channel.column)[axis.kept]
        signal, note = _make_signal(channel, values, rule)
        signals.append(signal)
        if note and note not in notes:
            notes.append(note)
    _refuse_empty(signals, file)
    return Recording(
        file=file,
        signals=tuple(signals),
        time_s=axis.time_s,
        rate_hz=axis.rate_hz,
        rate_source=axis.rate_source,
        gaps=axis.gaps,
        is_resampling_needed=axis.is_resampling_needed,
        notes=tuple(notes),
    )


def _find_channels(table: TextTable, rule: ReadingOptions, file: str) -> list[Channel]:
    if rule.columns:
        return [
            name_channel(channel, column, table.names[column])
            for channel, column in (
                (channel, table.find_column(wanted)) for channel, wanted in rule.columns.items()
            )
        ]
    if not table.has_header:
        raise NeedsAnswerError(
            f"{file} has {len(table.names)} columns without names.",
            "Say what they are, such as --columns time=1,x=2,y=3.",
            Place(file=file),
        )
    channels = [describe_column(name, column) for column, name in enumerate(table.names)]
    is_first = True
    kept = []
    for channel in channels:
        if channel.quantity == TIME:
            if is_first:
                kept.append(channel)
            is_first = False
        elif table.is_numeric(channel.column):
            kept.append(channel)
        elif channel.quantity != UNKNOWN:
            kept.append(channel)  # its text is an error that names the row
    if not [channel for channel in kept if channel.quantity != TIME]:
        raise NeedsAnswerError(
            f"No column of {file} is known by its name.",
            "Say what they are, such as --columns time=1,x=2,y=3.",
            Place(file=file),
        )
    return kept


def _build_time(
    table: TextTable, channels: Sequence[Channel], rule: ReadingOptions, file: str
) -> TimeAxis:
    stamped = next((channel for channel in channels if channel.quantity == TIME), None)
    if rule.rate_hz is not None and (stamped is None or "time" not in rule.columns):
        return build_uniform(table.n_rows, rule.rate_hz)
    if stamped is None:
        raise NeedsAnswerError(
            f"{file} has no column of time that is known by its name.",
            "Give the rate with --rate HZ, or name the column with --columns time=NAME.",
            Place(file=file),
        )
    stamps = table.get_numbers(stamped.column)
    unit = rule.units.get(TIME) or stamped.unit
    return read_stamps(stamps, table.rows, unit, stamped.name, file)


def _make_signal(
    channel: Channel, values: FloatArray, rule: ReadingOptions
) -> tuple[Signal, str | None]:
    given = rule.units.get(_name_for_units(channel)) or rule.units.get("*")
    unit = given or channel.unit
    kind = KIND_OF_QUANTITY.get(channel.quantity)
    if unit is None or kind is None:
        note = None
        if kind is not None:
            note = f"unit of '{channel.name}' unknown: only measures without a unit are given"
        return Signal(
            channel.name, channel.quantity, None, channel.axis, values, channel.point
        ), note
    factor = require_factor(kind, unit, f"'{channel.name}'")
    source = "as you said" if given else "from the column's name"
    note = f"units: {tidy_unit(unit)} {source}" if factor != 1.0 else None
    # Dividing by a whole number is exact where multiplying by its inverse is not.
    scaled = values * factor if factor >= 1.0 else values / round(1.0 / factor, 9)
    return Signal(channel.name, channel.quantity, unit, channel.axis, scaled, channel.point), note


def _name_for_units(channel: Channel) -> str:
    parts = [part for part in (channel.point, channel.axis) if part]
    return "_".join(parts) or channel.quantity


def _refuse_empty(signals: Sequence[Signal], file: str) -> None:
    if all(not np.any(np.nan_to_num(signal.values)) for signal in signals):
        raise InputError(
            f"Every sample of {file} is 0 or missing.",
            "Check the sensor and export the recording again.",
            Place(file=file),
        )
