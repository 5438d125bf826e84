"""What the screens share: for whom, which task, which cue."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from cuebook.jobs.people import PersonLine


@dataclass(frozen=True, slots=True)
class Shared:
    """One snapshot; screens replace it, they never change it."""

    location: str | Path | None = None
    who: PersonLine | None = None
    """None: nobody picked yet."""
    task: str | None = None
    cue: str | None = None
    """Code of the cue that was taken from Find."""
    cue_words: str = ""
    metric: str | None = None
    """What numbers are typed for; the cue's own target if it has one."""

    @property
    def line(self) -> str:
        """Return the context in one line, to be read aloud."""
        who = self.who.code if self.who is not None else "nobody yet"
        parts = [f"For: {who}"]
        if self.task:
            parts.append(f"task: {self.task.replace('_', ' ')}")
        if self.cue:
            parts.append(f"cue: {self.cue}")
        return "   ".join(parts)
