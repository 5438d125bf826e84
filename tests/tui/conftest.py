from __future__ import annotations

from pathlib import Path

import pytest

from cuebook.jobs.people import NewLearner, add_group, add_learner, set_consent

MEMBERS = tuple(f"learner-{number}" for number in range(1, 13))


@pytest.fixture
def library(tmp_path: Path) -> Path:
    """Make a library with one learner who agreed to be ranked."""
    folder = tmp_path / "library"
    add_learner(folder, NewLearner(code="heron-lamp", age_years=78))
    set_consent(folder, "heron-lamp", "use_for_ranking", "yes")
    return folder


@pytest.fixture
def class_library(tmp_path: Path) -> Path:
    """Make a library with a group of twelve who agreed to be ranked."""
    folder = tmp_path / "library"
    for code in MEMBERS:
        add_learner(folder, NewLearner(code=code, age_years=70))
        set_consent(folder, code, "use_for_ranking", "yes")
    add_group(folder, "monday", MEMBERS)
    return folder
