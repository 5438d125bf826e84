"""Write values of trials, each with the recipe it was made by."""

from __future__ import annotations

import hashlib
import json
import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from sqlalchemy import insert
from sqlmodel import Session, select

from cuebook.store.tables.recordings import Measurement, Recipe

TYPED_CHOICES: Mapping[str, Any] = {"typed": True}
"""The recipe of every number a person typed."""


@dataclass(frozen=True, slots=True)
class Measured:
    """One value as it is written."""

    metric: str
    value: float | None
    """None or NaN: then ``reason`` says why."""
    choices: Mapping[str, Any]
    segment: str = ""
    n_used: int = 1
    flags: tuple[str, ...] = ()
    quality: Mapping[str, Any] = field(default_factory=dict)
    reason: str | None = None


def keep_recipe(tx: Session, choices: Mapping[str, Any]) -> int:
    """Return the key of a recipe, storing it if it is new."""
    canonical = json.dumps(dict(choices), sort_keys=True, separators=(",", ":"))
    digest = hashlib.sha256(canonical.encode()).hexdigest()
    known = tx.exec(select(Recipe.id).where(Recipe.digest == digest)).first()
    if known is not None:
        return known
    recipe = Recipe(digest=digest, choices=dict(choices))
    tx.add(recipe)
    tx.flush()
    if recipe.id is None:  # pragma: no cover - the engine gives every row its key
        raise RuntimeError(digest)
    return recipe.id


def add_measurements(
    tx: Session,
    trial_id: str,
    learner_id: str,
    measured: Sequence[Measured],
    *,
    recording_id: str = "",
    recipes: dict[str, int] | None = None,
) -> None:
    """Write the values of one trial; NaN becomes empty with its reason.

    ``recipes`` remembers keys over many calls of one transaction.
    """
    if not measured:
        return
    known = {} if recipes is None else recipes
    rows = []
    for one in measured:
        canonical = json.dumps(dict(one.choices), sort_keys=True, separators=(",", ":"))
        if canonical not in known:
            known[canonical] = keep_recipe(tx, one.choices)
        is_missing = one.value is None or not math.isfinite(one.value)
        rows.append(
            {
                "trial_id": trial_id,
                "metric": one.metric,
                "recipe_id": known[canonical],
                "segment": one.segment,
                "recording_id": recording_id,
                "learner_id": learner_id,
                "value": None if is_missing else one.value,
                "reason": (one.reason or "no value") if is_missing else None,
                "n_used": int(one.n_used),
                "flags": list(one.flags),
                "quality": dict(one.quality),
            }
        )
    tx.connection().execute(insert(Measurement), rows)
