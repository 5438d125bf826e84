"""How a text file lays out its table: delimiter, decimal mark, where the numbers begin."""

from __future__ import annotations

import re
from collections import Counter
from dataclasses import dataclass

from cuebook.recordings.units import is_unit

DELIMITERS = ("\t", ";", ",", "|", " ")
_MISSING = frozenset({"", "nan", "n/a", "na", "null", "none", "inf", "-inf", "-"})
_NUMBER = {
    ".": re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?"),
    ",": re.compile(r"[+-]?(\d+,?\d*|,\d+)([eE][+-]?\d+)?"),
}
_SAMPLE_LINES = 50


@dataclass(frozen=True, slots=True)
class Dialect:
    """The layout of a table in a text file."""

    delimiter: str
    decimal: str
    n_columns: int
    first_row: int
    """Index of the first line of numbers."""
    header_row: int | None
    """Index of the line with names; None if there is none."""


def is_missing(cell: str) -> bool:
    """Return whether a cell stands for a missing value."""
    return cell.strip().lower() in _MISSING


def is_number(cell: str, decimal: str) -> bool:
    """Return whether a cell is a number in this dialect."""
    return _NUMBER[decimal].fullmatch(cell.strip()) is not None


def split_line(line: str, delimiter: str) -> list[str]:
    """Return the cells of a line; runs of blanks count as one delimiter."""
    if delimiter == " ":
        return line.split()
    cells = [cell.strip().strip('"').strip() for cell in line.split(delimiter)]
    while len(cells) > 1 and cells[-1] == "":
        cells.pop()  # a delimiter at the end of the line
    return cells


def detect_dialect(lines: list[str]) -> Dialect | None:
    """Return the layout that makes most of the file's last lines equal rows of numbers.

    Delimiter and decimal mark are tried together: constant number of cells times share of
    numbers. None if nothing makes a table.
    """
    filled = [line for line in lines if line.strip() and not is_comment(line)]
    sample = filled[-_SAMPLE_LINES:]
    best: tuple[float, int, str, str, int] | None = None
    for order, delimiter in enumerate(DELIMITERS):
        for decimal in (".", ","):
            if delimiter == decimal:
                continue
            score, width = _score(sample, delimiter, decimal)
            # A decimal comma must earn its place: without one in the file both marks score alike.
            rank = (score, -order if decimal == "." else -order - 10, delimiter, decimal, width)
            if score > 0 and (best is None or rank[:2] > best[:2]):
                best = rank
    if best is None:
        return None
    _, _, delimiter, decimal, width = best
    first = _find_first_row(lines, delimiter, decimal, width)
    if first is None:
        return None
    header = _find_header(lines, first, delimiter, decimal, width)
    return Dialect(delimiter, decimal, width, first, header)


def is_comment(line: str) -> bool:
    """Return whether a line is a remark."""
    return line.lstrip().startswith(("#", "//", "%"))


def _score(sample: list[str], delimiter: str, decimal: str) -> tuple[float, int]:
    rows = [split_line(line, delimiter) for line in sample]
    if not rows:
        return 0.0, 0
    width, n_equal = Counter(len(row) for row in rows).most_common(1)[0]
    cells = [cell for row in rows if len(row) == width for cell in row]
    numbers = sum(is_number(cell, decimal) for cell in cells)
    missing = sum(is_missing(cell) for cell in cells)
    share = (numbers + 0.5 * missing) / max(len(cells), 1)
    if share < 0.3 or not numbers:
        return 0.0, width
    # More columns at the same share explain more of the line.
    return n_equal / len(rows) * share * (1.0 + 0.01 * min(width, 50)), width


def _find_first_row(lines: list[str], delimiter: str, decimal: str, width: int) -> int | None:
    for index, line in enumerate(lines):
        if not line.strip() or is_comment(line):
            continue
        row = split_line(line, delimiter)
        numbers = [is_number(cell, decimal) for cell in row]
        is_row = abs(len(row) - width) <= 1 and sum(numbers) >= max(1, 0.3 * width)
        if is_row and (numbers[0] or is_missing(row[0]) or sum(numbers) > 0.6 * width):
            following = [
                split_line(later, delimiter)
                for later in lines[index + 1 : index + 4]
                if later.strip() and not is_comment(later)
            ]
            if all(abs(len(other) - len(row)) <= 1 for other in following):
                return index
    return None


def _find_header(
    lines: list[str], first: int, delimiter: str, decimal: str, width: int
) -> int | None:
    for index in range(first - 1, max(first - 6, -1), -1):
        line = lines[index].lstrip("#/% ")
        if not line.strip():
            continue
        cells = split_line(line, delimiter)
        names = [cell for cell in cells if cell and not is_number(cell, decimal)]
        if len(names) >= max(1, width // 2) and not all(_looks_like_unit(n) for n in names):
            return index
    return None


def _looks_like_unit(cell: str) -> bool:
    return is_unit(cell.strip("()[]"))
