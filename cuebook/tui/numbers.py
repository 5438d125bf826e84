"""Numbers as they are typed into a measure: one an attempt, in order."""

from __future__ import annotations

import math
import re
from collections.abc import Mapping

from cuebook.errors import CuebookError, UsageError
from cuebook.jobs.log_checks import check_values
from cuebook.metrics.registry import load_registry

EXAMPLE = "41 43 42"


def read_numbers(text: str, metric: str | None) -> Mapping[str, tuple[float, ...]]:
    """Read ``41 43 42`` of a known measure, or ``measure 41 43 42; other 1.2 1.3``.

    Raises
    ------
    CuebookError : no measure, no numbers, or a number that the measure cannot have.
    """
    values: dict[str, tuple[float, ...]] = {}
    for part in text.split(";"):
        if part.strip():
            name, numbers = _read_part(part.strip(), metric)
            values[name] = (*values.get(name, ()), *numbers)
    for name, numbers in values.items():
        check_values(name, numbers)
    return values


def _read_part(part: str, metric: str | None) -> tuple[str, tuple[float, ...]]:
    if re.search(r"\d,\d", part):
        raise UsageError(
            f"'{part}': is the comma a decimal point?",
            "Write a point for it, and part numbers by a space: 1.6 1.7",
        )
    words = part.replace(",", " ").replace("=", " ").split()
    name = metric
    if words and words[0][0].isalpha():
        name = load_registry().get(words.pop(0)).metric
    if name is None:
        raise UsageError("Which measure?", f"F6 picks it, or write: step_length_cm {EXAMPLE}")
    if not words:
        raise UsageError(f"'{part}' has no numbers.", f"Write them behind it, such as {EXAMPLE}.")
    return name, tuple(_read_number(word) for word in words)


def _read_number(word: str) -> float:
    try:
        number = float(word)
    except ValueError:
        number = math.nan
    if not math.isfinite(number):
        raise UsageError(f"'{word}' is not a number.", "Write a decimal point, such as 1.6 1.7.")
    return number


def describe_metric(metric: str | None) -> str:
    """Return the line that says what numbers are typed for."""
    if metric is None:
        return "Measure: none picked yet. F6 picks one."
    try:
        entry = load_registry().get(metric)
    except CuebookError:
        return f"Measure: {metric}. F6 picks another."
    unit = f" in {entry.unit}" if entry.unit else ""
    return f"Measure: {entry.name}{unit} ({entry.metric}). F6 picks another."
