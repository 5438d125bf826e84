"""What if the uses without an after-measure had gone badly? A second fit that supposes so."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from cuebook.evidence.arrays import FloatArray
from cuebook.evidence.cue_model import (
    CueModel,
    ModelRows,
    compute_residuals,
    fit_cue_model,
    predict_at_mode,
)

if TYPE_CHECKING:
    from cuebook.evidence.prepared import MissingRows, PreparedUses

BAD_SHARE = 0.10
FEWEST_ROWS = 5
"""A cue with fewer changes lends its bad tenth from all changes."""


def fit_with_missing(model: CueModel, prepared: PreparedUses) -> CueModel | None:
    """Refit with every stopped or unmeasured use at the bad tenth of its cue's changes.

    Returns
    -------
    None where nothing is missing.
    """
    missing = prepared.missing
    if missing is None or not len(missing.cue):
        return None
    rows = model.rows
    design = missing.design[:, [prepared.columns.index(name) for name in rows.columns]]
    cue = missing.cue.astype(np.intp)
    learner = missing.learner.astype(np.intp)
    supposed = predict_at_mode(model, design, cue, learner) + _find_bad_tenth(model, missing)
    event = rows.event
    if event is not None:
        event = np.concatenate([event, np.full(len(cue), -1, dtype=np.intp)])
    return fit_cue_model(
        ModelRows(
            change=np.concatenate([rows.change, supposed]),
            variance=np.concatenate([rows.variance, np.full(len(cue), rows.variance.mean())]),
            design=np.vstack([rows.design, design]),
            columns=rows.columns,
            cue=np.concatenate([rows.cue, cue]),
            cue_sets=rows.cue_sets,
            learner=np.concatenate([rows.learner, learner]),
            event=event,
        )
    )


def _find_bad_tenth(model: CueModel, missing: MissingRows) -> FloatArray:
    """Return the 10th percentile of the residual change of each missing use's cue."""
    residual = compute_residuals(model)
    overall = float(np.quantile(residual, BAD_SHARE))
    of_cue = {
        code: float(np.quantile(residual[model.rows.cue == code], BAD_SHARE))
        for code in set(missing.cue.tolist())
        if int((model.rows.cue == code).sum()) >= FEWEST_ROWS
    }
    return np.array([of_cue.get(code, overall) for code in missing.cue.tolist()])
