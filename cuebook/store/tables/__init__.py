"""All tables; importing this package fills the metadata."""

from sqlmodel import SQLModel

from cuebook.store.tables import cues, people, practice, recordings, upkeep

metadata = SQLModel.metadata

__all__ = ["cues", "metadata", "people", "practice", "recordings", "upkeep"]
