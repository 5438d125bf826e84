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
from cuebook.store.writing.revisions import count_cues, count_evidence

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
    redescribed: int = 0
    """Something said about the cue is different now, be the words new or not."""


def has_cues(tx: Session) -> bool:
    """Return whether the library holds any cue."""
    return tx.exec(select(tables.Cue.id).limit(1)).first() is not None


def keep_cues(
    tx: Session, stamp: Stamp, cues: Iterable[library.Cue], set_code: str = ""
) -> CuesKept:
    """Insert cues whose code is new; give known ones their new words and description.

    Stored words are never altered, because evidence is tied to them: words that the library does
    not have yet become a further wording, under their own revision if it is free, else under the
    next one. Keeping the same cues again changes nothing.
    """
    added = reworded = unchanged = redescribed = 0
    for cue in cues:
        row = tx.exec(select(tables.Cue).where(tables.Cue.code == cue.code)).first()
        if row is None:
            _insert(tx, stamp, cue, set_code)
            added += 1
            continue
        is_reworded = _add_new_wordings(tx, stamp, row.id, cue)
        is_redescribed = _describe_anew(tx, stamp, row, cue)
        reworded += is_reworded
        redescribed += is_redescribed
        unchanged += not (is_reworded or is_redescribed)
    if added or reworded or redescribed:
        count_cues(tx)
    if redescribed:
        count_evidence(tx)  # its kind may be another
    return CuesKept(added, reworded, unchanged, redescribed)


def _insert(tx: Session, stamp: Stamp, cue: library.Cue, set_code: str) -> None:
    key = make_key()
    plain = {name: getattr(cue, name) for name in _PLAIN}
    tx.add(tables.Cue(id=key, code=cue.code, set_code=set_code, **plain, **stamp.as_columns()))
    tx.flush()
    _add_new_wordings(tx, stamp, key, cue)
    _add_details(tx, stamp, key, cue)


def _describe_anew(tx: Session, stamp: Stamp, row: tables.Cue, cue: library.Cue) -> bool:
    """Take over a changed description; return whether it differed."""
    is_same = all(getattr(row, name) == getattr(cue, name) for name in _PLAIN)
    if is_same and _list_details(tx, row.id) == _state_details(cue):
        return False
    for name in _PLAIN:
        setattr(row, name, getattr(cue, name))
    row.revision += 1
    for table in (tables.Claim, tables.CueTag, tables.ProblemPhrase):
        tx.exec(delete(table).where(col(table.cue_id) == row.id))
    tx.flush()
    _add_details(tx, stamp, row.id, cue)
    return True


Details = tuple[list[tuple[str, str]], dict[str, list[str]], list[str]]
"""Claims, tags by kind, problem phrases: each in their order."""


def _state_details(cue: library.Cue) -> Details:
    claims = [(claim.feature, claim.says) for claim in cue.claims]
    tags = {kind: list(dict.fromkeys(getattr(cue, name))) for kind, name in _TAGS_OF}
    return claims, {kind: words for kind, words in tags.items() if words}, list(cue.phrases)


def _list_details(tx: Session, cue_id: str) -> Details:
    claims = tx.exec(
        select(tables.Claim.feature, tables.Claim.says)
        .where(tables.Claim.cue_id == cue_id)
        .order_by(col(tables.Claim.place))
    ).all()
    tags: dict[str, list[str]] = {}
    for kind, word in tx.exec(
        select(tables.CueTag.kind, tables.CueTag.word)
        .where(tables.CueTag.cue_id == cue_id)
        .order_by(col(tables.CueTag.place))
    ).all():
        tags.setdefault(kind, []).append(word)
    phrases = tx.exec(
        select(tables.ProblemPhrase.phrase)
        .where(tables.ProblemPhrase.cue_id == cue_id)
        .order_by(col(tables.ProblemPhrase.place))
    ).all()
    return [(feature, says) for feature, says in claims], tags, list(phrases)


def _add_details(tx: Session, stamp: Stamp, key: str, cue: library.Cue) -> None:
    claims, tags, phrases = _state_details(cue)
    for place, (feature, says) in enumerate(claims):
        tx.add(tables.Claim(cue_id=key, feature=feature, says=says, place=place))
    for kind, words in tags.items():
        for place, word in enumerate(words):
            tx.add(tables.CueTag(cue_id=key, kind=kind, word=word, place=place))
    for place, phrase in enumerate(phrases):
        tx.add(
            tables.ProblemPhrase(
                id=make_key(), cue_id=key, phrase=phrase, place=place, **stamp.as_columns()
            )
        )
    tx.flush()


def _add_new_wordings(tx: Session, stamp: Stamp, key: str, cue: library.Cue) -> bool:
    rows = tx.exec(select(tables.Wording).where(tables.Wording.cue_id == key)).all()
    texts = {(row.language, row.text) for row in rows}
    taken = {(row.language, row.revision) for row in rows}
    is_new = False
    for wording in cue.wordings:
        if (wording.language, wording.text) in texts:
            continue
        is_new = True
        revision, replaces = wording.revision, wording.replaces
        if (wording.language, revision) in taken:
            replaces = max(known for language, known in taken if language == wording.language)
            revision = replaces + 1
        texts.add((wording.language, wording.text))
        taken.add((wording.language, revision))
        tx.add(
            tables.Wording(
                id=make_key(),
                cue_id=key,
                text=wording.text,
                language=wording.language,
                replaces=replaces,
                **{**stamp.as_columns(), "revision": revision},
            )
        )
    tx.flush()
    return is_new


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
