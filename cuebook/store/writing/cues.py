"""Write cues: a new cue, or a new wording of one that is known."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from sqlmodel import Session, col, delete, select

from cuebook.library import cues as library
from cuebook.store.keys import make_key
from cuebook.store.stamps import Stamp
from cuebook.store.tables import cues as tables
from cuebook.store.writing.people import describe_unknown_code
from cuebook.store.writing.revisions import count_cues

_TAGS_OF = (
    ("task", "tasks"),
    ("region", "regions"),
    ("experience", "experience"),
    ("background_good", "background_good"),
    ("background_avoid", "background_avoid"),
    ("access_avoid", "access_avoid"),
    ("note_avoid", "note_avoid"),
)
_PLAIN = (
    *("kind", "focus", "pair", "sister_of", "status", "problem", "cycle", "rate_low"),
    *("rate_high", "age_low", "age_high", "captures", "leaves_out", "caution"),
    *("target_metric", "watch_metric"),
)


@dataclass(frozen=True, slots=True)
class CuesKept:
    """What importing a set of cues did."""

    added: int
    reworded: int
    unchanged: int


def has_cues(tx: Session) -> bool:
    """Return whether the library holds any cue."""
    return tx.exec(select(tables.Cue.id).limit(1)).first() is not None


def keep_cues(
    tx: Session, stamp: Stamp, cues: Iterable[library.Cue], set_code: str = ""
) -> CuesKept:
    """Insert cues whose code is new; give known ones their new wordings.

    A wording that is already there under its revision is left as it is: evidence is tied to
    the exact words.
    """
    added = reworded = unchanged = 0
    for cue in cues:
        row = tx.exec(select(tables.Cue).where(tables.Cue.code == cue.code)).first()
        if row is None:
            _insert(tx, stamp, cue, set_code)
            added += 1
        elif _add_new_wordings(tx, stamp, row.id, cue):
            _describe_anew(tx, row, cue)
            reworded += 1
        else:
            unchanged += 1
    if added or reworded:
        count_cues(tx)
    return CuesKept(added, reworded, unchanged)


def _insert(tx: Session, stamp: Stamp, cue: library.Cue, set_code: str) -> None:
    key = make_key()
    plain = {name: getattr(cue, name) for name in _PLAIN}
    tx.add(tables.Cue(id=key, code=cue.code, set_code=set_code, **plain, **stamp.as_columns()))
    tx.flush()
    _add_new_wordings(tx, stamp, key, cue)
    _add_details(tx, key, cue)


def _describe_anew(tx: Session, row: tables.Cue, cue: library.Cue) -> None:
    for name in _PLAIN:
        setattr(row, name, getattr(cue, name))
    row.revision += 1
    for table in (tables.Claim, tables.CueTag, tables.ProblemPhrase):
        tx.exec(delete(table).where(col(table.cue_id) == row.id))
    _add_details(tx, row.id, cue)


def _add_details(tx: Session, key: str, cue: library.Cue) -> None:
    for place, claim in enumerate(cue.claims):
        tx.add(tables.Claim(cue_id=key, feature=claim.feature, says=claim.says, place=place))
    for kind, name in _TAGS_OF:
        for place, word in enumerate(dict.fromkeys(getattr(cue, name))):
            tx.add(tables.CueTag(cue_id=key, kind=kind, word=word, place=place))
    for place, phrase in enumerate(cue.phrases):
        tx.add(tables.ProblemPhrase(id=make_key(), cue_id=key, phrase=phrase, place=place))
    tx.flush()


def _add_new_wordings(tx: Session, stamp: Stamp, key: str, cue: library.Cue) -> bool:
    rows = tx.exec(select(tables.Wording).where(tables.Wording.cue_id == key)).all()
    known = {(row.language, row.revision) for row in rows}
    new = [wording for wording in cue.wordings if (wording.language, wording.revision) not in known]
    for wording in new:
        tx.add(
            tables.Wording(
                id=make_key(),
                cue_id=key,
                text=wording.text,
                language=wording.language,
                replaces=wording.replaces,
                **{**stamp.as_columns(), "revision": wording.revision},
            )
        )
    tx.flush()
    return bool(new)


def get_wording_id(
    tx: Session, code: str, *, revision: int | None = None, language: str = "en"
) -> str:
    """Return the key of a cue's wording: one revision, or the newest.

    Raises
    ------
    UnknownCodeError : no such cue, or no such revision of it.
    """
    cue_id = tx.exec(select(tables.Cue.id).where(tables.Cue.code == code)).first()
    if cue_id is None:
        raise describe_unknown_code("cue", code, tx.exec(select(tables.Cue.code)).all())
    rows = tx.exec(
        select(tables.Wording)
        .where(tables.Wording.cue_id == cue_id)
        .order_by(col(tables.Wording.revision).desc())
    ).all()
    in_language = [row for row in rows if row.language == language] or list(rows)
    for row in in_language:
        if revision in {None, row.revision}:
            return row.id
    raise describe_unknown_code(
        f"wording of {code}", str(revision), [str(row.revision) for row in in_language]
    )
