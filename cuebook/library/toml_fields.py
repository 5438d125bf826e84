"""One table of a TOML file, read field by field; every complaint knows its file, line and field."""

from __future__ import annotations

import math
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any

from cuebook.errors import InputError, Place
from cuebook.library.toml_lines import TomlLines
from cuebook.vocabulary import find_nearest, load_vocabulary

_NOT_PRINTABLE = re.compile(r"[\x00-\x1f\x7f\ud800-\udfff]")


@dataclass(frozen=True)
class Table:
    """A table and where it stands."""

    values: Mapping[str, Any]
    path: tuple[str | int, ...]
    lines: TomlLines
    file: str

    def complain(self, key: str, what: str, hint: str, item: str | None = None) -> InputError:
        """Return the error for a field: what is wrong with it, where it stands, what to do."""
        line = (
            self.lines.find(*self.path, key)
            if item is None
            else self.lines.find_item(item, *self.path, key)
        )
        where = f"Line {line} of {self.file}" if line else self.file
        return InputError(f"{where}: {key} {what}.", hint, Place(self.file, line, key))

    def complain_unknown(
        self, key: str, word: str, what: str, known: Iterable[str], item: str | None = None
    ) -> InputError:
        """Return the error for an unknown word: it names the nearest known ones."""
        nearest = find_nearest(word, known)
        hint = f"Nearest known: {', '.join(nearest)}." if nearest else f"It must be a known {what}."
        return self.complain(key, f"'{word}' is no known {what}", hint, item)

    def check_keys(self, known: tuple[str, ...]) -> None:
        """Refuse a key that is not known; a mistyped one would be lost in silence."""
        for key in self.values:
            if key not in known:
                raise self.complain_unknown(key, key, "field here", known)

    def text(self, key: str, *, required: bool = False) -> str:
        """Return one line of text; empty if it is not there and not required."""
        value = self.values.get(key, "")
        if not isinstance(value, str):
            raise self.complain(key, "must be a text in quotes", "Put it in double quotes.")
        if _NOT_PRINTABLE.search(value):
            raise self.complain(key, "must be one line of plain text", "Take the line break out.")
        if required and not value.strip():
            raise self.complain(key, "is missing", "It is needed.")
        return value

    def texts(self, key: str) -> tuple[str, ...]:
        """Return a list of texts; empty if it is not there."""
        values = self.values.get(key, [])
        if not isinstance(values, list) or not all(isinstance(value, str) for value in values):
            raise self.complain(key, "must be a list of texts", f'Write {key} = ["one", "two"].')
        for value in values:
            if _NOT_PRINTABLE.search(value) or not value.strip():
                raise self.complain(key, "holds an empty or broken text", "Mend or remove it.")
        return tuple(values)

    def pattern(
        self, key: str, pattern: re.Pattern[str], what: str, default: str | None = None
    ) -> str:
        """Return a text that must have a given form."""
        value = self.text(key, required=default is None) or default or ""
        if not pattern.fullmatch(value):
            raise self.complain(key, f"is '{value}'; it must be {what}", "Write it so.")
        return value

    def slug(self, key: str, list_name: str, *, required: bool = False) -> str:
        """Return a slug of a vocabulary list; empty if it is not there and not required."""
        value = self.text(key, required=required)
        if value:
            self._check_slug(key, value, list_name)
        return value

    def slugs(self, key: str, list_name: str) -> tuple[str, ...]:
        """Return slugs of a vocabulary list, each once."""
        values = self.texts(key)
        for value in values:
            self._check_slug(key, value, list_name, in_list=True)
            if values.count(value) > 1:
                raise self.complain(key, f"names {value} twice", "Once is enough.", value)
        return values

    def whole(self, key: str, least: int) -> int | None:
        """Return a whole number; None if it is not there."""
        value = self.values.get(key)
        if value is None:
            return None
        if not isinstance(value, int) or isinstance(value, bool) or value < least:
            raise self.complain(key, f"must be a whole number, {least} or more", "No quotes.")
        return value

    def numbers(self, key: str) -> tuple[float, ...]:
        """Return a list of finite numbers."""
        values = self.values.get(key, [])
        if not isinstance(values, list) or not all(_is_number(value) for value in values):
            raise self.complain(key, "must be a list of numbers", f"Write {key} = [1, 2].")
        return tuple(float(value) for value in values)

    def table(self, key: str, *, required: bool = True) -> Table:
        """Return the table below a key; an empty one if it is not there and not required."""
        value = self.values.get(key, None if required else {})
        if not isinstance(value, dict):
            what = "is missing" if value is None else "must be a table"
            raise self.complain(key, what, f"Write a heading [{self._name(key)}].")
        return Table(value, (*self.path, key), self.lines, self.file)

    def tables(self, key: str) -> tuple[Table, ...]:
        """Return the tables of an array of tables; none if it is not there."""
        values = self.values.get(key, [])
        if not isinstance(values, list) or not all(isinstance(value, dict) for value in values):
            raise self.complain(key, "must be tables", f"Head each with [[{self._name(key)}]].")
        return tuple(
            Table(value, (*self.path, key, i), self.lines, self.file)
            for i, value in enumerate(values)
        )

    def _name(self, key: str) -> str:
        return ".".join([*(part for part in self.path if isinstance(part, str)), key])

    def _check_slug(self, key: str, value: str, list_name: str, *, in_list: bool = False) -> None:
        vocabulary = load_vocabulary()
        if not vocabulary.has(list_name, value):
            raise self.complain_unknown(
                key, value, list_name.replace("_", " "), vocabulary.slugs(list_name),
                value if in_list else None,
            )  # fmt: skip


def _is_number(value: object) -> bool:
    if isinstance(value, bool) or not isinstance(value, int | float):
        return False
    return not isinstance(value, float) or math.isfinite(value)
