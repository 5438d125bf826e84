"""Kill many writers and print what was lost: ``python tests/faults/kill_writers.py [N]``."""

from __future__ import annotations

import sys
import tempfile
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parent.parent))

from support.killing import kill_while_writing


def run(n_kills: int) -> int:
    """Kill writers on one library, one after the other; return how many commits were lost."""
    lost = acknowledged = stored = torn = damaged = 0
    with tempfile.TemporaryDirectory() as folder:
        for seed in range(n_kills):
            after = kill_while_writing(Path(folder), f"writer{seed}x", seed)
            lost += len(after.acknowledged - after.stored)
            acknowledged += len(after.acknowledged)
            stored += len(after.stored)
            torn += after.n_torn
            damaged += after.integrity != "ok"
    sys.stdout.write(
        f"{n_kills} kills: {acknowledged} commits acknowledged, {stored} stored, {lost} lost, "
        f"{torn} torn, {damaged} times damaged\n"
    )
    return lost + torn + damaged


if __name__ == "__main__":
    sys.exit(1 if run(int(sys.argv[1]) if len(sys.argv) > 1 else 50) else 0)
