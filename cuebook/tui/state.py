"""What the screens share: for whom, which task, which cue."""

from __future__ import annotations

from dataclasses import dataclass

from cuebook.jobs.people import PersonLine
from cuebook.vocabulary import load_vocabulary


@dataclass(frozen=True, slots=True)
class Shared:
    """One snapshot; it is replaced, never changed."""

    who: PersonLine | None = None
    """None: nobody picked yet."""
    task: str | None = None
    """None: no task yet."""
    task_was_picked: bool = False
    """Picked by hand, so that only cues for it are looked up; a cue's own task is not."""
    side: str | None = None
    """left, right or both; None: not said."""
    cue: str | None = None
    """Code of the cue that was taken from Find."""
    cue_words: str = ""
    cue_caution: str = ""
    """Read before the words; empty: none."""
    metric: str | None = None
    """What numbers are typed for; the cue's own target if it has one."""

    @property
    def line(self) -> str:
        """Return the context in one line, to be read aloud."""
        who = "nobody yet" if self.who is None else self.who.code
        parts = [f"For: {'group ' if self.who and self.who.is_group else ''}{who}"]
        if self.task:
            parts.append(f"task: {load_vocabulary().label('task', self.task)}")
        if self.side:
            parts.append(f"side: {self.side}")
        if self.cue:
            parts.append(f"cue: {self.cue}")
        return "   ".join(parts)
