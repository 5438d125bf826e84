"""Writes a set of cues as TOML: one way only, so that the same set is always the same bytes."""

from __future__ import annotations

import os
from collections.abc import Iterable
from pathlib import Path

from cuebook.library.cue_reader import FORMAT, parse_cue_set
from cuebook.library.cues import IMPROVES, MAY_WORSEN, READY, SILENT, Cue, CueSet, Wording

_LINE_LENGTH = 100
_ESCAPES = {
    '"': '\\"',
    "\\": "\\\\",
    "\b": "\\b",
    "\t": "\\t",
    "\n": "\\n",
    "\f": "\\f",
    "\r": "\\r",
}


def format_cue_set(cue_set: CueSet) -> str:
    """Return a set of cues as TOML text; the same set always gives the same text.

    Raises
    ------
    InputError : the set breaks a rule that the reader holds (an unknown slug, a code used twice).
    """
    lines = [f'format = "{FORMAT}"', "", "[set]"]
    lines += _format_fields(
        ("code", cue_set.code),
        ("title", cue_set.title),
        ("about", cue_set.about),
        ("language", cue_set.language),
    )
    for cue in cue_set.cues:
        lines += ["", *_format_cue(cue)]
    text = "\n".join(lines) + "\n"
    parse_cue_set(text, f"set {cue_set.code}")  # what cannot be read back is not written
    return text


def write_cue_set(cue_set: CueSet, path: Path) -> None:
    """Write a set of cues to a file; the old file stays whole until the new one is."""
    text = format_cue_set(cue_set)
    beside = path.with_name(f".{path.name}.part")
    with beside.open("w", encoding="utf-8", newline="\n") as file:
        file.write(text)
        file.flush()
        os.fsync(file.fileno())
    beside.replace(path)


def _format_cue(cue: Cue) -> list[str]:
    lines = ["[[cue]]"]
    lines += _format_fields(
        ("code", cue.code),
        ("kind", cue.kind),
        ("focus", cue.focus),
        ("pair", cue.pair),
        ("sister_of", cue.sister_of),
        ("status", None if cue.status == READY else cue.status),
        ("problem", cue.problem),
        ("phrases", cue.phrases),
        ("tasks", cue.tasks),
        ("regions", cue.regions),
        ("cycle", cue.cycle),
        ("rate", _list_rates(cue)),
        ("captures", cue.captures),
        ("leaves_out", cue.leaves_out),
        ("caution", cue.caution),
        ("target_metric", cue.target_metric),
        ("watch_metric", cue.watch_metric),
    )
    lines += _format_table(
        "[cue.fit]",
        ("age_low", cue.age_low),
        ("age_high", cue.age_high),
        ("experience", cue.experience),
        ("background_good", cue.background_good),
        ("background_avoid", cue.background_avoid),
        ("access_avoid", cue.access_avoid),
        ("note_avoid", cue.note_avoid),
    )
    lines += _format_table(
        "[cue.claims]",
        *(
            (says, tuple(claim.feature for claim in cue.claims if claim.says == says))
            for says in (IMPROVES, SILENT, MAY_WORSEN)
        ),
    )
    for wording in cue.wordings:
        lines += _format_wording(wording)
    return lines


def _format_wording(wording: Wording) -> list[str]:
    return _format_table(
        "[[cue.wording]]",
        ("text", wording.text),
        ("language", wording.language),
        ("revision", wording.revision),
        ("replaces", wording.replaces),
    )


def _list_rates(cue: Cue) -> tuple[float, ...]:
    if cue.rate_low is None or cue.rate_high is None:
        return ()
    return (cue.rate_low, cue.rate_high)


_Value = str | int | float | tuple[str, ...] | tuple[float, ...] | None


def _format_table(heading: str, *fields: tuple[str, _Value]) -> list[str]:
    lines = _format_fields(*fields)
    return ["", heading, *lines] if lines else []


def _format_fields(*fields: tuple[str, _Value]) -> list[str]:
    """Return one line for each field that holds something."""
    lines: list[str] = []
    for key, value in fields:
        if value in (None, "", ()):
            continue
        if isinstance(value, tuple):
            lines += _format_list(key, [_format_value(item) for item in value])
        else:
            lines.append(f"{key} = {_format_value(value)}")
    return lines


def _format_list(key: str, items: Iterable[str]) -> list[str]:
    """Return a list on one line, or one item a line if it would be long."""
    items = list(items)
    short = f"{key} = [{', '.join(items)}]"
    if len(short) <= _LINE_LENGTH:
        return [short]
    return [f"{key} = [", *(f"  {item}," for item in items), "]"]


def _format_value(value: str | float) -> str:
    if isinstance(value, str):
        return f'"{"".join(_escape(letter) for letter in value)}"'
    if isinstance(value, float) and value.is_integer():
        return str(int(value))
    return repr(value)


def _escape(letter: str) -> str:
    if letter in _ESCAPES:
        return _ESCAPES[letter]
    if letter < " " or letter == "\x7f":
        return f"\\u{ord(letter):04x}"
    return letter
