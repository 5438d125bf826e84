"""One written demonstration for all tests of this folder."""

from __future__ import annotations

import pytest
from support.demonstration import Demo

from cuebook.jobs.demo.simulate import write_recordings


@pytest.fixture(scope="session")
def demo(tmp_path_factory: pytest.TempPathFactory) -> Demo:
    """Return the demonstration as it is shipped: seed and truths unchanged."""
    folder = tmp_path_factory.mktemp("demo")
    return Demo(folder, write_recordings(folder))
