"""Export and import sets of cues."""

from __future__ import annotations

from pathlib import Path

import click

from cuebook.cli.common_options import with_common_options
from cuebook.cli.output import print_json, to_plain
from cuebook.jobs import cue_sets


@click.group("cues")
def command() -> None:
    """Export and import sets of cues."""


@command.command("import")
@click.argument("path", type=click.Path(path_type=Path))
@with_common_options
def take_in(location: str | None, as_json: bool, path: Path) -> None:  # noqa: FBT001
    """Take a set of cues in: new cues, and new wordings of known ones."""
    kept = cue_sets.import_cue_set(location, path)
    if as_json:
        print_json({"format": "cuebook.cue-import/1", **to_plain(kept)})
        return
    click.echo(
        f"{kept.added} cues added, {kept.reworded} with new wordings, {kept.unchanged} unchanged."
    )


@command.command("export")
@click.argument("path", type=click.Path(path_type=Path))
@click.option("--set", "code", help="Code of the set; all cues if left out.")
@with_common_options
def export(location: str | None, as_json: bool, path: Path, code: str | None) -> None:  # noqa: FBT001
    """Write cues into one hand-editable file."""
    count = cue_sets.export_cue_set(location, path, code)
    if as_json:
        print_json({"format": "cuebook.cue-export/1", "file": str(path), "cues": count})
        return
    click.echo(f"{count} cues written to {path}.")
