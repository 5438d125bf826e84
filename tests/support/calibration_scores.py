"""How well rankings of simulated libraries tell the truth, beside what raw means would say."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields

import numpy as np
from scipy.special import stdtr, stdtrit
from support.simulated_libraries import Library

from cuebook.evidence.preparation import prepare_uses
from cuebook.evidence.question import ReviewQuestion
from cuebook.evidence.ranking import rank_cues
from cuebook.evidence.result import Ranking


@dataclass(frozen=True, slots=True)
class LibraryScore:
    """Sums over the cues of one library; a method is scored by adding libraries up."""

    cues: int
    covered95: int
    covered80: int
    squared_error: float
    top_regret: float
    """Best true effect minus that of the cue on top."""
    top_covered: int
    sure: int
    """Cues with P(better) >= .95, or a significant raw mean."""
    sure_false: int
    """Of those, cues whose true effect is 0 or less."""
    helps: int
    helps_false: int
    helps_small: int
    """Of the cues called 'helps', those whose true effect is below the worthwhile difference."""
    worthwhile: int
    """Cues whose true effect is above it."""
    worthwhile_found: int


def score_ranking(ranking: Ranking, library: Library) -> LibraryScore:
    """Score the shown numbers and words."""
    lines = ranking.cues
    truth = np.array([library.truth[line.cue] for line in lines])
    effect = np.array([line.interval.effect for line in lines])
    low95 = np.array([line.interval.low95 for line in lines])
    high95 = np.array([line.interval.high95 for line in lines])
    low80 = np.array([line.interval.low80 for line in lines])
    high80 = np.array([line.interval.high80 for line in lines])
    helps = np.array([line.verdict == "helps" for line in lines])
    sure = np.array([line.p_better >= 0.95 for line in lines])
    margin = ranking.worthwhile.value
    top = int(np.argmax(effect))
    return LibraryScore(
        cues=len(lines),
        covered95=int(((low95 <= truth) & (truth <= high95)).sum()),
        covered80=int(((low80 <= truth) & (truth <= high80)).sum()),
        squared_error=float(((effect - truth) ** 2).sum()),
        top_regret=float(truth.max() - truth[top]),
        top_covered=int(low95[top] <= truth[top] <= high95[top]),
        sure=int(sure.sum()),
        sure_false=int((sure & (truth <= 0)).sum()),
        helps=int(helps.sum()),
        helps_false=int((helps & (truth <= 0)).sum()),
        helps_small=int((helps & (truth < margin)).sum()),
        worthwhile=int((truth > margin).sum()),
        worthwhile_found=int((helps & (truth > margin)).sum()),
    )


def score_naively(library: Library) -> LibraryScore:
    """Score raw means: claim by a one-sided t test, interval of the mean over practice alone."""
    of_cue: dict[str, list[float]] = {}
    practice = []
    for change in library.changes:
        if change.use.cue is None:
            practice.append(change.difference)
        else:
            of_cue.setdefault(change.use.cue, []).append(change.difference)
    names = [cue for cue, values in sorted(of_cue.items()) if len(values) >= 2]
    truth = np.array([library.truth[cue] for cue in names])
    mean = np.array([np.mean(of_cue[cue]) for cue in names])
    n = np.array([len(of_cue[cue]) for cue in names])
    se = np.array([np.std(of_cue[cue], ddof=1) for cue in names]) / np.sqrt(n)
    effect = mean - np.mean(practice)
    sure = stdtr(n - 1, mean / se) > 0.95
    width95, width80 = stdtrit(n - 1, 0.975) * se, stdtrit(n - 1, 0.9) * se
    top = int(np.argmax(mean))
    return LibraryScore(
        cues=len(names),
        covered95=int((np.abs(effect - truth) <= width95).sum()),
        covered80=int((np.abs(effect - truth) <= width80).sum()),
        squared_error=float(((effect - truth) ** 2).sum()),
        top_regret=float(truth.max() - truth[top]),
        top_covered=int(abs(effect[top] - truth[top]) <= width95[top]),
        sure=int(sure.sum()),
        sure_false=int((sure & (truth <= 0)).sum()),
        helps=0,
        helps_false=0,
        helps_small=0,
        worthwhile=0,
        worthwhile_found=0,
    )


def rank_library(library: Library, allowance: float, contrast: str = "immediate") -> Ranking:
    """Prepare and rank one library."""
    prepared = prepare_uses(library.changes, contrast=contrast, kinds=library.kinds)
    question = ReviewQuestion(metric="simulated", contrast=contrast, allowance=allowance)
    return rank_cues(prepared, question)


def add_up(scores: Sequence[LibraryScore]) -> LibraryScore:
    """Add the sums of several libraries."""
    return LibraryScore(
        **{part.name: sum(getattr(s, part.name) for s in scores) for part in fields(LibraryScore)}
    )
