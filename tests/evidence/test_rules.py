"""The rules that turn numbers into words: verdicts, grades, parts, thresholds, what is needed."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from cuebook.errors import UsageError
from cuebook.evidence.display_scale import convert_effect, name_display_unit
from cuebook.evidence.grades import GradeInput, grade_cue
from cuebook.evidence.harms import count_harms, count_stopped, must_look
from cuebook.evidence.parts import find_parts
from cuebook.evidence.question import ReviewQuestion
from cuebook.evidence.result import WatchLine
from cuebook.evidence.still_needed import count_still_needed
from cuebook.evidence.thresholds import choose_worthwhile, compute_detectable, convert_step
from cuebook.evidence.verdicts import (
    SIGNS,
    Verdict,
    VerdictInput,
    choose_words,
    decide_verdict,
    list_missing,
    soften_verdict,
)
from cuebook.practice.changes import HarmTally

PLAIN = VerdictInput(
    learners=8,
    uses=20,
    has_reference=True,
    grade="B",
    p_better=0.5,
    p_worthwhile=0.2,
    p_worse=0.2,
    p_no_difference=0.6,
)
LOST = WatchLine("path_length_cm", p_worse=0.4, worthwhile=1.0, effect=-2.0, trade_off=True)
GOOD = {"p_better": 0.99, "p_worthwhile": 0.95, "p_worse": 0.0, "p_no_difference": 0.05}


@pytest.mark.parametrize(
    ("changes", "slug"),
    [
        ({}, "cannot_tell"),
        ({"p_worse": 0.8, "p_better": 0.01}, "seems_worse"),
        ({"p_worse": 0.8, "p_better": 0.01, "uses": 9}, "may_be_worse"),
        ({"p_worse": 0.8, "p_better": 0.01, "has_reference": False}, "may_be_worse"),
        ({"p_better": 0.2}, "may_be_worse"),
        ({**GOOD, "watch": (LOST,)}, "traded"),
        (GOOD, "helps"),
        ({**GOOD, "grade": "A"}, "helps"),
        ({**GOOD, "grade": "C"}, "promising"),
        ({**GOOD, "learners": 4}, "promising"),
        ({**GOOD, "has_reference": False}, "promising"),
        ({**GOOD, "p_worthwhile": 0.89}, "promising"),
        ({**GOOD, "p_worthwhile": 0.59}, "cannot_tell"),
        ({"p_no_difference": 0.9}, "no_worthwhile_difference"),
        ({"p_no_difference": 0.9, "uses": 9}, "cannot_tell"),
        ({**GOOD, "learners": 1}, "one_learner_only"),
        ({**GOOD, "misses_after": True}, "cannot_tell"),
        ({"p_better": 0.1, "misses_after": True}, "may_be_worse"),
    ],
)
def test_first_rule_that_applies_wins(changes: dict[str, object], slug: str) -> None:
    """Each line of the table of verdicts is met by a case of its own."""
    assert decide_verdict(replace(PLAIN, **changes)) == Verdict(slug)  # type: ignore[arg-type]


def test_stop_and_look_stands_first_and_blocks_praise() -> None:
    """A harm that must be looked at stands before any word, and no praise stands beside it."""
    praised = replace(PLAIN, **GOOD, must_look=True)  # type: ignore[arg-type]  # one type a field
    assert decide_verdict(praised) == Verdict("stop_and_look", "cannot_tell")
    worse = replace(PLAIN, p_better=0.1, must_look=True)
    assert decide_verdict(worse) == Verdict("stop_and_look", "may_be_worse")


def test_verdict_that_missing_measures_could_overturn_is_taken_back() -> None:
    """Praise that would not survive bad unmeasured uses becomes 'cannot tell'; harm stays."""
    helps, unsure, worse = (Verdict(w) for w in ("helps", "cannot_tell", "may_be_worse"))
    assert soften_verdict(helps, unsure) == unsure
    assert soften_verdict(helps, helps) == helps
    assert soften_verdict(worse, Verdict("seems_worse")) == worse
    looked = Verdict("stop_and_look", "no_worthwhile_difference")
    assert soften_verdict(looked, worse) == Verdict("stop_and_look", "cannot_tell")


def test_causal_word_needs_random_order() -> None:
    """'Helps' is said after random order only; a traded verdict names what was lost."""
    assert choose_words("helps", "A", "sparc", ()) == "helps"
    assert choose_words("helps", "B", "sparc", ()) == "went with better results"
    assert choose_words("traded", "B", "sparc", (LOST,)) == "gained sparc, lost path_length_cm"
    for slug in set(SIGNS) - {"helps", "traded"}:
        assert choose_words(slug, "B", "sparc", ())


def test_what_is_missing_is_named() -> None:
    """A cue that cannot be told says how many uses, learners and plain blocks it needs."""
    few = replace(PLAIN, uses=4, learners=2, has_reference=False)
    assert list_missing(few, "add 6 blocks without a cue") == (
        "6 more uses with a change",
        "3 more learners",
        "add 6 blocks without a cue",
        "random order",
    )


ALL_GOOD = GradeInput(uses=12, learners=6, share_random=1.0, practice_learners=4)


@pytest.mark.parametrize(
    ("changes", "letter", "words"),
    [
        ({}, "A", "random order"),
        ({"practice_learners": 0}, "A", "random order"),
        ({"share_random": 0.9}, "B", "chosen by the teacher"),
        ({"share_random": 0.9, "practice_learners": 2}, "C", "too few"),
        ({"share_deviating": 0.11}, "B", "chosen by the teacher"),
        ({"other_cues_noted": True}, "B", "chosen by the teacher"),
        ({"changed_after_result": True}, "B", "chosen by the teacher"),
        ({"several_cues": True}, "B", "chosen by the teacher"),
        ({"several_cues": True, "share_random": 0.0}, "C", "weak comparison"),
        ({"share_late": 0.51}, "C", "weak comparison"),
        ({"capped_reasons": ("too few repeated visits",)}, "C", "weak comparison"),
        ({"uses": 9}, "C", "too few"),
        ({"learners": 4}, "C", "too few"),
    ],
)
def test_grades_follow_the_rules(changes: dict[str, object], letter: str, words: str) -> None:
    """Each reason lowers the grade as far as it should, and says so."""
    grade = grade_cue(replace(ALL_GOOD, **changes))  # type: ignore[arg-type]  # one type a field
    assert (grade.letter, grade.words) == (letter, words)
    assert bool(grade.reasons) == (letter != "A")


def test_parts_are_joined_by_learners_and_by_practice_alone() -> None:
    """Cues of separate learners are apart, unless both learners had practice alone."""
    apart = [("oar", "l1"), ("oar", "l2"), ("oar", "l2"), ("tide", "l3")]
    assert find_parts(apart) == {"oar": 0, "tide": 1}
    assert find_parts([*apart, (None, "l1"), (None, "l3")]) == {"oar": 0, "tide": 0}
    assert find_parts([*apart, (None, "l1")]) == {"oar": 0, "tide": 1}
    assert find_parts([]) == {}


@pytest.mark.parametrize(
    ("mean", "sd", "bias", "uses"),
    [
        (0.3, 0.25, 0.0, 19),
        (0.2, 0.25, 0.0, 68),
        (0.1, 0.2, 0.0, 320),
        (0.5, 0.2, 0.0, 0),
        (0.3, math.hypot(0.25, 0.15), 0.15, 101),
    ],
)
def test_uses_still_needed_agree_with_the_arithmetic(
    mean: float, sd: float, bias: float, uses: int
) -> None:
    """Five cases worked out by hand at a noise variance of 1.3."""
    assert count_still_needed(mean, sd, 1.3, bias).uses == uses


def test_what_more_uses_cannot_settle_is_said() -> None:
    """An effect within the bias, or far out of reach, gives no number but a reason."""
    assert "random order" in count_still_needed(0.1, 0.3, 1.3, 0.2).note
    assert count_still_needed(0.01, 0.3, 1.3).note == "not reachable with this cue"


LOWER_LOG = ReviewQuestion(metric="movement_time_s", unit="s", better="lower", transform="log")


def test_time_that_falls_from_ten_to_eight_reads_minus_twenty_per_cent() -> None:
    """A better (lower) log metric is shown as a fall in per cent."""
    effect = math.log(10) - math.log(8)
    assert convert_effect(effect, LOWER_LOG, None) == pytest.approx(-20.0)
    assert name_display_unit(LOWER_LOG) == "%"


@given(effect=st.floats(-3, 3), start=st.floats(-3, 3))
def test_display_keeps_the_direction_of_every_scale(effect: float, start: float) -> None:
    """Plus is better: a better change rises where higher is better and falls where lower is."""
    for transform in ("none", "log", "logit", "sqrt"):
        for better, sign in (("higher", 1), ("lower", -1), ("target", -1)):
            question = ReviewQuestion(metric="m", better=better, transform=transform)
            shown = convert_effect(effect, question, start) * sign
            assert shown * effect >= 0


def test_logit_effect_is_shown_in_percentage_points() -> None:
    """From even odds, one logit up is 23.1 percentage points (1 / (1 + 1/e) - 1/2)."""
    question = ReviewQuestion(metric="hits", transform="logit")
    assert convert_effect(1.0, question, 0.0) == pytest.approx(100 * (1 / (1 + math.exp(-1)) - 0.5))
    assert math.isnan(convert_effect(1.0, question, None))


def test_detectable_change_agrees_with_the_textbook_formula() -> None:
    """Without block noise and with known noise, MDC95 is 1.96 x sqrt(2) x SEM (Weir 2005)."""
    question = replace(LOWER_LOG, mdc_attempts_before=1, mdc_attempts_after=1, transform="none")
    found = compute_detectable(
        question,
        attempt_variance=0.25,
        freedom=math.inf,
        block_variance=0.0,
        mean_before=None,
    )
    assert found.value == pytest.approx(1.96 * math.sqrt(2) * 0.5)
    assert (found.low_display, found.high_display) == pytest.approx((-found.value, found.value))


def test_detectable_change_uses_the_freedom_of_the_noise() -> None:
    """With 4 degrees of freedom the factor is t(.975, 4) = 2.776 (any table of t)."""
    found = compute_detectable(
        LOWER_LOG, attempt_variance=0.03, freedom=4.0, block_variance=0.02, mean_before=None
    )
    assert found.value == pytest.approx(2.776445 * math.sqrt(0.03 * 2 / 3 + 0.02), rel=1e-6)
    assert found.high_display == pytest.approx(100 * math.expm1(found.value))
    assert found.low_display == pytest.approx(100 * math.expm1(-found.value))


def test_worthwhile_difference_is_taken_from_the_best_source() -> None:
    """Set by the teacher, else the registry, else 0.2 of the spread but at least one step."""
    given_facts = {
        "n_changes": 30,
        "state_variance": 0.01,
        "within_variance": 0.09,
        "sd_change": 0.7,
        "resolution": None,
    }
    by_teacher = choose_worthwhile(replace(LOWER_LOG, worthwhile=0.4), **given_facts)  # type: ignore[arg-type]
    assert (by_teacher.value, by_teacher.source) == (0.4, "teacher")
    default = choose_worthwhile(LOWER_LOG, **given_facts)  # type: ignore[arg-type]
    assert default.value == pytest.approx(0.2 * 0.15)
    assert "not a clinical threshold" in default.note
    stepped = choose_worthwhile(LOWER_LOG, **{**given_facts, "resolution": 0.05})  # type: ignore[arg-type]
    assert stepped.value == 0.05
    early = choose_worthwhile(LOWER_LOG, **{**given_facts, "n_changes": 19})  # type: ignore[arg-type]
    assert "provisional" in early.note
    unknown = {**given_facts, "state_variance": None, "within_variance": None}
    assert choose_worthwhile(LOWER_LOG, **unknown).value == pytest.approx(0.14)  # type: ignore[arg-type]


def test_resolution_follows_the_scale() -> None:
    """A step of 0.01 s at 2 s is half a per cent on the log scale."""
    assert convert_step(0.01, LOWER_LOG, -math.log(2)) == pytest.approx(math.log1p(0.005))
    assert convert_step(0.01, replace(LOWER_LOG, transform="none"), None) == 0.01
    assert convert_step(0.01, LOWER_LOG, None) is None
    # sqrt(y + 1) - sqrt(y) is about 1 / (2 sqrt(y)).
    counted = replace(LOWER_LOG, transform="sqrt", better="higher")
    assert convert_step(1.0, counted, 10.0) == pytest.approx(0.05)


def test_harms_are_counted_and_a_planned_end_is_none() -> None:
    """Only stops that may lie with the cue count; a fall or two of a kind call for a look."""
    planned = HarmTally(10, stops={"planned_end": 6, "equipment": 2})
    assert (count_stopped(planned), count_harms(planned), must_look(planned)) == (0, 0, False)
    assert must_look(HarmTally(10, stops={"pain": 2}))
    assert not must_look(HarmTally(10, stops={"pain": 1, "dizzy": 1}))
    assert must_look(HarmTally(5, stops={"pain": 1, "dizzy": 1}))
    assert must_look(HarmTally(10, events={"fall": 1}))
    assert count_harms(HarmTally(10, stops={"fall_or_near_fall": 1}, events={"fall": 1})) == 1
    assert count_harms(HarmTally(10, events={"near_fall": 2, "tired": 3, "pain_up": 1})) == 3


@pytest.mark.parametrize(
    "wrong", [{"allowance": -0.1}, {"worthwhile": 0.0}, {"mdc_attempts_before": 0}]
)
def test_question_refuses_what_has_no_meaning(wrong: dict[str, float]) -> None:
    """A negative allowance, a worthwhile difference of 0 or no attempts are refused in words."""
    with pytest.raises(UsageError):
        ReviewQuestion(metric="sparc", **wrong)  # type: ignore[arg-type]  # the point is wrong input
