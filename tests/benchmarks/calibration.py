"""Calibration of the ranking over simulated libraries, as a Markdown table.

Run from the tests folder::

    python -m benchmarks.calibration --libraries 30

The goals beside the figures were set before the first full run; seeds count up from 1.
"""

from __future__ import annotations

import argparse
import sys
import time
from collections.abc import Callable, Sequence
from concurrent.futures import ProcessPoolExecutor
from dataclasses import dataclass
from functools import partial

import numpy as np
from support.calibration_scores import (
    LibraryScore,
    rank_library,
    score_naively,
    score_ranking,
)
from support.simulated_libraries import SCENARIOS, Library, simulate_library
from support.simulated_occasions import (
    ClassScenario,
    RetentionScenario,
    simulate_classes,
    simulate_retention,
)

from cuebook.evidence.question import DEFAULT_ALLOWANCE

GOALS = {
    "confounded": "model: 95 % .93-.96, 80 % .77-.82, regret <= .27 and <= .62 of naive, "
    "sure but false <= 8 %, top >= .93; shipped: .955-.99 / .83-.90, helps false <= 3 %, "
    "small <= 15 %, found >= 3 %; naive must be bad: 95 % <= .88, false >= 12 %",
    "random order": "95 % .93-.965 (grade A: no allowance for the cue's own choice)",
    "null": "sure <= 2.5 % of cues (model), helps <= .3 % (shipped)",
    "mostly null": "helps false <= 11 % (model), <= 6 % (shipped)",
    "hidden choice": "shipped 95 % >= .925, top >= .85",
    "group classes": "95 % >= .93",
    "retention": "95 % >= .93",
}
Simulator = Callable[[int], Library]
SIMULATORS: dict[str, tuple[Simulator, str]] = {
    **{
        name: (partial(simulate_library, scenario=scenario), "immediate")
        for name, scenario in SCENARIOS.items()
    },
    "group classes": (partial(simulate_classes, scenario=ClassScenario()), "immediate"),
    "retention": (partial(simulate_retention, scenario=RetentionScenario()), "retention"),
}


@dataclass(frozen=True, slots=True)
class Share:
    """A ratio of sums over libraries, with its library-clustered standard error."""

    value: float
    se: float

    def __str__(self) -> str:
        return "-" if np.isnan(self.value) else f"{self.value:.3f} ({self.se:.3f})"


def compute_share(parts: Sequence[float], wholes: Sequence[float]) -> Share:
    """Return sum(parts) / sum(wholes); libraries are the independent units."""
    part, whole = np.array(parts, float), np.array(wholes, float)
    if whole.sum() == 0:
        return Share(float("nan"), float("nan"))
    value = part.sum() / whole.sum()
    n = len(part)
    spread = np.sqrt(((part - value * whole) ** 2).sum() * n / max(1, n - 1))
    return Share(float(value), float(spread / whole.sum()))


def score_one(name: str, seed: int) -> tuple[LibraryScore, LibraryScore, LibraryScore]:
    """Score raw means, the model without allowance, and what is shipped, on one library."""
    simulate, contrast = SIMULATORS[name]
    library = simulate(seed)
    model = score_ranking(rank_library(library, 0.0, contrast), library)
    shipped = score_ranking(rank_library(library, DEFAULT_ALLOWANCE, contrast), library)
    return score_naively(library), model, shipped


COLUMNS: tuple[tuple[str, str, str | None], ...] = (
    ("top-1 regret", "top_regret", None),
    ("cover 95", "covered95", "cues"),
    ("cover 80", "covered80", "cues"),
    ("top covered", "top_covered", None),
    ("sure", "sure", "cues"),
    ("sure, false", "sure_false", "sure"),
    ("helps", "helps", "cues"),
    ("helps, false", "helps_false", "helps"),
    ("helps, small", "helps_small", "helps"),
    ("found", "worthwhile_found", "worthwhile"),
)
"""Heading, what is counted, and of what (None: of libraries)."""


def write_rows(name: str, scores: Sequence[tuple[LibraryScore, ...]]) -> list[str]:
    """Return one table row a method."""
    rows = []
    for at, method in enumerate(("naive", "model", "shipped")):
        of_method = [of_library[at] for of_library in scores]
        cells = [f"{name} ({len(of_method)})", method]
        for _, part, whole in COLUMNS:
            parts = [getattr(score, part) for score in of_method]
            wholes = [1.0 if whole is None else getattr(score, whole) for score in of_method]
            cells.append(str(compute_share(parts, wholes)))
        rows.append(f"| {' | '.join(cells)} |")
    return rows


def main() -> None:
    """Print the table."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--libraries", type=int, default=30)
    parser.add_argument("--first-seed", type=int, default=1)
    parser.add_argument("--workers", type=int, default=1)
    parser.add_argument("--scenario", action="append", choices=sorted(SIMULATORS))
    options = parser.parse_args()
    seeds = range(options.first_seed, options.first_seed + options.libraries)
    headings = ["scenario (libraries)", "method", *(heading for heading, _, _ in COLUMNS)]
    lines = [f"| {' | '.join(headings)} |", "|" + "--|" * len(headings)]
    sys.stdout.write("\n".join(lines) + "\n")
    with ProcessPoolExecutor(options.workers) as pool:
        for name in options.scenario or SIMULATORS:
            began = time.perf_counter()
            scores = list(pool.map(partial(score_one, name), seeds))
            took = time.perf_counter() - began
            goal = f"| | goals: {GOALS[name]}; {took:.0f} s |" + " |" * len(COLUMNS)
            sys.stdout.write("\n".join([*write_rows(name, scores), goal]) + "\n")
            sys.stdout.flush()


if __name__ == "__main__":
    main()
