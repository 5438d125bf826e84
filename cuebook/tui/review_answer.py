"""A review as the screen shows it: plain sentences, the line to beat, cues, harms, the rest."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from textual.content import Content

from cuebook.errors import CuebookError
from cuebook.jobs.review_words import (
    describe_rest,
    format_chance,
    format_effect,
    format_interval,
    format_number,
)
from cuebook.metrics.registry import load_registry
from cuebook.tui.bars import BarScale, draw_axis, draw_bar, make_scale
from cuebook.vocabulary import load_vocabulary

INDENT = "    "
WIDEST_BAR, NARROWEST_BAR = 60, 34
ROOM_FOR_NUMBERS = 52
"""Cells that the numbers of a cue need beside its bar."""
LIKELY = 0.8
"""From this chance on a measure that got worse is named, traded or not."""
Part = str | tuple[str, str]
_MARKS: Mapping[str, str] = {
    "one_learner_only": "one learner only",
    "rank_not_known": "rank not known",
    "no_clear_best": "no clear best",
    "in_tie_band": "may be as good as the first",
}


def describe_answer(document: Mapping[str, Any], width: int) -> Content:
    """Return a review as text for a screen of some width."""
    parts: list[Part] = [(f"{line}\n", "bold") for line in document.get("opening") or ()]
    cues = document["cues"]
    if cues:
        is_wide = width >= WIDEST_BAR + ROOM_FOR_NUMBERS
        room = width - len(INDENT) - (ROOM_FOR_NUMBERS if is_wide else 0)
        scale = make_scale(cues, max(min(room, WIDEST_BAR), NARROWEST_BAR))
        parts += [f"{line}\n" for line in _describe_line_to_beat(document, scale)]
        n_tied = sum("in_tie_band" in (cue.get("marks") or ()) for cue in cues)
        for cue in cues:
            parts += _describe_cue(cue, scale, document.get("worthwhile"), is_wide, n_tied)
        parts += [f"{line}\n" for line in _describe_legend(document)]
    parts += [f"{line}\n" for line in describe_rest(document)]
    return Content.assemble(*parts)


def _describe_line_to_beat(document: Mapping[str, Any], scale: BarScale) -> Iterator[str]:
    alone, unit = document.get("practice_alone"), _name_unit(document)
    if alone:
        yield (
            f"Practice alone: {format_effect(alone)}{unit} (95 %: {format_interval(alone)}). "
            "Below: the difference from it; to the right is better."
        )
        zero = "practice alone"
    else:
        yield "Practice alone is not known well enough. Below: the difference from the cues' mean."
        zero = "mean of the cues"
    yield INDENT + draw_axis(scale, "worse", zero, "better")


def _describe_legend(document: Mapping[str, Any]) -> Iterator[str]:
    yield "Thick line: 80 %. Thin line: 95 %."
    worthwhile = document.get("worthwhile")
    if worthwhile is not None:
        shown = document.get("worthwhile_display")
        least = format_number(abs(worthwhile if shown is None else shown), signed=False)
        least += _name_unit(document)
        yield f"Dots: less than {least} ({document.get('worthwhile_note') or 'as you set it'})."


def _name_unit(document: Mapping[str, Any]) -> str:
    unit = document.get("display_unit", document.get("unit"))
    return f" {unit}" if unit else ""


def _describe_cue(
    cue: Mapping[str, Any],
    scale: BarScale,
    worthwhile: float | None,
    is_wide: bool,  # noqa: FBT001
    n_tied: int,
) -> list[Part]:
    sign, words = cue.get("sign") or "?", cue.get("words") or cue["verdict"]
    parts: list[Part] = [(f"{sign:<4}{cue['cue']}: {words}\n", _get_style(str(sign)))]
    if cue.get("caution"):
        parts.append(f"{INDENT}! {cue['caution']}\n")
    if cue.get("first_words"):
        parts.append(f"{INDENT}{cue['first_words']}\n")
    bar = INDENT + draw_bar(cue, scale, worthwhile)
    numbers = (
        f"{format_effect(cue)} (95 %: {format_interval(cue)}), "
        f"chance {format_chance(cue['p_better'])}"
    )
    parts.append(f"{bar}  {numbers}\n" if is_wide else f"{bar}\n{INDENT}{numbers}\n")
    people = "learner" if cue["learners"] == 1 else "learners"
    parts.append(
        f"{INDENT}{cue['uses']} uses, {cue['learners']} {people}; "
        f"basis: {cue.get('grade_words') or 'not known'}\n"
    )
    parts.append(f"{INDENT}Harm: {describe_harm(cue)}\n")
    lost = describe_lost(cue)
    if lost:
        parts.append(f"{INDENT}Keep an eye on: {lost}\n")
    marks = describe_marks(cue, n_tied)
    if marks:
        parts.append(f"{INDENT}Mind: {marks}\n")
    return parts


def _get_style(sign: str) -> str:
    """Return the colour that stands beside a sign; the sign says it all without it."""
    if sign.startswith("+") and "-" not in sign:
        return "bold $primary"
    return "bold $accent" if sign[:1] in {"-", "−", "!", "+"} else "bold"


def describe_harm(cue: Mapping[str, Any]) -> str:
    """Return stops, events and refusals among all uses of a cue, measured or not."""
    details = cue.get("harm_details") or {}
    label = load_vocabulary().label
    parts = [
        f"stopped {n} ({label('reason_for_stopping', reason).lower()})"
        for reason, n in (details.get("stops") or {}).items()
        if n and reason != "planned_end"
    ]
    parts += [
        f"{_name_event(event)} {n}" for event, n in (details.get("events") or {}).items() if n
    ]
    if details.get("declined"):
        parts.append(f"declined {details['declined']}")
    uses = details.get("uses", cue["uses"])
    return f"{', '.join(parts) or 'none noted'} in {uses} uses"


def _name_event(event: str) -> str:
    vocabulary = load_vocabulary()
    if vocabulary.has("event", event):
        return vocabulary.label("event", event).lower()
    return event.replace("_", " ")


def describe_lost(cue: Mapping[str, Any]) -> str:
    """Return the measures kept an eye on that got worse, or may have."""
    return ", ".join(
        f"{_name_metric(one['metric'])} (chance worse {format_chance(one['p_worse'])})"
        for one in cue.get("watch") or ()
        if one["trade_off"] or (one["p_worse"] or 0) >= LIKELY
    )


def _name_metric(metric: str) -> str:
    try:
        return load_registry().get(metric).name.lower()
    except CuebookError:
        return metric


def describe_marks(cue: Mapping[str, Any], n_tied: int) -> str:
    """Return what limits what can be said of a cue."""
    marks = [
        _MARKS.get(str(mark), str(mark).replace("_", " "))
        for mark in cue.get("marks") or ()
        if mark != "in_tie_band" or n_tied > 1
    ]
    missing = ", ".join(str(what) for what in cue.get("missing") or ())
    return "; ".join([*marks, *([f"missing: {missing}"] if missing else [])])
