"""Writes the recordings of the invented settings and says what happened there."""

from __future__ import annotations

from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from cuebook.jobs.demo.draft import MovementState, number_sessions
from cuebook.jobs.demo.larkspur import build_larkspur
from cuebook.jobs.demo.people import read_learners
from cuebook.jobs.demo.plan import DemoPlan
from cuebook.jobs.demo.quillgate import build_quillgate
from cuebook.jobs.demo.reach import ReachState, simulate_reach
from cuebook.jobs.demo.streams import open_stream
from cuebook.jobs.demo.strokes import simulate_strokes
from cuebook.jobs.demo.sway import SwayState, simulate_sway
from cuebook.jobs.demo.tern_weir import build_tern_weir
from cuebook.jobs.demo.truth import read_truth

FloatArray = NDArray[np.float64]

DEMO_SEED = 1
"""Fixed with the truths, before anything was ranked."""
REACH_HEADER = "time_s,hand_x_m,hand_y_m"
SWAY_HEADER = "time_s,cop_x_cm,cop_y_cm"
STROKE_HEADER = "onset"


def _format_path(header: str, time_s: FloatArray, position: FloatArray, digits: int) -> str:
    """Return a table of time and two coordinates as CSV text."""
    rows = zip(time_s.tolist(), position[:, 0].tolist(), position[:, 1].tolist(), strict=True)
    lines = [f"{t:.2f},{x:.{digits}f},{y:.{digits}f}" for t, x, y in rows]
    return "\n".join([header, *lines, ""])


def format_movement(state: MovementState, stream: np.random.Generator) -> str:
    """Return the recording of one movement as the CSV text of its file."""
    if isinstance(state, ReachState):
        return _format_path(REACH_HEADER, *simulate_reach(state, stream), digits=5)
    if isinstance(state, SwayState):
        return _format_path(SWAY_HEADER, *simulate_sway(state, stream), digits=4)
    onsets_s = simulate_strokes(state, stream).tolist()
    return "\n".join([STROKE_HEADER, *(f"{onset_s:.3f}" for onset_s in onsets_s), ""])


def write_recordings(folder: Path, seed: int = DEMO_SEED) -> DemoPlan:
    """Write one file an attempt below the folder, and return what happened in order.

    The same seed gives the same plan and, with the same numpy, the same bytes.
    """
    truth = read_truth()
    settings = [build(truth, seed) for build in (build_larkspur, build_tern_weir, build_quillgate)]
    for setting in settings:
        for file, state in setting.movements.items():
            place = folder / file
            place.parent.mkdir(parents=True, exist_ok=True)
            text = format_movement(state, open_stream(seed, "movement", file))
            place.write_bytes(text.encode("ascii"))
    return DemoPlan(
        seed=seed,
        zone=truth.zone,
        staff=tuple(one for setting in settings for one in setting.staff),
        learners=read_learners(),
        groups=tuple(one for setting in settings for one in setting.groups),
        schedules=tuple(one for setting in settings for one in setting.schedules),
        readings=tuple(one for setting in settings for one in setting.readings),
        sessions=number_sessions([one for setting in settings for one in setting.sessions]),
    )
