"""Look back at sessions: list them, show one, as lines to paste into the clinical record."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from pathlib import Path

from cuebook.errors import UnknownCodeError
from cuebook.store.places import has_library
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.meetings import PastBlock, read_meetings, read_past_blocks
from cuebook.store.reading.people import require_group_key, require_learner_key
from cuebook.vocabulary import load_vocabulary

Location = str | Path | None


@dataclass(frozen=True, slots=True)
class SessionLine:
    """A session in a list."""

    session_id: str
    started_at: datetime
    is_open: bool
    who: str
    n_blocks: int


def list_sessions(
    location: Location, *, learner: str | None = None, group: str | None = None
) -> tuple[SessionLine, ...]:
    """Return sessions, the newest first."""
    if not has_library(location):
        return ()
    with open_for_reading(location) as connection:
        learner_key = require_learner_key(connection, learner) if learner else None
        group_key = require_group_key(connection, group) if group else None
        lines = read_meetings(connection, learner_key=learner_key, group_key=group_key)
    return tuple(
        SessionLine(line.session_id, line.started_at, line.is_open, line.who, line.n_blocks)
        for line in lines
    )


def show_session(location: Location, session_id: str) -> tuple[str, ...]:
    """Return a session as plain lines.

    Raises
    ------
    UnknownCodeError : no such session.
    """
    with open_for_reading(location) as connection:
        blocks = read_past_blocks(connection, session_id=session_id)
    if not blocks:
        raise UnknownCodeError(
            f"Unknown session '{session_id}'.", "List them with: cuebook session list"
        )
    lines = [f"Session of {blocks[0].occurred_at.astimezone():%Y-%m-%d %H:%M}"]
    seen: set[str] = set()
    for block in blocks:
        if block.block_id not in seen:
            seen.add(block.block_id)
            lines.append(_describe_block(block))
        lines.append(f"  {block.learner}{_describe_part(block)}")
    lines.append("Cuebook keeps practice notes; the clinical record is kept elsewhere.")
    return tuple(lines)


def _describe_block(block: PastBlock) -> str:
    vocabulary = load_vocabulary()
    phase = vocabulary.label("phase", block.phase)
    if block.phase == "acquisition" and block.cue is None:
        phase = "practice without a cue"
    line = f"{phase}: {vocabulary.label('task', block.task)}"
    if block.side:
        line += f", {block.side}"
    if block.cue:
        line += f', cue {block.cue}: "{block.words}"'
    return line


def _describe_part(block: PastBlock) -> str:
    vocabulary = load_vocabulary()
    parts = [] if block.presence == "present" else [block.presence.replace("_", " ")]
    if block.times_said is not None:
        parts.append(f"said {block.times_said}")
    if block.observed:
        parts.append(vocabulary.label("observed_change", block.observed))
    if block.reaction:
        parts.append(vocabulary.label("reaction", block.reaction))
    parts += [vocabulary.label("event", event) for event in block.events]
    if block.stop_reason:
        parts.append(vocabulary.label("reason_for_stopping", block.stop_reason))
    return f": {', '.join(parts)}" if parts else ""
