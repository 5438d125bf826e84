"""A review in plain lines: what can be read aloud, signs and words before numbers."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from shutil import get_terminal_size
from textwrap import wrap
from typing import Any

from cuebook.vocabulary import load_vocabulary

WORDS_WIDTH = 26
TABLE_WIDTH = 140
"""Terminals at least this wide get one row a cue."""


def describe_review(document: Mapping[str, Any]) -> list[str]:
    """Return the lines a person reads: what can be said, the ranking, what is withheld."""
    width = get_terminal_size().columns
    lines = [_describe_question(document), *_describe_opening(document), ""]
    lines += [_describe_practice_alone(document), _describe_worthwhile(document), ""]
    if document["cues"]:
        table = list(_describe_table(document["cues"]))
        is_wide = width >= max(TABLE_WIDTH, *map(len, table))
        lines += table if is_wide else _describe_blocks(document["cues"])
        lines += ["", _describe_scale(document), *_describe_marks(document["cues"])]
    lines += describe_rest(document)
    return [part for line in lines for part in _fit(line, width)]


def _fit(line: str, width: int) -> list[str]:
    """Return a line as lines that fit; what goes on is indented further."""
    if len(line) <= width:
        return [line]
    indent = line[: len(line) - len(line.lstrip())]
    return wrap(line.strip(), width, initial_indent=indent, subsequent_indent=f"{indent}    ")


def format_number(value: float | None, *, signed: bool = True) -> str:
    """Return a number in three significant digits with a true minus sign; a dash for none."""
    if value is None:
        return "–"
    text = f"{value:+.3g}" if signed else f"{value:.3g}"
    if "e" in text:
        text = f"{value:+.4f}" if signed else f"{value:.4f}"
    return text.replace("-", "−")


def _describe_question(document: Mapping[str, Any]) -> str:
    what = document.get("metric_name") or document["metric"] or "the table's measure"
    parts = [what, document.get("task_label"), document.get("contrast_words")]
    return "What shifted: " + ", ".join(str(part) for part in parts if part)


def _describe_opening(document: Mapping[str, Any]) -> list[str]:
    return [str(line) for line in document.get("opening") or ()]


def _describe_practice_alone(document: Mapping[str, Any]) -> str:
    alone = document.get("practice_alone")
    if not alone:
        return "Practice alone: not known well enough to be the line to beat; cue against cue."
    unit = f" {document['display_unit']}" if document.get("display_unit") else ""
    return f"Practice alone: {format_effect(alone)} (95 %: {format_interval(alone)}){unit}."


def _describe_worthwhile(document: Mapping[str, Any]) -> str:
    worthwhile = document.get("worthwhile")
    if worthwhile is None:
        return "Worthwhile difference: not known yet."
    note = document.get("worthwhile_note") or ""
    because = f" ({note})" if note else ""
    # On a log scale the difference itself means nothing to a reader; its per cent do.
    shown = document.get("worthwhile_display")
    value = worthwhile if shown is None else abs(shown)
    unit = document.get("unit") if shown is None else document.get("display_unit")
    return f"Worthwhile: {format_number(value, signed=False)}{f' {unit}' if unit else ''}{because}."


def _describe_scale(document: Mapping[str, Any]) -> str:
    line = "the change with practice alone"
    if document.get("reference") != "practice_alone":
        line = "the mean of the cues"
    unit = document.get("display_unit") or ""
    better = {"higher": "more is better", "lower": "less is better"}.get(
        str(document.get("better")), "plus is nearer to the target"
    )
    return f"Numbers: difference from {line}{f', in {unit}' if unit else ''}; {better}."


def _describe_table(cues: Sequence[Mapping[str, Any]]) -> Iterator[str]:
    """Yield one row a cue; the columns are as wide as their contents."""
    rows = [_TABLE_HEAD, *(_list_cells(cue) for cue in cues)]
    widths = [max(len(row[at]) for row in rows) for at in range(len(_TABLE_HEAD))]
    for row in rows:
        cells = [
            cell.rjust(width) if at in _NUMBERS else cell.ljust(width)
            for at, (cell, width) in enumerate(zip(row, widths, strict=True))
        ]
        yield "  ".join(cells).rstrip()


_TABLE_HEAD = (
    "",
    "cue",
    "first words",
    "effect",
    "95 %",
    "chance",
    "said to",
    "basis",
    "verdict",
)
_NUMBERS = frozenset({3, 5})


def _list_cells(cue: Mapping[str, Any]) -> tuple[str, ...]:
    words = str(cue.get("first_words") or "")
    if len(words) > WORDS_WIDTH:
        words = words[: WORDS_WIDTH - 1].rstrip() + "…"
    return (
        str(cue.get("sign") or "?"),
        str(cue["cue"]),
        words,
        format_effect(cue),
        format_interval(cue),
        format_chance(cue["p_better"]),
        f"{cue['uses']}/{cue['learners']}",
        str(cue.get("grade_words") or ""),
        str(cue.get("words") or cue["verdict"]),
    )


def get_shown(line: Mapping[str, Any], name: str) -> float | None:
    """Return a number in the unit a reader knows: per cent for a log metric, else its own."""
    shown: float | None = line.get(f"{name}_display")
    if shown is None:
        shown = line.get(name)
    return shown


def format_effect(line: Mapping[str, Any]) -> str:
    """Return an effect in the unit a reader knows."""
    return format_number(get_shown(line, "effect"))


def format_interval(line: Mapping[str, Any]) -> str:
    """Return the 95 % interval in the unit a reader knows, the smaller end first."""
    ends = [end for end in (get_shown(line, "low95"), get_shown(line, "high95")) if end is not None]
    if len(ends) < 2:
        return "–"
    return f"{format_number(min(ends))} to {format_number(max(ends))}"


def format_chance(chance: float | None) -> str:
    """Return a probability in per cent; never 0 or 100, which nobody can know."""
    if chance is None:
        return "–"
    if chance > 0.995:
        return ">99 %"
    return "<1 %" if chance < 0.005 else f"{100 * chance:.0f} %"


def _describe_blocks(cues: Sequence[Mapping[str, Any]]) -> Iterator[str]:
    """Yield each cue on lines that fit a narrow terminal."""
    for cue in cues:
        yield f"{cue.get('sign') or '?':<4}{cue['cue']}: {cue.get('words') or cue['verdict']}"
        if cue.get("first_words"):
            yield f"      {cue['first_words']}"
        people = "learner" if cue["learners"] == 1 else "learners"
        yield (
            f"      {format_effect(cue)} ({format_interval(cue)}), "
            f"chance {format_chance(cue['p_better'])}"
        )
        yield (
            f"      said {cue['uses']} times to {cue['learners']} {people}, "
            f"{cue.get('grade_words') or 'not known who chose'}"
        )


_NO_HARM = frozenset({"planned_end", "equipment", "tired"})
_MARKS = {
    "one_learner_only": "one learner only",
    "rank_not_known": "rank not known",
    "no_clear_best": "no clear best",
    "in_tie_band": "may be as good as the first",
}


def _describe_marks(cues: Sequence[Mapping[str, Any]]) -> Iterator[str]:
    tied = [cue["cue"] for cue in cues if "in_tie_band" in (cue.get("marks") or ())]
    for cue in cues:
        marks = [
            _MARKS.get(str(mark), str(mark))
            for mark in cue.get("marks") or ()
            if mark != "in_tie_band" or len(tied) > 1
        ]
        marks += _describe_harms(cue.get("harm_details") or {})
        missing = ", ".join(str(what) for what in cue.get("missing") or ())
        marks += [f"missing: {missing}"] if missing else []
        if marks:
            yield f"  {cue['cue']}: " + "; ".join(marks)


def _describe_harms(details: Mapping[str, Any]) -> list[str]:
    """Return stops and events beside the number of uses they happened in."""
    vocabulary = load_vocabulary()
    counted = [
        f"{said}{vocabulary.label(list_name, slug).lower()} {count}"
        for list_name, name, said in (
            ("reason_for_stopping", "stops", "stopped for "),
            ("event", "events", ""),
        )
        for slug, count in (details.get(name) or {}).items()
        if vocabulary.has(list_name, slug) and slug not in _NO_HARM
    ]
    return [f"in {details['uses']} uses: {', '.join(counted)}"] if counted else []


def describe_recorded(recorded: Sequence[Mapping[str, Any]]) -> Iterator[str]:
    """Yield uses that cannot be ranked yet, with values, change and reason."""
    if not recorded:
        return
    yield ""
    yield "Recorded, cannot rank yet:"
    for entry in recorded:
        who = f"{entry['cue'] or 'practice alone'}, {entry['learner']}"
        if entry.get("change") is None:
            yield f"  {who}: {entry['reason']}"
            continue
        before = " ".join(format_number(value, signed=False) for value in entry["before"])
        after = " ".join(format_number(value, signed=False) for value in entry["after"])
        unit = f" {entry['unit']}" if entry.get("unit") else ""
        yield (
            f"  {who}: {before} before, {after} after, "
            f"change {format_number(entry['change'])}{unit}; {entry['reason']}"
        )


def describe_rest(document: Mapping[str, Any]) -> Iterator[str]:
    """Yield what is recorded and not ranked, what is withheld, and the notes."""
    yield from describe_recorded(document.get("recorded") or ())
    refused = [str(line) for line in document.get("withheld") or ()]
    if refused:
        yield ""
        yield "Withheld:"
        yield from (f"  {line}" for line in refused)
    notes = [str(note) for note in document.get("notes") or ()]
    if notes:
        yield ""
        yield from (f"Note: {note}" for note in notes)
