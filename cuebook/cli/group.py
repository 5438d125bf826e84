"""Groups: learners who meet together."""

from __future__ import annotations

import click

from cuebook.cli.common_options import with_common_options
from cuebook.cli.output import print_json, to_plain
from cuebook.jobs import people


@click.group("group")
def command() -> None:
    """Add and show groups."""


@command.command("add")
@click.argument("code")
@click.option("--member", "members", multiple=True, help="Code of a learner in it.")
@with_common_options
def add(location: str | None, as_json: bool, code: str, members: tuple[str, ...]) -> None:  # noqa: FBT001
    """Add a group, or more members to one."""
    listed = people.add_group(location, code, members)
    if as_json:
        print_json({"format": "cuebook.group/1", "group": code, "members": list(listed)})
        return
    click.echo(f"{code}: {len(listed)} in the group: {', '.join(listed) or 'nobody yet'}.")


@command.command("list")
@with_common_options
def list_all(location: str | None, as_json: bool) -> None:  # noqa: FBT001
    """List groups and who is in them."""
    lines = people.list_groups(location)
    if as_json:
        print_json({"format": "cuebook.groups/1", "groups": to_plain(lines)})
        return
    for line in lines:
        click.echo(f"{line.code:<20} {line.note}")
    if not lines:
        click.echo("No groups yet. Add one: cuebook group add CODE --member LEARNER")
