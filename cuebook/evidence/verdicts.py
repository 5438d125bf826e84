"""The one word beside a cue: fixed rules, the first that applies."""

from __future__ import annotations

from dataclasses import dataclass

from cuebook.evidence.grades import LEARNERS_NEEDED, USES_NEEDED
from cuebook.evidence.result import WatchLine

HARM_SURE = 0.80
HELP_SURE = 0.90
TRADE_SURE = 0.80
PROMISING_WORTHWHILE = 0.60
PROMISING_BETTER = 0.80
SAME_SURE = 0.90
WATCH_WORSE = 0.30
SIGNS = {
    "stop_and_look": "!",
    "seems_worse": "--",
    "may_be_worse": "-",
    "traded": "+/-",
    "helps": "++",
    "promising": "+",
    "no_worthwhile_difference": "=",
    "cannot_tell": "?",
    "one_learner_only": "?",
}
_WORDS = {
    "stop_and_look": "stop and look",
    "seems_worse": "seems worse",
    "may_be_worse": "may be worse",
    "promising": "promising",
    "no_worthwhile_difference": "no difference that matters",
    "cannot_tell": "cannot tell yet",
    "one_learner_only": "one learner only",
}
WORSE = frozenset({"seems_worse", "may_be_worse"})


@dataclass(frozen=True, slots=True, kw_only=True)
class VerdictInput:
    """What the rules look at; every probability holds the bias allowance."""

    learners: int
    uses: int
    has_reference: bool
    """True: the effect is over practice alone, and may be shown as such."""
    grade: str
    p_better: float
    p_worthwhile: float
    p_worse: float
    p_no_difference: float
    watch: tuple[WatchLine, ...] = ()
    must_look: bool = False
    misses_after: bool = False
    """Far more uses than of practice alone have no after-measure."""

    @property
    def is_eligible(self) -> bool:
        """Enough learners and uses, and a reference, for the strong words."""
        enough = self.learners >= LEARNERS_NEEDED and self.uses >= USES_NEEDED
        return enough and self.has_reference


@dataclass(frozen=True, slots=True)
class Verdict:
    """A slug and, where that is stop_and_look, what stands beside it."""

    slug: str
    beside: str | None = None


def decide_verdict(given: VerdictInput) -> Verdict:
    """Return the first rule that applies."""
    from_effect = _judge_effect(given)
    if not given.must_look:
        return Verdict(from_effect)
    blocked = from_effect in {"helps", "promising"}
    return Verdict("stop_and_look", "cannot_tell" if blocked else from_effect)


def soften_verdict(main: Verdict, if_missing_bad: Verdict) -> Verdict:
    """Return what may be said when the unmeasured uses could overturn it.

    A word of harm stays: what is missing can only have made it worse.
    """
    main_word, other_word = main.beside or main.slug, if_missing_bad.beside or if_missing_bad.slug
    if main_word == other_word or main_word in WORSE:
        return main
    if main.slug == "stop_and_look":
        return Verdict("stop_and_look", "cannot_tell")
    return Verdict("cannot_tell")


def choose_words(slug: str, grade: str, gained: str, watch: tuple[WatchLine, ...]) -> str:
    """Return the words of a verdict; causal ones only after random order."""
    if slug == "helps":
        return "helps" if grade == "A" else "went with better results"
    if slug == "traded":
        lost = ", ".join(line.metric for line in watch if line.p_worse >= WATCH_WORSE)
        return f"gained {gained}, lost {lost}"
    return _WORDS[slug]


def list_missing(given: VerdictInput, practice_needed: str) -> tuple[str, ...]:
    """Return what would have to be added before the strong words are open."""
    missing = []
    if given.uses < USES_NEEDED:
        missing.append(f"{USES_NEEDED - given.uses} more uses with a change")
    if given.learners < LEARNERS_NEEDED:
        missing.append(f"{LEARNERS_NEEDED - given.learners} more learners")
    if not given.has_reference:
        missing.append(practice_needed)
    if given.grade != "A":
        missing.append("random order")
    return tuple(missing)


def _judge_effect(given: VerdictInput) -> str:
    if given.learners < 2:
        return "one_learner_only"
    if given.is_eligible and given.p_worse >= HARM_SURE:
        return "seems_worse"
    if 1 - given.p_better >= HARM_SURE:
        return "may_be_worse"
    watch_worse = any(line.p_worse >= WATCH_WORSE for line in given.watch)
    if given.p_worthwhile >= TRADE_SURE and watch_worse:
        return "traded"
    return "cannot_tell" if given.misses_after else _judge_gain(given, watch_worse=watch_worse)


def _judge_gain(given: VerdictInput, *, watch_worse: bool) -> str:
    graded = given.grade in {"A", "B"}
    if given.is_eligible and graded and given.p_worthwhile >= HELP_SURE and not watch_worse:
        return "helps"
    if given.p_worthwhile >= PROMISING_WORTHWHILE and given.p_better >= PROMISING_BETTER:
        return "promising"
    if given.is_eligible and given.p_no_difference >= SAME_SURE:
        return "no_worthwhile_difference"
    return "cannot_tell"
