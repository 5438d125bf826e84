"""Bytes of a file as lines of text; what is not text is refused."""

from __future__ import annotations

import gzip
import zlib
from pathlib import Path

from cuebook.errors import InputError, Place

MAX_BYTES = 2_000_000_000


def read_bytes(path: Path) -> bytes:
    """Return the content of a file as it lies there.

    Raises
    ------
    InputError : no such file, a folder, unreadable or empty.
    """
    place = Place(file=str(path))
    if path.is_dir():
        raise InputError(f"{path} is a folder.", "Name the recordings in it.", place)
    try:
        if path.stat().st_size > MAX_BYTES:
            raise InputError(f"{path} is larger than 2 GB.", "Cut it into parts.", place)
        content = path.read_bytes()
    except FileNotFoundError as error:
        raise InputError(f"There is no file {path}.", "Check its name.", place) from error
    except OSError as error:
        raise InputError(
            f"{path} cannot be read: {error.strerror}.", "Check who owns it.", place
        ) from error
    if not content.strip():
        raise InputError(f"{path} is empty.", "Export the recording again.", place)
    return content


def decode_text(content: bytes, file: str) -> str:
    """Return a file's text: UTF-8, UTF-16 by its mark, else Latin-1; gzip is unpacked.

    Raises
    ------
    InputError : binary or damaged.
    """
    place = Place(file=file)
    if content[:2] == b"\x1f\x8b":
        try:
            content = gzip.decompress(content)
        except (OSError, EOFError, zlib.error) as error:
            raise InputError(
                f"{file} is a damaged gzip file.", "Copy or export it again.", place
            ) from error
    if content[:2] in {b"\xff\xfe", b"\xfe\xff"}:
        text = content.decode("utf-16", errors="replace")
    else:
        head = content[:65536]
        if b"\x00" in head or _count_control(head) > 0.02 * len(head):
            raise InputError(
                f"{file} is not a text file.",
                "Export it as comma- or tab-separated text.",
                place,
            )
        try:
            text = content.decode("utf-8-sig")
        except UnicodeDecodeError:
            text = content.decode("latin-1")
    return text.replace("\r\n", "\n").replace("\r", "\n")


def _count_control(head: bytes) -> int:
    allowed = {9, 10, 12, 13}
    return sum(byte < 32 and byte not in allowed for byte in head)
