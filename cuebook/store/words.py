"""The words that stored columns may hold, taken from the vocabulary where it has the list."""

from __future__ import annotations

from cuebook.vocabulary import load_vocabulary

_vocabulary = load_vocabulary()

AGE_BANDS = _vocabulary.slugs("age_band")
EXPERIENCES = _vocabulary.slugs("experience")
CONSENT_ITEMS = _vocabulary.slugs("consent_item")
ANSWERS = _vocabulary.slugs("consent_answer")
CONSENT_GIVERS = _vocabulary.slugs("consent_giver")
CONSENT_WAYS = _vocabulary.slugs("consent_how")
ASSENTS = _vocabulary.slugs("assent")
PHASES = _vocabulary.slugs("phase")
KINDS = _vocabulary.slugs("cue_kind")
FOCUSES = _vocabulary.slugs("focus")
STATUSES = (*_vocabulary.slugs("cue_status"), "retired")
OBSERVED = _vocabulary.slugs("observed_change")
REACTIONS = _vocabulary.slugs("reaction")
EVENTS = _vocabulary.slugs("event")
STOPS = _vocabulary.slugs("reason_for_stopping")
SIDES = ("left", "right", "both")
OTHERS = ("none", "some", "many", "unknown")
CHOSEN = ("random", "planned", "going_badly", "learner_asked", "unknown")
PRESENCE = ("present", "absent", "not_observed")
CLAIM_WORDS = ("improves", "silent", "may_worsen")
CYCLES = _vocabulary.slugs("tempo_cycle")
DELIVERIES = _vocabulary.slugs("delivery_mode")
DELIVERERS = ("teacher", "assistant")
SAFETY_ACTIONS = _vocabulary.slugs("safety_action")
GOAL_STATUSES = ("active", "on_hold", "reached", "dropped")
DIRECTIONS = ("higher", "lower", "target")
