"""Controlled lists: features, regions, tasks, tempo, ages, backgrounds, and lay words for them."""

from __future__ import annotations

from cuebook.vocabulary.bands import get_age_band, get_tempo_band
from cuebook.vocabulary.entries import Entry, Task, Vocabulary
from cuebook.vocabulary.loading import load_vocabulary, require_slug
from cuebook.vocabulary.nearest import find_nearest

__all__ = [
    "Entry",
    "Task",
    "Vocabulary",
    "find_nearest",
    "get_age_band",
    "get_tempo_band",
    "load_vocabulary",
    "require_slug",
]
