"""What the practice box shows, as text: members, answers given, and the keys that give them."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from cuebook.jobs.log_entries import LearnerNote
from cuebook.tui.answers import EXCEPTION, OBSERVED_KEYS, TURNING_KEYS, PracticeAnswers
from cuebook.vocabulary import load_vocabulary

CELL_WIDTH = 34
"""Cells of one column; two stand beside each other where there is room."""
_PRESENCE: Mapping[str, str] = {
    "present": "there",
    EXCEPTION: "not this cue",
    "absent": "absent",
    "not_observed": "not observed",
}
_TITLES: Mapping[str, str] = {"r": "taken", "e": "event", "x": "stopped because"}
_CHOSEN: Mapping[str, str] = {
    "random": "in random order",
    "planned": "as planned",
    "going_badly": "it was going badly",
    "learner_asked": "the learner asked",
    "unknown": "not known why",
}


def describe_members(answers: PracticeAnswers, width: int) -> tuple[str, int]:
    """Return the members in columns, and in which line the marked one stands."""
    cells = [_describe_member(answers, code) for code in answers.members]
    n_lines = -(-len(cells) // _count_columns(width))
    at = 0 if answers.marked is None else answers.members.index(answers.marked) % n_lines
    return "\n".join(_lay_out(cells, width)), at


def describe_answers(answers: PracticeAnswers, width: int) -> str:
    """Return the answers given and the keys that give them."""
    note, lines = answers.own_note, []
    if answers.members:
        again = "not this cue, absent …" if answers.has_cue else "absent, not observed"
        lines += [
            f"Letter or Up, Down marks; again: {again}",
            f"Answers for: {answers.marked or 'everybody'}",
        ]
    lines += _pack(["Seen:", *_list_observed(note)], width)
    lines += _lay_out(_list_others(answers, note), width)
    if note.event in {"fall", "near_fall"}:
        lines.append("! Hurt? Stopped? Fill in your own incident record, too.")
    return "\n".join(lines)


def _list_observed(note: LearnerNote) -> list[str]:
    label = load_vocabulary().label
    return [
        f"{'>' if slug == note.observed else ' '}{key} {label('observed_change', slug)}"
        for key, slug in OBSERVED_KEYS.items()
    ]


def _list_others(answers: PracticeAnswers, note: LearnerNote) -> list[str]:
    label = load_vocabulary().label
    cells = []
    if answers.has_cue:
        cells.append(f"0-9 times said: {'not counted' if note.said is None else note.said}")
    for key, title in _TITLES.items():
        name, list_name = TURNING_KEYS[key]
        slug = getattr(note, name)
        cells.append(f"{key}   {title}: {label(list_name, slug).lower() if slug else 'not noted'}")
    cells.append(f"o   own words: {note.words or 'none'}")
    others = {"unknown": "not known"}.get(answers.others, answers.others)
    cells.append(f"k   other cues given: {others}")
    cells.append(f"z   chosen: {_CHOSEN[answers.chosen]}")
    return cells


def _describe_member(answers: PracticeAnswers, code: str) -> str:
    sign = ">" if code == answers.marked else " "
    presence = answers.presence.get(code, "present")
    parts = [_PRESENCE[presence]]
    if presence in {"present", EXCEPTION} and code in answers.own:
        own = _name_own(answers.own[code])
        parts = own if own and presence == "present" else [*parts, *own]
    return f"{sign}{answers.find_key(code)} {code}: {', '.join(parts)}"


def _name_own(note: LearnerNote) -> list[str]:
    label = load_vocabulary().label
    parts = [] if note.said is None else [f"said {note.said}"]
    for list_name, slug in (
        ("observed_change", note.observed),
        ("reaction", note.reaction),
        ("event", note.event),
        ("reason_for_stopping", note.stop),
    ):
        if slug:
            parts.append(label(list_name, slug).lower())
    return [*parts, *(["own words"] if note.words else [])]


def _count_columns(width: int) -> int:
    return max(width // CELL_WIDTH, 1)


def _lay_out(cells: Sequence[str], width: int) -> list[str]:
    """Return cells in columns, filled downwards; what does not fit ends in an ellipsis."""
    n_columns = _count_columns(width)
    n_lines = -(-len(cells) // n_columns)
    room = width if n_columns == 1 else CELL_WIDTH - 1
    rows = ([_cut(cells[at], room) for at in range(i, len(cells), n_lines)] for i in range(n_lines))
    return [" ".join(cell.ljust(CELL_WIDTH - 1) for cell in row).rstrip() for row in rows]


def _pack(cells: Sequence[str], width: int) -> list[str]:
    """Return cells one behind the other, in as few lines as they need."""
    lines = [""]
    for cell in cells:
        joined = f"{lines[-1]}  {cell}" if lines[-1] else cell
        if len(joined) > width and lines[-1]:
            lines.append(f"  {cell}")
        else:
            lines[-1] = joined
    return lines


def _cut(text: str, width: int) -> str:
    return text if len(text) <= width else f"{text[: width - 1]}…"
