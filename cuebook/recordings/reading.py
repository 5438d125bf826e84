"""Read one file under one rule."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from cuebook.errors import CuebookError, InputError, NeedsAnswerError, Place, UsageError
from cuebook.recordings.channels import (
    TIME,
    Channel,
    describe_column,
    list_unit_keys,
    name_channel,
)
from cuebook.recordings.event_lists import find_event_columns, read_events
from cuebook.recordings.recording import (
    POSITION,
    UNKNOWN,
    FloatArray,
    ReadingOptions,
    Recording,
    Signal,
)
from cuebook.recordings.tables import TextTable, read_table
from cuebook.recordings.text_files import decode_text, read_bytes
from cuebook.recordings.time_axis import (
    SAME_RATE,
    TimeAxis,
    build_uniform,
    is_counter,
    read_counter,
    read_stamps,
)
from cuebook.recordings.units import (
    KIND_OF_QUANTITY,
    get_factor,
    require_factor,
    scale_to_si,
    tidy_unit,
)
from cuebook.vocabulary import find_nearest

if TYPE_CHECKING:
    from collections.abc import Sequence

FOR_ALL = "*"


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
    _check_units(channels, rule)
    axis = _build_time(table, channels, rule, file)
    signals = []
    notes = [*axis.notes, *_note_assumed(channels, rule)]
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
    if stamped is None and rule.rate_hz is not None:
        return build_uniform(table.n_rows, rule.rate_hz)
    if stamped is None:
        raise NeedsAnswerError(
            f"{file} has no column of time that is known by its name.",
            "Give the rate with --rate HZ, or name the column with --columns time=NAME.",
            Place(file=file),
        )
    if rule.rate_hz is not None:
        return _combine_rate(table, stamped, rule.rate_hz, rule, file)
    stamps = table.get_numbers(stamped.column)
    return read_stamps(stamps, table.rows, _find_time_unit(stamped, rule), stamped.name, file)


def _find_time_unit(stamped: Channel, rule: ReadingOptions) -> str | None:
    return rule.units.get(TIME) or stamped.unit


def _combine_rate(
    table: TextTable, stamped: Channel, rate_hz: float, rule: ReadingOptions, file: str
) -> TimeAxis:
    """Return the time where a rate was given beside a column of time: the rate counts."""
    uniform = build_uniform(table.n_rows, rate_hz)
    if not table.is_numeric(stamped.column):
        return uniform
    stamps = table.get_numbers(stamped.column)
    if is_counter(stamps):
        return read_counter(stamps, table.rows, rate_hz, stamped.name, file)
    try:
        unit = _find_time_unit(stamped, rule)
        said = read_stamps(stamps, table.rows, unit, stamped.name, file).rate_hz
    except CuebookError:
        return uniform  # what cannot be read cannot contradict
    if abs(said - rate_hz) <= SAME_RATE * rate_hz:
        return uniform
    note = f"time: column '{stamped.name}' says {said:.4g} Hz; the rate you gave was taken"
    return replace(uniform, notes=(*uniform.notes, note))


def _check_units(channels: Sequence[Channel], rule: ReadingOptions) -> None:
    """Refuse a unit that is meant for no channel, or fits none.

    Raises
    ------
    UsageError : names the nearest channel.
    """
    known = {key for channel in channels for key in list_unit_keys(channel)} | {TIME, FOR_ALL}
    for key in rule.units:
        if key not in known:
            nearest = find_nearest(key, known - {FOR_ALL}) or tuple(sorted(known - {FOR_ALL}))[:6]
            raise UsageError(
                f"--units names '{key}', which is no channel of the recording.",
                f"Nearest known: {', '.join(nearest)}.",
            )
    unit = rule.units.get(FOR_ALL)
    if unit is not None and not any(_fits(channel, unit) for channel in channels):
        raise UsageError(
            f"The unit '{unit}' fits no channel of the recording.",
            "Say what it belongs to, such as --units x=cm or --units time=ms.",
        )


def _fits(channel: Channel, unit: str) -> bool:
    kind = KIND_OF_QUANTITY.get(channel.quantity)
    return kind is not None and get_factor(kind, unit) is not None


def _find_given_unit(channel: Channel, rule: ReadingOptions) -> str | None:
    for key in list_unit_keys(channel):
        if key in rule.units:
            return rule.units[key]
    unit = rule.units.get(FOR_ALL)
    return unit if unit is not None and _fits(channel, unit) else None


def _make_signal(
    channel: Channel, values: FloatArray, rule: ReadingOptions
) -> tuple[Signal, str | None]:
    given = _find_given_unit(channel, rule)
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
    scaled = scale_to_si(values, factor)
    return Signal(channel.name, channel.quantity, unit, channel.axis, scaled, channel.point), note


def _note_assumed(channels: Sequence[Channel], rule: ReadingOptions) -> list[str]:
    """Return what is said about columns that are named by an axis and nothing else."""
    bare = [
        f"'{channel.name}'"
        for channel in channels
        if channel.quantity == POSITION and not channel.point and channel.unit is None
    ]
    if rule.columns or not bare:
        return []
    return [f"assumed: {', '.join(bare)} taken for the position of one point"]


def _refuse_empty(signals: Sequence[Signal], file: str) -> None:
    if all(not np.any(np.nan_to_num(signal.values)) for signal in signals):
        raise InputError(
            f"Every sample of {file} is 0 or missing.",
            "Check the sensor and export the recording again.",
            Place(file=file),
        )
