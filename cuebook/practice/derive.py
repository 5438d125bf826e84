"""From the log to changes: the only place where a change is made."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, field, replace

from cuebook.practice.across import OTHERS_MANY, derive_across
from cuebook.practice.changes import (
    CONTRASTS,
    Change,
    ConfusedPair,
    Derived,
    NoChange,
    UseRecord,
)
from cuebook.practice.harms import HarmCounter
from cuebook.practice.log import ACQUISITION, PracticeLog
from cuebook.practice.scales import AttemptScale
from cuebook.practice.timeline import UNKNOWN, TaskKey, Visit, build_visits
from cuebook.practice.transfers import Moment, derive_transfers, list_moments
from cuebook.practice.visit_sets import MetricView, list_recipes
from cuebook.practice.within import derive_during, derive_immediate, find_confused

DO_NOT_USE = "session_not_to_be_used"
_OF_ONE_USE = ("during", "immediate", "transfer", "transfer_later")


@dataclass
class _Found:
    """What has been derived so far."""

    uses: list[UseRecord] = field(default_factory=list)
    changes: list[Change] = field(default_factory=list)
    without: list[NoChange] = field(default_factory=list)
    confused: list[ConfusedPair] = field(default_factory=list)
    left_out: Counter[str] = field(default_factory=Counter)
    harms: HarmCounter = field(default_factory=HarmCounter)

    def settle(self, answers: Sequence[Change | NoChange]) -> None:
        """Keep the changes of all recipes, or the one reason that got furthest."""
        changes = [answer for answer in answers if isinstance(answer, Change)]
        reasons = [answer for answer in answers if isinstance(answer, NoChange)]
        if changes:
            self.changes.extend(changes)
        else:
            self.without.append(max(reasons, key=lambda answer: answer.before is not None))


@dataclass(frozen=True, slots=True)
class _Views:
    """How the log is looked at."""

    base: MetricView
    """Without a recipe."""
    keeps_many: bool
    """On a learner's own page: uses among many other cues, which no ranking takes, are kept."""


def derive_changes(
    log: PracticeLog,
    metric: str,
    scale: AttemptScale,
    *,
    drop_first: bool = False,
    only_learner: str | None = None,
) -> Derived:
    """Return every change of one metric, and one reason wherever there is none.

    Parameters
    ----------
    log : the log of practice; time order is by session start, then block number.
    metric : id of the metric.
    scale : how its attempts are transformed and oriented.
    drop_first : leave the first attempt of each visit out of sets that keep two values.
    only_learner : derive for this learner's own page, whatever they said about ranking.

    Returns
    -------
    For each use and contrast at least one change or exactly one reason. Learners without a
    current consent for ranking are left out altogether, past uses included, unless the page is
    their own.
    """
    views = _Views(MetricView(metric, scale, drop_first=drop_first), only_learner is not None)
    found = _Found()
    for code in sorted(_list_learners(log)):
        if only_learner not in {None, code}:
            continue
        learner = log.learners.get(code)
        visits = build_visits(log, code)
        if only_learner is None and (learner is None or not learner.may_be_ranked):
            n_uses = sum(len(visit.uses) for of_task in visits.values() for visit in of_task)
            if n_uses:
                found.left_out["no_consent_for_ranking"] += n_uses
            continue
        _derive_learner(visits, views, found)
        found.harms.count_declined(log, code)
    return Derived(
        tuple(found.uses),
        tuple(found.changes),
        tuple(found.without),
        found.harms.tally(),
        tuple(found.confused),
        dict(found.left_out),
    )


def _list_learners(log: PracticeLog) -> set[str]:
    return {
        part.learner
        for session in log.sessions
        for block in session.blocks
        for part in block.participations
    }


def _derive_learner(visits: dict[TaskKey, list[Visit]], views: _Views, found: _Found) -> None:
    moments = list_moments(visits.values())
    recipes = list_recipes([one for listed in visits.values() for one in listed], views.base.metric)
    for task in sorted(visits):
        for index, visit in enumerate(visits[task]):
            unknown = sum(
                step.kind == UNKNOWN and step.block.phase == ACQUISITION for step in visit.steps
            )
            if unknown:
                found.left_out["cue_not_known"] += unknown
            by_recipe = []
            for recipe in recipes:
                view = replace(views.base, recipe=recipe)
                found.confused.extend(find_confused(visit, view))
                across = derive_across(visits[task], index, view, keeps_many=views.keeps_many)
                within = _answer_within(moments, visit, view, keeps_many=views.keeps_many)
                by_recipe.append({**within, **across})
            for use in visit.uses:
                found.uses.append(use.record)
                found.harms.count_use(use)
                for contrast in CONTRASTS:
                    if visit.session.do_not_use:
                        found.without.append(NoChange(use.record, contrast, DO_NOT_USE))
                        continue
                    found.settle([answers[use.record.use, contrast] for answers in by_recipe])


def _answer_within(
    moments: Sequence[Moment], visit: Visit, view: MetricView, *, keeps_many: bool
) -> dict[tuple[str, str], Change | NoChange]:
    """Return the changes and reasons that each use of a visit has on its own."""
    answers: dict[tuple[str, str], Change | NoChange] = {}
    for use in visit.uses:
        record = use.record
        if record.others == "many" and not keeps_many:
            of_use: dict[str, Change | NoChange] = {
                name: NoChange(record, name, OTHERS_MANY) for name in _OF_ONE_USE
            }
        else:
            of_use = {
                "during": derive_during(visit, use, view),
                "immediate": derive_immediate(visit, use, view),
                **derive_transfers(moments, visit, use, view),
            }
        answers.update({(record.use, name): answer for name, answer in of_use.items()})
    return answers
