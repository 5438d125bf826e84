"""Write values of trials, each with the recipe it was made by."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from sqlalchemy.dialects import postgresql, sqlite
from sqlmodel import Session, col, select

from cuebook.errors import InputError
from cuebook.metrics.values import Recipe as Choices
from cuebook.store.canonical import drop_not_numbers, make_plain
from cuebook.store.keys import make_key
from cuebook.store.stamps import Stamp
from cuebook.store.tables.practice import Trial
from cuebook.store.tables.recordings import Measurement, Recipe
from cuebook.store.tables.upkeep import Correction
from cuebook.store.writing.revisions import count_evidence

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


def make_choices(choices: Mapping[str, Any]) -> Choices:
    """Return the choices behind a value in the form that is compared."""
    return Choices(make_plain(drop_not_numbers(choices)))


def keep_recipe(tx: Session, choices: Mapping[str, Any]) -> int:
    """Return the key of a recipe, storing it if it is new."""
    plain = make_choices(choices)
    known = tx.exec(select(Recipe.id).where(Recipe.digest == plain.digest)).first()
    if known is not None:
        return known
    recipe = Recipe(digest=plain.digest, choices=dict(plain.choices))
    tx.add(recipe)
    tx.flush()
    if recipe.id is None:  # pragma: no cover - the engine gives every row its key
        raise RuntimeError(plain.digest)
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

    A value that is there already, by the same recipe from the same reading, stays as it is:
    replay adds nothing. ``recipes`` remembers keys over many calls of one transaction.
    """
    if not measured:
        return
    known = {} if recipes is None else recipes
    rows = []
    for one in measured:
        digest = make_choices(one.choices).digest
        if digest not in known:
            known[digest] = keep_recipe(tx, one.choices)
        is_missing = one.value is None or not math.isfinite(one.value)
        rows.append(
            {
                "trial_id": trial_id,
                "metric": one.metric,
                "recipe_id": known[digest],
                "segment": one.segment,
                "recording_id": recording_id,
                "learner_id": learner_id,
                "value": None if is_missing else one.value,
                "reason": (one.reason or "no value") if is_missing else None,
                "n_used": one.n_used,
                "flags": list(one.flags),
                "quality": drop_not_numbers(one.quality),
            }
        )
    connection = tx.connection()
    # Both engines know the clause, each under its own insert.
    dialect = postgresql if connection.dialect.name == "postgresql" else sqlite
    connection.execute(dialect.insert(Measurement).on_conflict_do_nothing(), rows)
    count_evidence(tx)


def correct_typed_value(
    tx: Session, stamp: Stamp, trial_id: str, metric: str, value: float, *, why: str = ""
) -> bool:
    """Replace a mistyped number, keeping the old one; return whether anything changed.

    The only values that can be corrected are typed ones: what was computed from a recording is
    only ever followed by a newer reading.

    Raises
    ------
    InputError : no such number was typed for this attempt.
    """
    row = tx.exec(
        select(Measurement)
        .join(Recipe, col(Recipe.id) == Measurement.recipe_id)
        .where(
            Measurement.trial_id == trial_id,
            Measurement.metric == metric,
            Recipe.digest == make_choices(TYPED_CHOICES).digest,
        )
    ).first()
    if row is None:
        raise InputError(
            f"No number was typed for {metric} in this attempt.", "Add one with: cuebook log."
        )
    if row.value == value:
        return False
    tx.add(
        Correction(
            id=make_key(),
            learner_id=row.learner_id,
            table_name="measurement",
            row_key=trial_id,
            field=metric,
            old=row.value,
            new=value,
            why=why,
            **stamp.as_columns(),
        )
    )
    row.value, row.reason = value, None
    tx.get_one(Trial, trial_id).revision += 1
    tx.flush()
    count_evidence(tx)
    return True
