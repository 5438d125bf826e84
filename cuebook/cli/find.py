"""Find a cue for a problem, in plain lines: caution, words, what they carry, why."""

from __future__ import annotations

import math
import textwrap

import click

from cuebook.cli.common_options import with_common_options
from cuebook.cli.output import print_json
from cuebook.errors import NeedsAnswerError, UsageError
from cuebook.jobs.find_cue import FoundCues, to_document
from cuebook.jobs.find_in_library import find_in_library
from cuebook.library.lookup import Hit, Request
from cuebook.library.person import Person
from cuebook.vocabulary import load_vocabulary, require_slug

_WIDTH = 78
_INDENT = 14


@click.command("find")
@click.argument("text", nargs=-1, required=True)
@click.option("--learner", metavar="CODE", help="For this learner: holds, notes and fit count.")
@click.option("--group", metavar="CODE", help="For this group.")
@click.option("--age", type=int, metavar="YEARS", help="For somebody of this age.")
@click.option("--background", "backgrounds", multiple=True, metavar="TAG", help="What they know.")
@click.option("--task", metavar="TASK", help="The task, if the text does not say it.")
@click.option("--rate", type=float, metavar="N", help="Cycles a minute they practise at.")
@click.option("--cycle", metavar="CYCLE", help="What one cycle is: step, stroke, beat, ...")
@click.option("--kind", metavar="KIND", help="Only cues of this kind, such as analogy.")
@click.option("--limit", type=click.IntRange(1, 100), default=8, show_default=True)
@with_common_options
def command(
    *,
    text: tuple[str, ...],
    learner: str | None,
    group: str | None,
    age: int | None,
    backgrounds: tuple[str, ...],
    task: str | None,
    rate: float | None,
    cycle: str | None,
    kind: str | None,
    limit: int,
    as_json: bool,
    location: str | None,
) -> None:
    r"""Find cues for a problem in your own words.

    \b
    cuebook find "takes tiny steps and shuffles"
    cuebook find "knees fall in when she lands" --age 14 --background farming
    """
    if (learner or group) and (age is not None or backgrounds):
        raise UsageError(
            "--age and --background describe somebody who is in no library.",
            "Leave them out with --learner or --group.",
        )
    if learner and group:
        raise UsageError("--learner and --group exclude each other.", "Give one of them.")
    request = _read_request(task, rate, cycle, kind, limit)
    found = _look_up(
        " ".join(text), location, learner, group, _describe_person(age, backgrounds), request
    )
    if as_json:
        print_json(to_document(found))
        return
    for line in list_lines(found):
        click.echo(line)


def _look_up(
    text: str,
    location: str | None,
    learner: str | None,
    group: str | None,
    who: Person | None,
    request: Request,
) -> FoundCues:
    """Look up with the library's people and cues, or in the seed sets where there is none."""
    return find_in_library(location, text, learner=learner, group=group, who=who, request=request)


def _describe_person(age: int | None, backgrounds: tuple[str, ...]) -> Person | None:
    if age is None and not backgrounds:
        return None
    if age is not None and not 0 <= age <= 120:
        raise UsageError(f"--age is {age}.", "Give an age in years.")
    for slug in backgrounds:
        require_slug("background", slug)
    return Person(age_years=age, backgrounds=backgrounds)


def _read_request(
    task: str | None, rate: float | None, cycle: str | None, kind: str | None, limit: int
) -> Request:
    if task is not None:
        require_slug("task", task)
    if rate is not None and not (math.isfinite(rate) and rate > 0):
        raise UsageError(f"--rate is {rate}.", "Give cycles a minute, a number above 0.")
    if cycle is not None and rate is None:
        raise UsageError("--cycle stands without --rate.", "Give --rate too, or leave it out.")
    if rate is not None and cycle is None:
        cycle = load_vocabulary().task(task).usual_cycle if task is not None else None
        if cycle is None:
            raise NeedsAnswerError(
                f"A rate of {rate:g} a minute: of what?",
                f"Give --cycle, one of: {', '.join(load_vocabulary().slugs('tempo_cycle'))}.",
            )
    return Request(task=task, rate=rate, cycle=cycle, kind=kind, limit=limit)


def list_lines(found: FoundCues) -> list[str]:
    """Return an answer as lines that can be read aloud: what to heed first, then the words."""
    if found.stop is not None:
        return textwrap.wrap(found.stop.message, _WIDTH)
    lines = [line for caution in found.cautions for line in _put("Caution", caution)]
    if found.understanding.features:
        lines += _put("Understood", _describe_understanding(found))
    for number, hit in enumerate(found.hits, start=1):
        lines += ["", *_list_hit(number, hit)]
    if found.advice:
        lines += textwrap.wrap(found.advice, _WIDTH)
    return lines


def _describe_understanding(found: FoundCues) -> str:
    vocabulary = load_vocabulary()
    features = [vocabulary.label("feature", f.slug) for f in found.understanding.features[:3]]
    tasks = [vocabulary.label("task", task.slug) for task in found.understanding.tasks[:1]]
    return ", ".join(features) + (f"; in {tasks[0]}" if tasks else "")


def _list_hit(number: int, hit: Hit) -> list[str]:
    """Return one cue: the caution stands before the words."""
    vocabulary = load_vocabulary()
    cue = hit.cue
    lines = [f"{number}. {cue.code}"]
    for caution in hit.cautions:
        lines += _put("Caution", caution)
    if cue.status != "ready":
        lines += _put("Status", vocabulary.label("cue_status", cue.status))
    lines += _put("Kind", _name_kind(cue.kind))
    lines += _put("Say", hit.text)
    lines += _put("Carries", cue.captures)
    lines += _put("Leaves out", cue.leaves_out)
    lines += _put("Why", "; ".join(hit.why))
    return lines


def _name_kind(kind: str) -> str:
    """Return the screen's word for a kind of cue, or its label."""
    vocabulary = load_vocabulary()
    if vocabulary.has("screen_word", kind):
        return vocabulary.screen_word(kind)
    return vocabulary.label("cue_kind", kind)


def _put(label: str, text: str) -> list[str]:
    """Return a labelled text wrapped to the width, its further lines under the first."""
    if not text:
        return []
    return textwrap.wrap(
        text,
        _WIDTH,
        initial_indent=f"   {label}:".ljust(_INDENT + 2),
        subsequent_indent=" " * (_INDENT + 2),
    )
