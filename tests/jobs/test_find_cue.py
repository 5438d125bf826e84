from __future__ import annotations

import csv
import json
import os
import subprocess
import sys
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from cuebook.cli.output import to_plain
from cuebook.errors import UnknownCodeError
from cuebook.jobs.find_cue import FoundCues, find_cue, list_task_cautions, to_document
from cuebook.library.lookup import ObservedEffect, Request
from cuebook.library.person import Hold, Person
from cuebook.library.seed_sets import load_seed_cues
from cuebook.library.stop_messages import Contacts, compose_stop_message
from cuebook.vocabulary import load_vocabulary

SMALL_STEPS = "Takes tiny steps and shuffles down the corridor"
GIVEN = Path(__file__).parents[1] / "library" / "data" / "problems_safety.csv"
STOPS = [
    action
    for action in load_vocabulary().slugs("safety_action")
    if action not in ("caution_first", "none")
]


def read_dangers() -> list[tuple[str, str]]:
    """Return the given danger sentences with their actions."""
    with GIVEN.open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    return [
        (row["problem"], row["expected_action"]) for row in rows if row["expected_action"] != "none"
    ]


def test_without_a_library_the_seed_sets_are_searched() -> None:
    """A problem finds cues before any library has been begun."""
    found = find_cue(SMALL_STEPS)
    assert found.stop is None
    assert found.hits[0].cue in load_seed_cues()
    assert found.advice == ""


def test_given_cues_are_searched_instead_of_the_seed_sets() -> None:
    """Cues handed in are the only ones searched."""
    assert find_cue(SMALL_STEPS, cues=()).hits == ()


def test_cautions_of_the_sentence_and_the_task_come_before_all_cues() -> None:
    """What the words and the task call for is read before any cue."""
    found = find_cue(SMALL_STEPS, request=Request(task="turning_while_walking"))
    assert "tell the doctor" in found.cautions[0].lower()
    assert (
        found.cautions[-1] == "Turning while walking: Clear floor; someone beside; stop if dizzy."
    )
    assert list_task_cautions(("walking",)) == ()


@pytest.mark.parametrize(("sentence", "action"), read_dangers())
def test_a_danger_gets_its_action_and_not_one_cue(sentence: str, action: str) -> None:
    """A stopped sentence gives the action and a message, and leaves everything else empty."""
    found = find_cue(sentence)
    assert found.stop is not None
    assert found.stop.action == action
    assert found == FoundCues(stop=found.stop)


@pytest.mark.parametrize(("sentence", "action"), read_dangers())
def test_no_word_of_a_danger_is_echoed(sentence: str, action: str) -> None:
    """The answer to a danger is the same whatever words it came in."""
    answer = json.dumps(to_plain(to_document(find_cue(sentence))))
    bare = compose_stop_message(action)
    assert json.loads(answer)["stop"] == {"action": action, "message": bare}
    assert sentence not in answer


@pytest.mark.parametrize("action", STOPS)
def test_every_stop_says_stop_then_stay_then_what_to_do(action: str) -> None:
    """The message keeps its order: stop, stay with the person, what to do now."""
    message = compose_stop_message(action)
    stop, stay = message.index("Stop"), message.index("Stay with the person")
    assert stop == 0
    assert stop < stay < len(message) - len("Stay with the person.")


def test_contacts_are_those_typed_in_and_none_is_shipped() -> None:
    """Numbers and names appear only if somebody typed them in."""
    assert "none is typed in yet" in compose_stop_message("stop_emergency")
    assert not any(letter.isdigit() for action in STOPS for letter in compose_stop_message(action))
    typed = Contacts("000", "the office upstairs", "the head of school")
    assert "Call now: 000." in compose_stop_message("stop_emergency", typed)
    assert "the office upstairs" in compose_stop_message("stop_safeguarding", typed)
    assert "the head of school" in compose_stop_message("defer_body_image", typed)
    assert "do not write here what was said" in compose_stop_message("stop_safeguarding").lower()


@pytest.mark.parametrize("action", ["stop_refer", "defer_protocol", "refer_falls_check"])
def test_what_may_have_been_assessed_can_be_typed_again(action: str) -> None:
    """Below the urgent stops the message offers the way on."""
    assert compose_stop_message(action).endswith("Already assessed? Type the movement only.")


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "Nothing in it was understood"),
        ("the knee", "Say what goes wrong"),
        ("far too jerky and late on the beat in the tango", "add a cue of your own"),
    ],
)
def test_an_empty_answer_says_what_to_add(text: str, words: str) -> None:
    """When nothing is found, the answer says what would help."""
    found = find_cue(text)
    assert found.hits == ()
    assert words in found.advice


def test_an_answer_empty_for_a_hold_says_so() -> None:
    """With the task on hold the advice names the hold, not other words to try."""
    person = Person(holds=(Hold(("walking",), "seen by the doctor", "doctor"),))
    found = find_cue("takes tiny steps", who=person, request=Request(task="walking"))
    assert not any("walking" in hit.cue.tasks for hit in found.hits)
    alone = find_cue("jerky", cues=(), who=person, request=Request(task="walking"))
    assert "on hold until seen by the doctor (cleared by: doctor)" in alone.advice


@pytest.mark.parametrize(
    ("person", "request_", "nearest"),
    [
        (None, Request(task="wlking"), "walking"),
        (None, Request(kind="analogie"), "analogy"),
        (None, Request(rate=80.0, cycle="steps"), "step"),
        (Person(backgrounds=("gardning",)), None, "gardening"),
        (Person(access_needs=("aphasi",)), None, "aphasia"),
    ],
)
def test_unknown_words_name_the_nearest(
    person: Person | None, request_: Request | None, nearest: str
) -> None:
    """A task, kind, cycle, background or need that is not known names the nearest that is."""
    with pytest.raises(UnknownCodeError) as caught:
        find_cue(SMALL_STEPS, who=person, request=request_)
    assert nearest in caught.value.hint


def test_the_document_has_the_agreed_shape() -> None:
    """The JSON document has the keys that others rely on, with scores from 0 to 1."""
    effect = ObservedEffect(0.7, 5, {"verdict": "likely_helps"})
    found = find_cue(SMALL_STEPS, effects={"paving-slab-stride": effect})
    document = json.loads(json.dumps(to_plain(to_document(found))))
    assert document["format"] == "cuebook.find/1"
    assert document["stop"] is None
    assert document["features"][0]["feature"] == "step_length"
    assert document["tasks"][0]["task"] == "walking"
    assert {"region": "leg", "score": document["regions"][0]["score"]} in document["regions"]
    for cue in document["cues"]:
        assert set(cue) >= {
            "cue", "kind", "focus", "caution", "wording", "captures", "leaves_out", "score", "why",
            "effect",
        }  # fmt: skip
        assert 0 <= cue["score"] <= 1
        assert cue["caution"]
    by_code = {cue["cue"]: cue for cue in document["cues"]}
    assert by_code["paving-slab-stride"]["effect"] == {
        "p_better": 0.7,
        "uses": 5,
        "verdict": "likely_helps",
    }
    assert by_code["floor-tile-stride"]["effect"] is None


@given(st.text(max_size=200))
def test_any_text_gives_a_document_that_json_can_hold(text: str) -> None:
    """Whatever is typed, the answer can be printed; a stop never comes with cues."""
    document = to_plain(to_document(find_cue(text)))
    json.dumps(document)
    assert document["stop"] is None or document["cues"] == []
    assert document["cues"] or document["stop"] or document["advice"]


def test_looking_up_loads_no_heavy_library(tmp_path: Path) -> None:
    """In a fresh interpreter a whole look-up loads no tables, frames, numbers or screens."""
    script = (
        "import sys\n"
        "from cuebook.cli.main import run\n"
        "run(['find', 'shufles and draggs the tose', '--json'])\n"
        "heavy = {'numpy', 'pandas', 'scipy', 'pyarrow', 'sqlmodel', 'sqlalchemy', 'alembic',\n"
        "         'textual', 'pydantic'}\n"
        "print(sorted(heavy & set(sys.modules)), file=sys.stderr)\n"
    )
    shown = subprocess.run(
        [sys.executable, "-P", "-c", script],
        check=True,
        capture_output=True,
        text=True,
        env={**os.environ, "CUEBOOK_LIBRARY": str(tmp_path / "none")},
    )
    assert json.loads(shown.stdout)["cues"]
    assert shown.stderr.strip() == "[]"
