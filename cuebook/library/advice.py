"""What to add to a problem that found no cue."""

from __future__ import annotations

from cuebook.library.lookup import Request
from cuebook.library.person import Group, Person, list_people
from cuebook.library.understand import Understanding
from cuebook.vocabulary import load_vocabulary

_SAY_WHAT = "Say what goes wrong (too small, late, uneven, heavy, stiff, off to one side)"


def advise(
    understanding: Understanding, who: Person | Group | None = None, request: Request | None = None
) -> str:
    """Return one line on why nothing was found and what would help."""
    request = request or Request()
    vocabulary = load_vocabulary()
    tasks = [request.task] if request.task else [task.slug for task in understanding.tasks[:1]]
    for task in tasks:
        people = list_people(who)
        holds = [hold for person in people if (hold := person.find_hold(task)) is not None]
        if people and len(holds) == len(people):
            return f"{_start(vocabulary.label('task', task))} is {holds[0].line}. No cue is shown."
    if understanding.is_empty:
        return f"Nothing in it was understood. {_SAY_WHAT}, of which body part, in which task."
    if not understanding.features:
        named = [*understanding.tasks[:1], *understanding.regions[:1]]
        seen = " and ".join(item.slug.replace("_", " ") for item in named)
        return f"Understood: {seen}. {_SAY_WHAT}."
    feature = vocabulary.label("feature", understanding.features[0].slug).lower()
    if not tasks:
        return f"Understood: {feature}. Say in which task (walking, reaching, rowing ...)."
    task_label = vocabulary.label("task", tasks[0])
    kind = f" of the kind {request.kind.replace('_', ' ')}" if request.kind else ""
    return (
        f"No cue{kind} for {feature} in {task_label} that fits. "
        "Put it in other words, or add a cue of your own."
    )


def _start(text: str) -> str:
    return text[:1].upper() + text[1:]
