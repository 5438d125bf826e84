"""The sets of cues that travel with the program, for demonstration and for a library not yet begun.

The settings they name are invented.
"""

from __future__ import annotations

from functools import cache
from importlib import resources
from importlib.resources.abc import Traversable
from pathlib import Path

from cuebook.errors import InputError
from cuebook.library.cue_reader import parse_cue_set
from cuebook.library.cues import Cue, CueSet

_FOLDER = "seed_cues"


def find_seed_folder() -> Traversable:
    """Return the folder of the seed sets: inside the wheel, else beside the package's source."""
    package = resources.files("cuebook")
    inside = package.joinpath(_FOLDER)
    if inside.is_dir():
        return inside
    beside = Path(str(package)).parent / _FOLDER
    if beside.is_dir():
        return beside
    raise InputError("The seed sets of cues are missing from this installation.", "Install again.")


@cache
def load_seed_sets() -> tuple[CueSet, ...]:
    """Return the seed sets, in order of their file names; read once a process."""
    files = sorted(
        (file for file in find_seed_folder().iterdir() if file.name.endswith(".toml")),
        key=lambda file: file.name,
    )
    return tuple(parse_cue_set(file.read_text(encoding="utf-8"), file.name) for file in files)


@cache
def load_seed_cues() -> tuple[Cue, ...]:
    """Return the cues of all seed sets, in order."""
    return tuple(cue for cue_set in load_seed_sets() for cue in cue_set.cues)
