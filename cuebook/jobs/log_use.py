"""Log what was said, to whom, and what followed; on disk before it is said back."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from datetime import UTC, datetime, time, timedelta
from pathlib import Path
from typing import TYPE_CHECKING

from cuebook.errors import InputError, UsageError
from cuebook.jobs.log_checks import check_entry, check_values
from cuebook.jobs.log_entries import BlockEntry, LearnerNote, Logged, Values
from cuebook.jobs.log_words import describe_block, warn_of_holds
from cuebook.vocabulary import load_vocabulary

if TYPE_CHECKING:
    from cuebook.store.stamps import Stamp
    from cuebook.store.transactions import Transaction

Location = str | Path | None
STOPPING_EVENTS = frozenset({"fall"})


@dataclass(frozen=True, slots=True)
class _Target:
    """Whom a block is for."""

    learner_id: str | None
    group_id: str | None
    learners: tuple[tuple[str, str], ...]
    """(key, code) of everybody expected, in the order of joining."""


def log_block(location: Location, entry: BlockEntry) -> Logged:
    """Log one block with its uses and typed values, in one transaction.

    Raises
    ------
    UsageError, InputError, UnknownCodeError : what was said does not fit; nothing is stored.
    """
    return _log(location, entry, (entry,))


def log_before_after(
    location: Location,
    entry: BlockEntry,
    before: Mapping[str, tuple[float, ...]],
    after: Mapping[str, tuple[float, ...]],
) -> Logged:
    """Log baseline, practice and the measure straight after, in one transaction."""
    middle = replace(entry, phase="acquisition")
    measured = replace(entry, cue=None, wording=None, except_codes=(), notes={})
    first = replace(measured, phase="baseline", note=LearnerNote(values=before))
    last = replace(measured, phase="immediate_post", note=LearnerNote(values=after))
    blocks = [middle]
    if before:
        blocks.insert(0, first)
    if after:
        blocks.append(last)
    return _log(location, entry, tuple(blocks))


def add_values(location: Location, block_id: str, learner: str, values: Values) -> Logged:
    """Add typed values to a block that is logged already."""
    for metric, numbers in values.items():
        check_values(metric, numbers)
    from cuebook.store.opening import open_library  # noqa: PLC0415
    from cuebook.store.stamps import make_stamp  # noqa: PLC0415
    from cuebook.store.writing import people, practice  # noqa: PLC0415

    stamp = make_stamp()
    with open_library(location, create=False) as library, library.transaction() as tx:
        learner_id = people.get_learner(tx, learner).id
        block = practice.get_block(tx, block_id)
        part = practice.add_participation(tx, stamp, block_id, learner_id)
        practice.add_typed_values(tx, stamp, part, learner_id, values)
        session_id = block.session_id
    said = "; ".join(
        f"{metric} {' '.join(f'{number:g}' for number in listed)}"
        for metric, listed in values.items()
    )
    return Logged(session_id, (block_id,), (learner,), (f"{learner}: {said}",))


def end_session(location: Location, session_id: str) -> None:
    """Note that a session is over."""
    from cuebook.store.opening import open_library  # noqa: PLC0415
    from cuebook.store.writing import practice  # noqa: PLC0415

    with open_library(location, create=False) as library, library.transaction() as tx:
        practice.end_session(tx, session_id, datetime.now(UTC))


def _log(location: Location, entry: BlockEntry, blocks: tuple[BlockEntry, ...]) -> Logged:
    phases = [check_entry(block) for block in blocks]
    from cuebook.store.opening import open_library  # noqa: PLC0415
    from cuebook.store.stamps import make_stamp  # noqa: PLC0415

    stamp = make_stamp(entry.at)
    lines: list[str] = []
    made: list[str] = []
    with open_library(location) as library, library.transaction() as tx:
        keep_seed_cues(tx, stamp)
        target = _find_target(tx, entry)
        session_id, is_new = find_session(
            tx, stamp, entry, learner_id=target.learner_id, group_id=target.group_id
        )
        cautions = warn_of_holds(tx, [key for key, _ in target.learners], entry.task)
        for place, (block, phase) in enumerate(zip(blocks, phases, strict=True)):
            # Blocks of one call follow one another in time; an order by key alone would do for
            # reading, but stops and attempts are told apart by the clock.
            at = replace(stamp, occurred_at=stamp.occurred_at + timedelta(milliseconds=place))
            made += _write_block(tx, at, session_id, block, phase, target, lines)
    opening = "New session" if is_new else "Session goes on"
    return Logged(
        session_id,
        tuple(made),
        tuple(code for _, code in target.learners),
        (f"{opening}: {entry.learner or entry.group}", *lines),
        tuple(cautions),
    )


def keep_seed_cues(tx: Transaction, stamp: Stamp) -> None:
    """Give a library without any cue the sets that travel with the program."""
    from cuebook.library.seed_sets import load_seed_sets  # noqa: PLC0415
    from cuebook.store.writing import cues  # noqa: PLC0415

    if cues.has_cues(tx):
        return
    for cue_set in load_seed_sets():
        cues.keep_cues(tx, stamp, cue_set.cues, cue_set.code)


def _find_target(tx: Transaction, entry: BlockEntry) -> _Target:
    from cuebook.store.writing import people  # noqa: PLC0415

    if entry.learner is not None:
        learner = people.get_learner(tx, entry.learner)
        return _Target(learner.id, None, ((learner.id, learner.code),))
    group = people.get_group(tx, entry.group or "")
    members = tuple((row.id, row.code) for row in people.list_members(tx, group.id, entry.at))
    if not members:
        raise InputError(f"The group {group.code} is empty.", "Add members: cuebook group add.")
    codes = {code for _, code in members}
    for code in (*entry.except_codes, *entry.notes):
        if code not in codes:
            raise people.describe_unknown_code(f"member of {group.code}", code, codes)
    return _Target(None, group.id, members)


def find_session(
    tx: Transaction,
    stamp: Stamp,
    entry: BlockEntry,
    *,
    learner_id: str | None = None,
    group_id: str | None = None,
) -> tuple[str, bool]:
    """Return the session to log in, and whether it is new."""
    from cuebook.store.writing import practice  # noqa: PLC0415

    if entry.session not in {None, "new"}:
        found = practice.get_session(tx, entry.session or "")
        if (found.learner_id, found.group_id) != (learner_id, group_id):
            raise UsageError(
                f"The session {entry.session} belongs to somebody else.",
                "Leave --session out to go on with today's.",
            )
        return found.id, False
    if entry.session is None:
        local_day = datetime.combine(stamp.occurred_at.date(), time.min, stamp.occurred_at.tzinfo)
        known = practice.find_open_session(
            tx,
            local_day,
            local_day + timedelta(days=1),
            learner_id=learner_id,
            group_id=group_id,
        )
        if known is not None:
            return known, False
    made = practice.start_session(tx, stamp, learner_id=learner_id, group_id=group_id)
    return made, True


def _write_block(
    tx: Transaction,
    stamp: Stamp,
    session_id: str,
    entry: BlockEntry,
    phase: str,
    target: _Target,
    lines: list[str],
) -> list[str]:
    """Write a block (and one for the exceptions of a group); return their keys."""
    from cuebook.store.keys import make_key  # noqa: PLC0415
    from cuebook.store.writing import cues, practice  # noqa: PLC0415

    wording_id = None
    if entry.cue is not None:
        wording_id = cues.get_wording_id(tx, entry.cue, revision=entry.wording)
    excepted = [pair for pair in target.learners if pair[1] in entry.except_codes]
    included = [pair for pair in target.learners if pair[1] not in entry.except_codes]
    is_event = entry.cue is not None and target.group_id is not None and len(included) > 1
    new = practice.NewBlock(
        phase=phase,
        task=entry.task,
        side=entry.side,
        wording_id=wording_id,
        others=entry.others,
        chosen=entry.chosen if phase == "acquisition" else None,
        event_id=make_key() if is_event else None,
    )
    made = [practice.add_block(tx, stamp, session_id, new)]
    for learner_id, code in included:
        _write_part(tx, stamp, made[0], learner_id, entry.notes.get(code, entry.note), phase)
    lines.append(describe_block(entry, phase, [code for _, code in included]))
    if excepted:
        # They practised within hearing of the cue: neither cued nor practice alone.
        made.append(
            practice.add_block(
                tx, stamp, session_id, replace(new, wording_id=None, others="some", event_id=None)
            )
        )
        for learner_id, code in excepted:
            _write_part(tx, stamp, made[1], learner_id, entry.notes.get(code, LearnerNote()), phase)
        names = ", ".join(code for _, code in excepted)
        lines.append(f"  without this cue: {names} (they heard it, so they are not compared)")
    return made


def _write_part(
    tx: Transaction, stamp: Stamp, block_id: str, learner_id: str, note: LearnerNote, phase: str
) -> None:
    from cuebook.store.writing import practice  # noqa: PLC0415

    part = practice.add_participation(tx, stamp, block_id, learner_id, presence=note.present)
    if note.present != "present":
        return
    practice.add_typed_values(tx, stamp, part, learner_id, note.values)
    events = (note.event,) if note.event else ()
    practice.add_happenings(tx, stamp, part, learner_id, events)
    if phase != "acquisition":
        return
    stop = note.stop
    if stop is None and note.event in STOPPING_EVENTS:
        stop = "fall_or_near_fall"  # a fall ends the task for this learner, whatever was typed
    practice.add_use(
        tx,
        stamp,
        part,
        learner_id,
        practice.NewUse(
            times_said=note.said,
            observed=note.observed,
            reaction=note.reaction,
            words=note.words,
            stop_reason=stop,
        ),
    )


def name_phase(phase: str) -> str:
    """Return a phase in the words of the screen."""
    return load_vocabulary().label("phase", phase)
