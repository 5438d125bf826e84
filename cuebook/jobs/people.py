"""Learners and groups: add, show, list; consents and holds."""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import Path

from cuebook.errors import InputError, UsageError
from cuebook.store.places import has_library
from cuebook.store.reading.connection import open_for_reading
from cuebook.store.reading.people import (
    read_consents,
    read_group_lines,
    read_learner_lines,
    read_person,
)
from cuebook.vocabulary import get_age_band, load_vocabulary, require_slug

Location = str | Path | None

_CODE = re.compile(r"[a-z0-9]+(-[a-z0-9]+)*")
MAX_CODE = 40


@dataclass(frozen=True, slots=True)
class NewLearner:
    """A learner as they are added."""

    code: str | None = None
    """None: the program makes one of two plain words."""
    age_years: int | None = None
    """Only the band is kept."""
    age_band: str | None = None
    experience: str | None = None
    backgrounds: tuple[str, ...] = ()
    access_needs: tuple[str, ...] = ()
    language: str = "en"


@dataclass(frozen=True, slots=True)
class PersonLine:
    """A learner or a group in a pick list."""

    code: str
    is_group: bool
    label: str
    note: str


@dataclass(frozen=True, slots=True)
class LearnerPage:
    """What is known of one learner, as lines."""

    code: str
    age_band: str | None
    experience: str | None
    backgrounds: tuple[str, ...]
    access_needs: tuple[str, ...]
    holds: tuple[str, ...]
    notes: tuple[str, ...]
    consents: dict[str, str]
    lines: tuple[str, ...]


def check_code(code: str) -> str:
    """Return a code if it is plain.

    Raises
    ------
    UsageError : anything but small letters, digits and single hyphens.
    """
    if len(code) > MAX_CODE or not _CODE.fullmatch(code):
        raise UsageError(
            f"'{code}' is no code.",
            "Use small letters, digits and hyphens, such as heron-lamp; never a name or initials.",
        )
    return code


def add_learner(location: Location, new: NewLearner) -> str:
    """Add a learner; return the code."""
    band = new.age_band
    if new.age_years is not None:
        found = get_age_band(new.age_years)
        if found is None:
            raise InputError(f"No age band holds {new.age_years} years.", "Ages start at 3.")
        if band not in {None, found.slug}:
            raise UsageError(f"{new.age_years} years are not in the band {band}.", "Give one.")
        band = found.slug
    for list_name, slugs in (
        ("age_band", (band,)),
        ("experience", (new.experience,)),
        ("background", new.backgrounds),
        ("access_need", new.access_needs),
    ):
        for slug in slugs:
            if slug is not None:
                require_slug(list_name, slug)
    if new.code is not None:
        check_code(new.code)
    from cuebook.store.opening import open_library  # noqa: PLC0415
    from cuebook.store.stamps import make_stamp  # noqa: PLC0415
    from cuebook.store.writing import people  # noqa: PLC0415

    with open_library(location) as library, library.transaction() as tx:
        code = new.code or people.make_code(tx)
        people.add_learner(
            tx,
            make_stamp(),
            code,
            age_band=band,
            experience=new.experience,
            language=new.language,
            backgrounds=new.backgrounds,
            access_needs=new.access_needs,
        )
    return code


def set_consent(
    location: Location,
    code: str,
    item: str,
    answer: str,
    *,
    given_by: str = "self",
    how: str = "spoken",
    assent: str | None = None,
) -> None:
    """Note an answer to a consent item; a child's needs the child's own assent as well."""
    require_slug("consent_item", item)
    require_slug("consent_answer", answer)
    require_slug("consent_giver", given_by)
    require_slug("consent_how", how)
    if assent is None:
        assent = "not_asked" if given_by == "parent_guardian" else "not_applicable"
    require_slug("assent", assent)
    from cuebook.store.opening import open_library  # noqa: PLC0415
    from cuebook.store.stamps import make_stamp  # noqa: PLC0415
    from cuebook.store.writing import people  # noqa: PLC0415

    with open_library(location, create=False) as library, library.transaction() as tx:
        learner = people.get_learner(tx, code)
        people.add_consent(
            tx, make_stamp(), learner.id, item, answer, given_by=given_by, how=how, assent=assent
        )


def add_hold(
    location: Location, code: str, tasks: tuple[str, ...], *, until: str, by_role: str
) -> None:
    """Put a learner on hold for tasks."""
    for task in tasks:
        require_slug("task", task)
    from cuebook.store.opening import open_library  # noqa: PLC0415
    from cuebook.store.stamps import make_stamp  # noqa: PLC0415
    from cuebook.store.writing import people  # noqa: PLC0415

    with open_library(location, create=False) as library, library.transaction() as tx:
        learner = people.get_learner(tx, code)
        people.add_holds(tx, make_stamp(), learner.id, tasks, until=until, by_role=by_role)


def clear_hold(location: Location, code: str, task: str, *, cleared_by: str) -> None:
    """Note who cleared a hold; Cuebook itself clears nobody."""
    require_slug("task", task)
    from cuebook.store.opening import open_library  # noqa: PLC0415
    from cuebook.store.stamps import make_stamp  # noqa: PLC0415
    from cuebook.store.writing import people  # noqa: PLC0415

    with open_library(location, create=False) as library, library.transaction() as tx:
        learner = people.get_learner(tx, code)
        if not people.clear_hold(tx, make_stamp(), learner.id, task, cleared_by=cleared_by):
            raise InputError(f"{code} is not on hold for {task}.", "See: cuebook learner show.")


def add_group(location: Location, code: str, members: tuple[str, ...]) -> tuple[str, ...]:
    """Add a group, or members to one; return the codes of all its members."""
    check_code(code)
    from cuebook.store.opening import open_library  # noqa: PLC0415
    from cuebook.store.stamps import make_stamp  # noqa: PLC0415
    from cuebook.store.writing import people  # noqa: PLC0415

    stamp = make_stamp()
    with open_library(location) as library, library.transaction() as tx:
        group_id = people.add_group(tx, stamp, code)
        for member in members:
            learner = people.get_learner(tx, member)
            people.add_member(tx, group_id, learner.id, stamp.occurred_at)
        return tuple(learner.code for learner in people.list_members(tx, group_id))


def erase_learner(location: Location, code: str, *, confirmed: bool) -> None:
    """Erase a learner with everything recorded; the originals nobody else uses go, too."""
    if not confirmed:
        raise UsageError(
            f"Erasing {code} deletes sessions, recordings and notes, and cannot be undone.",
            "Add --yes to do it.",
        )
    from cuebook.store.opening import open_library  # noqa: PLC0415
    from cuebook.store.originals import drop_original_files  # noqa: PLC0415
    from cuebook.store.writing import people  # noqa: PLC0415

    with open_library(location, create=False) as library:
        with library.transaction() as tx:
            unused = people.erase_learner(tx, people.get_learner(tx, code).id)
        drop_original_files(library.originals, unused)
        library.scrub()


def list_learners(location: Location) -> tuple[PersonLine, ...]:
    """Return all learners with what stands out about each."""
    if not has_library(location):
        return ()
    vocabulary = load_vocabulary()
    with open_for_reading(location) as connection:
        lines = read_learner_lines(connection)
    listed = []
    for line in lines:
        parts = [line.age_band or "age not noted"]
        parts.append(f"{line.n_sessions} session{'' if line.n_sessions == 1 else 's'}")
        if line.held_tasks:
            held = ", ".join(vocabulary.label("task", task) for task in line.held_tasks)
            parts.insert(0, f"on hold: {held}")
        if not line.may_be_ranked:
            parts.append("not in rankings")
        listed.append(PersonLine(line.code, is_group=False, label="", note=", ".join(parts)))
    return tuple(listed)


def list_groups(location: Location) -> tuple[PersonLine, ...]:
    """Return all groups with their members."""
    if not has_library(location):
        return ()
    with open_for_reading(location) as connection:
        lines = read_group_lines(connection)
    return tuple(
        PersonLine(
            line.code,
            is_group=True,
            label=line.label,
            note=f"{len(line.members)}: {', '.join(line.members)}" if line.members else "empty",
        )
        for line in lines
    )


def list_people(location: Location) -> tuple[PersonLine, ...]:
    """Return groups, then learners: who can be picked."""
    return (*list_groups(location), *list_learners(location))


def list_members(location: Location, group: str) -> tuple[str, ...]:
    """Return the codes of a group's present members."""
    from cuebook.store.reading.people import require_group_key  # noqa: PLC0415

    with open_for_reading(location) as connection:
        require_group_key(connection, group)
        lines = read_group_lines(connection)
    return next(line.members for line in lines if line.code == group)


def show_learner(location: Location, code: str) -> LearnerPage:
    """Return what is known of one learner: what must be heeded comes first."""
    vocabulary = load_vocabulary()
    with open_for_reading(location) as connection:
        person = read_person(connection, code)
        consents = {line.item: line.answer for line in read_consents(connection, code)}
    holds = tuple(
        f"{vocabulary.label('task', hold.tasks[0])}: {hold.line}" for hold in person.holds
    )
    notes = tuple(note.line for note in person.notes)
    lines = [code]
    lines += [f"On hold: {hold}" for hold in holds]
    lines += [f"Take care: {note}" for note in notes]
    lines.append(f"Age band: {person.age_band or 'not noted'}")
    lines.append(f"Experience: {person.experience or 'not noted'}")
    for title, list_name, slugs in (
        ("Knows", "background", person.backgrounds),
        ("Needs", "access_need", person.access_needs),
    ):
        if slugs:
            words = ", ".join(vocabulary.label(list_name, slug) for slug in slugs)
            lines.append(f"{title}: {words}")
    if person.declined:
        lines.append(f"Not to be offered again: {', '.join(sorted(person.declined))}")
    for item in vocabulary.slugs("consent_item"):
        answer = consents.get(item, "not_asked")
        lines.append(
            f"Consent, {vocabulary.label('consent_item', item).lower()}: "
            f"{vocabulary.label('consent_answer', answer)}"
        )
    return LearnerPage(
        code,
        person.age_band,
        person.experience,
        person.backgrounds,
        person.access_needs,
        holds,
        notes,
        consents,
        tuple(lines),
    )
