"""On which line of a TOML text a table or a key stands; tomllib itself does not tell."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass

_HEADER = re.compile(r"^\s*\[(\[)?\s*([A-Za-z0-9_.\-]+)\s*\]\]?\s*(#.*)?$")
_KEY = re.compile(r"""^\s*("?)([A-Za-z0-9_\-]+)\1\s*=""")
_DECODE_PLACE = re.compile(r"\(at line (\d+), column \d+\)")
_MULTI_LINE_MARKS = ('"""', "'''")

Path = tuple[str | int, ...]
"""Way to a value: keys, and numbers for the entries of an array of tables."""


@dataclass(frozen=True)
class TomlLines:
    """Line numbers (from 1) of the tables and keys of one text."""

    by_path: Mapping[Path, int]
    lines: tuple[str, ...]

    def find(self, *path: str | int) -> int | None:
        """Return the line of a value, or of the nearest table around it; None if unknown."""
        for length in range(len(path), 0, -1):
            if path[:length] in self.by_path:
                return self.by_path[path[:length]]
        return None

    def find_item(self, item: str, *path: str | int) -> int | None:
        """Return the line on which a text stands in the list at a path, or the list's own line."""
        start = self.find(*path)
        if start is None:
            return None
        for number in range(start, len(self.lines) + 1):
            line = self.lines[number - 1]
            if number > start and (_KEY.match(line) or _HEADER.match(line)):
                break
            if f'"{item}"' in line or f"'{item}'" in line:
                return number
        return start


def map_lines(text: str) -> TomlLines:
    """Return where the tables and keys of a TOML text stand."""
    lines = tuple(text.split("\n"))
    by_path: dict[Path, int] = {}
    counts: dict[Path, int] = {}
    table: Path = ()
    open_mark: str | None = None
    for number, line in enumerate(lines, start=1):
        if open_mark is None:
            header = _HEADER.match(line)
            key = _KEY.match(line)
            if header:
                table = _open_table(header[2], is_array=bool(header[1]), counts=counts)
                by_path.setdefault(table, number)
            elif key:
                by_path.setdefault((*table, key[2]), number)
        open_mark = _follow_marks(line, open_mark)
    return TomlLines(by_path, lines)


def _open_table(name: str, *, is_array: bool, counts: dict[Path, int]) -> Path:
    """Return the path of a table header; entries of arrays of tables are numbered."""
    path: Path = ()
    parts = name.split(".")
    for depth, part in enumerate(parts):
        path = (*path, part)
        if is_array and depth == len(parts) - 1:
            counts[path] = counts.get(path, -1) + 1
        if path in counts:
            path = (*path, counts[path])
    return path


def _follow_marks(line: str, open_mark: str | None) -> str | None:
    """Return which multi-line string is still open at the end of a line."""
    rest = line
    while rest:
        if open_mark is not None:
            end = rest.find(open_mark)
            if end < 0:
                return open_mark
            rest, open_mark = rest[end + 3 :], None
            continue
        found = [(rest.find(mark), mark) for mark in _MULTI_LINE_MARKS if mark in rest]
        if not found:
            return None
        start, open_mark = min(found)
        rest = rest[start + 3 :]
    return open_mark


def find_decode_line(message: str, text: str) -> int:
    """Return the line a tomllib error speaks of; the last one if it speaks of the end."""
    found = _DECODE_PLACE.search(message)
    return int(found[1]) if found else text.count("\n") + 1
