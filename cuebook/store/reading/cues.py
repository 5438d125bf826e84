"""Read cues as values of the library package."""

from __future__ import annotations

import sqlite3
from collections import defaultdict

from cuebook.library.cues import Claim, Cue, Wording

_CUES = """
SELECT id, code, kind, focus, pair, sister_of, status, problem, cycle, rate_low, rate_high,
       age_low, age_high, captures, leaves_out, caution, target_metric, watch_metric
FROM cue ORDER BY id
"""
_WORDINGS = """
SELECT cue_id, text, language, revision, replaces FROM wording ORDER BY cue_id, id
"""
_CLAIMS = "SELECT cue_id, feature, says FROM claim ORDER BY cue_id, place"
_TAGS = "SELECT cue_id, kind, word FROM cue_tag ORDER BY cue_id, kind, place"
_PHRASES = "SELECT cue_id, phrase FROM problem_phrase ORDER BY cue_id, place"


def read_cues(connection: sqlite3.Connection) -> tuple[Cue, ...]:
    """Return all cues of a library, in the order in which they were added."""
    wordings: dict[str, list[Wording]] = defaultdict(list)
    for row in connection.execute(_WORDINGS):
        wordings[row["cue_id"]].append(
            Wording(row["text"], row["language"], row["revision"], row["replaces"])
        )
    claims: dict[str, list[Claim]] = defaultdict(list)
    for row in connection.execute(_CLAIMS):
        claims[row["cue_id"]].append(Claim(row["feature"], row["says"]))
    tags: dict[tuple[str, str], list[str]] = defaultdict(list)
    for row in connection.execute(_TAGS):
        tags[row["cue_id"], row["kind"]].append(row["word"])
    phrases: dict[str, list[str]] = defaultdict(list)
    for row in connection.execute(_PHRASES):
        phrases[row["cue_id"]].append(row["phrase"])
    return tuple(
        Cue(
            code=row["code"],
            kind=row["kind"],
            focus=row["focus"],
            wordings=tuple(wordings[row["id"]]),
            tasks=tuple(tags[row["id"], "task"]),
            regions=tuple(tags[row["id"], "region"]),
            claims=tuple(claims[row["id"]]),
            pair=row["pair"],
            sister_of=row["sister_of"],
            status=row["status"],
            problem=row["problem"],
            phrases=tuple(phrases[row["id"]]),
            cycle=row["cycle"],
            rate_low=row["rate_low"],
            rate_high=row["rate_high"],
            age_low=row["age_low"],
            age_high=row["age_high"],
            experience=tuple(tags[row["id"], "experience"]),
            background_good=tuple(tags[row["id"], "background_good"]),
            background_avoid=tuple(tags[row["id"], "background_avoid"]),
            access_avoid=tuple(tags[row["id"], "access_avoid"]),
            note_avoid=tuple(tags[row["id"], "note_avoid"]),
            captures=row["captures"],
            leaves_out=row["leaves_out"],
            caution=row["caution"],
            target_metric=row["target_metric"],
            watch_metric=row["watch_metric"],
        )
        for row in connection.execute(_CUES).fetchall()
    )
