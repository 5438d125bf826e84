"""The program's entry: finds the command, turns errors into one line and an exit code."""

from __future__ import annotations

import os
import sys
from importlib import import_module
from typing import Any

import click

from cuebook import __version__
from cuebook.cli.exit_codes import ExitCode
from cuebook.cli.output import print_error
from cuebook.errors import CuebookError, UsageError

_COMMANDS: dict[str, tuple[str, str]] = {
    # name: (module below cuebook.cli that holds `command`, one line for --help)
    "demo": ("demo", "Build the invented demonstration library and print one ranking."),
    "find": ("find", "Cues for a problem, in your own words."),
    "learner": ("learner", "Add and show learners; note consents and holds."),
    "group": ("group", "Add and show groups."),
    "session": ("session", "List, show and end sessions."),
    "log": ("log", "Log a block: which cue, with whom, what followed."),
    "last": ("last", "The card for the next meeting."),
    "import": ("take_in", "Take recordings in."),
    "measure": ("measure", "Metrics of a recording; nothing is stored."),
    "metrics": ("metrics", "List the metrics; explain one."),
    "cues": ("cues", "Export and import sets of cues."),
    "review": ("review", "What shifted: rank cues for a question."),
}


class LazyGroup(click.Group):
    """A group that imports a command only when it is called, to keep start-up light."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Return the names of all commands."""
        del ctx
        return list(_COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """Import and return one command, or None if there is none of that name."""
        del ctx
        if cmd_name not in _COMMANDS:
            return None
        command = import_module(f"cuebook.cli.{_COMMANDS[cmd_name][0]}").command
        if not isinstance(command, click.Command):  # pragma: no cover - a programming error
            raise TypeError(cmd_name)
        return command

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """List the commands from the table above, importing none of them."""
        del ctx
        with formatter.section("Commands"):
            formatter.write_dl([(name, line) for name, (_, line) in _COMMANDS.items()])


@click.group(cls=LazyGroup, invoke_without_command=True)
@click.version_option(__version__, prog_name="cuebook")
@click.option(
    "--library", "location", envvar="CUEBOOK_LIBRARY", metavar="PATH", help="Folder of the library."
)
@click.pass_context
def cuebook(ctx: click.Context, location: str | None) -> int | None:
    """Find, log and review the words that steer movement.

    Without a command the screens open. Every command takes --json and --library.
    """
    if ctx.invoked_subcommand is None:
        if not (sys.stdin.isatty() and sys.stdout.isatty()):
            click.echo(ctx.get_help())  # screens need a terminal; a script gets the list
            return None
        from cuebook.tui.app import run_app  # noqa: PLC0415

        return run_app(location)
    return None


def run(arguments: list[str]) -> int:
    """Run one command line and return its exit code; errors are printed, never raised."""
    as_json = "--json" in arguments
    try:
        result: Any = cuebook.main(args=arguments, prog_name="cuebook", standalone_mode=False)
    except CuebookError as error:
        return print_error(error, as_json=as_json)
    except click.exceptions.Exit as exit_request:
        return exit_request.exit_code
    except click.ClickException as error:
        return print_error(UsageError(error.format_message(), "See --help."), as_json=as_json)
    except (click.Abort, KeyboardInterrupt):
        return int(ExitCode.INTERRUPTED)
    except BrokenPipeError:
        # The reader closed the pipe (`| head`): no error. Point stdout away so that the
        # interpreter's last flush does not complain.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return int(ExitCode.DONE)
    return result if isinstance(result, int) else int(ExitCode.DONE)


def main() -> None:
    """Run the program with the arguments of the process."""
    sys.exit(run(sys.argv[1:]))
