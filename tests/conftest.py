"""Fixtures and rules that every test shares."""

from __future__ import annotations

import os
from pathlib import Path

import pytest
from hypothesis import settings

# A shared machine may be slow for a moment: laws are tested, not the clock.
settings.register_profile("laws", deadline=None, print_blob=True)
settings.load_profile("laws")

RECORDINGS_VARIABLE = "CUEBOOK_RECORDINGS"
RECORDINGS_TESTS = Path(__file__).parent / "published" / "recordings"


def pytest_ignore_collect(collection_path: Path) -> bool | None:
    """Leave out the tests on real recordings when no folder of them is named."""
    if collection_path == RECORDINGS_TESTS and not os.environ.get(RECORDINGS_VARIABLE):
        return True
    return None


def pytest_report_header() -> list[str]:
    """Say whether the tests on real recordings take part."""
    folder = os.environ.get(RECORDINGS_VARIABLE)
    if folder:
        return [f"recordings: {folder}"]
    left_out = len(list(RECORDINGS_TESTS.glob("test_*.py")))
    return [f"recordings: {left_out} test files not collected ({RECORDINGS_VARIABLE} is not set)"]


def pytest_collection_finish(session: pytest.Session) -> None:
    """Fail a whole run that was promised recordings but collected no test on them."""
    if not os.environ.get(RECORDINGS_VARIABLE) or session.config.args != ["tests"]:
        return
    if not any(item.get_closest_marker("recordings") for item in session.items):
        pytest.exit(f"{RECORDINGS_VARIABLE} is set, but no recordings test was collected", 4)


@pytest.fixture(scope="session")
def recordings_folder() -> Path:
    """Return the folder of real recordings; a missing one is a failure, not a skip."""
    folder = Path(os.environ[RECORDINGS_VARIABLE])
    if not folder.is_dir():
        pytest.fail(f"{RECORDINGS_VARIABLE} names {folder}, which is not a folder")
    return folder
