"""Connected parts of the graph of cues and learners: only within one can cues be compared."""

from __future__ import annotations

from collections.abc import Iterable


def find_parts(uses: Iterable[tuple[str | None, str]]) -> dict[str, int]:
    """Return the part of each cue, numbered from 0, the one with most uses first.

    Parameters
    ----------
    uses : cue and learner of every use; None is practice alone, which links the learners who had
        it, since each of their cues is compared with the same condition.
    """
    root: dict[tuple[str, str | None], tuple[str, str | None]] = {}

    def find(node: tuple[str, str | None]) -> tuple[str, str | None]:
        root.setdefault(node, node)
        while root[node] != node:
            root[node] = root[root[node]]
            node = root[node]
        return node

    listed = list(uses)
    for cue, learner in listed:
        root[find(("cue", cue))] = find(("learner", learner))
    size: dict[tuple[str, str | None], int] = {}
    first: dict[tuple[str, str | None], str] = {}
    for cue, learner in listed:
        top = find(("learner", learner))
        size[top] = size.get(top, 0) + 1
        if cue is not None:
            first[top] = min(first.get(top, cue), cue)
    order = sorted(first, key=lambda top: (-size[top], first[top]))
    number = {top: at for at, top in enumerate(order)}
    return {cue: number[find(("cue", cue))] for cue, _ in listed if cue is not None}
