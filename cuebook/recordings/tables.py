"""Delimited text as a table of numbers that knows its lines."""

from __future__ import annotations

import io
from dataclasses import dataclass, field

import numpy as np

from cuebook.errors import InputError, Place, UsageError
from cuebook.recordings.dialect import (
    Dialect,
    detect_dialect,
    is_comment,
    is_missing,
    is_number,
    split_line,
)
from cuebook.recordings.recording import FloatArray
from cuebook.vocabulary import find_nearest

_MISSING_WORDS = ["", "nan", "NaN", "NAN", "n/a", "N/A", "na", "NA", "null", "none", "None", "-"]


@dataclass(eq=False)
class TextTable:
    """The rows of a text file; numbers are read when asked for."""

    file: str
    names: tuple[str, ...]
    """Column names; their numbers from 1 where there is no header."""
    has_header: bool
    dialect: Dialect
    lines: list[str]
    """The rows' text, without remarks and empty lines."""
    rows: list[int]
    """Line of the file for each row, counted from 1."""
    _columns: list[FloatArray | None] = field(default_factory=list)

    @property
    def n_rows(self) -> int:
        """Return how many rows there are."""
        return len(self.lines)

    def find_column(self, wanted: str) -> int:
        """Return the index of a column given by its name or its number from 1.

        Raises
        ------
        UsageError : there is none; the nearest name is named.
        """
        if wanted in self.names:
            return self.names.index(wanted)
        if wanted.isdigit() and 1 <= int(wanted) <= len(self.names):
            return int(wanted) - 1
        nearest = find_nearest(wanted, self.names) if self.has_header else ()
        hint = f"Nearest: {', '.join(nearest)}." if nearest else ""
        raise UsageError(
            f"{self.file} has no column '{wanted}' (it has {len(self.names)}).",
            hint,
            Place(file=self.file),
        )

    def get_cells(self, column: int) -> list[str]:
        """Return a column as text."""
        cells = []
        for line in self.lines:
            row = split_line(line, self.dialect.delimiter)
            cells.append(row[column] if column < len(row) else "")
        return cells

    def get_numbers(self, column: int) -> FloatArray:
        """Return a column as numbers; NaN where missing.

        Raises
        ------
        InputError : text that is no number; names line and column.
        """
        values = self._load()[column]
        if values is not None:
            return values
        for row, cell in zip(self.rows, self.get_cells(column), strict=True):
            if not is_number(cell, self.dialect.decimal) and not is_missing(cell):
                shown = cell if len(cell) <= 20 else cell[:20] + "…"
                raise InputError(
                    f"Line {row} of {self.file}: column '{self.names[column]}' holds "
                    f"'{shown}', which is not a number.",
                    "Fix the cell, or leave it empty if the value is missing.",
                    Place(self.file, row, self.names[column]),
                )
        raise InputError(  # pragma: no cover - numbers that only the parser refuses
            f"Column '{self.names[column]}' of {self.file} cannot be read as numbers.",
            "Export the recording again.",
            Place(self.file, None, self.names[column]),
        )

    def is_numeric(self, column: int) -> bool:
        """Return whether every cell of a column is a number or missing."""
        return self._load()[column] is not None

    def _load(self) -> list[FloatArray | None]:
        if not self._columns:
            self._columns = _parse(self)
        return self._columns


def read_table(text: str, file: str) -> TextTable:
    """Return the table in a file's text.

    Raises
    ------
    InputError : nothing in it looks like rows of numbers.
    """
    lines = text.split("\n")
    dialect = detect_dialect(lines)
    if dialect is None:
        raise InputError(
            f"No table of numbers was found in {file}.",
            "Check that it is a recording, exported as text with one sample a line.",
            Place(file=file),
        )
    kept = [
        index
        for index in range(dialect.first_row, len(lines))
        if lines[index].strip() and not is_comment(lines[index])
    ]
    body = [lines[index] for index in kept]
    width = max(dialect.n_columns, len(split_line(body[0], dialect.delimiter)))
    names, has_header = _name_columns(lines, dialect, width)
    return TextTable(file, names, has_header, dialect, body, [index + 1 for index in kept])


def _name_columns(lines: list[str], dialect: Dialect, width: int) -> tuple[tuple[str, ...], bool]:
    if dialect.header_row is None:
        return tuple(str(number) for number in range(1, width + 1)), False
    header = split_line(lines[dialect.header_row].lstrip("#/% "), dialect.delimiter)
    names = []
    for column in range(width):
        name = header[column].strip() if column < len(header) else ""
        if not name or name in names:
            name = f"{name} {column + 1}".strip()
        names.append(name)
    return tuple(names), True


def _parse(table: TextTable) -> list[FloatArray | None]:
    import pandas as pd  # noqa: PLC0415

    width = len(table.names)
    delimiter = table.dialect.delimiter
    body = "\n".join(line.rstrip() for line in table.lines)
    try:
        frame = pd.read_csv(
            io.StringIO(body),
            sep=r"\s+" if delimiter == " " else delimiter,
            decimal=table.dialect.decimal,
            header=None,
            names=list(range(width + 1)),
            na_values=_MISSING_WORDS,
            skipinitialspace=True,
            index_col=False,
        )
    except (pd.errors.ParserError, ValueError) as error:
        raise _explain_ragged(table, width) from error
    if frame[width].notna().any():
        raise _explain_ragged(table, width)
    columns: list[FloatArray | None] = []
    for column in range(width):
        series = frame[column]
        if pd.api.types.is_numeric_dtype(series.dtype) and series.dtype != bool:
            numbers = series.to_numpy(dtype=np.float64, copy=True)
            numbers[np.isinf(numbers)] = np.nan
            columns.append(numbers)
        else:
            columns.append(None)
    return columns


def _explain_ragged(table: TextTable, width: int) -> InputError:
    for row, line in zip(table.rows, table.lines, strict=True):
        n_cells = len(split_line(line, table.dialect.delimiter))
        if n_cells > width:
            return InputError(
                f"Line {row} of {table.file} has {n_cells} cells; the others have {width}.",
                "Check the line and the delimiter.",
                Place(table.file, row),
            )
    return InputError(
        f"The rows of {table.file} cannot be read.", "Export it again.", Place(table.file)
    )
