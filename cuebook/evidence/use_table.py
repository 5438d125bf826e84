"""Read a table of uses from anywhere: its rows as changes, its faults by row."""

from __future__ import annotations

import math
import re
from collections import Counter, defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

from cuebook.errors import InputError, NeedsAnswerError, Place, UsageError
from cuebook.evidence.table_visits import RowPlace, Visits
from cuebook.practice.changes import AttemptSet, Change, ChangeKey, NoChange, UseRecord
from cuebook.practice.scales import AttemptScale

if TYPE_CHECKING:
    import pandas as pd

REQUIRED = ("cue", "learner", "before", "after")
PICKED = ("metric", "contrast", "task")
WEIGHT_TOLERANCE = 0.01
_FIRST_ROW = 2
"""Line of the first use: the header is line 1."""


@dataclass(frozen=True, slots=True)
class RefusedRow:
    """A row that could not be used."""

    row: int
    """Line of the file, counted from 1."""
    reason: str


@dataclass(frozen=True, slots=True)
class UseTable:
    """A table of uses, read."""

    changes: tuple[Change, ...]
    without: tuple[NoChange, ...]
    contrast: str
    metric: str
    task: str
    refused: tuple[RefusedRow, ...]
    notes: tuple[str, ...]


@dataclass
class _Faults:
    refused: list[RefusedRow] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)

    def refuse(self, row: int, reason: str) -> None:
        self.refused.append(RefusedRow(row, reason))

    def close(self) -> None:
        """Put refused rows in the order of the file and say how many there are."""
        self.refused.sort(key=lambda one: one.row)
        if self.refused:
            many = "row" if len(self.refused) == 1 else "rows"
            self.notes.append(f"{len(self.refused)} {many} could not be used")


def read_use_table(
    path: Path,
    scale: AttemptScale,
    *,
    metric: str | None = None,
    contrast: str | None = None,
    task: str | None = None,
) -> UseTable:
    """Read a CSV or Parquet table of uses.

    Parameters
    ----------
    path : the file; ``.parquet`` by its name, else CSV.
    scale : transform and direction of the values.
    metric, contrast, task : pick rows where the table holds several.

    Raises
    ------
    InputError : no such file, unreadable, a required column missing, no usable row.
    NeedsAnswerError : several metrics, contrasts or tasks, and none picked.
    """
    frame = _load(path)
    missing = [name for name in REQUIRED if name not in frame.columns]
    if missing:
        raise InputError(
            f"{path} has no column {', '.join(missing)}.",
            f"It needs {', '.join(REQUIRED)}; see the command's help for the others.",
            Place(file=str(path), row=1),
        )
    faults = _Faults()
    rows = [(int(str(index)) + _FIRST_ROW, dict(row)) for index, row in frame.iterrows()]
    picked: dict[str, str] = {}
    for name, given in (("metric", metric), ("contrast", contrast), ("task", task)):
        rows, picked[name] = _pick(rows, name, given)
    contrast_used = picked["contrast"] or contrast or "immediate"
    records = _build(rows, scale, contrast_used, picked, faults)
    changes, without = _gather_parts(records, faults)
    faults.close()
    if not changes and not without:
        first = faults.refused[0] if faults.refused else None
        detail = f" Row {first.row}: {first.reason}." if first else ""
        raise InputError(
            f"{path} holds no usable row.{detail}",
            "Mend the rows and call again.",
            Place(file=str(path), row=first.row if first else None),
        )
    return UseTable(
        tuple(changes),
        tuple(without),
        contrast_used,
        picked["metric"] or metric or "",
        picked["task"] or task or "",
        tuple(faults.refused),
        tuple(faults.notes),
    )


def _load(path: Path) -> pd.DataFrame:
    import pandas as pd  # noqa: PLC0415

    place = Place(file=str(path))
    if path.is_dir():
        raise InputError(f"{path} is a folder.", "Name a CSV or Parquet file.", place)
    try:
        read = pd.read_parquet if path.suffix.lower() == ".parquet" else _read_text
        frame = read(path)
    except FileNotFoundError as error:
        raise InputError(f"There is no file {path}.", "Check its name.", place) from error
    except (OSError, ValueError) as error:  # pandas' and pyarrow's own errors are ValueErrors
        line = re.search(r"line (\d+), saw", str(error))
        where = f": line {line[1]} has more cells than the header" if line else ""
        raise InputError(
            f"{path} cannot be read as a table{where}.",
            "Save it as CSV or Parquet again.",
            Place(file=str(path), row=int(line[1])) if line else place,
        ) from error
    frame.columns = [str(name).strip().lower() for name in frame.columns]
    if len(set(frame.columns)) != len(frame.columns):
        raise InputError(f"{path} names a column twice.", "Rename one.", place)
    return frame.reset_index(drop=True)


def _read_text(path: Path) -> pd.DataFrame:
    """Read CSV with the header as an ordinary row.

    A reader that is told of a header renames columns that are there twice, and shifts the cells
    of rows that are too long.
    """
    import pandas as pd  # noqa: PLC0415

    table = pd.read_csv(
        path,
        header=None,
        dtype=str,
        keep_default_na=False,
        encoding="utf-8-sig",
        skip_blank_lines=False,
    )
    frame = table.iloc[1:].reset_index(drop=True)
    frame.columns = pd.Index(table.iloc[0].tolist())
    return frame


Row = tuple[int, dict[str, Any]]


def _pick(rows: list[Row], name: str, given: str | None) -> tuple[list[Row], str]:
    """Return the rows of one metric, contrast or task, and which one it is."""
    seen = Counter(_text(row, name) for _, row in rows if _text(row, name))
    if not seen:
        return rows, ""
    if given is None:
        if len(seen) > 1:
            raise NeedsAnswerError(
                f"The table holds several of {name}: {', '.join(sorted(seen))}.",
                f"Pick one with --{name}.",
            )
        return rows, next(iter(seen))
    if given not in seen:
        raise UsageError(f"The table holds no {name} '{given}'.", f"It has: {', '.join(seen)}.")
    return [(number, row) for number, row in rows if _text(row, name) == given], given


def _text(row: Mapping[str, Any], name: str) -> str:
    value = row.get(name)
    if value is None or (isinstance(value, float) and math.isnan(value)):
        return ""
    return str(value).strip()


def _number(row: Mapping[str, Any], name: str) -> float | None:
    """Return a cell as a number; None if empty. Text raises ValueError."""
    text = _text(row, name)
    if not text:
        return None
    value = float(text)
    if not math.isfinite(value):
        raise ValueError(text)
    return value


@dataclass(frozen=True, slots=True)
class _Part:
    """One row, read; ``share`` of a change that several rows may belong to."""

    row: int
    change_name: str
    """Empty: the row is a change of its own."""
    share: float | None
    """None: not said."""
    result: Change | NoChange


def _build(
    rows: list[Row],
    scale: AttemptScale,
    contrast: str,
    picked: Mapping[str, str],
    faults: _Faults,
) -> list[_Part]:
    visits = Visits(
        [
            RowPlace(number, _text(row, "learner"), _text(row, "session"), _text(row, "order"))
            for number, row in rows
        ]
    )
    faults.notes += visits.list_notes()
    if scale.better == "target":
        faults.notes.append("means, not attempts, were folded at the target")
    seen: set[tuple[str, ...]] = set()
    parts = []
    for number, row in rows:
        mark = tuple(_text(row, name) for name in sorted(row))
        if not any(mark):
            faults.refuse(number, "empty")
            continue
        if mark in seen:
            faults.refuse(number, "the same as an earlier row")
            continue
        seen.add(mark)
        try:
            part = _read_row(number, row, scale, contrast, picked, visits)
        except InputError as error:
            faults.refuse(number, error.message.rstrip("."))
            continue
        parts.append(part)
    return parts


def _read_row(
    number: int,
    row: Mapping[str, Any],
    scale: AttemptScale,
    contrast: str,
    picked: Mapping[str, str],
    visits: Visits,
) -> _Part:
    learner = _text(row, "learner")
    if not learner:
        raise InputError("no learner")
    cue = _text(row, "cue") or None
    chosen = _text(row, "chosen").lower() or "unknown"
    assigned = _text(row, "assigned")
    use = UseRecord(
        use=f"row {number}",
        learner=learner,
        cue=cue,
        task=picked["task"],
        session=visits.session_of(number),
        k=visits.order_of(number),
        t=visits.visit_of(number),
        kind=_text(row, "kind") or None,
        event=_text(row, "event") or None,
        assigned=(assigned or None) if "assigned" in row else cue,
        randomised=chosen == "random",
        chosen=chosen,
        stop_reason=_text(row, "stopped") or None,
    )
    _read_cell(row, "order")
    share = _read_cell(row, "weight")
    if share is not None and not 0 < share <= 1:
        raise InputError(f"weight is {share:g}, not a share of one change")
    before = _read_set(row, "before", scale)
    if use.stop_reason is not None:
        return _Part(number, "", None, NoChange(use, contrast, "stopped", before))
    after = _read_set(row, "after", scale)
    if before is None or after is None:
        if before is None and after is None:
            raise InputError("neither before nor after")
        reason = "no_before" if before is None else "no_after"
        return _Part(number, "", None, NoChange(use, contrast, reason, before))
    if scale.better == "target" and not 0.5 <= _count(row, "before") / _count(row, "after") <= 2.0:
        raise InputError("folding means at a target needs like numbers of attempts")
    key = ChangeKey(picked["metric"] or scale.metric, "table", picked["task"])
    change = Change(use, contrast, key, before, after, days=_read_cell(row, "days") or 0.0)
    return _Part(number, _text(row, "change"), share, change)


def _read_cell(row: Mapping[str, Any], name: str) -> float | None:
    try:
        return _number(row, name)
    except ValueError as error:
        raise InputError(f"{name} is '{_text(row, name)}', not a finite number") from error


def _count(row: Mapping[str, Any], name: str) -> int:
    """Return the number of attempts behind a mean; 1 where it is not said."""
    n = _read_cell(row, f"n_{name}")
    if n is not None and (n != int(n) or n < 1):
        raise InputError(f"n_{name} is {n:g}, not a whole number of at least 1")
    return 1 if n is None else int(n)


def _read_set(row: Mapping[str, Any], name: str, scale: AttemptScale) -> AttemptSet | None:
    """Return the mean of attempts as a set; None where the cell is empty."""
    mean = _read_cell(row, name)
    if mean is None:
        return None
    count = _count(row, name)
    spread = _read_cell(row, f"sd_{name}")
    if spread is not None and (spread < 0 or count == 1):
        raise InputError(f"sd_{name} needs at least two attempts and cannot be negative")
    scaled = scale.apply([mean]).values[0]
    # On a log scale a small SD is a ratio: the delta method, d ln y = dy / y.
    factor = 1.0 / mean if scale.transform == "log" and mean > 0 else 1.0
    if scale.transform == "sqrt":
        factor = 0.5 / math.sqrt(mean + 3.0 / 8.0)
    squares = (count - 1) * ((spread or 0.0) * factor) ** 2
    if count > 1 and spread is None:
        # The number of attempts without their spread says nothing of their noise.
        return AttemptSet(scaled, 1, 0.0)
    return AttemptSet(scaled, count, squares)


def _gather_parts(parts: Sequence[_Part], faults: _Faults) -> tuple[list[Change], list[NoChange]]:
    """Join rows of the same retention change; give single rows as they are."""
    changes: list[Change] = []
    without: list[NoChange] = []
    shared: dict[tuple[str, str], list[tuple[_Part, Change]]] = defaultdict(list)
    for part in parts:
        if isinstance(part.result, NoChange):
            without.append(part.result)
        elif part.change_name:
            shared[part.result.use.learner, part.change_name].append((part, part.result))
        else:
            changes.append(part.result)
    for (_, name), own in shared.items():
        fault = _find_fault(own)
        if fault is None:
            changes.append(_join(own))
            continue
        for part, _ in own:
            faults.refuse(part.row, f"change {name}: {fault}")
    return changes, without


def _find_fault(own: Sequence[tuple[_Part, Change]]) -> str | None:
    """Return why rows cannot be parts of one change; None if they can."""
    shares = [part.share for part, _ in own if part.share is not None]
    if shares and len(shares) < len(own):
        return "some of its rows have no weight"
    if shares and abs(math.fsum(shares) - 1.0) > WEIGHT_TOLERANCE:
        return f"its weights sum to {math.fsum(shares):g}, not to 1"
    if len({(change.before, change.after) for _, change in own}) > 1:
        return "its rows differ in before or after"
    return None


def _join(own: Sequence[tuple[_Part, Change]]) -> Change:
    """Return one change of several cues; without weights they share it evenly."""
    total = math.fsum(part.share or 1.0 for part, _ in own)
    weights = tuple(
        (change.use.cue, (part.share or 1.0) / total)
        for part, change in own
        if change.use.cue is not None
    )
    return replace(own[0][1], weights=weights)
