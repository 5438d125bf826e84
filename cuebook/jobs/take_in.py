"""Take recordings in: measure them, keep the originals, store values; all or nothing."""

from __future__ import annotations

import hashlib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING, Any

from cuebook.errors import InputError, Place, UsageError
from cuebook.jobs.log_checks import check_entry
from cuebook.jobs.log_entries import BlockEntry
from cuebook.jobs.measure import MeasuredFile, measure_content
from cuebook.vocabulary import load_vocabulary

if TYPE_CHECKING:
    from cuebook.recordings.recording import ReadingOptions
    from cuebook.store.stamps import Stamp
    from cuebook.store.transactions import Transaction
    from cuebook.store.writing.recordings import EarlierReading

Location = str | Path | None


@dataclass(frozen=True)
class ReadyFile:
    """A file that has been read and measured, not yet stored."""

    path: Path
    content: bytes
    sha256: str
    measured: MeasuredFile
    rule: Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class TakenIn:
    """What an import did."""

    session_id: str | None
    """None if nothing was stored."""
    block_id: str | None
    n_added: int
    n_read_anew: int
    n_known: int
    lines: tuple[str, ...]
    notes: tuple[str, ...] = field(default=())


def prepare_files(
    paths: Sequence[Path],
    task: str,
    *,
    options: ReadingOptions | None = None,
    settings: Mapping[str, str] | None = None,
) -> list[ReadyFile]:
    """Read and measure files; the first that cannot be used stops everything.

    Raises
    ------
    InputError, NeedsAnswerError, UsageError : as reading and measuring do.
    """
    from cuebook.recordings.text_files import read_bytes  # noqa: PLC0415

    if not paths:
        raise UsageError("No file was named.", "Give one recording or several.")
    ready = []
    for path in paths:
        content = read_bytes(path)
        measured = measure_content(
            content, path.name, task=task, settings=settings, options=options
        )
        if all(one.value is None for one in measured.measurements):
            reason = next((one.reason for one in measured.measurements if one.reason), None)
            raise InputError(
                f"{path}: nothing could be measured"
                + (f": {reason}." if reason else " for this task."),
                "Check the task and the reading options with: cuebook measure.",
                Place(file=str(path)),
            )
        rule = {**measured.rule, **({"settings": dict(settings)} if settings else {})}
        ready.append(ReadyFile(path, content, hashlib.sha256(content).hexdigest(), measured, rule))
    _refuse_twins(ready)
    return ready


def _refuse_twins(ready: Sequence[ReadyFile]) -> None:
    seen: dict[str, Path] = {}
    for file in ready:
        if file.sha256 in seen:
            raise InputError(
                f"{file.path} holds the same bytes as {seen[file.sha256]}.",
                "Name each recording once.",
                Place(file=str(file.path)),
            )
        seen[file.sha256] = file.path


def take_in(
    location: Location,
    paths: Sequence[Path],
    entry: BlockEntry,
    *,
    block_id: str | None = None,
    again: bool = False,
    options: ReadingOptions | None = None,
    settings: Mapping[str, str] | None = None,
) -> TakenIn:
    """Take recordings in as the trials of one block, in the order given.

    Same bytes for the same learner and block: nothing is added. Same bytes under another
    reading rule: a new reading of the same trial; the old one stays in history. Same bytes for
    another learner or block: refused unless ``again``.
    """
    phase = check_entry(entry)
    if entry.learner is None:
        raise UsageError("A recording belongs to one learner.", "Name them with --learner.")
    ready = prepare_files(paths, entry.task, options=options, settings=settings)
    from cuebook.store.opening import open_library  # noqa: PLC0415
    from cuebook.store.originals import keep_original_file  # noqa: PLC0415
    from cuebook.store.stamps import make_stamp  # noqa: PLC0415

    stamp = make_stamp(entry.at)
    with open_library(location) as library:
        # Files first, rows after: a row never names bytes that are not on disk.
        for file in ready:
            keep_original_file(library.originals, file.content)
        with library.transaction() as tx:
            return _store(tx, stamp, entry, phase, ready, block_id=block_id, again=again)


def _store(
    tx: Transaction,
    stamp: Stamp,
    entry: BlockEntry,
    phase: str,
    ready: Sequence[ReadyFile],
    *,
    block_id: str | None,
    again: bool,
) -> TakenIn:
    from cuebook.jobs.log_use import keep_seed_cues  # noqa: PLC0415
    from cuebook.store.writing import people  # noqa: PLC0415
    from cuebook.store.writing.recordings import find_earlier_readings  # noqa: PLC0415

    keep_seed_cues(tx, stamp)
    learner = people.get_learner(tx, entry.learner or "")
    earlier = {file.sha256: find_earlier_readings(tx, file.sha256) for file in ready}
    own = {
        sha256: None if again else _find_own(readings, learner.id, entry, phase, block_id)
        for sha256, readings in earlier.items()
    }
    if not again:
        for file in ready:
            if own[file.sha256] is None and earlier[file.sha256]:
                raise _refuse_elsewhere(file, earlier[file.sha256][0])
    known = [reading for reading in own.values() if reading is not None]
    if block_id is None and known:
        block_id = known[0].block_id
    session_id, block_id = _find_block(tx, stamp, entry, phase, learner.id, block_id)
    writer = FileWriter(tx, learner.id, block_id)
    writer.start(stamp)
    for file in ready:
        writer.write(stamp, file, own[file.sha256])
    return TakenIn(
        session_id,
        block_id,
        writer.n_added,
        writer.n_read_anew,
        writer.n_known,
        _describe(entry, phase, ready, writer),
        tuple(dict.fromkeys(note for file in ready for note in file.measured.recording.notes)),
    )


def _find_own(
    readings: Sequence[EarlierReading],
    learner_id: str,
    entry: BlockEntry,
    phase: str,
    block_id: str | None,
) -> EarlierReading | None:
    """Return the reading of the same bytes for the same learner and block, if there is one."""
    for reading in readings:
        is_same_block = (
            reading.block_id == block_id
            if block_id is not None
            else (reading.phase, reading.task) == (phase, entry.task)
            and entry.session in {None, reading.session_id}
        )
        if reading.learner_id == learner_id and is_same_block and reading.is_current:
            return reading
    return None


def _refuse_elsewhere(file: ReadyFile, earlier: EarlierReading) -> InputError:
    phase = load_vocabulary().label("phase", earlier.phase)
    return InputError(
        f"{file.path} is in the library already: learner {earlier.learner}, {phase}, "
        f"session {earlier.session_id}.",
        "Nothing was stored. Add --again if the same recording belongs here, too.",
        Place(file=str(file.path)),
    )


def _find_block(
    tx: Transaction,
    stamp: Stamp,
    entry: BlockEntry,
    phase: str,
    learner_id: str,
    block_id: str | None,
) -> tuple[str, str]:
    """Return session and block to import into; both are made if none is named."""
    from cuebook.jobs.log_use import find_session  # noqa: PLC0415
    from cuebook.store.writing import cues, practice  # noqa: PLC0415

    if block_id is not None:
        block = practice.get_block(tx, block_id)
        if block.task != entry.task or block.phase != phase:
            raise UsageError(
                f"The block {block_id} is {block.phase}, {block.task}; "
                f"you said {phase}, {entry.task}.",
                "Name another block, or leave --block out.",
            )
        return block.session_id, block_id
    session_id, _ = find_session(tx, stamp, entry, learner_id=learner_id)
    wording_id = None
    if entry.cue is not None:
        wording_id = cues.get_wording_id(tx, entry.cue, revision=entry.wording)
    new = practice.NewBlock(
        phase=phase,
        task=entry.task,
        side=entry.side,
        wording_id=wording_id,
        others=entry.others,
        chosen=entry.chosen if phase == "acquisition" else None,
    )
    return session_id, practice.add_block(tx, stamp, session_id, new)


class FileWriter:
    """Writes measured files as the trials of one learner in one block."""

    def __init__(
        self,
        tx: Transaction,
        learner_id: str,
        block_id: str,
        recipes: dict[str, int] | None = None,
    ) -> None:
        self._tx = tx
        self._learner_id = learner_id
        self._block_id = block_id
        self._part = ""
        self._recipes: dict[str, int] = {} if recipes is None else recipes
        self.n_added = self.n_read_anew = self.n_known = 0

    def start(self, stamp: Stamp) -> None:
        """Make sure the learner takes part in the block, with a use if it is practice."""
        from cuebook.store.writing import practice  # noqa: PLC0415

        self._part = practice.add_participation(self._tx, stamp, self._block_id, self._learner_id)
        if practice.get_block(self._tx, self._block_id).phase == "acquisition":
            practice.keep_use(self._tx, self._part, self._learner_id)

    def write(self, stamp: Stamp, file: ReadyFile, own: EarlierReading | None) -> None:
        """Write one file, unless it is there already under the same rule."""
        from cuebook.store.writing import practice, recordings  # noqa: PLC0415
        from cuebook.store.writing.measurements import Measured, add_measurements  # noqa: PLC0415
        from cuebook.store.writing.revisions import count_evidence  # noqa: PLC0415

        if own is not None and own.rule_digest == recordings.make_rule_digest(file.rule):
            self.n_known += 1
            return
        if own is None:
            trial_id = practice.add_trial(self._tx, stamp, self._part, self._learner_id)
            self.n_added += 1
        else:
            trial_id = own.trial_id
            self.n_read_anew += 1
        recording = file.measured.recording
        recording_id = recordings.add_recording(
            self._tx,
            stamp,
            original_id=recordings.keep_original(self._tx, stamp, file.sha256, len(file.content)),
            learner_id=self._learner_id,
            block_id=self._block_id if own is None else own.block_id,
            trial_id=trial_id,
            rule=file.rule,
            rate_hz=recording.rate_hz,
            duration_s=recording.duration_s,
            replaces=None if own is None else own.recording_id,
        )
        measured = [
            Measured(
                one.metric,
                one.value,
                one.recipe,
                one.segment or "",
                one.n_used,
                one.flags,
                one.quality,
                one.reason,
            )
            for one in file.measured.measurements
        ]
        add_measurements(
            self._tx,
            trial_id,
            self._learner_id,
            measured,
            recording_id=recording_id,
            recipes=self._recipes,
        )
        count_evidence(self._tx)


def _describe(
    entry: BlockEntry, phase: str, ready: Sequence[ReadyFile], writer: FileWriter
) -> tuple[str, ...]:
    vocabulary = load_vocabulary()
    where = (
        f"{entry.learner}, {vocabulary.label('task', entry.task)}, "
        f"{vocabulary.label('phase', phase)}"
    )
    lines = []
    if writer.n_added:
        lines.append(f"{writer.n_added} recordings taken in: {where}.")
    if writer.n_read_anew:
        lines.append(f"{writer.n_read_anew} read anew under another rule; the old stay in history.")
    if writer.n_known:
        lines.append(f"{writer.n_known} are in the library already: nothing added.")
    for file in ready:
        values = ", ".join(
            f"{one.metric} {one.value:.4g}"
            for one in file.measured.measurements
            if one.value is not None
        )
        lines.append(f"  {file.path.name}: {values}")
    return tuple(lines)
