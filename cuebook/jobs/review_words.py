"""A review in plain lines: what can be read aloud, signs and words before numbers."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

WORDS_WIDTH = 26


def describe_review(document: Mapping[str, Any]) -> list[str]:
    """Return the lines a person reads: what can be said, the ranking, what is withheld."""
    lines = [_describe_question(document), *_describe_opening(document), ""]
    lines += [_describe_practice_alone(document), _describe_worthwhile(document), ""]
    if document["cues"]:
        lines += [_TABLE_HEAD, *(_describe_cue(cue, document) for cue in document["cues"])]
        lines += ["", "Effect and 95 %: difference from the line to beat; plus is better."]
        lines += list(_describe_marks(document["cues"]))
    lines += list(_describe_recorded(document.get("recorded") or ()))
    lines += list(_describe_rest(document))
    return lines


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
    return (
        f"Practice alone: {format_number(alone['effect'])} "
        f"(95 %: {format_number(alone['low95'])} to {format_number(alone['high95'])})."
    )


def _describe_worthwhile(document: Mapping[str, Any]) -> str:
    worthwhile = document.get("worthwhile")
    if worthwhile is None:
        return "Worthwhile difference: not known yet."
    note = document.get("worthwhile_note") or ""
    unit = f" {document['unit']}" if document.get("unit") else ""
    return f"Worthwhile: {format_number(worthwhile, signed=False)}{unit} {note}".rstrip() + "."


_TABLE_HEAD = (
    f"{'':<4}{'cue':<24}{'first words':<{WORDS_WIDTH + 1}}{'effect':>8}  "
    f"{'95 %':<18}{'chance':>6}  {'uses/learners':<14}{'chosen by':<14}verdict"
)


def _describe_cue(cue: Mapping[str, Any], document: Mapping[str, Any]) -> str:
    del document
    words = str(cue.get("first_words") or "")
    if len(words) > WORDS_WIDTH:
        words = words[: WORDS_WIDTH - 1].rstrip() + "…"
    interval = f"{format_number(cue['low95'])} to {format_number(cue['high95'])}"
    chance = "–" if cue["p_better"] is None else f"{cue['p_better']:.0%}".replace("%", " %")
    counts = f"{cue['uses']}/{cue['learners']}"
    return (
        f"{cue.get('sign') or '?':<4}{cue['cue']:<24}{words:<{WORDS_WIDTH + 1}}"
        f"{format_number(cue['effect']):>8}  {interval:<18}{chance:>6}  {counts:<14}"
        f"{cue.get('grade_words') or '':<14}{cue.get('words') or cue['verdict']}"
    )


def _describe_marks(cues: Sequence[Mapping[str, Any]]) -> Iterator[str]:
    for cue in cues:
        marks = [str(mark) for mark in cue.get("marks") or ()]
        if marks:
            yield f"  {cue['cue']}: " + "; ".join(marks)


def _describe_recorded(recorded: Sequence[Mapping[str, Any]]) -> Iterator[str]:
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


def _describe_rest(document: Mapping[str, Any]) -> Iterator[str]:
    refused = [str(line) for line in document.get("withheld") or ()]
    if refused:
        yield ""
        yield "Withheld:"
        yield from (f"  {line}" for line in refused)
    notes = [str(note) for note in document.get("notes") or ()]
    if notes:
        yield ""
        yield from (f"Note: {note}" for note in notes)
