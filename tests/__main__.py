"""One command for every check: ``python -m tests``.

Runs ruff, mypy --strict, the import contracts and pytest, in that order, and stops at the
first that fails. Arguments are handed to pytest.
"""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
BIN = Path(sys.executable).parent

# -P keeps the checkout out of sys.path, so that the *installed* package is tested.
PYTHON = [sys.executable, "-P", "-m"]


def list_steps(pytest_arguments: list[str]) -> list[list[str]]:
    """Return the checks in the order they run."""
    return [
        [*PYTHON, "ruff", "check", "."],
        [*PYTHON, "ruff", "format", "--check", "."],
        [*PYTHON, "mypy", "cuebook", "tests"],
        [str(BIN / "lint-imports"), "--no-cache"],
        [*PYTHON, "pytest", *pytest_arguments],
    ]


def main() -> int:
    """Run every check; return the first exit code that is not 0."""
    environment = {**os.environ, "PYTHONSAFEPATH": "1"}
    # Small matrices: several BLAS threads cost more than they bring.
    environment.setdefault("OPENBLAS_NUM_THREADS", "1")
    for step in list_steps(sys.argv[1:]):
        print("+", " ".join(step[1:] if step[0] == sys.executable else step), flush=True)  # noqa: T201
        finished = subprocess.run(step, cwd=ROOT, env=environment, check=False)
        if finished.returncode:
            return finished.returncode
    return 0


if __name__ == "__main__":
    sys.exit(main())
