"""What was stored, said back in plain words."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from cuebook.jobs.log_entries import BlockEntry, LearnerNote
from cuebook.vocabulary import load_vocabulary

if TYPE_CHECKING:
    from cuebook.store.transactions import Transaction


def describe_block(entry: BlockEntry, phase: str, learners: Sequence[str]) -> str:
    """Return one line: phase, task, cue, who, and what differs."""
    vocabulary = load_vocabulary()
    name = vocabulary.label("phase", phase)
    if phase == "acquisition" and entry.cue is None:
        name = "practice without a cue"
    parts = [f"{name}: {vocabulary.label('task', entry.task)}"]
    if entry.side:
        parts.append(entry.side)
    if entry.cue:
        parts.append(f"cue {entry.cue}")
    present = [code for code in learners if entry.notes.get(code, entry.note).present == "present"]
    if entry.group is not None:
        parts.append(f"{len(present)} of {len(learners)} present")
    parts += _describe_note(entry.note)
    line = "  " + ", ".join(parts)
    for code, note in entry.notes.items():
        own = _describe_note(note)
        if note.present != "present":
            own.insert(0, note.present.replace("_", " "))
        if own:
            line += f"\n    {code}: {', '.join(own)}"
    return line


def _describe_note(note: LearnerNote) -> list[str]:
    vocabulary = load_vocabulary()
    parts = []
    if note.said is not None:
        parts.append(f"said {note.said} time{'' if note.said == 1 else 's'}")
    for list_name, slug in (
        ("observed_change", note.observed),
        ("reaction", note.reaction),
        ("event", note.event),
    ):
        if slug:
            parts.append(vocabulary.label(list_name, slug))
    if note.stop:
        parts.append(f"stopped: {vocabulary.label('reason_for_stopping', note.stop).lower()}")
    for metric, numbers in note.values.items():
        parts.append(f"{metric} {' '.join(f'{number:g}' for number in numbers)}")
    return parts


def warn_of_holds(tx: Transaction, learner_ids: Sequence[str], task: str) -> list[str]:
    """Return a caution for everybody who is on hold for a task that was logged."""
    from cuebook.store.writing.people import list_open_holds  # noqa: PLC0415

    label = load_vocabulary().label("task", task)
    cautions = [
        f"{code} is on hold for {label} until {until} (cleared by {by_role}). "
        "It is logged as you say; do not go on without that clearance."
        for code, until, by_role in list_open_holds(tx, learner_ids, task)
    ]
    caution = load_vocabulary().task(task).caution_first
    return [*cautions, *([f"{label}: {caution}"] if caution else [])]
