"""What a command prints: data on stdout, words about it on stderr."""

from __future__ import annotations

import json
import math
import sys
from collections.abc import Mapping
from dataclasses import fields, is_dataclass
from enum import Enum
from typing import Any

import click

from cuebook.cli.exit_codes import get_exit_code
from cuebook.errors import CuebookError


def to_plain(value: object) -> Any:
    """Return a value made of dicts, lists, numbers and text only.

    NaN and infinities become None (JSON has neither); numpy scalars and arrays are unpacked;
    numbers stay unrounded.
    """
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    if value is None or isinstance(value, str | int | bool):
        return value.value if isinstance(value, Enum) else value
    if isinstance(value, Enum):
        return value.value
    if is_dataclass(value) and not isinstance(value, type):
        return {field.name: to_plain(getattr(value, field.name)) for field in fields(value)}
    if isinstance(value, Mapping):
        return {str(key): to_plain(entry) for key, entry in value.items()}
    if isinstance(value, list | tuple | set | frozenset):
        return [to_plain(entry) for entry in value]
    unpack = getattr(value, "tolist", None)  # numpy scalars and arrays
    if unpack is not None:
        return to_plain(unpack())
    return str(value)


def print_json(document: Mapping[str, object]) -> None:
    """Write one JSON document to stdout."""
    click.echo(json.dumps(to_plain(document), ensure_ascii=False, indent=2, allow_nan=False))


def print_error(error: CuebookError, *, as_json: bool) -> int:
    """Write one clear line (or one JSON document) to stderr; return the exit code."""
    code = get_exit_code(error)
    if as_json:
        document = {
            "format": "cuebook.error/1",
            "code": int(code),
            "message": error.message,
            "where": to_plain(error.place),
            "hint": error.hint,
        }
        click.echo(json.dumps(document, ensure_ascii=False), err=True)
    else:
        line = " ".join(f"{error.message} {error.hint}".split())
        click.echo(f"cuebook: {line}", err=True)
    return int(code)


def is_interactive() -> bool:
    """Return whether a question may be asked: stdin and stderr are both terminals."""
    return sys.stdin.isatty() and sys.stderr.isatty()
