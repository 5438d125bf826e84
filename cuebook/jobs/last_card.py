"""The card for the next meeting; reading path only."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from statistics import fmean

from cuebook.metrics.registry import load_registry
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.meetings import (
    PastBlock,
    PastValue,
    read_past_blocks,
    read_past_values,
)
from cuebook.store.reading.people import (
    read_group_lines,
    read_person,
    require_group_key,
    require_learner_key,
)
from cuebook.vocabulary import load_vocabulary

Location = str | Path | None
OPENING_LINE = "Take the opening measure now, before any cue."


@dataclass(frozen=True, slots=True)
class LastCard:
    """What to know before the next meeting, and what to do first."""

    who: str
    holds: tuple[str, ...]
    safety_notes: tuple[str, ...]
    last_session_on: str | None
    """Local date of the last session; None if there was none."""
    last_cue: str | None
    last_words: str | None
    """The last cue in its exact words."""
    followed: tuple[str, ...]
    values: tuple[str, ...]
    opening: str
    lines: tuple[str, ...]


def read_last_card(
    location: Location, *, learner: str | None = None, group: str | None = None
) -> LastCard:
    """Return the card of a learner or of a group.

    Raises
    ------
    UnknownCodeError : no such learner or group.
    """
    with open_for_reading(location) as connection:
        if learner is not None:
            key = require_learner_key(connection, learner)
            members: tuple[str, ...] = (learner,)
            blocks = read_past_blocks(connection, learner_key=key)
            values = read_past_values(connection, key)
        else:
            group_key = require_group_key(connection, group or "")
            lines = read_group_lines(connection)
            members = next(line.members for line in lines if line.code == group)
            blocks = read_past_blocks(connection, group_key=group_key)
            values = ()
        people = [read_person(connection, code) for code in members]
    vocabulary = load_vocabulary()
    is_one = learner is not None
    holds = tuple(
        _name(person.code, is_one) + f"{vocabulary.label('task', hold.tasks[0])}: {hold.line}"
        for person in people
        for hold in person.holds
    )
    notes = tuple(
        _name(person.code, is_one) + note.line for person in people for note in person.notes
    )
    return _make_card(learner or group or "", holds, notes, blocks, values)


def _name(code: str | None, is_one: bool) -> str:  # noqa: FBT001
    return "" if is_one or code is None else f"{code}, "


def _make_card(
    who: str,
    holds: tuple[str, ...],
    notes: tuple[str, ...],
    blocks: Sequence[PastBlock],
    values: Sequence[PastValue],
) -> LastCard:
    last_session = blocks[-1].session_id if blocks else None
    of_session = [block for block in blocks if block.session_id == last_session]
    cued = [block for block in of_session if block.cue is not None]
    day = None if not blocks else f"{blocks[-1].occurred_at.astimezone():%Y-%m-%d}"
    last = cued[-1] if cued else None
    followed = tuple(line for block in cued for line in _describe_what_followed(block))
    measured = _describe_values(values, {block.block_id for block in of_session})
    lines = [who]
    lines += [f"On hold: {line}" for line in holds]
    lines += [f"Take care: {line}" for line in notes]
    if day is None:
        lines.append("No session yet.")
    else:
        tasks = dict.fromkeys(block.task for block in of_session)
        labels = ", ".join(load_vocabulary().label("task", task) for task in tasks)
        lines.append(f"Last session: {day}, {labels}")
    if last is not None:
        lines.append(f'Last cue: {last.cue}: "{last.words}"')
    elif day is not None:
        lines.append("No cue was given.")
    lines += [f"What followed: {line}" for line in followed]
    lines += [f"Measured: {line}" for line in measured]
    lines.append(OPENING_LINE)
    return LastCard(
        who,
        holds,
        notes,
        day,
        None if last is None else last.cue,
        None if last is None else last.words,
        followed,
        measured,
        OPENING_LINE,
        tuple(lines),
    )


def _describe_what_followed(block: PastBlock) -> list[str]:
    vocabulary = load_vocabulary()
    parts = []
    if block.times_said:
        parts.append(f"said {block.times_said} time{'' if block.times_said == 1 else 's'}")
    if block.observed:
        parts.append(vocabulary.label("observed_change", block.observed))
    if block.reaction:
        parts.append(vocabulary.label("reaction", block.reaction))
    parts += [vocabulary.label("event", event) for event in block.events]
    if block.stop_reason and block.stop_reason != "planned_end":
        reason = vocabulary.label("reason_for_stopping", block.stop_reason)
        parts.append(f"stopped: {reason.lower()}")
    if block.own_words:
        parts.append(f'own words: "{block.own_words}"')
    return [f"{block.learner}: {', '.join(parts)}"] if parts else []


def _describe_values(values: Sequence[PastValue], blocks: set[str]) -> tuple[str, ...]:
    """Return one line per metric of the last session: its means in order of the blocks."""
    registry, vocabulary = load_registry(), load_vocabulary()
    by_metric: dict[str, dict[tuple[str, str], list[float]]] = {}
    for value in values:
        if value.block_id in blocks:
            place = (value.block_id, value.phase)
            by_metric.setdefault(value.metric, {}).setdefault(place, []).append(value.value)
    lines = []
    for metric, sets in by_metric.items():
        entry = registry.get(metric)
        means = ", ".join(
            f"{vocabulary.label('phase', phase)} {fmean(numbers):.3g}"
            for (_, phase), numbers in sets.items()
        )
        lines.append(f"{entry.name}{f' ({entry.unit})' if entry.unit else ''}: {means}")
    return tuple(lines)
