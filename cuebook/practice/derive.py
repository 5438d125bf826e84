"""From the log to changes: the only place where a change is made."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, field

from cuebook.practice.across import derive_across
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
from cuebook.practice.transfers import derive_transfers
from cuebook.practice.visit_sets import MetricView, list_recipes
from cuebook.practice.within import derive_during, derive_immediate, find_confused

OTHERS_MANY = "many_other_cues"
DO_NOT_USE = "session_not_to_be_used"
_DEPTH = {"no_before": 0, "no_clean_between": 0, "session_began_with_cue": 0}


@dataclass
class _Found:
    """What has been derived so far."""

    uses: list[UseRecord] = field(default_factory=list)
    changes: list[Change] = field(default_factory=list)
    without: list[NoChange] = field(default_factory=list)
    confused: list[ConfusedPair] = field(default_factory=list)
    left_out: Counter[str] = field(default_factory=Counter)
    harms: HarmCounter = field(default_factory=HarmCounter)


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
    view = MetricView(metric, scale, drop_first)
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
        _derive_learner(visits, view, found)
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


def _derive_learner(visits: dict[TaskKey, list[Visit]], view: MetricView, found: _Found) -> None:
    for task in sorted(visits):
        of_task = visits[task]
        recipes = list_recipes([visit for other in visits.values() for visit in other], view.metric)
        for index, visit in enumerate(of_task):
            found.left_out["cue_not_known"] += sum(
                step.kind == UNKNOWN and step.block.phase == ACQUISITION for step in visit.steps
            )
            for recipe in recipes:
                found.confused.extend(find_confused(visit, view, recipe))
            answers = [_answer_visit(visits, of_task, index, view, recipe) for recipe in recipes]
            for use in visit.uses:
                found.uses.append(use.record)
                found.harms.count_use(use)
                for contrast in CONTRASTS:
                    _settle(
                        [answer[use.record.use, contrast] for answer in answers],
                        use.record,
                        contrast,
                        visit,
                        found,
                    )


_Answers = dict[tuple[str, str], Change | NoChange]


def _answer_visit(
    visits: dict[TaskKey, list[Visit]],
    of_task: Sequence[Visit],
    index: int,
    view: MetricView,
    recipe: str,
) -> _Answers:
    """Return for each use and contrast of a visit its change or its reason, for one recipe."""
    visit = of_task[index]
    answers: _Answers = {}
    across = derive_across(of_task, index, view, recipe)
    for place, use in enumerate(visit.uses):
        name = use.record.use
        answers[name, "during"] = derive_during(visit, use, view, recipe)
        answers[name, "immediate"] = derive_immediate(visit, use, view, recipe)
        for contrast, answer in derive_transfers(visits, visit, use, view, recipe).items():
            answers[name, contrast] = answer
        for contrast, listed in across.items():
            answers[name, contrast] = listed[place]
    return answers


def _settle(
    answers: list[Change | NoChange],
    record: UseRecord,
    contrast: str,
    visit: Visit,
    found: _Found,
) -> None:
    """Keep the changes of all recipes, or the one reason that got furthest."""
    if visit.session.do_not_use:
        found.without.append(NoChange(record, contrast, DO_NOT_USE))
        return
    if record.others == "many":
        found.without.append(NoChange(record, contrast, OTHERS_MANY))
        return
    changes = [answer for answer in answers if isinstance(answer, Change)]
    if changes:
        found.changes.extend(changes)
        return
    reasons = [answer for answer in answers if isinstance(answer, NoChange)]
    found.without.append(max(reasons, key=lambda answer: _DEPTH.get(answer.reason, 1)))
