"""The fitting function against a plain solution, another program, and its own laws."""

from __future__ import annotations

import warnings
from dataclasses import replace

import numpy as np
import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from statsmodels.regression.mixed_linear_model import (  # type: ignore[import-untyped]  # it ships none
    MixedLM,
)
from support.crossed_tables import CrossedTable, draw_crossed_table, solve_plainly

from cuebook.errors import InputError
from cuebook.evidence.arrays import FloatArray
from cuebook.evidence.crossed_layout import CrossedLayout, build_layout
from cuebook.evidence.eliminated import solve_crossed
from cuebook.evidence.gradient import compute_gradient
from cuebook.evidence.reml import RemlFit, fit_reml

STATED = {
    "residual": 0.7,
    "cue": 0.11,
    "learner": 0.2,
    "cue_by_learner": 0.13,
    "event": 0.2,
}
SHARED = np.vstack([np.eye(9), np.eye(9)[:3] / 2 + np.eye(9)[3:6] / 2])
CASES = {
    "cues kept": draw_crossed_table(1),
    "learners kept": draw_crossed_table(2, n_cues=30, n_learners=12),
    "group events": draw_crossed_table(3, n_events=11),
    "shared cues": draw_crossed_table(4),
}


def share_some_cues(table: CrossedTable) -> CrossedTable:
    """Let every second row of the first three cues belong to two cues by halves."""
    rows = (table.cue >= 0) & (table.cue < 3) & (np.arange(len(table.cue)) % 2 == 0)
    return replace(table, cue=np.where(rows, table.cue + 9, table.cue))


CASES["shared cues"] = share_some_cues(CASES["shared cues"])


def get_weights(case: str) -> FloatArray | None:
    """Return the weights of a case with shared cues."""
    return SHARED if case == "shared cues" else None


def lay_out(case: str) -> CrossedLayout:
    """Index a case."""
    table = CASES[case]
    return build_layout(
        table.d,
        table.X,
        table.cue,
        table.learner,
        table.v,
        pair=True,
        event=table.event,
        cue_weights=get_weights(case),
    )


def fit_held(table: CrossedTable, **changes: float) -> RemlFit:
    """Fit a table at the stated variances, or changed ones."""
    held = {**STATED, **changes}
    return fit_reml(table.d, table.X, table.cue, table.learner, table.v, pair=True, variances=held)


@pytest.mark.parametrize("case", CASES)
def test_elimination_is_exact(case: str) -> None:
    """Criterion, fixed effects and predictions are those of the whole covariance matrix."""
    table = CASES[case]
    plain = solve_plainly(table, STATED, get_weights(case))
    fit = fit_reml(
        table.d,
        table.X,
        table.cue,
        table.learner,
        table.v,
        pair=True,
        variances=STATED,
        event=table.event,
        cue_weights=get_weights(case),
    )
    assert fit.criterion == pytest.approx(plain.criterion, rel=1e-12)
    np.testing.assert_allclose(fit.beta, plain.beta, atol=1e-12)
    np.testing.assert_allclose(fit.cue_effect, plain.cue_effect, atol=1e-12)
    np.testing.assert_allclose(fit.learner_effect, plain.learner_effect, atol=1e-12)


@pytest.mark.parametrize("case", CASES)
def test_gradient_is_exact(case: str) -> None:
    """The gradient by log variances agrees with central differences of the criterion."""
    layout = lay_out(case)
    stated = {name: STATED[name] for name in layout.get_names()}
    step = 1e-4
    differences = [
        (
            solve_crossed(layout, {**stated, name: value * np.exp(step)}).criterion
            - solve_crossed(layout, {**stated, name: value * np.exp(-step)}).criterion
        )
        / (2 * step)
        for name, value in stated.items()
    ]
    gradient = compute_gradient(layout, solve_crossed(layout, stated))
    np.testing.assert_allclose(gradient, differences, atol=1e-6)


def test_factor_that_is_kept_makes_no_difference() -> None:
    """Eliminating cues or learners gives the same covariance of the effects."""
    table = CASES["learners kept"]
    swapped = fit_held(table)
    # Weights given one by one forbid the swap without changing the model.
    weights = np.eye(table.cue.max() + 1)
    unswapped = fit_reml(
        table.d,
        table.X,
        table.cue,
        table.learner,
        table.v,
        pair=True,
        variances=STATED,
        cue_weights=weights,
    )
    assert swapped.layout.kept_name != unswapped.layout.kept_name
    np.testing.assert_allclose(
        swapped.compute_covariance(), unswapped.compute_covariance(), atol=1e-12
    )
    np.testing.assert_allclose(swapped.learner_pev, unswapped.learner_pev, atol=1e-12)
    np.testing.assert_allclose(swapped.cue_cond_var, unswapped.cue_cond_var, atol=1e-12)


def test_large_coupling_takes_the_sparse_path_to_the_same_fit(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """Storing only the pairs that occur changes no number beyond rounding."""
    table = CASES["cues kept"]
    dense = fit_reml(table.d, table.X, table.cue, table.learner, table.v, pair=True)
    monkeypatch.setattr("cuebook.evidence.eliminated.LARGEST_DENSE_COUPLING", 0)
    sparse = fit_reml(table.d, table.X, table.cue, table.learner, table.v, pair=True)
    assert sparse.criterion == pytest.approx(dense.criterion, rel=1e-12)
    np.testing.assert_allclose(sparse.cue_effect, dense.cue_effect, atol=1e-8)
    np.testing.assert_allclose(sparse.learner_pev, dense.learner_pev, atol=1e-8)


def test_variances_agree_with_statsmodels() -> None:
    """MixedLM of statsmodels finds the same crossed variances and criterion on a small table."""
    table = draw_crossed_table(6, n=150, n_cues=8, n_learners=10)
    has_cue = table.cue >= 0
    rows, cue, learner = table.X[has_cue][:, [0, 2]], table.cue[has_cue], table.learner[has_cue]
    frame = pd.DataFrame({"d": table.d[has_cue], "x": rows[:, 1], "cue": cue, "learner": learner})
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # its optimiser warns about its own boundary checks
        other = MixedLM.from_formula(
            "d ~ x",
            groups=np.ones(len(frame)),
            vc_formula={"cue": "0 + C(cue)", "learner": "0 + C(learner)"},
            re_formula="0",
            data=frame,
        ).fit(reml=True)
    fit = fit_reml(frame.d, rows, cue, learner)
    assert fit.variances["cue"] == pytest.approx(other.vcomp[0], rel=2e-3)
    assert fit.variances["learner"] == pytest.approx(other.vcomp[1], rel=2e-3)
    assert fit.variances["residual"] == pytest.approx(other.scale, rel=1e-3)
    np.testing.assert_allclose(fit.beta, other.fe_params, rtol=1e-3)
    assert fit.criterion <= -2 * other.llf + 1e-6


def test_optimum_has_no_slope_left() -> None:
    """Where the steps end, every estimated variance has a gradient of 0."""
    table = CASES["group events"]
    fit = fit_reml(
        table.d, table.X, table.cue, table.learner, table.v, pair=True, event=table.event
    )
    assert fit.converged
    assert fit.at_boundary == ()
    np.testing.assert_allclose(list(fit.gradient.values()), 0.0, atol=1e-5)


@given(seed=st.integers(0, 10_000), row=st.integers(0, 159))
@settings(max_examples=25, deadline=None)
def test_one_more_row_never_widens_at_fixed_variances(seed: int, row: int) -> None:
    """At fixed variances a further use makes no cue's interval wider."""
    table = draw_crossed_table(seed)
    more = CrossedTable(
        *(
            np.concatenate([part, part[row : row + 1]])
            for part in (table.d, table.X, table.cue, table.learner, table.v, table.event)
        )
    )
    before, after = fit_held(table).cue_pev, fit_held(more).cue_pev
    assert (after <= before + 1e-12).all()


@given(seed=st.integers(0, 10_000))
@settings(max_examples=15, deadline=None)
def test_order_of_rows_makes_no_difference(seed: int) -> None:
    """The same rows in another order give the same fit."""
    table = draw_crossed_table(seed)
    order = np.random.default_rng(seed).permutation(len(table.d))
    mixed = CrossedTable(
        table.d[order],
        table.X[order],
        table.cue[order],
        table.learner[order],
        table.v[order],
        table.event[order],
    )
    first, second = fit_held(table), fit_held(mixed)
    assert second.criterion == pytest.approx(first.criterion, rel=1e-12)
    np.testing.assert_allclose(second.cue_effect, first.cue_effect, atol=1e-12)


@given(seed=st.integers(0, 10_000), factor=st.floats(1e-3, 1e3))
@settings(max_examples=15, deadline=None)
def test_unit_of_measurement_makes_no_difference(seed: int, factor: float) -> None:
    """Scores in another unit give variances in the square of it and effects in it."""
    table = draw_crossed_table(seed)
    fit = fit_reml(table.d, table.X, table.cue, table.learner, table.v)
    other = fit_reml(table.d * factor, table.X, table.cue, table.learner, table.v * factor**2)
    np.testing.assert_allclose(other.cue_effect, fit.cue_effect * factor, rtol=1e-4, atol=1e-9)
    assert other.at_boundary == fit.at_boundary
    assert other.variances["learner"] == pytest.approx(
        fit.variances["learner"] * factor**2, rel=1e-4
    )


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"d": np.array([1.0, np.nan, 2.0, 3.0])}, "not a finite number"),
        ({"v": np.array([0.1, -0.1, 0.1, 0.1])}, "sampling variance is negative"),
        ({"cue": np.array([0.0, 1.0, 0.0, 1.0])}, "codes of cue"),
        ({"cue": np.array([0, 1, 0])}, "codes of cue"),
        ({"X": np.ones((3, 1))}, "have shape"),
        ({"X": np.ones((4, 2))}, "collinear"),
        ({"X": np.eye(4)}, "cannot carry"),
        ({"pair": np.array([0, 0, 0, 1]), "learner": np.array([0, 1, 0, 1])}, "pair code"),
        ({"variances": {"residual": -1.0}}, "held variance"),
        ({"variances": {"cues": 1.0}}, "held variance"),
        ({"variances": {"residual": 0.0}}, "neither a sampling variance nor a residual"),
    ],
)
def test_unusable_input_is_refused_in_words(changes: dict[str, object], words: str) -> None:
    """Input that cannot be fitted is refused with what was wrong, never with a traceback."""
    arguments: dict[str, object] = {"d": np.arange(4.0), "X": np.ones((4, 1)), **changes}
    with pytest.raises(InputError, match=words):
        fit_reml(**arguments)  # type: ignore[arg-type]  # the point is wrong input
