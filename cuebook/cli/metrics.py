"""List the metrics; explain one."""

from __future__ import annotations

import textwrap

import click

from cuebook.cli.common_options import with_common_options
from cuebook.cli.output import print_json, to_plain
from cuebook.metrics.registry import MetricEntry, load_registry


@click.command("metrics")
@click.argument("metric", required=False)
@with_common_options
def command(location: str | None, as_json: bool, metric: str | None) -> None:  # noqa: FBT001
    """List all metrics, or explain one."""
    del location
    registry = load_registry()
    if metric is not None:
        entry = registry.get(metric)
        if as_json:
            print_json({"format": "cuebook.metric/1", **to_plain(entry)})
            return
        click.echo("\n".join(explain(entry)))
        return
    if as_json:
        listed = [to_plain(entry) for entry in registry.entries]
        print_json({"format": "cuebook.metrics/1", "metrics": listed})
        return
    for entry in registry.entries:
        how = "from a recording" if entry.is_computed else "typed in"
        click.echo(f"{entry.metric:<28} {entry.name:<44} {entry.unit or '–':<10} {how}")


def explain(entry: MetricEntry) -> list[str]:
    """Return what a metric says, what it cannot say and how it is made."""
    better = {
        "higher": "more is better",
        "lower": "less is better",
        "target": "best at a target, which the question names",
        "none": "no direction of its own; the question names one",
    }[entry.better]
    lines = [
        f"{entry.name} ({entry.metric})",
        f"Unit:         {entry.unit or 'a pure number'}",
        f"Direction:    {better}",
        f"Compared as:  {_describe_scale(entry)}",
        f"Needs:        {entry.signals}",
    ]
    if entry.default_settings:
        settings = ", ".join(f"{name}={value}" for name, value in entry.default_settings.items())
        lines.append(f"Settings:     {settings}")
    if entry.watch_partners:
        names = [load_registry().get(partner).name for partner in entry.watch_partners]
        lines.append(f"Watch too:    {', '.join(names)}")
    lines.append(f"Cannot tell:  {entry.what_it_cannot_tell}")
    if entry.note:
        lines.append(f"Note:         {entry.note}")
    if not entry.is_computed:
        lines.append("In this version its values are typed in: cuebook log --value.")
    return [
        part
        for line in lines
        for part in textwrap.wrap(line, 78, subsequent_indent=" " * 14) or [""]
    ]


def _describe_scale(entry: MetricEntry) -> str:
    return {
        "none": "the values themselves",
        "log": "ratios (log scale), shown in per cent",
        "logit": "odds",
        "sqrt": "square roots of counts",
    }[entry.transform]
