"""Sessions: list, show, end."""

from __future__ import annotations

import click

from cuebook.cli.common_options import with_common_options
from cuebook.cli.output import print_json, to_plain
from cuebook.jobs import meetings


@click.group("session")
def command() -> None:
    """List, show and end sessions."""


@command.command("list")
@click.option("--learner", help="Only sessions of this learner.")
@click.option("--group", help="Only sessions of this group.")
@with_common_options
def list_all(
    location: str | None,
    as_json: bool,  # noqa: FBT001
    learner: str | None,
    group: str | None,
) -> None:
    """List sessions, the newest first."""
    lines = meetings.list_sessions(location, learner=learner, group=group)
    if as_json:
        print_json({"format": "cuebook.sessions/1", "sessions": to_plain(lines)})
        return
    for line in lines:
        state = "open" if line.is_open else "ended"
        click.echo(
            f"{line.session_id}  {line.started_at.astimezone():%Y-%m-%d %H:%M}  "
            f"{line.who}, {line.n_blocks} blocks, {state}"
        )
    if not lines:
        click.echo("No session yet.")


@command.command("show")
@click.argument("session_id")
@click.option("--note", is_flag=True, help="Only the lines to paste into the clinical record.")
@with_common_options
def show(
    location: str | None,
    as_json: bool,  # noqa: FBT001
    session_id: str,
    note: bool,  # noqa: FBT001
) -> None:
    """Show one session in plain lines."""
    lines = meetings.show_session(location, session_id)
    if note:
        lines = lines[:-1]
    if as_json:
        print_json({"format": "cuebook.session/1", "session": session_id, "lines": list(lines)})
        return
    click.echo("\n".join(lines))


@command.command("end")
@click.argument("session_id")
@with_common_options
def end(location: str | None, as_json: bool, session_id: str) -> None:  # noqa: FBT001
    """Note that a session is over."""
    from cuebook.jobs.log_use import end_session  # noqa: PLC0415

    end_session(location, session_id)
    if as_json:
        print_json({"format": "cuebook.session/1", "session": session_id, "ended": True})
        return
    click.echo("Session ended.")
