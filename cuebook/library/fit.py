"""How well a cue fits the people it is for: one number between -1 and 1, and the reasons.

The parts are added and cut to the range; for a group each part is the mean over its members.

=============  =======================================================================  =========
part           when                                                                     adds
=============  =======================================================================  =========
age            the cue is written for the age / for another age                         0.2 / -0.5
background     the person knows the scene / has told of others and not of this          0.4 / -0.3
rate           the rate lies within 10 % of the cue's, same cycle / does not            0.2 / -0.2
experience     the cue is meant for the level / for another                             0.1 / -0.2
language       there is no wording in the person's language                             -0.5
access         a group member has a need the cue does not speak to                      -0.6
=============  =======================================================================  =========

What is not known adds nothing.
"""

from __future__ import annotations

from dataclasses import dataclass
from statistics import fmean

from cuebook.library.cues import Cue, match_language
from cuebook.library.person import Person
from cuebook.vocabulary import load_vocabulary

_AGE_FITS, _AGE_FAILS = 0.2, -0.5
_KNOWN, _NOT_KNOWN = 0.4, -0.3
_RATE_FITS, _RATE_FAILS = 0.2, -0.2
_LEVEL_FITS, _LEVEL_FAILS = 0.1, -0.2
_NO_LANGUAGE = -0.5
_ACCESS_FAILS = -0.6
RATE_ROOM = 0.10
"""A rate matches within this share of the cue's limits (vocabulary, list tempo_cycle)."""


@dataclass(frozen=True, slots=True)
class Fit:
    """How well a cue fits, and why."""

    score: float
    """From -1 to 1; 0 if nothing is known either way."""
    reasons: tuple[str, ...] = ()


def weigh_fit(
    cue: Cue, people: tuple[Person, ...], rate: float | None = None, cycle: str | None = None
) -> Fit:
    """Return how well a cue fits people and, if one is set, a rate in cycles a minute."""
    fits = [_weigh_person(cue, person) for person in people]
    score = fmean(fit.score for fit in fits) if fits else 0.0
    reasons = [reason for fit in fits for reason in fit.reasons]
    rate_score, rate_reason = _weigh_rate(cue, rate, cycle)
    if rate_reason:
        reasons.append(rate_reason)
    return Fit(max(-1.0, min(1.0, score + rate_score)), tuple(dict.fromkeys(reasons)))


def _weigh_person(cue: Cue, person: Person) -> Fit:
    parts = [
        _weigh_age(cue, person),
        _weigh_background(cue, person),
        _weigh_experience(cue, person),
        _weigh_language(cue, person),
        _weigh_access(cue, person),
    ]
    return Fit(sum(part for part, _ in parts), tuple(reason for _, reason in parts if reason))


def _weigh_age(cue: Cue, person: Person) -> tuple[float, str]:
    ages = person.ages
    if ages is None or (cue.age_low is None and cue.age_high is None):
        return 0.0, ""
    is_old_enough = cue.age_low is None or ages[1] >= cue.age_low
    is_young_enough = cue.age_high is None or ages[0] <= cue.age_high
    if is_old_enough and is_young_enough:
        return _AGE_FITS, f"written for {describe_ages(cue)}"
    return _AGE_FAILS, f"written for {describe_ages(cue)}, another age"


def describe_ages(cue: Cue) -> str:
    """Return the ages a cue is written for, in words."""
    if cue.age_high is None:
        return f"{cue.age_low} and over"
    if cue.age_low is None:
        return f"up to {cue.age_high}"
    return f"{cue.age_low} to {cue.age_high}"


def _weigh_background(cue: Cue, person: Person) -> tuple[float, str]:
    known = [slug for slug in cue.background_good if slug in person.backgrounds]
    if known:
        label = load_vocabulary().label("background", known[0])
        return _KNOWN, f"knows {label}"
    if cue.background_good and person.backgrounds and cue.is_image:
        label = load_vocabulary().label("background", cue.background_good[0])
        return _NOT_KNOWN, f"the image asks for {label}"
    return 0.0, ""


def _weigh_rate(cue: Cue, rate: float | None, cycle: str | None) -> tuple[float, str]:
    if rate is None or cue.rate_low is None or cue.rate_high is None or cue.cycle != cycle:
        return 0.0, ""
    unit = load_vocabulary().entry("tempo_cycle", cue.cycle or "").unit
    written = f"{cue.rate_low:g} to {cue.rate_high:g} {unit}"
    if cue.rate_low * (1 - RATE_ROOM) <= rate <= cue.rate_high * (1 + RATE_ROOM):
        return _RATE_FITS, f"for {written}"
    return _RATE_FAILS, f"for {written}, another rate"


def _weigh_experience(cue: Cue, person: Person) -> tuple[float, str]:
    if not cue.experience or person.experience is None:
        return 0.0, ""
    if person.experience in cue.experience:
        label = load_vocabulary().label("experience", person.experience)
        return _LEVEL_FITS, f"for the level {label.lower()}"
    return _LEVEL_FAILS, "meant for another level"


def _weigh_language(cue: Cue, person: Person) -> tuple[float, str]:
    if match_language(person.language, [wording.language for wording in cue.wordings]):
        return 0.0, ""
    return _NO_LANGUAGE, f"no wording in {person.language} yet"


def _weigh_access(cue: Cue, person: Person) -> tuple[float, str]:
    missed = [slug for slug in cue.access_avoid if slug in person.access_needs]
    if not missed:
        return 0.0, ""
    return _ACCESS_FAILS, f"does not speak to {person.code or 'one member'}: say the plain rule too"
