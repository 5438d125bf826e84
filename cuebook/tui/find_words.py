"""What Find shows, as text: cautions first, then the words, then what stands behind them."""

from __future__ import annotations

from textual.content import Content

from cuebook.jobs.find_cue import FoundCues
from cuebook.library.lookup import Hit
from cuebook.library.understand import Scored
from cuebook.vocabulary import load_vocabulary

MOST_NAMED = 4


def describe_understood(found: FoundCues) -> Content:
    """Return the cautions of the task and what was recognised: features, regions, tasks."""
    understood = found.understanding
    named = []
    for title, list_name, scored in (
        ("", "feature", understood.features),
        ("body", "region", understood.regions),
        ("task", "task", understood.tasks),
    ):
        words = _name_scored(list_name, scored)
        if words:
            named.append(f"{title}: {words}" if title else words)
    if understood.side:
        named.append(f"side: {understood.side}")
    parts: list[tuple[str, str]] = [(f"! {line}\n", "bold $warning") for line in found.cautions]
    parts.append((f"Understood: {'; '.join(named) or 'nothing yet'}", ""))
    return Content.assemble(*parts)


def _name_scored(list_name: str, scored: tuple[Scored, ...]) -> str:
    label = load_vocabulary().label
    return ", ".join(label(list_name, one.slug).lower() for one in scored[:MOST_NAMED])


def name_kind(hit: Hit) -> str:
    """Return what kind of cue it is: an image, or the words of its kind."""
    if hit.cue.is_image:
        return "image"
    return load_vocabulary().screen_word(hit.cue.kind).lower()


def describe_row(hit: Hit) -> Content:
    """Return a list row: the caution first, then the words and what kind they are."""
    parts: list[tuple[str, str]] = [(f"! {caution}\n", "$warning") for caution in hit.cautions[:1]]
    return Content.assemble(*parts, (hit.text, "bold"), f"  ({name_kind(hit)})")


def describe_detail(hit: Hit) -> Content:
    """Return everything about one cue; its words stand on a line of their own."""
    cue = hit.cue
    label = load_vocabulary()
    parts: list[str | tuple[str, str]] = [
        (f"! {caution}\n", "bold $warning") for caution in hit.cautions
    ]
    parts.append((f"\n  {hit.text}\n\n", "bold $primary"))
    parts.append(f"Kind: {name_kind(hit)}; {label.screen_word(cue.focus)}\n")
    parts.append(f"Carries: {cue.captures or 'not noted'}\n")
    parts.append(f"Leaves out: {cue.leaves_out or 'not noted'}\n")
    if hit.effect is not None:
        parts.append(f"So far: {hit.effect.uses} uses\n")
    parts.append(f"Why this one: {'; '.join(hit.why) or 'its words are near to yours'}")
    return Content.assemble(*parts)
