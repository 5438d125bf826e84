"""Share sets of cues as files."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from cuebook.errors import InputError
from cuebook.library.cue_reader import read_cue_set
from cuebook.library.cue_writer import write_cue_set
from cuebook.library.cues import CueSet
from cuebook.library.seed_sets import load_seed_sets
from cuebook.store.places import has_library
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.cues import read_cues

Location = str | Path | None


@dataclass(frozen=True, slots=True)
class KeptCues:
    """What importing a set of cues did."""

    added: int
    reworded: int
    unchanged: int


def import_cue_set(location: Location, path: Path) -> KeptCues:
    """Read a set of cues wholly, then store it.

    Raises
    ------
    InputError : missing or damaged; names file, line and field, and nothing is stored.
    """
    cue_set = read_cue_set(path)
    from cuebook.store.opening import open_library  # noqa: PLC0415
    from cuebook.store.stamps import make_stamp  # noqa: PLC0415
    from cuebook.store.writing import cues  # noqa: PLC0415

    with open_library(location) as library, library.transaction() as tx:
        kept = cues.keep_cues(tx, make_stamp(), cue_set.cues, cue_set.code)
    return KeptCues(kept.added, kept.reworded, kept.unchanged)


def export_cue_set(location: Location, path: Path, code: str | None = None) -> int:
    """Write cues into one file; return how many.

    Raises
    ------
    InputError : the file exists already, or there is nothing to write.
    """
    if path.exists():
        raise InputError(f"{path} exists already.", "Name a new file.")
    seed = {cue_set.code: cue_set for cue_set in load_seed_sets()}
    if has_library(location):
        with open_for_reading(location) as connection:
            cues = read_cues(connection)
    else:
        cues = tuple(cue for cue_set in seed.values() for cue in cue_set.cues)
    if code is not None:
        if code not in seed:
            raise InputError(f"There is no set '{code}'.", f"Known: {', '.join(seed)}.")
        codes = {cue.code for cue in seed[code].cues}
        cues = tuple(cue for cue in cues if cue.code in codes)
    if not cues:
        raise InputError("There is no cue to write.", "Import a set first.")
    title = seed[code].title if code else "Cues"
    write_cue_set(CueSet(code or "cues", title, cues), path)
    return len(cues)
