"""The part of the application that asks for whom and for which task, and adds people."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from pathlib import Path
from textwrap import shorten
from typing import Any

from textual.app import App

from cuebook.errors import CuebookError
from cuebook.jobs.people import PersonLine
from cuebook.tui.boxes import ConsentBox, ReadBox
from cuebook.tui.group_box import GroupBox, NewGroup
from cuebook.tui.messages import ConsentNoted, PeopleRead, PersonAdded, WorkFailed
from cuebook.tui.pick_box import Choice, PickBox
from cuebook.tui.ports import LibraryJobs
from cuebook.tui.state import Shared
from cuebook.tui.workers import StoreLine, attempt
from cuebook.vocabulary import load_vocabulary

SIDES = (None, "left", "right", "both")
ROW_WIDTH = 50
NEW_LEARNER, NEW_GROUP = "f7", "f9"


class PeopleApp(App[None]):
    """Asks for whom; the screens below get the answer as one snapshot."""

    def __init__(self, location: str | Path | None = None, jobs: LibraryJobs | None = None) -> None:
        super().__init__()
        self.jobs = LibraryJobs(location) if jobs is None else jobs
        self.store = StoreLine(self.jobs)
        self.shared = Shared()

    def share(self, shared: Shared) -> None:
        """Replace the shared snapshot and hand it to the screen."""
        raise NotImplementedError

    def tell(self, words: str) -> None:
        """Say something in the status line of the screen."""
        raise NotImplementedError

    def action_pick_who(self) -> None:
        """Ask for whom, once it is known who there is."""
        if not self.screen.is_modal:
            self.ask_who()

    def ask_who(self, then: Callable[[], None] | None = None) -> None:
        """Ask for whom; go on with something once somebody is picked."""
        self._run(lambda: PeopleRead(self.jobs.list_people(), then), "people")

    def on_people_read(self, message: PeopleRead) -> None:
        """Show who can be picked."""
        people = {one.code: one for one in message.people}
        extras = {NEW_LEARNER: "adds a learner", NEW_GROUP: "adds a group"}

        def take(picked: str | None) -> None:
            if picked == NEW_LEARNER:
                self._store(self.jobs.add_learner)
            elif picked == NEW_GROUP:
                learners = [one.code for one in message.people if not one.is_group]
                self.push_screen(GroupBox(learners), self._add_group)
            elif picked is not None:
                self._take_who(people[picked])
                if message.then is not None:
                    message.then()

        if not self.screen.is_modal:
            self.push_screen(PickBox("For whom?", list_choices(message.people), extras), take)

    def _add_group(self, new: NewGroup | None) -> None:
        if new is not None:
            self._store(lambda: self.jobs.add_group(new.code, new.members, new.n_new))

    def on_person_added(self, message: PersonAdded) -> None:
        """Take up who is new; ask a learner once whether results may be ranked."""
        person = message.person
        self._take_who(person)
        if person.is_group:
            self.tell(
                f"{person.code}: {person.note}. New learners are not asked about ranking yet."
            )
            return
        self.push_screen(ConsentBox(person.code), lambda answer: self._keep(person.code, answer))

    def _keep(self, code: str, answer: tuple[str, str, str] | None) -> None:
        if answer is None:
            self.tell(f"{code} is added; not asked about ranking, which counts as no.")
            return
        given, given_by, assent = answer

        def job() -> ConsentNoted:
            self.jobs.set_consent(code, given, given_by, assent)
            return ConsentNoted(code, given)

        self._run(job, "consent")

    def on_consent_noted(self, message: ConsentNoted) -> None:
        """Say that the answer is on disk."""
        self.tell(f"Stored: {message.code}, results may be ranked: {message.answer}.")

    def action_pick_task(self) -> None:
        """Ask for the task."""
        if not self.screen.is_modal:
            self.ask_task()

    def ask_task(self, then: Callable[[], None] | None = None) -> None:
        """Ask for the task; go on with something once one is picked."""
        any_task = [Choice("", "any task", is_plain=True)]
        tasks = [Choice(t.slug, t.label, is_plain=True) for t in load_vocabulary().tasks]

        def take(task: str | None) -> None:
            if task is not None:
                picked = replace(self.shared, task=task or None, task_was_picked=bool(task))
                self.share(picked)
                if task and then is not None:
                    then()

        self.push_screen(PickBox("Which task?", [*any_task, *tasks]), take)

    def action_turn_side(self) -> None:
        """Change the side: not said, left, right, both."""
        if not self.screen.is_modal:
            at = SIDES.index(self.shared.side)
            self.share(replace(self.shared, side=SIDES[(at + 1) % len(SIDES)]))

    def show_error(self, error: CuebookError) -> None:
        """Show what went wrong in a box that scrolls."""
        self.push_screen(ReadBox("This did not work", (error.message, error.hint)))

    def on_work_failed(self, message: WorkFailed) -> None:
        """Say what could not be done."""
        self.show_error(message.error)

    def _take_who(self, who: PersonLine) -> None:
        self.share(replace(self.shared, who=who))

    def _store(self, add: Callable[[], PersonLine]) -> None:
        self.tell("Storing …")
        self._run(lambda: PersonAdded(add()), "add")

    def _run(self, job: Callable[[], Any], group: str) -> None:
        """Run a job in a thread; what it posts arrives here."""
        self.run_worker(
            lambda: attempt(job, self.post_message),
            thread=True,
            group=group,
            exit_on_error=False,
        )


def list_choices(people: Sequence[PersonLine]) -> list[Choice]:
    """Return the rows of a pick list, each short enough for one line."""
    choices = []
    for one in people:
        words = f"{'group, ' if one.is_group else ''}{one.note}"
        room = max(ROW_WIDTH - len(one.code), 12)
        cut = shorten(words, room, placeholder=" …", break_on_hyphens=False)
        choices.append(Choice(one.code, cut))
    return choices
