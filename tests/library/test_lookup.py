from __future__ import annotations

from dataclasses import replace
from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from cuebook.library.cues import Claim, Cue, Wording
from cuebook.library.index import CueIndex
from cuebook.library.lookup import Hit, ObservedEffect, Request, find_cues
from cuebook.library.person import Group, Hold, Person, SafetyNote
from cuebook.library.seed_sets import load_seed_cues
from cuebook.library.understand import understand
from cuebook.vocabulary import load_vocabulary

INDEX = CueIndex(load_seed_cues())
SMALL_STEPS = understand("Takes tiny steps and shuffles down the corridor")
PROBLEMS = {cue.problem: cue.pair for cue in load_seed_cues()}


def find(
    problem: str, who: Person | Group | None = None, request: Request | None = None
) -> list[str]:
    """Return the codes of the cues found for a problem in the seed sets."""
    return [hit.cue.code for hit in find_cues(understand(problem), INDEX, who, request)]


def test_small_steps_find_the_three_cues_for_them() -> None:
    """Tiny shuffling steps find image, rule and sister image first."""
    codes = [hit.cue.code for hit in find_cues(SMALL_STEPS, INDEX)]
    assert set(codes[:3]) == {"paving-slab-stride", "floor-tile-stride", "long-step-heel-first"}


@pytest.mark.parametrize("problem", sorted(PROBLEMS))
def test_each_seed_problem_finds_its_own_pair_among_the_first_five(problem: str) -> None:
    """Typing a seed cue's own problem finds a cue of that pair in the first five."""
    hits = find_cues(understand(problem), INDEX)
    assert PROBLEMS[problem] in {hit.cue.pair for hit in hits[:5]}


@pytest.mark.parametrize(
    ("problem", "pair"),
    [
        ("Her feet barely clear the bar and she nearly trips", "A2"),
        ("eyes glued to the carpet all the way down the hall", "A3"),
        ("It takes him nine little steps to get round the cone", "A4"),
        ("just drops like a stone onto the seat", "A5"),
        ("Rocks back and forth a few times before she can get out of the chair", "A6"),
        ("stomps along the corridor", "A7"),
        ("arms glued to her sides on the walk", "A8"),
        ("legs miles apart when walking", "A9"),
        ("one step long one short to the metronome", "A10"),
        ("Back swings open before the legs have finished", "B1"),
        ("charges up the slide", "B2"),
        ("The hands hang about at the finish", "B3"),
        ("slumped lower back at the catch", "B4"),
        ("stroke rate all over the place on the erg", "B5"),
        ("Thuds down from the box with locked knees", "B6"),
        ("knees collapse inwards off the box", "B7"),
        ("he yanks with bent elbows before the leg drive is over", "B8"),
        ("picks the crate up with a rounded spine", "B9"),
        ("death grip on the oar handle", "B10"),
        ("she leans from the trunk to get to the cup and the elbow never opens", "C1"),
        ("the reach goes in fits and starts", "C2"),
        ("his hand veers off to the left of the target", "C3"),
        ("shoulder creeps up to her ear when reaching", "C4"),
        ("fingers stay clamped round the block", "C5"),
        ("flattens the paper cup when he picks it up", "C6"),
        ("tea goes everywhere before it gets to her lips", "C7"),
        ("shoots past the target when she reaches", "C8"),
        ("the tray slopes to the left when he lifts it", "C9"),
        ("leaves the weak hand in her lap while wiping the table", "C10"),
    ],
)  # fmt: skip
def test_other_words_for_a_seed_problem_find_its_pair(problem: str, pair: str) -> None:
    """The same problems in quite other words find a fitting cue among the first five."""
    hits = find_cues(understand(problem), INDEX)
    assert pair in {hit.cue.pair for hit in hits[:5]}


def test_the_plain_rule_stands_right_behind_its_image() -> None:
    """Wherever an image comes first of its pair, the rule of the pair follows at once."""
    hits = find_cues(SMALL_STEPS, INDEX, request=Request(limit=20))
    seen: set[str] = set()
    for hit, following in pairwise(hits):
        if hit.cue.is_image and hit.cue.pair not in seen:
            assert following.cue.pair == hit.cue.pair
            assert not following.cue.is_image
        seen.add(hit.cue.pair)


def test_every_hit_says_why_and_names_its_caution_first() -> None:
    """A hit carries reasons, and its cue's caution among the lines to read first."""
    for hit in find_cues(SMALL_STEPS, INDEX):
        assert hit.why
        assert hit.cue.caution in hit.cautions


def test_hits_are_scored_between_nought_and_one() -> None:
    """Every score lies between 0 and 1, whatever fit and effect add."""
    effects = {cue.code: ObservedEffect(1.0, 9) for cue in load_seed_cues()}
    person = Person(age_years=80, backgrounds=("town_living",))
    for hit in find_cues(SMALL_STEPS, INDEX, person, effects=effects):
        assert 0 <= hit.score <= 1


def test_a_known_background_lifts_the_image_that_needs_it() -> None:
    """Who knows towns gets the paving slab first; who does not gets the sister image."""
    assert find("takes tiny steps", Person(backgrounds=("town_living",)))[0] == "paving-slab-stride"
    other = find("takes tiny steps", Person(backgrounds=("farming",)))
    assert other.index("floor-tile-stride") < other.index("paving-slab-stride")


def test_age_moves_a_cue_up_or_down() -> None:
    """A cue written for over-65s scores higher for somebody of 80 than of 30."""
    old, young = (
        find_cues(SMALL_STEPS, INDEX, Person(age_years=age))[0].parts.fit for age in (80, 30)
    )
    assert old > 0 > young


def test_an_age_band_counts_like_the_years_in_it() -> None:
    """A learner known by age band only is fitted by that band."""
    by_band = find_cues(SMALL_STEPS, INDEX, Person(age_band="75-84"))
    by_years = find_cues(SMALL_STEPS, INDEX, Person(age_years=80))
    assert [hit.score for hit in by_band] == [hit.score for hit in by_years]


@pytest.mark.parametrize(
    ("rate", "cycle", "sign"),
    [
        (90, "step", 1),
        (72, "step", 1),
        (110, "step", 1),
        (71, "step", -1),
        (111, "step", -1),
        (90, "beat", 0),
    ],
)
def test_a_rate_matches_within_ten_percent_of_the_same_cycle(
    rate: float, cycle: str, sign: int
) -> None:
    """80 to 100 steps a minute fits from 72 to 110, and says nothing of beats."""
    hits = find_cues(SMALL_STEPS, INDEX, request=Request(rate=rate, cycle=cycle))
    fit = next(hit.parts.fit for hit in hits if hit.cue.code == "paving-slab-stride")
    assert (fit > 0) - (fit < 0) == sign


@pytest.mark.parametrize("need", ["no_mental_imagery", "autistic_literal"])
def test_who_does_not_use_images_gets_none(need: str) -> None:
    """For literal language or no inner pictures only plain rules are shown."""
    hits = find_cues(SMALL_STEPS, INDEX, Person(access_needs=(need,)))
    assert hits
    assert not any(hit.cue.is_image for hit in hits)


def test_a_cue_declined_or_paused_is_never_offered_again() -> None:
    """A declined image and a paused cue stay away from that person."""
    person = Person(
        declined=frozenset({"paving-slab-stride"}), paused=frozenset({"long-step-heel-first"})
    )
    codes = find("takes tiny steps", person)
    assert "floor-tile-stride" in codes
    assert not {"paving-slab-stride", "long-step-heel-first"} & set(codes)


def test_a_hold_leaves_nothing_to_show_for_its_task() -> None:
    """On hold for rising, no cue for rising is shown, however well it would fit."""
    person = Person(holds=(Hold(("sit_to_stand",), "blood pressure checked", "clinician"),))
    assert find("plonks down in the chair")[0] in ("settling-lift", "full-tray-down")
    hits = find_cues(understand("plonks down in the chair"), INDEX, person)
    assert not any("sit_to_stand" in hit.cue.tasks for hit in hits)


def test_hard_notes_forbid_and_soft_notes_warn_first() -> None:
    """Hypermobile as a hard note hides end-range images; as a soft one it is read first."""
    problem = understand("elbow stays bent, does not straighten when reaching")
    free = {hit.cue.code for hit in find_cues(problem, INDEX)}
    assert "opening-drawer" in free
    hard = find_cues(problem, INDEX, Person(notes=(SafetyNote("hypermobile", is_hard=True),)))
    assert "opening-drawer" not in {hit.cue.code for hit in hard}
    assert hard
    soft = find_cues(problem, INDEX, Person(notes=(SafetyNote("hypermobile"),)))
    image = next(hit for hit in soft if hit.cue.code == "opening-drawer")
    assert image.cautions[0] == "Hypermobile: no end-range images"


def test_growing_bones_that_hurt_are_not_jumped_on() -> None:
    """With bone-end pain in growth no jump cue is shown, hard note or soft."""
    problem = "lands with a loud thud off the box"
    assert find(problem)
    for is_hard in (True, False):
        notes = (SafetyNote("growth_pain", is_hard=is_hard),)
        hits = find_cues(understand(problem), INDEX, Person(notes=notes))
        assert not any("jumping_landing" in hit.cue.tasks for hit in hits)


def test_a_note_in_free_words_is_read_before_every_cue() -> None:
    """A limit typed in by hand stands first, and a hard one with tasks forbids them."""
    typed = SafetyNote(None, "no bend past ninety until June", is_hard=True)
    hits = find_cues(SMALL_STEPS, INDEX, Person(notes=(typed,)))
    assert hits
    assert all(hit.cautions[0] == "no bend past ninety until June" for hit in hits)
    bound = replace(typed, tasks=("walking",))
    assert find("takes tiny steps", Person(notes=(bound,))) == []


def test_therapist_only_cues_are_for_no_group() -> None:
    """A cue for therapists is found for one person, with its status, and never for a group."""
    problem = "walks with feet far apart"
    alone = find_cues(understand(problem), INDEX, Person())
    assert {hit.cue.status for hit in alone if hit.cue.pair == "A9"} == {"therapist_only"}
    group = find_cues(understand(problem), INDEX, Group("hall", (Person("heron-lamp"),)))
    assert not any(hit.cue.status == "therapist_only" for hit in group)


def test_in_a_group_the_held_member_sits_out_and_the_others_go_on() -> None:
    """A group still gets cues; who is on hold is named first; with all on hold there are none."""
    held = Person("willow-drum", holds=(Hold(("walking",), "seen by the doctor", "doctor"),))
    group = Group("hall", (held, Person("heron-lamp")))
    hits = find_cues(SMALL_STEPS, INDEX, group)
    assert hits[0].cautions[0].startswith("willow-drum sits out: on hold until seen by the doctor")
    assert not any(
        "walking" in h.cue.tasks for h in find_cues(SMALL_STEPS, INDEX, Group("a", (held,)))
    )


def test_in_a_group_one_members_needs_are_weighed_and_one_members_no_is_kept() -> None:
    """Images stay for a group with one literal thinker, less high; a declined one goes."""
    literal = Person("pocket-fern", access_needs=("autistic_literal",))
    group = Group("crew", (literal, Person("marble-fox")))
    hits = find_cues(SMALL_STEPS, INDEX, group)
    assert any(hit.cue.is_image for hit in hits)
    assert not hits[0].cue.is_image
    no = Person("marble-fox", declined=frozenset({"paving-slab-stride"}))
    assert "paving-slab-stride" not in find("takes tiny steps", Group("crew", (literal, no)))


def test_an_untried_cue_is_not_buried_by_tried_ones() -> None:
    """Good effect lifts, bad effect lowers, and no record at all stands in the middle."""
    codes = ["paving-slab-stride", "floor-tile-stride"]

    def order(**effects: float) -> list[str]:
        hits = find_cues(
            SMALL_STEPS,
            INDEX,
            effects={code.replace("_", "-"): ObservedEffect(p, 8) for code, p in effects.items()},
        )
        return [hit.cue.code for hit in hits if hit.cue.code in codes]

    assert order(floor_tile_stride=0.9)[0] == "floor-tile-stride"
    assert order(floor_tile_stride=0.1)[0] == "paving-slab-stride"
    untried = find_cues(SMALL_STEPS, INDEX)[0].score
    even = find_cues(SMALL_STEPS, INDEX, effects={codes[0]: ObservedEffect(0.5, 8)})[0].score
    assert untried == even


def test_an_effect_is_told_and_warnings_come_first() -> None:
    """A measured cue says so in its reasons, and harms seen elsewhere are read first."""
    hits = find_cues(
        SMALL_STEPS,
        INDEX,
        effects={"paving-slab-stride": ObservedEffect(0.72, 1)},
        warnings={"paving-slab-stride": ("A near-fall was noted with this cue.",)},
    )
    hit = next(hit for hit in hits if hit.cue.code == "paving-slab-stride")
    assert hit.cautions[0] == "A near-fall was noted with this cue."
    assert any("72 %" in reason and "1 use" in reason for reason in hit.why)


def test_a_task_set_by_hand_keeps_out_cues_for_other_tasks() -> None:
    """With the task given, only cues for it or a near one are shown."""
    hits = find_cues(understand("stiff and jerky"), INDEX, request=Request(task="reaching"))
    assert hits
    assert all(set(hit.cue.tasks) <= {"reaching", "grasp_place", "drinking"} for hit in hits)


def test_a_kind_set_by_hand_keeps_out_all_others() -> None:
    """Asked for analogies, only analogies are shown."""
    hits = find_cues(SMALL_STEPS, INDEX, request=Request(kind="analogy"))
    assert {hit.cue.kind for hit in hits} == {"analogy"}


def test_the_limit_is_kept() -> None:
    """No more cues are shown than asked for."""
    assert len(find_cues(SMALL_STEPS, INDEX, request=Request(limit=2))) == 2


def test_the_side_is_filled_in_where_it_is_known() -> None:
    """A wording with a side says left or right, or leaves both open."""
    left = find_cues(understand("only wipes with the right hand, left hand does nothing"), INDEX)
    named = next(hit for hit in left if hit.cue.code == "named-side-starts")
    assert "{side}" not in named.text
    open_side = find_cues(understand("only uses the good hand when wiping"), INDEX)
    named = next(hit for hit in open_side if hit.cue.code == "named-side-starts")
    assert named.text == "Start with your left/right hand, then the other joins."


def test_a_cue_without_a_wording_in_the_language_steps_back() -> None:
    """For a Spanish speaker an English-only cue fits less, and says so."""
    hits = find_cues(SMALL_STEPS, INDEX, Person(language="es"))
    assert all(hit.parts.fit < 0 for hit in hits)
    assert any("no wording in es" in reason for reason in hits[0].why)


def test_experience_counts_where_a_cue_names_a_level() -> None:
    """A cue meant for novices fits a novice and not an expert."""
    cue = replace(load_seed_cues()[0], experience=("novice",))
    fits = [
        find_cues(SMALL_STEPS, [cue], Person(experience=level))[0].parts.fit
        for level in ("novice", "expert")
    ]
    assert fits[0] > 0 > fits[1]


def test_nothing_understood_finds_nothing() -> None:
    """An empty problem gives no cue rather than a wrong one."""
    assert find("") == []
    assert find("qqq zzz") == []
    assert find_cues(SMALL_STEPS, []) == ()


def test_a_cue_that_may_worsen_the_problem_stands_behind_one_that_does_not() -> None:
    """Of two cues for the same feature, the one that may harm another part of it is lower."""
    base = Cue("good", "keyword", "holistic", (Wording("Long."),), ("walking",), ("leg",))
    good = replace(base, claims=(Claim("step_length", "improves"),))
    bad = replace(good, code="bad", claims=(*good.claims, Claim("speed", "may_worsen")))
    hits = find_cues(SMALL_STEPS, [bad, good])
    assert [hit.cue.code for hit in hits] == ["good", "bad"]


VOCABULARY = load_vocabulary()
tasks = st.sampled_from(VOCABULARY.slugs("task"))


@given(
    st.sampled_from(sorted(PROBLEMS)),
    st.lists(tasks, min_size=1, max_size=12).map(tuple),
    st.sampled_from(["alone", "group"]),
    st.none() | tasks,
)
def test_a_hold_is_never_broken(
    problem: str, held: tuple[str, ...], how: str, task: str | None
) -> None:
    """No cue shown has only tasks that are on hold for everybody it is for."""
    person = Person("heron-lamp", holds=(Hold(held),))
    who: Person | Group = person if how == "alone" else Group("hall", (person, person))
    hits = find_cues(understand(problem), INDEX, who, Request(task=task, limit=50))
    assert all(set(hit.cue.tasks) - set(held) for hit in hits)


@given(
    st.sampled_from(sorted(PROBLEMS)),
    st.lists(st.sampled_from(VOCABULARY.slugs("safety_note")), max_size=4, unique=True),
    st.lists(st.sampled_from(VOCABULARY.slugs("access_need")), max_size=3, unique=True),
    st.frozensets(st.sampled_from([cue.code for cue in load_seed_cues()]), max_size=20),
    st.integers(min_value=3, max_value=100),
)
def test_nothing_forbidden_is_ever_shown(
    problem: str, notes: list[str], needs: list[str], declined: frozenset[str], age: int
) -> None:
    """Whoever it is for, no hit breaks a note, a need or a no, and scores stay in range."""
    person = Person(
        age_years=age,
        access_needs=tuple(needs),
        notes=tuple(SafetyNote(slug, is_hard=True) for slug in notes),
        declined=declined,
    )
    for hit in find_cues(understand(problem), INDEX, person, Request(limit=50)):
        assert hit.cue.code not in declined
        assert not set(hit.cue.access_avoid) & set(needs)
        assert not set(hit.cue.note_avoid) & set(notes)
        assert 0 <= hit.score <= 1


@given(st.permutations(load_seed_cues()[:12]))
def test_the_order_of_the_library_does_not_change_the_scores(cues: list[Cue]) -> None:
    """Shuffling the cues changes no cue's score."""

    def score(hits: tuple[Hit, ...]) -> dict[str, float]:
        return {hit.cue.code: round(hit.score, 9) for hit in hits}

    request = Request(limit=20)
    assert score(find_cues(SMALL_STEPS, cues, request=request)) == score(
        find_cues(SMALL_STEPS, load_seed_cues()[:12], request=request)
    )
