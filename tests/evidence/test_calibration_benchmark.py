"""The calibration command: its libraries are hard, and its table can be read."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from benchmarks.calibration import COLUMNS, SIMULATORS, compute_share, score_one, write_rows
from support.calibration_scores import add_up, score_naively
from support.simulated_libraries import CONFOUNDED, simulate_library


def test_libraries_mislead_raw_means() -> None:
    """Raw means cover too rarely and claim too much, or the benchmark would prove nothing."""
    total = add_up([score_naively(simulate_library(seed)) for seed in range(1, 26)])
    assert total.covered95 / total.cues <= 0.88
    assert total.sure_false / total.sure >= 0.12


def test_libraries_are_the_same_every_time() -> None:
    """A seed names one library for ever."""
    first, second = (simulate_library(7, replace(CONFOUNDED, n_uses=40)) for _ in range(2))
    assert first.changes == second.changes
    assert first.truth == second.truth


def test_ratio_has_a_standard_error_by_library() -> None:
    """Two libraries of 1 of 2 and 1 of 4: 2 of 6, with the spread of whole libraries."""
    share = compute_share([1, 1], [2, 4])
    assert share.value == pytest.approx(1 / 3)
    # Residuals 1 - 2/3 and 1 - 4/3; their squares sum to 2/9; times n/(n-1) = 2.
    assert share.se == pytest.approx(math.sqrt(4 / 9) / 6)
    assert str(compute_share([0.0], [0.0])) == "-"


@pytest.mark.parametrize("name", ["confounded", "retention"])
def test_table_has_a_row_for_each_method(name: str) -> None:
    """One library of a scenario gives three rows with every column filled."""
    assert name in SIMULATORS
    rows = write_rows(name, [score_one(name, 1)])
    assert len(rows) == 3
    assert {row.count("|") for row in rows} == {len(COLUMNS) + 3}
