"""The plain sentences a review opens with: what can be said today, what more would tell."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

_SETTLED = frozenset({"helps", "seems_worse", "no_worthwhile_difference"})
_HARMFUL = frozenset({"stop_and_look", "seems_worse", "may_be_worse"})
"""Verdicts after which more of the same is never advised."""


def describe_opening(document: Mapping[str, Any]) -> list[str]:
    """Return what can be said today, and what one more session would tell."""
    cues: Sequence[Mapping[str, Any]] = document["cues"]
    if not cues:
        return ["Nothing can be ranked yet.", _say_what_is_needed(document)]
    return [_say_today(cues), *_say_harm(cues), *_say_next(document)]


def _say_today(cues: Sequence[Mapping[str, Any]]) -> str:
    by_verdict: dict[str, list[str]] = {}
    for cue in cues:
        by_verdict.setdefault(cue["verdict"], []).append(cue["cue"])
    helps = [cue for cue in cues if cue["verdict"] == "helps"]
    promising = by_verdict.get("promising", [])
    if helps:
        # Grade A may speak of help; grade B only of what went together.
        said = "; ".join(f"{cue['cue']}: {cue['words']}" for cue in helps)
        return f"Today: {said}."
    if promising:
        return f"Today: {_join(promising)} {'looks' if len(promising) == 1 else 'look'} promising."
    settled = [name for verdict in _SETTLED for name in by_verdict.get(verdict, [])]
    if settled:
        return "Today: no cue stands out; see the words beside each."
    return "Today: cannot tell yet which cue shifts this measure more than practice alone."


def _say_harm(cues: Sequence[Mapping[str, Any]]) -> list[str]:
    return [
        f"Take care: {cue['cue']}: {cue['words']}." for cue in cues if cue["verdict"] in _HARMFUL
    ]


def _say_next(document: Mapping[str, Any]) -> list[str]:
    cues = document["cues"]
    if document.get("reference") != "practice_alone":
        return ["Next: add blocks without a cue; they are the line that cues are compared with."]
    open_cues = [
        cue for cue in cues if cue.get("more_uses") and cue["verdict"] not in _SETTLED | _HARMFUL
    ]
    if not open_cues:
        return []
    nearest = min(open_cues, key=lambda cue: cue["more_uses"])
    n_more = nearest["more_uses"]
    many = "use" if n_more == 1 else "uses"
    told = f"{n_more} more {many} of {nearest['cue']} with measures before and after"
    return [f"Next: {told} would tell most."]


def _say_what_is_needed(document: Mapping[str, Any]) -> str:
    counts = document.get("counts") or {}
    n_changes = counts.get("changes", 0)
    if n_changes:
        uses = "use has" if n_changes == 1 else "uses have"
        return f"Missing: more uses; {n_changes} {uses} a measure before and after so far."
    return "Missing: uses with a measure before the cue and one after it, cue off."


def _join(names: Sequence[str]) -> str:
    if len(names) < 2:
        return "".join(names)
    return f"{', '.join(names[:-1])} and {names[-1]}"
