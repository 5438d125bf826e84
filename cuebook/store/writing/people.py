"""Write learners, groups, consents, holds."""

from __future__ import annotations

import secrets
from collections.abc import Iterable
from datetime import UTC, datetime
from importlib import resources

from sqlalchemy import Text, cast
from sqlmodel import Session, col, delete, select

from cuebook.errors import InputError
from cuebook.store.keys import make_key
from cuebook.store.stamps import LOCAL_STAFF, Stamp, make_stamp
from cuebook.store.tables import people as tables
from cuebook.store.tables.practice import Block, Participation
from cuebook.store.tables.practice import Session as Meeting
from cuebook.store.tables.upkeep import Draft, RankingCache
from cuebook.store.unknown import describe_unknown
from cuebook.store.writing.replay import is_known
from cuebook.store.writing.revisions import count_evidence

describe_unknown_code = describe_unknown


def make_code(tx: Session) -> str:
    """Return a code of two plain words that no learner or group has."""
    words = (resources.files("cuebook.store") / "data" / "code_words.txt").read_text("utf-8")
    firsts, seconds = (line.split() for line in words.splitlines()[:2])
    taken = {*tx.exec(select(tables.Learner.code)), *tx.exec(select(tables.LearnerGroup.code))}
    free = [
        f"{first}-{second}"
        for first in firsts
        for second in seconds
        if f"{first}-{second}" not in taken
    ]
    if not free:
        raise InputError("All codes of two words are taken.", "Give a code of your own.")
    return secrets.choice(free)


def add_staff(
    tx: Session, code: str = LOCAL_STAFF, role: str = "", stamp: Stamp | None = None
) -> str:
    """Add somebody who enters, if not there yet; return the code."""
    if tx.exec(select(tables.Staff).where(tables.Staff.code == code)).first() is None:
        columns = (stamp or make_stamp()).as_columns()
        tx.add(tables.Staff(id=make_key(), code=code, role=role, **columns))
        tx.flush()
    return code


def add_learner(
    tx: Session,
    stamp: Stamp,
    code: str,
    *,
    age_band: str | None = None,
    experience: str | None = None,
    is_returning: bool = False,
    language: str = "en",
    backgrounds: Iterable[str] = (),
    access_needs: Iterable[str] = (),
    is_demo: bool = False,
    key: str | None = None,
) -> str:
    """Add a learner under a code; return the key. A key that is known already adds nothing.

    Raises
    ------
    InputError : the code is taken.
    """
    if is_known(key, tx, tables.Learner):
        return key
    _refuse_taken(tx, code)
    key = key or make_key()
    tx.add(
        tables.Learner(
            id=key,
            code=code,
            age_band=age_band,
            experience=experience,
            is_returning=is_returning,
            language=language,
            is_demo=is_demo,
            **stamp.as_columns(),
        )
    )
    tx.flush()
    set_backgrounds(tx, stamp, key, backgrounds)
    set_access_needs(tx, stamp, key, access_needs)
    return key


def set_backgrounds(tx: Session, stamp: Stamp, learner_id: str, backgrounds: Iterable[str]) -> None:
    """Let a learner have exactly these backgrounds."""
    wanted = set(backgrounds)
    table = tables.LearnerBackground
    rows = tx.exec(select(table).where(table.learner_id == learner_id)).all()
    for row in rows:
        if row.background not in wanted:
            tx.delete(row)
    for word in sorted(wanted - {row.background for row in rows}):
        columns = stamp.as_columns()
        tx.add(table(id=make_key(), learner_id=learner_id, background=word, **columns))
    tx.flush()
    count_evidence(tx)  # rankings can be asked for one background


def set_access_needs(
    tx: Session, stamp: Stamp, learner_id: str, access_needs: Iterable[str]
) -> None:
    """Let a learner have exactly these access needs."""
    wanted = set(access_needs)
    table = tables.LearnerNeed
    rows = tx.exec(select(table).where(table.learner_id == learner_id)).all()
    for row in rows:
        if row.access_need not in wanted:
            tx.delete(row)
    for word in sorted(wanted - {row.access_need for row in rows}):
        columns = stamp.as_columns()
        tx.add(table(id=make_key(), learner_id=learner_id, access_need=word, **columns))
    tx.flush()


def _refuse_taken(tx: Session, code: str) -> None:
    for table in (tables.Learner, tables.LearnerGroup):
        if tx.exec(select(table).where(table.code == code)).first() is not None:
            raise InputError(f"The code '{code}' is taken.", "Give another, or none to get one.")


def get_learner(tx: Session, code: str) -> tables.Learner:
    """Return a learner's row, for use inside the transaction only.

    Raises
    ------
    UnknownCodeError : no such learner; names the nearest.
    """
    found = tx.exec(select(tables.Learner).where(tables.Learner.code == code)).first()
    if found is None:
        raise describe_unknown_code("learner", code, tx.exec(select(tables.Learner.code)).all())
    return found


def get_group(tx: Session, code: str) -> tables.LearnerGroup:
    """Return a group's row, for use inside the transaction only."""
    found = tx.exec(select(tables.LearnerGroup).where(tables.LearnerGroup.code == code)).first()
    if found is None:
        known = tx.exec(select(tables.LearnerGroup.code)).all()
        raise describe_unknown_code("group", code, known)
    return found


def add_consent(
    tx: Session,
    stamp: Stamp,
    learner_id: str,
    item: str,
    answer: str,
    *,
    given_by: str = "self",
    how: str = "spoken",
    assent: str = "not_applicable",
) -> None:
    """Note one answer; the newest counts. What evidence rests on may have changed."""
    tx.add(
        tables.Consent(
            id=make_key(),
            learner_id=learner_id,
            item=item,
            answer=answer,
            given_by=given_by,
            how=how,
            assent=assent,
            **stamp.as_columns(),
        )
    )
    count_evidence(tx)


def add_safety_note(
    tx: Session,
    stamp: Stamp,
    learner_id: str,
    *,
    slug: str | None,
    words: str = "",
    is_hard: bool = False,
    tasks: Iterable[str] = (),
) -> None:
    """Add a note on safety."""
    tx.add(
        tables.SafetyNote(
            id=make_key(),
            learner_id=learner_id,
            slug=slug,
            words=words,
            is_hard=is_hard,
            tasks=list(tasks),
            **stamp.as_columns(),
        )
    )


def add_holds(
    tx: Session, stamp: Stamp, learner_id: str, tasks: Iterable[str], *, until: str, by_role: str
) -> None:
    """Put a learner on hold for tasks."""
    for task in tasks:
        tx.add(
            tables.Hold(
                id=make_key(),
                learner_id=learner_id,
                task=task,
                until=until,
                by_role=by_role,
                **stamp.as_columns(),
            )
        )


def clear_hold(tx: Session, stamp: Stamp, learner_id: str, task: str, *, cleared_by: str) -> int:
    """Note who cleared the holds of a task; return how many there were."""
    open_holds = tx.exec(
        select(tables.Hold).where(
            tables.Hold.learner_id == learner_id,
            tables.Hold.task == task,
            col(tables.Hold.cleared_at).is_(None),
        )
    ).all()
    for hold in open_holds:
        hold.cleared_at = stamp.occurred_at
        hold.cleared_by = cleared_by
        hold.revision += 1
    return len(open_holds)


def list_open_holds(
    tx: Session, learner_ids: Iterable[str], task: str
) -> list[tuple[str, str, str]]:
    """Return (code, until, role that clears) of learners on hold for a task."""
    query = (
        select(tables.Learner.code, tables.Hold.until, tables.Hold.by_role)
        .join(tables.Hold, col(tables.Hold.learner_id) == tables.Learner.id)
        .where(
            col(tables.Learner.id).in_(list(learner_ids)),
            tables.Hold.task == task,
            col(tables.Hold.cleared_at).is_(None),
        )
        .order_by(tables.Learner.code)
    )
    return [(code, until, by_role) for code, until, by_role in tx.exec(query).all()]


def add_group(tx: Session, stamp: Stamp, code: str, label: str = "") -> str:
    """Add a group if there is none of this code; return its key."""
    found = tx.exec(select(tables.LearnerGroup).where(tables.LearnerGroup.code == code)).first()
    if found is not None:
        return found.id
    _refuse_taken(tx, code)
    key = make_key()
    tx.add(tables.LearnerGroup(id=key, code=code, label=label, **stamp.as_columns()))
    tx.flush()
    return key


def add_member(
    tx: Session, group_id: str, learner_id: str, joined_at: datetime, stamp: Stamp | None = None
) -> None:
    """Put a learner into a group, if not in it then."""
    if learner_id not in {member.id for member in list_members(tx, group_id, joined_at)}:
        tx.add(
            tables.Membership(
                id=make_key(),
                group_id=group_id,
                learner_id=learner_id,
                joined_at=joined_at,
                **(stamp or make_stamp(joined_at)).as_columns(),
            )
        )
        tx.flush()


def end_membership(tx: Session, group_id: str, learner_id: str, left_at: datetime) -> bool:
    """Note that a learner has left a group; return whether they were in it."""
    rows = tx.exec(
        select(tables.Membership).where(
            tables.Membership.group_id == group_id,
            tables.Membership.learner_id == learner_id,
            col(tables.Membership.left_at).is_(None),
        )
    ).all()
    for row in rows:
        row.left_at = left_at
        row.revision += 1
    tx.flush()
    return bool(rows)


def list_members(tx: Session, group_id: str, at: datetime | None = None) -> list[tables.Learner]:
    """Return the learners who had not left a group by a time (now), in the order of joining.

    When they joined is not asked: a class may be logged for a day before it was written down.
    """
    moment = at or datetime.now(UTC)
    query = (
        select(tables.Learner, tables.Membership)
        .join(tables.Membership, col(tables.Membership.learner_id) == tables.Learner.id)
        .where(tables.Membership.group_id == group_id)
        .order_by(col(tables.Membership.id))
    )
    members = {
        learner.id: learner
        for learner, membership in tx.exec(query).all()
        if membership.left_at is None or membership.left_at > moment
    }
    return list(members.values())


def erase_learner(tx: Session, learner_id: str) -> list[str]:
    """Erase a learner with everything recorded; return the hashes of originals left unused."""
    from cuebook.store.writing.recordings import drop_unused_originals  # noqa: PLC0415

    code = tx.get_one(tables.Learner, learner_id).code
    # Sessions and blocks of a group stay: only this learner's part of them goes.
    attended = tx.exec(
        select(Participation.block_id).where(Participation.learner_id == learner_id)
    ).all()
    tx.exec(delete(Meeting).where(col(Meeting.learner_id) == learner_id))
    tx.exec(delete(Participation).where(col(Participation.learner_id) == learner_id))
    tx.exec(delete(tables.Learner).where(col(tables.Learner.id) == learner_id))
    tx.flush()
    empty = select(Block.id).where(
        col(Block.id).in_(attended), ~col(Block.id).in_(select(Participation.block_id))
    )
    tx.exec(delete(Block).where(col(Block.id).in_(empty)))
    # Stored rankings may list the learner's own values; drafts may name them.
    tx.exec(delete(RankingCache))
    naming = col(Draft.place).contains(code) | cast(col(Draft.content), Text).contains(code)
    tx.exec(delete(Draft).where(naming))
    count_evidence(tx)
    return drop_unused_originals(tx)
