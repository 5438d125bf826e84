"""Changes made ready for the model: the dataclasses that hold them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt

FloatArray = npt.NDArray[np.float64]
IntArray = npt.NDArray[np.int64]
BoolArray = npt.NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Moments:
    """What attempts and visits vary by; needed for thresholds."""

    v_is_modelled: bool
    """Whether the sampling variance of each change is known."""
    s2_learner: Mapping[str, float]
    df_learner: Mapping[str, float]
    s0_squared: float
    d0: float
    """May be infinite."""
    sum_df: float
    sx2: float
    """Within-learner variance of the state from visit to visit."""
    vw: float
    mean_before: float
    sd_change: float
    reliability_note: str = ""
    """Said where day and person, or attempts, cannot be told apart; empty if they can."""


@dataclass(frozen=True, slots=True)
class ReferenceCheck:
    """Whether practice alone may be the line to beat."""

    is_shown: bool
    caps_at_c: bool
    reasons: tuple[str, ...]
    practice_randomised: bool
    n_practice: int
    n_practice_learners: int
    n_days: int


@dataclass(frozen=True, slots=True)
class Tally:
    """What became of the uses of one cue."""

    met: int = 0
    changed: int = 0
    stopped: int = 0
    no_before: int = 0
    no_after: int = 0
    other: int = 0


@dataclass(frozen=True, eq=False)
class MissingRows:
    """Uses with a before-measure and no change: for the fit that supposes the worst."""

    design: FloatArray
    """shape (m, p), the same columns as the changes."""
    cue: IntArray
    learner: IntArray
    reason: tuple[str, ...]


@dataclass(frozen=True, eq=False)
class PreparedUses:
    """Changes of one metric and contrast with everything the model conditions on."""

    contrast: str
    change: FloatArray
    """shape (n,), oriented and transformed: plus is better."""
    scale: float
    """SD of the changes; 1 if there is none."""
    variance: FloatArray
    """shape (n,), known sampling variance; all 0 where it is not known."""
    design: FloatArray
    """shape (n, p)."""
    columns: tuple[str, ...]
    cue_labels: tuple[str, ...]
    learner_labels: tuple[str, ...]
    cue: IntArray
    """shape (n,), -1 is practice alone; of several cues the first of the largest share."""
    learner: IntArray
    cue_weights: FloatArray | None
    """shape (n, C) where a change belongs to several cues; None if none does."""
    event: IntArray | None
    """shape (n,), -1 for none; None where no event is shared or rows were collapsed."""
    is_collapsed: bool
    n_before: IntArray
    n_after: IntArray
    position_k: IntArray
    session_t: IntArray
    days: FloatArray
    attempts: FloatArray
    """shape (n,), NaN where not counted."""
    randomised: BoolArray
    given_as_assigned: BoolArray
    people: IntArray
    """shape (n,), learners behind a collapsed row, else 1."""
    flags: tuple[tuple[str, ...], ...]
    kind_of_cue: Mapping[str, str]
    missing: MissingRows | None
    moments: Moments
    reference: ReferenceCheck
    tallies: Mapping[str | None, Tally] = field(default_factory=dict)
    dropped_columns: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()
    refused: tuple[str, ...] = ()
