"""The fixed columns of the model: what a change is adjusted for."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping

import numpy as np

from cuebook.evidence.group_events import Rows
from cuebook.evidence.prepared import FloatArray

FEWEST_CUES_OF_A_KIND = 5
FEWEST_OF_EACH_PLACE = 5
COLLINEAR = 1e-8
ACROSS_DAYS = frozenset({"retention", "transfer_later", "followup"})


def build_columns(
    rows: Rows,
    contrast: str,
    cues: tuple[str, ...],
    kind_of: Mapping[str, str],
    centred_on: Rows | None = None,
) -> tuple[FloatArray, tuple[str, ...]]:
    """Return the design and the names of its columns.

    Parameters
    ----------
    centred_on : rows whose means the columns are centred on; None: these rows themselves.
    """
    base = centred_on or rows
    has_cue = (rows.cue >= 0).astype(np.float64)
    columns: dict[str, FloatArray] = {
        "intercept": np.ones(rows.cue.size),
        "has_cue": has_cue,
        "state": rows.state,
        "position": _centre(rows.position, base.position),
        "session": _centre(np.log1p(rows.visit), np.log1p(base.visit)),
        "level": rows.level,
    }
    columns.update(_build_kinds(rows, base, cues, kind_of, has_cue))
    if not np.isnan(base.attempts).all():
        columns["log_attempts"] = np.nan_to_num(
            _centre(np.log1p(rows.attempts), np.log1p(base.attempts))
        )
    n_first = int(np.count_nonzero(base.first))
    if min(n_first, base.first.size - n_first) >= FEWEST_OF_EACH_PLACE:
        columns["first"] = _centre(rows.first, base.first)
    if contrast in ACROSS_DAYS:
        columns["log_days"] = _centre(np.log1p(rows.days), np.log1p(base.days))
    return np.column_stack(list(columns.values())), tuple(columns)


def _centre(values: FloatArray, base: FloatArray) -> FloatArray:
    known = base[~np.isnan(base)]
    return values - (float(np.mean(known)) if known.size else 0.0)


def _build_kinds(
    rows: Rows,
    base: Rows,
    cues: tuple[str, ...],
    kind_of: Mapping[str, str],
    has_cue: FloatArray,
) -> dict[str, FloatArray]:
    """Return one centred contrast per extra kind that has enough cues; the largest is the base."""
    counts = Counter(kind_of[cue] for cue in cues if cue in kind_of)
    enough = sorted(
        (kind for kind, count in counts.items() if count >= FEWEST_CUES_OF_A_KIND),
        key=lambda kind: (-counts[kind], kind),
    )
    columns = {}
    for kind in enough[1:]:
        of_kind = np.array([kind_of.get(cue) == kind for cue in cues], dtype=np.float64)
        share = _share_of(rows, of_kind)
        mean = float(np.mean(_share_of(base, of_kind)[base.cue >= 0]))
        columns[f"kind:{kind}"] = (share - mean) * has_cue
    return columns


def _share_of(rows: Rows, of_kind: FloatArray) -> FloatArray:
    if rows.cue_weights is not None:
        return rows.cue_weights @ of_kind
    return np.where(rows.cue >= 0, of_kind[rows.cue], 0.0)


def keep_independent(
    design: FloatArray, columns: tuple[str, ...]
) -> tuple[FloatArray, tuple[str, ...], tuple[str, ...]]:
    """Return the columns that add something to those before them, and the names of the rest.

    The order of the columns is their order of importance, so a column gives way to an earlier
    one, never the other way round.
    """
    kept: list[int] = []
    basis: list[FloatArray] = []
    for at in range(design.shape[1]):
        column = design[:, at]
        size = float(np.linalg.norm(column))
        rest = column.copy()
        for direction in basis:
            rest = rest - (direction @ rest) * direction
        left = float(np.linalg.norm(rest))
        if size > 0 and left > COLLINEAR * max(size, 1.0) and left > 1e-7 * size:
            kept.append(at)
            basis.append(rest / left)
    dropped = tuple(columns[at] for at in range(len(columns)) if at not in kept)
    return design[:, kept], tuple(columns[at] for at in kept), dropped
