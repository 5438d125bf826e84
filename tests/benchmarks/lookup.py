"""How long understanding, the danger check and the look-up take, as a Markdown table.

Run from the tests folder::

    python -m benchmarks.lookup --cues 80 1000 10000

The cues are the seed cues, repeated with features and tasks drawn at random (seed 1); the
problems are those written for the tests.
"""

from __future__ import annotations

import argparse
import csv
import random
import sys
import time
from collections.abc import Callable, Sequence
from dataclasses import replace
from pathlib import Path

from cuebook.library.cues import Claim, Cue
from cuebook.library.index import CueIndex
from cuebook.library.lookup import find_cues
from cuebook.library.safety import check_safety
from cuebook.library.seed_sets import load_seed_cues
from cuebook.library.understand import understand
from cuebook.vocabulary import load_vocabulary

PROBLEMS = Path(__file__).parents[1] / "library" / "data" / "problems_own.csv"
GOAL_MS = 50.0
"""Look-up at 10,000 cues, 95th percentile: well below what a key press may take."""


def read_problems() -> list[str]:
    """Return the problem sentences of the tests."""
    with PROBLEMS.open(encoding="utf-8", newline="") as file:
        return [row["problem"] for row in csv.DictReader(file)]


def make_cues(n_cues: int) -> list[Cue]:
    """Return the seed cues, followed by variations of them up to a number."""
    chance = random.Random(1)  # noqa: S311 - a benchmark, no secret
    features = load_vocabulary().slugs("feature")
    tasks = load_vocabulary().slugs("task")
    seeds = load_seed_cues()
    cues = list(seeds[:n_cues])
    for number in range(len(cues), n_cues):
        seed = seeds[number % len(seeds)]
        round_number = number // len(seeds)
        cues.append(
            replace(
                seed,
                code=f"{seed.code}-{round_number}",
                pair=f"{seed.pair}-{round_number}",
                sister_of=None,
                tasks=(chance.choice(tasks),),
                claims=(Claim(chance.choice(features), "improves"),),
            )
        )
    return cues


def time_each(action: Callable[[str], object], problems: Sequence[str]) -> list[float]:
    """Return the milliseconds an action takes for each problem, in rising order."""
    action(problems[0])  # the lists are read once a process
    times_ms = []
    for problem in problems:
        start = time.perf_counter()
        action(problem)
        times_ms.append(1000 * (time.perf_counter() - start))
    return sorted(times_ms)


def describe(name: str, times_ms: Sequence[float]) -> str:
    """Return one row of the table: median and 95th percentile."""
    median, high = (times_ms[int(share * (len(times_ms) - 1))] for share in (0.5, 0.95))
    return f"| {name} | {median:.2f} | {high:.2f} |"


def main(arguments: Sequence[str] | None = None) -> int:
    """Print the table; return 1 if the look-up misses its goal."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--cues", type=int, nargs="+", default=[80, 10_000])
    problems = read_problems()
    lines = ["| step | median ms | 95 % ms |", "|---|---|---|"]
    lines.append(describe("danger check", time_each(check_safety, problems)))
    lines.append(describe("understanding", time_each(understand, problems)))
    worst_ms = 0.0
    for n_cues in parser.parse_args(arguments).cues:
        index = CueIndex(make_cues(n_cues))

        def look_up(problem: str, index: CueIndex = index) -> object:
            return find_cues(understand(problem), index)

        times_ms = time_each(look_up, problems)
        worst_ms = max(worst_ms, times_ms[int(0.95 * (len(times_ms) - 1))])
        lines.append(describe(f"understanding and look-up, {n_cues} cues", times_ms))
    sys.stdout.write("\n".join(lines) + "\n")
    return int(worst_ms > GOAL_MS)


if __name__ == "__main__":
    sys.exit(main())
