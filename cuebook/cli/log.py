"""Log a block: which cue, with whom, and what followed."""

from __future__ import annotations

from typing import Any

import click

from cuebook.cli.common_options import parse_moment, with_common_options
from cuebook.cli.output import print_json, to_plain
from cuebook.errors import UsageError
from cuebook.jobs.log_entries import BlockEntry, LearnerNote, Logged
from cuebook.jobs.log_use import log_before_after, log_block
from cuebook.jobs.typed_values import parse_values


@click.command("log")
@click.option("--learner", help="Code of one learner.")
@click.option("--group", help="Code of a group: one cue for everybody in it.")
@click.option("--except", "except_codes", multiple=True, help="A member who did not get this cue.")
@click.option("--absent", "absent_codes", multiple=True, help="A member who was not there.")
@click.option("--task", required=True, help="What was practised.")
@click.option("--side", help="Left, right or both, where it matters.")
@click.option("--phase", help="Where in the session: baseline, acquisition, immediate_post …")
@click.option("--cue", help="Code of the lead cue; leave out for practice alone.")
@click.option("--wording", type=int, help="Revision of the words; the newest if left out.")
@click.option("--session", help="'new' or the id of a session; today's open one if left out.")
@click.option("--at", help="When it happened (ISO 8601); now if left out.")
@click.option("--value", "values", multiple=True, help="METRIC=NUMBER[,NUMBER…], one a trial.")
@click.option("--before", multiple=True, help="Values before the cue (makes a baseline block).")
@click.option("--after", multiple=True, help="Values after it, cue off (makes a block after).")
@click.option("--said", type=click.IntRange(min=0), help="How often the cue was said.")
@click.option("--observed", help="What was seen: clear, some, none, worse, mixed, not_seen.")
@click.option("--reaction", help="How the learner took it: liked, disliked, confused …")
@click.option("--event", help="Pain, dizzy, tired, near_fall, fall, distress.")
@click.option("--words", help="The learner's own words for it.")
@click.option("--stop", help="Why this learner stopped.")
@click.option("--chosen", default="planned", show_default=True, help="Why this cue.")
@click.option("--others", default="none", show_default=True, help="Other cues given.")
@with_common_options
def command(location: str | None, as_json: bool, **given: Any) -> None:  # noqa: FBT001
    """Log a block, its uses and typed values; print what was stored."""
    entry = _read_entry(given)
    before = parse_values(given["before"], "--before")
    after = parse_values(given["after"], "--after")
    if before or after:
        _refuse_mixed_shorthand(given)
        logged = log_before_after(location, entry, before, after)
    else:
        logged = log_block(location, entry)
    print_logged(logged, as_json=as_json)


def print_logged(logged: Logged, *, as_json: bool) -> None:
    """Say what is on disk now."""
    if as_json:
        print_json({"format": "cuebook.logged/1", **to_plain(logged)})
        return
    for caution in logged.cautions:
        click.echo(f"Caution: {caution}")
    for line in logged.lines:
        click.echo(line)


def _read_entry(given: dict[str, Any]) -> BlockEntry:
    if (given["learner"] is None) == (given["group"] is None):
        raise UsageError("Give --learner CODE or --group CODE, one of the two.")
    note = LearnerNote(
        values=parse_values(given["values"], "--value"),
        **{
            name: given[name] for name in ("said", "observed", "reaction", "event", "words", "stop")
        },
    )
    absent = LearnerNote(present="absent")
    return BlockEntry(
        note=note,
        notes=dict.fromkeys(given["absent_codes"], absent),
        at=parse_moment(given["at"]),
        except_codes=tuple(given["except_codes"]),
        **{
            name: given[name]
            for name in (
                *("learner", "group", "task", "side", "phase", "cue", "wording", "session"),
                *("chosen", "others"),
            )
        },
    )


def _refuse_mixed_shorthand(given: dict[str, Any]) -> None:
    if given["phase"]:
        raise UsageError(
            "--phase does not go with --before and --after.",
            "They make the blocks before and after the practice by themselves.",
        )
    if given["learner"] is None:
        raise UsageError(
            "--before and --after need --learner.",
            "Values belong to one learner; log a group's values one learner at a time.",
        )
