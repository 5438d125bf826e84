"""The card for the next meeting."""

from __future__ import annotations

import click

from cuebook.cli.common_options import with_common_options
from cuebook.cli.output import print_json, to_plain
from cuebook.errors import UsageError
from cuebook.jobs.last_card import read_last_card


@click.command("last")
@click.option("--learner", help="Code of one learner.")
@click.option("--group", help="Code of a group.")
@with_common_options
def command(
    location: str | None,
    as_json: bool,  # noqa: FBT001
    learner: str | None,
    group: str | None,
) -> None:
    """Show holds and notes, the last cue in its exact words, what followed, what comes first."""
    if (learner is None) == (group is None):
        raise UsageError("Give --learner CODE or --group CODE, one of the two.")
    card = read_last_card(location, learner=learner, group=group)
    if as_json:
        print_json({"format": "cuebook.last/1", **to_plain(card)})
        return
    click.echo("\n".join(card.lines))
