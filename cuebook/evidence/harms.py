"""What went wrong with a cue, and when somebody must look before it is said again."""

from __future__ import annotations

from cuebook.practice.changes import HarmTally

NO_HARM_REASONS = frozenset({"planned_end", "equipment"})
"""Reasons for stopping that say nothing about the cue."""
FALLS = frozenset({"fall", "injury", "fall_or_near_fall"})
UNSTOPPED_HARMS = frozenset({"near_fall", "pain_up"})
STOPS_OF_A_KIND = 2
FEWEST_USES = 5
MOST_STOPPED = 0.20


def count_stopped(tally: HarmTally) -> int:
    """Return the uses stopped for a reason that may lie with the cue."""
    return sum(n for reason, n in tally.stops.items() if reason not in NO_HARM_REASONS)


def count_falls(tally: HarmTally) -> int:
    """Return falls and injuries; one noted both as a stop and as an event counts once."""
    as_stops = sum(n for reason, n in tally.stops.items() if reason in FALLS)
    as_events = sum(n for event, n in tally.events.items() if event in FALLS)
    return max(as_stops, as_events)


def count_harms(tally: HarmTally) -> int:
    """Return stops, falls, near-falls and rises of pain together."""
    fall_stops = sum(n for reason, n in tally.stops.items() if reason in FALLS)
    others = sum(n for event, n in tally.events.items() if event in UNSTOPPED_HARMS)
    return count_stopped(tally) + count_falls(tally) - fall_stops + others


def must_look(tally: HarmTally) -> bool:
    """Return whether there was a fall, two stops of a kind, or stops in a fifth of the uses."""
    of_a_kind = [n for reason, n in tally.stops.items() if reason not in NO_HARM_REASONS]
    many = tally.uses >= FEWEST_USES and count_stopped(tally) > MOST_STOPPED * tally.uses
    return count_falls(tally) > 0 or max(of_a_kind, default=0) >= STOPS_OF_A_KIND or many
