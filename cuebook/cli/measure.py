"""Metrics of a recording; nothing is stored."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click

from cuebook.cli.common_options import with_common_options
from cuebook.cli.output import print_json
from cuebook.cli.reading_options import take_reading_options, with_reading_options


@click.command("measure")
@click.argument("path", type=click.Path(path_type=Path))
@click.option("--task", help="The task: its movement family picks the metrics.")
@click.option("--metric", "metrics", multiple=True, help="Only this metric (see: cuebook metrics).")
@with_reading_options
@with_common_options
def command(location: str | None, as_json: bool, **given: Any) -> None:  # noqa: FBT001
    """Compute the metrics of a file."""
    from cuebook.jobs.measure import measure_file, to_document  # noqa: PLC0415

    del location
    options, settings = take_reading_options(given)
    measured = measure_file(
        given["path"],
        task=given["task"],
        metrics=tuple(given["metrics"]),
        settings=settings,
        options=options,
    )
    document = to_document(measured)
    if as_json:
        print_json(document)
        return
    click.echo("\n".join(describe_measured(document)))


def describe_measured(document: dict[str, Any]) -> list[str]:
    """Return what was understood and what was measured, as lines."""
    from cuebook.metrics.registry import load_registry  # noqa: PLC0415

    recording = document["recording"]
    rate = recording["rate_hz"]
    lines = [
        f"{document['file']}: {recording['n_samples']} "
        + ("events" if rate is None else "samples")
        + f", {recording['duration_s']:.3g} s"
        + ("" if rate is None else f", {rate:.5g} Hz (from the {recording['rate_source']})")
    ]
    lines += [f"  {note}" for note in recording["notes"]]
    for one in document["measurements"]:
        entry = load_registry().get(one["metric"])
        if one["value"] is None:
            lines.append(f"  {entry.name:<32} cannot tell: {one['reason']}")
            continue
        flags = f"  ({', '.join(one['flags'])})" if one["flags"] else ""
        lines.append(f"  {entry.name:<32} {one['value']:>10.4g} {one['unit']:<6}{flags}".rstrip())
    if not document["measurements"]:
        lines.append("  No metric fits this recording; name the task with --task.")
    return lines
