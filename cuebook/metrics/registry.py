"""The one list of metrics: what each is called, measured in, and compared by. Light to load."""

from __future__ import annotations

import csv
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from importlib import resources

from cuebook.errors import UnknownCodeError
from cuebook.vocabulary import find_nearest, load_vocabulary


@dataclass(frozen=True, slots=True)
class MetricEntry:
    """One metric as the registry knows it."""

    metric: str
    name: str
    unit: str
    """Unit of every value, always; empty: a pure number."""
    better: str
    """higher, lower, target or none; none and target need a question that fixes a direction."""
    watch_better: str
    """higher, lower or either: read when the metric is a partner to keep an eye on."""
    family: str
    how: str
    """computed, typed or both."""
    signals: str
    default_settings: Mapping[str, str]
    watch_partners: tuple[str, ...]
    features: tuple[str, ...]
    is_computed: bool
    """Whether this version computes it from a recording; if not, it can be typed."""
    transform: str
    """none, log, logit or sqrt: fixed here, never chosen from the data."""
    resolution: float
    """Smallest difference the measure can show, in its unit."""
    sensitive: tuple[str, ...]
    """Facts (rate, duration) that must agree before two values may be compared."""
    definition: int
    """Version of the definition; a new method is a new metric."""
    what_it_cannot_tell: str
    note: str


@dataclass(frozen=True)
class Registry:
    """All metrics; an unknown id names the nearest, an old id leads to its metric."""

    by_metric: Mapping[str, MetricEntry]

    @property
    def entries(self) -> tuple[MetricEntry, ...]:
        """Return all metrics in the order of the list."""
        return tuple(self.by_metric.values())

    def get(self, metric: str) -> MetricEntry:
        """Return one metric, by its id or an old id of it.

        Raises
        ------
        UnknownCodeError : no such metric; names the nearest.
        """
        if metric in self.by_metric:
            return self.by_metric[metric]
        vocabulary = load_vocabulary()
        if vocabulary.has("metric_alias", metric):
            return self.by_metric[vocabulary.entry("metric_alias", metric).related[0]]
        nearest = find_nearest(metric, self.by_metric)
        hint = f"Nearest known: {', '.join(nearest)}." if nearest else "See: cuebook metrics."
        raise UnknownCodeError(f"Unknown metric '{metric}'.", hint)

    def has(self, metric: str) -> bool:
        """Return whether the list holds this id."""
        return metric in self.by_metric


def _split(cell: str) -> tuple[str, ...]:
    return tuple(part.strip() for part in cell.split(";") if part.strip())


def _read_row(row: Mapping[str, str]) -> MetricEntry:
    settings = dict(pair.split("=", 1) for pair in _split(row["default_settings"]))
    return MetricEntry(
        metric=row["metric"],
        name=row["name"],
        unit=row["unit"],
        better=row["better"],
        watch_better=row["watch_better"],
        family=row["family"],
        how=row["how"],
        signals=row["signals"],
        default_settings=settings,
        watch_partners=_split(row["watch_partners"]),
        features=_split(row["features"]),
        is_computed=row["computed_here"] == "yes",
        transform=row["transform"],
        resolution=float(row["resolution"]),
        sensitive=_split(row["sensitive"]),
        definition=int(row["definition"]),
        what_it_cannot_tell=row["what_it_cannot_tell"],
        note=row["note"],
    )


@cache
def load_registry() -> Registry:
    """Return the registry, read once."""
    text = (resources.files("cuebook.metrics") / "data" / "metrics.csv").read_text(encoding="utf-8")
    entries = (_read_row(row) for row in csv.DictReader(text.splitlines()))
    return Registry({entry.metric: entry for entry in entries})
