"""What shifted: rank cues for a question, from the library or from a table of uses."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click

from cuebook.cli.common_options import with_common_options
from cuebook.cli.output import print_json
from cuebook.errors import UsageError
from cuebook.jobs.review_request import ReviewRequest, TableRequest

CONTRASTS = ("during", "immediate", "retention", "transfer", "transfer_later")


@click.command("review")
@click.option("--metric", help="Id of the metric, such as sparc (see: cuebook metrics).")
@click.option("--task", help="Only this task.")
@click.option("--contrast", type=click.Choice(CONTRASTS), default="immediate", show_default=True)
@click.option("--better", help="higher, lower or target:VALUE; the metric's own if left out.")
@click.option("--age-band", help="Only learners of this age band.")
@click.option("--background", help="Only learners with this background.")
@click.option("--table", type=click.Path(path_type=Path), help="A table of uses (CSV, Parquet).")
@click.option("--transform", type=click.Choice(["none", "log"]), help="For --table.")
@click.option("--unit", help="Unit of the values, for --table.")
@click.option("--worthwhile", type=float, help="Smallest difference that matters.")
@click.option("--allowance", type=float, help="Allowance for hidden choice; 0.3 if left out.")
@with_common_options
def command(location: str | None, as_json: bool, **given: Any) -> None:  # noqa: FBT001
    """Rank cues by what shifted, with practice alone as the line to beat."""
    # The model needs scipy: loaded only when a review is asked for.
    from cuebook.jobs import review  # noqa: PLC0415

    if given["table"] is not None:
        reviewed = review.review_table(_read_table_request(given))
    elif given["metric"]:
        reviewed = review.review_library(location, _read_request(given))
    else:
        raise UsageError(
            "Say what to review: --metric ID, or --table FILE.",
            "See cuebook metrics for the ids.",
        )
    if as_json:
        print_json(reviewed.document)
        return
    from cuebook.jobs.review_words import describe_review  # noqa: PLC0415

    click.echo("\n".join(describe_review(reviewed.document)))


def _read_request(given: dict[str, Any]) -> ReviewRequest:
    for option in ("transform", "unit"):
        if given[option] is not None:
            raise UsageError(f"--{option} goes with --table.", "The library knows its metrics.")
    return ReviewRequest(
        metric=given["metric"],
        task=given["task"],
        contrast=given["contrast"],
        better=given["better"],
        age_band=given["age_band"],
        background=given["background"],
        worthwhile=given["worthwhile"],
        allowance=given["allowance"],
    )


def _read_table_request(given: dict[str, Any]) -> TableRequest:
    if given["better"] is None:
        raise UsageError(
            "--table needs --better higher, lower or target:VALUE.",
            "A table does not say in which direction its values are better.",
        )
    given_contrast = click.get_current_context().get_parameter_source("contrast")
    return TableRequest(
        path=given["table"],
        better=given["better"],
        transform=given["transform"] or "none",
        unit=given["unit"] or "",
        metric=given["metric"],
        task=given["task"],
        contrast=(
            None if given_contrast is click.core.ParameterSource.DEFAULT else given["contrast"]
        ),
        worthwhile=given["worthwhile"],
        allowance=given["allowance"],
    )
