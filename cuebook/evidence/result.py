"""What a ranking says, as frozen values. Light: loads no numpy.

Effects are oriented (plus is better) and on the transformed scale, unless a name says display.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from cuebook.evidence.question import ReviewQuestion
from cuebook.practice.changes import HarmTally


@dataclass(frozen=True, slots=True)
class Interval:
    """An effect with its central 80 % and 95 % intervals."""

    effect: float
    low80: float
    high80: float
    low95: float
    high95: float


@dataclass(frozen=True, slots=True)
class Worthwhile:
    """The smallest difference that would matter."""

    value: float
    source: str
    """teacher, registry, or default."""
    note: str


@dataclass(frozen=True, slots=True)
class DetectableChange:
    """The change one learner must show before it is more than noise (MDC95)."""

    value: float
    attempts_before: int
    attempts_after: int
    freedom: float
    """Degrees of freedom of the noise; infinity where it is known well."""
    occasion: str
    """same session or between days."""
    low_display: float
    high_display: float
    """The change at either bound on the metric's own scale (per cent for a log metric)."""


@dataclass(frozen=True, slots=True)
class WatchLine:
    """What happened to a second metric with one cue."""

    metric: str
    p_worse: float
    """Probability that the effect on it is worse than its own worthwhile difference."""
    worthwhile: float
    effect: float
    trade_off: bool
    """True: probably better in the ranked metric and perhaps worse in this one."""


@dataclass(frozen=True, slots=True)
class CueResult:
    """One cue of a ranking."""

    cue: str
    kind: str | None
    uses: int
    """Uses with a change; a group event counts once."""
    learners: int
    interval: Interval
    sd: float
    """Posterior SD with the bias allowance."""
    p_better: float
    p_worthwhile: float
    p_worse: float
    """Probability of a harm beyond the worthwhile difference."""
    p_no_difference: float
    """Probability that the effect lies within the worthwhile difference of 0."""
    p_next_learner: float | None
    """None: no detectable change is known, or no reference."""
    part: int
    """Which connected part of the uses the cue belongs to, from 0; ranks hold within a part."""
    rank: int | None
    expected_rank: float | None
    rank_low90: int | None
    rank_high90: int | None
    p_best: float | None
    expected_loss: float | None
    """These six are None for a cue met by one learner, or too far down a very long list."""
    verdict: str
    """Slug of the first rule that applies."""
    verdict_beside: str | None
    """What the effect alone would say, where the verdict is stop_and_look; else None."""
    sign: str
    words: str
    missing: tuple[str, ...]
    """What would have to be added before more can be said."""
    verdict_if_missing_bad: str | None
    """What the verdict would be had all unmeasured uses gone badly; None: no different."""
    grade: str
    """A, B or C."""
    grade_words: str
    grade_reasons: tuple[str, ...]
    going_badly: float | None
    """Share of uses in which the cue was chosen because things went badly; None: not known."""
    more_uses: int | None
    """Further uses until it can be told; 0: told already; None: see the note."""
    more_uses_note: str
    met: int
    stopped: int
    no_after: int
    harms: HarmTally
    """Over all uses of the cue, measured or not."""
    watch: tuple[WatchLine, ...]
    marks: tuple[str, ...]
    """Among one_learner_only, rank_not_known, no_clear_best, in_tie_band."""


@dataclass(frozen=True, slots=True)
class Ranking:
    """The answer to one question."""

    question: ReviewQuestion
    n_uses: int
    """Uses with a change, practice alone included."""
    n_learners: int
    method: str
    reference: str
    """practice_alone or mean_of_cues."""
    practice_alone: Interval | None
    """The change without a cue; None where it cannot be a reference."""
    worthwhile: Worthwhile
    detectable: DetectableChange | None
    """None: refused, with the reason in ``refused``."""
    cues: tuple[CueResult, ...]
    """Best first; cues met by one learner last."""
    variances: Mapping[str, float]
    """Posterior means of residual, cue, learner, cue_by_learner and event, as far as present."""
    regression_slope: float | None
    """Fitted slope of the before-value; None: no such column."""
    bias: float
    """SD of the bias allowance of a cue that was never given in random order."""
    tie_band: tuple[str, ...]
    """Cues that may well be as good as the first."""
    mean_before: float | None
    """Mean oriented before-value, which effects of logit and sqrt metrics are shown at."""
    counts: Mapping[str, int]
    notes: tuple[str, ...]
    refused: tuple[str, ...]
    refused_rows: tuple[Mapping[str, object], ...] = field(default=())
    """Rows of a table that could not be used, with the reason."""
