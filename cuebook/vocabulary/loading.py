"""Reads the vocabulary that travels with the program."""

from __future__ import annotations

import csv
import io
from functools import cache
from importlib import resources

from cuebook.errors import Place
from cuebook.vocabulary.entries import TASK_LIST, Entry, Task, Vocabulary, describe_unknown


def _read_rows(name: str) -> list[dict[str, str]]:
    text = resources.files("cuebook.vocabulary").joinpath("data", name).read_text(encoding="utf-8")
    return list(csv.DictReader(io.StringIO(text, newline="")))


def _split(cell: str) -> tuple[str, ...]:
    return tuple(part.strip() for part in cell.split(";") if part.strip())


def _to_number(cell: str) -> float | None:
    return float(cell) if cell else None


def _make_entry(row: dict[str, str]) -> Entry:
    return Entry(
        list_name=row["list"],
        slug=row["slug"],
        label=row["label"],
        definition=row["definition"],
        related=_split(row["related"]),
        region=_split(row["region"]),
        cycle=row["cycle"] or None,
        low=_to_number(row["low"]),
        high=_to_number(row["high"]),
        unit=row["unit"],
        notes=row["notes"],
    )


def _make_task(row: dict[str, str]) -> Task:
    return Task(
        slug=row["task"],
        label=row["label"],
        discipline=row["discipline"],
        family=row["family"],
        usual_cycle=row["usual_cycle"] or None,
        icf=row["icf"],
        caution_first=row["caution_first"],
    )


@cache
def load_vocabulary() -> Vocabulary:
    """Return the vocabulary; read once a process."""
    by_list: dict[str, dict[str, Entry]] = {}
    for row in _read_rows("vocabulary.csv"):
        entry = _make_entry(row)
        by_list.setdefault(entry.list_name, {})[entry.slug] = entry
    tasks = (_make_task(row) for row in _read_rows("tasks.csv"))
    return Vocabulary(by_list, {task.slug: task for task in tasks})


def require_slug(list_name: str, slug: str, place: Place | None = None) -> str:
    """Return the slug if the list (or "task") holds it; else raise, naming the nearest."""
    vocabulary = load_vocabulary()
    known = vocabulary.by_task if list_name == TASK_LIST else vocabulary.by_list[list_name]
    if slug not in known:
        raise describe_unknown(slug, list_name.replace("_", " "), known, place)
    return slug
