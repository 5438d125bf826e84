"""The demonstration as it is shown: where it lies, what went in, and one ranking."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Any

from cuebook.jobs.demo.build import (
    Imported,
    build_demo,
    get_demo_folder,
    prepare_demo_folder,
)
from cuebook.jobs.review_request import ReviewRequest

GOAL = ReviewRequest(metric="sparc", task="reaching", contrast="immediate")
GOAL_WORDS = "Goal: a smoother reach (spectral arc length; nearer to 0 is smoother)."


@dataclass(frozen=True, slots=True)
class Demonstration:
    """The demonstration library and the ranking of its goal."""

    library: Path
    imported: Imported | None
    """None: it was built by an earlier call."""
    document: dict[str, Any]


def run_demo(folder: Path | None = None, *, fresh: bool = False) -> Demonstration:
    """Build the demonstration unless it is there, and rank cues for its goal."""
    from cuebook.jobs.review import review_library  # noqa: PLC0415

    place = folder or get_demo_folder()
    imported = None if prepare_demo_folder(place, fresh=fresh) else build_demo(place)
    library = place / "library"
    return Demonstration(library, imported, review_library(library, GOAL).document)


def describe_demo(demo: Demonstration) -> list[str]:
    """Return the demonstration as lines; the last says how to open it."""
    from cuebook.jobs.review_words import describe_review  # noqa: PLC0415

    lines = [f"Demonstration library (invented people): {demo.library}"]
    if demo.imported is not None:
        lines.append(
            f"Taken in: {demo.imported.files} recordings and {demo.imported.typed_values} typed "
            f"values of {demo.imported.learners} learners, {demo.imported.uses} uses in "
            f"{demo.imported.sessions} sessions."
        )
    else:
        lines.append("It was built earlier; build it anew with: cuebook demo --fresh")
    lines += [GOAL_WORDS, "", *describe_review(demo.document), ""]
    lines.append(f'Open it: cuebook --library "{demo.library}"')
    return lines
