"""Build the demonstration library and print one ranking."""

from __future__ import annotations

from pathlib import Path

import click

from cuebook.cli.common_options import json_option
from cuebook.cli.output import print_json, to_plain


@click.command("demo")
@click.option("--fresh", is_flag=True, help="Build it anew.")
@click.option(
    "--folder", type=click.Path(path_type=Path), help="Where; its own folder if left out."
)
@json_option
def command(*, fresh: bool, folder: Path | None, as_json: bool) -> None:
    """Build the invented demonstration, import its recordings, print the ranking of one goal."""
    from cuebook.jobs.demo.show import describe_demo, run_demo  # noqa: PLC0415

    demo = run_demo(folder, fresh=fresh)
    if as_json:
        print_json(
            {
                **demo.document,
                "library": str(demo.library),
                "imported": None if demo.imported is None else to_plain(demo.imported),
            }
        )
        return
    click.echo("\n".join(describe_demo(demo)))
