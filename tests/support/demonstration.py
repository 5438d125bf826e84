"""The written demonstration as the tests hand it round."""

from __future__ import annotations

from pathlib import Path
from typing import NamedTuple

from cuebook.jobs.demo.plan import DemoPlan


class Demo(NamedTuple):
    """A plan and the folder its recordings lie in."""

    folder: Path
    plan: DemoPlan
