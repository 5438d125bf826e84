"""Write logs of practice in short: ``visit("b A o")`` is baseline, cue A, measure after."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from datetime import UTC, datetime, timedelta

from cuebook.practice.changes import CONTRASTS, Change, Derived, NoChange
from cuebook.practice.derive import derive_changes
from cuebook.practice.log import (
    AttemptValue,
    LoggedBlock,
    LoggedLearner,
    LoggedParticipation,
    LoggedSession,
    PracticeLog,
)
from cuebook.practice.scales import AttemptScale

METRIC, TASK, RECIPE = "sparc", "reaching", "one"
START = datetime(2025, 3, 3, 10, 0, tzinfo=UTC)
SCALE = AttemptScale(METRIC, better="higher")
_PHASES = {"b": "baseline", "o": "immediate_post", "r": "retention", "x": "transfer"}


def attempt(value: float | None, recipe: str = RECIPE, **facts: bool) -> AttemptValue:
    """Return one attempt."""
    return AttemptValue(value, recipe, reason=None if value is not None else "no value", **facts)


def block(
    name: str,
    sign: str,
    number: int,
    *,
    learners: Sequence[str] = ("ann",),
    values: Mapping[str, Sequence[float]] | Sequence[float] | None = None,
    stopped: Sequence[str] = (),
    **facts: object,
) -> LoggedBlock:
    """Return a block: b, o, r, x are measures, p is practice alone, a capital letter a cue."""
    phase = _PHASES.get(sign, "acquisition")
    cue = sign if sign.isupper() else None
    parts = []
    for learner in learners:
        own = values.get(learner, ()) if isinstance(values, Mapping) else values or ()
        parts.append(
            LoggedParticipation(
                learner,
                values={METRIC: tuple(attempt(value) for value in own)} if own else {},
                stop_reason="pain" if learner in stopped else None,
            )
        )
    given: dict[str, object] = {"task": TASK, "cue": cue, "kind": "analogy" if cue else None}
    given.update(facts)
    return LoggedBlock(
        block=name,
        number=number,
        phase=phase,
        participations=tuple(parts),
        **given,  # type: ignore[arg-type]
    )


def visit(
    signs: str,
    day: float = 0,
    *,
    name: str | None = None,
    learners: Sequence[str] = ("ann",),
    values: Mapping[int, Sequence[float]] | None = None,
    blank: Sequence[int] = (),
    stopped: Sequence[int] = (),
    **facts: object,
) -> LoggedSession:
    """Return a session of blocks in short; each measure reads its place (from 1) plus 10 a day."""
    session = name or f"day-{day:g}"
    blocks = []
    for number, sign in enumerate(signs.split(), start=1):
        is_measure = sign in _PHASES
        default = [number + 10 * day] if is_measure and number not in blank else []
        own = list((values or {}).get(number, default))
        blocks.append(
            block(
                f"{session}/{number}",
                sign,
                number,
                learners=learners,
                values=own,
                stopped=learners if number in stopped else (),
            )
        )
    return LoggedSession(session, START + timedelta(days=day), tuple(blocks), **facts)  # type: ignore[arg-type]


def make_log(*sessions: LoggedSession, without_consent: Sequence[str] = ()) -> PracticeLog:
    """Return a log whose learners all agreed to be ranked, but for those named."""
    codes = {
        part.learner
        for session in sessions
        for one in session.blocks
        for part in one.participations
    }
    learners = {code: LoggedLearner(code, code not in without_consent) for code in codes}
    return PracticeLog(learners, sessions)


def derive(*sessions: LoggedSession, **given: object) -> Derived:
    """Return what is derived from sessions."""
    return derive_log(make_log(*sessions), **given)


def derive_log(log: PracticeLog, **given: object) -> Derived:
    """Return what is derived from a log."""
    return derive_changes(log, METRIC, SCALE, **given)  # type: ignore[arg-type]


def list_changes(derived: Derived, contrast: str) -> dict[str | None, float]:
    """Return the change of each cue in one contrast; None is practice alone."""
    return {
        change.use.cue: change.difference
        for change in derived.changes
        if change.contrast == contrast
    }


def find_reason(derived: Derived, cue: str | None, contrast: str) -> str:
    """Return why a cue has no change in a contrast."""
    (found,) = {
        one.reason for one in derived.without if one.use.cue == cue and one.contrast == contrast
    }
    return found


def find_change(derived: Derived, cue: str | None, contrast: str) -> Change:
    """Return the one change of a cue in a contrast."""
    (found,) = [
        change
        for change in derived.changes
        if change.contrast == contrast and (change.use.cue == cue or cue in dict(change.weights))
    ]
    return found


def count_answers(derived: Derived) -> dict[tuple[str, str], tuple[int, int]]:
    """Return for each use and contrast how many changes and how many reasons it has."""
    counts = {(use.use, contrast): [0, 0] for use in derived.uses for contrast in CONTRASTS}
    answers: list[Change | NoChange] = [*derived.changes, *derived.without]
    for answer in answers:
        counts[answer.use.use, answer.contrast][isinstance(answer, NoChange)] += 1
    return {key: (changes, reasons) for key, (changes, reasons) in counts.items()}
