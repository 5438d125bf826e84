"""Builds the demonstration library: recordings as files, taken in by the ordinary importer."""

from __future__ import annotations

import shutil
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING

from cuebook.errors import InputError
from cuebook.jobs.demo.people import DemoLearner
from cuebook.jobs.demo.plan import DemoBlock, DemoParticipation, DemoPlan, DemoSession
from cuebook.jobs.log_use import keep_seed_cues
from cuebook.jobs.take_in import FileWriter, ReadyFile, prepare_files
from cuebook.store.places import DATABASE_NAME, get_default_folder

if TYPE_CHECKING:
    from cuebook.recordings.recording import ReadingOptions
    from cuebook.store.opening import Library
    from cuebook.store.stamps import Stamp
    from cuebook.store.transactions import Transaction
    from cuebook.store.writing.practice import NewBlock

MARK = "This folder holds the invented demonstration of Cuebook; nobody in it is real.\n"
MARK_NAME = "DEMONSTRATION.txt"


@dataclass(frozen=True, slots=True)
class Imported:
    """What went into the demonstration library."""

    files: int
    typed_values: int
    sessions: int
    uses: int
    learners: int


@dataclass
class _Keys:
    """Keys of what has been written, by the plan's own codes."""

    learners: dict[str, str] = field(default_factory=dict)
    groups: dict[str, str] = field(default_factory=dict)
    slots: dict[tuple[str, int], str] = field(default_factory=dict)
    recipes: dict[str, int] = field(default_factory=dict)


def get_demo_folder() -> Path:
    """Return the demonstration's own folder, beside the user's library."""
    return get_default_folder().parent / "demonstration"


def prepare_demo_folder(folder: Path, *, fresh: bool) -> bool:
    """Make the folder ready; return whether a finished demonstration is in it already.

    Raises
    ------
    InputError : the folder holds something else: nothing of it is touched.
    """
    mark = folder / MARK_NAME
    if folder.exists() and any(folder.iterdir()) and not mark.is_file():
        raise InputError(
            f"{folder} holds something that is no demonstration.", "Name an empty folder."
        )
    if fresh and mark.is_file():
        shutil.rmtree(folder)
    is_finished = mark.is_file() and (folder / "library" / DATABASE_NAME).is_file()
    if mark.is_file() and not is_finished:
        shutil.rmtree(folder)
    folder.mkdir(parents=True, exist_ok=True)
    return is_finished


def build_demo(folder: Path) -> Imported:
    """Write the recordings and take them in; the mark is set last, when all is there."""
    from cuebook.jobs.demo.simulate import write_recordings  # noqa: PLC0415

    recordings = folder / "recordings"
    (folder / MARK_NAME).write_text(MARK, encoding="utf-8")
    plan = write_recordings(recordings)
    building = folder / "library.building"
    imported = take_in_plan(building, recordings, plan)
    building.rename(folder / "library")
    return imported


def take_in_plan(location: Path, recordings: Path, plan: DemoPlan) -> Imported:
    """Log everything the plan says and import every recording it names."""
    from cuebook.store.opening import open_library  # noqa: PLC0415

    options = {reading.task: _read_options(plan, reading.task) for reading in plan.readings}
    keys = _Keys()
    n_typed = 0
    with open_library(location) as library:
        with library.transaction() as tx:
            _add_people(tx, plan, keys)
        for session in plan.sessions:
            ready = _prepare_session(recordings, session, options)
            _keep_originals(library, ready)
            with library.transaction() as tx:
                n_typed += _add_session(tx, session, keys, ready)
    return Imported(
        files=len(plan.list_files()),
        typed_values=n_typed,
        sessions=len(plan.sessions),
        uses=sum(1 for _ in plan.iterate_uses()),
        learners=len(plan.learners),
    )


def _read_options(plan: DemoPlan, task: str) -> ReadingOptions:
    from cuebook.recordings.recording import ReadingOptions  # noqa: PLC0415

    reading = plan.get_reading(task)
    if reading is None:  # pragma: no cover - only tasks with a reading are asked for
        return ReadingOptions()
    return ReadingOptions(columns=dict(reading.columns), units=dict(reading.units))


def _add_people(tx: Transaction, plan: DemoPlan, keys: _Keys) -> None:
    from cuebook.store.stamps import make_stamp  # noqa: PLC0415
    from cuebook.store.writing import people, practice  # noqa: PLC0415

    start = min(group.joined_at for group in plan.groups)
    stamp = make_stamp(start, entered_at=start)
    keep_seed_cues(tx, stamp)
    for one in plan.staff:
        people.add_staff(tx, one.code, one.role)
    for learner in plan.learners:
        keys.learners[learner.code] = _add_learner(tx, stamp, learner)
    for group in plan.groups:
        group_id = people.add_group(tx, stamp, group.code, group.label)
        keys.groups[group.code] = group_id
        for member in group.members:
            people.add_member(tx, group_id, keys.learners[member], group.joined_at)
    for schedule in plan.schedules:
        drawn = make_stamp(schedule.drawn_at, entered_at=schedule.drawn_at)
        slots = practice.add_schedule(
            tx,
            drawn,
            keys.learners[schedule.learner],
            task=schedule.task,
            rule=schedule.rule,
            seed=schedule.seed,
            arms=schedule.arms,
            slots=schedule.slots,
        )
        keys.slots.update({(schedule.code, place): key for place, key in enumerate(slots)})


def _add_learner(tx: Transaction, stamp: Stamp, learner: DemoLearner) -> str:
    from cuebook.store.writing import people  # noqa: PLC0415

    key = people.add_learner(
        tx,
        stamp,
        learner.code,
        age_band=learner.age_band,
        experience=learner.experience,
        is_returning=learner.returning,
        backgrounds=learner.backgrounds,
        access_needs=learner.access_needs,
    )
    for item, answer in learner.consents.items():
        if answer != "not_asked":
            people.add_consent(
                tx,
                stamp,
                key,
                item,
                answer,
                given_by=learner.consent_given_by,
                how=learner.consent_how,
                assent=learner.assent,
            )
    if learner.safety_note or learner.safety_words:
        people.add_safety_note(tx, stamp, key, slug=learner.safety_note, words=learner.safety_words)
    if learner.hold is not None:
        people.add_holds(
            tx,
            stamp,
            key,
            learner.hold.tasks,
            until=learner.hold.until,
            by_role=learner.hold.by_role,
        )
    return key


def _prepare_session(
    recordings: Path, session: DemoSession, options: Mapping[str, ReadingOptions]
) -> dict[str, ReadyFile]:
    """Read and measure every recording of a session, block by block."""
    ready: dict[str, ReadyFile] = {}
    for block in session.blocks:
        for part in block.participations:
            files = [trial.file for trial in part.trials if trial.file is not None]
            if not files:
                continue
            prepared = prepare_files(
                [recordings / file for file in files], block.task, options=options[block.task]
            )
            ready.update(zip(files, prepared, strict=True))
    return ready


def _keep_originals(library: Library, ready: Mapping[str, ReadyFile]) -> None:
    from cuebook.store.originals import keep_original_file  # noqa: PLC0415

    for file in ready.values():
        keep_original_file(library.originals, file.content)


def _add_session(
    tx: Transaction, session: DemoSession, keys: _Keys, ready: Mapping[str, ReadyFile]
) -> int:
    from cuebook.store.stamps import make_stamp  # noqa: PLC0415
    from cuebook.store.writing import practice  # noqa: PLC0415

    stamp = make_stamp(
        session.started_at, entered_at=session.entered_at, entered_by=session.entered_by
    )
    session_id = practice.start_session(
        tx,
        stamp,
        learner_id=None if session.group else keys.learners[session.learners[0]],
        group_id=keys.groups[session.group] if session.group else None,
    )
    n_typed = 0
    for block in session.blocks:
        at = make_stamp(
            block.occurred_at, entered_at=session.entered_at, entered_by=session.entered_by
        )
        block_id = practice.add_block(tx, at, session_id, _make_block(tx, block, keys))
        for part in block.participations:
            n_typed += _add_part(tx, at, block, block_id, part, keys, ready)
    practice.end_session(tx, session_id, session.ended_at)
    return n_typed


def _make_block(tx: Transaction, block: DemoBlock, keys: _Keys) -> NewBlock:
    from cuebook.store.writing import cues, practice  # noqa: PLC0415

    slot_id = None
    if block.schedule is not None and block.slot is not None:
        slot_id = keys.slots[block.schedule, block.slot]
    return practice.NewBlock(
        phase=block.phase,
        task=block.task,
        side=block.side,
        wording_id=None if block.cue is None else cues.get_wording_id(tx, block.cue),
        others=block.others,
        chosen=block.chosen,
        event_id=block.event,
        slot_id=slot_id,
        protocol=block.protocol,
    )


def _add_part(
    tx: Transaction,
    stamp: Stamp,
    block: DemoBlock,
    block_id: str,
    part: DemoParticipation,
    keys: _Keys,
    ready: Mapping[str, ReadyFile],
) -> int:
    from cuebook.store.writing import practice  # noqa: PLC0415

    learner_id = keys.learners[part.learner]
    checks = {} if part.pain_today is None else {"pain_today": str(part.pain_today)}
    part_id = practice.add_participation(
        tx, stamp, block_id, learner_id, presence=part.presence, checks=checks
    )
    if part.presence != "present":
        return 0
    practice.add_happenings(tx, stamp, part_id, learner_id, part.events)
    if block.phase == "acquisition":
        practice.add_use(
            tx,
            stamp,
            part_id,
            learner_id,
            practice.NewUse(
                times_said=part.times_said,
                attempts=part.attempts,
                minutes=part.minutes,
                observed=part.observed,
                reaction=part.reaction,
                words=part.words,
                stop_reason=part.stop_reason,
            ),
        )
    writer = FileWriter(tx, learner_id, block_id, keys.recipes)
    writer.start(stamp)
    n_typed = 0
    for trial in part.trials:
        if trial.file is not None:
            writer.write(stamp, ready[trial.file], None)
            continue
        values = {metric: (value,) for metric, value in trial.values.items()}
        practice.add_typed_values(tx, stamp, part_id, learner_id, values)
        n_typed += len(values)
    return n_typed
