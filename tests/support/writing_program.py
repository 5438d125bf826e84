"""A program that writes to a library: ``python writing_program.py FOLDER NAME N``.

It says on stdout what has been stored, one line a commit, only after the commit.
"""

from __future__ import annotations

import sys
from pathlib import Path

from cuebook.store.opening import open_library
from cuebook.store.stamps import make_stamp
from cuebook.store.writing import people


def write_on(folder: Path, name: str, n_learners: int) -> None:
    """Add learners ``NAME-1`` to ``NAME-n``, each with a consent, in transactions of their own."""
    with open_library(folder) as library:
        for number in range(1, n_learners + 1):
            code = f"{name}-{number}"
            with library.transaction() as tx:
                key = people.add_learner(tx, make_stamp(), code)
                people.add_consent(tx, make_stamp(), key, "use_for_ranking", "yes")
            print(code, flush=True)  # noqa: T201 - the acknowledgement


if __name__ == "__main__":
    write_on(Path(sys.argv[1]), sys.argv[2], int(sys.argv[3]))
