"""Take recordings in."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click

from cuebook.cli.common_options import parse_moment, with_common_options
from cuebook.cli.output import print_json, to_plain
from cuebook.cli.reading_options import take_reading_options, with_reading_options
from cuebook.jobs.log_entries import BlockEntry


@click.command("import")
@click.argument("paths", nargs=-1, required=True, type=click.Path(path_type=Path))
@click.option("--learner", required=True, help="Whose recordings they are.")
@click.option("--task", required=True, help="What was done.")
@click.option("--phase", required=True, help="baseline, acquisition, immediate_post …")
@click.option("--cue", help="Lead cue of the block (acquisition only).")
@click.option("--side", help="Left, right or both, where it matters.")
@click.option("--session", help="'new' or the id of a session; today's open one if left out.")
@click.option("--block", "block_id", help="Id of a block that is logged already.")
@click.option("--at", help="When it happened (ISO 8601); now if left out.")
@click.option("--again", is_flag=True, help="The same recording belongs here, too.")
@click.option("--preview", is_flag=True, help="Show what is understood; store nothing.")
@with_reading_options
@with_common_options
def command(location: str | None, as_json: bool, **given: Any) -> None:  # noqa: FBT001
    """Take recordings in as the trials of one block, in the order given."""
    from cuebook.jobs import take_in  # noqa: PLC0415

    options, settings = take_reading_options(given)
    entry = BlockEntry(
        task=given["task"],
        learner=given["learner"],
        phase=given["phase"],
        cue=given["cue"],
        side=given["side"],
        session=given["session"],
        at=parse_moment(given["at"]),
    )
    if given["preview"]:
        _show_preview(list(given["paths"]), entry.task, options, settings, as_json=as_json)
        return
    taken = take_in.take_in(
        location,
        list(given["paths"]),
        entry,
        block_id=given["block_id"],
        again=given["again"],
        options=options,
        settings=settings,
    )
    if as_json:
        print_json({"format": "cuebook.import/1", **to_plain(taken)})
        return
    for note in taken.notes:
        click.echo(f"Understood: {note}")
    click.echo("\n".join(taken.lines))


def _show_preview(
    paths: list[Path],
    task: str,
    options: Any,
    settings: dict[str, str],
    *,
    as_json: bool,
) -> None:
    from cuebook.cli.measure import describe_measured  # noqa: PLC0415
    from cuebook.jobs.measure import to_document  # noqa: PLC0415
    from cuebook.jobs.take_in import prepare_files  # noqa: PLC0415

    ready = prepare_files(paths, task, options=options, settings=settings)
    documents = [to_document(file.measured) for file in ready]
    if as_json:
        print_json({"format": "cuebook.preview/1", "files": documents})
        return
    for document in documents:
        click.echo("\n".join(describe_measured(document)))
    click.echo("Nothing was stored.")
